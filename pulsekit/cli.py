"""The command line: it loads a case and writes its answer."""

from __future__ import annotations

import glob
import importlib.util
import json
import subprocess
import sys
from pathlib import Path
from typing import Any

import click

from .errors import InputError, MissingExtraError, PulsekitError

__all__ = ["commands", "main"]

_CAUTION = "Estimates for engineering and research use: not for diagnosis or treatment; local codes and licensed practice decide."
_VERDICT_STYLE = {"holds": "green", "doubtful": "yellow", "fails": "red", "unknown": "dim"}


def main(arguments: list[str] | None = None) -> int:
    """Run the command line; return its exit code.

    0: done. 2: the input was not usable; one sentence on standard error says what, where and the remedy.
    """
    for stream in (sys.stdout, sys.stderr):
        # A console that cannot show '±' or 'τ' gets a mark in its place rather than a crash.
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")
    try:
        code = commands.main(args=arguments, prog_name="pulsekit", standalone_mode=False)
    except PulsekitError as problem:
        click.echo(f"pulsekit: {problem}", err=True)
        return 2
    except click.ClickException as problem:
        problem.show()
        return 2
    except (click.Abort, KeyboardInterrupt):
        click.echo("pulsekit: stopped", err=True)
        return 130
    except click.exceptions.Exit as left:
        return int(left.exit_code)
    return code if isinstance(code, int) else 0


