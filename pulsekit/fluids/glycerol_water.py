"""Glycerol and water: viscosity and density of the mixture, and its composition from how it was mixed or weighed."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from ..errors import InputError, OutOfRangeError
from ..quantities import Given, parse_given
from .fluid import Fluid
from .measured import measured_viscosity
from .ranges import above_zero, celsius, correlation, inside, plain

__all__ = [
    "GLYCEROL_DENSITY_UNCERTAINTY",
    "GLYCEROL_TEMPERATURES",
    "GLYCEROL_VISCOSITY_UNCERTAINTY",
    "glycerol_density",
    "glycerol_mass_fraction_from_density",
    "glycerol_mass_fraction_from_volume",
    "glycerol_solution",
    "glycerol_viscosity",
]

#: Range of the viscosity correlation [K]; any mass fraction from 0 to 1.
GLYCEROL_TEMPERATURES = (273.15, 373.15)
#: Relative standard uncertainty of the viscosity: the 3.5 % within which Cheng (2008) keeps the measured table, as limits.
GLYCEROL_VISCOSITY_UNCERTAINTY = 0.02
#: Relative standard uncertainty of the density: 0.07 % from 15 to 30 °C (Volk & Kähler 2018), doubled for the wider range (from memory).
GLYCEROL_DENSITY_UNCERTAINTY = 0.0015
MIXING = 293.15


def glycerol_viscosity(mass_fraction: ArrayLike, temperature: ArrayLike) -> Any:
    """Dynamic viscosity of glycerol and water.

    Parameters
    ----------
    mass_fraction : array_like
        Glycerol, 0 to 1. [-]
    temperature : array_like
        273.15 to 373.15. [K]

    Returns
    -------
    float or ndarray
        [Pa s]

    References
    ----------
    .. [1] N.-S. Cheng, Ind. Eng. Chem. Res. 47 (2008) 3285, eqs. 6, 9, 12, 13, 21, 22 (numbers of the equations from memory).

    Examples
    --------
    >>> f"{glycerol_viscosity(0.4, 293.15) * 1e3:.2f} mPa*s"
    '3.68 mPa*s'
    """
    c, t = np.asarray(mass_fraction, float), np.asarray(temperature, float) - 273.15
    water = 1.790e-3 * np.exp((-1230.0 - t) * t / (36100.0 + 360.0 * t))
    glycerol = 12.100 * np.exp((-1233.0 + t) * t / (9900.0 + 70.0 * t))
    a = 0.705 - 0.0017 * t
    b = (4.9 + 0.036 * t) * a**2.5
    weight = 1.0 - c + a * b * c * (1.0 - c) / (a * c + b * (1.0 - c))
    return plain(water**weight * glycerol ** (1.0 - weight))


def glycerol_density(mass_fraction: ArrayLike, temperature: ArrayLike) -> Any:
    """Density of glycerol and water, with the contraction on mixing.

    Parameters
    ----------
    mass_fraction : array_like
        Glycerol, 0 to 1. [-]
    temperature : array_like
        [K]

    Returns
    -------
    float or ndarray
        [kg/m^3]; 0.07 % from 15 to 30 °C by the authors, relative standard uncertainty ``GLYCEROL_DENSITY_UNCERTAINTY`` here.

    References
    ----------
    .. [1] A. Volk, C. J. Kähler, Exp. Fluids 59 (2018) 75 (coefficients from memory; tested against tables).

    Examples
    --------
    >>> round(glycerol_density(0.5, 293.15))
    1126
    """
    c, t = np.asarray(mass_fraction, float), np.asarray(temperature, float) - 273.15
    glycerol = 1273.3 - 0.6121 * t
    water = 1000.0 * (1.0 - np.abs((t - 3.98) / 615.0) ** 1.71)
    height = 1.78e-6 * t**2 - 1.82e-4 * t + 1.41e-2
    # sin(pi) is a rounding error away from 0, on either side: at pure glycerol the power needs it not below.
    contraction = 1.0 + height * np.maximum(np.sin(np.pi * c**1.31), 0.0) ** 0.81
    return plain(contraction / (c / glycerol + (1.0 - c) / water))


def glycerol_mass_fraction_from_volume(volume_fraction: ArrayLike, temperature: ArrayLike = MIXING) -> Any:
    """Mass fraction from the volumes that were poured together, as measured before mixing at 20 °C.

    Examples
    --------
    >>> round(glycerol_mass_fraction_from_volume(0.40), 3)
    0.457
    """
    v = np.asarray(volume_fraction, float)
    glycerol, water = glycerol_density(1.0, temperature), glycerol_density(0.0, temperature)
    return plain(v * glycerol / (v * glycerol + (1.0 - v) * water))


def glycerol_mass_fraction_from_density(density: ArrayLike, temperature: ArrayLike) -> Any:
    """Mass fraction of the mixture that has a measured density at a temperature.

    Found by halving to 1e-13. Densities within 0.3 kg/m^3 outside those of pure water and pure glycerol count as pure.

    Raises
    ------
    OutOfRangeError
        If no mixture has that density.

    Examples
    --------
    >>> round(glycerol_mass_fraction_from_density(1126.2, 293.15), 2)
    0.5
    """
    wanted, warmth = np.broadcast_arrays(np.asarray(density, float), np.asarray(temperature, float))
    low, high = np.asarray(glycerol_density(0.0, warmth)), np.asarray(glycerol_density(1.0, warmth))
    if np.any(~((wanted > low - 0.3) & (wanted < high + 0.3))):
        worst = wanted[~((wanted > low - 0.3) & (wanted < high + 0.3))].flat[0]
        raise OutOfRangeError(
            f"density = {worst:.5g} kg/m³ is none of glycerol and water, which lie from {low.min():.5g} to {high.max():.5g} kg/m³ at this temperature; "
            "check the unit and the temperature of the weighing",
            name="density", value=float(worst), low=float(low.min()), high=float(high.max()),
        )  # fmt: skip
    wanted = np.clip(wanted, low, high)
    # Bracketed halving: the slope of the contraction is infinite at both ends, where secants go astray.
    left, right = np.zeros_like(wanted), np.ones_like(wanted)
    for _ in range(44):
        middle = 0.5 * (left + right)
        below = glycerol_density(middle, warmth) < wanted
        left, right = np.where(below, middle, left), np.where(below, right, middle)
    return plain(0.5 * (left + right))


def glycerol_solution(
    *, mass_fraction: Any = None, volume_fraction: Any = None, density: Any = None, temperature: Any = "20 degC", density_at: Any = None,
    viscosity: Any = None, measured_at: Any = None, extrapolate: bool = False,
) -> Fluid:  # fmt: skip
    """Make the fluid "glycerol solution" at a temperature.

    Parameters
    ----------
    mass_fraction, volume_fraction, density : str, float or quantity
        Exactly one: glycerol by mass [-]; by volume as measured before mixing at 20 °C [-]; or the measured density of the mixture [kg/m^3].
    temperature : str, float or quantity
        Of the run, 0 to 100 °C. [K]
    density_at : str, float or quantity, optional
        Temperature at which ``density`` was measured; that of the run if not given. [K]
    viscosity : str, float or quantity, optional
        A measured one, used in place of the correlation. [Pa s]
    measured_at : str, float or quantity, optional
        Temperature of that measurement. [K]
    extrapolate : bool
        Go beyond the range of temperature; the fluid then says so.

    Returns
    -------
    Fluid

    Raises
    ------
    InputError
        None or several of the three, or 40 where 0.40 or "40 %" is meant.
    OutOfRangeError
        Outside the range of temperature, or a density that no mixture has.

    Examples
    --------
    >>> fluid = glycerol_solution(mass_fraction=0.4, temperature="22 degC")
    >>> f"{fluid.density:.0f} kg/m3, {fluid.viscosity * 1e3:.2f} mPa*s"
    '1098 kg/m3, 3.45 mPa*s'
    """
    warmth = parse_given(temperature, "temperature", "temperature")
    beyond = inside(
        warmth.value, *GLYCEROL_TEMPERATURES, name="temperature", what="the correlation for glycerol and water", shown=celsius(warmth.value),
        allowed="0 to 100 °C", extrapolate=extrapolate,
    )  # fmt: skip
    key, given = _one_of(mass_fraction=mass_fraction, volume_fraction=volume_fraction, density=density)
    givens = {key: given, "temperature": warmth, "density_correlation": correlation(GLYCEROL_DENSITY_UNCERTAINTY)}
    remarks = beyond
    if density_at is not None:
        if key != "density":
            raise InputError(
                "density_at is the temperature of a measured density; give density as well, or leave it out", name="density_at"
            )
        givens["density_at"] = parse_given(density_at, "temperature", "density_at")
    share = glycerol_share({name: g.value for name, g in givens.items()})
    if key != "mass_fraction":
        remarks += (f"{key.replace('_', ' ')} {given.text} is a mass fraction of glycerol of {share:.4g}.",)
    dense = glycerol_density(share, warmth.value)
    own, more, said = measured_viscosity(
        viscosity, measured_at, warmth, dense, lambda t: glycerol_viscosity(share, t), GLYCEROL_VISCOSITY_UNCERTAINTY
    )
    return Fluid(
        density=dense, viscosity=own, temperature=warmth, measured_at=measured_at, name="glycerol solution", kind="glycerol solution",
        givens=givens | more, remarks=remarks + said, sources=GLYCEROL_SOURCES, extrapolated=bool(beyond),
    )  # fmt: skip


def glycerol_share(values: dict[str, Any]) -> Any:
    """Mass fraction from whichever of mass_fraction, volume_fraction and density (with density_at or temperature) is there."""
    if "mass_fraction" in values:
        return values["mass_fraction"]
    if "volume_fraction" in values:
        return glycerol_mass_fraction_from_volume(values["volume_fraction"])
    return glycerol_mass_fraction_from_density(values["density"], values.get("density_at", values["temperature"]))


def _one_of(**ways: Any) -> tuple[str, Given]:
    told = {key: value for key, value in ways.items() if value is not None}
    if len(told) != 1:
        raise InputError(
            "glycerol solution needs exactly one of mass_fraction, volume_fraction (before mixing, at 20 °C) and density; "
            + (f"{' and '.join(told)} were given" if told else "none was given"),
            name="mass_fraction",
        )  # fmt: skip
    ((key, value),) = told.items()
    if key == "density":
        return key, above_zero(parse_given(value, "density", "density"), "density")
    given = parse_given(value, "ratio", key)
    if 1.0 < given.value <= 100.0 and "%" not in given.text:
        raise InputError(
            f"{key} = {given.text} is above 1: per cent or fraction? Write {given.value / 100:g} or '{given.value:g} %'",
            name=key, value=given.text, allowed="0 to 1, or a number with %",
        )  # fmt: skip
    if not 0.0 <= given.value <= 1.0:
        raise InputError(f"{key} = {given.text} lies outside 0 to 1; write 0.4 or '40 %'", name=key, value=given.text, allowed="0 to 1")
    return key, given


GLYCEROL_SOURCES = (
    "Viscosity of glycerol and water: Cheng, Ind. Eng. Chem. Res. 47 (2008) 3285, 0 to 100 °C, all mass fractions; within 3.5 % of the table of Segur & "
    "Oberstar (1951), taken as limits: relative standard uncertainty 2 %.",
    "Density of glycerol and water: Volk & Kähler, Exp. Fluids 59 (2018) 75 (coefficients from memory), relative standard uncertainty 0.15 %.",
)
