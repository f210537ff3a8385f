"""Only results change: books of several writers before and after ``recalc``, in their bytes and in a real office.

Every part but the sheet with the planted formulas must be the same byte for byte, and so must that sheet with its
results masked. Then LibreOffice opens both, and what it shows (cells, styles, charts, pictures, notes, validations,
conditional formats, pivot tables, settings) may differ in results only.
"""

from __future__ import annotations

import os
import shutil
import zipfile
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import pytest

from book.makers import corpus
from book.office import convert_all, needs_office
from lossless.comparing import Shown, changed_parts, masked
from lossless.planting import SIGMA, Planted, altered, plant, with_more_parts
from lossless.written_books import FLAT_BOOK, by_openpyxl, by_xlsxwriter
from lowpoint.book.recalc import recalculate
from lowpoint.book.report import Report

# What must be in the books for the proof to mean anything: the beginning of a part's name, by writer.
HELD = {
    "xlsxwriter.xlsx": (
        "xl/charts/", "xl/drawings/", "xl/media/", "xl/comments1", "xl/tables/", "xl/chartsheets/", "xl/metadata",
        "docProps/custom", "xl/drawings/vmlDrawing",
    ),
    "xlsxwriter.xlsm": ("xl/vbaProject.bin", "xl/charts/"),
    "openpyxl.xlsx": ("xl/charts/", "xl/comments/", "xl/tables/", "xl/externalLinks/", "xl/chartsheets/"),
    "signed.xlsx": ("_xmlsignatures/", "customXml/", "odd/unknown.bin", "xl/externalLinks/"),
    "office.xlsx": ("xl/pivotTables/", "xl/pivotCache/", "xl/externalLinks/", "xl/comments1"),
    "resaved.xlsx": ("xl/charts/", "xl/media/", "xl/drawings/"),
}  # fmt: skip
MARKS = {
    "xlsxwriter.xlsx": (b"<x14:sparkline>", b"<dataValidation ", b"<conditionalFormatting ", b"<x14:cfRule "),
    "openpyxl.xlsx": (b"<dataValidation ", b"<conditionalFormatting "),
    "office.xlsx": (b"<dataValidation ",),
    "resaved.xlsx": (b"<dataValidation ", b"<conditionalFormatting "),
}
EVERY = 12
"""The office opens one in so many of the books made elsewhere, all of them with LOWPOINT_EVERY_BOOK set."""


AT_ONCE = 40
"""The office ends before its time where it is given hundreds."""


@dataclass(frozen=True)
class Pair:
    """A planted book and its recalculated copy."""

    planted: Planted
    after: Path
    report: Report

    def check_bytes(self) -> None:
        """Nothing but results changed in the package."""
        before, part = self.planted.path, self.planted.part
        assert changed_parts(before, self.after) == set(self.report.parts)
        assert part in self.report.parts
        with zipfile.ZipFile(before) as old, zipfile.ZipFile(self.after) as new:
            for name in self.report.parts:
                assert name.startswith("xl/worksheets/"), name
                assert masked(old.read(name)) == masked(new.read(name)), (before.name, name)
                assert masked(old.read(name)) != old.read(name)

    def check_shown(self, before: Shown, after: Shown) -> None:
        """Nothing but results differs in the office, and the planted cells show theirs."""
        name, title, row = self.planted.path.name, self.planted.title, self.planted.row
        assert len(before.lines) == len(after.lines), name
        assert [pair for pair in zip(before.lines, after.lines, strict=True) if pair[0] != pair[1]] == [], name
        assert before.results.keys() == after.results.keys(), name
        told = {(c.sheet, c.cell) for c in (*self.report.changed, *self.report.unfed)}
        differing = {place for place in after.results if before.results[place] != after.results[place]}
        assert {(sheet, f"{_letters(column)}{line}") for sheet, line, column in differing} <= told, name
        shown = [after.results[title, line, column] for line, column in ((row, 4), (row, 5), (row, 7), (row + 1, 7))]
        # The office works arrays out anew on loading, from the stored index; it knows no LP_ function to work out.
        assert shown == pytest.approx([SIGMA, 2.0 * SIGMA + 1.0, 2.0 * SIGMA, 3.0 * SIGMA], rel=1e-14), name
        assert after.results[title, row, 6] == "rest", name


def _letters(column: int) -> str:
    head, last = divmod(column - 1, 26)
    return (_letters(head) if head else "") + chr(65 + last)


def paired(source: Path, folder: Path) -> Pair:
    """The book planted, and recalculated, in this folder."""
    planted = plant(source, folder / f"{source.stem}-{source.suffix[1:]}-before{source.suffix}")
    after = planted.path.with_name(f"{source.stem}-{source.suffix[1:]}-after{source.suffix}")
    return Pair(planted, after, recalculate(planted.path, after))


def check_in_office(pairs: Sequence[Pair], folder: Path) -> None:
    """Open all of them, before and after, without recalculation, and compare."""
    sources = [path for pair in pairs for path in (pair.planted.path, pair.after)]
    flat: list[Path] = []
    for begin in range(0, len(sources), AT_ONCE):
        some = sources[begin : begin + AT_ONCE]
        flat += convert_all(some, folder / "flat", recalculate=False, kind="fods")
    for pair, before, after in zip(pairs, flat[::2], flat[1::2], strict=True):
        pair.check_shown(Shown(before), Shown(after))


