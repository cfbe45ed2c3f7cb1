"""The verdict on each assumption behind a tube's flow, against numbers worked by hand and published limits."""

from __future__ import annotations

import numpy as np
import pytest

import pulsekit as pk
from pulsekit.tube.check_context import judged
from pulsekit.tube.checks import tube_checks

OMEGA = 2 * np.pi * 1.2
NU = 3.5e-3 / 1060
RADIUS = 3.1e-3


def flow(mean=0.1, swing=0.05, *, quantity="mean_velocity", mean_known=True, fluid=None, radius=RADIUS, more=()):
    """Mean velocity mean + swing cos(omega t) [m/s] in a tube of 3.1 mm radius."""
    return pk.solve(
        pk.Harmonics(frequency=1.2, coefficients=[mean, swing, *more]), quantity=quantity, tube=pk.CircularTube(radius=radius),
        fluid=fluid or pk.Fluid(density=1060.0, viscosity=3.5e-3), mean_known=mean_known,
    )  # fmt: skip


def test_numbers_of_the_three_laminar_checks():
    checks = tube_checks(flow())
    assert checks["laminar_mean"].value == pytest.approx(0.1 * 2 * RADIUS / NU, rel=1e-12)
    assert checks["laminar_peak"].value == pytest.approx(0.15 * 2 * RADIUS / NU, rel=1e-9)
    # U0 is half the peak to peak of U(t), 0.05 m/s here.
    assert checks["stokes_layer"].value == pytest.approx(0.05 * np.sqrt(2 / (NU * OMEGA)), rel=1e-9)
    assert {checks[name].verdict for name in ("laminar_mean", "laminar_peak", "stokes_layer")} == {"holds"}


# Steady pipes turn turbulent near 2040 (Avila et al. 2011); pulsating ones between 2250 and 3000 (Trip et al. 2012).
@pytest.mark.parametrize(("reynolds", "verdict"), [(2000, "holds"), (2100, "doubtful"), (3100, "fails")])
def test_mean_reynolds_number(reynolds, verdict):
    check = tube_checks(flow(mean=reynolds * NU / (2 * RADIUS), swing=0.0))["laminar_mean"]
    assert check.verdict == verdict
    assert "Avila" in check.source
    assert str(reynolds) in check.because


# Bursts from about 500 (Hino 1976, from memory); instability in much of the cycle near 200 (Blondeaux & Vittori 2021).
@pytest.mark.parametrize(("reynolds", "verdict"), [(150, "holds"), (300, "doubtful"), (600, "fails")])
def test_stokes_layer(reynolds, verdict):
    assert tube_checks(flow(mean=0.0, swing=reynolds / np.sqrt(2 / (NU * OMEGA))))["stokes_layer"].verdict == verdict


def test_reversed_mean_flow_is_as_turbulent_as_forward():
    assert tube_checks(flow(mean=-0.9, swing=0.0))["laminar_mean"].value == pytest.approx(0.9 * 2 * RADIUS / NU)


def test_an_unknown_mean_leaves_the_oscillating_layer():
    checks = tube_checks(flow(mean=0.0, mean_known=False))
    assert checks["laminar_mean"].verdict == checks["laminar_peak"].verdict == "unknown"
    assert "mean_flow" in checks["laminar_mean"].because
    assert checks["stokes_layer"].verdict == "holds"


def test_entrance_length_is_that_of_durst():
    check = tube_checks(flow())["developed"]
    reynolds = 0.1 * 2 * RADIUS / NU
    # Durst et al. 2005 (from memory): Le/D = [0.619^1.6 + (0.0567 Re)^1.6]^(1/1.6).
    need = 2 * RADIUS * (0.619**1.6 + (0.0567 * reynolds) ** 1.6) ** (1 / 1.6)
    assert check.verdict == "unknown"
    assert check.limit == pytest.approx(need, rel=1e-9)
    assert "tube.distance_from_inlet" in check.because
    for part, verdict in ((1.1, "holds"), (0.7, "doubtful"), (0.3, "fails")):
        assert tube_checks(flow(), distance_from_inlet=part * need)["developed"].verdict == verdict


def test_the_samples_are_heard():
    reynolds = np.concatenate([np.full(69, 1900.0), np.full(31, 2100.0)])
    check = tube_checks(flow(mean=1950 * NU / (2 * RADIUS), swing=0.0), samples={"mean_reynolds_number": reynolds})["laminar_mean"]
    assert "fails in 31 % of the samples" in check.because
    # It would hold at the stated givens; a third of the samples beyond the limit is a doubt.
    assert check.verdict == "doubtful"


def test_a_few_samples_beyond_the_limit_are_said_and_change_no_verdict():
    assert judged("holds", np.arange(1000) < 20) == judged("holds", np.arange(1000) < 20)
    assert judged("holds", np.arange(1000) < 20).verdict == "holds"
    assert "2 %" in judged("holds", np.arange(1000) < 20).words
    assert "under 1 %" in judged("holds", np.arange(10_000) < 3).words
    assert judged("fails", np.arange(1000) < 900).verdict == "fails"
    assert judged("holds", np.zeros(10, bool)).words == ""


