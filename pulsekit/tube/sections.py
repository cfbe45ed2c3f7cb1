"""Cross-sections: each supplies its area, factors and profile; the flow does not know which one it has."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from ..errors import InputError
from ..exact import womersley
from ..exact.profile_table import profile_table
from ..quantities import Given, parse_given

__all__ = ["CircularTube"]

_SUSPICIOUS_RADIUS = 0.5  # [m]; a larger tube is more often a slip of the unit
_NONE: Mapping[str, Given] = MappingProxyType({})


@dataclass(frozen=True, eq=False, init=False)
class CircularTube:
    """A round tube.

    Exactly one of ``radius``, ``diameter``, or ``outer_diameter`` with ``wall_thickness``.

    Parameters
    ----------
    radius, diameter : float or str, optional
        Inner. [m]
    outer_diameter, wall_thickness : float or str, optional
        [m]

    Raises
    ------
    InputError
        If not exactly one of the three ways is used, or a size is not positive.

    Examples
    --------
    >>> CircularTube(diameter="6.2 mm").radius
    0.0031
    """

    radius: float
    givens: Mapping[str, Given]
    remarks: tuple[str, ...]

    def __init__(
        self,
        radius: Any = None,
        *,
        diameter: Any = None,
        outer_diameter: Any = None,
        wall_thickness: Any = None,
    ) -> None:
        ways = {"radius": radius, "diameter": diameter, "outer_diameter": outer_diameter, "wall_thickness": wall_thickness}
        named = {name: value for name, value in ways.items() if value is not None}
        if set(named) not in ({"radius"}, {"diameter"}, {"outer_diameter", "wall_thickness"}):
            raise InputError(
                "a round tube needs exactly one of radius, diameter, or outer_diameter with wall_thickness; "
                f"given: {', '.join(named) or 'none'}",
                name="radius", allowed="one of radius, diameter, outer_diameter with wall_thickness",
            )  # fmt: skip
        givens = {name: parse_given(value, "length", name) for name, value in named.items()}
        for name, given in givens.items():
            if given.value <= 0:
                raise InputError(f"{name} = {given.text} must be above 0", name=name, value=given.value, allowed="> 0")
        inner = radius_of({name: given.value for name, given in givens.items()})
        if not inner > 0:
            raise InputError(
                f"outer_diameter = {givens['outer_diameter'].text} leaves no bore inside a wall of {givens['wall_thickness'].text}",
                name="wall_thickness", value=givens["wall_thickness"].value,
            )  # fmt: skip
        remarks: tuple[str, ...] = ()
        if inner > _SUSPICIOUS_RADIUS:
            remarks = (f"The radius of {inner:.4g} m is suspiciously large for a tube; was another unit meant?",)
        object.__setattr__(self, "radius", inner)
        object.__setattr__(self, "givens", MappingProxyType(givens))
        object.__setattr__(self, "remarks", remarks)

    @property
    def diameter(self) -> float:
        """Inner diameter [m]."""
        return 2 * self.radius

    @property
    def area(self) -> float:
        """Area of the bore [m^2]."""
        return float(np.pi * self.radius**2)

    @property
    def length_scale(self) -> float:
        """The length in the Womersley number: the radius [m]."""
        return self.radius

    def pressure_factor(self, alpha: ArrayLike) -> Any:
        """G R^2/(mu U). [-]"""
        return womersley.pressure_factor(alpha)

    def shear_factor(self, alpha: ArrayLike) -> Any:
        """Tau R/(mu U). [-]"""
        return womersley.shear_factor(alpha)

    def profile(self, alpha: ArrayLike, x: ArrayLike) -> Any:
        """u(x)/U at x = r/R; a column of radii against a row of harmonics is one table. [-]"""
        numbers, places = np.asarray(alpha, dtype=float), np.asarray(x, dtype=float)
        if numbers.ndim == 1 and places.ndim == 2 and places.shape[1] == 1:
            return profile_table(numbers, places[:, 0])
        return womersley.velocity_profile(numbers, places)

    def centreline_ratio(self, alpha: ArrayLike) -> Any:
        """u(0)/U. [-]"""
        return womersley.centreline_ratio(alpha)

    def __repr__(self) -> str:
        return f"CircularTube(radius={self.radius!r})"

    def __eq__(self, other: object) -> bool:
        return isinstance(other, CircularTube) and self.radius == other.radius

    def __hash__(self) -> int:
        return hash(self.radius)


def radius_of(sizes: Mapping[str, Any]) -> Any:
    """Inner radius from the sizes that were given, floats or arrays of samples. [m]"""
    if "radius" in sizes:
        return sizes["radius"]
    if "diameter" in sizes:
        return sizes["diameter"] / 2
    return sizes["outer_diameter"] / 2 - sizes["wall_thickness"]
