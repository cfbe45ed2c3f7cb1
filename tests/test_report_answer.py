"""The report of a whole answer: everything there, nothing fetched, nothing from a user's file is markup."""

from __future__ import annotations

import html.parser
import json
import re
import zipfile
from io import BytesIO

import numpy as np
import pandas as pd
import pytest

import pulsekit as pk
from pulsekit.case import Workspace

HOSTILE = "<script>alert('x')</script> $\\frac{1}{2}$ =cmd|'/C calc'!A0"


@pytest.fixture(scope="module")
def answer(tmp_path_factory):
    folder = tmp_path_factory.mktemp("hostile")
    time = np.arange(0, 6.0, 0.02)
    flow = 300 + 200 * np.cos(2 * np.pi * time) + 30 * np.cos(4 * np.pi * time + 1) + 2 * np.cos(17 * time)
    rows = "".join(f"{t:.2f},{q:.2f}\n" for t, q in zip(time, flow, strict=True))
    (folder / "run.csv").write_text("time (s),<script>flow</script> (mL/min)\n" + rows)
    case = pk.WallShearCase(
        {
            "title": HOSTILE, "recording": {"file": "run.csv", "quantity": "flow_rate", "scale_uncertainty": "2 %"}, "cycles": {"period": "1 s"},
            "tube": {"radius": "3.1 mm ± 5 %"}, "fluid": {"density": "1060 kg/m^3", "viscosity": "3.5 mPa*s ± 4 %"}, "uncertainty": {"samples": 500},
        },
        folder,
    )  # fmt: skip
    return pk.analyse(case, workspace=Workspace())


@pytest.fixture(scope="module")
def folder(answer, tmp_path_factory):
    return answer.write(tmp_path_factory.mktemp("out") / "answer")


class _Page(html.parser.HTMLParser):
    def __init__(self):
        super().__init__()
        self.tags, self.addresses = [], []

    def handle_starttag(self, tag, attrs):
        self.tags.append(tag)
        self.addresses += [value for name, value in attrs if name in ("src", "href", "xlink:href", "action", "data") and value]


def test_the_page_fetches_nothing_and_runs_nothing(folder):
    text = (folder / "report.html").read_text()
    page = _Page()
    page.feed(text)
    assert "script" not in page.tags
    assert all(address.startswith("#") for address in page.addresses)
    assert not re.search(r"url\((?!#|\"?#|'?#)", text)
    assert not re.search(r"\bon\w+=", re.sub(r">[^<]*<", "><", text))
    assert "&lt;script&gt;alert" in text


def test_everything_is_on_the_page(answer, folder):
    text = (folder / "report.html").read_text()
    for section in ("answer", "checks", "asked-for", "givens", "data", "pictures", "cycles", "if-asked", "method", "shares", "cautions", "provenance"):
        assert f'id="{section}"' in text
    for finding in answer.findings:
        assert finding.label.split(",")[0].replace("'", "&#39;") in text
    assert answer.provenance["sha256"] in text
    assert "not for diagnosis" in text
    assert "at least" in text  # density carries no uncertainty
    assert text.count("<svg") == 7


def test_all_files_are_there(folder):
    names = {path.relative_to(folder).as_posix() for path in folder.rglob("*") if path.is_file()}
    assert {"report.html", "answer.json", "series.csv", "case.toml", "findings.csv", "harmonics.csv", "profile.csv", "cycles.csv", "rerun.ipynb", "run.csv",
            "supplement.zip"} <= names  # fmt: skip
    assert {"figures/wall_shear_stress.svg", "figures/wall_shear_stress.pdf"} <= names
    packed = zipfile.ZipFile(BytesIO((folder / "supplement.zip").read_bytes())).namelist()
    assert "report.html" in packed


def test_the_series_reads_back(answer, folder):
    recording = pk.read_recording(folder / "series.csv")
    assert {"flow_rate", "pressure_gradient", "wall_shear_stress", "centreline_velocity"} <= set(recording.columns)
    signal = recording["wall_shear_stress"]
    expected = answer.flow.wall_shear_stress.evaluate(signal.time)
    np.testing.assert_allclose(signal.values, expected, rtol=1e-9, atol=1e-12)
    low = pd.read_csv(folder / "series.csv")["wall_shear_stress_low (Pa)"]
    assert (low <= pd.read_csv(folder / "series.csv")["wall_shear_stress_high (Pa)"]).all()


def test_numbers_are_the_same_in_every_output(answer, folder):
    content = json.loads((folder / "answer.json").read_text())
    table = pd.read_csv(folder / "findings.csv").set_index("name")
    for row in content["findings"]:
        finding = answer.findings[row["name"]]
        assert row["value"] == finding.value
        if finding.shown_value is not None:
            assert table.loc[row["name"], "value"] == pytest.approx(row["shown_value"], rel=1e-12)
        assert table.loc[row["name"], "reliance"] == row["reliance"]


def test_no_cell_is_a_formula(folder):
    for path in folder.glob("*.csv"):
        if path.name == "run.csv":
            continue
        for line in path.read_text().splitlines():
            for cell in line.split(","):
                assert not cell.strip('"').startswith(("=", "@", "+")), (path.name, cell)


def test_the_saved_case_gives_the_same_numbers(answer, folder):
    again = pk.analyse(pk.load_case(folder / "case.toml"))
    assert [(f.value, f.low, f.high) for f in again.findings] == [(f.value, f.low, f.high) for f in answer.findings]


def test_a_notebook_shows_it_without_a_widget(answer):
    text = answer._repr_html_()
    page = _Page()
    page.feed(text)
    assert "script" not in page.tags
    assert "svg" in page.tags
    assert all(address.startswith("#") for address in page.addresses)


def test_if_you_are_asked(folder):
    text = (folder / "report.html").read_text()
    asked = text[text.index('id="if-asked"') : text.index('id="method"')]
    for word in ("as answered", "quasi-steady", "without cycle 1", "radius +5 %", "viscosity −5 %", "harmonics instead of", "aligned by"):
        assert word in asked