def test_uncertain_inputs_of_the_checks_themselves():
    need = tube_checks(flow())["developed"].limit
    spread = need * np.linspace(0.8, 1.3, 1001)
    check = tube_checks(flow(), distance_from_inlet=1.05 * need, check_samples={"distance_from_inlet": spread})["developed"]
    assert "fails in 40 % of the samples" in check.because
    assert check.verdict == "doubtful"


@pytest.mark.parametrize(("motion", "verdict"), [(0.01, "holds"), (0.05, "doubtful"), (0.15, "fails")])
def test_wall_motion(motion, verdict):
    check = tube_checks(flow(), wall_motion=motion)["rigid_wall"]
    assert check.verdict == verdict
    # tau goes with the cube of the radius at a given flow.
    assert f"{300 * motion:.2g} %" in check.because


def test_wall_of_which_nothing_is_known():
    check = tube_checks(flow())["rigid_wall"]
    assert check.verdict == "unknown"
    assert "tube.wall_motion" in check.because
    assert "tube.length" in check.because


def test_a_bend_has_its_dean_number():
    check = tube_checks(flow(), bend_radius=0.05)["straight"]
    assert check.value == pytest.approx(0.1 * 2 * RADIUS / NU * np.sqrt(RADIUS / 0.05), rel=1e-9)
    assert check.verdict == "doubtful"
    assert tube_checks(flow())["straight"].verdict == "unknown"


def test_shear_thinning_and_what_it_would_do():
    def curve(rate):
        return 3.5e-3 * 1.18 + 0.0 * np.asarray(rate)

    check = tube_checks(flow(quantity="mean_velocity", swing=0.0), newtonian=curve, newtonian_source="invented")["newtonian"]
    assert check.value == pytest.approx(0.18, rel=1e-9)
    assert check.verdict == "doubtful"
    # Steady flow at a given velocity: tau goes with mu.
    assert "18 % above" in check.because
    assert "18 % higher" in check.because
    # In oscillating flow at a large Womersley number tau goes with the root of mu: 1.18^0.5 = 1.086.
    fast = flow(mean=1e-9, swing=0.05, radius=0.05)
    assert "9 % higher" in tube_checks(fast, newtonian=curve)["newtonian"].because
    # A measured pressure gradient fixes the mean wall shear whatever the liquid.
    pressed = pk.solve(
        pk.Harmonics(frequency=1.2, coefficients=[100.0]),
        quantity="pressure_gradient",
        tube=pk.CircularTube(radius=RADIUS),
        fluid=pk.Fluid(density=1060.0, viscosity=3.5e-3),
    )
    assert "0 % " in tube_checks(pressed, newtonian=curve)["newtonian"].because.rpartition("about")[2]


def test_newtonian_hears_the_samples():
    rates = np.linspace(50, 150, 100)
    check = tube_checks(
        flow(), newtonian=lambda rate: 3.5e-3 * np.where(np.asarray(rate) < 75, 1.5, 1.0), samples={"time_averaged_wall_shear_rate": rates}
    )["newtonian"]
    assert "fails in 25 % of the samples" in check.because
    assert check.verdict == "doubtful"


def test_a_liquid_of_no_kind_is_unknown_and_named():
    check = tube_checks(flow())["newtonian"]
    assert check.verdict == "unknown"
    assert "fluid.kind" in check.because
    assert tube_checks(flow(), newtonian_by_kind=True)["newtonian"].verdict == "holds"


@pytest.mark.parametrize(("stated", "verdict"), [(None, "unknown"), (True, "holds"), (False, "fails")])
def test_axisymmetry_is_the_users_word(stated, verdict):
    assert tube_checks(flow(), axisymmetric=stated)["axisymmetric"].verdict == verdict


def test_extrapolated_correlations_fail():
    fluid = pk.fluids.blood(haematocrit="0.45", temperature="45 degC", extrapolate=True)
    assert tube_checks(flow(fluid=fluid))["correlation_range"].verdict == "fails"
    assert tube_checks(flow())["correlation_range"].verdict == "holds"


def test_an_envelope_taken_as_the_centreline():
    # At a large Womersley number with little mean flow the profile turns: the axis does not hold the largest velocity.
    turning = flow(mean=0.0, swing=0.2, quantity="centreline_velocity", radius=0.01)
    check = tube_checks(turning, quantity="centreline_velocity")["envelope_is_centreline"]
    assert check.verdict == "doubtful"
    assert "velocity_envelope" in check.because
    steady = flow(mean=0.2, swing=0.0, quantity="centreline_velocity")
    assert tube_checks(steady, quantity="centreline_velocity")["envelope_is_centreline"].verdict == "holds"
    assert "envelope_is_centreline" not in tube_checks(steady, quantity="flow_rate")


