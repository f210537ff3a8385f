"""Every function gives the same double, word or error in Python, in cells, in a recalculated book and in Excel.

Calc has its own test, in `faces/calc`, for it cannot tell a blank cell from 0; it may take its arguments from
`parity_cases` too.
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import openpyxl
import pytest
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from lowpoint import cells
from lowpoint.book.recalc import recalculate
from lowpoint.cells import CellError, Same
from lowpoint.registry import functions
from parity_cases import ROWS, argument_sets, names, same

ANSWERS = 20
"""The column of the formulas; arguments stand before it, tables behind it."""


@pytest.fixture(scope="module")
def sets() -> dict[str, list[list[Any]]]:
    return {name: argument_sets(name) for name in names()}


@pytest.fixture(scope="module")
def expected(sets: dict[str, list[list[Any]]]) -> dict[str, list[Any]]:
    """What a cell shows, call by call: what all else is compared with."""
    return {name: [cells.call(name, row) for row in rows] for name, rows in sets.items()}


def differences(name: str, rows: list[list[Any]], got: list[Any], wanted: list[Any]) -> str:
    assert len(got) == len(wanted) == len(rows)
    told = [
        f"{name}{row}: got {a!r}, a cell has {b!r}"
        for row, a, b in zip(rows, got, wanted, strict=True)
        if not same(a, b)
    ]
    return "\n".join(told[:10])


def columns_of(name: str, rows: list[list[Any]]) -> list[Any]:
    parameters = functions[name].parameters
    return [Same(rows[0][i]) if p.is_table else [row[i] for row in rows] for i, p in enumerate(parameters)]


def test_every_function_has_good_and_bad_sets(expected: dict[str, list[Any]]) -> None:
    """The sets are worth comparing: hundreds for each, many answered and many refused."""
    assert set(expected) | {"LP_WHY"} == set(functions)
    for name, answers in expected.items():
        refused = sum(isinstance(answer, CellError) for answer in answers)
        assert len(answers) == ROWS >= 200
        assert ROWS * 0.05 <= refused <= ROWS * 0.8, (name, refused)
        good = {repr(answer) for answer in answers if not isinstance(answer, CellError)}
        words = isinstance(next(a for a in answers if not isinstance(a, CellError)), str)
        assert len(good) >= (1 if words or not has_numbers(name) else 10), name


def has_numbers(name: str) -> bool:
    return any(p.is_number for p in functions[name].parameters) and functions[name].declaration.name != "STAGES"


@pytest.mark.parametrize("name", names())
def test_a_column_of_calls(name: str, sets: dict[str, list[list[Any]]], expected: dict[str, list[Any]]) -> None:
    got = cells.call_many(name, columns_of(name, sets[name]), ROWS)
    assert not (told := differences(name, sets[name], got, expected[name])), told


@pytest.mark.parametrize("name", names())
def test_from_python(name: str, sets: dict[str, list[list[Any]]], expected: dict[str, list[Any]]) -> None:
    """Python has NaN, or None for words, where a cell has an error."""
    for row, answer in zip(sets[name], expected[name], strict=True):
        python = functions[name](*row)
        if isinstance(answer, CellError):
            assert python is None or np.isnan(python).all(), (name, row)
        elif isinstance(answer, list):
            assert same([[float(x)] for x in python if not math.isnan(x)], answer), (name, row)
        else:
            assert same(python if isinstance(answer, str) else float(python), answer), (name, row)


# --- a recalculated book ------------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def recalculated(sets: dict[str, list[list[Any]]], tmp_path_factory: pytest.TempPathFactory) -> dict[str, list[Any]]:
    """A book with a sheet for each function, recalculated once; the answers as they stand in the file."""
    folder = tmp_path_factory.mktemp("parity")
    book = openpyxl.Workbook()
    book.remove(book.worksheets[0])
    for name, rows in sets.items():
        _fill(book.create_sheet(name), name, rows)
    book.save(folder / "parity.xlsx")
    recalculate(folder / "parity.xlsx", folder / "done.xlsx")
    return _answers(folder / "done.xlsx")


def _fill(sheet: Worksheet, name: str, rows: list[list[Any]]) -> None:
    tables = _tables(sheet, name, rows[0])
    for number, row in enumerate(rows, start=1):
        words = []
        for place, argument in enumerate(row):
            if place in tables:
                words.append(tables[place])
                continue
            words.append(f"{get_column_letter(place + 1)}{number}")
            if argument is not None:
                sheet.cell(number, place + 1).value = str(argument) if isinstance(argument, CellError) else argument
        sheet.cell(number, ANSWERS).value = f"={name}({','.join(words)})"


def _tables(sheet: Worksheet, name: str, row: list[Any]) -> dict[int, str]:
    """Each table argument written once, and how a formula calls it."""
    found, column = {}, ANSWERS + 2
    for place, parameter in enumerate(functions[name].parameters):
        if not parameter.is_table:
            continue
        if isinstance(row[place], str):
            found[place] = f'"{row[place]}"'
            continue
        for down, line in enumerate(row[place]):
            for right, value in enumerate(line):
                sheet.cell(down + 1, column + right).value = value
        last = get_column_letter(column + len(row[place][0]) - 1)
        found[place] = f"${get_column_letter(column)}$1:${last}${len(row[place])}"
        column += len(row[place][0]) + 1
    return found


def _answers(path: Path) -> dict[str, list[Any]]:
    book = openpyxl.load_workbook(path, data_only=True)
    found = {}
    for sheet in book.worksheets:
        column = [sheet.cell(row, ANSWERS) for row in range(1, ROWS + 1)]
        found[sheet.title] = [_plain(cell) for cell in column]
    return found


def _plain(cell: Any) -> Any:
    if cell.data_type == "e":
        return CellError(cell.value)
    return float(cell.value) if type(cell.value) is int else cell.value


@pytest.mark.parametrize("name", names())
def test_in_a_recalculated_book(
    name: str, sets: dict[str, list[list[Any]]], expected: dict[str, list[Any]], recalculated: dict[str, list[Any]]
) -> None:
    # A formula that is no array shows the first of a column.
    wanted = [answer[0][0] if isinstance(answer, list) else answer for answer in expected[name]]
    assert not (told := differences(name, sets[name], recalculated[name], wanted)), told


# --- Excel --------------------------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def excel(tmp_path_factory: pytest.TempPathFactory) -> Any:
    """The VBA of a built add-in over the real call path of xlwings."""
    pytest.importorskip("xlwings", reason="xlwings is not installed (the extra 'excel')")
    pytest.importorskip("pyopenvba", reason="pyOpenVBA is not installed (the extra 'excel')")
    from faces.excel.office import Excel
    from lowpoint.faces.excel_addin.building import build

    path = tmp_path_factory.mktemp("excel") / "lowpoint.xlam"
    path.write_bytes(build("C:\\env\\Scripts\\python.exe"))
    return Excel(path)


@pytest.mark.parametrize("name", names())
def test_in_excel(name: str, sets: dict[str, list[list[Any]]], expected: dict[str, list[Any]], excel: Any) -> None:
    """All sets in one call over columns; call by call where the answer is a column itself."""
    rows = sets[name]
    if functions[name].column:
        got = [excel.run(name, *row) for row in rows]
    else:
        before = excel.library.calls
        got = [row[0] for row in excel.run(name, *_ranges(name, rows))]
        assert excel.library.calls == before + 1
    assert not (told := differences(name, rows, got, expected[name])), told


def _ranges(name: str, rows: list[list[Any]]) -> list[Any]:
    """Arguments as Excel hands over ranges: columns of values, tables whole."""
    parameters = functions[name].parameters
    return [rows[0][i] if p.is_table else [[row[i]] for row in rows] for i, p in enumerate(parameters)]


@pytest.mark.parametrize("name", names())
def test_one_cell_in_excel(
    name: str, sets: dict[str, list[list[Any]]], expected: dict[str, list[Any]], excel: Any
) -> None:
    """The short way of one cell, for a part of the sets."""
    part = range(0, ROWS, 9)
    got = [excel.run(name, *sets[name][row]) for row in part]
    rows, wanted = [sets[name][row] for row in part], [expected[name][row] for row in part]
    assert not (told := differences(name, rows, got, wanted)), told
