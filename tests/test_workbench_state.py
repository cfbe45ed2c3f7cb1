"""The state of the wall-shear workbench, without a widget and without a browser."""

from __future__ import annotations

import json
import re
import shutil
from pathlib import Path

import numpy as np
import pytest

import pulsekit as pk
from pulsekit.case import analyse
from pulsekit.errors import InputError
from pulsekit.workbench.answer_pane import answer_rows, change_words
from pulsekit.workbench.charts import pack_panels, thinned
from pulsekit.workbench.desk import DeskState
from pulsekit.workbench.fields import joined, split, value_of
from pulsekit.workbench.saving import SAVED, keep_upload, save
from pulsekit.workbench.wall_shear_charts import LAYOUT, wall_shear_panels
from pulsekit.workbench.wall_shear_givens import wall_shear_givens
from pulsekit.workbench.wall_shear_state import WallShearState


@pytest.fixture
def folder(tmp_path: Path, demo: Path) -> Path:
    """A copy of the forearm case with its recording."""
    shutil.copytree(demo / "forearm", tmp_path / "forearm")
    text = (demo / "forearm.toml").read_text(encoding="utf-8")
    (tmp_path / "forearm.toml").write_text(text + "\n[uncertainty]\nsamples = 400\n", encoding="utf-8")  # few: widths are tested elsewhere
    return tmp_path


@pytest.fixture
def state(folder: Path) -> WallShearState:
    return WallShearState(folder / "forearm.toml")


def field(state: WallShearState, key: str) -> dict:
    return next(item for group in wall_shear_givens(state) for item in group["items"] if item["key"] == key)


def value(state: WallShearState, name: str = "time_averaged_wall_shear_stress") -> float:
    return state.answer.findings[name].value


def test_opening_a_case_answers_it(state):
    assert state.answer is not None
    assert not state.errors
    assert not state.can_undo
    assert value(state) == analyse(state.case, nominal_only=True).findings["time_averaged_wall_shear_stress"].value


def test_a_change_takes_effect_at_once(state):
    before = value(state)
    assert state.set_value("tube.diameter", "4.2 mm ± 0.1 mm")
    # The flow was made with the same radius: wall shear goes nearly as 1/R of the velocity, so it falls.
    assert value(state) < before
    assert state.case.get("tube.diameter") == "4.2 mm ± 0.1 mm"


@pytest.mark.parametrize(
    ("key", "text", "word"),
    [("tube.diameter", "4.1 s", "length"), ("tube.diameter", "-1 mm", "above 0"), ("cycles.harmonics", "many", "whole number"), ("fluid.kind", "tar", "blood")],
)  # fmt: skip
def test_a_bad_value_keeps_case_and_answer(state, key, text, word):
    case, answer = state.case, state.answer
    assert not state.set_value(key, text)
    assert word in state.errors[key]
    assert state.case is case
    assert state.answer is answer
    assert not state.behind
    shown = field(state, key)
    assert text in (shown["value"], *(row[0] for row in shown.get("options", [])))
    assert shown["error"]


def test_a_bad_value_is_forgotten_when_a_good_one_follows(state):
    state.set_value("tube.diameter", "nonsense")
    assert state.set_value("tube.diameter", "4.1 mm")
    assert not state.errors


def test_a_case_that_cannot_be_answered_keeps_the_last_answer(state):
    answer = state.answer
    assert not state.set_value("fluid.kind", "blood")
    assert state.answer is answer
    assert state.behind
    assert "Needed" in state.errors["fluid.temperature"]
    assert state.set_value("fluid.temperature", "37 degC")
    assert not state.behind
    assert not state.errors


def test_another_kind_of_liquid_drops_what_it_does_not_take(state):
    state.set_value("fluid.kind", "water")
    assert state.case.get("fluid.density") is None
    assert state.set_value("fluid.temperature", "20 degC")


def test_radius_and_diameter_stand_side_by_side(state):
    assert field(state, "tube.radius")["derived"] == "2.05 mm"
    assert state.set_value("tube.radius", "2 mm ± 5 %")
    assert state.case.get("tube.diameter") is None
    assert field(state, "tube.diameter")["derived"] == "4 mm"
    assert field(state, "tube.radius")["spread"] == "5 %"
    assert field(state, "tube.radius")["si"] == "0.002 m"


def test_the_slider_keeps_unit_and_uncertainty_and_is_one_step_back(state):
    start = state.case
    for number in (2.06, 2.07, 2.08):
        assert state.slide("tube.radius", number, gesture="g1")
    assert state.case.get("tube.diameter") == "4.16 mm ± 0.10 mm"
    assert state.undo()
    assert state.case == start
    assert not state.can_undo


