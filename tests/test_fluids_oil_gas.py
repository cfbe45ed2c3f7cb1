"""Hydraulic oil, nitrogen and free gas."""

import itertools
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from pulsekit.errors import InputError, OutOfRangeError
from pulsekit.fluids import damper_gas_volume, gas_fraction_at_pressure, hydraulic_oil
from pulsekit.fluids.gas import warm_precharge
from pulsekit.fluids.nitrogen import nitrogen_density, nitrogen_pressure, nitrogen_stiffness_exponent
from pulsekit.fluids.oil import oil_bulk_modulus, oil_density, oil_kinematic_viscosity, oil_pressure_viscosity
from pulsekit.fluids.oil_index import _REFERENCE_OILS, viscosity_at_100, viscosity_index


def test_viscosity_chart_worked_example():
    # ASTM D341: 32 mm^2/s at 40 °C and 5.4 at 100 °C are 8.5 at 80 °C (8.533 with 273.15).
    assert oil_kinematic_viscosity(353.15, 32e-6, 5.4e-6) * 1e6 == pytest.approx(8.533, abs=6e-4)
    fluid = hydraulic_oil(viscosity_at_40="32 mm^2/s", viscosity_at_100="5.4 mm^2/s", temperature="80 degC")
    assert fluid.kinematic_viscosity * 1e6 == pytest.approx(8.533, abs=6e-4)


@given(st.floats(8.0, 1000.0), st.floats(0.08, 0.25))
def test_the_chart_returns_its_two_points_and_falls(at_40, ratio):
    at_100 = max(ratio * at_40, 2.1)
    t = np.array([313.15, 330.0, 350.0, 373.15])
    found = oil_kinematic_viscosity(t, at_40 * 1e-6, at_100 * 1e-6) * 1e6
    assert found[0] == pytest.approx(at_40, rel=1e-12)
    assert found[-1] == pytest.approx(at_100, rel=1e-12)
    assert np.all(np.diff(found) < 0)


# ISO 3448: limits of kinematic viscosity at 40 °C, mm^2/s.
ISO_3448 = {
    10: (9.00, 11.0),
    15: (13.5, 16.5),
    22: (19.8, 24.2),
    32: (28.8, 35.2),
    46: (41.4, 50.6),
    68: (61.2, 74.8),
    100: (90, 110),
    150: (135, 165),
}


@pytest.mark.parametrize("grade", ISO_3448)
def test_grades_have_the_limits_of_the_standard(grade):
    low, high = ISO_3448[grade]
    fluid = hydraulic_oil(grade=grade, temperature="40 degC")
    assert fluid.kinematic_viscosity * 1e6 == pytest.approx(0.5 * (low + high), rel=1e-12)
    stated = fluid.givens["grade"]
    assert stated.shape == "rectangular"
    assert stated.standard_uncertainty * math.sqrt(3) == pytest.approx(0.5 * (high - low), rel=1e-12)


def test_reference_oils_of_the_viscosity_index():
    # ASTM D2270, table 1, L and H at Y = 2.00 and 10.0 mm^2/s: 7.994, 6.394; 147.7, 82.87 (from memory).
    for y, low, high, digits in ((2.0, 7.994, 6.394, 2e-3), (10.0, 147.7, 82.87, 0.06)):
        row = _REFERENCE_OILS[np.searchsorted(_REFERENCE_OILS[:, 0], y, side="right") - 1]
        assert np.polyval(row[1:4], y) == pytest.approx(low, abs=digits)
        assert np.polyval(row[4:], y) == pytest.approx(high, abs=digits)
    # The pieces of the standard meet: a wrong coefficient would leave a step.
    for before, after in itertools.pairwise(_REFERENCE_OILS):
        for columns in (slice(1, 4), slice(4, 7)):
            assert np.polyval(before[columns], after[0]) == pytest.approx(np.polyval(after[columns], after[0]), rel=2e-3)


def test_viscosity_index_worked_examples():
    # ASTM D2270, examples of procedures A and B: 73.30 and 8.86 mm^2/s -> 92; 22.83 and 5.05 mm^2/s -> 156 (from memory).
    assert round(viscosity_index(73.30e-6, 8.86e-6)) == 92
    assert round(viscosity_index(22.83e-6, 5.05e-6)) == 156


@given(st.floats(15.0, 1500.0), st.floats(-50.0, 300.0))
def test_index_and_viscosity_at_100_undo_each_other(at_40, index):
    at_100 = viscosity_at_100(at_40 * 1e-6, index)
    back = viscosity_index(at_40 * 1e-6, at_100)
    # At the joints of the standard's pieces L and H jump by up to 0.2 %, which is 0.5 of the index.
    assert back == pytest.approx(index, abs=0.6)


