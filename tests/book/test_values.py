"""The copy with plain values: no formula left, every digit kept, nothing dropped in silence."""

from __future__ import annotations

import math
import os
import re
import zipfile
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from openpyxl.chart import LineChart, Reference
from openpyxl.formatting.rule import FormulaRule
from openpyxl.styles import Font
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.worksheet.formula import ArrayFormula
from openpyxl.worksheet.table import Table, TableColumn, TableFormula

from book.makers import MAIN, book, corpus, corpus_book, pack, parts, relation_list, sheet_xml
from lowpoint.book.package import Package
from lowpoint.book.values import write_values_copy
from lowpoint.errors import BookError
from lowpoint.problems import CellError

SHEET = "xl/worksheets/sheet1.xml"


@pytest.fixture
def listed(tmp_path: Path) -> Path:
    """A valve list of Kestrel Bay with formulas, formats, a table, a chart, a rule, a name and a frozen pane."""
    workbook = openpyxl.Workbook()
    sheet = workbook.active
    sheet.title = "Intake"
    rows = [["tag", "p1", "p2", "index"], ["FV-101", 9.5, 3.25, "=LP_SIGMA(B2,C2,0.023)"]]
    for row in [*rows, ["FV-102", 8.0, 4.0, "=LP_SIGMA(B3,C3,0.023)"]]:
        sheet.append(row)
    sheet["D2"].number_format = "0.00"
    sheet["D2"].font = Font(bold=True)
    sheet["E1"] = 45_000.123456789012
    sheet["E1"].number_format = "yyyy-mm-dd hh:mm"
    sheet["E2"] = -7.5
    sheet["E2"].number_format = "yyyy-mm-dd"
    sheet["G1"] = ArrayFormula("G1:G3", "=LP_STAGE_PRESSURES(9.5,3,0.02,2)")
    sheet.column_dimensions["A"].width = 31
    sheet.freeze_panes = "B2"
    sheet.conditional_formatting.add("D2:D3", FormulaRule(formula=["$D2<1.5"], font=Font(color="FFAA0000")))
    table = Table(displayName="Valves", ref="A1:D3")
    table._initialise_columns()
    table.tableColumns[3] = TableColumn(
        id=4, name="index", calculatedColumnFormula=TableFormula(attr_text="LP_SIGMA(1,2,3)")
    )
    for column, title in zip(table.tableColumns, rows[0], strict=True):
        column.name = str(title)
    sheet.add_table(table)
    chart = LineChart()
    chart.add_data(Reference(sheet, min_col=4, min_row=1, max_row=3), titles_from_data=True)
    sheet.add_chart(chart, "I2")
    workbook.defined_names["lowest"] = DefinedName("lowest", attr_text="MIN(Intake!$D$2:$D$3)")
    workbook.calculation.fullCalcOnLoad = True
    workbook.save(tmp_path / "list.xlsx")
    return tmp_path / "list.xlsx"


def cell_xml(path: Path, ref: str, sheet: str = SHEET) -> str:
    """One cell as it stands in the file, nothing where it does not."""
    with zipfile.ZipFile(path) as archive:
        text = archive.read(sheet).decode()
    found = re.search(rf'<c r="{ref}"[^>]*?(/>|>.*?</c>)', text)
    return found[0] if found else ""


VALUES: dict[tuple[str, int, int], Any] = {
    ("Intake", 2, 4): 1.516_192_384_769_539_2,
    ("Intake", 3, 4): CellError.NUM,
    ("Intake", 1, 7): 9.5,
    ("Intake", 2, 7): 5.25,
    ("Intake", 3, 7): 3.0,
}


def test_the_copy(listed: Path, tmp_path: Path) -> None:
    before, out = listed.read_bytes(), tmp_path / "list-values.xlsx"
    lacking = write_values_copy(listed, out, VALUES)
    assert listed.read_bytes() == before
    assert sorted(os.listdir(tmp_path)) == ["list-values.xlsx", "list.xlsx"]
    assert [words.split(",")[0] for words in lacking] == ["finer points of the charts"]
    with zipfile.ZipFile(out) as archive:
        assert not re.search(rb"<f[ >]", archive.read(SHEET))
    sheet = openpyxl.load_workbook(out)["Intake"]
    assert {key: sheet.cell(key[1], key[2]).value for key in VALUES} == VALUES
    assert sheet["D3"].data_type == "e"
    assert (sheet["D2"].number_format, sheet["D2"].font.bold, sheet["A2"].value) == ("0.00", True, "FV-101")
    assert (sheet.column_dimensions["A"].width, sheet.freeze_panes, len(sheet._charts)) == (31, "B2", 1)
    with zipfile.ZipFile(out) as archive:
        assert archive.read("xl/charts/chart1.xml").count(b'<delete val="0"') == 2
    assert [rule.formula for block in sheet.conditional_formatting for rule in block.rules] == [["$D2<1.5"]]
    assert sheet.tables["Valves"].ref == "A1:D3"
    assert not any(column.calculatedColumnFormula for column in sheet.tables["Valves"].tableColumns)
    package = Package.open(out)
    assert not package.full_calc_on_load
    assert package.defined_names[0].text == "MIN(Intake!$D$2:$D$3)"


