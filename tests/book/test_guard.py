"""The door: every kind of file that must not come in is met by one plain sentence, and nothing is harmed by trying.

Signatures of foreign files: PDF ISO 32000-1; OLE [MS-CFB]; encrypted OOXML [MS-OFFCRYPTO]; zip fields PKWARE APPNOTE
6.3 (all from memory); the rest common practice.
"""

from __future__ import annotations

import os
import struct
import zipfile
import zlib
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from book.makers import XLSX, book, compound, corpus, pack, parts, patched, put, relation_list, sheet_xml
from lowpoint.book import guard
from lowpoint.book.guard import Limits, check
from lowpoint.book.package import Package
from lowpoint.errors import BookError

SHEET = "xl/worksheets/sheet1.xml"


def refusal(path: Path, limits: Limits | None = None) -> str:
    """The sentence a file is refused with; it names the file, ends properly and the file is as before."""
    before = path.read_bytes() if path.is_file() else None
    with pytest.raises(BookError) as caught:
        check(path, limits or Limits())
    assert caught.value.exit_code == 2
    assert path.name in str(caught.value)
    assert str(caught.value).endswith(".")
    assert (path.read_bytes() if path.is_file() else None) == before
    return str(caught.value)


def test_sound_books_come_in(tmp_path: Path) -> None:
    check(book(tmp_path))
    for name, method in (("stored.xlsx", zipfile.ZIP_STORED), ("packed.xlsm", zipfile.ZIP_DEFLATED)):
        assert Package.open(pack(tmp_path / name, parts(), method)).sheets[0].title == "Intake"


def test_all_books_made_elsewhere_come_in() -> None:
    for path in corpus():
        check(path)


def test_missing_folder_and_special_files(tmp_path: Path) -> None:
    assert "must be an existing file, got nothing there" in refusal(tmp_path / "gone.xlsx")
    assert "got a folder" in refusal(tmp_path)
    if hasattr(os, "mkfifo"):
        os.mkfifo(tmp_path / "pipe.xlsx")
        assert "not a regular file" in refusal(tmp_path / "pipe.xlsx")


def test_a_name_no_system_holds() -> None:
    with pytest.raises(BookError, match="cannot be read"):
        check("pump\0list.xlsx")


