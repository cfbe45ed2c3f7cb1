"""From a recording to cycles to harmonics."""

from .clock import Clock
from .cutting import find_cycles
from .cycles import Cycles
from .decompose import cycle_coefficients, decompose
from .harmonics import Harmonics
from .reading import read_recording
from .recording import Recording
from .signal import Signal

__all__ = ["Clock", "Cycles", "Harmonics", "Recording", "Signal", "cycle_coefficients", "decompose", "find_cycles", "read_recording"]
