"""Two issues of a list: what was added, gone, changed, and which verdicts turned; lists, workbooks and JSON alike."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from lowpoint import __version__
from lowpoint.errors import BookError
from lowpoint.survey import survey_list
from lowpoint.survey.as_json import as_json
from lowpoint.survey.book import write_book
from lowpoint.survey.compared import comparison_json, comparison_lines
from lowpoint.survey.comparing import Change, Comparison, compare
from lowpoint.survey.result_columns import result_of
from lowpoint.survey.sides import read_side
from survey_lists import GOOD, HEADINGS, kestrel_rows, write_csv, write_xlsx


def _row(tag: str = GOOD[0], case: str | None = "normal", **changes: Any) -> dict[str, Any]:
    """The good row with other cells, by heading or its beginning."""
    row = dict(zip(HEADINGS, GOOD, strict=True)) | {"Tag": tag, "Case": case}
    for name, value in changes.items():
        row[next((h for h in HEADINGS if h.startswith(name)), name)] = value
    return row


def _write(path: Path, rows: list[dict[str, Any]], rename: dict[str, str] | None = None) -> Path:
    headings = list(dict.fromkeys(name for row in rows for name in row))
    write = write_csv if path.suffix == ".csv" else write_xlsx
    shown = [(rename or {}).get(name, name) for name in headings]
    return write(path, shown, [[row.get(name) for name in headings] for row in rows])


def _compare(tmp_path: Path, old: list[dict[str, Any]], new: list[dict[str, Any]], rename: dict[str, str] | None = None,
             elevation: float | None = None) -> Comparison:  # fmt: skip
    sides = (_write(tmp_path / "old.xlsx", old), _write(tmp_path / "new.xlsx", new, rename))
    return compare(*(read_side(path, elevation) for path in sides))


def _said(found: Comparison, system: str = "metric") -> str:
    return "\n".join(comparison_lines(found, system))


# --- items and cases ---------------------------------------------------------------------------------------------


def test_the_same_list_has_nothing_to_say(tmp_path: Path) -> None:
    found = _compare(tmp_path, [_row(), _row(case="maximum")], [_row(case="maximum"), _row()])
    assert (found.changes, found.turns, found.gone, found.added, found.drifts) == ({}, (), (), (), ())
    assert found.exit_code == 0
    assert _said(found).splitlines()[-1] == "2 cases in both, 0 with changed inputs, 0 worse, 0 better, 0 added, 0 gone"


def test_items_and_cases_added_and_gone(tmp_path: Path) -> None:
    old = [_row("A"), _row("A", "maximum"), _row("B")]
    new = [_row("A"), _row("A", "upset"), _row("C", p2=0.5), _row("C", "minimum")]
    found = _compare(tmp_path, old, new)
    assert (found.items_gone, found.items_added) == (("B",), ("C",))
    text = _said(found)
    assert "items gone (1):\n  B\n" in text
    assert "items added (1):\n  C; normal: choked (tested)" in text
    assert "cases gone of items that stayed (1):\n  A maximum\n" in text
    assert "cases added to items that stayed (1):\n  A upset: clear (tested)" in text
    # A case that fails came in.
    assert found.exit_code == 1
    assert _compare(tmp_path, old, [*old, _row("C", "minimum")]).exit_code == 0


def test_a_renamed_item_is_gone_and_added(tmp_path: Path) -> None:
    found = _compare(tmp_path, [_row("21-FCV-110")], [_row("21-FCV-110A")])
    assert (found.items_gone, found.items_added, found.pairs) == (("21-FCV-110",), ("21-FCV-110A",), ())


def test_capitals_of_a_case_do_not_matter(tmp_path: Path) -> None:
    assert len(_compare(tmp_path, [_row(case="Normal")], [_row(case="normal ")]).pairs) == 1


def test_twins_are_paired_in_order_and_told(tmp_path: Path) -> None:
    found = _compare(tmp_path, [_row(), _row(p2=3.0)], [_row(), _row(p2=3.1), _row(p2=2.0)])
    assert found.pairs == ((0, 0), (1, 1))
    assert found.added == (2,)
    assert found.notes == (
        "21-FCV-110 with case 'normal' stands 2 times in old.xlsx and 3 times in new.xlsx: "
        "its rows were paired in order",
    )
    assert [c.field for changes in found.changes.values() for c in changes] == ["p2"]


# --- inputs ------------------------------------------------------------------------------------------------------

# Exact definitions: 1 bar = 14.50377377 psi, 1 m3/h = 4.402867539 US gal/min, 20 deg C = 68 deg F, 1 in = 25.4 mm.
US = {"Flow [m3/h]": "Flow [US gal/min]", "p1 [bar a]": "p1 [psia]", "Temperature [deg C]": "Temperature [deg F]",
      "Valve size [mm]": "Valve size [in]"}  # fmt: skip


def test_another_unit_is_no_change(tmp_path: Path) -> None:
    psi, gpm = 6894.757293168361, 231 * 0.0254**3 / 60
    other = _row(Flow=46 / 3600 / gpm, p1=5.8e5 / psi, Temperature=68, Valve=80 / 25.4)
    found = _compare(tmp_path, [_row()], [other], US)
    assert found.changes == {}
    assert found.turns == ()


def test_gauge_for_absolute_is_no_change(tmp_path: Path) -> None:
    """At sea level the atmosphere is 1.01325 bar (ISO 2533); the column of the elevation alone is no change."""
    rename = {"p1 [bar a]": "p1 [bar g]", "p2 [bar a]": "p2 [bar g]"}
    new = [_row(p1=5.8 - 1.01325, p2=4.2 - 1.01325) | {"Site elevation [m]": 0}]
    assert _compare(tmp_path, [_row()], new, rename).changes == {}
    higher = [_row(p1=5.8 - 1.01325, p2=4.2 - 1.01325) | {"Site elevation [m]": 300}]
    fields = [c.field for c in _compare(tmp_path, [_row()], higher, rename).changes[0]]
    assert fields == ["elevation", "p1", "p2"]


@pytest.mark.parametrize(
    ("changes", "field", "text"),
    [
        ({"Flow": 50}, "flow", "Flow 46 m3/h -> 50 m3/h"),
        ({"Temperature": 30}, "t", "Temperature 20 deg C -> 30 deg C"),
        ({"p1": 6.1}, "p1", "p1 5.8 bar a -> 6.1 bar a"),
        ({"Damage": None}, "damage", "Damage 1.42 -> no value"),
        ({"Liquid": "sea water"}, "fluid", "Liquid 'water' -> 'sea water'"),
        ({"pv [bar a]": 0.0234}, "pv", "pv no value -> 0.0234 bar a"),
        ({"Incipient": "estimate", "Fd": 0.46}, "incipient", "Incipient 2.1 -> 'estimate'"),
        ({"FL": "typical", "Style": "Ball, segmented"}, "fl", "FL 0.9 -> 'typical'"),
        ({"Test head [bar]": 6}, "head_ref", "Test head no value -> 6 bar"),
        ({"Form": "downstream", "Incipient": 1.1, "Damage": 0.42}, "form", "Form 'upstream' -> 'downstream'"),
    ],
)
def test_changed_inputs(changes: dict[str, Any], field: str, text: str, tmp_path: Path) -> None:
    found = _compare(tmp_path, [_row()], [_row(**changes)])
    assert field in [change.field for change in found.changes[0]]
    assert text in _said(found)


@pytest.mark.parametrize(
    "changes",
    [{"Form": "upstream"}, {"Kind": "control valve"}, {"Basis of FL": "tested"}, {"Liquid": "Water"}, {"Remark": "x"}],
)
def test_what_a_blank_means_is_no_change(changes: dict[str, Any], tmp_path: Path) -> None:
    assert _compare(tmp_path, [_row()], [_row(**changes)]).changes == {}


def test_what_stands_in_another_row_of_the_item_is_no_change(tmp_path: Path) -> None:
    second = _row(case="maximum")
    assert _compare(tmp_path, [_row(), second], [_row(), second | {"Incipient": None, "Liquid": None}]).changes == {}


def test_bores_of_a_set(tmp_path: Path) -> None:
    row = {"Tag": "RO", "Case": None, "Kind": "plates", "Liquid": "water", "Temperature [deg C]": 20,
           "Flow [m3/h]": 90, "p1 [bar a]": 20, "p2 [bar a]": 10, "Pipe [mm]": 154.05,
           "Bores [mm]": "55; 60"}  # fmt: skip
    assert _compare(tmp_path, [row], [row | {"Bores [mm]": "55 / 60"}]).changes == {}
    found = _compare(tmp_path, [row], [row | {"Bores [mm]": "55; 61"}])
    assert found.changes == {0: [Change("bores", (0.055, 0.06), (0.055, 0.061))]}
    assert "; Bores 55; 60 mm -> 55; 61 mm" in _said(found)


def test_a_vendors_table_with_other_numbers(tmp_path: Path) -> None:
    paths = []
    for name, fl in (("old", 0.85), ("new", 0.8)):
        path = _write(tmp_path / f"{name}.xlsx", [_row(FL=None) | {"Table": "T"}])
        book = openpyxl.load_workbook(path)
        sheet = book.create_sheet("Vendor")
        for line in (
            ("Table", "Travel [%]", "Kv", "FL"),
            ("T", 10, 18, 0.93),
            ("T", 50, 350, fl),
            ("T", 100, 900, 0.6),
        ):
            sheet.append(line)
        book.save(path)
        paths.append(path)
    found = compare(*map(read_side, paths))
    assert "Table 'T' -> 'T with other numbers of fl'" in _said(found)


# --- verdicts ----------------------------------------------------------------------------------------------------


def test_verdicts_that_turned_worst_first(tmp_path: Path) -> None:
    """By hand: index (5.8 - 0.0234)/(5.8 - p2), 3.61 before, 3.21, 2.06 and 1.38 now; incipient 2.1, damage 1.42."""
    old = [_row(tag) for tag in "ABCDE"] + [_row("F", FL=None), _row("G", p2=1.7)]
    new = [_row("A", p2=4.0), _row("B", p2=3.0), _row("C", p2=1.6), _row("D", FL=None), _row("E"), _row("F"), _row("G")]
    keep = {"Limit to keep": "damage"}
    found = _compare(tmp_path, [row | keep for row in old], [row | keep for row in new])
    turned = [(found.new.cases.tag[turn.new], turn.what) for turn in found.turns]
    assert turned == [("C", "fails now"), ("D", "without an answer now"), ("B", "in a worse regime"),
                      ("A", "less margin"), ("F", "answered now"), ("G", "better")]  # fmt: skip
    assert found.exit_code == 1
    text = _said(found)
    assert "C normal: clear (tested) +154.3 % -> damage (tested) -3.1 %, fails; p2 4.2 bar a -> 1.6 bar a" in text
    assert "because FL (liquid pressure recovery factor FL at the operating travel) must be given" in text


def test_less_margin_alone_is_no_finding(tmp_path: Path) -> None:
    assert _compare(tmp_path, [_row()], [_row(p2=4.1)]).exit_code == 0


def test_a_weaker_basis_is_told(tmp_path: Path) -> None:
    found = _compare(tmp_path, [_row()], [_row() | {"Basis of the limits": "estimated"}])
    assert [turn.what for turn in found.turns] == ["on a weaker basis"]
    assert "clear (tested) +71.9 % -> clear (estimated) +71.9 %" in _said(found)


def test_something_wrong_with_a_list_is_a_finding(tmp_path: Path) -> None:
    found = _compare(tmp_path, [_row()], [_row(Remarks="x", Colour="red")])
    assert found.exit_code == 1
    assert "wrong with the new list (1):\n  List!M1: the column is not known" in _said(found)


# --- surveys as they were issued ---------------------------------------------------------------------------------


def _issued(tmp_path: Path, path: Path, kind: str, elevation: float | None = None) -> Path:
    """What a survey writes: its JSON, or its workbook."""
    survey = survey_list(path, elevation)
    if kind == "json":
        out = tmp_path / "issued.json"
        out.write_text(json.dumps(as_json(survey, "us"), allow_nan=False), encoding="utf-8")
        return out
    out = tmp_path / "issued.xlsx"
    write_book(survey, out, system="us", pages=0)
    return out


@pytest.mark.parametrize("kind", ["json", "xlsx"])
def test_a_survey_against_the_list_it_was_made_of(kind: str, tmp_path: Path) -> None:
    headings, rows = kestrel_rows()
    path = write_xlsx(tmp_path / "list.xlsx", headings, rows)
    issued = read_side(_issued(tmp_path, path, kind))
    found = compare(issued, read_side(path))
    assert (issued.kind, issued.cases.count, len(found.pairs)) == ("survey", len(rows), len(rows))
    assert (found.changes, found.turns, found.drifts) == ({}, (), ())
    assert found.old.verdicts.regime.tolist() == found.new.verdicts.regime.tolist()


@pytest.mark.parametrize("kind", ["json", "xlsx"])
def test_the_issued_verdict_is_taken_and_another_one_of_today_told(kind: str, tmp_path: Path) -> None:
    path = _write(tmp_path / "list.xlsx", [_row("A"), _row("B")])
    issued = _issued(tmp_path, path, kind)
    if kind == "json":
        data = json.loads(issued.read_text(encoding="utf-8"))
        data["cases"][1] |= {"regime": "incipient", "margin": -0.05, "fails": True}
        data["version"] = "0.0.7"
        issued.write_text(json.dumps(data), encoding="utf-8")
    else:
        book = openpyxl.load_workbook(issued)
        sheet = book["Results"]
        heads = next(row for row in sheet.iter_rows() if row[0].value == "Tag")
        columns = {found.key: c.column for c in heads if isinstance(c.value, str) and (found := result_of(c.value))}
        for name, value in (("verdict", "incipient (tested)"), ("margin", -0.05), ("fails", "yes")):
            sheet.cell(heads[0].row + 2, columns[name], value)
        for cell in (cell for other in book for row in other.iter_rows() for cell in row):
            if isinstance(cell.value, str):
                cell.value = cell.value.replace(__version__, "0.0.7")
        book.save(issued)
    side = read_side(issued)
    assert side.version == "0.0.7"
    assert side.verdicts.regime.tolist() == ["clear", "incipient"]
    assert side.today is not None
    assert side.today.regime.tolist() == ["clear", "clear"]
    found = compare(side, read_side(path))
    assert [(turn.what, found.changes_of(turn)) for turn in found.turns] == [("better", [])]
    text = _said(found)
    assert "B normal: incipient (tested) -5.0 %, fails -> clear (tested) +71.9 %; inputs unchanged" in text
    assert f"the tool gives another verdict for unchanged inputs of {issued.name}: version 0.0.7 -> " in text
    assert [(drift.side, drift.place) for drift in found.drifts] == [("old", 1)]


@pytest.mark.parametrize("kind", ["json", "xlsx"])
def test_a_survey_of_a_list_with_everything_in_it(kind: str, tmp_path: Path) -> None:
    """Words in place of numbers, a vendor's table, sets of plates, unreadable cells, a second sheet in other units."""
    rows = [
        _row("A", FL="typical", Style="Ball, segmented"), _row("B", Incipient="estimate", Fd=0.46),
        _row("C", FL=None, Table="T"), _row("D", Flow="11,0"), _row("E", p2=None) | {"Outlet into": "free jet"},
        _row("F", FL=None, Kind="plates") | {"Inlet pipe bore [mm]": 80, "Bores [mm]": "40; 44"},
    ]  # fmt: skip
    path = _write(tmp_path / "list.xlsx", rows)
    book = openpyxl.load_workbook(path)
    sheet = book.create_sheet("Vendor")
    for line in (("Table", "Travel [%]", "Kv", "FL"), ("T", 10, 18, 0.93), ("T", 50, 350, 0.85)):
        sheet.append(line)
    north = book.create_sheet("North")
    for line in (["Site elevation [m]", 30], [], [*HEADINGS[2:], *HEADINGS[:2]], [*GOOD[2:], "N", "normal"]):
        north.append([str(cell).replace("bar a", "bar g") if "bar a" in str(cell) else cell for cell in line])
    book.save(path)
    found = compare(read_side(_issued(tmp_path, path, kind, 0.0)), read_side(path, 0.0))
    assert (found.changes, found.turns, found.drifts) == ({}, (), ())
    regimes = found.new.verdicts.regime.tolist()
    assert regimes.count(None) == 1
    assert regimes[3] is None


