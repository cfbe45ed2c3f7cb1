"""Reads the rows of a table: pandas where the text is clean, cell by cell where it is not."""

from __future__ import annotations

import io
import warnings
from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from ...errors import RecordingError
from .grammar import BLANK, CLOCK, MISSING, NUMBER, OVERFLOW, classify, is_comment, number, plain, suffix_of
from .layout import Layout, kind_of, split_line
from .pieces import Piece
from .told import Notes, clean, listed

__all__ = ["Grown", "RowReader", "fixed_decimals"]

_MARKERS = ["", "NaN", "nan", "NAN", "N/A", "n/a", "#N/A", "NA", "na", "null", "NULL", "--", "---", "-"]
_SPLIT = 200_000  # a piece that is not clean is tried again in parts of this size [bytes]
_PARSE_TROUBLE = (ValueError, Warning, TypeError, OverflowError, pd.errors.ParserError, pd.errors.EmptyDataError, UnicodeError)


class Grown:
    """A column that grows in place: no second copy when it is done."""

    def __init__(self) -> None:
        self._room: NDArray[np.float64] = np.empty(0)
        self._used = 0

    def add(self, values: NDArray[np.float64], expected: int = 0) -> None:
        """Append values; ``expected`` is a guess of the final length."""
        needed = self._used + len(values)
        if needed > len(self._room):
            self._room.resize(max(needed, expected, int(1.3 * len(self._room))), refcheck=False)
        self._room[self._used : needed] = values
        self._used = needed

    def done(self) -> NDArray[np.float64]:
        """Return the values, without spare room."""
        self._room.resize(self._used, refcheck=False)
        return self._room


def decimals_of(cell: str, decimal: str) -> int:
    """Count the digits after the decimal mark."""
    return len(plain(cell).partition(decimal)[2])


def fixed_decimals(rows: list[tuple[int, list[str]]], places: tuple[int, ...], decimal: str) -> dict[int, int]:
    """Columns whose every sampled cell has the same number (above 0) of decimals: a shorter last cell was cut."""
    found = {}
    for place in places:
        counts = {decimals_of(cells[place], decimal) for _, cells in rows[:400] if classify(cells[place], decimal) == NUMBER}
        if len(counts) == 1 and len(rows) >= 5 and (count := counts.pop()):
            found[place] = count
    return found


