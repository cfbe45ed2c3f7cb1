"""The answer to a case: findings, checks, remarks, provenance, bands; and the numbers as its reader sees them."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..appraisal.finding import Check, Checks, Finding, Findings
from ..errors import InputError, UnitError
from ..quantities import convert, from_si, parse_unit, unit_dimension
from .case import Case

__all__ = ["Answer", "Band", "LeftOut", "set_outlet", "shown_findings"]


@dataclass(frozen=True, eq=False)
class Band:
    """A 95 % band over one cycle: time [s], low and high [SI], shape (K,) each."""

    time: NDArray[np.float64]
    low: NDArray[np.float64]
    high: NDArray[np.float64]


@dataclass(frozen=True)
class LeftOut:
    """A given without a stated uncertainty: it counts as exact, and what 5 % on it would add."""

    key: str
    sentence: str

    def __str__(self) -> str:
        return self.sentence


_OUTLETS: dict[str, Callable[..., Any]] = {}


def set_outlet(name: str, function: Callable[..., Any]) -> None:
    """Connect a way out (``"write"`` or ``"show"``) that lives on a higher floor, so that imports still point down."""
    _OUTLETS[name] = function


@dataclass(frozen=True, eq=False, kw_only=True)
class Answer:
    """All that `analyse` has to say about a case.

    Attributes
    ----------
    case : Case
    findings : Findings
    checks : Checks
    remarks : tuple of str
        Everything guessed, repaired, dropped or assumed.
    provenance : dict
        File, hash, versions, seed, samples, date.
    per_cycle : pandas.DataFrame
        Every used cycle's own values, units in the heads.
    bands : mapping of str to Band
        95 % bands of the curves; empty before propagation.
    flow : TubeFlow or None
    response : LineResponse or None
    signal, cycles, harmonics
        Of the measured quantity, on the way from the file to the flow.
    overall : str
        May the numbers be relied on, for what, and what would settle the doubt.
    units : mapping
        Dimension (or name of a finding) to the unit in which the reader sees it.
    """

    case: Case
    findings: Findings
    checks: Checks
    remarks: tuple[str, ...]
    provenance: Mapping[str, Any]
    per_cycle: Any
    units: Mapping[str, str]
    overall: str = ""
    bands: Mapping[str, Band] = field(default_factory=dict)
    flow: Any = None
    response: Any = None
    recording: Any = None
    signal: Any = None
    cycles: Any = None
    harmonics: Any = None
    shares_definition: str = ""
    left_out_inputs: Sequence[Any] = ()
    improve: str = ""
    samples: Mapping[str, Any] = field(default_factory=dict)
    extras: Mapping[str, Any] = field(default_factory=dict)

    @property
    def kind(self) -> str:
        """Of the case: ``"wall shear"`` or ``"pump line"``."""
        return self.case.kind

    def replace(self, **changes: Any) -> Answer:
        """Return a copy with some fields changed."""
        return replace(self, **changes)

    def write(self, folder: str | Path, **options: Any) -> Path:
        """Write report, JSON, tables, pictures, notebook and the case with its recording into a folder."""
        return Path(_outlet("write")(self, folder, **options))

    def _repr_html_(self) -> str:
        return str(_outlet("show")(self))

    def to_dict(self) -> dict[str, Any]:
        """Return what answer.json holds: strict JSON, SI, with the numbers as shown beside."""
        return {
            "kind": self.kind,
            "title": self.case.get("title"),
            "overall": self.overall,
            "findings": [_finding_dict(finding) for finding in self.findings],
            "checks": [_check_dict(check) for check in self.checks],
            "remarks": list(self.remarks),
            "left_out_inputs": [str(entry) for entry in self.left_out_inputs],
            "improve": self.improve,
            "shares_definition": self.shares_definition,
            "provenance": _plain(self.provenance),
            "units": dict(self.units),
        }

    def to_dataset(self, **options: Any) -> Any:
        """Return the curves over one cycle as a labelled ``xarray.Dataset`` in SI (see `dataset_of`)."""
        from .labelled import dataset_of

        return dataset_of(self, **options)

    def __repr__(self) -> str:
        verdicts = [check.verdict for check in self.checks]
        counted = ", ".join(f"{verdicts.count(word)} {word}" for word in ("holds", "doubtful", "fails", "unknown") if word in verdicts)
        return f"<Answer to {self.case!r}: {len(self.findings)} findings; checks: {counted}>"


def _outlet(name: str) -> Callable[..., Any]:
    if name not in _OUTLETS:
        raise InputError("the report part is not loaded; import pulsekit first", name=name)
    return _OUTLETS[name]


def _number(value: float | None) -> float | None:
    return None if value is None or not math.isfinite(value) else float(value)


def _finding_dict(finding: Finding) -> dict[str, Any]:
    row = {name: getattr(finding, name) for name in ("name", "label", "unit", "reliance", "because", "shown_unit")}
    for name in ("value", "low", "high", "shown_value", "shown_low", "shown_high"):
        row[name] = _number(getattr(finding, name))
    row["shares"] = {key: float(share) for key, share in finding.shares.items()}
    return row


def _check_dict(check: Check) -> dict[str, Any]:
    row = {name: getattr(check, name) for name in ("name", "label", "verdict", "because", "unit", "source")}
    return row | {"value": _number(check.value), "limit": _number(check.limit)}


def _plain(value: Any) -> Any:
    if isinstance(value, Mapping):
        return {str(key): _plain(entry) for key, entry in value.items()}
    if isinstance(value, (list, tuple)):
        return [_plain(entry) for entry in value]
    if isinstance(value, float):
        return _number(value)
    return value if isinstance(value, (str, int, bool)) or value is None else str(value)


def unit_for(name: str, si_unit: str, units: Mapping[str, str]) -> str:
    """Unit in which a finding is shown: by its own name, else by its dimension, else SI."""
    if name in units:
        return str(units[name])
    try:
        dimension = unit_dimension(si_unit) if si_unit else None
    except UnitError:
        dimension = None
    if dimension in (None, "frequency", "ratio"):
        return str(units.get("frequency", si_unit)) if si_unit == "Hz" else si_unit
    return str(units.get(str(dimension), si_unit))


def shown_findings(findings: Findings, units: Mapping[str, str]) -> Findings:
    """Return the findings with the numbers as a reader sees them: her unit, digits that match the interval."""
    return Findings(_shown(finding, units) for finding in findings)


def _shown(finding: Finding, units: Mapping[str, str]) -> Finding:
    unit = unit_for(finding.name, finding.unit, units)
    if finding.value is None:
        return finding.replace(shown_unit=unit, shown_value=None, shown_low=None, shown_high=None)
    numbers = [None if number is None else _converted(number, finding.unit, unit) for number in (finding.value, finding.low, finding.high)]
    places = _places(*numbers)
    value, low, high = (None if number is None else _rounded(number, places) for number in numbers)
    if finding.reliance == "not usable":
        low = high = None
    return finding.replace(shown_unit=unit, shown_value=value, shown_low=low, shown_high=high)


def _converted(value: float, si_unit: str, unit: str) -> float:
    if unit == si_unit:
        return value
    if unit_dimension(si_unit) is None:
        return float(convert(value, parse_unit(si_unit)[0], parse_unit(unit)[0]))
    return float(from_si(value, unit))


def _places(value: float | None, low: float | None, high: float | None) -> int:
    """Decimals for two significant digits of the half width; four significant digits where there is no interval."""
    ends = [end for end in (low, high) if end is not None]
    half = 0.0
    if len(ends) == 2:
        half = 0.5 * abs(ends[1] - ends[0])
    elif ends and value is not None:
        half = abs(ends[0] - value)
    if half > 0 and math.isfinite(half):
        return 1 - math.floor(math.log10(half))
    size = abs(value or 0.0)
    return 3 - math.floor(math.log10(size)) if size > 0 else 2


def _rounded(number: float, places: int) -> float:
    rounded = round(number, places)
    return rounded + 0.0  # no minus zero
