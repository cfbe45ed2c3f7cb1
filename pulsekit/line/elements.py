"""Elements of a line. Each knows how a load looks from its upstream side, and what passes through to its downstream side.

The methods take ``values``: the element's own numbers as floats, or arrays of samples of the shape (S, 1).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

import numpy as np

from ..errors import InputError
from ..exact.waves import (
    characteristic_impedance,
    friction_factor,
    laminar_friction_ratio,
    propagation_constant,
    turbulent_friction_ratio,
)
from ..quantities import Given, parse_given
from .load import Load, scaled
from .medium import Medium
from .pipe_sizes import nominal_pipe
from .walls import hose_speed, pipe_speed

__all__ = ["Element", "Hose", "Pipe", "Restrictor", "SideBranch", "Volume"]

Values = Mapping[str, Any]
_TURBULENT = 2300.0


@dataclass(frozen=True, eq=False)
class Element:
    """What all elements share: their givens, a name, and limits of pressure."""

    givens: Mapping[str, Given]
    name: str = ""
    rated_pressure: float | None = None
    relief_setting: float | None = None

    kind = "element"
    length = 0.0
    holds_gas = False

    @property
    def values(self) -> dict[str, float]:
        """The element's own numbers [SI]."""
        return {key: given.value for key, given in self.givens.items()}

    def upstream(self, load: Load, omega: Any, medium: Medium, values: Values) -> Load:
        """Return the load seen from the element's upstream side."""
        raise NotImplementedError

    def onward(self, state: tuple[Any, Any], load: Load, omega: Any, medium: Medium, values: Values) -> tuple[Any, Any]:
        """Return pressure and flow at the downstream side for those at the upstream side; ``load`` is the downstream load."""
        raise NotImplementedError

    def steady_drop(self, flow: Any, medium: Medium, values: Values) -> Any:
        """Return the steady pressure drop at a mean flow [Pa]."""
        return 0.0 * np.asarray(flow, float)


def read(givens: Mapping[str, tuple[Any, str]], *, signed: Sequence[str] = (), where: str = "element") -> dict[str, Given]:
    """Read dimensional arguments that were given; all must be above zero unless named as signed."""
    found = {}
    for name, (value, dimension) in givens.items():
        if value is None:
            continue
        given = parse_given(value, dimension, name)
        if name not in signed and not given.value > 0:
            raise InputError(f"{where}: {name} = {given.text} must be above 0", name=name, value=given.value, allowed="> 0")
        found[name] = given
    return found


def _limits(rated_pressure: Any, relief_setting: Any) -> dict[str, float | None]:
    return {
        "rated_pressure": None if rated_pressure is None else parse_given(rated_pressure, "pressure", "rated_pressure").value,
        "relief_setting": None if relief_setting is None else parse_given(relief_setting, "pressure", "relief_setting").value,
    }


def bore_radius(values: Values) -> Any:
    """Inner radius from whichever sizes there are. [m]"""
    if "radius" in values:
        return values["radius"]
    if "diameter" in values:
        return np.asarray(values["diameter"]) / 2
    return np.asarray(values["outer_diameter"]) / 2 - values["wall_thickness"]


