"""Every function from a cell of Excel: the VBA of the built add-in, the real call path of xlwings, and the registry."""

from __future__ import annotations

import math
from typing import Any

import pytest

import registry_cases
from lowpoint import cells
from lowpoint.declare import Parameter
from lowpoint.problems import CellError
from lowpoint.registry import functions

NAMES = registry_cases.names()
FIRST = "AAA1"
PASSED = (CellError.NA, CellError.DIV0, CellError.SPILL)


def same(got: Any, expected: Any) -> bool:
    """The same double to the last bit, the same word, or the same error."""
    if isinstance(expected, list):
        return isinstance(got, list) and len(got) == len(expected) and all(map(same, got, expected))
    if isinstance(expected, float):
        return type(got) is float and math.copysign(1.0, got) == math.copysign(1.0, expected) and got == expected
    return type(got) is type(expected) and got == expected


def given(excel: Any, name: str, arguments: list[Any]) -> list[Any]:
    """Tables as ranges, the rest as they are: Excel hands over ranges, and values of formulas."""
    found = []
    for place, (parameter, argument) in enumerate(zip(functions[name].parameters, arguments, strict=False)):
        is_range = parameter.is_table and isinstance(argument, list)
        found.append(excel.range(excel.put(f"{chr(65 + place)}A1", argument)) if is_range else argument)
    return found


def agree(excel: Any, name: str, arguments: list[Any]) -> Any:
    got = excel.run(name, *given(excel, name, arguments))
    expected = cells.call(name, arguments)
    assert same(got, expected), f"{name}{arguments}: Excel {got!r}, registry {expected!r}"
    return got


def changed(name: str, place: int, value: Any) -> list[Any]:
    arguments = list(registry_cases.example(name))
    arguments[place] = value
    return arguments


def of_kind(name: str, wanted: str) -> list[tuple[int, Parameter]]:
    return [(i, p) for i, p in enumerate(functions[name].parameters) if getattr(p, wanted)]


@pytest.mark.parametrize("name", NAMES)
def test_valid_arguments(excel: Any, name: str) -> None:
    for row in registry_cases.perturbed(name, 3):
        agree(excel, name, row)
    assert not isinstance(agree(excel, name, registry_cases.example(name)), CellError)


@pytest.mark.parametrize("name", NAMES)
def test_blank_and_left_out(excel: Any, name: str) -> None:
    import pyopenvba.interpreter as vba

    arguments = registry_cases.example(name)
    for place, parameter in enumerate(functions[name].parameters):
        blank = changed(name, place, None)
        answer = agree(excel, name, blank)
        left_out = given(excel, name, blank)
        left_out[place] = vba.MISSING
        assert same(excel.run(name, *left_out), answer), parameter.name
        empty_cell = given(excel, name, blank)
        empty_cell[place] = excel.range("ZZ99")
        assert same(excel.run(name, *empty_cell), answer), parameter.name
        assert (answer is CellError.NA) or not parameter.required
    required = sum(p.required for p in functions[name].parameters)
    agree(excel, name, arguments[:required])
    assert excel.run(name) is CellError.NA


@pytest.mark.parametrize("name", NAMES)
def test_text_and_unknown_words(excel: Any, name: str) -> None:
    for place, parameter in enumerate(functions[name].parameters):
        wrong = [["x"], ["y"]] if parameter.is_table else "no such word"
        assert agree(excel, name, changed(name, place, wrong)) is CellError.VALUE
        assert agree(excel, name, changed(name, place, "#N/A")) is CellError.VALUE, "text is no error"


@pytest.mark.parametrize("name", NAMES)
def test_errors_come_out_unchanged(excel: Any, name: str) -> None:
    for place, parameter in enumerate(functions[name].parameters):
        for error in PASSED:
            wrong = [[error, error]] if parameter.is_table else error
            assert agree(excel, name, changed(name, place, wrong)) is error


@pytest.mark.parametrize("name", NAMES)
def test_numbers_out_of_bounds_and_logicals(excel: Any, name: str) -> None:
    for place, _ in of_kind(name, "is_number"):
        for value in (-1e7, 1e15, 0.0, True):
            agree(excel, name, changed(name, place, value))