def test_numbers_keep_every_digit(tmp_path: Path) -> None:
    out = tmp_path / "out.xlsx"
    sheet = sheet_xml('<row r="1"><c r="A1"><v>0.30000000000000004</v></c><c r="B1"><f>A1/3</f></c></row>')
    values = {("Intake", 1, 2): 0.1, ("Intake", 1, 3): 2 / 3, ("Intake", 9, 9): 2**53 - 1, ("Intake", 9, 8): 1e-320}
    write_values_copy(book(tmp_path, **{SHEET: sheet}), out, values)
    assert "<v>0.30000000000000004</v>" in cell_xml(out, "A1")
    assert "<v>0.1</v>" in cell_xml(out, "B1")
    assert "<v>0.6666666666666666</v>" in cell_xml(out, "C1")
    assert "<v>9007199254740991</v>" in cell_xml(out, "I9")
    assert "<v>1e-320</v>" in cell_xml(out, "H9")


def test_dates_stay_numbers(listed: Path, tmp_path: Path) -> None:
    """A negative serial is no date, yet it is the number that was there."""
    out = tmp_path / "out.xlsx"
    write_values_copy(listed, out, VALUES)
    assert f"<v>{45_000.123456789012!r}</v>" in cell_xml(out, "E1")
    assert "<v>-7.5</v>" in cell_xml(out, "E2")
    assert openpyxl.load_workbook(out)["Intake"]["E1"].number_format == "yyyy-mm-dd hh:mm"


@pytest.mark.parametrize("text", ["=1+1", "+44 20", "-5", "@SUM(A1)", "\t=1", "=cmd|' /C calc'!A0", "LP_WHY says ok"])
def test_text_is_inert(listed: Path, tmp_path: Path, text: str) -> None:
    out = tmp_path / "out.xlsx"
    write_values_copy(listed, out, {("Intake", 2, 4): text})
    assert 't="inlineStr"' in cell_xml(out, "D2")
    assert "<f>" not in cell_xml(out, "D2")
    cell = openpyxl.load_workbook(out)["Intake"]["D2"]
    assert (cell.value, bool(cell.quotePrefix)) == (text, text[0] in "=+-@\t")
    assert not openpyxl.load_workbook(out)["Intake"]["D3"].quotePrefix
    assert cell.number_format == "0.00"


def test_kinds_of_values(listed: Path, tmp_path: Path) -> None:
    out = tmp_path / "out.xlsx"
    row = [
        True,
        False,
        None,
        "",
        CellError.NA,
        CellError.SPILL,
        math.nan,
        math.inf,
        "a\rb\x07",
        "_x0041_",
        "x" * 40_000,
    ]
    write_values_copy(listed, out, {("Intake", 20, at): value for at, value in enumerate(row, start=1)})
    found = [re.sub(r'^<c r="\w+"|</?c>|/>$', "", cell_xml(out, f"{letter}20")) for letter in "ABCDEFGH"]
    assert found[:2] == [' t="b"><v>1</v>', ' t="b"><v>0</v>']
    assert all("<v>" not in blank for blank in found[2:4])
    errors = ["#N/A", "#VALUE!", "#NUM!", "#NUM!"]
    assert found[4:] == [f' t="e"><v>{error}</v>' for error in errors]
    assert "a_x000D_b_x0007_" in cell_xml(out, "I20")
    assert "_x005F_x0041_" in cell_xml(out, "J20")
    assert len(openpyxl.load_workbook(out)["Intake"]["K20"].value) == 32_767
    with pytest.raises(TypeError, match="a cell cannot hold list"):
        write_values_copy(listed, out, {("Intake", 2, 4): [1.0]})


def test_what_is_not_given_keeps_its_stored_value(tmp_path: Path) -> None:
    out = tmp_path / "out.xlsx"
    write_values_copy(book(tmp_path), out, {})
    assert [cell.value for cell in openpyxl.load_workbook(out)["Intake"][1]] == [2.5, 5, "pump"]


