"""Pressure and flow along a line for given conditions at 0 m, over frequencies and, if there are, samples."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..errors import InputError
from .elements import Restrictor, SideBranch, _Conduit, _Shunt, part
from .line import Line
from .load import Load
from .medium import Medium

__all__ = ["along", "branch_flows", "march", "place_of"]

State = tuple[Any, Any]


def start_state(load: Load, flow: Any, admittance: Any) -> State:
    """Pressure and flow at 0 m of a flow source with its admittance beside the line."""
    total = load.flow + load.pressure * admittance
    with np.errstate(divide="ignore", invalid="ignore"):
        pressure = flow * load.pressure / total
        onward = flow * load.flow / total
    return pressure, onward


def march(line: Line, omega: Any, medium: Medium, values: Mapping[str, Any], loads: Sequence[Load], start: State) -> list[State]:
    """Pressure and flow at the upstream side of each element, and at the end."""
    states, media = [start], line.media(medium, values)
    for place, element in enumerate(line.elements):
        states.append(element.onward(states[-1], loads[place + 1], omega, media[place], part(values, f"element.{place}")))
    return states


def place_of(line: Line, position: float) -> tuple[int, float]:
    """Element and distance into it at a position; at an element without length the upstream side.

    Raises
    ------
    InputError
        If the position lies outside the line.
    """
    places, distances = places_of(line, np.array([position], dtype=float))
    return int(places[0]), float(distances[0])


def places_of(line: Line, positions: NDArray[np.float64]) -> tuple[NDArray[np.int_], NDArray[np.float64]]:
    """The same for many positions, shape (P,)."""
    starts = line.starts
    outside = ~((positions >= -1e-9) & (positions <= starts[-1] * (1 + 1e-9) + 1e-9))
    if np.any(outside):
        position = float(positions[outside][0])
        raise InputError(
            f"position = {position:.6g} m lies outside the line of 0 to {starts[-1]:.6g} m",
            name="position", value=position, allowed=f"0 to {starts[-1]:.6g} m",
        )  # fmt: skip
    # The first of the elements that begin at or behind the position; where it lies before that one's start, inside the pipe before.
    behind = np.minimum(np.searchsorted(starts + 1e-12, positions, side="left"), len(line.elements))
    inside = (behind > 0) & (positions < starts[behind])
    places = np.where(inside, behind - 1, behind)
    return places, np.where(inside, positions - starts[places], 0.0)


def along(
    line: Line,
    omega: Any,
    medium: Medium,
    values: Mapping[str, Any],
    loads: Sequence[Load],
    states: Sequence[State],
    positions: Iterable[float],
) -> tuple[NDArray[np.complex128], NDArray[np.complex128]]:
    """Pressure and flow at positions, the position axis first."""
    media = line.media(medium, values)
    places, offsets = places_of(line, np.array([float(position) for position in positions]))
    shape = np.broadcast_shapes(*(np.shape(number) for state in states for number in state))
    pressures, flows = np.empty((places.size, *shape), complex), np.empty((places.size, *shape), complex)
    for place in np.unique(places):
        rows = np.flatnonzero(places == place)
        distances = offsets[rows]
        if place == len(line.elements) or not distances.any():
            pressures[rows], flows[rows] = states[place]
            continue
        element = line.elements[place]
        # A sampled length moves the stations in proportion.
        inner = part(values, f"element.{place}")
        share = (distances / element.length).reshape(-1, *(1,) * len(shape))
        pressures[rows], flows[rows] = element.inside(  # type: ignore[attr-defined]
            states[place], loads[place + 1], omega, media[place], inner, share * np.asarray(inner["length"])
        )
    return pressures, flows


def branch_flows(
    line: Line, omega: Any, medium: Medium, values: Mapping[str, Any], states: Sequence[State]
) -> dict[str, tuple[Any, Any, Restrictor]]:
    """Flow through every turbulent restrictor, with the mean flow there: dotted prefix -> (harmonics, mean, element)."""
    found: dict[str, tuple[Any, Any, Restrictor]] = {}
    mean = 0.0 if medium.mean_flow is None else medium.mean_flow
    media = line.media(medium, values)
    for place, element in enumerate(line.elements):
        prefix = f"element.{place}"
        if isinstance(element, Restrictor) and element.law == "turbulent":  # type: ignore[attr-defined]
            if medium.mean_flow is not None:
                found[prefix] = (states[place][1], mean, element)
        elif isinstance(element, SideBranch):
            branch = element.branch(omega, media[place], part(values, prefix))
            with np.errstate(divide="ignore", invalid="ignore"):
                aside = states[place][0] * branch.flow / branch.pressure
            # Only restrictors at the mouth of a branch carry exactly the branch's flow.
            for index, part_ in enumerate(element.elements):  # type: ignore[attr-defined]
                if isinstance(part_, Restrictor) and part_.law == "turbulent":  # type: ignore[attr-defined]
                    found[f"{prefix}.element.{index}"] = (aside, 0.0, part_)
                if isinstance(part_, (_Conduit, _Shunt)):
                    break
    from .ends import RestrictorEnd

    if isinstance(line.end, RestrictorEnd) and line.end.restrictor.law == "turbulent" and medium.mean_flow is not None:  # type: ignore[attr-defined]
        found["end"] = (states[-1][1], mean, line.end.restrictor)  # type: ignore[attr-defined]
    return found
