"""What a reader of sheets must say: what is unclear, missing, hidden, linked, or cannot be opened at all."""

from __future__ import annotations

import builtins
import zipfile
from pathlib import Path
from typing import Any

import pytest
from openpyxl import Workbook, load_workbook

from audit_readings import REST, kinds, one, reading
from audit_sheets import from_rows, numbered_lines
from lowpoint.audit.reading import read_sheet
from lowpoint.audit.showing import reading_lines
from lowpoint.errors import BookError, LowpointError


@pytest.mark.parametrize(
    "label", ["Kc", "Pressure", "Size", "Cv", "Velocity", "Cavitation limit", "Max. ΔP", "DN", "FL / FLP"]
)
def test_an_unclear_label_is_a_finding_and_no_value(label: str, tmp_path: Path) -> None:
    sheet = reading(tmp_path, [[label, 7.0]])
    (finding,) = [f for f in sheet.findings if f.kind == "ambiguous"]
    assert finding.cell == "Sheet!B1"
    assert label in finding.text
    assert finding.remedy
    assert not [v for v in sheet.values if v.cell == "Sheet!B1"]


def test_elimination_settles_an_unclear_label(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["Kvs", 160], ["Kv", 59.4]])
    assert one(sheet, "coefficient").number == 59.4
    assert one(sheet, "coefficient").confidence < one(sheet, "rated").confidence


def test_an_unknown_label_is_said_unread(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["Plug wobble", 7.0, "mm"], ["Weight", 85, "kg"]])
    (note,) = sheet.notes
    assert (note.kind, note.cell) == ("unread", "Sheet!B1")
    assert "Plug wobble" in note.text  # the weight is known to be of no concern
    assert sheet.findings == ()


def test_a_unit_that_is_missing_or_of_another_kind(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["Flow", 120.0], ["p1", 6.8, "m3/h"], ["p2", "2.6 furlong"]])
    assert kinds(sheet).count("unit") == 3
    assert all(one(sheet, key).unit == "" for key in ("flow", "p1", "p2"))


def test_label_and_cell_with_different_units(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["p1 [bar a]", 98.6, "psia"]])
    assert (kinds(sheet), one(sheet, "p1").unit) == (["unit"], "psi a")


def test_values_without_names_of_cases(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["p1", "bar a", 7.2, 6.8, 6.1]])
    assert kinds(sheet) == ["case"]
    assert sheet.cases == ("value 1", "value 2", "value 3")


def test_several_items_on_one_sheet(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["Tag", "LV-1"], ["p1", 6.8, "bar a"], ["Tag", "LV-2"], ["p1", 7.8, "bar a"]])
    assert "several" in kinds(sheet)


def _book(path: Path) -> Workbook:
    from_rows([["Tag", "LV-1"], ["p1", 6.8, "bar a"], ["p2", 2.6, "bar a"], *REST]).xlsx(path)
    return load_workbook(path)


def test_hidden_rows_columns_and_sheets_are_read_and_said(tmp_path: Path) -> None:
    path = tmp_path / "s.xlsx"
    book = _book(path)
    book["Sheet"].row_dimensions[2].hidden = True
    book.save(path)
    (sheet,) = read_sheet(path).sheets
    assert (kinds(sheet), one(sheet, "p1").number) == (["hidden"], 6.8)
    book["Sheet"].row_dimensions[2].hidden = False
    book["Sheet"].column_dimensions["B"].hidden = True
    book.save(path)
    assert kinds(read_sheet(path).sheets[0]) == ["hidden"]
    book["Sheet"].column_dimensions["B"].hidden = False
    book.create_sheet("Front")
    book["Sheet"].sheet_state = "hidden"
    book.save(path)
    assert kinds(read_sheet(path).sheets[0]) == ["hidden"]


