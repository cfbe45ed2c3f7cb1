"""Uncertainty through any calculation: Monte Carlo, with the first-order estimate beside it."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from ..errors import InputError
from ..quantities import Given
from .distributions import Input, draw, is_positive, stream, wide_remarks
from .harmonic_draws import covariance_root, multivariate_t
from .intervals import interval, interval_error, one_digit_fixed, shares

__all__ = ["Propagation", "Together", "propagate"]

_APART = 0.2  # relative difference of the two standard uncertainties that is remarked
_STEP = 0.01  # of the standard uncertainty, for derivatives: curvature of the calculation does not enter


@dataclass(frozen=True, eq=False, kw_only=True)
class Together:
    """Inputs that are known together: estimates with a covariance, drawn as a multivariate t.

    Parameters
    ----------
    names : sequence of str
    values : array_like, shape (n,)
        [SI]
    covariance : array_like, shape (n, n)
        Of the estimates; may be singular. [SI squared]
    degrees_of_freedom : float
        Behind the covariance; infinite for normal draws.
    name : str
        Under which the group stands in the shares; its members joined by "+" if not given.
    """

    names: Sequence[str]
    values: ArrayLike
    covariance: ArrayLike
    degrees_of_freedom: float = np.inf
    name: str = ""

    def __post_init__(self) -> None:
        size = len(self.names)
        values, spread = np.array(self.values, dtype=float), np.array(self.covariance, dtype=float)
        if values.shape != (size,) or spread.shape != (size, size):
            raise InputError(
                f"{size} inputs known together need {size} values and a covariance of shape ({size}, {size}); got {values.shape} and {spread.shape}",
                name="covariance",
            )  # fmt: skip
        if not (np.all(np.isfinite(spread)) and np.allclose(spread, spread.T, rtol=1e-9, atol=0.0)):
            raise InputError("a covariance must be finite and symmetric", name="covariance")
        scale = np.sqrt(np.clip(np.diag(spread), 0.0, None))
        safe = np.where(scale > 0, scale, 1.0)
        if np.any(np.diag(spread) < 0) or np.linalg.eigvalsh(spread / np.outer(safe, safe))[0] < -1e-9 * size:
            raise InputError("a covariance cannot have a negative variance in any direction; check its correlations", name="covariance")
        if not self.degrees_of_freedom > 0:
            raise InputError(
                f"degrees_of_freedom = {self.degrees_of_freedom} must be above 0",
                name="degrees_of_freedom",
                value=self.degrees_of_freedom,
                allowed="> 0",
            )
        object.__setattr__(self, "values", values)
        object.__setattr__(self, "covariance", spread)
        object.__setattr__(self, "name", self.name or "+".join(self.names))

    def draw(self, samples: int, rng: np.random.Generator) -> NDArray[np.float64]:
        """Draws, shape (samples, n)."""
        apart = multivariate_t(np.asarray(self.covariance), self.degrees_of_freedom, samples, rng)
        return np.asarray(self.values) + apart


@dataclass(frozen=True, eq=False, kw_only=True)
class Propagation:
    """What came out, by the name of each output.

    Attributes
    ----------
    value : mapping of str to float
        The calculation at the stated inputs. [SI]
    low, high : mapping of str to float or None
        Central 95 % interval; None on an open side. [SI]
    interval_error : mapping of str to (float, float)
        Standard numerical error of low and high. [SI]
    standard_uncertainty : mapping of str to float
        Of the samples. [SI]
    first_order : mapping of str to float
        Standard uncertainty of the first-order estimate (JCGM 100, eq. 13). [SI]
    first_order_covariance : ndarray, shape (n_outputs, n_outputs)
        In the order of the outputs. [SI squared]
    shares : mapping of str to mapping
        Output -> input -> share of the variance (see ``SHARES_DEFINITION``).
    samples : mapping of str to ndarray, shape (S,)
    remarks : tuple of str
    """

    value: Mapping[str, float]
    low: Mapping[str, float | None]
    high: Mapping[str, float | None]
    interval_error: Mapping[str, tuple[float, float]]
    standard_uncertainty: Mapping[str, float]
    first_order: Mapping[str, float]
    first_order_covariance: NDArray[np.float64]
    shares: Mapping[str, Mapping[str, float]]
    samples: Mapping[str, NDArray[np.float64]] = field(repr=False)
    remarks: tuple[str, ...] = ()

    @property
    def first_order_correlation(self) -> NDArray[np.float64]:
        """Correlation of the outputs by first order, shape (n_outputs, n_outputs); 0 where an output is exact."""
        spread = np.sqrt(np.diag(self.first_order_covariance))
        product = np.outer(spread, spread)
        return np.divide(self.first_order_covariance, product, out=np.zeros_like(product), where=product > 0)


Calculation = Callable[..., Any]


def _inputs(inputs: Mapping[str, Given | Input | float]) -> dict[str, Input]:
    found = {}
    for name, entry in inputs.items():
        if isinstance(entry, Input):
            found[name] = entry
        elif isinstance(entry, Given):
            found[name] = Input(entry, is_positive(entry, name))
        else:
            found[name] = Input(Given(value=float(entry), text=str(entry)), False)
    return found


def _outputs(function: Calculation, values: Mapping[str, NDArray[np.float64]], size: int) -> dict[str, NDArray[np.float64]]:
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        found = function(**values)
    rows = found if isinstance(found, Mapping) else {"result": found}
    return {str(name): np.broadcast_to(np.asarray(row, dtype=float), (size,)) for name, row in rows.items()}


def _first_order(
    function: Calculation, nominal: Mapping[str, float], alone: Mapping[str, Input], groups: Sequence[Together]
) -> dict[str, NDArray[np.float64]]:
    """Contribution of each independent direction to each output: derivative times one standard deviation."""
    directions: list[dict[str, float]] = [
        {name: entry.given.standard_uncertainty} for name, entry in alone.items() if entry.given.standard_uncertainty
    ]
    for group in groups:
        directions += [dict(zip(group.names, column, strict=True)) for column in covariance_root(np.asarray(group.covariance)).T]
    size = 2 * len(directions)
    values = {name: np.full(size, value) for name, value in nominal.items()}
    for place, direction in enumerate(directions):
        for name, step in direction.items():
            values[name][2 * place] += _STEP * step
            values[name][2 * place + 1] -= _STEP * step
    found = _outputs(function, values, size)
    return {name: (row[0::2] - row[1::2]) / (2 * _STEP) for name, row in found.items()}


def propagate(
    function: Calculation,
    inputs: Mapping[str, Given | Input | float],
    *,
    together: Sequence[Together] = (),
    samples: int = 10_000,
    seed: int = 20260,
) -> Propagation:
    """Carry the uncertainty of inputs through a calculation.

    Parameters
    ----------
    function : callable
        Takes every input by keyword as an array of shape (S,) and returns an array of shape (S,), or a mapping of
        name to such arrays.
    inputs : mapping of str to Given, Input or float
        A Given that cannot be negative by its dimension is drawn log-normal; a plain number is exact. [SI]
    together : sequence of Together
        Groups of inputs that are known with a covariance.
    samples : int
        At least 100.
    seed : int

    Returns
    -------
    Propagation

    Raises
    ------
    InputError
        If an input stands twice, samples are too few, or the calculation gives nothing at the stated inputs.

    Notes
    -----
    Monte Carlo after JCGM 101:2008, central intervals. The first-order estimate is that of JCGM 100:2008, 5.1 and 5.2,
    with derivatives by central differences of a hundredth of the standard uncertainty. Where the two standard
    uncertainties differ by more than 20 %, a remark says so; that of the samples is half of their central 68 %.

    Examples
    --------
    >>> from pulsekit.quantities import parse_given
    >>> poiseuille = lambda radius, flow, viscosity: 4 * viscosity * flow / (np.pi * radius**3)
    >>> shear = propagate(poiseuille, {
    ...     "radius": parse_given("3.1 mm ± 2 %", "length"), "flow": parse_given("400 mL/min ± 5 %", "flow_rate"),
    ...     "viscosity": parse_given("3.5 mPa*s ± 5 %", "viscosity")})
    >>> round(100 * shear.first_order["result"] / shear.value["result"], 2)
    9.27
    """
    if samples < 100:
        raise InputError(f"samples = {samples} must be at least 100", name="samples", value=samples, allowed=">= 100")
    alone = _inputs(inputs)
    twice = [name for group in together for name in group.names if name in alone]
    if twice:
        raise InputError(f"{twice[0]} is given alone and together with others; give it once", name=twice[0])
    nominal = {name: entry.given.value for name, entry in alone.items()}
    values = {
        name: draw(entry.given, stream(seed, entry.identity or name), samples, positive=entry.positive) for name, entry in alone.items()
    }
    table = {name: values[name] for name, entry in alone.items() if entry.given.standard_uncertainty > 0}
    for group in together:
        nominal |= {name: float(value) for name, value in zip(group.names, np.asarray(group.values), strict=True)}
        cloud = group.draw(samples, stream(seed, group.name))
        values |= {name: np.ascontiguousarray(column) for name, column in zip(group.names, cloud.T, strict=True)}
        table[group.name] = cloud
    at = {name: float(row[0]) for name, row in _outputs(function, {k: np.array([v]) for k, v in nominal.items()}, 1).items()}
    missing = [name for name, value in at.items() if not np.isfinite(value)]
    if missing:
        raise InputError(f"{missing[0]} has no finite value at the stated inputs; check them", name=missing[0])
    found = _outputs(function, values, samples)
    parts = _first_order(function, nominal, alone, together)
    stacked = np.stack([parts[name] for name in at])
    ends = {name: interval(row) for name, row in found.items()}
    first = {name: float(np.sqrt(np.sum(part**2))) for name, part in parts.items()}
    spread = {name: float(row[np.isfinite(row)].std()) for name, row in found.items()}
    return Propagation(
        value=at, low={name: low for name, (low, _) in ends.items()}, high={name: high for name, (_, high) in ends.items()},
        interval_error={name: interval_error(row) for name, row in found.items()}, standard_uncertainty=spread, first_order=first,
        first_order_covariance=stacked @ stacked.T, shares=shares(found, table), samples=found,
        remarks=(*wide_remarks(alone), *_words(found, first, samples)),
    )  # fmt: skip


def _words(found: Mapping[str, NDArray[np.float64]], first: Mapping[str, float], samples: int) -> list[str]:
    rows = []
    for name, row in found.items():
        good = row[np.isfinite(row)]
        if good.size < row.size:
            rows.append(
                f"{name}: {row.size - good.size} of {samples} samples have no finite value; its interval is open or missing for that reason."
            )
        if good.size < 2:
            continue
        full = 0.5 * float(np.diff(np.quantile(good, (0.1587, 0.8413)))[0])
        if full > 0 and abs(first[name] / full - 1) > _APART:
            rows.append(
                f"{name}: the first-order standard uncertainty {first[name]:.3g} differs from the {full:.3g} of the samples by over 20 %."
            )
        if not one_digit_fixed(row):
            rows.append(
                f"{name}: {samples} samples do not fix the ends of its interval to one significant digit (JCGM 101, 7.9.2); use more."
            )
    return rows
