"""The table of known differences, row by row, against the real engine: a change in either direction fails."""

from __future__ import annotations

import inspect
import math
import re

import pytest

from lowpoint.book import cures, rules, rules_text
from lowpoint.book.cures import prepare
from lowpoint.book.engine import Engine, Unrefreshable
from lowpoint.book.hiding import Hiding
from lowpoint.book.lifting import register
from lowpoint.book.probes import CELLS, FORMULA, KNOWN, PROBES, Probe, blocking, met
from lowpoint.errors import BookError


def _answer(formula: str, *, helpers: bool) -> object:
    """What a formula in F1 gives; the kind of refusal where the engine vouches for nothing."""
    engine = Engine.empty("S")
    if helpers:
        register(engine)
    engine.set_values("S", 1, 1, CELLS)
    engine.set_formulas("S", 1, 4, [[FORMULA]])
    try:
        engine.set_formulas("S", 1, 6, [[formula]])
        engine.evaluate()
    except (BookError, ValueError, RuntimeError, OSError):
        return "unloadable"
    except Exception as trouble:
        if type(trouble).__module__.startswith("formualizer"):
            return "unloadable"
        raise
    value = engine.value("S", 1, 6)
    return value.kind if isinstance(value, Unrefreshable) else value


def _same(found: object, wanted: object) -> bool:
    if isinstance(found, float) and isinstance(wanted, float):
        return math.isclose(found, wanted, rel_tol=1e-14, abs_tol=0.0)
    return found == wanted and (type(found) is type(wanted) or isinstance(found, str))


@pytest.mark.parametrize("probe", PROBES, ids=lambda probe: f"{probe.id} {probe.formula}")
def test_the_bare_engine_still_differs_as_recorded(probe: Probe) -> None:
    found = _answer(probe.formula, helpers=False)
    assert _same(found, probe.bare), f"the engine now gives {found!r}: its behaviour has changed, revise the table"
    assert not _same(found, probe.truth)


@pytest.mark.parametrize("probe", PROBES, ids=lambda probe: f"{probe.id} {probe.formula}")
def test_each_difference_is_cured_or_blocks(probe: Probe) -> None:
    treatment = KNOWN[probe.id][0]
    assert probe.source
    assert (probe.id in met([probe.formula], probe.hiding)) is (treatment != "stands")
    assert (blocking(probe.formula, probe.hiding) is not None) is (treatment == "blocks")
    if treatment != "cured":
        return
    assert _same(_answer(prepare(probe.formula).text, helpers=True), probe.truth)


def test_every_known_difference_has_an_example() -> None:
    assert {probe.id for probe in PROBES} == set(KNOWN)
    assert {outcome for outcome, _ in KNOWN.values()} == {"cured", "blocks", "stands"}


def test_every_rule_is_in_the_table() -> None:
    text = "".join(inspect.getsource(module) for module in (cures, rules, rules_text))
    used = re.findall(r'(?:note|BlockedError|always)\(\s*"([a-z0-9-]+)"', text) + ["unreadable"]
    used += re.findall(r'_from_text\(.*?"([a-z-]+)"', text)
    assert set(used) == {name for name, (treatment, _) in KNOWN.items() if treatment != "stands"}


def test_hidden_rows_block_only_what_leaves_them_out() -> None:
    assert blocking("=SUBTOTAL(9,A1:A3)") is None
    assert blocking("=SUBTOTAL(9,A1:A3)", Hiding.ROWS) is None
    assert blocking("=AGGREGATE(9,6,A1:A3)", Hiding.FILTER) is None
    assert blocking("=SUM(A1:A3)", Hiding.FILTER) is None
    for formula in ("=SUBTOTAL(9,A1:A3)", "=SUBTOTAL(109,A1:A3)", "=SUBTOTAL(B1,A1:A3)", "=AGGREGATE(14,7,A1:A3,1)"):
        assert "hidden rows" in (blocking(formula, Hiding.FILTER) or ""), formula


def test_met_names_what_a_book_meets_once_and_in_order() -> None:
    assert met(["=A1&B1", "=A2&B2", "=A1=B1", "=SUM(A1:A2)"]) == ["equality-15-digits", "number-text-15-digits"]


@pytest.mark.parametrize(
    "formula",
    ["=SUM(A1:A9)", "=IF(A1=\"x\",1,2)", "=A1*B1", "=IF(A1>0,1,2)", "=ROUND(A1,2)", "=VLOOKUP(A1,B1:C9,2,FALSE)",
     "=INDEX(A1:A9,MATCH(B1,C1:C9,0))", "=COUNTIF(A1:A9,\">5\")", "=\"a\"&\"b\"", "=IF(ISBLANK(A1),0,A1)"],
)  # fmt: skip
def test_plain_formulas_are_left_as_they_stand(formula: str) -> None:
    assert prepare(formula).text == formula
    assert prepare(formula).met == ()


def test_cells_are_put_back_exactly_as_written() -> None:
    text = prepare("='Q 1'!$B2=Q1!C$3").text
    assert text.count("'Q 1'!$B2") >= 2
    assert text.count("Q1!C$3") >= 2
    assert not re.search(r"104\d{4}", text)
    assert "A1040007" in prepare("=A1040007=B1").text


def test_a_let_name_hides_nothing_of_the_cure() -> None:
    assert _answer(prepare("=LET(x,0.1+0.2,IF(x=0.3,x-0.3,9))").text, helpers=True) == pytest.approx(0.1 + 0.2 - 0.3)


def test_a_formula_that_would_grow_beyond_bounds_is_blocked() -> None:
    assert blocking("=" + "MATCH(" * 3 + "A1" + ",B1:B9)" * 3) is None
    assert "too long" in (blocking("=" + "MATCH(" * 60 + "A1" + ",B1:B9)" * 60) or "")
    assert "too long" in (blocking("=" + "VALUE(" * 60 + "A1" + ")" * 60) or "")


def test_an_error_goes_through_a_comparison_a_difference_and_a_text() -> None:
    for formula in ("=1/0=2", "=1/0-2", '=1/0&"x"', "=LEN(1/0)", "=UPPER(1/0)"):
        assert _answer(prepare(formula).text, helpers=True) == "#DIV/0!", formula


def test_blank_and_text_numbers_compare_and_subtract_as_before() -> None:
    wanted = {"=C3=0": True, '=C3=""': True, '="5"=5': False, '="5"-2': 3.0, "=A1-C3": 1.2, "=C3&1": "1"}
    for formula, value in wanted.items():
        assert _answer(prepare(formula).text, helpers=True) == value, formula
