"""The agreements that hold the house together: floors, public names, a light import, style, types, packaging, documents."""

from __future__ import annotations

import ast
import importlib
import os
import re
import subprocess
import sys
import tomllib
import zipfile
from pathlib import Path

import pytest

import pulsekit

ROOT = Path(__file__).resolve().parents[1]
HEAVY = ("matplotlib", "jinja2", "ipywidgets", "anywidget", "bqplot", "IPython", "jupyterlab", "voila", "nbformat", "playwright", "rich", "click")
SOURCES = sorted((ROOT / "pulsekit").rglob("*.py"))


def ran(*command: str, **more) -> subprocess.CompletedProcess:
    return subprocess.run(command, capture_output=True, text=True, cwd=ROOT, timeout=300, check=False, **more)


def test_floors_import_only_downwards():
    done = ran(sys.executable, "-c", "import sys; from importlinter.cli import lint_imports_command; sys.exit(lint_imports_command())", "--no-cache")
    assert done.returncode == 0, done.stdout + done.stderr


def test_import_loads_no_widget_plot_or_web_library():
    code = f"import sys, pulsekit; print([name for name in {HEAVY!r} if name in sys.modules])"
    done = ran(sys.executable, "-c", code)
    assert done.returncode == 0, done.stderr
    assert done.stdout.strip() == "[]"


def test_public_names_are_sorted_and_are_all_there_is():
    assert list(pulsekit.__all__) == sorted(pulsekit.__all__)
    modules = {name for name in vars(pulsekit) if isinstance(vars(pulsekit)[name], type(sys))}
    present = {name for name in vars(pulsekit) if not name.startswith("_")} - modules
    listed = set(pulsekit.__all__)
    for name in listed:
        assert getattr(pulsekit, name) is not None
    assert present <= listed, f"not listed: {present - listed}"
    assert listed - present <= modules, f"listed but missing: {listed - present - modules}"


AGREED = (
    "Fluid", "fluids", "CircularTube", "Harmonics", "analyse", "compare", "decompose", "find_cycles", "load_case", "read_recording", "solve",
    "WallShearCase", "PumpLineCase",
)  # fmt: skip


@pytest.mark.parametrize("name", AGREED)
def test_agreed_names_are_public(name):
    assert name in pulsekit.__all__


def _modules() -> list[str]:
    names = []
    for path in SOURCES:
        relative = path.relative_to(ROOT).with_suffix("")
        if relative.name != "__init__":
            names.append(".".join(relative.parts))
    return names


@pytest.mark.parametrize("name", [name for name in _modules() if ".workbench" not in name])
def test_what_a_module_lists_is_there(name):
    module = importlib.import_module(name)
    listed = getattr(module, "__all__", ())
    assert all(hasattr(module, entry) for entry in listed)


def test_style():
    done = ran(sys.executable, "-m", "ruff", "check", "--no-cache", "pulsekit", "tests")
    assert done.returncode == 0, done.stdout


def test_types_of_the_lower_floors():
    done = ran(sys.executable, "-m", "mypy", "--cache-dir", os.devnull)
    assert done.returncode == 0, done.stdout


def test_top_level_is_as_agreed():
    allowed = {"README.md", "DEVELOPERS.md", "pyproject.toml", "pulsekit", "notebooks", "tests", "data_demo", "LICENSE"}
    tracked = ran("git", "ls-files").stdout.split("\n") if (ROOT / ".git").exists() else []
    top = {line.split("/")[0] for line in tracked if line}
    assert {name for name in top if not name.startswith(".")} <= allowed


def test_data_files_of_the_package_are_declared():
    patterns = tomllib.loads((ROOT / "pyproject.toml").read_text())["tool"]["setuptools"]["package-data"]["pulsekit"]
    endings = {pattern.rsplit("*", 1)[1] for pattern in patterns}
    others = [p for p in (ROOT / "pulsekit").rglob("*") if p.is_file() and p.suffix not in (".py", ".pyc") and "__pycache__" not in p.parts]
    assert [str(p) for p in others if p.suffix not in endings] == []


@pytest.mark.long
def test_wheel_holds_all_files(tmp_path):
    done = ran(sys.executable, "-m", "pip", "wheel", "--quiet", "--no-deps", "--wheel-dir", str(tmp_path), ".")
    assert done.returncode == 0, done.stderr
    (wheel,) = tmp_path.glob("*.whl")
    inside = set(zipfile.ZipFile(wheel).namelist())
    tracked = [line for line in ran("git", "ls-files", "pulsekit").stdout.split("\n") if line]
    assert {line for line in tracked if line not in inside} == set()


def test_public_functions_have_docstrings():
    bare = []
    for path in SOURCES:
        tree = ast.parse(path.read_text(encoding="utf-8"))
        if not ast.get_docstring(tree) and tree.body:
            bare.append(f"{path}: module")
        listed = _listed(tree)
        for node in tree.body:
            if isinstance(node, (ast.FunctionDef, ast.ClassDef)) and node.name in listed and not ast.get_docstring(node):
                bare.append(f"{path}: {node.name}")
    assert bare == []


def _listed(tree: ast.Module) -> set[str]:
    """Names in __all__."""
    for node in tree.body:
        if isinstance(node, ast.Assign) and any(isinstance(t, ast.Name) and t.id == "__all__" for t in node.targets):
            return set(ast.literal_eval(node.value))
    return set()


def test_no_commented_out_code_or_open_notes():
    found = []
    for path in SOURCES:
        for number, line in enumerate(path.read_text(encoding="utf-8").splitlines(), 1):
            if re.search(r"#\s*(TODO|FIXME|XXX)\b", line):
                found.append(f"{path}:{number}")
    assert found == []


def _blocks(document: str, language: str) -> list[str]:
    text = (ROOT / document).read_text(encoding="utf-8")
    return re.findall(rf"```{language}\n(.*?)```", text, re.DOTALL)


@pytest.mark.parametrize("number", range(3))
def test_python_snippets_of_the_readme_run(number, tmp_path):
    blocks = _blocks("README.md", "python")
    if number >= len(blocks):
        pytest.skip("the README has fewer snippets")
    done = subprocess.run(
        [sys.executable, "-W", "error", "-c", blocks[number]], capture_output=True, text=True, cwd=ROOT, timeout=120, check=False
    )
    assert done.returncode == 0, done.stderr


def test_run_command_of_the_readme_works(tmp_path):
    (line,) = [line for block in _blocks("README.md", "sh") for line in block.splitlines() if "pulsekit run" in line]
    words = line.split("&&")[-1].split()
    assert words[0].endswith("pulsekit")
    words[words.index("answer")] = str(tmp_path / "answer")
    done = ran(sys.executable, "-W", "error", "-m", "pulsekit.cli", *words[1:])
    assert done.returncode == 0, done.stderr
    assert (tmp_path / "answer" / "report.html").exists()


def test_files_that_the_documents_name_exist():
    missing = []
    for document in ("README.md", "DEVELOPERS.md"):
        text = (ROOT / document).read_text(encoding="utf-8")
        for name in re.findall(r"\b((?:data_demo|notebooks|tests|pulsekit)/[\w./-]+\.(?:toml|ipynb|py|csv|svg|png|md))", text):
            if not (ROOT / name).exists():
                missing.append(f"{document}: {name}")
    assert missing == []
