"""Bad lists as real files: each fault named by sheet, cell, value and remedy, and every good row judged."""

from __future__ import annotations

import datetime
import zipfile
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from lowpoint.faces import cli
from lowpoint.survey import Survey, survey_list
from survey_lists import GOOD, HEADINGS, write_csv, write_ods, write_xlsx

WRITERS: dict[str, Callable[..., Path]] = {"xlsx": write_xlsx, "csv": write_csv, "ods": write_ods}
SHEETS = {"xlsx": "List", "csv": "list.csv", "ods": "List"}
EVERY = pytest.mark.parametrize("kind", WRITERS)
BOOKS = pytest.mark.parametrize("kind", ["xlsx", "ods"])


def _row(**changes: Any) -> list[Any]:
    row = dict(zip(HEADINGS, GOOD, strict=True))
    for name, value in changes.items():
        row[next(h for h in HEADINGS if h.startswith(name))] = value
    return list(row.values())


def _heads(name: str, heading: str) -> list[str]:
    """The headings with one of them replaced."""
    return [heading if h.startswith(name) else h for h in HEADINGS]


def _survey(kind: str, folder: Path, headings: Sequence[Any], rows: Sequence[Sequence[Any]], **more: Any) -> Survey:
    return survey_list(WRITERS[kind](folder / f"list.{kind}", headings, rows), **more)


def _said(survey: Survey) -> str:
    return "\n".join(problem.sentence() for problem in survey.reading.problems)


def _regimes(survey: Survey) -> list[Any]:
    return survey.findings.regime.tolist()  # type: ignore[no-any-return]


# --- the fifteen of the list -------------------------------------------------------------------------------------


@EVERY
def test_header_twice(kind: str, tmp_path: Path) -> None:
    survey = _survey(kind, tmp_path, (*HEADINGS, "Upstream pressure [psia]"), [[*GOOD, 84.1]])
    assert (f"{SHEETS[kind]}!L1: p1 has a column already, 'p1 [bar a]' in F1: neither was used, got the text 'Upstream "
            "pressure [psia]'. Keep one of the two.") in _said(survey)  # fmt: skip
    assert _regimes(survey) == [None]


@EVERY
def test_the_row_of_headings_twice(kind: str, tmp_path: Path) -> None:
    """As at the top of each printed page: left out, told, and no item of its own."""
    survey = _survey(kind, tmp_path, HEADINGS, [GOOD, list(HEADINGS), _row(Case="maximum")])
    assert f"{SHEETS[kind]}!3:3: the headings stand here again; the row was left out. Delete the row." in _said(survey)
    assert _regimes(survey) == ["clear", "clear"]
    assert survey.cases.row.tolist() == [2, 4]
    assert survey.exit_code == 1


def test_headings_and_their_units_twice(tmp_path: Path) -> None:
    heads = [name.partition(" [")[0] for name in HEADINGS]
    units = [name.partition(" [")[2].rstrip("]") or None for name in HEADINGS]
    survey = _survey("xlsx", tmp_path, heads, [units, GOOD, heads, units, _row(Case="maximum")])
    assert survey.cases.row.tolist() == [3, 6]
    assert _regimes(survey) == ["clear", "clear"]
    assert "List!5:5: the headings stand here again" in _said(survey)


@EVERY
@pytest.mark.parametrize(
    ("heading", "words"),
    [
        (
            "p1",
            "the heading of p1 must name its unit, got the text 'p1'. Write it behind the name, as in 'p1 [bar g]'.",
        ),
        ("p1 [furlong]", "the unit of p1 is not understood: 'furlong' is not a unit that is known"),
        ("p1 [m]", "'m' is a unit of another kind of quantity than p1, got the text 'p1 [m]'."),
    ],
)
def test_unit_missing_or_unknown(kind: str, heading: str, words: str, tmp_path: Path) -> None:
    survey = _survey(kind, tmp_path, _heads("p1", heading), [GOOD])
    assert f"{SHEETS[kind]}!F1: {words}" in _said(survey)
    assert _regimes(survey) == [None]


