"""From a signal to its cycles: where each begins, which are used, which are left out and why."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import InputError, SignalError
from ..quantities import to_si
from .feet import as_well_by_one_period, locate_feet, refine_feet
from .odd_cycles import odd_cycles
from .periods import find_period, period_misfit, refine_period
from .signal import Signal

__all__ = ["Cycles", "find_cycles"]

ONSET_SCATTER = 0.03  # relative scatter of the periods above which cycles are aligned at their onset
_LEAST_SAMPLES = 0.75  # share of a cycle's samples that must be there
_SHORT_BY = 0.15  # a gated cycle may stop this share of the period short of its end


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
    def _good(self) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Time and values of the samples that are not left out."""
        weights = self.signal.weights
        good = slice(None) if weights is None else weights > 0
        return self.signal.time[good], self.signal.values[good]

    def integrals(self) -> NDArray[np.float64]:
        """Integral over time of each used cycle, from onset to onset, shape (count,). [SI times s]"""
        time, values = self._good
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
        time, values = self._good
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


def find_cycles(
    signal: Signal,
    period: float | str | None = None,
    onsets: ArrayLike | None = None,
    *,
    leave_out: Sequence[int] = (),
    align: str | None = None,
    keep_odd: bool = False,
    remove_drift: bool = False,
) -> Cycles:
    """Cut a signal into cycles.

    Parameters
    ----------
    signal : Signal
    period : float or str, optional
        Of every cycle; found from the signal if neither it nor ``onsets`` is given. [s]
    onsets : array_like, optional
        Start of every cycle and the end of the last. [s]
    leave_out : sequence of int
        Numbers of cycles, counted from 1, that must not be used.
    align : str, optional
        ``"stretch"`` or ``"onset"``; by default ``"onset"`` where the periods scatter by more than 3 %.
    keep_odd : bool
        Keep cycles that do not look like the others.
    remove_drift : bool
        Take a straight base line out of the signal first.

    Returns
    -------
    Cycles

    Raises
    ------
    SignalError
        If there is less than one whole cycle, or no period is found.

    Examples
    --------
    >>> import numpy as np
    >>> time = np.arange(400) * 0.01
    >>> cycles = find_cycles(Signal(time, np.sin(2 * np.pi * time)), period=1.0)
    >>> cycles.count, cycles.period
    (4, 1.0)
    """
    if len(signal) < 4:
        raise SignalError(f"signal {signal.name!r} has {len(signal)} samples; at least 4 are needed", column=signal.name)
    if onsets is not None:
        cycles = _from_onsets(signal, _instants(onsets))
    elif period is not None:
        cycles = _from_period(signal, to_si(period, "time", "period"))
    else:
        cycles = _found(signal)
    cycles = replace(cycles, remarks=(*signal.remarks, *cycles.remarks))
    if leave_out:
        cycles = cycles.without([int(number) - 1 for number in leave_out])
    cycles = _without_broken(cycles)
    if not keep_odd and cycles.count >= 4:
        # Cycles of unequal length are alike in time from their onset, not in phase, unless a machine makes them.
        alike = cycles if cycles.uniform or align == "stretch" else cycles.aligned("onset")
        for index, why in odd_cycles(alike.folded((np.arange(64) + 0.5) / 64), cycles.periods, cycles.kept):
            if cycles.count > 1:
                cycles = cycles.without([index], why)
    return _aligned(_drift(cycles, remove_drift), align)


