"""Tables turned on their side: frames across, quantities down, one block per vessel."""

from __future__ import annotations

import hashlib
import re
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ...errors import InputError, PulsekitError
from ...quantities import to_si
from ..clock import Clock
from ..recording import Recording
from .assemble import RawColumn, build
from .grammar import BLANK, MISSING, NUMBER, OVERFLOW, TEXT, classify, is_comment, number, plain
from .header import read_preamble
from .layout import Layout, split_line
from .marks import weigh
from .pieces import pieces
from .source import Source
from .stamps import settle
from .timeplan import stated_rate
from .told import Notes, Told, clean, listed
from .unit_words import HeaderUnit, read_unit, split_header

__all__ = ["is_across", "read_across", "stated_period"]

_LARGEST = 20_000_000
_FEWEST_FRAMES = 4
_FRAME = re.compile(r"(?i)^\W*(frames?|phases?|cardiac phase|time ?frame|image|no|nr|#|index|slice|sample)\b")
_TIME = re.compile(r"(?i)^\W*(trigger[\s_-]*)?(time|times|delay|zeit|t|trigger[\s_-]*delay)\b")
_PERIOD = re.compile(r"(?i)\b(r-?\s?r|rr)\b|cycle (length|time|duration)|(cardiac|heart|pulse) (period|cycle)|^period\b")
_PULSE = re.compile(r"(?i)(heart|pulse)[\s_-]*rate")


@dataclass
class _Row:
    line: int
    name: str
    unit: str | None
    cells: list[str]
    header: str


@dataclass
class _Block:
    title: str
    line: int
    rows: list[_Row] = field(default_factory=list)


def is_across(lines: Sequence[str], layout: Layout) -> bool:
    """Tell whether the rows begin with a name and go on with numbers, and are few."""
    numbers = sum(kind == NUMBER for kind in layout.kinds)
    if layout.kinds[0] != TEXT or numbers < _FEWEST_FRAMES or len(lines) > 1000:
        return False
    return numbers >= layout.width - 3 and all(kind in (NUMBER, BLANK) for kind in layout.kinds[3:])


def stated_period(preamble: dict[str, str]) -> float | None:
    """R-R interval or period that the preamble states. [s]"""
    for key, text in preamble.items():
        match = re.match(r"^\s*([\d.,]+)\s*([a-zA-Zµ/]*)", text)
        if not match:
            continue
        bracket = re.search(r"[(\[]([^)\]]+)[)\]]", key)
        unit = match[2] or (bracket[1] if bracket else "") or (re.search(r"_(ms|s)$", key) or ["", ""])[1]
        value = match[1].replace(",", ".") if match[1].count(",") == 1 and "." not in match[1] else match[1].replace(",", "")
        try:
            if _PERIOD.search(key) and unit:
                return to_si(f"{value} {unit}", "time", key)
            if _PULSE.search(key):
                return 1 / to_si(f"{value} {unit or 'bpm'}", "frequency", key)
        except (PulsekitError, ZeroDivisionError):
            continue
    return None


def _parted(lines: Sequence[str], delimiter: str) -> tuple[list[_Block], list[str], int]:
    """Blocks of rows 'name, number, number, ...'; titles and preamble are what stands between."""
    blocks: list[_Block] = []
    outside: list[str] = []
    above: list[str] = []
    used = 0
    fresh = True
    for line, text in enumerate(lines, 1):
        cells = [plain(cell) for cell in split_line(text, delimiter)]
        while cells and not cells[-1]:
            cells.pop()
        kinds = [classify(cell) for cell in cells[1:]]
        numbers = kinds.count(NUMBER)
        unit_cell = (
            len(cells) > 2
            and kinds[0] in (TEXT, BLANK)
            and bool(read_unit(re.sub(r"^[(\[]|[)\]]$", "", cells[1])).dimension or not cells[1])
        )
        rest = kinds[1:] if unit_cell else kinds
        row = (
            len(cells) > _FEWEST_FRAMES
            and classify(cells[0]) == TEXT
            and numbers >= _FEWEST_FRAMES
            and all(kind in (NUMBER, MISSING, OVERFLOW, BLANK) for kind in rest)
        )
        if row and not is_comment(text):
            if fresh or not blocks:
                title = next((entry for entry in reversed(above) if entry.strip()), "")
                blocks.append(_Block(clean(title), line))
                outside += above
                above = []
            name, unit, _ = split_header(cells[0])
            if unit_cell:
                unit = re.sub(r"^[(\[]|[)\]]$", "", cells[1])
            blocks[-1].rows.append(_Row(line, name, unit, cells[2:] if unit_cell else cells[1:], cells[0]))
            fresh = False
            used += 1
        elif text.strip():
            above.append(text)
            fresh = True
        else:
            fresh = True
            above.append("")
    return blocks, outside + above, used


