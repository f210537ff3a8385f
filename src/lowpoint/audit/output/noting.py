"""What each cell of a sheet is noted with: the claims that do not hold, and what is to be looked at."""

from __future__ import annotations

import math
import re
from collections.abc import Iterator

from lowpoint.audit.model import Audit, Claim, Finding
from lowpoint.audit.telling import GROUPS, statement, suspect_lines

__all__ = ["AUTHOR", "CELL", "LONGEST", "notes_of"]

AUTHOR = "Lowpoint"
CELL = re.compile(r"(?P<sheet>.+)!(?P<cell>[A-Z]{1,3}[1-9][0-9]{0,6})")
"""An address in a workbook."""
LONGEST = 2000
"""Characters of a note; the table of findings has the whole."""
NOTED = ("differs", "contradicts")
MOST = 3
"""Suspects that a note names; the table of findings has them all."""


def notes_of(audit: Audit) -> dict[str, str]:
    """The note of every cell concerned, by its address, in the order of the sheets; each begins with its verdict."""
    found: dict[str, list[str]] = {}
    for address, text in _said(audit):
        paragraphs = found.setdefault(address, [])
        if text not in paragraphs:
            paragraphs.append(text)
    return {address: _cut("\n\n".join(paragraphs)) for address, paragraphs in found.items()}


def _said(audit: Audit) -> Iterator[tuple[str, str]]:
    for sheet, claims in zip(audit.document.sheets, audit.claims, strict=True):
        for claim in claims:
            if claim.verdict in NOTED and claim.cell:
                yield claim.cell, _of_claim(claim)
        for finding in sheet.findings:
            yield from ((address, _of_finding(finding)) for address in _cells(finding.cell))


def _cells(text: str) -> Iterator[str]:
    """The addresses that a finding names: one, or a few with commas between (``Sheet1!B4, Sheet1!C9 and 3 more``)."""
    if "!" not in text:
        if text:
            yield text
        return
    for part in text.split(", "):
        found = CELL.match(part)
        if found:
            yield found[0]


def _of_claim(claim: Claim) -> str:
    case = f", {claim.case}" if claim.case else ""
    lines = [f"{GROUPS[claim.verdict]}: {claim.quantity}{case}", statement(claim)]
    if claim.verdict == "differs" and math.isfinite(claim.tolerance):
        lines.append(f"Tolerance {claim.tolerance:.3g} {claim.unit}".rstrip() + f": {claim.basis}")
    told = suspect_lines(claim)
    lines += [f"- {line}" for line in told[:MOST]]
    if len(told) > MOST:
        lines.append(f"- and {len(told) - MOST} more, in the table of findings")
    return "\n".join(lines)


def _of_finding(finding: Finding) -> str:
    return f"To be looked at ({finding.kind})\n{finding.text}. {finding.remedy}".rstrip()


def _cut(text: str) -> str:
    return text if len(text) <= LONGEST else f"{text[: LONGEST - 4]} ..."
