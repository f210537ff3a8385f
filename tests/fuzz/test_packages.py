"""Real workbooks with bytes changed: a result or a sentence, never a crash, a hang, or a changed input.

The books are made here by three writers, and taken from the folder of books made elsewhere where there is one. Each
mutation is repeatable from its number. More of them: set LOWPOINT_MUTATIONS to their number.
"""

from __future__ import annotations

import contextlib
import io
import os
import random
import warnings
import zipfile
from collections.abc import Callable
from pathlib import Path

import pytest
import xlsxwriter
from hypothesis import given, settings
from hypothesis import strategies as st

from book.lists import bare, formula, listed, number, valves
from book.makers import CORPUS, book, corpus, sheet_xml
from hostile.running import unstuck
from lowpoint.book.guard_limits import Limits, limiting
from lowpoint.book.recalc import recalculate
from lowpoint.errors import LowpointError
from lowpoint.survey.surveying import survey_list
from survey_lists import GOOD, HEADINGS, write_csv, write_ods, write_xlsx

MUTATIONS = int(os.environ.get("LOWPOINT_MUTATIONS", "300"))
BOUNDS = Limits(cells=200_000, seconds=10.0)


def _by_openpyxl(folder: Path) -> Path:
    places = valves() | {f"F{row}": f"=LP_SIGMA(A{row},B{row},C{row})" for row in (2, 3)} | {"G2": "=SUM(F2:F3)"}
    return listed(folder / "list.xlsx", places)


def _by_xlsxwriter(folder: Path) -> Path:
    path = folder / "list.xlsx"
    made = xlsxwriter.Workbook(path)
    sheet = made.add_worksheet("List")
    sheet.write_row("A1", [10.0, 4.0, 0.03])
    sheet.write_dynamic_array_formula("D1", "=LP_MARGIN(A1:A2,1)")
    sheet.write_formula("F1", '=IF(A1>2,LP_SIGMA(A1,B1,C1),"x")', None, "x")
    chart = made.add_chart({"type": "line"})
    chart.add_series({"values": "=List!$A$1:$C$1"})
    sheet.insert_chart("H1", chart)
    sheet.write_comment("A1", "by hand")
    made.close()
    return path


def _bare(folder: Path) -> Path:
    cells = {"A1": number(10.0), "B1": number(4.0), "E1": formula("LP_SIGMA(A1,B1,0.03)", "1")}
    return bare(folder / "list.xlsx", cells)


BOOKS: dict[str, Callable[[Path], Path]] = {
    "openpyxl": _by_openpyxl, "xlsxwriter": _by_xlsxwriter, "bare": _bare,
    "list": lambda folder: write_xlsx(folder / "list.xlsx", HEADINGS, [GOOD] * 3),
    "open": lambda folder: write_ods(folder / "list.ods", HEADINGS, [GOOD] * 3),
    "text": lambda folder: write_csv(folder / "list.csv", HEADINGS, [GOOD] * 3),
}  # fmt: skip


def mutated(data: bytes, chance: random.Random) -> bytes:
    """The file with some bytes changed: of the container, or of a part's content in a sound container."""
    if not data.startswith(b"PK") or chance.random() < 0.3:
        return _edited(data, chance)
    with zipfile.ZipFile(io.BytesIO(data)) as package:
        members = [(info, package.read(info)) for info in package.infolist()]
    chosen = chance.randrange(len(members))
    sink = io.BytesIO()
    with warnings.catch_warnings(), zipfile.ZipFile(sink, "w", zipfile.ZIP_DEFLATED) as package:
        warnings.simplefilter("ignore")  # of a name given twice
        for place, (info, content) in enumerate(members):
            name = info.filename
            if place == chosen:
                act = chance.random()
                if act < 0.1:
                    continue
                name = members[chance.randrange(len(members))][0].filename if act < 0.2 else name
                content = _edited(content, chance) if act >= 0.2 else content
            package.writestr(name, content)
    return sink.getvalue()


PIECES = (b"<", b">", b'"', b"&", b"/", b"<f>", b"</c>", b"<v>9</v>", b"A1", b"0", b"99999999999", b"-1", b"\0",
          b"\xff", b"<!--", b"]]>", b"<row>", b' r="B2"', b' t="str"', b"#REF!", b"(", b")", b",", b"e9",
          b"nan")  # fmt: skip


