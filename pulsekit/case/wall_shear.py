"""From a wall-shear case to its answer."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
import pandas as pd

from ..appraisal.finding import Checks
from ..errors import PulsekitError
from ..quantities import from_si
from ..trace import cycle_coefficients
from ..tube import CircularTube, TubeFlow, solve
from ..tube.findings import tube_values
from .answer import Answer, shown_findings, unit_for
from .case import Case
from .caveats import rectified_words, with_radius_of_area
from .liquids import fluid_of
from .measurement import Measurement, measure
from .provenance import provenance
from .threshold import threshold_check, threshold_words
from .units import reader_units
from .workspace import Workspace, part_key

__all__ = ["analyse_wall_shear", "solve_measurement", "tube_of"]

_PER_CYCLE = (
    "time_averaged_wall_shear_stress", "peak_wall_shear_stress", "oscillatory_shear_index", "mean_flow_rate", "peak_flow_rate", "minimum_flow_rate",
    "volume_per_cycle",
)  # fmt: skip


def tube_of(case: Case) -> CircularTube:
    """Return the tube of a case."""
    sizes = {}
    for name in ("radius", "diameter", "outer_diameter", "wall_thickness"):
        if case.get(f"tube.{name}") is not None:
            sizes[name] = case.given(f"tube.{name}")
    if not sizes:
        raise case.missing("tube.radius")
    return CircularTube(**sizes)


def nominal_values(measurement: Measurement, tube: CircularTube, fluid: Any) -> dict[str, Any]:
    """Values of all inputs of the measurement's steps at the stated givens."""
    return {key: given.value for key, given in measurement.givens.items()} | {
        "radius": tube.radius, "density": fluid.density, "viscosity": fluid.viscosity,
    }  # fmt: skip


def solve_measurement(measurement: Measurement, tube: CircularTube, fluid: Any) -> TubeFlow:
    """Solve the tube at the stated givens."""
    harmonics = measurement.harmonics(nominal_values(measurement, tube, fluid))
    return solve(harmonics, quantity=measurement.quantity, tube=tube, fluid=fluid, mean_known=measurement.mean_known)


def analyse_wall_shear(
    case: Case, *, samples: int | None = None, progress: Any = None, stop: Any = None, nominal_only: bool = False, workspace: Workspace | None = None,
    identities: Mapping[str, str] | None = None,
) -> Answer:  # fmt: skip
    """Answer a wall-shear case (see `analyse`)."""
    from .propagate_tube import propagate_tube
    from .tube_verdicts import overall_words, reliant, tube_context

    workspace = workspace or Workspace()
    case, area_remarks = with_radius_of_area(case, workspace)
    measurement = measure(case, workspace, progress=progress, stop=stop)
    tube, fluid = tube_of(case), fluid_of(case)
    flow = solve_measurement(measurement, tube, fluid)
    units = reader_units(case, measurement.gathered.signal)
    findings, checks = flow.findings(), flow.checks(**tube_context(case, measurement, flow))
    remarks = [*_remarks(measurement, flow, fluid), *area_remarks, *_signal_remarks(case, measurement)]
    more: dict[str, Any] = {}
    if not nominal_only:
        remarks += other_alignment(case, measurement, findings, workspace, tube, fluid)
        spread = propagate_tube(
            case, measurement, flow, findings, checks, samples=samples, progress=progress, stop=stop, identities=identities
        )
        findings, checks = spread.findings, flow.checks(**tube_context(case, measurement, flow, spread.samples))
        remarks += [sentence for sentence in spread.remarks if sentence not in remarks]
        more = {
            "bands": spread.bands, "shares_definition": spread.shares_definition, "left_out_inputs": spread.left_out, "improve": spread.improve,
            "samples": spread.samples, "extras": spread.extras,
        }  # fmt: skip
    per_cycle = (
        pd.DataFrame() if nominal_only
        else workspace.remember(part_key("per cycle", case, *case.data), lambda: per_cycle_table(measurement, flow, units))
    )  # fmt: skip
    threshold = threshold_check(case, findings, per_cycle)
    findings = reliant(findings, checks, str(case.get("recording.quantity")))
    shown = shown_findings(findings, units)
    overall = overall_words(shown, checks)
    if threshold is not None:
        checks, overall = Checks([*checks, threshold]), f"{overall} {threshold_words(threshold)}"
    return Answer(
        case=case, findings=shown, checks=checks, remarks=tuple(remarks), units=units, flow=flow, recording=measurement.gathered.recording,
        signal=measurement.gathered.signal, cycles=measurement.cycles, harmonics=measurement.raw, per_cycle=per_cycle,
        overall=overall,
        provenance=provenance(case, measurement.gathered.recording, more.get("extras", {})), **more,
    )  # fmt: skip


