"""The limits of a case: as stated, in upstream form, carried to its size and head, and between its reducers."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from lowpoint.physics.indices import to_upstream
from lowpoint.physics.limits import TEST_PRESSURE, inception_estimate, installed_limit, scaled_limit
from lowpoint.survey.fields import BASES
from lowpoint.survey.model import Cases, Numbers, Words, absent

__all__ = ["LIMITS", "Limits", "limits_of", "stated", "weakest"]

LIMITS = ("incipient", "constant", "damage", "vibration")
"""From the mildest to the most severe that scales; choking comes after them and never scales."""


@dataclass(frozen=True, eq=False)
class Limits:
    """Limits of the cases, upstream form, by name; and what the incipient one rests on."""

    scaled: dict[str, Numbers]
    installed: dict[str, Numbers]
    incipient_basis: Words
    basis: Words


def form_of(cases: Cases) -> Any:
    """The form of each row's limits; one word where all are upstream, which spares the comparing."""
    blank = absent(cases.form)
    return "upstream" if blank.all() else np.where(blank, "upstream", cases.form)


def stated(cases: Cases, travel: Any) -> dict[str, Numbers]:
    """The limits as they stand in the list or in the vendor's table at this opening, in upstream form."""
    form = form_of(cases)
    found = {name: to_upstream(getattr(cases, name), form) for name in LIMITS}
    for name, table in cases.tables.items():
        rows = cases.table == name
        for limit in LIMITS:
            if getattr(table, limit) is not None:
                found[limit] = np.where(rows & np.isnan(found[limit]), table.at(limit, travel), found[limit])
    return found


def _xfz(cases: Cases, travel: Any) -> Any:
    found = cases.xfz
    for name, table in cases.tables.items():
        if table.xfz is not None:
            found = np.where((cases.table == name) & np.isnan(found), table.at("xfz", travel), found)
    return found


def limits_of(cases: Cases, coefficient: Any, travel: Any, fl: Any, sizes: tuple[Any, Any, Any]) -> Limits:
    """Every limit of valves: scaled (size and head), then installed (reducers); ``sizes`` with pipes filled in."""
    found = stated(cases, travel)
    basis = np.where(absent(cases.limits_basis), "tested", cases.limits_basis)
    given = ~np.isnan(found["incipient"])
    tested = 1.0 / (_xfz(cases, travel) * (TEST_PRESSURE / cases.p1) ** 0.125)
    estimated = np.where(cases.estimate, 1.0 / inception_estimate(coefficient, fl, cases.fd, cases.p1), np.nan)
    acoustic = np.where(np.isnan(tested), estimated, tested)
    scaled = {name: np.where(np.isnan(limit), np.nan, _scaled(cases, limit, sizes[0])) for name, limit in found.items()}
    # xFz stands at this inlet pressure already; its size effect is in the coefficient.
    scaled["incipient"] = np.where(given, scaled["incipient"], acoustic)
    none = np.array(None, object)
    of_incipient = np.where(given, basis, np.where(np.isnan(acoustic), none, np.where(
        np.isnan(tested), "estimated", basis)))  # fmt: skip
    installed = {name: _installed(limit, coefficient, sizes) for name, limit in scaled.items()}
    return Limits(scaled, installed, of_incipient, basis)


def scale_factors(cases: Cases, size: Any) -> tuple[Any, Any]:
    """Where the size effect and the pressure effect can be reckoned: everything for them is given."""
    by_size = ~(np.isnan(cases.size_ref) | np.isnan(cases.size_exponent) | np.isnan(size))
    by_head = ~(np.isnan(cases.head_ref) | np.isnan(cases.head_exponent))
    return by_size, by_head


def _scaled(cases: Cases, limit: Any, size: Any) -> Any:
    by_size, by_head = scale_factors(cases, size)
    if not (by_size.any() or by_head.any()) or np.isnan(limit).all():
        return limit
    blank = absent(cases.method)
    method = "isa" if blank.all() else np.where(blank, "isa", cases.method)
    return scaled_limit(
        limit, np.where(by_size, size, 1.0), np.where(by_size, cases.size_ref, 1.0),
        np.where(by_head, cases.p1 - cases.pv, 1.0), np.where(by_head, cases.head_ref, 1.0),
        np.where(by_size, cases.size_exponent, 0.0), np.where(by_head, cases.head_exponent, 0.0), method,
    )  # fmt: skip


def _installed(limit: Any, coefficient: Any, sizes: tuple[Any, Any, Any]) -> Any:
    if np.isnan(limit).all():
        return limit
    return np.where(np.isnan(sizes[0]), limit, installed_limit(limit, coefficient, *sizes))


def weakest(*bases: Any) -> Any:
    """The weakest of several bases, row by row; None where none is given."""
    order = {word: rank for rank, word in enumerate((None, *BASES))}
    ranks = np.max([np.array([order[word] for word in column.tolist()], int) for column in bases], axis=0)
    return np.array((None, *BASES), object)[ranks]
