"""What helps: the same line with one thing changed at a time, driven by the same flow at the source."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from ..errors import CaseError, PulsekitError
from ..line import FlowSource
from .case import Case
from .line_parts import line_of
from .pump_line import SolvedLine, solve_line
from .workspace import Workspace

__all__ = ["Effect", "apply_change", "effects", "quarter_wave_length", "sized_gas_volume", "usual_changes"]


@dataclass(frozen=True)
class Effect:
    """What one change does: largest pulsation p-p [Pa] before and after, where it is then, and its word."""

    name: str
    before: float
    after: float | None
    position: float | None
    highest_pressure_change: float | None = None
    because: str = ""

    @property
    def ratio(self) -> float | None:
        """After over before. [-]"""
        return None if self.after is None or self.before == 0 else self.after / self.before


def apply_change(case: Case, change: Mapping[str, Any]) -> Case:
    """Return the case with a change made: keys ``set``, an element ``add``ed ``at`` a place, or one ``remove``d."""
    changed = case
    for key, value in (change.get("set") or {}).items():
        changed = changed.with_value(str(key), value)
    elements = changed.get("element") or []
    if change.get("remove") is not None:
        place = int(change["remove"])
        if not 0 <= place < len(elements):
            raise CaseError(f"change: there is no element {place} to remove; there are {len(elements)}, counted from 0", key="change.remove")
        elements = elements[:place] + elements[place + 1 :]
        changed = changed.with_value("element", elements)
    if change.get("add") is not None:
        place = int(change.get("at", 0))
        if not 0 <= place <= len(elements):
            raise CaseError(f"change: an element cannot be added at {place}; there are {len(elements)}, counted from 0", key="change.at")
        changed = changed.with_value("element", [*elements[:place], dict(change["add"]), *elements[place:]])
    return changed


def _largest(case: Case, source: Any) -> tuple[float, float, float]:
    """Largest pulsation p-p, its position, and the highest crest above the mean [Pa]."""
    line, _ = line_of(case)
    response = line.respond(source)
    places = np.unique(np.concatenate([np.linspace(0, line.length, 81), line.starts]))
    courses = response.courses(places)
    swing = np.ptp(courses, axis=1)
    top = int(swing.argmax())
    return float(swing[top]), float(places[top]), float((courses.max(axis=1) + np.asarray(response.mean_pressure(places))).max())


def source_kept(solved: SolvedLine) -> FlowSource:
    """The source as a flow into the line: it stays when the line is changed, where a measured pressure would not."""
    source = solved.driven.source
    return source if isinstance(source, FlowSource) else FlowSource(solved.response.flow_rate(0.0), model="from the measured pressure")


def effects(case: Case, changes: Sequence[Mapping[str, Any]] | None = None, *, workspace: Workspace | None = None) -> tuple[Effect, ...]:
    """Return the effect of each change against the case as recorded, the best first.

    Parameters
    ----------
    case : PumpLineCase
    changes : sequence of mapping, optional
        Each with ``name`` and ``set``, ``add`` with ``at``, or ``remove``; those of the case and some usual ones if not given.

    Returns
    -------
    tuple of Effect
        A change that cannot be made keeps its row, with the reason.
    """
    workspace = workspace or Workspace()
    solved = solve_line(case, workspace)
    source = source_kept(solved)
    if changes is None:
        changes = [*(case.get("change") or []), *usual_changes(case, solved)]
    before, _, crest = _largest(case, source)
    rows = []
    for number, change in enumerate(changes, 1):
        name = str(change.get("name") or f"change {number}")
        try:
            after, place, high = _largest(apply_change(case, change), source)
            rows.append(Effect(name, before, after, place, high - crest))
        except PulsekitError as problem:
            rows.append(Effect(name, before, None, None, because=str(problem)))
    return tuple(sorted(rows, key=lambda row: np.inf if row.after is None else row.after))


def sized_gas_volume(case: Case, solved: SolvedLine, *, wanted: float = 0.5) -> float:
    """Gas volume of a damper at the source that takes the largest pulsation to ``wanted`` of what it is [m^3].

    It begins where the damper's impedance at the strongest order is wanted/(1 - wanted) of the line's own, and grows until the
    line itself, with its shifted resonances, agrees.
    """
    response = solved.response
    order = int(np.abs(response.states[0][0]).argmax())
    omega = float(response.omega[order])
    impedance = abs(complex(np.ravel(np.asarray(response.loads[0].impedance))[order]))
    pressure = solved.line.mean_pressure
    if pressure is None:
        raise CaseError("sizing a damper needs operation.mean_pressure", key="operation.mean_pressure")
    source = source_kept(solved)
    goal = wanted * _largest(case, source)[0]
    volume = 1.4 * pressure * (1 - wanted) / (omega * impedance * wanted)
    for _ in range(16):
        if _largest(apply_change(case, _damper(solved, volume)), source)[0] <= goal:
            break
        volume *= 1.7
    return float(volume)


def _damper(solved: SolvedLine, volume: float) -> dict[str, Any]:
    first = next(element for element in solved.line.elements if element.length > 0)
    return {
        "name": f"gas damper with {1e3 * volume:.2g} L of gas at the source", "at": 0,
        "add": {
            "kind": "gas damper", "gas_volume": f"{volume:.6g} m^3", "pressure": f"{(solved.line.mean_pressure or 0.0) / 1e5:.6g} bar(a)",
            "neck_length": "30 mm", "neck_radius": f"{1e3 * first.radius:.4g} mm",  # type: ignore[attr-defined]
        },
    }  # fmt: skip


def quarter_wave_length(solved: SolvedLine, *, order: int | None = None) -> float:
    """Length of a closed branch tuned to an order (the strongest if not given): a quarter of its wavelength [m]."""
    response = solved.response
    number = int(np.abs(response.states[0][0]).argmax()) + 1 if order is None else order
    return float(solved.numbers["wave_speed"] / (4 * number * response.frequency))


def usual_changes(case: Case, solved: SolvedLine) -> list[dict[str, Any]]:
    """Changes that people try first: a damper, a tuned branch, a restrictor, another length."""
    rows: list[dict[str, Any]] = []
    wanted = case.value("operation.wanted_reduction") or 0.5
    first = next(element for element in solved.line.elements if element.length > 0)
    radius, speed = first.radius, solved.numbers["wave_speed"]  # type: ignore[attr-defined]
    if solved.line.mean_pressure is not None:
        rows.append(_damper(solved, sized_gas_volume(case, solved, wanted=wanted)))
    length = quarter_wave_length(solved)
    if 0.02 < length < 20:
        branch = {"kind": "pipe", "length": f"{length:.5g} m", "radius": f"{1e3 * radius:.5g} mm", "wave_speed": f"{speed:.6g} m/s"}
        rows.append(
            {
                "name": f"closed branch of {length:.3g} m at the source, tuned to its strongest order", "at": 0,
                "add": {"kind": "side branch", "element": [branch], "end": {"kind": "closed"}},
            }
        )  # fmt: skip
    flow, place = abs(solved.response.mean_flow), solved.line.elements.index(first)
    if flow > 0 and solved.line.mean_pressure is not None:
        drop = 0.03 * solved.line.mean_pressure
        rows.append(
            {
                "name": f"restrictor of {drop / 1e5:.2g} bar behind the first pipe", "at": place + 1,
                "add": {"kind": "restrictor", "pressure_drop": f"{drop / 1e5:.5g} bar", "flow": f"{6e4 * flow:.6g} L/min"},
            }
        )  # fmt: skip
    for factor, word in ((0.8, "20 % shorter"), (1.2, "20 % longer")):
        rows.append({"name": f"first pipe {word}", "set": {f"element.{place}.length": f"{factor * first.length:.6g} m"}})
    return rows
