"""The sample books: their structure, their planted mistakes, and that all else has an answer."""

from __future__ import annotations

import re
import zipfile
from collections import Counter
from collections.abc import Iterator
from typing import Any

import pytest
from openpyxl.formula import Tokenizer
from openpyxl.utils import get_column_letter

from book.starters import SYSTEMS, Sample, committed, formula_of, is_error, made
from lowpoint import registry
from lowpoint.starter import sheet_bytes
from lowpoint.starter.chart_sheet import CASES
from lowpoint.starter.chart_sheet import FIRST_ROW as CHART_FIRST
from lowpoint.starter.columns import COLUMNS
from lowpoint.starter.frame import FIRST, HEADINGS
from lowpoint.starter.list_sheet import LETTERS
from lowpoint.starter.notes import unit_label
from lowpoint.starter.summary_sheet import STATES, UNANSWERED, WORST

ORDINARY = {
    "AND", "CHOOSE", "COUNT", "COUNTA", "COUNTIF", "COUNTIFS", "IF", "INDEX", "ISBLANK", "ISERROR", "ISNUMBER", "MATCH",
    "MIN", "NA", "OR", "ROW", "SMALL", "SUM", "SUMPRODUCT", "_xlfn.MINIFS",
}  # fmt: skip
"""What both spreadsheet programs know, the older one from 2019 on; no XLOOKUP, FILTER or LET."""

both = pytest.mark.parametrize("system", SYSTEMS)


def formulas(book: Any) -> Iterator[tuple[str, str, str]]:
    """Sheet, cell and text of every formula."""
    for sheet in book.worksheets:
        for row in sheet.iter_rows():
            for cell in row:
                if cell.data_type == "f":
                    yield sheet.title, cell.coordinate, formula_of(cell)


def functions_in(formula: str) -> list[str]:
    return [t.value[:-1] for t in Tokenizer(formula).items if t.type == "FUNC" and t.subtype == "OPEN"]


# --- structure --------------------------------------------------------------------------------------------------
def test_as_many_items_as_promised() -> None:
    assert len(made("metric").plant.items) >= 60
    assert len(made("us").plant.items) >= 12


@both
def test_three_cases_an_item_one_row_each(system: str) -> None:
    sample = made(system)
    tags = [item.tag for item in sample.plant.items]
    assert len(set(tags)) == len(tags)
    for row, item, case in sample.rows():
        assert (sample.value(row, "tag"), sample.value(row, "case")) == (item.tag, case.name)
    assert all(len({case.name for case in item.cases}) == 3 for item in sample.plant.items)
    listed = [cell.value for cell in sample.values["List"]["A"][FIRST - 1 :]]
    assert Counter(listed) == dict.fromkeys(tags, 3)
    assert [cell.value for cell in sample.values["Items"]["A"][FIRST - 1 :]] == tags


def test_the_liquids_of_an_island_utility_are_there() -> None:
    fluids = {item.fluid for item in made("metric").plant.items}
    assert fluids >= {"sea water", "brine", "distillate", "demineralised water", "boiler feed water", "condensate",
                      "district heating water", "propane", "n-hexane", "methanol", "ammonia"}  # fmt: skip


@both
def test_every_function_is_known(system: str) -> None:
    used: set[str] = set()
    for sheet, cell, formula in formulas(made(system).formulas):
        for name in functions_in(formula):
            used.add(name)
            if name.startswith(("LP_", "LPU_")):
                assert registry.canonical(name) == name, f"{sheet}!{cell}: {name}"
                twin = "LPU_" + name.removeprefix("LP_")
                assert system == "metric" or not (name.startswith("LP_") and twin in registry.functions), name
            else:
                assert name in ORDINARY, f"{sheet}!{cell}: {name}"
        for asked in re.findall(r'"(LPU?_\w+)"', formula):
            assert registry.canonical(asked) == asked
            assert system == "metric" or "LPU_" + asked.removeprefix("LP_") not in registry.functions, asked
    assert {name for name in used if name.startswith("LP")} >= {
        "LP_SIGMA", "LP_REGIME", "LP_MARGIN", "LP_SIGMA_SCALED", "LP_WHY", "LP_ALLOWED_DROP", "LP_TRAVEL",
    }  # fmt: skip
    prefix = "LP_" if system == "metric" else "LPU_"
    assert used >= {prefix + name for name in ("VAPOUR_PRESSURE", "CRITICAL_PRESSURE", "DENSITY", "COEFFICIENT",
                                               "CHOKED_DROP", "SIGMA_CHOKED", "LIMIT_INSTALLED", "ATMOSPHERE",
                                               "UNIT", "OPERATING_TRAVEL", "FLASH", "XFZ", "COLUMN")}  # fmt: skip


