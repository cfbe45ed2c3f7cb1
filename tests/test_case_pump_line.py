"""Pump lines end to end: demo cases against their truth, the answer's folder, what helps, and bad input."""

from __future__ import annotations

import json
import re
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

import pulsekit as pk
from pulsekit.case import Workspace
from pulsekit.case.changes import apply_change, effects
from pulsekit.errors import PulsekitError

DEMO = Path(__file__).parent.parent / "data_demo"


@pytest.fixture(scope="module")
def wash_down():
    case = pk.load_case(DEMO / "wash_down.toml").with_value("uncertainty.samples", 600)
    workspace = Workspace()
    return case, pk.analyse(case, workspace=workspace), workspace


def test_the_wave_speed_and_the_flow_that_made_the_recording(wash_down):
    _, answer, _ = wash_down
    truth = json.loads((DEMO / "wash_down" / "truth.json").read_text())
    assert answer.findings["wave_speed"].value == pytest.approx(truth["wave_speed"], rel=0.01)
    # The demo's speed runs up and down while it is recorded, so single orders are those of a mean turn: within 15 %.
    made = abs(complex(*truth["source_flow"][3]))
    assert abs(answer.harmonics.coefficients[3]) == pytest.approx(made, rel=0.15)


def test_every_finding_has_words_and_a_place(wash_down):
    _, answer, _ = wash_down
    for finding in answer.findings:
        assert finding.label
        assert finding.reliance in ("usable", "indicative", "not usable")
        if "pulsation" in finding.label.lower() and finding.unit == "Pa":
            assert "p-p" in finding.label
    for name in ("largest_peak_to_peak_pressure", "position_of_largest_pressure", "peak_to_peak_pressure_at_source", "wave_speed", "allowable_ratio",
                 "least_absolute_pressure", "first_resonance"):  # fmt: skip
        assert answer.findings[name].value is not None


def test_intervals_hold_their_values_and_shares_add_up(wash_down):
    _, answer, _ = wash_down
    for name in ("largest_peak_to_peak_pressure", "wave_speed", "steady_pressure_drop"):
        finding = answer.findings[name]
        assert finding.low < finding.value < finding.high
        assert sum(finding.shares.values()) == pytest.approx(1.0, abs=0.02)
    band = answer.bands["envelope"]
    assert np.all(band.low <= band.high)


def test_units_are_those_that_were_typed(wash_down):
    _, answer, _ = wash_down
    assert answer.findings["highest_pressure"].shown_unit == "bar"
    assert answer.findings["worst_speed_within_10_percent"].shown_unit == "rpm"


def test_the_folder_re_runs_to_the_last_digit(wash_down, tmp_path):
    _, answer, workspace = wash_down
    folder = answer.write(tmp_path / "answer", pictures=False, workspace=workspace)
    again = pk.analyse(pk.load_case(folder / "case.toml"))
    for one, other in zip(answer.findings, again.findings, strict=True):
        assert (one.name, one.value, one.low, one.high) == (other.name, other.value, other.low, other.high)
    content = json.loads((folder / "answer.json").read_text(), parse_constant=lambda word: pytest.fail(word))
    assert {row["name"] for row in content["findings"]} == set(answer.findings.names)
    table = pd.read_csv(folder / "findings.csv")
    assert set(table["reliance"]) <= {"usable", "indicative", "not usable"}
    assert "pressure p-p (bar)" in pd.read_csv(folder / "profile.csv").columns


def test_another_recording_is_an_error(wash_down, tmp_path):
    _, answer, workspace = wash_down
    folder = answer.write(tmp_path / "answer", pictures=False, workspace=workspace)
    with (folder / "ramp.csv").open("a") as stream:
        stream.write("9.99,60.0,60.0,0\n")
    with pytest.raises(PulsekitError, match="SHA-256"):
        pk.analyse(pk.load_case(folder / "case.toml"), nominal_only=True)


def test_what_helps_is_measured_against_the_case(wash_down):
    case, _, workspace = wash_down
    rows = effects(case, [{"name": "nothing"}, {"name": "damper", "at": 0, "add": {"kind": "gas damper", "gas_volume": "0.05 L", "pressure": "61 bar(a)"}},
                          {"name": "nonsense", "remove": 9}], workspace=workspace)  # fmt: skip
    by_name = {row.name: row for row in rows}
    assert by_name["nothing"].ratio == pytest.approx(1.0, rel=1e-12)
    assert by_name["damper"].ratio < 0.6
    assert by_name["nonsense"].after is None
    assert "no element 9" in by_name["nonsense"].because
    assert len(apply_change(case, {"remove": 1}).get("element")) == 1


KINEMATIC = {
    "kind": "pump line", "fluid": {"kind": "hydraulic oil", "grade": 46, "temperature": "45 degC"},
    "operation": {"speed": "1480 rpm", "mean_pressure": "180 bar", "mean_flow": "38 L/min"}, "source": {"kind": "axial piston pump", "pistons": 9},
    "element": [{"kind": "pipe", "length": "2.4 m", "radius": "8 mm ± 0.1 mm", "wall_thickness": "2 mm", "young_modulus": "207 GPa"}],
    "end": {"kind": "closed"}, "uncertainty": {"samples": 300},
}  # fmt: skip


