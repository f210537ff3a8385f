"""From a file to cases: which sheets hold a list, which columns it has, and what is wrong with it, cell by cell."""

from __future__ import annotations

import hashlib
import os
from collections.abc import Callable, Sequence
from pathlib import Path

from lowpoint.book import guard
from lowpoint.errors import BookError
from lowpoint.problems import counted
from lowpoint.survey.assembling import assemble
from lowpoint.survey.fields import FIELDS
from lowpoint.survey.grids import Grid, Sheets
from lowpoint.survey.headers import Place, find_headings
from lowpoint.survey.listed_columns import listed
from lowpoint.survey.model import Cases, Problem, Reading
from lowpoint.survey.own_sheet import note_for, put_method
from lowpoint.survey.sheet import SheetColumns, read_sheet
from lowpoint.survey.tolerances import SHEET as TOLERANCES
from lowpoint.survey.tolerances import listed_tolerances
from lowpoint.survey.travel_tables import read_tables

__all__ = ["FORMATS", "open_list", "read_list", "read_sheets"]

FORMATS = (".xlsx", ".xlsm", ".xltx", ".xltm", ".csv", ".txt", ".tsv", ".ods")
EXAMPLE = "example"
"""A sheet of this name is left alone beside another list: the blank form has one."""
NAMED = 6
"""Sheets without a list that are named; the rest is counted."""
ABSENT = "Name the columns as 'lowpoint starter list' does; that command writes a blank form."


def open_list(path: str | os.PathLike[str], progress: Callable[[int, int], None] | None = None) -> Sheets:
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

    return read_workbook(path, progress)


def read_list(
    path: str | os.PathLike[str], elevation: float | None = None, progress: Callable[[int, int], None] | None = None
) -> tuple[Cases, Reading]:
    """The cases of a list and how they were read; ``elevation`` (m) of the site, where the list gives none.

    BookError where the file cannot be opened; whatever is wrong inside it is told in the reading, and the rows that
    can be used are there all the same. ``progress`` is told (rows read, rows to read) of a workbook.
    """
    return read_sheets(open_list(path, progress), path, elevation)


def read_sheets(
    sheets: Sheets, path: str | os.PathLike[str], elevation: float | None = None
) -> tuple[Cases, Reading]:  # fmt: skip
    """The same of sheets that are open already; ``path`` is where they came from."""
    lists, tables, empty = _sorted(sheets)
    problems: list[Problem] = []
    notes: list[str] = []
    vendor = read_tables(tables, problems, notes)
    found = lists
    lists, series = _with_tags(found)
    parts = [read_sheet(grid, place, elevation, problems) for grid, place in lists]
    notes += [*_own_notes(parts, lists, sheets, problems), *series]
    tolerances = listed_tolerances(lists, sheets.grids, problems)
    problems += _of_sheets((*lists, *tables), parts) if parts else _no_list(sheets, empty)
    cases = assemble(parts, vendor, problems, sheets.format == "csv")
    columns = [c for part in parts for c in part.columns] + [c for grid, place in tables for c in listed(grid, place)]
    used = {column.field for column in columns if column.status == "used"}
    reading = Reading(
        path=str(path), format=sheets.format, sheets=tuple(grid.sheet for grid, _ in lists), columns=tuple(columns),
        missing=_missing(used, cases) if parts else (),
        absent=tuple(field.key for field in FIELDS if field.key not in used),
        problems=tuple(problems), notes=(*sheets.notes, *notes, *_notes(parts, sheets, found, tables)),
        elevation=_elevation(parts, elevation), fingerprint=hashlib.sha256(guard.load(path)).hexdigest(),
        lists=tuple(part.table for part in parts if part.table is not None),
        tolerances=tolerances,
    )  # fmt: skip
    return cases, reading


Found = list[tuple[Grid, Place]]


def _sorted(sheets: Sheets) -> tuple[Found, Found, list[Grid]]:
    """Sheets with a list, sheets with vendors' tables, and empty ones."""
    found = [(grid, place) for grid in sheets.grids if (place := find_headings(grid)) is not None]
    lists = [(grid, place) for grid, place in found if place.catalogue is FIELDS]
    named = [(grid, place) for grid, place in lists if grid.sheet.casefold() != EXAMPLE]
    tables = [(grid, place) for grid, place in found if place.catalogue is not FIELDS]
    lists = named or lists  # the example is read where it is the only list
    return lists, tables, [grid for grid in sheets.grids if grid.empty]


def _with_tags(lists: Found) -> tuple[Found, list[str]]:
    """The sheets without those of a book with LP_ formulas that have no tags (readings by the hour), and notes."""
    series = [grid.sheet for grid, place in lists
              if place.own and not any(h.field and h.field.key == "tag" for h in place.headings.values())]  # fmt: skip
    notes = [f"{sheet} has no column Tag and was left alone" for sheet in series]
    return [(grid, place) for grid, place in lists if grid.sheet not in series], notes


def _own_notes(
    parts: Sequence[SheetColumns], lists: Found, sheets: Sheets, problems: list[Problem]
) -> list[str]:  # fmt: skip
    """What is told of sheets with LP_ formulas; their scale method is put into their rows."""
    notes = []
    for part, (_, place) in zip(parts, lists, strict=True):
        if place.own:
            notes.append(note_for(part.sheet))
            lacking = (
                None if "method" in part.words else put_method(part.words, len(part.rows), sheets.grids, part.sheet)
            )
            problems += [lacking] if lacking else []
    return notes


def _of_sheets(sheets: Sequence[tuple[Grid, Place]], parts: Sequence[SheetColumns]) -> list[Problem]:
    """What is told of whole sheets: hidden ones, lists without a row."""
    hidden = [grid.sheet for grid, _ in sheets if grid.state != "visible"]
    empty = [part.sheet for part in parts if not part.rows]
    return [
        *(Problem(sheet, "", "", "the sheet is hidden and was read all the same", "Show it, or delete it.",
                  spoils=False) for sheet in hidden),
        *(Problem(sheet, "", "", "the list has headings and no rows below them", "Fill in a row for each case.")
          for sheet in empty),
    ]  # fmt: skip


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
    left = [grid.sheet for grid in sheets.grids if grid.sheet not in known and not grid.empty
            and grid.sheet.strip().casefold() != TOLERANCES]  # fmt: skip
    if left and lists:
        more = f" and {counted(len(left) - NAMED, 'other sheet')}" if len(left) > NAMED else ""
        notes.append(f"no list was found on {', '.join(left[:NAMED])}{more}, which was left alone")
    if tables:
        notes.append(f"vendors' tables were read from {', '.join(grid.sheet for grid, _ in tables)}")
    return notes
