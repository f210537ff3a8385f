"""The working of one orifice plate between its two pressures."""

from __future__ import annotations

import math

from lowpoint.survey.workings.closing import write_index, write_margins, write_verdict
from lowpoint.survey.workings.leaving import write_leaving
from lowpoint.survey.workings.limits import stated_limit
from lowpoint.survey.workings.paper import Paper
from lowpoint.survey.workings.plate_terms import Plate, write_choking_terms, write_limit_terms, write_loss
from lowpoint.survey.workings.row import Row, there
from lowpoint.survey.workings.valve import IEC, write_drop

__all__ = ["AREA", "write_plate", "write_reynolds"]

AREA = "pi/4*(D/1000)^2"
PASSED = "3600*{area}*sqrt(2*100000*{head}/rho)"
LIMITS = {"incipient": "sigma_i", "constant": "sigma_c", "damage": "sigma_d", "vibration": "sigma_v"}


def write_plate(paper: Paper, row: Row) -> None:
    """All steps of a plate."""
    write_drop(paper)
    if not row.has("bore", "pipe_in") or not paper.has("H"):
        return
    plate = Plate(row.number("pipe_in"), row.number("bore"), row.number("bore_length"), row.number("holes"))
    paper.section("Loss and recovery of the plate")
    write_loss(paper, plate)
    write_choking_terms(paper, plate)
    paper.results["fl"] = paper.number("FL")
    _flow(paper, row, plate)
    _choking(paper)
    write_index(paper, row)
    _limits(paper, row, plate)
    write_margins(paper, row)
    write_verdict(paper, row)
    write_leaving(paper, row)


def write_reynolds(paper: Paper, row: Row) -> float:
    """The pipe Reynolds number of the flow that passes, as the survey converged to it; NaN without a viscosity."""
    passed, pipe = float(row.found("passed")), row.number("pipe_in")
    if not (row.has("viscosity") and there(passed)):
        return math.nan
    reynolds = 4.0 * passed * row.number("density") / (math.pi * pipe * row.number("viscosity"))
    note = "of the flow that passes, which follows from it below"
    if reynolds < 5000.0:
        note += f"; {reynolds:.4g} is below the range of ISO 5167-2, whose end is taken"
    paper.take("Re_v", "Reynolds number in the pipe", max(reynolds, 5000.0), "", "found by repeating", note)
    return reynolds


def _flow(paper: Paper, row: Row, plate: Plate) -> None:
    """What the plate passes between the two pressures, against the flow wanted."""
    paper.section("Flow that the plate passes")
    at = ""
    if there(write_reynolds(paper, row)):
        at = "_v"
        write_loss(paper, plate, at)
        write_choking_terms(paper, plate, at)
    paper.work("x", "dynamic pressure in the pipe, free or choked", f"min(dp/{plate.loss(at)}, H/F{at})", "bar",
               "vena contracta")  # fmt: skip
    paper.work("Q_passed", "flow that the plate passes", PASSED.format(area=AREA, head="x"), "m3/h", "ISO 5167-2",
               finding="passed")  # fmt: skip
    paper.work("share", "flow wanted over the one that passes", "100*Q/Q_passed", "%", "definition",
               "above 100 % the flow does not pass", "capacity")  # fmt: skip


def _choking(paper: Paper) -> None:
    paper.section("Choking and required coefficient")
    paper.work("dp_choked", "drop at which the flow chokes", "FL^2*H", "bar", "vena contracta", finding="choked_drop")
    paper.work("p_vc", "pressure in the throat", "max(p1 - dp/FL^2, FF*pv)", "bar", IEC,
               "above pv it is no evidence of no cavitation: only the limits judge", "throat_pressure")  # fmt: skip
    paper.work("C", "coefficient of a plate that would pass the flow", "Q*sqrt((rho/rho0)/min(dp, dp_choked))", "Kv",
               IEC, finding="coefficient")  # fmt: skip


def _limits(paper: Paper, row: Row, plate: Plate) -> None:
    """The limits that the list gives for the plate, else the published ones."""
    given = row.has("incipient") or row.has("constant") or row.has("damage")
    if given or there(row.found("vibration")):
        paper.section("Limits, as the list gives them")
        for name, symbol in LIMITS.items():
            if there(row.found(name)) and row.has(name):
                stated = stated_limit(paper, row, name)
                paper.work(symbol, f"{name} limit", stated, "", "definition", "limits of plates are not scaled", name)
    if not given:
        paper.section("Limits, published")
        write_limit_terms(paper, plate)
        paper.results |= {name: paper.number(LIMITS[name]) for name in ("incipient", "constant")}
