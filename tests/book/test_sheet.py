"""A worksheet part: its formula cells, their groups, and stored values read and written."""

from __future__ import annotations

from typing import Any

import pytest

from book.lists import cells_xml, formula, number
from book.makers import MAIN
from lowpoint.book.graph import Block, components, dependencies
from lowpoint.book.refs import Area
from lowpoint.book.sheet import SheetPart, attribute
from lowpoint.book.stored import new_attributes, old_value, same, strings_of, value_element, with_value
from lowpoint.errors import BookError
from lowpoint.problems import CellError


def _sheet(cells: dict[str, str]) -> SheetPart:
    xml = f'<worksheet xmlns="{MAIN}"><sheetData>{cells_xml(cells)}</sheetData></worksheet>'
    return SheetPart("List", "xl/worksheets/sheet1.xml", xml.encode(), "list.xlsx")


def _groups(sheet: SheetPart) -> list[tuple[str, int, list[int]]]:
    return [(group.text, group.column, group.rows) for group in sheet.distinct]


def test_equal_formulas_down_a_column_are_one_group() -> None:
    cells = {f"E{row}": formula(f"LP_SIGMA(A{row},B{row},$C$1)") for row in (1, 2, 3, 11, 12)}
    cells |= {f"F{row}": formula(f"E{row}*2") for row in (3, 5)} | {"F4": formula("E4*3")}
    groups = _groups(_sheet(cells))
    # In row 1 the number 1 stands elsewhere too ($C$1): read by itself, it still reads the same as the others.
    assert sorted(rows for _, column, rows in groups if column == 5) in ([[1, 2, 3, 11, 12]], [[1], [2, 3, 11, 12]])
    assert [rows for _, column, rows in groups if column == 6] == [[3, 5], [4]]


@pytest.mark.parametrize(
    "texts, together",
    [
        ({2: "A2*10", 10: "A10*10", 3: "A3*10"}, True), ({2: "A2*B$9", 9: "A9*B$9"}, True), ({2: "A1+1", 3: "A2+1",
         4: "A3+1"}, True),
        ({2: "A2*B5", 3: "A3*B5"}, False), ({2: "A2*B5", 3: "A3*B6"}, True), ({2: "LOG10(A2)", 10: "LOG10(A10)"}, True),
        ({2: "SUM(A$2:A2)", 3: "SUM(A$2:A3)"}, True), ({2: '"x2"&A2', 3: '"x3"&A3'}, False), ({2: "'Q 2'!A2",
         3: "'Q 3'!A3"}, False),
        ({2: "A2*2", 3: "A3*2", 4: "A4*2"}, True), ({22: "A22+B2", 23: "A23+B3"}, True),
    ],
)  # fmt: skip
def test_which_formulas_read_the_same_from_their_own_rows(texts: dict[int, str], together: bool) -> None:
    sheet = _sheet({f"E{row}": formula(text) for row, text in texts.items()})
    read = {row: (tuple(t.ref.at(row) for t in g.tokens if t.ref), tuple(t.text for t in g.tokens if not t.ref))
            for g in sheet.distinct for row in g.rows}  # fmt: skip
    for row, text in texts.items():
        alone = _sheet({f"E{row}": formula(text)}).distinct[0]
        areas = tuple(t.ref.at(row) for t in alone.tokens if t.ref)
        assert read[row][0] == areas, "a group must mean what each of its formulas says"
    assert (len(sheet.distinct) == 1) is together or (together and len(sheet.distinct) == 2)


def test_arrays_data_tables_and_shared_formulas_have_their_kinds() -> None:
    sheet = _sheet({
        "A1": '<f t="array" ref="A1:A3">B1:B3*2</f>', "C1": 'cm="1"|<f t="array" ref="C1:C3">B1:B3*2</f>',
        "D1": 'cm="0"|<f t="array" ref="D1">B1</f>', "E1": '<f t="dataTable" ref="E1:E3" r1="B1"/>',
        "F1": '<f t="shared" ref="F1:F2" si="4">B1+1</f>', "F2": '<f t="shared" si="4"/>', "G1": "<f/>",
        "H1": number(1.0),
    })  # fmt: skip
    kinds = {group.place: (group.kind, group.area) for group in sheet.distinct}
    assert kinds == {
        "A1": ("array", Area(1, 1, 3, 1)), "C1": ("dynamic", Area(1, 3, 3, 3)), "D1": ("array", None),
        "E1": ("table", Area(1, 5, 3, 5)), "F1": ("plain", None),
    }  # fmt: skip
    assert sheet.formula_places == {(1, 1), (1, 3), (1, 4), (1, 5), (1, 6), (2, 6)}


def test_cells_without_an_address_stand_behind_each_other() -> None:
    lines = '<row r="3"><c r="B3"/><c><f>B3</f></c></row><row><c><v>1</v></c><c><f>1</f></c></row>'
    xml = f'<worksheet xmlns="{MAIN}"><sheetData>{lines}</sheetData></worksheet>'
    sheet = SheetPart("List", "x", xml.encode(), "list.xlsx")
    assert sheet.formula_places == {(3, 3), (4, 2)}
    assert set(sheet.index) == {(3, 2), (3, 3), (4, 1), (4, 2)}


