"""The solved flow in one tube: any one measured quantity gives all the others, harmonic by harmonic."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..appraisal.finding import Checks, Findings
from ..errors import InputError
from ..exact.similarity import womersley_number
from ..trace.harmonics import Harmonics
from .envelope import mean_velocity_of_envelope
from .peak import powers_of

__all__ = ["QUANTITIES", "TubeFlow", "alphas", "solve", "velocity_factor"]

#: What may be measured, and the unit in which a person is shown it unless she says otherwise.
QUANTITIES = {
    "flow_rate": "mL/min",
    "mean_velocity": "cm/s",
    "centreline_velocity": "cm/s",
    "velocity_envelope": "cm/s",
    "pressure_gradient": "Pa/m",
    "wall_shear_stress": "Pa",
}


def alphas(*, length_scale: ArrayLike, angular_frequency: ArrayLike, kinematic_viscosity: ArrayLike, count: int) -> NDArray[np.float64]:
    """Womersley numbers of harmonics 0..count, harmonic axis last: alpha_n = sqrt(n) alpha_1."""
    first = np.asarray(womersley_number(radius=length_scale, angular_frequency=angular_frequency, kinematic_viscosity=kinematic_viscosity))
    return np.asarray(first[..., None] * np.sqrt(np.arange(count + 1.0)))


def velocity_factor(quantity: str, tube: Any, viscosity: float, alpha: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Factor per harmonic from the mean velocity to a quantity."""
    if quantity == "flow_rate":
        return np.full(alpha.shape, complex(tube.area))
    if quantity == "mean_velocity":
        return np.ones(alpha.shape, dtype=complex)
    if quantity in ("centreline_velocity", "velocity_envelope"):
        return np.asarray(tube.centreline_ratio(alpha), dtype=complex)
    scale = tube.length_scale
    if quantity == "pressure_gradient":
        return np.asarray(tube.pressure_factor(alpha) * (viscosity / scale**2))
    if quantity == "wall_shear_stress":
        return np.asarray(tube.shear_factor(alpha) * (viscosity / scale))
    raise InputError(
        f"quantity = {quantity!r} is not one of {', '.join(QUANTITIES)}", name="quantity", value=quantity, allowed=", ".join(QUANTITIES)
    )


@dataclass(frozen=True, eq=False, kw_only=True)
class TubeFlow:
    """Fully developed laminar flow of a Newtonian liquid in a long straight rigid tube, periodic in time.

    Made by `solve`. Every curve is a `Harmonics`; nothing is computed before it is asked for.

    Attributes
    ----------
    mean_velocity : Harmonics
        Over the cross-section, positive downstream. [m/s]
    quantity : str
        What was measured.
    measured : Harmonics
        The measured quantity itself.
    tube : CircularTube
    fluid : Fluid
    mean_known : bool
        False where only the oscillating part was measured: findings that need the mean are then None.
    remarks : tuple of str
    """

    mean_velocity: Harmonics
    quantity: str
    measured: Harmonics
    tube: Any
    fluid: Any
    mean_known: bool = True
    remarks: tuple[str, ...] = field(default=())

    @cached_property
    def alpha(self) -> NDArray[np.float64]:
        """Womersley number of each harmonic, 0 for the mean, shape (N + 1,). [-]"""
        return alphas(
            length_scale=self.tube.length_scale, angular_frequency=self.mean_velocity.angular_frequency,
            kinematic_viscosity=self.fluid.viscosity / self.fluid.density, count=self.mean_velocity.count,
        )  # fmt: skip

    @property
    def womersley_number(self) -> float:
        """Of the fundamental: R sqrt(omega rho/mu). [-]"""
        return float(
            womersley_number(
                radius=self.tube.length_scale, angular_frequency=self.mean_velocity.angular_frequency,
                kinematic_viscosity=self.fluid.viscosity / self.fluid.density,
            )
        )  # fmt: skip

    def _curve(self, quantity: str) -> Harmonics:
        factor = velocity_factor(quantity, self.tube, self.fluid.viscosity, self.alpha)
        return self.mean_velocity.multiplied(factor, unit=QUANTITIES[quantity])

    @cached_property
    def flow_rate(self) -> Harmonics:
        """Volume flow rate, positive downstream. [m^3/s]"""
        return self._curve("flow_rate")

    @cached_property
    def centreline_velocity(self) -> Harmonics:
        """Velocity on the axis. [m/s]"""
        return self._curve("centreline_velocity")

    @cached_property
    def pressure_gradient(self) -> Harmonics:
        """G = -dp/dx, positive where it drives the flow downstream. [Pa/m]"""
        return self._curve("pressure_gradient")

    @cached_property
    def wall_shear_stress(self) -> Harmonics:
        """Positive when it drags the wall downstream. [Pa]"""
        return self._curve("wall_shear_stress")

    def velocity(self, radius: ArrayLike, time: ArrayLike) -> Any:
        """Velocity at distances from the axis and at instants.

        Parameters
        ----------
        radius : array_like, shape (n_radius,) or scalar
            Distance from the axis, 0 to R. [m]
        time : array_like, shape (n_time,) or scalar
            [s]

        Returns
        -------
        ndarray, shape (n_radius, n_time)
            An axis of a scalar is dropped. [m/s]

        Raises
        ------
        InputError
            If a radius lies outside the tube.
        """
        places, instants = np.asarray(radius, dtype=float), np.asarray(time, dtype=float)
        x = places.reshape(-1, 1) / self.tube.length_scale
        # A radius that was computed as R may lie above it by rounding; anything more is refused by the profile.
        x = np.where((x > 1) & (x < 1 + 1e-12), 1.0, x)
        if np.any(x < 0) or np.any(x > 1) or not np.all(np.isfinite(x)):
            raise InputError(
                f"radius must lie between 0 and the tube's {self.tube.length_scale:.6g} m", name="radius", value=radius, allowed="0 to R"
            )
        shape = self.tube.profile(self.alpha, x) * self.mean_velocity.coefficients
        turn = powers_of(np.exp(1j * self.mean_velocity.angular_frequency * instants.reshape(-1)), self.alpha.size)
        field_ = shape.real @ turn.real - shape.imag @ turn.imag
        return field_.reshape(places.shape + instants.shape)[()]

    def findings(self) -> Findings:
        """Return every finding of the flow, without intervals."""
        from .findings import tube_findings

        return tube_findings(self)

    def checks(self, **context: Any) -> Checks:
        """Return the verdict on each assumption; ``context`` holds what else is known (see `tube_checks`)."""
        from .checks import tube_checks

        return tube_checks(self, **context)

    def __repr__(self) -> str:
        return f"<TubeFlow from {self.quantity}: alpha {self.womersley_number:.3g}, {self.mean_velocity.count} harmonics, {self.tube!r}>"


