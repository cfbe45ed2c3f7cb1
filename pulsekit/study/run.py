"""Many recordings through one template: on one core, on all, or on a cluster; resumable after a kill."""

from __future__ import annotations

import contextlib
import hashlib
import json
import os
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pandas as pd

from ..case import analyse, load_case
from ..errors import InputError, MissingExtraError, PulsekitError
from ..trace.export_safety import escape_spreadsheet
from .givens import givens_of, read_givens

__all__ = ["StudyResult", "run_study"]

_ROW = "row.json"


@dataclass(frozen=True)
class StudyResult:
    """What a study left: the table, where it stands, and how many were answered, failed and taken over."""

    table: pd.DataFrame
    path: Path
    answered: int
    failed: int
    resumed: int


@dataclass(frozen=True)
class _Task:
    recording: str
    case_folder: str
    case_text: str
    folder: str
    fingerprint: str
    pictures: bool
    problem: str = ""


def run_study(
    template: str | Path,
    recordings: Sequence[str | Path],
    *,
    out: str | Path,
    givens: str | Path | None = None,
    jobs: int = 1,
    cluster: str | None = None,
    pictures: bool = True,
    progress: Callable[[int, int, str], None] | None = None,
) -> StudyResult:
    """Analyse every recording with the template's case; leave one folder each and one table.

    Parameters
    ----------
    template : path
        A case file; its recording is replaced by each of ``recordings``.
    recordings : sequence of path
    out : path
        Holds a folder per recording and ``findings.csv``.
    givens : path, optional
        Table of givens per recording, units in its header (see `read_givens`).
    jobs : int
        Workers on this machine; -1 takes all cores.
    cluster : str, optional
        Address of a Dask scheduler, which then does the work.
    pictures : bool
        False leaves out pictures and report pages.
    progress : callable, optional
        Called with (done, all, recording) after each.

    Returns
    -------
    StudyResult
        A recording that fails is a row with its sentence and stops nothing.

    Raises
    ------
    InputError
        If there are no recordings, or a row of givens belongs to none of them.
    """
    case = load_case(template)
    places = sorted({Path(recording).resolve() for recording in recordings})
    if not places:
        raise InputError("no recording matches; check --recordings (quote the pattern, as in 'runs/*.csv')", name="recordings")
    table = read_givens(givens) if givens is not None else {}
    _no_orphans(table, places, givens)
    target = Path(out)
    tasks = [_task(case, place, name, table, target, pictures) for place, name in zip(places, _folder_names(places), strict=True)]
    target.mkdir(parents=True, exist_ok=True)
    rows: dict[str, dict[str, Any]] = {}
    for task in tasks:
        finished = _finished(task)
        if finished is not None:
            rows[task.folder] = finished
    resumed = len(rows)
    for row in _worked([task for task in tasks if task.folder not in rows], jobs, cluster):
        rows[str(target / row["folder"])] = row
        if progress is not None:
            progress(len(rows), len(tasks), row["recording"])
    ordered = pd.DataFrame([rows[task.folder] for task in tasks])
    path = _write_table(ordered, target)
    failed = int((ordered["status"] == "failed").sum())
    return StudyResult(ordered, path, len(tasks) - failed, failed, resumed)


def _no_orphans(table: Mapping[str, Any], places: Sequence[Path], givens: object) -> None:
    known = {name for place in places for name in (place.name, place.stem, str(place))}
    orphans = [name for name in table if name not in known]
    if orphans:
        raise InputError(
            f"{givens} has rows for recordings that are not there: {', '.join(orphans[:5])}; check their names or --recordings",
            name="givens", value=orphans[0],
        )  # fmt: skip


def _folder_names(places: Sequence[Path]) -> list[str]:
    """A folder name per recording: its stem, with its ending or a number where stems meet."""
    names: list[str] = []
    for place in places:
        name = place.stem if sum(other.stem == place.stem for other in places) == 1 else place.name.replace(".", "-")
        candidate, number = name, 2
        while candidate in names:
            candidate, number = f"{name}-{number}", number + 1
        names.append(candidate)
    return names


