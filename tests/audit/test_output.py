"""The workbook of an audit: the vendor's parts byte for byte, notes on the right cells, and four sheets behind his."""

from __future__ import annotations

import io
import re
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from openpyxl.worksheet.table import Table

from audit.outputs import SIGMA, content, members, planted, sheet, small
from book.makers import corpus
from lowpoint.audit.output import audit_bytes, write_audit
from lowpoint.audit.output.copying import copied, unfit
from lowpoint.audit.output.marks import UnfitError
from lowpoint.book.package import Package
from lowpoint.errors import BookError, LowpointError

FRAME = {"[Content_Types].xml", "xl/workbook.xml", "xl/_rels/workbook.xml.rels", "xl/styles.xml"}
"""What must change where sheets are added: the lists of types, sheets and relations, and the styles behind the own."""
LEGACY = re.compile(rb"<(?:\w+:)?legacyDrawing [^>]*/>")


def written(path: Path) -> tuple[bytes, Any]:
    data, said = audit_bytes(sheet(path))
    assert said == []
    return data, openpyxl.load_workbook(io.BytesIO(data))


def notes(book: Any, title: str) -> dict[str, str]:
    return {cell.coordinate: cell.comment.text for row in book[title].iter_rows() for cell in row if cell.comment}


# --- what stays -------------------------------------------------------------------------------------------------


def test_a_right_sheet_keeps_every_part_but_the_lists(tmp_path: Path) -> None:
    path = small(tmp_path)
    data, book = written(path)
    before, after = members(path), members(data)
    assert {name for name in before if before[name] != after[name]} == FRAME
    assert not notes(book, "Data")
    assert list(after)[: len(before)] == list(before)  # and their order


def test_a_noted_sheet_changes_by_one_element(tmp_path: Path) -> None:
    path = small(tmp_path, sigma=3.25)
    data, _ = written(path)
    before, after = members(path), members(data)
    part = "xl/worksheets/sheet1.xml"
    assert {name for name in before if before[name] != after[name]} == {*FRAME, part}
    marks = LEGACY.findall(after[part])
    assert len(marks) == 1
    assert after[part].replace(marks[0], b"") == before[part]


def test_styles_only_grow(tmp_path: Path) -> None:
    """The vendor's own styles keep their numbers: each list begins as it did."""
    path = small(tmp_path, sigma=3.25)
    data, _ = written(path)
    for name in (b"fonts", b"fills", b"borders", b"cellXfs"):
        lists = [re.search(rb"<%b\b[^>]*>(.*?)</%b>" % (name, name), members(x)["xl/styles.xml"], re.DOTALL)
                 for x in (path, data)]  # fmt: skip
        old, new = (found[1] if found else b"" for found in lists)
        assert old
        assert new.startswith(old)
        assert len(new) > len(old)


def test_counts_of_styles_are_right(tmp_path: Path) -> None:
    data, _ = written(small(tmp_path, sigma=3.25))
    styles = members(data)["xl/styles.xml"]
    for name, item in ((b"fonts", b"font"), (b"fills", b"fill"), (b"borders", b"border"), (b"cellXfs", b"xf")):
        found = re.search(rb'<%b count="(\d+)"[^>]*>(.*?)</%b>' % (name, name), styles, re.DOTALL)
        assert found
        assert int(found[1]) == len(re.findall(rb"<%b[ />]" % item, found[2]))


def test_values_and_formulas_of_the_vendor_stay(tmp_path: Path) -> None:
    def more(book: Any) -> None:
        other = book.create_sheet("Other")
        other["A1"], other["A2"] = 2.0, "=A1*2"
        other.merge_cells("C1:D2")
        book["Data"].protection.sheet = True

    path = small(tmp_path, sigma=3.25, more=more)
    _, book = written(path)
    before = openpyxl.load_workbook(path)
    for title in before.sheetnames:
        assert content(book, title) == content(before, title)
    assert book["Data"].protection.sheet
    assert str(book["Other"].merged_cells) == "C1:D2"


def test_the_same_bytes_on_every_run(tmp_path: Path) -> None:
    path = small(tmp_path, sigma=3.25)
    assert audit_bytes(sheet(path)) == audit_bytes(sheet(path))


# --- notes ------------------------------------------------------------------------------------------------------


def test_the_note_stands_on_the_cell_and_says_why(tmp_path: Path) -> None:
    _, book = written(small(tmp_path, sigma=3.25))
    found = notes(book, "Data")
    assert list(found) == [SIGMA]
    # By hand: (6.0 - 0.5)/(6.0 - 4.0) = 2.75; 3.25/2.75 = 1.182.
    assert "Lowpoint\nDiffers: sigma" in found[SIGMA]
    assert "3.25 stated, 2.75" in found[SIGMA]
    assert "+18.2 %" in found[SIGMA]
    assert "Tolerance" in found[SIGMA]


