"""What the operating point does to a line: gas at its own place, ripple in the mean drop, speeds with their own flow."""

from __future__ import annotations

import numpy as np
import pytest

import pulsekit as pk
from pulsekit.line import speed_map

FLUID = pk.Fluid(density=870.0, viscosity="40 mPa*s", bulk_modulus="1.5 GPa")


def pipe(length=2.0, **more):
    return pk.Pipe(length=length, radius=0.008, wave_speed=1300.0, **more)


def source(*waves, frequency=30.0, mean=6e-4):
    return pk.FlowSource(pk.Harmonics(frequency=frequency, coefficients=[mean, *waves]))


@pytest.mark.parametrize("impedance", [2e9 + 1e8j, lambda hertz: (2e9 + 1e8j) * np.ones(np.shape(hertz)), "2e9 Pa*s/m^3"])
def test_any_impedance_may_end_a_line(impedance):
    line = pk.Line([pipe()], end=pk.ImpedanceEnd(impedance), fluid=FLUID)
    response = line.respond(source(1e-5))
    ratio = response.pressure(2.0).coefficients[1] / response.flow_rate(2.0).coefficients[1]
    wanted = 2e9 if isinstance(impedance, str) else 2e9 + 1e8j
    assert ratio == pytest.approx(wanted, rel=1e-12)  # rounding


def test_a_damper_behind_a_restrictor_has_the_lower_gas_pressure():
    # 38 L/min through the restrictor leave 100 of 180 bar: the gas there is softer by its volume and exponent.
    damper = pk.GasDamper(nominal_volume="1 L", precharge="60 bar")
    elements = [pk.Restrictor(pressure_drop="80 bar", flow="38 L/min"), damper, pipe(0.001)]
    line = pk.Line(elements, end=pk.ClosedEnd(), fluid=FLUID, mean_flow="38 L/min", mean_pressure="180 bar")
    medium = line.medium()
    at_damper = line.media(medium, line.values)[1].pressure
    assert at_damper == pytest.approx(100e5, rel=1e-12)  # rounding
    resistance = 2 * 80e5 / (38e-3 / 60)
    compliance = damper.compliance(line.medium(pressure=100e5))
    wanted = resistance + 1 / (2j * np.pi * 5.0 * compliance)
    # A millimetre of liquid behind it is stiffer than the gas by far.
    assert line.input_impedance(5.0) == pytest.approx(wanted, rel=1e-4)
    wrong = resistance + 1 / (2j * np.pi * 5.0 * damper.compliance(line.medium(pressure=180e5)))
    assert abs(wrong.imag / wanted.imag) > 2


def test_ripple_raises_the_mean_drop_of_a_restrictor():
    # Without reversal the mean of (Q0 + Q1 cos)^2 is Q0^2 + Q1^2/2.
    line = pk.Line([pk.Restrictor(pressure_drop="3 bar", flow=6e-4), pipe()], end=pk.MatchedEnd(), fluid=FLUID, mean_pressure="50 bar")
    response = line.respond(source(3e-4))
    drop = response.node_pressures[0] - response.node_pressures[1]
    through = abs(response.states[0][1][0])
    assert through == pytest.approx(3e-4, rel=1e-12)
    assert drop == pytest.approx(3e5 * (1 + 0.5 * (through / 6e-4) ** 2), rel=1e-9)  # 512 instants are exact for two harmonics


@pytest.mark.parametrize("ratio", [0.6, 1.0, 1.7])
def test_a_speed_map_is_the_response_at_each_speed(ratio):
    elements = [pipe(), pk.Restrictor(pressure_drop="3 bar", flow=6e-4), pipe(1.2), pk.Volume(volume="0.1 L"), pipe(0.7)]
    line = pk.Line(elements, end=pk.OpenEnd(), fluid=FLUID)
    places = np.linspace(0.0, line.length, 23)
    mapped = speed_map(line, source(2e-5, 0, 1e-5j), [30.0 * ratio], places).peak_to_peak[0]
    alone = line.respond(source(2e-5 * ratio, 0, 1e-5j * ratio, frequency=30.0 * ratio, mean=6e-4 * ratio))
    fine = np.ptp(alone.courses(places, instants=4096), axis=1)
    # The map's 32 instants miss an extreme of three harmonics by at most (3 pi/32)^2/2 = 4 %.
    assert mapped == pytest.approx(fine, rel=0.045, abs=1e-6 * fine.max())
    assert np.all(mapped <= fine * (1 + 1e-9) + 1e-6)


def test_a_varied_wave_speed_is_that_of_the_pipes():
    def line(factor):
        branch = pk.SideBranch([pk.Pipe(length=0.4, radius=0.008, wave_speed=1300.0 * factor)], end=pk.ClosedEnd())
        parts = [pk.Pipe(length=2.0, radius=0.008, wave_speed=1300.0 * factor), pk.Restrictor(pressure_drop="3 bar", flow=6e-4), branch]
        return pk.Line([*parts, pk.Pipe(length=1.0, radius=0.008, wave_speed=1300.0 * factor)], end=pk.OpenEnd(), fluid=FLUID)

    speeds, places = np.array([25.0, 40.0]), np.linspace(0.0, 3.0, 11)
    varied = speed_map(line(1.0), source(2e-5, 1e-5), speeds, places, wave_speed_factor=1.07)
    built = speed_map(line(1.07), source(2e-5, 1e-5), speeds, places)
    np.testing.assert_allclose(varied.peak_to_peak, built.peak_to_peak, rtol=1e-12, atol=1e-6)  # rounding


def test_both_sides_of_a_double_acting_plunger_compress():
    # Each side gives up the same share of its stroke, so that delivery repeats every half turn but for the rod.
    flow = pk.plunger_pump(plungers=1, speed="300 rpm", mean_flow="20 L/min", rod_ratio=1e4, acting="double", compression=0.2)
    odd, even = np.abs(flow.coefficients[1::2]), np.abs(flow.coefficients[2::2])
    assert odd.max() < 2e-3 * even.max()  # a long rod leaves 1/rod_ratio and a sample of the grid


def test_a_restrictor_in_a_branch_damps_the_speed_map_as_it_damps_the_response():
    branch = pk.SideBranch([pk.Restrictor(pressure_drop="10 bar", flow="1 L/min"), pk.Volume(volume="1 L")], end=pk.ClosedEnd())
    line = pk.Line([pipe(), branch, pipe()], end=pk.ClosedEnd(), fluid=FLUID)
    response = line.respond(source(5e-5))
    places = np.linspace(0.0, line.length, 9)
    mapped = speed_map(line, source(5e-5), [30.0], places, values=response.values).peak_to_peak[0]
    # One harmonic: 32 instants miss its extreme by at most (pi/32)^2/2 = 0.5 %.
    assert mapped == pytest.approx(response.envelope(places), rel=0.01)
    undamped = speed_map(line, source(5e-5), [30.0], places).peak_to_peak[0]
    assert abs(undamped[0] / mapped[0] - 1) > 0.05
