"""The engine behind its small interface: values in and out, markers, time, what depends on what."""

from __future__ import annotations

import ast
import io
import math
import time
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from openpyxl.utils.datetime import CALENDAR_MAC_1904

import lowpoint
from lowpoint.book.engine import Engine, Key, Unrefreshable, knows, unreadable, words
from lowpoint.errors import BookError
from lowpoint.problems import CellError


def _saved(cells: dict[str, object], *, date1904: bool = False) -> bytes:
    book = openpyxl.Workbook()
    if date1904:
        book.epoch = CALENDAR_MAC_1904
    sheet = book.worksheets[0]
    sheet.title = "List"
    for place, value in cells.items():
        sheet[place] = value
    out = io.BytesIO()
    book.save(out)
    return out.getvalue()


def _alone(formula: str) -> Any:
    engine = Engine.load(_saved({"A1": formula}))
    engine.evaluate()
    return engine.value("List", 1, 1)


def test_values_go_in_and_come_out_as_cells() -> None:
    engine = Engine.empty("List")
    given = [1, 2.5, "text", True, None, "", CellError.NA, CellError.DIV0, CellError.SPILL]
    engine.set_values("List", 1, 1, [given])
    assert engine.values("List", 1, 1, 1, 7) == [[1.0, 2.5, "text", True, None, "", CellError.NA]]
    assert engine.value("List", 1, 8) is CellError.DIV0
    assert isinstance(engine.value("List", 1, 4), bool)
    assert isinstance(engine.value("List", 1, 1), float)


def test_columns_go_in_and_come_out_like_rectangles() -> None:
    engine = Engine.empty("List")
    for given in ([1.0, -0.0, 2.5], [1.0, "x", None, True], [math.inf, 1.0], [1e308, 1e308], [CellError.NA, 2.0]):
        engine.set_column("List", 2, 3, given)
        last = 1 + len(given)
        found = engine.column("List", 3, 2, last)
        assert found == [line[0] for line in engine.values("List", 2, 3, last, 3)]
        assert found == [CellError.NUM if cell == math.inf else cell for cell in given]
        assert "-0.0" not in map(repr, found)


def test_what_is_no_number_becomes_num_and_minus_zero_becomes_zero() -> None:
    engine = Engine.empty("List")
    engine.set_values("List", 1, 1, [[math.nan, math.inf, -0.0]])
    engine.register("ENDLESS", lambda: math.inf)
    engine.set_formulas("List", 2, 1, [["=ENDLESS()", "=ISERROR(A1)", "=-C1"]])
    engine.evaluate()
    assert engine.values("List", 1, 1, 1, 2) == [[CellError.NUM, CellError.NUM]]
    assert engine.values("List", 2, 1, 2, 2) == [[CellError.NUM, True]]
    assert math.copysign(1.0, engine.value("List", 2, 3)) == 1.0


@pytest.mark.parametrize(
    "formula, error",
    [
        ("=1/0", CellError.DIV0), ("=NA()", CellError.NA), ("=SQRT(-1)", CellError.NUM), ('="x"+1', CellError.VALUE),
        ("=INDEX(B1:B2,9)", CellError.REF), ("=_xlfn._xlws.FILTER(B1:B2,B1:B2>0)", CellError.CALC),
    ],
)  # fmt: skip
def test_true_errors_are_cell_errors(formula: str, error: CellError) -> None:
    assert _alone(formula) is error


@pytest.mark.parametrize(
    "formula, kind",
    [
        ("=NOSUCH(1)", "name"), ("=no_such_name", "name"), ("=A1+1", "circular"), ("=LAMBDA(x,x)(1)", "missing"),
        ("=AGGREGATE(14,6,B1:B2,1)", "missing"), ("=B1:B3 B2:C2", "missing"),
    ],
)  # fmt: skip
def test_what_the_engine_cannot_vouch_for_is_a_marker(formula: str, kind: str) -> None:
    found = _alone(formula)
    assert isinstance(found, Unrefreshable)
    assert found.kind == kind
    assert found.reason


def test_a_blocked_spill_is_a_marker_and_a_free_one_tells_its_size() -> None:
    engine = Engine.load(_saved({"A1": "=SEQUENCE(2,2)", "B2": "in the way", "D1": "=SEQUENCE(2,3)", "H1": 5}))
    engine.evaluate()
    blocked = engine.value("List", 1, 1)
    assert isinstance(blocked, Unrefreshable)
    assert blocked.kind == "spill"
    assert engine.spill("List", 1, 4) == (2, 3)
    assert engine.spill("List", 1, 8) == (1, 1)
    assert engine.values("List", 1, 4, 2, 6) == [[1.0, 2.0, 3.0], [4.0, 5.0, 6.0]]


def test_a_circle_that_is_never_walked_is_none() -> None:
    assert _alone("=IF(TRUE,3,A1)") == 3.0
    assert _alone("=ROW(A1)") == 1.0


def test_dates_come_out_as_serial_numbers_in_the_system_of_the_book() -> None:
    # Source: ISO/IEC 29500-1, 18.17.4: 1 January 2024 is 45292 in the 1900 and 43830 in the 1904 system.
    for date1904, serial in ((False, 45292.0), (True, 43830.0)):
        engine = Engine.load(_saved({"A1": "=DATE(2024,1,1)"}, date1904=date1904), date1904=date1904)
        engine.evaluate()
        assert engine.value("List", 1, 1) == serial