def _merged(blocks: list[_Block]) -> list[_Block]:
    """Rows parted by a blank line only, with other names, belong to one block."""
    out: list[_Block] = []
    for block in blocks:
        names = {row.name for row in block.rows}
        if out and not block.title and not names & {row.name for row in out[-1].rows}:
            out[-1].rows += block.rows
        else:
            out.append(block)
    return out


def _title(text: str) -> str:
    """Turn 'Vessel: left ICA' into 'left ICA'."""
    bare = text.strip(' ,;\t#%*=-"[]')
    return clean(re.split(r"[:=]\s*|[;,\t]\s*", bare, maxsplit=1)[-1].strip() or bare)


def read_across(source: Source, encoding: str, told: Told, notes: Notes) -> Recording | None:
    """Read a table with frames across; None if the file is no such table."""
    if source.size > _LARGEST:
        return None
    digest = hashlib.sha256()
    text = b"".join(piece.text for piece in pieces(source, encoding, told, Notes(notes.where), digest=digest)).decode("utf-8", "replace")
    lines = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    if len(lines) > 20_000:
        return None
    candidates = (told.delimiter,) if told.delimiter else ("\t", ";", ",", "|")
    best: tuple[int, str, list[_Block], list[str]] | None = None
    for mark in candidates:
        blocks, outside, used = _parted(lines, mark)
        if used and (best is None or used > best[0]):
            best = (used, mark, blocks, outside)
    if best is None or best[0] < 2:
        return None
    _, delimiter, blocks, outside = best
    blocks = _merged(blocks)
    preamble = read_preamble([line for line in outside if line.strip()], delimiter)
    chosen, titles = _choose(blocks, told, notes)
    return _block(chosen, titles, delimiter, preamble, told, notes, source, encoding, digest.hexdigest())


def _choose(blocks: list[_Block], told: Told, notes: Notes) -> tuple[_Block, list[str]]:
    titles = [_title(block.title) or f"block {order + 1}" for order, block in enumerate(blocks)]
    if told.block is None:
        if len(blocks) > 1:
            raise notes.refuse(
                f"the file has {len(blocks)} blocks ({listed([repr(title) for title in titles], 8)}); choose one with block={titles[0]!r}",
                line=blocks[1].line,
            )
        return blocks[0], titles
    if isinstance(told.block, int) and not isinstance(told.block, bool):
        if not 0 <= told.block < len(blocks):
            raise InputError(
                f"block = {told.block} is not there; the file has blocks 0 to {len(blocks) - 1}: {listed(titles, 8)}",
                name="block",
                value=told.block,
            )
        return blocks[told.block], titles
    same = [
        order
        for order, (title, block) in enumerate(zip(titles, blocks, strict=True))
        if str(told.block).casefold() in (title.casefold(), block.title.casefold())
    ]
    if len(same) != 1:
        raise InputError(
            f"block = {told.block!r} {'fits more than one block' if same else 'is not there'}; the file has: {listed(titles, 8)}",
            name="block",
            value=told.block,
        )
    return blocks[same[0]], titles


def _block(
    block: _Block,
    titles: list[str],
    delimiter: str,
    preamble: dict[str, str],
    told: Told,
    notes: Notes,
    source: Source,
    encoding: str,
    sha256: str,
) -> Recording:
    """One block as columns: frames become rows."""
    decimal = _decimal(block, delimiter, told, notes)
    frames = max(len(row.cells) for row in block.rows)
    notes.add(
        f"Frames stand across and quantities down: {frames} frames were read from lines {block.rows[0].line} to {block.rows[-1].line}."
    )
    arrays: dict[int, NDArray[np.float64]] = {}
    for order, row in enumerate(block.rows):
        if abs(len(row.cells) - frames) > 0 and len(row.cells) < frames - 3:
            raise notes.refuse(
                f"this row has {len(row.cells)} values, others have {frames}; mend the table", line=row.line, column=row.name
            )
        values = np.full(frames, np.nan)
        values[: len(row.cells)] = [number(cell, decimal) for cell in row.cells]
        if absent := int(np.isnan(values).sum()):
            notes.add(f"Row {row.name!r}: {absent} of {frames} frames without a number: left out.")
        arrays[order] = values
    period = stated_period(preamble)
    clock, used = _frame_clock(block, arrays, preamble, period, told, notes)
    raws: list[Any] = []
    for order, row in enumerate(block.rows):
        if order in used or _FRAME.match(row.name):
            continue
        told_unit = told.units.get(row.name, told.units.get(row.header))
        unit = read_unit(told_unit if told_unit is not None else row.unit, row.name) if (told_unit or row.unit) else HeaderUnit()
        if told.columns is None or row.name in told.columns or row.header in told.columns:
            raws.append(RawColumn(_distinct(row.name, raws), row.header, arrays[order], unit))
    names = tuple(block.rows[order].name for order in used)
    return build(
        raws, [clock], notes, sha256=sha256, path=source.path or source.name, preamble=preamble, time_column=names[0] if names else "",
        layout={"encoding": encoding, "delimiter": {"\t": "tab"}.get(delimiter, delimiter), "decimal": decimal, "frames": "across"}, blocks=titles,
        order=tuple(row.name for row in block.rows), time_names=names[:1], time_unit=(block.rows[next(iter(used))].unit or "s") if used else "", stated_period=period,
    )  # fmt: skip


