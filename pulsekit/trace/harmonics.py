"""A periodic quantity as its harmonics: x(t) = Re sum_{n=0}^{N} X_n exp(+i n omega t)."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import InputError
from ..quantities import to_si

__all__ = ["Harmonics"]


@dataclass(frozen=True, eq=False, init=False)
class Harmonics:
    """A periodic quantity as complex coefficients X_n, n = 0..N, of exp(+i n omega t).

    Parameters
    ----------
    frequency : float or str
        Of the fundamental, > 0. [Hz]
    coefficients : array_like of complex, shape (N + 1,)
        X_0 is the mean and real; the amplitude of harmonic n is abs(X_n). [SI]
    covariance : array_like, shape (2 N + 1, 2 N + 1), optional
        Of [X_0, Re X_1, Im X_1, Re X_2, ...]. [SI squared]
    degrees_of_freedom : float, optional
        Behind the covariance: cycles - 1, or those of the residual; inf if known exactly.
    unit : str
        In which a person reads the quantity.
    remarks : sequence of str
        What was done to the data, in order.

    Raises
    ------
    InputError
        If the frequency is not positive, the mean is not real, or a value is not finite.

    Examples
    --------
    >>> flow = Harmonics(frequency=1.2, coefficients=[7e-6, 5e-6 - 2e-6j])
    >>> round(float(flow.evaluate(0.0)) * 1e6, 6)
    12.0
    """

    frequency: float
    coefficients: NDArray[np.complex128]
    covariance: NDArray[np.float64] | None
    degrees_of_freedom: float | None
    unit: str
    remarks: tuple[str, ...]

    def __init__(
        self,
        frequency: float | str,
        coefficients: ArrayLike,
        *,
        covariance: ArrayLike | None = None,
        degrees_of_freedom: float | None = None,
        unit: str = "",
        remarks: Sequence[str] = (),
    ) -> None:
        hertz = to_si(frequency, "frequency", "frequency")
        if not hertz > 0:
            raise InputError(f"frequency = {frequency!r} must be above 0 Hz", name="frequency", value=frequency)
        values = np.array(coefficients, dtype=complex)
        if values.ndim != 1 or values.size == 0:
            raise InputError(f"coefficients must be one row X_0, X_1, ...; got shape {values.shape}", name="coefficients")
        if not np.all(np.isfinite(values)):
            raise InputError("coefficients hold a value that is not finite", name="coefficients")
        if values[0].imag != 0:
            raise InputError(f"X_0 = {values[0]} is the mean and must be real", name="coefficients", value=values[0])
        values.setflags(write=False)
        spread = None
        if covariance is not None:
            spread = np.array(covariance, dtype=float)
            size = 2 * values.size - 1
            if spread.shape != (size, size) or not np.all(np.isfinite(spread)):
                raise InputError(f"covariance must be finite and of shape ({size}, {size}); got {spread.shape}", name="covariance")
            spread.setflags(write=False)
        for name, value in (
            ("frequency", hertz), ("coefficients", values), ("covariance", spread),
            ("degrees_of_freedom", degrees_of_freedom), ("unit", unit), ("remarks", tuple(remarks)),
        ):  # fmt: skip
            object.__setattr__(self, name, value)

    @property
    def count(self) -> int:
        """Highest harmonic kept, N."""
        return self.coefficients.size - 1

    @property
    def period(self) -> float:
        """1/frequency [s]."""
        return 1 / self.frequency

    @property
    def angular_frequency(self) -> float:
        """Omega of the fundamental [rad/s]."""
        return 2 * np.pi * self.frequency

    @property
    def mean(self) -> float:
        """X_0 [SI]."""
        return float(self.coefficients[0].real)

    @property
    def amplitude(self) -> NDArray[np.float64]:
        """Return abs(X_n), n = 0..N; the mean as its magnitude [SI]."""
        return np.abs(self.coefficients)

    @property
    def peak_to_peak(self) -> NDArray[np.float64]:
        """Peak to peak of each harmonic, twice the amplitude; 0 for the mean [SI]."""
        swing = 2 * np.abs(self.coefficients)
        swing[0] = 0.0
        return swing

    @property
    def phase(self) -> NDArray[np.float64]:
        """Phase of each harmonic [rad]."""
        return np.angle(self.coefficients)

    @cached_property
    def standard_error(self) -> NDArray[np.float64] | None:
        """Standard errors of the real and imaginary parts, (N + 1, 2) [SI]; None if not known."""
        if self.covariance is None:
            return None
        spread = np.sqrt(np.clip(np.diag(self.covariance), 0.0, None))
        return np.concatenate([[spread[0], 0.0], spread[1:]]).reshape(-1, 2)

    def evaluate(self, time: ArrayLike) -> Any:
        """Return x(t) at times [s] of any shape; scalar in, scalar out."""
        instants = np.asarray(time, dtype=float)
        phasor = np.exp(1j * self.angular_frequency * instants)
        # Horner's rule in the phasor: one exponential per instant, whatever the number of harmonics.
        total = np.full(instants.shape, self.coefficients[-1])
        for coefficient in self.coefficients[-2::-1]:
            total = total * phasor + coefficient
        return total.real[()]

    def replace(self, **changes: Any) -> Harmonics:
        """Return a copy with some fields changed."""
        fields = {name: getattr(self, name) for name in self.__dataclass_fields__} | changes
        return Harmonics(fields.pop("frequency"), fields.pop("coefficients"), **fields)

    def multiplied(self, factor: ArrayLike, *, unit: str = "") -> Harmonics:
        """Return the harmonics times a factor per harmonic (N + 1, or one for all); the covariance follows.

        The factor of the mean must be real.
        """
        factors = np.broadcast_to(np.asarray(factor, dtype=complex), self.coefficients.shape)
        spread = None
        if self.covariance is not None:
            spread = _turned(_turned(self.covariance, factors).T, factors).T
        product = self.coefficients * factors
        product[0] = product[0].real
        return self.replace(coefficients=product, covariance=spread, unit=unit)

    def truncated(self, count: int) -> Harmonics:
        """Return the first ``count`` harmonics and the mean."""
        if not 0 <= count <= self.count:
            raise InputError(f"count = {count} must lie between 0 and {self.count}", name="count", value=count)
        spread = None if self.covariance is None else self.covariance[: 2 * count + 1, : 2 * count + 1]
        return self.replace(coefficients=self.coefficients[: count + 1], covariance=spread)

    def shifted(self, delay: float) -> Harmonics:
        """Return x(t - delay), the same course later by ``delay`` [s]."""
        turn = np.exp(-1j * np.arange(self.coefficients.size) * self.angular_frequency * delay)
        return self.multiplied(turn, unit=self.unit)

    def __repr__(self) -> str:
        return f"<Harmonics: mean {self.mean:.4g}, {self.count} harmonics of {self.frequency:.4g} Hz>"


def _turned(rows: NDArray[np.float64], factors: NDArray[np.complex128]) -> NDArray[np.float64]:
    """Rows [X_0, Re X_1, Im X_1, ...] of a matrix under X_n -> f_n X_n, each pair of rows as one complex row."""
    out = np.empty_like(rows)
    out[0] = factors[0].real * rows[0]
    pairs = (rows[1::2] + 1j * rows[2::2]) * factors[1:, None]
    out[1::2], out[2::2] = pairs.real, pairs.imag
    return out
