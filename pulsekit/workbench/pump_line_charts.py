"""The pictures of the pump-line workbench: functions of an answer, without widgets. Every pulsation is peak to peak."""

from __future__ import annotations

from typing import Any

import numpy as np

from ..quantities import pretty_unit
from ..report.drawing import shown, unit_of
from .charts import Axis, Panel, Series, thinned

__all__ = ["LAYOUT", "NAMES", "pump_line_panels"]

LAYOUT = ("envelope envelope", "drawing drawing", "orders turn", "field speed", "impedance recording")
NAMES = {
    "envelope": "Pressure pulsation along the line, p-p",
    "drawing": "The line to scale",
    "orders": "Orders of the shaft, p-p",
    "field": "Pressure over position and time",
    "turn": "One turn at the cursor's position",
    "speed": "Largest pulsation over speed, p-p",
    "impedance": "Input impedance",
    "recording": "Recordings",
}
_PLACES = 97
_INSTANTS = 128


def _label(answer: Any, name: str, dimension: str) -> str:
    unit = unit_of(answer, dimension)
    return f"{name} ({pretty_unit(unit)})" if unit else name


def _along(answer: Any) -> Axis:
    return Axis(
        label=_label(answer, "Position from the source", "length"),
        low=0.0,
        high=float(shown(answer, answer.response.line.length, "length")),
        link="position",
    )


def _places(answer: Any) -> Any:
    return np.linspace(0.0, answer.response.line.length, _PLACES)


def envelope_panel(answer: Any, reference: Any = None) -> Panel:
    """Peak-to-peak pressure along the line, with its band and the measured points."""
    places = _places(answer)
    at = shown(answer, places, "length")
    series = []
    if reference is not None and reference.response is not None:
        other = _places(reference)
        series.append(
            Series(
                kind="line", role="gradient", pale=True, name="pinned",
                arrays=[shown(answer, other, "length"), shown(answer, reference.response.envelope(other), "pressure")],
            )
        )  # fmt: skip
    band = answer.bands.get("envelope") if answer.bands else None
    if band is not None:
        spots = shown(answer, np.asarray(answer.extras["positions"]), "length")
        series.append(
            Series(
                kind="band",
                role="gradient",
                name="95 %",
                arrays=[spots, shown(answer, band.low, "pressure"), shown(answer, band.high, "pressure")],
            )
        )
    series.append(
        Series(kind="line", role="gradient", name="computed", reading=True, arrays=[at, shown(answer, answer.response.envelope(places), "pressure")])
    )  # fmt: skip
    stations = answer.extras.get("stations") or ()
    if stations:
        spots = [shown(answer, station.position, "length") for station in stations]
        sizes = [shown(answer, _swing(station.harmonics), "pressure") for station in stations]
        series.append(Series(kind="dots", role="measured", name="measured, mean turn", arrays=[spots, sizes]))
    return Panel(
        id="envelope",
        title=NAMES["envelope"],
        x=_along(answer),
        y=Axis(label=_label(answer, "Pressure p-p", "pressure"), low=None, zero=True),
        series=series,
    )


def _swing(harmonics: Any) -> float:
    course = harmonics.evaluate(np.arange(512) * harmonics.period / 512)
    return float(np.ptp(course))


def drawing_panel(answer: Any, selected: int = 0) -> Panel:
    """The line from source to end: bores to scale, marks where an element has no length, the selected one highlighted."""
    line = answer.response.line
    starts = shown(answer, line.starts, "length")
    total = float(starts[-1]) or 1.0
    slim = 0.012 * total
    left, right, labels, hints, states = [], [], [], [], []
    outline_x: list[float] = []
    outline_y: list[float] = []
    widest = max(element.radius for element in line.elements if element.length > 0)
    for place, element in enumerate(line.elements):
        a, b = float(starts[place]), float(starts[place + 1])
        if element.length == 0:
            a, b = a - slim, a + slim
        left.append(a)
        right.append(b)
        labels.append(_SHORT.get(element.kind, element.kind) if element.length == 0 else str(place + 1))
        hints.append(f"{place + 1}: {element.name or element.kind}. Click to select it.")
        states.append("selected" if place == selected else "")
        if element.length > 0:
            size = element.radius / widest
            outline_x += [a, b, np.nan, a, b, np.nan]
            outline_y += [size, size, np.nan, -size, -size, np.nan]
    series = [
        Series(kind="spans", role="left_out", arrays=[left, right], options={"states": states, "labels": labels, "hints": hints}),
        Series(kind="line", role="ink", arrays=[outline_x, outline_y], name="bore"),
    ]
    stations = answer.extras.get("stations") or ()
    if stations:
        series.append(
            Series(
                kind="dots",
                role="measured",
                name="stations",
                arrays=[[shown(answer, s.position, "length") for s in stations], [0.0] * len(stations)],
            )
        )
    return Panel(
        id="drawing", title=NAMES["drawing"], click="select_element", note=f"source at 0, {line.end.kind} end; click an element to select it", x=_along(answer),
        y=Axis(label="Bore", low=-1.6, high=1.6, ticks={0.0: " "}), series=series,
    )  # fmt: skip


