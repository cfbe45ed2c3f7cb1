"""Viscosity index: from it the viscosity at 100 °C, and back."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from ..errors import OutOfRangeError
from .ranges import plain

__all__ = ["viscosity_at_100", "viscosity_index"]

# ASTM D2270 (ISO 2909): L and H, the viscosities at 40 °C of the oils of index 0 and 100 that share the viscosity Y at
# 100 °C, as quadratics over ranges of Y [mm^2/s]; columns: lower end of Y; a, b, c of L; d, e, f of H (from memory; the
# tests compare printed values and the joints).
_REFERENCE_OILS = np.array(
    [
        [2.0, 1.14673, 1.7576, -0.109, 0.84155, 1.5521, -0.077],
        [3.8, 3.38095, -15.4952, 33.196, 0.78571, 1.7929, -0.183],
        [4.4, 2.5000, -7.2143, 13.812, 0.82143, 1.5679, 0.119],
        [5.0, 0.10100, 16.6350, -45.469, 0.04985, 9.1613, -18.557],
        [6.4, 3.35714, -23.5643, 78.466, 0.22619, 7.7369, -16.656],
        [7.0, 0.01191, 21.4750, -72.870, 0.79762, -0.7321, 14.610],
        [7.7, 0.41858, 16.1558, -56.040, 0.05794, 10.5156, -28.240],
        [9.0, 0.88779, 7.5527, -16.600, 0.26665, 6.7015, -10.810],
        [12.0, 0.76720, 10.7972, -38.180, 0.20073, 8.4658, -22.490],
        [15.0, 0.97305, 5.3135, -2.200, 0.28889, 5.9741, -4.930],
        [18.0, 0.97256, 5.2500, -0.980, 0.24504, 7.4160, -16.730],
        [22.0, 0.91413, 7.4759, -21.820, 0.20323, 9.1267, -34.230],
        [28.0, 0.87031, 9.7157, -50.770, 0.18411, 10.1015, -46.750],
        [40.0, 0.84703, 12.6752, -133.310, 0.17029, 11.4866, -80.620],
        [55.0, 0.85921, 11.1009, -83.190, 0.17130, 11.3680, -76.940],
        [70.0, 0.83531, 14.6731, -216.246, 0.16841, 11.8493, -96.947],
    ]
)
_HIGHEST = 2000.0  # thicker at 100 °C than any oil of trade


def _reference(at_100: Any) -> tuple[Any, Any, Any, Any]:
    """L and H at Y, and their slopes over Y."""
    row = np.searchsorted(_REFERENCE_OILS[:, 0], at_100, side="right") - 1
    a, b, c, d, e, f = (column[row] for column in _REFERENCE_OILS.T[1:])
    return (a * at_100 + b) * at_100 + c, (d * at_100 + e) * at_100 + f, 2 * a * at_100 + b, 2 * d * at_100 + e


def _at_40(at_100: Any, index: Any) -> tuple[Any, Any]:
    """Viscosity at 40 °C, and its logarithmic slope over the viscosity at 100 °C."""
    low, high, low_slope, high_slope = _reference(at_100)
    power = np.log10(1.0 + 0.00715 * np.maximum(index - 100.0, 0.0))
    share = 0.01 * np.minimum(index, 100.0)
    straight = low - share * (low - high)
    slope = at_100 * (low_slope - share * (low_slope - high_slope)) / straight
    return straight * at_100**-power, slope - power


def viscosity_index(at_40: ArrayLike, at_100: ArrayLike) -> Any:
    """Viscosity index of an oil from its kinematic viscosities at 40 and 100 °C.

    Parameters
    ----------
    at_40, at_100 : array_like
        ``at_100`` from 2e-6 to 2e-3. [m^2/s]

    Returns
    -------
    float or ndarray
        [-]; in the standard rounded to whole numbers, here not.

    References
    ----------
    .. [1] ASTM D2270 / ISO 2909, procedures A (to 100) and B (above); coefficients of L and H from memory.

    Examples
    --------
    >>> round(viscosity_index(73.30e-6, 8.86e-6))
    92
    """
    u, y = np.asarray(at_40, float) * 1e6, np.asarray(at_100, float) * 1e6
    _check(y)
    low, high, _, _ = _reference(y)
    straight = 100.0 * (low - u) / (low - high)
    above = 100.0 + (10.0 ** (np.log(np.minimum(high / u, 1e30)) / np.log(y)) - 1.0) / 0.00715
    return plain(np.where(u < high, above, straight))


def viscosity_at_100(at_40: ArrayLike, index: ArrayLike) -> Any:
    """Kinematic viscosity at 100 °C of the oil that has a viscosity at 40 °C and a viscosity index.

    Newton's steps between logarithms, to 1e-12; at the joints of the pieces of the standard, which meet within 0.2 %, to that.

    Parameters
    ----------
    at_40 : array_like
        [m^2/s]
    index : array_like
        Viscosity index, -100 to 400. [-]

    Returns
    -------
    float or ndarray
        [m^2/s]

    Raises
    ------
    OutOfRangeError
        If the viscosity at 100 °C would be below 2 mm^2/s, where the index is not defined.

    Examples
    --------
    >>> f"{viscosity_at_100(46e-6, 100.0) * 1e6:.2f} mm2/s"
    '6.76 mm2/s'
    """
    u, index = np.broadcast_arrays(np.asarray(at_40, float) * 1e6, np.asarray(index, float))
    if np.any(~((index >= -100.0) & (index <= 400.0))):
        raise OutOfRangeError(
            f"viscosity_index = {index[~((index >= -100.0) & (index <= 400.0))].flat[0]:g} is no index of an oil (mineral oils about 100, at most 400); check it",
            name="viscosity_index", value=float(index.flat[0]), low=-100.0, high=400.0,
        )  # fmt: skip
    if np.any(_at_40(np.full_like(u, 2.0), index)[0] > u * 1.001):
        raise OutOfRangeError(
            f"viscosity at 40 °C = {u.min():.3g} mm²/s is too thin for a viscosity index (below 2 mm²/s at 100 °C); give viscosity_at_100 instead",
            name="viscosity_at_40", value=float(u.min()) * 1e-6,
        )  # fmt: skip
    y = np.clip(0.9 * u**0.55, 2.0, _HIGHEST)
    for _ in range(7):
        reached, slope = _at_40(y, index)
        y = np.clip(y * np.exp(np.log(u / reached) / slope), 2.0, _HIGHEST)
    return plain(1e-6 * y)


def _check(at_100: Any) -> None:
    if np.any(~((at_100 >= 2.0) & (at_100 <= _HIGHEST))):
        raise OutOfRangeError(
            f"viscosity at 100 °C = {np.min(at_100):.3g} mm²/s lies outside 2 to {_HIGHEST:.0f} mm²/s, where a viscosity index is defined",
            name="viscosity_at_100", value=float(np.min(at_100)) * 1e-6, low=2e-6, high=_HIGHEST * 1e-6,
        )  # fmt: skip
