"""The output workbook in a hostile world: formula-like text, odd tags, full disks; and the same bytes on every run."""

from __future__ import annotations

import io
import re
import zipfile
from datetime import date, datetime
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from hypothesis import given
from hypothesis import strategies as st

from lowpoint.errors import BookError
from lowpoint.styling.strings import LONGEST, clean
from lowpoint.survey import survey_list
from lowpoint.survey.book import book_bytes, write_book
from lowpoint.survey.output.naming import sheet_names
from survey.books import DAY, bay, listed, opened, sheet_rows, written
from survey_lists import GOOD, HEADINGS, write_csv

HOSTILE = ("=1+1", "@SUM(A1:A9)", "+cmd|' /C calc'!A0", "-x+y", '=HYPERLINK("http://example.com")', "\tTab")
"""Texts that a spreadsheet program would take for formulas when they are typed."""


# --- formula-like text ------------------------------------------------------------------------------------------


def _hostile(folder: Path) -> Any:
    changes = [{"Tag": text, "p2 [bar a]": 1.0} for text in HOSTILE]
    return listed(folder, *changes, {"Case": "=2+2", "Liquid": "water"}, {"Remark": '=WEBSERVICE("http://x")'},
                  headings=(*HEADINGS, "Remark"))  # fmt: skip


def test_no_text_becomes_a_formula(tmp_path: Path) -> None:
    # Typed in, openpyxl itself makes formulas of texts with = before them: a csv holds plain texts.
    rows = [[text, *GOOD[1:6], 1.0, *GOOD[7:]] for text in HOSTILE]
    rows[0][1] = "=2+2"
    survey = survey_list(write_csv(tmp_path / "list.csv", [*HEADINGS, "Remark"], [[*row, "=1+2"] for row in rows]))
    book = opened(survey, tmp_path)
    for sheet in book.worksheets:
        for row in sheet.iter_rows():
            assert not [cell.coordinate for cell in row if cell.data_type == "f"]
    headings, rows = sheet_rows(book["Results"], "Fails")
    tags = [row[0] for row in rows]
    assert tags == [text.strip() for text in HOSTILE]  # blanks at the ends of texts in a csv are no part of them
    first = 6
    for offset, tag in enumerate(tags):
        cell = book["Results"].cell(first + offset, 1)
        assert (cell.value, cell.data_type, bool(cell.quotePrefix)) == (tag, "s", tag[0] in "=@+-")
    assert book["Results"].cell(first, headings.index("Remark") + 1).quotePrefix
    assert len(book.sheetnames) == 3 + len(HOSTILE)


def test_the_parts_hold_no_formula_link_or_macro(tmp_path: Path) -> None:
    rows = [[text, *GOOD[1:6], 1.0, *GOOD[7:]] for text in HOSTILE]
    survey = survey_list(write_csv(tmp_path / "list.csv", HEADINGS, rows))
    with zipfile.ZipFile(written(survey, tmp_path / "out.xlsx")) as package:
        for name in package.namelist():
            part = package.read(name)
            assert b"TargetMode" not in part, name  # only links to the outside have one
            if name.startswith("xl/worksheets/sheet"):
                assert not re.search(rb"<f[ >/]", part), name
        assert not [name for name in package.namelist() if "vba" in name.lower() or "external" in name.lower()]


def test_signs_that_no_file_may_hold_are_spelled_out() -> None:
    # The spelling _xHHHH_ is that of ISO/IEC 29500-1, 22.9.2.19 (ST_Xstring).
    assert clean("a\x00b\x1fc\ufffe") == "a_x0000_b_x001F_c_xFFFE_"
    assert clean("tab\tline\n") == "tab\tline\n"
    assert len(clean("x" * 40_000)) == LONGEST == 32_767  # the most that a cell holds, by the vendors' own limits


