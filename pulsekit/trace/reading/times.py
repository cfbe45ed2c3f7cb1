"""Clock times and date-times as text, to seconds."""

from __future__ import annotations

import re
import warnings
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from .told import Notes, clean

__all__ = ["TextClock", "make_text_clock"]

_OF_DAY = re.compile(r"^\d{1,3}:\d{2}:\d{2}")
_SHORT = re.compile(r"^\d{1,3}:\d{2}(?:[.,]\d+)?$")
_NOON = re.compile(r"(?i)\s*([ap])\.?m\.?$")
_FRAMES = re.compile(r"^(\d{1,2}:\d{2}:\d{2})[:;](\d{1,6})$")
_ISO = re.compile(r"^\d{4}-\d{2}-\d{2}|^\d{8}T\d{6}")
_ZONE = re.compile(r"(?:Z|UTC|[+-]\d{2}:?\d{2}|[+-]\d{2})$")
_PARTS = re.compile(r"^(\d{1,4})([-/.])(\d{1,2})\2(\d{2,4})(?:[T\s_,]+(.*))?$")


@dataclass
class TextClock:
    """Turns texts of one column (or of a date and a time column, joined) into seconds since the first."""

    kind: str  # "clock": time of day or elapsed; "date": without a zone; "zoned"
    form: str  # "hms", "ms" (minutes and seconds), "iso", "year", "day", "month"
    name: str
    notes: Notes
    resolution: float
    begin: int | None = None  # nanoseconds of the first stamp
    origin: str = ""
    settled: list[str] = field(default_factory=list)

    def seconds(self, texts: list[str], line: int) -> NDArray[np.float64]:
        """Seconds since the first stamp; NaN where there is none."""
        made = self._clocks(texts, line) if self.form in ("hms", "hm", "ms") else self._dates(texts, line)
        return made

    def _clocks(self, texts: list[str], line: int) -> NDArray[np.float64]:
        out = np.full(len(texts), np.nan)
        for place, text in enumerate(texts):
            text = text.strip().strip('"')
            if not text or not text[0].isdigit():
                continue
            out[place] = self._one(text, line + place)
        if not self.origin and np.isfinite(out).any():
            self.origin = next(text.strip() for text in texts if text.strip())
        return out

    def _one(self, text: str, line: int) -> float:
        half = 0.0
        if noon := _NOON.search(text):
            text = text[: noon.start()]
            hour = int(text.split(":")[0])
            half = (12.0 if noon[1].lower() == "p" else 0.0) - (12.0 if hour == 12 else 0.0)
        try:
            parts = [float(part) for part in text.replace(",", ".").split(":")]
        except ValueError as problem:
            raise self.notes.refuse(f"{clean(text, 30)!r} is no time of day", line=line, column=self.name) from problem
        if len(parts) == 2:
            parts = [0.0, *parts] if self.form == "ms" else [*parts, 0.0]
        hours, minutes, seconds = parts[:3]
        if minutes >= 60 or seconds >= 61:
            raise self.notes.refuse(f"{clean(text, 30)!r} is no time of day", line=line, column=self.name)
        return 3600 * (hours + half) + 60 * minutes + seconds

    def _dates(self, texts: list[str], line: int) -> NDArray[np.float64]:
        tidy = [text.strip().strip('"') for text in texts]
        tidy = [text if text[:1].isdigit() else "" for text in tidy]
        tidy = [re.sub(r"(?<=\d),(?=\d+\s*\D*$)", ".", text) if "," in text else text for text in tidy]
        options: Any = {
            "iso": {"format": "ISO8601"},
            "year": {"yearfirst": True, "format": "mixed"},
            "month": {"dayfirst": False, "format": "mixed"},
        }.get(self.form, {"dayfirst": True, "format": "mixed"})
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # on the order of day and month, which is settled here
            return self._parsed(tidy, options, line, len(texts))

    def _parsed(self, tidy: list[str], options: dict[str, Any], line: int, count: int) -> NDArray[np.float64]:
        try:
            series = pd.to_datetime(pd.Series(tidy, dtype=object).replace("", None), utc=self.kind == "zoned", **options)
            stamps = series.dt.tz_localize(None) if self.kind == "zoned" else series
            whole = stamps.astype("datetime64[ns]").to_numpy().astype(np.int64)
        except (ValueError, TypeError, OverflowError, AttributeError, pd.errors.OutOfBoundsDatetime) as problem:
            odd = next(
                (text for text in tidy if text and pd.isna(pd.to_datetime(text, errors="coerce", dayfirst=True))), tidy[0] if tidy else ""
            )
            raise self.notes.refuse(
                f"{clean(odd, 40)!r} is no date and time, or not in the form of the rows before", line=line, column=self.name
            ) from problem
        absent = stamps.isna().to_numpy()
        if self.begin is None:
            if absent.all():
                return np.full(count, np.nan)
            first = int(np.argmin(absent))
            self.begin = int(whole[first])
            self.origin = str(stamps.iloc[first]) + (" UTC" if self.kind == "zoned" else "")
        out = (whole - self.begin) * 1e-9
        out[absent] = np.nan
        return out


