"""A table of kinds of files: each with the truth it must give, or the refusal it must meet, and the remark it must carry.

All truths are known because the files are written here; no outside numbers are needed.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pytest

from pulsekit.errors import InputError, MissingColumnError, MissingFileError, PulsekitError, RecordingError, StoppedError, UnitError
from pulsekit.trace import Recording, read_recording

T = np.arange(60) * 0.01
FLOW = np.round(60 + 20 * np.sin(2 * np.pi * T / 0.3), 2)
ML_PER_MIN = 1e-6 / 60


def rows(time: Any = T, flow: Any = FLOW, *, mark: str = ",", decimal: str = ".", stamp: str = "{:.2f}", value: str = "{:.2f}", end: str = "\n") -> str:
    """Two columns as text."""
    return "".join((stamp.format(t) + mark + value.format(q)).replace("." if mark != "." else "\0", decimal) + end for t, q in zip(time, flow, strict=True))


HEAD = "time (s),flow (mL/min)\n"
PLAIN = HEAD + rows()


@dataclass
class Kind:
    """A file, what a reader is told, and what must come of it."""

    name: str
    text: str | bytes
    told: dict[str, Any] = field(default_factory=dict)
    time: Any = None  # true instants from the first; None: T
    flow: Any = None  # true values in mL/min; None: FLOW
    column: str = "flow"
    factor: float = ML_PER_MIN
    remark: str = ""  # pattern that one remark must match
    silent: bool = False  # no remark at all
    refusal: str = ""  # pattern of the refusal, which names file and place
    check: Callable[[Recording], bool] | None = None


def euro(text: str) -> str:
    """The same table with semicolons and decimal commas."""
    return text.replace(",", ";").replace(".", ",")


def lines_with(change: dict[int, str]) -> str:
    """The plain file with some rows replaced (row -> text) ."""
    out = rows().splitlines()
    for row, text in change.items():
        out[row] = text
    return HEAD + "\n".join(out) + "\n"


COARSE = np.floor(np.arange(400) / 2) / 1e4
FRAMES = ";".join(str(frame) for frame in range(1, 9))
FRAME_TIMES = ";".join(str(50 * frame) for frame in range(8))
FRAME_FLOW = ";".join(f"{10 + frame},5" for frame in range(8))
BLOCK = f"Frame;{FRAMES}\nTrigger time (ms);{FRAME_TIMES}\nFlow (mL/min);{FRAME_FLOW}\nArea (mm2);" + ";".join(["31,2"] * 8) + "\n"

READ = [
    Kind("plain", PLAIN, silent=True),
    Kind("semicolons and decimal commas", euro("time (s),flow (mL/min)\n") + rows(mark=";", decimal=","), remark="Decimal mark is the comma"),
    Kind("tabs", "time (s)\tflow (mL/min)\n" + rows(mark="\t"), silent=True),
    Kind("bars", "time (s)|flow (mL/min)\n" + rows(mark="|"), silent=True),
    Kind("runs of blanks", "  time   flow\n" + rows(mark="    "), {"units": {"flow": "mL/min"}}, remark="'time' has no unit: taken as seconds"),
    Kind("blanks with units in the header", "time (s)   flow (mL/min)\n" + rows(mark="  "), silent=True),
    Kind("CR LF", PLAIN.replace("\n", "\r\n"), silent=True),
    Kind("CR", PLAIN.replace("\n", "\r"), silent=True),
    Kind("byte-order mark", PLAIN.encode("utf-8-sig"), silent=True),
    Kind("UTF-16", PLAIN.encode("utf-16"), silent=True),
    Kind("UTF-16 little-endian, no mark", PLAIN.encode("utf-16-le"), remark="taken as utf-16-le"),
    Kind("UTF-16 big-endian, no mark", PLAIN.encode("utf-16-be"), remark="taken as utf-16-be"),
    Kind("CP1252", ("Patient: Müller\ntime (µs),flow (µL/min)\n" + rows(T * 1e6, stamp="{:.0f}")).encode("cp1252"), factor=ML_PER_MIN / 1e3, remark="taken as cp1252"),
    Kind("told encoding", ("time (s),flow (µL/min)\n" + rows()).encode("cp1252"), {"encoding": "latin-1"}, factor=ML_PER_MIN / 1e3, silent=True),
    Kind("CP1252 only in the footer", (PLAIN * 1 + "Temperatur: 37 °C\n").encode("cp1252"), remark="footer"),
    Kind("preamble", "Instrument: bench\nSampling rate: 100 Hz\nRun,7\n\n" + PLAIN, check=lambda r: r.preamble["Instrument"] == "bench" and r.preamble["Run"] == "7"),
    Kind("name row and unit row", "time,flow\n(s),(mL/min)\n" + rows(), silent=True),
    Kind("name row and bare unit row", "time,flow\ns,mL/min\n" + rows(), silent=True),
    Kind("no header", rows(), {"units": {"column 1": "s", "column 2": "mL/min"}}, column="column 2", remark="There is no header"),
    Kind("one column, no header, rate told", "".join(f"{q:.2f}\n" for q in FLOW), {"sample_rate": "100 Hz", "units": {"column 1": "mL/min"}}, column="column 1", remark="no header"),
    Kind("one column of decimal commas", "flow\n" + "".join(f"{q:.2f}\n".replace(".", ",") for q in FLOW), {"sample_rate": 100, "units": {"flow": "mL/min"}}, remark="comma"),
    Kind("rate in the preamble", "Sample rate: 100 Hz\nflow (mL/min)\n" + "".join(f"{q:.2f}\n" for q in FLOW), remark="100 Hz taken from the preamble"),
    Kind("interval in the preamble", "Sample interval (ms): 10\nflow (mL/min)\n" + "".join(f"{q:.2f}\n" for q in FLOW), remark="100 Hz taken from the preamble"),
    Kind("sample number with a rate", "sample,flow (mL/min)\n" + rows(T * 100, stamp="{:.0f}"), {"sample_rate": "100 Hz"}, silent=True),
    Kind("milliseconds", "time (ms),flow (mL/min)\n" + rows(T * 1e3, stamp="{:.0f}"), silent=True),
    Kind("minutes", "time (min),flow (mL/min)\n" + rows(T / 60, stamp="{:.8f}"), silent=True),
    Kind("microseconds", "time (µs),flow (mL/min)\n" + rows(T * 1e6, stamp="{:.0f}"), silent=True),
    Kind("a column called ms", "ms,flow (mL/min)\n" + rows(T * 1e3, stamp="{:.0f}"), remark="read as ms"),
    Kind("time unit told", "time,flow (mL/min)\n" + rows(T * 1e3, stamp="{:.0f}"), {"units": {"time": "ms"}}, silent=True),
    Kind("units at the end of names", "time_ms,flow_ml_min\n" + rows(T * 1e3, stamp="{:.0f}"), remark="taken from the ending of its header 'flow_ml_min'"),
    Kind("name/unit", "t/s,flow/(mL/min)\n" + rows(), silent=True),
    Kind("powers in units", "time (s),flow (mL·min⁻¹)\n" + rows(), silent=True),
    Kind("capitals", "TIME (MS),FLOW (ML/MIN)\n" + rows(T * 1e3, stamp="{:.0f}"), column="FLOW", remark="'ML/MIN' read as mL/min"),
    Kind("units in the cells", "time,flow\n" + rows(stamp="{:.2f} s", value="{:.2f} mL/min"), remark="unit mL/min stands in its cells"),
    Kind("clock times", "time,flow (mL/min)\n" + "".join(f"10:15:{t:05.2f},{q:.2f}\n" for t, q in zip(T, FLOW, strict=True)), silent=True),
    Kind("clock over midnight", "time,flow (mL/min)\n" + "".join(f"{'23:59:59' if t < 0.295 else '00:00:00'}.{round(t * 100 + 70) % 100:02d},{q:.2f}\n" for t, q in zip(T, FLOW, strict=True)), remark="midnight"),
    Kind("afternoon", "time,flow (mL/min)\n" + "".join(f"12:59:59.{round(t * 100):02d} PM,{q:.2f}\n" for t, q in zip(T, FLOW, strict=True)), silent=True),
    Kind("minutes and seconds", "time,flow (mL/min)\n" + "".join(f"02:{t:05.2f},{q:.2f}\n" for t, q in zip(T, FLOW, strict=True)), remark="minutes and seconds"),
    Kind("ISO", "time,flow (mL/min)\n" + "".join(f"2024-05-31T10:15:{t:06.3f},{q:.2f}\n" for t, q in zip(T, FLOW, strict=True)), silent=True),
    Kind("ISO with zone", "time,flow (mL/min)\n" + "".join(f"2024-05-31 10:15:{t:06.3f}+02:00,{q:.2f}\n" for t, q in zip(T, FLOW, strict=True)), silent=True),
    Kind("date and clock in two columns", "date,time,flow (mL/min)\n" + "".join(f"31.05.2024,10:15:{t:05.2f},{q:.2f}\n" for t, q in zip(T, FLOW, strict=True)), silent=True),
    Kind("unclear date, one day", "time,flow (mL/min)\n" + "".join(f"03/04/2024 10:15:{t:05.2f},{q:.2f}\n" for t, q in zip(T, FLOW, strict=True)), remark="day/month"),
    Kind("seconds since 1970", "timestamp,flow (mL/min)\n" + rows(1_716_000_000 + T), remark="since 1970"),
    Kind("clock put back", "time,flow (mL/min)\n" + "".join(f"2024-10-27 02:{'59' if i < 30 else '00'}:{(30 + i) % 60:02d},{FLOW[i]:.2f}\n" for i in range(60)), time=np.arange(60.0), remark="put back by one hour"),
    Kind("clock put forward", "time,flow (mL/min)\n" + "".join(f"2024-03-31 0{1 if i < 30 else 3}:{'59' if i < 30 else '00'}:{(30 + i) % 60:02d},{FLOW[i]:.2f}\n" for i in range(60)), time=np.arange(60.0), remark="put forward by one hour"),
    Kind("thousands by commas in quotes", HEAD + "".join(f'{t:.2f},"{1000 + 10 * q:,.1f}"\n' for t, q in zip(T, FLOW, strict=True)), flow=1000 + 10 * FLOW, remark="comma parts thousands"),
    Kind("thousands by dots", "time (s);flow (mL/min)\n" + "".join(f"{t:.2f};{1000 + 10 * q:,.1f}\n".replace(",", "_").replace(".", ",").replace("_", ".") for t, q in zip(T, FLOW, strict=True)), flow=1000 + 10 * FLOW, remark="dot parts thousands"),
    Kind("one cell far down settles the mark", "time (s);flow (mL/min)\n" + "".join(f"{i};{q}\n" for i, q in enumerate(["1,234"] * 40_000 + ["1,5"])), time=np.arange(40_001.0), flow=np.array([1.234] * 40_000 + [1.5]), remark="Decimal mark is the comma"),
    Kind("decimal told", "time (s);flow (mL/min)\n" + "".join(f"{i};1,{200 + i}\n" for i in range(60)), {"decimal": ","}, time=np.arange(60.0), flow=1 + (200 + np.arange(60)) / 1000, silent=True),
    Kind("Fortran exponents", HEAD + rows(value="{:.6E}").replace("E", "D"), silent=True),
    Kind("quoted cells", '"time (s)","flow (mL/min)"\n' + "".join(f'"{t:.2f}","{q:.2f}"\n' for t, q in zip(T, FLOW, strict=True)), silent=True),
    Kind("a line end in a quoted header", '"time\n(s)","flow\n(mL/min)"\n' + rows(), silent=True),
    Kind("trailing delimiters", "time (s),flow (mL/min),\n" + "".join(line + ",\n" for line in rows().splitlines()), silent=True),
    Kind("empty column", "time (s),spare,flow (mL/min)\n" + "".join(line.replace(",", ",,") + "\n" for line in rows().splitlines()), remark="'spare' holds no number"),
    Kind("text column", "time (s),flow (mL/min),note\n" + "".join(line + (",start" if i == 3 else ",run") + "\n" for i, line in enumerate(rows().splitlines())), remark="text left aside: note"),
    Kind("comment lines", "# by hand\n" + HEAD + rows()[:200].rsplit("\n", 1)[0] + "\n# paused\n" + rows()[200 - len(rows()[:200].rsplit("\n", 1)[1]) :], silent=True),
    Kind("commented header", "% time flow\n" + rows(mark=" "), {"units": {"time": "s", "flow": "mL/min"}}, silent=True),
    Kind("footer", PLAIN + "\nMean,60.1\nEnd of file\n", remark="2 lines after the last row left aside as a footer, from line 63"),
    Kind("blank lines between rows", PLAIN.replace("\n", "\n\n"), silent=True),
    Kind("two bad lines", lines_with({7: "0.07,60.00\nERROR 5 buffer\n0.075", 30: rows().splitlines()[30]}), flow=np.concatenate([FLOW[:7], [60.0], FLOW[8:]]), remark="2 lines were left out"),
    Kind("missing markers", lines_with({5: "0.05,NaN", 6: "0.06,", 9: "0.09,--", 12: "0.12,#N/A"}), time=np.delete(T, [5, 6, 9, 12]), flow=np.delete(FLOW, [5, 6, 9, 12]), remark=r"'flow': 4 of 60 cells without a number, first in line 7"),
    Kind("overflow words", lines_with({5: "0.05,OVER", 6: "0.06,****"}), time=np.delete(T, [5, 6]), flow=np.delete(FLOW, [5, 6]), remark="overflow"),
    Kind("infinity", lines_with({5: "0.05,inf"}), time=np.delete(T, 5), flow=np.delete(FLOW, 5), remark="overflow"),
    Kind("sentinel", lines_with({5: "0.05,-9999", 8: "0.08,-9999"}), time=np.delete(T, [5, 8]), flow=np.delete(FLOW, [5, 8]), remark=r"-9999 stands for no value \(2 cells, first in line 7\)"),
    Kind("two sentinels", lines_with({5: "0.05,-9999", 8: "0.08,32767"}), time=np.delete(T, [5, 8]), flow=np.delete(FLOW, [5, 8]), remark="32767 stands for no value"),
    Kind("999.9 among its like is data", HEAD + rows(flow=FLOW + 939.9), flow=FLOW + 939.9, silent=True),
    Kind("repeated stamp", lines_with({7: f"0.06,{FLOW[7]:.2f}"}), remark=r"1 time stamp repeated or running backward \(line 9\)"),
    Kind("backward stamp", lines_with({7: f"0.02,{FLOW[7]:.2f}"}), remark="repeated or running backward"),
    Kind("missing stamp", lines_with({7: f",{FLOW[7]:.2f}"}), remark=r"1 missing time stamp \(line 9\) rebuilt"),
    Kind("repeated first stamp", HEAD + f"0.00,{FLOW[0]:.2f}\n" + rows(), time=T[1:] - T[1], flow=FLOW[1:], remark="2 rows with repeated or backward time stamps left out"),
    Kind("rows out of order", HEAD + "".join(rows().splitlines(keepends=True)[i] for i in [0, 1, 3, 2, *range(4, 60)]), remark="were sorted"),
    Kind("gap", HEAD + rows(np.where(np.arange(60) < 30, T, T + 0.2)), time=np.where(np.arange(60) < 30, T, T + 0.2), remark=r"1 gap in time, 200 ms in all: 0.29 to 0.5 s \(line 32\)"),
    Kind("rounded clock", "time (s),flow (mL/min)\n" + rows(COARSE, np.resize(FLOW, 400), stamp="{:.4f}"), time=np.arange(400) * 5e-5, flow=np.resize(FLOW, 400), remark="rounded clock"),
    Kind("30 frames per second in milliseconds", "time (ms),flow (mL/min)\n" + rows(np.arange(60) * 1000 / 30, stamp="{:.0f}"), time=np.arange(60) / 30, remark="rounded clock"),
    Kind("whole seconds at 50 Hz", "time,flow (mL/min)\n" + "".join(f"10:00:{i // 50:02d},{q:.2f}\n" for i, q in enumerate(np.resize(FLOW, 3000))), time=np.arange(3000) / 50, flow=np.resize(FLOW, 3000), remark="rounded clock"),
    Kind("single precision", "time (s),flow (mL/min)\n" + "".join(f"{float(np.float32(3000 + i / 1000)):.9g},{q:.2f}\n" for i, q in enumerate(FLOW)), time=np.arange(60) / 1000, remark="single-precision"),
    Kind("uneven stamps", HEAD + rows(np.cumsum(0.01 + 0.003 * np.sin(np.arange(60.0) ** 2)), stamp="{:.5f}"), time=np.round(np.cumsum(0.01 + 0.003 * np.sin(np.arange(60.0) ** 2)), 5) - 0.01, remark="unevenly spaced"),
    Kind("logger started again, header repeated", PLAIN + PLAIN, time=np.concatenate([T, T + 0.6]), flow=np.tile(FLOW, 2), remark="started again at line 63", check=lambda r: r["flow"].segments == ((0, 60), (60, 120))),
    Kind("logger started again, no header", PLAIN + rows(), time=np.concatenate([T, T + 0.6]), flow=np.tile(FLOW, 2), remark="started again at line 62", check=lambda r: r["flow"].segments == ((0, 60), (60, 120))),
    Kind("cut in the time", PLAIN + "0.6", remark=r"The last line \(62\) was cut"),
    Kind("cut in the number", PLAIN + "0.60,6", remark=r"The last line \(62\) was cut"),
    Kind("no line end after the last row", PLAIN[:-1], silent=True),
    Kind("two rates in one table", "time (s),p (mmHg),flow (mL/min)\n" + "".join(f"{t:.2f},{'' if i % 5 else 80 + i % 3},{q:.2f}\n" for i, (t, q) in enumerate(zip(T, FLOW, strict=True))), remark="'p': 48 of 60", check=lambda r: r["p"].sample_interval == pytest.approx(0.05, rel=1e-12)),
    Kind("two time columns", "t1 (s),p (mmHg),t2 (s),flow (mL/min)\n" + "".join(f"{0.02 * i:.2f},{80 + i % 3},{t:.2f},{q:.2f}\n" if i < 30 else f",,{t:.2f},{q:.2f}\n" for i, (t, q) in enumerate(zip(T, FLOW, strict=True))), remark="own time column 't2'", check=lambda r: len(r["p"]) == 30 and r["p"].sample_interval == pytest.approx(0.02, rel=1e-12)),
    Kind("the common one: UTF-16, semicolons, commas, 30 lines above, unit row, footer, two bad lines", ("".join(f"Zeile {i}: Wert {i}\n" for i in range(30)) + "Zeit;flow\n(s);(mL/min)\n" + rows(T[:20], FLOW[:20], mark=";", decimal=",") + "### Puffer ###\n-;-\n" + rows(T[20:], FLOW[20:], mark=";", decimal=",") + "Ende\n").encode("utf-16"), remark="2 lines were left out"),
    Kind("frames across", "Subject;A\nR-R interval (ms);412\n\n" + BLOCK, time=np.arange(8) * 0.05, flow=10.5 + np.arange(8), column="Flow", remark="Frames stand across", check=lambda r: r.stated_period == pytest.approx(0.412) and r.preamble["R-R interval (ms)"] == "412"),
    Kind("frames across, two vessels", f"R-R: 412 ms\nVessel: left\n{BLOCK}\nVessel: right\n{BLOCK.replace('10,5', '9,5')}", {"block": "right"}, time=np.arange(8) * 0.05, flow=np.r_[9.5, 11.5 + np.arange(7)], column="Flow", remark="Frames stand across", check=lambda r: r.blocks == ("left", "right")),
    Kind("two columns of one name", "time (s),flow (mL/min),flow (L/min)\n" + "".join(line + ",1\n" for line in rows().splitlines()), remark="Two columns are called 'flow'", check=lambda r: r["flow (L/min)"].values[0] == pytest.approx(1e-3 / 60)),
    Kind("name as in the header", PLAIN, column="flow (mL/min)", silent=True),
    Kind("sample_rate that agrees", PLAIN, {"sample_rate": "100 Hz"}, silent=True),
    Kind("time column set aside", PLAIN, {"time": "", "sample_rate": "200 Hz"}, time=T / 2, check=lambda r: "time" in r.columns),
    Kind("only one column", "time (s),p (mmHg),flow (mL/min)\n" + "".join(line.replace(",", ",80,") + "\n" for line in rows().splitlines()), {"columns": ["flow"]}, check=lambda r: r.columns == ("time", "flow")),
    Kind("script as a name", "time (s),<script>alert(1)</script>\n" + rows(), column="<script>alert(1)</script>", factor=1.0, silent=True, check=lambda r: "<script>" not in r._repr_html_()),
]  # fmt: skip


@pytest.mark.parametrize("kind", READ, ids=lambda kind: kind.name)
def test_read_right(kind: Kind) -> None:
    data = kind.text if isinstance(kind.text, bytes) else kind.text.encode()
    recording = read_recording(("run.csv", data), **kind.told)
    signal = recording[kind.column]
    time = T if kind.time is None else np.asarray(kind.time, float)
    flow = FLOW if kind.flow is None else np.asarray(kind.flow, float)
    np.testing.assert_allclose(signal.values, flow * kind.factor, rtol=1e-12)  # parsed and scaled once
    # Rebuilt stamps are as good as count and span: 2e-7 of the span covers one rounding of the last stamp.
    np.testing.assert_allclose(signal.time - signal.time[0], time - time[0], rtol=0, atol=2e-7 * max(1.0, float(time[-1])) + 1e-9)
    if kind.remark:
        assert any(re.search(kind.remark, remark) for remark in recording.remarks), recording.remarks
    if kind.silent:
        assert recording.remarks == ()
    if kind.check:
        assert kind.check(recording)


REFUSED = [
    Kind("one and a bit or a thousand-odd", "time (s);flow (mL/min)\n" + "".join(f"{i};1,{200 + i}\n" for i in range(60)), refusal=r"run\.csv:2: '1,200'.*decimal=','"),
    Kind("the same with dots", "time (s);flow (mL/min)\n" + "".join(f"{i};1.{200 + i}\n" for i in range(60)), refusal=r"run\.csv:2: '1\.200'.*decimal='\.'"),
    Kind("marks that contradict", "time (s);flow (mL/min)\n" + "".join(f"{i};{'1.5' if i % 2 else '1,5'}\n" for i in range(60)), refusal=r"contradict.*decimal="),
    Kind("commas as marks and delimiters", "time,flow\n" + "".join(f"0,{i:02d},6{i % 7},5\n" for i in range(60)), refusal="names 2 columns.*4 cells.*export with another delimiter"),
    Kind("commas without a header", "".join(f"0,{i:02d},6{i % 7},5\n" for i in range(60)), {"sample_rate": 100}, refusal="commas may be decimal marks"),
    Kind("whole numbers, two columns or one with commas", "".join(f"6{i % 7},5{i % 3}\n" for i in range(60)), {"sample_rate": 100}, refusal="commas may be decimal marks"),
    Kind("header too short", "time,flow\n" + "".join(f"0.{i:02d},1,2\n" for i in range(60)), refusal=r"run\.csv:1: the header names 2 columns.*rows have 3"),
    Kind("no time", "flow (mL/min)\n" + "".join(f"{q}\n" for q in FLOW), refusal="sample_rate='200 Hz'"),
    Kind("sample number without a rate", "sample,flow (mL/min)\n" + rows(T * 100, stamp="{:.0f}"), refusal="'sample' counts samples.*sample_rate="),
    Kind("time without unit, steps of ten", "time,flow (mL/min)\n" + rows(T * 1e3, stamp="{:.0f}"), refusal="steps of 10: seconds, milliseconds or sample numbers"),
    Kind("unknown unit", "time (s),flow (foo/min)\n" + rows(), refusal="unit 'foo/min' is not known.*mL/min"),
    Kind("unit in two readings", "time (s),p (mpa)\n" + rows(), refusal="MPa or mPa"),
    Kind("time in mmHg", "time (mmHg),flow (mL/min)\n" + rows(), {"time": "time"}, refusal="no unit of time"),
    Kind("hours or minutes", "time,flow (mL/min)\n" + "".join(f"10:{i:02d},{q}\n" for i, q in enumerate(FLOW)), refusal="hours and minutes or minutes and seconds"),
    Kind("frames after the third colon", "time,flow (mL/min)\n" + "".join(f"10:00:00:{i:02d},{q}\n" for i, q in enumerate(FLOW)), refusal="third colon"),
    Kind("some zones", "time,flow (mL/min)\n" + "".join(f"2024-05-31T10:00:{i:02d}{'Z' if i % 2 else ''},{q}\n" for i, q in enumerate(FLOW)), refusal="some date-times have a zone"),
    Kind("day or month", "time,flow (mL/min)\n" + "".join(f"0{1 + i % 9}/0{1 + i // 9}/2024 10:00:00,{q}\n" for i, q in enumerate(FLOW)), refusal="day/month or month/day"),
    Kind("stamps without any order", "time (s),flow (mL/min)\n" + rows(np.random.default_rng(1).integers(0, 30, 60) / 100), refusal="repeated or run backward|falls back|no column was recognised"),
    Kind("rate that disagrees", PLAIN, {"sample_rate": "200 Hz"}, refusal="does not agree with the time column.*time=''"),
    Kind("two vessels, none chosen", f"Vessel: left\n{BLOCK}\nVessel: right\n{BLOCK}", refusal="'left', 'right'.*block='left'"),
    Kind("frames without times", "R-R;857 ms\n" + "\n".join(line for line in BLOCK.splitlines() if "Trigger" not in line), refusal="no row of times.*R-R is 0.857 s"),
    Kind("NUL bytes", PLAIN[:300].encode() + b"\0\0\0" + PLAIN[300:].encode(), refusal=r"run\.csv:\d+: there is a NUL byte"),
    Kind("too many bad lines", HEAD + "".join(f"{line}\nsensor fault {i} {i}\n" for i, line in enumerate(rows().splitlines())), refusal="59 of 119 lines are no rows"),
    Kind("nothing but text", "one morning\nthe pump was started\n" * 30, refusal="no table of numbers"),
    Kind("empty", "", refusal="empty"),
    Kind("one row", HEAD + "0.0,1.0\n", refusal="one row"),
    Kind("picture", b"\x89PNG\r\n\x1a\n" + bytes(100), refusal="picture"),
    Kind("pickle", b"\x80\x04\x95" + bytes(100), refusal="pickle.*never read"),
    Kind("old workbook", b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(100), refusal=r"save it as \.xlsx"),
    Kind("not gzip inside", b"\x1f\x8b" + bytes(range(100)), refusal="damaged"),
    Kind("no such column for units", PLAIN, {"units": {"flux": "mL/min"}}, refusal="flux.*there are: time, flow"),
    Kind("no such time column", PLAIN, {"time": "clock"}, refusal="'clock'.*there are: time, flow"),
    Kind("no such column", PLAIN, {"columns": ["flux"]}, refusal="'flux'.*there are: flow"),
    Kind("unit of nothing here", PLAIN, {"units": {"flow": "furlong/foo"}}, refusal="is not known"),
]  # fmt: skip


@pytest.mark.parametrize("kind", REFUSED, ids=lambda kind: kind.name)
def test_refused_with_place_and_remedy(kind: Kind) -> None:
    data = kind.text if isinstance(kind.text, bytes) else kind.text.encode()
    with pytest.raises(PulsekitError) as caught:
        read_recording(("run.csv", data), **kind.told)
    assert re.search(kind.refusal, str(caught.value)), str(caught.value)


def test_options_are_checked() -> None:
    for told in ({"decimal": ";"}, {"delimiter": "ab"}, {"encoding": "utf-99"}, {"sample_rate": -1}, {"units": "mL/min"}, {"decimal": ",", "delimiter": ","}):
        with pytest.raises(InputError):
            read_recording(("run.csv", PLAIN.encode()), **told)
    with pytest.raises(UnitError):
        read_recording(("run.csv", PLAIN.encode()), sample_rate="5 mmHg")


def test_sources_of_bytes(tmp_path: Any) -> None:
    path = tmp_path / "run.csv"
    path.write_text(PLAIN)
    by_path = read_recording(path)
    with path.open("rb") as file:
        readings = [by_path, read_recording(str(path)), read_recording(file), read_recording(PLAIN.encode()), read_recording({"name": "../../run.csv", "content": memoryview(PLAIN.encode())})]
    assert {reading.sha256 for reading in readings} == {by_path.sha256}
    assert readings[-1].path == "run.csv"
    for missing in (tmp_path, tmp_path / "none.csv", "a\0b"):
        with pytest.raises(MissingFileError):
            read_recording(missing)
    with pytest.raises(InputError):
        read_recording(3.5)


def test_progress_and_stop() -> None:
    told: list[float] = []
    read_recording(("run.csv", PLAIN.encode()), progress=told.append)
    assert told[0] == 0.0
    assert told[-1] == 1.0
    with pytest.raises(StoppedError):
        read_recording(("run.csv", PLAIN.encode()), stop=lambda: True)


def test_a_column_that_is_not_there() -> None:
    recording = read_recording(("run.csv", PLAIN.encode()))
    with pytest.raises(MissingColumnError, match="there are: time, flow") as caught:
        recording["flux"]
    assert caught.value.columns == ("time", "flow")
    assert isinstance(caught.value, KeyError)


def test_describe_shows_what_was_read() -> None:
    recording = read_recording(("run.csv", euro("time (s),flow (mL/min)\n").encode() + rows(mark=";", decimal=",").encode()))
    text = recording.describe()
    for words in ("run.csv", "flow  [mL/min]", "every 10 ms (100 Hz)", "no gaps", "Decimal mark is the comma", "60", "delimiter ';'"):
        assert words in text
    assert "Decimal mark is the comma" in recording._repr_html_()


def test_a_unit_given_later_and_a_unit_of_another_dimension() -> None:
    signal = read_recording(("run.csv", b"time (s),flow\n" + rows().encode()))["flow"]
    assert (signal.unit, signal.dimension) == ("", None)
    np.testing.assert_allclose(signal.with_unit("mL/min").values, FLOW * ML_PER_MIN, rtol=1e-12)
    with pytest.raises(UnitError, match="units="):
        read_recording(("run.csv", PLAIN.encode()))["flow"].with_unit("mmHg")


def test_refusals_are_of_the_agreed_kinds() -> None:
    with pytest.raises(RecordingError) as caught:
        read_recording(("run.csv", b"time (s);flow (mL/min)\n" + b"1;1,234\n2;1,235\n" * 5))
    assert isinstance(caught.value, ValueError)
    assert (caught.value.path, caught.value.line) == ("run.csv", 2)
