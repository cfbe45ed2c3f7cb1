"""Units: read as people write them, checked for their dimension, converted with exact fractions."""

from __future__ import annotations

import difflib
import math
from fractions import Fraction
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from ..errors import UnitError
from .dimensions import DIMENSIONS, EXAMPLES, SHARED
from .spellings import AMBIGUOUS, EXTRA_UNITS, reference_of, spelled

if TYPE_CHECKING:
    import pint

__all__ = ["checked_unit", "convert", "from_si", "in_si", "parse_unit", "registry", "unit_dimension"]

_KNOWN = ("mL/min", "L/min", "m^3/h", "gpm", "cm/s", "m/s", "mmHg", "cmH2O", "kPa", "bar", "psi", "Pa", "mPa*s", "cP", "cSt", "mm^2/s", "kg/m^3", "degC", "degF", "rpm", "Hz",
          "mm", "um", "in", "ms", "s", "min", "L", "mL", "deg", "dyn/cm^2", "GPa", "%")  # fmt: skip


@lru_cache(maxsize=1)
def registry() -> pint.UnitRegistry[Any]:
    """Return the unit registry, made on first use (with its library it takes half a second)."""
    import pint

    units: pint.UnitRegistry[Any] = pint.UnitRegistry(autoconvert_offset_to_baseunit=True, on_redefinition="ignore")
    for definition in EXTRA_UNITS:
        units.define(definition)
    return units


@lru_cache(maxsize=4096)
def parse_unit(text: str) -> tuple[str, str]:
    """Read a unit as people write it; return (registry spelling, pressure reference).

    Raises UnitError if the unit is not known or may mean two things. The reference is "gauge", "absolute" or "".

    >>> parse_unit("ml/min"), parse_unit("bar(a)")
    (('mL/min', ''), ('bar', 'absolute'))
    """
    stripped, reference = reference_of(text.strip())
    if stripped in AMBIGUOUS:
        raise UnitError(f"unit {text!r} may mean two things; write {AMBIGUOUS[stripped]}", value=text)
    read = spelled(stripped)
    try:
        _scale(read)
    except Exception as problem:
        near = difflib.get_close_matches(read, _KNOWN, n=1, cutoff=0.6)
        advice = f"did you mean {near[0]!r}?" if near else "write it as in 'mL/min', 'mmHg', 'cm/s', 'mPa*s'"
        raise UnitError(f"unit {text!r} is not known; {advice}", value=text) from problem
    return read, reference


@lru_cache(maxsize=4096)
def _scale(unit: str) -> tuple[Fraction, Fraction, tuple[tuple[str, int], ...], int]:
    """Factor and offset to SI, dimensions, and the power of the angle (which the registry does not count as one)."""
    units: Any = registry()
    parsed = units.parse_units(unit)
    dimensions = tuple(sorted((name, round(power)) for name, power in units.get_dimensionality(parsed).items()))
    if unit in ("degC", "degF"):
        step = Fraction(1) if unit == "degC" else Fraction(5, 9)
        return step, Fraction(27315, 100) if unit == "degC" else Fraction(45967, 100) * step, dimensions, 0
    factor, base = units.get_base_units(parsed)
    turns = sum(round(power) for name, power in dict(base._units).items() if name == "radian")
    return _exact(float(factor)), Fraction(0), dimensions, turns


def _exact(factor: float) -> Fraction:
    """Fraction that a factor stands for: 0.001 is a thousandth, 1.666...67e-8 one over sixty million."""
    for number, back in ((factor, False), (1.0 / factor, True)):
        plain = Fraction(f"{number:.12g}")
        if abs(float(plain) / number - 1.0) < 3e-15:
            return 1 / plain if back else plain
    return Fraction(factor)


@lru_cache(maxsize=4096)
def unit_dimension(unit: str) -> str | None:
    """Name of the dimension that a unit has, or None if it is none of ours.

    >>> unit_dimension("ml/min")
    'flow_rate'
    """
    read, _ = parse_unit(unit)
    for name in DIMENSIONS:
        if name not in SHARED and _fits(read, name):
            return name
    return None


def _fits(read: str, dimension: str) -> bool:
    _, _, dimensions, turns = _scale(read)
    _, _, wanted, _ = _scale(DIMENSIONS[dimension])
    if dimension == "angle":
        return dimensions == () and turns == 1
    # An angular frequency counts as a frequency; elsewhere an angle has no place.
    return dimensions == wanted and (turns == 0 or (dimension == "frequency" and turns == 1))


def _article(noun: str) -> str:
    return f"an {noun}" if noun[0] in "aeiou" else f"a {noun}"


def checked_unit(unit: str, dimension: str, name: str, given: object) -> str:
    """Registry spelling of a unit that must have a dimension."""
    try:
        read, _ = parse_unit(unit)
    except UnitError as problem:
        raise UnitError(f"{name} = {given!r}: {problem.message}", name=name, value=given) from problem
    if not _fits(read, dimension):
        wanted = dimension.replace("_", " ")
        has = (unit_dimension(unit) or "another quantity").replace("_", " ")
        example = EXAMPLES.get(dimension, f"'1 {DIMENSIONS[dimension]}'")
        raise UnitError(
            f"{name} = {given!r} is not {_article(wanted)} but {_article(has)}; give it as {example}" if unit else f"{name} = {given!r} has no unit; give it as {example}",
            name=name, value=given, allowed=wanted,
        )  # fmt: skip
    return read


def convert(value: Any, unit: str, to: str, *, dimension: str = "") -> Any:
    """Convert a number or array from one unit to another (registry spellings).

    A number is converted exactly and then rounded once; an array with at most two roundings.

    >>> convert(3.1, "mm", "m"), convert(98.6, "degF", "degC")
    (0.0031, 37.0)
    """
    if unit == to:
        return value
    first, first_offset, dimensions, turns = _scale(unit)
    second, second_offset, wanted, target_turns = _scale(to)
    if dimensions != wanted:
        raise UnitError(f"unit {unit!r} cannot be converted into {to!r}: they measure different things", value=unit, allowed=to)
    factor, offset = first / second, (first_offset - second_offset) / second
    circle = (2.0 * math.pi) ** (target_turns - turns) if "frequency" in (unit_dimension(to or ""), dimension) else 1.0
    if isinstance(value, (float, int)) and math.isfinite(value):
        return float(Fraction(repr(float(value))) * factor + offset) * circle
    scaled = value * float(factor.numerator) if factor.numerator != 1 else value
    scaled = scaled / float(factor.denominator) if factor.denominator != 1 else scaled
    return (scaled + float(offset) if offset else scaled) * circle if offset or circle != 1.0 else scaled


def from_si(value: Any, unit: str, dimension: str | None = None) -> Any:
    """Convert an SI number or array into the unit a person reads.

    >>> from_si(1e-6, "mL/min")
    60.0
    """
    read, _ = parse_unit(unit)
    if read == "":
        return value
    dimension = dimension or unit_dimension(unit)
    if dimension is None:
        raise UnitError(f"unit {unit!r} has no dimension that is used here", value=unit)
    if dimension == "temperature_difference":
        read = {"degC": "delta_degC", "degF": "delta_degF"}.get(read, read)
    return convert(value, DIMENSIONS[dimension], read, dimension=dimension)


def in_si(number: Fraction, read: str, dimension: str, *, difference: bool = False) -> float:
    """Return a number of a unit (registry spelling) in SI, rounded once."""
    factor, offset, _, turns = _scale(read)
    exact = float(number * factor + (0 if difference or dimension == "temperature_difference" else offset))
    return exact / (2.0 * math.pi) if dimension == "frequency" and turns else exact
