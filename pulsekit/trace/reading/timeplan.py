"""Which column is the time, and in which unit; or which rate stands in its place."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np

from ...errors import InputError, MissingColumnError, PulsekitError
from ...quantities import DIMENSIONS, convert, parse_unit, to_si
from .grammar import BLANK, CLOCK, NUMBER, number
from .layout import Layout
from .told import Notes, Told, clean
from .unit_words import HeaderUnit, read_unit

__all__ = ["TimePlan", "find_column", "last_digit", "plan_time", "stated_rate", "unit_of"]

_TIME = re.compile(
    r"(?i)^\W*(elapsed|relative|rel|abs|absolute|sample|sampling|trigger|recording|delay|date)?[\s_./-]*"
    r"(t|time|times|timestamps?|time[\s_-]?stamps?|zeit|zeitstempel|temps|tiempo|tempo|tid|tijd|clock|datetime|date|datum|uhrzeit|hora|heure|elapsed|secs?|seconds?|msecs?|ms|"
    r"milliseconds?|millis|minutes?|microseconds?|micros|epoch|unix)([\s_.-]?\d{0,2}|[\s_.-]+[a-z]{1,3}\d?|\s*\(.*|[\s_./-]*(time|stamp|elapsed))\W*$"
)
_COUNT = re.compile(
    r"(?i)^\W*(samples?|index|idx|n|no|nr|num|number|scans?|points?|rows?|record|frames?|#|counter|count|sample[\s_.]*(no|nr|num|number|index|#)\.?|scan[\s_.]*(no|nr|number)\.?|unnamed.*|i|k)\W*$"
)
_NAMED_UNITS = (
    (re.compile(r"(?i)^(ms|msecs?|milliseconds?|millis)$|_ms$"), "ms"),
    (re.compile(r"(?i)^(us|µs|μs|microseconds?|micros)$"), "us"),
    (re.compile(r"(?i)^(s|secs?|seconds?)$"), "s"),
    (re.compile(r"(?i)^(min|minutes?)$"), "min"),
)
_RATE_KEY = re.compile(
    r"(?i)(sampl\w*|scan|acquisition|abtast\w*|logging|frame)[\s_-]*(rate|freq\w*|frequenz)?\b|^f_?s\b|^rate\b|abtastrate"
)
_STEP_KEY = re.compile(
    r"(?i)(sampl\w*|time|logging|abtast\w*|temporal)[\s_-]*(interval|period|step|increment|spacing|intervall|resolution)|^dt\b|delta[\s_-]*t\b"
)
_VALUE = re.compile(r"^\s*([\d.,]+(?:[eE][+-]?\d+)?)\s*(.*?)\s*$")


@dataclass
class TimePlan:
    """How the rows get their instants."""

    kind: str = "rate"  # rate, number, count, text
    columns: tuple[int, ...] = ()  # the time column, or a date and a clock column
    unit: str = ""
    factor: float = 1.0
    rate: float | None = None
    resolution: float = 0.0
    epoch: bool = False
    extra: list[TimePlan] = field(default_factory=list)  # further time columns, each for the columns to its right


def find_column(wanted: str, names: Sequence[str], headers: Sequence[str]) -> int | None:
    """Place of a column by name, header or, as a last resort, name without regard to case."""
    wanted = " ".join(str(wanted).split())
    for labels in (names, headers):
        if wanted in labels:
            return list(labels).index(wanted)
    for labels in (names, headers):
        same = [place for place, label in enumerate(labels) if label.casefold() == wanted.casefold()]
        if len(same) == 1:
            return same[0]
    return None


def unit_of(place: int, layout: Layout, told: Told) -> HeaderUnit:
    """Unit of a column: told, or written in the file."""
    name, header = layout.names[place], layout.headers[place]
    for key in (name, header):
        if key and key in told.units:
            unit = read_unit(str(told.units[key]), name)
            if unit.problem or (unit.text and unit.dimension is None):
                raise InputError(
                    f"units: {name!r} is given as {told.units[key]!r}: {unit.problem or unit.remark}", name="units", value=told.units[key]
                )
            return unit
    written = layout.units[place]
    if written is None and place in layout.suffixed:
        written = layout.suffixed[place]
    return read_unit(written, name) if written else HeaderUnit()


def last_digit(cells: Sequence[str], decimal: str) -> float:
    """What one unit of the last written digit is worth, from some cells.

    >>> last_digit(["0.10", "0.15"], "."), last_digit(["1.5e-03"], ".")
    (0.01, 0.0001)
    """
    finest: float | None = None
    for cell in cells:
        text = cell.strip().strip('"').lower().replace("d", "e")
        mantissa, _, exponent = text.partition("e")
        digits = len(mantissa.partition(decimal)[2])
        try:
            step = 10.0 ** ((int(exponent) if exponent else 0) - digits)
        except (ValueError, OverflowError):
            continue
        finest = max(finest or 0.0, step) if exponent else min(step if finest is None else finest, step)
    return finest if finest is not None else 0.0


def stated_rate(preamble: Mapping[str, str], notes: Notes) -> float | None:
    """Sample rate that the preamble states. [Hz]"""
    for key, text in preamble.items():
        is_rate, is_step = bool(_RATE_KEY.search(key)), bool(_STEP_KEY.search(key))
        match = _VALUE.match(text)
        if not (is_rate or is_step) or not match or re.search(r"(?i)number|count|total|size|volume|\bn\b|samples$", key):
            continue
        value = match[1].replace(",", ".") if match[1].count(",") <= 1 and "." not in match[1] else match[1].replace(",", "")
        bracket = re.search(r"[(\[]([^)\]]+)[)\]]", key)
        unit = match[2].strip("()[]") or (bracket[1] if bracket else "")
        unit = {
            "Hz.": "Hz",
            "hertz": "Hz",
            "samples/s": "Hz",
            "S/s": "Hz",
            "sps": "Hz",
            "1/s": "Hz",
            "fps": "Hz",
            "samples per second": "Hz",
            "seconds": "s",
            "sec": "s",
            "samples/sec": "Hz",
        }.get(unit, unit)
        try:
            if is_step and not (is_rate and read_unit(unit).dimension == "frequency"):
                if unit:
                    return 1 / to_si(f"{value} {unit}", "time", key)
            elif not unit and re.search(r"(?i)rate|freq|fs", key):
                notes.add(f"The preamble states {clean(key)!r} = {clean(text)!r} without a unit: taken as Hz.")
                return to_si(f"{value} Hz", "frequency", key)
            elif unit and read_unit(unit).dimension == "frequency":
                return to_si(f"{value} {unit}", "frequency", key)
        except (PulsekitError, ZeroDivisionError):
            continue
    return None


def _sampled(rows: Sequence[tuple[int, Sequence[str]]], place: int, decimal: str) -> np.ndarray:
    values = np.array([number(cells[place], decimal) for _, cells in rows[:2000]])
    return values[np.isfinite(values)]


def _goes_up(values: np.ndarray) -> bool:
    return len(values) > 1 and values[-1] > values[0] and float(np.mean(np.diff(values) >= 0)) > 0.9


def plan_time(layout: Layout, rows: Sequence[tuple[int, Sequence[str]]], told: Told, notes: Notes) -> TimePlan:
    """Choose the time column and its unit, or the rate; refuse where that would be a guess of a number."""
    preamble_rate = None
    if told.time is not None:
        if told.time == "":
            return _by_rate(told, None, notes, layout)
        place = find_column(told.time, layout.names, layout.headers)
        if place is None:
            raise MissingColumnError(
                f"{notes.where}: there is no column {told.time!r} to be the time; there are: {', '.join(clean(name) for name in layout.names)}",
                name=told.time, columns=tuple(layout.names),
            )  # fmt: skip
        if layout.kinds[place] == CLOCK:
            return TimePlan(kind="text", columns=_with_date(place, layout))
        return _numeric(place, layout, rows, told, notes, asked=True)
    preamble_rate = stated_rate(layout.preamble, notes)
    places = [place for place, kind in enumerate(layout.kinds) if kind == NUMBER]
    clocks = [place for place, kind in enumerate(layout.kinds) if kind == CLOCK]
    decimal = layout.decimal or "."
    rising = [place for place in places if _goes_up(_sampled(rows, place, decimal))]
    timed = [
        place
        for place in rising
        if unit_of(place, layout, told).dimension == "time" and (_TIME.match(layout.names[place]) or place == places[0])
    ]
    named = [
        place
        for place in rising
        if _TIME.match(layout.names[place]) and place not in timed and unit_of(place, layout, told).dimension in ("time", None)
    ]
    bare = [place for place in rising if place == places[0] and any(pattern.match(layout.names[place]) for pattern, _ in _NAMED_UNITS[:4])]
    counted = [place for place in rising if _COUNT.match(layout.names[place])]
    if timed or bare:
        return _joined([*timed, *(place for place in bare if place not in timed)], layout, rows, told, notes)
    if clocks:
        told_time = [place for place in clocks if any(":" in cells[place] for _, cells in rows[:20])] or clocks
        chosen = next((place for place in told_time if _TIME.match(layout.names[place])), told_time[0])
        return TimePlan(kind="text", columns=_with_date(chosen, layout))
    if named:
        return _joined(named, layout, rows, told, notes)
    if counted and (told.sample_rate or preamble_rate):
        return _count(counted[0], layout, told, preamble_rate, notes)
    guessed = _unnamed(layout, rows, places, told, preamble_rate, notes)
    if guessed is not None:
        return guessed
    return _by_rate(told, preamble_rate, notes, layout, counted=counted)


def _joined(chosen: list[int], layout: Layout, rows: Sequence[tuple[int, Sequence[str]]], told: Told, notes: Notes) -> TimePlan:
    """The first time column, and further ones that have columns of their own on their right."""
    plan = _numeric(chosen[0], layout, rows, told, notes)
    values = [place for place, kind in enumerate(layout.kinds) if kind == NUMBER and place not in chosen]
    previous = chosen[0]
    for place in chosen[1:]:
        if any(previous < value < place for value in values) and any(value > place for value in values):
            plan.extra.append(_numeric(place, layout, rows, told, notes))
            previous = place
    return plan


def _with_date(place: int, layout: Layout) -> tuple[int, ...]:
    """A date in the column beside a time of day belongs to it."""
    clocks = [other for other, kind in enumerate(layout.kinds) if kind == CLOCK and abs(other - place) == 1]
    return (place, *clocks[:1])


def _count(place: int, layout: Layout, told: Told, preamble_rate: float | None, notes: Notes) -> TimePlan:
    rate = told.sample_rate or preamble_rate or 1.0
    if told.sample_rate is None:
        notes.add(f"Sample rate {rate:.6g} Hz taken from the preamble; time counted from column {layout.names[place]!r}.")
    return TimePlan(kind="count", columns=(place,), factor=1 / rate, rate=rate, resolution=1e-6 / rate)


def _by_rate(told: Told, preamble_rate: float | None, notes: Notes, layout: Layout, counted: Sequence[int] = ()) -> TimePlan:
    rate = told.sample_rate or preamble_rate
    if rate is None:
        there = ", ".join(clean(name) for name, kind in zip(layout.names, layout.kinds, strict=True) if kind != BLANK)
        what = (
            f"column {layout.names[counted[0]]!r} counts samples, but the rate is not stated: pass sample_rate='200 Hz'"
            if counted
            else ("no column was recognised as the time; name it with time=, or pass sample_rate='200 Hz' if rows are evenly spaced")
        )
        raise notes.refuse(f"{what} (columns: {there})")
    if told.sample_rate is None:
        notes.add(f"Sample rate {rate:.6g} Hz taken from the preamble.")
    return TimePlan(kind="rate", rate=rate)


def _unnamed(
    layout: Layout, rows: Sequence[tuple[int, Sequence[str]]], places: list[int], told: Told, preamble_rate: float | None, notes: Notes
) -> TimePlan | None:
    """Without a header: a first column that rises evenly is the time."""
    if layout.header_cells is not None or len(places) < 2 or places[0] != 0:
        return None
    values = _sampled(rows, 0, layout.decimal or ".")
    steps = np.diff(values)
    if (
        len(steps) < 3
        or not (steps >= 0).all()
        or not steps.any()
        or float(np.percentile(steps, 95)) > 1.5 * float(np.median(steps)) + 1e-12
    ):
        return None
    step = float(np.median(steps))
    rate = told.sample_rate or preamble_rate
    if step == 1.0 and rate:
        notes.add("The first column counts samples (no header says so).")
        return _count(0, layout, told, preamble_rate, notes)
    notes.add("The first column rises evenly: taken as the time (no header says so).")
    return _numeric(0, layout, rows, told, notes)


def _numeric(
    place: int, layout: Layout, rows: Sequence[tuple[int, Sequence[str]]], told: Told, notes: Notes, asked: bool = False
) -> TimePlan:
    """A column of numbers as the time: its unit is written, told, evident from its size, or refused."""
    name, decimal = layout.names[place], layout.decimal or "."
    unit = unit_of(place, layout, told)
    line = rows[0][0] if rows else None
    if unit.problem:
        raise notes.refuse(unit.problem, line=line, column=name)
    if unit.dimension not in ("time", None):
        raise notes.refuse(
            f"the time is in {unit.text!r}, which is no unit of time; pass units={{{name!r}: 'ms'}} or another column with time=",
            line=line,
            column=name,
        )
    if asked and told.sample_rate and _COUNT.match(name):
        return _count(place, layout, told, None, notes)
    if unit.remark:
        notes.add(f"Column {name!r}: {unit.remark}")
    values = _sampled(rows, place, decimal)
    cells = [cells[place] for _, cells in rows]
    spelled, epoch = unit.unit, False
    if not spelled:
        spelled, epoch = _guess_unit(name, values, told, notes, line)
    if spelled == "count":
        return _count(place, layout, told, None, notes)
    factor = float(convert(1.0, parse_unit(spelled)[0], DIMENSIONS["time"]))
    resolution = max(last_digit(cells[:200], decimal), last_digit(cells[-200:], decimal)) * factor
    return TimePlan(
        kind="number",
        columns=(place,),
        unit=spelled,
        factor=factor,
        resolution=resolution,
        epoch=epoch or bool(len(values) and values[0] * factor > 3e8),
    )


def _guess_unit(name: str, values: np.ndarray, told: Told, notes: Notes, line: int | None) -> tuple[str, bool]:
    for pattern, unit in _NAMED_UNITS:
        if pattern.search(name):
            notes.add(f"Column {name!r} names its own unit: read as {unit}.")
            return unit, False
    first = float(values[0]) if len(values) else 0.0
    for low, unit in ((3e8, "s"), (3e11, "ms"), (3e14, "us"), (3e17, "ns")):
        if low <= first < 12 * low:
            notes.add(f"Column {name!r} counts {unit} since 1970 (its size says so; UTC).")
            return unit, True
    steps = np.diff(values)
    step = float(np.median(steps[steps > 0])) if (steps > 0).any() else 0.0
    if told.sample_rate and step == 1.0:
        return "count", False
    if 0 < step < 0.999:
        notes.add(f"Column {name!r} has no unit: taken as seconds (steps of {step:.4g}); pass units={{{name!r}: 'ms'}} if not.")
        return "s", False
    raise notes.refuse(
        f"the time has no unit and steps of {step:.6g}: seconds, milliseconds or sample numbers? Pass units={{{name!r}: 'ms'}}, or sample_rate= if it counts samples",
        line=line,
        column=name,
    )
