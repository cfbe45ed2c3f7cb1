"""Least squares on harmonics, from sums over the samples: memory and time grow with samples times harmonics, not with their square."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from ..errors import SignalError
from .decompose_spread import Fit, as_complex, as_real

__all__ = ["cycle_course", "fit_harmonics", "harmonic_basis"]

_BLOCK = 8192


def harmonic_basis(phase: NDArray[np.float64], count: int) -> NDArray[np.float64]:
    """Columns of [1, cos, -sin, ...]: Re(X exp(i a)) = Re X cos a - Im X sin a; phase in cycles."""
    columns = np.empty((phase.size, 2 * count + 1))
    columns[:, 0] = 1.0
    angle = 2 * np.pi * phase[:, None] * np.arange(1, count + 1)
    columns[:, 1::2] = np.cos(angle)
    columns[:, 2::2] = -np.sin(angle)
    return columns


def cycle_course(coefficients: NDArray[np.complex128], phase: NDArray[np.float64]) -> NDArray[np.float64]:
    """Re sum X_n exp(2 pi i n phase) at phases in cycles, of any shape."""
    turn = np.exp(2j * np.pi * np.asarray(phase))
    total = np.full(turn.shape, complex(coefficients[-1]))
    for value in coefficients[-2::-1]:
        total = total * turn + value
    return np.asarray(total.real)


def _sums(phase: NDArray[np.float64], factor: NDArray[np.float64], count: int) -> NDArray[np.complex128]:
    """Sum of factor exp(2 pi i k phase) over the samples, k = 0..count."""
    out = np.zeros(count + 1, dtype=complex)
    for first in range(0, phase.size, _BLOCK):
        turn = np.exp(2j * np.pi * phase[first : first + _BLOCK])
        term = factor[first : first + _BLOCK].astype(complex)
        out[0] += term.sum()
        for k in range(1, count + 1):
            term *= turn
            out[k] += term.sum()
    return out


def _normal(sums: NDArray[np.complex128], count: int) -> NDArray[np.float64]:
    """Matrix of the basis' products from sums to twice the count: cos m cos n = (cos(m-n) + cos(m+n))/2 and so on."""
    n = np.arange(1, count + 1)
    apart, together = np.subtract.outer(n, n), np.add.outer(n, n)
    c_apart, c_together = sums.real[np.abs(apart)], sums.real[together]
    s_apart, s_together = np.sign(-apart) * sums.imag[np.abs(apart)], sums.imag[together]
    out = np.empty((2 * count + 1, 2 * count + 1))
    out[0, 0] = sums[0].real
    out[0, 1::2] = out[1::2, 0] = sums.real[1 : count + 1]
    out[0, 2::2] = out[2::2, 0] = -sums.imag[1 : count + 1]
    out[1::2, 1::2] = 0.5 * (c_apart + c_together)
    out[2::2, 2::2] = 0.5 * (c_apart - c_together)
    mixed = -0.5 * (s_together + s_apart)
    out[1::2, 2::2], out[2::2, 1::2] = mixed, mixed.T
    return out


def _right(phase: NDArray[np.float64], factor: NDArray[np.float64], count: int) -> NDArray[np.float64]:
    return as_real(_sums(phase, factor, count).conj())


def fit_harmonics(phase: NDArray[np.float64], values: NDArray[np.float64], count: int, weights: NDArray[np.float64] | None = None) -> Fit:
    """Fit the mean and ``count`` harmonics to samples at phases in cycles.

    Raises
    ------
    SignalError
        If the phases of the samples cannot tell so many harmonics apart.
    """
    weight = np.ones(values.size) if weights is None else weights
    normal = _normal(_sums(phase, weight, 2 * count), count)
    values_of = np.linalg.eigvalsh(normal)
    if not values_of[0] > 1e-12 * values_of[-1]:
        raise SignalError(f"{count} harmonics cannot be told apart with these samples; keep fewer (harmonics = {max(count // 2, 1)})")
    inverse = np.linalg.inv(normal)
    vector = inverse @ _right(phase, weight * values, count)
    # Steps of refinement bring the normal equations to the accuracy of an orthogonal solution.
    for _ in range(2):
        vector = vector + inverse @ _right(phase, weight * (values - cycle_course(as_complex(vector), phase)), count)
    rest = values - cycle_course(as_complex(vector), phase)
    residual = float(np.sum(weight * rest**2))
    return Fit(vector, np.asarray(inverse, dtype=np.float64), residual, values.size - 2 * count - 1, False)