def _last_digit(texts: list[str]) -> float:
    """Return the time that one unit of the last digit stands for. [s]"""
    most = 0
    colons = max(text.count(":") for text in texts)
    for text in texts:
        if match := re.search(r":\d{2}[.,](\d+)", text):
            most = max(most, len(match[1]))
    if most:
        return float(10.0**-most)
    return 1.0 if colons >= 2 or any("T" in text and text.count(":") == 0 for text in texts) else 60.0 if colons else 86_400.0


def make_text_clock(texts: list[str], name: str, notes: Notes, line: int) -> TextClock:
    """Settle how the stamps of a column are written, from some of them."""
    seen = [text.strip().strip('"') for text in texts if text.strip().strip('"')[:1].isdigit()]
    if not seen:
        raise notes.refuse("no cell of the time column could be read", line=line, column=name)
    first = seen[0]
    resolution = _last_digit(seen)
    if _FRAMES.match(first):
        raise notes.refuse(
            f"{clean(first, 30)!r}: is the part after the third colon frames, hundredths or milliseconds? Pass time="
            " with sample_rate= to count rows instead",
            line=line,
            column=name,
        )
    if _SHORT.match(_NOON.sub("", first)) and "-" not in first and "/" not in first:
        return TextClock("clock", _short_form(seen, first, name, notes, line), name, notes, resolution)
    if _OF_DAY.match(first):
        return TextClock("clock", "hms", name, notes, resolution)
    if _ISO.match(first):
        zoned = [bool(re.search(r"\d{2}:?\d{2}", text[10:]) and _ZONE.search(text)) for text in seen]
        if any(zoned) and not all(zoned):
            raise notes.refuse("some date-times have a zone and some do not; export them in one form", line=line, column=name)
        return TextClock("zoned" if all(zoned) else "date", "iso", name, notes, resolution)
    return TextClock("date", _date_form(seen, name, notes, line), name, notes, resolution)


def _short_form(seen: list[str], first: str, name: str, notes: Notes, line: int) -> str:
    """12:34 may be hours and minutes, or minutes and seconds; 12:34.5 is minutes and seconds."""
    if any("." in text or "," in text for text in seen):
        notes.add(f"Times such as {clean(first, 20)!r} in column {name!r} taken as minutes and seconds.")
        return "ms"
    if any(_NOON.search(text) for text in seen):
        return "hm"
    raise notes.refuse(
        f"{clean(first, 20)!r} may be hours and minutes or minutes and seconds; export the times with seconds, or pass time="
        " with sample_rate= to count rows instead",
        line=line,
        column=name,
    )


def _date_form(seen: list[str], name: str, notes: Notes, line: int) -> str:
    """Day before month or month before day: settled by a field above 12, or irrelevant within one day."""
    parted = [match for text in seen if (match := _PARTS.match(text))]
    if not parted:
        return "day"  # a month in letters
    if len(parted[0][1]) == 4:
        return "year"
    firsts, seconds = {int(match[1]) for match in parted}, {int(match[3]) for match in parted}
    if max(firsts) > 12 and max(seconds) > 12:
        raise notes.refuse(
            f"{clean(seen[0], 30)!r}: neither day before month nor month before day fits all rows; export the dates as 2024-05-31",
            line=line,
            column=name,
        )
    if max(firsts) > 12:
        return "day"
    if max(seconds) > 12:
        return "month"
    if parted[0][2] == ".":
        return "day"
    if len(firsts) == 1 and len(seconds) == 1:
        notes.add(
            f"Dates such as {clean(seen[0], 30)!r} may be day/month or month/day: read as day/month; only differences of time are used, and all rows have this date."
        )
        return "day"
    if len(seconds) == 1:
        notes.add(f"Dates such as {clean(seen[0], 30)!r} taken as day/month: only the first part changes.")
        return "day"
    if len(firsts) == 1:
        notes.add(f"Dates such as {clean(seen[0], 30)!r} taken as month/day: only the second part changes.")
        return "month"
    raise notes.refuse(
        f"{clean(seen[0], 30)!r} may be day/month or month/day, and the rows do not settle it; export the dates as 2024-05-31",
        line=line,
        column=name,
    )
