"""From a pump-line case to its answer."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from ..appraisal.finding import Checks, Findings
from ..appraisal.reliance import line_depends, with_reliance
from ..line import FlowSource, GasDamper, acceleration_head, reciprocating_pump_rule, resonances, speed_map
from ..line.checks import line_checks
from ..line.findings import line_findings
from ..quantities import from_si
from .answer import Answer, shown_findings
from .case import Case
from .line_parts import absolute, ambient_of, line_of, mean_pressure_of, shaft_speed
from .line_source import Driven, pump_number, source_of
from .line_stations import read_stations, recording_checks
from .propagate_line import LineModel, line_inputs, propagate_line
from .provenance import check_hash, provenance
from .units import reader_units
from .workspace import Workspace, part_key

__all__ = ["SolvedLine", "analyse_pump_line", "solve_line"]


@dataclass(frozen=True, eq=False, kw_only=True)
class SolvedLine:
    """A line solved at the stated givens, with all that belongs to it."""

    line: Any
    driven: Driven
    response: Any
    stations: tuple[Any, ...]
    model: LineModel
    numbers: dict[str, Any]
    speed: float | None
    floors: Mapping[str, float]
    rule: Any
    positions: NDArray[np.float64]


def _floors(case: Case, line: Any, ambient: float) -> dict[str, float]:
    """Absolute pressures that must not be gone below [Pa]."""
    rows = {}
    for key in ("fluid.vapour_pressure", "fluid.gas_release_pressure", "operation.minimum_inlet_pressure"):
        given = case.maybe(key)
        if given is not None:
            rows[key.rpartition(".")[2]] = absolute(given, ambient).value
    if line.fluid.kind == "hydraulic oil" and "gas_release_pressure" not in rows:
        rows["gas_release_pressure_of_oil_(trade)"] = 0.8e5  # oil lets air out below about 0.5 to 0.8 bar(a): trade
    if "vapour_pressure" not in rows and line.fluid.vapour_pressure is not None:
        rows["vapour_pressure"] = line.fluid.vapour_pressure
    return rows


def _rule(case: Case) -> Any:
    """The rule on allowable pulsation: that for reciprocating pumps by default for them, none else."""
    prefix = "source.0" if isinstance(case.get("source"), list) else "source"
    named = case.get("operation.rule") or ("reciprocating pump" if case.get(f"{prefix}.kind") == "plunger pump" else "none")
    if named == "none":
        return None
    return reciprocating_pump_rule(float(case.get("operation.rule_constant") or 3500.0))


def _speed(case: Case) -> float | None:
    has = any(case.get(key) is not None for key in ("operation.speed", "operation.motor_speed", "source.speed"))
    return shaft_speed(case).value if has else None


def solve_line(case: Case, workspace: Workspace) -> SolvedLine:
    """Solve a pump-line case at its stated givens."""
    line, _ = line_of(case)
    speed = _speed(case)
    ambient = ambient_of(case)
    stations = read_stations(case, workspace, speed=speed, number=pump_number(case), length=line.length)
    driven = source_of(case, line, stations, workspace, speed=speed)
    response = line.respond(driven.source)
    positions = _positions(line, stations)
    rule, floors = _rule(case), _floors(case, line, ambient)
    watch = stations[-1].position if stations else 0.0
    model = LineModel(
        line=line, response=response, driven=driven, inputs=line_inputs(case, line, driven, mean_pressure_of(case)), positions=positions, watch=watch,
        rule=rule, floor=max(floors.values()) if floors else None,
    )  # fmt: skip
    nominal = {key: np.array([entry.given.value]) for key, entry in model.inputs.items()}
    found = model(nominal, np.asarray(driven.source.harmonics.coefficients)[None, :])
    numbers = {name: float(array[0]) for name, array in found.findings.items()}
    return SolvedLine(
        line=line, driven=driven, response=response, stations=tuple(stations), model=model, numbers=numbers, speed=speed, floors=floors, rule=rule,
        positions=positions,
    )  # fmt: skip


def _positions(line: Any, stations: Any) -> NDArray[np.float64]:
    """Where the envelope is computed: evenly, at every element and at every station."""
    return np.unique(np.concatenate([np.linspace(0.0, line.length, 41), line.starts, [station.position for station in stations]]))


def _over_speed(case: Case, solved: SolvedLine, numbers: dict[str, Any], extras: dict[str, Any]) -> None:
    """Largest pulsation within ±10 % of the speed, and over the stated range with the wave speed varied."""
    source = solved.driven.source
    if not isinstance(source, FlowSource) or solved.speed is None:
        return
    speeds = solved.speed * np.linspace(0.9, 1.1, 41)
    near = speed_map(solved.line, source, speeds, solved.positions, values=solved.response.values)
    swing = near.peak_to_peak.max(axis=1)
    numbers["worst_peak_to_peak_within_10_percent"] = float(swing.max())
    numbers["worst_speed_within_10_percent"] = float(speeds[swing.argmax()])
    stated = case.get("operation.speed_range")
    if stated:
        from ..quantities import parse_given

        low, high = sorted(parse_given(entry, "frequency", "operation.speed_range").value for entry in stated)
        speeds = np.linspace(low, high, 161)
        spread = _wave_speed_spread(solved)
        maps = [
            speed_map(solved.line, source, speeds, solved.positions, wave_speed_factor=factor, values=solved.response.values)
            for factor in (1 - spread, 1.0, 1 + spread)
        ]
        swing = np.max([found.peak_to_peak.max(axis=1) for found in maps], axis=0)
        numbers["worst_peak_to_peak_in_speed_range"] = float(swing.max())
        numbers["worst_speed_in_range"] = float(speeds[swing.argmax()])
        extras["speed_map"] = maps[1]
        extras["speeds_to_avoid"] = _bands_to_avoid(speeds, swing)
        extras["wave_speed_varied_by"] = spread
    else:
        wide = solved.speed * np.linspace(0.5, 1.5, 121)
        extras["speed_map"] = speed_map(solved.line, source, wide, solved.positions, values=solved.response.values)


def _wave_speed_spread(solved: SolvedLine) -> float:
    """Relative uncertainty of the wave speed: as stated for the first pipe, else 5 %."""
    for key, entry in solved.model.inputs.items():
        if key.endswith("wave_speed") and entry.given.standard_uncertainty > 0:
            return entry.given.relative_uncertainty
    return 0.05


def _bands_to_avoid(speeds: NDArray[np.float64], swing: NDArray[np.float64]) -> list[tuple[float, float]]:
    """Ranges of speed in which the pulsation exceeds twice its median over the range."""
    high = swing > 2 * np.median(swing)
    bands, start = [], None
    for place, tall in enumerate([*high, False]):
        if tall and start is None:
            start = place
        elif not tall and start is not None:
            bands.append((float(speeds[start]), float(speeds[place - 1])))
            start = None
    return bands


def _lost_dampers(case: Case, solved: SolvedLine, workspace: Workspace, numbers: dict[str, Any]) -> None:
    """Largest pulsation with every damper's gas lost, and with precharges 20 % off."""
    dampers = [place for place, element in enumerate(solved.line.elements) if isinstance(element, GasDamper)]
    if not dampers:
        return
    nominal = {key: np.array([entry.given.value]) for key, entry in solved.model.inputs.items()}
    raw = np.asarray(solved.driven.source.harmonics.coefficients)[None, :]

    def largest(changes: Mapping[str, Any]) -> float:
        return float(solved.model({**nominal, **changes}, raw).findings["largest_peak_to_peak_pressure"][0])

    numbers["peak_to_peak_with_gas_lost"] = largest({f"element.{place}.gas_lost": np.array([1.0]) for place in dampers})
    charged = [place for place in dampers if f"element.{place}.precharge" in nominal]
    for factor, word in ((1.2, "up"), (0.8, "down")):
        if charged:
            numbers[f"peak_to_peak_with_precharge_{word}_20_percent"] = largest(
                {f"element.{place}.precharge": factor * nominal[f"element.{place}.precharge"] for place in charged}
            )


