"""The errors that PulseKit raises, all of them.

Each is a :class:`PulsekitError` and also the built-in kind that a Python user would catch::

    PulsekitError
    ├─ InputError(ValueError)               a given that is not physical or not understood
    │  ├─ UnitError                         a wrong dimension or an unknown unit
    │  ├─ OutOfRangeError                   outside the range in which a correlation was measured
    │  └─ CaseError                         a case file: .path .key .line
    ├─ RecordingError(ValueError)           a recording that cannot be read rightly: .path .line .column
    │  └─ SignalError                       a signal that cannot be cut or decomposed
    ├─ MissingColumnError(KeyError)         a column that is not there; names the ones that are
    ├─ MissingFileError(FileNotFoundError)  a file that is missing or cannot be opened
    ├─ ConvergenceError(RuntimeError)       an iteration that did not settle: .estimate
    ├─ StoppedError(RuntimeError)           the user stopped a long piece of work
    └─ MissingExtraError(ImportError)       an optional library is missing; names the install command

Every message says what is wrong, which value, what is allowed, and the remedy.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

__all__ = [
    "CaseError",
    "ConvergenceError",
    "InputError",
    "MissingColumnError",
    "MissingExtraError",
    "MissingFileError",
    "OutOfRangeError",
    "PulsekitError",
    "RecordingError",
    "SignalError",
    "StoppedError",
    "UnitError",
]


class PulsekitError(Exception):
    """Root of all errors that PulseKit raises on purpose."""

    def __init__(self, message: str = "", **details: Any) -> None:
        super().__init__(message)
        self.message = message
        self.details = details
        for name, value in details.items():
            # Fixed fields per class: the class body names them, a caller cannot add others.
            if not hasattr(type(self), name):
                raise TypeError(f"{type(self).__name__} has no field {name!r}")
            object.__setattr__(self, name, value)

    def __str__(self) -> str:
        return self.message

    def __reduce__(self) -> tuple[Any, ...]:
        return _rebuild, (type(self), self.message, self.details)


def _rebuild(kind: type[PulsekitError], message: str, details: dict[str, Any]) -> PulsekitError:
    """Make the error anew after pickling (keyword fields do not survive the default way)."""
    return kind(message, **details)


class InputError(PulsekitError, ValueError):
    """A given is not physical, or is not understood."""

    name: str | None = None
    value: Any = None
    allowed: str | None = None


class UnitError(InputError):
    """A quantity has another dimension than asked for, or a unit that is not known."""


class OutOfRangeError(InputError):
    """A value lies outside the range in which a correlation was measured."""

    low: float | None = None
    high: float | None = None


class CaseError(InputError):
    """A case file cannot be understood."""

    path: str | Path | None = None
    key: str | None = None
    line: int | None = None


class RecordingError(PulsekitError, ValueError):
    """A recording cannot be read without guessing a number."""

    path: str | Path | None = None
    line: int | None = None
    column: str | int | None = None


class SignalError(RecordingError):
    """A signal cannot be cut into cycles or decomposed."""


class MissingColumnError(PulsekitError, KeyError):
    """A column that was asked for is not in the recording."""

    name: str | None = None
    columns: tuple[str, ...] = ()


class MissingFileError(PulsekitError, FileNotFoundError):
    """A file is missing or cannot be opened."""

    path: str | Path | None = None


class ConvergenceError(PulsekitError, RuntimeError):
    """An iteration did not settle; ``estimate`` is the best value reached."""

    estimate: Any = None


class StoppedError(PulsekitError, RuntimeError):
    """The user stopped a long piece of work."""


class MissingExtraError(PulsekitError, ImportError):
    """An optional library is missing; the message names the install command."""

    extra: str | None = None
