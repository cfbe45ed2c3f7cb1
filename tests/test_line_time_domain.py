"""A laminar line solved in time, by the method of characteristics with Zielke's convolution, against the solution per frequency.

The time solution shares nothing with the package: it marches p and q over a grid and sums the history of the flow's change with
the weighting function of W. Zielke, J. Basic Eng. 90 (1968) 109: W = sum exp(-n_k tau) for tau > 0.02, its series in sqrt(tau) below.
"""

from __future__ import annotations

import numpy as np
from numpy.testing import assert_allclose

from pulsekit.fluids import Fluid
from pulsekit.line import ClosedEnd, FlowSource, Line, Pipe
from pulsekit.trace import Harmonics

_EXPONENTS = np.array([26.3744, 70.8493, 135.0198, 218.9216, 322.5544])
_SERIES = (0.282095, -1.25, 1.057855, 0.9375, 0.396696, -0.351563)  # times tau^((m - 1)/2), as printed by Zielke

DENSITY, VISCOSITY, RADIUS, LENGTH, SPEED, FREQUENCY = 870.0, 0.04, 0.008, 4.0, 1300.0, 60.0


def _weight(tau):
    small = sum(m * tau ** ((k - 1) / 2) for k, m in enumerate(_SERIES))
    return np.where(tau < 0.02, small, np.exp(-np.outer(tau, _EXPONENTS)).sum(axis=1))


def _march(reaches: int, periods: int) -> np.ndarray:
    """Pressure at the closed end over the last period, for q = 1e-5 cos(omega t) at the source."""
    dx = LENGTH / reaches
    dt = dx / SPEED
    area = np.pi * RADIUS**2
    impedance = DENSITY * SPEED / area
    steps = round(periods / FREQUENCY / dt)
    nu = VISCOSITY / DENSITY
    pressure, flow = np.zeros(reaches + 1), np.zeros(reaches + 1)
    history = np.zeros((steps + 1, reaches + 1))
    weights = _weight(nu * dt * (np.arange(steps + 1) + 0.5) / RADIUS**2)
    out = []
    for step in range(1, steps + 1):
        # friction of the present state: steady and unsteady, per length
        past = history[step - 1 :: -1][: step] if step > 1 else history[:1]
        unsteady = (weights[: past.shape[0], None] * past).sum(axis=0)
        friction = 8 * VISCOSITY / (area * RADIUS**2) * flow + 4 * VISCOSITY / (area * RADIUS**2) * unsteady
        plus = pressure[:-1] + impedance * flow[:-1] - dx * friction[:-1]
        minus = pressure[1:] - impedance * flow[1:] + dx * friction[1:]
        new_p, new_q = np.empty_like(pressure), np.empty_like(flow)
        new_p[1:-1] = 0.5 * (plus[:-1] + minus[1:])
        new_q[1:-1] = 0.5 * (plus[:-1] - minus[1:]) / impedance
        new_q[0] = 1e-5 * np.cos(2 * np.pi * FREQUENCY * step * dt)
        new_p[0] = minus[0] + impedance * new_q[0]
        new_q[-1] = 0.0
        new_p[-1] = plus[-1]
        history[step] = new_q - flow
        pressure, flow = new_p, new_q
        out.append(pressure[-1])
    per = round(1 / FREQUENCY / dt)
    return np.asarray(out[-per:])


def test_time_and_frequency_agree():
    fluid = Fluid(density=DENSITY, viscosity=VISCOSITY)
    line = Line([Pipe(length=LENGTH, radius=RADIUS, wave_speed=SPEED)], end=ClosedEnd(), fluid=fluid, mean_flow=0.0)
    response = line.respond(FlowSource(Harmonics(FREQUENCY, [0.0, 1e-5])))
    exact = 2 * abs(response.pressure(LENGTH).coefficients[1])
    coarse, fine = (np.ptp(_march(reaches, 14)) for reaches in (24, 48))
    # The march is of first order in the friction: halving the step halves what it is off, and it ends within 1 %.
    assert_allclose(fine, exact, rtol=0.01)
    assert abs(fine - exact) < 0.75 * abs(coarse - exact)
