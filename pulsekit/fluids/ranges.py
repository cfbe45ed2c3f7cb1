"""The range in which a correlation was measured: inside it goes on, outside it raises unless told to go on."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from ..errors import InputError, OutOfRangeError
from ..quantities import Given

__all__ = ["above_zero", "celsius", "correlation", "inside", "plain"]


def celsius(temperature: float) -> str:
    """Print a temperature [K] as people say it.

    >>> celsius(310.15)
    '37.0 °C'
    """
    return f"{temperature - 273.15:.1f} °C"


def inside(value: float, low: float, high: float, *, name: str, what: str, shown: str, allowed: str, extrapolate: bool) -> tuple[str, ...]:
    """Return the remarks that a value of a correlation's input needs: none inside its range, one outside.

    Raises
    ------
    OutOfRangeError
        If ``value`` lies outside ``low`` to ``high`` and ``extrapolate`` is not set.
    """
    if low <= value <= high:
        return ()
    if not extrapolate:
        raise OutOfRangeError(
            f"{name} = {shown} lies outside the range of {what} ({allowed}); give a measured value, or say extrapolate=True to go on all the same",
            name=name, value=value, low=low, high=high, allowed=allowed,
        )  # fmt: skip
    return (f"{name} = {shown} lies outside the range of {what} ({allowed}): extrapolated, as asked for.",)


def above_zero(given: Given, name: str) -> Given:
    """Return the given if its value is positive.

    Raises
    ------
    InputError
        If it is zero, negative or not finite.
    """
    if not (math.isfinite(given.value) and given.value > 0):
        raise InputError(
            f"{name} = {given.text!r} must be above zero; check its sign and its unit", name=name, value=given.text, allowed="above zero"
        )
    return given


def correlation(relative: float) -> Given:
    """Return the factor of 1 by which the accuracy of a correlation enters the interval.

    >>> correlation(0.02).standard_uncertainty
    0.02
    """
    return Given(value=1.0, standard_uncertainty=relative, dimension="ratio", stated=True, text=f"1 ± {100 * relative:.3g} %")


def plain(value: Any) -> Any:
    """Return a float for a scalar, the array as it is otherwise."""
    return float(value) if np.ndim(value) == 0 else value
