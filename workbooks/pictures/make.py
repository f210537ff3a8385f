"""Takes the pictures of the survey's page for README.md: real Chromium over its own driver (selenium), the sample list.

python workbooks/pictures/make.py
"""

from __future__ import annotations

import shutil
import tempfile
from pathlib import Path

from selenium import webdriver
from selenium.webdriver.chrome.options import Options
from selenium.webdriver.chrome.service import Service

from lowpoint.faces.cli import main

HERE = Path(__file__).parent
ITEM = "26-PCV-604"
"""The failing item whose section is shown."""
FLAGS = ("--headless", "--no-sandbox", "--disable-gpu", "--window-size=1260,1000", "--hide-scrollbars")


def take() -> None:
    options = Options()
    for flag in FLAGS:
        options.add_argument(flag)
    options.binary_location = shutil.which("chromium") or ""
    with tempfile.TemporaryDirectory() as folder:
        page = Path(folder, "verdicts.html")
        main(["survey", str(HERE.parent / "kestrel-bay.xlsx"), "--html", str(page)])
        browser = webdriver.Chrome(options=options, service=Service(shutil.which("chromedriver")))
        try:
            browser.get(page.as_uri())
            browser.save_screenshot(str(HERE / "survey-page.png"))
            heading = next(h for h in browser.find_elements("css selector", "h3") if ITEM in h.text)
            browser.execute_script("arguments[0].scrollIntoView()", heading)
            browser.save_screenshot(str(HERE / "survey-item.png"))
        finally:
            browser.quit()


if __name__ == "__main__":
    take()
