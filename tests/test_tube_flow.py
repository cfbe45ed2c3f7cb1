"""The solved flow in a tube: inverses, linearity, conservation, closed forms, a published waveform, bad givens."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import pulsekit as pk
from pulsekit.errors import InputError, UnitError
from pulsekit.exact.periodic import extremes
from pulsekit.tube.flow import QUANTITIES

EXACT = ["flow_rate", "mean_velocity", "centreline_velocity", "pressure_gradient", "wall_shear_stress"]
BLOOD = {"density": 1060.0, "viscosity": 3.5e-3}
ROUNDING = 1e-12  # two conversions through factors good to 1e-14, of harmonics of comparable size


def solved(coefficients, quantity="flow_rate", *, radius=3.1e-3, frequency=1.2, covariance=None, density=1060.0, viscosity=3.5e-3, **more):
    return pk.solve(
        pk.Harmonics(frequency, coefficients, covariance=covariance), quantity=quantity, tube=pk.CircularTube(radius=radius),
        fluid=pk.Fluid(density=density, viscosity=viscosity), **more,
    )  # fmt: skip


def waveform(seed: int, count: int, scale: float = 5e-6, mean: float = 1.0) -> np.ndarray:
    rng = np.random.default_rng(seed)
    x = scale * (rng.standard_normal(count + 1) + 1j * rng.standard_normal(count + 1)) * np.exp(-0.2 * np.arange(count + 1))
    x[0] = scale * mean
    return x


def curve(flow, name):
    return getattr(flow, name).coefficients


@pytest.mark.parametrize("start", EXACT)
@pytest.mark.parametrize("through", EXACT)
@pytest.mark.parametrize("radius", [2e-6, 3.1e-3, 0.3])
def test_there_and_back_for_all_pairs(start, through, radius):
    x = waveform(3, 8)
    there = solved(x, start, radius=radius)
    back = solved(curve(there, through), through, radius=radius)
    np.testing.assert_allclose(curve(back, start), x, rtol=ROUNDING)
    for name in EXACT:
        np.testing.assert_allclose(curve(back, name), curve(there, name), rtol=ROUNDING)


@given(st.integers(0, 999), st.floats(-3, 3), st.sampled_from(EXACT), st.floats(1e-4, 0.05))
@settings(max_examples=25, deadline=None)
def test_linear_in_the_measured_quantity(seed, factor, quantity, radius):
    a, b = waveform(seed, 5), waveform(seed + 1, 5)
    both, one, other = (solved(x, quantity, radius=radius) for x in (a + factor * b, a, b))
    for name in EXACT:
        wanted = curve(one, name) + factor * curve(other, name)
        size = np.abs(curve(one, name)) + abs(factor) * np.abs(curve(other, name))
        np.testing.assert_array_less(np.abs(curve(both, name) - wanted), ROUNDING * size + 1e-300)


@given(st.integers(0, 999), st.floats(0, 2))
@settings(max_examples=15, deadline=None)
def test_a_later_recording_gives_the_same_flow_later(seed, delay):
    harmonics = pk.Harmonics(1.2, waveform(seed, 6))
    now, later = (
        pk.solve(h, quantity="flow_rate", tube=pk.CircularTube(radius=3e-3), fluid=pk.Fluid(**BLOOD))
        for h in (harmonics, harmonics.shifted(delay))
    )
    time = np.linspace(0, 1, 17)
    np.testing.assert_allclose(
        later.wall_shear_stress.evaluate(time + delay),
        now.wall_shear_stress.evaluate(time),
        atol=1e-11 * np.abs(curve(now, "wall_shear_stress")).sum(),
    )
    for name in ("time_averaged_wall_shear_stress", "peak_wall_shear_stress", "oscillatory_shear_index", "peak_velocity"):
        # Extremes and rectified means do not know where a cycle begins: to what they claim.
        assert later.findings()[name].value == pytest.approx(now.findings()[name].value, rel=1e-6, abs=1e-9)


@given(st.floats(0.1, 10), st.floats(0.1, 10), st.floats(0.1, 10))
@settings(max_examples=20, deadline=None)
def test_scaling_of_units(length, duration, mass):
    """The same flow in other units of length, time and mass gives the same numbers in those units."""
    x = waveform(4, 6)
    here = solved(x)
    there = solved(
        x * length**3 / duration, radius=3.1e-3 * length, frequency=1.2 / duration, density=1060 * mass / length**3,
        viscosity=3.5e-3 * mass / (length * duration),
    )  # fmt: skip
    np.testing.assert_allclose(
        curve(there, "wall_shear_stress"), curve(here, "wall_shear_stress") * mass / (length * duration**2), rtol=1e-11
    )
    np.testing.assert_allclose(
        curve(there, "pressure_gradient"), curve(here, "pressure_gradient") * mass / (length * duration) ** 2, rtol=1e-11
    )
    assert there.womersley_number == pytest.approx(here.womersley_number, rel=1e-12)
    for name in ("oscillatory_shear_index", "flow_pulsatility_index", "mean_reynolds_number", "peak_reynolds_number", "backward_fraction"):
        assert there.findings()[name].value == pytest.approx(here.findings()[name].value, rel=1e-9)


def test_momentum_balance_at_every_instant():
    """Over the section: rho A dU/dt = G A - 2 pi R tau."""
    flow = solved(waveform(5, 10))
    order = np.arange(11)
    inertia = 1060 * 1j * order * flow.mean_velocity.angular_frequency * curve(flow, "mean_velocity")
    drag = 2 * curve(flow, "wall_shear_stress") / 3.1e-3
    np.testing.assert_allclose(curve(flow, "pressure_gradient"), inertia + drag, rtol=1e-13)


def test_field_is_no_slip_and_carries_the_flow():
    flow = solved(waveform(6, 10))
    radius, time = flow.tube.radius, np.linspace(0, 0.8, 13)
    node, weight = np.polynomial.legendre.leggauss(60)
    r = 0.5 * radius * (1 + node)
    field = flow.velocity(r, time)
    assert field.shape == (60, 13)
    carried = (0.5 * radius * weight * 2 * np.pi * r) @ field
    np.testing.assert_allclose(carried, flow.flow_rate.evaluate(time), atol=1e-13 * np.abs(curve(flow, "flow_rate")).sum())
    np.testing.assert_array_equal(flow.velocity(radius, time), 0)
    np.testing.assert_allclose(flow.velocity(0.0, time), flow.centreline_velocity.evaluate(time), rtol=1e-12, atol=1e-15)
    assert np.shape(flow.velocity(0.0, 0.0)) == ()
    assert flow.velocity([0.0, 1e-3], 0.0).shape == (2,)
    # Power put in by the gradient is what viscosity takes away over a cycle: mu mean of (du/dr)^2 over the section.
    step = 1e-6 * radius
    many = np.arange(64) / 64 / 1.2
    slope = (flow.velocity(r + step, many) - flow.velocity(r - step, many)) / (2 * step)
    lost = 3.5e-3 * ((0.5 * radius * weight * 2 * np.pi * r) @ (slope**2).mean(axis=1))
    assert flow.findings()["pumping_power_per_length"].value == pytest.approx(lost, rel=1e-8)  # error of the difference quotient


@pytest.mark.parametrize("bad", [-1e-6, 3.2e-3, np.nan])
def test_radii_outside_the_tube_are_refused(bad):
    with pytest.raises(InputError, match="radius must lie between"):
        solved([1e-6]).velocity(bad, 0.0)


def test_poiseuille():
    flow = solved([7e-6])
    found = {f.name: f.value for f in flow.findings()}
    assert found["mean_wall_shear_stress"] == pytest.approx(4 * 3.5e-3 * 7e-6 / (np.pi * 3.1e-3**3), rel=1e-14)
    assert found["steady_wall_shear_stress"] == pytest.approx(found["mean_wall_shear_stress"], rel=1e-14)
    assert found["mean_pressure_gradient"] == pytest.approx(8 * 3.5e-3 * 7e-6 / (np.pi * 3.1e-3**4), rel=1e-14)
    assert found["peak_velocity"] == pytest.approx(2 * 7e-6 / (np.pi * 3.1e-3**2), rel=1e-14)
    assert found["oscillatory_shear_index"] == 0
    assert found["pumping_power_per_length"] == pytest.approx(found["mean_pressure_gradient"] * 7e-6, rel=1e-13)


def test_nearly_steady_flow_is_poiseuille_at_every_instant():
    flow = solved(waveform(1, 4), frequency=1e-9)
    # The first correction is alpha^2/24 of the harmonic, alpha^2 = 2e-5 here.
    np.testing.assert_allclose(curve(flow, "wall_shear_stress"), curve(flow, "flow_rate") * 4 * 3.5e-3 / (np.pi * 3.1e-3**3), rtol=2e-5)


def test_closed_form_of_the_oscillatory_shear_index():
    """tau = tau_m (1 + 3 cos): mean of abs 2.0169795282530 tau_m, index 0.2521045737, computed from the definition (He & Ku 1996)."""
    found = solved([1.3, 3.9], "wall_shear_stress").findings()
    assert found["oscillatory_shear_index"].value == pytest.approx(0.2521045737, abs=1e-10)
    assert found["time_averaged_wall_shear_stress"].value == pytest.approx(1.3 * 2.0169795282530, rel=1e-12)
    # RRT = 1/((1 - 2 OSI) TAWSS) (Himburg 2004), which is 1/abs(mean).
    product = (1 - 2 * found["oscillatory_shear_index"].value) * found["time_averaged_wall_shear_stress"].value
    assert found["relative_residence_time"].value == pytest.approx(1 / product, rel=1e-9)
    assert found["forward_wall_shear_stress"].value - found["backward_wall_shear_stress"].value == pytest.approx(1.3)
    assert found["peak_wall_shear_stress"].value == pytest.approx(5.2)
    assert found["minimum_wall_shear_stress"].value == pytest.approx(-2.6)
    assert solved([1.3, 1.29], "wall_shear_stress").findings()["oscillatory_shear_index"].value == 0


def test_published_iliac_waveform():
    """Ojha 1994, coefficients placed in the public domain by their author's note; greatest 5.013 at 0.146 T, least -1.535 at 0.420 T."""
    pairs = [
        (1.11634, 0.913978), (-0.9294, 1.42011), (-0.711771, -0.186224), (-0.23544, -0.130299), (-0.112089, -0.200169),
        (0.00516184, -0.101336), (-0.0763172, -0.0509822), (0.0610194, -0.110495),
    ]  # fmt: skip
    # a cos + b sin is the real part of (a - i b) exp(i n omega t); relative to a mean flow of 5 mL/s.
    x = 5e-6 * np.array([1.0] + [a - 1j * b for a, b in pairs])
    flow = solved(x, frequency=1.0)
    found = {f.name: f.value for f in flow.findings()}
    assert found["peak_flow_rate"] / 5e-6 == pytest.approx(5.013, abs=5e-4)
    assert found["minimum_flow_rate"] / 5e-6 == pytest.approx(-1.535, abs=5e-4)
    _, _, at_low, at_high = extremes(x)
    # One unit of the last printed digit of the place.
    assert at_high / (2 * np.pi) == pytest.approx(0.146, abs=1e-3)
    assert at_low / (2 * np.pi) == pytest.approx(0.420, abs=1e-3)
    assert found["flow_pulsatility_index"] == pytest.approx(5.013 + 1.535, abs=1e-3)
    assert found["oscillatory_shear_index"] > 0.1  # a strongly reversing artery
    # The wall layer turns before the flow does: shear leads flow.
    assert found["time_of_peak_wall_shear"] < 0.146


