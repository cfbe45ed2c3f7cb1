"""What every picture of a workbench is made of: panels and series as plain values, and their packing for the page.

A chart is a function of an answer that returns a `Panel`. The page draws panels; it knows nothing of answers.
"""

from __future__ import annotations

import zlib
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

__all__ = ["Axis", "Panel", "Series", "pack_panels", "thinned"]

_MOST_POINTS = 2400


@dataclass(frozen=True, kw_only=True)
class Axis:
    """An axis: its label with unit, fixed ends if any, and the cursor that moves along it.

    ``link`` names the cursor that all panels with the same link share. ``starts`` and ``lengths`` map one
    period of that cursor into several stretches of this axis (the cycles of a recording).
    """

    label: str
    low: float | None = None
    high: float | None = None
    link: str = ""
    zero: bool = False  # zero belongs into the picture
    starts: Sequence[float] = ()
    lengths: Sequence[float] = ()
    ticks: Mapping[float, str] | None = None


@dataclass(frozen=True, eq=False, kw_only=True)
class Series:
    """One thing drawn in a panel.

    ``kind`` is one of

    - ``line``: x, y; a NaN breaks the line
    - ``band``: x, low, high
    - ``stems``: x, y, error (NaN where there is none)
    - ``dots``: x, y
    - ``rule``: y, one value, a level line
    - ``heat``: values (n_y, n_x) row by row, over the extents in ``options``; signed, white at zero
    - ``slice``: the column of a heat at a cursor, drawn as a line; ``options["of"]`` names panel and series
    - ``spans``: start, end of stretches of the x axis; ``options["states"]`` says how each is shown
    - or a kind for which a workbench brings its own painter

    ``role`` is the meaning, hence the colour: a name in the palette. ``pale`` is for the pinned answer.
    """

    kind: str
    role: str
    arrays: Sequence[ArrayLike] = ()
    name: str = ""
    pale: bool = False
    dash: bool = False
    thin: bool = False
    reading: bool = False  # its value at the cursor is printed
    options: Mapping[str, Any] = field(default_factory=dict)


@dataclass(frozen=True, eq=False, kw_only=True)
class Panel:
    """One picture."""

    id: str
    title: str
    x: Axis
    y: Axis
    series: Sequence[Series] = ()
    note: str = ""
    click: str = ""  # what a click on a span asks for


def pack_panels(panels: Iterable[Panel]) -> tuple[list[dict[str, Any]], bytes]:
    """Return panels as JSON and one run of float32 numbers to which the JSON points.

    Each series gets ``at``, a list of (first, count) into the numbers; each panel a ``stamp`` that changes when anything in it does.

    >>> panel = Panel(id="a", title="A", x=Axis(label="x"), y=Axis(label="y"), series=[Series(kind="line", role="flow", arrays=[[0, 1], [2, 3]])])
    >>> described, numbers = pack_panels([panel])
    >>> described[0]["series"][0]["at"], len(numbers)
    ([[0, 2], [2, 2]], 16)
    """
    chunks: list[NDArray[np.float32]] = []
    first = 0
    described = []
    for panel in panels:
        stamp = 0
        rows = []
        for series in panel.series:
            places = []
            for array in series.arrays:
                numbers = np.ascontiguousarray(np.asarray(array, dtype=np.float32).ravel())
                stamp = zlib.crc32(numbers.view(np.uint8), stamp)
                chunks.append(numbers)
                places.append([first, int(numbers.size)])
                first += int(numbers.size)
            rows.append(
                {
                    "kind": series.kind, "role": series.role, "name": series.name, "pale": series.pale, "dash": series.dash,
                    "thin": series.thin, "reading": series.reading, "options": dict(series.options), "at": places,
                }
            )  # fmt: skip
        entry = {
            "id": panel.id, "title": panel.title, "note": panel.note, "click": panel.click, "x": _axis(panel.x), "y": _axis(panel.y),
            "series": rows,
        }  # fmt: skip
        described.append(entry | {"stamp": zlib.crc32(repr(_without_places(entry)).encode(), stamp)})
    return described, b"".join(chunk.tobytes() for chunk in chunks)


def _axis(axis: Axis) -> dict[str, Any]:
    return {
        "label": axis.label, "low": axis.low, "high": axis.high, "link": axis.link, "zero": axis.zero,
        "starts": [float(value) for value in axis.starts], "lengths": [float(value) for value in axis.lengths],
        "ticks": None if axis.ticks is None else [[float(at), text] for at, text in axis.ticks.items()],
    }  # fmt: skip


def _without_places(entry: Mapping[str, Any]) -> Any:
    """The description without the places of its numbers, which move when another panel grows."""
    return {**entry, "series": [{key: value for key, value in row.items() if key != "at"} for row in entry["series"]]}


def thinned(x: ArrayLike, y: ArrayLike, *, most: int = _MOST_POINTS) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Keep the least and greatest of each run of samples, so that a long trace keeps its peaks.

    >>> x, y = thinned(range(10_000), [0.0] * 9_999 + [7.0])
    >>> x.size <= 2400, float(y.max())
    (True, 7.0)
    """
    places, values = np.asarray(x, dtype=float), np.asarray(y, dtype=float)
    if places.size <= most:
        return places, values
    run = int(np.ceil(places.size / (most // 2 - 1)))
    whole = places.size // run * run
    blocks = values[:whole].reshape(-1, run)
    start = np.arange(blocks.shape[0]) * run
    picks = np.unique(np.concatenate([start + blocks.argmin(axis=1), start + blocks.argmax(axis=1), np.arange(whole, places.size)[-2:]]))
    if whole < places.size:
        picks = np.unique(np.append(picks, whole + int(values[whole:].argmax())))
    return places[picks], values[picks]
