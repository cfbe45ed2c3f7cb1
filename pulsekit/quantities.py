"""Units at the edge: read a quantity as people write it, turn it into an SI float, print it back.

Inside the package every number is an SI float (kelvin for temperatures, radian for angles, hertz for
rotational speeds). Only what faces a person comes here.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass, replace
from functools import lru_cache
from types import MappingProxyType
from typing import Any

import pint

from .errors import InputError, UnitError

__all__ = [
    "DIMENSIONS",
    "Given",
    "absolute_pressure",
    "from_si",
    "parse_either",
    "parse_given",
    "parse_unit",
    "significant",
    "to_si",
    "unit_dimension",
]

#: Name of each dimension that a caller may ask for, and its SI unit (pint spelling).
DIMENSIONS = MappingProxyType(
    {
        "length": "m",
        "area": "m^2",
        "volume": "m^3",
        "time": "s",
        "frequency": "Hz",
        "angle": "rad",
        "temperature": "K",
        "temperature_difference": "delta_degC",
        "velocity": "m/s",
        "flow_rate": "m^3/s",
        "pressure": "Pa",
        "pressure_gradient": "Pa/m",
        "viscosity": "Pa*s",
        "kinematic_viscosity": "m^2/s",
        "density": "kg/m^3",
        "shear_rate": "1/s",
        "force": "N",
        "mass": "kg",
        "power_per_length": "W/m",
        "impedance": "Pa*s/m^3",
        "voltage": "V",
        "current": "A",
        "ratio": "",
    }
)

_EXTRA_UNITS = (
    "rpm = hertz / 60",
    "bpm = hertz / 60 = beats_per_minute",
    "gpm = gallon / minute",
    "lpm = liter / minute",
    "cmH2O = 98.0665 pascal = cmH20",
    "mmH2O = 9.80665 pascal",
    "percent_ = 0.01",
)


@lru_cache(maxsize=1)
def registry() -> pint.UnitRegistry[Any]:
    """Return the unit registry, made on first use (it takes a noticeable part of a second)."""
    units: pint.UnitRegistry[Any] = pint.UnitRegistry(autoconvert_offset_to_baseunit=True, on_redefinition="ignore")
    for definition in _EXTRA_UNITS:
        units.define(definition)
    return units


# What people type -> what the registry reads. Longest first; each is a whole word.
_SPELLINGS = MappingProxyType(
    {
        "°C": "degC", "° C": "degC", "ºC": "degC", "℃": "degC", "deg C": "degC", "Celsius": "degC", "celsius": "degC",
        "°F": "degF", "° F": "degF", "ºF": "degF", "℉": "degF", "deg F": "degF",
        "°": "deg", "%": "percent_", "µ": "u", "μ": "u", "·": "*", "⋅": "*", "×": "*", "⁻¹": "^-1", "⁻²": "^-2", "⁻³": "^-3",
        "²": "^2", "³": "^3", "−": "-",
    }
)  # fmt: skip
_WORDS = MappingProxyType(
    {
        "ml": "mL", "l": "L", "dl": "dL", "ul": "uL", "lit": "L", "ltr": "L", "cc": "cm^3", "ccm": "cm^3/min", "sec": "s", "secs": "s",
        "msec": "ms", "mins": "min", "Min": "min", "cp": "cP", "cst": "cSt", "inch": "in", "inches": "in", "Bar": "bar", "BAR": "bar", "PSI": "psi",
        "Psi": "psi", "RPM": "rpm", "Rpm": "rpm", "MMHG": "mmHg", "mmhg": "mmHg", "mmHG": "mmHg", "MmHg": "mmHg", "CMH2O": "cmH2O", "cmh2o": "cmH2O",
        "cmH20": "cmH2O", "KPA": "kPa", "kpa": "kPa", "Kpa": "kPa", "KPa": "kPa", "pa": "Pa", "PA": "Pa", "mpa": "MPa", "hz": "Hz", "HZ": "Hz",
        "LPM": "lpm", "GPM": "gpm", "usgpm": "gpm", "USgpm": "gpm", "l/min": "L/min", "r/min": "rpm", "rev/min": "rpm", "1/min": "rpm", "min^-1": "rpm",
        "degc": "degC", "degf": "degF", "dyn": "dyne", "dynes": "dyne", "ML": "mL", "KHz": "kHz", "khz": "kHz", "Pas": "Pa*s", "mPas": "mPa*s", "kgf": "kilogram_force",
    }
)  # fmt: skip
_GAUGE = re.compile(r"^(?P<unit>[A-Za-z0-9]+?)\s*\(\s*(?P<kind>[ga]|abs|gauge|absolute)\s*\)$", re.IGNORECASE)
_FUSED = MappingProxyType({"psig": ("psi", "gauge"), "psia": ("psi", "absolute"), "barg": ("bar", "gauge"), "bara": ("bar", "absolute")})
_NUMBER = r"[-+−]?\d+(?:[.]\d*)?(?:[eE][-+−]?\d+)?|[-+−]?[.]\d+(?:[eE][-+−]?\d+)?"
_GIVEN = re.compile(
    rf"^\s*(?P<number>{_NUMBER})\s*(?P<unit>[^±]*?)\s*"
    rf"(?:(?:±|\+/-|\+-)\s*(?P<spread>{_NUMBER})\s*(?P<spread_unit>.*?)\s*)?$"
)
_COVERAGE = re.compile(r"\(\s*(?P<what>k\s*=\s*(?P<k>[\d.]+)|(?P<level>\d+(?:[.]\d+)?)\s*%|limits?)\s*\)\s*$", re.IGNORECASE)
_FULL_SCALE = re.compile(rf"^%\s*(?:FS|F\.S\.|of full scale)\s*(?P<number>{_NUMBER})\s*(?P<unit>.+)$", re.IGNORECASE)
_EXAMPLES = MappingProxyType(
    {
        "length": "'3.1 mm'", "flow_rate": "'40 L/min' or 'mL/min'", "velocity": "'25 cm/s'", "pressure": "'120 mmHg' or '180 bar'", "viscosity": "'3.5 mPa*s'",
        "density": "'1060 kg/m^3'", "temperature": "'37 degC'", "time": "'0.86 s'", "frequency": "'1.2 Hz' or '1480 rpm'", "volume": "'0.5 L'", "angle": "'60 deg'",
        "pressure_gradient": "'Pa/m'", "ratio": "'0.45' or '2 %'", "area": "'30 mm^2'",
    }
)  # fmt: skip


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


# Products, powers and blanks as people write them: 'm3/h', 'mL min-1', 'cm.s-1', 'L per min', 'mm Hg', 'bar a'.
_FORMS = (
    (re.compile(r"\bmm\s+Hg\b", re.IGNORECASE), "mmHg"),
    (re.compile(r"\b([cm])m\s+H2O\b"), r"\1mH2O"),
    (re.compile(r"\b(bar|psi|kPa|MPa|mbar|Pa)[\s_]+(?:a|abs|absolute)\.?$"), r"\1(a)"),
    (re.compile(r"\b(bar|psi|kPa|MPa|mbar|Pa)[\s_]+(?:g|gauge)\.?$"), r"\1(g)"),
    (re.compile(r"\s+per\s+"), "/"),
    (re.compile(r"(?<![A-Za-z0-9^])(m|cm|mm|dm|um|µm|μm|ft|in|s|min|h|sec|L|l|ml|mL)(-?[1-4])(?![A-Za-z0-9])"), r"\1^\2"),
    (re.compile(r"(?<=[A-Za-z0-9])\s*[.∙•]\s*(?=[A-Za-zµμ])"), "*"),
    (re.compile(r"(?<=[A-Za-z0-9])\s+(?=[A-Za-zµμ]+\^-)"), "*"),
)


def _spelled(text: str) -> str:
    for typed, read in _SPELLINGS.items():
        text = text.replace(typed, read)
    text = text.strip().rstrip(".")
    for form, plain in _FORMS:
        text = form.sub(plain, text)
    if text in _WORDS:
        return _WORDS[text]
    # Only whole words are replaced: 'ml' inside 'ml/min', never inside another word.
    return re.sub(r"[A-Za-z][A-Za-z0-9]*", lambda m: _WORDS.get(m.group(), m.group()), text)


@lru_cache(maxsize=4096)
def parse_unit(text: str) -> tuple[str, str]:
    """Read a unit as people write it; return (registry spelling, pressure reference).

    Raises UnitError if the unit is not known. The reference is "gauge", "absolute" or "".

    >>> parse_unit("ml/min"), parse_unit("bar(a)")
    (('mL/min', ''), ('bar', 'absolute'))
    """
    stripped = text.strip()
    for form, plain in _FORMS[2:4]:
        stripped = form.sub(plain, stripped)
    reference = ""
    if stripped.lower() in _FUSED:
        stripped, reference = _FUSED[stripped.lower()]
    elif match := _GAUGE.match(stripped):
        stripped = match["unit"]
        reference = "gauge" if match["kind"].lower().startswith("g") else "absolute"
    spelled = _spelled(stripped)
    try:
        registry().parse_units(spelled)
    except Exception as problem:
        raise UnitError(f"unit {text!r} is not known; write it as in 'mL/min', 'mmHg', 'cm/s', 'mPa*s'", value=text) from problem
    return spelled, reference


@lru_cache(maxsize=4096)
def unit_dimension(unit: str) -> str | None:
    """Name of the dimension that a unit has, or None if it is none of ours.

    >>> unit_dimension("ml/min")
    'flow_rate'
    """
    spelled, _ = parse_unit(unit)
    wanted = registry().get_dimensionality(spelled)
    if spelled in ("degC", "degF", "K", "kelvin"):
        return "temperature"
    if spelled in ("deg", "rad", "degree", "radian"):
        return "angle"
    for name, si in DIMENSIONS.items():
        if name in ("angle", "temperature_difference"):
            continue
        if registry().get_dimensionality(si) == wanted:
            return name
    return None


def _factor_checked(unit: str, dimension: str, name: str, given: object) -> str:
    spelled, _ = parse_unit(unit)
    si = DIMENSIONS[dimension]
    if registry().get_dimensionality(spelled) != registry().get_dimensionality(si):
        wanted = dimension.replace("_", " ")
        example = _EXAMPLES.get(dimension, f"'{si}'")
        raise UnitError(f"{name} = {given!r} is not a {wanted}; give it as {example}", name=name, value=given, allowed=wanted)
    return spelled


def convert(value: Any, unit: str, to: str, *, dimension: str = "") -> Any:
    """Convert a number or array from one unit to another (registry spellings)."""
    if unit == to:
        return value
    units = registry()
    return units.Quantity(value, unit or "dimensionless").to(to or "dimensionless").magnitude


def to_si(value: Any, dimension: str, name: str = "value") -> float:
    """Return a given as an SI float, without its uncertainty.

    Parameters
    ----------
    value : str, float or pint quantity
        ``"3.1 mm"``, ``0.0031`` (SI already) or a quantity.
    dimension : str
        A key of ``DIMENSIONS``.
    name : str
        Name of the argument, for the error.

    Returns
    -------
    float
        In the SI unit of the dimension.

    Raises
    ------
    UnitError
        If the dimension is another one, or the unit is not known.
    InputError
        If it is no finite number.

    Examples
    --------
    >>> to_si("3.1 mm", "length", "radius")
    0.0031
    """
    return parse_given(value, dimension, name).value


def parse_given(value: Any, dimension: str, name: str = "value") -> Given:
    """Read a value with its uncertainty, as people write it.

    Accepts ``"3.1 mm"``, ``"3.1 mm ± 0.15 mm"``, ``"3.1 mm +/- 5 %"``, ``"... ± 0.2 mm (k=2)"``,
    ``"(95 %)"``, ``"(limits)"``, ``"± 0.25 % FS 400 bar"``, a float in SI, a pint quantity or a
    :class:`Given`.

    Examples
    --------
    >>> given = parse_given("3.1 mm ± 5 %", "length", "radius")
    >>> round(given.standard_uncertainty * 1e3, 6)
    0.155
    """
    if isinstance(value, Given):
        return value
    if isinstance(value, str):
        return _parse_text(value, dimension, name)
    if hasattr(value, "magnitude") and hasattr(value, "units"):
        number, unit = float(value.magnitude), f"{value.units}"
        spelled = _factor_checked(unit, dimension, name, str(value))
        return _finite(Given(value=float(convert(number, spelled, DIMENSIONS[dimension])), dimension=dimension, unit=unit, text=str(value)), name)
    if isinstance(value, bool) or (not isinstance(value, (int, float)) and not hasattr(value, "__float__")):
        raise InputError(f"{name} = {value!r} is not a number; give it as {_EXAMPLES.get(dimension, 'a number')}", name=name, value=value)
    return _finite(Given(value=float(value), dimension=dimension, unit=DIMENSIONS[dimension], text=f"{float(value)!r}"), name)


def parse_either(value: Any, dimensions: tuple[str, ...], name: str = "value") -> Given:
    """Read a value that may have one of several dimensions; a bare number is in SI of the first.

    >>> parse_either("46 mm^2/s", ("viscosity", "kinematic_viscosity"), "viscosity").dimension
    'kinematic_viscosity'
    """
    first: InputError | None = None
    for dimension in dimensions:
        try:
            given = parse_given(value, dimension, name)
        except UnitError as problem:
            first = first or problem
        else:
            return given
    assert first is not None
    raise first


def absolute_pressure(value: Any, name: str = "pressure", ambient: float = 101325.0) -> Given:
    """Read a pressure that a formula of gas or vapour takes: absolute, unless it says gauge.

    >>> absolute_pressure("1 bar(g)").value
    201325.0
    """
    given = parse_given(value, "pressure", name)
    if given.reference != "gauge":
        return given
    return replace(given, value=given.value + ambient, reference="absolute")


def _finite(given: Given, name: str) -> Given:
    if not math.isfinite(given.value) or not math.isfinite(given.standard_uncertainty):
        raise InputError(f"{name} = {given.text!r} is not finite; give a number", name=name, value=given.text)
    if given.standard_uncertainty < 0:
        raise InputError(
            f"{name} = {given.text!r}: an uncertainty cannot be negative; give 0 (exact) or a positive number", name=name, value=given.text
        )
    return given


def _number(text: str) -> float:
    return float(text.replace("−", "-"))


def _parse_text(text: str, dimension: str, name: str) -> Given:
    body, divisor, shape = text.strip(), 1.0, "normal"
    coverage = _COVERAGE.search(body) if re.search(r"±|\+/-|\+-", body) else None
    if coverage:
        body = body[: coverage.start()].strip()
        divisor, shape = _coverage_divisor(coverage, name, text)
    match = _GIVEN.match(body)
    if not match:
        raise InputError(
            f"{name} = {text!r} is not understood; write a number and a unit, such as {_EXAMPLES.get(dimension, repr('1'))}, "
            "with '± 5 %' behind it if it is uncertain",
            name=name, value=text,
        )  # fmt: skip
    unit = match["unit"].strip()
    if not unit and dimension != "ratio":
        raise UnitError(
            f"{name} = {text!r} has no unit; give it as {_EXAMPLES.get(dimension, DIMENSIONS[dimension])}", name=name, value=text, allowed=dimension
        )
    spelled = _factor_checked(unit, dimension, name, text)
    si = DIMENSIONS[dimension]
    number = float(convert(_number(match["number"]), spelled, si))
    spread = 0.0
    if match["spread"] is not None:
        spread = _spread(match["spread"], match["spread_unit"].strip(), number, unit, dimension, name, text) / divisor
    return _finite(
        Given(
            value=number, standard_uncertainty=spread, dimension=dimension, unit=unit, shape=shape, stated=match["spread"] is not None,
            reference=parse_unit(unit)[1] if unit else "", text=text,
        ),
        name,
    )  # fmt: skip


def _coverage_divisor(match: re.Match[str], name: str, text: str) -> tuple[float, str]:
    if match["k"]:
        k = float(match["k"])
        if k <= 0:
            raise InputError(f"{name} = {text!r}: a coverage factor must be above 0", name=name, value=text)
        return k, "normal"
    if match["level"]:
        from statistics import NormalDist

        level = float(match["level"]) / 100
        if not 0 < level < 1:
            raise InputError(f"{name} = {text!r}: a coverage must lie between 0 and 100 %", name=name, value=text)
        return NormalDist().inv_cdf(0.5 + level / 2), "normal"
    return math.sqrt(3.0), "rectangular"


def _spread(number: str, unit: str, value: float, value_unit: str, dimension: str, name: str, text: str) -> float:
    """Second number of a given, in SI (a difference: no offset of a temperature scale)."""
    if full_scale := _FULL_SCALE.match(unit):
        span = parse_given(f"{full_scale['number']} {full_scale['unit']}", dimension, name).value
        return _number(number) / 100 * abs(span)
    if unit == "%" and not (value_unit == "%" and dimension == "ratio"):
        return _number(number) / 100 * abs(value)
    unit = unit or value_unit
    if unit == "%":
        return _number(number) / 100
    spelled = _factor_checked(unit, dimension, name, text)
    if dimension == "temperature":
        return float(convert(_number(number), {"degC": "delta_degC", "degF": "delta_degF"}.get(spelled, spelled), "K"))
    return float(convert(_number(number), spelled, DIMENSIONS[dimension]))


def from_si(value: Any, unit: str, dimension: str | None = None) -> Any:
    """Convert an SI number or array into the unit a person reads.

    >>> round(from_si(1e-6, "mL/min"), 6)
    60.0
    """
    spelled, _ = parse_unit(unit)
    if spelled == "":
        return value
    dimension = dimension or unit_dimension(unit)
    if dimension is None:
        raise UnitError(f"unit {unit!r} has no dimension that is used here", value=unit)
    return convert(value, DIMENSIONS[dimension], spelled)


def significant(value: float, digits: int) -> float:
    """Round to a number of significant digits.

    >>> significant(0.0123456, 3)
    0.0123
    """
    if value == 0 or not math.isfinite(value):
        return value
    return float(f"{value:.{digits - 1}e}")
