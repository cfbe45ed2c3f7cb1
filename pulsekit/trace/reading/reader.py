"""read_recording: the one way from a file to a Recording."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from typing import Any

from ..recording import Recording
from .formats import kind_of_bytes, read_packed_format
from .source import Source, digest_of, open_source, unpacked
from .textread import read_text
from .told import Notes, Told, make_told

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
    """Read a recording as instruments and colleagues write it.

    It is read right and everything guessed, repaired or dropped stands in ``remarks``, or it is refused
    with file, line, column and remedy. Delimited text of any sane kind; also gzip, .xlsx, .mat, .parquet,
    .tdms, .edf, .mf4 and .wav (some need an optional extra, which the error names). All options are found
    out if not given.

    Parameters
    ----------
    source : path, bytes, (name, bytes), mapping with name and content, or open file
        The recording.
    time : str, optional
        Name of the time column; "" to take none of them (with ``sample_rate``).
    units : mapping of column to unit, optional
        Overrules what the file says, as in ``{"flow": "mL/min", "time": "ms"}``.
    sample_rate : float or str, optional
        Of evenly spaced rows, or of the samples that a column counts. [Hz]
    decimal, delimiter, encoding : str, optional
        "." or ","; one character, " " for runs of blanks; a codec such as "cp1252".
    block : str or int, optional
        Which block, sheet or group, where a file has several.
    columns : sequence of str, optional
        Only these columns are kept (a long recording then needs less memory).
    progress : callable, optional
        Called with the fraction read, 0 to 1.
    stop : callable, optional
        Called now and then; reading stops when it returns True.

    Returns
    -------
    Recording

    Raises
    ------
    RecordingError
        If the file cannot be read without guessing a number.
    MissingFileError, MissingColumnError, MissingExtraError, InputError, StoppedError
        As their names say.

    Examples
    --------
    >>> recording = read_recording(("run.csv", b"time (ms);flow (mL/min)\\n0;61,5\\n10;63,0\\n20;62,4\\n"))
    >>> recording.columns, recording["flow"].time.tolist(), recording.remarks
    (('time', 'flow'), [0.0, 0.01, 0.02], ('Decimal mark is the comma.',))
    """
    told = make_told(
        time=time, units=units, sample_rate=sample_rate, decimal=decimal, delimiter=delimiter, encoding=encoding, block=block, columns=columns,
        progress=progress, stop=stop,
    )  # fmt: skip
    opened = open_source(source)
    notes = Notes(opened.name)
    told.pause(notes.where, 0.0)
    kind = kind_of_bytes(opened.name, opened.part(0, 1024), notes)
    if kind != "gz":
        return _read(kind, opened, told, notes)
    plain = unpacked(opened, told, notes)
    try:
        kind = kind_of_bytes(plain.name, plain.part(0, 1024), notes)
        if kind == "gz":
            raise notes.refuse("the file is packed twice; unpack it yourself, then read the plain file")
        return replace(_read(kind, plain, told, notes), path=opened.path or opened.name, sha256=digest_of(opened))
    finally:
        plain.close()


def _read(kind: str, source: Source, told: Told, notes: Notes) -> Recording:
    recording = read_text(source, told, notes) if kind == "text" else read_packed_format(kind, source, told, notes)
    told.pause(notes.where, 1.0)
    return recording
