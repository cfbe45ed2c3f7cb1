"""The pump-line workbench."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

from ..case import Case
from ..report.line_words import CAUTIONS, LEAD_FINDINGS
from .charts import Panel
from .pump_line_charts import LAYOUT, NAMES, pump_line_panels
from .pump_line_givens import pump_line_givens
from .pump_line_state import PumpLineState
from .screen import Screen, script, style

__all__ = ["PumpLineWorkbench"]


class PumpLineWorkbench(Screen):
    """From recordings and a drawing to the pulsation along a pump line, by hand and eye.

    Parameters
    ----------
    source : path or Case, optional
        A case file, a case or a recording; empty if not given.
    folder : path, optional
        Uploads and what is saved go below it; the folder of the case, else the present one.

    Examples
    --------
    >>> workbench = PumpLineWorkbench()
    >>> workbench.state.add_element("pipe")
    False
    >>> [group["title"] for group in workbench.givens_now()][3]
    '1  pipe, 1 m'
    """

    _esm = script()
    _css = style()
    title = "Pump line"
    rows = LAYOUT
    names = NAMES
    cursors = {  # noqa: RUF012
        "position": {"label": "Position", "unit": "m", "steps": 96, "plays": False},
        "speed": {"label": "Speed", "unit": "rpm", "steps": 120, "plays": False},
    }
    lead = LEAD_FINDINGS
    cautions = CAUTIONS
    rest = 0.6
    state: PumpLineState

    def __init__(self, source: str | Path | Case | None = None, *, folder: str | Path | None = None, **more: Any) -> None:
        super().__init__(PumpLineState(folder=folder), source, **more)

    def givens_now(self) -> list[dict[str, Any]]:
        """Groups of fields."""
        return pump_line_givens(self.state)

    def panels_now(self) -> list[Panel]:
        """Pictures."""
        return pump_line_panels(self.state.shown, self.state.reference, selected=self.state.selected)

    def actions(self) -> dict[str, Callable[[dict[str, Any]], Any]]:
        """What the page may ask of a line."""
        state = self.state
        return {
            "add_element": lambda asked: state.add_element(str(asked["kind"])),
            "remove_element": lambda asked: state.remove_element(int(asked["place"])),
            "move_element": lambda asked: state.move_element(int(asked["place"]), int(asked["by"])),
            "select_element": lambda asked: state.select_element(int(asked["number"]) - 1),
            "remove_station": lambda asked: state.remove_station(int(asked["number"])),
            "keep_change": lambda asked: state.keep_change(str(asked["name"])),
        }
