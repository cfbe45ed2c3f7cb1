"""The response of a line: pressure and flow anywhere, as harmonics."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import InputError
from ..quantities import to_si
from ..trace.harmonics import Harmonics
from .balance import equivalent_resistance, mean_turbulent_drop, merged, reverses
from .elements import part
from .line import Line
from .load import Load
from .medium import Medium
from .sources import FlowSource, MeasuredPressure
from .states import along, branch_flows, march, start_state

__all__ = ["LineResponse", "respond"]

_ROUNDS = 60
_LEAST_TRANSFER = 1e-3  # of the pressure at 0 m that must reach a station for its harmonic to be carried back


@dataclass(frozen=True, eq=False, kw_only=True)
class LineResponse:
    """Pressure and flow along a line, periodic in time; made by `Line.respond`.

    Attributes
    ----------
    line : Line
    source : FlowSource or MeasuredPressure
    frequency : float
        Of the fundamental. [Hz]
    orders : ndarray of int, shape (N,)
        Harmonics computed, from 1.
    medium : Medium
        At the operating point.
    states : list of (pressure, flow)
        At the upstream side of each element and at the end, shape (N,) each.
    remarks : tuple of str
    """

    line: Line
    source: Any
    frequency: float
    medium: Medium
    values: Mapping[str, Any]
    loads: Sequence[Load] = field(repr=False)
    states: Sequence[tuple[Any, Any]] = field(repr=False)
    remarks: tuple[str, ...] = ()
    amplitude_dependent: tuple[str, ...] = ()

    @property
    def fluid(self) -> Any:
        """The liquid."""
        return self.line.fluid

    @property
    def omega(self) -> NDArray[np.float64]:
        """Angular frequencies of the harmonics from the first. [rad/s]"""
        count = np.shape(self.states[0][0])[-1]
        return 2 * np.pi * self.frequency * np.arange(1, count + 1)

    @property
    def count(self) -> int:
        """Highest harmonic."""
        return int(np.shape(self.states[0][0])[-1])

    @cached_property
    def mean_flow(self) -> float:
        """Mean flow through the line [m^3/s]; 0 where it is not known."""
        return 0.0 if self.medium.mean_flow is None else float(np.asarray(self.medium.mean_flow))

    @cached_property
    def node_pressures(self) -> NDArray[np.float64]:
        """Mean absolute pressure at the upstream side of each element and at the end [Pa]; relative to 0 m where it is not known."""
        drops = [float(np.asarray(drop)) for drop in self.line.steady_drops(self.mean_flow, replace(self.medium, mean_flow=self.mean_flow), self.values)]
        base = 0.0 if self.line.mean_pressure is None else self.line.mean_pressure
        return base - np.concatenate([[0.0], np.cumsum(drops)])

    def mean_pressure(self, position: ArrayLike) -> Any:
        """Mean absolute pressure at positions [Pa]."""
        starts = self.line.starts
        places = np.asarray(position, float)
        return np.interp(places, starts, self.node_pressures)[()]

    def _at(self, position: Any) -> tuple[NDArray[np.complex128], NDArray[np.complex128]]:
        place = to_si(position, "length", "position")
        pressure, flow = along(self.line, self.omega, self.medium, self.values, self.loads, self.states, [place])
        return pressure[0], flow[0]

    def pressure(self, position: float | str) -> Harmonics:
        """Pressure at a position; X_0 is the mean absolute pressure, or its fall from 0 m where the mean is not known. [Pa]"""
        waves, _ = self._at(position)
        mean = float(self.mean_pressure(to_si(position, "length", "position")))
        return Harmonics(self.frequency, np.concatenate([[mean], waves]), unit="bar")

    def flow_rate(self, position: float | str) -> Harmonics:
        """Flow rate at a position, positive downstream. [m^3/s]"""
        _, waves = self._at(position)
        return Harmonics(self.frequency, np.concatenate([[self.mean_flow], waves]), unit="L/min")

    def pressures(self, positions: ArrayLike) -> NDArray[np.complex128]:
        """Complex pressure harmonics at positions, shape (n_position, N). [Pa]"""
        return along(self.line, self.omega, self.medium, self.values, self.loads, self.states, np.asarray(positions, float).ravel())[0]

    def courses(self, positions: ArrayLike, *, instants: int = 0) -> NDArray[np.float64]:
        """Pulsating pressure over one cycle at positions, shape (n_position, instants). [Pa]"""
        waves = self.pressures(positions)
        size = instants or int(2 ** np.ceil(np.log2(max(64, 8 * self.count))))
        spectrum = np.zeros((waves.shape[0], size // 2 + 1), dtype=complex)
        spectrum[:, 1 : self.count + 1] = waves * (size / 2)
        return np.asarray(np.fft.irfft(spectrum, n=size, axis=1))

    def envelope(self, positions: ArrayLike) -> NDArray[np.float64]:
        """Peak-to-peak pressure at positions, shape (n_position,). [Pa]"""
        return np.asarray(np.ptp(self.courses(positions), axis=1))

    def grid(self, count: int = 201) -> NDArray[np.float64]:
        """Even positions along the line with both sides of every element. [m]"""
        return np.unique(np.concatenate([np.linspace(0.0, self.line.length, count), self.line.starts]))

    def __repr__(self) -> str:
        return f"<LineResponse: {self.count} harmonics of {self.frequency:.4g} Hz along {self.line.length:.4g} m>"


def respond(line: Line, source: Any, *, values: Mapping[str, Any] | None = None) -> LineResponse:
    """Return the response of a line (see `Line.respond`)."""
    if not isinstance(source, (FlowSource, MeasuredPressure)):
        raise InputError(f"source = {source!r} must be a FlowSource or a MeasuredPressure", name="source")
    harmonics = source.harmonics
    if harmonics.count < 1:
        raise InputError("a source needs at least one harmonic beside its mean", name="source")
    mean = line.mean_flow
    if mean is None and isinstance(source, FlowSource):
        mean = harmonics.mean
    omega = harmonics.angular_frequency * np.arange(1, harmonics.count + 1)
    medium = line.medium(mean_flow=mean) if mean is not None else line.medium()
    numbers: Mapping[str, Any] = line.values if values is None else values
    resistances: dict[str, Any] = {}
    remarks: list[str] = list(line.remarks)
    for turn in range(_ROUNDS):
        now = merged(numbers, resistances)
        loads = line.loads(omega, medium, now)
        states = march(line, omega, medium, now, loads, _start(line, source, omega, medium, now, loads))
        changed = _rebalanced(line, omega, medium, now, states, resistances, turn)
        if not changed:
            break
    for prefix in resistances:
        remarks.append(
            f"The flow through the restrictor {prefix} turns during the cycle: its resistance to waves was found by harmonic balance, and the answer holds "
            "for this amplitude only."
        )
    if medium.mean_flow is None:
        remarks.append("No mean flow is known: restrictors are linearised at the flow given with them, friction in pipes is laminar.")
    settled = merged(numbers, resistances) | _ripple_drops(line, omega, medium, now, states)
    return LineResponse(
        line=line, source=source, frequency=harmonics.frequency, medium=medium, values=settled, loads=loads, states=states,
        remarks=tuple(remarks), amplitude_dependent=tuple(resistances),
    )  # fmt: skip


def _start(line: Line, source: Any, omega: Any, medium: Medium, values: Mapping[str, Any], loads: Sequence[Load]) -> tuple[Any, Any]:
    load = loads[0]
    if isinstance(source, FlowSource):
        return start_state(load, np.asarray(source.harmonics.coefficients[1:]), source.admittance(omega / (2 * np.pi)))
    unit = march(line, omega, medium, values, loads, (load.pressure, load.flow))
    reached = along(line, omega, medium, values, loads, unit, [source.station])[0][0]
    weak = np.abs(reached) < _LEAST_TRANSFER * np.abs(load.pressure)
    if np.any(weak):
        orders = ", ".join(str(order) for order in np.flatnonzero(weak) + 1)
        raise InputError(
            f"the station at {source.station:.4g} m stands at a node of order {orders}: what happens elsewhere cannot be told from it; move the station, or keep "
            "fewer orders",
            name="station", value=source.station,
        )  # fmt: skip
    factor = np.asarray(source.harmonics.coefficients[1:]) / reached
    return load.pressure * factor, load.flow * factor


def _ripple_drops(line: Line, omega: Any, medium: Medium, values: Mapping[str, Any], states: Sequence[Any]) -> dict[str, Any]:
    """By how much pulsation raises the mean drop of each turbulent restrictor [Pa]."""
    found = {}
    for prefix, (flow, mean, element) in branch_flows(line, omega, medium, values, states).items():
        k = element.constant(part(values, prefix))
        found[f"{prefix}.ripple_drop"] = float(mean_turbulent_drop(k, mean, flow) - k * mean * np.abs(mean))
    return found


def _rebalanced(
    line: Line, omega: Any, medium: Medium, values: Mapping[str, Any], states: Sequence[Any], resistances: dict[str, Any], turn: int
) -> bool:
    """Update the equivalent resistances of restrictors whose flow turns; tell whether any moved."""
    moved = False
    for prefix, (flow, mean, element) in branch_flows(line, omega, medium, values, states).items():
        if prefix not in resistances and not bool(reverses(mean, flow)):
            continue
        inner = part(values, prefix)
        wanted = float(equivalent_resistance(element.constant(inner), mean, flow))
        last = resistances.get(prefix)
        new = wanted if last is None else 0.5 * (wanted + last)
        if last is None or abs(new - last) > 1e-9 * abs(new):
            moved = turn < _ROUNDS - 1
        resistances[prefix] = new
    return moved
