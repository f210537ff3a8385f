"""What a hostile file may hold: entities, names that lead away, links to follow, patterns that take for ever.

Nothing of it is expanded, unpacked, opened or called; a listening socket shows that no connection is made. Expansion
of entities and the zip tricks are common knowledge (OWASP's XML and upload guidance, from memory).
"""

from __future__ import annotations

import contextlib
import csv
import io
import socket
import threading
import time
import zipfile
from collections.abc import Iterator
from pathlib import Path

import openpyxl
import pytest

from book.lists import recalculated
from book.makers import MAIN, PACKAGE, REL, XLSX, book, pack, parts, relation_list, sheet_xml
from hostile.running import unstuck
from lowpoint.book.package import Package
from lowpoint.book.recalc import recalculate
from lowpoint.errors import BookError
from lowpoint.faces.cli import main
from lowpoint.survey.reading import read_list
from survey_lists import GOOD, HEADINGS, write_csv, write_ods, write_xlsx

SHEET_1 = "xl/worksheets/sheet1.xml"
LAUGHS = '<!DOCTYPE a [<!ENTITY a "ha"><!ENTITY b "&a;&a;"><!ENTITY x SYSTEM "file:///etc/passwd">]>'
FRAME_PARTS = [SHEET_1, "xl/workbook.xml", "xl/_rels/workbook.xml.rels", "[Content_Types].xml", "_rels/.rels",
               "xl/styles.xml", "xl/sharedStrings.xml", "xl/comments1.xml", "xl/drawings/vmlDrawing1.vml",
               "docProps/core.xml", "customXml/item1.xml", "xl/theme/theme1.xml"]  # fmt: skip


@pytest.mark.parametrize("part", FRAME_PARTS)
@pytest.mark.parametrize("read", [recalculate, read_list])
def test_no_part_may_declare_entities(tmp_path: Path, part: str, read: object) -> None:
    content = parts().get(part, b"<a/>").replace(b'<?xml version="1.0"?>', b"")
    path = book(tmp_path, **{part: LAUGHS.encode() + content})
    with pytest.raises(BookError, match="declares a document type"):
        read(path)  # type: ignore[operator]
    assert [p.name for p in tmp_path.iterdir()] == ["list.xlsx"]


@pytest.mark.parametrize("name", ["worksheets/sheet1.dat", "worksheets/sheet1.svg", "worksheets/sheet1"])
def test_a_sheet_under_another_ending_is_no_way_round(tmp_path: Path, name: str) -> None:
    members = parts()
    sheet = members.pop(SHEET_1).replace(b'<?xml version="1.0"?>', LAUGHS.encode())
    members["xl/_rels/workbook.xml.rels"] = relation_list(("rId1", "worksheet", name))
    members["[Content_Types].xml"] = members["[Content_Types].xml"].replace(b"worksheets/sheet1.xml", name.encode())
    path = pack(tmp_path / "list.xlsx", {**members, f"xl/{name}": sheet})
    for read in (recalculate, read_list):
        with pytest.raises(BookError, match=r"declares a document type|not \.xml"):
            read(path)


def test_a_picture_may_declare_what_it_likes(tmp_path: Path) -> None:
    """Drawings as SVG often carry a document type, and nobody here reads them."""
    path = book(tmp_path, **{"xl/media/image1.svg": LAUGHS.encode() + b"<svg/>"})
    assert Package.open(path).sheets[0].title == "Intake"


@pytest.mark.parametrize("place", ["content.xml"])
def test_an_open_document_may_not_declare_entities(tmp_path: Path, place: str) -> None:
    path = write_ods(tmp_path / "list.ods", HEADINGS, [GOOD])
    with zipfile.ZipFile(path) as old:
        members = {name: old.read(name) for name in old.namelist()}
    head, sign, rest = members[place].partition(b"<office:document-content")
    with zipfile.ZipFile(path, "w") as new:
        for name, content in members.items():
            new.writestr(name, LAUGHS.encode() + sign + rest if name == place else content)
    assert sign
    assert head is not None
    with pytest.raises(BookError, match="declares a document type"):
        read_list(path)


AWAY = ["../../away.xlsx", "/away.xlsx", "C:\\away.xlsx", "..\\away.xlsx", "\\\\server\\share\\away.xlsx"]


