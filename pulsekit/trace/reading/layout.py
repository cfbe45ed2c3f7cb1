"""How a text file is laid out: delimiter, marks, header, first row; settled from its head and tail."""

from __future__ import annotations

import csv
import re
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, field

from .grammar import BLANK, CLOCK, MISSING, NUMBER, OVERFLOW, TEXT, classify, is_comment, plain, suffix_of
from .told import Notes, Told
from .unit_words import read_unit

__all__ = ["LARGEST_WIDTH", "Layout", "fitting", "kind_of", "split_line", "table_shape"]

#: More columns than this are refused.
LARGEST_WIDTH = 2000
_CANDIDATES = ("\t", ";", "|", ",", " ")
_SHOWN = {"\t": "tab", " ": "blanks", "": "none"}


@dataclass
class Layout:
    """What was settled about a table of text."""

    encoding: str
    delimiter: str  # "" for one column, " " for runs of blanks
    decimal: str | None = None  # None: no cell with a mark seen yet
    width: int = 0  # cells per row, trailing empty ones included
    kinds: list[str] = field(default_factory=list)  # of each column: number, clock, text, blank
    first: int = 0  # index of the first row among the lines of the head
    names: list[str] = field(default_factory=list)
    units: list[str | None] = field(default_factory=list)  # of the unit row or the header; None: none written
    headers: list[str] = field(default_factory=list)  # as they stand in the file
    header_cells: list[str] | None = None  # the header's own line, to find it again after a restart
    preamble: dict[str, str] = field(default_factory=dict)
    quoted: bool = False
    doubt: int = 0  # line from which the commas may be decimal marks instead of delimiters
    suffixed: dict[int, str] = field(default_factory=dict)  # columns whose cells carry their unit

    @property
    def shown_delimiter(self) -> str:
        """Delimiter as told to a person."""
        return _SHOWN.get(self.delimiter, repr(self.delimiter))


def split_line(line: str, delimiter: str) -> list[str]:
    """Cells of one line; quotes are honoured.

    >>> split_line('1;"a;b";', ";"), split_line("  1   2 ", " ")
    (['1', 'a;b', ''], ['1', '2'])
    """
    if not delimiter:
        return [line]
    if '"' in line and delimiter != " ":
        try:
            return next(csv.reader([line], delimiter=delimiter, skipinitialspace=True))
        except (csv.Error, StopIteration):
            return line.split(delimiter)
    if delimiter == " ":
        if '"' in line:
            try:
                return [cell for cell in next(csv.reader([" ".join(line.split())], delimiter=" ")) if cell]
            except (csv.Error, StopIteration):
                pass
        return line.split()
    return line.split(delimiter)


def kind_of(cell: str, decimal: str | None) -> str:
    """Kind of a cell; '12.3 mL/min' counts as a number."""
    kind = classify(cell, decimal)
    if kind == TEXT and len(cell) < 40 and (parted := suffix_of(cell)):
        unit = read_unit(parted[1])
        if unit.dimension and classify(parted[0], decimal) == NUMBER:
            return NUMBER
    return kind


def fitting(kinds: Sequence[str], cells: Sequence[str], decimal: str | None) -> bool:
    """Tell whether the cells of a line make a row of this table."""
    if len(cells) != len(kinds):
        return False
    numbers = False
    for wanted, cell in zip(kinds, cells, strict=True):
        kind = kind_of(cell, decimal)
        numbers = numbers or kind == NUMBER
        if wanted == NUMBER and kind not in (NUMBER, BLANK, MISSING, OVERFLOW):
            return False
        if wanted == CLOCK and kind not in (CLOCK, BLANK, MISSING):
            return False
    return numbers or any(kind_of(cell, decimal) in (MISSING, OVERFLOW) for cell in cells)


def _column_kinds(rows: list[list[str]], width: int, decimal: str | None) -> list[str]:
    kinds = []
    for place in range(width):
        count = Counter(kind_of(row[place], decimal) for row in rows)
        full = sum(count.values()) - count[BLANK]
        known = full - count[MISSING] - count[OVERFLOW]
        if not full:
            kinds.append(BLANK)
        elif count[NUMBER] and count[NUMBER] >= 0.5 * known:
            kinds.append(NUMBER)
        elif count[CLOCK] and count[CLOCK] >= 0.5 * known:
            kinds.append(CLOCK)
        else:
            kinds.append(TEXT if known else NUMBER)
    return kinds


