"""An answer's curves as a labelled dataset, for those who go on computing with them."""

from __future__ import annotations

from typing import Any

import numpy as np

from ..errors import MissingExtraError

__all__ = ["dataset_of"]

_UNITS = {
    "flow_rate": "m^3/s", "mean_velocity": "m/s", "centreline_velocity": "m/s", "pressure_gradient": "Pa/m", "wall_shear_stress": "Pa",
}  # fmt: skip


def dataset_of(answer: Any, *, instants: int = 256, places: int = 65) -> Any:
    """Return the curves of an answer over one cycle as an ``xarray.Dataset`` in SI, units in the attributes.

    Parameters
    ----------
    answer : Answer
    instants : int
        Over one cycle.
    places : int
        Radii from the axis to the wall (tube), or positions along the line.

    Returns
    -------
    xarray.Dataset
        Tube: each curve with ``_low`` and ``_high`` where there is a band, and ``velocity`` over radius and time.
        Line: ``pressure`` (about the mean) and ``flow_rate`` over position and time.

    Raises
    ------
    MissingExtraError
        If xarray is not installed.
    """
    try:
        import xarray
    except ImportError as problem:
        raise MissingExtraError("a labelled dataset needs xarray; install it with: pip install 'pulsekit[labelled]'", extra="labelled") from problem
    found = _tube(answer, instants, places) if answer.kind == "wall shear" else _line(answer, instants, places)
    dataset = xarray.Dataset(
        {name: (dimensions, values, {"units": unit}) for name, (dimensions, values, unit) in found[0].items()},
        coords={name: (name, values, {"units": unit}) for name, (values, unit) in found[1].items()},
    )
    return dataset.assign_attrs(title=str(answer.case.get("title") or ""), version=str(answer.provenance.get("version", "")), overall=answer.overall)


def _tube(answer: Any, instants: int, places: int) -> tuple[dict[str, Any], dict[str, Any]]:
    flow = answer.flow
    time = np.arange(instants) * flow.flow_rate.period / instants
    radius = np.linspace(0.0, flow.tube.length_scale, places)
    variables: dict[str, Any] = {}
    for name, unit in _UNITS.items():
        variables[name] = (("time",), np.asarray(getattr(flow, name).evaluate(time)), unit)
        band = answer.bands.get(name)
        if band is not None:
            for end in ("low", "high"):
                values = np.interp(time, np.append(band.time, flow.flow_rate.period), np.append(getattr(band, end), getattr(band, end)[0]))
                variables[f"{name}_{end}"] = (("time",), values, unit)
    variables["velocity"] = (("radius", "time"), np.asarray(flow.velocity(radius, time)), "m/s")
    return variables, {"time": (time, "s"), "radius": (radius, "m")}


def _line(answer: Any, instants: int, places: int) -> tuple[dict[str, Any], dict[str, Any]]:
    response = answer.response
    time = np.arange(instants) / response.frequency / instants
    position = np.linspace(0.0, response.line.length, places)
    pressure = np.stack([np.asarray(response.pressure(float(x)).evaluate(time)) for x in position])
    flow = np.stack([np.asarray(response.flow_rate(float(x)).evaluate(time)) for x in position])
    variables = {
        "pressure": (("position", "time"), pressure, "Pa"), "flow_rate": (("position", "time"), flow, "m^3/s"),
    }  # fmt: skip
    return variables, {"time": (time, "s"), "position": (position, "m")}
