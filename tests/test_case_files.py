"""Case files: what they hold comes back; what is wrong in them is said in one sentence with its place and remedy."""

from __future__ import annotations

import pickle
import tomllib

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pulsekit.case import WallShearCase, load_case
from pulsekit.case.schema import KEYS, key_of, sections_of
from pulsekit.errors import CaseError, InputError, MissingFileError, PulsekitError, UnitError

GOOD = """\
kind = "wall shear"
title = "Bench run 12"
[recording]
file = "run12.csv"
signal = "flow"
quantity = "flow_rate"
scale_uncertainty = "2 %"
[cycles]
leave_out = [3]
[tube]
radius = "3.1 mm ± 0.1 mm"
[fluid]
kind = "blood"
haematocrit = "0.45 ± 0.02"
temperature = "37 degC"
"""
LINE = """\
kind = "pump line"
[fluid]
kind = "hydraulic oil"
grade = 46
temperature = "45 degC"
[operation]
speed = "1480 rpm"
mean_pressure = "180 bar"
mean_flow = "38 L/min"
[source]
kind = "axial piston pump"
pistons = 9
[[element]]
kind = "pipe"
length = "2.4 m"
radius = "8 mm ± 0.1 mm"
wall_thickness = "2 mm"
young_modulus = "207 GPa"
[end]
kind = "closed"
"""


def written(tmp_path, text):
    path = tmp_path / "case.toml"
    path.write_text(text, encoding="utf-8")
    return path


@pytest.mark.parametrize("text", [GOOD, LINE])
def test_a_saved_case_is_the_same_case(tmp_path, text):
    case = load_case(written(tmp_path, text))
    again = load_case(case.save(tmp_path / "again.toml"))
    assert again == case
    assert again.to_dict() == tomllib.loads(text)
    assert pickle.loads(pickle.dumps(case)) == case


def test_values_are_read_with_their_uncertainty(tmp_path):
    case = load_case(written(tmp_path, GOOD))
    radius = case.given("tube.radius")
    # 3.1 mm and 0.1 mm in metres; the only error is that of the decimal conversion
    assert radius.value == pytest.approx(3.1e-3, rel=1e-14)
    assert radius.standard_uncertainty == pytest.approx(1e-4, rel=1e-12)
    assert case.get("cycles.leave_out") == [3]
    assert case.maybe("tube.length") is None


def test_a_change_gives_a_new_case(tmp_path):
    case = load_case(written(tmp_path, GOOD))
    changed = case.with_value("tube.radius", "3.2 mm")
    assert case.get("tube.radius") == "3.1 mm ± 0.1 mm"
    assert changed.get("tube.radius") == "3.2 mm"
    assert changed.without("tube.radius").get("tube.radius") is None


def test_a_bad_change_leaves_the_case_as_it_was(tmp_path):
    case = load_case(written(tmp_path, GOOD))
    before = case.to_dict()
    with pytest.raises(InputError):
        case.with_value("tube.radius", "-3 mm")
    with pytest.raises(CaseError):
        case.with_value("tube.raduis", "3 mm")
    assert case.to_dict() == before


def test_paths_stay_right_when_a_case_moves(tmp_path):
    (tmp_path / "a").mkdir()
    case = load_case(written(tmp_path, GOOD))
    moved = load_case(case.save(tmp_path / "a" / "case.toml"))
    assert moved.file_path("recording.file").resolve() == (tmp_path / "run12.csv").resolve()


