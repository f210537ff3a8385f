"""Lists that are wrong: each fault named by sheet, cell, value and remedy, and every good row judged all the same."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from lowpoint.errors import BookError
from lowpoint.survey import Survey, survey_list
from survey_lists import GOOD, HEADINGS, write_csv, write_ods, write_xlsx


def _row(**changes: Any) -> list[Any]:
    """The good row with some cells changed, by heading."""
    row = dict(zip(HEADINGS, GOOD, strict=True))
    for name, value in changes.items():
        row[next(h for h in HEADINGS if h.startswith(name))] = value
    return list(row.values())


def _survey(tmp_path: Path, headings: Sequence[Any], rows: Sequence[Sequence[Any]], **more: Any) -> Survey:
    return survey_list(write_xlsx(tmp_path / "list.xlsx", headings, rows), **more)


def _said(survey: Survey) -> str:
    return "\n".join(problem.sentence() for problem in survey.reading.problems)


def test_a_good_list_has_no_word_said(tmp_path: Path) -> None:
    survey = _survey(tmp_path, HEADINGS, [GOOD])
    assert survey.reading.problems == ()
    assert survey.reading.missing == ()
    assert survey.findings.regime.tolist() == ["clear"]
    assert survey.exit_code == 0


@pytest.mark.parametrize("kind", ["xlsx", "csv", "ods"])
def test_three_kinds_of_file_give_the_same(kind: str, tmp_path: Path) -> None:
    write = {"xlsx": write_xlsx, "csv": write_csv, "ods": write_ods}[kind]
    survey = survey_list(write(tmp_path / f"list.{kind}", HEADINGS, [GOOD, _row(Case="maximum", p2=1.6)]))
    assert survey.reading.problems == ()
    assert survey.reading.format == kind
    assert survey.findings.regime.tolist() == ["clear", "damage"]
    # Definition: (5.8 - pv)/(5.8 - 4.2) with pv = 0.02339 bar at 20 C (IAPWS-95, as in the tests of liquids).
    assert survey.findings.sigma[0] == pytest.approx((5.8 - 0.02339) / 1.6, rel=1e-5)


def test_columns_in_any_order(tmp_path: Path) -> None:
    survey = _survey(tmp_path, HEADINGS[::-1], [GOOD[::-1]])
    assert survey.findings.regime.tolist() == ["clear"]


# --- cells -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("changes", "sentence"),
    [
        ({"Flow": "11,0"}, "List!E3: Flow must be a number, got the text '11,0'. The cell holds text: type a number, "
         "with your program's own decimal sign and no unit."),
        ({"Flow": "46 m3/h"}, "List!E3: Flow must be a number, got the text '46 m3/h'."),
        ({"Flow": "46.0"}, "List!E3: Flow must be a number, got the text '46.0'."),
        ({"Flow": "tba"}, "List!E3: Flow must be a number, got the text 'tba'. Type a number, or leave it blank."),
        ({"Flow": "#N/A"}, "List!E3: Flow must be a number, got the text '#N/A'. The cell holds an error"),
        ({"Flow": True}, "List!E3: Flow must be a number and is a logical value, got TRUE."),
        ({"p1": -1.0}, "List!F3: p1 must be above 0 bar, got -1 bar a. Pressures are absolute"),
        ({"FL": 90}, "List!I3: FL must be at most 1, got 90."),
        ({"Temperature": -300}, "List!D3: Temperature must be above -273.15 deg C, got -300 deg C."),
    ],
)  # fmt: skip
def test_cells_that_cannot_be_used(changes: dict[str, Any], sentence: str, tmp_path: Path) -> None:
    survey = _survey(tmp_path, HEADINGS, [GOOD, _row(Case="maximum", **changes)])
    assert sentence in _said(survey)
    assert survey.findings.regime.tolist() == ["clear", None]
    assert any(sentence in error for error in survey.findings.errors[1])
    assert survey.findings.errors[0] == []
    assert survey.exit_code == 1


@pytest.mark.parametrize(
    ("changes", "sentence"),
    [
        ({"Liquid": None}, "pv (vapour pressure at inlet temperature, absolute) must be given; or name the liquid"),
        ({"Temperature": None}, "pv (vapour pressure at inlet temperature, absolute) must be given"),
        ({"Liquid": "moonshine"}, "fluid must be a known liquid, got 'moonshine'"),
        ({"Liquid": "glycol water"}, "is a mixture whose vapour pressure depends on its composition"),
        ({"Temperature": 160}, "the liquid would boil before the valve"),
        ({"Temperature": 380}, "t is above the critical temperature"),
        ({"p2": 7.0}, "p2 must be below p1 = 5.8 bar, got 7 bar: check that the two are not swapped"),
        ({"FL": None}, "FL (liquid pressure recovery factor FL at the operating travel) must be given"),
        ({"Flow": None}, "Flow (volume flow at flowing conditions) must be given"),
        ({"Incipient": 0.9}, "the incipient limit must be above 1 in upstream form, got 0.9: was another form meant?"),
    ],
)
def test_rows_that_cannot_be_judged(changes: dict[str, Any], sentence: str, tmp_path: Path) -> None:
    """What is wrong with a row that can be read: no regime, no margin, the reason, and the row above judged."""
    survey = _survey(tmp_path, HEADINGS, [GOOD, _row(Tag="21-FCV-111", **changes)])
    assert any(sentence in error for error in survey.findings.errors[1]), survey.findings.errors[1]
    assert survey.findings.regime.tolist() == ["clear", None]
    assert survey.findings.margin[1] != survey.findings.margin[1]
    assert not survey.findings.fails[1]
    assert survey.items[1].unanswered == 1
    assert survey.exit_code == 1


def test_no_valve_passes(tmp_path: Path) -> None:
    """The reason of LP_COEFFICIENT, in its own words: the reducers alone take the whole drop."""
    headings = (*HEADINGS, "Inlet pipe bore [mm]")
    survey = _survey(tmp_path, headings, [[*_row(Flow=900), 200]])
    assert any("no valve of this size passes the flow" in error for error in survey.findings.errors[0])


def test_relative_density_typed_as_density(tmp_path: Path) -> None:
    survey = _survey(tmp_path, (*HEADINGS, "Density [kg/m3]"), [[*GOOD, 0.997]])
    assert "List!L2: Density must be at least 100 kg/m3, got 0.997 kg/m3. A relative density" in _said(survey)
    as_sg = _survey(tmp_path, (*HEADINGS, "SG"), [[*GOOD, 0.997]])
    # SG on water of 15 C, 999.1 kg/m3 (the standard's reference density).
    assert as_sg.cases.density[0] == pytest.approx(0.997 * 999.1)


# --- headings --------------------------------------------------------------------------------------------------------


def test_header_twice(tmp_path: Path) -> None:
    survey = _survey(tmp_path, (*HEADINGS, "Inlet pressure [psia]"), [[*GOOD, 84.1]])
    assert ("List!L1: p1 has a column already, 'p1 [bar a]' in F1: neither was used, got the text 'Inlet pressure "
            "[psia]'. Keep one of the two.") in _said(survey)  # fmt: skip
    assert [c.status for c in survey.reading.columns if c.field == "p1"] == ["twice", "twice"]
    assert survey.findings.regime.tolist() == [None]


@pytest.mark.parametrize(
    ("heading", "status"), [("p1", "no unit"), ("p1 [furlong]", "wrong unit"), ("p1 [m]", "wrong unit")]
)
def test_unit_missing_or_unknown(heading: str, status: str, tmp_path: Path) -> None:
    headings = [heading if name.startswith("p1") else name for name in HEADINGS]
    survey = _survey(tmp_path, headings, [GOOD])
    problem = survey.reading.problems[0]
    assert (problem.sheet, problem.cell) == ("List", "F1")
    assert "Write it behind the name, as in 'p1 [bar g]'." in problem.sentence()
    assert [c.status for c in survey.reading.columns if c.field == "p1"] == [status]
    assert survey.reading.missing == ("p1",)
    assert survey.findings.regime.tolist() == [None]


def test_unknown_columns_are_named_and_the_rest_judged(tmp_path: Path) -> None:
    strange = [f"Strange {i}" for i in range(100)]
    survey = _survey(tmp_path, (*HEADINGS, *strange, "Dencity [kg/m3]", "Remarks"), [[*GOOD, *range(100), 998, "fine"]])
    assert len(survey.reading.unknown()) == 101
    assert len(survey.reading.problems) == 101
    assert "List!L1: the column is not known and was not used, got the text 'Strange 0'." in _said(survey)
    assert (
        "List!DH1: the column is not known and was not used, got the text 'Dencity [kg/m3]'. Did you mean 'Density'?"
        in (_said(survey))
    )
    assert survey.findings.regime.tolist() == ["clear"]
    assert survey.exit_code == 1


def test_values_below_no_heading(tmp_path: Path) -> None:
    survey = _survey(tmp_path, (*HEADINGS, None), [[*GOOD, 17]])
    assert "List!L1: the column has values and no heading, and was not used. Give it a heading." in _said(survey)


def test_missing_columns_are_reported(tmp_path: Path) -> None:
    survey = _survey(tmp_path, ("Tag", "Flow [m3/h]", "p1 [bar a]"), [("21-FCV-110", 46, 5.8)])
    assert survey.reading.missing == ("p2, or Outlet into", "pv, or Liquid and Temperature", "pc, or Liquid",
                                      "Density, or Liquid and Temperature", "FL, or Table (valves)")  # fmt: skip
    assert "valve_size" in survey.reading.absent
    assert "p1" not in survey.reading.absent


# --- gauge pressures -------------------------------------------------------------------------------------------------

GAUGE = tuple(name.replace("bar a", "bar g") for name in HEADINGS)


def test_gauge_without_atmosphere(tmp_path: Path) -> None:
    survey = _survey(tmp_path, GAUGE, [GOOD])
    assert "List!F1: p1 is a gauge pressure, and no atmosphere of the site is given, got the text 'p1 [bar g]'." in (
        _said(survey)
    )
    assert "--elevation METRES" in _said(survey)
    assert survey.findings.regime.tolist() == [None]


# ISO 2533: 101325 Pa at sea level, 89875 Pa at 1000 m (table of the standard atmosphere).
def test_gauge_by_command_line_column_or_line_above(tmp_path: Path) -> None:
    by_command = _survey(tmp_path, GAUGE, [GOOD], elevation=1000.0)
    assert by_command.cases.p1[0] == pytest.approx(5.8e5 + 89875, abs=3)
    by_column = _survey(tmp_path, (*GAUGE, "Site elevation [ft]"), [[*GOOD, 1000 / 0.3048]])
    assert by_column.cases.p1[0] == pytest.approx(by_command.cases.p1[0], rel=1e-9)
    by_atmosphere = _survey(tmp_path, (*GAUGE, "Atmosphere [mbar]"), [[*GOOD, 1013.25]], elevation=1000.0)
    assert by_atmosphere.cases.p1[0] == pytest.approx(5.8e5 + 101325)
    book = openpyxl.Workbook()
    book.active.append(["Kestrel Bay"])
    book.active.append(["Site elevation [m]", None, 1000])
    book.active.append([])
    book.active.append(list(GAUGE))
    book.active.append(list(GOOD))
    book.save(tmp_path / "above.xlsx")
    above = survey_list(tmp_path / "above.xlsx")
    assert above.cases.p1[0] == pytest.approx(by_command.cases.p1[0], rel=1e-12)
    assert "Site elevation was read from above the table of Sheet" in above.reading.notes


def test_one_row_without_atmosphere(tmp_path: Path) -> None:
    rows = [[*GOOD, 10], [*_row(Tag="21-FCV-111"), None], [*_row(Case="maximum"), None]]
    survey = _survey(tmp_path, (*GAUGE, "Site elevation [m]"), rows)
    assert "List!F3: p1 is a gauge pressure, and its row gives no atmosphere, got 5.8." in _said(survey)
    # The third row is of the item of the first, whose elevation holds for it.
    assert survey.findings.regime.tolist() == ["clear", None, "clear"]


def test_a_difference_is_not_gauge(tmp_path: Path) -> None:
    survey = _survey(tmp_path, (*HEADINGS, "Test head [bar g]"), [[*GOOD, 6]], elevation=0.0)
    assert "List!L1: Test head is a difference of pressures, which is not gauge" in _said(survey)
    assert survey.findings.regime.tolist() == ["clear"]


# --- decimal commas --------------------------------------------------------------------------------------------------


def _with_commas(row: Sequence[Any]) -> list[str]:
    return [str(value).replace(".", ",") if isinstance(value, float) else str(value) for value in row]


def test_decimal_commas_of_a_csv_are_read_where_they_leave_no_doubt(tmp_path: Path) -> None:
    survey = survey_list(write_csv(tmp_path / "list.csv", HEADINGS, [_with_commas(GOOD)], ";"))
    assert survey.reading.problems == ()
    assert "numbers were read with a decimal comma, as all of them are written" in survey.reading.notes
    assert survey.findings.regime.tolist() == ["clear"]
    assert survey.cases.p1[0] == pytest.approx(5.8e5)


def test_mixed_decimal_signs_are_not_guessed(tmp_path: Path) -> None:
    rows = [_with_commas(GOOD), [str(value) for value in _row(Case="maximum", Flow=46.5)]]
    survey = survey_list(write_csv(tmp_path / "list.csv", HEADINGS, rows, ";"))
    assert survey.findings.regime.tolist() == [None, None]
    assert ("list.csv!F2: p1 must be a number, got the text '5,8'. Points and commas are mixed in this file: write "
            "every number with a decimal point.") in _said(survey)  # fmt: skip


def test_thousands_or_decimals_is_not_guessed(tmp_path: Path) -> None:
    row = [str(v) for v in _row(Flow="1,234", p1=6, p2=5, FL=1, Incipient=2, Damage=2)]
    survey = survey_list(write_csv(tmp_path / "list.csv", HEADINGS, [row], ";"))
    assert "list.csv!E2: Flow must be a number, got the text '1,234'." in _said(survey)
    assert survey.findings.regime.tolist() == [None]


@pytest.mark.parametrize(("codec", "note"), [("utf-8-sig", ""), ("utf-16", ""), ("cp1252", "code page 1252")])
def test_encodings_and_the_line_that_names_the_separator(codec: str, note: str, tmp_path: Path) -> None:
    lines = ["sep=;", ";".join(HEADINGS).replace("deg C", "°C"), ";".join(map(str, GOOD))]
    (tmp_path / "list.csv").write_bytes("\r\n".join(lines).encode(codec))
    survey = survey_list(tmp_path / "list.csv")
    assert survey.findings.regime.tolist() == ["clear"]
    assert int(survey.cases.row[0]) == 3
    assert note in " ".join(survey.reading.notes)


# --- what a sheet hides ----------------------------------------------------------------------------------------------


def test_merged_cells(tmp_path: Path) -> None:
    path = write_xlsx(tmp_path / "list.xlsx", HEADINGS, [GOOD, _row(Tag=None, Case="maximum"), _row(Tag="21-FCV-111")])
    book = openpyxl.load_workbook(path)
    book["List"].merge_cells("A2:A3")
    book.save(path)
    survey = survey_list(path)
    assert ("List!A2:A3: merged cells; their value was taken for every one of their rows, got the text '21-FCV-110'. "
            "Split them, and write the value into each cell.") in _said(survey)  # fmt: skip
    assert survey.cases.tag.tolist() == ["21-FCV-110", "21-FCV-110", "21-FCV-111"]
    assert survey.findings.regime.tolist() == ["clear"] * 3
    assert survey.exit_code == 1


def test_a_blank_tag_is_not_guessed(tmp_path: Path) -> None:
    survey = _survey(tmp_path, HEADINGS, [GOOD, _row(Tag=None, Case="maximum")])
    assert "List!A3: Tag must be given, got a blank cell." in _said(survey)
    assert survey.findings.regime.tolist() == ["clear", None]


def test_hidden_rows_and_columns(tmp_path: Path) -> None:
    path = write_xlsx(tmp_path / "list.xlsx", HEADINGS, [GOOD, *(_row(Case=f"upset {i}") for i in range(3))])
    book = openpyxl.load_workbook(path)
    for row in (3, 4):
        book["List"].row_dimensions[row].hidden = True
    book["List"].column_dimensions["I"].hidden = True
    book.save(path)
    survey = survey_list(path)
    assert "List!3:4: the rows are hidden and judged all the same. Show or delete what is hidden." in _said(survey)
    assert "List!I1: the column is hidden and used all the same, got the text 'FL'." in _said(survey)
    assert survey.findings.regime.tolist() == ["clear"] * 4


def test_hidden_and_merged_in_open_document(tmp_path: Path) -> None:
    merged = ('<table:table-cell table:number-rows-spanned="2" office:value-type="string"><text:p>21-FCV-110</text:p>'
              "</table:table-cell>")  # fmt: skip
    rows = [[merged, *GOOD[1:]], ["<table:covered-table-cell/>", "maximum", *GOOD[2:]]]
    marks = ["", "", 'table:visibility="collapse"']
    survey = survey_list(write_ods(tmp_path / "list.ods", HEADINGS, rows, marks))
    assert "List!3:3: the row is hidden" in _said(survey)
    assert "List!A2:A3: merged cells" in _said(survey)
    assert survey.cases.tag.tolist() == ["21-FCV-110", "21-FCV-110"]
    assert survey.findings.regime.tolist() == ["clear", "clear"]


def test_formulas_without_values(tmp_path: Path) -> None:
    path = write_xlsx(tmp_path / "list.xlsx", HEADINGS, [GOOD, _row(Case="maximum", Flow="=40+6")])
    survey = survey_list(path)
    assert ("List!E3: Flow is a formula without a value. Open the book in a spreadsheet program and save it there, or "
            "recompute it with 'lowpoint recalc'.") in _said(survey)  # fmt: skip
    assert survey.findings.regime.tolist() == ["clear", None]


def test_formula_like_text_is_text(tmp_path: Path) -> None:
    headings = (*HEADINGS, "Service")
    survey = survey_list(write_csv(tmp_path / "list.csv", headings, [[*GOOD, '=HYPERLINK("http://x","y")']]))
    assert "list.csv!L2: Service looks like a formula; it was read as text, and is written as text" in _said(survey)
    assert survey.cases.service[0] == '=HYPERLINK("http://x","y")'
    assert survey.findings.regime.tolist() == ["clear"]
    assert survey.exit_code == 1


def test_twins(tmp_path: Path) -> None:
    survey = _survey(tmp_path, HEADINGS, [GOOD, _row(Case="maximum"), _row(Case="Normal", p2=1.6)])
    sentence = ("List!B4: 21-FCV-110 with case 'Normal' stands already in row 2; both were judged. Give every case of "
                "an item its own name, or delete one row.")  # fmt: skip
    assert sentence in _said(survey)
    assert sentence in survey.findings.cautions[0]
    assert sentence in survey.findings.cautions[2]
    assert survey.findings.regime.tolist() == ["clear", "clear", "damage"]
    assert survey.items[0].worst == 2


@pytest.mark.parametrize("rows", [[], [()], [("Kestrel Bay",), ("nothing here",)]])
def test_no_list(rows: list[tuple[Any, ...]], tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    for row in rows:
        book.active.append(list(row))
    book.save(tmp_path / "list.xlsx")
    survey = survey_list(tmp_path / "list.xlsx")
    assert survey.cases.count == 0
    assert _said(survey).startswith("Sheet: no row has the headings" if len(rows) > 1 else "Sheet: the sheet is empty")
    assert "'lowpoint starter list'" in _said(survey)
    assert survey.exit_code == 1


def test_a_list_without_rows(tmp_path: Path) -> None:
    survey = _survey(tmp_path, HEADINGS, [])
    assert _said(survey) == "List: the list has headings and no rows below them. Fill in a row for each case."
    assert survey.exit_code == 1


@pytest.mark.parametrize(
    ("name", "content", "words"),
    [
        ("list.pdf", b"%PDF-1.7", "a list must be .xlsx, .xlsm, .csv or .ods, got .pdf."),
        ("list.xlsx", b"%PDF-1.7", "got a PDF document"),
        ("list.csv", b"PK\3\4\0\0\0\0", "must be a list as text"),
        ("list.ods", b"Tag;Flow", "got plain text, such as a CSV list"),
    ],
)
def test_files_that_are_no_list(name: str, content: bytes, words: str, tmp_path: Path) -> None:
    (tmp_path / name).write_bytes(content)
    with pytest.raises(BookError, match=words.replace(".", r"\.")):
        survey_list(tmp_path / name)


def test_a_hostile_open_document(tmp_path: Path) -> None:
    import zipfile

    with zipfile.ZipFile(tmp_path / "list.ods", "w") as package:
        package.writestr("content.xml", '<?xml version="1.0"?><!DOCTYPE x [<!ENTITY a "aaaa">]><x>&a;</x>')
    with pytest.raises(BookError, match="declares a document type or entities"):
        survey_list(tmp_path / "list.ods")


# --- what belongs to the item ----------------------------------------------------------------------------------------


def test_what_belongs_to_the_item_stands_in_one_row(tmp_path: Path) -> None:
    """Sizes and limits of the first row hold for the second; FL and pressures are of the case, and are asked for."""
    second = _row(Case="maximum", Liquid=None, Valve=None, Incipient=None, Damage=None)
    third = _row(Case="upset", FL=None)
    survey = _survey(tmp_path, HEADINGS, [GOOD, second, third])
    assert survey.findings.regime.tolist() == ["clear", "clear", None]
    assert survey.findings.incipient[1] == survey.findings.incipient[0]
    assert survey.cases.source["incipient"].tolist()[:2] == ["given", "item"]


def test_an_item_with_two_sizes(tmp_path: Path) -> None:
    survey = _survey(tmp_path, HEADINGS, [GOOD, _row(Case="maximum", Valve=100)])
    assert "List!H3: Valve size of 21-FCV-110 differs from that in its first row" in _said(survey)
    assert survey.findings.regime.tolist() == ["clear", "clear"]


def test_lists_on_two_sheets_with_their_own_units(tmp_path: Path) -> None:
    path = write_xlsx(tmp_path / "list.xlsx", HEADINGS, [GOOD])
    book = openpyxl.load_workbook(path)
    other = book.create_sheet("North")
    other.append([name.replace("bar a", "psia") for name in HEADINGS])
    other.append(["31-FCV-801", *GOOD[1:5], 5.8 * 14.5037738, "x", *GOOD[7:]])
    book.save(path)
    survey = survey_list(path)
    # 1 bar is 14.5037738 psi (exact definitions, common practice).
    assert survey.cases.p1[1] == pytest.approx(survey.cases.p1[0], rel=1e-8)
    assert survey.reading.sheets == ("List", "North")
    assert "North!G2: p2 must be a number, got the text 'x'." in _said(survey)
    assert survey.reading.problems[0].row == 1
    assert survey.findings.regime.tolist() == ["clear", None]
