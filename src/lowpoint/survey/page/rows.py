"""The table of all cases and the table of one item: columns from the catalogue of results, cells as they are read."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any, TypeAlias

from lowpoint.survey.items import ORDER
from lowpoint.survey.model import Findings, Survey
from lowpoint.survey.page.numbers import figure, pretty
from lowpoint.survey.result_columns import RESULT_COLUMNS, ResultColumn, result_heading, result_values
from lowpoint.units import dimension

__all__ = ["Column", "ItemColumn", "Mark", "columns_of", "item_columns", "item_rows", "marks_of"]

_CATALOGUE = {column.key: column for column in RESULT_COLUMNS}
FIRST = ("fails", "verdict", "margin", "sigma", "limit", "keep_here", "flow_used", "p1_used", "p2_used")
THEN = ("coefficient", "capacity", "travel", "outlet_velocity", "noise", "stays", "reasons")
"""Results that the table of all cases shows: those that a reader asks for first stand first."""
ONE_LINE = 24
"""Letters that a cell holds in one line."""
ELSEWHERE = {"remedy", "cautions", "errors", "worst"}
"""Results that an item's page shows in full beside its table."""


ItemColumn: TypeAlias = tuple[str, ResultColumn, Sequence[Any]]
"""A heading, its column, and the values of the whole survey, which are made once for all items."""


@dataclass(frozen=True)
class Column:
    """One column: its heading with the unit, how it sorts (``text``, ``number``, ``rank``), and its cells."""

    heading: str
    sort: str
    cells: Sequence[str]

    @property
    def look(self) -> str:
        """Class of its cells: ``n`` numbers, ``w`` texts that need several lines, else one line."""
        return "n" if self.sort == "number" else "w" if any(len(text) > ONE_LINE for text in self.cells) else ""


@dataclass(frozen=True)
class Mark:
    """What the script must know of a row beside its cells."""

    regime: int
    """Place in ``ORDER``; its length where there is no answer."""
    fails: bool
    section: int
    """Number of the item's page, 0 where it has none."""


def _headed(column: ResultColumn, system: str) -> str:
    """The heading with its unit as it is written for the eye."""
    return f"{column.heading} [%]" if column.kind == "share" else pretty(result_heading(column, system))


def shown_values(column: ResultColumn, values: Sequence[Any]) -> list[str]:
    """Values of a column as texts; margins with their sign, blank where there is none."""
    if not column.kind:
        return ["" if x is None else str(x) for x in values]
    if column.kind == "share":
        sign = "+" if column.key.startswith("margin") else ""
        return ["" if x is None else f"{100.0 * x:{sign}.1f}" for x in values]
    return ["" if x is None else figure(x) for x in values]


def columns_of(survey: Survey, system: str, notes: Mapping[str, int]) -> list[Column]:
    """The table of all cases; columns of numbers that are blank throughout are left out."""
    cases = survey.cases
    unit = dimension("temperature").unit(system)
    temperatures = [figure(x) for x in ((cases.t - unit.offset) / unit.factor).tolist()]
    columns = [
        Column("Tag", "text", _texts(cases.tag)), Column("Case", "text", _texts(cases.case)),
        *(_result(key, survey, system) for key in FIRST),
        Column(pretty(f"Temperature [{unit.label}]"), "number", temperatures),
        *(_result(key, survey, system) for key in THEN),
        Column("Service", "text", _texts(cases.service)), Column("Notes", "text", _notes(survey.findings, notes)),
    ]  # fmt: skip
    return [column for column in columns if column.sort != "number" or any(column.cells)]


def _result(key: str, survey: Survey, system: str) -> Column:
    column = _CATALOGUE[key]
    sort = "rank" if key == "verdict" else "number" if column.kind else "text"
    return Column(_headed(column, system), sort, shown_values(column, result_values(column, survey, system)))


def _texts(words: Any) -> list[str]:
    return ["" if word is None else str(word) for word in words.tolist()]


def _notes(findings: Findings, notes: Mapping[str, int]) -> list[str]:
    """Why a case has no answer, in full; its cautions by number."""
    found = []
    for cautions, errors in zip(findings.cautions, findings.errors, strict=True):
        numbers = ", ".join(str(n) for n in sorted({notes[text] for text in cautions}))
        found.append("; ".join([*errors, *([numbers] if numbers else [])]))
    return found


def marks_of(survey: Survey, sections: Mapping[str, int]) -> list[Mark]:
    """The marks of the rows; ``sections`` gives the number of an item's page by tag."""
    rank: dict[str | None, int] = {word: number for number, word in enumerate((*ORDER, None))}
    findings = survey.findings
    rows = zip(findings.regime.tolist(), findings.fails.tolist(), survey.cases.tag.tolist(), strict=True)
    return [Mark(rank[regime], fails, sections.get(tag, 0)) for regime, fails, tag in rows]


def item_columns(survey: Survey, system: str) -> list[ItemColumn]:
    """The results that items show, for :func:`item_rows`; the index is not shown twice where all are in one form."""
    upstream = all(form in (None, "upstream") for form in survey.cases.form.tolist())
    left_out = ELSEWHERE | ({"index", "index_form"} if upstream else set())
    return [(_headed(column, system), column, result_values(column, survey, system))
            for column in RESULT_COLUMNS if column.key not in left_out]  # fmt: skip


def item_rows(columns: Sequence[ItemColumn], places: Sequence[int]) -> list[tuple[str, list[str]]]:
    """The table of one item, a result a row and a case a column; results that no case has are left out."""
    rows = [(heading, shown_values(column, [values[place] for place in places])) for heading, column, values in columns]
    return [(heading, cells) for heading, cells in rows if any(cells)]