@both
def test_each_row_of_the_list_reads_itself_and_names_only(system: str) -> None:
    """So that the list may be sorted, filtered, and its rows copied."""
    for sheet, cell, formula in formulas(made(system).formulas):
        if sheet != "List":
            continue
        row = re.sub(r"\D", "", cell)
        for operand in (t.value for t in Tokenizer(formula).items if t.type == "OPERAND" and t.subtype == "RANGE"):
            assert "!" not in operand, f"{cell}: {operand}"
            for place in re.findall(r"\b[A-Z]{1,3}(\d+)\b", operand):
                assert place == row or "_" in operand, f"{cell}: {operand}"


@both
def test_every_name_points_into_the_book(system: str) -> None:
    book = made(system).formulas
    names = set(book.defined_names)
    for name, defined in book.defined_names.items():
        if defined.attr_text in names:
            continue
        sheet, _, area = defined.attr_text.partition("!")
        assert sheet in book.sheetnames, name
        assert re.fullmatch(r"\$[A-Z]+\$\d+(:\$[A-Z]+\$\d+)?", area), name
    used = set()
    for _, _, formula in formulas(book):
        used |= {
            t.value for t in Tokenizer(formula).items if t.type == "OPERAND" and "_" in t.value and '"' not in t.value
        }
    assert used <= names, used - names
    for validation in book["List"].data_validations.dataValidation:
        assert validation.formula1 in names
        assert validation.type == "list"
    assert {"Words_styles", "Words_fluids", "Words_pressure_units", "Words_cases"} <= names


@both
def test_headings_have_notes_with_meaning_and_unit(system: str) -> None:
    sheet = made(system).formulas["List"]
    for column in COLUMNS:
        heading = sheet[f"{LETTERS[column.key]}{HEADINGS}"]
        unit = unit_label(column.dimension, system)
        assert heading.value == (f"{column.heading}\n{unit}" if unit else column.heading)
        assert heading.comment is not None, column.key
        assert len(heading.comment.text) > 10, column.key
    note = sheet[f"{LETTERS['p1']}{HEADINGS}"].comment.text
    assert "Inlet pressure, absolute" in note
    note = sheet[f"{LETTERS['coefficient']}{HEADINGS}"].comment.text
    assert ("Kv" if system == "metric" else "Cv") in note
    assert "IEC 60534-2-1" in note


@both
def test_layout_for_reading_and_printing(system: str) -> None:
    book = made(system).formulas
    assert book["List"].freeze_panes == f"{LETTERS['area']}{FIRST}"
    assert book["Items"].freeze_panes == f"B{FIRST}"
    for title in ("List", "Items"):
        assert book[title].auto_filter.ref.startswith(f"A{HEADINGS}:")
        assert book[title].print_title_rows
        assert book[title].page_setup.orientation == "landscape"
        assert book[title].sheet_properties.pageSetUpPr.fitToPage
        assert len(book[title].conditional_formatting) > 2
        for place in range(1, book[title].max_column + 1):
            assert book[title].column_dimensions[get_column_letter(place)].width >= 6
    assert book["List"].print_title_cols
    assert book.sheetnames[:4] == ["Read me", "Summary", "Items", "List"]
    assert "Lowpoint supports a qualified engineer" in str([c.value for c in book["Read me"]["B"]])


@both
def test_charts_are_native_and_have_data(system: str) -> None:
    sample = made(system)
    assert len(sample.formulas["Chart"]._charts) == 1
    assert len(sample.formulas["Summary"]._charts) == 1
    with zipfile.ZipFile(sample.path) as package:
        charts = [package.read(n).decode() for n in package.namelist() if n.startswith("xl/charts/")]
    ranges = {text for chart in charts for text in re.findall(r"<(?:c:)?f>([^<]+)</(?:c:)?f>", chart)}
    last = CHART_FIRST + CASES - 1
    assert {f"'Chart'!${column}${CHART_FIRST}:${column}${last}" for column in "BCDEF"} <= ranges
    index = [sample.values["Chart"][f"B{row}"].value for row in range(CHART_FIRST, last + 1)]
    assert sum(isinstance(x, int | float) for x in index) == min(CASES, sum(_numbers(sample.column("margin"))))
    assert all(defined.partition("!")[0].strip("'") in ("Chart", "Summary") for defined in ranges)


