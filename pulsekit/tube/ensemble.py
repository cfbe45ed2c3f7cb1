"""Many samples of one flow at once: every finding and band of a Monte Carlo run, in a few matrix products."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..errors import InputError
from ..exact.womersley import centreline_ratio, shear_factor, velocity_profile

__all__ = ["CURVES", "Ensemble", "propagate", "velocity_indices"]

#: Curves that get a band.
CURVES = ("wall_shear_stress", "pressure_gradient", "centreline_velocity", "flow_rate")
_MOST_NODES = 64  # Chebyshev nodes over the range of the fundamental's Womersley number; a range that asks for more is evaluated as it is
_LEVELS = (0.025, 0.975)
_TURNED = 16  # instants that are turned at once where a band is taken


@dataclass(frozen=True, eq=False, kw_only=True)
class Ensemble:
    """Samples of all findings, shape (S,) each, and central 95 % bands of the curves, (low, high) of shape (K,)."""

    findings: Mapping[str, NDArray[np.float64]]
    bands: Mapping[str, tuple[NDArray[np.float64], NDArray[np.float64]]]
    instants: int
    mean_velocity: NDArray[np.complex128] = field(repr=False)


def _nodes(ratio: float) -> int:
    """Chebyshev nodes that bring a factor to rounding over alpha from 1 to ``ratio``.

    The factors' poles (zeros of I2) lie on the rays at 45 degrees to the real alpha; the one whose ellipse about the range is the narrowest
    sets the rate rho at which the series falls, and rho^-nodes = 1e-16 the number.
    """
    poles = np.exp(0.25j * np.pi) * np.linspace(0.5, ratio + 0.5, 200)
    z = (poles - 0.5 * (1 + ratio)) / (0.5 * (ratio - 1))
    root = np.sqrt(z * z - 1)
    rho = float(np.maximum(np.abs(z + root), np.abs(z - root)).min())
    return int(np.ceil(36.9 / np.log(rho))) + 2


def _factors(first: NDArray[np.float64], count: int) -> Callable[[Callable[[NDArray[np.float64]], Any]], NDArray[np.complex128]]:
    """What turns a function of alpha into its factors (S, N + 1) at alpha_n = sqrt(n) alpha_1.

    One Chebyshev interpolant over the samples' range serves all: the factors are analytic in alpha, some 20 nodes reach
    rounding over the range of a usual radius and viscosity, more over a wider one.
    """
    root = np.sqrt(np.arange(count + 1.0))
    low, high = float(first.min()), float(first.max())
    if high - low <= 1e-14 * high:
        return lambda function: np.broadcast_to(np.asarray(function(low * root)), (first.size, count + 1))
    size = _nodes(high / low)
    if size > _MOST_NODES or 2 * size > first.size:
        return lambda function: np.asarray(function(first[:, None] * root))
    angle = (np.arange(size) + 0.5) * np.pi / size
    nodes = 0.5 * (low + high) + 0.5 * (high - low) * np.cos(angle)
    weights = np.cos(np.outer(np.arange(size), angle)) * (2.0 / size)
    weights[0] *= 0.5
    place = np.clip((2 * first - low - high) / (high - low), -1.0, 1.0)
    # Values at the nodes -> series -> values at the samples, as one matrix: the same for every factor.
    basis = _chebyshev(place, size) @ weights

    def interpolated(function: Callable[[NDArray[np.float64]], Any]) -> NDArray[np.complex128]:
        table = np.asarray(function(nodes[:, None] * root))
        out = np.empty((first.size, count + 1), dtype=complex)
        out.real = basis @ table.real
        out.imag = basis @ table.imag
        return out

    return interpolated


def _chebyshev(place: NDArray[np.float64], size: int) -> NDArray[np.float64]:
    """T_0 to T_(size - 1) at places in -1..1, by their recurrence, shape (S, size)."""
    out = np.empty((max(size, 2), place.size))
    out[0], out[1] = 1.0, place
    for k in range(2, size):
        np.multiply(2.0 * place, out[k - 1], out=out[k])
        out[k] -= out[k - 2]
    return out[:size].T


def _basis(count: int, instants: int) -> NDArray[np.float64]:
    """Rows that turn [Re X, Im X] into values at uniform instants, shape (2 (N + 1), K)."""
    turn = 2 * np.pi * np.outer(np.arange(count + 1), np.arange(instants)) / instants
    return np.concatenate([np.cos(turn), -np.sin(turn)])


def _curve(coefficients: NDArray[np.complex128], basis: NDArray[np.float64]) -> NDArray[np.float64]:
    """Values (S, K); rows stand a little apart, since a stride of a power of two makes turning them slow."""
    instants = basis.shape[1]
    values = np.empty((coefficients.shape[0], instants + 8))[:, :instants]
    return np.matmul(np.concatenate([coefficients.real, coefficients.imag], axis=1), basis, out=values)


def _extreme(
    values: NDArray[np.float64], coefficients: NDArray[np.complex128], sign: float
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Extreme of each row: the vertex of the parabola through the best instant, with the series evaluated there."""
    instants = values.shape[1]
    rows = np.arange(values.shape[0])
    place = values.argmax(axis=1) if sign > 0 else values.argmin(axis=1)
    left, top, right = values[rows, place - 1], values[rows, place], values[rows, (place + 1) % instants]
    bend = left - 2 * top + right
    shift = np.divide(0.5 * (left - right), bend, out=np.zeros_like(bend), where=bend != 0)
    phase = 2 * np.pi * (place + np.clip(shift, -0.5, 0.5)) / instants
    turn = np.exp(1j * phase)
    total = coefficients[:, -1].copy()
    for n in range(coefficients.shape[1] - 2, -1, -1):
        total = total * turn + coefficients[:, n]
    found = total.real
    return (np.maximum(found, top) if sign > 0 else np.minimum(found, top)), phase


