"""From the response of a line at the stated givens to intervals, bands and shares, by Monte Carlo."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..appraisal.distributions import Input, draw_inputs, is_positive, stream, wide_remarks
from ..appraisal.harmonic_draws import draw_harmonics, lift_of_noise, mirrored_draws
from ..appraisal.intervals import SHARES_DEFINITION, interval, one_digit_fixed, shares
from ..errors import StoppedError
from ..fluids import sample_fluid
from ..line import FlowSource
from ..line.evaluate import LineNumbers, line_numbers
from ..line.states import along, march, start_state
from .answer import Band, LeftOut

__all__ = ["LineModel", "PropagatedLine", "propagate_line"]

SAMPLES, SEED = 4_000, 20260
_PART = 250


@dataclass(frozen=True, eq=False, kw_only=True)
class LineModel:
    """The whole calculation of a line over arrays of inputs."""

    line: Any
    response: Any
    driven: Any
    inputs: Mapping[str, Input]
    positions: NDArray[np.float64]
    watch: float
    rule: Any
    floor: float | None

    def __call__(self, values: Mapping[str, Any], raw: NDArray[np.complex128]) -> LineNumbers:
        """Numbers for samples: values (S,), raw (S, N + 1) of the source."""
        line, response = self.line, self.response
        column = {key: np.asarray(value, float).reshape(-1, 1) for key, value in values.items()}
        fluid = {name: column[f"fluid.{name}"] for name in line.fluid.givens if f"fluid.{name}" in column}
        density, viscosity, modulus = sample_fluid(line.fluid, fluid)
        changes: dict[str, Any] = {
            "density": density,
            "viscosity": viscosity,
            "bulk_modulus": modulus if modulus is not None else line.fluid.bulk_modulus,
        }
        for key, name in (
            ("fluid.gas_fraction_at_atmosphere", "gas_at_atmosphere"),
            ("fluid.gas_fraction_at_line_pressure", "gas_at_line_pressure"),
        ):
            if key in column:
                changes[name] = column[key]
        if "operation.mean_pressure" in column:
            changes["pressure"] = column["operation.mean_pressure"]
        mean = response.medium.mean_flow
        flow = column.get("operation.mean_flow", mean)
        medium = line.medium(mean_flow=flow, **changes) if flow is not None else line.medium(**changes)
        numbers = {**response.values, **{key: value for key, value in column.items() if key.startswith(("element.", "end."))}}
        omega = response.omega
        loads = line.loads(omega, medium, numbers)
        waves = np.asarray(raw)[:, 1:]
        for key in values:
            if key.endswith("scale_uncertainty"):
                waves = waves * column[key]
        if isinstance(self.driven.source, FlowSource):
            if self.driven.model in ("kinematic", "backflow", "valves") and "operation.mean_flow" in column and mean:
                waves = waves * (column["operation.mean_flow"] / mean)
            start = start_state(loads[0], waves, self.driven.source.admittance(omega / (2 * np.pi)))
        else:
            unit = march(line, omega, medium, numbers, loads, (loads[0].pressure, loads[0].flow))
            factor = waves / along(line, omega, medium, numbers, loads, unit, [self.driven.source.station])[0][0]
            start = (loads[0].pressure * factor, loads[0].flow * factor)
        states = march(line, omega, medium, numbers, loads, start)
        samples = waves.shape[0]
        base = values.get("operation.mean_pressure")
        if base is None and line.mean_pressure is not None:
            base = np.full(samples, line.mean_pressure)
        return line_numbers(
            line, omega, medium, numbers, loads, [tuple(np.broadcast_to(x, (samples, omega.size)) for x in state) for state in states], self.positions,
            watch=self.watch, ambient=line.ambient, base_pressure=base, mean_flow=0.0 if flow is None else flow, rule=self.rule, floor=self.floor,
        )  # fmt: skip


@dataclass(frozen=True, eq=False, kw_only=True)
class PropagatedLine:
    """Intervals and shares by finding, bands, and what is to be said."""

    intervals: Mapping[str, tuple[float | None, float | None]]
    shares: Mapping[str, Mapping[str, float]]
    bands: Mapping[str, Band]
    remarks: tuple[str, ...]
    left_out: tuple[LeftOut, ...]
    improve: str
    samples: Mapping[str, NDArray[np.float64]]
    extras: Mapping[str, Any]
    shares_definition: str = SHARES_DEFINITION


def propagate_line(
    case: Any, model: LineModel, *, samples: int | None = None, progress: Any = None, stop: Any = None, identities: Mapping[str, str] | None = None
) -> PropagatedLine:  # fmt: skip
    """Return intervals, shares and bands of a line's findings; ``identities`` name streams of random numbers (see `compare`)."""
    count = int(samples if samples is not None else case.get("uncertainty.samples") or SAMPLES)
    seed = int(case.get("uncertainty.seed", SEED))
    inputs = model.inputs
    if identities:
        inputs = {key: entry._replace(identity=identities.get(key, entry.identity)) for key, entry in inputs.items()}
    uncertain = {key: entry for key, entry in inputs.items() if entry.given.standard_uncertainty > 0}
    values = {key: np.full(count, entry.given.value) for key, entry in inputs.items()} | draw_inputs(uncertain, count, seed)
    identity = str(model.driven.recording.sha256) if model.driven.recording is not None else "recording"
    identity = (identities or {}).get("recording", identity)
    raw = draw_harmonics(model.driven.source.harmonics, count, stream(seed, identity))
    parts: list[LineNumbers] = []
    for first in range(0, count, _PART):
        if stop is not None and stop():
            raise StoppedError("the propagation was stopped; the nominal answer stands")
        piece = slice(first, min(first + _PART, count))
        parts.append(model({key: array[piece] for key, array in values.items()}, raw[piece]))
        if progress is not None:
            progress(piece.stop / count)
    cloud = {name: np.concatenate([part.findings[name] for part in parts]) for name in parts[0].findings}
    table = {key: values[key] for key in uncertain}
    if raw.strides[0] != 0:
        table["recording"] = np.concatenate([raw.real, raw.imag[:, 1:]], axis=1)
    shifts = _bias(model, raw, seed)
    ends = {name: _moved(interval(array), shifts.get(name, 0.0)) for name, array in cloud.items()} if table else {}
    envelope = np.concatenate([part.envelope for part in parts[:10]])
    course = np.concatenate([part.course for part in parts[:10]])
    period = 1 / model.response.frequency
    bands = {}
    if table:
        low, high = np.quantile(envelope, (0.025, 0.975), axis=0)
        bands["envelope"] = Band(model.positions, low, high)
        low, high = np.quantile(course, (0.025, 0.975), axis=0)
        bands["pressure"] = Band(np.arange(course.shape[1]) * period / course.shape[1], low, high)
    parts_of = shares(cloud, table) if table else {}
    loose = [name for name in ("largest_peak_to_peak_pressure", "highest_pressure") if name in cloud and not one_digit_fixed(cloud[name])]
    return PropagatedLine(
        intervals=ends, shares=parts_of, bands=bands,
        remarks=(
            *wide_remarks(inputs),
            f"Intervals: central 95 % of {count} Monte Carlo samples, seed {seed}; positive givens are log-normal with the stated mean and standard deviation, "
            f"limits are rectangular; bands from the first {envelope.shape[0]} samples, on {model.positions.size} positions.",
            *_bias_words(shifts, cloud),
            *(f"{count} samples do not fix the ends of {name} to one significant digit (JCGM 101, 7.9.2); ask for more (uncertainty.samples)." for name in loose),
        ),
        left_out=_left_out(model), improve=_improve(parts_of), samples=cloud,
        extras={"samples": count, "seed": seed, "inputs": uncertain, "columns": table, "identity": identity},
    )  # fmt: skip


