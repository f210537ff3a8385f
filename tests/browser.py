"""A real Chromium for tests, headless, over its own driver: a fresh profile, no network of its own."""

from __future__ import annotations

import base64
import json
import shutil
from pathlib import Path
from typing import Any

import pytest

__all__ = ["Browser", "start_browser"]

_BROWSERS = ("chromium", "chromium-browser", "google-chrome-stable", "google-chrome")
_FLAGS = (
    "--headless=new", "--no-sandbox", "--disable-gpu", "--disable-dev-shm-usage", "--disable-quic", "--no-first-run",
    "--disable-background-networking", "--disable-component-update", "--disable-sync", "--disable-default-apps",
    "--disable-extensions", "--lang=en-GB", "--force-color-profile=srgb", "--hide-scrollbars",
)  # fmt: skip
_OWN = ("file:", "data:", "about:", "blob:", "chrome:")
"""What a page that stands for itself may ask for."""


def start_browser(profile: Path) -> Browser:
    """A browser on a fresh profile; the test skips where there is none."""
    pytest.importorskip("selenium", reason="selenium (extra 'test') is not installed")
    program = next(filter(None, map(shutil.which, _BROWSERS)), None)
    driver = shutil.which("chromedriver")
    if program is None or driver is None:
        pytest.skip("no Chromium with its driver on this machine (on Debian: chromium chromium-driver)")
    return Browser(program, driver, profile)


class Browser:
    """The browser with what these tests ask of it; ``driver`` is selenium's own."""

    def __init__(self, program: str, driver: str, profile: Path) -> None:
        from selenium import webdriver
        from selenium.webdriver.chrome.service import Service

        options = webdriver.ChromeOptions()
        options.binary_location = program
        for flag in (*_FLAGS, f"--user-data-dir={profile}"):
            options.add_argument(flag)
        options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
        # The path of the driver is given, so nothing is looked up or fetched.
        self.driver = webdriver.Chrome(options=options, service=Service(executable_path=driver))
        self.driver.execute_cdp_cmd("Network.enable", {})
        self.driver.execute_cdp_cmd("Log.enable", {})

    def open(self, page: Path) -> None:
        """Show a file, with the logs of before put away."""
        for name in ("browser", "performance"):
            self.driver.get_log(name)
        self.driver.get(page.resolve().as_uri())

    def end(self) -> None:
        self.driver.quit()

    def complaints(self) -> list[str]:
        """What the console said since the last look: errors, warnings, refusals by the page's content rule."""
        return [f"{entry['level']}: {entry['message']}" for entry in self.driver.get_log("browser")]

    def traffic(self) -> list[dict[str, Any]]:
        """What the browser reports of its network since the last look."""
        events = [json.loads(entry["message"])["message"] for entry in self.driver.get_log("performance")]
        return [event for event in events if event["method"].startswith("Network.")]

    def strangers(self) -> list[str]:
        """Addresses beyond the page itself that it asked for since the last look, refused or not."""
        sent = (event["params"] for event in self.traffic() if event["method"] == "Network.requestWillBeSent")
        return [one["request"]["url"] for one in sent if not one["request"]["url"].startswith(_OWN)]

    def run(self, script: str, *arguments: Any) -> Any:
        """What a script returns in the page."""
        return self.driver.execute_script(script, *arguments)

    def screen(self, width: int, height: int, *, dark: bool = False, phone: bool = False) -> None:
        """Size of the screen and the reader's wish for dark pages."""
        metrics = {"width": width, "height": height, "deviceScaleFactor": 2 if phone else 1, "mobile": phone}
        self.driver.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", metrics)
        feature = {"name": "prefers-color-scheme", "value": "dark" if dark else "light"}
        self.driver.execute_cdp_cmd("Emulation.setEmulatedMedia", {"features": [feature]})

    def script_allowed(self, allowed: bool) -> None:
        """Switch script on or off for the pages that follow."""
        self.driver.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": not allowed})

    def picture(self, whole: bool = False) -> bytes:
        """What is seen, as PNG; ``whole``: the page to its end."""
        found = self.driver.execute_cdp_cmd("Page.captureScreenshot", {"format": "png", "captureBeyondViewport": whole})
        return base64.b64decode(found["data"])

    def paper(self) -> bytes:
        """The page as it prints, PDF."""
        found = self.driver.execute_cdp_cmd("Page.printToPDF", {"preferCSSPageSize": True, "printBackground": True})
        return base64.b64decode(found["data"])
