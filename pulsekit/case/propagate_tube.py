"""From the nominal answer of a wall-shear case to its intervals, bands and shares, by Monte Carlo."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..appraisal.distributions import Input, draw_inputs, is_positive, stream, wide_remarks
from ..appraisal.finding import Checks, Finding, Findings
from ..appraisal.harmonic_draws import draw_harmonics, principal_steps
from ..appraisal.intervals import SHARES_DEFINITION, interval, one_digit_fixed, shares
from ..errors import StoppedError
from ..fluids import sample_fluid
from ..tube.ensemble import Ensemble, propagate, velocity_indices
from ..tube.findings import peak_velocity
from ..tube.sections import radius_of
from .answer import Band, LeftOut
from .case import Case
from .measurement import Measurement

__all__ = ["PropagatedTube", "propagate_tube", "uncertain_inputs"]

SAMPLES, SEED = 10_000, 20260
_PART = 2500  # samples at a time: the curves of a part stay small
_RECTIFIED = (
    "time_averaged_wall_shear_stress", "peak_wall_shear_stress", "oscillatory_shear_index", "minimum_wall_shear_stress", "greatest_wall_shear_stress",
    "forward_wall_shear_stress", "backward_wall_shear_stress", "time_averaged_wall_shear_rate", "peak_wall_shear_rate", "peak_flow_rate",
    "minimum_flow_rate", "forward_flow_rate", "backward_flow_rate", "backward_fraction", "flow_pulsatility_index", "velocity_pulsatility_index",
    "peak_velocity", "pressure_gradient_amplitude", "peak_reynolds_number", "quasi_steady_shear_rate_of_mean_velocity",
    "quasi_steady_shear_rate_of_centreline_velocity",
)  # fmt: skip
_NOT_NEGATIVE = ("oscillatory_shear_index", "backward_wall_shear_stress", "forward_wall_shear_stress", "backward_flow_rate", "forward_flow_rate", "backward_fraction")
_LEAD = ("time_averaged_wall_shear_stress", "peak_wall_shear_stress", "oscillatory_shear_index")


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
    stated = samples if samples is not None else case.get("uncertainty.samples")
    count = int(stated or SAMPLES)
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
    rows = [_with_interval(finding, cloud, shifts, parts, bool(table)) for finding in findings]
    remarks = [*wide_remarks(inputs), *_words(rows, cloud, shifts, count, seed, stated)]
    remarks += _first_order(model, nominal, uncertain, measurement, nominal_run, cloud, instants)
    out = Findings(rows)
    time = np.arange(instants) * flow.mean_velocity.period / instants
    known = flow.mean_known
    return PropagatedTube(
        findings=out, checks=checks, bands={name: Band(time, *ends) for name, ends in bands.items()} if known and table else {},
        remarks=tuple(remarks), shares_definition=SHARES_DEFINITION, left_out=_left_out(model, inputs, nominal, nominal_run, measurement, instants),
        improve=_improve(out), samples=cloud, extras={"samples": count, "seed": seed, "inputs": uncertain, "columns": table, "identity": identity},
    )  # fmt: skip


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
    """By how much noise in the harmonics lifts rectified findings: the median of draws of the recording alone less the value without."""
    draws = draw_harmonics(measurement.raw, 1500, stream(seed, "bias"))
    if draws.strides[0] == 0:
        return {}
    found = model({key: np.full(draws.shape[0], value) for key, value in nominal.items()}, draws, bands=False, instants=instants).findings
    shifts = {}
    for name in _RECTIFIED:
        if name in found and np.isfinite(found[name]).all():
            shift = float(np.median(found[name])) - at[name]
            # A shift within the error of its own median is nothing that could be mended.
            if abs(shift) > 2.5 * 1.2533 * float(found[name].std()) / np.sqrt(draws.shape[0]):
                shifts[name] = shift
    return shifts


def _with_interval(
    finding: Finding, cloud: Mapping[str, NDArray[np.float64]], shifts: Mapping[str, float], parts: Mapping[str, Mapping[str, float]], any_input: bool
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
    return finding.replace(low=low, high=high, shares=parts.get(finding.name, {}))


def _words(
    rows: list[Finding], cloud: Mapping[str, NDArray[np.float64]], shifts: Mapping[str, float], count: int, seed: int, stated: Any
) -> list[str]:
    remarks = [
        f"Intervals: central 95 % of {count} Monte Carlo samples, seed {seed}; positive givens are log-normal with the stated mean and standard deviation, "
        "limits are rectangular, the harmonics a multivariate t; bands from the first "
        f"{min(count, _PART)} samples. The samples' extremes and rectified means differ from the exact ones by less than 1e-4 of the swing."
    ]
    loose = [name for name in _LEAD if name in cloud and not one_digit_fixed(cloud[name])]
    if loose:
        remarks.append(
            f"{count} samples do not fix the ends to one significant digit (JCGM 101, 7.9.2) for {', '.join(loose)}; ask for more "
            "(uncertainty.samples)."
        )
    for finding in rows:
        shift = shifts.get(finding.name)
        if shift and finding.name in _LEAD and finding.low is not None and finding.high is not None:
            width = finding.high - finding.low
            if width > 0 and abs(2 * shift) > 0.05 * width:
                remarks.append(
                    f"Noise lifts {finding.label.split(',')[0].lower()} by about {shift:.3g} {finding.unit}; the interval was moved by twice that (the samples carry "
                    "the noise once more), the value stands as computed."
                )
        if finding.value is not None and finding.low is not None and finding.high is not None:
            slack = 1e-9 * max(abs(finding.value), abs(finding.high - finding.low))
            if not finding.low - slack <= finding.value <= finding.high + slack:
                remarks.append(f"{finding.label}: the value lies outside its interval, because noise in the harmonics lifts it.")
    return remarks


def _first_order(
    model: _Model, nominal: Mapping[str, float], uncertain: Mapping[str, Input], measurement: Measurement, at: Mapping[str, float],
    cloud: Mapping[str, NDArray[np.float64]], instants: int,
) -> list[str]:  # fmt: skip
    """First-order (GUM) estimate by central differences beside the Monte Carlo one; a remark where they differ by over 20 %."""
    steps = principal_steps(measurement.raw)
    keys = list(uncertain)
    samples = 2 * (len(keys) + steps.shape[0])
    if samples == 0:
        return []
    values = {key: np.full(samples, value) for key, value in nominal.items()}
    raw = np.tile(np.asarray(measurement.raw.coefficients), (samples, 1))
    for place, key in enumerate(keys):
        spread = uncertain[key].given.standard_uncertainty
        # For a spread near the value the lower step would leave the positive side; the slope is taken closer in.
        step = min(spread, 0.1 * abs(nominal[key])) if uncertain[key].positive else spread
        values[key][2 * place] += step
        values[key][2 * place + 1] -= step
    for place, step_ in enumerate(steps):
        raw[2 * (len(keys) + place)] += step_
        raw[2 * (len(keys) + place) + 1] -= step_
    found = model(values, raw, bands=False, instants=instants).findings
    apart = []
    for name in _LEAD:
        halves = 0.5 * (found[name][0::2] - found[name][1::2])
        for place, key in enumerate(keys):
            spread = uncertain[key].given.standard_uncertainty
            used = min(spread, 0.1 * abs(nominal[key])) if uncertain[key].positive else spread
            halves[place] *= spread / used if used else 1.0
        first = float(np.sqrt(np.sum(halves**2)))
        good = cloud[name][np.isfinite(cloud[name])]
        full = float(0.5 * (np.quantile(good, 0.8413) - np.quantile(good, 0.1587))) if good.size else 0.0
        if full > 0 and abs(first / full - 1) > 0.2:
            apart.append(f"{name.replace('_', ' ')} (first order {first:.3g}, Monte Carlo {full:.3g}, SI)")
    if apart:
        return ["A first-order (GUM) standard uncertainty differs from the Monte Carlo one by more than 20 % for " + "; ".join(apart) + "."]
    return ["A first-order (GUM) estimate agrees with the Monte Carlo one within 20 % for the leading findings."]


def _left_out(
    model: _Model, inputs: Mapping[str, Input], nominal: Mapping[str, float], at: Mapping[str, float], measurement: Measurement, instants: int
) -> tuple[LeftOut, ...]:
    """Givens without a stated uncertainty, and what 5 % on each would add to the time-averaged wall shear."""
    rows = []
    # A change of 5 % of a temperature in kelvin means nothing: 1 K is used for it.
    open_keys = [key for key, entry in inputs.items() if not entry.given.stated and entry.given.value != 0 and entry.given.text != "tube"]
    if not open_keys:
        return ()
    values = {key: np.full(len(open_keys), value) for key, value in nominal.items()}
    for place, key in enumerate(open_keys):
        values[key][place] += 1.0 if inputs[key].given.dimension == "temperature" else 0.05 * nominal[key]
    raw = np.tile(np.asarray(measurement.raw.coefficients), (len(open_keys), 1))
    found = model(values, raw, bands=False, instants=instants).findings["time_averaged_wall_shear_stress"]
    for place, key in enumerate(open_keys):
        change = abs(float(found[place]) / at["time_averaged_wall_shear_stress"] - 1) if at["time_averaged_wall_shear_stress"] else 0.0
        size = "1 °C" if inputs[key].given.dimension == "temperature" else "5 %"
        rows.append(LeftOut(key, f"{key} ({size} more would change the time-averaged wall shear by {100 * change:.1f} %)"))
    return tuple(rows)


def _improve(findings: Findings) -> str:
    """Which input to measure better first, and what the interval would become."""
    lead = findings.get("time_averaged_wall_shear_stress")
    if lead is None or not lead.shares or lead.low is None or lead.high is None:
        return ""
    owned = {key: share for key, share in lead.shares.items() if key != "interactions"}
    if not owned:
        return ""
    key, share = max(owned.items(), key=lambda item: item[1])
    what = "record more cycles" if key == "recording" else f"measure {key} better"
    return (
        f"To narrow the interval of the time-averaged wall shear stress, {what} first: it owes {100 * share:.0f} % of the variance to it, and were it exact the "
        f"interval would be about {100 * np.sqrt(max(1 - share, 0.0)):.0f} % as wide."
    )
