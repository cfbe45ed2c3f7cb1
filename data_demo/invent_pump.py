"""Invented pump lines: a three-plunger wash-down pump through a speed ramp, and a nine-piston hydraulic supply.

The pressures come from a small lossy transmission line of its own: flow source at 0 m, pipes, a known load. Laminar
friction of oscillating flow; the loads damp far more than the pipes do.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
from invent_files import LABEL, table, write_text, write_truth
from invent_tube import coefficients_of, order_ratio

BAR, L_MIN = 1e5, 1e-3 / 60
Pipe = tuple[float, float, float]  # length [m], radius [m], wave speed [m/s]


def pressures_per_flow(
    frequency: np.ndarray,
    pipes: list[Pipe],
    load: Callable[[np.ndarray], np.ndarray],
    stations: list[float],
    *,
    density: float,
    viscosity: float,
) -> np.ndarray:
    """Pressure at each station per unit flow of the source, shape (stations, frequencies); frequencies above 0 [Pa s/m^3]."""
    omega = 2 * np.pi * frequency
    found: dict[float, np.ndarray] = {}
    pressure, flow = load(frequency).astype(complex), np.ones(frequency.size, dtype=complex)
    place = sum(pipe[0] for pipe in pipes)
    for length, radius, speed in reversed(pipes):
        # rho_eff/rho = I0/I2: inertia and friction of the oscillating profile in one complex number.
        ratio = 1 / order_ratio(np.sqrt(1j * omega * density / viscosity) * radius)
        gamma = 1j * omega / speed * np.sqrt(ratio)
        impedance = density * speed / (np.pi * radius**2) * np.sqrt(ratio)
        for station in stations:
            if place - length - 1e-9 <= station <= place + 1e-9:
                back = place - station
                found[station] = pressure * np.cosh(gamma * back) + flow * impedance * np.sinh(gamma * back)
        pressure, flow = (
            pressure * np.cosh(gamma * length) + flow * impedance * np.sinh(gamma * length),
            flow * np.cosh(gamma * length) + pressure / impedance * np.sinh(gamma * length),
        )
        place -= length
    return np.array([found[station] / flow for station in stations])


def plunger_flow(angle: np.ndarray, *, plungers: int, rod_ratio: float, mean: float) -> np.ndarray:
    """Delivery of single-acting plungers on one crank at shaft angles [rad]; plunger 1 is at top dead centre at angle 0."""
    total = np.zeros(angle.shape)
    for k in range(plungers):
        turn = angle - 2 * np.pi * k / plungers
        speed = np.sin(turn) + np.sin(2 * turn) / (2 * np.sqrt(rod_ratio**2 - np.sin(turn) ** 2))
        # It delivers while it moves towards top dead centre.
        total += np.maximum(-speed, 0)
    return total * mean / total.mean()


def piston_flow(angle: np.ndarray, *, pistons: int, mean: float, dip: float, width: float) -> np.ndarray:
    """Axial pistons: half sines and, as each one meets the pressure port, a short backflow of depth ``dip`` times the mean."""
    total = np.zeros(angle.shape)
    back = np.zeros(angle.shape)
    for k in range(pistons):
        turn = np.mod(angle - 2 * np.pi * k / pistons, 2 * np.pi)
        total += np.maximum(np.sin(turn), 0)
        back += np.where(turn < width, np.sin(np.pi * np.minimum(turn / width, 1)) ** 2, 0)
    flow = mean * (total / total.mean() - dip * back)
    return flow - flow.mean() + mean


def revolve(orders: np.ndarray, shaft: np.ndarray, angle: np.ndarray, transfer: Callable[[np.ndarray], np.ndarray]) -> np.ndarray:
    """Pressures over time while the speed drifts: each order at the response of the moment's frequency, shape (stations, n)."""
    total: np.ndarray | float = 0.0
    speeds = np.linspace(shaft.min(), shaft.max(), 60)
    for n in range(1, orders.size):
        if abs(orders[n]) < 1e-9 * abs(orders[0]):
            continue
        response = transfer(n * speeds)
        now = np.array([np.interp(shaft, speeds, row.real) + 1j * np.interp(shaft, speeds, row.imag) for row in response])
        total = total + (now * orders[n] * np.exp(1j * n * angle)).real
    return np.asarray(total)


