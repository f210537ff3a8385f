"""A survey as lines on a terminal: how the list was read, what is wrong with it, and the items, worst first."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterator

from lowpoint.problems import counted
from lowpoint.survey.fields import BY_KEY
from lowpoint.survey.items import ORDER, verdict
from lowpoint.survey.model import Item, Reading, Survey
from lowpoint.survey.staying import stay_words

__all__ = ["reading_lines", "survey_lines"]

SHOWN = 20
"""Problems and items that are shown; the rest is counted."""


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


def problem_lines(reading: Reading, most: int = SHOWN) -> Iterator[str]:
    """What is wrong with a list, cell by cell."""
    if reading.problems:
        yield f"wrong with the list ({len(reading.problems)}):"
        yield from (f"  {problem.sentence()}" for problem in reading.problems[:most])
        if len(reading.problems) > most:
            yield f"  ... and {len(reading.problems) - most} more; --json names them all"


def _named(key: str) -> str:
    return BY_KEY[key].heading if key in BY_KEY else key.capitalize()


def _shortened(texts: list[str], most: int) -> str:
    return ", ".join(texts[:most]) + (f" ... and {len(texts) - most} more" if len(texts) > most else "")


def survey_lines(survey: Survey, most: int = SHOWN, system: str = "metric") -> Iterator[str]:
    """Counts, the items that fail or have no answer, and the nearest of the others."""
    counts = Counter(item.regime for item in survey.items)
    said = [f"{counts[word]} {word}" for word in ORDER if counts[word]]
    said += [f"{counts[None]} without an answer"] if counts[None] else []
    items, cases = counted(len(survey.items), "item"), counted(survey.cases.count, "case")
    yield f"{items}, {cases}; by their worst case: {', '.join(said) or 'none'}"
    failing = sorted((i for i in survey.items if i.fails), key=_by_margin)
    yield from _listed(survey, "fail", failing, most, system)
    unanswered = [i for i in survey.items if i.unanswered and not i.fails]
    yield from _listed(survey, "have cases without an answer", unanswered, most, system)
    kept = sorted((i for i in survey.items if not i.fails and not i.unanswered), key=_by_margin)
    yield from _listed(survey, "are kept, nearest first", kept, 5, system)
    yield from _errors(survey, most)


def _by_margin(item: Item) -> float:
    return math.inf if math.isnan(item.margin) else item.margin


def _listed(survey: Survey, what: str, items: list[Item], most: int, system: str) -> Iterator[str]:
    if items:
        yield f"{len(items)} {what}:"
        width = max(len(item.tag) for item in items[:most])
        for item in items[:most]:
            yield f"  {item.tag:<{width}}  {verdict(item.regime, item.basis):<20}  {item.why}"
            yield from (f"  {'':<{width}}    {line}" for line in _more(survey, item, system))
        if len(items) > most:
            yield f"  ... and {len(items) - most} more"


def _more(survey: Survey, item: Item, system: str) -> Iterator[str]:
    """How sure the verdict is, and what would cure a failure."""
    if survey.sensitivity is not None and item.worst >= 0 and not math.isnan(item.margin):
        yield stay_words(survey.sensitivity, item.worst, survey.findings, system)
    remedies = survey.remedies.get(item.tag, ())
    for remedy in remedies:
        if remedy.kind == "flashing":
            yield from (remedy.text, *(f"  {line}" for line in remedy.cautions))
    found = [remedy for remedy in remedies if remedy.kind != "flashing"]
    cures = [remedy for remedy in found if remedy.cures]
    for remedy in cures[:1] or found[:1]:
        yield f"{'remedy' if remedy.cures else 'no cure was found; nearest to it'}: {remedy.text}"
    if len(cures) > 1:
        yield "also: " + ", ".join(dict.fromkeys(remedy.kind for remedy in cures[1:]))


def _errors(survey: Survey, most: int) -> Iterator[str]:
    """Why cases have no answer, but for what the list's problems have said."""
    told = {problem.sentence() for problem in survey.reading.problems}
    lines = []
    for place, errors in enumerate(survey.findings.errors):
        tag, case = survey.cases.tag[place], survey.cases.case[place] or f"row {survey.cases.row[place]}"
        lines += [f"  {tag} {case}: {error}" for error in errors if error not in told]
    if lines:
        yield "without an answer, because:"
        yield from lines[:most]
        if len(lines) > most:
            yield f"  ... and {len(lines) - most} more; --json names them all"
