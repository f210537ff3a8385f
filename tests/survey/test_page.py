"""The page of a survey in a real browser: filter, sort, phone, paper, hostile texts, no network, no script."""

from __future__ import annotations

import datetime
import io
import math
import re
import struct
import zlib
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from browser import Browser
from lowpoint.survey import Survey, survey_list
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.page import write_page
from survey_lists import GOOD, HEADINGS, write_csv, write_xlsx

DAY = datetime.date(2026, 3, 4)
HOSTILE = ("<script>window.hit=1</script>", "</script><img src=x onerror=window.hit=1>", "\"'`&amp;<b onclick=x>",
           "a\u2028b\u2029c\u202ed", "W" * 300, "{{ 7*7 }}{% raw %}", "javascript:window.hit=1")  # fmt: skip
LONG = 1700
"""Cases of a list that is too long to stand whole in the page itself."""


def _hostile(tmp_path: Path, remedy: Remedy) -> Path:
    rows = [[text, text, *GOOD[2:6], p2, *GOOD[7:], text] for text in HOSTILE for p2 in (4.2, 0.4)]
    spoilt = ["X", HOSTILE[1], *GOOD[2:4], "<b>11,0</b>", *GOOD[5:], None]
    found = survey_list(write_xlsx(tmp_path / "odd.xlsx", (*HEADINGS, "Service"), [*rows, spoilt], "<i>List"))
    found = replace(_uncleaned(found), reading=replace(found.reading, path="<i>odd.xlsx"))
    remedies = {item.tag: (replace(remedy, text=HOSTILE[0], cautions=(HOSTILE[1],)),) for item in found.items}
    write_page(replace(found, remedies=remedies), tmp_path / "odd.html", today=DAY)
    return tmp_path / "odd.html"


def _uncleaned(found: Survey) -> Survey:
    """The reader takes the signs out that steer a display; the page must stand them all the same."""
    raw = {" ".join(text.replace("\u202e", "").split()): text for text in HOSTILE}
    tags, services = (np.array([raw.get(text, text) for text in column], object)
                      for column in (found.cases.tag, found.cases.service))  # fmt: skip
    items = tuple(replace(item, tag=raw.get(item.tag, item.tag)) for item in found.items)
    return replace(found, cases=found.cases.changed(tag=tags, service=services), items=items)


def _long(tmp_path: Path) -> tuple[Survey, Path]:
    rows = [[f"{n // 100}-FCV-{n:05d}", *GOOD[1:6], 0.4 if n % 17 == 0 else 4.2, *GOOD[7:]] for n in range(LONG)]
    found = survey_list(write_csv(tmp_path / "long.csv", HEADINGS, rows))
    write_page(found, tmp_path / "long.html", pages=3, today=DAY)
    return found, tmp_path / "long.html"


# --- asking the page ---------------------------------------------------------------------------------------------


def _column(browser: Browser, heading: str) -> list[str]:
    script = """
      const n = Array.from(document.querySelectorAll('#table thead th')).findIndex(h => h.textContent === arguments[0]);
      return Array.from(document.querySelectorAll('#table tbody tr'), line => line.cells[n].textContent);"""
    found: list[str] = browser.run(script, heading)
    return found


def _count(browser: Browser) -> str:
    return str(browser.run("return document.getElementById('count').textContent"))


def _by_id(browser: Browser, name: str) -> Any:
    return browser.driver.find_element("id", name)


def _click_head(browser: Browser, heading: str) -> str | None:
    """Click a heading as a reader does; gives what it tells of the order."""
    head = next(h for h in browser.driver.find_elements("css selector", "#table thead th") if h.text == heading)
    browser.run("arguments[0].scrollIntoView({block: 'center', inline: 'center'})", head)
    head.find_element("tag name", "button").click()
    told: str | None = head.get_attribute("aria-sort")
    return told


# --- filter and sort ---------------------------------------------------------------------------------------------


def test_the_filter_narrows_and_the_count_says_so(browser: Browser, page: Path, kestrel: Survey) -> None:
    browser.open(page)
    tags, cases = kestrel.cases.tag.tolist(), kestrel.cases.case.tolist()
    assert _count(browser) == f"{len(tags)} cases."
    assert _column(browser, "Tag") == tags
    _by_id(browser, "find").send_keys("24-fcv MAX")
    wanted = [tag for tag, case in zip(tags, cases, strict=True) if "24-FCV" in tag and "max" in case]
    assert 0 < len(wanted) < len(tags)
    assert _column(browser, "Tag") == wanted
    assert _count(browser) == f"{len(wanted)} of {len(tags)} cases."
    _by_id(browser, "find").send_keys(" no such thing")
    assert _column(browser, "Tag") == []
    assert _count(browser) == f"No case of {len(tags)} fits."


