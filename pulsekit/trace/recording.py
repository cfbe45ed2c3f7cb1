"""A recording: its columns in SI, and everything that was guessed, repaired or dropped in reading it."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from functools import cached_property
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..errors import InputError, MissingColumnError, RecordingError, UnitError
from .clock import Clock
from .signal import Signal

__all__ = ["Column", "Recording", "Signal"]

_NOTHING: Mapping[str, str] = MappingProxyType({})


@dataclass(frozen=True, eq=False, kw_only=True)
class Column:
    """One column of numbers: SI values, NaN where the file has none."""

    name: str
    values: NDArray[np.float64]
    header: str = ""  # as it stands in the file
    unit: str = ""
    dimension: str | None = None
    clock: int = 0  # which of the recording's clocks its rows follow
    remarks: tuple[str, ...] = ()
    look: Any = None
    problem: str = ""  # why its unit could not be read; raised when the column is asked for


@dataclass(frozen=True, eq=False, kw_only=True)
class Recording:
    """A recording as it was read.

    ``recording["flow"]`` gives the column as a :class:`Signal`. ``columns`` names them in file order,
    ``units`` their units as written, ``remarks`` everything guessed, repaired or dropped, ``preamble``
    the lines ``key: value`` above the header, ``sha256`` the hash of the file.
    """

    table: tuple[Column, ...]
    clocks: tuple[Clock, ...]
    remarks: tuple[str, ...] = ()
    path: str = ""
    sha256: str = ""
    preamble: Mapping[str, str] = field(default_factory=lambda: _NOTHING)
    time_column: str = ""
    layout: Mapping[str, str] = field(default_factory=lambda: _NOTHING)  # encoding, delimiter, decimal mark
    left_aside: tuple[str, ...] = ()  # columns of text
    blocks: tuple[str, ...] = ()  # blocks, groups or sheets that the file has
    order: tuple[str, ...] = ()  # all names in file order
    time_names: tuple[str, ...] = ()  # columns that became clocks
    time_unit: str = ""
    stated_period: float | None = None  # R-R interval or period that the file states [s]

    @cached_property
    def columns(self) -> tuple[str, ...]:
        """Names of the columns of numbers, in file order, the time column with them."""
        here = {column.name for column in self.table} | set(self.time_names)
        ordered = [name for name in self.order if name in here]
        return tuple(dict.fromkeys([*ordered, *self.time_names, *(column.name for column in self.table)]))

    @cached_property
    def units(self) -> Mapping[str, str]:
        """Unit of each column as written; "" where there is none."""
        written = {column.name: column.unit for column in self.table} | dict.fromkeys(self.time_names, self.time_unit or "s")
        return MappingProxyType({name: written[name] for name in self.columns})

    @property
    def clock(self) -> Clock:
        """The first time axis."""
        return self.clocks[0]

    def column(self, name: str) -> Column:
        """Return a column by its name, or by its header as it stands in the file."""
        for column in self.table:
            if column.name == name:
                return column
        for column in self.table:
            if name.strip() and name.strip() == column.header.strip():
                return column
        close = [column for column in self.table if column.name.casefold() == name.strip().casefold()]
        if len(close) == 1:
            return close[0]
        where = f"{self.path}: " if self.path else ""
        if name in self.left_aside:
            raise MissingColumnError(
                f"{where}column {name!r} holds text, not numbers; there are: {', '.join(self.columns)}", name=name, columns=self.columns
            )
        raise MissingColumnError(
            f"{where}there is no column {name!r}; there are: {', '.join(self.columns)}", name=name, columns=self.columns
        )

    def __getitem__(self, name: str) -> Signal:
        if not isinstance(name, str):
            raise InputError(
                f"a column is asked for by its name, not {name!r}; there are: {', '.join(self.columns)}", name="column", value=name
            )
        if name in self.time_names:
            clock = self.clocks[min(self.time_names.index(name), len(self.clocks) - 1)]
            return Signal(clock, clock.instants, unit=self.time_unit or "s", name=name, dimension="time", remarks=self.remarks)
        column = self.column(name)
        if column.problem:
            raise UnitError(f"{self.path}: column {column.name!r}: {column.problem}", name=column.name, value=column.header)
        clock = self.clocks[column.clock]
        present = np.isfinite(column.values)
        if not present.any():
            raise RecordingError(f"{self.path}: column {name!r} holds no number", path=self.path, column=name)
        values = column.values
        if not present.all():
            clock, values = clock.taken(present), column.values[present]
        return Signal(clock, values, unit=column.unit, name=column.name, dimension=column.dimension, look=column.look, remarks=self.remarks)

    def __contains__(self, name: object) -> bool:
        return isinstance(name, str) and (name in self.columns or any(name == column.header for column in self.table))

    def join(self, forward: str, reverse: str, *, name: str = "") -> Signal:
        """Join a forward and a reverse channel into one signed signal: forward minus the size of reverse.

        Faults are looked for in the joined signal only: zeros of either channel are data.

        Raises
        ------
        RecordingError
            If either holds numbers of the wrong sign for that reading, or their units or rows differ.
        """
        ahead, back = self[forward], self[reverse]
        where = f"{self.path}: "
        if ahead.dimension != back.dimension or len(ahead) != len(back) or not np.array_equal(ahead.time, back.time):
            raise RecordingError(
                f"{where}columns {forward!r} and {reverse!r} cannot be joined: their units or their rows differ",
                path=self.path,
                column=reverse,
            )
        if float(ahead.values.min()) < 0:
            raise RecordingError(
                f"{where}column {forward!r} is to be forward flow but has negative values; use it alone if it is signed",
                path=self.path,
                column=forward,
            )
        low, high = float(back.values.min()), float(back.values.max())
        if low < 0 < high:
            raise RecordingError(
                f"{where}column {reverse!r} is to be reverse flow but has both signs; use it alone if it is signed",
                path=self.path,
                column=reverse,
            )
        sign = "" if high > 0 else " (its numbers are negative already)"
        remark = f"Columns {forward!r} and {reverse!r} joined: forward minus reverse{sign}."
        look = self.column(forward).look
        return Signal(
            ahead.clock, ahead.values - np.abs(back.values), unit=ahead.unit, name=name or f"{forward} - {reverse}", dimension=ahead.dimension, look=look,
            remarks=(*self.remarks, remark),
        )  # fmt: skip

    def describe(self) -> str:
        """Tell what was read, as text: columns, units, rate, gaps, remarks, first rows."""
        from .reading.describe import as_text

        return as_text(self)

    def _repr_html_(self) -> str:
        from .reading.describe import as_html

        return as_html(self)

    def __repr__(self) -> str:
        return f"<Recording {self.path!r}: {len(self)} rows, columns {', '.join(self.columns)}>"

    def __iter__(self) -> Iterator[str]:
        return iter(self.columns)

    def __len__(self) -> int:
        return len(self.clocks[0])
