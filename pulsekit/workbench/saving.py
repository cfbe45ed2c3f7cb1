"""What a workbench saves, and where it went. Every file appears whole or not at all."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

from ..case import Answer, Case
from ..errors import InputError
from ..report.outlet import answer_files
from ..report.writing import place_files, safe_name

__all__ = ["SAVED", "Saved", "keep_upload", "save", "stem_of"]


class Saved:
    """A saved thing: the path that is told, and the one file that a page can offer to open."""

    def __init__(self, what: str, path: Path, file: Path, mime: str) -> None:
        self.what, self.path, self.file, self.mime = what, path, file, mime

    @property
    def sentence(self) -> str:
        """Where it went."""
        return f"{self.what} saved: {self.path}"


def stem_of(case: Case) -> str:
    """File name without ending for what is saved of a case: after its file, else its recording.

    >>> stem_of(Case.__new__(Case)) if False else safe_name("run 12.csv")
    'run 12.csv'
    """
    name = case.path.stem if case.path is not None else Path(str(case.get("recording.file") or case.get("title") or "case")).stem
    return re.sub(r"\s+", "-", safe_name(name))


def _save_case(answer: Answer, folder: Path) -> Saved:
    path = answer.case.save(folder / f"{stem_of(answer.case)}.toml")
    return Saved("Case", path, path, "text/plain")


def _save_report(answer: Answer, folder: Path) -> Saved:
    target = answer.write(folder / f"{stem_of(answer.case)}-answer")
    return Saved("Report with all tables and pictures", target / "report.html", target / "report.html", "text/html")


def _save_part(what: str, name: str, mime: str) -> Callable[[Answer, Path], Saved]:
    def save_part(answer: Answer, folder: Path) -> Saved:
        files = answer_files(answer, pictures=False)
        if name.endswith(".ipynb"):
            # The notebook re-runs from the case beside it, so that travels with it.
            dropped = (".csv", ".zip", ".json")
            own = {part for part in files if part.endswith(dropped) and part in _OWN_TABLES}
            files = {part: content for part, content in files.items() if part not in own}
        else:
            files = {name: files[name]}
        target = place_files(folder / f"{stem_of(answer.case)}-answer", files)
        return Saved(what, target / name, target / name, mime)

    return save_part


_OWN_TABLES = {"series.csv", "findings.csv", "harmonics.csv", "profile.csv", "cycles.csv", "supplement.zip", "answer.json"}

#: What can be saved: name -> function of a full answer and a folder.
SAVED: dict[str, Callable[[Answer, Path], Saved]] = {
    "case": _save_case,
    "report": _save_report,
    "notebook": _save_part("Notebook with its case", "rerun.ipynb", "application/json"),
    "series": _save_part("Curves over the cycle", "series.csv", "text/csv"),
}


def save(what: str, answer: Answer | None, folder: Path) -> Saved:
    """Save one thing of an answer.

    Raises
    ------
    InputError
        If there is no answer yet, or the folder cannot be written; nothing is left behind then.
    """
    if answer is None:
        raise InputError("there is no answer to save yet; fill in what is missing on the left", name="save", value=what)
    return SAVED[what](answer, folder)


def keep_upload(folder: Path, name: str, content: bytes) -> Path:
    """Put an uploaded recording into ``recordings`` below a folder; its name is only a name, never a path.

    A file of the same name with other content gets a number; the same content is not written twice.

    Raises
    ------
    InputError
        If nothing can be written there.
    """
    clean = safe_name(name)
    target = folder / "recordings"
    stem, ending = Path(clean).stem, Path(clean).suffix
    number = 1
    while True:
        place = target / (clean if number == 1 else f"{stem}-{number}{ending}")
        if not place.exists():
            place_files(target, {place.name: content})
            return place
        if place.is_file() and place.stat().st_size == len(content) and place.read_bytes() == content:
            return place
        number += 1


def described(saved: Saved) -> dict[str, Any]:
    """What the page is told of a saved thing."""
    return {"sentence": saved.sentence, "name": saved.file.name, "mime": saved.mime}
