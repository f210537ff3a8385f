"""One item of a list by its tag: only its rows are judged, and the working of each case is written."""

from __future__ import annotations

import difflib
import os
from collections.abc import Sequence
from dataclasses import asdict, replace
from typing import Any

import numpy as np

from lowpoint import __version__
from lowpoint.errors import LowpointError
from lowpoint.survey.as_json import number
from lowpoint.survey.model import Cases, Survey
from lowpoint.survey.reading import read_list
from lowpoint.survey.surveying import surveyed
from lowpoint.survey.working import working

__all__ = ["exit_code", "explained_json", "item_survey", "only", "places_of_case"]

NEAR, SHOWN = 0.5, 5
"""How alike a name must be to be offered, and how many are."""


def item_survey(path: str | os.PathLike[str], tag: str, elevation: float | None = None) -> Survey:
    """The survey of one item of a list: the rows of others are read and not judged.

    LowpointError where the list has no such tag, with those that are near; BookError where the file cannot be opened.
    """
    cases, reading = read_list(path, elevation)
    if not cases.count:
        said = "; ".join(problem.sentence() for problem in reading.problems[:SHOWN])
        raise LowpointError.plain(f"{path}: there is no item to explain. {said}".rstrip())
    found = _named(tag, cases.tag.tolist())
    if not found:
        raise LowpointError(str(path), f"has no item '{tag}'", remedy=_near(tag, "tags", cases.tag.tolist()))
    return surveyed(only(cases, found), reading)


def only(cases: Cases, places: Sequence[int]) -> Cases:
    """Some of the cases, with what was told of them while reading."""
    new = {old: place for place, old in enumerate(places)}
    problems, remarks = (tuple((new[old], text) for old, text in said if old in new)
                         for said in (cases.problems, cases.remarks))  # fmt: skip
    return replace(cases.take(np.array(places, int)), problems=problems, remarks=remarks)


def places_of_case(survey: Survey, case: str | None) -> tuple[int, ...]:
    """Places of the cases of this name, all where None is asked for; LowpointError where there is none."""
    if case is None:
        return tuple(range(survey.cases.count))
    names = [str(name or "") for name in survey.cases.case.tolist()]
    found = _named(case, names)
    if not found:
        tag = survey.cases.tag[0]
        raise LowpointError(f"item '{tag}'", f"has no case '{case}'", remedy=_near(case, "cases", names))
    return tuple(found)


def exit_code(survey: Survey, places: Sequence[int]) -> int:
    """1 where one of these cases fails or has no answer, else 0."""
    fails, regimes = survey.findings.fails, survey.findings.regime
    return int(any(bool(fails[place]) or regimes[place] is None for place in places))


def _named(name: str, names: Sequence[str]) -> list[int]:
    """Places of a name: as it is written, else whatever its capitals and blanks."""
    exact = [place for place, other in enumerate(names) if other == name]
    return exact or [place for place, other in enumerate(names) if _plain(other) == _plain(name)]


def _plain(name: str) -> str:
    return " ".join(str(name).split()).casefold()


def _near(name: str, what: str, names: Sequence[str]) -> str:
    """The names that are near to one, or the first of all."""
    every = {_plain(other): other for other in reversed(names) if other}
    near = [every[key] for key in difflib.get_close_matches(_plain(name), every, SHOWN, NEAR)]
    if near:
        return f"Did you mean {_listed(near)}?"
    first = list(dict.fromkeys(other for other in names if other))
    if not first:
        return f"It has no {what}."
    more = f" and {len(first) - SHOWN} more" if len(first) > SHOWN else ""
    return f"Its {what} are {_listed(first[:SHOWN])}{more}."


def _listed(names: Sequence[str]) -> str:
    return ", ".join(f"'{name}'" for name in names)


def explained_json(survey: Survey, places: Sequence[int], system: str) -> dict[str, Any]:
    """The workings of these cases as plain values."""
    return {
        "list": os.path.basename(survey.reading.path), "version": __version__,
        "fingerprint": survey.reading.fingerprint, "units": system, "tag": survey.cases.tag[0],
        "cases": [_case(survey, place, system) for place in places], "exit_code": exit_code(survey, places),
    }  # fmt: skip


def _case(survey: Survey, place: int, system: str) -> dict[str, Any]:
    found = working(survey, place, system)
    return {
        "case": survey.cases.case[place], "sheet": survey.cases.sheet[place], "row": int(survey.cases.row[place]),
        "title": found.title, "verdict": found.verdict, "regime": survey.findings.regime[place],
        "fails": bool(survey.findings.fails[place]),
        "sections": [{"title": title, "steps": [asdict(step) for step in steps]} for title, steps in found.sections],
        "cautions": list(found.cautions), "errors": list(found.errors), "citations": dict(found.citations),
        "results_si": {name: number(value) for name, value in found.results.items()},
    }  # fmt: skip