def _recorded(solved: SolvedLine, numbers: dict[str, Any]) -> None:
    if not solved.stations:
        return
    ends = [station.extremes for station in solved.stations]
    shift = [0.0 for _ in solved.stations]
    worst = int(np.argmax([high - low for low, high, _ in ends]))
    numbers["recorded_peak_to_peak"] = ends[worst][1] - ends[worst][0]
    numbers["recorded_peak_to_peak_999"] = max(part for _, _, part in ends)
    with_mean = [place for place, station in enumerate(solved.stations) if station.mean_known]
    if with_mean:
        numbers["recorded_highest_pressure"] = max(ends[place][1] + shift[place] for place in with_mean)
        numbers["recorded_lowest_pressure"] = min(ends[place][0] + shift[place] for place in with_mean)
    numbers["asynchronous_share"] = max(station.asynchronous_share for station in solved.stations)


def _suction(case: Case, solved: SolvedLine, numbers: dict[str, Any]) -> None:
    """The trade's acceleration head beside the computed trough, in a suction line (negative flow)."""
    prefix = "source.0" if isinstance(case.get("source"), list) else "source"
    if solved.response.mean_flow >= 0 or solved.speed is None or case.get(f"{prefix}.plungers") is None:
        return
    first = next(element for element in solved.line.elements if element.length > 0)
    numbers["acceleration_head"] = acceleration_head(
        length=solved.line.length, velocity=solved.response.mean_flow / first.area, speed=solved.speed, plungers=int(case.get(f"{prefix}.plungers")),
        acting=str(case.get(f"{prefix}.acting") or "single"),
    )  # fmt: skip


