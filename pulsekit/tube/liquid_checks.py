"""Checks on the liquid of a tube: Newtonian at this wall shear, and within the range of its correlations."""

from __future__ import annotations

from typing import Any

import numpy as np

from ..appraisal.finding import Check
from ..exact.periodic import mean_absolute
from ..fluids import Fluid
from .check_context import Context, judged

__all__ = ["correlation_check", "newtonian_check"]

_HOLDS, _FAILS = 0.1, 0.3  # relative difference of the viscosities


def _shear_with(flow: Any, viscosity: float) -> float:
    """Time-averaged wall shear of the same measured quantity with another viscosity. [Pa]"""
    from .flow import solve

    fluid = Fluid(density=flow.fluid.density, viscosity=viscosity)
    return float(mean_absolute(solve(flow.measured, quantity=flow.quantity, tube=flow.tube, fluid=fluid).wall_shear_stress.coefficients))


def _consequence(flow: Any, apparent: float) -> str:
    """What the apparent viscosity would do to the wall shear of the same recording."""
    before = float(mean_absolute(flow.wall_shear_stress.coefficients))
    if not flow.mean_known or before == 0:
        return "the wall shear would change in the same sense"
    change = _shear_with(flow, apparent) / before - 1
    return f"the time-averaged wall shear would be about {abs(100 * change):.0f} % {'higher' if change > 0 else 'lower'}"


def newtonian_check(flow: Any, context: Context) -> Check:
    """Apparent viscosity at the mean wall shear rate against the one used."""
    label, used = "Newtonian liquid", flow.fluid.viscosity
    rate = float(mean_absolute(flow.wall_shear_stress.coefficients)) / used
    source = context.newtonian_source or "flow curve of the liquid"
    if context.newtonian_by_kind:
        return Check(
            name="newtonian", label=label, verdict="holds", value=rate, unit="1/s", source="common practice",
            because=f"This liquid is Newtonian at the mean wall shear rate of {rate:.3g} 1/s.",
        )  # fmt: skip
    if context.newtonian is None:
        return Check(
            name="newtonian", label=label, verdict="unknown", value=rate, unit="1/s", source=source,
            because=f"The mean wall shear rate is {rate:.3g} 1/s; state the kind of liquid (fluid.kind) to compare its apparent viscosity there.",
        )  # fmt: skip
    apparent = float(context.newtonian(max(rate, 1e-3)))
    apart = apparent / used - 1
    verdict = "holds" if abs(apart) < _HOLDS else "doubtful" if abs(apart) < _FAILS else "fails"
    heard = judged(verdict, _beyond(context, used))
    return Check(
        name="newtonian", label=label, verdict=heard.verdict, value=apart, limit=_HOLDS, source=source,
        because=f"At the mean wall shear rate of {rate:.3g} 1/s the apparent viscosity is {1e3 * apparent:.3g} mPa·s, {abs(100 * apart):.0f} % "
        f"{'above' if apart > 0 else 'below'} the {1e3 * used:.3g} mPa·s used{heard.words}; with it {_consequence(flow, apparent)}.",
    )  # fmt: skip


def _beyond(context: Context, used: float) -> Any:
    """Per sample, whether the apparent viscosity at its shear rate differs by more than the limit from the one used."""
    rate = context.finding("time_averaged_wall_shear_rate")
    if rate is None or not np.all(np.isfinite(rate)):
        return None
    return np.abs(np.asarray(context.newtonian(np.maximum(rate, 1e-3)), dtype=float) / used - 1) > _HOLDS


def correlation_check(flow: Any) -> Check:
    """Whether every property of the liquid lies where it was measured."""
    beyond = bool(getattr(flow.fluid, "extrapolated", False))
    return Check(
        name="correlation_range", label="Givens within the range of the correlations", verdict="fails" if beyond else "holds",
        because="A property of the liquid was extrapolated beyond the range in which its correlation was measured." if beyond
        else "All properties of the liquid lie within the range in which they were measured, or were given.",
        source="; ".join(getattr(flow.fluid, "sources", ()))[:300] or "given",
    )  # fmt: skip
