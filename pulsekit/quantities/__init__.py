"""Units at the edge: read a quantity as people write it, turn it into an SI float, print it back.

Inside the package every number is an SI float (kelvin for temperatures, radian for angles, hertz for
rotational speeds). Only what faces a person comes here. Conversions are done with exact fractions, so that
``"3.1 mm"`` is the float 0.0031 and comes back as 3.1 mm.
"""

from .digits import decimals_shown, format_number, significant
from .dimensions import DIMENSIONS, display_unit
from .given import Given, uncertainty_remark
from .printing import format_interval, pretty_unit, shown
from .reading import absolute_pressure, parse_either, parse_given, to_si
from .text import write_given
from .units import convert, from_si, parse_unit, registry, unit_dimension

__all__ = [
    "DIMENSIONS", "Given", "absolute_pressure", "convert", "decimals_shown", "display_unit", "format_interval", "format_number", "from_si", "parse_either",
    "parse_given", "parse_unit", "pretty_unit", "registry", "shown", "significant", "to_si", "uncertainty_remark", "unit_dimension", "write_given",
]  # fmt: skip
