"""The command line: exit codes, one sentence on bad input, help that a newcomer understands, drafts that lead to an answer."""

from __future__ import annotations

import subprocess
import sys

import nbformat
import numpy as np
import pytest

import pulsekit as pk
from pulsekit.case.draft import YOURS
from pulsekit.cli import main

TIME = np.arange(0, 6, 0.01)
CASE = """\
kind = "wall shear"
title = "Loop 7"
[recording]
file = "run.csv"
signal = "flow"
quantity = "flow_rate"
[tube]
radius = "3.1 mm ± 0.1 mm"
[fluid]
kind = "blood"
haematocrit = "0.45 ± 0.02"
temperature = "37 degC"
[uncertainty]
samples = 500
"""


@pytest.fixture
def folder(tmp_path):
    values = 300 + 250 * np.cos(2 * np.pi * 1.25 * TIME) + 80 * np.cos(4 * np.pi * 1.25 * TIME)
    rows = "\n".join(f"{a:.2f},{b:.4f}" for a, b in zip(TIME, values, strict=True))
    (tmp_path / "run.csv").write_text("time (s),flow (mL/min)\n" + rows + "\n")
    (tmp_path / "case.toml").write_text(CASE, encoding="utf-8")
    return tmp_path


def called(capsys, *words):
    code = main([str(word) for word in words])
    out = capsys.readouterr()
    return code, out.out, out.err


def test_run_writes_the_answer_and_prints_it(folder, capsys):
    code, out, err = called(capsys, "run", folder / "case.toml", "--out", folder / "answer")
    assert (code, err) == (0, "")
    assert (folder / "answer" / "report.html").exists()
    for word in ("Loop 7", "Time-averaged wall shear stress", "mL/min", "Reliance", "Verdict", "not for diagnosis"):
        assert word in out


BAD = [
    ('radius = "3.1 mm ± 0.1 mm"', 'radius = "-3 mm"', "above 0"),
    ('radius = "3.1 mm ± 0.1 mm"', 'raduis = "3 mm"', "did you mean 'radius'"),
    ('radius = "3.1 mm ± 0.1 mm"', "", "tube.radius"),
    ('signal = "flow"', 'signal = "flux"', "flow"),
    ('file = "run.csv"', 'file = "gone.csv"', "gone.csv"),
    ('haematocrit = "0.45 ± 0.02"', "haematocrit = 45", "per cent or fraction"),
    ("[tube]", '[cycles]\nperiod = "100 s"\n[tube]', "100"),
    ('kind = "wall shear"', "kind = wall shear", "TOML"),
]


@pytest.mark.parametrize(("old", "new", "word"), BAD, ids=[new or "left out" for _, new, _ in BAD])
def test_bad_input_is_one_sentence_and_leaves_nothing(folder, capsys, old, new, word):
    (folder / "case.toml").write_text(CASE.replace(old, new), encoding="utf-8")
    before = sorted(folder.iterdir())
    code, out, err = called(capsys, "run", folder / "case.toml", "--out", folder / "answer")
    assert code == 2
    assert out == ""
    assert len(err.strip().splitlines()) == 1
    assert word in err
    assert "Traceback" not in err
    assert sorted(folder.iterdir()) == before


def test_a_missing_case(folder, capsys):
    code, _, err = called(capsys, "run", folder / "gone.toml", "--out", folder / "answer")
    assert code == 2
    assert "gone.toml" in err


def test_no_traceback_in_a_real_process(folder):
    done = subprocess.run(
        [sys.executable, "-m", "pulsekit.cli", "run", "gone.toml", "--out", "answer"], cwd=folder, capture_output=True, text=True, check=False, timeout=60
    )
    assert done.returncode == 2
    assert "Traceback" not in done.stderr
    assert not (folder / "answer").exists()


