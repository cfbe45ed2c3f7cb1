"""Density, viscosity and bulk modulus for many draws of the givens at once."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from ..errors import InputError
from .fluid import Fluid
from .glycerol_water import glycerol_density, glycerol_share, glycerol_viscosity
from .oil import oil_properties
from .pure_water import ATMOSPHERE, water_bulk_modulus, water_density, water_viscosity
from .ranges import plain
from .whole_blood import blood_density, blood_viscosity

__all__ = ["FLUID_KINDS", "sample", "sample_fluid"]


def _given(values: Mapping[str, Any]) -> tuple[Any, Any, Any]:
    return values["density"], _viscosity(values, values["density"], lambda: values["viscosity"]), values.get("bulk_modulus")


def _blood(values: Mapping[str, Any]) -> tuple[Any, Any, Any]:
    density = blood_density(values["haematocrit"], values["temperature"]) * values.get("density_correlation", 1.0)
    return density, _viscosity(values, density, lambda: blood_viscosity(values["haematocrit"], values["temperature"])), None


def _water(values: Mapping[str, Any]) -> tuple[Any, Any, Any]:
    temperature, pressure = values["temperature"], values.get("pressure", ATMOSPHERE)
    density = water_density(temperature, pressure)
    return density, _viscosity(values, density, lambda: water_viscosity(temperature, pressure)), water_bulk_modulus(temperature, pressure)


def _glycerol(values: Mapping[str, Any]) -> tuple[Any, Any, Any]:
    share = glycerol_share(dict(values))
    density = glycerol_density(share, values["temperature"]) * values.get("density_correlation", 1.0)
    return density, _viscosity(values, density, lambda: glycerol_viscosity(share, values["temperature"])), None


def _oil(values: Mapping[str, Any]) -> tuple[Any, Any, Any]:
    density, viscosity, modulus = oil_properties(dict(values))
    return density, _viscosity(values, density, lambda: viscosity, factor=False), modulus


def _viscosity(values: Mapping[str, Any], density: Any, law: Any, *, factor: bool = True) -> Any:
    """The measured viscosity of either kind where there is one, else the correlation's times its factor."""
    if "viscosity" in values:
        return values["viscosity"]
    if "kinematic_viscosity" in values:
        return values["kinematic_viscosity"] * density
    return law() * values.get("correlation", 1.0) if factor else law()


_KINDS = {
    "given": _given,
    "blood": _blood,
    "water": _water,
    "glycerol solution": _glycerol,
    "hydraulic oil": _oil,
}
#: The kinds of fluid that a case may name.
FLUID_KINDS = tuple(_KINDS)


def sample(kind: str, arrays: Mapping[str, Any]) -> tuple[Any, Any, Any]:
    """Density, viscosity and bulk modulus of a kind of fluid, for arrays of its givens.

    Parameters
    ----------
    kind : str
        One of ``FLUID_KINDS``.
    arrays : mapping of str to array_like, shape (S,) or ()
        SI values by the names in ``Fluid.givens``, with the factors ``"correlation"`` (viscosity),
        ``"density_correlation"`` and ``"bulk_modulus_correlation"`` near 1 where there are any.

    Returns
    -------
    density, viscosity : ndarray, shape (S,), or float
        [kg/m^3], [Pa s]
    bulk_modulus : ndarray, shape (S,), float, or None
        [Pa]

    Raises
    ------
    InputError
        If the kind is unknown or a given is missing.

    Examples
    --------
    >>> density, viscosity, _ = sample("blood", {"haematocrit": [0.40, 0.45], "temperature": 310.15, "correlation": 1.0})
    >>> (viscosity * 1e3).round(2)
    array([3.37, 3.84])
    """
    if kind not in _KINDS:
        raise InputError(f"fluid kind {kind!r} is not known; it is one of {', '.join(FLUID_KINDS)}", name="kind", value=kind)
    values = {key: np.asarray(value, float) for key, value in arrays.items()}
    try:
        density, viscosity, modulus = _KINDS[kind](values)
    except KeyError as missing:
        raise InputError(f"a fluid of the kind {kind!r} needs {missing.args[0]}", name=missing.args[0]) from missing
    return plain(density), plain(viscosity), None if modulus is None else plain(modulus)


def sample_fluid(fluid: Fluid, arrays: Mapping[str, Any]) -> tuple[Any, Any, Any]:
    """Return what :func:`sample` does, with the fluid's own values for every given that is not drawn.

    >>> from pulsekit.fluids import water
    >>> sample_fluid(water("20 degC"), {"correlation": [1.0, 1.01]})[1].round(7)
    array([0.0010016, 0.0010116])
    """
    values: dict[str, Any] = {}
    for key, given in fluid.givens.items():
        # The name of a viscosity is the one under which it was given; what it is, its dimension tells.
        own = given.dimension if key in ("viscosity", "kinematic_viscosity") else key
        values[own] = arrays.get(key, given.value)
    density, viscosity, modulus = sample(fluid.kind, values)
    if modulus is None and fluid.bulk_modulus is not None:
        modulus = fluid.bulk_modulus
    return density, viscosity, modulus
