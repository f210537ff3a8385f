"""A survey on a terminal: short, no wider than it, and honest where something has no answer."""

from __future__ import annotations

from pathlib import Path

import pytest

from lowpoint.survey import Survey, survey_list
from lowpoint.survey.showing import problem_lines, survey_lines
from lowpoint.survey.surveying import Wishes
from survey_lists import GOOD, HEADINGS, kestrel_rows, write_csv


@pytest.fixture(scope="module")
def kestrel(tmp_path_factory: pytest.TempPathFactory) -> Survey:
    headings, rows = kestrel_rows()
    path = write_csv(tmp_path_factory.mktemp("list") / "list.csv", headings, rows)
    return survey_list(path, wishes=Wishes())


def _items(lines: list[str], tags: set[str]) -> dict[str, list[str]]:
    """The lines of each item."""
    found: dict[str, list[str]] = {}
    own: list[str] = []
    for line in lines:
        if line.startswith("without an answer, because"):
            break
        word = line.split()[0]
        if line.startswith("  ") and not line.startswith("   ") and word in tags:
            own = found.setdefault(word, [])
        if line.startswith("  "):
            own.append(line)
    return found


@pytest.mark.parametrize("system", ["metric", "us"])
@pytest.mark.parametrize("width", [80, 100, 160])
def test_no_line_is_wider_than_the_terminal(kestrel: Survey, width: int, system: str) -> None:
    lines = [*problem_lines(kestrel.reading, width=width), *survey_lines(kestrel, system=system, width=width)]
    assert max(map(len, lines)) <= width
    assert "\xa0" not in "".join(lines)


def test_an_item_takes_few_lines(kestrel: Survey) -> None:
    own = _items(list(survey_lines(kestrel)), {item.tag for item in kestrel.items})
    failing = [item.tag for item in kestrel.items if item.fails]
    assert len(failing) > 5
    assert {*failing[:5]} <= {*own}
    assert max(len(lines) for lines in own.values()) <= 6
    assert sum(len(own[tag]) for tag in failing if tag in own) <= 4 * len(failing)


def test_every_failing_item_has_its_remedy_and_its_margin(kestrel: Survey) -> None:
    own = _items(list(survey_lines(kestrel, most=1000, width=1000)), {item.tag for item in kestrel.items})
    for item in kestrel.items:
        if item.fails:
            text = " ".join(own[item.tag])
            assert "remedy: " in text or "flashing: staging cannot help" in text
            assert f"{100.0 * item.margin:+.1f} %" in text or item.regime == "flashing"


def test_in_us_units_no_pressure_is_in_bar(kestrel: Survey) -> None:
    text = "\n".join(survey_lines(kestrel, system="us", most=1000, width=1000))
    assert " psi" in text
    items = text.partition("without an answer, because")[0]
    assert " bar" not in items
    assert " Kv" not in items


def test_an_item_with_a_case_without_an_answer_is_not_counted_clear(tmp_path: Path) -> None:
    rows = [GOOD, (GOOD[0], "maximum", *GOOD[2:8], None, *GOOD[9:])]
    lines = list(survey_lines(survey_list(write_csv(tmp_path / "list.csv", HEADINGS, rows)), width=1000))
    assert lines[0] == "1 item, 2 cases; by their worst case: 1 without an answer"
    assert "  21-FCV-110  no answer  normal: clear (tested): index 3.61 > incipient limit 2.1" in "\n".join(lines)
    assert not any("stays clear" in line for line in lines)
