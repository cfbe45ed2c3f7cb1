"""The wall-shear workbench."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from ..case import Case
from ..report.tube_words import CAUTIONS, LEAD_FINDINGS
from .charts import Panel
from .screen import Screen, script, style
from .wall_shear_charts import LAYOUT, NAMES, wall_shear_panels
from .wall_shear_givens import wall_shear_givens
from .wall_shear_state import WallShearState

__all__ = ["WallShearWorkbench"]


class WallShearWorkbench(Screen):
    """From a recording to wall shear, by hand and eye.

    Parameters
    ----------
    source : path or Case, optional
        A case file, a case or a recording; empty if not given.
    folder : path, optional
        Uploads and what is saved go below it; the folder of the case, else the present one.

    Examples
    --------
    >>> workbench = WallShearWorkbench()
    >>> workbench.state.set_value("tube.radius", "3.1 mm")
    False
    >>> sorted(workbench.state.errors)
    ['recording.quantity']
    """

    _esm = script()
    _css = style()
    title = "Wall shear"
    rows = LAYOUT
    names = NAMES
    cursors = {"time": {"label": "Instant", "unit": "s", "steps": 128, "plays": True}}  # noqa: RUF012
    lead = LEAD_FINDINGS
    cautions = CAUTIONS
    state: WallShearState

    def __init__(self, source: str | Path | Case | None = None, *, folder: str | Path | None = None, **more: Any) -> None:
        super().__init__(WallShearState(folder=folder), source, **more)

    def givens_now(self) -> list[dict[str, Any]]:
        """Groups of fields."""
        return wall_shear_givens(self.state)

    def panels_now(self) -> list[Panel]:
        """Pictures."""
        return wall_shear_panels(self.state.shown, self.state.reference)
