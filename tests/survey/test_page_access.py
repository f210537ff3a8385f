"""The page of a survey for every reader: headings and labels, contrast, pictures whose texts can be read."""

from __future__ import annotations

from itertools import pairwise
from pathlib import Path

import pytest

from browser import Browser


def test_headings_labels_and_ids(browser: Browser, page: Path) -> None:
    browser.open(page)
    levels = browser.run("return Array.from(document.querySelectorAll('h1,h2,h3,h4,h5,h6'), h => Number(h.tagName[1]))")
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(after - before <= 1 for before, after in pairwise(levels))
    ids = browser.run("return Array.from(document.querySelectorAll('[id]'), e => e.id)")
    assert len(ids) == len(set(ids))
    named = browser.run("return Array.from(document.querySelectorAll('[aria-labelledby]'), "
                        "e => e.getAttribute('aria-labelledby')).join(' ').split(' ')")  # fmt: skip
    assert set(named) <= set(ids)
    links = browser.run("return Array.from(document.querySelectorAll('a[href]'), a => a.getAttribute('href'))")
    assert {link[1:] for link in links} <= set(ids)
    assert browser.run(
        "return Array.from(document.querySelectorAll('input, select')).every(e => e.labels.length === 1)"
    )
    assert browser.run("return Array.from(document.querySelectorAll('svg')).every("
                       "s => s.querySelector('title').textContent && s.querySelector('desc').textContent)")  # fmt: skip
    assert browser.driver.find_element("id", "count").get_attribute("aria-live") == "polite"
    browser.driver.find_element("id", "find").send_keys("\t")
    outline = browser.run("return getComputedStyle(document.activeElement).outlineStyle")
    assert outline == "solid"  # the focus is seen


_CONTRAST = """
  const part = c => { c /= 255; return c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4; };
  const light = ([r, g, b]) => 0.2126 * part(r) + 0.7152 * part(g) + 0.0722 * part(b);
  const rgb = text => text.match(/[\\d.]+/g).map(Number);
  const ground = e => { for (; e; e = e.parentElement) {
    const c = rgb(getComputedStyle(e).backgroundColor); if (c.length < 4 || c[3] === 1) return c; } };
  const worst = {};
  const walker = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT);
  for (let n = walker.nextNode(); n; n = walker.nextNode()) {
    const e = n.parentElement;
    if (!n.data.trim() || e.closest('script, noscript, title, desc')) continue;
    const look = getComputedStyle(e);
    const [a, b] = [light(rgb(e.closest('svg') ? look.fill : look.color)), light(ground(e))];
    const ratio = (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05);
    if (ratio < 4.5) worst[e.tagName + '.' + (e.className.baseVal ?? e.className)] = ratio;
  }
  return worst;"""
"""Contrast of every text with what is behind it, by the formula of WCAG 2.2 (relative luminance); AA asks for 4.5."""


@pytest.mark.parametrize("dark", [False, True])
def test_contrast(browser: Browser, page: Path, dark: bool) -> None:
    browser.screen(1280, 900, dark=dark)
    browser.open(page)
    browser.run("document.querySelectorAll('details').forEach(d => { d.open = true; })")
    assert browser.run(_CONTRAST) == {}


def test_nothing_of_a_picture_is_cut_off_or_covered(browser: Browser, page: Path) -> None:
    browser.open(page)
    script = """
      const faults = [];
      document.querySelectorAll('svg.picture').forEach(svg => {
        const all = svg.getBoundingClientRect();
        const boxes = Array.from(svg.querySelectorAll('text'), t => [t.textContent, t.getBoundingClientRect()]);
        boxes.forEach(([words, b], n) => {
          if (b.left < all.left - 1 || b.right > all.right + 1 || b.top < all.top - 1 || b.bottom > all.bottom + 1)
            faults.push(['outside', svg.querySelector('title').textContent, words]);
          boxes.slice(n + 1).forEach(([others, o]) => {
            const w = Math.min(b.right, o.right) - Math.max(b.left, o.left);
            const h = Math.min(b.bottom, o.bottom) - Math.max(b.top, o.top);
            if (w > 1 && h > 3) faults.push(['over', svg.querySelector('title').textContent, words, others]);
          });
        });
      });
      return faults;"""
    assert browser.run("return document.querySelectorAll('svg.picture').length") > 0
    assert browser.run(script) == []
