"""Pressure waves in a liquid-filled line: speeds, propagation and friction per frequency.

Time factor exp(+i omega t). With N = I0/I2 (laminar) or its turbulent replacement,

    gamma = (i omega/c) sqrt(N),    Z_c = (rho c/A) sqrt(N)
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from ..errors import InputError
from .womersley import checked, shear_factor

__all__ = [
    "ANCHORINGS", "bramwell_hill_speed", "characteristic_impedance", "friction_factor", "laminar_friction_ratio", "liquid_speed",
    "mixture_speed", "moens_korteweg_speed", "propagation_constant", "turbulent_friction_ratio", "wall_factor", "wave_speed_in_pipe",
]  # fmt: skip

#: How a pipe is held: along its whole length, at its upstream end only, or free to move at expansion joints.
ANCHORINGS = ("throughout", "upstream", "expansion joints")


def liquid_speed(*, bulk_modulus: ArrayLike, density: ArrayLike) -> Any:
    """Speed of sound in the free liquid, sqrt(K/rho). [m/s]

    Examples
    --------
    >>> round(float(liquid_speed(bulk_modulus=2.19e9, density=998.2)), 2)
    1481.2
    """
    return np.sqrt(np.asarray(bulk_modulus, float) / np.asarray(density, float))[()]


def wall_factor(*, diameter: ArrayLike, wall_thickness: ArrayLike, poisson_ratio: ArrayLike, anchoring: str = "throughout") -> Any:
    """Factor c1 of D/(E e) in Korteweg's formula, thick walls included.

    c1 = (2 e/D)(1 + nu) + D/(D + e) m with m = 1 - nu^2 (held throughout), 1 - nu/2 (held upstream; the convention with
    5/4 - nu is also in use) or 1 (expansion joints). For a thin wall c1 -> m. E. B. Wylie, V. L. Streeter, Fluid
    Transients in Systems (1993), from memory.

    Examples
    --------
    >>> round(float(wall_factor(diameter=1.0, wall_thickness=1e-9, poisson_ratio=0.3)), 6)
    0.91
    """
    nu = np.asarray(poisson_ratio, float)
    if anchoring not in ANCHORINGS:
        raise InputError(f"anchoring = {anchoring!r} is not one of {', '.join(ANCHORINGS)}", name="anchoring", value=anchoring)
    middle = {"throughout": 1 - nu**2, "upstream": 1 - nu / 2, "expansion joints": np.ones_like(nu)}[anchoring]
    d, e = np.asarray(diameter, float), np.asarray(wall_thickness, float)
    return (2 * e / d * (1 + nu) + d / (d + e) * middle)[()]


def wave_speed_in_pipe(
    *,
    bulk_modulus: ArrayLike,
    density: ArrayLike,
    diameter: ArrayLike,
    wall_thickness: ArrayLike,
    young_modulus: ArrayLike,
    factor: ArrayLike = 1.0,
) -> Any:
    """Korteweg's wave speed, sqrt(K/rho)/sqrt(1 + c1 K D/(E e)). [m/s]

    D. J. Korteweg, Ann. Phys. 241 (1878) 525.

    Examples
    --------
    >>> round(float(wave_speed_in_pipe(bulk_modulus=2.19e9, density=998.2, diameter=50.0, wall_thickness=1.0, young_modulus=207e9)), 2)
    1197.88
    """
    k = np.asarray(bulk_modulus, float)
    give = np.asarray(factor, float) * k * np.asarray(diameter, float) / (np.asarray(young_modulus) * np.asarray(wall_thickness, float))
    return (np.sqrt(k / np.asarray(density, float)) / np.sqrt(1 + give))[()]


def moens_korteweg_speed(*, young_modulus: ArrayLike, wall_thickness: ArrayLike, diameter: ArrayLike, density: ArrayLike) -> Any:
    """Wave speed where the wall gives far more than the liquid, sqrt(E e/(rho D)). [m/s]

    Examples
    --------
    >>> round(float(moens_korteweg_speed(young_modulus=0.4e6, wall_thickness=0.1, diameter=1.0, density=1060.0)), 6)
    6.142951
    """
    e, h = np.asarray(young_modulus), np.asarray(wall_thickness, float)
    return np.sqrt(e * h / (np.asarray(density, float) * np.asarray(diameter, float)))[()]


def bramwell_hill_speed(*, pressure_change: ArrayLike, relative_area_change: ArrayLike, density: ArrayLike) -> Any:
    """Wave speed from a measured distension, sqrt(dp/(rho dA/A)). [m/s]

    Examples
    --------
    >>> round(float(bramwell_hill_speed(pressure_change=40 * 133.322368, relative_area_change=0.1, density=1060.0)), 4)
    7.093
    """
    return np.sqrt(np.asarray(pressure_change, float) / (np.asarray(density, float) * np.asarray(relative_area_change, float)))[()]


def mixture_speed(
    *,
    gas_fraction: ArrayLike,
    pressure: ArrayLike,
    bulk_modulus: ArrayLike,
    density: ArrayLike,
    gas_density: ArrayLike = 0.0,
    exponent: ArrayLike = 1.4,
) -> Any:
    """Speed of sound in a liquid with free gas of volume fraction ``gas_fraction`` at the absolute ``pressure``. [m/s]

    A. B. Wood, A Textbook of Sound (1930): 1/K_m = (1 - x)/K + x/(n p), rho_m = (1 - x) rho + x rho_g.

    Examples
    --------
    >>> round(float(mixture_speed(gas_fraction=1e-3, pressure=101325.0, bulk_modulus=2.1934e9, density=998.2072, gas_density=1.2, exponent=1.0)), 1)
    311.7
    """
    x = np.asarray(gas_fraction, float)
    compliance = (1 - x) / np.asarray(bulk_modulus, float) + x / (np.asarray(exponent, float) * np.asarray(pressure, float))
    return (1 / np.sqrt(((1 - x) * np.asarray(density, float) + x * np.asarray(gas_density, float)) * compliance))[()]


def laminar_friction_ratio(alpha: ArrayLike) -> Any:
    """N = I0/I2 = 1 + 2 T/(i alpha^2); alpha > 0. Inertance over rho/A is Re N, resistance is carried by -Im N.

    Examples
    --------
    >>> round(float(laminar_friction_ratio(1.0).real), 6)
    1.333102
    """
    numbers = checked(alpha)
    if np.any(numbers == 0):
        raise InputError("the friction of a wave needs a frequency above 0", name="alpha", value=0.0, allowed="> 0")
    return (1.0 + 2.0 * np.asarray(shear_factor(numbers)) / (1j * numbers**2))[()]


def friction_factor(reynolds: ArrayLike, *, relative_roughness: ArrayLike = 0.0) -> Any:
    """Darcy friction factor: 64/Re below 2300; above by Haaland (J. Fluids Eng. 105 (1983) 89, from memory). [-]

    Examples
    --------
    >>> round(float(friction_factor(1000.0)), 3), round(float(friction_factor(1e5)), 4)
    (0.064, 0.0178)
    """
    re = np.asarray(reynolds, float)
    with np.errstate(divide="ignore"):
        laminar = 64.0 / re
        rough = 1.0 / (-1.8 * np.log10((np.asarray(relative_roughness, float) / 3.7) ** 1.11 + 6.9 / np.maximum(re, 2300.0))) ** 2
    return np.where(re < 2300.0, laminar, rough)[()]


def turbulent_friction_ratio(
    *, alpha: ArrayLike, reynolds: ArrayLike, velocity: ArrayLike, radius: ArrayLike, angular_frequency: ArrayLike
) -> Any:
    """N of turbulent mean flow in a smooth pipe.

    N = 1 + (7/16) f U0/(R i omega) + 2/sqrt(i alpha^2 + B): quasi-steady friction of Blasius' law, linearised (exponent
    7/4), and the transform of Vardy and Brown's weighting function W = A exp(-B tau)/sqrt(tau), A = 1/(2 sqrt(pi)),
    B = Re^kappa/12.86, kappa = log10(15.29 Re^-0.0567). A. E. Vardy, J. M. B. Brown, J. Sound Vib. 259 (2003) 1011
    (from memory); for 2e3 < Re < 1e8.

    Examples
    --------
    >>> ratio = turbulent_friction_ratio(alpha=50.0, reynolds=1e4, velocity=1.0, radius=0.01, angular_frequency=600.0)
    >>> bool(ratio.real > 1), bool(ratio.imag < 0)
    (True, True)
    """
    re, a = np.asarray(reynolds, float), checked(alpha)
    decay = re ** np.log10(15.29 * re**-0.0567) / 12.86
    steady = 0.3164 / re**0.25
    quasi = 0.4375 * steady * np.abs(np.asarray(velocity, float)) / (np.asarray(radius, float) * 1j * np.asarray(angular_frequency, float))
    return (1.0 + quasi + 2.0 / np.sqrt(1j * a**2 + decay))[()]


def propagation_constant(*, angular_frequency: ArrayLike, wave_speed: ArrayLike, friction_ratio: ArrayLike) -> Any:
    """Gamma = (i omega/c) sqrt(N), positive real part: decay per metre. [1/m]

    Examples
    --------
    >>> complex(propagation_constant(angular_frequency=1300.0, wave_speed=1300.0, friction_ratio=1.0))
    1j
    """
    return (1j * np.asarray(angular_frequency, float) / np.asarray(wave_speed) * np.sqrt(np.asarray(friction_ratio, complex)))[()]


def characteristic_impedance(*, density: ArrayLike, wave_speed: ArrayLike, area: ArrayLike, friction_ratio: ArrayLike) -> Any:
    """Z_c = (rho c/A) sqrt(N). [Pa s/m^3]

    Examples
    --------
    >>> complex(characteristic_impedance(density=1000.0, wave_speed=1000.0, area=1.0, friction_ratio=1.0))
    (1000000+0j)
    """
    rho_c = np.asarray(density, float) * np.asarray(wave_speed)
    return (rho_c / np.asarray(area, float) * np.sqrt(np.asarray(friction_ratio, complex)))[()]
