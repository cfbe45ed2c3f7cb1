"""The dimensionless factors of oscillating pipe flow against limits, 40-digit arithmetic and published figures."""

from __future__ import annotations

import importlib.util
from pathlib import Path

import mpmath as mp
import numpy as np
import pytest

from pulsekit.errors import InputError
from pulsekit.exact import womersley
from pulsekit.exact._shear_factor_fit import NODES
from pulsekit.exact.profile_table import profile_table

# Ten units of rounding in double precision, what the factors claim; and what profile and derivative claim.
FACTOR, PROFILE = 1e-14, 1e-13
# On both sides of every seam between two approximations, and at the ends of the range.
SEAMS = [0.0, 1e-150, 1e-8, 1e-4, 2.5, 6.0, 10.0, 12.0, 18.0, 26.0, 80.0, 100.0, 1000.0, 1e6]
EDGES = sorted({abs(a * f) for a in SEAMS for f in (1 - 1e-12, 1.0, 1 + 1e-12)})


def sweep(count: int, seed: int) -> np.ndarray:
    rng = np.random.default_rng(seed)
    return np.concatenate([EDGES, 10 ** rng.uniform(-4, 6, count), rng.uniform(0, 120, count)])


def relative(value: complex, exact: mp.mpc) -> float:
    return float(abs(mp.mpc(complex(value)) - exact) / abs(exact)) if exact else float(abs(complex(value)))


def exact_factors(alpha: float) -> dict[str, mp.mpc]:
    """T, pressure factor, 1 - F10, axis ratio and alpha dT/dalpha from modified Bessel functions, to 40 digits."""
    if alpha == 0:
        return {"T": mp.mpc(4), "P": mp.mpc(8), "F": mp.mpc(0), "C": mp.mpc(2), "S": mp.mpc(0)}
    # Working digits beyond 40 for what cancels: alpha^2 at small alpha, a factor of alpha at large.
    with mp.workdps(60 + int(2.5 * abs(np.log10(alpha)))):
        zeta = mp.sqrt(mp.mpc(0, 1)) * mp.mpf(alpha)
        i0, i1, i2, i3 = (mp.besseli(n, zeta) for n in range(4))
        shear, square = zeta * i1 / i2, zeta**2
        pressure = square * i0 / i2
        return {
            "T": shear, "P": pressure, "F": square / pressure, "C": (i0 - 1) / i2, "S": square - shear * zeta * i3 / i2,
        }  # fmt: skip


@pytest.mark.parametrize(
    ("function", "key", "tolerance"),
    [
        (womersley.shear_factor, "T", FACTOR), (womersley.pressure_factor, "P", FACTOR), (womersley.flow_factor, "F", FACTOR),
        (womersley.centreline_ratio, "C", FACTOR), (womersley.shear_factor_slope, "S", PROFILE),
    ],
)  # fmt: skip
def test_factors_against_forty_digits(function, key, tolerance):
    numbers = sweep(60, seed=3)
    numbers = numbers[(numbers > 1e-100) | (numbers == 0)] if key in "FS" else numbers  # alpha^2 itself underflows below
    worst = max((relative(function(a), exact_factors(a)[key]), a) for a in numbers)
    assert worst[0] <= tolerance, f"alpha = {worst[1]!r}"


def exact_profile(alpha: float, y: float) -> mp.mpc:
    if alpha == 0:
        return mp.mpc(2) * mp.mpf(y) * (2 - mp.mpf(y))
    with mp.workdps(60 + int(4 * abs(np.log10(alpha)))):
        zeta = mp.sqrt(mp.mpc(0, 1)) * mp.mpf(alpha)
        return (mp.besseli(0, zeta) - mp.besseli(0, zeta * (1 - mp.mpf(y)))) / mp.besseli(2, zeta)