def kinematic(**changes):
    case = pk.PumpLineCase(KINEMATIC)
    for key, value in changes.items():
        case = case.with_value(key.replace("__", "."), value)
    return case


def test_a_kinematic_source_is_doubtful_and_meets_nothing():
    answer = pk.analyse(kinematic())
    assert answer.checks["source_model"].verdict == "doubtful"
    assert answer.findings["largest_peak_to_peak_pressure"].reliance == "indicative"
    assert "allowable_ratio" not in answer.findings  # no rule by default outside reciprocating pumps


def test_backflow_makes_the_ninth_order():
    bare = pk.analyse(kinematic(), nominal_only=True)
    real = pk.analyse(kinematic(source__dead_volume="2.8 mL"), nominal_only=True)
    assert bare.findings["largest_order"].value % 18 == 0
    assert real.findings["largest_order"].value == 9


def test_a_damper_below_its_precharge_fails_and_its_loss_is_stated():
    damper = {"kind": "gas damper", "nominal_volume": "0.5 L", "precharge": "200 bar(g)"}
    answer = pk.analyse(kinematic(element=[damper, *KINEMATIC["element"]]))
    assert answer.checks["damper_0"].verdict == "fails"
    working = pk.analyse(kinematic(element=[damper | {"precharge": "100 bar(g)"}, *KINEMATIC["element"]]))
    assert working.checks["damper_0"].verdict == "holds"
    assert working.findings["peak_to_peak_with_gas_lost"].value > 2 * working.findings["largest_peak_to_peak_pressure"].value
    assert "peak_to_peak_with_precharge_up_20_percent" in working.findings


def test_column_separation_is_not_usable():
    answer = pk.analyse(kinematic(operation__mean_pressure="0.5 bar", source__dead_volume="20 mL"))
    if answer.findings["least_absolute_pressure"].value is not None and answer.checks["cavitation"].verdict == "fails":
        assert answer.findings["highest_pressure"].reliance == "not usable"
        assert answer.findings["highest_pressure"].low is None


def test_ratings_are_compared():
    over = kinematic(element=[KINEMATIC["element"][0] | {"rated_pressure": "150 bar"}])
    assert pk.analyse(over).checks["ratings"].verdict == "fails"
    assert pk.analyse(kinematic()).checks["ratings"].verdict == "unknown"


def test_a_range_of_speeds_lists_what_to_avoid():
    answer = pk.analyse(kinematic(operation__speed_range=["600 rpm", "1800 rpm"]))
    assert answer.findings["worst_peak_to_peak_in_speed_range"].value >= answer.findings["largest_peak_to_peak_pressure"].value * 0.99
    assert isinstance(answer.extras["speeds_to_avoid"], list)


def test_motor_and_gear():
    case = pk.PumpLineCase({**KINEMATIC, "operation": {"motor_speed": "2960 rpm", "gear_ratio": 2, "mean_pressure": "180 bar", "mean_flow": "38 L/min"}})
    assert pk.analyse(case, nominal_only=True).response.frequency == pytest.approx(1480 / 60)


@pytest.mark.parametrize(
    ("changes", "word"),
    [
        ({"fluid__gas_fraction": 0.01}, "at which pressure"),
        ({"element": [{"kind": "pipe", "radius": "8 mm"}]}, "length"),
        ({"element": [{"kind": "pipe", "length": "-1 m", "radius": "8 mm"}]}, "above 0"),
        ({"element": [{"kind": "pipe", "length": "1 m", "nominal_size": "2"}]}, "nominal"),
        ({"source": {"kind": "axial piston pump"}}, "pistons"),
        ({"fluid": {"kind": "given", "density": "870 kg/m^3", "viscosity": "40 mPa*s", "vapour_pressure": "0.02 bar"}}, r"bar\(a\)"),
        ({"station": [{"file": str(DEMO / "wash_down" / "ramp.csv"), "column": "p1", "position": "99 m"}]}, "outside the line"),
        ({"station": [{"file": str(DEMO / "wash_down" / "ramp.csv"), "column": "p9", "position": "1 m"}]}, "p9"),
        ({"operation": {"speed": "5000 rpm", "mean_flow": "38 L/min"}, "station": [{"file": str(DEMO / "wash_down" / "ramp.csv"), "column": "p1", "position": "1 m"}]}, "rpm|Hz"),
    ],
)  # fmt: skip
def test_bad_input_is_one_sentence_with_a_remedy(changes, word):
    with pytest.raises(PulsekitError, match=word) as caught:
        pk.analyse(kinematic(**changes), nominal_only=True)
    assert "Traceback" not in str(caught.value)
    assert len(re.findall(r"\n", str(caught.value))) == 0


def test_a_line_without_end_is_refused():
    with pytest.raises(PulsekitError, match="no end"):
        pk.analyse(kinematic().without("end"), nominal_only=True)


def test_free_gas_slows_the_wave():
    dry = pk.analyse(kinematic(), nominal_only=True).findings["wave_speed"].value
    wet = pk.analyse(kinematic(fluid__gas_fraction_at_atmosphere=0.02, operation__mean_pressure="5 bar"), nominal_only=True).findings["wave_speed"].value
    assert wet < 0.8 * dry