def test_by_service_by_state_and_only_failing(browser: Browser, page: Path, kestrel: Survey) -> None:
    browser.open(page)
    services = kestrel.cases.service.tolist()
    _by_id(browser, "find").send_keys("blowdown")
    assert len(_column(browser, "Tag")) == sum("blowdown" in (text or "") for text in services) > 0
    _by_id(browser, "find").clear()
    regimes, fails = kestrel.findings.regime.tolist(), kestrel.findings.fails.tolist()
    options = _by_id(browser, "state").find_elements("tag name", "option")
    assert [o.text for o in options][1:4] == [f"{word} ({regimes.count(word)})" for word in ("flashing", "choked",
                                                                                             "damage")]  # fmt: skip
    next(o for o in options if o.text.startswith("no answer")).click()
    assert len(_column(browser, "Tag")) == regimes.count(None) > 0
    next(o for o in options if o.text.startswith("damage")).click()
    assert len(_column(browser, "Tag")) == regimes.count("damage")
    _by_id(browser, "failing").click()
    both = sum(bool(f) and r == "damage" for f, r in zip(fails, regimes, strict=True))
    assert len(_column(browser, "Tag")) == both
    options[0].click()
    assert len(_column(browser, "Tag")) == sum(fails)
    assert set(_column(browser, "Fails")) == {"yes"}


def test_numbers_sort_as_numbers_both_ways_with_the_missing_last(browser: Browser, page: Path, kestrel: Survey) -> None:
    browser.open(page)
    flows = [f"{q * 3600:.4g}" for q in kestrel.cases.flow.tolist()]
    assert sorted(flows) != sorted(flows, key=float)  # sorting as text would be seen
    margins = [round(100 * m, 1) for m in kestrel.findings.margin.tolist() if not math.isnan(m)]
    for told, down in (("ascending", False), ("descending", True)):
        assert _click_head(browser, "Margin [%]") == told
        shown = _column(browser, "Margin [%]")
        assert [float(x) for x in shown if x] == pytest.approx(sorted(margins, reverse=down), abs=0.051)
        assert all(x == "" for x in shown[len(margins) :])
        assert len(shown) == kestrel.cases.count > len(margins)
    assert _click_head(browser, "Margin [%]") is None
    assert _column(browser, "Tag") == kestrel.cases.tag.tolist()
    _click_head(browser, "Flow used [m³/h]")
    shown = [float(x) for x in _column(browser, "Flow used [m³/h]") if x]
    assert shown == sorted(shown)
    assert len(browser.driver.find_elements("css selector", "th[aria-sort]")) == 1


def test_words_sort_and_equals_keep_the_order_of_the_list(browser: Browser, page: Path, kestrel: Survey) -> None:
    browser.open(page)
    _click_head(browser, "Case")
    pairs = sorted(zip(kestrel.cases.case.tolist(), range(kestrel.cases.count), strict=True))
    assert _column(browser, "Tag") == [kestrel.cases.tag[place] for _, place in pairs]
    _click_head(browser, "Verdict")  # by severity, not by letter
    states = [text.split(" (")[0] for text in _column(browser, "Verdict")]
    order = ["flashing", "choked", "damage", "constant", "cavitating", "incipient", "unjudged", "clear", "no answer"]
    assert states == sorted(states, key=order.index)
    assert set(states) == set(order)


def test_a_long_list(browser: Browser, tmp_path: Path) -> None:
    """Drawn in steps, sorted and filtered as a whole; without script it says what it leaves out."""
    found, path = _long(tmp_path)
    failing = int(found.findings.fails.sum())
    browser.open(path)
    assert len(_column(browser, "Tag")) == 200
    assert _count(browser) == f"{LONG} cases, the first 200 are shown."
    _by_id(browser, "more").click()
    assert len(_column(browser, "Tag")) == 400
    _click_head(browser, "Tag")
    _click_head(browser, "Tag")
    assert _column(browser, "Tag")[0] == f"16-FCV-{LONG - 1:05d}"
    _by_id(browser, "failing").click()
    assert _count(browser) == f"{failing} of {LONG} cases."
    assert not _by_id(browser, "more").is_displayed()
    assert len(browser.driver.find_elements("css selector", "article.item")) == 3
    assert f"The 3 worst of {failing} failing items" in _by_id(browser, "items").text
    browser.script_allowed(False)
    browser.open(path)
    body = browser.driver.find_element("tag name", "body").text
    assert f"the {failing} first cases that fail or have no answer are below" in body


