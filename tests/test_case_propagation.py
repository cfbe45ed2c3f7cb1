"""Intervals, shares, bands and remarks of a wall-shear case, through `analyse`."""

from __future__ import annotations

import numpy as np
import pytest

import pulsekit as pk
from pulsekit.errors import CaseError, InputError, PulsekitError, UnitError

FLUID = {"kind": "given", "density": "1060 kg/m^3", "viscosity": "3.5 mPa*s ± 5 %"}


def steady_case(folder, *, flow_noise=0.0, beats=6, swing=0.0, seed=1, **sections):
    """A flow of 400 mL/min with a small cosine, in a file; SI within."""
    rng = np.random.default_rng(seed)
    time = np.arange(beats * 100) / 100
    values = 400 * (1 + swing * np.cos(2 * np.pi * time)) + flow_noise * rng.standard_normal(time.size)
    (folder / "run.csv").write_text("time (s),flow (mL/min)\n" + "".join(f"{t:.2f},{v:.6f}\n" for t, v in zip(time, values, strict=True)))
    recording = {"file": "run.csv", "signal": "flow", "quantity": "flow_rate"} | sections.pop("recording", {})
    return pk.WallShearCase(
        recording=recording, cycles={"period": "1 s"} | sections.pop("cycles", {}), **({"tube": {"radius": "3.1 mm ± 2 %"}, "fluid": FLUID} | sections),
        folder=folder,
    )  # fmt: skip


def relative(finding):
    """Standard uncertainty over value of a log-normal finding, from its interval."""
    return np.log(finding.high / finding.low) / (2 * 1.959964)


@pytest.fixture(scope="module")
def answer(tmp_path_factory):
    case = steady_case(tmp_path_factory.mktemp("steady"), swing=1e-3, recording={"scale_uncertainty": "5 %"})
    return pk.analyse(case, samples=40_000)


def test_steady_shear_has_its_closed_form(answer):
    # u(tau)/tau = sqrt((3 u_R)^2 + u_Q^2 + u_mu^2) = 9.2736 % for 2 %, 5 %, 5 %: the relative width is known to 1 %, being a logarithm's.
    closed = np.sqrt((3 * 0.02) ** 2 + 0.05**2 + 0.05**2)
    assert relative(answer.findings["steady_wall_shear_stress"]) == pytest.approx(closed, rel=0.012)
    assert relative(answer.findings["time_averaged_wall_shear_stress"]) == pytest.approx(closed, rel=0.012)
    first = answer.extras["first_order"]["steady_wall_shear_stress"]
    # Central differences over one standard uncertainty: the cube's third derivative leaves 10/3 u_R^2 = 0.13 %.
    assert first / answer.findings["steady_wall_shear_stress"].value == pytest.approx(closed, rel=2e-3)


def test_shares_are_keyed_by_the_case(answer):
    share = answer.findings["steady_wall_shear_stress"].shares
    assert set(share) <= {"tube.radius", "fluid.viscosity", "recording.scale_uncertainty", "recording", "interactions"}
    total = 0.06**2 + 2 * 0.05**2
    assert share["tube.radius"] == pytest.approx(0.06**2 / total, abs=0.04)
    assert share["fluid.viscosity"] == pytest.approx(0.05**2 / total, abs=0.04)
    assert sum(share.values()) == pytest.approx(1.0)
    assert answer.shares_definition
    assert "tube.radius" in answer.improve
    # Without the radius: sqrt(1 - 0.42) = 76 % as wide.
    assert "7" in answer.improve.partition("about ")[2][:2]


def test_the_radius_enters_once_where_the_instrument_used_it(tmp_path):
    case = steady_case(tmp_path, swing=1e-3, recording={"computed_with_radius": "tube"})
    found = pk.analyse(case, samples=10_000).findings["steady_wall_shear_stress"]
    # tau = 4 mu U/R: the radius enters once, 2 % and not 6 %.
    assert relative(found) == pytest.approx(np.hypot(0.02, 0.05), rel=0.03)