def _task(case: Any, place: Path, name: str, table: Mapping[str, Mapping[str, str]], target: Path, pictures: bool) -> _Task:
    problem, text = "", ""
    try:
        changed = case.with_value("recording.file", str(place)).without("recording.sha256")
        for key, value in givens_of(table, place).items():
            changed = changed.with_value(key, _plain_value(case, key, value))
        text = changed.to_toml()
        stat = place.stat()
        stamp = f"{stat.st_size} {stat.st_mtime_ns}"
    except PulsekitError as error:
        problem, stamp = str(error), ""
    except OSError as error:
        problem, stamp = f"{place} cannot be opened: {error.strerror}", ""
    fingerprint = hashlib.sha256(f"{text}\n{stamp}\n{pictures}\n{problem}".encode()).hexdigest()
    return _Task(place.name, str(case.folder), text, str(target / name), fingerprint, pictures, problem)


def _plain_value(case: Any, key: str, value: str) -> Any:
    """A number stays a number where the key takes one (a haematocrit of 0.45)."""
    with contextlib.suppress(ValueError):
        number = float(value)
        return int(value) if value.strip().lstrip("+-").isdigit() else number
    return value


def _finished(task: _Task) -> dict[str, Any] | None:
    """The row of a recording that an earlier run finished with the same case and the same file."""
    try:
        kept = json.loads((Path(task.folder) / _ROW).read_text(encoding="utf-8"))
    except (OSError, ValueError):
        return None
    if kept.get("fingerprint") != task.fingerprint:
        return None
    row: dict[str, Any] = kept["row"]
    return row


def _worked(tasks: Sequence[_Task], jobs: int, cluster: str | None) -> Iterator[dict[str, Any]]:
    import joblib

    if not tasks:
        return
    if cluster is None and jobs == 1:
        yield from map(_one, tasks)
        return
    with contextlib.ExitStack() as stack:
        if cluster is not None:
            try:
                from distributed import Client
            except ImportError as problem:
                raise MissingExtraError(
                    "a cluster needs Dask; install it with: pip install 'pulsekit[cluster]'", extra="cluster"
                ) from problem
            stack.enter_context(Client(cluster))
            stack.enter_context(joblib.parallel_config(backend="dask"))
        workers = joblib.Parallel(n_jobs=jobs, return_as="generator_unordered", batch_size="auto")
        yield from workers(joblib.delayed(_one)(task) for task in tasks)


def _one(task: _Task) -> dict[str, Any]:
    """Analyse one recording; whatever goes wrong with it becomes its row."""
    folder = Path(task.folder)
    if task.problem:
        row: dict[str, Any] = {"recording": task.recording, "status": "failed", "message": task.problem}
    else:
        try:
            row = _answered(task, folder)
        except PulsekitError as error:
            row = {"recording": task.recording, "status": "failed", "message": str(error)}
        except Exception as error:  # a fault of ours in one recording must not stop the others
            row = {"recording": task.recording, "status": "failed", "message": f"unexpected: {type(error).__name__}: {error}"}
    row = {"recording": row["recording"], "folder": folder.name} | row
    folder.mkdir(parents=True, exist_ok=True)
    _write_whole(folder / _ROW, json.dumps({"fingerprint": task.fingerprint, "row": row}, ensure_ascii=False, allow_nan=False))
    return row


def _answered(task: _Task, folder: Path) -> dict[str, Any]:
    from ..case import case_from_toml

    answer = analyse(case_from_toml(task.case_text, folder=task.case_folder))
    answer.write(folder, pictures=task.pictures)
    row: dict[str, Any] = {"recording": task.recording, "status": "answered", "message": ""}
    for finding in answer.findings:
        head = f"{finding.name} ({finding.shown_unit})" if finding.shown_unit else finding.name
        row[head] = finding.shown_value
        row[f"{finding.name} low"] = finding.shown_low
        row[f"{finding.name} high"] = finding.shown_high
        row[f"{finding.name} reliance"] = finding.reliance
    row["overall"] = answer.overall
    row["remarks"] = " | ".join(answer.remarks)
    return row


def _write_whole(path: Path, text: str) -> None:
    hidden = path.with_name(f".{path.name}.{os.getpid()}")
    hidden.write_text(text, encoding="utf-8")
    os.replace(hidden, path)


def _write_table(table: pd.DataFrame, target: Path) -> Path:
    safe = table.copy()
    for name in safe.columns:
        if not pd.api.types.is_numeric_dtype(safe[name]):
            safe[name] = [escape_spreadsheet(cell) if isinstance(cell, str) else cell for cell in safe[name]]
    path = target / "findings.csv"
    _write_whole(path, safe.to_csv(index=False, lineterminator="\n"))
    return path
