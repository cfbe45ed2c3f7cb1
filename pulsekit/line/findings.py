"""The findings of a line: names, labels and units; every pulsation is peak to peak and says so."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, NamedTuple

import numpy as np

from ..appraisal.finding import Finding, Findings

__all__ = ["LINE_FINDINGS", "line_findings"]


class _Row(NamedTuple):
    label: str
    unit: str


_NO_PRESSURE = "The mean pressure is not known: state operation.mean_pressure to have it."

LINE_FINDINGS: Mapping[str, _Row] = {
    "largest_peak_to_peak_pressure": _Row("Largest pressure pulsation along the line, p-p", "Pa"),
    "position_of_largest_pressure": _Row("Position of the largest pulsation", "m"),
    "peak_to_peak_pressure_at_source": _Row("Pressure pulsation at the source, p-p", "Pa"),
    "peak_to_peak_pressure_at_end": _Row("Pressure pulsation at the end, p-p", "Pa"),
    "attenuation": _Row("Pulsation at the end over that at the source, p-p", ""),
    "peak_to_peak_flow_at_source": _Row("Flow pulsation into the line, p-p", "m^3/s"),
    "largest_order": _Row("Order of the largest harmonic", ""),
    "largest_harmonic_peak_to_peak": _Row("Largest single harmonic along the line, p-p", "Pa"),
    "allowable_ratio": _Row("Worst harmonic over the allowed pulsation, p-p", ""),
    "highest_pressure": _Row("Highest pressure, gauge", "Pa"),
    "position_of_highest_pressure": _Row("Position of the highest pressure", "m"),
    "least_absolute_pressure": _Row("Least absolute pressure", "Pa"),
    "position_of_least_pressure": _Row("Position of the least pressure", "m"),
    "margin_to_cavitation": _Row("Least absolute pressure above what the liquid bears", "Pa"),
    "steady_pressure_drop": _Row("Steady pressure drop along the line", "Pa"),
    "wave_speed": _Row("Wave speed in the first pipe", "m/s"),
    "first_resonance": _Row("First resonance", "Hz"),
    "first_resonance_damping": _Row("Damping ratio of the first resonance", ""),
    "largest_wall_shear_amplitude": _Row("Largest amplitude of the pulsating wall shear stress", "Pa"),
    "largest_shaking_force": _Row("Largest shaking force on a straight pipe, p-p (acoustic only, without the structure's resonance)", "N"),
    "worst_peak_to_peak_within_10_percent": _Row("Largest pulsation within ±10 % of the speed, p-p", "Pa"),
    "worst_speed_within_10_percent": _Row("Speed of that largest pulsation", "Hz"),
    "worst_peak_to_peak_in_speed_range": _Row("Largest pulsation in the speed range, p-p", "Pa"),
    "worst_speed_in_range": _Row("Speed of the largest pulsation in the range", "Hz"),
    "recorded_peak_to_peak": _Row("Recorded pulsation, extreme, p-p", "Pa"),
    "recorded_peak_to_peak_999": _Row("Recorded pulsation, 99.9 % of the samples, p-p", "Pa"),
    "recorded_highest_pressure": _Row("Recorded highest pressure", "Pa"),
    "recorded_lowest_pressure": _Row("Recorded lowest pressure", "Pa"),
    "asynchronous_share": _Row("Share of the recorded variance that is not locked to the shaft", ""),
    "acceleration_head": _Row("Acceleration head of the suction line by the trade's estimate", "m"),
    "peak_to_peak_with_gas_lost": _Row("Largest pulsation with the damper's gas lost, p-p", "Pa"),
    "peak_to_peak_with_precharge_up_20_percent": _Row("Largest pulsation with precharge 20 % higher, p-p", "Pa"),
    "peak_to_peak_with_precharge_down_20_percent": _Row("Largest pulsation with precharge 20 % lower, p-p", "Pa"),
}

_NEEDS_PRESSURE = ("highest_pressure", "position_of_highest_pressure", "least_absolute_pressure", "position_of_least_pressure")


def line_findings(numbers: Mapping[str, Any]) -> Findings:
    """Return the findings in reading order from SI values; None with a sentence for a value that does not exist."""
    rows = []
    for name, row in LINE_FINDINGS.items():
        if name in numbers and numbers[name] is not None and np.isfinite(float(np.ravel(numbers[name])[0])):
            rows.append(Finding(name=name, label=row.label, unit=row.unit, value=float(np.ravel(numbers[name])[0])))
        elif name in _NEEDS_PRESSURE:
            rows.append(Finding(name=name, label=row.label, unit=row.unit, value=None, because=_NO_PRESSURE, reliance="not usable"))
        elif name in numbers:
            rows.append(
                Finding(name=name, label=row.label, unit=row.unit, value=None, because="It does not exist for this line.", reliance="not usable")
            )  # fmt: skip
    return Findings(rows)
