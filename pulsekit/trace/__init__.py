"""From a recording to cycles to harmonics."""

from .clock import Clock
from .harmonics import Harmonics
from .reading import read_recording
from .recording import Recording
from .signal import Signal

__all__ = ["Clock", "Harmonics", "Recording", "Signal", "read_recording"]
