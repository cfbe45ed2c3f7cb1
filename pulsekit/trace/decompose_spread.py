"""How sure the harmonics of a mean cycle are: noise per harmonic, which stand out of it, their covariance."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

__all__ = ["Fit", "as_complex", "as_real", "covariance_of", "noise_of", "significant_count", "widened"]

_LEVEL = 0.01  # of the whole family of tests
_LEVEL_NEXT = (
    0.2  # of one harmonic that follows on those that stand out: spectra fall off, and a peak cut short costs more than a little noise
)
_LEVEL_ONE = 0.05  # with one cycle, where a harmonic left away costs more than one too many
_FLOOR = 1e-9  # of the largest amplitude: below it a harmonic is rounding of the file, not signal
_LEAST_FREEDOM = 4  # of a single cycle's residual, below which it does not tell the noise
_FEW = 4  # cycles below which the scatter between them is pooled over harmonics
_SMOOTHED = 6  # cycles below which the noise is averaged over neighbouring harmonics
_SUCCESSION = 1.28  # standard errors of a correlation of successive cycles above which it is believed (10 %, one-sided)
_NEIGHBOURS = 7  # harmonics over which it is averaged; half of the freedom gained is counted


@dataclass(frozen=True)
class Fit:
    """Real vector [X_0, Re X_1, Im X_1, ...], inverse normal matrix, residual sum of squares and its freedom."""

    vector: NDArray[np.float64]
    inverse: NDArray[np.float64]
    residual: float
    freedom: int
    plain: bool


def as_complex(vector: NDArray[np.float64]) -> NDArray[np.complex128]:
    """[X_0, Re X_1, Im X_1, ...] as complex coefficients."""
    return np.concatenate([vector[..., :1].astype(complex), vector[..., 1::2] + 1j * vector[..., 2::2]], axis=-1)


def as_real(coefficients: NDArray[np.complex128]) -> NDArray[np.float64]:
    """Complex coefficients as [X_0, Re X_1, Im X_1, ...]."""
    out = np.empty((*coefficients.shape[:-1], 2 * coefficients.shape[-1] - 1))
    out[..., 0] = coefficients[..., 0].real
    out[..., 1::2] = coefficients[..., 1:].real
    out[..., 2::2] = coefficients[..., 1:].imag
    return out


_LITTLE = 8  # degrees of freedom below which the residual of one cycle says too little about the noise


def noise_of(fit: Fit, own: NDArray[np.complex128], looked: int) -> tuple[NDArray[np.float64], float]:
    """Variance of abs(X_n - true) of the mean cycle, n = 1..looked, and its degrees of freedom."""
    if own.shape[0] >= 2:
        cycles = own.shape[0]
        scatter = np.asarray(np.var(own[:, 1:], axis=0, ddof=1) / cycles)
        if cycles >= _SMOOTHED or looked < 3:
            return scatter, 2.0 * (cycles - 1)
        # Few cycles know the scatter of one harmonic badly; that of its neighbours is alike.
        width = min(_NEIGHBOURS, looked)
        sums = np.convolve(scatter, np.ones(width), mode="same")
        return np.asarray(sums / np.convolve(np.ones(looked), np.ones(width), mode="same")), float((cycles - 1) * width)
    variance = fit.residual / fit.freedom if fit.freedom > 2 else 0.0
    diagonal = np.diag(fit.inverse)[1:]
    level = variance * (diagonal[0::2] + diagonal[1::2])
    # One cycle: the upper third of the harmonics is taken as noise where the residual has too little to say.
    upper = np.abs(as_complex(fit.vector)[1 + 2 * looked // 3 :]) ** 2
    if fit.freedom < _LEAST_FREEDOM and upper.size:
        level = np.full(looked, max(float(np.mean(upper)), float(level.max(initial=0.0))))
        return level, 2.0 * upper.size
    return level, float(max(fit.freedom, 1))


def _limit(level: float, freedom: float) -> float:
    """Value that Fisher's F with 2 and ``freedom`` degrees exceeds with probability ``level``: P(F > x) = (1 + 2 x/freedom)^(-freedom/2)."""
    return float(0.5 * freedom * np.expm1(-2 / freedom * np.log(level)))


def significant_count(fit: Fit, noise: NDArray[np.float64], freedom: float, looked: int, cycles: int) -> tuple[int, int]:
    """The highest harmonic that stands out of the noise, and the last of those next to it that follow on; at least 1 if there is any.

    A harmonic among all must pass at 1 % of the whole family. The next ones in turn are tested one by one at 20 %:
    a spectrum that falls off has them, and without them peaks come out too low by more than their interval tells.
    """
    if looked == 0:
        return 0, 0
    power = np.abs(as_complex(fit.vector)[1:]) ** 2
    real = power > (_FLOOR**2) * power.max(initial=0.0)
    limit = _limit((_LEVEL if cycles > 1 else _LEVEL_ONE) / looked, freedom)
    found = np.flatnonzero((power > limit * noise) & real)
    sure = kept = int(found[-1]) + 1 if found.size else 1
    follows = (power > _limit(_LEVEL_NEXT, freedom) * noise) & real
    while found.size and kept < looked and follows[kept]:
        kept += 1
    return sure, kept


