"""A survey as lines on a terminal: how the list was read, what is wrong with it, and the items, worst first."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterator

from lowpoint.problems import counted
from lowpoint.survey.fields import BY_KEY
from lowpoint.survey.items import ORDER, verdict
from lowpoint.survey.model import Item, Reading, Survey

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


def survey_lines(survey: Survey, most: int = SHOWN) -> Iterator[str]:
    """Counts, the items that fail or have no answer, and the nearest of the others."""
    counts = Counter(item.regime for item in survey.items)
    said = [f"{counts[word]} {word}" for word in ORDER if counts[word]]
    said += [f"{counts[None]} without an answer"] if counts[None] else []
    items, cases = counted(len(survey.items), "item"), counted(survey.cases.count, "case")
    yield f"{items}, {cases}; by their worst case: {', '.join(said) or 'none'}"
    failing = sorted((i for i in survey.items if i.fails), key=_by_margin)
    yield from _listed("fail", failing, most)
    yield from _listed("have cases without an answer", [i for i in survey.items if i.unanswered and not i.fails], most)
    kept = sorted((i for i in survey.items if not i.fails and not i.unanswered), key=_by_margin)
    yield from _listed("are kept, nearest first", kept, 5)
    yield from _errors(survey, most)


def _by_margin(item: Item) -> float:
    return math.inf if math.isnan(item.margin) else item.margin


def _listed(what: str, items: list[Item], most: int) -> Iterator[str]:
    if items:
        yield f"{len(items)} {what}:"
        width = max(len(item.tag) for item in items[:most])
        for item in items[:most]:
            yield f"  {item.tag:<{width}}  {verdict(item.regime, item.basis):<20}  {item.why}"
        if len(items) > most:
            yield f"  ... and {len(items) - most} more"


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
