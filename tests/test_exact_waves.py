"""Wave speeds, propagation and friction per frequency: limits first, then values from outside."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.special import jn_zeros

from pulsekit.errors import InputError
from pulsekit.exact.waves import (
    bramwell_hill_speed,
    characteristic_impedance,
    friction_factor,
    laminar_friction_ratio,
    liquid_speed,
    mixture_speed,
    moens_korteweg_speed,
    propagation_constant,
    turbulent_friction_ratio,
    wall_factor,
    wave_speed_in_pipe,
)  # fmt: skip


def test_friction_vanishes_in_a_wide_bore():
    # N = 1 + 2/zeta + ...: at alpha = 1e6 the next term is 1e-6
    assert_allclose(laminar_friction_ratio(1e6), 1.0, rtol=3e-6)


def test_slow_flow_has_poiseuilles_resistance_and_four_thirds_of_the_inertance():
    # i alpha^2 N -> 8 + (4/3) i alpha^2 for alpha -> 0; the error is of order alpha^4
    alpha = 1e-2
    assert_allclose(1j * alpha**2 * laminar_friction_ratio(alpha), 8 + 4 / 3 * 1j * alpha**2, rtol=1e-8)


@pytest.mark.parametrize(
    ("alpha", "resistance", "inertance"), [(1, 1.000867, 1.3331022), (5, 1.322356, 1.2539617), (20, 3.927086, 1.0703553)]
)
def test_resistance_and_inertance(alpha, resistance, inertance):
    # computed from Womersley's definition at high precision; printed to 7 digits
    impedance = 1j * alpha**2 * laminar_friction_ratio(alpha)
    assert_allclose(impedance.real / 8, resistance, rtol=5e-7)
    assert_allclose(impedance.imag / alpha**2, inertance, rtol=5e-8)


def test_friction_is_the_transform_of_zielkes_weighting_function():
    # N = 1 + 8/(i a^2) + 4 sum 1/(i a^2 + j_2k^2): W(tau) = sum exp(-j_2k^2 tau). The cut sum leaves 4/(pi^2 K).
    roots = jn_zeros(2, 4000) ** 2
    for alpha in (0.7, 3.0, 11.0):
        square = 1j * alpha**2
        ratio = 1 + 8 / square + 4 * np.sum(1 / (square + roots)) + 4 / (np.pi**2 * 4000.5)
        assert_allclose(laminar_friction_ratio(alpha), ratio, rtol=2e-7)


def test_zielkes_printed_exponents():
    # W. Zielke, J. Basic Eng. 90 (1968) 109, as printed; the printed digits are good to 1e-5
    assert_allclose(jn_zeros(2, 5) ** 2, [26.3744, 70.8493, 135.0198, 218.9216, 322.5544], rtol=2e-5)


def test_laminar_propagation():
    # computed: 46 mm^2/s, R = 10 mm, a = 1300 m/s, 100 Hz
    omega = 2 * np.pi * 100
    gamma = propagation_constant(
        angular_frequency=omega, wave_speed=1300.0, friction_ratio=laminar_friction_ratio(0.01 * np.sqrt(omega / 46e-6))
    )
    assert_allclose(gamma, 0.00960698 + 0.492563j, atol=5e-7)


@pytest.mark.parametrize(("alpha", "ratio", "half_digit"), [(1, 0.531206, 5e-7), (3, 0.952794, 5e-7), (10, 1.07912, 5e-6)])
def test_tethered_elastic_tube(alpha, ratio, half_digit):
    # J. R. Womersley 1957, thin wall, Poisson 0.5, tethered: c/c0 = 1/(sqrt(1 - nu^2) Re sqrt(N)); computed, as printed
    assert_allclose(1 / np.sqrt(0.75) / np.sqrt(laminar_friction_ratio(alpha)).real, ratio, atol=half_digit)


def test_tethered_elastic_tube_at_the_thinnest_layer():
    # the limit is reached as 1/(sqrt(2) alpha) = 7e-7, beside half a printed digit
    assert_allclose(1 / np.sqrt(0.75) / np.sqrt(laminar_friction_ratio(1e6)).real, 1.154701, rtol=1.2e-6)


@pytest.mark.parametrize(("modulus", "thickness", "speed"), [(207e9, 1 / 50, 1197.88), (120e9, 1 / 20, 1267.79), (3.3e9, 1 / 20, 392.07)])
def test_korteweg(modulus, thickness, speed):
    # computed for water K = 2.19 GPa, 998.2 kg/m^3, c1 = 1 (moduli from memory); printed to 6 digits
    found = wave_speed_in_pipe(bulk_modulus=2.19e9, density=998.2, diameter=1.0, wall_thickness=thickness, young_modulus=modulus)
    assert_allclose(found, speed, atol=0.005)


def test_rigid_wall():
    assert_allclose(liquid_speed(bulk_modulus=2.19e9, density=998.2), 1481.20, atol=0.005)


def test_oil_line_example():
    # worked example found in print: E = 200 GPa, D = 50 mm, e = 5 mm, specific gravity 0.86, K = 1.5 GPa
    found = wave_speed_in_pipe(bulk_modulus=1.5e9, density=860.0, diameter=0.05, wall_thickness=0.005, young_modulus=200e9)
    assert_allclose(found, 1273.77, atol=0.005)


def test_anchorings_of_a_thin_wall():
    # E. B. Wylie, V. L. Streeter: 1 - nu^2, 1 - nu/2 (in the convention named), 1
    factors = [
        wall_factor(diameter=1.0, wall_thickness=1e-12, poisson_ratio=0.3, anchoring=how)
        for how in ("throughout", "upstream", "expansion joints")
    ]
    assert_allclose(factors, [0.91, 0.85, 1.0], rtol=1e-9)


def test_an_unknown_anchoring_is_refused():
    with pytest.raises(InputError, match="anchoring"):
        wall_factor(diameter=1.0, wall_thickness=0.1, poisson_ratio=0.3, anchoring="loose")


def test_soft_walls():
    # computed; Moens and Korteweg, Bramwell and Hill
    assert_allclose(moens_korteweg_speed(young_modulus=0.4e6, wall_thickness=0.1, diameter=1.0, density=1060.0), 6.142951, atol=5e-7)
    assert_allclose(bramwell_hill_speed(pressure_change=40 * 133.322368, relative_area_change=0.1, density=1060.0), 7.092968, rtol=2e-6)


@pytest.mark.parametrize(("exponent", "speed"), [(1.0, 311.65), (1.4, 365.54)])
def test_water_with_air(exponent, speed):
    # A. B. Wood; computed for 20 °C, 1 atm, void 0.001
    found = mixture_speed(
        gas_fraction=1e-3, pressure=101325.0, bulk_modulus=2.1934e9, density=998.2072, gas_density=1.204, exponent=exponent
    )
    assert_allclose(found, speed, rtol=1e-3)


def test_no_gas_leaves_the_liquid():
    assert_allclose(
        mixture_speed(gas_fraction=0.0, pressure=1e5, bulk_modulus=2e9, density=1000.0),
        liquid_speed(bulk_modulus=2e9, density=1000.0),
        rtol=1e-14,
    )


@pytest.mark.parametrize(("reynolds", "kappa", "decay"), [(1e4, 0.957607, 526.246), (1e5, 0.900907, 2484.83)])
def test_turbulent_decay(reynolds, kappa, decay):
    # A. E. Vardy, J. M. B. Brown 2003, from memory: kappa = log10(15.29 Re^-0.0567), B = Re^kappa/12.86
    alpha, omega = 1e-3, 1.0
    ratio = turbulent_friction_ratio(alpha=alpha, reynolds=reynolds, velocity=0.0, radius=1.0, angular_frequency=omega)
    assert_allclose((2 / (ratio - 1)) ** 2, 1j * alpha**2 + decay, rtol=2e-5)
    assert_allclose(np.log10(15.29 * reynolds**-0.0567), kappa, atol=5e-6)


def test_turbulent_friction_is_laminar_at_high_frequency():
    alpha = 3e4
    ratio = turbulent_friction_ratio(alpha=alpha, reynolds=1e4, velocity=0.0, radius=0.01, angular_frequency=alpha**2 * 1e-6 / 1e-4)
    # what is left is 3/zeta^2 of the laminar expansion against 2/zeta
    assert_allclose(ratio - 1, laminar_friction_ratio(alpha) - 1, rtol=2e-3)


def test_friction_factor_is_poiseuilles_and_close_to_blasius():
    assert_allclose(friction_factor(1000.0), 0.064, rtol=1e-12)
    # Blasius 0.3164/Re^0.25, common practice; each is good to about 2 %
    assert_allclose(friction_factor(2e4), 0.3164 / 2e4**0.25, rtol=0.04)


def test_impedance_of_a_frictionless_line():
    assert_allclose(
        characteristic_impedance(density=870.0, wave_speed=1300.0, area=2e-4, friction_ratio=1.0), 870 * 1300 / 2e-4, rtol=1e-14
    )


def test_zero_frequency_is_refused():
    with pytest.raises(InputError, match="above 0"):
        laminar_friction_ratio([1.0, 0.0])
