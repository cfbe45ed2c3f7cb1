"""Pressure waves in a line of elements."""

from .damper import GasDamper
from .elements import Element, Hose, Pipe, Restrictor, SideBranch, Volume
from .ends import ClosedEnd, End, ImpedanceEnd, MatchedEnd, OpenEnd, RestrictorEnd
from .line import Line
from .response import LineResponse
from .sources import FlowSource, MeasuredPressure

__all__ = [
    "ClosedEnd", "Element", "End", "FlowSource", "GasDamper", "Hose", "ImpedanceEnd", "Line", "LineResponse", "MatchedEnd", "MeasuredPressure",
    "OpenEnd", "Pipe", "Restrictor", "RestrictorEnd", "SideBranch", "Volume",
]  # fmt: skip