class _Conduit(Element):
    """A length of line with friction: pipes and hoses."""

    def _speed(self, medium: Medium, values: Values, omega: Any) -> Any:
        raise NotImplementedError

    @property
    def length(self) -> float:  # type: ignore[override]
        """Length [m]."""
        return self.givens["length"].value

    @property
    def radius(self) -> float:
        """Inner radius [m]."""
        return float(bore_radius(self.values))

    @property
    def area(self) -> float:
        """Area of the bore [m^2]."""
        return float(np.pi * self.radius**2)

    def wave_speed(self, medium: Medium, values: Values | None = None) -> Any:
        """Wave speed without friction [m/s]; real part where the wall is lossy."""
        return np.real(self._speed(medium, self.values if values is None else values, 1.0))

    def friction_ratio(self, omega: Any, medium: Medium, values: Values) -> Any:
        """N per frequency: the exact laminar one, or the turbulent one where the mean flow is turbulent."""
        radius = bore_radius(values)
        alpha = radius * np.sqrt(np.asarray(omega) * medium.density / medium.viscosity)
        laminar = laminar_friction_ratio(alpha)
        reynolds = self.reynolds(medium, values)
        turbulent = np.asarray(reynolds) > _TURBULENT
        if not np.any(turbulent):
            return laminar
        velocity = np.abs(medium.flow_or_none) / (np.pi * radius**2)
        ratio = turbulent_friction_ratio(
            alpha=alpha, reynolds=np.maximum(reynolds, _TURBULENT), velocity=velocity, radius=radius, angular_frequency=omega
        )
        return np.where(turbulent, ratio, laminar)

    def reynolds(self, medium: Medium, values: Values) -> Any:
        """Reynolds number of the mean flow. [-]"""
        radius = bore_radius(values)
        return 2 * np.abs(medium.flow_or_none) * medium.density / (np.pi * radius * medium.viscosity)

    def line_constants(self, omega: Any, medium: Medium, values: Values) -> tuple[Any, Any]:
        """Propagation constant [1/m] and characteristic impedance [Pa s/m^3]."""
        ratio = self.friction_ratio(omega, medium, values)
        speed = self._speed(medium, values, omega)
        area = np.pi * bore_radius(values) ** 2
        return (
            propagation_constant(angular_frequency=omega, wave_speed=speed, friction_ratio=ratio),
            characteristic_impedance(density=medium.density, wave_speed=speed, area=area, friction_ratio=ratio),
        )

    def upstream(self, load: Load, omega: Any, medium: Medium, values: Values) -> Load:
        """Return the load seen from the upstream side: the reflection, turned and damped over both ways."""
        gamma, impedance = self.line_constants(omega, medium, values)
        back = load.reflection(impedance) * np.exp(-2 * gamma * values["length"])
        return scaled(1.0 + back, (1.0 - back) / impedance)

    def inside(self, state: tuple[Any, Any], load: Load, omega: Any, medium: Medium, values: Values, distance: Any) -> tuple[Any, Any]:
        """Return pressure and flow at a distance from the upstream side; only decaying exponentials occur."""
        gamma, impedance = self.line_constants(omega, medium, values)
        reflection = load.reflection(impedance)
        length = values["length"]
        forth, back = np.exp(-gamma * distance), reflection * np.exp(-gamma * (2 * length - distance))
        # p + Z q is twice the arriving wave there, whatever the reflection: no cancellation.
        pressure, flow = state
        wave = 0.5 * (pressure + impedance * flow)
        return wave * (forth + back), wave * (forth - back) / impedance

    def onward(self, state: tuple[Any, Any], load: Load, omega: Any, medium: Medium, values: Values) -> tuple[Any, Any]:
        """Return pressure and flow at the downstream side."""
        return self.inside(state, load, omega, medium, values, values["length"])

    def steady_drop(self, flow: Any, medium: Medium, values: Values) -> Any:
        """Hagen and Poiseuille, or Darcy and Weisbach with Haaland's factor."""
        radius = bore_radius(values)
        flow = np.asarray(flow, float)
        velocity = flow / (np.pi * radius**2)
        reynolds = 2 * np.abs(velocity) * radius * medium.density / medium.viscosity
        laminar = 8 * medium.viscosity * values["length"] * velocity / radius**2
        factor = friction_factor(np.maximum(reynolds, 1.0), relative_roughness=values.get("roughness", 0.0) / (2 * radius))
        turbulent = factor * values["length"] / (2 * radius) * 0.5 * medium.density * velocity * np.abs(velocity)
        return np.where(reynolds < _TURBULENT, laminar, turbulent)


