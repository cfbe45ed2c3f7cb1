"""A liquid as the calculation needs it: density and viscosity, and for pressure waves its stiffness and vapour pressure."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Any

from ..errors import InputError
from ..quantities import Given, absolute_pressure, parse_either, parse_given
from .ranges import above_zero, celsius

__all__ = ["Fluid"]

_NONE: Mapping[str, Given] = MappingProxyType({})


@dataclass(frozen=True, kw_only=True)
class Fluid:
    """A liquid at the temperature and pressure of the run.

    Every dimensional argument is a string with a unit (``"1060 kg/m^3"``, ``"3.5 mPa*s ± 5 %"``), a pint
    quantity, or a float in SI.

    Parameters
    ----------
    density : str, float or quantity
        Mass per volume, > 0. [kg/m^3]
    viscosity : str, float or quantity, optional
        Dynamic viscosity, > 0 [Pa s]; a kinematic one (``"3.3 cSt"``) is taken too and is converted with the
        density, with a remark. Exactly one of ``viscosity`` and ``kinematic_viscosity``.
    kinematic_viscosity : str, float or quantity, optional
        Viscosity over density, > 0. [m^2/s]
    bulk_modulus : str, float or quantity, optional
        Isentropic tangent bulk modulus, > 0. [Pa]
    vapour_pressure : str, float or quantity, optional
        Absolute; ``bar(g)`` is turned into absolute with 101.325 kPa. [Pa]
    temperature : str, float or quantity, optional
        Temperature of the run. [K]
    measured_at : str, float or quantity, optional
        Temperature at which the viscosity was measured; another than ``temperature`` draws a remark. [K]
    name : str
        What the liquid is called in the report.

    Raises
    ------
    InputError
        A value that is zero, negative or not finite; neither or both of the two viscosities.
    UnitError
        A wrong dimension or an unknown unit.

    Notes
    -----
    After construction the fields are SI floats. ``givens`` keeps what was given with its uncertainty,
    by name; for a liquid made by a correlation also ``"correlation"``, a factor of 1 with the relative
    standard uncertainty of the correlation. ``remarks`` and ``sources`` are sentences for the report.

    Examples
    --------
    >>> fluid = Fluid(density="1060 kg/m^3", viscosity="3.5 mPa*s ± 5 %")
    >>> round(fluid.kinematic_viscosity * 1e6, 4), fluid.givens["viscosity"].stated
    (3.3019, True)
    """

    density: Any
    viscosity: Any = None
    kinematic_viscosity: Any = None
    bulk_modulus: Any = None
    vapour_pressure: Any = None
    temperature: Any = None
    measured_at: Any = None
    name: str = ""
    kind: str = "given"
    givens: Mapping[str, Given] = field(default_factory=lambda: _NONE, compare=False, repr=False)
    remarks: tuple[str, ...] = field(default=(), compare=False, repr=False)
    sources: tuple[str, ...] = field(default=(), compare=False, repr=False)
    extrapolated: bool = False

    def __post_init__(self) -> None:
        givens: dict[str, Given] = {}
        remarks: list[str] = []
        density = above_zero(parse_given(self.density, "density", "density"), "density")
        if not 500.0 <= density.value <= 3000.0:
            remarks.append(f"density = {density.text} is unusual for a liquid: check the unit.")
        givens["density"] = density
        viscosity = self._read_viscosity(density, givens, remarks)
        put = object.__setattr__
        put(self, "density", density.value)
        put(self, "viscosity", viscosity)
        put(self, "kinematic_viscosity", viscosity / density.value)
        self._read_optional(givens)
        put(self, "name", str(self.name))
        if (remark := self._remark_on_temperature()) is not None:
            remarks.append(remark)
        own = dict(self.givens) or givens
        put(self, "givens", MappingProxyType(own))
        put(self, "remarks", tuple(dict.fromkeys((*self.remarks, *remarks))))
        put(self, "sources", tuple(self.sources))

    def _read_viscosity(self, density: Given, givens: dict[str, Given], remarks: list[str]) -> float:
        if (self.viscosity is None) == (self.kinematic_viscosity is None):
            raise InputError(
                "a fluid needs exactly one of viscosity ('3.5 mPa*s') and kinematic_viscosity ('46 mm^2/s'); "
                + ("neither was given" if self.viscosity is None else f"both were given ({self.viscosity!r}, {self.kinematic_viscosity!r})"),
                name="viscosity", value=self.viscosity,
            )  # fmt: skip
        key = "viscosity" if self.viscosity is not None else "kinematic_viscosity"
        other = "kinematic_viscosity" if key == "viscosity" else "viscosity"
        given = above_zero(parse_either(getattr(self, key), (key, other), key), key)
        givens[key] = given
        value = given.value * density.value if given.dimension == "kinematic_viscosity" else given.value
        if given.dimension != key:
            words = {"viscosity": "dynamic", "kinematic_viscosity": "kinematic"}
            remarks.append(
                f"{key} = {given.text} is a {words[given.dimension]} viscosity: converted with the density {density.value:.5g} kg/m³ "
                f"({value * 1e3:.4g} mPa·s, {value / density.value * 1e6:.4g} mm²/s)."
            )
        if not 1e-4 <= value <= 100.0:
            remarks.append(f"A viscosity of {value * 1e3:.4g} mPa·s is unusual for a liquid: check the unit.")
        return value

    def _read_optional(self, givens: dict[str, Given]) -> None:
        for key, dimension in (("bulk_modulus", "pressure"), ("temperature", "temperature"), ("measured_at", "temperature")):
            if (value := getattr(self, key)) is None:
                continue
            given = above_zero(parse_given(value, dimension, key), key)
            givens[key] = given
            object.__setattr__(self, key, given.value)
        if self.vapour_pressure is not None:
            given = absolute_pressure(self.vapour_pressure, "vapour_pressure")
            if given.value < 0:
                raise InputError(
                    f"vapour_pressure = {given.text!r} is below zero absolute; it is an absolute pressure, such as '2.3 kPa'",
                    name="vapour_pressure", value=given.text, allowed="0 or more, absolute",
                )  # fmt: skip
            givens["vapour_pressure"] = given
            object.__setattr__(self, "vapour_pressure", given.value)

    def _remark_on_temperature(self) -> str | None:
        if self.measured_at is None or self.kind != "given":
            return None
        if self.temperature is None:
            return f"The viscosity was measured at {celsius(self.measured_at)}; the temperature of the run is not stated, so nothing says that it holds there."
        apart = self.temperature - self.measured_at
        if abs(apart) < 0.05:
            return None
        return (
            f"The viscosity was measured at {celsius(self.measured_at)} and the run is at {celsius(self.temperature)}: it is used as measured. "
            f"Watery liquids and blood lose about 2 % per degree, oils 3 to 6 %: over {abs(apart):.1f} degrees roughly "
            f"{100 * abs(2 * apart / 100):.0f} % or {100 * abs(4.5 * apart / 100):.0f} %."
        )

    def replace(self, **changes: Any) -> Fluid:
        """Return a copy with some values changed.

        A changed viscosity of either kind takes the place of the other; with a changed density the
        kind of viscosity that was given is kept.

        >>> round(Fluid(density=1000.0, viscosity="2 cSt").replace(density=1100.0).viscosity, 9)
        0.0022
        """
        if unknown := sorted(set(changes) - set(self.__dataclass_fields__)):
            raise InputError(f"a Fluid has no {unknown[0]!r}; it has {', '.join(self.__dataclass_fields__)}", name=unknown[0])
        kept: dict[str, Any] = {
            name: getattr(self, name) for name in ("temperature", "measured_at", "name", "remarks", "sources", "extrapolated")
        }
        for name in ("density", "bulk_modulus", "vapour_pressure", "temperature"):
            # Of a liquid made by a correlation the givens are inputs of that, at other conditions; its values are the attributes.
            kept[name] = self.givens.get(name, getattr(self, name)) if self.kind == "given" else getattr(self, name)
        if not {"viscosity", "kinematic_viscosity"} & set(changes):
            key = "kinematic_viscosity" if self.kind == "given" and "kinematic_viscosity" in self.givens else "viscosity"
            kept[key] = self.givens.get(key, getattr(self, key)) if self.kind == "given" else self._with_accuracy()
        if self.kind != "given":
            if set(changes) <= {"name", "remarks", "sources", "bulk_modulus", "vapour_pressure"}:
                kept |= {"kind": self.kind, "givens": self.givens}
            else:
                kept["remarks"] = (
                    *self.remarks,
                    f"Of this {self.name} {' and '.join(changes)} replaced by hand: the inputs of its correlation are no longer varied.",
                )
        return Fluid(**(kept | changes))

    def _with_accuracy(self) -> Given:
        factor = self.givens.get("correlation")
        spread = self.viscosity * factor.standard_uncertainty if factor is not None else 0.0
        return Given(
            value=self.viscosity,
            standard_uncertainty=spread,
            dimension="viscosity",
            unit="Pa*s",
            stated=spread > 0,
            text=f"{self.viscosity * 1e3:.4g} mPa*s",
        )

    def __getstate__(self) -> dict[str, Any]:
        return self.__dict__ | {"givens": dict(self.givens)}

    def __setstate__(self, state: dict[str, Any]) -> None:
        for key, value in state.items():
            object.__setattr__(self, key, MappingProxyType(value) if key == "givens" else value)
