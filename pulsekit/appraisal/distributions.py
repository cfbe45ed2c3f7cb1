"""How an uncertain given is distributed, and how it is drawn.

A positive quantity with a standard uncertainty is log-normal with the stated mean and standard deviation; a
signed one is normal; "(limits)" is rectangular. Each input has a random stream of its own, made from the seed
and its key: adding an input does not change the draws of the others, and two cases that share a given share its
draws.
"""

from __future__ import annotations

import hashlib
from collections.abc import Mapping
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from ..errors import InputError
from ..quantities import Given

__all__ = ["Input", "draw", "draw_inputs", "stream", "wide_remarks"]

_POSITIVE = frozenset({"length", "area", "volume", "time", "frequency", "density", "viscosity", "kinematic_viscosity", "temperature"})


class Input(NamedTuple):
    """An uncertain input: what was given, whether it must stay positive, and the identity by which it is shared."""

    given: Given
    positive: bool = True
    identity: str = ""


def stream(seed: int, key: str) -> np.random.Generator:
    """Random numbers of one input, the same whatever other inputs there are."""
    word = int.from_bytes(hashlib.sha256(key.encode()).digest()[:8], "little")
    return np.random.Generator(np.random.PCG64(np.random.SeedSequence([seed, word])))


def draw(given: Given, rng: np.random.Generator, samples: int, *, positive: bool = True) -> NDArray[np.float64]:
    """Draw samples of a given.

    Parameters
    ----------
    given : Given
    rng : Generator
    samples : int
    positive : bool
        The quantity cannot be zero or negative.

    Returns
    -------
    ndarray, shape (samples,)
        [SI]

    Examples
    --------
    >>> from pulsekit.quantities import parse_given
    >>> cloud = draw(parse_given("3 mm ± 10 %", "length"), stream(1, "r"), 100_000)
    >>> round(float(cloud.mean()) * 1e3, 2), round(float(cloud.std()) * 1e3, 2)
    (3.0, 0.3)
    """
    if given.standard_uncertainty == 0.0:
        return np.full(samples, given.value)
    if positive and given.value <= 0:
        raise InputError(f"{given.text} must be above 0 to be drawn as a positive quantity", name="given", value=given.value, allowed="> 0")
    if given.shape == "rectangular":
        half = given.standard_uncertainty * np.sqrt(3.0)
        if not positive or half < given.value:
            return given.value + half * rng.uniform(-1.0, 1.0, samples)
    if positive:
        spread = np.log1p(given.relative_uncertainty**2)
        return np.asarray(given.value * np.exp(np.sqrt(spread) * rng.standard_normal(samples) - spread / 2))
    return given.value + given.standard_uncertainty * rng.standard_normal(samples)


def draw_inputs(inputs: Mapping[str, Input], samples: int, seed: int) -> dict[str, NDArray[np.float64]]:
    """Draw every input by its own stream; inputs of one identity get the same underlying numbers."""
    return {key: draw(entry.given, stream(seed, entry.identity or key), samples, positive=entry.positive) for key, entry in inputs.items()}


def wide_remarks(inputs: Mapping[str, Input]) -> list[str]:
    """Remarks on uncertainties as large as the value, and on limits that reach below zero."""
    rows = []
    for key, (given, positive, _) in inputs.items():
        if not positive or given.standard_uncertainty == 0:
            continue
        if given.relative_uncertainty > 1:
            rows.append(f"{key} = {given.text}: the uncertainty is larger than the value; the log-normal distribution used is very skewed.")
        elif given.shape == "rectangular" and given.relative_uncertainty * np.sqrt(3.0) >= 1:
            rows.append(
                f"{key} = {given.text}: the limits reach below zero; a log-normal distribution of the same mean and deviation was used."
            )
    return rows


def is_positive(given: Given, key: str) -> bool:
    """Tell whether a given must stay positive: by its dimension, unless it is an offset, a height or a position."""
    last = key.rpartition(".")[2]
    if last in ("height", "position", "offset_uncertainty", "background_velocity", "delay", "trigger_angle", "mean_flow", "zero"):
        return False
    return given.dimension in _POSITIVE or given.value > 0