_RECTIFIED = (
    "largest_peak_to_peak_pressure", "peak_to_peak_pressure_at_source", "peak_to_peak_pressure_at_end", "peak_to_peak_flow_at_source", "largest_harmonic_peak_to_peak",
    "allowable_ratio", "highest_pressure", "least_absolute_pressure", "margin_to_cavitation", "largest_wall_shear_amplitude", "largest_shaking_force",
)  # fmt: skip


def _bias(model: LineModel, raw: NDArray[np.complex128], seed: int) -> dict[str, float]:
    """By how much noise in the recorded harmonics lifts peaks: the median of draws of the recording alone less the value without."""
    if raw.strides[0] == 0:
        return {}
    draws = mirrored_draws(model.driven.source.harmonics, 200, stream(seed, "bias"))
    if not draws.size:
        return {}
    estimate = np.asarray(model.driven.source.harmonics.coefficients)[None, :]
    nominal = {key: entry.given.value for key, entry in model.inputs.items()}
    found = model({key: np.full(draws.shape[0], value) for key, value in nominal.items()}, draws).findings
    at = model({key: np.array([value]) for key, value in nominal.items()}, estimate).findings
    lifts = {name: lift_of_noise(found[name], float(at[name][0])) for name in _RECTIFIED if name in found}
    return {name: lift for name, lift in lifts.items() if lift}


