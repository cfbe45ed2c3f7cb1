"""Channels of numbers, as formats other than text give them, to a Recording."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from ...errors import InputError, MissingColumnError
from ...quantities import DIMENSIONS, convert, parse_unit
from ..clock import Clock
from ..recording import Recording
from .assemble import RawColumn, build
from .source import Source
from .stamps import settle
from .timeplan import _COUNT, _TIME, _guess_unit, find_column
from .told import Notes, Told, clean, listed
from .unit_words import HeaderUnit, read_unit, split_header

__all__ = ["Channel", "build_channels"]


@dataclass
class Channel:
    """One channel as a format gives it."""

    header: str
    values: NDArray[np.float64]
    unit: str | None
    group: str = ""
    step: float | None = None
    start: float = 0.0
    stamps: NDArray[np.float64] | None = None
    origin: str = ""
    is_time: bool = False


def build_channels(
    channels: Sequence[Channel], source: Source, told: Told, notes: Notes, sha256: str, kind: str, *, rate: float | None = None
) -> Recording:
    """Choose group, clocks, names and units; refuse where the time is not known."""
    channels = [channel for channel in channels if len(channel.values)]
    channels, groups = _group(channels, told, notes)
    if not channels:
        raise notes.refuse("the file holds no channel of numbers")
    named = [_named(channel, told, notes) for channel in channels]
    names = [name for name, _ in named]
    names = [name if names.index(name) == place else f"{name} ({place + 1})" for place, name in enumerate(names)]
    headers = [channel.header for channel in channels]
    for key in told.units:
        if find_column(key, names, headers) is None:
            raise MissingColumnError(
                f"{notes.where}: units names {key!r}, which is not there; there are: {', '.join(map(clean, names))}",
                name=key,
                columns=tuple(names),
            )
    time = _time_place(channels, named, names, headers, told, notes)
    clocks: list[Clock] = []
    keys: dict[object, int] = {}
    raws: list[RawColumn] = []
    base: tuple[Clock, NDArray[np.intp] | None] | None = None
    if time is not None:
        base = _clock_from(channels[time], named[time][1], names[time], told, notes)
        clocks.append(base[0])
    for place, channel in enumerate(channels):
        if place == time:
            continue
        values = np.array(channel.values, float)
        number, values = _clock_for(channel, values, base, channels[time] if time is not None else None, clocks, keys, told, rate, notes)
        if told.columns is None or names[place] in told.columns or headers[place] in told.columns:
            values[~np.isfinite(values)] = np.nan
            raws.append(RawColumn(names[place], headers[place], values, named[place][1], number))
    if told.columns is not None:
        for name in told.columns:
            if find_column(name, names, headers) is None:
                raise MissingColumnError(
                    f"{notes.where}: there is no column {name!r}; there are: {', '.join(map(clean, names))}",
                    name=name,
                    columns=tuple(names),
                )
    time_name = names[time] if time is not None else ""
    unit = named[time][1].unit or "s" if time is not None else ""
    return build(
        raws, clocks, notes, sha256=sha256, path=source.path or source.name, preamble={}, layout={"format": kind}, time_column=time_name, blocks=groups,
        order=tuple(names), time_names=(time_name,) if time_name else (), time_unit=unit,
    )  # fmt: skip


def _group(channels: list[Channel], told: Told, notes: Notes) -> tuple[list[Channel], tuple[str, ...]]:
    groups = tuple(dict.fromkeys(channel.group for channel in channels))
    if told.block is not None and groups and groups != ("",):
        chosen = groups[told.block] if isinstance(told.block, int) and 0 <= told.block < len(groups) else told.block
        if chosen not in groups:
            raise InputError(
                f"block = {told.block!r}: there is no such group; there are: {listed([clean(group) for group in groups], 8)}",
                name="block",
                value=told.block,
            )
        return [channel for channel in channels if channel.group == chosen], groups
    if len(groups) > 1:
        raise notes.refuse(
            f"the file has several groups ({listed([repr(clean(group)) for group in groups], 8)}); choose one with block={groups[0]!r}"
        )
    return list(channels), groups if groups != ("",) else ()


def _named(channel: Channel, told: Told, notes: Notes) -> tuple[str, HeaderUnit]:
    name, unit, remark = (channel.header, channel.unit, "") if channel.unit else split_header(channel.header)
    name = clean(name, 200) or "column"
    if remark:
        notes.add(remark[0].upper() + remark[1:])
    given = told.units.get(name, told.units.get(channel.header))
    if given is not None:
        read = read_unit(str(given), name)
        if read.problem or (read.text and read.dimension is None):
            raise InputError(f"units: {name!r} is given as {given!r}: {read.problem or read.remark}", name="units", value=given)
        return name, read
    return name, read_unit(unit, name) if unit else HeaderUnit()


def _time_place(
    channels: Sequence[Channel], named: Sequence[tuple[str, HeaderUnit]], names: list[str], headers: list[str], told: Told, notes: Notes
) -> int | None:
    if told.time == "":
        return None
    if told.time is not None:
        place = find_column(told.time, names, headers)
        if place is None:
            raise MissingColumnError(
                f"{notes.where}: there is no column {told.time!r} to be the time; there are: {', '.join(map(clean, names))}",
                name=told.time,
                columns=tuple(names),
            )
        return place
    if any(channel.stamps is not None for channel in channels):
        return None
    for place, channel in enumerate(channels):
        name, unit = named[place]
        rising = len(channel.values) > 1 and float(np.mean(np.diff(channel.values) >= 0)) > 0.9
        if channel.is_time or (rising and channel.step is None and (_TIME.match(name) or (unit.dimension == "time" and place == 0))):
            return place
    return None


def _clock_from(channel: Channel, unit: HeaderUnit, name: str, told: Told, notes: Notes) -> tuple[Clock, NDArray[np.intp] | None]:
    """Clock of a channel of stamps."""
    if unit.problem or unit.dimension not in ("time", None):
        raise notes.refuse(
            unit.problem or f"the time is in {unit.text!r}, which is no unit of time; pass units={{{name!r}: 's'}}", column=name
        )
    spelled, epoch = (unit.unit, False) if unit.unit else _guess_unit(name, channel.values[:2000], told, notes, None)
    if spelled == "count" and told.sample_rate:
        factor = 1 / told.sample_rate
    else:
        factor = float(convert(1.0, parse_unit(spelled)[0], DIMENSIONS["time"]))
    stamps = channel.values * factor
    origin = channel.origin
    if epoch and np.isfinite(stamps[0]):
        origin = str(np.datetime64(int(stamps[0] * 1e9), "ns")) + " UTC"
        stamps = stamps - stamps[0]
    resolution = 4 * float(np.spacing(np.nanmax(np.abs(channel.values)) * factor))
    settled = settle(stamps, resolution=resolution, notes=notes, name=name, line_of=lambda row: row + 1, origin=origin)
    return settled.clock, settled.rows


def _clock_for(
    channel: Channel, values: NDArray[np.float64], base: tuple[Clock, NDArray[np.intp] | None] | None, time: Channel | None, clocks: list[Clock], keys: dict[object, int],
    told: Told, rate: float | None, notes: Notes,
) -> tuple[int, NDArray[np.float64]]:  # fmt: skip
    """Number of the clock that a channel follows, and its values in that order."""
    if channel.stamps is not None:
        key: object = (len(channel.stamps), float(channel.stamps[0]), float(channel.stamps[-1]), hash(channel.stamps.tobytes()))
        if key not in keys:
            resolution = 4 * float(np.spacing(np.abs(channel.stamps).max()))
            settled = settle(channel.stamps, resolution=resolution, notes=notes, name=channel.header, line_of=lambda row: row + 1)
            clocks.append(settled.clock)
            keys[key] = len(clocks) - 1
            keys[(key, "rows")] = settled.rows  # type: ignore[assignment]
        rows = keys[(key, "rows")]
        return keys[key], values if rows is None else values[rows]
    if base is not None and time is not None:
        if len(values) != len(time.values):
            raise notes.refuse(
                f"it has {len(values)} samples, the time {len(time.values)}; name another time column with time=", column=channel.header
            )
        return 0, values if base[1] is None else values[base[1]]
    step = 1 / told.sample_rate if told.sample_rate else channel.step or (1 / rate if rate else None)
    if told.sample_rate and channel.step and abs(channel.step * told.sample_rate - 1) > 1e-3:
        raise notes.refuse(
            f"sample_rate = {told.sample_rate:.6g} Hz does not agree with the file's own {1 / channel.step:.6g} Hz; leave it out",
            column=channel.header,
        )
    if step is None:
        hint = "it may count samples: " if _COUNT.match(channel.header) else ""
        raise notes.refuse(
            f"the file states no time; {hint}name the time column with time=, or pass sample_rate='200 Hz'", column=channel.header
        )
    spot: object = (step, channel.start, len(values))
    if spot not in keys:
        clocks.append(
            Clock(start=channel.start, interval=step, count=len(values), origin=channel.origin, name=channel.header if clocks else "")
        )
        keys[spot] = len(clocks) - 1
    return keys[spot], values