def test_a_doppler_angle_adds_its_tangent(tmp_path):
    (tmp_path / "run.csv").write_text("time (s),u (cm/s)\n" + "".join(f"{k / 100},{20 + 1e-3 * (k % 100)}\n" for k in range(500)))
    case = pk.WallShearCase(
        recording={"file": "run.csv", "signal": "u", "quantity": "mean_velocity", "doppler_angle": "60 deg ± 1 deg"}, cycles={"period": "1 s"},
        tube={"radius": "3 mm"}, fluid={"density": "1060 kg/m^3", "viscosity": "3.5 mPa*s"}, folder=tmp_path,
    )  # fmt: skip
    found = pk.analyse(case, samples=20_000).findings["steady_wall_shear_stress"]
    # tan(60) x 1 degree = 3.02 %; the cosine's curvature adds about 1 % of that.
    assert relative(found) == pytest.approx(np.tan(np.pi / 3) * np.pi / 180, rel=0.04)


def test_same_case_same_numbers_and_another_seed_others(tmp_path):
    case = steady_case(tmp_path, swing=0.5, flow_noise=20.0)
    one, two = pk.analyse(case, samples=500), pk.analyse(case, samples=500)
    other = pk.analyse(case.with_value("uncertainty.seed", 5), samples=500)
    for name in one.findings.names:
        assert (one.findings[name].low, one.findings[name].high) == (two.findings[name].low, two.findings[name].high)
    assert one.findings["peak_wall_shear_stress"].low != other.findings["peak_wall_shear_stress"].low
    assert one.provenance["seed"] != other.provenance["seed"] == 5
    np.testing.assert_array_equal(one.bands["wall_shear_stress"].low, two.bands["wall_shear_stress"].low)


def test_a_new_uncertain_input_leaves_the_draws_of_the_others(tmp_path):
    case = steady_case(tmp_path, swing=0.5)
    one = pk.analyse(case, samples=300)
    two = pk.analyse(case.with_value("fluid.density", "1060 kg/m^3 ± 1 %"), samples=300)
    np.testing.assert_array_equal(one.extras["columns"]["tube.radius"], two.extras["columns"]["tube.radius"])


def test_bands_lie_about_the_curve(answer, tmp_path):
    found = pk.analyse(steady_case(tmp_path, swing=0.5, flow_noise=20.0), samples=2000)
    for name in ("wall_shear_stress", "pressure_gradient", "centreline_velocity"):
        band = found.bands[name]
        curve = getattr(found.flow, name).evaluate(band.time)
        assert np.all(band.low < curve)
        assert np.all(curve < band.high)


def test_the_interval_says_what_it_leaves_out_and_the_effect_of_five_per_cent(tmp_path):
    case = steady_case(
        tmp_path, swing=1e-3, tube={"radius": "3.1 mm"}, fluid={"kind": "given", "density": "1060 kg/m^3", "viscosity": "3.5 mPa*s"}
    )
    answer = pk.analyse(case, samples=500)
    rows = {entry.key: str(entry) for entry in answer.left_out_inputs}
    assert set(rows) == {"tube.radius", "fluid.density", "fluid.viscosity"}
    # 1.05^-3 = 0.864: 13.6 % for a flow that was measured by itself; 5 % for the viscosity; next to none for the density of a steady flow.
    assert "13.6 %" in rows["tube.radius"]
    assert "5.0 %" in rows["fluid.viscosity"]
    assert "0.0 %" in rows["fluid.density"]


def test_temperatures_that_enter_nothing_are_not_left_out(tmp_path):
    fluid = {"kind": "given", "density": "1060 kg/m^3", "viscosity": "3.5 mPa*s", "measured_at": "22 degC", "temperature": "22 degC"}
    keys = {entry.key for entry in pk.analyse(steady_case(tmp_path, swing=1e-3, fluid=fluid), samples=200).left_out_inputs}
    assert {"fluid.density", "fluid.viscosity"} <= keys
    assert not keys & {"fluid.measured_at", "fluid.temperature"}


def test_a_temperature_that_counts_is_left_out_by_one_degree(tmp_path):
    case = steady_case(tmp_path, swing=1e-3, fluid={"kind": "water", "temperature": "20 degC"})
    rows = {entry.key: str(entry) for entry in pk.analyse(case, samples=200).left_out_inputs}
    # Viscosity of water, 1.0016 mPa s at 20 °C and 0.9775 at 21 °C (IAPWS tables, from memory): 2.4 %.
    assert "1 °C more would change" in rows["fluid.temperature"]
    assert "2.4 %" in rows["fluid.temperature"]


def test_stated_as_exact_is_not_left_out(tmp_path):
    case = steady_case(tmp_path, swing=1e-3, tube={"radius": "3.1 mm ± 0 mm"})
    assert "tube.radius" not in {entry.key for entry in pk.analyse(case, samples=500).left_out_inputs}


