"""The book of plates: three lines of restriction orifices of Kestrel Bay, each designed, marched and drawn."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Any

import openpyxl

from lowpoint.starter import plates_sheet
from lowpoint.starter.plates_columns import DESIGN, MOST, OTHER
from lowpoint.starter.plates_data import DUTIES, PLANT
from lowpoint.starter.plates_page import Page, letters_of
from lowpoint.starter.readme_sheet import section
from lowpoint.styling import style
from lowpoint.styling.packing import packed

__all__ = ["plates_bytes", "write_plates"]

_CAUTIONS = (
    "Lowpoint supports a qualified engineer. Vendor test data, site rules, local codes and licensed practice come "
    "first.",
    "Everything in this book is invented: plant, tags, flows, pressures, sizes.",
    "The limits are one published fit (Kuroda, Fukuda and Cho 1978), read in its abstract, for thin plates of one "
    "hole; the form of its index is assumed. Sources differ by tenths of the index: keep a margin, ask for tests.",
    "Net drop and drop between taps are two things: plates are sized on the net drop, gauges show the other.",
    "Plates closer than 6 pipe diameters interact, and their losses do not add up (common practice).",
    "A plate that chokes or flashes is no error and no answer either: the cell says so, and the sheet what practice "
    "does. Dissolved gas, two-phase inlets and long outlet lines in which the liquid boils are outside these methods.",
    "Thickness is that of an elastic plate under an even pressure; local codes for pressure parts rule.",
)
_STATES = (
    ("flashing", "The outlet is at or below the vapour pressure: vapour leaves the plate. No index makes that better."),
    ("choked", "The flow is at its largest; a lower outlet pressure gives no more flow, only more collapse."),
    ("cavitating", "At or below the constant limit: steady cavitation. No limit of damage is published for plates."),
    ("incipient", "At or below the index at which cavitation begins, above that of constant cavitation."),
    ("clear", "Above the incipient limit."),
)
_STEPS = (
    "Type the two cases and the plates' data into the blue cells on sand. The design table counts its plates with "
    "LP_STAGES, splits the drop by LP_STAGE_PRESSURES at equal index, and sizes each bore.",
    "Type the bores as drilled into the table of the other case. Empty cells end the set. That table finds the flow "
    "which the set passes, choked or not, and the pressures between the plates.",
    "Compare the margins: at equal index the wider bores have less, since their limits are higher. The design of equal "
    "margin (lowpoint.design) splits the drop so that all have the same; its values are plain, and a cell above them "
    "says whether they still hold. In Python: 'from lowpoint.design import design_set'.",
    "With the Lowpoint add-in the cells compute as you type. Without it they keep the values they have; then run "
    "'lowpoint recalc BOOK', which writes a copy with new values and a report of every cell that has no answer.",
)


def plates_bytes() -> bytes:
    """The book as bytes, the same on every run; its formulas hold no values yet."""
    book = openpyxl.Workbook()
    readme = book.worksheets[0]
    readme.title = "Read me"
    pages = [plates_sheet.write(book, duty) for duty in DUTIES]
    _read_me(readme, pages)
    book.properties.title = f"{PLANT}: restriction orifices in series"
    return packed(book)


def write_plates(out: str | os.PathLike[str]) -> None:
    """Write the book to a path; an existing file is overwritten.

    >>> write_plates("plates.xlsx")  # doctest: +SKIP
    """
    from lowpoint.book.saving import replace_file

    replace_file(Path(out), lambda sink: sink.write(plates_bytes()))


def _read_me(sheet: Any, pages: list[Page]) -> None:
    words = (
        "Where one valve or one plate cannot take the drop: three lines of an invented utility, their plates designed, "
    )
    style.title(sheet, f"{PLANT}: restriction orifices in series", words + "checked at another flow, and drawn.")
    sheet.column_dimensions["A"].width, sheet.column_dimensions["B"].width = 22, 112
    row = section(sheet, 4, "The sheets", [(duty.sheet, f"{duty.tag}, {duty.area}: {duty.title}.") for duty in DUTIES])
    glance, row = row, section(sheet, row, "At a glance", [(page.duty.sheet, _glance(page)) for page in pages])
    for at in range(glance + 1, row - 1):
        sheet.row_dimensions[at].height = 15
    row = section(sheet, row, "Cautions", [("", text) for text in _CAUTIONS])
    row = section(sheet, row, "How it is used", [(f"step {n}", text) for n, text in enumerate(_STEPS, start=1)])
    row = section(sheet, row, "Units", (
        ("in cells", "pressure bar absolute, temperature deg C, flow m³/h, size mm, density kg/m³, stress MPa, "
         "salinity g/kg (LP_ functions)."),
        ("index", "sigma = (p1-pv)/(p1-p2), upstream form, everywhere; the margin is sigma/limit - 1."),
    ))  # fmt: skip
    section(sheet, row, "State of the flow", _STATES)
    sheet.freeze_panes = "A4"
    sheet.print_area = f"A1:B{sheet.max_row}"
    style.print_setup(sheet)
    sheet.page_setup.fitToHeight = 1


def _glance(page: Page) -> str:
    """A formula that says in words how a line does."""

    def cells(columns: Any, key: str, first: int) -> str:
        letter = letters_of(columns)[key]
        return f"'{page.duty.sheet}'!${letter}${first}:${letter}${first + MOST - 1}"

    def at(key: str) -> str:
        return f"'{page.duty.sheet}'!{page.places[key]}"

    design, other = (cells(columns, "margin", first)
                     for columns, first in ((DESIGN, page.design_first), (OTHER, page.other_first)))  # fmt: skip
    words = (
        at("plates"), '" plates in liquid; least margin at equal index "', f'TEXT(MIN({design}),"0.0%")',
        '", other case "', f'TEXT(MIN({other}),"0.0%")', '"; the set passes "', f'TEXT({at("passed")},"0.0")',
        '" of "', f'TEXT({at("flow_other")},"0.0")', '" m³/h wanted there"',
    )  # fmt: skip
    return "=" + "&".join(words)
