"""Writers of data sheets in clearly different layouts, each with what a reader must find: quantity, case, cell, number.

Items are of the made-up island utility of Kestrel Bay; the numbers need not fit together, as only reading is tested.
"""

from __future__ import annotations

import csv
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from openpyxl import Workbook

from lowpoint.book.refs import address

Expected = dict[tuple[str, "str | None"], tuple[str, Any]]
"""(quantity, case): (cell, number or word)."""


@dataclass
class Draft:
    """A sheet as it is written: cells by row and column, merged ranges, and what must be found."""

    title: str = "Data sheet"
    cells: dict[tuple[int, int], Any] = field(default_factory=dict)
    formats: dict[tuple[int, int], str] = field(default_factory=dict)
    merged: list[tuple[int, int, int, int]] = field(default_factory=list)
    truth: dict[tuple[str, str | None, int, int], Any] = field(default_factory=dict)
    units: dict[str, str] = field(default_factory=dict)

    def put(self, row: int, column: int, *values: Any) -> None:
        for step, value in enumerate(values):
            if value is not None:
                self.cells[row, column + step] = value

    def value(self, row: int, column: int, quantity: str, case: str | None, shown: Any, number: Any = None,
              style: str = "") -> None:  # fmt: skip
        """A cell with a value; ``number`` where the cell holds a text around it."""
        self.cells[row, column] = shown
        if style:
            self.formats[row, column] = style
        self.truth[quantity, case, row, column] = shown if number is None else number

    def merge(self, r1: int, c1: int, r2: int, c2: int) -> None:
        self.merged.append((r1, c1, r2, c2))

    # --- the three formats ------------------------------------------------------------------------------------------

    def xlsx(self, path: Path) -> Expected:
        book = Workbook()
        sheet = book.active
        sheet.title = self.title
        for (row, column), value in self.cells.items():
            cell = sheet.cell(row, column, value)
            if (row, column) in self.formats:
                cell.number_format = self.formats[row, column]
        for r1, c1, r2, c2 in self.merged:
            sheet.merge_cells(start_row=r1, start_column=c1, end_row=r2, end_column=c2)
        book.save(path)
        return {(q, case): (f"{self.title}!{address(r, c)}", v) for (q, case, r, c), v in self.truth.items()}

    def csv(self, path: Path, delimiter: str = ",") -> Expected:
        height = max(r for r, _ in self.cells)
        width = max(c for _, c in self.cells)
        with path.open("w", encoding="utf-8", newline="") as target:
            writer = csv.writer(target, delimiter=delimiter)
            for row in range(1, height + 1):
                writer.writerow([self.cells.get((row, column), "") for column in range(1, width + 1)])
        return {(q, case): (f"row {r}, column {c}", v) for (q, case, r, c), v in self.truth.items()}

    def pdf(self, path: Path, places: dict[int, float], right: frozenset[int] = frozenset(), size: float = 9.0,
            font: str = "Helvetica", step: float = 1.5) -> Expected:  # fmt: skip
        """Columns at these places in points; those in ``right`` end there. The cell of a value is its text."""
        from reportlab.lib.pagesizes import A4
        from reportlab.pdfgen.canvas import Canvas

        page = Canvas(str(path), pagesize=A4, invariant=1)
        page.setFont(font, size)
        for (row, column), value in sorted(self.cells.items(), key=lambda entry: entry[0]):
            y = 800.0 - row * size * step
            (page.drawRightString if column in right else page.drawString)(places[column], y, str(value))
        page.save()
        return {(q, case): (str(self.cells[r, c]), v) for (q, case, r, c), v in self.truth.items()}


CASES = ("Minimum", "Normal", "Maximum")
OPERATING: dict[str, tuple[float, float, float]] = {
    "flow": (60.0, 120.5, 180.0), "t": (25.0, 25.0, 27.5), "p1": (7.2, 6.8, 6.1), "p2": (2.2, 2.6, 3.1),
    "dp": (5.0, 4.2, 3.0), "pv": (0.0317, 0.0317, 0.0369), "density": (1023.2, 1023.2, 1022.5),
    "coefficient": (27.1, 59.4, 105.2), "travel": (31.0, 52.0, 77.0), "sigma": (1.61, 1.81, 2.31),
    "dp_choked": (6.6, 6.25, 5.61), "noise": (79.0, 76.0, 71.0), "velocity_out": (2.1, 4.25, 6.37),
    "fl": (0.9, 0.88, 0.85),
}  # fmt: skip
ITEM: dict[str, Any] = {
    "tag": "LV-204", "service": "Brine level of evaporator 2", "fluid": "Sea water", "pc": 221.2, "valve_size": 100.0,
    "pipe_in": 154.1, "pipe_out": 202.7, "rated": 160.0, "xfz": 0.31, "fd": 0.46, "rangeability": 50.0,
    "sigma_incipient": 2.8, "elevation": 35.0,
}  # fmt: skip