@EVERY
def test_gauge_without_atmosphere(kind: str, tmp_path: Path) -> None:
    survey = _survey(kind, tmp_path, _heads("p1", "p1 [bar g]"), [GOOD])
    assert f"{SHEETS[kind]}!F1: p1 is a gauge pressure, and no atmosphere of the site is given" in _said(survey)
    assert "--elevation METRES" in _said(survey)
    assert _regimes(survey) == [None]


@EVERY
@pytest.mark.parametrize(
    "text", ["5,8", "5.8 bar", "tba", "NaN", "inf", "1'000", "5 800", "\u22125.8", "12:30", "5-Aug"]
)
def test_text_in_numbers(kind: str, text: str, tmp_path: Path) -> None:
    survey = _survey(kind, tmp_path, HEADINGS, [GOOD, _row(Case="maximum", p1=text)])
    assert f"{SHEETS[kind]}!F3: p1 must be a number, got the text '{text}'." in _said(survey)
    assert _regimes(survey) == ["clear", None]


@EVERY
def test_decimal_commas_of_a_whole_file(kind: str, tmp_path: Path) -> None:
    row = [str(v).replace(".", ",") if isinstance(v, float) else str(v) for v in GOOD]
    survey = _survey(kind, tmp_path, HEADINGS, [row])
    assert _regimes(survey) == [None]
    assert f"{SHEETS[kind]}!F2: p1 must be a number, got the text '5,8'." in _said(survey)
    if kind == "csv":  # values apart by commas: the sign cannot be both
        assert "Numbers of this file have the decimal sign '.': write this one so too." in _said(survey)


def _merged(kind: str, folder: Path, rows: list[list[Any]]) -> Survey:
    """The tag of the first row merged over the first two."""
    if kind == "ods":
        rows = [list(row) for row in rows]
        text = f"<text:p>{rows[0][0]}</text:p>"
        rows[0][0] = (
            f'<table:table-cell table:number-rows-spanned="2" office:value-type="string">{text}</table:table-cell>'
        )
        rows[1][0] = "<table:covered-table-cell/>"
        return _survey(kind, folder, HEADINGS, rows)
    path = write_xlsx(folder / "list.xlsx", HEADINGS, rows)
    book = openpyxl.load_workbook(path)
    book["List"].merge_cells("A2:A3")
    book.save(path)
    return survey_list(path)


@BOOKS
def test_merged_cells(kind: str, tmp_path: Path) -> None:
    survey = _merged(kind, tmp_path, [list(GOOD), _row(Tag=None, Case="maximum")])
    assert ("List!A2:A3: merged cells; their value was taken for every one of their rows, got the text '21-FCV-110'. "
            "Split them, and write the value into each cell.") in _said(survey)  # fmt: skip
    assert survey.cases.tag.tolist() == ["21-FCV-110"] * 2
    assert _regimes(survey) == ["clear", "clear"]


@BOOKS
def test_hidden_rows(kind: str, tmp_path: Path) -> None:
    rows = [GOOD, _row(Case="maximum")]
    if kind == "ods":
        marks = ["", "", 'table:visibility="collapse"']
        survey = survey_list(write_ods(tmp_path / "list.ods", HEADINGS, rows, marks))
    else:
        book = openpyxl.load_workbook(write_xlsx(tmp_path / "list.xlsx", HEADINGS, rows))
        book["List"].row_dimensions[3].hidden = True
        book.save(tmp_path / "list.xlsx")
        survey = survey_list(tmp_path / "list.xlsx")
    assert "List!3:3: the row is hidden and judged all the same. Show or delete what is hidden." in _said(survey)
    assert _regimes(survey) == ["clear", "clear"]


def test_a_hidden_sheet(tmp_path: Path) -> None:
    book = openpyxl.load_workbook(write_xlsx(tmp_path / "list.xlsx", HEADINGS, [GOOD]))
    sheet = book.create_sheet("Old")
    sheet.append(list(HEADINGS))
    sheet.append(_row(Tag="21-FCV-111"))
    sheet.sheet_state = "hidden"
    book.save(tmp_path / "list.xlsx")
    survey = survey_list(tmp_path / "list.xlsx")
    assert _said(survey) == "Old: the sheet is hidden and was read all the same. Show it, or delete it."
    assert _regimes(survey) == ["clear", "clear"]


