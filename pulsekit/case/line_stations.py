"""Pressures measured along a line: each channel calibrated by itself, all cut by the same turns of the shaft."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..appraisal.finding import Check
from ..errors import CaseError, InputError
from ..quantities import Given
from ..trace import Cycles, Harmonics, Recording, Signal, decompose, find_cycles
from ..trace.channel import butterworth_response, delay_response, high_pass_response, second_order_response, usable_orders
from ..trace.shaft import shaft_cycles
from ..trace.spectrum import Unlocked, unlocked_part
from .case import Case
from .signals import prepared
from .workspace import Workspace

__all__ = ["Station", "read_channel", "read_stations", "recording_checks", "turns_of"]


@dataclass(frozen=True, eq=False, kw_only=True)
class Station:
    """A measured pressure: where, its signal, turns and harmonics (orders of the shaft), and what is known of it."""

    name: str
    section: str
    position: float
    signal: Signal
    cycles: Cycles
    harmonics: Harmonics
    recording: Recording
    mean_known: bool = True
    tapping_length: float | None = None
    scale: Given | None = None
    remarks: tuple[str, ...] = ()

    @property
    def inside(self) -> NDArray[np.bool_]:
        """Samples within the turns used."""
        time = self.signal.time
        return np.asarray((time >= self.cycles.edges[0]) & (time <= self.cycles.edges[-1]))

    @cached_property
    def unlocked(self) -> Unlocked:
        """Recorded extremes, and what is not locked to the shaft: share of the variance and largest lines."""
        # As recorded: the undoing of filters changes the harmonics, not how much of the record the mean turn explains.
        return unlocked_part(self.cycles, decompose(self.cycles, count=self.harmonics.count))

    @property
    def extremes(self) -> tuple[float, float, float]:
        """Recorded lowest, highest and peak-to-peak of 99.9 % of the samples [Pa]."""
        part = self.unlocked
        return part.lowest, part.highest, part.usual_peak_to_peak

    @property
    def asynchronous_share(self) -> float:
        """Share of the variance that is not locked to the shaft."""
        return self.unlocked.share


def _columns(case: Case, section: str, recording: Recording) -> str:
    column = case.get(f"{section}.column") or case.get(f"{section}.signal")
    if column is not None:
        return str(column)
    pressures = [name for name in recording.columns if recording[name].dimension == "pressure"]
    if len(pressures) != 1:
        raise CaseError(f"{section}.column does not say which column to take; there are: {', '.join(recording.columns)}", key=f"{section}.column")
    return pressures[0]


def read_channel(case: Case, section: str, workspace: Workspace, wanted: str = "pressure") -> tuple[Signal, Recording]:
    """Return the calibrated signal of a section and its recording."""
    if case.get(f"{section}.file") is None:
        raise case.missing(f"{section}.file")
    recording = workspace.recording(case, section)
    signal, _ = prepared(case, section, recording[_columns(case, section, recording)], workspace)
    if signal.dimension != wanted:
        raise InputError(
            f"{section}: column {signal.name!r} is in {signal.unit or 'no unit'}, not a {wanted.replace('_', ' ')}; give unit or calibration", name=f"{section}.unit"
        )
    return signal, recording


def turns_of(case: Case, section: str, signal: Signal, recording: Recording, speed: float | None, number: int) -> Cycles:
    """Turns of the shaft in a signal: by its trigger column, else by the speed found in the trace near the stated one.

    Raises
    ------
    InputError
        If the speed in the trace differs from the stated one by more than 3 %, or the samples do not reach twice the highest pump order.
    """
    trigger = case.get(f"{section}.trigger") or case.get("recording.trigger") or case.get("source.trigger") if not isinstance(case.get("source"), list) else None
    leave_out = case.get("cycles.leave_out") or ()
    align = case.get("cycles.align") or "stretch"
    period = case.value("cycles.period", "time")
    if trigger is None and period is not None:
        return find_cycles(signal, period=period, leave_out=leave_out, align=align)
    if trigger is not None:
        place = section if case.get(f"{section}.trigger") else "recording" if case.get("recording.trigger") else "source"
        found = shaft_cycles(
            signal, trigger=recording[str(trigger)], speed=speed if case.get("operation.speed_range") is None else None,
            pulses_per_revolution=int(case.get(f"{place}.pulses_per_revolution") or 1), trigger_ratio=float(case.get(f"{place}.trigger_ratio") or 1.0),
            trigger_angle=case.value(f"{place}.trigger_angle") or 0.0, leave_out=leave_out,
        )  # fmt: skip
    else:
        if speed is None:
            raise case.missing("operation.speed")
        _resolved(signal, speed * number)
        found = shaft_cycles(signal, speed=speed, per_turn=number, leave_out=leave_out)
    return found if align == "stretch" else found.aligned(align)


def _resolved(signal: Signal, frequency: float) -> None:
    rate = 1 / float(np.median(np.diff(signal.time)))
    if rate < 2.2 * frequency:
        raise InputError(
            f"column {signal.name!r} is sampled at {rate:.4g} Hz, below twice the pump's {frequency:.4g} Hz; record at {5 * frequency:.4g} Hz or more",
            name="sample_rate", value=rate, allowed=f">= {2 * frequency:.4g} Hz",
        )  # fmt: skip


def _undone(case: Case, section: str, harmonics: Harmonics) -> tuple[Harmonics, tuple[str, ...]]:
    """Undo delay, filters and coupling of a channel, up to a gain of 3."""
    f = harmonics.frequency * np.arange(harmonics.count + 1)
    response = np.ones(f.size, dtype=complex)
    said = []
    corner = case.value(f"{section}.low_pass")
    if corner is not None:
        response *= butterworth_response(f, corner, int(case.get(f"{section}.low_pass_order") or 2))
        said.append("low-pass filter")
    own = case.value(f"{section}.natural_frequency")
    if own is not None:
        damping = case.value(f"{section}.damping_ratio")
        if damping is None:
            raise case.missing(f"{section}.damping_ratio")
        response *= second_order_response(f, own, damping)
        said.append("transducer line")
    low = case.value(f"{section}.high_pass")
    if low is not None:
        response[1:] *= high_pass_response(f[1:], low)
        said.append("AC coupling")
    usable = usable_orders(response)
    remarks = ()
    if said:
        more = f"; orders above {usable} would have been magnified more than threefold and were dropped" if usable < harmonics.count else ""
        remarks = (f"{section}: {', '.join(said)} undone per order{more}.",)
    harmonics = harmonics.truncated(min(usable, harmonics.count))
    delay = case.value(f"{section}.delay") or 0.0
    factor = 1.0 / (response[: harmonics.count + 1] * delay_response(f[: harmonics.count + 1], delay))
    factor[0] = factor[0].real
    return harmonics.multiplied(factor, unit=harmonics.unit), remarks


def read_stations(case: Case, workspace: Workspace, *, speed: float | None, number: int, length: float) -> list[Station]:
    """Return every station of a case, in order of position, all cut by the turns of the first."""
    count = len(case.get("station") or ())
    found: list[Station] = []
    turns: Cycles | None = None
    for index in range(count):
        section = f"station.{index}"
        if case.get(f"{section}.position") is None:
            raise case.missing(f"{section}.position")
        position = case.given(f"{section}.position").value
        name = str(case.get(f"{section}.name") or index + 1)
        if position > length * (1 + 1e-9):
            raise CaseError(f"station {name}: position {position:.4g} m lies outside the line of 0 to {length:.4g} m", key=f"{section}.position", value=position)
        signal, recording = read_channel(case, section, workspace)
        made = _harmonics(case, section, signal, recording, turns, speed, number, workspace)
        turns = made[0] if turns is None else turns
        mean_known = case.get(f"{section}.coupling") != "ac"
        _ask_for_coupling(case, section, signal, made[1], mean_known)
        harmonics, said = _undone(case, section, made[1])
        found.append(
            Station(
                name=name, section=section, position=position, signal=signal, cycles=made[0], harmonics=harmonics, recording=recording,
                mean_known=mean_known, tapping_length=case.value(f"{section}.tapping_length"), scale=case.maybe(f"{section}.scale_uncertainty"),
                remarks=(*recording.remarks, *harmonics.remarks, *said),
            )
        )  # fmt: skip
    places = [station.position for station in found]
    if len(set(places)) < len(places):
        raise CaseError("two stations stand at one place; their positions must differ", key="station")
    return sorted(found, key=lambda station: station.position)


def _harmonics(
    case: Case, section: str, signal: Signal, recording: Recording, turns: Cycles | None, speed: float | None, number: int, workspace: Workspace
) -> tuple[Cycles, Harmonics]:
    """Turns and orders of one channel, remembered."""
    import json

    key = (
        "orders", section, speed, number,
        json.dumps([case.get(section), case.get("cycles"), case.get("recording"), case.get("source"), str(case.folder)], sort_keys=True, default=str),
        recording.sha256,
    )  # fmt: skip

    def make() -> tuple[Cycles, Harmonics]:
        if turns is None:
            cycles = turns_of(case, section, signal, recording, speed, number)
        else:
            cycles = find_cycles(signal, onsets=turns.edges, leave_out=[index + 1 for index, _ in turns.left_out], keep_odd=True, align=turns.align)
        asked = case.get("cycles.harmonics")
        return cycles, decompose(cycles, count=None if asked is None else int(asked))

    found: tuple[Cycles, Harmonics] = workspace.remember(key, make)
    return found


def _ask_for_coupling(case: Case, section: str, signal: Signal, harmonics: Harmonics, mean_known: bool) -> None:
    """A mean near zero against the ripple is that of a dynamic transducer: ask."""
    swing = float(np.ptp(harmonics.evaluate(np.linspace(0, harmonics.period, 256))))
    if mean_known and case.get(f"{section}.coupling") is None and abs(harmonics.mean) < 0.02 * swing:
        raise CaseError(
            f"{section}: the mean of {harmonics.mean:.4g} Pa is nearly zero against a ripple of {swing:.4g} Pa p-p: is the channel AC coupled? "
            f'Write coupling = "ac" (the mean then comes from operation.mean_pressure) or coupling = "dc"',
            key=f"{section}.coupling",
        )  # fmt: skip


def recording_checks(stations: Sequence[Station], mean_pressure: Given | None, ambient: float, numbers: Any) -> list[Check]:
    """Checks on the recordings: periodic, resolved, means that agree, what is not locked to the shaft."""
    rows: list[Check] = []
    for station in stations:
        scatter = station.asynchronous_share
        verdict = "holds" if scatter < 0.1 else "doubtful" if scatter < 0.5 else "fails"
        rows.append(
            Check(
                name=f"periodic_{station.name}", label=f"Locked to the shaft: station {station.name}", verdict=verdict, value=scatter, limit=0.1,
                because=f"Station {station.name}: {' '.join(station.unlocked.remarks)}", source="our allowance",
            )
        )  # fmt: skip
        if station.mean_known and mean_pressure is not None:
            own = station.harmonics.mean + (0.0 if parsed_absolute(station) else ambient)
            allowed = max(0.02 * mean_pressure.value, 2 * mean_pressure.standard_uncertainty)
            expected = float(numbers["mean_at"](station.position))
            apart = abs(own - expected)
            rows.append(
                Check(
                    name=f"mean_{station.name}", label=f"Mean pressure at station {station.name}", verdict="holds" if apart <= allowed else "fails", value=own,
                    limit=expected, unit="Pa", source="the recorded mean of a DC channel counts",
                    because=f"The recorded mean is {own / 1e5:.4g} bar(a), that of the stated mean pressure there {expected / 1e5:.4g} bar(a)"
                    + ("." if apart <= allowed else ": one of them is wrong; check zero, calibration and operation.mean_pressure."),
                )
            )  # fmt: skip
    return rows


def parsed_absolute(station: Station) -> bool:
    """Tell whether a station's unit says that it is absolute."""
    from ..quantities import parse_unit

    return bool(station.signal.unit) and parse_unit(station.signal.unit)[1] == "absolute"
