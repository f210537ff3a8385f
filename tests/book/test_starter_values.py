"""The numbers in the sample books: against the functions called from Python, an independent route, and LibreOffice."""

from __future__ import annotations

import csv
import re
from collections import Counter
from functools import cache
from pathlib import Path
from typing import Any, ClassVar

import openpyxl
import pytest
from openpyxl.formula import Tokenizer

from book import independent
from book.office import needs_office, recalculated
from book.starters import NAMES, SYSTEMS, WORKBOOKS, Sample, formula_of, is_error, made
from lowpoint import cells
from lowpoint.cells import OMITTED, CellError
from lowpoint.starter.columns import COLUMNS
from lowpoint.starter.list_sheet import LETTERS
from lowpoint.starter.plant import Case, Item

both = pytest.mark.parametrize("system", SYSTEMS)


# --- every LP_ call, as the functions answer it when they are called from Python ---------------------------------
class Evaluator:
    """A few lines of spreadsheet: IF, ISBLANK, NA, a comparison, a quotient, a difference, and LP_ calls from Python.

    Cells are read as the book stores them. ``None`` is given where a formula holds anything else.
    """

    KNOWN: ClassVar = {"IF", "ISBLANK", "NA"}

    def __init__(self, sample: Sample, sheet: str) -> None:
        self.book, self.sheet = sample.values, sheet
        self.calls: Counter[str] = Counter()

    def understands(self, formula: str) -> bool:
        names = {t.value[:-1] for t in Tokenizer(formula).items if t.type == "FUNC" and t.subtype == "OPEN"}
        lowpoint = {name for name in names if name.startswith(("LP_", "LPU_"))}
        return bool(lowpoint) and "LP_WHY" not in names and names - lowpoint <= self.KNOWN

    def __call__(self, text: str) -> Any:
        text = text.strip()
        head = re.match(r"([A-Z_]+)\(", text)
        if head and text.endswith(")"):
            return self._function(head[1], split(text[head.end() : -1]))
        for sign in (">", "/", "-"):
            left, found, right = text.partition(sign)
            if found and left and not text.startswith('"'):
                return self._two(self(left), sign, self(right))
        return self._operand(text)

    def _function(self, name: str, arguments: list[str]) -> Any:
        if name == "IF":
            condition = self(arguments[0])
            return condition if isinstance(condition, CellError) else self(arguments[1 if condition else 2])
        if name == "ISBLANK":
            return self._cell(arguments[0]).value is None
        if name == "NA":
            return CellError.NA
        self.calls[name.removeprefix("LPU_").removeprefix("LP_")] += 1
        return cells.call(name, [self(argument) for argument in arguments])

    def _two(self, one: Any, sign: str, other: Any) -> Any:
        for value in (one, other):
            if isinstance(value, CellError):
                return value
        return one > other if sign == ">" else one / other if sign == "/" else one - other

    def _operand(self, text: str) -> Any:
        if text == "":
            return OMITTED
        if text.startswith('"'):
            return text[1:-1]
        if re.fullmatch(r"\d+(\.\d+)?", text):
            return float(text)
        if text in self.book.defined_names:
            sheet, _, area = self.book.defined_names[text].attr_text.partition("!")
            block = self.book[sheet][area.replace("$", "")]
            return [[_of(c) for c in row] for row in block] if isinstance(block, tuple) else _of(block)
        return _of(self._cell(text))

    def _cell(self, place: str) -> Any:
        assert re.fullmatch(r"[A-Z]+\d+", place), place
        return self.book[self.sheet][place]


def _of(cell: Any) -> Any:
    return CellError(cell.value) if cell.data_type == "e" else cell.value


def split(text: str) -> list[str]:
    """Arguments at the outermost level."""
    parts, depth, quoted = [""], 0, False
    for letter in text:
        quoted ^= letter == '"'
        depth += 0 if quoted else (letter == "(") - (letter == ")")
        if letter == "," and depth == 0 and not quoted:
            parts.append("")
        else:
            parts[-1] += letter
    return parts


@both
def test_every_stored_value_is_what_the_functions_give(system: str) -> None:
    sample = made(system)
    calls: Counter[str] = Counter()
    for title in ("List", "Site"):
        evaluate = Evaluator(sample, title)
        for row in sample.formulas[title].iter_rows():
            for cell in row:
                if cell.data_type != "f" or not evaluate.understands(cell.value):
                    continue
                stored, answer = _of(sample.values[title][cell.coordinate]), evaluate(cell.value[1:])
                assert (stored or "") == (answer or ""), f"{title}!{cell.coordinate} {cell.value}"
        calls += evaluate.calls
    cases = len(list(sample.rows()))
    always = ("COEFFICIENT", "CHOKED_DROP", "SIGMA", "SIGMA_CHOKED", "REGIME", "MARGIN", "ALLOWED_DROP", "TYPICAL",
              "VELOCITY")  # fmt: skip
    assert {name: calls[name] for name in always} == dict.fromkeys(always, cases)
    assert calls["UNIT"] == 2 * cases
    assert calls["TRAVEL"] + calls["OPERATING_TRAVEL"] == cases
    assert min(calls[name] for name in ("SIGMA_SCALED", "LIMIT_INSTALLED")) > 2 * cases
    assert min(calls[name] for name in ("VAPOUR_PRESSURE", "CRITICAL_PRESSURE", "DENSITY")) >= cases - 4
    assert min(calls[name] for name in ("AT_TRAVEL", "XFZ", "ATMOSPHERE", "COLUMN", "FLASH")) > 0