FORMULA = '<table:table-cell table:formula="of:=40+6"/>'


@BOOKS
def test_formulas_without_values(kind: str, tmp_path: Path) -> None:
    formula = FORMULA if kind == "ods" else "=40+6"
    survey = _survey(kind, tmp_path, HEADINGS, [GOOD, _row(Case="maximum", Flow=formula)])
    assert ("List!E3: Flow is a formula without a value. Open the book in a spreadsheet program and save it there, or "
            "recompute it with 'lowpoint recalc'.") in _said(survey)  # fmt: skip
    assert _regimes(survey) == ["clear", None]


@BOOKS
def test_a_formula_whose_value_is_an_empty_text_is_a_blank(kind: str, tmp_path: Path) -> None:
    """``=""`` is how formulas leave a cell blank: a value that it has, not one that is missing."""
    if kind == "ods":
        empty = (
            '<table:table-cell table:formula="of:=&quot;&quot;" office:value-type="string"><text:p/></table:table-cell>'
        )
        survey = _survey(kind, tmp_path, HEADINGS, [GOOD, _row(Case="maximum", Damage=empty)])
    else:
        path = write_xlsx(tmp_path / "plain.xlsx", HEADINGS, [GOOD, _row(Case="maximum", Damage='=""')])
        with zipfile.ZipFile(path) as old, zipfile.ZipFile(tmp_path / "list.xlsx", "w") as new:
            for name in old.namelist():
                data = old.read(name)
                if name.endswith("sheet1.xml"):
                    changed = data.replace(b'<c r="K3"><f>""</f><v />', b'<c r="K3" t="str"><f>""</f><v></v>')
                    changed = changed.replace(b'<c r="K3"><f>""</f><v></v>', b'<c r="K3" t="str"><f>""</f><v></v>')
                    assert changed != data
                    data = changed
                new.writestr(name, data)
        survey = survey_list(tmp_path / "list.xlsx")
    assert survey.reading.problems == ()
    assert _regimes(survey) == ["clear", "clear"]


@EVERY
def test_empty_sheet(kind: str, tmp_path: Path) -> None:
    survey = _survey(kind, tmp_path, [], [])
    assert _said(survey) == (f"{SHEETS[kind]}: the sheet is empty. Name the columns as 'lowpoint starter list' does; "
                             "that command writes a blank form.")  # fmt: skip
    assert survey.exit_code == 1


@EVERY
def test_duplicate_tag_and_case(kind: str, tmp_path: Path) -> None:
    survey = _survey(kind, tmp_path, HEADINGS, [GOOD, _row(Case="NORMAL ", p2=1.6)])
    assert (f"{SHEETS[kind]}!B3: 21-FCV-110 with case 'NORMAL' stands already in row 2; both were judged. Give every "
            "case of an item its own name, or delete one row.") in _said(survey)  # fmt: skip
    assert _regimes(survey) == ["clear", "damage"]


def test_the_twin_on_another_sheet(tmp_path: Path) -> None:
    """Named by its own sheet and column, whose order is another one."""
    path = write_xlsx(tmp_path / "list.xlsx", HEADINGS, [GOOD])
    book = openpyxl.load_workbook(path)
    sheet = book.create_sheet("North")
    sheet.append([*HEADINGS[2:], *HEADINGS[:2]])
    sheet.append([*GOOD[2:], *GOOD[:2]])
    book.save(path)
    assert "North!K2: 21-FCV-110 with case 'normal' stands already in row 2 of List; both were judged." in _said(
        survey_list(path)
    )


@EVERY
def test_a_hundred_columns_nobody_knows(kind: str, tmp_path: Path) -> None:
    strange = [f"Strange {i}" for i in range(100)]
    survey = _survey(kind, tmp_path, (*HEADINGS, *strange), [[*GOOD, *range(100)]])
    assert [column.heading for column in survey.reading.unknown()] == strange
    assert f"{SHEETS[kind]}!L1: the column is not known and was not used, got the text 'Strange 0'." in _said(survey)
    assert _regimes(survey) == ["clear"]
    assert survey.exit_code == 1