@pytest.mark.parametrize("name", AWAY)
def test_a_sheet_named_like_a_way_out_writes_nowhere_else(tmp_path: Path, name: str) -> None:
    """Names inside a book, a sheet's or a part's, never make the name of a file."""
    inner = tmp_path / "deep" / "deeper"
    inner.mkdir(parents=True)
    title = name.replace("\\", "_").replace("/", "_").replace(":", "_")[:31]
    frame = parts()["xl/workbook.xml"].replace(b"Intake", title.encode())
    path = book(inner, **{"xl/workbook.xml": frame})
    recalculate(path, inner / "out.xlsx")
    assert sorted(p.name for p in tmp_path.rglob("*") if p.is_file()) == ["list.xlsx", "out.xlsx"]
    hostile = book(inner, "odd.xlsx", **{name: b"x"})
    with pytest.raises(BookError, match="points outside the workbook"):
        recalculate(hostile, inner / "more.xlsx")
    assert sorted(p.name for p in tmp_path.rglob("*") if p.is_file()) == ["list.xlsx", "odd.xlsx", "out.xlsx"]


@pytest.mark.parametrize("tag", ["../../../away", "/etc/cron.d/away", "con", "a\0b", "x" * 400])
def test_a_tag_never_names_a_file(tmp_path: Path, tag: str) -> None:
    outs = tmp_path / "outs"
    outs.mkdir()
    row = ["x" + tag, *GOOD[1:]]
    with (tmp_path / "list.csv").open("w", newline="") as sink:
        csv.writer(sink).writerows([HEADINGS, [value.replace("\0", "") if isinstance(value, str) else value
                                               for value in row]])  # fmt: skip
    words = ["survey", str(tmp_path / "list.csv"), "--draws", "0", "--no-remedies"]
    assert main([*words, "--html", str(outs / "page.html")]) in (0, 1)
    assert [p.name for p in tmp_path.rglob("*") if p.is_file() and p.suffix != ".csv"] == ["page.html"]


# --- nothing is called ------------------------------------------------------------------------------------------


@contextlib.contextmanager
def _listening() -> Iterator[tuple[int, list[object]]]:
    """A port of this machine, and whoever called it."""
    heard: list[object] = []
    with socket.create_server(("127.0.0.1", 0)) as server:
        server.settimeout(0.05)
        done = threading.Event()

        def listen() -> None:
            while not done.is_set():
                with contextlib.suppress(TimeoutError):
                    caller, address = server.accept()
                    heard.append(address)
                    caller.close()

        thread = threading.Thread(target=listen)
        thread.start()
        try:
            yield server.getsockname()[1], heard
        finally:
            done.set()
            thread.join()


def _calling(folder: Path, port: int) -> Path:
    """A book that would call home by every way that programs know."""
    home = f"http://127.0.0.1:{port}/x"
    formulas = [
        f'_xlfn.WEBSERVICE("{home}")', f'HYPERLINK("{home}","x")', f'_xlfn.IMAGE("{home}")', f"'{home}[b.xlsx]S'!A1",
        "[1]Sheet1!A1", f"cmd|'/c curl {home}'!A1", f'RTD("x.y","127.0.0.1","{home}")', 'CALL("urlmon","x","JJ",1)',
        f'_xlfn.FILTERXML(_xlfn.WEBSERVICE("{home}"),"//a")', 'REGISTER.ID("kernel32","x")', f'SQL.REQUEST("{home}")',
        "LP_SIGMA(10,4,[1]Sheet1!A1)", "LP_SIGMA(10,4,0.03)",
    ]  # fmt: skip
    cells = "".join(
        f'<row r="{n}"><c r="A{n}"><f>{text.replace("&", "&amp;")}</f><v>7</v></c></row>'
        for n, text in enumerate(formulas, 1)
    )
    sheet = sheet_xml(cells).replace(b"<sheetData>", b'<sheetPr codeName="x"/><sheetData>')
    frame = '<externalReferences><externalReference r:id="rId2"/></externalReferences>'
    members = parts(f"{XLSX}.sheet.main+xml", frame)
    members[SHEET_1] = sheet
    members["xl/_rels/workbook.xml.rels"] = relation_list(
        ("rId1", "worksheet", "worksheets/sheet1.xml"),
        ("rId2", "externalLink", "externalLinks/externalLink1.xml"),
    )
    link = f'<externalLink xmlns="{MAIN}" xmlns:r="{REL}"><externalBook r:id="rId1"/></externalLink>'
    members["xl/externalLinks/externalLink1.xml"] = link.encode()
    members["xl/externalLinks/_rels/externalLink1.xml.rels"] = (
        f'<Relationships xmlns="{PACKAGE}/relationships"><Relationship Id="rId1" Type="{REL}/externalLinkPath" '
        f'Target="{home}" TargetMode="External"/></Relationships>'
    ).encode()
    connection = f'<connections xmlns="{MAIN}"><connection id="1" url="{home}"/></connections>'
    members["xl/connections.xml"] = connection.encode()
    members["xl/vbaProject.bin"] = b"\xd0\xcf\x11\xe0 Auto_Open"
    return pack(folder / "list.xlsx", members)


