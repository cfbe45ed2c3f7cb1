"""The wall-shear workbench in a real browser: what an engineer does in an afternoon."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest

from .serving import served

pytestmark = pytest.mark.browser
WAIT = 90_000
SHEAR = '.pk-picture[style*="wall_shear_stress"] path.pk-line.role-shear:not(.pale)'


def ready(page) -> None:
    page.wait_for_selector(SHEAR, timeout=WAIT)


def settled(page) -> None:
    page.wait_for_function(
        "document.querySelector('.pk').dataset.full === 'true' && document.querySelector('.pk').dataset.busy === 'no'", timeout=WAIT
    )


def shear(page) -> str:
    return page.locator(SHEAR).first.get_attribute("d")


def redrawn(page, before: str) -> None:
    page.wait_for_function(
        f"(before) => document.querySelector('{SHEAR}').getAttribute('d') !== before".replace("'.pk-picture", "'.pk-picture"),
        arg=before,
        timeout=WAIT,
    )


def shown_findings(page) -> dict[str, tuple[str, str]]:
    rows = page.eval_on_selector_all(
        ".pk-finding",
        "rows => rows.map(r => [r.dataset.name, r.querySelector('.pk-f-value').textContent, r.querySelector('.pk-f-interval').textContent])",
    )
    return {name: (value, interval) for name, value, interval in rows}


@pytest.fixture
def page(open_page, voila):
    opened = open_page(f"{voila}/voila/render/case.ipynb")
    ready(opened)
    settled(opened)
    return opened


def test_an_afternoon(page, desk: Path, open_page, voila):
    """Every picture in view; drag the radius, step the cursor, leave out a beat, pin, save, open the report; the numbers are those of a run."""
    boxes = page.eval_on_selector_all(
        ".pk-picture", "all => all.map(p => { const b = p.getBoundingClientRect(); return [b.top, b.bottom, b.left, b.right, b.height]; })"
    )
    assert len(boxes) == 7
    for top, bottom, left, right, height in boxes:
        assert top >= 0
        assert bottom <= 900
        assert left >= 0
        assert right <= 1440
        assert height > 120

    page.get_by_role("button", name="Pin").click()
    page.wait_for_selector(".pk-reference:not([hidden])")

    before = shear(page)
    slider = page.locator('[data-key="tube.radius slider"]')
    box = slider.bounding_box()
    page.mouse.move(box["x"] + box["width"] * 0.38, box["y"] + box["height"] / 2)
    page.mouse.down()
    page.mouse.move(box["x"] + box["width"] * 0.5, box["y"] + box["height"] / 2, steps=4)
    page.mouse.up()
    redrawn(page, before)
    settled(page)
    assert page.locator("path.pk-line.role-shear.pale").count() == 1
    assert page.locator(".pk-f-change").first.inner_text()

    count = page.locator('input[data-key^="cycle "]:checked').count()
    recording = page.locator('.pk-picture[style*="recording"] .pk-plot').bounding_box()
    page.mouse.click(recording["x"] + recording["width"] * 0.5, recording["y"] + recording["height"] * 0.5)
    page.wait_for_function(f"document.querySelectorAll('input[data-key^=\"cycle \"]:checked').length === {count - 1}", timeout=WAIT)
    settled(page)

    readout = page.locator(".pk-cursor-readout").inner_text()
    reading = page.locator('.pk-picture[style*="wall_shear_stress"] .pk-reading').inner_text()
    page.locator('.pk-picture[style*="wall_shear_stress"] .pk-plot').focus()
    page.keyboard.press("Shift+ArrowRight")
    assert page.locator(".pk-cursor-readout").inner_text() != readout
    assert page.locator('.pk-picture[style*="wall_shear_stress"] .pk-reading').inner_text() != reading
    profile = page.locator("path.pk-slice").get_attribute("d")
    field = page.locator('.pk-picture[style*="field"] .pk-plot').bounding_box()
    page.mouse.move(field["x"] + field["width"] * 0.3, field["y"] + 40)
    page.mouse.down()
    page.mouse.move(field["x"] + field["width"] * 0.6, field["y"] + 40, steps=3)
    page.mouse.up()
    assert page.locator("path.pk-slice").get_attribute("d") != profile
    page.get_by_role("button", name="Play").click()
    page.wait_for_timeout(300)
    page.get_by_role("button", name="Pause").click()

    page.get_by_role("button", name="Save case").click()
    page.wait_for_selector(".pk-saved a", timeout=WAIT)
    told = re.search(r"saved: (\S+\.toml)", page.locator(".pk-saved").inner_text())
    findings = shown_findings(page)
    page.get_by_role("button", name="Save report").click()
    page.wait_for_function("document.querySelector('.pk-saved').textContent.includes('report.html')", timeout=WAIT)
    place = Path(re.search(r"saved: (\S+report\.html)", page.locator(".pk-saved").inner_text())[1])

    from pulsekit.cli import main
    from pulsekit.report.rows import finding_rows

    assert main(["run", told[1], "--out", str(desk / "again"), "--no-pictures"]) == 0
    run = json.loads((desk / "again" / "answer.json").read_text())
    from pulsekit import load_case
    from pulsekit.case import analyse

    rows = {row.name: row for row in finding_rows(analyse(load_case(told[1])).findings)}
    assert [row["name"] for row in run["findings"]] == list(rows)
    assert findings == {name: (row.value, "" if row.interval == "–" else row.interval) for name, row in rows.items()}

    with page.expect_popup() as popup:
        page.get_by_role("link", name="open").click()
    popup.value.wait_for_load_state()
    assert "Time-averaged wall shear" in popup.value.inner_text("body")
    report = open_page(place.as_uri())
    assert "Time-averaged wall shear" in report.inner_text("body")


def test_from_an_empty_desk_to_an_answer(open_page, voila, desk: Path, tmp_path: Path):
    """Upload a file whose column has no unit, correct it, fill in tube and liquid; then a bad file costs nothing."""
    page = open_page(f"{voila}/voila/render/empty.ipynb")
    page.wait_for_selector(".pk", timeout=WAIT)
    text = (desk / "forearm" / "flow.csv").read_text(encoding="utf-8")
    head = next(line for line in text.splitlines() if "flow" in line and "," in line)
    source = tmp_path / "bare <b>.csv"
    source.write_text(text.replace(head, re.sub(r"flow[^,]*", "flow", head)), encoding="utf-8")
    page.locator("input.pk-file").set_input_files(source)
    page.wait_for_selector('[data-key="recording.quantity"]', timeout=WAIT)
    page.locator('[data-key="recording.signal"]').select_option("flow")
    page.locator('[data-key="recording.quantity"]').select_option("flow_rate")
    unit = page.locator('[data-key="recording.unit"]')
    page.wait_for_selector('[data-key="recording.unit"][aria-invalid]', timeout=WAIT)
    unit.fill("mL/min")
    unit.press("Enter")
    page.wait_for_selector('.pk-picture[style*="recording"] path.pk-line', timeout=WAIT)
    radius = page.locator('[data-key="tube.radius"]')
    radius.fill("2.05 cm2")
    radius.press("Enter")
    page.wait_for_selector('[data-key="tube.radius"][aria-invalid]', timeout=WAIT)
    radius.fill("2.05 mm")
    radius.press("Enter")
    page.locator('[data-key="fluid.kind"]').select_option("given")
    for key, words in (("fluid.density", "1057 kg/m^3"), ("fluid.viscosity", "3.4 mPa*s")):
        page.wait_for_selector(f'[data-key="{key}"]', timeout=WAIT)
        page.locator(f'[data-key="{key}"]').fill(words)
        page.locator(f'[data-key="{key}"]').press("Enter")
    ready(page)
    settled(page)
    before = shear(page)
    bad = tmp_path / "bad.csv"
    bad.write_bytes(b"\x00\x01\x02 nothing to read")
    page.locator("input.pk-file").set_input_files(bad)
    page.wait_for_selector('[data-key="recording.file"][aria-invalid]', timeout=WAIT)
    assert shear(page) == before
    assert "Traceback" not in page.inner_text("body")


def test_keyboard_only(page):
    """Tab reaches fields before tools before pictures before the answer; focus is seen; arrow keys move slider and cursor."""
    page.locator('[data-key="tube.radius slider"]').focus()
    before = shear(page)
    page.keyboard.press("ArrowRight")
    redrawn(page, before)
    page.locator("input.pk-file").focus()
    order = []
    for _ in range(160):
        page.keyboard.press("Tab")
        zone = page.evaluate(
            "(() => { const n = document.activeElement; for (const z of ['pk-givens','pk-tools','pk-plot','pk-answer']) if (n.closest('.' + z)) return z; return ''; })()"
        )
        if zone and zone not in order:
            order.append(zone)
        if zone == "pk-plot":
            width = page.evaluate("getComputedStyle(document.activeElement).outlineWidth")
            assert width != "0px"
        if zone == "pk-answer":
            break
    assert order == ["pk-givens", "pk-tools", "pk-plot", "pk-answer"]
    unnamed = page.eval_on_selector_all(
        ".pk input, .pk select, .pk button",
        "all => all.filter(n => !(n.labels && n.labels.length) && !n.getAttribute('aria-label') && !n.textContent.trim()).length",
    )
    assert unnamed == 0
    cycle = page.locator('.pk-picture[style*="recording"] .pk-plot')
    cycle.focus()
    count = page.locator('input[data-key^="cycle "]:checked').count()
    page.keyboard.press("Enter")
    page.wait_for_function(f"document.querySelectorAll('input[data-key^=\"cycle \"]:checked').length === {count - 1}", timeout=WAIT)


def test_dark_theme_and_small_window(open_page, voila):
    page = open_page(f"{voila}/voila/render/case.ipynb?theme=dark", viewport={"width": 1100, "height": 900})
    ready(page)
    assert "dark" in page.locator(".pk").get_attribute("class").split()
    ink, paper = page.evaluate(
        "(() => { const s = getComputedStyle(document.querySelector('.pk')); return [s.color, s.backgroundColor]; })()"
    )
    assert contrast(ink, paper) > 7  # WCAG 2.2, 1.4.6: enhanced contrast (from memory)
    assert page.evaluate("document.documentElement.scrollWidth") <= 1100
    boxes = page.eval_on_selector_all(".pk-picture", "all => all.map(p => p.getBoundingClientRect().width)")
    assert min(boxes) > 220


def contrast(one: str, other: str) -> float:
    """Contrast ratio of two colours as WCAG defines it (relative luminance; from memory)."""

    def luminance(colour: str) -> float:
        parts = [float(part) / 255 for part in re.findall(r"[\d.]+", colour)[:3]]
        linear = [part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4 for part in parts]
        return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]

    light, dark = sorted((luminance(one), luminance(other)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def test_in_jupyterlab(open_page, desk: Path):
    """The first cell shows the workbench; typing in it is not taken for a command of the notebook."""
    with served("lab", desk, desk.parent) as address:
        page = open_page(f"{address}/lab/tree/case.ipynb")
        cell = page.locator(".jp-CodeCell .cm-content").first
        cell.wait_for(timeout=WAIT)
        page.wait_for_timeout(1500)
        cell.click()
        page.keyboard.press("Shift+Enter")
        ready(page)
        before, cells = shear(page), page.locator(".jp-Cell").count()
        page.locator('[data-key="tube.radius slider"]').focus()
        page.keyboard.press("ArrowRight")
        redrawn(page, before)
        page.locator('.pk-picture[style*="wall_shear_stress"] .pk-plot').focus()
        for key in ("a", "b", "x", "ArrowRight"):
            page.keyboard.press(key)
        assert page.locator(".jp-Cell").count() == cells
        page.close()
