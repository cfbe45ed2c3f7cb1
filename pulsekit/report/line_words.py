"""The words of a pump-line report: what was asked, what to do, the method, references, cautions."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from .drawing import shown, unit_of, unit_text
from .rows import finding_rows

__all__ = ["CAUTIONS", "LEAD_FINDINGS", "REFERENCES", "first_page", "method", "paste", "question"]

LEAD_FINDINGS = ("largest_peak_to_peak_pressure", "highest_pressure", "least_absolute_pressure", "allowable_ratio")

CAUTIONS = (
    "Pressurised systems and pulsation damage can injure: local codes, the maker's limits and a licensed engineer decide. Change anything only after "
    "isolating and bleeding both the liquid and the gas side.",
    "Estimates for engineering use. Shaking forces are acoustic only: the structure's own resonance can multiply them.",
    "What is computed is linear, for the stated line and its end; column separation, valve slam and fatigue are not in it.",
)

REFERENCES = (
    "J. R. Womersley, J. Physiol. 127 (1955) 553–563 (oscillating laminar flow in a tube; here as friction per frequency).",
    "W. Zielke, Frequency-dependent friction in transient pipe flow, J. Basic Eng. 90 (1968) 109–115.",
    "A. E. Vardy, J. M. B. Brown, Transient turbulent friction in smooth pipe flows, J. Sound Vib. 259 (2003) 1011–1036 (from memory).",
    "D. J. Korteweg, Ann. Phys. 241 (1878) 525 (wave speed in a pipe with a giving wall).",
    "A. B. Wood, A Textbook of Sound (1930) (liquid with free gas).",
    "ISO 10767-1:2015 and ISO 15086-2:2000 (measuring a pump's ripple and impedance; speed of sound in pipes).",
    "JCGM 101:2008 (propagation of distributions by Monte Carlo).",
)


def _row(answer: Any, name: str) -> str:
    """A finding as words: value, unit, interval, reliance."""
    found = {row.name: row for row in finding_rows(answer.findings)}.get(name)
    if found is None or found.value == "–":
        return "not known"
    words = f"{found.value} {unit_text(found.unit)}".strip()
    if found.interval != "–":
        words += f" (95 % interval {found.interval})"
    return words if found.reliance == "usable" else f"{words} — {found.reliance}: {found.because}"


def first_page(answer: Any, effects: Sequence[Any]) -> list[tuple[str, str]]:
    """What a plant manager can act on: pressures against limits, speeds to avoid, the worst place, the best change, what is not known."""
    extras, checks = answer.extras, answer.checks
    rows = [("In one sentence", answer.overall)]
    highest = f"{_row(answer, 'highest_pressure')} at {_row(answer, 'position_of_highest_pressure').split(' (')[0]}"
    ratings, cavitation = checks.get("ratings"), checks.get("cavitation")
    rows.append(("Highest pressure", f"{highest}. {ratings.because if ratings else ''}"))
    least = f"{_row(answer, 'least_absolute_pressure')} absolute at {_row(answer, 'position_of_least_pressure').split(' (')[0]}"
    rows.append(("Lowest pressure", f"{least}. {cavitation.because if cavitation else ''}"))
    rows.append(
        (
            "Worst place and order",
            f"{_row(answer, 'largest_peak_to_peak_pressure')} p-p at {_row(answer, 'position_of_largest_pressure').split(' (')[0]}; strongest order "
            f"{_row(answer, 'largest_order').split(' (')[0]} of the shaft.",
        )
    )
    if "allowable_ratio" in answer.findings:
        model = checks.get("source_model")
        met = "" if model is None or model.verdict == "holds" else " No level is reported as met from this source."
        rows.append(("Against the rule", f"Worst harmonic is {_row(answer, 'allowable_ratio')} times what the rule allows.{met} {extras['rule'].source}."))
    avoid = extras.get("speeds_to_avoid")
    if avoid is not None:
        words = ", ".join(f"{60 * low:.0f} to {60 * high:.0f} rpm" for low, high in avoid) or "none in the stated range"
        rows.append(("Speeds to avoid", f"{words} (wave speed varied by ±{100 * extras['wave_speed_varied_by']:.0f} %)."))
    elif "worst_peak_to_peak_within_10_percent" in answer.findings:
        rows.append(
            ("Near the stated speed", f"{_row(answer, 'worst_peak_to_peak_within_10_percent')} p-p at {_row(answer, 'worst_speed_within_10_percent')}, within ±10 % of it.")
        )
    helping = [effect for effect in effects if effect.ratio is not None and effect.ratio < 0.98]
    if helping:
        best = helping[0]
        rows.append(("Best of the changes tried", f"{best.name}: the largest pulsation becomes {100 * best.ratio:.0f} % of what it is (not yet a design)."))
    elif effects:
        rows.append(("Best of the changes tried", "None of them lowers the largest pulsation by more than 2 %."))
    unknown = [check.label.lower() for check in checks if check.verdict == "unknown"]
    rows.append(("What is not known", ", ".join(unknown) if unknown else "Nothing that the checks ask for."))
    rows.append(("Who must decide", "The plant's responsible engineer, by the local code and the maker's limits; this page is an estimate."))
    return rows


def question(answer: Any) -> list[tuple[str, str]]:
    """What was asked, as pairs of term and words."""
    response, line = answer.response, answer.response.line
    fluid = line.fluid
    pressure = "not stated" if line.mean_pressure is None else f"{line.mean_pressure / 1e5:.4g} bar(a) at 0 m"
    flow = shown(answer, response.mean_flow, "flow_rate")
    elements = "; ".join(
        f"{element.name or element.kind}" + (f" {shown(answer, element.length, 'length'):.4g} {unit_text(unit_of(answer, 'length'))}" if element.length else "")
        for element in line.elements
    )
    return [
        ("Source", str(answer.extras.get("source_model", ""))),
        ("Speed", f"{60 * response.frequency:.5g} rpm ({response.frequency:.4g} Hz), {response.count} orders"),
        ("Mean flow", f"{flow:.4g} {unit_text(unit_of(answer, 'flow_rate'))}"),
        ("Mean pressure", pressure),
        ("Line", f"{elements}; {line.end.kind} end"),
        ("Liquid", f"{fluid.name or fluid.kind}, density {fluid.density:.5g} kg/m³, viscosity {1e3 * fluid.viscosity:.4g} mPa·s"),
        ("Stations", ", ".join(f"{station.name} at {station.position:.4g} m" for station in answer.extras.get("stations") or ()) or "none"),
    ]


def method(answer: Any) -> list[str]:
    """How the numbers were made."""
    return [
        "The recordings were cut by the turns of the shaft and written as orders, x(t) = Re Σ Xₙ exp(i n ω t); what is not locked to the shaft is stated beside them.",
        "Per frequency a pipe has γ = (i ω/c) √N and Z_c = (ρ c/A) √N. In laminar flow N = I₀/I₂ of √i α exactly [1, 2]; in turbulent mean flow N follows Vardy and "
        "Brown [3]. The wave speed c is as stated, or from the liquid, its free gas and the wall [4, 5].",
        "Loads are carried from the end to the source as reflections, and pressure and flow from the source along the line, so that no growing exponential occurs. "
        "Restrictors are linearised at the mean flow; where their flow turns, by harmonic balance. Mean flow passes every end; waves ride on the steady pressure drop.",
        "Standard uncertainties of the givens and the covariance of the orders were propagated by Monte Carlo [7]. All pulsations are peak to peak (p-p).",
    ]


def paste(answer: Any) -> str:
    """A paragraph to paste, filled with this case's numbers."""
    return (
        f"The pressure pulsation along the line was computed per order of the shaft ({60 * answer.response.frequency:.4g} rpm, {answer.response.count} orders) with "
        f"frequency-dependent friction. The largest pulsation was {_row(answer, 'largest_peak_to_peak_pressure')} p-p at "
        f"{_row(answer, 'position_of_largest_pressure').split(' (')[0]}; the wave speed in the first pipe was {_row(answer, 'wave_speed')}. "
        f"Computed with PulseKit {answer.provenance.get('version', '')}."
    )
