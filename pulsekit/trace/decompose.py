"""From cycles to harmonics, with their covariance and the number that stands out of the noise."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.stats import f as fisher

from ..errors import InputError, SignalError
from .cycles import Cycles
from .harmonics import Harmonics

__all__ = ["cycle_coefficients", "decompose"]

_MOST = 60  # harmonics looked at when none are asked for
_LEVEL = 0.01  # of the whole family of tests
_FLOOR = 1e-9  # of the largest amplitude: below it a harmonic is rounding of the file, not signal
_FEW = 4  # cycles below which the scatter between them is pooled over harmonics


@dataclass(frozen=True)
class _Fit:
    """Real vector [X_0, Re X_1, Im X_1, ...], inverse normal matrix, residual sum of squares and its freedom."""

    vector: NDArray[np.float64]
    inverse: NDArray[np.float64]
    residual: float
    freedom: int
    plain: bool


def _basis(phase: NDArray[np.float64], count: int) -> NDArray[np.float64]:
    """Columns of [1, cos, -sin, ...]: Re(X exp(i a)) = Re X cos a - Im X sin a."""
    columns = np.empty((phase.size, 2 * count + 1))
    columns[:, 0] = 1.0
    angle = 2 * np.pi * phase[:, None] * np.arange(1, count + 1)
    columns[:, 1::2] = np.cos(angle)
    columns[:, 2::2] = -np.sin(angle)
    return columns


def _complex(vector: NDArray[np.float64]) -> NDArray[np.complex128]:
    return np.concatenate([vector[..., :1].astype(complex), vector[..., 1::2] + 1j * vector[..., 2::2]], axis=-1)


def _real(coefficients: NDArray[np.complex128]) -> NDArray[np.float64]:
    out = np.empty((*coefficients.shape[:-1], 2 * coefficients.shape[-1] - 1))
    out[..., 0] = coefficients[..., 0].real
    out[..., 1::2] = coefficients[..., 1:].real
    out[..., 2::2] = coefficients[..., 1:].imag
    return out


def _regular(cycles: Cycles, rows: NDArray[np.intp], owners: NDArray[np.intp]) -> int:
    """Samples per cycle if the samples are uniform over whole cycles (then the FFT applies), else 0."""
    interval = cycles.signal.sample_interval
    if not interval or not cycles.uniform or cycles.gap or rows.size % cycles.count:
        return 0
    each = rows.size // cycles.count
    whole = abs(each * interval - cycles.base_period) < 1e-9 * cycles.base_period
    in_place = abs(cycles.onsets - cycles.signal.time[rows[::each]]).max() < 1e-6 * interval if whole else False
    return each if whole and in_place and np.all(np.bincount(owners, minlength=cycles.count) == each) else 0


def _fit(phase: NDArray[np.float64], values: NDArray[np.float64], count: int, weights: NDArray[np.float64] | None) -> _Fit:
    basis = _basis(phase, count)
    root = None if weights is None else np.sqrt(weights)
    design = basis if root is None else basis * root[:, None]
    target = values if root is None else values * root
    normal = design.T @ design
    values_of = np.linalg.eigvalsh(normal)
    if not values_of[0] > 1e-12 * values_of[-1]:
        raise SignalError(f"{count} harmonics cannot be told apart with these samples; keep fewer (harmonics = {max(count // 2, 1)})")
    inverse = np.linalg.inv(normal)
    vector = inverse @ (design.T @ target)
    # One step of refinement brings the normal equations to the accuracy of an orthogonal solution.
    vector = vector + inverse @ (design.T @ (target - design @ vector))
    residual = float(np.sum((target - design @ vector) ** 2))
    return _Fit(vector, inverse, residual, values.size - 2 * count - 1, False)


def _fit_below(
    phase: NDArray[np.float64], values: NDArray[np.float64], looked: int, least: int, weights: NDArray[np.float64] | None
) -> tuple[_Fit, int]:
    """Fit ``looked`` harmonics, or as many fewer (not below ``least``) as the phases of the samples tell apart."""
    while True:
        try:
            return _fit(phase, values, looked, weights), looked
        except SignalError:
            if looked <= least:
                raise
            # Samples that fall on nearly the same phases in every cycle lose the harmonics next to the Nyquist limit.
            looked = max(least, int(0.85 * looked))


def most_harmonics(cycles: Cycles) -> int:
    """Highest harmonic below the Nyquist limit of the samples used (and, in a gated cycle, that the gap leaves apart)."""
    rows, _, _ = cycles.samples
    per_cycle = rows.size / cycles.count / (1 - cycles.gap)
    most = int(np.ceil(per_cycle / 2) - 1)
    if cycles.gap:
        most = min(most, int(0.5 / cycles.gap), int(per_cycle / 4))
    return max(most, 0)


def cycle_coefficients(cycles: Cycles, count: int, mean: NDArray[np.complex128] | None = None) -> NDArray[np.complex128]:
    """Each used cycle's own harmonics, shape (cycles, count + 1).

    By FFT where samples are uniform over whole cycles. Otherwise the mean cycle's harmonics plus those of what
    the cycle differs from it, summed over its samples (each for its own share of the phase): a short cycle or one
    with samples left out then has the mean's course where it has no data, and its difference is scaled up so
    that the scatter between cycles is not underrated.
    """
    rows, owners, phase = cycles.samples
    values = cycles.signal.values[rows]
    each = _regular(cycles, rows, owners)
    if each and count <= (each - 1) // 2:
        spectrum = np.fft.rfft(values.reshape(cycles.count, each), axis=1)[:, : count + 1] / each
        spectrum[:, 1:] *= 2
        return np.asarray(spectrum)
    base = _complex(_fit(phase, values, count, None).vector) if mean is None else mean
    turn = np.exp(-2j * np.pi * phase[:, None] * np.arange(count + 1))
    apart = values - (base * turn.conj()).real.sum(axis=1)
    out = np.empty((cycles.count, count + 1), dtype=complex)
    for index in range(cycles.count):
        mine = np.flatnonzero(owners == index)
        if mine.size == 0:
            out[index] = base
            continue
        share = _shares_of_phase(phase[mine])
        difference = (apart[mine] * share) @ turn[mine]
        difference[1:] *= 2
        difference[0] = difference[0].real
        out[index] = base + difference / np.sqrt(min(float(share.sum()), 1.0))
    return out


def _shares_of_phase(phase: NDArray[np.float64]) -> NDArray[np.float64]:
    """Share of the cycle that each sample stands for; none stands for a hole much wider than its neighbours'."""
    if phase.size == 1:
        return np.ones(1)
    steps = np.diff(phase, append=phase[0] + 1.0)
    usual = float(np.median(steps))
    steps = np.where(steps > 2.5 * usual, usual, steps)
    return 0.5 * (steps + np.roll(steps, 1))


