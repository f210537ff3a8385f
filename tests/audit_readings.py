"""Short ways for tests of reading: a few rows written to a workbook and read again."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from audit_sheets import from_rows
from lowpoint.audit.model import SheetReading, Value
from lowpoint.audit.reading import read_sheet

__all__ = ["REST", "kinds", "one", "reading"]

REST: list[list[Any]] = [["Density", 998.2, "kg/m3"], ["Temperature", 25, "°C"], ["FL", 0.85]]
"""What makes any sheet one with quantities."""


def reading(tmp_path: Path, rows: list[list[Any]], formats: dict[tuple[int, int], str] | None = None,
            **site: float) -> SheetReading:  # fmt: skip
    """The one sheet of a workbook with these rows and :data:`REST`."""
    from_rows([*rows, *REST], formats=formats).xlsx(tmp_path / "s.xlsx")
    (sheet,) = read_sheet(tmp_path / "s.xlsx", **site).sheets
    return sheet


def one(sheet: SheetReading, quantity: str) -> Value:
    """The only value of a quantity."""
    (value,) = [v for v in sheet.values if v.quantity == quantity]
    return value


def kinds(sheet: SheetReading) -> list[str]:
    return [finding.kind for finding in sheet.findings]
