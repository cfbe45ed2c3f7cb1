"""What is said beside the intervals of a wall-shear case: how they were made, first order beside them, what they leave out, what to improve."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..appraisal.distributions import Input
from ..appraisal.finding import Finding, Findings
from ..appraisal.harmonic_draws import principal_steps
from ..appraisal.intervals import interval_error, one_digit_fixed
from .answer import LeftOut
from .measurement import Measurement

__all__ = ["LEADS", "first_order", "first_order_words", "improve", "interval_words", "lead_of", "left_out"]

LEADS = ("time_averaged_wall_shear_stress", "peak_wall_shear_stress", "oscillatory_shear_index")
_APART = 0.2  # relative difference of the two standard uncertainties that is remarked
_USUAL = 10_000
_FEW = 2000  # draws below which a remark says that they are few


def lead_of(findings: Findings) -> Finding | None:
    """The finding that the words are about: the time-averaged wall shear, or the pressure gradient's amplitude where no mean is known."""
    for name in ("time_averaged_wall_shear_stress", "pressure_gradient_amplitude"):
        found = findings.get(name)
        if found is not None and found.value is not None:
            return found
    return None


def _short(finding: Finding) -> str:
    return finding.label.split(",")[0].lower()


def interval_words(
    rows: Findings,
    cloud: Mapping[str, NDArray[np.float64]],
    shifts: Mapping[str, float],
    *,
    count: int,
    seed: int,
    part: int,
    uncertain: bool,
) -> list[str]:
    """Remarks on how the intervals were made, how well the samples fix them, and what noise does to them."""
    if not uncertain:
        return [
            "No given and no harmonic has a stated uncertainty: there is no interval to give. State what is known of the inputs (such as ± 5 %)."
        ]
    remarks = [
        f"Intervals: central 95 % of {count} Monte Carlo samples, seed {seed}; positive givens are log-normal with the stated mean and standard deviation, "
        f"limits are rectangular, the harmonics a multivariate t; bands are central too, from the first {min(count, part)} samples. "
        "The samples' extremes and rectified means differ from the exact ones by less than 1e-4 of the swing."
    ]
    remarks += _fixed_words(rows, cloud, count)
    for finding in rows:
        if finding.value is None or finding.low is None or finding.high is None:
            continue
        shift, width = shifts.get(finding.name, 0.0), finding.high - finding.low
        if shift and finding.name in LEADS and width > 0 and abs(2 * shift) > 0.05 * width:
            remarks.append(
                f"Noise lifts the {_short(finding)} by about {shift:.3g} {finding.unit}; its interval was moved by twice that (the samples carry the "
                "noise once more), the value stands as computed."
            )
        slack = 1e-9 * max(abs(finding.value), abs(width))
        if not finding.low - slack <= finding.value <= finding.high + slack:
            remarks.append(f"{finding.label}: the value lies outside its interval, because noise in the harmonics lifts it.")
    return remarks


def _fixed_words(rows: Findings, cloud: Mapping[str, NDArray[np.float64]], count: int) -> list[str]:
    """The numerical error of the ends, and whether it leaves one significant digit."""
    remarks = []
    lead = lead_of(rows)
    loose = [
        _short(row)
        for row in rows
        if row.name in LEADS and row.value is not None and row.name in cloud and not one_digit_fixed(cloud[row.name])
    ]
    digit = "not quite one" if loose else "one"
    if lead is not None and lead.name in cloud and lead.low is not None and lead.high is not None and count >= 100:
        low, high = interval_error(cloud[lead.name])
        width = lead.high - lead.low
        if width > 0:
            whose = f" for the {', '.join(loose)}" if loose else ""
            remarks.append(
                f"Numerical error of the interval of the {_short(lead)}: its ends are known to {100 * low / width:.1f} % and {100 * high / width:.1f} % of its "
                f"width (standard error, from order statistics); in the sense of JCGM 101, 7.9.2 that is {digit} significant digit{whose}."
            )
    if count < _USUAL and (loose or count < _FEW):
        remarks.append(
            f"{count} samples are few: the ends of the intervals change with the seed; {_USUAL} are usual (uncertainty.samples)."
        )
    return remarks


