"""Which cycles do not look like the others."""

from __future__ import annotations

import warnings
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

__all__ = ["odd_cycles"]

_FAR = 6.0  # robust standard deviations
_TYPICAL = 1.6  # times the others' median difference, which noise alone does not reach
_SHAPE = 0.25  # share of the typical swing that a difference must reach to matter
_LENGTH = 0.20  # relative difference in length that must be reached to matter


def odd_cycles(folded: NDArray[np.float64], periods: NDArray[np.float64], index: Sequence[int]) -> list[tuple[int, str]]:
    """Return (index, reason) of each odd cycle.

    A cycle is odd where its difference from the median cycle (rms over the swing's rms), or its length,
    lies more than six robust standard deviations outside, and the difference is large enough to matter.
    """
    with warnings.catch_warnings():
        # No cycle may reach the last phases.
        warnings.simplefilter("ignore", RuntimeWarning)
        middle = np.nanmedian(folded, axis=0)
    swing = float(np.nanstd(middle))
    if swing == 0:
        return []
    apart = np.sqrt(np.nanmean((folded - middle) ** 2, axis=1)) / swing
    typical = float(np.median(periods))
    length = (periods - typical) / typical
    found = []
    for place, number in enumerate(index):
        others = np.delete(apart, place)
        limit = float(np.median(others) + _FAR * 1.4826 * np.median(np.abs(others - np.median(others))))
        if apart[place] > max(limit, _SHAPE, _TYPICAL * float(np.median(others))):
            found.append((number, f"does not look like the others (differs by {100 * apart[place]:.0f} % of the swing, rms)"))
            continue
        spread = _FAR * 1.4826 * float(np.median(np.abs(np.delete(length, place))))
        if abs(length[place]) > max(spread, _LENGTH):
            found.append((number, f"is {abs(100 * length[place]):.0f} % {'longer' if length[place] > 0 else 'shorter'} than the median"))
    # When a third or more look odd, there is no 'others' to differ from.
    return found if 3 * len(found) <= len(index) else []