_SHORT = {"restrictor": "R", "side branch": "B", "volume": "V", "gas damper": "D"}


def orders_panel(answer: Any, reference: Any = None) -> Panel:
    """Pressure per order at the source, at the stations, and the allowed level where a rule is in use."""
    response = answer.response
    orders = np.arange(1, response.count + 1)
    sizes = 2 * np.abs(response.pressures([0.0])[0])
    series = [
        Series(
            kind="stems",
            role="gradient",
            name="computed at 0 m",
            arrays=[orders, shown(answer, sizes, "pressure"), np.full(orders.size, np.nan)],
        )
    ]
    for station in answer.extras.get("stations") or ():
        tall = shown(answer, station.harmonics.peak_to_peak[1:], "pressure")
        series.append(
            Series(kind="dots", role="measured", name=f"measured, {station.name}", arrays=[np.arange(1, np.size(tall) + 1), tall])
        )
    rule = answer.extras.get("rule")
    if rule is not None:
        bore = 2 * next(element.radius for element in response.line.elements if element.length > 0)
        series.append(
            Series(kind="line", role="fails", name="allowed", arrays=[orders, shown(answer, rule.allowed(orders * response.frequency, bore), "pressure")])
        )  # fmt: skip
    if reference is not None and reference.response is not None:
        other = 2 * np.abs(reference.response.pressures([0.0])[0])
        series.append(
            Series(
                kind="dots",
                role="gradient",
                pale=True,
                name="pinned",
                arrays=[np.arange(1, other.size + 1), shown(answer, other, "pressure")],
            )
        )
    return Panel(
        id="orders", title=NAMES["orders"], note=f"order 1 is {response.frequency:.4g} Hz, {60 * response.frequency:.4g} rpm",
        x=Axis(label="Order of the shaft", low=0.4, high=response.count + 0.6), y=Axis(label=_label(answer, "Pressure p-p", "pressure"), zero=True), series=series,
    )  # fmt: skip


def turn_panel(answer: Any) -> tuple[Panel, Series]:
    """Pressure over one turn at the cursor's position: a column of the field of pressure over position and time."""
    response = answer.response
    field = shown(answer, response.courses(_places(answer), instants=_INSTANTS), "pressure")
    closed = np.concatenate([field, field[:, :1]], axis=1).T
    turn = 1e3 / response.frequency
    heat = Series(
        kind="heat", role="field", name="pressure", arrays=[closed],
        options={
            "rows": _INSTANTS + 1, "columns": _PLACES, "x": [0.0, float(shown(answer, response.line.length, "length"))], "y": [0.0, turn],
            "label": _label(answer, "Pressure about its mean", "pressure"),
        },
    )  # fmt: skip
    stations = answer.extras.get("stations") or ()
    series = []
    time = np.linspace(0, turn, 257)
    for station in stations:
        course = station.harmonics.evaluate(time / 1e3) - station.harmonics.mean
        series.append(
            Series(
                kind="line", role="measured", thin=True, name=f"measured, {station.name}", arrays=[time, shown(answer, course, "pressure")]
            )
        )
    series.append(Series(kind="slice", role="gradient", name="computed at the cursor", options={"of": ["field", 0], "link": "position"}))
    highest = float(np.abs(closed).max()) or 1.0
    return Panel(
        id="turn", title=NAMES["turn"], x=Axis(label="Time in the turn (ms)", low=0.0, high=turn),
        y=Axis(label=_label(answer, "Pressure", "pressure"), low=-1.1 * highest, high=1.1 * highest), series=[*series], note="move the cursor along the line",
    ), heat  # fmt: skip


def field_panel(answer: Any, heat: Series) -> Panel:
    """Pressure over position and time: where it swings, and how waves travel."""
    turn = 1e3 / answer.response.frequency
    return Panel(
        id="field", title=NAMES["field"], x=_along(answer), y=Axis(label="Time (ms)", low=0.0, high=turn), series=[heat],
    )  # fmt: skip


