"""Lists that try for a pass they must not have, and texts that try to hide rows or to steer what shows them."""

from __future__ import annotations

import zipfile
from collections.abc import Callable
from itertools import permutations
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from lowpoint.faces import cli
from lowpoint.survey import Survey, survey_list
from lowpoint.survey.as_json import as_json
from survey_lists import GOOD, HEADINGS, write_csv, write_ods, write_xlsx

HEADER, ROW = (";".join(map(str, cells)) + "\n" for cells in (HEADINGS, GOOD))
GAUGE = ("Tag", "Liquid", "Temperature [deg C]", "Flow [m3/h]", "p1 [bar g]", "p2 [bar g]", "FL", "Incipient")
GAUGE_ROW = ("21-FCV-110", "water", 20, 46, 4.8, 3.2, 0.9, 2.1)


def _survey(folder: Path, *rows: dict[str, Any], tables: list[list[Any]] | None = None) -> Survey:
    """Rows like the good one, each with changes (None: without that column), as a workbook."""
    wholes = [dict(zip(HEADINGS, GOOD, strict=True)) | {"Case": f"case {i}"} | row for i, row in enumerate(rows)]
    headings = list(dict.fromkeys(heading for row in wholes for heading in row))
    path = write_xlsx(folder / "list.xlsx", headings, [[row.get(heading) for heading in headings] for row in wholes])
    if tables:
        book = openpyxl.load_workbook(path)
        sheet = book.create_sheet("Vendor")
        for cells in tables:
            sheet.append(cells)
        book.save(path)
    return survey_list(path)


def _text(folder: Path, text: str) -> Survey:
    path = folder / "list.csv"
    path.write_text(text, encoding="utf-8", newline="")
    return survey_list(path)


def _said(survey: Survey) -> str:
    return "\n".join(problem.sentence() for problem in survey.reading.problems)


# --- no pass where none is due ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("keep", [None, "incipient"])
def test_a_milder_limit_below_a_worse_one_is_no_pass(keep: str | None, tmp_path: Path) -> None:
    # Index 3.6 by definition; damage at 3.8 is reached, whatever stands under Incipient.
    survey = _survey(tmp_path, {"Incipient": 2.1, "Damage": 3.8, "Limit to keep": keep})
    found = survey.findings
    assert (found.regime[0], bool(found.fails[0]), found.keep[0]) == ("damage", True, "damage")
    assert found.margin[0] < 0.0
    assert any("not in their usual order" in text for text in found.cautions[0])
    assert not any("is not given" in text and "limit to keep" in text for text in found.cautions[0])
    assert survey.exit_code == 1


def test_a_worse_limit_above_the_one_to_keep_counts(tmp_path: Path) -> None:
    found = _survey(tmp_path, {"Damage": 2.0, "Vibration": 3.8, "Limit to keep": "damage"}).findings
    assert (found.regime[0], bool(found.fails[0]), found.keep[0]) == ("vibration", True, "vibration")


def test_limits_in_order_are_kept_as_asked(tmp_path: Path) -> None:
    found = _survey(tmp_path, {"Incipient": 3.8, "Damage": 2.0, "Limit to keep": "damage"}).findings
    assert (found.keep[0], bool(found.fails[0])) == ("damage", False)


def test_a_vibration_limit_of_another_form_is_no_limit(tmp_path: Path) -> None:
    survey = _survey(tmp_path, {"Vibration": 0.8, "Limit to keep": "vibration"})
    assert survey.findings.regime[0] is None
    assert "the vibration limit must be above 1 in upstream form, got 0.8" in survey.findings.errors[0][0]


TABLE: list[list[Any]] = [["Table", "Travel [%]", "Kv", "FL"], ["T", 10, 4, 0.95], ["T", 100, 40, 0.8]]


def test_a_table_rules_over_a_larger_rated_coefficient(tmp_path: Path) -> None:
    # Q sqrt(1/1.6) = 71 Kv of water for 90 m3/h: the table of the open valve ends at 40.
    found = _survey(tmp_path, {"Table": "T", "Rated Kv": 300, "FL": None, "Flow [m3/h]": 90}, tables=TABLE).findings
    assert bool(found.over_capacity[0])
    assert bool(found.fails[0])
    assert found.capacity[0] == pytest.approx(90.0 * (0.99821 / 1.6) ** 0.5 / 40.0, rel=1e-3)


