"""The fields of the wall-shear workbench, top to bottom as the data flows: recording, cycles, tube, liquid, checks."""

from __future__ import annotations

from typing import Any

from ..quantities import from_si, pretty_unit
from ..report.tube_words import QUANTITY_WORDS
from .fields import choice_field, flag_field, group, quantity_field, slider_of, text_field
from .wall_shear_state import LIQUID_KEYS, WallShearState

__all__ = ["wall_shear_givens"]

_FILE_DETAILS = ("time", "sample_rate", "decimal", "delimiter", "encoding", "block")
_HINTS = {
    "density": "1060 kg/m^3", "viscosity": "3.5 mPa*s", "haematocrit": "0.45", "temperature": "37 degC", "mass_fraction": "0.40",
    "volume_fraction": "0.40", "grade": "46", "viscosity_at_40": "46 cSt", "viscosity_at_100": "6.8 cSt", "viscosity_index": "100",
}  # fmt: skip


def wall_shear_givens(state: WallShearState) -> list[dict[str, Any]]:
    """Return the groups of fields as JSON."""
    return [
        group("recording", "Recording", _recording(state)),
        group("signal", "Instrument and calibration", _instrument(state), opened=False),
        group("cycles", "Cycles", _cycles(state)),
        group("tube", "Tube", _tube(state)),
        group("liquid", "Liquid", _liquid(state)),
        group("checks", "For the checks", _checks(state), opened=False),
        group("more", "Title, units, uncertainty", _more(state), opened=False),
    ]


def _read(state: WallShearState) -> Any:
    return getattr(state.shown, "recording", None)


def _recording(state: WallShearState) -> list[dict[str, Any]]:
    items: list[dict[str, Any]] = [
        {
            "type": "file", "key": "recording.file", "label": "Recording or case file", "value": state.text_of("recording.file"),
            "error": state.errors.get("recording.file", ""), "help": "choose, drop it here, or type its path",
        }
    ]  # fmt: skip
    recording = _read(state)
    if recording is None:
        return items
    rows = [[name, pretty_unit(unit) if unit else "no unit", _kind_of(recording, name)] for name, unit in recording.units.items()]
    items.append(
        {
            "type": "table",
            "key": "columns",
            "label": "Columns read",
            "head": ["Column", "Unit", "Is a"],
            "rows": rows,
            "notes": list(recording.remarks),
        }
    )
    items += _signal(state, recording)
    return items


def _kind_of(recording: Any, name: str) -> str:
    if name in recording.time_names:
        return "time"
    dimension = recording.column(name).dimension
    return str(dimension).replace("_", " ") if dimension else "–"


def _signal(state: WallShearState, recording: Any) -> list[dict[str, Any]]:
    columns = [[name, name] for name in recording.columns if name not in recording.time_names]
    quantities = [[name, words] for name, words in QUANTITY_WORDS.items()]
    items = [choice_field(state, "recording.quantity", "Measured quantity", options=quantities)]
    pair = state.case.get("recording.upstream") is not None or state.case.get("recording.downstream") is not None
    if pair:
        items += [
            choice_field(state, f"recording.{role}", f"{role.capitalize()} pressure", options=columns)
            for role in ("upstream", "downstream")
        ]
    elif state.case.get("recording.forward") is not None:
        items += [
            choice_field(state, f"recording.{role}", f"{role.capitalize()} envelope", options=columns) for role in ("forward", "reverse")
        ]
    else:
        items.append(choice_field(state, "recording.signal", "Column", options=columns, unset="the only one that fits"))
    items.append(text_field(state, "recording.unit", "Unit of the column", hint=_unit_hint(state, recording)))
    quantity = state.case.get("recording.quantity")
    if quantity in ("pressure_gradient", "pressure_drop"):
        items.append(quantity_field(state, "recording.distance", "Distance of the stations", hint="120 mm"))
    if quantity == "pressure":
        items.append(quantity_field(state, "recording.wave_speed", "Wave speed", hint="6 m/s"))
    return items


def _unit_hint(state: WallShearState, recording: Any) -> str:
    name = state.case.get("recording.signal")
    unit = recording.units.get(str(name), "") if name is not None else ""
    return f"as in the file: {pretty_unit(unit)}" if unit else "such as mL/min"