@pytest.mark.parametrize("alpha", [0.2, 3.0, 30.0, 3000.0])
@pytest.mark.parametrize("seed", range(3))
def test_peak_velocity_against_a_dense_search(alpha, seed):
    x = waveform(seed, 6, scale=1.0, mean=0.3 * seed)
    nu = 3.5e-3 / 1060
    flow = solved(x, "mean_velocity", radius=alpha * np.sqrt(nu / (2 * np.pi * 1.2)))
    y = np.unique(np.concatenate([np.geomspace(0.05 / alpha, 1, 800), np.linspace(0, 1, 100)])) if alpha > 1 else np.linspace(0, 1, 800)
    field = np.abs(flow.velocity(flow.tube.radius * (1 - y[y <= 1]), np.arange(800) / 800 / 1.2))
    peak = flow.findings()["peak_velocity"].value
    # The dense search falls short by (pi n/800)^2/2 of the harmonics, under 3e-4 for six of them.
    assert field.max() <= peak * (1 + 1e-9)
    assert peak <= field.max() * (1 + 5e-4)


def test_mean_of_zero_single_harmonic_and_reversed_flow():
    found = solved([0.0, 4e-6]).findings()
    assert found["relative_residence_time"].value is None
    assert "zero" in found["relative_residence_time"].because
    assert found["flow_pulsatility_index"].value is None
    assert found["oscillatory_shear_index"].value == pytest.approx(0.5, abs=1e-12)
    forward, backward = solved(waveform(2, 5)).findings(), solved(-waveform(2, 5)).findings()
    for name in (
        "time_averaged_wall_shear_stress",
        "oscillatory_shear_index",
        "peak_velocity",
        "peak_reynolds_number",
        "pumping_power_per_length",
    ):
        assert backward[name].value == pytest.approx(forward[name].value, rel=1e-9)
    for one, other in (("forward_flow_rate", "backward_flow_rate"), ("greatest_wall_shear_stress", "minimum_wall_shear_stress")):
        assert abs(backward[one].value) == pytest.approx(abs(forward[other].value), rel=1e-12)
    nothing = solved([0.0, 0.0]).findings()
    assert nothing["peak_velocity"].value == 0
    assert nothing["oscillatory_shear_index"].value is None
    assert all(f.value is not None or f.because for f in nothing)


