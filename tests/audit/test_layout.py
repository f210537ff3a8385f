"""Layouts: what was found can be written down, corrected, and read again; what does not fit is said."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

import pytest

from audit_layouts import LAYOUTS
from audit_readings import kinds, one
from audit_sheets import XLSX, from_rows, printed_list
from lowpoint.audit.layout import Layout, layout_text, read_layout
from lowpoint.audit.model import Document
from lowpoint.audit.reading import read_sheet
from lowpoint.errors import LowpointError


def facts(document: Document) -> set[tuple[Any, ...]]:
    return {(v.quantity, v.case, v.cell, v.word, v.unit, v.gauge, str(v.number), str(v.si), v.form)
            for sheet in document.sheets for v in sheet.values}  # fmt: skip


def written(document: Document, tmp_path: Path) -> Layout:
    path = tmp_path / "layout.toml"
    path.write_text(layout_text(document), encoding="utf-8")
    return read_layout(path)


@pytest.mark.parametrize("name", [*XLSX, "limits", "two header rows", "us table"])
def test_a_layout_gives_what_the_search_found(name: str, tmp_path: Path) -> None:
    (XLSX[name]() if name in XLSX else LAYOUTS[name]).xlsx(tmp_path / "s.xlsx")
    found = read_sheet(tmp_path / "s.xlsx")
    again = read_sheet(tmp_path / "s.xlsx", layout=written(found, tmp_path))
    assert facts(again) == facts(found)
    assert all(v.confidence == 1.0 for sheet in again.sheets for v in sheet.values)
    assert [f for sheet in again.sheets for f in sheet.findings] == []


def test_a_layout_of_a_document(tmp_path: Path) -> None:
    printed_list().pdf(tmp_path / "s.pdf", {1: 50.0})
    found = read_sheet(tmp_path / "s.pdf")
    assert facts(read_sheet(tmp_path / "s.pdf", layout=written(found, tmp_path))) == facts(found)


def sheet_with(tmp_path: Path, text: str, rows: list[list[Any]] | None = None) -> Document:
    own = [["Tag", "LV-1"], ["p1", 6.8, "bar"], ["p2", 2.6, "bar a"], ["Cv", 59.4], ["Flow", "1,234 m3/h"]]
    from_rows(rows or own).xlsx(tmp_path / "s.xlsx")
    (tmp_path / "l.toml").write_text(text, encoding="utf-8")
    return read_sheet(tmp_path / "s.xlsx", layout=read_layout(tmp_path / "l.toml"))


def test_pins_override_what_the_search_finds(tmp_path: Path) -> None:
    text = """
decimal = "."
[[value]]
quantity = "p1"
cell = "B2"
unit = "bar g"
[[value]]
quantity = "coefficient"
cell = "B4"
unit = "Cv"
"""
    (sheet,) = sheet_with(tmp_path, text).sheets
    assert (one(sheet, "p1").unit, one(sheet, "p1").gauge, one(sheet, "p1").unit_from) == ("bar g", True, "layout")
    assert (one(sheet, "coefficient").number, one(sheet, "coefficient").unit) == (59.4, "Cv")
    assert one(sheet, "flow").number == 1234.0
    assert sheet.findings == ()
    assert sheet.tag == "LV-1"


def test_an_ignored_cell_is_no_value(tmp_path: Path) -> None:
    (sheet,) = sheet_with(tmp_path, 'ignore = ["Sheet!B3"]\n', [["p1", 6.8, "bar a"], ["p2", 2.6, "bar a"],
                          ["FL", 0.9], ["Flow", 12, "m3/h"]]).sheets  # fmt: skip
    assert not [v for v in sheet.values if v.quantity == "fl"]


@pytest.mark.parametrize(
    ("entry", "words"),
    [
        ('cell = "D9"', "the cell is empty"), ('cell = "B1"', "is no number"),
        ('cell = "B2"\nunit = "m3/h"', "is no unit of"),
        ('cell = "B2"\nlabel = "Inlet pressure"', "is not on this sheet"),
    ],
)  # fmt: skip
def test_a_pin_that_does_not_fit_is_a_finding(entry: str, words: str, tmp_path: Path) -> None:
    (sheet,) = sheet_with(tmp_path, f'[[value]]\nquantity = "p1"\n{entry}\n').sheets
    assert any(words in finding.text for finding in sheet.findings if finding.kind == "layout")
    assert "layout" in kinds(sheet)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("this is no toml", "must be a layout in TOML"), ("serach = true", "got 'serach'"),
        ("decimal = ';'", "decimal must be"),
        ("search = 1", "search must be"), ("value = 3", "must be"),
        ('[[value]]\nquantity = "p1"', "cell must be a text"),
        ('[[value]]\nquantity = "pl"\ncell = "B2"', "Nearest: "),
        ('[[value]]\nquantity = "p1"\ncell = "B2"\nunit = "furlong"', "unit must be"),
        ('[[value]]\nquantity = "sigma"\ncell = "B2"\nform = "sideways"', "form must be"),
        ('[[value]]\nquantity = "p1"\ncell = "B2"\nsheet = 1.5', "sheet must be"),
        ('[[value]]\nquantity = "p1"\ncell = "B2"\ncolour = "red"', "must hold quantity"),
    ],
)  # fmt: skip
def test_a_wrong_layout_names_what_is_wrong(text: str, words: str, tmp_path: Path) -> None:
    (tmp_path / "l.toml").write_text(text, encoding="utf-8")
    with pytest.raises(LowpointError, match=r"l\.toml") as caught:
        read_layout(tmp_path / "l.toml")
    assert words in str(caught.value)
    assert caught.value.exit_code == 2


def test_a_layout_that_is_not_there(tmp_path: Path) -> None:
    with pytest.raises(LowpointError, match="must be an existing file"):
        read_layout(tmp_path / "l.toml")


def test_odd_names_survive_the_file(tmp_path: Path) -> None:
    rows = [["Tag", 'LV-"1"\\x'], ["", "", "Case 1: \"hot\""], ["p1 [bar a]", "", 6.8], ["p2 [bar a]", "", 2.6],
            ["FL", "", 0.9]]  # fmt: skip
    from_rows(rows, title='A "b" #1').xlsx(tmp_path / "s.xlsx")
    document = read_sheet(tmp_path / "s.xlsx")
    table = tomllib.loads(layout_text(document))
    assert {entry["cell"] for entry in table["value"]} >= {"B1", "C3", "C4", "C5"}