def test_no_permission(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = book(tmp_path)

    def closed(*_: object, **__: object) -> object:
        raise PermissionError(13, "Permission denied")

    # Simulated, because a test run by the superuser may read everything.
    monkeypatch.setattr("builtins.open", closed)
    with pytest.raises(BookError, match="this user has no permission"):
        check(path)


@contextmanager
def common_user() -> Iterator[None]:
    """The superuser may read everything: for a while be nobody."""
    was = os.geteuid()
    if was == 0:
        os.seteuid(65534)
    try:
        yield
    finally:
        os.seteuid(was)


@pytest.mark.skipif(os.name == "nt", reason="permissions are another thing on Windows")
def test_no_permission_for_true(tmp_path: Path) -> None:
    path = book(tmp_path)
    path.chmod(0)
    with common_user(), pytest.raises(BookError, match="this user has no permission"):
        check(path)


FOREIGN = [
    (b"", "an empty file"),
    (b"%PDF-1.7\n%\xe2\xe3\xcf\xd3", "a PDF document"),
    (compound("Root Entry", "Workbook"), "an old .xls workbook"),
    (compound("Root Entry", "Book"), "an old .xls workbook"),
    (compound("Root Entry", "WordDocument"), "an old binary document"),
    (b"\x09\x08\x10\x00\x00\x06\x05\x00", "an old .xls workbook"),
    (b"<!DOCTYPE html>\n<html><table>", "an HTML page"),
    (b"\xef\xbb\xbf<html xmlns:x='urn'>", "an HTML page"),
    (b"<?xml version='1.0'?><?mso-application progid='Excel.Sheet'?>", "an XML sheet of 2003"),
    (b"<?xml version='1.0'?><a/>", "an XML file"),
    (b"tag;p1;p2\nFV-101;9.5;3\n", "plain text, such as a CSV list"),
    ("Ventil;Öffnung\n".encode("cp1252"), "plain text, such as a CSV list"),
    ("\ufefftag\tp1\n".encode("utf-16-le"), "plain text, such as a CSV list"),
    (b"\x89PNG\r\n\x1a\n\0\0", "a PNG picture"),
    (b"\xff\xd8\xff\xe0", "a JPEG picture"),
    (b"{\\rtf1}", "an RTF document"),
    (b"\x1f\x8b\x08\0", "a gzip archive"),
    (b"\x00\x01\x02\x03", "a file of an unknown kind"),
]


@pytest.mark.parametrize(("content", "kind"), FOREIGN, ids=[kind + str(at) for at, (_, kind) in enumerate(FOREIGN)])
def test_foreign_files_are_named(tmp_path: Path, content: bytes, kind: str) -> None:
    path = tmp_path / "list.xlsx"
    path.write_bytes(content)
    assert f"must be an .xlsx, .xlsm, .xltx or .xltm workbook, got {kind}" in refusal(path)


def test_password(tmp_path: Path) -> None:
    path = tmp_path / "list.xlsx"
    path.write_bytes(compound("Root Entry", "EncryptionInfo", "EncryptedPackage"))
    assert "is protected with a password" in refusal(path)


def test_password_on_a_member(tmp_path: Path) -> None:
    path = patched(book(tmp_path), SHEET, put("<H", 1, local=6, central=8))
    assert "is protected with a password" in refusal(path)


OPEN_DOCUMENT = {"mimetype": b"application/vnd.oasis.opendocument.spreadsheet", "content.xml": b"<a/>"}
BINARY = {**parts("application/vnd.ms-excel.sheet.binary.macroEnabled.main"), "xl/workbook.bin": b"\x83\x01"}
LETTER = {"[Content_Types].xml": b"<Types/>", "word/document.xml": b"<a/>"}
PACKAGES = [
    (OPEN_DOCUMENT, "an OpenDocument spreadsheet (.ods)"),
    ({"mimetype": b"application/vnd.oasis.opendocument.text"}, "application/vnd.oasis.opendocument.text"),
    (BINARY, "an .xlsb workbook"),
    (parts("application/vnd.ms-excel.addin.macroEnabled.main+xml"), "an add-in"),
    (LETTER, "a text document (.docx)"),
    ({"notes.txt": b"pump"}, "a zip archive with no workbook parts in it"),
    ({}, "a zip archive with no workbook parts in it"),
    ({k: v for k, v in parts().items() if k != "[Content_Types].xml"}, "lacks the part [Content_Types].xml"),
    ({k: v for k, v in parts().items() if k != "xl/workbook.xml"}, "lacks the part xl/workbook.xml"),
    ({k: v for k, v in parts().items() if k != "_rels/.rels"}, "lacks the part xl/workbook.xml"),
]


@pytest.mark.parametrize(("members", "kind"), PACKAGES, ids=[kind + str(at) for at, (_, kind) in enumerate(PACKAGES)])
def test_other_packages_are_named(tmp_path: Path, members: dict[str, bytes], kind: str) -> None:
    said = refusal(pack(tmp_path / "list.xlsx", members))
    assert "must be an .xlsx" in said
    assert kind in said


def test_every_truncation_is_noticed(tmp_path: Path) -> None:
    whole = book(tmp_path).read_bytes()
    path = tmp_path / "cut.xlsx"
    for length in range(2, len(whole), 37):
        path.write_bytes(whole[:length])
        assert "is damaged or cut short" in refusal(path)


def test_tail_and_damage_are_noticed(tmp_path: Path) -> None:
    path = book(tmp_path)
    whole = path.read_bytes()
    path.write_bytes(whole + b"\0")
    assert "something stands after its end" in refusal(path)
    assert "something stands after its end" in refusal(pack(path, parts(), comment=b"PK\x05\x06" + bytes(30)))
    path.write_bytes(whole)

    def flip(data: bytearray, local: int, _: int) -> None:
        data[local + 30 + len(SHEET) + 20] ^= 0xFF

    assert "sheet1.xml does not unpack" in refusal(patched(path, SHEET, flip))


def test_a_checksum_is_checked(tmp_path: Path) -> None:
    """A stored part has no other protection: one changed digit would pass for a value."""
    path = pack(tmp_path / "list.xlsx", parts(), zipfile.ZIP_STORED)
    path.write_bytes(path.read_bytes().replace(b"<v>2.5</v>", b"<v>3.5</v>"))
    assert "sheet1.xml does not unpack to what was packed" in refusal(path)


# Bombs. A declared size, honest or not, never makes more be unpacked than the limits allow.


def test_a_bomb_of_one_part(tmp_path: Path) -> None:
    path = book(tmp_path, **{SHEET: bytes(20 << 20)})
    assert "must hold no large part packed more than 250 times" in refusal(path)


def test_limits_are_configurable(tmp_path: Path) -> None:
    path = book(tmp_path)
    sizes = [info.file_size for info in zipfile.ZipFile(path).infolist()]
    limits = Limits(path.stat().st_size, sum(sizes), max(sizes), len(sizes), 250.0, 16 << 20)
    check(path, limits)
    assert "must be a file of at most" in refusal(path, Limits(file_bytes=path.stat().st_size - 1))
    assert "must unpack to at most" in refusal(path, Limits(unpacked_bytes=sum(sizes) - 1))
    assert "must hold no part above" in refusal(path, Limits(part_bytes=max(sizes) - 1))
    assert "must hold at most 4 parts, got 5" in refusal(path, Limits(entries=4))
    # The remedy must be one that the user of a command can follow.
    said = refusal(path, Limits(entries=4))
    assert "Split the workbook, or take out what it does not need, such as pictures and unused sheets." in said
    assert said.endswith("raise the limit: --limit parts=...")
    assert "packed more than 1 times" in refusal(path, Limits(ratio=1.0, ratio_from=10))


def test_a_lying_size_stops_the_reading(tmp_path: Path) -> None:
    def lie(data: bytearray, local: int, central: int) -> None:
        struct.pack_into("<I", data, local + 22, 100)
        struct.pack_into("<I", data, central + 24, 100)

    path = patched(book(tmp_path, **{SHEET: bytes(5 << 20)}), SHEET, lie)
    assert "unpacks to more than the 100 bytes it declares" in refusal(path)


def test_a_part_that_promises_more_than_it_holds(tmp_path: Path) -> None:
    path = patched(book(tmp_path), SHEET, put("<I", 5000, local=22, central=24))
    assert "does not unpack to what was packed" in refusal(path)


def test_overlapping_parts(tmp_path: Path) -> None:
    """The denser bombs let all entries share one stretch of compressed bytes."""
    path = book(tmp_path)
    first = next(info for info in zipfile.ZipFile(path).infolist() if info.filename == "xl/workbook.xml")
    edit = put("<I", first.compress_size + 50, local=18, central=20)
    assert "overlaps another part" in refusal(patched(path, "xl/workbook.xml", edit))


def test_a_hundred_thousand_rows_fit(tmp_path: Path) -> None:
    """The real shape: 100 000 rows of fifteen cells, seven of them long formulas, all alike but for the row number."""
    call = "LP_COEFFICIENT($C{0},$D{0},$E{0},$F{0},$G{0},$H{0},$I{0},$J{0},$K{0},$L{0})"
    letters = "ABCDEFGHIJKLMNO"
    template = "".join(
        f'<c r="{letter}{{0}}" s="3">' + (f"<f>{call}</f>" if at > 7 else "") + "<v>12.3456789012345</v></c>"
        for at, letter in enumerate(letters)
    )
    block = "".join(f'<row r="{row}">{template.format(row)}</row>' for row in range(1, 2001)).encode()
    engine = zlib.compressobj(6, zlib.DEFLATED, -15)
    packed = len(engine.compress(block) + engine.flush())
    size, limits = 50 * len(block), Limits()
    assert size < limits.part_bytes
    assert 50 * packed < limits.file_bytes
    assert len(block) / packed < limits.ratio / 2


# Names and kinds of members.


@pytest.mark.parametrize("name", ["../evil.xml", "xl/../../evil.xml", "/etc/cron.d/x", "xl\\evil.xml", "C:evil", "./a"])
def test_names_that_lead_outside(tmp_path: Path, name: str) -> None:
    said = refusal(book(tmp_path, **{name: b"x"}))
    assert "points outside the workbook" in said


@pytest.mark.parametrize("second", [SHEET, SHEET.title()])
def test_names_given_twice(tmp_path: Path, second: str) -> None:
    def rename(data: bytearray, local: int, central: int) -> None:
        for start in (local + 30, central + 46):
            data[start : start + len(SHEET)] = second.encode()

    path = book(tmp_path, **{"xl/worksheets/sheet2.xml": sheet_xml("")})
    assert "is in it twice" in refusal(patched(path, "xl/worksheets/sheet2.xml", rename))


def test_links_are_not_members(tmp_path: Path) -> None:
    path = patched(
        book(tmp_path, **{"xl/media/a.png": b"/etc/passwd"}), "xl/media/a.png", put("<I", 0xA1FF << 16, central=38)
    )
    assert "is a link or device" in refusal(path)


def test_other_compression(tmp_path: Path) -> None:
    path = pack(tmp_path / "list.xlsx", parts(), zipfile.ZIP_BZIP2)
    assert "packs its parts in a way that workbooks may not use (method 12)" in refusal(path)


DISAGREEMENTS = {
    "name": put("<B", ord("y"), local=30),
    "method": put("<H", 0, local=8),
    "size": put("<I", 7, local=22),
    "packed size": put("<I", 7, local=18),
    "checksum": put("<I", 7, local=14),
    "encryption": put("<H", 1, local=6),
    "place": put("<I", 0, central=42),
}


@pytest.mark.parametrize("what", DISAGREEMENTS)
def test_two_descriptions_of_one_member(tmp_path: Path, what: str) -> None:
    said = refusal(patched(book(tmp_path), "xl/workbook.xml", DISAGREEMENTS[what]))
    assert "is damaged" in said
    assert "two different ways" in said or "overlaps" in said


def test_a_second_name_in_the_extra_field(tmp_path: Path) -> None:
    path = tmp_path / "list.xlsx"
    with zipfile.ZipFile(path, "w") as archive:
        for name, content in parts().items():
            info = zipfile.ZipInfo(name)
            info.extra = struct.pack("<2HBI", 0x7075, 5 + 8, 1, zlib.crc32(name.encode())) + b"evil.xml"
            archive.writestr(info, content)
    assert "two different names" in refusal(path)


# XML that an XML reader should not see.

BILLION = b'<?xml version="1.0"?><!-- a --> <!DOCTYPE a [<!ENTITY b "bb">]><worksheet/>'
HIDDEN = [
    BILLION,
    BILLION.decode().encode("utf-16"),
    BILLION.decode().replace("?>", ' encoding="UTF-16BE"?>', 1).encode("utf-16-be"),
    b"\xef\xbb\xbf" + BILLION,
    b"<!--" + b"x" * 30_000 + b"-->" + BILLION,
]


@pytest.mark.parametrize("content", HIDDEN, ids=["plain", "utf-16", "utf-16-be", "marked", "late"])
@pytest.mark.parametrize("part", [SHEET, "xl/workbook.xml", "_rels/.rels", "[Content_Types].xml", "xl/drawings/a.vml"])
def test_document_types_are_refused(tmp_path: Path, part: str, content: bytes) -> None:
    said = refusal(book(tmp_path, **{part: content}))
    assert "declares a document type" in said or "lacks the part" in said


def test_odd_encodings_and_endless_headers(tmp_path: Path) -> None:
    odd = b'<?xml version="1.0" encoding="UTF-7"?><worksheet/>'
    assert "encoding that workbooks may not use" in refusal(book(tmp_path, **{SHEET: odd}))
    assert "encoding that workbooks may not use" in refusal(book(tmp_path, **{SHEET: "<a/>".encode("utf-32")}))
    assert "endless header" in refusal(book(tmp_path, **{SHEET: b"<!--" + b"x" * 70_000 + b"--><a/>"}))


def test_a_document_type_in_text_is_only_text(tmp_path: Path) -> None:
    row = '<row r="1"><c r="A1" t="inlineStr"><is><t>&lt;!DOCTYPE a&gt; <![CDATA[<!DOCTYPE a>]]></t></is></c></row>'
    check(book(tmp_path, **{SHEET: sheet_xml(row)}))


def test_broken_frames(tmp_path: Path) -> None:
    cut = parts()["xl/workbook.xml"][:-5]
    with pytest.raises(BookError, match=r"xl/workbook\.xml is not well-formed XML"):
        Package.open(book(tmp_path, **{"xl/workbook.xml": cut}))
    with pytest.raises(BookError, match="the part that holds sheet 'Intake' is missing"):
        Package.open(book(tmp_path, **{"xl/_rels/workbook.xml.rels": relation_list()}))
    with pytest.raises(BookError, match="it has no sheets"):
        Package.open(book(tmp_path, **{"xl/workbook.xml": b"<workbook/>"}))


def test_the_main_part_may_have_another_name(tmp_path: Path) -> None:
    """The package relation names it; xl/workbook.xml is only the custom. Source: ISO/IEC 29500-1 (from memory)."""
    members = {name.replace("workbook.xml", "book2.xml"): content for name, content in parts().items()}
    members["[Content_Types].xml"] = members["[Content_Types].xml"].replace(b"workbook.xml", b"book2.xml")
    members["_rels/.rels"] = relation_list(("rId9", "officeDocument", "/xl/book2.xml"))
    package = Package.open(pack(tmp_path / "list.xlsx", members))
    assert (package.main, package.content_type(package.main)) == ("xl/book2.xml", f"{XLSX}.sheet.main+xml")


def survives(path: Path, out: Path) -> None:
    """Opened, read and rewritten, or refused by a sentence; the input as before and nothing half-written."""
    before, said = path.read_bytes(), ""
    try:
        package = Package.open(path)
        read = {name: package.read(name) for name in package.names}
        for sheet in package.sheets:
            package.tables(sheet)
        assert package.defined_names is not None
        package.write(out, {package.sheets[0].path: b"<a/>"})
    except BookError as refused:
        said = str(refused)
    assert out.exists() != said.endswith(".")
    if not said:
        again = {name: zipfile.ZipFile(out).read(name) for name in package.names}
        assert again == {**read, package.sheets[0].path: b"<a/>"}
    assert path.read_bytes() == before
    assert not list(path.parent.glob(".lowpoint*"))


MUTATIONS = st.lists(st.tuples(st.integers(0, 10**6), st.integers(0, 255)), min_size=1, max_size=6)


@settings(max_examples=120, deadline=None)
@given(edits=MUTATIONS, cut=st.integers(2, 10**6) | st.none(), doubled=st.booleans())
def test_mutated_files_end_in_a_sentence(
    tmp_path_factory: pytest.TempPathFactory, edits: list[tuple[int, int]], cut: int | None, doubled: bool
) -> None:
    path = book(tmp_path_factory.mktemp("mutated"))
    data = bytearray(path.read_bytes())
    for place, value in edits:
        data[place % len(data)] = value
    path.write_bytes(bytes(data if cut is None else data[: cut % len(data)]) * (2 if doubled else 1))
    survives(path, path.with_name("out.xlsx"))


@settings(max_examples=120, deadline=None)
@given(part=st.sampled_from(sorted(parts())), edits=MUTATIONS)
def test_mutated_parts_end_in_a_sentence(
    tmp_path_factory: pytest.TempPathFactory, part: str, edits: list[tuple[int, int]]
) -> None:
    content = bytearray(parts()[part])
    for place, value in edits:
        content[place % len(content)] = value
    path = book(tmp_path_factory.mktemp("mutated"), **{part: bytes(content)})
    survives(path, path.with_name("out.xlsx"))


@settings(max_examples=60, deadline=None)
@given(st.binary(max_size=200))
def test_any_bytes_are_named_as_something(data: bytes) -> None:
    assert guard.looks_like(data)
