"""What the checks of a tube may know of the case, and what its samples say of a limit."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

__all__ = ["Context", "Judged", "judged"]

_MANY = 0.05  # share of the samples beyond a limit from which a check that holds at the stated givens is doubtful


@dataclass(frozen=True, kw_only=True)
class Context:
    """What is known of the case beyond the flow itself; None where nobody said.

    Lengths in metres, wall motion as change of the radius over its mean, ``newtonian`` a function from shear rate
    [1/s] to apparent viscosity [Pa s] with its name in ``newtonian_source``. ``samples`` are those of the findings;
    ``check_samples`` those of uncertain inputs of the checks alone, by field name.
    """

    tube_length: float | None = None
    distance_from_inlet: float | None = None
    bend_radius: float | None = None
    wall_motion: float | None = None
    axisymmetric: bool | None = None
    newtonian: Any = None
    newtonian_source: str = ""
    newtonian_by_kind: bool = False
    cycles: Any = None
    harmonics: Any = None
    signal: Any = None
    quantity: str = ""
    sample_volume: str | None = None
    antialias_filter: float | None = None
    instrument_known: bool = False
    samples: Mapping[str, Any] | None = None
    check_samples: Mapping[str, Any] = field(default_factory=dict)
    wave_alone: bool = False

    def finding(self, name: str) -> NDArray[np.float64] | None:
        """Samples of a finding, or None."""
        return None if self.samples is None or name not in self.samples else np.asarray(self.samples[name], dtype=float)

    def spread(self, name: str) -> Any:
        """Samples of an input of the checks where it is uncertain, else its value."""
        return self.check_samples.get(name, getattr(self, name))


@dataclass(frozen=True)
class Judged:
    """A verdict that has heard the samples, and what is to be said of them."""

    verdict: str
    words: str


def judged(verdict: str, beyond: ArrayLike | None) -> Judged:
    """Hear the samples: "; fails in 31 % of the samples", and a verdict that is no better than doubtful where more than 5 % fail.

    Parameters
    ----------
    verdict : str
        At the stated givens.
    beyond : array_like of bool, optional
        Per sample, whether the limit is passed; None or a single value where nothing is uncertain.

    Examples
    --------
    >>> judged("holds", [True] * 31 + [False] * 69)
    Judged(verdict='doubtful', words='; fails in 31 % of the samples')
    >>> judged("holds", None)
    Judged(verdict='holds', words='')
    """
    if beyond is None:
        return Judged(verdict, "")
    failing = np.atleast_1d(np.asarray(beyond, dtype=bool))
    share = float(failing.mean())
    if failing.size < 2 or share in (0.0, 1.0):
        return Judged(verdict, "")
    percent = f"{100 * share:.0f}" if 0.005 <= share <= 0.995 else "under 1" if share < 0.5 else "over 99"
    return Judged("doubtful" if verdict == "holds" and share > _MANY else verdict, f"; fails in {percent} % of the samples")
