"""How often the 95 % intervals contain the truth, over many simulated recordings.

Each recording has a truth of its own, drawn from a seeded stream: harmonics of an invented flow in an artery, and
the true radius and viscosity from the distributions that the case states for them. The recording is that flow with
scatter from cycle to cycle and white noise, written to a file and analysed like any other. Run as a script for the
long form:

    python tests/coverage_study.py [recordings] [samples] [word in the name of a scenario]
"""

from __future__ import annotations

import sys
import tempfile
import time
from dataclasses import dataclass
from pathlib import Path

import numpy as np

import pulsekit as pk
from pulsekit.appraisal.distributions import draw
from pulsekit.case.liquids import fluid_of
from pulsekit.case.measurement import measure
from pulsekit.case.propagate_tube import propagate_tube
from pulsekit.case.wall_shear import solve_measurement, tube_of
from pulsekit.quantities import parse_given
from pulsekit.tube.findings import tube_values

FINDINGS = ("time_averaged_wall_shear_stress", "peak_wall_shear_stress", "oscillatory_shear_index")
DENSITY = "1060 kg/m^3"
RATE = 100.0  # [Hz]
PERIOD = 0.8  # [s], whole samples


@dataclass(frozen=True)
class Scenario:
    """What the recordings of one study are like; amplitudes in mL/min.

    ``beat`` is the standard deviation of a cycle's strength about 1, ``harmonic`` that of each harmonic's own scatter over the largest
    harmonic, ``noise`` that of white noise over the largest harmonic.
    """

    name: str
    cycles: tuple[int, int] = (8, 20)
    beat: float = 0.05
    harmonic: float = 0.02
    noise: float = 0.05
    mean: tuple[float, float] = (60.0, 120.0)
    radius: str = "3.1 mm ± 0.1 mm"
    viscosity: str = "3.5 mPa*s ± 5 %"


SCENARIOS = (
    Scenario("everyday"),
    # Where the givens are well known the recording alone decides.
    Scenario("recording alone", radius="3.1 mm ± 0.1 %", viscosity="3.5 mPa*s ± 0.3 %"),
    Scenario("recording alone, few cycles", cycles=(5, 6), radius="3.1 mm ± 0.1 %", viscosity="3.5 mPa*s ± 0.3 %"),
    Scenario("recording alone, noisy", harmonic=0.03, noise=0.2, radius="3.1 mm ± 0.1 %", viscosity="3.5 mPa*s ± 0.3 %"),
)


def true_flow(rng: np.random.Generator, scenario: Scenario) -> np.ndarray:
    """Coefficients [m^3/s] of an invented flow with reversal: eight harmonics that fall off, phases scattered about a pulse's."""
    order = np.arange(1, 9)
    size = 150.0 * np.exp(-0.45 * (order - 1)) * rng.uniform(0.8, 1.2, order.size)
    phase = -0.9 * order + rng.normal(0.0, 0.3, order.size)
    return np.concatenate([[rng.uniform(*scenario.mean)], size * np.exp(1j * phase)]) * 1e-6 / 60


