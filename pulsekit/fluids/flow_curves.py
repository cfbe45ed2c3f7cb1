"""Flow curves: the apparent viscosity of shear-thinning liquids against the rate of shear."""

from __future__ import annotations

import math
from dataclasses import dataclass, fields
from typing import Any, Protocol

import numpy as np
from numpy.typing import ArrayLike

from ..errors import InputError
from .ranges import plain

__all__ = [
    "BLOOD_CARREAU",
    "BLOOD_CARREAU_YASUDA",
    "BLOOD_CASSON",
    "BLOOD_POWER_LAW",
    "Carreau",
    "CarreauYasuda",
    "Casson",
    "FlowCurve",
    "PowerLaw",
    "flow_curve_of",
]


class FlowCurve(Protocol):
    """What a flow curve can do."""

    @property
    def source(self) -> str:
        """Where its numbers come from."""

    def apparent_viscosity(self, shear_rate: ArrayLike) -> Any:
        """Shear stress over shear rate [Pa s]."""

    def shear_stress(self, shear_rate: ArrayLike) -> Any:
        """Shear stress with the sign of the rate [Pa]."""


def _rate(shear_rate: ArrayLike) -> Any:
    rate = np.abs(np.asarray(shear_rate, float))
    if not np.all(np.isfinite(rate)):
        raise InputError("shear_rate is not finite; give numbers in 1/s", name="shear_rate", value=shear_rate)
    return rate


def _check(curve: Any) -> None:
    for item in fields(curve):
        value = getattr(curve, item.name)
        if item.name == "source":
            continue
        low = 0.0 if item.name in ("yield_stress", "infinite_shear_viscosity") else math.nextafter(0.0, 1.0)
        if not (isinstance(value, (int, float)) and math.isfinite(value) and value >= low):
            raise InputError(f"{type(curve).__name__}: {item.name} = {value!r} must be a number above zero", name=item.name, value=value)


@dataclass(frozen=True, kw_only=True)
class CarreauYasuda:
    """mu = mu_inf + (mu_0 - mu_inf) (1 + (lambda rate)^a)^((n - 1)/a).

    Parameters
    ----------
    zero_shear_viscosity, infinite_shear_viscosity : float
        mu_0 and mu_inf. [Pa s]
    relaxation_time : float
        lambda. [s]
    index : float
        n. [-]
    transition : float
        a; 2 is Carreau's curve. [-]

    Examples
    --------
    >>> f"{BLOOD_CARREAU_YASUDA.apparent_viscosity(100.0) * 1e3:.5f} mPa*s"
    '4.32580 mPa*s'
    """

    zero_shear_viscosity: float
    infinite_shear_viscosity: float
    relaxation_time: float
    index: float
    transition: float = 2.0
    source: str = ""

    def __post_init__(self) -> None:
        _check(self)

    def apparent_viscosity(self, shear_rate: ArrayLike) -> Any:
        """Shear stress over shear rate. [Pa s]"""
        scaled = (self.relaxation_time * _rate(shear_rate)) ** self.transition
        thinned = np.exp((self.index - 1.0) / self.transition * np.log1p(scaled))
        return plain(self.infinite_shear_viscosity + (self.zero_shear_viscosity - self.infinite_shear_viscosity) * thinned)

    def shear_stress(self, shear_rate: ArrayLike) -> Any:
        """Shear stress with the sign of the rate. [Pa]"""
        return plain(np.asarray(shear_rate, float) * self.apparent_viscosity(shear_rate))


class Carreau(CarreauYasuda):
    """Carreau's curve: :class:`CarreauYasuda` with a transition of 2.

    Examples
    --------
    >>> f"{BLOOD_CARREAU.apparent_viscosity(1.0) * 1e3:.4f} mPa*s"
    '27.0977 mPa*s'
    """


