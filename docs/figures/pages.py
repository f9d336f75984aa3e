"""Pictures of the report page and the blind comparison of the demo design, as a browser shows them.

python docs/figures/pages.py      (from the top of the tree; needs Chromium and ChromeDriver)
"""

from __future__ import annotations

import tempfile
from pathlib import Path

from a2d.cli import main
from tests.support.browser import browser

HERE = Path(__file__).parent
DESIGN = str(HERE.parents[1] / "audio_examples" / "harbour_eq.toml")
BEGIN = "document.getElementById('begin').click()"


def draw() -> None:
    """Write `report.png` and `blind.png` beside this file."""
    with tempfile.TemporaryDirectory() as folder, browser(Path(folder) / "profile") as window:
        main(["convert", DESIGN, "--out", folder, "--report"])
        main(["render", DESIGN, "--out", folder, "--signal", "pink", "--rate", "48 kHz", "--match-level", "--blind"])
        window.open(Path(folder) / "harbour_eq.report.html", width=900, height=1000)
        window.driver.save_screenshot(str(HERE / "report.png"))
        window.open(Path(folder) / "harbour_eq.pink.48000.blind.html", width=900, height=560)
        window.run(BEGIN)
        window.driver.implicitly_wait(10)
        window.driver.find_element("css selector", "#run:not([hidden]) #hear-x").click()
        window.driver.save_screenshot(str(HERE / "blind.png"))


if __name__ == "__main__":
    draw()
