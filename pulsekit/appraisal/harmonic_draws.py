"""Draws of harmonics from their covariance: a multivariate t with the degrees of freedom behind it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from ..errors import InputError
from ..trace.harmonics import Harmonics

__all__ = ["covariance_root", "draw_harmonics", "lift_of_noise", "mirrored_draws", "multivariate_t", "principal_steps"]


def covariance_root(covariance: NDArray[np.float64]) -> NDArray[np.float64]:
    """Matrix L with L L^T = covariance, also where the covariance is singular (few cycles)."""
    scale = np.sqrt(np.clip(np.diag(covariance), 0.0, None))
    safe = np.where(scale > 0, scale, 1.0)
    values, vectors = np.linalg.eigh(covariance / np.outer(safe, safe))
    keep = values > values.max(initial=0.0) * 1e-12
    return np.asarray(safe[:, None] * vectors[:, keep] * np.sqrt(values[keep]))


def multivariate_t(
    covariance: NDArray[np.float64], degrees_of_freedom: float | None, samples: int, rng: np.random.Generator
) -> NDArray[np.float64]:
    """Draws about zero, shape (samples, n): normal ones over sqrt(chi^2/nu), one chi^2 for all coordinates of a sample."""
    root = covariance_root(covariance)
    apart = rng.standard_normal((samples, root.shape[1])) @ root.T
    if degrees_of_freedom is not None and np.isfinite(degrees_of_freedom):
        apart *= np.sqrt(degrees_of_freedom / rng.chisquare(degrees_of_freedom, samples))[:, None]
    return np.asarray(apart)


def _complex(vectors: NDArray[np.float64]) -> NDArray[np.complex128]:
    out = np.empty((vectors.shape[0], (vectors.shape[1] + 1) // 2), dtype=complex)
    out[:, 0] = vectors[:, 0]
    out[:, 1:] = vectors[:, 1::2] + 1j * vectors[:, 2::2]
    return out


def _vector(coefficients: NDArray[np.complex128]) -> NDArray[np.float64]:
    out = np.empty(2 * coefficients.size - 1)
    out[0] = coefficients[0].real
    out[1::2], out[2::2] = coefficients[1:].real, coefficients[1:].imag
    return out


def draw_harmonics(harmonics: Harmonics, samples: int, rng: np.random.Generator) -> NDArray[np.complex128]:
    """Draw coefficients about their estimate, shape (samples, N + 1).

    Multivariate t: normal draws of the covariance over sqrt(chi^2/nu), one chi^2 for all coefficients of a sample,
    nu the degrees of freedom. Without a covariance all samples are the estimate.

    Examples
    --------
    >>> series = Harmonics(frequency=1.0, coefficients=[1.0, 1j], covariance=np.eye(3) * 0.01, degrees_of_freedom=11)
    >>> cloud = draw_harmonics(series, 50_000, np.random.default_rng(1))
    >>> round(float(cloud[:, 1].imag.std()), 2)
    0.11
    """
    if samples < 1:
        raise InputError(f"samples = {samples} must be at least 1", name="samples", value=samples, allowed=">= 1")
    estimate = np.asarray(harmonics.coefficients)
    if harmonics.covariance is None or not np.any(harmonics.covariance):
        return np.broadcast_to(estimate, (samples, estimate.size))
    apart = multivariate_t(np.asarray(harmonics.covariance), harmonics.degrees_of_freedom, samples, rng)
    return _complex(_vector(estimate) + apart)


def mirrored_draws(harmonics: Harmonics, pairs: int, rng: np.random.Generator) -> NDArray[np.complex128]:
    """Draws of `draw_harmonics`, each with its mirror image about the estimate, shape (2 pairs, N + 1); empty without a covariance.

    What is linear in the noise cancels exactly from their median, so that a few hundred pairs show what the curvature
    of a calculation (an absolute value, a maximum) makes of the noise.
    """
    draws = draw_harmonics(harmonics, pairs, rng)
    if draws.strides[0] == 0:
        return np.empty((0, draws.shape[1]), dtype=complex)
    return np.concatenate([draws, 2 * np.asarray(harmonics.coefficients) - draws])


def lift_of_noise(samples: NDArray[np.float64], value: float) -> float:
    """By how much noise lifts a finding: the median of samples from `mirrored_draws` less the value without noise; 0 where it is rounding.

    Examples
    --------
    >>> noise = np.linspace(-1.0, 1.0, 201)
    >>> lift_of_noise(3.0 + noise, 3.0), lift_of_noise(np.abs(noise), 0.0)
    (0.0, 0.5)
    """
    if not np.isfinite(samples).all():
        return 0.0
    lift = float(np.median(samples)) - value
    return lift if abs(lift) > 1e-6 * float(samples.std()) else 0.0


def principal_steps(harmonics: Harmonics) -> NDArray[np.complex128]:
    """One standard deviation along each principal direction of the covariance, shape (directions, N + 1), for first-order sums."""
    if harmonics.covariance is None or not np.any(harmonics.covariance):
        return np.empty((0, harmonics.coefficients.size), dtype=complex)
    return _complex(covariance_root(np.asarray(harmonics.covariance)).T)
