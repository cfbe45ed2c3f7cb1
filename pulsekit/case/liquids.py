"""The liquid that a case names, made by the part that knows liquids."""

from __future__ import annotations

from typing import Any

from ..errors import InputError
from ..fluids import Fluid, blood, glycerol_solution, hydraulic_oil, water
from ..quantities import Given
from .case import Case

__all__ = ["fluid_of"]

_KEYS = {
    "given": ("density", "viscosity", "kinematic_viscosity", "bulk_modulus", "vapour_pressure", "temperature", "measured_at"),
    "blood": ("haematocrit", "temperature", "viscosity", "measured_at"),
    "water": ("temperature",),
    "glycerol solution": ("mass_fraction", "volume_fraction", "density", "temperature", "viscosity", "measured_at"),
    "hydraulic oil": (
        "grade", "temperature", "viscosity_at_40", "viscosity_at_100", "viscosity_index", "density", "viscosity", "measured_at", "bulk_modulus",
        "vapour_pressure",
    ),
}  # fmt: skip
_MAKERS = {"given": Fluid, "blood": blood, "water": water, "glycerol solution": glycerol_solution, "hydraulic oil": hydraulic_oil}


def fluid_of(case: Case, *, pressure: Given | None = None) -> Fluid:
    """Return the liquid of a case.

    ``pressure`` is the absolute mean pressure of a line, where a liquid's properties depend on it.

    Raises
    ------
    CaseError, InputError
        If a given is missing, does not belong to the kind of liquid, or lies outside a correlation's range.
    """
    kind = str(case.get("fluid.kind") or ("given" if case.get("fluid.viscosity") or case.get("fluid.kinematic_viscosity") else ""))
    if not kind:
        raise case.missing("fluid.kind")
    arguments: dict[str, Any] = {}
    for name in _KEYS[kind]:
        value = case.get(f"fluid.{name}")
        if value is not None:
            arguments[name] = value if name == "grade" else case.given(f"fluid.{name}")
    _refuse_strangers(case, kind)
    if kind == "given":
        if "density" not in arguments:
            raise case.missing("fluid.density")
    else:
        if case.get("fluid.extrapolate"):
            arguments["extrapolate"] = True
        if kind in ("water", "hydraulic oil") and pressure is not None:
            arguments["pressure"] = pressure
        if kind != "given" and "temperature" not in arguments:
            raise case.missing("fluid.temperature")
    return _MAKERS[kind](**arguments)


def _refuse_strangers(case: Case, kind: str) -> None:
    """A given of another kind of liquid would be ignored in silence."""
    if case.get("fluid.gas_fraction") is not None:
        return
    known = set(_KEYS[kind]) | {
        "kind", "id", "extrapolate", "gas_release_pressure", "vapour_pressure", "bulk_modulus", "gas_fraction_at_atmosphere",
        "gas_fraction_at_line_pressure",
    }  # fmt: skip
    for name in case.get("fluid") or {}:
        if name not in known:
            raise InputError(
                f"fluid.{name} does not belong to a liquid of kind {kind!r}, which takes {', '.join(_KEYS[kind])}; take it out or change the kind",
                name=f"fluid.{name}", value=case.get(f"fluid.{name}"),
            )  # fmt: skip