def test_a_sheet_that_is_no_xml_is_refused() -> None:
    with pytest.raises(BookError, match=r"list\.xlsx: sheet 'List' must be well-formed XML, got .*line 1"):
        SheetPart("List", "x", b"<worksheet><sheetData>", "list.xlsx")


def test_attributes_in_either_quotation_marks() -> None:
    attributes = b""" r="A1" t='e' s = "3" x:t="no" vm="1" """
    assert [attribute(attributes, name) for name in (b"r", b"t", b"s", b"vm", b"cm")] == [b"A1", b"e", b"3", b"1", b""]
    assert new_attributes(attributes, b"") == b""" r="A1" s = "3" x:t="no" """
    assert new_attributes(b' r="A1"', b"str") == b' r="A1" t="str"'


@pytest.mark.parametrize(
    "kind, text, value",
    [
        (b"", b"1.5", 1.5), (b"n", b" 2E3 ", 2000.0), (b"", b"", None), (b"", None, None), (b"str", b"", ""),
        (b"str", b"a&lt;b_x000A_", "a<b\n"),
        (b"b", b"1", True), (b"b", b"0", False), (b"e", b"#N/A", CellError.NA), (b"e", b"#BUSY!", "#BUSY!"),
        (b"s", b"1", "two"), (b"s", b"9", None), (b"d", b"2024-01-01", "2024-01-01"),
    ],
)  # fmt: skip
def test_stored_values_are_read(kind: bytes, text: bytes | None, value: Any) -> None:
    found = old_value(kind, text, b"", ["one", "two"])
    assert found == value
    assert type(found) is type(value)


def test_shared_strings_are_read_without_their_looks() -> None:
    part = (
        b'<sst xmlns="u"><si><t>plain</t></si><si><r><rPr><b/></rPr><t>a</t></r><r><t xml:space="preserve"> b</t></r>'
        b'</si><si/><si><t/></si><si><t>&amp;_x0041_</t><rPh sb="0" eb="1"><t>no</t></rPh></si></sst>'
    )
    assert strings_of(part) == ["plain", "a b", "", "", "&A"]


def test_when_a_stored_value_may_stay() -> None:
    assert same(1.0, 1.0, exact=True)
    assert not same(0.333333333333333, 1 / 3, exact=True)
    assert same(0.333333333333333, 1 / 3, exact=False)
    assert not same(0.33333333333333, 1 / 3, exact=False)
    assert not same(1.0, True, exact=False)
    assert not same("1", 1.0, exact=False)
    assert not same(None, 0.0, exact=False)
    assert not same(CellError.VALUE, CellError.NUM, exact=False)
    # How the format spells the younger errors, see stored.FILE_SPELLING.
    assert same(CellError.VALUE, CellError.SPILL, exact=True)


def test_a_value_goes_into_a_cell_and_out_of_it() -> None:
    assert value_element(b"x:", 2.0) == (b"", b"<x:v>2</x:v>")
    assert value_element(b"", 0.1) == (b"", b"<v>0.1</v>")
    assert value_element(b"", True) == (b"b", b"<v>1</v>")
    assert with_value(b'<c r="A1" s="2"/>', b"", 5.0) == b'<c r="A1" s="2"><v>5</v></c>'
    assert with_value(b'<c r="A1" t="str"><v>old</v></c>', b"", None) == b'<c r="A1"/>'
    assert (
        with_value(b'<c r="A1" t="inlineStr"><is><t>x</t></is><extLst/></c>', b"", "y")
        == b'<c r="A1" t="str"><v>y</v><extLst/></c>'
    )


def _block(column: int, first: int, last: int, *reads: tuple[int, int, int, int]) -> Block:
    return Block("list", (Area(first, column, last, column),), tuple(("list", Area(*area)) for area in reads))


def test_dependencies_between_blocks() -> None:
    blocks = [
        _block(5, 2, 9, (2, 1, 9, 4)),
        _block(6, 2, 9, (2, 5, 9, 5)),
        _block(7, 1, 1, (1, 1, 99, 6)),
        _block(8, 1, 1),
    ]
    edges = dependencies(blocks)
    assert edges[:4] == [set(), {0}, {0, 1}, set()]
    assert components(edges[:4]) in ([[0], [1], [2], [3]], [[0], [1], [3], [2]])


def test_crowded_columns_are_tied_as_a_whole() -> None:
    single = [_block(5, row, row) for row in range(1, 500)]
    edges = dependencies([*single, _block(6, 1, 1, (1, 5, 499, 5))])
    (node,) = edges[499]
    assert edges[node] == set(range(499))


def test_circles_come_out_together() -> None:
    rings = components([{1}, {2}, {0}, {2}, set(), {5}])
    assert sorted(map(sorted, rings)) == [[0, 1, 2], [3], [4], [5]]
    order = {node: place for place, ring in enumerate(rings) for node in ring}
    assert order[3] > order[2]
