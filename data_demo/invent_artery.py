"""Invented arteries: a forearm by Doppler, a gated MRI cycle, a folder of subjects."""

from __future__ import annotations

from pathlib import Path

import numpy as np
from invent_files import LABEL, table, write_text, write_truth
from invent_tube import coefficients_of, tube_truth

ML_MIN = 1e-6 / 60
FINE = 8192  # instants per period from which harmonics are taken


def pulse(time: np.ndarray, *, start: float, rise: float) -> np.ndarray:
    """A pulse of height 1 that begins at ``start`` with no step and no kink and peaks ``rise`` later. [s]"""
    x = np.clip((time - start) / rise, 0, None)
    return x**3 * np.exp(3 * (1 - x))


def beat(time: np.ndarray, *, level: float, peak: float, back: float, second: float, quick: float = 1.0) -> np.ndarray:
    """Flow from its foot: systole, reversal, a second forward wave, then rest. Its pace does not follow the length of the beat."""
    return (
        level
        + peak * pulse(time, start=0.0, rise=0.085 * quick)
        - back * pulse(time, start=0.16 * quick, rise=0.075 * quick)
        + second * pulse(time, start=0.28 * quick, rise=0.09 * quick)
    )


def beats(time: np.ndarray, onsets: np.ndarray, gains: np.ndarray, shape: dict[str, float]) -> np.ndarray:
    """Beat after beat; each follows its own clock from its own foot."""
    place = np.clip(np.searchsorted(onsets, time, side="right") - 1, 0, onsets.size - 1)
    return gains[place] * beat(time - onsets[place], **shape)


def mean_of(lengths: np.ndarray, shape: dict[str, float]) -> float:
    """Mean over whole beats of these lengths."""
    grid = np.linspace(0, lengths.max(), 20001)
    middle = (grid[1:] + grid[:-1]) / 2
    total = np.concatenate([[0], np.cumsum(beat(middle, **shape)) * (grid[1] - grid[0])])
    return float(np.interp(lengths, grid, total).sum() / lengths.sum())


def forearm(folder: Path) -> None:
    """A dozen uneven beats at 100 Hz; in the ninth the probe leaves the skin."""
    rng = np.random.default_rng(20260101)
    shape = {"level": 38.0, "peak": 420.0, "back": 125.0, "second": 85.0}  # [mL/min]
    lengths = np.clip(0.86 * (1 + 0.055 * rng.standard_normal(15)), 0.76, 0.99)
    onsets = 0.31 - lengths[0] + np.concatenate([[0], np.cumsum(lengths)])
    gains = 1 + 0.03 * rng.standard_normal(onsets.size)
    time = np.arange(0, 12.6, 0.01)
    flow = beats(time, onsets, gains, shape)
    flow = flow * (1 + 0.015 * rng.standard_normal(time.size)) + 5 * rng.standard_normal(time.size)
    bad = 9  # place in onsets: the ninth whole beat
    off = (time > onsets[bad] + 0.06) & (time < onsets[bad + 1] - 0.12)
    flow[off] = -15 + 60 * np.abs(rng.standard_normal(int(off.sum()))) * np.sin(40 * time[off])
    head = (
        f"# {LABEL}\n# device: pulsed Doppler\n# subject: nobody\n# vessel: forearm artery, left, at rest\n# rate: 100 Hz\n"
        "# volume flow from the mean velocity over the lumen and the diameter at rest\n"
    )
    write_text(folder / "forearm" / "flow.csv", head + "time (s),flow (mL/min)\n" + table([(time, "%.2f"), (flow, "%.1f")]))
    whole = [k for k in range(1, onsets.size - 1) if onsets[k + 1] <= time[-1] + 0.01]
    kept = np.array([lengths[k] for k in whole if k != bad])
    period = float(np.median(kept))
    coefficients = coefficients_of(beat(np.arange(FINE) / FINE * period, **shape), 24) * ML_MIN
    coefficients[0] = mean_of(kept, shape) * ML_MIN
    findings, curves = tube_truth(coefficients, frequency=1 / period, radius=2.05e-3, density=1057.0, viscosity=3.4e-3)
    write_truth(
        folder / "forearm" / "truth.json",
        {
            "onsets": [onsets[k] for k in whole] + [onsets[whole[-1] + 1]], "bad_cycle": bad, "period": float(kept.mean()), "median_period": period,
            "radius": 2.05e-3, "density": 1057.0, "viscosity": 3.4e-3, "flow_rate": curves["flow_rate"], "findings": findings,
        },
    )  # fmt: skip
    write_text(folder / "forearm.toml", FOREARM_CASE)


