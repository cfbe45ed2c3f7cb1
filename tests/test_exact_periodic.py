"""Extremes and rectified means of a Fourier series against closed forms and dense sampling."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from pulsekit.errors import InputError
from pulsekit.exact.periodic import evaluate, extremes, mean_absolute, mean_positive, zero_phases
from pulsekit.exact.similarity import (
    dean_number,
    entrance_length,
    reynolds_number,
    stokes_layer_reynolds_number,
    stokes_layer_thickness,
    womersley_number,
)

ROUNDING = 1e-13  # a few sums of twenty terms of order one


def series(seed: int, count: int, mean: float = 0.0, decay: float = 0.2) -> np.ndarray:
    rng = np.random.default_rng(seed)
    x = (rng.standard_normal(count + 1) + 1j * rng.standard_normal(count + 1)) * np.exp(-decay * np.arange(count + 1))
    x[0] = mean
    return x


def test_evaluate_is_the_definition():
    x, phase = series(1, 7, 0.4), np.linspace(-3, 9, 50)
    wanted = sum((c * np.exp(1j * n * phase)).real for n, c in enumerate(x))
    np.testing.assert_allclose(evaluate(x, phase), wanted, atol=ROUNDING)
    assert np.shape(evaluate(x, 0.3)) == ()
    assert evaluate(np.stack([x, 2 * x]), phase).shape == (2, 50)


@pytest.mark.parametrize("count", [1, 2, 5, 20, 60])
@pytest.mark.parametrize("seed", range(6))
def test_extremes_against_a_dense_search(count, seed):
    x = series(seed, count, 0.3, 4.0 / count)
    low, high, at_low, at_high = extremes(x)
    dense = np.linspace(0, 2 * np.pi, 200_001)
    value = evaluate(x, dense)
    # A dense search falls short by at most step^2/8 max|x''|.
    short = (dense[1] ** 2 / 8) * float(np.abs(x) @ np.arange(count + 1) ** 2)
    assert value.max() - ROUNDING <= high <= value.max() + short + ROUNDING
    assert value.min() - short - ROUNDING <= low <= value.min() + ROUNDING
    assert evaluate(x, at_high) == pytest.approx(high, abs=ROUNDING)
    assert evaluate(x, at_low) == pytest.approx(low, abs=ROUNDING)


def test_two_peaks_of_nearly_one_height():
    """cos 2p + eps cos p: maxima 1 + eps at 0 and about 1 - eps at pi; shifted so that neither lies on a grid point."""
    for shift in np.random.default_rng(2).uniform(0, 2 * np.pi, 40):
        x = np.array([0.0, 1e-9, 1.0]) * np.exp(1j * np.arange(3) * shift)
        _, high, _, at = extremes(x)
        assert high == pytest.approx(1 + 1e-9, abs=2e-15)
        assert np.angle(np.exp(1j * (at + shift))) == pytest.approx(0.0, abs=1e-6)


def test_flat_series():
    assert extremes([2.0])[:2] == (2.0, 2.0)
    assert extremes([2.0, 0.0, 0.0])[:2] == (2.0, 2.0)
    assert extremes(np.zeros(4))[:2] == (0.0, 0.0)
    assert mean_absolute([-2.0, 0.0]) == 2.0
    assert mean_positive(np.zeros(3)) == 0.0
    assert zero_phases([1.0, 0.2]).size == 0


def closed_form(mean: float, swing: float) -> float:
    """Mean of abs(m + s cos p): (2/pi)(m asin(m/s) + sqrt(s^2 - m^2)) for s > m."""
    if swing <= abs(mean):
        return abs(mean)
    return 2 / np.pi * (mean * np.arcsin(mean / swing) + np.sqrt(swing**2 - mean**2))


@pytest.mark.parametrize("swing", [0.5, 1.0, 1.0001, 1.5, 3.0, 1e3])
def test_mean_absolute_of_one_harmonic(swing):
    for turn in (0.0, 0.7, 2.9):
        assert mean_absolute([1.0, swing * np.exp(1j * turn)]) == pytest.approx(closed_form(1.0, swing), rel=1e-13)


def test_published_oscillatory_shear_index():
    """Mean of abs over mean 2.0169795282530, index 0.2521045737 at A = 3: computed from the definition of He and Ku 1996."""
    ratio = mean_absolute([1.0, 3.0])
    assert ratio == pytest.approx(2.0169795282530, rel=1e-13)
    assert 0.5 * (1 - 1 / ratio) == pytest.approx(0.2521045737, abs=5e-11)


@pytest.mark.parametrize("seed", range(8))
def test_mean_absolute_by_quadrature_between_zeros(seed):
    x = series(seed, 12, mean=0.5 * seed / 8)
    zeros = zero_phases(x)
    assert zeros.size % 2 == 0
    np.testing.assert_allclose(evaluate(x, zeros), 0, atol=ROUNDING)
    edges = np.concatenate([[0.0], zeros, [2 * np.pi]])
    # Adaptive quadrature of smooth pieces to 1e-11.
    wanted = sum(abs(quad(lambda p: evaluate(x, p), a, b, epsabs=1e-12, limit=200)[0]) for a, b in itertools.pairwise(edges))
    assert mean_absolute(x) == pytest.approx(wanted / (2 * np.pi), abs=1e-11)


@pytest.mark.parametrize("depth", [1e-2, 1e-4, 1e-7])
def test_a_dip_between_two_grid_points_counts(depth):
    """1 - d + cos p is below zero on a half width acos(1 - d): closed form, at phases anywhere on the grid."""
    half = np.arccos(1 - depth)
    negative = (2 * np.sin(half) - 2 * half * (1 - depth)) / (2 * np.pi)
    for turn in np.random.default_rng(4).uniform(0, 2 * np.pi, 30):
        x = [1 - depth, np.exp(1j * turn)]
        assert zero_phases(x).size == 2
        # sin(half) - half (1 - d) loses half^2 of its digits here and in the closed form alike.
        assert mean_positive(x) - (1 - depth) == pytest.approx(negative, abs=5e-15)
        assert mean_positive([-(1 - depth), -np.exp(1j * turn)]) == pytest.approx(negative, abs=5e-15)


def test_batches_are_their_rows():
    rows = np.stack([series(seed, 9, mean=0.2 * seed - 0.6) for seed in range(7)])
    for function in (mean_positive, mean_absolute):
        np.testing.assert_allclose(function(rows), [function(row) for row in rows], atol=ROUNDING)
    for batch, single in zip(extremes(rows)[:2], zip(*(extremes(row)[:2] for row in rows), strict=True), strict=True):
        np.testing.assert_allclose(batch, single, atol=ROUNDING)
    assert mean_absolute(rows.reshape(7, 1, 10)).shape == (7, 1)


@given(st.integers(0, 10_000), st.integers(1, 12), st.floats(-2, 2), st.floats(0, 2 * np.pi))
@settings(max_examples=60, deadline=None)
def test_shift_sign_and_bounds(seed, count, mean, turn):
    x = series(seed, count, mean)
    moved = x * np.exp(1j * np.arange(count + 1) * turn)
    moved[0] = mean
    for function in (mean_absolute, mean_positive):
        assert function(moved) == pytest.approx(float(function(x)), abs=1e-11)
    low, high = extremes(x)[:2]
    assert extremes(moved)[:2] == pytest.approx((low, high), abs=1e-11)
    assert extremes(-x)[:2] == pytest.approx((-high, -low), abs=1e-11)
    assert abs(mean) <= mean_absolute(x) <= max(abs(low), abs(high)) + 1e-12
    assert mean_positive(x) - mean_positive(-x) == pytest.approx(mean, abs=1e-12)


def test_no_harmonic_axis_is_refused():
    with pytest.raises(InputError, match="harmonic axis"):
        extremes(3.0)
    with pytest.raises(InputError, match="harmonic axis"):
        mean_absolute(np.empty((2, 0)))


def test_womersley_number_exercise():
    """Textbook exercise quoted online: 70 beats/min, 1060 kg/m^3, 3.5 mPa s; answers to four digits."""
    for radius, answer in ((15e-3, 22.35), (4e-3, 5.960), (2.5e-3, 3.725)):
        got = womersley_number(radius=radius, angular_frequency=2 * np.pi * 70 / 60, kinematic_viscosity=3.5e-3 / 1060)
        assert got == pytest.approx(answer, abs=0.005 if answer > 10 else 5e-4)


def test_similarity_numbers():
    # Durst et al. 2005 (formula from memory): 0.619 D without flow, 0.0567 Re D for fast flow.
    assert entrance_length(reynolds_number=0.0, diameter=2.0) == pytest.approx(1.238)
    assert entrance_length(reynolds_number=1e9, diameter=1.0) == pytest.approx(0.0567e9, rel=1e-6)
    assert entrance_length(reynolds_number=[0.0, 100.0], diameter=1.0).shape == (2,)
    assert reynolds_number(velocity=-0.2, diameter=0.01, kinematic_viscosity=1e-6) == pytest.approx(2000)
    assert dean_number(reynolds_number=400.0, radius=1.0, bend_radius=16.0) == pytest.approx(100)
    # Re_delta = U0 delta/nu with delta = sqrt(2 nu/omega).
    delta = stokes_layer_thickness(angular_frequency=7.0, kinematic_viscosity=3e-6)
    layer = stokes_layer_reynolds_number(velocity_amplitude=0.3, angular_frequency=7.0, kinematic_viscosity=3e-6)
    assert layer == pytest.approx(0.3 * delta / 3e-6)
