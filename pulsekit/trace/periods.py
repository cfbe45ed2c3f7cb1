"""The period of a signal: found by autocorrelation, refined below one sample."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.fft import next_fast_len

from ..errors import SignalError
from .signal import Signal

__all__ = ["evenly", "find_period", "refine_period"]

_LEAST_CORRELATION = 0.3
_DRIFT = 0.2  # share of the variance from which a straight drift is taken off before looking
_SHORT = 20  # cycles up to which a period is looked for in a wide neighbourhood
_MOST_SAMPLES = 100_000  # above which blocks of samples fix the period finely enough


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
    time, values, step = evenly(signal)
    if not np.ptp(values) > 0:
        raise SignalError(f"signal {signal.name!r} does not vary; there is no period to find")
    values = _level(time, values)
    usable, peaks = _correlation_peaks(values - values.mean())
    # Cycles that vary in length blur a narrow peak: seen through a window of an eighth of the shortest candidate, the wave is broad.
    width = int(peaks[0] / 8)
    if width >= 2:
        window = np.hanning(2 * width + 1)
        smooth = np.convolve(np.pad(values, width, mode="edge"), window / window.sum(), mode="valid")
        usable, peaks = _correlation_peaks(smooth - smooth.mean())
    # The first peak nearly as high as the best: a later one is a multiple of the period.
    lag = int(peaks[usable[peaks] > 0.85 * float(usable[peaks].max())][0])
    left, top, right = usable[lag - 1], usable[lag], usable[lag + 1]
    bend = left - 2 * top + right
    shift = 0.0 if bend == 0 else 0.5 * (left - right) / bend
    return float((lag + shift) * step)


def _correlation_peaks(centred: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.intp]]:
    """Correlation of the record with itself at the lags that it can judge, and its peaks after the first fall.

    At each lag it is divided by the energies of the two parts that meet, so that it never exceeds 1 however short they are.
    """
    size = centred.size
    padded = next_fast_len(2 * size, real=True)
    spectrum = np.fft.rfft(centred, n=padded)
    most = max(int(size / 1.4), 4)
    raw = np.fft.irfft(spectrum.real**2 + spectrum.imag**2, n=padded)[:most]
    energy = np.concatenate([[0.0], np.cumsum(centred**2)])
    lags = np.arange(most)
    early, late = energy[size - lags], energy[-1] - energy[lags]
    floor = 1e-3 * energy[-1]
    correlation = np.where((early > floor) & (late > floor), raw / np.sqrt(np.maximum(early, floor) * np.maximum(late, floor)), 0.0)
    below = np.flatnonzero(correlation < 0.2)
    if below.size == 0:
        raise SignalError("no period was found: the signal does not repeat itself; give period or onsets")
    inner = np.arange(max(int(below[0]), 1), most - 1)
    peaks = inner[(correlation[inner] >= correlation[inner - 1]) & (correlation[inner] > correlation[inner + 1])]
    peaks = peaks[correlation[peaks] >= _LEAST_CORRELATION]
    # A lag beyond half the record is judged by less than one cycle's overlap: only where nothing shorter stands out.
    if np.any(peaks <= size // 2):
        peaks = peaks[peaks <= size // 2]
    if peaks.size == 0:
        raise SignalError("no period was found: the signal does not repeat itself within the record; give period or onsets")
    return correlation, peaks


def refine_period(signal: Signal, period: float) -> float:
    """Return the period for which few harmonics leave the least residual, far below one sample. [s]

    The start must be right to 5 % in a short record, and to a twentieth of a cycle over the whole of a long one.
    """
    fine, coarse, count, number = _prepared(signal, period)
    narrow = 0.5 / (number * count)
    reach = max(narrow, min(0.05, 0.6 / number)) if number <= _SHORT else narrow
    grid = period * (1 + np.linspace(-reach, reach, max(13, 2 * int(reach / narrow * 4) + 1)))
    best = float(grid[int(np.argmin([_least_squares(coarse, trial, count)[0] for trial in grid]))])
    low, high = best - 1.5 * narrow * period, best + 1.5 * narrow * period
    best = _descended(coarse, best, count, low, high)
    if coarse[0].size < fine[0].size <= _MOST_SAMPLES:
        best = _descended(fine, best, count, low, high)
    return best


def period_misfit(signal: Signal, period: float) -> float:
    """Residual sum of squares that few harmonics of a period leave. [SI squared]"""
    _, coarse, count, _ = _prepared(signal, period)
    return _least_squares(coarse, period, count)[0]


def _prepared(signal: Signal, period: float) -> tuple[_Samples, _Samples, int, float]:
    """Good samples, the same in blocks, how many harmonics to fit, and cycles in the record."""
    good = np.ones(len(signal), dtype=bool) if signal.weights is None else signal.weights > 0
    time, values = signal.time[good] - signal.time[0], _level(signal.time[good], signal.values[good])
    coarse = _blocks(time, values, int(period / float(np.median(np.diff(signal.time))) / 48))
    number = max(float(time[-1]) / period, 1.0)
    count = int(max(1, min(8, (period / float(np.median(np.diff(coarse[0]))) - 1) // 2, (coarse[0].size - 2) // 4)))
    return (time, values, np.ones(time.size)), coarse, count, number


def _level(time: NDArray[np.float64], values: NDArray[np.float64]) -> NDArray[np.float64]:
    """The values without a straight drift, where that is a large part of what they vary; for looking only."""
    middle = time - time.mean()
    slope = float(middle @ values / (middle @ middle))
    straight = slope * middle
    return values - straight if np.var(straight) > _DRIFT * np.var(values) else values


_Samples = tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]


def _least_squares(
    samples: _Samples, period: float, count: int
) -> tuple[float, NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]:
    """Residual sum of squares, residual, basis [1, cos, sin, ...] and fitted coefficients at a period."""
    time, values, sizes = samples
    turn = np.exp(2j * np.pi * time / period)
    basis = np.empty((time.size, 2 * count + 1))
    basis[:, 0] = np.sqrt(sizes)
    wave = basis[:, 0].astype(complex)
    for n in range(count):
        wave = wave * turn
        basis[:, 2 * n + 1], basis[:, 2 * n + 2] = wave.real, wave.imag
    target = values * basis[:, 0]
    fit = np.linalg.solve(basis.T @ basis, basis.T @ target)
    rest = target - basis @ fit
    return float(rest @ rest), rest, basis, np.asarray(fit, dtype=np.float64)


def _descended(samples: _Samples, period: float, count: int, low: float, high: float) -> float:
    """Gauss's and Newton's steps in the period, the harmonics fitted anew each time."""
    order = np.arange(1, count + 1)
    least = _least_squares(samples, period, count)
    # Below this the sum of squares is rounding and cannot judge a step.
    rounding = 1e-13 * float(np.sum(samples[2] * samples[1] ** 2))
    for _ in range(12):
        _, rest, basis, fit = least
        # d/dT of a cos(n w t) + b sin(n w t) with w = 2 pi/T.
        slope = (2 * np.pi * samples[0] / period**2) * (basis[:, 1::2] @ (-order * fit[2::2]) + basis[:, 2::2] @ (order * fit[1::2]))
        free = slope - basis @ np.linalg.solve(basis.T @ basis, basis.T @ slope)
        power = float(free @ free)
        if power == 0:
            break
        trial = float(np.clip(period + float(free @ rest) / power, low, high))
        step = _least_squares(samples, trial, count)
        if step[0] > least[0] + rounding:
            break
        moved, period, least = abs(trial - period), trial, step
        if moved < 1e-14 * period:
            break
    return period


def _blocks(time: NDArray[np.float64], values: NDArray[np.float64], size: int) -> _Samples:
    """Samples averaged in blocks, and how many each holds."""
    if size < 2:
        return time, values, np.ones(time.size)
    starts = np.arange(0, time.size, size)
    sizes = np.diff(np.append(starts, time.size)).astype(float)
    return np.add.reduceat(time, starts) / sizes, np.add.reduceat(values, starts) / sizes, sizes
