"""The ways out of an answer: a folder of files, and what a notebook shows of it."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

from .drawing import to_pdf, to_svg
from .notebook import notebook_bytes
from .page import Page, Picture, render
from .tables import cycles_table, findings_table, harmonics_table, profile_table, series_table, to_csv
from .writing import json_bytes, place_files, portable_case, zip_of

__all__ = ["answer_files", "show", "write"]


def write(answer: Any, folder: str | Path, *, pictures: bool = True, workspace: Any = None) -> Path:
    """Write an answer as a folder: report, JSON, tables, pictures, notebook, the case and its recording.

    Parameters
    ----------
    answer : Answer
    folder : path
        Made if it does not exist; files of the same names are replaced, others stay.
    pictures : bool
        False leaves out the pictures and the report page, for many cases in a row.

    Returns
    -------
    Path
        The folder.

    Raises
    ------
    InputError
        If the folder cannot be written; nothing is left behind then.
    """
    return place_files(folder, answer_files(answer, pictures=pictures, workspace=workspace))


def answer_files(answer: Any, *, pictures: bool = True, workspace: Any = None) -> dict[str, bytes]:
    """Return every file of the answer's folder, as relative name -> content."""
    files: dict[str, bytes] = {}
    names = {
        "report.html", "answer.json", "series.csv", "findings.csv", "harmonics.csv", "profile.csv", "cycles.csv", "case.toml",
        "rerun.ipynb", "supplement.zip",
    }  # fmt: skip
    case, copies, notes = portable_case(answer.case, answer.case.to_dict(), reserved=set(names))
    case_text = case.to_toml()
    files["case.toml"] = case_text.encode()
    files |= copies
    files["answer.json"] = json_bytes(answer.to_dict())
    for name, table in _tables(answer).items():
        files[name] = to_csv(table).encode()
    files["rerun.ipynb"] = notebook_bytes(str(answer.case.get("title") or "Untitled case"), answer.kind)
    if pictures:
        drawn: list[Picture] = []
        for name, (caption, draw) in _figures(answer).items():
            figure = draw(answer)
            svg = to_svg(figure, name)
            drawn.append(Picture(name, svg, caption, wide=float(figure.get_size_inches()[0]) > 5))
            files[f"figures/{name}.svg"] = ('<?xml version="1.0" encoding="utf-8"?>\n' + svg).encode()
            files[f"figures/{name}.pdf"] = to_pdf(figure)
        page = _page(answer)(answer, drawn, case_text=case_text, notes=notes, workspace=workspace)
        files["report.html"] = render(answer, page).encode()
    files["supplement.zip"] = zip_of(files)
    return files


def _tables(answer: Any) -> dict[str, Any]:
    if answer.kind == "wall shear":
        return {
            "findings.csv": findings_table(answer), "series.csv": series_table(answer), "harmonics.csv": harmonics_table(answer),
            "profile.csv": profile_table(answer), "cycles.csv": cycles_table(answer),
        }  # fmt: skip
    from .line_tables import line_tables

    return line_tables(answer)


def _figures(answer: Any) -> dict[str, tuple[str, Callable[[Any], Any]]]:
    if answer.kind == "wall shear":
        from .tube_figures import TUBE_FIGURES

        return TUBE_FIGURES
    from .line_figures import line_figures

    return line_figures(answer)


def _page(answer: Any) -> Callable[..., Page]:
    if answer.kind == "wall shear":
        from .tube_page import tube_page

        return tube_page
    from .line_page import line_page

    return line_page


def show(answer: Any) -> str:
    """Return the static picture of an answer for a notebook: findings, checks and one curve, nothing fetched."""
    from .glance import glance

    return glance(answer)
