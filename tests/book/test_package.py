"""The package: what its frame says, and copies in which nothing moves but what was asked for."""

from __future__ import annotations

import errno
import io
import os
import random
import stat
import struct
import zipfile
from collections.abc import Callable
from pathlib import Path

import openpyxl
import pytest

from book.makers import CORPUS, MAIN, book, corpus, corpus_book, headers, pack, parts, relation_list, sheet_xml
from lowpoint.book import repack
from lowpoint.book.package import Package, locked
from lowpoint.errors import BookError

SHEET = "xl/worksheets/sheet1.xml"
OTHER = sheet_xml('<row r="1"><c r="A1"><v>3.5</v></c></row>')


def records(path: Path) -> dict[str, tuple[bytes, bytes]]:
    """Every member's local record (up to the next one) and central record without its offset, as raw bytes."""
    data = path.read_bytes()
    found = list(headers(path))
    with zipfile.ZipFile(path) as archive:
        ends = sorted([local for _, local, _ in found] + [archive.start_dir])
    cut = {}
    for name, local, central in found:
        length = 46 + sum(struct.unpack_from("<3H", data, central + 28))
        record = data[central : central + 42] + data[central + 46 : central + length]
        cut[name] = (data[local : ends[ends.index(local) + 1]], record)
    return cut


# What the frame says


def test_the_frame_of_a_small_book(tmp_path: Path) -> None:
    package = Package.open(book(tmp_path))
    sheet = package.sheets[0]
    assert (sheet.title, sheet.path, sheet.kind, sheet.state, sheet.sheet_id) == (
        "Intake",
        SHEET,
        "worksheet",
        "visible",
        1,
    )
    assert package.names == tuple(parts())
    assert package.read(SHEET) == parts()[SHEET]
    assert SHEET in package
    assert package.sheet("INTAKE") == sheet
    flags = (package.date1904, package.full_calc_on_load, package.iterates, package.strict, package.signed)
    assert not any((*flags, package.has_macros, package.macro_enabled, package.template))
    with pytest.raises(KeyError):
        package.read("xl/none.xml")
    with pytest.raises(KeyError):
        package.sheet("Jetty")


def test_calculation_dates_and_names(tmp_path: Path) -> None:
    frame = (
        '<definedNames><definedName name="rise">Intake!$A$1</definedName>'
        '<definedName name="_xlnm.Print_Area" localSheetId="0" hidden="1">Intake!$A$1:$C$1</definedName></definedNames>'
        '<calcPr calcId="191029" iterate="true" fullCalcOnLoad="1"/>'
    )
    workbook = parts(frame=frame)["xl/workbook.xml"].replace(b"<sheets>", b'<workbookPr date1904="1"/><sheets>')
    package = Package.open(book(tmp_path, **{"xl/workbook.xml": workbook}))
    assert (package.date1904, package.full_calc_on_load, package.iterates) == (True, True, True)
    first, second = package.defined_names
    assert (first.name, first.text, first.sheet, first.hidden) == ("rise", "Intake!$A$1", None, False)
    assert (second.name, second.text, second.sheet, second.hidden) == ("_xlnm.Print_Area", "Intake!$A$1:$C$1", 0, True)


