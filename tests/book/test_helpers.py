"""The helper functions by themselves: units, text, arrays, lookups, each with its errors."""

from __future__ import annotations

import inspect
import math
import random
from typing import Any

import pytest

from lowpoint.book.cures import prepare
from lowpoint.book.curing import Blocked, cure, instance
from lowpoint.book.engine import Engine, Unrefreshable
from lowpoint.book.helpers import HELPERS, broadcast
from lowpoint.book.lifting import error_if, lift, register
from lowpoint.book.unitwords import convert
from lowpoint.problems import CellError

_MARK = Unrefreshable("was not refreshed", "fed")


def _call(name: str, *arguments: Any) -> Any:
    return HELPERS[name](*arguments)


@pytest.mark.parametrize(
    "given, wanted, factor, digits",
    [  # NIST SP 811 (2008), appendix B.8, with the digits printed there; exact where marked so there
        ("psi", "Pa", 6.894757e3, 7), ("atm", "Pa", 1.01325e5, 15), ("mmHg", "Pa", 1.333224e2, 7),
        ("Torr", "Pa", 1.333224e2, 7), ("gal", "m3", 3.785412e-3, 7), ("uk_gal", "m3", 4.54609e-3, 15),
        ("barrel", "m3", 1.589873e-1, 7), ("bushel", "m3", 3.523907e-2, 7), ("oz", "m3", 2.957353e-5, 7),
        ("ft3", "m3", 2.831685e-2, 7), ("in^3", "m^3", 1.638706e-5, 7), ("lbm", "kg", 4.535924e-1, 7),
        ("ozm", "kg", 2.834952e-2, 7), ("sg", "kg", 1.459390e1, 7), ("grain", "mg", 6.479891e1, 15),
        ("uk_ton", "kg", 1.016047e3, 7), ("lbf", "N", 4.448222, 7), ("dyn", "N", 1e-5, 15), ("BTU", "J", 1.055056e3, 7),
        ("cal", "J", 4.1868, 15), ("c", "J", 4.184, 15), ("flb", "J", 1.355818, 7), ("HP", "W", 7.456999e2, 7),
        ("PS", "W", 7.354988e2, 7), ("Wh", "J", 3.6e3, 15), ("Nmi", "m", 1852.0, 15), ("survey_mi", "m", 1609.347, 7),
        ("mi", "m", 1609.344, 15), ("us_acre", "m2", 4046.873, 7), ("kn", "m/s", 5.144444e-1, 7),
        ("mph", "m/s", 4.4704e-1, 15), ("hr", "s", 3600.0, 15), ("ga", "T", 1e-4, 15), ("Rank", "K", 5 / 9, 15),
    ],
)  # fmt: skip
def test_units_have_their_published_factors(given: str, wanted: str, factor: float, digits: int) -> None:
    found = convert(1.0, given, wanted)
    assert found is not None
    assert math.isclose(found, factor, rel_tol=0.5000001 * 10 ** (1 - digits) if digits < 15 else 1e-14)


def test_temperatures_prefixes_and_words_that_do_not_fit() -> None:
    # NIST SP 811, B.8: t/degC = (t/degF - 32)/1.8; the freezing point of water is 273.15 K.
    assert convert(212.0, "F", "C") == pytest.approx(100.0, abs=1e-12)
    assert convert(0.0, "C", "K") == 273.15
    assert convert(80.0, "Reau", "C") == pytest.approx(100.0, abs=1e-12)
    assert convert(1.0, "kPa", "Pa") == 1000.0
    assert convert(1.0, "MW", "kW") == pytest.approx(1000.0)
    assert convert(1.0, "cm2", "m2") == pytest.approx(1e-4)  # a prefix is squared with its unit
    assert convert(1.0, "kft", "m") is None  # no prefix before units of the foot
    assert convert(1.0, "bar", "Pa") is None  # OpenFormula's table has no bar
    assert convert(1.0, "m", "kg") is None


def test_errors_go_through_helpers_of_single_values() -> None:
    for name in ("UPPER", "INT", "TRIM", "TEXT15", "CEILING", "CONVERT", "CLOCK"):
        extra = {"CEILING": (1.0,), "CONVERT": ("m", "ft")}.get(name, ())
        assert _call(name, CellError.DIV0, *extra) is CellError.DIV0
        assert _call(name, _MARK, *extra) is _MARK
        assert _call(name, [[CellError.NA], [None]], *extra)[0] == [CellError.NA]


def test_arrays_are_matched_cell_by_cell_and_padded_with_na() -> None:
    # OASIS ODF 1.3 part 4, 3.3 (array calculation): one row or column is repeated, what is missing is #N/A.
    assert broadcast([[[1.0], [2.0]], 5.0]) == [[(1.0, 5.0)], [(2.0, 5.0)]]
    assert broadcast([[[1.0, 2.0]], [[3.0], [4.0]]]) == [[(1.0, 3.0), (2.0, 3.0)], [(1.0, 4.0), (2.0, 4.0)]]
    assert broadcast([[[1.0], [2.0], [3.0]], [[1.0], [2.0]]])[2] == [(3.0, CellError.NA)]


