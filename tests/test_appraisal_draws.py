"""Distributions, draws of harmonics, intervals, shares and reliance."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import optimize, stats

from pulsekit.appraisal import Check, Checks, Finding, Findings, Input, draw_harmonics, draw_inputs, interval, interval_error, shares
from pulsekit.appraisal.distributions import draw, is_positive, stream, wide_remarks
from pulsekit.appraisal.harmonic_draws import covariance_root, lift_of_noise, mirrored_draws, multivariate_t, principal_steps
from pulsekit.appraisal.intervals import one_digit_fixed
from pulsekit.appraisal.reliance import TUBE_RELIANCE, depends_on, with_reliance
from pulsekit.errors import InputError, UnitError
from pulsekit.quantities import Given, parse_given
from pulsekit.trace import Harmonics

MANY = 200_000


def cloud(text, dimension="length", *, positive=True, samples=MANY):
    return draw(parse_given(text, dimension), stream(3, text), samples, positive=positive)


@pytest.mark.parametrize("relative", [0.01, 0.05, 0.3, 1.5])
def test_positive_quantities_are_log_normal_with_the_stated_mean_and_deviation(relative):
    given = Given(value=3e-3, standard_uncertainty=3e-3 * relative, dimension="length", stated=True)
    drawn = draw(given, stream(1, "x"), MANY)
    assert drawn.min() > 0
    spread = np.sqrt(np.log1p(relative**2))
    # Kolmogorov-Smirnov against the law itself: 1.95/sqrt(S) is passed once in a thousand; the seed is fixed.
    law = stats.lognorm(s=spread, scale=3e-3 * np.exp(-(spread**2) / 2))
    assert law.mean() == pytest.approx(3e-3)
    assert law.std() == pytest.approx(3e-3 * relative)
    assert stats.kstest(drawn, law.cdf).statistic < 1.95 / np.sqrt(MANY)


def test_limits_are_rectangular_for_a_positive_quantity_too():
    drawn = cloud("3.0 mm ± 0.3 mm (limits)")
    assert stats.kstest(drawn, stats.uniform(2.7e-3, 0.6e-3).cdf).statistic < 1.95 / np.sqrt(MANY)


def test_limits_below_zero_become_log_normal_and_are_remarked():
    given = parse_given("3 mm ± 4 mm (limits)", "length")
    drawn = draw(given, stream(1, "x"), MANY)
    assert drawn.min() > 0
    # A log-normal's sample mean at 77 % relative deviation: standard error 0.2 %.
    assert drawn.mean() == pytest.approx(3e-3, rel=0.01)
    assert "reach below zero" in wide_remarks({"tube.radius": Input(given, True)})[0]


def test_an_uncertainty_larger_than_its_value_is_remarked_and_stays_positive():
    given = parse_given("2 mm ± 3 mm", "length")
    assert draw(given, stream(1, "x"), MANY).min() > 0
    assert "larger than the value" in wide_remarks({"tube.radius": Input(given, True)})[0]


def test_coverage_factors_and_levels_are_taken_back_to_a_standard_uncertainty():
    assert cloud("3 mm ± 0.2 mm (k=2)").std() == pytest.approx(0.1e-3, rel=0.01)
    assert cloud("3 mm ± 0.196 mm (95 %)").std() == pytest.approx(0.1e-3, rel=0.01)


def test_signed_quantities_are_normal():
    drawn = cloud("0 mm ± 2 mm", positive=False)
    assert stats.kstest(drawn, stats.norm(0, 2e-3).cdf).statistic < 1.95 / np.sqrt(MANY)


def test_zero_uncertainty_is_exact():
    assert np.ptp(cloud("3 mm ± 0 mm", samples=100)) == 0


def test_a_positive_quantity_of_zero_cannot_be_drawn():
    with pytest.raises(InputError, match="above 0"):
        draw(Given(value=0.0, standard_uncertainty=1.0, text="0 ± 1"), stream(1, "x"), 10)


def test_bad_uncertainties_are_refused_where_they_are_written():
    with pytest.raises(InputError, match="negative"):
        parse_given("3 mm ± -0.1 mm", "length")
    with pytest.raises(UnitError):
        parse_given("3 mm ± 0.1 s", "length")


@pytest.mark.parametrize(
    ("key", "text", "dimension", "expected"),
    [
        ("tube.radius", "3 mm", "length", True), ("station.0.position", "0 mm", "length", False), ("station.0.height", "10 mm", "length", False),
        ("recording.delay", "4 ms", "time", False), ("recording.offset_uncertainty", "1 kPa", "pressure", False),
        ("recording.mean_flow", "300 mL/min", "flow_rate", False), ("fluid.viscosity", "3.5 mPa*s", "viscosity", True),
    ],
)  # fmt: skip
def test_which_givens_stay_positive(key, text, dimension, expected):
    assert is_positive(parse_given(text, dimension), key) is expected


def test_each_input_has_a_stream_of_its_own_and_an_identity_shares_it():
    radius = Input(parse_given("3 mm ± 5 %", "length"))
    other = Input(parse_given("4 mm ± 5 %", "length"), True, "scanner")
    one = draw_inputs({"tube.radius": radius}, 50, 7)
    two = draw_inputs({"fluid.viscosity": other, "tube.radius": radius, "b": other}, 50, 7)
    np.testing.assert_array_equal(one["tube.radius"], two["tube.radius"])
    np.testing.assert_array_equal(two["fluid.viscosity"], two["b"])
    assert abs(np.corrcoef(two["b"], two["tube.radius"])[0, 1]) < 0.5


def some_harmonics(freedom=9.0, singular=False):
    root = np.random.default_rng(2).standard_normal((5, 2 if singular else 5)) * 0.1
    return Harmonics(frequency=1.0, coefficients=[1.0, 2 - 1j, 0.5j], covariance=root @ root.T, degrees_of_freedom=freedom)


@pytest.mark.parametrize("singular", [False, True])
def test_draws_of_harmonics_have_their_covariance(singular):
    series = some_harmonics(np.inf, singular)
    drawn = draw_harmonics(series, MANY, np.random.default_rng(1))
    vectors = np.column_stack([drawn[:, 0].real, drawn[:, 1].real, drawn[:, 1].imag, drawn[:, 2].real, drawn[:, 2].imag])
    assert not drawn[:, 0].imag.any()
    # An entry's standard error is at most sqrt(2/S) of the largest variance.
    np.testing.assert_allclose(np.cov(vectors.T), series.covariance, atol=5 * np.sqrt(2 / MANY) * np.diag(series.covariance).max())
    np.testing.assert_allclose(vectors.mean(axis=0), [1, 2, -1, 0, 0.5], atol=5 * 0.3 / np.sqrt(MANY))


def test_draws_are_students_t_in_every_direction():
    series = some_harmonics(4.0)
    drawn = draw_harmonics(series, MANY, np.random.default_rng(1))
    direction = (drawn[:, 1].real - 2) / np.sqrt(series.covariance[1, 1])
    assert stats.kstest(direction, stats.t(4).cdf).statistic < 1.95 / np.sqrt(MANY)
    # One chi squared for all coefficients of a sample: their sizes are large together.
    other = (drawn[:, 2].imag - 0.5) / np.sqrt(series.covariance[4, 4])
    assert np.corrcoef(direction**2 > 4, other**2 > 4)[0, 1] > 0.05


def test_without_a_covariance_all_draws_are_the_estimate():
    drawn = draw_harmonics(Harmonics(frequency=1.0, coefficients=[1.0, 1j]), 10, np.random.default_rng(1))
    assert np.all(drawn == np.array([1.0, 1j]))
    assert principal_steps(Harmonics(frequency=1.0, coefficients=[1.0])).shape == (0, 1)


def test_the_root_of_a_singular_covariance():
    spread = np.array([[4.0, 2.0, 0.0], [2.0, 1.0, 0.0], [0.0, 0.0, 0.0]])
    root = covariance_root(spread)
    assert root.shape[1] == 1
    np.testing.assert_allclose(root @ root.T, spread, atol=1e-12)
    assert not multivariate_t(np.zeros((2, 2)), None, 5, np.random.default_rng(1)).any()


def test_interval_of_known_samples():
    low, high = interval(np.random.default_rng(1).standard_normal(MANY))
    # Standard numerical error of a 2.5 % point: sqrt(p(1-p)/S)/density = 0.006 at S = 200,000.
    assert low == pytest.approx(-1.96, abs=0.025)
    assert high == pytest.approx(1.96, abs=0.025)


def test_an_interval_is_open_where_samples_are_infinite():
    samples = np.concatenate([np.linspace(0, 1, 90), np.full(10, np.inf)])
    low, high = interval(samples)
    assert high is None
    assert low == pytest.approx(0.02, abs=0.02)
    assert interval(np.array([1.0, np.nan])) == (None, None)


def test_the_numerical_error_of_the_ends_is_what_repetition_shows():
    rng = np.random.default_rng(1)
    runs = rng.standard_normal((400, 10_000))
    shown = np.quantile(runs, (0.025, 0.975), axis=1).std(axis=1)
    stated = np.mean([interval_error(run) for run in runs[:50]], axis=0)
    # 400 repetitions fix a deviation to 3.5 %; the order statistics are one estimate of a density each.
    np.testing.assert_allclose(stated, shown, rtol=0.15)


def test_ten_thousand_samples_fix_one_digit_and_not_two():
    samples = np.random.default_rng(1).standard_normal(10_000) * 0.3
    assert one_digit_fixed(samples)
    assert not one_digit_fixed(samples[:200])
    # Two digits: the tolerance is ten times finer than 0.05.
    assert 2 * max(interval_error(samples)) > 0.005


def test_shares_of_a_function_known_in_closed_form():
    # Ishigami's function; first-order indices 0.3139, 0.4424, 0 for a = 7, b = 0.1 (closed form, Saltelli et al. 2008).
    rng = np.random.default_rng(1)
    x = rng.uniform(-np.pi, np.pi, (3, 4000))
    value = np.sin(x[0]) + 7 * np.sin(x[1]) ** 2 + 0.1 * x[2] ** 4 * np.sin(x[0])
    share = shares({"y": value}, {"a": x[0], "b": x[1], "c": x[2]})["y"]
    assert share["a"] == pytest.approx(0.3139, abs=0.03)
    assert share["c"] < 0.01
    # sin^2 over three half waves is no cubic: what the definition cannot see stands in the rest, and is never given to another.
    assert share["interactions"] > 0.6
    # Where the effect is a cubic it is exact.
    share = shares({"y": x[0] ** 3 + x[1]}, {"a": x[0], "b": x[1]})["y"]
    cubic, linear = np.pi**6 / 7, np.pi**2 / 3
    assert share["a"] == pytest.approx(cubic / (cubic + linear), abs=0.01)


def test_interactions_are_a_rest():
    rng = np.random.default_rng(1)
    a, b = rng.standard_normal((2, 4000))
    share = shares({"y": a * b}, {"a": a, "b": b})["y"]
    assert share["interactions"] > 0.95


def test_the_recording_is_one_entry():
    rng = np.random.default_rng(1)
    many = rng.standard_normal((4000, 41))
    other = rng.standard_normal(4000)
    share = shares({"y": many @ np.ones(41) + np.sqrt(41) * other}, {"recording": many, "radius": other})["y"]
    assert share["recording"] == pytest.approx(0.5, abs=0.04)
    assert share["radius"] == pytest.approx(0.5, abs=0.04)


def test_shares_of_an_exact_finding_are_empty():
    assert shares({"y": np.ones(100)}, {"a": np.arange(100.0)}) == {"y": {}}


VERDICTS = {"holds": "usable", "doubtful": "indicative", "unknown": "indicative", "fails": "not usable"}


@pytest.mark.parametrize(("verdict", "reliance"), VERDICTS.items())
def test_the_worst_check_decides(verdict, reliance):
    rows = Findings(
        [
            Finding(name="a", label="A", value=1.0, unit="Pa", low=0.5, high=2.0),
            Finding(name="b", label="B", value=1.0, unit="Pa", low=0.5, high=2.0),
        ]
    )
    verdicts = Checks([
        Check(name="first", label="First", verdict="holds", because=""), Check(name="second", label="Second", verdict=verdict, because=""),
    ])  # fmt: skip
    found = with_reliance(rows, verdicts, {"a": ("first", "second"), "b": ("first",)})
    assert found["a"].reliance == reliance
    assert found["b"].reliance == "usable"
    assert (found["a"].low is None) == (reliance == "not usable")
    assert ("Second" in found["a"].because) == (verdict != "holds")


def test_a_finding_that_does_not_exist_keeps_its_sentence():
    row = Finding(name="a", label="A", value=None, unit="Pa", reliance="not usable", because="There is no mean.")
    verdicts = Checks([Check(name="c", label="C", verdict="holds", because="")])
    assert with_reliance(Findings([row]), verdicts, {"a": ("c",)})["a"].because == "There is no mean."


def test_every_finding_of_a_tube_has_its_row_in_the_table():
    from pulsekit.tube.findings import TUBE_FINDINGS

    assert set(TUBE_FINDINGS) == set(TUBE_RELIANCE)


def test_a_flow_that_was_not_measured_rests_on_the_model():
    assert "laminar_mean" not in depends_on("mean_flow_rate", "flow_rate")
    assert "laminar_mean" in depends_on("mean_flow_rate", "centreline_velocity")
    assert "newtonian" in depends_on("peak_wall_shear_stress")


def test_the_lift_of_noise_by_mirrored_draws():
    series = Harmonics(frequency=1.0, coefficients=[0.2, 3.0], covariance=np.diag([0.25, 0.01, 0.01]))
    draws = mirrored_draws(series, 2000, np.random.default_rng(3))
    assert draws.shape == (4000, 2)
    # Linear in the coefficients: no lift at all, where plain draws would leave an error of 1.25 x 0.5/sqrt(2000) = 0.014.
    assert lift_of_noise(draws[:, 0].real, 0.2) == 0.0
    # Folded normal |0.2 + 0.5 z|: its median m solves Phi((m - 0.2)/0.5) - Phi((-m - 0.2)/0.5) = 1/2, m = 0.365 (computed with scipy).
    median = optimize.brentq(lambda m: stats.norm.cdf((m - 0.2) / 0.5) - stats.norm.cdf((-m - 0.2) / 0.5) - 0.5, 0.0, 2.0)
    # 2,000 pairs know a median to about 1.25 x 0.3/sqrt(2000) = 0.008; three of these.
    assert lift_of_noise(np.abs(draws[:, 0].real), 0.2) == pytest.approx(median - 0.2, abs=0.025)
    assert lift_of_noise(np.array([1.0, np.inf]), 1.0) == 0.0
    assert mirrored_draws(Harmonics(frequency=1.0, coefficients=[1.0]), 10, np.random.default_rng(3)).size == 0
