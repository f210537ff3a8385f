"""The columns of all sheets as one table of cases: what an item says once holds for all its rows, twins are named."""

from __future__ import annotations

import unicodedata
from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from lowpoint.problems import shown
from lowpoint.survey.fields import BY_KEY, ESTIMATE, FIELDS, TYPICAL
from lowpoint.survey.grids import cell_name
from lowpoint.survey.model import Cases, Problem, TravelTable, absent, number_fields, word_fields
from lowpoint.survey.sheet import SheetColumns

__all__ = ["assemble", "blank_cases"]

UNSEEN = frozenset({"Cc", "Cf", "Zs", "Zl", "Zp"})
"""Unicode categories of spaces, and of signs that take no room."""
ELSEWHERE = "Save the list as .xlsx or .ods, and give the table on a second sheet with the columns Table and Travel."
SOURCED = ("p2", "pv", "pc", "density", "viscosity", "sound_speed", "fl", "fd", "incipient", "flow")
"""Fields whose values can come from more than the cell of their row."""
FIXED = ("kind", "style", "valve_size", "pipe_in", "pipe_out", "rated", "characteristic", "table", "bore",
         "bore_length", "holes")  # fmt: skip
"""What an item cannot have two of."""


def blank_cases(count: int) -> Cases:
    """Cases without a single value, to be filled with ``changed``."""
    columns: dict[str, Any] = {name: np.full(count, np.nan) for name in number_fields()}
    columns |= {name: np.full(count, None, object) for name in word_fields()}
    columns |= {"row": np.arange(1, count + 1), "estimate": np.zeros(count, np.bool_)}
    columns["kind"] = np.full(count, "valve", object)
    return Cases(**columns)


def assemble(
    parts: Sequence[SheetColumns], tables: Mapping[str, TravelTable], problems: list[Problem], one_sheet: bool = False
) -> Cases:
    """The cases of all sheets in order; twins and contradictions are added to the problems.

    ``one_sheet``: the file can hold no other sheet (a csv), so no vendors' tables.
    """
    counts = [len(part.rows) for part in parts]
    starts = np.concatenate([[0], np.cumsum(counts)]).astype(int).tolist()
    blank = blank_cases(starts[-1])
    columns: dict[str, Any] = {}
    for name in (*number_fields(), *word_fields()):
        column = getattr(blank, name)
        for part, start in zip(parts, starts, strict=False):
            given = part.numbers.get(name, part.words.get(name))
            if given is not None:
                column[start : start + len(part.rows)] = given
        columns[name] = column
    columns["sheet"] = np.concatenate([np.full(len(p.rows), p.sheet, object) for p in parts] or [blank.sheet])
    columns["row"] = np.concatenate([np.array(p.rows, int) for p in parts] or [blank.row])
    _renumber(parts, starts, problems)
    spoiled = [(start + i, text) for part, start in zip(parts, starts, strict=False) for i, text in part.spoiled]
    told = [(start + i, text) for part, start in zip(parts, starts, strict=False) for i, text in part.told]
    asked = {key: [start + i for part, start in zip(parts, starts, strict=False) for i in part.asked.get(key, ())]
             for key in ("fl", "fd", "incipient")}  # fmt: skip
    letters = {part.sheet: part.letters for part in parts}
    spoiled += _tags(columns, problems, letters)
    source = {key: given_words(columns[key]) for key in SOURCED}
    estimate = blank.estimate
    estimate[asked["incipient"]] = True
    source["incipient"][asked["incipient"]] = ESTIMATE
    for key in ("fl", "fd"):
        source[key][asked[key]] = TYPICAL
    codes = np.unique(columns["tag"].astype(str), return_inverse=True)[1] if starts[-1] else np.zeros(0, int)
    told += _contradictions(columns, codes, problems, letters)
    _of_the_item(columns, source, estimate, codes)
    told += _alike(columns, problems, letters)
    told += _twins(columns, codes, problems, letters)
    columns["kind"] = np.where(absent(columns["kind"]), "valve", columns["kind"])
    spoiled += _strange_tables(columns, tables, problems, letters, one_sheet)
    return Cases(**{**columns, "estimate": estimate}, tables=dict(tables), source=source, problems=tuple(spoiled),
                 remarks=tuple(told))  # fmt: skip


def given_words(column: Any) -> Any:
    """``given`` where a column has a number, None elsewhere."""
    return np.array([None, "given"], object)[(~np.isnan(column)).astype(int)]


def _renumber(parts: Sequence[SheetColumns], starts: Sequence[int], problems: list[Problem]) -> None:
    """Rows of problems count within their sheet while it is read: now among all cases; those of tables have none."""
    offset = {part.sheet: start for part, start in zip(parts, starts, strict=False)}
    for i, problem in enumerate(problems):
        if problem.row >= 0:
            start = offset.get(problem.sheet)
            problems[i] = replace(problem, row=-1 if start is None else problem.row + start)


Letters = Mapping[str, Mapping[str, int]]
"""Column of each field by sheet."""


def _named(columns: Mapping[str, Any], place: int, key: str, letters: Letters) -> str:
    row, own = int(columns["row"][place]), letters[columns["sheet"][place]]
    return cell_name(row, own[key]) if key in own else f"{row}:{row}"


def _tags(columns: dict[str, Any], problems: list[Problem], letters: Letters) -> list[tuple[int, str]]:
    """Rows without a tag get one that says so, and a fault."""
    spoiled = []
    for number, place in enumerate(np.flatnonzero(absent(columns["tag"])).tolist(), 1):
        # Counted among themselves: in the workbook of the results the same row has another number.
        columns["tag"][place] = f"(no tag {number})"
        problem = Problem(str(columns["sheet"][place]), _named(columns, place, "tag", letters), "a blank cell",
                          "Tag must be given", "Write the item's tag into each of its rows.", place)  # fmt: skip
        problems.append(problem)
        spoiled.append((place, problem.sentence()))
    return spoiled


