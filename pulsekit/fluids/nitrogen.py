"""Nitrogen as a real gas: the reference equation of state, and what a damper needs of it."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from ..errors import ConvergenceError, OutOfRangeError
from .ranges import plain

__all__ = ["NITROGEN_PRESSURES", "NITROGEN_TEMPERATURES", "nitrogen_density", "nitrogen_pressure", "nitrogen_stiffness_exponent"]

#: Range used here: gas and dense fluid well above the critical temperature. [K]
NITROGEN_TEMPERATURES = (200.0, 500.0)
#: Absolute. [Pa]
NITROGEN_PRESSURES = (1e3, 100e6)

# Span, Lemmon, Jacobsen, Wagner, Yokozeki, J. Phys. Chem. Ref. Data 29 (2000) 1361: tables of the critical point, the ideal
# gas and eq. 55 (from memory; the tests compare with a library that holds the same equation).
_CRITICAL_TEMPERATURE, _CRITICAL_DENSITY = 126.192, 11183.9  # K, mol/m^3
_GAS_CONSTANT, _MOLAR_MASS = 8.31451, 28.01348e-3  # J/(mol K), kg/mol
# Columns: n, i (power of delta), j (power of tau), l (power of delta in the exponential; 0: none).
_TERMS = np.array(
    [
        [0.924803575275, 1, 0.25, 0], [-0.492448489428, 1, 0.875, 0], [0.661883336938, 2, 0.5, 0], [-1.92902649201, 2, 0.875, 0],
        [-0.0622469309629, 3, 0.375, 0], [0.349943957581, 3, 0.75, 0], [0.564857472498, 1, 0.5, 1], [-1.61720005987, 1, 0.75, 1],
        [-0.481395031883, 1, 2.0, 1], [0.421150636384, 3, 1.25, 1], [-0.0161962230825, 3, 3.5, 1], [0.172100994165, 4, 1.0, 1],
        [0.00735448924933, 6, 0.5, 1], [0.0168077305479, 6, 3.0, 1], [-0.00107626664179, 7, 0.0, 1], [-0.0137318088513, 7, 2.75, 1],
        [0.000635466899859, 8, 0.75, 1], [0.00304432279419, 8, 2.5, 1], [-0.0435762336045, 1, 4.0, 2], [-0.0723174889316, 2, 6.0, 2],
        [0.0389644315272, 3, 6.0, 2], [-0.021220136391, 4, 3.0, 2], [0.00408822981509, 5, 3.0, 2], [-5.51990017984e-05, 8, 6.0, 2],
        [-0.0462016716479, 4, 16.0, 3], [-0.00300311716011, 5, 11.0, 3], [0.0368825891208, 5, 15.0, 3], [-0.0025585684622, 8, 12.0, 3],
        [0.00896915264558, 3, 12.0, 4], [-0.0044151337035, 5, 7.0, 4], [0.00133722924858, 6, 4.0, 4], [0.000264832491957, 9, 16.0, 4],
    ]
)  # fmt: skip
# Terms 33 to 36: n, i, j, phi, beta, gamma; n delta^i tau^j exp(-phi (delta - 1)^2 - beta (tau - gamma)^2).
_HUMPS = np.array(
    [
        [19.6688194015, 1, 0.0, 20.0, 325.0, 1.16],
        [-20.911560073, 1, 1.0, 20.0, 325.0, 1.16],
        [0.0167788306989, 3, 2.0, 15.0, 300.0, 1.13],
        [2627.67566274, 2, 3.0, 25.0, 275.0, 1.25],
    ]
)


def _residual(delta: Any, tau: Any) -> tuple[Any, Any, Any, Any]:
    """delta a_d, delta^2 a_dd, tau^2 a_tt and delta tau a_dt of the residual Helmholtz energy."""
    d, t, log_d, log_t = delta[..., None], tau[..., None], np.log(delta)[..., None], np.log(tau)[..., None]
    n, i, j, power = _TERMS.T
    damped = np.where(power > 0, np.exp(power * log_d), 0.0)
    value = n * np.exp(i * log_d + j * log_t - damped)
    first = i - power * damped
    second = first * (first - 1.0) - power**2 * damped
    sums = [value * first, value * second, value * j * (j - 1.0), value * first * j]
    n, i, j, phi, beta, gamma = _HUMPS.T
    value = n * np.exp(i * log_d + j * log_t - phi * (d - 1.0) ** 2 - beta * (t - gamma) ** 2)
    first, slope = i - 2.0 * phi * d * (d - 1.0), j - 2.0 * beta * t * (t - gamma)
    humps = [value * first, value * (first**2 - i - 2.0 * phi * d**2), value * (slope**2 - j - 2.0 * beta * t**2), value * first * slope]
    a, b, c, e = (part.sum(-1) + hump.sum(-1) for part, hump in zip(sums, humps, strict=True))
    return a, b, c, e


def _ideal_heat(temperature: Any) -> Any:
    """Isochoric heat capacity of the ideal gas over the gas constant."""
    u = 3364.011 / temperature
    vibration = 1.012941 * u**2 * np.exp(-u) / np.expm1(-u) ** 2
    return 2.5 + 3.066469e-6 * temperature + 4.70124e-9 * temperature**2 - 3.987984e-13 * temperature**3 + vibration


def _state(temperature: ArrayLike, pressure: ArrayLike) -> tuple[Any, Any, Any]:
    """Temperature, pressure and molar density [mol/m^3], by Newton's steps from the ideal gas."""
    warm, press = np.broadcast_arrays(np.asarray(temperature, float), np.asarray(pressure, float))
    for name, values, (low, high), unit in (
        ("temperature", warm, NITROGEN_TEMPERATURES, "K"),
        ("pressure", press, NITROGEN_PRESSURES, "Pa"),
    ):
        if np.any(wrong := ~((values >= low) & (values <= high))):
            raise OutOfRangeError(
                f"{name} = {values[wrong].flat[0]:.6g} {unit} of the nitrogen lies outside {low:g} to {high:g} {unit}; check the unit, and that a pressure is absolute",
                name=name, value=float(values[wrong].flat[0]), low=low, high=high,
            )  # fmt: skip
    tau = _CRITICAL_TEMPERATURE / warm
    ideal = press / (_GAS_CONSTANT * warm)
    # An equation of van der Waals's kind for the start: at most 30 000 mol/m^3, where nitrogen is as dense as its liquid.
    density = ideal / (1.0 + ideal / 40000.0)
    for _ in range(30):
        delta = density / _CRITICAL_DENSITY
        first, second, _, _ = _residual(delta, tau)
        # The steps are taken in the logarithm of the density, which cannot become negative.
        step = np.log(ideal / (density * (1.0 + first))) * (1.0 + first) / (1.0 + 2.0 * first + second)
        density = density * np.exp(np.clip(step, -0.5, 0.5))
        if np.all(np.abs(step) < 1e-12):
            return warm, press, density
    raise ConvergenceError("the density of nitrogen did not settle; check temperature and pressure", estimate=density * _MOLAR_MASS)