def _table(
    draft: Draft,
    top: int,
    left: int,
    labels: dict[str, tuple[str, ...]],
    first: int,
    factor: Callable[[str, float], Any] | None = None,
) -> int:
    """Rows of labels (the cells before the values), one column a case; the next free row."""
    for row, (key, cells) in enumerate(labels.items(), top):
        draft.put(row, left, *cells)
        for step, case in enumerate(CASES):
            number = OPERATING[key][step]
            draft.value(row, first + step, key, case, factor(key, number) if factor else number)
    return top + len(labels)


def numbered_lines() -> Draft:
    """Line numbers, label, symbol, unit, three cases; the valve below in two columns (metric)."""
    draft = Draft("DS-204")
    draft.put(1, 1, "Kestrel Bay Utility"), draft.put(2, 1, "CONTROL VALVE DATA SHEET")
    draft.put(3, 2, "Tag number"), draft.value(3, 5, "tag", None, ITEM["tag"])
    draft.put(4, 2, "Service"), draft.value(4, 5, "service", None, ITEM["service"])
    draft.put(5, 2, "Fluid"), draft.value(5, 5, "fluid", None, ITEM["fluid"])
    draft.put(7, 2, "OPERATING CONDITIONS", "Symbol", "Unit", *CASES)
    labels = {
        "flow": ("Flow rate", "Q", "m³/h"), "t": ("Inlet temperature", "T₁", "°C"),
        "p1": ("Upstream pressure", "P₁", "bar(g)"), "p2": ("Downstream pressure", "P₂", "bar(g)"),
        "dp": ("Pressure differential", "ΔP", "bar"), "pv": ("Vapour pressure", "Pv", "bar(a)"),
        "density": ("Density", "ρ", "kg/m³"), "fl": ("Liquid pressure recovery factor", "F_L", "-"),
        "coefficient": ("Required flow coefficient", "Kv", "m³/h"), "travel": ("Travel", "h", "%"),
        "dp_choked": ("Choked pressure drop", "Δp_choked", "bar"), "sigma": ("Cavitation index", "σ", "-"),
        "noise": ("Sound pressure level", "LpA", "dB(A)"), "velocity_out": ("Outlet velocity", "w2", "m/s"),
    }  # fmt: skip
    end = _table(draft, 8, 2, labels, 5)
    for line, row in enumerate(range(8, end), 1):
        draft.put(row, 1, line)
    draft.put(end, 2, "VALVE")
    rest = {"pc": ("Critical pressure", "Pc", "bar(a)"), "valve_size": ("Nominal size", "DN", "mm"),
            "pipe_in": ("Inlet pipe inside diameter", "D1", "mm"),
            "pipe_out": ("Outlet pipe inside diameter", "D2", "mm"),
            "rated": ("Rated flow coefficient", "Kvs", "m³/h"), "fd": ("Valve style modifier", "Fd", "-"),
            "xfz": ("Incipient cavitation pressure ratio", "xFz", "-"),
            "elevation": ("Site elevation", "z", "m")}  # fmt: skip
    for row, (key, cells) in enumerate(rest.items(), end + 1):
        draft.put(row, 1, row - 9)
        draft.put(row, 2, *cells)
        draft.value(row, 5, key, None, ITEM[key])
    draft.put(end + 12, 2, "Body material", None, None, "Duplex"), draft.put(end + 13, 2, "Weight", None, "kg", 85)
    return draft