def test_a_slider_reaches_from_half_to_twice_and_stays(state):
    first = field(state, "tube.radius")["slider"]
    assert first["low"] <= 2.05 / 1.9 + 0.2
    assert first["high"] >= 4.0
    state.slide("tube.radius", 3.0)
    second = field(state, "tube.radius")["slider"]
    assert (second["low"], second["high"], second["at"]) == (first["low"], first["high"], 3.0)


def test_the_viscosity_slider_replaces_a_correlation(state):
    state.set_value("fluid.kind", "blood")
    state.set_value("fluid.temperature", "37 degC")
    assert field(state, "fluid.viscosity")["slider"]["at"] == pytest.approx(3.84, abs=0.02)  # our correlation at 0.45 and 37 °C
    assert state.slide("fluid.viscosity", 4.0)
    assert state.answer.flow.fluid.viscosity == pytest.approx(4.0e-3, rel=1e-12)  # as typed
    assert state.case.get("fluid.viscosity") == "4 mPa*s"


def test_cycles_are_left_out_and_taken_in_again(state):
    count = state.answer.cycles.count
    assert state.leave_out(2)
    assert state.answer.cycles.count == count - 1
    assert state.case.get("cycles.leave_out") == [2]
    row = field(state, "cycles.leave_out")["rows"][1]
    assert not row["used"]
    assert row["why"]
    assert state.leave_out(2)
    assert state.answer.cycles.count == count
    assert state.case.get("cycles.leave_out") is None


def test_the_last_cycle_cannot_be_left_out(tmp_path):
    time = np.arange(0, 2.0, 0.01)
    rows = "".join(f"{t:.2f},{300 + 200 * np.sin(2 * np.pi * t):.3f}\n" for t in time)
    (tmp_path / "two.csv").write_text("time (s),flow (mL/min)\n" + rows)
    data = {"recording": {"file": "two.csv", "quantity": "flow_rate"}, "cycles": {"period": "1 s"}, "tube": {"radius": "2 mm"},
            "fluid": {"density": "1000 kg/m^3", "viscosity": "1 mPa*s"}}  # fmt: skip
    state = WallShearState(pk.WallShearCase(data, tmp_path))
    assert state.leave_out(1)
    answer = state.answer
    assert not state.leave_out(2)
    assert state.answer.cycles.count == answer.cycles.count == 1
    assert "at least one" in state.notice


def test_intervals_come_with_the_full_answer_and_not_before(state):
    assert answer_rows(state.answer, None, full=state.full, lead=(), cautions=())["findings"][0]["interval"] == ""
    assert state.refine()
    assert state.full
    rows = {
        row["name"]: row
        for row in answer_rows(state.answer, None, full=True, lead=("peak_wall_shear_stress",), cautions=("c",))["findings"]
    }
    assert " to " in rows["peak_wall_shear_stress"]["interval"]
    assert rows["peak_wall_shear_stress"]["shares"]
    assert next(iter(rows)) == "peak_wall_shear_stress"
    state.slide("tube.radius", 2.1)
    assert not state.full
    stale = answer_rows(state.answer, None, full=state.full, lead=(), cautions=())
    assert all(row["interval"] == "" and row["shares"] == [] for row in stale["findings"])


def test_a_full_answer_that_comes_too_late_is_dropped(state):
    asked = []

    def stop() -> bool:
        if not asked:
            asked.append(True)
            state.change("tube.diameter", "5 mm")
        return False

    state.refine(stop=stop)
    if asked:
        assert not state.full
    assert state.answer.case.get("tube.diameter") == "4.10 mm ± 0.10 mm" or not state.full


def test_numbers_on_the_screen_equal_those_of_the_command_line(state, folder):
    state.slide("tube.radius", 2.11)
    state.leave_out(3)
    state.refine()
    saved = save("case", state.answer, folder)
    from pulsekit.cli import main

    assert main(["run", str(saved.path), "--out", str(folder / "out"), "--no-pictures"]) == 0
    told = {row["name"]: row for row in json.loads((folder / "out" / "answer.json").read_text())["findings"]}
    assert len(told) == len(state.answer.findings) > 20
    for finding in state.answer.findings:
        assert told[finding.name]["value"] == finding.value
        assert told[finding.name]["low"] == finding.low
        assert told[finding.name]["high"] == finding.high
        assert told[finding.name]["shown_value"] == finding.shown_value


