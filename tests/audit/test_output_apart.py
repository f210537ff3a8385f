"""A workbook of its own: of a csv, a PDF, and of workbooks that nothing can be added to with certainty."""

from __future__ import annotations

import io
import zipfile
from datetime import date
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from audit.outputs import content, members, planted, sheet, small, small_csv
from lowpoint.audit.output import audit_bytes

DAY = date(2026, 3, 14)


def written(path: Path) -> tuple[Any, list[str]]:
    data, said = audit_bytes(sheet(path), today=DAY)
    return openpyxl.load_workbook(io.BytesIO(data)), said


def noted(book: Any) -> dict[tuple[str, str], str]:
    return {(s.title, cell.coordinate): cell.comment.text for s in book.worksheets for row in s.iter_rows()
            for cell in row if cell.comment}  # fmt: skip


def test_a_text_stands_as_it_was_read(tmp_path: Path) -> None:
    book, said = written(small_csv(tmp_path, sigma="3.25"))
    assert said == []
    assert book.sheetnames == ["As read", "Findings", "Questions", "Working", "Read"]
    assert content(book, "As read")["A3"] == "Inlet pressure p1"
    assert content(book, "As read")["B8"] == "3.25"  # a text, as in the file
    assert list(noted(book)) == [("As read", "B8")]
    assert "Differs: sigma" in noted(book)["As read", "B8"]
    link = next(
        cell.hyperlink for row in book["Findings"].iter_rows() for cell in row if cell.value == "row 8, column 2"
    )
    assert link.location == "'As read'!B8"


def test_a_page_stands_line_by_line(tmp_path: Path) -> None:
    path = planted(tmp_path, "letter", "gauge_as_absolute_both", seed=5)
    audit = sheet(path)
    wrong = {claim.cell: claim for claims in audit.claims for claim in claims if claim.verdict == "differs"}
    assert wrong
    book, _ = written(path)
    texts = noted(book)
    assert len(texts) == len(wrong)
    values = {value.cell: value.raw for reading in audit.document.sheets for value in reading.values}
    shown = {str(book[title][cell].value) for title, cell in texts}
    assert shown == {values[cell] for cell in wrong}


def test_the_same_bytes_on_every_run(tmp_path: Path) -> None:
    audit = sheet(small_csv(tmp_path, sigma="3.25"))
    assert audit_bytes(audit, today=DAY) == audit_bytes(audit, today=DAY)
    assert audit_bytes(audit, today=DAY) != audit_bytes(audit, today=date(2026, 3, 15))


def repacked(path: Path, **changes: bytes) -> Path:
    parts = {**members(path), **changes}
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as package:
        for name, data in parts.items():
            package.writestr(name, data)
    return path


def as_signed(path: Path) -> Path:
    return repacked(path, **{"_xmlsignatures/origin.sigs": b""})


def as_macros(path: Path) -> Path:
    types = members(path)["[Content_Types].xml"].replace(
        b"application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml",
        b"application/vnd.ms-excel.sheet.macroEnabled.main+xml",
    )
    return repacked(path, **{"[Content_Types].xml": types, "xl/vbaProject.bin": b"not run"})


def as_template(path: Path) -> Path:
    types = members(path)["[Content_Types].xml"].replace(b"spreadsheetml.sheet.main", b"spreadsheetml.template.main")
    return repacked(path, **{"[Content_Types].xml": types})


def as_shared(path: Path) -> Path:
    return repacked(path, **{"xl/revisions/revisionHeaders.xml": b"<headers/>"})


@pytest.mark.parametrize(
    ("change", "why"),
    [
        (as_signed, "it is signed"),
        (as_macros, "it holds macros"),
        (as_template, "it is a template"),
        (as_shared, "it is shared"),
    ],
)
def test_what_cannot_be_copied_is_said(tmp_path: Path, change: Any, why: str) -> None:
    path = change(small(tmp_path, sigma=3.25))
    book, said = written(path)
    assert len(said) == 1
    assert why in said[0]
    assert "a workbook of its own" in said[0]
    assert book.sheetnames == ["Data", "Findings", "Questions", "Working", "Read"]
    assert content(book, "Data")["B8"] == 3.25
    assert list(noted(book)) == [("Data", "B8")]
    assert said[0] in content(book, "Findings").values()
    data, _ = audit_bytes(sheet(path), today=DAY)
    assert not any(name.lower().endswith(("vbaproject.bin", ".sigs")) for name in members(data))
