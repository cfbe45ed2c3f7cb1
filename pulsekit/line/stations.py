"""From pressures at two or more stations of one pipe to its wave speed and the waves in it, per harmonic."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.optimize import minimize_scalar

from ..errors import InputError

__all__ = ["StationFit", "fit_stations", "separated_waves"]

_LOW, _HIGH = 0.1 * np.pi, 0.8 * np.pi


@dataclass(frozen=True, eq=False, kw_only=True)
class StationFit:
    """Wave speed [m/s] with its standard uncertainty, waves at 0 m per harmonic, and what is left.

    forward, backward (N,) complex [Pa] at 0 m; flow (N,) at 0 m [m^3/s]; flow_error (N,) standard error of abs(flow);
    usable (N,) tells which harmonics the spacing serves; because (N,) why not; residual (N,) over the pressures, NaN where
    two stations leave nothing to judge by.
    """

    wave_speed: float
    wave_speed_uncertainty: float | None
    forward: NDArray[np.complex128]
    backward: NDArray[np.complex128]
    flow: NDArray[np.complex128]
    flow_error: NDArray[np.float64]
    usable: NDArray[np.bool_]
    because: tuple[str, ...]
    residual: NDArray[np.float64]


def separated_waves(
    pressures: NDArray[np.complex128], positions: NDArray[np.float64], gamma: NDArray[np.complex128]
) -> tuple[NDArray[np.complex128], NDArray[np.complex128], NDArray[np.float64], NDArray[np.float64]]:
    """Least-squares forward and backward waves at 0 m per harmonic.

    pressures (stations, N), positions (stations,), gamma (N,). Returns forward, backward (N,), the residual's rms over that of
    the pressures, and the noise gain: standard error of a wave per unit of that of a pressure.
    """
    count = gamma.size
    forward, backward = np.empty(count, complex), np.empty(count, complex)
    residual, gain = np.full(count, np.nan), np.full(count, np.inf)
    for n in range(count):
        matrix = np.stack([np.exp(-gamma[n] * positions), np.exp(gamma[n] * positions)], axis=1)
        fit, _, rank, _ = np.linalg.lstsq(matrix, pressures[:, n], rcond=1e-9)
        forward[n], backward[n] = fit
        left = pressures[:, n] - matrix @ fit
        size = float(np.sqrt(np.mean(np.abs(pressures[:, n]) ** 2)))
        if positions.size > 2 and size > 0:
            residual[n] = float(np.sqrt(np.sum(np.abs(left) ** 2) / (positions.size - 2))) / size
        if rank == 2:
            gain[n] = float(np.sqrt(np.linalg.inv(matrix.conj().T @ matrix).real.diagonal().max()))
    return forward, backward, residual, gain


def fit_stations(
    pressures: ArrayLike, positions: ArrayLike, *, line_constants: Any, errors: ArrayLike | None = None, guess: float = 1300.0,
    reach: tuple[float, float] = (0.5, 1.6), frequency: float = 1.0,
) -> StationFit:  # fmt: skip
    """Fit wave speed and waves to pressures at stations along one uniform pipe.

    Parameters
    ----------
    pressures : array_like of complex, shape (stations, N)
        Harmonics from the first, all stations at the same instants. [Pa]
    positions : array_like, shape (stations,)
        [m]
    line_constants : callable
        ``line_constants(wave_speed) -> (gamma (N,), Z_c (N,))`` of the pipe at the harmonics.
    errors : array_like, shape (N,), optional
        Standard error of a pressure harmonic. [Pa]
    guess : float
        Wave speed to begin with. [m/s]
    reach : (float, float)
        Search from reach[0] to reach[1] times the guess.
    frequency : float
        Of the fundamental, for the messages. [Hz]

    Returns
    -------
    StationFit

    Raises
    ------
    InputError
        If two stations stand at one place, or there are fewer than two.

    Notes
    -----
    Two stations cannot judge a wave speed by themselves: it is then the guess. From three on it is the one that leaves the least
    residual over all harmonics. A harmonic is refused where the spacing is near a multiple of a half wavelength: usable for
    0.1 pi < k s < 0.8 pi of some pair (H. Bodén, M. Åbom 1986, from memory).
    """
    waves, places = np.asarray(pressures, complex), np.asarray(positions, float)
    if places.size < 2 or waves.shape[0] != places.size:
        raise InputError(f"wave speed and source flow need pressures at two stations or more; there are {places.size}", name="station")
    gaps = np.abs(places[:, None] - places[None, :])[np.triu_indices(places.size, 1)]
    if np.any(gaps < 1e-6):
        raise InputError("two stations stand at one place; their positions must differ", name="station.position")
    spread: float | None = None
    speed = guess
    if places.size >= 3:
        speed, spread = _best_speed(waves, places, line_constants, guess, reach)
    gamma, impedance = line_constants(speed)
    gamma, impedance = np.asarray(gamma, complex), np.asarray(impedance, complex)
    forward, backward, residual, gain = separated_waves(waves, places, gamma)
    phase = np.abs(gamma.imag)[None, :] * gaps[:, None]
    good = (phase > _LOW) & (phase < _HIGH)
    usable = good.any(axis=0)
    because = []
    for n in range(gamma.size):
        if usable[n]:
            because.append("")
            continue
        share = phase[:, n] / np.pi
        near = "near a half wavelength" if share.max() > 0.8 else "too small a part of the wavelength"
        because.append(f"order {n + 1} ({(n + 1) * frequency:.4g} Hz): the spacing is {share.max():.2g} half wavelengths, {near}")
    flow = (forward - backward) / impedance
    noise = np.zeros(gamma.size) if errors is None else np.asarray(errors, float)
    return StationFit(
        wave_speed=speed, wave_speed_uncertainty=spread, forward=forward, backward=backward, flow=flow,
        flow_error=np.sqrt(2.0) * noise * gain / np.abs(impedance), usable=usable, because=tuple(because), residual=residual,
    )  # fmt: skip


def _best_speed(
    waves: NDArray[np.complex128], places: NDArray[np.float64], line_constants: Any, guess: float, reach: tuple[float, float]
) -> tuple[float, float]:
    """Wave speed of least residual, and its standard uncertainty from the curvature of the residual."""

    def misfit(speed: float) -> float:
        gamma = np.asarray(line_constants(speed)[0], complex)
        total = 0.0
        for n in range(gamma.size):
            matrix = np.stack([np.exp(-gamma[n] * places), np.exp(gamma[n] * places)], axis=1)
            fit = np.linalg.lstsq(matrix, waves[:, n], rcond=1e-9)[0]
            total += float(np.sum(np.abs(waves[:, n] - matrix @ fit) ** 2))
        return total

    grid = guess * np.linspace(*reach, 111)
    levels = np.array([misfit(speed) for speed in grid])
    place = int(levels.argmin())
    low, high = grid[max(place - 1, 0)], grid[min(place + 1, grid.size - 1)]
    found = minimize_scalar(misfit, bounds=(low, high), method="bounded", options={"xatol": 1e-7 * guess})
    speed, least = float(found.x), float(found.fun)
    step = 1e-3 * speed
    curve = (misfit(speed + step) - 2 * least + misfit(speed - step)) / step**2
    freedom = max(2 * waves.shape[1] * (places.size - 2) - 1, 1)
    spread = float(np.sqrt(max(2 * least / freedom / curve, 0.0))) if curve > 0 else float("inf")
    return speed, spread
