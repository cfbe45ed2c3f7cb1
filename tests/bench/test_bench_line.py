"""A line of ten elements against the bare products of as many two-by-two matrices.

    PULSEKIT_BENCH=1 python -m pytest tests/bench/test_bench_line.py --benchmark-only -s

Ratios and medians are printed; wide bounds are asserted, since timings on a shared machine scatter.
"""

from __future__ import annotations

import time

import numpy as np
import pytest

import pulsekit as pk
from pulsekit.line import speed_map

FREQUENCIES, SPEEDS, ORDERS, PLACES = 100_000, 200, 30, 200


@pytest.fixture(scope="module")
def line():
    """Ten elements: six pipes, a restrictor, a branch, a volume and a damper."""

    def pipe(radius="8 mm"):
        return pk.Pipe(length="1.5 m", radius=radius, wave_speed="1300 m/s")

    elements = [
        pipe(),
        pk.Restrictor(pressure_drop="3 bar", flow="38 L/min"),
        pipe(),
        pk.SideBranch([pipe("6 mm")], end=pk.ClosedEnd()),
        pipe(),
        pk.Volume(volume="0.8 L"),
        pipe(),
        pk.GasDamper(gas_volume="0.5 L", pressure="180 bar", polytropic_exponent=1.2, neck_length="50 mm", neck_radius="6 mm"),
        pipe(),
        pipe("6 mm"),
    ]
    fluid = pk.Fluid(density=870.0, viscosity="40 mPa*s", bulk_modulus="1.5 GPa")
    return pk.Line(elements, end=pk.ClosedEnd(), fluid=fluid, mean_flow="38 L/min", mean_pressure="180 bar")


def _median(work, rounds=7):
    spans = []
    for _ in range(rounds):
        begin = time.perf_counter()
        work()
        spans.append(time.perf_counter() - begin)
    return float(np.median(spans))


def _source():
    rng = np.random.default_rng(3)
    waves = 1e-5 * (rng.standard_normal(ORDERS) + 1j * rng.standard_normal(ORDERS))
    return pk.FlowSource(pk.Harmonics(frequency=10.0, coefficients=np.concatenate([[6.3e-4], waves])))


def test_many_frequencies_against_bare_products(line, benchmark):
    hertz = np.linspace(1.0, 3000.0, FREQUENCIES)
    rng = np.random.default_rng(4)
    matrices = rng.standard_normal((len(line.elements), FREQUENCIES, 2, 2)) + 1j

    def bare():
        product = matrices[0]
        for matrix in matrices[1:]:
            product = product @ matrix
        return product

    ours, theirs = _median(lambda: line.input_impedance(hertz)), _median(bare)
    print(f"\n{FREQUENCIES} frequencies: {1e3 * ours:.0f} ms, bare products {1e3 * theirs:.0f} ms, ratio {ours / theirs:.2f} (wanted: 3)")
    benchmark.pedantic(line.input_impedance, args=(hertz,), rounds=3)
    assert ours < 8 * theirs


def test_speed_map(line, benchmark):
    source = _source()
    speeds, places = np.linspace(5.0, 15.0, SPEEDS), np.linspace(0.0, line.length, PLACES)
    span = _median(lambda: speed_map(line, source, speeds, places), rounds=3)
    print(f"\nspeed map of {SPEEDS} speeds, {ORDERS} orders, {PLACES} positions: {span:.2f} s (wanted: 1 s)")
    benchmark.pedantic(speed_map, args=(line, source, speeds, places), rounds=1)
    assert span < 5.0


def test_one_answer(line, benchmark):
    source = _source()

    def step():
        response = line.respond(source)
        return response.envelope(response.grid())

    span = _median(step, rounds=15)
    print(f"\nresponse and envelope on 201 positions, {ORDERS} orders: {1e3 * span:.1f} ms (wanted: 10 ms)")
    benchmark(step)
    assert span < 0.5