def recorded(rng: np.random.Generator, scenario: Scenario, flow: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Time [s] and recorded flow [m^3/s] of a whole number of cycles."""
    cycles = int(rng.integers(scenario.cycles[0], scenario.cycles[1] + 1))
    each = round(PERIOD * RATE)
    largest = np.abs(flow[1:]).max()
    own = flow * (1 + scenario.beat * rng.standard_normal((cycles, 1)))
    apart = rng.standard_normal((cycles, flow.size)) + 1j * rng.standard_normal((cycles, flow.size))
    apart[:, 0] = apart[:, 0].real
    own = own + scenario.harmonic * largest * apart / np.sqrt(2) * np.exp(-0.3 * np.arange(flow.size))
    turn = np.exp(2j * np.pi * np.outer(np.arange(flow.size), np.arange(each)) / each)
    values = (own @ turn).real.ravel() + scenario.noise * largest * rng.standard_normal(cycles * each)
    return np.arange(values.size) / RATE, values


def one_recording(folder: Path, scenario: Scenario, seed: int, samples: int) -> dict[str, tuple[float, float | None, float | None, float]]:
    """Truth, low, high and value of each finding for one simulated recording."""
    rng = np.random.default_rng([seed, *scenario.name.encode()])
    flow = true_flow(rng, scenario)
    radius = float(draw(parse_given(scenario.radius, "length"), rng, 1)[0])
    viscosity = float(draw(parse_given(scenario.viscosity, "viscosity"), rng, 1)[0])
    fluid = pk.Fluid(density=DENSITY, viscosity=viscosity)
    true = tube_values(
        pk.solve(
            pk.Harmonics(frequency=1 / PERIOD, coefficients=flow), quantity="flow_rate", tube=pk.CircularTube(radius=radius), fluid=fluid
        )
    )
    instants, values = recorded(rng, scenario, flow)
    path = folder / "run.csv"
    path.write_text("time (s),flow (mL/min)\n" + "".join(f"{t:.4f},{v * 6e7:.6f}\n" for t, v in zip(instants, values, strict=True)))
    case = pk.WallShearCase(
        recording={"file": "run.csv", "signal": "flow", "quantity": "flow_rate"}, cycles={"period": f"{PERIOD} s"}, tube={"radius": scenario.radius},
        fluid={"kind": "given", "density": DENSITY, "viscosity": scenario.viscosity}, uncertainty={"seed": seed}, folder=folder,
    )  # fmt: skip
    measurement = measure(case, pk.Workspace())
    solved = solve_measurement(measurement, tube_of(case), fluid_of(case))
    # Straight to the intervals: a check that fails would hide them, and here the model is known to hold.
    found = propagate_tube(case, measurement, solved, solved.findings(), pk.Checks(), samples=samples).findings
    return {name: (true[name], found[name].low, found[name].high, found[name].value) for name in FINDINGS}


def study(scenario: Scenario, recordings: int, samples: int) -> dict[str, dict[str, float]]:
    """Share of recordings whose interval contains the truth, lies above it, lies below it; and the mean error in interval half widths."""
    rows: dict[str, list[tuple[float, float | None, float | None, float]]] = {name: [] for name in FINDINGS}
    with tempfile.TemporaryDirectory() as place:
        for seed in range(recordings):
            for name, row in one_recording(Path(place), scenario, seed, samples).items():
                rows[name].append(row)
    out = {}
    for name, found in rows.items():
        true, low, high, value = (np.array(column, dtype=float) for column in zip(*found, strict=True))
        out[name] = {
            "inside": float(np.mean((low <= true) & (true <= high))), "above": float(np.mean(true < low)), "below": float(np.mean(true > high)),
            "bias": float(np.mean((value - true) / (0.5 * (high - low)))), "zero": float(np.mean(true == 0)),
        }  # fmt: skip
    return out


def main() -> None:
    """Print the table of all scenarios."""
    recordings = int(sys.argv[1]) if len(sys.argv) > 1 else 1000
    samples = int(sys.argv[2]) if len(sys.argv) > 2 else 4000
    word = sys.argv[3] if len(sys.argv) > 3 else ""
    for scenario in SCENARIOS:
        if word not in scenario.name:
            continue
        start = time.perf_counter()
        table = study(scenario, recordings, samples)
        print(
            f"{scenario.name}: {recordings} recordings of {scenario.cycles[0]} to {scenario.cycles[1]} cycles, {time.perf_counter() - start:.0f} s",
            flush=True,
        )
        for name, row in table.items():
            print(
                f"  {name:34s} inside {100 * row['inside']:5.1f} %, truth below {100 * row['above']:4.1f} %, above {100 * row['below']:4.1f} %, "
                f"mean error {row['bias']:+.2f} half widths", flush=True,
            )  # fmt: skip


if __name__ == "__main__":
    main()
