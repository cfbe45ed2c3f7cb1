"""Extremes and rectified means of a finite Fourier series, exact for its harmonics.

x(phase) = Re sum_{n=0}^{N} X_n exp(i n phase), harmonic axis last; leading axes are batches.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import InputError

__all__ = ["evaluate", "extremes", "mean_absolute", "mean_positive", "zero_phases"]


def _rows(coefficients: ArrayLike) -> tuple[NDArray[np.complex128], tuple[int, ...]]:
    values = np.asarray(coefficients, dtype=complex)
    if values.ndim == 0 or values.shape[-1] == 0:
        raise InputError("coefficients need a harmonic axis of at least one, the mean", name="coefficients")
    return values.reshape(-1, values.shape[-1]), values.shape[:-1]


def _grid_size(count: int) -> int:
    """Points on the search grid: at least 16 on each wave of the highest harmonic."""
    return int(2 ** np.ceil(np.log2(max(64, 16 * count))))


def evaluate(coefficients: ArrayLike, phase: ArrayLike) -> Any:
    """Return x at phases.

    Parameters
    ----------
    coefficients : array_like of complex, shape (..., N + 1)
    phase : array_like, shape (K,) or scalar
        Angle in the cycle. [rad]

    Returns
    -------
    ndarray, shape (..., K), or (...) for a scalar phase

    Examples
    --------
    >>> evaluate([1.0, 2.0], [0.0])
    array([3.])
    """
    rows, lead = _rows(coefficients)
    angle = np.asarray(phase, dtype=float)
    flat = angle.reshape(-1)
    order = np.arange(rows.shape[1])
    turn = np.outer(order, flat)
    values = rows.real @ np.cos(turn) - rows.imag @ np.sin(turn)
    return values.reshape(lead + angle.shape)[()]


def _sampled(rows: NDArray[np.complex128], size: int) -> NDArray[np.float64]:
    """Values on a uniform grid of ``size`` phases, by FFT."""
    spectrum = np.zeros((rows.shape[0], size // 2 + 1), dtype=complex)
    spectrum[:, : rows.shape[1]] = rows.conj() * (size / 2)
    spectrum[:, 0] *= 2
    # irfft sums exp(+i n phase) with the conjugate spectrum conjugated back: x = Re sum X_n exp(i n phase).
    return np.asarray(np.fft.irfft(spectrum.conj(), n=size, axis=1))


def _at(rows: NDArray[np.complex128], phase: NDArray[np.float64], derivative: int = 0) -> NDArray[np.float64]:
    """Value or derivative of each row at its own phases; rows (B, N+1), phase (B,)."""
    order = np.arange(rows.shape[1])
    terms = rows * (1j * order) ** derivative * np.exp(1j * phase[:, None] * order)
    return np.asarray(terms.real.sum(axis=1))


def extremes(coefficients: ArrayLike) -> tuple[Any, Any, Any, Any]:
    """Return (least, greatest, phase of the least, phase of the greatest), located between instants.

    Parameters
    ----------
    coefficients : array_like of complex, shape (..., N + 1)

    Returns
    -------
    tuple of four, each of shape (...)
        Phases in [0, 2 pi). [rad]

    Examples
    --------
    >>> low, high, _, _ = extremes([1.0, 2.0j])
    >>> float(round(low, 12)), float(round(high, 12))
    (-1.0, 3.0)
    """
    rows, lead = _rows(coefficients)
    if rows.shape[1] == 1:
        mean = rows[:, 0].real.reshape(lead)[()]
        nought = np.zeros(lead)[()]
        return mean, mean, nought, nought
    size = _grid_size(rows.shape[1] - 1)
    grid = _sampled(rows, size)
    low, low_phase = _polished(rows, grid, grid.argmin(axis=1), size, -1.0)
    high, high_phase = _polished(rows, grid, grid.argmax(axis=1), size, 1.0)
    return low.reshape(lead)[()], high.reshape(lead)[()], low_phase.reshape(lead)[()], high_phase.reshape(lead)[()]


def _polished(
    rows: NDArray[np.complex128], grid: NDArray[np.float64], start: NDArray[np.int_], size: int, sign: float
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Newton's method on the derivative from the best grid point and from its nearest rivals; never worse than the grid."""
    step = 2 * np.pi / size
    best_phase: NDArray[np.float64] = np.asarray(start * step, dtype=np.float64)
    best = np.take_along_axis(grid, start[:, None], axis=1)[:, 0]
    # A rival peak may be higher between its grid points: all local extremes within the grid's own error are polished.
    score = sign * grid
    peak = (score >= np.roll(score, 1, axis=1)) & (score > np.roll(score, -1, axis=1))
    bend = np.abs(np.roll(score, 1, axis=1) - 2 * score + np.roll(score, -1, axis=1))
    close = peak & (score + bend >= (sign * best)[:, None])
    row, column = np.nonzero(close)
    if row.size == 0:
        return best, best_phase
    phase: NDArray[np.float64] = np.asarray(column * step, dtype=np.float64)
    rival, order = rows[row], np.arange(rows.shape[1])
    for _ in range(6):
        # Both derivatives from one exponential: i n and (i n)^2 times the same terms.
        terms = rival * np.exp(1j * phase[:, None] * order)
        slope, curve = -(terms.imag @ order), -(terms.real @ order**2)
        move = np.clip(np.divide(-slope, curve, out=np.zeros_like(slope), where=sign * curve < 0), -step, step)
        phase = np.asarray(phase + move, dtype=np.float64)
        if np.all(np.abs(move) < 1e-9):  # the error after this step is of the order of its square
            break
    value = _at(rival, phase)
    for r, v, p in zip(row, value, phase, strict=True):
        if sign * v > sign * best[r]:
            best[r], best_phase[r] = v, p
    return best, np.mod(best_phase, 2 * np.pi)


