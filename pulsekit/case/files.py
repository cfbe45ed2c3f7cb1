"""Case files: read with their place in every error, written whole or not at all."""

from __future__ import annotations

import os
import re
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
    except InputError as problem:
        dotted = getattr(problem, "key", None) or problem.name
        line = line_of(text, dotted)
        if line is None or path is None:
            raise
        sentence = str(problem).replace(f"{path}: ", f"{path}, line {line}: ", 1)
        if isinstance(problem, CaseError):
            raise CaseError(sentence, name=dotted, value=problem.value, path=path, key=dotted, line=line) from problem
        raise type(problem)(sentence, **problem.details) from problem


def line_of(text: str, dotted: str | None) -> int | None:
    """Line at which a dotted key (or section) of a case file stands, or None.

    >>> line_of('kind = "pump line"\\n[[element]]\\n[[element]]\\nlength = "2 m"', "element.1.length")
    4
    """
    if not dotted:
        return None
    counts: dict[str, int] = {}
    places: dict[str, int] = {}
    section = ""
    for number, line in enumerate(text.splitlines(), 1):
        bare = line.strip()
        if match := re.match(r"\[\[\s*([\w.-]+)\s*\]\]", bare):
            name = _numbered(match[1], counts)
            counts[name] = counts.get(name, -1) + 1
            section = f"{name}.{counts[name]}"
            places.setdefault(name, number)
        elif match := re.match(r"\[\s*([\w.-]+)\s*\]", bare):
            section = _numbered(match[1], counts)
        elif match := re.match(r"([\w.-]+|\"[^\"]*\")\s*=", bare):
            key = match[1].strip('"')
            places.setdefault(f"{section}.{key}" if section else key, number)
            continue
        else:
            continue
        places.setdefault(section, number)
    while dotted and dotted not in places:
        dotted = dotted.rpartition(".")[0]
    return places.get(dotted) if dotted else None


def _numbered(name: str, counts: dict[str, int]) -> str:
    """Name of a table with the number of the list entry that it belongs to: element.end -> element.1.end."""
    parts: list[str] = []
    words = name.split(".")
    for position, word in enumerate(words):
        parts.append(word)
        so_far = ".".join(parts)
        if so_far in counts and position < len(words) - 1:
            parts.append(str(counts[so_far]))
    return ".".join(parts)


def save_case(case: Case, path: str | Path) -> Path:
    """Write a case file, whole or not at all.

    Recordings that the case names by a relative path are named from the new place.
    """
    place = Path(path)
    if place.is_dir():
        raise InputError(f"{place} is a folder; give a file name, such as {place / 'case.toml'}", name="path", value=str(path))
    moved = type(case)(_moved(case.to_dict(), case.folder.resolve(), place.parent.resolve()), place.parent, place)
    hidden = ""
    try:
        place.parent.mkdir(parents=True, exist_ok=True)
        handle, hidden = tempfile.mkstemp(prefix=f".{place.name}-", dir=place.parent)
        with os.fdopen(handle, "w", encoding="utf-8") as stream:
            stream.write(moved.to_toml())
        Path(hidden).chmod(0o644)
        os.replace(hidden, place)
    except OSError as problem:
        if hidden:
            Path(hidden).unlink(missing_ok=True)
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
