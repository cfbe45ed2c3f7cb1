"""The walks through a week and the pump line's notebook: executed, and every printed number compared with what is saved."""

from __future__ import annotations

from pathlib import Path

import nbformat
import pytest
from nbclient import NotebookClient

NAMES = ("pump_line.ipynb", "from_doppler_to_paper.ipynb", "from_recording_to_recommendation.ipynb")


def _printed(cell) -> str:
    return "".join(output.get("text", "") for output in cell.get("outputs", []) if output.get("name") == "stdout")


@pytest.mark.notebook
@pytest.mark.parametrize("name", NAMES)
def test_notebook_prints_what_is_saved_in_it(root: Path, name: str):
    saved = nbformat.read(root / "notebooks" / name, as_version=4)
    book = nbformat.read(root / "notebooks" / name, as_version=4)
    NotebookClient(book, timeout=300, resources={"metadata": {"path": str(root / "notebooks")}}).execute()
    compared = 0
    for before, after in zip(saved.cells, book.cells, strict=True):
        if before.cell_type == "code" and "changes" not in before.metadata.get("tags", []):
            assert _printed(after) == _printed(before), before.source
            compared += bool(_printed(before))
    assert compared >= 4


@pytest.mark.parametrize("name", NAMES)
def test_notebook_ends_with_a_static_answer(root: Path, name: str):
    book = nbformat.read(root / "notebooks" / name, as_version=4)
    nbformat.validate(book)
    page = "".join(output.get("data", {}).get("text/html", "") for output in book.cells[-1].outputs)
    assert "<svg" in page
    assert "<script" not in page
    text = (root / "notebooks" / name).read_text(encoding="utf-8")
    assert str(root) not in text
    assert str(Path.home()) + "/" not in text
