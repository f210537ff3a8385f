"""Every limit has a sentence with the book, the limit, what came and the option that moves it; none is passed over.

The books are made here. Which figures are usual limits is common practice; that each one bites is what is tested.
"""

from __future__ import annotations

import subprocess
import sys
import time
import zipfile
from pathlib import Path

import pytest

from book.lists import bare, formula, number, recalculated
from book.makers import book, pack, parts, sheet_xml
from lowpoint.book import engine, guard_memory
from lowpoint.book.guard_cells import cells_of, formula_refusal
from lowpoint.book.guard_limits import DEFAULT_LIMITS, NAMES, Limits, in_force, limiting, with_limit
from lowpoint.book.recalc import recalculate
from lowpoint.errors import BookError, LowpointError
from lowpoint.faces.cli import main
from lowpoint.survey.reading import read_list
from survey_lists import GOOD, HEADINGS, write_csv, write_ods, write_xlsx

CELLS = {"A1": number(10.0), "B1": number(4.0), "C1": number(0.03), "E1": formula("LP_SIGMA(A1,B1,C1)", "1")}
SHEET_1 = "xl/worksheets/sheet1.xml"

LOW = {"file": "100", "unpacked": "500", "part": "200", "parts": "3", "cells": "3"}


@pytest.mark.parametrize("name", LOW)
def test_each_limit_of_a_book_names_itself(tmp_path: Path, capsys: pytest.CaptureFixture[str], name: str) -> None:
    path = bare(tmp_path / "list.xlsx", CELLS)
    out = tmp_path / "out.xlsx"
    assert main(["recalc", str(path), "-o", str(out), "--limit", f"{name}={LOW[name]}"]) == 2
    said = capsys.readouterr().err
    assert str(path) in said
    assert ", got " in said
    assert f"--limit {name}=" in said
    assert not out.exists()
    assert main(["recalc", str(path), "-o", str(out)]) == 0


def test_the_ratio_names_itself(tmp_path: Path) -> None:
    path = book(tmp_path, **{SHEET_1: sheet_xml(" " * (17 << 20))})
    with pytest.raises(BookError, match=r"packed more than 250 times, got \d+ times .*--limit ratio="):
        recalculate(path)


@pytest.mark.parametrize("name", ["list.xlsx", "list.csv", "list.ods"])
def test_lists_have_the_same_limit_of_cells(tmp_path: Path, name: str) -> None:
    write = {"xlsx": write_xlsx, "csv": write_csv, "ods": write_ods}[name[5:]]
    path = write(tmp_path / name, HEADINGS, [GOOD] * 5)
    with limiting(Limits(cells=30)), pytest.raises(BookError, match=r"must hold at most 30 cells, got .*--limit cells"):
        read_list(path)
    assert read_list(path)[0].count == 5


@pytest.mark.parametrize("command", ["survey", "compare", "explain"])
def test_every_reader_takes_the_option(tmp_path: Path, capsys: pytest.CaptureFixture[str], command: str) -> None:
    path = write_csv(tmp_path / "list.csv", HEADINGS, [GOOD])
    words = {"survey": [], "compare": [str(path)], "explain": ["21-FCV-110"]}[command]
    assert main([command, str(path), *words, "--limit", "cells=5"]) == 2
    assert "must hold at most 5 cells" in capsys.readouterr().err


def test_blank_cells_that_a_reader_would_hold_count(tmp_path: Path) -> None:
    """A filled cell at the right edge of many rows is a small file and a large grid."""
    rows = "".join(f'<row r="{row}"><c r="XFD{row}"><v>1</v></c></row>' for row in range(1, 400))
    path = book(tmp_path, **{SHEET_1: sheet_xml(rows)})
    with pytest.raises(BookError, match="must hold at most 5000000 cells"):
        read_list(path)


def test_repeated_rows_of_an_open_document_count(tmp_path: Path) -> None:
    space = "urn:oasis:names:tc:opendocument:xmlns"
    cell = '<t:table-cell t:number-columns-repeated="1000" o:value-type="float" o:value="1"/>'
    row = f'<t:table-row t:number-rows-repeated="10000">{cell}</t:table-row>'
    content = (
        f'<o:document-content xmlns:o="{space}:office:1.0" xmlns:t="{space}:table:1.0"><o:body><o:spreadsheet>'
        f'<t:table t:name="List">{row}</t:table></o:spreadsheet></o:body></o:document-content>'
    )
    path = tmp_path / "list.ods"
    with zipfile.ZipFile(path, "w") as package:
        package.writestr("content.xml", content)
    with pytest.raises(BookError, match="must hold at most 5000000 cells, got 10000000 or more"):
        read_list(path)


def test_long_and_deep_formulas_keep_their_values(tmp_path: Path) -> None:
    """One of them stops no other: it is kept, and the report says why."""
    cells = CELLS | {"F1": formula("A1+" * 40 + "1", "7"), "G1": formula("(" * 12 + "A1" + ")" * 12, "8")}
    done = recalculated(bare(tmp_path / "list.xlsx", cells), limits=Limits(formula_length=100, formula_depth=10))
    assert done.kept == {
        "Intake!F1": "the formula has 121 characters; at most 100 are read (--limit length)",
        "Intake!G1": "the formula is nested more than 10 levels deep (--limit depth)",
    }
    assert done["Intake!F1"] == 7.0
    assert done.changed == {"Intake!E1"}
    whole = recalculated(bare(tmp_path / "whole.xlsx", cells))
    assert whole["Intake!G1"] == 10.0
    assert formula_refusal(3, ["call", "ref", "close"], DEFAULT_LIMITS) == ""


