"""What a front end keeps between two analyses, so that a change of the radius does not read the file again."""

from __future__ import annotations

import contextlib
import json
import threading
from collections import OrderedDict
from collections.abc import Callable, Hashable
from pathlib import Path
from typing import Any

from ..errors import MissingFileError
from ..trace import read_recording
from .case import Case

__all__ = ["Workspace"]

_READING = ("time", "sample_rate", "decimal", "delimiter", "encoding", "block", "units")
_MOST = 24


class Workspace:
    """Results that depend on a part of the case only, by that part. Nothing in it changes an answer."""

    def __init__(self) -> None:
        self._kept: OrderedDict[Hashable, Any] = OrderedDict()
        self._lock = threading.Lock()

    def remember(self, key: Hashable, make: Callable[[], Any]) -> Any:
        """Return what was made for this key, or make it."""
        with self._lock:
            if key in self._kept:
                self._kept.move_to_end(key)
                return self._kept[key]
        # Two threads may make the same value; that costs time, never a wrong answer.
        value = make()
        with self._lock:
            value = self._kept.setdefault(key, value)
            while len(self._kept) > _MOST:
                self._kept.popitem(last=False)
        return value

    def recording(self, case: Case, section: str = "recording", *, progress: Any = None, stop: Any = None) -> Any:
        """Read the recording that a section of the case names."""
        place = case.file_path(f"{section}.file")
        try:
            stat = place.stat()
        except OSError as problem:
            raise MissingFileError(
                f"{section}.file: there is no recording {place}; check the name, relative to the case file's folder {case.folder}", path=place
            ) from problem
        options = {name: case.get(f"{section}.{name}") for name in _READING if case.get(f"{section}.{name}") is not None}
        if "sample_rate" in options:
            options["sample_rate"] = case.value(f"{section}.sample_rate")
        column, unit = case.get(f"{section}.signal") or case.get(f"{section}.column"), case.get(f"{section}.unit")
        if unit and column:
            options["units"] = {**options.get("units", {}), str(column): str(unit)}
        key = ("recording", str(place.resolve()), stat.st_mtime_ns, stat.st_size, json.dumps(options, sort_keys=True, default=str))
        more = {name: value for name, value in (("progress", progress), ("stop", stop)) if value is not None}
        return self.remember(key, lambda: read_recording(Path(place), **options, **more))


def part_key(name: str, case: Case, *sections: str) -> tuple[str, str]:
    """Key of a result that depends on some sections of the case, and on the files that they name as these are now."""
    parts = [case.get(section) for section in sections]
    return name, json.dumps([*parts, str(case.folder), _stamps(parts, case.folder)], sort_keys=True, default=str)


def _stamps(part: Any, folder: Path) -> list[tuple[str, int, int]]:
    """Name, size and time of change of every file named in a part of a case."""
    if isinstance(part, dict):
        found = [stamp for value in part.values() for stamp in _stamps(value, folder)]
        for name in ("file", "zero_file"):
            if isinstance(part.get(name), str):
                with contextlib.suppress(OSError):
                    stat = (folder / part[name]).expanduser().stat()
                    found.append((part[name], stat.st_size, stat.st_mtime_ns))
        return found
    if isinstance(part, list):
        return [stamp for value in part for stamp in _stamps(value, folder)]
    return []
