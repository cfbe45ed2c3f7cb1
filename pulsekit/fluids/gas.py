"""Gas in and beside the liquid: free gas squeezed by the line's pressure, and the gas of a damper."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from ..errors import InputError
from .nitrogen import NITROGEN_PRESSURES, NITROGEN_TEMPERATURES, nitrogen_density, nitrogen_pressure, nitrogen_stiffness_exponent
from .ranges import plain

__all__ = [
    "NITROGEN_PRESSURES",
    "NITROGEN_TEMPERATURES",
    "damper_gas_volume",
    "gas_fraction_at_pressure",
    "nitrogen_density",
    "nitrogen_pressure",
    "nitrogen_stiffness_exponent",
    "warm_precharge",
]

ATMOSPHERE = 101325.0


def gas_fraction_at_pressure(fraction_at_atmosphere: ArrayLike, pressure: ArrayLike) -> Any:
    """Volume fraction of free gas at a pressure, from the one that a laboratory quotes at atmospheric pressure.

    The gas is squeezed slowly, thus at constant temperature, and as an ideal gas; the liquid keeps its volume. That
    gas dissolves under pressure is neglected: the fraction is an upper bound.

    Parameters
    ----------
    fraction_at_atmosphere : array_like
        Gas volume over the whole volume at 101.325 kPa, from 0 up to 1. [-]
    pressure : array_like
        Absolute, > 0. [Pa]

    Returns
    -------
    float or ndarray
        [-]

    Raises
    ------
    InputError
        If a fraction lies outside 0 to 1 or a pressure is not above zero.

    Examples
    --------
    >>> f"{gas_fraction_at_pressure(0.01, 181e5):.2e}"
    '5.65e-05'
    """
    share, press = np.asarray(fraction_at_atmosphere, float), np.asarray(pressure, float)
    if np.any(~((share >= 0) & (share < 1))):
        raise InputError(
            f"gas fraction {np.ravel(share)[np.argmax(~((np.ravel(share) >= 0) & (np.ravel(share) < 1)))]:g} is no share of a volume; it lies from 0 up to 1, "
            "such as 0.01 or '1 %'",
            name="gas_fraction_at_atmosphere", value=float(np.max(share)), allowed="0 up to 1",
        )  # fmt: skip
    if np.any(~(press > 0)):
        raise InputError(
            f"pressure {np.min(press):g} Pa is not above zero absolute; give an absolute pressure",
            name="pressure",
            value=float(np.min(press)),
            allowed="above zero",
        )
    squeezed = share * ATMOSPHERE / press
    return plain(squeezed / (1.0 - share + squeezed))


def warm_precharge(precharge: ArrayLike, *, precharge_temperature: ArrayLike, temperature: ArrayLike) -> Any:
    """Absolute precharge pressure at another temperature, the volume kept.

    >>> round(warm_precharge(100e5, precharge_temperature=293.15, temperature=333.15) / 1e5, 1)
    116.8
    """
    return nitrogen_pressure(temperature, nitrogen_density(precharge_temperature, precharge))


def damper_gas_volume(
    nominal_volume: ArrayLike, *, precharge: ArrayLike, precharge_temperature: ArrayLike, pressure: ArrayLike, temperature: ArrayLike
) -> Any:
    """Gas volume of a nitrogen damper at the mean pressure of the line, by conservation of the gas.

    Parameters
    ----------
    nominal_volume : array_like
        Gas volume when precharged, > 0. [m^3]
    precharge, pressure : array_like
        Absolute. [Pa]
    precharge_temperature, temperature : array_like
        When it was filled, and in the run. [K]

    Returns
    -------
    float or ndarray
        [m^3]; above ``nominal_volume`` where the line's pressure is below the precharge: the damper is then out of work.

    Raises
    ------
    OutOfRangeError
        Outside the ranges of the equation of state.

    Examples
    --------
    >>> volume = damper_gas_volume(1e-3, precharge=100e5, precharge_temperature=293.15, pressure=181e5, temperature=313.15)
    >>> f"{volume * 1e3:.3f} L"
    '0.621 L'
    """
    filled = nitrogen_density(precharge_temperature, precharge)
    return plain(np.asarray(nominal_volume, float) * filled / nitrogen_density(temperature, pressure))
