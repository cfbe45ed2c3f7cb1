"""A value with unit and uncertainty, read from the text that a person typed, and written back."""

from __future__ import annotations

import math
import re
from fractions import Fraction
from functools import lru_cache

from ..errors import InputError, UnitError
from .dimensions import DIMENSIONS, EXAMPLES
from .given import Given
from .units import checked_unit, convert, from_si, in_si, parse_unit

__all__ = ["parse_text", "write_given"]

_PLUS = r"(?:±|\+\s?/\s?[-−]|\+[-−])"
_NUMBER = r"[-+−]?\s?(?:\d+(?:[.]\d*)?|[.]\d+)(?:[eE][-+−]?\d+)?(?![\d.,])"
_COMMA = re.compile(r"^[(\s]*[-+−]?\d[\d']*(?:[.]\d+)?,\d|±\s*\d*,\d")
_FRACTION = re.compile(r"^(?:(?P<whole>\d+)\s+)?(?P<over>\d{1,3})/(?P<under>[1-9]\d{0,2})(?=\s*(?:in|inch|inches|\"|″)(?![A-Za-z]))")
_POWER = re.compile(r"(?<=\d)\s*[×x*]\s*10(?:\^\s*)?([-−+⁻]?[\d⁰¹²³⁴⁵⁶⁷⁸⁹]+)")
_RAISED = str.maketrans("⁻−⁰¹²³⁴⁵⁶⁷⁸⁹", "--0123456789")
_GIVEN = re.compile(rf"^(?P<number>{_NUMBER})\s*(?P<unit>[^±+]*?)\s*(?:{_PLUS}\s*(?P<spread>{_NUMBER})\s*(?P<spread_unit>.*?))?$")
_COVERAGE = re.compile(
    r"\(\s*(?P<what>k\s*=\s*(?P<k>[\d.]+)(?:\s*[,;]\s*[\d.]+\s*%)?|(?P<level>\d+(?:[.]\d+)?)\s*%|(?P<sigma>[\d.]+)\s*(?:sigma|σ|sd)|limits?|max)\s*\)\s*$",
    re.IGNORECASE,
)
_FULL_SCALE = re.compile(
    rf"^%\s*(?:of\s+)?(?:FS|F\.S\.|full[ -]scale)(?:\s*(?:of|=)?\s*\(?\s*(?P<number>{_NUMBER})\s*(?P<unit>[^)]+?)\s*\)?)?$", re.IGNORECASE
)


def _number(text: str, name: str, given: str) -> Fraction:
    plain = text.replace("−", "-").replace(" ", "")
    size = float(plain)
    if not math.isfinite(size):
        raise InputError(f"{name} = {given!r} is not finite; give a number", name=name, value=given)
    # A power of ten beyond what a float holds would be written out in full by the fraction.
    return Fraction(plain) if size else Fraction(0)


@lru_cache(maxsize=8192)
def parse_text(text: str, dimension: str, name: str) -> Given:
    """Read the text of a given: number, unit, and what follows the plus-minus sign."""
    body, divisor, shape = text.strip(), 1.0, "normal"
    example = EXAMPLES.get(dimension, f"'1 {DIMENSIONS[dimension]}'")
    if _COMMA.search(body):
        raise InputError(f"{name} = {text!r}: write a decimal point and no thousands marks, as in {example}", name=name, value=text)
    coverage = _COVERAGE.search(body) if re.search(_PLUS, body) else None
    if coverage:
        body = body[: coverage.start()].strip()
        divisor, shape = _coverage_divisor(coverage, name, text)
    # '(3.1 ± 0.1) mm' is '3.1 ± 0.1 mm'.
    body = re.sub(rf"^\(\s*([^()]*{_PLUS}[^()]*?)\s*\)\s*", r"\1 ", body).strip()
    body = _POWER.sub(lambda power: f"e{power[1].translate(_RAISED)}", body)
    body = _FRACTION.sub(lambda part: repr(float(int(part["whole"] or 0) + Fraction(int(part["over"]), int(part["under"])))), body)
    match = _GIVEN.match(body)
    if not match or len(body) > 200:
        raise InputError(
            f"{name} = {text!r} is not understood; write a number and a unit, such as {example}, with '± 5 %' behind it if it is uncertain",
            name=name, value=text,
        )  # fmt: skip
    unit, spread_unit = match["unit"].strip(), (match["spread_unit"] or "").strip()
    if not unit and spread_unit and not spread_unit.startswith("%"):
        unit = spread_unit  # '37 ± 0.5 degC': the unit stands once, for both
    if not unit and dimension != "ratio":
        raise UnitError(f"{name} = {text!r} has no unit; give it as {example}", name=name, value=text, allowed=dimension)
    if dimension == "temperature" and unit in ("C", "F"):
        unit = f"deg{unit}"
    read = checked_unit(unit, dimension, name, text)
    value = in_si(_number(match["number"], name, text), read, dimension)
    spread = 0.0
    if match["spread"] is not None:
        spread = _spread(_number(match["spread"], name, text), spread_unit, value, unit, dimension, name, text) / divisor
    return Given(
        value=value, standard_uncertainty=spread, dimension=dimension, unit=unit, shape=shape, stated=match["spread"] is not None,
        reference=parse_unit(unit)[1] if dimension == "pressure" else "", text=text.strip(),
    )  # fmt: skip


