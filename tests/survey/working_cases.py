"""Lists whose workings go through every branch: rows of valves, plates and sets, and a vendor's table."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

import openpyxl

from survey_lists import GOOD, HEADINGS, write_xlsx

__all__ = ["OTHER_HEADINGS", "PLATES", "VALVES", "list_of", "write_table"]

_VALVE: dict[str, Any] = dict(zip(HEADINGS, GOOD, strict=True))
_PLATE: dict[str, Any] = {"Tag": "31-RO-301", "Case": "normal", "Kind": "orifice", "Liquid": "water",
                          "Temperature [deg C]": 60, "Flow [m3/h]": 60, "p1 [bar a]": 9, "p2 [bar a]": 4,
                          "D1 [mm]": 102.3}  # fmt: skip
_TESTED = {"Test size [mm]": 50, "Test head [bar]": 4, "Size exponent": 0.2, "Pressure exponent": 0.15}
_REDUCED = {"D1 [mm]": 102.3, "D2 [mm]": 154.1}
_RATED = {"Kvs": 80, "Characteristic": "equal percentage", "Rangeability": 50}
_OIL = {"Liquid": None, "Temperature [deg C]": None, "pv [bar a]": 0.001, "pc [bar a]": 20, "Density [kg/m3]": 900,
        "Fd": 0.46}  # fmt: skip

VALVES: dict[str, dict[str, Any]] = {
    "line size": {},
    "no size": {"Valve size [mm]": None},
    "a little above line size": {"D1 [mm]": 77.9, "D2 [mm]": 77.9},
    "reducers": _REDUCED | _RATED,
    "reducers and scaled": _REDUCED | _TESTED | {"Constant": 1.7, "Vibration": 1.3},
    "size only": {"Test size [mm]": 50, "Size exponent": 0.2},
    "head only, upstream": {"Test head [bar]": 4, "Pressure exponent": 0.15, "Scale method": "upstream"},
    "tullis": _TESTED | {"Scale method": "tullis"},
    "downstream": _REDUCED | {"Form": "downstream", "Incipient": 1.1, "Damage": 0.42},
    "xf": {"Form": "xf", "Incipient": 0.45, "Damage": 0.7},
    "choked": _REDUCED | {"p2 [bar a]": 0.6},
    "flashing": _REDUCED | {"Temperature [deg C]": 150, "p2 [bar a]": 4.0},
    "flashing and choked": {"Temperature [deg C]": 150, "p2 [bar a]": 2.0},
    "saturated inlet": {"Temperature [deg C]": 150, "p1 [bar a]": 4.7617, "p2 [bar a]": 3.0},
    "xfz": _REDUCED | {"Incipient": None, "xFz": 0.42},
    "estimate": _REDUCED | {"Incipient": "estimate", "Fd": 0.46},
    "typical": {"FL": "typical", "Style": "globe single port, contoured plug", "Flow direction": "open"},
    "linear": _RATED | {"Characteristic": "linear"},
    "linear without rangeability": _RATED | {"Characteristic": "linear", "Rangeability": None},
    "too small": _RATED | {"Kvs": 20},
    "keep": {"Limit to keep": "damage"},
    "keep what is not given": {"Limit to keep": "vibration"},
    "unjudged": {"Incipient": None, "Damage": None},
    "viscous": _OIL | {"Viscosity [mPa.s]": 900, "Trim": "reduced"},
    "viscous, full trim": _OIL | {"Viscosity [mPa.s]": 300, "Trim": "full"} | _REDUCED,
    "laminar": _OIL | {"Viscosity [mPa.s]": 90000, "Trim": "reduced", "Flow [m3/h]": 2},
    "viscous but turbulent": _OIL | {"Viscosity [mPa.s]": 1, "Trim": "reduced"},
    "noise": _REDUCED | {"Fd": 0.46, "Pipe wall [mm]": 5.5},
    "falling leg": {"p2 [bar a]": None, "Outlet into": "falling leg", "Rise to the place [m]": -4,
                    "Site elevation [m]": 300},
    "leg that parts": {"p2 [bar a]": None, "Outlet into": "falling leg", "Rise to the place [m]": -40,
                       "Atmosphere [bar a]": 1.0},
    "submerged": {"p2 [bar a]": None, "Outlet into": "submerged", "Rise to the place [m]": 6,
                  "Friction to the place [bar]": 0.3, "Pressure there [bar g]": 0.5, "Site elevation [m]": 1200},
    "free jet": {"p2 [bar a]": None, "Outlet into": "free jet", "Atmosphere [bar a]": 0.98},
    "by table": {"Table": "T", "FL": None, "Incipient": None},
    "by table, choked": {"Table": "T", "FL": None, "Incipient": None, "p2 [bar a]": 0.3, "Flow [m3/h]": 400} | _REDUCED,
    "by table, too small": {"Table": "T", "FL": None, "Incipient": None, "Flow [m3/h]": 4000, "Valve size [mm]": 300},
    "by table, less open than it begins": {"Table": "T", "FL": None, "Incipient": None, "Flow [m3/h]": 2},
    "table with FL given": {"Table": "T", "Incipient": None},
    "table of xfz": {"Table": "X", "Incipient": None},
}  # fmt: skip
"""What differs from the good row of the lists for tests."""

OTHER_HEADINGS: dict[str, dict[str, Any]] = {
    "mass flow and kinematic viscosity": _OIL | {"Mass flow [t/h]": 46, "Kinematic viscosity [cSt]": 700,
                                                 "Trim": "reduced"},
    "US units": {"Mass flow [lb/h]": 101000, "p1 [psi g]": 70, "p2 [psi g]": 46, "Site elevation [ft]": 900,
                 "Size [in]": 3, "D1 [in]": 4.026, "D2 [in]": 4.026, "Rated Cv": 110, "Characteristic": "linear"},
}  # fmt: skip
"""Columns in place of those of the good row; a list each."""
_REPLACED = {"Mass flow": "Flow [m3/h]", "p1": "p1 [bar a]", "p2": "p2 [bar a]", "Size": "Valve size [mm]"}

PLATES: dict[str, dict[str, Any]] = {
    "thin": {"Bore [mm]": 42},
    "viscous": {"Bore [mm]": 42, "Viscosity [mPa.s]": 12},
    "slow": {"Bore [mm]": 42, "Viscosity [mPa.s]": 800},
    "thick and choked": {"Bore [mm]": 42, "Bore length [mm]": 40, "p2 [bar a]": 0.9},
    "very long": {"Bore [mm]": 42, "Bore length [mm]": 4000},
    "many holes": {"Bore [mm]": 9, "Holes": 12},
    "small pipe": {"Bore [mm]": 20, "D1 [mm]": 52.5},
    "between the ranges": {"Bore [mm]": 79, "p2 [bar a]": 8.5},
    "smaller than ISO": {"Bore [mm]": 8.9},
    "outside": {"Bore [mm]": 4},
    "large pipe": {"Bore [mm]": 150, "D1 [mm]": 300, "Form": "downstream"},
    "own limits": {"Bore [mm]": 42, "Incipient": 3.1, "Damage": 2.0, "Form": "upstream", "Vibration": 1.6},
    "flashing": {"Bore [mm]": 42, "Temperature [deg C]": 150, "p2 [bar a]": 3},
    "set": {"Kind": "plates", "Bores [mm]": "38; 44; 50"},
    "set, choked": {"Kind": "plates", "Bores [mm]": "38; 44; 60", "p1 [bar a]": 19, "p2 [bar a]": 0.8},
    "set, viscous": {"Kind": "plates", "Bores [mm]": "38; 44", "Viscosity [mPa.s]": 5, "Limit to keep": "constant"},
    "set, thick": {"Kind": "plates", "Bores [mm]": "38; 44", "Bore length [mm]": 25, "Limit to keep": "choked",
                   "Form": "xf"},
    "set, flashing": {"Kind": "plates", "Bores [mm]": "38; 44; 60", "Temperature [deg C]": 120, "p2 [bar a]": 1.2},
    "set of holes": {"Kind": "plates", "Bores [mm]": "9; 11", "Holes": 12},
}  # fmt: skip

TABLES: tuple[tuple[Any, ...], ...] = (
    ("Table", "Travel [%]", "Kv", "FL", "Incipient"),
    ("T", 10, 18, 0.93, 2.2), ("T", 50, 350, 0.85, 2.7), ("T", 100, 1750, 0.6, 4.2),
)  # fmt: skip
XFZ_TABLE: tuple[tuple[Any, ...], ...] = (
    ("Table", "Travel [%]", "Kv", "xFz"), ("X", 10, 8, 0.6), ("X", 60, 40, 0.5), ("X", 100, 90, 0.35),
)  # fmt: skip


def list_of(path: Path, of: Mapping[str, Mapping[str, Any]]) -> Path:
    """A list with a row for each entry, its name as the case, each with a tag of its own; tables on sheets behind."""
    base = _PLATE if of is PLATES else _VALVE
    gone = {old for row in of.values() for new, old in _REPLACED.items() for key in row
            if key.startswith(f"{new} [") and key != old}  # fmt: skip
    base = {key: value for key, value in base.items() if key not in gone}
    rows = [base | row | {"Tag": f"{base['Tag']}{number:02d}", "Case": name} for number, (name, row) in
            enumerate(of.items())]  # fmt: skip
    headings = list(dict.fromkeys(key for row in rows for key in row))
    write_xlsx(path, headings, [[row.get(key) for key in headings] for row in rows])
    write_table(path, "Vendor", TABLES)
    write_table(path, "Vendor 2", XFZ_TABLE)
    return path


def write_table(path: Path, title: str, rows: Sequence[Sequence[Any]]) -> None:
    """A vendor's table on a sheet of its own."""
    book = openpyxl.load_workbook(path)
    sheet = book.create_sheet(title)
    for row in rows:
        sheet.append(list(row))
    book.save(path)
