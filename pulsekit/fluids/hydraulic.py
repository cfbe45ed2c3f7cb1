"""The fluid "hydraulic oil": from its grade or its data sheet, at the temperature and pressure of the line."""

from __future__ import annotations

from typing import Any

from ..errors import InputError
from ..quantities import Given, absolute_pressure, parse_given
from .fluid import Fluid
from .measured import measured_viscosity
from .oil import (
    OIL_BULK_MODULUS_UNCERTAINTY,
    OIL_DENSITY_UNCERTAINTY,
    OIL_PRESSURE_VISCOSITY_UNCERTAINTY,
    OIL_PRESSURES,
    OIL_TEMPERATURES,
    OIL_VISCOSITY_UNCERTAINTY,
    oil_pressure_viscosity,
    oil_properties,
)
from .oil_grade import oil_givens
from .ranges import above_zero, celsius, correlation, inside

__all__ = ["hydraulic_oil"]

_GAS_RELEASE = (
    "Oil lets dissolved air out below about 0.5 to 0.8 bar(a) (trade), long before it boils: no vapour pressure is supplied; state gas_release_pressure for the check "
    "on cavitation."
)


def hydraulic_oil(
    grade: Any = None, temperature: Any = "40 degC", *, viscosity_at_40: Any = None, viscosity_at_100: Any = None, viscosity_index: Any = None,
    density: Any = None, bulk_modulus: Any = None, pressure: Any = None, viscosity: Any = None, measured_at: Any = None, vapour_pressure: Any = None,
    extrapolate: bool = False,
) -> Fluid:  # fmt: skip
    """Make the fluid "hydraulic oil", a mineral oil free of gas.

    Parameters
    ----------
    grade : int, float or str, optional
        ISO viscosity grade, such as 46 or ``"ISO VG 46"``; its ±10 % are in the interval. Exactly one of this and ``viscosity_at_40``.
    temperature : str, float or quantity
        -20 to 120 °C. [K]
    viscosity_at_40, viscosity_at_100 : str, float or quantity, optional
        Kinematic, from the data sheet. [m^2/s]
    viscosity_index : float or str, optional
        In place of ``viscosity_at_100``; 100 ± 10 if neither is given. [-]
    density : str, float or quantity, optional
        At 15 °C and atmospheric pressure, as data sheets state it; the usual one of the grade if not given. [kg/m^3]
    bulk_modulus : str, float or quantity, optional
        Isentropic tangent at temperature and pressure of the line, in place of the correlation. [Pa]
    pressure : str, float or quantity, optional
        Mean pressure of the line, absolute (or ``bar(g)``); it stiffens and thickens the oil. Atmospheric if not given. [Pa]
    viscosity, measured_at : str, float or quantity, optional
        A measured viscosity used in place of the correlation, and the temperature of that measurement. [Pa s], [K]
    vapour_pressure : str, float or quantity, optional
        Absolute; none is supplied. [Pa]
    extrapolate : bool
        Go beyond the ranges; the fluid then says so.

    Returns
    -------
    Fluid

    Raises
    ------
    InputError
        A grade that is none; too few or too many of the data.
    OutOfRangeError
        Outside the ranges, unless ``extrapolate``.

    Examples
    --------
    >>> fluid = hydraulic_oil(grade=46, temperature="40 degC")
    >>> f"{fluid.kinematic_viscosity * 1e6:.1f} mm2/s, {fluid.density:.0f} kg/m3, {fluid.bulk_modulus / 1e9:.2f} GPa"
    '46.0 mm2/s, 860 kg/m3, 1.69 GPa'
    """
    givens, remarks = oil_givens(
        grade=grade, viscosity_at_40=viscosity_at_40, viscosity_at_100=viscosity_at_100, viscosity_index=viscosity_index
    )
    givens["temperature"] = warmth = parse_given(temperature, "temperature", "temperature")
    beyond = _ranges(warmth, pressure, givens, extrapolate)
    remarks = beyond + remarks + _density(density, givens) + _stiffness(bulk_modulus, givens)
    values = {name: given.value for name, given in givens.items()}
    dense, thick, stiff = oil_properties(values)
    own, more, said = measured_viscosity(
        viscosity, measured_at, warmth, dense, lambda t: oil_properties(values | {"temperature": t})[1], OIL_VISCOSITY_UNCERTAINTY
    )
    if viscosity is None and pressure is not None:
        more["pressure_viscosity"] = correlation(OIL_PRESSURE_VISCOSITY_UNCERTAINTY)
        rise = oil_pressure_viscosity(thick, values["pressure"])
        if rise > 0.02:
            remarks += (
                f"The pressure of {values['pressure'] / 1e5:.4g} bar(a) makes the oil about {100 * rise:.0f} % thicker than at atmosphere; this is included.",
            )
    if vapour_pressure is not None:
        more["vapour_pressure"] = absolute_pressure(vapour_pressure, "vapour_pressure")
    return Fluid(
        density=dense, viscosity=own, bulk_modulus=stiff, vapour_pressure=vapour_pressure, temperature=warmth, measured_at=measured_at,
        name=f"hydraulic oil ISO VG {givens['grade'].value:g}" if "grade" in givens else "hydraulic oil", kind="hydraulic oil",
        givens=givens | more, remarks=remarks + said + (() if vapour_pressure is not None else (_GAS_RELEASE,)), sources=OIL_SOURCES,
        extrapolated=bool(beyond),
    )  # fmt: skip