def test_kinds_of_sheets_signature_macros_and_links(tmp_path: Path) -> None:
    frame = '<externalReferences><externalReference r:id="rId8"/></externalReferences>'
    members = parts("application/vnd.ms-excel.template.macroEnabled.main+xml", frame)
    more = "".join(f'<sheet name="S{at}" sheetId="{at}" r:id="rId{at}" state="hidden"/>' for at in (2, 3, 4))
    members["xl/workbook.xml"] = members["xl/workbook.xml"].replace(b"</sheets>", more.encode() + b"</sheets>")
    members["xl/_rels/workbook.xml.rels"] = relation_list(
        ("rId1", "worksheet", "/xl/worksheets/sheet1.xml"),
        ("rId2", "chartsheet", "chartsheets/sheet1.xml"),
        ("rId3", "dialogsheet", "dialogsheets/../dialogsheets/Sheet1.xml"),
        ("rId4", "http://schemas.microsoft.com/office/2006/relationships/xlMacrosheet", "macrosheets/sheet1.xml"),
        ("rId8", "externalLink", "externalLinks/externalLink1.xml"),
    )
    empty = ("xl/chartsheets/sheet1.xml", "xl/dialogsheets/sheet1.xml", "xl/macrosheets/sheet1.xml")
    members |= dict.fromkeys((*empty, "xl/externalLinks/externalLink1.xml", "_xmlsignatures/origin.sigs"), b"<a/>")
    link = relation_list(("rId1", "externalLinkPath", "file:///jetty.xlam"))
    members |= {"xl/externalLinks/_rels/externalLink1.xml.rels": link, "xl/vbaProject.bin": b"x"}
    package = Package.open(pack(tmp_path / "list.xltm", members))
    assert [sheet.kind for sheet in package.sheets] == ["worksheet", "chartsheet", "dialogsheet", "macrosheet"]
    assert [sheet.state for sheet in package.sheets] == ["visible", "hidden", "hidden", "hidden"]
    assert package.sheets[2].path == "xl/dialogsheets/sheet1.xml"
    assert (package.signed, package.has_macros, package.macro_enabled, package.template) == (True, True, True, True)
    (link_found,) = package.external_links
    assert (link_found.index, link_found.target) == (1, "file:///jetty.xlam")


def test_tables(tmp_path: Path) -> None:
    table = (
        f'<table xmlns="{MAIN}" id="1" name="T" displayName="Valves" ref="A1:B4" totalsRowCount="1"><tableColumns>'
        '<tableColumn id="1" name="Inlet_x000a_bar"/><tableColumn id="2" name="Opening, %"/></tableColumns></table>'
    )
    links = relation_list(("rId1", "table", "../tables/table1.xml"))
    path = book(tmp_path, **{"xl/tables/table1.xml": table.encode(), "xl/worksheets/_rels/sheet1.xml.rels": links})
    package = Package.open(path)
    (found,) = package.tables(package.sheets[0])
    assert (found.name, found.ref, found.header_rows, found.totals_rows) == ("Valves", "A1:B4", 1, 1)
    assert found.columns == ("Inlet\nbar", "Opening, %")


def test_the_frame_agrees_with_another_reader() -> None:
    """openpyxl is the other reader."""
    for path in corpus():
        package, other = Package.open(path), openpyxl.load_workbook(path)
        assert [sheet.title for sheet in package.sheets] == other.sheetnames
        states = {sheet.title: sheet.state for sheet in package.sheets if sheet.kind == "worksheet"}
        assert states == {sheet.title: sheet.sheet_state for sheet in other.worksheets}
        assert package.date1904 == (other.epoch.year == 1904)
        tables = {table.name: table.ref for sheet in package.sheets for table in package.tables(sheet)}
        assert tables == {table.displayName: table.ref for sheet in other.worksheets for table in sheet.tables.values()}
        assert package.has_macros == (path.suffix == ".xlsm")
        names = {name.name for name in package.defined_names if not name.name.startswith("_xlnm.")}
        assert names == set(other.defined_names) | {name for sheet in other.worksheets for name in sheet.defined_names}


# Writing


def test_nothing_changed_is_the_same_file(tmp_path: Path) -> None:
    for path in [book(tmp_path), *corpus()]:
        package = Package.open(path)
        assert package.packed({}) == path.read_bytes()
        assert package.packed({name: package.read(name) for name in package.names}) == path.read_bytes()


def test_one_changed_sheet_leaves_the_rest_as_it_was(tmp_path: Path) -> None:
    out = tmp_path / "out.xlsx"
    for path in corpus():
        package = Package.open(path)
        sheet = next(sheet for sheet in package.sheets if sheet.kind == "worksheet")
        changed = package.read(sheet.path) + b"<!-- changed -->"
        package.write(out, {sheet.path: changed})
        before, after = records(path), records(out)
        assert list(after) == list(before)
        assert {name for name in before if after[name] != before[name]} == {sheet.path}
        with zipfile.ZipFile(path) as old, zipfile.ZipFile(out) as new:
            assert new.testzip() is None
            assert new.comment == old.comment
            for info in old.infolist():
                assert new.read(info.filename) == (changed if info.filename == sheet.path else old.read(info.filename))
            one, two = old.getinfo(sheet.path), new.getinfo(sheet.path)
            kept = ("date_time", "create_system", "external_attr", "internal_attr", "extra", "comment")
            assert [getattr(one, name) for name in kept] == [getattr(two, name) for name in kept]
        assert openpyxl.load_workbook(out).sheetnames == [sheet.title for sheet in package.sheets]
    assert os.listdir(tmp_path) == ["out.xlsx"]


