"""What a wall-shear case tells its checks, how its findings rest on them, and the one overall sentence."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from ..appraisal.finding import Checks, Findings
from ..appraisal.reliance import depends_on, with_reliance
from .case import Case
from .measurement import Measurement

__all__ = ["overall_words", "reliant", "tube_context"]

_NEWTONIAN = ("water", "glycerol solution", "hydraulic oil")


def carreau_yasuda_blood(shear_rate: float) -> float:
    """Apparent viscosity of blood [Pa s]: Carreau–Yasuda after Cho & Kensey 1991 (constants from memory)."""
    return 0.00345 + (0.056 - 0.00345) * (1 + (1.902 * shear_rate) ** 1.25) ** ((0.22 - 1) / 1.25)


_INSTRUMENT = ("low_pass", "natural_frequency")


def tube_context(case: Case, measurement: Measurement, flow: Any, samples: Mapping[str, Any] | None = None) -> dict[str, Any]:
    """Return what `tube_checks` may know of a case."""
    kind = str(case.get("fluid.kind") or "given")
    return {
        "tube_length": case.value("tube.length"), "distance_from_inlet": case.value("tube.distance_from_inlet"),
        "bend_radius": case.value("tube.bend_radius"), "wall_motion": case.value("tube.wall_motion"), "axisymmetric": case.get("tube.axisymmetric"),
        "newtonian": carreau_yasuda_blood if kind == "blood" else None,
        "newtonian_source": "Carreau–Yasuda curve of blood (from memory)" if kind == "blood" else "",
        "newtonian_by_kind": kind in _NEWTONIAN, "cycles": measurement.cycles, "harmonics": measurement.raw,
        "signal": measurement.gathered.signal, "quantity": str(case.get("recording.quantity")), "sample_volume": case.get("recording.sample_volume"),
        "antialias_filter": case.value("recording.antialias_filter"),
        "instrument_known": any(case.get(f"{section}.{name}") is not None for name in _INSTRUMENT for section in ("recording", *measurement.gathered.sections)),
        "wave_alone": case.get("recording.quantity") == "pressure", "samples": samples,
    }  # fmt: skip


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
        return (
            f"No assumption is seen to fail, but {len(unknown)} could not be checked ({names}); the numbers are indicative until the inputs named there are given."
        )
    return "Every assumption holds for this case: the numbers may be relied on within their intervals, for a long straight tube."
