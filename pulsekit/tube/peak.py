"""The largest velocity anywhere in the section, over one cycle."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["peak_velocity", "powers_of", "section_places"]

_ZOOMS, _POINTS = 4, 17
# Chebyshev points between two neighbours of the best radius: a profile is smooth over one step of the grid.
_NODES = np.cos((np.arange(9) + 0.5) * np.pi / 9)
_TO_SERIES = np.linalg.inv(np.cos(np.arange(9) * np.arccos(_NODES)[:, None]))


def section_places(alpha: NDArray[np.float64]) -> NDArray[np.float64]:
    """Radii r/R, increasing from the axis, that show every layer: even over the section, and from the thinnest Stokes layer out."""
    thinnest = min(np.sqrt(2.0) / max(float(alpha.max(initial=0.0)), 1.0), 0.5)
    steps = max(8, int(np.ceil(np.log(0.5 / thinnest) / 0.35)) + 8)
    layers = np.geomspace(0.5 * thinnest, 0.5, steps)
    return np.unique(np.concatenate([np.linspace(0.0, 1.0, 17)[:-1], 1.0 - layers]))


def peak_velocity(flow: Any) -> tuple[float, float, float]:
    """Largest abs(u) anywhere: (value [m/s], its r/R, its phase [rad]).

    A grid of radii and instants finds the neighbourhood, and its rivals; there the profiles are interpolated
    through nine Chebyshev points and the search is narrowed fivefold in both directions, four times.
    """
    coefficients = flow.mean_velocity.coefficients
    x = section_places(flow.alpha)
    instants = max(64, 16 * coefficients.size)
    step = 2 * np.pi / instants
    field = _field(flow.tube.profile(flow.alpha, x[:, None]) * coefficients, step * np.arange(instants))
    best = (0.0, 0.0, 0.0)
    for place, instant in _summits(np.abs(field)):
        low, high = x[max(place - 1, 0)], x[min(place + 1, x.size - 1)]
        middle, half = 0.5 * (low + high), 0.5 * (high - low)
        sign = 1.0 if field[place, instant] >= 0 else -1.0
        shape = flow.tube.profile(flow.alpha, (middle + half * _NODES)[:, None]) * (sign * coefficients)
        found = _climb(_TO_SERIES @ shape, (x[place] - middle) / half, step * instant, step)
        if found[0] > best[0]:
            best = (found[0], min(max(middle + half * found[1], 0.0), 1.0), float(np.mod(found[2], 2 * np.pi)))
    return best


def _summits(size: NDArray[np.float64]) -> list[tuple[int, int]]:
    """Grid points, (place, instant), that no neighbour exceeds and that lie within 5 % of the largest."""
    top = float(size.max())
    if top == 0.0:
        return []
    row, column = np.nonzero(size >= 0.95 * top)
    here = size[row, column]
    keep = np.ones(row.size, dtype=bool)
    for down in (-1, 0, 1):
        beside = np.clip(row + down, 0, size.shape[0] - 1)
        for along in (-1, 0, 1):
            keep &= here >= size[beside, (column + along) % size.shape[1]]
    highest = np.argsort(-here[keep], kind="stable")[:6]
    return list(zip(row[keep][highest].tolist(), column[keep][highest].tolist(), strict=True))


def _climb(series: NDArray[np.complex128], at: float, phase: float, turn: float) -> tuple[float, float, float]:
    """Greatest value of sum_k T_k(s) Re series_k(phase) near (s, phase) = (at, phase): (value, s, phase)."""
    best, reach, spread = (-np.inf, at, phase), 1.0, np.linspace(-1.0, 1.0, _POINTS)
    for _ in range(_ZOOMS):
        places = np.clip(best[1] + reach * spread, -1.0, 1.0)
        phases = best[2] + turn * spread
        values = _field(np.cos(np.arange(_NODES.size) * np.arccos(places)[:, None]) @ series, phases)
        row, column = np.unravel_index(values.argmax(), values.shape)
        if values[row, column] > best[0]:
            best = (float(values[row, column]), float(places[row]), float(phases[column]))
        reach, turn = reach / 5, turn / 5
    return best


def _field(terms: NDArray[np.complex128], phase: NDArray[np.float64]) -> NDArray[np.float64]:
    """Re sum of terms (K, N + 1) exp(i n phase), shape (K, len(phase))."""
    turn = powers_of(np.exp(1j * phase), terms.shape[1])
    return np.asarray(terms.real @ turn.real - terms.imag @ turn.imag)


def powers_of(phasor: NDArray[np.complex128], count: int) -> NDArray[np.complex128]:
    """Powers 0 to count - 1 of phasors (K,), shape (count, K): one exponential for all harmonics."""
    out = np.empty((count, phasor.size), dtype=complex)
    out[0] = 1.0
    np.cumprod(np.broadcast_to(phasor, (count - 1, phasor.size)), axis=0, out=out[1:])
    return out
