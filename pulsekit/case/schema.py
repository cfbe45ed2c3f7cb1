"""Every key of a case file, in one table: what it takes, what it means. Errors, drafts and fields read it."""

from __future__ import annotations

import difflib
import re
from dataclasses import dataclass

__all__ = ["KEYS", "Key", "key_of", "nearest", "sections_of"]


@dataclass(frozen=True)
class Key:
    """What a key takes.

    ``takes`` is ``"quantity"`` (a string with a unit, perhaps ± an uncertainty), ``"text"``, ``"whole"``,
    ``"number"``, ``"flag"``, ``"list"`` or ``"table"``. ``sign`` is ``"positive"``, ``"not negative"`` or ``"any"``.
    """

    takes: str
    help: str
    dimension: str = ""
    sign: str = "positive"
    choices: tuple[str, ...] = ()
    absolute: bool = False  # a pressure that must say bar(a) or bar(g)
    kinds: tuple[str, ...] = ("wall shear", "pump line")


def _q(dimension: str, text: str, sign: str = "positive", **more: bool) -> Key:
    return Key("quantity", text, dimension, sign, absolute=bool(more.get("absolute", False)))


def _t(text: str, *choices: str) -> Key:
    return Key("text", text, choices=choices)


_READING = {
    "file": _t("recording file, relative to the case file"),
    "time": _t("column that holds the time"),
    "unit": _t("unit of the signal, where the file does not say it"),
    "units": Key("table", "unit of each column, where the file does not say it"),
    "sample_rate": _q("frequency", "samples per second, where there is no time column"),
    "decimal": _t("decimal mark", ".", ","),
    "delimiter": _t("mark between columns"),
    "encoding": _t("character encoding of the file"),
    "block": _t("name of the block, where a file holds several tables"),
    "sha256": _t("hash of the recording; another file is then refused"),
}
_CHANNEL = {
    "calibration": _t("slope from the raw signal, such as 25 bar/V"),
    "zero": _t("raw signal at zero, such as 1.002 V"),
    "zero_file": _t("recording at no flow, whose mean is the zero"),
    "zero_between": Key("list", "start and end of a stretch at no flow, whose mean is the zero", "time"),
    "scale_uncertainty": _q("ratio", "standard uncertainty of the calibration", "not negative"),
    "offset_uncertainty": Key("quantity", "standard uncertainty of the zero", "signal", "not negative"),
    "delay": _q("time", "positive where the record is late", "any"),
    "coupling": _t("ac where the channel holds no mean", "ac", "dc"),
    "high_pass": _q("frequency", "corner of an AC coupling"),
    "low_pass": _q("frequency", "corner of the instrument's low-pass filter"),
    "low_pass_order": Key("whole", "order of the low-pass filter (Butterworth)"),
    "natural_frequency": _q("frequency", "of a fluid-filled catheter or gauge line"),
    "damping_ratio": _q("ratio", "of a fluid-filled catheter or gauge line"),
}
_RECORDING = {
    **_READING,
    **_CHANNEL,
    "signal": _t("column of the measured quantity"),
    "forward": _t("column of the forward envelope"),
    "reverse": _t("column of the reverse envelope, positive"),
    "upstream": _t("column of the upstream pressure"),
    "downstream": _t("column of the downstream pressure"),
    "quantity": _t(
        "what was measured", "flow_rate", "mean_velocity", "centreline_velocity", "velocity_envelope", "pressure_gradient",
        "pressure_drop", "pressure", "wall_shear_stress",
    ),
    "distance": _q("length", "between the two stations"),
    "wave_speed": _q("velocity", "of pressure waves, for one pressure alone"),
    "mean_flow": _q("flow_rate", "where the signal holds no mean", "any"),
    "computed_with_radius": Key("quantity", 'radius that the instrument used for its flow rate, or "tube"', "length or tube"),
    "averaged_over": _q("time", "time over which each sample is a mean"),
    "stamp": _t("what a sample's time marks", "middle", "start"),
    "doppler_angle": _q("angle", "between beam and flow"),
    "angle_corrected": Key("flag", "false where velocities are components along the beam"),
    "invert": Key("flag", "true where forward flow was recorded as negative"),
    "spectral_broadening": _q("ratio", "by which the envelope lies too high", "not negative"),
    "sample_volume": _t("where a mean velocity was sampled, such as whole lumen"),
    "background_velocity": _q("velocity", "offset of an MRI velocity over the area", "any"),
    "velocity_encoding": _q("velocity", "limit beyond which an MRI velocity wraps"),
    "area": _t("column of the lumen's area per frame"),
    "deviation": _t("column of the standard deviation per sample"),
    "antialias_filter": _q("frequency", "corner of the filter before sampling"),
    "trigger": _t("column of a trigger or tacho signal"),
    "pulses_per_revolution": Key("whole", "of the trigger"),
    "trigger_ratio": Key("number", "trigger shaft turns per pump turn"),
    "trigger_angle": _q("angle", "of the trigger after top dead centre of plunger 1", "any"),
}  # fmt: skip
_STATION = {
    **_READING,
    **_CHANNEL,
    "name": _t("of the station"),
    "column": _t("column of the pressure"),
    "position": _q("length", "along the line from the source", "not negative"),
    "height": _q("length", "above the reference level", "any"),
    "tapping_length": _q("length", "of the bore between line and transducer"),
    "tapping_bore": _q("length", "diameter of that bore"),
}
_SIZES = {
    "radius": _q("length", "inner radius"),
    "diameter": _q("length", "inner diameter"),
    "outer_diameter": _q("length", "outer diameter, with wall_thickness"),
    "wall_thickness": _q("length", "of the wall"),
}
_FLUID = {
    "kind": _t("of liquid", "given", "blood", "water", "glycerol solution", "hydraulic oil"),
    "density": _q("density", "of the liquid"),
    "viscosity": Key("quantity", "dynamic or kinematic", "viscosity or kinematic_viscosity"),
    "kinematic_viscosity": _q("kinematic_viscosity", "of the liquid"),
    "haematocrit": _q("ratio", "volume fraction of red cells, such as 0.45"),
    "temperature": _q("temperature", "of the liquid"),
    "mass_fraction": _q("ratio", "of glycerol", "not negative"),
    "volume_fraction": _q("ratio", "of glycerol before mixing, at 20 degC", "not negative"),
    "grade": Key("number", "ISO viscosity grade of the oil"),
    "viscosity_at_40": Key("quantity", "of the oil at 40 degC", "viscosity or kinematic_viscosity"),
    "viscosity_at_100": Key("quantity", "of the oil at 100 degC", "viscosity or kinematic_viscosity"),
    "viscosity_index": Key("quantity", "of the oil; 100 ± 10 if not given", "ratio"),
    "measured_at": _q("temperature", "at which the viscosity was measured"),
    "bulk_modulus": _q("pressure", "isentropic tangent, of the liquid without gas"),
    "vapour_pressure": _q("pressure", "must say bar(a) or bar(g)", "not negative", absolute=True),
    "gas_release_pressure": _q("pressure", "at which dissolved gas comes out; must say bar(a) or bar(g)", "not negative", absolute=True),
    "gas_fraction": Key("quantity", "not accepted: say at which pressure", "ratio", "not negative"),
    "gas_fraction_at_atmosphere": _q("ratio", "free gas by volume, as laboratories quote it", "not negative"),
    "gas_fraction_at_line_pressure": _q("ratio", "free gas by volume at the line's pressure", "not negative"),
    "extrapolate": Key("flag", "allow correlations outside the range in which they were measured"),
    "id": _t("givens of the same id are the same unknown in a comparison"),
}
_CYCLES = {
    "period": _q("time", "of every cycle"),
    "onsets": Key("list", "start of every cycle and end of the last", "time"),
    "leave_out": Key("list", "numbers of cycles not to use, counted from 1", "whole"),
    "harmonics": Key("whole", "to keep"),
    "align": _t("how cycles of unequal length are averaged", "stretch", "onset"),
    "remove_drift": Key("flag", "take a straight base line out"),
    "keep_odd": Key("flag", "keep cycles that do not look like the others"),
}
_TUBE = {
    "section": _t("shape of the cross-section", "circular"),
    **_SIZES,
    "length": _q("length", "of the tube, for the check on waves"),
    "distance_from_inlet": _q("length", "of the measured place, for the check on development", "not negative"),
    "bend_radius": _q("length", "of the centre line, for the check on straightness"),
    "wall_motion": _q("ratio", "change of the radius over the cycle over its mean", "not negative"),
    "axisymmetric": Key("flag", "whether the flow was seen to be axisymmetric"),
    "device": _t("cannula, stent or other device in the flow"),
    "wall_shear_threshold": _q("pressure", "to be compared with the upper end of the worst cycle"),
    "id": _t("givens of the same id are the same unknown in a comparison"),
}
_UNCERTAINTY = {"samples": Key("whole", "Monte Carlo samples"), "seed": Key("whole", "of the random numbers")}
_REPORT = {"units": Key("table", "unit in which each dimension is shown")}
_OPERATION = {
    "speed": _q("frequency", "of the pump's shaft"),
    "motor_speed": _q("frequency", "of the motor, with gear_ratio"),
    "gear_ratio": Key("number", "motor turns per pump turn"),
    "speed_range": Key("list", "lowest and highest speed", "frequency"),
    "mean_pressure": _q("pressure", "at the source, gauge unless it says otherwise", "any"),
    "mean_flow": _q("flow_rate", "through the line", "any"),
    "minimum_inlet_pressure": _q("pressure", "that the pump's maker asks for; must say bar(a) or bar(g)", "not negative", absolute=True),
    "ambient_pressure": _q("pressure", "101.325 kPa if not given"),
    "rule": _t("on allowable pulsation", "none", "reciprocating pump"),
    "rule_constant": Key("number", "of the allowable-pulsation rule, kPa sqrt(mm Hz)"),
    "wanted_reduction": _q("ratio", "of the largest pulsation, for sizing"),
}
_SOURCE = {
    **_READING,
    **_CHANNEL,
    "kind": _t("of source", "plunger pump", "axial piston pump", "flow trace", "measured pressure", "measured pressures"),
    "plungers": Key("whole", "of the pump"),
    "pistons": Key("whole", "of the pump"),
    "rod_ratio": Key("quantity", "connecting rod over crank; 5 if not given", "ratio"),
    "acting": _t("single or double", "single", "double"),
    "valve_lag": _q("angle", "of the valves", "not negative"),
    "dead_volume": _q("volume", "compressed per stroke", "not negative"),
    "port_opening_angle": _q("angle", "over which the dead volume fills", "not negative"),
    "displacement": _q("volume", "per revolution"),
    "speed": _q("frequency", "of this pump's shaft"),
    "mean_flow": _q("flow_rate", "of this pump", "any"),
    "position": _q("length", "along the line", "not negative"),
    "signal": _t("column of the trace"),
    "station": _q("length", "position of the transducer", "not negative"),
    "harmonics": Key("whole", "of the computed source"),
    "internal_volume": _q("volume", "of liquid in the pump, which makes its impedance"),
    "trigger": _t("column of a trigger or tacho signal"),
    "pulses_per_revolution": Key("whole", "of the trigger"),
    "trigger_ratio": Key("number", "trigger shaft turns per pump turn"),
    "trigger_angle": _q("angle", "of the trigger after top dead centre of plunger 1", "any"),
}
_END_KINDS = ("closed", "open", "matched", "restrictor", "impedance")
_ELEMENT = {
    "kind": _t("of element", "pipe", "hose", "restrictor", "side branch", "volume", "gas damper"),
    "name": _t("of the element"),
    "id": _t("givens of the same id are the same unknown in a comparison"),
    **_SIZES,
    "nominal_size": _t("of a pipe, with schedule"),
    "schedule": _t("of a pipe"),
    "length": _q("length", "of the element"),
    "young_modulus": _q("pressure", "of the wall"),
    "poisson_ratio": Key("quantity", "of the wall", "ratio"),
    "anchoring": _t("of the pipe", "throughout", "upstream", "expansion joints"),
    "wave_speed": _q("velocity", "in this element"),
    "loss_factor": _q("ratio", "of a hose's wall", "not negative"),
    "roughness": _q("length", "of the wall", "not negative"),
    "pressure_drop": _q("pressure", "of a restrictor at flow"),
    "flow": _q("flow_rate", "at which the drop is given"),
    "law": _t("of a restrictor", "turbulent", "laminar"),
    "volume": _q("volume", "of liquid"),
    "gas_volume": _q("volume", "of gas at the mean pressure"),
    "nominal_volume": _q("volume", "of the damper, with precharge"),
    "precharge": _q("pressure", "of the gas, gauge unless it says otherwise"),
    "precharge_temperature": _q("temperature", "at which the precharge was set; 20 degC if not given"),
    "pressure": _q("pressure", "of the gas; must say bar(a) or bar(g)", "positive", absolute=True),
    "polytropic_exponent": Key("quantity", "of the gas; its real isentropic one if not given", "ratio"),
    "neck_length": _q("length", "of the damper's neck", "not negative"),
    "neck_radius": _q("length", "of the damper's neck"),
    "rated_pressure": _q("pressure", "of the element, gauge"),
    "relief_setting": _q("pressure", "of a relief valve here, gauge"),
    "straight": Key("flag", "false where the pipe is not one straight run"),
    "element": Key("table", "elements of a side branch"),
    "end": Key("table", "end of a side branch"),
}
_END = {
    "kind": _t("of end", *_END_KINDS),
    "pressure_drop": _q("pressure", "of a restrictor at flow"),
    "flow": _q("flow_rate", "at which the drop is given"),
    "law": _t("of a restrictor", "turbulent", "laminar"),
    "impedance": _q("impedance", "of the end"),
    "relief_setting": _q("pressure", "of a relief valve here, gauge"),
    "rated_pressure": _q("pressure", "of what stands at the end, gauge"),
}
_CHANGE = {
    "name": _t("of the change"),
    "set": Key("table", "dotted keys and their new values"),
    "add": Key("table", "an element to insert"),
    "at": Key("whole", "place of the inserted element, counted from 0"),
    "remove": Key("whole", "place of the element to take out, counted from 0"),
}

