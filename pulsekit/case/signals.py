"""The signal that a wall-shear case asks for, out of the columns of its recording, calibrated and joined."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..errors import CaseError, InputError, UnitError
from ..quantities import Given, parse_given
from ..trace import Cycles, Recording, Signal, find_cycles
from ..trace.channel import calibrated
from ..trace.trigger import trigger_onsets
from .case import Case
from .caveats import encoding_of_preamble, refuse_wrapped
from .workspace import Workspace

__all__ = ["DIMENSION_OF", "Gathered", "gather", "station_signal"]

#: Dimension that each measured quantity has in the file.
DIMENSION_OF = {
    "flow_rate": "flow_rate",
    "mean_velocity": "velocity",
    "centreline_velocity": "velocity",
    "velocity_envelope": "velocity",
    "pressure_gradient": "pressure_gradient",
    "pressure_drop": "pressure",
    "pressure": "pressure",
    "wall_shear_stress": "pressure",
}


@dataclass(frozen=True, eq=False, kw_only=True)
class Gathered:
    """A measured signal with what else is known of it."""

    recording: Recording
    signal: Signal
    dimension: str
    mean_known: bool = True
    needs_distance: bool = False
    weights: NDArray[np.float64] | None = None
    givens: Mapping[str, Given] = field(default_factory=dict)
    steps: Sequence[Callable[..., Any]] = ()
    remarks: tuple[str, ...] = ()
    pair: tuple[Signal, Signal] | None = None
    sections: tuple[str, str] = ("", "")

    def cycles(self, case: Case) -> Cycles:
        """Cut the signal into cycles as the case says."""
        period = case.value("cycles.period", "time")
        onsets = case.get("cycles.onsets")
        if onsets is not None:
            onsets = [parse_given(entry, "time", "cycles.onsets").value for entry in onsets]
        remarks: tuple[str, ...] = ()
        if case.get("recording.trigger") is not None and onsets is None and period is None:
            onsets, remarks = self._triggered(case)
        elif period is None and onsets is None:
            period, remarks = period_of_preamble(self.recording, self.signal)
        found = find_cycles(
            self.signal, period=period, onsets=onsets, leave_out=case.get("cycles.leave_out") or (), align=case.get("cycles.align"),
            keep_odd=bool(case.get("cycles.keep_odd")), remove_drift=bool(case.get("cycles.remove_drift")),
        )  # fmt: skip
        return found if not remarks else _remarked(found, remarks)

    def _triggered(self, case: Case) -> tuple[NDArray[np.float64], tuple[str, ...]]:
        """Onsets within the signal from the trigger column."""
        column = str(case.get("recording.trigger"))
        pulses = int(case.get("recording.pulses_per_revolution") or 1)
        onsets = trigger_onsets(self.recording[column], pulses_per_cycle=pulses)
        time = self.signal.time
        inside = onsets[(onsets >= time[0]) & (onsets <= time[-1] + float(np.median(np.diff(time))))]
        return inside, (f"Cycles begin where the trigger {column!r} rises.",)


def _remarked(cycles: Cycles, remarks: tuple[str, ...]) -> Cycles:
    from dataclasses import replace

    return replace(cycles, remarks=(*cycles.remarks, *remarks))


def period_of_preamble(recording: Recording, signal: Signal) -> tuple[float | None, tuple[str, ...]]:
    """Period of one gated cycle from the R-R interval or heart rate in the preamble, where the record holds but one cycle."""
    span = float(signal.time[-1] - signal.time[0]) + float(np.median(np.diff(signal.time)))
    stated = recording.stated_period
    if stated and 0.8 <= span / stated <= 1.2:
        return stated, (f"The period of {stated:.4g} s is that of the file's head, not frames times spacing ({span:.4g} s).",)
    for key, text in recording.preamble.items():
        word = "".join(character for character in str(key).lower() if character.isalnum())
        if word in ("rr", "rrinterval", "rrintervalms", "meanrr", "nominalinterval", "nominalrr"):
            try:
                seconds = parse_given(_with_unit(str(text), str(key), "ms"), "time", key).value
            except InputError:
                continue
            if 0.8 <= span / seconds <= 1.2:
                return seconds, (f"The period of {seconds:.4g} s is the R-R interval of the file's head, not frames times spacing ({span:.4g} s).",)
    return None, ()


def _with_unit(text: str, key: str, unit: str) -> str:
    """Give a bare number of a preamble its unit: from the key, else milliseconds above 10 and seconds below."""
    try:
        number = float(text)
    except ValueError:
        return text
    if "(ms)" in key or "[ms]" in key:
        return f"{number} ms"
    return f"{number} {unit}" if number > 10 else f"{number} s"


def gather(case: Case, workspace: Workspace, *, progress: Any = None, stop: Any = None) -> Gathered:
    """Return the signal of a case.

    Raises
    ------
    CaseError, MissingColumnError, UnitError
        If the column is not told and cannot be chosen, is not there, or has another dimension.
    """
    quantity = str(case.get("recording.quantity") or "")
    if quantity not in DIMENSION_OF:
        raise case.missing("recording.quantity")
    if case.get("station"):
        return _two_stations(case, workspace)
    if case.get("recording.file") is None:
        raise case.missing("recording.file")
    recording = workspace.recording(case, progress=progress, stop=stop)
    wanted = DIMENSION_OF[quantity]
    if case.get("recording.upstream") or case.get("recording.downstream"):
        return _two_columns(case, recording)
    signal = _joined(case, recording) if case.get("recording.forward") else _chosen(case, recording, wanted)
    signal, _ = prepared(case, "recording", signal, workspace)
    signal = _typed(signal, wanted, quantity)
    if case.get("recording.invert"):
        signal = signal.replace(values=-signal.values, remarks=(*signal.remarks, f"Column {signal.name!r} was inverted, as asked."))
    if wanted == "velocity":
        limit = case.value("recording.velocity_encoding") or encoding_of_preamble(recording.preamble)
        if limit is not None:
            refuse_wrapped(signal, limit)
    mean_known = case.get("recording.coupling") != "ac"
    return Gathered(
        recording=recording, signal=signal, dimension=wanted, mean_known=mean_known, weights=_deviation_weights(case, recording, signal),
    )  # fmt: skip


def _chosen(case: Case, recording: Recording, wanted: str) -> Signal:
    name = case.get("recording.signal")
    if name is not None:
        return recording[str(name)]
    fitting = [column for column in recording.columns if recording[column].dimension == wanted]
    if len(fitting) == 1:
        signal = recording[fitting[0]]
        return signal.replace(remarks=(*signal.remarks, f"Column {fitting[0]!r} was taken: it is the only {wanted.replace('_', ' ')}."))
    if not fitting and len(recording.columns) == 1:
        return recording[recording.columns[0]]
    words = ", ".join(recording.columns)
    raise CaseError(f"recording.signal does not say which column holds the {wanted.replace('_', ' ')}; there are: {words}", key="recording.signal")


def _typed(signal: Signal, wanted: str, quantity: str) -> Signal:
    """The signal must have the dimension of the quantity."""
    if signal.dimension is None and not signal.unit:
        raise UnitError(
            f"column {signal.name!r} has no unit; say it in the case, as in [recording] unit = {_example(wanted)}", name="recording.unit", allowed=wanted
        )
    if signal.dimension != wanted:
        raise UnitError(
            f"column {signal.name!r} is in {signal.unit}, which is not a {wanted.replace('_', ' ')}; {quantity} needs a unit such as {_example(wanted)}",
            name="recording.unit", value=signal.unit, allowed=wanted,
        )  # fmt: skip
    return signal


def _example(dimension: str) -> str:
    return {"flow_rate": '"mL/min"', "velocity": '"cm/s"', "pressure": '"mmHg"', "pressure_gradient": '"Pa/m"'}.get(dimension, '"..."')


def _joined(case: Case, recording: Recording) -> Signal:
    """Forward minus reverse envelope; their zeros are data."""
    reverse = case.get("recording.reverse")
    if reverse is None:
        raise case.missing("recording.reverse")
    return recording.join(str(case.get("recording.forward")), str(reverse))


def prepared(case: Case, section: str, signal: Signal, workspace: Workspace) -> tuple[Signal, bool]:
    """Apply unit, calibration and zero of a section; tell whether a zero was given."""
    unit = case.get(f"{section}.unit")
    if unit and not signal.unit:
        signal = signal.with_unit(str(unit))
    zero: Any = case.get(f"{section}.zero")
    between = case.get(f"{section}.zero_between")
    if between is not None:
        if len(between) != 2:
            raise CaseError(f'{section}.zero_between needs two times, as in ["0 s", "3 s"]', key=f"{section}.zero_between")
        begin, end = (parse_given(entry, "time", f"{section}.zero_between").value for entry in between)
        inside = (signal.time >= begin) & (signal.time <= end)
        if int(inside.sum()) < 2:
            raise CaseError(f"{section}.zero_between holds {int(inside.sum())} samples; it must lie within the record", key=f"{section}.zero_between")
        zero = float(signal.values[inside].mean())
    elif case.get(f"{section}.zero_file") is not None:
        zero = _mean_of_file(case, section, signal, workspace)
    calibration = case.get(f"{section}.calibration")
    if calibration is None and zero is None:
        return signal, False
    done = calibrated(signal, None if calibration is None else str(calibration), zero, name=f"{section}.calibration")
    if between is not None:
        # The stretch at no flow is no cycle: the longer part of the record beside it is what was measured.
        after = signal.time > end
        done = done.kept(after if 2 * int(after.sum()) >= len(signal) - int(inside.sum()) else signal.time < begin)
    return done, zero is not None


def _mean_of_file(case: Case, section: str, signal: Signal, workspace: Workspace) -> float:
    from ..trace import read_recording

    place = case.file_path(f"{section}.zero_file")
    recording = workspace.remember(("zero", str(place), place.stat().st_mtime_ns if place.exists() else 0), lambda: read_recording(place))
    if signal.name not in recording.columns:
        raise CaseError(f"{section}.zero_file has no column {signal.name!r}; it has: {', '.join(recording.columns)}", key=f"{section}.zero_file")
    return float(np.mean(recording[signal.name].values))


def _deviation_weights(case: Case, recording: Recording, signal: Signal) -> NDArray[np.float64] | None:
    name = case.get("recording.deviation")
    if name is None:
        return None
    deviation = recording[str(name)].values
    if deviation.shape != signal.values.shape or not np.all(deviation > 0):
        raise CaseError(f"recording.deviation: column {name!r} must hold a positive deviation for each sample", key="recording.deviation")
    return np.asarray((np.median(deviation) / deviation) ** 2)


def _difference(up: Signal, down: Signal, remarks: Sequence[str]) -> tuple[Signal, tuple[Signal, Signal]]:
    """Upstream minus downstream pressure, and both at the same instants."""
    if not (len(up) == len(down) and np.array_equal(up.time, down.time)):
        inside = (up.time >= down.time[0]) & (up.time <= down.time[-1])
        if int(inside.sum()) < 4:
            raise CaseError("the two pressures do not overlap in time; check their files, clocks and delays", key="station")
        up = up.kept(inside)
        down = Signal(up.clock, np.interp(up.time, down.time, down.values), unit=down.unit, name=down.name, dimension=down.dimension, remarks=down.remarks)
        remarks = (*remarks, f"{down.name!r} was brought to the instants of {up.name!r} by linear interpolation.")
    weights = None
    if up.weights is not None or down.weights is not None:
        ones = np.ones(len(up))
        weights = (ones if up.weights is None else up.weights) * (ones if down.weights is None else down.weights)
    joined = tuple(dict.fromkeys((*up.remarks, *down.remarks, *remarks)))
    both = Signal(
        up.clock, up.values - down.values, unit=up.unit, name=f"{up.name} − {down.name}", dimension="pressure", weights=weights, remarks=joined
    )  # fmt: skip
    return both, (up, down)


_NO_ZERO = (
    "No zero at no flow is stated for the two pressures: the mean of their difference is not known, and only the oscillating part is used "
    "(state zero, zero_file or zero_between, or mean_flow)."
)


def _two_columns(case: Case, recording: Recording) -> Gathered:
    """Two pressures in one file: their difference over the distance."""
    pair = []
    for role in ("upstream", "downstream"):
        name = case.get(f"recording.{role}")
        if name is None:
            raise case.missing(f"recording.{role}")
        pair.append(recording[str(name)])
    if pair[0].name == pair[1].name:
        raise CaseError("recording.upstream and recording.downstream are the same column", key="recording.downstream")
    workspace = Workspace()
    up, zero_up = prepared(case, "recording", pair[0], workspace)
    down, zero_down = prepared(case, "recording", pair[1], workspace)
    up, down = _typed(up, "pressure", "pressure_gradient"), _typed(down, "pressure", "pressure_gradient")
    known = zero_up and zero_down and case.get("recording.coupling") != "ac"
    signal, _ = _difference(up, down, () if known else (_NO_ZERO,))
    return Gathered(recording=recording, signal=signal, dimension="pressure", mean_known=known, needs_distance=True)


def station_signal(case: Case, index: int, workspace: Workspace) -> tuple[Signal, bool, Recording]:
    """Pressure at a station, calibrated; whether its zero is known; and its recording."""
    section = f"station.{index}"
    if case.get(f"{section}.file") is None:
        raise case.missing(f"{section}.file")
    recording = workspace.recording(case, section)
    column = case.get(f"{section}.column")
    if column is None:
        pressures = [name for name in recording.columns if recording[name].dimension == "pressure"]
        if len(pressures) != 1:
            raise CaseError(f"{section}.column does not say which column to take; there are: {', '.join(recording.columns)}", key=f"{section}.column")
        column = pressures[0]
    signal, zeroed = prepared(case, section, recording[str(column)], workspace)
    return signal, zeroed, recording


def _two_stations(case: Case, workspace: Workspace) -> Gathered:
    """Two pressures as stations, each with its own calibration, zero, height and delay."""
    count = len(case.get("station"))
    if count != 2:
        raise CaseError(f"a pressure gradient needs two stations; there are {count}", key="station")
    order = sorted(range(2), key=lambda index: case.given(f"station.{index}.position").value)
    found = [station_signal(case, index, workspace) for index in order]
    distance = case.given(f"station.{order[1]}.position").value - case.given(f"station.{order[0]}.position").value
    if distance <= 0:
        raise CaseError("the two stations stand at one place; their positions must differ", key="station.1.position")
    signals = []
    for (signal, _, _), index in zip(found, order, strict=True):
        signal = _typed(signal, "pressure", "pressure_gradient")
        delay = case.value(f"station.{index}.delay")
        signals.append(signal if not delay else Signal(signal.time - delay, signal.values, unit=signal.unit, name=signal.name, remarks=signal.remarks))
    known = all(zeroed for _, zeroed, _ in found) and not any(case.get(f"station.{index}.coupling") == "ac" for index in order)
    signal, pair = _difference(signals[0], signals[1], () if known else (_NO_ZERO,))
    rise = (case.value(f"station.{order[0]}.height") or 0.0) - (case.value(f"station.{order[1]}.height") or 0.0)
    steps: tuple[Callable[..., Any], ...] = ()
    if rise:

        def step(coefficients: Any, values: Any, frequency: float) -> Any:
            out = coefficients.copy()
            out[..., 0] += np.asarray(values["density"]) * 9.80665 * rise
            return out

        steps = (step,)
    return Gathered(
        recording=found[0][2], signal=signal, dimension="pressure", mean_known=known, needs_distance=True, steps=steps, pair=pair,
        sections=(f"station.{order[0]}", f"station.{order[1]}"),
        remarks=(f"The upstream station stands {1e3 * rise:.4g} mm higher than the downstream one; the weight of the liquid was taken out.",) if rise else (),
    )  # fmt: skip