@dataclass
class RowReader:
    """Takes pieces of text, gives numbers; keeps account of everything that was not a clean row."""

    layout: Layout
    notes: Notes
    stored: tuple[int, ...]  # columns of numbers that are kept
    texts: tuple[int, ...]  # columns of times as text
    sink: Callable[[dict[int, NDArray[np.float64]], dict[int, list[str]]], Any]
    rows: int = 0
    line_starts: list[tuple[int, int]] = field(default_factory=list)  # (row, line) where the row-to-line step changes
    bad: list[tuple[int, str]] = field(default_factory=list)
    good_after_bad: int = 0
    tail: list[tuple[int, str]] = field(default_factory=list)  # bad lines since the last row: a footer, if nothing follows
    restarts: list[tuple[int, int]] = field(default_factory=list)  # (row, line) of a repeated header
    missing: dict[int, Counter[str]] = field(default_factory=dict)
    first_missing: dict[int, int] = field(default_factory=dict)
    odd_text: dict[int, list[tuple[int, str]]] = field(default_factory=dict)
    bad_count: int = 0
    fixed: dict[int, int] = field(default_factory=dict)  # columns written with a fixed number of decimals
    counted: bool = False  # time is counted by rows: a damaged row keeps its place
    cut: tuple[int, str] | None = None  # the last line, if it was cut

    def take(self, piece: Piece) -> None:
        """Read one piece of whole lines."""
        text = piece.text
        if piece.last and text and not piece.ended:
            whole = max(text.rfind(b"\n"), text.rfind(b"\r")) + 1
            self._clean(text[:whole], piece.first_line)
            self._by_cell(text[whole:], piece.first_line + (text[:whole].count(b"\n") or text[:whole].count(b"\r")), unended=True)
            return
        self._clean(text, piece.first_line, piece.lines if piece.ended else -1)

    def _clean(self, text: bytes, line: int, lines: int = -1) -> None:
        if not text or text.isspace():
            return
        if self._fast(text, line, lines) or self._with_blanks(text, line):
            return
        if len(text) > 2 * _SPLIT and b"\n" in text:
            begin = 0
            while begin < len(text):
                end = text.find(b"\n", begin + _SPLIT) + 1 or len(text)
                part = text[begin:end]
                self._clean(part, line)
                line += part.count(b"\n")
                begin = end
            return
        self._by_cell(text, line)

    def _parse(self, text: bytes, **options: Any) -> pd.DataFrame | None:
        layout = self.layout
        if (b'"' in text and not layout.quoted) or (layout.decimal is None and (b"," in text) and layout.delimiter != ","):
            return None
        kinds: dict[int, Any] = dict.fromkeys(range(layout.width), str)
        kinds |= dict.fromkeys(self.stored, np.float64)
        try:
            with warnings.catch_warnings():
                warnings.simplefilter("error")  # the parser only warns where a first row is too long
                return pd.read_csv(
                io.BytesIO(text), header=None, names=range(layout.width), index_col=False, dtype=kinds, engine="c", skip_blank_lines=True,
                sep=r"\s+" if layout.delimiter == " " else (layout.delimiter or "\x1f"), decimal=layout.decimal or ".",
                quoting=0 if layout.quoted else 3, low_memory=False, **options,
            )  # fmt: skip
        except _PARSE_TROUBLE:
            return None

    def _fast(self, text: bytes, line: int, lines: int) -> bool:
        """Every cell of the stored columns is a number: nothing to think about."""
        if self.layout.suffixed or not self.stored:
            return False
        frame = self._parse(text, na_filter=False)
        if frame is None or not len(frame):
            return False
        values = {place: frame[place].to_numpy() for place in self.stored}
        if not all(np.isfinite(column).all() for column in values.values()):
            return False
        if len(frame) != (lines if lines >= 0 else _lines(text)) and len(frame) != _filled_lines(text):
            return False
        # A short line would leave the last number without text, which the parser refuses.
        if self.layout.width - 1 not in self.stored and not self._square(text, len(frame)):
            return False
        texts = {place: frame[place].tolist() for place in self.texts}
        if any(classify(cell) != CLOCK for column in texts.values() for cell in column):
            return False
        self._deliver(values, texts, line)
        return True

    def _with_blanks(self, text: bytes, line: int) -> bool:
        """Some cells are blank or hold a common marker; each line has all its cells."""
        if self.layout.suffixed or self.layout.delimiter in ("", " ") or not self.stored:
            return False
        frame = self._parse(text, na_values=_MARKERS, keep_default_na=False)
        if frame is None or not len(frame) or len(frame) != _lines(text):
            return False
        if not self._square(text, len(frame)):
            return False
        values = {place: frame[place].to_numpy(float) for place in self.stored}
        if any(np.isinf(column).any() for column in values.values()):
            return False
        texts = {place: frame[place].fillna("").tolist() for place in self.texts}
        if any(classify(cell) not in (CLOCK, BLANK, MISSING) for column in texts.values() for cell in column):
            return False
        for place, column in values.items():
            absent = np.isnan(column)
            if count := int(absent.sum()):
                self._lost(place, "blank or marked missing", line + int(np.argmax(absent)), count)
        self._deliver(values, texts, line)
        return True

    def _square(self, text: bytes, rows: int) -> bool:
        """Tell whether every line has all its cells: none has more (the parser refuses), so the total tells."""
        mark = self.layout.delimiter
        if mark in ("", " ") or self.layout.quoted:
            return mark in ("", " ")
        return text.count(mark.encode()) == rows * (self.layout.width - 1)

    def _lost(self, place: int, what: str, line: int, count: int = 1) -> None:
        self.missing.setdefault(place, Counter())[what] += count
        self.first_missing.setdefault(place, line)

    def _deliver(self, values: dict[int, NDArray[np.float64]], texts: dict[int, list[str]], line: int) -> None:
        count = len(next(iter(values.values()), next(iter(texts.values()), [])))
        if not count:
            return
        self._after_bad()
        self.line_starts.append((self.rows, line))
        self.rows += count
        self.sink(values, texts)

    def _after_bad(self) -> None:
        """Rows follow: what looked like a footer are bad lines in the middle."""
        self.bad.extend(self.tail[: max(0, 200 - len(self.bad))])
        self.bad_count += len(self.tail)
        self.tail.clear()

    def _by_cell(self, text: bytes, line: int, *, unended: bool = False) -> None:
        """Read line by line and cell by cell."""
        layout = self.layout
        values: dict[int, list[float]] = {place: [] for place in self.stored}
        texts: dict[int, list[str]] = {place: [] for place in self.texts}
        start: int | None = None
        expect = line

        def flush() -> None:
            nonlocal start
            if start is not None:
                self._deliver({place: np.array(column) for place, column in values.items()}, {p: list(c) for p, c in texts.items()}, start)
                for numbers in values.values():
                    numbers.clear()
                for words in texts.values():
                    words.clear()
            start = None

        for at, raw in enumerate(_lines_of(text), line):
            stripped = raw.strip()
            if not stripped or is_comment(raw):
                continue
            cells = split_line(raw, layout.delimiter)
            row = self._row(cells, at, unended)
            if row is None and self.counted and not unended and raw.lstrip()[:1] in "0123456789+-.,":
                row = self._damaged(raw, at)
            if row is None:
                flush()
                self._bad_line(raw, cells, at, unended)
                continue
            if start is not None and at != expect:
                flush()
            if start is None:
                start = at
            expect = at + 1
            if self.tail:
                self._after_bad()
            for place in self.stored:
                values[place].append(row[place])
            for place in self.texts:
                texts[place].append(plain(cells[place]))
        flush()

    def _row(self, cells: list[str], line: int, unended: bool) -> dict[int, float] | None:
        """Numbers of a row, NaN where there is none; None if the line is no row."""
        layout = self.layout
        if len(cells) != layout.width:
            return None
        row: dict[int, float] = {}
        odd: list[tuple[int, str]] = []
        lost: list[tuple[int, str]] = []
        numbers = 0
        for place in self.texts:
            if kind_of(cells[place], None) not in (CLOCK, BLANK, MISSING):
                return None
        for place in self.stored:
            cell = cells[place]
            if place in layout.suffixed and (parted := suffix_of(cell)) and parted[1] == layout.suffixed[place]:
                cell = parted[0]
            kind = classify(cell, layout.decimal)
            value = float("nan")
            if kind == NUMBER:
                value = number(cell, layout.decimal or ".")
                numbers += 1
                if not np.isfinite(value):
                    lost.append((place, "beyond the range of numbers"))
            elif kind == BLANK:
                lost.append((place, "blank"))
            elif kind in (MISSING, OVERFLOW):
                lost.append((place, repr(plain(cell)[:20]) + (" (overflow)" if kind == OVERFLOW else "")))
            else:
                odd.append((place, plain(cell)))
            row[place] = value if np.isfinite(value) else float("nan")
        if unended and any(decimals_of(cells[place], layout.decimal or ".") < count for place, count in self.fixed.items()):
            return None
        if (odd and (len(odd) >= max(1, len(self.stored) - 1) or numbers == 0)) or (unended and (odd or self._ends_blank(cells))):
            return None
        if not numbers and not any("overflow" in what for _, what in lost) and not self.texts and not self.counted:
            return None
        for place, what in lost:
            self._lost(place, what, line)
        for place, what in odd:
            self._lost(place, f"text {clean(what, 20)!r}", line)
        return row

    def _damaged(self, raw: str, line: int) -> dict[int, float]:
        """A line that was a row once: its place in the count is kept, its numbers are not."""
        for place in self.stored:
            self._lost(place, f"damaged row {clean(raw, 20)!r}", line)
        return dict.fromkeys(self.stored, float("nan"))

    def _ends_blank(self, cells: list[str]) -> bool:
        """Tell whether the last column of numbers is without text: the line may have been cut there."""
        places = [place for place, kind in enumerate(self.layout.kinds) if kind == NUMBER]
        return bool(places) and classify(cells[places[-1]], self.layout.decimal) == BLANK

    def _bad_line(self, raw: str, cells: list[str], line: int, unended: bool) -> None:
        layout = self.layout
        if layout.header_cells and [plain(cell) for cell in cells][: len(layout.header_cells)] == layout.header_cells:
            self.restarts.append((self.rows, line))
            self.tail = [item for item in self.tail if line - item[0] > 60]  # the preamble of the restart
            return
        if unended and len(cells) <= layout.width and raw.lstrip()[:1] in '0123456789+-.,"':
            self.cut = (line, raw)
            return
        if len(self.tail) < 20_000:
            self.tail.append((line, raw))

    def line_of(self, row: int) -> int:
        """Line in which a row stands."""
        starts = [begin for begin, _ in self.line_starts]
        place = int(np.searchsorted(starts, row, side="right")) - 1
        begin, line = self.line_starts[max(place, 0)]
        return line + row - begin

    def report(self) -> None:
        """Say what was left out; refuse if it is too much to call it a table."""
        if self.bad_count:
            lines = [line for line, _ in self.bad]
            share = self.bad_count / max(self.bad_count + self.rows, 1)
            if self.bad_count > 3 and share > 0.1:
                first = self.bad[0]
                raise RecordingError(
                    f"{self.notes.where}:{first[0]}: {self.bad_count} of {self.bad_count + self.rows} lines are no rows of the table (this one is {clean(first[1], 40)!r}); "
                    "take them out, or pass delimiter= or decimal= if the table was misjudged",
                    path=self.notes.where, line=first[0],
                )  # fmt: skip
            what = "line was" if self.bad_count == 1 else "lines were"
            self.notes.add(
                f"{self.bad_count} {what} left out because they are no rows of the table: line {listed(lines)} ({clean(self.bad[0][1], 40)!r})."
            )
        if self.tail:
            line, raw = self.tail[0]
            self.notes.add(
                f"{len(self.tail)} line{'s' if len(self.tail) > 1 else ''} after the last row left aside as a footer, from line {line} ({clean(raw, 40)!r})."
            )
        if self.cut:
            self.notes.add(f"The last line ({self.cut[0]}) was cut: {clean(self.cut[1], 40)!r} is no whole row and was left out.")


def _lines(text: bytes) -> int:
    """Count the lines."""
    mark = b"\n" if b"\n" in text else b"\r"
    return text.count(mark) + (not text.endswith(mark))


def _filled_lines(text: bytes) -> int:
    """Count the lines that are not empty."""
    return sum(1 for line in text.splitlines() if line.strip())


def _lines_of(text: bytes) -> list[str]:
    """Lines at LF, CR LF or CR only (other characters may look like line ends)."""
    return text.decode("utf-8", "replace").replace("\r\n", "\n").replace("\r", "\n").split("\n")
