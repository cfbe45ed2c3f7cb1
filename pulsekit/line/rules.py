"""What pulsation is allowed: a rule that the user can replace."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

__all__ = ["AllowableRule", "acceleration_head", "reciprocating_pump_rule"]


@dataclass(frozen=True)
class AllowableRule:
    """Allowed peak-to-peak pressure per harmonic.

    ``allowed(frequency [Hz], bore [m])`` returns pascals; ``source`` says where it comes from.
    """

    name: str
    allowed: Callable[[Any, Any], Any]
    source: str

    def ratio(self, peak_to_peak: ArrayLike, frequency: ArrayLike, bore: ArrayLike) -> Any:
        """Peak-to-peak pressure over the allowed one. [-]"""
        return (np.asarray(peak_to_peak, float) / self.allowed(np.asarray(frequency, float), np.asarray(bore, float)))[()]


def reciprocating_pump_rule(constant: float = 3500.0) -> AllowableRule:
    """Return the rule 3500/sqrt(ID f) kPa, ID in mm and f in Hz, peak to peak per harmonic.

    The form of API 674, third edition, annex C; the constant is from memory: put in that of the edition that governs.

    Examples
    --------
    >>> round(float(reciprocating_pump_rule().allowed(25.0, 0.1)) / 1e3, 1)
    70.0
    """
    return AllowableRule(
        name="reciprocating pump",
        allowed=lambda frequency, bore: 1e3 * constant / np.sqrt(1e3 * bore * frequency),
        source=f"form of API 674, 3rd ed., annex C, constant {constant:g} (from memory): read the edition that governs and put its constant in",
    )


_HEAD = {(2, "single"): 0.200, (2, "double"): 0.115, (3, "single"): 0.066, (5, "single"): 0.040, (7, "single"): 0.028}


def acceleration_head(
    *, length: float, velocity: float, speed: float, plungers: int, acting: str = "single", liquid_factor: float = 1.5
) -> float | None:
    """Acceleration head of a suction line, L V N C/(K g); None for a pump that the table does not have. [m]

    Hydraulic Institute form, constants from memory; an estimate for short, stiff lines below resonance.

    Parameters
    ----------
    length : float
        [m]
    velocity : float
        Mean. [m/s]
    speed : float
        Of the shaft. [Hz]
    plungers : int
    acting : str
    liquid_factor : float
        K: 1.4 water nearly free of gas, 1.5 water and glycol, 2.0 most hydrocarbons, 2.5 hot oil.

    Examples
    --------
    >>> round(acceleration_head(length=10.0, velocity=1.0, speed=5.0, plungers=3), 2)
    13.46
    """
    constant = _HEAD.get((plungers, acting))
    return None if constant is None else length * abs(velocity) * 60 * speed * constant / (liquid_factor * 9.80665)