def test_a_note_of_the_vendor_stays_and_ours_follows(tmp_path: Path) -> None:
    path = small(tmp_path, sigma=3.25, note="as agreed & <checked>")
    data, book = written(path)
    found = notes(book, "Data")
    assert set(found) == {"A1", SIGMA}
    assert found["A1"] == "kept as it is"
    assert found[SIGMA].startswith("as agreed & <checked>\n\nLowpoint\nDiffers")
    before, after = members(path), members(data)
    changed = {name for name in before if before[name] != after[name]}
    assert changed == {*FRAME, "xl/comments/comment1.xml"}  # his drawing of notes has a box for it already


def test_a_new_note_joins_the_vendors_drawing(tmp_path: Path) -> None:
    def more(book: Any) -> None:
        from openpyxl.comments import Comment

        book["Data"]["A1"].comment = Comment("mine", "The vendor")

    data, book = written(small(tmp_path, sigma=3.25, more=more))
    assert set(notes(book, "Data")) == {"A1", SIGMA}
    after = members(data)
    drawings = [name for name in after if name.endswith(".vml")]
    assert len(drawings) == 1
    ids = re.findall(rb'id="(_x0000_s\d+)"', after[drawings[0]])
    assert len(ids) == len(set(ids)) == 2
    rows = re.findall(rb"<(?:\w+:)?Row>(\d+)</", after[drawings[0]])
    assert sorted(map(int, rows)) == [0, 7]


@pytest.mark.parametrize(("layout", "slip"), [("ledger", "gauge_as_absolute_p1"), ("boxes", "gauge_as_absolute_both")])
def test_every_cell_that_differs_is_noted(tmp_path: Path, layout: str, slip: str) -> None:
    path = planted(tmp_path, layout, slip)
    audit = sheet(path)
    wanted = {claim.cell for claims in audit.claims for claim in claims if claim.verdict in ("differs", "contradicts")}
    assert wanted
    _, book = written(path)
    found = {f"{title}!{cell}" for title in book.sheetnames for cell in notes(book, title)}
    assert wanted <= found


# --- added sheets -----------------------------------------------------------------------------------------------


def test_four_sheets_follow(tmp_path: Path) -> None:
    path = small(tmp_path, sigma=3.25)
    data, book = written(path)
    assert book.sheetnames == ["Data", "Findings", "Questions", "Working", "Read"]
    assert book.active.title == "Data"
    ours = [part for name, part in members(data).items() if name not in members(path)]
    assert not any(b'tabSelected="1"' in part for part in ours)  # two selected sheets would be one group


def test_names_that_are_taken(tmp_path: Path) -> None:
    _, book = written(small(tmp_path, title="Findings", sigma=3.25, more=lambda book: book.create_sheet("READ")))
    assert book.sheetnames == ["Findings", "READ", "Findings (2)", "Questions", "Working", "Read (2)"]


def test_findings_link_to_the_cells(tmp_path: Path) -> None:
    _, book = written(small(tmp_path, sigma=3.25, title="It's mine"))
    rows = list(book["Findings"].iter_rows())
    row = next(row for row in rows if row[0].value == "differs")
    assert [cell.value for cell in row[1:6]] == ["sigma", None, f"It's mine!{SIGMA}", 3.25, pytest.approx(2.75)]
    assert row[3].hyperlink.location == f"'It''s mine'!{SIGMA}"
    assert "3.25 stated" in row[9].value
    assert any("1 claim" in str(cell.value) or "claims" in str(cell.value) for row in rows for cell in row)


def test_questions_are_sentences(tmp_path: Path) -> None:
    _, book = written(small(tmp_path, sigma=3.25))
    texts = [str(row[1].value) for row in book["Questions"].iter_rows(min_row=4) if row[1].value]
    assert any(f"You state for the cavitation index 3.25 (Data!{SIGMA})" in text for text in texts)
    assert all(text.endswith(("?", ".")) for text in texts)


def test_working_shows_inputs_with_their_cells(tmp_path: Path) -> None:
    _, book = written(small(tmp_path, sigma=3.25))
    rows = [[cell.value for cell in row] for row in book["Working"].iter_rows()]
    by_symbol = {row[1]: row for row in reversed(rows) if row[1]}  # the claims at the end bear the same symbols
    assert by_symbol["p1"][8] == 6.0
    assert by_symbol["p1"][10] == "Data!B3: 6 bar a"
    assert by_symbol["sigma"][2] == "(p1 - pv)/dp"
    assert by_symbol["sigma"][5] == "(6 - 0.5)/2"
    assert any(str(row[0]).startswith("definition: Definition") for row in rows)


