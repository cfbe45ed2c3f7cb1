"""Case files: read with their place in every error, written whole or not at all."""

from __future__ import annotations

import os
import tempfile
import tomllib
from pathlib import Path
from typing import Any

from ..errors import CaseError, InputError, MissingFileError
from .case import Case, make_case

__all__ = ["case_from_toml", "load_case", "save_case"]

_FILE_KEYS = ("file", "zero_file")


def load_case(path: str | Path) -> Case:
    """Read a case file.

    Parameters
    ----------
    path : path
        A TOML file; paths in it are relative to its folder.

    Returns
    -------
    WallShearCase or PumpLineCase

    Raises
    ------
    MissingFileError
        If there is no such file.
    CaseError
        If it is no TOML, or a key or value is not acceptable; the message names file, key and remedy.

    Examples
    --------
    >>> load_case("nowhere.toml")
    Traceback (most recent call last):
        ...
    pulsekit.errors.MissingFileError: there is no case file nowhere.toml; check the name and the folder
    """
    place = Path(path)
    try:
        text = place.read_bytes().decode("utf-8-sig")
    except FileNotFoundError as problem:
        raise MissingFileError(f"there is no case file {place}; check the name and the folder", path=place) from problem
    except IsADirectoryError as problem:
        raise MissingFileError(f"{place} is a folder; give the case file in it, such as {place / 'case.toml'}", path=place) from problem
    except UnicodeDecodeError as problem:
        raise CaseError(f"{place} is not UTF-8 text; save the case file as UTF-8", path=place) from problem
    except OSError as problem:
        raise MissingFileError(f"{place} cannot be opened: {problem.strerror}", path=place) from problem
    return case_from_toml(text, folder=place.parent, path=place)


def case_from_toml(text: str, *, folder: str | Path = ".", path: Path | None = None) -> Case:
    """Read a case from the text of its file; paths in it are relative to ``folder``."""
    try:
        data = tomllib.loads(text)
    except tomllib.TOMLDecodeError as problem:
        raise CaseError(f"{path or 'the case'} is not valid TOML: {problem}", path=path) from problem
    try:
        return make_case(data, folder=folder, path=path)
    except CaseError as problem:
        line = _line_of(text, problem.key)
        if line is None or path is None:
            raise
        raise CaseError(
            str(problem).replace(f"{path}: ", f"{path}, line {line}: ", 1), key=problem.key, value=problem.value, path=path, line=line
        ) from problem


def _line_of(text: str, dotted: str | None) -> int | None:
    """Line at which the last word of a dotted key is set, if that is the only place."""
    if not dotted:
        return None
    word = dotted.rpartition(".")[2]
    found = [number for number, line in enumerate(text.splitlines(), 1) if line.split("=")[0].strip().strip("[]") == word]
    return found[0] if len(found) == 1 else None


def save_case(case: Case, path: str | Path) -> Path:
    """Write a case file, whole or not at all.

    Recordings that the case names by a relative path are named from the new place.
    """
    place = Path(path)
    if place.is_dir():
        raise InputError(f"{place} is a folder; give a file name, such as {place / 'case.toml'}", name="path", value=str(path))
    moved = type(case)(_moved(case.to_dict(), case.folder.resolve(), place.parent.resolve()), place.parent, place)
    try:
        place.parent.mkdir(parents=True, exist_ok=True)
        handle, hidden = tempfile.mkstemp(prefix=f".{place.name}-", dir=place.parent)
        with os.fdopen(handle, "w", encoding="utf-8") as stream:
            stream.write(moved.to_toml())
        Path(hidden).chmod(0o644)
        os.replace(hidden, place)
    except OSError as problem:
        raise InputError(f"the case cannot be written to {place}: {problem.strerror}; choose another place", name="path", value=str(path)) from problem
    return place


def _moved(data: Any, old: Path, new: Path) -> Any:
    if isinstance(data, dict):
        return {key: _moved_name(value, old, new) if key in _FILE_KEYS and isinstance(value, str) else _moved(value, old, new) for key, value in data.items()}
    if isinstance(data, list):
        return [_moved(entry, old, new) for entry in data]
    return data


def _moved_name(name: str, old: Path, new: Path) -> str:
    if Path(name).is_absolute() or old == new:
        return name
    try:
        return Path(os.path.relpath(old / name, new)).as_posix()
    except ValueError:  # another drive
        return str(old / name)
