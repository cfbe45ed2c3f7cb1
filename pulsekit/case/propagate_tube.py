"""From the nominal answer of a wall-shear case to its intervals, bands and shares, by Monte Carlo."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..appraisal.distributions import Input, draw_inputs, is_positive, stream, wide_remarks
from ..appraisal.finding import Checks, Finding, Findings
from ..appraisal.harmonic_draws import draw_harmonics, lift_of_noise, mirrored_draws
from ..appraisal.intervals import SHARES_DEFINITION, interval, interval_error, shares
from ..errors import InputError, StoppedError
from ..fluids import sample_fluid
from ..tube.ensemble import Ensemble, propagate, velocity_indices
from ..tube.findings import peak_velocity
from ..tube.sections import radius_of
from .answer import Band, LeftOut
from .case import Case
from .interval_words import first_order, first_order_words, improve, interval_words, left_out
from .measurement import Measurement

__all__ = ["PropagatedTube", "propagate_tube", "uncertain_inputs"]

SAMPLES, SEED = 10_000, 20260
_LEAST = 40  # samples below which 2.5 % is less than one of them
_PART = 2500  # samples at a time: the curves of a part stay small
_RECTIFIED = (
    "time_averaged_wall_shear_stress", "peak_wall_shear_stress", "oscillatory_shear_index", "minimum_wall_shear_stress", "greatest_wall_shear_stress",
    "forward_wall_shear_stress", "backward_wall_shear_stress", "time_averaged_wall_shear_rate", "peak_wall_shear_rate", "peak_flow_rate",
    "minimum_flow_rate", "forward_flow_rate", "backward_flow_rate", "backward_fraction", "flow_pulsatility_index", "velocity_pulsatility_index",
    "peak_velocity", "pressure_gradient_amplitude", "peak_reynolds_number", "quasi_steady_shear_rate_of_mean_velocity",
    "quasi_steady_shear_rate_of_centreline_velocity",
)  # fmt: skip
_NOT_NEGATIVE = (
    "oscillatory_shear_index",
    "backward_wall_shear_stress",
    "forward_wall_shear_stress",
    "backward_flow_rate",
    "forward_flow_rate",
    "backward_fraction",
)


@dataclass(frozen=True, eq=False, kw_only=True)
class PropagatedTube:
    """Findings with intervals and shares, bands, and what is to be said about them."""

    findings: Findings
    checks: Checks
    bands: Mapping[str, Band]
    remarks: tuple[str, ...]
    shares_definition: str
    left_out: tuple[LeftOut, ...]
    improve: str
    samples: Mapping[str, NDArray[np.float64]]
    extras: Mapping[str, Any]


def uncertain_inputs(case: Case, measurement: Measurement, flow: Any) -> dict[str, Input]:
    """Return dotted key -> input, for every given that enters the numbers, whether its uncertainty is stated or not."""
    inputs: dict[str, Input] = {}
    identity = {section: str(case.get(f"{section}.id") or "") for section in ("tube", "fluid", "recording")}

    def put(key: str, given: Any) -> None:
        section = key.partition(".")[0]
        own = identity.get(section)
        inputs[key] = Input(given, is_positive(given, key), f"{own}.{key}" if own else "")

    for name, given in flow.tube.givens.items():
        put(f"tube.{name}", given)
    for name, given in flow.fluid.givens.items():
        put(f"fluid.{name}", given)
    for key, given in measurement.givens.items():
        put(key, given)
    return inputs


@dataclass(frozen=True, eq=False)
class _Model:
    """The whole calculation over arrays of inputs."""

    measurement: Measurement
    flow: Any
    place: float

    def __call__(self, values: Mapping[str, Any], raw: NDArray[np.complex128], *, bands: bool, instants: int) -> Ensemble:
        samples = raw.shape[0]
        sizes = {name: values[f"tube.{name}"] for name in self.flow.tube.givens}
        radius = np.broadcast_to(np.asarray(radius_of(sizes), dtype=float), (samples,))
        density, viscosity, _ = sample_fluid(self.flow.fluid, {name: values[f"fluid.{name}"] for name in self.flow.fluid.givens})
        density, viscosity = (np.broadcast_to(np.asarray(v, dtype=float), (samples,)) for v in (density, viscosity))
        coefficients = self.measurement.coefficients(raw, {**values, "radius": radius, "density": density, "viscosity": viscosity})
        quantity = self.measurement.quantity
        measured = coefficients
        if quantity == "velocity_envelope":
            # The envelope's solution is nearly linear in the recording: samples ride on the exact one, harmonic by harmonic.
            quantity, coefficients = "mean_velocity", self._envelope(coefficients, radius, density, viscosity)
        made = propagate(
            quantity, coefficients, angular_frequency=self.flow.mean_velocity.angular_frequency, radius=radius, viscosity=viscosity, density=density,
            instants=instants, peak_place=self.place, bands=bands,
        )  # fmt: skip
        if measured is not coefficients:
            made = replace(made, findings={**made.findings, **velocity_indices(measured, instants)})
        return made

    def _envelope(self, coefficients: Any, radius: Any, density: Any, viscosity: Any) -> NDArray[np.complex128]:
        from ..exact.womersley import centreline_ratio

        order = np.sqrt(np.arange(coefficients.shape[1]))
        omega = self.flow.mean_velocity.angular_frequency
        first = radius * np.sqrt(omega * density / viscosity)
        own = self.flow.tube.length_scale * np.sqrt(omega * self.flow.fluid.density / self.flow.fluid.viscosity)
        ratio = centreline_ratio(first[:, None] * order) if np.ptp(first) else centreline_ratio(first[0] * order)
        known = self.flow.measured.coefficients
        return np.asarray((coefficients - known) / ratio + self.flow.mean_velocity.coefficients * centreline_ratio(own * order) / ratio)


def _joined(parts: list[Ensemble]) -> dict[str, NDArray[np.float64]]:
    return {name: np.concatenate([part.findings[name] for part in parts]) for name in parts[0].findings}


def _run(
    model: _Model, values: Mapping[str, NDArray[np.float64]], raw: NDArray[np.complex128], instants: int, progress: Any, stop: Any
) -> tuple[dict[str, NDArray[np.float64]], Mapping[str, Any]]:
    """All samples in parts; bands from the first part, a stated subset."""
    parts: list[Ensemble] = []
    samples = raw.shape[0]
    bands: Mapping[str, Any] = {}
    for start in range(0, samples, _PART):
        if stop is not None and stop():
            raise StoppedError("the propagation was stopped; the nominal answer stands")
        piece = slice(start, min(start + _PART, samples))
        part = model({key: array[piece] for key, array in values.items()}, raw[piece], bands=start == 0, instants=instants)
        bands = bands or part.bands
        parts.append(part)
        if progress is not None:
            progress(min(piece.stop / samples, 1.0))
    return _joined(parts), bands


def propagate_tube(
    case: Case, measurement: Measurement, flow: Any, findings: Findings, checks: Checks, *, samples: int | None = None, progress: Any = None,
    stop: Any = None, identities: Mapping[str, str] | None = None,
) -> PropagatedTube:  # fmt: skip
    """Return the findings of a case with intervals, shares and bands."""
    count = _stated_samples(case, samples)
    seed = int(case.get("uncertainty.seed", SEED))
    inputs = uncertain_inputs(case, measurement, flow)
    if identities:
        inputs = {key: entry._replace(identity=identities.get(key, entry.identity)) for key, entry in inputs.items()}
    uncertain = {key: entry for key, entry in inputs.items() if entry.given.standard_uncertainty > 0}
    nominal = {key: entry.given.value for key, entry in inputs.items()}
    values = {key: np.full(count, value) for key, value in nominal.items()} | draw_inputs(uncertain, count, seed)
    identity = str(case.get("recording.id") or measurement.gathered.recording.sha256 or "recording")
    identity = (identities or {}).get("recording", identity)
    raw = draw_harmonics(measurement.raw, count, stream(seed, identity))
    instants = max(256, 8 * measurement.raw.count)
    place = peak_velocity(flow)[1]
    model = _Model(measurement, flow, place)
    cloud, bands = _run(model, values, raw, instants, progress, stop)
    nominal_run = _nominal(model, nominal, measurement, instants)
    shifts = _bias(model, nominal, measurement, nominal_run, instants, seed)
    table = _columns(values, uncertain, raw)
    parts = shares(cloud, table)
    rows = Findings(_with_interval(finding, cloud, shifts, parts, bool(table)) for finding in findings)
    first = first_order(model, nominal, uncertain, measurement, instants)
    remarks = [
        *wide_remarks(inputs), *interval_words(rows, cloud, shifts, count=count, seed=seed, part=_PART, uncertain=bool(table)),
        *first_order_words(rows, first, cloud),
    ]  # fmt: skip
    time = np.arange(instants) * flow.mean_velocity.period / instants
    return PropagatedTube(
        findings=rows, checks=checks, bands={name: Band(time, *ends) for name, ends in bands.items()} if flow.mean_known and table else {},
        remarks=tuple(remarks), shares_definition=SHARES_DEFINITION, left_out=left_out(model, inputs, nominal, nominal_run, measurement, rows, instants),
        improve=improve(rows), samples=cloud,
        extras={
            "samples": count, "seed": seed, "inputs": uncertain, "columns": table, "identity": identity, "first_order": first,
            "interval_error": {row.name: interval_error(cloud[row.name]) for row in rows if row.low is not None and row.name in cloud},
        },
    )  # fmt: skip


def _stated_samples(case: Case, samples: int | None) -> int:
    """Number of samples asked for; refused where it cannot give an interval."""
    stated = samples if samples is not None else case.get("uncertainty.samples")
    if stated is None:
        return SAMPLES
    if stated != int(stated) or stated < _LEAST:
        raise InputError(
            f"uncertainty.samples = {stated} must be a whole number of at least {_LEAST}; {SAMPLES} are usual", name="uncertainty.samples", value=stated,
            allowed=f">= {_LEAST}",
        )  # fmt: skip
    return int(stated)


def _nominal(model: _Model, nominal: Mapping[str, float], measurement: Measurement, instants: int) -> dict[str, float]:
    raw = np.asarray(measurement.raw.coefficients)[None, :]
    one = model({key: np.array([value]) for key, value in nominal.items()}, raw, bands=False, instants=instants)
    return {name: float(array[0]) for name, array in one.findings.items()}


def _columns(values: Mapping[str, Any], uncertain: Mapping[str, Input], raw: NDArray[np.complex128]) -> dict[str, NDArray[np.float64]]:
    """Inputs of the shares: each uncertain given, and the recording's harmonics as one entry."""
    table = {key: values[key] for key in uncertain}
    if raw.strides[0] != 0:
        table["recording"] = np.concatenate([raw.real, raw.imag[:, 1:]], axis=1)
    return table