def test_a_mean_that_was_not_measured_is_not_made_up():
    found = solved([0.0, 40.0], "pressure_gradient", mean_known=False).findings()
    assert found["time_averaged_wall_shear_stress"].value is None
    assert "mean" in found["time_averaged_wall_shear_stress"].because
    assert found["pressure_gradient_amplitude"].value == pytest.approx(40.0)


def test_covariance_goes_along():
    """Each curve's covariance is that of many draws of the recording solved one by one."""
    rng = np.random.default_rng(1)
    root = rng.standard_normal((7, 7)) * 1e-7
    x = waveform(7, 3)
    flow = solved(x, covariance=root @ root.T)
    draws = np.stack([x.real, x.imag], axis=1).ravel()[[0, 2, 3, 4, 5, 6, 7]] + rng.standard_normal((4000, 7)) @ root.T
    full = np.insert(draws, 1, 0.0, axis=1)
    coefficients = full[:, 0::2] + 1j * full[:, 1::2]
    factor = curve(flow, "wall_shear_stress") / curve(flow, "flow_rate")
    shear = coefficients * factor
    flat = np.delete(np.stack([shear.real, shear.imag], axis=2).reshape(4000, -1), 1, axis=1)
    wanted = np.cov(flat.T)
    scale = np.sqrt(np.outer(np.diag(wanted), np.diag(wanted)))
    # A covariance of 4,000 draws is good to about 1/sqrt(4000) of the standard deviations; five of those.
    np.testing.assert_array_less(np.abs(flow.wall_shear_stress.covariance - wanted) / scale, 0.08)
    back = solved(curve(flow, "wall_shear_stress"), "wall_shear_stress", covariance=flow.wall_shear_stress.covariance)
    np.testing.assert_allclose(back.flow_rate.covariance, root @ root.T, rtol=1e-9, atol=1e-24)


