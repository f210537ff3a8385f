"""Files in and out: where the result goes, in place, locks, read-only targets, values copies, hostile books."""

from __future__ import annotations

import os
from pathlib import Path

import openpyxl
import pytest

from book.lists import bare, expected, formula, listed, number, recalculated, stored, valves
from book.makers import MAIN, book, pack, parts
from lowpoint.book.guard import Limits
from lowpoint.book.recalc import output_path, recalculate
from lowpoint.errors import BookError
from lowpoint.problems import CellError

CELLS = {"A1": number(10.0), "B1": number(4.0), "C1": number(0.03), "E1": formula("LP_SIGMA(A1,B1,C1)", "1")}
VALUE = expected("LP_SIGMA", 10.0, 4.0, 0.03)


def _list(folder: Path, name: str = "list.xlsx") -> Path:
    return bare(folder / name, CELLS)


def test_without_a_name_the_result_stands_beside_the_input(tmp_path: Path) -> None:
    path = _list(tmp_path)
    before = path.read_bytes()
    done = recalculated(path)
    assert done.path == tmp_path / "list-recalc.xlsx"
    assert done["Intake!E1"] == VALUE
    assert path.read_bytes() == before
    assert sorted(p.name for p in tmp_path.iterdir()) == ["list-recalc.xlsx", "list.xlsx"]


def test_in_place_writes_over_the_input_and_only_then(tmp_path: Path) -> None:
    path = _list(tmp_path)
    done = recalculated(path, in_place=True)
    assert done.path == path
    assert done["Intake!E1"] == VALUE
    assert [p.name for p in tmp_path.iterdir()] == ["list.xlsx"]
    state = os.stat(path)
    again = recalculate(path, in_place=True)
    assert again.changed == []
    assert (os.stat(path).st_mtime_ns, os.stat(path).st_ino) == (state.st_mtime_ns, state.st_ino)


@pytest.mark.parametrize("name", ["~$list.xlsx", ".~lock.list.xlsx#"])
def test_in_place_is_refused_while_somebody_has_the_book_open(tmp_path: Path, name: str) -> None:
    path = _list(tmp_path)
    before = path.read_bytes()
    (tmp_path / name).write_bytes(
        b",Ada,desk,01.01.2026 10:00,file;" if name.startswith(".") else b"\x03Ada".ljust(165, b"\0")
    )
    with pytest.raises(BookError, match=r"is open: Ada.* has it.*Close it there, or name another output with -o"):
        recalculate(path, in_place=True)
    assert path.read_bytes() == before
    assert recalculated(path)["Intake!E1"] == VALUE


def test_the_output_must_not_be_the_input(tmp_path: Path) -> None:
    path = _list(tmp_path)
    link = tmp_path / "link.xlsx"
    link.symlink_to(path)
    for out in (path, link, tmp_path / "." / "list.xlsx"):
        with pytest.raises(BookError, match="the output must be another file than the input"):
            recalculate(path, out)
    assert output_path("a/list.xlsm", None, False) == Path("a/list-recalc.xlsm")


def test_a_read_only_output_or_a_missing_folder_is_a_clear_sentence(tmp_path: Path) -> None:
    path = _list(tmp_path)
    out = tmp_path / "out.xlsx"
    out.write_bytes(b"mine")
    out.chmod(0o444)
    with pytest.raises(BookError, match="is read-only and was left as it is"):
        recalculate(path, out)
    assert out.read_bytes() == b"mine"
    with pytest.raises(BookError, match="its folder does not exist"):
        recalculate(path, tmp_path / "none" / "out.xlsx")


@pytest.mark.parametrize(
    "content, words",
    [(b"", "an empty file"), (b"%PDF-1.7", "PDF"), (b"tag,p1\n1,2\n", "plain text"), (b"PK\x03\x04 broken", "damaged")],
)
def test_a_file_that_is_no_workbook_is_refused_and_nothing_is_written(
    tmp_path: Path, content: bytes, words: str
) -> None:
    path = tmp_path / "list.xlsx"
    path.write_bytes(content)
    with pytest.raises(BookError, match=words):
        recalculate(path)
    assert [p.name for p in tmp_path.iterdir()] == ["list.xlsx"]


