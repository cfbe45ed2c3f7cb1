"""One measured quantity over time, in SI, with what is known of its faults."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import InputError, SignalError, UnitError
from ..quantities import DIMENSIONS, convert, parse_unit, unit_dimension
from .clock import Clock

__all__ = ["Signal"]

_SAME: Any = object()


def _frozen(values: ArrayLike) -> NDArray[np.float64]:
    made = np.asarray(values, float)
    if made.flags.writeable:
        made = made.view()
        made.flags.writeable = False
    return made


class Signal:
    """A measured quantity over time.

    Parameters
    ----------
    time : array_like, shape (n,), or Clock
        Instants, increasing. [s]
    values : array_like, shape (n,)
        Finite. [SI; as written where the unit is not known]
    unit : str
        As in the file; "" if not known.
    name : str
        Of the column.
    weights : array_like, shape (n,), optional
        1 for a good sample, 0 for one to be left out. None: all are good, unless ``look`` finds faults.
    look : callable, optional
        Called once with the signal when ``weights`` is first read; returns (weights or None, remarks).
    remarks : sequence of str
        Everything guessed, repaired or dropped so far.

    Raises
    ------
    SignalError
        If lengths differ, a number is not finite, or time does not increase.

    Examples
    --------
    >>> signal = Signal([0.0, 0.1, 0.2], [1e-6, 2e-6, 1e-6], unit="mL/s", name="flow")
    >>> signal.dimension, signal.sample_interval
    ('flow_rate', 0.1)
    """

    def __init__(
        self,
        time: ArrayLike | Clock,
        values: ArrayLike,
        *,
        unit: str = "",
        name: str = "",
        dimension: str | None = _SAME,
        weights: ArrayLike | None = None,
        look: Callable[[Signal], tuple[NDArray[np.float64] | None, tuple[str, ...]]] | None = None,
        remarks: Sequence[str] = (),
    ) -> None:
        self._values = _frozen(values)
        self._clock = time if isinstance(time, Clock) else _clock_of(time, name)
        self._unit = unit
        self._name = name
        self._dimension = (unit_dimension(unit) if unit else None) if dimension is _SAME else dimension
        self._given_weights = None if weights is None else _frozen(weights)
        self._look = look
        self._remarks = tuple(remarks)
        self._check()

    def _check(self) -> None:
        n = len(self._clock)
        if self._values.shape != (n,):
            raise SignalError(f"signal {self._name!r}: {self._values.shape} values for {n} instants", column=self._name)
        if self._given_weights is not None and self._given_weights.shape != (n,):
            raise SignalError(f"signal {self._name!r}: {self._given_weights.shape} weights for {n} instants", column=self._name)
        with np.errstate(over="ignore", invalid="ignore"):
            total = float(np.add.reduce(self._values)) if n else 0.0
        if not np.isfinite(total) and not np.isfinite(self._values).all():
            row = int(np.flatnonzero(~np.isfinite(self._values))[0])
            raise SignalError(
                f"signal {self._name!r}: value {row} is {self._values[row]}; leave it out or give it weight 0 and a number",
                column=self._name,
            )

    @property
    def time(self) -> NDArray[np.float64]:
        """Instants, shape (n,), increasing. [s]"""
        return self._clock.instants

    @property
    def values(self) -> NDArray[np.float64]:
        """Values, shape (n,). [SI; as written where the unit is not known]"""
        return self._values

    @property
    def unit(self) -> str:
        """Unit as in the file, "" if not known."""
        return self._unit

    @property
    def name(self) -> str:
        """Name of the column."""
        return self._name

    @property
    def dimension(self) -> str | None:
        """Key of ``quantities.DIMENSIONS``, or None if the unit is not known or is none of ours."""
        return self._dimension

    @property
    def clock(self) -> Clock:
        """The time axis: its start, interval, gaps and restarts."""
        return self._clock

    @property
    def sample_interval(self) -> float | None:
        """Distance of two samples if they are uniform, else None. [s]"""
        return self._clock.interval

    @property
    def segments(self) -> tuple[tuple[int, int], ...]:
        """Stretches first:stop between restarts of the logger; one stretch if it never restarted."""
        return self._clock.segments or ((0, len(self)),)

    @property
    def gaps(self) -> tuple[tuple[float, float], ...]:
        """Stretches without samples, each (last instant before, first instant after). [s]"""
        return self._clock.gaps

    @cached_property
    def _found(self) -> tuple[NDArray[np.float64] | None, tuple[str, ...]]:
        if self._given_weights is not None or self._look is None:
            return self._given_weights, ()
        weights, remarks = self._look(self)
        return None if weights is None else _frozen(weights), tuple(remarks)

    @property
    def weights(self) -> NDArray[np.float64] | None:
        """1 for a good sample, 0 for one left out, shape (n,); None if all are good."""
        return self._found[0]

    @property
    def remarks(self) -> tuple[str, ...]:
        """Everything guessed, repaired or dropped, in order."""
        return self._remarks + self._found[1]

    def replace(self, **changes: Any) -> Signal:
        """Return a copy with some of time, values, unit, name, dimension, weights, look, remarks changed.

        Faults are looked for again only if ``look`` is given; found weights are carried along where the number of samples stays.
        """
        known = {"time", "values", "unit", "name", "dimension", "weights", "look", "remarks"}
        if unknown := set(changes) - known:
            raise InputError(f"a signal has no {', '.join(sorted(unknown))}; it has {', '.join(sorted(known))}", name="replace")
        fields: dict[str, Any] = {
            "time": self._clock,
            "values": self._values,
            "unit": self._unit,
            "name": self._name,
            "remarks": self.remarks,
        }
        if "unit" not in changes:
            fields["dimension"] = self._dimension
        fields["weights"] = self.weights if "weights" not in changes and len(changes.get("values", self._values)) == len(self) else None
        return Signal(**(fields | changes))

    def with_unit(self, unit: str) -> Signal:
        """Return the signal with its written numbers read in ``unit``.

        Only for a column without a unit; one that has a unit is refused unless it is the same.

        >>> Signal([0.0, 1.0], [60.0, 120.0]).with_unit("mL/min").values.tolist()
        [1e-06, 2e-06]
        """
        if self._unit:
            if parse_unit(self._unit) == parse_unit(unit):
                return self
            raise UnitError(
                f"column {self._name!r} is in {self._unit!r} already; to overrule the file pass units={{{self._name!r}: {unit!r}}} to read_recording",
                name=self._name, value=unit,
            )  # fmt: skip
        dimension = unit_dimension(unit)
        if dimension is None:
            raise UnitError(
                f"unit {unit!r} has no dimension that is used here; give one such as 'mL/min', 'cm/s', 'mmHg'", name=self._name, value=unit
            )
        values = convert(self._values, parse_unit(unit)[0], DIMENSIONS[dimension])
        return self.replace(values=values, unit=unit, dimension=dimension)

    def between(self, begin: float, end: float) -> Signal:
        """Return the samples with begin <= time <= end. [s]"""
        return self.kept((self.time >= begin) & (self.time <= end))

    def kept(self, keep: NDArray[np.bool_]) -> Signal:
        """Return the samples where ``keep`` holds, shape (n,)."""
        keep = np.asarray(keep, bool)
        weights = None if self.weights is None else self.weights[keep]
        return Signal(
            self._clock.taken(keep),
            self._values[keep],
            unit=self._unit,
            name=self._name,
            dimension=self._dimension,
            weights=weights,
            remarks=self.remarks,
        )

    def __len__(self) -> int:
        return len(self._values)

    def __reduce__(self) -> tuple[Any, ...]:
        fields = {"unit": self._unit, "name": self._name, "dimension": self._dimension, "weights": self.weights, "remarks": self.remarks}
        return _make_signal, (self._clock, np.array(self._values), fields)

    def __repr__(self) -> str:
        rate = f"every {self.sample_interval:.6g} s" if self.sample_interval else "unevenly spaced"
        return f"<Signal {self._name!r} [{self._unit or 'no unit'}]: {len(self)} samples, {rate}>"


def _make_signal(clock: Clock, values: NDArray[np.float64], fields: dict[str, Any]) -> Signal:
    return Signal(clock, values, **fields)


def _clock_of(time: ArrayLike, name: str) -> Clock:
    """Make a clock of instants that increase; uniform to a millionth of the interval counts as uniform."""
    stamps = np.asarray(time, float)
    if stamps.ndim != 1 or not np.isfinite(stamps).all():
        raise SignalError(f"signal {name!r}: time must be one row of finite instants", column=name)
    if len(stamps) > 1:
        steps = np.diff(stamps)
        if steps.min() <= 0:
            row = int(np.argmin(steps > 0)) + 1
            raise SignalError(
                f"signal {name!r}: time does not increase at sample {row} ({stamps[row]:.9g} s); sort it or leave samples out", column=name
            )
        interval = float(stamps[-1] - stamps[0]) / (len(stamps) - 1)
        off = np.abs(stamps - (stamps[0] + interval * np.arange(len(stamps)))).max()
        if off <= 1e-6 * interval + 4 * np.spacing(np.abs(stamps).max()):
            return Clock(start=float(stamps[0]), interval=_rounded(interval), count=len(stamps))
    return Clock(stamps=_frozen(stamps))


def _rounded(interval: float) -> float:
    """Take the short decimal number if it is the interval to rounding error (0.1, not 0.09999999999999999)."""
    short = float(f"{interval:.12g}")
    return short if abs(short - interval) <= 1e-14 * interval else interval