def test_a_table_that_ends_early_says_which_end_it_is(tmp_path: Path) -> None:
    tables = [TABLE[0], TABLE[1], ["T", 80, 40, 0.8]]
    found = _survey(tmp_path, {"Table": "T", "Rated Kv": 300, "Flow [m3/h]": 90},
                    {"Table": "T", "Rated Kv": 300, "Flow [m3/h]": 2}, tables=tables).findings  # fmt: skip
    assert any("more open than the last row of its table" in text for text in found.cautions[0])
    assert any("less open than the first row of its table" in text for text in found.cautions[1])
    assert not found.over_capacity.any()


# --- atmosphere and units --------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("heading", "value", "words"),
    [
        ("Atmosphere [bar]", 1013, "Atmosphere must be below 2 bar, got 1013 bar"),
        ("Atmosphere [bar]", -1, "Atmosphere must be above 0.2 bar, got -1 bar"),
        ("Atmosphere [bar g]", 0, "Atmosphere is the atmosphere itself, which is not gauge"),
        ("Site elevation [m]", 1e6, "Site elevation must be at most 11000 m"),
        ("Site elevation [m]", "about 100", "Site elevation must be a number, got the text 'about 100'"),
        ("Site elevation", 100, "the heading of Site elevation must name its unit"),
    ],
)
@pytest.mark.parametrize("above", [True, False])
def test_an_atmosphere_that_cannot_be(heading: str, value: Any, words: str, above: bool, tmp_path: Path) -> None:
    headings, row = (GAUGE, GAUGE_ROW) if above else ((*GAUGE, heading), (*GAUGE_ROW, value))
    path = tmp_path / "list.xlsx"
    book = openpyxl.Workbook()
    sheet = book.worksheets[0]
    for cells in [*([[heading, value]] if above else []), headings, row]:
        sheet.append(list(cells))
    book.save(path)
    survey = survey_list(path)
    assert words in _said(survey)
    assert survey.findings.regime.tolist() == [None]
    assert survey.exit_code == 1


def test_a_second_elevation_above_the_table(tmp_path: Path) -> None:
    text = "\n".join(["Site elevation [m];100", "Site elevation [m];2000", ";".join(GAUGE),
                      ";".join(map(str, GAUGE_ROW))])  # fmt: skip
    survey = _text(tmp_path, text)
    assert "list.csv!B2: Site elevation stands above the table twice; the first was used" in _said(survey)
    # ISO 2533:1975, table: 100 m has 1001.29 hPa.
    assert survey.cases.p1[0] == pytest.approx(4.8e5 + 100129.0, abs=5.0)


def test_a_title_above_the_table_is_no_elevation(tmp_path: Path) -> None:
    survey = _text(tmp_path, f"Elevation;Drawn by the island utility\n{HEADER}{ROW}")
    assert survey.reading.problems == ()


def test_a_pressure_without_a_or_g_is_told(tmp_path: Path) -> None:
    headings = [heading.replace("bar a", "bar") for heading in HEADINGS]
    survey = survey_list(write_xlsx(tmp_path / "list.xlsx", headings, [GOOD]))
    assert any(note.startswith("p1, p2 of List: read as absolute") for note in survey.reading.notes)
    assert survey.findings.regime.tolist() == ["clear"]


def test_two_units_of_one_column(tmp_path: Path) -> None:
    headings = [heading.replace("Temperature [deg C]", "Temperature") for heading in HEADINGS]
    units = [None, None, None, "deg C", "m3/h", "psi", "bar a", "mm", "-", "-", "-"]
    survey = survey_list(write_xlsx(tmp_path / "list.xlsx", headings, [units, GOOD]))
    assert "List!F1: the heading of p1 says 'bar a' and the cell below it 'psi'" in _said(survey)
    assert survey.findings.regime.tolist() == [None]


@pytest.mark.parametrize(("heading", "value", "words"), [
    ("Mass flow [t/h]", -5, "Flow must be above 0, got -5 t/h"),
    ("Mass flow [t/h]", 0, "Flow must be above 0, got 0 t/h"),
    ("Viscosity [cSt]", -1, "Viscosity must be above 0, got -1 cSt"),
    ("Friction to the place [bar]", -0.4, "Friction to the place must be at least 0 bar, got -0.4 bar"),
    ("Pressure there [bar a]", -3, "Pressure there must be above 0 bar, got -3 bar a"),
])  # fmt: skip
def test_impossible_numbers_of_every_kind_are_named(heading: str, value: float, words: str, tmp_path: Path) -> None:
    headings = [heading if heading.startswith("Mass") and h.startswith("Flow") else h for h in HEADINGS]
    row: list[Any] = [value if h == heading else cell for h, cell in zip(headings, GOOD, strict=True)]
    if heading not in headings:
        headings, row = [*headings, heading], [*row, value]
    survey = survey_list(write_xlsx(tmp_path / "list.xlsx", headings, [row, [*GOOD[:1], "other", *GOOD[2:]]]))
    assert words in _said(survey)
    assert survey.findings.regime.tolist() == [None, "clear"]


