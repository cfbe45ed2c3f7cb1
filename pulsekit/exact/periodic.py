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


def _at(rows: NDArray[np.complex128], phase: NDArray[np.float64]) -> NDArray[np.float64]:
    """Value of each row at its own phase; rows (B, N + 1), phase (B,)."""
    terms = rows * np.exp(1j * phase[:, None] * np.arange(rows.shape[1]))
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
    # The least of x is the greatest of -x: one search for both.
    both = np.concatenate([rows, -rows])
    top, phase = _greatest(both)
    count = rows.shape[0]
    return (
        (0.0 - top[count:]).reshape(lead)[()], top[:count].reshape(lead)[()],
        phase[count:].reshape(lead)[()], phase[:count].reshape(lead)[()],
    )  # fmt: skip


def _slack(rows: NDArray[np.complex128], step: float) -> NDArray[np.float64]:
    """How far a series may rise above its grid points next to an extreme: step^2/8 max|x''|, the latter bounded by its terms."""
    return np.asarray(np.abs(rows) @ (np.arange(rows.shape[1]) ** 2 * (step * step / 8)))


def _greatest(rows: NDArray[np.complex128]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Greatest value of each row and its phase: Newton's method from the best grid point and from all that may rival it."""
    size = _grid_size(rows.shape[1] - 1)
    step = 2 * np.pi / size
    grid = _sampled(rows, size)
    start = grid.argmax(axis=1)
    best, best_phase = grid[np.arange(rows.shape[0]), start], start * step
    row, column = np.nonzero(grid >= (best - _slack(rows, step))[:, None])
    left, here, right = grid[row, column - 1], grid[row, column], grid[row, (column + 1) % size]
    peak = (here >= left) & (here > right)
    row, column = row[peak], column[peak]
    if row.size:
        phase = _stationary(rows[row], np.asarray(column * step, dtype=float), step)
        value = _at(rows[row], phase)
        order = np.argsort(value, kind="stable")
        highest, where = np.full(best.shape, -np.inf), np.zeros(best.shape)
        highest[row[order]], where[row[order]] = value[order], phase[order]  # of several for one row the last, the highest, stays
        better = highest > best
        best, best_phase = np.where(better, highest, best), np.where(better, where, best_phase)
    return best, np.mod(best_phase, 2 * np.pi)


def _stationary(rows: NDArray[np.complex128], phase: NDArray[np.float64], step: float) -> NDArray[np.float64]:
    """Phase of the greatest value near each phase, by Newton's method on the derivative; rows (B, N + 1), phase (B,)."""
    order = np.arange(rows.shape[1])
    for _ in range(6):
        # Both derivatives from one exponential: i n and (i n)^2 times the same terms.
        terms = rows * np.exp(1j * phase[:, None] * order)
        slope, curve = -(terms.imag @ order), -(terms.real @ order**2)
        move = np.clip(np.divide(-slope, curve, out=np.zeros_like(slope), where=curve < 0), -step, step)
        phase = phase + move
        if np.all(np.abs(move) < 1e-9):  # the error after this step is of the order of its square
            break
    return phase


def _changes(rows: NDArray[np.complex128]) -> tuple[NDArray[np.int_], NDArray[np.float64], NDArray[np.bool_], NDArray[np.bool_]]:
    """All changes of sign: (row, phase, whether it rises there), and per row whether x is negative at phase 0."""
    size = 2 * _grid_size(rows.shape[1] - 1)
    step = 2 * np.pi / size
    grid = _sampled(rows, size)
    negative = grid < 0
    row, column = np.nonzero(negative != np.roll(negative, -1, axis=1))
    low = np.asarray(column * step, dtype=float)
    high, rises = low + step, negative[row, column]
    dips = _dips(rows, grid, step)
    if dips[0].size:
        row, low, high, rises = (np.concatenate(pair) for pair in zip((row, low, high, rises), dips, strict=True))
    return row, _roots(rows[row], low, high, rises), rises, negative[:, 0]


def _dips(
    rows: NDArray[np.complex128], grid: NDArray[np.float64], step: float
) -> tuple[NDArray[np.int_], NDArray[np.float64], NDArray[np.float64], NDArray[np.bool_]]:
    """Brackets of the pairs of sign changes that lie between two grid points, where a curve just dips through zero."""
    size = grid.shape[1]
    row, column = np.nonzero(np.abs(grid) < _slack(rows, step)[:, None])
    sign = np.where(grid[row, column] < 0, -1.0, 1.0)
    left, here, right = (sign * grid[row, (column + shift) % size] for shift in (-1, 0, 1))
    touching = (here <= left) & (here < right) & (left >= 0) & (right >= 0)
    row, column, sign = row[touching], column[touching], sign[touching]
    if row.size:
        phase = _stationary(-sign[:, None] * rows[row], column * step, step)
        through = sign * _at(rows[row], phase) < 0
        row, column, sign, phase = row[through], column[through], sign[through], phase[through]
    else:
        phase = np.empty(0)
    falls = sign > 0
    return (
        np.concatenate([row, row]), np.concatenate([(column - 1) * step, phase]),
        np.concatenate([phase, (column + 1) * step]), np.concatenate([~falls, falls]),
    )  # fmt: skip


def _roots(
    rows: NDArray[np.complex128], low: NDArray[np.float64], high: NDArray[np.float64], rises: NDArray[np.bool_]
) -> NDArray[np.float64]:
    """One root in each bracket, by Newton's method that halves the bracket where it would leave it."""
    order = np.arange(rows.shape[1])
    phase = 0.5 * (low + high)
    for _ in range(60):
        terms = rows * np.exp(1j * phase[:, None] * order)
        value, slope = terms.real.sum(axis=1), -(terms.imag @ order)
        before = (value < 0) == rises
        low, high = np.where(before, phase, low), np.where(before, high, phase)
        following = phase - np.divide(value, slope, out=np.full_like(value, np.inf), where=slope != 0)
        following = np.where((following >= low) & (following <= high), following, 0.5 * (low + high))
        settled = np.all(np.abs(following - phase) < 2e-15)
        phase = following
        if settled:
            break
    return phase


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
    return np.sort(np.mod(_changes(rows[:1])[1], 2 * np.pi))


def _mean_positive_of(rows: NDArray[np.complex128]) -> NDArray[np.float64]:
    """Integral over the positive pieces: the antiderivative at each fall less that at each rise, and a turn if x(0) >= 0."""
    row, phase, rises, negative = _changes(rows)
    mean = rows[:, 0].real
    total = np.where(negative, 0.0, mean)
    if row.size:
        order = np.arange(1, rows.shape[1])
        terms = (rows[row, 1:] / (1j * order)) * np.exp(1j * phase[:, None] * order)
        value = mean[row] * phase + terms.real.sum(axis=1)
        total = total + np.bincount(row, weights=np.where(rises, -value, value), minlength=rows.shape[0]) / (2 * np.pi)
    return np.maximum(total, 0.0)


def mean_positive(coefficients: ArrayLike) -> Any:
    """Mean over the cycle of max(x, 0), integrated between located sign changes.

    Examples
    --------
    >>> float(round(mean_positive([0.0, 1.0]) * 3.141592653589793, 12))
    1.0
    """
    rows, lead = _rows(coefficients)
    return _mean_positive_of(rows).reshape(lead)[()]


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
    positive = _mean_positive_of(rows)
    # Written as a sum of two means of one sign: no cancellation, and never below abs(mean).
    return (positive + np.maximum(positive - rows[:, 0].real, 0.0)).reshape(lead)[()]
