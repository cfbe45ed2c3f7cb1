"""Units as people type them, conversions without a lost digit, and numbers for print."""

import math
import pickle
import subprocess
import sys
from fractions import Fraction

import numpy as np
import pint
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import pulsekit.quantities as q
from pulsekit.errors import InputError, UnitError
from pulsekit.quantities import (
    convert,
    format_interval,
    format_number,
    from_si,
    parse_given,
    parse_unit,
    pretty_unit,
    shown,
    to_si,
    uncertainty_remark,
    unit_dimension,
    write_given,
)

# Exact factors to SI: definitions (BIPM SI brochure 2019; NIST SP 811 appendix B for the inch, the gallon and conventional columns).
GALLON = Fraction(231) * Fraction("0.0254") ** 3
EXACT = {
    "mL/min": Fraction(1, 60_000_000), "mL·min⁻¹": Fraction(1, 60_000_000), "ml min-1": Fraction(1, 60_000_000), "L/min": Fraction(1, 60_000),
    "l/min": Fraction(1, 60_000), "lpm": Fraction(1, 60_000), "L/s": Fraction(1, 1000), "m3/h": Fraction(1, 3600), "cm3/s": Fraction(1, 10**6),
    "gpm": GALLON / 60, "US gpm": GALLON / 60, "gal/min": GALLON / 60,
    "mmHg": Fraction("133.322387415"), "cmH2O": Fraction("98.0665"), "mm Hg": Fraction("133.322387415"),
    "dyn/cm^2": Fraction(1, 10), "dyne/cm2": Fraction(1, 10), "dyn/cm²": Fraction(1, 10),
    "bar": Fraction(10**5), "psi": Fraction("4.4482216152605") / Fraction("0.0254") ** 2, "kPa": Fraction(1000), "GPa": Fraction(10**9),
    "cP": Fraction(1, 1000), "mPa·s": Fraction(1, 1000), "mPa.s": Fraction(1, 1000), "mPas": Fraction(1, 1000), "mPa s": Fraction(1, 1000),
    "cSt": Fraction(1, 10**6), "mm²/s": Fraction(1, 10**6), "mm2/s": Fraction(1, 10**6),
    "rpm": Fraction(1, 60), "r/min": Fraction(1, 60), "rev/min": Fraction(1, 60), "min⁻¹": Fraction(1, 60), "beats/min": Fraction(1, 60),
    "in": Fraction("0.0254"), "mm": Fraction(1, 1000), "µm": Fraction(1, 10**6), "μm": Fraction(1, 10**6), "um": Fraction(1, 10**6), "µs": Fraction(1, 10**6),
    "cm/s": Fraction(1, 100), "CM/S": Fraction(1, 100), "kg/m³": Fraction(1), "g/cm3": Fraction(1000), "%": Fraction(1, 100), "dyn·s·cm⁻⁵": Fraction(10**5),
    "kPa/mm": Fraction(10**6), "mmHg/cm": Fraction("13332.2387415"),
}  # fmt: skip


@pytest.mark.parametrize("unit", EXACT)
def test_units_as_people_type_them_have_their_defined_size(unit):
    dimension = unit_dimension(unit)
    assert dimension is not None
    # One rounding: half a unit in the last place (two where the factor itself is no short decimal: psi, gallon).
    exact = float(Fraction("3.1") * EXACT[unit])
    assert abs(to_si(f"3.1 {unit}", dimension, "x") - exact) <= 2 * math.ulp(exact)


@pytest.mark.parametrize(
    ("text", "dimension", "value"),
    [
        ("3.1 mm", "length", 0.0031), ("0.7 mm", "length", 0.0007), ("1060 kg/m^3", "density", 1060.0), ("3.5 mPa*s", "viscosity", 0.0035),
        ("37 degC", "temperature", 310.15), ("37 °C", "temperature", 310.15), ("37 deg C", "temperature", 310.15), ("37 C", "temperature", 310.15),
        ("98.6 °F", "temperature", 310.15), ("-40 degF", "temperature", 233.15), ("310.15 K", "temperature", 310.15), ("1480 rpm", "frequency", 1480 / 60),
        ("60 deg", "angle", math.pi / 3), ("60 °", "angle", math.pi / 3), ("2 K", "temperature_difference", 2.0), ("45 %", "ratio", 0.45),
        ("1/2 in", "length", 0.0127), ('1 1/4"', "length", 0.03175), ("1.5e-3 m", "length", 0.0015), ("3 × 10⁻³ m", "length", 0.003), ("−2 mmHg", "pressure", -266.64477483),
    ],
)  # fmt: skip
def test_a_decimal_becomes_the_float_next_to_it(text, dimension, value):
    assert to_si(text, dimension, "x") == pytest.approx(value, rel=2e-16, abs=0.0)


