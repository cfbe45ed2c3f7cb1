"""What a Finding and a Check are; how uncertainty propagates through any calculation."""

from .distributions import Input, draw_inputs
from .finding import Check, Checks, Finding, Findings
from .harmonic_draws import draw_harmonics
from .intervals import interval, interval_error, shares
from .propagation import Propagation, Together, propagate

__all__ = [
    "Check",
    "Checks",
    "Finding",
    "Findings",
    "Input",
    "Propagation",
    "Together",
    "draw_harmonics",
    "draw_inputs",
    "interval",
    "interval_error",
    "propagate",
    "shares",
]
