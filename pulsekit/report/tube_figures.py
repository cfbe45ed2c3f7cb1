"""Still pictures of a wall-shear answer: each a function of the answer."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any

import numpy as np

from .drawing import axis_label, diverging, new_figure, plain, shown
from .palette import LIGHT

if TYPE_CHECKING:
    from matplotlib.figure import Figure

__all__ = ["TUBE_FIGURES"]

_INSTANTS = 256
_MOST_POINTS = 4000

_MEASURED_NAMES = {
    "flow_rate": ("Flow rate", "flow_rate"),
    "mean_velocity": ("Mean velocity", "velocity"),
    "centreline_velocity": ("Centreline velocity", "velocity"),
    "velocity_envelope": ("Largest velocity", "velocity"),
    "pressure_gradient": ("Pressure gradient", "pressure_gradient"),
    "pressure_drop": ("Pressure drop", "pressure"),
    "pressure": ("Pressure", "pressure"),
    "wall_shear_stress": ("Wall shear stress", "pressure"),
}


def measured_name(answer: Any) -> tuple[str, str]:
    """Name and dimension of the measured quantity."""
    return _MEASURED_NAMES.get(str(answer.case.get("recording.quantity")), ("Signal", answer.signal.dimension or ""))


def _thinned(time: np.ndarray, values: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Keep the least and greatest of each run of samples, so that a long trace keeps its peaks."""
    if time.size <= _MOST_POINTS:
        return time, values
    run = int(np.ceil(time.size / (_MOST_POINTS // 2)))
    whole = time.size // run * run
    blocks = values[:whole].reshape(-1, run)
    start = np.arange(blocks.shape[0]) * run
    picks = np.sort(np.concatenate([start + blocks.argmin(axis=1), start + blocks.argmax(axis=1)]))
    return time[picks], values[picks]


def recording_figure(answer: Any) -> Figure:
    """The recording over time with its cycles marked; those left out are hatched."""
    name, dimension = measured_name(answer)
    figure, axes = new_figure("The recording and its cycles", height=1.9)
    time, values = _thinned(np.asarray(answer.signal.time), shown(answer, np.asarray(answer.signal.values), dimension))
    axes.plot(time, values, color=LIGHT["measured"], linewidth=0.8)
    for onset in answer.cycles.onsets:
        axes.axvline(onset, color=LIGHT["rule"], linewidth=0.7, zorder=0)
    edges = np.asarray(answer.cycles.all_onsets)
    labelled = False
    for index, _reason in answer.cycles.left_out:
        if index + 1 < edges.size:
            axes.axvspan(
                edges[index], edges[index + 1], facecolor="none", edgecolor=LIGHT["left_out"], hatch="////", linewidth=0,
                label=None if labelled else "left out",
            )  # fmt: skip
            labelled = True
    if labelled:
        axes.legend(loc="upper right")
    axes.set_xlabel("Time (s)")
    axes.set_ylabel(axis_label(answer, name, dimension))
    axes.margins(x=0)
    return figure


def cycles_figure(answer: Any) -> Figure:
    """All cycles on one period with their mean and the curve rebuilt from the kept harmonics."""
    name, dimension = measured_name(answer)
    figure, axes = new_figure("All cycles on one period", width=3.4)
    harmonics = answer.harmonics
    time = np.linspace(0.0, harmonics.period, _INSTANTS)
    folded = np.atleast_2d(answer.cycles.folded(np.linspace(0.0, 1.0, 128)))
    places = np.linspace(0.0, harmonics.period, 128)
    for cycle in folded:
        axes.plot(places, shown(answer, cycle, dimension), color=LIGHT["measured"], linewidth=0.5, alpha=0.6)
    axes.plot(
        time, shown(answer, harmonics.evaluate(time), dimension), color=LIGHT["ink"], label=f"mean, {harmonics.count} harmonics"
    )  # fmt: skip
    axes.plot([], [], color=LIGHT["measured"], linewidth=0.8, label=f"{folded.shape[0]} cycle{'s' if folded.shape[0] != 1 else ''}")
    axes.legend(loc="upper right")
    axes.set_xlabel("Time in the cycle (s)")
    axes.set_ylabel(axis_label(answer, name, dimension))
    axes.margins(x=0)
    return figure


def harmonics_figure(answer: Any) -> Figure:
    """Amplitude of each harmonic with its standard error."""
    name, dimension = measured_name(answer)
    figure, axes = new_figure("Harmonics and their noise", width=3.4)
    harmonics = answer.harmonics
    order = np.arange(1, harmonics.count + 1)
    axes.bar(order, shown(answer, harmonics.amplitude[1:], dimension), width=0.55, color=LIGHT["flow"], label="amplitude")
    errors = harmonics.standard_error
    if errors is not None and harmonics.count:
        noise = np.sqrt(np.sum(errors[1:] ** 2, axis=1))
        axes.plot(order, shown(answer, noise, dimension), "_", color=LIGHT["ink"], markersize=9, markeredgewidth=1.4, label="standard error")
    axes.legend(loc="upper right")
    axes.set_xlabel("Harmonic")
    axes.set_ylabel(axis_label(answer, name, dimension))
    if harmonics.count <= 15:
        axes.set_xticks(order)
    return figure


def _band_figure(answer: Any, title: str, name: str, curve: str, dimension: str, colour: str, steady: float | None) -> Figure:
    figure, axes = new_figure(title, width=3.4)
    series = getattr(answer.flow, curve)
    time = np.linspace(0.0, series.period, _INSTANTS)
    band = answer.bands.get(curve) if answer.bands else None
    if band is not None:
        axes.fill_between(
            band.time, shown(answer, band.low, dimension), shown(answer, band.high, dimension), color=colour, alpha=0.2, linewidth=0,
            label="95 % band",
        )  # fmt: skip
    axes.plot(time, shown(answer, series.evaluate(time), dimension), color=colour, label="at the stated givens")
    if steady is not None:
        axes.axhline(shown(answer, steady, dimension), color=LIGHT["steady"], linestyle=(0, (4, 2)), linewidth=1, label="steady, mean flow")
    axes.axhline(0, color=LIGHT["rule"], linewidth=0.6, zorder=0)
    axes.legend(loc="upper right")
    axes.set_xlabel("Time in the cycle (s)")
    axes.set_ylabel(axis_label(answer, name, dimension))
    axes.margins(x=0)
    return figure


def shear_figure(answer: Any) -> Figure:
    """Wall shear stress over the cycle with its band and the steady estimate."""
    steady = answer.findings.get("steady_wall_shear_stress")
    value = None if steady is None else steady.value
    return _band_figure(answer, "Wall shear stress", "Wall shear stress", "wall_shear_stress", "pressure", LIGHT["shear"], value)


def gradient_figure(answer: Any) -> Figure:
    """Pressure gradient over the cycle with its band."""
    return _band_figure(
        answer, "Pressure gradient", "Pressure gradient", "pressure_gradient", "pressure_gradient", LIGHT["gradient"], None
    )  # fmt: skip


def profile_figure(answer: Any) -> Figure:
    """Velocity across the diameter at eight instants over the envelope of all."""
    figure, axes = new_figure("Velocity across the diameter", width=3.4)
    field, radius, period = velocity_field(answer)
    across = np.concatenate([-radius[:0:-1], radius])
    mirrored = np.concatenate([field[:0:-1], field])
    places = shown(answer, across, "length")
    speeds = shown(answer, mirrored, "velocity")
    axes.fill_between(places, speeds.min(axis=1), speeds.max(axis=1), color=LIGHT["flow"], alpha=0.12, linewidth=0, label="all instants")
    for step in range(8):
        column = step * field.shape[1] // 8
        axes.plot(places, speeds[:, column], color=LIGHT["flow"], linewidth=0.9, alpha=0.35 + 0.08 * step)
    axes.plot([], [], color=LIGHT["flow"], linewidth=0.9, label=f"every {period / 8:.2g} s, darker is later")
    axes.axhline(0, color=LIGHT["rule"], linewidth=0.6, zorder=0)
    axes.legend(loc="upper right")
    axes.set_xlabel(axis_label(answer, "Distance from the axis", "length"))
    axes.set_ylabel(axis_label(answer, "Velocity", "velocity"))
    axes.margins(x=0)
    return figure


def velocity_field(answer: Any, *, radii: int = 49, instants: int = 96) -> tuple[np.ndarray, np.ndarray, float]:
    """Velocity [m/s] (radii, instants), the radii [m] and the period [s]."""
    edge = float(answer.flow.tube.radius)
    radius = np.linspace(0.0, edge, radii)
    period = answer.flow.flow_rate.period
    time = np.arange(instants) * period / instants
    return np.asarray(answer.flow.velocity(radius, time)), radius, period


def field_figure(answer: Any) -> Figure:
    """Velocity over radius and time as filled contours, white at zero."""
    from matplotlib.ticker import MaxNLocator

    figure, axes = new_figure("Velocity over radius and time", width=3.4)
    field, radius, period = velocity_field(answer)
    speeds = shown(answer, field, "velocity")
    closed = np.concatenate([speeds, speeds[:, :1]], axis=1)
    time = np.linspace(0.0, period, closed.shape[1])
    greatest = float(np.max(np.abs(closed))) or 1.0
    picture = axes.contourf(
        time, shown(answer, radius, "length"), closed, levels=np.linspace(-greatest, greatest, 25), cmap=diverging()
    )  # fmt: skip
    if closed.min() < 0 < closed.max():
        axes.contour(time, shown(answer, radius, "length"), closed, levels=[0.0], colors=LIGHT["ink"], linewidths=0.6)
    bar = figure.colorbar(picture, ax=axes, pad=0.02)
    bar.set_label(axis_label(answer, "Velocity", "velocity"))
    bar.outline.set_linewidth(0.4)
    bar.locator = MaxNLocator(5)
    bar.update_ticks()
    axes.set_xlabel("Time in the cycle (s)")
    axes.set_ylabel(axis_label(answer, "Distance from the axis", "length"))
    return figure


def caption_of_signal(answer: Any) -> str:
    """Name of the recorded column, safe for a picture."""
    return plain(answer.signal.name)


#: File name -> (what it shows, how it is drawn), in the order of the page.
TUBE_FIGURES: dict[str, tuple[str, Callable[[Any], Figure]]] = {
    "recording": ("The recording over time; thin lines mark the onsets of the cycles that were used.", recording_figure),
    "wall_shear_stress": ("Wall shear stress over the cycle, with its band and the steady estimate of the mean flow.", shear_figure),
    "pressure_gradient": ("Pressure gradient over the cycle, positive where it drives the flow downstream.", gradient_figure),
    "cycles": ("Every cycle used, on one period, under the curve rebuilt from the kept harmonics.", cycles_figure),
    "harmonics": ("Amplitude of each kept harmonic of the measured quantity beside its standard error.", harmonics_figure),
    "profile": ("Velocity across the whole diameter at eight instants; the shaded area holds all instants.", profile_figure),
    "field": ("Velocity from the axis to the wall over the cycle; the black line, if any, is where the flow turns.", field_figure),
}
