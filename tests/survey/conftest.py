"""What tests of a survey's page share: a browser, a survey of Kestrel Bay with every kind of finding, and its page."""

from __future__ import annotations

import datetime
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import pytest

from browser import Browser, start_browser
from lowpoint.survey import Survey, survey_list
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.page import write_page
from survey_lists import kestrel_rows, write_xlsx


@pytest.fixture(scope="session")
def chromium(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Browser]:
    started = start_browser(tmp_path_factory.mktemp("browser") / "profile")
    yield started
    started.end()


@pytest.fixture
def browser(chromium: Browser) -> Iterator[Browser]:
    """Whatever a test does with it: no page complains on the console, and none asks for anything beyond itself."""
    chromium.screen(1280, 900)
    chromium.script_allowed(True)
    yield chromium
    complaints, strangers = chromium.complaints(), chromium.strangers()
    assert complaints == []
    assert strangers == []


@pytest.fixture(scope="session")
def remedy() -> Remedy:
    """A remedy as it is shown, with numbers that are easy to find; no verdict of it was computed."""
    return Remedy("back-pressure", "raise the outlet pressure by 1.5 bar", {"rise of p2": (1.5e5, "pressure")}, True,
                  0.25, ("clear",) * 3, ("the line downstream must stand it",))  # fmt: skip


@pytest.fixture(scope="session")
def kestrel(remedy: Remedy, tmp_path_factory: pytest.TempPathFactory) -> Survey:
    """The items of Kestrel Bay: every regime, rows without an answer, planted mistakes; with a remedy each."""
    found = survey_list(write_xlsx(tmp_path_factory.mktemp("list") / "kestrel.xlsx", *kestrel_rows()))
    return replace(found, remedies={item.tag: (remedy,) for item in found.items if item.fails})


@pytest.fixture(scope="session")
def page(kestrel: Survey, tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("page") / "kestrel.html"
    write_page(kestrel, path, today=datetime.date(2026, 3, 4))
    return path
