"""A list in, a survey out."""

from __future__ import annotations

import os
from collections.abc import Callable

from lowpoint.survey.items import items_of
from lowpoint.survey.judged_plates import ratings
from lowpoint.survey.judging import judge
from lowpoint.survey.model import Cases, Reading, Survey, absent
from lowpoint.survey.reading import read_list

__all__ = ["survey_list", "surveyed"]


def survey_list(
    path: str | os.PathLike[str], elevation: float | None = None, progress: Callable[[str], None] | None = None
) -> Survey:
    """Read and judge a list (.xlsx, .csv, .ods); ``elevation`` (m) of the site where the list gives none.

    ``progress`` is told what comes next, for whoever waits. BookError where the file cannot be opened at all; every
    other fault is in the survey, and spoils its own row only.
    """
    tell = progress or (lambda text: None)
    tell("reading the list")
    cases, reading = read_list(path, elevation)
    tell(f"judging {cases.count} cases")
    return surveyed(cases, reading)


def surveyed(cases: Cases, reading: Reading) -> Survey:
    """Judge cases that were read."""
    cases, findings = judge(cases)
    answered = ~absent(findings.regime)
    sets = ratings(cases, answered) if cases.count else []
    return Survey(cases, findings, items_of(cases, findings), reading,
                  sets={tag: rating for tag, _, rating in sets},
                  set_rows={tag: tuple(places.tolist()) for tag, places, _ in sets})  # fmt: skip
