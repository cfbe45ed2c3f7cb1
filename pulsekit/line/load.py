"""A load as a pair (p, q) per frequency, up to a common factor: an open end and a closed one are as plain as any impedance.

Pairs are scaled to unit size, so that nothing overflows however long the line.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

__all__ = ["Load"]


class Load(NamedTuple):
    """Pressure [Pa] and flow [m^3/s] into what lies downstream, up to a common factor."""

    pressure: Any
    flow: Any

    @property
    def impedance(self) -> Any:
        """Pressure over flow; infinite for a closed end. [Pa s/m^3]"""
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.asarray(self.pressure) / np.asarray(self.flow)

    def behind(self, series: Any) -> Load:
        """Return the load with a series impedance before it."""
        return scaled(self.pressure + series * self.flow, self.flow)

    def beside(self, branch: Load) -> Load:
        """Return the load with a branch beside it: same pressure, flows added."""
        return scaled(self.pressure * branch.pressure, self.flow * branch.pressure + self.pressure * branch.flow)

    def reflection(self, impedance: Any) -> Any:
        """Reflected over arriving pressure wave in a pipe of a characteristic impedance."""
        return (self.pressure - impedance * self.flow) / (self.pressure + impedance * self.flow)


def scaled(pressure: Any, flow: Any) -> Load:
    """Return the pair divided by the larger of its two numbers."""
    p, q = np.asarray(pressure, complex), np.asarray(flow, complex)
    size = np.maximum(np.abs(p), np.abs(q))
    factor = 1.0 / np.where(size > 0, size, 1.0)
    return Load(p * factor, q * factor)
