"""The steps of a working on a sheet: a table a section, every number a number."""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import Any

from lowpoint.styling import style
from lowpoint.survey.outcome import Step, Working
from lowpoint.survey.output.cells import put, wide_text

__all__ = ["WIDE", "WIDTHS", "put_heads", "put_steps", "underline"]

WIDE = 12
"""Columns that the tables take."""
WIDTHS = (27.0, 10.0, *(12.5,) * (WIDE - 2))
_HEADS = (("Meaning", 1, 1), ("Symbol", 2, 2), ("Equation", 3, 5), ("With its numbers", 6, 8), ("Value", 9, 9),
          ("Unit", 10, 10), ("Source", 11, 12))  # fmt: skip
_PRINTED = re.compile(r"-?\d{1,15}(\.\d{1,15})?")


def put_steps(sheet: Any, row: int, paper: Working) -> int:
    """The sections of a working from this row on; gives the next free row."""
    for title, steps in paper.sections:
        put(sheet, row, 1, title, look="bold")
        row += 1
        put_heads(sheet, row, _HEADS)
        for step in steps:
            row += 1
            _step(sheet, row, step)
        row += 2
    return row


def put_heads(sheet: Any, row: int, heads: Sequence[tuple[str, int, int]]) -> None:
    """A row of headings, each over columns from the first to the last."""
    for text, first, last in heads:
        style.heading(put(sheet, row, first, text))
        for place in range(first + 1, last + 1):
            style.heading(sheet.cell(row, place))
        if last > first:
            sheet.merge_cells(start_row=row, start_column=first, end_row=row, end_column=last)


def underline(sheet: Any, row: int) -> None:
    """A line below a row of a table."""
    for place in range(1, WIDE + 1):
        sheet.cell(row, place).border = style.LINE_BELOW


def _value(sheet: Any, row: int, column: int, text: str) -> None:
    """A printed value: a number with as many digits, where it is one, so that it can be reckoned with."""
    if not _PRINTED.fullmatch(text):
        wide_text(sheet, row, column, column, text)
        return
    digits = len(text.partition(".")[2])
    put(sheet, row, column, float(text), "0." + "0" * digits if digits else "0")


def _step(sheet: Any, row: int, step: Step) -> None:
    wide_text(sheet, row, 1, 1, step.meaning)
    put(sheet, row, 2, step.symbol)
    wide_text(sheet, row, 3, 5, step.equation)
    wide_text(sheet, row, 6, 8, step.numbers)
    _value(sheet, row, 9, step.value)
    wide_text(sheet, row, 10, 10, step.unit)
    wide_text(sheet, row, 11, 12, "; ".join(x for x in (step.also, step.source, step.note) if x))
    underline(sheet, row)
