"""The one widget of every workbench: it draws what a state shows, and hands what is done on the page to the state.

All of a change travels in one message: panels and numbers, fields, answer, status under one ``hold_sync``. The
cursor lives in the page and needs no kernel.
"""

from __future__ import annotations

import logging
import time
import traceback
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from types import MappingProxyType
from typing import Any

import anywidget
import traitlets

from ..errors import PulsekitError
from ..report.palette import DARK, FIELD_STOPS, LIGHT
from .answer_pane import answer_rows
from .background import Latest
from .charts import Panel, pack_panels
from .desk import DeskState
from .saving import SAVED, described, save

__all__ = ["Screen", "script", "style"]

_STATIC = Path(__file__).parent / "static"
_COMMON_SCRIPTS = ("base.js", "painters.js", "picture.js", "cursors.js", "givens.js", "answer.js", "screen.js")
#: Recordings above this size are read in the background, with progress and a way to stop [bytes].
_LARGE_FILE = 2_000_000
_log = logging.getLogger("pulsekit.workbench")
_log.addHandler(logging.NullHandler())


def script(*extra: str) -> str:
    """Return the page's script: the common files, with a workbench's own painters before the last."""
    names = [*_COMMON_SCRIPTS[:-1], *extra, _COMMON_SCRIPTS[-1]]
    return "\n".join((_STATIC / name).read_text(encoding="utf-8") for name in names)


def style(*extra: str) -> str:
    """Return the page's style with the colours of the palette in both themes."""
    light = "".join(f"--{name.replace('_', '-')}:{colour};" for name, colour in LIGHT.items())
    dark = "".join(f"--{name.replace('_', '-')}:{colour};" for name, colour in DARK.items())
    sheets = "\n".join((_STATIC / name).read_text(encoding="utf-8") for name in ("screen.css", *extra))
    return f".pk {{{light}}}\n.pk.dark {{{dark}}}\n{sheets}"


