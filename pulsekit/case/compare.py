"""Two answers compared: differences and ratios whose common unknowns are drawn once for both."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..appraisal.finding import RELIANCES, Finding, Findings
from ..appraisal.intervals import interval, shares
from ..errors import InputError
from .analyse import analyse
from .answer import Answer, shown_findings
from .workspace import Workspace

__all__ = ["Comparison", "common_inputs", "compare"]


@dataclass(frozen=True, eq=False, kw_only=True)
class Comparison:
    """What changes from a reference to an answer.

    Attributes
    ----------
    findings : Findings
        ``change_of_X`` (answer minus reference) and ``ratio_of_X`` (answer over reference) for each finding X.
    common : tuple of str
        Dotted keys of the givens that were drawn once for both.
    remarks : tuple of str
    """

    findings: Findings
    common: tuple[str, ...]
    remarks: tuple[str, ...] = field(default=())

    def __repr__(self) -> str:
        return f"<Comparison: {len(self.findings)} findings, {len(self.common)} givens in common>"


def common_inputs(answer: Answer, reference: Answer) -> tuple[str, ...]:
    """Keys of the uncertain givens that two answers share: of the same stated ``id``, or equal where no ids differ."""
    mine, other = answer.extras.get("inputs", {}), reference.extras.get("inputs", {})
    common = []
    for key, entry in mine.items():
        if key not in other:
            continue
        own, theirs = _id_of(answer, key), _id_of(reference, key)
        if own or theirs:
            shared = own == theirs
        else:
            shared = entry.given.value == other[key].given.value and entry.given.standard_uncertainty == other[key].given.standard_uncertainty
            # The error of a correlation is common only to liquids made by the same one.
            if key.endswith("correlation"):
                shared = shared and answer.case.get("fluid.kind") == reference.case.get("fluid.kind")
        if shared:
            common.append(key)
    return tuple(common)


def _id_of(answer: Answer, key: str) -> str:
    """The id of the table in which a key stands."""
    return str(answer.case.get(f"{key.rpartition('.')[0]}.id") or "")


def _same_recording(answer: Answer, reference: Answer) -> bool:
    """Whether both rest on the same harmonics of the same file."""
    one, other = answer.harmonics, reference.harmonics
    if one is None or other is None or one.count != other.count:
        return False
    return np.array_equal(one.coefficients, other.coefficients) and answer.provenance.get("sha256") == reference.provenance.get("sha256")


def compare(answer: Answer, reference: Answer, *, workspace: Workspace | None = None) -> Comparison:
    """Compare an answer with a reference, so that errors common to both cancel as they do in reality.

    The reference is sampled again with the answer's seed and number of samples: givens in common (of the same
    ``id``, or all that are equal) take the same draws, all others their own.

    Parameters
    ----------
    answer, reference : Answer
        Of the same kind. Without intervals (``nominal_only``) the comparison has none either.
    workspace : Workspace, optional

    Returns
    -------
    Comparison

    Raises
    ------
    InputError
        If the two are not of one kind.

    Examples
    --------
    >>> import tempfile, pathlib
    >>> from pulsekit.case import WallShearCase
    >>> folder = pathlib.Path(tempfile.mkdtemp())
    >>> rows = "".join(f"{k / 100},{400 + 300 * (k % 100 < 30)}\\n" for k in range(500))
    >>> _ = (folder / "run.csv").write_text("time (s),flow (mL/min)\\n" + rows)
    >>> one = WallShearCase(
    ...     recording={"file": "run.csv", "quantity": "flow_rate"}, cycles={"period": "1 s"}, tube={"radius": "3 mm ± 5 %"},
    ...     fluid={"density": "1060 kg/m^3", "viscosity": "3.5 mPa*s"}, folder=folder)
    >>> thicker = analyse(one.with_value("fluid.viscosity", "4.2 mPa*s"), samples=500)
    >>> ratio = compare(thicker, analyse(one, samples=500)).findings["ratio_of_steady_wall_shear_stress"]
    >>> round(ratio.value, 6), ratio.high - ratio.low < 1e-9
    (1.2, True)
    """
    if answer.kind != reference.kind:
        raise InputError(f"an answer on a {answer.kind} cannot be compared with one on a {reference.kind}", name="reference")
    common = common_inputs(answer, reference)
    again, remarks = _drawn_together(answer, reference, common, workspace)
    mine = answer.samples if again is not None else {}
    theirs = again.samples if again is not None else {}
    table = {} if again is None else _columns(answer, again, common)
    rows: list[Finding] = []
    clouds: dict[str, NDArray[np.float64]] = {}
    for finding in answer.findings:
        if finding.name not in reference.findings:
            continue
        other = reference.findings[finding.name]
        for row, cloud in _pair(finding, other, mine.get(finding.name), theirs.get(finding.name)):
            rows.append(row)
            if cloud is not None:
                clouds[row.name] = cloud
    parts = shares(clouds, table) if table else {}
    found = Findings(row.replace(shares=parts.get(row.name, {})) for row in rows)
    return Comparison(findings=shown_findings(found, _units(answer)), common=common, remarks=tuple(remarks))


def _units(answer: Answer) -> dict[str, str]:
    """The reader's units; a change of a finding is shown like the finding."""
    named = {f"change_of_{name}": unit for name, unit in answer.units.items()}
    return dict(answer.units) | named


