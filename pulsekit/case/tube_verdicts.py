"""What a wall-shear case tells its checks, how its findings rest on them, and the one overall sentence."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

from ..appraisal.distributions import draw, stream
from ..appraisal.finding import Checks, Findings
from ..appraisal.reliance import depends_on, with_reliance
from ..fluids import flow_curve_of
from .case import Case
from .measurement import Measurement
from .propagate_tube import SEED

__all__ = ["overall_words", "reliant", "tube_context"]

_NEWTONIAN = ("water", "glycerol solution", "hydraulic oil")


_UNCERTAIN = ("distance_from_inlet", "bend_radius", "wall_motion")  # inputs of the checks that may carry an uncertainty of their own


def thinning_curve(kind: str, viscosity: float) -> tuple[Callable[[Any], Any] | None, str]:
    """Apparent viscosity [Pa s] of a shear-thinning kind of liquid against the shear rate [1/s], and its source.

    The published curve is scaled so that its limit at high rates is the viscosity used: that is the one which a correlation in haematocrit
    and temperature gives, and the curve tells how much thicker the liquid is at lower rates.
    """
    curve = flow_curve_of(kind)
    if curve is None:
        return None, ""
    scale = viscosity / float(curve.apparent_viscosity(1e9))
    return lambda rate: scale * curve.apparent_viscosity(rate), f"{curve.source}, scaled to the viscosity used at high shear rates"


_INSTRUMENT = ("low_pass", "natural_frequency")


def tube_context(case: Case, measurement: Measurement, flow: Any, samples: Mapping[str, Any] | None = None) -> dict[str, Any]:
    """Return what `tube_checks` may know of a case."""
    kind = str(case.get("fluid.kind") or "given")
    curve, source = thinning_curve(kind, flow.fluid.viscosity)
    return {
        "tube_length": case.value("tube.length"), "distance_from_inlet": case.value("tube.distance_from_inlet"),
        "bend_radius": case.value("tube.bend_radius"), "wall_motion": case.value("tube.wall_motion"), "axisymmetric": case.get("tube.axisymmetric"),
        "newtonian": curve, "newtonian_source": source, "check_samples": _check_samples(case, samples), "newtonian_by_kind": kind in _NEWTONIAN, "cycles": measurement.cycles, "harmonics": measurement.raw,
        "signal": measurement.gathered.signal, "quantity": str(case.get("recording.quantity")), "sample_volume": case.get("recording.sample_volume"),
        "antialias_filter": case.value("recording.antialias_filter"),
        "instrument_known": any(case.get(f"{section}.{name}") is not None for name in _INSTRUMENT for section in ("recording", *measurement.gathered.sections)),
        "wave_alone": case.get("recording.quantity") == "pressure", "samples": samples,
    }  # fmt: skip


def _check_samples(case: Case, samples: Mapping[str, Any] | None) -> dict[str, Any]:
    """Draws of the checks' own inputs where these are uncertain, as many as there are samples of the findings."""
    if not samples:
        return {}
    count = len(next(iter(samples.values())))
    seed = int(case.get("uncertainty.seed", SEED))
    found = {}
    for name in _UNCERTAIN:
        given = case.maybe(f"tube.{name}")
        if given is not None and given.standard_uncertainty > 0 and given.value > 0:
            found[name] = draw(given, stream(seed, f"tube.{name}"), count)
    return found


def reliant(findings: Findings, checks: Checks, quantity: str = "flow_rate") -> Findings:
    """Return the findings with their reliance."""
    return with_reliance(findings, checks, {finding.name: depends_on(finding.name, quantity) for finding in findings})


def overall_words(findings: Findings, checks: Checks) -> str:
    """May the wall shear be relied on, for what, and what would settle the doubt: one sentence or two."""
    lead = findings.get("time_averaged_wall_shear_stress")
    failing = [check for check in checks if check.verdict == "fails"]
    doubtful = [check for check in checks if check.verdict == "doubtful"]
    unknown = [check for check in checks if check.verdict == "unknown"]
    if lead is None or lead.value is None:
        return (
            f"The wall shear cannot be stated: {lead.because if lead else 'it was not computed.'} "
            "Findings that rest on the oscillating part alone stand in the table."
        )
    if failing:
        names = ", ".join(check.label.lower() for check in failing)
        return f"Do not rely on findings marked not usable: {names} fail{'s' if len(failing) == 1 else ''} its check. {failing[0].because}".replace(
            "fail its check", "fail their checks"
        )
    if doubtful:
        names = ", ".join(check.label.lower() for check in doubtful)
        return f"The numbers are indicative: in doubt {'is' if len(doubtful) == 1 else 'are'} {names}. To settle it first: {doubtful[0].because}"
    if unknown:
        names = ", ".join(check.label.lower() for check in unknown[:4]) + (" and others" if len(unknown) > 4 else "")
        return f"No assumption is seen to fail, but {len(unknown)} could not be checked ({names}); the numbers are indicative until the inputs named there are given."
    return "Every assumption holds for this case: the numbers may be relied on within their intervals, for a long straight tube."
