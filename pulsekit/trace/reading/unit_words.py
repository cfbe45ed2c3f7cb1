"""Units as people write them in headers: which text is a unit, and which is only part of a name."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache

from ...errors import UnitError
from ...quantities import parse_unit, unit_dimension

__all__ = ["NO_UNIT", "HeaderUnit", "read_unit", "split_header"]

_ATOMS = frozenset(
    [
        "m",
        "mm",
        "cm",
        "dm",
        "km",
        "um",
        "nm",
        "µm",
        "μm",
        "in",
        "inch",
        "ft",
        "s",
        "sec",
        "secs",
        "ms",
        "msec",
        "us",
        "µs",
        "μs",
        "ns",
        "min",
        "mins",
        "h",
        "hr",
        "d",
        "L",
        "l",
        "mL",
        "ml",
        "dL",
        "dl",
        "cL",
        "uL",
        "µL",
        "μL",
        "ul",
        "cc",
        "ccm",
        "gal",
        "Pa",
        "hPa",
        "kPa",
        "MPa",
        "GPa",
        "mPa",
        "bar",
        "mbar",
        "psi",
        "psig",
        "psia",
        "barg",
        "bara",
        "mmHg",
        "cmH2O",
        "cmH20",
        "mmH2O",
        "inHg",
        "torr",
        "Torr",
        "atm",
        "dyn",
        "dyne",
        "N",
        "kN",
        "mN",
        "g",
        "kg",
        "mg",
        "V",
        "mV",
        "uV",
        "µV",
        "μV",
        "kV",
        "A",
        "mA",
        "uA",
        "µA",
        "K",
        "degC",
        "degF",
        "°C",
        "°F",
        "ºC",
        "℃",
        "rpm",
        "RPM",
        "bpm",
        "gpm",
        "lpm",
        "GPM",
        "LPM",
        "P",
        "cP",
        "cp",
        "St",
        "cSt",
        "cst",
        "rad",
        "deg",
        "°",
        "W",
        "kW",
        "J",
        "Hz",
        "hz",
        "kHz",
        "MHz",
        "%",
        "H2O",
        "Hg",
        "mmhg",
        "MMHG",
        "mmHG",
        "kpa",
        "Kpa",
        "KPa",
        "KPA",
        "pa",
        "PA",
        "hz",
        "HZ",
        "Bar",
        "BAR",
        "PSI",
        "Psi",
        "Min",
        "rev",
        "r",
        "mPas",
        "Pas",
    ]
)
#: Single words that are also endings of names: 'p_in', 'q_m', 'v_min', 'flow_a' carry no unit.
_DOUBTFUL_ENDINGS = frozenset(
    [
        "in",
        "inch",
        "m",
        "h",
        "hr",
        "d",
        "a",
        "A",
        "g",
        "K",
        "P",
        "N",
        "r",
        "l",
        "L",
        "W",
        "J",
        "min",
        "s",
        "ft",
        "V",
        "deg",
        "rad",
        "km",
        "St",
        "cp",
        "gal",
        "secs",
        "rev",
        "H2O",
        "Hg",
        "dyn",
    ]
)
_TIME_ENDINGS = frozenset(["s", "sec", "secs", "ms", "msec", "us", "µs", "μs", "ns", "min", "mins", "h"])
_TIME_LIKE = re.compile(
    r"(?i)^\W*(elapsed|rel\w*|abs\w*|sample|trigger)?[\s_.-]*(t|time|times|timestamp|zeit|temps|tiempo|tempo|tid|tijd|sec|seconds?|clock)\b"
)
_CAPITALS = {
    "ML": "mL", "L": "L", "UL": "uL", "MIN": "min", "SEC": "s", "S": "s", "MS": "ms", "US": "us", "CM": "cm", "MM": "mm", "M": "m", "MMHG": "mmHg", "CMH2O": "cmH2O",
    "KPA": "kPa", "PA": "Pa", "BAR": "bar", "MBAR": "mbar", "PSI": "psi", "HZ": "Hz", "CC": "cc", "V": "V", "A": "A", "RPM": "rpm", "LPM": "lpm", "GPM": "gpm", "H": "h",
    "DEGC": "degC",
}  # fmt: skip
#: What stands for "no unit".
NO_UNIT = frozenset(
    {
        "",
        "-",
        "--",
        "1",
        "a.u.",
        "a.u",
        "au",
        "arb",
        "arb.",
        "arb. unit",
        "arb. units",
        "n/a",
        "none",
        "no unit",
        "[-]",
        "counts",
        "count",
        "raw",
        "adc",
        "lsb",
        "#",
        "–",
        "—",
        "unitless",
        "bool",
    }
)
_NO_UNIT_IN_ROUND = NO_UNIT - {"1", "raw", "adc", "#", "none", "bool", "n/a", ""}
_BRACKETS = re.compile(r"^(?P<name>.*?)\s*(?:\((?P<a>.*)\)|\[(?P<b>.*)\]|\{(?P<c>.*)\}|<(?P<d>[^<>]*)>)\s*[.:;]*$", re.DOTALL)


@dataclass(frozen=True)
class HeaderUnit:
    """A unit as it stands in the file and as it was read; ``problem`` if it could not be."""

    text: str = ""  # as written
    unit: str = ""  # as the registry reads it; "" if none
    dimension: str | None = None
    problem: str = ""
    remark: str = ""


def _tidy(text: str) -> str:
    """Bring spellings of products and powers to one form: 'mL min-1', 'cm.s-1', 'm3 per s', 'mm Hg'."""
    text = " ".join(text.split()).replace("−", "-").replace("⁻", "^-").replace("^-¹", "^-1").replace("^-²", "^-2").replace("^-³", "^-3")
    text = re.sub(r"(?i)\bmm\s+Hg\b", "mmHg", text)
    text = re.sub(r"(?i)\b(c|m)m\s+H2O\b", r"\1mH2O", text)
    text = re.sub(r"\s+per\s+|\bper\b", "/", text)
    text = re.sub(r"\b(bar|psi|kPa|MPa|mbar|Pa)[\s_]+(a|g)(?:bs|bsolute|auge)?\.?$", r"\1(\2)", text)
    text = text.replace("**", "^")
    text = re.sub(r"(?<![A-Za-z0-9^])(m|cm|mm|dm|um|µm|μm|ft|in|s|min|h|sec|L|l|ml|mL)(-?[1-4])(?![A-Za-z0-9])", r"\1^\2", text)
    text = re.sub(r"(?<=[A-Za-z0-9])\s*[.·⋅∙•×*]\s*(?=[A-Za-zµμ°])", "*", text)
    text = re.sub(r"(?<=[A-Za-z0-9])\s+(?=[A-Za-zµμ]+\^-)", "*", text)
    return re.sub(r"\s*/\s*", "/", text)


def _atoms(text: str) -> list[str]:
    bare = re.sub(r"\^?-?\d+$|\^-?\d+|[²³⁻¹]", "", text)
    return [part for part in re.split(r"[\s/*()^]+|(?<=\D)-?\d+(?![A-Za-z])", bare) if part and not part.lstrip("-").isdigit()]


def _trade_unit(text: str) -> bool:
    """Tell whether every word of it is a unit that the trade uses."""
    bare = re.sub(r"\(\s*(g|a|abs|gauge|absolute)\s*\)$", "", text.strip(), flags=re.IGNORECASE)
    atoms = _atoms(bare.replace("H2O", "Hwater"))
    atoms = [atom.replace("Hwater", "H2O") for atom in atoms]
    return bool(atoms) and all(atom in _ATOMS for atom in atoms)


@lru_cache(maxsize=4096)
def read_unit(text: str, name: str = "") -> HeaderUnit:
    """Read a unit as written; a problem is kept, to be raised when the column is asked for.

    >>> read_unit("mL min-1").dimension, read_unit("m3/h").dimension, read_unit("foo/min").problem != ""
    ('flow_rate', 'flow_rate', True)
    """
    written = text.strip()
    if written.casefold() in NO_UNIT:
        return HeaderUnit(text=written)
    if len(written) > 40:
        return HeaderUnit(text=written, problem="this is too long for a unit")
    if written in ("mpa", "MPA", "Mpa") or re.match(r"^(mpa|MPA|Mpa)\b", written):
        return HeaderUnit(text=written, problem=f"unit {written!r} may mean MPa or mPa: tell it with units=")
    tidy = _tidy(written)
    if tidy in ("C", "F", "deg") and re.search(r"(?i)temp|\bT\b|_T|^T", name):
        return HeaderUnit(
            text=written, unit={"C": "°C", "F": "°F"}.get(tidy, tidy), dimension="temperature", remark=f"unit {written!r} read as °{tidy}."
        )
    tidy = {"mPas": "mPa*s", "Pas": "Pa*s"}.get(tidy, tidy)
    remark = ""
    if not _trade_unit(tidy) and tidy.upper() == tidy and any(letter.isalpha() for letter in tidy):
        lower = re.sub(r"[A-Z][A-Z0-9]*(?<![0-9])|[A-Z]+2O", lambda m: _CAPITALS.get(m.group(), m.group()), tidy)
        if _trade_unit(lower):
            tidy, remark = lower, f"unit {written!r} read as {lower}."
    try:
        parse_unit(tidy)
        dimension = unit_dimension(tidy)
    except (UnitError, ArithmeticError, TypeError, ValueError, AttributeError):
        return HeaderUnit(
            text=written,
            problem=f"unit {written!r} is not known; write it as in 'mL/min', 'cm/s', 'mmHg', 'kPa', 'ms', or tell it with units=",
        )
    if dimension is None or (not _trade_unit(tidy) and dimension == "ratio"):
        return HeaderUnit(
            text=written, unit="", dimension=None, remark=f"unit {written!r} is none that is used here: values stay as written."
        )
    return HeaderUnit(text=written, unit=written if _same(written, tidy) else tidy, dimension=dimension, remark=remark)


def _same(written: str, tidy: str) -> bool:
    try:
        return parse_unit(written) == parse_unit(tidy) or unit_dimension(written) == unit_dimension(tidy)
    except (UnitError, ArithmeticError, TypeError, ValueError, AttributeError):
        return False


def split_header(header: str) -> tuple[str, str | None, str]:
    """Part a header into name and unit; the third is a remark if the unit was guessed from an ending.

    >>> split_header("flow (mL/min)")[:2], split_header("p/kPa")[:2], split_header("v_cm_s")[:2], split_header("p_in")[:2]
    (('flow', 'mL/min'), ('p', 'kPa'), ('v', 'cm/s'), ('p_in', None))
    """
    header = " ".join(header.split())
    if match := _BRACKETS.match(header):
        name = match["name"].rstrip(" ,;:-/_").strip()
        inside = next(part for part in (match["a"], match["b"], match["c"], match["d"]) if part is not None)
        if match["d"] is not None and not _trade_unit(_tidy(inside)):
            return header, None, ""
        if match["a"] is not None and name.endswith("/"):
            name = name[:-1].rstrip()
        if inside.strip().casefold() in (_NO_UNIT_IN_ROUND if match["a"] is not None else NO_UNIT):
            return name or header, "", ""
        if re.fullmatch(r"[hmsdyHMSDYf:./ 0-]*:[hmsdyHMSDYf:./ 0-]*", inside):  # 'time (hh:mm:ss)'
            return name or header, "", ""
        if not name:
            return (header, inside, "") if _known(inside) else (header, None, "")
        if _known(inside, name) or match["b"] is not None or re.search(r"[/²³·%°^µ]", inside):
            return name, inside, ""
        if match["a"] is not None and _known(f"{name.rsplit(' ', 1)[-1]}({inside})") and " " in name:  # 'pressure bar(g)'
            head, tail = name.rsplit(" ", 1)
            return head, f"{tail}({inside})", ""
        return header, None, ""
    return _split_bare(header)


def _known(text: str, name: str = "") -> bool:
    unit = read_unit(text, name)
    if unit.problem:
        return "may mean" in unit.problem
    return unit.dimension is not None and (_trade_unit(_tidy(text)) or bool(unit.remark) or "°" in unit.unit or unit.unit != unit.text)


def _split_bare(header: str) -> tuple[str, str | None, str]:
    for mark in (", ", "; ", ": ", " in ", " - "):
        head, found, tail = header.rpartition(mark)
        if found and head.strip() and _known(tail):
            return head.strip(), tail.strip(), ""
    if header.casefold() == "n/a":
        return header, None, ""
    if "/" in header and ("_" in header or " " in header):
        name, unit, remark = _split_ending(header)
        if unit is not None:
            return name, unit, remark
    head, found, tail = header.partition("/")
    if found and head.strip() and " " not in head.strip() and _known(tail.strip().strip("()")) and not _known(header):
        return head.strip(), tail.strip().removeprefix("(").removesuffix(")"), ""
    if _known(header) and "/" in header:
        return header, header, ""
    return _split_ending(header)


def _split_ending(header: str) -> tuple[str, str | None, str]:
    """Units at the end of a name: 'flow_ml_min', 'time_ms', 'pressure mmHg', 'q_l_per_min'."""
    parts = re.split(r"[_\s]+", header)
    timely = bool(_TIME_LIKE.match(re.sub(r"_", " ", header)))
    for count in (3, 2, 1):
        if len(parts) <= count:
            continue
        tail = parts[-count:]
        name = "_".join(parts[:-count]) if "_" in header else " ".join(parts[:-count])
        if count == 3 and tail[1] != "per":
            continue
        if count == 3:
            tail = [tail[0], tail[2]]
        text = "/".join(tail)
        if count == 2 and re.fullmatch(r"[A-Za-z]+(-|−|\^-|⁻)[1-3¹²³]", tail[1]) and _known(" ".join(tail)):
            text = " ".join(tail)
        elif count == 1:
            word = tail[0]
            endings = "/" in word or "^" in word or word not in _DOUBTFUL_ENDINGS or (timely and word in _TIME_ENDINGS)
            if not endings:
                continue
        elif tail[1] not in ("s", "min", "sec", "h", "cm2", "m") or not all(re.sub(r"[23]$", "", part) in _ATOMS for part in tail):
            continue
        if count == 2 and tail[0] in ("p", "P", "A", "in", "r", "g", "K", "d"):
            continue
        if _known(text):
            return name, text, f"unit {text} of column {name!r} taken from the ending of its header {header!r}."
    return header, None, ""
