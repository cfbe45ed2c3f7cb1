"""A value as a caller may give it - text, number, quantity - turned into SI."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import numpy as np

from ..errors import InputError, UnitError
from .dimensions import DIMENSIONS, EXAMPLES
from .given import Given, finite
from .text import parse_text

__all__ = ["absolute_pressure", "parse_either", "parse_given", "to_si"]


def to_si(value: Any, dimension: str, name: str = "value") -> float:
    """Return a given as an SI float, without its uncertainty.

    Parameters
    ----------
    value : str, float or pint quantity
        ``"3.1 mm"``, ``0.0031`` (SI already) or a quantity.
    dimension : str
        A key of ``DIMENSIONS``.
    name : str
        Name of the argument, for the error.

    Returns
    -------
    float
        In the SI unit of the dimension.

    Raises
    ------
    UnitError
        If the dimension is another one, or the unit is not known.
    InputError
        If it is no finite number.

    Examples
    --------
    >>> to_si("3.1 mm", "length", "radius")
    0.0031
    """
    return parse_given(value, dimension, name).value


def parse_given(value: Any, dimension: str, name: str = "value") -> Given:
    """Read a value with its uncertainty, as people write it.

    Accepts ``"3.1 mm"``, ``"3.1 mm ± 0.15 mm"``, ``"3.1 ± 0.15 mm"``, ``"3.1 mm +/- 5 %"``, ``"... ± 0.2 mm (k=2)"``,
    ``"(95 %)"``, ``"(limits)"``, ``"± 0.25 % FS 400 bar"``, a float in SI, a pint quantity, a number with an
    uncertainty of the uncertainties library, or a :class:`Given`.

    Raises
    ------
    UnitError
        If the dimension is another one, or the unit is missing or not known.
    InputError
        If it is no finite number, or the uncertainty is negative.

    Examples
    --------
    >>> given = parse_given("3.1 mm ± 5 %", "length", "radius")
    >>> round(given.standard_uncertainty * 1e3, 6)
    0.155
    """
    if isinstance(value, Given):
        same = {"pressure": "stress", "frequency": "shear_rate"}
        if value.dimension != dimension and same.get(value.dimension) != dimension and same.get(dimension) != value.dimension:
            wanted = dimension.replace("_", " ")
            raise UnitError(
                f"{name} = {value.text!r} is a {value.dimension.replace('_', ' ')}, not a {wanted}; give it as {EXAMPLES.get(dimension, 'one')}",
                name=name, value=value.text, allowed=wanted,
            )  # fmt: skip
        return value
    if isinstance(value, str):
        return finite(parse_text(value, dimension, name), name)
    return finite(_parse_number(value, dimension, name), name)


def _parse_number(value: Any, dimension: str, name: str) -> Given:
    """Read what is not text: a quantity with units, a float, an uncertain number."""
    unit = DIMENSIONS[dimension]
    spread = 0.0
    number, text = value, str(value)
    if hasattr(value, "magnitude") and hasattr(value, "units"):
        number, circle = _of_quantity(value, dimension, name)
    else:
        circle = 1.0
        if hasattr(value, "nominal_value") and hasattr(value, "std_dev"):
            number, spread = value.nominal_value, float(value.std_dev)
        elif isinstance(value, bool) or np.ndim(value) != 0 or not hasattr(value, "__float__"):
            what = "is missing" if value is None else f"= {value!r} is not a number"
            raise InputError(f"{name} {what}; give it as {EXAMPLES.get(dimension, 'a number')}", name=name, value=value)
        text = f"{float(number)!r} {unit}".strip()
    if hasattr(number, "nominal_value") and hasattr(number, "std_dev"):
        number, spread = number.nominal_value, float(number.std_dev) * circle
    return Given(value=float(number) * circle, standard_uncertainty=spread, dimension=dimension, unit=unit, stated=spread > 0, text=text)


def _of_quantity(value: Any, dimension: str, name: str) -> tuple[Any, float]:
    """Magnitude in SI of a quantity of any registry, and what is left to divide by where it counts in radians."""
    angular = "radian" in f"{value.to_base_units().units}"
    try:
        inside = value.to(DIMENSIONS[dimension] or "dimensionless")
    except Exception as problem:
        wanted = dimension.replace("_", " ")
        raise UnitError(
            f"{name} = {value} is not a {wanted}; give it as {EXAMPLES.get(dimension, 'one')}", name=name, value=str(value), allowed=wanted
        ) from problem
    if angular and dimension not in ("angle", "frequency"):
        raise UnitError(
            f"{name} = {value} is an angle, not a {dimension.replace('_', ' ')}", name=name, value=str(value), allowed=dimension
        )
    return inside.magnitude, 1.0 / (2.0 * math.pi) if angular and dimension == "frequency" else 1.0


def parse_either(value: Any, dimensions: tuple[str, ...], name: str = "value") -> Given:
    """Read a value that may have one of several dimensions; a bare number is in SI of the first.

    >>> parse_either("46 mm^2/s", ("viscosity", "kinematic_viscosity"), "viscosity").dimension
    'kinematic_viscosity'
    """
    first: InputError | None = None
    for dimension in dimensions:
        try:
            return parse_given(value, dimension, name)
        except UnitError as problem:
            first = first or problem
    raise first or InputError(f"{name} = {value!r} has no dimension to be read in", name=name, value=value)


def absolute_pressure(value: Any, name: str = "pressure", ambient: float = 101325.0) -> Given:
    """Read a pressure that a formula of gas or vapour takes: absolute, unless it says gauge.

    >>> absolute_pressure("1 bar(g)").value
    201325.0
    """
    given = parse_given(value, "pressure", name)
    if given.reference != "gauge":
        return given
    return replace(given, value=given.value + ambient, reference="absolute")
