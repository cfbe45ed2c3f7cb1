"""A recording shown before it is used: as text and as a panel in a notebook."""

from __future__ import annotations

from html import escape
from typing import TYPE_CHECKING

import numpy as np

from ...quantities import from_si
from .stamps import shown_time
from .told import clean

if TYPE_CHECKING:
    from ..recording import Recording

__all__ = ["as_html", "as_text"]

_ROWS = 5


def _rate(recording: Recording) -> list[str]:
    """Sentences on the time axes."""
    said = []
    for order, clock in enumerate(recording.clocks):
        of = f"{clock.name}: " if len(recording.clocks) > 1 else ""
        if clock.interval:
            how = f"one sample every {shown_time(clock.interval)} ({1 / clock.interval:.6g} Hz)"
        elif clock.typical:
            how = f"not evenly spaced, mostly {shown_time(clock.typical)}"
        else:
            how = "not evenly spaced"
        gaps = f", {len(clock.gaps)} gap{'s' if len(clock.gaps) > 1 else ''}" if clock.gaps else ", no gaps"
        restarts = f", {len(clock.segments)} stretches" if len(clock.segments) > 1 else ""
        origin = f", beginning {clean(clock.origin)}" if clock.origin and order == 0 else ""
        said.append(f"{of}{len(clock)} rows over {shown_time(clock.last - clock.first)}, {how}{gaps}{restarts}{origin}")
    return said


def _cells(recording: Recording) -> tuple[list[str], list[list[str]]]:
    """Heads and first rows, in the units of the file."""
    clock = recording.clock
    count = min(_ROWS, len(clock))
    instants = clock.stamps[:count] if clock.stamps is not None else clock.start + (clock.interval or 0.0) * np.arange(count)
    heads = ["time [s]"]
    body = [[f"{instant:.6g}"] for instant in instants]
    for column in recording.table[:12]:
        if column.clock:
            continue
        heads.append(clean(f"{column.name} [{column.unit}]" if column.unit else column.name))
        shown = from_si(np.array(column.values[:count]), column.unit, column.dimension) if column.dimension else column.values[:count]
        for row, value in zip(body, shown, strict=False):
            row.append("" if np.isnan(value) else f"{value:.6g}")
    return heads, body


def as_text(recording: Recording) -> str:
    """Columns, units, rate, gaps, remarks and first rows as plain text."""
    units = recording.units
    lines = [f"Recording {clean(recording.path, 120)}"]
    lines += [f"  time     {sentence}" for sentence in _rate(recording)]
    lines += [f"  column   {clean(name)}  {'[' + clean(units[name]) + ']' if units[name] else '(no unit)'}" for name in recording.columns]
    if recording.left_aside:
        lines.append(f"  aside    {', '.join(clean(name) for name in recording.left_aside)}")
    if recording.layout:
        lines.append("  file     " + ", ".join(f"{key} {value}" for key, value in recording.layout.items()))
    lines += [f"  stated   {clean(key)}: {clean(value)}" for key, value in list(recording.preamble.items())[:8]]
    lines += [f"  remark   {clean(remark, 400)}" for remark in recording.remarks] or ["  remark   nothing was guessed, repaired or dropped"]
    heads, body = _cells(recording)
    widths = [max(len(row[place]) if place < len(row) else 0 for row in [heads, *body]) for place in range(len(heads))]
    lines.append("")
    lines += ["  " + "  ".join(cell.rjust(width) for cell, width in zip(row, widths, strict=False)) for row in [heads, *body]]
    return "\n".join(lines)


def as_html(recording: Recording) -> str:
    """Return the same as a panel; every text from the file is escaped."""
    heads, body = _cells(recording)
    cell = "padding:2px 12px 2px 0;text-align:right;font-variant-numeric:tabular-nums"
    head = "".join(f"<th style='{cell};border-bottom:1px solid currentColor'>{escape(text)}</th>" for text in heads)
    rows = "".join("<tr>" + "".join(f"<td style='{cell}'>{escape(text)}</td>" for text in row) + "</tr>" for row in body)
    remarks = (
        "".join(f"<li>{escape(clean(remark, 400))}</li>" for remark in recording.remarks)
        or "<li>Nothing was guessed, repaired or dropped.</li>"
    )
    rate = "<br>".join(escape(sentence) for sentence in _rate(recording))
    aside = f"<br>left aside: {escape(', '.join(clean(name) for name in recording.left_aside))}" if recording.left_aside else ""
    return (
        "<div style='border-left:3px solid #1f6f8b;padding:4px 14px;max-width:900px'>"
        f"<div style='font-weight:600'>{escape(clean(recording.path, 120))}</div><div>{rate}{aside}</div>"
        f"<table style='border-collapse:collapse;margin:8px 0'><thead><tr>{head}</tr></thead><tbody>{rows}</tbody></table>"
        f"<ul style='margin:4px 0 0 -18px'>{remarks}</ul></div>"
    )