def _numbers(values: list[Any]) -> list[bool]:
    return [isinstance(x, int | float) for x in values]


@both
def test_programs_are_not_told_to_compute_it_anew(system: str) -> None:
    with zipfile.ZipFile(committed(system)) as package:
        workbook = package.read("xl/workbook.xml").decode()
        application = package.read("docProps/app.xml").decode()
    assert 'fullCalcOnLoad="1"' not in workbook
    assert 'calcId="191029"' in workbook
    # LibreOffice trusts the stored values of files that name a program it knows (from memory).
    assert "Microsoft Excel" in application


# --- sameness ---------------------------------------------------------------------------------------------------
@both
def test_the_same_bytes_on_every_run(system: str) -> None:
    us = system == "us"
    first = sheet_bytes(us=us)
    assert first == sheet_bytes(us=us)
    with zipfile.ZipFile(made(system).path) as package:
        assert {entry.date_time for entry in package.infolist()} == {(2025, 1, 1, 0, 0, 0)}
        assert b"2025-01-01T00:00:00Z</dcterms:modified>" in package.read("docProps/core.xml")


@both
def test_the_committed_book_is_what_the_script_writes(system: str) -> None:
    """Parts to the byte, but for numbers in cells, which may differ in their last digits from machine to machine."""
    with zipfile.ZipFile(committed(system)) as old, zipfile.ZipFile(made(system).path) as new:
        assert old.namelist() == new.namelist(), "stale: run python workbooks/build.py"
        for name in old.namelist():
            if not name.startswith("xl/worksheets/sheet"):
                assert old.read(name) == new.read(name), f"{name} is stale: run python workbooks/build.py"
    fresh, kept = made(system), Sample(committed(system), made(system).plant)
    for sheet in fresh.formulas.worksheets:
        assert kept.formulas[sheet.title].dimensions == sheet.dimensions
        for row in sheet.iter_rows():
            for cell in row:
                old_cell = kept.formulas[sheet.title][cell.coordinate]
                place = f"{sheet.title}!{cell.coordinate} is stale: run python workbooks/build.py"
                assert _as_text(old_cell) == _as_text(cell), place
                a, b = (s.values[sheet.title][cell.coordinate].value for s in (kept, fresh))
                assert a == (pytest.approx(b, rel=1e-9, abs=1e-12) if isinstance(b, float) else b), place


def _as_text(cell: Any) -> tuple[Any, ...]:
    """What the book holds in a cell, an array formula as its range and text; and how it is shown."""
    area = getattr(cell.value, "ref", None)
    return area, formula_of(cell) if area else cell.value, cell.number_format


# --- mistakes ---------------------------------------------------------------------------------------------------
PLANTED: dict[tuple[str, str], tuple[str, str, str]] = {
    # item, case: the first cell that errs, its error, and what column Why says
    ("21-FCV-103", "normal"): ("sigma", "#NUM!", "p2 must be below p1"),
    ("21-FCV-121", "normal"): ("coefficient", "#VALUE!", "flow must be a number in m3/h, got the text '11,0'"),
    ("22-FCV-215", "maximum"): ("coefficient", "#NUM!", "A relative density (specific gravity) was typed"),
    ("22-FCV-228", "maximum"): ("coefficient", "#N/A", "fl (liquid pressure recovery factor FL"),
    ("23-FCV-326", "normal"): ("pv", "#N/A", "the temperature is blank"),
    ("23-PCV-329", "maximum"): ("sigma", "#NUM!", "add the site's atmosphere to a gauge reading"),
    ("24-FCV-402", "start-up"): ("travel", "#NUM!", "a smaller valve or trim is needed"),
    ("24-LCV-408", "normal"): ("density", "#NUM!", "the liquid boils at this temperature and pressure"),
    ("25-FCV-519", "maximum"): ("travel", "#NUM!", "the valve is too small"),
    ("25-FCV-525", "maximum"): ("coefficient", "#NUM!", "the fittings alone take the whole drop"),
    ("25-FCV-528", "minimum"): ("pv", "#VALUE!", "is a mixture whose vapour pressure depends on its composition"),
    ("26-FCV-619", "minimum"): ("pv", "#VALUE!", "nearest: methanol"),
    ("26-FCV-619", "normal"): ("pv", "#VALUE!", "nearest: methanol"),
    ("26-FCV-619", "maximum"): ("pv", "#VALUE!", "nearest: methanol"),
    ("26-PCV-622", "maximum"): ("constant_scaled", "#NUM!", "another form was meant"),
    ("27-FCV-713", "minimum"): ("coefficient", "#NUM!", "more than 1.1 times as large as a pipe beside it"),
    ("27-FCV-713", "normal"): ("coefficient", "#NUM!", "more than 1.1 times as large as a pipe beside it"),
    ("27-FCV-713", "maximum"): ("coefficient", "#NUM!", "more than 1.1 times as large as a pipe beside it"),
}
PLANTED_US = {
    ("31-PCV-807", "maximum"): ("sigma", "#NUM!", "p2 must be below p1"),
    ("32-LCV-827", "normal"): ("coefficient", "#N/A", "fl (liquid pressure recovery factor FL"),
    ("33-FCV-844", "maximum"): ("coefficient", "#NUM!", "the fittings alone take the whole drop"),
    ("34-FCV-861", "maximum"): ("coefficient", "#NUM!", "A relative density (specific gravity) was typed"),
}
MISTAKES = {"metric": PLANTED, "us": PLANTED_US}


