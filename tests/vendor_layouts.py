"""Six layouts of vendors' sheets, of our own design: where the lines of a sheet stand on its page.

``ledger``  numbered lines, a column of units, three cases side by side (xlsx);
``twin``    two blocks side by side, one case (xlsx);
``crossed`` cases down, quantities across, units under the headings (xlsx);
``boxes``   every label in a box above its numbers (xlsx);
``letter``  a page of text with dotted leaders (PDF);
``semicolons``  label, number with its unit in the same cell, decimal commas (csv).
Every one has lines that are nobody's number: design pressure, supply of the drive, revision.
"""

from __future__ import annotations

import random
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from vendor_grid import Grid
from vendor_rows import GROUPS, Line, Wording

__all__ = ["LAYOUTS", "Layout"]

Draw = Callable[[Sequence[Line], Sequence[str], Wording, random.Random, str], Grid]


@dataclass(frozen=True)
class Layout:
    """One layout."""

    draw: Draw
    kind: str
    """xlsx, csv or pdf."""
    many: bool
    """Has it room for several cases?"""
    one: bool
    """Is it for one case only?"""
    comma: bool = False

    def file(self, grid: Grid, *, looks: bool = True) -> bytes:
        """The bytes of the sheet."""
        if self.kind == "csv":
            return grid.csv(";")
        if self.kind == "pdf":
            return grid.pdf((50.0, 300.0, 370.0, 440.0), leaders=True)
        return grid.xlsx(looks=looks)


def _labelled(line: Line, *, unit: bool, symbol: bool = True, brackets: str = "()") -> str:
    text = line.label + (f" {line.symbol}" if symbol and line.symbol and len(line.symbol) < 8 else "")
    text = text if len(line.symbol) < 8 else f"{line.label} {line.symbol}"
    return f"{text} {brackets[0]}{line.unit}{brackets[1]}" if unit and line.unit else text


def _of(lines: Sequence[Line], group: str) -> list[Line]:
    return [line for line in lines if line.group == group]


def ledger(lines: Sequence[Line], cases: Sequence[str], wording: Wording, rng: random.Random, title: str) -> Grid:
    """No., designation, symbol, unit, and a column a case; what holds for the item stands across the cases."""
    grid = Grid("Sheet 1", widths={1: 5, 2: 36, 3: 16, 4: 12, 5: 13, 6: 13, 7: 13})
    last = 4 + len(cases)
    grid.put(1, 1, title, "title", across=last)
    grid.put(2, 1, "Rev. 2, for information", "note", across=last)
    row, number = 4, 0
    across = rng.random() < 0.5
    for group, heading in GROUPS.items():
        grid.put(row, 1, "", "band")
        grid.put(row, 2, heading, "band")
        grid.put(row, 3, "Symbol", "head")
        grid.put(row, 4, "Unit", "head")
        for place in range(len(cases)):
            word = wording.case_words[place] if len(cases) > 1 else "Value"
            grid.put(row, 5 + place, word if group in ("process", "results") else "", "head")
        row += 1
        for line in [*_of(lines, group), *_others(group)]:
            number += 1
            grid.put(row, 1, str(number), "unit")
            grid.cells[row, 1].value = number
            grid.put(row, 2, line.label)
            grid.put(row, 3, line.symbol, "unit")
            grid.put(row, 4, line.unit, "unit")
            _values(grid, row, 5, line, cases, across=len(cases) if across else 1)
            row += 1
    return grid


def _others(group: str) -> list[Line]:
    """Lines with numbers that belong to no quantity of an audit."""
    return {
        "head": [Line("", "head", "Quantity", numbers={None: 1.0})],
        "valve": [Line("", "valve", "Design pressure", "", "bar g", {None: 40.0}),
                  Line("", "valve", "Seat leakage class", word="IV")],
        "process": [],
        "results": [Line("", "results", "Drive supply pressure", "", "bar g", {None: 4.5}, 1)],
    }[group]  # fmt: skip


def _values(grid: Grid, row: int, column: int, line: Line, cases: Sequence[str], *, across: int = 1, unit: bool = False,
            quoted: bool = False, as_text: bool = False, comma: bool = False, below: bool = False) -> None:  # fmt: skip
    """The numbers of a line, a cell a case to the right (or below); or its word."""
    if line.word:
        if line.key:
            grid.word(row, column, (line.key, None), line.word, across)
        else:
            grid.put(row, column, line.word, "value", across)
        return
    for case, number in line.numbers.items():
        place = 0 if case is None else list(cases).index(case)
        at = (row + place, column) if below else (row, column + place)
        grid.number(*at, (line.key, case), number, line.decimals, unit=line.unit if unit else "", comma=comma,
                    quoted_unit=quoted, as_text=as_text, across=across if case is None else 1)  # fmt: skip
        if not line.key:
            del grid.places[line.key, case]


def twin(lines: Sequence[Line], cases: Sequence[str], wording: Wording, rng: random.Random, title: str) -> Grid:
    """Left the valve and what was computed, right the duty; the unit stands behind the number or in the label."""
    grid = Grid("Specification", widths={1: 38, 2: 13, 3: 10, 4: 3, 5: 38, 6: 13, 7: 10})
    grid.put(1, 1, title, "title", across=7)
    in_label = rng.random() < 0.5
    brackets = rng.choice(("()", "[]"))
    row = 3
    for left, right in (("head", "valve"), ("process", "results")):
        for column, group in ((1, left), (5, right)):
            grid.put(row, column, GROUPS[group], "band", across=3)
            for place, line in enumerate([*_of(lines, group), *_others(group)], row + 1):
                grid.put(place, column, _labelled(line, unit=in_label, brackets=brackets))
                _values(grid, place, column + 1, line, cases)
                if line.unit and not in_label:
                    grid.put(place, column + 2, line.unit, "note")
        row = max(at for at, _ in grid.cells) + 2
    grid.put(row, 1, "Prepared by: sales office, checked by: works", "note")
    return grid