def test_noise_that_lifts_rectified_findings_moves_the_interval_and_is_said(tmp_path):
    # No mean flow and hardly a pulse: what is left of |tau| is noise.
    rng = np.random.default_rng(4)
    time = np.arange(600) / 100
    values = 0.5 * np.cos(2 * np.pi * time) + 20 * rng.standard_normal(600)
    (tmp_path / "run.csv").write_text("time (s),flow (mL/min)\n" + "".join(f"{t:.2f},{v:.6f}\n" for t, v in zip(time, values, strict=True)))
    case = pk.WallShearCase(
        recording={"file": "run.csv", "signal": "flow", "quantity": "flow_rate"}, cycles={"period": "1 s", "harmonics": 10},
        tube={"radius": "3.1 mm"}, fluid=FLUID, folder=tmp_path,
    )  # fmt: skip
    from pulsekit.case.liquids import fluid_of
    from pulsekit.case.measurement import measure
    from pulsekit.case.propagate_tube import propagate_tube
    from pulsekit.case.wall_shear import solve_measurement, tube_of

    measurement = measure(case, pk.Workspace())
    flow = solve_measurement(measurement, tube_of(case), fluid_of(case))
    found = propagate_tube(case, measurement, flow, flow.findings(), pk.Checks(), samples=3000)
    lead = found.findings["time_averaged_wall_shear_stress"]
    plain = np.quantile(found.samples[lead.name], (0.025, 0.975))
    assert lead.low < plain[0]
    assert lead.high < plain[1]
    assert lead.low >= 0 or lead.low is None
    said = [sentence for sentence in found.remarks if "Noise lifts the time-averaged wall shear stress" in sentence]
    assert said
    assert "moved by twice that" in said[0]


def test_first_order_stands_beside_and_differs_where_it_must(answer, tmp_path):
    assert any("agrees with the Monte Carlo one within 20 %" in sentence for sentence in answer.remarks)
    case = steady_case(tmp_path, swing=0.5, flow_noise=20.0, tube={"radius": "3.1 mm ± 40 %"})
    found = pk.analyse(case, samples=3000)
    said = [sentence for sentence in found.remarks if "first-order (GUM) standard uncertainty differs" in sentence]
    assert said
    assert "time-averaged wall shear stress" in said[0]


def test_the_numerical_error_is_stated(answer, tmp_path):
    assert any("Numerical error of the interval" in sentence and "7.9.2" in sentence for sentence in answer.remarks)
    low, high = answer.extras["interval_error"]["time_averaged_wall_shear_stress"]
    width = answer.findings["time_averaged_wall_shear_stress"].high - answer.findings["time_averaged_wall_shear_stress"].low
    assert 0 < low < 0.02 * width
    assert 0 < high < 0.02 * width
    few = pk.analyse(steady_case(tmp_path, swing=1e-3), samples=200)
    assert any("200 samples are few" in sentence for sentence in few.remarks)
    assert few.provenance["samples"] == 200


@pytest.mark.parametrize("samples", [0, 5, -3])
def test_too_few_samples_are_refused(tmp_path, samples):
    with pytest.raises(InputError, match="whole number of at least"):
        pk.analyse(steady_case(tmp_path, swing=0.5), samples=samples)


def test_nothing_uncertain_is_no_interval_and_says_so(tmp_path):
    case = steady_case(
        tmp_path, beats=1, swing=0.5, cycles={"harmonics": 1}, tube={"radius": "3.1 mm"},
        fluid={"kind": "given", "density": "1060 kg/m^3", "viscosity": "3.5 mPa*s"},
    )  # fmt: skip
    answer = pk.analyse(case, samples=100)
    finding = answer.findings["time_averaged_wall_shear_stress"]
    # One cycle written to six decimals: what the one harmonic leaves is rounding, and the interval, if any, is as narrow.
    assert finding.low is None or finding.high - finding.low < 1e-6 * finding.value


def test_two_cycles_are_weak_and_it_is_said(tmp_path):
    two = pk.analyse(steady_case(tmp_path, beats=2, swing=0.5, flow_noise=30.0), samples=2000)
    assert any("Only 2 cycles" in sentence for sentence in two.remarks)
    many = pk.analyse(steady_case(tmp_path, beats=16, swing=0.5, flow_noise=30.0), samples=2000)
    assert not any("Only" in sentence for sentence in many.remarks)
    assert two.harmonics.degrees_of_freedom < many.harmonics.degrees_of_freedom
    narrow, wide = many.findings["peak_flow_rate"], two.findings["peak_flow_rate"]
    assert wide.high - wide.low > narrow.high - narrow.low


