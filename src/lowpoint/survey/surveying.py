"""A list in, a survey out."""

from __future__ import annotations

import os
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import TypeAlias

from lowpoint.survey.items import items_of
from lowpoint.survey.judged_plates import ratings
from lowpoint.survey.judging import judge
from lowpoint.survey.model import Cases, Reading, Survey, absent
from lowpoint.survey.outcome import Tolerance
from lowpoint.survey.reading import read_list

__all__ = ["Progress", "Wishes", "furthered", "survey_list", "surveyed", "unheard"]

Progress: TypeAlias = Callable[[str, int, int], None]
"""Told (what is done, how much of it is done, how much there is); 0 where nobody knows."""


@dataclass(frozen=True)
class Wishes:
    """What a survey is to say beyond the verdicts."""

    tolerances: tuple[Tolerance, ...] = ()
    """In place of the list's own and the defaults, as :func:`tolerances.parse_tolerance` gives them."""
    draws: int = 200
    """Of each case; 0: no sensitivity."""
    seed: int | None = None
    """None: the fixed one."""
    remedies: bool = True
    plates_for: int = 100
    """How many failing items plates are designed for, the worst first."""


def survey_list(
    path: str | os.PathLike[str], elevation: float | None = None, progress: Progress | None = None,
    wishes: Wishes | None = None,
) -> Survey:  # fmt: skip
    """Read and judge a list (.xlsx, .csv, .ods); ``elevation`` (m) of the site where the list gives none.

    Without ``wishes`` the verdicts only. BookError where the file cannot be opened at all; every other fault is in
    the survey, and spoils its own row only.
    """
    tell = progress or unheard
    cases, reading = read_list(path, elevation, lambda done, total: tell("reading the list", done, total))
    tell("judging the cases", 0, cases.count)
    survey = surveyed(cases, reading)
    return survey if wishes is None else furthered(survey, wishes, tell)


def surveyed(cases: Cases, reading: Reading) -> Survey:
    """Judge cases that were read."""
    cases, findings = judge(cases)
    answered = ~absent(findings.regime)
    sets = ratings(cases, answered) if cases.count else []
    return Survey(cases, findings, items_of(cases, findings), reading,
                  sets={tag: rating for tag, _, rating in sets},
                  set_rows={tag: tuple(places.tolist()) for tag, places, _ in sets})  # fmt: skip


def furthered(survey: Survey, wishes: Wishes, progress: Progress | None = None) -> Survey:
    """The same survey with its sensitivity and the remedies of its failing items."""
    tell = progress or unheard
    if wishes.draws:
        from lowpoint.survey.sensing import SEED, sense
        from lowpoint.survey.tolerances import combined

        stated = combined(survey.reading.tolerances, wishes.tolerances)
        found = sense(survey.cases, survey.findings, stated, wishes.draws, SEED if wishes.seed is None else wishes.seed,
                      lambda done, total: tell("drawing the inputs", done, total))  # fmt: skip
        survey = replace(survey, sensitivity=found)
    if wishes.remedies and any(item.fails for item in survey.items):
        from lowpoint.survey.remedies import remedies_of

        cures = remedies_of(survey, lambda what: tell(what, 0, 0), plates_for=wishes.plates_for)
        survey = replace(survey, remedies=cures)
    return survey


def unheard(what: str, done: int, total: int) -> None:
    """For whoever does not want to know."""
