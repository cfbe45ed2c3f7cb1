"""Pumps, dampers in phase, suction head, stations: symmetry first, then values from outside."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose

from pulsekit.errors import InputError
from pulsekit.exact.waves import characteristic_impedance, laminar_friction_ratio, propagation_constant
from pulsekit.fluids import Fluid
from pulsekit.line import (
    FlowSource,
    Line,
    MatchedEnd,
    Pipe,
    acceleration_head,
    axial_piston_pump,
    plunger_pump,
    reciprocating_pump_rule,
    speed_map,
)
from pulsekit.line.stations import fit_stations

OIL = Fluid(density=870.0, viscosity=0.04, bulk_modulus=1.5e9)


def _course(flow, size=20001):
    return flow.evaluate(np.linspace(0, flow.period, size)) / flow.mean


@pytest.mark.parametrize(("plungers", "high", "low"), [(3, 6.17, -16.95), (5, 1.86, -5.20), (7, 0.93, -2.58)])
def test_ripple_of_crank_driven_plungers(plungers, high, low):
    # computed for L/R = 6, matching handbook figures (from memory), per cent about the mean. The corner of the trough is
    # reached only as 1/order: 2400 orders leave 0.02.
    course = _course(plunger_pump(plungers=plungers, speed="600 rpm", mean_flow="40 L/min", rod_ratio=6, harmonics=2400))
    assert_allclose(100 * (course.max() - 1), high, atol=0.01)
    assert_allclose(100 * (course.min() - 1), low, atol=0.04)


@pytest.mark.parametrize(("pistons", "ripple"), [(3, 14.0298), (5, 4.97579), (7, 2.52837), (9, 1.52697), (4, 32.5323), (6, 14.0298)])
def test_ripple_of_axial_pistons(pistons, ripple):
    # computed, (max - min)/mean in per cent; the corner needs many orders
    course = _course(axial_piston_pump(pistons=pistons, speed=10.0, mean_flow="40 L/min", harmonics=4000))
    assert_allclose(100 * np.ptp(course), ripple, atol=0.02)


def test_orders_of_three_plungers():
    flow = plunger_pump(plungers=3, speed="600 rpm", mean_flow="40 L/min")
    strong = [n for n in range(1, 13) if abs(flow.coefficients[n]) > 1e-6 * flow.mean]
    assert strong == [3, 6, 9, 12]
    pure = plunger_pump(plungers=3, speed="600 rpm", mean_flow="40 L/min", rod_ratio=1e7)
    assert [n for n in range(1, 13) if abs(pure.coefficients[n]) > 1e-6 * pure.mean] == [6, 12]
    assert any("5 was taken" in remark for remark in flow.remarks)


def test_backflow_of_an_axial_piston_pump():
    """Integrated by hand: each piston takes back V dp/K; the dip at order 9 is several times the kinematic ripple."""
    flow = axial_piston_pump(
        pistons=9, speed="1480 rpm", mean_flow="38 L/min", dead_volume="2.85 mL", bulk_modulus="1.3 GPa", pressure="180 bar", port_opening_angle="10 deg"
    )
    bare = axial_piston_pump(pistons=9, speed="1480 rpm", mean_flow="38 L/min", harmonics=72)
    # A lumped sum over one turn: half sines of 10 degrees, nine of them, of the volume that compression takes.
    angle = np.linspace(0, 2 * np.pi, 72001)[:-1]
    taken = 2.85e-6 * 180e5 / 1.3e9
    opening = np.radians(10)
    back = sum(np.where(np.mod(angle - k * 2 * np.pi / 9, 2 * np.pi) < opening, np.sin(np.pi * np.mod(angle - k * 2 * np.pi / 9, 2 * np.pi) / opening), 0) for k in range(9))
    back = back / (back.mean() * 2 * np.pi) * 9 * taken  # m^3 per radian of the shaft
    order_nine = 2 * np.mean(back * np.exp(-9j * angle)) * 2 * np.pi * 1480 / 60
    assert_allclose(abs(flow.coefficients[9]), abs(order_nine), rtol=1e-3)
    assert abs(bare.coefficients[9]) < 1e-9
    # about 1.4 % of a piston's displacement, some 5 to 6 % of the mean flow at order 9: common practice
    assert 0.04 < 2 * abs(flow.coefficients[9]) / flow.mean < 0.07


def test_suction_flow_is_negative():
    flow = plunger_pump(plungers=3, speed="600 rpm", mean_flow="-40 L/min")
    assert flow.mean < 0
    assert_allclose(np.abs(flow.coefficients), np.abs(plunger_pump(plungers=3, speed="600 rpm", mean_flow="40 L/min").coefficients))


def test_double_acting_has_twice_the_order():
    flow = plunger_pump(plungers=1, speed=10.0, mean_flow="10 L/min", rod_ratio=1e6, acting="double")
    assert abs(flow.coefficients[1]) < 1e-6 * flow.mean < abs(flow.coefficients[2])


@pytest.mark.parametrize(
    ("changes", "word"),
    [({"plungers": 0}, "plungers"), ({"rod_ratio": 0.9}, "rod_ratio"), ({"acting": "triple"}, "acting"), ({"valve_lag": "120 deg"}, "valve_lag"), ({"speed": "3 m"}, "speed")],
)  # fmt: skip
def test_impossible_pumps_are_refused(changes, word):
    with pytest.raises(InputError, match=word):
        plunger_pump(**({"plungers": 3, "speed": "600 rpm", "mean_flow": "40 L/min", "rod_ratio": 5} | changes))


def test_fluctuating_volume():
    # computed, L/R = 6: largest swing of the integral of the flow about its mean over (area times stroke): 1: 0.5525; 3: 0.0255; 5: 0.0069
    for plungers, share in ((1, 0.5525), (3, 0.0255), (5, 0.0069)):
        flow = plunger_pump(plungers=plungers, speed=1.0, mean_flow=1.0, rod_ratio=6, harmonics=600)
        order = np.arange(1, 601)
        inside = flow.coefficients[1:] / (2j * np.pi * order)
        course = (inside @ np.exp(2j * np.pi * np.outer(order, np.arange(4096)) / 4096)).real
        # the mean flow delivers `plungers` strokes per turn
        assert_allclose(np.ptp(course) * plungers, share, atol=1.2e-4 if plungers > 1 else 6e-4)


def test_acceleration_head():
    # Hydraulic Institute form with its constant 0.066 for three plungers (from memory): L V N C/(K g)
    assert_allclose(acceleration_head(length=10.0, velocity=1.5, speed=5.0, plungers=3, liquid_factor=1.4), 10 * 1.5 * 300 * 0.066 / (1.4 * 9.80665))
    assert acceleration_head(length=10.0, velocity=1.5, speed=5.0, plungers=4) is None


def test_allowable_pulsation_in_both_systems():
    # 3500/sqrt(ID f) kPa (mm, Hz) and 100/sqrt(ID f) psi (in, Hz), API 674 3rd ed. annex C, constants from memory: they agree within 1 %
    rule = reciprocating_pump_rule()
    assert_allclose(rule.allowed(25.0, 0.0254 * 4), 6894.757 * 100 / np.sqrt(4 * 25.0), rtol=0.012)


def test_a_speed_map_at_its_own_speed_is_the_response():
    line = Line([Pipe(length=3.0, radius=0.008, wave_speed=1300.0)], end=MatchedEnd(), fluid=OIL, mean_flow=40 / 6e4)
    source = FlowSource(plunger_pump(plungers=3, speed="600 rpm", mean_flow="40 L/min", harmonics=36))
    found = speed_map(line, source, [10.0], [0.0, 1.0, 3.0])
    # both sample one cycle; the map on fewer instants
    assert_allclose(found.peak_to_peak[0], line.respond(source).envelope([0.0, 1.0, 3.0]), rtol=0.01)


def _constants(omega, radius=0.0065):
    ratio = laminar_friction_ratio(radius * np.sqrt(omega * 1000 / 1e-3))

    def of(speed):
        return (
            propagation_constant(angular_frequency=omega, wave_speed=speed, friction_ratio=ratio),
            characteristic_impedance(density=1000.0, wave_speed=speed, area=np.pi * radius**2, friction_ratio=ratio),
        )

    return of


def test_three_stations_give_the_wave_speed_and_the_flow():
    omega = 2 * np.pi * 30 * np.arange(1, 9)
    of = _constants(omega)
    gamma, impedance = of(1360.0)
    rng = np.random.default_rng(3)
    forward = (rng.standard_normal(8) + 1j * rng.standard_normal(8)) * 1e4
    backward = 0.6 * forward * np.exp(1j * rng.uniform(0, 6, 8))
    places = np.array([0.2, 0.7, 1.6])
    pressures = forward * np.exp(-gamma * places[:, None]) + backward * np.exp(gamma * places[:, None])
    fit = fit_stations(pressures, places, line_constants=of, guess=1300.0)
    assert_allclose(fit.wave_speed, 1360.0, rtol=1e-5)
    assert_allclose(fit.flow[fit.usable], ((forward - backward) / impedance)[fit.usable], rtol=1e-4)
    noisy = pressures + 100 * (rng.standard_normal(pressures.shape) + 1j * rng.standard_normal(pressures.shape))
    rough = fit_stations(noisy, places, line_constants=of, guess=1300.0)
    assert abs(rough.wave_speed - 1360.0) < 4 * rough.wave_speed_uncertainty


def test_a_spacing_of_half_a_wavelength_is_refused_for_its_order():
    omega = 2 * np.pi * 100 * np.arange(1, 8)
    of = _constants(omega)
    spacing = 1360.0 / (2 * 400)  # half a wavelength at 400 Hz, order 4
    fit = fit_stations(np.ones((2, 7), complex), [0.0, spacing], line_constants=of, guess=1360.0, frequency=100.0)
    assert not fit.usable[3]
    assert "half wavelength" in fit.because[3]
    assert "400" in fit.because[3]
    assert fit.usable[1]


def test_stations_at_one_place_are_refused():
    with pytest.raises(InputError, match="one place"):
        fit_stations(np.ones((2, 3), complex), [1.0, 1.0], line_constants=_constants(2 * np.pi * np.arange(1, 4)))