def test_each_sheet_is_read_by_itself_and_a_cover_is_said_unread(tmp_path: Path) -> None:
    path = tmp_path / "s.xlsx"
    book = _book(path)
    book.copy_worksheet(book["Sheet"]).title = "Second"
    cover = book.create_sheet("Cover", 0)
    cover["A1"], cover["B1"] = "Tag", "LV-1"
    book.save(path)
    document = read_sheet(path)
    assert [sheet.name for sheet in document.sheets] == ["Sheet", "Second"]
    assert [(note.kind, note.cell) for note in document.notes] == [("unread", "Cover"), ("several", "")]


def test_a_formula_without_a_stored_value(tmp_path: Path) -> None:
    path = tmp_path / "s.xlsx"
    book = _book(path)
    book["Sheet"]["B2"] = "=5+1.8"
    book.save(path)  # openpyxl stores no values
    (sheet,) = read_sheet(path).sheets
    assert kinds(sheet) == ["formula"]
    assert "Sheet!B2" in sheet.findings[0].cell


def test_a_stored_value_of_a_formula_is_used_as_it_stands(tmp_path: Path) -> None:
    import xlsxwriter

    path = tmp_path / "s.xlsx"
    book = xlsxwriter.Workbook(str(path))
    sheet = book.add_worksheet("Sheet")
    for row, (label, unit) in enumerate([("p1", "bar a"), ("p2", "bar a"), ("Density", "kg/m3")]):
        sheet.write(row, 0, label)
        sheet.write_formula(row, 1, "=1+1", None, 6.8)  # a wrong value on purpose: nothing is calculated
        sheet.write(row, 2, unit)
    book.close()
    assert one(read_sheet(path).sheets[0], "p1").number == 6.8


def _with_part(path: Path, name: str, data: bytes) -> None:
    with zipfile.ZipFile(path, "a") as package:
        package.writestr(name, data)


def test_macros_and_links_are_told_and_not_followed(tmp_path: Path) -> None:
    path = tmp_path / "s.xlsm"
    _book(tmp_path / "s.xlsx")
    path.write_bytes((tmp_path / "s.xlsx").read_bytes())
    _with_part(path, "xl/vbaProject.bin", b"\xd0\xcf\x11\xe0")
    _with_part(path, "xl/externalLinks/externalLink1.xml", b"<externalLink/>")
    assert [finding.kind for finding in read_sheet(path).findings] == ["link", "link"]


def test_a_file_without_quantities(tmp_path: Path) -> None:
    path = tmp_path / "s.csv"
    path.write_text("Hello,World\n1,2\n", encoding="utf-8")
    document = read_sheet(path)
    assert document.sheets == ()
    assert [finding.kind for finding in document.findings] == ["unread"]


def _scan(path: Path) -> None:
    from reportlab.pdfgen.canvas import Canvas

    page = Canvas(str(path))
    page.rect(10, 10, 300, 400, fill=1)
    page.save()


def test_a_scan_has_no_text(tmp_path: Path) -> None:
    _scan(tmp_path / "s.pdf")
    with pytest.raises(LowpointError, match="has no text") as caught:
        read_sheet(tmp_path / "s.pdf")
    assert caught.value.exit_code == 2


def test_a_protected_document(tmp_path: Path) -> None:
    from reportlab.lib.pdfencrypt import StandardEncryption
    from reportlab.pdfgen.canvas import Canvas

    page = Canvas(str(tmp_path / "s.pdf"), encrypt=StandardEncryption("user", "owner"))
    page.drawString(50, 700, "p1 6.8 bar a")
    page.save()
    with pytest.raises(LowpointError, match="password"):
        read_sheet(tmp_path / "s.pdf")


def test_broken_files_are_one_sentence(tmp_path: Path) -> None:
    numbered_lines().xlsx(tmp_path / "whole.xlsx")
    half = (tmp_path / "whole.xlsx").read_bytes()[:3000]
    for name, data in (("a.pdf", b"%PDF-1.7\nnothing"), ("b.xlsx", half), ("c.csv", bytes(range(256)) * 4)):
        (tmp_path / name).write_bytes(data)
        with pytest.raises((LowpointError, BookError), match=name):
            read_sheet(tmp_path / name)
    with pytest.raises(LowpointError, match=r"must be \.xlsx"):
        read_sheet(tmp_path / "d.doc")


