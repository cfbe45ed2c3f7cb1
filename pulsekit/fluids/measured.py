"""A measured viscosity in place of a correlation, and what another temperature would make of it."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from ..errors import InputError
from ..quantities import Given, parse_either, parse_given
from .ranges import above_zero, celsius, correlation

__all__ = ["measured_viscosity"]


def measured_viscosity(
    viscosity: Any, measured_at: Any, temperature: Given, density: float, law: Callable[[float], float], accuracy: float
) -> tuple[float, dict[str, Given], tuple[str, ...]]:
    """Return viscosity [Pa s], givens and remarks: the correlation's, or the measured one where there is one.

    ``law`` gives the correlation's viscosity at a temperature [K]; its slope tells the change per degree.
    A measured viscosity is used as it stands: the remark says what it misses.
    """
    if viscosity is None:
        if measured_at is not None:
            raise InputError(
                "measured_at is the temperature of a measured viscosity; give viscosity as well, or leave it out", name="measured_at"
            )
        return law(temperature.value), {"correlation": correlation(accuracy)}, ()
    given = above_zero(parse_either(viscosity, ("viscosity", "kinematic_viscosity"), "viscosity"), "viscosity")
    value = given.value * (density if given.dimension == "kinematic_viscosity" else 1.0)
    remarks: tuple[str, ...] = ()
    if given.dimension == "kinematic_viscosity":
        remarks = (f"viscosity = {given.text} is kinematic: converted with the density {density:.5g} kg/m³ to {value * 1e3:.4g} mPa·s.",)
    givens = {"viscosity": given}
    if measured_at is not None:
        at = above_zero(parse_given(measured_at, "temperature", "measured_at"), "measured_at")
        givens["measured_at"] = at
        remarks += _remark(at.value, temperature.value, law)
    return value, givens, remarks


def _remark(measured: float, run: float, law: Callable[[float], float]) -> tuple[str, ...]:
    if abs(run - measured) < 0.05:
        return ()
    ratio = law(run) / law(measured)
    per_degree = 100.0 * (ratio ** (1.0 / (run - measured)) - 1.0)
    return (
        f"The viscosity was measured at {celsius(measured)} and the run is at {celsius(run)}: it is used as measured. "
        f"By the correlation it changes by {per_degree:+.1f} % per degree, {100 * (ratio - 1):+.0f} % in all.",
    )
