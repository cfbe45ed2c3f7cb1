"""The period of a signal: found by autocorrelation, refined below one sample."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from ..errors import SignalError
from .signal import Signal

__all__ = ["evenly", "find_period", "refine_period"]

_LEAST_CORRELATION = 0.3


def evenly(signal: Signal) -> tuple[NDArray[np.float64], NDArray[np.float64], float]:
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
    _, values, step = evenly(signal)
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
