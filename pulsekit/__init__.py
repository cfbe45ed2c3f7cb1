"""PulseKit: from a periodic flow or pressure recording to wall shear, velocity profiles and pulsation along a line.

>>> import pulsekit as pk
>>> round(pk.CircularTube(diameter="6.2 mm").radius, 7)
0.0031
"""

from . import errors, fluids, report
from .appraisal import Check, Checks, Finding, Findings
from .case import Answer, Case, Comparison, PumpLineCase, WallShearCase, Workspace, analyse, compare, load_case
from .errors import PulsekitError
from .fluids import Fluid
from .line import (
    ClosedEnd,
    FlowSource,
    GasDamper,
    Hose,
    ImpedanceEnd,
    Line,
    LineResponse,
    MatchedEnd,
    MeasuredPressure,
    OpenEnd,
    Pipe,
    Restrictor,
    RestrictorEnd,
    SideBranch,
    Volume,
    axial_piston_pump,
    plunger_pump,
)
from .trace import Cycles, Harmonics, Recording, Signal, decompose, find_cycles, read_recording
from .tube import CircularTube, TubeFlow, solve

__all__ = [
    "Answer",
    "Case",
    "Check",
    "Checks",
    "CircularTube",
    "ClosedEnd",
    "Comparison",
    "Cycles",
    "Finding",
    "Findings",
    "FlowSource",
    "Fluid",
    "GasDamper",
    "Harmonics",
    "Hose",
    "ImpedanceEnd",
    "Line",
    "LineResponse",
    "MatchedEnd",
    "MeasuredPressure",
    "OpenEnd",
    "Pipe",
    "PulsekitError",
    "PumpLineCase",
    "Recording",
    "Restrictor",
    "RestrictorEnd",
    "SideBranch",
    "Signal",
    "TubeFlow",
    "Volume",
    "WallShearCase",
    "Workspace",
    "analyse",
    "axial_piston_pump",
    "compare",
    "decompose",
    "errors",
    "find_cycles",
    "fluids",
    "load_case",
    "plunger_pump",
    "read_recording",
    "report",
    "solve",
]
