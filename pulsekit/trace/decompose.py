"""From cycles to harmonics, with their covariance and the number that stands out of the noise."""

from __future__ import annotations

import itertools

import numpy as np
from numpy.typing import NDArray

from ..errors import InputError, SignalError
from ..quantities import from_si
from .cycles import Cycles
from .decompose_spread import Fit, as_complex, as_real, covariance_of, noise_of, significant_count, widened
from .fitting import cycle_course, fit_harmonics, harmonic_basis
from .harmonics import Harmonics

__all__ = ["cycle_coefficients", "cycle_course", "decompose", "most_harmonics"]

_MOST = 60  # harmonics looked at when none are asked for
_GAP_ERROR = 2.0  # greatest standard error of the curve in the gap of a gated cycle, in those of one sample


def _regular(cycles: Cycles, rows: NDArray[np.intp], owners: NDArray[np.intp]) -> int:
    """Samples per cycle if the samples are uniform over whole cycles (then the FFT applies), else 0."""
    interval = cycles.signal.sample_interval
    if not interval or not cycles.uniform or cycles.gap or rows.size % cycles.count:
        return 0
    each = rows.size // cycles.count
    whole = abs(each * interval - cycles.base_period) < 1e-9 * cycles.base_period
    in_place = abs(cycles.onsets - cycles.signal.time[rows[::each]]).max() < 1e-6 * interval if whole else False
    return each if whole and in_place and np.all(np.bincount(owners, minlength=cycles.count) == each) else 0


def _fit_below(
    phase: NDArray[np.float64], values: NDArray[np.float64], looked: int, least: int, weights: NDArray[np.float64] | None
) -> tuple[Fit, int]:
    """Fit ``looked`` harmonics, or as many fewer (not below ``least``) as the phases of the samples tell apart."""
    while True:
        try:
            return fit_harmonics(phase, values, looked, weights), looked
        except SignalError:
            if looked <= least:
                raise
            # Samples that fall on nearly the same phases in every cycle lose the harmonics next to the Nyquist limit.
            looked = max(least, int(0.85 * looked))


