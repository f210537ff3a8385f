"""Why a case has no verdict: what is missing, what contradicts, and what the calculation says of the rest."""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint.design.checks import told
from lowpoint.errors import LowpointError
from lowpoint.physics.indices import to_upstream
from lowpoint.physics.plate_loss import open_share
from lowpoint.survey.calculating import filled_pipes
from lowpoint.survey.fields import BY_KEY
from lowpoint.survey.limiting import LIMITS, stated
from lowpoint.survey.model import Cases, Findings, absent
from lowpoint.survey.setting import plates_of, set_groups
from lowpoint.survey.speaking import Lines, why

__all__ = ["add_errors"]

BOILS = "the liquid would boil before the valve: check temperature and inlet pressure, and gauge against absolute"
NO_FL = (
    "FL (liquid pressure recovery factor FL at the operating travel) must be given in the row of every case, as it "
    "moves with the opening; or name a Table, or write 'typical' for the screening value of the style"
)
OTHER_FORM = "the {} limit must be above 1 in upstream form, got {:.4g}: was another form meant? Name it in column Form"


def add_errors(cases: Cases, findings: Findings, lines: Lines) -> None:
    """Add every reason why a case cannot be judged; one that spoiled its own cell needs no second."""
    spoiled = np.zeros(cases.count, np.bool_)
    spoiled[[place for place, _ in lines.errors]] = True
    _missing(cases, lines, spoiled)
    _orders(cases, lines)
    _needs(cases, lines)
    _forms(cases, findings, lines)
    _plates(cases, lines)
    _unanswered(cases, findings, lines)


def _missing(cases: Cases, lines: Lines, spoiled: Any) -> None:
    valve, orifice = cases.kind == "valve", cases.kind == "orifice"
    everywhere = np.ones(cases.count, np.bool_)
    liquid = "; or name the liquid and its temperature"
    tabled = np.isin(cases.table.astype(str), [name for name, table in cases.tables.items()
                                               if table.fl is not None and table.coefficient is not None])  # fmt: skip
    needed = (
        ("flow", everywhere, ""), ("p1", everywhere, ""), ("p2", absent(cases.outlet), "; or say where the outlet is"),
        ("pv", everywhere, liquid), ("pc", everywhere, "; or name the liquid"), ("density", everywhere, liquid),
        ("fl", valve & ~tabled, ""), ("pipe_in", ~valve, ""), ("bore", orifice, ""),
    )  # fmt: skip
    for key, where, more in needed:
        # A row with an unreadable cell says what is wrong there; what follows from it would only repeat that.
        mask = where & np.isnan(getattr(cases, key)) & ~spoiled
        if key in ("pv", "density"):
            mask &= absent(cases.fluid) | np.isnan(cases.t)
        if key == "flow":
            mask &= np.isnan(cases.mass_flow)
        what = BY_KEY[key]
        lines.error(mask, f"{what.heading} ({_meaning(key)}) must be given{more}")
    lines.error((cases.kind == "plates") & absent(cases.bores) & ~spoiled, "Bores of the set must be given")


def _meaning(key: str) -> str:
    quantity = BY_KEY[key].quantity
    return quantity.meaning if quantity else ""


def _orders(cases: Cases, lines: Lines) -> None:
    for small, large, sentence in (
        ("p2", "p1", "check that the two are not swapped"),
        ("pv", "p1", BOILS),
        ("pv", "pc", "a vapour pressure lies below the critical pressure: check that the two are not swapped"),
    ):
        low, high = getattr(cases, small), getattr(cases, large)
        for place in np.flatnonzero(low >= high).tolist():
            values = (told(float(x[place]), "pressure", "metric") for x in (high, low))
            lines.errors.append((place, "{} must be below {} = {}, got {}: {}".format(small, large, *values, sentence)))


def _needs(cases: Cases, lines: Lines) -> None:
    """What must be given where something else is."""
    valve = cases.kind == "valve"
    sized = ~np.isnan(cases.valve_size)
    piped = ~np.isnan(cases.pipe_in) | ~np.isnan(cases.pipe_out)
    lines.error(valve & piped & ~sized, "Valve size must be given where a pipe is")
    lacking = [("Valve size", ~sized), ("Fd", np.isnan(cases.fd)), ("Trim", absent(cases.trim))]
    for name, without in lacking:
        lines.error(valve & ~np.isnan(cases.viscosity) & without, f"{name} must be given where the viscosity is: it "
                    "rules whether the flow is turbulent")  # fmt: skip
    lines.error(valve & cases.estimate & np.isnan(cases.fd), "Fd must be given for the estimate of the incipient limit")


def _forms(cases: Cases, findings: Findings, lines: Lines) -> None:
    form = np.where(absent(cases.form), "upstream", cases.form)
    for name, limit in stated(cases, findings.travel).items():
        for place in np.flatnonzero(limit <= 1.0).tolist():
            lines.errors.append((place, OTHER_FORM.format(name, float(limit[place]))))
    for name in LIMITS:
        value = getattr(cases, name)
        lines.error(
            ~np.isnan(value) & np.isnan(to_upstream(value, form)), f"the {name} limit is impossible in its form"
        )


def _plates(cases: Cases, lines: Lines) -> None:
    orifice = np.flatnonzero(cases.kind == "orifice")
    if len(orifice):
        whole = open_share(cases.bore, cases.pipe_in, cases.holes) >= 1.0
        lines.error((cases.kind == "orifice") & whole, "the bore (all holes together) must be smaller than the pipe: "
                    "check that the two are not swapped")  # fmt: skip
        lines.error((cases.kind == "orifice") & (cases.holes != np.floor(cases.holes)) & ~np.isnan(cases.holes),
                    "Holes must be a whole number")  # fmt: skip
    sets = np.flatnonzero((cases.kind == "plates") & ~absent(cases.bores) & ~np.isnan(cases.pipe_in))
    for key, rows in set_groups(cases.take(sets)) if len(sets) else ():
        try:
            plates_of(key)
        except LowpointError as problem:
            lines.errors += [(place, str(problem)) for place in sets[rows].tolist()]


def _unanswered(cases: Cases, findings: Findings, lines: Lines) -> None:
    """Valves that have everything and still no coefficient: the reason in the words of the function."""
    failed = np.zeros(cases.count, np.bool_)
    failed[[place for place, _ in lines.errors]] = True
    silent = (cases.kind == "valve") & ~failed & np.isnan(findings.coefficient)
    nothing = silent & np.isnan(findings.fl) & absent(cases.table)
    lines.error(nothing, NO_FL)
    rows = np.flatnonzero(silent & ~nothing)
    if len(rows):
        sizes = dict(zip(("valve_size", "pipe_in", "pipe_out"), filled_pipes(cases), strict=True))
        state = {name: getattr(cases, name) for name in ("flow", "p1", "p2", "pv", "pc", "density", "viscosity", "fd")}
        arguments: dict[str, Any] = {name: x[rows] for name, x in (state | sizes | {"fl": findings.fl}).items()}
        arguments["trim"] = cases.trim[rows]
        why(lines, "COEFFICIENT", rows, np.ones(len(rows), np.bool_), arguments)
    failed[[place for place, _ in lines.errors]] = True
    silent = ~failed & absent(findings.regime)
    lines.error(silent & np.isnan(findings.choked_limit), "the index at choking has no answer: the required "
                "coefficient is too large for this valve size and its reducers")  # fmt: skip
    lines.error(silent & ~np.isnan(findings.choked_limit), "there is no verdict for these values: check the limits")
