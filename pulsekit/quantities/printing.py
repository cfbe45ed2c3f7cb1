"""Numbers with their unit and interval, as a person is shown them."""

from __future__ import annotations

from .digits import decimals_shown, format_number, rounded
from .spellings import pretty
from .units import from_si, parse_unit

__all__ = ["format_interval", "pretty_unit", "shown"]


def pretty_unit(unit: str) -> str:
    """Write a unit as it is printed.

    >>> pretty_unit("mPa*s"), pretty_unit("ml/min"), pretty_unit("degC"), pretty_unit("barg")
    ('mPa·s', 'mL/min', '°C', 'bar(g)')
    """
    return pretty(*parse_unit(unit))


def shown(
    value: float | None, low: float | None, high: float | None, unit: str, dimension: str | None = None
) -> tuple[float | None, float | None, float | None]:
    """Value and interval in the unit of a person, rounded so that the half width has two significant digits.

    Parameters
    ----------
    value, low, high : float or None
        SI.
    unit : str
        Unit to show.
    dimension : str, optional
        Where the unit alone does not tell it.

    Returns
    -------
    tuple of float or None
        Without an interval the value is rounded to four significant digits.

    Examples
    --------
    >>> shown(0.5213, 0.4411, 0.6123, "Pa")
    (0.521, 0.441, 0.612)
    >>> shown(6.9216e-6, None, None, "mL/min")
    (415.3, None, None)
    """
    numbers = [None if number is None else float(from_si(float(number), unit, dimension)) for number in (value, low, high)]
    places = decimals_shown(*numbers)
    first, second, third = (rounded(number, places) for number in numbers)
    return first, second, third


def format_interval(value: float | None, low: float | None, high: float | None, unit: str, dimension: str | None = None) -> str:
    """Write an SI value with its interval in a unit of a person.

    >>> format_interval(0.5213, 0.44, 0.612, "Pa")
    '0.521 (0.440 to 0.612) Pa'
    >>> format_interval(6.9216e-6, None, None, "mL/min"), format_interval(1.5, 1.2, None, "Pa")
    ('415.3 mL/min', '1.50 (at least 1.20) Pa')
    """
    numbers = [None if number is None else float(from_si(float(number), unit, dimension)) for number in (value, low, high)]
    places = decimals_shown(*numbers)
    first, second, third = (format_number(number, places) for number in numbers)
    span = ""
    if low is not None and high is not None:
        span = f" ({second} to {third})"
    elif low is not None or high is not None:
        span = f" (at least {second})" if low is not None else f" (at most {third})"
    return f"{first}{span} {pretty_unit(unit)}".rstrip()