def test_call_backs_get_and_give_cells() -> None:
    engine = Engine.load(_saved({"A1": 2, "A2": None, "A3": "x", "B1": '=SEE(A1:A3,NA(),,TRUE,"t",DATE(2024,1,1))'}))
    seen: list[Any] = []

    def see(*arguments: Any) -> Any:
        seen.extend(arguments)
        return [[1, CellError.NA], ["x", None]]

    engine.register("SEE", see)
    engine.evaluate()
    assert seen == [[[2.0], [None], ["x"]], CellError.NA, 0.0, True, "t", 45292.0]
    # A blank that a formula gives shows as 0, as in a spreadsheet.
    assert engine.values("List", 1, 2, 2, 3) == [[1.0, CellError.NA], ["x", 0.0]]


def test_an_exception_in_a_call_back_comes_out_of_evaluate() -> None:
    engine = Engine.load(_saved({"A1": "=BOOM()", "A2": "=IFERROR(A1,0)", "A3": "=1+1"}))
    failing = [True]

    def boom() -> float:
        if failing[0]:
            raise KeyboardInterrupt
        return 7.0

    engine.register("BOOM", boom)
    with pytest.raises(KeyboardInterrupt):
        engine.evaluate()
    failing[0] = False
    engine.evaluate()
    assert engine.values("List", 1, 1, 3, 1) == [[7.0], [7.0], [2.0]]


def test_time_is_bounded_with_a_clear_sentence() -> None:
    engine = Engine.load(_saved({f"A{row}": f"=SLOW({row})" for row in range(1, 9)}), seconds=0.05)
    engine.register("SLOW", lambda row: time.sleep(0.05) or row)
    with pytest.raises(BookError, match=r"must be evaluated within 0\.05 s, got more"):
        engine.evaluate()


def test_a_load_that_fails_is_a_clear_sentence() -> None:
    with pytest.raises(BookError, match=r"valves\.xlsx: must hold formulas that the engine can load"):
        Engine.load(b"not a workbook", name="valves.xlsx")
    with pytest.raises(BookError, match="that the engine can load"):
        Engine.load(_saved({"A1": "=[1]Other!A1"}))


def test_setting_values_after_the_first_evaluation_refreshes_what_reads_them() -> None:
    engine = Engine.load(_saved({"A1": 1, "A2": 2, "B1": "=SUM(A1:A2)", "B2": "=B1*10"}))
    engine.evaluate()
    engine.set_values("List", 1, 1, [[5], [CellError.NA]])
    engine.evaluate()
    assert engine.values("List", 1, 2, 2, 2) == [[CellError.NA], [CellError.NA]]


def test_what_depends_on_a_cell_is_found_through_ranges_columns_sheets_and_spills() -> None:
    book = openpyxl.Workbook()
    first = book.worksheets[0]
    first.title = "List"
    second = book.create_sheet("Jetty 2")
    cells = {"A1": 1, "B1": "=A1*2", "B2": "=SUM(A1:A9)", "B3": "=SUM(A:A)", "B4": "=B2*1", "B5": "=B1+1", "D1": 9}
    for place, formula in cells.items():
        first[place] = formula
    first["F1"], first["G1"], second["A1"], second["A2"] = "=SEQUENCE(A1+1)", "=F2", "=List!B5", "=List!D1"
    out = io.BytesIO()
    book.save(out)
    engine = Engine.load(out.getvalue())
    engine.evaluate()
    fed = engine.fed([Key("List", 1, 1)])
    wanted = {("List", row, 2) for row in range(1, 6)} | {("List", 1, 6), ("List", 1, 7), ("Jetty 2", 1, 1)}
    assert set(fed) == wanted
    assert fed[Key("Jetty 2", 1, 1)].reason == "depends on List!A1, which was not refreshed"
    lifted = engine.fed([Key("List", 4, 4)], lambda key: [Key("List", 1, 4)] if key.row == 4 else [])
    assert set(lifted) == {("List", 1, 4), ("Jetty 2", 2, 1)}


def test_functions_and_formulas_that_the_engine_does_not_know() -> None:
    assert knows("SUM")
    assert knows("stdev.s")
    assert not knows("NOSUCH")
    assert not knows("a b")
    assert unreadable("=SUM(A1:A2)") is None
    assert "cannot be read" in (unreadable("=1+") or "")
    assert [word.text for word in words("=A1+2")] == ["A1", "+", "2"]
    with pytest.raises(ValueError, match="cannot be read"):
        words("=1+")


def test_iteration_and_dropped_names_show_in_the_diagnostics() -> None:
    engine = Engine.load(_saved({"A1": "=1"}))
    engine.evaluate()
    assert engine.diagnostics == {"names": [], "sheets": [], "iterated": False}
    book = openpyxl.load_workbook(io.BytesIO(_saved({"A1": "=B1+1", "B1": "=A1/2"})))
    book.calculation.iterate = True
    out = io.BytesIO()
    book.save(out)
    iterating = Engine.load(out.getvalue())
    iterating.evaluate()
    assert iterating.diagnostics["iterated"]


def test_only_the_engine_module_imports_the_library() -> None:
    root = Path(lowpoint.__file__).parent
    users = set()
    for path in root.rglob("*.py"):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            names = [alias.name for alias in node.names] if isinstance(node, ast.Import) else []
            names += [node.module or ""] if isinstance(node, ast.ImportFrom) else []
            if any(name.partition(".")[0] == "formualizer" for name in names):
                users.add(path.relative_to(root).as_posix())
    assert users == {"book/engine.py"}
