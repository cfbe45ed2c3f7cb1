"""Delimited text to a Recording: the head settles the layout, reading verifies it."""

from __future__ import annotations

import hashlib
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from ...errors import InputError, MissingColumnError
from ..clock import Clock
from ..recording import Recording
from .assemble import RawColumn, build
from .decimals import settle_marks
from .encodings import find_encoding
from .grammar import BLANK, CLOCK, NUMBER, TEXT
from .head import head_lines
from .header import read_header
from .layout import Layout, data_cells, find_suffixes, table_shape
from .pieces import Piece, pieces
from .rows import Grown, RowReader, fixed_decimals
from .source import Source
from .stamps import StampStore, settle, shown_time
from .timeplan import TimePlan, find_column, plan_time, stated_rate, unit_of
from .times import TextClock, make_text_clock
from .told import Notes, Told, clean

__all__ = ["read_text"]


def read_text(source: Source, told: Told, notes: Notes) -> Recording:
    """Read a table of text."""
    if not source.size:
        raise notes.refuse("the file is empty")
    encoding = find_encoding(source, told, notes)
    lines = head_lines(source, encoding, told, notes)
    layout = table_shape(lines, told, notes)
    from .across import is_across, read_across

    if layout is None or is_across(lines, layout):
        across = read_across(source, encoding, told, notes)
        if across is not None:
            return across
    if layout is None:
        raise notes.refuse(
            "no table of numbers was found; check that this is a text export with one row per sample, or pass delimiter= and decimal=",
            line=1,
        )
    layout.encoding = encoding
    rows = data_cells(lines, layout)
    if len(rows) < 2:
        raise notes.refuse("there is one row of numbers only: a recording needs at least two", line=rows[0][0] if rows else None)
    layout.quoted = any('"' in line for line in lines[layout.first :])
    rows = find_suffixes(layout, rows)
    settle_marks(source, layout, rows, told, notes)
    read_header(lines, layout, notes)
    return _Reading(source, layout, rows, told, notes).run()


