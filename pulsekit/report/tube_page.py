"""The page of a wall-shear report, filled from its answer."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from .asked import Variation, tube_variations
from .drawing import shown, unit_of, unit_text
from .givens import given_notes, givens_table
from .page import Page, Picture, PlainTable
from .tube_words import CAUTIONS, LEAD_FINDINGS, REFERENCES, method, paste, question

__all__ = ["tube_page"]


def _text(value: Any) -> str:
    if value is None or value != value:
        return "–"
    if isinstance(value, float):
        return f"{value:.4g}".replace("-", "−")
    return str(value)


def _asked(answer: Any, rows: Sequence[Variation]) -> PlainTable:
    unit = unit_text(unit_of(answer, "pressure"))

    def stress(value: float | None) -> str:
        return "–" if value is None else _text(float(shown(answer, value, "pressure")))

    return PlainTable(
        ("Changed", f"Peak wall shear stress ({unit})", f"Time-averaged wall shear stress ({unit})", "Oscillatory shear index", "Remark"),
        tuple(
            (
                row.what, stress(row.peak_wall_shear_stress), stress(row.time_averaged_wall_shear_stress),
                "–" if row.oscillatory_shear_index is None else f"{row.oscillatory_shear_index:.3f}", row.because,
            )
            for row in rows
        ),
        (1, 2, 3),
    )  # fmt: skip


def per_cycle_table(answer: Any) -> PlainTable | None:
    """Every cycle's own values as words."""
    table = answer.per_cycle
    if table is None or len(table) == 0:
        return None
    heads = tuple(str(name).replace("_", " ") for name in table.columns)
    rows = tuple(tuple(_text(cell) for cell in row) for row in table.itertuples(index=False))
    return PlainTable(heads, rows, tuple(range(len(heads))))


def tube_page(
    answer: Any, pictures: Sequence[Picture], *, case_text: str, notes: Sequence[str] = (), workspace: Any = None
) -> Page:  # fmt: skip
    """Return all that a wall-shear report says beyond the answer's own tables."""
    return Page(
        subtitle=f"Wall shear from a periodic recording · {answer.provenance.get('date', '')} · PulseKit {answer.provenance.get('version', '')}",
        question=question(answer), pictures=pictures, method=method(answer), paste=paste(answer), references=REFERENCES,
        cautions=CAUTIONS, lead_findings=LEAD_FINDINGS, givens=givens_table(answer), given_notes=given_notes(answer),
        per_cycle=per_cycle_table(answer), asked=_asked(answer, tube_variations(answer, workspace=workspace)), case_text=case_text,
        notes=notes,
    )  # fmt: skip
