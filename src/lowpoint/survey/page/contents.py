"""What the page says of the whole list: counts, the worst, what is missing, numbered cautions, problems, tolerances."""

from __future__ import annotations

import math
from collections import Counter
from dataclasses import dataclass

import numpy as np

from lowpoint.problems import counted
from lowpoint.survey.fields import BY_KEY
from lowpoint.survey.items import ORDER, verdict
from lowpoint.survey.model import Item, Problem, Survey, absent
from lowpoint.survey.taken import DEFINITIONS, atmospheres, citations, defaults
from lowpoint.survey.tolerances import NAMES, WHY

__all__ = ["Note", "Summary", "case_name", "foundations", "numbered_notes", "problems_of",
           "summary_of", "worst_first"]  # fmt: skip

WORST = 10
MOST_PROBLEMS = 1000
"""Problems of a list that are shown; the rest is counted."""

MOST_COLUMNS = 40
"""Columns that are named in one line; the rest is counted."""
STATES = (
    ("Flashing", "The outlet is at or below the vapour pressure; no index makes that better."),
    ("Choked", "At its largest flow: a lower outlet pressure gives no more."),
    ("Vibration, damage, constant, incipient", "At or below the limit of that name, above every worse one."),
    ("Cavitating", "At or below a limit, with no worse one given: how badly is not known."),
    ("Clear", "Above the incipient limit."),
)
"""The states of the flow that the shared definitions do not explain, from worst to best."""


@dataclass(frozen=True)
class Note:
    """One caution with its number and how many cases it is said of."""

    number: int
    text: str
    cases: int


@dataclass(frozen=True)
class Summary:
    """Counts in words and numbers."""

    regimes: tuple[tuple[str, int, int], ...]
    """Regime (or ``no answer``), items by their worst case, cases; from worst to best, those that occur."""
    failing_items: int
    failing_cases: int
    items: int
    cases: int
    worst: tuple[tuple[Item, str, str], ...]
    """Item, name of its worst case, verdict."""
    missing: tuple[str, ...]


def worst_first(survey: Survey) -> list[Item]:
    """Items with an answer: failing before kept, flashing before all, then by margin; the list's order among equals."""

    def rank(item: Item) -> tuple[bool, bool, float]:
        return not item.fails, item.regime != "flashing", math.inf if math.isnan(item.margin) else item.margin

    return sorted((item for item in survey.items if item.worst >= 0), key=rank)


def case_name(survey: Survey, place: int) -> str:
    """The case's name, else its row."""
    return str(survey.cases.case[place] or f"row {survey.cases.row[place]}")


def summary_of(survey: Survey) -> Summary:
    """Counts by regime, the worst ten, what is missing."""
    by_item = Counter(item.regime for item in survey.items)
    by_case = Counter(survey.findings.regime.tolist())
    regimes = tuple((word or "no answer", by_item[word], by_case[word]) for word in (*ORDER, None)
                    if by_item[word] or by_case[word])  # fmt: skip
    worst = tuple((item, case_name(survey, item.worst), verdict(item.regime, item.basis))
                  for item in worst_first(survey)[:WORST])  # fmt: skip
    return Summary(regimes, sum(item.fails for item in survey.items), int(survey.findings.fails.sum()),
                   len(survey.items), survey.cases.count, worst, tuple(_missing(survey)))  # fmt: skip


def _missing(survey: Survey) -> list[str]:
    cases, findings = survey.cases, survey.findings
    answered = ~absent(findings.regime)
    valve = answered & (cases.kind == "valve")
    said = [f"Required column that is not there: {name}." for name in survey.reading.missing]
    for rows, text in (
        (~answered, "without an answer; the notes of the table say why"),
        (answered & np.isnan(findings.incipient), "without an incipient limit: never judged clear"),
        (answered & np.isnan(findings.margin) & ~findings.flashing, "without any limit that a margin could count to"),
        (answered & (findings.basis == "estimated"), "judged on estimates: a screening, no proof"),
        (valve & np.isnan(cases.rated), "without a rated coefficient: capacity and opening are not known"),
        (valve & ~np.isnan(cases.rated) & np.isnan(findings.travel) & ~findings.over_capacity,
         "without an opening: no characteristic or table gives it"),
    ):  # fmt: skip
        number = int(rows.sum())
        if number:
            said.append(f"{counted(number, 'case')} {text}.")
    return said


def numbered_notes(survey: Survey) -> tuple[Note, ...]:
    """Every caution once, by number, the most frequent first."""
    counts = Counter(text for cautions in survey.findings.cautions for text in dict.fromkeys(cautions))
    ordered = sorted(counts.items(), key=lambda pair: -pair[1])
    return tuple(Note(number, text, cases) for number, (text, cases) in enumerate(ordered, start=1))


def problems_of(survey: Survey) -> tuple[tuple[Problem, ...], int]:
    """The problems that are shown, and how many more there are."""
    problems = survey.reading.problems
    return problems[:MOST_PROBLEMS], max(0, len(problems) - MOST_PROBLEMS)


def foundations(survey: Survey, system: str) -> list[tuple[str, list[tuple[str, str]]]]:
    """What the results rest on, in groups of name and text; empty groups are left out."""
    reading = survey.reading
    columns = [("Optional and not there", [BY_KEY[key].heading for key in reading.absent if key in BY_KEY]),
               ("Unknown and not used", [column.heading for column in reading.unknown()])]  # fmt: skip
    groups: list[tuple[str, list[tuple[str, str]]]] = [
        ("How the list was read", [("Note", _sentence(note)) for note in reading.notes]
         + [(name, _few(headings)) for name, headings in columns if headings]),
        ("Atmosphere", atmospheres(survey, system)),
        ("Taken where the list is silent", [(what, f"{taken} ({counted(count, 'case')})")
                                            for what, taken, count in defaults(survey)]),
        ("Tolerances of the inputs", _tolerances(survey, system)),
        ("Definitions", [*DEFINITIONS, ("Forms in this list", ", ".join(_forms(survey))), *STATES]),
        ("Sources", citations(survey)),
    ]  # fmt: skip
    return [(title, pairs) for title, pairs in groups if pairs]


def _sentence(text: str) -> str:
    return text[:1].upper() + text[1:]


def _few(texts: list[str]) -> str:
    more = f" and {len(texts) - MOST_COLUMNS} more" if len(texts) > MOST_COLUMNS else ""
    return ", ".join(texts[:MOST_COLUMNS]) + more


def _forms(survey: Survey) -> list[str]:
    """The forms in which the list states its limits."""
    return list(dict.fromkeys(word or "upstream" for word in survey.cases.form.tolist())) or ["upstream"]


def _tolerances(survey: Survey, system: str) -> list[tuple[str, str]]:
    found = survey.sensitivity
    if found is None:
        return []
    rows = [(NAMES[t.field].capitalize(), f"{t.words(system)} ({t.basis}): {WHY[t.field]}") for t in found.tolerances]
    return [*rows, ("Draws", f"{found.draws} a case, independent and uniform within the tolerances; seed {found.seed}")]