def one_column_us() -> Draft:
    """Label, value, unit, one case, US units, sizes in inches and fractions."""
    draft = Draft("FV-12")
    rows: list[tuple[str, str, Any, str, Any]] = [
        ("Tag No.", "tag", "FV-12", "", None), ("Service", "service", "Boiler feed to unit 1", "", None),
        ("Process fluid", "fluid", "Water", "", None), ("Flow, normal", "flow", 512.0, "gpm", None),
        ("Upstream press. P1", "p1", 312.5, "psig", None), ("Downstream press. P2", "p2", 140.0, "psig", None),
        ("Flowing temp.", "t", 220.0, "°F", None), ("Specific gravity", "density", 0.957, "", None),
        ("Vapor pressure Pv", "pv", 17.19, "psia", None), ("Critical press. Pc", "pc", 3208.0, "psia", None),
        ("Viscosity", "viscosity", 0.27, "cP", None), ("Line size in", "pipe_in", '6"', "", 6.0),
        ("Line size out", "pipe_out", '8"', "", 8.0), ("Body size", "valve_size", '4"', "", 4.0),
        ("Rated Cv", "rated", 195.0, "", None), ("Calculated Cv", "coefficient", 41.3, "", None),
        ("% open", "travel", 48.0, "", None), ("FL", "fl", 0.84, "", None), ("xFz", "xfz", 0.29, "", None),
        ("Allowable dP", "dp_choked", 208.1, "psi", None), ("Cavitation number", "sigma", 1.79, "", None),
        ("Predicted SPL", "noise", 83.0, "dBA", None), ("Fp", "fp", 0.962, "", None), ("FF", "ff", 0.939, "", None),
    ]  # fmt: skip
    for row, (label, key, shown, unit, number) in enumerate(rows, 2):
        draft.put(row, 2, label)
        draft.value(row, 4, key, None, shown, number)
        draft.put(row, 5, unit or None)
    draft.put(40, 2, "Air supply", None, 60, "psig"), draft.put(41, 2, "Design pressure", None, 600, "psig")
    return draft


def transposed() -> Draft:
    """Labels in a row with units below, cases in the first column."""
    draft = Draft("Cases")
    draft.put(1, 1, "Valve tag"), draft.value(1, 2, "tag", None, "PV-331")
    labels = {
        "flow": ("Flow", "m3/h"), "p1": ("P1", "bar a"), "p2": ("P2", "bar a"), "t": ("Temp.", "°C"),
        "pv": ("Pv", "bar a"), "density": ("Density", "kg/m3"), "fl": ("FL", "-"),
        "coefficient": ("Kv required", "m3/h"),
        "travel": ("Opening", "%"), "sigma": ("σ = (p1-pv)/(p1-p2)", "-"), "noise": ("Noise", "dB(A)"),
    }  # fmt: skip
    draft.put(3, 1, "Case")
    for column, (key, (label, unit)) in enumerate(labels.items(), 2):
        draft.put(3, column, label), draft.put(4, column, f"[{unit}]")
        for step, case in enumerate(("Start-up", "Normal", "Upset")):
            draft.put(5 + step, 1, case)
            draft.value(5 + step, column, key, case, OPERATING[key][step])
    draft.put(9, 1, "Kvs"), draft.value(9, 2, "rated", None, 160.0)
    draft.put(10, 1, "Valve size"), draft.value(10, 2, "valve_size", None, "DN 100", 100.0)
    draft.put(11, 1, "Pipe size"), draft.value(11, 2, "pipe_in", None, "DN 150", 150.0)
    return draft


def side_by_side() -> Draft:
    """Two blocks beside each other; units in the cells of the values."""
    draft = Draft("Form")
    left = [("Inlet pressure:", "p1", "6.8 bar g", 6.8), ("Outlet pressure:", "p2", "2.6 bar g", 2.6),
            ("Volume flow:", "flow", "120.5 m³/h", 120.5), ("Temperature:", "t", "25 °C", 25.0),
            ("Vapour pressure:", "pv", "31.7 mbar a", 31.7), ("Density:", "density", "1023.2 kg/m³", 1023.2),
            ("Kinematic viscosity:", "kinematic", "0.94 cSt", 0.94)]  # fmt: skip
    right = [("Valve size:", "valve_size", "DN 100", 100.0), ("Kvs:", "rated", "160", 160.0),
             ("Kv calculated:", "coefficient", "59.4", 59.4), ("Opening:", "travel", "52 %", 52.0),
             ("Noise at 1 m:", "noise", "76 dB(A)", 76.0), ("F_L:", "fl", "0.88", 0.88),
             ("x_Fz:", "xfz", "0.31", 0.31)]  # fmt: skip
    draft.put(1, 1, "Tag"), draft.value(1, 2, "tag", None, "TV-77"), draft.put(1, 5, "Service")
    draft.value(1, 6, "service", None, "District heating return")
    draft.put(3, 1, "Process data"), draft.put(3, 5, "Valve data")
    for column, block in ((1, left), (5, right)):
        for row, (label, key, shown, number) in enumerate(block, 4):
            draft.put(row, column, label)
            draft.value(row, column + 1, key, None, shown, number)
    draft.put(12, 5, "Flow state"), draft.value(12, 6, "statement", None, "No cavitation", "no cavitation")
    return draft