def _without_broken(cycles: Cycles) -> Cycles:
    """Leave out cycles of which too few good samples are there, or in which the logger restarted."""
    if cycles.gap or cycles.count < 2:
        return cycles
    time, _ = cycles._good
    begins, ends = cycles.onsets, cycles.onsets + cycles.periods
    there = np.searchsorted(time, ends - 1e-9 * ends) - np.searchsorted(time, begins - 1e-9 * begins)
    # Against the usual density of samples, so that uneven sampling is no fault.
    usual = float(np.median(there / cycles.periods))
    share = there / (usual * cycles.periods) if usual > 0 else np.ones(there.size)
    restarts = cycles.signal.time[[first for first, _ in cycles.signal.segments[1:]]]
    for index, begin, end, part in zip(cycles.kept, begins, ends, share, strict=True):
        if cycles.count == 1:
            break
        if np.any((restarts > begin) & (restarts < end)):
            cycles = cycles.without([index], "the logger restarted within it")
        elif part < _LEAST_SAMPLES:
            cycles = cycles.without([index], f"{100 * (1 - part):.0f} % of its samples are missing or were left out")
    return cycles


def _aligned(cycles: Cycles, align: str | None) -> Cycles:
    if align is not None:
        return cycles.aligned(align)
    if cycles.period_scatter > ONSET_SCATTER:
        said = (
            f"The periods scatter by {100 * cycles.period_scatter:.1f} %: cycles are aligned at their onset and averaged in time over the "
            'median period (align = "stretch" would map every cycle to one length).'
        )
        return replace(cycles.aligned("onset"), remarks=(*cycles.remarks, said))
    return cycles


def drift_of(cycles: Cycles) -> float:
    """Rise of the base line over the record as a share of the swing, from the means of the cycles used; 0 below 4 cycles."""
    if cycles.count < 4:
        return 0.0
    means = np.nanmean(cycles.folded((np.arange(32) + 0.5) / 32), axis=1)
    middle = cycles.onsets + 0.5 * cycles.periods
    swing = float(np.ptp(cycles.signal.values))
    slope = float(np.polyfit(middle - middle.mean(), means, 1)[0])
    return slope * float(cycles.edges[-1] - cycles.edges[0]) / swing if swing else 0.0


def _drift(cycles: Cycles, remove: bool) -> Cycles:
    share = drift_of(cycles)
    if abs(share) < 0.05:
        return cycles
    words = f"{100 * share:.0f} % of its swing"
    if not remove:
        said = f"The base line drifts by {words} over the record; it was left in (remove_drift takes it out)."
        return replace(cycles, remarks=(*cycles.remarks, said))
    time = cycles.signal.time
    begin, end = cycles.edges[0], cycles.edges[-1]
    straight = share * float(np.ptp(cycles.signal.values)) * ((time - begin) / (end - begin) - 0.5)
    said = f"A straight drift of {words} over the record was taken out, as asked."
    return replace(cycles, signal=cycles.signal.replace(values=cycles.signal.values - straight), remarks=(*cycles.remarks, said))


def _span(signal: Signal) -> float:
    """Time that the samples cover: N samples at one rate cover N intervals. [s]"""
    time = signal.time
    return float(time[-1] - time[0]) + float(np.median(np.diff(time)))


def _instants(onsets: ArrayLike) -> NDArray[np.float64]:
    """Onsets as numbers [s] or as strings with a unit."""
    given = np.asarray(onsets)
    if given.dtype.kind in "US":
        return np.array([to_si(str(entry), "time", "onsets") for entry in given.ravel()])
    return np.asarray(given, dtype=float)


def _from_onsets(signal: Signal, edges: NDArray[np.float64]) -> Cycles:
    if edges.ndim != 1 or edges.size < 2 or not np.all(np.diff(edges) > 0):
        raise SignalError("onsets must increase, and there must be at least two: the start of a cycle and its end")
    end = float(signal.time[0]) + _span(signal)
    inside = (edges >= signal.time[0] - 1e-9 * _span(signal)) & (edges <= end * (1 + 1e-9) + 1e-12)
    if int(inside.sum()) < 2:
        raise SignalError(f"less than one whole cycle lies between {signal.time[0]:.6g} and {end:.6g} s; onsets run from {edges[0]:.6g} s")
    remarks: tuple[str, ...] = (f"Onsets were given: {int(inside.sum()) - 1} whole cycles.",)
    if not inside.all():
        remarks += (f"{int((~inside).sum())} onsets lie outside the record and were not used.",)
    edges = edges[inside]
    lengths = np.diff(edges)
    uniform = bool(np.ptp(lengths) < 1e-9 * lengths.mean())
    return Cycles(signal=signal, edges=edges, kept=tuple(range(edges.size - 1)), uniform=uniform, remarks=remarks)


