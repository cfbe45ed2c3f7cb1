"""From a case file to an answer and back: every measured quantity, saved answers, bad recordings."""

from __future__ import annotations

import json
import math

import numpy as np
import pytest

import pulsekit as pk
from pulsekit.case.workspace import Workspace
from pulsekit.errors import CaseError, InputError, MissingColumnError, MissingFileError, PulsekitError, SignalError, UnitError

FREQUENCY = 1.25  # [Hz]; 160 samples per cycle at 200 Hz, so that the cycles are whole samples
TIME = np.arange(0, 8.0, 0.005)
TUBE = {"radius": "3.1 mm ± 0.1 mm"}
FLUID = {"kind": "given", "density": "1060 kg/m^3", "viscosity": "3.5 mPa*s ± 5 %"}


@pytest.fixture(scope="module")
def truth():
    """An invented flow, solved once: all curves of the tests come from it."""
    coefficients = np.array([5e-6, 6e-6 * np.exp(-1j), 3e-6 * np.exp(0.4j), 1e-6 * np.exp(2j)])
    return pk.solve(
        pk.Harmonics(frequency=FREQUENCY, coefficients=coefficients), quantity="flow_rate", tube=pk.CircularTube(radius="3.1 mm"),
        fluid=pk.Fluid(density="1060 kg/m^3", viscosity="3.5 mPa*s"),
    )  # fmt: skip


def write_table(path, heads, *columns):
    rows = "\n".join(",".join(f"{value:.12g}" for value in row) for row in zip(*columns, strict=True))
    path.write_text(",".join(heads) + "\n" + rows + "\n", encoding="utf-8")
    return path


def flow_case(folder, truth, *, noise=0.0, **sections):
    rng = np.random.default_rng(7)
    values = truth.flow_rate.evaluate(TIME) * 6e7 + noise * rng.normal(size=TIME.size)
    write_table(folder / "run.csv", ["time (s)", "flow (mL/min)"], TIME, values)
    recording = {"file": "run.csv", "signal": "flow", "quantity": "flow_rate"} | sections.pop("recording", {})
    return pk.WallShearCase(recording=recording, **({"tube": TUBE, "fluid": FLUID} | sections), folder=folder)


def nominal(case, **more):
    return pk.analyse(case, nominal_only=True, **more)


# What is measured, its unit in the file and that unit in SI.
CURVES = [
    ("flow_rate", "mL/min", 1e-6 / 60), ("mean_velocity", "cm/s", 1e-2), ("centreline_velocity", "cm/s", 1e-2),
    ("pressure_gradient", "Pa/m", 1.0), ("wall_shear_stress", "Pa", 1.0),
]  # fmt: skip


@pytest.mark.parametrize(("quantity", "unit", "scale"), CURVES)
def test_every_measured_quantity_leads_to_the_same_flow(tmp_path, truth, quantity, unit, scale):
    write_table(tmp_path / "a.csv", ["time (s)", f"x ({unit})"], TIME, getattr(truth, quantity).evaluate(TIME) / scale)
    case = pk.WallShearCase(recording={"file": "a.csv", "signal": "x", "quantity": quantity}, cycles={"harmonics": 3, "period": "0.8 s"}, tube=TUBE, fluid=FLUID, folder=tmp_path)
    flow = nominal(case).flow
    # Twelve digits in the file; the smallest harmonic is a tenth of the largest.
    np.testing.assert_allclose(flow.flow_rate.coefficients, truth.flow_rate.coefficients, rtol=1e-9, atol=1e-15)


def test_an_envelope_is_the_largest_velocity_in_the_section(tmp_path, truth):
    forward = truth.mean_velocity.replace(coefficients=truth.mean_velocity.coefficients * [3.0, 0.5, 0.5, 0.5])
    flow = pk.solve(forward, quantity="mean_velocity", tube=truth.tube, fluid=truth.fluid)
    radius = np.linspace(0, truth.tube.radius, 400)
    largest = flow.velocity(radius, TIME[:160]).max(axis=0)
    values = np.tile(largest, 10)
    write_table(tmp_path / "a.csv", ["time (s)", "env (cm/s)"], TIME, values * 100)
    case = pk.WallShearCase(
        recording={"file": "a.csv", "signal": "env", "quantity": "velocity_envelope"}, cycles={"harmonics": 12}, tube=TUBE, fluid=FLUID, folder=tmp_path
    )
    found = nominal(case).flow.mean_velocity.coefficients
    # The envelope has kinks where the place of the largest velocity jumps: twelve harmonics hold it to under a per cent.
    np.testing.assert_allclose(found[:4], forward.coefficients, atol=0.01 * abs(forward.coefficients[0]))