# Each row: what is replaced in GOOD, by what, and words that the sentence must hold.
BAD = [
    ('radius = "3.1 mm ± 0.1 mm"', 'radius = "-3.1 mm"', ["tube.radius", "above 0"]),
    ('radius = "3.1 mm ± 0.1 mm"', 'radius = "0 mm"', ["tube.radius", "above 0"]),
    ('radius = "3.1 mm ± 0.1 mm"', 'radius = "3.1 kg"', ["tube.radius", "length"]),
    ('radius = "3.1 mm ± 0.1 mm"', 'radius = "3.1 furlongs per cat"', ["tube.radius"]),
    ('radius = "3.1 mm ± 0.1 mm"', 'raduis = "3.1 mm"', ["raduis", "did you mean 'radius'"]),
    ('haematocrit = "0.45 ± 0.02"', "haematocrit = 45", ["haematocrit", "per cent or fraction"]),
    ('haematocrit = "0.45 ± 0.02"', 'haematocrit = "45"', ["haematocrit", "per cent or fraction"]),
    ('quantity = "flow_rate"', 'quantity = "flowrate"', ["flowrate", "flow_rate"]),
    ("[tube]", "[tub]", ["tub", "did you mean 'tube'"]),
    ("leave_out = [3]", "leave_out = 3", ["cycles.leave_out", "list"]),
    ("leave_out = [3]", "leave_out = [0]", ["cycles.leave_out"]),
    ('kind = "blood"', 'kind = "bloood"', ["bloood", "blood"]),
    ('temperature = "37 degC"', 'temperature = "37 bar"', ["temperature"]),
    ('kind = "wall shear"', 'kind = "wall"', ["wall shear", "pump line"]),
    ('kind = "wall shear"\n', "", ["kind"]),
    ("leave_out = [3]", "harmonics = -3", ["harmonics", "whole number"]),
    ("leave_out = [3]", "harmonics = true", ["harmonics", "whole number"]),
]


@pytest.mark.parametrize(("old", "new", "words"), BAD, ids=[new or "left out" for _, new, _ in BAD])
def test_bad_keys_are_refused_with_place_and_remedy(tmp_path, old, new, words):
    assert old in GOOD
    path = written(tmp_path, GOOD.replace(old, new))
    with pytest.raises(PulsekitError) as caught:
        load_case(path)
    sentence = str(caught.value)
    assert "\n" not in sentence
    assert str(path) in sentence
    for word in words:
        assert word in sentence
    assert isinstance(caught.value, ValueError)


@pytest.mark.parametrize(
    ("old", "new", "line"),
    [('radius = "3.1 mm ± 0.1 mm"', 'raduis = "3.1 mm"', 11), ('radius = "3.1 mm ± 0.1 mm"', 'radius = "3.1 kg"', 11),
     ('kind = "blood"', 'kind = "bloood"', 13), ('signal = "flow"', "signal = [1]", 5), ("[cycles]", "[cycls]", 8)],
)  # fmt: skip
def test_the_line_is_named(tmp_path, old, new, line):
    with pytest.raises(PulsekitError, match=f"line {line}\\b"):
        load_case(written(tmp_path, GOOD.replace(old, new)))


def test_a_wrong_dimension_is_a_unit_error(tmp_path):
    with pytest.raises(UnitError, match=r"tube\.radius"):
        load_case(written(tmp_path, GOOD.replace('"3.1 mm ± 0.1 mm"', '"3.1 mPa*s"')))


def test_a_pressure_that_must_say_its_reference(tmp_path):
    with pytest.raises(InputError, match=r"bar\(a\)"):
        load_case(written(tmp_path, LINE.replace("grade = 46", 'grade = 46\nvapour_pressure = "0.04 bar"')))


def test_missing_files(tmp_path):
    with pytest.raises(MissingFileError, match=r"nowhere\.toml"):
        load_case(tmp_path / "nowhere.toml")
    with pytest.raises(MissingFileError, match="folder"):
        load_case(tmp_path)
    path = tmp_path / "broken.toml"
    path.write_text('kind = "wall shear\n')
    with pytest.raises(CaseError, match="TOML"):
        load_case(path)
    path.write_bytes(b"\xff\xfe\x00k")
    with pytest.raises(CaseError, match="UTF-8"):
        load_case(path)


def test_a_save_that_fails_leaves_the_old_file(tmp_path, monkeypatch):
    import os

    case = load_case(written(tmp_path, GOOD))
    path = case.save(tmp_path / "kept.toml")
    before = path.read_text()

    def refuse(*_args):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "replace", refuse)
    with pytest.raises(InputError, match="cannot be written"):
        case.with_value("title", "other").save(path)
    assert path.read_text() == before
    assert sorted(p.name for p in tmp_path.iterdir()) == ["case.toml", "kept.toml"]


