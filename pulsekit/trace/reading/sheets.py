"""Spreadsheets: the sheet is turned into a table of text and read like one."""

from __future__ import annotations

import datetime as dt
import hashlib
import io
import re
import zipfile
from typing import Any

from ...errors import InputError
from ..recording import Recording
from .grammar import NUMBER, classify
from .source import Source
from .told import Notes, Told, clean, listed

__all__ = ["check_zip", "read_xlsx"]

_LARGEST = 1_500_000_000
_SMALL = 50_000_000
_RATIO = 200
_WIDEST = 2000


def check_zip(source: Source, notes: Notes) -> list[str]:
    """Refuse a zip that grows beyond bounds; return the names in it."""
    try:
        with source.open() as file, zipfile.ZipFile(file) as archive:
            entries = archive.infolist()
    except (zipfile.BadZipFile, OSError, ValueError, NotImplementedError) as problem:
        raise notes.refuse("the file is a damaged zip archive; export it again") from problem
    total = sum(entry.file_size for entry in entries)
    if total > _LARGEST or (total > _SMALL and total > _RATIO * max(source.size, 1)) or len(entries) > 10_000:
        raise notes.refuse(
            f"the packed file of {source.size} bytes grows to {total} bytes: refused; export the sheet as CSV if you trust it"
        )
    return [entry.filename for entry in entries]


def read_xlsx(source: Source, told: Told, notes: Notes) -> Recording:
    """Read one sheet of a workbook; formulas count with the values that were saved with them."""
    names = check_zip(source, notes)
    if "xl/workbook.xml" not in names:
        raise notes.refuse("this is a zip archive, not a workbook; unpack it and read the file inside")
    from .formats import optional

    openpyxl = optional("openpyxl", notes)
    with source.open() as file:
        data = file.read()
    book = openpyxl.load_workbook(io.BytesIO(data), read_only=True, data_only=True, keep_links=False)
    try:
        sheets = {sheet.title: sheet for sheet in book.worksheets}
        texts = {title: _as_text(sheet, told, notes) for title, sheet in _asked(sheets, told).items()}
    finally:
        book.close()
    full = [title for title, text in texts.items() if text.count("\n") > 2 and re.search(r"\d", text)]
    if not full:
        raise notes.refuse(f"no sheet holds a table of numbers (sheets: {listed([clean(title) for title in sheets], 8)})")
    if len(full) > 1:
        raise notes.refuse(
            f"several sheets hold tables ({listed([repr(clean(title)) for title in full], 8)}); choose one with block={full[0]!r}"
        )
    if len(sheets) > 1:
        notes.add(f"Sheet {clean(full[0])!r} was read, of: {', '.join(clean(title) for title in sheets)}.")
    return _read_table(texts[full[0]], source, told, notes, tuple(sheets), hashlib.sha256(data).hexdigest())


def _asked(sheets: dict[str, Any], told: Told) -> dict[str, Any]:
    if told.block is None:
        return sheets
    titles = list(sheets)
    if isinstance(told.block, int) and not isinstance(told.block, bool) and 0 <= told.block < len(titles):
        return {titles[told.block]: sheets[titles[told.block]]}
    if told.block not in sheets:
        raise InputError(
            f"block = {told.block!r}: there is no such sheet; there are: {listed([clean(title) for title in titles], 8)}",
            name="block",
            value=told.block,
        )
    return {str(told.block): sheets[str(told.block)]}


def _as_text(sheet: Any, told: Told, notes: Notes) -> str:
    """Rows as lines parted by tabs; numbers keep all their digits."""
    lines = []
    for order, row in enumerate(sheet.iter_rows(values_only=True, max_col=_WIDEST + 1), 1):
        if len(row) > _WIDEST and any(value is not None for value in row[_WIDEST:]):
            raise notes.refuse(f"sheet {clean(sheet.title)!r} has more than {_WIDEST} columns", line=order)
        lines.append("\t".join(_cell(value, order, place, sheet.title, told, notes) for place, value in enumerate(row)).rstrip("\t"))
        if order % 5000 == 0:
            told.pause(notes.where, 0.5)
    return "\n".join(_even(lines)) + "\n"


def _even(lines: list[str]) -> list[str]:
    """Rows of a table keep their trailing empty cells, so that all are of one width; lines above it do not."""
    widths = [line.count("\t") for line in lines]
    width = max(widths, default=0)
    return [
        line + "\t" * (width - count) if 0 < count < width and re.match(r"^\s*[\d.+-]", line) else line
        for line, count in zip(lines, widths, strict=True)
    ]


def _cell(value: Any, order: int, place: int, title: str, told: Told, notes: Notes) -> str:
    if value is None:
        return ""
    if isinstance(value, bool):
        return "1" if value else "0"
    if isinstance(value, (int, float)):
        text = repr(float(value)) if isinstance(value, float) else str(value)
        return text.replace(".", ",") if told.decimal == "," else text
    if isinstance(value, dt.datetime):
        return value.isoformat(sep=" ", timespec="microseconds")
    if isinstance(value, dt.timedelta):
        seconds = value.total_seconds()
        return f"{int(seconds // 3600):02d}:{int(seconds % 3600 // 60):02d}:{seconds % 60:09.6f}"
    if isinstance(value, (dt.date, dt.time)):
        return value.isoformat()
    text = " ".join(str(value).split())
    if told.decimal is None and re.match(r"^[+-]?\d[\d.]*,\d", text) and classify(text) == NUMBER:
        column = chr(65 + place) if place < 26 else f"column {place + 1} "
        raise notes.refuse(
            f"cell {column}{order} of sheet {clean(title)!r} is the text {clean(text, 20)!r}, not a number; turn the column into numbers in the sheet, or export as CSV",
            line=order,
        )
    return text


def _read_table(text: str, source: Source, told: Told, notes: Notes, sheets: tuple[str, ...], sha256: str) -> Recording:
    from dataclasses import replace

    from .textread import read_text

    data = text.encode()
    plain = Source(name=source.name, size=len(data), data=data)
    recording = read_text(plain, replace(told, delimiter="\t", encoding="utf-8", decimal=told.decimal or ".", block=None), notes)
    return replace(recording, path=source.path or source.name, sha256=sha256, layout={"format": "xlsx"}, blocks=recording.blocks or sheets)