def _first_of_item(column: Any, codes: Any) -> Any:
    """For each row the value of the first row of its item that has one; blank where none has."""
    given = np.flatnonzero(~absent(column))
    items, first = np.unique(codes[given], return_index=True)
    values = np.full(int(codes.max(initial=-1)) + 1, np.nan if column.dtype.kind == "f" else None, column.dtype)
    values[items] = column[given[first]]
    return values[codes]


def _of_the_item(columns: dict[str, Any], source: dict[str, Any], estimate: Any, codes: Any) -> None:
    """Blanks of what belongs to the item, from another of its rows."""
    asking = np.bincount(codes, estimate, int(codes.max(initial=-1)) + 1)[codes] > 0.0
    for field in FIELDS:
        if field.scope != "item":
            continue
        column = columns[field.key]
        blank = absent(column)
        if field.key in source:
            blank &= absent(source[field.key])
        if not blank.any() or blank.all():
            continue
        filled = _first_of_item(column, codes)
        taken = blank & ~absent(filled)
        columns[field.key] = np.where(taken, filled, column)
        if field.key in source:
            source[field.key][taken] = "item"
    estimate |= asking & np.isnan(columns["incipient"])


def _contradictions(
    columns: Mapping[str, Any], codes: Any, problems: list[Problem], letters: Letters
) -> list[tuple[int, str]]:
    """Rows whose item has another value of what it can have only one of."""
    told = []
    for key in FIXED:
        column = columns[key]
        first = _first_of_item(column, codes)
        differs = ~absent(column) & (column != first)
        for place in np.flatnonzero(differs).tolist():
            heading = BY_KEY[key].heading
            problem = Problem(
                str(columns["sheet"][place]), _named(columns, place, key, letters), "",
                f"{heading} of {columns['tag'][place]} differs from that in its first row; each row was judged with "
                "its own", "Give an item one value, or two items two tags.", place, False,
            )  # fmt: skip
            problems.append(problem)
            told.append((place, problem.sentence()))
    return told


def _twins(columns: Mapping[str, Any], codes: Any, problems: list[Problem], letters: Letters) -> list[tuple[int, str]]:
    """Rows with the tag and case of an earlier one."""
    seen: dict[tuple[int, Any], int] = {}
    told = []
    named: set[int] = set()
    for place, (code, case) in enumerate(zip(codes.tolist(), columns["case"].tolist(), strict=True)):
        first = seen.setdefault((code, case and case.casefold()), place)
        if first == place:
            continue
        name = f"case '{case}'" if case else "no case"
        sheet, other = str(columns["sheet"][place]), str(columns["sheet"][first])
        where = f"row {columns['row'][first]}" + (f" of {other}" if other != sheet else "")
        problem = Problem(
            sheet, _named(columns, place, "case" if "case" in letters[sheet] else "tag", letters), "",
            f"{columns['tag'][place]} with {name} stands already in {where}; both were judged",
            "Give every case of an item its own name, or delete one row.", place, False,
        )  # fmt: skip
        problems.append(problem)
        told.append((place, problem.sentence()))
        if first not in named:  # once is enough, however often its twins stand there
            named.add(first)
            told.append((first, problem.sentence()))
    return told


def _folded(tag: str) -> str:
    """A tag without what the eye may miss: capitals, spaces, kinds of dashes, signs that are not seen."""
    kinds = ((sign, unicodedata.category(sign)) for sign in unicodedata.normalize("NFKC", tag))
    return "".join("-" if kind == "Pd" else sign for sign, kind in kinds if kind not in UNSEEN).casefold()


def _alike(columns: Mapping[str, Any], problems: list[Problem], letters: Letters) -> list[tuple[int, str]]:
    """Tags that differ so little from an earlier one that the two may be one item."""
    places: dict[str, int] = {}
    for place, tag in enumerate(columns["tag"].tolist()):
        places.setdefault(tag, place)
    seen: dict[str, int] = {}
    told = []
    for tag, place in places.items():
        first = seen.setdefault(_folded(tag), place)
        if first == place:
            continue
        problem = Problem(
            str(columns["sheet"][place]), _named(columns, place, "tag", letters), shown(tag),
            f"Tag differs from {shown(columns['tag'][first])[4:]} of row {columns['row'][first]} only by capitals, "
            "spaces, dashes or signs that are not seen; they were judged as two items",
            "Spell it alike in all rows of one item.", place, False,
        )  # fmt: skip
        problems.append(problem)
        told.append((place, problem.sentence()))
    return told


def _strange_tables(
    columns: dict[str, Any],
    tables: Mapping[str, TravelTable],
    problems: list[Problem],
    letters: Letters,
    one_sheet: bool,
) -> list[tuple[int, str]]:
    """Rows that name a table that is not there."""
    spoiled = []
    for place, name in enumerate(columns["table"].tolist()):
        if name is None or name in tables:
            continue
        known = f"known are {', '.join(tables)}" if tables else "no sheet of the file has one that can"
        problem = Problem(str(columns["sheet"][place]), _named(columns, place, "table", letters), f"'{name}'",
                          f"no table of this name can be used; {'a csv has no sheet for one' if one_sheet else known}",
                          ELSEWHERE if one_sheet else "Give it on a sheet with the columns Table and Travel.",
                          place)  # fmt: skip
        problems.append(problem)
        spoiled.append((place, problem.sentence()))
    return spoiled
