"""Which format the bytes are in, and who reads it."""

from __future__ import annotations

import importlib
from pathlib import PurePath
from types import ModuleType

from ...errors import MissingExtraError, PulsekitError
from ..recording import Recording
from .source import Source
from .told import Notes, Told

__all__ = ["kind_of_bytes", "optional", "read_packed_format"]

_EXTRA = {"openpyxl": "xlsx", "pyarrow": "parquet", "nptdms": "tdms", "pyedflib": "edf", "asammdf": "mf4"}
_MAGIC = (
    (b"\x1f\x8b", "gz"), (b"PAR1", "parquet"), (b"MATLAB ", "mat"), (b"TDSm", "tdms"), (b"MDF     ", "mf4"), (b"UnFinMF ", "mf4"), (b"\x89HDF\r\n\x1a\n", "hdf"),
    (b"PK\x03\x04", "zip"), (b"PK\x05\x06", "zip"), (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1", "xls"), (b"%PDF", "pdf"), (b"\x89PNG", "picture"), (b"\xff\xd8\xff", "picture"),
    (b"BZh", "bzip"), (b"\xfd7zXZ", "xz"), (b"7z\xbc\xaf", "7z"), (b"\x80\x04\x95", "pickle"), (b"\x93NUMPY", "npy"),
)  # fmt: skip
_REFUSED = {
    "xls": "this is an old Excel workbook (.xls); save it as .xlsx or as CSV",
    "pdf": "this is a PDF; export the numbers as CSV",
    "picture": "this is a picture, not a table of numbers; export the numbers as CSV",
    "bzip": "this is a bzip2 archive; unpack it first",
    "xz": "this is an xz archive; unpack it first",
    "7z": "this is a 7z archive; unpack it first",
    "pickle": "this is a Python pickle: opening one runs whatever it holds, so it is never read; save the numbers as CSV or .mat",
    "npy": "this is a NumPy array without names or units; save it as CSV with a header",
    "hdf": "this is an HDF5 file (a .mat of version 7.3 is one); save it with '-v7', or export as CSV",
}


def kind_of_bytes(name: str, head: bytes, notes: Notes) -> str:
    """Name the format from the first bytes; the ending decides only where the bytes cannot."""
    ending = PurePath(name).suffix.lower()
    for magic, kind in _MAGIC:
        if head.startswith(magic):
            if kind in _REFUSED:
                raise notes.refuse(_REFUSED[kind])
            return "xlsx" if kind == "zip" else kind
    if head[:4] in (b"RIFF", b"RIFX") and head[8:12] == b"WAVE":
        return "wav"
    if head[:8] == b"0       " and (
        ending == ".edf" or head[192:197] in (b"EDF+C", b"EDF+D") or (len(head) >= 256 and head[184:192].strip().isdigit())
    ):
        return "edf"
    if ending == ".mat" and len(head) >= 20 and b"\x00" in head[:20]:
        return "mat"  # version 4 has no mark
    if ending in (".xlsx", ".xlsm", ".parquet", ".tdms", ".edf", ".mf4", ".wav", ".gz") and b"\x00" in head:
        raise notes.refuse(f"the file is called {ending} but its bytes are not of that format; export it again")
    return "text"


def optional(module: str, notes: Notes) -> ModuleType:
    """Import an optional library, or name the command that installs it."""
    extra = _EXTRA[module]
    try:
        return importlib.import_module(module)
    except ImportError as problem:
        raise MissingExtraError(
            f"{notes.where}: reading .{extra} needs the optional library {module!r}: pip install 'pulsekit[{extra}]', or export the file as CSV",
            extra=extra,
        ) from problem


def read_packed_format(kind: str, source: Source, told: Told, notes: Notes) -> Recording:
    """Read one of the formats that are no text; whatever their libraries raise becomes our error."""
    from . import binary, sheets

    readers = {
        "xlsx": sheets.read_xlsx, "mat": binary.read_mat, "parquet": binary.read_parquet, "tdms": binary.read_tdms, "edf": binary.read_edf, "mf4": binary.read_mf4, "wav": binary.read_wav,
    }  # fmt: skip
    try:
        return readers[kind](source, told, notes)
    except PulsekitError:
        raise
    except (MemoryError, RecursionError) as problem:
        raise notes.refuse(f"the .{kind} file asks for more memory than there is; it is damaged or hostile") from problem
    except Exception as problem:
        # The libraries raise all kinds of errors on a damaged file: none of them tells a user more than this.
        raise notes.refuse(
            f"the .{kind} file is damaged or not of that format ({type(problem).__name__}); export it again, or as CSV"
        ) from problem
