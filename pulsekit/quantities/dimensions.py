"""The dimensions that quantities may have, their SI units, and how each is usually written."""

from __future__ import annotations

from types import MappingProxyType

__all__ = ["DIMENSIONS", "EXAMPLES", "SHARED", "display_unit"]

#: Name of each dimension that a caller may ask for, and its SI unit (pint spelling).
DIMENSIONS = MappingProxyType(
    {
        "length": "m",
        "area": "m^2",
        "volume": "m^3",
        "time": "s",
        "frequency": "Hz",
        "angle": "rad",
        "temperature": "K",
        "temperature_difference": "delta_degC",
        "velocity": "m/s",
        "flow_rate": "m^3/s",
        "pressure": "Pa",
        "pressure_gradient": "Pa/m",
        "viscosity": "Pa*s",
        "kinematic_viscosity": "m^2/s",
        "density": "kg/m^3",
        "shear_rate": "1/s",
        "force": "N",
        "mass": "kg",
        "power_per_length": "W/m",
        "impedance": "Pa*s/m^3",
        "voltage": "V",
        "current": "A",
        "ratio": "",
        "stress": "Pa",
    }
)
# What a unit alone does not tell: these share their unit with another dimension, which has the first claim.
SHARED = ("temperature_difference", "shear_rate", "stress")
#: Units in which numbers are shown where the user has said nothing: biomedical, and pressure waves in lines.
_DISPLAY = MappingProxyType(
    {
        "length": ("mm", "mm"), "area": ("mm^2", "mm^2"), "volume": ("mL", "L"), "time": ("s", "s"), "frequency": ("Hz", "Hz"), "angle": ("deg", "deg"),
        "temperature": ("degC", "degC"), "temperature_difference": ("K", "K"), "velocity": ("cm/s", "m/s"), "flow_rate": ("mL/min", "L/min"),
        "pressure": ("Pa", "bar"), "pressure_gradient": ("Pa/m", "Pa/m"), "viscosity": ("mPa*s", "mPa*s"), "kinematic_viscosity": ("mm^2/s", "mm^2/s"),
        "density": ("kg/m^3", "kg/m^3"), "shear_rate": ("1/s", "1/s"), "force": ("N", "N"), "mass": ("kg", "kg"), "power_per_length": ("W/m", "W/m"),
        "impedance": ("Pa*s/m^3", "Pa*s/m^3"), "voltage": ("V", "V"), "current": ("mA", "mA"), "ratio": ("", ""), "stress": ("Pa", "Pa"),
    }
)  # fmt: skip
EXAMPLES = MappingProxyType(
    {
        "length": "'3.1 mm'", "flow_rate": "'40 L/min' or '415 mL/min'", "velocity": "'25 cm/s'", "pressure": "'120 mmHg' or '180 bar'", "viscosity": "'3.5 mPa*s'",
        "density": "'1060 kg/m^3'", "temperature": "'37 degC'", "time": "'0.86 s'", "frequency": "'1.2 Hz' or '1480 rpm'", "volume": "'0.5 L'", "angle": "'60 deg'",
        "pressure_gradient": "'150 Pa/m'", "ratio": "'0.45' or '2 %'", "area": "'30 mm^2'", "kinematic_viscosity": "'46 mm^2/s'", "stress": "'1.5 Pa'",
        "temperature_difference": "'2 K'", "shear_rate": "'400 1/s'",
    }
)  # fmt: skip


def display_unit(dimension: str, kind: str = "wall shear") -> str:
    """Unit in which a dimension is shown where the user has said nothing.

    >>> display_unit("flow_rate"), display_unit("flow_rate", "pump line")
    ('mL/min', 'L/min')
    """
    return _DISPLAY[dimension][1 if kind == "pump line" else 0]
