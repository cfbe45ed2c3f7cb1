"""From a file, as instruments and colleagues really write them, to a Recording."""

from .reader import read_recording

__all__ = ["read_recording"]