def nitrogen_density(temperature: ArrayLike, pressure: ArrayLike) -> Any:
    """Density of nitrogen gas.

    Parameters
    ----------
    temperature : array_like
        200 to 500. [K]
    pressure : array_like
        Absolute, 1 kPa to 100 MPa. [Pa]

    Returns
    -------
    float or ndarray
        [kg/m^3]; 0.02 % by the authors up to 30 MPa (from memory).

    Raises
    ------
    OutOfRangeError
        Outside these ranges.

    References
    ----------
    .. [1] R. Span et al., J. Phys. Chem. Ref. Data 29 (2000) 1361, doi:10.1063/1.1349047.

    Examples
    --------
    >>> round(nitrogen_density(313.15, 181e5), 1)
    185.0
    """
    _, _, density = _state(temperature, pressure)
    return plain(density * _MOLAR_MASS)


def nitrogen_pressure(temperature: ArrayLike, density: ArrayLike) -> Any:
    """Absolute pressure of nitrogen of a temperature [K] and density [kg/m^3], such as a precharge that has become warm.

    Examples
    --------
    >>> round(nitrogen_pressure(333.15, nitrogen_density(293.15, 100e5)) / 1e5, 1)
    116.8
    """
    warm, dense = np.broadcast_arrays(np.asarray(temperature, float), np.asarray(density, float) / _MOLAR_MASS)
    first, _, _, _ = _residual(dense / _CRITICAL_DENSITY, _CRITICAL_TEMPERATURE / warm)
    return plain(dense * _GAS_CONSTANT * warm * (1.0 + first))


def nitrogen_stiffness_exponent(temperature: ArrayLike, pressure: ArrayLike) -> Any:
    """Isentropic exponent of nitrogen's volume, -(v/p) (dp/dv)_s = rho c^2/p.

    The ideal gas has 1.4; at the pressures of hydraulics the real one is stiffer.

    Parameters
    ----------
    temperature : array_like
        200 to 500. [K]
    pressure : array_like
        Absolute, 1 kPa to 100 MPa. [Pa]

    Returns
    -------
    float or ndarray
        [-]

    Raises
    ------
    OutOfRangeError
        Outside these ranges.

    References
    ----------
    .. [1] R. Span et al., J. Phys. Chem. Ref. Data 29 (2000) 1361, doi:10.1063/1.1349047.

    Examples
    --------
    >>> nitrogen_stiffness_exponent(313.15, [1e5, 100e5, 181e5, 300e5]).round(3)
    array([1.401, 1.597, 1.826, 2.217])
    """
    warm, press, density = _state(temperature, pressure)
    first, second, curved, mixed = _residual(density / _CRITICAL_DENSITY, _CRITICAL_TEMPERATURE / warm)
    heat = _ideal_heat(warm) - curved
    stiff = 1.0 + 2.0 * first + second + (1.0 + first - mixed) ** 2 / heat
    return plain(density * _GAS_CONSTANT * warm * stiff / press)
