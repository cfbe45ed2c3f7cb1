"""From a recording to cycles to harmonics."""

from .harmonics import Harmonics

__all__ = ["Harmonics"]
