"""The period of a signal: found by autocorrelation, refined below one sample, and the foot of each wave."""

from __future__ import annotations

import itertools

import numpy as np
from numpy.typing import NDArray

from ..errors import SignalError
from .signal import Signal

__all__ = ["constant_period", "find_period", "locate_feet", "refine_period"]

_LEAST_CORRELATION = 0.3


def _even(signal: Signal) -> tuple[NDArray[np.float64], NDArray[np.float64], float]:
    """Return time, values and interval on an even grid, for looking only (never for the harmonics)."""
    step = float(np.median(np.diff(signal.time)))
    time = np.arange(signal.time[0], signal.time[-1] + 0.5 * step, step)
    good = slice(None) if signal.weights is None else signal.weights > 0
    return time, np.interp(time, signal.time[good], signal.values[good]), step


def find_period(signal: Signal) -> float:
    """Return the period in seconds, from the first high maximum of the unbiased autocorrelation.

    Raises
    ------
    SignalError
        If the signal does not repeat itself within the record.
    """
    _, values, step = _even(signal)
    centred = values - values.mean()
    size = centred.size
    spectrum = np.fft.rfft(centred, n=2 * size)
    raw = np.fft.irfft(spectrum.real**2 + spectrum.imag**2)[:size]
    if raw[0] <= 0:
        raise SignalError(f"signal {signal.name!r} does not vary; there is no period to find")
    lags = np.arange(size)
    correlation = raw / raw[0] * size / (size - lags)
    usable = correlation[: max(int(size / 1.4), 4)]
    below = np.flatnonzero(usable < 0.2)
    if below.size == 0:
        raise SignalError("no period was found: the signal does not repeat itself; give period or onsets")
    first = int(below[0])
    inner = np.arange(max(first, 1), usable.size - 1)
    peaks = inner[(usable[inner] >= usable[inner - 1]) & (usable[inner] > usable[inner + 1])]
    if peaks.size == 0 or usable[peaks].max() < _LEAST_CORRELATION:
        raise SignalError("no period was found: the signal does not repeat itself within the record; give period or onsets")
    # The first peak nearly as high as the best: a later one is a multiple of the period.
    best = float(usable[peaks].max())
    lag = int(peaks[usable[peaks] > 0.85 * best][0])
    left, top, right = usable[lag - 1], usable[lag], usable[lag + 1]
    bend = left - 2 * top + right
    shift = 0.0 if bend == 0 else 0.5 * (left - right) / bend
    return float((lag + shift) * step)


def _smoothed(values: NDArray[np.float64], width: int) -> NDArray[np.float64]:
    if width < 2:
        return values
    window = np.hanning(width + 2)[1:-1]
    return np.convolve(np.pad(values, (width, width), mode="edge"), window / window.sum(), mode="same")[width:-width]


def locate_feet(signal: Signal, period: float) -> NDArray[np.float64]:
    """Return the foot of each wave: where the tangent at the steepest rise meets the least value before it. [s]"""
    from scipy.signal import find_peaks

    time, values, step = _even(signal)
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
        floor = float(smooth[first : top + 1].min())
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


def constant_period(feet: NDArray[np.float64], period: float, step: float) -> bool:
    """Tell whether feet lie on a straight line in time, to within a sample or a hundredth of the period."""
    if feet.size < 3:
        return True
    number = np.round((feet - feet[0]) / period)
    fit = np.polyfit(number, feet, 1)
    scatter = float(np.std(feet - np.polyval(fit, number)))
    return bool(scatter < max(0.6 * step, 0.006 * period))


def refine_period(signal: Signal, period: float) -> float:
    """Return the period for which few harmonics leave the least residual, far below one sample. [s]"""
    from scipy.optimize import minimize_scalar

    time, values = signal.time - signal.time[0], signal.values
    weights = np.ones(len(signal)) if signal.weights is None else signal.weights
    span = float(time[-1])
    number = max(span / period, 1.0)
    per_cycle = period / float(np.median(np.diff(time)))
    count = int(max(1, min(8, (per_cycle - 1) // 2)))
    if time.size > 20000:
        thin = time.size // 20000 + 1
        if per_cycle / thin > 40:
            time, values, weights = time[::thin], values[::thin], weights[::thin]

    root = np.sqrt(weights)
    target = (values - np.average(values, weights=weights)) * root

    def residual(trial: float) -> float:
        turn = np.exp(2j * np.pi * time / trial)
        columns = [root]
        wave = root.astype(complex)
        for _ in range(count):
            wave = wave * turn
            columns += [wave.real, wave.imag]
        basis = np.stack(columns, axis=1)
        fit = np.linalg.solve(basis.T @ basis, basis.T @ target)
        return float(np.sum((target - basis @ fit) ** 2))

    reach = 0.35 / (number * count)
    grid = period * (1 + np.linspace(-reach, reach, 13) * 1.5)
    best = int(np.argmin([residual(trial) for trial in grid]))
    low, high = grid[max(best - 1, 0)], grid[min(best + 1, grid.size - 1)]
    found = minimize_scalar(residual, bounds=(low, high), method="bounded", options={"xatol": 1e-9 * period})
    return float(found.x)
