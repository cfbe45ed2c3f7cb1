"""Settles the decimal mark of a file: from its head, from samples, and if need be from all of it."""

from __future__ import annotations

import re

import numpy as np

from .grammar import NUMBER
from .head import HEAD
from .layout import Layout, split_line
from .marks import Evidence, weigh
from .pieces import pieces
from .source import Source
from .told import Notes, Told

__all__ = ["settle_marks"]

_SAMPLE = 20_000
_SAMPLES = 8


def settle_marks(source: Source, layout: Layout, rows: list[tuple[int, list[str]]], told: Told, notes: Notes) -> None:
    """Decimal and thousands marks from head, samples and, if need be, the whole file."""
    useful = [place for place, kind in enumerate(layout.kinds) if kind == NUMBER]
    evidence = weigh((line, [cells[place] for place in useful]) for line, cells in rows)
    if told.decimal is not None:
        layout.decimal = told.decimal
        return
    if layout.delimiter == "," and not (layout.quoted and (evidence.comma or evidence.comma_groups or evidence.comma_unclear or evidence.grouped)):
        layout.decimal = "."
        _doubt_commas(layout, rows, notes, told)
        return
    if evidence.decimal() is None and not evidence.torn:
        _weigh_samples(source, layout, useful, evidence)
    if evidence.decimal() is None and not evidence.torn:
        _weigh_all(source, layout, useful, evidence, notes)
    if torn := evidence.torn:
        raise notes.refuse(
            f"decimal marks contradict each other: {torn[0][1]!r} in line {torn[0][0]} and {torn[1][1]!r} in line {torn[1][0]}; pass decimal='.' or decimal=','",
            line=torn[1][0],
        )
    layout.decimal = evidence.decimal()
    if layout.decimal is None:
        _unclear(layout, evidence, notes)
    other = evidence.comma_unclear or evidence.comma_groups if layout.decimal == "." else evidence.dot_unclear or evidence.dot_groups
    other = other or evidence.grouped
    if other:
        shown = "comma" if layout.decimal == "." else "dot"
        notes.add(
            f"The {shown} parts thousands (as in {other[1]!r}, line {other[0]}): the decimal mark {layout.decimal!r} is settled by other cells."
        )
    elif layout.decimal == ",":
        notes.add("Decimal mark is the comma.")


def _unclear(layout: Layout, evidence: Evidence, notes: Notes) -> None:
    """No cell settles the mark: integers, or every cell could be read in two ways."""
    comma, dot = evidence.comma_unclear, evidence.dot_unclear
    if comma or (dot and layout.delimiter == ";"):
        line, text = comma or dot or (0, "")
        bare = text.replace(",", "").replace(".", "")
        mark = "," if comma else "."
        other = "." if comma else ","
        raise notes.refuse(
            f"{text!r} can be read as {text.replace(',', '.')} or as {bare}, and no cell of the file settles it; pass decimal={mark!r} or decimal={other!r}",
            line=line,
        )
    layout.decimal = "."
    if dot:
        notes.add(f"Every number has three digits after the dot (as in {dot[1]!r}): the dot was taken as the decimal mark.")


def _doubt_commas(layout: Layout, rows: list[tuple[int, list[str]]], notes: Notes, told: Told) -> None:
    """Whole numbers parted by commas, with leading zeros: the commas may be decimal marks."""
    if told.delimiter or layout.width < 2:
        return
    for line, cells in rows[:500]:
        if any("." in cell or ":" in cell for cell in cells):
            return
        for place in range(1, layout.width):
            text = cells[place].strip()
            if len(text) > 1 and text.startswith("0") and text.isdigit() and cells[place - 1].strip().lstrip("+-").isdigit():
                layout.doubt = line
                return
    if layout.width == 2 and rows and not any(len(cells[0].strip()) != len(cells[0]) or cells[1].startswith(" ") for _, cells in rows[:50]):
        layout.doubt = rows[0][0]


def _weigh_samples(source: Source, layout: Layout, useful: list[int], evidence: Evidence) -> None:
    if layout.encoding.startswith(("utf-16", "utf-32")) or source.size < 2 * HEAD:
        return
    for begin in np.linspace(HEAD, max(source.size - _SAMPLE, HEAD), _SAMPLES):
        part = source.part(int(begin), _SAMPLE).decode("latin-1")
        for line in re.split(r"[\r\n]+", part)[1:-1]:
            cells = split_line(line, layout.delimiter)
            if len(cells) == layout.width:
                weigh([(0, [cells[place] for place in useful])], evidence)
        if evidence.decimal() or evidence.torn:
            return


def _weigh_all(source: Source, layout: Layout, useful: list[int], evidence: Evidence, notes: Notes) -> None:
    """Look for one cell that settles the mark in the whole file."""
    pattern = re.compile(rb"(?<![\d.,:])(?:0[.,]\d|\d+[.,](?:\d{1,2}|\d{4,})(?!\d)|\d{4,}[.,]\d|\d{1,3}[.,]\d{3}[.,])")
    for piece in pieces(source, layout.encoding, Told(), notes):
        text = piece.text
        if b"," not in text and b"." not in text:
            continue
        for found in pattern.finditer(text):
            begin = max(text.rfind(b"\n", 0, found.start()), text.rfind(b"\r", 0, found.start())) + 1
            end = min([place for place in (text.find(b"\n", found.end()), text.find(b"\r", found.end())) if place >= 0], default=len(text))
            line = piece.first_line + text.count(b"\n", 0, begin)
            if line <= layout.first:
                continue
            cells = split_line(text[begin:end].decode("utf-8", "replace"), layout.delimiter)
            if len(cells) == layout.width:
                weigh([(line, [cells[place] for place in useful])], evidence)
                if evidence.decimal() or evidence.torn:
                    return
