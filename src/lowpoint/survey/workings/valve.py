"""The required coefficient of a valve in closed form, with what its fittings take, and where it chokes."""

from __future__ import annotations

from lowpoint.physics.fittings import OVERSIZE
from lowpoint.survey.workings.paper import Paper
from lowpoint.survey.workings.row import Row, there

__all__ = ["bare", "write_coefficient", "write_drop", "write_fittings", "write_free", "write_geometry"]

IEC, CLOSED = "IEC 60534-2-1", "closed form"


def write_drop(paper: Paper) -> None:
    """The drop, and the head over the lowest pressure of the throat."""
    paper.section("Pressures")
    paper.work("dp", "pressure drop", "p1 - p2", "bar", "definition", finding="drop")
    paper.work("FF", "liquid critical pressure ratio factor", "0.96 - 0.28*sqrt(pv/pc)", "", IEC)
    paper.work("H", "inlet pressure over the lowest pressure in the throat", "p1 - FF*pv", "bar", IEC)


def bare(row: Row) -> bool:
    """Is the valve without reducers: of line size, a little above it, or of no size that is given?"""
    pipes = [row.number(field) for field in ("pipe_in", "pipe_out") if row.has(field)]
    return not row.has("valve_size") or all(1.0 <= row.number("valve_size") / pipe <= OVERSIZE for pipe in pipes)


def write_geometry(paper: Paper, row: Row) -> None:
    """The loss coefficients of the reducers; nothing where there is none, or where the valve is too large for one."""
    paper.section("Fittings beside the valve")
    if bare(row):
        why = "the valve is of line size" if row.has("valve_size") else "the valve size is not given"
        paper.say("fittings", "reducers beside the valve", "none", why, "FP = 1, FLP = FL")
        return
    _bore_ratio(paper, row, "1", "pipe_in", "")
    _bore_ratio(paper, row, "2", "pipe_out", "1")
    paper.work("K1", "loss of the inlet reducer", "0.5*(1 - x1^2)^2", "", IEC)
    paper.work("K2", "loss of the outlet expander", "(1 - x2^2)^2", "", IEC)
    paper.work("KB1", "Bernoulli coefficient of the inlet", "1 - x1^4", "", IEC)
    paper.work("KB2", "Bernoulli coefficient of the outlet", "1 - x2^4", "", IEC)
    paper.work("sumK", "all of them", "K1 + K2 + KB1 - KB2", "", IEC)


def _bore_ratio(paper: Paper, row: Row, end: str, field: str, like: str) -> None:
    """``d/D``, 1 for line size, and for a valve a little larger than its pipe's bore."""
    symbol, side = f"x{end}", "before" if end == "1" else "after"
    if not row.has(field):
        if like:
            paper.work(symbol, f"valve size over the pipe {side} it", f"x{like}", "", "definition",
                       "no pipe given: like the one before it")  # fmt: skip
        else:
            paper.take(symbol, f"valve size over the pipe {side} it", 1.0, "", "no pipe given: line size")
        return
    ratio = row.number("valve_size") / row.number(field)
    if 1.0 < ratio <= OVERSIZE:
        paper.take(symbol, f"valve size over the pipe {side} it", 1.0, "", "a little larger than the bore: line size")
    elif ratio <= 1.0:
        paper.work(symbol, f"valve size over the pipe {side} it", f"d/D{end}", "", "definition")


def write_coefficient(paper: Paper, row: Row) -> None:
    """Free and choked coefficients in closed form, and the larger one, turbulent."""
    paper.section("Required coefficient, turbulent")
    if not paper.has("A"):
        write_demands(paper, row)
        write_free(paper, row)
    if paper.has("S"):
        paper.work("C_choked", "coefficient if it chokes", "sqrt(B/(1 - B*S1))/FL", "Kv", CLOSED)
    elif bare(row):
        paper.work("C_choked", "coefficient if it chokes", "sqrt(B)/FL", "Kv", CLOSED)
    if paper.has("C_free", "C_choked"):
        paper.work("C_turb", "the larger one", "max(C_free, C_choked)", "Kv", CLOSED)


def write_free(paper: Paper, row: Row) -> None:
    """The coefficient that passes the flow freely."""
    if paper.has("S") or bare(row):
        equation = "sqrt(A)" if bare(row) else "sqrt(A/(1 - A*S))"
        paper.work("C_free", "coefficient if the flow is free", equation, "Kv", CLOSED)


def write_demands(paper: Paper, row: Row) -> None:
    """What the flow demands of the valve, free and choked, before its fittings take their share."""
    paper.work(
        "A", "(C FP)^2 that the flow needs on the drop", "Q^2*(rho/rho0)/dp", "Kv^2", CLOSED, "N1 = 1 in these units"
    )
    paper.work("B", "(C FLP)^2 that it needs where it chokes", "Q^2*(rho/rho0)/H", "Kv^2", CLOSED)
    if not bare(row):
        paper.work("S", "all fittings, for each C^2", "sumK/(N2*d^4)", "1/Kv^2", IEC)
        paper.work("S1", "inlet reducer, for each C^2", "(K1 + KB1)/(N2*d^4)", "1/Kv^2", IEC)


def write_fittings(paper: Paper, row: Row) -> None:
    """What the fittings do at the coefficient found: FP and FLP; the choked drop; the flow of the case once more."""
    if not paper.has("C"):
        return
    paper.section("Choking, at the coefficient found")
    if not bare(row):
        paper.work("c", "relative capacity", "(C/d^2)^2/N2", "", IEC)
        paper.work("FP", "piping geometry factor", "1/sqrt(1 + sumK*c)", "", IEC)
        paper.work("FLP", "recovery factor with the inlet reducer", "FL/sqrt(1 + FL^2*(K1 + KB1)*c)", "", IEC)
        paper.work("dp_choked", "drop at which the flow chokes", "(FLP/FP)^2*H", "bar", IEC, finding="choked_drop")
    else:
        paper.work("dp_choked", "drop at which the flow chokes", "FL^2*H", "bar", IEC, finding="choked_drop")
    if not paper.has("C_n") and paper.has("dp_choked"):
        factor = "" if bare(row) else "FP*"
        paper.work("Q_proof", "proof: the flow that this coefficient passes",
                   f"C*{factor}sqrt(min(dp, dp_choked)/(rho/rho0))", "m3/h", IEC, "the flow of the case")  # fmt: skip
    throat = row.found("throat_pressure")
    if there(throat):
        paper.work("p_vc", "pressure in the throat", "max(p1 - dp/FL^2, FF*pv)", "bar", IEC,
                   "above pv it is no evidence of no cavitation: only the limits judge", "throat_pressure")  # fmt: skip
