"""Each demo case against the truth that its invented recording was made from."""

from __future__ import annotations

import json

import pytest

import pulsekit as pk

#: Case -> relative tolerance of the value (of the larger of the truth and a tenth of the peak), and findings left to the interval alone.
TUBES = {
    # Noise of 3 % of the peak on 13 beats of varying length; the truth is the beat of median length.
    "forearm": 0.04,
    # Noise of 1 cm/s on 9 strokes of a smooth flow.
    "bench": 0.02,
    # 24 frames of 36 ms hold six harmonics; what lies beyond is lost to the peak.
    "gated": 0.15,
    # Two transducers that ring, taken out exactly; noise small.
    "two_stations": 0.01,
}


def load(demo, name):
    truth = json.loads((demo / name / "truth.json").read_text(encoding="utf-8"))
    return pk.analyse(pk.load_case(demo / f"{name}.toml")), truth["findings"]


@pytest.mark.parametrize("name", TUBES)
def test_a_tube_comes_back_to_its_truth(demo, name):
    answer, truth = load(demo, name)
    peaks = {
        "stress": abs(truth["peak_wall_shear_stress"]), "flow": abs(truth["peak_flow_rate"]),
    }  # fmt: skip
    for key, value in truth.items():
        finding = answer.findings[key]
        scale = max(abs(value), 0.1 * peaks["stress" if "stress" in key else "flow"] if key.endswith(("stress", "flow_rate")) else 0.0)
        if key == "pressure_gradient_amplitude" and name == "gated":
            continue  # it weighs harmonic n by n: six harmonics cannot hold it, and the check says so
        assert finding.value == pytest.approx(value, abs=TUBES[name] * scale), key
        if name != "gated":
            assert finding.low <= value <= finding.high, key


def test_what_the_gated_cycle_cannot_hold_is_not_called_usable(demo):
    answer, _ = load(demo, "gated")
    assert answer.findings["pressure_gradient_amplitude"].reliance != "usable"
    assert answer.findings["peak_wall_shear_stress"].reliance != "usable"


def test_the_bad_beat_is_left_out_and_said(demo):
    answer, _ = load(demo, "forearm")
    bad = json.loads((demo / "forearm" / "truth.json").read_text(encoding="utf-8"))["bad_cycle"]
    assert [index + 1 for index, _ in answer.cycles.left_out] == [bad]
    assert any(f"Cycle {bad} " in remark for remark in answer.remarks)
    assert len(answer.per_cycle) == answer.cycles.count


def test_every_demo_case_says_that_it_is_invented(demo):
    cases = sorted(demo.glob("*.toml"))
    assert len(cases) >= 4
    for path in cases:
        assert "invented" in str(pk.load_case(path).get("title")).lower()
        assert "INVENTED" in path.read_text(encoding="utf-8")
