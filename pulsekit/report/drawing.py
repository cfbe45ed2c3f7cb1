"""What every still picture shares: size, type, colours, axes with units, and the ways out (SVG, PDF)."""

from __future__ import annotations

import io
import re
from typing import TYPE_CHECKING, Any

from ..quantities import from_si
from .palette import FIELD_STOPS, LIGHT

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

__all__ = ["axis_label", "diverging", "new_figure", "plain", "shown", "to_pdf", "to_png", "to_svg", "unit_text"]

_DEFAULT_UNITS = {
    "flow_rate": "mL/min",
    "velocity": "cm/s",
    "pressure": "Pa",
    "pressure_gradient": "Pa/m",
    "length": "mm",
    "time": "s",
    "frequency": "Hz",
    "viscosity": "mPa*s",
}
_RC = {
    "font.family": ["DejaVu Sans"],
    "font.size": 8,
    "axes.edgecolor": LIGHT["quiet"],
    "axes.labelcolor": LIGHT["ink"],
    "axes.linewidth": 0.6,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.titlesize": 8.5,
    "axes.titleweight": "bold",
    "axes.titlelocation": "left",
    "xtick.color": LIGHT["quiet"],
    "ytick.color": LIGHT["quiet"],
    "xtick.labelcolor": LIGHT["ink"],
    "ytick.labelcolor": LIGHT["ink"],
    "lines.linewidth": 1.3,
    "legend.frameon": False,
    "legend.fontsize": 7.5,
    "svg.fonttype": "path",
    "figure.facecolor": "white",
}


def plain(text: object) -> str:
    """Text from a user's file for a picture: no mathematics mode, no control characters, bounded length."""
    cleaned = "".join(character for character in str(text) if character.isprintable())
    if len(cleaned) > 60:
        cleaned = cleaned[:57] + "…"
    return cleaned.replace("$", r"\$")


def new_figure(title: str, *, width: float = 6.9, height: float = 2.3) -> tuple[Figure, Axes]:
    """Return a figure with one set of axes in our style (inches; 6.9 fills the A4 column)."""
    import matplotlib
    from matplotlib.figure import Figure

    with matplotlib.rc_context(_RC):
        figure = Figure(figsize=(width, height), layout="constrained")
        axes = figure.add_subplot()
        axes.set_title(title)
    return figure, axes


def unit_text(unit: str) -> str:
    """A unit as it is written in print.

    >>> unit_text("mPa*s"), unit_text("m^2/s")
    ('mPa·s', 'm²/s')
    """
    return unit.replace("**", "^").replace("*", "·").replace("^2", "²").replace("^3", "³").replace("^-1", "⁻¹")


def unit_of(answer: Any, dimension: str) -> str:
    """The unit in which this answer's reader sees a dimension."""
    return str(answer.units.get(dimension) or _DEFAULT_UNITS.get(dimension, ""))


def shown(answer: Any, values: Any, dimension: str) -> Any:
    """SI values in the unit of this answer's reader."""
    unit = unit_of(answer, dimension)
    return from_si(values, unit, dimension) if unit else values


def axis_label(answer: Any, name: str, dimension: str) -> str:
    """Axis label with the reader's unit."""
    unit = unit_of(answer, dimension)
    return f"{name} ({unit_text(unit)})" if unit else name


def diverging() -> Any:
    """Colour map of a signed field: white at zero."""
    from matplotlib.colors import LinearSegmentedColormap

    return LinearSegmentedColormap.from_list("signed", list(FIELD_STOPS))


def to_svg(figure: Figure, name: str) -> str:
    """Return the figure as SVG text that can stand inside a page: no prolog, ids of its own, no date."""
    import matplotlib

    sink = io.StringIO()
    with matplotlib.rc_context({"svg.hashsalt": name, "svg.fonttype": "path"}):
        figure.savefig(sink, format="svg", metadata={"Date": None, "Creator": None})
    text = sink.getvalue()
    text = text[text.index("<svg") :]
    # Ids of different pictures must not meet inside one page.
    text = re.sub(r'\bid="([^"]+)"', rf'id="{name}-\1"', text)
    text = re.sub(r'(xlink:href="#|href="#|url\(#)', rf"\g<1>{name}-", text)
    return re.sub(r"<metadata>.*?</metadata>", "", text, flags=re.DOTALL)


def to_pdf(figure: Figure) -> bytes:
    """Return the figure as PDF, without a date so that the same case gives the same bytes."""
    sink = io.BytesIO()
    figure.savefig(sink, format="pdf", metadata={"CreationDate": None, "Producer": None, "Creator": None})
    return sink.getvalue()


def to_png(figure: Figure, *, dots_per_inch: int = 140) -> bytes:
    """Return the figure as PNG."""
    sink = io.BytesIO()
    figure.savefig(sink, format="png", dpi=dots_per_inch, metadata={"Software": None})
    return sink.getvalue()
