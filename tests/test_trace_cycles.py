"""Cycles: found, given, uneven, left out, gated, drifting."""

from __future__ import annotations

import numpy as np
import pytest

import pulsekit as pk
from pulsekit.errors import InputError, PulsekitError, SignalError
from pulsekit.trace import Signal, find_cycles
from pulsekit.trace.feet import locate_feet, refine_feet
from pulsekit.trace.periods import find_period, refine_period


def smooth(phase):
    """A made-up course with five harmonics and a steep rise."""
    return (
        3
        + 2 * np.cos(2 * np.pi * phase - 1)
        + np.cos(4 * np.pi * phase - 2.2)
        + 0.4 * np.cos(6 * np.pi * phase + 2.6)
        + 0.1 * np.cos(10 * np.pi * phase)
    )


def beat(time):
    """A made-up beat from its foot: a pulse, then rest; its pace does not follow the beat's length."""
    rise, back = np.clip(time / 0.09, 0, None), np.clip((time - 0.16) / 0.08, 0, None)
    return 1 + 10 * rise**3 * np.exp(3 * (1 - rise)) - 3 * back**3 * np.exp(3 * (1 - back))


def uneven(lengths, *, rate=200.0, before=0.2, noise=0.0, gains=None, seed=0):
    onsets = before - lengths[0] + np.concatenate([[0], np.cumsum(lengths)])
    time = np.arange(0, onsets[-1] + 0.05, 1 / rate)
    place = np.clip(np.searchsorted(onsets, time, side="right") - 1, 0, None)
    size = np.ones(onsets.size) if gains is None else gains
    values = size[place] * beat(time - onsets[place])
    return Signal(time, values + noise * np.random.default_rng(seed).normal(size=time.size), name="flow"), onsets


# --- the period ---


@pytest.mark.parametrize("period", [0.8637, 1.0 / 3, 0.5])
def test_a_period_is_found_far_below_one_sample(period):
    time = np.arange(0, 9.0, 0.01)
    found = find_cycles(Signal(time, smooth(time / period))).period
    # Five harmonics, all of them fitted: only rounding is left (1e-16 of the values over a sum of 900).
    assert found == pytest.approx(period, rel=1e-9)


def test_with_noise_the_period_stays_within_a_few_of_its_cramer_rao_bound():
    rng = np.random.default_rng(4)
    period, sigma, n, step = 0.8637, 0.3, 1000, 0.01
    time = np.arange(n) * step
    errors = [
        refine_period(Signal(time, np.cos(2 * np.pi * time / period) + sigma * rng.normal(size=n)), period * 1.001) / period - 1
        for _ in range(60)
    ]
    # var(omega) >= 24 sigma^2/(A^2 n^3 step^2) for one sinusoid of unknown phase (Kay, Fundamentals of Statistical Signal Processing, ex. 3.14, from memory).
    bound = np.sqrt(24 * sigma**2 / n**3) / step * period / (2 * np.pi)
    # The fit has eight harmonics, which cost little; 60 runs know a deviation to 9 %: 1.5 leaves four of these.
    assert np.std(errors) < 1.5 * bound


def test_a_multiple_of_the_period_is_not_taken_for_it():
    time = np.arange(0, 12.0, 0.01)
    assert find_period(Signal(time, smooth(time / 0.9))) == pytest.approx(0.9, rel=0.01)


def test_the_record_of_n_samples_covers_n_intervals():
    time = np.arange(400) * 0.01  # the last sample is at 3.99 s, and yet four cycles of 1 s are whole
    assert find_cycles(Signal(time, smooth(time)), period="1 s").count == 4
    assert find_cycles(Signal(time, smooth(time)), period=1000 * pk.quantities.registry().millisecond).count == 4


@pytest.mark.parametrize("period", ["0 s", "-1 s", "nan s", "3 mm"])
def test_a_period_that_is_none_is_refused(period):
    time = np.arange(400) * 0.01
    with pytest.raises(InputError, match="period"):
        find_cycles(Signal(time, smooth(time)), period=period)


def test_a_signal_that_does_not_repeat_itself_is_refused():
    time = np.arange(400) * 0.01
    for values in (np.full(400, 3.0), time**2):
        with pytest.raises(SignalError, match="period"):
            find_cycles(Signal(time, values))


# --- less than a cycle, and the gated one ---


def test_a_period_longer_than_the_record_names_both():
    time = np.arange(100) * 0.01
    with pytest.raises(SignalError, match=r"1\.5 s.*longer than the recording of 1 s"):
        find_cycles(Signal(time, smooth(time)), period=1.5)