def test_angular_frequency_is_divided_by_two_pi_and_no_angle_passes_for_a_ratio():
    assert to_si("100 rad/s", "frequency", "x") == pytest.approx(100 / (2 * math.pi), rel=1e-15)
    with pytest.raises(UnitError, match="angle"):
        to_si("45 deg", "ratio", "haematocrit")
    with pytest.raises(UnitError, match="angle"):
        to_si("0.45", "angle", "doppler_angle")


_ROUND = [(unit, unit_dimension(unit)) for unit in EXACT]


@given(st.sampled_from(_ROUND), st.decimals(min_value="0.001", max_value="99999", places=3))
@settings(max_examples=300, deadline=None)
def test_to_si_and_back_gives_the_number_typed(unit, number):
    name, dimension = unit
    there = to_si(f"{number} {name}", dimension, "x")
    assert from_si(there, name, dimension) == pytest.approx(float(number), rel=3e-16, abs=0.0)


@given(st.floats(1e-6, 1e6), st.floats(1e-6, 1.0), st.sampled_from(_ROUND), st.sampled_from(["", " (k=2)", " (95 %)", " (limits)"]))
@settings(max_examples=200, deadline=None)
def test_text_to_given_to_text_to_given(value, spread, unit, coverage):
    name, dimension = unit
    first = parse_given(f"{value!r} {name} ± {spread!r} {name}{coverage}", dimension, "x")
    second = parse_given(write_given(first), dimension, "x")
    assert second.value == pytest.approx(first.value, rel=1e-15)
    assert second.standard_uncertainty == pytest.approx(first.standard_uncertainty, rel=2e-15)
    assert (second.shape, second.dimension, second.stated) == (first.shape, first.dimension, True)


@given(st.sampled_from(_ROUND), st.floats(-1e9, 1e9))
@settings(max_examples=100, deadline=None)
def test_arrays_and_numbers_convert_alike(unit, number):
    name, dimension = unit
    read, si = parse_unit(name)[0], q.DIMENSIONS[dimension]
    many = convert(np.array([number, 1.0]), read, si)
    assert many[0] == pytest.approx(convert(number, read, si), rel=5e-16, abs=1e-300)


def test_temperatures_of_arrays_keep_their_offset():
    np.testing.assert_allclose(convert(np.array([0.0, 37.0]), "degC", "K"), [273.15, 310.15], rtol=1e-15)
    np.testing.assert_allclose(from_si(np.array([310.15]), "degF"), [98.6], rtol=1e-14)  # a difference of large numbers
    assert from_si(2.0, "degF", "temperature_difference") == pytest.approx(3.6, rel=1e-15)


@pytest.mark.parametrize(
    ("text", "dimension", "spread"),
    [
        ("3.1 mm ± 0.15 mm", "length", 0.15e-3), ("3.1 mm ± 5 %", "length", 0.155e-3), ("3.1 mm +/- 0.15 mm", "length", 0.15e-3), ("3.1 mm+-5%", "length", 0.155e-3),
        ("3.1 ± 0.15 mm", "length", 0.15e-3), ("(3.1 ± 0.15) mm", "length", 0.15e-3), ("0 ± 0.6 cm/s", "velocity", 0.006), ("37 ± 0.5 degC", "temperature", 0.5),
        ("98.6 degF ± 0.9 degF", "temperature", 0.5), ("3.1 mm ± 150 µm", "length", 0.15e-3), ("3.1 mm ± 0.2 mm (k=2)", "length", 0.1e-3),
        ("3.1 mm ± 0.2 mm (2 sigma)", "length", 0.1e-3), ("3.1 mm ± 0.2 mm (k = 2, 95 %)", "length", 0.1e-3),
        ("3.1 mm ± 0.2 mm (limits)", "length", 0.2e-3 / math.sqrt(3)), ("180 bar ± 0.25 % FS 400 bar", "pressure", 1e5), ("180 bar ± 0.25 %FS (400 bar)", "pressure", 1e5),
        ("0.45 ± 0.02", "ratio", 0.02), ("45 % ± 2 %", "ratio", 0.02), ("0.45 ± 4 %", "ratio", 0.018), ("15 % ± 5 %", "ratio", 0.05), ("38 L/min ± 1", "flow_rate", 1 / 60000),
    ],
)  # fmt: skip
def test_uncertainties_as_people_write_them(text, dimension, spread):
    read = parse_given(text, dimension, "x")
    assert read.standard_uncertainty == pytest.approx(spread, rel=1e-14)
    assert read.stated
    assert (read.shape == "rectangular") == ("limits" in text)