def boxes() -> Draft:
    """A form of boxes: label above its value, merged over two columns each."""
    draft = Draft("Form A")
    rows: list[list[tuple[str, str, Any, Any]]] = [
        [("Tag", "tag", "HV-5", None), ("Service", "service", "Fuel jetty return", None),
         ("Medium", "fluid", "Kerosene", None)],
        [("Inlet pressure P1 [kPa abs]", "p1", 780.0, None), ("Outlet pressure P2 [kPa abs]", "p2", 360.0, None),
         ("Flow rate [t/h]", "mass_flow", 96.4, None)],
        [("Temperature [°C]", "t", 31.0, None), ("Density [kg/m³]", "density", 802.0, None),
         ("Vapour pressure [kPa abs]", "pv", 2.4, None)],
        [("Valve size", "valve_size", "NPS 4", 4.0), ("Pipe inside diameter [mm]", "pipe_in", 154.1, None),
         ("Rated Cv", "rated", 185.0, None)],
        [("Required Cv", "coefficient", 62.1, None), ("FL at this opening", "fl", 0.87, None),
         ("Cavitation index, upstream form", "sigma", 1.85, None)],
    ]  # fmt: skip
    for block, boxes_ in enumerate(rows):
        top = 2 + 3 * block
        for place, (label, key, shown, number) in enumerate(boxes_):
            column = 1 + 2 * place
            draft.put(top, column, label), draft.value(top + 1, column, key, None, shown, number)
            draft.merge(top, column, top, column + 1), draft.merge(top + 1, column, top + 1, column + 1)
    return draft


def german() -> Draft:
    """German labels, decimal commas, semicolons between."""
    draft = Draft("Blatt")
    draft.put(1, 1, "Messstelle"), draft.value(1, 3, "tag", None, "LV-9"), draft.put(2, 1, "Medium")
    (
        draft.value(2, 3, "fluid", None, "Wasser"),
        draft.put(4, 1, "Betriebsdaten", "Einheit", "Minimal", "Normal", "Maximal"),
    )
    labels = {"flow": ("Durchfluss", "m³/h"), "p1": ("Vordruck p1", "bar(a)"), "p2": ("Ausgangsdruck p2", "bar(a)"),
              "t": ("Temperatur", "°C"), "pv": ("Dampfdruck", "bar(a)"), "density": ("Dichte", "kg/m³"),
              "coefficient": ("Kv-Wert erforderlich", ""), "noise": ("Schalldruckpegel", "dB(A)"),
              "velocity_out": ("Austrittsgeschwindigkeit", "m/s")}  # fmt: skip
    for row, (key, (label, unit)) in enumerate(labels.items(), 5):
        draft.put(row, 1, label, unit)
        for step, case in enumerate(("Minimal", "Normal", "Maximal")):
            number = OPERATING[key][step]
            draft.value(row, 3 + step, key, case, f"{number}".replace(".", ","), number)
    draft.put(15, 1, "Nennweite", "", "DN 100"), draft.put(16, 1, "Kvs-Wert", "")
    draft.truth["valve_size", None, 15, 3] = 100.0
    draft.value(16, 3, "rated", None, "160,0", 160.0)
    return draft


def case_blocks() -> Draft:
    """One block below the other, each headed by its case."""
    draft = Draft("Blocks")
    draft.put(1, 1, "Tag:"), draft.value(1, 2, "tag", None, "FV-3"), draft.put(2, 1, "Valve size")
    draft.value(2, 2, "valve_size", None, 80.0), draft.put(2, 3, "mm"), draft.put(3, 1, "Rated Kv")
    draft.value(3, 2, "rated", None, 100.0)
    top = 5
    for step, case in enumerate(CASES):
        draft.put(top, 1, f"Case: {case}")
        for row, (key, label, unit) in enumerate(
            [("flow", "Flow rate", "l/s"), ("p1", "p1", "bar a"), ("p2", "p2", "bar a"), ("t", "Temperature", "°C"),
             ("coefficient", "Kv required", None), ("sigma", "Sigma", None), ("noise", "Noise level", "dB(A)")],
            top + 1,
        ):  # fmt: skip
            draft.put(row, 1, label), draft.value(row, 2, key, case, OPERATING[key][step]), draft.put(row, 3, unit)
        top += 9
    return draft