def _instrument(state: WallShearState) -> list[dict[str, Any]]:
    quantity = str(state.case.get("recording.quantity") or "")
    rows = [
        quantity_field(state, "recording.scale_uncertainty", "Uncertainty of the scale", hint="2 %", spread=False),
        quantity_field(state, "recording.offset_uncertainty", "Uncertainty of the zero", hint="3 mL/min", spread=False),
    ]
    if quantity == "flow_rate":
        rows.append(text_field(state, "recording.computed_with_radius", "Flow made with radius", hint="tube, or 3.0 mm"))
    if quantity.endswith(("velocity", "envelope")):
        rows.append(quantity_field(state, "recording.doppler_angle", "Doppler angle", hint="60 deg"))
        rows.append(flag_field(state, "recording.angle_corrected", "Corrected for the angle"))
        rows.append(text_field(state, "recording.sample_volume", "Sample volume", hint="whole lumen"))
        rows.append(quantity_field(state, "recording.background_velocity", "Background velocity", hint="0 cm/s"))
        rows.append(quantity_field(state, "recording.velocity_encoding", "Velocity encoding limit", hint="120 cm/s", spread=False))
    if quantity == "velocity_envelope":
        rows.append(quantity_field(state, "recording.spectral_broadening", "Spectral broadening", hint="15 %"))
    rows += [
        quantity_field(state, "recording.averaged_over", "Each sample averaged over", hint="35 ms", spread=False),
        choice_field(state, "recording.stamp", "A sample's time marks", unset="middle"),
        quantity_field(state, "recording.delay", "Delay of the record", hint="4 ms"),
        choice_field(state, "recording.coupling", "Coupling", unset="dc"),
        quantity_field(state, "recording.mean_flow", "Mean flow, if not measured", hint="200 mL/min"),
        quantity_field(state, "recording.low_pass", "Low-pass filter", hint="30 Hz"),
        quantity_field(state, "recording.natural_frequency", "Natural frequency", hint="25 Hz"),
        quantity_field(state, "recording.damping_ratio", "Damping ratio", hint="0.3"),
        text_field(state, "recording.calibration", "Calibration of raw volts", hint="25 bar/V"),
        text_field(state, "recording.zero", "Raw signal at zero", hint="1.002 V"),
        text_field(state, "recording.zero_between", "Zero recorded between", hint="0 s, 3 s"),
        text_field(state, "recording.deviation", "Column of deviations"),
        text_field(state, "recording.area", "Column of areas"),
        flag_field(state, "recording.invert", "Forward was recorded negative", unset="no"),
    ]
    for name in _FILE_DETAILS:
        rows.append(
            choice_field(state, "recording.decimal", unset="found out") if name == "decimal" else text_field(state, f"recording.{name}")
        )
    return rows


def _cycles(state: WallShearState) -> list[dict[str, Any]]:
    cycles = getattr(state.shown, "cycles", None)
    found = "" if cycles is None else f"found: {cycles.period:.5g} s"
    kept = "by significance" if state.shown is None or state.shown.harmonics is None else f"by significance: {state.shown.harmonics.count}"
    items = [
        quantity_field(state, "cycles.period", "Period", hint=found or "0.86 s", spread=False),
        text_field(state, "cycles.harmonics", "Harmonics to keep", hint=kept),
        text_field(state, "cycles.onsets", "Onsets", hint="found; or 0.1 s, 0.96 s, …"),
        choice_field(state, "cycles.align", "Cycles of unequal length", unset="as their scatter asks"),
        flag_field(state, "cycles.remove_drift", "Take out a straight drift", unset="no"),
    ]
    if cycles is not None:
        reasons = dict(cycles.left_out)
        edges = cycles.all_onsets
        rows = [
            {
                "number": index + 1,
                "span": f"{edges[index]:.3f} – {edges[index + 1]:.3f} s",
                "used": index not in reasons,
                "why": reasons.get(index, ""),
            }
            for index in range(min(len(edges) - 1, 200))
        ]
        items.append(
            {
                "type": "cycles",
                "key": "cycles.leave_out",
                "label": "Cycles used",
                "rows": rows,
                "error": state.errors.get("cycles.leave_out", ""),
            }
        )
    return items