def most_harmonics(cycles: Cycles) -> int:
    """Highest harmonic below the Nyquist limit of the samples used; in a gated cycle, that leaves the curve in its gap known.

    There the standard error of the fitted curve must stay below twice that of one sample.
    """
    rows, _, phase = cycles.samples
    per_cycle = rows.size / cycles.count / (1 - cycles.gap)
    most = max(int(np.ceil(per_cycle / 2) - 1), 0)
    if not cycles.gap:
        return most
    most = min(most, (rows.size - 2) // 2)
    across = np.linspace(1 - cycles.gap, 1, 21)
    while most > 1:
        basis = harmonic_basis(phase, most)
        try:
            inverse = np.linalg.inv(basis.T @ basis)
        except np.linalg.LinAlgError:
            inverse = None
        there = harmonic_basis(across, most)
        if inverse is not None and float(np.einsum("ij,jk,ik->i", there, inverse, there).max()) <= _GAP_ERROR**2:
            break
        most -= 1
    return most


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
    base = as_complex(fit_harmonics(phase, values, count, None).vector) if mean is None else mean
    apart = values - cycle_course(base, phase)
    order = np.arange(count + 1)
    out = np.empty((cycles.count, count + 1), dtype=complex)
    bounds = np.searchsorted(owners, np.arange(cycles.count + 1))
    for index, (first, last) in enumerate(itertools.pairwise(bounds)):
        if first == last:
            out[index] = base
            continue
        mine = slice(first, last)
        share = _shares_of_phase(phase[mine])
        difference = (apart[mine] * share) @ np.exp(-2j * np.pi * np.multiply.outer(phase[mine], order))
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
    >>> harmonics.amplitude.round(12).tolist()
    [3.0, 1.0]
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
    # Next to the Nyquist limit a sine falls on its own zeros at nearly every sample.
    looked = min(most, max(int(0.9 * most), 1), _MOST) if count is None else min(most, max(int(count) + max(int(count), 8), 12))
    if count is not None:
        looked = max(looked, int(count))
    sample_weights = None if weights is None else np.asarray(weights, dtype=float)[rows]
    each = _regular(cycles, rows, owners) if sample_weights is None else 0
    if each:
        fit = _by_fft(values, each, cycles.count, looked)
    else:
        fit, looked = _fit_below(phase, values, looked, 1 if count is None else int(count), sample_weights)
    own = cycle_coefficients(cycles, looked, as_complex(fit.vector)) if cycles.count > 1 else np.empty((0, looked + 1), dtype=complex)
    noise, freedom = noise_of(fit, own, looked)
    sure, kept = (int(count), int(count)) if count is not None else significant_count(fit, noise, freedom, looked, cycles.count)
    if not each and kept < looked:
        fit = fit_harmonics(phase, values, kept, sample_weights)
    coefficients = as_complex(fit.vector[: 2 * kept + 1])
    extra: list[str] = []
    if cycles.align == "onset":
        coefficients, own, extra = _whole_mean(cycles, coefficients, own)
    covariance, freedom, said = covariance_of(fit, own, kept, values.size, each, noise)
    covariance, chosen = widened(covariance, sure)
    remarks = [
        *cycles.remarks,
        _kept_words(values, coefficients, kept, most, count, 1 if cycles.count > 1 else 5),
        said,
        *([chosen] if chosen else []),
        *extra,
    ]
    return Harmonics(
        1.0 / cycles.base_period, coefficients, covariance=covariance, degrees_of_freedom=freedom, unit=cycles.signal.unit, remarks=remarks
    )


def _by_fft(values: NDArray[np.float64], each: int, cycles: int, count: int) -> Fit:
    mean = values.reshape(cycles, each).mean(axis=0)
    spectrum = np.fft.rfft(mean)[: count + 1] / each
    spectrum[1:] *= 2
    vector = as_real(spectrum)
    power = values.size * np.concatenate([[vector[0] ** 2], vector[1:] ** 2 / 2]).sum()
    residual = max(float(values @ values - power), 0.0)
    inverse = np.diag(np.concatenate([[1.0], np.full(2 * count, 2.0)]) / values.size)
    return Fit(vector, np.asarray(inverse, dtype=np.float64), residual, values.size - 2 * count - 1, True)


def _kept_words(
    values: NDArray[np.float64], coefficients: NDArray[np.complex128], kept: int, most: int, asked: int | None, level: int = 1
) -> str:
    variance = float(np.var(values))
    share = 1.0 if variance == 0 else min(float(np.sum(np.abs(coefficients[1:]) ** 2)) / 2 / variance, 1.0)
    how = (
        "as asked"
        if asked is not None
        else f"up to the highest that stands out of the noise at the {level} % level and those next to it at the 20 % level"
    )
    return f"{kept} harmonics kept of {most} below the Nyquist limit, {how}; they hold {100 * share:.4g} % of the variance of the samples used."


def _whole_mean(
    cycles: Cycles, coefficients: NDArray[np.complex128], own: NDArray[np.complex128]
) -> tuple[NDArray[np.complex128], NDArray[np.complex128], list[str]]:
    """Mean of the whole recorded cycles in place of that of the window; the step where the window closes is said."""
    volumes = cycles.integrals()
    lengths = cycles.periods
    mean = float(volumes.sum() / lengths.sum())
    folded = cycles.folded(np.array([0.0, 0.995]))
    step = float(np.nanmean(folded[:, 1]) - np.nanmean(folded[:, 0])) if np.isfinite(folded[:, 1]).any() else 0.0
    swing = float(np.ptp(cycles.signal.values[cycles.samples[0]])) or 1.0
    shifted = coefficients.copy()
    window = float(coefficients[0].real)
    shifted[0] = mean
    if own.shape[0]:
        # A mean of volumes over a mean of lengths: what each cycle adds to its scatter.
        own = own.copy()
        own[:, 0] = mean + (volumes - mean * lengths) / lengths.mean()
    return shifted, own, [
        f"The mean is that of the whole recorded cycles ({_in_unit(mean, cycles)}; over the median period alone it would be {_in_unit(window, cycles)}); "
        f"where the window closes the curve steps by {100 * abs(step) / swing:.1f} % of its swing."
    ]  # fmt: skip


def _in_unit(value: float, cycles: Cycles) -> str:
    unit = cycles.signal.unit
    if not unit or cycles.signal.dimension is None:
        return f"{value:.4g}"
    return f"{from_si(value, unit):.4g} {unit}"