@click.group(context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(package_name="pulsekit", prog_name="pulsekit")
def commands() -> None:
    """From a measured, periodic flow or pressure recording to a report.

    \b
    Two questions are answered:
      wall shear  stress on the wall of a tube from a flow, velocity or pressure recording
      pump line   pressure pulsation along a line behind a pump

    \b
    The way, with a recording of your own:
      pulsekit draft run12.csv            writes run12.toml beside it
      (fill in the lines marked in run12.toml with an editor)
      pulsekit run run12.toml --out answer
      (open answer/report.html)

    Every number comes with an interval, every assumption with a verdict.
    """


@commands.command()
@click.argument("recording", type=click.Path(path_type=Path))
@click.option("--kind", type=click.Choice(["wall-shear", "pump-line"]), help="Which question; by the units of the columns if left out.")
@click.option("--block", help="Which block, sheet, group or vessel, where the file has several.")
@click.option("--to", type=click.Path(path_type=Path), help="Name of the case file; beside the recording if left out.")
def draft(recording: Path, kind: str | None, block: str | None, to: Path | None) -> None:
    """Write a first case file for RECORDING.

    What can be found out from the file is filled in. Lines that only you can fill, such as the radius, are marked.
    An existing case file is never overwritten.
    """
    from .case.draft import YOURS, draft_case

    target = to or recording.with_suffix(".toml")
    if target.exists():
        raise InputError(f"{target} exists already and is left as it is; give another name with --to", name="to", value=str(target))
    made = draft_case(recording, kind=kind.replace("-", " ") if kind else None, block=block)
    text = made.text
    if to is not None and to.resolve().parent != recording.resolve().parent:
        text = text.replace(f"file = {json.dumps(recording.name, ensure_ascii=False)}", f"file = {json.dumps(str(recording.resolve()))}")
    try:
        with target.open("x", encoding="utf-8") as stream:
            stream.write(text)
    except OSError as problem:
        raise InputError(f"{target} cannot be written: {problem.strerror}; give another name with --to", name="to", value=str(target)) from problem
    click.echo(f"{target} is written: a {made.kind} case. {made.left_to_fill} lines are marked '{YOURS}'; then: pulsekit run {target} --out answer")


@commands.command()
@click.argument("case", type=click.Path(path_type=Path))
@click.option("--out", "out", type=click.Path(path_type=Path), required=True, help="Folder for the answer; made if it does not exist.")
@click.option("--no-pictures", is_flag=True, help="Leave out pictures and report page (quicker).")
def run(case: Path, out: Path, no_pictures: bool) -> None:
    """Answer CASE (a .toml file) and write the report into a folder.

    The folder holds report.html (open it in a browser), findings.csv, series.csv and other tables, figures,
    answer.json, the recording, and case.toml, which re-runs to the same numbers.
    """
    from . import analyse, load_case
    from .case import Workspace

    if out.exists() and not out.is_dir():
        raise InputError(f"--out {out} is a file; give the name of a folder for the answer", name="out", value=str(out))
    workspace = Workspace()
    answer = analyse(load_case(case), workspace=workspace)
    folder = answer.write(out, pictures=not no_pictures, workspace=workspace)
    _print_answer(answer)
    name = "answer.json" if no_pictures else "report.html"
    click.echo(f"\nWritten: {folder / name} and the tables beside it.\n{_CAUTION}")


def _print_answer(answer: Any) -> None:
    from rich import box
    from rich.console import Console
    from rich.markup import escape
    from rich.table import Table

    from .report.page import interval_notes
    from .report.rows import check_rows, finding_rows, interval_head

    # Nobody looks at the width of a pipe: tables keep their columns there.
    console = Console(width=None if sys.stdout.isatty() else 140, highlight=False)
    console.print(f"\n[bold]{escape(str(answer.case.get('title') or 'Untitled case'))}[/bold]")
    if answer.overall:
        console.print(escape(answer.overall))
    table = Table(box=box.SIMPLE_HEAD, pad_edge=False)
    for head, justify in (("Finding", "left"), ("Value", "right"), (interval_head(answer), "right"), ("Unit", "left"), ("Reliance", "left"),
                          ("Widest share", "left")):  # fmt: skip
        table.add_column(head, justify=justify, overflow="fold")  # type: ignore[arg-type]
    for row in finding_rows(answer.findings):
        table.add_row(*map(escape, (row.label, row.value, row.interval, row.unit, row.reliance, row.biggest_share)))
    console.print(table)
    for note in interval_notes(answer):
        console.print(escape(note))
    checks = Table(box=box.SIMPLE_HEAD, pad_edge=False)
    for head in ("Check", "Verdict", "Because"):
        checks.add_column(head, overflow="fold")
    for entry in check_rows(answer.checks):
        checks.add_row(escape(entry.label), f"[{_VERDICT_STYLE[entry.verdict]}]{entry.shape} {entry.verdict}[/]", escape(entry.because))
    console.print(checks)
    console.print("Remarks (what was guessed, repaired, dropped or assumed):")
    for remark in answer.remarks:
        console.print(f"- {escape(str(remark))}")


@commands.command("open")
@click.argument("what", metavar="[wall-shear|pump-line]", required=False)
@click.argument("path", metavar="[CASE or RECORDING]", required=False, type=click.Path(path_type=Path))
@click.option("--page", is_flag=True, help="As a page without code (Voilà) rather than in JupyterLab.")
@click.option("--no-start", is_flag=True, help="Only prepare the notebook.")
@click.option("--no-browser", is_flag=True, help="Start the server without opening a browser.")
def open_(what: str | None, path: Path | None, page: bool, no_start: bool, no_browser: bool) -> None:
    """Open a workbench in the browser, with a case or recording of yours or empty."""
    if what is not None and what not in ("wall-shear", "pump-line"):
        if path is not None:
            raise InputError(f"{what!r} is not a workbench; write wall-shear or pump-line", name="open", value=what)
        what, path = None, Path(what)
    kind, case = _kind_and_case(what, path)
    needed = ("ipywidgets", "anywidget", "voila" if page else "jupyterlab")
    missing = [name for name in needed if importlib.util.find_spec(name) is None]
    if missing:
        raise MissingExtraError(
            f"the workbench needs {', '.join(missing)}; install with: pip install 'pulsekit[workbench]'", extra="workbench"
        )
    notebook = _prepare_notebook(kind, case, path)
    click.echo(f"Notebook: {notebook}")
    if no_start:
        return
    program = [sys.executable, "-m", "voila", str(notebook)] if page else [sys.executable, "-m", "jupyterlab", str(notebook)]
    if no_browser:
        program.append("--no-browser")
    raise click.exceptions.Exit(subprocess.run(program, check=False).returncode)


def _kind_and_case(what: str | None, path: Path | None) -> tuple[str, Path | None]:
    """Kind of the workbench, and the case file if the path is one."""
    stated = what.replace("-", " ") if what else None
    if path is None:
        return stated or "wall shear", None
    if path.suffix.lower() == ".toml":
        from . import load_case

        kind = load_case(path).kind
        if stated and kind != stated:
            raise InputError(f"{path} is a {kind} case; open it with: pulsekit open {kind.replace(' ', '-')} {path}", name="open", value=str(path))
        return kind, path
    from .case.draft import draft_case

    return draft_case(path, kind=stated).kind, None


def _prepare_notebook(kind: str, case: Path | None, path: Path | None) -> Path:
    """Write the notebook that shows the workbench, beside the case or in the present folder; an older one is kept."""
    import nbformat

    name = "WallShearWorkbench" if kind == "wall shear" else "PumpLineWorkbench"
    folder = path.resolve().parent if path is not None else Path.cwd()
    stem = f"{path.stem}-workbench" if path is not None else f"{kind.replace(' ', '-')}-workbench"
    argument = json.dumps(path.name, ensure_ascii=False) if path is not None else ""
    source = f"from pulsekit.workbench import {name}\n\n{name}({argument})"
    head = "Run the cell below (Shift + Enter). The workbench keeps its state in a case; save it there as a file."
    book = nbformat.v4.new_notebook(
        cells=[nbformat.v4.new_markdown_cell(f"# {kind.capitalize()}\n\n{head}"), nbformat.v4.new_code_cell(source)],
        metadata={"kernelspec": {"name": "python3", "display_name": "Python 3", "language": "python"}},
    )
    target = folder / f"{stem}.ipynb"
    if not target.exists():
        try:
            nbformat.write(book, target)
        except OSError as problem:
            raise InputError(f"{target} cannot be written: {problem.strerror}; start in a folder of your own", name="open") from problem
    return target


@commands.command()
@click.argument("template", type=click.Path(path_type=Path))
@click.option("--recordings", required=True, help="Pattern of the recordings, in quotes, as in 'runs/*.csv'.")
@click.option("--out", required=True, type=click.Path(path_type=Path), help="Folder for all answers and findings.csv.")
@click.option("--givens", type=click.Path(path_type=Path), help="Table with a row per recording: recording, tube.radius (mm), ...")
@click.option("--jobs", default=1, show_default=True, help="Workers on this machine; -1 takes all cores.")
@click.option("--cluster", help="Address of a Dask scheduler that shall do the work.")
@click.option("--no-pictures", is_flag=True, help="Leave out pictures and report pages (quicker).")
def study(template: Path, recordings: str, out: Path, givens: Path | None, jobs: int, cluster: str | None, no_pictures: bool) -> None:
    """Answer many recordings with one TEMPLATE case.

    One folder per recording and one findings.csv with a row for each. A recording that fails is a row with its
    sentence and stops nothing. Start it again after an interruption: finished recordings are not computed again.
    """
    from rich.console import Console
    from rich.progress import Progress

    from .study import run_study

    matching = sorted(glob.glob(recordings, recursive=True))
    with Progress(console=Console(stderr=True)) as bar:
        task = bar.add_task("recordings", total=len(matching))

        def progress(done: int, _all: int, name: str) -> None:
            bar.update(task, completed=done, description=name)

        result = run_study(
            template, matching, out=out, givens=givens, jobs=jobs, cluster=cluster, pictures=not no_pictures, progress=progress
        )
    click.echo(f"{result.answered} answered, {result.failed} failed, {result.resumed} taken over from before. Table: {result.path}")
    for _, row in result.table[result.table["status"] == "failed"].iterrows():
        click.echo(f"  {row['recording']}: {row['message']}")
    click.echo(_CAUTION)


if __name__ == "__main__":
    sys.exit(main())
