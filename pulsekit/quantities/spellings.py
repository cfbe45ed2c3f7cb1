"""Units as people type them, turned into the spelling that the unit registry reads, and into one for print."""

from __future__ import annotations

import re
from types import MappingProxyType

__all__ = ["AMBIGUOUS", "EXTRA_UNITS", "pretty", "reference_of", "spelled"]

#: Units of the trade that the registry lacks, or has otherwise (there a revolution is an angle).
EXTRA_UNITS = (
    "rpm = hertz / 60",
    "rps = hertz",
    "bpm = hertz / 60 = beats_per_minute",
    "gpm = gallon / minute",
    "igpm = imperial_gallon / minute",
    "lpm = liter / minute",
    "cmH2O = 98.0665 pascal = cmH20",
    "mmH2O = 9.80665 pascal",
    "mH2O = 9806.65 pascal",
    "inH2O = 249.08891 pascal",
    "Torr = 101325 / 760 pascal",
    "kp = kilogram_force",
    "percent_ = 0.01",
)

#: What may mean two things a person would not confuse on paper: the error says how to write each.
AMBIGUOUS = MappingProxyType(
    {
        "mpa": "'MPa' for megapascal (or 'mPa' for millipascal, 'mPa*s' for a viscosity)",
        "MPA": "'MPa' for megapascal (or 'mPa' for millipascal, 'mPa*s' for a viscosity)",
        "ccm": "'cm^3' for a volume or 'cm^3/min' for a flow",
        "cps": "'cP' for a viscosity or 'Hz' for cycles per second",
        "CPS": "'cP' for a viscosity or 'Hz' for cycles per second",
    }
)

