"""Reading of data sheets: every quantity in its cell, over layouts of clearly different kinds and three formats.

What must be found is written beside each value by the writers of the sheets (``audit_sheets``, ``audit_layouts``).
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

import audit_sheets
from audit_layouts import LAYOUTS
from audit_sheets import XLSX, Draft, Expected, from_rows
from lowpoint.audit.model import Document, SheetReading, Value
from lowpoint.audit.reading import read_sheet

DRAFTS: dict[str, Draft] = {**{name: make() for name, make in XLSX.items()}, **LAYOUTS}
SEMICOLONS = ("French", "french", "spanish", "German")
FORMATTED = "formats"
"""Its units stand in number formats, which only a workbook has."""


def values(document: Document) -> list[Value]:
    return [value for sheet in document.sheets for value in sheet.values]


def holds(value: Value, expected: Any) -> bool:
    if isinstance(expected, str):
        return value.word == expected
    return value.word is None and abs(value.number - expected) < 1e-9


def missed(document: Document, expected: Expected, by_cell: bool = True) -> list[tuple[Any, ...]]:
    found = values(document)
    return [
        (quantity, case, cell, number)
        for (quantity, case), (cell, number) in expected.items()
        if not any(v.quantity == quantity and v.case == case and (not by_cell or v.cell == cell) and holds(v, number)
                   for v in found)
    ]  # fmt: skip


def strangers(document: Document, expected: Expected) -> list[tuple[Any, ...]]:
    """Numbers that were read as an operating quantity in a case where the sheet has none, in a cell of its own."""
    cells = {cell for cell, _ in expected.values()}
    kept = {"valve_size", "style", "travel"}  # further true values of these layouts that are not listed
    return [(v.quantity, v.case, v.cell) for v in values(document)
            if (v.quantity, v.case) not in expected and v.cell not in cells and v.quantity not in kept]  # fmt: skip


def only(document: Document) -> SheetReading:
    assert len(document.sheets) == 1
    return document.sheets[0]


@pytest.mark.parametrize("name", DRAFTS)
def test_workbooks(name: str, tmp_path: Path) -> None:
    expected = DRAFTS[name].xlsx(tmp_path / "sheet.xlsx")
    document = read_sheet(tmp_path / "sheet.xlsx")
    assert missed(document, expected) == []
    assert strangers(document, expected) == []


@pytest.mark.parametrize("name", [name for name in DRAFTS if name != FORMATTED])
def test_plain_text(name: str, tmp_path: Path) -> None:
    expected = DRAFTS[name].csv(tmp_path / "sheet.csv", ";" if name in SEMICOLONS else ",")
    document = read_sheet(tmp_path / "sheet.csv")
    assert document.format == "csv"
    assert missed(document, expected) == []


def _drawable(draft: Draft) -> Draft:
    """Without the signs that the standard typefaces of PDF lack."""
    swaps = {"₁": "1", "₂": "2", "Δ": "d", "σ": "sigma", "ρ": "rho"}
    for place, text in draft.cells.items():
        if isinstance(text, str):
            for sign, other in swaps.items():
                text = text.replace(sign, other)
            draft.cells[place] = text
    return draft


def _columns(draft: Draft, size: float, gap: float) -> tuple[dict[int, float], dict[int, float]]:
    """Left and right ends of columns wide enough for what they hold."""
    from reportlab.pdfbase.pdfmetrics import stringWidth

    merged = {(r1, c1) for r1, c1, _, c2 in draft.merged if c2 > c1}
    widths: dict[int, float] = {}
    for (row, column), text in draft.cells.items():
        if (row, column) not in merged and len(str(text)) < 46:
            widths[column] = max(widths.get(column, 10.0), stringWidth(str(text), "Helvetica", size))
    left: dict[int, float] = {}
    place = 30.0
    for column in range(1, max(c for _, c in draft.cells) + 1):
        left[column] = place
        place += widths.get(column, 10.0) + gap * size
    return left, {column: x + widths.get(column, 10.0) for column, x in left.items()}


PRINTED = [name for name in DRAFTS if name not in (FORMATTED, "boxes")]


@pytest.mark.parametrize("right", [False, True], ids=["left", "right"])
@pytest.mark.parametrize("name", PRINTED)
def test_documents(name: str, right: bool, tmp_path: Path) -> None:
    draft = _drawable(XLSX[name]() if name in XLSX else LAYOUTS[name])
    size = 6.0
    left, ends = _columns(draft, size, 2.0)
    flush = frozenset(column for column in left if right and column > 2)
    places = {column: ends[column] if column in flush else x for column, x in left.items()}
    expected = draft.pdf(tmp_path / "sheet.pdf", places, flush, size)
    document = read_sheet(tmp_path / "sheet.pdf")
    assert document.format == "pdf"
    assert missed(document, expected, by_cell=False) == []


def test_printed_boxes(tmp_path: Path) -> None:
    places = {1: 40.0, 2: 130.0, 3: 220.0, 4: 310.0, 5: 400.0, 6: 490.0}
    expected = audit_sheets.boxes().pdf(tmp_path / "sheet.pdf", places, size=7.0)
    assert missed(read_sheet(tmp_path / "sheet.pdf"), expected, by_cell=False) == []


def test_printed_list(tmp_path: Path) -> None:
    expected = audit_sheets.printed_list().pdf(tmp_path / "sheet.pdf", {1: 50.0}, font="Courier")
    assert missed(read_sheet(tmp_path / "sheet.pdf"), expected, by_cell=False) == []


def test_cells_of_a_document_have_an_address_each(tmp_path: Path) -> None:
    audit_sheets.printed_form().pdf(tmp_path / "s.pdf", {1: 50, 2: 200, 3: 330, 4: 400, 5: 470})
    found = values(read_sheet(tmp_path / "s.pdf"))
    assert len({v.cell for v in found}) == len(found)
    assert all(v.cell.startswith("page 1, line ") for v in found)


def test_the_cases_keep_the_order_of_the_sheet(tmp_path: Path) -> None:
    audit_sheets.transposed().xlsx(tmp_path / "s.xlsx")
    assert only(read_sheet(tmp_path / "s.xlsx")).cases == ("Start-up", "Normal", "Upset")


def test_a_sheet_of_one_column_has_one_nameless_case(tmp_path: Path) -> None:
    audit_sheets.one_column_us().xlsx(tmp_path / "s.xlsx")
    reading = only(read_sheet(tmp_path / "s.xlsx"))
    assert (reading.cases, reading.tag) == (("",), "FV-12")


def test_a_mass_flow_and_a_kinematic_viscosity_are_quantities_of_their_own(tmp_path: Path) -> None:
    rows = [["Flow", ("mass_flow", None, 42.0), "t/h"], ["Viscosity", ("kinematic", None, 0.94), "cSt"],
            ["p1", ("p1", None, 6.8), "bar a"]]  # fmt: skip
    expected = from_rows(rows).xlsx(tmp_path / "s.xlsx")
    assert missed(read_sheet(tmp_path / "s.xlsx"), expected) == []


def test_a_break_in_a_label_is_mended(tmp_path: Path) -> None:
    rows = [["Liquid pressure recovery", ("fl", None, 0.88)], ["factor FL"], ["p1", ("p1", None, 6.8), "bar a"],
            ["p2", ("p2", None, 2.6), "bar a"]]  # fmt: skip
    expected = from_rows(rows).xlsx(tmp_path / "s.xlsx")
    assert missed(read_sheet(tmp_path / "s.xlsx"), expected) == []
