"""The workbenches: notebook widgets that edit a case and show its answer.

Each is made of a state without widgets (`DeskState`), charts as functions of an answer, and one widget that
draws what it is sent. They need the extra ``workbench``; nothing of it is loaded before a workbench is asked for.
"""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING, Any

from ..errors import MissingExtraError

if TYPE_CHECKING:
    from .pump_line import PumpLineWorkbench  # type: ignore[import-not-found]
    from .wall_shear import WallShearWorkbench

__all__ = ["PumpLineWorkbench", "WallShearWorkbench"]

_HOMES = {"PumpLineWorkbench": "pump_line", "WallShearWorkbench": "wall_shear"}


def __getattr__(name: str) -> Any:
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    try:
        module = importlib.import_module(f".{_HOMES[name]}", __name__)
    except ImportError as problem:
        if (problem.name or "").split(".")[0] in ("ipywidgets", "anywidget", "traitlets"):
            raise MissingExtraError(
                f"the workbench needs {problem.name}; install with: pip install 'pulsekit[workbench]'", extra="workbench"
            ) from problem
        raise
    return getattr(module, name)