def test_matrices() -> None:
    # By hand: the inverse of [[4, 7], [2, 6]] is [[6, -7], [-2, 4]] / 10, its determinant 10.
    given = [[4.0, 7.0], [2.0, 6.0]]
    assert _call("MDETERM", given) == pytest.approx(10.0)
    assert _call("MINVERSE", given) == [pytest.approx([0.6, -0.7]), pytest.approx([-0.2, 0.4])]
    assert _call("MINVERSE", [[1.0, 2.0], [2.0, 4.0]]) is CellError.NUM  # OpenFormula: a singular matrix has none
    assert _call("MDETERM", [[0.0, 1.0], [1.0, 0.0]]) == -1.0  # rows change places once
    assert _call("MDETERM", [[1.0, 2.0]]) is CellError.VALUE
    assert _call("MMULT", given, [[1.0]]) is CellError.VALUE
    assert _call("MMULT", [["x"]], [[1.0]]) is CellError.VALUE
    assert _call("MMULT", [[1.0]], [[CellError.NA]]) is CellError.NA


def test_arrays_that_cannot_be_made() -> None:
    # Microsoft function reference (from memory): EXPAND to less is #VALUE!, WRAPROWS by 0 #NUM!, nothing left #CALC!.
    assert _call("EXPAND", [[1.0], [2.0]], 1.0, 0.0) is CellError.VALUE
    assert _call("WRAPROWS", [[1.0, 2.0]], 0.0) is CellError.NUM
    assert _call("WRAPCOLS", [[1.0, 2.0], [3.0, 4.0]], 2.0) is CellError.VALUE
    assert _call("UNIQUE", [["a"], ["A"]], False, True) is CellError.CALC
    assert _call("FILTER", [[1.0], [2.0]], [[0.0], [0.0]]) is CellError.CALC
    assert _call("FILTER", [[1.0], [2.0]], [[1.0], [CellError.NA]]) is CellError.NA
    assert _call("FILTER", [[1.0], [2.0]], [[1.0, 0.0, 1.0]]) is CellError.VALUE
    assert _call("SORT", [[1.0], [2.0]], 3.0) is CellError.VALUE
    assert _call("SORT", [[1.0], [2.0]], 1.0, 2.0) is CellError.VALUE
    assert _call("SORTBY", [[1.0], [2.0]], [[1.0], [2.0], [3.0]]) is CellError.VALUE


def test_blanks_sort_last_both_ways_and_equals_keep_their_order() -> None:
    # Common practice.
    assert _call("SORT", [[None], [2.0], [1.0]], 1.0, 1.0) == [[1.0], [2.0], [None]]
    assert _call("SORT", [[None], [2.0], [1.0]], 1.0, -1.0) == [[2.0], [1.0], [None]]
    assert _call("SORT", [["b", 1.0], ["a", 2.0], ["B", 3.0]], 1.0) == [["a", 2.0], ["b", 1.0], ["B", 3.0]]


def test_the_nearest_key_is_found_past_blanks_errors_and_other_types() -> None:
    # Common practice: a number above all others finds the last number, "zzz" the last text.
    keys = [[3.0], [None], ["x"], [CellError.NA], [1.0], ["y"], [None]]
    assert _call("MATCH", 1e9, keys) == 5.0
    assert _call("MATCH", "zzz", keys) == 6.0
    assert _call("MATCH", 0.5, [[1.0], [2.0]]) is CellError.NA
    assert _call("LOOKUP", 2.5, [[1.0, 2.0, 3.0], ["a", "b", "c"]]) == "b"  # OpenFormula: the longer side is searched
    assert _call("LOOKUP", 2.5, [[1.0, "a"], [2.0, "b"], [3.0, "c"]]) == "b"
    assert _call("VLOOKUP", CellError.REF, [[1.0, 2.0]], 2.0) is CellError.REF
    assert _call("HLOOKUP", 9.0, [[3.0, 1.0], ["a", "b"]], 2.0) == "b"


def test_texts_with_times_and_numbers() -> None:
    # By hand: 13:45 is 49500 s of 86400 s.
    assert _call("CLOCK", "13:45") == 49500 / 86400
    assert _call("CLOCK", "15 March 2024 1:45 pm") == 49500 / 86400
    assert _call("CLOCK", "12:00 AM") == 0.0
    assert _call("CLOCK", 0.25) == 0.25
    for text in ("13:60", "13 PM", "noon", "12"):
        assert _call("CLOCK", text) is CellError.VALUE, text
    wanted = {"(5)": -5.0, "$1,000": 1000.0, "-1,234.5": -1234.5, "12.5%": 0.125, "1E3": 1000.0, ".5": 0.5}
    for text, number in wanted.items():
        assert _call("VALUE", text) == number, text
    for text in ("1,23", "1,2345", "", "$", "--5", "5 bar", "."):
        assert _call("VALUE", text) is CellError.VALUE, text