def side_heads() -> Draft:
    """Vertical heads merged at the left: ``Inlet``, ``Outlet``, ``Valve`` with short labels beside them."""
    draft = Draft("Sheet")
    draft.put(1, 1, "Item"), draft.value(1, 3, "tag", None, "PV-8"), draft.put(2, 4, *CASES)
    blocks = [("Inlet", [("p1", "Pressure", "bar a"), ("t", "Temperature", "°C"), ("density", "Density", "kg/m3")]),
              ("Outlet", [("p2", "Pressure", "bar a"), ("velocity_out", "Velocity", "m/s")]),
              ("Result", [("coefficient", "Cv (required)", ""), ("travel", "Valve opening", "%"),
                          ("noise", "SPL", "dBA")])]  # fmt: skip
    row = 3
    for head, lines in blocks:
        draft.put(row, 1, head), draft.merge(row, 1, row + len(lines) - 1, 1)
        for key, label, unit in lines:
            draft.put(row, 2, label), draft.put(row, 3, unit or None)
            for step, case in enumerate(CASES):
                draft.value(row, 4 + step, key, case, OPERATING[key][step])
            row += 1
    draft.put(row, 1, "Valve"), draft.merge(row, 1, row + 1, 1)
    draft.put(row, 2, "Size", "mm"), draft.value(row, 4, "valve_size", None, 100.0)
    draft.put(row + 1, 2, "Cv rated"), draft.value(row + 1, 4, "rated", None, 185.0)
    return draft


def printed_form() -> Draft:
    """The layout of the printed form with cases (for PDF)."""
    draft = Draft("Form")
    draft.put(1, 1, "Tag"), draft.value(1, 2, "tag", None, "LV-204"), draft.put(1, 4, "Service")
    draft.value(1, 5, "service", None, "Brine level"), draft.put(3, 2, "Units", *CASES)
    labels = {"flow": ("Flow rate Q", "m3/h"), "p1": ("Inlet pressure P1", "bar g"),
              "p2": ("Outlet pressure P2", "bar g"),
              "t": ("Inlet temperature", "°C"), "pv": ("Vapour pressure Pv", "bar a"), "density": ("Density", "kg/m3"),
              "coefficient": ("Required Kv", "-"), "travel": ("Valve travel", "%"), "noise": ("Noise level", "dB(A)"),
              "sigma": ("Cavitation index", "-")}  # fmt: skip
    _table(draft, 4, 1, labels, 3)
    draft.put(16, 1, "Valve size"), draft.value(16, 2, "valve_size", None, "DN 100", 100.0)
    draft.put(17, 1, "Rated Kv"), draft.value(17, 2, "rated", None, "160", 160.0)
    draft.put(18, 1, "FL"), draft.value(18, 2, "fl", None, "0.88", 0.88)
    return draft


def printed_list() -> Draft:
    """Lines ``label: value unit`` (for PDF), US units."""
    draft = Draft("List")
    rows = [("Valve tag: FV-12", "tag", "FV-12", "FV-12"), ("Inlet pressure: 312.5 psig", "p1", "312.5 psig", 312.5),
            ("Outlet pressure: 140 psig", "p2", "140 psig", 140.0), ("Flow rate: 512 gpm", "flow", "512 gpm", 512.0),
            ("Temperature: 220 °F", "t", "220 °F", 220.0), ("Vapor pressure: 17.19 psia", "pv", "17.19 psia", 17.19),
            ("Specific gravity: 0.957", "density", "0.957", 0.957), ("Valve size: 4 in", "valve_size", "4 in", 4.0),
            ("Required Cv: 41.3", "coefficient", "41.3", 41.3), ("Noise level: 83 dBA", "noise", "83 dBA", 83.0),
            ("Flashing: No", "statement", "No", "no flashing")]  # fmt: skip
    for row, (text, key, _, number) in enumerate(rows, 2):
        draft.value(row, 1, key, None, text, number)
    return draft


XLSX: dict[str, Callable[[], Draft]] = {
    "numbered lines": numbered_lines, "one column, US": one_column_us, "transposed": transposed,
    "side by side": side_by_side, "boxes": boxes, "case blocks": case_blocks, "side heads": side_heads,
    "printed form": printed_form, "German": german,
}  # fmt: skip


def from_rows(rows: list[list[Any]], title: str = "Sheet", merged: tuple[tuple[int, int, int, int], ...] = (),
              formats: dict[tuple[int, int], str] | None = None) -> Draft:  # fmt: skip
    """A draft from its rows: a tuple (quantity, case, shown[, number]) is a value that must be found, None a gap."""
    draft = Draft(title, merged=list(merged), formats=dict(formats or {}))
    for row, cells in enumerate(rows, 1):
        for column, cell in enumerate(cells, 1):
            if isinstance(cell, tuple):
                draft.value(row, column, *cell)
            elif cell is not None:
                draft.put(row, column, cell)
    return draft


def across(key: str, cases: tuple[str, ...], *shown: Any) -> list[tuple[Any, ...]]:
    """Values of one quantity in several cases."""
    return [(key, case, value) for case, value in zip(cases, shown, strict=True) if value is not None]
