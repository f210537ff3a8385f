"""One sheet of a list: its columns as SI numbers and words, row by row, and what is wrong with its cells."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from itertools import groupby
from typing import Any

import numpy as np

from lowpoint.kinds import Quantity
from lowpoint.physics.site import barometric_pressure
from lowpoint.physics.unitnames import meaning, names_reference
from lowpoint.problems import shown
from lowpoint.survey import values
from lowpoint.survey.above import SITE, above_table, of_its_item
from lowpoint.survey.fields import BY_KEY, NOT_JUDGED, ListField
from lowpoint.survey.grids import Grid, cell_name
from lowpoint.survey.headers import LEAST, Heading, Place, are_units, is_carried, nearest, text_of
from lowpoint.survey.listed_columns import listed
from lowpoint.survey.listed_rows import ListRows, listed_rows
from lowpoint.survey.model import Numbers, Problem, ReadColumn
from lowpoint.survey.own_sheet import REMARK, is_remark
from lowpoint.survey.result_columns import is_result
from lowpoint.units import KV

__all__ = ["SheetColumns", "read_sheet"]

GAUGE = "Add a column 'Site elevation [m]' or 'Atmosphere [bar]', a line 'Site elevation [m]' with its number above " \
    "the table, or --elevation METRES; or write bar a where the pressures are absolute."  # fmt: skip
EITHER = frozenset({"p1", "p2", "outlet_pressure"})
"""Pressures that lists give as gauge as often as absolute."""
POSITIVE = Quantity("carried", "mass flow or kinematic viscosity", "ratio", low=0.0)
"""Bounds of what the density carries over to the field's own kind."""
BELOW_NOTHING = "A gauge pressure cannot lie further below nought than the atmosphere of the site."
ABSOLUTE = "{} of {}: read as absolute, as the unit in the heading says neither a nor g"


@dataclass(eq=False)
class SheetColumns:
    """What one sheet gives: arrays by field, one element a row of data; faults as (place, sentence)."""

    sheet: str
    rows: list[int]
    """Row numbers of the sheet."""
    columns: list[ReadColumn]
    numbers: dict[str, Numbers] = field(default_factory=dict)
    words: dict[str, Any] = field(default_factory=dict)
    asked: dict[str, list[int]] = field(default_factory=dict)
    spoiled: list[tuple[int, str]] = field(default_factory=list)
    told: list[tuple[int, str]] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)
    elevation: float | None = None
    letters: dict[str, int] = field(default_factory=dict)
    """Column (from 0) that each field was read from."""
    table: ListRows | None = None
    """The rows as they were read."""