def test_read_tells_every_value_with_its_confidence(tmp_path: Path) -> None:
    path = small(tmp_path)
    _, book = written(path)
    rows = [[cell.value for cell in row] for row in book["Read"].iter_rows()]
    found = {row[5]: row for row in rows if row[5]}
    for value in sheet(path).document.sheets[0].values:
        assert found[value.cell][0] == value.quantity
        assert found[value.cell][8] == pytest.approx(value.confidence, abs=0.005)


# --- books of other programs ------------------------------------------------------------------------------------


def _ours() -> Any:
    book = openpyxl.Workbook()
    book.active.title = "Findings of ours"
    book.active["B2"] = "text"
    book.active["B2"].font = openpyxl.styles.Font(bold=True)
    book.active["B3"] = 1.25
    book.active["B3"].number_format = "0.0000"
    book.active.sheet_view.tabSelected = False
    return book


def _expected(package: Package, where: str, given: Mapping[str, str]) -> set[str]:
    """Parts that may change: the lists, the styles, the noted sheet, its relations and its notes."""
    sheet_part = package.sheet(where).path
    links = {link.target for link in package.relations(sheet_part) if link.kind in ("comments", "vmlDrawing")}
    folder, _, base = sheet_part.rpartition("/")
    styles = {link.target for link in package.relations(package.main) if link.kind == "styles"}
    main_folder, _, main_base = package.main.rpartition("/")
    return {"[Content_Types].xml", package.main, f"{main_folder}/_rels/{main_base}.rels", sheet_part,
            f"{folder}/_rels/{base}.rels", *links, *styles}  # fmt: skip


def test_books_made_by_another_program() -> None:
    """Charts, tables, notes, controls, protection: nothing but the lists and the noted sheet changes."""
    done = 0
    for path in corpus():
        package = Package.open(path)
        first = next((s.title for s in package.sheets if s.kind == "worksheet"), None)
        if unfit(package) or first is None:
            continue
        given = {"A1": "first note", "C9": "second <note> & more"}
        data = copied(package, _ours(), {first: given})
        before, after = members(path), members(data)
        changed = {name for name in before if before[name] != after[name]}
        assert changed <= _expected(package, first, given), path.name
        book = openpyxl.load_workbook(io.BytesIO(data))
        assert book.sheetnames[-1] == "Findings of ours", path.name
        cell = book["Findings of ours"]["B3"]
        assert (cell.value, cell.number_format) == (1.25, "0.0000"), path.name
        assert book["Findings of ours"]["B2"].font.b, path.name
        found = notes(book, first)
        assert "first note" in found["A1"], path.name
        assert "second <note> & more" in found["C9"], path.name
        again = Package(data, path.name)
        assert [s.title for s in again.sheets][:-1] == [s.title for s in package.sheets], path.name
        done += 1
    assert done > 50


def test_a_book_whose_styles_lack_a_list_is_told(tmp_path: Path) -> None:
    path = small(tmp_path)
    package = Package.open(path)
    styles = re.sub(rb"<borders\b.*?</borders>", b"", members(path)["xl/styles.xml"], flags=re.DOTALL)
    broken = Package(package.packed({"xl/styles.xml": styles}), "broken.xlsx")
    with pytest.raises(UnfitError, match="its styles have no borders"):
        copied(broken, _ours(), {})


# --- writing ----------------------------------------------------------------------------------------------------


def test_a_sheet_that_changed_meanwhile_is_refused(tmp_path: Path) -> None:
    audit = sheet(small(tmp_path))
    small(tmp_path, sigma=9.0)
    with pytest.raises(LowpointError, match="was changed while it was audited"):
        audit_bytes(audit)


def test_a_folder_that_is_not_there(tmp_path: Path) -> None:
    with pytest.raises(BookError, match="folder does not exist"):
        write_audit(sheet(small(tmp_path)), tmp_path / "none" / "out.xlsx")


def test_a_table_behind_the_notes_keeps_its_place(tmp_path: Path) -> None:
    """The mark of a drawing of notes stands in front of tables: the schema's order."""

    def more(book: Any) -> None:
        data = book["Data"]
        data["E1"], data["E2"] = "Head", 1
        data.add_table(Table(displayName="One", ref="E1:E2"))

    data, book = written(small(tmp_path, sigma=3.25, more=more))
    part = members(data)["xl/worksheets/sheet1.xml"]
    assert 0 < part.index(b"<legacyDrawing") < part.index(b"<tableParts")
    assert list(book["Data"].tables) == ["One"]
