"""Formula text: tokens, calls, references that move with their row, single values and ranges."""

from __future__ import annotations

import pytest

from lowpoint.book.formula import Formula, read
from lowpoint.book.formulas import (
    OWN_ROW,
    Unreadable,
    calls_in,
    function_name,
    shape_key,
    shifted,
    tokenise,
    written,
)
from lowpoint.book.names import Names, Place
from lowpoint.book.refs import Area, Ref, Row, address, area, column_letters, column_number, quoted
from lowpoint.book.tables import Table, Tables


def _read(text: str, row: int = 5) -> Formula:
    return read(tokenise(text, row), Place("List", row, 6), Names(), Tables())


def _texts(text: str) -> list[tuple[str, str]]:
    return [(token.kind, token.text) for token in tokenise(text)]


@pytest.mark.parametrize(
    "text, kinds",
    [
        ("A1", "ref"), ("$A$1:B2", "ref"), ("A:A", "ref"), ("1:3", "ref"), ("'it''s'!A1", "ref"), ("Sheet1!A1:B2",
         "ref"),
        ("XFD1048576", "ref"), ("XFE1", "name"), ("A1048577", "name"), ("LOG10(", "call"), ("_xlfn.LET(", "call"),
        ("[1]!LP_SIGMA(", "call"), ("'C:\\a b\\x.xlam'!LP_SIGMA(", "call"), ("[1]Sheet1!A1", "away"), ("Jan:Dec!A1",
         "away"),
        ("[0]!pv", "away"), ("Valves[kv]", "table"), ("Valves[[#This Row],[p '[bar']]]", "table"), ("[@p1]", "table"),
        ("1.5E-3", "number"), (".5", "number"), ("TRUE", "name"), ("pv_1.x", "name"), ("\\name", "name"),
        ("{1,2;\"}\",3}", "braces"),
        ("#N/A", "error"), ("#DIV/0!", "error"), ("List!#REF!", "error"), ('"a""b"', "text"), ("<>", "op"), (" \n",
         "blank"),
    ],
)  # fmt: skip
def test_each_word_of_the_grammar(text: str, kinds: str) -> None:
    # Source of the grammar: ISO/IEC 29500-1, 18.17.2.
    assert _texts(text) == [(kinds, text)]


def test_words_beside_each_other() -> None:
    assert [k for k, _ in _texts("-A1%^2&\"x\"<=B$2:C3 D4#")] == [
        "op", "ref", "op", "op", "number", "op", "text", "op", "ref", "blank", "ref", "op",
    ]  # fmt: skip
    assert [k for k, _ in _texts("SUM(A1,(B1))")] == ["call", "ref", "comma", "open", "ref", "close", "close"]


@pytest.mark.parametrize("text", ["~", "A1 ? 2", '"open', "{1,2", "!A1~"])
def test_what_cannot_be_read_says_where(text: str) -> None:
    with pytest.raises(Unreadable, match="cannot be read at"):
        tokenise(text)


def test_calls_and_their_arguments() -> None:
    tokens = tokenise("IF(A1,MAX(B1,),(C1))")
    calls = calls_in(tokens)
    assert [(c.name, len(c.args), c.parent, c.place) for c in calls] == [
        ("IF", 3, None, 0), ("MAX", 2, 0, 1), ("", 1, 0, 2),
    ]  # fmt: skip
    assert calls_in(tokenise("PI( )"))[0].args == []
    assert len(calls_in(tokenise("F(,)"))[0].args) == 2
    with pytest.raises(Unreadable, match="open parenthesis too many"):
        calls_in(tokenise("SUM(A1"))
    with pytest.raises(Unreadable, match="closing parenthesis too many"):
        calls_in(tokenise("A1)"))
    with pytest.raises(Unreadable, match="nested more than 100"):
        calls_in(tokenise("(" * 101 + "1" + ")" * 101))


def test_rows_are_taken_relative_to_the_cell_unless_a_dollar_holds_them() -> None:
    (one,) = tokenise("B7", 5)
    assert one.ref == Ref(None, 2, Row(True, 2), 2, Row(True, 2))
    (held,) = tokenise("B$7:$C9", 5)
    assert held.ref == Ref(None, 2, Row(False, 7), 3, Row(True, 4))
    assert held.ref.at(6) == Area(7, 2, 10, 3)
    assert held.ref.at(1) == Area(5, 2, 7, 3)  # upside down, as a copied formula may be
    assert tokenise(f"A{OWN_ROW}")[0].ref == Ref(None, 1, Row(True, 0), 1, Row(True, 0))
    assert written(held.ref, "Feed water") == ["'Feed water'!B", "7", ":C", 4]


