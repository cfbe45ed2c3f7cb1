"""The momentum equation solved by finite elements in the cross-section, without Bessel functions, by scikit-fem.

i alpha^2 u - laplace(u) = 1 with u = 0 at the wall, in units of R, mu and the gradient: an independent way to the
profile, the flow and the wall shear of one harmonic. Once on the disc itself, in triangles, which takes no symmetry for
granted; once over the radius, where quadratic elements thin towards the wall resolve any layer.
"""

from __future__ import annotations

import numpy as np
import pytest
import skfem
from skfem.helpers import dot, grad

import pulsekit as pk
from pulsekit.exact import womersley


@skfem.BilinearForm(dtype=np.complex128)
def momentum(u, v, w):
    return 1j * w.square * u * v + dot(grad(u), grad(v))


@skfem.BilinearForm(dtype=np.complex128)
def momentum_over_radius(u, v, w):
    return w.x[0] * (1j * w.square * u * v + dot(grad(u), grad(v)))


@skfem.LinearForm(dtype=np.complex128)
def load(v, w):
    return 1.0 * v


@skfem.LinearForm(dtype=np.complex128)
def load_over_radius(v, w):
    return w.x[0] * v


@pytest.mark.parametrize("alpha", [0.0, 1.0, 3.0])
def test_on_the_disc(alpha):
    mesh = skfem.MeshTri.init_circle(4)
    basis, rim = (kind(mesh, skfem.ElementTriP2(), intorder=4) for kind in (skfem.Basis, skfem.FacetBasis))
    force = load.assemble(basis)
    u = skfem.solve(*skfem.condense(momentum.assemble(basis, square=alpha**2), force, D=basis.get_dofs()))
    mean = force @ u / np.pi
    # The rim is a polygon of 64 sides, whose area is 1.6e-3 short: values to about twice that, slopes to a few times.
    assert 1 / mean == pytest.approx(womersley.pressure_factor(alpha), rel=4e-3)
    profile = womersley.velocity_profile(alpha, np.minimum(np.hypot(*basis.doflocs), 1.0))
    # The middle of a side lies 1.2e-3 inside the circle, where the velocity is that times the slope.
    np.testing.assert_allclose(u / mean, profile, atol=2.5e-3 * abs(womersley.shear_factor(alpha)))
    slope = skfem.Functional(lambda w: -dot(grad(w["u"]), w.n), dtype=np.complex128).assemble(rim, u=rim.interpolate(u))
    assert slope / (2 * np.pi) / mean == pytest.approx(womersley.shear_factor(alpha), rel=1e-2)


def solve_radius(alpha: float) -> tuple[skfem.Basis, np.ndarray, complex]:
    """u on elements over the radius that thin towards the wall, and its mean over the section."""
    ends = np.sin(0.5 * np.pi * np.linspace(0, 1, 401))
    basis = skfem.Basis(skfem.MeshLine(ends), skfem.ElementLineP2(), intorder=6)
    force = load_over_radius.assemble(basis)
    matrix = momentum_over_radius.assemble(basis, square=alpha**2)
    u = skfem.solve(*skfem.condense(matrix, force, D=basis.get_dofs(lambda x: x[0] > 1 - 1e-9)))
    return basis, u, 2 * (force @ u)


def wall_slope(basis: skfem.Basis, u: np.ndarray) -> complex:
    """-du/dx at the wall, from the last element's parabola."""
    x = basis.doflocs[0]
    last = np.argsort(x)[-3:]
    return -np.polyval(np.polyder(np.polyfit(x[last] - 1.0, u[last], 2)), 0.0)


@pytest.mark.parametrize("alpha", [0.0, 0.5, 3.34, 12.0, 40.0, 200.0])
def test_over_the_radius(alpha):
    basis, u, mean = solve_radius(alpha)
    # Elements of 1/250 in the core and 8e-6 at the wall: errors of (alpha h)^3/100 in values, (alpha h)^2/10 in slopes.
    assert 1 / mean == pytest.approx(womersley.pressure_factor(alpha), rel=1e-7)
    profile = womersley.velocity_profile(alpha, basis.doflocs[0])
    np.testing.assert_allclose(u / mean, profile, atol=1e-6 * np.abs(profile).max())
    assert wall_slope(basis, u) / mean == pytest.approx(womersley.shear_factor(alpha), rel=1e-5)


def test_an_instant_of_a_whole_flow():
    """All harmonics of an invented flow put together, from elements and from the solved flow."""
    radius, density, viscosity, frequency, time = 3.1e-3, 1060.0, 3.5e-3, 1.2, 0.21
    coefficients = np.array([5e-6, 6e-6 * np.exp(-1j), 3e-6 * np.exp(0.4j), 1e-6 * np.exp(2j)])
    flow = pk.solve(
        pk.Harmonics(frequency, coefficients), quantity="flow_rate", tube=pk.CircularTube(radius=radius),
        fluid=pk.Fluid(density=density, viscosity=viscosity),
    )  # fmt: skip
    field, shear = 0.0, 0.0
    for n, flow_rate in enumerate(coefficients):
        basis, u, mean = solve_radius(radius * np.sqrt(n * 2 * np.pi * frequency * density / viscosity))
        turned = flow_rate / (np.pi * radius**2) / mean * np.exp(2j * np.pi * n * frequency * time)
        field = field + (u * turned).real
        shear += (wall_slope(basis, u) * turned).real * viscosity / radius
    got = flow.velocity(basis.doflocs[0] * radius, time)
    np.testing.assert_allclose(got, field, atol=1e-6 * np.abs(got).max())
    assert shear == pytest.approx(flow.wall_shear_stress.evaluate(time), rel=1e-5)
