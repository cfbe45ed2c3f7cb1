"""Oscillating flow in a tube for the demo recordings, written with SciPy's Bessel functions.

It stands apart from the package on purpose, so that a demo's truth is not the package's own answer.
x(t) = Re sum X_n exp(+i n omega t); flow and pressure gradient positive downstream.
"""

from __future__ import annotations

import numpy as np
from scipy.special import jve


def order_ratio(zeta: np.ndarray) -> np.ndarray:
    """I2(z)/I0(z) at z = zeta with Re z > 0, by I_n(z) = i^-n J_n(i z); the scaling of numerator and denominator cancels."""
    return -jve(2, 1j * zeta) / jve(0, 1j * zeta)


def tube_factors(*, radius: float, kinematic_viscosity: float, omega: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Per harmonic: tau R/(mu U), G R^2/(mu U) and u(0)/U; omega = 0 gives Poiseuille's 4, 8 and 2."""
    shear, pressure, centre = (np.full(omega.shape, value, dtype=complex) for value in (4.0, 8.0, 2.0))
    moving = omega > 0
    alpha = radius * np.sqrt(omega[moving] / kinematic_viscosity)
    zeta = np.sqrt(1j) * alpha
    i0, i1, i2 = (jve(n, 1j * zeta) * (1j) ** -n for n in range(3))
    shear[moving] = zeta * i1 / i2
    pressure[moving] = zeta**2 * i0 / i2
    centre[moving] = (i0 - np.exp(-np.abs(zeta.real))) / i2
    return shear, pressure, centre


def tube_truth(
    flow: np.ndarray, *, frequency: float, radius: float, density: float, viscosity: float, instants: int = 4096
) -> tuple[dict[str, float], dict[str, np.ndarray]]:
    """Findings of a flow given by its coefficients [m^3/s], and the coefficients of the other curves. All SI."""
    omega = 2 * np.pi * frequency * np.arange(flow.size)
    shear, pressure, centre = tube_factors(radius=radius, kinematic_viscosity=viscosity / density, omega=omega)
    velocity = flow / (np.pi * radius**2)
    curves = {
        "flow_rate": flow,
        "mean_velocity": velocity,
        "centreline_velocity": velocity * centre,
        "pressure_gradient": velocity * pressure * viscosity / radius**2,
        "wall_shear_stress": velocity * shear * viscosity / radius,
    }
    tau = course(curves["wall_shear_stress"], instants)
    rate = course(flow, instants)
    gradient = course(curves["pressure_gradient"], instants)
    findings = {
        "mean_flow_rate": float(rate.mean()),
        "peak_flow_rate": float(rate.max()),
        "minimum_flow_rate": float(rate.min()),
        "time_averaged_wall_shear_stress": float(np.abs(tau).mean()),
        "mean_wall_shear_stress": float(tau.mean()),
        "peak_wall_shear_stress": float(np.abs(tau).max()),
        "minimum_wall_shear_stress": float(tau.min()),
        "oscillatory_shear_index": float((1 - abs(tau.mean()) / np.abs(tau).mean()) / 2),
        "pressure_gradient_amplitude": float(np.ptp(gradient) / 2),
        "womersley_number": float(radius * np.sqrt(omega[1] * density / viscosity)),
    }
    return findings, curves


def course(coefficients: np.ndarray, instants: int) -> np.ndarray:
    """One period at equal steps from phase 0."""
    return waves(coefficients, np.arange(instants) / instants)


def waves(coefficients: np.ndarray, phase: np.ndarray) -> np.ndarray:
    """Re sum X_n exp(2 pi i n phase), phase in cycles."""
    turn = np.exp(2j * np.pi * phase)
    total = np.zeros(phase.shape, dtype=complex)
    for value in coefficients[::-1]:
        total = total * turn + value
    return total.real


def coefficients_of(period_course: np.ndarray, count: int) -> np.ndarray:
    """Harmonics 0..count of one period given at equal steps."""
    spectrum = np.fft.rfft(period_course) / period_course.size
    spectrum[1:] *= 2
    return spectrum[: count + 1]