def streamed(path: Path) -> Path:
    """A book written to a pipe: sizes stand in descriptors behind the data."""

    class Pipe(io.RawIOBase):
        held = b""

        def writable(self) -> bool:
            return True

        def write(self, data: object) -> int:
            self.held += bytes(data)  # type: ignore[call-overload]
            return len(data)  # type: ignore[arg-type]

    pipe = Pipe()
    with zipfile.ZipFile(pipe, "w", zipfile.ZIP_DEFLATED) as archive:  # type: ignore[arg-type]
        for name, content in parts().items():
            archive.writestr(name, content)
    path.write_bytes(pipe.held)
    return path


def wide(path: Path) -> Path:
    """A book whose members carry zip64 fields though they are small, as some writers make them."""
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in parts().items():
            with archive.open(name, "w", force_zip64=True) as member:
                member.write(content)
    return path


def prefixed(path: Path) -> Path:
    """A book with a gap between two members, as deleting a member in place leaves it."""
    data = bytearray(book(path.parent, "tight.xlsx").read_bytes())
    found = list(headers(path.parent / "tight.xlsx"))
    cut, gap = found[2][1], b"\0" * 17
    for _, local, central in found[2:]:
        struct.pack_into("<I", data, central + 42, local + len(gap))
    end = data.rfind(b"PK\x05\x06")
    struct.pack_into("<I", data, end + 16, struct.unpack_from("<I", data, end + 16)[0] + len(gap))
    path.write_bytes(bytes(data[:cut]) + gap + bytes(data[cut:]))
    return path


@pytest.mark.parametrize("maker", [streamed, wide, prefixed])
@pytest.mark.parametrize("changed", [SHEET, "[Content_Types].xml", "xl/workbook.xml"])
def test_unusual_but_sound_containers(tmp_path: Path, maker: Callable[[Path], Path], changed: str) -> None:
    path, out = maker(tmp_path / "odd.xlsx"), tmp_path / "out.xlsx"
    package = Package.open(path)
    assert package.packed({}) == path.read_bytes()
    content = package.read(changed) + b"<!-- " + random.Random(5).randbytes(300).hex().encode() + b" -->"
    package.write(out, {changed: content})
    assert {name for name, record in records(path).items() if records(out)[name] != record} == {changed}
    with zipfile.ZipFile(out) as archive:
        assert archive.testzip() is None
        assert archive.read(changed) == content
        assert not archive.getinfo(changed).flag_bits & 8  # its sizes stand in its header, no descriptor follows
    assert Package.open(out).read(changed) == content


def test_the_comment_stays(tmp_path: Path) -> None:
    path = pack(tmp_path / "list.xlsx", parts(), comment=b"issue 7 of the list")
    Package.open(path).write(tmp_path / "out.xlsx", {SHEET: OTHER})
    with zipfile.ZipFile(tmp_path / "out.xlsx") as archive:
        assert archive.comment == b"issue 7 of the list"


@pytest.mark.parametrize("threshold", [1, 300, 900])
def test_zip64_when_needed(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, threshold: int) -> None:
    """The threshold is lowered: such fields are as valid for small numbers, and 4 GB would take too long to test."""
    monkeypatch.setattr(repack, "ZIP64_FROM", threshold)
    out = tmp_path / "out.xlsx"
    content = OTHER + b"<!-- " + random.Random(3).randbytes(2000).hex().encode() + b" -->"
    Package.open(book(tmp_path)).write(out, {SHEET: content})
    assert b"PK\x06\x06" in out.read_bytes()
    with zipfile.ZipFile(out) as archive:
        assert archive.testzip() is None
        assert {name: archive.read(name) for name in archive.namelist()} == {**parts(), SHEET: content}
    monkeypatch.undo()
    again = Package.open(out)
    assert again.read(SHEET) == content
    longer = parts()["[Content_Types].xml"] + b"<!-- moves all the others -->"
    again.write(tmp_path / "again.xlsx", {"[Content_Types].xml": longer, SHEET: OTHER})
    with zipfile.ZipFile(tmp_path / "again.xlsx") as archive:
        expected = {**parts(), "[Content_Types].xml": longer, SHEET: OTHER}
        assert {name: archive.read(name) for name in archive.namelist()} == expected


