"""Water and glycerol-water against release check values, tables and reference libraries."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from pulsekit.errors import InputError, OutOfRangeError
from pulsekit.fluids import glycerol_solution, water
from pulsekit.fluids.glycerol_water import (
    glycerol_density,
    glycerol_mass_fraction_from_density,
    glycerol_mass_fraction_from_volume,
    glycerol_viscosity,
)
from pulsekit.fluids.pure_water import (
    WATER_TEMPERATURES,
    water_bulk_modulus,
    water_density,
    water_sound_speed,
    water_vapour_pressure,
    water_viscosity,
    water_viscosity_at,
)

CoolProp = pytest.importorskip("CoolProp.CoolProp")

PRESSURES = (101325.0, 5e6, 10e6, 20e6, 30e6, 40e6, 60e6)


def of_library(output, temperature, pressure, fluid="Water"):
    t, p = np.broadcast_arrays(np.asarray(temperature, float), np.asarray(pressure, float))
    return np.array([CoolProp.PropsSI(output, "T", a, "P", b, fluid) for a, b in zip(t.ravel(), p.ravel(), strict=True)]).reshape(t.shape)


# IAPWS R12-08 (2008), table 4: values for checking computer programs, printed to 1e-6 µPa·s.
@pytest.mark.parametrize(
    ("temperature", "density", "viscosity"), [(298.15, 998, 889.735100), (373.15, 1000, 307.883622), (433.15, 1000, 217.685358)]
)
def test_viscosity_meets_the_check_values_of_the_release(temperature, density, viscosity):
    assert water_viscosity_at(temperature, density) * 1e6 == pytest.approx(viscosity, abs=0.6e-6)


# IAPWS-95 with R12-08 at 0.101325 MPa, two libraries agreeing: t [°C], rho [kg/m^3], mu [mPa·s].
@pytest.mark.parametrize(
    ("celsius", "density", "viscosity"),
    [(10, 999.7025, 1.30590), (20, 998.2072, 1.00160), (37, 993.3298, 0.691304), (60, 983.1958, 0.466035)],
)
def test_water_at_atmospheric_pressure(celsius, density, viscosity):
    fluid = water(f"{celsius} degC")
    assert fluid.density == pytest.approx(density, rel=3e-6)  # what the density correlation states
    assert fluid.viscosity * 1e3 == pytest.approx(viscosity, rel=1e-5)  # printed digits


@pytest.mark.parametrize(("celsius", "speed", "modulus"), [(20, 1482.346, 2.1934e9), (40, 1528.904, 2.3194e9)])
def test_sound_speed_and_bulk_modulus_of_water(celsius, speed, modulus):
    kelvin = celsius + 273.15
    assert water_sound_speed(kelvin) == pytest.approx(speed, abs=0.1)  # stated accuracy of the correlation used, m/s
    assert water_bulk_modulus(kelvin) == pytest.approx(modulus, rel=3e-4)
    assert water(f"{celsius} degC").bulk_modulus == water_bulk_modulus(kelvin)


def test_water_over_its_whole_range_against_a_library():
    t = np.linspace(273.16, WATER_TEMPERATURES[1], 20)[:, None]
    p = np.array(PRESSURES)
    density, speed, viscosity = (of_library(key, t, p) for key in "DAV")
    # Tolerances are the accuracies that the sources state, at atmospheric pressure and up to 60 MPa.
    np.testing.assert_allclose(water_density(t[:, 0]), density[:, 0], rtol=3e-6)
    np.testing.assert_allclose(water_density(t, p), density, rtol=3e-4)
    np.testing.assert_allclose(water_viscosity(t, p), viscosity, rtol=7e-4)
    modulus = density * speed**2
    np.testing.assert_allclose(water_bulk_modulus(t[:, 0]), modulus[:, 0], rtol=3e-4)
    np.testing.assert_allclose(water_bulk_modulus(t, p)[:, :6], modulus[:, :6], rtol=2e-3)
    np.testing.assert_allclose(water_bulk_modulus(t, p), modulus, rtol=7e-3)
    saturation = [CoolProp.PropsSI("P", "T", a, "Q", 0, "Water") for a in t[:, 0]]
    np.testing.assert_allclose(water_vapour_pressure(t[:, 0]), saturation, rtol=5e-4)


def test_water_against_a_second_library():
    iapws = pytest.importorskip("iapws")
    for kelvin in (278.15, 293.15, 310.15, 353.15):
        state = iapws.IAPWS95(T=kelvin, P=0.101325)
        assert water_density(kelvin) == pytest.approx(state.rho, rel=3e-6)
        assert water_viscosity(kelvin) == pytest.approx(state.mu, rel=1e-4)  # that library includes the critical enhancement


def test_water_outside_its_range_raises_or_says_so():
    with pytest.raises(OutOfRangeError, match="0 to 95 °C") as caught:
        water("120 degC")
    assert caught.value.name == "temperature"
    assert (caught.value.low, caught.value.high) == WATER_TEMPERATURES
    beyond = water("97 degC", extrapolate=True)
    assert beyond.extrapolated
    assert any("extrapolated" in remark for remark in beyond.remarks)
    assert not water("20 degC").extrapolated
    with pytest.raises(OutOfRangeError, match="bar"):
        water("20 degC", pressure="900 bar(a)")


# Glycerol and water, cP at 20 and 30 °C by weight per cent: table after Segur & Oberstar, Ind. Eng. Chem. 43 (1951) 2117.
SEGUR_OBERSTAR = {
    10: (1.31, 1.03),
    30: (2.50, 1.87),
    40: (3.72, 2.72),
    50: (6.00, 4.21),
    60: (10.8, 7.19),
    70: (22.5, 14.1),
    80: (60.1, 33.9),
}


@pytest.mark.parametrize("percent", SEGUR_OBERSTAR)
def test_glycerol_viscosity_keeps_to_the_table_as_its_author_says(percent):
    for celsius, expected in zip((20, 30), SEGUR_OBERSTAR[percent], strict=True):
        fluid = glycerol_solution(mass_fraction=f"{percent} %", temperature=f"{celsius} degC")
        # Cheng (2008) states 3.5 % (abstract: 2.3 % in the mean); the table itself has three digits.
        assert fluid.viscosity * 1e3 == pytest.approx(expected, rel=0.035)


# Density at 20 °C, g/cm^3, by weight per cent: Bosart & Snoddy, Ind. Eng. Chem. 20 (1928) 1377 (from memory).
@pytest.mark.parametrize(
    ("percent", "density"),
    [(10, 1.0221), (20, 1.0469), (30, 1.0727), (40, 1.0993), (50, 1.1263), (60, 1.1538), (80, 1.2085), (100, 1.26108)],
)
def test_glycerol_density_against_a_table(percent, density):
    assert glycerol_density(percent / 100, 293.15) == pytest.approx(1e3 * density, rel=7e-4)  # 0.07 %, as the correlation states


def test_glycerol_density_against_a_library():
    for share in (0.2, 0.4, 0.6):
        for kelvin in (275.0, 293.15, 310.0):
            expected = CoolProp.PropsSI("D", "T", kelvin, "P", 101325, f"INCOMP::MGL[{share}]")  # Melinder's tables
            assert glycerol_density(share, kelvin) == pytest.approx(expected, rel=7e-4)


def test_glycerol_limits_are_the_pure_liquids():
    t = np.linspace(275.0, 350.0, 8)
    np.testing.assert_allclose(glycerol_density(0.0, t), water_density(t), rtol=5e-4)  # the mixture's own formula for water
    np.testing.assert_allclose(glycerol_viscosity(0.0, t), water_viscosity(t), rtol=0.03)  # likewise
    # Pure glycerol at 20 °C 1.41 Pa·s, at 25 °C 0.934: Segur & Oberstar 1951 (from memory).
    assert glycerol_viscosity(1.0, 293.15) == pytest.approx(1.41, rel=0.035)
    assert glycerol_viscosity(1.0, 298.15) == pytest.approx(0.934, rel=0.035)


def test_a_volume_fraction_is_not_a_mass_fraction():
    # Before mixing at 20 °C, 0.40 by volume is 0.457 by mass (densities 1.2611 and 0.9982, computed).
    assert glycerol_mass_fraction_from_volume(0.40) == pytest.approx(0.4 * 1.2611 / (0.4 * 1.2611 + 0.6 * 0.9982), abs=5e-4)
    by_volume = glycerol_solution(volume_fraction=0.40, temperature="20 degC")
    by_mass = glycerol_solution(mass_fraction=0.40, temperature="20 degC")
    assert by_volume.viscosity / by_mass.viscosity > 1.2
    assert any("0.457" in remark for remark in by_volume.remarks)


@given(st.floats(0.0, 1.0), st.floats(274.0, 370.0))
def test_density_leads_back_to_the_mass_fraction(share, kelvin):
    density = glycerol_density(share, kelvin)
    found = glycerol_mass_fraction_from_density(density, kelvin)
    # Close to pure glycerol the correlation overshoots pure glycerol by about 1e-6, and such a density counts as pure.
    assert glycerol_density(found, kelvin) == pytest.approx(density, rel=1e-12 if share < 0.95 else 3e-6)
    # Near pure glycerol the contraction has an infinite slope: several shares have the same density to rounding.
    assert found == pytest.approx(share, abs=1e-9 if share < 0.95 else 2e-2)


def test_density_of_a_weighing_at_another_temperature():
    density = glycerol_density(0.45, 293.15)
    fluid = glycerol_solution(density=f"{density} kg/m^3", density_at="20 degC", temperature="37 degC")
    assert fluid.density == pytest.approx(glycerol_density(0.45, 310.15), rel=1e-9)
    with pytest.raises(OutOfRangeError, match="none of glycerol and water"):
        glycerol_solution(density="1.5 g/cm^3")


def test_glycerol_wants_exactly_one_composition():
    with pytest.raises(InputError, match="exactly one"):
        glycerol_solution()
    with pytest.raises(InputError, match="mass_fraction and volume_fraction"):
        glycerol_solution(mass_fraction=0.4, volume_fraction=0.4)
    with pytest.raises(InputError, match=r"0\.4 or '40 %'"):
        glycerol_solution(mass_fraction=40)
    with pytest.raises(InputError, match="outside 0 to 1"):
        glycerol_solution(mass_fraction=-0.1)
    with pytest.raises(OutOfRangeError, match="0 to 100 °C"):
        glycerol_solution(mass_fraction=0.4, temperature="-5 degC")
