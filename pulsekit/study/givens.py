"""A table of givens: one row per recording, one column per key of the case, units in the header."""

from __future__ import annotations

import re
from collections.abc import Mapping
from pathlib import Path

import pandas as pd

from ..errors import InputError, MissingFileError

__all__ = ["read_givens"]

_HEAD = re.compile(r"^\s*(?P<key>[^(\[]+?)\s*(?:[(\[](?P<unit>[^)\]]*)[)\]])?\s*$")


def read_givens(path: str | Path) -> dict[str, dict[str, str]]:
    """Read a table of givens; return recording name -> dotted key -> value as a case file writes it.

    The first column is ``recording`` (a file name, with or without its ending). Every other head is a
    dotted key of the case with its unit, such as ``tube.radius (mm)``; a cell may be ``3.1`` or
    ``3.1 ± 0.1`` (a standard uncertainty in the same unit). An empty cell leaves the template's value.

    Raises
    ------
    MissingFileError
        If there is no such file.
    InputError
        If the table has no column ``recording``, or a recording stands there twice.
    """
    place = Path(path)
    try:
        table = pd.read_csv(place, dtype=str, keep_default_na=False, comment="#", sep=None, engine="python", skipinitialspace=True)
    except FileNotFoundError as problem:
        raise MissingFileError(f"there is no table of givens at {place}; check --givens", path=place) from problem
    except (OSError, UnicodeDecodeError, pd.errors.ParserError, pd.errors.EmptyDataError) as problem:
        raise InputError(
            f"the table of givens {place} cannot be read as delimited text: {problem}", name="givens", value=str(place)
        ) from problem
    heads = {column: _split_head(str(column)) for column in table.columns}
    named = [column for column, (key, _) in heads.items() if key.lower() == "recording"]
    if not named:
        raise InputError(
            f"{place} has no column 'recording'; it has: {', '.join(map(str, table.columns))}", name="givens", value=str(place)
        )
    rows: dict[str, dict[str, str]] = {}
    for line, record in enumerate(table.to_dict("records"), start=2):
        name = str(record[named[0]]).strip()
        if not name:
            continue
        if name in rows:
            raise InputError(f"{place}, line {line}: recording {name!r} stands there twice; keep one row", name="givens", value=name)
        rows[name] = _row(record, heads, named[0])
    return rows


def _split_head(head: str) -> tuple[str, str]:
    match = _HEAD.match(head)
    return (match["key"].strip(), (match["unit"] or "").strip()) if match else (head.strip(), "")


def _row(record: Mapping[str, str], heads: Mapping[str, tuple[str, str]], named: str) -> dict[str, str]:
    values = {}
    for column, (key, unit) in heads.items():
        cell = str(record[column]).strip()
        if column == named or not cell:
            continue
        # A cell that already carries its own unit keeps it; a bare number takes the unit of the head.
        bare = re.fullmatch(r"[-+\d.eE\s]+(?:(?:±|\+/-)\s*[\d.eE\s]+%?)?", cell)
        if not bare or not unit:
            values[key] = cell
        elif cell.endswith("%") and ("±" in cell or "+/-" in cell):
            number, spread = re.split(r"±|\+/-", cell)
            values[key] = f"{number.strip()} {unit} ± {spread.strip()}"
        elif "±" in cell or "+/-" in cell:
            number, spread = re.split(r"±|\+/-", cell)
            values[key] = f"{number.strip()} {unit} ± {spread.strip()} {unit}"
        else:
            values[key] = f"{cell} {unit}"
    return values


def givens_of(table: Mapping[str, Mapping[str, str]], recording: Path) -> Mapping[str, str]:
    """The row of a recording, by its file name with or without its ending; empty if it has none."""
    for name in (recording.name, recording.stem, str(recording)):
        if name in table:
            return table[name]
    return {}