class Pipe(_Conduit):
    """A pipe with a stiff wall.

    Parameters
    ----------
    length : float or str
        [m]
    radius, diameter : float or str, optional
        Inner; or ``outer_diameter`` with ``wall_thickness``, or ``nominal_size`` with ``schedule``. [m]
    wave_speed : float or str, optional
        If not given it follows from the liquid's bulk modulus and the wall. [m/s]
    wall_thickness, young_modulus : float or str, optional
        Of the wall; without them the wall counts as rigid. [m], [Pa]
    poisson_ratio : float or str
        0.3 if not given.
    anchoring : str
        ``"throughout"``, ``"upstream"`` or ``"expansion joints"``.
    roughness : float or str, optional
        For the steady pressure drop only. [m]
    straight : bool
        False where the pipe is not one straight run (no shaking force is stated then).

    Examples
    --------
    >>> Pipe(length="2.4 m", radius="8 mm", wave_speed="1300 m/s").length
    2.4
    """

    kind = "pipe"

    def __init__(
        self, length: Any, radius: Any = None, *, diameter: Any = None, outer_diameter: Any = None, wall_thickness: Any = None, nominal_size: Any = None,
        schedule: Any = None, wave_speed: Any = None, young_modulus: Any = None, poisson_ratio: Any = None, anchoring: str = "throughout",
        roughness: Any = None, straight: bool = True, name: str = "", rated_pressure: Any = None, relief_setting: Any = None,
    ) -> None:  # fmt: skip
        if nominal_size is not None or schedule is not None:
            if radius is not None or diameter is not None or outer_diameter is not None:
                raise InputError("a pipe takes a nominal_size with its schedule or a measured size, not both", name="nominal_size")
            outer_diameter, wall_thickness = nominal_pipe(nominal_size, schedule)
        ways = [way for way in (radius, diameter, outer_diameter) if way is not None]
        if len(ways) != 1 or (outer_diameter is not None and wall_thickness is None):
            raise InputError(
                "a pipe needs exactly one of radius, diameter, outer_diameter with wall_thickness, or nominal_size with schedule", name="radius"
            )
        givens = read(
            {
                "length": (length, "length"), "radius": (radius, "length"), "diameter": (diameter, "length"),
                "outer_diameter": (outer_diameter, "length"), "wall_thickness": (wall_thickness, "length"), "wave_speed": (wave_speed, "velocity"),
                "young_modulus": (young_modulus, "pressure"), "poisson_ratio": (poisson_ratio, "ratio"), "roughness": (roughness, "length"),
            },
            signed=("roughness",), where=name or "pipe",
        )  # fmt: skip
        super().__init__(MappingProxyType(givens), name, **_limits(rated_pressure, relief_setting))
        if not self.radius > 0:
            raise InputError(f"{name or 'pipe'}: the wall leaves no bore", name="wall_thickness")
        object.__setattr__(self, "anchoring", anchoring)
        object.__setattr__(self, "straight", straight)
        if young_modulus is not None and wall_thickness is None and wave_speed is None:
            raise InputError(f"{name or 'pipe'}: young_modulus needs wall_thickness to give a wave speed", name="wall_thickness")

    def _speed(self, medium: Medium, values: Values, omega: Any) -> Any:
        return pipe_speed(medium, values, bore_radius(values), self.anchoring)  # type: ignore[attr-defined]

    @property
    def wall_given(self) -> bool:
        """Tell whether the wall or the wave speed was given."""
        return "wave_speed" in self.givens or "young_modulus" in self.givens


