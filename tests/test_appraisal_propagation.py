"""Propagation of uncertainty through any calculation, against the guides and closed forms."""

from __future__ import annotations

import numpy as np
import pytest

from pulsekit.appraisal import Together, propagate
from pulsekit.errors import InputError
from pulsekit.quantities import Given, parse_given

# JCGM 100:2008 (GUM), annex H.2, table H.2: five simultaneous readings of voltage [V], current [A], phase [rad].
READINGS = np.array([
    [5.007, 4.994, 5.005, 4.990, 4.999],
    [19.663e-3, 19.639e-3, 19.640e-3, 19.685e-3, 19.678e-3],
    [1.0456, 1.0438, 1.0468, 1.0428, 1.0433],
])  # fmt: skip


def impedance(voltage, current, phase):
    """GUM, eq. (H.7)."""
    size = voltage / current
    return {"R": size * np.cos(phase), "X": size * np.sin(phase), "Z": size}


def readings_together(freedom=np.inf):
    return Together(
        names=("voltage", "current", "phase"), values=READINGS.mean(axis=1), covariance=np.cov(READINGS) / READINGS.shape[1], degrees_of_freedom=freedom
    )  # fmt: skip


def test_gum_h2_by_first_order():
    # JCGM 100:2008, table H.3 (values) and H.4 (correlations); half of the last printed digit, but for the reactance, whose
    # uncertainty the guide's own rounding of the means leaves 0.0006 off.
    found = propagate(impedance, {}, together=[readings_together()], samples=100)
    assert found.value["R"] == pytest.approx(127.732, abs=6e-4)
    assert found.value["X"] == pytest.approx(219.847, abs=6e-4)
    assert found.value["Z"] == pytest.approx(254.260, abs=6e-4)
    assert found.first_order["R"] == pytest.approx(0.071, abs=6e-4)
    assert found.first_order["X"] == pytest.approx(0.295, abs=6e-4)
    assert found.first_order["Z"] == pytest.approx(0.236, abs=6e-4)
    assert found.first_order_correlation[0, 1] == pytest.approx(-0.588, abs=6e-4)


def test_gum_h2_by_samples():
    found = propagate(impedance, {}, together=[readings_together()], samples=40_000)
    # The relative standard error of a standard deviation from 40,000 draws is 0.35 %; four of these.
    for name in ("R", "X", "Z"):
        assert found.standard_uncertainty[name] == pytest.approx(found.first_order[name], rel=0.014)
    correlation = np.corrcoef(found.samples["R"], found.samples["X"])[0, 1]
    # Standard error (1 - r^2)/sqrt(S) = 0.0033; four of these.
    assert correlation == pytest.approx(-0.588, abs=0.014)
    assert found.remarks == ()
    # All that the outputs vary is owed to the one group of readings.
    assert found.shares["Z"]["voltage+current+phase"] == pytest.approx(1.0, abs=1e-3)


def test_gum_h2_with_its_four_degrees_of_freedom():
    # Student's t with 4 degrees of freedom: 2.776 (any table) in place of 1.960 for 95 %.
    found = propagate(impedance, {}, together=[readings_together(4)], samples=40_000)
    half = 0.5 * (found.high["Z"] - found.low["Z"])
    # The ends are known to about 1 % each with 40,000 draws of a t4.
    assert half == pytest.approx(2.776 * found.first_order["Z"], rel=0.04)


def poiseuille(radius, flow, viscosity):
    return 4 * viscosity * flow / (np.pi * radius**3)


def poiseuille_inputs(radius="2 %", flow="5 %", viscosity="5 %"):
    return {
        "radius": parse_given(f"3.1 mm ± {radius}", "length"), "flow": parse_given(f"400 mL/min ± {flow}", "flow_rate"),
        "viscosity": parse_given(f"3.5 mPa*s ± {viscosity}", "viscosity"),
    }  # fmt: skip


def test_steady_shear_has_the_closed_form_of_its_uncertainty():
    found = propagate(poiseuille, poiseuille_inputs(), samples=100_000)
    closed = np.sqrt((3 * 0.02) ** 2 + 0.05**2 + 0.05**2)  # 9.2736 %
    value = found.value["result"]
    assert found.first_order["result"] / value == pytest.approx(closed, rel=1e-4)
    # A product of log-normals is log-normal: its mean and deviation are exact.
    logs = 9 * np.log1p(0.02**2) + 2 * np.log1p(0.05**2)
    mean = value * np.exp(9 * np.log1p(0.02**2) / 2 + 3 * np.log1p(0.02**2) / 2)
    assert found.samples["result"].mean() == pytest.approx(mean, rel=0.002)
    assert found.samples["result"].std() / mean == pytest.approx(np.sqrt(np.expm1(logs)), rel=0.01)
    assert found.standard_uncertainty["result"] / value == pytest.approx(closed, rel=0.02)
    # The logarithm's quantiles give the interval; 1 % of its half width is five standard numerical errors.
    middle = value * np.exp(3 * np.log1p(0.02**2) / 2 - np.log1p(0.05**2))
    for end, sign in ((found.low["result"], -1), (found.high["result"], 1)):
        assert end == pytest.approx(middle * np.exp(sign * 1.959964 * np.sqrt(logs)), abs=0.02 * value * closed)