def decompose(cycles: Cycles, count: int | None = None, *, weights: NDArray[np.float64] | None = None) -> Harmonics:
    """Write the mean cycle as harmonics.

    Parameters
    ----------
    cycles : Cycles
    count : int, optional
        Harmonics to keep, 0 to below the Nyquist limit; chosen by significance against the noise if not given.
    weights : ndarray, shape (n,), optional
        Weight of each sample of the signal (1/variance, relative), such as from a frame's deviation.

    Returns
    -------
    Harmonics
        With covariance, degrees of freedom and remarks.

    Raises
    ------
    InputError
        If more harmonics are asked for than the samples hold.
    SignalError
        If too few samples are left.

    Notes
    -----
    FFT where samples are uniform over whole cycles, least squares on the same basis otherwise. The covariance
    of the mean comes from the scatter between cycles (allowing for correlation between successive ones); with one
    cycle from the residual beyond the kept harmonics.

    Examples
    --------
    >>> import numpy as np
    >>> from pulsekit.trace import Signal, find_cycles
    >>> time = np.arange(400) * 0.01
    >>> harmonics = decompose(find_cycles(Signal(time, 3 + np.cos(2 * np.pi * time)), period=1.0), count=1)
    >>> harmonics.coefficients.round(12)
    array([3.+0.j, 1.+0.j])
    """
    rows, owners, phase = cycles.samples
    values = cycles.signal.values[rows]
    most = most_harmonics(cycles)
    if rows.size < 4:
        raise SignalError(f"only {rows.size} good samples lie in the cycles used; at least 4 are needed")
    if count is not None and (not 0 <= count <= most or count != int(count)):
        raise InputError(
            f"harmonics = {count} must be a whole number from 0 to {most}, the most that {rows.size / cycles.count:.4g} samples per cycle hold",
            name="harmonics", value=count, allowed=f"0 to {most}",
        )  # fmt: skip
    looked = min(most, _MOST) if count is None else min(most, max(int(count) + max(int(count), 8), 12))
    if count is not None:
        looked = max(looked, int(count))
    sample_weights = None if weights is None else np.asarray(weights, dtype=float)[rows]
    each = _regular(cycles, rows, owners) if sample_weights is None else 0
    if each:
        fit = _by_fft(values, each, cycles.count, looked)
    else:
        fit, looked = _fit_below(phase, values, looked, 1 if count is None else int(count), sample_weights)
    own = cycle_coefficients(cycles, looked, _complex(fit.vector)) if cycles.count > 1 else np.empty((0, looked + 1), dtype=complex)
    noise, freedom = _noise(fit, own, looked)
    kept = int(count) if count is not None else _significant(fit, noise, freedom, looked)
    if not each and kept < looked:
        fit = _fit(phase, values, kept, sample_weights)
    covariance, freedom, said = _covariance(fit, own, kept, values.size, each, noise)
    coefficients = _complex(fit.vector[: 2 * kept + 1])
    remarks = [*cycles.remarks, _kept_words(values, coefficients, kept, most, count), said]
    if cycles.align == "onset":
        coefficients, extra = _whole_mean(cycles, coefficients)
        remarks += extra
    return Harmonics(
        1.0 / cycles.base_period, coefficients, covariance=covariance, degrees_of_freedom=freedom, unit=cycles.signal.unit, remarks=remarks
    )


