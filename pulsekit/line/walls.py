"""Wave speed of a pipe or hose from its wall and liquid, or as given."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from ..exact.waves import liquid_speed, wall_factor, wave_speed_in_pipe
from .medium import Medium

__all__ = ["hose_speed", "pipe_speed"]

_STEEL_POISSON = 0.3  # common practice


def pipe_speed(medium: Medium, values: Mapping[str, Any], radius: Any, anchoring: str) -> Any:
    """Wave speed of a pipe [m/s]: as given; by Korteweg where the wall is given; of the liquid in a rigid wall else."""
    if "wave_speed" in values:
        return values["wave_speed"]
    modulus, density = medium.stiffness()
    if "young_modulus" not in values:
        return liquid_speed(bulk_modulus=modulus, density=density)
    thickness = values["wall_thickness"]
    factor = wall_factor(
        diameter=2 * np.asarray(radius), wall_thickness=thickness, poisson_ratio=values.get("poisson_ratio", _STEEL_POISSON), anchoring=anchoring
    )
    return wave_speed_in_pipe(
        bulk_modulus=modulus, density=density, diameter=2 * np.asarray(radius), wall_thickness=thickness, young_modulus=values["young_modulus"], factor=factor
    )


def hose_speed(medium: Medium, values: Mapping[str, Any], radius: Any) -> Any:
    """Complex wave speed of a hose [m/s]: the wall's modulus is E (1 + i eta).

    A given real speed is that without loss; its wall's share of the compliance carries the loss.
    """
    loss = 1j * np.asarray(values.get("loss_factor", 0.0))
    if "wave_speed" in values:
        given = np.asarray(values["wave_speed"], float)
        # rho c^2 = 1/(1/K + 1/W): what is left after the liquid's share is the wall's.
        total = 1.0 / (medium.density * given**2)
        liquid = 0.0 if medium.bulk_modulus is None else 1.0 / np.asarray(medium.bulk_modulus)
        wall = np.where(total > liquid, total - liquid, 0.0)
        return 1.0 / np.sqrt(medium.density * (total - wall + wall / (1 + loss)))
    modulus, density = medium.stiffness()
    return wave_speed_in_pipe(
        bulk_modulus=modulus, density=density, diameter=2 * np.asarray(radius), wall_thickness=values["wall_thickness"],
        young_modulus=np.asarray(values["young_modulus"]) * (1 + loss),
    )  # fmt: skip
