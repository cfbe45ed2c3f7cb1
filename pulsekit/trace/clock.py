"""The time axis of a recording: kept as start and interval where it is uniform, as an array where it is not."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["Clock"]


@dataclass(frozen=True, eq=False, kw_only=True)
class Clock:
    """Instants of the samples. [s]

    Either ``stamps`` holds every instant, or ``start``, ``interval`` and ``count`` do: a long recording
    then needs no memory for its time axis.
    """

    start: float = 0.0
    interval: float | None = None
    count: int = 0
    stamps: NDArray[np.float64] | None = None
    name: str = ""
    origin: str = ""  # date and time of instant 0, where the file gives it
    gaps: tuple[tuple[float, float], ...] = ()  # (last instant before, first instant after)
    segments: tuple[tuple[int, int], ...] = ()  # rows first:stop between restarts, empty if never restarted
    typical: float | None = None  # usual distance of two stamps, where they are not uniform

    @cached_property
    def instants(self) -> NDArray[np.float64]:
        """All instants, shape (count,). [s]"""
        made: Any = self.stamps if self.stamps is not None else self.start + (self.interval or 0.0) * np.arange(self.count)
        made = np.asarray(made, dtype=np.float64)
        made.flags.writeable = False
        return made

    def __len__(self) -> int:
        return len(self.stamps) if self.stamps is not None else self.count

    @property
    def first(self) -> float:
        """The first instant. [s]"""
        return float(self.stamps[0]) if self.stamps is not None and len(self.stamps) else self.start

    @property
    def last(self) -> float:
        """The last instant. [s]"""
        if self.stamps is not None:
            return float(self.stamps[-1]) if len(self.stamps) else self.start
        return self.start + (self.interval or 0.0) * max(self.count - 1, 0)

    def taken(self, keep: NDArray[np.bool_]) -> Clock:
        """Return the clock of the rows where ``keep`` holds; uniform where these are evenly spaced."""
        rows = np.flatnonzero(keep)
        bounds = tuple((int(np.searchsorted(rows, a)), int(np.searchsorted(rows, b))) for a, b in self.segments)
        if self.interval is not None and len(rows) > 1:
            steps = np.diff(rows)
            if steps.min() == steps.max():
                start = self.start + self.interval * float(rows[0])
                return Clock(
                    start=start,
                    interval=self.interval * float(steps[0]),
                    count=len(rows),
                    name=self.name,
                    origin=self.origin,
                    segments=bounds,
                )
        typical = self.typical if self.interval is None else self.interval
        return Clock(stamps=self.instants[rows], name=self.name, origin=self.origin, gaps=self.gaps, segments=bounds, typical=typical)