def analyse_pump_line(
    case: Case, *, samples: int | None = None, progress: Any = None, stop: Any = None, nominal_only: bool = False, workspace: Workspace | None = None,
    identities: Mapping[str, str] | None = None,
) -> Answer:  # fmt: skip
    """Answer a pump-line case (see `analyse`)."""
    workspace = workspace or Workspace()
    solved = solve_line(case, workspace)
    numbers: dict[str, Any] = dict(solved.numbers)
    extras: dict[str, Any] = {"source_model": solved.driven.model, "rule": solved.rule, "stations": solved.stations, "positions": solved.positions, "fit": solved.driven.fit}
    extras["envelope"] = solved.response.envelope(solved.positions)
    _recorded(solved, numbers)
    _suction(case, solved, numbers)
    if not nominal_only:
        below = max(solved.response.frequency * min(solved.response.count, 40), 50.0)
        found = workspace.remember(
            part_key("resonances", case, "fluid", "element", "end", "operation", "source", "station"),
            lambda: resonances(solved.line, below=below, source=solved.driven.source, mean_flow=solved.response.medium.mean_flow),
        )
        extras["resonances"] = found
        numbers["first_resonance"] = found[0].frequency if found else None
        numbers["first_resonance_damping"] = found[0].damping if found else None
        _over_speed(case, solved, numbers, extras)
        _lost_dampers(case, solved, workspace, numbers)
    findings = line_findings(numbers)
    remarks = [*solved.driven.remarks, *solved.response.remarks]
    for station in solved.stations:
        remarks += station.remarks
    remarks += [*solved.line.fluid.remarks, *solved.line.fluid.sources]
    if solved.line.gas:
        remarks.append("Free gas is squeezed to the mean pressure as an ideal gas; that some of it dissolves is neglected.")
    if solved.rule is not None:
        remarks.append(f"Allowed pulsation: {solved.rule.source}.")
    more: dict[str, Any] = {}
    if not nominal_only:
        spread = propagate_line(case, solved.model, samples=samples, progress=progress, stop=stop, identities=identities)
        rows = []
        for finding in findings:
            low, high = spread.intervals.get(finding.name, (None, None))
            rows.append(finding.replace(low=low, high=high, shares=spread.shares.get(finding.name, {})) if finding.value is not None else finding)
        findings = Findings(rows)
        remarks += list(spread.remarks)
        extras |= spread.extras
        more = {
            "bands": spread.bands, "shares_definition": spread.shares_definition, "left_out_inputs": spread.left_out, "improve": spread.improve,
            "samples": spread.samples,
        }  # fmt: skip
    checks = _checks(case, solved, findings, numbers)
    units = reader_units(case, solved.driven.signal)
    findings = with_reliance(findings, checks, line_depends(findings, checks))
    findings = shown_findings(findings, units)
    for station in solved.stations:
        check_hash(case.get(f"{station.section}.sha256"), station.recording, station.section)
    return Answer(
        case=case, findings=findings, checks=checks, remarks=tuple(dict.fromkeys(remarks)), units=units, response=solved.response,
        recording=solved.driven.recording, signal=solved.driven.signal, cycles=solved.driven.cycles, harmonics=solved.driven.source.harmonics,
        per_cycle=pd.DataFrame() if nominal_only else per_turn(solved, units), overall=line_overall(findings, checks, extras),
        provenance=provenance(case, solved.driven.recording, extras), extras=extras, **more,
    )  # fmt: skip