class Hose(_Conduit):
    """A hose: its wall gives, and loses some of what it takes.

    Parameters
    ----------
    length, radius or diameter : float or str
        [m]
    wave_speed : float or str, optional
        With the liquid in it; or ``young_modulus`` (effective) with ``wall_thickness``. [m/s]
    loss_factor : float or str
        Of the wall's complex modulus E (1 + i eta); 0.1 if not given (common practice).

    Examples
    --------
    >>> Hose(length="1 m", radius="8 mm", wave_speed="900 m/s").kind
    'hose'
    """

    kind = "hose"

    def __init__(
        self, length: Any, radius: Any = None, *, diameter: Any = None, wave_speed: Any = None, young_modulus: Any = None, wall_thickness: Any = None,
        loss_factor: Any = 0.1, name: str = "", rated_pressure: Any = None, relief_setting: Any = None,
    ) -> None:  # fmt: skip
        if (radius is None) == (diameter is None):
            raise InputError("a hose needs exactly one of radius and diameter", name="radius")
        if wave_speed is None and (young_modulus is None or wall_thickness is None):
            raise InputError("a hose needs its wave_speed, or young_modulus with wall_thickness", name="wave_speed")
        givens = read(
            {
                "length": (length, "length"), "radius": (radius, "length"), "diameter": (diameter, "length"), "wave_speed": (wave_speed, "velocity"),
                "young_modulus": (young_modulus, "pressure"), "wall_thickness": (wall_thickness, "length"), "loss_factor": (loss_factor, "ratio"),
            },
            signed=("loss_factor",), where=name or "hose",
        )  # fmt: skip
        super().__init__(MappingProxyType(givens), name, **_limits(rated_pressure, relief_setting))

    wall_given = True
    straight = False

    def _speed(self, medium: Medium, values: Values, omega: Any) -> Any:
        return hose_speed(medium, values, bore_radius(values))


class Restrictor(Element):
    """A restrictor: ``pressure_drop`` at ``flow`` fixes its law, dp = k Q abs(Q) (turbulent) or dp = k Q (laminar).

    Waves see the slope of the law at the mean flow; without one, or with reversal, its equivalent by harmonic balance.

    Examples
    --------
    >>> Restrictor(pressure_drop="3 bar", flow="38 L/min").kind
    'restrictor'
    """

    kind = "restrictor"

    def __init__(
        self, pressure_drop: Any, flow: Any, *, law: str = "turbulent", name: str = "", rated_pressure: Any = None, relief_setting: Any = None
    ) -> None:
        if law not in ("turbulent", "laminar"):
            raise InputError(f'law = {law!r} must be "turbulent" or "laminar"', name="law", value=law)
        givens = read({"pressure_drop": (pressure_drop, "pressure"), "flow": (flow, "flow_rate")}, where=name or "restrictor")
        super().__init__(MappingProxyType(givens), name, **_limits(rated_pressure, relief_setting))
        object.__setattr__(self, "law", law)

    def constant(self, values: Values) -> Any:
        """k of the law: [Pa s^2/m^6] or [Pa s/m^3]."""
        power = 2 if self.law == "turbulent" else 1  # type: ignore[attr-defined]
        return np.asarray(values["pressure_drop"]) / np.asarray(values["flow"]) ** power

    def resistance(self, medium: Medium, values: Values) -> Any:
        """Resistance to waves at the operating point [Pa s/m^3]; an ``equivalent_resistance`` in values overrules it."""
        if "equivalent_resistance" in values:
            return values["equivalent_resistance"]
        k = self.constant(values)
        if self.law == "laminar":  # type: ignore[attr-defined]
            return k
        flow = values["flow"] if medium.mean_flow is None else np.abs(medium.mean_flow)
        return 2 * k * flow

    def upstream(self, load: Load, omega: Any, medium: Medium, values: Values) -> Load:
        """Return the load behind the resistance."""
        return load.behind(self.resistance(medium, values))

    def onward(self, state: tuple[Any, Any], load: Load, omega: Any, medium: Medium, values: Values) -> tuple[Any, Any]:
        """Flow passes; pressure falls by the resistance times it."""
        pressure, flow = state
        # From the load itself, so that a large drop does not cancel.
        with np.errstate(divide="ignore", invalid="ignore"):
            through = flow * load.impedance
        return np.where(np.isfinite(through), through, pressure - self.resistance(medium, values) * flow), flow

    def steady_drop(self, flow: Any, medium: Medium, values: Values) -> Any:
        """The law itself, and what a ``ripple_drop`` in values adds: pulsation raises the mean of k Q abs(Q)."""
        flow, k = np.asarray(flow, float), self.constant(values)
        steady = k * flow if self.law == "laminar" else k * flow * np.abs(flow)  # type: ignore[attr-defined]
        return steady + values.get("ripple_drop", 0.0)


