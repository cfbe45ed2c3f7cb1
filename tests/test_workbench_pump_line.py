"""The pump-line workbench without a browser: its state under every hand's move, and the widget that draws it."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

import pulsekit as pk
from pulsekit.workbench.pump_line import PumpLineWorkbench
from pulsekit.workbench.pump_line_charts import LAYOUT, NAMES, pump_line_panels
from pulsekit.workbench.pump_line_state import NEW_ELEMENTS, PumpLineState

DEMO = Path(__file__).parent.parent / "data_demo"


@pytest.fixture
def state():
    found = PumpLineState(DEMO / "supply.toml")
    assert found.errors == {}
    return found


def largest(state):
    return state.answer.findings["largest_peak_to_peak_pressure"].value


def test_the_demo_opens_with_the_numbers_of_analyse(state):
    direct = pk.analyse(pk.load_case(DEMO / "supply.toml"), nominal_only=True)
    assert [f.value for f in state.answer.findings] == [f.value for f in direct.findings]


def test_add_move_edit_undo(state):
    before = largest(state)
    state.select_element(0)
    assert state.add_element("gas damper")
    assert [row["kind"] for row in state.elements] == ["pipe", "gas damper"]
    behind = largest(state)
    assert state.move_element(1, -1)
    assert [row["kind"] for row in state.elements] == ["gas damper", "pipe"]
    assert largest(state) != behind
    assert state.set_value("element.1.length", "3 m ± 5 mm")
    assert state.answer.response.line.length == pytest.approx(3.0)
    for _ in range(3):
        state.undo()
    assert largest(state) == before
    assert [row["kind"] for row in state.elements] == ["pipe"]


@pytest.mark.parametrize("kind", NEW_ELEMENTS)
def test_every_new_element_can_be_answered_at_once(state, kind):
    state.add_element(kind, 0)
    assert state.answer.case == state.case, state.errors


def test_a_line_that_makes_no_sense_keeps_the_last_good_picture(state):
    good = state.answer
    assert not state.set_value("element.0.length", "-2 m")
    assert "above 0" in state.errors["element.0.length"]
    assert state.answer is good
    assert state.case.get("element.0.length") == "2.4 m ± 5 mm"
    state.add_element("side branch", 1)  # at the end of the line
    assert state.answer is good
    assert "side branch" in " ".join(state.errors.values())
    state.undo()
    assert not state.errors or state.answer.case == state.case


def test_oil_temperature_moves_the_answer(state):
    before = state.answer.findings["steady_pressure_drop"].value
    assert state.set_value("fluid.temperature", "20 degC")
    assert state.answer.findings["steady_pressure_drop"].value > 1.5 * before


def test_a_recording_becomes_stations_and_asks_for_positions(tmp_path):
    state = PumpLineState(folder=tmp_path)
    recording = tmp_path / "ramp.csv"
    recording.write_bytes((DEMO / "wash_down" / "ramp.csv").read_bytes())
    state.choose_recording(recording)
    assert [row["column"] for row in state.case.get("station")] == ["p1", "p2"]
    assert state.case.get("recording.trigger") == "trigger"
    assert state.errors  # what is missing is asked for


def test_a_missing_recording_is_a_message(tmp_path):
    state = PumpLineState(folder=tmp_path)
    assert not state.choose_recording("nowhere.csv")
    assert "nowhere.csv" in state.errors["station.0.file"]


def test_what_helps_and_keeping_it(state):
    assert not state.help_is_current
    state.find_help()
    assert state.help_is_current
    assert not state.keep_change(state.helped[0].name)
    assert "cannot drive a changed one" in state.notice
    case = state.case.without("source").without("station").without("recording").with_value("source.kind", "axial piston pump")
    state.take(case.with_value("source.pistons", 9).with_value("source.dead_volume", "2.8 mL"))
    assert state.answer_now(), state.errors
    state.find_help()
    best = state.helped[0]
    before = largest(state)
    assert best.ratio < 0.7
    assert state.keep_change(best.name)
    assert state.reference is not None
    # the answer's own grid of positions is coarser than the table's
    assert largest(state) == pytest.approx(best.ratio * before, rel=0.03)
    assert not state.help_is_current


def test_charts_are_functions_of_an_answer():
    answer = pk.analyse(pk.load_case(DEMO / "wash_down.toml").with_value("uncertainty.samples", 200))
    panels = pump_line_panels(answer, answer)
    assert {panel.id for panel in panels} == set(NAMES) == set(" ".join(LAYOUT).split())
    for panel in panels:
        for series in panel.series:
            for array in series.arrays:
                assert np.asarray(array).size > 0
        if panel.id in ("envelope", "orders", "speed"):
            assert "p-p" in panel.title
    assert pump_line_panels(None) == []


def test_one_move_is_one_message_of_numbers():
    workbench = PumpLineWorkbench(DEMO / "supply.toml")
    workbench.settle()
    seen = []
    workbench.observe(lambda change: seen.append(change["name"]), names=["scene", "numbers"])
    workbench.act({"do": "slide", "key": "element.0.length", "number": 2.6})
    assert seen.count("numbers") == 1
    workbench.settle()
    assert workbench.faults == []


def test_nothing_a_page_asks_for_raises():
    workbench = PumpLineWorkbench()
    for asked in (
        {"do": "add_element", "kind": "pipe"}, {"do": "add_element", "kind": "nonsense"}, {"do": "move_element", "place": 9, "by": 1},
        {"do": "remove_element", "place": -4}, {"do": "keep_change", "name": "<script>"}, {"do": "set", "key": "end.kind", "text": "ajar"},
        {"do": "select_element", "number": 99}, {"do": "choose", "text": "../../etc/passwd"}, {"do": "pin"}, {"do": "undo"},
    ):  # fmt: skip
        workbench.act(asked)
    workbench.settle()
    assert workbench.state.case.kind == "pump line"


def test_fields_are_labelled_and_buttons_say_what_they_do():
    workbench = PumpLineWorkbench(DEMO / "wash_down.toml")
    for group in workbench.givens_now():
        assert group["title"]
        for item in group["items"]:
            assert item["label"]
            for button in item.get("buttons", []):
                assert button["name"]
                assert button["asks"]["do"]
    workbench.settle()
