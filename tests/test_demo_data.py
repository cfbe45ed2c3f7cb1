"""The demo recordings: made again byte for byte, labelled as invented, small, and true to the truth beside them."""

from __future__ import annotations

import json
import subprocess
import sys

import numpy as np
import pytest

import pulsekit as pk
from pulsekit.errors import PulsekitError
from pulsekit.trace.shaft import shaft_cycles
from pulsekit.trace.spectrum import unlocked_part


def truth_of(demo, name):
    return json.loads((demo / name / "truth.json").read_text(encoding="utf-8"))


def complexes(pairs):
    return np.array([complex(*pair) for pair in pairs])


def recordings(demo):
    return sorted([*demo.rglob("*.csv"), *demo.rglob("*.toml"), *demo.rglob("*.json")])


@pytest.fixture(scope="module")
def demo_folder():
    from pathlib import Path

    return Path(__file__).resolve().parent.parent / "data_demo"


def test_the_script_makes_the_same_files_again(demo_folder, tmp_path):
    subprocess.run([sys.executable, str(demo_folder / "make_demo_data.py"), str(tmp_path)], check=True)
    made = {path.relative_to(tmp_path): path.read_bytes() for path in recordings(tmp_path)}
    kept = {path.relative_to(demo_folder): path.read_bytes() for path in recordings(demo_folder)}
    assert set(made) == set(kept)
    assert [str(name) for name in made if made[name] != kept[name]] == []


def test_every_file_says_that_it_is_invented(demo_folder):
    for path in recordings(demo_folder):
        assert "INVENTED DATA" in path.read_text(encoding="utf-8")[:200], path.name


def test_files_stay_small(demo_folder):
    sizes = [path.stat().st_size for path in recordings(demo_folder)]
    assert max(sizes) < 1_000_000
    assert sum(sizes) < 4_000_000


def test_the_forearms_onsets_and_bad_beat(demo_folder):
    truth = truth_of(demo_folder, "forearm")
    cycles = pk.find_cycles(pk.read_recording(demo_folder / "forearm" / "flow.csv")["flow"])
    assert [index + 1 for index, _ in cycles.left_out] == [truth["bad_cycle"]]
    shift = cycles.all_onsets - np.array(truth["onsets"])
    # The tangent's foot lies a fixed time after the first rise, in every beat to a tenth of a sample of 10 ms; the bad beat's neighbours are let off.
    good = np.delete(shift, [truth["bad_cycle"] - 1, truth["bad_cycle"]])
    assert np.std(good) < 1e-3
    assert cycles.period == pytest.approx(truth["period"], rel=0.005)
    assert cycles.align == "onset"


@pytest.mark.parametrize(
    ("name", "file", "column", "quantity", "tolerance"),
    [
        # 13 beats whose gains scatter by 3 %: 1 % of the peak harmonic.
        ("forearm", "flow.csv", "flow", "flow_rate", 0.02),
        # 0.35 cm/s of noise on 2777 samples and a period known to 1e-4.
        ("bench", "axis.csv", "u axis", "centreline_velocity", 0.004),
    ],
)
def test_the_harmonics_are_those_that_made_it(demo_folder, name, file, column, quantity, tolerance):
    truth = complexes(truth_of(demo_folder, name)[quantity])
    found = pk.decompose(pk.find_cycles(pk.read_recording(demo_folder / name / file)[column]))
    count = min(found.count, truth.size - 1, 8)
    np.testing.assert_allclose(found.amplitude[: count + 1], np.abs(truth[: count + 1]), atol=tolerance * np.abs(truth[1:]).max())
    # Phase zero is the record's own: after turning by the first harmonic's phase the others must agree.
    order = np.arange(count + 1)
    turn = np.angle(truth[1]) - np.angle(found.coefficients[1])
    np.testing.assert_allclose(
        found.coefficients[: count + 1] * np.exp(1j * order * turn), truth[: count + 1], atol=3 * tolerance * np.abs(truth[1:]).max()
    )