class _Reader:
    """Reads one sheet; a class only to keep the sheet, its rows and its problems together."""

    def __init__(self, grid: Grid, place: Place, problems: list[Problem]) -> None:
        self.grid, self.place, self.problems = grid, place, problems
        self.data = [(number, cells) for number, cells in grid.rows if number >= place.first and number > place.row]
        self.data = [(number, cells) for number, cells in self.data if any(c not in (None, "") for c in cells)]
        self.data = list(self._without_headings())
        self.index = {number: i for i, (number, _) in enumerate(self.data)}
        self.out = SheetColumns(grid.sheet, [number for number, _ in self.data], listed(grid, place))

    # --- telling -------------------------------------------------------------------------------------------------

    def tell(self, cell: str, value: str, text: str, remedy: str, place: int = -1, spoils: bool = True) -> None:
        """Name something; where it spoils a row, that row gets the sentence too."""
        problem = Problem(self.grid.sheet, cell, value, text, remedy, place, spoils)
        self.problems.append(problem)
        if place >= 0:
            (self.out.spoiled if spoils else self.out.told).append((place, problem.sentence()))

    def fault(self, what: ListField, column: int, fault: values.Fault) -> None:
        cell = cell_name(self.out.rows[fault.place], column)
        self.tell(cell, shown(fault.value), fault.text, fault.remedy, fault.place, what.key not in NOT_JUDGED)

    def _without_headings(self) -> Iterator[tuple[int, list[Any]]]:
        """The rows without those that repeat the headings, as at the top of every printed page; they are told."""
        texts = {column: heading.text for column, heading in self.place.headings.items()}
        looked_at = [*texts][:LEAST]
        again = False
        for number, cells in self.data:
            alike = any(column < len(cells) and cells[column] == texts[column] for column in looked_at)
            same = (
                sum(text_of(cells[column]) == texts[column] for column in texts if column < len(cells)) if alike else 0
            )
            again = same >= LEAST or (again and are_units(cells))
            if not again:
                yield number, cells
                continue
            text = "the headings stand here again; the row was left out"
            problem = Problem(self.grid.sheet, f"{number}:{number}", "", text, "Delete the row.", spoils=False)
            self.problems.append(problem)

    # --- columns -------------------------------------------------------------------------------------------------

    def usable(self) -> dict[int, Heading]:
        """The headings whose columns are read, by column; the others are told."""
        seen: dict[str, int] = {}
        found: dict[int, Heading] = {}
        for column, heading in self.place.headings.items():
            cell = cell_name(self.place.row, column)
            if heading.field is None:
                self._unknown(cell, heading)
                continue
            first = seen.setdefault(heading.field.key, column)
            if first != column:
                other = self.place.headings[first]
                where = f"'{other.text}' in {cell_name(self.place.row, first)}"
                self.tell(cell, shown(heading.text), f"{heading.field.heading} has a column already, {where}: neither "
                          "was used", "Keep one of the two.")  # fmt: skip
                found.pop(first, None)
            elif heading.problem:
                self.tell(cell, shown(heading.text), heading.problem, heading.remedy)
            else:
                found[column] = heading
        return found

    def _unknown(self, cell: str, heading: Heading) -> None:
        if heading.left or is_carried(heading.text) or is_result(heading.text):
            return
        near = nearest(heading.text, self.place.catalogue)
        hint = f"Did you mean '{near}'? " if near else ""
        self.tell(cell, shown(heading.text), "the column is not known and was not used",
                  f"{hint}Name it as 'lowpoint starter list' does, or take it out.", spoils=False)  # fmt: skip

    def cells(self, column: int) -> list[Any]:
        return [cells[column] if column < len(cells) else None for _, cells in self.data]

    def nameless(self) -> None:
        """Columns with values below no heading."""
        width = max((len(cells) for _, cells in self.data), default=0)
        for column in range(width):
            if column in self.place.headings:
                continue
            first = next((i for i, c in enumerate(self.cells(column)) if c not in (None, "")), None)
            if first is not None:
                cell = cell_name(self.place.row, column)
                self.tell(cell, "", "the column has values and no heading, and was not used", "Give it a heading.",
                          spoils=False)  # fmt: skip

    # --- what the eye sees and a reader of values does not -------------------------------------------------------

    def hidden(self, used: dict[int, Heading]) -> None:
        rows = sorted(number for number in self.out.rows if number in self.grid.hidden_rows)
        for first, last in _runs(rows):
            cell = f"{first}:{last}"
            text = "the row is hidden" if first == last else "the rows are hidden"
            self.tell(cell, "", f"{text} and judged all the same", "Show or delete what is hidden.", spoils=False)
        for column in used:
            if column + 1 in self.grid.hidden_columns:
                cell = cell_name(self.place.row, column)
                self.tell(cell, shown(used[column].text), "the column is hidden and used all the same",
                          "Show it, or delete it.", spoils=False)  # fmt: skip

    def merged(self, used: dict[int, Heading]) -> None:
        for r1, c1, r2, c2 in self.grid.merged:
            if r2 < self.place.first or not any(c1 <= column + 1 <= c2 for column in used):
                continue
            name = f"{cell_name(r1, c1 - 1)}:{cell_name(r2, c2 - 1)}"
            i = self.index.get(r1)
            value = self.data[i][1][c1 - 1] if i is not None and c1 - 1 < len(self.data[i][1]) else None
            if c1 == c2:
                self._fill_down(r1, r2, c1 - 1, value)
                text = "merged cells; their value was taken for every one of their rows"
            else:
                text = "cells merged over several columns; their value was taken for the first column alone"
            self.tell(name, shown(value), text, "Split them, and write the value into each cell.", spoils=False)

    def _fill_down(self, first: int, last: int, column: int, value: Any) -> None:
        for number in range(first + 1, last + 1):
            i = self.index.get(number)
            if i is not None:
                cells = self.data[i][1]
                cells.extend([None] * (column + 1 - len(cells)))
                cells[column] = value

    def controls(self) -> None:
        """Signs that nobody sees, and that steer whatever shows them, are taken out of every text, and told."""
        for place, (number, cells) in enumerate(self.data):
            for column, cell in enumerate(cells):
                if not isinstance(cell, str) or cell.isprintable():
                    continue
                cells[column] = values.without_controls(cell)
                if len(cells[column]) < len(cell.replace("\r\n", "\n")):
                    self.tell(cell_name(number, column), shown(cell), "the text holds control signs, which were left "
                              "out", "Type it anew.", place, spoils=False)  # fmt: skip

    def unvalued(self, used: dict[int, Heading]) -> None:
        for row, column in sorted(self.grid.unvalued):
            if column - 1 in used and row in self.index:
                what = used[column - 1].field
                assert what is not None
                self.tell(cell_name(row, column - 1), "", f"{what.heading} is a formula without a value",
                          "Open the book in a spreadsheet program and save it there, or recompute it with 'lowpoint "
                          "recalc'.", self.index[row], what.key not in NOT_JUDGED)  # fmt: skip

    def run_together(self) -> None:
        """Rows of a csv that a quotation mark without its partner ran into one value."""
        sign = self.grid.separator
        for place, (number, cells) in enumerate(self.data if sign else ()):
            for column, cell in enumerate(cells):
                if isinstance(cell, str) and "\n" in cell and sign in cell:
                    self.tell(cell_name(number, column), shown(cell), "the value runs on over several lines, and rows "
                              "may be lost in it: a quotation mark has no partner", "Take the mark out, or double it.",
                              place)  # fmt: skip

    # --- values --------------------------------------------------------------------------------------------------

    def read(self, column: int, heading: Heading) -> None:
        what = heading.field
        assert what is not None
        self.out.letters[what.key] = column
        cells = self.cells(column)
        if what.what == "number":
            self._numbers(what, heading, column, cells)
            return
        if what.what == "bores":
            factor = meaning(heading.unit or "m").factor
            found, faults = values.bores(what, cells, factor, self.grid.decimal if self.grid.all_text else ".")
        else:
            found, faults = values.words(what, self._without_remarks(what, cells))
            self._formula_like(what, column, found)
        self.out.words[what.key] = found
        for fault in faults:
            self.fault(what, column, fault)

    def _without_remarks(self, what: ListField, cells: list[Any]) -> list[Any]:
        """A characteristic that only names the table whose formulas stand in the row is none."""
        if not self.place.own or what.key != "characteristic":
            return cells
        names = [is_remark(cell) for cell in cells]
        self.out.told += [(place, REMARK.format(name)) for place, name in enumerate(names) if name]
        return [None if name else cell for name, cell in zip(names, cells, strict=True)]

    def _formula_like(self, what: ListField, column: int, found: Any) -> None:
        for place, text in enumerate(found):
            if isinstance(text, str) and values.is_formula_like(text):
                self.tell(cell_name(self.out.rows[place], column), shown(text),
                          f"{what.heading} looks like a formula; it was read as text, and is written as text",
                          "Begin it with a letter.", place, spoils=False)  # fmt: skip

    def _numbers(self, what: ListField, heading: Heading, column: int, cells: Sequence[Any]) -> None:
        typed = values.numbers(what, cells, self.grid.decimal, self.grid.all_text)
        for fault in typed.faults:
            self.fault(what, column, fault)
        if typed.asked:
            self.out.asked[what.key] = typed.asked
        x = typed.values
        if self.grid.percent and "%" in (heading.unit or ""):
            x = self._shown_percent(what, column, x)
        if self.grid.all_text or x is not typed.values:
            self._typed(column, x)
        if what.quantity is not None and what.quantity.zero_is_blank and what.scope == "item":
            x = np.where(x == 0.0, np.nan, x)
        key, si = self._si(what, heading, x)
        quantity = what.quantity if key == what.key else POSITIVE
        if quantity is not None:
            si = self._bounded(what, quantity, heading, column, x, si)
        self.out.numbers[key] = si

    def _shown_percent(self, what: ListField, column: int, x: Numbers) -> Numbers:
        """Numbers of a column in per cent whose cells show shares as per cent: 0.1 that is shown as 10 %."""
        shown = [(number, column + 1) in self.grid.percent for number in self.out.rows]
        if any(shown):
            where = f"{what.heading} of {self.grid.sheet}"
            self.out.notes.append(f"{where}: cells that are formatted as per cent were read as they are shown")
        return np.where(shown, 100.0 * x, x)

    def _typed(self, column: int, x: Numbers) -> None:
        """Numbers in place of the texts that they were read from, for whoever shows the rows again."""
        for (_, cells), value in zip(self.data, x.tolist(), strict=True):
            if value == value:
                cells[column] = value

    def _si(self, what: ListField, heading: Heading, x: Numbers) -> tuple[str, Numbers]:
        """The field's numbers in SI; a mass flow and a kinematic viscosity keep fields of their own."""
        if not what.reference:
            unit = heading.unit or ""
            factor = meaning(unit).factor if unit.strip("-–—1") not in ("", "ratio") else 1.0
            return what.key, x * factor
        unit_meaning = meaning(heading.unit or "")
        si = values.to_si(x, unit_meaning)
        if what.reference == "Kv":
            return what.key, si * KV
        if unit_meaning.gauge:
            si = si + self.out.numbers["atmosphere"]
        if what.key == "flow" and unit_meaning.dimension == meaning("kg/s").dimension:
            return "mass_flow", si
        if what.key == "viscosity" and unit_meaning.dimension == meaning("m2/s").dimension:
            return "kinematic", si
        return what.key, si

    def _bounded(self, what: ListField, quantity: Quantity, heading: Heading, column: int, x: Numbers, si: Numbers,
                 ) -> Numbers:  # fmt: skip
        bad, clause = values.out_of_bounds(quantity, si)
        if not bad.any():
            return si
        for place in np.flatnonzero(bad).tolist():
            value = shown(float(x[place]), heading.unit or "")
            remedy = BELOW_NOTHING if heading.unit and meaning(heading.unit).gauge else quantity.remedy
            self.tell(cell_name(self.out.rows[place], column), value, f"{what.heading} {clause(place)}", remedy, place,
                      what.key not in NOT_JUDGED)  # fmt: skip
        return np.where(bad, np.nan, si)