FOREARM_CASE = f"""# {LABEL}
kind = "wall shear"
title = "Forearm artery at rest (invented)"

[recording]
file = "forearm/flow.csv"
signal = "flow"
quantity = "flow_rate"
computed_with_radius = "tube"        # the device made the flow from a velocity and this same diameter
scale_uncertainty = "4 %"

[tube]
section = "circular"
diameter = "4.10 mm ± 0.10 mm"
length = "150 mm"
distance_from_inlet = "120 mm"
wall_motion = "3 %"

[fluid]
kind = "given"
density = "1057 kg/m^3"
viscosity = "3.4 mPa*s ± 6 %"
"""


def gated(folder: Path) -> None:
    """A phase-contrast cycle of 24 frames that stops short of the R-R interval; frames across, quantities down, two vessels in the file."""
    rng = np.random.default_rng(20260102)
    period, step, frames = 0.900, 0.0358, 24
    shape = {"level": 5.0, "peak": 62.0, "back": 13.0, "second": 9.0, "quick": 1.6}  # mean velocity [cm/s]
    coefficients = coefficients_of(beat(np.arange(FINE) / FINE * period, **shape), 24) * 0.01
    order = np.arange(25)
    starts = np.arange(frames) * step
    blurred = coefficients * np.sinc(order * step / period) * np.exp(1j * np.pi * order * step / period)
    velocity = at(blurred, starts / period) * 100
    deviation = 1.1 + 0.02 * np.abs(velocity)
    measured = velocity + deviation * rng.standard_normal(frames) * 0.4
    radius = 3.30 + 0.10 * np.clip(beat(starts - 0.03, **shape) / 67, -1, 1) + 0.004 * rng.standard_normal(frames)
    area = np.pi * radius**2
    vein = 9.0 + 1.5 * np.cos(2 * np.pi * starts / period) + 0.3 * rng.standard_normal(frames)

    def row(name: str, values: np.ndarray, form: str) -> str:
        return name + ";" + ";".join(form % value for value in values) + "\n"

    times = row("Trigger delay (ms)", starts * 1000, "%.1f")
    text = (
        f"# {LABEL}\nSeries;phase contrast, through plane, retrospective gating\nR-R interval (ms);{period * 1000:.0f}\nVelocity encoding (cm/s);120\n\n"
        + "Artery\n" + times + row("Mean velocity (cm/s)", measured, "%.2f") + row("Velocity deviation (cm/s)", deviation, "%.2f")
        + row("Area (mm2)", area, "%.2f")
        + "\nVein\n" + times + row("Mean velocity (cm/s)", vein, "%.2f") + row("Area (mm2)", 38 + 0.2 * rng.standard_normal(frames), "%.2f")
    )  # fmt: skip
    write_text(folder / "gated" / "cycle.csv", text)
    true_radius = float(np.sqrt(area.mean() / np.pi)) * 1e-3
    findings, curves = tube_truth(
        coefficients * np.pi * true_radius**2, frequency=1 / period, radius=true_radius, density=1060.0, viscosity=3.5e-3
    )
    write_truth(
        folder / "gated" / "truth.json",
        {
            "period": period,
            "radius": true_radius,
            "density": 1060.0,
            "viscosity": 3.5e-3,
            "mean_velocity": curves["mean_velocity"],
            "findings": findings,
        },
    )
    write_text(folder / "gated.toml", GATED_CASE)


