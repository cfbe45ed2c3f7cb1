"""Formats that carry numbers as numbers: .mat, .parquet, .tdms, .edf, .mf4, .wav."""

from __future__ import annotations

import io
import re
import tempfile
import warnings
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import numpy as np

from ..recording import Recording
from .channels import Channel, build_channels
from .formats import optional
from .source import Source, digest_of
from .told import Notes, Told, clean

__all__ = ["read_edf", "read_mat", "read_mf4", "read_parquet", "read_tdms", "read_wav"]

_LARGEST = 4_000_000_000
_RATE_NAME = re.compile(r"(?i)^(fs|f_s|sample_?rate|sampling_?rate|sampling_?frequency|rate|sr)$")
_STEP_NAME = re.compile(r"(?i)^(dt|delta_?t|sample_?interval|tinterval|interval)$")


@contextmanager
def _as_file(source: Source, ending: str) -> Iterator[str]:
    """Path of the bytes; libraries that want a path get a temporary one with a name of our own."""
    if source.path and source.unpacked is None:
        yield source.path
        return
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / f"recording{ending}"
        with source.open() as file:
            path.write_bytes(file.read())
        yield str(path)


def _bounded(size: float, notes: Notes) -> None:
    if size > _LARGEST:
        raise notes.refuse(f"the file asks for {size:.3g} bytes of memory; export fewer channels or a shorter stretch")


def read_mat(source: Source, told: Told, notes: Notes) -> Recording:
    """Vectors of one length, or a matrix, or a struct of vectors; 'fs' or 'dt' beside them is the rate."""
    from scipy.io import loadmat, whosmat

    with source.open() as file:
        data = io.BytesIO(file.read())
    sizes = whosmat(data)
    _bounded(sum(8.0 * float(np.prod([float(n) for n in shape])) for _, shape, _ in sizes), notes)
    data.seek(0)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # duplicate names and the like; what counts is checked below
        content = loadmat(data, squeeze_me=True, struct_as_record=True, chars_as_strings=True)
    found = {name: value for name, value in content.items() if not name.startswith("__")}
    flat: dict[str, Any] = {}
    units: dict[str, str] = {}
    for name, value in found.items():
        if isinstance(value, np.ndarray) and value.dtype.names and value.size == 1:
            for key in value.dtype.names:
                inner = value[key].item() if value[key].dtype == object else value[key]
                flat[key if key not in flat else f"{name}.{key}"] = inner
                if key.lower() in ("units", "unit") and isinstance(inner, str):
                    units[name] = inner
        else:
            flat[name] = value
    channels: list[Channel] = []
    rate: float | None = None
    for name, value in flat.items():
        array = np.asarray(value)
        if array.dtype.kind in "fiub" and array.ndim == 0:
            if _RATE_NAME.match(name) and float(array) > 0:
                rate = float(array)
                notes.add(f"Sample rate {rate:.6g} Hz taken from the variable {clean(name)!r}.")
            elif _STEP_NAME.match(name) and float(array) > 0:
                rate = 1 / float(array)
                notes.add(f"Sample interval {float(array):.6g} s taken from the variable {clean(name)!r} (taken as seconds).")
        elif array.dtype.kind in "fiub" and array.ndim == 1:
            channels.append(Channel(name, np.asarray(array, float), units.get(name)))
        elif array.dtype.kind in "fiub" and array.ndim == 2:
            table = array if array.shape[0] >= array.shape[1] else array.T
            if table.shape[1] > 200:
                raise notes.refuse(f"variable {clean(name)!r} is a matrix of {array.shape}: too many columns for a recording")
            channels += [Channel(f"{name} {place + 1}", np.asarray(table[:, place], float), None) for place in range(table.shape[1])]
    return build_channels(channels, source, told, notes, digest_of(source), "mat", rate=rate)


def read_parquet(source: Source, told: Told, notes: Notes) -> Recording:
    """Columns of numbers and date-times of a parquet table."""
    optional("pyarrow", notes)
    import pyarrow.parquet as pq

    with source.open() as file:
        table_file = pq.ParquetFile(io.BytesIO(file.read()))
    meta = table_file.metadata
    _bounded(8.0 * meta.num_rows * meta.num_columns, notes)
    table = table_file.read()
    channels: list[Channel] = []
    for name, column in zip(table.column_names, table.columns, strict=True):
        series = column.to_pandas()
        if series.dtype.kind == "M" or "datetime64" in str(series.dtype):
            stamps = series.dt.tz_convert("UTC").dt.tz_localize(None) if getattr(series.dt, "tz", None) is not None else series
            whole = stamps.astype("datetime64[ns]").to_numpy().astype(np.int64)
            channels.append(Channel(name, (whole - whole[0]) * 1e-9, "s", origin=str(stamps.iloc[0]), is_time=True))
        elif series.dtype.kind in "fiub":
            field = table.schema.field(name).metadata or {}
            unit = field.get(b"unit", field.get(b"units"))
            channels.append(Channel(name, series.to_numpy(float), unit.decode("utf-8", "replace") if unit else None))
        else:
            notes.add(f"Column {clean(name)!r} holds no numbers: left aside.")
    return build_channels(channels, source, told, notes, digest_of(source), "parquet")


