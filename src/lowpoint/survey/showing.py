"""A survey as lines on a terminal: how the list was read, what is wrong with it, and the items, worst first."""

from __future__ import annotations

import math
import re
import textwrap
from collections import Counter
from collections.abc import Iterator

from lowpoint.problems import counted
from lowpoint.survey.best import best_of, best_words
from lowpoint.survey.fields import BY_KEY
from lowpoint.survey.items import ORDER, verdict
from lowpoint.survey.model import Item, Reading, Survey
from lowpoint.survey.staying import stay_words
from lowpoint.survey.worded import in_system

__all__ = ["WIDTH", "problem_lines", "reading_lines", "survey_lines", "wrapped"]

SHOWN = 20
"""Problems and items that are shown; the rest is counted."""
WIDTH, LEAST = 100, 60
"""Columns of a terminal whose width is not known, and the fewest that lines are broken to."""
HANGING = "      "
ALSO = 3
"""Other remedies that are named on a terminal."""
_WORST_OF = re.compile(r"; the worst of \d+ cases")
_UNITS = re.compile(r"(\d) (%|bar|psia?|mm|Kv|Cv)(?!\w)")
"""A number and its unit, which stay on one line."""


def reading_lines(reading: Reading, most: int = SHOWN) -> Iterator[str]:
    """How a list was read: its columns, what is missing, and what is wrong."""
    used = [column for column in reading.columns if column.status == "used"]
    yield f"{reading.path}: {len(used)} columns read from {', '.join(reading.sheets) or 'no sheet'}"
    for column in used:
        yield f"  {column.cell:>6}  {_named(column.field)}" + (f" [{column.unit}]" if column.unit else "")
    if reading.missing:
        yield "required and not there: " + "; ".join(reading.missing)
    absent = [_named(key) for key in reading.absent]
    if absent:
        yield "optional and not there: " + ", ".join(absent)
    unknown = reading.unknown()
    if unknown:
        yield f"unknown and not used ({len(unknown)}): " + _shortened(
            [f"{column.cell} '{' '.join(column.heading.split())}'" for column in unknown], most)  # fmt: skip
    for note in reading.notes:
        yield f"note: {note}"
    yield from problem_lines(reading, most)


def problem_lines(reading: Reading, most: int = SHOWN, width: int | None = None) -> Iterator[str]:
    """What is wrong with a list, cell by cell; a problem a line where no width is given."""
    if reading.problems:
        yield f"wrong with the list ({len(reading.problems)}):"
        for problem in reading.problems[:most]:
            yield from wrapped(problem.sentence(), width, "  ", HANGING)
        if len(reading.problems) > most:
            yield f"  ... and {len(reading.problems) - most} more; --json names them all"


def _named(key: str) -> str:
    return BY_KEY[key].heading if key in BY_KEY else key.capitalize()


def _shortened(texts: list[str], most: int) -> str:
    return ", ".join(texts[:most]) + (f" ... and {len(texts) - most} more" if len(texts) > most else "")


def survey_lines(
    survey: Survey, most: int = SHOWN, system: str = "metric", width: int = WIDTH
) -> Iterator[str]:  # fmt: skip
    """Counts, the items that fail or have no answer and why, and the nearest of the others; lines of some width."""
    survey = in_system(survey, system)
    counts = Counter(item.regime for item in survey.items)
    said = [f"{counts[word]} {word}" for word in ORDER if counts[word]]
    said += [f"{counts[None]} without an answer"] if counts[None] else []
    items, cases = counted(len(survey.items), "item"), counted(survey.cases.count, "case")
    yield from wrapped(f"{items}, {cases}; by their worst case: {', '.join(said) or 'none'}", width)
    failing = sorted((i for i in survey.items if i.fails), key=_by_margin)
    yield from _listed(survey, "fail", failing, most, system, width)
    unanswered = [i for i in survey.items if i.unanswered and not i.fails]
    yield from _listed(survey, "have cases without an answer", unanswered, most, system, width)
    yield from _errors(survey, most, width)
    kept = sorted((i for i in survey.items if not i.fails and not i.unanswered), key=_by_margin)
    yield from _listed(survey, "are kept, nearest first", kept, 5, system, width)