def test_one_differential_transducer(tmp_path, truth):
    write_table(tmp_path / "a.csv", ["time (s)", "drop (Pa)"], TIME, truth.pressure_gradient.evaluate(TIME) * 0.12)
    case = pk.WallShearCase(
        recording={"file": "a.csv", "signal": "drop", "quantity": "pressure_drop", "distance": "120 mm ± 1 mm"}, cycles={"harmonics": 3, "period": "0.8 s"}, tube=TUBE,
        fluid=FLUID, folder=tmp_path,
    )  # fmt: skip
    np.testing.assert_allclose(nominal(case).flow.flow_rate.coefficients, truth.flow_rate.coefficients, rtol=1e-9, atol=1e-15)


def two_pressures(folder, truth, up_at=0.0):
    common = 12000 + 2000 * np.cos(2 * np.pi * FREQUENCY * TIME)
    drop = truth.pressure_gradient.evaluate(TIME) * 0.12
    write_table(folder / "p.csv", ["time (s)", "p1 (Pa)", "p2 (Pa)"], TIME, common + up_at, common - drop)
    return {"file": "p.csv", "upstream": "p1", "downstream": "p2", "distance": "120 mm", "quantity": "pressure_gradient"}


def test_two_pressures_without_a_zero_give_the_oscillation_only(tmp_path, truth):
    case = pk.WallShearCase(recording=two_pressures(tmp_path, truth), cycles={"harmonics": 3, "period": "0.8 s"}, tube=TUBE, fluid=FLUID, folder=tmp_path)
    answer = nominal(case)
    np.testing.assert_allclose(answer.flow.flow_rate.coefficients[1:], truth.flow_rate.coefficients[1:], rtol=1e-8)
    for name in ("time_averaged_wall_shear_stress", "oscillatory_shear_index", "mean_flow_rate", "peak_reynolds_number"):
        assert answer.findings[name].value is None
        assert "mean" in answer.findings[name].because
    assert answer.findings["pressure_gradient_amplitude"].value > 0


def test_a_stated_mean_flow_completes_them(tmp_path, truth):
    recording = two_pressures(tmp_path, truth) | {"mean_flow": "300 mL/min ± 3 %"}
    case = pk.WallShearCase(recording=recording, cycles={"harmonics": 3, "period": "0.8 s"}, tube=TUBE, fluid=FLUID, folder=tmp_path)
    np.testing.assert_allclose(nominal(case).flow.flow_rate.coefficients, truth.flow_rate.coefficients, rtol=1e-8)


def test_stations_with_their_own_height_zero_and_filter(tmp_path, truth):
    frequency = np.arange(4) * FREQUENCY
    gain = pk.trace.channel.butterworth_response(frequency, 12.0, 2)
    common = pk.Harmonics(frequency=FREQUENCY, coefficients=[12000, 2000.0, 300j, 0])
    low = (pk.Harmonics(frequency=FREQUENCY, coefficients=common.coefficients - 0.12 * truth.pressure_gradient.coefficients)).multiplied(gain)
    head = 1060 * 9.80665 * 0.010  # 10 mm of this liquid
    write_table(tmp_path / "p.csv", ["time (s)", "p1 (Pa)", "p2 (Pa)"], TIME, common.evaluate(TIME), low.evaluate(TIME) + head + 40.0)
    case = pk.WallShearCase(
        recording={"quantity": "pressure_gradient"},
        station=[
            {"name": "up", "file": "p.csv", "column": "p1", "position": "0 mm", "height": "10 mm", "zero": "0 Pa"},
            {"name": "down", "file": "p.csv", "column": "p2", "position": "120 mm", "height": "0 mm", "zero": "40 Pa", "low_pass": "12 Hz"},
        ],
        cycles={"harmonics": 3, "period": "0.8 s"}, tube=TUBE, fluid=FLUID, folder=tmp_path,
    )  # fmt: skip
    # 13 000 Pa to twelve digits against a gradient signal of some 100 Pa
    np.testing.assert_allclose(nominal(case).flow.flow_rate.coefficients, truth.flow_rate.coefficients, rtol=1e-7, atol=1e-13)


