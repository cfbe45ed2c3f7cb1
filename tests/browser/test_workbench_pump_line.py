"""The pump-line workbench in a real browser: add a damper, move it, change the oil, read the effect, undo, save."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest

pytestmark = pytest.mark.browser
WAIT = 120_000
ENVELOPE = '.pk-picture[style*="envelope"] path.pk-line.role-gradient:not(.pale)'


def settled(page) -> None:
    page.wait_for_function(
        "document.querySelector('.pk').dataset.full === 'true' && document.querySelector('.pk').dataset.busy === 'no'", timeout=WAIT
    )


def envelope(page) -> str:
    return page.locator(ENVELOPE).first.get_attribute("d")


def redrawn(page, before: str) -> None:
    page.wait_for_function(f"(before) => document.querySelector('{ENVELOPE}').getAttribute('d') !== before", arg=before, timeout=WAIT)


def value(page, name: str) -> str:
    return page.locator(f'.pk-finding[data-name="{name}"] .pk-f-value').inner_text()


def test_an_afternoon_at_the_line(open_page, voila, desk: Path):
    page = open_page(f"{voila}/voila/render/line.ipynb")
    page.wait_for_selector(ENVELOPE, timeout=WAIT)
    settled(page)
    assert page.locator(".pk-picture").count() == 8
    first = value(page, "largest_peak_to_peak_pressure")

    before = envelope(page)
    page.get_by_role("button", name="Add a gas damper behind the selected element").click()
    redrawn(page, before)
    settled(page)
    assert value(page, "largest_peak_to_peak_pressure") != first
    behind = envelope(page)
    page.get_by_role("button", name="Move element 2 towards the source").click()
    redrawn(page, behind)

    drop = value(page, "steady_pressure_drop")
    temperature = page.locator('[data-key="fluid.temperature"]')
    temperature.fill("25 degC")
    temperature.press("Enter")
    page.wait_for_function(
        "(was) => document.querySelector('.pk-finding[data-name=\"steady_pressure_drop\"] .pk-f-value').textContent !== was", arg=drop, timeout=WAIT
    )

    length = page.locator('[data-key="element.1.length"]')
    length.evaluate("node => node.closest('details').open = true")
    kept = envelope(page)
    length.fill("-3 m")
    length.press("Enter")
    page.wait_for_function("[...document.querySelectorAll('.pk-message')].some(m => m.textContent.includes('above 0'))", timeout=WAIT)
    assert envelope(page) == kept

    undo = page.get_by_role("button", name="Undo")
    for _ in range(3):
        was = envelope(page)
        undo.click()
        redrawn(page, was)
    settled(page)
    assert value(page, "largest_peak_to_peak_pressure") == first

    page.get_by_role("button", name="Save case").click()
    page.wait_for_selector(".pk-saved a", timeout=WAIT)
    told = re.search(r"saved: (\S+\.toml)", page.locator(".pk-saved").inner_text())

    from pulsekit.cli import main
    from pulsekit.report.rows import decimals_of, number_text

    assert main(["run", told[1], "--out", str(desk / "line-again"), "--no-pictures"]) == 0
    run = json.loads((desk / "line-again" / "answer.json").read_text())
    for row in run["findings"]:
        if row["shown_value"] is not None:
            decimals = decimals_of(row["shown_value"], row["shown_low"], row["shown_high"])
            assert value(page, row["name"]) == number_text(row["shown_value"], decimals), row["name"]
