"""Measures key press to redrawn screen: python -m tests.browser.latency [CASE.toml].

The slider of the radius takes arrow keys on a Voila page of 1440 x 900 with every picture in view. The clock
starts at the keydown event and stops at the first frame after the wall shear curve changed; median of 40.
"""

from __future__ import annotations

import os
import shutil
import statistics
import sys
import tempfile
from pathlib import Path

from .serving import browser, served, write_notebook

WATCH = """
() => {
  window.pkTimes = [];
  const slider = document.querySelector('[data-key="tube.radius slider"]');
  slider.focus();
  slider.addEventListener('keydown', () => { window.pkStart = performance.now(); }, true);
  const observer = new MutationObserver(() => {
    if (!window.pkStart) return;
    const start = window.pkStart;
    window.pkStart = 0;
    requestAnimationFrame(() => requestAnimationFrame(() => window.pkTimes.push(performance.now() - start)));
  });
  observer.observe(document.querySelector('.pk'), { attributes: true, attributeFilter: ['data-redraws'] });
}
"""


def measure(page: object, count: int = 40) -> list[float]:
    """Milliseconds of each of ``count`` steps, after five that warm up."""
    page.evaluate(WATCH)
    for number in range(count + 5):
        before = page.evaluate("window.pkTimes.length")
        page.keyboard.press("ArrowRight" if number % 20 < 10 else "ArrowLeft")
        page.wait_for_function(f"window.pkTimes.length > {before}", timeout=10_000, polling=4)
        page.wait_for_timeout(30)
    return page.evaluate("window.pkTimes")[5 : count + 5]


def main(case: Path, chromium: str) -> float:
    with tempfile.TemporaryDirectory() as place:
        home = Path(place)
        folder = home / "notebooks"
        shutil.copytree(case.parent, folder)
        write_notebook(folder / "bench.ipynb", f"from pulsekit.workbench import WallShearWorkbench\nWallShearWorkbench({case.name!r})")
        with served("voila", folder, home) as address, browser(chromium) as driver:
            page = driver.new_page(viewport={"width": 1440, "height": 900})
            page.goto(f"{address}/voila/render/bench.ipynb", wait_until="domcontentloaded")
            page.wait_for_selector(".pk path.pk-line", timeout=60_000)
            page.wait_for_timeout(1000)
            times = measure(page)
    print(
        f"key press to redrawn screen: median {statistics.median(times):.0f} ms, quickest {min(times):.0f}, slowest {max(times):.0f} of {len(times)}"
    )
    return statistics.median(times)


if __name__ == "__main__":
    main(Path(sys.argv[1]), os.environ.get("PULSEKIT_CHROMIUM", "/usr/bin/chromium"))
