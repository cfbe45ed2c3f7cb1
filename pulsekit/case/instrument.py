"""What the instruments of a case did to each harmonic, undone: frames, filters, delays; and two channels each in its own way."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..quantities import Given
from ..trace import Harmonics, decompose
from ..trace.channel import (
    butterworth_response,
    delay_response,
    frame_response,
    high_pass_response,
    second_order_response,
    usable_orders,
)
from .case import Case

__all__ = ["Step", "Values", "instrument_steps", "orders_of", "pair_steps", "sampled"]

Values = Mapping[str, Any]
Step = Callable[[NDArray[np.complex128], Values, float], NDArray[np.complex128]]
_Gain = Callable[[NDArray[np.float64], Values, float], Any]


@dataclass(frozen=True)
class _Response:
    """Complex gain of one part of an instrument at orders n of the fundamental f, and what it is called."""

    words: str
    gain: _Gain


def orders_of(coefficients: NDArray[np.complex128]) -> NDArray[np.float64]:
    """Orders 0..N of the last axis."""
    return np.arange(coefficients.shape[-1], dtype=float)


def sampled(value: Any) -> Any:
    """A sampled value beside the harmonic axis; a plain number as it is."""
    array = np.asarray(value, dtype=float)
    return array[..., None] if array.ndim else array


def _responses(case: Case, section: str, givens: dict[str, Given]) -> list[_Response]:
    """Parts of the instrument that a section states; their uncertain inputs go into ``givens``."""
    found: list[_Response] = []

    def take(name: str) -> str:
        key = f"{section}.{name}"
        givens[key] = case.given(key)
        return key

    if case.get(f"{section}.averaged_over") is not None:
        over, stamp = take("averaged_over"), str(case.get(f"{section}.stamp") or "middle")
        found.append(
            _Response(
                f"the mean over {case.get(over)} in each sample", lambda n, v, f: frame_response(n, sampled(v[over]), 1 / f, stamp=stamp)
            )
        )
    if case.get(f"{section}.low_pass") is not None:
        corner, order = take("low_pass"), int(case.get(f"{section}.low_pass_order") or 2)
        found.append(
            _Response(f"the low-pass filter of {case.get(corner)}", lambda n, v, f: butterworth_response(n * f, sampled(v[corner]), order))
        )
    if case.get(f"{section}.natural_frequency") is not None:
        own, damping = take("natural_frequency"), take("damping_ratio")
        words = f"the transducer line of natural frequency {case.get(own)} and damping ratio {case.get(damping)}"
        found.append(_Response(words, lambda n, v, f: second_order_response(n * f, sampled(v[own]), sampled(v[damping]))))
    if case.get(f"{section}.high_pass") is not None:
        low = take("high_pass")
        # The mean is not passed at all; what stands there is replaced later, so it is left as it is.
        found.append(
            _Response(
                f"the AC coupling of {case.get(low)}", lambda n, v, f: np.where(n == 0, 1.0, high_pass_response(n * f, sampled(v[low])))
            )
        )
    return found


def _most_usable(responses: list[_Response], raw: Harmonics, givens: Mapping[str, Given], remarks: list[str], whose: str) -> Harmonics:
    """Drop the harmonics that would be magnified more than threefold, and say what is undone."""
    nominal = {key: given.value for key, given in givens.items()}
    for response in responses:
        orders = np.arange(raw.count + 1, dtype=float)
        usable = usable_orders(np.broadcast_to(response.gain(orders, nominal, raw.frequency), orders.shape))
        said = f"{response.words[0].upper()}{response.words[1:]}{whose} was undone per harmonic"
        if usable < raw.count:
            said += f"; harmonics above {usable} would have been magnified more than threefold and were dropped"
            raw = raw.truncated(usable)
        remarks.append(said + ".")
    return raw


def _product(responses: list[_Response]) -> _Gain:
    def gain(orders: NDArray[np.float64], values: Values, frequency: float) -> Any:
        total: Any = 1.0
        for response in responses:
            total = total * response.gain(orders, values, frequency)
        return total

    return gain


def instrument_steps(case: Case, raw: Harmonics, steps: list[Step], givens: dict[str, Given], remarks: list[str]) -> Harmonics:
    """Undo what [recording] states of its one channel, up to a gain of 3; harmonics beyond are dropped and said."""
    responses = _responses(case, "recording", givens)
    raw = _most_usable(responses, raw, givens, remarks, "")
    if responses:
        gain = _product(responses)
        steps.append(lambda c, v, f: c / gain(orders_of(c), v, f))
    if case.get("recording.delay") is not None:
        delay = "recording.delay"
        givens[delay] = case.given(delay)
        steps.append(lambda c, v, f: c / delay_response(orders_of(c) * f, sampled(v[delay])))
        remarks.append(f"The record's delay of {case.get(delay)} was undone.")
    return raw


def _error(case: Case, key: str, nominal: float, dimension: str, givens: dict[str, Given]) -> str | None:
    """Enter a stated standard uncertainty as an input of its own (a scale about 1, an offset about 0)."""
    spread = case.maybe(key, dimension)
    if spread is None:
        return None
    givens[key] = Given(
        value=nominal, standard_uncertainty=spread.value, dimension=dimension, stated=True, text=f"{nominal:g} ± {spread.value:g}"
    )
    return key


def pair_steps(
    case: Case, pair: tuple[Any, Any], sections: tuple[str, str], cycles: Any, raw: Harmonics, steps: list[Step], givens: dict[str, Given],
    remarks: list[str],
) -> Harmonics:  # fmt: skip
    """Give each of two stations its own scale, offset and instrument.

    With U and D the harmonics of the two channels, the recorded difference c = U - D becomes
    (c + D) s_u/R_u - D s_d/R_d: an error of scale acts on the whole of a channel, not on the small difference.
    """
    responses = [_responses(case, section, givens) for section in sections]
    for found, section in zip(responses, sections, strict=True):
        raw = _most_usable(found, raw, givens, remarks, f" at {case.get(f'{section}.name') or section}")
        # The stated delay was taken out in time already; what is left is its uncertainty.
        key = f"{section}.delay"
        if case.get(key) is not None:
            givens[key] = case.given(key)
            found.append(_Response("", lambda n, v, f, key=key, mid=givens[key].value: delay_response(n * f, sampled(v[key]) - mid)))  # type: ignore[misc]
    scales = [_error(case, f"{section}.scale_uncertainty", 1.0, "ratio", givens) for section in sections]
    offsets = [_error(case, f"{section}.offset_uncertainty", 0.0, "pressure", givens) for section in sections]
    if any(responses) or any(scales):
        down = decompose(replace(cycles, signal=pair[1]), count=raw.count).coefficients
        gains = [_product(found) for found in responses]

        def mended(c: NDArray[np.complex128], v: Values, f: float) -> NDArray[np.complex128]:
            n = orders_of(c)
            scale = [1.0 if key is None else sampled(v[key]) for key in scales]
            own = down[: n.size]
            return np.asarray((c + own) * scale[0] / gains[0](n, v, f) - own * scale[1] / gains[1](n, v, f))

        steps.append(mended)
    for key, sign in zip(offsets, (1.0, -1.0), strict=True):
        if key is not None:
            steps.append(added_to_mean(key, sign))
    return raw


def added_to_mean(key: str, sign: float = 1.0) -> Step:
    """A step that adds an input to the mean."""

    def step(coefficients: NDArray[np.complex128], values: Values, frequency: float) -> NDArray[np.complex128]:
        out = coefficients.copy()
        out[..., 0] += sign * np.asarray(values[key])
        return out

    return step
