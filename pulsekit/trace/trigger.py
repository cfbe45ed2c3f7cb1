"""Onsets from a trigger or tacho channel: where it rises, between samples."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from ..errors import SignalError
from .signal import Signal

__all__ = ["trigger_onsets"]


def trigger_onsets(signal: Signal, *, pulses_per_cycle: int = 1) -> NDArray[np.float64]:
    """Instants at which a trigger rises through the middle of its levels. [s]

    It must fall below a third of the way up before it counts again, so that noise on an edge is one pulse.

    Parameters
    ----------
    signal : Signal
        Pulses of any height and unit.
    pulses_per_cycle : int
        Only every so many pulses start a cycle; the first one does.

    Raises
    ------
    SignalError
        If it has no two levels, or rises fewer than twice.

    Examples
    --------
    >>> time = np.arange(400) * 0.01
    >>> pulses = Signal(time, (time % 1.0 < 0.1).astype(float), name="trigger")
    >>> trigger_onsets(pulses).round(3).tolist()
    [0.995, 1.995, 2.995]
    """
    values = signal.values
    low, high = (float(v) for v in (values.min(), values.max()))
    if not high > low:
        raise SignalError(f"trigger column {signal.name!r} never changes; name another column or give period", column=signal.name)
    middle, lower = low + 0.5 * (high - low), low + (high - low) / 3
    above = values >= middle
    # State after each sample: 1 above the middle, 0 below the lower level, else as before.
    level = np.where(above, 1, np.where(values < lower, 0, -1))
    known = np.maximum.accumulate(np.where(level >= 0, np.arange(level.size), 0))
    state = level[known]
    rises = np.flatnonzero((state[1:] == 1) & (state[:-1] != 1)) + 1
    rises = rises[values[rises - 1] < middle]
    if rises.size < 2:
        raise SignalError(f"trigger column {signal.name!r} rises {rises.size} times; at least two onsets are needed", column=signal.name)
    before, after = values[rises - 1], values[rises]
    part = (middle - before) / (after - before)
    onsets = signal.time[rises - 1] + part * (signal.time[rises] - signal.time[rises - 1])
    return np.asarray(onsets[:: max(int(pulses_per_cycle), 1)])
