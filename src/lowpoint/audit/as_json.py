"""Audits as plain values: the claims in the promised form, the findings of the reading in the same form.

A claim is an object with ``quantity``, ``case``, ``cell``, ``claimed``, ``computed``, ``unit``, ``tolerance``,
``basis``, ``verdict`` and ``suspects``, and nothing else. A finding about the sheet itself (an ambiguous label, a unit
that is not known) is no claim, yet it is a reason for exit code 1: it stands behind the claims as an object with the
same keys, whose ``quantity`` is null, whose verdict is ``unchecked`` and whose ``basis`` is the sentence.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import asdict
from typing import Any

from lowpoint.audit.model import Audit, Claim, Document, Finding, Suspect
from lowpoint.audit.telling import statement

__all__ = ["audit_json", "claims_json", "failure_json", "reading_json"]


def claims_json(claims: Sequence[Claim], findings: Sequence[Finding] = ()) -> list[dict[str, Any]]:
    """The claims of one sheet, then what was found about the sheet itself."""
    return [*map(_claim, claims), *map(_finding, findings)]


def audit_json(audit: Audit, file: str | None = None) -> list[dict[str, Any]]:
    """An entry for each data sheet of a file: ``file``, ``sheet``, ``claims`` and ``error`` (null).

    What is to be said of the file as a whole stands with its first sheet; a file without any has one entry whose
    ``sheet`` is null.
    """
    name = audit.document.path if file is None else file
    entries = list(_entries(audit))
    return [{"file": name, "sheet": sheet, "claims": claims, "error": None} for sheet, claims in entries]


def failure_json(file: str, message: str) -> dict[str, Any]:
    """The entry of a file that could not be read."""
    return {"file": file, "sheet": None, "claims": [], "error": message}


def reading_json(document: Document) -> dict[str, Any]:
    """What was found of a file, before anything is judged: the values with their cells, findings, and notes."""
    found: dict[str, Any] = _finite(asdict(document))
    return found


def _entries(audit: Audit) -> Iterator[tuple[str | None, list[dict[str, Any]]]]:
    document = audit.document
    if not document.sheets:
        yield None, claims_json((), document.findings)
    for place, (sheet, claims) in enumerate(zip(document.sheets, audit.claims, strict=True)):
        whole = document.findings if place == 0 else ()
        yield sheet.name, claims_json(claims, (*whole, *sheet.findings))


def _claim(claim: Claim) -> dict[str, Any]:
    return {
        "quantity": claim.quantity, "case": claim.case or None, "cell": claim.cell,
        "claimed": _number(claim.claimed) if claim.claimed_word is None else claim.claimed_word,
        "computed": _number(claim.computed) if claim.claimed_word is None else claim.computed_word,
        "unit": claim.unit, "tolerance": _number(claim.tolerance), "basis": _basis(claim), "verdict": claim.verdict,
        "suspects": [_suspect(suspect) for suspect in claim.suspects],
    }  # fmt: skip


def _basis(claim: Claim) -> str:
    """The basis; with the sentence where the numbers alone do not say what is the matter."""
    if claim.verdict in ("contradicts", "unchecked") or claim.claimed_word is not None:
        return "; ".join(part for part in (statement(claim), claim.basis) if part)
    return claim.basis


def _suspect(suspect: Suspect) -> dict[str, Any]:
    explains = [{"quantity": quantity, "case": case or None} for quantity, case in suspect.explains]
    return {"mistakes": list(suspect.mistakes), "value": _number(suspect.value), "explains": explains}


def _finding(finding: Finding) -> dict[str, Any]:
    return {
        "quantity": None, "case": None, "cell": finding.cell, "claimed": None, "computed": None, "unit": "",
        "tolerance": None, "basis": f"{finding.text}. {finding.remedy}".rstrip(), "verdict": "unchecked",
        "suspects": [],
    }  # fmt: skip


def _number(x: float) -> float | None:
    return float(x) if math.isfinite(x) else None


def _finite(value: Any) -> Any:
    """The same without NaN, which JSON does not know."""
    if isinstance(value, dict):
        return {key: _finite(inner) for key, inner in value.items()}
    if isinstance(value, list | tuple):
        return [_finite(inner) for inner in value]
    return _number(value) if isinstance(value, float) else value
