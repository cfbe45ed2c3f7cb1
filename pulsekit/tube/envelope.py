"""A Doppler envelope: the largest velocity in the section, which is not the axis' while the profile turns."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..trace.harmonics import Harmonics

__all__ = ["envelope_of", "mean_velocity_of_envelope"]

_RADII = 49
_ROUNDS = 60
_SETTLED = 1e-9


def _signed_largest(field: NDArray[np.float64]) -> NDArray[np.float64]:
    """Velocity of largest magnitude over the radius axis (first), with its sign."""
    place = np.abs(field).argmax(axis=0)
    return np.take_along_axis(field, place[None, :], axis=0)[0]


def envelope_of(coefficients: NDArray[np.complex128], shape: NDArray[np.complex128], instants: int) -> NDArray[np.float64]:
    """Signed largest velocity at uniform instants of one cycle, shape (instants,).

    coefficients (N + 1,) of the mean velocity; shape (n_radius, N + 1) the profile u/U per harmonic.
    """
    turn = np.exp(2j * np.pi * np.outer(np.arange(coefficients.size), np.arange(instants)) / instants)
    return _signed_largest(((shape * coefficients) @ turn).real)


def mean_velocity_of_envelope(harmonics: Harmonics, tube: Any, alpha: NDArray[np.float64]) -> tuple[Harmonics, tuple[str, ...]]:
    """Mean velocity whose largest velocity in the section is the measured envelope, and remarks.

    A fixed point: the measured envelope minus that of the present solution is carried back as if it were on
    the axis. Instants near zero, where no turning profile can follow, get no weight. What is left is said.
    """
    count = harmonics.count
    instants = max(128, 16 * count)
    x = np.linspace(0.0, 1.0, _RADII)
    shape = np.asarray(tube.profile(alpha, x[:, None]))
    axis = np.asarray(tube.centreline_ratio(alpha))
    time = np.arange(instants) * harmonics.period / instants
    measured = np.asarray(harmonics.evaluate(time))
    greatest = float(np.max(np.abs(measured)))
    if greatest == 0.0:
        return harmonics.multiplied(1.0 / axis, unit="cm/s"), ()
    weight = np.abs(measured) > 0.1 * greatest
    present = harmonics.coefficients / axis
    best, best_misfit, step = present, np.inf, 1.0
    for _ in range(_ROUNDS):
        miss = np.where(weight, measured - envelope_of(present, shape, instants), 0.0)
        misfit = float(np.sqrt(np.mean(miss[weight] ** 2))) / greatest
        if misfit < best_misfit:
            best, best_misfit = present, misfit
        else:
            step *= 0.5
            present = best
            if step < 1e-3:
                break
        if best_misfit < _SETTLED:
            break
        spectrum = np.fft.rfft(miss)[: count + 1] / instants
        spectrum[1:] *= 2.0
        spectrum[0] = spectrum[0].real
        present = best + step * spectrum / axis
    best = best.copy()
    best[0] = best[0].real
    mean = harmonics.multiplied(1.0 / axis, unit="cm/s").replace(coefficients=best)
    remarks = [
        f"The envelope was solved as the largest velocity in the section; what remains is {100 * best_misfit:.2g} % of its greatest value (rms)."
    ]
    if best_misfit > 0.02:
        remarks.append(
            "The envelope passes through values that no laminar flow of this Womersley number has as its largest velocity: instants near zero "
            "got no weight."
        )
    return mean, tuple(remarks)