def test_odd_values_of_a_list_are_kept(tmp_path: Path) -> None:
    """Dates, logical values, long and multi-line texts, markup, numbers as text."""
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.append([*HEADINGS, "Date", "Status", "Remarks", "Rev", "Drawing"])
    odd = [datetime(2024, 2, 29), True, "two\nlines & <b>", "007", 1.5]
    sheet.append([*GOOD, *odd])
    book.save(tmp_path / "list.xlsx")
    survey = survey_list(tmp_path / "list.xlsx")
    out = opened(survey, tmp_path, pages=0)["Results"]
    headings, _ = sheet_rows(out, "Fails")
    cells = [out.cell(6, headings.index(name) + 1) for name in ("Date", "Status", "Remarks", "Rev", "Drawing")]
    assert [cell.value for cell in cells] == odd
    assert cells[0].is_date


# --- names of sheets --------------------------------------------------------------------------------------------


@given(st.lists(st.text(max_size=50), max_size=12))
def test_every_tag_gives_a_legal_and_unique_name(tags: list[str]) -> None:
    """Legal: 1 to 31 UTF-16 units, none of []:*?/\\, no apostrophe at an end, not History (rules of the vendors)."""
    names = sheet_names(tags, ("Summary", "Results"))
    assert len({name.casefold() for name in names}) == len(tags)
    for name in names:
        assert 1 <= len(name.encode("utf-16-le")) // 2 <= 31
        assert not set(name) & set("[]:*?/\\")
        assert not any(ord(sign) < 32 for sign in name)
        assert name == name.strip("'").strip()
        assert name.casefold() not in ("history", "summary", "results", "example")


def test_names_stay_like_their_tags() -> None:
    assert sheet_names(["21-FCV-110", "A/B", "a/b", "Summary", "'x'", "  "], ("Summary",)) == [
        "21-FCV-110", "A-B", "a-b (2)", "Summary (2)", "x", "item",
    ]  # fmt: skip


# --- bytes and files --------------------------------------------------------------------------------------------


def test_two_runs_give_the_same_file_but_for_the_date() -> None:
    survey = bay()
    first, again = (book_bytes(survey, today=DAY, pages=2) for _ in range(2))
    assert first == again
    other = book_bytes(survey, today=date(2027, 1, 1), pages=2)
    assert other != first
    with zipfile.ZipFile(io.BytesIO(first)) as one, zipfile.ZipFile(io.BytesIO(other)) as two:
        assert one.namelist() == two.namelist()
        differing = [name for name in one.namelist() if one.read(name) != two.read(name)]
        sheet = f"xl/worksheets/sheet{len(openpyxl.load_workbook(io.BytesIO(first)).sheetnames)}.xml"
        assert set(differing) == {"docProps/core.xml", sheet}
        assert {entry.date_time for entry in one.infolist()} == {(2025, 1, 1, 0, 0, 0)}
        assert b"2026-03-14T00:00:00Z" in one.read("docProps/core.xml")
        assert one.read(sheet).replace(b"2026-03-14", b"2027-01-01") == two.read(sheet)


def test_a_save_that_fails_leaves_nothing_behind(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    target = tmp_path / "out.xlsx"
    target.write_bytes(b"the old file")

    def full(handle: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("lowpoint.book.saving.os.fsync", full)
    with pytest.raises(BookError, match="disk is full"):
        write_book(bay(), target, pages=0)
    assert target.read_bytes() == b"the old file"
    assert [path.name for path in tmp_path.iterdir()] == ["out.xlsx"]


def test_a_folder_that_is_not_there(tmp_path: Path) -> None:
    with pytest.raises(BookError, match="folder does not exist"):
        write_book(bay(), tmp_path / "nowhere" / "out.xlsx", pages=0)
    assert not list(tmp_path.iterdir())


def test_the_file_is_written_as_asked(tmp_path: Path) -> None:
    write_book(bay(), tmp_path / "out.xlsx", pages=0, today=DAY)
    assert (tmp_path / "out.xlsx").read_bytes() == book_bytes(bay(), pages=0, today=DAY)
