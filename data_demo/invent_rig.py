"""Invented bench rigs: the velocity on the axis of a glass tube, and two pressure taps on a model artery."""

from __future__ import annotations

from pathlib import Path

import numpy as np
from invent_files import LABEL, table, write_text, write_truth
from invent_tube import tube_truth, waves

ML_MIN = 1e-6 / 60
MMHG = 133.322387415


def bench(folder: Path) -> None:
    """Laser velocimeter on the axis, 250 Hz, comma decimals, name and unit in two rows; every stroke of the piston takes the same time."""
    rng = np.random.default_rng(20260104)
    frequency, radius, density, viscosity = 0.9, 9.5e-3, 1100.0, 3.6e-3
    flow = np.array([1400, 1150 * np.exp(-1.1j), 420 * np.exp(-2.4j), 160 * np.exp(2.5j), 55 * np.exp(1.2j), 25 * np.exp(-0.4j)]) * ML_MIN
    findings, curves = tube_truth(flow, frequency=frequency, radius=radius, density=density, viscosity=viscosity)
    time = np.arange(0, 12.0, 0.004)
    velocity = waves(curves["centreline_velocity"], time * frequency) * 100 + 0.35 * rng.standard_normal(time.size)
    head = f"# {LABEL}\nRig: piston pump and glass tube\nLiquid: glycerol in water\ntime;u axis\ns;cm/s\n"
    text = head + table([(time, "%.3f"), (velocity, "%.3f")], delimiter=";", decimal=",").replace("\r", "")
    write_text(folder / "bench" / "axis.csv", text)
    write_truth(
        folder / "bench" / "truth.json",
        {
            "period": 1 / frequency, "radius": radius, "density": density, "viscosity": viscosity,
            "centreline_velocity": curves["centreline_velocity"], "flow_rate": flow, "findings": findings,
        },
    )  # fmt: skip
    write_text(folder / "bench.toml", BENCH_CASE)


BENCH_CASE = f"""# {LABEL}
kind = "wall shear"
title = "Glass tube on the bench (invented)"

[recording]
file = "bench/axis.csv"
signal = "u axis"
quantity = "centreline_velocity"
scale_uncertainty = "1 %"
antialias_filter = "100 Hz"

[tube]
radius = "9.5 mm ± 0.05 mm"
distance_from_inlet = "1.9 m"
length = "2.5 m"
axisymmetric = true

[fluid]
kind = "given"
density = "1100 kg/m^3 ± 2 kg/m^3"
viscosity = "3.6 mPa*s ± 2 %"
"""


def two_stations(folder: Path) -> None:
    """Two taps 120 mm apart, each transducer with its own zero, height and response; the second record is late."""
    rng = np.random.default_rng(20260105)
    frequency, radius, density, viscosity, distance = 70 / 60, 3.1e-3, 1060.0, 3.5e-3, 0.120
    flow = np.array([300, 330 * np.exp(-1.0j), 170 * np.exp(-2.3j), 80 * np.exp(2.6j), 35 * np.exp(1.4j), 15 * np.exp(0.2j)]) * ML_MIN
    findings, curves = tube_truth(flow, frequency=frequency, radius=radius, density=density, viscosity=viscosity)
    common = np.array([95, 16 * np.exp(-1.3j), 6.5 * np.exp(-2.6j), 2.4 * np.exp(2.2j), 0.9 * np.exp(0.9j), 0.3 * np.exp(-0.6j)]) * MMHG
    drop = curves["pressure_gradient"] * distance
    pulse_rate = frequency * np.arange(flow.size)
    time = np.arange(0, 15.0, 0.0025)
    late = 0.0015
    signals = []
    # Height above the reference, zero error [mmHg], natural frequency [Hz], damping ratio.
    for pressure, height, zero, natural, damping, delay in (
        (common + drop / 2, 0.0, 1.9, 45.0, 0.35, 0.0), (common - drop / 2, -0.010, -0.7, 52.0, 0.40, late),
    ):  # fmt: skip
        share = pulse_rate / natural
        shown = pressure / (1 - share**2 + 2j * damping * share) * np.exp(-2j * np.pi * pulse_rate * delay)
        shown[0] += zero * MMHG - density * 9.80665 * height
        signals.append(waves(shown, time * frequency) / MMHG + 0.02 * rng.standard_normal(time.size))
    head = f"# {LABEL}\n# Model artery on the bench, two taps 120 mm apart; transducers as they read, zeros noted before the run: 1.9 and -0.7 mmHg\n"
    columns = [(time, "%.4f"), (signals[0], "%.3f"), (signals[1], "%.3f")]
    write_text(folder / "two_stations" / "pressures.csv", head + "time [s]\tp1 [mmHg]\tp2 [mmHg]\n" + table(columns, delimiter="\t"))
    write_truth(
        folder / "two_stations" / "truth.json",
        {
            "period": 1 / frequency, "radius": radius, "density": density, "viscosity": viscosity, "pressure_gradient": curves["pressure_gradient"],
            "flow_rate": flow, "findings": findings,
        },
    )  # fmt: skip
    write_text(folder / "two_stations.toml", STATIONS_CASE)


STATIONS_CASE = f"""# {LABEL}
kind = "wall shear"
title = "Model artery with two pressure taps (invented)"

[recording]
quantity = "pressure_gradient"

[[station]]
name = "upstream tap"
file = "two_stations/pressures.csv"
column = "p1"
position = "0 mm"
height = "0 mm"
zero = "1.9 mmHg"
offset_uncertainty = "0.02 mmHg"
scale_uncertainty = "0.1 %"
natural_frequency = "45 Hz ± 1 Hz"
damping_ratio = "0.35 ± 0.02"

[[station]]
name = "downstream tap"
file = "two_stations/pressures.csv"
column = "p2"
position = "120 mm ± 1 mm"
height = "-10 mm"                    # 10 mm lower
zero = "-0.7 mmHg"
offset_uncertainty = "0.02 mmHg"
scale_uncertainty = "0.1 %"
natural_frequency = "52 Hz ± 1 Hz"
damping_ratio = "0.40 ± 0.02"
delay = "1.5 ms"

[tube]
radius = "3.1 mm ± 0.05 mm"
length = "400 mm"

[fluid]
kind = "given"
density = "1060 kg/m^3 ± 2 kg/m^3"
viscosity = "3.5 mPa*s ± 3 %"
"""