@both
def test_the_reasons_are_those_of_lp_why(system: str) -> None:
    """Rows that have an answer say what LP_WHY says of their required coefficient."""
    sample = made(system)
    asked = ("flow", "p1", "p2", "pv", "pc", "density", "fl", "valve_size", "pipe_in", "pipe_out")
    compared = 0
    for row, *_ in sample.rows():
        if sample.value(row, "errors"):
            continue
        name = ("LP_" if system == "metric" else "LPU_") + "COEFFICIENT"
        given = [sample.value(row, key) for key in asked]
        assert sample.value(row, "why") == cells.call("LP_WHY", [name, *given])
        compared += 1
    assert compared > len(sample.plant.items) * 2


# --- by another route ---------------------------------------------------------------------------------------------
WATERS = {"permeate", "demineralised water", "distillate", "condensate", "steam condensate", "boiler feed water",
          "feed water", "water", "town water", "district heating water", "hot water"}  # fmt: skip
SALTY = {"sea water", "brine"}
TOLERANCE = 2e-3
"""Two equations of state of water (0.02 %), two of sea water and brine (0.17 % in density)."""


def typed(item: Item, case: Case) -> dict[str, Any]:
    """What is typed in a row, with p1 and p2 made absolute by hand."""
    trim, (d, d1, d2), (b, a) = item.trim, item.sizes, item.trim.exponents
    ambient = 0.0 if item.unit == "bar a" else independent.atmosphere(item.area.elevation)
    return {
        "t": case.t, "p1": case.p1 + ambient, "p2": case.p2 + ambient, "flow": case.flow,
        "fl": case.instead.get("fl", trim.fl), "d": d, "d1": d1, "d2": d2, "rated": item.rated,
        "characteristic": trim.characteristic, "rangeability": trim.rangeability, "size_ref": trim.size_ref,
        "head_ref": trim.head_ref, "b": b, "a": a, "salinity": item.salinity,
        "table": item.table.rows if item.table else None,
    }  # fmt: skip


@cache
def worked_out_rows() -> dict[int, dict[str, float]]:
    """The rows of the metric list that an independent route can work out, by row number."""
    found = {}
    for row, item, case in made("metric").rows():
        planted = (case.remark or "").startswith("planted")
        too_hot = item.fluid in SALTY and case.t > 79.0  # IAPWS-08 ends at 80 C
        if item.fluid in WATERS | SALTY and not (planted or too_hot or item.estimate):
            limits = dict(zip(("incipient", "constant", "damage"), item.trim.limits, strict=True))
            found[row] = independent.worked_out(typed(item, case), limits, item.keep)
    return found


SECOND = ("p1", "p2", "pv", "pc", "density", "fl", "coefficient", "travel", "velocity", "choked_drop", "sigma",
          "choked", "incipient_scaled", "constant_scaled", "damage_scaled", "incipient", "constant", "damage", "limit",
          "allowed_drop")  # fmt: skip


@pytest.mark.parametrize("key", SECOND)
def test_rows_worked_out_a_second_way(key: str) -> None:
    """IEC 60534-2-1 by bisection, IAPWS by another library; everything from typed inputs (C: checks the coding)."""
    sample, compared = made("metric"), 0
    for row, answer in worked_out_rows().items():
        if key in answer:
            assert sample.value(row, key) == pytest.approx(answer[key], rel=TOLERANCE), f"row {row}"
            compared += 1
    assert compared >= 120


def test_margins_worked_out_a_second_way() -> None:
    # A margin is a difference of near numbers: compared as index over limit.
    for row, answer in worked_out_rows().items():
        assert 1.0 + made("metric").value(row, "margin") == pytest.approx(1.0 + answer["margin"], rel=2 * TOLERANCE)


def expected_rows() -> list[dict[str, str]]:
    """Of the valve lists; the book of plates has tests of its own."""
    with (WORKBOOKS / "expected.csv").open(encoding="utf-8", newline="") as source:
        return [line for line in csv.DictReader(source) if line["book"] in NAMES.values()]


@pytest.mark.parametrize("line", expected_rows(), ids=lambda e: f"{e['tag']} {e['case']} {e['heading']}")
def test_expected_values(line: dict[str, str]) -> None:
    system = next(system for system, name in NAMES.items() if name == line["book"])
    sample = made(system)
    (key,) = (column.key for column in COLUMNS if column.heading == line["heading"])
    value = sample.value(sample.row_of(line["tag"], line["case"]), key)
    assert value == pytest.approx(float(line["expected"]), rel=float(line["relative_tolerance"]))
    assert line["source"]
    assert line["working"]