def test_shares_follow_the_powers():
    found = propagate(poiseuille, poiseuille_inputs(), samples=10_000)
    share = found.shares["result"]
    total = 0.06**2 + 2 * 0.05**2
    # 4,000 samples fix a share to about 0.01.
    assert share["radius"] == pytest.approx(0.06**2 / total, abs=0.04)
    assert share["flow"] == pytest.approx(0.05**2 / total, abs=0.04)
    assert share.get("interactions", 0.0) < 0.03
    assert sum(share.values()) == pytest.approx(1.0)


def test_first_order_agrees_with_an_independent_library():
    uncertainties = pytest.importorskip("uncertainties")
    # Signed inputs, so that the samples are normal too.
    found = propagate(
        lambda a, b: a * b / (1 + b * b),
        {"a": Given(value=2.0, standard_uncertainty=0.1, stated=True), "b": Given(value=0.7, standard_uncertainty=0.05, stated=True)}, samples=1000,
    )  # fmt: skip
    a, b = uncertainties.ufloat(2.0, 0.1), uncertainties.ufloat(0.7, 0.05)
    # Central differences of 1 % of the standard uncertainty leave a relative error of order (0.01 u/b)^2.
    assert found.first_order["result"] == pytest.approx((a * b / (1 + b * b)).std_dev, rel=1e-5)


def test_curvature_is_remarked():
    found = propagate(lambda x: x**2, {"x": Given(value=0.0, standard_uncertainty=1.0, dimension="ratio", stated=True)})
    # First order sees nothing at the bottom of a parabola; the samples see chi squared.
    assert found.first_order["result"] == pytest.approx(0.0, abs=1e-9)
    assert any("first-order" in sentence for sentence in found.remarks)
    # 2.5 and 97.5 % points of chi squared with one degree of freedom (any table): 0.000982, 5.0239; both 4 numerical errors.
    assert found.high["result"] == pytest.approx(5.0239, abs=0.35)


def test_same_seed_same_numbers_and_a_new_input_changes_no_others_draws():
    one = propagate(lambda x, **rest: x, {"x": parse_given("1 mm ± 10 %", "length")}, samples=200)
    two = propagate(lambda x, y: x, {"y": parse_given("1 mm ± 10 %", "length"), "x": parse_given("1 mm ± 10 %", "length")}, samples=200)
    np.testing.assert_array_equal(one.samples["result"], two.samples["result"])
    other = propagate(lambda x: x, {"x": parse_given("1 mm ± 10 %", "length")}, samples=200, seed=1)
    assert not np.array_equal(one.samples["result"], other.samples["result"])


def test_a_singular_covariance_is_drawn_on_its_line():
    pair = Together(names=("a", "b"), values=[1.0, 2.0], covariance=[[1.0, 2.0], [2.0, 4.0]])
    found = propagate(lambda a, b: b - 2 * a, {}, together=[pair], samples=500)
    # b = 2 a in every draw, to rounding of numbers near 10.
    np.testing.assert_allclose(found.samples["result"], 0.0, atol=1e-12)


def test_an_open_side_where_samples_are_infinite():
    found = propagate(
        lambda x: 1 / np.round(x), {"x": Given(value=1.0, standard_uncertainty=0.5, stated=True, dimension="ratio")}, samples=1000
    )
    assert found.high["result"] is None
    assert any("no finite value" in sentence for sentence in found.remarks)


def test_bad_input():
    exact = {"x": 1.0}
    with pytest.raises(InputError, match="at least 100"):
        propagate(lambda x: x, exact, samples=10)
    with pytest.raises(InputError, match="given alone and together"):
        propagate(lambda x: x, exact, together=[Together(names=("x",), values=[1.0], covariance=[[1.0]])])
    with pytest.raises(InputError, match="no finite value"):
        propagate(lambda x: 1 / (x - 1), exact)
    with pytest.raises(InputError, match="negative variance"):
        Together(names=("a", "b"), values=[0, 0], covariance=[[1.0, 2.0], [2.0, 1.0]])
    with pytest.raises(InputError, match="symmetric"):
        Together(names=("a", "b"), values=[0, 0], covariance=[[1.0, 0.5], [0.2, 1.0]])
    with pytest.raises(InputError, match="shape"):
        Together(names=("a", "b"), values=[0], covariance=[[1.0]])
    with pytest.raises(InputError, match="above 0"):
        Together(names=("a",), values=[0], covariance=[[1.0]], degrees_of_freedom=0)


def test_exact_inputs_give_an_interval_of_no_width():
    found = propagate(lambda x: 2 * x, {"x": 3.0}, samples=100)
    assert found.low["result"] == found.high["result"] == 6.0
    assert found.shares["result"] == {}
