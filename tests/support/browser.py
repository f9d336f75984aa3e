"""A real browser without a screen, for pages that stand in a file: Debian's Chromium, driven through ChromeDriver."""

from __future__ import annotations

import base64
import json
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from selenium import webdriver
from selenium.webdriver.chrome.service import Service

from tests.support.tools import need

FLAGS = (
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--disable-dev-shm-usage",
    "--autoplay-policy=no-user-gesture-required",
)


class Browser:
    """One window; `seen` collects what the page asked for and complained about."""

    def __init__(self, driver: webdriver.Chrome):
        self.driver = driver

    def open(self, page: Path, *, width: int = 1280, height: int = 900, dark: bool = False) -> None:
        """Load the file at that size, in the light or dark theme."""
        self.command(
            "Emulation.setDeviceMetricsOverride", width=width, height=height, deviceScaleFactor=1, mobile=width < 600
        )
        scheme = "dark" if dark else "light"
        self.command("Emulation.setEmulatedMedia", features=[{"name": "prefers-color-scheme", "value": scheme}])
        self.driver.get(page.as_uri())

    def command(self, name: str, **parameters: Any) -> dict[str, Any]:
        """A command of the DevTools protocol."""
        return dict(self.driver.execute_cdp_cmd(name, parameters) or {})

    def run(self, script: str, *arguments: Any) -> Any:
        """What a script in the page returns."""
        return self.driver.execute_script(script, *arguments)

    def screenshot(self) -> bytes:
        """The whole page as PNG."""
        return base64.b64decode(self.command("Page.captureScreenshot", captureBeyondViewport=True)["data"])

    def pdf(self) -> bytes:
        """The page as it prints."""
        return base64.b64decode(self.command("Page.printToPDF", preferCSSPageSize=True)["data"])

    def complaints(self) -> list[str]:
        """Errors and warnings of the console since the last call."""
        return [entry["message"] for entry in self.driver.get_log("browser")]

    def requests(self) -> list[str]:
        """The addresses that pages asked for since the last call, data inside the page left out."""
        entries = [json.loads(entry["message"])["message"] for entry in self.driver.get_log("performance")]
        sent = [e["params"]["request"]["url"] for e in entries if e["method"] == "Network.requestWillBeSent"]
        return [url for url in sent if not url.startswith(("data:", "blob:"))]


@contextmanager
def browser(profile: Path) -> Iterator[Browser]:
    """A browser with a new, empty profile in the folder `profile`."""
    chromium, driver_path = need("chromium"), need("chromedriver")
    options = webdriver.ChromeOptions()
    options.binary_location = chromium
    for flag in (*FLAGS, f"--user-data-dir={profile}"):
        options.add_argument(flag)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
    driver = webdriver.Chrome(options=options, service=Service(executable_path=driver_path))
    try:
        window = Browser(driver)
        driver.get("about:blank")
        window.requests()  # those of the browser's own first page
        yield window
    finally:
        driver.quit()
