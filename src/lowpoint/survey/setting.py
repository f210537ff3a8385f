"""Sets of plates in series: marched plate after plate with choking in force; the plate of least margin decides."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from lowpoint import design
from lowpoint.errors import LowpointError
from lowpoint.survey.model import Cases

__all__ = ["rate_rows", "set_findings", "set_groups"]


def set_groups(cases: Cases) -> Iterator[tuple[tuple[Any, ...], Any]]:
    """Rows with one and the same set of plates in one pipe; those with a viscosity apart from those without."""
    names = ("pipe_in", "bore_length", "holes", "spacing")
    columns = [np.nan_to_num(getattr(cases, name)).tolist() for name in names]
    columns.append(np.isnan(cases.viscosity).tolist())
    keys: dict[tuple[Any, ...], list[int]] = {}
    for place, key in enumerate(zip(cases.bores.tolist(), *columns, strict=True)):
        keys.setdefault(key, []).append(place)
    for key, rows in keys.items():
        yield key[:-1], np.array(rows)


def plates_of(key: tuple[Any, ...]) -> design.PlateSet:
    """The set behind a key; LowpointError where it cannot be."""
    bores, pipe, length, holes, spacing = key
    line = design.Line(pipe=pipe, spacing=spacing or None)
    return design.PlateSet(line, tuple(design.Plate(bore, length or None, holes or 1.0) for bore in bores))


def rate_rows(cases: Cases, key: tuple[Any, ...], kind: str) -> design.Rating:
    """The rating of a set in cases between their two pressures, with nothing else in the line."""
    viscosity: Any = None if np.isnan(cases.viscosity).any() else cases.viscosity  # a group has it, or has it not
    liquid = design.Liquid(density=cases.density, pv=cases.pv, pc=cases.pc, viscosity=viscosity)
    duties = design.Cases(flow=cases.flow, p1=cases.p1, p2=cases.p2, liquid=liquid, held="both",
                          names=tuple(str(i + 1) for i in range(cases.count)))  # fmt: skip
    return design.rate(plates_of(key), duties, design.Criteria(kind=kind))


def kept_kind(word: Any) -> str:
    """The limit of plates that a limit to keep means; plates have three."""
    return word if word in ("constant", "choked") else "incipient"


def set_findings(cases: Cases) -> dict[str, Any]:
    """Columns of ``Findings`` for sets: those of the plate with the least margin, and what the whole set passes."""
    names = ("coefficient", "passed", "capacity", "fl", "drop", "choked_drop", "throat_pressure", "sigma", "incipient",
             "constant", "choked_limit")  # fmt: skip
    columns: dict[str, Any] = {name: np.full(cases.count, np.nan) for name in names}
    columns["plate"] = np.zeros(cases.count, np.int64)
    for word in dict.fromkeys(cases.keep.tolist()):
        members = np.flatnonzero(cases.keep == word)
        part = cases.take(members)
        for key, rows in set_groups(part):
            if key[0] is None or not key[1] > 0.0:
                continue
            try:
                rating = rate_rows(part.take(rows), key, kept_kind(word))
            except LowpointError:
                continue
            for name, values in _worst_plate(part.take(rows), rating).items():
                columns[name][members[rows]] = values
    basis = np.full(cases.count, "published", object)
    thick = (cases.bore_length > 0.0) | (cases.holes > 1.0)
    columns["limits_basis"] = columns["incipient_basis"] = np.where(thick, "estimated", basis)
    columns["fl_basis"] = np.full(cases.count, "estimated", object)
    columns |= {f"{name}_scaled": columns[name] for name in ("incipient", "constant")}
    return columns


def _worst_plate(cases: Cases, rating: design.Rating) -> dict[str, Any]:
    # A choked plate decides before any other, whose margin may be less.
    worst = np.argmin(rating.margin - 1e6 * rating.choked, axis=0)
    at = (worst, np.arange(cases.count))
    inlet, net, fl = rating.pressures[:-1][at], rating.net_drop[at], rating.fl[at]
    head = inlet - rating.cases.critical_floor
    total = np.minimum(cases.p1 - cases.p2, _whole_choked(cases, rating))
    choking = rating.choked_limit[at]
    # A choked plate is at its limit, on whichever side of it the last bit fell.
    sigma = np.where(rating.choked[at], np.minimum(rating.sigma[at], choking), rating.sigma[at])
    return {
        "plate": worst + 1, "passed": rating.passed, "capacity": cases.flow / rating.passed, "fl": fl,
        "coefficient": cases.flow * np.sqrt(cases.density / total),
        "drop": net, "choked_drop": fl * fl * head, "throat_pressure": np.maximum(
            inlet - net / (fl * fl), rating.cases.critical_floor),
        "sigma": sigma, "choked_limit": choking, "incipient": rating.incipient[at], "constant": rating.constant[at],
    }  # fmt: skip


def _whole_choked(cases: Cases, rating: design.Rating) -> Any:
    """Drop of the whole set at which it chokes: that of the flow it then passes, free through the same losses."""
    area = 0.25 * np.pi * rating.plates.pipe**2
    dynamic = 0.5 * cases.density * (rating.passed / area) ** 2
    return np.where(rating.choked.any(axis=0), rating.k.sum(axis=0) * dynamic, np.inf)
