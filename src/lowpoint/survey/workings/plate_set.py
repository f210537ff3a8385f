"""The working of a set of plates in series: each plate's loss, the flow that passes, and the pressures between."""

from __future__ import annotations

import math

from lowpoint.survey.workings.closing import write_index_form, write_margins, write_verdict
from lowpoint.survey.workings.leaving import write_leaving
from lowpoint.survey.workings.paper import Paper
from lowpoint.survey.workings.plate import AREA, write_reynolds
from lowpoint.survey.workings.plate_terms import Plate, write_choking_terms, write_limit_terms, write_loss
from lowpoint.survey.workings.row import Row, there
from lowpoint.survey.workings.valve import IEC, write_drop

__all__ = ["write_set"]

MARCH = "vena contracta"
TOUCHES = 1e-6
"""Relative: a pressure this near to the one at which a plate chokes is that one; both are printed rounded."""


def write_set(paper: Paper, row: Row) -> None:
    """All steps of a set."""
    write_drop(paper)
    bores = row.word("bores")
    if not bores or not row.has("pipe_in") or not paper.has("H") or not there(row.found("passed")):
        return
    at = "_v" if there(_reynolds(paper, row)) else ""
    plates = [_plate(paper, row, float(bore), number, at) for number, bore in enumerate(bores, 1)]
    _flow(paper, plates, at)
    _march(paper, row, plates, at)
    _decides(paper, row, plates, at)
    write_margins(paper, row)
    write_verdict(paper, row)
    write_leaving(paper, row)


def _reynolds(paper: Paper, row: Row) -> float:
    paper.section("Viscosity")
    return write_reynolds(paper, row)


def _plate(paper: Paper, row: Row, bore: float, number: int, at: str) -> Plate:
    """Loss, recovery and limits of one plate."""
    of = f"_{number}"
    plate = Plate(row.number("pipe_in"), bore, row.number("bore_length"), row.number("holes"), of)
    paper.section(f"Plate {number}")
    paper.take(f"bore{of}", "diameter of its bore", 1000.0 * bore, "mm", row.where("bores"))
    for symbol in ("L", "holes"):
        if paper.has(symbol):
            paper.values[f"{symbol}{of}"] = paper.values[symbol]
    write_loss(paper, plate)
    write_choking_terms(paper, plate)
    write_limit_terms(paper, plate)
    if at:
        write_loss(paper, plate, at)
        write_choking_terms(paper, plate, at)
    return plate


def _flow(paper: Paper, plates: list[Plate], at: str) -> None:
    """The flow of the set: free, or as much as the plate that chokes first lets through."""
    paper.section("Flow that the set passes")
    before = ""
    terms = []
    for plate in plates:
        terms.append(f"H/(F{plate.of}{at}{before})" if before else f"H/F{plate.of}{at}")
        before += f" + {plate.loss(at)}"
    paper.work("sumK", "loss of all plates", before[3:], "", "definition")
    paper.work("x", "dynamic pressure in the pipe: free, or one plate choked", f"min(dp/sumK, {', '.join(terms)})",
               "bar", MARCH)  # fmt: skip
    paper.work("Q_passed", "flow that the set passes", f"3600*{AREA}*sqrt(2*100000*x/rho)", "m3/h", "ISO 5167-2",
               finding="passed")  # fmt: skip
    paper.work("share", "flow wanted over the one that passes", "100*Q/Q_passed", "%", "definition",
               "above 100 % the flow does not pass", "capacity")  # fmt: skip


def _march(paper: Paper, row: Row, plates: list[Plate], at: str) -> None:
    """The pressures between the plates from the last one backwards, then the index of each plate."""
    paper.section("Pressures between the plates, from the last one backwards")
    last = len(plates)
    paper.work(f"p_after_{last}", "behind the last plate", "p2", "bar", "definition")
    for number in range(last, 1, -1):
        loss = plates[number - 1].loss(at)
        paper.work(f"p_after_{number - 1}", f"before plate {number}, free or choked",
                   f"max(p_after_{number} + {loss}*x, FF*pv + F_{number}{at}*x)", "bar", MARCH)  # fmt: skip
    paper.work("p_after_0", "before the first plate", "p1", "bar", "definition")
    for number in range(1, last + 1):
        paper.section(f"Index of plate {number}")
        inlet, of = f"p_after_{number - 1}", f"_{number}"
        paper.work(f"dp{of}", "its drop", f"{inlet} - p_after_{number}", "bar", "definition")
        paper.work(f"sigma{of}", "its index", f"({inlet} - pv)/dp{of}", "", "definition")
        paper.work(f"sigma_ch{of}", "its index at choking", f"({inlet} - pv)/(FL{of}{at}^2*({inlet} - FF*pv))", "", IEC)
        limit = {"constant": "sigma_c", "choked": "sigma_ch"}.get(str(row.word("keep")), "sigma_i")
        paper.work(
            f"m{of}", "its margin to the limit that counts", f"100*(sigma{of}/{limit}{of} - 1)", "%", "definition"
        )


def _decides(paper: Paper, row: Row, plates: list[Plate], at: str) -> None:
    """The plate that decides: the one that chokes, else that of the least margin; and the set's coefficient."""
    number = int(row.found("plate"))
    if not 1 <= number <= len(plates):
        return
    of, inlet = f"_{number}", f"p_after_{number - 1}"
    chokes = [_chokes(paper, plate, at) for plate in range(1, len(plates) + 1)]
    paper.section("The plate that decides")
    why = "it chokes: the pressure before it is FF pv + F x" if chokes[number - 1] else "it has the least margin"
    paper.say("plate", "number of the plate that decides", str(number), why)
    index = f"min(sigma{of}, sigma_ch{of})" if chokes[number - 1] else f"sigma{of}"
    paper.work("p_in", "pressure before it", inlet, "bar", "definition")
    paper.work("sigma", "index of the set: of this plate", index, "", "definition", finding="sigma")
    paper.work("sigma_choked", "index at which it chokes", f"sigma_ch{of}", "", "definition", finding="choked_limit")
    for name, symbol in (("incipient", "sigma_i"), ("constant", "sigma_c")):
        paper.work(symbol, f"its {name} limit", f"{symbol}{of}", "", "definition", finding=name)
    paper.work("FL", "its recovery factor", f"FL{of}{at}", "", "definition", finding="fl")
    paper.work("dp_plate", "its drop", f"dp{of}", "bar", "definition", finding="drop")
    paper.work("dp_choked", "its drop at choking", "FL^2*(p_in - FF*pv)", "bar", IEC, finding="choked_drop")
    paper.work("p_vc", "pressure in its throat", "max(p_in - dp_plate/FL^2, FF*pv)", "bar", IEC,
               finding="throat_pressure")  # fmt: skip
    total = "min(dp, sumK*x)" if any(chokes) else "dp"
    paper.work("C", "coefficient of a set that would pass the flow", f"Q*sqrt((rho/rho0)/{total})", "Kv", IEC,
               finding="coefficient")  # fmt: skip
    write_index_form(paper, row)


def _chokes(paper: Paper, number: int, at: str) -> bool:
    """Does a plate choke: is the pressure before it no more than its choked flow needs?"""
    before = paper.number(f"p_after_{number - 1}")
    floor = paper.number("FF") * paper.number("pv") + paper.number(f"F_{number}{at}") * paper.number("x")
    return before <= floor or math.isclose(before, floor, rel_tol=TOUCHES)
