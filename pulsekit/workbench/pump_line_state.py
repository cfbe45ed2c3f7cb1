"""The state of the pump-line workbench: what a hand can do to a line, its stations and its source."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from ..case import Case
from ..case.changes import Effect, apply_change, effects, usual_changes
from ..case.pump_line import solve_line
from ..errors import PulsekitError
from .desk import DeskState

__all__ = ["NEW_ELEMENTS", "PumpLineState"]

#: What a new element holds until its user says better, so that it can be answered at once.
NEW_ELEMENTS: dict[str, dict[str, Any]] = {
    "pipe": {"kind": "pipe", "length": "1 m", "radius": "8 mm", "wave_speed": "1300 m/s"},
    "hose": {"kind": "hose", "length": "1 m", "radius": "8 mm", "wave_speed": "900 m/s"},
    "restrictor": {"kind": "restrictor", "pressure_drop": "3 bar", "flow": "38 L/min"},
    "side branch": {
        "kind": "side branch", "element": [{"kind": "pipe", "length": "0.5 m", "radius": "8 mm", "wave_speed": "1300 m/s"}], "end": {"kind": "closed"},
    },
    "volume": {"kind": "volume", "volume": "0.5 L"},
    "gas damper": {"kind": "gas damper", "nominal_volume": "0.5 L", "precharge": "60 bar(g)"},
}  # fmt: skip


class PumpLineState(DeskState):
    """A pump-line case under the hands of its user (see `DeskState`).

    Attributes
    ----------
    selected : int
        Place of the element that is highlighted.
    helped : tuple of Effect
        What each change would do; empty while it is not computed.

    Examples
    --------
    >>> state = PumpLineState()
    >>> state.add_element("pipe"), state.case.get("element.0.length")
    (False, '1 m')
    """

    kind = "pump line"

    def __init__(self, source: Any = None, *, folder: Any = None) -> None:
        self.selected = 0
        self.helped: tuple[Effect, ...] = ()
        self._helped_for: Case | None = None
        super().__init__(source, folder=folder)

    # Recordings

    def choose_recording(self, path: str | Path, *, progress: Any = None, stop: Any = None) -> bool:
        """Take a recording: each of its pressures becomes a station; positions are the user's to say."""
        name = self._named(path)
        try:
            probe = self.case.with_value("station", [{"file": name}])
            recording = self.workspace.recording(probe, "station.0", progress=progress, stop=stop)
        except PulsekitError as problem:
            self.refused["station.0.file"] = (str(path), str(problem))
            return False
        self.refused.pop("station.0.file", None)
        old = [table for table in self.case.get("station") or [] if table.get("file") != name and table.get("position") is not None]
        channels = [column for column in recording.columns if column not in recording.time_names]
        pressures = [column for column in channels if recording.column(column).dimension == "pressure"]
        tables = [{"name": column, "file": name, "column": column} for column in pressures]
        if not tables:
            self.notice = f"{Path(name).name} holds no column that is a pressure; its columns: {', '.join(recording.columns)}"
            return False
        case = self.case.with_value("station", [*old, *tables])
        triggers = [column for column in channels if "trig" in column.lower() or "tacho" in column.lower()]
        if triggers and case.get("recording.trigger") is None:
            case = case.with_value("recording.trigger", triggers[0])
        self.take(case)
        return self.answer_now(progress=progress, stop=stop)

    def remove_station(self, number: int) -> bool:
        """Take a station (from 0) out."""
        if not 0 <= number < len(self.case.get("station") or []):
            return False
        case = self.case.without(f"station.{number}")
        self.take(case if case.get("station") else case.without("station"))
        return self.answer_now()

    # The line

    @property
    def elements(self) -> list[dict[str, Any]]:
        """Tables of the elements, in order."""
        return list(self.case.get("element") or [])

    def add_element(self, kind: str, place: int | None = None) -> bool:
        """Add an element of a kind behind the selected one, or at a place."""
        rows = self.elements
        at = min(self.selected + 1, len(rows)) if place is None else max(0, min(int(place), len(rows)))
        rows.insert(at, NEW_ELEMENTS[kind])
        return self._elements(rows, at)

    def remove_element(self, place: int) -> bool:
        """Take an element out."""
        rows = self.elements
        if not 0 <= place < len(rows):
            return False
        del rows[place]
        return self._elements(rows, max(place - 1, 0))

    def move_element(self, place: int, by: int) -> bool:
        """Move an element towards the source (-1) or the end (+1)."""
        rows = self.elements
        to = place + by
        if not (0 <= place < len(rows) and 0 <= to < len(rows)):
            return False
        rows[place], rows[to] = rows[to], rows[place]
        return self._elements(rows, to)

    def select_element(self, place: int) -> bool:
        """Highlight an element; the case stays as it is."""
        if 0 <= place < len(self.elements):
            self.selected = place
        return True

    def _elements(self, rows: list[dict[str, Any]], selected: int) -> bool:
        # Messages about elements speak of places that have moved.
        self.refused = {key: value for key, value in self.refused.items() if not key.startswith("element.")}
        try:
            case = self.case.with_value("element", rows) if rows else self.case.without("element")
        except PulsekitError as problem:
            self.notice = str(problem)
            return False
        self.selected = selected
        self.take(case)
        return self.answer_now()

    # What helps

    def refine(self, *, progress: Any = None, stop: Any = None) -> bool:
        """Answer in full; what helps follows from the same case."""
        done = super().refine(progress=progress, stop=stop)
        if done and not (stop is not None and stop()):
            self.find_help()
        return done

    def find_help(self) -> None:
        """Compute what each change would do to the present case."""
        case = self.case
        if self._helped_for == case:
            return
        try:
            helped = effects(case, workspace=self.workspace)
        except PulsekitError:
            helped = ()
        with self.lock:
            if self.case == case:
                self.helped, self._helped_for = helped, case

    @property
    def help_is_current(self) -> bool:
        """Whether what helps belongs to the case as it stands."""
        return self._helped_for is not None and self._helped_for == self.case

    def keep_change(self, name: str) -> bool:
        """Make one of the changes part of the case; the case before it is pinned for comparison.

        A pressure that was measured on the unchanged line cannot drive the changed one: that is said, and the case stays.
        """
        try:
            solved = solve_line(self.case, self.workspace)
            if solved.driven.model == "measured":
                self.notice = (
                    "The pressure was measured on the line as it is and cannot drive a changed one: choose a pump or a flow trace as the source to keep this "
                    "change; its effect stands in the table, from the flow that was found at 0 m."
                )
                return False
            known = {str(change.get("name")): change for change in [*(self.case.get("change") or []), *usual_changes(self.case, solved)]}
            if name not in known:
                self.notice = f"There is no change named {name!r} any more."
                return False
            case = apply_change(self.case, known[name])
        except PulsekitError as problem:
            self.notice = str(problem)
            return False
        self.pin()
        self.take(case)
        return self.answer_now()
