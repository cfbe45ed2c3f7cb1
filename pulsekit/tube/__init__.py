"""Cross-sections and the solved flow in one tube."""

from .flow import QUANTITIES, TubeFlow, solve
from .sections import CircularTube

__all__ = ["QUANTITIES", "CircularTube", "TubeFlow", "solve"]
