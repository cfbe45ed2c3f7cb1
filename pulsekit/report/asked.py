"""What a reviewer asks: the same case with one thing changed at a time."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from ..case import analyse
from ..errors import PulsekitError
from ..exact.periodic import extremes, mean_absolute

__all__ = ["Variation", "tube_variations"]

_NAMES = ("peak_wall_shear_stress", "time_averaged_wall_shear_stress", "oscillatory_shear_index")


@dataclass(frozen=True)
class Variation:
    """One changed thing and the three findings that follow; None where the change cannot be made."""

    what: str
    peak_wall_shear_stress: float | None
    time_averaged_wall_shear_stress: float | None
    oscillatory_shear_index: float | None
    because: str = ""


def _of(what: str, findings: Any) -> Variation:
    return Variation(what, *(findings[name].value if name in findings else None for name in _NAMES))


def _changes(answer: Any) -> Iterator[tuple[str, dict[str, Any]]]:
    """Name and changed keys of each variation of the case."""
    kept = answer.harmonics.count
    for count in sorted({max(1, (kept + 1) // 2), kept + 2, kept + 4}):
        yield f"{count} harmonics instead of {kept}", {"cycles.harmonics": count}
    left_out = sorted(int(index) + 1 for index, _ in answer.cycles.left_out)
    kept_cycles = [int(index) + 1 for index in answer.cycles.kept]
    if len(kept_cycles) > 1:
        for number in kept_cycles:
            yield f"without cycle {number}", {"cycles.leave_out": sorted([*left_out, number])}
        other = "stretch" if answer.cycles.align == "onset" else "onset"
        yield f'cycles aligned by "{other}"', {"cycles.align": other}
    flow = answer.flow
    for sign, word in ((1.05, "+5 %"), (0.95, "−5 %")):
        yield f"radius {word}", _radius_scaled(answer, sign)
        yield f"viscosity {word}", {
            "fluid": {
                "kind": "given", "density": f"{flow.fluid.density!r} kg/m^3", "viscosity": f"{flow.fluid.viscosity * sign!r} Pa*s",
            }
        }  # fmt: skip


def _radius_scaled(answer: Any, factor: float) -> dict[str, Any]:
    changes = {}
    for key in ("radius", "diameter", "outer_diameter", "wall_thickness"):
        if answer.case.get(f"tube.{key}") is not None:
            changes[f"tube.{key}"] = f"{answer.case.given(f'tube.{key}').value * factor!r} m"
    if answer.case.get("recording.computed_with_radius") == "tube":
        # The instrument's area stays what it was: only the true radius is thought to differ.
        changes["recording.computed_with_radius"] = f"{answer.flow.tube.radius!r} m"
    return changes


def _quasi_steady(answer: Any) -> Variation:
    """Poiseuille at every instant: 4 mu U/R."""
    flow = answer.flow
    shear = flow.mean_velocity.coefficients * (4 * flow.fluid.viscosity / flow.tube.radius)
    low, high = extremes(shear)[:2]
    absolute = float(mean_absolute(shear))
    mean = abs(float(shear[0].real))
    index = None if absolute == 0 else max(0.0, 0.5 * (1 - mean / absolute))
    return Variation("quasi-steady flow, 4 mu U/R at every instant", max(abs(float(low)), abs(float(high))), absolute, index)


def tube_variations(answer: Any, *, workspace: Any = None) -> tuple[Variation, ...]:
    """Peak, mean and OSI of the case with one thing changed at a time.

    Harmonics kept (half to four more), each cycle left out in turn, the other alignment, quasi-steady
    flow, and 5 % more and less in radius and in viscosity. A change that the case does not bear keeps
    its row, with the reason.
    """
    rows = [_of("as answered", answer.findings), _quasi_steady(answer)]
    for what, changes in _changes(answer):
        try:
            case = answer.case
            for key, value in changes.items():
                case = case.with_value(key, value)
            rows.append(_of(what, analyse(case, nominal_only=True, workspace=workspace).findings))
        except PulsekitError as problem:
            rows.append(Variation(what, None, None, None, because=str(problem)))
    return tuple(rows)