def _runs(numbers: Sequence[int]) -> Iterator[tuple[int, int]]:
    """First and last of each run of numbers that follow one another."""
    for _, run in groupby(enumerate(numbers), key=lambda pair: pair[1] - pair[0]):
        members = [number for _, number in run]
        yield members[0], members[-1]


def read_sheet(grid: Grid, place: Place, elevation: float | None, problems: list[Problem]) -> SheetColumns:
    """The columns of one list; problems are added to those of the file."""
    reader = _Reader(grid, place, problems)
    used = reader.usable()
    reader.controls()
    reader.nameless()
    reader.hidden(used)
    reader.merged(used)
    reader.unvalued(used)
    reader.run_together()
    first = [(column, heading) for column, heading in used.items() if _is(heading, "tag", *SITE)]
    for column, heading in first:
        reader.read(column, heading)
    site = _site(reader, elevation)
    used = _with_atmosphere(reader, used)
    for column, heading in used.items():
        if (column, heading) not in first:
            reader.read(column, heading)
    reader.out.table, notes = listed_rows(grid.sheet, place, reader.data, reader.out.letters, site)
    reader.out.notes += notes
    return reader.out


def _is(heading: Heading, *keys: str) -> bool:
    return heading.field is not None and heading.field.key in keys


def _site(reader: _Reader, elevation: float | None) -> dict[str, float]:
    """The atmosphere of every row: its own, that of its elevation, of the line above the table, of the command.

    Gives what holds for all rows, by field, SI.
    """
    out, count = reader.out, len(reader.data)
    above = above_table(reader.grid, reader.place, reader.tell)
    out.elevation = above.get("elevation")
    for key, value in above.items():
        out.notes.append(f"{BY_KEY[key].heading} was read from above the table of {reader.grid.sheet}")
        if key == "elevation":
            elevation = value
    tags = out.words.get("tag", np.full(count, None, object))
    height, given = (of_its_item(out.numbers.get(key, np.full(count, np.nan)), tags) for key in SITE)
    site = above.get("atmosphere", np.nan)
    if elevation is not None and np.isnan(site):
        height = np.where(np.isnan(height) & np.isnan(given), elevation, height)
    out.numbers["elevation"] = height
    found = np.where(np.isnan(height), site, barometric_pressure(height))
    out.numbers["atmosphere"] = np.where(np.isnan(given), found, given)
    return above if elevation is None else {**above, "elevation": elevation}


