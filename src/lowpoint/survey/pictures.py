"""The two pictures of an item as plain numbers: pressure through the valve or the plates, index against the limits.

Any face draws them: the workbook as native charts, the page as drawings. Numbers are in a set of units for the eye;
indices and limits are in the upstream form, whatever form the list is in, as margins count in it.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from typing import Any

import numpy as np

from lowpoint.survey.items import verdict
from lowpoint.survey.model import Item, Survey
from lowpoint.survey.outcome import Line, Picture
from lowpoint.survey.setting import kept_kind, rate_rows, set_groups
from lowpoint.units import dimension

__all__ = ["absolute_label", "index_picture", "pressure_picture"]

PRESSURE, THROAT, VAPOUR, CHOKED = "pressure", "lowest in the throat", "vapour pressure", "outlet pressure at choking"
INDEX = "index of the cases"
LIMIT_LOOKS = {
    "incipient": ("dashed", "triangle"),
    "constant": ("dotted", "diamond"),
    "damage": ("line", "square"),
    "vibration": ("dashed", "cross"),
    "choked": ("line", "plus"),
}
"""Style and marker of the line of each limit: told apart by the two together."""
ASIDE = 0.1
"""How far a limit's line reaches to either side of a lone case, as a share of its flow."""

Points = Sequence[tuple[float, float]]


def absolute_label(system: str) -> str:
    """The unit of absolute pressures of a set, as it is written to the user."""
    return "bar a" if system == "metric" else "psia"


# --- pressure ---------------------------------------------------------------------------------------------------


def pressure_picture(survey: Survey, place: int, system: str = "metric") -> Picture:
    """Pressure from inlet to outlet in the case at ``place`` of the survey, with the vapour pressure as its own line.

    A valve and a single plate have three points (inlet, throat, outlet), a set one more pair a plate. The throat is
    the estimate of the findings, not below FF pv: it is no evidence of no cavitation. The dotted line is the outlet
    pressure at which the case chokes (of a set: behind the plate that decides). A line without a number is left out.
    """
    cases, findings = survey.cases, survey.findings
    unit = dimension("pressure").unit(system)
    steps = _plate_steps(survey, place) if cases.kind[place] == "plates" else None
    names, pressures = steps or _valve_steps(survey, place)
    last = float(len(names) - 1)
    at = max(int(findings.plate[place]) - 1, 0)
    inlet, throat = (pressures[2 * at], 2.0 * at + 1.0) if steps else (pressures[0], 1.0)
    choked = inlet - float(findings.choked_drop[place])
    pv = float(cases.pv[place])
    lines = [
        _line(PRESSURE, ((float(x), unit.from_si(p)) for x, p in enumerate(pressures)), marker="circle"),
        _line(VAPOUR, ((x, unit.from_si(pv)) for x in (0.0, last)), "dashed"),
        _line(CHOKED, ((x, unit.from_si(choked)) for x in (throat - 1.0, throat + 1.0)), "dotted"),
    ]
    return Picture(
        title=f"Pressure through {_case_name(survey, place)}", x_title="",
        y_title=f"Pressure, {absolute_label(system)}",
        lines=tuple(line for line in lines if line.x), x_ticks=tuple(enumerate(names)),
        alternative=_pressure_words(survey, place, names, [unit.from_si(p) for p in pressures], unit.from_si(pv),
                                    absolute_label(system)),
    )  # fmt: skip


def _line(name: str, points: Iterable[tuple[float, float]], style: str = "line", labels: Sequence[str] = (),
          marker: str = "") -> Line:  # fmt: skip
    """A line of the points that have numbers."""
    there = [(x, y) for x, y in points if math.isfinite(x) and math.isfinite(y)]
    return Line(name, tuple(x for x, _ in there), tuple(y for _, y in there), style, tuple(labels), marker)


def _valve_steps(survey: Survey, place: int) -> tuple[list[str], list[float]]:
    cases, findings = survey.cases, survey.findings
    # Without FL there is no throat to show, only its lowest possible pressure.
    throat = np.where(np.isnan(findings.fl), np.nan, findings.throat_pressure)
    values = (cases.p1, throat, cases.p2)
    return ["inlet", "throat", "outlet"], [float(x[place]) for x in values]