def first_order(
    model: Any, nominal: Mapping[str, float], uncertain: Mapping[str, Input], measurement: Measurement, instants: int
) -> dict[str, float]:
    """Standard uncertainty of every finding by the first-order law of propagation (JCGM 100, 5.1 and 5.2), by central differences."""
    steps = principal_steps(measurement.raw)
    keys = list(uncertain)
    samples = 2 * (len(keys) + steps.shape[0])
    if samples == 0:
        return {}
    values = {key: np.full(samples, value) for key, value in nominal.items()}
    raw = np.tile(np.asarray(measurement.raw.coefficients), (samples, 1))
    scale = np.ones(samples // 2)
    for place, key in enumerate(keys):
        spread = uncertain[key].given.standard_uncertainty
        # For a spread near the value the lower step would leave the positive side; the slope is taken closer in.
        step = min(spread, 0.1 * abs(nominal[key])) if uncertain[key].positive else spread
        values[key][2 * place] += step
        values[key][2 * place + 1] -= step
        scale[place] = spread / step
    for place, step_ in enumerate(steps):
        raw[2 * (len(keys) + place)] += step_
        raw[2 * (len(keys) + place) + 1] -= step_
    found = model(values, raw, bands=False, instants=instants).findings
    with np.errstate(invalid="ignore"):
        return {name: float(np.sqrt(np.sum((0.5 * (row[0::2] - row[1::2]) * scale) ** 2))) for name, row in found.items()}


def first_order_words(rows: Findings, first: Mapping[str, float], cloud: Mapping[str, NDArray[np.float64]]) -> list[str]:
    """A remark where first order and the samples (half of their central 68 %) differ by more than 20 %."""
    apart, others = [], []
    for finding in rows:
        samples = cloud.get(finding.name)
        if finding.value is None or samples is None or finding.name not in first or not np.isfinite(samples).all():
            continue
        full = float(0.5 * np.diff(np.quantile(samples, (0.1587, 0.8413)))[0])
        if not (full > 1e-9 * abs(finding.value) and abs(first[finding.name] / full - 1) > _APART):
            continue
        if finding.name in LEADS:
            apart.append(
                f"{_short(finding)} (first order {first[finding.name]:.3g} {finding.unit}, Monte Carlo {full:.3g} {finding.unit})".replace(
                    " ,", ","
                ).replace(" )", ")")
            )
        else:
            others.append(_short(finding))
    if not first:
        return []
    if not apart and not others:
        return ["A first-order (GUM) estimate agrees with the Monte Carlo one within 20 % for every finding."]
    rest = f"{len(others)} further findings" if apart and len(others) > 3 else ", ".join(others)
    said = "; ".join([*apart, *([rest] if rest else [])])
    return [
        f"A first-order (GUM) standard uncertainty differs from the Monte Carlo one by more than 20 % for {said}: the intervals are those of Monte Carlo."
    ]


def left_out(
    model: Any,
    inputs: Mapping[str, Input],
    nominal: Mapping[str, float],
    at: Mapping[str, float],
    measurement: Measurement,
    rows: Findings,
    instants: int,
) -> tuple[LeftOut, ...]:
    """Givens without a stated uncertainty, and what 5 % on each would add to the leading finding."""
    lead = lead_of(rows)
    open_keys = [
        key for key, entry in inputs.items()
        if not entry.given.stated and entry.given.value != 0 and entry.given.text != "tube" and not key.endswith(".measured_at")
    ]  # fmt: skip
    if not open_keys or lead is None:
        return ()
    values = {key: np.full(len(open_keys), value) for key, value in nominal.items()}
    for place, key in enumerate(open_keys):
        # A change of 5 % of a temperature in kelvin means nothing: 1 K is used for it.
        values[key][place] += 1.0 if inputs[key].given.dimension == "temperature" else 0.05 * nominal[key]
    raw = np.tile(np.asarray(measurement.raw.coefficients), (len(open_keys), 1))
    found = model(values, raw, bands=False, instants=instants).findings[lead.name]
    out = []
    for place, key in enumerate(open_keys):
        change = abs(float(found[place]) / at[lead.name] - 1) if at[lead.name] else 0.0
        if change < 1e-12 and key.endswith(".temperature"):
            continue  # as with a measured viscosity and density: it enters nothing
        size = "1 °C" if inputs[key].given.dimension == "temperature" else "5 %"
        out.append(LeftOut(key, f"{key} ({size} more would change the {_words_of(lead)} by {100 * change:.1f} %)"))
    return tuple(out)


def _words_of(lead: Finding) -> str:
    return "time-averaged wall shear" if lead.name.startswith("time") else "amplitude of the pressure gradient"


def improve(rows: Findings) -> str:
    """Which input to measure better first, and what the interval would become."""
    lead = lead_of(rows)
    if lead is None or not lead.shares or lead.low is None or lead.high is None:
        return ""
    owned = {key: share for key, share in lead.shares.items() if key != "interactions"}
    if not owned:
        return ""
    key, share = max(owned.items(), key=lambda item: item[1])
    what = "record more cycles" if key == "recording" else f"measure {key} better"
    if key == "fluid.correlation":
        what = "measure the viscosity itself, in place of its correlation (fluid.correlation),"
    return (
        f"To narrow the interval of the {_short(lead)}, {what} first: {100 * share:.0f} % of the variance is owed to it, and were it exact the "
        f"interval would be about {100 * np.sqrt(max(1 - share, 0.0)):.0f} % as wide."
    )