def _own_books(folder: Path) -> list[Path]:
    books = [
        by_xlsxwriter(folder / "xlsxwriter.xlsx"), by_xlsxwriter(folder / "xlsxwriter.xlsm"),
        by_openpyxl(folder / "openpyxl.xlsx"),
    ]  # fmt: skip
    return [*books, with_more_parts(folder / "openpyxl.xlsx", folder / "signed.xlsx")]


def _office_books(folder: Path) -> list[Path]:
    """A book of the office's own, and one of another writer that it has saved."""
    (folder / "office.fods").write_text(FLAT_BOOK, encoding="utf-8")
    shutil.copy(folder / "xlsxwriter.xlsx", folder / "resaved.xlsx")
    return convert_all([folder / "office.fods", folder / "resaved.xlsx"], folder / "saved", recalculate=False)


def _check_held(path: Path) -> None:
    with zipfile.ZipFile(path) as package:
        names = package.namelist()
        for begin in HELD[path.name]:
            assert any(name.startswith(begin) for name in names), (path.name, begin)
        sheets = b"".join(package.read(name) for name in names if name.startswith("xl/worksheets/sheet"))
    for mark in MARKS.get(path.name, ()):
        assert mark in sheets, (path.name, mark)


def test_books_of_two_libraries_keep_every_byte_but_results(tmp_path: Path) -> None:
    for source in _own_books(tmp_path):
        _check_held(source)
        pair = paired(source, tmp_path)
        pair.check_bytes()
        assert pair.report.broken_signature == (source.name == "signed.xlsx")
        assert {f"{c.cell}" for c in pair.report.changed} >= {f"{c}{pair.planted.row}" for c in "DEFGH"}


# What a careless writer might lose or change, in the book by XlsxWriter: part, bytes, other bytes.
ALTERATIONS = {
    "input": ("xl/worksheets/sheet1.xml", b"<v>80.5</v>", b"<v>80.25</v>"),
    "formula": ("xl/worksheets/sheet1.xml", b"<f>D3-E3</f>", b"<f>D3-E2</f>"),
    "width": ("xl/worksheets/sheet1.xml", b'width="14.7109375"', b'width="24.7109375"'),
    "validation": ("xl/worksheets/sheet1.xml", b'sqref="C2:C5"', b'sqref="C2:C4"'),
    "condition": ("xl/worksheets/sheet1.xml", b"<formula>$F2&gt;5</formula>", b"<formula>$F2&gt;6</formula>"),
    "merged": ("xl/worksheets/sheet1.xml", b'"I1:J1"', b'"I1:K1"'),
    "sparkline": ("xl/worksheets/sheet1.xml", b"<xm:sqref>H2</xm:sqref>", b"<xm:sqref>J2</xm:sqref>"),
    "style": ("xl/styles.xml", b'rgb="FFDDEEFF"', b'rgb="FFDDEE00"'),
    "note": ("xl/comments1.xml", b"Noisy since March", b"Quiet since March"),
    "chart": ("xl/charts/chart1.xml", b'<c:barDir val="col"/>', b'<c:barDir val="bar"/>'),
    "shape": ("xl/drawings/drawing2.xml", b"Check the trim", b"Check the seat"),
    "name": ("xl/workbook.xml", b"List!$C$2:$C$5<", b"List!$C$2:$C$4<"),
}


@needs_office
def test_an_office_shows_the_same_but_for_the_results(tmp_path: Path) -> None:
    books = [*_own_books(tmp_path), *_office_books(tmp_path)]
    for source in books:
        _check_held(source)
    pairs = [paired(source, tmp_path) for source in books]
    for pair in pairs:
        pair.check_bytes()
    check_in_office(pairs, tmp_path)


@needs_office
def test_the_comparison_sees_what_a_careless_writer_would_change(tmp_path: Path) -> None:
    source = by_xlsxwriter(tmp_path / "same.xlsx")
    books = {name: altered(source, tmp_path / f"{name}.xlsx", *what) for name, what in ALTERATIONS.items()}
    for name, (part, _, _) in ALTERATIONS.items():
        assert changed_parts(source, books[name]) == {part}
        with zipfile.ZipFile(source) as old, zipfile.ZipFile(books[name]) as new:
            assert masked(old.read(part)) != masked(new.read(part)), name
    again = altered(source, tmp_path / "again.xlsx", "xl/workbook.xml", b"", b"")
    flat = convert_all([source, again, *books.values()], tmp_path / "flat", recalculate=False, kind="fods")
    same, repeated, *others = (Shown(path) for path in flat)
    assert same.lines == repeated.lines
    assert same.results == repeated.results
    assert [name for name, other in zip(books, others, strict=True) if other.lines == same.lines] == []


def test_books_made_elsewhere_keep_every_byte_but_results(tmp_path: Path) -> None:
    books = corpus()
    for source in books:
        paired(source, tmp_path).check_bytes()
    assert len(books) >= 100


@needs_office
def test_an_office_shows_books_made_elsewhere_the_same_but_for_the_results(tmp_path: Path) -> None:
    books = corpus() if os.environ.get("LOWPOINT_EVERY_BOOK") else corpus()[::EVERY]
    check_in_office([paired(source, tmp_path) for source in books], tmp_path)