def test_pinning_compares(state):
    assert state.pin()
    reference = state.reference
    state.slide("tube.radius", 2.2)
    rows = answer_rows(state.answer, state.reference, full=False, lead=(), cautions=())
    changes = {row["name"]: row["change"] for row in rows["findings"]}
    expected = 100 * (value(state) / reference.findings["time_averaged_wall_shear_stress"].value - 1)
    assert float(changes["time_averaged_wall_shear_stress"].split()[0].replace("−", "-")) == pytest.approx(
        expected, abs=0.06
    )  # one decimal
    assert "tube.diameter = 4.10 mm ± 0.10 mm" in rows["reference"]
    panels = {panel.id: panel for panel in wall_shear_panels(state.answer, state.reference)}
    assert any(series.pale and series.name == "pinned" for series in panels["wall_shear_stress"].series)
    state.unpin()
    assert state.reference is None


def test_the_change_gets_an_interval_in_which_common_unknowns_cancel(state):
    state.pin()
    state.set_value("fluid.viscosity", "3.6 mPa*s ± 6 %")
    assert state.refine()
    assert state.compare_now()
    rows = answer_rows(state.answer, state.reference, full=True, lead=(), cautions=(), comparison=state.comparison)
    words = {row["name"]: row["change"] for row in rows["findings"]}["time_averaged_wall_shear_stress"]
    change, low, high = (float(part.replace("−", "-")) for part in re.findall(r"[−+\d.]+", words))
    assert low < change < high
    # The radius is common: the interval of the change is narrower than that of the two viscosities and radii together.
    assert high - low < 30
    state.slide("tube.radius", 2.2)
    assert state.comparison is None


def test_change_in_words():
    assert change_words(1.0, 1.0001) == "under 0.1 %"
    assert change_words(2.0, 1.0) == "−50 %"


def test_nothing_to_pin_or_save_before_an_answer(tmp_path):
    state = WallShearState(folder=tmp_path)
    assert not state.pin()
    with pytest.raises(InputError, match="no answer"):
        save("case", state.answer, tmp_path)


@pytest.mark.parametrize("what", sorted(SAVED))
def test_everything_that_is_saved_says_where(state, folder, what):
    state.refine()
    saved = save(what, state.answer, folder / "out")
    assert saved.path.exists()
    assert str(saved.path) in saved.sentence
    assert saved.file.stat().st_size > 100
    if what == "notebook":
        assert (saved.file.parent / "case.toml").exists()
        assert not (saved.file.parent / "series.csv").exists()


def test_a_new_recording_is_guessed_and_asks_for_what_is_missing(tmp_path, folder):
    state = WallShearState(folder=folder)
    assert not state.choose_recording("forearm/flow.csv")
    assert state.case.get("recording.signal") == "flow"
    assert state.case.get("recording.quantity") == "flow_rate"
    assert "Needed" in state.errors["tube.radius"]
    assert {panel.id for panel in wall_shear_panels(state.shown)} == {"recording", "cycles", "harmonics"}
    state.set_value("tube.radius", "2 mm")
    state.set_value("fluid.kind", "blood")
    state.set_value("fluid.haematocrit", "0.42")
    assert state.set_value("fluid.temperature", "37 degC")
    areas = set(" ".join(LAYOUT).split())
    assert {panel.id for panel in wall_shear_panels(state.shown)} == areas


def test_a_unit_is_corrected(tmp_path):
    rows = "".join(f"{k / 100:.2f},{300 + 200 * np.sin(2 * np.pi * k / 100):.3f}\n" for k in range(500))
    (tmp_path / "bare.csv").write_text("time (s),reading\n" + rows)
    state = WallShearState(folder=tmp_path)
    assert not state.choose_recording("bare.csv")
    state.set_value("recording.signal", "reading")
    state.set_value("recording.quantity", "flow_rate")
    assert "unit" in state.errors["recording.unit"]
    state.set_value("recording.unit", "mL/min")
    assert "recording.unit" not in state.errors
    assert state.shown.signal.unit == "mL/min"
    state.set_value("recording.unit", "L/min")
    assert float(state.shown.signal.values[0]) == pytest.approx(0.3 / 60, rel=1e-3)  # 300 L/min in m3/s


@pytest.mark.parametrize("content", [b"", b"\x00\x01\x02\x03", b"hello\nworld\n", b"time,flow\n1,2\n"])
def test_a_bad_file_is_a_message_and_nothing_else(state, content):
    answer, case = state.answer, state.case
    assert not state.upload("bad.csv", content)
    assert state.errors["recording.file"]
    assert state.answer is answer
    assert state.case is case