def trigger_of(angle: np.ndarray, *, behind: float, width: float = 0.12) -> np.ndarray:
    """0 or 1: one pulse per turn that begins ``behind`` the top dead centre of plunger 1 [rad]."""
    return (np.mod(angle - behind, 2 * np.pi) < width).astype(int)


def wash_down(folder: Path) -> None:
    """Three plungers, water, speed from 660 to 740 rpm in ten seconds; two stations and a trigger once a turn."""
    rng = np.random.default_rng(20260106)
    density, viscosity, mean_flow, mean_pressure = 998.0, 1.0e-3, 21.0 * L_MIN, 60 * BAR
    pipes = [(3.4, 6.5e-3, 1360.0), (4.6, 6.5e-3, 1360.0)]
    stations = [0.4, 3.4]
    nozzle = 2 * mean_pressure / mean_flow  # turbulent restrictor at its mean flow

    def transfer(frequency: np.ndarray) -> np.ndarray:
        return pressures_per_flow(frequency, pipes, lambda f: np.full(f.shape, nozzle), stations, density=density, viscosity=viscosity)

    interval = 1 / 1500
    time = np.arange(15000) * interval
    shaft = (660 + 80 * np.clip(time / time[-1], 0, 1)) / 60
    angle = 2 * np.pi * np.cumsum(shaft) * interval + 0.7
    turn = 2 * np.pi * np.arange(4096) / 4096
    orders = coefficients_of(plunger_flow(turn, plungers=3, rod_ratio=5, mean=mean_flow), 36)
    orders[1] += 0.010 * mean_flow * np.exp(0.4j)  # one worn valve
    pressure = mean_pressure + np.array([0.25, 0.10])[:, None] * BAR + revolve(orders, shaft, angle, transfer)
    pressure = pressure + 0.02 * BAR * rng.standard_normal(pressure.shape)
    head = (
        f"# {LABEL}\n# machine: three-plunger wash-down pump, speed ramp\n# rate: 1500 Hz\n# antialias filter: 600 Hz\n"
        "# trigger: one pulse per turn, at 40 deg after top dead centre of plunger 1\ntime (s),p1 (bar),p2 (bar),trigger (V)\n"
    )
    pulse = 5 * trigger_of(angle, behind=np.deg2rad(40))
    columns = [(time, "%.5f"), (pressure[0] / BAR, "%.3f"), (pressure[1] / BAR, "%.3f"), (pulse, "%d")]
    write_text(folder / "wash_down" / "ramp.csv", head + table(columns))
    kept = 24
    response = np.mean([transfer(np.arange(1, kept + 1) * speed) for speed in np.linspace(660 / 60, 740 / 60, 81)], axis=0)
    write_truth(
        folder / "wash_down" / "truth.json",
        {
            "speed": 700 / 60, "plungers": 3, "trigger_angle": np.deg2rad(40), "phase_zero": "top dead centre of plunger 1", "stations": stations,
            "wave_speed": 1360.0, "source_flow": orders[: kept + 1], "pressure": response * orders[1 : kept + 1],
            "mean_pressure": [mean_pressure + 0.25 * BAR, mean_pressure + 0.10 * BAR],
        },
    )  # fmt: skip
    write_text(folder / "wash_down.toml", WASH_DOWN_CASE)


WASH_DOWN_CASE = f"""# {LABEL}
kind = "pump line"
title = "Wash-down pump with three plungers (invented)"

[recording]
file = "wash_down/ramp.csv"
trigger = "trigger"
pulses_per_revolution = 1
trigger_angle = "40 deg"
antialias_filter = "600 Hz"

[cycles]
harmonics = 24

[fluid]
kind = "water"
temperature = "20 degC"

[operation]
speed = "700 rpm"
mean_pressure = "60 bar"
mean_flow = "21 L/min"
rule = "reciprocating pump"

[source]
kind = "measured pressures"
plungers = 3

[[station]]
name = "at the pump"
file = "wash_down/ramp.csv"
column = "p1"
position = "0.4 m"
scale_uncertainty = "0.5 %"

[[station]]
name = "half way"
file = "wash_down/ramp.csv"
column = "p2"
position = "3.4 m"
scale_uncertainty = "0.5 %"

[[element]]
kind = "pipe"
length = "3.4 m ± 5 mm"
radius = "6.5 mm ± 0.05 mm"
wave_speed = "1360 m/s ± 1 %"
rated_pressure = "160 bar"

[[element]]
kind = "pipe"
length = "4.6 m ± 5 mm"
radius = "6.5 mm ± 0.05 mm"
wave_speed = "1360 m/s ± 1 %"
rated_pressure = "160 bar"

[end]
kind = "restrictor"
pressure_drop = "60 bar"
flow = "21 L/min"
"""