def test_labels_and_units_of_every_finding():
    for finding in solved(waveform(1, 3), "centreline_velocity").findings():
        assert finding.label
        assert finding.label[0].isupper()
        assert isinstance(finding.unit, str)
    names = {f.name for f in solved(waveform(1, 3), "centreline_velocity").findings()}
    assert {"velocity_pulsatility_index", "velocity_resistive_index", "quasi_steady_shear_rate_of_mean_velocity"} <= names


def test_an_unknown_quantity_is_refused():
    with pytest.raises(InputError, match="flow_rate"):
        solved([1.0], "flow")
    assert set(EXACT) < set(QUANTITIES)


@pytest.mark.parametrize(
    ("given_", "match"),
    [
        ({}, "exactly one"), ({"radius": 1e-3, "diameter": 2e-3}, "exactly one"), ({"radius": 0.0}, "above 0"), ({"radius": "-3 mm"}, "above 0"),
        ({"outer_diameter": "4 mm"}, "exactly one"), ({"outer_diameter": "4 mm", "wall_thickness": "2 mm"}, "no bore"),
    ],
)  # fmt: skip
def test_bad_tubes_are_refused(given_, match):
    with pytest.raises(InputError, match=match):
        pk.CircularTube(**given_)


def test_tubes():
    with pytest.raises(UnitError, match="radius"):
        pk.CircularTube(radius="3 mL")
    assert pk.CircularTube(diameter="6.2 mm").radius == pytest.approx(3.1e-3)
    assert pk.CircularTube(outer_diameter="8 mm", wall_thickness="1 mm").radius == pytest.approx(3e-3)
    assert "suspicious" in pk.CircularTube(radius="3.1 m").remarks[0]
    assert pk.CircularTube(radius="3.1 mm ± 0.1 mm").givens["radius"].standard_uncertainty == pytest.approx(1e-4)
    assert pk.CircularTube(radius=1e-3) == pk.CircularTube(diameter=2e-3)
    assert "suspicious" in " ".join(solved([1e-3], radius="3.1 m").remarks)