def test_formulas_of_a_column_share_a_shape_when_they_differ_by_their_row() -> None:
    assert shape_key(tokenise("A5*B$2", 5)) == shape_key(tokenise("A9*B$2", 9))
    assert shape_key(tokenise("A5*B2", 5)) != shape_key(tokenise("A9*B2", 9))


def test_a_shared_formula_moves_its_loose_columns() -> None:
    moved = list(shifted(tokenise("A5+$A5+SUM(B:B)+1:1", 5), 2))
    refs = [token.ref for token in moved if token.ref]
    assert [(ref.c1, ref.c2) for ref in refs] == [(3, 3), (1, 1), (4, 4), (1, 16384)]
    assert [token.text for token in shifted(tokenise("A1", 1), -1)] == ["#REF!"]


@pytest.mark.parametrize(
    "text, single",
    [
        ("A1+B1*2", True), ("SUM(A1:A9)", True), ("A1:A9", False), ("A1:A9*2", False), ("SUM(A1:A9*2)", False),
        ("SUMPRODUCT(A1:A9*B1:B9)", True), ("IF(A1,B1,C1)", True), ("IF(A1,B1:B2,1)", False), ("INDEX(A1:A9,3)", True),
        ("INDEX(A1:C9,0,1)", False), ("INDEX(A1:A9)", False), ("VLOOKUP(A1,B1:C9,2)", True),
        ("VLOOKUP(A1:A2,B1:C9,2)", False),
        ("_xlfn.XLOOKUP(A1,B1:B9,C1:C9)", True), ("_xlfn.XLOOKUP(A1,B1:B9,C1:D9)", False), ("FILTER(A1:A9,B1:B9)",
         False),
        ("_xlfn.UNIQUE(A1:A9)", False), ("{1,2}", False), ("A1#", False), ("@A1:A9", False), ("_xlfn.SINGLE(A1:A9)",
         False),
        ("_xlfn.SINGLE(A1)", True), ("(A1)", True), ("(A1,B1)", False), ("LARGE(A1:A9,2)", True),
        ("LARGE(A1:A9,A1:A2)", False),
        ("COUNTIF(A1:A9,\">1\")", True), ("MYSTERY(A1)", False), ("A1:B2 B1:C2", False), ("TRUE", True),
    ],
)  # fmt: skip
def test_whether_a_formula_surely_gives_one_value(text: str, single: bool) -> None:
    formula = _read(text)
    assert formula.scalar((0, len(formula.tokens))) is single


@pytest.mark.parametrize(
    "text, marked",
    [
        ("A1:A9*2", ["A1:A9"]), ("SUM(A1:A9)", []), ("SUM(A1:A9*2)", ["A1:A9"]), ("ROUND(A1:A9,0)", ["A1:A9"]),
        ("VLOOKUP(A1:A9,B1:C9,2)", ["A1:A9"]), ("IF(A1:A9>1,B1:B9,C1:C9)", ["A1:A9", "B1:B9", "C1:C9"]),
        ("SUM(IF(A1,B1:B9,C1))", []), ("LP_SIGMA(A1:A9,1,0)", []), ("A1:INDEX(B1:B9,2)", []), ("@A1:A9", []),
        ("SUMPRODUCT(ROUND(A1:A9,0))", []), ("SUM(A1:A9 A2:B2)", []), ("MATCH(1,A1:A9,0)", []),
    ],
)  # fmt: skip
def test_where_a_plain_formula_means_the_cell_of_its_own_row(text: str, marked: list[str]) -> None:
    formula = _read(text)
    assert [formula.tokens[i].text for i in formula.single_ranges()] == marked


def test_what_belongs_elsewhere_is_refused() -> None:
    with pytest.raises(Unreadable, match="belongs to another workbook or add-in"):
        _read("[2]!OTHER(A1)")
    assert _read("  LP_SIGMA(A1,B1,C1) ").lp == {0: "LP_SIGMA"}
    assert _read("SUM(LP_FF(1,2),MAX(1))").functions == {"SUM", "MAX"}
    assert _read("INDIRECT(A1)").dynamic
    assert function_name("_xlfn._xlws.Sort") == "SORT"