@pytest.mark.parametrize("kind", ["csv", "ods"])
@pytest.mark.parametrize("text", ["=1+1", "@SUM(A1)", "-PV1", "+cmd"])
def test_formula_like_text(kind: str, text: str, tmp_path: Path) -> None:
    survey = _survey(kind, tmp_path, (*HEADINGS, "Service"), [[*_row(Tag=text), text]])
    for cell, name in (("A2", "Tag"), ("L2", "Service")):
        assert (f"{SHEETS[kind]}!{cell}: {name} looks like a formula; it was read as text, and is written as text, got "
                f"the text '{text}'. Begin it with a letter.") in _said(survey)  # fmt: skip
    assert survey.cases.tag.tolist() == [text]
    assert _regimes(survey) == ["clear"]


# --- what else lists hold ----------------------------------------------------------------------------------------


@EVERY
@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"p2": -0.5}, "G3: p2 must be above 0 bar, got -0.5 bar a."),
        ({"Valve": -80}, "H3: Valve size must be above 0 mm, got -80 mm."),
        ({"Flow": "1e999"}, "E3: Flow must be"),
    ],
)
def test_impossible_numbers(kind: str, changes: dict[str, Any], words: str, tmp_path: Path) -> None:
    survey = _survey(kind, tmp_path, HEADINGS, [GOOD, _row(Case="maximum", **changes)])
    assert f"{SHEETS[kind]}!{words}" in _said(survey)
    assert _regimes(survey) == ["clear", None]


@EVERY
@pytest.mark.parametrize("changes", [{"p1": 1e300}, {"Flow": 1e300}, {"Flow": 1e-300}, {"Temperature": 1e9}])
def test_huge_numbers_spoil_their_own_row_only(kind: str, changes: dict[str, Any], tmp_path: Path) -> None:
    survey = _survey(kind, tmp_path, HEADINGS, [_row(Case="maximum", **changes), GOOD])
    assert _regimes(survey)[1] == "clear"
    assert (_regimes(survey)[0] is None) == bool(survey.findings.errors[0])


def test_a_gauge_pressure_below_nothing(tmp_path: Path) -> None:
    survey = _survey("xlsx", tmp_path, _heads("p2", "p2 [bar g]"), [GOOD, _row(Case="m", p2=-1.5)], elevation=0.0)
    assert "List!G3: p2 must be above 0 bar, got -1.5 bar g. A gauge pressure cannot lie further below" in _said(survey)


@pytest.mark.parametrize("value", [datetime.datetime(2026, 8, 5), datetime.time(5, 8)])
def test_dates_in_numeric_cells(value: Any, tmp_path: Path) -> None:
    survey = _survey("xlsx", tmp_path, HEADINGS, [GOOD, _row(Case="maximum", p1=value)])
    assert f"List!F3: p1 must be a number and is a date or time, got the text '{value}'." in _said(survey)
    assert "format the cell as a number, and type it again." in _said(survey)
    assert _regimes(survey) == ["clear", None]


@EVERY
@pytest.mark.parametrize("error", ["#N/A", "#DIV/0!", "#REF!", "Err:502"])
def test_error_cells(kind: str, error: str, tmp_path: Path) -> None:
    rows = [GOOD, _row(Case="b", p1=error), _row(Case="c", Liquid=error), _row(Case=error), _row(Tag=error, Case="d")]
    survey = _survey(kind, tmp_path, HEADINGS, rows)
    sheet = SHEETS[kind]
    assert f"{sheet}!F3: p1 must be a number, got the text '{error}'. The cell holds an error" in _said(survey)
    assert f"{sheet}!C4: Liquid holds an error, got the text '{error}'. Cure its formula" in _said(survey)
    assert f"{sheet}!B5: Case holds an error" in _said(survey)
    assert f"{sheet}!A6: Tag holds an error" in _said(survey)
    # No verdict rests on the name of a case.
    assert _regimes(survey) == ["clear", None, None, "clear", None]


