"""Traps of measurement in the signal itself: wrapped velocities are refused, rectified reversal is remarked, area gives the radius."""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import Any

import numpy as np

from ..errors import PulsekitError, SignalError
from ..quantities import parse_given
from ..trace import Signal
from .case import Case
from .workspace import Workspace

__all__ = ["encoding_of_preamble", "rectified_words", "refuse_wrapped", "with_radius_of_area"]

_SIZES = ("radius", "diameter", "outer_diameter")


def refuse_wrapped(signal: Signal, limit: float) -> None:
    """Refuse a phase-contrast velocity that jumps by about twice its encoding limit [m/s]: it has wrapped.

    Raises
    ------
    SignalError
        Naming the frame.
    """
    jumps = np.abs(np.diff(signal.values))
    wrapped = np.flatnonzero(jumps > 1.5 * limit)
    if wrapped.size:
        frame = int(wrapped[0]) + 2
        raise SignalError(
            f"column {signal.name!r} jumps by {100 * jumps[wrapped[0]]:.4g} cm/s at frame {frame}, about twice the velocity-encoding limit of "
            f"{100 * limit:.4g} cm/s: the velocity has wrapped; unwrap it at the source or leave the frame out",
            column=signal.name,
        )  # fmt: skip


def encoding_of_preamble(preamble: Mapping[str, str]) -> float | None:
    """Velocity-encoding limit that the head of a file states, or None. [m/s]

    >>> encoding_of_preamble({"Velocity encoding (cm/s)": "120"})
    1.2
    """
    for key, text in preamble.items():
        match = re.match(r"\s*(?:velocity[ -]?encoding|venc)\b[^()]*(?:\((?P<unit>[^)]*)\))?\s*$", str(key), re.IGNORECASE)
        if match:
            written = str(text).strip()
            try:
                return parse_given(f"{written} {match['unit']}" if match["unit"] else written, "velocity", str(key)).value or None
            except PulsekitError:
                continue
    return None


def rectified_words(signal: Signal, cycles: Any) -> str | None:
    """Remark where a velocity comes to zero twice a beat and never changes sign, else None."""
    values = signal.values
    greatest = float(np.max(np.abs(values)))
    if greatest == 0 or float(values.min()) < -0.01 * greatest:
        return None
    folded = cycles.folded((np.arange(200) + 0.5) / 200)
    touches = []
    for beat in folded:
        low = beat[np.isfinite(beat)] < 0.04 * greatest
        starts = np.flatnonzero(low[1:] & ~low[:-1]).size + int(bool(low.size and low[0] and not low[-1]))
        touches.append(starts)
    if not touches or np.median(touches) < 2:
        return None
    return (
        f"Column {signal.name!r} comes to zero twice in each cycle and never changes sign: reversed flow may have been recorded as forward "
        "(rectified). The oscillatory shear index is then too low; export the direction, or forward and reverse as two columns."
    )


def with_radius_of_area(case: Case, workspace: Workspace) -> tuple[Case, tuple[str, ...]]:
    """Return the case with the radius and wall motion that the area per frame gives, where the case states none."""
    name = case.get("recording.area")
    if name is None:
        return case, ()
    signal = workspace.recording(case)[str(name)]
    if signal.dimension != "area" or not float(signal.values.min()) > 0:
        raise SignalError(
            f"recording.area: column {signal.name!r} in {signal.unit or 'no unit'} must hold a positive area, such as mm^2", column=signal.name
        )
    radii = np.sqrt(signal.values / np.pi)
    # The radius of the mean area carries the mean flow of a given velocity.
    radius = float(np.sqrt(signal.values.mean() / np.pi))
    motion = float(radii.max() - radii.min()) / radius
    remarks = []
    if not any(case.get(f"tube.{size}") is not None for size in _SIZES):
        case = case.with_value("tube.radius", f"{radius * 1e3:.6g} mm")
        remarks.append(f"The radius of {radius * 1e3:.4g} mm is that of the mean of column {signal.name!r}; state tube.radius with its uncertainty to overrule it.")
    if case.get("tube.wall_motion") is None:
        case = case.with_value("tube.wall_motion", f"{100 * motion:.3g} %")
        remarks.append(f"By column {signal.name!r} the radius changes by {100 * motion:.3g} % over the cycle (largest minus smallest).")
    return case, tuple(remarks)