def _ranges(warmth: Given, pressure: Any, givens: dict[str, Given], extrapolate: bool) -> tuple[str, ...]:
    what = "the correlations for hydraulic oil"
    beyond = inside(
        warmth.value,
        *OIL_TEMPERATURES,
        name="temperature",
        what=what,
        shown=celsius(warmth.value),
        allowed="-20 to 120 °C",
        extrapolate=extrapolate,
    )
    if pressure is None:
        return beyond
    givens["pressure"] = at = absolute_pressure(pressure, "pressure")
    if at.value < 0:
        raise InputError(
            f"pressure = {at.text} is below zero absolute; give an absolute pressure, or write bar(g)", name="pressure", value=at.text
        )
    return beyond + inside(
        at.value,
        *OIL_PRESSURES,
        name="pressure",
        what=what,
        shown=f"{at.value / 1e5:.4g} bar",
        allowed="0 to 700 bar absolute",
        extrapolate=extrapolate,
    )


def _density(density: Any, givens: dict[str, Given]) -> tuple[str, ...]:
    if density is None:
        givens["density_correlation"] = correlation(OIL_DENSITY_UNCERTAINTY)
        return (
            "The density is the usual one of a mineral oil of this viscosity (common practice, ± 1 % standard uncertainty); the data sheet's is better.",
        )
    givens["density"] = given = above_zero(parse_given(density, "density", "density"), "density")
    return (f"density = {given.text} is taken as that at 15 °C and atmospheric pressure, as data sheets state it.",)


def _stiffness(bulk_modulus: Any, givens: dict[str, Given]) -> tuple[str, ...]:
    if bulk_modulus is None:
        givens["bulk_modulus_correlation"] = correlation(OIL_BULK_MODULUS_UNCERTAINTY)
        return ()
    givens["bulk_modulus"] = given = above_zero(parse_given(bulk_modulus, "pressure", "bulk_modulus"), "bulk_modulus")
    if not 0.3e9 < given.value < 6e9:
        return (f"bulk_modulus = {given.text} is unusual for a liquid free of gas (oils 1.2 to 2.5 GPa): check the unit.",)
    return (
        "The stated bulk modulus is taken as the isentropic tangent at this temperature and pressure; an isothermal figure is some 15 to 20 % lower.",
    )


OIL_SOURCES = (
    "Viscosity of oil: chart of ASTM D341 through 40 and 100 °C, relative standard uncertainty 2 % (common practice); viscosity index by ASTM D2270 / ISO 2909 "
    "(coefficients from memory); grades by ISO 3448, ±10 %.",
    "Density of oil: expansion of lubricating oils by the petroleum measurement tables (ISO 91, ASTM D1250; from memory), relative standard uncertainty 1 % where only "
    "the grade is known.",
    "Bulk modulus of oil: isentropic secant (1.57 + 0.15 log10 nu at 20 °C) 10^(0.0024 (20 - t)) GPa + 5.6 p (Hodges, Hydraulic Fluids, 1996; from memory), turned into "
    "the tangent; relative standard uncertainty 5 % (common practice); to 700 bar.",
    "Viscosity of oil under pressure: Barus's law with Wooster's coefficient (0.6 + 0.965 log10 mu) 1e-8 1/Pa (from memory), ±20 % of the exponent.",
)
