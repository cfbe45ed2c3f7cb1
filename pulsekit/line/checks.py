"""The verdict on each assumption behind a line's response."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from ..appraisal.finding import Check, Checks
from .damper import GasDamper
from .elements import Pipe, Restrictor, _Conduit, part
from .response import LineResponse

__all__ = ["line_checks"]

_PLANE = 1.8412  # first zero of J1': cut-off of the first cross mode, k R


def _check(name: str, label: str, verdict: str, because: str, **more: Any) -> Check:
    return Check(name=name, label=label, verdict=verdict, because=because, **more)


def _friction(response: LineResponse) -> Check:
    line, medium = response.line, response.medium
    label = "Friction of the mean flow"
    if medium.mean_flow is None:
        return _check("friction", label, "unknown", "The mean flow is not known (operation.mean_flow): friction was taken as laminar.")
    found = [
        (float(np.ravel(element.reynolds(medium, part(response.values, f"element.{place}")))[0]), place)
        for place, element in enumerate(line.elements) if isinstance(element, _Conduit)
    ]  # fmt: skip
    worst, place = max(found)
    if worst < 2000:
        return _check(
            "friction", label, "holds", f"The largest mean Reynolds number is {worst:.0f} (element {place + 1}): friction per frequency is the exact laminar one.",
            value=worst, limit=2300.0, source="2300: common practice",
        )  # fmt: skip
    if worst < 4000:
        return _check(
            "friction", label, "doubtful",
            f"The mean Reynolds number of {worst:.0f} (element {place + 1}) lies between laminar and turbulent; the damping is uncertain there.",
            value=worst, limit=2300.0, source="2300: common practice",
        )  # fmt: skip
    return _check(
        "friction", label, "holds",
        f"The largest mean Reynolds number is {worst:.0f} (element {place + 1}): friction per frequency follows Vardy and Brown's turbulent model for smooth pipes.",
        value=worst, limit=2300.0, source="A. E. Vardy, J. M. B. Brown 2003 (from memory)",
    )  # fmt: skip


def _plane(response: LineResponse) -> Check:
    highest = response.frequency * response.count
    radius = max(element.radius for element in response.line.elements if isinstance(element, _Conduit))
    speed = _speeds(response)[0]
    limit = _PLANE * speed / (2 * np.pi * radius)
    verdict = "holds" if highest < 0.5 * limit else "doubtful" if highest < limit else "fails"
    return _check(
        "plane_waves", "Plane waves", verdict, f"The highest harmonic is {highest:.4g} Hz; the first cross mode of the widest bore begins at {limit:.4g} Hz.",
        value=highest, limit=limit, unit="Hz", source="cut-off k R = 1.841 (first zero of J1')",
    )  # fmt: skip


def _speeds(response: LineResponse) -> list[float]:
    return [
        float(np.ravel(element.wave_speed(response.medium, part(response.values, f"element.{place}")))[0])
        for place, element in enumerate(response.line.elements) if isinstance(element, _Conduit)
    ]  # fmt: skip


def _linear(response: LineResponse, swing: float) -> Check:
    speed = _speeds(response)[0]
    share = swing / (float(np.ravel(response.medium.density)[0]) * speed**2)
    area = min(element.area for element in response.line.elements if isinstance(element, _Conduit))
    mach = abs(response.mean_flow) / area / speed
    worst = max(share, mach)
    verdict = "holds" if worst < 0.01 else "doubtful" if worst < 0.05 else "fails"
    return _check(
        "linear", "Linear waves", verdict,
        f"The pulsation is {100 * share:.2g} % of rho c², the mean velocity {100 * mach:.2g} % of the wave speed; waves steepen or drift only when these are not small.",
        value=worst, limit=0.01, source="our allowance",
    )  # fmt: skip


def _cavitation(numbers: Mapping[str, Any], floors: Mapping[str, float]) -> list[Check]:
    label = "No cavitation, no release of gas"
    if "least_absolute_pressure" not in numbers:
        return [_check("cavitation", label, "unknown", "The mean pressure is not known; give operation.mean_pressure.")]
    least = float(np.ravel(numbers["least_absolute_pressure"])[0])
    if least <= 0:
        return [
            _check(
                "cavitation", label, "fails",
                f"The least pressure would be {least / 1e5:.3g} bar(a), which no liquid bears: column separation: real peaks can be far higher.",
                value=least, limit=0.0, unit="Pa", source="absolute zero",
            )
        ]  # fmt: skip
    if not floors:
        return [
            _check(
                "cavitation", label, "unknown",
                f"The least absolute pressure is {least / 1e5:.3g} bar(a); give fluid.vapour_pressure or gas_release_pressure (oil lets air out below about 0.5 to "
                "0.8 bar(a): trade) to compare.",
                value=least, unit="Pa",
            )
        ]  # fmt: skip
    name, floor = max(floors.items(), key=lambda item: item[1])
    verdict = "fails" if least < floor else "doubtful" if least < 1.5 * floor else "holds"
    return [
        _check(
            "cavitation", label, verdict,
            f"The least absolute pressure is {least / 1e5:.3g} bar(a), the {name.replace('_', ' ')} {floor / 1e5:.3g} bar(a)"
            + ("." if verdict != "fails" else ": the liquid would part or foam there, and the linear answer no longer holds."),
            value=least, limit=floor, unit="Pa", source="as stated, or vapour pressure of the liquid",
        )
    ]  # fmt: skip


def _ratings(response: LineResponse, numbers: Mapping[str, Any], highest: float | None) -> Check:
    label = "Highest pressure within ratings"
    named = [
        (limit, f"{what} of {element.name or element.kind} {place + 1}")
        for place, element in enumerate(response.line.elements)
        for what, limit in (("rating", element.rated_pressure), ("relief setting", element.relief_setting)) if limit is not None
    ]  # fmt: skip
    if not named:
        return _check("ratings", label, "unknown", "No rated_pressure or relief_setting of an element is stated.")
    if highest is None:
        return _check("ratings", label, "unknown", "The mean pressure is not known; give operation.mean_pressure.")
    limit, what = min(named)
    verdict = "fails" if highest > limit else "doubtful" if highest > 0.95 * limit else "holds"
    return _check(
        "ratings", label, verdict, f"The highest pressure (upper end of its interval, or as recorded) is {highest / 1e5:.4g} bar; the lowest limit is the {what}, "
        f"{limit / 1e5:.4g} bar.",
        value=highest, limit=limit, unit="Pa", source="ratings as stated, gauge",
    )  # fmt: skip


def _wall(response: LineResponse) -> Check:
    rigid = [place + 1 for place, element in enumerate(response.line.elements) if isinstance(element, Pipe) and not element.wall_given]
    if rigid:
        words = ", ".join(map(str, rigid))
        return _check(
            "wall", "Wall known", "doubtful",
            f"Of element {words} neither the wave speed nor the wall is given: the wall counts as rigid, and the wave speed is too high by some per cent.",
        )  # fmt: skip
    return _check("wall", "Wall known", "holds", "Every pipe has its wave speed or its wall.")


def _termination(response: LineResponse) -> Check:
    end = response.line.end.kind
    if end in ("closed", "open"):
        return _check("termination", "End known", "holds", f"The end is {end}.")
    if end == "matched":
        return _check(
            "termination", "End known", "doubtful",
            "A matched end sends nothing back; real ends seldom do, and what comes back makes resonances that this answer does not have.",
        )  # fmt: skip
    return _check("termination", "End known", "holds", f"The end is a stated {end}.")


def _restrictors(response: LineResponse) -> list[Check]:
    rows = []
    for prefix in response.amplitude_dependent:
        rows.append(
            _check(
                f"restrictor_{prefix.replace('.', '_')}", f"Ripple against mean flow at restrictor {prefix}", "doubtful",
                "The pulsating flow is larger than the mean flow there: its resistance was found by harmonic balance, and the answer holds for this amplitude only.",
                source="harmonic balance of dp = k q|q|",
            )
        )  # fmt: skip
    mean = response.mean_flow
    for place, element in enumerate(response.line.elements):
        prefix = f"element.{place}"
        if isinstance(element, Restrictor) and prefix not in response.amplitude_dependent:
            swing = float(np.sum(np.abs(np.ravel(response.states[place][1]))))
            share = swing / abs(mean) if mean else np.inf
            if response.medium.mean_flow is None:
                continue
            verdict = "holds" if share < 0.5 else "doubtful"
            rows.append(
                _check(
                    f"restrictor_element_{place}", f"Ripple against mean flow at restrictor {place + 1}", verdict,
                    f"The pulsating flow is at most {100 * share:.2g} % of the mean flow there; the law was linearised at the mean.", value=share, limit=0.5,
                    source="our allowance",
                )
            )  # fmt: skip
    return rows


def _dampers(response: LineResponse) -> list[Check]:
    rows = []
    for place, element in enumerate(response.line.elements):
        if not isinstance(element, GasDamper):
            continue
        values = part(response.values, f"element.{place}")
        label = f"Damper {place + 1} above its precharge"
        if "precharge" not in values:
            rows.append(
                _check(f"damper_{place}", label, "unknown", f"The precharge of damper {place + 1} is not stated: whether it works at the trough is not known.")
            )  # fmt: skip
            continue
        mean = float(response.node_pressures[place])
        wave = np.concatenate([[0.0], np.ravel(response.states[place][0])])
        course = np.real(wave @ np.exp(2j * np.pi * np.outer(np.arange(wave.size), np.arange(256)) / 256))
        trough = mean + float(course.min())
        precharge = float(np.ravel(values["precharge"])[0])
        verdict = "holds" if trough > precharge else "fails"
        rows.append(
            _check(
                f"damper_{place}", label, verdict,
                f"Mean {mean / 1e5:.4g} and trough {trough / 1e5:.4g} bar(a) against a precharge of {precharge / 1e5:.4g} bar(a)"
                + ("." if verdict == "holds" else ": the damper is closed for part of the cycle and does not work as computed."),
                value=trough, limit=precharge, unit="Pa",
            )
        )  # fmt: skip
    return rows


def _source(model: str) -> Check:
    label = "Source model"
    words = {
        "kinematic": ("doubtful", "The source is the pump's ideal kinematic flow: a lower bound of the ripple; no allowable level is reported as met from it."),
        "backflow": ("doubtful", "The source is kinematic flow with the backflow into the cylinders; valve and port dynamics and the pump's own impedance are left out."),
        "valves": ("doubtful", "The source is kinematic flow with valve lag and compression; valve dynamics are left out."),
        "flow trace": ("holds", "The source is a recorded flow."),
        "measured": ("holds", "The pressure was measured at a station; the source's own model is not needed."),
        "given": ("unknown", "How the source's flow was found is not stated."),
    }
    verdict, because = words.get(model, words["given"])
    return _check("source_model", label, verdict, because, source="ISO 10767-1:2015 measures a pump's own ripple and impedance")


def line_checks(
    response: LineResponse, numbers: Mapping[str, Any], *, source_model: str = "given", floors: Mapping[str, float] | None = None,
    highest: float | None = None, tappings: Sequence[tuple[str, float | None]] = (), extra: Sequence[Check] = (),
) -> Checks:  # fmt: skip
    """Return the verdicts for a line.

    Parameters
    ----------
    response : LineResponse
    numbers : mapping
        SI values of the findings.
    source_model : str
        ``kinematic``, ``backflow``, ``valves``, ``flow trace``, ``measured`` or ``given``.
    floors : mapping
        Absolute pressures that the liquid or the pump must not go below. [Pa]
    highest : float, optional
        Highest gauge pressure to compare with ratings. [Pa]
    tappings : sequence of (station, length)
        Length of each transducer's tapping [m] or None.
    extra : sequence of Check
        Checks on the recording.
    """
    swing = float(np.ravel(numbers["largest_peak_to_peak_pressure"])[0])
    rows = [_source(source_model), _friction(response), _plane(response), _linear(response, swing), *_cavitation(numbers, floors or {})]
    rows += [_ratings(response, numbers, highest), _wall(response), _termination(response), *_restrictors(response), *_dampers(response)]
    speed = _speeds(response)[0]
    for name, length in tappings:
        label = f"Tapping of station {name}"
        if length is None:
            rows.append(_check(f"tapping_{name}", label, "unknown", f"The tapping of station {name} is not stated (tapping_length): its own resonance is not known."))
            continue
        own = speed / (4 * length)
        highest_harmonic = response.frequency * response.count
        verdict = "holds" if own > 3 * highest_harmonic else "doubtful" if own > 1.2 * highest_harmonic else "fails"
        rows.append(
            _check(
                f"tapping_{name}", label, verdict, f"The tapping of {1e3 * length:.4g} mm resonates near {own:.4g} Hz; the highest harmonic used is {highest_harmonic:.4g} Hz.",
                value=own, limit=3 * highest_harmonic, unit="Hz", source="quarter wave; common practice",
            )
        )  # fmt: skip
    return Checks([*rows, *extra])
