"""What the caller told about a file, and the remarks that gather while it is read."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from ...errors import InputError, RecordingError, StoppedError
from ...quantities import to_si

__all__ = ["Notes", "Told", "clean", "listed", "make_told"]

#: Delimiters as people name them.
_DELIMITERS = {
    "tab": "\t",
    "\\t": "\t",
    "comma": ",",
    "semicolon": ";",
    "pipe": "|",
    "space": " ",
    "blank": " ",
    "blanks": " ",
    "whitespace": " ",
    r"\s+": " ",
}


@dataclass(frozen=True, kw_only=True)
class Told:
    """The options of ``read_recording``, checked; None means: find out."""

    time: str | None = None
    units: Mapping[str, str] = field(default_factory=dict)
    sample_rate: float | None = None
    decimal: str | None = None
    delimiter: str | None = None
    encoding: str | None = None
    block: str | int | None = None
    columns: tuple[str, ...] | None = None
    progress: Callable[[float], Any] | None = None
    stop: Callable[[], bool] | None = None

    def pause(self, name: str, fraction: float) -> None:
        """Tell how far the work is, and give up if the user wants to stop."""
        if self.progress is not None:
            self.progress(min(max(fraction, 0.0), 1.0))
        if self.stop is not None and self.stop():
            raise StoppedError(f"{name}: reading was stopped after {100 * fraction:.0f} % of the file; nothing was kept")


@dataclass
class Notes:
    """Remarks in the order in which they arise, none twice."""

    where: str  # the file, as shown in errors
    remarks: list[str] = field(default_factory=list)

    def add(self, remark: str) -> None:
        """Add a sentence."""
        if remark not in self.remarks:
            self.remarks.append(remark)

    def refuse(self, why: str, *, line: int | None = None, column: str | int | None = None) -> RecordingError:
        """Make the error that says where and why the file is not read."""
        place = self.where + (f":{line}" if line else "") + (f", column {clean(str(column))!r}" if column is not None else "")
        return RecordingError(f"{place}: {why}", path=self.where, line=line, column=column)


def clean(text: str, longest: int = 60) -> str:
    """Text from a file as it may stand in a sentence: no control characters, not too long."""
    shown = "".join(letter if letter.isprintable() else " " for letter in str(text)).strip()
    return shown if len(shown) <= longest else shown[: longest - 1] + "…"


def listed(items: Sequence[Any], most: int = 5) -> str:
    """Join the first few items: '3, 7, 12 and 40 more'."""
    shown = ", ".join(str(item) for item in items[:most])
    return shown + (f" and {len(items) - most} more" if len(items) > most else "")


def make_told(**options: Any) -> Told:
    """Check the options of ``read_recording``."""
    decimal, delimiter, encoding = options.get("decimal"), options.get("delimiter"), options.get("encoding")
    if decimal not in (None, ".", ","):
        raise InputError(f"decimal = {decimal!r} is no decimal mark; give '.' or ','", name="decimal", value=decimal)
    if delimiter is not None:
        delimiter = _DELIMITERS.get(str(delimiter).lower(), delimiter)
        if not isinstance(delimiter, str) or len(delimiter) != 1 or delimiter.isalnum() or delimiter in "\"'\n\r.+-":
            raise InputError(
                f"delimiter = {delimiter!r} cannot part columns; give ',', ';', '\\t', '|' or ' ' (runs of blanks)",
                name="delimiter",
                value=delimiter,
            )
    if decimal is not None and decimal == delimiter:
        raise InputError(f"decimal and delimiter are both {decimal!r}; a file cannot use one mark for both", name="decimal", value=decimal)
    if encoding is not None:
        try:
            "".encode(encoding)
        except (LookupError, TypeError) as problem:
            raise InputError(
                f"encoding = {encoding!r} is not known; give 'utf-8', 'utf-16', 'cp1252' or 'latin-1'", name="encoding", value=encoding
            ) from problem
    rate = options.get("sample_rate")
    if rate is not None:
        rate = to_si(rate, "frequency", "sample_rate")
        if rate <= 0:
            raise InputError(f"sample_rate = {options['sample_rate']!r} must be above 0 Hz", name="sample_rate", value=rate)
    columns = options.get("columns")
    if isinstance(columns, str):
        columns = (columns,)
    units = options.get("units") or {}
    if not isinstance(units, Mapping):
        raise InputError(f"units = {units!r} must map column names to units, as in {{'flow': 'mL/min'}}", name="units", value=units)
    return Told(
        **(
            options
            | {"units": dict(units), "delimiter": delimiter, "sample_rate": rate, "columns": None if columns is None else tuple(columns)}
        )
    )