@dataclass(frozen=True, kw_only=True)
class Casson:
    """sqrt(tau) = sqrt(tau_y) + sqrt(k rate): a liquid that does not flow below its yield stress.

    The apparent viscosity grows without bound as the rate of shear vanishes: at a rate of 0 it is infinite.

    Parameters
    ----------
    yield_stress : float
        tau_y. [Pa]
    plastic_viscosity : float
        k. [Pa s]

    Examples
    --------
    >>> round(Casson(yield_stress=0.0, plastic_viscosity=0.004).apparent_viscosity(50.0), 9)
    0.004
    """

    yield_stress: float
    plastic_viscosity: float
    source: str = ""

    def __post_init__(self) -> None:
        _check(self)

    def apparent_viscosity(self, shear_rate: ArrayLike) -> Any:
        """Shear stress over shear rate. [Pa s]"""
        rate = _rate(shear_rate)
        if self.yield_stress == 0.0:
            return plain(np.full_like(rate, self.plastic_viscosity))
        with np.errstate(divide="ignore"):
            return plain((np.sqrt(self.yield_stress / rate) + math.sqrt(self.plastic_viscosity)) ** 2)

    def shear_stress(self, shear_rate: ArrayLike) -> Any:
        """Shear stress with the sign of the rate; at rest 0, though it may be anything up to the yield stress. [Pa]"""
        rate = _rate(shear_rate)
        root = math.sqrt(self.yield_stress) + np.sqrt(self.plastic_viscosity * rate)
        return plain(np.sign(np.asarray(shear_rate, float)) * root**2)


@dataclass(frozen=True, kw_only=True)
class PowerLaw:
    """mu = k rate^(n - 1); infinite at rest where n < 1.

    Parameters
    ----------
    consistency : float
        k. [Pa s^n]
    index : float
        n. [-]

    Examples
    --------
    >>> PowerLaw(consistency=0.002, index=1.0).apparent_viscosity(300.0)
    0.002
    """

    consistency: float
    index: float
    source: str = ""

    def __post_init__(self) -> None:
        _check(self)

    def apparent_viscosity(self, shear_rate: ArrayLike) -> Any:
        """Shear stress over shear rate. [Pa s]"""
        with np.errstate(divide="ignore"):
            return plain(self.consistency * _rate(shear_rate) ** (self.index - 1.0))

    def shear_stress(self, shear_rate: ArrayLike) -> Any:
        """Shear stress with the sign of the rate. [Pa]"""
        return plain(np.sign(np.asarray(shear_rate, float)) * self.consistency * _rate(shear_rate) ** self.index)


#: Blood at 37 °C and a haematocrit near 0.45.
BLOOD_CARREAU = Carreau(
    zero_shear_viscosity=0.056, infinite_shear_viscosity=0.00345, relaxation_time=3.313, index=0.3568,
    source="Cho & Kensey, Biorheology 28 (1991) 241, Carreau",
)  # fmt: skip
BLOOD_CARREAU_YASUDA = CarreauYasuda(
    zero_shear_viscosity=0.056, infinite_shear_viscosity=0.00345, relaxation_time=1.902, index=0.22, transition=1.25,
    source="Cho & Kensey, Biorheology 28 (1991) 241, Carreau-Yasuda (from memory)",
)  # fmt: skip
BLOOD_CASSON = Casson(
    yield_stress=0.005, plastic_viscosity=0.0035, source="yield stress and Casson viscosity usual for a haematocrit of 0.45 (from memory)"
)
BLOOD_POWER_LAW = PowerLaw(consistency=0.017, index=0.708, source="power law usual for blood from 1 to 100 1/s (from memory)")


def flow_curve_of(kind: str) -> FlowCurve | None:
    """Flow curve by which a kind of fluid is judged for being Newtonian; None where it is Newtonian anyway or not known.

    >>> flow_curve_of("blood").source[:12], flow_curve_of("water")
    ('Cho & Kensey', None)
    """
    return BLOOD_CARREAU_YASUDA if kind == "blood" else None
