"""The only path from a question to its answer."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

from ..errors import InputError
from .answer import Answer
from .case import Case
from .workspace import Workspace

__all__ = ["analyse"]


def analyse(
    case: Case,
    *,
    samples: int | None = None,
    progress: Callable[[float], Any] | None = None,
    stop: Callable[[], bool] | None = None,
    nominal_only: bool = False,
    workspace: Workspace | None = None,
    identities: Mapping[str, str] | None = None,
) -> Answer:
    """Answer a case.

    Parameters
    ----------
    case : WallShearCase or PumpLineCase
    samples : int, optional
        Monte Carlo samples, in place of the case's ``uncertainty.samples`` (10,000 if neither is given).
    progress : callable, optional
        Called with the fraction done while a long recording is read.
    stop : callable, optional
        Asked now and then; True stops the work.
    nominal_only : bool
        Leave out intervals, bands and shares (for a hand on a slider).
    workspace : Workspace, optional
        Keeps what was read and decomposed between two calls; it never changes the answer.
    identities : mapping of str to str, optional
        Dotted key of a given (or ``recording``) to the name of its stream of random numbers, in place of the usual one:
        how `compare` lets two cases share some unknowns and not others.

    Returns
    -------
    Answer

    Raises
    ------
    PulsekitError
        If the case cannot be answered; the message says what, where and the remedy.

    Examples
    --------
    >>> import tempfile, pathlib
    >>> from pulsekit.case import WallShearCase
    >>> folder = pathlib.Path(tempfile.mkdtemp())
    >>> rows = "".join(f"{k / 100},{400 + 300 * (k % 100 < 30)}\\n" for k in range(500))
    >>> _ = (folder / "run.csv").write_text("time (s),flow (mL/min)\\n" + rows)
    >>> case = WallShearCase({
    ...     "recording": {"file": "run.csv", "quantity": "flow_rate"}, "cycles": {"period": "1 s"},
    ...     "tube": {"radius": "3.1 mm"}, "fluid": {"density": "1060 kg/m^3", "viscosity": "3.5 mPa*s"}}, folder)
    >>> round(analyse(case, nominal_only=True).findings["mean_flow_rate"].shown_value)
    490
    """
    if case.kind == "wall shear":
        from .wall_shear import analyse_wall_shear as work
    elif case.kind == "pump line":
        from .pump_line import analyse_pump_line as work
    else:
        raise InputError(f"a case of kind {case.kind!r} cannot be analysed", name="kind", value=case.kind)
    more = {"identities": identities} if identities else {}
    return work(case, samples=samples, progress=progress, stop=stop, nominal_only=nominal_only, workspace=workspace, **more)