def test_a_date_in_an_open_document(tmp_path: Path) -> None:
    date = '<table:table-cell office:value-type="date" office:date-value="2026-08-05"/>'
    rows = [GOOD, _row(Case="maximum", p1=date), _row(Case=date)]
    survey = _survey("ods", tmp_path, HEADINGS, rows)
    assert "List!F3: p1 must be a number and is a date or time, got the text '2026-08-05 00:00:00'." in _said(survey)
    assert survey.cases.case.tolist() == ["normal", "maximum", "2026-08-05"]


def _with_table(folder: Path, kind: str, travels: Sequence[float], per_cent: bool) -> Survey:
    """A list and a vendor's table with these openings, whose cells may be formatted as per cent."""
    lines = [("T", travel, kv, fl) for travel, kv, fl in zip(travels, (18, 350, 900), (0.93, 0.85, 0.6), strict=True)]
    path = write_xlsx(folder / "list.xlsx", (*HEADINGS, "Table"), [[*_row(FL=None), "T"]])
    book = openpyxl.load_workbook(path)
    sheet = book.create_sheet("Vendor")
    for line in (("Table", "Travel [%]", "Kv", "FL"), *lines):
        sheet.append(line)
        sheet.cell(sheet.max_row, 2).number_format = "0%" if per_cent else "General"
    book.save(path)
    if kind == "xlsx":
        return survey_list(path)
    share = '<table:table-cell office:value-type="percentage" office:value="{0}"><text:p>x</text:p></table:table-cell>'
    cells = [[a, share.format(b) if per_cent else b, c, d] for a, b, c, d in lines]
    tables = write_ods(folder / "tables.ods", ("Table", "Travel [%]", "Kv", "FL"), cells)
    plain = write_ods(folder / "list.ods", (*HEADINGS, "Table"), [[*_row(FL=None), "T"]])
    parts = []
    for file in (plain, tables):
        with zipfile.ZipFile(file) as package:
            parts.append(package.read("content.xml").decode())
    vendor = parts[1].partition("<office:spreadsheet>")[2].partition("</office:spreadsheet>")[0]
    both = parts[0].replace("</office:spreadsheet>", vendor.replace('"List"', '"Vendor"') + "</office:spreadsheet>")
    with zipfile.ZipFile(folder / "list.ods", "w") as package:
        package.writestr("content.xml", both)
    return survey_list(folder / "list.ods")


@BOOKS
def test_cells_formatted_as_per_cent(kind: str, tmp_path: Path) -> None:
    plain = _with_table(tmp_path, kind, (10, 50, 100), per_cent=False)
    shares = _with_table(tmp_path, kind, (0.1, 0.5, 1.0), per_cent=True)
    assert shares.cases.tables["T"].travel.tolist() == pytest.approx(plain.cases.tables["T"].travel.tolist())
    assert ("Travel of Vendor: cells that are formatted as per cent were read as they are shown"
            in shares.reading.notes)  # fmt: skip
    assert shares.reading.problems == ()
    assert _regimes(shares) == _regimes(plain) == ["clear"]


def test_shares_below_a_heading_in_per_cent_are_not_guessed(tmp_path: Path) -> None:
    survey = _with_table(tmp_path, "xlsx", (0.1, 0.5, 1.0), per_cent=False)
    assert "Vendor!A2: the table cannot be used: its travel ends at 1 % or less" in _said(survey)
    assert _regimes(survey) == [None]


def test_a_table_named_in_a_csv(tmp_path: Path) -> None:
    survey = _survey("csv", tmp_path, (*HEADINGS, "Table"), [[*GOOD, None], [*_row(Tag="21-FCV-111", FL=None), "T"]])
    assert "list.csv!L3: no table of this name can be used; a csv has no sheet for one, got 'T'." in _said(survey)
    assert "Save the list as .xlsx or .ods, and give the table on a second sheet" in _said(survey)
    assert _regimes(survey) == ["clear", None]