def test_a_95_per_cent_interval_is_196_standard_uncertainties():
    # Normal distribution, 97.5 % point 1.959964 (JCGM 100:2008, table G.1: 1.960).
    read = parse_given("3.1 mm ± 0.196 mm (95 %)", "length", "radius")
    assert read.standard_uncertainty == pytest.approx(0.196e-3 / 1.959963985, rel=1e-9)


def test_no_uncertainty_and_an_uncertainty_of_zero_are_not_the_same():
    assert not parse_given("3.1 mm", "length", "radius").stated
    assert parse_given("3.1 mm ± 0 mm", "length", "radius").stated


@pytest.mark.parametrize(("text", "reference"), [("2 bar(g)", "gauge"), ("2 bar (a)", "absolute"), ("2 barg", "gauge"), ("30 psia", "absolute"), ("2 bar", ""),
                                                 ("30 psig", "gauge"), ("3 kPa abs", "absolute"), ("2 BarA", "absolute")])  # fmt: skip
def test_gauge_and_absolute_are_kept_and_never_guessed(text, reference):
    assert parse_given(text, "pressure", "p").reference == reference


def test_absolute_pressure_adds_the_ambient_to_gauge_only():
    assert q.absolute_pressure("2 bar(g)").value == 301325.0
    assert q.absolute_pressure("2 bar(a)").value == 200000.0
    assert q.absolute_pressure("2 bar").value == 200000.0
    assert q.absolute_pressure("2 bar(g)", ambient=90e3).value == 290e3


@pytest.mark.parametrize(
    ("value", "dimension", "says"),
    [
        ("3,1 mm", "length", "decimal point"), ("1,200 mL/min", "flow_rate", "thousands"), ("3.1 mm", "flow_rate", "not a flow rate but a length"),
        ("3.1 mm", "viscosity", "mPa"), ("3.1", "length", "no unit"), ("3.1 furlongs per fortnight mm", "length", "radius"), ("5 mpa", "pressure", "two things"),
        ("5 ccm", "volume", "two things"), ("3.1 mm ± -0.1 mm", "length", "negative"), ("3.1 mm ± 0.1 s", "length", "time"), ("1e999 mm", "length", "finite"),
        ("", "length", "not understood"), ("about 3 mm", "length", "not understood"), ("3.1.2 mm", "length", "not understood"), ("-300 degC", "temperature", "absolute zero"),
        ("20 degC ± 1 %", "temperature", "no per cent"), ("180 bar ± 0.25 % FS", "pressure", "which full scale"), ("3.1 mm ± 0.1 mm (k=0)", "length", "above 0"),
        ("3.1 mm ± 0.1 mm (120 %)", "length", "100 %"), (None, "length", "missing"), (True, "length", "not a number"), ([1.0], "length", "not a number"),
        (math.nan, "length", "finite"), (math.inf, "length", "finite"), (1j, "length", "not a number"), ("mm", "length", "not understood"),
        ("3.1 mmHb", "pressure", "did you mean 'mmHg'"), ("1e999999999999 mm", "length", "finite"),
    ],
)  # fmt: skip
def test_errors_name_the_argument_what_was_given_and_the_remedy(value, dimension, says):
    with pytest.raises(InputError) as caught:
        parse_given(value, dimension, "radius")
    assert "radius" in str(caught.value)
    assert says in str(caught.value)
    assert caught.value.name == "radius"
    assert isinstance(caught.value, ValueError)
    assert str(pickle.loads(pickle.dumps(caught.value))) == str(caught.value)


def test_a_power_of_ten_beyond_floats_costs_no_time():
    assert to_si("1e-999999999999 mm", "length", "x") == 0.0


def test_quantities_of_any_registry_are_taken():
    units = pint.UnitRegistry()
    assert to_si(units.Quantity(3.1, "mm"), "length", "radius") == pytest.approx(0.0031, rel=1e-15)
    assert to_si(units.Quantity(37.0, "degC"), "temperature", "t") == pytest.approx(310.15, rel=1e-15)
    assert to_si(units.Quantity(1480.0, "revolution/minute"), "frequency", "speed") == pytest.approx(1480 / 60, rel=1e-15)
    with pytest.raises(UnitError, match="radius"):
        to_si(units.Quantity(3.1, "s"), "length", "radius")