def test_hydraulic_oil_46_is_where_data_sheets_have_it():
    # Mineral hydraulic oil of grade 46 (common practice): 6.5 to 7.0 mm^2/s at 100 °C, 870 to 885 kg/m^3 at 15 °C, 1.35 to 1.42 km/s at 40 °C.
    assert 6.5e-6 < viscosity_at_100(46e-6, 100.0) < 7.0e-6
    fluid = hydraulic_oil(grade=46, temperature="15 degC")
    assert 870 < fluid.density < 885
    warm = hydraulic_oil(grade=46, temperature="40 degC")
    assert 1350 < math.sqrt(warm.bulk_modulus / warm.density) < 1420


# Bulk moduli by table, GPa (handbook table; temperature and pressure not stated there): hydraulic oil MIL-H-5606 1.793 at 13.5 mm^2/s at 40 °C.
def test_bulk_modulus_is_near_the_handbook_figure_of_an_aircraft_oil():
    at_20 = oil_kinematic_viscosity(293.15, 13.5e-6, 5.0e-6)  # 5.0 at 100 °C: from memory
    assert oil_bulk_modulus(293.15, 101325.0, at_20) == pytest.approx(1.793e9, rel=0.05)


def test_tangent_modulus_is_the_slope_of_the_secant_law():
    # v/v0 = 1 - p/K_s(p); K_t = -v dp/dv by a central difference.
    at_20, t = 125e-6, 323.15

    def volume(over):
        still = 1e9 * (1.57 + 0.15 * math.log10(125.0)) * 10 ** (0.0024 * (20.0 - 50.0))
        return 1.0 - over / (still + 5.6 * over)

    for over in (0.0, 18e6, 60e6):
        step = 1e3
        slope = (volume(over + step) - volume(over - step)) / (2 * step)
        assert oil_bulk_modulus(t, 101325.0 + over, at_20) == pytest.approx(-volume(over) / slope, rel=1e-7)  # the difference's own error


def test_pressure_stiffens_thickens_and_packs_the_oil():
    still, pressed = hydraulic_oil(46, "45 degC"), hydraulic_oil(46, "45 degC", pressure="180 bar(g)")
    # dK/dp of mineral oils is 9 to 12, the rise in density at 180 bar about 1 %, that of viscosity 30 to 50 % (common practice).
    assert 9 < (pressed.bulk_modulus - still.bulk_modulus) / 180e5 < 12
    assert 1.005 < pressed.density / still.density < 1.015
    assert 1.3 < pressed.viscosity / still.viscosity < 1.5
    assert any("thicker" in remark for remark in pressed.remarks)
    assert pressed.givens["pressure_viscosity"].standard_uncertainty == 0.2
    assert oil_pressure_viscosity(0.04, 101325.0) == 0.0


def test_thermal_expansion_of_oil():
    # 0.00065 to 0.00075 per degree for mineral oil (common practice).
    ratio = oil_density(313.15, 876.0) / oil_density(303.15, 876.0)
    assert 0.00065 < -math.log(ratio) / 10 < 0.00075
    assert oil_density(288.15, 876.0) == pytest.approx(876.0, rel=1e-12)


def test_stated_values_replace_supplied_ones():
    fluid = hydraulic_oil(46, "15 degC", density="881 kg/m^3", bulk_modulus="1.5 GPa ± 5 %", vapour_pressure="10 Pa")
    assert fluid.density == pytest.approx(881.0, rel=1e-9)
    assert fluid.bulk_modulus == 1.5e9
    assert fluid.vapour_pressure == 10.0
    assert not {"density_correlation", "bulk_modulus_correlation"} & set(fluid.givens)
    measured = hydraulic_oil(46, "45 degC", viscosity="38 cSt", measured_at="40 degC")
    assert measured.kinematic_viscosity == pytest.approx(38e-6, rel=1e-12)
    assert any("per degree" in remark for remark in measured.remarks)


def test_oil_supplies_no_vapour_pressure_but_a_word_on_gas():
    fluid = hydraulic_oil(46)
    assert fluid.vapour_pressure is None
    assert any("0.5 to 0.8 bar(a)" in remark for remark in fluid.remarks)


@pytest.mark.parametrize(
    ("arguments", "says"),
    [
        ({}, "exactly one of grade"), ({"grade": 46, "viscosity_at_40": "46 cSt"}, "both were given"), ({"grade": 45}, "nearest are 32 and 46"),
        ({"grade": 46, "viscosity_index": 100, "viscosity_at_100": "6.8 cSt"}, "only one"), ({"grade": 46, "viscosity_at_100": "50 cSt"}, "swapped"),
        ({"viscosity_at_40": "46 mPa*s"}, "kinematic"), ({"viscosity_at_40": "-46 cSt"}, "above zero"), ({"grade": 46, "temperature": "150 degC"}, "-20 to 120 °C"),
        ({"grade": 46, "pressure": "900 bar"}, "0 to 700 bar"), ({"grade": 46, "viscosity_index": 900}, "viscosity_index"), ({"grade": "thick"}, "grade"),
        ({"grade": 46, "density": "0 kg/m^3"}, "above zero"), ({"grade": 2.2}, "viscosity_at_100"),
    ],
)  # fmt: skip
def test_bad_oil_is_one_sentence(arguments, says):
    with pytest.raises(InputError) as caught:
        hydraulic_oil(**arguments)
    assert says in str(caught.value)