def supply(folder: Path) -> None:
    """Nine pistons, oil, about 1480 rpm; a second pump that is not locked to this shaft hums at 187 Hz."""
    rng = np.random.default_rng(20260107)
    density, viscosity, mean_flow, mean_pressure = 868.0, 0.0325, 38.0 * L_MIN, 180 * BAR
    pipes = [(2.4, 8.0e-3, 1290.0)]
    stations = [0.3]
    valve = 2 * 60 * BAR / mean_flow

    def transfer(frequency: np.ndarray) -> np.ndarray:
        return pressures_per_flow(frequency, pipes, lambda f: np.full(f.shape, valve), stations, density=density, viscosity=viscosity)

    interval = 1 / 5000
    time = np.arange(16000) * interval
    shaft = 1480 / 60 * (1 + 0.002 * np.sin(2 * np.pi * 0.37 * time))
    angle = 2 * np.pi * np.cumsum(shaft) * interval + 2.1
    turn = 2 * np.pi * np.arange(8192) / 8192
    orders = coefficients_of(piston_flow(turn, pistons=9, mean=mean_flow, dip=0.07, width=0.16), 72)
    pressure = mean_pressure + revolve(orders, shaft, angle, transfer)[0]
    pressure = pressure + 0.35 * BAR * np.cos(2 * np.pi * 187.0 * time + 0.3) + 0.04 * BAR * rng.standard_normal(time.size)
    head = (
        f"# {LABEL}\n# machine: nine-piston pump, supply line to a valve\n# rate: 5000 Hz\n# antialias filter: 2000 Hz\n"
        "# trigger: one pulse per turn at top dead centre of piston 1\ntime (s),p (bar),trigger (V)\n"
    )
    columns = [(time, "%.4f"), (pressure / BAR, "%.3f"), (5 * trigger_of(angle, behind=0.0), "%d")]
    write_text(folder / "supply" / "steady.csv", head + table(columns))
    response = transfer(np.arange(1, 73) * 1480 / 60)[0]
    write_truth(
        folder / "supply" / "truth.json",
        {
            "speed": 1480 / 60, "pistons": 9, "stations": stations, "wave_speed": 1290.0, "source_flow": orders, "pressure": response * orders[1:],
            "mean_pressure": mean_pressure, "line_that_is_no_order": {"frequency": 187.0, "amplitude": 0.35 * BAR},
        },
    )  # fmt: skip
    write_text(folder / "supply.toml", SUPPLY_CASE)


SUPPLY_CASE = f"""# {LABEL}
kind = "pump line"
title = "Supply line of a nine-piston pump (invented)"

[fluid]
kind = "hydraulic oil"
grade = 46
temperature = "45 degC ± 2 degC"
gas_fraction_at_atmosphere = 0.01

[operation]
speed = "1480 rpm"
mean_pressure = "180 bar"
mean_flow = "38 L/min"

[recording]
file = "supply/steady.csv"
trigger = "trigger"
pulses_per_revolution = 1
antialias_filter = "2 kHz"

[cycles]
harmonics = 54

[source]
kind = "measured pressure"
pistons = 9

[[station]]
name = "at the pump"
file = "supply/steady.csv"
column = "p"
position = "0.3 m"
scale_uncertainty = "0.5 %"

[[element]]
kind = "pipe"
name = "steel tube"
length = "2.4 m ± 5 mm"
radius = "8 mm ± 0.05 mm"
wave_speed = "1290 m/s ± 2 %"
rated_pressure = "315 bar"

[end]
kind = "restrictor"
pressure_drop = "60 bar"
flow = "38 L/min"
relief_setting = "210 bar"
"""
