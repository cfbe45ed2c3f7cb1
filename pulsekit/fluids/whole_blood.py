"""Blood: viscosity at high shear rates from haematocrit and temperature, density, and the viscosity in narrow tubes."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from ..errors import InputError
from ..quantities import Given, parse_given
from .fluid import Fluid
from .measured import measured_viscosity
from .pure_water import water_density, water_viscosity
from .ranges import celsius, correlation, inside, plain

__all__ = [
    "BLOOD_DENSITY_UNCERTAINTY",
    "BLOOD_HAEMATOCRITS",
    "BLOOD_TEMPERATURES",
    "BLOOD_VISCOSITY_UNCERTAINTY",
    "blood",
    "blood_density",
    "blood_relative_viscosity",
    "blood_viscosity",
    "blood_viscosity_in_tube",
    "plasma_viscosity",
]

BODY = 310.15
#: Range of haematocrit [-]: plasma to thick blood; the data behind the tube correlation thin out above 0.6 (from memory).
BLOOD_HAEMATOCRITS = (0.0, 0.65)
#: Range of temperature [K]: room to fever; the scaling with water was measured over it (from memory).
BLOOD_TEMPERATURES = (288.15, 315.15)
#: Relative standard uncertainty of the viscosity: our allowance, for healthy plasma of 1.10 to 1.30 mPa·s and the scatter of
#: the relative viscosity between subjects (common practice; no published figure for the pair).
BLOOD_VISCOSITY_UNCERTAINTY = 0.10
#: Relative standard uncertainty of the density: range of specific gravity of healthy subjects, 1.048 to 1.054 (from memory).
BLOOD_DENSITY_UNCERTAINTY = 0.002

_PLASMA = 1.20e-3  # at 37 °C; healthy adults 1.10 to 1.30 mPa·s, Késmárky et al., Clin. Hemorheol. Microcirc. 39 (2008) 243 (from memory)
_PLASMA_DENSITY = 1020.5  # at 37 °C: Trudnowski & Rico, Clin. Chem. 20 (1974) 615
# Red cells: what makes whole blood of haematocrit 0.42 have the 1050.6 kg/m^3 of the same paper (that haematocrit from memory).
_CELL_DENSITY = (1050.6 - 0.58 * _PLASMA_DENSITY) / 0.42


def plasma_viscosity(temperature: ArrayLike) -> Any:
    """Viscosity of blood plasma: 1.20 mPa·s at 37 °C, following water with temperature.

    Parameters
    ----------
    temperature : array_like
        288.15 to 315.15. [K]

    Returns
    -------
    float or ndarray
        [Pa s]

    References
    ----------
    .. [1] G. Késmárky et al., Clin. Hemorheol. Microcirc. 39 (2008) 243: 1.10 to 1.30 mPa·s at 37 °C (from memory).
    .. [2] E. W. Merrill, Physiol. Rev. 49 (1969) 863: the ratio of plasma to water does not depend on temperature (from memory).

    Examples
    --------
    >>> f"{plasma_viscosity(310.15) * 1e3:.2f} mPa*s"
    '1.20 mPa*s'
    """
    return plain(_PLASMA * water_viscosity(temperature) / water_viscosity(BODY))


def blood_relative_viscosity(haematocrit: ArrayLike, diameter: ArrayLike = np.inf) -> Any:
    """Apparent viscosity of blood in a tube over that of its plasma, at high shear rates.

    Below about 0.3 mm of diameter the cells' crowding in the middle lowers it; ``diameter=inf`` is blood in bulk.

    Parameters
    ----------
    haematocrit : array_like
        Of the blood that leaves the tube, as a fraction, 0 to 0.65. [-]
    diameter : array_like
        Inner diameter, > 0; data from 3.3 µm to 2 mm. [m]

    Returns
    -------
    float or ndarray
        [-]; 1 for plasma, 3.2 in bulk at 0.45.

    Raises
    ------
    InputError
        If a haematocrit is not a fraction or a diameter is not above zero.

    References
    ----------
    .. [1] A. R. Pries, D. Neuhaus, P. Gaehtgens, Am. J. Physiol. 263 (1992) H1770 (the exponent of the haematocrit from memory).

    Examples
    --------
    >>> f"{blood_relative_viscosity(0.45, 100e-6):.4f}"
    '2.4426'
    """
    h, wide = np.asarray(haematocrit, float), np.asarray(diameter, float) * 1e6
    if np.any(~((h >= 0) & (h < 1))) or np.any(~(wide > 0)):
        raise InputError("haematocrit must be a fraction from 0 up to 1 and diameter above 0", name="haematocrit", value=haematocrit)
    at_45 = 220.0 * np.exp(-1.3 * wide) + 3.2 - 2.44 * np.exp(-0.06 * wide**0.645)
    with np.errstate(over="ignore"):
        cells = 1.0 / (1.0 + 1e-11 * wide**12)  # underflows to 0 in wide tubes, as it should
    exponent = (0.8 + np.exp(-0.075 * wide)) * (cells - 1.0) + cells
    return plain(1.0 + (at_45 - 1.0) * np.expm1(exponent * np.log1p(-h)) / np.expm1(exponent * np.log(0.55)))


def blood_viscosity(haematocrit: ArrayLike, temperature: ArrayLike) -> Any:
    """Viscosity of whole blood in bulk at high shear rates (above about 100 1/s).

    Plasma viscosity times the wide-tube limit of :func:`blood_relative_viscosity`. Relative standard uncertainty
    ``BLOOD_VISCOSITY_UNCERTAINTY``. At lower shear rates blood is thicker: see the flow curves.

    Examples
    --------
    >>> f"{blood_viscosity(0.45, 310.15) * 1e3:.2f} mPa*s"
    '3.84 mPa*s'
    """
    return plain(plasma_viscosity(temperature) * blood_relative_viscosity(haematocrit))


def blood_viscosity_in_tube(haematocrit: ArrayLike, temperature: ArrayLike, diameter: ArrayLike) -> Any:
    """Apparent viscosity of blood in a tube of a given inner diameter [m], at high shear rates.

    Examples
    --------
    >>> f"{blood_viscosity_in_tube(0.45, 310.15, 100e-6) * 1e3:.2f} mPa*s"
    '2.93 mPa*s'
    """
    return plain(plasma_viscosity(temperature) * blood_relative_viscosity(haematocrit, diameter))


def blood_density(haematocrit: ArrayLike, temperature: ArrayLike = BODY) -> Any:
    """Density of blood: plasma and cells by volume, expanding as water does.

    Relative standard uncertainty ``BLOOD_DENSITY_UNCERTAINTY``.

    References
    ----------
    .. [1] R. J. Trudnowski, R. C. Rico, Clin. Chem. 20 (1974) 615: specific gravity at 37 °C, plasma 1.0205, blood 1.0506.

    Examples
    --------
    >>> round(blood_density(0.42), 1)
    1050.6
    """
    h = np.asarray(haematocrit, float)
    return plain((_PLASMA_DENSITY + h * (_CELL_DENSITY - _PLASMA_DENSITY)) * water_density(temperature) / water_density(BODY))


def blood(
    haematocrit: Any = 0.45, temperature: Any = "37 degC", *, viscosity: Any = None, measured_at: Any = None, extrapolate: bool = False
) -> Fluid:
    """Make the fluid "blood" from haematocrit and temperature.

    Parameters
    ----------
    haematocrit : str, float or quantity
        Fraction (``0.45``, ``"0.45 ± 0.02"``) or with a per cent sign (``"45 %"``), 0 to 0.65. [-]
    temperature : str, float or quantity
        15 to 42 °C. [K]
    viscosity : str, float or quantity, optional
        A measured one, used in place of the correlation. [Pa s]
    measured_at : str, float or quantity, optional
        Temperature of that measurement; a remark tells what another run temperature would change. [K]
    extrapolate : bool
        Go beyond the ranges; the fluid then says so.

    Returns
    -------
    Fluid
        Its viscosity is that at high shear rates.

    Raises
    ------
    InputError
        A haematocrit such as 45, which may be per cent or a mistake.
    OutOfRangeError
        Outside the ranges, unless ``extrapolate``.

    Examples
    --------
    >>> fluid = blood(haematocrit="45 %", temperature="37 degC")
    >>> f"{fluid.density:.0f} kg/m3, {fluid.viscosity * 1e3:.2f} mPa*s"
    '1053 kg/m3, 3.84 mPa*s'
    """
    share = haematocrit_fraction(haematocrit)
    warmth = parse_given(temperature, "temperature", "temperature")
    what = "the correlation for blood"
    beyond = inside(
        share.value, *BLOOD_HAEMATOCRITS, name="haematocrit", what=what, shown=f"{share.value:.3g}", allowed="0 to 0.65", extrapolate=extrapolate
    ) + inside(
        warmth.value, *BLOOD_TEMPERATURES, name="temperature", what=what, shown=celsius(warmth.value), allowed="15 to 42 °C", extrapolate=extrapolate
    )  # fmt: skip
    density = blood_density(share.value, warmth.value)
    own, givens, remarks = measured_viscosity(
        viscosity, measured_at, warmth, density, lambda t: blood_viscosity(share.value, t), BLOOD_VISCOSITY_UNCERTAINTY
    )
    return Fluid(
        density=density, viscosity=own, temperature=warmth, measured_at=measured_at, name="blood", kind="blood",
        givens={"haematocrit": share, "temperature": warmth, "density_correlation": correlation(BLOOD_DENSITY_UNCERTAINTY)} | givens,
        remarks=beyond + remarks, sources=BLOOD_SOURCES, extrapolated=bool(beyond),
    )  # fmt: skip


def haematocrit_fraction(haematocrit: Any) -> Given:
    """Read a haematocrit; 45 without a sign is refused, since it may be per cent or a mistake.

    >>> haematocrit_fraction("45 %").value
    0.45
    """
    given = parse_given(haematocrit, "ratio", "haematocrit")
    if 1.0 < given.value <= 100.0 and "%" not in given.text:
        raise InputError(
            f"haematocrit = {given.text} is above 1: per cent or fraction? Write {given.value / 100:g} or '{given.value:g} %'",
            name="haematocrit", value=given.text, allowed="0 to 1, or a number with %",
        )  # fmt: skip
    if not 0.0 <= given.value < 1.0:
        raise InputError(
            f"haematocrit = {given.text} is no share of a volume; it lies between 0 and 1, such as 0.45 or '45 %'",
            name="haematocrit", value=given.text, allowed="0 to 1",
        )  # fmt: skip
    return given


BLOOD_SOURCES = (
    "Viscosity of blood: plasma 1.20 mPa·s at 37 °C (healthy 1.10 to 1.30: Késmárky et al. 2008, from memory), following water with temperature (Merrill 1969, "
    "from memory), times the relative viscosity in wide tubes after Pries et al., Am. J. Physiol. 263 (1992) H1770 (exponent of the haematocrit from memory); "
    "high shear rates, haematocrit 0 to 0.65, 15 to 42 °C, relative standard uncertainty 10 % (our allowance).",
    "Density of blood: plasma and cells by volume after Trudnowski & Rico, Clin. Chem. 20 (1974) 615, expanding as water does; relative standard uncertainty 0.2 %.",
)
