"""The plan: which calls are made in batches and on which level, which are call-backs, what the engine is given."""

from __future__ import annotations

from collections.abc import Sequence

import pytest

from lowpoint.book.curing import cure
from lowpoint.book.formulas import tokenise
from lowpoint.book.names import Names
from lowpoint.book.plan import Context, Plan, make_plan
from lowpoint.book.refs import column_number
from lowpoint.book.sheet import Group
from lowpoint.book.sites import Cells, Computed, Literal, Result, Site, text_of
from lowpoint.book.tables import Tables
from lowpoint.cells import OMITTED

CONTEXT = Context(Names(), Tables(), ("List", "Panel"), frozenset({"list"}), cure)


def _group(place: str, text: str, rows: Sequence[int] = (5,), kind: str = "plain") -> Group:
    return Group("List", column_number(place), tokenise(text, rows[0]), text, kind, rows=list(rows))


def _plan(*groups: Group, per_cell: bool = False) -> Plan:
    return make_plan(groups, CONTEXT, per_cell)


def _sites(plan: Plan) -> list[Site]:
    return [site for entry in plan.entries for site in entry.work.sites]


def _shown(plan: Plan, number: int = 0) -> str:
    """The engine's formula of an entry, offsets of rows in braces."""
    pieces = plan.entries[number].work.pieces
    assert pieces is not None
    return "".join(p if isinstance(p, str) else f"{{{p}}}" for p in text_of(pieces))


def test_a_call_that_is_the_formula_is_a_value_cell() -> None:
    plan = _plan(_group("F", "LP_SIGMA(A5,B$2,0.03)", (5, 6, 7)))
    (site,) = _sites(plan)
    assert site.own
    assert site.slot is None
    assert plan.entries[0].work.pieces is None
    assert plan.scratch == {}
    assert [type(arg) for arg in site.args or ()] == [Cells, Cells, Literal]


@pytest.mark.parametrize(
    "text, kinds",
    [
        ("LP_REGIME(1.1,,-2,5%,)", [Literal, Literal, Literal, Literal, Literal]), ("LP_MARGIN(A5+1,SUM(B5:B9))",
         [Computed, Computed]),
        ("LP_MARGIN(LP_FF(1,2),A5)", [Result, Cells]), ("LP_AT_TRAVEL(A5,B$1:B$9,C5:C9)", [Cells, Cells, Cells]),
        ("LP_MARGIN((A5),List!B5)", [Computed, Cells]),
    ],
)  # fmt: skip
def test_what_each_argument_becomes(text: str, kinds: list[type]) -> None:
    plan = _plan(_group("F", text))
    own = next(site for site in _sites(plan) if site.own)
    assert [type(arg) for arg in own.args or ()] == kinds
    literals = [arg.value for arg in own.args or () if isinstance(arg, Literal)]
    assert literals in ([], [1.1, OMITTED, -2.0, 0.05, OMITTED])


@pytest.mark.parametrize(
    "text",
    [
        "LP_MARGIN(A1:A9,2)", "LP_MARGIN(ROW(),2)", "LP_MARGIN({1,2},2)", "_xlfn.LET(_xlpm.x,A5,LP_MARGIN(_xlpm.x,2))",
        "LP_MARGIN(@A1:A9,2)", "LP_STAGE_PRESSURES(60,8,0.03,3)", "LP_MARGIN(INDIRECT(\"A1\"),2)",
        "LP_MARGIN(OFFSET(A1,1,1),2)",
        "LP_MARGIN(INDEX(A1:A9,0),2)", "LP_AT_TRAVEL(50,A1:A9*2,B1:B9)", "IF(ROW()>3,LP_MARGIN(A5,2),0)",
        "LP_MARGIN(A1:B2 B1:B2,2)",
    ],
)  # fmt: skip
def test_what_is_not_known_beforehand_is_a_callback(text: str) -> None:
    plan = _plan(_group("F", text))
    if not plan.entries:  # the engine would get it wrong: kept
        assert "intersection" in text or " B1" in text
        return
    assert all(site.args is None for site in _sites(plan))
    assert plan.levels == []
    assert f"({_sites(plan)[0].number}," in _shown(plan)