def test_a_console_of_plain_ascii(folder):
    import os

    done = subprocess.run(
        [sys.executable, "-m", "pulsekit.cli", "run", "case.toml", "--out", "answer", "--no-pictures"], cwd=folder, capture_output=True, check=False,
        timeout=120, env=os.environ | {"PYTHONIOENCODING": "ascii"},
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    assert b"Time-averaged wall shear stress" in done.stdout


@pytest.mark.parametrize("verb", [(), ("draft",), ("run",), ("open",), ("study",)])
def test_help(capsys, verb):
    code, out, _ = called(capsys, *verb, "--help")
    assert code == 0
    assert "Usage: pulsekit" in out


def test_help_names_the_four_verbs_and_the_way(capsys):
    _, out, _ = called(capsys, "--help")
    for word in ("draft", "run", "open", "study", "report.html"):
        assert word in out


def test_wrong_use_is_code_2(capsys):
    assert called(capsys, "fly")[0] == 2
    assert called(capsys, "run", "case.toml")[0] == 2


def test_a_draft_leads_to_an_answer(folder, capsys):
    code, out, _ = called(capsys, "draft", folder / "run.csv")
    assert code == 0
    drafted = folder / "run.toml"
    assert YOURS in out
    text = drafted.read_text(encoding="utf-8")
    assert 'signal = "flow"' in text
    assert 'quantity = "flow_rate"' in text
    # Unfilled it is refused by what is missing, not with a guess.
    code, _, err = called(capsys, "run", drafted, "--out", folder / "answer")
    assert code == 2
    assert "tube.radius" in err
    lines = [line.removeprefix("# ") if line.startswith(("# radius", "# kind", "# haematocrit", "# temperature")) else line for line in text.splitlines()]
    drafted.write_text("\n".join(lines), encoding="utf-8")
    code, _, err = called(capsys, "run", drafted, "--out", folder / "answer", "--no-pictures")
    assert (code, err) == (0, "")


def test_a_draft_never_overwrites(folder, capsys):
    (folder / "run.toml").write_text("mine")
    code, _, err = called(capsys, "draft", folder / "run.csv")
    assert code == 2
    assert "exists" in err
    assert (folder / "run.toml").read_text() == "mine"


def test_a_draft_into_another_folder_finds_the_recording(folder, capsys):
    (folder / "cases").mkdir()
    assert called(capsys, "draft", folder / "run.csv", "--to", folder / "cases" / "a.toml")[0] == 0
    case = pk.load_case(folder / "cases" / "a.toml")
    assert case.file_path("recording.file").resolve() == (folder / "run.csv").resolve()


def test_a_draft_of_pressures_in_bar_is_a_pump_line(folder, capsys):
    rows = "\n".join(f"{a:.2f},{180 + np.cos(40 * a):.4f}" for a in TIME)
    (folder / "p.csv").write_text("time (s),p1 (bar)\n" + rows + "\n")
    assert called(capsys, "draft", folder / "p.csv")[0] == 0
    assert pk.load_case(folder / "p.toml").kind == "pump line"


def test_a_column_name_is_only_text_in_a_draft(folder, capsys):
    rows = "\n".join(f"{a:.2f},{300 + np.cos(9 * a):.4f}" for a in TIME)
    (folder / "odd.csv").write_text('time (s),"a""b\\c (mL/min)"\n' + rows + "\n")
    assert called(capsys, "draft", folder / "odd.csv")[0] == 0
    case = pk.load_case(folder / "odd.toml")
    assert case.get("recording.signal") in pk.read_recording(folder / "odd.csv").columns


def test_open_prepares_a_notebook(folder, capsys):
    code, out, _ = called(capsys, "open", "wall-shear", folder / "case.toml", "--no-start")
    assert code == 0
    book = nbformat.read(folder / "case-workbench.ipynb", as_version=4)
    assert "WallShearWorkbench" in book.cells[-1].source
    assert "case.toml" in book.cells[-1].source
    assert "case-workbench.ipynb" in out


def test_open_says_which_kind_a_case_is(folder, capsys):
    code, _, err = called(capsys, "open", "pump-line", folder / "case.toml", "--no-start")
    assert code == 2
    assert "wall-shear" in err


def test_open_names_the_extra(folder, capsys, monkeypatch):
    import importlib.util

    real = importlib.util.find_spec
    monkeypatch.setattr(importlib.util, "find_spec", lambda name, *more: None if name == "anywidget" else real(name, *more))
    code, _, err = called(capsys, "open", "wall-shear", folder / "case.toml", "--no-start")
    assert code == 2
    assert "pip install 'pulsekit[workbench]'" in err


def test_study_keeps_going(folder, capsys):
    (folder / "runs").mkdir()
    for name in ("a", "b"):
        (folder / "runs" / f"{name}.csv").write_text((folder / "run.csv").read_text())
    (folder / "runs" / "c.csv").write_text("nothing useful\n")
    code, out, _ = called(capsys, "study", folder / "case.toml", "--recordings", folder / "runs" / "*.csv", "--out", folder / "all", "--no-pictures")
    assert code == 0
    assert "2 answered, 1 failed" in out
    assert "c.csv" in out
    assert (folder / "all" / "findings.csv").exists()


def test_a_draft_asks_for_the_block_and_takes_it(demo, tmp_path, capsys):
    code, _, err = called(capsys, "draft", demo / "gated" / "cycle.csv", "--to", tmp_path / "a.toml")
    assert code == 2
    assert "Artery" in err
    code, _, err = called(capsys, "draft", demo / "gated" / "cycle.csv", "--block", "Artery", "--to", tmp_path / "a.toml")
    assert (code, err) == (0, "")
    case = pk.load_case(tmp_path / "a.toml")
    assert case.get("recording.block") == "Artery"
    assert case.get("recording.area") == "Area"
    assert case.get("recording.deviation") == "Velocity deviation"


def test_a_draft_of_two_pressures_along_a_line(demo, tmp_path, capsys):
    assert called(capsys, "draft", demo / "wash_down" / "ramp.csv", "--to", tmp_path / "a.toml")[0] == 0
    case = pk.load_case(tmp_path / "a.toml")
    assert case.kind == "pump line"
    assert [station["column"] for station in case.get("station")] == ["p1", "p2"]
    assert case.get("recording.trigger") == "trigger"
