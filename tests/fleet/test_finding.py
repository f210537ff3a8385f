"""Which books are meant by names, folders and patterns, and where their outputs go."""

from __future__ import annotations

from pathlib import Path

import pytest

from lowpoint.errors import LowpointError
from lowpoint.fleet.finding import Found, Looking, check_targets, find, output_in, several


@pytest.fixture
def tree(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    for name in ("b.xlsx", "a.XLSM", "~$b.xlsx", ".hidden.xlsx", "notes.txt", "b-recalc.xlsx", "lone-recalc.xlsx",
                 "unit-1/c.xlsx", "unit-2/c.xlsx", "unit-2/deep/d.xltx", ".cache/e.xlsx", "done/b.xlsx"):  # fmt: skip
        path = tmp_path / name
        path.parent.mkdir(exist_ok=True, parents=True)
        path.touch()
    monkeypatch.chdir(tmp_path)
    return tmp_path


def names(given: list[str], **looking: object) -> list[str]:
    found = find([Path(word) for word in given], Looking(mark="-recalc", **looking))  # type: ignore[arg-type]
    return [one.path.as_posix() for one in found]


def test_a_folder_without_locks_hidden_files_and_our_own_outputs(tree: Path) -> None:
    assert names(["."]) == ["a.XLSM", "b.xlsx", "lone-recalc.xlsx"]


def test_sub_folders_only_when_asked_and_never_that_of_the_outputs(tree: Path) -> None:
    below = ["a.XLSM", "b.xlsx", "lone-recalc.xlsx", "unit-1/c.xlsx", "unit-2/c.xlsx", "unit-2/deep/d.xltx"]
    assert names(["."], recursive=True, outputs=Path("done")) == below
    assert "done/b.xlsx" in names(["."], recursive=True)


def test_patterns_are_opened_here(tree: Path) -> None:
    assert names(["unit-*/*.xlsx"]) == ["unit-1/c.xlsx", "unit-2/c.xlsx"]
    assert names(["*.xls?"]) == ["b.xlsx", "lone-recalc.xlsx"]
    assert names(["unit-2/**/*.xl*"]) == ["unit-2/c.xlsx", "unit-2/deep/d.xltx"]


def test_a_file_that_looks_like_a_pattern_is_meant_itself(tree: Path) -> None:
    (tree / "x[1].xlsx").touch()
    (tree / "x1.xlsx").touch()
    assert names(["x[1].xlsx"]) == ["x[1].xlsx"]
    assert not several([Path("x[1].xlsx")])
    assert several([Path("x*.xlsx")])


def test_a_pattern_without_books_is_told_even_beside_others(tree: Path) -> None:
    with pytest.raises(LowpointError, match="nothing"):
        names(["b.xlsx", "nothing-*.xlsx"])


def test_no_book_twice(tree: Path) -> None:
    (tree / "link.xlsx").symlink_to(tree / "b.xlsx")
    assert names(["b.xlsx", "./b.xlsx", "link.xlsx", "*.xlsx"]) == ["b.xlsx", "lone-recalc.xlsx"]


def test_outputs_keep_their_place_below(tree: Path) -> None:
    found = find([Path("unit-2")], Looking(recursive=True))
    assert [output_in(Path("out"), one).as_posix() for one in found] == ["out/c.xlsx", "out/deep/d.xltx"]
    assert output_in(Path("out"), Found(Path("q.xlsm"), Path("q.xlsm")), ".xlsx") == Path("out/q.xlsx")
    found = find([Path("unit-*/c.xlsx"), Path("**/d.xltx")], Looking())
    assert [one.below.as_posix() for one in found] == ["c.xlsx", "c.xlsx", "unit-2/deep/d.xltx"]


def test_two_books_for_one_output_and_an_output_over_another_book(tree: Path) -> None:
    with pytest.raises(LowpointError, match="would both be"):
        check_targets([(Path("unit-1/c.xlsx"), Path("out/c.xlsx")), (Path("unit-2/c.xlsx"), Path("out/C.xlsx"))])
    with pytest.raises(LowpointError, match="would be written over"):
        check_targets([(Path("b.xlsx"), Path("unit-1/c.xlsx")), (Path("unit-1/c.xlsx"), Path("out/c.xlsx"))])
    check_targets([(Path("b.xlsx"), Path("b.xlsx")), (Path("a.XLSM"), Path("a.XLSM"))])  # in place