#: Section -> key -> what it takes. A section that is a list of tables has "[]" behind its name.
KEYS: dict[str, dict[str, Key]] = {
    "": {
        "kind": _t("of case", "wall shear", "pump line"), "title": _t("of the case"), "notes": _t("anything worth keeping"),
    },
    "recording": _RECORDING, "station[]": _STATION, "cycles": _CYCLES, "tube": _TUBE, "fluid": _FLUID, "uncertainty": _UNCERTAINTY,
    "report": _REPORT, "operation": _OPERATION, "source": _SOURCE, "source[]": _SOURCE, "element[]": _ELEMENT, "end": _END,
    "change[]": _CHANGE,
}  # fmt: skip
_SECTIONS = {
    "wall shear": ("recording", "station[]", "cycles", "tube", "fluid", "uncertainty", "report"),
    "pump line": (
        "recording", "station[]", "cycles", "fluid", "operation", "source", "source[]", "element[]", "end", "change[]", "uncertainty", "report",
    ),
}  # fmt: skip
_FREE = ("recording.units.", "report.units.", "station.units.", "source.units.", "change.set.", "change.add.")


def sections_of(kind: str) -> tuple[str, ...]:
    """Sections of a kind of case."""
    return _SECTIONS[kind]


def plain_key(dotted: str) -> str:
    """A dotted key without its numbers, and a branch's elements like those of the line.

    >>> plain_key("element.2.element.0.length"), plain_key("element.1.end.kind")
    ('element.length', 'end.kind')
    """
    words = [word for word in dotted.split(".") if not word.isdigit()]
    while len(words) > 2 and words[0] == "element" and words[1] in ("element", "end"):
        words = words[1:]
    return ".".join(words)


def key_of(dotted: str) -> Key | None:
    """What a dotted key takes, or None if there is no such key."""
    plain = plain_key(dotted)
    if any(f"{plain}.".startswith(free) and plain + "." != free for free in _FREE):
        return Key("text", "free table")
    section, _, name = plain.rpartition(".")
    for place in (section, f"{section}[]"):
        if place in KEYS and name in KEYS[place]:
            return KEYS[place][name]
    return None


def nearest(word: str, known: list[str]) -> str:
    """', did you mean ...?' for a misspelt word, or what there is."""
    close = difflib.get_close_matches(word, known, n=1, cutoff=0.6) or [k for k in known if re.sub(r"\W|_", "", k) == re.sub(r"\W|_", "", word)]
    return f"did you mean {close[0]!r}?" if close else f"there are: {', '.join(known)}"
