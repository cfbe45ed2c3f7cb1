"""The page of a pump-line report, filled from its answer."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from ..case.changes import Effect, effects
from .drawing import shown, unit_of, unit_text
from .givens import given_notes, givens_table
from .line_words import CAUTIONS, LEAD_FINDINGS, REFERENCES, first_page, method, paste, question
from .page import ExtraTable, Page, Picture, PlainTable
from .tube_page import per_cycle_table

__all__ = ["line_page"]

_MOST_TURNS = 40


def effects_table(answer: Any, rows: Sequence[Effect]) -> PlainTable:
    """Effect of each change as words."""
    unit = unit_text(unit_of(answer, "pressure"))

    def pressure(value: float | None) -> str:
        return "–" if value is None else f"{shown(answer, value, 'pressure'):.3g}".replace("-", "−")

    return PlainTable(
        ("Change", f"Largest pulsation p-p ({unit})", "Of what it is", "At (m)", f"Highest pressure changes by ({unit})", "Remark"),
        tuple(
            (
                row.name, pressure(row.after), "–" if row.ratio is None else f"{100 * row.ratio:.0f} %", "–" if row.position is None else f"{row.position:.3g}",
                pressure(row.highest_pressure_change), row.because,
            )
            for row in rows
        ),
        (1, 2, 3, 4),
    )  # fmt: skip


def _lines_table(answer: Any) -> ExtraTable | None:
    found = answer.extras.get("resonances") or ()
    if not found:
        return None
    rows = tuple((f"{one.frequency:.4g}", f"{60 * one.frequency:.4g}", f"{one.damping:.3g}") for one in found[:12])
    return ExtraTable(
        "Resonances", PlainTable(("Frequency (Hz)", "per minute", "Damping ratio"), rows, (0, 1, 2)), ("Of the line with its end and the source in use, lowest first.",)
    )


def line_page(answer: Any, pictures: Sequence[Picture], *, case_text: str, notes: Sequence[str] = (), workspace: Any = None) -> Page:
    """Return all that a pump-line report says beyond the answer's own tables."""
    helped = effects(answer.case, workspace=workspace)
    turns = per_cycle_table(answer)
    if turns is not None and len(turns.rows) > _MOST_TURNS:
        turns = PlainTable(turns.heads, turns.rows[:_MOST_TURNS], turns.number_columns)
        notes = (*notes, f"The table of single turns shows the first {_MOST_TURNS}; cycles.csv holds all.")
    extra = [
        ExtraTable(
            "What helps", effects_table(answer, helped),
            ("Each change by itself, driven by the same flow at the source; the best first. Estimates to choose what to work out, not designs.",),
        )
    ]  # fmt: skip
    lines = _lines_table(answer)
    if lines is not None:
        extra.append(lines)
    return Page(
        subtitle=f"Pulsation along a pump line · {answer.provenance.get('date', '')} · PulseKit {answer.provenance.get('version', '')}",
        question=question(answer), pictures=pictures, method=method(answer), paste=paste(answer), references=REFERENCES, cautions=CAUTIONS,
        lead_findings=LEAD_FINDINGS, givens=givens_table(answer), given_notes=given_notes(answer), first_page=first_page(answer, helped), per_cycle=turns,
        extra_tables=extra, case_text=case_text, notes=notes,
    )  # fmt: skip
