"""The tables that an answer leaves as CSV: findings, series, harmonics, profile, cycles.

Every head names its unit; every row of findings carries its reliance. Text cells that a spreadsheet
would take for a formula are made harmless.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
import pandas as pd

from ..trace.export_safety import escape_spreadsheet
from .drawing import shown, unit_of
from .rows import finding_rows
from .tube_figures import velocity_field

__all__ = ["cycles_table", "findings_table", "harmonics_table", "profile_table", "series_table", "to_csv"]

#: Curves of a tube answer: name -> dimension, in the order of the columns.
TUBE_CURVES: Mapping[str, str] = {
    "flow_rate": "flow_rate",
    "mean_velocity": "velocity",
    "pressure_gradient": "pressure_gradient",
    "wall_shear_stress": "pressure",
    "centreline_velocity": "velocity",
}


def to_csv(table: pd.DataFrame) -> str:
    """Return a table as CSV text that is safe to open in a spreadsheet."""
    safe = table.rename(columns={name: escape_spreadsheet(str(name)) for name in table.columns})
    for name in safe.columns:
        if not pd.api.types.is_numeric_dtype(safe[name]):
            safe[name] = [escape_spreadsheet(cell) if isinstance(cell, str) else cell for cell in safe[name]]
    return safe.to_csv(index=False, lineterminator="\n")


def findings_table(answer: Any) -> pd.DataFrame:
    """One row per finding: as shown (in the reader's unit) and in SI at full precision."""
    rows = []
    for finding, row in zip(answer.findings, finding_rows(answer.findings), strict=True):
        rows.append(
            {
                "name": finding.name, "label": finding.label, "value": finding.shown_value, "low": finding.shown_low,
                "high": finding.shown_high, "unit": finding.shown_unit, "reliance": finding.reliance, "because": finding.because,
                "biggest_share": row.biggest_share, "value_si": finding.value, "low_si": finding.low, "high_si": finding.high,
                "unit_si": finding.unit,
            }
        )  # fmt: skip
    return pd.DataFrame(rows)


def _head(answer: Any, name: str, dimension: str) -> str:
    return f"{name} ({unit_of(answer, dimension)})"


def series_table(answer: Any, *, instants: int = 256) -> pd.DataFrame:
    """All curves over one cycle with their bands, in the reader's units."""
    band = next(iter(answer.bands.values()), None) if answer.bands else None
    period = answer.flow.flow_rate.period
    time = np.arange(instants) * period / instants if band is None else np.asarray(band.time)
    columns: dict[str, Any] = {"time (s)": time}
    for name, dimension in TUBE_CURVES.items():
        columns[_head(answer, name, dimension)] = shown(answer, getattr(answer.flow, name).evaluate(time), dimension)
        found = answer.bands.get(name) if answer.bands else None
        if found is not None:
            columns[_head(answer, f"{name}_low", dimension)] = shown(answer, np.asarray(found.low), dimension)
            columns[_head(answer, f"{name}_high", dimension)] = shown(answer, np.asarray(found.high), dimension)
    return pd.DataFrame(columns)


def harmonics_rows(answer: Any, name: str, harmonics: Any, dimension: str) -> list[dict[str, Any]]:
    """Rows of one quantity: order, frequency, amplitude, peak to peak, phase in degrees, standard error."""
    unit = unit_of(answer, dimension)
    errors = harmonics.standard_error
    rows = []
    for order in range(harmonics.count + 1):
        error = None if errors is None else float(np.hypot(*errors[order]))
        rows.append(
            {
                "quantity": name, "order": order, "frequency (Hz)": order * harmonics.frequency,
                "amplitude": shown(answer, float(harmonics.mean if order == 0 else harmonics.amplitude[order]), dimension),
                "peak_to_peak": shown(answer, float(harmonics.peak_to_peak[order]), dimension), "unit": unit,
                "phase (deg)": float(np.degrees(harmonics.phase[order])),
                "standard_error": None if error is None else shown(answer, error, dimension),
            }
        )  # fmt: skip
    return rows


def harmonics_table(answer: Any) -> pd.DataFrame:
    """Harmonics of every curve; order 0 is the mean, signed."""
    rows: list[dict[str, Any]] = []
    for name, dimension in TUBE_CURVES.items():
        rows += harmonics_rows(answer, name, getattr(answer.flow, name), dimension)
    return pd.DataFrame(rows)


def profile_table(answer: Any) -> pd.DataFrame:
    """Velocity over radius and time, one row per point."""
    field, radius, period = velocity_field(answer, radii=25, instants=64)
    time = np.arange(64) * period / 64
    moments, places = np.meshgrid(time, radius)
    return pd.DataFrame(
        {
            "time (s)": moments.ravel(),
            _head(answer, "radius", "length"): shown(answer, places.ravel(), "length"),
            _head(answer, "velocity", "velocity"): shown(answer, field.ravel(), "velocity"),
        }
    )


def cycles_table(answer: Any) -> pd.DataFrame:
    """Every cycle's own values."""
    return pd.DataFrame(answer.per_cycle)
