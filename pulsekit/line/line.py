"""A line of elements from the source (0 m) to its end: its operating point, its impedance and its response."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import InputError
from ..quantities import Given, parse_given
from .elements import Element, SideBranch, _Conduit, part
from .ends import End
from .load import Load
from .medium import Medium

__all__ = ["Line"]

AMBIENT = 101325.0


@dataclass(frozen=True, eq=False, init=False)
class Line:
    """A line of elements.

    Parameters
    ----------
    elements : sequence of Element
        In order from the source. Positions count the lengths of pipes and hoses.
    end : End
    fluid : Fluid
    mean_flow : float or str, optional
        Through the line, positive downstream. None: that of the source if it is a flow, else each restrictor is
        linearised at the flow given with it. [m^3/s]
    mean_pressure : float or str, optional
        At 0 m, absolute. [Pa]
    ambient : float
        Pressure of the surroundings [Pa].
    gas_fraction_at_atmosphere, gas_fraction_at_line_pressure : float or str, optional
        Free gas by volume. [-]

    Raises
    ------
    InputError
        If there is no element or no end, or the elements make no line.

    Examples
    --------
    >>> from pulsekit.fluids import Fluid
    >>> from pulsekit.line import ClosedEnd, Pipe
    >>> line = Line([Pipe(length="10 m", radius="10 mm", wave_speed="1300 m/s")], end=ClosedEnd(),
    ...             fluid=Fluid(density=870.0, viscosity="40 mPa*s"))
    >>> round(float(abs(line.input_impedance(65.0)) / abs(line.input_impedance(32.5)))) > 10
    True
    """

    elements: tuple[Element, ...]
    end: End
    fluid: Any
    givens: Mapping[str, Given]
    mean_flow: float | None
    mean_pressure: float | None
    ambient: float
    remarks: tuple[str, ...]
    gas: Mapping[str, float] = field(default_factory=dict)

    def __init__(
        self, elements: Sequence[Element], end: End | None = None, fluid: Any = None, *, mean_flow: Any = None, mean_pressure: Any = None,
        ambient: float = AMBIENT, gas_fraction_at_atmosphere: Any = None, gas_fraction_at_line_pressure: Any = None,
    ) -> None:  # fmt: skip
        elements = tuple(elements)
        if not elements:
            raise InputError("a line needs at least one element", name="elements")
        for place, element in enumerate(elements):
            if not isinstance(element, Element):
                raise InputError(f"element {place} is {element!r}, not an element of a line such as Pipe(...)", name="elements")
        if end is None:
            raise InputError("a line needs an end: ClosedEnd(), OpenEnd(), MatchedEnd(), RestrictorEnd(...) or ImpedanceEnd(...)", name="end")
        if fluid is None:
            raise InputError("a line needs a fluid", name="fluid")
        if isinstance(elements[-1], SideBranch):
            raise InputError(
                "a side branch cannot be the last element: put a pipe behind it, or make its elements those of the line", name="elements"
            )
        if not any(isinstance(element, _Conduit) for element in elements):
            raise InputError("a line needs at least one pipe or hose", name="elements")
        flow = None if mean_flow is None else parse_given(mean_flow, "flow_rate", "mean_flow")
        pressure = None if mean_pressure is None else parse_given(mean_pressure, "pressure", "mean_pressure")
        base = None if pressure is None else pressure.value + (ambient if pressure.reference == "gauge" else 0.0)
        if base is not None and base <= 0:
            raise InputError(f"mean_pressure = {base:.6g} Pa is not above absolute zero; it is absolute here", name="mean_pressure", value=base)
        gas = {}
        for name, value in (("gas_at_atmosphere", gas_fraction_at_atmosphere), ("gas_at_line_pressure", gas_fraction_at_line_pressure)):
            if value is not None:
                given = parse_given(value, "ratio", name)
                if not 0 <= given.value < 1:
                    raise InputError(f"{name} = {given.text} must lie between 0 and 1", name=name, value=given.value, allowed="0 to 1")
                gas[name] = given.value
        if len(gas) > 1:
            raise InputError("give free gas at atmosphere or at line pressure, not both", name="gas_fraction_at_atmosphere")
        givens = {f"element.{place}.{key}": given for place, element in enumerate(elements) for key, given in element.givens.items()}
        givens |= {f"end.{key}": given for key, given in end.givens.items()}
        for name, value in (
            ("elements", elements), ("end", end), ("fluid", fluid), ("givens", givens), ("mean_flow", None if flow is None else flow.value),
            ("mean_pressure", base), ("ambient", float(ambient)), ("gas", gas),
            ("remarks", _remarks(elements)),
        ):  # fmt: skip
            object.__setattr__(self, name, value)

    @property
    def length(self) -> float:
        """Length of the main line [m]."""
        return float(sum(element.length for element in self.elements))

    @cached_property
    def starts(self) -> NDArray[np.float64]:
        """Position of the upstream side of each element, and the end, shape (elements + 1,). [m]"""
        return np.concatenate([[0.0], np.cumsum([element.length for element in self.elements])])

    @property
    def values(self) -> dict[str, float]:
        """Numbers of all elements and of the end by dotted key [SI]."""
        return {key: given.value for key, given in self.givens.items()}

    def medium(self, *, mean_flow: Any = None, **changes: Any) -> Medium:
        """The liquid and the operating point as the elements see them."""
        flow = self.mean_flow if mean_flow is None else mean_flow
        fields = {
            "density": self.fluid.density, "viscosity": self.fluid.viscosity, "bulk_modulus": self.fluid.bulk_modulus, "mean_flow": flow,
            "pressure": self.mean_pressure, "temperature": self.fluid.temperature or 293.15, **self.gas,
        }  # fmt: skip
        return Medium(**(fields | changes))

    def media(self, medium: Medium, values: Mapping[str, Any]) -> list[Medium]:
        """The medium at the middle of each element and at the end, where gas feels the steady pressure drop before it.

        Where that would leave nothing above zero absolute (a line that no liquid bears, whose answer is not usable) the
        pressure at 0 m stands.
        """
        gas = medium.has_gas or any(element.holds_gas for element in self.elements)
        if medium.pressure is None or medium.mean_flow is None or not gas:
            return [medium] * (len(self.elements) + 1)
        media, upstream = [], np.asarray(medium.pressure, float)
        for drop in [*self.steady_drops(medium.mean_flow, medium, values), 0.0]:
            middle = upstream - 0.5 * np.asarray(drop)
            media.append(replace(medium, pressure=np.where(middle > 0, middle, medium.pressure)[()]))
            upstream = upstream - np.asarray(drop)
        return media

    def loads(self, omega: Any, medium: Medium, values: Mapping[str, Any]) -> list[Load]:
        """Load at the upstream side of each element, and at the end, in order."""
        media = self.media(medium, values)
        conduit = max(place for place, element in enumerate(self.elements) if isinstance(element, _Conduit))
        load = self.end.load(omega, media[-1], part(values, "end"), self.elements[conduit], part(values, f"element.{conduit}"))
        found = [load]
        for place in range(len(self.elements) - 1, -1, -1):
            element = self.elements[place]
            load = element.upstream(load, omega, media[place], part(values, f"element.{place}"))
            found.append(load)
        return found[::-1]

    def input_impedance(self, frequency: ArrayLike) -> Any:
        """Impedance of the line at 0 m, its end included; linear, never iterated.

        Parameters
        ----------
        frequency : array_like
            Above 0. [Hz]

        Returns
        -------
        complex or ndarray of complex
            [Pa s/m^3]
        """
        hertz = np.asarray(frequency, dtype=float)
        if not np.all(hertz > 0) or not np.all(np.isfinite(hertz)):
            raise InputError("frequency must be above 0 Hz; the steady state is the operating point", name="frequency", allowed="> 0")
        return np.asarray(self.loads(2 * np.pi * hertz, self.medium(), self.values)[0].impedance)[()]

    def respond(self, source: Any, **options: Any) -> Any:
        """Return the response of the line to a source at 0 m, or to a pressure measured at a station.

        Parameters
        ----------
        source : FlowSource or MeasuredPressure

        Returns
        -------
        LineResponse
        """
        from .response import respond

        return respond(self, source, **options)

    def steady_drops(self, flow: Any, medium: Medium | None = None, values: Mapping[str, Any] | None = None) -> list[Any]:
        """Steady pressure drop over each element at a mean flow [Pa]."""
        medium = self.medium(mean_flow=flow) if medium is None else medium
        values = self.values if values is None else values
        return [element.steady_drop(flow, medium, part(values, f"element.{place}")) for place, element in enumerate(self.elements)]

    def replace(self, **changes: Any) -> Line:
        """Return a copy with elements, end, fluid, mean_flow or mean_pressure changed."""
        fields: dict[str, Any] = {
            "elements": self.elements, "end": self.end, "fluid": self.fluid, "mean_flow": self.mean_flow, "mean_pressure": self.mean_pressure,
            "ambient": self.ambient, "gas_fraction_at_atmosphere": self.gas.get("gas_at_atmosphere"),
            "gas_fraction_at_line_pressure": self.gas.get("gas_at_line_pressure"),
        } | changes  # fmt: skip
        return Line(**fields)

    def __repr__(self) -> str:
        return f"<Line of {len(self.elements)} elements, {self.length:.4g} m, {self.end.kind} end>"


def _remarks(elements: Sequence[Element]) -> tuple[str, ...]:
    rows = []
    radii = [element.radius for element in elements if isinstance(element, _Conduit)]
    if len(set(radii)) > 1:
        rows.append("Where the bore changes, pressure and flow are continuous; the inertance and the loss of the step are neglected.")
    return tuple(rows)