def _checks(case: Case, solved: SolvedLine, findings: Findings, numbers: dict[str, Any]) -> Checks:
    highest = findings.get("highest_pressure")
    top = None
    if highest is not None and highest.value is not None:
        top = max(v for v in (highest.value, highest.high, numbers.get("recorded_highest_pressure")) if v is not None)
    ambient = solved.line.ambient
    rows = recording_checks(
        solved.stations, mean_pressure_of(case), ambient, {**numbers, "mean_at": lambda place: solved.response.mean_pressure(place)}
    )  # fmt: skip
    return line_checks(
        solved.response, numbers, source_model=solved.driven.model, floors=solved.floors, highest=top,
        tappings=[(station.name, station.tapping_length) for station in solved.stations], extra=rows,
    )  # fmt: skip


def per_turn(solved: SolvedLine, units: Mapping[str, str]) -> pd.DataFrame:
    """Highest, lowest and peak-to-peak of every turn used at each station."""
    unit = units.get("pressure", "Pa")
    rows = []
    for station in solved.stations:
        time, values, cycles = station.signal.time, station.signal.values, station.cycles
        for index in cycles.kept[:500]:
            inside = values[(time >= cycles.edges[index]) & (time < cycles.edges[index + 1])]
            if inside.size:
                rows.append(
                    {
                        "station": station.name, "turn": index + 1, "onset (s)": float(cycles.edges[index]),
                        f"highest ({unit})": from_si(float(inside.max()), unit, "pressure"), f"lowest ({unit})": from_si(float(inside.min()), unit, "pressure"),
                        f"peak to peak ({unit})": from_si(float(np.ptp(inside)), unit, "pressure"),
                    }
                )  # fmt: skip
    return pd.DataFrame(rows)


def line_overall(findings: Findings, checks: Checks, extras: Mapping[str, Any]) -> str:
    """May the numbers be relied on, for what, and what would settle the doubt."""
    fails = [check for check in checks if check.verdict == "fails"]
    doubtful = [check for check in checks if check.verdict == "doubtful"]
    unknown = [check for check in checks if check.verdict == "unknown"]
    largest, place = findings["largest_peak_to_peak_pressure"], findings["position_of_largest_pressure"]
    lead = f"The pulsation is largest at {place.shown_value:g} {place.shown_unit}: {largest.shown_value:g} {largest.shown_unit} p-p."
    if fails:
        return f"{lead} Do not rely on it as it stands: {fails[0].label.lower()} fails its check. {fails[0].because}"
    if doubtful:
        return f"{lead} It is indicative: {doubtful[0].because}"
    if unknown:
        return f"{lead} Nothing is seen to fail, but {len(unknown)} assumptions could not be checked; first: {unknown[0].because}"
    return f"{lead} Every assumption holds for this case, within the stated intervals."