def test_no_formula_link_or_macro_is_ever_followed(tmp_path: Path) -> None:
    with _listening() as (port, heard):
        done = recalculated(_calling(tmp_path, port), tmp_path / "out.xlsx")
        read_list(tmp_path / "list.xlsx")
        main(["survey", str(tmp_path / "list.xlsx"), "--show"])
        time.sleep(0.2)
    assert heard == []
    assert done["Intake!A13"] == pytest.approx(1.6617, abs=1e-4)  # (10 - 0.03)/(10 - 4)
    kept = {place for place in done.values if done.values[place] == 7.0}
    assert {f"Intake!A{n}" for n in (1, 3, 4, 5, 6, 7, 8, 9, 10, 11)} <= kept


def test_the_listening_would_have_heard() -> None:
    with _listening() as (port, heard):
        socket.create_connection(("127.0.0.1", port), 5).close()
        for _ in range(100):
            if heard:
                break
            time.sleep(0.02)
    assert len(heard) == 1


# --- text that starts like a formula ----------------------------------------------------------------------------

INERT = ["=1+1", '=HYPERLINK("http://127.0.0.1/")', "+1+1", "-2+3", "@SUM(1)", "\t=1+1", "=cmd|' /C x'!A0"]


@pytest.mark.parametrize("text", INERT)
def test_text_that_starts_like_a_formula_is_written_as_text(tmp_path: Path, text: str) -> None:
    """In the workbook of results no cell with it is a formula; on the page it is no markup."""
    path = write_csv(tmp_path / "list.csv", [*HEADINGS, "Service"], [[*GOOD, text], [text, *GOOD[1:], "x"]])
    out, page = tmp_path / "out.xlsx", tmp_path / "page.html"
    words = ["survey", str(path), "-o", str(out), "--html", str(page), "--draws", "0", "--no-remedies"]
    assert main(words) in (0, 1)
    found = [cell for sheet in openpyxl.load_workbook(out).worksheets for row in sheet.iter_rows() for cell in row
             if isinstance(cell.value, str) and text.strip() in cell.value]  # fmt: skip
    assert found
    assert not [cell.coordinate for cell in found if cell.data_type == "f"]


def test_markup_in_a_cell_is_text_on_the_page(tmp_path: Path) -> None:
    mark = "<script>alert(1)</script><img src=x onerror=y>"
    path = write_csv(tmp_path / "list.csv", [*HEADINGS, "Service"], [[mark, *GOOD[1:], mark + "</script>"]])
    page = tmp_path / "page.html"
    assert main(["survey", str(path), "--html", str(page), "--draws", "0", "--no-remedies"]) in (0, 1)
    text = page.read_text("utf-8")
    assert "<script>alert(1)" not in text
    assert "<img src=x" not in text


# --- patterns that could take for ever --------------------------------------------------------------------------

