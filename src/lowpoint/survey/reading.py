"""From a file to cases: which sheets hold a list, which columns it has, and what is wrong with it, cell by cell."""

from __future__ import annotations

import hashlib
import os
from collections.abc import Sequence
from pathlib import Path

from lowpoint.book import guard
from lowpoint.errors import BookError
from lowpoint.survey.assembling import assemble
from lowpoint.survey.fields import FIELDS
from lowpoint.survey.grids import Grid, Sheets
from lowpoint.survey.headers import Place, find_headings
from lowpoint.survey.model import Cases, Problem, Reading
from lowpoint.survey.sheet import SheetColumns, listed, read_sheet
from lowpoint.survey.travel_tables import read_tables

__all__ = ["FORMATS", "open_list", "read_list"]

FORMATS = (".xlsx", ".xlsm", ".xltx", ".xltm", ".csv", ".txt", ".tsv", ".ods")
EXAMPLE = "example"
"""A sheet of this name is left alone: the blank form has one."""
ABSENT = "Name the columns as 'lowpoint starter list' does; that command writes a blank form."


def open_list(path: str | os.PathLike[str]) -> Sheets:
    """The sheets of a file by its ending; BookError for what is no list, or cannot be read."""
    suffix = Path(path).suffix.lower()
    if suffix not in FORMATS:
        must = "a list must be .xlsx, .xlsm, .csv or .ods"
        raise BookError(str(path), must, suffix or "no ending", "Save it as one of these.")
    if suffix == ".ods":
        from lowpoint.survey.ods import read_open_document

        return read_open_document(path)
    if suffix in (".csv", ".txt", ".tsv"):
        from lowpoint.survey.csvs import read_text

        return read_text(path)
    from lowpoint.survey.xlsx import read_workbook

    return read_workbook(path)


def read_list(path: str | os.PathLike[str], elevation: float | None = None) -> tuple[Cases, Reading]:
    """The cases of a list and how they were read; ``elevation`` (m) of the site, where the list gives none.

    BookError where the file cannot be opened; whatever is wrong inside it is told in the reading, and the rows that
    can be used are there all the same.
    """
    sheets = open_list(path)
    lists, tables, empty = _sorted(sheets)
    problems: list[Problem] = []
    vendor = read_tables(tables, problems)
    parts = [read_sheet(grid, place, elevation, problems) for grid, place in lists]
    if not parts:
        problems += _no_list(sheets, empty)
    problems += [
        Problem(part.sheet, "", "", "the list has headings and no rows below them", "Fill in a row for each case.")
        for part in parts if not part.rows
    ]  # fmt: skip
    cases = assemble(parts, vendor, problems)
    columns = [c for part in parts for c in part.columns] + [c for grid, place in tables for c in listed(grid, place)]
    used = {column.field for column in columns if column.status == "used"}
    reading = Reading(
        path=str(path), format=sheets.format, sheets=tuple(grid.sheet for grid, _ in lists), columns=tuple(columns),
        missing=_missing(used, cases) if parts else (),
        absent=tuple(field.key for field in FIELDS if field.key not in used),
        problems=tuple(problems), notes=(*sheets.notes, *_notes(parts, sheets, lists, tables)),
        elevation=_elevation(parts, elevation), fingerprint=hashlib.sha256(guard.load(path)).hexdigest(),
    )  # fmt: skip
    return cases, reading


Found = list[tuple[Grid, Place]]


def _sorted(sheets: Sheets) -> tuple[Found, Found, list[Grid]]:
    """Sheets with a list, sheets with vendors' tables, and empty ones."""
    lists: Found = []
    tables: Found = []
    for grid in sheets.grids:
        place = None if grid.sheet.casefold() == EXAMPLE else find_headings(grid)
        if place is not None:
            (lists if place.catalogue is FIELDS else tables).append((grid, place))
    return lists, tables, [grid for grid in sheets.grids if grid.empty]


def _no_list(sheets: Sheets, empty: Sequence[Grid]) -> list[Problem]:
    found = []
    for grid in sheets.grids:
        text = "the sheet is empty" if grid in empty else "no row has the headings of a list (such as Tag, Flow, p1)"
        found.append(Problem(grid.sheet, "", "", text, ABSENT))
    return found


def _missing(used: set[str], cases: Cases) -> tuple[str, ...]:
    """Required columns that are not there, in words, by the kinds of item in the list."""
    kinds = set(cases.kind.tolist())
    needed: list[tuple[str, bool]] = [
        ("Tag", "tag" in used),
        ("Flow", "flow" in used),
        ("p1", "p1" in used),
        ("p2, or Outlet into", bool({"p2", "outlet"} & used)),
        ("pv, or Liquid and Temperature", "pv" in used or {"fluid", "t"} <= used),
        ("pc, or Liquid", bool({"pc", "fluid"} & used)),
        ("Density, or Liquid and Temperature", "density" in used or {"fluid", "t"} <= used),
        ("FL, or Table (valves)", "valve" not in kinds or bool({"fl", "table"} & used)),
        ("Inlet pipe bore (orifices)", not {"orifice", "plates"} & kinds or "pipe_in" in used),
        ("Bore (orifices)", "orifice" not in kinds or "bore" in used),
        ("Bores (sets of plates)", "plates" not in kinds or "bores" in used),
    ]
    return tuple(words for words, there in needed if not there)


def _elevation(parts: Sequence[SheetColumns], given: float | None) -> float | None:
    return next((part.elevation for part in parts if part.elevation is not None), given)


def _notes(parts: Sequence[SheetColumns], sheets: Sheets, lists: Found, tables: Found) -> list[str]:
    notes = [note for part in parts for note in part.notes]
    known = {grid.sheet for grid, _ in (*lists, *tables)}
    left = [grid.sheet for grid in sheets.grids if grid.sheet not in known and not grid.empty]
    if left and lists:
        notes.append(f"no list was found on {', '.join(left)}, which was left alone")
    if tables:
        notes.append(f"vendors' tables were read from {', '.join(grid.sheet for grid, _ in tables)}")
    return notes
