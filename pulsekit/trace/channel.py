"""What an instrument did to a signal, undone: calibration and zero in time, filters, frames and delays per harmonic.

The factors are complex gains of the instrument at order n of the fundamental; a harmonic is divided by
them. Arrays of samples broadcast: the harmonic axis is last.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import InputError, UnitError
from ..quantities import DIMENSIONS, parse_unit, registry, unit_dimension
from .signal import Signal

__all__ = [
    "MOST_GAIN",
    "butterworth_response",
    "calibrated",
    "delay_response",
    "frame_response",
    "high_pass_response",
    "second_order_response",
    "usable_orders",
]

#: Greatest gain with which a filter or a frame is undone: beyond, noise would be magnified more than the signal.
MOST_GAIN = 3.0


def butterworth_response(frequency: ArrayLike, corner: ArrayLike, order: int = 2) -> Any:
    """Complex gain of a Butterworth low-pass filter.

    Parameters
    ----------
    frequency : array_like, shape (...)
        [Hz]
    corner : array_like, broadcast against it
        Where the gain is 1/sqrt(2). [Hz]
    order : int
        >= 1.

    Examples
    --------
    >>> round(float(abs(butterworth_response(10.0, 10.0, 4))), 6)
    0.707107
    """
    if order < 1:
        raise InputError(f"low_pass_order = {order} must be at least 1", name="low_pass_order", value=order, allowed=">= 1")
    s = 1j * np.asarray(frequency, float) / np.asarray(corner, float)
    gain = np.ones_like(s)
    for k in range(order):
        pole = np.exp(1j * np.pi * (2 * k + order + 1) / (2 * order))
        gain = gain * (-pole) / (s - pole)
    return gain[()]


def second_order_response(frequency: ArrayLike, natural_frequency: ArrayLike, damping_ratio: ArrayLike) -> Any:
    """Complex gain of a fluid-filled catheter or gauge line: 1/(1 - r^2 + 2 i D r), r = f/f_n.

    Examples
    --------
    >>> round(float(abs(second_order_response(10.0, 10.0, 0.5))), 6)
    1.0
    """
    r = np.asarray(frequency, float) / np.asarray(natural_frequency, float)
    return (1.0 / (1.0 - r**2 + 2j * np.asarray(damping_ratio, float) * r))[()]


def high_pass_response(frequency: ArrayLike, corner: ArrayLike) -> Any:
    """Complex gain of a first-order AC coupling; 0 at the mean.

    Examples
    --------
    >>> round(float(abs(high_pass_response(1.0, 1.0))), 6)
    0.707107
    """
    s = 1j * np.asarray(frequency, float) / np.asarray(corner, float)
    return (s / (1.0 + s))[()]


def frame_response(order: ArrayLike, averaged_over: ArrayLike, period: ArrayLike, *, stamp: str = "middle") -> Any:
    """Complex gain of a mean over a time Delta: sinc(n Delta/T), and exp(+i n omega Delta/2) if stamped at its start.

    Examples
    --------
    >>> round(float(frame_response(1, 0.5, 1.0).real), 6)
    0.63662
    """
    share = np.asarray(order, float) * np.asarray(averaged_over, float) / np.asarray(period, float)
    turn = np.exp(1j * np.pi * share) if stamp == "start" else np.ones_like(share, dtype=complex)
    return (np.sinc(share) * turn)[()]


def delay_response(frequency: ArrayLike, delay: ArrayLike) -> Any:
    """Complex gain of a record that is late by ``delay`` [s].

    Examples
    --------
    >>> complex(delay_response(1.0, 0.5).round(6))
    (-1-0j)
    """
    return np.exp(-2j * np.pi * np.asarray(frequency, float) * np.asarray(delay, float))[()]


def usable_orders(response: NDArray[np.complex128], *, most_gain: float = MOST_GAIN) -> int:
    """Highest order up to which every gain can be undone without magnifying by more than ``most_gain``; order 0 is the mean."""
    size = np.abs(np.asarray(response)[1:])
    bad = np.flatnonzero(size * most_gain < 1.0)
    return int(bad[0]) if bad.size else int(size.size)


def calibrated(signal: Signal, calibration: str | None = None, zero: str | float | None = None, *, name: str = "calibration") -> Signal:
    """Turn a raw signal (volts, milliamperes) into the measured quantity: (x - zero) times calibration.

    Parameters
    ----------
    signal : Signal
    calibration : str, optional
        Slope such as ``"25 bar/V"``.
    zero : str or float, optional
        Reading at zero, in the raw unit (a string) or as raw SI number.

    Raises
    ------
    UnitError
        If the units do not fit the signal's.

    Examples
    --------
    >>> raw = Signal([0.0, 1.0], [1.0, 3.0], unit="V", name="p")
    >>> calibrated(raw, "25 bar/V", "1 V").values.tolist()
    [0.0, 5000000.0]
    """
    values = np.array(signal.values)
    remarks = list(signal.remarks)
    if zero is not None:
        offset = _zero_value(zero, signal)
        values = values - offset
        remarks.append(f"Column {signal.name!r}: the zero {zero} was taken off.")
    if calibration is None:
        return signal.replace(values=values, remarks=remarks)
    slope, unit, dimension = _slope(calibration, signal, name)
    remarks.append(f"Column {signal.name!r} was calibrated by {calibration}.")
    return signal.replace(values=values * slope, unit=unit, dimension=dimension, remarks=remarks)


def _zero_value(zero: str | float, signal: Signal) -> float:
    if not isinstance(zero, str):
        return float(zero)
    quantity: Any = registry().Quantity(zero)
    try:
        if signal.dimension is None:
            return float(quantity.magnitude)
        return float(quantity.to(DIMENSIONS[signal.dimension]).magnitude)
    except Exception as problem:
        raise UnitError(f"zero = {zero!r} is not in the unit of column {signal.name!r} ({signal.unit or 'none'})", name="zero", value=zero) from problem


def _slope(calibration: str, signal: Signal, name: str) -> tuple[float, str, str]:
    """Slope in SI per SI, the unit in which the result is read, and its dimension."""
    try:
        number, _, rest = calibration.strip().partition(" ")
        top, slash, bottom = rest.rpartition("/")
        if not slash:
            raise ValueError("no unit per unit")
        dimension = unit_dimension(top)
        raw = unit_dimension(bottom)
        if dimension is None or raw is None:
            raise ValueError("a unit without a dimension used here")
        units = registry()
        upper = float(units.Quantity(float(number), parse_unit(top)[0]).to(DIMENSIONS[dimension]).magnitude)
        lower = float(units.Quantity(1.0, parse_unit(bottom)[0]).to(DIMENSIONS[raw]).magnitude)
    except (ValueError, InputError) as problem:
        raise InputError(f"{name} = {calibration!r} is not understood; write a slope such as '25 bar/V'", name=name, value=calibration) from problem
    if signal.dimension is not None and signal.dimension != raw:
        raise UnitError(
            f"{name} = {calibration!r} is per {bottom}, but column {signal.name!r} is in {signal.unit}", name=name, value=calibration
        )
    if signal.dimension is None:
        lower = 1.0  # the numbers stand as written in the raw unit
    return upper / lower, top.strip(), dimension
