"""The working of a case: every step from the list's cells to the verdict, for whoever checks it by hand."""

from __future__ import annotations

import math

from lowpoint.survey.items import verdict
from lowpoint.survey.model import Survey
from lowpoint.survey.outcome import Working
from lowpoint.survey.workings.closing import agrees, write_index, write_margins, write_verdict
from lowpoint.survey.workings.leaving import write_leaving, write_noise
from lowpoint.survey.workings.limits import write_limits
from lowpoint.survey.workings.opening import write_fl_by_table, write_opening
from lowpoint.survey.workings.paper import Paper
from lowpoint.survey.workings.plate import write_plate
from lowpoint.survey.workings.plate_set import write_set
from lowpoint.survey.workings.row import Row
from lowpoint.survey.workings.slow import write_final
from lowpoint.survey.workings.stated import write_inputs, write_outlet
from lowpoint.survey.workings.valve import write_coefficient, write_drop, write_fittings, write_geometry

__all__ = ["AGREES", "working"]

AGREES = 1e-4
"""How far, relative, a result worked out from printed numbers may lie from the survey's."""
FIGURES = (7, 10, 13)
"""Significant figures, the first that do: where p1 is next to pv, or an index next to its limit, seven are too few."""
DIFFERS = (
    "the working comes to {name} = {worked:.6g}, the survey to {found:.6g} (SI): one of the two is wrong, please "
    "report it"
)
OTHER_VERDICT = (
    "the working's comparisons find the {crossed} limit crossed, the survey says {found}: one of the two is wrong, "
    "please report it"
)
KINDS = {"valve": "control valve", "orifice": "orifice plate", "plates": "set of orifice plates"}


def working(survey: Survey, place: int, system: str = "metric") -> Working:
    """Every step of the case at this place of ``survey.cases``; in ``us`` each result stands in US units beside.

    The steps are in the units of the standard (bar absolute, m3/h, mm, Kv) whatever the system: its constants for US
    units are rounded, so a working in them would come to other numbers than the survey's.
    """
    row = Row.of(survey, place)
    for figures in FIGURES:
        paper = Paper(system == "us", figures)
        write_inputs(paper, row)
        write_outlet(paper, row)
        _WRITERS[str(survey.cases.kind[place])](paper, row)
        if not _differences(paper, row):
            break
    return Working(
        title=_title(row), sections=paper.sections, verdict=_verdict(row), cautions=(*_said(row, "cautions"),
                                                                                    *_differences(paper, row)),
        errors=_said(row, "errors"), figures=figures, citations=paper.citations(), results=dict(paper.results),
    )  # fmt: skip


def _valve(paper: Paper, row: Row) -> None:
    write_drop(paper)
    write_geometry(paper, row)
    write_fl_by_table(paper, row)
    write_coefficient(paper, row)
    write_final(paper, row)
    write_fittings(paper, row)
    write_opening(paper, row)
    write_index(paper, row)
    write_limits(paper, row)
    write_margins(paper, row)
    write_verdict(paper, row)
    write_leaving(paper, row)
    write_noise(paper, row)


_WRITERS = {"valve": _valve, "orifice": write_plate, "plates": write_set}


def _title(row: Row) -> str:
    case = f", case '{row.word('case')}'" if row.word("case") else f", row {row.cases.row[row.place]}"
    service = f", {row.word('service')}" if row.word("service") else ""
    return f"{row.word('tag')}{case}: {KINDS[str(row.cases.kind[row.place])]}{service}"


def _said(row: Row, what: str) -> tuple[str, ...]:
    said = getattr(row.findings, what)
    return tuple(said[row.place]) if len(said) else ()


def _verdict(row: Row) -> str:
    margin, kept = row.found("margin"), row.found("keep")
    word = verdict(row.found("regime"), row.found("basis"))
    if math.isnan(margin) or row.found("regime") is None:
        return word
    return f"{word}, margin {100.0 * margin:+.1f} % to the {kept} limit"


def _differences(paper: Paper, row: Row) -> tuple[str, ...]:
    """What the working comes to and the survey does not: a fault of ours, told and not hidden."""
    said = []
    for name, worked in paper.results.items():
        found = float(row.found(name))
        # A margin is a difference of two near numbers: it counts on the index over the limit.
        scale = 1.0 + abs(found) if name.startswith("margin") else abs(found)
        if math.isfinite(found) and not abs(worked - found) <= AGREES * scale:
            said.append(DIFFERS.format(name=name, worked=worked, found=found))
    if not agrees(paper, row):
        said.append(OTHER_VERDICT.format(crossed=paper.crossed or "none", found=row.found("regime")))
    return tuple(said)