def zero_phases(coefficients: ArrayLike) -> NDArray[np.float64]:
    """Phases at which one series changes sign, increasing, located to rounding.

    Parameters
    ----------
    coefficients : array_like of complex, shape (N + 1,)

    Returns
    -------
    ndarray, shape (number of changes,)
        In [0, 2 pi). [rad]

    Examples
    --------
    >>> zero_phases([0.0, 1.0]).round(6)
    array([1.570796, 4.712389])
    """
    rows, _ = _rows(coefficients)
    row = rows[0]
    low, high, low_phase, high_phase = extremes(row)
    if low >= 0 or high <= 0:
        return np.empty(0)
    size = 2 * _grid_size(row.size - 1)
    # The located extremes join the grid, so that a dip through zero between two grid points is not missed.
    phase = np.unique(np.concatenate([np.arange(size) * (2 * np.pi / size), [low_phase, high_phase]]))
    phase = np.append(phase, phase[0] + 2 * np.pi)
    value = np.asarray(evaluate(row, phase))
    place = np.flatnonzero((value[:-1] < 0) != (value[1:] < 0))
    left, right, at_left = phase[place], phase[place + 1], value[place]
    batch = np.broadcast_to(row, (place.size, row.size))
    for _ in range(60):
        middle = 0.5 * (left + right)
        at_middle = _at(batch, middle)
        same = (at_middle < 0) == (at_left < 0)
        left, right = np.where(same, middle, left), np.where(same, right, middle)
    return np.sort(np.mod(0.5 * (left + right), 2 * np.pi))


def _integral(row: NDArray[np.complex128], phase: NDArray[np.float64]) -> NDArray[np.float64]:
    """Antiderivative of the series at phases."""
    order = np.arange(1, row.size)
    terms = (row[1:] / (1j * order)) * np.exp(1j * phase[:, None] * order)
    return np.asarray(row[0].real * phase + terms.real.sum(axis=1))


def _mean_positive_of(row: NDArray[np.complex128]) -> float:
    zeros = zero_phases(row)
    if zeros.size == 0:
        return max(float(row[0].real), 0.0)
    edges = np.append(zeros, zeros[0] + 2 * np.pi)
    pieces = np.diff(_integral(row, edges))
    middle = np.asarray(evaluate(row, 0.5 * (edges[1:] + edges[:-1])))
    return float(pieces[middle > 0].sum() / (2 * np.pi))


def mean_positive(coefficients: ArrayLike) -> Any:
    """Mean over the cycle of max(x, 0), integrated between located sign changes.

    Examples
    --------
    >>> float(round(mean_positive([0.0, 1.0]) * 3.141592653589793, 12))
    1.0
    """
    rows, lead = _rows(coefficients)
    return np.array([_mean_positive_of(row) for row in rows]).reshape(lead)[()]


def mean_absolute(coefficients: ArrayLike) -> Any:
    """Mean over the cycle of abs(x) = 2 mean(max(x, 0)) - mean(x), integrated between located sign changes.

    Parameters
    ----------
    coefficients : array_like of complex, shape (..., N + 1)

    Returns
    -------
    ndarray, shape (...)

    Examples
    --------
    >>> float(round(mean_absolute([1.0, 3.0]), 10))
    2.0169795283
    """
    rows, lead = _rows(coefficients)
    out = np.empty(rows.shape[0])
    for index, row in enumerate(rows):
        mean = float(row[0].real)
        positive = _mean_positive_of(row)
        # Written as a sum of two means of one sign: no cancellation, and never below abs(mean).
        out[index] = positive + max(positive - mean, 0.0)
    return out.reshape(lead)[()]