def _distinct(name: str, raws: Sequence[RawColumn]) -> str:
    taken = {raw.name for raw in raws}
    order = 2
    fresh = name
    while fresh in taken:
        fresh, order = f"{name} ({order})", order + 1
    return fresh


def _decimal(block: _Block, delimiter: str, told: Told, notes: Notes) -> str:
    if told.decimal:
        return told.decimal
    evidence = weigh((row.line, row.cells) for row in block.rows)
    if evidence.torn:
        (first, one), (second, other) = evidence.torn
        raise notes.refuse(
            f"decimal marks contradict each other: {one!r} in line {first} and {other!r} in line {second}; pass decimal='.' or decimal=','",
            line=second,
        )
    mark = evidence.decimal()
    if mark is None and (unclear := evidence.comma_unclear or (evidence.dot_unclear if delimiter == ";" else None)):
        raise notes.refuse(
            f"{unclear[1]!r} can be read in two ways and no cell settles it; pass decimal='.' or decimal=','", line=unclear[0]
        )
    if mark == ",":
        notes.add("Decimal mark is the comma.")
    return mark or "."


def _frame_clock(
    block: _Block, arrays: dict[int, NDArray[np.float64]], preamble: dict[str, str], period: float | None, told: Told, notes: Notes
) -> tuple[Clock, dict[int, None]]:
    """Instants of the frames: a row of times, or a spacing that is told or stated."""
    for order, row in enumerate(block.rows):
        wanted = told.time is not None and told.time in (row.name, row.header)
        if wanted or (told.time is None and _TIME.match(row.name) and not _FRAME.match(row.name)):
            unit = read_unit(str(told.units.get(row.name) or row.unit or ""))
            if unit.dimension != "time":
                raise notes.refuse(
                    f"the times of the frames have {'no unit' if not unit.text else f'the unit {unit.text!r}'}; pass units={{{row.name!r}: 'ms'}}",
                    line=row.line,
                    column=row.name,
                )
            factor = to_si(f"1 {unit.unit}", "time", "unit")
            stamps = arrays[order] * factor
            digits = max((len(cell.partition(".")[2] or cell.partition(",")[2]) for cell in row.cells), default=0)
            settled = settle(
                stamps, resolution=factor * 10.0**-digits, notes=notes, name=row.name, line_of=lambda _row, line=row.line: line  # type: ignore[misc]
            )
            if settled.rows is not None:
                for place in arrays:
                    arrays[place] = arrays[place][settled.rows]
            _compare_period(settled.clock, period, notes)
            return settled.clock, {order: None}
    count = len(next(iter(arrays.values())))
    rate = told.sample_rate or stated_rate(preamble, notes)
    if rate is None:
        raise notes.refuse(
            "the frames have no row of times; pass sample_rate= (frames per second)"
            + (f"; R-R is {period:.4g} s, but whether the frames fill it is not stated" if period else ""),
            line=block.rows[0].line,
        )
    if told.sample_rate is None:
        notes.add(f"Frames are {1e3 / rate:.6g} ms apart as the preamble states.")
    clock = Clock(interval=1 / rate, count=count, name="frame")
    _compare_period(clock, period, notes)
    return clock, {}


def _compare_period(clock: Clock, period: float | None, notes: Notes) -> None:
    """Say how frames times spacing and R-R agree: the period is R-R."""
    if period is None or len(clock) < 2:
        return
    spacing = clock.interval or (clock.last - clock.first) / (len(clock) - 1)
    filled = spacing * len(clock)
    if abs(filled - period) > 0.5 * spacing:
        notes.add(f"R-R is {period:.4g} s, frames times spacing {filled:.4g} s: the period is R-R, the frames do not fill it.")
    else:
        notes.add(f"R-R is {period:.4g} s and the {len(clock)} frames fill it.")
