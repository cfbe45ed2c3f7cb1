"""Triggers, turns of a shaft, its speed in the trace, and what is not locked to it."""

from __future__ import annotations

import numpy as np
import pytest

import pulsekit as pk
from pulsekit.errors import InputError, SignalError
from pulsekit.trace import Signal
from pulsekit.trace.shaft import shaft_cycles, shaft_speed, turns_of
from pulsekit.trace.spectrum import unlocked_part
from pulsekit.trace.trigger import trigger_onsets


def ramp(*, start=10.0, end=12.0, rate=2000.0, span=8.0, pulses=1, ratio=1.0, behind=0.0):
    """Time, shaft angle [turns] and a trigger of a pump whose speed rises: pulses per turn of a shaft that turns ``ratio`` times as fast."""
    time = np.arange(0, span, 1 / rate)
    angle = 0.3 + start * time + (end - start) * time**2 / (2 * span)
    trigger = np.mod((angle - behind / (2 * np.pi)) * ratio * pulses, 1.0) < 0.15
    return time, angle, Signal(time, 5.0 * trigger, name="trigger")


def orders(angle):
    return 60 + 2 * np.cos(2 * np.pi * 3 * angle - 0.4) + 0.7 * np.cos(2 * np.pi * 6 * angle + 1) + 0.2 * np.cos(2 * np.pi * 24 * angle)


@pytest.mark.parametrize(("pulses", "ratio"), [(1, 1.0), (4, 1.0), (1, 2.0), (2, 1.5), (1, 2.5)])
def test_turns_from_any_trigger(pulses, ratio):
    time, angle, trigger = ramp(pulses=pulses, ratio=ratio)
    turns = turns_of(trigger_onsets(trigger), pulses_per_revolution=pulses, trigger_ratio=ratio)
    phase = np.interp(turns, time, angle)
    # Pulses rise within one sample (5e-4 s at 12 turns per second) of their angle.
    np.testing.assert_allclose(np.diff(phase), 1.0, atol=0.012)


def test_the_triggers_angle_sets_phase_zero():
    """A pulse 40 degrees after top dead centre: the turn begins 40 degrees before the pulse."""
    behind = np.deg2rad(40)
    time, angle, trigger = ramp(behind=behind, rate=20000.0, span=3.0)
    turns = turns_of(trigger_onsets(trigger), trigger_angle=behind)
    phase = np.mod(np.interp(turns, time, angle) + 0.5, 1.0) - 0.5
    # Between pulses the speed counts as even; it rises by 0.7 % per turn here.
    np.testing.assert_allclose(phase, 0.0, atol=0.002)


def test_orders_by_phase_while_the_speed_rises():
    """Order 24 would smear over 48 Hz at fixed frequencies; by phase it keeps its amplitude and all orders their phase."""
    time, angle, trigger = ramp(rate=8000.0)
    cycles = shaft_cycles(Signal(time, orders(angle), name="p"), trigger=trigger, speed=11.0)
    harmonics = pk.decompose(cycles, count=30)
    assert cycles.align == "stretch"
    assert harmonics.mean == pytest.approx(60, abs=1e-3)
    for order, amplitude in ((3, 2.0), (6, 0.7), (24, 0.2)):
        # An edge is known to a quarter of a sample: 24 * 2 pi * 12/8000/4 = 5 % of a radian at order 24, which costs a per mille of amplitude.
        assert harmonics.amplitude[order] == pytest.approx(amplitude, rel=0.01)
    relative = np.angle(harmonics.coefficients[6] / harmonics.coefficients[3] ** 2)
    assert relative == pytest.approx(1 + 0.8, abs=0.01)
    assert any("rpm" in remark for remark in cycles.remarks)


def test_the_speed_is_found_in_the_trace():
    time = np.arange(0, 6.0, 0.001)
    rng = np.random.default_rng(1)
    trace = Signal(time, orders(10.13 * time) + 0.5 * rng.normal(size=time.size), name="p")
    # sqrt(6) sigma/(pi A M sqrt(n)) of the plunger frequency with M = 180 cycles and n = 6000: 1e-5.
    assert shaft_speed(trace, 10.0, per_turn=3) == pytest.approx(10.13, rel=1e-4)
    cycles = shaft_cycles(trace, speed=10.0, per_turn=3)
    assert cycles.period == pytest.approx(1 / 10.13, rel=1e-4)
    assert any("not from a plunger" in remark for remark in cycles.remarks)


def test_a_speed_three_per_cent_off_is_an_error_with_both():
    time, angle, trigger = ramp(start=11.0, end=11.0)
    trace = Signal(time, orders(angle), name="p")
    for more in ({"trigger": trigger}, {"per_turn": 3}):
        with pytest.raises(InputError, match=r"660.* rpm.*600 rpm") as caught:
            shaft_cycles(trace, speed=10.0, **more)
        assert caught.value.name == "operation.speed"
    assert shaft_cycles(trace, speed=10.8, trigger=trigger).count > 80


