"""A stated wall-shear threshold: exceeded or not shown to be exceeded, never kept."""

from __future__ import annotations

import numpy as np
import pytest

import pulsekit as pk
from pulsekit.appraisal import Finding, Findings
from pulsekit.case.threshold import threshold_check

STRENGTH = (1.0, 1.0, 1.3, 1.0, 1.0)  # of each cycle: the third is the worst


@pytest.fixture(scope="module")
def case(tmp_path_factory):
    folder = tmp_path_factory.mktemp("threshold")
    time = np.arange(500) / 100
    values = 300 + 250 * np.repeat(STRENGTH, 100) * np.sin(2 * np.pi * time)
    rows = "".join(f"{t:.2f},{v:.9g}\n" for t, v in zip(time, values, strict=True))
    (folder / "run.csv").write_text("time (s),flow (mL/min)\n" + rows)
    return pk.WallShearCase(
        recording={"file": "run.csv", "signal": "flow", "quantity": "flow_rate"}, cycles={"period": "1 s", "harmonics": 1, "keep_odd": True},
        tube={"radius": "3 mm ± 3 %"}, fluid={"kind": "given", "density": "1060 kg/m^3", "viscosity": "3.5 mPa*s"}, uncertainty={"samples": 1000}, folder=folder,
    )  # fmt: skip


def worst_of(answer):
    return float(answer.per_cycle["peak_wall_shear_stress (Pa)"].max())


def test_without_a_threshold_there_is_no_row(case):
    assert "wall_shear_threshold" not in pk.analyse(case, nominal_only=True).checks


def test_between_the_worst_cycle_and_its_upper_end_it_is_exceeded(case):
    plain = pk.analyse(case)
    worst = worst_of(plain)
    peak = plain.findings["peak_wall_shear_stress"]
    assert worst > 1.1 * peak.value
    answer = pk.analyse(case.with_value("tube.wall_shear_threshold", f"{1.02 * worst:.9g} Pa"))
    check = answer.checks["wall_shear_threshold"]
    assert check.verdict == "fails"
    assert "is exceeded" in check.because
    assert "number 3" in check.because
    assert check.value == pytest.approx(worst * peak.high / peak.value, rel=1e-6)
    assert check.limit == pytest.approx(1.02 * worst)
    assert "threshold" in answer.overall
    assert "is exceeded" in answer.overall
    # A threshold is no assumption: the findings rest on the same checks as without it.
    assert [row.reliance for row in answer.findings] == [row.reliance for row in plain.findings]


def test_far_above_it_is_not_shown_to_be_exceeded_and_never_called_safe(case):
    answer = pk.analyse(case.with_value("tube.wall_shear_threshold", "50 Pa"))
    check = answer.checks["wall_shear_threshold"]
    assert check.verdict == "unknown"
    assert "not shown to be exceeded" in check.because
    assert "safe" not in (check.because + answer.overall).lower()
    assert "no basis for treatment" in check.because


def test_without_intervals_it_says_so(case):
    check = pk.analyse(case.with_value("tube.wall_shear_threshold", "150 dyn/cm^2"), nominal_only=True).checks["wall_shear_threshold"]
    assert "no interval was computed" in check.because
    assert check.limit == pytest.approx(15.0)


def test_without_a_mean_it_cannot_be_compared(case):
    none = Findings([Finding(name="peak_wall_shear_stress", label="Peak", value=None, unit="Pa", because="The mean is not known.")])
    check = threshold_check(case.with_value("tube.wall_shear_threshold", "1 Pa"), none, None)
    assert check.verdict == "unknown"
    assert "The mean is not known." in check.because
