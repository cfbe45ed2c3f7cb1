"""Our colours, each with one meaning, in report and workbench alike.

Chosen to stay apart under the common colour-vision deficiencies and in grey print (lightness differs),
and to be legible on a white and on a dark page. Verdicts also carry a word and a shape.
"""

from __future__ import annotations

from types import MappingProxyType

__all__ = ["DARK", "FIELD_STOPS", "LIGHT", "VERDICT_SHAPES"]

#: Meaning -> colour on a light page.
LIGHT = MappingProxyType(
    {
        "paper": "#ffffff",
        "panel": "#f6f5f1",
        "ink": "#22252b",
        "quiet": "#6b7078",
        "rule": "#d9d6ce",
        "measured": "#8c9099",  # what was recorded
        "flow": "#1f6f8b",  # flow and velocity
        "shear": "#b3471d",  # wall shear stress
        "gradient": "#5b4a9e",  # pressure and its gradient
        "steady": "#6b7078",  # the steady estimate
        "cursor": "#d08700",  # the one cursor
        "left_out": "#c9a9a0",  # cycles left out
        "holds": "#2a7f62",
        "doubtful": "#a86a00",
        "fails": "#a8243b",
        "unknown": "#6b7078",
    }
)

#: The same meanings on a dark page.
DARK = MappingProxyType(
    {
        "paper": "#16181d",
        "panel": "#1f2229",
        "ink": "#e6e4de",
        "quiet": "#9a9fa8",
        "rule": "#3a3e47",
        "measured": "#7d828c",
        "flow": "#5fb3d0",
        "shear": "#ee8a5c",
        "gradient": "#a99be8",
        "steady": "#9a9fa8",
        "cursor": "#f0b93a",
        "left_out": "#6d5650",
        "holds": "#5cc29b",
        "doubtful": "#e0a640",
        "fails": "#f0768a",
        "unknown": "#9a9fa8",
    }
)

#: A shape for each verdict, so that no verdict rests on colour alone.
VERDICT_SHAPES = MappingProxyType({"holds": "●", "doubtful": "◐", "fails": "▲", "unknown": "○"})

#: Colour scale of a signed field, backward to forward, white at zero: position in 0..1 and colour.
FIELD_STOPS = (
    (0.0, "#4d2c6f"),
    (0.25, "#9c83bd"),
    (0.5, "#f7f5f0"),
    (0.75, "#5ba0b5"),
    (1.0, "#0f4a63"),
)