def _coverage_divisor(match: re.Match[str], name: str, text: str) -> tuple[float, str]:
    if match["k"] or match["sigma"]:
        k = float(match["k"] or match["sigma"])
        if not k > 0:
            raise InputError(f"{name} = {text!r}: a coverage factor must be above 0", name=name, value=text)
        return k, "normal"
    if match["level"]:
        from statistics import NormalDist

        level = float(match["level"]) / 100
        if not 0 < level < 1:
            raise InputError(f"{name} = {text!r}: a coverage must lie between 0 and 100 %", name=name, value=text)
        return NormalDist().inv_cdf(0.5 + level / 2), "normal"
    return math.sqrt(3.0), "rectangular"


def _spread(number: Fraction, unit: str, value: float, value_unit: str, dimension: str, name: str, text: str) -> float:
    """Second number of a given, in SI (a difference: no offset of a temperature scale)."""
    if full_scale := _FULL_SCALE.match(unit):
        if full_scale["number"] is None:
            raise InputError(f"{name} = {text!r}: per cent of which full scale? Write '± 0.25 % FS 400 bar'", name=name, value=text)
        read = checked_unit(full_scale["unit"], dimension, name, text)
        return float(number) / 100 * abs(in_si(_number(full_scale["number"], name, text), read, dimension, difference=True))
    if unit == "%" and not (value_unit == "%" and dimension == "ratio"):
        if dimension == "temperature":
            raise InputError(f"{name} = {text!r}: a temperature has no per cent; write '± 0.5 degC'", name=name, value=text)
        return float(number / 100) * abs(value)
    if dimension == "temperature" and unit in ("C", "F"):
        unit = f"deg{unit}"
    read = checked_unit(unit or value_unit, dimension, name, text)
    return in_si(number, read, dimension, difference=True)


def write_given(given: Given) -> str:
    """Write a given so that :func:`parse_given` reads the same numbers again.

    >>> from pulsekit.quantities import parse_given
    >>> write_given(parse_given("3.1 ± 0.2 mm (k=2)", "length"))
    '3.1 mm ± 0.1 mm'
    """
    unit = given.unit
    value, spread = from_si(given.value, unit, given.dimension), given.standard_uncertainty
    mark = f" {unit}" if unit else ""
    if not given.stated:
        return f"{_shortest(value)}{mark}"
    tail = ""
    if given.shape == "rectangular":
        spread, tail = spread * math.sqrt(3.0), " (limits)"
    read, _ = parse_unit(unit)
    if given.dimension == "temperature":
        spread = convert(spread, "K", {"degC": "delta_degC", "degF": "delta_degF"}.get(read, read))
    else:
        spread = from_si(spread, unit, given.dimension)
    return f"{_shortest(value)}{mark} ± {_shortest(spread)}{mark}{tail}"


def _shortest(number: float) -> str:
    short = f"{number:.15g}"
    return short if abs(float(short) - number) <= 2.3e-16 * abs(number) else repr(number)