def test_one_pressure_alone_is_a_wave_without_reflections(tmp_path, truth):
    write_table(tmp_path / "p.csv", ["time (s)", "p (mmHg)"], TIME, 90 + 20 * np.cos(2 * np.pi * FREQUENCY * TIME))
    case = pk.WallShearCase(
        recording={"file": "p.csv", "signal": "p", "quantity": "pressure", "wave_speed": "8 m/s"}, cycles={"harmonics": 1}, tube=TUBE, fluid=FLUID,
        folder=tmp_path,
    )  # fmt: skip
    answer = nominal(case)
    assert answer.findings["mean_flow_rate"].value is None
    # At this alpha the velocity lies near p/(rho c), reduced by the wall's drag.
    ideal = 20 * 133.322387 / (1060 * 8)
    assert 0.7 * ideal < abs(answer.flow.mean_velocity.coefficients[1]) < ideal
    assert any("reflection" in remark for remark in answer.remarks)


def test_flow_made_with_the_tubes_radius_enters_the_radius_once(tmp_path, truth):
    plain = flow_case(tmp_path, truth)
    divided = plain.with_value("recording.computed_with_radius", "tube")
    assert nominal(plain).findings["mean_flow_rate"].value == pytest.approx(nominal(divided).findings["mean_flow_rate"].value, rel=1e-12)

    def slope(case, small="3.1 mm", large="3.131 mm"):
        low, high = (nominal(case.with_value("tube.radius", r)).findings["steady_wall_shear_stress"].value for r in (small, large))
        return math.log(high / low) / math.log(1.01)

    # Steady wall shear goes with 1/R^3 of a measured flow. With "tube" the area follows the radius: V = Q/(pi R^2), tau = 4 mu V/R, again 1/R^3 of
    # the same file; only with a radius of the instrument's own is it 1/R.
    assert slope(plain) == pytest.approx(-3, abs=1e-9)
    assert slope(plain.with_value("recording.computed_with_radius", "3.1 mm")) == pytest.approx(-1, abs=1e-9)


def test_zero_calibration_and_sign(tmp_path, truth):
    volts = -(truth.flow_rate.evaluate(TIME) * 6e7 / 100) + 1.002
    write_table(tmp_path / "v.csv", ["time (s)", "raw (V)"], TIME, volts)
    recording = {
        "file": "v.csv", "signal": "raw", "quantity": "flow_rate", "calibration": "100 mL/min/V", "zero": "1.002 V", "invert": True,
    }  # fmt: skip
    case = pk.WallShearCase(recording=recording, cycles={"harmonics": 3, "period": "0.8 s"}, tube=TUBE, fluid=FLUID, folder=tmp_path)
    np.testing.assert_allclose(nominal(case).flow.flow_rate.coefficients, truth.flow_rate.coefficients, rtol=1e-8, atol=1e-15)


def test_forward_and_reverse_columns(tmp_path, truth):
    values = truth.mean_velocity.evaluate(TIME) * 100
    write_table(tmp_path / "d.csv", ["time (s)", "fwd (cm/s)", "rev (cm/s)"], TIME, np.maximum(values, 0), np.maximum(-values, 0))
    recording = {"file": "d.csv", "forward": "fwd", "reverse": "rev", "quantity": "mean_velocity"}
    case = pk.WallShearCase(recording=recording, cycles={"harmonics": 3, "period": "0.8 s"}, tube=TUBE, fluid=FLUID, folder=tmp_path)
    np.testing.assert_allclose(nominal(case).flow.flow_rate.coefficients, truth.flow_rate.coefficients, rtol=1e-8, atol=1e-15)


def test_a_workspace_changes_no_number_and_saves_the_reading(tmp_path, truth, monkeypatch):
    case = flow_case(tmp_path, truth, noise=5)
    workspace = Workspace()
    first = nominal(case, workspace=workspace)
    import pulsekit.case.workspace as module

    def refuse(*_args, **_more):
        raise AssertionError("the file was read again")

    monkeypatch.setattr(module, "read_recording", refuse)
    again = nominal(case.with_value("tube.radius", "3.2 mm"), workspace=workspace)
    back = nominal(case, workspace=workspace)
    assert [f.value for f in back.findings] == [f.value for f in first.findings]
    assert again.findings["peak_wall_shear_stress"].value < first.findings["peak_wall_shear_stress"].value