def test_limits_of_a_set_of_plates_are_not_used_in_silence(tmp_path: Path) -> None:
    headings = ("Tag", "Kind", "Liquid", "Temperature [deg C]", "Flow [m3/h]", "p1 [bar a]", "p2 [bar a]", "Pipe [mm]",
                "Bores [mm]", "Incipient", "Damage", "xFz")  # fmt: skip
    row = ("21-RO-119", "plates", "water", 20, 90, 20, 10, 154.05, "55; 60", 2.1, 1.4, 0.3)
    survey = _survey("xlsx", tmp_path, headings, [row])
    cautions = survey.findings.cautions[0]
    for name in ("incipient", "damage"):
        assert any(
            text.startswith(f"the {name} limit that is given was not used: a set is judged") for text in cautions
        )
    assert "xFz is given and was not used: it belongs to valves; limits of a plate hold as they are given" in cautions
    assert survey.findings.basis[0] == "published"


def test_a_title_above_and_remarks_below(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    for line in (["Kestrel Bay: valves"], ["Revision", "B"], [], ["Item", None, "Liquid", None, None, "Pressures"],
                 list(HEADINGS), list(GOOD), [], ["Flows are guaranteed minimum flows"]):  # fmt: skip
        sheet.append(line)
    sheet.merge_cells("F4:G4")
    book.save(tmp_path / "list.xlsx")
    survey = survey_list(tmp_path / "list.xlsx")
    # A remark in the column of tags is no item that can be judged: it is named, and the item above it judged.
    assert _regimes(survey) == ["clear", None]
    assert survey.items[1].tag == "Flows are guaranteed minimum flows"


def test_open_document_with_repeated_cells_and_rows(tmp_path: Path) -> None:
    repeated = '<table:table-cell table:number-columns-repeated="2" office:value-type="float" office:value="{}"/>'
    headings = ("Tag", "Case", "Liquid", "Temperature [deg C]", "Flow [m3/h]", "p1 [bar a]", "p2 [bar a]",
                "Inlet pipe bore [mm]", "Outlet pipe bore [mm]", "FL", "Incipient", "DN")  # fmt: skip
    row = ["A", "normal", "water", 20, 46, 5.8, 4.2, repeated.format(80), 0.9, 2.1, 80]
    marks = ["", 'table:number-rows-repeated="2"']
    survey = survey_list(write_ods(tmp_path / "list.ods", headings, [row, ["B", *row[1:]]], marks))
    assert survey.cases.row.tolist() == [2, 3, 4]
    assert survey.cases.pipe_out.tolist() == [0.08] * 3
    assert _regimes(survey) == ["clear"] * 3
    assert "List!B3: A with case 'normal' stands already in row 2" in _said(survey)


@pytest.mark.parametrize("separator", [",", ";", "\t", "|"])
@pytest.mark.parametrize("codec", ["utf-8", "utf-8-sig", "cp1252", "utf-16"])
def test_text_files_of_every_make(separator: str, codec: str, tmp_path: Path) -> None:
    lines = [separator.join(name.replace("deg C", "°C") for name in HEADINGS), separator.join(map(str, GOOD))]
    (tmp_path / "list.csv").write_bytes("\r\n".join(lines).encode(codec))
    survey = survey_list(tmp_path / "list.csv")
    assert survey.reading.problems == ()
    assert _regimes(survey) == ["clear"]


def test_a_long_list_with_one_bad_row(tmp_path: Path) -> None:
    rows = [(f"21-FCV-{i // 3:05}", ("minimum", "normal", "maximum")[i % 3], *GOOD[2:]) for i in range(30_000)]
    rows[12_345] = (*rows[12_345][:5], "x", *GOOD[6:])
    survey = _survey("csv", tmp_path, HEADINGS, rows)
    assert survey.cases.count == 30_000
    assert len(survey.items) == 10_000
    assert _regimes(survey).count(None) == 1
    assert "list.csv!F12347: p1 must be a number, got the text 'x'." in _said(survey)


@EVERY
def test_the_command_ends_with_1_and_names_the_fault(
    kind: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = WRITERS[kind](tmp_path / f"list.{kind}", HEADINGS, [GOOD, _row(Case="maximum", p1="5,8")])
    assert cli.main(["survey", str(path)]) == 1
    out = capsys.readouterr().out
    assert f"{SHEETS[kind]}!F3: p1 must be a number, got the text '5,8'." in out
    assert "1 item, 2 cases; by their worst case: 1 without an answer" in out
