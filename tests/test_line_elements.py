"""A line of elements: limits and conservation first, then values from outside, then what is refused."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from pulsekit.errors import InputError
from pulsekit.fluids import Fluid
from pulsekit.line import (
    ClosedEnd,
    FlowSource,
    GasDamper,
    Hose,
    ImpedanceEnd,
    Line,
    MatchedEnd,
    MeasuredPressure,
    OpenEnd,
    Pipe,
    Restrictor,
    RestrictorEnd,
    SideBranch,
    Volume,
    resonances,
)  # fmt: skip
from pulsekit.line.balance import equivalent_resistance, mean_turbulent_drop
from pulsekit.trace import Harmonics

OIL = Fluid(density=870.0, viscosity=0.04, bulk_modulus=1.5e9)
THIN = Fluid(density=870.0, viscosity=1e-9, bulk_modulus=1.5e9)  # as good as without friction


def pipe(length=2.0, radius=0.008, speed=1300.0, **more):
    return Pipe(length=length, radius=radius, wave_speed=speed, **more)


def source(*coefficients, frequency=50.0):
    return FlowSource(Harmonics(frequency, [6e-4, *coefficients]))


FREQUENCIES = np.linspace(3.0, 900.0, 301)


def test_two_halves_are_one_pipe():
    whole = Line([pipe(4.0)], end=ClosedEnd(), fluid=OIL).input_impedance(FREQUENCIES)
    halves = Line([pipe(1.5), pipe(2.5)], end=ClosedEnd(), fluid=OIL).input_impedance(FREQUENCIES)
    assert_allclose(halves, whole, rtol=1e-12)


def test_a_lossless_closed_line_is_a_cotangent():
    found = Line([pipe(2.0)], end=ClosedEnd(), fluid=THIN).input_impedance(FREQUENCIES)
    area = np.pi * 0.008**2
    expected = 870 * 1300 / area / (1j * np.tan(2 * np.pi * FREQUENCIES * 2.0 / 1300))
    # the thin liquid's layer changes the wave number by 1e-5
    assert_allclose(found, expected, rtol=2e-2)


def test_a_matched_line_is_its_own_impedance_however_long():
    short = Line([pipe(0.1)], end=MatchedEnd(), fluid=OIL).input_impedance(FREQUENCIES)
    long_ = Line([pipe(1e6)], end=MatchedEnd(), fluid=OIL).input_impedance(FREQUENCIES)
    assert_allclose(long_, short, rtol=1e-12)


def test_a_very_long_line_neither_overflows_nor_loses_a_digit():
    # Re(gamma L) of about 1000: the end is not heard, whatever it is
    line = [Pipe(length=3e4, radius=0.001, wave_speed=1300.0)]
    closed, opened, matched = (Line(line, end=end, fluid=OIL).input_impedance(1000.0) for end in (ClosedEnd(), OpenEnd(), MatchedEnd()))
    assert_allclose([closed, opened], [matched, matched], rtol=1e-13)
    response = Line(line, end=ClosedEnd(), fluid=OIL).respond(source(1e-6, frequency=1000.0))
    assert np.isfinite(response.pressure(3e4).coefficients).all()


def test_reciprocity():
    """Pressure at the end per flow at the source is the same from the other side: the transfer impedance of a closed line is symmetric."""
    parts = [pipe(1.0), Restrictor(pressure_drop="3 bar", flow="38 L/min"), Volume(volume="0.3 L"), pipe(0.7, 0.012), pipe(0.3)]
    there = Line(parts, end=ClosedEnd(), fluid=OIL, mean_flow=0.0006).respond(source(1e-5, 2e-5j, 1e-6))
    back = Line(parts[::-1], end=ClosedEnd(), fluid=OIL, mean_flow=0.0006).respond(source(1e-5, 2e-5j, 1e-6))
    assert_allclose(there.pressure(2.0).coefficients[1:], back.pressure(2.0).coefficients[1:], rtol=1e-11)


def _chain(parts, frequency):
    """Transfer matrix [p, q] at 0 -> at the end, from two ends of the same line."""
    columns = []
    for end in (ClosedEnd(), OpenEnd()):
        response = Line(parts, end=end, fluid=OIL, mean_flow=0.0006).respond(source(1e-5, frequency=frequency))
        length = response.line.length
        columns.append([response.pressure(0.0).coefficients[1], response.flow_rate(0.0).coefficients[1],
                        response.pressure(length).coefficients[1], response.flow_rate(length).coefficients[1]])  # fmt: skip
    a = np.array(columns).T
    return a[2:] @ np.linalg.inv(a[:2])


def test_determinant_is_one():
    parts = [pipe(1.0), SideBranch([pipe(0.4)], end=ClosedEnd()), pipe(0.6), Restrictor(pressure_drop="3 bar", flow="38 L/min"), pipe(0.2)]
    for frequency in (17.0, 120.0, 433.0):
        # the two ends make the matrix from numbers of different size, which costs a few digits
        assert_allclose(np.linalg.det(_chain(parts, frequency)), 1.0, rtol=1e-7)


def test_energy_balance():
    """What enters at the source is dissipated or leaves; along a pipe the power only falls."""
    line = Line([pipe(3.0)], end=RestrictorEnd(pressure_drop="20 bar", flow="38 L/min"), fluid=OIL, mean_flow=38 / 6e4)
    response = line.respond(source(2e-5, 1e-5, 5e-6j))
    places = np.linspace(0, 3, 31)
    power = [0.5 * np.sum((response.pressure(x).coefficients[1:] * response.flow_rate(x).coefficients[1:].conj()).real) for x in places]
    assert power[0] > power[-1] > 0
    assert np.all(np.diff(power) < 0)


def test_steady_drop_is_poiseuilles():
    response = Line([pipe(3.0)], end=OpenEnd(), fluid=OIL, mean_flow=1e-5, mean_pressure="10 bar(a)").respond(source(1e-6))
    drop = 8 * 0.04 * 3.0 * 1e-5 / (np.pi * 0.008**4)
    assert_allclose(response.pressure(0.0).mean - response.pressure(3.0).mean, drop, rtol=1e-12)


def test_quarter_and_half_waves():
    # (2k + 1) a/4L and k a/2L: a = 1300, L = 10 give 32.5, 97.5 and 65, 130 Hz
    closed = resonances(Line([Pipe(length=10.0, radius=0.05, wave_speed=1300.0)], end=ClosedEnd(), fluid=THIN), below=150.0)
    opened = resonances(Line([Pipe(length=10.0, radius=0.05, wave_speed=1300.0)], end=OpenEnd(), fluid=THIN), below=120.0)
    assert_allclose([found.frequency for found in closed], [65, 130], atol=0.1)
    assert_allclose([found.frequency for found in opened], [32.5, 97.5], atol=0.1)


def test_a_measured_pressure_gives_the_line_that_made_it():
    parts = [pipe(1.0), GasDamper(gas_volume="0.05 L", pressure="100 bar", polytropic_exponent=1.4), pipe(2.0)]
    line = Line(parts, end=ClosedEnd(), fluid=OIL, mean_flow=6e-4)
    made = line.respond(source(2e-5, 1e-5j, 3e-6))
    again = line.respond(MeasuredPressure(made.pressure(0.4), station="0.4 m"))
    assert_allclose(again.pressure(2.7).coefficients[1:], made.pressure(2.7).coefficients[1:], rtol=1e-10)
    assert_allclose(again.flow_rate(0.0).coefficients[1:], made.flow_rate(0.0).coefficients[1:], rtol=1e-10)


@settings(max_examples=25, deadline=None)
@given(factor=st.floats(1e-3, 1e3), turn=st.floats(0, 6.28))
def test_linearity(factor, turn):
    line = Line([pipe(1.0), Volume(volume="0.2 L"), pipe(2.0)], end=ClosedEnd(), fluid=OIL, mean_flow=6e-4)
    one = line.respond(source(2e-5, 1e-5)).pressure(1.5).coefficients[1:]
    many = line.respond(source(2e-5 * factor * np.exp(1j * turn), 1e-5 * factor * np.exp(2j * turn))).pressure(1.5).coefficients[1:]
    assert_allclose(many, one * factor * np.exp([1j * turn, 2j * turn]), rtol=1e-9)


def test_a_quarter_wave_branch_silences_its_frequency():
    branch = SideBranch([pipe(1300 / 4 / 100.0)], end=ClosedEnd())
    bare = Line([pipe(1.0), pipe(2.0)], end=MatchedEnd(), fluid=THIN, mean_flow=0.0).respond(source(1e-5, frequency=100.0))
    tuned = Line([pipe(1.0), branch, pipe(2.0)], end=MatchedEnd(), fluid=THIN, mean_flow=0.0).respond(source(1e-5, frequency=100.0))
    assert abs(tuned.pressure(3.0).coefficients[1]) < 1e-3 * abs(bare.pressure(3.0).coefficients[1])


def test_a_damper_is_its_compliance():
    damper = GasDamper(gas_volume="0.5 L", pressure="180 bar(a)", polytropic_exponent=1.2)
    line = Line([damper, pipe(1e-6)], end=ClosedEnd(), fluid=OIL)
    assert_allclose(line.input_impedance(10.0), 1.2 * 180e5 / (2j * np.pi * 10 * 0.5e-3), rtol=1e-4)


def test_a_volume_is_its_compliance():
    line = Line([Volume(volume="0.8 L"), pipe(1e-6)], end=ClosedEnd(), fluid=OIL)
    assert_allclose(line.input_impedance(10.0), 1.5e9 / (2j * np.pi * 10 * 0.8e-3), rtol=1e-4)


@pytest.mark.parametrize(("mean", "ratio"), [(0.0, 0.849), (0.25, 0.928), (0.5, 1.160), (0.9, 1.803), (1.0, 2.000)])
def test_equivalent_resistance(mean, ratio):
    # computed integral of q|q| cos over a cycle, Q0/Q1 = mean; printed to 3 digits
    assert_allclose(equivalent_resistance(1.0, mean, [1.0]), ratio, atol=6e-4)


def test_equivalent_resistance_without_mean_flow_against_a_cycle_in_time():
    time = np.linspace(0, 2 * np.pi, 200001)
    flow = np.cos(time)
    taken = np.trapezoid(flow**2 * np.abs(flow), time) / np.trapezoid(flow**2, time)
    assert_allclose(equivalent_resistance(1.0, 0.0, [1.0]), taken, rtol=1e-4)
    assert_allclose(taken, 8 / (3 * np.pi), rtol=1e-6)


def test_mean_drop_with_ripple():
    # 2.65 k Q0^2 at Q0/Q1 = 0.5, printed to 3 digits
    assert_allclose(mean_turbulent_drop(1.0, 0.5, [1.0]) / 0.25, 2.65, atol=0.005)


def test_a_restrictor_in_a_closed_branch_still_damps():
    parts = [SideBranch([Restrictor(pressure_drop="3 bar", flow="38 L/min"), Volume(volume="1 L")], end=ClosedEnd()), pipe(2.0)]
    response = Line(parts, end=ClosedEnd(), fluid=OIL, mean_flow=6e-4).respond(source(1e-5, 5e-6j))
    assert any("harmonic balance" in remark for remark in response.remarks)
    found = response.values["element.0.element.0.equivalent_resistance"]
    constant = 3e5 / (38 / 6e4) ** 2
    assert 0 < found < 10 * constant * 1.5e-5


def test_a_lossy_hose_damps_more_than_a_stiff_one():
    def end_pressure(loss):
        line = Line([Hose(length=3.0, radius=0.008, wave_speed=900.0, loss_factor=loss)], end=ClosedEnd(), fluid=OIL, mean_flow=0.0)
        return abs(line.respond(source(1e-5, frequency=150.0)).pressure(3.0).coefficients[1])

    assert end_pressure(0.2) < end_pressure(0.0)


@pytest.mark.parametrize(
    ("make", "word"),
    [
        (lambda: Line([pipe()], end=None, fluid=OIL), "end"),
        (lambda: Line([], end=ClosedEnd(), fluid=OIL), "element"),
        (lambda: pipe(length="-2 m"), "length"),
        (lambda: pipe(length="2 s"), "length"),
        (lambda: Pipe(length="2 m"), "radius"),
        (lambda: Pipe(length="2 m", nominal_size="2"), "nominal"),
        (lambda: Line([pipe(), SideBranch([pipe()], end=ClosedEnd())], end=ClosedEnd(), fluid=OIL), "side branch"),
        (lambda: Line([pipe(2.0)], end=ClosedEnd(), fluid=OIL).respond(source(1e-6)).pressure("3 m"), "position"),
        (lambda: Line([Volume(volume="1 L"), pipe()], end=ClosedEnd(), fluid=Fluid(density=870.0, viscosity=0.04)).input_impedance(10.0), "bulk_modulus"),
        (lambda: Line([Pipe(length="1 m", radius="8 mm")], end=ClosedEnd(), fluid=Fluid(density=870.0, viscosity=0.04)).input_impedance(10.0), "bulk_modulus"),
        (lambda: GasDamper(pressure="180 bar"), "gas_volume"),
        (lambda: ImpedanceEnd(complex("inf")), "finite"),
        (lambda: Line([pipe()], end=ClosedEnd(), fluid=OIL).input_impedance(0.0), "above 0"),
    ],
)  # fmt: skip
def test_what_makes_no_line_is_refused(make, word):
    with pytest.raises(InputError, match=word):
        make()


def test_pipe_schedules():
    # ASME B36.10M: NPS 2 schedule 80 is 60.3 mm by 5.54 mm (from memory)
    assert_allclose(Pipe(length="1 m", nominal_size="2", schedule="80", wave_speed=1300.0).radius, (60.3 / 2 - 5.54) / 1e3, rtol=1e-12)
    assert_allclose(Pipe(length="1 m", nominal_size="DN50", schedule="80", wave_speed=1300.0).radius, (60.3 / 2 - 5.54) / 1e3, rtol=1e-12)