@pytest.mark.parametrize(
    "head, cell, words",
    [
        ("", "<f>1</f>", "well-formed XML"), ("", "<f><![CDATA[1]]></f></c>", "plain text"),
        ('<!DOCTYPE x [<!ENTITY e "1">]>', "<f>&e;</f></c>", "entities|DOCTYPE"),
    ],
)  # fmt: skip
def test_a_sheet_that_cannot_be_trusted_is_refused(tmp_path: Path, head: str, cell: str, words: str) -> None:
    sheet = f'{head}<worksheet xmlns="{MAIN}"><sheetData><row r="1"><c r="A1">{cell}</row></sheetData></worksheet>'
    path = book(tmp_path, **{"xl/worksheets/sheet1.xml": sheet.encode()})
    with pytest.raises(BookError, match=words):
        recalculate(path)
    assert [p.name for p in tmp_path.iterdir()] == ["list.xlsx"]


def test_the_limits_are_those_of_the_caller(tmp_path: Path) -> None:
    path = _list(tmp_path)
    with pytest.raises(BookError, match="must"):
        recalculate(path, limits=Limits(file_bytes=100))


def test_a_values_copy_has_numbers_for_formulas(tmp_path: Path) -> None:
    places = valves() | {f"F{row}": f"=LP_SIGMA(A{row},B{row},C{row})" for row in (2, 3)} | {
        "F4": "=LP_SIGMA(B4,A4,C4)", "G2": "=SUM(F2:F3)", "G3": '=LP_REGIME(F2,1.2)', "G4": "=NOSUCH(1)",
        "H2": "=LP_SIGMA(A2:A4,B2:B4,C2:C4)",
    }  # fmt: skip
    path = listed(tmp_path / "list.xlsx", places, arrays={"H2": "H2:H4"})
    done = recalculated(path, tmp_path / "plain.xlsx", values=True)
    cells = openpyxl.load_workbook(done.path)["List"]
    assert not any(isinstance(c.value, str) and c.value.startswith("=") for row in cells.iter_rows() for c in row)
    assert done["F2"] == expected("LP_SIGMA", 10.0, 4.0, 0.03)
    assert done["F4"] is CellError.NUM
    assert done["G2"] == done["F2"] + done["F3"]
    assert done["G3"] == "clear"
    assert done["G4"] is None
    assert [done[f"H{row}"] for row in (2, 3)] == [done["F2"], done["F3"]]
    assert done.report.exit_code == 1
    assert stored(path)["List!A2"] == 10.0
    with pytest.raises(BookError, match="own place"):
        recalculate(path, in_place=True, values=True)


def test_hostile_formulas_are_kept_not_run(tmp_path: Path) -> None:
    deep = "(" * 300 + "1" + ")" * 300
    long = "+".join(["A1"] * 20_000)
    cells = CELLS | {
        "F1": formula(deep, "1"), "G1": formula(long, "2"), "H1": formula('HYPERLINK("http://example.com",1)', "1"),
        "I1": formula("cmd|'/c calc'!A1", "3"), "J1": formula("IF(" * 120 + "1" + ",1,1)" * 120, "4"),
        "K1": formula('"' + "x" * 9000 + '"', ""), "L1": formula("A1:A1048576*LP_FF(0.03,220)", "5"),
    }  # fmt: skip
    done = recalculated(bare(tmp_path / "list.xlsx", cells))
    assert done["Intake!E1"] == VALUE
    for place, old in (("F1", 1.0), ("G1", 2.0), ("I1", 3.0), ("J1", 4.0)):
        assert done[f"Intake!{place}"] == old
        assert done.kept[f"Intake!{place}"]
    assert "nested more than" in done.kept["Intake!F1"]
    assert "characters; at most" in done.kept["Intake!G1"]


def test_cells_far_out_and_odd_rows_do_no_harm(tmp_path: Path) -> None:
    sheet = (
        f'<worksheet xmlns="{MAIN}"><sheetData><row><c><v>1</v></c><c><f>A1+LP_FF(0.03,220)</f></c></row>'
        '<row r="5"/><row r="1048576"><c r="XFD1048576"><f>LP_SIGMA(10,4,0.03)</f><v>1</v></c></row>'
        "</sheetData></worksheet>"
    )
    done = recalculated(pack(tmp_path / "list.xlsx", {**parts(), "xl/worksheets/sheet1.xml": sheet.encode()}))
    assert done.report.recomputed == 2
    assert done["Intake!B1"] == 1.0 + expected("LP_FF", 0.03, 220.0)
    assert repr(VALUE).encode() in done.part("xl/worksheets/sheet1.xml")
