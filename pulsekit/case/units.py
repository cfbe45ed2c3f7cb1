"""The units in which an answer's reader sees each dimension: what she set, typed, or has in the recording's header."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from ..errors import InputError
from ..quantities import DIMENSIONS, parse_unit, unit_dimension
from .case import Case
from .schema import key_of

__all__ = ["reader_units"]

_USUAL = {
    "wall shear": {
        "flow_rate": "mL/min", "velocity": "cm/s", "pressure": "Pa", "pressure_gradient": "Pa/m", "length": "mm", "viscosity": "mPa*s", "time": "s",
        "volume": "mL",
    },
    "pump line": {
        "flow_rate": "L/min", "velocity": "m/s", "pressure": "bar", "length": "m", "viscosity": "mPa*s", "time": "s", "volume": "L",
        "frequency": "Hz", "force": "N",
    },
}  # fmt: skip
#: Keys whose typed unit says how a dimension is to be read; the first that is there decides.
_TYPED = {
    "wall shear": {
        "length": ("tube.radius", "tube.diameter", "tube.outer_diameter"), "viscosity": ("fluid.viscosity",), "flow_rate": ("recording.mean_flow",),
    },
    "pump line": {"pressure": ("operation.mean_pressure",), "flow_rate": ("operation.mean_flow", "source.mean_flow"), "length": ("element.0.length",)},
}  # fmt: skip


def reader_units(case: Case, signal: Any = None) -> Mapping[str, str]:
    """Return dimension (or name of a finding) -> unit.

    Raises
    ------
    InputError
        If [report] units names something that is no dimension and no finding, or a unit that is not known.
    """
    units = dict(_USUAL[case.kind])
    # In a tube "pressure" is how wall shear is shown: the recording's mmHg say nothing about that.
    if signal is not None and signal.unit and signal.dimension in ("flow_rate", "velocity"):
        units[signal.dimension] = signal.unit
    if signal is not None and signal.unit and signal.dimension == "pressure" and (case.kind == "pump line" or case.get("recording.quantity") == "wall_shear_stress"):
        units["pressure"] = signal.unit
    for dimension, keys in _TYPED[case.kind].items():
        for key in keys:
            if case.get(key) is not None and key_of(key) is not None:
                given = case.given(key)
                if given.unit and given.dimension == dimension and isinstance(case.get(key), str):
                    units[dimension] = given.unit
                    break
    if case.kind == "pump line":
        units["largest_wall_shear_amplitude"] = "Pa"
        speed = case.maybe("operation.speed") or case.maybe("operation.motor_speed")
        if speed is not None and speed.unit:
            units |= dict.fromkeys(("worst_speed_within_10_percent", "worst_speed_in_range"), speed.unit)
    for name, unit in (case.get("report.units") or {}).items():
        parse_unit(str(unit))
        if name in DIMENSIONS and unit_dimension(str(unit)) not in (name, None):
            raise InputError(f"report.units.{name} = {unit!r} is not a unit of {name.replace('_', ' ')}", name=f"report.units.{name}", value=unit)
        units[str(name)] = str(unit)
    return units
