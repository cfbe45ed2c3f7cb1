"""What drives a line: a flow with an impedance of its own, or a pressure measured at a station."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from ..errors import InputError
from ..quantities import parse_given
from ..trace.harmonics import Harmonics

__all__ = ["FlowSource", "MeasuredPressure"]


@dataclass(frozen=True, eq=False)
class FlowSource:
    """An ideal flow in parallel with the source's impedance.

    Parameters
    ----------
    harmonics : Harmonics
        Of the flow into the line, positive downstream; X_0 is the mean flow. [m^3/s]
    impedance : complex, str or callable, optional
        Of the source: constant [Pa s/m^3], or a function of the frequency [Hz]. None: ideal.
    model : str
        How the flow was made, for the check on the source.
    """

    harmonics: Harmonics
    impedance: Any = None
    model: str = "given"

    def admittance(self, frequency: Any) -> Any:
        """1/impedance [m^3/(Pa s)]; 0 for an ideal source."""
        if self.impedance is None:
            return np.zeros(np.shape(frequency), dtype=complex)
        if callable(self.impedance):
            return 1.0 / np.asarray(self.impedance(np.asarray(frequency)), complex)
        value = self.impedance if isinstance(self.impedance, complex) else parse_given(self.impedance, "impedance", "impedance").value
        if value == 0:
            raise InputError("a source impedance of 0 would fix the pressure; give a MeasuredPressure instead", name="impedance", value=0)
        return np.full(np.shape(frequency), 1.0 / complex(value))


@dataclass(frozen=True, eq=False, init=False)
class MeasuredPressure:
    """A pressure measured at a station of the line.

    Parameters
    ----------
    harmonics : Harmonics
        [Pa]
    station : float or str
        Position along the line. [m]
    """

    harmonics: Harmonics
    station: float

    def __init__(self, harmonics: Harmonics, station: Any) -> None:
        object.__setattr__(self, "harmonics", harmonics)
        object.__setattr__(self, "station", parse_given(station, "length", "station").value)
        if self.station < 0:
            raise InputError(f"station = {self.station} m must not lie before the source at 0 m", name="station", value=self.station)
