"""The sheets that an audit adds to a copy, told by the line below their titles: a copy that comes back is read without
them."""

from __future__ import annotations

from lowpoint.audit.cells import Page

__all__ = ["ADDED", "FINDINGS", "QUESTIONS", "READ", "WORKING", "is_own"]

ADDED = ("Findings", "Questions", "Working", "Read")
"""Names of the sheets, where they are free."""
FINDINGS = (
    "What the sheet states beside what its own inputs give. A suspect says what would follow, never what was done: "
    "only the vendor can tell. Vendor test data, site rules, local codes and licensed practice come first."
)
QUESTIONS = "To be sent as they stand; each names the cells it is about."
WORKING = (
    "Each step with its equation, its numbers and its source, in the units of the standard; each input with its cell."
)
READ = "Each quantity with the cell of its value and of its label; confidence 1 is sure, below 0.8 worth a look."
_LINE = 2
"""Row below the title."""


def is_own(page: Page) -> bool:
    """Is a sheet one of an earlier audit?"""
    lines = (FINDINGS, QUESTIONS, WORKING, READ)
    return any(cell.row == _LINE and cell.left == 1 and cell.text in lines for cell in page.cells[:6])
