"""Cautions of orifice plates and sets: of what passes, of the rule for the loss, and of the limits' fit."""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint import design
from lowpoint.survey.fields import BY_KEY
from lowpoint.survey.limiting import LIMITS
from lowpoint.survey.model import Cases, Findings
from lowpoint.survey.setting import kept_kind, rate_rows, set_groups
from lowpoint.survey.speaking import Lines, cautions_of

__all__ = ["caution_plates", "ratings"]

SHORT = "the plates pass {:.4g} m3/h at these pressures, less than the flow wanted"
MORE = (
    "the plates pass {:.4g} m3/h at these pressures, more than the flow wanted: something else in the line must take "
    "the rest of the drop"
)
OF_SET = "the {} limit that is given was not used: a set is judged plate by plate, with the published limits of each"
OF_VALVES = "{} is given and was not used: it belongs to valves; limits of a plate hold as they are given"
AGREED = 0.02
"""Share by which the flow that plates pass may differ from the one wanted without a word: drills leave that much."""


def caution_plates(cases: Cases, findings: Findings, answered: Any, lines: Lines) -> None:
    """Add the cautions of plates that have an answer."""
    plates = answered & (cases.kind != "valve")
    if not plates.any():
        return
    _unused(cases, plates, lines)
    for place in np.flatnonzero(plates).tolist():
        passed, wanted = float(findings.passed[place]), float(cases.flow[place])
        if abs(passed / wanted - 1.0) > AGREED:
            lines.cautions.append((place, (SHORT if passed < wanted else MORE).format(3600.0 * passed)))
    rows = np.flatnonzero(plates & (cases.kind == "orifice"))
    if len(rows):
        _of_single(cases, findings, rows, lines)
    for _, places, rating in ratings(cases, plates):
        for note in rating.notes:
            if note.topic == "flow":
                continue  # told above, for single plates and sets alike
            columns = [int(name) - 1 for name in note.cases] or range(len(places))
            where = f"plate {note.plate}: " if note.plate else ""
            lines.cautions += [(int(places[column]), where + note.text) for column in columns]


def _unused(cases: Cases, plates: Any, lines: Lines) -> None:
    """What the list gives and plates do not take, by name."""
    sets = plates & (cases.kind == "plates")
    for name in LIMITS:
        lines.caution(sets & ~np.isnan(getattr(cases, name)), OF_SET.format(name))
    for name in ("xfz", "size_ref", "head_ref"):
        lines.caution(plates & ~np.isnan(getattr(cases, name)), OF_VALVES.format(BY_KEY[name].heading))
    lines.caution(plates & cases.estimate, OF_VALVES.format("the estimate of the incipient limit"))


def _of_single(cases: Cases, findings: Findings, rows: Any, lines: Lines) -> None:
    state = {name: getattr(cases, name)[rows] for name in ("p1", "p2", "bore", "density", "pv", "pc", "bore_length",
                                                           "holes")}  # fmt: skip
    state["pipe"] = cases.pipe_in[rows]
    viscosity = cases.viscosity[rows]
    state["viscosity"] = None if np.isnan(viscosity).all() else viscosity
    cautions_of(lines, "ORIFICE_FLOW", rows, {**state, "result": findings.passed[rows]})
    fitted = np.isnan(cases.incipient[rows]) & np.isnan(cases.constant[rows]) & np.isnan(cases.damage[rows])
    cautions_of(lines, "ORIFICE_LIMIT", rows, {**state, "limit": "incipient"}, fitted)


def ratings(cases: Cases, wanted: Any) -> list[tuple[str, Any, design.Rating]]:
    """Every set of plates: (tag, places of its cases, its rating), over the cases marked in ``wanted``."""
    found = []
    places = np.flatnonzero(wanted & (cases.kind == "plates"))
    for tag in dict.fromkeys(cases.tag[places].tolist()):
        mine = places[cases.tag[places] == tag]
        part = cases.take(mine)
        for key, rows in set_groups(part):
            kind = kept_kind(part.keep[rows[0]])
            found.append((tag, mine[rows], rate_rows(part.take(rows), key, kind)))
    return found