class Screen(anywidget.AnyWidget):
    """A workbench on the page. Subclasses name their state, fields, pictures and layout."""

    desk = traitlets.Dict(help="what does not change: title, layout, cursors, palette").tag(sync=True)
    scene = traitlets.List(help="panels, which point into the numbers").tag(sync=True)
    numbers = traitlets.Bytes(b"", help="float32 numbers of all panels").tag(sync=True)
    givens = traitlets.List(help="groups of fields").tag(sync=True)
    answer = traitlets.Dict(help="findings, checks, remarks as words").tag(sync=True)
    status = traitlets.Dict(help="what is going on: busy, progress, notice, serial").tag(sync=True)
    cursor = traitlets.Dict(help="place of each cursor, told by the page when a hand leaves it").tag(sync=True)

    _esm = ""
    _css = ""
    title = ""
    rows: Sequence[str] = ()  # areas of the grid of pictures
    names: Mapping[str, str] = MappingProxyType({})  # area -> title, for pictures that cannot be drawn yet
    cursors: dict[str, dict[str, Any]] = {}  # noqa: RUF012 - a fixed table of the class
    lead: Sequence[str] = ()
    cautions: Sequence[str] = ()
    rest = 0.3  # seconds without a change after which intervals are computed

    def __init__(self, state: DeskState, source: Any = None, **more: Any) -> None:
        self.state = state
        self.faults: list[str] = []
        self._background = Latest(rest=self.rest)
        self._busy = ""
        self._progress: float | None = None
        self._told = 0.0
        self._parts: dict[str, list[bytes]] = {}
        self._saved: list[str] = []
        self._echo = 0
        super().__init__(**more)
        self.desk = self._desk()
        self._guarded(lambda: self._begin(source))
        self.on_msg(self._on_message)
        self.observe(self._on_cursor, names="cursor")

    def _begin(self, source: Any) -> None:
        """Open what was asked for, in full, so that a saved notebook holds the answer."""
        if source is not None:
            self.state.begin(source)
        if self.state.answer is not None:
            self.state.refine()
        self.push()

    # What a workbench brings

    def givens_now(self) -> list[dict[str, Any]]:
        """Groups of fields."""
        raise NotImplementedError

    def panels_now(self) -> list[Panel]:
        """Pictures."""
        raise NotImplementedError

    def actions(self) -> dict[str, Callable[[dict[str, Any]], Any]]:
        """What the page may ask for beside what every workbench can do; each is followed by an answer in full."""
        return {}

    # To the page

    def _desk(self) -> dict[str, Any]:
        return {
            "kind": self.state.kind, "title": self.title, "rows": list(self.rows), "names": dict(self.names), "cursors": self.cursors, "saves": list(SAVED),
            "field_stops": [list(stop) for stop in FIELD_STOPS],
        }  # fmt: skip

    def push(self) -> None:
        """Show the state: one message, whatever changed."""
        state = self.state
        with state.lock, self.hold_sync():
            self.scene, self.numbers = pack_panels(self.panels_now())
            self.givens = self.givens_now()
            self.answer = answer_rows(
                state.answer, state.reference, full=state.full, lead=self.lead, cautions=self.cautions, comparison=state.comparison
            )
            self.status = self._status()

    def _status(self) -> dict[str, Any]:
        state = self.state
        general = state.errors.get("", "")
        return {
            "serial": state.serial, "busy": self._busy, "progress": self._progress, "notice": " ".join(filter(None, [state.notice, general])),
            "behind": state.behind, "full": state.full, "can_undo": state.can_undo, "pinned": state.reference is not None,
            "has_answer": state.answer is not None, "errors": len(state.errors), "saved": list(self._saved[-4:]), "echo": self._echo,
            "folder": str(state.folder),
        }  # fmt: skip

    def _tell(self, busy: str, progress: float | None = None) -> None:
        """Show what is going on, not more often than an eye can follow."""
        now = time.monotonic()
        if busy == self._busy and progress is not None and now - self._told < 0.1:
            return
        self._busy, self._progress, self._told = busy, progress, now
        with self.state.lock:
            self.status = self._status()

    # From the page

    def _on_cursor(self, change: Any) -> None:
        self.state.cursor = dict(change["new"])

    def _on_message(self, _widget: Any, content: Any, buffers: Sequence[Any]) -> None:
        if isinstance(content, dict) and "do" in content:
            self.act(content, buffers)

    def act(self, asked: dict[str, Any], buffers: Sequence[Any] = ()) -> None:
        """Do what the page asks for. Whatever goes wrong becomes a message; the state stays."""
        self._guarded(lambda: self._act(asked, buffers))

    def _guarded(self, work: Callable[[], Any]) -> None:
        try:
            work()
        except PulsekitError as problem:
            self.state.notice = str(problem)
            self.push()
        except Exception as problem:  # a fault of ours must not cost the user her state
            self.faults.append(traceback.format_exc())
            _log.exception("fault in a workbench")
            self.state.notice = f"A fault in PulseKit itself ({type(problem).__name__}): your case is kept. Please report it."
            self._busy, self._progress = "", None
            self.push()

    def _act(self, asked: dict[str, Any], buffers: Sequence[Any]) -> None:
        do, state = str(asked["do"]), self.state
        self._echo = int(asked.get("turn", self._echo))
        if do == "stop":
            self._background.halt()
            self._tell("")
        elif do == "part":
            self._take_part(asked, buffers)
        elif do == "choose":
            path = str(asked["text"])
            self._slowly("reading", lambda **how: self._open(path, **how))
        elif do == "save":
            self._save(str(asked["what"]))
        elif do in ("pin", "unpin"):
            getattr(state, do)()
            self.push()
            self.refine_later()
        elif do == "set" and str(asked["key"]).startswith("recording.") and self._is_large():
            if state.change(str(asked["key"]), asked["text"]):
                self._slowly("reading", state.answer_now)
            else:
                self.push()
        elif do == "sync":
            self.push()
        else:
            self._quickly(do, asked)

    def _quickly(self, do: str, asked: dict[str, Any]) -> None:
        """An action that is answered at once at the stated values; intervals follow when the hand rests."""
        state = self.state
        known: dict[str, Callable[[dict[str, Any]], Any]] = {
            "set": lambda a: state.set_value(str(a["key"]), a["text"]),
            "slide": lambda a: state.slide(str(a["key"]), float(a["number"]), gesture=str(a.get("gesture", ""))),  # type: ignore[attr-defined]
            "leave_out": lambda a: state.leave_out(int(a["number"])),
            "undo": lambda a: state.undo(),
        } | self.actions()
        if do not in known:
            return
        known[do](asked)
        self.push()
        self.refine_later()

    def refine_later(self) -> None:
        """Compute intervals, bands and shares once the hand rests."""
        if self.state.answer is not None and not self.state.full and not self.state.behind:
            self._background.submit(self._refine)

    def _refine(self, stop: Callable[[], bool]) -> None:
        def work() -> None:
            self._tell("computing intervals")
            done = self.state.refine(stop=stop) and self.state.compare_now()
            if not stop():
                self._busy, self._progress = "", None
                self.push() if done else self._tell("")

        self._guarded(work)

    def _slowly(self, busy: str, work: Callable[..., Any]) -> None:
        """Work in the background, with progress and a way to stop; an answer in full follows."""

        def job(stop: Callable[[], bool]) -> None:
            def guarded() -> None:
                self._tell(busy, 0.0)
                work(progress=lambda fraction: self._tell(busy, float(fraction)), stop=stop)
                self._busy, self._progress = "", None
                self.push()
                if not stop():
                    self._refine(stop) if self.state.answer is not None and not self.state.behind else None

            self._guarded(guarded)

        self._background.submit(job, rest=0.0)

    def _is_large(self) -> bool:
        try:
            return self.state.case.file_path("recording.file").stat().st_size > _LARGE_FILE
        except (OSError, PulsekitError):
            return False

    def _open(self, path: str, **how: Any) -> None:
        if path.lower().endswith(".toml"):
            self.state.open(path)
        else:
            self.state.choose_recording(path, **how)

    def _take_part(self, asked: dict[str, Any], buffers: Sequence[Any]) -> None:
        """One piece of an upload; the last one starts the reading."""
        name, count, index = str(asked["name"]), int(asked["count"]), int(asked["index"])
        if index == 0:
            self._parts = {name: []}
        parts = self._parts.setdefault(name, [])
        parts.extend(bytes(part) for part in buffers)
        if index + 1 < count:
            self._tell(f"receiving {name}", (index + 1) / count)
            return
        content = b"".join(self._parts.pop(name))
        self._slowly("reading", lambda **how: self.state.upload(name, content, **how))  # type: ignore[attr-defined]

    def _save(self, what: str) -> None:
        """Save in the background; the page is told where it went and gets the file to open."""

        def job(stop: Callable[[], bool]) -> None:
            def guarded() -> None:
                self._tell(f"saving {what}")
                if not self.state.full and not self.state.behind:
                    self.state.refine()
                answer = self.state.answer
                saved = save(what, answer, self.state.folder)
                late = " (the case that the pictures show, without the values that have a message)" if self.state.behind else ""
                self._saved.append(saved.sentence + late)
                self._busy, self._progress = "", None
                self.push()
                self.send({"saved": described(saved)}, [saved.file.read_bytes()])

            self._guarded(guarded)

        self._background.submit(job, rest=0.0)

    def settle(self, timeout: float = 60.0) -> bool:
        """Wait until nothing is being computed; for tests and scripts."""
        return self._background.wait(timeout)

    # Where no widget can run

    def __repr__(self) -> str:
        return f"<{type(self).__name__} on {self.state.case!r}>"

    def _repr_mimebundle_(self, **more: Any) -> Any:
        bundle = super()._repr_mimebundle_(**more)
        data, meta = bundle if isinstance(bundle, tuple) else (bundle, {})
        still = self.still()
        if data is None or not still:
            return bundle
        return {**data, "text/html": still}, meta

    def still(self) -> str:
        """Return findings and picture as static HTML, for viewers that cannot run a widget; "" before there is an answer."""
        return "" if self.state.answer is None else self.state.answer._repr_html_()
