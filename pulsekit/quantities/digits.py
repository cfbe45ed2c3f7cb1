"""How many digits of a number to show, and the number written out with them."""

from __future__ import annotations

import math

__all__ = ["decimals_shown", "format_number", "rounded", "significant"]

_PLAIN_DIGITS = 4  # significant digits of a number without an interval
_MOST_DIGITS = 8
_ROUNDING = 1e-12  # an interval narrower than this, relative to its numbers, is a rounding error


def significant(value: float, digits: int) -> float:
    """Round to a number of significant digits.

    >>> significant(0.0123456, 3)
    0.0123
    """
    if value == 0 or not math.isfinite(value):
        return value
    return float(f"{value:.{digits - 1}e}")


def _place(value: float, digits: int) -> int:
    """Decimal places that show ``value`` with a number of significant digits; negative left of the point."""
    return digits - 1 - int(f"{abs(value):.{digits - 1}e}".split("e")[1])


def decimals_shown(value: float | None, low: float | None = None, high: float | None = None) -> int:
    """Decimal places that give the half width of an interval two significant digits.

    Without an interval the value gets four. An interval that is open on one side counts with the side it has.

    Examples
    --------
    >>> decimals_shown(0.5213, 0.441, 0.612), decimals_shown(415.31), decimals_shown(12345.0, 11000.0, 14000.0)
    (3, 1, -2)
    """
    bounds = [bound for bound in (low, high) if bound is not None and math.isfinite(bound)]
    known = value is not None and math.isfinite(value)
    if len(bounds) == 2:
        half = 0.5 * abs(bounds[1] - bounds[0])
    elif len(bounds) == 1 and known and value is not None:
        half = abs(bounds[0] - value)
    else:
        half = 0.0
    largest = max((abs(number) for number in (*bounds, *([value] if known and value is not None else []))), default=0.0)
    if half == 0.0 or half < largest * _ROUNDING:
        return _place(value, _PLAIN_DIGITS) if known and value else 0
    return min(_place(half, 2), _place(largest, _MOST_DIGITS))


def rounded(value: float | None, decimals: int) -> float | None:
    """Round to decimal places (negative: tens, hundreds); None stays None, and no zero is negative.

    >>> rounded(12345.0, -2), rounded(-0.001, 1), rounded(None, 2)
    (12300.0, 0.0, None)
    """
    if value is None or not math.isfinite(value):
        return value
    return round(value, decimals) + 0.0


def format_number(value: float | None, decimals: int | None = None) -> str:
    """Write a number as people read it: plain digits, a power of ten only where plain digits would be a row of zeros.

    Parameters
    ----------
    value : float or None
        None is written as a dash.
    decimals : int, optional
        Decimal places; without them four significant digits.

    Examples
    --------
    >>> format_number(0.5213, 2), format_number(415.31), format_number(12345.0, -2), format_number(3.4e-9)
    ('0.52', '415.3', '12300', '3.400e-9')
    """
    if value is None or math.isnan(value):
        return "–"
    if math.isinf(value):
        return "infinite" if value > 0 else "minus infinite"
    places = decimals_shown(value) if decimals is None else decimals
    value = rounded(value, places) or 0.0
    if value and not 1e-4 <= abs(value) < 1e7:
        mantissa, power = f"{value:.{max(places - _place(value, 1), 0)}e}".split("e")
        return f"{mantissa}e{int(power)}"
    return f"{value:.{max(places, 0)}f}"