def test_numbers_become_text_of_fifteen_digits() -> None:
    # Microsoft support article 78113: 15 significant digits.
    wanted = {
        1 / 3: "0.333333333333333",
        0.1 + 0.2: "0.3",
        2 / 3 * 1e5: "66666.6666666667",
        -1e-5: "-0.00001",
        100.0: "100",
    }
    for number, text in wanted.items():
        assert _call("TEXT15", number) == text
    assert _call("TEXT15", True) == "TRUE"
    assert _call("TEXT15", None) == ""


def test_errors_that_meet_criteria_are_found() -> None:
    cells, keys = [[1.0], [CellError.NA], [CellError.DIV0]], [["a"], ["b"], ["ab"]]
    assert error_if(cells, keys, "a") == 0.0
    assert error_if(cells, keys, "a*") is CellError.DIV0
    assert error_if(cells, keys, "b", [[1.0], [5.0], [9.0]], ">4") is CellError.NA
    assert error_if(cells, keys, "b", [[1.0], [5.0], [9.0]], ">5") == 0.0
    assert error_if([[1.0]], [["a"]], "a") == 0.0


def test_lifting_asks_for_each_distinct_value_once_and_tells_types_apart() -> None:
    assert lift("LEN", [["abc"], ["abc"], [12.5], [True], [None]]) == [[3.0], [3.0], [4.0], [4.0], [0.0]]
    assert lift("ISNUMBER", [[1.0, True, "1"]]) == [[True, False, False]]
    assert lift("ISNUMBER", [[True, 1.0, "1"]]) == [[False, True, False]]
    assert lift("VLOOKUP", [[1.0], [2.0]], [[1.0, "a"], [2.0, "b"]], 2.0, False) == [["a"], ["b"]]


def test_a_cure_serves_all_rows_and_says_what_it_meets() -> None:
    done = cure(["A", 0, "&B", -1], [5, 6, 7])
    assert done.changed
    assert done.met == ("number-text-15-digits",)
    assert instance(done.parts, 9) == cure(["A9&B8"], [9]).parts[0]
    plain = cure(["A", 0, "*2"], [5, 6])
    assert not plain.changed
    assert plain.parts == ["A", 0, "*2"]
    with pytest.raises(Blocked, match="LAMBDA") as stop:
        cure(["LAMBDA(x,x)(A", 0, ")"], [5, 6])
    assert stop.value.met == ("lambda",)


_JUNK: list[Any] = [0.0, 1.0, -1.0, 2.5, 1e300, -1e300, 1e9, "", "x", "TRUE", "12", "1,234", "13:45", True, False, None]
_JUNK += [CellError.NA, _MARK, "é"]
# How many arguments a helper takes; those that only get what the rules write (a literal number) are not tried.
_COUNTS = {"SORTBY": (2, 5), "TEXTBEFORE": (2, 6), "TEXTAFTER": (2, 6)}
_WRITTEN = {"SCIENTIFIC", "AGGREGATE"}


def _cells(value: Any) -> list[Any]:
    return [cell for line in value for cell in line] if isinstance(value, list) else [value]


@pytest.mark.parametrize("name", sorted(set(HELPERS) - _WRITTEN))
def test_no_argument_makes_a_helper_fail(name: str) -> None:
    rolls = random.Random(name)
    parameters = inspect.signature(HELPERS[name]).parameters.values()
    needed = sum(p.default is p.empty and p.kind is not p.VAR_POSITIONAL for p in parameters)
    least, most = _COUNTS.get(name, (max(1, needed), len(parameters) + 2 * (needed < len(parameters) == 1)))

    def argument() -> Any:
        if rolls.random() < 0.6:
            return rolls.choice(_JUNK)
        wide = rolls.randint(1, 3)
        return [[rolls.choice(_JUNK) for _ in range(wide)] for _ in range(rolls.randint(1, 3))]

    for _ in range(300):
        given = [argument() for _ in range(rolls.randint(least, most))]
        for cell in _cells(_call(name, *given)):
            assert cell is None or isinstance(cell, (float, str, bool, Unrefreshable)), (given, cell)


def test_a_helper_that_fails_costs_only_its_own_cell(monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(value: Any) -> Any:
        raise ValueError(value)

    monkeypatch.setitem(HELPERS, "TRIM", broken)
    engine = Engine.empty("List")
    register(engine)
    engine.set_formulas("List", 1, 1, [[prepare("=TRIM(5)").text, "=1+1"]])
    engine.evaluate()
    failed, fine = engine.values("List", 1, 1, 1, 2)[0]
    assert isinstance(failed, Unrefreshable)
    assert fine == 2.0