def test_profile_from_the_axis_to_a_millionth_from_the_wall():
    rng = np.random.default_rng(11)
    numbers = sweep(110, seed=4)
    numbers = numbers[(numbers > 1e-12) | (numbers == 0)]
    y = np.where(rng.random(numbers.size) < 0.5, 10 ** rng.uniform(-6, 0, numbers.size), rng.random(numbers.size))
    # Places one Stokes layer away, where wall series and core meet.
    y[::5] = np.minimum(1.0, rng.uniform(0.9, 1.1, y[::5].size) / np.maximum(numbers[::5], 1e-3))
    got = womersley.velocity_profile(numbers, wall_distance=y)
    worst = max((relative(g, exact_profile(a, d)), a, d) for g, a, d in zip(got, numbers, y, strict=True))
    assert worst[0] <= PROFILE, worst


def test_table_of_profiles_against_forty_digits():
    numbers = np.sort(np.concatenate([[0.0, 11.999, 12.0, 17.99, 18.01, 79.9, 80.1, 1e6], np.random.default_rng(5).uniform(0.1, 120, 10)]))
    y = np.concatenate([[1e-6, 1e-3, 0.0556, 0.0834, 0.9999, 1.0], np.random.default_rng(6).random(10)])
    table = profile_table(numbers, wall_distance=y)
    worst = max((relative(table[i, j], exact_profile(a, d)), a, d) for i, d in enumerate(y) for j, a in enumerate(numbers))
    assert worst[0] <= PROFILE, worst


def test_table_is_the_pointwise_profile():
    numbers, x = np.array([0.0, 0.3, 7.0, 15.0, 40.0, 5e3, 3e9]), np.linspace(0, 1, 21)
    pointwise = womersley.velocity_profile(numbers, x[:, None])
    # Twice what each of the two claims, plus the wall where both are 0.
    np.testing.assert_allclose(profile_table(numbers, x), pointwise, rtol=2 * PROFILE, atol=0)
    np.testing.assert_allclose(profile_table(numbers[:-1], x), pointwise[:, :-1], rtol=2 * PROFILE, atol=0)


def test_no_slip_and_steady_flow():
    x = np.linspace(0, 1, 11)
    np.testing.assert_array_equal(womersley.velocity_profile([0.0, 1.0, 50.0, 1e5], 1.0), 0)
    np.testing.assert_allclose(womersley.velocity_profile(0.0, x), 2 * (1 - x**2), rtol=4e-16, atol=4e-16)
    assert womersley.shear_factor(0.0) == 4
    assert womersley.pressure_factor(0.0) == 8
    assert womersley.centreline_ratio(0.0) == 2
    assert womersley.flow_factor(0.0) == 0
    assert womersley.shear_factor_slope(0.0) == 0


@pytest.mark.parametrize("alpha", [0.3, 5.0, 30.0, 300.0])
def test_mean_of_the_profile_is_one_and_its_slope_is_the_shear(alpha):
    # Gauss-Legendre in pieces a Stokes layer wide: smooth, so that 20 points reach rounding.
    edges = np.unique(np.concatenate([np.linspace(0, 1, 9), np.minimum(1.0, np.arange(1, 30) / alpha)]))
    node, weight = np.polynomial.legendre.leggauss(20)
    y = (0.5 * (edges[1:] + edges[:-1])[:, None] + 0.5 * np.diff(edges)[:, None] * node).ravel()
    w = (0.5 * np.diff(edges)[:, None] * weight).ravel()
    u = womersley.velocity_profile(alpha, wall_distance=y)
    assert np.sum(w * 2 * (1 - y) * u) == pytest.approx(1.0, abs=1e-13)
    h = 1e-7 / alpha
    # One-sided difference at the wall: its error is u'' h/2, of relative size alpha h = 1e-7.
    assert womersley.velocity_profile(alpha, wall_distance=h) / h == pytest.approx(womersley.shear_factor(alpha), rel=1e-6)


def test_derivative_against_central_differences():
    for alpha in (0.5, 3.0, 12.0, 25.9, 26.1, 200.0):
        h = 1e-4 * alpha
        difference = (womersley.shear_factor(alpha + h) - womersley.shear_factor(alpha - h)) / (2 * h) * alpha
        # Error h^2/6 T''' relative to T', of order 1e-8 here.
        assert womersley.shear_factor_slope(alpha) == pytest.approx(difference, rel=1e-7)