def _bias_words(shifts: Mapping[str, float], cloud: Mapping[str, NDArray[np.float64]]) -> list[str]:
    shift = shifts.get("largest_peak_to_peak_pressure", 0.0)
    if abs(shift) < 0.1 * float(np.std(cloud["largest_peak_to_peak_pressure"])):
        return []
    return [
        f"Noise in the recorded orders lifts the largest pulsation by about {shift:.3g} Pa; its interval was moved by twice that, the value stands as computed."
    ]


def _moved(ends: tuple[float | None, float | None], shift: float) -> tuple[float | None, float | None]:
    """The samples carry the noise once more on top of that in the recording itself: both lifts are taken out of the interval."""
    low, high = ends
    return (None if low is None else low - 2 * shift), (None if high is None else high - 2 * shift)


def _left_out(model: LineModel) -> tuple[LeftOut, ...]:
    """Givens without a stated uncertainty, and what 5 % on each would add to the largest pulsation."""
    keys = [
        key for key, entry in model.inputs.items()
        if not entry.given.stated and entry.given.value != 0 and not key.endswith(("measured_at", "precharge_temperature"))
    ]  # fmt: skip
    if not keys:
        return ()
    size = len(keys) + 1
    values = {key: np.full(size, entry.given.value) for key, entry in model.inputs.items()}
    for place, key in enumerate(keys):
        values[key][place] += 1.0 if model.inputs[key].given.dimension == "temperature" else 0.05 * model.inputs[key].given.value
    raw = np.tile(np.asarray(model.driven.source.harmonics.coefficients), (size, 1))
    found = model(values, raw).findings["largest_peak_to_peak_pressure"]
    rows = []
    for place, key in enumerate(keys):
        change = abs(float(found[place] / found[-1]) - 1) if found[-1] else 0.0
        step = "1 °C" if model.inputs[key].given.dimension == "temperature" else "5 %"
        rows.append(LeftOut(key, f"{key} ({step} more would change the largest pulsation by {100 * change:.1f} %)"))
    return tuple(rows)


def _improve(parts: Mapping[str, Mapping[str, float]]) -> str:
    owned = {key: share for key, share in parts.get("largest_peak_to_peak_pressure", {}).items() if key != "interactions"}
    if not owned:
        return ""
    key, share = max(owned.items(), key=lambda item: item[1])
    what = "record more turns" if key == "recording" else f"measure {key} better"
    return (
        f"To narrow the interval of the largest pulsation, {what} first: it owes {100 * share:.0f} % of the variance to it, and were it exact the interval would "
        f"be about {100 * np.sqrt(max(1 - share, 0.0)):.0f} % as wide."
    )


def line_inputs(case: Any, line: Any, driven: Any, mean_pressure: Any) -> dict[str, Input]:
    """Dotted key -> input of every given that enters a line's numbers."""
    inputs: dict[str, Input] = {}

    def put(key: str, given: Any, identity: str = "") -> None:
        inputs[key] = Input(given, is_positive(given, key), identity)

    for key, given in line.givens.items():
        section = ".".join(key.split(".")[:2])
        own = str(case.get(f"{section}.id") or "")
        put(key, given, f"{own}.{key.rpartition('.')[2]}" if own else "")
    for name, given in line.fluid.givens.items():
        if name != "pressure":
            put(f"fluid.{name}", given)
    for name in ("gas_fraction_at_atmosphere", "gas_fraction_at_line_pressure"):
        given = case.maybe(f"fluid.{name}", "ratio")
        if given is not None and given.value > 0:
            put(f"fluid.{name}", given)
    flow = case.maybe("operation.mean_flow")
    if flow is not None:
        put("operation.mean_flow", flow)
    if mean_pressure is not None:
        put("operation.mean_pressure", mean_pressure)
    if driven.scale is not None:
        key, given = driven.scale
        from ..quantities import Given

        put(key, Given(value=1.0, standard_uncertainty=given.value, stated=True, text=f"1 ± {given.value:g}"))
    return inputs
