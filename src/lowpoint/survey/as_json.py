"""A survey for machines: one object a case, plain numbers in the unit set named beside them."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

from lowpoint import __version__
from lowpoint.survey.inputs import given_inputs, tables_as_data
from lowpoint.survey.limiting import LIMITS
from lowpoint.survey.model import Findings, Survey
from lowpoint.survey.outcome import Remedy
from lowpoint.survey.staying import stay_words
from lowpoint.survey.worded import in_system
from lowpoint.units import dimension

__all__ = ["as_json", "unit_labels"]

FINDINGS = (
    ("coefficient", "coefficient"), ("travel", "travel"), ("capacity", "ratio"), ("fl", "ratio"), ("drop", "pressure"),
    ("choked_drop", "pressure"), ("throat_pressure", "pressure"), ("sigma", "ratio"), ("index", "ratio"),
    ("limit", "ratio"), ("margin", "ratio"), ("allowed_drop", "pressure"), ("allowed_outlet", "pressure"),
    ("flash_share", "ratio"), ("outlet_velocity", "velocity"), ("noise", "level"), ("passed", "flow"),
)  # fmt: skip
INPUTS = (("t", "temperature"), ("flow", "flow"), ("p1", "pressure"), ("p2", "pressure"), ("pv", "pressure"),
          ("pc", "pressure"), ("density", "density"), ("viscosity", "viscosity"))  # fmt: skip
"""Numbers of a case with their dimensions."""


def unit_labels(system: str) -> dict[str, str]:
    """The unit of each kind of quantity in a set, by the kind's name."""
    kinds = ("pressure", "temperature", "flow", "size", "density", "viscosity", "coefficient", "travel", "velocity",
             "level")  # fmt: skip
    return {kind: dimension(kind).unit(system).label for kind in kinds}


def as_json(survey: Survey, system: str = "metric") -> dict[str, Any]:
    """The whole survey. Where ``errors`` stand, ``regime`` is null."""
    survey = in_system(survey, system)
    said = {tag: [_remedy(remedy, system) for remedy in found] for tag, found in survey.remedies.items()}
    columns = _columns(survey, system)
    cases = [
        _case(survey, place, system, columns, said.get(survey.cases.tag[place], ()))
        for place in range(survey.cases.count)
    ]
    for place, (case, given) in enumerate(zip(cases, given_inputs(survey.cases, system), strict=True)):
        case["given"] = given
        case["sensitivity"] = _sensitivity(survey, place, system)
    return {
        "list": Path(survey.reading.path).name, "version": __version__, "fingerprint": survey.reading.fingerprint,
        "units": unit_labels(system), "reading": _reading(survey), "cases": cases, "items": _items(survey),
        "tables": tables_as_data(survey.cases.tables, system), "tolerances": _tolerances(survey, system),
        "exit_code": survey.exit_code,
    }  # fmt: skip


def number(x: float) -> float | None:
    """A plain number, None where there is none (JSON has no NaN)."""
    return float(x) if math.isfinite(x) else None


def _columns(survey: Survey, system: str) -> dict[str, list[float | None]]:
    """Every number column in the set's units."""
    found: dict[str, list[float | None]] = {}
    for source, names in ((survey.cases, INPUTS), (survey.findings, FINDINGS)):
        for name, kind in names:
            unit = dimension(kind).unit(system)
            found[name] = [number(x) for x in ((getattr(source, name) - unit.offset) / unit.factor).tolist()]
    return found


