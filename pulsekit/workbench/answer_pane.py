"""The answer as the right-hand pane shows it: rows of words, made from the same text rows as every other output."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from ..case import Answer
from ..quantities import pretty_unit
from ..report.rows import check_rows, decimals_of, finding_rows, interval_head, number_text

__all__ = ["answer_rows", "change_words"]


def answer_rows(
    answer: Answer | None, reference: Answer | None, *, full: bool, lead: Sequence[str], cautions: Sequence[str], comparison: Any = None
) -> dict[str, Any]:
    """Return findings, checks, remarks and cautions of an answer as JSON.

    ``comparison`` (of `pulsekit.case.compare`), if it is there, gives the changes their intervals. ``full`` tells whether intervals and shares belong to it; where they do not (yet), none is shown. Findings
    named in ``lead`` stand first and large.
    """
    if answer is None:
        return {"empty": True, "cautions": list(cautions)}
    head = interval_head(answer) if full else "95 % interval: not computed yet"
    changes = _changes(answer, reference, comparison)
    rows = []
    for row in finding_rows(answer.findings):
        rows.append(
            {
                "name": row.name, "label": row.label, "value": row.value, "unit": pretty_unit(row.unit) if row.unit else "",
                "interval": row.interval if full else "", "share": row.biggest_share if full else "",
                "shares": [list(pair) for pair in row.shares] if full else [], "reliance": row.reliance, "because": row.because,
                "change": changes.get(row.name, ""), "lead": row.name in lead,
            }
        )  # fmt: skip
    order = {name: place for place, name in enumerate(lead)}
    rows.sort(key=lambda row: order.get(str(row["name"]), len(order)))
    return {
        "empty": False,
        "title": str(answer.case.get("title") or ""),
        "overall": answer.overall,
        "interval_head": head,
        "findings": rows,
        "checks": [
            {"name": row.name, "label": row.label, "verdict": row.verdict, "shape": row.shape, "because": row.because, "source": row.source}
            for row in check_rows(answer.checks)
        ],
        "notes": [str(entry) for entry in answer.left_out_inputs] if full else [],
        "improve": answer.improve if full else "",
        "remarks": list(answer.remarks),
        "cautions": list(cautions),
        "reference": "" if reference is None else _name_of(reference, answer),
        "full": full,
    }


def _name_of(reference: Answer, answer: Answer) -> str:
    """What differs between the pinned case and this one, in a few words."""
    title = str(reference.case.get("title") or "pinned case")
    differing = _differing(reference.case.to_dict(), answer.case.to_dict())
    if not differing:
        return f"{title} (the same case)"
    more = f" and {len(differing) - 3} more" if len(differing) > 3 else ""
    return f"{title}; there: {', '.join(differing[:3])}{more}"


def _differing(old: Any, new: Any, prefix: str = "") -> list[str]:
    """Keys whose values differ, with the older value."""
    rows: list[str] = []
    for key in dict.fromkeys([*old, *new]):
        dotted = f"{prefix}{key}"
        before, after = old.get(key), new.get(key)
        if isinstance(before, dict) and isinstance(after, dict):
            rows += _differing(before, after, f"{dotted}.")
        elif before != after:
            rows.append(f"{dotted} = {before if before is not None else 'not stated'}")
    return rows


def _changes(answer: Answer, reference: Answer | None, comparison: Any) -> dict[str, str]:
    """Change of each finding against the reference in words; with its interval where the unknowns were drawn together."""
    if reference is None or reference is answer:
        return {}
    words = {}
    for finding in answer.findings:
        before = reference.findings.get(finding.name)
        if before is not None and finding.value is not None and before.value is not None:
            words[finding.name] = change_words(before.value, finding.value)
    return words | _compared(comparison)


def change_words(before: float, after: float) -> str:
    """A change in per cent of the reference, or a sign where that means nothing.

    >>> change_words(2.0, 2.1), change_words(2.0, 2.0), change_words(0.0, 1.0), change_words(-1.0, 1.0)
    ('+5.0 %', 'no change', 'was 0', 'was of other sign')
    """
    if before == after:
        return "no change"
    if before == 0:
        return "was 0"
    if before * after < 0:
        return "was of other sign"
    change = 100 * (after / before - 1)
    if abs(change) < 0.05:
        return "under 0.1 %"
    text = f"{change:+.0f} %" if abs(change) >= 20 else f"{change:+.1f} %"
    return text.replace("-", "−")


def _compared(comparison: Any) -> dict[str, str]:
    """Ratios with their intervals as changes in per cent; common unknowns were drawn once for both."""
    words = {}
    for finding in () if comparison is None else comparison.findings:
        if not finding.name.startswith("ratio_of_") or finding.value is None or finding.low is None or finding.high is None:
            continue
        values = [round(100 * (number - 1), 1) + 0.0 for number in (finding.value, finding.low, finding.high)]
        if all(abs(number) < 1e4 for number in values):
            places = decimals_of(*values)
            value, low, high = (number_text(number, places) for number in values)
            words[finding.name.removeprefix("ratio_of_")] = f"{value} % ({low} to {high})"
    return words
