"""The parts of the report that need no answer: files whole or not at all, names, rows, pictures, notebook."""

from __future__ import annotations

import json
import os
import zipfile
from io import BytesIO

import nbformat
import pytest

from pulsekit.appraisal import Check, Finding
from pulsekit.errors import InputError
from pulsekit.report.drawing import new_figure, plain, to_pdf, to_svg
from pulsekit.report.notebook import notebook_bytes
from pulsekit.report.rows import check_rows, finding_rows
from pulsekit.report.writing import json_bytes, place_files, safe_name, zip_of


def test_files_take_their_places(tmp_path):
    folder = place_files(tmp_path / "deep" / "answer", {"a.txt": b"1", "figures/b.svg": b"2"})
    assert (folder / "a.txt").read_bytes() == b"1"
    assert (folder / "figures" / "b.svg").read_bytes() == b"2"
    assert [entry.name for entry in folder.parent.iterdir()] == ["answer"]


def test_second_answer_replaces_the_first_and_leaves_other_files(tmp_path):
    place_files(tmp_path / "answer", {"a.txt": b"old"})
    (tmp_path / "answer" / "mine.txt").write_text("keep")
    place_files(tmp_path / "answer", {"a.txt": b"new"})
    assert (tmp_path / "answer" / "a.txt").read_bytes() == b"new"
    assert (tmp_path / "answer" / "mine.txt").read_text() == "keep"


def test_a_failing_write_leaves_nothing(tmp_path, monkeypatch):
    def refuse(*_args, **_kwargs):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "replace", refuse)
    with pytest.raises(InputError, match="cannot be written"):
        place_files(tmp_path / "answer", {"a.txt": b"1"})
    assert not (tmp_path / "answer" / "a.txt").exists()
    assert not [entry for entry in tmp_path.iterdir() if entry.name.startswith(".")]


def test_a_file_in_the_way_is_said(tmp_path):
    (tmp_path / "answer").write_text("I am a file")
    with pytest.raises(InputError, match="is a file"):
        place_files(tmp_path / "answer", {"a.txt": b"1"})


@pytest.mark.parametrize("name", ["../../etc/passwd", "..\\..\\boot.ini", "a\x00b.csv", "", "...", "x" * 400])
def test_names_lose_their_paths(name):
    safe = safe_name(name)
    assert safe
    assert not set(safe) & set("/\\\x00<>:")
    assert len(safe) <= 120


def test_zip_is_the_same_for_the_same_files():
    files = {"b": b"2", "a": b"1"}
    assert zip_of(files) == zip_of(dict(reversed(files.items())))
    assert zipfile.ZipFile(BytesIO(zip_of(files))).namelist() == ["a", "b"]


def test_json_is_strict():
    with pytest.raises(ValueError, match="JSON"):
        json_bytes({"value": float("nan")})


def test_rows_show_the_digits_of_the_interval():
    finding = Finding(
        name="x", label="X", value=0.5, unit="Pa", low=0.41, high=0.62, shares={"tube.radius": 0.8, "recording": 0.2},
        shown_value=0.5, shown_low=0.41, shown_high=0.62, shown_unit="Pa",
    )  # fmt: skip
    (row,) = finding_rows([finding])
    assert (row.value, row.interval, row.biggest_share) == ("0.50", "0.41 to 0.62", "tube.radius 80 %")


def test_a_finding_that_is_not_usable_shows_no_interval():
    finding = Finding(name="x", label="X", value=0.5, unit="Pa", reliance="not usable", because="turbulent", shown_value=0.5, shown_unit="Pa")
    (row,) = finding_rows([finding])
    assert row.interval == "–"
    assert row.reliance == "not usable"


def test_checks_come_worst_first_with_word_and_shape():
    rows = check_rows(
        [Check(name=v, label=v, verdict=v, because="") for v in ("holds", "unknown", "fails", "doubtful")]
    )  # fmt: skip
    assert [row.verdict for row in rows] == ["fails", "doubtful", "unknown", "holds"]
    assert len({row.shape for row in rows}) == 4


def test_a_picture_is_the_same_each_time_and_fetches_nothing():
    def draw():
        figure, axes = new_figure(plain("<script>alert(1)</script> $x$"))
        axes.plot([0, 1], [0, 1])
        return figure

    first, second = to_svg(draw(), "one"), to_svg(draw(), "one")
    assert first == second
    assert "<script" not in first
    assert "http" not in first.replace("http://www.w3.org/", "")
    assert to_pdf(draw()) == to_pdf(draw())


def test_ids_of_two_pictures_do_not_meet():
    import re

    figure, axes = new_figure("a")
    axes.plot([0, 1], [0, 1])
    one = set(re.findall(r'\bid="([^"]+)"', to_svg(figure, "one")))
    two = set(re.findall(r'\bid="([^"]+)"', to_svg(figure, "two")))
    assert one
    assert not one & two


def test_notebook_text_is_only_text():
    book = json.loads(notebook_bytes("<img src=x onerror=alert(1)> **bold**", "wall shear"))
    nbformat.validate(nbformat.from_dict(book))
    source = "".join(book["cells"][0]["source"])
    assert "<img" not in source
    assert "**bold" not in source
