"""The tables that a pump-line answer leaves as CSV."""

from __future__ import annotations

from typing import Any

import numpy as np
import pandas as pd

from .drawing import shown, unit_of
from .tables import cycles_table, findings_table, harmonics_rows

__all__ = ["line_tables"]


def _head(answer: Any, name: str, dimension: str) -> str:
    return f"{name} ({unit_of(answer, dimension)})"


def line_series(answer: Any, *, instants: int = 512) -> pd.DataFrame:
    """Pressure (about its mean) and flow over one turn at the source, the end and the stations."""
    response = answer.response
    time = np.arange(instants) / instants / response.frequency
    columns: dict[str, Any] = {"time (s)": time}
    places = [("source", 0.0), ("end", response.line.length)]
    places += [(f"station {station.name}", station.position) for station in answer.extras.get("stations") or ()]
    for name, place in places:
        pressure, flow = response.pressure(place), response.flow_rate(place)
        columns[_head(answer, f"pressure_about_mean at {name}", "pressure")] = shown(answer, pressure.evaluate(time) - pressure.mean, "pressure")
        columns[_head(answer, f"flow_rate at {name}", "flow_rate")] = shown(answer, flow.evaluate(time), "flow_rate")
    for station in answer.extras.get("stations") or ():
        measured = station.harmonics
        columns[_head(answer, f"measured pressure_about_mean at station {station.name}", "pressure")] = shown(
            answer, measured.evaluate(time) - measured.mean, "pressure"
        )
    band = answer.bands.get("pressure") if answer.bands else None
    if band is not None:
        name = places[-1][0] if len(places) > 2 else "source"
        for side in ("low", "high"):
            curve = np.interp(time, band.time, getattr(band, side), period=1 / response.frequency)
            columns[_head(answer, f"pressure_about_mean_{side} at {name}", "pressure")] = shown(answer, curve, "pressure")
    return pd.DataFrame(columns)


def line_profile(answer: Any) -> pd.DataFrame:
    """Peak-to-peak pressure and mean pressure along the line, with the band where it was computed."""
    response = answer.response
    places = np.asarray(answer.extras["positions"])
    columns: dict[str, Any] = {
        _head(answer, "position", "length"): shown(answer, places, "length"),
        _head(answer, "pressure p-p", "pressure"): shown(answer, response.envelope(places), "pressure"),
    }
    band = answer.bands.get("envelope") if answer.bands else None
    if band is not None:
        columns[_head(answer, "pressure p-p low", "pressure")] = shown(answer, band.low, "pressure")
        columns[_head(answer, "pressure p-p high", "pressure")] = shown(answer, band.high, "pressure")
    if response.line.mean_pressure is not None:
        columns[_head(answer, "mean absolute pressure", "pressure")] = shown(answer, response.mean_pressure(places), "pressure")
    return pd.DataFrame(columns)


def line_harmonics(answer: Any) -> pd.DataFrame:
    """Orders of pressure and flow at the source and the end, and as measured at the stations."""
    response = answer.response
    rows: list[dict[str, Any]] = []
    for name, place in (("source", 0.0), ("end", response.line.length)):
        rows += harmonics_rows(answer, f"pressure at {name}", response.pressure(place), "pressure")
        rows += harmonics_rows(answer, f"flow_rate at {name}", response.flow_rate(place), "flow_rate")
    for station in answer.extras.get("stations") or ():
        rows += harmonics_rows(answer, f"measured pressure at station {station.name}", station.harmonics, "pressure")
    return pd.DataFrame(rows)


def line_tables(answer: Any) -> dict[str, pd.DataFrame]:
    """File name -> table."""
    return {
        "findings.csv": findings_table(answer), "series.csv": line_series(answer), "harmonics.csv": line_harmonics(answer), "profile.csv": line_profile(answer),
        "cycles.csv": cycles_table(answer),
    }  # fmt: skip
