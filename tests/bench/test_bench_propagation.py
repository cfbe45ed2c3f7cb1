"""Ten thousand samples of a tube's flow as `analyse` asks for them, against the bare products on the same sizes.

    PULSEKIT_BENCH=1 python -m pytest tests/bench/test_bench_propagation.py --benchmark-only -s

The ratio counts everything that the answer reads: draws, findings, bands, shares, first order, bias and what is
left out. It is printed; a wide bound is asserted, since timings on a shared machine scatter.
"""

from __future__ import annotations

import time
import tracemalloc

import numpy as np
import pytest

import pulsekit as pk
from pulsekit.case.liquids import fluid_of
from pulsekit.case.measurement import measure
from pulsekit.case.propagate_tube import propagate_tube
from pulsekit.case.wall_shear import solve_measurement, tube_of

SAMPLES, HARMONICS, INSTANTS, CURVES, BANDS = 10_000, 20, 256, 4, 3


@pytest.fixture(scope="module")
def question(tmp_path_factory):
    """A case of twelve cycles with twenty harmonics kept, measured and solved."""
    folder = tmp_path_factory.mktemp("bench")
    rng = np.random.default_rng(5)
    order = np.arange(1, HARMONICS + 1)
    shape = 200 * np.exp(-0.2 * order) * np.exp(-1j * order)
    moments = np.arange(1200) * 0.008
    turn = np.exp(2j * np.pi * np.outer(order, moments / 0.8))
    values = 100 + (shape @ turn).real * (1 + 0.05 * np.repeat(rng.standard_normal(12), 100)) + 2 * rng.standard_normal(moments.size)
    rows = "".join(f"{t:.4f},{v:.5f}\n" for t, v in zip(moments, values, strict=True))
    (folder / "run.csv").write_text("time (s),flow (mL/min)\n" + rows)
    case = pk.WallShearCase(
        recording={"file": "run.csv", "quantity": "flow_rate", "scale_uncertainty": "3 %"}, cycles={"period": "0.8 s", "harmonics": HARMONICS},
        tube={"radius": "3.1 mm ± 0.1 mm"},
        fluid={"kind": "blood", "haematocrit": "0.45 ± 0.02", "temperature": "37 degC ± 0.5 degC"}, folder=folder,
    )  # fmt: skip
    measurement = measure(case, pk.Workspace())
    flow = solve_measurement(measurement, tube_of(case), fluid_of(case))
    return case, measurement, flow, flow.findings()


_READY = [np.random.default_rng(curve).standard_normal((2 * (HARMONICS + 1), SAMPLES)) for curve in range(CURVES)]
_BASIS = np.random.default_rng(9).standard_normal((INSTANTS, 2 * (HARMONICS + 1)))


def bare() -> float:
    """The yardstick: a product per curve, its min, max, mean and mean of abs, and one partition at two quantiles for each band.

    Instants by samples, the layout in which the partition is fastest; drawing the coefficients is no part of it.
    """
    total = 0.0
    for curve in range(CURVES):
        values = _BASIS @ _READY[curve]
        total += values.min(axis=0)[0] + values.max(axis=0)[0] + values.mean(axis=0)[0] + np.abs(values).mean(axis=0)[0]
        if curve < BANDS:
            values.partition((250, 9749), axis=1)
            total += values[0, 250]
    return total


def median_seconds(work, rounds: int = 5) -> float:
    work()
    spent = []
    for _ in range(rounds):
        start = time.perf_counter()
        work()
        spent.append(time.perf_counter() - start)
    return float(np.median(spent))


def test_a_whole_propagation(question, benchmark):
    case, measurement, flow, findings = question

    def whole():
        return propagate_tube(case, measurement, flow, findings, pk.Checks(), samples=SAMPLES)

    benchmark.pedantic(whole, rounds=3, warmup_rounds=1)
    ratio = median_seconds(whole) / median_seconds(bare)
    print(f"\nwhole propagation, {SAMPLES} samples x {HARMONICS} harmonics x {INSTANTS} instants: {ratio:.2f} times the bare products")
    assert ratio < 4.0  # the goal is 2; a shared machine scatters


def test_memory(question, benchmark):
    case, measurement, flow, findings = question
    tracemalloc.start()
    benchmark.pedantic(lambda: propagate_tube(case, measurement, flow, findings, pk.Checks(), samples=SAMPLES), rounds=1)
    peak = tracemalloc.get_traced_memory()[1] / 1e6
    tracemalloc.stop()
    print(f"\npeak memory of a propagation: {peak:.0f} MB")
    assert peak < 300
