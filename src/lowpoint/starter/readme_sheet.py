"""The sheet Read me: what the book is, its units and words, cautions, how to make it one's own and recompute it."""

from __future__ import annotations

from typing import Any

from lowpoint.starter.plant import Plant
from lowpoint.styling import style
from lowpoint.units import DIMENSIONS

__all__ = ["section", "write"]

_STATES = (
    ("flashing", "The outlet is at or below the vapour pressure: vapour leaves the valve. No index makes that better."),
    ("choked", "The flow is at its largest; a lower outlet pressure gives no more flow, only more collapse."),
    ("vibration", "At or below a limit of vibration, where one is given (this book gives none)."),
    ("damage", "At or below the index at which damage begins."),
    ("constant", "At or below the index of steady cavitation, above that of damage."),
    ("cavitating", "At or below a limit, with no worse limit given: how badly is unknown."),
    ("incipient", "At or below the index at which cavitation begins, above that of constant cavitation."),
    ("unjudged", "Above every limit given, but no incipient limit is given: not a clean bill."),
    ("clear", "Above the incipient limit."),
)
_BASES = (
    ("tested", "The vendor or the user tested this valve, or one of its kind, and states the value."),
    ("published", "A cited table or standard gives the value for valves of this style."),
    ("estimated", "A formula gives it (here the inception estimate of IEC 60534-8-4). A screening value."),
)
_CAUTIONS = (
    "Lowpoint supports a qualified engineer. Vendor test data, site rules, local codes and licensed practice come "
    "first.",
    "Everything in this book is invented: plant, tags, flows, FL, limits and exponents are demo values of no vendor.",
    "A throat pressure above the vapour pressure is never evidence of no cavitation: only the limits judge.",
    "Pressures are those at the valve, absolute once computed. The readings say in each row whether they are gauge.",
    "FL and the limits change with the opening: use the vendor's values at the opening of each case.",
    "Dissolved gas, two-phase inlets and long outlet lines in which the liquid boils are outside these methods.",
)
_STEPS = (
    "Sheet Site: your areas and their elevations. Sheet List: overwrite the blue cells on sand; delete rows that you "
    "do not need; copy a whole row for a new case, or three for a new item, and paste them below the last.",
    "Sheet Items: type each new tag once and copy the formulas of a row down. Summary and Chart count by themselves.",
    "Each row is complete and its formulas read only their own row and the sheets Site and Valves, so the list may be "
    "sorted and filtered.",
    "With the Lowpoint add-in the cells compute as you type. Without it they keep the values they have; then run "
    "'lowpoint recalc BOOK', which writes a copy with new values and a report of every cell that has no answer.",
    "Limits that another party stated in another form: LP_SIGMA_FORM carries them over. An index at or below 1 in the "
    "limits of a row is refused.",
)


def write(book: Any, plant: Plant) -> None:
    """Add the sheet as the first of the book."""
    sheet = book.create_sheet("Read me", 0)
    style.title(sheet, f"{plant.name}: cavitation of control valves in liquid service", f"A valve list that computes "
                f"itself: {len(plant.items)} items of an invented utility, each with its operating cases.")  # fmt: skip
    sheet.column_dimensions["A"].width, sheet.column_dimensions["B"].width = 18, 112
    long_list = (
        (("Long list", "Hourly readings of one valve: one array formula a column, the quick form for long lists."),)
        if plant.readings
        else ()
    )
    row = section(sheet, 4, "The sheets", (
        ("Summary", "Counts by state of the flow and by area, the worst ten items, every case without an answer."),
        ("Items", "One row an item, judged by the worst of its cases. This is the sheet to issue."),
        ("List", "One row an item and case: inputs, then every intermediate value. Notes on the headings tell more."),
        ("Chart", "Index against limits of the worst cases."),
        *long_list,
        ("Valves", "Vendors' tables of coefficient, FL and incipient index over the opening."),
        ("Site", "Elevation and barometric pressure of the areas; gauge readings made absolute."),
        ("Words", "What cells are chosen from."),
    ))  # fmt: skip
    row = section(sheet, row, "Cautions", [("", text) for text in _CAUTIONS])
    row = section(sheet, row, "Make it yours", [(f"step {n}", text) for n, text in enumerate(_STEPS, start=1)])
    row = section(sheet, row, "Units", _units(plant.system))
    row = section(sheet, row, "State of the flow", _STATES)
    row = section(sheet, row, "Basis of a value", _BASES)
    section(sheet, row, "Mistakes in it", (
        ("planted", "Rows whose remark begins with 'planted' carry mistakes that people make. Their cells show true "
         "errors (#N/A, #NUM!, #VALUE!), and the column Why says what is wrong and what to do."),
    ))  # fmt: skip
    sheet.print_area = f"A1:B{sheet.max_row}"
    style.print_setup(sheet, paper=9 if plant.system == "metric" else 1)


def _units(system: str) -> list[tuple[str, str]]:
    shown = ("pressure", "temperature", "flow", "size", "density", "coefficient", "velocity", "elevation", "salinity")
    labels = ", ".join(f"{name} {DIMENSIONS[name].unit(system).label}" for name in shown)
    prefix = "LP_ functions" if system == "metric" else "LPU_ functions, and LP_ where units cancel"
    return [
        ("in cells", f"{labels} ({prefix})."),
        ("index", "sigma = (p1-pv)/(p1-p2), upstream form, everywhere; the margin is sigma/limit - 1."),
    ]


def section(sheet: Any, row: int, title: str, lines: Any) -> int:
    """A title with lines of a word and a text below it; gives the row for the next title."""
    sheet.cell(row, 1, title).font = style.BAND
    for column in (1, 2):
        sheet.cell(row, column).fill = style.fill("mist")
    for word, text in lines:
        row += 1
        sheet.cell(row, 1, word or None).font = style.font("deep", 9, bold=True)
        cell = sheet.cell(row, 2, text)
        cell.font, cell.alignment = style.PLAIN, style.WRAP
        sheet.cell(row, 1).alignment = style.TOP
        sheet.row_dimensions[row].height = 13 * (1 + len(text) // 126) + 2
        if title == "State of the flow":
            style.mark_verdicts(sheet, f"A{row}", f"A{row}")
    return row + 2
