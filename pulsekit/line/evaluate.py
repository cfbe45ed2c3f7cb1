"""Every number of a line's answer from its states, for one answer or for many samples at once.

Samples stand on the first axis, (S, 1) beside frequencies; one answer is S = 1. All pulsations are peak to peak.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from .elements import Pipe, _Conduit, bore_radius, part
from .line import Line
from .load import Load
from .medium import Medium
from .states import along

__all__ = ["LineNumbers", "line_numbers"]


@dataclass(frozen=True, eq=False, kw_only=True)
class LineNumbers:
    """Samples of the findings, shape (S,) each, and curves for bands."""

    findings: Mapping[str, NDArray[np.float64]]
    envelope: NDArray[np.float64]  # (S, positions), Pa peak to peak
    course: NDArray[np.float64]  # (S, instants) at the watched position, Pa about the mean
    positions: NDArray[np.float64]


def _courses(waves: NDArray[np.complex128], size: int) -> NDArray[np.float64]:
    """Pulsation over one cycle, instants last."""
    spectrum = np.zeros((*waves.shape[:-1], size // 2 + 1), dtype=complex)
    spectrum[..., 1 : waves.shape[-1] + 1] = waves * (size / 2)
    return np.asarray(np.fft.irfft(spectrum, n=size, axis=-1))


def line_numbers(
    line: Line, omega: NDArray[np.float64], medium: Medium, values: Mapping[str, Any], loads: Sequence[Load], states: Sequence[Any],
    positions: NDArray[np.float64], *, watch: float, ambient: float, base_pressure: Any = None, mean_flow: Any = 0.0, rule: Any = None, floor: Any = None,
    instants: int = 0,
) -> LineNumbers:  # fmt: skip
    """Return all numbers that vary with the samples.

    ``base_pressure`` is the mean absolute pressure at 0 m (S,) or None; ``floor`` the absolute pressure that the liquid must
    not reach; ``watch`` a position whose course is kept.
    """
    instants = instants or int(2 ** np.ceil(np.log2(max(128, 4 * omega.shape[-1]))))
    pressure, flow = along(line, omega, medium, values, loads, states, positions)
    pressure = np.moveaxis(_sampled(pressure), 0, 1)  # (S, P, N)
    flow = np.moveaxis(_sampled(flow), 0, 1)
    course = _courses(pressure, instants)
    swing = np.ptp(course, axis=2)
    samples = swing.shape[0]
    top = swing.argmax(axis=1)
    rows = np.arange(samples)
    per_order = 2 * np.abs(pressure)
    found: dict[str, NDArray[np.float64]] = {
        "largest_peak_to_peak_pressure": swing[rows, top],
        "position_of_largest_pressure": positions[top],
        "peak_to_peak_pressure_at_source": swing[:, 0],
        "peak_to_peak_pressure_at_end": swing[:, -1],
        "attenuation": np.divide(swing[:, -1], swing[:, 0], out=np.full(samples, np.inf), where=swing[:, 0] > 0),
        "peak_to_peak_flow_at_source": np.ptp(_courses(flow[:, 0], instants), axis=1),
        "largest_order": (per_order.max(axis=1).argmax(axis=1) + 1).astype(float),
        "largest_harmonic_peak_to_peak": per_order.max(axis=(1, 2)),
    }
    _waves(line, medium, values, samples, found)
    _shear(line, omega, medium, values, flow, positions, instants, found)
    _force(line, positions, pressure, values, instants, found)
    drops = [np.broadcast_to(np.ravel(drop), (samples,)) for drop in line.steady_drops(mean_flow, medium, values)]
    found["steady_pressure_drop"] = np.sum(drops, axis=0)
    if base_pressure is not None:
        nodes = np.asarray(base_pressure).reshape(-1, 1) - np.concatenate([np.zeros((samples, 1)), np.cumsum(np.stack(drops, axis=1), axis=1)], axis=1)
        mean = np.stack([np.interp(positions, line.starts, row) for row in nodes])
        low, high = mean + course.min(axis=2), mean + course.max(axis=2)
        at_low, at_high = low.argmin(axis=1), high.argmax(axis=1)
        found |= {
            "least_absolute_pressure": low[rows, at_low],
            "position_of_least_pressure": positions[at_low],
            "highest_pressure": high[rows, at_high] - ambient,
            "position_of_highest_pressure": positions[at_high],
        }
        if floor is not None:
            found["margin_to_cavitation"] = low[rows, at_low] - floor
    if rule is not None:
        bores = np.array([_bore_at(line, float(position)) for position in positions])
        hertz = omega.reshape(-1)[-per_order.shape[2] :] / (2 * np.pi)
        found["allowable_ratio"] = np.asarray(rule.ratio(per_order, hertz, bores[:, None])).max(axis=(1, 2))
    watched = _sampled(along(line, omega, medium, values, loads, states, [watch])[0])[0]
    return LineNumbers(findings=found, envelope=swing, course=_courses(watched, instants), positions=positions)


def _sampled(waves: NDArray[np.complex128]) -> NDArray[np.complex128]:
    """(P, N) or (P, S, N) -> (P, S, N)."""
    return waves[:, None, :] if waves.ndim == 2 else waves


def _bore_at(line: Line, position: float) -> float:
    """Inner diameter of the pipe at a position, or of the nearest one [m]."""
    starts = line.starts
    conduits = [(place, element) for place, element in enumerate(line.elements) if isinstance(element, _Conduit)]
    for place, element in conduits:
        if starts[place] - 1e-12 <= position <= starts[place + 1] + 1e-12:
            return 2 * element.radius
    return 2 * min(conduits, key=lambda item: abs(starts[item[0]] - position))[1].radius


def _waves(line: Line, medium: Medium, values: Mapping[str, Any], samples: int, found: dict[str, NDArray[np.float64]]) -> None:
    for place, element in enumerate(line.elements):
        if isinstance(element, _Conduit):
            speed = np.ravel(element.wave_speed(medium, part(values, f"element.{place}")))
            found["wave_speed"] = np.broadcast_to(speed, (samples,)).astype(float)
            return


def _shear(
    line: Line, omega: NDArray[np.float64], medium: Medium, values: Mapping[str, Any], flow: NDArray[np.complex128], positions: NDArray[np.float64],
    instants: int, found: dict[str, NDArray[np.float64]],
) -> None:  # fmt: skip
    """Largest amplitude of the pulsating wall shear: T mu q/(A R) per harmonic, laminar layer."""
    from ..exact.womersley import shear_factor

    starts = line.starts
    best = np.zeros(flow.shape[0])
    for place, element in enumerate(line.elements):
        if not isinstance(element, _Conduit):
            continue
        inside = np.flatnonzero((positions >= starts[place] - 1e-12) & (positions <= starts[place + 1] + 1e-12))
        if inside.size == 0:
            continue
        radius = bore_radius(part(values, f"element.{place}"))
        alpha = radius * np.sqrt(omega * medium.density / medium.viscosity)
        factor = np.asarray(shear_factor(alpha)) * medium.viscosity / (np.pi * np.asarray(radius) ** 3)
        shear = flow[:, inside] * (factor if np.ndim(factor) == 1 else factor[:, None, :])
        best = np.maximum(best, 0.5 * np.ptp(_courses(shear, instants), axis=2).max(axis=1))
    found["largest_wall_shear_amplitude"] = best


def _force(
    line: Line, positions: NDArray[np.float64], pressure: NDArray[np.complex128], values: Mapping[str, Any], instants: int, found: dict[str, NDArray[np.float64]]
) -> None:
    """Largest shaking force on a straight pipe: difference of pressure pulsation over its length times its bore area."""
    starts = line.starts
    best = None
    for place, element in enumerate(line.elements):
        if not isinstance(element, Pipe) or not element.straight:  # type: ignore[attr-defined]
            continue
        ends = [int(np.abs(positions - starts[place + side]).argmin()) for side in (0, 1)]
        area = np.pi * np.ravel(bore_radius(part(values, f"element.{place}"))) ** 2
        force = np.ptp(_courses(pressure[:, ends[0]] - pressure[:, ends[1]], instants), axis=1) * area
        best = force if best is None else np.maximum(best, force)
    if best is not None:
        found["largest_shaking_force"] = best
