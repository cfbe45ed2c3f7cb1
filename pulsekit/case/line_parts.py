"""The line that a pump-line case describes: elements, end, liquid and operating point."""

from __future__ import annotations

from typing import Any

from ..errors import CaseError, InputError
from ..fluids import Fluid
from ..line import (
    ClosedEnd,
    Element,
    End,
    GasDamper,
    Hose,
    ImpedanceEnd,
    Line,
    MatchedEnd,
    OpenEnd,
    Pipe,
    Restrictor,
    RestrictorEnd,
    SideBranch,
    Volume,
)  # fmt: skip
from ..line.medium import Medium, refuse_bare_gas
from ..quantities import Given
from .case import Case
from .liquids import fluid_of

__all__ = ["AMBIENT", "ambient_of", "line_of", "mean_pressure_of", "shaft_speed"]

AMBIENT = 101325.0

_SIZES = ("length", "radius", "diameter", "outer_diameter", "wall_thickness")
_TAKES = {
    "pipe": (*_SIZES, "nominal_size", "schedule", "wave_speed", "young_modulus", "poisson_ratio", "anchoring", "roughness", "straight"),
    "hose": ("length", "radius", "diameter", "wave_speed", "young_modulus", "wall_thickness", "loss_factor"),
    "restrictor": ("pressure_drop", "flow", "law"),
    "volume": ("volume",),
    "gas damper": (
        "gas_volume", "pressure", "polytropic_exponent", "nominal_volume", "precharge", "precharge_temperature", "neck_length", "neck_radius",
    ),
}  # fmt: skip
_MAKERS: dict[str, Any] = {"pipe": Pipe, "hose": Hose, "restrictor": Restrictor, "volume": Volume, "gas damper": GasDamper}
_NEEDS = {"pipe": ("length",), "hose": ("length",), "restrictor": ("pressure_drop", "flow"), "volume": ("volume",), "gas damper": (), "side branch": ("element", "end")}
_COMMON = ("name", "rated_pressure", "relief_setting")
_PLAIN = ("nominal_size", "schedule", "anchoring", "straight", "law", "name")


def _element(case: Case, prefix: str) -> Element:
    kind = case.get(f"{prefix}.kind")
    if kind is None:
        raise case.missing(f"{prefix}.kind")
    for name in _NEEDS[kind]:
        if case.get(f"{prefix}.{name}") is None:
            raise case.missing(f"{prefix}.{name}")
    table = case.get(prefix)
    arguments: dict[str, Any] = {}
    for name in table:
        if name in ("kind", "id", "element", "end"):
            continue
        if name not in (*_TAKES.get(kind, ()), *_COMMON):
            raise CaseError(
                f"{prefix}.{name} does not belong to a {kind}, which takes {', '.join(_TAKES.get(kind, ('element', 'end')))}; take it out", key=f"{prefix}.{name}"
            )
        arguments[name] = str(table[name]) if name in ("nominal_size", "schedule") else table[name] if name in _PLAIN else case.given(f"{prefix}.{name}")
    try:
        if kind == "side branch":
            inner = [_element(case, f"{prefix}.element.{index}") for index in range(len(table["element"]))]
            return SideBranch(inner, end=_end(case, f"{prefix}.end"), **arguments)
        made: Element = _MAKERS[kind](**arguments)
        return made
    except (InputError, TypeError) as problem:
        if isinstance(problem, CaseError):
            raise
        raise CaseError(f"{prefix} ({kind}): {problem}", key=prefix) from problem


def _end(case: Case, prefix: str) -> End:
    kind = case.get(f"{prefix}.kind")
    if kind is None:
        raise case.missing(f"{prefix}.kind")
    if kind == "restrictor":
        for name in ("pressure_drop", "flow"):
            if case.get(f"{prefix}.{name}") is None:
                raise case.missing(f"{prefix}.{name}")
        return RestrictorEnd(case.given(f"{prefix}.pressure_drop"), case.given(f"{prefix}.flow"), law=str(case.get(f"{prefix}.law") or "turbulent"))
    if kind == "impedance":
        if case.get(f"{prefix}.impedance") is None:
            raise case.missing(f"{prefix}.impedance")
        return ImpedanceEnd(case.given(f"{prefix}.impedance"))
    return {"closed": ClosedEnd, "open": OpenEnd, "matched": MatchedEnd}[kind]()


def ambient_of(case: Case) -> float:
    """Pressure of the surroundings [Pa, absolute]."""
    given = case.maybe("operation.ambient_pressure")
    return AMBIENT if given is None else given.value


def absolute(given: Given, ambient: float) -> Given:
    """A pressure given as absolute; a plain one of [operation] is gauge."""
    from dataclasses import replace

    return given if given.reference == "absolute" else replace(given, value=given.value + ambient, reference="absolute")


def mean_pressure_of(case: Case) -> Given | None:
    """Absolute mean pressure at 0 m."""
    given = case.maybe("operation.mean_pressure")
    return None if given is None else absolute(given, ambient_of(case))


def shaft_speed(case: Case) -> Given:
    """Speed of the pump's shaft [Hz]: speed, or motor_speed over gear_ratio."""
    from dataclasses import replace

    own = case.maybe("source.speed") if not isinstance(case.get("source"), list) else None
    speed = own or case.maybe("operation.speed")
    motor = case.maybe("operation.motor_speed")
    if speed is not None and motor is not None:
        raise CaseError("operation: give speed (of the pump's shaft) or motor_speed with gear_ratio, not both", key="operation.motor_speed")
    if speed is not None:
        return speed
    if motor is None:
        raise case.missing("operation.speed")
    ratio = case.get("operation.gear_ratio")
    if ratio is None:
        raise case.missing("operation.gear_ratio")
    return replace(motor, value=motor.value / float(ratio), standard_uncertainty=motor.standard_uncertainty / float(ratio))


def line_of(case: Case) -> tuple[Line, Fluid]:
    """Return the line of a case and its liquid.

    Raises
    ------
    CaseError, InputError
        If an element, the end or the liquid is missing or makes no sense.
    """
    pressure = mean_pressure_of(case)
    fluid = fluid_of(case, pressure=pressure)
    if case.get("fluid.bulk_modulus") is not None and fluid.bulk_modulus is None:
        fluid = fluid.replace(bulk_modulus=case.given("fluid.bulk_modulus"))
    if not case.get("element"):
        raise case.missing("element")
    if case.get("end") is None:
        raise CaseError("the line has no end; add [end] with kind = closed, open, matched, restrictor or impedance", key="end")
    bare = case.value("fluid.gas_fraction", "ratio")
    if bare is not None:
        raise refuse_bare_gas(
            bare, Medium(density=fluid.density, viscosity=fluid.viscosity, bulk_modulus=fluid.bulk_modulus, pressure=None if pressure is None else pressure.value)
        )
    elements = [_element(case, f"element.{index}") for index in range(len(case.get("element")))]
    flow = case.maybe("operation.mean_flow")
    line = Line(
        elements, end=_end(case, "end"), fluid=fluid, mean_flow=flow, mean_pressure=pressure, ambient=ambient_of(case),
        gas_fraction_at_atmosphere=case.maybe("fluid.gas_fraction_at_atmosphere", "ratio"),
        gas_fraction_at_line_pressure=case.maybe("fluid.gas_fraction_at_line_pressure", "ratio"),
    )  # fmt: skip
    return line, fluid
