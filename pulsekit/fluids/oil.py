"""Mineral hydraulic oil: viscosity from its grade, density and stiffness, against temperature and pressure."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from .oil_index import viscosity_at_100
from .ranges import plain

__all__ = [
    "ISO_VISCOSITY_GRADES",
    "OIL_BULK_MODULUS_UNCERTAINTY",
    "OIL_DENSITY_UNCERTAINTY",
    "OIL_PRESSURES",
    "OIL_TEMPERATURES",
    "OIL_VISCOSITY_UNCERTAINTY",
    "oil_bulk_modulus",
    "oil_density",
    "oil_kinematic_viscosity",
    "oil_pressure_viscosity",
    "oil_properties",
    "usual_density",
]

#: ISO 3448 viscosity grades: mid-point kinematic viscosity at 40 °C, each within ±10 %. [mm^2/s]
ISO_VISCOSITY_GRADES = (2.2, 3.2, 4.6, 6.8, 10, 15, 22, 32, 46, 68, 100, 150, 220, 320, 460, 680, 1000, 1500, 2200, 3200)
#: Range of temperature of the chart of ASTM D341 as used here, from two points at 40 and 100 °C (common practice). [K]
OIL_TEMPERATURES = (253.15, 393.15)
#: Range of absolute pressure of the bulk modulus (from memory). [Pa]
OIL_PRESSURES = (0.0, 70e6)
#: Relative standard uncertainty of the viscosity read from the chart between and near the two points (common practice).
OIL_VISCOSITY_UNCERTAINTY = 0.02
#: Relative standard uncertainty of the density where only the grade is known (common practice: data sheets of 15 °C differ by ±2 %).
OIL_DENSITY_UNCERTAINTY = 0.01
#: Relative standard uncertainty of the bulk modulus of an unknown mineral oil, free of gas (common practice).
OIL_BULK_MODULUS_UNCERTAINTY = 0.05
#: Relative standard uncertainty of the rise of viscosity with pressure, of its logarithm (common practice).
OIL_PRESSURE_VISCOSITY_UNCERTAINTY = 0.2
ATMOSPHERE = 101325.0


def oil_kinematic_viscosity(temperature: ArrayLike, at_40: ArrayLike, at_100: ArrayLike) -> Any:
    """Kinematic viscosity at a temperature from those at 40 and 100 °C, by the chart of ASTM D341.

    log10 log10(nu + 0.7) is linear in log10 T, nu in mm^2/s, T in kelvin.

    Parameters
    ----------
    temperature : array_like
        253.15 to 393.15. [K]
    at_40, at_100 : array_like
        Kinematic viscosities, above 2e-6; ``at_100`` below ``at_40``. [m^2/s]

    Returns
    -------
    float or ndarray
        [m^2/s]

    References
    ----------
    .. [1] ASTM D341, simplified form for 2 mm^2/s and above.

    Examples
    --------
    >>> f"{oil_kinematic_viscosity(353.15, 32e-6, 5.4e-6) * 1e6:.2f} mm2/s"
    '8.53 mm2/s'
    """
    t = np.log(np.asarray(temperature, float))
    cool, hot = (np.log(np.log10(np.asarray(v, float) * 1e6 + 0.7)) for v in (at_40, at_100))
    share = (t - np.log(313.15)) / (np.log(373.15) - np.log(313.15))
    return plain(1e-6 * (10.0 ** np.exp(cool + share * (hot - cool)) - 0.7))


def oil_density(temperature: ArrayLike, at_15: ArrayLike, pressure: ArrayLike = ATMOSPHERE, at_20: ArrayLike = 100e-6) -> Any:
    """Density of a lubricating oil from that at 15 °C, with temperature and pressure.

    Parameters
    ----------
    temperature, pressure : array_like
        [K], absolute [Pa]
    at_15 : array_like
        Density at 15 °C and atmospheric pressure, as on data sheets. [kg/m^3]
    at_20 : array_like
        Kinematic viscosity at 20 °C, for the compressibility. [m^2/s]

    Returns
    -------
    float or ndarray
        [kg/m^3]

    References
    ----------
    .. [1] Petroleum measurement tables (ISO 91, ASTM D1250), lubricating oils: alpha = 0.6278/rho_15 per K (from memory).

    Examples
    --------
    >>> round(oil_density(313.15, 876.0), 1)
    860.2
    """
    dense = np.asarray(at_15, float)
    warmer = np.asarray(temperature, float) - 288.15
    expansion = 0.6278 / dense * warmer
    still = dense * np.exp(-expansion * (1.0 + 0.8 * expansion))
    over = np.asarray(pressure, float) - ATMOSPHERE
    # Squeezed slowly, thus isothermally: the secant modulus is what the volume follows.
    return plain(still / (1.0 - over / _secant_modulus(temperature, over, at_20, 1.30, 0.0023)))


def oil_bulk_modulus(temperature: ArrayLike, pressure: ArrayLike, at_20: ArrayLike) -> Any:
    """Isentropic tangent bulk modulus of a mineral oil free of gas.

    The handbook gives the isentropic secant modulus K0 + 5.6 p with K0 = (1.57 + 0.15 log10 nu) 10^(0.0024 (20 - t)) GPa; its
    tangent is K_t = K_s (K_s - p)/K0, which grows by about 11 times the pressure.

    Parameters
    ----------
    temperature : array_like
        253.15 to 393.15. [K]
    pressure : array_like
        Absolute, up to 70 MPa. [Pa]
    at_20 : array_like
        Kinematic viscosity at 20 °C. [m^2/s]

    Returns
    -------
    float or ndarray
        [Pa]; relative standard uncertainty ``OIL_BULK_MODULUS_UNCERTAINTY``.

    References
    ----------
    .. [1] P. K. B. Hodges, Hydraulic Fluids, Arnold, 1996; also D. McCloy, H. R. Martin, Control of Fluid Power, 1980 (both from memory).

    Examples
    --------
    >>> f"{oil_bulk_modulus(313.15, 101325.0, 125e-6) / 1e9:.2f} GPa"
    '1.69 GPa'
    """
    over = np.asarray(pressure, float) - ATMOSPHERE
    secant = _secant_modulus(temperature, over, at_20, 1.57, 0.0024)
    return plain(secant * (secant - over) / _secant_modulus(temperature, 0.0, at_20, 1.57, 0.0024))


def _secant_modulus(temperature: ArrayLike, over: ArrayLike, at_20: ArrayLike, base: float, slope: float) -> Any:
    t = np.asarray(temperature, float) - 273.15
    still = 1e9 * (base + 0.15 * np.log10(np.asarray(at_20, float) * 1e6)) * 10.0 ** (slope * (20.0 - t))
    return still + 5.6 * np.asarray(over, float)


def oil_pressure_viscosity(viscosity: ArrayLike, pressure: ArrayLike) -> Any:
    """Natural logarithm of the factor by which pressure raises the viscosity of a mineral oil.

    Parameters
    ----------
    viscosity : array_like
        Dynamic, at the temperature and at atmospheric pressure. [Pa s]
    pressure : array_like
        Absolute. [Pa]

    Returns
    -------
    float or ndarray
        [-]

    References
    ----------
    .. [1] Barus's law with the coefficient (0.6 + 0.965 log10 mu) 1e-8 1/Pa, mu in mPa·s, after Wooster (from memory).

    Examples
    --------
    >>> round(oil_pressure_viscosity(0.04, 18.1e6), 2)
    0.39
    """
    coefficient = np.maximum(0.6 + 0.965 * np.log10(np.asarray(viscosity, float) * 1e3), 0.0)
    return plain(1e-8 * coefficient * (np.asarray(pressure, float) - ATMOSPHERE))


def usual_density(grade: ArrayLike) -> Any:
    """Density at 15 °C that data sheets of mineral hydraulic oils show for a grade (common practice). [kg/m^3]"""
    return plain(832.0 + 26.5 * np.log10(np.asarray(grade, float)))


def oil_properties(values: dict[str, Any]) -> tuple[Any, Any, Any]:
    """Density [kg/m^3], viscosity [Pa s] and bulk modulus [Pa] from values of the givens of :func:`hydraulic_oil`, arrays or floats.

    >>> density, viscosity, modulus = oil_properties({"grade": 46.0, "viscosity_index": 100.0, "temperature": 313.15})
    >>> f"{density:.0f} {viscosity * 1e3:.1f} {modulus / 1e9:.2f}"
    '860 39.6 1.69'
    """
    at_40 = values["viscosity_at_40"] if "viscosity_at_40" in values else 1e-6 * values["grade"]
    at_100 = values["viscosity_at_100"] if "viscosity_at_100" in values else viscosity_at_100(at_40, values["viscosity_index"])
    temperature, pressure = values["temperature"], values.get("pressure", ATMOSPHERE)
    at_20 = oil_kinematic_viscosity(293.15, at_40, at_100)
    at_15 = values["density"] if "density" in values else usual_density(1e6 * at_40) * values.get("density_correlation", 1.0)
    density = oil_density(temperature, at_15, pressure, at_20)
    still = oil_kinematic_viscosity(temperature, at_40, at_100) * oil_density(temperature, at_15, ATMOSPHERE, at_20)
    viscosity = (
        still * values.get("correlation", 1.0) * np.exp(oil_pressure_viscosity(still, pressure) * values.get("pressure_viscosity", 1.0))
    )
    modulus = oil_bulk_modulus(temperature, pressure, at_20) * values.get("bulk_modulus_correlation", 1.0)
    return plain(density), plain(viscosity), plain(values.get("bulk_modulus", modulus))
