"""Dimensionless numbers and lengths that decide where the exact solution holds."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

__all__ = [
    "dean_number",
    "entrance_length",
    "reynolds_number",
    "stokes_layer_reynolds_number",
    "stokes_layer_thickness",
    "womersley_number",
]


def womersley_number(*, radius: ArrayLike, angular_frequency: ArrayLike, kinematic_viscosity: ArrayLike) -> Any:
    """Return alpha = R sqrt(omega/nu). [-]

    Parameters
    ----------
    radius : array_like
        [m]
    angular_frequency : array_like
        [rad/s]
    kinematic_viscosity : array_like
        [m^2/s]

    Examples
    --------
    >>> import math
    >>> round(float(womersley_number(radius=4e-3, angular_frequency=2 * math.pi * 70 / 60, kinematic_viscosity=3.5e-3 / 1060)), 3)
    5.96
    """
    return (np.asarray(radius, float) * np.sqrt(np.asarray(angular_frequency, float) / np.asarray(kinematic_viscosity, float)))[()]


def reynolds_number(*, velocity: ArrayLike, diameter: ArrayLike, kinematic_viscosity: ArrayLike) -> Any:
    """Return abs(U) D/nu. [-]

    Examples
    --------
    >>> round(float(reynolds_number(velocity=-0.1, diameter=0.01, kinematic_viscosity=1e-6)), 9)
    1000.0
    """
    return (np.abs(np.asarray(velocity, float)) * np.asarray(diameter, float) / np.asarray(kinematic_viscosity, float))[()]


def stokes_layer_thickness(*, angular_frequency: ArrayLike, kinematic_viscosity: ArrayLike) -> Any:
    """Return sqrt(2 nu/omega). [m]

    Examples
    --------
    >>> float(stokes_layer_thickness(angular_frequency=2.0, kinematic_viscosity=1e-6))
    0.001
    """
    return np.sqrt(2.0 * np.asarray(kinematic_viscosity, float) / np.asarray(angular_frequency, float))[()]


def stokes_layer_reynolds_number(*, velocity_amplitude: ArrayLike, angular_frequency: ArrayLike, kinematic_viscosity: ArrayLike) -> Any:
    """Return U0 sqrt(2/(nu omega)), U0 half the peak to peak of the mean velocity. [-]

    Examples
    --------
    >>> float(stokes_layer_reynolds_number(velocity_amplitude=0.1, angular_frequency=2.0, kinematic_viscosity=1e-6))
    100.0
    """
    product = np.asarray(kinematic_viscosity, float) * np.asarray(angular_frequency, float)
    return (np.abs(np.asarray(velocity_amplitude, float)) * np.sqrt(2.0 / product))[()]


def entrance_length(*, reynolds_number: ArrayLike, diameter: ArrayLike) -> Any:
    """Return the length after which steady laminar flow is developed to 99 %. [m]

    Le/D = (0.619^1.6 + (0.0567 Re)^1.6)^(1/1.6): F. Durst et al., J. Fluids Eng. 127 (2005) 1154
    (formula from memory).

    Examples
    --------
    >>> round(float(entrance_length(reynolds_number=0.0, diameter=1.0)), 3)
    0.619
    """
    ratio = (0.619**1.6 + (0.0567 * np.asarray(reynolds_number, float)) ** 1.6) ** (1 / 1.6)
    return (ratio * np.asarray(diameter, float))[()]


def dean_number(*, reynolds_number: ArrayLike, radius: ArrayLike, bend_radius: ArrayLike) -> Any:
    """Return Re sqrt(R/Rc), Rc the radius of the bend's centre line. [-]

    Examples
    --------
    >>> float(dean_number(reynolds_number=100.0, radius=0.01, bend_radius=1.0))
    10.0
    """
    return (np.asarray(reynolds_number, float) * np.sqrt(np.asarray(radius, float) / np.asarray(bend_radius, float)))[()]
