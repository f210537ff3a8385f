"""The sheet Long list: readings of one valve, hour by hour, with one array formula a column instead of one a cell.

A call from a cell crosses from the spreadsheet program to Python and back; a call over ranges crosses once for all
its rows.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from openpyxl.utils import get_column_letter
from openpyxl.worksheet.formula import ArrayFormula

from lowpoint.starter.columns import BY_KEY, Column
from lowpoint.starter.frame import FIRST, HEADINGS, Head, put_headings, put_table, spelled
from lowpoint.starter.notes import note, unit_label
from lowpoint.starter.plant import Item, Plant, Readings
from lowpoint.styling import style

__all__ = ["COLUMNS", "LETTERS", "TITLE", "VALVE", "write"]

TITLE = "Long list"
LIMITS = ("incipient", "constant", "damage")
STATES = ("flashing", "choked", "damage", "constant", "incipient", "clear")
_ONCE = "One array formula for the whole column."


def _limit(name: str) -> str:
    scaled = (f"LP_SIGMA_SCALED({{{name}_ref}},{{valve_size}},{{size_ref}},{{p1}}-{{pv}},{{head_ref}},"
              "{size_exponent},{head_exponent},Scale_method)")  # fmt: skip
    return f"=LP_LIMIT_INSTALLED({scaled},{{coefficient}},{{valve_size}},{{pipe_in}},{{pipe_out}})"


COLUMNS: tuple[Column, ...] = (
    Column("hour", "", "Hour", fmt="whole", width=7, note="Hours since the first reading."),
    Column("flow", "", "Flow", "LP_COEFFICIENT.flow", "flow", "flow", 9),
    Column("p1", "", "Inlet pressure p1, absolute", "LP_COEFFICIENT.p1", "pressure", "pressure", 10),
    Column("p2", "", "Outlet pressure p2, absolute", "LP_COEFFICIENT.p2", "pressure", "pressure", 10),
    Column("t", "", "Temperature", "LP_VAPOUR_PRESSURE.t", "temperature", "one", 12),
    Column("pv", "", "Vapour pressure pv", "LP_VAPOUR_PRESSURE", "pressure", "fine", 9.5, _ONCE,
           "=LP_VAPOUR_PRESSURE({fluid},{t})"),
    Column("density", "", "Density", "LP_DENSITY", "density", "density", 9, _ONCE, "=LP_DENSITY({fluid},{t},{p1})"),
    Column("coefficient", "", "Required coefficient", "LP_COEFFICIENT", "coefficient", "coefficient", 10.5, _ONCE,
           "=LP_COEFFICIENT({flow},{p1},{p2},{pv},{pc},{density},{fl},{valve_size},{pipe_in},{pipe_out})"),
    Column("sigma", "", "Index sigma", "LP_SIGMA", "ratio", "index", 9, f"Upstream form. {_ONCE}",
           "=LP_SIGMA({p1},{p2},{pv})"),
    *(Column(name, "", f"{name.capitalize()}, installed", "LP_LIMIT_INSTALLED", "ratio", "index", 9.5,
             f"The limit as tested, carried to this size and to the p1-pv of each row by LP_SIGMA_SCALED. {_ONCE}",
             _limit(name)) for name in LIMITS),
    # Calc compares no word that an add-in gave in an array, not even with itself; joined to an empty text it does.
    Column("regime", "", "State of the flow", "LP_REGIME", "", "verdict", 12,
           f'{_ONCE} The &"" lets Calc count the words.',
           "=LP_REGIME({sigma},{incipient},{constant},{damage},,"
           'LP_SIGMA_CHOKED({p1},{pv},{pc},{fl},{coefficient},{valve_size},{pipe_in},{pipe_out}))&""'),
    Column("margin", "", "Margin to the limit of damage", "LP_MARGIN", "", "percent", 10.5, _ONCE,
           "=LP_MARGIN({sigma},{damage})"),
)  # fmt: skip
LETTERS = {column.key: get_column_letter(place) for place, column in enumerate(COLUMNS, start=1)}
"""The column of the sheet by key."""
VALVE = ("fluid", "pc", "valve_size", "pipe_in", "pipe_out", "fl", "incipient_ref", "constant_ref", "damage_ref",
         "size_ref", "head_ref", "size_exponent", "head_exponent")  # fmt: skip
"""What is the same in every row, by key of the sheet List."""
_BESIDE = len(COLUMNS) + 2


def write(book: Any, plant: Plant, readings: Readings) -> None:
    """Add the sheet to a book whose sheet Site gives the scaling method."""
    item = next(item for item in plant.items if item.tag == readings.tag)
    sheet = book.create_sheet(TITLE)
    last = FIRST + len(readings.rows) - 1
    style.title(sheet, f"{item.tag}: {item.service}, hour by hour", f"{len(readings.rows)} readings (demo data). Each "
                "computed column is one array formula over all rows: a program that calls Lowpoint from its cells then "
                "calls it once a column, not once a cell.")  # fmt: skip
    sheet["A3"] = ("To change one: mark all its cells, edit, end with Ctrl+Shift+Enter. Readings stay complete: Calc "
                   "refuses a range that holds an error as a whole.")  # fmt: skip
    sheet["A3"].font = style.NOTE
    _headings(sheet, plant.system)
    for row, reading in enumerate(readings.rows, start=FIRST):
        for place, column in enumerate(COLUMNS, start=1):
            _look(sheet.cell(row, place), column, plant.system)
            if column.is_input:
                sheet.cell(row, place, getattr(reading, column.key))
    places = _valve(sheet, item, plant.system)
    places |= {key: f"${letter}${FIRST}:${letter}${last}" for key, letter in LETTERS.items()}
    for key, letter in LETTERS.items():
        formula = next(column.formula for column in COLUMNS if column.key == key)
        if formula:
            area = f"{letter}{FIRST}:{letter}{last}"
            sheet[f"{letter}{FIRST}"] = ArrayFormula(area, spelled(formula, places, plant.system))
    _hours(sheet, places, style.FORMATS[plant.system])
    _mark(sheet, last)
    sheet.freeze_panes = f"B{FIRST}"
    sheet.print_area = f"A{HEADINGS}:{LETTERS['margin']}{last}"
    style.print_setup(sheet, rows=f"{HEADINGS}:{HEADINGS}", paper=9 if plant.system == "metric" else 1)


def _label(column: Column, system: str, between: str) -> str:
    unit = unit_label(column.dimension, system)
    return f"{column.heading}{between}{unit}" if unit else column.heading


def _headings(sheet: Any, system: str) -> None:
    put_headings(sheet, HEADINGS, [Head(_label(column, system, "\n"), column.width) for column in COLUMNS])
    sheet.row_dimensions[HEADINGS].height = 52
    for place, column in enumerate(COLUMNS, start=1):
        sheet.cell(HEADINGS, place).comment = note(column, system)


def _look(cell: Any, column: Column, system: str) -> None:
    cell.number_format = style.FORMATS[system][column.fmt]
    cell.font = style.INPUT if column.is_input else style.PLAIN
    if column.is_input:
        cell.fill = style.fill("sand")
    if column.fmt == "verdict":
        cell.alignment = style.INDENTED


def _valve(sheet: Any, item: Item, system: str) -> dict[str, str]:
    """The block beside the list: what is the same in every row. Gives its cells by key."""
    trim = item.trim
    given = {
        "fluid": item.fluid, "pc": spelled("=LP_CRITICAL_PRESSURE({fluid})", {"fluid": _cell("fluid")}, system),
        "valve_size": item.sizes[0], "pipe_in": item.sizes[1], "pipe_out": item.sizes[2], "fl": trim.fl,
        **dict(zip((f"{name}_ref" for name in LIMITS), trim.limits, strict=True)),
        "size_ref": trim.size_ref, "head_ref": trim.head_ref,
        "size_exponent": trim.exponents[0], "head_exponent": trim.exponents[1],
    }  # fmt: skip
    put_headings(sheet, HEADINGS, [Head("The valve", 29), Head("The same in every row", 22)], _BESIDE)
    for row, key in enumerate(VALVE, start=FIRST):
        column = BY_KEY[key]
        words = f"{column.heading}, as tested" if key.removesuffix("_ref") in LIMITS else _label(column, system, ", ")
        label = sheet.cell(row, _BESIDE, words.replace(", if given", ""))
        label.font, label.alignment, label.border = style.PLAIN, style.INDENTED, style.LINE_BELOW
        cell = sheet.cell(row, _BESIDE + 1, given[key])
        cell.border = style.LINE_BELOW
        typed = key != "pc"
        cell.font, cell.number_format = style.INPUT if typed else style.PLAIN, style.FORMATS[system][column.fmt]
        if typed:
            cell.fill = style.fill("sand")
    return {key: _cell(key) for key in VALVE}


def _cell(key: str) -> str:
    return f"${get_column_letter(_BESIDE + 1)}${FIRST + VALVE.index(key)}"


def _hours(sheet: Any, places: Mapping[str, str], formats: Mapping[str, str]) -> None:
    """How many hours the valve spent in each state, counted by ordinary formulas."""
    row = FIRST + len(VALVE) + 1
    letter = get_column_letter(_BESIDE)
    rows = [(state, f"=COUNTIF({places['regime']},{letter}{at})") for at, state in enumerate(STATES, start=row + 1)]
    rows.append(("least margin to damage", f"=MIN({places['margin']})"))
    last = put_table(sheet, row, [Head("State of the flow"), Head("Hours in it", fmt="whole")], rows, formats, _BESIDE)
    sheet.cell(last - 1, _BESIDE + 1).number_format = formats["percent"]
    style.mark_verdicts(sheet, f"{letter}{row + 1}:{letter}{last - 2}", f"{letter}{row + 1}")


def _mark(sheet: Any, last: int) -> None:
    regime, margin = LETTERS["regime"], LETTERS["margin"]
    style.mark_verdicts(sheet, f"{regime}{FIRST}:{regime}{last}", f"{regime}{FIRST}")
    lost = f"AND(ISNUMBER({margin}{FIRST}),{margin}{FIRST}<=0)"
    sheet.conditional_formatting.add(f"{margin}{FIRST}:{margin}{last}", style.rule(lost, ink="bad", bold=True))
    style.mark_errors(sheet, f"{LETTERS['pv']}{FIRST}:{margin}{last}", f"{LETTERS['pv']}{FIRST}")
