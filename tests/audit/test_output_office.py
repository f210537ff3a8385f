"""The workbook of an audit in real LibreOffice: notes on their cells, the vendor's values, and four more sheets."""

from __future__ import annotations

from pathlib import Path

import openpyxl

from audit.outputs import SIGMA, content, planted, sheet, small, small_csv
from book.office import convert, needs_office
from lowpoint.audit.output import write_audit
from lowpoint.audit.output.noting import notes_of


@needs_office
def test_libreoffice_shows_notes_and_values(tmp_path: Path) -> None:
    path = planted(tmp_path, "ledger", "gauge_as_absolute_p1")
    audit = sheet(path)
    write_audit(audit, tmp_path / "out.xlsx")
    shown = openpyxl.load_workbook(convert(tmp_path / "out.xlsx", tmp_path / "office", recalculate=False))
    before = openpyxl.load_workbook(path)
    title = before.sheetnames[0]
    assert shown.sheetnames == [title, "Findings", "Questions", "Working", "Read"]
    assert content(shown, title) == content(before, title)
    wanted = notes_of(audit)
    assert wanted
    found = {f"{title}!{cell.coordinate}": cell.comment.text for row in shown[title].iter_rows() for cell in row
             if cell.comment}  # fmt: skip
    assert found == {cell: f"Lowpoint\n{text}" for cell, text in wanted.items()}


@needs_office
def test_libreoffice_keeps_the_vendors_note(tmp_path: Path) -> None:
    write_audit(sheet(small(tmp_path, sigma=3.25, note="as agreed")), tmp_path / "out.xlsx")
    shown = openpyxl.load_workbook(convert(tmp_path / "out.xlsx", tmp_path / "office", recalculate=False))
    assert shown["Data"]["A1"].comment.text == "kept as it is"
    assert shown["Data"][SIGMA].comment.text.startswith("as agreed\n\nLowpoint\nDiffers: sigma")


@needs_office
def test_libreoffice_shows_a_text_as_read(tmp_path: Path) -> None:
    write_audit(sheet(small_csv(tmp_path, sigma="3.25")), tmp_path / "out.xlsx")
    shown = openpyxl.load_workbook(convert(tmp_path / "out.xlsx", tmp_path / "office", recalculate=False))
    assert shown["As read"]["B8"].value == "3.25"
    assert "Differs: sigma" in shown["As read"]["B8"].comment.text
