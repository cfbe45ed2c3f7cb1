"""A value that a person gave, and what is known of its uncertainty."""

from __future__ import annotations

import math
from dataclasses import dataclass

from ..errors import InputError

__all__ = ["Given", "finite", "uncertainty_remark"]


@dataclass(frozen=True, kw_only=True)
class Given:
    """A value that a person gave, with what is known of its uncertainty.

    ``value`` and ``standard_uncertainty`` are SI. ``shape`` is ``"normal"`` (log-normal where the
    quantity must stay positive) or ``"rectangular"``. ``stated`` tells whether an uncertainty was
    given at all: if not, the value counts as exact and the answer says so. ``reference`` is
    ``"gauge"``, ``"absolute"`` or ``""`` for pressures.
    """

    value: float
    standard_uncertainty: float = 0.0
    dimension: str = "ratio"
    unit: str = ""
    shape: str = "normal"
    stated: bool = False
    reference: str = ""
    text: str = ""

    @property
    def relative_uncertainty(self) -> float:
        """Standard uncertainty over the magnitude of the value [-]."""
        if self.standard_uncertainty == 0.0:
            return 0.0
        return self.standard_uncertainty / abs(self.value) if self.value else math.inf

    def __float__(self) -> float:
        return self.value


def finite(given: Given, name: str) -> Given:
    """Return the given, or raise InputError if it is not finite or its uncertainty is negative."""
    if not math.isfinite(given.value) or not math.isfinite(given.standard_uncertainty):
        raise InputError(f"{name} = {given.text!r} is not finite; give a number", name=name, value=given.text)
    if given.standard_uncertainty < 0:
        raise InputError(
            f"{name} = {given.text!r}: an uncertainty cannot be negative; give 0 (exact) or a positive number", name=name, value=given.text
        )
    if given.dimension == "temperature" and given.value < 0:
        raise InputError(f"{name} = {given.text!r} lies below absolute zero; check the sign and the unit", name=name, value=given.text)
    return given


def uncertainty_remark(given: Given, name: str) -> str | None:
    """Sentence for an uncertainty that is as large as its value or larger, or None.

    >>> from pulsekit.quantities import parse_given
    >>> uncertainty_remark(parse_given("2 mm ± 3 mm", "length"), "radius")
    "radius = '2 mm ± 3 mm': the standard uncertainty is 150 % of the value; check it."
    """
    if given.value == 0.0 or given.relative_uncertainty < 1.0 or given.dimension in ("temperature", "angle"):
        return None
    return f"{name} = {given.text!r}: the standard uncertainty is {100 * given.relative_uncertainty:.0f} % of the value; check it."
