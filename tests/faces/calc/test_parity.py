"""Every function in real Calc gives what :func:`lowpoint.cells.call` gives: the same double, text or error."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import pytest

import parity_cases
import registry_cases
from lowpoint import cells
from lowpoint.faces.calc_addin.signatures import signatures
from lowpoint.problems import CellError
from lowpoint.registry import functions

NAMES = registry_cases.names()
ROOM = 16  # columns for the arguments of a call; the formula stands behind them
TABLES = 20  # the first column of the tables
OMITTED = cells.OMITTED

# A single blank cell reaches an add-in of Calc as 0. Where 0 is a possible value the blank counts as 0; in all other
# places an answer is refused (#NUM! where another program says #N/A), or 0 stands for omitted. The wizard says so.
BLANK_REQUIRED_COUNTS_AS_ZERO = {"t", "rise", "elevation", "value", "size_exponent", "head_exponent"}


@dataclass(frozen=True)
class Call:
    """One cell of the test: a function, its arguments, and what the registry says."""

    name: str
    arguments: list[Any]
    expected: Any

    @property
    def label(self) -> str:
        return f"{self.name}({', '.join(map(repr, self.arguments))})"


def column_name(index: int) -> str:
    letters = ""
    while index >= 0:
        letters, index = chr(65 + index % 26) + letters, index // 26 - 1
    return letters


class Sheet:
    """Lays calls out in a new book: values in cells, tables in columns of their own, formulas behind."""

    def __init__(self, office: Any) -> None:
        self.office, self.book = office, office.new()
        self._tables: dict[str, str] = {}
        self._next = TABLES

    def run(self, calls: list[Call]) -> list[Any]:
        values: list[list[Any]] = []
        formulas: list[list[str]] = []
        errors: list[tuple[str, CellError]] = []
        for row, call in enumerate(calls, start=1):
            shown, words = [None] * ROOM, []
            for place, argument in enumerate(call.arguments):
                address = f"{column_name(place)}{row}"
                words.append("" if argument is OMITTED else self._table(argument) or address)
                if isinstance(argument, CellError):
                    errors.append((address, argument))
                elif not isinstance(argument, list) and argument is not OMITTED:
                    shown[place] = argument
            values.append(shown)
            formulas.append([f"={call.name}({';'.join(words)})"])
        last, place = column_name(ROOM - 1), column_name(ROOM)
        self.office.put_values(self.book, f"A1:{last}{len(calls)}", values)
        for address, error in errors:
            self.office.put(self.book, address, [[{"#N/A": "=NA()", "#DIV/0!": "=1/0"}[error]]])
        self.office.put(self.book, f"{place}1:{place}{len(calls)}", formulas)
        shown = [row[0] for row in self.office.cells(self.book, f"{place}1:{place}{len(calls)}")]
        self.office.close(self.book)
        return shown

    def _table(self, argument: Any) -> str:
        """The address of a table, written down where it is new."""
        if not isinstance(argument, list):
            return ""
        rows = [row if isinstance(row, list) else [row] for row in argument]
        if repr(rows) not in self._tables:
            first, last = column_name(self._next), column_name(self._next + len(rows[0]) - 1)
            self._next += len(rows[0])
            self._tables[repr(rows)] = f"${first}$1:${last}${len(rows)}"
            self.office.put_values(self.book, self._tables[repr(rows)].replace("$", ""), rows)
        return self._tables[repr(rows)]


def compare(office: Any, calls: list[Call]) -> None:
    shown = Sheet(office).run(calls)
    differ = [
        f"{call.label}: Calc {got!r}, registry {call.expected!r}"
        for call, got in zip(calls, shown, strict=True)
        if not same(got, call.expected)
    ]
    assert not differ, f"{len(differ)} of {len(calls)}:\n" + "\n".join(differ[:20])
    assert len(shown) == len(calls) > 0


def same(got: Any, expected: Any) -> bool:
    if isinstance(expected, list):
        expected = expected[0][0]  # a cell that is no array shows the first of a grid
    if isinstance(expected, str):
        return bool(got == str(expected))
    return isinstance(got, float) and got == expected


def changed(name: str, place: int, value: Any) -> list[Any]:
    arguments = list(registry_cases.example(name))
    arguments[place] = value
    return arguments


def scalar_places(name: str) -> list[int]:
    return [place for place, p in enumerate(functions[name].parameters) if not p.is_table]


def test_every_function_is_tried() -> None:
    assert set(NAMES) | {"LP_WHY"} == set(functions)


def test_valid_arguments(office: Any) -> None:
    calls = [Call(name, row, cells.call(name, row)) for name in NAMES for row in registry_cases.perturbed(name, 4)]
    assert not any(isinstance(call.expected, CellError) for call in calls[::4])
    compare(office, calls)


def test_required_arguments_alone(office: Any) -> None:
    calls = []
    for name in NAMES:
        required = [
            a for a, p in zip(registry_cases.example(name), functions[name].parameters, strict=True) if p.required
        ]
        calls.append(Call(name, required, cells.call(name, required)))
    compare(office, calls)


def test_arguments_left_out_in_the_middle(office: Any) -> None:
    calls = []
    for name in NAMES:
        for place in range(len(functions[name].parameters) - 1):
            arguments = changed(name, place, OMITTED)
            calls.append(Call(name, arguments, cells.call(name, arguments)))
    compare(office, calls)


def test_blank_cells(office: Any) -> None:
    """A blank arrives as 0: refused like any impossible 0, or omitted where 0 stands for omitted."""
    calls, passing = [], set()
    for name in NAMES:
        for place in scalar_places(name):
            as_zero = cells.call(name, changed(name, place, 0.0))
            calls.append(Call(name, changed(name, place, None), as_zero))
            parameter = functions[name].parameters[place]
            if parameter.required and not isinstance(as_zero, CellError):
                passing.add(parameter.name)
    compare(office, calls)
    assert passing == BLANK_REQUIRED_COUNTS_AS_ZERO
    told = {
        argument.name for one in signatures() for argument in one.arguments if "blank cell counts as 0" in argument.text
    }
    assert told >= passing | {"travel", "salinity"}


def test_a_blank_salinity_is_fresh_water(office: Any) -> None:
    """The one optional argument for which 0 is a value other than its default: left out it is 35 g/kg."""
    name, blank, left_out = "LP_VAPOUR_PRESSURE", ["sea water", 40.0, None], ["sea water", 40.0]
    fresh, salt = cells.call(name, ["sea water", 40.0, 0.0]), cells.call(name, left_out)
    assert fresh > salt
    compare(office, [Call(name, blank, fresh), Call(name, left_out, salt)])


def test_text_where_a_number_belongs_and_unknown_words(office: Any) -> None:
    calls = [
        Call(name, arguments, cells.call(name, arguments))
        for name in NAMES
        for arguments in (changed(name, place, "no such thing") for place in scalar_places(name))
    ]
    assert {str(call.expected) for call in calls} == {"#VALUE!"}
    compare(office, calls)


@pytest.mark.parametrize("error", [CellError.NA, CellError.DIV0])
def test_errors_come_out_unchanged(office: Any, error: CellError) -> None:
    calls = [
        Call(name, arguments, cells.call(name, arguments))
        for name in NAMES
        for arguments in (changed(name, place, error) for place in scalar_places(name))
    ]
    assert {call.expected for call in calls} == {error}
    compare(office, calls)


def of_calc(name: str) -> list[list[Any]]:
    """The argument sets of the parity test that a sheet of Calc can hold: optional blanks are left out."""
    rows = []
    for arguments in parity_cases.argument_sets(name):
        given = [
            OMITTED if argument is None and not parameter.required else argument
            for argument, parameter in zip(arguments, functions[name].parameters, strict=True)
        ]
        # A needed blank, an empty text and a logical cannot be told from 0 there; #NUM! is no word of a cell's formula.
        unlike = any(a is None or a is True or a == "" or a is CellError.NUM for a in given if not isinstance(a, list))
        if not unlike:
            rows.append(given)
    return rows


@pytest.mark.parametrize("name", NAMES)
def test_several_hundred_argument_sets(office: Any, name: str) -> None:
    """The sets of the parity test over Python, recalculated books and Excel, in real Calc."""
    rows = of_calc(name)
    assert len(rows) >= 200
    compare(office, [Call(name, row, cells.call(name, row)) for row in rows])


def test_numbers_out_of_bounds(office: Any) -> None:
    calls = [
        Call(name, arguments, cells.call(name, arguments))
        for name in NAMES
        for place in registry_cases.numbers(name)
        for arguments in (changed(name, place, -1e7), changed(name, place, 1e15))
    ]
    compare(office, calls)


def test_ranges_broadcast_and_spill(office: Any) -> None:
    """Each function with columns of three cells for its numbers, as an array; the middle one of the first is blank."""
    book, top, differ, tried = office.new(), 1, [], 0
    for name in NAMES:
        function = functions[name]
        if function.column or any(p.is_table for p in function.parameters) or not registry_cases.numbers(name):
            continue
        rows = registry_cases.perturbed(name, 3)
        first = registry_cases.numbers(name)[0]
        grids = [[[row[place]] for row in rows] for place in range(len(rows[0]))]
        grids[first][1] = [None]
        expected = cells.call(name, grids)
        width, bottom = len(grids), top + 2
        values = [[grid[i][0] for grid in grids] for i in range(3)]
        office.put_values(book, f"A{top}:{column_name(width - 1)}{bottom}", values)
        ranges = ";".join(f"{column_name(i)}{top}:{column_name(i)}{bottom}" for i in range(width))
        office.array(book, f"R{top}:R{bottom}", f"={name}({ranges})")
        shown = office.cells(book, f"R{top}:R{bottom}")
        tried += 1
        if not all(same(got[0], want[0]) for got, want in zip(shown, expected, strict=True)):
            differ.append(f"{name}: Calc {shown}, registry {expected}")
        top += 4
    office.close(book)
    assert not differ, "\n".join(differ)
    assert tried > 60


def test_a_table_read_at_a_column_of_openings(office: Any) -> None:
    travels, values = [[10.0], [50.0], [100.0]], [[9.0], [7.0], [4.0]]
    openings = [[20.0], [None], [70.0], [120.0]]
    book = office.new()
    office.put_values(book, "A1:B3", [[a[0], b[0]] for a, b in zip(travels, values, strict=True)])
    office.put_values(book, "C1:C4", openings)
    office.array(book, "D1:D4", "=LP_AT_TRAVEL(C1:C4;A1:A3;B1:B3)")
    expected = cells.call("LP_AT_TRAVEL", [openings, travels, values])
    assert office.cells(book, "D1:D4") == [[x if isinstance(x, float) else str(x)] for [x] in expected]
    office.close(book)


def test_a_function_that_gives_a_column(office: Any) -> None:
    book = office.new()
    office.array(book, "A1:A5", "=LP_STAGE_PRESSURES(20;5;1;3)")
    office.put(book, "B1", [["=LP_STAGE_PRESSURES(20;5;1;3)"]])
    expected = [row[0] for row in cells.call("LP_STAGE_PRESSURES", [20.0, 5.0, 1.0, 3.0])]
    # Calc fills what an array does not reach with #N/A.
    assert [row[0] for row in office.cells(book, "A1:A5")] == [*expected, "#N/A"]
    assert office.cells(book, "B1") == [[expected[0]]]
    office.close(book)


def test_an_error_inside_a_range_is_refused_whole(office: Any) -> None:
    """Calc itself refuses such a range before it asks the add-in; no element shows a number."""
    book = office.new()
    office.put(book, "A1:A3", [["10"], ["=NA()"], ["12"]])
    office.array(book, "B1:B3", "=LP_SIGMA(A1:A3;5;1)")
    assert {str(row[0])[:4] for row in office.cells(book, "B1:B3")} == {"Err:"}
    office.close(book)


def test_why_gives_the_reason_of_every_function(office: Any) -> None:
    calls = []
    for name in NAMES:
        good, missing = registry_cases.example(name), registry_cases.example(name)[:1]
        for arguments in (good, missing):
            calls.append(Call("LP_WHY", [name, *arguments], cells.call("LP_WHY", [name, *arguments])))
        if registry_cases.numbers(name):
            text = changed(name, registry_cases.numbers(name)[0], "x")
            calls.append(Call("LP_WHY", [name, *text], cells.call("LP_WHY", [name, *text])))
    calls.append(Call("LP_WHY", ["no function", 1.0], CellError.VALUE))
    compare(office, calls)


def test_why_of_ranges_is_an_array_of_texts(office: Any) -> None:
    book = office.new()
    office.put_values(book, "A1:A3", [[10.0], [None], [4.0]])
    office.array(book, "B1:B3", '=LP_WHY("LP_SIGMA";A1:A3;5;1)')
    expected = cells.call("LP_WHY", ["LP_SIGMA", [[10.0], [None], [4.0]], 5.0, 1.0])
    assert office.cells(book, "B1:B3") == expected
    assert expected[0] == ["ok"]
    office.close(book)