def test_without_speed_or_pulsation_there_are_no_turns():
    time = np.arange(0, 6.0, 0.001)
    noise = Signal(time, np.random.default_rng(2).normal(size=time.size), name="p")
    with pytest.raises(SignalError, match="neither a trigger nor a speed"):
        shaft_cycles(noise)
    with pytest.raises(SignalError, match="stands out"):
        shaft_speed(noise, 10.0, per_turn=3)
    with pytest.raises(SignalError, match="record faster"):
        shaft_speed(Signal(np.arange(100) * 0.1, np.sin(np.arange(100.0)), name="p"), 10.0, per_turn=3)


@pytest.mark.parametrize(
    "bad", [{"pulses_per_revolution": 0}, {"pulses_per_revolution": 1.5}, {"trigger_ratio": 0.0}, {"trigger_ratio": -2.0}]
)
def test_counts_and_ratios_must_be_positive(bad):
    with pytest.raises(InputError, match=next(iter(bad))):
        turns_of(np.arange(10.0), **bad)


def test_too_few_pulses():
    with pytest.raises(SignalError, match="less than one turn"):
        turns_of(np.arange(4.0), pulses_per_revolution=8)


# --- the trigger itself ---


def test_a_noisy_edge_is_one_pulse():
    time = np.arange(0, 5, 0.001)
    clean = 5.0 * (np.mod(time, 1.0) < 0.3)
    noisy = clean + 0.6 * np.random.default_rng(3).normal(size=time.size)
    onsets = trigger_onsets(Signal(time, np.clip(noisy, -2, 7), name="t"))
    np.testing.assert_allclose(onsets, [1, 2, 3, 4], atol=0.002)


def test_edges_between_samples():
    time = np.arange(0, 4, 0.01)
    slow = np.clip((np.mod(time - 0.503, 1.0)) / 0.05, 0, 1) * (np.mod(time - 0.503, 1.0) < 0.4)
    # Rises through its half 25 ms after the start of each edge.
    np.testing.assert_allclose(trigger_onsets(Signal(time, slow, name="t")), [0.528, 1.528, 2.528, 3.528], atol=1e-6)


@pytest.mark.parametrize("values", [np.ones(100), np.r_[np.zeros(50), np.ones(50)]])
def test_a_trigger_that_never_turns(values):
    with pytest.raises(SignalError, match="trigger column"):
        trigger_onsets(Signal(np.arange(100) * 0.01, values, name="t"))


# --- what is not locked ---


def test_the_unlocked_part_and_its_lines():
    rng = np.random.default_rng(4)
    time = np.arange(0, 20, 0.001)
    other = 0.5 * np.cos(2 * np.pi * 18.7 * time + 1) + 0.3 * np.cos(2 * np.pi * 71.3 * time)
    values = orders(10 * time) + other + 0.1 * rng.normal(size=time.size)
    cycles = pk.find_cycles(Signal(time, values, name="p"), period=0.1, keep_odd=True)
    part = unlocked_part(cycles, pk.decompose(cycles, count=30))
    variance = 2**2 / 2 + 0.7**2 / 2 + 0.2**2 / 2
    beside = 0.5**2 / 2 + 0.3**2 / 2 + 0.01
    # Two hundred cycles leave a 200th of it in the mean cycle.
    assert part.share == pytest.approx(beside / (variance + beside), rel=0.02)
    assert part.rms == pytest.approx(np.sqrt(beside), rel=0.01)
    assert [round(line.frequency, 1) for line in part.lines] == [18.7, 71.3]
    # A Hann window between two of four-times padded bins costs at most 2 %.
    np.testing.assert_allclose([line.amplitude for line in part.lines], [0.5, 0.3], rtol=0.03)
    assert part.lines[0].order == pytest.approx(1.87, abs=0.01)
    assert part.lowest == values.min()
    assert part.highest == values.max()
    assert part.usual_peak_to_peak < part.peak_to_peak
    assert part.matters
    assert "18.7 Hz (order 1.87)" in part.remarks[0]
    assert "both" in part.remarks[1]


def test_a_clean_record_has_no_unlocked_part():
    time = np.arange(0, 5, 0.001)
    cycles = pk.find_cycles(Signal(time, orders(10 * time), name="p"), period=0.1)
    part = unlocked_part(cycles, pk.decompose(cycles, count=30))
    assert part.share < 1e-20
    assert not part.lines
    assert not part.matters
    assert part.mean_cycle_peak_to_peak == pytest.approx(part.peak_to_peak, rel=1e-9)


def test_smeared_orders_are_not_called_lines():
    """With a rising speed and an amplitude that changes on the way, sidebands lie about each order: they are no machine of their own."""
    time, angle, trigger = ramp()
    values = 60 + (1 + 0.1 * time) * np.cos(2 * np.pi * 3 * angle) + 0.3 * np.cos(2 * np.pi * 49.5 * time)
    cycles = shaft_cycles(Signal(time, values, name="p"), trigger=trigger)
    part = unlocked_part(cycles, pk.decompose(cycles, count=12))
    assert [round(line.frequency, 1) for line in part.lines] == [49.5]
