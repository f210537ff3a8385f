"""``lowpoint recalc``: which books, where to, what is said, which exit code."""

from __future__ import annotations

import json
from pathlib import Path

import openpyxl
import pytest

from lowpoint.faces import cli

Streams = pytest.CaptureFixture[str]


def book(path: Path, pv: float | None = 0.02) -> Path:
    """A valve with its index: p1 10 bar, p2 5 bar; without a vapour pressure the call errs."""
    made = openpyxl.Workbook()
    sheet = made.active
    assert sheet is not None
    sheet.title = "List"
    sheet.append([10, 5, pv, "=LP_SIGMA(A1,B1,C1)", "=IFERROR(D1*2,-1)"])
    made.calculation.fullCalcOnLoad = False
    made.save(path)
    return path


def values(path: Path) -> list[object]:
    sheet = openpyxl.load_workbook(path, data_only=True)["List"]
    return [cell.value for cell in sheet[1]]


# By hand: (10 - 0.02)/(10 - 5) = 1.996, and twice that.
RIGHT = [10, 5, 0.02, 1.996, 3.992]


def test_default_output_stands_beside_the_input(tmp_path: Path, capsys: Streams) -> None:
    source = book(tmp_path / "valves.xlsx")
    before = source.read_bytes()
    assert cli.main(["recalc", str(source)]) == 0
    assert values(tmp_path / "valves-recalc.xlsx") == RIGHT
    assert source.read_bytes() == before
    said = capsys.readouterr().out
    assert "2 formula cells worked out, 1 LP_ call in them" in said
    assert f"Written: {tmp_path / 'valves-recalc.xlsx'}" in said


def test_named_output_file_and_folder(tmp_path: Path) -> None:
    source = book(tmp_path / "valves.xlsx")
    assert cli.main(["recalc", str(source), "-o", str(tmp_path / "new.xlsx")]) == 0
    assert values(tmp_path / "new.xlsx") == RIGHT
    (tmp_path / "there").mkdir()
    assert cli.main(["recalc", str(source), "-o", str(tmp_path / "there")]) == 0
    assert values(tmp_path / "there" / "valves.xlsx") == RIGHT


def test_output_with_another_ending_is_misuse(tmp_path: Path, capsys: Streams) -> None:
    source = book(tmp_path / "valves.xlsx")
    assert cli.main(["recalc", str(source), "-o", str(tmp_path / "new.xlsm")]) == 2
    assert "must end with .xlsx" in capsys.readouterr().err
    assert not (tmp_path / "new.xlsm").exists()


def test_in_place(tmp_path: Path) -> None:
    source = book(tmp_path / "valves.xlsx")
    assert cli.main(["recalc", str(source), "--in-place"]) == 0
    assert values(source) == RIGHT
    assert [path.name for path in tmp_path.iterdir()] == ["valves.xlsx"]


def test_in_place_is_refused_while_a_lock_file_stands(tmp_path: Path, capsys: Streams) -> None:
    source = book(tmp_path / "valves.xlsx")
    before = source.read_bytes()
    (tmp_path / "~$valves.xlsx").write_bytes(b"\x04Anna" + b" " * 49)
    assert cli.main(["recalc", str(source), "--in-place"]) == 2
    assert "open" in capsys.readouterr().err
    assert source.read_bytes() == before


@pytest.mark.parametrize("more", [[], ["-o", "other.xlsx"]])
def test_a_copy_that_somebody_has_open_is_not_replaced(tmp_path: Path, more: list[str], capsys: Streams) -> None:
    source = book(tmp_path / "valves.xlsx")
    target = tmp_path / (more[1] if more else "valves-recalc.xlsx")
    target.write_bytes(b"open elsewhere")
    (tmp_path / f"~${target.name}").write_bytes(b"\x04Anna" + b" " * 49)
    words = ["recalc", str(source), *(["-o", str(target)] if more else [])]
    assert cli.main(words) == 2
    assert f"{target.name}: is open: Anna has it" in capsys.readouterr().err
    assert target.read_bytes() == b"open elsewhere"


@pytest.mark.parametrize("more", [["-o", "x.xlsx"], ["--values"]])
def test_in_place_excludes(tmp_path: Path, more: list[str], capsys: Streams) -> None:
    source = book(tmp_path / "valves.xlsx")
    assert cli.main(["recalc", str(source), "--in-place", *more]) == 2
    assert "--in-place" in capsys.readouterr().err


def test_values_copy_has_no_formula(tmp_path: Path) -> None:
    source = book(tmp_path / "valves.xlsx")
    assert cli.main(["recalc", str(source), "--values", "-o", str(tmp_path / "plain.xlsx")]) == 0
    sheet = openpyxl.load_workbook(tmp_path / "plain.xlsx")["List"]
    assert [cell.value for cell in sheet[1]] == RIGHT


