"""Writes a recording as messily as asked, and knows what a reader must find in it."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field

import numpy as np

ML_PER_MIN = 1e-6 / 60
MMHG = 133.322387415  # conventional millimetre of mercury, 13595.1 kg/m^3 * 9.80665 m/s^2 * 1 mm

#: Header forms: how a name and its unit are written together.
FORMS = {"paren": "{name} ({unit})", "bracket": "{name} [{unit}]", "slash": "{name}/{unit}", "comma": "{name}, {unit}"}


@dataclass
class Messy:
    """A file to be written; every field is one kind of mess."""

    rows: int = 60
    interval: float = 0.01
    decimals: int = 2
    delimiter: str = ","
    decimal: str = "."
    thousands: str = ""
    encoding: str = "utf-8"
    newline: str = "\n"
    preamble: int = 0
    commented: bool = False
    form: str = "paren"  # a key of FORMS, "two rows" or "none"
    time: str = "s"  # s, ms, min, us, clock, iso, zone, count, none
    quoted: bool = False
    trailing: bool = False
    empty_column: bool = False
    text_column: bool = False
    footer: int = 0
    missing: dict[int, str] = field(default_factory=dict)  # row -> marker
    sentinel: dict[int, str] = field(default_factory=dict)
    bad: tuple[int, ...] = ()  # rows before which a line that is no row stands
    gap: int | None = None  # row before which 25 samples are missing
    repeated: int | None = None  # row whose stamp repeats the one before
    cut: bool = False
    ended: bool = True
    offset: float = 0.0  # of the flow

    @property
    def instants(self) -> np.ndarray:
        """True instants. [s]"""
        count = np.arange(self.rows, dtype=float)
        if self.gap is not None:
            count[self.gap :] += 25
        return count * self.interval

    @property
    def flow(self) -> np.ndarray:
        """Flow as written. [mL/min]"""
        t = self.instants
        return np.round(self.offset + 61.37 + 40.2 * np.sin(2 * np.pi * t / 0.31) + 3.3 * np.cos(7.1 * t), self.decimals)

    @property
    def pressure(self) -> np.ndarray:
        """Pressure as written. [mmHg]"""
        return np.round(84.9 + 19.4 * np.cos(2 * np.pi * self.instants / 0.31 + 0.4), 1)

    @property
    def kept(self) -> np.ndarray:
        """Rows whose flow a reader can know."""
        lost = {*self.missing, *self.sentinel} | ({self.rows - 1} if self.cut else set())
        return np.array([row for row in range(self.rows) if row not in lost])

    def options(self) -> dict[str, object]:
        """What the caller must tell: the rate, where no column states the time; units, where no header does."""
        told: dict[str, object] = {}
        if self.time in ("count", "none"):
            told["sample_rate"] = f"{1 / self.interval:.12g} Hz"
        if self.form == "none":
            told["units"] = {self.name_of("flow"): "mL/min"}
            if self.time not in ("count", "none", "clock", "iso", "zone"):
                told["units"][self.name_of("time")] = self.time  # type: ignore[index]
        return told

    def name_of(self, which: str) -> str:
        """Name of a column as a reader gives it."""
        if self.form != "none":
            return which
        first = 0 if self.time == "none" else 1
        return f"column {1 if which == 'time' else first + 1 if which == 'flow' else first + 2}"

    def _stamp(self, row: int) -> str:
        t = float(self.instants[row - 1 if self.repeated == row else row])
        if self.time == "count":
            return str(round(t / self.interval) + 1)
        if self.time in ("clock", "iso", "zone"):
            at = dt.datetime(2024, 2, 28, 23, 59, 59, 500_000) + dt.timedelta(microseconds=round(t * 1e6))
            text = at.strftime("%H:%M:%S.%f") if self.time == "clock" else at.strftime("%Y-%m-%dT%H:%M:%S.%f")
            return text + ("+01:00" if self.time == "zone" else "")
        scale, digits = {"s": (1, 4), "ms": (1e3, 1), "min": (1 / 60, 9), "us": (1e6, 0)}[self.time]
        return f"{t * scale:.{digits}f}".replace(".", self.decimal)

    def _number(self, value: float, digits: int) -> str:
        text = f"{value:,.{digits}f}" if self.thousands else f"{value:.{digits}f}"
        text = text.replace(",", "\0").replace(".", self.decimal).replace("\0", self.thousands)
        return f'"{text}"' if self.quoted and self.thousands == self.delimiter else text

    def _cells(self, row: int) -> list[str]:
        cells = [] if self.time == "none" else [self._stamp(row)]
        flow = self.missing.get(row) if row in self.missing else self.sentinel.get(row, self._number(float(self.flow[row]), self.decimals))
        cells += [str(flow), self._number(float(self.pressure[row]), 1)]
        if self.text_column:
            cells.append("start" if row % 7 == 3 else "run")
        if self.empty_column:
            cells.append("")
        return cells + ([""] if self.trailing else [])

    def _header(self) -> list[list[str]]:
        columns = [] if self.time == "none" else [("time" if self.time != "count" else "sample", {"count": "", "clock": "", "iso": "", "zone": ""}.get(self.time, self.time))]
        columns += [("flow", "mL/min"), ("pressure", "mmHg")]
        columns += [("note", "")] if self.text_column else []
        columns += [("spare", "")] if self.empty_column else []
        if self.form == "none":
            return []
        quote = '"{}"' if self.quoted else "{}"
        tail = [""] if self.trailing else []
        if self.form == "two rows":
            return [[quote.format(name) for name, _ in columns] + tail, [f"({unit})" if unit else "" for _, unit in columns] + tail]
        form = FORMS[self.form]
        return [[quote.format(form.format(name=name, unit=unit) if unit else name) for name, unit in columns] + tail]

    def text(self) -> str:
        """Return the file as text."""
        mark = "# " if self.commented else ""
        lines = [f"{mark}Note {order}: measured by hand, run {order}" if order % 2 else f"{mark}Operator {order}: n.n." for order in range(self.preamble)]
        lines += [self.delimiter.join(row) for row in self._header()]
        for row in range(self.rows):
            if row in self.bad:
                lines.append("*** buffer overrun ***")
            lines.append(self.delimiter.join(self._cells(row)))
        if self.cut:
            lines[-1] = lines[-1][: len(self._cells(self.rows - 1)[0]) - 1] if self.time != "none" else ""
        else:
            lines += [f"Summary {order}: done" for order in range(self.footer)]
        ended = self.ended and not self.cut
        return self.newline.join(lines) + (self.newline if ended else "")

    def data(self) -> bytes:
        """Return the file as bytes."""
        return self.text().encode(self.encoding)
