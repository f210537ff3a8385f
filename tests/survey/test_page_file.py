"""The page as a file, and its drawings: the same bytes but for the date, nothing from elsewhere, looks that differ."""

from __future__ import annotations

import datetime
import re
from pathlib import Path
from xml.etree import ElementTree

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from lowpoint.errors import BookError
from lowpoint.survey import Survey, survey_list
from lowpoint.survey.outcome import Line, Picture
from lowpoint.survey.page import write_page
from lowpoint.survey.page.drawing import svg
from lowpoint.survey.page.numbers import figure
from lowpoint.survey.page.placing import Box, place_label
from lowpoint.survey.page.ticks import axis, ticks
from survey_lists import GOOD, HEADINGS, write_csv

DAY = datetime.date(2026, 3, 4)
SVG = "{http://www.w3.org/2000/svg}"


def test_the_same_bytes_but_for_the_date(kestrel: Survey, tmp_path: Path) -> None:
    pages = []
    for name, day in (("a", DAY), ("b", DAY), ("c", datetime.date(2027, 1, 31))):
        write_page(kestrel, tmp_path / f"{name}.html", today=day)
        pages.append((tmp_path / f"{name}.html").read_bytes())
    assert pages[0] == pages[1] != pages[2]
    assert pages[0].replace(b"2026-03-04", b"2027-01-31") == pages[2]


def test_nothing_comes_from_elsewhere(kestrel: Survey, tmp_path: Path) -> None:
    write_page(kestrel, tmp_path / "page.html", today=DAY)
    text = (tmp_path / "page.html").read_text(encoding="utf-8")
    links = set(re.findall(r'(?:href|src|action|data)="([^"]*)"', text))
    assert all(link.startswith("#") or link == "data:," for link in links)
    assert not re.search(r"url\(|@import|@font-face|<iframe|<object|<embed| style=", text)
    assert set(re.findall(r"https?://[^\s\"']+", text)) <= {"http://www.w3.org/2000/svg"}  # a name, not an address


def test_an_empty_list_and_a_list_that_is_kept(tmp_path: Path) -> None:
    for rows, words in (([], "0 items, 0 cases"), ([GOOD], "1 item, 1 case: <strong>0 items fail</strong>")):
        write_page(survey_list(write_csv(tmp_path / "list.csv", HEADINGS, rows)), tmp_path / "page.html", today=DAY)
        text = (tmp_path / "page.html").read_text(encoding="utf-8")
        assert words in text
        assert "<article" not in text


def test_a_damaged_letter_does_no_harm(tmp_path: Path) -> None:
    """Half a surrogate pair is no character of UTF-8; a file with it would not be read by anyone."""
    found = survey_list(write_csv(tmp_path / "list.csv", HEADINGS, [GOOD]))
    found.cases.service[0] = "half \ud800 a pair"
    write_page(found, tmp_path / "page.html", today=DAY)
    assert "half &#55296; a pair" in (tmp_path / "page.html").read_text(encoding="utf-8")


def test_the_file_of_before_stays_where_the_new_one_cannot_be_written(kestrel: Survey, tmp_path: Path) -> None:
    (tmp_path / "page.html").mkdir()
    with pytest.raises(BookError, match="the output must be a file"):
        write_page(kestrel, tmp_path / "page.html")
    with pytest.raises(BookError, match="folder does not exist"):
        write_page(kestrel, tmp_path / "nowhere" / "page.html")
    assert [path.name for path in tmp_path.iterdir()] == ["page.html"]


# --- drawings ----------------------------------------------------------------------------------------------------


def _picture(*lines: Line, **more: object) -> ElementTree.Element:
    return ElementTree.fromstring(svg(Picture("Title", "Flow", "Index", lines, **more), "p"))  # type: ignore[arg-type]


def test_lines_are_told_apart_without_colour() -> None:
    xs, ys = (1.0, 2.0, 3.0), (3.0, 2.0, 4.0)
    looks = [("line", "square"), ("line", "plus"), ("dashed", "triangle"), ("dashed", "cross"), ("dotted", "diamond"),
             ("points", "circle"), ("dashed", ""), ("dotted", "")]  # fmt: skip
    root = _picture(*(Line(f"line {n}", xs, ys, style, marker=marker) for n, (style, marker) in enumerate(looks)))
    groups = [g for g in root.iter(f"{SVG}g") if g.get("class", "").startswith("s")]
    shapes = {(_dash(group), _shape(group)) for group in groups}
    assert len(groups) == 2 * len(looks)  # the lines, and the legend's
    assert len(shapes) == len(looks)


def _dash(group: ElementTree.Element) -> str | None:
    strokes = [p for p in group.iter(f"{SVG}path") if p.get("stroke-width")]
    return (strokes[0].get("stroke-dasharray") or "whole") if strokes else None


