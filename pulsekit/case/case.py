"""The question as one value: a case holds exactly what its TOML file says, and gives each given its meaning."""

from __future__ import annotations

import copy
import math
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from ..errors import CaseError, InputError, UnitError
from ..quantities import DIMENSIONS, Given, parse_given, to_si
from .schema import KEYS, Key, key_of, nearest, plain_key, sections_of

__all__ = ["Case", "PumpLineCase", "WallShearCase", "make_case"]


@dataclass(frozen=True, eq=False, init=False)
class Case:
    """A question with all that is needed to answer it.

    A dotted key reaches each key of the case file (``tube.radius``, ``element.0.length``); `with_value` and
    `without` return a changed case.

    Parameters
    ----------
    data : mapping, optional
        The keys of the case file, sections as nested mappings, values as they are written there.
    folder : path
        Relative names of recordings start here.
    path : path, optional
        Of the case file, for errors.
    **sections
        Sections by name, in place of or beside ``data``; ``recording`` may be just the name of a file.

    Raises
    ------
    CaseError, InputError
        If a key does not exist or its value is not acceptable.

    Examples
    --------
    >>> case = WallShearCase(recording="run12.csv", tube={"radius": "3.1 mm ± 5 %"})
    >>> case.given("tube.radius").value
    0.0031
    >>> case.with_value("tube.radius", "3.2 mm").get("tube.radius")
    '3.2 mm'
    """

    data: Mapping[str, Any]
    folder: Path
    path: Path | None

    kind = ""

    def __init__(
        self, data: Mapping[str, Any] | None = None, folder: str | Path = ".", path: Path | None = None, **sections: Any
    ) -> None:  # fmt: skip
        object.__setattr__(self, "path", path)
        data = {name: plain_value(value) for name, value in {**(data or {}), **sections}.items()}
        if isinstance(data.get("recording"), str):
            data["recording"] = {"file": data["recording"]}
        stated = data.setdefault("kind", self.kind)
        if stated != self.kind:
            raise CaseError(f"kind = {stated!r} does not belong to a case of kind {self.kind!r}", key="kind", value=stated, path=self.path)
        ordered = {"kind": data.pop("kind")} | data
        _check_table(ordered, "", self.kind, self.path)
        object.__setattr__(self, "data", ordered)
        object.__setattr__(self, "folder", Path(folder))

    def to_dict(self) -> dict[str, Any]:
        """Return a copy of the keys as nested dicts and lists."""
        return copy.deepcopy(dict(self.data))

    def get(self, dotted: str, default: Any = None) -> Any:
        """Return the value of a dotted key as written, or ``default`` if it is not there."""
        place: Any = self.data
        for word in dotted.split("."):
            if isinstance(place, Mapping) and word in place:
                place = place[word]
            elif isinstance(place, (list, tuple)) and word.isdigit() and int(word) < len(place):
                place = place[int(word)]
            else:
                return default
        return copy.deepcopy(place) if isinstance(place, (dict, list)) else place

    def given(self, dotted: str, dimension: str | None = None) -> Given:
        """Return a dimensional value with its uncertainty.

        Raises
        ------
        CaseError
            If the key is missing.
        InputError
            If its value has another dimension or is out of bounds.
        """
        value = self.get(dotted)
        if value is None:
            raise self.missing(dotted)
        return read_given(dotted, value, dimension)

    def maybe(self, dotted: str, dimension: str | None = None) -> Given | None:
        """Return the given, or None if the key is not there."""
        return None if self.get(dotted) is None else self.given(dotted, dimension)

    def value(self, dotted: str, dimension: str | None = None) -> float | None:
        """Return the SI value, or None if the key is not there."""
        given = self.maybe(dotted, dimension)
        return None if given is None else given.value

    def missing(self, dotted: str) -> CaseError:
        """Return the error that asks for a key."""
        key = key_of(dotted)
        words = f" ({key.help})" if key else ""
        where = f"{self.path}: " if self.path else ""
        return CaseError(f"{where}{dotted}{words} is missing; add it to the case", key=dotted, path=self.path)

    def with_value(self, dotted: str, value: Any) -> Case:
        """Return the case with one key set; sections are made as needed.

        Raises
        ------
        CaseError, InputError
            If there is no such key or the value is not acceptable; the case stays as it was.
        """
        data = self.to_dict()
        words = dotted.split(".")
        place: Any = data
        for position, word in enumerate(words[:-1]):
            following = words[position + 1]
            if isinstance(place, list):
                place = place[_index(place, word, dotted)]
            else:
                place = place.setdefault(word, [] if following.isdigit() else {})
        last = words[-1]
        if isinstance(place, list):
            index = _index(place, last, dotted, grow=True)
            if index == len(place):
                place.append(value)
            else:
                place[index] = value
        elif isinstance(place, dict):
            place[last] = copy.deepcopy(value)
        else:
            raise CaseError(f"{dotted}: there is no table to put it in", key=dotted)
        return type(self)(data, self.folder, self.path)

    def without(self, dotted: str) -> Case:
        """Return the case with one key (or table) taken out; nothing happens if it is not there."""
        data = self.to_dict()
        words = dotted.split(".")
        place: Any = data
        for word in words[:-1]:
            if isinstance(place, list) and word.isdigit() and int(word) < len(place):
                place = place[int(word)]
            elif isinstance(place, dict) and word in place:
                place = place[word]
            else:
                return self
        if isinstance(place, list) and words[-1].isdigit() and int(words[-1]) < len(place):
            del place[int(words[-1])]
        elif isinstance(place, dict):
            place.pop(words[-1], None)
        return type(self)(data, self.folder, self.path)

    def to_toml(self) -> str:
        """Return the case as the text of its file."""
        import tomli_w

        return tomli_w.dumps(_ordered(self.data))

    def save(self, path: str | Path) -> Path:
        """Write the case file, whole or not at all; paths of recordings are rewritten to stay right from there."""
        from .files import save_case

        return save_case(self, path)

    def file_path(self, dotted: str) -> Path:
        """Path of a file that the case names."""
        name = self.get(dotted)
        if name is None:
            raise self.missing(dotted)
        return (self.folder / str(name)).expanduser()

    def __eq__(self, other: object) -> bool:
        return type(other) is type(self) and self.data == other.data and self.folder == other.folder  # type: ignore[attr-defined]

    def __hash__(self) -> int:
        return hash((self.kind, self.to_toml()))

    def __repr__(self) -> str:
        return f"<{type(self).__name__} {self.get('title') or 'untitled'!r}>"


