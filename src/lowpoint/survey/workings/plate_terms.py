"""The loss of one orifice plate, its vena contracta and its published limits, term by term.

``of`` marks the plate (empty, ``_1``, ``_2``...), ``at`` the Reynolds number that the loss belongs to (empty for 1e6,
``_v`` for that of the viscous liquid). The pipe is ``D``, the bore ``bore``, its length ``L``.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from lowpoint.physics.plate_loss import LEAST_REYNOLDS, SMALL_PIPE, TURBULENT, iso_weight
from lowpoint.survey.workings.paper import Paper

__all__ = ["Plate", "write_choking_terms", "write_limit_terms", "write_loss"]

ISO, CONTRACTED, FIT = "ISO 5167-2", "vena contracta", "Kuroda 1978"
COEFFICIENT = (
    "0.5961 + 0.0261*{b}^2 - 0.216*{b}^8 + 0.000521*(1000000*{b}/{re})^0.7 "
    "+ (0.0188 + 0.0063*{a})*{b}^3.5*(1000000/{re})^0.3"
)
SMALL = " + 0.011*(0.75 - {b})*(2.8 - D/25.4)"
TAU = "(2.4 - min({r}, 2.4))*10^(-(0.25 + 0.535*min({r}, 2.4)^8/(0.05 + min({r}, 2.4)^7)))"
THICK = "(0.5*(1 - {f})^0.75 + {tau}*(1 - {f})^1.375 + (1 - {f})^2 + 0.02*{r})"


@dataclass(frozen=True)
class Plate:
    """A plate, SI, NaN for a thin edge and for one hole; ``of`` marks its symbols."""

    pipe: float
    bore: float
    length: float
    holes: float
    of: str = ""

    @property
    def thick(self) -> bool:
        """Has the bore a parallel length?"""
        return self.length > 0.0

    def loss(self, at: str = "") -> str:
        """Symbol of its loss: of a thin plate that of the sharp edge."""
        return f"K{self.of}{at}" if self.thick else f"K_thin{self.of}{at}"

    def weight(self) -> float:
        """How much of ISO 5167-2 is in its loss."""
        columns = (np.array([x]) for x in (self.bore, self.pipe, self.holes))
        return float(np.asarray(iso_weight(*columns))[0])


def write_shape(paper: Paper, plate: Plate) -> None:
    """Bore over pipe and open share, once for each plate."""
    of = plate.of
    if paper.has(f"f{of}"):
        return
    paper.work(f"beta{of}", "bore over pipe", f"bore{of}/D", "", "definition")
    many = f"holes{of}*" if plate.holes > 1.0 else ""
    paper.work(f"f{of}", "open share of the pipe's area", f"{many}beta{of}^2", "", "definition")


def write_loss(paper: Paper, plate: Plate, at: str = "", reynolds: float = TURBULENT) -> None:
    """The loss coefficient of the plate as it is, on the velocity in the pipe and the net drop."""
    write_shape(paper, plate)
    of, weight = plate.of, plate.weight()
    mark = of + at
    whole = weight in (0.0, 1.0)
    if weight > 0.0:
        _iso(paper, plate, at, f"K_thin{mark}" if whole else f"K_iso{mark}", reynolds)
    if weight < 1.0:
        symbol = f"K_thin{mark}" if whole else f"K_sharp{mark}"
        paper.work(symbol, "loss of a sharp edge outside ISO 5167-2, by Idelchik",
                   f"((1 - f{of}) + 0.707*(1 - f{of})^0.375)^2/f{of}^2", "", ISO)  # fmt: skip
    if not whole:
        paper.take(f"w{mark}", "how far the plate is inside ISO 5167-2", weight, "", "common practice",
                   "from 0 at beta 0.08 or 0.8, or a pipe of 45 mm, to 1 at beta 0.1 or 0.75, or 50 mm")  # fmt: skip
        paper.work(f"K_thin{mark}", "loss between the two ranges", f"K_iso{mark}^w{mark}*K_sharp{mark}^(1 - w{mark})",
                   "", ISO)  # fmt: skip
    if not plate.thick:
        return
    paper.work(f"r{mark}", "bore length over bore", f"L{of}/bore{of}", "", "definition")
    paper.work(f"tau{mark}", "Idelchik's function of it", TAU.format(r=f"r{mark}"), "", ISO, "its form: from memory")
    thick, sharp = THICK.format(f=f"f{of}", tau=f"tau{mark}", r=f"r{mark}"), (
        THICK.format(f=f"f{of}", tau="2.4*10^(-0.25)", r="0"))  # fmt: skip
    paper.work(f"K{mark}", "loss of the plate, by Idelchik's ratio of long to sharp bores",
               f"K_thin{mark}*{thick}/{sharp}", "", ISO)  # fmt: skip


def _iso(paper: Paper, plate: Plate, at: str, symbol: str, reynolds: float) -> None:
    mark, b, re = plate.of + at, f"beta{plate.of}", f"Re{at}"
    if not paper.has(re):
        paper.take(re, "Reynolds number in the pipe", max(reynolds, LEAST_REYNOLDS), "", "common practice",
                   "for limits and recovery, and where no viscosity is given")  # fmt: skip
    paper.work(f"a{mark}", "term of the discharge coefficient", f"(19000*{b}/{re})^0.8", "", ISO)
    equation = COEFFICIENT.format(b=b, re=re, a=f"a{mark}") + (SMALL.format(b=b) if plate.pipe < SMALL_PIPE else "")
    paper.work(f"Cd{mark}", "discharge coefficient, Reader-Harris/Gallagher, corner taps", equation, "", ISO)
    paper.work(symbol, "loss of a sharp edge inside ISO 5167-2",
               f"(sqrt(1 - {b}^4*(1 - Cd{mark}^2))/(Cd{mark}*{b}^2) - 1)^2", "", ISO)  # fmt: skip


def write_choking_terms(paper: Paper, plate: Plate, at: str = "") -> None:
    """The fall of pressure to the lowest point, and the recovery factor that follows."""
    of = plate.of
    mark = of + at
    fall = f"K_thin{mark} + 2*sqrt(K_thin{mark})"
    if plate.thick:
        fall = f"max({fall}, {plate.loss(at)} + 2/f{of} - 2)"
    paper.work(f"F{mark}", "fall to the lowest pressure, in heads of the velocity in the pipe", fall, "", CONTRACTED)
    paper.work(f"FL{mark}", "recovery factor of the plate", f"sqrt({plate.loss(at)}/F{mark})", "", CONTRACTED)


def write_limit_terms(paper: Paper, plate: Plate) -> None:
    """The published incipient and constant limits of the plate; the terms of Reynolds number 1e6 must be there."""
    of = plate.of
    write_shape(paper, plate)
    paper.work(f"s0{of}", "vena contracta over the pipe's area", f"1/(1 + sqrt(K_thin{of}))", "", CONTRACTED)
    paper.work(f"i_fit{of}", "incipient index of the fit, downstream form", f"max(1.2, 4.5*sqrt(f{of}) + 0.5)", "", FIT)
    paper.work(f"c_fit{of}", "constant index of the fit, downstream form",
               f"min(max(3.3*sqrt(f{of}), 2/sqrt(K_thin{of}) + 0.9/(1 - s0{of})^2), i_fit{of})", "", FIT)  # fmt: skip
    paper.work(f"Y{of}", "effect of size above a pipe of 100 mm", f"max(D/100, 1)^(0.3*K_thin{of}^(-0.25))", "", FIT,
               "exponent from memory")  # fmt: skip
    floor = f"1/FL{of}^2 - 1"
    paper.work(f"sigma_i{of}", "incipient limit of the plate, upstream form", f"max(i_fit{of}*Y{of}, {floor}) + 1", "",
               FIT, "not below the index at choking; the form of the published index is assumed")  # fmt: skip
    paper.work(f"sigma_c{of}", "constant limit of the plate, upstream form", f"max(c_fit{of}*Y{of}, {floor}) + 1", "",
               FIT)  # fmt: skip