def test_evaluation_ends_when_its_time_is_up(tmp_path: Path) -> None:
    """A chain of sums over all rows above, each in a layer of its own, which would take minutes."""
    rows = "".join(
        f'<row r="{row}"><c r="A{row}"><v>1</v></c><c r="B{row}"><f>SUMPRODUCT(($A$1:$A$6000&gt;A{row})*1)+'
        f"{f'B{row - 1}' if row > 1 else '0'}</f><v>0</v></c></row>" for row in range(1, 6001)
    )  # fmt: skip
    path = book(tmp_path, **{SHEET_1: sheet_xml(rows)})
    before = path.read_bytes()
    with pytest.raises(BookError, match=r"list\.xlsx: must be evaluated within 0\.2 s, got more.*--limit seconds"):
        recalculate(path, in_place=True, limits=Limits(seconds=0.2))
    assert path.read_bytes() == before
    assert [p.name for p in tmp_path.iterdir()] == ["list.xlsx"]


def test_the_time_is_that_of_all_evaluations_together(monkeypatch: pytest.MonkeyPatch) -> None:
    made = engine.Engine.empty("List", seconds=10.0)
    made.evaluate()
    now = time.monotonic()
    monkeypatch.setattr(time, "monotonic", lambda: now + 11.0)
    with pytest.raises(BookError, match="must be evaluated within 10 s"):
        made.evaluate()


@pytest.mark.skipif(sys.platform != "linux", reason="only Linux bounds the memory of a process")
def test_memory_that_ends_is_a_sentence() -> None:
    """In a process of its own, for the bound cannot be lifted again. 400 MB are far more than the interpreter needs."""
    script = (
        "from lowpoint.book.guard_limits import Limits, limiting\n"
        "from lowpoint.book.guard_memory import bound_memory, enough_memory\n"
        "assert bound_memory(400 << 20)\n"
        "with limiting(Limits(memory=400 << 20)), enough_memory('list.xlsx'):\n"
        "    bytearray(500 << 20)\n"
    )
    done = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=False)
    assert "list.xlsx: must be worked on within 400 MB of memory, got more" in done.stderr
    assert "--limit memory=" in done.stderr


def test_where_no_system_bounds_memory_it_is_said(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(guard_memory.sys, "platform", "win32")
    assert not guard_memory.bound_memory(1 << 30)
    monkeypatch.undo()
    assert not guard_memory.bound_memory(0)
    assert "Linux only" in NAMES["memory"].says


WRONG = ["cells", "cells=", "cells=-1", "cells=0", "cells=many", "cells=1e6", "seconds=2 MB", "file=3 s", "size=4",
         "=5", "length=40000", "cells=2 GB"]  # fmt: skip


@pytest.mark.parametrize("text", WRONG)
def test_a_limit_that_is_none(text: str) -> None:
    with pytest.raises(LowpointError, match="--limit") as caught:
        with_limit(DEFAULT_LIMITS, text)
    assert caught.value.exit_code == 2


def test_limits_by_their_words() -> None:
    limits = DEFAULT_LIMITS
    for text in ("file=2GB", "unpacked = 1.5 MB", "parts=7", "ratio=12.5", "seconds=0.5 s", "memory=0", "length=99"):
        limits = with_limit(limits, text)
    assert (limits.file_bytes, limits.unpacked_bytes, limits.entries) == (2 << 30, 3 << 19, 7)
    assert (limits.ratio, limits.seconds, limits.memory, limits.formula_length) == (12.5, 0.5, 0, 99)
    assert in_force() is DEFAULT_LIMITS
    with limiting(limits):
        assert in_force() is limits
    assert in_force() is DEFAULT_LIMITS


def test_the_limits_are_shown(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["recalc", "--show-limits"]) == 0
    shown = capsys.readouterr().out
    assert [line.split()[0] for line in shown.splitlines()] == list(NAMES)
    assert "5000000" in shown
    assert "256 MB" in shown


def test_cells_are_counted_by_their_tags() -> None:
    part = sheet_xml('<row><c r="A1"/><c><v>1</v></c></row><cols><col min="1"/></cols><cellWatch r="A1"/>')
    assert cells_of(part) == 2
    assert cells_of(b"<x:row><x:c r='A1'/></x:row>") == 1


def test_limits_hold_for_a_packed_book_too(tmp_path: Path) -> None:
    many = {f"xl/media/image{n}.png": b"x" for n in range(20)}
    path = pack(tmp_path / "list.xlsx", {**parts(), **many})
    with limiting(Limits(entries=10)), pytest.raises(BookError, match="must hold at most 10 parts, got 25"):
        read_list(path)


@pytest.mark.parametrize("range_", ["A1:XFD1048576", "B2:ZZ100000"])
def test_an_array_over_the_whole_sheet_is_not_made(tmp_path: Path, range_: str) -> None:
    first = range_.partition(":")[0]
    row = f'<row r="{first[1:]}"><c r="{first}"><f t="array" ref="{range_}">LP_FF(0.03,220)</f><v>4</v></c></row>'
    path = book(tmp_path, **{SHEET_1: sheet_xml(row)})
    with pytest.raises(BookError, match=r"must hold at most 5000000 cells, got .*--limit cells"):
        recalculate(path)


def test_an_array_that_spills_too_far_is_not_written(tmp_path: Path) -> None:
    text = '<f t="array" ref="A1">_xlfn.SEQUENCE(300,10)*LP_FF(0.03,220)</f><v>4</v>'
    row = f'<row r="1"><c r="A1" cm="1">{text}</c></row>'
    path = book(tmp_path, **{SHEET_1: sheet_xml(row)})
    with pytest.raises(BookError, match="must hold at most 2999 cells, got 3000 or more"):
        recalculate(path, limits=Limits(cells=2999))
    assert [p.name for p in tmp_path.iterdir()] == ["list.xlsx"]
    assert recalculated(path).report.recomputed == 1
