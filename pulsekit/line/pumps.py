"""Flow of pumps from their kinematics, and what valves, dead volume and ports do to it. Orders count from the shaft."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..errors import InputError
from ..quantities import to_si
from ..trace.harmonics import Harmonics

__all__ = ["axial_piston_pump", "plunger_pump", "pump_course"]

_ANGLES = 8640  # a multiple of 2 to 10 and 12: every number of plungers falls on the grid
_DEFAULT_ROD_RATIO = 5.0  # trade


def _count(number: Any, name: str) -> int:
    if isinstance(number, bool) or not isinstance(number, (int, np.integer)) or number < 1:
        raise InputError(f"{name} = {number!r} must be a whole number from 1", name=name, value=number, allowed=">= 1")
    return int(number)


def pump_course(single: Callable[[NDArray[np.float64]], NDArray[np.float64]], number: int) -> NDArray[np.float64]:
    """Flow of a pump over one turn of the shaft: equal plungers, evenly spread, at even angles from top dead centre of the first."""
    angle = 2 * np.pi * np.arange(_ANGLES) / _ANGLES
    return np.asarray(sum(single(np.mod(angle - 2 * np.pi * k / number, 2 * np.pi)) for k in range(number)))


def _series(course: NDArray[np.float64], orders: int) -> NDArray[np.complex128]:
    spectrum = np.fft.rfft(course)[: orders + 1] / course.size
    spectrum[1:] *= 2
    # What the symmetry of equal plungers forbids is rounding; it is set to nothing.
    spectrum[np.abs(spectrum) < 1e-12 * np.abs(spectrum).max()] = 0
    return np.asarray(spectrum)


def _scaled(course: NDArray[np.float64], mean_flow: float, orders: int, speed: float, remarks: list[str]) -> Harmonics:
    series = _series(course, orders)
    mean = float(series[0].real)
    if mean <= 0:
        raise InputError("the pump delivers nothing: valve lag or compression leaves no stroke", name="mean_flow", value=mean)
    series = series * (mean_flow / mean)
    series[0] = series[0].real
    return Harmonics(speed, series, unit="L/min", remarks=remarks)


def plunger_pump(
    *, plungers: int, speed: Any, mean_flow: Any, rod_ratio: Any = None, acting: str = "single", valve_lag: Any = 0.0, compression: float = 0.0,
    harmonics: int | None = None,
) -> Harmonics:  # fmt: skip
    """Flow of a crank-driven plunger pump, as harmonics of its shaft.

    Parameters
    ----------
    plungers : int
    speed : float or str
        Of the shaft. [Hz]
    mean_flow : float or str
        Delivered; negative for the suction side. [m^3/s]
    rod_ratio : float, optional
        Connecting rod over crank radius; 5 if not given (trade). [-]
    acting : str
        ``"single"`` or ``"double"`` (the rod's area neglected).
    valve_lag : float or str
        Angle by which valves open and close late. [rad]
    compression : float
        Share of the stroke that compresses the liquid before delivery begins: (dead + swept volume) dp/(K swept volume). [-]
    harmonics : int, optional
        Highest order of the shaft; 12 times the number of plungers if not given.

    Returns
    -------
    Harmonics
        Phase 0 is the top dead centre of plunger 1, where its delivery stroke begins.

    Examples
    --------
    >>> flow = plunger_pump(plungers=3, speed="600 rpm", mean_flow="40 L/min", rod_ratio=6)
    >>> [order for order in range(1, 10) if abs(flow.coefficients[order]) > 1e-9]
    [3, 6, 9]
    """
    number = _count(plungers, "plungers")
    shaft = to_si(speed, "frequency", "speed")
    mean = to_si(mean_flow, "flow_rate", "mean_flow")
    remarks = []
    if rod_ratio is None:
        rod_ratio = _DEFAULT_ROD_RATIO
        remarks.append("The rod ratio L/R was not given: 5 was taken (trade).")
    ratio = to_si(rod_ratio, "ratio", "rod_ratio")
    if not ratio > 1:
        raise InputError(f"rod_ratio = {ratio} must be above 1: the rod is longer than the crank", name="rod_ratio", value=ratio, allowed="> 1")
    if acting not in ("single", "double"):
        raise InputError(f'acting = {acting!r} must be "single" or "double"', name="acting", value=acting)
    lag = to_si(valve_lag, "angle", "valve_lag")
    if not 0 <= lag < np.pi / 2:
        raise InputError(f"valve_lag = {np.degrees(lag):.4g} deg must lie between 0 and 90 deg", name="valve_lag", value=lag)
    if not 0 <= compression < 1:
        raise InputError(f"compression = {compression} must lie between 0 and 1", name="compression", value=compression)

    def speed_of(angle: NDArray[np.float64]) -> NDArray[np.float64]:
        sine = np.sin(angle)
        return sine * (1 + np.cos(angle) / np.sqrt(ratio**2 - sine**2))

    def travelled(angle: NDArray[np.float64]) -> NDArray[np.float64]:
        """Share of the stroke done since the beginning of the delivery stroke."""
        return 0.5 * ((1 - np.cos(angle)) + ratio - np.sqrt(ratio**2 - np.sin(angle) ** 2))

    def stroke(angle: NDArray[np.float64]) -> NDArray[np.float64]:
        inside = (angle >= lag) & (angle < np.pi + lag) & ((travelled(angle) >= compression) | (angle >= np.pi))
        return np.where(inside, speed_of(angle), 0.0)

    def single(angle: NDArray[np.float64]) -> NDArray[np.float64]:
        flow = stroke(angle)
        if acting == "double":
            # The other side delivers on the way back.
            back = np.mod(angle - np.pi, 2 * np.pi)
            inside = (back >= lag) & (back < np.pi + lag) & ((1 - travelled(angle) >= compression) | (back >= np.pi))
            flow = flow - np.where(inside, speed_of(angle), 0.0)
        return flow

    orders = 12 * number if harmonics is None else _count(harmonics, "harmonics")
    return _scaled(pump_course(single, number), mean, orders, shaft, remarks)


def axial_piston_pump(
    *, pistons: int, speed: Any, mean_flow: Any, dead_volume: Any = None, port_opening_angle: Any = None, bulk_modulus: Any = None, pressure: Any = None,
    harmonics: int | None = None,
) -> Harmonics:  # fmt: skip
    """Flow of an axial-piston pump, as harmonics of its shaft.

    Parameters
    ----------
    pistons : int
    speed : float or str
        [Hz]
    mean_flow : float or str
        [m^3/s]
    dead_volume : float or str, optional
        Liquid in a cylinder when it meets the delivery port, which the backflow compresses. [m^3]
    port_opening_angle : float or str, optional
        Angle over which the backflow passes; 10 deg if not given (trade). [rad]
    bulk_modulus, pressure : float or str, optional
        Of the liquid, and the pressure step of the compression; needed with ``dead_volume``. [Pa]
    harmonics : int, optional
        Highest order of the shaft; 8 times the number of pistons (twice that for an odd number's kinematics) if not given.

    Returns
    -------
    Harmonics
        Without ``dead_volume`` the kinematic flow only: a lower bound of the ripple.

    Examples
    --------
    >>> flow = axial_piston_pump(pistons=9, speed="1480 rpm", mean_flow="38 L/min")
    >>> [order for order in range(1, 40) if abs(flow.coefficients[order]) > 1e-12]
    [18, 36]
    """
    number = _count(pistons, "pistons")
    shaft, mean = to_si(speed, "frequency", "speed"), to_si(mean_flow, "flow_rate", "mean_flow")
    orders = 8 * number if harmonics is None else _count(harmonics, "harmonics")
    course = pump_course(lambda angle: np.where(angle < np.pi, np.sin(angle), 0.0), number)
    if dead_volume is None:
        return _scaled(course, mean, orders, shaft, ["The pump's flow is kinematic only: backflow into its cylinders is left out, and the ripple is a lower bound."])
    if bulk_modulus is None or pressure is None:
        raise InputError("the backflow of an axial-piston pump needs bulk_modulus and pressure beside dead_volume", name="bulk_modulus")
    volume = to_si(dead_volume, "volume", "dead_volume")
    taken = volume * to_si(pressure, "pressure", "pressure") / to_si(bulk_modulus, "pressure", "bulk_modulus")
    angle_open = np.radians(10.0) if port_opening_angle is None else to_si(port_opening_angle, "angle", "port_opening_angle")
    if not 0 < angle_open < np.pi:
        raise InputError(f"port_opening_angle = {np.degrees(angle_open):.4g} deg must lie between 0 and 180 deg", name="port_opening_angle")
    remarks = [
        f"Each piston takes back {1e9 * taken:.3g} mm³ to compress its dead volume, over {np.degrees(angle_open):.3g} deg after it meets the delivery port "
        f"({100 * taken * number * shaft / abs(mean):.2g} % of the delivered flow)."
    ]

    def backflow(angle: NDArray[np.float64]) -> NDArray[np.float64]:
        """Half a sine over the opening, of unit volume per turn in units of angle."""
        return np.where(angle < angle_open, np.sin(np.pi * angle / angle_open) * np.pi / (2 * angle_open), 0.0)

    # Kinematic flow in m^3/s such that what is delivered after the backflow is the stated mean.
    lost = taken * number * shaft
    kinematic = course * ((abs(mean) + lost) / course.mean())
    back = pump_course(backflow, number) * (taken * shaft * 2 * np.pi)
    flow = (kinematic - back) * np.sign(mean)
    series = _series(flow, orders)
    series[0] = mean
    return Harmonics(shaft, series, unit="L/min", remarks=remarks)