# alpha, M'10, eps'10 in degrees, abs(tau/tau_Poiseuille at the same flow), lead of tau over flow in degrees: defined by
# J. R. Womersley, J. Physiol. 127 (1955) 553; figures computed from those definitions with an independent library and
# confirmed by a finite-volume solution. Printed to 8 digits.
TABLE = [
    (0.5, 0.031221218, 87.614211, 1.0001085, 0.5967512),
    (1.0, 0.12319589, 80.547336, 1.0017327, 2.3822283),
    (2.0, 0.4124679, 56.738427, 1.0269431, 9.2376126),
    (3.34, 0.65536337, 30.945126, 1.1757495, 21.47505),
    (5.0, 0.75560967, 18.647152, 1.5422303, 30.970663),
    (6.67, 0.80956213, 13.497235, 1.9548501, 34.899678),
    (10.0, 0.86835067, 8.6933679, 2.7795541, 38.484543),
    (20.0, 0.93176403, 4.1967916, 5.2722555, 41.853026),
]


@pytest.mark.parametrize(("alpha", "modulus", "degrees", "shear", "lead"), TABLE)
def test_womersleys_table(alpha, modulus, degrees, shear, lead):
    factor = womersley.flow_factor(alpha)
    ratio = womersley.shear_factor(alpha) / 4
    digits = 1e-7  # half a unit of the last printed digit, or a little more
    assert abs(factor) == pytest.approx(modulus, rel=digits)
    assert np.degrees(np.angle(factor)) == pytest.approx(degrees, rel=digits)
    assert abs(ratio) == pytest.approx(shear, rel=digits)
    assert np.degrees(np.angle(ratio)) == pytest.approx(lead, rel=digits)


def test_lead_of_the_shear_over_the_axis_overshoots_45_degrees():
    """Computed with an independent library; a swapped conversion would not show it."""
    lead = lambda a: float(np.degrees(np.angle(womersley.shear_factor(a) / womersley.centreline_ratio(a))))  # noqa: E731
    assert lead(6.67) == pytest.approx(51.34074, abs=1e-5)
    assert lead(1e5) == pytest.approx(45.0, abs=1e-3)
    for alpha, modulus, degrees in ((3.34, 0.53795921, 11.9295), (10.0, 0.87375052, 8.548635)):
        mean_over_axis = 1 / womersley.centreline_ratio(alpha)
        assert abs(mean_over_axis) == pytest.approx(modulus, abs=1e-8)
        assert np.degrees(np.angle(mean_over_axis)) == pytest.approx(degrees, abs=1e-4)


@pytest.mark.parametrize(
    ("alpha", "resistance", "inertance"), [(1.0, 1.000867, 1.3331022), (5.0, 1.322356, 1.2539617), (20.0, 3.927086, 1.0703553)]
)
def test_resistance_and_inertance(alpha, resistance, inertance):
    """Relative to Poiseuille's and to rho/A; computed with an independent library to the digits shown."""
    factor = womersley.pressure_factor(alpha)
    assert factor.real / 8 == pytest.approx(resistance, abs=1e-6)
    assert factor.imag / alpha**2 == pytest.approx(inertance, abs=1e-7)


def test_limits_of_resistance_and_inertance():
    assert womersley.pressure_factor(1e-3).imag / 1e-6 == pytest.approx(4 / 3, abs=1e-7)
    assert womersley.pressure_factor(1e6).imag / 1e12 == pytest.approx(1.0, abs=1e-5)
    assert abs(womersley.shear_factor(1e6) / 4) == pytest.approx(1e6 / 4, rel=1e-5)
    assert abs(womersley.flow_factor(1e-3)) == pytest.approx(1e-6 / 8, rel=1e-6)