def _plate_steps(survey: Survey, place: int) -> tuple[list[str], list[float]] | None:
    """Before, in and after each plate of a set; None where the set could not be rated in this case."""
    found = _rating(survey, place)
    if found is None:
        return None
    rating, column = found
    pressures, fl = rating.pressures[:, column], rating.fl[:, column]
    floor = np.broadcast_to(rating.cases.critical_floor, rating.pressures.shape[1:])[column]
    throats = np.maximum(pressures[:-1] - (pressures[:-1] - pressures[1:]) / (fl * fl), floor)
    names, values = ["inlet"], [float(pressures[0])]
    for number, (throat, after) in enumerate(zip(throats.tolist(), pressures[1:].tolist(), strict=True), 1):
        names += [f"plate {number}", f"after {number}"]
        values += [throat, after]
    p2 = float(survey.cases.p2[place])
    if abs(values[-1] - p2) > 1e-6 * p2:  # something else in the line takes the rest of the drop
        return [*names, "outlet"], [*values, p2]
    names[-1] = "outlet"
    return names, values


def _rating(survey: Survey, place: int) -> tuple[Any, int] | None:
    """The rating that holds a case of a set, with its column."""
    tag = survey.cases.tag[place]
    rows = survey.set_rows.get(tag, ())
    if place in rows:
        return survey.sets[tag], rows.index(place)
    if survey.findings.regime[place] is None:
        return None
    own = survey.cases.take(np.array([place]))  # a tag with two different sets: the survey keeps one of their ratings
    key, _ = next(set_groups(own))
    return rate_rows(own, key, kept_kind(own.keep[0])), 0


def _case_name(survey: Survey, place: int) -> str:
    case = survey.cases.case[place]
    return f"{survey.cases.tag[place]}, {case}" if case else str(survey.cases.tag[place])


def _pressure_words(
    survey: Survey, place: int, names: Sequence[str], pressures: Sequence[float], pv: float, label: str
) -> str:
    said = ", ".join(f"{name} {_shown(p)}" for name, p in zip(names, pressures, strict=True) if math.isfinite(p))
    word = verdict(survey.findings.regime[place], survey.findings.basis[place])
    vapour = f"; the vapour pressure is {_shown(pv)} {label}" if math.isfinite(pv) else ""
    return f"Pressure in {label} of {_case_name(survey, place)}: {said or 'not known'}{vapour}. Verdict: {word}."


def _shown(x: float) -> str:
    return f"{x:.4g}"


# --- index ------------------------------------------------------------------------------------------------------


def index_picture(survey: Survey, item: Item, system: str = "metric") -> Picture:
    """Index of an item's cases against flow, as labelled points, beside every limit at each case's size and pressure.

    Limits are lines over the cases by increasing flow, the choked one included; a lone case's reach to either side
    of it. Upstream form. Cases without an index are left out, limits that are not given too.
    """
    cases, findings = survey.cases, survey.findings
    unit = dimension("flow").unit(system)
    places = [p for p in item.rows if math.isfinite(findings.sigma[p]) and math.isfinite(cases.flow[p])]
    places.sort(key=lambda p: float(cases.flow[p]))
    flows = [unit.from_si(float(cases.flow[p])) for p in places]
    names = [str(cases.case[p] or f"row {cases.row[p]}") for p in places]
    lines = [_line(INDEX, zip(flows, findings.sigma[places].tolist(), strict=True), "points", names, "circle")]
    kept = {str(findings.keep[p]) for p in places}
    for name, values in findings.limits().items():
        style, marker = LIMIT_LOOKS[name]
        words = f"{name} limit, to keep" if name in kept else f"{name} limit"
        points = list(zip(flows, values[places].tolist(), strict=True))
        lines.append(_line(words, _reaching(points), style, marker=marker))
    return Picture(
        title=f"Index of {item.tag} against its limits", x_title=f"Flow, {unit.label}",
        y_title="Index (p1-pv)/(p1-p2)", lines=tuple(line for line in lines if line.x),
        alternative=_index_words(survey, item, places),
    )  # fmt: skip


def _reaching(points: Points) -> Points:
    """Points of a line; a single one is drawn out to both sides, for a line needs a length."""
    if len(points) != 1:
        return points
    ((x, y),) = points
    return [(x * (1.0 - ASIDE), y), (x * (1.0 + ASIDE), y)]


def _index_words(survey: Survey, item: Item, places: Sequence[int]) -> str:
    findings, cases = survey.findings, survey.cases
    said = []
    for place in places:
        name = cases.case[place] or f"row {cases.row[place]}"
        word = verdict(findings.regime[place], findings.basis[place])
        said.append(f"{name}: index {_shown(float(findings.sigma[place]))}, {_kept_words(survey, place)}, {word}")
    return f"Index of {item.tag} by case. {'; '.join(said) or 'No case has an index'}."


def _kept_words(survey: Survey, place: int) -> str:
    limit = float(survey.findings.limit[place])
    return f"{survey.findings.keep[place]} limit {_shown(limit)}" if math.isfinite(limit) else "no limit"
