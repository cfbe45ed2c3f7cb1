"""A recording: its columns in SI, and everything that was guessed, repaired or dropped in reading it."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from functools import cached_property
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..errors import InputError, MissingColumnError, RecordingError
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
    blocks: tuple[str, ...] = ()

    @property
    def columns(self) -> tuple[str, ...]:
        """Names of the columns, in file order."""
        return tuple(column.name for column in self.table)

    @cached_property
    def units(self) -> Mapping[str, str]:
        """Unit of each column as written; "" where there is none."""
        return MappingProxyType({column.name: column.unit for column in self.table})

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
        column = self.column(name)
        clock = self.clocks[column.clock]
        present = np.isfinite(column.values)
        if not present.any():
            raise RecordingError(f"{self.path}: column {name!r} holds no number", path=self.path, column=name)
        values = column.values
        if not present.all():
            clock, values = clock.taken(present), column.values[present]
        return Signal(
            clock,
            values,
            unit=column.unit,
            name=column.name,
            dimension=column.dimension,
            look=column.look,
            remarks=self.remarks + column.remarks,
        )

    def __contains__(self, name: object) -> bool:
        return isinstance(name, str) and any(name in (column.name, column.header) for column in self.table)

    def __iter__(self) -> Iterator[str]:
        return iter(self.columns)

    def __len__(self) -> int:
        return len(self.clocks[0])