def test_addresses_and_sheet_names() -> None:
    for number, letters in ((1, "A"), (26, "Z"), (27, "AA"), (702, "ZZ"), (703, "AAA"), (16384, "XFD")):
        assert column_letters(number) == letters
        assert column_number(letters) == column_number(letters.lower()) == number
    assert address(9, 28) == "AB9"
    assert area("B9:A2") == Area(2, 1, 9, 2)
    assert area("$C$4") == Area(4, 3, 4, 3)
    assert area("A0") is area("A1048577") is area("XFE1") is area("List!A1") is None
    names = {
        "List": "List",
        "Feed water": "'Feed water'",
        "it's": "'it''s'",
        "A1": "'A1'",
        "R1C1": "'R1C1'",
        "2024": "'2024'",
    }
    assert {name: quoted(name) for name in names} == names


TABLE = Table("Valves", "List", Area(3, 2, 8, 4), 1, 1, ("p1", "p [bar]", "line\nbreak"))


@pytest.mark.parametrize(
    "text, place, wanted",
    [
        ("Valves[p1]", 5, "B4:B7"), ("valves[P1]", 5, "B4:B7"), ("Valves", 5, "B4:D7"), ("Valves[]", 5, "B4:D7"),
        ("Valves[#All]", 5, "B3:D8"), ("Valves[[#Headers],[p1]]", 5, "B3"), ("Valves[[#Totals],[p1]]", 5, "B8"),
        ("Valves[@p1]", 5, "B5"), ("Valves[[#This Row],[p1]]", 6, "B6"), ("[@p1]", 6, "B6"), ("[[#This Row],p1]", 6,
         "B6"),
        ("Valves[p '[bar']]", 5, "C4:C7"), ("Valves[[p1]:[p '[bar']]]", 5, "B4:C7"),
        ("Valves[[#Data],[#Totals],[p1]]", 5, "B4:B8"),
        ("Valves[@[p1]:[line\nbreak]]", 5, "B5:D5"), ("Valves[ [#Headers] , [p1] ]", 5, "B3"), ("Valves[@]", 5,
         "B5:D5"),
    ],
)  # fmt: skip
def test_structured_references_become_plain_ones(text: str, place: int, wanted: str) -> None:
    # Source: ISO/IEC 29500-1, 18.17.2.2 (structured references).
    (token,) = Tables([TABLE]).expand(tokenise(text, place), Place("List", place, 3))
    assert token.ref is not None
    assert token.ref.at(place) == area(wanted)
    assert token.ref.sheet is None
    if "[@" not in text and "#This" not in text:
        outside = Tables([TABLE]).expand(tokenise(text, 50), Place("Other", 50, 3))
        assert outside[0].ref is not None
        assert outside[0].ref.sheet == "List"


@pytest.mark.parametrize(
    "text, row, reason",
    [
        ("Valves[kv]", 5, "has no column 'kv'"), ("Pumps[p1]", 5, "there is no table 'Pumps'"),
        ("Valves[@p1]", 20, "stands outside that table's rows"), ("[p1]", 20, "stands in none"),
    ],
)  # fmt: skip
def test_a_structured_reference_that_leads_nowhere_says_so(text: str, row: int, reason: str) -> None:
    with pytest.raises(Unreadable, match=reason):
        Tables([TABLE]).expand(tokenise(text, row), Place("List", row, 3))


def test_names_are_unfolded_where_they_stand() -> None:
    names = Names(
        {("", "pv"): "List!$C$2", ("list", "pv"): "List!$D$2", ("", "twice"): "2*pv", ("", "left"): "List!A$1", ("",
        "up"): "List!A1048576"},
        {"list": "List", "other": "Other"},
    )  # fmt: skip

    def shown(text: str, place: Place) -> str:
        formula = read(tokenise(text, place.row), place, names, Tables())
        return "".join(
            t.text if t.ref is None else f"{t.ref.sheet}!{address(t.ref.at(place.row).r1, t.ref.c1)}"
            for t in formula.tokens
        )

    assert shown("pv+1", Place("List", 5, 6)) == "List!D2+1"  # the sheet's own name comes first
    assert shown("pv+1", Place("Other", 5, 6)) == "List!C2+1"
    assert shown("twice^2", Place("Other", 5, 6)) == "(2*List!C2)^2"
    assert shown("List!pv", Place("Other", 5, 6)) == "List!D2"
    # Relative ends of a name are stored as seen from A1 (from memory; LibreOffice reads them so).
    assert shown("left", Place("Other", 5, 6)) == "List!F1"
    assert shown("up", Place("Other", 5, 6)) == "List!F4"
    assert shown("_xlfn.LET(pv,3,pv)+pv", Place("Other", 5, 6)) == "_xlfn.LET(pv,3,pv)+List!C2"
