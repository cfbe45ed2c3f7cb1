"""From time stamps as written to a clock: rounded, repeated, backward and missing stamps, gaps and restarts."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from ..clock import Clock
from .told import Notes, listed

__all__ = ["Settled", "StampStore", "nice_interval", "settle", "shown_time"]

_SMALL = 1e-3  # deviations below this share of the interval are no matter
_MOST_REPAIRS = 0.05


@dataclass
class Settled:
    """A clock, and which rows in which order it belongs to (None: all, as they are)."""

    clock: Clock
    rows: NDArray[np.intp] | None = None


def shown_time(value: float) -> str:
    """Write a time with a fitting unit.

    >>> shown_time(5e-5), shown_time(0.25), shown_time(12.0)
    ('0.05 ms', '250 ms', '12 s')
    """
    if value == 0:
        return "0 s"
    if abs(value) < 1e-5:
        return f"{value * 1e6:.6g} µs"
    return f"{value * 1e3:.6g} ms" if abs(value) < 1 else f"{value:.6g} s"


def nice_interval(interval: float, spread: float) -> float:
    """Take the shortest decimal interval or rate within interval ± spread.

    >>> nice_interval(4.99975e-5, 1e-8), nice_interval(0.0033334, 1e-6)
    (5e-05, 0.0033333333333333335)
    """
    for digits in range(1, 13):
        short = float(f"{interval:.{digits - 1}e}")
        if abs(short - interval) <= spread:
            return short
        rate = float(f"{1 / interval:.{digits - 1}e}")
        if digits <= 6 and abs(1 / rate - interval) <= spread:
            return 1 / rate
    return interval


def settle(
    stamps: NDArray[np.float64],
    *,
    resolution: float,
    notes: Notes,
    name: str,
    line_of: Callable[[int], int],
    kind: str = "number",
    restarts: tuple[int, ...] = (),
    origin: str = "",
) -> Settled:
    """Make a clock of stamps in seconds; every repair is remarked.

    ``resolution`` is one unit of the last written digit [s]; ``kind`` is "number", "clock" (time of day)
    or "date" (date-time without a zone) or "zoned"; ``restarts`` are rows at which a header stands again.
    """
    work = _Work(np.asarray(stamps, float), resolution, notes, name, line_of, origin)
    if work.quick():
        return Settled(work.clock())
    work.drop_missing()
    if kind in ("clock", "date"):
        work.mend_wraps(kind)
    if not restarts and work.quick():
        return Settled(work.clock(), work.rows)
    work.mend_order()
    work.part(restarts)
    work.mend_singles()
    work.drop_repeats()
    work.to_grid()
    return Settled(work.clock(), work.rows)


@dataclass
class _Work:
    stamps: NDArray[np.float64]
    resolution: float
    notes: Notes
    name: str
    line_of: Callable[[int], int]
    origin: str
    rows: NDArray[np.intp] | None = None
    segments: list[tuple[int, int]] = field(default_factory=list)
    gaps: list[tuple[float, float]] = field(default_factory=list)
    interval: float | None = None
    typical: float | None = None

    def _line(self, place: int) -> int:
        return self.line_of(int(self.rows[place]) if self.rows is not None else place)

    def _keep(self, keep: NDArray[np.bool_]) -> None:
        rows = np.arange(len(self.stamps)) if self.rows is None else self.rows
        self.rows = rows[keep]
        self.stamps = self.stamps[keep]

    def clock(self) -> Clock:
        """Return the clock as settled so far."""
        bounds = tuple(self.segments) if len(self.segments) > 1 else ()
        if self.interval is not None:
            return Clock(start=float(self.stamps[0]), interval=self.interval, count=len(self.stamps), name=self.name, origin=self.origin)
        return Clock(stamps=self.stamps, name=self.name, origin=self.origin, gaps=tuple(self.gaps), segments=bounds, typical=self.typical)

    def quick(self) -> bool:
        """Settle stamps that lie on a line to their own resolution."""
        stamps = self.stamps
        if len(stamps) < 2:
            raise self.notes.refuse(
                f"there {'is one row' if len(stamps) else 'are no rows'} with a time: a recording needs at least two", column=self.name
            )
        if not np.isfinite(stamps[0]) or not np.isfinite(stamps[-1]) or not stamps[-1] > stamps[0]:
            return False
        found = _line(stamps, self.resolution)
        if found is None:
            return False
        self.interval, how = found
        if how == "rounded":
            self.notes.add(
                f"Time stamps are written to {shown_time(self.resolution)} only: taken as a rounded clock and rebuilt from count and span, "
                f"one sample every {shown_time(self.interval)}."
            )
        elif how == "single":
            self.notes.add(
                f"Time stamps jitter as single-precision numbers do: rebuilt from count and span, one sample every {shown_time(self.interval)}."
            )
        return True

    def drop_missing(self) -> None:
        """Rows without a stamp: filled from the count where that is certain, else left out."""
        absent = ~np.isfinite(self.stamps)
        if not absent.any():
            return
        if absent.all():
            raise self.notes.refuse("no cell of the time column could be read", column=self.name)
        known = np.flatnonzero(~absent)
        filled = np.interp(np.arange(len(self.stamps)), known, self.stamps[known])
        lines = [self.line_of(int(row)) for row in np.flatnonzero(absent)[:6]]
        count = int(absent.sum())
        inside = known[0] == 0 and known[-1] == len(self.stamps) - 1
        if inside and count <= _MOST_REPAIRS * len(self.stamps) + 3 and _line(filled, self.resolution) is not None:
            self.stamps = filled
            self.notes.add(
                f"{count} missing time stamp{'s' if count > 1 else ''} (line {listed(lines)}) rebuilt from their neighbours: the clock is uniform."
            )
        else:
            self._keep(~absent)
            self.notes.add(f"{count} row{'s' if count > 1 else ''} without a time stamp left out (line {listed(lines)}).")

    def mend_wraps(self, kind: str) -> None:
        """Midnight in times of day; a change of clock (summer time) by one hour."""
        steps = np.diff(self.stamps)
        usual = float(np.median(steps[steps > 0])) if (steps > 0).any() else 0.0
        shift = np.zeros(len(steps))
        if kind == "clock":
            for place in np.flatnonzero(steps < -43_200):
                shift[place:] += 86_400
                self.notes.add(f"The clock passes midnight at line {self._line(int(place) + 1)}: one day added from there.")
            steps = np.diff(self.stamps) + np.diff(shift, prepend=0)
        slack = 2 * usual + 2 * self.resolution
        for place in np.flatnonzero(np.abs(np.abs(steps - usual) - 3600) <= slack):
            forward = steps[place] > 0
            if usual >= 600 or (forward and not self._hour_turns(int(place))):
                continue
            shift[place:] += -3600 if forward else 3600
            self.notes.add(
                f"The clock was {'put forward' if forward else 'put back'} by one hour at line {self._line(int(place) + 1)} (change to or from summer time): undone."
            )
        if shift.any():
            self.stamps = self.stamps + np.concatenate([[0.0], shift])

    def _hour_turns(self, place: int) -> bool:
        """A forward jump of an hour counts as a change of clock only at the full hour; otherwise it is a gap."""
        return self._of_day(place) % 3600 > 3600 - 5 and self._of_day(place + 1) % 3600 < 5

    def _of_day(self, place: int) -> float:
        base = 0.0
        if ":" in self.origin:
            parts = self.origin.replace("T", " ").split()[-1].split(":")
            base = 3600 * float(parts[0][-2:]) + 60 * float(parts[1]) + float(parts[2][:2] if len(parts) > 2 else 0)
        return base + float(self.stamps[place])

    def mend_order(self) -> None:
        """Rows out of order: sorted if that makes the clock uniform."""
        back = np.flatnonzero(np.diff(self.stamps) < 0)
        if len(back) < 1 or len(back) > 0.5 * len(self.stamps):
            return
        order = np.argsort(self.stamps, kind="stable")
        ordered = self.stamps[order]
        if np.diff(ordered).min() > 0 and _line(ordered, self.resolution) is not None:
            rows = np.arange(len(self.stamps)) if self.rows is None else self.rows
            line = self._line(int(back[0]) + 1)
            self.rows, self.stamps = rows[order], ordered
            self.notes.add(f"Rows are not in the order of time (first at line {line}): they were sorted.")

    def part(self, restarts: tuple[int, ...]) -> None:
        """Stretches between restarts are kept apart: time that falls back goes on after the end of the stretch before."""
        rows = np.arange(len(self.stamps)) if self.rows is None else self.rows
        steps = np.diff(self.stamps)
        usual = float(np.median(steps[steps > 0])) if (steps > 0).any() else self.resolution
        told = {int(np.searchsorted(rows, row)) for row in restarts}
        falls = {int(place) + 1 for place in np.flatnonzero(steps < 0) if self._restarts_at(int(place) + 1, usual)}
        places = sorted(place for place in told | falls if 0 < place < len(self.stamps))
        if len(places) > 50:
            raise self.notes.refuse(
                "time falls back more than 50 times: this is no one recording; check the time column, or name another with time=",
                line=self._line(places[0]),
                column=self.name,
            )
        bounds = [0, *places, len(self.stamps)]
        self.segments = list(pairwise(bounds))
        moved = self.stamps.copy() if places else self.stamps
        for place in places:
            before, after = float(moved[place - 1]), float(self.stamps[place])
            line = self._line(place)
            if after <= before:
                moved[place:] = self.stamps[place:] - after + before + usual
                self.notes.add(
                    f"The logger started again at line {line} (time falls back from {before:.6g} s to {after:.6g} s): the stretches are kept apart; "
                    f"times from there on were set to follow at {before + usual:.6g} s, how long it stood still is not known."
                )
            else:
                self.notes.add(f"The header stands again at line {line}: the logger was started again; the stretches are kept apart.")
        self.stamps = moved

    def _restarts_at(self, place: int, usual: float) -> bool:
        """Time falls back and goes on from there: not one stray stamp, not a stamp that is repeated."""
        stamps = self.stamps
        after = stamps[place : place + 4]
        if len(after) < 3 or stamps[place - 1] - stamps[place] < 2 * usual:
            return False
        return bool(np.all(np.diff(after) > 0) and after[-1] < stamps[place - 1])

    def mend_singles(self) -> None:
        """Stray, repeated or backward stamps between others that fit: rebuilt from the count."""
        for begin, end in self.segments:
            stamps = self.stamps[begin:end]
            steps = np.diff(stamps)
            if len(steps) < 6 or not (steps <= 0).any():
                continue
            usual = float(np.median(steps))
            if usual <= 0:
                continue
            slack = min(max(self.resolution, 0.02 * usual), 0.12 * usual)
            self._mend_stretch(begin, end, usual, slack)

    def _mend_stretch(self, begin: int, end: int, usual: float, slack: float) -> None:
        stamps = self.stamps[begin:end].copy()
        mended: list[int] = []
        for place in np.flatnonzero(np.diff(stamps) <= 0).tolist():
            for first, last in ((place + 1, place + 2), (place, place + 1), (place + 1, place + 3), (place, place + 2)):
                # stamps[first:last] are doubted; their neighbours tell whether the count fits
                if first < 1 or last >= len(stamps):
                    continue
                span = stamps[last] - stamps[first - 1]
                count = last - first + 1
                if abs(span - count * usual) <= slack * 2 and np.all(np.diff(stamps[max(first - 3, 0) : first]) > 0):
                    stamps[first:last] = stamps[first - 1] + span / count * np.arange(1, count)
                    mended += range(begin + first, begin + last)
                    break
        if mended and len(mended) <= max(3, _MOST_REPAIRS * (end - begin)):
            lines = [self._line(place) for place in mended]
            self.stamps = self.stamps.copy()
            self.stamps[begin:end] = stamps
            self.notes.add(
                f"{len(mended)} time stamp{'s' if len(mended) > 1 else ''} repeated or running backward (line {listed(lines)}) rebuilt from the count of rows."
            )

    def drop_repeats(self) -> None:
        """Rows whose stamp does not go on: left out if they are few."""
        keep = np.ones(len(self.stamps), bool)
        steps = np.diff(self.stamps)
        if (steps > 0).all():
            return
        high = np.maximum.accumulate(self.stamps)
        keep[1:] = self.stamps[1:] > high[:-1]
        # Of two rows with the same stamp neither is sure: both go, unless they stand in a restart.
        same = np.flatnonzero(steps == 0)
        keep[same] = False
        keep[same + 1] = False
        lost = np.flatnonzero(~keep)
        lines = [self._line(int(place)) for place in lost[:6]]
        if len(lost) > max(4, _MOST_REPAIRS * len(keep)):
            raise self.notes.refuse(
                f"{len(lost)} of {len(keep)} time stamps are repeated or run backward without a pattern; check the time column, or leave it out and pass sample_rate=",
                line=lines[0], column=self.name,
            )  # fmt: skip
        self.segments = [(int(keep[:a].sum()), int(keep[:b].sum())) for a, b in self.segments]
        self._keep(keep)
        self.notes.add(
            f"{len(lost)} row{'s' if len(lost) > 1 else ''} with repeated or backward time stamps left out (line {listed(lines)})."
        )

    def to_grid(self) -> None:
        """Find gaps; put stamps on a grid where all lie on one to their resolution; else leave them as they are."""
        if len(self.segments) <= 1 and self.quick():
            return
        steps = np.diff(self.stamps)
        borders = {a for a, _ in self.segments[1:]}
        usual = float(np.median(steps))
        self.typical = usual
        wide = [int(place) for place in np.flatnonzero(steps > 1.6 * usual + 2 * self.resolution) if int(place) + 1 not in borders]
        runs = np.split(np.arange(len(self.stamps)), sorted([place + 1 for place in wide] + sorted(borders)))
        lines = [found for run in runs if len(run) > 3 and (found := _line(self.stamps[run], self.resolution))]
        uniform = bool(lines) and all(len(run) <= 3 or _line(self.stamps[run], self.resolution) for run in runs) and len(lines) <= 2000
        if uniform:
            self._regular_runs(runs, lines)
        else:
            scatter = float(np.percentile(np.abs(steps - usual), 95)) / usual
            self.notes.add(
                f"Samples are unevenly spaced: the middle interval is {shown_time(usual)}, 95 % lie within {100 * scatter:.2g} % of it; stamps taken as written."
            )
        irregular = not uniform and len(wide) > 0.02 * len(steps)
        if wide and not irregular:
            self.gaps = [(float(self.stamps[place]), float(self.stamps[place + 1])) for place in wide]
            total = sum(b - a - usual for a, b in self.gaps)
            shown = listed(
                [f"{a:.6g} to {b:.6g} s (line {self._line(place + 1)})" for (a, b), place in zip(self.gaps[:5], wide, strict=False)]
            )
            self.notes.add(
                f"{len(wide)} gap{'s' if len(wide) > 1 else ''} in time, {shown_time(total)} in all: {shown}{' …' if len(wide) > 5 else ''}; nothing was filled in."
            )

    def _regular_runs(self, runs: list[NDArray[np.intp]], lines: list[tuple[float, str]]) -> None:
        """Each stretch between gaps is uniform: rounded stamps in it are rebuilt."""
        longest = max(runs, key=len)
        found = _line(self.stamps[longest], self.resolution)
        if found is None:
            return
        interval, how = found
        self.typical = interval
        if how == "even":
            return
        stamps = self.stamps.copy()
        for run in runs:
            middle = float(np.mean(stamps[run]))
            stamps[run] = middle + interval * (np.arange(len(run)) - (len(run) - 1) / 2)
        if np.diff(stamps).min() > 0:
            self.stamps = stamps
            self.notes.add(
                f"Time stamps are written to {shown_time(self.resolution)} only: between gaps and restarts they were rebuilt from the count, one sample every {shown_time(interval)}."
            )


class StampStore:
    """Collects stamps; beyond a few million evenly spaced ones it keeps only the ends of each piece."""

    def __init__(self, resolution: float) -> None:
        self.resolution = resolution
        self._raw: list[NDArray[np.float64]] = []
        self._ends: list[tuple[int, float, float]] = []  # count, first, last of pieces that lie on a line
        self._compact = True
        self._count = 0

    def add(self, stamps: NDArray[np.float64]) -> None:
        """Append stamps in seconds."""
        self._count += len(stamps)
        if self._compact and self._count > 3_000_000:
            self._compact = all(self._shorten(piece) for piece in self._raw) and self._shorten(stamps)
            if self._compact:
                self._raw.clear()
                return
            self._ends.clear() if self._raw else None
        self._raw.append(np.array(stamps, float))

    def _shorten(self, stamps: NDArray[np.float64]) -> bool:
        if len(stamps) >= 1000 and np.isfinite(stamps).all() and stamps[-1] > stamps[0] and _line(stamps, self.resolution):
            self._ends.append((len(stamps), float(stamps[0]), float(stamps[-1])))
            return True
        return False

    def even(self) -> tuple[float, float, int] | None:
        """Start, interval and count if everything lies on one line; only for a long recording."""
        if self._raw or not self._ends:
            return None
        ends = np.array([(first, last) for _, first, last in self._ends])
        counts = np.array([count for count, _, _ in self._ends])
        rows = np.concatenate([[0], np.cumsum(counts)[:-1]])
        start = float(ends[0, 0])
        interval = float(ends[-1, 1] - start) / (self._count - 1)
        slack = 2.02 * max(self.resolution, float(np.spacing(np.float32(ends[-1, 1])))) + _SMALL * interval
        off = max(np.abs(ends[:, 0] - start - interval * rows).max(), np.abs(ends[:, 1] - start - interval * (rows + counts - 1)).max())
        return (start, nice_interval(interval, max(self.resolution / self._count, 1e-15)), self._count) if off <= slack else None

    def stamps(self) -> NDArray[np.float64]:
        """All stamps; pieces that lie on a line are rebuilt from their ends."""
        parts = [np.linspace(first, last, count) for count, first, last in self._ends]
        return np.concatenate([*parts, *self._raw]) if parts or self._raw else np.empty(0)


def _line(stamps: NDArray[np.float64], resolution: float) -> tuple[float, str] | None:
    """Interval of stamps that lie on a line to rounding, and how: even, rounded or single; else None."""
    count = len(stamps)
    span = float(stamps[-1] - stamps[0])
    if count < 2 or not span > 0:
        return None
    rough = span / (count - 1)
    worst = 0.0
    for begin in range(0, count, 1_000_000):  # in parts: a long recording is not copied
        part = stamps[begin : begin + 1_000_000]
        off = np.abs(part - (stamps[0] + rough * np.arange(begin, begin + len(part))))
        worst = max(worst, float(np.nanmax(off)) if not np.isnan(off).any() else np.inf)
        if worst > 2.5 * max(resolution, float(np.spacing(np.float32(np.abs(part[-1]))))):
            break
    largest = float(max(abs(stamps[0]), abs(stamps[-1])))
    exact = 4 * float(np.spacing(largest))
    single = float(np.spacing(np.float32(largest)))
    if worst <= _SMALL * rough + exact:
        spread = min(max(resolution / max(count - 1, 1), exact), _SMALL * rough)
        return nice_interval(rough, spread), "even"
    if count < 4:
        return None
    if worst <= 1.01 * resolution + exact and resolution <= 0.02 * span and _patterned(stamps, rough, resolution, exact):
        return _from_turns(stamps, rough, resolution), "rounded"
    if worst <= 1.01 * single and single <= 0.02 * span and single > _SMALL * rough:
        return nice_interval(rough, single / (count - 1)), "single"
    return None


def _patterned(stamps: NDArray[np.float64], rough: float, resolution: float, exact: float) -> bool:
    """Tell a rounded clock from repeated or missing stamps.

    Rounding steps by the two multiples of the resolution on either side of the interval, and the rarer of
    the two comes at distances that differ by one at most. With fewer than three of them nothing is certain:
    one repeated stamp in sixty would pass for an interval that is 1.7 % shorter.
    """
    below = np.floor(rough / resolution + 1e-3) * resolution
    above = np.ceil(rough / resolution - 1e-3) * resolution
    slack = 1e-3 * resolution + 4 * exact
    steps = np.diff(stamps)
    if float(steps.min()) < below - slack or float(steps.max()) > above + slack:
        return False
    if above - below < 0.5 * resolution:
        return True
    low = steps < 0.5 * (below + above)
    rare = np.flatnonzero(low if 2 * int(low.sum()) <= len(low) else ~low)
    if not len(rare):
        return True
    if len(rare) < 3:
        return False
    apart = np.diff(rare)
    return int(apart.max() - apart.min()) <= max(1, int(0.02 * apart.mean()))


def _from_turns(stamps: NDArray[np.float64], rough: float, resolution: float) -> float:
    """Interval of a rounded clock; where stamps repeat, from the rows at which they turn."""
    turns = np.flatnonzero(np.diff(stamps) > 0)
    if rough < 0.7 * resolution and len(turns) >= 3:
        first, last = int(turns[0]), int(turns[-1])
        sharper = float(stamps[last + 1] - stamps[first + 1]) / (last - first)
        return nice_interval(sharper, sharper / (last - first))
    return nice_interval(rough, resolution / (len(stamps) - 1))
