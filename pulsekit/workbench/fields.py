"""The fields of the givens: what stands in each, in words that the page shows. Common to all workbenches."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from typing import TYPE_CHECKING, Any

from ..case.case import read_given
from ..case.schema import key_of
from ..errors import InputError, PulsekitError
from ..quantities import DIMENSIONS, from_si

if TYPE_CHECKING:
    from .desk import DeskState

__all__ = ["choice_field", "flag_field", "group", "joined", "label_of", "quantity_field", "slider_of", "split", "text_field", "value_of"]

_PLUS_MINUS = re.compile(r"\s*(?:±|\+/-|\+-)\s*")


def value_of(key: str, text: Any) -> Any:
    """Value that a case holds for the text of a field; None for an empty one.

    Raises
    ------
    InputError
        If a whole number, a number or true/false was expected.

    >>> value_of("cycles.harmonics", " 12 "), value_of("cycles.leave_out", "3, 5"), value_of("tube.radius", "")
    (12, [3, 5], None)
    """
    taken = key_of(key)
    if not isinstance(text, str):
        return text
    bare = text.strip()
    if not bare:
        return None
    takes = taken.takes if taken else "text"
    if takes == "whole":
        return _number(key, bare, int, "a whole number")
    if takes == "number":
        return _number(key, bare, float, "a number")
    if takes == "flag":
        if bare.lower() not in ("true", "false", "yes", "no"):
            raise InputError(f"{key} = {bare!r} must be yes or no", name=key, value=bare, allowed="yes, no")
        return bare.lower() in ("true", "yes")
    if takes == "list":
        parts = [part.strip() for part in re.split(r"[,;]", bare) if part.strip()]
        return [_number(key, part, int, "a list of whole numbers") for part in parts] if taken and taken.dimension == "whole" else parts
    return bare


def _number(key: str, text: str, kind: type, expected: str) -> Any:
    try:
        return kind(text)
    except ValueError as problem:
        raise InputError(f"{key} = {text!r} must be {expected}", name=key, value=text, allowed=expected) from problem


def split(text: str) -> tuple[str, str]:
    """Value and uncertainty of a text.

    >>> split("3.1 mm ± 0.1 mm (k=2)"), split("0.45")
    (('3.1 mm', '0.1 mm (k=2)'), ('0.45', ''))
    """
    parts = _PLUS_MINUS.split(text, maxsplit=1)
    return parts[0].strip(), parts[1].strip() if len(parts) > 1 else ""


def joined(value: str, spread: str) -> str:
    """Text of a value with its uncertainty; an uncertainty typed with the value wins.

    >>> joined("3.1 mm", "5 %"), joined("3.1 mm ± 1 %", "5 %"), joined("", "5 %")
    ('3.1 mm ± 5 %', '3.1 mm ± 1 %', '')
    """
    if not value.strip() or not spread.strip() or _PLUS_MINUS.search(value):
        return value.strip()
    return f"{value.strip()} ± {spread.strip()}"


def label_of(key: str) -> str:
    """A key's last word as a label.

    >>> label_of("tube.distance_from_inlet")
    'Distance from inlet'
    """
    words = key.rsplit(".", 1)[-1].replace("_", " ")
    return words[:1].upper() + words[1:]


def group(name: str, title: str, items: Iterable[Mapping[str, Any]], *, opened: bool = True) -> dict[str, Any]:
    """A titled group of fields; one that holds a message is shown open."""
    rows = [dict(item) for item in items]
    return {"id": name, "title": title, "items": rows, "open": opened or any(row.get("error") for row in rows)}


def _common(state: DeskState, key: str, kind: str, label: str, hint: str) -> dict[str, Any]:
    taken = key_of(key)
    return {
        "type": kind, "key": key, "label": label or label_of(key), "help": taken.help if taken else "", "hint": hint,
        "error": state.errors.get(key, ""),
    }  # fmt: skip


def text_field(state: DeskState, key: str, label: str = "", *, hint: str = "") -> dict[str, Any]:
    """A field of plain text, of a whole number or of a list."""
    return _common(state, key, "text", label, hint) | {"value": state.text_of(key)}


def flag_field(state: DeskState, key: str, label: str = "", *, unset: str = "not stated") -> dict[str, Any]:
    """Yes, no, or not stated."""
    options = [["", unset], ["true", "yes"], ["false", "no"]]
    return _common(state, key, "choice", label, "") | {"value": state.text_of(key), "options": options}


def choice_field(
    state: DeskState, key: str, label: str = "", *, options: Sequence[Sequence[str]] | None = None, unset: str = "choose"
) -> dict[str, Any]:
    """One of several; the choices of the key if none are given. What stands in the case is always among them."""
    taken = key_of(key)
    rows = (
        [list(row) for row in options]
        if options is not None
        else [[word, word.replace("_", " ")] for word in (taken.choices if taken else ())]
    )
    present = state.text_of(key)
    if present and present not in [row[0] for row in rows]:
        rows.append([present, f"{present} (not found)"])
    return _common(state, key, "choice", label, "") | {"value": present, "options": [["", unset], *rows]}


def quantity_field(
    state: DeskState,
    key: str,
    label: str = "",
    *,
    hint: str = "",
    spread: bool = True,
    slider: bool = False,
    derived: str = "",
) -> dict[str, Any]:
    """A value with its unit and standard uncertainty, its SI value underneath, perhaps with a slider.

    ``derived`` is shown, grey, where the key itself is not in the case.
    """
    text = state.text_of(key)
    value, plus_minus = split(text) if spread else (text, "")
    row = _common(state, key, "quantity", label, hint) | {
        "value": value,
        "derived": derived if not value else "",
        "has_spread": spread,
        "spread": plus_minus,
        "si": si_text(state, key),
    }
    if slider:
        row["slider"] = slider_of(state, key, derived)
    return row


def si_text(state: DeskState, key: str) -> str:
    """SI value of a key in words; "" where there is none."""
    if key in state.refused or state.case.get(key) is None:
        return ""
    try:
        given = state.case.given(key)
    except PulsekitError:
        return ""
    unit = str(DIMENSIONS.get(given.dimension or "", ""))
    if given.unit in (unit, "") or given.dimension in ("ratio", None, ""):
        return ""
    return f"{given.value:.5g} {unit}".replace("e-0", "e-").replace("*", "·").strip()


def slider_of(state: DeskState, key: str, derived: str = "") -> dict[str, Any] | None:
    """Ends, step and place of a slider in the unit that was typed (or of the derived text); None while there is no number."""
    if state.case.get(key) is None and not derived:
        return None
    try:
        given = state.case.given(key) if state.case.get(key) is not None else read_given(key, derived)
        number = float(from_si(given.value, given.unit)) if given.unit else given.value
    except PulsekitError:
        return None
    low, high = state.bounds.get(key, (0.0, 0.0))
    if not low <= number <= high:
        low, high = _round(0.5 * number), _round(2.0 * number)
        state.bounds[key] = (low, high)
    return {"low": low, "high": high, "step": _round((high - low) / 300), "at": number, "unit": given.unit}


def _round(number: float) -> float:
    """One or two leading digits, so that a slider's ends and steps read well."""
    return float(f"{number:.2g}") if number >= 1 else float(f"{number:.1g}")
