"""What the mean cycle does not show: recorded extremes, and what is not locked to the cycle."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from .cycles import Cycles
from .fitting import cycle_course
from .harmonics import Harmonics

__all__ = ["Line", "Unlocked", "unlocked_part"]

_CENTRAL = 0.999
_STANDS = 5.0  # times the median level of the spectrum
_SMALL = 2e-2  # of the record's peak to peak: smaller lines are not named
_NEAR = 2.0  # bins on either side of a line that belong to it


@dataclass(frozen=True)
class Line:
    """A spectral line that is no multiple of the cycle: frequency [Hz], amplitude [SI], and its order (not a whole number)."""

    frequency: float
    amplitude: float
    order: float


@dataclass(frozen=True)
class Unlocked:
    """What stands beside the mean cycle.

    Attributes
    ----------
    lowest, highest : float
        Extremes of the record, over the cycles used. [SI]
    low, high : float
        Between which 99.9 % of the samples lie. [SI]
    mean_cycle_low, mean_cycle_high : float
        Extremes of the mean cycle at the samples' phases. [SI]
    share : float
        Of the variance of the record that is not locked to the cycle. [-]
    rms : float
        Of that part. [SI]
    lines : tuple of Line
        The largest lines of that part that stand out of its noise, at most three.
    remarks : tuple of str
    """

    lowest: float
    highest: float
    low: float
    high: float
    mean_cycle_low: float
    mean_cycle_high: float
    share: float
    rms: float
    lines: tuple[Line, ...]
    remarks: tuple[str, ...]

    @property
    def peak_to_peak(self) -> float:
        """Recorded peak to peak, extreme. [SI]"""
        return self.highest - self.lowest

    @property
    def usual_peak_to_peak(self) -> float:
        """Recorded peak to peak that 99.9 % of the samples keep within. [SI]"""
        return self.high - self.low

    @property
    def mean_cycle_peak_to_peak(self) -> float:
        """Peak to peak of the mean cycle. [SI]"""
        return self.mean_cycle_high - self.mean_cycle_low

    @property
    def matters(self) -> bool:
        """The record's usual peak to peak exceeds that of the mean cycle by more than a tenth."""
        return self.usual_peak_to_peak > 1.1 * self.mean_cycle_peak_to_peak


def unlocked_part(cycles: Cycles, harmonics: Harmonics, *, lines: int = 3) -> Unlocked:
    """Compare the record with its mean cycle.

    Parameters
    ----------
    cycles : Cycles
    harmonics : Harmonics
        Of these cycles, as recorded (nothing undone). Harmonics that were not kept count as not locked.
    lines : int
        How many spectral lines to name at most.

    Returns
    -------
    Unlocked

    Examples
    --------
    >>> import numpy as np
    >>> from pulsekit.trace import Signal, decompose, find_cycles
    >>> time = np.arange(2000) * 0.01
    >>> cycles = find_cycles(Signal(time, np.cos(2 * np.pi * time) + 0.5 * np.cos(2 * np.pi * 3.3 * time)), period=1.0)
    >>> part = unlocked_part(cycles, decompose(cycles, count=1))
    >>> round(part.share, 3), round(part.lines[0].frequency, 2), round(part.lines[0].amplitude, 2)
    (0.2, 3.3, 0.5)
    """
    rows, _, phase = cycles.samples
    values, time = cycles.signal.values[rows], cycles.signal.time[rows]
    mean = cycle_course(harmonics.coefficients, phase)
    rest = values - mean
    tail = 50 * (1 - _CENTRAL)
    low, high = (float(v) for v in np.percentile(values, [tail, 100 - tail]))
    variance = float(np.var(values))
    share = float(np.mean(rest**2) / variance) if variance else 0.0
    drift = 0.5 * float(np.ptp(cycles.periods)) / cycles.period
    found = _lines(time, rest, harmonics.frequency, lines, drift, _SMALL * float(np.ptp(values)))
    part = Unlocked(
        lowest=float(values.min()), highest=float(values.max()), low=low, high=high, mean_cycle_low=float(mean.min()), mean_cycle_high=float(mean.max()),
        share=min(share, 1.0), rms=float(np.sqrt(np.mean(rest**2))), lines=found, remarks=(),
    )  # fmt: skip
    return Unlocked(**{**part.__dict__, "remarks": _words(part)})


def _lines(
    time: NDArray[np.float64], rest: NDArray[np.float64], fundamental: float, most: int, drift: float, least: float
) -> tuple[Line, ...]:
    """Largest peaks of the rest's amplitude spectrum that are no order and exceed its median level fivefold."""
    steps = np.diff(time)
    step = float(np.median(steps)) if steps.size else 0.0
    if rest.size < 64 or not step > 0:
        return ()
    grid = np.arange(time[0], time[-1] + 0.5 * step, step)
    even = np.interp(grid, time, rest)
    holes = np.interp(grid, time, np.arange(time.size, dtype=float))
    # Where cycles were left out there are no samples: the rest is zero there, not a straight line.
    place = np.clip(np.floor(holes).astype(int), 0, steps.size - 1)
    even[steps[place] > 2.5 * step] = 0.0
    window = np.hanning(grid.size)
    size = 4 * grid.size
    amplitude = np.abs(np.fft.rfft((even - even.mean()) * window, n=size)) * 2 / window.sum()
    frequency = np.fft.rfftfreq(size, step)
    width = _NEAR / (grid[-1] - grid[0])
    order = frequency / fundamental
    # With drifting cycles an order smears over a band that grows with it: nothing within it is called a line of its own.
    near = np.abs(order - np.round(order)) <= width / fundamental + drift * np.round(order)
    free = ~near & (frequency > width) & (frequency < 0.49 / step)
    floor = max(_STANDS * float(np.median(amplitude[1:])), least)
    out: list[Line] = []
    for _ in range(most):
        open_ = np.where(free, amplitude, 0.0)
        top = int(open_.argmax())
        if open_[top] <= floor or open_[top] == 0:
            break
        out.append(Line(float(frequency[top]), float(amplitude[top]), float(order[top])))
        free = free & (np.abs(frequency - frequency[top]) > 2 * width)
    return tuple(out)


def _words(part: Unlocked) -> tuple[str, ...]:
    said = f"{100 * part.share:.2g} % of the recorded variance is not locked to the cycle and is not in the mean cycle"
    if part.lines:
        said += "; its largest lines are at " + ", ".join(f"{line.frequency:.4g} Hz (order {line.order:.2f})" for line in part.lines)
    words = [said + "."]
    if part.matters:
        more = 100 * (part.usual_peak_to_peak / part.mean_cycle_peak_to_peak - 1) if part.mean_cycle_peak_to_peak else float("inf")
        words.append(
            f"The recorded peak to peak (99.9 % of the samples) exceeds that of the mean cycle by {more:.0f} %: limits are to be held against both."
        )
    return tuple(words)
