"""Resonances of a line with its end and source, and maps over speed."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .elements import Element, SideBranch, _Conduit, part
from .line import Line
from .medium import Medium
from .sources import FlowSource, MeasuredPressure
from .states import along, march, start_state

__all__ = ["Resonance", "SpeedMap", "resonances", "speed_map"]


@dataclass(frozen=True)
class Resonance:
    """A resonance: frequency [Hz], damping ratio [-], and the height of the peak."""

    frequency: float
    damping: float
    height: float


def gain(line: Line, frequency: ArrayLike, source: Any = None, *, mean_flow: float | None = None) -> Any:
    """What peaks at a resonance: abs(Z_in) beside the source's impedance, or the transfer from a station to the line's largest pressure."""
    hertz = np.asarray(frequency, float)
    omega = 2 * np.pi * hertz
    medium = line.medium(mean_flow=mean_flow)
    loads = line.loads(omega, medium, line.values)
    if isinstance(source, MeasuredPressure):
        unit = march(line, omega, medium, line.values, loads, (loads[0].pressure, loads[0].flow))
        reached = along(line, omega, medium, line.values, loads, unit, [source.station, *np.linspace(0, line.length, 41)])[0]
        return np.abs(reached[1:]).max(axis=0) / np.abs(reached[0])
    admittance = source.admittance(hertz) if isinstance(source, FlowSource) else np.zeros(hertz.shape, dtype=complex)
    return np.abs(start_state(loads[0], np.ones(hertz.shape), admittance)[0])


def resonances(line: Line, *, below: float, source: Any = None, mean_flow: float | None = None) -> tuple[Resonance, ...]:
    """Return the resonances below a frequency [Hz], lowest first.

    For an ideal flow source the maxima of abs(Z_in); for a measured pressure those of the transfer from the station. The
    damping ratio is half the relative width of the peak at 1/sqrt(2) of its height.

    Examples
    --------
    >>> from pulsekit.fluids import Fluid
    >>> from pulsekit.line import ClosedEnd, Pipe
    >>> line = Line([Pipe(length="10 m", radius="20 mm", wave_speed="1300 m/s")], end=ClosedEnd(), fluid=Fluid(density=870.0, viscosity=1e-4))
    >>> [round(found.frequency) for found in resonances(line, below=150.0)]
    [65, 130]
    """
    fine = np.linspace(below / 4000, below, 4000)
    height = np.asarray(gain(line, fine, source, mean_flow=mean_flow))
    inner = np.flatnonzero((height[1:-1] > height[:-2]) & (height[1:-1] >= height[2:])) + 1
    found = []
    for place in inner:
        step = fine[1] - fine[0]
        near = np.linspace(fine[place] - step, fine[place] + step, 401)
        tall = np.asarray(gain(line, near, source, mean_flow=mean_flow))
        top = int(tall.argmax())
        frequency, peak = float(near[top]), float(tall[top])
        damping = _damping(line, frequency, peak, source, mean_flow, below)
        # A bump that rises by less than a tenth above its feet is no resonance.
        left = height[:place][::-1]
        right = height[place + 1 :]
        feet = max(_foot(left), _foot(right))
        if peak > 1.1 * feet:
            found.append(Resonance(frequency, damping, peak))
    return tuple(found)


def _foot(side: NDArray[np.float64]) -> float:
    rising = np.flatnonzero(np.diff(side) > 0)
    return float(side[rising[0]]) if rising.size else float(side[-1]) if side.size else 0.0


def _damping(line: Line, frequency: float, peak: float, source: Any, mean_flow: float | None, below: float) -> float:
    for width in (0.002, 0.01, 0.05, 0.2, 0.5):
        near = np.linspace(frequency * (1 - width), frequency * (1 + width), 801)
        near = near[near > 0]
        tall = np.asarray(gain(line, near, source, mean_flow=mean_flow))
        under = tall < peak / np.sqrt(2)
        middle = int(np.abs(near - frequency).argmin())
        left, right = np.flatnonzero(under[:middle]), np.flatnonzero(under[middle:])
        if left.size and right.size:
            return float((near[middle + right[0]] - near[left[-1]]) / (2 * frequency))
    return 0.5


@dataclass(frozen=True, eq=False)
class SpeedMap:
    """Peak-to-peak pressure over speed and position, and per order at its worst place.

    speeds [Hz] (n_speed,), positions [m] (n_position,), peak_to_peak [Pa] (n_speed, n_position), orders (n_order,),
    per_order [Pa] (n_speed, n_order): the largest along the line, peak to peak.
    """

    speeds: NDArray[np.float64]
    positions: NDArray[np.float64]
    peak_to_peak: NDArray[np.float64]
    orders: NDArray[np.int_]
    per_order: NDArray[np.float64]


def _speeds_times(factor: float, elements: Sequence[Element], medium: Medium, values: Mapping[str, Any], above: str) -> dict[str, Any]:
    """Wave speeds of all pipes and hoses times a factor, by dotted key."""
    found: dict[str, Any] = {}
    for place, element in enumerate(elements):
        prefix = f"{above}element.{place}"
        if isinstance(element, _Conduit):
            found[f"{prefix}.wave_speed"] = factor * np.asarray(element.wave_speed(medium, part(values, prefix)))
        elif isinstance(element, SideBranch):
            found |= _speeds_times(factor, element.elements, medium, values, f"{prefix}.")  # type: ignore[attr-defined]
    return found


def speed_map(
    line: Line,
    source: FlowSource,
    speeds: ArrayLike,
    positions: ArrayLike,
    *,
    wave_speed_factor: float = 1.0,
    values: Mapping[str, Any] | None = None,
) -> SpeedMap:
    """Return the pulsation over a range of speeds, the source's flow, mean and pulsating, growing with speed.

    Parameters
    ----------
    line : Line
    source : FlowSource
        At its own speed; its harmonics go with the speed.
    speeds : array_like, shape (n_speed,)
        Of the shaft. [Hz]
    positions : array_like, shape (n_position,)
        [m]
    wave_speed_factor : float
        By which the wave speeds of all pipes and hoses are multiplied, to see what their uncertainty does.
    values : mapping, optional
        Numbers of the elements, such as those of a response with its equivalent resistances; the line's own if not given.
    """
    turning, places = np.asarray(speeds, float), np.asarray(positions, float)
    coefficients = np.asarray(source.harmonics.coefficients)
    orders = np.flatnonzero(np.abs(coefficients[1:]) > 1e-12 * np.abs(coefficients).max()) + 1
    ratio = turning[:, None] / source.harmonics.frequency
    omega = 2 * np.pi * turning[:, None] * orders
    mean = line.mean_flow if line.mean_flow is not None else source.harmonics.mean
    medium = line.medium(mean_flow=mean * ratio)
    numbers = dict(line.values if values is None else values)
    if wave_speed_factor != 1.0:
        numbers |= _speeds_times(wave_speed_factor, line.elements, medium, numbers, "")
    loads = line.loads(omega, medium, numbers)
    start = start_state(loads[0], coefficients[orders] * ratio, source.admittance(omega / (2 * np.pi)))
    states = march(line, omega, medium, numbers, loads, start)
    waves = along(line, omega, medium, numbers, loads, states, places)[0]
    waves = np.moveaxis(np.broadcast_to(waves, (places.size, turning.size, orders.size)), 0, 1)
    lowest = int(np.gcd.reduce(orders))
    reduced = orders // lowest
    size = int(2 ** np.ceil(np.log2(max(32, 4 * reduced.max()))))
    turn = np.exp(2j * np.pi * np.outer(reduced, np.arange(size)) / size)
    flat = waves.reshape(-1, orders.size)
    real = np.concatenate([flat.real, flat.imag], axis=1) @ np.concatenate([turn.real, -turn.imag])
    swing = np.ptp(real, axis=1).reshape(turning.size, places.size)
    return SpeedMap(turning, places, swing, orders, 2 * np.abs(waves).max(axis=1))