@pytest.mark.parametrize(("missing", "allowed"), [(0.04, True), (0.14, True), (0.16, False)])
def test_a_gated_cycle_may_stop_short_by_fifteen_per_cent(missing, allowed):
    frames = 25
    time = np.arange(frames) * (1 - missing) / frames

    def course(time):
        return 3 + 2 * np.cos(2 * np.pi * time - 1) + np.cos(4 * np.pi * time - 2.2) + 0.4 * np.cos(6 * np.pi * time + 2.6)

    signal = Signal(time, course(time))
    if not allowed:
        with pytest.raises(SignalError, match="15 %"):
            find_cycles(signal, period=1.0)
        return
    cycles = find_cycles(signal, period=1.0)
    assert cycles.period == 1.0
    assert cycles.gap == pytest.approx(missing)
    assert any("gap is left open" in remark for remark in cycles.remarks)
    harmonics = pk.decompose(cycles, count=3)
    # Three harmonics and no noise: the gap is bridged exactly, to the condition of the fit.
    np.testing.assert_allclose(harmonics.evaluate(np.linspace(0, 1, 50)), course(np.linspace(0, 1, 50)), atol=1e-9)


def test_a_gap_leaves_fewer_harmonics():
    from pulsekit.trace.decompose import most_harmonics

    def most(missing):
        time = np.arange(24) * (1 - missing) / 24
        return most_harmonics(find_cycles(Signal(time, smooth(time)), period=1.0))

    assert most(0.0) == 11
    counts = [most(missing) for missing in (0.0, 0.05, 0.10, 0.14)]
    assert counts == sorted(counts, reverse=True)
    assert counts[-1] >= 2


# --- uneven cycles ---


def test_uneven_beats_are_cut_at_their_own_feet():
    rng = np.random.default_rng(1)
    lengths = 0.85 * (1 + 0.06 * rng.standard_normal(14))
    gains = 1 + 0.1 * rng.standard_normal(15)
    signal, onsets = uneven(lengths, noise=0.15, gains=gains)
    cycles = find_cycles(signal)
    assert cycles.align == "onset"
    found = cycles.all_onsets
    shift = found - onsets[np.abs(onsets[:, None] - found).argmin(axis=0)]
    # The tangent's foot lies a fixed time after the first rise; what counts is that it does so in every beat: within a fifth of a sample (5 ms).
    assert np.ptp(shift[:-1]) < 5e-3
    assert np.std(shift[:-1]) < 1e-3
    assert cycles.count >= 11


def test_a_taller_beat_is_not_taken_for_an_earlier_one():
    gains = np.where(np.arange(13) % 2, 1.4, 0.8)
    signal, _ = uneven(np.full(12, 0.85), gains=gains)
    feet = refine_feet(signal, locate_feet(signal, 0.85))
    assert np.std(np.diff(feet)) < 1e-3


def test_a_constant_pace_is_kept_as_one_period():
    signal, _ = uneven(np.full(12, 0.85), noise=0.2)
    cycles = find_cycles(signal)
    assert cycles.uniform
    assert cycles.align == "stretch"
    assert cycles.period == pytest.approx(0.85, rel=2e-4)


def test_stretching_lowers_the_peak_and_the_onset_keeps_it():
    """Systole does not stretch: with 8 % variation, mapping each beat to one phase smears the late systole more than the early."""
    rng = np.random.default_rng(2)
    signal, onsets = uneven(np.clip(0.85 * (1 + 0.08 * rng.standard_normal(60)), 0.6, 1.15))
    fluid, tube = pk.Fluid(density=1060, viscosity=3.5e-3), pk.CircularTube(radius=3e-3)

    def shear(harmonics):
        flow = pk.solve(harmonics.multiplied(1e-6), quantity="flow_rate", tube=tube, fluid=fluid)
        course = flow.wall_shear_stress.evaluate(np.linspace(0, harmonics.period, 2000))
        return course.max(), course.min()

    # Truth: the beat itself over the median period.
    period = float(np.median(np.diff(onsets[1:-1])))
    time = np.arange(4096) / 4096 * period
    high, low = shear(pk.decompose(find_cycles(Signal(time, beat(time)), period=period), count=25))
    found = {align: shear(pk.decompose(find_cycles(signal, onsets=onsets[1:-1], align=align), count=25)) for align in ("stretch", "onset")}
    # In time from the onset nothing is smeared; 5 ms between samples leave a per mille or so.
    np.testing.assert_allclose(found["onset"], (high, low), rtol=0.01)
    assert found["stretch"][0] < 0.995 * high
    assert abs(found["stretch"][1]) < 0.93 * abs(low)


def test_the_mean_is_that_of_the_whole_cycles():
    """Short and long beats in turn: the window of the median period would be far off."""
    lengths = np.where(np.arange(16) % 3 == 0, 1.25, 0.8)
    signal, onsets = uneven(lengths, rate=1000.0)
    cycles = find_cycles(signal, onsets=onsets[1:-1], align="onset", keep_odd=True)
    exact = sum(float(np.trapezoid(beat(np.linspace(0, length, 4001)), dx=length / 4000)) for length in lengths[1:-1]) / lengths[1:-1].sum()
    harmonics = pk.decompose(cycles)
    # Trapezia on 1 kHz samples of a course of class C2, onsets between samples.
    assert harmonics.mean == pytest.approx(exact, rel=1e-4)
    assert harmonics.frequency == pytest.approx(1 / np.median(lengths[1:-1]))
    assert cycles.period == pytest.approx(lengths[1:-1].mean())
    assert any("window" in remark and "steps by" in remark for remark in harmonics.remarks)
    np.testing.assert_allclose(cycles.integrals().sum() / cycles.periods.sum(), exact, rtol=1e-4)


