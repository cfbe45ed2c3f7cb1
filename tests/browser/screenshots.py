"""Takes the screenshots that people look at: python -m tests.browser.screenshots FOLDER.

The wall-shear workbench at 1440 and 1100 pixels, light and dark. The one at 1440, light, stands in the README.
"""

from __future__ import annotations

import os
import shutil
import sys
import tempfile
from pathlib import Path

from .serving import browser, served, write_notebook

DEMO = Path(__file__).resolve().parents[2] / "data_demo"
SHOTS = (("wall_shear_1440", 1440, "light"), ("wall_shear_1100", 1100, "light"), ("wall_shear_1440_dark", 1440, "dark"))


def main(target: Path, chromium: str) -> None:
    target.mkdir(parents=True, exist_ok=True)
    with tempfile.TemporaryDirectory() as place:
        home = Path(place)
        folder = home / "notebooks"
        folder.mkdir()
        shutil.copytree(DEMO / "forearm", folder / "forearm")
        shutil.copy(DEMO / "forearm.toml", folder)
        write_notebook(folder / "shot.ipynb", "from pulsekit.workbench import WallShearWorkbench\nWallShearWorkbench('forearm.toml')")
        with served("voila", folder, home) as address, browser(chromium) as driver:
            for name, width, theme in SHOTS:
                page = driver.new_page(viewport={"width": width, "height": 900})
                page.goto(f"{address}/voila/render/shot.ipynb?theme={theme}", wait_until="domcontentloaded")
                page.wait_for_selector(".pk path.pk-line", timeout=90_000)
                page.wait_for_timeout(2500)
                page.screenshot(path=target / f"{name}.png")
                page.close()


if __name__ == "__main__":
    main(Path(sys.argv[1]), os.environ.get("PULSEKIT_CHROMIUM", "/usr/bin/chromium"))