def test_the_plunger_pumps_orders_through_its_ramp(demo_folder):
    truth = truth_of(demo_folder, "wash_down")
    recording = pk.read_recording(demo_folder / "wash_down" / "ramp.csv")
    for index, column in enumerate(("p1", "p2")):
        cycles = shaft_cycles(recording[column], trigger=recording["trigger"], speed=truth["speed"], trigger_angle=truth["trigger_angle"])
        found = pk.decompose(cycles, count=12).coefficients
        expected = complexes(truth["pressure"][index])
        # The truth is the mean of the response over evenly spread speeds; turns are spread evenly in angle. An edge is known to half a sample
        # (1/3000 s at 12 turns a second: 1.4 degrees, 0.1 rad at order 4), which the trigger's fixed lag of half a sample shows as a phase.
        order = np.arange(1, 13)
        lag = np.angle(found[3] / expected[2]) / 3
        assert abs(lag) < 0.04
        aligned = found[1:] * np.exp(-1j * order * lag)
        np.testing.assert_allclose(aligned, expected[:12], atol=0.03 * np.abs(expected).max())
        assert found[0].real == pytest.approx(truth["mean_pressure"][index], rel=1e-4)


def test_the_piston_pumps_orders_and_the_line_that_is_none(demo_folder):
    truth = truth_of(demo_folder, "supply")
    recording = pk.read_recording(demo_folder / "supply" / "steady.csv")
    cycles = shaft_cycles(recording["p"], trigger=recording["trigger"], speed=truth["speed"])
    harmonics = pk.decompose(cycles, count=60)
    expected = np.abs(complexes(truth["pressure"]))
    for order in (9, 18, 27, 36):
        # An edge known to a quarter of a sample (50 us) is 0.28 rad at order 36: its amplitude loses up to 4 %.
        assert harmonics.amplitude[order] == pytest.approx(expected[order - 1], rel=0.05, abs=0.01 * expected.max())
    part = unlocked_part(cycles, harmonics)
    line = truth["line_that_is_no_order"]
    assert part.lines[0].frequency == pytest.approx(line["frequency"], abs=0.2)
    assert part.lines[0].amplitude == pytest.approx(line["amplitude"], rel=0.05)


def test_the_pump_cases_come_back_to_their_truth(demo_folder):
    """Two stations and the line's model give back the flow that the pump delivered."""
    truth = truth_of(demo_folder, "wash_down")
    answer = pk.analyse(pk.load_case(demo_folder / "wash_down.toml"), nominal_only=True)
    source = np.abs(complexes(truth["source_flow"]))
    found = answer.response.flow_rate(0.0).amplitude
    for order in (3, 6, 9):
        # The truth's friction is laminar, the model's turbulent; both are small beside the nozzle.
        assert found[order] == pytest.approx(source[order], rel=0.06), order


def test_the_cohort(demo_folder):
    truth = truth_of(demo_folder, "cohort")
    files = sorted((demo_folder / "cohort" / "recordings").glob("*.csv"))
    assert len(files) >= 24
    failed, odd, sentences = [], [], []
    for path in files:
        try:
            cycles = pk.find_cycles(pk.read_recording(path)["flow"])
        except PulsekitError as problem:
            failed.append(path.stem)
            sentences.append(str(problem))
            continue
        if cycles.left_out:
            odd.append(path.stem)
        harmonics = pk.decompose(cycles)
        expected = truth["subjects"][path.stem]
        # Seven beats whose gains scatter by 3 % (1.2 % of the mean) and periods by 2 %; the truth counts beats that the record cuts off.
        assert harmonics.mean == pytest.approx(expected["mean_flow_rate"], rel=0.06), path.stem
        assert cycles.period == pytest.approx(expected["period"], rel=0.02), path.stem
    assert failed == [truth["unreadable"]]
    assert truth["unreadable"] in sentences[0]
    assert odd == [truth["bad_beat"]]
