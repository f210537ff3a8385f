"""One side of a comparison: a list judged today, or a survey with the verdicts that it was issued with.

A survey (its workbook or its JSON) carries its inputs too, so today's verdicts for the same inputs stand beside them.
"""

from __future__ import annotations

import json
import os
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np

from lowpoint.book import guard
from lowpoint.errors import BookError
from lowpoint.survey.fields import BASES, TABLE_FIELDS
from lowpoint.survey.grids import Grid, Sheets
from lowpoint.survey.headers import find_headings
from lowpoint.survey.inputs import as_cases
from lowpoint.survey.issued import RESULTS, is_survey, issued_columns, issued_verdict, version_of
from lowpoint.survey.items import ORDER
from lowpoint.survey.judging import judge
from lowpoint.survey.model import Cases, Findings, Flags, Numbers, Problem, Words
from lowpoint.survey.reading import open_list, read_sheets
from lowpoint.survey.result_columns import YES
from lowpoint.survey.surveying import Progress, unheard

__all__ = ["Side", "Verdicts", "read_side"]

JSON = ".json"
NOT_OURS = "must be the JSON of lowpoint survey"
REMEDY = "Write it with 'lowpoint survey LIST --json'."


@dataclass(frozen=True, eq=False)
class Verdicts:
    """The verdicts of cases, one element a case; None and NaN where there is none."""

    regime: Words
    basis: Words
    margin: Numbers
    fails: Flags


@dataclass(frozen=True, eq=False)
class Side:
    """A list or a survey, read."""

    name: str
    """Name of the file."""
    kind: str
    """``list``, ``survey``."""
    cases: Cases
    verdicts: Verdicts
    """Those it was issued with; a list's are today's."""
    today: Verdicts | None = None
    """Of a survey: what the tool gives today for the same inputs."""
    version: str = ""
    """Of the tool that issued the survey; empty for a list, and where it is not told."""
    problems: tuple[str, ...] = ()
    """What is wrong with the list, in sentences."""
    errors: Sequence[Sequence[str]] = ()
    """Why cases have no answer, one list a case."""


def read_side(path: str | os.PathLike[str], elevation: float | None = None, progress: Progress | None = None) -> Side:
    """Read one side and judge it; BookError where it is neither a list nor a survey."""
    tell = progress or unheard
    name = Path(path).name
    if Path(path).suffix.lower() == JSON:
        return _of_json(path, tell)
    sheets = open_list(path, lambda done, total: tell(f"reading {name}", done, total))
    issued = is_survey(sheets)
    if issued:
        version, sheets = version_of(sheets), replace(sheets, grids=tuple(_needed(sheets)))
    cases, reading = read_sheets(sheets, path, elevation)
    tell(f"judging the cases of {name}", 0, cases.count)
    cases, findings = judge(cases)
    problems = tuple(_problems(reading.problems, reading.missing))
    today = _verdicts(findings)
    if not issued:
        return Side(name, "list", cases, today, problems=problems, errors=findings.errors)
    return Side(name, "survey", cases, _issued(sheets, cases, str(path)), today, version, problems,
                findings.errors)  # fmt: skip


def _needed(sheets: Sheets) -> Iterator[Grid]:
    """The sheet of results, and vendors' tables: the other sheets of the workbook repeat or explain the results."""
    for grid in sheets.grids:
        place = find_headings(grid)
        if grid.sheet == RESULTS or (place is not None and place.catalogue is TABLE_FIELDS):
            yield grid


def _problems(problems: Sequence[Problem], missing: Sequence[str]) -> list[str]:
    found = [problem.sentence() for problem in problems]
    return ["required columns that are not there: " + "; ".join(missing), *found] if missing else found


def _verdicts(findings: Findings) -> Verdicts:
    return Verdicts(findings.regime, findings.basis, findings.margin, findings.fails)


def _issued(sheets: Sheets, cases: Cases, name: str) -> Verdicts:
    """The verdicts that stand in the sheet of results, by row."""
    columns = issued_columns(next(grid for grid in sheets.grids if grid.sheet == RESULTS), name)
    rows = cases.row.tolist()
    words = [issued_verdict(columns["verdict"].get(row)) for row in rows]
    margins = [columns["margin"].get(row) for row in rows]
    return _made([_known(regime, ORDER) for regime, _ in words], [_known(basis, BASES) for _, basis in words],
                 [float(x) if isinstance(x, int | float) else np.nan for x in margins],
                 [columns["fails"].get(row) == YES for row in rows])  # fmt: skip


def _made(regimes: list[Any], bases: list[Any], margins: list[float], fails: list[bool]) -> Verdicts:
    # Filled, not made of the lists: an array of nothing but None would be one of another kind.
    regime, basis = (np.full(len(words), None, object) for words in (regimes, bases))
    regime[:], basis[:] = regimes, bases
    return Verdicts(regime, basis, np.array(margins, np.float64), np.array(fails, np.bool_))


def _known(word: Any, words: Sequence[str]) -> Any:
    return word if word in words else None


# --- JSON -------------------------------------------------------------------------------------------------------


def _of_json(path: str | os.PathLike[str], tell: Progress) -> Side:
    name = Path(path).name
    tell(f"reading {name}", 0, 0)
    data = _loaded(path)
    try:
        objects = data["cases"]
        cases = as_cases(objects, data["tables"])
        regimes = [_known(case["regime"], ORDER) for case in objects]
        margins = [np.nan if case["margin"] is None else float(case["margin"]) for case in objects]
        bases = [_known(case["basis"], BASES) for case in objects]
        issued = _made(regimes, bases, margins, [bool(case["fails"]) for case in objects])
        errors = [list(case["errors"]) for case in objects]
        problems = _problems([_problem(p) for p in data["reading"]["problems"]], data["reading"]["missing"])
        version = str(data["version"])
    except (KeyError, TypeError, AttributeError, ValueError, IndexError) as lacking:
        raise BookError(name, NOT_OURS, f"a file without {lacking}", REMEDY) from None
    tell(f"judging the cases of {name}", 0, cases.count)
    # What kept a case from an answer need not stand in its inputs, an unreadable cell for one.
    told = tuple((place, text) for place, texts in enumerate(errors) for text in texts)
    cases, findings = judge(replace(cases, problems=told))
    return Side(name, "survey", cases, issued, _verdicts(findings), version, tuple(problems), errors)


def _loaded(path: str | os.PathLike[str]) -> Mapping[str, Any]:
    name = Path(path).name
    try:
        data = json.loads(guard.load(path).decode("utf-8-sig"))
    except (ValueError, RecursionError):  # no text, no JSON, a number without end
        raise BookError(name, NOT_OURS, "text that is no JSON", REMEDY) from None
    if not isinstance(data, dict) or "cases" not in data:
        raise BookError(name, NOT_OURS, "another JSON", REMEDY)
    return data


def _problem(data: Mapping[str, Any]) -> Problem:
    return Problem(data["sheet"], data["cell"] or "", data["value"] or "", data["text"], data["remedy"])
