"""The pictures of the wall-shear workbench: functions of an answer (and of a pinned one), without widgets."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..quantities import pretty_unit
from ..report.drawing import shown, unit_of
from ..report.tube_figures import measured_name
from .charts import Axis, Panel, Series, thinned

__all__ = ["LAYOUT", "NAMES", "wall_shear_panels"]

#: Places of the panels in the grid of the page, and which need a solved flow.
LAYOUT = (
    "recording recording",
    "cycles harmonics",
    "profile field",
    "wall_shear_stress pressure_gradient",
)
#: Titles of the pictures.
NAMES = {
    "recording": "Recording and its cycles",
    "cycles": "All cycles on one period",
    "harmonics": "Harmonics kept",
    "profile": "Velocity across the diameter",
    "field": "Velocity over radius and time",
    "wall_shear_stress": "Wall shear stress",
    "pressure_gradient": "Pressure gradient",
}
_INSTANTS = 256
_RADII = 64


def _label(answer: Any, name: str, dimension: str) -> str:
    unit = unit_of(answer, dimension)
    return f"{name} ({pretty_unit(unit)})" if unit else name


def _cycle_axis(answer: Any) -> Axis:
    """Time in the cycle, under the one cursor in time."""
    return Axis(label="Time in the cycle (s)", low=0.0, high=_period(answer), link="time")


def _period(answer: Any) -> float:
    return float(answer.harmonics.period)


def _instants(answer: Any) -> NDArray[np.float64]:
    """Instants of one period, its end included, so that curves close."""
    return np.linspace(0.0, _period(answer), _INSTANTS + 1)


def _curve(answer: Any, harmonics: Any, dimension: str) -> NDArray[np.float64]:
    values = harmonics.evaluate(np.arange(_INSTANTS) * harmonics.period / _INSTANTS)
    return np.asarray(shown(answer, np.append(values, values[0]), dimension))


def recording_panel(answer: Any, reference: Any = None) -> Panel:
    """The recording over time with its cycles; a click on one leaves it out."""
    name, dimension = measured_name(answer)
    signal, cycles = answer.signal, answer.cycles
    time, values = thinned(signal.time, shown(answer, np.asarray(signal.values), dimension))
    edges = np.asarray(cycles.all_onsets)
    reasons = dict(cycles.left_out)
    states = ["" if index not in reasons else str(reasons[index]) for index in range(edges.size - 1)]
    kept = list(cycles.kept)
    return Panel(
        id="recording", title=NAMES["recording"], click="leave_out",
        note=f"{cycles.count} of {edges.size - 1} cycles used; click one to leave it out",
        x=Axis(label="Time (s)", low=float(time[0]), high=float(time[-1]), link="time", starts=edges[:-1][kept], lengths=np.diff(edges)[kept]),
        y=Axis(label=_label(answer, name, dimension)),
        series=[
            Series(kind="spans", role="left_out", arrays=[edges[:-1], edges[1:]], options={"states": states}),
            Series(kind="line", role="measured", arrays=[time, values], thin=True, name="recorded"),
        ],
    )  # fmt: skip


def cycles_panel(answer: Any, reference: Any = None) -> Panel:
    """All cycles on one period with their mean and the curve rebuilt from the kept harmonics."""
    name, dimension = measured_name(answer)
    count = min(answer.cycles.count, 60)
    picks = np.linspace(0, answer.cycles.count - 1, count).round().astype(int)
    points = 97
    phase = np.linspace(0.0, 1.0, points)
    folded = shown(answer, np.asarray(answer.cycles.folded(phase)), dimension)
    time = phase * _period(answer)
    broken = np.concatenate([folded[picks], np.full((count, 1), np.nan)], axis=1).ravel()
    with np.errstate(invalid="ignore"):
        present = np.isfinite(folded)
        mean = np.where(present, folded, 0.0).sum(axis=0) / np.maximum(present.sum(axis=0), 1)
    series = [
        Series(kind="line", role="measured", arrays=[np.tile(np.append(time, np.nan), count), broken], thin=True, pale=True, name="cycles"),
        Series(kind="line", role="measured", arrays=[time, mean], dash=True, name="mean"),
        Series(
            kind="line", role="flow", arrays=[_instants(answer), _curve(answer, answer.harmonics, dimension)], name="rebuilt", reading=True
        ),
    ]
    return Panel(id="cycles", title=NAMES["cycles"], x=_cycle_axis(answer), y=Axis(label=_label(answer, name, dimension)), series=series)


def harmonics_panel(answer: Any, reference: Any = None) -> Panel:
    """Amplitude of each kept harmonic of the measured quantity with its standard error."""
    name, dimension = measured_name(answer)
    harmonics = answer.harmonics
    orders = np.arange(1, harmonics.count + 1)
    amplitude = np.asarray(harmonics.amplitude)[1:]
    errors = harmonics.standard_error
    spread = np.full(orders.size, np.nan) if errors is None else np.hypot(np.asarray(errors)[1:, 0], np.asarray(errors)[1:, 1])
    series = [
        Series(
            kind="stems", role="flow", name="amplitude, ± standard error",
            arrays=[orders, shown(answer, amplitude, dimension), shown(answer, spread, dimension)],
        )
    ]  # fmt: skip
    if reference is not None and measured_name(reference)[1] == dimension:
        other = np.asarray(reference.harmonics.amplitude)[1:]
        series.insert(
            0,
            Series(
                kind="dots", role="flow", pale=True, arrays=[np.arange(1, other.size + 1), shown(answer, other, dimension)], name="pinned"
            ),
        )
    return Panel(
        id="harmonics", title=NAMES["harmonics"], note=f"fundamental {harmonics.frequency:.4g} Hz",
        x=Axis(label="Harmonic", low=0.4, high=max(float(harmonics.count), 1.0) + 0.6), y=Axis(label=_label(answer, name, dimension), zero=True),
        series=series,
    )  # fmt: skip


def _field(answer: Any) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Velocity over the whole diameter (2 n - 1, instants) and the distances from the axis, in the reader's units."""
    edge = float(answer.flow.tube.radius)
    radius = np.linspace(0.0, edge, _RADII // 2)
    period = answer.flow.mean_velocity.period
    time = np.arange(_INSTANTS // 2) * period / (_INSTANTS // 2)
    half = shown(answer, np.asarray(answer.flow.velocity(radius, time)), "velocity")
    places = shown(answer, radius, "length")
    whole = np.concatenate([half[:0:-1], half])
    return np.concatenate([whole, whole[:, :1]], axis=1), np.concatenate([-places[:0:-1], places])


def field_panels(answer: Any, reference: Any = None) -> tuple[Panel, Panel]:
    """Velocity profile at the cursor over the envelope of all instants; and velocity over radius and time."""
    field, places = _field(answer)
    speed, distance = _label(answer, "Velocity", "velocity"), _label(answer, "Distance from the axis", "length")
    options = {
        "rows": int(places.size),
        "columns": int(field.shape[1]),
        "x": [0.0, _period(answer)],
        "y": [float(places[0]), float(places[-1])],
    }
    heat = Series(kind="heat", role="field", arrays=[field], name="velocity", options=options | {"label": speed})
    wall = float(places[-1])
    across = [
        Series(kind="band", role="flow", arrays=[places, field.min(axis=1), field.max(axis=1)], name="all instants"),
        Series(kind="slice", role="flow", name="at the cursor", options={"of": ["field", 0], "link": "time", "reading": "centre"}),
        Series(kind="rule", role="ink", arrays=[[0.0]], thin=True),
    ]
    if reference is not None and reference.flow is not None:
        other, other_places = _field(_in_units_of(reference, answer))
        across.insert(
            0, Series(kind="band", role="flow", pale=True, arrays=[other_places, other.min(axis=1), other.max(axis=1)], name="pinned")
        )
        wall = max(wall, float(other_places[-1]))
    profile = Panel(
        id="profile",
        title=NAMES["profile"],
        x=Axis(label=distance, low=-wall, high=wall),
        y=Axis(label=speed, zero=True),
        series=across,
    )
    over_time = Panel(
        id="field", title=NAMES["field"], x=_cycle_axis(answer),
        y=Axis(label=distance, low=float(places[0]), high=float(places[-1])), series=[heat],
    )  # fmt: skip
    return profile, over_time


def _in_units_of(reference: Any, answer: Any) -> Any:
    """The pinned answer, shown in the units of the live one."""
    return reference.replace(units=answer.units)


def _band_panel(answer: Any, reference: Any, *, name: str, title: str, dimension: str, role: str, bands: Any) -> Panel:
    curve = _curve(answer, getattr(answer.flow, name), dimension)
    time = _instants(answer)
    series = []
    if reference is not None and reference.flow is not None:
        other = _curve(answer, getattr(reference.flow, name), dimension)
        # Pinned curves are laid over the live period: what differs is the shape, not the length of a cycle.
        series.append(Series(kind="line", role=role, pale=True, arrays=[time, other], name="pinned"))
    if bands and name in bands:
        band = bands[name]
        low, high = (shown(answer, np.append(edge, edge[0]), dimension) for edge in (np.asarray(band.low), np.asarray(band.high)))
        at = np.append(np.asarray(band.time), np.asarray(band.time)[0] + _period(answer))
        series.append(Series(kind="band", role=role, arrays=[at, low, high], name="95 % band"))
    series.append(Series(kind="rule", role="ink", arrays=[[0.0]], thin=True))
    series.append(Series(kind="line", role=role, arrays=[time, curve], name="stated givens", reading=True))
    if name == "wall_shear_stress" and answer.flow.mean_known:
        steady = answer.findings.get("steady_wall_shear_stress")
        if steady is not None and steady.value is not None:
            level = float(shown(answer, steady.value, dimension))
            series.append(Series(kind="rule", role="steady", dash=True, arrays=[[level]], name="steady"))
    return Panel(id=name, title=title, x=_cycle_axis(answer), y=Axis(label=_label(answer, title, dimension), zero=True), series=series)


def shear_panel(answer: Any, reference: Any = None) -> Panel:
    """Wall shear over the cycle with its 95 % band and the steady estimate."""
    return _band_panel(
        answer, reference, name="wall_shear_stress", title="Wall shear stress", dimension="pressure", role="shear", bands=answer.bands
    )  # fmt: skip


def gradient_panel(answer: Any, reference: Any = None) -> Panel:
    """Pressure gradient over the cycle with its 95 % band."""
    return _band_panel(
        answer, reference, name="pressure_gradient", title="Pressure gradient", dimension="pressure_gradient", role="gradient", bands=answer.bands
    )  # fmt: skip


_OF_RECORDING: tuple[Callable[..., Panel], ...] = (recording_panel, cycles_panel, harmonics_panel)
_OF_FLOW: tuple[Callable[..., Panel], ...] = (shear_panel, gradient_panel)


def wall_shear_panels(shown_: Any, reference: Any = None) -> list[Panel]:
    """Every picture that can be drawn of an answer, or of a recording before there is one."""
    if shown_ is None or getattr(shown_, "cycles", None) is None:
        return []
    panels = [draw(shown_, reference) for draw in _OF_RECORDING]
    if shown_.flow is not None:
        panels += [*field_panels(shown_, reference), *(draw(shown_, reference) for draw in _OF_FLOW)]
    return panels
