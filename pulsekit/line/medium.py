"""The liquid and the operating point as every element sees them: floats, or arrays of samples beside the frequency axis."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from ..errors import InputError
from ..exact.waves import mixture_speed
from ..fluids.gas import gas_fraction_at_pressure

__all__ = ["Medium", "refuse_bare_gas"]


@dataclass(frozen=True, eq=False, kw_only=True)
class Medium:
    """Density [kg/m^3], viscosity [Pa s], bulk modulus [Pa] or None, mean flow [m^3/s], mean pressure [Pa, absolute] or None.

    Arrays of samples have the shape (S, 1), so that they broadcast against the frequency axis.
    """

    density: Any
    viscosity: Any
    bulk_modulus: Any = None
    mean_flow: Any = 0.0
    pressure: Any = None
    temperature: float = 293.15
    gas_at_atmosphere: Any = 0.0
    gas_at_line_pressure: Any = 0.0

    @property
    def flow_or_none(self) -> Any:
        """Mean flow, or 0 where none is known (friction in pipes is laminar then)."""
        return 0.0 if self.mean_flow is None else self.mean_flow

    @property
    def has_gas(self) -> bool:
        """Tell whether there is free gas."""
        return bool(np.any(np.asarray(self.gas_at_atmosphere) > 0) or np.any(np.asarray(self.gas_at_line_pressure) > 0))

    def stiffness(self, pressure: Any = None) -> tuple[Any, Any]:
        """Bulk modulus [Pa] and density [kg/m^3] of the liquid with its free gas at an absolute pressure.

        Raises
        ------
        InputError
            If the bulk modulus is not known, or free gas has no pressure to be squeezed to.
        """
        if self.bulk_modulus is None:
            raise InputError(
                "the liquid has no bulk_modulus, which this element needs; give fluid.bulk_modulus, or the element's wave_speed", name="fluid.bulk_modulus"
            )
        if not self.has_gas:
            return self.bulk_modulus, self.density
        at = self.pressure if pressure is None else pressure
        if at is None:
            raise InputError("free gas needs the mean_pressure of the line", name="mean_pressure")
        fraction = self.gas_at_line_pressure
        if np.any(np.asarray(self.gas_at_atmosphere) > 0):
            fraction = gas_fraction_at_pressure(self.gas_at_atmosphere, at)
        speed = mixture_speed(gas_fraction=fraction, pressure=at, bulk_modulus=self.bulk_modulus, density=self.density, gas_density=0.0)
        density = (1 - np.asarray(fraction)) * self.density
        return density * speed**2, density


def refuse_bare_gas(fraction: float, medium: Medium) -> InputError:
    """Return the error that asks at which pressure a gas fraction holds, with the wave speed under both readings."""
    words = []
    for name in ("gas_at_atmosphere", "gas_at_line_pressure"):
        try:
            modulus, density = Medium(
                density=medium.density, viscosity=medium.viscosity, bulk_modulus=medium.bulk_modulus, pressure=medium.pressure, **{name: fraction}
            ).stiffness()
            words.append(f"{float(np.sqrt(modulus / density)):.4g} m/s")
        except InputError:
            words.append("not known")
    return InputError(
        f"gas_fraction = {fraction:g}: at which pressure? Write gas_fraction_at_atmosphere (as laboratories quote it; wave speed of the liquid {words[0]}) or "
        f"gas_fraction_at_line_pressure ({words[1]})",
        name="fluid.gas_fraction", value=fraction,
    )  # fmt: skip
