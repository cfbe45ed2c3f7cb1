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
from .trace import Cycles, Harmonics, Recording, Signal, decompose, find_cycles, read_recording
from .tube import CircularTube, TubeFlow, solve

__all__ = [
    "Answer",
    "Case",
    "Check",
    "Checks",
    "CircularTube",
    "Comparison",
    "Cycles",
    "Finding",
    "Findings",
    "Fluid",
    "Harmonics",
    "PulsekitError",
    "PumpLineCase",
    "Recording",
    "Signal",
    "TubeFlow",
    "WallShearCase",
    "Workspace",
    "analyse",
    "compare",
    "decompose",
    "errors",
    "find_cycles",
    "fluids",
    "load_case",
    "read_recording",
    "report",
    "solve",
]
