"""Writes and executes the notebooks of the wall-shear workbench: python tests/make_notebooks.py.

Run it after a change that moves a number; the tests compare what the notebooks print with what is saved in them.
"""

from __future__ import annotations

import hashlib
from pathlib import Path

import nbformat
from nbclient import NotebookClient
from nbformat.v4 import new_code_cell, new_markdown_cell, new_notebook

FOLDER = Path(__file__).resolve().parents[1] / "notebooks"
KERNEL = {"kernelspec": {"name": "python3", "display_name": "Python 3", "language": "python"}, "language_info": {"name": "python"}}


def build(name: str, cells: list[tuple[str, str]]) -> None:
    made = []
    for number, (kind, source) in enumerate(cells):
        cell = (new_markdown_cell if kind == "md" else new_code_cell)(source.strip("\n"))
        cell["id"] = hashlib.sha256(f"{name}{number}".encode()).hexdigest()[:8]
        made.append(cell)
    book = new_notebook(cells=made, metadata=KERNEL)
    NotebookClient(
        book, timeout=300, kernel_name="python3", store_widget_state=False, resources={"metadata": {"path": str(FOLDER)}}
    ).execute()
    for cell in book.cells:
        cell.metadata = {}
    book.metadata = KERNEL
    nbformat.write(book, FOLDER / name)


build(
    "wall_shear.ipynb",
    [
        (
            "md",
            """# Wall shear of a forearm artery (invented recording)

The cell below opens the workbench with a case whose recording is invented; `WallShearWorkbench()` opens an empty one: choose a file or drop it on it. Nothing else needs to be typed as code.

*Estimates for engineering and research use: not for diagnosis or treatment decisions.*""",
        ),
        (
            "code",
            """from pulsekit.workbench import WallShearWorkbench

WallShearWorkbench("../data_demo/forearm.toml")""",
        ),
        (
            "md",
            "## The same case in six lines\n\nWorkbench, command line and code run the same case and give the same numbers to the last digit.",
        ),
        (
            "code",
            """# NBVAL_CHECK_OUTPUT
import pulsekit as pk

case = pk.load_case("../data_demo/forearm.toml")
answer = pk.analyse(case)
for name in ("time_averaged_wall_shear_stress", "peak_wall_shear_stress", "oscillatory_shear_index", "mean_flow_rate"):
    finding = answer.findings[name]
    print(f"{finding.label}: {finding.shown_value} ({finding.shown_low} to {finding.shown_high}) {finding.shown_unit}, {finding.reliance}")""",
        ),
        ("md", "## What narrows the interval, and what could not be checked"),
        (
            "code",
            """# NBVAL_CHECK_OUTPUT
print(answer.improve)
for check in answer.checks:
    if check.verdict != "holds":
        print(f"{check.verdict}: {check.label}. {check.because}")""",
        ),
        (
            "md",
            "## The report\n\nOne folder that travels: the page, all tables and pictures, the recording, and the case that re-runs to the same numbers. Here it goes to a temporary place.",
        ),
        (
            "code",
            """# NBVAL_CHECK_OUTPUT
import tempfile

folder = answer.write(tempfile.mkdtemp() + "/forearm")
print(*sorted(path.name for path in folder.iterdir()), sep="\\n")""",
        ),
        ("md", "## The answer, where no widget can run"),
        ("code", "answer"),
    ],
)
build(
    "compare_two_recordings.ipynb",
    [
        (
            "md",
            """# Two recordings side by side (invented)

Two questions that come up every week: has something changed between two recordings of the same kind, and does a bench model stand for the vessel that it copies? Two overlapping intervals do not answer that, since most of their width is common to both. `pk.compare` draws what is common once.

*Estimates for engineering and research use: not for diagnosis or treatment decisions.*""",
        ),
        (
            "md",
            "## Before and after\n\nThe same vessel, the same diameter, the same blood; half of the beats stand for before, the other half for after.",
        ),
        (
            "code",
            """# NBVAL_CHECK_OUTPUT
import pulsekit as pk

case = pk.load_case("../data_demo/forearm.toml")
before = pk.analyse(case.with_value("cycles.leave_out", [8, 9, 10, 11, 12, 13, 14]))
after = pk.analyse(case.with_value("cycles.leave_out", [1, 2, 3, 4, 5, 6, 7, 9]))


def said(finding):
    return f"{finding.label}: {finding.shown_value} ({finding.shown_low} to {finding.shown_high}) {finding.shown_unit}".rstrip()


for answer in (before, after):
    print(said(answer.findings["time_averaged_wall_shear_stress"]))""",
        ),
        (
            "code",
            """# NBVAL_CHECK_OUTPUT
comparison = pk.compare(after, before)
for name in ("time_averaged_wall_shear_stress", "peak_wall_shear_stress", "mean_flow_rate"):
    print(said(comparison.findings[f"ratio_of_{name}"]))
print(*comparison.remarks, sep="\\n")""",
        ),
        (
            "md",
            "The ratio's interval is narrower than those of the two values: diameter, viscosity and calibration are common to both and cancel; what is left is how much beats differ. It holds 1: no change is shown.",
        ),
        (
            "md",
            "## Bench model against subject\n\nA tube on the bench and the forearm share nothing: here the intervals of both count in full.",
        ),
        (
            "code",
            """# NBVAL_CHECK_OUTPUT
bench = pk.analyse(pk.load_case("../data_demo/bench.toml"))
subject = pk.analyse(case)
for name in ("womersley_number", "mean_reynolds_number", "oscillatory_shear_index", "time_averaged_wall_shear_stress"):
    print(said(bench.findings[name]))
    print("   forearm:", said(subject.findings[name]))
model = pk.compare(bench, subject)
print(said(model.findings["ratio_of_womersley_number"]))""",
        ),
        (
            "md",
            "A model stands for its vessel where Womersley and Reynolds numbers agree; this one is built for another vessel.\n\n## Side by side in the workbench\n\nPin one case (button **Pin**) and change it, or open the other recording: the pinned curves stay, pale, and each finding shows its change with its interval.",
        ),
        (
            "code",
            """from pulsekit.workbench import WallShearWorkbench

workbench = WallShearWorkbench(before.case)
workbench.act({"do": "pin"})
workbench""",
        ),
        ("md", "## The answer, where no widget can run"),
        ("code", "after"),
    ],
)
