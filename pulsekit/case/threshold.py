"""A stated threshold of wall shear against the worst cycle: exceeded, or not shown to be exceeded."""

from __future__ import annotations

from typing import Any

from ..appraisal.finding import Check, Finding, Findings
from ..quantities import to_si
from .case import Case

__all__ = ["THRESHOLD", "threshold_check", "threshold_words"]

THRESHOLD = "wall_shear_threshold"
_CAUTION = (
    "This holds for a long straight tube only: at inlets, tips, side holes, bends and narrowings the wall shear can be many times higher. It is no evidence of the "
    "absence of blood damage, clotting or disease, and no basis for treatment or release."
)


def threshold_check(case: Case, findings: Findings, per_cycle: Any) -> Check | None:
    """Compare the threshold with the upper end of the peak wall shear of the worst cycle; None where no threshold is stated.

    Parameters
    ----------
    case : WallShearCase
    findings : Findings
        With the interval of the peak, before a failing check takes it away.
    per_cycle : pandas.DataFrame
        Every cycle's own values; may be empty.

    Returns
    -------
    Check or None
        ``fails`` where the threshold is exceeded; ``unknown`` where that is not shown. It never holds: nothing here shows
        that a threshold is kept.
    """
    limit = case.value("tube.wall_shear_threshold")
    if limit is None:
        return None
    peak = findings["peak_wall_shear_stress"]
    if peak.value is None:
        return _row(
            "unknown",
            None,
            limit,
            f"The peak wall shear stress does not exist here, so that the threshold cannot be compared. {peak.because}",
        )
    worst, number = _worst_cycle(peak, per_cycle)
    # The givens and the scale enter every cycle alike: the interval of the mean cycle is carried over in proportion.
    top = worst if peak.high is None or peak.value == 0 else worst * max(peak.high / peak.value, 1.0)
    whose = "of the mean cycle" if number is None else f"of the worst cycle (number {number})"
    upper = (
        f"The peak wall shear stress {whose} is {worst:.3g} Pa; no interval was computed"
        if peak.high is None
        else f"The peak wall shear stress {whose} is {worst:.3g} Pa, its upper end {top:.3g} Pa (97.5 %, if the model holds)"
    )
    if top > limit:
        return _row("fails", top, limit, f"{upper}: the threshold of {limit:.3g} Pa is exceeded. {_CAUTION}")
    return _row("unknown", top, limit, f"{upper}: the threshold of {limit:.3g} Pa is not shown to be exceeded. {_CAUTION}")


def _row(verdict: str, value: float | None, limit: float, because: str) -> Check:
    return Check(
        name=THRESHOLD,
        label="Stated wall-shear threshold",
        verdict=verdict,
        value=value,
        limit=limit,
        unit="Pa",
        because=because,
        source="as stated in the case",
    )


def _worst_cycle(peak: Finding, per_cycle: Any) -> tuple[float, int | None]:
    """Largest peak over the cycles [Pa] with its cycle's number; that of the mean cycle where there is no table."""
    value = abs(float(peak.value or 0.0))
    heads = [] if per_cycle is None else [str(head) for head in per_cycle.columns if str(head).partition(" ")[0] == peak.name]
    if not heads or not len(per_cycle):
        return value, None
    unit = heads[0].partition("(")[2].rstrip(")")
    column = per_cycle[heads[0]].abs()
    if not column.notna().any():
        return value, None
    place = int(column.to_numpy(dtype=float, na_value=-1.0).argmax())
    largest = float(column.iloc[place])
    worst = to_si(f"{largest!r} {unit}", "pressure", peak.name) if unit and unit != "Pa" else largest
    # Noise in single cycles cancels in the mean: the mean cycle's peak may still be the larger one.
    return (worst, int(per_cycle["cycle"].iloc[place])) if worst >= value else (value, None)


def threshold_words(check: Check) -> str:
    """One sentence for the overall line."""
    said = "is exceeded" if check.verdict == "fails" else "is not shown to be exceeded"
    return f"The stated wall-shear threshold of {check.limit:.3g} Pa {said}."
