"""Calls made in batches, level by level, and calls made one by one give the same workbook: random small books."""

from __future__ import annotations

import re
import tempfile
from pathlib import Path

from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st

from book.lists import bare, both, formula

INPUTS = ("A", "B", "C")
ROWS = range(2, 6)
COLUMNS = ("E", "F", "G", "H", "I")
FUNCTIONS = {
    "LP_SIGMA": ("n", "n", "n", "form"),
    "LP_MARGIN": ("n", "n"),
    "LP_REGIME": ("n", "n", "n", "n", "n", "n"),
    "LP_THROAT_PRESSURE": ("n", "n", "n", "n", "n"),
    "LP_FF": ("n", "n"),
    "LPU_CHOKED_DROP": ("n", "n", "n", "n"),
    "LP_SIGMA_FORM": ("n", "form", "form"),
    "LP_ALLOWED_OUTLET": ("n", "n", "n", "form"),
    "LP_AT_TRAVEL": ("n", "table", "table"),
}
FORMS = ('"upstream"', '"downstream"', '"xf"', '"XF "', '"other"')
TABLES = ("$A$2:$A$5", "A2:A5", "$B$2:$B$5", "C$2:C$5")

cell = st.one_of(
    st.floats(0.05, 40).map(lambda x: f"<v>{round(x, 3)!r}</v>"),
    st.sampled_from(["<v>1</v>", "<v>0</v>", 't="b"|<v>1</v>', 't="e"|<v>#N/A</v>', 't="e"|<v>#DIV/0!</v>', ""]),
    st.sampled_from(['t="inlineStr"|<is><t>n/a</t></is>', 't="inlineStr"|<is><t>xf</t></is>', 't="str"|<v></v>']),
)
literal = st.one_of(
    st.floats(0.1, 30).map(lambda x: repr(round(x, 2))), st.sampled_from(["-1", "5%", "0", "TRUE", '"x"', "#N/A"])
)


def _column_letters(place: int) -> tuple[str, ...]:
    """Inputs, and the formula columns before the one at ``place``."""
    return INPUTS + COLUMNS[:place]


@st.composite
def reference(draw: st.DrawFn, place: int) -> str:
    column = draw(st.sampled_from(_column_letters(place)))
    row = draw(st.sampled_from(["<r>", "<r>", "<r>", "$3", "4", "<above>"]))
    return f"{draw(st.sampled_from(['', '', '', '$']))}{column}{row}"


@st.composite
def call(draw: st.DrawFn, place: int, depth: int) -> str:
    name = draw(st.sampled_from(sorted(FUNCTIONS)))
    arguments = []
    for kind in FUNCTIONS[name][: draw(st.integers(2, 6))]:
        if kind == "form":
            arguments.append(draw(st.one_of(st.sampled_from(FORMS), reference(place), st.just(""))))
        elif kind == "table":
            arguments.append(draw(st.sampled_from(TABLES)))
        else:
            either = (expression(place, depth - 1), reference(place), reference(place), st.just(""))
            arguments.append(draw(st.one_of(*either)))
    spelling = draw(st.sampled_from(["{0}", "{0}", "{0}", "_xll.{0}", "[1]!{0}", "_xlfn.SINGLE({0}({1}))"]))
    body = ",".join(arguments)
    return spelling.format(name, body) if "{1}" in spelling else f"{spelling.format(name)}({body})"


# {a} and {b} are expressions, {c} is a call, {r} a reference, {n} a whole number; <r> is the row.
FORMS_OF_EXPRESSION = (
    "{c}", "{c}", "{c}", "{c}", "{a}+{c}", "{c}*{b}", "IF({a}>2,{c},{b})", "IFERROR({c},{a})", "IFERROR({a},{c})",
    "_xlfn.IFS({a}>3,{c},TRUE,{b})", "CHOOSE({n},{a},{c},{b})", "_xlfn.SWITCH({a},1,{c},{b})",
    "_xlfn.LET(_xlpm.x,{a},{c}+_xlpm.x)", "SUM({r},$A$2:$A$5,{c})", "INDEX($B$2:$B$5,{n})",
    "SUMPRODUCT(LP_MARGIN($A$2:$A$5,{a})*1)", "ROW()*{a}", '({a})&"/"&({c})',
)  # fmt: skip
# References that the text does not tell, arrays, names of nothing.
RARE = (
    'LP_MARGIN(INDIRECT("A<r>"),{a})', "OFFSET(A$2,1,1)+{c}", "NOSUCH(A2)", "{c}+NOSUCH(1)", "MAX(E$2:E$5)",
    "E<below>+1",
    "LP_SIGMA(A$2:A$5,B$2:B$5,C$2:C$5)", "SUM(LP_MARGIN(A$2:A$5,{a}))", 'IFERROR(INDIRECT("B<r>"),{c})',
    'LP_WHY("LP_SIGMA",A<r>,B<r>,C<r>)', "LP_MARGIN({a},1)-{c}",
)  # fmt: skip


def _filled(draw: st.DrawFn, text: str, place: int, depth: int) -> str:
    """A form of expression with its marks filled; only what it holds is drawn."""
    parts = {
        "a": expression(place, depth - 1), "b": expression(place, depth - 1), "c": call(place, depth),
        "r": reference(place), "n": st.sampled_from("123"),
    }  # fmt: skip
    return text.format(**{mark: draw(part) for mark, part in parts.items() if f"{{{mark}}}" in text})


@st.composite
def expression(draw: st.DrawFn, place: int, depth: int) -> str:
    if depth <= 0:
        return draw(st.one_of(literal, reference(place)))
    return _filled(draw, draw(st.sampled_from(FORMS_OF_EXPRESSION)), place, depth)


@st.composite
def rare(draw: st.DrawFn, place: int) -> str:
    return _filled(draw, draw(st.sampled_from(RARE)), place, 1)


@st.composite
def books(draw: st.DrawFn) -> dict[str, str]:
    places = {f"{column}{row}": draw(cell) for column in INPUTS for row in ROWS}
    for place, column in enumerate(COLUMNS):
        either = st.one_of(expression(place, 2), expression(place, 2), rare(place))
        texts = [draw(either)] * 4 if draw(st.booleans()) else [draw(either) for _ in ROWS]
        for row, text in zip(ROWS, texts, strict=True):
            marks = {"<r>": row, "<above>": row - 1, "<below>": row + 1}
            written = re.sub("<[a-z]+>", lambda found, marks=marks: str(marks[found[0]]), text)
            places[f"{column}{row}"] = draw(st.sampled_from(["", "", "", 'cm="1"|'])) + formula(written, "7")
    for place, inside in places.items():
        if inside.startswith("cm"):
            places[place] = inside.replace("<f>", f'<f t="array" ref="{place}">')
    return {place: inside for place, inside in places.items() if inside}


@settings(max_examples=40, suppress_health_check=[HealthCheck.large_base_example, HealthCheck.too_slow])
@given(books())
@example({"A2": "<v>3</v>", "E2": formula("LP_MARGIN(A2+0.1-0.2,1)-LP_MARGIN(A2-0.1,1)", "1")})
def test_both_ways_give_the_same_book(places: dict[str, str]) -> None:
    with tempfile.TemporaryDirectory() as folder:
        done = both(bare(Path(folder, "list.xlsx"), places))
        formulas = sum("<f" in inside for inside in places.values())
        assert done.report.recomputed + len(done.report.kept) >= formulas
