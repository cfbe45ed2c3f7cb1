"""The foot of each wave: found by its tangent, refined against the mean rise; and whether one period does as well."""

from __future__ import annotations

import itertools

import numpy as np
from numpy.typing import NDArray

from .periods import evenly
from .signal import Signal

__all__ = ["as_well_by_one_period", "locate_feet", "refine_feet"]

_PHASES = 64
_ALIKE = 0.003  # share of the swing by which cycles may differ whatever the other way of cutting gives
_WINDOW = (-0.08, 0.35)  # about the foot, in periods: where cycles of any length are alike


def _smoothed(values: NDArray[np.float64], width: int) -> NDArray[np.float64]:
    if width < 2:
        return values
    window = np.hanning(width + 2)[1:-1]
    return np.convolve(np.pad(values, (width, width), mode="edge"), window / window.sum(), mode="same")[width:-width]


def locate_feet(signal: Signal, period: float) -> NDArray[np.float64]:
    """Return the foot of each wave: where the tangent at the steepest rise meets the least value before it. [s]"""
    from scipy.signal import find_peaks

    time, values, step = evenly(signal)
    smooth = _smoothed(values, round(0.03 * period / step))
    slope = np.gradient(smooth, step)
    tall = float(np.quantile(slope, 0.98))
    if tall <= 0:
        return np.empty(0)
    steepest, _ = find_peaks(slope, height=0.35 * tall, distance=max(int(0.55 * period / step), 1))
    steepest = _with_weak_ones(steepest, slope, tall, period / step)
    feet = []
    for top in steepest:
        first = max(int(top - 0.35 * period / step), 0)
        if top - first < 1:
            continue
        lowest = first + int(smooth[first : top + 1].argmin())
        if lowest == 0:
            continue  # the record begins within this rise: its foot is not there
        floor = float(smooth[lowest])
        foot = time[top] - (smooth[top] - floor) / slope[top]
        if foot >= time[0]:
            feet.append(float(foot))
    return np.asarray(feet)


def _with_weak_ones(steepest: NDArray[np.intp], slope: NDArray[np.float64], tall: float, samples: float) -> NDArray[np.intp]:
    """Look once more, with a lower bar, where a cycle seems to be missing between two rises."""
    found = list(steepest)
    for left, right in itertools.pairwise(steepest):
        if right - left > 1.6 * samples:
            first, last = int(left + 0.6 * samples), int(right - 0.6 * samples)
            if last > first:
                top = first + int(slope[first:last].argmax())
                if slope[top] > 0.12 * tall:
                    found.append(np.intp(top))
    return np.sort(np.asarray(found, dtype=np.intp))


def refine_feet(signal: Signal, feet: NDArray[np.float64]) -> NDArray[np.float64]:
    """Shift each foot so that its wave lies on the mean wave; noise moves a single tangent, but hardly a whole rise. [s]

    The median shift is zero; a wave that is not like the others keeps its own foot.
    """
    if feet.size < 4:
        return feet
    time, values, step = evenly(signal)
    period = float(np.median(np.diff(feet)))
    about = np.arange(_WINDOW[0] * period, _WINDOW[1] * period, max(step, period / 400))
    shifted = feet.copy()
    for _ in range(3):
        waves = np.interp(shifted[:, None] + about, time, values)
        whole = (shifted + about[0] >= time[0]) & (shifted + about[-1] <= time[-1])
        if int(whole.sum()) < 3:
            return feet
        mean = np.median(waves[whole], axis=0)
        slope = np.gradient(_smoothed(mean, max(round(0.01 * period / (about[1] - about[0])), 1)), about)
        # x(t) = a m(t - d) + b: least squares in the shift, with gain and level free, so that a taller wave is not taken for an earlier one.
        design = np.stack([-slope, mean - mean.mean(), np.ones_like(mean)], axis=1)
        moves, *_ = np.linalg.lstsq(design, (waves - mean).T, rcond=None)
        misfit = np.sqrt(np.mean(((waves - mean).T - design @ moves) ** 2, axis=0))
        good = whole & (np.abs(moves[0]) < 0.03 * period) & (misfit <= max(4 * float(np.median(misfit)), 0.02 * float(np.ptp(mean))))
        shifted = shifted + np.where(good, moves[0] - np.median(moves[0][good]) if good.any() else 0.0, 0.0)
    far = np.abs(shifted - feet) > 0.05 * period
    shifted[far] = feet[far]
    return shifted if np.all(np.diff(shifted) > 0) else feet


def as_well_by_one_period(signal: Signal, feet: NDArray[np.float64], period: float) -> bool:
    """Tell whether cycles of one period are as alike as those cut at their own feet, by the median cycle's misfit."""
    time, values, _ = evenly(signal)
    phase = (np.arange(_PHASES) + 0.5) / _PHASES
    number = int(np.floor((feet[-1] - feet[0]) / period + 0.25))
    if number < 2:
        return True
    even = feet[0] + period * np.arange(number + 1)

    def misfit(edges: NDArray[np.float64]) -> float:
        # Aligned in time from the onset where lengths differ, so that a stretched tail is no argument for one period.
        folded = np.interp(edges[:-1, None] + phase * float(np.median(np.diff(edges))), time, values)
        return float(np.median(np.sqrt(np.mean((folded - np.median(folded, axis=0)) ** 2, axis=1))))

    # Few cycles: their own feet fit better by chance.
    return misfit(even) <= (1 + max(0.1, 1 / number)) * misfit(feet) + _ALIKE * float(np.ptp(values))
