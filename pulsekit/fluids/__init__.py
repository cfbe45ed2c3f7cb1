"""Liquids: what a calculation needs of them, and correlations that supply it."""

from .flow_curves import Carreau, CarreauYasuda, Casson, PowerLaw, flow_curve_of
from .fluid import Fluid
from .gas import damper_gas_volume, gas_fraction_at_pressure, nitrogen_stiffness_exponent
from .glycerol_water import glycerol_solution
from .hydraulic import hydraulic_oil
from .pure_water import water
from .sampling import FLUID_KINDS, sample, sample_fluid
from .whole_blood import blood

__all__ = [
    "FLUID_KINDS", "Carreau", "CarreauYasuda", "Casson", "Fluid", "PowerLaw", "blood", "damper_gas_volume", "flow_curve_of",
    "gas_fraction_at_pressure", "glycerol_solution", "hydraulic_oil", "nitrogen_stiffness_exponent", "sample", "sample_fluid", "water",
]  # fmt: skip
