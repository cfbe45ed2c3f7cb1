"""The first lines of a text file, from which its layout is settled."""

from __future__ import annotations

from collections.abc import Iterator

from .pieces import pieces
from .source import Source
from .told import Notes, Told

__all__ = ["HEAD", "head_lines"]

#: Bytes that are looked at before reading.
HEAD = 400_000


def head_lines(source: Source, encoding: str, told: Told, notes: Notes) -> list[str]:
    """Lines of the first part of the file."""
    quiet = Told(encoding=told.encoding, stop=told.stop)
    size = HEAD * (2 if encoding.startswith("utf-16") else 1)
    first = next(iter(pieces(source, encoding, quiet, notes, size=size)), None)
    text = first.text.decode("utf-8", "replace") if first else ""
    if not text.strip():
        first_two = list(_two(source, encoding, quiet, notes, size))
        text = "".join(piece.decode("utf-8", "replace") for piece in first_two)
    lines = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    if lines and not lines[-1]:
        lines.pop()
    lines = _joined_quotes(lines)
    if not any(line.strip() for line in lines):
        raise notes.refuse("the file holds no text")
    return lines[:2000]


def _two(source: Source, encoding: str, told: Told, notes: Notes, size: int) -> Iterator[bytes]:
    for order, piece in enumerate(pieces(source, encoding, told, notes, size=size)):
        yield piece.text
        if order >= 3:
            return


def _joined_quotes(lines: list[str]) -> list[str]:
    """A header cell may hold line ends within quotes: join it, and keep the count of lines with blank ones."""
    out = lines[:]
    place = 0
    while place < min(len(lines), 200):
        if lines[place].count('"') % 2:
            for more in range(1, 6):
                joined = " ".join(lines[place : place + more + 1])
                if joined.count('"') % 2 == 0 and place + more < len(lines) and not lines[place][:1].isdigit():
                    out[place : place + more + 1] = [""] * more + [joined]
                    place += more
                    break
        place += 1
    return out
