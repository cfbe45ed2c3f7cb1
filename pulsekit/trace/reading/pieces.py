"""A text file as pieces of whole lines, in UTF-8, with bounded memory."""

from __future__ import annotations

import codecs
import hashlib
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from .source import Source
from .told import Notes, Told

__all__ = ["LONGEST_LINE", "PIECE", "Piece", "pieces"]

#: Bytes read at once, and the longest line that is read. [bytes]
PIECE = 8_000_000
LONGEST_LINE = 1_000_000


@dataclass(frozen=True)
class Piece:
    """Whole lines in UTF-8; ``last`` if the file ends here; ``ended`` if its last line has a line end."""

    text: bytes
    first_line: int
    last: bool
    ended: bool
    lines: int = -1  # line ends in it, -1 if not counted


def pieces(
    source: Source, encoding: str, told: Told, notes: Notes, *, digest: Any = None, size: int = PIECE, quoted: bool = False
) -> Iterator[Piece]:
    """Yield the file in pieces; feeds ``digest`` with the raw bytes, tells progress, can be stopped."""
    digest = digest if digest is not None else hashlib.sha256()
    plain = encoding in ("utf-8", "utf-8-sig", "ascii")
    decoder = None if plain else codecs.getincrementaldecoder(encoding)("strict")
    rest, line, done = b"", 1, 0
    with source.open() as file:
        while True:
            raw = file.read(size)
            digest.update(raw)
            last = not raw
            text = _plain(raw, done == 0) if decoder is None else _decoded(decoder, raw, last, line, notes)
            done += len(raw)
            whole = rest + text
            cut = len(whole) if last else _cut(whole, quoted)
            if len(whole) - cut > LONGEST_LINE:
                raise notes.refuse(
                    f"this line is longer than {LONGEST_LINE} bytes: a table of numbers has none such; check that the file is a text export",
                    line=line + whole[:cut].count(b"\n"),
                )
            piece, rest = whole[:cut], whole[cut:]
            if b"\x00" in piece:
                place = piece.index(b"\x00")
                raise notes.refuse(
                    "there is a NUL byte: the file is damaged or no plain text; export it again", line=line + _line_ends(piece[:place])
                )
            if piece or last:
                if decoder is None and not piece.isascii():
                    piece = _checked(piece, line, notes)
                ends = _line_ends(piece)
                yield Piece(piece, line, last, piece.endswith((b"\n", b"\r")), ends)
                line += ends
            told.pause(notes.where, done / max(source.size, 1))
            if last:
                return


def _line_ends(text: bytes) -> int:
    """Count LF, or CR where there is no LF."""
    return text.count(b"\n") or text.count(b"\r")


def _plain(raw: bytes, first: bool) -> bytes:
    return raw.removeprefix(codecs.BOM_UTF8) if first else raw


def _cut(text: bytes, quoted: bool) -> int:
    """Place after the last whole line; within quotes a line end does not count."""
    cut = text.rfind(b"\n") + 1
    if not cut:  # old line ends; a CR at the very end may belong to a CR LF
        cut = text.rfind(b"\r", 0, max(len(text) - 1, 0)) + 1
    for _ in range(20 if quoted else 0):
        if not cut or text.count(b'"', 0, cut) % 2 == 0:
            break
        cut = text.rfind(b"\n", 0, cut - 1) + 1
    return cut


def _decoded(decoder: Any, raw: bytes, last: bool, line: int, notes: Notes) -> bytes:
    try:
        return str(decoder.decode(raw, False)).encode() if not last else _rest(decoder, notes)
    except UnicodeError as problem:
        raise notes.refuse(
            f"bytes that are not {getattr(problem, 'encoding', 'text')} after about this line; pass the right encoding=, or export again",
            line=line,
        ) from problem


def _rest(decoder: Any, notes: Notes) -> bytes:
    try:
        return str(decoder.decode(b"", True)).encode()
    except UnicodeError:
        notes.add("The file stops in the middle of a character: the last line was left out where it is not whole.")
        return b""


def _checked(piece: bytes, line: int, notes: Notes) -> bytes:
    """Bytes that are not UTF-8 far down in the file: read them as cp1252 and say so."""
    try:
        piece.decode()
    except UnicodeDecodeError as problem:
        at = line + _line_ends(piece[: problem.start])
        notes.add(f"Line {at} is not UTF-8: read as cp1252.")
        return b"".join(_line_checked(part) for part in piece.splitlines(keepends=True))
    return piece


def _line_checked(part: bytes) -> bytes:
    try:
        part.decode()
    except UnicodeDecodeError:
        return part.decode("cp1252", "replace").encode()
    return part
