"""The cycles of a signal: where each begins, which are used, which are left out and why."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import InputError, SignalError
from .signal import Signal

__all__ = ["Cycles", "describe_left_out", "drift_of"]


@dataclass(frozen=True, eq=False, kw_only=True)
class Cycles:
    """The whole cycles of a signal.

    Attributes
    ----------
    signal : Signal
    edges : ndarray, shape (number + 1,)
        Every onset found and the end of the last cycle. [s]
    kept : tuple of int
        Index of each cycle that is used.
    left_out : tuple of (int, str)
        Index of each cycle that is not used, and why.
    align : str
        ``"stretch"`` (each cycle mapped to its own length) or ``"onset"`` (averaged in time from the onset).
    uniform : bool
        All cycles have the same length.
    gap : float
        Share of the period missing at the end of a gated cycle, else 0. [-]
    remarks : tuple of str
    """

    signal: Signal
    edges: NDArray[np.float64]
    kept: tuple[int, ...]
    left_out: tuple[tuple[int, str], ...] = ()
    align: str = "stretch"
    uniform: bool = True
    gap: float = 0.0
    remarks: tuple[str, ...] = ()

    @property
    def all_onsets(self) -> NDArray[np.float64]:
        """Every onset and the end of the last cycle, shape (number + 1,). [s]"""
        return self.edges

    @property
    def onsets(self) -> NDArray[np.float64]:
        """Onsets of the cycles used, shape (count,). [s]"""
        return np.asarray(self.edges[list(self.kept)])

    @property
    def periods(self) -> NDArray[np.float64]:
        """Length of each cycle used, shape (count,). [s]"""
        return np.asarray(np.diff(self.edges)[list(self.kept)])

    @property
    def count(self) -> int:
        """Whole cycles used."""
        return len(self.kept)

    @property
    def period(self) -> float:
        """Mean length of the cycles used. [s]"""
        return float(self.periods.mean())

    @property
    def base_period(self) -> float:
        """Period of the harmonics: the mean if cycles are stretched, the median if aligned at the onset. [s]"""
        return float(np.median(self.periods)) if self.align == "onset" else self.period

    @property
    def period_scatter(self) -> float:
        """Standard deviation of the periods over their mean. [-]"""
        return 0.0 if self.uniform or self.count < 2 else float(self.periods.std(ddof=1) / self.period)

    @cached_property
    def samples(self) -> tuple[NDArray[np.intp], NDArray[np.intp], NDArray[np.float64]]:
        """Rows of the signal that are used, the position among ``kept`` of their cycle, and their phase in cycles."""
        time = self.signal.time
        weights = self.signal.weights
        rows, owners, phases = [], [], []
        for place, index in enumerate(self.kept):
            begin, end = self.edges[index], self.edges[index + 1]
            length = self.base_period if self.align == "onset" else end - begin
            # An onset computed by addition may miss its own sample by rounding.
            slack = 1e-9 * (end - begin)
            first = int(np.searchsorted(time, begin - slack))
            last = int(np.searchsorted(time, min(end, begin + length) - slack))
            row = np.arange(first, last)
            if weights is not None:
                row = row[weights[row] > 0]
            rows.append(row)
            owners.append(np.full(row.size, place))
            phases.append((time[row] - begin) / length)
        return np.concatenate(rows), np.concatenate(owners), np.concatenate(phases)

    @cached_property
    def good(self) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Time [s] and values [SI] of the samples that are not left out."""
        weights = self.signal.weights
        good = slice(None) if weights is None else weights > 0
        return self.signal.time[good], self.signal.values[good]

    def integrals(self) -> NDArray[np.float64]:
        """Integral over time of each used cycle, from onset to onset, shape (count,). [SI times s]"""
        time, values = self.good
        running = np.concatenate([[0.0], np.cumsum(np.diff(time) * (values[1:] + values[:-1]) / 2)])

        def until(instant: NDArray[np.float64]) -> NDArray[np.float64]:
            place = np.clip(np.searchsorted(time, instant, side="right") - 1, 0, time.size - 2)
            here = np.interp(instant, time, values)
            return np.asarray(running[place] + (instant - time[place]) * (values[place] + here) / 2)

        chosen = list(self.kept)
        return until(self.edges[1:][chosen]) - until(self.edges[:-1][chosen])

    def folded(self, phase: ArrayLike) -> NDArray[np.float64]:
        """Each used cycle at common phases (0..1 of the base period), shape (count, n_phase); NaN beyond a short cycle's end."""
        places = np.asarray(phase, dtype=float)
        time, values = self.good
        out = np.empty((self.count, places.size))
        base = self.base_period
        for row, index in enumerate(self.kept):
            begin, end = self.edges[index], self.edges[index + 1]
            length = base if self.align == "onset" else end - begin
            at = begin + places * length
            first, last = np.searchsorted(time, (at.min(initial=begin), at.max(initial=begin)))
            near = slice(max(int(first) - 1, 0), int(last) + 1)
            out[row] = np.interp(at, time[near], values[near])
            out[row, (at > end + 1e-9 * length) | (at > time[-1] + length * 0.02)] = np.nan
        return out

    def without(self, leave_out: Sequence[int], reason: str = "left out by the user") -> Cycles:
        """Return the cycles with some left out, by index from 0."""
        number = self.edges.size - 1
        for index in leave_out:
            if not 0 <= index < number:
                raise SignalError(f"cycle {index + 1} is not there to be left out; there are cycles 1 to {number}")
        gone = {int(index) for index in leave_out}
        kept = tuple(index for index in self.kept if index not in gone)
        if not kept:
            raise SignalError("every cycle is left out; keep at least one")
        already = {index for index, _ in self.left_out}
        added = tuple((index, reason) for index in sorted(gone - already))
        said = tuple(f"Cycle {index + 1} ({self.edges[index]:.4g} to {self.edges[index + 1]:.4g} s): {why}." for index, why in added)
        return replace(self, kept=kept, left_out=tuple(sorted((*self.left_out, *added))), remarks=(*self.remarks, *said))

    def aligned(self, align: str) -> Cycles:
        """Return the cycles with another alignment."""
        if align not in ("stretch", "onset"):
            raise InputError(f'align = {align!r} must be "stretch" or "onset"', name="align", value=align, allowed="stretch, onset")
        return replace(self, align=align)

    def __repr__(self) -> str:
        return f"<Cycles: {self.count} of {self.edges.size - 1} used, mean period {self.period:.4g} s, {self.align}>"


def drift_of(cycles: Cycles) -> float:
    """Rise of the base line over the record as a share of the swing, from the means of the cycles used; 0 below 4 cycles."""
    if cycles.count < 4:
        return 0.0
    means = np.nanmean(cycles.folded((np.arange(32) + 0.5) / 32), axis=1)
    middle = cycles.onsets + 0.5 * cycles.periods
    swing = float(np.ptp(cycles.signal.values))
    slope = float(np.polyfit(middle - middle.mean(), means, 1)[0])
    return slope * float(cycles.edges[-1] - cycles.edges[0]) / swing if swing else 0.0


def describe_left_out(cycles: Cycles) -> tuple[Any, ...]:
    """Return (number from 1, begin, end, reason) of each cycle left out."""
    return tuple((index + 1, float(cycles.edges[index]), float(cycles.edges[index + 1]), why) for index, why in cycles.left_out)
