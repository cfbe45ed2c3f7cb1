"""Water: density, viscosity, vapour pressure and bulk modulus of the liquid between 0 and 95 °C."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from ..quantities import absolute_pressure, parse_given
from .fluid import Fluid
from .ranges import celsius, correlation, inside, plain

__all__ = [
    "WATER_TEMPERATURES",
    "WATER_VISCOSITY_UNCERTAINTY",
    "water",
    "water_bulk_modulus",
    "water_density",
    "water_sound_speed",
    "water_vapour_pressure",
    "water_viscosity",
    "water_viscosity_at",
]

ATMOSPHERE = 101325.0
#: Range of the correlations together [K]: liquid at atmospheric pressure, the sound speed being the narrowest.
WATER_TEMPERATURES = (273.15, 368.15)
WATER_PRESSURES = (0.0, 60e6)
#: Relative standard uncertainty of the viscosity: 1 % (k = 2) for the liquid in IAPWS R12-08, figure of uncertainties (from memory).
WATER_VISCOSITY_UNCERTAINTY = 0.005

# IAPWS R12-08, table 2: H_i of the dilute gas, and table 3: H_ij, row i over (1/T - 1)^i, column j over (rho - 1)^j.
_H0 = (1.67752, 2.20462, 0.6366564, -0.241605)
_H1 = np.array(
    [
        [5.20094e-1, 2.22531e-1, -2.81378e-1, 1.61913e-1, -3.25372e-2, 0.0, 0.0],
        [8.50895e-2, 9.99115e-1, -9.06851e-1, 2.57399e-1, 0.0, 0.0, 0.0],
        [-1.08374, 1.88797, -7.72479e-1, 0.0, 0.0, 0.0, 0.0],
        [-2.89555e-1, 1.26613, -4.89837e-1, 0.0, 6.98452e-2, 0.0, -4.35673e-3],
        [0.0, 0.0, -2.57040e-1, 0.0, 0.0, 8.72102e-3, 0.0],
        [0.0, 1.20573e-1, 0.0, 0.0, 0.0, 0.0, -5.93264e-4],
    ]
)
# Kell, J. Chem. Eng. Data 20 (1975) 97, eq. 16: density at 101.325 kPa, 0 to 150 °C.
_KELL = (-280.54253e-12, 105.56302e-9, -46.170461e-6, -7.9870401e-3, 16.945176, 999.83952)
# Kell's scale is the temperature scale of 1968 (t68 = 1.00024 t90) and a greatest density of 999.972; that of the standard
# water of today is 999.9749 kg/m^3 (Tanaka et al., Metrologia 38 (2001) 301; from memory).
_KELL_TO_SMOW = 999.9749 / 999.972
# Marczak, J. Acoust. Soc. Am. 102 (1997) 2776: sound speed at atmospheric pressure, 0 to 95 °C.
_MARCZAK = (2.787860e-9, -1.398845e-6, 3.287156e-4, -5.799136e-2, 5.038813, 1402.385)
# Wagner & Pruss, J. Phys. Chem. Ref. Data 22 (1993) 783, eq. 1 (IAPWS SR1-86): saturation line.
_SATURATION = ((-7.85951783, 1.0), (1.84408259, 1.5), (-11.7866497, 3.0), (22.6807411, 3.5), (-15.9618719, 4.0), (1.80122502, 7.5))


def water_viscosity_at(temperature: ArrayLike, density: ArrayLike) -> Any:
    """Dynamic viscosity of water by IAPWS R12-08, without the critical enhancement.

    Parameters
    ----------
    temperature : array_like
        [K]
    density : array_like
        [kg/m^3]

    Returns
    -------
    float or ndarray
        [Pa s]

    References
    ----------
    .. [1] IAPWS R12-08, Release on the viscosity of ordinary water substance (2008), eqs. 10 to 12.

    Examples
    --------
    >>> f"{water_viscosity_at(298.15, 998.0) * 1e6:.6f}"
    '889.735100'
    """
    t = np.asarray(temperature, float) / 647.096
    d = np.asarray(density, float) / 322.0
    dilute = 100.0 * np.sqrt(t) / sum(h / t**i for i, h in enumerate(_H0))
    x, y = np.broadcast_arrays(1.0 / t - 1.0, d - 1.0)
    residual = np.polynomial.polynomial.polyval2d(x, y, _H1)
    return plain(1e-6 * dilute * np.exp(d * residual))


def water_density(temperature: ArrayLike, pressure: ArrayLike = ATMOSPHERE) -> Any:
    """Density of liquid water.

    At atmospheric pressure by Kell (1975), within 3 ppm of IAPWS-95 from 0 to 95 °C; under pressure by the
    isothermal compression of the same water, within 0.03 % up to 60 MPa.

    Parameters
    ----------
    temperature : array_like
        273.15 to 368.15. [K]
    pressure : array_like
        Absolute, up to 60 MPa. [Pa]

    Returns
    -------
    float or ndarray
        [kg/m^3]

    Examples
    --------
    >>> round(water_density(293.15), 2)
    998.21
    """
    t = np.asarray(temperature, float) - 273.15
    t68 = 1.00024 * t
    still = _KELL_TO_SMOW * np.polyval(_KELL, t68) / (1.0 + 16.879850e-3 * t68)
    over = np.asarray(pressure, float) - ATMOSPHERE
    # Murnaghan: K grows in proportion to the pressure, so the density follows a power law.
    return plain(still * (1.0 + _STIFFENING * over / _isothermal_modulus(t)) ** (1.0 / _STIFFENING))


# Isothermal bulk modulus at atmospheric pressure [Pa] against t [°C], and the growth of both moduli with pressure:
# fitted to IAPWS-95 as computed by CoolProp over 0 to 95 °C and 0.1 to 60 MPa; the tests recompute the error.
_ISOTHERMAL = (-2.34176, 1055.926, -221968.1, 14717343.0, 1.965463e9)
_STIFFENING = 5.9


def _isothermal_modulus(t: Any) -> Any:
    return np.polyval(_ISOTHERMAL, t)


def water_sound_speed(temperature: ArrayLike) -> Any:
    """Speed of sound in liquid water at atmospheric pressure, within 0.1 m/s from 0 to 95 °C.

    References
    ----------
    .. [1] W. Marczak, J. Acoust. Soc. Am. 102 (1997) 2776 (coefficients from memory; tested against IAPWS-95).

    Examples
    --------
    >>> round(water_sound_speed(293.15), 1)
    1482.4
    """
    return plain(np.polyval(_MARCZAK, np.asarray(temperature, float) - 273.15))


def water_bulk_modulus(temperature: ArrayLike, pressure: ArrayLike = ATMOSPHERE) -> Any:
    """Isentropic tangent bulk modulus of liquid water, rho c^2.

    At atmospheric pressure from density and sound speed (0.03 %); it grows by 5.7 (0 °C) to 7.3 (95 °C) times
    the pressure, within 0.2 % up to 40 MPa and 0.7 % up to 60 MPa.

    Examples
    --------
    >>> f"{water_bulk_modulus(293.15) / 1e9:.3f} GPa"
    '2.194 GPa'
    """
    t = np.asarray(temperature, float)
    still = water_density(t) * np.square(water_sound_speed(t))
    return plain(still + (5.70 + 0.0165 * (t - 273.15)) * (np.asarray(pressure, float) - ATMOSPHERE))


def water_viscosity(temperature: ArrayLike, pressure: ArrayLike = ATMOSPHERE) -> Any:
    """Dynamic viscosity of liquid water by IAPWS R12-08 at the density of the liquid.

    Relative standard uncertainty ``WATER_VISCOSITY_UNCERTAINTY``.

    Examples
    --------
    >>> f"{water_viscosity(293.15) * 1e3:.4f} mPa*s"
    '1.0016 mPa*s'
    """
    return water_viscosity_at(temperature, water_density(temperature, pressure))


def water_vapour_pressure(temperature: ArrayLike) -> Any:
    """Absolute vapour pressure of water, 273.16 to 647.096 K, within 0.05 %.

    References
    ----------
    .. [1] W. Wagner, A. Pruss, J. Phys. Chem. Ref. Data 22 (1993) 783, eq. 1 (from memory; tested against IAPWS-95).

    Examples
    --------
    >>> round(water_vapour_pressure(293.15))
    2339
    """
    t = np.asarray(temperature, float)
    tau = 1.0 - t / 647.096
    return plain(22.064e6 * np.exp(647.096 / t * sum(a * tau**n for a, n in _SATURATION)))


def water(temperature: Any = "20 degC", *, pressure: Any = None, extrapolate: bool = False) -> Fluid:
    """Make the fluid "water" at a temperature.

    Parameters
    ----------
    temperature : str, float or quantity
        0 to 95 °C. [K]
    pressure : str, float or quantity, optional
        Absolute (or ``bar(g)``), up to 60 MPa; atmospheric if not given. [Pa]
    extrapolate : bool
        Go beyond the ranges; the fluid then says so.

    Returns
    -------
    Fluid
        With density, viscosity, bulk modulus (isentropic tangent) and vapour pressure.

    Raises
    ------
    OutOfRangeError
        Outside the ranges, unless ``extrapolate``.

    Examples
    --------
    >>> fluid = water("37 degC")
    >>> f"{fluid.density:.2f} kg/m3, {fluid.viscosity * 1e3:.4f} mPa*s"
    '993.33 kg/m3, 0.6913 mPa*s'
    """
    given = parse_given(temperature, "temperature", "temperature")
    at = absolute_pressure(ATMOSPHERE if pressure is None else pressure, "pressure")
    low, high = WATER_TEMPERATURES
    beyond = inside(
        given.value, low, high, name="temperature", what="the correlations for liquid water", shown=celsius(given.value),
        allowed="0 to 95 °C", extrapolate=extrapolate,
    ) + inside(
        at.value, *WATER_PRESSURES, name="pressure", what="the correlations for liquid water", shown=f"{at.value / 1e5:.4g} bar",
        allowed="0 to 600 bar absolute", extrapolate=extrapolate,
    )  # fmt: skip
    givens = {"temperature": given, "correlation": correlation(WATER_VISCOSITY_UNCERTAINTY)}
    if pressure is not None:
        givens["pressure"] = at
    return Fluid(
        density=water_density(given.value, at.value), viscosity=water_viscosity(given.value, at.value), bulk_modulus=water_bulk_modulus(given.value, at.value),
        vapour_pressure=water_vapour_pressure(given.value), temperature=given, name="water", kind="water", givens=givens, remarks=beyond,
        sources=WATER_SOURCES, extrapolated=bool(beyond),
    )  # fmt: skip


WATER_SOURCES = (
    "Viscosity of water: IAPWS R12-08 (2008), eqs. 10 to 12, without the critical enhancement; liquid, relative standard uncertainty 0.5 % "
    "(1 % at k = 2, from memory).",
    "Density of water: Kell, J. Chem. Eng. Data 20 (1975) 97, eq. 16, 0 to 95 °C, within 3 ppm of IAPWS-95; with pressure by a fit to IAPWS-95, "
    "within 0.03 % up to 60 MPa.",
    "Bulk modulus of water: isentropic tangent, density times the square of the sound speed of Marczak, J. Acoust. Soc. Am. 102 (1997) 2776; with pressure by a "
    "fit to IAPWS-95, within 0.2 % up to 40 MPa and 0.7 % up to 60 MPa.",
    "Vapour pressure of water: Wagner & Pruss, J. Phys. Chem. Ref. Data 22 (1993) 783, eq. 1.",
)