# --- texts -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("other", ["21-fcv-110", "21 - FCV - 110", "21-FCV-110\u200b", "21\u2011FCV\u2011110"])
def test_tags_that_the_eye_cannot_tell_apart(other: str, tmp_path: Path) -> None:
    survey = _survey(tmp_path, {}, {"Tag": other}, {"Tag": "21-FCV-111"})
    problems = [problem for problem in survey.reading.problems if problem.text.startswith("Tag differs from")]
    assert [problem.cell for problem in problems] == ["A3"]
    assert len(survey.items) == 3


def test_rows_that_a_quotation_mark_swallows_are_told(tmp_path: Path) -> None:
    second, last = ROW.replace("normal", '"second'), ROW.replace("normal", 'third"')
    survey = _text(tmp_path, HEADER + ROW + second + last + ROW.replace("normal", "fourth"))
    assert "list.csv!B3: the value runs on over several lines, and rows may be lost in it" in _said(survey)
    assert survey.findings.regime.tolist() == ["clear", None, "clear"]


def test_a_value_without_end_is_named_by_its_line(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "list.csv"
    path.write_text(HEADER + ROW + ROW.replace("normal", '"open') + ROW * 1000, encoding="utf-8")
    assert cli.main(["survey", str(path)]) == 2
    assert "a value of line 3 is longer than" in capsys.readouterr().err


def test_a_wrong_separator_does_not_stop_a_list(tmp_path: Path) -> None:
    # Behind a comma, `"` opens a value that never ends: with semicolons it is a sign like any other.
    rows = "".join(ROW.replace("normal", f'{i},"4 in') for i in range(1000))
    assert _text(tmp_path, HEADER + rows).cases.count == 1000


def test_control_signs_reach_nobody(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "list.csv"
    evil = ROW.replace("21-FCV-110", "\x1b[2J\x9b31m\u202eFV\x07").replace("normal", "a\x01b")
    path.write_text(HEADER[:-1] + ";Remark\n" + evil[:-1] + ";\x1b[31mred\n", encoding="utf-8")
    out, page = tmp_path / "out.xlsx", tmp_path / "out.html"
    assert cli.main(["survey", str(path), "-o", str(out), "--html", str(page)]) == 1
    shown = "".join(capsys.readouterr())
    assert "list.csv!A2: the text holds control signs, which were left out" in shown
    assert "list.csv!L2: the text holds control signs" in shown
    written = [str(cell.value) for sheet in openpyxl.load_workbook(out) for row in sheet.iter_rows() for cell in row]
    for text in (shown, page.read_text(encoding="utf-8"), *written):
        assert not {"\x1b", "\x9b", "\u202e", "\x07", "\x01"} & {*text}
    assert "[2J31mFV" in written


def test_a_text_of_several_lines_is_one_line(tmp_path: Path) -> None:
    survey = _survey(tmp_path, {"Tag": "21-FCV-110\n  (spare)", "Service": "feed\r\nof the boiler"})
    assert (survey.cases.tag[0], survey.cases.service[0]) == ("21-FCV-110 (spare)", "feed of the boiler")


def test_rows_without_a_tag_are_the_same_in_the_results(tmp_path: Path) -> None:
    path = write_csv(tmp_path / "list.csv", HEADINGS, [GOOD, [None, *GOOD[1:]], ["", *GOOD[1:]]])
    cli.main(["survey", str(path), "-o", str(tmp_path / "out.xlsx")])
    tags = [survey_list(name).cases.tag.tolist() for name in (path, tmp_path / "out.xlsx")]
    assert tags == [["21-FCV-110", "(no tag 1)", "(no tag 2)"]] * 2


def test_many_twins_burden_the_first_row_once(tmp_path: Path) -> None:
    survey = survey_list(write_csv(tmp_path / "list.csv", HEADINGS, [GOOD] * 50))
    twins = [[text for text in said if "stands already" in text] for said in survey.findings.cautions]
    assert [len(said) for said in twins] == [1] * 50
    assert len(survey.reading.problems) == 49


@pytest.mark.parametrize("text", ["+1+cmd|' /C calc'!A0", "-2+3", "+1*A1"])
def test_formulas_that_begin_with_a_number(text: str, tmp_path: Path) -> None:
    survey = survey_list(write_csv(tmp_path / "list.csv", HEADINGS, [[text, *GOOD[1:]]]))
    assert "Tag looks like a formula" in _said(survey)


@pytest.mark.parametrize("text", ["-5", "+10 %", "- to the drain", "-5,5", "+3.5 bar"])
def test_texts_that_only_begin_with_a_sign(text: str, tmp_path: Path) -> None:
    survey = survey_list(write_csv(tmp_path / "list.csv", (*HEADINGS, "Service"), [[*GOOD, text]]))
    assert survey.reading.problems == ()


def test_no_case_passes_at_or_below_a_limit_that_counts(tmp_path: Path) -> None:
    """Every order of four limits, every limit to keep: a pass is above it and above all that are worse."""
    names = ("Incipient", "Constant", "Damage", "Vibration")
    rows: list[dict[str, Any]] = [
        dict(zip(names, values, strict=True)) | {"Limit to keep": keep}
        for values in permutations((1.5, 2.5, 4.0, 5.5))
        for keep in (None, *map(str.lower, names))
    ]
    cases = as_json(_survey(tmp_path, *rows), "metric")["cases"]
    assert {case["fails"] for case in cases} == {True, False}
    for row, case in zip(rows, cases, strict=True):
        first = [name.lower() for name in names].index(row["Limit to keep"] or "incipient")
        above = all(case["sigma"] > row[name] for name in names[first:])
        assert case["fails"] == (not above), (row, case["regime"])


# --- OpenDocument ----------------------------------------------------------------------------------------------------


def _ods(folder: Path, change: Callable[[str], str], rows: int = 1) -> Survey:
    """The good list as .ods, its content changed."""
    path = write_ods(folder / "list.ods", HEADINGS, [GOOD] * rows)
    with zipfile.ZipFile(path) as package:
        parts = {name: package.read(name) for name in package.namelist()}
    parts["content.xml"] = change(parts["content.xml"].decode()).encode()
    with zipfile.ZipFile(path, "w") as package:
        for name, part in parts.items():
            package.writestr(name, part)
    return survey_list(path)


def _last_row(content: str, attribute: str) -> str:
    head, tag, tail = content.rpartition("<table:table-row")
    return f"{head}{tag} {attribute}{tail}"


def test_no_row_that_stands_for_many_is_lost(tmp_path: Path) -> None:
    survey = _ods(tmp_path, lambda content: _last_row(content, 'table:number-rows-repeated="10050"'))
    assert survey.cases.count == 10050
    assert survey.cases.row[-1] == 10051


def test_what_is_hidden_in_an_open_document(tmp_path: Path) -> None:
    columns = ('<table:table-column table:number-columns-repeated="5"/>'
               '<table:table-column table:visibility="collapse"/>')  # fmt: skip
    survey = _ods(tmp_path, lambda content: content.replace("<table:table-row", f"{columns}<table:table-row", 1))
    assert "List!F1: the column is hidden and used all the same" in _said(survey)


def test_a_hidden_sheet_of_an_open_document(tmp_path: Path) -> None:
    style = ('<office:automatic-styles xmlns:style="urn:oasis:names:tc:opendocument:xmlns:style:1.0">'
             '<style:style style:name="ta9" style:family="table"><style:table-properties table:display="false"/>'
             "</style:style></office:automatic-styles>")  # fmt: skip

    def hide(content: str) -> str:
        content = content.replace("<office:body>", f"{style}<office:body>")
        return content.replace("<table:table ", '<table:table table:style-name="ta9" ', 1)

    assert "the sheet is hidden and was read all the same" in _said(_ods(tmp_path, hide))


def test_a_logical_value_is_no_number(tmp_path: Path) -> None:
    kept = 'table:formula="of:=TRUE()" office:value-type="float" office:value="1"'
    survey = _ods(tmp_path, lambda content: content.replace('office:value-type="float" office:value="0.9"', kept))
    assert "List!I2: FL must be a number and is a logical value, got TRUE" in _said(survey)
    assert survey.findings.regime.tolist() == [None]
