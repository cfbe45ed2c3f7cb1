"""The state of a workbench, without widgets: one case, its last good answer, and what stands beside them.

Everything that a hand can do on the screen is a method here; each leaves the state usable, whatever was typed.
"""

from __future__ import annotations

import threading
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

from ..case import Answer, Case, Workspace, analyse, load_case
from ..case.case import make_case
from ..case.compare import compare
from ..case.schema import key_of, sections_of
from ..errors import CaseError, MissingColumnError, MissingFileError, PulsekitError, RecordingError, SignalError, StoppedError
from .fields import joined, label_of, split, value_of
from .saving import keep_upload

__all__ = ["DeskState"]

_MOST_STEPS_BACK = 100


class DeskState:
    """A case under the hands of its user.

    Attributes
    ----------
    case : Case
        As it stands in the fields; an unacceptable value never enters it.
    answer : Answer or None
        The last good answer. Its ``case`` is the one that the pictures show.
    glimpse : object or None
        What can be shown of a recording before the case can be answered.
    reference : Answer or None
        The pinned answer.
    comparison : Comparison or None
        Changes against it with their intervals, once they are computed.
    full : bool
        Whether intervals, bands and shares belong to the case as it stands.
    refused : dict
        Dotted key -> (text, sentence) of values that were not taken.
    fault : tuple of (str, str) or None
        Dotted key ("" if none) and sentence, where the case as it stands cannot be answered.
    cursor : dict
        Place of each cursor, as the page last told.
    serial : int
        Grows with every change of the case.
    """

    kind = ""

    def __init__(self, source: str | Path | Case | None = None, *, folder: str | Path | None = None) -> None:
        self.folder = Path(folder if folder is not None else ".").resolve()
        self.workspace = Workspace()
        self.lock = threading.RLock()
        self.case: Case = make_case({"kind": self.kind}, folder=self.folder)
        self.answer: Answer | None = None
        self.glimpse: Any = None
        self.reference: Answer | None = None
        self.comparison: Any = None
        self.full = False
        self.refused: dict[str, tuple[str, str]] = {}
        self.fault: tuple[str, str] | None = None
        self.cursor: dict[str, float] = {}
        self.notice = ""
        self.serial = 0
        self.bounds: dict[str, tuple[float, float]] = {}
        self._past: list[Case] = []
        self._gesture = ""
        if source is not None:
            self.begin(source)

    # What is there

    @property
    def errors(self) -> Mapping[str, str]:
        """Sentence beside each key that has one; "" is the case as a whole."""
        found = {key: sentence for key, (_, sentence) in self.refused.items()}
        if self.fault is not None:
            found.setdefault(*self.fault)
        return found

    @property
    def behind(self) -> bool:
        """Whether the pictures show an earlier case than the fields."""
        return self.answer is not None and self.answer.case != self.case

    @property
    def shown(self) -> Any:
        """The answer, or what can be shown before there is one."""
        return self.answer if self.answer is not None else self.glimpse

    @property
    def can_undo(self) -> bool:
        """Whether there is an earlier case to go back to."""
        return bool(self._past)

    def text_of(self, key: str) -> str:
        """Text of a key as its field shows it: what was typed last, even if it was refused."""
        if key in self.refused:
            return self.refused[key][0]
        value = self.case.get(key)
        if value is None:
            return ""
        if isinstance(value, bool):
            return "true" if value else "false"
        return ", ".join(str(entry) for entry in value) if isinstance(value, list) else str(value)

    # Changes

    def open(self, source: str | Path | Case) -> bool:
        """Take a case, a case file or a recording. What is wrong with it becomes a message."""
        try:
            if isinstance(source, Case):
                case = source
            elif Path(source).suffix.lower() == ".toml":
                case = load_case(self.folder / source)
            else:
                return self.choose_recording(source)
            if case.kind != self.kind:
                raise CaseError(f"this is the workbench of a {self.kind} case; {source} is a {case.kind} case", key="kind", value=case.kind)
        except PulsekitError as problem:
            self.notice = str(problem)
            return False
        self.folder = case.folder.resolve()
        self.take(case)
        return self.answer_now()

    def begin(self, source: str | Path | Case) -> None:
        """Open the first case; there is nothing to go back to before it."""
        self.open(source)
        self._past.clear()

    def choose_recording(self, path: str | Path, *, progress: Any = None, stop: Any = None) -> bool:
        """Take another recording; a workbench says what it guesses from it."""
        raise NotImplementedError

    def set_value(self, key: str, text: Any, *, gesture: str = "") -> bool:
        """Set a key from the text of its field and answer; empty text takes the key out.

        A value that cannot be taken leaves the case alone and its sentence in ``errors``; a case that cannot
        be answered keeps the last good answer. Changes of one ``gesture`` (a slider's move) are one step back.
        """
        return self.change(key, text, gesture=gesture) and self.answer_now()

    def change(self, key: str, text: Any, *, gesture: str = "") -> bool:
        """Set a key without answering; False if its value was refused."""
        try:
            case = self.changed(key, value_of(key, text))
        except PulsekitError as problem:
            # The value was typed here: the case file's name in front of the sentence would mislead.
            self.refused[key] = (str(text), str(problem).replace(f"{self.case.path}: ", ""))
            return False
        self.refused.pop(key, None)
        self.take(case, gesture=gesture)
        return True

    def changed(self, key: str, value: Any) -> Case:
        """The case with a key set (None: taken out); workbenches that know of keys that exclude each other extend this."""
        return self.case.without(key) if value is None else self.case.with_value(key, value)

    def take(self, case: Case, *, gesture: str = "") -> None:
        """Make this the present case."""
        with self.lock:
            if case == self.case:
                return
            if not (gesture and gesture == self._gesture):
                self._past.append(self.case)
                del self._past[:-_MOST_STEPS_BACK]
            self._gesture = gesture
            self.case = case
            self.serial += 1
            self.full = False
            self.notice = ""

    def undo(self) -> bool:
        """Go one step back."""
        with self.lock:
            if not self._past:
                return False
            self.case = self._past.pop()
            self._gesture = ""
            self.refused.clear()
            self.serial += 1
            self.full = False
        return self.answer_now()

    def _named(self, path: str | Path) -> str:
        """Name of a file as the case holds it: relative to its folder where it lies below."""
        place = (self.case.folder / path).expanduser().resolve()
        folder = self.case.folder.resolve()
        return place.relative_to(folder).as_posix() if place.is_relative_to(folder) else str(place)

    def upload(self, name: str, content: bytes, *, progress: Any = None, stop: Any = None) -> bool:
        """Keep an uploaded recording (or case file) in a folder below the case's and take it."""
        try:
            place = keep_upload(self.folder, name, content)
        except PulsekitError as problem:
            self.refused["recording.file"] = (name, str(problem))
            return False
        if place.suffix.lower() == ".toml":
            return self.open(place)
        done = self.choose_recording(place, progress=progress, stop=stop)
        if not self.notice:
            self.notice = f"The file was put at {place}"
        return done

    def slide(self, key: str, number: float, *, gesture: str = "slide") -> bool:
        """Set the number of a key from its slider; unit and uncertainty stay as typed."""
        text = self.case.get(key)
        if text is None:
            return False
        value, spread = split(str(text))
        unit = value.lstrip("+-0123456789.,eE ")
        return self.set_value(key, joined(f"{number:.5g} {unit}".strip(), spread), gesture=f"{gesture} {key}")

    # Answers

    def answer_now(self, *, progress: Callable[[float], Any] | None = None, stop: Callable[[], bool] | None = None) -> bool:
        """Answer the case at its stated values, without intervals: for a hand that moves."""
        return self._answered(full=False, progress=progress, stop=stop)

    def refine(self, *, progress: Callable[[float], Any] | None = None, stop: Callable[[], bool] | None = None) -> bool:
        """Answer the case in full. An answer that comes after a further change is dropped."""
        return self._answered(full=True, progress=progress, stop=stop)

    def _answered(self, *, full: bool, progress: Any, stop: Any) -> bool:
        serial, case = self.serial, self.case
        try:
            answer = analyse(case, nominal_only=not full, workspace=self.workspace, progress=progress, stop=stop)
        except StoppedError as problem:
            with self.lock:
                if serial == self.serial:
                    self.notice = str(problem)
            return False
        except PulsekitError as problem:
            glimpse = self.glimpse_of(case)
            with self.lock:
                if serial == self.serial:
                    self._refuse(problem, glimpse)
            return False
        with self.lock:
            if serial != self.serial:
                return False
            self.answer, self.full, self.fault, self.glimpse = answer, full, None, None
            self.comparison = None
        return True

    def _refuse(self, problem: PulsekitError, glimpse: Any) -> None:
        """Keep the last good answer, unless it is of another recording."""
        self.fault = (place_of(problem, self.kind), self._words(problem))
        if self.answer is not None and self.answer.case.get("recording.file") != self.case.get("recording.file"):
            self.answer = None
        self.glimpse = glimpse

    def _words(self, problem: PulsekitError) -> str:
        """An error's sentence; what is merely not filled in yet is asked for rather than complained of."""
        key = getattr(problem, "key", None)
        taken = key_of(key) if key else None
        if isinstance(problem, CaseError) and key and taken is not None and self.case.get(key) is None and "is missing" in str(problem):
            return f"Needed: {label_of(key).lower()} ({taken.help})"
        return str(problem).replace(f"{self.case.path}: ", "")

    def glimpse_of(self, case: Case) -> Any:
        """What can be shown of a case that cannot be answered; None if nothing."""
        return None

    # Pin and compare

    def pin(self) -> bool:
        """Keep the present answer as the reference."""
        if self.answer is None:
            self.notice = "There is no answer to pin yet."
            return False
        self.reference, self.comparison = self.answer, None
        return True

    def unpin(self) -> None:
        """Drop the reference."""
        self.reference = self.comparison = None

    def compare_now(self) -> bool:
        """Give the changes against the reference their intervals: givens in common are drawn once for both."""
        answer, reference, serial = self.answer, self.reference, self.serial
        if answer is None or reference is None or answer.case == reference.case or not self.full:
            return True
        try:
            if not reference.samples:
                reference = analyse(reference.case, workspace=self.workspace)
            comparison = compare(answer, reference, workspace=self.workspace)
        except PulsekitError as problem:
            self.notice = str(problem)
            return True
        with self.lock:
            if serial == self.serial and self.reference is not None:
                self.reference, self.comparison = reference, comparison
        return True

    # Cycles

    def leave_out(self, number: int) -> bool:
        """Leave a cycle (counted from 1) out, or take it in again if it is out."""
        cycles = getattr(self.shown, "cycles", None)
        if cycles is None:
            return False
        out = {index + 1 for index, _ in cycles.left_out}
        asked = set(self.case.get("cycles.leave_out") or ())
        case = self.case
        if number in out:
            if number not in asked:  # it was left out because it looks odd
                case = case.with_value("cycles.keep_odd", True)
                asked |= out
            asked.discard(number)
        else:
            asked.add(number)
        self.take(case.with_value("cycles.leave_out", sorted(asked)) if asked else case.without("cycles.leave_out"))
        done = self.answer_now()
        if not done and self.fault is not None:
            sentence = self.fault[1]
            self.undo()
            self.notice = sentence
        return done


def place_of(problem: PulsekitError, kind: str) -> str:
    """Dotted key beside which an error is shown; "" where it belongs to the case as a whole.

    >>> from pulsekit.errors import InputError
    >>> place_of(InputError("radius must be above 0", name="radius"), "wall shear")
    'tube.radius'
    """
    for name in (getattr(problem, "key", None), getattr(problem, "name", None)):
        if not name or not isinstance(name, str):
            continue
        if "." in name and key_of(name) is not None:
            return name
        for section in sections_of(kind):
            dotted = f"{section.removesuffix('[]')}.{name}"
            if not section.endswith("[]") and key_of(dotted) is not None:
                return dotted
    if isinstance(problem, MissingColumnError):
        return "recording.signal"
    if isinstance(problem, SignalError):
        return "cycles.period"
    return "recording.file" if isinstance(problem, (RecordingError, MissingFileError)) else ""