def test_a_changed_file_is_read_again(tmp_path, truth):
    import os

    workspace = Workspace()
    case = flow_case(tmp_path, truth)
    before = nominal(case, workspace=workspace).findings["mean_flow_rate"].value
    write_table(tmp_path / "run.csv", ["time (s)", "flow (mL/min)"], TIME, truth.flow_rate.evaluate(TIME) * 12e7)
    os.utime(tmp_path / "run.csv", ns=(1, 10**18))
    assert nominal(case, workspace=workspace).findings["mean_flow_rate"].value == pytest.approx(2 * before, rel=1e-9)


def test_saved_answers_give_the_same_numbers_to_the_last_digit(tmp_path, truth):
    case = flow_case(tmp_path, truth, noise=8, recording={"scale_uncertainty": "2 %"}, uncertainty={"samples": 2000, "seed": 5})
    answer = pk.analyse(case)
    folder = answer.write(tmp_path / "out", pictures=False)
    again = pk.analyse(pk.load_case(folder / "case.toml"))
    kept = json.loads((folder / "answer.json").read_text(encoding="utf-8"))
    for finding, other, row in zip(answer.findings, again.findings, kept["findings"], strict=True):
        for field in ("name", "value", "low", "high", "shown_value", "shown_low", "shown_high", "shown_unit", "reliance"):
            assert getattr(finding, field) == getattr(other, field) == row[field], f"{finding.name}.{field}"
        assert dict(finding.shares) == row["shares"]
    assert kept["remarks"] == list(answer.remarks)
    assert kept["provenance"]["sha256"] == answer.recording.sha256


def test_another_recording_beside_a_saved_case_is_an_error(tmp_path, truth):
    case = flow_case(tmp_path, truth, uncertainty={"samples": 500})
    folder = pk.analyse(case).write(tmp_path / "out", pictures=False)
    copy = folder / "run.csv"
    copy.write_text(copy.read_text() + "8.000,300\n")
    with pytest.raises(CaseError, match="not the recording this case was made with"):
        pk.analyse(pk.load_case(folder / "case.toml"))


def test_the_readers_units(tmp_path, truth):
    case = flow_case(tmp_path, truth, report={"units": {"flow_rate": "L/min", "peak_wall_shear_stress": "dyn/cm^2"}})
    answer = nominal(case)
    assert answer.findings["mean_flow_rate"].shown_unit == "L/min"
    assert answer.findings["mean_flow_rate"].shown_value == pytest.approx(0.3, rel=1e-3)
    peak = answer.findings["peak_wall_shear_stress"]
    assert peak.shown_unit == "dyn/cm^2"
    assert peak.shown_value == pytest.approx(10 * peak.value, rel=1e-3)
    assert nominal(case.without("report")).findings["mean_flow_rate"].shown_unit == "mL/min"


def test_a_suspicious_radius_is_remarked(tmp_path, truth):
    answer = nominal(flow_case(tmp_path, truth, tube={"radius": "3.1 m"}))
    assert any("3.1 m" in remark and "suspicious" in remark for remark in answer.remarks)


BAD = [
    ({"recording.signal": "flux"}, MissingColumnError, ["flux", "flow"]),
    ({"recording.file": "nowhere.csv"}, MissingFileError, ["nowhere.csv"]),
    ({"cycles.period": "90 s"}, SignalError, ["90"]),
    ({"recording.quantity": "mean_velocity"}, UnitError, ["flow", "mL/min"]),
    ({"cycles.leave_out": [77]}, PulsekitError, ["77"]),
    ({"cycles.harmonics": 500}, InputError, ["500"]),
    ({"tube.diameter": "6 mm"}, InputError, ["radius", "diameter"]),
    ({"fluid.haematocrit": 0.4}, InputError, ["haematocrit"]),
    ({"fluid.viscosity": "3.5 kg"}, UnitError, ["fluid.viscosity"]),
]


@pytest.mark.parametrize(("changes", "kind", "words"), BAD, ids=[str(next(iter(row[0].items()))) for row in BAD])
def test_bad_input_is_one_sentence_with_the_remedy(tmp_path, truth, changes, kind, words):
    case = flow_case(tmp_path, truth)

    def asked():
        changed = case
        for key, value in changes.items():
            changed = changed.with_value(key, value)
        return nominal(changed)

    with pytest.raises(kind) as caught:
        asked()
    assert "\n" not in str(caught.value)
    for word in words:
        assert word in str(caught.value)


@pytest.mark.parametrize("key", ["tube.radius", "recording.quantity", "recording.file", "fluid.kind"])
def test_what_is_missing_is_named(tmp_path, truth, key):
    case = flow_case(tmp_path, truth, fluid={"kind": "blood", "temperature": "37 degC"}).without(key)
    with pytest.raises(CaseError, match=key):
        nominal(case)