class WallShearCase(Case):
    """The question of the wall shear in a tube."""

    kind = "wall shear"


class PumpLineCase(Case):
    """The question of the pulsation along a pump line."""

    kind = "pump line"


def make_case(data: Mapping[str, Any], *, folder: str | Path = ".", path: Path | None = None) -> Case:
    """Return the case of the kind that the data states."""
    kinds = {"wall shear": WallShearCase, "pump line": PumpLineCase}
    kind = data.get("kind")
    if kind not in kinds:
        stated = f"kind = {kind!r} is not one of" if kind is not None else "the case does not say its kind;"
        raise CaseError(f'{path or "the case"}: {stated} kind = "wall shear" or kind = "pump line"', key="kind", value=kind, path=path)
    return kinds[str(kind)](data, Path(folder), path)


def plain_value(value: Any) -> Any:
    """Return a value as a case file can hold it: plain copies, quantities and paths as text.

    >>> plain_value({"radius": Path("a") / "b.csv"})["radius"]
    'a/b.csv'
    """
    if isinstance(value, Mapping):
        return {str(name): plain_value(entry) for name, entry in value.items()}
    if isinstance(value, (list, tuple)):
        return [plain_value(entry) for entry in value]
    if isinstance(value, Path):
        return value.as_posix()
    if isinstance(value, Given):
        return value.text
    if hasattr(value, "magnitude") and hasattr(value, "units"):
        return f"{value.magnitude} {value.units}"
    if hasattr(value, "item") and getattr(value, "ndim", None) == 0:
        return value.item()
    return plain_value(value.tolist()) if hasattr(value, "tolist") else value


