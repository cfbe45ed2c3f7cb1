"""What drives the line of a case: a computed pump, a recorded flow, or pressures measured at stations."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from ..errors import CaseError, InputError
from ..line import FlowSource, Line, MeasuredPressure, axial_piston_pump, plunger_pump
from ..line.elements import _Conduit, part
from ..line.stations import fit_stations
from ..quantities import Given
from ..trace import Harmonics, decompose
from .case import Case
from .line_stations import Station, read_channel, turns_of
from .workspace import Workspace, part_key

__all__ = ["Driven", "pump_number", "source_of"]


@dataclass(frozen=True, eq=False, kw_only=True)
class Driven:
    """A source, how it was found, its cycles if it was recorded, and the inputs by which its size is uncertain."""

    source: Any
    model: str
    signal: Any = None
    cycles: Any = None
    raw: Harmonics | None = None
    recording: Any = None
    remarks: tuple[str, ...] = ()
    fit: Any = None
    scale: tuple[str, Given] | None = None


def _one(case: Case) -> str:
    """Prefix of the one source; several are handled one by one."""
    return "source.0" if isinstance(case.get("source"), list) else "source"


def pump_number(case: Case) -> int:
    """Plungers or pistons of the pump; 1 if there is none."""
    prefix = _one(case)
    return int(case.get(f"{prefix}.plungers") or case.get(f"{prefix}.pistons") or 1)


def _pump_flow(case: Case, prefix: str, mean: Given | None, speed: float, line: Line) -> tuple[Harmonics, str]:
    kind = case.get(f"{prefix}.kind")
    if mean is None:
        raise case.missing("operation.mean_flow")
    count = case.get(f"{prefix}.harmonics")
    if kind == "plunger pump":
        if case.get(f"{prefix}.plungers") is None:
            raise case.missing(f"{prefix}.plungers")
        lag = case.maybe(f"{prefix}.valve_lag")
        squeezed = 0.0
        dead = case.value(f"{prefix}.dead_volume")
        if dead is not None:
            # Share of a stroke that only compresses: (dead + swept volume) times the pressure over K and the swept volume.
            swept = abs(mean.value) / speed / int(case.get(f"{prefix}.plungers"))
            pressure = (line.mean_pressure or line.ambient) - line.ambient
            if line.fluid.bulk_modulus is None:
                raise InputError("the compression in a pump with dead_volume needs fluid.bulk_modulus", name="fluid.bulk_modulus")
            squeezed = (dead + swept) * pressure / (line.fluid.bulk_modulus * swept)
        flow = plunger_pump(
            plungers=int(case.get(f"{prefix}.plungers")), speed=speed, mean_flow=mean.value, rod_ratio=case.value(f"{prefix}.rod_ratio", "ratio"),
            acting=str(case.get(f"{prefix}.acting") or "single"), valve_lag=0.0 if lag is None else lag.value, compression=squeezed,
            harmonics=None if count is None else int(count),
        )  # fmt: skip
        return flow, "valves" if lag is not None or dead is not None else "kinematic"
    if case.get(f"{prefix}.pistons") is None:
        raise case.missing(f"{prefix}.pistons")
    dead_volume = case.value(f"{prefix}.dead_volume")
    flow = axial_piston_pump(
        pistons=int(case.get(f"{prefix}.pistons")), speed=speed, mean_flow=mean.value, dead_volume=dead_volume,
        port_opening_angle=case.value(f"{prefix}.port_opening_angle"), bulk_modulus=line.fluid.bulk_modulus if dead_volume is not None else None,
        pressure=None if dead_volume is None or line.mean_pressure is None else line.mean_pressure - line.ambient,
        harmonics=None if count is None else int(count),
    )  # fmt: skip
    return flow, "kinematic" if dead_volume is None else "backflow"


def _impedance(case: Case, prefix: str, line: Line) -> Any:
    """Impedance of a pump from its internal volume: a compliance."""
    volume = case.value(f"{prefix}.internal_volume")
    if volume is None:
        return None
    modulus = line.fluid.bulk_modulus
    if modulus is None:
        raise InputError("a source with internal_volume needs fluid.bulk_modulus", name="fluid.bulk_modulus")
    return lambda frequency: modulus / (2j * np.pi * frequency * volume)


def _pumps(case: Case, line: Line, speed: float) -> Driven:
    """One pump, or several at 0 m with one speed, whose flows add."""
    several = case.get("source") if isinstance(case.get("source"), list) else None
    prefixes = [f"source.{index}" for index in range(len(several))] if several else ["source"]
    total: Harmonics | None = None
    model, remarks = "kinematic", []
    for prefix in prefixes:
        own = case.value(f"{prefix}.speed") or speed
        if abs(own / speed - 1) > 1e-9:
            raise CaseError(
                f"{prefix}.speed differs from that of the first pump; pumps of unequal speeds are answered one case each, their pulsations adding at worst phase",
                key=f"{prefix}.speed",
            )  # fmt: skip
        if (case.value(f"{prefix}.position") or 0.0) > 0:
            raise CaseError(f"{prefix}.position: a pump must stand at 0 m; let the line begin there", key=f"{prefix}.position")
        mean = case.maybe(f"{prefix}.mean_flow") or (case.maybe("operation.mean_flow") if len(prefixes) == 1 else None)
        flow, model = _pump_flow(case, prefix, mean, speed, line)
        remarks += list(flow.remarks)
        if total is None:
            total = flow
        else:
            size = max(total.count, flow.count) + 1
            summed = np.zeros(size, dtype=complex)
            summed[: total.count + 1] += total.coefficients
            summed[: flow.count + 1] += flow.coefficients
            total = flow.replace(coefficients=summed)
    assert total is not None
    return Driven(source=FlowSource(total, _impedance(case, prefixes[0], line), model=model), model=model, remarks=tuple(dict.fromkeys(remarks)))


def source_of(case: Case, line: Line, stations: Sequence[Station], workspace: Workspace, *, speed: float | None) -> Driven:
    """Return what drives the line.

    A stated source counts. Without one, a single station is a measured pressure, and two or more in the first pipe give the
    source's flow.
    """
    prefix = _one(case)
    kind = case.get(f"{prefix}.kind")
    if kind in ("plunger pump", "axial piston pump"):
        if speed is None:
            raise case.missing("operation.speed")
        return _pumps(case, line, speed)
    if kind == "flow trace":
        signal, recording, cycles, raw = _recorded(case, prefix, workspace, "flow_rate", speed)
        return Driven(
            source=FlowSource(raw, _impedance(case, prefix, line), model="flow trace"), model="flow trace", signal=signal, cycles=cycles, raw=raw,
            recording=recording, remarks=(*recording.remarks, *raw.remarks), scale=_scale(case, prefix),
        )  # fmt: skip
    if kind == "measured pressure":
        return _measured(case, prefix, workspace, stations, speed)
    if kind == "measured pressures" or (kind is None and len(stations) > 1):
        return _fitted(line, stations)
    if kind is None and len(stations) == 1:
        return _from_station(stations[0])
    raise case.missing("source.kind")


def _scale(case: Case, prefix: str) -> tuple[str, Given] | None:
    given = case.maybe(f"{prefix}.scale_uncertainty")
    return None if given is None else (f"{prefix}.scale_uncertainty", given)


def _from_station(station: Station) -> Driven:
    return Driven(
        source=MeasuredPressure(station.harmonics, station.position), model="measured", signal=station.signal, cycles=station.cycles, raw=station.harmonics,
        recording=station.recording, remarks=station.remarks, scale=None if station.scale is None else (f"{station.section}.scale_uncertainty", station.scale),
    )  # fmt: skip


def _recorded(case: Case, prefix: str, workspace: Workspace, wanted: str, speed: float | None) -> tuple[Any, Any, Any, Harmonics]:
    """Signal, recording, turns and orders of a recorded source, remembered by the parts of the case that they depend on."""
    signal, recording = read_channel(case, prefix, workspace, wanted)

    def make() -> tuple[Any, Harmonics]:
        cycles = turns_of(case, prefix, signal, recording, speed, pump_number(case))
        asked = case.get("cycles.harmonics")
        return cycles, decompose(cycles, count=None if asked is None else int(asked))

    key = (*part_key(f"orders of {prefix}", case, prefix, "cycles", "recording"), speed, recording.sha256)
    cycles, raw = workspace.remember(key, make)
    return signal, recording, cycles, raw


def _measured(case: Case, prefix: str, workspace: Workspace, stations: Sequence[Station], speed: float | None) -> Driven:
    if case.get(f"{prefix}.file") is None:
        if not stations:
            raise case.missing(f"{prefix}.file")
        place = case.value(f"{prefix}.station")
        chosen = stations[0] if place is None else min(stations, key=lambda station: abs(station.position - place))
        return _from_station(chosen)
    signal, recording, cycles, raw = _recorded(case, prefix, workspace, "pressure", speed)
    place = case.value(f"{prefix}.station")
    if place is None:
        raise case.missing(f"{prefix}.station")
    return Driven(
        source=MeasuredPressure(raw, place), model="measured", signal=signal, cycles=cycles, raw=raw, recording=recording,
        remarks=(*recording.remarks, *raw.remarks), scale=_scale(case, prefix),
    )  # fmt: skip


def _fitted(line: Line, stations: Sequence[Station]) -> Driven:
    """Flow at 0 m from two or more stations in the first pipe."""
    first = next(place for place, element in enumerate(line.elements) if isinstance(element, _Conduit))
    pipe = line.elements[first]
    if first != 0:
        raise CaseError("the source's flow from stations needs a pipe or hose as the first element", key="element.0.kind")
    inside = [station for station in stations if station.position <= pipe.length * (1 + 1e-9)]
    if len(inside) < 2:
        raise CaseError(
            f"the source's flow needs two stations in the first pipe (0 to {pipe.length:.4g} m); there are {len(inside)}", key="station"
        )
    count = min(station.harmonics.count for station in inside)
    waves = np.stack([station.harmonics.coefficients[1 : count + 1] for station in inside])
    places = np.array([station.position for station in inside])
    frequency = inside[0].harmonics.frequency
    omega = 2 * np.pi * frequency * np.arange(1, count + 1)
    medium = line.medium()
    values = {key: value for key, value in part(line.values, f"element.{first}").items() if key not in ("young_modulus", "wave_speed")}
    guess = float(np.real(pipe.wave_speed(medium)))  # type: ignore[attr-defined]
    errors = [station.harmonics.standard_error for station in inside]
    noise = None
    if all(error is not None for error in errors):
        noise = np.sqrt(np.mean([np.sum(np.asarray(error)[1 : count + 1] ** 2, axis=1) for error in errors], axis=0))
    fit = fit_stations(
        waves, places, line_constants=lambda c: pipe.line_constants(omega, medium, {**values, "wave_speed": c}), errors=noise, guess=guess, frequency=frequency,  # type: ignore[attr-defined]
    )  # fmt: skip
    flow = np.where(fit.usable, fit.flow, 0.0)
    refused = [word for word in fit.because if word]
    strong = np.abs(waves).max(axis=0) > 0.02 * np.abs(waves).max()
    remarks = [word for word, tall in zip(fit.because, strong, strict=True) if word and tall]
    said = [f"The source's flow was found from {len(inside)} stations in the first pipe, wave speed {fit.wave_speed:.5g} m/s"
            + (f" ± {fit.wave_speed_uncertainty:.2g} m/s (fitted)" if fit.wave_speed_uncertainty is not None else " (as stated: two stations cannot judge it)") + "."]  # fmt: skip
    if refused:
        said.append(f"{len(refused)} of {count} orders were left out because of the spacing" + (": " + "; ".join(remarks[:6]) if remarks else " (all of them small)") + ".")
    residual = fit.residual[np.isfinite(fit.residual) & strong]
    if residual.size:
        said.append(f"The stations disagree with plane waves in this pipe by {100 * float(np.median(residual)):.2g} % (median residual of the strong orders).")
    covariance = np.diag(np.concatenate([[0.0], np.repeat(np.where(fit.usable, fit.flow_error, 0.0) ** 2 / 2, 2)]))
    mean = line.mean_flow or 0.0
    harmonics = Harmonics(
        frequency, np.concatenate([[mean], flow]), covariance=covariance, degrees_of_freedom=inside[0].harmonics.degrees_of_freedom, unit="L/min"
    )
    return Driven(
        source=FlowSource(harmonics, model="measured"), model="measured", signal=inside[0].signal, cycles=inside[0].cycles, raw=harmonics,
        recording=inside[0].recording, remarks=tuple(said), fit=fit,
    )  # fmt: skip
