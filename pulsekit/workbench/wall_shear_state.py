"""The state of the wall-shear workbench: what a hand can do to a wall-shear case."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from ..case import Case
from ..case.draft import signal_lines
from ..case.measurement import measure
from ..case.units import reader_units
from ..errors import PulsekitError
from .desk import DeskState

__all__ = ["Glimpse", "WallShearState"]

#: Keys that speak of one file's columns, and mean nothing for another file.
_OF_THE_FILE = (
    "signal", "unit", "units", "time", "forward", "reverse", "upstream", "downstream", "sha256", "block", "decimal", "delimiter", "encoding",
    "sample_rate", "deviation", "area", "trigger", "quantity",
)  # fmt: skip
_SIZES = ("radius", "diameter", "outer_diameter", "wall_thickness")
#: What each kind of liquid is asked for, besides its kind.
LIQUID_KEYS = {
    "given": ("density", "viscosity"),
    "blood": ("haematocrit", "temperature", "viscosity"),
    "water": ("temperature",),
    "glycerol solution": ("mass_fraction", "volume_fraction", "density", "temperature", "viscosity"),
    "hydraulic oil": ("grade", "temperature", "viscosity_at_40", "viscosity_at_100", "viscosity_index", "density", "viscosity"),
}


@dataclass(frozen=True, eq=False)
class Glimpse:
    """A recording with its cycles and harmonics, before tube and liquid are known."""

    case: Case
    recording: Any
    signal: Any = None
    cycles: Any = None
    harmonics: Any = None
    units: Any = None
    flow: Any = None


class WallShearState(DeskState):
    """A wall-shear case under the hands of its user (see `DeskState`).

    Examples
    --------
    >>> state = WallShearState()
    >>> state.set_value("tube.radius", "3.1 s")
    False
    >>> "length" in state.errors["tube.radius"], state.case.get("tube.radius") is None
    (True, True)
    """

    kind = "wall shear"

    def choose_recording(self, path: str | Path, *, progress: Any = None, stop: Any = None, answer: bool = True) -> bool:
        """Take another recording; column and quantity are guessed from it, tube and liquid stay."""
        case = self.case
        for name in _OF_THE_FILE:
            case = case.without(f"recording.{name}")
        for name in ("leave_out", "onsets", "period"):
            case = case.without(f"cycles.{name}")
        try:
            case = case.with_value("recording.file", self._named(path))
            read = self.workspace.recording(case, progress=progress, stop=stop)
            guessed = tomllib.loads("\n".join(signal_lines(read)))
            for name, value in guessed.items():
                case = case.with_value(f"recording.{name}", value)
        except PulsekitError as problem:
            self.refused["recording.file"] = (str(path), str(problem))
            return False
        self.refused.pop("recording.file", None)
        self.take(case)
        return self.answer_now(progress=progress, stop=stop) if answer else True

    def changed(self, key: str, value: Any) -> Case:
        """Radius and diameter exclude each other; another kind of liquid drops the givens of the old one."""
        case = super().changed(key, value)
        section, _, name = key.partition(".")
        if value is not None and section == "tube" and name in _SIZES:
            keep = {"outer_diameter", "wall_thickness"} if name in ("outer_diameter", "wall_thickness") else {name}
            for other in set(_SIZES) - keep:
                case = case.without(f"tube.{other}")
        if key == "fluid.kind":
            # A density or viscosity of the old liquid would stay as a measured one of the new: only the temperature is common.
            keep = {"kind", "id"} | ({"temperature"} & set(LIQUID_KEYS.get(str(value), ())))
            for other in set(case.get("fluid") or {}) - keep:
                case = case.without(f"fluid.{other}")
        return case

    def slide(self, key: str, number: float, *, gesture: str = "slide") -> bool:
        """Set the number of a key from its slider. A radius moves a diameter in its place."""
        if key == "tube.radius" and self.case.get("tube.diameter") is not None:
            key, number = "tube.diameter", 2.0 * number
        if self.case.get(key) is None and key == "fluid.viscosity":
            # A measured viscosity takes the place of the correlation's.
            return self.set_value(key, f"{number:.5g} mPa*s", gesture=f"{gesture} {key}")
        return super().slide(key, number, gesture=gesture)

    def glimpse_of(self, case: Case) -> Any:
        """The recording, its cycles and harmonics, as far as they can be had."""
        try:
            recording = self.workspace.recording(case)
        except PulsekitError:
            return None
        try:
            found = measure(case, self.workspace)
            signal = found.gathered.signal
            return Glimpse(case, recording, signal, found.cycles, found.raw, reader_units(case, signal))
        except PulsekitError:
            return Glimpse(case, recording)