def speed_panel(answer: Any) -> Panel | None:
    """Largest pulsation over speed, with the stated speed."""
    found = answer.extras.get("speed_map")
    if found is None:
        return None
    rpm = 60 * found.speeds
    swing = shown(answer, found.peak_to_peak.max(axis=1), "pressure")
    here = 60 * answer.response.frequency
    bands = answer.extras.get("speeds_to_avoid") or ()
    series = [Series(kind="line", role="gradient", name="largest along the line", reading=True, arrays=[rpm, swing])]
    for low, high in bands:
        series.append(Series(kind="line", role="fails", name="to be avoided", arrays=[[60 * low, 60 * high], [0.0, 0.0]]))
    series.append(Series(kind="line", role="cursor", name="present speed", thin=True, arrays=[[here, here], [0.0, float(np.max(swing))]]))
    return Panel(
        id="speed", title=NAMES["speed"], x=Axis(label="Speed (rpm)", low=float(rpm[0]), high=float(rpm[-1]), link="speed"),
        y=Axis(label=_label(answer, "Pressure p-p", "pressure"), zero=True), series=series,
    )  # fmt: skip


def impedance_panel(answer: Any, reference: Any = None) -> Panel:
    """Magnitude of the input impedance, in decades, with the resonances."""
    response = answer.response
    highest = max(response.frequency * min(response.count, 40), 50.0)
    hertz = np.linspace(highest / 400, highest, 400)

    def level(line: Any, medium: Any, values: Any) -> Any:
        return np.log10(np.abs(line.loads(2 * np.pi * hertz, medium, values)[0].impedance))

    own = level(response.line, response.medium, response.values)
    series = [Series(kind="line", role="flow", name="|Z|", reading=True, arrays=[hertz, own])]
    if reference is not None and reference.response is not None:
        other = reference.response
        series.insert(
            0, Series(kind="line", role="flow", pale=True, name="pinned", arrays=[hertz, level(other.line, other.medium, other.values)])
        )
    found = answer.extras.get("resonances")
    if found:
        spots = [one.frequency for one in found]
        series.append(Series(kind="dots", role="cursor", name="resonances", arrays=[spots, np.interp(spots, hertz, own)]))
    return Panel(
        id="impedance", title=NAMES["impedance"], x=Axis(label="Frequency (Hz)", low=0.0, high=highest), y=Axis(label="log₁₀ |Z| (Pa·s/m³)"), series=series,
    )  # fmt: skip


def recording_panel(answer: Any) -> Panel | None:
    """The recordings over time with the turns of the shaft."""
    stations = answer.extras.get("stations") or ()
    channels = [(station.name, station.signal) for station in stations] or (
        [(answer.signal.name, answer.signal)] if answer.signal is not None else []
    )
    if not channels or answer.cycles is None:
        return None
    edges = np.asarray(answer.cycles.all_onsets)
    reasons = dict(answer.cycles.left_out)
    states = ["" if index not in reasons else str(reasons[index]) for index in range(edges.size - 1)]
    roles = ("measured", "gradient", "flow", "shear")
    series = [Series(kind="spans", role="left_out", arrays=[edges[:-1], edges[1:]], options={"states": states})]
    for index, (name, signal) in enumerate(channels):
        time, values = thinned(signal.time, shown(answer, np.asarray(signal.values), signal.dimension or "pressure"), most=1600)
        series.append(Series(kind="line", role=roles[index % 4], thin=True, name=str(name), arrays=[time, values]))
    time = channels[0][1].time
    return Panel(
        id="recording", title=NAMES["recording"], click="leave_out", note=f"{answer.cycles.count} of {edges.size - 1} turns used; click one to leave it out",
        x=Axis(label="Time (s)", low=float(time[0]), high=float(time[-1])),
        y=Axis(label=_label(answer, "Recorded", channels[0][1].dimension or "pressure")), series=series,
    )  # fmt: skip


def pump_line_panels(answer: Any, reference: Any = None, *, selected: int = 0) -> list[Panel]:
    """Every picture that can be drawn of an answer."""
    if answer is None or getattr(answer, "response", None) is None:
        return []
    turn, heat = turn_panel(answer)
    panels: list[Panel | None] = [
        envelope_panel(answer, reference), drawing_panel(answer, selected), field_panel(answer, heat), orders_panel(answer, reference), turn, speed_panel(answer),
        impedance_panel(answer, reference), recording_panel(answer),
    ]  # fmt: skip
    return [panel for panel in panels if panel is not None]