def test_expected_values_hold_by_the_second_route() -> None:
    """What is marked C in the metric book and can be worked out from typed inputs, worked out again."""
    sample, compared = made("metric"), 0
    by_heading = {column.heading: column.key for column in COLUMNS}
    for line in expected_rows():
        if line["book"] != NAMES["metric"]:
            continue
        answer = worked_out_rows().get(sample.row_of(line["tag"], line["case"]), {})
        if by_heading[line["heading"]] in answer:
            # Half a unit of the last of the five or six digits that the file prints.
            assert float(line["expected"]) == pytest.approx(answer[by_heading[line["heading"]]], rel=2e-5)
            compared += 1
    assert compared >= 15


def test_the_estimated_limit_is_that_of_the_noise_standard() -> None:
    """1/xFz with xFz = 0.90/sqrt(1 + 3 Fd sqrt(Cv/(1.17 FL))) (6/p1)^0.125, IEC 60534-8-4, Cv = 1.156 Kv."""
    sample, compared = made("metric"), 0
    for row, item, _ in sample.rows():
        coefficient = sample.value(row, "coefficient")
        if not item.estimate or is_error(coefficient):
            continue
        cv, p1 = 1.156 * coefficient, sample.value(row, "p1")
        xfz = 0.90 / (1.0 + 3.0 * item.trim.fd * (cv / (1.17 * item.trim.fl)) ** 0.5) ** 0.5 * (6.0 / p1) ** 0.125
        assert sample.value(row, "incipient_ref") == pytest.approx(1.0 / xfz, rel=1e-9)
        assert sample.value(row, "incipient_scaled") == pytest.approx(1.0 / xfz, rel=1e-9)
        compared += 1
    assert compared >= 8


def test_the_us_book_is_the_us_form_of_the_standard() -> None:
    """Cv = Q sqrt(G/dp) of rows with unchoked flow at line size: N1 = 1 in US gal/min and psi (rounded: 0.3 %)."""
    sample, compared = made("us"), 0
    for row, item, _ in sample.rows():
        line_size = item.sizes[1] / item.sizes[0] < 1.06
        drop, choked = sample.value(row, "drop"), sample.value(row, "choked_drop")
        if not line_size or is_error(choked) or drop > choked:
            continue
        gravity = sample.value(row, "density") / 62.37  # water at 15 C, lb/ft3 (999.1 kg/m3)
        cv = sample.value(row, "flow") * (gravity / drop) ** 0.5
        assert sample.value(row, "coefficient") == pytest.approx(cv, rel=6e-3)
        compared += 1
    assert compared >= 12


# --- the ordinary formulas, in another spreadsheet program --------------------------------------------------------
@needs_office
@both
def test_ordinary_formulas_as_libreoffice_computes_them(system: str, tmp_path: Path) -> None:
    """With the LP_ cells as plain values, LibreOffice recomputes all the rest: the same values and errors."""
    sample = made(system)
    book = openpyxl.load_workbook(sample.path)
    ordinary = []
    for sheet in book.worksheets:
        for row in sheet.iter_rows():
            for cell in row:
                if cell.data_type != "f":
                    continue
                if re.search(r"\bLPU?_", formula_of(cell)):
                    _put(cell, sample.values[sheet.title][cell.coordinate])
                else:
                    ordinary.append((sheet.title, cell.coordinate))
    plain = tmp_path / "plain.xlsx"
    book.save(plain)
    theirs = openpyxl.load_workbook(recalculated(plain, tmp_path / "out"), data_only=True)
    assert len(ordinary) > 400
    for title, place in ordinary:
        ours, other = sample.values[title][place].value, theirs[title][place].value
        number = isinstance(ours, int | float) and not isinstance(ours, bool)
        assert (other or None) == (pytest.approx(ours, rel=1e-12) if number and ours else ours or None), (
            f"{title}!{place}"
        )


def _put(cell: Any, stored: Any) -> None:
    """A stored value as a plain one; an empty text stays a text, by a formula that gives it."""
    cell.value = stored.value if stored.value is not None else '=""'


def test_the_evaluator_sees_a_wrong_value() -> None:
    """A guard against a check that cannot fail."""
    evaluate = Evaluator(made("metric"), "List")
    row = next(row for row, *_ in made("metric").rows())
    formula = made("metric").formulas["List"][f"{LETTERS['sigma']}{row}"].value
    assert evaluate.understands(formula)
    assert evaluate(formula[1:]) == made("metric").value(row, "sigma")
    assert evaluate(formula[1:].replace(LETTERS["p2"], LETTERS["pv"])) != made("metric").value(row, "sigma")
    assert evaluate(f"IF(ISBLANK({LETTERS['pv_given']}{row}),NA(),1)") is CellError.NA