@pytest.mark.parametrize(
    ("content", "words"),
    [("{", "got text that is no JSON"), ("[1]", "got another JSON"), ('{"cases": [{"tag": "A"}]}', "a file without")],
)
def test_json_of_something_else(content: str, words: str, tmp_path: Path) -> None:
    (tmp_path / "x.json").write_text(content, encoding="utf-8")
    with pytest.raises(BookError, match=words):
        read_side(tmp_path / "x.json")


# --- for machines ------------------------------------------------------------------------------------------------


def test_the_comparison_for_machines(tmp_path: Path) -> None:
    found = _compare(tmp_path, [_row("A"), _row("B")], [_row("A", p2=0.5, Flow=None), _row("C", p2=0.5)])
    data = comparison_json(found, "us")
    assert json.loads(json.dumps(data, allow_nan=False)) == data
    assert data["items"] == {"gone": ["B"], "added": ["C"]}
    assert data["cases"]["added"][0] | {"margin": 0} == {
        "tag": "C", "case": "normal", "regime": "choked", "basis": "tested", "margin": 0, "fails": True,
    }  # fmt: skip
    changes = {change["field"]: change for change in data["changed"][0]["changes"]}
    # 1 bar is 14.50377 psi, 1 m3/h is 4.402868 US gal/min (exact definitions).
    assert changes["p2"]["old"] == pytest.approx(4.2 * 14.50377, rel=1e-6)
    assert changes["p2"]["unit"] == "psi"
    assert changes["flow"]["old"] == pytest.approx(46 * 4.402868, rel=1e-6)
    assert changes["flow"]["new"] is None
    turned = data["turned"][0]
    assert (turned["tag"], turned["what"], turned["worse"]) == ("A", "without an answer now", True)
    assert turned["errors"] == ["Flow (volume flow at flowing conditions) must be given"]
    assert data["exit_code"] == 1