def test_an_unknown_part_is_our_mistake(tmp_path: Path) -> None:
    package = Package.open(book(tmp_path))
    with pytest.raises(ValueError, match="has no part xl/none"):
        package.write(tmp_path / "out.xlsx", {"xl/none.xml": b""})
    assert not (tmp_path / "out.xlsx").exists()


def test_in_place_and_mode(tmp_path: Path) -> None:
    path = book(tmp_path)
    path.chmod(0o640)
    Package.open(path).write(path, {SHEET: OTHER})
    assert Package.open(path).read(SHEET) == OTHER
    assert stat.S_IMODE(path.stat().st_mode) == 0o640
    assert os.listdir(tmp_path) == [path.name]


@pytest.mark.skipif(os.name == "nt", reason="permissions are another matter there")
def test_a_new_file_gets_the_usual_mode(tmp_path: Path) -> None:
    (tmp_path / "plain").touch()
    Package.open(book(tmp_path)).write(tmp_path / "out.xlsx", {})
    assert (tmp_path / "out.xlsx").stat().st_mode == (tmp_path / "plain").stat().st_mode


def test_a_link_keeps_pointing_at_what_was_replaced(tmp_path: Path) -> None:
    (tmp_path / "store").mkdir()
    real, link = book(tmp_path / "store"), tmp_path / "link.xlsx"
    link.symlink_to(Path("store") / real.name)
    Package.open(link).write(link, {SHEET: OTHER})
    assert link.is_symlink()
    assert Package.open(real).read(SHEET) == OTHER
    assert os.listdir(tmp_path / "store") == [real.name]


def test_the_input_may_go_or_change_after_opening(tmp_path: Path) -> None:
    path = book(tmp_path)
    package = Package.open(path)
    path.write_bytes(b"somebody saved over it")
    with pytest.raises(BookError, match="was changed by someone else"):
        package.write(path, {SHEET: OTHER})
    assert path.read_bytes() == b"somebody saved over it"
    package.write(tmp_path / "out.xlsx", {SHEET: OTHER})
    assert Package.open(tmp_path / "out.xlsx").read(SHEET) == OTHER


def unwritable(tmp_path: Path, target: Path) -> str:
    """The sentence for an output that cannot be; no temporary file stays and what was there is as before."""
    before = {path: path.read_bytes() for path in tmp_path.rglob("*") if path.is_file()}
    with pytest.raises(BookError) as caught:
        Package.open(next(iter(before))).write(target, {SHEET: OTHER})
    assert {path: path.read_bytes() for path in tmp_path.rglob("*") if path.is_file()} == before
    assert str(target) in str(caught.value)
    return str(caught.value)


def test_outputs_that_cannot_be(tmp_path: Path) -> None:
    path = book(tmp_path)
    assert "the output must be a file, got a folder" in unwritable(tmp_path, tmp_path)
    assert "its folder does not exist" in unwritable(tmp_path, tmp_path / "none" / "out.xlsx")
    assert "its folder does not exist" in unwritable(tmp_path, path / "out.xlsx")
    assert "its name is too long" in unwritable(tmp_path, tmp_path / ("x" * 300 + ".xlsx"))
    path.chmod(0o444)
    assert "is read-only and was left as it is" in unwritable(tmp_path, path)
    path.chmod(0o644)


