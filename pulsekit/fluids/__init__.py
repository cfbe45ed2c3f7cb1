"""Liquids: what a calculation needs of them, and correlations that supply it."""

from .fluid import Fluid
from .glycerol_water import glycerol_solution
from .hydraulic import hydraulic_oil
from .pure_water import water
from .sampling import FLUID_KINDS, sample, sample_fluid
from .whole_blood import blood

__all__ = ["FLUID_KINDS", "Fluid", "blood", "glycerol_solution", "hydraulic_oil", "sample", "sample_fluid", "water"]