def test_nested_calls_go_to_scratch_cells_of_their_own_row() -> None:
    plan = _plan(_group("F", "LP_SIGMA(A5,B5,C5)*2+LP_FF(A5-B5,220)", (5, 6)))
    assert _shown(plan).count("(+LP_SCRATCH_1!") >= 2
    assert "{0}" in _shown(plan)
    ((_, computed),) = plan.scratch["LP_SCRATCH_1"]
    assert "".join(map(str, text_of(computed.pieces))) == "(List!A0-List!B0)"
    assert {site.slot.column for site in _sites(plan) if site.slot} | {computed.slot.column} == {1, 2, 3}


def test_the_scratch_sheet_has_a_name_that_no_sheet_has() -> None:
    context = Context(Names(), Tables(), ("List", "lp_scratch_1"), frozenset({"list"}), cure)
    plan = make_plan([_group("F", "LP_FF(A5,220)+1")], context)
    assert set(plan.scratch) == {"LP_SCRATCH_2"}


def test_levels_follow_what_reads_what() -> None:
    plan = _plan(
        _group("F", "LP_MARGIN(G5,2)"), _group("G", "H5*2"), _group("H", "LP_MARGIN(LP_FF(A5,220),I5)"),
        _group("I", "LP_FF(B5,220)"), _group("J", "A5*2"),
    )  # fmt: skip
    levels = {f"{entry.group.column}{site.name}": site.level for level in plan.levels for entry, site in level}
    assert levels == {"9LP_FF": 1, "8LP_FF": 2, "8LP_MARGIN": 3, "6LP_MARGIN": 4}
    assert {entry.group.place for entry in plan.entries if entry.fed} == {"F5", "G5", "H5", "I5"}
    # The engine is told what its own formulas may read: H5 for G5, I5 for the formula around the nested call.
    assert {entry.group.place for entry in plan.entries if entry.needed} == {"H5", "I5"}


def test_calls_in_a_circle_or_behind_unknown_references_are_callbacks() -> None:
    ring = _plan(_group("F", "LP_MARGIN(G5,2)"), _group("G", "LP_MARGIN(F5,2)"))
    chain = _plan(_group("F", "LP_MARGIN(F4,2)", (5, 6, 7)))
    behind = _plan(_group("F", "LP_MARGIN(G5,2)"), _group("G", 'INDIRECT("H5")'), _group("H", "LP_FF(A5,220)"))
    assert all(site.args is None for plan in (ring, chain) for site in _sites(plan))
    assert [site.args is None for site in _sites(behind)] == [True, False]


def test_a_guard_says_whether_a_call_is_made() -> None:
    plan = _plan(_group("F", "IF(A5>1,LP_FF(B5,220),IFERROR(C5,LP_FF(D5,220)))"))
    guards = ["".join(map(str, text_of(site.guard.pieces))) for site in _sites(plan) if site.guard]
    assert guards[0].startswith("IFERROR(SUM(IF(")
    assert [guard.endswith(",1,0)),0)") for guard in guards] == [True, False]
    assert "ISERROR(List!C5)" in guards[1]
    assert [site.guard for site in _sites(_plan(_group("F", "IFERROR(LP_FF(A5,220),0)+1")))] == [None]


def test_call_by_call_everything_is_a_callback() -> None:
    plan = _plan(_group("F", "LP_MARGIN(LP_FF(A5,,),2)"), per_cell=True)
    assert [site.args for site in _sites(plan)] == [None, None]
    assert [site.given for site in _sites(plan)] == [(True, True), (True, False, False)]
    assert _shown(plan) == "LP_MARGIN(2,{0},LP_FF(1,{0},A{0},0,0),2)"


def test_what_cannot_be_read_gets_its_reason_and_no_place() -> None:
    groups = [_group("F", "Panel!A1+1"), _group("G", "Elsewhere!A1"), _group("H", "NOSUCH(1)"), _group("I", "A5+1")]
    plan = _plan(*groups)
    assert [entry.group.place for entry in plan.entries] == ["I5"]
    assert [group.reason for group in groups] == [
        "it reads the sheet 'Panel', which holds no cells that are calculated",
        "it reads the sheet 'Elsewhere', which is not in the workbook",
        "it uses NOSUCH, which the recalculator's engine does not have",
        "",
    ]
    assert "unknown-function" in plan.met
