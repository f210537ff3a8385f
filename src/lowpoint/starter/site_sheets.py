"""The sheets that the list reads: Site (elevations, gauge to absolute), Valves (vendors' tables), Words (lists)."""

from __future__ import annotations

from typing import Any

from openpyxl.utils import get_column_letter
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.worksheet.datavalidation import DataValidation

from lowpoint.reference import words_of
from lowpoint.registry import functions
from lowpoint.starter.frame import Head, name_column, put_headings, put_table, spelled, words_of_set
from lowpoint.starter.notes import unit_label
from lowpoint.starter.plant import Plant
from lowpoint.styling import style

__all__ = ["write_site", "write_valves", "write_words"]

_FIRST_AREA = 6
_SPARE_AREAS = 5
"""Rows below the last area, ready for more."""


def write_site(book: Any, plant: Plant) -> None:
    """Areas with elevation and barometric pressure, the scaling method, gauge readings made absolute."""
    sheet = book.create_sheet("Site")
    metric = plant.system == "metric"
    bar, size = unit_label("pressure", plant.system), unit_label("elevation", plant.system)
    formats = style.FORMATS[plant.system]
    style.title(sheet, "Site", "Where the plant stands. The list takes the barometric pressure of its row's area from "
                "here, to make gauge readings absolute.")  # fmt: skip
    sheet["A4"] = "Areas"
    heads = [Head("Area", 24), Head(f"Elevation above sea level\n{size}", 15, "one"),
             Head(f"Atmosphere, absolute\n{bar}", 15, "fine")]  # fmt: skip
    last = _FIRST_AREA + len(plant.areas) - 1
    named = [(area.name, area.elevation) for area in plant.areas] + [(None, None)] * _SPARE_AREAS
    rows = [
        (*area, spelled(f'=IF(ISBLANK(A{row}),"",IF(ISBLANK(B{row}),NA(),LP_ATMOSPHERE(B{row})))', {}, plant.system))
        for row, area in enumerate(named, start=_FIRST_AREA)
    ]
    put_table(sheet, _FIRST_AREA - 1, heads, rows, formats, typed=(0, 1))
    for column, name in ((1, "Site_area"), (3, "Site_atmosphere")):
        name_column(book, name, "Site", column, last + _SPARE_AREAS, _FIRST_AREA)
    book.defined_names["Words_areas"] = DefinedName("Words_areas", attr_text="Site_area")
    row = last + _SPARE_AREAS + 2
    row = _method(book, sheet, row)
    _conversions(sheet, row, plant, metric)
    for place in (4, row - 3):
        sheet.cell(place, 1).font = style.BAND
    sheet.freeze_panes = "A4"
    style.print_setup(sheet, paper=9 if metric else 1)


def _method(book: Any, sheet: Any, row: int) -> int:
    sheet.cell(row, 1, "Method that carries limits to another size and pressure")
    cell = sheet.cell(row, 3, "isa")
    cell.font, cell.fill = style.INPUT, style.fill("sand")
    book.defined_names["Scale_method"] = DefinedName("Scale_method", attr_text=f"Site!$C${row}")
    sheet.cell(
        row + 1, 1, "isa, upstream or tullis: the exponents of the list belong to this method."
    ).font = style.NOTE
    choice = DataValidation(type="list", formula1="Words_methods", showErrorMessage=True,
                            error="The method must be isa, upstream or tullis.")  # fmt: skip
    sheet.add_data_validation(choice)
    choice.add(cell)
    return row + 3


