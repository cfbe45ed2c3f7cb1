"""The widget of the wall-shear workbench without a browser: what it sends, what it does with what it is told."""

from __future__ import annotations

import shutil
import time
from pathlib import Path

import pytest

pytest.importorskip("anywidget")

from pulsekit.workbench import WallShearWorkbench
from pulsekit.workbench.background import Latest
from pulsekit.workbench.screen import script, style


@pytest.fixture
def bench(tmp_path: Path, demo: Path) -> WallShearWorkbench:
    """A workbench on a copy of the forearm case that records the messages that it sends."""
    shutil.copytree(demo / "forearm", tmp_path / "forearm")
    text = (demo / "forearm.toml").read_text(encoding="utf-8")
    (tmp_path / "forearm.toml").write_text(
        text + "\n[uncertainty]\nsamples = 400\n", encoding="utf-8"
    )  # few: the intervals do not matter here
    widget = WallShearWorkbench(tmp_path / "forearm.toml")
    widget._background.rest = 30.0  # nothing refines by itself while messages are counted
    sent: list[dict] = []
    widget._send = lambda message, buffers=None: sent.append(message)
    widget.sent = sent
    yield widget
    widget._background.halt()
    widget.close()


def updates(widget) -> list[dict]:
    return [message for message in widget.sent if message.get("method") == "update"]


def test_opening_leaves_an_answer_in_full(bench):
    assert bench.status["full"]
    assert len(bench.scene) == 7
    assert bench.answer["findings"][0]["interval"]
    assert bench.answer["cautions"]


def test_one_slider_step_is_one_message(bench):
    bench.act({"do": "slide", "key": "tube.radius", "number": 2.1, "gesture": "g", "turn": 1})
    (message,) = updates(bench)
    assert set(message["state"]) >= {"scene", "givens", "answer", "status"}
    assert message["buffer_paths"] == [["numbers"]]
    assert bench.status["echo"] == 1
    assert not bench.status["full"]


def test_one_slider_step_redraws_only_what_it_changes(bench):
    before = {panel["id"]: panel["stamp"] for panel in bench.scene}
    bench.act({"do": "slide", "key": "tube.radius", "number": 2.1, "turn": 1})
    changed = {panel["id"] for panel in bench.scene if panel["stamp"] != before[panel["id"]]}
    assert changed == {"profile", "field", "wall_shear_stress", "pressure_gradient"}


def test_a_step_back_and_forth_gives_the_same_picture(bench):
    bench.act({"do": "slide", "key": "tube.radius", "number": 2.1, "turn": 1})
    first = bytes(bench.numbers)
    bench.act({"do": "slide", "key": "tube.radius", "number": 2.2, "turn": 2})
    assert bytes(bench.numbers) != first
    bench.act({"do": "slide", "key": "tube.radius", "number": 2.1, "turn": 3})
    assert bytes(bench.numbers) == first


def test_intervals_follow_when_the_hand_rests(bench):
    bench._background.rest = 0.05
    bench.act({"do": "slide", "key": "tube.radius", "number": 2.1, "turn": 1})
    assert bench.settle()
    assert bench.status["full"]
    assert bench.answer["findings"][0]["interval"]
    assert not bench.status["busy"]
    assert bench.faults == []


def test_a_bad_value_is_shown_beside_its_field(bench):
    numbers = bytes(bench.numbers)
    bench.act({"do": "set", "key": "tube.diameter", "text": "4 s", "turn": 1})
    fields = {item["key"]: item for group in bench.givens for item in group["items"]}
    assert "length" in fields["tube.diameter"]["error"]
    assert bytes(bench.numbers) == numbers
    assert bench.faults == []


def test_a_fault_of_ours_is_one_message_and_the_state_stays(bench, monkeypatch):
    case = bench.state.case
    monkeypatch.setattr(bench.state, "set_value", lambda *a, **k: 1 / 0)
    bench.act({"do": "set", "key": "tube.diameter", "text": "4 mm", "turn": 1})
    assert "ZeroDivisionError" in bench.status["notice"]
    assert "Traceback" not in bench.status["notice"]
    assert "ZeroDivisionError" in bench.faults[0]
    assert bench.state.case is case


