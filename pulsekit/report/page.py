"""The report page: one HTML file that opens offline, with everything from a user's file escaped."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from functools import lru_cache
from pathlib import Path
from typing import Any

from .palette import LIGHT
from .rows import check_rows, finding_rows, interval_head

__all__ = ["Page", "Picture", "PlainTable", "render", "shares_table"]

_TEMPLATES = Path(__file__).parent / "templates"


@dataclass(frozen=True)
class PlainTable:
    """A table of words."""

    heads: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    number_columns: tuple[int, ...] = ()


@dataclass(frozen=True)
class Picture:
    """A vector picture with its caption."""

    name: str
    svg: str
    caption: str
    wide: bool = False


@dataclass(frozen=True)
class ExtraTable:
    """A section with a table of its own."""

    title: str
    table: PlainTable
    sentences: tuple[str, ...] = ()


@dataclass(frozen=True, kw_only=True)
class Page:
    """All that the report says beyond what stands in the answer itself; each kind of case fills it."""

    subtitle: str
    question: Sequence[tuple[str, str]]
    pictures: Sequence[Picture]
    method: Sequence[str]
    paste: str
    references: Sequence[str]
    cautions: Sequence[str]
    lead_findings: Sequence[str]
    givens: PlainTable
    given_notes: Sequence[str] = ()
    first_page: Sequence[tuple[str, str]] = ()
    per_cycle: PlainTable | None = None
    extra_tables: Sequence[ExtraTable] = ()
    asked: PlainTable | None = None
    case_text: str = ""
    notes: Sequence[str] = field(default=())


@lru_cache(maxsize=1)
def environment() -> Any:
    """The template environment: everything is escaped unless it is one of our own pictures."""
    import jinja2

    return jinja2.Environment(
        loader=jinja2.FileSystemLoader(_TEMPLATES), autoescape=True, undefined=jinja2.StrictUndefined, trim_blocks=True, lstrip_blocks=True
    )


def _style() -> Any:
    from markupsafe import Markup

    return Markup(environment().get_template("page.css").render(light=LIGHT))


def interval_notes(answer: Any) -> list[str]:
    """What the intervals hold, what they leave out, and what to measure better first."""
    notes = []
    left_out = list(answer.left_out_inputs or ())
    if left_out:
        notes.append(
            "The intervals are at least this wide: these givens carry no stated uncertainty and count as exact: "
            + "; ".join(str(getattr(entry, "sentence", entry)) for entry in left_out)
            + "."
        )
    if answer.improve:
        notes.append(str(answer.improve))
    return notes


def shares_table(answer: Any) -> PlainTable | None:
    """Shares of every finding that has any, one column per uncertain input."""
    keys: list[str] = []
    for finding in answer.findings:
        # An input that nowhere owns a hundredth is not worth a column.
        keys += [key for key, share in finding.shares.items() if key not in keys and share >= 0.01]
    if not keys:
        return None
    rows = []
    for finding in answer.findings:
        if finding.shares and finding.reliance != "not usable":
            rows.append((finding.label, *(f"{100 * finding.shares.get(key, 0.0):.0f} %" for key in keys)))
    return PlainTable(("Finding", *keys), tuple(rows), tuple(range(1, len(keys) + 1)))


def _provenance(answer: Any) -> list[tuple[str, str]]:
    rows = []
    for key, value in answer.provenance.items():
        words = ", ".join(f"{name} {version}" for name, version in value.items()) if isinstance(value, Mapping) else str(value)
        rows.append((str(key).replace("_", " "), words))
    return rows


def render(answer: Any, page: Page) -> str:
    """Return the whole page as HTML text."""
    from markupsafe import Markup

    def drawn(wide: bool) -> list[dict[str, Any]]:
        return [{"svg": Markup(p.svg), "caption": p.caption} for p in page.pictures if p.wide is wide]

    return str(
        environment()
        .get_template("report.html")
        .render(
            title=str(answer.case.get("title") or "Untitled case"), subtitle=page.subtitle, style=_style(), overall=answer.overall,
            findings=finding_rows(answer.findings), interval_head=interval_head(answer), interval_notes=interval_notes(answer),
            checks=check_rows(answer.checks), question=page.question, givens=page.givens, given_notes=page.given_notes,
            remarks=[*answer.remarks, *page.notes], wide_pictures=drawn(True), pictures=drawn(False), per_cycle=page.per_cycle,
            extra_tables=page.extra_tables, asked=page.asked, method=page.method, paste=page.paste, references=page.references,
            cautions=page.cautions, first_page=page.first_page, lead_names=page.lead_findings, shares=shares_table(answer),
            shares_definition=answer.shares_definition or "", provenance=_provenance(answer), case_text=page.case_text,
        )
    )  # fmt: skip
