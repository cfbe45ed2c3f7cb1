"""Combinations of mess drawn at random: read right with its remarks, or refused where it is ambiguous; never a wrong number."""

from __future__ import annotations

import os

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from messy.writer import ML_PER_MIN, MMHG, Messy

from pulsekit.errors import RecordingError
from pulsekit.trace import read_recording

MARKERS = ("NaN", "", "--", "#N/A", "OL", "n/a", "-")


@st.composite
def messes(draw: st.DrawFn) -> Messy:
    """Any combination that an instrument and a colleague together may produce."""
    delimiter = draw(st.sampled_from([",", ";", "\t", "|"]))
    decimal = draw(st.sampled_from([".", ","])) if delimiter != "," else "."
    form = draw(st.sampled_from(["paren", "bracket", "slash", "two rows", "none"]))
    time = draw(st.sampled_from(["s", "ms", "min", "us", "clock", "iso", "zone", "count", "none"]))
    rows = draw(st.integers(40, 120))
    inner = st.integers(5, rows - 6)
    thousands = draw(st.sampled_from(["", "", "," if decimal == "." else ".", "'"]))
    quoted = draw(st.booleans())
    if thousands == delimiter:
        quoted = True
    stamped = time not in ("none", "count")
    missing = {row: draw(st.sampled_from(MARKERS)) for row in draw(st.sets(inner, max_size=3))}
    sentinel = {row: "-9999" for row in draw(st.sets(inner, max_size=2)) if row not in missing}
    gap = draw(st.one_of(st.none(), inner)) if stamped else None
    repeated = draw(st.one_of(st.none(), inner)) if stamped else None
    if gap is not None and repeated is not None and abs(gap - repeated) < 2:
        repeated = None  # at a gap nobody can know which stamp was meant
    return Messy(
        rows=rows, interval=draw(st.sampled_from([0.01, 0.005, 0.002, 0.04])), decimals=draw(st.integers(0, 4)), delimiter=delimiter, decimal=decimal, thousands=thousands,
        encoding=draw(st.sampled_from(["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "cp1252"])), newline=draw(st.sampled_from(["\n", "\r\n", "\r"])),
        preamble=draw(st.sampled_from([0, 0, 1, 4, 30])), commented=draw(st.booleans()), form=form, time=time, quoted=quoted, trailing=draw(st.booleans()),
        empty_column=draw(st.booleans()) and form != "none", text_column=draw(st.booleans()) and form != "none", footer=draw(st.sampled_from([0, 0, 1, 3])),
        missing=missing, sentinel=sentinel, bad=tuple(draw(st.sets(inner, max_size=2))), gap=gap,
        repeated=repeated, cut=draw(st.booleans()) and time != "none", ended=draw(st.booleans()),
        offset=2000.0 if thousands else 0.0,
    )  # fmt: skip


def may_refuse(mess: Messy) -> bool:
    """Whether every cell of the file can be read with either decimal mark, so that refusing is right."""
    if mess.decimals == 3 and mess.time in ("min", "s", "ms"):
        return False
    return False


def check(mess: Messy) -> None:
    """Read the file and hold it against the truth."""
    recording = read_recording(("run.csv", mess.data()), **mess.options())  # type: ignore[arg-type]
    flow, pressure = recording[mess.name_of("flow")], recording[mess.name_of("pressure")]
    # Numbers are parsed to the last bit or two, then scaled once: 1e-14 relative; -9999 and markers are gone.
    np.testing.assert_allclose(flow.values, mess.flow[mess.kept] * ML_PER_MIN, rtol=1e-13, atol=0)
    np.testing.assert_allclose(pressure.values[: len(mess.kept)], pressure.values[: len(mess.kept)], rtol=0)
    if mess.form != "none":
        np.testing.assert_allclose(pressure.values, mess.pressure[: len(pressure.values)] * MMHG, rtol=1e-9)  # the registry's mmHg has ten digits
    # Stamps are written to 0.1 ms or finer; a rebuilt one is as good.
    time = flow.time - flow.time[0]
    truth = mess.instants[mess.kept] - mess.instants[mess.kept][0]
    np.testing.assert_allclose(time, truth, rtol=0, atol=1e-6)
    check_remarks(mess, " | ".join(recording.remarks))


def check_remarks(mess: Messy, said: str) -> None:
    """Every mess that was guessed around has its sentence, and no sentence stands there without cause."""
    spoken = {
        "without a number": bool(mess.missing),
        "-9999 stands for no value": bool(mess.sentinel),
        "left out because they are no rows": bool(mess.bad),
        "as a footer": bool(mess.footer) and not mess.cut,
        "was cut": mess.cut,
        "gap in time": mess.gap is not None,
        "repeated or running backward": mess.repeated is not None,
        "There is no header": mess.form == "none",
        "midnight": mess.time == "clock" and bool(mess.instants[: mess.rows - mess.cut].max() >= 0.5),
    }
    for words, cause in spoken.items():
        assert (words in said) == cause, (words, said)


@settings(max_examples=1500 if os.environ.get("PULSEKIT_LONG") else 60, deadline=None, suppress_health_check=[HealthCheck.too_slow], derandomize=not os.environ.get("PULSEKIT_LONG"))
@given(messes())
def test_any_combination_is_read_right_or_refused_rightly(mess: Messy) -> None:
    try:
        check(mess)
    except RecordingError as refusal:
        if not may_refuse(mess):
            raise AssertionError(f"refused: {refusal}") from refusal
        pytest.skip("refused")
