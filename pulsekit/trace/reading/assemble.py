"""Numbers as read and instants as settled, to a Recording."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ...errors import UnitError
from ...quantities import DIMENSIONS, parse_unit, registry
from ..clock import Clock
from ..recording import Column, Recording
from .faults import drop_sentinels, look_for_faults
from .told import Notes
from .unit_words import HeaderUnit

__all__ = ["RawColumn", "build", "to_si_in_place"]


@dataclass
class RawColumn:
    """A column of numbers as written, before units."""

    name: str
    header: str
    values: NDArray[np.float64]
    unit: HeaderUnit
    clock: int = 0
    remarks: tuple[str, ...] = ()
    is_time: bool = False


def to_si_in_place(values: NDArray[np.float64], unit: HeaderUnit) -> None:
    """Convert numbers to SI without a copy: a factor, and an offset for temperatures."""
    if unit.dimension is None or not unit.unit:
        return
    units = registry()
    spelled = parse_unit(unit.unit)[0]
    one, zero = (
        float(units.Quantity(number, spelled or "dimensionless").to(DIMENSIONS[unit.dimension] or "dimensionless").magnitude)
        for number in (1.0, 0.0)
    )
    if zero == 0.0:
        if one != 1.0:
            values *= one
    else:
        values *= one - zero
        values += zero


def _column(raw: RawColumn, notes: Notes, line_of: Callable[[int], int] | None) -> Column | None:
    """One column in SI: sentinels taken out, units applied; None if it is empty."""
    remarks = list(raw.remarks)
    if raw.unit.remark:
        remarks.append(f"Column {raw.name!r}: {raw.unit.remark}")
    values = raw.values
    if not raw.is_time:
        for sentinel, count, row in drop_sentinels(values):
            where = f", first in line {line_of(row)}" if line_of else f", first in row {row + 1}"
            remarks.append(
                f"Column {raw.name!r}: {sentinel:g} stands for no value ({count} cell{'s' if count > 1 else ''}{where}): left out."
            )
    if not len(values) or not _any_finite(values):
        notes.add(f"Column {raw.name!r} holds no number: left aside.")
        return None
    to_si_in_place(values, raw.unit)
    problem = raw.unit.problem
    if problem:
        remarks.append(f"Column {raw.name!r}: {problem}")
    return Column(
        name=raw.name, header=raw.header, unit=raw.unit.unit, dimension=raw.unit.dimension, values=values, clock=raw.clock, remarks=tuple(remarks),
        look=None if raw.is_time else look_for_faults, problem=problem,
    )  # fmt: skip


def _any_finite(values: NDArray[np.float64]) -> bool:
    return any(np.isfinite(values[begin : begin + 1_000_000]).any() for begin in range(0, len(values), 1_000_000))


def build(
    raws: Sequence[RawColumn],
    clocks: Sequence[Clock],
    notes: Notes,
    *,
    sha256: str,
    path: str,
    preamble: Mapping[str, str],
    layout: Mapping[str, str],
    time_column: str = "",
    left_aside: Sequence[str] = (),
    blocks: Sequence[str] = (),
    line_of: Callable[[int], int] | None = None,
    **more: Any,
) -> Recording:
    """Make the Recording; refuse one without any column of numbers beside the time."""
    table = [column for raw in raws if (column := _column(raw, notes, line_of))]
    if not any(column.look for column in table):
        raise notes.refuse(
            "there is no column of numbers beside the time" + (f" (left aside: {', '.join(left_aside)})" if left_aside else "")
        )
    values = [column for column in table if column.look]
    if all(column.problem for column in values):
        raise UnitError(f"{notes.where}: column {values[0].name!r}: {values[0].problem}", name=values[0].name, value=values[0].header)
    for column in table:
        for remark in column.remarks:
            notes.add(remark)
    return Recording(
        table=tuple(table), clocks=tuple(clocks), remarks=tuple(notes.remarks), path=path, sha256=sha256, preamble=dict(preamble),
        layout=dict(layout), time_column=time_column, left_aside=tuple(left_aside), blocks=tuple(blocks), **more,
    )  # fmt: skip
