"""What a notebook shows of an answer: static, complete in itself, readable where no widget can run."""

from __future__ import annotations

from typing import Any

from .drawing import to_svg
from .page import environment, interval_notes
from .palette import LIGHT
from .rows import check_rows, finding_rows, interval_head
from .tube_words import CAUTIONS, LEAD_FINDINGS

__all__ = ["glance"]


def glance(answer: Any) -> str:
    """Return findings, checks and the leading picture of an answer as an HTML fragment."""
    from markupsafe import Markup

    if answer.kind == "wall shear":
        from .tube_figures import shear_figure

        pictures, lead, caution = [shear_figure(answer)], LEAD_FINDINGS, f"{CAUTIONS[0]} {CAUTIONS[1]}"
    else:
        from .line_figures import envelope_figure
        from .line_words import CAUTIONS as LINE_CAUTIONS
        from .line_words import LEAD_FINDINGS as LINE_LEAD

        pictures, lead, caution = [envelope_figure(answer)], LINE_LEAD, LINE_CAUTIONS[0]
    return str(
        environment()
        .get_template("glance.html")
        .render(
            light=LIGHT, title=str(answer.case.get("title") or "Untitled case"), overall=answer.overall, lead_names=lead,
            findings=finding_rows(answer.findings), interval_head=interval_head(answer), interval_notes=interval_notes(answer),
            checks=check_rows(answer.checks), pictures=[Markup(to_svg(figure, "glance")) for figure in pictures], caution=caution,
        )
    )  # fmt: skip
