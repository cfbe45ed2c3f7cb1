"""A first case file for a recording: what could be found out filled in, the rest marked as the user's to fill."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from ..errors import PulsekitError, SignalError
from ..trace import Recording, find_cycles, read_recording
from .schema import KEYS

__all__ = ["YOURS", "Draft", "draft_case", "signal_lines"]

#: Mark of a line that only the user can fill.
YOURS = "YOURS TO FILL"

_BY_NAME = (
    ("velocity_envelope", r"envelope|env\b|peak|max|outer"),
    ("centreline_velocity", r"cent(re|er)|axis|axial|core|\bcl\b"),
    ("mean_velocity", r"mean|average|avg|bulk|\btam"),
)
_LINE_UNITS = {"bar", "psi", "MPa", "kPa"}


@dataclass(frozen=True)
class Draft:
    """Text of a drafted case file, its kind, and how many lines are left for the user."""

    text: str
    kind: str
    left_to_fill: int
    remarks: tuple[str, ...]


def _quoted(text: str) -> str:
    """A TOML basic string."""
    escaped = text.replace("\\", "\\\\").replace('"', '\\"')
    return '"' + "".join(c if c.isprintable() else f"\\u{ord(c):04x}" for c in escaped) + '"'


def _comment(text: str) -> str:
    return "# " + " ".join(str(text).split())


def _yours(key: str, example: str, why: str) -> str:
    return f"# {key} = {example}    # {YOURS}: {why}"


def _columns(recording: Recording, dimension: str) -> list[str]:
    return [column.name for column in recording.table if column.dimension == dimension]


def _kind_of(recording: Recording) -> str:
    """Pressure alone in plant units is a pump line; anything else is a tube."""
    if _columns(recording, "flow_rate") or _columns(recording, "velocity") or _columns(recording, "pressure_gradient"):
        return "wall shear"
    pressures = _columns(recording, "pressure")
    units = {re.sub(r"\W.*", "", recording.units.get(name, "")) for name in pressures}
    return "pump line" if pressures and units <= _LINE_UNITS else "wall shear"


def signal_lines(recording: Recording) -> list[str]:
    """The [recording] lines of a tube: column and quantity, as far as units and names tell."""
    listed = ", ".join(f"{name} ({unit})" if unit else name for name, unit in recording.units.items())
    lines = [_comment(f"Columns found: {listed}")]
    flows, velocities = _columns(recording, "flow_rate"), _columns(recording, "velocity")
    gradients, pressures = _columns(recording, "pressure_gradient"), _columns(recording, "pressure")
    if flows:
        lines += [f"signal = {_quoted(flows[0])}", 'quantity = "flow_rate"']
        lines.append('# computed_with_radius = "3.0 mm"    # if the instrument made this flow of a velocity and a radius (scanners and MRI do)')
    elif velocities:
        lines += _velocity_lines(recording, velocities)
    elif gradients:
        lines += [f"signal = {_quoted(gradients[0])}", 'quantity = "pressure_gradient"']
    elif len(pressures) >= 2:
        lines += [
            f"upstream = {_quoted(pressures[0])}", f"downstream = {_quoted(pressures[1])}", 'quantity = "pressure_gradient"',
            _yours("distance", '"120 mm ± 1 mm"', "distance between the two stations; and see that upstream is upstream"),
            '# zero_between = ["0 s", "3 s"]    # a stretch at no flow: without a zero the mean gradient stays unknown',
        ]  # fmt: skip
    elif pressures:
        lines += [f"signal = {_quoted(pressures[0])}"]
        lines.append(_yours("quantity", '"pressure_drop"', 'a drop needs distance; "pressure" needs wave_speed'))
    else:
        first = recording.table[0].name if recording.table else "?"
        lines += [f"signal = {_quoted(first)}", _yours("unit", '"mL/min"', "the file does not say the unit of this column")]
        lines.append(_yours("quantity", '"flow_rate"', _choices("recording", "quantity")))
    lines.append('# scale_uncertainty = "2 %"    # standard uncertainty of the calibration; without it the scale counts as exact')
    return lines


def _velocity_lines(recording: Recording, velocities: list[str]) -> list[str]:
    spread = [name for name in velocities if re.search(r"dev|std|\bsd\b", name, re.IGNORECASE)]
    column = next((name for name in velocities if name not in spread), velocities[0])
    lines = [f"signal = {_quoted(column)}"]
    for quantity, pattern in _BY_NAME:
        if re.search(pattern, column, re.IGNORECASE):
            lines.append(f'quantity = "{quantity}"    # guessed from the name of the column: see that it is right')
            break
    else:
        lines.append(_yours("quantity", '"mean_velocity"', "mean_velocity, centreline_velocity or velocity_envelope (largest in the section)"))
    if spread:
        lines.append(f"deviation = {_quoted(spread[0])}    # standard deviation of each sample, used as weight")
    if areas := _columns(recording, "area"):
        lines.append(f"area = {_quoted(areas[0])}    # gives the radius if [tube] states none, and the wall motion")
        lines.append('# averaged_over = "36 ms"    # if each frame is a mean over this time; with stamp = "start" if its time is its start')
    else:
        lines.append('# doppler_angle = "60 deg ± 3 deg"    # its uncertainty enters the interval: 3 degrees at 60 are 9 %')
    return lines


def _choices(section: str, key: str) -> str:
    return "one of " + ", ".join(KEYS[section][key].choices)


def _cycle_lines(recording: Recording) -> list[str]:
    """What the cycles look like, as comments: they are found again at every run."""
    column = next((c.name for c in recording.table if c.dimension in ("flow_rate", "velocity", "pressure_gradient", "pressure")), None)
    column = column or (recording.table[0].name if recording.table else None)
    if column is None:
        return []
    stated = recording.stated_period
    if stated:
        return [f'# period = "{stated:.6g} s"    # as the head of the file states; used if nothing else is said']
    try:
        cycles = find_cycles(recording[column])
    except (SignalError, PulsekitError) as problem:
        return [_comment(f"No cycles were found in {column}: {problem}"), _yours("period", '"0.86 s"', "period of every cycle")]
    return [
        _comment(f"Found in {column}: {cycles.count} cycles of {cycles.period:.4g} s on average; {len(cycles.left_out)} left out."),
        f'# period = "{cycles.period:.4g} s"    # only to overrule what is found',
        "# leave_out = [3]    # numbers of cycles, from 1, that must not be used",
        "# harmonics = 12    # by significance if not given",
    ]


_TUBE_LINES = (
    "",
    "[tube]",
    _yours("radius", '"3.1 mm ± 0.1 mm"', "inner radius with its standard uncertainty; or diameter"),
    "# What follows is for the checks; each that is missing leaves a check unknown.",
    '# distance_from_inlet = "80 mm"    # straight length upstream',
    '# length = "0.25 m"',
    '# bend_radius = "60 mm"    # if the tube is bent',
    '# wall_motion = "3 %"    # change of the radius over the cycle',
    "# axisymmetric = true    # only if it was seen to be so",
    "",
    "[fluid]",
    _yours("kind", '"blood"', _choices("fluid", "kind")),
    '# haematocrit = "0.45 ± 0.02"    # blood',
    '# mass_fraction = "0.40 ± 0.01"    # glycerol solution',
    "# grade = 46    # hydraulic oil",
    '# density = "1060 kg/m^3"    # given',
    '# viscosity = "3.5 mPa*s ± 5 %"    # given, or measured',
    '# temperature = "37 degC"    # all but given',
)
_LINE_LINES = (
    "",
    "[fluid]",
    _yours("kind", '"hydraulic oil"', _choices("fluid", "kind")),
    "# grade = 46",
    '# temperature = "45 degC"',
    "# gas_fraction_at_atmosphere = 0.005    # free gas, as laboratories quote it",
    '# vapour_pressure = "0.04 bar(a)"    # without it the check on cavitation is unknown',
    "",
    "[operation]",
    _yours("speed", '"1480 rpm"', "speed of the pump's shaft"),
    _yours("mean_pressure", '"180 bar"', "at the pump, gauge"),
    _yours("mean_flow", '"38 L/min"', "through the line"),
    '# speed_range = ["1200 rpm", "1500 rpm"]',
    "",
    "# The line, from the source on: one [[element]] after the other.",
    "[[element]]",
    'kind = "pipe"',
    _yours("length", '"2.4 m"', "of this pipe"),
    _yours("radius", '"8 mm ± 0.1 mm"', "inner; or diameter, or outer_diameter with wall_thickness"),
    _yours("wall_thickness", '"2 mm"', "with young_modulus; or wave_speed in place of both"),
    '# young_modulus = "207 GPa"',
    '# rated_pressure = "250 bar"',
    "",
    "[end]",
    _yours("kind", '"closed"', "what ends the line: " + ", ".join(KEYS["end"]["kind"].choices)),
)


def _trigger_line(recording: Recording) -> str:
    for name in recording.columns:
        if re.search(r"trig|tacho|pulse|index", name, re.IGNORECASE):
            return f"trigger = {_quoted(name)}    # guessed from the name of the column"
    return '# trigger = "tacho"    # column of a trigger, if there is one'


def _source_lines(recording: Recording, file: str, block: str | None) -> list[str]:
    """What drives the line: one measured pressure, or several, which also give the flow at the source."""
    pressures = _columns(recording, "pressure")
    place = [f"file = {_quoted(file)}", *([f"block = {_quoted(block)}"] if block else [])]
    why = "position of this transducer along the line from the pump"
    if len(pressures) < 2:
        named = [f"signal = {_quoted(pressures[0])}"] if pressures else [_yours("signal", '"p"', "column of the pressure")]
        return ["", "[source]", 'kind = "measured pressure"', *place, *named, _yours("station", '"0.4 m"', why), _trigger_line(recording)]
    lines = ["", "[recording]", *place, _trigger_line(recording), "", "[source]", 'kind = "measured pressures"    # two or more give the flow at the source']
    for name in pressures:
        lines += ["", "[[station]]", f"name = {_quoted(name)}", *place, f"column = {_quoted(name)}", _yours("position", '"0.4 m"', why)]
    return lines


def draft_case(recording: str | Path, *, kind: str | None = None, block: str | None = None) -> Draft:
    """Draft the case file that belongs beside a recording.

    Parameters
    ----------
    recording : path
    kind : str, optional
        ``"wall shear"`` or ``"pump line"``; by the units of the columns if not given.
    block : str, optional
        Which block, sheet, group or vessel, where the file has several.

    Returns
    -------
    Draft
        Its text is valid TOML that names the recording by its file name alone.

    Raises
    ------
    RecordingError, MissingFileError
        If the recording cannot be read.
    """
    place = Path(recording)
    read = read_recording(place, block=block)
    kind = kind or _kind_of(read)
    lines = [
        _comment(f"Drafted from {place.name}. Lines marked {YOURS} need your numbers: take away the leading # and put them in."),
        _comment("A value may carry a standard uncertainty: 3.1 mm ± 0.1 mm, or ± 5 %. Without one it counts as exact."),
        f'kind = "{kind}"',
        f"title = {_quoted(place.stem)}",
    ]
    if kind == "wall shear":
        which = [f"block = {_quoted(block)}"] if block else []
        lines += ["", "[recording]", f"file = {_quoted(place.name)}", *which, *signal_lines(read)]
        lines += _said("In reading the file:", read.remarks)
        lines += ["", "[cycles]", *_cycle_lines(read), *_TUBE_LINES]
    else:
        lines += [*_LINE_LINES[:13], *_source_lines(read, place.name, block), *_said("In reading the file:", read.remarks), *_LINE_LINES[13:]]
    lines += ["", "[uncertainty]", "# samples = 10000", "# seed = 1", ""]
    text = "\n".join(lines)
    return Draft(text, kind, text.count(f"# {YOURS}"), tuple(read.remarks))


def _said(head: str, remarks: Iterable[Any]) -> list[str]:
    said = [_comment(f"- {remark}") for remark in remarks]
    return [_comment(head), *said] if said else []