def solve(harmonics: Harmonics, *, quantity: str, tube: Any, fluid: Any, mean_known: bool = True) -> TubeFlow:
    """Solve the flow in a tube from one measured periodic quantity.

    Parameters
    ----------
    harmonics : Harmonics
        The measured quantity in SI.
    quantity : str
        ``flow_rate``, ``mean_velocity``, ``centreline_velocity``, ``velocity_envelope`` (largest velocity in
        the section), ``pressure_gradient`` or ``wall_shear_stress``.
    tube : CircularTube
    fluid : Fluid
    mean_known : bool
        False if the mean was not measured.

    Returns
    -------
    TubeFlow

    Raises
    ------
    InputError
        If the quantity is not one of these, or a harmonic cannot be inverted.

    Notes
    -----
    J. R. Womersley, J. Physiol. 127 (1955) 553, for each harmonic; the mean is alpha = 0 of the same functions.

    Examples
    --------
    >>> import pulsekit.trace as trace
    >>> from pulsekit.fluids import Fluid
    >>> from pulsekit.tube import CircularTube
    >>> flow = solve(trace.Harmonics(frequency=1.2, coefficients=[7e-6]), quantity="flow_rate",
    ...              tube=CircularTube(radius="3.1 mm"), fluid=Fluid(density="1060 kg/m^3", viscosity="3.5 mPa*s"))
    >>> round(flow.wall_shear_stress.mean, 4)
    1.0471
    """
    alpha = alphas(
        length_scale=tube.length_scale, angular_frequency=harmonics.angular_frequency,
        kinematic_viscosity=fluid.viscosity / fluid.density, count=harmonics.count,
    )  # fmt: skip
    factor = velocity_factor(quantity, tube, fluid.viscosity, alpha)
    empty = np.flatnonzero(np.abs(factor) == 0)
    if empty.size:
        raise InputError(
            f"{quantity} cannot be inverted: its factor vanishes at harmonic {empty[0]} (Womersley number {alpha[empty[0]]:.4g}); "
            "measure another quantity or keep fewer harmonics",
            name="quantity", value=quantity,
        )  # fmt: skip
    remarks: tuple[str, ...] = ()
    if quantity == "velocity_envelope":
        mean, remarks = mean_velocity_of_envelope(harmonics, tube, alpha)
    else:
        mean = harmonics.multiplied(1.0 / factor, unit=QUANTITIES["mean_velocity"])
    return TubeFlow(
        mean_velocity=mean, quantity=quantity, measured=harmonics, tube=tube, fluid=fluid, mean_known=mean_known,
        remarks=(*tube.remarks, *getattr(fluid, "remarks", ()), *remarks),
    )  # fmt: skip
