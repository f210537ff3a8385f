"""What was read of a sheet, line by line, before anything is judged."""

from __future__ import annotations

from collections.abc import Sequence

from lowpoint.audit.model import Document, Finding, SheetReading, Value

__all__ = ["reading_lines"]

HEADS = ("quantity", "case", "value", "unit", "cell", "label", "label cell", "confidence")
WIDEST = 34


def reading_lines(document: Document) -> list[str]:
    """The listing of ``--show``: every quantity with its case, value, unit, cells and confidence, then the findings.

    One table a sheet; whatever was not read, or is doubtful, follows below it.
    """
    lines = [f"{document.path}: {len(document.sheets)} sheet{'' if len(document.sheets) == 1 else 's'} with quantities"]
    for sheet in document.sheets:
        lines += ["", *_sheet(sheet)]
    lines += _told("Of the file:", (*document.findings, *document.notes))
    return lines


def _sheet(sheet: SheetReading) -> list[str]:
    cases = ", ".join(name for name in sheet.cases if name)
    head = f"{sheet.name}: tag {sheet.tag or 'not given'}; " + (f"cases {cases}" if cases else "one column")
    ambient = f"gauge pressures count from {sheet.atmosphere / 1e5:.5g} bar ({_source(sheet.atmosphere_from)})"
    rows = [HEADS, *(_row(value) for value in sheet.values)]
    widths = [max(len(row[place]) for row in rows) for place in range(len(HEADS))]
    table = ["  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip() for row in rows]
    return [
        head,
        ambient,
        *table,
        *_told("Findings:", sheet.findings),
        *_told("Not read, or read with care:", sheet.notes),
    ]


def _source(source: str) -> str:
    return {"sheet": "given on the sheet", "elevation": "from the elevation on the sheet",
            "option": "given on the command line",
            "assumed": "assumed: the standard atmosphere"}.get(source, source)  # fmt: skip


def _row(value: Value) -> tuple[str, ...]:
    shown = value.word if value.word is not None and value.word != value.raw else value.raw
    unit = value.unit + (f" ({value.form} form)" if value.form else "")
    return (value.quantity, value.case or "", _cut(shown), unit or "-", value.cell, _cut(value.label), value.label_cell,
            f"{value.confidence:.2f}")  # fmt: skip


def _cut(text: str) -> str:
    text = " ".join(text.split())
    return text if len(text) <= WIDEST else text[: WIDEST - 3] + "..."


def _told(head: str, findings: Sequence[Finding]) -> list[str]:
    return [head, *(f"  {finding.kind}: {finding.sentence()}" for finding in findings)] if findings else []