def test_the_missing_part_for_documents_is_named(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    _scan(tmp_path / "s.pdf")
    real = builtins.__import__

    def without(name: str, *rest: Any, **more: Any) -> Any:
        if name.startswith("pypdfium2"):
            raise ImportError(name)
        return real(name, *rest, **more)

    monkeypatch.setattr(builtins, "__import__", without)
    with pytest.raises(LowpointError, match=r"pip install 'lowpoint\[pdf\]'"):
        read_sheet(tmp_path / "s.pdf")


def test_pages_of_one_item_are_one_sheet_and_another_tag_is_another(tmp_path: Path) -> None:
    from reportlab.pdfgen.canvas import Canvas

    def page_of(canvas: Canvas, *lines: str) -> None:
        for row, line in enumerate(lines):
            canvas.drawString(50, 760 - 15 * row, line)
        canvas.showPage()

    canvas = Canvas(str(tmp_path / "s.pdf"))
    page_of(canvas, "Tag: LV-1", "p1 = 6.8 bar a", "p2 = 2.6 bar a")
    page_of(canvas, "Required Kv: 59.4", "FL: 0.88")
    page_of(canvas, "Tag: LV-2", "p1 = 7.8 bar a", "p2 = 2.6 bar a", "FL: 0.9")
    canvas.save()
    document = read_sheet(tmp_path / "s.pdf")
    assert [sheet.tag for sheet in document.sheets] == ["LV-1", "LV-2"]
    assert one(document.sheets[0], "coefficient").cell.startswith("page 2, line 1")


def test_a_page_turned_by_a_quarter_reads_like_an_upright_one(tmp_path: Path) -> None:
    from reportlab.pdfgen.canvas import Canvas

    canvas = Canvas(str(tmp_path / "s.pdf"), pagesize=(595, 842))
    canvas.translate(595, 0)
    canvas.rotate(90)
    for row, (label, value, unit) in enumerate([("p1", "6.8", "bar a"), ("p2", "2.6", "bar a"), ("FL", "0.88", "-")]):
        for x, text in ((50, label), (250, value), (350, unit)):
            canvas.drawString(x, 500 - 15 * row, text)
    canvas.save()
    (sheet,) = read_sheet(tmp_path / "s.pdf").sheets
    assert (one(sheet, "p1").number, one(sheet, "p2").number, one(sheet, "fl").number) == (6.8, 2.6, 0.88)


@pytest.mark.parametrize(
    ("rows", "word"),
    [
        ([["Cavitation", "No"]], "no cavitation"), ([["Flow regime", "Choked"]], "choked"),
        ([["Flashing", "Yes"]], "flashing"), ([["Valve operates without cavitation"]], "no cavitation"),
        ([["Flow condition", "Turbulent, not choked"]], "not choked"), ([["Cavitating"]], "cavitating"),
    ],
)  # fmt: skip
def test_statements(rows: list[list[Any]], word: str, tmp_path: Path) -> None:
    assert one(reading(tmp_path, rows), "statement").word == word


def test_words_of_the_trade_are_the_functions_own(tmp_path: Path) -> None:
    sheet = reading(tmp_path, [["Characteristic", "EQ %"], ["Flow direction", "FTO"], ["Trim", "reduced trim"]])
    assert (one(sheet, "characteristic").word, one(sheet, "direction").word) == ("equal percentage", "open")
    assert one(sheet, "trim").word == "reduced"


def test_the_listing_shows_cells_and_confidence(tmp_path: Path) -> None:
    from_rows([["Tag", "LV-1"], ["p1", 6.8, "bar g"], ["Kc", 0.7], *REST]).xlsx(tmp_path / "s.xlsx")
    lines = reading_lines(read_sheet(tmp_path / "s.xlsx"))
    (p1,) = [line for line in lines if line.startswith("p1")]
    assert all(part in p1 for part in ("6.8", "bar g", "Sheet!B2", "Sheet!A2", "1.00"))
    assert any("ambiguous: Sheet!B3" in line for line in lines)
