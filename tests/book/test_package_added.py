"""Parts put behind the last of a package: what was there keeps its bytes, and any reader finds the new ones."""

from __future__ import annotations

import io
import zipfile
from pathlib import Path

import pytest

from book.makers import book
from lowpoint.book import repack
from lowpoint.book.package import Package

NEW = {"xl/added.xml": b"<a/>" * 400, "xl/leer/\u00fc.bin": b""}


def test_added_parts_follow_and_nothing_moves(tmp_path: Path) -> None:
    path = book(tmp_path)
    data = Package.open(path).packed({}, added=NEW)
    with zipfile.ZipFile(path) as before, zipfile.ZipFile(io.BytesIO(data)) as after:
        assert after.testzip() is None
        assert after.namelist() == [*before.namelist(), *NEW]
        for name in before.namelist():
            assert after.read(name) == before.read(name)
            assert after.getinfo(name).header_offset == before.getinfo(name).header_offset
        assert {name: after.read(name) for name in NEW} == NEW
    start = zipfile.ZipFile(path).start_dir
    assert data[:start] == path.read_bytes()[:start]


def test_added_and_changed_together(tmp_path: Path) -> None:
    package = Package.open(book(tmp_path))
    changed = {"xl/worksheets/sheet1.xml": package.read("xl/worksheets/sheet1.xml").replace(b"2.5", b"12.25")}
    again = Package(package.packed(changed, added=NEW), "again.xlsx")
    assert again.read("xl/worksheets/sheet1.xml") == changed["xl/worksheets/sheet1.xml"]
    assert again.read("xl/added.xml") == NEW["xl/added.xml"]


def test_the_same_bytes_on_every_run(tmp_path: Path) -> None:
    package = Package.open(book(tmp_path))
    assert package.packed({}, added=NEW) == package.packed({}, added=NEW)


def test_a_name_that_is_taken_is_our_mistake(tmp_path: Path) -> None:
    package = Package.open(book(tmp_path))
    with pytest.raises(ValueError, match=r"has a part xl/workbook\.xml already"):
        package.packed({}, added={"XL/workbook.xml": b""})


def test_a_new_part_too_far_back_is_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(repack, "ZIP64_FROM", 100)
    with pytest.raises(ValueError, match="too large, or too far back"):
        Package.open(book(tmp_path)).packed({}, added=NEW)