def test_an_unreadable_file(tmp_path, truth):
    case = flow_case(tmp_path, truth)
    (tmp_path / "run.csv").write_bytes(bytes(range(256)) * 20)
    with pytest.raises(PulsekitError, match=r"run\.csv"):
        nominal(case)
    (tmp_path / "run.csv").write_bytes(b"")
    with pytest.raises(PulsekitError, match=r"run\.csv"):
        nominal(case)


def test_json_is_strict_and_whole(tmp_path, truth):
    answer = nominal(flow_case(tmp_path, truth))
    text = json.dumps(answer.to_dict(), allow_nan=False)
    assert set(json.loads(text)) >= {"findings", "checks", "remarks", "provenance"}


def _measured(folder, truth, quantity):
    """A case for each way of measuring, with the truth's curves and a little noise."""
    rng = np.random.default_rng(3)
    curves = {"velocity_envelope": "centreline_velocity", "pressure_drop": "pressure_gradient", "pressure": "pressure_gradient"}
    values = np.asarray(getattr(truth, curves.get(quantity, quantity)).evaluate(TIME))
    if quantity == "velocity_envelope":
        values = values + 1.5 * abs(values.min())
    values = values + 0.01 * np.ptp(values) * rng.normal(size=TIME.size)
    unit = {"flow_rate": "m^3/s", "pressure_gradient": "Pa/m", "wall_shear_stress": "Pa", "pressure_drop": "Pa", "pressure": "Pa"}.get(quantity, "m/s")
    write_table(folder / "m.csv", ["time (s)", f"x ({unit})"], TIME, values)
    recording = {"file": "m.csv", "signal": "x", "quantity": quantity, "scale_uncertainty": "2 %"}
    recording |= {"distance": "1 m ± 1 %"} if quantity == "pressure_drop" else {}
    recording |= {"wave_speed": "8 m/s ± 10 %"} if quantity == "pressure" else {}
    return pk.WallShearCase(
        recording=recording, cycles={"period": "0.8 s", "harmonics": 3}, tube=TUBE, fluid=FLUID, uncertainty={"samples": 400}, folder=folder
    )  # fmt: skip


QUANTITIES = (
    "flow_rate", "mean_velocity", "centreline_velocity", "velocity_envelope", "pressure_gradient", "pressure_drop", "pressure", "wall_shear_stress",
)  # fmt: skip


@pytest.mark.parametrize("quantity", QUANTITIES)
def test_every_quantity_gets_intervals_that_hold_the_value(tmp_path, truth, quantity):
    answer = pk.analyse(_measured(tmp_path, truth, quantity))
    json.dumps(answer.to_dict(), allow_nan=False)
    seen = 0
    for finding in answer.findings:
        if finding.value is None or finding.low is None or finding.high is None:
            continue
        seen += 1
        slack = 1e-9 * abs(finding.value)
        assert finding.low - slack <= finding.value <= finding.high + slack, finding.name
        assert sum(finding.shares.values()) == pytest.approx(1, abs=1e-6) or not finding.shares
    assert seen >= (3 if quantity == "pressure" else 20)
    if quantity == "pressure":
        assert answer.findings["time_averaged_wall_shear_stress"].value is None
        assert answer.findings["pressure_gradient_amplitude"].low is not None
    assert answer.overall


def test_an_exact_case_has_no_interval_and_says_what_it_leaves_out(tmp_path, truth):
    case = flow_case(tmp_path, truth, tube={"radius": "3.1 mm"}, fluid={"kind": "given", "density": "1060 kg/m^3", "viscosity": "3.5 mPa*s"})
    answer = pk.analyse(case, samples=400)
    left_out = " ".join(str(entry) for entry in answer.left_out_inputs)
    for key in ("tube.radius", "fluid.viscosity", "fluid.density"):
        assert key in left_out


def test_one_way_in_one_way_through(tmp_path, truth):
    """Python, a saved case file and the command line give the same numbers."""
    from pulsekit.cli import main

    case = flow_case(tmp_path, truth, noise=5, uncertainty={"samples": 300})
    path = case.save(tmp_path / "case.toml")
    assert main(["run", str(path), "--out", str(tmp_path / "out"), "--no-pictures"]) == 0
    rows = {row["name"]: row for row in json.loads((tmp_path / "out" / "answer.json").read_text(encoding="utf-8"))["findings"]}
    for finding in pk.analyse(case).findings:
        assert (finding.value, finding.low, finding.high) == tuple(rows[finding.name][key] for key in ("value", "low", "high"))


