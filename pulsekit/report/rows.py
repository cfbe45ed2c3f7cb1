"""Rows of findings, checks and givens as words: the one place where numbers become text."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal
from typing import Any

from ..appraisal.finding import Check, Finding
from .palette import VERDICT_SHAPES

__all__ = ["CheckRow", "FindingRow", "check_rows", "decimals_of", "finding_rows", "number_text", "share_words"]


@dataclass(frozen=True)
class FindingRow:
    """A finding as text, ready for a table."""

    name: str
    label: str
    value: str
    low: str
    high: str
    interval: str
    unit: str
    biggest_share: str
    shares: tuple[tuple[str, str], ...]
    reliance: str
    because: str


@dataclass(frozen=True)
class CheckRow:
    """A check as text, ready for a table."""

    name: str
    label: str
    verdict: str
    shape: str
    because: str
    source: str


def decimals_of(*numbers: float | None) -> int:
    """Decimals needed to write all the (already rounded) numbers alike.

    >>> decimals_of(0.52, 0.4, 0.61), decimals_of(415.0, 380.0)
    (2, 0)
    """
    places = 0
    for number in numbers:
        if number is None or number == int(number):
            continue
        exponent = Decimal(repr(number)).as_tuple().exponent
        places = max(places, -int(exponent))
    return places


def number_text(number: float | None, decimals: int) -> str:
    """Write a rounded number with fixed decimals and a true minus sign; large and small ones with a power of ten.

    >>> number_text(-0.5, 2), number_text(None, 2), number_text(3.2e-9, 10)
    ('−0.50', '–', '3.2 × 10⁻⁹')
    """
    if number is None:
        return "–"
    if number != 0 and (abs(number) < 1e-4 or abs(number) >= 1e7):
        digits = max(len(Decimal(repr(number)).as_tuple().digits), 2)
        mantissa, power = f"{number:.{min(digits, 5) - 1}e}".split("e")
        raised = str(int(power)).translate(str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"))
        return f"{mantissa} × 10{raised}".replace("-", "−")
    return f"{number:.{decimals}f}".replace("-", "−")


def share_words(key: str, fraction: float) -> tuple[str, str]:
    """Name of an uncertain input and its share, as words."""
    name = "interactions" if key == "interactions" else key
    return name, "under 1 %" if fraction < 0.005 else f"{100 * fraction:.0f} %"


def _row(finding: Finding) -> FindingRow:
    decimals = decimals_of(finding.shown_value, finding.shown_low, finding.shown_high)
    low, high = number_text(finding.shown_low, decimals), number_text(finding.shown_high, decimals)
    if finding.reliance == "not usable" or (finding.shown_low is None and finding.shown_high is None):
        interval = "–"
    elif finding.shown_low is None:
        interval = f"up to {high}"
    elif finding.shown_high is None:
        interval = f"from {low}"
    else:
        interval = f"{low} to {high}"
    ordered = sorted(finding.shares.items(), key=lambda item: -item[1])
    shares = tuple(share_words(key, fraction) for key, fraction in ordered)
    return FindingRow(
        name=finding.name, label=finding.label, value=number_text(finding.shown_value, decimals), low=low, high=high, interval=interval,
        unit=finding.shown_unit, biggest_share=f"{shares[0][0]} {shares[0][1]}" if shares and interval != "–" else "", shares=shares,
        reliance=finding.reliance, because=finding.because,
    )  # fmt: skip


def finding_rows(findings: Iterable[Finding]) -> tuple[FindingRow, ...]:
    """Return the findings as text rows."""
    return tuple(_row(finding) for finding in findings)


def check_rows(checks: Iterable[Check]) -> tuple[CheckRow, ...]:
    """Return the checks as text rows, the worst first."""
    order = {"fails": 0, "doubtful": 1, "unknown": 2, "holds": 3}
    return tuple(
        CheckRow(check.name, check.label, check.verdict, VERDICT_SHAPES[check.verdict], check.because, check.source)
        for check in sorted(checks, key=lambda check: order[check.verdict])
    )


def interval_head(answer: Any) -> str:
    """Head of the interval column: says 'at least' while inputs are left out of the interval."""
    least = "at least " if getattr(answer, "left_out_inputs", ()) else ""
    return f"95 % interval ({least}this wide, if the model holds)" if least else "95 % interval (if the model holds)"
