"""The rows of orifices.csv by the beginning of their ids, their tolerances in words, and plates for the checks."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from lowpoint import functions
from published.rows import Row, read

__all__ = ["PIPE", "Check", "Gap", "allowed", "loss", "prefix", "rows", "water"]

Check = Callable[[Row], float]
PIPE = 100.0
"""mm; wide enough for ISO 5167-2 to need no term for small pipes."""
_TOLERANCE = re.compile(r"(?:(rel|abs):)?([\d.]+(?:e[-+]?\d+)?)\s*(%|rel|abs)?")


@dataclass(frozen=True)
class Gap:
    """Two sources disagree: the answer here over that of the row, less one, to the nearest 0.1 %; and who differs."""

    gap: float
    between: str


def prefix(id_: str) -> str:
    return id_.rpartition("-")[0]


def rows(*prefixes: str) -> dict[str, Row]:
    """Rows whose ids begin so, all of them without a prefix."""
    return {id_: row for id_, row in read("orifices").items() if not prefixes or prefix(id_) in prefixes}


def allowed(row: Row) -> float:
    """The absolute tolerance that the row states first: ``1e-4 rel``, ``0.5%``, ``0.01 abs``, or a bare number."""
    found = _TOLERANCE.match(row.tolerance)
    assert found, row.tolerance
    size = float(found[2]) / (100.0 if found[3] == "%" else 1.0)
    relative = found[1] == "rel" or found[3] in ("%", "rel")
    return max(size * (abs(row.value) if relative else 1.0), 1e-12 * abs(row.value))


def loss(beta: float, t_over_d: float = 0.0, holes: int = 1, reynolds: float = 1e6) -> float:
    """K of a plate whose holes together open ``beta^2`` of the pipe."""
    bore = beta * PIPE / np.sqrt(holes)
    length = bore * t_over_d or None
    return functions["LP_ORIFICE_LOSS"](bore=bore, pipe=PIPE, bore_length=length, holes=holes, reynolds=reynolds)


def water(t: float, p: float) -> dict[str, float]:
    """What the functions of plates ask of water at t (deg C) and p (bar); CoolProp."""
    return {
        "density": functions["LP_DENSITY"]("water", t, p), "viscosity": functions["LP_VISCOSITY"]("water", t, p),
        "pv": functions["LP_VAPOUR_PRESSURE"]("water", t), "pc": functions["LP_CRITICAL_PRESSURE"]("water"),
    }  # fmt: skip