def _tube(state: WallShearState) -> list[dict[str, Any]]:
    radius, diameter = _sizes(state)
    by_diameter = state.case.get("tube.diameter") is not None
    slider = slider_of(state, "tube.diameter" if by_diameter else "tube.radius")
    if slider is not None and by_diameter:
        slider = slider | {name: slider[name] / 2 for name in ("low", "high", "step", "at")}
    return [
        quantity_field(state, "tube.radius", "Inner radius", hint="3.1 mm", derived=radius) | {"slider": slider, "slides": "tube.radius"},
        quantity_field(state, "tube.diameter", "Inner diameter", hint="6.2 mm", derived=diameter),
    ]


def _sizes(state: WallShearState) -> tuple[str, str]:
    """Radius and diameter that follow from what is given, for the field of the other."""
    for key, factor, place in (("tube.diameter", 0.5, 0), ("tube.radius", 2.0, 1)):
        if state.case.get(key) is not None and key not in state.refused:
            given = state.case.given(key)
            number = factor * float(from_si(given.value, given.unit) if given.unit else given.value)
            text = f"{number:.5g} {given.unit or 'm'}"
            return (text, "") if place == 0 else ("", text)
    return "", ""


def _liquid(state: WallShearState) -> list[dict[str, Any]]:
    kind = str(state.case.get("fluid.kind") or ("given" if state.case.get("fluid.viscosity") is not None else ""))
    items = [
        choice_field(
            state, "fluid.kind", "Kind", options=[[name, "density and viscosity" if name == "given" else name] for name in LIQUID_KEYS]
        )
    ]
    for name in LIQUID_KEYS.get(kind, ()):
        key = f"fluid.{name}"
        if name == "grade":
            items.append(text_field(state, key, "ISO grade", hint="46"))
        elif name == "viscosity":
            items.append(_viscosity(state, kind))
        else:
            items.append(quantity_field(state, key, hint=_HINTS.get(name, "")))
    if kind and kind not in ("given", "water") and state.case.get("fluid.viscosity") is not None:
        items.append(quantity_field(state, "fluid.measured_at", "Viscosity measured at", hint="22 degC"))
    if kind not in ("", "given"):
        items.append(flag_field(state, "fluid.extrapolate", "Go beyond the measured range", unset="no"))
    return items


def _viscosity(state: WallShearState, kind: str) -> dict[str, Any]:
    """Viscosity with its slider; where a correlation gives it, moving the slider puts a measured one in its place."""
    flow = getattr(state.shown, "flow", None)
    derived = f"{flow.fluid.viscosity * 1e3:.4g} mPa*s" if flow is not None and state.case.get("fluid.viscosity") is None else ""
    label = "Viscosity" if kind == "given" else "Measured viscosity, if any"
    return quantity_field(state, "fluid.viscosity", label, hint=_HINTS["viscosity"], slider=True, derived=derived)


def _checks(state: WallShearState) -> list[dict[str, Any]]:
    return [
        quantity_field(state, "tube.distance_from_inlet", "Straight length upstream", hint="80 mm"),
        quantity_field(state, "tube.length", "Length of the tube", hint="0.25 m"),
        quantity_field(state, "tube.bend_radius", "Radius of its bend", hint="60 mm"),
        quantity_field(state, "tube.wall_motion", "Wall motion over the cycle", hint="3 %"),
        flag_field(state, "tube.axisymmetric", "Seen to be axisymmetric"),
        quantity_field(state, "recording.antialias_filter", "Filter before sampling", hint="40 Hz"),
        text_field(state, "tube.device", "Device in the flow", hint="cannula, stent, …"),
        quantity_field(state, "tube.wall_shear_threshold", "Wall-shear threshold", hint="1.5 Pa"),
    ]


def _more(state: WallShearState) -> list[dict[str, Any]]:
    units = [
        text_field(state, f"report.units.{name}", f"Unit of {name.replace('_', ' ')}", hint=hint)
        for name, hint in (
            ("flow_rate", "mL/min"), ("velocity", "cm/s"), ("pressure", "Pa, or dyn/cm^2"), ("pressure_gradient", "Pa/m, or mmHg/cm"),
            ("length", "mm"),
        )
    ]  # fmt: skip
    return [
        text_field(state, "title", "Title of the case"), text_field(state, "notes", "Notes"), *units,
        text_field(state, "uncertainty.samples", "Monte Carlo samples", hint="10000"), text_field(state, "uncertainty.seed", "Seed", hint="20260"),
    ]  # fmt: skip
