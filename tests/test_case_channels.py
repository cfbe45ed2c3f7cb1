"""What instruments do to a signal, told in the case and undone on the way: each against a recording made by doing it."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import signal as filters

import pulsekit as pk
from pulsekit.errors import PulsekitError

FREQUENCY = 1.25
RATE = 400.0
TIME = np.arange(0, 8.0, 1 / RATE)
TUBE = {"radius": "3.1 mm"}
FLUID = {"kind": "given", "density": "1060 kg/m^3", "viscosity": "3.5 mPa*s"}
COEFFICIENTS = np.array([0.12, 0.15 * np.exp(-1j), 0.08 * np.exp(0.4j), 0.03 * np.exp(2j)])
TRUTH = pk.Harmonics(frequency=FREQUENCY, coefficients=COEFFICIENTS)


def analysed(folder, values, *, unit="m/s", quantity="mean_velocity", harmonics=3, samples=None, time=TIME, **recording):
    rows = "\n".join(f"{t:.6f},{v:.12g}" for t, v in zip(time, values, strict=True))
    (folder / "v.csv").write_text(f"time (s),v ({unit})\n{rows}\n")
    case = pk.WallShearCase(
        recording={"file": "v.csv", "signal": "v", "quantity": quantity} | recording, cycles={"period": "0.8 s", "harmonics": harmonics}, tube=TUBE,
        fluid=FLUID, folder=folder,
    )  # fmt: skip
    return pk.analyse(case, nominal_only=samples is None, samples=samples)


def velocities(answer):
    return answer.flow.mean_velocity.coefficients


def same(answer, rtol=1e-8):
    # Twelve digits in the file, three harmonics of one scale.
    np.testing.assert_allclose(velocities(answer), COEFFICIENTS, rtol=rtol, atol=1e-10)


def settled(b, a):
    """The truth after a digital filter has settled: several periods run in before the recording."""
    long = np.arange(-16.0, 8.0 - 0.5 / RATE, 1 / RATE)
    return filters.lfilter(b, a, TRUTH.evaluate(long))[-TIME.size :]


def test_a_butterworth_low_pass_is_undone(tmp_path):
    b, a = filters.butter(2, 12.0, fs=RATE)
    # SciPy's digital filter warps the analogue one by (pi f/rate)^2/3 of the frequency: at 3.75 Hz of 400 under 1e-3.
    same(analysed(tmp_path, settled(b, a), low_pass="12 Hz"), rtol=2e-3)
    untouched = velocities(analysed(tmp_path, settled(b, a)))
    assert abs(untouched[3] / COEFFICIENTS[3] - 1) > 0.1


def test_a_ringing_catheter_is_undone(tmp_path):
    natural, damping = 2 * np.pi * 18.0, 0.25
    _, values, _ = filters.lsim(([natural**2], [1, 2 * damping * natural, natural**2]), TRUTH.evaluate(np.arange(0, 24, 1 / RATE)), np.arange(0, 24, 1 / RATE))
    # lsim takes the input as straight between samples: an error of (pi f/rate)^2/3.
    same(analysed(tmp_path, values[-TIME.size :], natural_frequency="18 Hz", damping_ratio=0.25), rtol=2e-3)


@pytest.mark.parametrize("stamp", ["middle", "start"])
def test_frames_are_undone(tmp_path, stamp):
    width = 0.1
    begin = TIME - (width / 2 if stamp == "middle" else 0.0)
    orders = np.arange(1, 4) * 2j * np.pi * FREQUENCY
    # The mean over a frame in closed form: the integral of exp(i w t) over its width.
    means = COEFFICIENTS[0].real + sum(
        (c * np.exp(w * begin) * (np.exp(w * width) - 1) / (w * width)).real for c, w in zip(COEFFICIENTS[1:], orders, strict=True)
    )
    same(analysed(tmp_path, means, averaged_over="100 ms", stamp=stamp))


def test_a_delay_is_undone(tmp_path):
    same(analysed(tmp_path, TRUTH.evaluate(TIME - 0.02), delay="20 ms"))


def test_beyond_a_gain_of_three_harmonics_are_dropped_and_said(tmp_path):
    b, a = filters.butter(2, 2.0, fs=RATE)
    answer = analysed(tmp_path, settled(b, a), low_pass="2 Hz")
    # 1/|H| at f/2 Hz: sqrt(1 + (f/2)^4) = 1.18, 1.85 and 3.66 for the three harmonics: the third is beyond.
    assert answer.flow.mean_velocity.count == 2
    assert any("dropped" in remark for remark in answer.remarks)


def test_calibration_and_zero_at_no_flow(tmp_path):
    still = np.arange(0, 2, 1 / RATE)
    time = np.concatenate([still, 2 + TIME])
    volts = np.concatenate([np.full(still.size, 1.002), 1.002 + TRUTH.evaluate(2 + TIME) / 0.4])
    answer = analysed(tmp_path, volts, unit="V", time=time, calibration="40 cm/s/V", zero_between=["0 s", "1.99 s"])
    found = velocities(answer)
    np.testing.assert_allclose(np.abs(found), np.abs(COEFFICIENTS), rtol=1e-6)


def test_a_zero_file(tmp_path):
    rows = "\n".join(f"{t:.6f},1.002" for t in TIME[:200])
    (tmp_path / "still.csv").write_text(f"time (s),v (V)\n{rows}\n")
    same(analysed(tmp_path, 1.002 + TRUTH.evaluate(TIME) / 0.4, unit="V", calibration="40 cm/s/V", zero_file="still.csv"))


def test_an_ac_coupled_channel_has_no_mean(tmp_path):
    answer = analysed(tmp_path, TRUTH.evaluate(TIME) - 0.12, coupling="ac")
    assert answer.findings["mean_flow_rate"].value is None
    assert answer.findings["pressure_gradient_amplitude"].value > 0
    mended = analysed(tmp_path, TRUTH.evaluate(TIME) - 0.12, coupling="ac", mean_flow=f"{0.12 * math.pi * 3.1e-3**2:.12g} m^3/s")
    same(mended)


def test_components_along_the_beam(tmp_path):
    same(analysed(tmp_path, TRUTH.evaluate(TIME) * math.cos(math.radians(60)), doppler_angle="60 deg", angle_corrected=False))
    same(analysed(tmp_path, TRUTH.evaluate(TIME), doppler_angle="60 deg"))


def test_three_degrees_at_sixty_are_nine_per_cent(tmp_path):
    answer = analysed(tmp_path, TRUTH.evaluate(TIME), doppler_angle="60 deg ± 3 deg", samples=20_000)
    finding = answer.findings["mean_flow_rate"]
    # First order tan(60 deg) x 3 deg = 9.07 %; the cosine's curvature widens the upper side, so the logarithm of the width is compared.
    spread = math.log(finding.high / finding.low) / (2 * 1.96)
    assert spread == pytest.approx(math.tan(math.radians(60)) * math.radians(3), rel=0.06)
    assert finding.shares["recording.doppler_angle"] == pytest.approx(1, abs=0.02)


def test_spectral_broadening_and_background(tmp_path):
    same(analysed(tmp_path, TRUTH.evaluate(TIME) * 1.15, spectral_broadening="15 %"))
    same(analysed(tmp_path, TRUTH.evaluate(TIME) + 0.006, background_velocity="0.6 cm/s"))


def test_offset_and_scale_enter_the_interval(tmp_path):
    answer = analysed(tmp_path, TRUTH.evaluate(TIME), offset_uncertainty="0.6 cm/s", scale_uncertainty="3 %", samples=20_000)
    finding = answer.findings["mean_reynolds_number"]
    expected = math.hypot(0.006 / 0.12, 0.03)
    assert (finding.high - finding.low) / (2 * 1.96 * finding.value) == pytest.approx(expected, rel=0.03)
    # GUM: shares are the squares of the contributions.
    assert finding.shares["recording.offset_uncertainty"] == pytest.approx((0.05 / expected) ** 2, abs=0.03)


def test_a_unit_and_a_rate_that_the_file_does_not_say(tmp_path):
    rows = "\n".join(f"{v:.12g}" for v in TRUTH.evaluate(TIME) * 100)
    (tmp_path / "bare.csv").write_text(f"v\n{rows}\n")
    recording = {"file": "bare.csv", "signal": "v", "quantity": "mean_velocity", "sample_rate": "400 Hz"}
    case = pk.WallShearCase(recording=recording, cycles={"period": "0.8 s", "harmonics": 3}, tube=TUBE, fluid=FLUID, folder=tmp_path)
    with pytest.raises(PulsekitError, match="unit"):
        pk.analyse(case, nominal_only=True)
    same(pk.analyse(case.with_value("recording.unit", "cm/s"), nominal_only=True))


def test_instrument_check_is_unknown_until_the_filter_is_told(tmp_path):
    assert analysed(tmp_path, TRUTH.evaluate(TIME)).checks["instrument_response"].verdict == "unknown"
    assert analysed(tmp_path, TRUTH.evaluate(TIME), low_pass="100 Hz").checks["instrument_response"].verdict == "holds"
