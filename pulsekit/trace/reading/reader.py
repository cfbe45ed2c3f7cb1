"""read_recording: the one way from a file to a Recording."""

from __future__ import annotations

import hashlib
import io
import re
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd

from ...errors import MissingFileError, PulsekitError, RecordingError
from ...quantities import DIMENSIONS, convert, parse_unit, to_si, unit_dimension
from ..clock import Clock
from ..recording import Column, Recording
from ..signal import _clock_of

__all__ = ["read_recording"]


def read_recording(
    source: Any,
    *,
    time: str | None = None,
    units: Mapping[str, str] | None = None,
    sample_rate: float | str | None = None,
    decimal: str | None = None,
    delimiter: str | None = None,
    encoding: str | None = None,
    block: str | int | None = None,
    columns: Sequence[str] | None = None,
    progress: Callable[[float], Any] | None = None,
    stop: Callable[[], bool] | None = None,
) -> Recording:
    """Read a recording (first, simple form)."""
    path = str(source)
    try:
        data = Path(source).read_bytes()
    except OSError as problem:
        raise MissingFileError(f"{path}: {problem.strerror or problem}", path=path) from problem
    lines = data.decode(encoding or "utf-8-sig").splitlines()
    head = next(i for i, line in enumerate(lines) if len(re.split(r"[,;\t]", line)) > 1 and not line.startswith("#") and ": " not in line)
    frame = pd.read_csv(io.StringIO("\n".join(lines[head:])), sep=delimiter or ",", decimal=decimal or ".", skipinitialspace=True)
    preamble = dict(line.lstrip("# ").split(": ", 1) for line in lines[:head] if ": " in line)
    table = []
    remarks: list[str] = []
    for header in frame.columns:
        match = re.match(r"^(?P<name>.*?)\s*[\[(](?P<unit>.*)[\])]\s*$", header)
        name, unit = (match["name"], match["unit"]) if match else (header, "")
        unit = (units or {}).get(name, unit)
        dimension = unit_dimension(unit) if unit else None
        values = frame[header].to_numpy(float)
        if dimension:
            values = convert(values, parse_unit(unit)[0], DIMENSIONS[dimension])
        table.append(Column(name=name, header=header, unit=unit, dimension=dimension, values=values))
    clock_column = time or next((c.name for c in table if c.dimension == "time" or c.name.lower() in ("time", "t")), None)
    if sample_rate is not None:
        clock = Clock(interval=1 / to_si(sample_rate, "frequency", "sample_rate"), count=len(frame))
    elif clock_column:
        clock = _clock_of(next(c.values for c in table if c.name == clock_column), clock_column)
    else:
        raise RecordingError(f"{path}: no time column; name it with time=, or give sample_rate=", path=path)
    return Recording(
        table=tuple(table),
        clocks=(clock,),
        path=path,
        sha256=hashlib.sha256(data).hexdigest(),
        preamble=preamble,
        time_column=clock_column or "",
        remarks=tuple(remarks),
    )


_ = (PulsekitError, np)