class _Shunt(Element):
    """An element beside the line: the pressure passes, part of the flow goes into it."""

    def branch(self, omega: Any, medium: Medium, values: Values) -> Load:
        """Return the load that the branch is."""
        raise NotImplementedError

    def upstream(self, load: Load, omega: Any, medium: Medium, values: Values) -> Load:
        """Return the load with the branch beside it."""
        return load.beside(self.branch(omega, medium, values))

    def onward(self, state: tuple[Any, Any], load: Load, omega: Any, medium: Medium, values: Values) -> tuple[Any, Any]:
        """Split the flow in the ratio of the two admittances; at a branch without impedance all of it goes in."""
        pressure, flow = state
        branch = self.branch(omega, medium, values)
        onward, aside = load.flow * branch.pressure, load.pressure * branch.flow
        total = onward + aside
        share = np.where(total != 0, onward / np.where(total != 0, total, 1.0), 0.0)
        return pressure, flow * share


class Volume(_Shunt):
    """A volume of liquid beside the line: compliance V/K.

    Examples
    --------
    >>> Volume(volume="0.8 L").values["volume"]
    0.0008
    """

    kind = "volume"

    def __init__(self, volume: Any, *, name: str = "", rated_pressure: Any = None, relief_setting: Any = None) -> None:
        givens = read({"volume": (volume, "volume")}, where=name or "volume")
        super().__init__(MappingProxyType(givens), name, **_limits(rated_pressure, relief_setting))

    def branch(self, omega: Any, medium: Medium, values: Values) -> Load:
        """Compliance V/K of the liquid with its free gas."""
        modulus, _ = medium.stiffness()
        return scaled(np.ones_like(np.asarray(omega), dtype=complex), 1j * np.asarray(omega) * values["volume"] / modulus)


class SideBranch(_Shunt):
    """A branch with elements and an end of its own.

    Examples
    --------
    >>> from pulsekit.line import ClosedEnd
    >>> SideBranch([Pipe(length="0.5 m", radius="8 mm", wave_speed="1300 m/s")], end=ClosedEnd()).kind
    'side branch'
    """

    kind = "side branch"

    def __init__(self, elements: Sequence[Element], *, end: Any, name: str = "", rated_pressure: Any = None, relief_setting: Any = None) -> None:
        if not elements:
            raise InputError(f"{name or 'side branch'} needs at least one element", name="element")
        if end is None:
            raise InputError(f"{name or 'side branch'} needs an end: closed, open, matched, restrictor or impedance", name="end")
        givens = {
            f"element.{index}.{key}": given for index, element in enumerate(elements) for key, given in element.givens.items()
        } | {f"end.{key}": given for key, given in end.givens.items()}  # fmt: skip
        super().__init__(MappingProxyType(givens), name, **_limits(rated_pressure, relief_setting))
        object.__setattr__(self, "elements", tuple(elements))
        object.__setattr__(self, "end", end)

    @property
    def holds_gas(self) -> bool:  # type: ignore[override]
        """Tell whether a damper stands in the branch."""
        return any(element.holds_gas for element in self.elements)  # type: ignore[attr-defined]

    def branch(self, omega: Any, medium: Medium, values: Values) -> Load:
        """Return the load of the branch: no mean flow passes a closed one."""
        from dataclasses import replace

        inner = replace(medium, mean_flow=0.0)
        elements = self.elements  # type: ignore[attr-defined]
        last = [element for element in elements if isinstance(element, _Conduit)]
        load = self.end.load(omega, inner, part(values, "end"), last[-1] if last else None, _last_values(values, elements))  # type: ignore[attr-defined]
        for index in range(len(elements) - 1, -1, -1):
            load = elements[index].upstream(load, omega, inner, part(values, f"element.{index}"))
        return load


def part(values: Values, prefix: str) -> dict[str, Any]:
    """Values below a prefix."""
    start = f"{prefix}."
    return {key[len(start) :]: value for key, value in values.items() if key.startswith(start)}


def _last_values(values: Values, elements: Sequence[Element]) -> dict[str, Any]:
    for index in range(len(elements) - 1, -1, -1):
        if isinstance(elements[index], _Conduit):
            return part(values, f"element.{index}")
    return {}
