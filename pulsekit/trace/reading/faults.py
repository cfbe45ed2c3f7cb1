"""Faults in a signal: stuck and clipped stretches, single spikes. They are found, listed and given weight 0."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from ...errors import SignalError
from ..signal import Signal
from .told import listed

__all__ = ["drop_sentinels", "look_for_faults"]

_SENTINELS = frozenset(
    [float(f"{sign}{digits}") for sign in ("", "-") for digits in (
        "99", "999", "9999", "99999", "999999", "9999999", "99999999", "99.9", "99.99", "999.9", "999.99", "999.999", "9999.9", "9999.99", "9999.999", "99999.9", "99999.99",
        "888", "8888", "88888", "32767", "32768", "65535", "65536", "2147483647", "2147483648", "4294967295", "8388607", "8388608", "6999", "7999", "7777", "1e6", "1e9", "1e10",
        "1e20", "9.9e37", "9.91e37", "1e30", "1e31", "1e32", "1e35", "1e36", "1e37", "1e38", "3.4e38", "3.4028235e38", "3.40282347e38", "1e99", "1e300", "1.7976931348623157e308",
    )]
)  # fmt: skip
_HUGE = 1e29
_FEWEST = 30  # shorter signals (one cycle of frames) are not searched
_TOO_MANY = 0.5


def drop_sentinels(values: NDArray[np.float64]) -> list[tuple[float, int, int]]:
    """Set values that stand for "no value" to NaN, in place; return (value, count, first row) of each.

    A number counts as such if it is one that instruments use (-9999, 32767, 9.9e37, ...) and lies far
    outside the range of all others, by more than three times that range.
    """
    found: list[tuple[float, int, int]] = []
    if not len(values):
        return found
    for _ in range(6):
        low, high = _extremes(values)
        if not np.isfinite(low) or low == high:
            break
        done = True
        for edge in (high, low):
            if abs(edge) < _HUGE and float(f"{edge:.9g}") not in _SENTINELS and edge not in _SENTINELS:
                continue
            same = values == edge
            rest_low, rest_high = _extremes(np.where(same, np.nan, values) if len(values) < 5_000_000 else values[~same])
            if not np.isfinite(rest_low):
                continue
            gap = edge - rest_high if edge == high else rest_low - edge
            if abs(edge) >= _HUGE or (gap > 3 * (rest_high - rest_low) and gap > 0.1 * abs(edge)):
                found.append((float(edge), int(same.sum()), int(np.argmax(same))))
                values[same] = np.nan
                done = False
                break
        if done:
            break
    return found


def _extremes(values: NDArray[np.float64]) -> tuple[float, float]:
    low, high = np.inf, -np.inf
    for begin in range(0, len(values), 1_000_000):
        part = values[begin : begin + 1_000_000]
        least, most = float(np.min(part)), float(np.max(part))
        if np.isnan(least):
            part = part[~np.isnan(part)]
            if not len(part):
                continue
            least, most = float(np.min(part)), float(np.max(part))
        low, high = min(low, least), max(high, most)
    return (low, high) if low <= high else (np.nan, np.nan)


def look_for_faults(signal: Signal) -> tuple[NDArray[np.float64] | None, tuple[str, ...]]:
    """Find stuck and clipped stretches and spikes; return (weights or None, remarks).

    Raises
    ------
    SignalError
        If more than half of the samples are faulty: too little is left.
    """
    if len(signal.values) < _FEWEST:
        return None, ()
    with np.errstate(all="ignore"):  # absurd numbers overflow; they are no spikes of anything then
        return _look(signal)


def _look(signal: Signal) -> tuple[NDArray[np.float64] | None, tuple[str, ...]]:
    values = signal.values
    remarks: list[str] = []
    bad = np.zeros(len(values), bool)
    begins, lengths = _runs(values)
    quantum = _quantum(values)
    for high in (True, False):
        _clipped(signal, begins, lengths, quantum, high, bad, remarks)
    _stuck(signal, begins, lengths, bad, remarks)
    _spikes(signal, bad, remarks)
    if not bad.any():
        return None, tuple(remarks)
    share = float(bad.mean())
    if share > _TOO_MANY:
        raise SignalError(
            f"column {signal.name!r}: {100 * share:.0f} % of the samples are stuck, clipped or spikes ({' '.join(remarks)}) - too little is left; "
            "record again, or pass a stretch that is sound with signal.between(begin, end)",
            column=signal.name,
        )
    return np.where(bad, 0.0, 1.0), tuple(remarks)


def _runs(values: NDArray[np.float64]) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """Begin and length of each run of at least 3 equal values."""
    same = values[1:] == values[:-1]
    edges = np.flatnonzero(np.diff(np.concatenate([[False], same, [False]]).astype(np.int8)))
    begins, ends = edges[0::2], edges[1::2]
    lengths = ends - begins + 1
    long = lengths >= 3
    return begins[long], lengths[long]


def _quantum(values: NDArray[np.float64]) -> float:
    """Smallest step between distinct values: the resolution of the numbers."""
    some = np.unique(values[:200_000:1])
    if len(some) < 2:
        return 0.0
    steps = np.diff(some)
    steps = steps[steps > 1e-9 * (some[-1] - some[0])]
    return float(steps.min()) if len(steps) else 0.0


def _clipped(
    signal: Signal,
    begins: NDArray[np.intp],
    lengths: NDArray[np.intp],
    quantum: float,
    high: bool,
    bad: NDArray[np.bool_],
    remarks: list[str],
) -> None:
    """Plateaus at the largest or least value that the signal runs into with a slope: a crest would round off."""
    values = signal.values
    edge = float(values.max() if high else values.min())
    if edge == 0.0:
        return  # zeros of a rectified or one-sided channel are data
    at = values[begins] == edge
    if not at.any():
        return
    starts, sizes = begins[at], lengths[at]
    inner = (starts > 0) & (starts + sizes < len(values))
    if not inner.any():
        return
    entering = np.abs(edge - values[starts[inner] - 1])
    leaving = np.abs(edge - values[starts[inner] + sizes[inner]])
    steep = np.median(np.minimum(entering, leaving))
    total = int(sizes.sum())
    span = float(values.max() - values.min())
    if steep < max(2.5 * quantum, 1e-6 * span) or total < 4:
        return
    if total > 0.4 * len(values):
        remarks.append(
            f"Column {signal.name!r} rests at its {'largest' if high else 'least'} value for {100 * total / len(values):.0f} % of the time: taken as data."
        )
        return
    for start, size in zip(starts, sizes, strict=True):
        bad[start : start + size] = True
    where = listed([f"{signal.time[start]:.6g} s" for start in starts[:6]], 4)
    remarks.append(
        f"Column {signal.name!r} is clipped at its {'largest' if high else 'least'} value in {len(starts)} stretch{'es' if len(starts) > 1 else ''} "
        f"({total} samples, at {where}{' …' if len(starts) > 6 else ''}): left out by weight 0."
    )


def _stuck(signal: Signal, begins: NDArray[np.intp], lengths: NDArray[np.intp], bad: NDArray[np.bool_], remarks: list[str]) -> None:
    """Runs of one value far longer than the others: the sensor or the export stood still."""
    values = signal.values
    if not len(lengths):
        return
    longest = int(lengths.max())
    others = lengths[lengths < 0.5 * longest]
    many = int((lengths >= 0.5 * longest).sum())
    usual = float(np.percentile(others, 99)) if len(others) else 2.0
    if longest < 10 or longest < 4 * usual or many >= 3:
        if many >= 10 and longest == int(np.median(lengths)) and lengths.sum() > 0.8 * len(values):
            remarks.append(f"Column {signal.name!r} changes only every {longest}th row: its samples are held between slower readings.")
        return
    for start, size in zip(begins[lengths >= 0.5 * longest], lengths[lengths >= 0.5 * longest], strict=True):
        if bad[start]:
            continue
        bad[start : start + size] = True
        begin, end = signal.time[start], signal.time[start + size - 1]
        remarks.append(f"Column {signal.name!r} stands still for {size} samples ({begin:.6g} to {end:.6g} s): left out by weight 0.")


def _spikes(signal: Signal, bad: NDArray[np.bool_], remarks: list[str]) -> None:
    """Single samples far off both neighbours, while everything else is smooth in comparison."""
    values = signal.values
    steps = np.diff(values)
    size = np.abs(steps)
    usual = float(np.percentile(size if len(size) < 2_000_000 else size[:: len(size) // 1_000_000], 98))
    span = float(
        np.percentile(values if len(values) < 2_000_000 else values[:: len(values) // 1_000_000], 99) - np.percentile(values[:2_000_000], 1)
    )
    least = max(6 * usual, 0.3 * abs(span))
    if not least > 0:
        return
    back, ahead = steps[:-1], steps[1:]
    found = (
        np.flatnonzero(
            (np.sign(back) == -np.sign(ahead))
            & (np.minimum(np.abs(back), np.abs(ahead)) > least)
            & (np.abs(back + ahead) < 0.5 * np.minimum(np.abs(back), np.abs(ahead)))
        )
        + 1
    )
    found = found[~bad[found]]
    if not len(found) or _belong(found, values, len(values)):
        return
    bad[found] = True
    where = listed([f"{signal.time[place]:.6g} s" for place in found[:6]], 5)
    remarks.append(
        f"Column {signal.name!r} has {len(found)} single-sample spike{'s' if len(found) > 1 else ''} (at {where}{' …' if len(found) > 6 else ''}): left out by weight 0."
    )


def _belong(found: NDArray[np.intp], values: NDArray[np.float64], count: int) -> bool:
    """Spikes that come often or regularly are the signal itself: pulses of a trigger."""
    if len(found) > max(5, 0.02 * count):
        return True
    if len(found) < 3:
        return False
    gaps: Sequence[int] = np.diff(found)  # type: ignore[assignment]
    regular = float(np.std(gaps)) < 0.15 * float(np.mean(gaps))
    heights = values[found]
    return regular or (len(found) >= 4 and float(np.ptp(heights)) <= 0.02 * float(np.abs(heights).max()))