@pytest.mark.parametrize("grade", [46, 46.0, "46", "VG 46", "ISO VG 46", "iso vg46"])
def test_grades_as_people_write_them(grade):
    assert hydraulic_oil(grade).kinematic_viscosity == hydraulic_oil(46).kinematic_viscosity


def test_oil_beyond_its_range_when_asked():
    fluid = hydraulic_oil(46, "-25 degC", extrapolate=True)
    assert fluid.extrapolated
    with pytest.raises(OutOfRangeError):
        hydraulic_oil(46, "-25 degC")


# -(v/p)(dp/dv)_s of nitrogen at 40 °C: computed with a library's nitrogen, four digits.
@pytest.mark.parametrize(("bar", "exponent"), [(1, 1.401), (100, 1.597), (181, 1.826), (300, 2.217)])
def test_stiffness_exponent_of_nitrogen(bar, exponent):
    assert nitrogen_stiffness_exponent(313.15, bar * 1e5) == pytest.approx(exponent, abs=6e-4)


def test_nitrogen_over_its_range_against_a_library():
    library = pytest.importorskip("CoolProp.CoolProp")
    t, p = np.meshgrid(np.linspace(200.0, 500.0, 9), np.geomspace(1e3, 100e6, 9))
    state = np.array(
        [[library.PropsSI(key, "T", a, "P", b, "Nitrogen") for a, b in zip(t.ravel(), p.ravel(), strict=True)] for key in "DA"]
    )
    density, speed = state.reshape(2, *t.shape)
    # The same published equation: only the solvers differ.
    np.testing.assert_allclose(nitrogen_density(t, p), density, rtol=1e-6)
    np.testing.assert_allclose(nitrogen_stiffness_exponent(t, p), density * speed**2 / p, rtol=1e-6)
    np.testing.assert_allclose(nitrogen_pressure(t, density), p, rtol=1e-6)


def test_nitrogen_tends_to_the_ideal_gas():
    # rho = p M/(R T) with 28.0135 g/mol; gamma = 1.4 for two atoms whose vibration is frozen, 1.3997 at 313 K with what is left of it.
    assert nitrogen_density(313.15, 1e3) == pytest.approx(1e3 * 28.0135e-3 / (8.314463 * 313.15), rel=1e-5)
    assert nitrogen_stiffness_exponent(250.0, 1e3) == pytest.approx(1.4, abs=3e-4)
    with pytest.raises(OutOfRangeError, match="absolute"):
        nitrogen_stiffness_exponent(313.15, 0.0)
    with pytest.raises(OutOfRangeError, match="temperature"):
        nitrogen_density(40.0, 1e5)


def test_gas_of_a_damper_is_conserved():
    volume = damper_gas_volume(1e-3, precharge=100e5, precharge_temperature=293.15, pressure=181e5, temperature=313.15)
    assert volume * nitrogen_density(313.15, 181e5) == pytest.approx(1e-3 * nitrogen_density(293.15, 100e5), rel=1e-12)
    # The line at the warm precharge: the gas fills the vessel.
    warm = warm_precharge(100e5, precharge_temperature=293.15, temperature=313.15)
    full = damper_gas_volume(1e-3, precharge=100e5, precharge_temperature=293.15, pressure=warm, temperature=313.15)
    assert full == pytest.approx(1e-3, rel=1e-9)
    # An ideal gas would warm up as 333.15/293.15; the real one at 100 bar by some 3 % more (computed).
    assert warm_precharge(1e5, precharge_temperature=293.15, temperature=333.15) == pytest.approx(1e5 * 333.15 / 293.15, rel=1e-3)


@given(st.floats(0.0, 0.5), st.floats(1e4, 4e7))
def test_free_gas_is_conserved_when_squeezed(share, pressure):
    squeezed = gas_fraction_at_pressure(share, pressure)
    # p V of the gas against the liquid's volume, which stays.
    assert pressure * squeezed / (1 - squeezed) == pytest.approx(101325.0 * share / (1 - share), rel=1e-9)
    assert gas_fraction_at_pressure(share, 101325.0) == pytest.approx(share, rel=1e-12)


def test_bad_gas_fractions():
    with pytest.raises(InputError, match="share of a volume"):
        gas_fraction_at_pressure(1.5, 1e5)
    with pytest.raises(InputError, match="absolute"):
        gas_fraction_at_pressure(0.01, -1e5)
