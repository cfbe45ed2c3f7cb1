"""A gas-charged damper beside the line, with its neck."""

from __future__ import annotations

from types import MappingProxyType
from typing import Any

import numpy as np

from ..errors import InputError
from ..exact.waves import laminar_friction_ratio
from ..fluids.gas import damper_gas_volume
from ..fluids.nitrogen import nitrogen_stiffness_exponent
from ..quantities import Given, parse_given
from .elements import Values, _limits, _Shunt, read
from .load import Load, scaled
from .medium import Medium

__all__ = ["GasDamper"]

AMBIENT = 101325.0


class GasDamper(_Shunt):
    """A damper: a gas volume behind a neck.

    Parameters
    ----------
    gas_volume : float or str, optional
        At the mean pressure; or ``nominal_volume`` with ``precharge``. [m^3]
    pressure : float or str, optional
        Of the gas, absolute; the line's mean pressure if not given. [Pa]
    polytropic_exponent : float or str, optional
        The real isentropic one of nitrogen if not given. [-]
    nominal_volume, precharge : float or str, optional
        Precharge gauge unless it says bar(a). [m^3], [Pa]
    precharge_temperature : float or str
        20 degC if not given. [K]
    neck_length, neck_radius : float or str, optional
        [m]

    Examples
    --------
    >>> GasDamper(gas_volume="0.5 L", pressure="180 bar", polytropic_exponent=1.2).kind
    'gas damper'
    """

    kind = "gas damper"
    holds_gas = True

    def __init__(
        self, gas_volume: Any = None, pressure: Any = None, polytropic_exponent: Any = None, *, nominal_volume: Any = None, precharge: Any = None,
        precharge_temperature: Any = None, neck_length: Any = None, neck_radius: Any = None, name: str = "", rated_pressure: Any = None,
        relief_setting: Any = None,
    ) -> None:  # fmt: skip
        if (gas_volume is None) == (nominal_volume is None):
            raise InputError("a gas damper needs exactly one of gas_volume (at mean pressure) and nominal_volume (with precharge)", name="gas_volume")
        if nominal_volume is not None and precharge is None:
            raise InputError("a damper's nominal_volume needs its precharge", name="precharge")
        if (neck_length is None) != (neck_radius is None):
            raise InputError("a damper's neck needs both neck_length and neck_radius", name="neck_length")
        givens = read(
            {
                "gas_volume": (gas_volume, "volume"), "polytropic_exponent": (polytropic_exponent, "ratio"), "nominal_volume": (nominal_volume, "volume"),
                "neck_length": (neck_length, "length"), "neck_radius": (neck_radius, "length"),
                "precharge_temperature": (precharge_temperature, "temperature"),
            },
            where=name or "gas damper",
        )  # fmt: skip
        if pressure is not None:
            given = parse_given(pressure, "pressure", "pressure")
            # As an argument a plain pressure of a gas is absolute.
            givens["pressure"] = _shifted(given, AMBIENT) if given.reference == "gauge" else given
        if precharge is not None:
            given = parse_given(precharge, "pressure", "precharge")
            givens["precharge"] = given if given.reference == "absolute" else _shifted(given, AMBIENT)
        super().__init__(MappingProxyType(givens), name, **_limits(rated_pressure, relief_setting))

    def gas_pressure(self, medium: Medium, values: Values) -> Any:
        """Absolute mean pressure of the gas [Pa]."""
        pressure = values.get("pressure", medium.pressure)
        if pressure is None:
            raise InputError(f"{self.name or 'gas damper'}: the gas pressure is not known; give its pressure, or the line's mean_pressure", name="pressure")
        return pressure

    def exponent(self, medium: Medium, values: Values) -> Any:
        """Stiffness exponent -(v/p) dp/dv of the gas. [-]"""
        if "polytropic_exponent" in values:
            return values["polytropic_exponent"]
        return nitrogen_stiffness_exponent(medium.temperature, self.gas_pressure(medium, values))

    def volume_of_gas(self, medium: Medium, values: Values) -> Any:
        """Gas volume at the mean pressure [m^3]; 0 where the mean pressure is below the precharge (the damper is closed)."""
        if "gas_volume" in values:
            return values["gas_volume"]
        pressure = np.asarray(self.gas_pressure(medium, values), float)
        precharge = np.asarray(values["precharge"], float)
        open_ = pressure > precharge
        safe = np.where(open_, pressure, precharge)
        gas = damper_gas_volume(
            values["nominal_volume"], precharge=precharge, precharge_temperature=values.get("precharge_temperature", 293.15), pressure=safe,
            temperature=medium.temperature,
        )  # fmt: skip
        return np.where(open_, gas, 0.0)[()]

    def branch(self, omega: Any, medium: Medium, values: Values) -> Load:
        """Compliance V/(n p) behind the neck's inertance and laminar resistance."""
        omega = np.asarray(omega, float)
        volume = np.asarray(self.volume_of_gas(medium, values))
        if "gas_lost" in values:
            volume = np.where(values["gas_lost"], 0.0, volume)
        compliance = volume / (self.exponent(medium, values) * np.asarray(self.gas_pressure(medium, values)))
        load = scaled(np.ones(np.broadcast(omega, compliance).shape, dtype=complex), 1j * omega * compliance)
        if "neck_length" in values:
            radius = values["neck_radius"]
            ratio = laminar_friction_ratio(radius * np.sqrt(omega * medium.density / medium.viscosity))
            load = load.behind(1j * omega * medium.density * values["neck_length"] / (np.pi * radius**2) * ratio)
        return load

    def compliance(self, medium: Medium, values: Values | None = None) -> Any:
        """V/(n p) [m^3/Pa]."""
        values = self.values if values is None else values
        return self.volume_of_gas(medium, values) / (self.exponent(medium, values) * self.gas_pressure(medium, values))


def _shifted(given: Given, by: float) -> Given:
    from dataclasses import replace

    return replace(given, value=given.value + by, reference="absolute")
