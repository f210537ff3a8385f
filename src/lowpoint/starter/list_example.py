"""The example of the blank list: items of Kestrel Bay as plain rows. All of it is invented demo data."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from lowpoint.starter import sample
from lowpoint.starter.list_sheet import inputs_of
from lowpoint.starter.plant import Item

__all__ = ["TABLE", "example_rows", "table_rows"]

TABLE = "Return_200"
SHOWN = {False: ("21-FCV-110", "21-PCV-118", "25-PCV-522"), True: ("31-FCV-801", "32-FCV-821", "32-FCV-824")}
"""Items that are shown, metric and US."""
_SAME = ("tag", "case", "service", "fluid", "salinity", "t", "flow", "style", "direction", "valve_size", "pipe_in",
         "pipe_out", "rated", "characteristic", "rangeability", "fl", "fl_basis", "fd", "limits_basis", "keep",
         "size_exponent", "head_exponent")  # fmt: skip
_OF_ITEM = ("service", "fluid", "salinity", "style", "direction", "valve_size", "pipe_in", "pipe_out", "rated",
            "characteristic", "rangeability", "fl_basis", "fd", "limits_basis", "keep", "elevation", "incipient",
            "constant", "damage", "size_ref", "head_ref", "size_exponent", "head_exponent", "kind")  # fmt: skip


def example_rows(*, us: bool = False) -> list[dict[str, Any]]:
    """The rows of the sheet Example by field, in the units of the form's headings."""
    items = {item.tag: item for item in sample(us=us).items}
    system = "us" if us else "metric"
    rows = [row for tag in SHOWN[us] for row in _rows(items[tag], system)]
    return rows + (_US_PLATES if us else _METRIC)


def _rows(item: Item, system: str) -> Iterator[dict[str, Any]]:
    for number, case in enumerate(item.cases):
        cells = inputs_of(item, case, system)
        row = {key: cells[key] for key in _SAME}
        row |= {"kind": "valve", "p1": cells["p1_given"], "p2": cells["p2_given"], "elevation": item.area.elevation}
        if item.estimate:
            row |= {"incipient": "estimate", "size_exponent": None, "head_exponent": None}
        else:
            row |= {name: cells[f"{name}_ref"] for name in ("incipient", "constant", "damage")}
            row |= {name: cells[name] for name in ("size_ref", "head_ref")}
        yield {key: value for key, value in row.items() if number == 0 or key not in _OF_ITEM}


_METRIC: list[dict[str, Any]] = [
    {"tag": "21-TCV-133", "case": "normal", "kind": "valve", "service": "condenser return temperature",
     "elevation": 4.0, "fluid": "sea water", "salinity": 36.5, "t": 28, "flow": 520, "p1": 2.2, "outlet": "submerged",
     "outlet_rise": 6.0, "outlet_loss": 0.12, "style": "ball, segmented", "valve_size": 200, "pipe_in": 206.5,
     "table": TABLE, "constant": 2.5, "damage": 2.1, "limits_basis": "tested", "size_ref": 100, "head_ref": 5,
     "size_exponent": 0.12, "head_exponent": 0.12, "keep": "damage"},
    {"tag": "21-RO-119", "case": "normal", "kind": "orifice", "service": "pump minimum-flow line", "elevation": 4.0,
     "fluid": "sea water", "salinity": 36.5, "t": 21, "flow": 480, "p1": 3.9, "p2": 2.0, "pipe_in": 206.5,
     "bore": 121.0, "keep": "constant"},
    {"tag": "22-RO-210", "case": "normal", "kind": "plates", "service": "brine let-down to outfall", "elevation": 9.0,
     "fluid": "brine", "salinity": 66.0, "t": 22, "flow": 85, "p1": 57, "p2": 4.2, "pipe_in": 107.1,
     "bores": "30; 34; 38; 42; 46", "keep": "constant"},
]  # fmt: skip
_US_PLATES: list[dict[str, Any]] = [
    {"tag": "31-RO-809", "case": "normal", "kind": "orifice", "service": "pump minimum-flow line", "elevation": 20.0,
     "fluid": "sea water", "salinity": 36.5, "t": 70, "flow": 1150, "p1": 57, "p2": 30, "pipe_in": 7.981,
     "bore": 4.0, "keep": "constant"},
]  # fmt: skip


def table_rows() -> list[tuple[Any, ...]]:
    """The example of a vendor's table: table, travel, coefficient, FL, no xFz, incipient index."""
    table = next(table for table in sample().tables if table.name == TABLE)
    return [(TABLE, travel, coefficient, fl, None, incipient) for travel, coefficient, fl, incipient in table.rows]