def test_one_pressure_alone_knows_no_reflections():
    check = tube_checks(flow(), wave_alone=True)["no_reflections"]
    assert check.verdict == "doubtful"
    assert "reflections" in check.because


# --- checks on a recording


def recorded(beats=10, *, scatter=0.0, drift=0.0, noise=0.0, seed=3, step=0.0, rate=100):
    """Cycles of 1 s with the given scatter of strength, drift of the base line over the record, noise, and step where they close."""
    rng = np.random.default_rng(seed)
    time = np.arange(beats * rate) / rate
    strength = np.repeat(1 + scatter * rng.standard_normal(beats), rate)
    values = (
        strength * (1 + 0.5 * np.cos(2 * np.pi * time))
        + drift * time / beats
        + noise * rng.standard_normal(time.size)
        + step * (time % 1.0)
    )
    signal = pk.Signal(time, values * 1e-6)
    cycles = pk.find_cycles(signal, period=1.0)
    return cycles, pk.decompose(cycles)


def checks_of(cycles, harmonics, **more):
    solved = pk.solve(
        harmonics, quantity="flow_rate", tube=pk.CircularTube(radius=RADIUS), fluid=pk.Fluid(density=1060.0, viscosity=3.5e-3)
    )
    return tube_checks(solved, cycles=cycles, harmonics=harmonics, signal=cycles.signal, quantity="flow_rate", **more)


@pytest.mark.parametrize(("scatter", "verdict"), [(0.01, "holds"), (0.12, "doubtful"), (0.45, "fails")])
def test_periodic(scatter, verdict):
    assert checks_of(*recorded(scatter=scatter))["periodic"].verdict == verdict


def test_one_cycle_is_not_known_to_be_periodic():
    check = checks_of(*recorded(beats=1))["periodic"]
    assert check.verdict == "unknown"
    assert "record several" in check.because


def test_drift():
    assert checks_of(*recorded())["drift"].verdict == "holds"
    # The swing is 1; nine tenths of the drift lie between the first and the last cycle.
    assert checks_of(*recorded(drift=0.5))["drift"].verdict == "fails"


def test_a_step_where_the_cycle_closes():
    assert checks_of(*recorded())["cycle_closure"].verdict == "holds"
    check = checks_of(*recorded(step=0.8))["cycle_closure"]
    assert check.verdict == "fails"
    # 0.8 over a swing of about 1.3; the harmonics kept of a saw tooth swing a little beyond it.
    assert 0.4 < check.value < 0.8


def test_noise_against_the_kept_harmonics():
    assert checks_of(*recorded())["noise"].verdict == "holds"
    loud = checks_of(*recorded(beats=4, noise=0.6))["noise"]
    assert loud.verdict in ("doubtful", "fails")
    assert loud.value > 0.1


def test_resolved_says_what_only_the_user_knows():
    check = checks_of(*recorded())["resolved"]
    assert check.verdict == "holds"
    assert "antialias_filter" in check.because
    assert "antialias_filter" not in checks_of(*recorded(), antialias_filter=40.0)["resolved"].because
    assert checks_of(*recorded(rate=8))["resolved"].verdict == "doubtful"
    cycles, _ = recorded(step=0.8)
    cut = checks_of(cycles, pk.decompose(cycles, count=2))["resolved"]
    assert cut.verdict == "doubtful"
    assert cut.value == 100


def test_an_unstated_instrument_is_unknown_with_the_size_of_the_doubt():
    cycles, harmonics = recorded()
    check = checks_of(cycles, harmonics)["instrument_response"]
    assert check.verdict == "unknown"
    assert "30 Hz" in check.because
    assert checks_of(cycles, harmonics, instrument_known=True)["instrument_response"].verdict == "holds"


def test_a_mean_velocity_tells_where_it_was_sampled():
    cycles, harmonics = recorded()
    solved = pk.solve(
        harmonics, quantity="mean_velocity", tube=pk.CircularTube(radius=RADIUS), fluid=pk.Fluid(density=1060.0, viscosity=3.5e-3)
    )
    known = {"cycles": cycles, "harmonics": harmonics, "quantity": "mean_velocity"}
    assert tube_checks(solved, **known)["sample_volume"].verdict == "unknown"
    assert tube_checks(solved, **known, sample_volume="whole lumen")["sample_volume"].verdict == "holds"
    assert tube_checks(solved, **known, sample_volume="2 mm gate")["sample_volume"].verdict == "doubtful"


def test_every_check_has_a_sentence_and_an_unknown_names_what_to_give():
    for check in tube_checks(flow()):
        assert check.because.endswith(".")
        assert check.label
        if check.verdict == "unknown" and check.name not in ("periodic", "resolved"):
            assert "tube." in check.because or "recording." in check.because or "fluid." in check.because