def _by_fft(values: NDArray[np.float64], each: int, cycles: int, count: int) -> _Fit:
    mean = values.reshape(cycles, each).mean(axis=0)
    spectrum = np.fft.rfft(mean)[: count + 1] / each
    spectrum[1:] *= 2
    vector = _real(spectrum)
    power = values.size * np.concatenate([[vector[0] ** 2], vector[1:] ** 2 / 2]).sum()
    residual = max(float(values @ values - power), 0.0)
    inverse = np.diag(np.concatenate([[1.0], np.full(2 * count, 2.0)]) / values.size)
    return _Fit(vector, inverse, residual, values.size - 2 * count - 1, True)


def _noise(fit: _Fit, own: NDArray[np.complex128], looked: int) -> tuple[NDArray[np.float64], float]:
    """Variance of abs(X_n - true) of the mean cycle, n = 1..looked, and its degrees of freedom."""
    if own.shape[0] >= 2:
        scatter = np.var(own[:, 1:], axis=0, ddof=1) / own.shape[0]
        return np.asarray(scatter), 2.0 * (own.shape[0] - 1)
    variance = fit.residual / fit.freedom if fit.freedom > 2 else 0.0
    diagonal = np.diag(fit.inverse)[1:]
    level = variance * (diagonal[0::2] + diagonal[1::2])
    # One cycle: the upper third of the harmonics is taken as noise where the residual has too little to say.
    upper = np.abs(_complex(fit.vector)[1 + 2 * looked // 3 :]) ** 2
    if fit.freedom < 2 * looked and upper.size:
        level = np.full(looked, max(float(np.mean(upper)), float(level.max(initial=0.0))))
        return level, 2.0 * upper.size
    return level, float(max(fit.freedom, 1))


def _significant(fit: _Fit, noise: NDArray[np.float64], freedom: float, looked: int) -> int:
    """The highest harmonic that stands out of the noise; at least 1 if there is any."""
    if looked == 0:
        return 0
    power = np.abs(_complex(fit.vector)[1:]) ** 2
    limit = fisher.isf(_LEVEL / looked, 2, freedom)
    stands = (power > limit * noise) & (power > (_FLOOR**2) * power.max(initial=0.0))
    found = np.flatnonzero(stands)
    return int(found[-1]) + 1 if found.size else 1


def _covariance(
    fit: _Fit, own: NDArray[np.complex128], kept: int, samples: int, each: int, noise: NDArray[np.float64]
) -> tuple[NDArray[np.float64], float, str]:
    """Covariance of the kept coefficients of the mean, degrees of freedom, and how it was made."""
    size = 2 * kept + 1
    cycles = own.shape[0]
    if cycles >= 2:
        vectors = _real(own[:, : kept + 1])
        spread = np.cov(vectors, rowvar=False, ddof=1).reshape(size, size)
        inflation = _succession(vectors)
        if cycles < _FEW:
            spread = _pooled(spread, kept)
            return (
                spread / cycles * inflation, float(cycles - 1),
                f"Only {cycles} cycles: the scatter between them was pooled over the harmonics and is weakly known ({cycles - 1} degree"
                f"{'s' if cycles > 2 else ''} of freedom); intervals are wide for that reason.",
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
        return np.zeros((size, size)), 1.0, "All samples are used up by the harmonics: their standard errors are not known and count as zero."
    variance = residual / freedom
    return (
        variance * fit.inverse[:size, :size], float(freedom),
        f"One cycle: the standard errors come from what the kept harmonics leave ({freedom} degrees of freedom); how much cycles differ is not known.",
    )  # fmt: skip


def _pooled(spread: NDArray[np.float64], kept: int) -> NDArray[np.float64]:
    """Few cycles: variances shrunk half-way to their mean over the harmonics, no correlations."""
    variances = np.diag(spread).copy()
    if kept:
        variances[1:] = 0.5 * variances[1:] + 0.5 * variances[1:].mean()
    return np.diag(variances)


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
    if r < 1.0 / np.sqrt(cycles):
        return 1.0
    r = min(r, 0.8)
    return (1 + r) / (1 - r)


def _kept_words(values: NDArray[np.float64], coefficients: NDArray[np.complex128], kept: int, most: int, asked: int | None) -> str:
    variance = float(np.var(values))
    share = 1.0 if variance == 0 else min(float(np.sum(np.abs(coefficients[1:]) ** 2)) / 2 / variance, 1.0)
    how = "as asked" if asked is not None else "the highest that stands out of the noise at the 1 % level"
    return f"{kept} harmonics kept of {most} below the Nyquist limit, {how}; they hold {100 * share:.4g} % of the variance of the samples used."


def _whole_mean(cycles: Cycles, coefficients: NDArray[np.complex128]) -> tuple[NDArray[np.complex128], list[str]]:
    """Mean of the whole recorded cycles in place of that of the window; the step where the window closes is said."""
    time, values = cycles.signal.time, cycles.signal.values
    total, length = 0.0, 0.0
    for index in cycles.kept:
        begin, end = cycles.edges[index], cycles.edges[index + 1]
        inside = (time > begin) & (time < end)
        at = np.concatenate([[begin], time[inside], [end]])
        total += float(np.trapezoid(np.interp(at, time, values), at))
        length += float(end - begin)
    mean = total / length
    folded = cycles.folded(np.array([0.0, 0.995]))
    step = float(np.nanmean(folded[:, 1]) - np.nanmean(folded[:, 0]))
    swing = float(np.ptp(values)) or 1.0
    shifted = coefficients.copy()
    window = float(coefficients[0].real)
    shifted[0] = mean
    return shifted, [
        f"The mean is that of the whole recorded cycles ({mean:.4g} SI; over the median period alone it would be {window:.4g}); where the window "
        f"closes the curve steps by {100 * abs(step) / swing:.1f} % of its swing."
    ]