# --- without script, on a phone, on paper ------------------------------------------------------------------------


def test_without_script_everything_is_there(browser: Browser, page: Path, kestrel: Survey) -> None:
    browser.script_allowed(False)
    browser.open(page)
    assert len(browser.driver.find_elements("css selector", "#table tbody tr")) == kestrel.cases.count
    assert not _by_id(browser, "controls").is_displayed()
    assert not browser.driver.find_elements("css selector", "#table button")
    assert "All cases are below" in browser.driver.find_element("tag name", "body").text


@pytest.mark.parametrize("width", [320, 390, 768])
def test_no_sideways_scroll_on_small_screens(
    browser: Browser, page: Path, remedy: Remedy, tmp_path: Path, width: int
) -> None:
    browser.screen(width, 844, phone=True)
    for path in (page, _hostile(tmp_path, remedy)):
        browser.open(path)
        browser.run("document.querySelectorAll('details').forEach(d => { d.open = true; })")
        wide, window = browser.run("return [document.documentElement.scrollWidth, window.innerWidth]")
        assert wide <= window == width


def _paper(browser: Browser) -> tuple[int, str]:
    pypdf = pytest.importorskip("pypdf", reason="pypdf (extra 'test') is not installed")
    read = pypdf.PdfReader(io.BytesIO(browser.paper()))
    return len(read.pages), "\n".join(each.extract_text() for each in read.pages)


@pytest.mark.parametrize("script", [True, False])
def test_paper_shows_all_and_opens_the_workings(browser: Browser, tmp_path: Path, kestrel: Survey,
                                                script: bool) -> None:  # fmt: skip
    pages = 3
    write_page(kestrel, tmp_path / "page.html", pages=pages, today=DAY)
    browser.script_allowed(script)
    browser.open(tmp_path / "page.html")
    assert len(browser.driver.find_elements("css selector", "details")) == pages
    assert not browser.driver.find_elements("css selector", "details[open]")
    sheets, text = _paper(browser)
    assert sheets > pages + 3  # each item begins a sheet; so do the table, what is wrong, and the definitions
    assert len(re.findall(r"Equation,\s+with\s+numbers", text)) >= pages  # heads of the tables of the workings
    assert "only failing" not in text  # controls stay on the screen
    for item in kestrel.items:
        assert item.tag in text
    assert not browser.driver.find_elements("css selector", "details[open]")  # and are closed again after


def _pixels(png: bytes) -> bytes:
    """The lines of a PNG, filtered as they stand in it (PNG specification: IHDR, then IDAT through zlib)."""
    place, data = 8, b""
    while place < len(png):
        size, kind = struct.unpack(">I4s", png[place : place + 8])
        data += png[place + 8 : place + 8 + size] if kind == b"IDAT" else b""
        place += size + 12
    return zlib.decompress(data)


def test_light_and_dark_are_drawn(browser: Browser, page: Path) -> None:
    seen = []
    for dark in (False, True):
        browser.screen(1280, 900, dark=dark)
        browser.open(page)
        pixels = _pixels(browser.picture())
        assert len(set(pixels)) > 64  # a blank picture has a handful of values
        seen.append(browser.run("return getComputedStyle(document.body).backgroundColor"))
    assert seen == ["rgb(255, 255, 255)", "rgb(18, 25, 31)"]


# --- what it says ------------------------------------------------------------------------------------------------