def _with_atmosphere(reader: _Reader, used: dict[int, Heading]) -> dict[int, Heading]:
    """The headings without those of gauge pressures that no row can make absolute; rows that cannot are told."""
    kept = {}
    plain = [heading.field.heading for heading in used.values() if heading.field is not None
             and heading.field.key in EITHER and not names_reference(heading.unit or "")]  # fmt: skip
    if plain and not reader.place.own:
        reader.out.notes.append(ABSOLUTE.format(", ".join(plain), reader.grid.sheet))
    lacking = np.isnan(reader.out.numbers["atmosphere"])
    for column, heading in used.items():
        what = heading.field
        gauge = (
            what is not None and what.reference == "bar" and bool(heading.unit) and meaning(heading.unit or "").gauge
        )
        if gauge and lacking.any() and what is not None:
            cells = reader.cells(column)
            if lacking.all():
                reader.tell(cell_name(reader.place.row, column), shown(heading.text), f"{what.heading} is a gauge "
                            "pressure, and no atmosphere of the site is given", GAUGE)  # fmt: skip
                continue
            for place in [i for i in np.flatnonzero(lacking).tolist() if cells[i] not in (None, "")]:
                cell = cell_name(reader.out.rows[place], column)
                reader.tell(cell, shown(cells[place]), f"{what.heading} is a gauge pressure, and its row gives no "
                            "atmosphere", GAUGE, place)  # fmt: skip
        kept[column] = heading
    return kept
