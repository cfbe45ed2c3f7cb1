"""Comparisons: what is common cancels, what is not adds up."""

from __future__ import annotations

import math

import numpy as np
import pytest

import pulsekit as pk
from pulsekit.errors import InputError

TIME = np.arange(0, 8, 0.01)


@pytest.fixture(scope="module")
def cases(tmp_path_factory):
    folder = tmp_path_factory.mktemp("compare")
    for name, mean in (("a", 300.0), ("b", 330.0)):
        values = mean + 200 * np.cos(2 * np.pi * 1.25 * TIME)
        rows = "\n".join(f"{t:.2f},{v:.9g}" for t, v in zip(TIME, values, strict=True))
        (folder / f"{name}.csv").write_text("time (s),flow (mL/min)\n" + rows + "\n")

    def make(name, **tube):
        return pk.WallShearCase(
            recording={"file": f"{name}.csv", "signal": "flow", "quantity": "flow_rate"}, cycles={"period": "0.8 s", "harmonics": 2},
            tube={"radius": "3.1 mm ± 3 %"} | tube, fluid={"kind": "given", "density": "1060 kg/m^3", "viscosity": "3.5 mPa*s ± 5 %"},
            uncertainty={"samples": 4000}, folder=folder,
        )  # fmt: skip

    return make


def width(finding):
    return finding.high - finding.low


def test_equal_givens_cancel(cases):
    one, other = pk.analyse(cases("b")), pk.analyse(cases("a"))
    found = pk.compare(one, other)
    assert set(found.common) == {"tube.radius", "fluid.viscosity"}
    ratio = found.findings["ratio_of_steady_wall_shear_stress"]
    # Steady wall shear is proportional to the mean flow: the common radius and viscosity leave the ratio of the flows, 330/300.
    assert ratio.value == pytest.approx(1.1, rel=1e-6)
    assert width(ratio) < 1e-3
    alone = one.findings["steady_wall_shear_stress"]
    assert width(alone) / alone.value > 0.3


def test_givens_that_differ_are_independent(cases):
    one, other = pk.analyse(cases("a", radius="3.2 mm ± 3 %")), pk.analyse(cases("a"))
    found = pk.compare(one, other)
    assert found.common == ("fluid.viscosity",)
    ratio = found.findings["ratio_of_steady_wall_shear_stress"]
    # ln ratio has the standard deviation sqrt(2) 3 x 3 % = 12.73 %; 4,000 samples give an interval's width to 3 %.
    assert math.log(ratio.high / ratio.low) == pytest.approx(2 * 1.96 * math.sqrt(2) * 0.09, rel=0.06)
    assert {"tube.radius", "tube.radius (reference)"} <= set(ratio.shares)


def test_the_same_id_makes_a_given_common(cases):
    one, other = pk.analyse(cases("a", radius="3.2 mm ± 3 %", id="image 4")), pk.analyse(cases("a", id="image 4"))
    found = pk.compare(one, other)
    assert "tube.radius" in found.common
    ratio = found.findings["ratio_of_steady_wall_shear_stress"]
    assert ratio.value == pytest.approx((3.1 / 3.2) ** 3, rel=1e-9)
    assert width(ratio) < 1e-6


def test_different_ids_make_equal_givens_independent(cases):
    found = pk.compare(pk.analyse(cases("a", id="image 4")), pk.analyse(cases("a", id="image 5")))
    assert "tube.radius" not in found.common


def test_an_answer_against_itself_changes_nothing(cases):
    answer = pk.analyse(cases("a"))
    for finding in pk.compare(answer, answer).findings:
        if finding.value is None:
            continue
        expected = 0.0 if finding.name.startswith("change_of") else 1.0
        assert finding.value == pytest.approx(expected, abs=1e-12)
        if finding.low is not None:
            assert finding.low == pytest.approx(expected, abs=1e-9)
            assert finding.high == pytest.approx(expected, abs=1e-9)


def test_without_samples_there_is_no_interval(cases):
    one, other = (pk.analyse(cases(name), nominal_only=True) for name in "ba")
    found = pk.compare(one, other)
    assert found.findings["change_of_mean_flow_rate"].low is None
    assert found.findings["change_of_mean_flow_rate"].shown_value == pytest.approx(30.0)
    assert found.findings["change_of_mean_flow_rate"].shown_unit == "mL/min"


def test_different_kinds_are_refused(cases):
    class Other:
        kind = "pump line"

    with pytest.raises(InputError, match="pump line"):
        pk.compare(pk.analyse(cases("a"), nominal_only=True), Other())


def test_lines_compare_too():
    """A changed mean flow: the wave speed is common to both, so the change is known better than either."""
    case = pk.PumpLineCase(
        fluid={"kind": "given", "density": "860 kg/m^3", "viscosity": "40 mPa*s", "bulk_modulus": "1.6 GPa"},
        operation={"speed": "600 rpm", "mean_pressure": "80 bar", "mean_flow": "40 L/min"},
        source={"kind": "plunger pump", "plungers": 3, "harmonics": 9},
        element=[{"kind": "pipe", "length": "3 m", "radius": "8 mm", "wave_speed": "1300 m/s ± 3 %"}],
        end={"kind": "restrictor", "pressure_drop": "60 bar", "flow": "40 L/min"}, uncertainty={"samples": 200},
    )  # fmt: skip
    one = pk.analyse(case.with_value("operation.mean_flow", "39 L/min"))
    found = pk.compare(one, pk.analyse(case))
    assert "element.0.wave_speed" in found.common
    name = "largest_peak_to_peak_pressure"
    assert width(found.findings[f"change_of_{name}"]) < 0.5 * width(one.findings[name])
    assert found.findings[f"change_of_{name}"].low <= found.findings[f"change_of_{name}"].value <= found.findings[f"change_of_{name}"].high


def line_case(speed):
    """A plunger pump on a closed pipe; its wave speed is uncertain."""
    return pk.PumpLineCase(
        fluid={"kind": "given", "density": "1000 kg/m^3", "viscosity": "1 mPa*s"},
        operation={"speed": "600 rpm", "mean_pressure": "100 bar", "mean_flow": "40 L/min"},
        source={"kind": "plunger pump", "plungers": 3, "rod_ratio": 5, "acting": "single"},
        element=[{"kind": "pipe", "length": "2 m", "radius": "8 mm", "wave_speed": speed}], end={"kind": "closed"}, uncertainty={"samples": 200},
    )  # fmt: skip


def test_pump_lines_share_what_is_equal():
    answer = pk.analyse(line_case("1300 m/s ± 2 %"))
    same = pk.compare(answer, answer)
    assert "element.0.wave_speed" in same.common
    assert same.findings["ratio_of_wave_speed"].value == pytest.approx(1.0)
    assert width(same.findings["ratio_of_wave_speed"]) < 1e-9
    apart = pk.compare(answer, pk.analyse(line_case("1250 m/s ± 2 %")))
    assert "element.0.wave_speed" not in apart.common
    ratio = apart.findings["ratio_of_wave_speed"]
    assert ratio.value == pytest.approx(1.04, rel=1e-3)
    # Independent speeds: the ratio's standard deviation is sqrt(2) x 2 %; 200 samples know the ends to about 12 % of the half width.
    assert math.log(ratio.high / ratio.low) == pytest.approx(2 * 1.96 * math.sqrt(2) * 0.02, rel=0.35)
