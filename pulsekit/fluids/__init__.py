"""Liquids: what a calculation needs of them, and correlations that supply it."""

from .fluid import Fluid
from .glycerol_water import glycerol_solution
from .hydraulic import hydraulic_oil
from .pure_water import water
from .whole_blood import blood

__all__ = ["Fluid", "blood", "glycerol_solution", "hydraulic_oil", "water"]