def _drawn_together(
    answer: Answer, reference: Answer, common: tuple[str, ...], workspace: Workspace | None
) -> tuple[Answer | None, list[str]]:
    """The reference sampled again with the draws of the answer where they are common; None where one has no samples."""
    if not answer.samples or not reference.samples:
        return None, ["One of the two answers has no intervals, so the comparison has none."]
    inputs = answer.extras.get("inputs", {})
    identities = {
        key: (inputs[key].identity or key) if key in common else f"reference/{key}" for key in reference.extras.get("inputs", {})
    }  # fmt: skip
    together = _same_recording(answer, reference)
    identities["recording"] = str(answer.extras.get("identity", "recording")) if together else "reference/recording"
    count, seed = int(answer.extras["samples"]), int(answer.extras["seed"])
    again = analyse(reference.case.with_value("uncertainty.seed", seed), samples=count, identities=identities, workspace=workspace)
    words = ", ".join(common) if common else "none"
    noise = "The recording is the same." if together else "The recordings' own noise is independent."
    return again, [f"Givens drawn once for both: {words}. {noise}"]


def _columns(answer: Answer, again: Answer, common: tuple[str, ...]) -> dict[str, NDArray[np.float64]]:
    """Uncertain inputs of both, for the shares; those of the reference alone are marked."""
    table = dict(answer.extras.get("columns", {}))
    shared = {*common, *(["recording"] if again.extras.get("identity") == answer.extras.get("identity") else [])}
    for key, column in again.extras.get("columns", {}).items():
        if key not in shared:
            table[f"{key} (reference)"] = column
    return table


def _pair(
    finding: Finding, other: Finding, mine: NDArray[np.float64] | None, theirs: NDArray[np.float64] | None
) -> list[tuple[Finding, NDArray[np.float64] | None]]:
    """Change and ratio of one finding."""
    worst = max((finding, other), key=lambda row: RELIANCES.index(row.reliance))
    common: dict[str, Any] = {"reliance": worst.reliance, "because": worst.because}
    if finding.value is None or other.value is None:
        because = finding.because if finding.value is None else other.because
        empty = {"value": None, "reliance": "not usable", "because": because}
        return [
            (Finding(name=f"change_of_{finding.name}", label=f"Change of: {finding.label}", unit=finding.unit, **empty), None),
            (Finding(name=f"ratio_of_{finding.name}", label=f"Ratio of: {finding.label}", unit="", **empty), None),
        ]
    both = mine is not None and theirs is not None
    change = Finding(name=f"change_of_{finding.name}", label=f"Change of: {finding.label}", value=finding.value - other.value, unit=finding.unit, **common)
    ratio = Finding(name=f"ratio_of_{finding.name}", label=f"Ratio of: {finding.label}", value=None, unit="", **common)
    difference = None if not both else np.asarray(mine) - np.asarray(theirs)
    quotient = None
    if other.value == 0:
        ratio = ratio.replace(reliance="not usable", because="It divides by a reference that is zero.")
    else:
        ratio = ratio.replace(value=finding.value / other.value)
        if both and np.all(np.asarray(theirs) * np.sign(other.value) > 0):
            quotient = np.asarray(mine) / np.asarray(theirs)
        elif both:
            ratio = ratio.replace(because="The reference may be zero within its uncertainty: the ratio has no interval.")
    return [(_spread(change, difference), difference), (_spread(ratio, quotient), quotient)]


def _spread(row: Finding, cloud: NDArray[np.float64] | None) -> Finding:
    if cloud is None or row.reliance == "not usable":
        return row
    low, high = interval(cloud)
    return row.replace(low=low, high=high)