def test_onsets_may_be_told_with_units():
    time = np.arange(400) * 0.01
    cycles = find_cycles(Signal(time, smooth(time)), onsets=["0.5 s", "1500 ms", "2.5 s"])
    assert cycles.count == 2
    np.testing.assert_allclose(cycles.onsets, [0.5, 1.5])


@pytest.mark.parametrize("onsets", [[1.0], [2.0, 1.0], [7.0, 8.0]])
def test_onsets_that_make_no_cycle_are_refused(onsets):
    time = np.arange(400) * 0.01
    with pytest.raises(SignalError):
        find_cycles(Signal(time, smooth(time)), onsets=onsets)


# --- odd cycles ---


def test_a_bad_beat_is_left_out_and_listed():
    signal, onsets = uneven(np.full(12, 0.85) + 0.04 * np.sin(np.arange(12)), noise=0.1)
    values = signal.values.copy()
    bad = (signal.time > onsets[6] + 0.05) & (signal.time < onsets[7] - 0.1)
    values[bad] = np.random.default_rng(3).normal(size=int(bad.sum()))
    cycles = find_cycles(signal.replace(values=values))
    assert len(cycles.left_out) == 1
    index, reason = cycles.left_out[0]
    assert cycles.all_onsets[index] == pytest.approx(onsets[6], abs=0.05)
    assert "does not look like the others" in reason
    assert any(f"Cycle {index + 1} " in remark for remark in cycles.remarks)
    assert index not in cycles.kept
    kept_all = find_cycles(signal.replace(values=values), keep_odd=True)
    assert kept_all.count == cycles.count + 1


def test_good_beats_of_a_noisy_record_are_kept():
    rng = np.random.default_rng(8)
    signal, _ = uneven(0.85 * (1 + 0.04 * rng.standard_normal(20)), noise=0.5, gains=1 + 0.08 * rng.standard_normal(21))
    assert not find_cycles(signal).left_out


def test_a_missed_trigger_makes_one_long_cycle_that_is_left_out():
    time = np.arange(0, 12, 0.01)
    onsets = np.delete(np.arange(0, 12, 1.0), 5)
    cycles = find_cycles(Signal(time, smooth(time)), onsets=onsets, align="stretch")
    assert [index for index, _ in cycles.left_out] == [4]


def test_a_cycle_without_its_samples_is_left_out():
    time = np.arange(0, 8, 0.01)
    weights = np.where((time > 3.1) & (time < 3.6), 0.0, 1.0)
    values = np.where(weights > 0, smooth(time), 1e6)
    cycles = find_cycles(Signal(time, values, weights=weights), period=1.0)
    assert [index for index, _ in cycles.left_out] == [3]
    assert "missing" in cycles.left_out[0][1]
    # The bad samples touch nothing.
    np.testing.assert_allclose(pk.decompose(cycles, count=5).mean, 3.0, rtol=1e-9)


def test_the_user_leaves_out_by_number_from_one():
    time = np.arange(0, 8, 0.01)
    cycles = find_cycles(Signal(time, smooth(time)), period=1.0, leave_out=[3])
    assert [index + 1 for index, _ in cycles.left_out] == [3]
    assert "Cycle 3" in " ".join(cycles.remarks)
    with pytest.raises(PulsekitError, match="cycles 1 to 8"):
        cycles.without([8])
    with pytest.raises(PulsekitError, match="every cycle"):
        cycles.without(range(8))


# --- drift ---


def test_a_drift_is_reported_and_removed_only_when_asked():
    time = np.arange(0, 10, 0.01)
    signal = Signal(time, smooth(time) + 0.2 * time)
    left = find_cycles(signal, period=1.0)
    assert any("drifts" in remark and "left in" in remark for remark in left.remarks)
    np.testing.assert_array_equal(left.signal.values, signal.values)
    removed = find_cycles(signal, period=1.0, remove_drift=True)
    # A ramp taken out about the middle leaves the mean; the slope comes from cycle means and is exact for a straight ramp.
    assert np.ptp(removed.folded([0.25])) < 1e-6
    assert not any("drifts" in r for r in find_cycles(Signal(time, smooth(time)), period=1.0).remarks)


def test_fewer_than_four_samples_are_refused():
    with pytest.raises(SignalError, match="at least 4"):
        find_cycles(Signal([0, 1, 2], [0, 1, 0]))


def test_arrays_make_a_signal():
    signal = Signal(time=[0.0, 0.5, 1.0, 1.5], values=[1e-6, 2e-6, 1e-6, 2e-6], unit="mL/min", name="flow")
    assert find_cycles(signal, period="1 s").count == 2