def _bias(
    model: _Model, nominal: Mapping[str, float], measurement: Measurement, at: Mapping[str, float], instants: int, seed: int
) -> dict[str, float]:
    """By how much noise in the harmonics lifts rectified findings, at the stated givens."""
    draws = mirrored_draws(measurement.raw, 750, stream(seed, "bias"))
    if not draws.size:
        return {}
    found = model({key: np.full(draws.shape[0], value) for key, value in nominal.items()}, draws, bands=False, instants=instants).findings
    lifts = {name: lift_of_noise(found[name], at[name]) for name in _RECTIFIED if name in found}
    return {name: lift for name, lift in lifts.items() if lift}


def _with_interval(
    finding: Finding,
    cloud: Mapping[str, NDArray[np.float64]],
    shifts: Mapping[str, float],
    parts: Mapping[str, Mapping[str, float]],
    any_input: bool,
) -> Finding:
    if finding.value is None or finding.name not in cloud or not any_input:
        return finding
    low, high = interval(cloud[finding.name])
    shift = shifts.get(finding.name, 0.0)
    # The samples carry the noise once more on top of that in the recording itself: both lifts are taken out.
    if low is not None:
        low -= 2 * shift
    if high is not None:
        high -= 2 * shift
    if finding.name in _NOT_NEGATIVE:
        low = None if low is None else max(low, 0.0)
        high = None if high is None else max(high, 0.0)
    if finding.name == "oscillatory_shear_index" and high is not None:
        high = min(high, 0.5)
    return finding.replace(low=low, high=high, shares=parts.get(finding.name, {}))