def test_titles_count_without_case_and_must_be_there(tmp_path: Path) -> None:
    out = tmp_path / "out.xlsx"
    write_values_copy(book(tmp_path), out, {("INTAKE", 1, 2): 6})
    assert openpyxl.load_workbook(out)["Intake"]["B1"].value == 6
    with pytest.raises(ValueError, match="no worksheet 'Jetty'"):
        write_values_copy(book(tmp_path), tmp_path / "two.xlsx", {("Jetty", 1, 1): 6})
    assert not (tmp_path / "two.xlsx").exists()


def test_covered_cells_of_a_merged_range_hold_nothing(tmp_path: Path) -> None:
    xml = sheet_xml('<row r="1"><c r="A1"><v>1</v></c></row>').replace(
        b"</sheetData>", b'</sheetData><mergeCells><mergeCell ref="A1:B1"/></mergeCells>'
    )
    out = tmp_path / "out.xlsx"
    write_values_copy(book(tmp_path, **{SHEET: xml}), out, {("Intake", 1, 1): 4, ("Intake", 1, 2): 5})
    sheet = openpyxl.load_workbook(out)["Intake"]
    assert (sheet["A1"].value, sheet["B1"].value, str(sheet.merged_cells)) == (4, None, "A1:B1")


def test_macros_only_where_the_name_promises_them(tmp_path: Path) -> None:
    source, plain, kept = corpus_book("macro01.xlsm"), tmp_path / "out.xlsx", tmp_path / "out.xlsm"
    assert "macros are not in the copy" in write_values_copy(source, plain, {})
    assert "macros are not in the copy" not in write_values_copy(source, kept, {})
    first, second = Package.open(plain), Package.open(kept)
    assert (first.has_macros, first.macro_enabled) == (False, False)
    assert (second.has_macros, second.macro_enabled) == (True, True)
    assert second.read("xl/vbaProject.bin") == Package.open(source).read("xl/vbaProject.bin")


@pytest.mark.parametrize(
    ("name", "words"),
    [
        ("out.xls", "must end in one of .xlsx, .xlsm, .xltx, .xltm, got .xls"),
        ("out", "got no ending"),
        ("out.xlsm", "holds no macros. Let it end in .xlsx."),
        ("out.xltm", "holds no macros. Let it end in .xltx."),
        ("none/out.xlsx", "its folder does not exist"),
        ("list.xlsx", "cannot take the workbook's own place"),
    ],
)
def test_outputs_that_cannot_be(tmp_path: Path, name: str, words: str) -> None:
    with pytest.raises(BookError) as caught:
        write_values_copy(book(tmp_path), tmp_path / name, {})
    assert words in str(caught.value)
    assert os.listdir(tmp_path) == ["list.xlsx"]


def test_templates(tmp_path: Path) -> None:
    write_values_copy(book(tmp_path), tmp_path / "out.xltx", {})
    assert Package.open(tmp_path / "out.xltx").template
    write_values_copy(tmp_path / "out.xltx", tmp_path / "out.xlsx", {})
    assert not Package.open(tmp_path / "out.xlsx").template


def test_strict_books_are_refused(tmp_path: Path) -> None:
    strict = parts()["xl/workbook.xml"].replace(MAIN.encode(), b"http://purl.oclc.org/ooxml/spreadsheetml/main")
    with pytest.raises(BookError, match="strict open XML"):
        write_values_copy(book(tmp_path, **{"xl/workbook.xml": strict}), tmp_path / "out.xlsx", {})


DROPPED = [
    ("background04.xlsx", "background pictures"),
    ("checkbox01.xlsx", "check boxes inside cells"),
    ("embed_image01.xlsx", "pictures and data types inside cells"),
    ("header_image11.xlsx", "pictures in headers and footers"),
    ("protect04.xlsx", "ranges with their own password"),
    ("textbox22.xlsx", "shapes and text boxes"),
    ("fit_to_pages03.xlsx", "printer settings"),
    ("chart_table02.xlsx", "finer points of the charts"),
]


@pytest.mark.parametrize(("name", "what"), DROPPED)
def test_dropped_features_are_named(tmp_path: Path, name: str, what: str) -> None:
    lacking = write_values_copy(corpus_book(name), tmp_path / "out.xlsx", {})
    assert any(words.startswith(what) for words in lacking)