LONG = 60_000
ATTRIBUTES = 'x="' + " r='A1'" * LONG + '"'
SLOW = {
    "attributes in an attribute": f'<row r="1"><c {ATTRIBUTES}><v>1</v></c><c r="B1" {ATTRIBUTES}><f>1</f></c></row>',
    "tags in a comment": "<!--" + "<c <row <f <v <mergeCell " * LONG + "-->",
    "tags in an instruction": "<?x " + "<c <row <f <v " * LONG + "?>",
    "tags in text": "<!-- x --><row><c t='inlineStr'><is><t>" + "&lt;c &lt;f" * LONG + "</t></is></c></row>",
    "comments": "<!--x-->" * LONG,
    "blanks": '<row r="1"><c r="A1"' + " " * LONG + "><f>1</f>" + "\n" * LONG + "<v>1</v></c></row>",
    "empty cells": '<row r="1">' + "<c/>" * LONG + "</row>",
    "quotes": '<row r="1"><c r="A1" x="' + "'" * LONG + '"><f>"' + '""' * 9000 + '"</f></c></row>',
    "parentheses": '<row r="1"><c r="A1"><f>' + "(" * 8000 + "</f></c></row>",
    "signs": '<row r="1"><c r="A1"><f>' + "-" * 8000 + "1</f></c></row>",
    "brackets": '<row r="1"><c r="A1"><f>' + "T[" * 4000 + "</f></c></row>",
    "apostrophes": '<row r="1"><c r="A1"><f>' + "'a" * 4000 + "!A1</f></c></row>",
    "names": '<row r="1"><c r="A1"><f>' + "a.b." * 4000 + ":!A1</f></c></row>",
}


@pytest.mark.parametrize("name", SLOW)
def test_no_pattern_takes_for_ever(tmp_path: Path, name: str) -> None:
    """Were one quadratic, these would take minutes to hours; they take less than a second each."""
    path = book(tmp_path, **{SHEET_1: sheet_xml(SLOW[name])})
    before = path.read_bytes()
    for read in (lambda: recalculate(path, tmp_path / "out.xlsx"), lambda: read_list(path)):
        with contextlib.suppress(BookError), unstuck(60):
            read()
    assert path.read_bytes() == before


def test_nested_groups_of_an_open_document(tmp_path: Path) -> None:
    space = "urn:oasis:names:tc:opendocument:xmlns"
    deep = "<t:table-row-group>" * 3000 + "</t:table-row-group>" * 3000
    big = '<t:table-row><t:table-cell t:number-columns-repeated="' + "9" * 5000 + '"/></t:table-row>'
    content = (
        f'<o:document-content xmlns:o="{space}:office:1.0" xmlns:t="{space}:table:1.0"><o:body><o:spreadsheet>'
        f'<t:table t:name="List">{deep}{big}</t:table></o:spreadsheet></o:body></o:document-content>'
    )
    sink = io.BytesIO()
    with zipfile.ZipFile(sink, "w") as package:
        package.writestr("content.xml", content)
    path = tmp_path / "list.ods"
    path.write_bytes(sink.getvalue())
    assert read_list(path)[0].count == 0


def test_names_that_unfold_without_end(tmp_path: Path) -> None:
    """Each name is twice the one before it: thirty of them would be a billion terms."""
    names = "".join(f'<definedName name="twice.{n}">twice.{n - 1}+twice.{n - 1}</definedName>' for n in range(1, 31))
    frame = f'<definedNames><definedName name="twice.0">Intake!$A$1</definedName>{names}</definedNames>'
    row = '<row r="1"><c r="A1"><v>2</v></c><c r="B1"><f>twice.30</f><v>5</v></c>'
    row += '<c r="C1"><f>LP_FF(twice.1,220)</f></c></row>'
    done = recalculated(pack(tmp_path / "list.xlsx", {**parts(frame=frame), SHEET_1: sheet_xml(row)}))
    assert done["Intake!B1"] == 5.0
    assert "Intake!B1" in done.kept
    assert (
        done["Intake!C1"]
        == recalculated(
            book(tmp_path, "plain.xlsx", **{SHEET_1: sheet_xml('<row r="1"><c r="C1"><f>LP_FF(4,220)</f></c></row>')})
        )["Intake!C1"]
    )


def test_written_lists_are_read_again(tmp_path: Path) -> None:
    """The tests above refuse much: an ordinary list must still come through all three readers alike."""
    made = [write_xlsx(tmp_path / "a.xlsx", HEADINGS, [GOOD]), write_csv(tmp_path / "a.csv", HEADINGS, [GOOD]),
            write_ods(tmp_path / "a.ods", HEADINGS, [GOOD])]  # fmt: skip
    assert [read_list(path)[0].p1.tolist() for path in made] == [[5.8e5]] * 3
