"""The columns of results that stand beside a list's own: heading, kind of quantity, and how to get the values.

One catalogue for the output workbook, for whoever reads such a workbook again (its results are known for results and
are never taken for inputs) and for comparing two surveys. No heading reads as a field of a list.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from typing import Any

import numpy as np

from lowpoint.survey.best import best_words
from lowpoint.survey.items import verdict
from lowpoint.survey.model import Survey, absent
from lowpoint.survey.tolerances import NAMES
from lowpoint.units import dimension

__all__ = ["NO_ANSWER", "RESULT_COLUMNS", "RESULT_HEADINGS", "ResultColumn", "is_result", "result_heading", "result_of",
           "result_values"]  # fmt: skip

NO_ANSWER = "no answer"
YES, NO = "yes", "no"
GROUPS = {
    "verdict": "Verdict",
    "limits": "Index and limits at this size and pressure",
    "flow": "Valve or plate",
    "used": "Taken for the calculation",
    "sensitivity": "When the inputs move within their tolerances",
    "words": "In words",
}
"""Bands over the headings, in order."""


@dataclass(frozen=True, eq=False)
class ResultColumn:
    """One column. ``kind`` is empty for words, ``share`` for a ratio shown in per cent, ``absolute`` for an absolute
    pressure, ``count`` for a whole number, else the name of a dimension of :mod:`lowpoint.units`."""

    key: str
    group: str
    heading: str
    kind: str
    get: Callable[[Survey], Any]
    """An array or a sequence, one element a case: numbers in SI, NaN where there is none; words, None where none."""
    width: float = 11.0
    help: str = ""


def _word(key: str, group: str, heading: str, get: Callable[[Survey], Any], width: float = 13.0,
          help: str = "") -> ResultColumn:  # fmt: skip
    return ResultColumn(key, group, heading, "", get, width, help)


def _found(key: str, group: str, heading: str, kind: str, help: str = "", width: float = 11.0) -> ResultColumn:
    """A number of the findings."""
    return ResultColumn(key, group, heading, kind, lambda survey: getattr(survey.findings, key), width, help)


def _used(key: str, heading: str, kind: str, help: str = "") -> ResultColumn:
    """A number of the completed cases."""
    return ResultColumn(f"{key}_used", "used", heading, kind, lambda survey: getattr(survey.cases, key), 11.0, help)


def _source(key: str, heading: str) -> ResultColumn:
    def get(survey: Survey) -> Any:
        return survey.cases.source.get(key, [None] * survey.cases.count)

    return _word(f"{key}_source", "used", heading, get, 10.0, "given, item (another row of the tag), computed, place "
                 "(of the outlet), typical, table.")  # fmt: skip


def _flag(key: str, group: str, heading: str, help: str = "") -> ResultColumn:
    return _word(key, group, heading, lambda survey: _yes_no(survey, getattr(survey.findings, key)), 9.0, help)


def _limit(name: str) -> ResultColumn:
    return ResultColumn(f"{name}_here", "limits", f"{name.capitalize()} limit here", "ratio",
                        lambda survey: survey.findings.limits()[name], 11.0, "Upstream form, at the size and "
                        "pressure of this case, between its reducers.")  # fmt: skip


# --- how to get what is no column of its own ---------------------------------------------------------------------


def _answered(survey: Survey) -> Any:
    return ~absent(survey.findings.regime)


def _yes_no(survey: Survey, flags: Any) -> list[str]:
    words = np.where(_answered(survey), np.where(flags, YES, NO), NO_ANSWER)
    found: list[str] = words.tolist()
    return found


def _verdicts(survey: Survey) -> list[str]:
    said = cache(verdict)
    return [said(*pair) for pair in zip(survey.findings.regime.tolist(), survey.findings.basis.tolist(), strict=True)]


def _worst(survey: Survey) -> list[str]:
    words = [NO] * survey.cases.count
    for item in survey.items:
        if item.worst >= 0:
            words[item.worst] = YES
    return words


def _reasons(survey: Survey) -> list[str | None]:
    """Why each failing case fails, in a few words."""
    findings = survey.findings
    crossed = findings.fails & (findings.margin <= 0.0)
    found: list[str | None] = [None] * survey.cases.count
    for place in np.flatnonzero(findings.fails).tolist():
        said = ["flashing"] if findings.flashing[place] else []
        said += ["choked"] if findings.choked[place] else []
        said += [f"at or below the {findings.keep[place]} limit"] if crossed[place] else []
        said += ["does not pass the flow"] if findings.over_capacity[place] else []
        found[place] = ", ".join(said)
    return found


def _plate(survey: Survey) -> Any:
    return np.where(survey.findings.plate > 0, survey.findings.plate.astype(float), np.nan)


def _others_basis(survey: Survey) -> Any:
    """Basis of the limits but the incipient one, where any of them is there."""
    findings = survey.findings
    given = ~(np.isnan(findings.constant) & np.isnan(findings.damage) & np.isnan(findings.vibration))
    return np.where(given, findings.limits_basis, np.array(None, object))


def _form(survey: Survey) -> Any:
    form = np.where(absent(survey.cases.form), "upstream", survey.cases.form)
    return np.where(np.isnan(survey.findings.index), np.array(None, object), form)


def _of_sensitivity(name: str) -> Callable[[Survey], Any]:
    def get(survey: Survey) -> Any:
        if survey.sensitivity is None:
            return [None] * survey.cases.count
        return getattr(survey.sensitivity, name)

    return get


def _dominant(survey: Survey) -> list[str | None]:
    if survey.sensitivity is None:
        return [None] * survey.cases.count
    return [None if name is None else NAMES[name] for name in survey.sensitivity.dominant.tolist()]


def _first_remedy(survey: Survey) -> list[str | None]:
    found: list[str | None] = [None] * survey.cases.count
    for item in survey.items:
        remedies = survey.remedies.get(item.tag, ())
        for place in item.rows if remedies else ():
            found[place] = best_words(item, remedies)
    return found


def _joined(lists: Sequence[Sequence[str]], count: int) -> list[str | None]:
    """The sentences of each case in one cell; equal lists are joined once."""
    if not len(lists):
        return [None] * count
    known: dict[tuple[str, ...], str | None] = {(): None}
    found = []
    for sentences in lists:
        key = tuple(sentences)
        if key not in known:
            known[key] = "; ".join(sentence.rstrip(".") for sentence in key) + "."
        found.append(known[key])
    return found


_FORM_HELP = "In the form that column Form of the list names."

RESULT_COLUMNS: tuple[ResultColumn, ...] = (
    _word("verdict", "verdict", "Verdict", _verdicts, 19.0, "State of the flow, and the weakest basis it rests on."),
    _flag("fails", "verdict", "Fails", "Flashing, choked, at or below the limit to keep, or the flow does not pass."),
    _word("reasons", "verdict", "Fails because", _reasons, 34.0),
    ResultColumn("margin", "verdict", "Margin", "share", lambda survey: survey.findings.margin, 9.0,
                 "Index over the limit kept, less one; at or below 0 it is crossed."),
    _word("keep_here", "verdict", "Limit kept", lambda survey: survey.findings.keep, 10.0),
    _found("limit", "verdict", "Value of the limit kept", "ratio", "Upstream form."),
    _word("worst", "verdict", "Worst case of its item", _worst, 9.0),
    _found("sigma", "limits", "Index here", "ratio", "(p1-pv)/(p1-p2), upstream form."),
    _found("index", "limits", "Index in the listed form", "ratio", _FORM_HELP),
    _word("index_form", "limits", "Form of that index", _form, 11.0),
    *(_limit(name) for name in ("incipient", "constant", "damage", "vibration", "choked")),
    _word("incipient_basis", "limits", "Basis of the incipient limit here", lambda s: s.findings.incipient_basis, 11.0),
    _word("others_basis", "limits", "Basis of the other limits here", _others_basis, 11.0),
    _flag("choked", "limits", "Choked here"),
    _flag("flashing", "limits", "Flashing here"),
    _found("coefficient", "flow", "Coefficient required", "coefficient", "Fittings and choking included."),
    _found("capacity", "flow", "Required over rated", "share", "Above 100 % the flow does not pass."),
    _found("travel", "flow", "Travel needed", "share", "Opening; blank for plates."),
    _found("drop", "flow", "Drop here", "pressure", "Of a set: of the plate that decides."),
    _found("choked_drop", "flow", "Drop at choking", "pressure"),
    _found("allowed_drop", "flow", "Largest drop that keeps the limit", "pressure"),
    _found("throat_pressure", "flow", "Throat pressure", "absolute", "Not below FF pv; no evidence of no cavitation."),
    _found("flash_share", "flow", "Vapour after it, by mass", "share"),
    _found("outlet_velocity", "flow", "Outlet velocity", "velocity"),
    _found("noise", "flow", "Noise at 1 m", "level"),
    ResultColumn("plate", "flow", "Plate that decides", "count", _plate, 8.0),
    _used("flow", "Flow used", "flow"),
    _used("p1", "p1 used", "absolute"),
    _used("p2", "p2 used", "absolute"),
    _source("p2", "Source of p2"),
    _used("pv", "pv used", "absolute"),
    _source("pv", "Source of pv"),
    _used("density", "Density used", "density"),
    _source("density", "Source of the density"),
    ResultColumn("fl_used", "used", "FL used", "ratio", lambda survey: survey.findings.fl, 8.0),
    _word("fl_basis_used", "used", "Basis of FL used", lambda survey: survey.findings.fl_basis, 10.0),
    ResultColumn("margin_low", "sensitivity", "Margin with adverse inputs", "share", _of_sensitivity("low")),
    ResultColumn("margin_high", "sensitivity", "Margin with favourable inputs", "share", _of_sensitivity("high")),
    ResultColumn("stays", "sensitivity", "Share of draws without failing", "share", _of_sensitivity("stays"), 11.0,
                 "A nominal failure stays a failure whatever this says."),
    _word("dominant", "sensitivity", "Input that matters most", _dominant, 15.0),
    _word("remedy", "words", "First remedy", _first_remedy, 46.0),
    _word("cautions", "words", "Cautions", lambda s: _joined(s.findings.cautions, s.cases.count), 46.0),
    _word("errors", "words", "Why there is no answer", lambda s: _joined(s.findings.errors, s.cases.count), 46.0),
)  # fmt: skip
RESULT_HEADINGS: tuple[str, ...] = tuple(column.heading for column in RESULT_COLUMNS)
"""Headings without their units."""


def result_heading(column: ResultColumn, system: str = "metric") -> str:
    """The heading with its unit: ``Throat pressure [bar a]``."""
    unit = _label(column.kind, system)
    return f"{column.heading} [{unit}]" if unit else column.heading


def _label(kind: str, system: str) -> str:
    if kind == "absolute":
        return "bar a" if system == "metric" else "psia"
    return "" if kind in ("", "share", "count") else dimension(kind).unit(system).label


def result_values(column: ResultColumn, survey: Survey, system: str = "metric") -> list[Any]:
    """The cells of a column: floats in the set's units, words; None where there is neither."""
    found = column.get(survey)
    if not column.kind or not isinstance(found, np.ndarray):
        return found if isinstance(found, list) else list(found)
    if column.kind not in ("share", "count"):
        unit = dimension("pressure" if column.kind == "absolute" else column.kind).unit(system)
        found = (found - unit.offset) / unit.factor
    cells: list[Any] = found.tolist()
    for place in np.flatnonzero(~np.isfinite(found)).tolist():
        cells[place] = None
    return [None if cell is None else int(cell) for cell in cells] if column.kind == "count" else cells


# --- knowing them again ------------------------------------------------------------------------------------------

_UNIT = re.compile(r"\s*\[[^\[\]]*\]\s*$")


def _folded(text: str) -> str:
    return re.sub(r"[\W_]+", "", unicodedata.normalize("NFKC", text)).casefold()


@cache
def _names() -> Mapping[str, ResultColumn]:
    return {_folded(column.heading): column for column in RESULT_COLUMNS}


def result_of(heading: str) -> ResultColumn | None:
    """The column of results that a heading of a workbook names, with or without its unit; None for any other."""
    return _names().get(_folded(_UNIT.sub("", heading)))


def is_result(heading: str) -> bool:
    """Is a heading one of those that a survey writes beside a list?"""
    return result_of(heading) is not None
