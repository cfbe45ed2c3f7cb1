"""Which characters the bytes of a file stand for."""

from __future__ import annotations

import codecs

from .source import Source
from .told import Notes, Told

__all__ = ["find_encoding"]

_MARKS = (
    (codecs.BOM_UTF8, "utf-8-sig"),
    (codecs.BOM_UTF32_LE, "utf-32"),
    (codecs.BOM_UTF32_BE, "utf-32"),
    (codecs.BOM_UTF16_LE, "utf-16"),
    (codecs.BOM_UTF16_BE, "utf-16"),
)
_HEAD = 262_144


def find_encoding(source: Source, told: Told, notes: Notes) -> str:
    """Name the encoding: told, marked by a byte-order mark, or settled from the bytes."""
    head = source.part(0, _HEAD)
    marked = next((name for mark, name in _MARKS if head.startswith(mark)), None)
    if told.encoding is not None:
        # 'utf-8' on a file with a mark, or 'utf-16' without: the mark is no part of the first name.
        return (
            marked
            if marked and codecs.lookup(told.encoding).name in ("utf-8", "utf-16", "utf-16-le", "utf-16-be", "utf-32")
            else told.encoding
        )
    if marked:
        return marked
    if b"\x00" in head:
        return _wide(head, notes)
    tail = source.part(max(source.size - _HEAD, _HEAD), _HEAD)
    if _is_utf8(head) and _is_utf8(tail, inside=True):
        return "utf-8"
    return _eight_bit(head + tail, notes)


def _wide(head: bytes, notes: Notes) -> str:
    """Tell UTF-16 without a mark by where its NUL bytes stand; refuse other NUL bytes."""
    even, odd = head[0::2].count(0), head[1::2].count(0)
    half = max(len(head) // 2, 1)
    for name, many, few in (("utf-16-le", odd, even), ("utf-16-be", even, odd)):
        if many > 0.7 * half and few < 0.02 * half:
            notes.add(f"Encoding taken as {name} (no byte-order mark; every other byte is NUL).")
            return name
    place = head.index(0)
    line = head[:place].count(b"\n") + 1
    raise notes.refuse("there is a NUL byte: this is no plain text, or the file is damaged; export it again as text (CSV)", line=line)


def _is_utf8(part: bytes, *, inside: bool = False) -> bool:
    if part.isascii():
        return True
    if inside:  # it may begin within a character
        part = part.lstrip(bytes(range(0x80, 0xC0)))
    try:
        codecs.getincrementaldecoder("utf-8")("strict").decode(part)
    except UnicodeDecodeError:
        return False
    return True


def _eight_bit(part: bytes, notes: Notes) -> str:
    """Choose among encodings that are not UTF-8: names and units may depend on it, numbers do not."""
    chosen = "cp1252"
    if sum(byte > 127 for byte in part) >= 24:  # fewer tell a detector nothing
        from charset_normalizer import from_bytes

        lines = b"\n".join(line for line in part.splitlines() if not line.isascii())
        best = from_bytes(
            lines[:20_000], cp_isolation=["cp1252", "cp1250", "cp1251", "mac_roman", "cp437", "shift_jis", "gb18030", "euc_kr", "big5"]
        ).best()
        if best is not None:
            chosen = best.encoding
    if chosen == "cp1252":
        try:
            part.decode("cp1252")
        except UnicodeDecodeError:
            chosen = "latin-1"
    notes.add(f"Encoding taken as {chosen} (the bytes are not UTF-8); pass encoding= if names or units look wrong.")
    return chosen