@settings(max_examples=60, deadline=None)
@given(st.text(max_size=40))
def test_any_title_comes_back(text):
    from pulsekit.case import case_from_toml

    if any(0xD800 <= ord(c) <= 0xDFFF for c in text):
        return
    case = WallShearCase({"title": text})
    assert case_from_toml(case.to_toml()).get("title") == text


def test_every_key_has_help_and_a_known_way_to_be_read():
    for kind in ("wall shear", "pump line"):
        for section in sections_of(kind):
            for name, key in KEYS[section].items():
                assert key.help, f"{section}.{name}"
                assert key.takes in ("quantity", "text", "whole", "number", "flag", "list", "table")
    assert key_of("element.3.element.0.length") is KEYS["element[]"]["length"]


AGREED_KEYS = (
    "recording.file", "recording.signal", "recording.time", "recording.unit", "recording.sample_rate", "recording.decimal", "recording.delimiter",
    "recording.encoding", "recording.quantity", "recording.scale_uncertainty", "recording.averaged_over", "recording.delay", "recording.calibration",
    "recording.zero", "recording.offset_uncertainty", "recording.doppler_angle", "recording.angle_corrected", "recording.stamp", "recording.upstream",
    "recording.downstream", "recording.distance", "recording.wave_speed", "recording.mean_flow", "recording.sha256", "recording.computed_with_radius",
    "recording.forward", "recording.reverse", "recording.invert", "recording.spectral_broadening", "recording.sample_volume", "recording.block",
    "recording.background_velocity", "recording.low_pass", "recording.low_pass_order", "recording.natural_frequency", "recording.damping_ratio",
    "recording.antialias_filter", "recording.coupling", "recording.high_pass", "cycles.period", "cycles.onsets", "cycles.leave_out",
    "cycles.harmonics", "cycles.align", "tube.section", "tube.radius", "tube.diameter", "tube.outer_diameter", "tube.wall_thickness", "tube.length",
    "tube.distance_from_inlet", "tube.bend_radius", "tube.wall_motion", "fluid.kind", "fluid.haematocrit", "fluid.temperature", "fluid.density",
    "fluid.viscosity", "fluid.mass_fraction", "fluid.volume_fraction", "fluid.grade", "fluid.viscosity_at_40", "fluid.viscosity_at_100",
    "fluid.viscosity_index", "fluid.measured_at", "fluid.gas_fraction_at_atmosphere", "fluid.gas_fraction_at_line_pressure", "fluid.vapour_pressure",
    "fluid.gas_release_pressure", "fluid.bulk_modulus", "uncertainty.samples", "uncertainty.seed", "report.units", "station.0.name", "station.0.file",
    "station.0.column", "station.0.position", "station.0.height", "station.0.calibration", "station.0.zero", "station.0.zero_file",
    "station.0.zero_between", "station.0.scale_uncertainty", "station.0.offset_uncertainty", "station.0.delay", "station.0.coupling",
    "station.0.low_pass", "station.0.tapping_length", "station.0.tapping_bore", "operation.speed", "operation.motor_speed", "operation.gear_ratio",
    "operation.mean_pressure", "operation.mean_flow", "operation.speed_range", "operation.minimum_inlet_pressure", "source.kind", "source.pistons",
    "source.dead_volume", "source.port_opening_angle", "source.file", "source.signal", "source.station", "source.trigger_angle",
    "source.pulses_per_revolution", "source.trigger_ratio", "element.0.kind", "element.0.length", "element.0.nominal_volume", "element.0.precharge",
    "element.0.precharge_temperature", "element.0.polytropic_exponent", "element.0.rated_pressure", "element.0.relief_setting",
    "element.0.nominal_size", "element.0.schedule", "end.kind",
)  # fmt: skip


@pytest.mark.parametrize("dotted", AGREED_KEYS)
def test_agreed_keys_exist(dotted):
    assert key_of(dotted) is not None