def test_what_the_page_holds(browser: Browser, page: Path, kestrel: Survey) -> None:
    browser.open(page)
    text = browser.driver.find_element("tag name", "body").text
    assert browser.driver.title == "Cavitation survey: kestrel.xlsx"
    for words in ("2026-03-04", kestrel.reading.fingerprint, "Lowpoint supports a qualified engineer",
                  f"{len(kestrel.items)} items, {kestrel.cases.count} cases", "(p1-pv)/(p1-p2)"):  # fmt: skip
        assert words in text
    regimes = kestrel.findings.regime.tolist()
    counts = browser.run("return Array.from(document.querySelectorAll('#summary .columns tbody tr'), "
                         "r => [r.cells[0].textContent, Number(r.cells[2].textContent)])")  # fmt: skip
    assert dict(counts) == {word or "no answer": regimes.count(word) for word in set(regimes)}
    for problem in kestrel.reading.problems:
        assert problem.remedy in text
    failing = [item for item in kestrel.items if item.fails]
    shown = {h.text.split(" ")[0]: h for h in browser.driver.find_elements("css selector", "article.item h3")}
    assert set(shown) == {item.tag for item in failing}
    item = failing[0]
    own = shown[item.tag].find_element("xpath", "..").text
    assert "raise the outlet pressure" in own.lower()
    assert "every case passes" in own
    assert "1.5 bar" in own
    assert "+25.0 %" in own
    assert "the line downstream must stand it" in own.lower()


def test_the_margin_of_a_case_by_hand(browser: Browser, tmp_path: Path) -> None:
    """(5.8 - 0.0234)/(5.8 - 3.5) = 2.5116, over the limit 2.1 less one 19.6 % (pv of water at 20 C: IAPWS-95)."""
    rows = [[*GOOD[:6], 3.5, *GOOD[7:]]]
    for system, inlet in (("metric", ("p1 used [bar a]", "5.8")), ("us", ("p1 used [psia]", "84.12"))):
        write_page(survey_list(write_csv(tmp_path / "list.csv", HEADINGS, rows)), tmp_path / "list.html",
                   system=system, today=DAY)  # fmt: skip
        browser.open(tmp_path / "list.html")
        assert _column(browser, "Margin [%]") == ["+19.6"]
        assert _column(browser, "Index here") == ["2.512"]
        assert _column(browser, inlet[0]) == [inlet[1]]  # 1 bar = 14.5038 psi (SI brochure)


def test_hostile_texts_are_inert(browser: Browser, remedy: Remedy, tmp_path: Path) -> None:
    path = _hostile(tmp_path, remedy)
    for script in (True, False):
        browser.script_allowed(script)
        browser.open(path)
        shown = [text for text in HOSTILE for _ in range(2)]
        assert _column(browser, "Tag")[: len(shown)] == shown
        assert _column(browser, "Service")[: len(shown)] == shown
        assert len(browser.driver.find_elements("css selector", "script")) == 2
        assert not browser.driver.find_elements("css selector", "img, b, i, [onclick], [onerror], [href^=javascript]")
        assert browser.run("return window.hit === undefined")
        assert browser.driver.title == "Cavitation survey: <i>odd.xlsx"
    browser.script_allowed(True)
    browser.open(path)
    _by_id(browser, "find").send_keys("</script><img")
    assert _column(browser, "Tag") == [HOSTILE[1], HOSTILE[1], "X"]  # the last by its case


def test_a_page_may_load_nothing(browser: Browser, page: Path) -> None:
    """The rule in the page's head refuses what a changed page would try; the console then tells of it."""
    browser.open(page)
    refused = browser.run("""
      const seen = []; document.addEventListener('securitypolicyviolation', e => seen.push(e.effectiveDirective));
      const add = (name, change) => { const e = document.createElement(name); change(e); document.head.append(e); };
      add('script', e => { e.textContent = 'window.hit = 1'; });
      add('style', e => { e.textContent = 'body { color: red }'; });
      add('img', e => { e.src = 'https://example.invalid/x.png'; });
      try { await fetch('https://example.invalid/'); } catch (e) { }
      for (let n = 0; n < 100 && seen.length < 4; n++) await new Promise(r => setTimeout(r, 20));
      return [seen, window.hit === undefined];""")
    assert [sorted(refused[0]), refused[1]] == [["connect-src", "img-src", "script-src-elem", "style-src-elem"], True]
    assert len(browser.complaints()) >= 4  # taken out of the log here, as is the traffic: these were asked for
    events = [event["params"] for event in browser.traffic()]
    tried = {event["requestId"] for event in events if "example.invalid" in event.get("request", {}).get("url", "")}
    assert tried <= {event["requestId"] for event in events if event.get("blockedReason") == "csp"}
