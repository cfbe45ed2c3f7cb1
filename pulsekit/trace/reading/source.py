"""Where the bytes come from: a path, bytes, an upload or an open file; packed files are unpacked within bounds."""

from __future__ import annotations

import hashlib
import io
import stat
import tempfile
import zlib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path, PurePosixPath, PureWindowsPath
from typing import IO, Any, cast

from ...errors import InputError, MissingFileError
from .told import Notes, Told, clean

__all__ = ["LARGEST_UNPACKED", "Source", "digest_of", "open_source", "unpacked"]

#: A packed file is refused beyond this size, and beyond this ratio once it is large. [bytes], [-]
LARGEST_UNPACKED = 4_000_000_000
_LARGEST_RATIO = 250
_SMALL = 64_000_000
_STEP = 1 << 20


@dataclass(frozen=True)
class Source:
    """Bytes with a name; ``path`` is set if they stand in a file."""

    name: str
    size: int
    path: str = ""
    data: bytes | None = None
    unpacked: IO[bytes] | None = None

    def open(self) -> IO[bytes]:
        """Open for reading from the start."""
        if self.unpacked is not None:
            self.unpacked.seek(0)
            return cast("IO[bytes]", _Kept(self.unpacked))
        if self.data is not None:
            return io.BytesIO(self.data)
        return Path(self.path).open("rb")

    def close(self) -> None:
        """Give back what was unpacked."""
        if self.unpacked is not None:
            self.unpacked.close()

    def part(self, begin: int, length: int) -> bytes:
        """Return ``length`` bytes from ``begin`` on, fewer at the end."""
        with self.open() as file:
            file.seek(max(begin, 0))
            return file.read(length)


def digest_of(source: Source) -> str:
    """Return the SHA-256 of the bytes."""
    digest = hashlib.sha256()
    with source.open() as file:
        while block := file.read(_STEP):
            digest.update(block)
    return digest.hexdigest()


class _Kept(io.BufferedIOBase):
    """A file that stays open when its reader is done with it."""

    def __init__(self, file: IO[bytes]) -> None:
        self._file = file

    def read(self, size: int | None = -1, /) -> bytes:
        return self._file.read(-1 if size is None else size)

    def seek(self, offset: int, whence: int = 0, /) -> int:
        return self._file.seek(offset, whence)

    def tell(self) -> int:
        return self._file.tell()

    def readable(self) -> bool:
        return True

    def seekable(self) -> bool:
        return True


def _last_part(name: str) -> str:
    """Return the last part of a name that someone else chose: it never becomes a path."""
    return clean(PureWindowsPath(PurePosixPath(str(name)).name).name, 120) or "upload"


def open_source(source: Any) -> Source:
    """Accept a path, bytes, (name, bytes), a mapping with name and content, or an open file."""
    if isinstance(source, (str, Path)):
        return _from_path(source)
    name = "upload"
    if isinstance(source, Mapping) and "content" in source:
        name, source = str(source.get("name", name)), source["content"]
    elif isinstance(source, tuple) and len(source) == 2:
        first, second = source
        name, source = (first, second) if isinstance(first, str) else (second, first)
    if hasattr(source, "read"):
        named = getattr(source, "name", None)
        name = named if isinstance(named, str) and name == "upload" else name
        source = source.read()
    if isinstance(source, str):
        source = source.encode()
    if not isinstance(source, (bytes, bytearray, memoryview)):
        raise InputError(
            f"a recording is read from a path, bytes, (name, bytes) or an open file, not from {type(source).__name__}", name="source"
        )
    data = bytes(source)
    return Source(name=_last_part(name), size=len(data), data=data)


def _from_path(path: str | Path) -> Source:
    shown = clean(str(path), 300)
    try:
        state = Path(path).stat()
        if stat.S_ISDIR(state.st_mode):
            raise MissingFileError(f"{shown}: this is a folder; name the file in it", path=shown)
        if not stat.S_ISREG(state.st_mode):
            raise MissingFileError(
                f"{shown}: this is no ordinary file (a device or a pipe); save the recording as a file first", path=shown
            )
        with Path(path).open("rb"):
            pass
    except OSError as problem:
        if isinstance(problem, MissingFileError):
            raise
        raise MissingFileError(
            f"{shown}: the file cannot be opened ({problem.strerror or problem}); check name and folder", path=shown
        ) from problem
    except ValueError as problem:  # a NUL byte in the name
        raise MissingFileError(f"{shown}: this is no name of a file", path=shown) from problem
    return Source(name=shown, size=state.st_size, path=str(path))


def unpacked(source: Source, told: Told, notes: Notes) -> Source:
    """Unpack gzip into a temporary file, within bounds of size and ratio."""
    out: IO[bytes] = io.BytesIO()
    try:
        size, out = _unpack(source, out, told, notes)
    except BaseException:
        out.close()
        raise
    return Source(name=source.name.removesuffix(".gz"), size=size, path="", unpacked=out)


def _unpack(source: Source, out: IO[bytes], told: Told, notes: Notes) -> tuple[int, IO[bytes]]:
    size = taken = 0
    unpacker = zlib.decompressobj(wbits=31)
    with source.open() as file:
        while True:
            packed = unpacker.unconsumed_tail or file.read(_STEP)
            taken = file.tell() - len(unpacker.unconsumed_tail)
            if unpacker.eof:  # a further member of the same file
                packed = unpacker.unused_data + packed
                if not packed.startswith(b"\x1f\x8b"):
                    break
                unpacker = zlib.decompressobj(wbits=31)
            if not packed:
                notes.add("The packed file stops in the middle: what could be unpacked was read.")
                break
            try:
                plain = unpacker.decompress(packed, _STEP)
            except zlib.error as problem:
                raise notes.refuse(f"the packed file is damaged ({problem}); unpack it with another tool, or export it again") from problem
            size += len(plain)
            out.write(plain)
            if size > _SMALL and isinstance(out, io.BytesIO):
                moved = tempfile.TemporaryFile()  # noqa: SIM115 - it lives as long as the source
                moved.write(out.getvalue())
                out = moved
            if size > LARGEST_UNPACKED or (size > _SMALL and size > _LARGEST_RATIO * max(source.size, 1)):
                raise notes.refuse(
                    f"the packed file of {source.size} bytes grows beyond {size} bytes; unpack it yourself if you trust it, then read the plain file"
                )
            told.pause(notes.where, 0.5 * taken / max(source.size, 1))
    return size, out