@pytest.mark.parametrize(
    "asked",
    [
        {"do": "nonsense"},
        {"do": "leave_out", "number": 999},
        {"do": "set", "key": "tube.colour", "text": "red"},
        {"do": "choose", "text": "gone.csv"},
    ],
)
def test_odd_requests_cost_nothing(bench, asked):
    case = bench.state.case
    bench._background.rest = 0.05
    bench.act(asked)
    assert bench.settle()
    assert bench.state.case == case
    assert bench.state.answer is not None
    assert bench.faults == []


def test_an_upload_comes_in_parts(bench, demo):
    content = (demo / "bench" / "axis.csv").read_bytes()
    middle = len(content) // 2
    bench.act({"do": "part", "name": "../axis.csv", "index": 0, "count": 2, "turn": 1}, [memoryview(content[:middle])])
    assert bench.state.case.get("recording.file") == "forearm/flow.csv"
    bench.act({"do": "part", "name": "../axis.csv", "index": 1, "count": 2, "turn": 2}, [memoryview(content[middle:])])
    assert bench.settle()
    assert bench.state.case.get("recording.file") == "recordings/axis.csv"
    assert (bench.state.folder / "recordings" / "axis.csv").read_bytes() == content
    assert bench.faults == []


def test_reading_can_be_stopped(bench, tmp_path):
    rows = "".join(f"{k / 1000:.3f},{k % 977}\n" for k in range(400_000))
    (tmp_path / "long.csv").write_text("time (s),flow (mL/min)\n" + rows)
    answer = bench.state.answer
    bench.act({"do": "choose", "text": "long.csv", "turn": 1})
    bench.act({"do": "stop"})
    assert bench.settle()
    assert bench.state.answer is answer
    assert not bench.status["busy"]
    assert bench.faults == []


def test_saving_tells_where_and_sends_the_file(bench):
    bench.act({"do": "save", "what": "report", "turn": 1})
    assert bench.settle()
    assert "report.html" in bench.status["saved"][-1]
    custom = [message["content"] for message in bench.sent if message.get("method") == "custom"]
    assert custom[-1]["saved"]["name"] == "report.html"
    assert bench.faults == []


def test_pin_and_unpin(bench):
    bench.act({"do": "pin", "turn": 1})
    bench.act({"do": "slide", "key": "tube.radius", "number": 2.3, "turn": 2})
    assert bench.answer["reference"]
    assert any(row["change"] for row in bench.answer["findings"])
    bench.act({"do": "unpin", "turn": 3})
    assert not bench.answer["reference"]


def test_the_cursor_is_remembered(bench):
    bench.cursor = {"time": 0.25}
    assert bench.state.cursor == {"time": 0.25}
    assert not [message for message in updates(bench) if "scene" in message["state"]]


def test_a_viewer_without_widgets_gets_findings_and_picture(bench):
    data, _ = bench._repr_mimebundle_()
    assert "application/vnd.jupyter.widget-view+json" in data
    assert "<svg" in data["text/html"]
    assert "Time-averaged wall shear" in data["text/html"]
    assert "<script" not in data["text/html"]


def test_text_of_a_file_is_only_text(tmp_path):
    name = "<script>alert</script>"
    rows = "".join(f"{k / 100:.2f},{300 + 100 * (k % 100 < 40)}\n" for k in range(500))
    (tmp_path / "odd.csv").write_text(f"time (s),{name} (mL/min)\n" + rows)
    widget = WallShearWorkbench(tmp_path / "odd.csv")
    fields = {item["key"]: item for group in widget.givens for item in group["items"]}
    assert fields["columns"]["rows"][1][0] == name  # a string; the page sets it as text
    assert "innerHTML" not in script()
    assert "insertAdjacentHTML" not in script()
    widget.close()


def test_script_and_style_fetch_nothing():
    for text in (script(), style()):
        assert "http://" not in text.replace("http://www.w3.org/2000/svg", "")
        assert "https://" not in text
        assert "@import" not in text


def test_the_newest_job_wins():
    done = []
    latest = Latest(rest=0.05)
    for number in range(5):
        latest.submit(lambda stop, number=number: done.append(number))
    assert latest.wait(10)
    assert done == [4]


def test_a_running_job_is_told_to_stop():
    seen = []

    def slow(stop):
        while not stop():
            time.sleep(0.005)
        seen.append("stopped")

    latest = Latest(rest=0.0)
    latest.submit(slow)
    time.sleep(0.05)
    latest.submit(lambda stop: seen.append("second"))
    assert latest.wait(10)
    assert seen == ["stopped", "second"]