def _case(survey: Survey, place: int, system: str, columns: Mapping[str, list[float | None]],
          remedies: Sequence[Any]) -> dict[str, Any]:  # fmt: skip
    cases, findings = survey.cases, survey.findings
    limits = {name: number(float(values[place])) for name, values in findings.limits().items()}
    return {
        "tag": cases.tag[place], "case": cases.case[place], "kind": cases.kind[place], "units": system,
        **{name: columns[name][place] for name, _ in FINDINGS[:9]},
        "form": cases.form[place] or "upstream", "limits": limits, "regime": findings.regime[place],
        "choked": bool(findings.choked[place]), "flashing": bool(findings.flashing[place]),
        "margin": columns["margin"][place], "basis": findings.basis[place],
        "cautions": list(findings.cautions[place]), "remedies": list(remedies), "errors": list(findings.errors[place]),
        "keep": findings.keep[place], "limit": columns["limit"][place],
        "margins": {name: number(float(getattr(findings, f"margin_{name}")[place])) for name in limits},
        "limits_scaled": {name: number(float(getattr(findings, f"{name}_scaled")[place])) for name in LIMITS},
        "limit_bases": _bases(findings, place), "fails": bool(findings.fails[place]),
        "over_capacity": bool(findings.over_capacity[place]), "low_travel": bool(findings.low_travel[place]),
        "high_travel": bool(findings.high_travel[place]), "plate": int(findings.plate[place]) or None,
        **{name: columns[name][place] for name, _ in FINDINGS[11:]},
        "inputs": {name: columns[name][place] for name, _ in INPUTS},
        "sources": {name: words[place] for name, words in cases.source.items()},
        "sheet": cases.sheet[place], "row": int(cases.row[place]),
    }  # fmt: skip


def _remedy(remedy: Remedy, system: str) -> dict[str, Any]:
    figures = {}
    for name, (value, kind) in remedy.figures.items():
        unit = dimension(kind).unit(system)
        figures[name] = {"value": number((value - unit.offset) / unit.factor), "unit": unit.label}
    return {"kind": remedy.kind, "text": remedy.text, "cures": remedy.cures, "margin": number(remedy.margin),
            "figures": figures, "verdicts": list(remedy.verdicts), "cautions": list(remedy.cautions)}  # fmt: skip


def _sensitivity(survey: Survey, place: int, system: str) -> dict[str, Any] | None:
    """How sure the verdict of a case is; None where there is no verdict, or nothing was drawn."""
    found = survey.sensitivity
    if found is None or survey.findings.regime[place] is None:
        return None
    numbers = {name: number(float(getattr(found, name)[place])) for name in ("low", "high", "stays", "swing",
                                                                               "unanswered")}  # fmt: skip
    return {**numbers, "dominant": found.dominant[place], "proven": bool(found.proven[place]),
            "text": stay_words(found, place, survey.findings, system)}  # fmt: skip


def _bases(findings: Findings, place: int) -> dict[str, str | None]:
    found: dict[str, str | None] = {}
    for name in LIMITS:
        given = not math.isnan(float(getattr(findings, name)[place]))
        basis = findings.incipient_basis if name == "incipient" else findings.limits_basis
        found[name] = basis[place] if given else None
    return found | {"choked": findings.fl_basis[place]}


def _tolerances(survey: Survey, system: str) -> dict[str, Any] | None:
    found = survey.sensitivity
    if found is None:
        return None
    stated = {t.field: {"size": t.words(system), "basis": t.basis} for t in found.tolerances}
    return {"draws": found.draws, "seed": found.seed, "inputs": stated}


def _reading(survey: Survey) -> dict[str, Any]:
    reading = survey.reading
    return {
        "format": reading.format, "sheets": list(reading.sheets), "missing": list(reading.missing),
        "columns": [{"sheet": c.sheet, "cell": c.cell, "heading": c.heading, "field": c.field or None,
                     "unit": c.unit or None, "status": c.status} for c in reading.columns],
        "problems": [{"sheet": p.sheet, "cell": p.cell or None, "value": p.value or None, "text": p.text,
                      "remedy": p.remedy, "used": not p.spoils} for p in reading.problems],
        "notes": list(reading.notes), "elevation": reading.elevation,
    }  # fmt: skip


def _items(survey: Survey) -> list[dict[str, Any]]:
    return [{
        "tag": item.tag, "kind": item.kind, "service": item.service or None, "cases": len(item.rows),
        "worst": survey.cases.case[item.worst] if item.worst >= 0 else None, "regime": item.regime,
        "margin": number(item.margin), "basis": item.basis, "fails": item.fails, "unanswered": item.unanswered,
        "why": item.why,
    } for item in survey.items]  # fmt: skip
