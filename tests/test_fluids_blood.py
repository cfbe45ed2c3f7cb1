"""Blood, and flow curves of shear-thinning liquids."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from pulsekit.errors import InputError, OutOfRangeError
from pulsekit.fluids import Casson, PowerLaw, blood, flow_curve_of
from pulsekit.fluids.flow_curves import BLOOD_CARREAU, BLOOD_CARREAU_YASUDA, BLOOD_CASSON, BLOOD_POWER_LAW, CarreauYasuda
from pulsekit.fluids.pure_water import water_density, water_viscosity
from pulsekit.fluids.whole_blood import (
    blood_density,
    blood_relative_viscosity,
    blood_viscosity,
    blood_viscosity_in_tube,
    plasma_viscosity,
)


# Pries, Neuhaus & Gaehtgens, Am. J. Physiol. 263 (1992) H1770, relative apparent viscosity at a haematocrit of 0.45, computed from the printed formula.
@pytest.mark.parametrize(("micrometres", "relative"), [(10, 1.3284), (100, 2.4426), (1000, 3.1861)])
def test_relative_viscosity_in_tubes(micrometres, relative):
    assert blood_relative_viscosity(0.45, micrometres * 1e-6) == pytest.approx(relative, abs=0.6e-4)


def test_limits_of_the_relative_viscosity():
    wide = np.array([5e-6, 20e-6, 100e-6, 1e-3, np.inf])
    np.testing.assert_allclose(blood_relative_viscosity(0.0, wide), 1.0, rtol=1e-12)  # no cells: plasma
    assert blood_relative_viscosity(0.45) == pytest.approx(3.2, rel=1e-12)
    assert blood_viscosity(0.45, 310.15) == blood_viscosity_in_tube(0.45, 310.15, np.inf)


@given(st.floats(0.0, 0.64), st.floats(1e-3, 0.01), st.floats(8e-6, 5e-3))
def test_more_cells_are_thicker(share, more, wide):
    assert blood_relative_viscosity(share + more, wide) > blood_relative_viscosity(share, wide)


def test_blood_at_37_degrees_is_where_textbooks_have_it():
    # 3 to 4 mPa·s at high shear and a haematocrit of 0.45 (common practice); plasma 1.10 to 1.30 (Késmárky et al. 2008, from memory).
    assert 3.0e-3 < blood().viscosity < 4.2e-3
    assert 1.10e-3 <= plasma_viscosity(310.15) <= 1.30e-3
    # A second relation, relative viscosity exp(2.31 H) (from memory), lies within two standard uncertainties.
    for share in (0.2, 0.3, 0.4, 0.5):
        assert blood_relative_viscosity(share) == pytest.approx(np.exp(2.31 * share), rel=0.2)


def test_temperature_follows_water():
    ratio = blood_viscosity(0.45, 295.15) / blood_viscosity(0.45, 310.15)
    assert ratio == pytest.approx(water_viscosity(295.15) / water_viscosity(310.15), rel=1e-12)
    assert blood_density(0.45, 295.15) / blood_density(0.45, 310.15) == pytest.approx(
        water_density(295.15) / water_density(310.15), rel=1e-12
    )


def test_density_of_plasma_and_blood():
    # Specific gravity at 37 °C: plasma 1.0205, blood 1.0506 (Trudnowski & Rico, Clin. Chem. 20 (1974) 615).
    assert blood_density(0.0) == pytest.approx(1020.5, abs=0.05)
    assert blood_density(0.42) == pytest.approx(1050.6, abs=0.05)
    # Red cells 1090 to 1100 kg/m^3 (from memory): what the two figures imply.
    assert 1088 < blood_density(0.999999) < 1100


@pytest.mark.parametrize("haematocrit", ["45 %", "0.45", 0.45, "0.45 ± 0.02", "45 % ± 2 %"])
def test_haematocrit_as_fraction_or_per_cent(haematocrit):
    assert blood(haematocrit=haematocrit).viscosity == blood(haematocrit=0.45).viscosity


@pytest.mark.parametrize(
    ("haematocrit", "says"),
    [(45, "Write 0.45 or '45 %'"), ("45", "per cent or fraction"), (-0.1, "no share"), (450, "no share"), ("120 %", "no share")],
)
def test_haematocrit_of_45_is_asked_about(haematocrit, says):
    with pytest.raises(InputError) as caught:
        blood(haematocrit=haematocrit)
    assert says in str(caught.value)
    assert caught.value.name == "haematocrit"


def test_blood_outside_its_range():
    with pytest.raises(OutOfRangeError, match="15 to 42 °C"):
        blood(temperature="4 degC")
    with pytest.raises(OutOfRangeError, match=r"0 to 0\.65"):
        blood(haematocrit=0.7)
    cold = blood(temperature="4 degC", extrapolate=True)
    assert cold.extrapolated
    assert "extrapolated" in " ".join(cold.remarks)


def test_blood_states_its_accuracy_and_sources():
    fluid = blood(haematocrit="0.45 ± 0.02")
    assert fluid.givens["correlation"].standard_uncertainty == 0.10
    assert fluid.givens["haematocrit"].standard_uncertainty == pytest.approx(0.02, rel=1e-12)
    assert any("Pries" in source for source in fluid.sources)


def test_a_measured_viscosity_is_used_as_it_stands_with_the_change_per_degree():
    fluid = blood(haematocrit=0.45, temperature="37 degC", viscosity="4.6 mPa*s ± 3 %", measured_at="22 degC")
    assert fluid.viscosity == 0.0046
    assert "correlation" not in fluid.givens
    # Water: 0.9544 mPa·s at 22 °C and 0.6913 at 37 °C (IAPWS R12-08): -27.6 %, which is -2.1 % per degree.
    assert any("-2.1 % per degree, -28 % in all" in remark for remark in fluid.remarks)
    assert not blood(viscosity="4.6 mPa*s", measured_at="37 degC").remarks
    with pytest.raises(InputError, match="measured_at"):
        blood(measured_at="22 degC")


# Cho & Kensey, Biorheology 28 (1991) 241; values at 1 and 100 1/s computed from the parameters, mPa·s.
@pytest.mark.parametrize(("curve", "slow", "fast"), [(BLOOD_CARREAU, 27.0977, 4.70767), (BLOOD_CARREAU_YASUDA, 28.7153, 4.32580)])
def test_carreau_curves_of_blood(curve, slow, fast):
    np.testing.assert_allclose(curve.apparent_viscosity(np.array([1.0, 100.0])) * 1e3, [slow, fast], rtol=2e-6)  # printed digits


def test_flow_curves_fall_on_the_newtonian_liquid():
    rates = np.geomspace(1e-3, 1e5, 20)
    newtonian = (
        CarreauYasuda(zero_shear_viscosity=0.004, infinite_shear_viscosity=0.004, relaxation_time=2.0, index=0.3),
        CarreauYasuda(zero_shear_viscosity=0.004, infinite_shear_viscosity=0.001, relaxation_time=2.0, index=1.0),
        Casson(yield_stress=0.0, plastic_viscosity=0.004),
        PowerLaw(consistency=0.004, index=1.0),
    )
    for curve in newtonian:
        np.testing.assert_allclose(curve.apparent_viscosity(rates), 0.004, rtol=1e-14)


@pytest.mark.parametrize("curve", [BLOOD_CARREAU, BLOOD_CARREAU_YASUDA, BLOOD_CASSON, BLOOD_POWER_LAW], ids=lambda c: type(c).__name__)
def test_flow_curves_thin_and_their_stress_is_odd(curve):
    rates = np.geomspace(1e-3, 1e5, 200)
    assert np.all(np.diff(curve.apparent_viscosity(rates)) < 0)
    stress = curve.shear_stress(rates)
    assert np.all(np.diff(stress) > 0)
    np.testing.assert_allclose(stress, curve.apparent_viscosity(rates) * rates, rtol=1e-13)
    np.testing.assert_allclose(curve.shear_stress(-rates), -stress, rtol=0)
    assert curve.shear_stress(0.0) == 0.0
    assert isinstance(curve.apparent_viscosity(10.0), float)
    assert curve.source


def test_limits_of_flow_curves():
    assert BLOOD_CARREAU.apparent_viscosity(0.0) == pytest.approx(0.056, rel=1e-14)
    # (lambda rate)^(n - 1) = 1e-5.9 at 2e8 1/s.
    assert BLOOD_CARREAU.apparent_viscosity(2e8) == pytest.approx(0.00345, rel=1e-4)
    assert BLOOD_CASSON.apparent_viscosity(0.0) == np.inf
    assert BLOOD_CASSON.apparent_viscosity(1e9) == pytest.approx(BLOOD_CASSON.plastic_viscosity, rel=1e-4)  # 2 sqrt(tau_y/(k rate))
    with pytest.raises(InputError, match="yield_stress"):
        Casson(yield_stress=-0.1, plastic_viscosity=0.004)
    with pytest.raises(InputError, match="not finite"):
        BLOOD_CARREAU.apparent_viscosity([1.0, np.nan])


def test_only_blood_has_a_flow_curve_to_be_judged_by():
    assert flow_curve_of("blood") is BLOOD_CARREAU_YASUDA
    assert flow_curve_of("hydraulic oil") is None
