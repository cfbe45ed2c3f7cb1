"""Where an answer comes from: file and hash, versions, seed, samples, date."""

from __future__ import annotations

import datetime
import platform
from collections.abc import Mapping
from functools import lru_cache
from importlib import metadata
from typing import Any

from ..errors import CaseError
from .case import Case

__all__ = ["provenance", "versions"]

_LIBRARIES = ("numpy", "scipy", "pandas", "pint", "matplotlib", "jinja2")


@lru_cache(maxsize=1)
def versions() -> Mapping[str, str]:
    """Versions of the libraries that the numbers rest on."""
    found = {"python": platform.python_version()}
    for name in _LIBRARIES:
        try:
            found[name] = metadata.version(name)
        except metadata.PackageNotFoundError:
            continue
    return found


@lru_cache(maxsize=1)
def own_version() -> str:
    """Version of PulseKit."""
    try:
        return metadata.version("pulsekit")
    except metadata.PackageNotFoundError:
        return "not installed"


def provenance(case: Case, recording: Any, extras: Mapping[str, Any]) -> dict[str, Any]:
    """Return file, hash, versions, seed, samples and date of an answer."""
    rows: dict[str, Any] = {"version": own_version()}
    if recording is not None:
        name = str(recording.path).replace("\\", "/").rpartition("/")[2]
        rows |= {"file": name, "sha256": recording.sha256}
        check_hash(case.get("recording.sha256"), recording, "recording")
    rows |= {key: extras[key] for key in ("samples", "seed") if key in extras}
    rows["date"] = datetime.datetime.now(datetime.UTC).astimezone().isoformat(timespec="seconds")
    rows["libraries"] = dict(versions())
    return rows


def check_hash(stated: Any, recording: Any, section: str) -> None:
    """A recording that is not the one that the case was made with is an error."""
    if stated and recording.sha256 and str(stated).lower() != recording.sha256.lower():
        raise CaseError(
            f"{section}.file: {recording.path} is not the recording this case was made with (its SHA-256 is {recording.sha256[:12]}…, the case says "
            f"{str(stated)[:12]}…); restore that file, or take {section}.sha256 out of the case to use this one",
            key=f"{section}.sha256", value=stated,
        )  # fmt: skip
