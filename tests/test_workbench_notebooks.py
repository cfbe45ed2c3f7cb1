"""The notebooks of the wall-shear workbench: executed, their printed numbers compared, each ends with a static answer."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import nbformat
import pytest

NAMES = ("wall_shear.ipynb", "compare_two_recordings.ipynb")


@pytest.mark.notebook
@pytest.mark.parametrize("name", NAMES)
def test_notebook_runs_to_the_same_numbers(root: Path, tmp_path: Path, name: str):
    """Cells marked for comparison must print what the saved notebook holds."""
    (tmp_path / "none.ini").write_text("[pytest]\n")  # warnings of the notebook's own machinery are not ours to fail on
    done = subprocess.run(
        [sys.executable, "-m", "pytest", "-q", "-p", "no:cacheprovider", "-c", str(tmp_path / "none.ini"), "--rootdir", str(root), "--nbval-lax",
         "--nbval-cell-timeout=240", str(root / "notebooks" / name)],
        capture_output=True, text=True, cwd=root, timeout=400, check=False,
    )  # fmt: skip
    assert done.returncode == 0, done.stdout + done.stderr
    compared = sum("NBVAL_CHECK_OUTPUT" in cell.source for cell in nbformat.read(root / "notebooks" / name, as_version=4).cells)
    assert compared >= 3


@pytest.mark.parametrize("name", NAMES)
def test_notebook_ends_with_a_static_answer(root: Path, name: str):
    book = nbformat.read(root / "notebooks" / name, as_version=4)
    nbformat.validate(book)
    last = book.cells[-1]
    (output,) = last.outputs
    assert "<svg" in output.data["text/html"]
    assert "widget-view" not in str(list(output.data))
    assert "widgets" not in book.metadata  # no state of a past run
    workbench = next(cell for cell in book.cells if "Workbench(" in cell.source and cell.cell_type == "code")
    assert "<svg" in workbench.outputs[0].data["text/html"]


@pytest.mark.parametrize("name", NAMES)
def test_an_export_shows_the_answer_without_scripts_of_a_network(root: Path, name: str):
    """What nbconvert makes holds the findings as text and the picture as SVG."""
    from nbconvert import HTMLExporter

    book = nbformat.read(root / "notebooks" / name, as_version=4)
    page, _ = HTMLExporter(template_name="basic").from_notebook_node(book)
    assert page.count("<svg") >= 2
    assert "Time-averaged wall shear stress" in page


@pytest.mark.parametrize("name", NAMES)
def test_notebooks_hold_no_path_of_this_machine(root: Path, name: str):
    text = (root / "notebooks" / name).read_text(encoding="utf-8")
    assert str(root) not in text
    assert str(Path.home()) not in text
