"""Liquids: what a calculation needs of them, and correlations that supply it."""

from .fluid import Fluid
from .pure_water import water
from .whole_blood import blood

__all__ = ["Fluid", "blood", "water"]