def _from_period(signal: Signal, period: float, said: str = "The period was given") -> Cycles:
    if not period > 0 or not np.isfinite(period):
        raise InputError(f"period = {period} s must be above 0", name="period", value=period, allowed="> 0")
    start, span = float(signal.time[0]), _span(signal)
    number = int(np.floor(span / period + 1e-6))
    if number < 1:
        missing = 1 - span / period
        if missing > _SHORT_BY:
            raise SignalError(
                f"the period of {period:.6g} s is longer than the recording of {span:.6g} s: less than one whole cycle; give a shorter period or "
                "a longer recording (a gated cycle may stop up to 15 % short)"
            )
        remark = (
            f"{said}: {period:.6g} s. The one gated cycle stops {100 * missing:.1f} % of the period short of its end; the gap is left open and "
            "fewer harmonics can be kept."
        )
        return Cycles(signal=signal, edges=np.array([start, start + period]), kept=(0,), gap=missing, remarks=(remark,))
    edges = start + period * np.arange(number + 1)
    rest = span - number * period
    remarks = [f"{said}: {period:.6g} s, {number} whole cycle{'s' if number != 1 else ''}."]
    if rest > 1e-3 * period:
        remarks.append(f"The last {rest:.4g} s make no whole cycle and were not used.")
    return Cycles(signal=signal, edges=np.asarray(edges, dtype=np.float64), kept=tuple(range(number)), remarks=tuple(remarks))


def _found(signal: Signal) -> Cycles:
    """Period from the signal; one for all cycles where that describes the record as well as each cycle's own foot."""
    rough = find_period(signal)
    feet = refine_feet(signal, locate_feet(signal, rough))
    if len(signal.segments) == 1:
        starts = [rough] if feet.size < 3 else [rough, _line_through(feet, float(np.median(np.diff(feet))))]
        period = min((refine_period(signal, start) for start in starts), key=lambda trial: period_misfit(signal, trial))
        # Three cycles cannot tell a drifting pace from feet that are badly found.
        if feet.size < 4 or as_well_by_one_period(signal, feet, period):
            return _from_period(signal, period, "The period was found in the signal")
    if feet.size < 2:
        raise SignalError("fewer than two onsets were found; give period or onsets")
    lengths = np.diff(feet)
    remark = (
        f"Cycles were found in the signal: {feet.size - 1} between feet, {lengths.min():.4g} to {lengths.max():.4g} s long "
        f"(median {np.median(lengths):.4g} s); what lies before the first and after the last foot was not used."
    )
    return Cycles(signal=signal, edges=feet.astype(np.float64), kept=tuple(range(feet.size - 1)), uniform=False, remarks=(remark,))


def _line_through(feet: NDArray[np.float64], period: float) -> float:
    """Slope of the feet over their number; feet that were missed count, single wild ones do not. [s]"""
    number = np.round((feet - feet[0]) / period)
    first = np.polyfit(number, feet, 1)
    away = np.abs(feet - np.polyval(first, number))
    near = away <= max(3 * float(np.median(away)), 1e-12)
    return float(np.polyfit(number[near], feet[near], 1)[0]) if int(near.sum()) >= 3 else float(first[0])


def describe_left_out(cycles: Cycles) -> tuple[Any, ...]:
    """Return (number from 1, begin, end, reason) of each cycle left out."""
    return tuple((index + 1, float(cycles.edges[index]), float(cycles.edges[index + 1]), why) for index, why in cycles.left_out)