def test_bad_uncertainties_name_the_key(tmp_path):
    with pytest.raises((CaseError, InputError), match="negative"):
        pk.analyse(steady_case(tmp_path, tube={"radius": "3.1 mm ± -0.1 mm"}))
    with pytest.raises((CaseError, UnitError)):
        pk.analyse(steady_case(tmp_path, tube={"radius": "3.1 mm ± 0.1 s"}))
    with pytest.raises(PulsekitError):
        pk.analyse(steady_case(tmp_path, recording={"scale_uncertainty": "-2 %"}))


def test_an_uncertainty_above_its_value_is_remarked_and_stays_positive(tmp_path):
    answer = pk.analyse(steady_case(tmp_path, swing=1e-3, fluid=FLUID | {"viscosity": "3.5 mPa*s ± 5 mPa*s"}), samples=1000)
    assert any("larger than the value" in sentence for sentence in answer.remarks)
    assert answer.samples["time_averaged_wall_shear_stress"].min() > 0


def test_checks_hear_the_samples(tmp_path):
    # A mean Reynolds number near 2040 with an uncertain viscosity.
    time = np.arange(500) / 100
    (tmp_path / "run.csv").write_text(
        "time (s),flow (L/min)\n" + "".join(f"{t:.2f},{2.0 + 0.01 * np.cos(2 * np.pi * t):.6f}\n" for t in time)
    )
    case = pk.WallShearCase(
        recording={"file": "run.csv", "signal": "flow", "quantity": "flow_rate"}, cycles={"period": "1 s"}, tube={"radius": "3.2 mm"}, fluid=FLUID,
        folder=tmp_path,
    )  # fmt: skip
    check = pk.analyse(case, samples=2000).checks["laminar_mean"]
    assert "% of the samples" in check.because
    assert check.verdict == "doubtful"


def test_without_a_mean_the_words_are_about_the_oscillating_part(tmp_path):
    (tmp_path / "run.csv").write_text(
        "time (s),drop (Pa)\n" + "".join(f"{k / 100},{50 * np.cos(2 * np.pi * k / 100):.6f}\n" for k in range(600))
    )
    case = pk.WallShearCase(
        recording={"file": "run.csv", "signal": "drop", "quantity": "pressure_drop", "distance": "120 mm ± 2 %", "coupling": "ac"},
        cycles={"period": "1 s"}, tube={"radius": "3.1 mm"}, fluid=FLUID, folder=tmp_path,
    )  # fmt: skip
    answer = pk.analyse(case, samples=500)
    finding = answer.findings["pressure_gradient_amplitude"]
    assert relative(finding) == pytest.approx(0.02, rel=0.15)
    assert answer.findings["time_averaged_wall_shear_stress"].value is None
    assert "recording.distance" in answer.improve
    assert "amplitude of the pressure gradient" in str(answer.left_out_inputs[0])


def test_a_station_at_the_origin_may_be_uncertain(tmp_path):
    time = np.arange(600) / 100
    rows = "".join(f"{t:.2f},{1000 + 60 * np.cos(2 * np.pi * t):.6f},{1000 - 60 * np.sin(2 * np.pi * t):.6f}\n" for t in time)
    (tmp_path / "run.csv").write_text("time (s),p1 (Pa),p2 (Pa)\n" + rows)
    case = pk.WallShearCase(
        recording={"quantity": "pressure_gradient", "upstream": "p1", "downstream": "p2"},
        station=[
            {"name": "p1", "file": "run.csv", "column": "p1", "position": "0 mm ± 1 mm", "height": "0 mm", "zero": "0 Pa"},
            {"name": "p2", "file": "run.csv", "column": "p2", "position": "100 mm ± 1 mm", "height": "0 mm", "zero": "0 Pa"},
        ],
        cycles={"period": "1 s", "harmonics": 1}, tube={"radius": "3.1 mm"}, fluid=FLUID, folder=tmp_path,
    )  # fmt: skip
    finding = pk.analyse(case, samples=2000).findings["pressure_gradient_amplitude"]
    # Two positions known to 1 mm each: 1.4 % of their distance.
    assert relative(finding) == pytest.approx(np.sqrt(2) * 0.01, rel=0.1)
