"""Profiles of all harmonics on a common set of radii: what `velocity_profile` gives point by point, in three matrix products.

Every series of the profile is a sum over k of (a function of alpha) times (a function of x); on a grid of radii by
harmonics such a sum is a matrix product.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import InputError
from ._shear_factor_fit import shear_factor_of_square
from .womersley import checked, velocity_profile

__all__ = ["profile_table"]

_ROOT_I = np.exp(0.25j * np.pi)
# Largest |zeta| of the power series of the difference, and of that of I0 alone. On the ray of zeta a power series loses
# exp((1 - sqrt(1/2)) |zeta|): a factor of 350 and of 190, to 4e-14 and 2e-14 at worst. I0's expansion in 1/zeta, cut at 28
# terms, reaches 1e-16 from |zeta| = 18 on.
_SERIES, _LARGE = 20.0, 18.0
# Beyond this alpha nothing is left of exp(-zeta y) where |zeta x| < 18.
_GONE = 80.0
# Beyond, the powers of alpha in the wall series overflow.
_POINTWISE = 1e8
# Nearer to the wall than this in alpha y, the core less what the wall slows would lose more than a digit.
_NEAR = 0.05
_TERMS, _WALL_TERMS, _LARGE_TERMS = 38, 10, 28

_COUNT = np.arange(1.0, _TERMS + 1)
_I0_STEPS = 1.0 / _COUNT**2  # ratios of successive terms of I0 in (zeta/2)^2
_I2_STEPS = 1.0 / (_COUNT * (_COUNT + 2))


def profile_table(alpha: ArrayLike, x: ArrayLike | None = None, *, wall_distance: ArrayLike | None = None) -> NDArray[np.complex128]:
    """Velocity over mean velocity, u(x)/U, on radii by harmonics.

    Parameters
    ----------
    alpha : array_like, shape (M,)
        Womersley numbers, >= 0. [-]
    x : array_like, shape (K,)
        r/R, 0 to 1. [-]
    wall_distance : array_like, shape (K,)
        Instead of x: 1 - x. [-]

    Returns
    -------
    ndarray of complex, shape (K, M)
        Relative error, against the local velocity, below 1e-13.

    Raises
    ------
    InputError
        As `velocity_profile`.

    Examples
    --------
    >>> profile_table([0.0], [0.0, 0.5, 1.0]).real.ravel()
    array([2. , 1.5, 0. ])
    """
    if (x is None) == (wall_distance is None):
        raise InputError("give exactly one of x and wall_distance", name="x")
    numbers = checked(alpha)
    y = 1.0 - np.asarray(x, dtype=float) if wall_distance is None else np.asarray(wall_distance, dtype=float)
    if not np.all((y >= 0) & (y <= 1)):
        raise InputError("a place in the section, r/R, must lie between 0 (axis) and 1 (wall)", name="x", allowed="0 to 1")
    if numbers.size and numbers.max() > _POINTWISE:
        return np.asarray(velocity_profile(numbers, wall_distance=y[:, None]))
    out = np.empty((y.size, numbers.size), dtype=complex)
    small = numbers < _SERIES
    if np.any(small):
        out[:, small] = _small(numbers[small], y)
    if not np.all(small):
        out[:, ~small] = _thin(numbers[~small], y)
    return out


def _powers(base: NDArray[np.complex128], steps: NDArray[np.float64], first: float) -> NDArray[np.complex128]:
    """Terms first, first base step_1, first base^2 step_1 step_2 ..., shape (len(steps), M)."""
    ratio = steps[:, None] * base
    ratio = np.concatenate([np.full((1, base.size), first, dtype=complex), ratio[:-1]])
    return np.asarray(np.cumprod(ratio, axis=0), dtype=complex)


def _small(numbers: NDArray[np.float64], y: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Sum of q^(k-1)/(k!)^2 (1 - x^(2k)) over I2's series; 1 - x^(2k) = (1 - x^2) sum_{j<k} x^(2j)."""
    q = np.asarray(0.25j * numbers**2)
    terms = _powers(q, 1.0 / (_COUNT + 1) ** 2, 1.0)
    under = _powers(q, _I2_STEPS, 0.5).sum(axis=0)
    squares = np.cumprod(np.repeat(((1.0 - y) ** 2)[:, None], _TERMS - 1, axis=1), axis=1)
    geometric = np.cumsum(np.concatenate([np.ones((y.size, 1)), squares], axis=1), axis=1)
    geometric *= (y * (2.0 - y))[:, None]
    return _product(geometric, terms / under)