def _shape(group: ElementTree.Element) -> str:
    """What is left of a marker when its place is taken away."""
    signs = [e for e in group if not e.get("stroke-width")]
    return re.sub(r"^M\S+ \S+m", "m", signs[0].get("d", "circle")) + str(signs[0].get("class")) if signs else ""


def test_texts_of_a_picture_are_escaped() -> None:
    bad = "<script>\"&'</script>"
    line = Line(bad, (1.0,), (2.0,), "points", (bad,))
    root = ElementTree.fromstring(svg(Picture(bad, bad, bad, (line,), ((1.0, bad),), bad), "p"))
    texts = [e.text for e in root.iter() if e.text]
    assert texts.count(bad) >= 6
    assert not list(root.iter(f"{SVG}script"))


def test_points_stand_where_the_scale_says() -> None:
    """Two points and the ticks beside them: a point on a tick stands on its line."""
    root = _picture(Line("a", (0.0, 10.0), (0.0, 4.0), "line", marker="circle"))
    circles = [(float(c.get("cx", "")), float(c.get("cy", ""))) for c in root.iter(f"{SVG}circle")][:2]
    names = {t.text: t for g in root.iter(f"{SVG}g") if g.get("class") == "ticks" for t in g.iter(f"{SVG}text")
             if g.get("text-anchor") == "middle"}  # fmt: skip
    assert [x for x, _ in circles] == [float(names[word].get("x", "")) for word in ("0", "10")]
    heights = [float(re.findall(r"M\S+ (\S+)H", p.get("d", ""))[0]) for g in root.iter(f"{SVG}g")
               if g.get("class") == "grid" for p in g]  # fmt: skip
    assert [y for _, y in circles] == [heights[0], heights[-1]]


NAN = float("nan")


@pytest.mark.parametrize("lines", [
    (), (Line("none", (), ()),), (Line("no number", (1.0, NAN), (NAN, 1.0)),), (Line("one", (5.0,), (0.0,), "points"),),
])  # fmt: skip
def test_pictures_with_hardly_anything(lines: tuple[Line, ...]) -> None:
    assert "nan" not in ElementTree.tostring(_picture(*lines)).decode()


@given(st.floats(-1e3, 1e3), st.floats(1e-6, 1e6))
def test_ticks_are_round_and_span_the_data(start: float, span: float) -> None:
    low = start * span
    found = np.array(ticks(low, low + span))
    step = found[1] - found[0]
    assert found[0] <= low + 1e-6 * step
    assert found[-1] >= low + span - 1e-6 * step
    assert 2 <= len(found) <= 8
    mantissa = step / 10.0 ** np.floor(np.log10(step) + 1e-9)
    assert np.isclose(mantissa, [1.0, 2.0, 2.5, 5.0, 10.0], rtol=1e-4).any()


def test_an_axis_begins_at_zero_where_that_shows_the_data_well() -> None:
    assert axis([2.0, 9.0])[0] == 0.0
    assert axis([90.0, 100.0])[0] > 0.0


def test_labels_keep_off_points_and_each_other() -> None:
    field = Box(0.0, 0.0, 400.0, 300.0)
    points = [(60.0, 150.0), (75.0, 152.0), (90.0, 148.0), (390.0, 5.0)]
    taken = [Box(x - 5, y - 5, x + 5, y + 5) for x, y in points]
    for x, y in points:
        label = place_label(x, y, "maximum", 13, taken, field)
        assert all(label.shared(other) == 0.0 for other in taken)
        assert label.shared(field) == pytest.approx((label.right - label.left) * (label.bottom - label.top))
        taken.append(label)


def test_labels_keep_off_the_lines() -> None:
    """Points just above a line: their names stand above them, not over it."""
    flat = Line("limit", (0.0, 10.0), (2.0, 2.0))
    root = _picture(flat, Line("cases", (3.0, 6.0), (2.1, 2.1), "points", ("minimum", "maximum")))
    line = next(p for p in root.iter(f"{SVG}path") if p.get("stroke-width"))
    height = float(line.get("d", "").split("L")[0].split(" ")[1])
    labels = [float(t.get("y", "")) for t in root.iter(f"{SVG}text") if t.get("class", "").startswith("label")]
    assert len(labels) == 2
    assert all(y < height for y in labels)


@pytest.mark.parametrize(("number", "text"), [
    (12345.6, "12346"), (0.0123456, "0.01235"), (3.0, "3"), (-94.25, "-94.25"), (float("nan"), ""), (0.0, "0"),
    (999.96, "1000"), (2.5e-7, "2.5e-07"), (100.0, "100"),
])  # fmt: skip
def test_figures(number: float, text: str) -> None:
    """Four significant figures, by hand."""
    assert figure(number) == text
