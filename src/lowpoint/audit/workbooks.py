"""Workbooks as pages: values, the digits that formats show, merged and hidden cells, in one parse of each part.

Only stored values are read; formulas, macros and links are told and never followed. The package is admitted by the
guard of the house before anything is parsed.
"""

from __future__ import annotations

import datetime
import re
from collections.abc import Iterator
from functools import lru_cache

from lowpoint.audit.cells import Cell, Page
from lowpoint.audit.numbers import shown_number
from lowpoint.book.package import Package
from lowpoint.book.parts import local_name, parse
from lowpoint.book.refs import Area, address, area, column_number
from lowpoint.book.stored import strings_of
from lowpoint.errors import BookError

__all__ = ["read_workbook"]

Note = tuple[str, str, str, str]
_BUILT_IN = {0: "General", 1: "0", 2: "0.00", 3: "#,##0", 4: "#,##0.00", 9: "0%", 10: "0.00%", 11: "0.00E+00",
             12: "# ?/?", 13: "# ??/??", 37: "#,##0", 38: "#,##0", 39: "#,##0.00", 40: "#,##0.00", 48: "##0.0E+0",
             49: "@"}  # fmt: skip
_DATES = frozenset({*range(14, 23), *range(27, 37), *range(45, 48), *range(50, 59)})
_PLACE = re.compile(r"([A-Z]{1,3})(\d{1,7})")


def read_workbook(data: bytes, path: str) -> tuple[list[Page], list[Note]]:
    """The worksheets of a book's bytes, and what is to be said of the book; BookError where it cannot be read."""
    package = Package(data, path)
    notes = list(_links(package))
    pages = []
    try:
        strings = strings_of(_part(package, "sharedStrings"))
        formats = _formats(package)
        epoch = datetime.date(1904, 1, 1) if package.date1904 else datetime.date(1899, 12, 30)
        for sheet in package.sheets:
            if sheet.kind == "worksheet" and sheet.path in package:
                pages.append(
                    _Sheet(sheet.title, sheet.state, strings, formats, epoch).read(package.read(sheet.path), sheet.path)
                )
    except BookError:
        raise
    except Exception as problem:
        must = f"cannot be read as a data sheet ({type(problem).__name__}: {problem})"
        raise BookError(path, must, remedy="Save it anew in a spreadsheet program.") from problem
    return pages, notes


def _part(package: Package, kind: str) -> bytes:
    """The part that the book relates to by this kind; empty where it has none."""
    for source in [r.target for r in package.relations("") if r.kind == "officeDocument"]:
        for relation in package.relations(source):
            if relation.kind == kind and not relation.external and relation.target in package:
                return package.read(relation.target)
    return b""


def _links(package: Package) -> Iterator[Note]:
    if any(name.lower().endswith("vbaproject.bin") for name in package.names):
        yield "link", "", "the book holds macros, which were not run", "Ask for the sheet as .xlsx without macros."
    if any("externallinks/" in name.lower() and name.endswith(".xml") for name in package.names):
        yield "link", "", "the book takes values from other books, which were not opened: stored values were read", \
            "Ask for a sheet whose values stand in it."  # fmt: skip


def _formats(package: Package) -> list[str]:
    """The number format of each style of cell."""
    part = _part(package, "styles")
    if not part:
        return []
    own: dict[int, str] = {}
    found: list[str] = []
    for item in parse(part, "styles"):
        if local_name(item.tag) == "numFmts":
            own = {int(n.get("numFmtId", "0")): n.get("formatCode", "General") for n in item}
        elif local_name(item.tag) == "cellXfs":
            for style in item:
                number = int(style.get("numFmtId", "0"))
                code = own.get(number) or _BUILT_IN.get(number, "General")
                found.append("date" if number in _DATES or _is_date(code) else code)
    return found


@lru_cache(512)
def _is_date(code: str) -> bool:
    bare = re.sub(r'"[^"]*"|\\.|_.|\*.|\[[^\]]*\]', "", code.split(";")[0])
    return (
        bool(re.search(r"[ymdhs]", bare, re.IGNORECASE))
        and not re.search(r"[0#?]", bare)
        and "general" not in bare.lower()
    )