class _Reading:
    """One pass over the rows, and what follows from them."""

    def __init__(self, source: Source, layout: Layout, rows: list[tuple[int, list[str]]], told: Told, notes: Notes) -> None:
        self.source, self.layout, self.rows, self.told, self.notes = source, layout, rows, told, notes
        self._check_doubts()
        self._check_told()
        self.plan = plan_time(layout, rows, told, notes)
        times = [*self.plan.columns] if self.plan.kind in ("number", "count") else []
        self.numeric_times = [*times, *(plan.columns[0] for plan in self.plan.extra)]
        self.texts = tuple(self.plan.columns) if self.plan.kind == "text" else ()
        self.chosen = self._chosen()
        self.stored = tuple(sorted({*self.chosen, *self.numeric_times}))
        self.columns = {place: Grown() for place in self.chosen}
        self.stamps = {place: StampStore(self._plan_of(place).resolution) for place in self.numeric_times}
        self.text_clock: TextClock | None = None
        self.text_seconds: list[NDArray[np.float64]] = []
        self.expected = 0

    def _check_doubts(self) -> None:
        """Commas that may be decimal marks are settled by the header, or the file is refused."""
        if self.layout.header_cells is None and self.layout.doubt:
            raise self.notes.refuse(
                "the commas may be decimal marks or part columns, and there is no header to settle it; pass delimiter=',' or decimal=','", line=self.layout.doubt
            )
        for place, unit in self.layout.suffixed.items():
            if self.layout.units[place] is None:
                self.notes.add(f"Column {self.layout.names[place]!r}: the unit {unit} stands in its cells.")

    def _check_told(self) -> None:
        layout = self.layout
        for key in self.told.units:
            if find_column(key, layout.names, layout.headers) is None:
                raise MissingColumnError(
                    f"{self.notes.where}: units names a column {key!r} that is not there; there are: {', '.join(clean(name) for name in layout.names)}",
                    name=key, columns=tuple(layout.names),
                )  # fmt: skip

    def _plan_of(self, place: int) -> TimePlan:
        return next((plan for plan in self.plan.extra if plan.columns[0] == place), self.plan)

    def _chosen(self) -> tuple[int, ...]:
        """Columns of numbers that are kept: all, or those asked for."""
        layout = self.layout
        numbers = [place for place, kind in enumerate(layout.kinds) if kind in (NUMBER, BLANK) and place not in self.numeric_times]
        while numbers and layout.kinds[numbers[-1]] == BLANK and not layout.headers[numbers[-1]]:
            numbers.pop()
        if self.told.columns is None:
            return tuple(numbers)
        chosen = []
        for name in self.told.columns:
            place = find_column(name, layout.names, layout.headers)
            if place is None or (place not in numbers and place not in self.numeric_times and place not in self.texts):
                raise MissingColumnError(
                    f"{self.notes.where}: there is no column {name!r}; there are: {', '.join(clean(layout.names[other]) for other in numbers)}",
                    name=name, columns=tuple(layout.names[other] for other in numbers),
                )  # fmt: skip
            if place in numbers:
                chosen.append(place)
        if not chosen:
            raise InputError("columns names no column of values", name="columns", value=self.told.columns)
        return tuple(chosen)

    def _sink(self, values: dict[int, NDArray[np.float64]], texts: dict[int, list[str]]) -> None:
        for place, store in self.columns.items():
            store.add(values[place], self.expected)
        for place in self.numeric_times:
            self.stamps[place].add(values[place] * self._plan_of(place).factor)
        if self.texts:
            self._take_times(texts)

    def _take_times(self, texts: dict[int, list[str]]) -> None:
        first = texts[self.texts[0]]
        if len(self.texts) == 2:
            dates, clocks = texts[self.texts[0]], texts[self.texts[1]]
            if ":" in next((text for text in dates if text), "") and ":" not in next((text for text in clocks if text), ""):
                dates, clocks = clocks, dates
            if ":" not in next((text for text in dates if text), ":"):
                first = [f"{date} {clock}".strip() if clock else "" for date, clock in zip(dates, clocks, strict=True)]
        line = self.reader.line_starts[-1][1]
        if self.text_clock is None:
            self.text_clock = make_text_clock(first[:2000], self.layout.names[self.texts[0]], self.notes, line)
        self.text_seconds.append(self.text_clock.seconds(first, line))

    def run(self) -> Recording:
        """Read everything and build the recording."""
        source, layout, notes = self.source, self.layout, self.notes
        digest = hashlib.sha256()
        fixed = fixed_decimals(self.rows, self.stored, layout.decimal or ".")
        self.reader = RowReader(
            layout=layout, notes=notes, stored=self.stored, texts=self.texts, sink=self._sink, fixed=fixed, counted=self.plan.kind == "rate"
        )
        done = 0
        for piece in pieces(source, layout.encoding, self.told, notes, digest=digest, quoted=layout.quoted):
            text, line = piece.text, piece.first_line
            if line == 1 and layout.first:
                text = _without_head(text, layout.first)
                line = layout.first + 1
            done += len(piece.text)
            self.reader.take(Piece(text, line, piece.last, piece.ended, piece.lines - (line - piece.first_line)))
            if not self.expected and source.size > 4 * len(piece.text) and self.reader.rows:
                self.expected = int(1.02 * source.size / max(done, 1) * self.reader.rows)
        if not self.reader.rows:
            raise notes.refuse("no row of numbers could be read; pass delimiter= or decimal=", line=layout.first + 1)
        self.reader.report()
        self._remark_missing()
        clocks, values, time_column = self._clocks()
        return self._build(clocks, values, time_column, digest.hexdigest())

    def _remark_missing(self) -> None:
        layout = self.layout
        for place, counted in self.reader.missing.items():
            if place not in self.chosen:
                continue
            total = sum(counted.values())
            times = [self.reader.missing.get(plan.columns[0]) for plan in self.plan.extra if plan.columns[0] < place]
            if times and times[-1] and sum(times[-1].values()) == total:
                continue  # the shorter of two channels with their own times
            if total == self.reader.rows:
                continue  # an empty column; said where it is left aside
            words = ", ".join(f"{count} × {what}" if count > 1 or len(counted) > 1 else what for what, count in counted.most_common(4))
            self.notes.add(
                f"Column {layout.names[place]!r}: {total} of {self.reader.rows} cells without a number, first in line {self.reader.first_missing[place]} ({words}): left out."
            )

    def _clocks(self) -> tuple[list[Clock], dict[int, NDArray[np.float64]], str]:
        """The time axes, and the columns with rows dropped or put in order where the stamps ask for it."""
        plan, notes, reader = self.plan, self.notes, self.reader
        values = {place: store.done() for place, store in self.columns.items()}
        restarts = tuple(row for row, _ in reader.restarts if 0 < row < reader.rows)
        name = self.layout.names[plan.columns[0]] if plan.columns else ""
        if plan.kind == "rate":
            rate = float(plan.rate or 1.0)
            if restarts:
                notes.add(
                    f"The header stands again in line {reader.restarts[0][1]}: the logger was started again; the stretches are kept apart, the time between is not known."
                )
                segments = tuple(pairwise([0, *restarts, reader.rows]))
                return [Clock(stamps=np.arange(reader.rows) / rate, segments=segments, typical=1 / rate)], values, ""
            return [Clock(interval=1 / rate, count=reader.rows)], values, ""
        origin, kind, resolution = "", "number", plan.resolution
        if plan.kind == "text":
            assert self.text_clock is not None  # rows were read
            stamps = np.concatenate(self.text_seconds)
            origin, kind, resolution = self.text_clock.origin, self.text_clock.kind, self.text_clock.resolution
            if kind == "clock":
                stamps -= stamps[np.argmax(np.isfinite(stamps))] if np.isfinite(stamps).any() else 0.0
        else:
            store = self.stamps[plan.columns[0]]
            if (even := store.even()) is not None and not restarts:
                return [self._rated(Clock(start=even[0], interval=even[1], count=even[2], name=name))], values, name
            stamps = store.stamps()
            if plan.epoch:
                first = float(stamps[np.argmax(np.isfinite(stamps))])
                origin = str(np.datetime64(int(first * 1e9), "ns")) + " UTC"
                stamps = stamps - first
                resolution = max(resolution, float(np.spacing(first)))
        settled = settle(
            stamps, resolution=resolution, notes=notes, name=name, line_of=reader.line_of, kind=kind, restarts=restarts, origin=origin
        )
        if settled.rows is not None:
            values = {place: column[settled.rows] for place, column in values.items()}
        clocks = [self._rated(settled.clock)]
        for extra in plan.extra:
            values = self._extra_clock(extra, clocks, values)
        return clocks, values, name

    def _extra_clock(self, extra: TimePlan, clocks: list[Clock], values: dict[int, NDArray[np.float64]]) -> dict[int, NDArray[np.float64]]:
        """A further time column governs the columns on its right, up to the next one."""
        place = extra.columns[0]
        later = [plan.columns[0] for plan in self.plan.extra if plan.columns[0] > place]
        governed = [column for column in values if column > place and (not later or column < min(later))]
        stamps = self.stamps[place].stamps()
        present = np.isfinite(stamps)
        rows = np.flatnonzero(present)
        if len(rows) < 2:
            return values
        settled = settle(
            stamps[present],
            resolution=extra.resolution,
            notes=self.notes,
            name=self.layout.names[place],
            line_of=lambda row: self.reader.line_of(int(rows[row])),
        )
        raw = {column: self.columns[column].done() for column in governed}
        rows = rows if settled.rows is None else rows[settled.rows]
        clocks.append(settled.clock)
        names = ", ".join(repr(self.layout.names[column]) for column in governed)
        self.notes.add(f"Columns {names} follow their own time column {self.layout.names[place]!r}.")
        return values | {column: raw[column][rows] for column in governed}

    def _rated(self, clock: Clock) -> Clock:
        """A rate that was told must agree with the stamps; one in the preamble that does not is remarked."""
        rate = self.told.sample_rate
        if self.plan.kind == "count":
            return clock
        interval = clock.interval or clock.typical or (clock.last - clock.first) / max(len(clock) - 1, 1)
        if rate is None:
            stated = stated_rate(self.layout.preamble, Notes(""))
            if stated and abs(stated * interval - 1) > 0.01:
                self.notes.add(
                    f"The preamble states {stated:.6g} Hz, but the stamps are {shown_time(interval)} apart ({1 / interval:.6g} Hz): the stamps count."
                )
            return clock
        slack = self.plan.resolution or (self.text_clock.resolution if self.text_clock else 0.0)
        span = clock.last - clock.first
        if clock.interval is None or abs((len(clock) - 1) / rate - span) > 1.1 * slack + 1e-3 * span:
            raise self.notes.refuse(
                f"sample_rate = {rate:.6g} Hz does not agree with the time column {clock.name!r} ({1 / interval:.6g} Hz on average{', with gaps' if clock.gaps else ''}); "
                "pass one of them only: time='' ignores the time column",
                column=clock.name,
            )  # fmt: skip
        return Clock(start=clock.start, interval=1 / rate, count=clock.count, name=clock.name, origin=clock.origin)

    def _build(self, clocks: list[Clock], values: dict[int, NDArray[np.float64]], time_column: str, sha256: str) -> Recording:
        layout, notes = self.layout, self.notes
        raws: list[RawColumn] = []
        extra = {plan.columns[0]: order + 1 for order, plan in enumerate(self.plan.extra)}
        present = [place for place in extra if extra[place] < len(clocks)]
        for place in range(layout.width):
            clock = max((extra[other] for other in present if other <= place), default=0)
            if place in values:
                raws.append(RawColumn(layout.names[place], layout.headers[place], values[place], unit_of(place, layout, self.told), clock))
        self._say_left_aside()
        aside = [layout.names[place] for place, kind in enumerate(layout.kinds) if kind in (TEXT, CLOCK) and place not in self.texts]
        shown = {"encoding": layout.encoding, "delimiter": layout.shown_delimiter, "decimal": layout.decimal or "."}
        times = tuple(layout.names[place] for place in (self.plan.columns[0], *extra)) if self.plan.columns else ()
        return build(
            raws, clocks, notes, sha256=sha256, path=self.source.path or self.source.name, preamble=layout.preamble, layout=shown, time_column=time_column, left_aside=aside,
            line_of=self.reader.line_of, order=tuple(layout.names), time_names=times, time_unit=self.plan.unit,
        )  # fmt: skip

    def _say_left_aside(self) -> None:
        texts = [name for name, kind in zip(self.layout.names, self.layout.kinds, strict=True) if kind == TEXT]
        clocks = [
            name
            for place, (name, kind) in enumerate(zip(self.layout.names, self.layout.kinds, strict=True))
            if kind == CLOCK and place not in self.texts
        ]
        if texts:
            self.notes.add(f"Column{'s' if len(texts) > 1 else ''} of text left aside: {', '.join(clean(name) for name in texts)}.")
        if clocks:
            self.notes.add(f"Further time column{'s' if len(clocks) > 1 else ''} left aside: {', '.join(clean(name) for name in clocks)}.")


def _without_head(text: bytes, count: int) -> bytes:
    """Text after the first ``count`` lines."""
    mark = b"\n" if b"\n" in text else b"\r"
    place = 0
    for _ in range(count):
        place = text.find(mark, place) + 1
        if not place:
            return b""
    return text[place:]