def test_an_uploaded_name_is_only_a_name(tmp_path):
    place = keep_upload(tmp_path, "../../<script>alert(1)</script>.csv", b"a,b\n1,2\n")
    assert place.parent == tmp_path / "recordings"
    assert "<" not in place.name
    assert keep_upload(tmp_path, "../../<script>alert(1)</script>.csv", b"a,b\n1,2\n") == place
    other = keep_upload(tmp_path, "../../<script>alert(1)</script>.csv", b"other")
    assert other != place
    assert place.read_bytes() == b"a,b\n1,2\n"


def test_a_case_of_another_kind_is_refused_in_words(tmp_path):
    (tmp_path / "line.toml").write_text('kind = "pump line"\n')
    state = WallShearState(tmp_path / "line.toml")
    assert "pump line" in state.notice
    assert state.answer is None


def test_a_missing_case_file_is_a_message(tmp_path):
    assert "no case file" in WallShearState(tmp_path / "gone.toml").notice


def test_values_of_fields():
    assert value_of("tube.axisymmetric", "yes") is True
    assert value_of("cycles.onsets", "0.1 s; 0.9 s") == ["0.1 s", "0.9 s"]
    with pytest.raises(InputError, match="yes or no"):
        value_of("tube.axisymmetric", "perhaps")


@pytest.mark.parametrize("text", ["3.1 mm", "3.1 mm ± 0.1 mm", "0.45 ± 5 %", "3.1 mm ± 0.2 mm (k=2)"])
def test_splitting_and_joining_are_inverse(text):
    assert joined(*split(text)) == text


def test_packing_points_into_the_numbers(state):
    panels = wall_shear_panels(state.answer)
    described, numbers = pack_panels(panels)
    table = np.frombuffer(numbers, dtype=np.float32)
    for panel, entry in zip(panels, described, strict=True):
        for series, row in zip(panel.series, entry["series"], strict=True):
            for array, (first, count) in zip(series.arrays, row["at"], strict=True):
                # float32 keeps seven digits, which a screen cannot show
                np.testing.assert_allclose(table[first : first + count], np.asarray(array, dtype=float).ravel(), rtol=1e-6, atol=1e-30)
    json.dumps(described, allow_nan=False)


def test_a_stamp_changes_with_its_panel_only(state):
    stamps = {entry["id"]: entry["stamp"] for entry in pack_panels(wall_shear_panels(state.answer))[0]}
    state.slide("tube.radius", 2.3)
    after = {entry["id"]: entry["stamp"] for entry in pack_panels(wall_shear_panels(state.answer))[0]}
    same = {name for name in stamps if stamps[name] == after[name]}
    assert same == {"recording", "cycles", "harmonics"}


def test_curves_are_those_of_the_answer(state):
    panels = {panel.id: panel for panel in wall_shear_panels(state.answer)}
    curve = next(series for series in panels["wall_shear_stress"].series if series.reading)
    time, shear = curve.arrays
    # Pa is the unit shown, so the curve is the harmonics' own evaluation; 1e-12 for the order of summation
    np.testing.assert_allclose(shear, state.answer.flow.wall_shear_stress.evaluate(time), rtol=1e-12, atol=1e-12)
    heat = panels["field"].series[0]
    rows, columns = heat.options["rows"], heat.options["columns"]
    field_ = np.asarray(heat.arrays[0]).reshape(rows, columns)
    np.testing.assert_allclose(field_, field_[::-1], rtol=1e-12)  # symmetric about the axis by construction of the section
    np.testing.assert_allclose(field_[[0, -1]], 0.0, atol=1e-9)  # no slip at the wall, in cm/s
    centre = state.answer.flow.centreline_velocity.evaluate(np.linspace(0, state.answer.harmonics.period, columns)) * 100
    np.testing.assert_allclose(field_[rows // 2], centre, rtol=1e-9, atol=1e-9)


def test_thinning_keeps_ends_and_extremes():
    rng = np.random.default_rng(5)
    x, y = np.arange(50_001.0), rng.normal(size=50_001)
    tx, ty = thinned(x, y)
    assert tx.size <= 2405
    assert (ty.min(), ty.max()) == (y.min(), y.max())
    assert tx[-1] >= 50_000 - 1
    assert np.all(np.diff(tx) > 0)


def test_the_common_state_knows_no_kind():
    assert DeskState.kind == ""
    assert "ipywidgets" not in repr(DeskState.__mro__)