@both
def test_each_planted_mistake_shows_its_error_and_its_reason(system: str) -> None:
    sample = made(system)
    for (tag, case), (key, error, words) in MISTAKES[system].items():
        row = sample.row_of(tag, case)
        assert sample.value(row, key) == error, (tag, case)
        assert words in sample.value(row, "why"), (tag, case)
        assert sample.value(row, "remark").startswith("planted: ")
        assert sample.value(row, "errors") > 0
        # What a comparison could take for a pass is an error too, wherever the row has no index or no limit.
        assert is_error(sample.value(row, "kept")) or key == "travel"


@both
def test_the_remarks_name_all_that_is_planted_and_nothing_else(system: str) -> None:
    marked = {
        (item.tag, case.name) for _, item, case in made(system).rows() if (case.remark or "").startswith("planted")
    }
    assert marked == set(MISTAKES[system])


@both
def test_every_other_cell_has_an_answer(system: str) -> None:
    sample = made(system)
    excused = {sample.row_of(*place) for place in MISTAKES[system]}
    for sheet in sample.values.worksheets:
        for row in sheet.iter_rows():
            for cell in row:
                if not is_error(cell.value):
                    continue
                place = f"{sheet.title}!{cell.coordinate} {cell.value}"
                assert cell.data_type == "e", place
                if sheet.title == "List":
                    assert cell.row in excused, place
                elif sheet.title == "Items":
                    assert sample.values["Items"][f"I{cell.row}"].value == "no answer", place
                else:
                    assert _gap_in_chart(sample, sheet.title, cell), place


def _gap_in_chart(sample: Sample, sheet: str, cell: Any) -> bool:
    """A limit that is not given, or a line of the chart's data for which there is no case."""
    if sheet != "Chart" or cell.value != "#N/A":
        return False
    place = sample.values["Chart"][f"J{cell.row}"].value
    if is_error(place):
        return cell.row - CHART_FIRST >= sum(_numbers(sample.column("margin")))
    key = {"C": "incipient", "D": "constant", "E": "damage"}[cell.column_letter]
    return sample.value(FIRST + place - 1, key) is None


@both
def test_flashing_is_a_state_and_no_error(system: str) -> None:
    sample = made(system)
    flashing = [row for row, *_ in sample.rows() if sample.value(row, "regime") == "flashing"]
    assert len(flashing) >= 3
    for row in flashing:
        assert sample.value(row, "pv") >= sample.value(row, "p2")
        assert sample.value(row, "verdict") == "flashing"
        assert 0 < sample.value(row, "vapour") < 1
        assert sample.value(row, "sigma") <= 1
        assert sample.value(row, "errors") == 0


def test_all_states_that_limits_can_give_occur() -> None:
    found = set(made("metric").column("regime"))
    assert found >= set(STATES) - {"vibration"}


@both
def test_a_verdict_names_the_basis_of_the_limit_that_decides(system: str) -> None:
    sample = made(system)
    for row, *_ in sample.rows():
        regime = sample.value(row, "regime")
        if is_error(regime) or regime == "flashing":
            continue
        key = "fl_basis" if regime in ("choked", "unjudged") else "limits_basis"
        assert sample.value(row, "verdict") == f"{regime} ({sample.value(row, key)})"
    assert any("(estimated)" in str(verdict) for verdict in sample.column("verdict"))