def crossed(lines: Sequence[Line], cases: Sequence[str], wording: Wording, rng: random.Random, title: str) -> Grid:
    """Item data on top, then one row a case and one column a quantity, units in the row under the headings."""
    items = [line for line in lines if None in line.numbers or line.word]
    across = [line for line in lines if line not in items]
    grid = Grid("Valve", widths={1: 26, **dict.fromkeys(range(2, len(across) + 3), 12.5)}, landscape=True, wraps=True)
    grid.put(1, 1, title, "title", across=6)
    row = 3
    for line in items:
        grid.put(row, 1, _labelled(line, unit=False, symbol=False))
        _values(grid, row, 2, line, cases)
        if line.unit:
            grid.put(row, 3, line.unit, "note")
        row += 1
    row += 1
    with_symbols = rng.random() < 0.5
    grid.put(row, 1, "Operating case", "head")
    for column, line in enumerate(across, 2):
        grid.put(row, column, line.label if not with_symbols else _labelled(line, unit=False), "head")
        grid.put(row + 1, column, line.unit, "head")
        _values(grid, row + 2, column, line, cases, below=True)
    for place in range(len(cases)):
        grid.put(row + 2 + place, 1, wording.case_words[place] if len(cases) > 1 else "Design", "label")
    return grid


def boxes(lines: Sequence[Line], cases: Sequence[str], wording: Wording, rng: random.Random, title: str) -> Grid:
    """Boxes in a row, each with its label on top and its number under it; of cases a strip of boxes each."""
    grid = Grid("Form", widths=dict.fromkeys(range(1, 5), 21), wraps=True)
    grid.put(1, 1, title, "title", across=4)
    row = 3
    wide = 4
    quoted = rng.random() < 0.5
    for group, heading in GROUPS.items():
        several = group in ("process", "results") and len(cases) > 1
        grid.put(row, 1, heading, "band", across=4)
        row += 1
        boxed = _of(lines, group)
        if several:
            grid.put(row, 1, "Case", "head")
            for place in range(len(cases)):
                grid.put(row, 2 + place, wording.case_words[place], "head")
            row += 1
            for line in boxed:
                grid.put(row, 1, _labelled(line, unit=not quoted, brackets="[]"))
                _values(grid, row, 2, line, cases, unit=quoted, quoted=True)
                row += 1
            continue
        for start in range(0, len(boxed), wide):
            for column, line in enumerate(boxed[start : start + wide], 1):
                grid.put(row, column, _labelled(line, unit=not quoted, brackets="[]"), "note")
                _values(grid, row + 1, column, line, cases, unit=quoted, quoted=True)
            row += 2
        row += 1
    return grid


def letter(lines: Sequence[Line], cases: Sequence[str], wording: Wording, rng: random.Random, title: str) -> Grid:
    """Lines of text: label and unit, dots, numbers."""
    grid = Grid("Data sheet")
    grid.put(1, 1, title, "title")
    grid.put(2, 1, "Our reference KB/7-214, sheet 1 of 1", "note")
    row = 4
    for group, heading in GROUPS.items():
        grid.put(row, 1, heading, "band")
        if group in ("process", "results") and len(cases) > 1:
            for place in range(len(cases)):
                grid.put(row, 2 + place, wording.case_words[place], "head")
        row += 1
        for line in [*_of(lines, group), *_others(group)]:
            grid.put(row, 1, _labelled(line, unit=True, brackets="[]" if wording.fine else "()"))
            _values(grid, row, 2, line, cases, comma=wording.comma)
            row += 1
        row += 1
    return grid


def semicolons(lines: Sequence[Line], cases: Sequence[str], wording: Wording, rng: random.Random, title: str) -> Grid:
    """A list of label; number with unit; as some program of the vendor's writes it out."""
    grid = Grid("export")
    grid.put(1, 1, title, "title")
    row = 2
    beside = rng.random() < 0.4
    if len(cases) > 1:
        grid.put(row, 1, "", "head")
        for place in range(len(cases)):
            grid.put(row, (3 if beside else 2) + place, wording.case_words[place], "head")
        row += 1
    for group in GROUPS:
        for line in [*_of(lines, group), *_others(group)]:
            grid.put(row, 1, _labelled(line, unit=False))
            if beside:
                grid.put(row, 2, line.unit, "note")
            _values(grid, row, 3 if beside else 2, line, cases, unit=not beside, as_text=True, comma=wording.comma)
            row += 1
    return grid


LAYOUTS: dict[str, Layout] = {
    "ledger": Layout(ledger, "xlsx", many=True, one=False),
    "twin": Layout(twin, "xlsx", many=False, one=True),
    "crossed": Layout(crossed, "xlsx", many=True, one=False),
    "boxes": Layout(boxes, "xlsx", many=True, one=False),
    "letter": Layout(letter, "pdf", many=True, one=False),
    "semicolons": Layout(semicolons, "csv", many=True, one=False, comma=True),
}