# Signs -> letters; longest first.
_SIGNS = MappingProxyType(
    {
        "deg. C": "degC", "deg C": "degC", "deg. F": "degF", "deg F": "degF", "° C": "degC", "°C": "degC", "ºC": "degC", "℃": "degC",
        "° F": "degF", "°F": "degF", "ºF": "degF", "℉": "degF", "°": "deg", "%": "percent_", "µ": "u", "μ": "u",
        "·": "*", "⋅": "*", "×": "*", "∙": "*", "•": "*", "−": "-", "₂": "2", "″": "in", '"': "in",
    }
)  # fmt: skip
# Whole words -> registry. Upper and lower case are free only where nothing else could be meant.
_WORDS = MappingProxyType(
    {
        "ml": "mL", "l": "L", "dl": "dL", "ul": "uL", "ML": "mL", "lit": "L", "ltr": "L", "litre": "L", "litres": "L", "liters": "L", "cc": "cm^3",
        "sec": "s", "secs": "s", "S": "s", "msec": "ms", "usec": "us", "mins": "min", "Min": "min", "MIN": "min", "hr": "h", "hrs": "h", "H": "h",
        "MM": "mm", "CM": "cm", "Mm": "mm", "inch": "in", "inches": "in", "IN": "in", "FT": "ft", "feet": "ft",
        "cp": "cP", "CP": "cP", "mPas": "mPa*s", "mpas": "mPa*s", "MPas": "MPa*s", "Pas": "Pa*s", "pas": "Pa*s", "cst": "cSt", "CST": "cSt", "CSt": "cSt",
        "Bar": "bar", "BAR": "bar", "mBar": "mbar", "PSI": "psi", "Psi": "psi", "lbf/in^2": "psi", "KPA": "kPa", "kpa": "kPa", "Kpa": "kPa", "KPa": "kPa",
        "hpa": "hPa", "Mpa": "MPa", "gpa": "GPa", "Gpa": "GPa", "GPA": "GPa", "pa": "Pa", "PA": "Pa", "N/mm^2": "MPa", "torr": "Torr", "TORR": "Torr",
        "MMHG": "mmHg", "mmhg": "mmHg", "mmHG": "mmHg", "MmHg": "mmHg", "CMH2O": "cmH2O", "cmh2o": "cmH2O", "cmH20": "cmH2O", "mmWS": "mmH2O", "mWS": "mH2O",
        "hz": "Hz", "HZ": "Hz", "KHz": "kHz", "khz": "kHz", "RPM": "rpm", "Rpm": "rpm", "BPM": "bpm", "r": "rev_", "rev": "rev_", "revs": "rev_",
        "beats": "rev_", "beat": "rev_", "strokes": "rev_", "cycles": "rev_", "cpm": "rpm", "spm": "rpm",
        "LPM": "lpm", "GPM": "gpm", "usgpm": "gpm", "USgpm": "gpm", "USGPM": "gpm", "IGPM": "igpm", "gal": "gallon", "GAL": "gallon",
        "degc": "degC", "degf": "degF", "Celsius": "degC", "celsius": "degC", "Fahrenheit": "degF", "degrees": "deg", "degree": "deg",
        "dyn": "dyne", "dynes": "dyne", "kgf": "kilogram_force", "KG": "kg", "Kg": "kg",
    }
)  # fmt: skip
_LOWERED = str.maketrans("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "-0123456789")
_PRESSURES = r"(bar|mbar|psi|kPa|MPa|Pa|hPa|mmHg)"
# Products, powers and blanks as people write them: 'm3/h', 'mL min-1', 'cm.s-1', 'L per min', 'mm Hg', 'US gpm'.
_FORMS = (
    (re.compile(r"\bmm\s+Hg\b", re.IGNORECASE), "mmHg"),
    (re.compile(r"\bUS\s+(?=gpm|gal)", re.IGNORECASE), ""),
    (re.compile(r"\bimp(?:erial)?\.?\s+gpm\b", re.IGNORECASE), "igpm"),
    (re.compile(r"\bimp(?:erial)?\.?\s+(?=gal)", re.IGNORECASE), "imperial_"),
    (re.compile(r"\b([cm]?)m\s+H2O\b"), r"\1mH2O"),
    (re.compile(r"\bdegrees?\s+(?=celsius|fahrenheit)", re.IGNORECASE), ""),
    (re.compile(r"\s+per\s+"), "/"),
    (re.compile(r"^(mPa|Pa)-s$"), r"\1*s"),
    (re.compile(r"(?<![A-Za-z0-9^])(m|cm|mm|dm|um|ft|in|s|min|h|sec|L|l|ml|mL|M|MM|CM)(-?[1-5])(?![A-Za-z0-9])"), r"\1^\2"),
    (re.compile(r"(?<=[A-Za-z0-9])\s*[.]\s*(?=[A-Za-z])"), "*"),
    (re.compile(r"(?<=[A-Za-z0-9])\s+(?=[A-Za-z])"), "*"),
    (re.compile(r"(?<![A-Za-z0-9^])M(?=\^[23])"), "m"),
)
_WHOLE = MappingProxyType({"1/min": "rpm", "min^-1": "rpm", "/min": "rpm", "U/min": "rpm", "1/s": "1/s", "/s": "1/s"})
_BRACKET = re.compile(rf"^{_PRESSURES}\s*[(_\[]?\s*(?P<kind>g|a|abs|absolute|gauge)\.?\s*[)\]]?$", re.IGNORECASE)


def reference_of(text: str) -> tuple[str, str]:
    """Split 'bar(g)', 'barg', 'bar a', 'psig', 'kPa abs' into the unit and "gauge" or "absolute"; "" where nothing is said.

    >>> reference_of("bar(g)"), reference_of("psia"), reference_of("bar"), reference_of("MPa")
    (('bar', 'gauge'), ('psi', 'absolute'), ('bar', ''), ('MPa', ''))
    """
    match = _BRACKET.match(text)
    if match is None:
        return text, ""
    return match[1], "gauge" if match["kind"].lower().startswith("g") else "absolute"


def spelled(text: str) -> str:
    """Return the registry's spelling of a unit that a person typed.

    >>> [spelled(t) for t in ("mL·min⁻¹", "dyn/cm²", "mPa.s", "US gpm", "r/min", "m3/h")]
    ['mL*min^-1', 'dyne/cm^2', 'mPa*s', 'gpm', 'rpm', 'm^3/h']
    """
    for typed, read in _SIGNS.items():
        text = text.replace(typed, read)
    text = re.sub(r"[⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+", lambda power: "^" + power.group().translate(_LOWERED), text).strip().rstrip(".")
    for form, plain in _FORMS:
        text = form.sub(plain, text)
    text = _WHOLE.get(text, text)
    # Only whole words are replaced: 'ml' inside 'ml/min', never inside another word.
    text = re.sub(r"[A-Za-z_][A-Za-z0-9_]*", lambda word: _WORDS.get(word.group(), word.group()), text)
    text = re.sub(r"\brev_\s*/\s*min\b|\brev_\s*\*?\s*min\^-1", "rpm", text)
    text = re.sub(r"\brev_\s*/\s*s\b|\brev_\s*\*?\s*s\^-1", "Hz", text)
    return _WORDS.get(text, text)


_PRINTED = (("percent_", "%"), ("degC", "°C"), ("degF", "°F"), ("gallon", "gal"), ("dyne", "dyn"), ("kilogram_force", "kgf"), ("**", "^"))
_POWERS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


def pretty(text: str, reference: str = "") -> str:
    """Write a registry spelling as it is printed: mPa·s, m³/h, µm, bar(g).

    >>> pretty("mPa*s"), pretty("mL*min^-1"), pretty("bar", "gauge")
    ('mPa·s', 'mL·min⁻¹', 'bar(g)')
    """
    for read, printed in _PRINTED:
        text = text.replace(read, printed)
    text = re.sub(r"\^\(?(-?\d+)\)?", lambda power: power[1].translate(_POWERS), text)
    text = re.sub(r"\bdeg\b", "°", text)
    text = re.sub(r"\bu(?=[msLVAlg]\b)", "µ", text)
    text = re.sub(r"\s*\*\s*", "·", text)
    if text == "psi" and reference:
        return f"psi{reference[0]}"
    return text + {"gauge": "(g)", "absolute": "(a)"}.get(reference, "")