def widened(covariance: NDArray[np.float64], sure: int) -> tuple[NDArray[np.float64], str]:
    """Covariance with that of the harmonics above ``sure`` widened for having been chosen by their size, and what is said of it.

    A harmonic of noise alone has an exponential power; where it passes at the level p its mean square is 1 - ln p times the
    noise. Without this the peaks of noisy records, sharpened by such a harmonic, lie outside their interval too often.
    """
    kept = (covariance.shape[0] - 1) // 2
    if kept <= sure:
        return covariance, ""
    factor = float(np.sqrt(1 - np.log(_LEVEL_NEXT)))
    scale = np.ones(covariance.shape[0])
    scale[1 + 2 * sure :] = factor
    which = f"Harmonic {kept} was" if kept == sure + 1 else f"Harmonics {sure + 1} to {kept} were"
    return covariance * np.outer(scale, scale), f"{which} chosen for size at the 20 % level: the standard error counts {factor:.2g} times."


def covariance_of(
    fit: Fit, own: NDArray[np.complex128], kept: int, samples: int, each: int, noise: NDArray[np.float64]
) -> tuple[NDArray[np.float64], float, str]:
    """Covariance of the kept coefficients of the mean, degrees of freedom, and how it was made."""
    size = 2 * kept + 1
    cycles = own.shape[0]
    if cycles >= 2:
        vectors = as_real(own[:, : kept + 1])
        spread = np.cov(vectors, rowvar=False, ddof=1).reshape(size, size)
        inflation = _succession(vectors)
        if cycles < _FEW:
            spread, freedom = _pooled(spread, kept, cycles)
            return (
                spread / cycles * inflation, freedom,
                f"Only {cycles} cycles: the scatter between them was pooled over the harmonics and is weakly known (counted as {freedom:.2g} degrees of "
                "freedom); intervals are wide for that reason.",
            )  # fmt: skip
        said = f"The standard errors come from the scatter between {cycles} cycles ({cycles - 1} degrees of freedom)"
        if inflation > 1:
            said += f", widened by {np.sqrt(inflation):.2f} because successive cycles are correlated"
        return spread / cycles * inflation, float(cycles - 1), said + "."
    if fit.plain:
        vector = fit.vector
        beyond = samples * float(np.sum(vector[size:] ** 2)) / 2
        residual, freedom = fit.residual + beyond, samples - size
    else:
        residual, freedom = fit.residual, fit.freedom
    if freedom < 1:
        return (
            np.zeros((size, size)),
            1.0,
            "All samples are used up by the harmonics: their standard errors are not known and count as zero.",
        )
    variance = residual / freedom
    return (
        variance * fit.inverse[:size, :size], float(freedom),
        f"One cycle: the standard errors come from what the kept harmonics leave ({freedom} degrees of freedom); how much cycles differ is not known.",
    )  # fmt: skip


def _pooled(spread: NDArray[np.float64], kept: int, cycles: int) -> tuple[NDArray[np.float64], float]:
    """Few cycles: variances shrunk half-way to their mean over the harmonics, no correlations; with their degrees of freedom.

    The freedom is that of a half-and-half mean of one variance and of the mean of all (Welch and Satterthwaite), the
    second counted with a quarter of its parts, since low harmonics scatter more than high ones.
    """
    variances = np.diag(spread).copy()
    if not kept:
        return np.diag(variances), float(cycles - 1)
    common = float(variances.mean())
    parts = max(variances.size / 4, 1.0)
    shrunk = 0.5 * variances + 0.5 * common
    return np.diag(shrunk), (cycles - 1) / (0.25 + 0.25 / parts + 0.5 / variances.size)


def _succession(vectors: NDArray[np.float64]) -> float:
    """Widening of the variance of a mean for correlation between successive cycles: (1 + r)/(1 - r), r > 0 only."""
    cycles = vectors.shape[0]
    if cycles < 6:
        return 1.0
    centred = vectors - vectors.mean(axis=0)
    total = float(np.sum(centred**2))
    if total == 0:
        return 1.0
    # The estimate from a short row is biased by about -1/M.
    r = float(np.sum(centred[1:] * centred[:-1])) / total + 1.0 / cycles
    if r < _SUCCESSION / np.sqrt(cycles):
        return 1.0
    r = min(r, 0.8)
    return (1 + r) / (1 - r)