def test_kelvin_functions():
    """ber and bei (DLMF 10.61; figures computed from the definition) carry I0(zeta): the convention exp(+i omega t) with zeta = sqrt(i) alpha."""
    table = {1: (0.984381781213087, 0.249566040036660), 5: (-6.23008247866636, 0.116034381550200), 10: (138.840465941633, 56.3704585539066)}
    for alpha, (real, imaginary) in table.items():
        zeta = np.exp(0.25j * np.pi) * alpha
        assert complex(mp.ber(0, alpha), mp.bei(0, alpha)) == pytest.approx(real + 1j * imaginary, rel=1e-13)
        # From profile and axis: u(0) I2(zeta) = I0(zeta) - 1.
        assert womersley.centreline_ratio(alpha) * complex(mp.besseli(2, complex(zeta))) + 1 == pytest.approx(
            real + 1j * imaginary, rel=1e-13
        )


def test_annular_overshoot():
    """Measured first by Richardson and Tyler, Proc. Phys. Soc. 42 (1929) 1; places and height computed independently."""
    y = np.linspace(2.0, 2.6, 60001)
    for alpha, place, height in ((1e5, 2.28410, 1.069432), (20.0, 2.30153, None)):
        speed = np.abs(womersley.velocity_profile(alpha, wall_distance=y * np.sqrt(2) / alpha))
        assert y[speed.argmax()] == pytest.approx(place, abs=1e-4 if alpha == 20 else 1e-3)  # a thin layer is thin to 1/alpha
        if height:
            assert speed.max() == pytest.approx(height, abs=1e-4)


@pytest.mark.parametrize("bad", [-1e-9, np.nan, np.inf, [1.0, -2.0]])
def test_bad_womersley_numbers_are_refused(bad):
    for function in (womersley.shear_factor, womersley.pressure_factor, womersley.shear_factor_slope, womersley.centreline_ratio):
        with pytest.raises(InputError, match="Womersley number"):
            function(bad)


def test_bad_places_are_refused():
    with pytest.raises(InputError, match="between 0"):
        womersley.velocity_profile(1.0, 1.5)
    with pytest.raises(InputError, match="between 0"):
        profile_table([1.0], [np.nan])
    with pytest.raises(InputError, match="exactly one"):
        womersley.velocity_profile(1.0)
    with pytest.raises(InputError, match="exactly one"):
        profile_table([1.0], [0.1], wall_distance=[0.9])


def test_shapes():
    assert isinstance(womersley.shear_factor(3.0), np.complex128)
    assert isinstance(womersley.velocity_profile(3.0, 0.5), np.complex128)
    assert womersley.shear_factor(np.ones((2, 3))).shape == (2, 3)
    assert womersley.centreline_ratio(np.ones((2, 3))).shape == (2, 3)
    assert womersley.velocity_profile(np.ones(3), np.linspace(0, 1, 5)[:, None]).shape == (5, 3)
    assert womersley.shear_factor(np.empty(0)).shape == (0,)
    many = np.geomspace(1e-3, 1e6, 20000)
    # Few numbers and many go through two orders of the same sum: they may differ by a rounding or two.
    np.testing.assert_allclose(womersley.shear_factor(many)[::400], [womersley.shear_factor(a) for a in many[::400]], rtol=5e-16)


def test_the_numbers_of_the_fit_are_those_of_their_script():
    path = Path(__file__).with_name("make_shear_factor_nodes.py")
    spec = importlib.util.spec_from_file_location("make_shear_factor_nodes", path)
    script = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(script)
    assert tuple(NODES) == script.ORDERS
    for order, rows in NODES.items():
        np.testing.assert_allclose(rows, np.array(script.gauss_nodes(order), dtype=float), rtol=2e-16)


@pytest.mark.long
def test_many_numbers_against_forty_digits():
    numbers = sweep(3000, seed=8)
    got = womersley.shear_factor(numbers)
    assert max(relative(g, exact_factors(a)["T"]) for g, a in zip(got, numbers, strict=True)) <= FACTOR
