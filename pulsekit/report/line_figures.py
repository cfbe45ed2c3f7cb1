"""Still pictures of a pump-line answer: each a function of the answer. Every pulsation is peak to peak."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any

import numpy as np

from .drawing import axis_label, new_figure, plain, shown
from .palette import LIGHT

if TYPE_CHECKING:
    from matplotlib.figure import Figure

__all__ = ["envelope_figure", "line_figures"]


def _fine(answer: Any) -> np.ndarray:
    return np.asarray(answer.response.grid(161))


def envelope_figure(answer: Any) -> Figure:
    """Peak-to-peak pressure along the line, over a drawing of the line to scale."""
    figure, axes = new_figure("Pressure pulsation along the line, peak to peak", height=2.6)
    response, line = answer.response, answer.response.line
    places = _fine(answer)
    band = answer.bands.get("envelope") if answer.bands else None
    if band is not None:
        axes.fill_between(
            shown(answer, answer.extras["positions"], "length"), shown(answer, band.low, "pressure"), shown(answer, band.high, "pressure"),
            color=LIGHT["gradient"], alpha=0.2, linewidth=0, label="95 % band",
        )  # fmt: skip
    swing = shown(answer, response.envelope(places), "pressure")
    axes.plot(shown(answer, places, "length"), swing, color=LIGHT["gradient"], label="computed")
    stations = answer.extras.get("stations") or ()
    if stations:
        spots = [shown(answer, station.position, "length") for station in stations]
        sizes = [shown(answer, _swing(station.harmonics), "pressure") for station in stations]
        axes.plot(spots, sizes, "o", color=LIGHT["ink"], markersize=5, label="measured, mean turn")
    axes.set_ylim(bottom=0)
    bottom = -0.09 * axes.get_ylim()[1]
    for start, element in zip(line.starts[:-1], line.elements, strict=True):
        at = shown(answer, start, "length")
        if element.length > 0:
            style = (0, (2, 1)) if element.kind == "hose" else "solid"
            axes.plot([at, shown(answer, start + element.length, "length")], [bottom, bottom], color=LIGHT["ink"], linewidth=3, linestyle=style, solid_capstyle="butt", clip_on=False)
        else:
            axes.plot([at], [bottom], _MARKS.get(element.kind, "s"), color=LIGHT["shear"], markersize=6, clip_on=False)
    axes.set_ylim(bottom=1.6 * bottom)
    axes.legend(loc="best")
    axes.set_xlabel(axis_label(answer, "Position from the source", "length"))
    axes.set_ylabel(axis_label(answer, "Pulsation p-p", "pressure"))
    axes.margins(x=0.01)
    return figure


_MARKS = {"restrictor": "X", "side branch": "v", "volume": "s", "gas damper": "o"}


def _swing(harmonics: Any) -> float:
    course = harmonics.replace(coefficients=np.concatenate([[0.0], harmonics.coefficients[1:]]), covariance=None).evaluate(
        np.linspace(0, harmonics.period, 1024)
    )
    return float(np.ptp(course))


def spectrum_figure(answer: Any) -> Figure:
    """Pressure per order at the source and at the stations, with the allowed level where a rule is in use."""
    figure, axes = new_figure("Orders of the shaft, peak to peak", width=3.4)
    response = answer.response
    orders = np.arange(1, response.count + 1)
    at_source = 2 * np.abs(response.pressures([0.0])[0])
    axes.vlines(orders, 0, shown(answer, at_source, "pressure"), color=LIGHT["gradient"], linewidth=2, label="computed at 0 m")
    for index, station in enumerate(answer.extras.get("stations") or ()):
        sizes = shown(answer, station.harmonics.peak_to_peak[1:], "pressure")
        axes.plot(
            np.arange(1, sizes.size + 1), sizes, ("o", "^", "s", "d")[index % 4], markersize=3, color=LIGHT["ink"], fillstyle="none",
            label=f"measured, {plain(station.name)}",
        )  # fmt: skip
    rule = answer.extras.get("rule")
    if rule is not None:
        bore = 2 * next(element.radius for element in response.line.elements if element.length > 0)
        axes.plot(orders, shown(answer, rule.allowed(orders * response.frequency, bore), "pressure"), color=LIGHT["fails"], linewidth=1, label="allowed per harmonic")
    axes.legend(loc="upper right")
    axes.set_ylim(bottom=0)
    axes.set_xlabel(f"Order of the shaft ({response.frequency:.4g} Hz)")
    axes.set_ylabel(axis_label(answer, "Pressure p-p", "pressure"))
    return figure


def impedance_figure(answer: Any) -> Figure:
    """Input impedance with the resonances."""
    figure, axes = new_figure("Input impedance and resonances", width=3.4)
    response = answer.response
    highest = max(response.frequency * min(response.count, 40), 50.0)
    hertz = np.linspace(highest / 800, highest, 800)
    omega = 2 * np.pi * hertz
    size = np.abs(response.line.loads(omega, response.medium, response.values)[0].impedance)
    axes.semilogy(hertz, size, color=LIGHT["flow"])
    for found in answer.extras.get("resonances") or ():
        axes.axvline(found.frequency, color=LIGHT["cursor"], linewidth=0.8, linestyle=(0, (3, 2)))
    axes.set_xlabel("Frequency (Hz)")
    axes.set_ylabel("|Z| (Pa·s/m³)")
    axes.margins(x=0)
    return figure


def speed_figure(answer: Any) -> Figure:
    """Largest pulsation over the speed, with the speeds to avoid shaded."""
    figure, axes = new_figure("Largest pulsation over speed, peak to peak", width=3.4)
    found = answer.extras["speed_map"]
    rpm = 60 * found.speeds
    axes.plot(rpm, shown(answer, found.peak_to_peak.max(axis=1), "pressure"), color=LIGHT["gradient"])
    for low, high in answer.extras.get("speeds_to_avoid") or ():
        axes.axvspan(60 * low, 60 * high, color=LIGHT["fails"], alpha=0.15, linewidth=0)
    axes.axvline(60 * answer.response.frequency, color=LIGHT["cursor"], linewidth=0.9)
    axes.set_ylim(bottom=0)
    axes.set_xlabel("Speed (rpm)")
    axes.set_ylabel(axis_label(answer, "Largest pulsation p-p", "pressure"))
    axes.margins(x=0)
    return figure


def map_figure(answer: Any) -> Figure:
    """Pulsation over speed and position."""
    figure, axes = new_figure("Pulsation over speed and position, peak to peak", width=3.4)
    found = answer.extras["speed_map"]
    picture = axes.contourf(
        60 * found.speeds, shown(answer, found.positions, "length"), shown(answer, found.peak_to_peak.T, "pressure"), levels=16, cmap="cividis"
    )  # fmt: skip
    bar = figure.colorbar(picture, ax=axes, pad=0.02)
    bar.set_label(axis_label(answer, "Pulsation p-p", "pressure"))
    bar.outline.set_linewidth(0.4)
    axes.axvline(60 * answer.response.frequency, color=LIGHT["cursor"], linewidth=0.9)
    axes.set_xlabel("Speed (rpm)")
    axes.set_ylabel(axis_label(answer, "Position", "length"))
    return figure


def cycle_figure(answer: Any) -> Figure:
    """Pressure over one turn at the last station (or at the source), measured and computed."""
    stations = answer.extras.get("stations") or ()
    place = stations[-1].position if stations else 0.0
    figure, axes = new_figure("Pressure over one turn of the shaft", width=3.4)
    response = answer.response
    time = np.linspace(0, 1 / response.frequency, 512)
    waves = response.pressure(place)
    computed = waves.evaluate(time) - waves.mean
    band = answer.bands.get("pressure") if answer.bands else None
    if band is not None:
        axes.fill_between(
            1e3 * band.time, shown(answer, band.low, "pressure"), shown(answer, band.high, "pressure"), color=LIGHT["gradient"], alpha=0.2, linewidth=0, label="95 % band"
        )  # fmt: skip
    axes.plot(1e3 * time, shown(answer, computed, "pressure"), color=LIGHT["gradient"], label=f"computed at {place:.3g} m")
    if stations:
        measured = stations[-1].harmonics
        axes.plot(1e3 * time, shown(answer, measured.evaluate(time) - measured.mean, "pressure"), color=LIGHT["ink"], linewidth=0.8, label="measured")
    axes.legend(loc="upper right")
    axes.set_xlabel("Time in the turn (ms)")
    axes.set_ylabel(axis_label(answer, "Pressure about its mean", "pressure"))
    axes.margins(x=0)
    return figure


def recorded_figure(answer: Any) -> Figure:
    """The recordings over time, highest and lowest of each run of samples."""
    from .tube_figures import _thinned

    figure, axes = new_figure("The recordings", height=1.9)
    stations = answer.extras.get("stations") or ()
    channels = [(station.name, station.signal) for station in stations] or [(answer.signal.name, answer.signal)]
    shades = (LIGHT["measured"], LIGHT["gradient"], LIGHT["flow"], LIGHT["shear"])
    for index, (name, signal) in enumerate(channels):
        time, values = _thinned(np.asarray(signal.time), shown(answer, np.asarray(signal.values), signal.dimension or "pressure"))
        axes.plot(time, values, linewidth=0.6, color=shades[index % 4], label=plain(name))
    axes.legend(loc="upper right")
    axes.set_xlabel("Time (s)")
    axes.set_ylabel(axis_label(answer, "Pressure" if stations else "Recorded", channels[0][1].dimension or "pressure"))
    axes.margins(x=0)
    return figure


def line_figures(answer: Any) -> dict[str, tuple[str, Callable[[Any], Figure]]]:
    """File name -> (what it shows, how it is drawn), in the order of the page."""
    rows: dict[str, tuple[str, Callable[[Any], Figure]]] = {
        "envelope": ("Peak-to-peak pressure along the line; below it the line to scale, with marks where an element has no length.", envelope_figure)
    }
    if answer.signal is not None:
        rows["recording"] = ("The recordings over time.", recorded_figure)
    rows |= {
        "orders": ("Each order of the shaft, computed and measured, with the allowed level where a rule is in use.", spectrum_figure),
        "turn": ("Pressure over one turn of the shaft, computed and, where there is a station, measured.", cycle_figure),
        "impedance": ("Magnitude of the input impedance; dashed lines are the resonances with the source in use.", impedance_figure),
    }
    if "speed_map" in answer.extras:
        rows["speed"] = ("Largest pulsation over speed; shaded speeds are to be avoided, the line is the present speed.", speed_figure)
        rows["speed_map"] = ("Pulsation over speed and position.", map_figure)
    return rows
