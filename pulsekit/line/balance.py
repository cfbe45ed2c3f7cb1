"""Restrictors without enough mean flow: their resistance at the pulsation that passes them, by harmonic balance."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

__all__ = ["equivalent_resistance", "mean_turbulent_drop"]

_INSTANTS = 512


def _course(mean: Any, flow: NDArray[np.complex128], instants: int) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    size = max(instants, int(2 ** np.ceil(np.log2(16 * flow.shape[-1]))))
    spectrum = np.zeros((*flow.shape[:-1], size // 2 + 1), dtype=complex)
    spectrum[..., 1 : flow.shape[-1] + 1] = flow * (size / 2)
    swing = np.fft.irfft(spectrum, n=size, axis=-1)
    return np.asarray(mean)[..., None] + swing, swing


def equivalent_resistance(constant: ArrayLike, mean_flow: ArrayLike, flow: ArrayLike) -> Any:
    """Resistance that takes the same power from the pulsation as dp = k q abs(q). [Pa s/m^3]

    Parameters
    ----------
    constant : array_like
        k. [Pa s^2/m^6]
    mean_flow : array_like
        [m^3/s]
    flow : array_like of complex, shape (..., N)
        Harmonics of the flow through the restrictor, from the first. [m^3/s]

    Notes
    -----
    mean(dp q')/mean(q'^2), q' the pulsating part: for one harmonic (k/(pi Q1)) times the integral of q abs(q) cos over a
    cycle, which is (8/(3 pi)) k Q1 without mean flow and 2 k Q0 without reversal.

    Examples
    --------
    >>> round(float(equivalent_resistance(1.0, 0.0, [1.0])), 3), round(float(equivalent_resistance(1.0, 1.0, [1.0])), 3)
    (0.849, 2.0)
    """
    q, swing = _course(mean_flow, np.asarray(flow, complex), _INSTANTS)
    drop = q * np.abs(q)
    power = np.mean(swing**2, axis=-1)
    with np.errstate(invalid="ignore", divide="ignore"):
        found = np.mean(drop * swing, axis=-1) / power
    return (np.asarray(constant) * np.where(power > 0, found, 2 * np.abs(np.asarray(mean_flow))))[()]


def mean_turbulent_drop(constant: ArrayLike, mean_flow: ArrayLike, flow: ArrayLike) -> Any:
    """Mean of k q abs(q) with pulsation [Pa].

    Examples
    --------
    >>> round(float(mean_turbulent_drop(1.0, 0.5, [1.0])) / 0.25, 2)
    2.65
    """
    q, _ = _course(mean_flow, np.asarray(flow, complex), _INSTANTS)
    return (np.asarray(constant) * np.mean(q * np.abs(q), axis=-1))[()]


def reverses(mean_flow: Any, flow: NDArray[np.complex128]) -> NDArray[np.bool_]:
    """Tell whether the flow through a restrictor turns during the cycle."""
    q, _ = _course(mean_flow, np.asarray(flow, complex), 256)
    return np.asarray((q.min(axis=-1) < 0) & (q.max(axis=-1) > 0))


def merged(values: Mapping[str, Any], resistances: Mapping[str, Any]) -> dict[str, Any]:
    """Values with equivalent resistances by the dotted prefix of their restrictor."""
    return {**values, **{f"{prefix}.equivalent_resistance": resistance for prefix, resistance in resistances.items()}}
