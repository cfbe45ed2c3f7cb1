"""From a signal to its cycles: by a period, by onsets, or found in the signal."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import InputError, SignalError
from ..quantities import to_si
from .cycles import Cycles, drift_of
from .feet import as_well_by_one_period, locate_feet, refine_feet
from .odd_cycles import odd_cycles
from .periods import find_period, period_misfit, refine_period
from .signal import Signal

__all__ = ["find_cycles"]

ONSET_SCATTER = 0.03  # relative scatter of the periods above which cycles are aligned at their onset
_LEAST_SAMPLES = 0.75  # share of a cycle's samples that must be there
_SHORT_BY = 0.15  # a gated cycle may stop this share of the period short of its end


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
    time, _ = cycles.good
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