def read_tdms(source: Source, told: Told, notes: Notes) -> Recording:
    """Channels of one group, each with its own unit and interval."""
    nptdms = optional("nptdms", notes)
    with source.open() as file, nptdms.TdmsFile.open(io.BytesIO(file.read())) as content:
        groups = content.groups()
        _bounded(8.0 * sum(len(channel) for group in groups for channel in group.channels()), notes)
        channels: list[Channel] = []
        for group in groups:
            for channel in group.channels():
                values = channel[:]
                if getattr(values, "dtype", np.dtype(object)).kind == "M":
                    whole = values.astype("datetime64[ns]").astype(np.int64)
                    channels.append(
                        Channel(channel.name, (whole - whole[0]) * 1e-9, "s", group=group.name, origin=str(values[0]), is_time=True)
                    )
                    continue
                if getattr(values, "dtype", np.dtype(object)).kind not in "fiub":
                    notes.add(f"Channel {clean(channel.name)!r} holds no numbers: left aside.")
                    continue
                step = float(channel.properties.get("wf_increment", 0) or 0)
                start = float(channel.properties.get("wf_start_offset", 0) or 0)
                unit = channel.properties.get("unit_string") or channel.properties.get("NI_UnitDescription")
                channels.append(
                    Channel(
                        channel.name,
                        np.asarray(values, float),
                        unit,
                        group=group.name,
                        step=step or None,
                        start=start,
                        origin=str(channel.properties.get("wf_start_time", "")),
                    )
                )
    return build_channels(channels, source, told, notes, digest_of(source), "tdms")


def read_edf(source: Source, told: Told, notes: Notes) -> Recording:
    """Signals of an EDF or EDF+ file, each with its own rate and physical unit."""
    pyedflib = optional("pyedflib", notes)
    with _as_file(source, ".edf") as path, pyedflib.EdfReader(path) as file:
        _bounded(8.0 * sum(float(n) for n in file.getNSamples()), notes)
        channels = [
            Channel(
                label.strip(),
                np.asarray(file.readSignal(place), float),
                unit.strip() or None,
                step=1 / float(file.getSampleFrequency(place)),
                origin=str(file.getStartdatetime()),
            )
            for place, (label, unit) in enumerate(
                zip(file.getSignalLabels(), [file.getPhysicalDimension(n) for n in range(file.signals_in_file)], strict=True)
            )
        ]
    return build_channels(channels, source, told, notes, digest_of(source), "edf")


def read_mf4(source: Source, told: Told, notes: Notes) -> Recording:
    """Channels of a measurement data file, each with its own stamps."""
    asammdf = optional("asammdf", notes)
    channels: list[Channel] = []
    with _as_file(source, ".mf4") as path, warnings.catch_warnings():
        warnings.simplefilter("ignore")
        with asammdf.MDF(path) as file:
            _bounded(8.0 * sum(float(group.channel_group.cycles_nr) * len(group.channels) for group in file.groups), notes)
            for signal in file.iter_channels(skip_master=True):
                if signal.samples.dtype.kind not in "fiub" or signal.samples.ndim != 1:
                    notes.add(f"Channel {clean(signal.name)!r} holds no plain numbers: left aside.")
                    continue
                channels.append(
                    Channel(
                        signal.name, np.asarray(signal.samples, float), signal.unit or None, stamps=np.asarray(signal.timestamps, float)
                    )
                )
    return build_channels(channels, source, told, notes, digest_of(source), "mf4")


def read_wav(source: Source, told: Told, notes: Notes) -> Recording:
    """Channels of a sound file; its numbers have no unit."""
    from scipy.io import wavfile

    with source.open() as file, warnings.catch_warnings():
        warnings.simplefilter("ignore")  # chunks that are not understood: they hold no samples
        rate, values = wavfile.read(io.BytesIO(file.read()))
    table = np.asarray(values, float)
    table = table[:, None] if table.ndim == 1 else table
    names: Sequence[str] = ["signal"] if table.shape[1] == 1 else [f"channel {place + 1}" for place in range(table.shape[1])]
    scale = f"whole numbers up to {np.iinfo(values.dtype).max}" if values.dtype.kind in "iu" else "numbers of full scale 1"
    notes.add(f"The sound file holds {scale} without a unit: values as written; give a calibration.")
    channels = [Channel(name, np.ascontiguousarray(table[:, place]), None, step=1 / float(rate)) for place, name in enumerate(names)]
    return build_channels(channels, source, told, notes, digest_of(source), "wav")
