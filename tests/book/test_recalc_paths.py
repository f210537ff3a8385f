"""Calls made in batches, level by level, and calls made one by one give the same workbook: random small books."""

from __future__ import annotations

import tempfile
from pathlib import Path

from hypothesis import example, given, settings
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
    row = draw(st.sampled_from(["{r}", "{r}", "{r}", "$3", "4", "{above}"]))
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
            arguments.append(draw(st.one_of(expression(place, depth - 1), reference(place), reference(place),
                                            st.just(""))))  # fmt: skip
    spelling = draw(st.sampled_from(["{0}", "{0}", "{0}", "_xll.{0}", "[1]!{0}", "_xlfn.SINGLE({0}({1}))"]))
    body = ",".join(arguments)
    return spelling.format(name, body) if "{1}" in spelling else f"{spelling.format(name)}({body})"


@st.composite
def expression(draw: st.DrawFn, place: int, depth: int) -> str:
    if depth <= 0:
        return draw(st.one_of(literal, reference(place)))
    part = expression(place, depth - 1)
    called = call(place, depth)
    pick = draw(st.integers(0, 17))
    a, b, c, r = draw(part), draw(part), draw(called), draw(reference(place))
    number = draw(st.sampled_from(["1", "2", "3"]))
    return [
        c, c, c, c, f"{a}+{c}", f"{c}*{b}", f"IF({a}>2,{c},{b})", f"IFERROR({c},{a})", f"IFERROR({a},{c})",
        f"_xlfn.IFS({a}>3,{c},TRUE,{b})", f"CHOOSE({number},{a},{c},{b})", f"_xlfn.SWITCH({a},1,{c},{b})",
        f"_xlfn.LET(_xlpm.x,{a},{c.replace('$3', '{r}')}+_xlpm.x)", f"SUM({r},$A$2:$A$5,{c})",
        f"INDEX($B$2:$B$5,{number})", f"SUMPRODUCT(LP_MARGIN($A$2:$A$5,{a})*1)", f"ROW()*{a}", f'({a})&"/"&({c})',
    ][pick]  # fmt: skip


@st.composite
def rare(draw: st.DrawFn, place: int) -> str:
    """Formulas whose references the text does not tell, arrays, and names of nothing."""
    a, c = draw(expression(place, 1)), draw(call(place, 1))
    return draw(
        st.sampled_from(
            [
                f'LP_MARGIN(INDIRECT("A{{r}}"),{a})',
                f"OFFSET(A$2,1,1)+{c}",
                "NOSUCH(A2)",
                f"{c}+NOSUCH(1)",
                "LP_SIGMA(A$2:A$5,B$2:B$5,C$2:C$5)",
                f"SUM(LP_MARGIN(A$2:A$5,{a}))",
                f'IFERROR(INDIRECT("B{{r}}"),{c})',
                'LP_WHY("LP_SIGMA",A{r},B{r},C{r})',
                f"LP_MARGIN({a},1)-{c}",
                "MAX(E$2:E$5)",
                "E{below}+1",
            ]
        )  # fmt: skip
    )


@st.composite
def books(draw: st.DrawFn) -> dict[str, str]:
    places = {f"{column}{row}": draw(cell) for column in INPUTS for row in ROWS}
    for place, column in enumerate(COLUMNS):
        either = st.one_of(expression(place, 2), expression(place, 2), rare(place))
        texts = [draw(either)] * 4 if draw(st.booleans()) else [draw(either) for _ in ROWS]
        for row, text in zip(ROWS, texts, strict=True):
            written = text.format(r=row, above=row - 1, below=row + 1)
            places[f"{column}{row}"] = draw(st.sampled_from(["", "", "", 'cm="1"|'])) + formula(written, "7")
    for place, inside in places.items():
        if inside.startswith("cm"):
            places[place] = inside.replace("<f>", f'<f t="array" ref="{place}">')
    return {place: inside for place, inside in places.items() if inside}


@settings(max_examples=60)
@given(books())
@example({"A2": "<v>3</v>", "E2": formula("LP_MARGIN(A2+0.1-0.2,1)-LP_MARGIN(A2-0.1,1)", "1")})
def test_both_ways_give_the_same_book(places: dict[str, str]) -> None:
    with tempfile.TemporaryDirectory() as folder:
        done = both(bare(Path(folder, "list.xlsx"), places))
        formulas = sum("<f" in inside for inside in places.values())
        assert done.report.recomputed + len(done.report.kept) >= formulas
