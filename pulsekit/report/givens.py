"""The givens as a table: as written, in SI, with their standard uncertainty and where they come from."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from ..case.schema import key_of
from ..errors import PulsekitError
from ..quantities import DIMENSIONS
from .page import PlainTable

__all__ = ["given_notes", "givens_table"]


def _walk(data: Any, prefix: str = "") -> Iterator[tuple[str, Any]]:
    if isinstance(data, Mapping):
        for key, value in data.items():
            yield from _walk(value, f"{prefix}.{key}" if prefix else str(key))
    elif isinstance(data, (list, tuple)) and any(isinstance(entry, Mapping) for entry in data):
        for index, value in enumerate(data):
            yield from _walk(value, f"{prefix}.{index}")
    else:
        yield prefix, data


def _number(value: float) -> str:
    return f"{value:.6g}".replace("-", "−")


def givens_table(answer: Any) -> PlainTable:
    """Every key of the case with what it means; dimensional ones also in SI."""
    rows = []
    for dotted, value in _walk(answer.case.to_dict()):
        key = key_of(dotted)
        if key is None or dotted in ("kind", "title", "notes") or dotted.endswith("sha256"):
            continue
        si = spread = ""
        if key.takes == "quantity" and value != "tube":
            try:
                given = answer.case.given(dotted)
            except PulsekitError:
                given = None
            if given is not None:
                unit = DIMENSIONS[given.dimension]
                si = f"{_number(given.value)} {unit}".strip()
                spread = f"{_number(given.standard_uncertainty)} {unit}".strip() if given.stated else "none stated: counts as exact"
                if dotted.rpartition(".")[2] in ("scale_uncertainty", "offset_uncertainty"):
                    spread = "itself"
        rows.append((dotted, str(value), si, spread, key.help))
    for dotted, given in _derived(answer):
        rows.append((dotted, "from the correlation", _number(given.value), _number(given.standard_uncertainty), "stated accuracy of the correlation"))
    return PlainTable(("Given", "As written", "SI", "Standard uncertainty", "What it is"), tuple(rows))


def _derived(answer: Any) -> Iterator[tuple[str, Any]]:
    """Uncertain factors that nobody wrote: the accuracy of a correlation."""
    fluid = answer.flow.fluid if answer.flow is not None else getattr(answer.response, "fluid", None)
    for name, given in getattr(fluid, "givens", {}).items():
        if name.endswith("correlation") and given.standard_uncertainty > 0:
            yield f"fluid.{name}", given


def given_notes(answer: Any) -> list[str]:
    """What else is to be said of the givens: both sizes, both viscosities, sources of the liquid."""
    notes = []
    if answer.flow is not None:
        radius, fluid = float(answer.flow.tube.radius), answer.flow.fluid
        notes.append(f"Radius {1e3 * radius:.4g} mm, diameter {2e3 * radius:.4g} mm.")
        notes.append(
            f"Liquid: density {fluid.density:.5g} kg/m³, dynamic viscosity {1e3 * fluid.viscosity:.4g} mPa·s, kinematic "
            f"{1e6 * fluid.viscosity / fluid.density:.4g} mm²/s."
        )
        notes += list(getattr(fluid, "sources", ()))
    return notes
