"""Viscous flow through a valve: the Reynolds number, the factor FR, and the coefficient found by search."""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint.physics import nonturbulent
from lowpoint.survey.workings.paper import Paper
from lowpoint.survey.workings.row import Row
from lowpoint.units import KV

__all__ = ["write_final"]

IEC = "IEC 60534-2-1"
REV = "N4*Fd*Q/(nu*sqrt({0}*FL))*(FL^2*{0}^2/(N2*{1}^4) + 1)^(1/4)"
TRIM = {"full": "N2/({0}/d^2)^2", "reduced": "1 + N32*({0}/d^2)^(2/3)"}
LAMINAR, TRANSITIONAL = "0.026/FL*sqrt(n{0}*Rev{0})", "1 + 0.33*sqrt(FL)/n{0}^(1/4)*log10(Rev{0}/10000)"


def write_final(paper: Paper, row: Row) -> None:
    """The required coefficient: the turbulent one, or the non-turbulent one where viscosity makes it larger."""
    if not paper.has("C_turb"):
        return
    if not row.has("viscosity"):
        paper.work("C", "required coefficient", "C_turb", "Kv", "closed form", "no viscosity given: turbulent flow",
                   "coefficient")  # fmt: skip
    elif paper.has("nu", "Fd", "d") and row.word("trim") in TRIM:
        _viscous(paper, row)


def _viscous(paper: Paper, row: Row) -> None:
    paper.section("Viscosity")
    trim = str(row.word("trim"))
    paper.say("trim", "trim class", trim, row.where("trim"))
    paper.work("C_t", "coefficient on the actual drop, fittings and choking aside", "Q*sqrt((rho/rho0)/dp)", "Kv", IEC)
    if _factor(paper, row, trim, "C_t", "_t") >= 1.0:
        paper.work("C", "required coefficient", "C_turb", "Kv", "closed form", "FR is 1: the flow is turbulent",
                   "coefficient")  # fmt: skip
        return
    found = _searched(row)
    if not np.isfinite(found):
        return
    paper.take("C_n", "first root of C*FR(C) = C_t above C_t", found / KV, "Kv", "found by search", "proved below")
    _factor(paper, row, trim, "C_n", "")
    if paper.number("Rev") < 10.0 <= paper.number("Rev_t"):
        jump = "FR steps at Rev = 10: no C meets C_t exactly, the first above it is taken"
    else:
        jump = "C_t again"
    paper.work("C_proof", "proof: what is left of it by viscosity", "C_n*FR", "Kv", IEC, jump)
    paper.work("C", "required coefficient, the larger one", "max(C_turb, C_n)", "Kv", "closed form",
               finding="coefficient")  # fmt: skip


def _factor(paper: Paper, row: Row, trim: str, coefficient: str, mark: str) -> float:
    """Reynolds number, trim number and FR at a coefficient; the factor, or 0 where there is none."""
    pipe = "D1" if row.has("pipe_in") else "d"
    rev = paper.work(f"Rev{mark}", f"valve Reynolds number at {coefficient}", REV.format(coefficient, pipe), "", IEC)
    paper.work(f"n{mark}", "trim number", TRIM[trim].format(coefficient), "", IEC,
               "which trim class has which equation: from memory")  # fmt: skip
    curves = [TRANSITIONAL, LAMINAR] if rev >= 10.0 else [LAMINAR]
    terms = ", ".join(curve.format(mark) for curve in curves)
    return paper.work(f"FR{mark}", "Reynolds number factor", f"min({terms}, 1)", "", IEC)


def _searched(row: Row) -> float:
    """The coefficient of the non-turbulent branch, as the survey finds it."""
    fl = float(row.found("fl"))
    pipe = row.number("pipe_in") if row.has("pipe_in") else row.number("valve_size")
    numbers = (row.number("flow"), row.number("p1") - row.number("p2"), row.number("density"), fl,
               row.number("valve_size"), pipe, row.number("viscosity"), row.number("fd"))  # fmt: skip
    columns: list[Any] = [*(np.array([x]) for x in numbers), np.array([row.word("trim") == "reduced"])]
    with np.errstate(all="ignore"):
        return float(nonturbulent.coefficient_for(*columns)[0])