def wrapped(text: str, width: int | None, first: str = "", then: str | None = None) -> list[str]:
    """A text in lines of some width, never cut within a word; None: in one line.

    ``first``: what stands before the first line. ``then``: before the others, four spaces where it is not given.
    """
    if width is None:
        return [first + text]
    hanging = "    " if then is None else then
    lines = textwrap.wrap(_UNITS.sub("\\1\xa0\\2", text), max(width, LEAST), initial_indent=first,
                          subsequent_indent=hanging, break_long_words=False, break_on_hyphens=False)  # fmt: skip
    return [line.replace("\xa0", " ") for line in lines]


def _by_margin(item: Item) -> tuple[bool, float]:
    return item.regime != "flashing", math.inf if math.isnan(item.margin) else item.margin


def _listed(survey: Survey, what: str, items: list[Item], most: int, system: str, width: int) -> Iterator[str]:
    if not items:
        return
    yield f"{len(items)} {what}:"
    shown = items[:most]
    tags = max(len(item.tag) for item in shown)
    states = max(len(verdict(item.regime, item.basis)) for item in shown)
    for item in shown:
        state = verdict(item.regime, item.basis)
        first = f"  {item.tag:<{tags}}  {state:<{states}}  "
        yield from wrapped(_in_short(survey, item), width, first, HANGING)
        for line in _more(survey, item, system):
            yield from wrapped(line, width, HANGING, HANGING + "  ")
    if len(items) > most:
        yield f"  ... and {len(items) - most} more; -o, --html and --json tell of them all"


def _in_short(survey: Survey, item: Item) -> str:
    """Why, without the verdict that stands beside it."""
    why = item.why.replace(f"{verdict(item.regime, item.basis)}: ", "", 1)
    case = survey.cases.case[item.worst] if item.worst >= 0 else None
    if case:
        why = case + why.removeprefix(f"case '{case}'")
    for long, short in ((" is not above the ", " <= "), (" is above the ", " > "), (", margin ", ", ")):
        why = why.replace(long, short, 1)
    return _WORST_OF.sub("", why)


def _more(survey: Survey, item: Item, system: str) -> Iterator[str]:
    """How sure the verdict is, where that is not plain, and what would cure a failure."""
    found = survey.sensitivity
    told = found is not None and item.worst >= 0 and not math.isnan(item.margin)
    plain = found is not None and item.fails and found.stays[item.worst] <= 0.0
    if found is not None and told and not plain and (item.fails or not item.unanswered):
        yield stay_words(found, item.worst, survey.findings, system)
    remedies = survey.remedies.get(item.tag, ())
    if remedies:
        best = best_of(remedies)
        also = list(dict.fromkeys(remedy.title for remedy in remedies if remedy.cures and remedy is not best))
        head = "" if best is not None and best.kind == "flashing" else "remedy: "
        yield f"{head}{best_words(item, remedies, brief=True)}" + (f"; also: {_shortened(also, ALSO)}" if also else "")


def _errors(survey: Survey, most: int, width: int) -> Iterator[str]:
    """Why cases have no answer, but for what the list's problems have said."""
    told = {problem.sentence() for problem in survey.reading.problems}
    lines = []
    for place, errors in enumerate(survey.findings.errors):
        tag, case = survey.cases.tag[place], survey.cases.case[place] or f"row {survey.cases.row[place]}"
        lines += [f"  {tag} {case}: {error}" for error in errors if error not in told]
    if lines:
        yield "without an answer, because:"
        for line in lines[:most]:
            yield from wrapped(line.lstrip(), width, "  ", HANGING)
        if len(lines) > most:
            yield f"  ... and {len(lines) - most} more; --json names them all"
