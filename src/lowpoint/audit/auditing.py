"""The audit of a whole document: every sheet's claims judged, its suspects named, and the questions that follow."""

from __future__ import annotations

import os
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from lowpoint.audit.asking import asking
from lowpoint.audit.checking import check
from lowpoint.audit.contradicting import contradictions
from lowpoint.audit.explaining import NOT_TRIED
from lowpoint.audit.inputs import inputs_of
from lowpoint.audit.judging_words import check_statements
from lowpoint.audit.model import Audit, Claim, Document, SheetReading, Suspect
from lowpoint.audit.others import check_others
from lowpoint.audit.questions import questions_of
from lowpoint.audit.reading import read_sheet
from lowpoint.audit.suspecting import suspects

if TYPE_CHECKING:
    from lowpoint.audit.layout import Layout

__all__ = ["audit_document", "audit_file", "audit_sheet"]


def audit_file(path: str | os.PathLike[str], *, layout: Layout | None = None, elevation: float | None = None,
               atmosphere: float | None = None) -> Audit:  # fmt: skip
    """A vendor's file read and judged; arguments and errors are those of :func:`~lowpoint.audit.reading.read_sheet`."""
    return audit_document(read_sheet(path, layout=layout, elevation=elevation, atmosphere=atmosphere))


def audit_document(document: Document) -> Audit:
    """Every sheet of a document, judged from its own inputs; one sheet never stops another."""
    claims = tuple(audit_sheet(sheet) for sheet in document.sheets)
    questions = tuple(questions_of(sheet, found) for sheet, found in zip(document.sheets, claims, strict=True))
    return Audit(document, claims, questions)


def audit_sheet(reading: SheetReading) -> tuple[Claim, ...]:
    """The claims of one sheet in the sheet's order of values, contradictions last."""
    if not reading.values:
        return ()
    # A missing or impossible input leaves NaN behind, and its claim unchecked.
    with np.errstate(all="ignore"):
        inputs = inputs_of(reading)
        asked = asking(inputs)
        checked = check(asked)
        named = suspects(checked)
        numeric = [_told(claim, named.get(k)) for k, claim in enumerate(checked.claims)]
        others = map(_untried, (*check_others(asked), *check_statements(asked)))
        return _once((*numeric, *others, *contradictions(inputs)))


def _told(claim: Claim, named: tuple[Suspect, ...] | None) -> Claim:
    """A claim with its suspects, or with the remark that no usual mistake gives its number."""
    if named is None:
        return claim
    if not named:
        return replace(claim, text=f"{claim.text}; none of the usual mistakes, alone or in pairs, gives this number")
    first = named[0]
    tied = f" ({first.equal} more would explain it as well)" if first.equal else ""
    return replace(claim, suspects=named, text=f"{claim.text}; {first.text}{tied}")


def _untried(claim: Claim) -> Claim:
    """A claim that differs and is computed by itself: what is not tried on it must not pass for a search in vain."""
    if claim.verdict != "differs":
        return claim
    return replace(claim, tried=False, basis=f"{claim.basis}; {NOT_TRIED}".removeprefix("; "))


def _once(claims: tuple[Claim, ...]) -> tuple[Claim, ...]:
    """A drop that is not p1 - p2 is told once, as the contradiction that it is."""
    told = {(c.quantity, c.case) for c in claims if c.verdict == "contradicts"}
    return tuple(
        c for c in claims if not (c.quantity == "dp" and c.verdict == "differs" and (c.quantity, c.case) in told)
    )