def _product(real: NDArray[np.float64], complex_: NDArray[np.complex128]) -> NDArray[np.complex128]:
    """Real matrix times complex matrix, as two real products."""
    out = np.empty((real.shape[0], complex_.shape[1]), dtype=complex)
    out.real = real @ complex_.real
    out.imag = real @ complex_.imag
    return out


def _thin(numbers: NDArray[np.float64], y: NDArray[np.float64]) -> NDArray[np.complex128]:
    """A core that moves as one, less what the wall slows: core (1 - I0(zeta x)/I0(zeta)); by a series in y at the wall."""
    zeta = _ROOT_I * numbers
    shear = shear_factor_of_square(numbers)
    gradient = 2.0 * shear + 1j * numbers**2
    inside = np.zeros((y.size, numbers.size), dtype=complex)
    large = numbers * (1.0 - y)[:, None] > _LARGE
    row, column = np.nonzero(large)
    # One pass for zeta x and for zeta itself.
    factors = _large_i0(np.concatenate([zeta, zeta[column] * (1.0 - y[row])]))
    at_wall, within = factors[: zeta.size], factors[zeta.size :]
    inside[row, column] = np.exp(-zeta[column] * y[row]) / np.sqrt(1.0 - y[row]) * within / at_wall[column]
    some = np.flatnonzero(numbers < _GONE)
    if some.size:
        whole = np.exp(zeta[some]) / np.sqrt(2 * np.pi * zeta[some]) * at_wall[some]
        inside[:, some] = np.where(large[:, some], inside[:, some], _product_i0(zeta[some], 1.0 - y) / whole)
    out = (gradient / zeta**2) * (1.0 - inside)
    near = numbers * y[:, None] < _NEAR
    beside = np.flatnonzero(near.any(axis=1))
    if np.any(y[beside] > 0):
        out[beside] = np.where(near[beside], _at_wall(numbers, y[beside], shear, gradient), out[beside])
    out[y == 0] = 0.0
    return out


def _product_i0(zeta: NDArray[np.complex128], x: NDArray[np.float64]) -> NDArray[np.complex128]:
    """I0(zeta x) by its power series; to be used where |zeta x| <= 18, finite elsewhere."""
    terms = _powers(zeta**2 / 4, _I0_STEPS, 1.0)
    squares = np.cumprod(np.repeat((x**2)[:, None], _TERMS - 1, axis=1), axis=1)
    return _product(np.concatenate([np.ones((x.size, 1)), squares], axis=1), terms)


def _large_i0(z: NDArray[np.complex128]) -> NDArray[np.complex128]:
    """Factor of exp(z)/sqrt(2 pi z) in I0(z) on the ray of zeta, |z| >= 18 (DLMF 10.40.5, with its recessive part)."""
    inverse = 1.0 / z
    total = np.full_like(z, _LARGE_SERIES[-1])
    for coefficient in _LARGE_SERIES[-2::-1]:
        total *= inverse
        total += coefficient
    # exp(-2 zeta) is 9e-12 at 18, and of its own expansion 1e-5 is enough.
    return total + 1j * np.exp(-2.0 * z) * (1.0 - inverse * (_LARGE_SERIES[1] - inverse * (_LARGE_SERIES[2] - inverse * _LARGE_SERIES[3])))


_LARGE_SERIES = np.cumprod(np.concatenate([[1.0], [(2 * k - 1) ** 2 / (8.0 * k) for k in range(1, _LARGE_TERMS + 1)]]))


def _at_wall(
    numbers: NDArray[np.float64], y: NDArray[np.float64], shear: NDArray[np.complex128], gradient: NDArray[np.complex128]
) -> NDArray[np.complex128]:
    """Taylor series of u in y, with u = 0 and slope T at y = 0; the recurrence follows from the momentum equation."""
    zeta2 = 1j * numbers**2
    previous2, previous, current = np.zeros_like(zeta2), np.zeros_like(zeta2), shear
    terms = [shear]
    for m in range(1, _WALL_TERMS):
        forcing = -gradient if m == 1 else (gradient if m == 2 else 0.0)
        following = (m * m * current + zeta2 * (previous - previous2) + forcing) / (m * (m + 1))
        terms.append(following)
        previous2, previous, current = previous, current, following
    powers = np.asarray(np.cumprod(np.repeat(y[:, None], _WALL_TERMS, axis=1), axis=1), dtype=float)
    return _product(powers, np.array(terms))