# --- counting ---------------------------------------------------------------------------------------------------
@both
def test_summary_agrees_with_the_list(system: str) -> None:
    sample = made(system)
    sheet = sample.values["Summary"]
    shown = {sheet[f"A{row}"].value: sheet[f"B{row}"].value for row in range(6, 12)}
    keys = [column.key for column in COLUMNS]
    computed = keys[keys.index("atmosphere") : keys.index("vapour") + 1]
    errors = [sum(is_error(sample.value(row, key)) for key in computed) for row, *_ in sample.rows()]
    kept = Counter(sample.column("kept"))
    assert shown == {
        "Items": len(sample.plant.items), "Cases": 3 * len(sample.plant.items),
        "Cases that keep their limit": kept["yes"], "Cases at or below their limit": kept["no"],
        "Cases without an answer": sum(n > 0 for n in errors), "Cells with errors": sum(errors),
    }  # fmt: skip
    regimes = Counter(sample.column("regime"))
    for row in range(6, 6 + len(STATES)):
        assert sheet[f"E{row}"].value == regimes[sheet[f"D{row}"].value]
    # Every item and every case stands in one row of the table.
    below = range(6, 8 + len(STATES))
    assert sum(sheet[f"E{row}"].value for row in below) == 3 * len(sample.plant.items)
    assert sum(sheet[f"F{row}"].value for row in below) == len(sample.plant.items)
    by_area = Counter(sample.column("area"))
    listed = {sheet[f"A{row}"].value: sheet[f"B{row}"].value for row in range(20, 40)}
    assert by_area.items() <= listed.items()


def _worst(sample: Sample, tag: str) -> tuple[float, int] | None:
    """Least margin of an item and its row; the margins are compared as the list shows them."""
    found = [
        (sample.value(row, "margin"), row) for row, item, _ in sample.rows()
        if item.tag == tag and isinstance(sample.value(row, "margin"), float)
    ]  # fmt: skip
    return min(found) if found else None


@both
def test_items_are_judged_by_their_worst_case(system: str) -> None:
    sample = made(system)
    sheet = sample.values["Items"]
    for row, item in enumerate(sample.plant.items, start=FIRST):
        assert sheet[f"A{row}"].value == item.tag
        worst = _worst(sample, item.tag)
        if worst is None:
            assert sheet[f"I{row}"].value == "no answer"
            assert sheet[f"K{row}"].value == "#N/A"
            continue
        open_cases = sum((item.tag, case.name) in MISTAKES[system] for case in item.cases)
        assert sheet[f"G{row}"].value == open_cases
        expected = sample.value(worst[1], "verdict")
        # Never called good while a case has no answer; what is bad is said at once.
        if open_cases and sample.value(worst[1], "regime") in ("clear", "unjudged", "incipient"):
            expected = f"incomplete: {open_cases} of {len(item.cases)} without an answer"
        elif open_cases:
            expected += ", others without an answer"
        assert sheet[f"I{row}"].value == expected
        assert sheet[f"J{row}"].value == sample.value(worst[1], "case")
        assert sheet[f"K{row}"].value == worst[0]


@both
def test_the_worst_items_and_the_unanswered_cases_are_listed(system: str) -> None:
    sample = made(system)
    sheet = sample.values["Summary"]
    heads = {cell.value: cell.row for cell in sheet["A"] if isinstance(cell.value, str)}
    first = heads[f"The {WORST} items with the least margin to the limit that they must keep"] + 2
    ranked = sorted((w[0], item.tag) for item in sample.plant.items if (w := _worst(sample, item.tag)))[:WORST]
    shown = [(sheet[f"E{row}"].value, sheet[f"B{row}"].value) for row in range(first, first + len(ranked))]
    assert shown == ranked
    first = heads["Cases without an answer, and why"] + 2
    listed = [
        (sheet[f"B{row}"].value, sheet[f"D{row}"].value, sheet[f"E{row}"].value)
        for row in range(first, first + UNANSWERED) if sheet[f"B{row}"].value
    ]  # fmt: skip
    assert [line[:2] for line in listed] == list(MISTAKES[system])
    for tag, case, why in listed:
        assert MISTAKES[system][tag, case][2] in why
