"""Turns of a pump shaft from a trigger, or its speed from the trace itself; phase 0 is top dead centre of plunger 1."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from ..errors import InputError, SignalError
from .cutting import find_cycles
from .cycles import Cycles
from .signal import Signal
from .trigger import trigger_onsets

__all__ = ["shaft_cycles", "shaft_speed", "turns_of"]

#: A speed found more than this share away from the stated one is refused.
SPEED_TOLERANCE = 0.03
_REACH = 0.12  # share of the stated speed within which the trace is searched


def turns_of(
    pulses: NDArray[np.float64], *, pulses_per_revolution: int = 1, trigger_ratio: float = 1.0, trigger_angle: float = 0.0
) -> NDArray[np.float64]:
    """Instants at which the pump's shaft passes phase 0, from the instants of the trigger's pulses.

    Parameters
    ----------
    pulses : ndarray, shape (n,)
        [s]
    pulses_per_revolution : int
        Of the trigger's shaft.
    trigger_ratio : float
        Turns of the trigger's shaft per turn of the pump; any positive number.
    trigger_angle : float
        By which the first pulse comes after top dead centre of plunger 1, at the pump's shaft. [rad]

    Returns
    -------
    ndarray
        Within the span of the pulses. [s]

    Raises
    ------
    InputError
        If a count or ratio is not positive.
    SignalError
        If less than one turn lies between the pulses.

    Examples
    --------
    >>> turns_of(np.arange(9) * 0.1, pulses_per_revolution=2, trigger_angle=np.pi).round(3).tolist()
    [0.1, 0.3, 0.5, 0.7]
    """
    if pulses_per_revolution < 1 or pulses_per_revolution != int(pulses_per_revolution):
        raise InputError(f"pulses_per_revolution = {pulses_per_revolution} must be a whole number from 1", name="pulses_per_revolution")
    if not trigger_ratio > 0:
        raise InputError(f"trigger_ratio = {trigger_ratio} must be above 0 (trigger shaft turns per pump turn)", name="trigger_ratio")
    each = pulses_per_revolution * trigger_ratio
    # Counted in pulses: top dead centre lies trigger_angle before the first pulse, and every `each` pulses after that.
    first = -trigger_angle / (2 * np.pi) * each % each
    places = np.arange(first, pulses.size - 1 + 1e-9, each)
    if places.size < 2:
        raise SignalError(f"{pulses.size} trigger pulses hold less than one turn of the pump ({each:g} pulses per turn)")
    return np.asarray(np.interp(places, np.arange(pulses.size, dtype=float), pulses))


def shaft_cycles(
    signal: Signal,
    *,
    trigger: Signal | None = None,
    speed: float | None = None,
    per_turn: int = 1,
    pulses_per_revolution: int = 1,
    trigger_ratio: float = 1.0,
    trigger_angle: float = 0.0,
    leave_out: Sequence[int] = (),
) -> Cycles:
    """Cut a pump's recording into turns of its shaft, each stretched to one phase.

    Parameters
    ----------
    signal : Signal
    trigger : Signal, optional
        One pulse or more per turn. Without it the speed is found in the trace near ``speed`` and taken as constant.
    speed : float, optional
        Stated speed of the pump's shaft. [Hz]
    per_turn : int
        Pulsations per turn (plungers or pistons), which the search of the speed goes by.
    pulses_per_revolution, trigger_ratio, trigger_angle
        As in `turns_of`.
    leave_out : sequence of int
        Numbers of turns, counted from 1, that must not be used.

    Returns
    -------
    Cycles
        Aligned by ``"stretch"``: orders keep their phase while the speed drifts.

    Raises
    ------
    InputError
        If the trigger or the trace shows a speed more than 3 % from the stated one; both are named.
    SignalError
        If neither trigger nor speed is there, or no pulsation stands out.
    """
    if trigger is not None:
        turns = turns_of(
            trigger_onsets(trigger), pulses_per_revolution=pulses_per_revolution, trigger_ratio=trigger_ratio, trigger_angle=trigger_angle
        )
        found = (turns.size - 1) / float(turns[-1] - turns[0])
        if speed is not None:
            _agree(found, speed, f"the trigger {trigger.name!r}", "pulses_per_revolution, trigger_ratio or the speed")
        end = float(signal.time[-1]) + float(np.median(np.diff(signal.time)))
        inside = turns[(turns >= signal.time[0]) & (turns <= end)]
        said = f"Cycles are turns of the shaft by the trigger {trigger.name!r}: {60 / np.diff(turns).max():.5g} to {60 / np.diff(turns).min():.5g} rpm."
        cut = find_cycles(signal, onsets=inside, align="stretch", leave_out=leave_out)
        return _said(replace(cut, remarks=tuple(words for words in cut.remarks if not words.startswith("Onsets were given"))), said)
    if speed is None:
        raise SignalError("neither a trigger nor a speed is stated; a pump's orders need one of them (operation.speed, recording.trigger)")
    found = shaft_speed(signal, speed, per_turn=per_turn)
    said = f"The speed of {60 * found:.5g} rpm was found in the trace and taken as constant; phases are counted from the record's start, not from a plunger."
    return _said(find_cycles(signal, period=1 / found, align="stretch", leave_out=leave_out), said)


def _said(cycles: Cycles, words: str) -> Cycles:
    return replace(cycles, remarks=(*cycles.remarks, words))


def _agree(found: float, stated: float, by: str, remedy: str) -> None:
    if abs(found / stated - 1) > SPEED_TOLERANCE:
        raise InputError(
            f"{by} shows {60 * found:.5g} rpm, {100 * abs(found / stated - 1):.2g} % from the stated {60 * stated:.5g} rpm (allowed: 3 %); "
            f"check {remedy} (operation.speed is that of the pump's shaft, not of the motor)",
            name="operation.speed", value=stated, allowed="within 3 % of the recording",
        )  # fmt: skip


def shaft_speed(signal: Signal, stated: float, *, per_turn: int = 1) -> float:
    """Return the shaft speed found in a trace near the stated one. [Hz]

    The search maximises the power of the first three multiples of the pulsation frequency within 12 % of the
    stated speed, then below the spectrum's spacing.

    Raises
    ------
    SignalError
        If nothing stands out there.
    InputError
        If the speed found differs by more than 3 %.

    Examples
    --------
    >>> time = np.arange(4000) * 0.001
    >>> trace = Signal(time, np.cos(2 * np.pi * 3 * 10.1 * time) + 0.3 * np.cos(2 * np.pi * 6 * 10.1 * time))
    >>> round(shaft_speed(trace, 10.0, per_turn=3), 4)
    10.1
    """
    from scipy.optimize import minimize_scalar

    time = signal.time - signal.time[0]
    good = slice(None) if signal.weights is None else signal.weights > 0
    time, values = time[good], signal.values[good] - np.mean(signal.values[good])
    window = np.hanning(time.size + 2)[1:-1]
    values = values * window
    step = float(np.median(np.diff(time)))
    multiples = [k * per_turn for k in (1, 2, 3) if k * per_turn * stated * (1 + _REACH) < 0.5 / step]
    if not multiples:
        raise SignalError(
            f"the trace is sampled at {1 / step:.4g} Hz, below twice the pulsation frequency of {per_turn * stated:.4g} Hz; record faster",
            column=signal.name,
        )

    def power(speed: float) -> float:
        return float(sum(abs(np.exp(-2j * np.pi * k * speed * time) @ values) ** 2 for k in multiples))

    # Four trial speeds per resolution cell of the highest multiple.
    number = int(np.clip(8 * _REACH * stated * time[-1] * multiples[-1], 40, 4000))
    trials = stated * np.linspace(1 - _REACH, 1 + _REACH, number)
    powers = np.array([power(trial) for trial in trials])
    best = int(powers.argmax())
    if powers[best] < 8 * np.median(powers):
        raise SignalError(
            f"no pulsation within {100 * _REACH:.0f} % of the stated {60 * stated:.5g} rpm stands out in the trace; state the speed or a trigger",
            column=signal.name,
        )
    low, high = trials[max(best - 1, 0)], trials[min(best + 1, number - 1)]
    result = minimize_scalar(lambda trial: -power(trial), bounds=(low, high), method="bounded", options={"xatol": 1e-9 * stated})
    found = float(result.x)
    _agree(found, stated, "the trace", "the speed or the number of plungers")
    return found