def _try(lines: Sequence[str], delimiter: str, decimal: str | None) -> tuple[float, int, Layout] | None:
    """Read the head with one delimiter; return (rows that fit, useful columns, layout)."""
    split = [[] if not line.strip() or is_comment(line) else split_line(line, delimiter) for line in lines]
    numeric = [cells for cells in split if cells and any(kind_of(cell, decimal) == NUMBER for cell in cells)]
    if not numeric:
        return None
    later = numeric[len(numeric) // 3 :]
    width, _ = Counter(len(cells) for cells in later).most_common(1)[0]
    if width > LARGEST_WIDTH:
        return None
    kinds = _column_kinds([cells for cells in later if len(cells) == width], width, decimal)
    useful = sum(kind in (NUMBER, CLOCK) for kind in kinds)
    if NUMBER not in kinds:
        return None
    fits = [bool(cells) and fitting(kinds, cells, decimal) for cells in split]
    places = [place for place, cells in enumerate(split) if cells]
    first = _first_row(places, fits)
    if first is None:
        return None
    texts = sum(kind == TEXT for kind in kinds)
    layout = Layout(encoding="", delimiter=delimiter, width=width, kinds=kinds, first=first)
    return sum(fits[first:]) * (useful / (useful + texts)), useful, layout


def _first_row(places: list[int], fits: list[bool]) -> int | None:
    """First line from which the rows go on: it fits, and of it and the next five at least half do."""
    for order, place in enumerate(places):
        if fits[place]:
            following = places[order : order + 6]
            if sum(fits[other] for other in following) >= 0.5 * len(following):
                return place
    return None


def table_shape(lines: Sequence[str], told: Told, notes: Notes) -> Layout | None:
    """Settle delimiter, width, kinds of the columns and first row; None if there is no table."""
    for number, line in enumerate(lines[:5], 1):
        if max(line.count(mark) for mark in ",;\t|") > LARGEST_WIDTH:
            raise notes.refuse(
                f"this line has more than {LARGEST_WIDTH} cells; a recording has fewer columns: turn the table, or export fewer channels",
                line=number,
            )
    candidates = (told.delimiter,) if told.delimiter else _CANDIDATES
    few = lines[:600] if any(kind_of(cell, None) == NUMBER for cell in re.split(r"[;,\t| ]+", lines[min(599, len(lines) - 1)])) else lines
    tried = [found for mark in candidates if (found := _try(few, mark, told.decimal))]
    if not tried:
        return None
    best = max(found[0] for found in tried)
    if not best:
        return None
    close = [found for found in tried if found[0] >= 0.98 * best]
    chosen = max(close, key=lambda found: found[1])[2]
    if chosen.width == 1:
        chosen.delimiter = ""
    return _one_column(lines, told) or chosen if (chosen.delimiter, chosen.width) == (",", 2) and not told.delimiter else chosen


def _one_column(lines: Sequence[str], told: Told) -> Layout | None:
    """Whole numbers in pairs under a single name: one column of decimal commas."""
    if told.decimal == ".":
        return None
    found = _try(lines, "\x1f", ",")
    if found is None or found[2].first == 0:
        return None
    layout = found[2]
    above = next((line for line in reversed(lines[: layout.first]) if line.strip()), "")
    if "," in above or classify(above) != TEXT or any("." in line for line in lines[layout.first :]):
        return None
    layout.delimiter = ""
    return layout


def data_cells(lines: Sequence[str], layout: Layout) -> list[tuple[int, list[str]]]:
    """Rows of the head, each (line number, cells)."""
    rows = []
    for place in range(layout.first, len(lines)):
        if lines[place].strip() and not is_comment(lines[place]):
            cells = split_line(lines[place], layout.delimiter)
            if fitting(layout.kinds, cells, layout.decimal):
                rows.append((place + 1, cells))
    return rows


def find_suffixes(layout: Layout, rows: list[tuple[int, list[str]]]) -> list[tuple[int, list[str]]]:
    """Find columns whose every cell carries the same unit; return the rows without it."""
    for place, kind in enumerate(layout.kinds):
        cells = [plain(cells[place]) for _, cells in rows[:200]]
        parts = [suffix_of(cell) for cell in cells if classify(cell, None) == TEXT]
        if kind == NUMBER and parts and all(parts):
            words = {part[1] for part in parts if part}
            if len(words) == 1:
                layout.suffixed[place] = words.pop()
    if not layout.suffixed:
        return rows
    return [(line, [_without(cell) if place in layout.suffixed else cell for place, cell in enumerate(cells)]) for line, cells in rows]


def _without(cell: str) -> str:
    parted = suffix_of(cell) if classify(plain(cell), None) == TEXT else None
    return parted[0] if parted else cell
