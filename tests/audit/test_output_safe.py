"""An audit's workbook in a hostile world: texts that look like formulas or mark-up, odd names, odd parts."""

from __future__ import annotations

import io
import re
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from audit.outputs import SIGMA, members, sheet, small, small_csv
from lowpoint.audit.output import audit_bytes
from lowpoint.audit.output.comments import comments, more_boxes, more_comments
from lowpoint.audit.output.marks import Edits, UnfitError, marks
from lowpoint.audit.output.noting import LONGEST, notes_of
from lowpoint.book.parts import parse

HOSTILE = ("=1+1", "@SUM(A1:A9)", "+cmd|' /C calc'!A0", '=HYPERLINK("http://example.com")', "<b>&amp</b>", "]]>")
"""Texts that a program might take for a formula, or for mark-up."""


def book_of(path: Path) -> Any:
    return openpyxl.load_workbook(io.BytesIO(audit_bytes(sheet(path))[0]))


@pytest.mark.parametrize("text", HOSTILE)
def test_no_text_becomes_a_formula(tmp_path: Path, text: str) -> None:
    path = small_csv(tmp_path, sigma="3.25", extra=f"Service;{text};\n{text};17.3;\n")
    book = book_of(path)
    cells = [cell for s in book.worksheets for row in s.iter_rows() for cell in row if cell.value is not None]
    assert not [cell.coordinate for cell in cells if cell.data_type == "f"]
    assert [cell for cell in cells if cell.value == text]


def test_formula_like_texts_of_a_workbook_stay_texts_in_our_sheets(tmp_path: Path) -> None:
    def more(book: Any) -> None:
        book["Data"]["B1"].value = "=1+1"
        book["Data"]["B1"].data_type = "s"

    book = book_of(small(tmp_path, sigma=3.25, more=more))
    for title in book.sheetnames[1:]:
        assert not [c.coordinate for row in book[title].iter_rows() for c in row if c.data_type == "f"]
    assert any(c.value == "=1+1" and c.quotePrefix for row in book["Read"].iter_rows() for c in row)


def test_our_parts_hold_no_link_to_the_outside(tmp_path: Path) -> None:
    path = small(tmp_path, sigma=3.25)
    before, after = members(path), members(audit_bytes(sheet(path))[0])
    added = {name: part for name, part in after.items() if name not in before}
    assert added
    for name, part in added.items():
        assert b'TargetMode="External"' not in part, name
        assert b"<f>" not in part, name


@settings(max_examples=40)
@given(st.text(max_size=60), st.text(max_size=60))
def test_any_note_is_well_formed(his: str, ours: str) -> None:
    """Whatever the texts are, the parts stay XML, and both texts are in them."""
    part = comments({"B2": his})
    parse(part, "comments")
    merged, had = more_comments(part, {"B2": ours, "C3": ours})
    assert had == {"B2"}
    root = parse(merged, "comments")
    cells = [item.get("ref") for item in root.iter() if item.get("ref")]
    assert cells == ["B2", "C3"]


def test_a_plain_note_becomes_a_run_word_for_word() -> None:
    part = (b'<comments xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><authors><author>V</author>'
            b'</authors><commentList><comment ref="A1" authorId="0"><text><t>his own</t></text></comment>'
            b"</commentList></comments>")  # fmt: skip
    merged, had = more_comments(part, {"A1": "ours"})
    assert had == {"A1"}
    assert b"<text><r><t>his own</t></r><r>" in merged


def test_a_cell_with_a_thread_is_told() -> None:
    """The text of a thread is kept elsewhere: programs that know threads show no note beside it."""
    part = (
        b'<comments xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main">'
        b"<authors><author>V</author><author>tc={6D5F}</author></authors><commentList>"
        b'<comment ref="A1" authorId="1"><text><t>thread</t></text></comment></commentList></comments>'
    )
    with pytest.raises(UnfitError, match="A1 has a thread of comments"):
        more_comments(part, {"A1": "ours"})
    assert more_comments(part, {"A2": "ours"})[1] == frozenset()


def test_a_drawing_that_is_no_xml_is_added_to_all_the_same() -> None:
    """Programs write such drawings loosely: a line break without its end is no XML."""
    part = (
        b'<xml xmlns:v="urn:schemas-microsoft-com:vml"><v:shape id="_x0000_s1025"><div>a<br>b</div></v:shape></xml>\r\n'
    )
    more = more_boxes(part, {"C7": "ours"})
    assert more.startswith(part[:-8])
    assert more.endswith(b"</xml>\r\n")
    assert b'id="_x0000_s1026"' in more
    assert b'id="_x0000_t202"' in more
    with pytest.raises(UnfitError, match="has no end"):
        more_boxes(b"<xml>", {"C7": "ours"})


@pytest.mark.parametrize(
    ("part", "added"),
    [
        (b"<a><b/></a>", b"<a><b><n/></b></a>"),
        (b"<x:a xmlns:x='u'><x:b k='>'></x:b></x:a>", b"<x:a xmlns:x='u'><x:b k='>'><n/></x:b></x:a>"),
        (b"\xef\xbb\xbf<?xml version='1.0'?><a><!-- <b/> --><b >\xc3\xa9</b ></a>",
         b"\xef\xbb\xbf<?xml version='1.0'?><a><!-- <b/> --><b >\xc3\xa9<n/></b ></a>"),
    ],
)  # fmt: skip
def test_adding_to_an_element_moves_nothing_else(part: bytes, added: bytes) -> None:
    edits = Edits(part)
    home = marks(part, 1).child("b")
    assert home is not None
    edits.append(home, "<n/>")
    assert edits.done() == added


@pytest.mark.parametrize(("part", "why"), [("<a/>".encode("utf-16"), "UTF-16"), (b"<a><b></a>", "well-formed")])
def test_parts_that_are_left_alone(part: bytes, why: str) -> None:
    with pytest.raises(UnfitError, match=why):
        marks(part, 1)


def test_long_notes_are_cut_and_the_table_is_not(tmp_path: Path) -> None:
    long = "a word of the vendor " * 200
    audit = sheet(small_csv(tmp_path, sigma="3.25", extra=f"Outlet pressure or drop {long};3.0;\n"))
    assert all(len(text) <= LONGEST for text in notes_of(audit).values())


def test_a_sheet_whose_name_has_an_exclamation_mark(tmp_path: Path) -> None:
    book = book_of(small(tmp_path, sigma=3.25, title="Item! 'A' & B"))
    assert book["Item! 'A' & B"][SIGMA].comment is not None


def test_ids_of_relations_never_clash(tmp_path: Path) -> None:
    """A book that was audited before holds our ids already."""
    path = small(tmp_path, sigma=3.25)
    once = tmp_path / "once.xlsx"
    once.write_bytes(audit_bytes(sheet(path))[0])
    again = sheet(once)
    assert [reading.name for reading in again.document.sheets] == ["Data"]  # its own sheets are no data sheets
    twice = members(audit_bytes(again)[0])
    for name, part in twice.items():
        if name.endswith(".rels"):
            ids = re.findall(rb'\bId="([^"]*)"', part)
            assert len(ids) == len(set(ids)), name
    assert len([name for name in twice if name.startswith("xl/worksheets/sheet")]) == 9
