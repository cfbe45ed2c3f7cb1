"""How far a number may be relied on: a fixed table of finding against check, and the worst check decides."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from .finding import Check, Checks, Findings

__all__ = ["TUBE_RELIANCE", "WAVE_RELIANCE", "depends_on", "with_reliance"]

#: Verdict of a check -> reliance of the findings that depend on it. An unknown is at most indicative.
_REACH = {"holds": "usable", "doubtful": "indicative", "unknown": "indicative", "fails": "not usable"}
_ORDER = ("usable", "indicative", "not usable")

_DATA = ("periodic", "drift", "cycle_closure", "resolved", "noise", "instrument_response")
_FLOW_DATA = ("periodic", "drift", "instrument_response", "noise")
_MODEL = ("laminar_mean", "laminar_peak", "stokes_layer", "developed", "developed_peak", "newtonian", "rigid_wall", "no_reflections", "straight",
          "axisymmetric", "correlation_range", "envelope_is_centreline", "sample_volume")  # fmt: skip
_MEAN_MODEL = ("laminar_mean", "developed", "newtonian", "straight", "axisymmetric", "correlation_range", "sample_volume")

_SHEAR = (*_DATA, *_MODEL)
_MEAN_SHEAR = ("periodic", "drift", *_MEAN_MODEL, "stokes_layer")
_FLOW = (*_FLOW_DATA, "sample_volume")
_FLOW_FROM_OTHER = (*_FLOW_DATA, "laminar_mean", "developed", "envelope_is_centreline", "axisymmetric", "no_reflections", "sample_volume")
_NUMBERS = ("correlation_range",)

#: Tube: finding -> checks on which it depends.
TUBE_RELIANCE: Mapping[str, tuple[str, ...]] = {
    **dict.fromkeys(
        (
            "time_averaged_wall_shear_stress", "peak_wall_shear_stress", "oscillatory_shear_index", "relative_residence_time",
            "minimum_wall_shear_stress", "greatest_wall_shear_stress", "forward_wall_shear_stress", "backward_wall_shear_stress",
            "time_of_peak_wall_shear", "time_averaged_wall_shear_rate", "peak_wall_shear_rate",
        ),
        _SHEAR,
    ),
    **dict.fromkeys(("mean_wall_shear_stress", "steady_wall_shear_stress"), _MEAN_SHEAR),
    **dict.fromkeys(("pressure_gradient_amplitude", "pumping_power_per_length"), _SHEAR),
    "mean_pressure_gradient": _MEAN_SHEAR,
    "peak_velocity": _SHEAR,
    **dict.fromkeys(("quasi_steady_shear_rate_of_mean_velocity", "quasi_steady_shear_rate_of_centreline_velocity"), _SHEAR),
    **dict.fromkeys(("mean_flow_rate", "volume_per_cycle"), ("periodic", "drift", "sample_volume")),
    **dict.fromkeys(
        ("peak_flow_rate", "minimum_flow_rate", "forward_flow_rate", "backward_flow_rate", "backward_fraction", "flow_pulsatility_index",
         "velocity_pulsatility_index", "velocity_resistive_index", "peak_reynolds_number"), _FLOW,
    ),
    "mean_reynolds_number": ("periodic", "drift", "correlation_range"),
    "womersley_number": _NUMBERS,
    "stokes_layer_thickness": _NUMBERS,
}  # fmt: skip

#: Findings of the flow itself, which rest on the model where the flow was not what was measured.
_FLOW_FINDINGS = (
    "mean_flow_rate", "volume_per_cycle", "peak_flow_rate", "minimum_flow_rate", "forward_flow_rate", "backward_flow_rate", "backward_fraction",
    "flow_pulsatility_index", "mean_reynolds_number", "peak_reynolds_number",
)  # fmt: skip

#: Line: words in a finding's name -> checks on which it depends; the first that fits.
WAVE_RELIANCE: tuple[tuple[str, tuple[str, ...]], ...] = (
    (
        "",
        (
            "source_model",
            "plane_waves",
            "linear",
            "termination",
            "wall",
            "friction",
            "cavitation",
            "cavitation_recorded",
            "resolved",
            "periodic",
            "speed",
        ),
    ),
)


def depends_on(finding: str, quantity: str = "flow_rate") -> tuple[str, ...]:
    """Names of the checks on which a tube's finding depends, for a measured quantity."""
    checks = TUBE_RELIANCE.get(finding, ())
    if finding in _FLOW_FINDINGS and quantity not in ("flow_rate", "mean_velocity"):
        checks = tuple(dict.fromkeys((*checks, *_FLOW_FROM_OTHER)))
    return checks


def with_reliance(findings: Findings, checks: Checks, depends: Mapping[str, Iterable[str]]) -> Findings:
    """Return the findings with reliance and its reason from the worst check on which each depends.

    A finding that does not exist stays as it is; one that is not usable loses its interval.

    Examples
    --------
    >>> from pulsekit.appraisal import Finding
    >>> rows = Findings([Finding(name="a", label="A", value=1.0, unit="", low=0.9, high=1.1)])
    >>> verdicts = Checks([Check(name="c", label="C", verdict="fails", because="It does not hold.")])
    >>> found = with_reliance(rows, verdicts, {"a": ["c"]})["a"]
    >>> found.reliance, found.low
    ('not usable', None)
    """
    rows = []
    for finding in findings:
        if finding.value is None:
            rows.append(finding)
            continue
        worst, reason = "usable", ""
        for name in depends.get(finding.name, ()):
            check = checks.get(name)
            if check is None:
                continue
            reach = _REACH[check.verdict]
            if _ORDER.index(reach) > _ORDER.index(worst):
                worst, reason = reach, f"{check.label}: {check.verdict}"
        if worst == "not usable":
            finding = finding.replace(low=None, high=None)
        rows.append(finding.replace(reliance=worst, because=reason or finding.because))
    return Findings(rows)


def worst_checks(checks: Checks) -> tuple[list[Check], list[Check], list[Check]]:
    """Return the checks that fail, are doubtful, and are unknown."""
    return tuple([check for check in checks if check.verdict == word] for word in ("fails", "doubtful", "unknown"))  # type: ignore[return-value]


_LINE_MODEL = ("source_model", "friction", "plane_waves", "linear", "wall", "termination", "cavitation")
_RECORDED = (
    "recorded_peak_to_peak",
    "recorded_peak_to_peak_999",
    "recorded_highest_pressure",
    "recorded_lowest_pressure",
    "asynchronous_share",
)
_NOT_OF_SOURCE = ("wave_speed", "first_resonance", "first_resonance_damping", "attenuation", "steady_pressure_drop")


def line_depends(findings: Iterable[object], checks: Checks) -> dict[str, tuple[str, ...]]:
    """Checks on which each finding of a line depends: the model's, those of its restrictors and dampers, and the stations'.

    What was recorded depends on no model; resonances, speeds and steady drops not on the source.
    """
    own = tuple(name for name in checks.names if name.startswith(("restrictor_", "damper_")))
    measured = tuple(name for name in checks.names if name.startswith(("mean_", "tapping_")) and checks[name].verdict != "unknown")
    table: dict[str, tuple[str, ...]] = {}
    for finding in findings:
        name = getattr(finding, "name", "")
        if name in _RECORDED:
            table[name] = ()
        elif name in _NOT_OF_SOURCE:
            table[name] = tuple(check for check in (*_LINE_MODEL, *own) if check not in ("source_model", "cavitation"))
        else:
            table[name] = (*_LINE_MODEL, *own, *measured)
    return table