def _conversions(sheet: Any, row: int, plant: Plant, metric: bool) -> None:
    """Readings made absolute at the valve: gauge to absolute, then the column of liquid between gauge and valve."""
    bar, rise, rho = (unit_label(name, plant.system) for name in ("pressure", "elevation", "density"))
    units = words_of_set(plant.system)
    readings: tuple[tuple[float, str, float, float, str], ...] = (
        (4.5, plant.areas[0].name, 0.0, 1025.0, "gauge beside the valve"),
        (6.2, plant.areas[-1].name, 12.0, 610.0, "gauge 12 m below the valve"),
        (2.8, plant.areas[3].name, -8.5, 965.0, "gauge 8.5 m above the valve"),
    )
    if not metric:
        readings = (
            (65.0, plant.areas[0].name, 0.0, 64.0, "gauge beside the valve"),
            (90.0, plant.areas[-1].name, 40.0, 38.0, "gauge 40 ft below the valve"),
        )
    sheet.cell(row, 1, "Readings made absolute at the valve, one by one")
    sheet.cell(row, 1).font = style.BAND
    heads = [Head("Where the gauge is", 30), Head("Area", 22), Head(f"Reading\n{units['gauge']}", 12, "pressure"),
             Head(f"Rise from gauge to valve\n{rise}", 13, "one"), Head(f"Density\n{rho}", 12, "density"),
             Head(f"At the gauge, absolute\n{bar}", 14, "pressure"),
             Head(f"At the valve, absolute\n{bar}", 14, "pressure")]  # fmt: skip
    lines = []
    for place, (reading, area, height, density, where) in enumerate(readings, start=row + 2):
        atmosphere = f"INDEX(Site_atmosphere,MATCH(B{place},Site_area,0))"
        gauge = f'=IF(ISBLANK(C{place}),NA(),LP_UNIT(C{place},"{units["gauge"]}","{units["bar"]}",{atmosphere}))'
        valve = f"=IF(ISBLANK(D{place}),NA(),LP_COLUMN(F{place},D{place},E{place}))"
        lines.append((where, area, reading, height, density,
                      spelled(gauge, {}, plant.system), spelled(valve, {}, plant.system)))  # fmt: skip
    put_table(sheet, row + 1, heads, lines, style.FORMATS[plant.system], typed=(0, 1, 2, 3, 4))
    sheet.row_dimensions[row + 1].height = 40
    sheet.row_dimensions[_FIRST_AREA - 1].height = 40


def write_valves(book: Any, plant: Plant) -> None:
    """The vendors' tables, side by side, each with a name for every column."""
    sheet = book.create_sheet("Valves")
    style.title(sheet, "Valves: vendors' tables", "Coefficient, FL and incipient index over the opening; demo values. "
                "Rows of the list that name a table read it at their own opening.")  # fmt: skip
    kv = unit_label("coefficient", plant.system)
    heads = [Head("Opening\n%", 10, "one"), Head(f"Coefficient\n{kv}", 12, "coefficient"), Head("FL", 8, "factor"),
             Head("Incipient index", 11, "index")]  # fmt: skip
    for number, table in enumerate(plant.tables):
        column = 1 + 5 * number
        sheet.cell(4, column, table.name).font = style.BAND
        put_table(sheet, 5, heads, table.rows, style.FORMATS[plant.system], column, typed=(0, 1, 2, 3))
        for place, what in enumerate(("travel", "coefficient", "fl", "incipient")):
            name_column(book, f"{table.name}_{what}", "Valves", column + place, 5 + len(table.rows))
        sheet.column_dimensions[get_column_letter(column + 4)].width = 3
    sheet.row_dimensions[5].height = 30
    sheet.freeze_panes = "A6"
    style.print_setup(sheet, paper=9 if plant.system == "metric" else 1)


def _lists(plant: Plant) -> dict[str, list[str]]:
    """The words that cells are chosen from, by the name of the list."""

    def known(function: str, argument: str) -> list[str]:
        return words_of(functions[function], next(p for p in functions[function].parameters if p.name == argument))

    used = list(dict.fromkeys(item.fluid for item in plant.items))
    fluids = known("LP_VAPOUR_PRESSURE", "fluid")
    spoken = [name for name in used if name not in ("metanole", "glycol water", *fluids)]
    return {
        "cases": ["start-up", "minimum", "normal", "maximum", "upset"],
        "pressure_units": list(words_of_set(plant.system).values())[::-1],
        "bases": ["tested", "published", "estimated"],
        "limits": ["incipient", "constant", "damage", "choked"],
        "characteristics": known("LP_TRAVEL", "characteristic") + [f"table {table.name}" for table in plant.tables],
        "directions": known("LP_TYPICAL", "direction"),
        "methods": known("LP_SIGMA_SCALED", "method"),
        "styles": known("LP_TYPICAL", "style"),
        "fluids": spoken + fluids,
    }


def write_words(book: Any, plant: Plant) -> None:
    """The lists behind the choices in cells."""
    sheet = book.create_sheet("Words")
    style.title(sheet, "Words", "What the cells of the list are chosen from. Other usual names of liquids are "
                "understood too.")  # fmt: skip
    lists = _lists(plant)
    widths = {"styles": 52, "fluids": 34, "characteristics": 20}
    put_headings(sheet, 4, [Head(name.replace("_", " "), widths.get(name, 15)) for name in lists])
    for column, (name, words) in enumerate(lists.items(), start=1):
        for row, word in enumerate(words, start=5):
            cell = sheet.cell(row, column, word)
            cell.font, cell.number_format = style.PLAIN, "@"
        name_column(book, f"Words_{name}", "Words", column, 4 + len(words), 5)
    sheet.row_dimensions[4].height = 20
    sheet.freeze_panes = "A5"
    style.print_setup(sheet, rows="4:4", paper=9 if plant.system == "metric" else 1)