def _remarks(measurement: Measurement, flow: TubeFlow, fluid: Any) -> list[str]:
    """Everything guessed, repaired, dropped or assumed, in the order in which it was done; each once."""
    rows = [
        *measurement.gathered.recording.remarks, *measurement.raw.remarks, *measurement.gathered.remarks, *measurement.remarks, *flow.remarks,
        *(getattr(fluid, "sources", ()) or ()),
    ]  # fmt: skip
    return list(dict.fromkeys(rows))


def _signal_remarks(case: Case, measurement: Measurement) -> list[str]:
    """What the course of the signal, and a device in the flow, warn of."""
    rows = []
    if device := case.get("tube.device"):
        rows.append(
            f"In the flow: {device}. The wall shear holds for a long straight tube only; at its inlets, tips, side holes, bends and narrowings it can be "
            "many times higher. No evidence of absence of blood damage or clotting, and no basis for treatment or release."
        )
    if measurement.gathered.dimension != "velocity" or case.get("recording.forward"):
        return rows
    words = rectified_words(measurement.gathered.signal, measurement.cycles)
    return [*rows, words] if words else rows


def other_alignment(case: Case, measurement: Measurement, findings: Any, workspace: Workspace, tube: CircularTube, fluid: Any) -> list[str]:
    """What the other way to average cycles of unequal length would give; nothing where they are all alike."""
    if measurement.cycles.count < 2 or measurement.cycles.period_scatter < 0.005:
        return []
    other = "stretch" if measurement.cycles.align == "onset" else "onset"
    try:
        changed = measure(case.with_value("cycles.align", other), workspace)
        found = solve_measurement(changed, tube, fluid).findings()
    except PulsekitError as problem:
        return [f'Averaging the cycles by align = "{other}" is not possible here: {problem}']
    parts = []
    for name in ("time_averaged_wall_shear_stress", "peak_wall_shear_stress", "oscillatory_shear_index"):
        value, mine = found[name].value, findings[name].value
        if value is not None and mine is not None:
            parts.append(
                f"{name.replace('_', ' ')} {value:.4g} in place of {mine:.4g}" + (f" {found[name].unit}" if found[name].unit else "")
            )
    if not parts:
        return []
    return [f'Cycles were averaged by align = "{measurement.cycles.align}"; "{other}" would give {", ".join(parts)}.']


def per_cycle_table(measurement: Measurement, flow: TubeFlow, units: Any) -> pd.DataFrame:
    """Every used cycle's own values, in the reader's units."""
    cycles = measurement.cycles
    own = cycle_coefficients(cycles, measurement.raw.count)
    values = nominal_values(measurement, flow.tube, flow.fluid)
    # A cycle of its own length has its own frequency.
    rows = []
    names = [name for name in _PER_CYCLE if flow.mean_known]
    si_units = {finding.name: finding.unit for finding in flow.findings()}
    for place, index in enumerate(cycles.kept):
        period = float(cycles.periods[place])
        row: dict[str, Any] = {"cycle": index + 1, "onset (s)": float(cycles.edges[index]), "period (s)": period}
        coefficients = measurement.coefficients(own[place], values)
        harmonics = measurement.raw.replace(
            frequency=1 / (cycles.base_period if cycles.align == "onset" else period), coefficients=coefficients, covariance=None
        )  # fmt: skip
        single = solve(harmonics, quantity=measurement.quantity, tube=flow.tube, fluid=flow.fluid, mean_known=flow.mean_known)
        found = tube_values(single)
        for name in names:
            value, unit = found[name], unit_for(name, si_units[name], units)
            head = f"{name} ({unit})" if unit else name
            row[head] = np.nan if value is None else (from_si(value, unit) if unit and unit != si_units[name] else value)
        rows.append(row)
    return pd.DataFrame(rows)
