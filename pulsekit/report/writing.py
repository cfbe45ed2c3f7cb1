"""An answer as a folder: every file appears whole or not at all."""

from __future__ import annotations

import hashlib
import io
import json
import os
import re
import shutil
import tempfile
import zipfile
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from ..errors import InputError, MissingFileError

__all__ = ["MOST_COPIED_BYTES", "place_files", "portable_case", "zip_of"]

#: A recording above this size travels as its name and hash only [bytes].
MOST_COPIED_BYTES = 20_000_000


def place_files(folder: str | Path, files: Mapping[str, bytes]) -> Path:
    """Write files (relative name -> content) into a folder, all of them or none.

    They are written into a hidden neighbour first; only when every one of them is on the disk do they
    take their places, each by one rename.

    Raises
    ------
    InputError
        If the folder cannot be made or written, or is a file.
    """
    target = Path(folder)
    if target.exists() and not target.is_dir():
        raise InputError(f"{target} is a file; give the name of a folder for the answer", name="folder", value=str(folder))
    staging = None
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        staging = Path(tempfile.mkdtemp(prefix=f".{target.name}-", dir=target.parent))
        for name, content in files.items():
            place = staging / name
            place.parent.mkdir(parents=True, exist_ok=True)
            place.write_bytes(content)
        target.mkdir(exist_ok=True)
        for name in files:
            (target / name).parent.mkdir(parents=True, exist_ok=True)
            os.replace(staging / name, target / name)
    except OSError as problem:
        raise InputError(
            f"the answer cannot be written into {target}: {problem.strerror or problem}; choose a folder that can be written",
            name="folder", value=str(folder),
        ) from problem  # fmt: skip
    finally:
        if staging is not None:
            shutil.rmtree(staging, ignore_errors=True)
    return target


def zip_of(files: Mapping[str, bytes]) -> bytes:
    """Return the files as one zip, without dates so that the same answer gives the same bytes."""
    sink = io.BytesIO()
    with zipfile.ZipFile(sink, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in sorted(files.items()):
            archive.writestr(zipfile.ZipInfo(name, date_time=(1980, 1, 1, 0, 0, 0)), content, zipfile.ZIP_DEFLATED)
    return sink.getvalue()


def safe_name(name: str) -> str:
    """A file name without parts of a path or characters that a file system or a page would take amiss.

    >>> safe_name("../../run 12<script>.csv")
    'run 12_script_.csv'
    """
    last = re.split(r"[/\\]", name)[-1]
    cleaned = re.sub(r"[^\w .()+-]", "_", last).strip(" .")
    return cleaned[:120] or "recording"


_FILE_KEYS = ("file", "zero_file")


def _file_places(data: Any, prefix: str = "") -> list[str]:
    """Dotted keys of every file that the case names."""
    places: list[str] = []
    if isinstance(data, Mapping):
        for key, value in data.items():
            dotted = f"{prefix}.{key}" if prefix else str(key)
            if key in _FILE_KEYS and isinstance(value, str):
                places.append(dotted)
            else:
                places += _file_places(value, dotted)
    elif isinstance(data, (list, tuple)):
        for index, value in enumerate(data):
            places += _file_places(value, f"{prefix}.{index}")
    return places


def portable_case(case: Any, data: Mapping[str, Any], *, reserved: set[str]) -> tuple[Any, dict[str, bytes], list[str]]:
    """Return the case with its files beside it, the files themselves, and what is said of those too large to copy.

    Each recording gets its SHA-256 into the case, so that a re-run on another file is an error.
    """
    copies: dict[str, bytes] = {}
    by_source: dict[Path, tuple[str, str]] = {}
    notes: list[str] = []
    for key in _file_places(data):
        source = (Path(case.folder) / str(case.get(key))).resolve()
        if source not in by_source:
            try:
                size = source.stat().st_size
                digest = hashlib.sha256()
                with source.open("rb") as stream:
                    while block := stream.read(1 << 20):
                        digest.update(block)
            except OSError as problem:
                raise MissingFileError(f"{source} cannot be read again to travel with the answer: {problem.strerror}", path=source) from problem
            if size > MOST_COPIED_BYTES:
                notes.append(f"{source.name} ({size / 1e6:.0f} MB) is not copied into the folder; its SHA-256 is {digest.hexdigest()}.")
                by_source[source] = (str(source), digest.hexdigest())
            else:
                name = _free_name(safe_name(source.name), reserved)
                reserved.add(name)
                copies[name] = source.read_bytes()
                by_source[source] = (name, digest.hexdigest())
        name, sha256 = by_source[source]
        case = case.with_value(key, name)
        if key.rsplit(".", 1)[-1] == "file":
            case = case.with_value(f"{key.rsplit('.', 1)[0]}.sha256", sha256)
    return case, copies, notes


def _free_name(name: str, taken: set[str]) -> str:
    stem, dot, ending = name.rpartition(".")
    candidate, number = name, 2
    while candidate in taken:
        candidate = f"{stem or name}-{number}{dot}{ending}" if stem else f"{name}-{number}"
        number += 1
    return candidate


def json_bytes(content: Mapping[str, Any]) -> bytes:
    """Strict JSON: a number that is not finite is a fault of ours and raises."""
    return (json.dumps(content, allow_nan=False, indent=1, ensure_ascii=False) + "\n").encode()
