"""What a cell of text is: a number, nothing, a word for a missing value, a time, or plain text."""

from __future__ import annotations

import re
from functools import lru_cache

__all__ = ["BLANK", "CLOCK", "MISSING", "NUMBER", "OVERFLOW", "TEXT", "classify", "is_comment", "number", "plain", "suffix_of"]

BLANK, NUMBER, MISSING, OVERFLOW, CLOCK, TEXT = "blank", "number", "missing", "overflow", "clock", "text"

_MISSING = frozenset(
    [
        "nan",
        "n/a",
        "#n/a",
        "#n/a!",
        "#na",
        "na",
        "null",
        "none",
        "nil",
        "missing",
        "--",
        "---",
        "----",
        "-",
        "–",
        "—",
        ".",
        "..",
        "?",
        "??",
        "nd",
        "n.d.",
        "n.a.",
        "#div/0!",
        "#ref!",
        "#value!",
        "#num!",
        "#name?",
        "#null!",
        "<na>",
        "nat",
        "1.#qnan",
        "-1.#ind",
        "1.#ind",
        "-1.#qnan",
        "nan(ind)",
        "-nan",
        "-nan(ind)",
        "+nan",
        "not_a_number",
        "invalid",
        "bad",
        "error",
        "err",
        "fault",
        "void",
        "empty",
        "blank",
        "lost",
        "dropout",
        "off",
        "no_signal",
        "noread",
    ]
)
_OVERFLOW = frozenset(
    [
        "inf",
        "+inf",
        "-inf",
        "infinity",
        "+infinity",
        "-infinity",
        "1.#inf",
        "-1.#inf",
        "ol",
        "-ol",
        "+ol",
        "o.l.",
        "o.l",
        "over",
        "overflow",
        "ovf",
        "ovl",
        "ovld",
        "overrange",
        "overload",
        "over-range",
        "out-of-range",
        "overld",
        "+over",
        "-over",
        "under",
        "underflow",
        "underrange",
        "underload",
        "sat",
        "saturated",
        "clip",
        "clipped",
        "hi",
        "lo",
        "high",
        "low",
        "####",
        "****",
        "*****",
        "#####",
        "######",
        "******",
        "###",
        "+ovf",
        "-ovf",
        ">max",
        "<min",
        "ovrflow",
    ]
)
_BEYOND = re.compile(r"^[<>≤≥]=?\s*[+-]?[\d.,]+$")
_STARS = re.compile(r"^[*#]{2,}$")
_DECIMAL = {
    ".": re.compile(r"^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eEdD][+-]?\d+)?$"),
    ",": re.compile(r"^[+-]?(?:\d+,?\d*|,\d+)(?:[eEdD][+-]?\d+)?$"),
}
_GROUPED = {
    ".": re.compile(r"^[+-]?[1-9]\d{0,2}(?:(?P<mark>[,' ’_])\d{3})(?:(?P=mark)\d{3})*(?:\.\d*)?$"),
    ",": re.compile(r"^[+-]?[1-9]\d{0,2}(?:(?P<mark>[.' ’])\d{3})(?:(?P=mark)\d{3})*(?:,\d*)?$"),
}
_CLOCKS = (
    re.compile(r"^\d{1,3}:\d{2}(?::\d{2})?(?:[.,]\d{1,9})?(?:\s*[AaPp]\.?[Mm]\.?)?$"),
    re.compile(r"^\d{1,2}:\d{2}:\d{2}[:;]\d{1,6}$"),
    re.compile(
        r"^\d{4}[-/.]\d{1,2}[-/.]\d{1,2}(?:[T\s_,]+\d{1,2}:\d{2}(?::\d{2})?(?:[.,]\d{1,9})?\s*(?:[AaPp][Mm]|Z|UTC|[+-]\d{2}:?\d{2}|[+-]\d{2})?)?$"
    ),
    re.compile(r"^\d{1,2}[-/.]\d{1,2}[-/.](?:\d{4}|\d{2})(?:[T\s_,]+\d{1,2}:\d{2}(?::\d{2})?(?:[.,]\d{1,9})?\s*(?:[AaPp]\.?[Mm]\.?)?)?$"),
    re.compile(r"^\d{1,2}[-\s][A-Za-z]{3,9}\.?[-\s]\d{2,4}(?:\s+\d{1,2}:\d{2}(?::\d{2})?(?:[.,]\d{1,9})?)?$"),
    re.compile(r"^\d{8}T\d{6}(?:[.,]\d{1,9})?(?:Z|[+-]\d{2}:?\d{2})?$"),
)
_SUFFIX = re.compile(r"^(?P<number>[+-]?[\d.,]*\d(?:[eE][+-]?\d+)?)\s*(?P<suffix>[^\d\s.,+-][^\d]{0,11}(?:[²³]|\^?-?\d)?)$")
_SWAPS = str.maketrans({"−": "-", "–": "-", "\u00a0": " ", "\u202f": " ", "\u2009": " ", "\u2007": " ", "’": "'", "\ufeff": ""})
_COMMENT = ("#", "%", "//", "!", "*", ";;", "--")


def plain(cell: str) -> str:
    """Strip blanks and quotes; bring minus signs and narrow blanks to one form."""
    cell = cell.strip()
    if len(cell) >= 2 and cell[0] == cell[-1] == '"':
        cell = cell[1:-1].strip()
    return cell if cell.isascii() else cell.translate(_SWAPS).strip()


@lru_cache(maxsize=65_536)
def classify(cell: str, decimal: str | None = None) -> str:
    """Tell what a cell is under a decimal mark (None: under either).

    >>> [classify(text) for text in ("1.5", "", "NaN", "OL", "12:30:05", "flow")]
    ['number', 'blank', 'missing', 'overflow', 'clock', 'text']
    """
    text = plain(cell)
    if not text:
        return BLANK
    if text[0].isdigit() or text[0] in "+-.,":
        for mark in (decimal,) if decimal else (".", ","):
            if _DECIMAL[mark].match(text) or _GROUPED[mark].match(text):
                return NUMBER
    folded = text.casefold()
    if folded in _MISSING:
        return MISSING
    if folded in _OVERFLOW or _BEYOND.match(text) or _STARS.match(text):
        return OVERFLOW
    if text[0].isdigit() and len(text) <= 40 and any(pattern.match(text) for pattern in _CLOCKS):
        return CLOCK
    return TEXT


def number(cell: str, decimal: str) -> float:
    """Return the number that a cell stands for, or NaN; the decimal mark is settled.

    >>> number("1.234,5", ","), number("1e3", "."), number("2.5D+01", ".")
    (1234.5, 1000.0, 25.0)
    """
    text = plain(cell)
    if _DECIMAL[decimal].match(text):
        return float(
            text.replace(decimal, ".").replace("D", "e").replace("d", "e") if decimal == "," or "D" in text or "d" in text else text
        )
    if match := _GROUPED[decimal].match(text):
        return float(text.replace(match["mark"], "").replace(decimal, "."))
    return float("nan")


def suffix_of(cell: str) -> tuple[str, str] | None:
    """Part '12.3 mL/min' into number and unit, or None."""
    match = _SUFFIX.match(plain(cell))
    return (match["number"], match["suffix"].strip()) if match else None


def is_comment(line: str) -> bool:
    """Tell whether a line is marked as a comment (a first cell '#N/A' or '--' is no such mark)."""
    text = line.lstrip()
    if not text.startswith(_COMMENT):
        return False
    first = re.split(r"[\s,;|]", text, maxsplit=1)[0]
    return classify(first) not in (MISSING, OVERFLOW)
