"""What a Fluid takes, keeps and refuses, and many draws of its givens at once."""

import pickle

import numpy as np
import pytest

from pulsekit.errors import InputError, UnitError
from pulsekit.fluids import FLUID_KINDS, Fluid, blood, glycerol_solution, hydraulic_oil, sample, sample_fluid, water

MADE = {
    "given": lambda: Fluid(density="1060 kg/m^3 ± 1 %", viscosity="3.5 mPa*s ± 5 %", bulk_modulus="2.2 GPa"),
    "kinematic": lambda: Fluid(density="860 kg/m^3", kinematic_viscosity="46 cSt ± 5 %"),
    "kinematic under viscosity": lambda: Fluid(density="860 kg/m^3", viscosity="46 cSt ± 5 %"),
    "blood": lambda: blood(haematocrit="0.42 ± 0.02", temperature="36 degC"),
    "blood, measured": lambda: blood(haematocrit=0.42, viscosity="3.9 mPa*s ± 3 %"),
    "water": lambda: water("25 degC"),
    "water under pressure": lambda: water("25 degC", pressure="50 bar(g)"),
    "glycerol by mass": lambda: glycerol_solution(mass_fraction="40 % ± 1 %", temperature="22 degC"),
    "glycerol by volume": lambda: glycerol_solution(volume_fraction=0.4, temperature="22 degC"),
    "glycerol by density": lambda: glycerol_solution(density="1.1 g/cm^3", temperature="22 degC", density_at="20 degC"),
    "oil": lambda: hydraulic_oil(46, "45 degC"),
    "oil under pressure": lambda: hydraulic_oil(46, "45 degC", pressure="180 bar(g)", density="876 kg/m^3"),
    "oil, measured": lambda: hydraulic_oil(46, "45 degC", viscosity="35 cSt", bulk_modulus="1.6 GPa"),
}


@pytest.mark.parametrize("name", MADE)
def test_drawing_the_givens_at_their_values_gives_the_fluid(name):
    fluid = MADE[name]()
    density, viscosity, modulus = sample_fluid(fluid, {key: np.full(3, given.value) for key, given in fluid.givens.items()})
    np.testing.assert_allclose(np.broadcast_to(density, 3), fluid.density, rtol=1e-12)
    # A measured kinematic viscosity is converted when it is given, with the density of the run.
    np.testing.assert_allclose(np.broadcast_to(viscosity, 3), fluid.viscosity, rtol=1e-12)
    if fluid.bulk_modulus is None:
        assert modulus is None
    else:
        np.testing.assert_allclose(np.broadcast_to(modulus, 3), fluid.bulk_modulus, rtol=1e-12)


@pytest.mark.parametrize("name", MADE)
def test_fluids_survive_pickling_and_a_change_of_name(name):
    fluid = MADE[name]()
    again = pickle.loads(pickle.dumps(fluid))
    assert again == fluid
    assert dict(again.givens) == dict(fluid.givens)
    assert (again.remarks, again.sources) == (fluid.remarks, fluid.sources)
    named = fluid.replace(name="bath 3")
    assert named.name == "bath 3"
    assert (named.density, named.viscosity, named.bulk_modulus, named.kind) == (
        fluid.density,
        fluid.viscosity,
        fluid.bulk_modulus,
        fluid.kind,
    )
    assert dict(named.givens) == dict(fluid.givens)
    with pytest.raises(AttributeError):
        fluid.density = 1.0


@pytest.mark.parametrize("name", MADE)
def test_correlations_state_their_accuracy_and_where_they_come_from(name):
    fluid = MADE[name]()
    if fluid.kind == "given":
        return
    assert fluid.sources
    assert "viscosity" in fluid.givens or fluid.givens["correlation"].standard_uncertainty > 0
    assert fluid.kind in FLUID_KINDS


def test_the_correlation_factor_scales_the_viscosity():
    fluid = blood()
    factors = np.array([0.9, 1.0, 1.1])
    np.testing.assert_allclose(sample_fluid(fluid, {"correlation": factors})[1], factors * fluid.viscosity, rtol=1e-12)


def test_sampling_names_what_is_missing():
    with pytest.raises(InputError, match="needs temperature"):
        sample("blood", {"haematocrit": 0.45})
    with pytest.raises(InputError, match="not known"):
        sample("honey", {})


def test_one_viscosity_and_only_one():
    with pytest.raises(InputError, match="neither was given"):
        Fluid(density=1000.0)
    with pytest.raises(InputError, match="both were given"):
        Fluid(density=1000.0, viscosity=1e-3, kinematic_viscosity=1e-6)