def test_cycles_from_a_trigger(tmp_path, truth):
    values = truth.flow_rate.evaluate(TIME) * 6e7
    phase = (TIME - 0.1) * FREQUENCY % 1.0
    write_table(tmp_path / "t.csv", ["time (s)", "flow (mL/min)", "trig (V)"], TIME, values, 5.0 * (phase < 0.1))
    case = pk.WallShearCase(
        recording={"file": "t.csv", "signal": "flow", "quantity": "flow_rate", "trigger": "trig"}, tube=TUBE, fluid=FLUID, folder=tmp_path
    )
    answer = nominal(case)
    # Ten rises, at 0.1 s and every 0.8 s on: nine whole cycles between them.
    assert answer.cycles.count == 9
    assert any("trigger" in remark for remark in answer.remarks)


def test_wrapped_velocities_are_refused_with_the_frame(tmp_path, truth):
    values = truth.mean_velocity.evaluate(TIME) * 100
    values[700] -= 160.0
    write_table(tmp_path / "w.csv", ["time (s)", "v (cm/s)"], TIME, values)
    case = pk.WallShearCase(
        recording={"file": "w.csv", "signal": "v", "quantity": "mean_velocity", "velocity_encoding": "80 cm/s"}, tube=TUBE, fluid=FLUID, folder=tmp_path
    )
    with pytest.raises(SignalError, match="frame 701"):
        nominal(case)


def test_reversal_that_may_have_been_rectified_is_remarked(tmp_path, truth):
    values = np.abs(truth.mean_velocity.evaluate(TIME)) * 100
    write_table(tmp_path / "r.csv", ["time (s)", "v (cm/s)"], TIME, values)
    case = pk.WallShearCase(
        recording={"file": "r.csv", "signal": "v", "quantity": "mean_velocity"}, cycles={"period": "0.8 s"}, tube=TUBE, fluid=FLUID, folder=tmp_path
    )
    assert any("rectified" in remark for remark in nominal(case).remarks)
    write_table(tmp_path / "r.csv", ["time (s)", "v (cm/s)"], TIME, truth.mean_velocity.evaluate(TIME) * 100)
    assert not any("rectified" in remark for remark in nominal(case).remarks)


def test_area_per_frame_gives_radius_and_wall_motion(tmp_path, truth):
    radius = 3.1 * (1 + 0.02 * np.cos(2 * np.pi * FREQUENCY * TIME))
    write_table(tmp_path / "m.csv", ["time (s)", "v (cm/s)", "area (mm^2)"], TIME, truth.mean_velocity.evaluate(TIME) * 100, np.pi * radius**2)
    case = pk.WallShearCase(
        recording={"file": "m.csv", "signal": "v", "quantity": "mean_velocity", "area": "area", "sample_volume": "whole lumen"},
        cycles={"period": "0.8 s"}, fluid=FLUID, folder=tmp_path,
    )  # fmt: skip
    answer = nominal(case)
    # The mean of r^2 is R^2 (1 + 0.02^2/2); the area is written to twelve digits, the radius to six.
    assert answer.flow.tube.radius == pytest.approx(3.1e-3 * math.sqrt(1 + 0.02**2 / 2), rel=1e-6)
    assert answer.checks["rigid_wall"].value == pytest.approx(0.04, rel=0.01)


def test_curves_as_a_labelled_dataset(tmp_path, truth):
    answer = pk.analyse(flow_case(tmp_path, truth), samples=300)
    dataset = answer.to_dataset(instants=128)
    assert dataset["wall_shear_stress"].dims == ("time",)
    assert dataset["wall_shear_stress"].attrs["units"] == "Pa"
    # The same curve as the answer's own, and no slip at the wall.
    np.testing.assert_array_equal(dataset["flow_rate"], answer.flow.flow_rate.evaluate(dataset["time"].values))
    np.testing.assert_allclose(dataset["velocity"].isel(radius=-1), 0.0, atol=1e-15)
    assert bool((dataset["wall_shear_stress_low"] <= dataset["wall_shear_stress_high"]).all())


def test_a_device_in_the_flow_brings_its_caution(tmp_path, truth):
    answer = nominal(flow_case(tmp_path, truth, tube=TUBE | {"device": "cannula"}))
    assert any("cannula" in remark and "no basis for treatment" in remark for remark in answer.remarks)