def _edited(data: bytes, chance: random.Random) -> bytes:
    changed = bytearray(data)
    for _ in range(chance.choice((1, 1, 2, 5))):
        place = chance.randrange(len(changed) + 1)
        act = chance.randrange(5)
        if act == 0 and place < len(changed):
            changed[place] ^= 1 << chance.randrange(8)
        elif act == 1:
            changed[place:place] = chance.choice(PIECES)
        elif act == 2:
            del changed[place : place + chance.choice((1, 3, 20))]
        elif act == 3:
            piece = chance.choice(PIECES)
            changed[place : place + len(piece)] = piece
        else:
            other = chance.randrange(len(changed) + 1)
            changed[place:place] = changed[other : other + 30]
    return bytes(changed)


def survives(path: Path, data: bytes, seed: object) -> None:
    """Read as a workbook and as a list: a result or a LowpointError, the input as it was, nothing half-written."""
    path.write_bytes(data)
    out = path.with_name("out.xlsx")
    try:
        with unstuck(120), limiting(BOUNDS):
            if path.suffix == ".xlsx":
                with contextlib.suppress(LowpointError):
                    recalculate(path, out)
            with contextlib.suppress(LowpointError):
                survey_list(path)
    except Exception as crash:
        raise AssertionError(f"mutation {seed} of {path.name}: {type(crash).__name__}: {crash}") from crash
    assert path.read_bytes() == data
    assert {p.name for p in path.parent.iterdir()} <= {path.name, "out.xlsx"}
    out.unlink(missing_ok=True)


@pytest.mark.parametrize("name", BOOKS)
def test_mutated_files_end_in_a_result_or_a_sentence(tmp_path: Path, name: str) -> None:
    path = BOOKS[name](tmp_path)
    whole = path.read_bytes()
    for seed in range(MUTATIONS // len(BOOKS)):
        survives(path, mutated(whole, random.Random(f"{name} {seed}")), seed)


def test_mutated_books_made_elsewhere(tmp_path: Path) -> None:
    """Among them are books with charts, pivots, tables and macros. Needs LOWPOINT_CORPUS."""
    for place, source in enumerate(corpus()[:: max(1, 3000 // MUTATIONS)]):
        whole = source.read_bytes()
        if len(whole) < 200_000:
            survives(tmp_path / "list.xlsx", mutated(whole, random.Random(place)), f"{place} of {source.name}")
    assert CORPUS.is_dir()


cell_xml = st.recursive(
    st.sampled_from(["A1", "1.5", '"x"', "B2:B9", "#N/A", "TRUE", "$A$1", "Other!A1", "nosuch", "1E300"]),
    lambda inner: st.one_of(
        st.tuples(inner, st.sampled_from("+-*/^&=<>,"), inner).map("".join),
        st.tuples(st.sampled_from(["SUM", "IF", "LP_SIGMA", "LP_FF", "INDEX", "_xlfn.LET", "IFERROR", "OFFSET"]),
                  st.lists(inner, max_size=4).map(",".join)).map(lambda pair: f"{pair[0]}({pair[1]})"),
        inner.map(lambda text: f"({text})"),
    ),
    max_leaves=12,
)  # fmt: skip


@settings(max_examples=60)
@given(formulas=st.lists(cell_xml, min_size=1, max_size=5), attributes=st.sampled_from(["", ' t="str"', ' cm="1"']))
def test_books_with_any_formulas(
    tmp_path_factory: pytest.TempPathFactory, formulas: list[str], attributes: str
) -> None:  # fmt: skip
    rows = "".join(
        f'<row r="{n}"><c r="A{n}"{attributes}><f>{text.replace("<", "&lt;").replace(">", "&gt;")}</f></c></row>'
        for n, text in enumerate(formulas, 1)
    )
    folder = tmp_path_factory.mktemp("made")
    sheet = sheet_xml(rows)
    path = book(folder, **{"xl/worksheets/sheet1.xml": sheet})
    survives(path, path.read_bytes(), formulas)