def test_either_kind_of_viscosity_under_viscosity_is_remarked():
    fluid = Fluid(density="860 kg/m^3", viscosity="46 cSt")
    assert fluid.viscosity == pytest.approx(46e-6 * 860, rel=1e-14)
    assert any("kinematic" in remark and "860" in remark for remark in fluid.remarks)
    other = Fluid(density="860 kg/m^3", kinematic_viscosity="39.56 mPa*s")
    assert other.kinematic_viscosity == pytest.approx(46e-6, rel=1e-12)
    assert any("dynamic" in remark for remark in other.remarks)
    assert not Fluid(density="860 kg/m^3", kinematic_viscosity="46 cSt").remarks


@pytest.mark.parametrize(
    ("arguments", "name"),
    [
        ({"density": -1000.0}, "density"), ({"density": 0.0}, "density"), ({"density": float("nan")}, "density"), ({"density": "3 mm"}, "density"),
        ({"viscosity": 0.0}, "viscosity"), ({"viscosity": "-3 mPa*s"}, "viscosity"), ({"viscosity": "3 mm"}, "viscosity"), ({"viscosity": "inf"}, "viscosity"),
        ({"bulk_modulus": "0 Pa"}, "bulk_modulus"), ({"bulk_modulus": "3 m"}, "bulk_modulus"), ({"vapour_pressure": "-0.5 bar(a)"}, "vapour_pressure"),
        ({"temperature": "3 m"}, "temperature"), ({"temperature": -3.0}, "temperature"),
    ],
)  # fmt: skip
def test_what_is_not_physical_is_an_error_that_names_it(arguments, name):
    with pytest.raises(InputError) as caught:
        Fluid(**({"density": 1000.0, "viscosity": 1e-3} | arguments))
    assert caught.value.name == name
    assert name in str(caught.value)


def test_wrong_dimensions_are_unit_errors():
    with pytest.raises(UnitError):
        Fluid(density="3 mm", viscosity=1e-3)


def test_vapour_pressure_is_absolute_unless_it_says_gauge():
    assert Fluid(density=1000.0, viscosity=1e-3, vapour_pressure="2.3 kPa").vapour_pressure == 2300.0
    assert Fluid(density=1000.0, viscosity=1e-3, vapour_pressure="-0.99 bar(g)").vapour_pressure == pytest.approx(2325.0, rel=1e-12)


def test_unusual_values_are_remarked_and_usual_ones_not():
    assert any("unusual" in remark for remark in Fluid(density="1.06 kg/m^3", viscosity="3.5 mPa*s").remarks)
    assert any("unusual" in remark for remark in Fluid(density="1060 kg/m^3", viscosity="3500 Pa*s").remarks)
    assert not Fluid(density="1060 kg/m^3", viscosity="3.5 mPa*s").remarks


def test_a_viscosity_measured_at_another_temperature_is_remarked():
    fluid = Fluid(density=1060.0, viscosity="3.5 mPa*s", temperature="37 degC", measured_at="22 degC")
    assert any("22.0 °C" in remark and "37.0 °C" in remark and "per degree" in remark for remark in fluid.remarks)
    assert any("not stated" in remark for remark in Fluid(density=1060.0, viscosity="3.5 mPa*s", measured_at="22 degC").remarks)
    assert not Fluid(density=1060.0, viscosity="3.5 mPa*s", measured_at="22 degC", temperature="22 degC").remarks


def test_replacing_values():
    fluid = Fluid(density="1000 kg/m^3", kinematic_viscosity="2 cSt")
    assert fluid.replace(density="1100 kg/m^3").viscosity == pytest.approx(2.2e-3, rel=1e-12)
    assert fluid.replace(viscosity="5 mPa*s").kinematic_viscosity == pytest.approx(5e-6, rel=1e-12)
    assert fluid.replace(bulk_modulus="2 GPa").bulk_modulus == 2e9
    with pytest.raises(InputError, match="no 'colour'"):
        fluid.replace(colour="red")
    changed = blood().replace(density=1060.0)
    assert (changed.density, changed.viscosity, changed.kind) == (1060.0, blood().viscosity, "given")
    assert changed.givens["viscosity"].standard_uncertainty == pytest.approx(0.1 * changed.viscosity, rel=1e-12)
    # The oil's stated density holds at 15 °C: it must not come back as that of the line.
    oil = hydraulic_oil(46, "60 degC", density="880 kg/m^3")
    assert oil.replace(temperature="61 degC").density == oil.density