def test_numbers_of_the_uncertainties_library_bring_theirs_along():
    ufloat = pytest.importorskip("uncertainties").ufloat
    read = parse_given(ufloat(0.0031, 0.0001), "length", "radius")
    assert (read.value, read.standard_uncertainty, read.stated) == (0.0031, 0.0001, True)


def test_a_given_is_not_taken_for_another_dimension():
    with pytest.raises(UnitError, match="not a viscosity"):
        parse_given(parse_given("46 cSt", "kinematic_viscosity"), "viscosity", "viscosity")


def test_an_uncertainty_larger_than_its_value_is_allowed_and_remarked():
    assert uncertainty_remark(parse_given("2 mm ± 3 mm", "length"), "radius") is not None
    assert uncertainty_remark(parse_given("0 ± 0.6 cm/s", "velocity"), "background_velocity") is None
    assert uncertainty_remark(parse_given("2 mm ± 1 mm", "length"), "radius") is None


@pytest.mark.parametrize(
    ("numbers", "unit", "expected"),
    [
        ((0.5213, 0.4411, 0.6123), "Pa", (0.521, 0.441, 0.612)), ((0.5213, 0.3, 0.9), "Pa", (0.52, 0.3, 0.9)), ((6.9216e-6, None, None), "mL/min", (415.3, None, None)),
        ((123456.0, 110000.0, 140000.0), "Pa", (123000.0, 110000.0, 140000.0)), ((0.0, 0.0, 0.0), "Pa", (0.0, 0.0, 0.0)), ((None, None, None), "Pa", (None, None, None)),
        ((1.5, 1.2, None), "Pa", (1.5, 1.2, None)), ((310.15, 309.65, 310.65), "degC", (37.0, 36.5, 37.5)), ((-0.0001, -0.5, 0.5), "Pa", (0.0, -0.5, 0.5)),
    ],
)  # fmt: skip
def test_half_the_interval_is_shown_with_two_significant_digits(numbers, unit, expected):
    assert shown(*numbers, unit) == expected


@given(st.floats(-1e6, 1e6), st.floats(1e-3, 1e5), st.floats(1e-3, 1e5))
def test_rounding_never_moves_a_number_by_more_than_a_twentieth_of_the_half_width(value, below, above):
    low, high = value - below, value + above
    rounded = shown(value, low, high, "Pa")
    half = 0.5 * (high - low)
    # Two significant digits of the half width: 10 is the coarsest, where half a step is a twentieth; eight digits are kept at most.
    limit = 0.051 * half + 1e-7 * max(abs(low), abs(high))
    assert all(abs(a - b) <= limit for a, b in zip(rounded, (value, low, high), strict=True))


def test_numbers_are_written_as_people_read_them():
    assert format_interval(0.5213, 0.31, 0.74, "Pa") == "0.52 (0.31 to 0.74) Pa"
    assert format_interval(0.5, 0.3, 0.7, "Pa") == "0.50 (0.30 to 0.70) Pa"
    assert format_interval(3.5e-3, None, None, "mPa*s") == "3.500 mPa·s"
    assert format_number(None) == "–"
    assert format_number(-0.0001, 1) == "0.0"
    assert format_number(2.5e-8) == "2.500e-8"
    assert [pretty_unit(u) for u in ("mPa*s", "ml/min", "kg/m^3", "degC", "um", "m3/h", "psig", "%", "1/s")] == [
        "mPa·s", "mL/min", "kg/m³", "°C", "µm", "m³/h", "psig", "%", "1/s",
    ]  # fmt: skip


@pytest.mark.parametrize("unit", EXACT)
def test_a_printed_unit_can_be_typed_again(unit):
    assert parse_unit(pretty_unit(unit)) == parse_unit(unit)


def test_every_dimension_has_a_unit_to_be_shown_in():
    for dimension in q.DIMENSIONS:
        for kind in ("wall shear", "pump line"):
            assert from_si(1.0, q.display_unit(dimension, kind), dimension) > 0 or dimension == "temperature"


def test_the_unit_library_is_loaded_on_first_use_only():
    code = "import sys, pulsekit.quantities; assert 'pint' not in sys.modules; pulsekit.quantities.to_si('3 mm', 'length'); assert 'pint' in sys.modules"
    # The package's own list of names is not asked for: only this floor.
    subprocess.run([sys.executable, "-c", code], check=True, timeout=60)
