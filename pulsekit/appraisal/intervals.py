"""Central 95 % intervals of samples, how well the samples fix them, and where their width comes from."""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

__all__ = ["SHARES_DEFINITION", "interval", "interval_error", "one_digit_fixed", "shares"]

LEVELS = (0.025, 0.975)

SHARES_DEFINITION = (
    "The share of an input is a first-order index: the fraction of the variance of a finding's samples that a cubic in that input alone explains "
    "(for the recording, a linear function of all its harmonics' coefficients). What the inputs do not explain one by one stands as interactions."
)


def interval(samples: NDArray[np.float64]) -> tuple[float | None, float | None]:
    """Return the central 2.5 and 97.5 % points; None where a side is open because samples are not finite.

    Examples
    --------
    >>> low, high = interval(np.linspace(0.0, 1.0, 1001))
    >>> round(low, 3), round(high, 3)
    (0.025, 0.975)
    """
    good = np.isfinite(samples)
    if good.all():
        low, high = np.quantile(samples, LEVELS)
        return float(low), float(high)
    # Infinite samples (a division by what may be zero) count at the end where they lie.
    if np.isnan(samples).any():
        return None, None
    ordered = np.sort(samples)
    ends = [float(ordered[round(level * (ordered.size - 1))]) for level in LEVELS]
    return (ends[0] if math.isfinite(ends[0]) else None), (ends[1] if math.isfinite(ends[1]) else None)


def interval_error(samples: NDArray[np.float64]) -> tuple[float, float]:
    """Standard numerical error of the two ends, from order statistics (binomial ranks)."""
    ordered = np.sort(samples[np.isfinite(samples)])
    size = ordered.size
    if size < 100:
        return math.inf, math.inf
    errors = []
    for level in LEVELS:
        spread = math.sqrt(size * level * (1 - level))
        below = max(int(level * size - spread), 0)
        above = min(math.ceil(level * size + spread), size - 1)
        errors.append(0.5 * float(ordered[above] - ordered[below]))
    return errors[0], errors[1]


def one_digit_fixed(samples: NDArray[np.float64]) -> bool:
    """Tell whether the ends are fixed to one significant digit of the standard uncertainty (JCGM 101, 7.9.2).

    The numerical tolerance is half of the unit of that digit; twice the standard numerical error must stay below it.
    """
    good = samples[np.isfinite(samples)]
    spread = float(good.std()) if good.size > 1 else 0.0
    if spread == 0.0:
        return True
    # The digit is that of the rounded number: 0.097 is 1 in the first decimal, not 9 in the second.
    tolerance = 0.5 * 10.0 ** int(f"{spread:.0e}".partition("e")[2])
    return 2 * max(interval_error(samples)) <= tolerance


def _explained(target: NDArray[np.float64], design: NDArray[np.float64]) -> NDArray[np.float64]:
    """Fraction of the variance of each column of target that the design explains, adjusted for its number of terms."""
    basis, triangle = np.linalg.qr(design)
    sound = np.abs(np.diag(triangle)) > 1e-10 * np.abs(np.diag(triangle)).max(initial=0.0)
    basis = basis[:, sound]
    total = np.sum(target**2, axis=0)
    fitted = np.sum((basis.T @ target) ** 2, axis=0)
    ratio = np.divide(fitted, total, out=np.zeros_like(total), where=total > 0)
    samples, terms = target.shape[0], basis.shape[1]
    return np.asarray(np.clip((ratio * samples - terms) / max(samples - terms, 1), 0.0, 1.0))


def shares(
    findings: Mapping[str, NDArray[np.float64]], inputs: Mapping[str, NDArray[np.float64]], *, most: int = 4000
) -> dict[str, dict[str, float]]:
    """Return finding -> input -> share of the variance, with ``interactions`` as the rest.

    Parameters
    ----------
    findings : mapping of str to ndarray, shape (S,)
    inputs : mapping of str to ndarray, shape (S,) or (S, K)
        An input with several columns (the harmonics) is one entry.
    most : int
        Samples used; the first of them, which are as good as any.

    Notes
    -----
    See ``SHARES_DEFINITION``. Samples far out (beyond the central 99.8 %) are drawn in, so that the variance exists
    also for few degrees of freedom.

    Examples
    --------
    >>> rng = np.random.default_rng(1)
    >>> a, b = rng.standard_normal((2, 4000))
    >>> found = shares({"y": 2 * a + b}, {"a": a, "b": b})["y"]
    >>> round(found["a"], 1), round(found["b"], 1)
    (0.8, 0.2)
    """
    names = [name for name, samples in findings.items() if np.isfinite(samples).all() and np.ptp(samples) > 0]
    if not names or not inputs:
        return {name: {} for name in findings}
    target = np.stack([findings[name][:most] for name in names], axis=1)
    low, high = np.quantile(target, (0.001, 0.999), axis=0)
    target = np.clip(target, low, high)
    target = target - target.mean(axis=0)
    parts = {}
    for key, column in inputs.items():
        values = column[:most]
        if values.ndim == 1:
            spread = float(values.std())
            if spread == 0:
                continue
            z = (values - values.mean()) / spread
            values = np.stack([z, z**2, z**3], axis=1)
        design = values - values.mean(axis=0)
        width = design.std(axis=0)
        parts[key] = _explained(target, design[:, width > 0] / width[width > 0]) if np.any(width > 0) else np.zeros(len(names))
    out: dict[str, dict[str, float]] = {name: {} for name in findings}
    for place, name in enumerate(names):
        row = {key: float(part[place]) for key, part in parts.items()}
        total = sum(row.values())
        if total > 1:
            row = {key: value / total for key, value in row.items()}
        elif row:
            row["interactions"] = 1.0 - total
        out[name] = row
    return out
