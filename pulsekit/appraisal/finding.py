"""What a Finding and a Check are: the two kinds of row that every answer is made of."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field, replace
from types import MappingProxyType
from typing import Any, Generic, TypeVar, overload

from ..errors import InputError, MissingColumnError

__all__ = ["RELIANCES", "VERDICTS", "Check", "Checks", "Finding", "Findings", "Table"]

VERDICTS = ("holds", "doubtful", "fails", "unknown")
RELIANCES = ("usable", "indicative", "not usable")

_NO_SHARES: Mapping[str, float] = MappingProxyType({})


@dataclass(frozen=True, kw_only=True)
class Finding:
    """One number of an answer, with its interval and how far it may be relied on.

    ``value`` is in SI (``unit``); None where the number does not exist, and then ``because`` says
    why. ``low`` and ``high`` bound the central 95 % interval; None before propagation, where the
    finding is not usable, and on an open side. ``shares`` maps the dotted key of each uncertain
    input to the fraction of the variance that it causes. ``shown_value`` and ``shown_unit`` are
    the number as a practitioner is shown it: rounded, in the user's unit.
    """

    name: str
    label: str
    value: float | None
    unit: str
    low: float | None = None
    high: float | None = None
    shares: Mapping[str, float] = field(default_factory=lambda: _NO_SHARES, hash=False)
    reliance: str = "usable"
    because: str = ""
    shown_value: float | None = None
    shown_low: float | None = None
    shown_high: float | None = None
    shown_unit: str = ""

    def __post_init__(self) -> None:
        if self.reliance not in RELIANCES:
            raise InputError(f"reliance {self.reliance!r} is not one of {', '.join(RELIANCES)}", name="reliance")
        object.__setattr__(self, "shares", MappingProxyType(dict(self.shares)))

    def __reduce__(self) -> tuple[Any, ...]:
        fields = {name: getattr(self, name) for name in self.__dataclass_fields__}
        return _make_finding, (fields | {"shares": dict(self.shares)},)

    def replace(self, **changes: Any) -> Finding:
        """Return a copy with some fields changed."""
        return replace(self, **changes)


def _make_finding(fields: dict[str, Any]) -> Finding:
    return Finding(**fields)


@dataclass(frozen=True, kw_only=True)
class Check:
    """The verdict on one assumption, for this very case.

    ``value`` and ``limit`` are what was compared (None where there is nothing to compare);
    ``because`` is one sentence with the numbers and what follows for the result; ``source`` says
    where the limit comes from.
    """

    name: str
    label: str
    verdict: str
    because: str
    value: float | None = None
    limit: float | None = None
    unit: str = ""
    source: str = ""

    def __post_init__(self) -> None:
        if self.verdict not in VERDICTS:
            raise InputError(f"verdict {self.verdict!r} is not one of {', '.join(VERDICTS)}", name="verdict")

    def replace(self, **changes: Any) -> Check:
        """Return a copy with some fields changed."""
        return replace(self, **changes)


Row = TypeVar("Row", Finding, Check)


class Table(Generic[Row]):
    """Rows in a fixed order, reached by position or by name.

    Iterating gives the rows; ``table["name"]``, ``"name" in table``, ``table.names`` and
    ``dict(table)`` work by name.
    """

    __slots__ = ("_index", "_rows")

    def __init__(self, rows: Iterable[Row] = ()) -> None:
        self._rows: tuple[Row, ...] = tuple(rows)
        self._index: dict[str, int] = {row.name: position for position, row in enumerate(self._rows)}
        if len(self._index) != len(self._rows):
            raise InputError("two rows of a table have the same name", name="rows")

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the rows, in order."""
        return tuple(self._index)

    def keys(self) -> tuple[str, ...]:
        """Names of the rows, in order."""
        return self.names

    def values(self) -> tuple[Row, ...]:
        """Return the rows."""
        return self._rows

    def items(self) -> tuple[tuple[str, Row], ...]:
        """Return (name, row) pairs."""
        return tuple(zip(self.names, self._rows, strict=True))

    def get(self, name: str, default: Row | None = None) -> Row | None:
        """Return the row of that name, or ``default``."""
        return self._rows[self._index[name]] if name in self._index else default

    def __iter__(self) -> Iterator[Row]:
        return iter(self._rows)

    def __len__(self) -> int:
        return len(self._rows)

    def __contains__(self, item: object) -> bool:
        return item in self._index if isinstance(item, str) else item in self._rows

    @overload
    def __getitem__(self, key: str | int) -> Row: ...
    @overload
    def __getitem__(self, key: slice) -> tuple[Row, ...]: ...
    def __getitem__(self, key: str | int | slice) -> Row | tuple[Row, ...]:
        if isinstance(key, str):
            if key not in self._index:
                raise MissingColumnError(f"there is no {key!r} here; there are: {', '.join(self.names)}", name=key, columns=self.names)
            return self._rows[self._index[key]]
        return self._rows[key]

    def __eq__(self, other: object) -> bool:
        return type(other) is type(self) and self._rows == other._rows  # type: ignore[attr-defined]

    def __hash__(self) -> int:
        return hash(self.names)

    def __getstate__(self) -> tuple[Any, ...]:
        return self._rows

    def __setstate__(self, rows: tuple[Any, ...]) -> None:
        self.__init__(rows)  # type: ignore[misc]

    def __repr__(self) -> str:
        return f"<{type(self).__name__} of {len(self)}: {', '.join(self.names)}>"


class Findings(Table[Finding]):
    """The findings of an answer."""

    __slots__ = ()


class Checks(Table[Check]):
    """The checks of an answer."""

    __slots__ = ()
