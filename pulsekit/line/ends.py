"""Ends of a line: what waves meet there. Mean flow passes every end."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Any

import numpy as np

from ..errors import InputError
from ..quantities import Given, parse_given
from .elements import Restrictor
from .load import Load, scaled
from .medium import Medium

__all__ = ["ClosedEnd", "End", "ImpedanceEnd", "MatchedEnd", "OpenEnd", "RestrictorEnd"]

_NONE: Mapping[str, Given] = MappingProxyType({})


@dataclass(frozen=True, eq=False)
class End:
    """What all ends share."""

    givens: Mapping[str, Given] = field(default_factory=lambda: _NONE)

    kind = "end"

    @property
    def values(self) -> dict[str, float]:
        """The end's own numbers [SI]."""
        return {key: given.value for key, given in self.givens.items()}

    def load(self, omega: Any, medium: Medium, values: Mapping[str, Any], last: Any, last_values: Mapping[str, Any]) -> Load:
        """Return the load; ``last`` is the last pipe or hose before the end."""
        raise NotImplementedError

    def steady_drop(self, flow: Any, medium: Medium, values: Mapping[str, Any]) -> Any:
        """Return the steady pressure drop across the end [Pa]."""
        return 0.0 * np.asarray(flow, float)


def _ones(omega: Any) -> Any:
    return np.ones(np.shape(omega), dtype=complex)


class ClosedEnd(End):
    """No pulsating flow passes."""

    kind = "closed"

    def __init__(self) -> None:
        super().__init__()

    def load(self, omega: Any, medium: Medium, values: Mapping[str, Any], last: Any, last_values: Mapping[str, Any]) -> Load:
        """Pressure without flow."""
        return Load(_ones(omega), 0 * _ones(omega))


class OpenEnd(End):
    """Open to a tank: no pulsating pressure."""

    kind = "open"

    def __init__(self) -> None:
        super().__init__()

    def load(self, omega: Any, medium: Medium, values: Mapping[str, Any], last: Any, last_values: Mapping[str, Any]) -> Load:
        """Flow without pressure."""
        return Load(0 * _ones(omega), _ones(omega))


class MatchedEnd(End):
    """Nothing comes back: the complex characteristic impedance of the last pipe, friction included."""

    kind = "matched"

    def __init__(self) -> None:
        super().__init__()

    def load(self, omega: Any, medium: Medium, values: Mapping[str, Any], last: Any, last_values: Mapping[str, Any]) -> Load:
        """The last pipe's own impedance."""
        if last is None:
            raise InputError("a matched end needs a pipe or hose before it", name="end.kind")
        _, impedance = last.line_constants(omega, medium, last_values)
        return scaled(impedance, _ones(omega))


class ImpedanceEnd(End):
    """Any impedance.

    Parameters
    ----------
    impedance : complex, str or callable
        Constant [Pa s/m^3], or a function of the frequency [Hz] that returns it.
    """

    kind = "impedance"

    def __init__(self, impedance: Any) -> None:
        function = impedance if callable(impedance) else None
        givens: Mapping[str, Given] = _NONE
        constant: complex = 0j
        if function is None:
            if isinstance(impedance, complex):
                constant = impedance
            else:
                given = parse_given(impedance, "impedance", "impedance")
                givens, constant = MappingProxyType({"impedance": given}), complex(given.value)
            if not np.isfinite(constant):
                raise InputError(f"impedance = {impedance!r} must be finite; use ClosedEnd() for an infinite one", name="impedance", value=impedance)
        super().__init__(givens)
        object.__setattr__(self, "function", function)
        object.__setattr__(self, "constant", constant)

    def load(self, omega: Any, medium: Medium, values: Mapping[str, Any], last: Any, last_values: Mapping[str, Any]) -> Load:
        """The impedance itself."""
        if self.function is not None:  # type: ignore[attr-defined]
            return scaled(np.asarray(self.function(np.asarray(omega) / (2 * np.pi)), complex), _ones(omega))  # type: ignore[attr-defined]
        return scaled(values.get("impedance", self.constant) * _ones(omega), _ones(omega))  # type: ignore[attr-defined]


class RestrictorEnd(End):
    """A restrictor into a tank, such as a nozzle or a loading valve."""

    kind = "restrictor"

    def __init__(self, pressure_drop: Any, flow: Any, *, law: str = "turbulent") -> None:
        inner = Restrictor(pressure_drop, flow, law=law)
        super().__init__(inner.givens)
        object.__setattr__(self, "restrictor", inner)

    def load(self, omega: Any, medium: Medium, values: Mapping[str, Any], last: Any, last_values: Mapping[str, Any]) -> Load:
        """Its resistance at the mean flow."""
        return scaled(self.restrictor.resistance(medium, values) * _ones(omega), _ones(omega))  # type: ignore[attr-defined]

    def steady_drop(self, flow: Any, medium: Medium, values: Mapping[str, Any]) -> Any:
        """Return the law's drop."""
        return self.restrictor.steady_drop(flow, medium, values)  # type: ignore[attr-defined]
