"""What instruments did, undone per harmonic: filters against SciPy, frames and delays against the time domain."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import signal as scipy_signal

import pulsekit as pk
from pulsekit.errors import InputError, UnitError
from pulsekit.trace import Signal
from pulsekit.trace.channel import (
    MOST_GAIN,
    butterworth_response,
    calibrated,
    delay_response,
    frame_response,
    high_pass_response,
    second_order_response,
    usable_orders,
)

FREQUENCY = np.array([0.0, 0.3, 1.0, 4.0, 10.0, 25.0, 80.0])


@pytest.mark.parametrize("order", [1, 2, 3, 4, 5, 8])
def test_butterworth_against_scipy(order):
    b, a = scipy_signal.butter(order, 2 * np.pi * 10.0, analog=True)
    _, expected = scipy_signal.freqs(b, a, 2 * np.pi * FREQUENCY)
    # SciPy's polynomial of order 8 spans 15 decades: 1e-12 is its rounding.
    np.testing.assert_allclose(butterworth_response(FREQUENCY, 10.0, order), expected, rtol=1e-11, atol=1e-13)


def test_second_order_against_scipy():
    natural, damping = 18.0, 0.3
    w = 2 * np.pi * natural
    _, expected = scipy_signal.freqs([w**2], [1, 2 * damping * w, w**2], 2 * np.pi * FREQUENCY)
    np.testing.assert_allclose(second_order_response(FREQUENCY, natural, damping), expected, rtol=1e-13)


def test_high_pass_against_scipy():
    b, a = scipy_signal.butter(1, 2 * np.pi * 0.5, btype="high", analog=True)
    _, expected = scipy_signal.freqs(b, a, 2 * np.pi * FREQUENCY)
    np.testing.assert_allclose(high_pass_response(FREQUENCY, 0.5), expected, rtol=1e-13, atol=1e-15)
    assert high_pass_response(0.0, 0.5) == 0


def test_a_response_in_time():
    """A second-order line driven by a sine, marched in time, settles to the factor."""
    natural, damping, drive = 12.0, 0.4, 7.0
    w = 2 * np.pi * natural
    time = np.linspace(0, 4, 80001)
    _, out, _ = scipy_signal.lsim(([w**2], [1, 2 * damping * w, w**2]), np.cos(2 * np.pi * drive * time), time)
    late = time > 2
    expected = (second_order_response(drive, natural, damping) * np.exp(2j * np.pi * drive * time[late])).real
    # lsim interpolates its input linearly: (omega dt)^2/12 of the amplitude.
    np.testing.assert_allclose(out[late], expected, atol=1e-6)


@pytest.mark.parametrize("stamp", ["middle", "start"])
@pytest.mark.parametrize("window", [0.02, 0.0358, 0.2, 1.0])
def test_a_mean_over_a_frame_in_time(stamp, window):
    """The exact integral of a harmonic over the window, stamped at its middle or its start."""
    period, order, stamps = 0.9, 3, np.linspace(0, 0.9, 7)
    omega = 2 * np.pi * order / period
    begin = stamps if stamp == "start" else stamps - window / 2
    exact = (np.sin(omega * (begin + window)) - np.sin(omega * begin)) / (omega * window)
    found = (frame_response(order, window, period, stamp=stamp) * np.exp(1j * omega * stamps)).real
    np.testing.assert_allclose(found, exact, atol=1e-12)


def test_a_window_of_the_whole_period_holds_only_the_mean():
    np.testing.assert_allclose(frame_response(np.arange(4), 1.0, 1.0), [1, 0, 0, 0], atol=1e-15)


def test_a_delay_in_time():
    true = pk.Harmonics(frequency=1.2, coefficients=[1, 2 - 1j, 0.5j])
    recorded = true.multiplied(delay_response(1.2 * np.arange(3), 0.004))
    time = np.linspace(0, 1, 11)
    # A record that is late shows at time t what happened at t - delay.
    np.testing.assert_allclose(recorded.evaluate(time), true.evaluate(time - 0.004), atol=1e-14)


def test_undoing_stops_where_it_would_magnify_more_than_threefold():
    response = butterworth_response(np.arange(30.0), 10.0, 2)
    usable = usable_orders(response)
    assert np.all(np.abs(response[1 : usable + 1]) >= 1 / MOST_GAIN)
    assert abs(response[usable + 1]) < 1 / MOST_GAIN
    # 1/sqrt(1 + x^4) = 1/3 at x = 8^(1/4) = 1.68
    assert usable == 16
    assert usable_orders(np.ones(8, dtype=complex)) == 7
    # A zero inside the row (a frame of half the period at order 2) ends it there, whatever comes after.
    assert usable_orders(frame_response(np.arange(6), 0.5, 1.0)) == 1


def test_samples_of_an_uncertain_filter_broadcast():
    corners = np.array([[9.0], [10.0], [11.0]])
    assert butterworth_response(np.arange(5.0), corners, 2).shape == (3, 5)
    assert second_order_response(np.arange(5.0), corners, 0.4).shape == (3, 5)
    assert frame_response(np.arange(5.0), corners / 100, 1.0).shape == (3, 5)


def test_the_filter_of_a_catheter_enters_the_interval():
    """First order: d ln(1/H) for natural frequency and damping, against the difference of two calls."""
    f, natural, damping, u = 6.0, 20.0, 0.3, 1e-4
    slope = (1 / second_order_response(f, natural * (1 + u), damping) - 1 / second_order_response(f, natural * (1 - u), damping)) / (2 * u)
    r = f / natural
    # 1/H = 1 - r^2 + 2 i D r and natural dr/dnatural = -r.
    assert slope == pytest.approx(2 * r**2 - 2j * damping * r, rel=1e-6)


@pytest.mark.parametrize("order", [0, -1])
def test_an_order_below_one_is_refused(order):
    with pytest.raises(InputError, match="at least 1"):
        butterworth_response(1.0, 10.0, order)


# --- calibration ---


def test_calibration_of_volts():
    raw = Signal([0, 1, 2], [1.002, 3.002, 5.002], unit="V", name="p")
    done = calibrated(raw, "25 bar/V", "1.002 V")
    np.testing.assert_allclose(done.values, [0, 50e5, 100e5], atol=1e-6)
    assert (done.unit, done.dimension) == ("bar", "pressure")
    assert any("25 bar/V" in remark for remark in done.remarks)


def test_calibration_in_milliamperes_and_small_units():
    raw = Signal([0, 1], [0.004, 0.020], unit="mA", name="p")  # values of a signal are SI
    np.testing.assert_allclose(calibrated(raw, "25 bar/mA", "4 mA").values, [0, 400e5], atol=1e-6)


def test_a_zero_alone_shifts():
    raw = Signal([0, 1], [133.322387415, 266.64477483], unit="mmHg", name="p")
    done = calibrated(raw, None, "1 mmHg")
    np.testing.assert_allclose(done.values, [0, 133.322387415], atol=1e-9)


@pytest.mark.parametrize("slope", ["25 bar", "bar/V", "x bar/V", "25 bar/furlong"])
def test_a_calibration_that_is_none_is_refused(slope):
    with pytest.raises(InputError, match="calibration"):
        calibrated(Signal([0, 1], [1.0, 2.0], unit="V", name="p"), slope)


def test_a_calibration_per_another_unit_is_refused():
    with pytest.raises(UnitError):
        calibrated(Signal([0, 1], [1.0, 2.0], unit="mmHg", name="p"), "25 bar/V")


# --- the whole road ---


def test_frames_of_a_gated_cycle_come_back():
    """24 frames, each the mean over its own time and stamped at its start: the course comes back exactly up to the kept harmonics."""
    period, frames = 0.96, 24
    step = period / frames
    true = pk.Harmonics(frequency=1 / period, coefficients=[3, 2 - 1j, 1j, 0.4, 0.1 - 0.2j, 0.05])
    order = np.arange(6)
    starts = np.arange(frames) * step
    seen = true.multiplied(frame_response(order, step, period, stamp="start")).evaluate(starts)
    harmonics = pk.decompose(pk.find_cycles(Signal(starts, seen), period=period), count=5)
    back = harmonics.multiplied(1 / frame_response(order, step, period, stamp="start"))
    np.testing.assert_allclose(back.coefficients, true.coefficients, atol=1e-12)
