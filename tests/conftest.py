"""What all tests share: the browser, the long tests, and where the demo data stand."""

from __future__ import annotations

import os
import shutil
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]


def chromium_path() -> str | None:
    """Path of a Chromium: PULSEKIT_CHROMIUM (set by tests/run), else one that is installed."""
    told = os.environ.get("PULSEKIT_CHROMIUM")
    if told:
        return told
    for name in ("chromium", "chromium-browser", "google-chrome"):
        if found := shutil.which(name):
            return found
    return None


def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    long_wanted = os.environ.get("PULSEKIT_LONG") == "1"
    browser = chromium_path()
    for item in items:
        if "long" in item.keywords and not long_wanted:
            item.add_marker(pytest.mark.skip(reason="the long form; set PULSEKIT_LONG=1"))
        if "browser" in item.keywords and browser is None and not os.environ.get("CI"):
            item.add_marker(pytest.mark.skip(reason="NO CHROMIUM: browser tests are skipped"))


@pytest.fixture(scope="session")
def chromium() -> str:
    """Path of the Chromium that the browser tests drive; fails where CI is set and there is none."""
    found = chromium_path()
    if found is None:
        pytest.fail("no Chromium was found and CI is set; install one or set PULSEKIT_CHROMIUM")
    return found


@pytest.fixture(scope="session")
def root() -> Path:
    """Top folder of the repository."""
    return ROOT


@pytest.fixture(scope="session")
def demo(root: Path) -> Path:
    """Folder of the invented demo data."""
    return root / "data_demo"