@pytest.mark.parametrize("call", ["open", "fsync", "replace", "chmod"])
@pytest.mark.parametrize(
    ("number", "words"),
    [
        (errno.ENOSPC, "the disk is full"),
        (errno.EACCES, "its folder is read-only"),
        (errno.EROFS, "its folder is read-only"),
        (errno.EIO, "cannot be written (simulated)"),
    ],
)
def test_every_step_may_fail(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, call: str, number: int, words: str
) -> None:
    """Simulated: a test cannot fill a disk, and the superuser may write anywhere."""
    path = book(tmp_path)
    package = Package.open(path)
    before = path.read_bytes()

    def fail(*_: object, **__: object) -> int:
        raise OSError(number, "simulated")

    monkeypatch.setattr(f"lowpoint.book.saving.os.{call}", fail)
    with pytest.raises(BookError) as caught:
        package.write(path, {SHEET: OTHER})
    monkeypatch.undo()
    assert words in str(caught.value)
    assert path.read_bytes() == before
    assert os.listdir(tmp_path) == [path.name]


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="no device here that is always full")
def test_a_disk_full_for_true(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = book(tmp_path)
    package, true_open = Package.open(path), os.open

    def full(name: object, flags: int, mode: int = 0o777) -> int:
        true_open(name, flags, mode)  # type: ignore[call-overload]
        return true_open("/dev/full", os.O_WRONLY)

    monkeypatch.setattr("lowpoint.book.saving.os.open", full)
    with pytest.raises(BookError, match="the disk is full"):
        package.write(tmp_path / "out.xlsx", {SHEET: OTHER})
    assert os.listdir(tmp_path) == [path.name]


def test_an_interruption_leaves_nothing_behind(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = book(tmp_path)
    package = Package.open(path)

    def interrupted(*_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("lowpoint.book.package.rewrite", interrupted)
    with pytest.raises(KeyboardInterrupt):
        package.write(path, {SHEET: OTHER})
    assert os.listdir(tmp_path) == [path.name]


# Lock files


def owner_file(name: str, narrow: bytes | None = None) -> bytes:
    """The 165 bytes of an owner file: the name narrow at 1, wide at 57. Source: LibreOffice's msodocumentlockfile."""
    plain = name.encode("cp1252", "replace") if narrow is None else narrow
    head = bytes([len(plain)]) + plain.ljust(54, b" ")
    return (head + struct.pack("<H", len(name)) + name.encode("utf-16-le")).ljust(165, b" ")


@pytest.mark.parametrize(
    ("lock", "content", "who"),
    [
        ("~$list.xlsx", owner_file("Mara Quill"), "Mara Quill"),
        ("~$list.xlsx", owner_file("Ольга"), "Ольга"),
        ("~$list.xlsx", b"\x04Mara" + b" " * 50, "Mara"),
        ("~$list.xlsx", b"", "someone whose name is not in the lock file"),
        (".~lock.list.xlsx#", b",mara,pump-house,01.12.2026 05:42,file:///home/mara;", "mara on pump-house"),
        (".~lock.list.xlsx#", b"Quill\\, Mara,mara,pump-house,01.12.2026 05:42,;", "Quill, Mara on pump-house"),
        (".~lock.list.xlsx#", b"", "someone whose name is not in the lock file"),
        (".~lock.list.xlsx#", b"\xff\xfe,,,", "\ufffd\ufffd"),
    ],
)
def test_locks(tmp_path: Path, lock: str, content: bytes, who: str) -> None:
    path = book(tmp_path)
    assert locked(path) is None
    (tmp_path / lock).write_bytes(content)
    assert locked(path) == who


def test_a_lock_beside_the_goal_of_a_link(tmp_path: Path) -> None:
    (tmp_path / "store").mkdir()
    real, link = book(tmp_path / "store"), tmp_path / "link.xlsx"
    link.symlink_to(real)
    (tmp_path / "store" / f"~${real.name}").write_bytes(owner_file("Mara Quill"))
    assert locked(link) == "Mara Quill"


def test_macros_stay_as_they_were(tmp_path: Path) -> None:
    path, out = corpus_book("macro04.xlsm"), tmp_path / "out.xlsm"
    package = Package.open(path)
    package.write(out, {package.sheets[0].path: package.read(package.sheets[0].path) + b" "})
    same = ("xl/vbaProject.bin", "xl/vbaProjectSignature.bin")
    assert all(records(out)[name] == records(path)[name] for name in same)
    assert CORPUS in path.parents