def _mean_absolute(values: NDArray[np.float64]) -> NDArray[np.float64]:
    """Mean of abs over the cycle; the rule's error at each change of sign is taken out.

    With values -a and b on the two sides, the kink inside the interval adds a b/(a + b) times the step, and the end
    corrections of the smooth pieces (Euler and Maclaurin, the slope being a + b over the step) take (a + b)/6 away.
    """
    total = np.abs(values).mean(axis=1)
    negative = values < 0
    crossing = negative != np.roll(negative, -1, axis=1)
    if crossing.any():
        row, column = np.nonzero(crossing)
        a = np.abs(values[row, column])
        b = np.abs(values[row, (column + 1) % values.shape[1]])
        excess = (a * b / (a + b) - (a + b) / 6) / values.shape[1]
        total -= np.bincount(row, weights=excess, minlength=values.shape[0])
    return total


def _band(values: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Central 95 % of each instant, by one partition of each column."""
    size, instants = values.shape
    ranks = [level * (size - 1) for level in _LEVELS]
    wanted = sorted({k for rank in ranks for k in (int(rank), min(int(rank) + 1, size - 1))})
    ends = np.empty((2, instants))
    # A few instants at a time, so that turning samples into rows stays in the cache.
    for start in range(0, instants, _TURNED):
        columns = np.ascontiguousarray(values[:, start : start + _TURNED].T)
        columns.partition(wanted, axis=1)
        for end, rank in zip(ends, ranks, strict=True):
            k = int(rank)
            upper = min(k + 1, size - 1)
            end[start : start + _TURNED] = columns[:, k] + (rank - k) * (columns[:, upper] - columns[:, k])
    return ends[0], ends[1]


def propagate(
    quantity: str,
    coefficients: NDArray[np.complex128],
    *,
    angular_frequency: float | NDArray[np.float64],
    radius: NDArray[np.float64],
    viscosity: NDArray[np.float64],
    density: NDArray[np.float64],
    instants: int = 256,
    peak_place: float = 0.0,
    bands: bool = True,
) -> Ensemble:
    """Carry samples of the measured harmonics and of the givens to samples of every finding and to bands.

    Parameters
    ----------
    quantity : str
        As in `pulsekit.tube.solve`; an envelope counts as the velocity on the axis times a constant.
    coefficients : ndarray of complex, shape (S, N + 1)
        Of the measured quantity. [SI]
    angular_frequency : float or ndarray, shape (S,)
        Of the fundamental. [rad/s]
    radius, viscosity, density : ndarray, shape (S,)
        [m], [Pa s], [kg/m^3]
    instants : int
        K, at least 4 N.
    peak_place : float
        r/R at which the peak velocity of the stated case lies; the samples' peak velocity is looked for there
        and on the axis (a surrogate for a search over all radii).
    bands : bool
        False leaves out the bands.

    Returns
    -------
    Ensemble

    Notes
    -----
    The same definitions as for the single flow. Extremes: the series at the vertex of a parabola through the
    best of K instants; rectified means: the trapezoidal rule, corrected at sign changes. Both differ from the
    exact ones by less than 1e-4 of the curve's swing for K = 256 and N = 20.

    Examples
    --------
    >>> ones = np.ones(3)
    >>> cloud = propagate("flow_rate", np.full((3, 1), 7e-6 + 0j), angular_frequency=7.5, radius=3.1e-3 * ones,
    ...                   viscosity=3.5e-3 * ones, density=1060 * ones)
    >>> cloud.findings["time_averaged_wall_shear_stress"].round(4)
    array([1.0471, 1.0471, 1.0471])
    """
    size = coefficients.shape[1]
    if instants < 4 * (size - 1):
        raise InputError(
            f"instants = {instants} is too few for {size - 1} harmonics; at least {4 * (size - 1)}", name="instants", value=instants
        )
    count = size - 1
    first = radius * np.sqrt(angular_frequency * density / viscosity)
    factors = _factors(first, count)
    shear = factors(shear_factor)
    square = first[:, None] ** 2 * np.arange(count + 1.0)
    axis = factors(centreline_ratio)
    area = np.pi * radius**2
    per_velocity = {
        "flow_rate": area[:, None],
        "mean_velocity": 1.0,
        "centreline_velocity": axis,
        "velocity_envelope": axis,
        "wall_shear_stress": shear * (viscosity / radius)[:, None],
    }
    gradient_factor = (2.0 * shear + 1j * square) * (viscosity / radius**2)[:, None]
    per_velocity["pressure_gradient"] = gradient_factor
    if quantity not in per_velocity:
        raise InputError(f"quantity = {quantity!r} is not one of {', '.join(per_velocity)}", name="quantity", value=quantity)
    velocity = coefficients / np.asarray(per_velocity[quantity])
    basis = _basis(count, instants)
    found: dict[str, NDArray[np.float64]] = {}
    spread: dict[str, tuple[NDArray[np.float64], NDArray[np.float64]]] = {}

    stress = velocity * shear * (viscosity / radius)[:, None]
    values = _curve(stress, basis)
    low_s, low_at = _extreme(values, stress, -1.0)
    high_s, high_at = _extreme(values, stress, 1.0)
    absolute, mean_s = _mean_absolute(values), stress[:, 0].real
    absolute = np.maximum(absolute, np.abs(mean_s))
    if bands:
        spread["wall_shear_stress"] = _band(values)

    gradient = velocity * gradient_factor
    values = _curve(gradient, basis)
    low_g, _ = _extreme(values, gradient, -1.0)
    high_g, _ = _extreme(values, gradient, 1.0)
    if bands:
        spread["pressure_gradient"] = _band(values)

    on_axis = velocity * axis
    values = _curve(on_axis, basis)
    low_a, _ = _extreme(values, on_axis, -1.0)
    high_a, _ = _extreme(values, on_axis, 1.0)
    peak = np.maximum(-low_a, high_a)
    quasi_axis = peak
    if bands:
        spread["centreline_velocity"] = _band(values)
    if peak_place > 0:
        beside = velocity * factors(lambda a: velocity_profile(a, peak_place))
        values = _curve(beside, basis)
        peak = np.maximum(peak, np.maximum(-_extreme(values, beside, -1.0)[0], _extreme(values, beside, 1.0)[0]))

    values = _curve(velocity, basis)
    low_u, _ = _extreme(values, velocity, -1.0)
    high_u, _ = _extreme(values, velocity, 1.0)
    absolute_u, mean_u = _mean_absolute(values), velocity[:, 0].real
    absolute_u = np.maximum(absolute_u, np.abs(mean_u))
    if bands:
        values *= area[:, None]
        spread["flow_rate"] = _band(values)

    forward_s, backward_s = _two_ways(absolute, mean_s, low_s, high_s)
    forward_u, backward_u = _two_ways(absolute_u, mean_u, low_u, high_u)
    period = 2 * np.pi / angular_frequency
    biggest_u = np.maximum(-low_u, high_u)
    peak_s = np.maximum(-low_s, high_s)
    kinematic = viscosity / density
    power = gradient * velocity.conj()
    with np.errstate(divide="ignore", invalid="ignore"):
        found |= {
            "time_averaged_wall_shear_stress": absolute,
            "peak_wall_shear_stress": peak_s,
            "oscillatory_shear_index": np.minimum(forward_s, backward_s) / absolute,
            "relative_residence_time": 1.0 / np.abs(mean_s),
            "backward_fraction": backward_u / forward_u,
            "flow_pulsatility_index": (high_u - low_u) / mean_u,
        }
    found |= {
        "mean_wall_shear_stress": mean_s,
        "minimum_wall_shear_stress": low_s,
        "greatest_wall_shear_stress": high_s,
        "forward_wall_shear_stress": forward_s,
        "backward_wall_shear_stress": backward_s,
        "time_of_peak_wall_shear": _near(np.where(high_s >= -low_s, high_at, low_at)) / (2 * np.pi) * period,
        "steady_wall_shear_stress": 4 * viscosity * mean_u / radius,
        "time_averaged_wall_shear_rate": absolute / viscosity,
        "peak_wall_shear_rate": peak_s / viscosity,
        "quasi_steady_shear_rate_of_mean_velocity": 4 * biggest_u / radius,
        "quasi_steady_shear_rate_of_centreline_velocity": 2 * quasi_axis / radius,
        "mean_flow_rate": mean_u * area,
        "peak_flow_rate": high_u * area,
        "minimum_flow_rate": low_u * area,
        "forward_flow_rate": forward_u * area,
        "backward_flow_rate": backward_u * area,
        "volume_per_cycle": mean_u * area * period,
        "peak_velocity": peak,
        "mean_pressure_gradient": gradient[:, 0].real,
        "pressure_gradient_amplitude": 0.5 * (high_g - low_g),
        "womersley_number": first,
        "stokes_layer_thickness": np.sqrt(2 * kinematic / angular_frequency),
        "mean_reynolds_number": 2 * radius * np.abs(mean_u) / kinematic,
        "peak_reynolds_number": 2 * radius * biggest_u / kinematic,
        "stokes_layer_reynolds_number": 0.5 * (high_u - low_u) * np.sqrt(2 / (kinematic * angular_frequency)),
        "pumping_power_per_length": area * (power[:, 0].real + 0.5 * power[:, 1:].real.sum(axis=1)),
    }
    if quantity in ("mean_velocity", "centreline_velocity", "velocity_envelope"):
        found |= _velocity_indices(coefficients, basis)
    return Ensemble(findings=found, bands=spread, instants=instants, mean_velocity=velocity)


def _two_ways(
    absolute: NDArray[np.float64], mean: NDArray[np.float64], low: NDArray[np.float64], high: NDArray[np.float64]
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Means of the forward and of the backward part; exactly 0 where a curve never goes that way."""
    return np.where(high > 0, 0.5 * (absolute + mean), 0.0), np.where(low < 0, 0.5 * (absolute - mean), 0.0)


def _velocity_indices(coefficients: NDArray[np.complex128], basis: NDArray[np.float64]) -> dict[str, NDArray[np.float64]]:
    values = _curve(coefficients, basis)
    low, _ = _extreme(values, coefficients, -1.0)
    high, _ = _extreme(values, coefficients, 1.0)
    foot = coefficients.real.sum(axis=1)
    with np.errstate(divide="ignore", invalid="ignore"):
        return {"velocity_pulsatility_index": (high - low) / coefficients[:, 0].real, "velocity_resistive_index": (high - foot) / high}


def velocity_indices(coefficients: NDArray[np.complex128], instants: int) -> dict[str, NDArray[np.float64]]:
    """Pulsatility and resistive index of samples of a measured velocity, coefficients (S, N + 1)."""
    return _velocity_indices(coefficients, _basis(coefficients.shape[1] - 1, instants))


def _near(phase: NDArray[np.float64]) -> NDArray[np.float64]:
    """Phases unwrapped about their circular mean, so that a peak at the seam of the cycle is not split in two."""
    middle = np.angle(np.exp(1j * phase).mean())
    middle = middle if middle >= 0 else middle + 2 * np.pi
    return middle + np.angle(np.exp(1j * (phase - middle)))