def test_values_of_a_macro_book_lose_the_ending(tmp_path: Path) -> None:
    source = book(tmp_path / "valves.xlsm")
    assert cli.main(["recalc", str(source), "--values"]) == 0
    assert values(tmp_path / "valves-recalc.xlsx") == RIGHT
    assert not (tmp_path / "valves-recalc.xlsm").exists()


def test_failed_call_is_exit_1_with_cell_and_reason(tmp_path: Path, capsys: Streams) -> None:
    source = book(tmp_path / "valves.xlsx", pv=None)
    assert cli.main(["recalc", str(source)]) == 1
    said = capsys.readouterr().out
    assert "List!D1 #N/A  LP_SIGMA: pv" in said
    # IFERROR around it sees a true error.
    assert values(tmp_path / "valves-recalc.xlsx")[3:] == ["#N/A", -1]


def test_json_is_one_value_alone(tmp_path: Path, capsys: Streams) -> None:
    source = book(tmp_path / "valves.xlsx", pv=None)
    assert cli.main(["recalc", str(source), "--json"]) == 1
    streams = capsys.readouterr()
    data = json.loads(streams.out)
    assert streams.err == ""
    assert data["failed"][0]["cell"] == "D1"
    assert data["failed"][0]["error"] == "#N/A"
    assert data["exit_code"] == 1
    assert data["counts"]["lp_calls"] == 1


def test_several_books_and_one_that_is_none(tmp_path: Path, capsys: Streams) -> None:
    good, other = book(tmp_path / "a.xlsx"), book(tmp_path / "b.xlsx")
    wrong = tmp_path / "c.xlsx"
    wrong.write_text("tag,p1,p2\n")
    out = tmp_path / "done"
    assert cli.main(["recalc", str(good), str(wrong), str(other), "-o", str(out)]) == 1
    assert values(out / "a.xlsx") == values(out / "b.xlsx") == RIGHT
    assert not (out / "c.xlsx").exists()
    said = capsys.readouterr().out
    assert "c.xlsx: must be" in said
    assert "3 books: 2 without findings, 2 written, 1 failed." in said


def test_folder_with_two_processes_gives_the_same_in_the_same_order(tmp_path: Path, capsys: Streams) -> None:
    folder = tmp_path / "in"
    folder.mkdir()
    for name in ("one.xlsx", "three.xlsm", "two.xlsx"):
        book(folder / name)
    (folder / "~$one.xlsx").write_bytes(b"")
    (folder / "notes.txt").write_text("not a book")
    assert cli.main(["recalc", str(folder), "-o", str(tmp_path / "out"), "--json"]) == 0
    alone = json.loads(capsys.readouterr().out)
    assert cli.main(["recalc", str(folder), "-o", str(tmp_path / "out2"), "--jobs", "2", "--json"]) == 0
    together = json.loads(capsys.readouterr().out)
    assert [Path(one["book"]).name for one in alone] == ["one.xlsx", "three.xlsm", "two.xlsx"]
    assert [one["book"] for one in together] == [one["book"] for one in alone]
    assert (tmp_path / "out" / "one.xlsx").read_bytes() == (tmp_path / "out2" / "one.xlsx").read_bytes()


def test_folder_again_does_not_take_its_own_outputs(tmp_path: Path, capsys: Streams) -> None:
    book(tmp_path / "a.xlsx")
    for _ in range(2):
        assert cli.main(["recalc", str(tmp_path)]) == 0
    assert sorted(path.name for path in tmp_path.iterdir()) == ["a-recalc.xlsx", "a.xlsx"]


def test_two_books_of_one_name_are_refused_before_anything_is_written(tmp_path: Path, capsys: Streams) -> None:
    for name in ("x", "y"):
        (tmp_path / name).mkdir()
        book(tmp_path / name / "a.xlsx")
    words = ["recalc", str(tmp_path / "x"), str(tmp_path / "y"), "-o", str(tmp_path / "out")]
    assert cli.main(words) == 2
    assert "would both be" in capsys.readouterr().err
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize("words", [["--jobs", "0"], ["--jobs", "two"]])
def test_wrong_number_of_jobs(tmp_path: Path, words: list[str], capsys: Streams) -> None:
    assert cli.main(["recalc", str(book(tmp_path / "a.xlsx")), *words]) == 2
    assert "--jobs" in capsys.readouterr().err


def test_missing_file_empty_folder_and_no_word(tmp_path: Path, capsys: Streams) -> None:
    assert cli.main(["recalc", str(tmp_path / "nothing.xlsx")]) == 2
    assert "nothing.xlsx" in capsys.readouterr().err
    assert cli.main(["recalc", str(tmp_path)]) == 2
    assert "must hold files of the kind" in capsys.readouterr().err
    assert cli.main(["recalc"]) == 2
    assert cli.main(["recalc", str(tmp_path / "nothing.xlsx"), "--json"]) == 2
    assert json.loads(capsys.readouterr().out)["exit_code"] == 2
