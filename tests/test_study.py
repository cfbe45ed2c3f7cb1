"""A folder of recordings through one template: a row for each, failures included, resumable, the same on two workers."""

from __future__ import annotations

from pathlib import Path

import pandas as pd
import pytest

from pulsekit.errors import InputError, MissingFileError
from pulsekit.study import read_givens, run_study

COHORT = Path(__file__).parent.parent / "data_demo" / "cohort"
TEMPLATE = COHORT / "template.toml"


@pytest.fixture
def few(tmp_path):
    """Three recordings that can be answered, and one that cannot."""
    template = tmp_path / "template.toml"
    template.write_text(TEMPLATE.read_text() + "\n[uncertainty]\nsamples = 300\n")
    names = ["subject_01.csv", "subject_02.csv", "subject_03.csv", "subject_19.csv"]
    folder = tmp_path / "recordings"
    folder.mkdir()
    for name in names:
        (folder / name).write_bytes((COHORT / "recordings" / name).read_bytes())
    return template, [folder / name for name in names], tmp_path / "out"


def test_one_row_each_and_failures_stop_nothing(few):
    template, places, out = few
    result = run_study(template, places, out=out, pictures=False)
    table = pd.read_csv(result.path)
    assert list(table["recording"]) == [place.name for place in places]
    assert list(table["status"]) == ["answered", "answered", "answered", "failed"]
    assert "subject_19" in table["message"][3]
    assert (result.answered, result.failed, result.resumed) == (3, 1, 0)
    for name in ("time_averaged_wall_shear_stress low", "time_averaged_wall_shear_stress reliance", "remarks"):
        assert table[name].notna()[:3].all()
    assert (out / "subject_01" / "answer.json").exists()


def test_finished_recordings_are_not_computed_again(few):
    template, places, out = few
    first = run_study(template, places[:2], out=out, pictures=False)
    stamp = (out / "subject_01" / "answer.json").stat().st_mtime_ns
    again = run_study(template, places, out=out, pictures=False)
    assert again.resumed == 2
    assert (out / "subject_01" / "answer.json").stat().st_mtime_ns == stamp
    pd.testing.assert_frame_equal(first.table.reset_index(drop=True), again.table.iloc[:2][first.table.columns].reset_index(drop=True))
    template.write_text(template.read_text().replace("4 %", "5 %"))
    assert run_study(template, places, out=out, pictures=False).resumed == 0


def test_two_workers_give_the_same_table(few):
    template, places, out = few
    one = run_study(template, places, out=out, pictures=False).table
    two = run_study(template, places, out=out.with_name("two"), pictures=False, jobs=2).table
    assert list(two["message"]) == list(one["message"])
    pd.testing.assert_frame_equal(one, two)


def test_givens_per_recording(few, tmp_path):
    template, places, out = few
    table = tmp_path / "subjects.csv"
    table.write_text("recording,tube.radius (mm),fluid.haematocrit\nsubject_01,1.5 ± 0.1,0.40\nsubject_02.csv,,\n")
    rows = read_givens(table)
    assert rows["subject_01"] == {"tube.radius": "1.5 mm ± 0.1 mm", "fluid.haematocrit": "0.40"}
    assert rows["subject_02.csv"] == {}
    result = run_study(template, places[:2], out=out, givens=table, pictures=False)
    case = (out / "subject_01" / "case.toml").read_text()
    assert 'radius = "1.5 mm ± 0.1 mm"' in case
    assert result.failed == 0


def test_givens_of_nobody_are_refused(few, tmp_path):
    template, places, out = few
    table = tmp_path / "subjects.csv"
    table.write_text("recording,tube.radius (mm)\nsubject_77,1.5\n")
    with pytest.raises(InputError, match="subject_77"):
        run_study(template, places, out=out, givens=table)
    with pytest.raises(MissingFileError, match="nowhere"):
        run_study(template, places, out=out, givens=tmp_path / "nowhere.csv")
    with pytest.raises(InputError, match="no recording"):
        run_study(template, [], out=out)
