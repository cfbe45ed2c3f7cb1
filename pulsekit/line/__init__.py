"""Pressure waves in a line of elements."""

from .damper import GasDamper
from .elements import Element, Hose, Pipe, Restrictor, SideBranch, Volume
from .ends import ClosedEnd, End, ImpedanceEnd, MatchedEnd, OpenEnd, RestrictorEnd
from .line import Line
from .pumps import axial_piston_pump, plunger_pump
from .resonances import Resonance, SpeedMap, resonances, speed_map
from .response import LineResponse
from .rules import AllowableRule, acceleration_head, reciprocating_pump_rule
from .sources import FlowSource, MeasuredPressure

__all__ = [
    "AllowableRule", "ClosedEnd", "Element", "End", "FlowSource", "GasDamper", "Hose", "ImpedanceEnd", "Line", "LineResponse", "MatchedEnd",
    "MeasuredPressure", "OpenEnd", "Pipe", "Resonance", "Restrictor", "RestrictorEnd", "SideBranch", "SpeedMap", "Volume", "acceleration_head",
    "axial_piston_pump", "plunger_pump", "reciprocating_pump_rule", "resonances", "speed_map",
]  # fmt: skip
