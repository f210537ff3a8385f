"""Small valve lists with LP_ formulas for the tests of recalculation: by openpyxl, XlsxWriter, or as bare XML."""

from __future__ import annotations

import re
import warnings
import zipfile
from collections.abc import Mapping
from dataclasses import dataclass
from html import escape
from pathlib import Path
from typing import Any

import openpyxl
from openpyxl.workbook.defined_name import DefinedName

from book import makers
from lowpoint import cells
from lowpoint.book.recalc import recalculate
from lowpoint.book.refs import area, column_letters
from lowpoint.book.report import Report
from lowpoint.problems import CellError

# Three items of the sea-water intake: upstream and downstream pressure, vapour pressure (bar absolute), FL.
ITEMS = ((10.0, 4.0, 0.03, 0.9), (12.5, 9.0, 0.05, 0.85), (7.0, 6.0, 0.2, 0.7))

_SPLIT = re.compile(r"(?:(.*)!)?(\w+)")


@dataclass(frozen=True, slots=True)
class Done:
    """A recalculated book: its report, its path, and its cached values by place (``List!A1``)."""

    report: Report
    path: Path
    values: dict[str, Any]

    def __getitem__(self, place: str) -> Any:
        return self.values.get(place if "!" in place else f"List!{place}")

    @property
    def kept(self) -> dict[str, str]:
        """The reasons why cells were not refreshed, by place."""
        return {f"{k.sheet}!{k.cell}": k.reason for k in self.report.kept}

    @property
    def failed(self) -> dict[str, str]:
        """The reasons of failed calls, by place."""
        return {f"{f.sheet}!{f.cell}": f.reason for f in self.report.failed}

    @property
    def changed(self) -> set[str]:
        """The places of changed cells that calls feed."""
        return {f"{c.sheet}!{c.cell}" for c in self.report.changed}

    @property
    def unfed(self) -> set[str]:
        """The places of changed cells that no call feeds."""
        return {f"{c.sheet}!{c.cell}" for c in self.report.unfed}

    def part(self, name: str) -> bytes:
        """The content of a part of the package."""
        with zipfile.ZipFile(self.path) as package:
            return package.read(name)


def recalculated(path: Path, out: Path | None = None, **options: Any) -> Done:
    """Recalculate a book and read what came out."""
    report = recalculate(path, out, **options)
    assert report.output is not None
    written = Path(report.output)
    return Done(report, written, stored(written))


def both(path: Path) -> Done:
    """Recalculate by levels and call by call, in two files that must be the same; the first of them."""
    done = recalculated(path, path.with_name("levels.xlsx"))
    by_cell = recalculated(path, path.with_name("cells.xlsx"), per_cell=True)
    assert done.values == by_cell.values
    assert done.path.read_bytes() == by_cell.path.read_bytes()
    assert outcome(done.report) == outcome(by_cell.report)
    # Call by call the engine leaves a formula at its first error: what stands behind it is not made.
    for place in _failures(done.report) ^ _failures(by_cell.report):
        assert isinstance(done[place[0]], CellError), place
    return done


def _failures(report: Report) -> set[tuple[str, ...]]:
    return {(f"{f.sheet}!{f.cell}", f.function, f.error, f.reason) for f in report.failed}


def outcome(report: Report) -> dict[str, Any]:
    """What a report says of the workbook, without failures and what differs between two runs of the same.

    With calls taken out, the formulas around them meet fewer of the engine's differences than with call-backs.
    """
    plain = report.to_json()
    for key in ("book", "output", "seconds", "evaluation_seconds", "engine_differences", "failed", "exit_code"):
        del plain[key]
    del plain["counts"]["failed"]
    return plain


def stored(path: Path) -> dict[str, Any]:
    """Every cached value of a book by place; numbers as floats, errors as errors."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # it says what of a book it does not know
        book = openpyxl.load_workbook(path, data_only=True)
    found = {}
    for sheet in book.worksheets:
        for cell in sheet._cells.values():
            if cell.value is not None:
                found[f"{sheet.title}!{cell.coordinate}"] = _plain(cell)
    return found


def _plain(cell: Any) -> Any:
    if cell.data_type == "e":
        return {e.value: e for e in CellError}.get(cell.value, cell.value)
    return float(cell.value) if type(cell.value) is int else cell.value


def expected(name: str, *arguments: Any) -> Any:
    """What the core gives for one call."""
    return cells.call(name, list(arguments))


def listed(
    path: Path,
    places: Mapping[str, Any],
    *,
    names: Mapping[str, str] | None = None,
    arrays: Mapping[str, str] | None = None,
    sheets: tuple[str, ...] = ("List",),
) -> Path:
    """A book by openpyxl: values and formulas by place; ``arrays`` maps the first cell of a range to that range."""
    book = openpyxl.Workbook()
    book.remove(book.worksheets[0])
    for title in sheets:
        book.create_sheet(title)
    for place, value in places.items():
        title, cell = _placed(place, sheets[0])
        if arrays and place in arrays:
            value = openpyxl.worksheet.formula.ArrayFormula(arrays[place], value)
        book[title][cell] = value
    for name, text in (names or {}).items():
        book.defined_names[name] = DefinedName(name, attr_text=text)
    book.calculation.fullCalcOnLoad = False
    book.save(path)
    return path


def _placed(place: str, first: str) -> tuple[str, str]:
    found = _SPLIT.fullmatch(place)
    assert found
    return found[1] or first, found[2]


def valves() -> dict[str, Any]:
    """The items in A2:D4 of the first sheet under their headings."""
    places: dict[str, Any] = dict(zip(("A1", "B1", "C1", "D1"), ("p1", "p2", "pv", "FL"), strict=True))
    for row, item in enumerate(ITEMS, start=2):
        places |= dict(zip((f"{column}{row}" for column in "ABCD"), item, strict=True))
    return places


def bare(
    path: Path, cells_by_place: Mapping[str, str], *, parts: Mapping[str, bytes] | None = None, **more: Any
) -> Path:
    """A book from bare XML: ``{"B2": '<f>A2*2</f><v>1</v>'}``; text before ``>`` are attributes of the cell."""
    return makers.pack(
        path, {**makers.parts(**more), "xl/worksheets/sheet1.xml": rows(cells_by_place), **(parts or {})}
    )


def rows(cells_by_place: Mapping[str, str]) -> bytes:
    """A worksheet part of these cells, rows and columns in order."""
    return makers.sheet_xml(cells_xml(cells_by_place))


def cells_xml(cells_by_place: Mapping[str, str]) -> str:
    """The rows of these cells."""
    by_row: dict[int, list[tuple[int, str]]] = {}
    for place, inside in cells_by_place.items():
        found = area(place)
        assert found
        head, mark, body = ("", "", inside) if inside.startswith("<") else inside.partition("|")
        name = f"{column_letters(found.c1)}{found.r1}"
        cell = f'<c r="{name}"{" " + head if mark else ""}>{body}</c>'
        by_row.setdefault(found.r1, []).append((found.c1, cell))
    lines = (f'<row r="{row}">{"".join(c for _, c in sorted(line))}</row>' for row, line in sorted(by_row.items()))
    return "".join(lines)


def formula(text: str, value: str = "") -> str:
    """A cell's content: a formula and its cached value."""
    return f"<f>{escape(text, quote=False)}</f>" + (f"<v>{value}</v>" if value else "")


def number(value: float) -> str:
    """A cell's content: a number."""
    return f"<v>{value!r}</v>"
