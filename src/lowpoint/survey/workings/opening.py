"""The opening of a valve: by its characteristic's formula, or between two rows of its table, and FL with it."""

from __future__ import annotations

import numpy as np

from lowpoint.survey.calculating import FULLY_OPEN
from lowpoint.survey.model import Numbers, TravelTable
from lowpoint.survey.workings.paper import Paper
from lowpoint.survey.workings.row import Row, there
from lowpoint.survey.workings.valve import CLOSED, bare, write_demands, write_free
from lowpoint.units import KV

__all__ = ["read_at", "write_fl_by_table", "write_opening"]

TABLE = "interpolation in the vendor's table"


def _segment(xs: Numbers, x: float) -> int:
    """The row of a table at or before ``x``, one that has a row after it."""
    return int(np.clip(np.searchsorted(xs, x, side="right") - 1, 0, len(xs) - 2))


def read_at(paper: Paper, table: TravelTable, column: str, symbol: str, meaning: str, finding: str = "") -> bool:
    """A column of the table at the opening ``h``, linear between its two rows; False where it cannot be read."""
    values = getattr(table, column)
    travel = 0.01 * paper.number("h")
    if values is None or not there(travel):
        return False
    # The opening was rounded when it was printed: at an end of the table it may lie a rounding outside.
    if not table.travel[0] - 1e-8 <= travel <= table.travel[-1] + 1e-8:
        return False
    i = _segment(table.travel, travel)
    source = f"table {table.name}"
    for end, at in (("a", i), ("b", i + 1)):
        paper.take(f"h_{end}", "opening in the table", 100.0 * table.travel[at], "%", source)
        paper.take(f"{symbol}_{end}", f"{meaning} there", float(values[at]), "", source)
    between = f"{symbol}_a + ({symbol}_b - {symbol}_a)*(h - h_a)/(h_b - h_a)"
    paper.work(symbol, f"{meaning}, at this opening", between, "", "definition", TABLE, finding)
    return True


def write_fl_by_table(paper: Paper, row: Row) -> None:
    """Opening and FL together, where the table gives FL by opening: what passes the flow with the FL it has there."""
    table = row.table
    if row.has("fl") or table is None or table.fl is None or table.coefficient is None or not paper.has("H", "dp"):
        return
    paper.section("Opening and FL together, by the valve's table")
    write_demands(paper, row)
    sized = not bare(row)
    if sized and not paper.has("S"):
        return
    write_free(paper, row)
    paper.work("G", "C times FL that it must have so as not to choke first",
               "sqrt(B/(1 - B*S1))" if sized else "sqrt(B)", "Kv", CLOSED)  # fmt: skip
    if not paper.has("C_free", "G"):
        return
    travel, fl = float(row.found("travel")), float(row.found("fl"))
    c_at_fl = table.fl * table.coefficient / KV
    fits = (table.coefficient / KV >= paper.number("C_free") * (1.0 - 1e-6)) & (
        c_at_fl >= paper.number("G") * (1.0 - 1e-6))  # fmt: skip
    if not there(travel) or not fits.any() or not table.fl.min() <= fl <= table.fl.max():
        which = "last" if fl == table.fl[-1] else "first"
        paper.take("FL", f"recovery factor of the {which} row: no opening of the table passes just this flow", fl, "",
                   f"table {table.name}")  # fmt: skip
        return
    _roots(paper, table, _segment(table.travel, travel - 1e-12))


def _roots(paper: Paper, table: TravelTable, i: int) -> None:
    """The share of the way from row to row at which the valve just passes the flow, free and choked."""
    assert table.coefficient is not None
    assert table.fl is not None
    source = f"table {table.name}"
    for end, at in (("a", i), ("b", i + 1)):
        paper.take(f"h_{end}", "opening in the table", 100.0 * table.travel[at], "%", source)
        paper.take(f"C_{end}", "coefficient there", float(table.coefficient[at]) / KV, "Kv", source)
        paper.take(f"FL_{end}", "recovery factor there", float(table.fl[at]), "", source)
    paper.work("w_free", "share of the way where C is C_free", "(C_free - C_a)/(C_b - C_a)", "", "definition")
    paper.work("q2", "C FL = G is q2 w^2 + q1 w + q0 = 0", "(C_b - C_a)*(FL_b - FL_a)", "", CLOSED)
    q1 = paper.work("q1", "its second coefficient", "C_a*(FL_b - FL_a) + FL_a*(C_b - C_a)", "", CLOSED)
    paper.work("q0", "its third coefficient", "C_a*FL_a - G", "", CLOSED)
    shares = ["w_free"]
    if q1 > 0.0 and there(paper.work("w_choked", "share of the way where C FL is G",
                                     "-2*q0/(q1 + sqrt(q1^2 - 4*q2*q0))", "", CLOSED)):  # fmt: skip
        shares.append("w_choked")
    paper.work("w", "the larger, and not below the row itself", f"max({', '.join(shares)}, 0)", "", CLOSED)
    paper.work("h", "opening", "h_a + w*(h_b - h_a)", "%", "definition", finding="travel")
    paper.work("FL", "recovery factor at this opening", "FL_a + w*(FL_b - FL_a)", "", "definition", TABLE, "fl")


def write_opening(paper: Paper, row: Row) -> None:
    """The opening for the coefficient found; what the valve has in hand."""
    if not paper.has("C"):
        return
    paper.section("Opening and capacity")
    table = row.table
    if not paper.has("h") and there(row.found("travel")):
        if table is not None and table.coefficient is not None:
            _by_table(paper, table)
        else:
            _by_formula(paper, row)
    rated = "C_rated"
    if table is not None and table.coefficient is not None and (not row.has("rated") or _rules(table, paper)):
        paper.take("C_last", "coefficient of the table's last row", float(table.coefficient[-1]) / KV, "Kv",
                   f"table {table.name}")  # fmt: skip
        rated = "C_last"
    paper.work("share", "required over rated coefficient", f"100*C/{rated}", "%", "definition",
               "above 100 % the flow does not pass", "capacity")  # fmt: skip


def _rules(table: TravelTable, paper: Paper) -> bool:
    """Does the table say that the open valve passes less than its rated coefficient?"""
    assert table.coefficient is not None
    return bool(table.travel[-1] >= FULLY_OPEN and table.coefficient[-1] / KV < paper.number("C_rated"))


def _by_table(paper: Paper, table: TravelTable) -> None:
    assert table.coefficient is not None
    i = _segment(table.coefficient, paper.number("C") * KV)
    for end, at in (("a", i), ("b", i + 1)):
        paper.take(f"h_{end}", "opening in the table", 100.0 * table.travel[at], "%", f"table {table.name}")
        paper.take(f"C_{end}", "coefficient there", float(table.coefficient[at]) / KV, "Kv", f"table {table.name}")
    paper.work("h", "opening", "h_a + (h_b - h_a)*(C - C_a)/(C_b - C_a)", "%", "definition", TABLE, "travel")


def _by_formula(paper: Paper, row: Row) -> None:
    word = row.word("characteristic")
    where = "from memory"
    if word == "linear":
        equation = "100*(C/C_rated - 1/R)/(1 - 1/R)" if row.has("rangeability") else "100*C/C_rated"
    else:
        equation = "100*(1 + ln(C/C_rated)/ln(R))"
    paper.work("h", f"opening, {word} characteristic", equation, "%", "IEC 60534-2-4", where, "travel")