def test_pictures_are_counted(tmp_path: Path) -> None:
    """With Pillow they are carried and not named; without they are named."""
    lacking = write_values_copy(corpus_book("default_format09.xlsx"), tmp_path / "out.xlsx", {})
    carried = any(name.startswith("xl/media/") for name in Package.open(tmp_path / "out.xlsx").names)
    assert carried != any(words.startswith("1 of 1 pictures") for words in lacking)


def test_more_dropped_features_are_named(tmp_path: Path) -> None:
    ext = b"<extLst><ext uri='x'><x14:sparklineGroup xmlns:x14='urn:x'/></ext></extLst>"
    more = {
        SHEET: sheet_xml("").replace(b"</worksheet>", ext + b"</worksheet>"),
        "xl/slicers/slicer1.xml": b"<slicers/>",
        "customXml/item1.xml": b"<a/>",
        "_xmlsignatures/origin.sigs": b"",
        "xl/connections.xml": b"<connections/>",
    }
    lacking = write_values_copy(book(tmp_path, **more), tmp_path / "out.xlsx", {})
    starts = ("slicers are", "data connections", "custom XML", "the digital signature is", "sparklines are")
    assert [words for words in lacking if not words.startswith(starts)] == []
    assert len(lacking) == len(starts)


def test_calls_outside_cells_are_named(listed: Path, tmp_path: Path) -> None:
    workbook = openpyxl.load_workbook(listed)
    workbook.defined_names["worst"] = DefinedName("worst", attr_text="LP_SIGMA(9,3,0.02)")
    workbook["Intake"].conditional_formatting.add("D2", FormulaRule(formula=["lp.sigma(B2,C2,0.02)<2"]))
    workbook.save(listed)
    lacking = write_values_copy(listed, tmp_path / "out.xlsx", {})
    assert "defined names still call LP_ functions" in lacking
    assert "conditional formats or validations of sheet 'Intake' still call LP_ functions" in lacking


def test_sheets_of_other_kinds(tmp_path: Path) -> None:
    members = parts()
    sheet = '<sheet name="Old" sheetId="2" r:id="rId2"/></sheets>'
    members["xl/workbook.xml"] = members["xl/workbook.xml"].replace(b"</sheets>", sheet.encode())
    kind = "http://schemas.microsoft.com/office/2006/relationships/xlMacrosheet"
    links = relation_list(("rId1", "worksheet", "worksheets/sheet1.xml"), ("rId2", kind, "macrosheets/sheet1.xml"))
    members |= {"xl/_rels/workbook.xml.rels": links, "xl/macrosheets/sheet1.xml": b"<macrosheet/>"}
    path = pack(tmp_path / "list.xlsx", members)
    lacking = write_values_copy(path, tmp_path / "out.xlsx", {("Old", 1, 1): 4.0, ("Intake", 1, 2): 7.0})
    assert "sheet 'Old', a macrosheet, is a plain worksheet in the copy" in lacking
    assert Package.open(tmp_path / "out.xlsx").sheet("Old").kind == "worksheet"


def test_books_made_elsewhere_are_copied(tmp_path: Path) -> None:
    """Every cell has the value that another read of the stored values gives; hidden sheets stay hidden."""
    for path in corpus()[::4]:
        out = tmp_path / "out.xlsx"
        write_values_copy(path, out, {})
        source, copy = (openpyxl.load_workbook(book, data_only=True) for book in (path, out))
        for sheet in source.worksheets:
            other = copy[sheet.title]
            assert {c.coordinate: c.value for row in sheet.rows for c in row if c.value is not None} == {
                c.coordinate: c.value for row in other.rows for c in row if c.value is not None
            }
        states = [(sheet.title, sheet.state) for sheet in Package.open(path).sheets]
        assert states == [(sheet.title, sheet.state) for sheet in Package.open(out).sheets]


@settings(max_examples=60, deadline=None)
@given(
    part=st.sampled_from(sorted(parts())),
    edits=st.lists(st.tuples(st.integers(0, 10**6), st.integers(32, 126)), min_size=1, max_size=4),
)
def test_mutated_parts_end_in_a_sentence(
    tmp_path_factory: pytest.TempPathFactory, part: str, edits: list[tuple[int, int]]
) -> None:
    content = bytearray(parts()[part])
    for place, value in edits:
        content[place % len(content)] = value
    folder = tmp_path_factory.mktemp("mutated")
    path = book(folder, **{part: bytes(content)})
    before, said = path.read_bytes(), ""
    try:
        write_values_copy(path, folder / "out.xlsx", {})
    except BookError as refused:
        said = str(refused)
    assert (folder / "out.xlsx").exists() != said.endswith(".")
    if not said:
        assert Package.open(folder / "out.xlsx").sheets
    assert path.read_bytes() == before
