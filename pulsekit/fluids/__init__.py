"""Liquids: what a calculation needs of them, and correlations that supply it."""

from .fluid import Fluid
from .pure_water import water

__all__ = ["Fluid", "water"]