def at(coefficients: np.ndarray, phase: np.ndarray) -> np.ndarray:
    """Course at phases in cycles."""
    return (coefficients * np.exp(2j * np.pi * np.outer(phase, np.arange(coefficients.size)))).real.sum(axis=1)


GATED_CASE = f"""# {LABEL}
kind = "wall shear"
title = "Gated cycle of 24 frames (invented)"

[recording]
file = "gated/cycle.csv"
block = "Artery"
signal = "Mean velocity"
quantity = "mean_velocity"
sample_volume = "whole lumen"
averaged_over = "35.8 ms"
stamp = "start"
deviation = "Velocity deviation"
area = "Area"
velocity_encoding = "120 cm/s"
background_velocity = "0 ± 0.6 cm/s"

[cycles]
period = "900 ms"                    # the R-R interval: 24 frames cover 859 ms of it

[tube]
radius = "3.31 mm ± 0.10 mm"

[fluid]
kind = "given"
density = "1060 kg/m^3"
viscosity = "3.5 mPa*s ± 6 %"
"""


def cohort(folder: Path) -> None:
    """Twenty-six short recordings with a table of givens; one has a bad beat and one cannot be read."""
    rng = np.random.default_rng(20260103)
    rows, truths = [], {}
    for number in range(1, 27):
        name = f"subject_{number:02d}"
        pace = rng.uniform(0.76, 1.02)
        shape = {
            "level": rng.uniform(25, 60), "peak": rng.uniform(280, 520), "back": rng.uniform(40, 170), "second": rng.uniform(40, 100), "quick": rng.uniform(0.9, 1.05),
        }  # fmt: skip
        lengths = pace * (1 + 0.02 * rng.standard_normal(14))
        onsets = -0.4 + np.concatenate([[0], np.cumsum(lengths)])
        gains = 1 + 0.03 * rng.standard_normal(onsets.size)
        time = np.arange(0, 8.0, 0.01)
        flow = beats(time, onsets, gains, shape) + 5 * rng.standard_normal(time.size)
        radius = rng.uniform(1.85, 2.35)
        if number == 11:
            slip = (time > onsets[4] + 0.05) & (time < onsets[5] - 0.15)
            flow[slip] = 6 * rng.standard_normal(int(slip.sum()))
        body = f"# {LABEL}\ntime (s),flow (mL/min)\n" + table([(time, "%.2f"), (flow, "%.1f")])
        if number == 19:
            body = f'# {LABEL}\n# This one is meant to be unreadable.\ntime (s),flow (mL/min)\n0.00,"4O.1\n0.01,overload\n0.02,overload\nconnection lost\n'
        write_text(folder / "cohort" / "recordings" / f"{name}.csv", body)
        haematocrit = rng.uniform(0.38, 0.47)
        rows.append(f"{name}.csv,{radius:.2f} ± 0.08,{haematocrit:.3f} ± 0.015\n")
        truths[name] = {
            "mean_flow_rate": mean_of(lengths[1:9], shape) * ML_MIN,
            "period": float(lengths[1:9].mean()),
            "peak_flow_rate": peak_of(shape) * ML_MIN,
        }
    write_text(folder / "cohort" / "subjects.csv", f"# {LABEL}\nrecording,tube.radius (mm),fluid.haematocrit\n" + "".join(rows))
    write_truth(folder / "cohort" / "truth.json", {"bad_beat": "subject_11", "unreadable": "subject_19", "subjects": truths})
    write_text(folder / "cohort" / "template.toml", COHORT_CASE)


def peak_of(shape: dict[str, float]) -> float:
    """Largest value of a beat."""
    return float(beat(np.linspace(0, 0.7, 7001), **shape).max())


COHORT_CASE = f"""# {LABEL}
kind = "wall shear"
title = "Forearm arteries of a folder of subjects (invented)"

[recording]
file = "recordings/subject_01.csv"
signal = "flow"
quantity = "flow_rate"
computed_with_radius = "tube"
scale_uncertainty = "4 %"

[tube]
radius = "2.1 mm ± 0.08 mm"

[fluid]
kind = "blood"
haematocrit = "0.43 ± 0.02"
temperature = "37 degC"
"""
