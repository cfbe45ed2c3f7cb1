"""Oscillating flow in a circular tube: the dimensionless factors, from creeping flow to the thinnest Stokes layer.

Everything follows from one function of the Womersley number alpha = R sqrt(omega rho/mu), with
zeta = sqrt(i) alpha and the time factor exp(+i omega t):

    T(alpha) = tau R/(mu U) = zeta I1(zeta)/I2(zeta)          shear factor, 4 in steady flow
    G R^2/(mu U) = zeta^2 I0/I2 = 2 T + i alpha^2             pressure factor, 8 in steady flow
    u(x)/U = (I0(zeta) - I0(zeta x))/I2(zeta)                 profile, 2 (1 - x^2) in steady flow

J. R. Womersley, J. Physiol. 127 (1955) 553, in modified Bessel functions.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import ive

from ..errors import InputError
from ._shear_factor_fit import shear_factor_of_square, shear_factor_slope_of

__all__ = [
    "centreline_ratio",
    "flow_factor",
    "pressure_factor",
    "shear_factor",
    "shear_factor_slope",
    "velocity_profile",
]

_ROOT_I = np.exp(0.25j * np.pi)
# Below this |zeta| the power series of the profile converges within 30 terms; above it the scaled functions lose nothing.
_SERIES_BELOW = 6.0
# On the axis nothing small is left over, so that the series may lose a digit.
_AXIS_SERIES_BELOW = 10.0
_COUNT = np.arange(1.0, 29.0)
_AXIS_TERMS = np.cumprod(1.0 / (_COUNT + 1) ** 2)
_I2_TERMS = 0.5 * np.cumprod(1.0 / (_COUNT * (_COUNT + 2)))
_PIECE = 512


def checked(alpha: ArrayLike) -> NDArray[np.float64]:
    """Womersley numbers as an array of floats; finite and not negative."""
    numbers = np.asarray(alpha, dtype=float)
    if not np.all(numbers >= 0) or not np.all(np.isfinite(numbers)):
        bad = numbers[~((numbers >= 0) & np.isfinite(numbers))].ravel()[0]
        raise InputError(f"Womersley number = {bad} must be finite and not negative", name="alpha", value=float(bad), allowed=">= 0")
    return numbers


def shear_factor(alpha: ArrayLike) -> Any:
    """Wall shear over mean velocity, T = tau R/(mu U) = zeta I1/I2.

    Parameters
    ----------
    alpha : array_like, shape (...)
        Womersley number, >= 0. [-]

    Returns
    -------
    ndarray of complex, shape (...)
        4 at alpha = 0; zeta for large alpha. Scalar in, scalar out. [-]

    Raises
    ------
    InputError
        If any alpha is negative or not finite.

    Notes
    -----
    A rational approximation in alpha^2 below alpha = 26 and a polynomial in 1/zeta beyond; the relative
    error against 40-digit arithmetic is below 1e-14 from 0 to 1e6.

    Examples
    --------
    >>> shear_factor(0.0)
    np.complex128(4+0j)
    """
    return shear_factor_of_square(checked(alpha))[()]


def shear_factor_slope(alpha: ArrayLike) -> Any:
    """Derivative alpha dT/dalpha = i alpha^2 - T S, S = T - 4 = zeta I3/I2.

    The two terms nearly cancel for large alpha, so each approximation of T is differentiated instead: the
    sum of partial fractions below alpha = 26, the expansion in 1/zeta beyond.

    Examples
    --------
    >>> abs(shear_factor_slope(0.0)) < 1e-300
    np.True_
    """
    return shear_factor_slope_of(checked(alpha))[()]


def pressure_factor(alpha: ArrayLike) -> Any:
    """Pressure gradient over mean velocity, G R^2/(mu U) = zeta^2 I0/I2 = 2 T + i alpha^2.

    Examples
    --------
    >>> pressure_factor(0.0)
    np.complex128(8+0j)
    """
    numbers = checked(alpha)
    return (2.0 * shear_factor_of_square(numbers) + 1j * numbers**2)[()]


def flow_factor(alpha: ArrayLike) -> Any:
    """Womersley's 1 - F10 = M'10 exp(i eps'10): i alpha^2/(2 T + i alpha^2).

    Examples
    --------
    >>> round(float(abs(flow_factor(1.0))), 8)
    0.12319589
    """
    numbers = checked(alpha)
    square = 1j * numbers**2
    return (square / (2.0 * shear_factor_of_square(numbers) + square))[()]


def centreline_ratio(alpha: ArrayLike) -> Any:
    """Velocity on the axis over the mean, u(0)/U; 2 in steady flow.

    Examples
    --------
    >>> centreline_ratio(0.0)
    np.complex128(2+0j)
    """
    numbers = checked(alpha)
    flat = numbers.reshape(-1)
    out = np.empty(flat.size, dtype=complex)
    small = flat < _AXIS_SERIES_BELOW
    out[small] = _axis_series(flat[small])
    large = flat[~small]
    if large.size:
        zeta = _ROOT_I * large
        core = (2.0 * shear_factor_of_square(large) + 1j * large**2) / zeta**2
        out[~small] = core * (1.0 - np.exp(-zeta.real) / ive(0, zeta))
    return out.reshape(numbers.shape)[()]


def _axis_series(numbers: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Ratio of the sums of q^(k-1)/(k!)^2 and q^k/(k! (k+2)!), q = (zeta/2)^2, in pieces that stay in the cache."""
    out = np.empty(numbers.size, dtype=complex)
    for start in range(0, numbers.size, _PIECE):
        q = 0.25j * numbers[start : start + _PIECE] ** 2
        powers = np.cumprod(np.repeat(q[None, :], _COUNT.size, axis=0), axis=0)
        out[start : start + _PIECE] = (1.0 + _AXIS_TERMS @ powers) / (0.5 + _I2_TERMS @ powers)
    return out


def velocity_profile(alpha: ArrayLike, x: ArrayLike | None = None, *, wall_distance: ArrayLike | None = None) -> Any:
    """Velocity over mean velocity, u(x)/U = (I0(zeta) - I0(zeta x))/I2(zeta).

    Parameters
    ----------
    alpha : array_like, shape (...)
        Womersley number, >= 0. [-]
    x : array_like, shape (...)
        r/R, 0 to 1; broadcasts against alpha. [-]
    wall_distance : array_like, shape (...)
        Instead of x: 1 - x, exactly, for points so near the wall that 1 - x would lose digits. [-]

    Returns
    -------
    ndarray of complex, shape (...)
        2 (1 - x^2) at alpha = 0. [-]

    Raises
    ------
    InputError
        If x lies outside 0 to 1, or if both or none of x and wall_distance are given.

    Notes
    -----
    With y = 1 - x and s = (1 - x^2)/4 the difference of Bessel functions is summed as a series in
    which every term is the exact difference of two powers where \\|zeta\\| < 6; beyond, as
    I0(zeta)/I2(zeta) times (1 - I0(zeta x)/I0(zeta)), near the wall by a Taylor series in y.

    Examples
    --------
    >>> velocity_profile(0.0, 0.5)
    np.complex128(1.5+0j)
    """
    if (x is None) == (wall_distance is None):
        raise InputError("give exactly one of x and wall_distance", name="x")
    numbers = checked(alpha)
    y = 1.0 - np.asarray(x, dtype=float) if wall_distance is None else np.asarray(wall_distance, dtype=float)
    if not np.all((y >= 0) & (y <= 1)):
        raise InputError("a place in the section, r/R, must lie between 0 (axis) and 1 (wall)", name="x", allowed="0 to 1")
    numbers, y = np.broadcast_arrays(numbers, y)
    out = np.empty(numbers.shape, dtype=complex)
    small = numbers < _SERIES_BELOW
    near = ~small & (numbers * y < 1.0)
    far = ~small & ~near
    if np.any(small):
        out[small] = _profile_series(numbers[small], y[small])
    if np.any(near):
        out[near] = _profile_near_wall(numbers[near], y[near])
    if np.any(far):
        out[far] = _profile_scaled(numbers[far], y[far])
    return out[()]


def _profile_series(numbers: NDArray[np.float64], y: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Sum of (zeta^2/4)^k (1 - x^(2k))/(k!)^2 over I2's series; 1 - x^(2k) = (1 - x^2) sum_j x^(2j)."""
    q = 0.25j * numbers**2
    x2 = (1.0 - y) ** 2
    rim = y * (2.0 - y)  # 1 - x^2, exact near the wall
    term = np.ones_like(q)  # q^(k-1)/((k)!)^2 with k = 1
    geometric = np.ones_like(rim)  # sum_{j<k} x^(2j)
    power = np.ones_like(rim)
    numerator = np.zeros_like(q)
    below = np.zeros_like(q)  # I2/(zeta/2)^2 = sum q^k/(k! (k+2)!)
    under = np.full_like(q, 0.5)
    for k in range(1, 40):
        numerator += term * geometric
        below += under
        term = term * q / (k + 1) ** 2
        power = power * x2
        geometric = geometric + power
        under = under * q / (k * (k + 2))
    return np.asarray(rim * numerator / below)


def _profile_scaled(numbers: NDArray[np.float64], y: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Profile where zeta y is not small: core value times 1 - I0(zeta x)/I0(zeta)."""
    zeta = _ROOT_I * numbers
    core = (2.0 * shear_factor_of_square(numbers) + 1j * numbers**2) / zeta**2
    inside = np.zeros_like(zeta)
    thick = numbers < 100.0
    if np.any(thick):
        z, gap = zeta[thick], y[thick]
        inside[thick] = ive(0, z * (1.0 - gap)) * np.exp(-z.real * gap) / ive(0, z)
    # For a thin layer the phase of each Bessel function alone is lost to rounding; their ratio's is zeta y.
    # Where |zeta x| < 40 there, exp(-zeta y) is below 1e-18 and nothing of it is left.
    thin = ~thick & (numbers * (1.0 - y) > 40.0)
    if np.any(thin):
        z, gap = zeta[thin], y[thin]
        x = 1.0 - gap
        inside[thin] = np.exp(-z * gap) / np.sqrt(x) * _large_i0(z * x) / _large_i0(z)
    return core * (1.0 - inside)


def _large_i0(z: NDArray[np.complex128]) -> NDArray[np.complex128]:
    """Factor of exp(z)/sqrt(2 pi z) in I0(z) for |z| > 40 (DLMF 10.40.1)."""
    total = np.ones_like(z)
    term = np.ones_like(z)
    for k in range(1, 16):
        term = term * ((2 * k - 1) ** 2 / (8.0 * k)) / z
        total = total + term
    return total


def _profile_near_wall(numbers: NDArray[np.float64], y: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Taylor series of u in y from the wall, where u = 0: u'' - u'/(1 - y)... by recurrence, zeta y < 1.

    With v(y) = u(1 - y): (1 - y) v'' - v' - zeta^2 (1 - y) v = -(1 - y) g, g the pressure factor.
    """
    # In t = alpha y, so that no power of alpha overflows: v = sum d_m t^m, d_0 = 0, d_1 = T/alpha, 2 d_2 - d_1/alpha = -g.
    shear = shear_factor_of_square(numbers)
    g = 2.0 * shear / numbers**2 + 1j
    t = numbers * y
    previous2, previous, current = np.zeros_like(shear), np.zeros_like(shear), shear / numbers
    total, power = current * t, t
    for m in range(1, 40):
        forcing = -g if m == 1 else (g / numbers if m == 2 else 0.0)
        following = (m * m * current / numbers + 1j * (previous - previous2 / numbers) + forcing) / (m * (m + 1))
        power = power * t
        total = total + following * power
        previous2, previous, current = previous, current, following
    return total