def _index(place: list[Any], word: str, dotted: str, *, grow: bool = False) -> int:
    if not word.isdigit() or int(word) > len(place) - (0 if grow else 1):
        raise CaseError(f"{dotted}: there is no entry {word}; there are {len(place)}, counted from 0", key=dotted)
    return int(word)


def _ordered(data: Mapping[str, Any]) -> dict[str, Any]:
    """Plain values before tables, so that the file reads from the top."""
    flat = {key: value for key, value in data.items() if not isinstance(value, (dict, list)) or _plain_list(value)}
    return flat | {key: value for key, value in data.items() if key not in flat}


def _plain_list(value: Any) -> bool:
    return isinstance(value, list) and not any(isinstance(entry, dict) for entry in value)


def _check_table(data: Mapping[str, Any], prefix: str, kind: str, path: Path | None) -> None:
    """Refuse keys that do not exist and values that a key cannot take, with the place and the remedy."""
    for name, value in data.items():
        dotted = f"{prefix}.{name}" if prefix else str(name)
        key = key_of(dotted)
        if prefix == "" and key is None:
            _check_section(name, value, kind, path)
        elif key is None:
            raise _unknown(dotted, prefix, path)
        elif key.takes == "table" and name in ("element", "end") and prefix:
            for index, entry in enumerate(value if isinstance(value, list) else [value]):
                _check_table(entry, f"{dotted}.{index}" if isinstance(value, list) else dotted, kind, path)
        else:
            check_value(dotted, value, key, path)


def _check_section(name: str, value: Any, kind: str, path: Path | None) -> None:
    known = [section.removesuffix("[]") for section in sections_of(kind)]
    where = f"{path}: " if path else ""
    if name not in known:
        choices = sorted({*known, *KEYS[""]})
        raise CaseError(f"{where}there is no section or key {name!r}; {nearest(name, choices)}", key=name, path=path)
    if isinstance(value, list):
        if f"{name}[]" not in sections_of(kind):
            raise CaseError(f"{where}[{name}] is one table, not a list of tables; write [{name}], not [[{name}]]", key=name, path=path)
        for index, entry in enumerate(value):
            if not isinstance(entry, Mapping):
                raise CaseError(f"{where}{name}.{index} must be a table", key=name, path=path)
            _check_table(entry, f"{name}.{index}", kind, path)
    elif isinstance(value, Mapping):
        if name not in sections_of(kind):
            raise CaseError(f"{where}{name} is a list of tables; write [[{name}]]", key=name, path=path)
        _check_table(value, name, kind, path)
    else:
        raise CaseError(f"{where}{name} = {value!r} must be a table; write [{name}]", key=name, value=value, path=path)


def _unknown(dotted: str, prefix: str, path: Path | None) -> CaseError:
    section = plain_key(f"{prefix}.x").rpartition(".")[0]
    known = sorted({*KEYS.get(section, {}), *KEYS.get(f"{section}[]", {})})
    where = f"{path}: " if path else ""
    word = dotted.rpartition(".")[2]
    return CaseError(f"{where}[{section}] has no key {word!r}; {nearest(word, known)}", key=dotted, path=path)