class _Sheet:
    """Reads one worksheet part."""

    def __init__(self, title: str, state: str, strings: list[str], formats: list[str], epoch: datetime.date) -> None:
        self.page = Page(title, [], state=state)
        self.strings, self.formats, self.epoch = strings, formats, epoch
        self.prefix = title
        self.hidden_columns: list[tuple[int, int]] = []
        self.unvalued: list[str] = []

    def read(self, data: bytes, path: str) -> Page:
        merged: list[Area] = []
        for item in parse(data, path):
            name = local_name(item.tag)
            if name == "cols":
                self.hidden_columns = [(int(c.get("min", "1")), int(c.get("max", "1"))) for c in item
                                       if c.get("hidden") in ("1", "true")]  # fmt: skip
            elif name == "sheetData":
                self._rows(item)
            elif name == "mergeCells":
                merged = [a for m in item if (a := area(m.get("ref", "")))]
        self._merge(merged)
        if self.unvalued:
            more = f" and {len(self.unvalued) - 4} more" if len(self.unvalued) > 4 else ""
            self.page.notes.append(("formula", ", ".join(self.unvalued[:4]) + more,
                                    "formulas without a stored value were not read",
                                    "Open the book in a spreadsheet program, and save it there."))  # fmt: skip
        return self.page

    def _rows(self, data: object) -> None:
        number = 0
        for row in data:  # type: ignore[attr-defined]
            number = int(row.get("r") or number + 1)
            hidden = row.get("hidden") in ("1", "true")
            column = 0
            for item in row:
                if local_name(item.tag) != "c":
                    continue
                place = _PLACE.fullmatch(item.get("r") or "")
                column = column_number(place[1]) if place else column + 1
                cell = self._cell(item, number, column)
                if cell is not None:
                    cell.hidden = hidden or any(first <= column <= last for first, last in self.hidden_columns)
                    self.page.hidden += cell.hidden
                    if not self.page.add(cell):
                        return

    def _cell(self, item: object, row: int, column: int) -> Cell | None:
        kind = item.get("t", "n")  # type: ignore[attr-defined]
        value, inline, formula = None, "", False
        for part in item:  # type: ignore[attr-defined]
            name = local_name(part.tag)
            if name == "v":
                value = part.text
            elif name == "is":
                inline = "".join(t.text or "" for t in part.iter() if local_name(t.tag) == "t")
            elif name == "f":
                formula = True
        place = f"{self.prefix}!{address(row, column)}"
        cell = Cell(row, column, column + 1, place, "", bottom=row)
        if kind == "inlineStr":
            cell.text = inline
        elif value is None or (value == "" and kind != "str"):
            if formula:
                self.unvalued.append(place)
            return None
        elif kind == "s":
            cell.text = self.strings[int(value)] if value.isdecimal() and int(value) < len(self.strings) else ""
        elif kind == "b":
            cell.text, cell.kind = ("TRUE" if value in ("1", "true") else "FALSE"), "logical"
        elif kind == "e":
            cell.text, cell.kind = value, "error"
        elif kind in ("str", "d"):
            cell.text = value
        else:
            self._number(cell, value, int(item.get("s") or 0))  # type: ignore[attr-defined]
        cell.text = cell.text.strip()
        return cell if cell.text else None

    def _number(self, cell: Cell, value: str, style: int) -> None:
        try:
            number = float(value)
        except ValueError:
            cell.text = value
            return
        code = self.formats[style] if style < len(self.formats) else "General"
        if code == "date":
            cell.kind = "date"
            cell.text = str(self.epoch + datetime.timedelta(days=int(number))) if 0 <= number < 2e6 else value
            return
        if number != number or number in (float("inf"), float("-inf")):
            cell.text = value
            return
        cell.number = number
        cell.text, cell.half, cell.unit, cell.factor = shown_number(number, code)

    def _merge(self, merged: list[Area]) -> None:
        by_place = {(cell.row, int(cell.left)): cell for cell in self.page.cells}
        for a in merged:
            cell = by_place.get((a.r1, a.c1))
            if cell is not None:
                cell.right, cell.bottom = a.c2 + 1, a.r2
                self.page.merged += 1