@pytest.mark.parametrize("name", NAMES)
def test_ranges_spill(excel: Any, name: str) -> None:
    """Columns of three cells for the numbers, with a blank and an error among them; one row; one cell."""
    numbers = registry_cases.numbers(name)
    rows = registry_cases.perturbed(name, 3)
    if not numbers or functions[name].column:
        grids: list[Any] = [[[argument]] if place in numbers else argument for place, argument in enumerate(rows[0])]
        expected = cells.call(name, rows[0])
    else:
        grids = [[[row[i]] for row in rows] if i in numbers else a for i, a in enumerate(rows[0])]
        grids[numbers[0]][1], grids[numbers[-1]][2] = [None], [CellError.REF]
        expected = cells.call(name, grids)
        assert isinstance(expected, list)
    ranges = [
        excel.range(excel.put(f"{chr(65 + place)}B1", grid)) if isinstance(grid, list) else grid
        for place, grid in enumerate(grids)
    ]
    assert same(excel.run(name, *ranges), expected)


def test_one_row_spills_to_the_right(excel: Any) -> None:
    row = [[10.0, 12.0, None, 14.0]]
    answer = excel.run("LP_SIGMA", excel.range(excel.put("A200", row)), 5.0, 1.0)
    assert same(answer, cells.call("LP_SIGMA", [row, 5.0, 1.0]))
    assert answer[0][2] is CellError.NA


def test_arrays_of_formulas_are_taken_like_ranges(excel: Any) -> None:
    column = [[10.0], [12.0], [CellError.NUM]]
    assert same(excel.run("LP_SIGMA", column, 5.0, 1.0), cells.call("LP_SIGMA", [column, 5.0, 1.0]))


def test_a_range_with_several_areas_is_refused_and_why_tells(excel: Any) -> None:
    """Only its first area would be read, silently."""
    excel.put("A300", [[10.0], [12.0], [13.0]])
    areas = excel.range("A300,A302")
    assert excel.run("LP_SIGMA", areas, 5.0, 1.0) is CellError.VALUE
    assert "several areas" in excel.run("LP_WHY", "LP_SIGMA", areas, 5.0, 1.0)


@pytest.mark.parametrize("name", NAMES)
def test_why(excel: Any, name: str) -> None:
    good = registry_cases.example(name)
    calls = [good, good[:1], good + [1.0] * 20]
    calls += [changed(name, place, "x") for place, _ in of_kind(name, "is_number")[:1]]
    for arguments in calls:
        expected = cells.call("LP_WHY", [name, *arguments])
        tables = given(excel, name, arguments) + arguments[len(functions[name].parameters) :]
        assert excel.run("LP_WHY", name, *tables) == expected
    assert excel.run("LP_WHY", name.lower().replace("_", ".", 1), *given(excel, name, good)) == cells.call(
        "LP_WHY", [name, *good]
    )


def test_why_of_ranges_unknown_names_and_errors(excel: Any) -> None:
    column = [[10.0], [None], [4.0]]
    grid = excel.range(excel.put("A400", column))
    assert excel.run("LP_WHY", "LP_SIGMA", grid, 5.0, 1.0) == cells.call("LP_WHY", ["LP_SIGMA", column, 5.0, 1.0])
    assert excel.run("LP_WHY", "no function") is CellError.VALUE
    assert excel.run("LP_WHY", None) is CellError.NA
    assert excel.run("LP_WHY", CellError.REF, 1.0) is CellError.REF


def test_ten_thousand_rows_in_one_call(excel: Any) -> None:
    rows = 10_000
    values = [[8.0 + row * 1e-3, 5.0, 1.0 + row * 1e-5] for row in range(rows)]
    values[4321][1] = None
    excel.put("A1001", values)
    columns = [excel.range(f"{letter}1001:{letter}{1000 + rows}") for letter in "ABC"]
    before = excel.library.calls
    answer = excel.run("LP_SIGMA", *columns)
    assert excel.library.calls == before + 1
    one_by_one = [[cells.call("LP_SIGMA", row)] for row in values]
    assert same(answer, one_by_one)
    assert answer[4321] == [CellError.NA]
    assert len({cell for [cell] in answer}) > 9_000
