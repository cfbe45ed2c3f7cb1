"""One Voila server and one browser for all tests of the workbench on a page."""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from .serving import browser, served, write_notebook

#: What the pages' own hosts say; nothing of it is ours.
NOT_OURS = (
    "ERR_NAME_NOT_RESOLVED",
    "ERR_INTERNET_DISCONNECTED",
    "ERR_CONNECTION",
    "favicon",
    "Unsatisfied version",
    "No satisfying version",
    "404",
)


@pytest.fixture(scope="session")
def desk(tmp_path_factory: pytest.TempPathFactory, demo: Path) -> Path:
    """Folder with copies of demo cases and the notebooks that open them."""
    home = tmp_path_factory.mktemp("desk")
    folder = home / "notebooks"
    folder.mkdir()
    for name in ("forearm", "bench", "supply"):
        shutil.copytree(demo / name, folder / name)
        shutil.copy(demo / f"{name}.toml", folder)
    write_notebook(folder / "case.ipynb", "from pulsekit.workbench import WallShearWorkbench\nWallShearWorkbench('forearm.toml')")
    write_notebook(folder / "line.ipynb", "from pulsekit.workbench import PumpLineWorkbench\nPumpLineWorkbench('supply.toml')")
    write_notebook(folder / "empty.ipynb", "from pulsekit.workbench import WallShearWorkbench\nWallShearWorkbench()")
    return folder


@pytest.fixture(scope="session")
def chromium_browser(chromium: str) -> Iterator[Any]:
    with browser(chromium) as driver:
        yield driver


@pytest.fixture(scope="session")
def voila(desk: Path) -> Iterator[str]:
    with served("voila", desk, desk.parent) as address:
        yield address


@pytest.fixture
def open_page(chromium_browser: Any) -> Iterator[Any]:
    """Function that opens an address; at the end the console must hold none of our errors."""
    pages, complaints = [], []

    def opened(address: str, **options: Any) -> Any:
        page = chromium_browser.new_page(**({"viewport": {"width": 1440, "height": 900}} | options))
        page.on("console", lambda message: complaints.append(message.text) if message.type == "error" else None)
        page.on("pageerror", lambda problem: complaints.append(f"uncaught: {problem}"))
        page.goto(address, wait_until="domcontentloaded", timeout=120_000)
        pages.append(page)
        return page

    yield opened
    for page in pages:
        page.close()
    assert [text for text in complaints if not any(word in text for word in NOT_OURS)] == []