def check_value(dotted: str, value: Any, key: Key, path: Path | None = None) -> None:
    """Refuse a value that the key cannot take."""
    where = f"{path}: " if path else ""

    def refuse(expected: str) -> CaseError:
        return CaseError(f"{where}{dotted} = {value!r} must be {expected} ({key.help})", key=dotted, value=value, path=path, allowed=expected)

    if key.takes == "quantity":
        try:
            read_given(dotted, value)
        except InputError as problem:
            if path is None:
                raise
            kind = UnitError if isinstance(problem, UnitError) else CaseError
            raise kind(f"{where}{problem}", name=dotted, value=value) from problem
    elif key.takes == "text":
        if not isinstance(value, (str, int, float)) or isinstance(value, bool):
            raise refuse("text")
        if key.choices and str(value) not in key.choices:
            near = nearest(str(value), list(key.choices))
            raise CaseError(f"{where}{dotted} = {value!r} is not one of {', '.join(map(repr, key.choices))}; {near}", key=dotted, value=value, path=path)
    elif key.takes == "whole":
        if isinstance(value, bool) or not isinstance(value, int) or value < 0:
            raise refuse("a whole number")
    elif key.takes == "number":
        if isinstance(value, bool) or not isinstance(value, (int, float)) or not math.isfinite(value) or value <= 0:
            raise refuse("a number above 0")
    elif key.takes == "flag":
        if not isinstance(value, bool):
            raise refuse("true or false")
    elif key.takes == "list":
        if not isinstance(value, list):
            raise refuse("a list, as in [1, 2]")
        for entry in value:
            if key.dimension == "whole":
                if isinstance(entry, bool) or not isinstance(entry, int) or entry < 1:
                    raise refuse("a list of whole numbers from 1")
            else:
                to_si(entry, key.dimension, dotted)
    elif key.takes == "table" and not isinstance(value, Mapping):
        raise refuse("a table")


def read_given(dotted: str, value: Any, dimension: str | None = None) -> Given:
    """Read the value of a key as a given, with the bounds of the key."""
    key = key_of(dotted)
    wanted = dimension or (key.dimension if key else "ratio")
    if wanted == "length or tube":
        if value == "tube":
            return Given(value=0.0, text="tube", dimension="length")
        wanted = "length"
    if wanted == "viscosity or kinematic_viscosity":
        wanted = _which_viscosity(dotted, value)
    if wanted == "signal":
        wanted = _dimension_of_text(dotted, value)
    if dotted.endswith("haematocrit") and not isinstance(value, str) and isinstance(value, (int, float)) and 1 < float(value) <= 100:
        raise InputError(
            f'{dotted} = {value!r}: per cent or fraction? Write {float(value) / 100:g} or "{value:g} %"', name=dotted, value=value, allowed="0 to 1"
        )
    given = parse_given(value, wanted, dotted)
    if key and key.sign == "positive" and not given.value > 0:
        raise InputError(f"{dotted} = {given.text} must be above 0 ({key.help})", name=dotted, value=value, allowed="> 0")
    if key and key.sign == "not negative" and given.value < 0:
        raise InputError(f"{dotted} = {given.text} must not be negative ({key.help})", name=dotted, value=value, allowed=">= 0")
    if dotted.endswith("haematocrit") and given.value > 1:
        raise InputError(f'{dotted} = {given.text}: per cent or fraction? Write 0.45 or "45 %"', name=dotted, value=value, allowed="0 to 1")
    if key and key.absolute and not given.reference:
        raise InputError(
            f"{dotted} = {given.text} must say whether it is absolute or gauge: write bar(a) or bar(g)", name=dotted, value=value,
            allowed="bar(a) or bar(g)",
        )  # fmt: skip
    return given


def _which_viscosity(dotted: str, value: Any) -> str:
    if isinstance(value, str):
        for dimension in ("viscosity", "kinematic_viscosity"):
            try:
                parse_given(value, dimension, dotted)
            except UnitError:
                continue
            return dimension
    return "viscosity"


def _dimension_of_text(dotted: str, value: Any) -> str:
    """Dimension of a value that may belong to any signal."""
    if isinstance(value, str):
        for dimension in DIMENSIONS:
            try:
                parse_given(value, dimension, dotted)
            except InputError:
                continue
            return dimension
        raise InputError(f"{dotted} = {value!r} is not understood; write a number and a unit, such as '0.3 kPa'", name=dotted, value=value)
    return "ratio"


