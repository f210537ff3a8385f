"""Layouts: a TOML file that says in which cells a vendor's sheet has its quantities, so that nothing need be searched.

search = false            # true: the pinned cells override what the search finds
decimal = ","             # optional; decimal sign of numbers in texts
ignore = ["Sheet1!F40"]   # optional; cells that are no values

[[value]]
quantity = "p1"           # a key of the vocabulary
case = "Normal"           # left out: holds for the item
cell = "D7"               # of a csv "row 7, column 3", of a PDF "page 1, line 12, part 3"
sheet = 1                 # number or name of the sheet; left out: every sheet
unit = "bar g"            # left out: plain, or the unit in the cell itself
form = "upstream"         # of an index only
"""

from __future__ import annotations

import os
import re
import tomllib
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from lowpoint.audit.cells import Cell, Page
from lowpoint.audit.matching import Label
from lowpoint.audit.model import Document, Finding, SheetReading, Value
from lowpoint.audit.numbers import Number, numbers_of
from lowpoint.audit.roles import WORDS, takes
from lowpoint.audit.statements import canonical, statement_of
from lowpoint.audit.unitsigns import Sign, unit_sign
from lowpoint.audit.valuing import value_of_pin
from lowpoint.audit.vocabulary import BY_KEY
from lowpoint.errors import LowpointError

__all__ = ["Layout", "Pin", "layout_text", "read_layout"]

FORMS = ("upstream", "downstream", "xf")
LARGEST = 1 << 20
"""Bytes of a layout file at most."""


@dataclass(frozen=True, slots=True)
class Pin:
    """One cell of a layout."""

    quantity: str
    cell: str
    case: str | None = None
    sheet: int | str | None = None
    unit: str = ""
    form: str | None = None
    label: str = ""

    def holds_for(self, page: Page, number: int) -> bool:
        if self.sheet is None or self.sheet == number:
            return True
        return isinstance(self.sheet, str) and self.sheet.casefold() == page.name.casefold()


@dataclass(frozen=True, eq=False)
class Layout:
    """A layout file as read."""

    path: str
    pins: tuple[Pin, ...]
    search: bool = True
    decimal: str | None = None
    ignore: frozenset[str] = frozenset()

    def names(self, address: str) -> bool:
        """Does the layout say what a cell is?"""
        return address in self.ignore or any(pin.cell in (address, address.rpartition("!")[2]) for pin in self.pins)

    def pinned(self, page: Page, number: int) -> tuple[list[tuple[Value, Sign | None]], list[Finding]]:
        """The values of the pinned cells on a page, and what is wrong with them."""
        by_place: dict[str, Cell] = {}
        for cell in page.cells:
            by_place.setdefault(cell.address, cell)
            by_place.setdefault(cell.address.rpartition("!")[2], cell)
        words = {word for cell in page.cells for word in re.findall(r"\w+", cell.text)}
        values: list[tuple[Value, Sign | None]] = []
        findings: list[Finding] = []
        for pin in self.pins:
            if not pin.holds_for(page, number):
                continue
            pinned = by_place.get(pin.cell)
            if pinned is None:
                findings.append(Finding("layout", pin.cell, f"the layout has {_named(pin)} here, and the cell is empty",
                                        "Correct the layout, or leave the cell out of it."))  # fmt: skip
                continue
            if any(word not in words for word in re.findall(r"\w+", pin.label)):
                findings.append(Finding("layout", pinned.address,
                                        f"the label '{pin.label}' of {_named(pin)} is not on this sheet; its cell was "
                                        "not read", "It may be another form: read it without the layout."))  # fmt: skip
                continue
            value = _read(pin, pinned, self.decimal or "")
            if isinstance(value, Finding):
                findings.append(value)
            else:
                values.append(value)
        return values, findings

    def without_pinned(self, found: Iterable[tuple[Value, Sign | None]], pinned: Sequence[tuple[Value, Sign | None]],
                       ) -> list[tuple[Value, Sign | None]]:  # fmt: skip
        """What the search found, less what the layout says otherwise."""
        taken = {(value.quantity, value.case) for value, _ in pinned}
        cells = {value.cell for value, _ in pinned}
        return [(value, sign) for value, sign in found
                if (value.quantity, value.case) not in taken and value.cell not in cells
                and not self._ignored(value.cell)]  # fmt: skip

    def _ignored(self, address: str) -> bool:
        return address in self.ignore or address.rpartition("!")[2] in self.ignore


def _named(pin: Pin) -> str:
    return BY_KEY[pin.quantity].meaning + (f", {pin.case}," if pin.case else "")


def _read(pin: Pin, cell: Cell, decimal: str) -> tuple[Value, Sign | None] | Finding:
    term = BY_KEY[pin.quantity]
    if term.kind in WORDS:
        text = cell.text.rpartition(":")[2].strip() if ":" in cell.text and "!" not in pin.cell else cell.text
        word = (
            statement_of(text, frozenset(pin.label.lower().split()) or None)
            if term.key == "statement"
            else canonical(term.key, text)
        )
        word = word or (statement_of(text, frozenset({"cavitation"})) if term.key == "statement" else None)
        if word is None:
            return Finding(
                "layout",
                cell.address,
                f"the layout has {_named(pin)} here, and '{cell.text}' says nothing known",
                "Correct the layout.",
            )
        return value_of_pin(
            pin.quantity, pin.case, cell.address, cell.text, float("nan"), float("nan"), None, word, pin.label, None
        ), None
    numbers = _numbers(cell, decimal)
    if not numbers or numbers[0].ambiguous:
        return Finding("layout", cell.address, f"the layout has {_named(pin)} here, and '{cell.text}' is no number",
                       "Correct the layout, or say decimal = ',' or '.' in it.")  # fmt: skip
    number = numbers[0]
    sign = unit_sign(pin.unit) if pin.unit else number.sign
    if sign is not None and not takes(Label("", pin.quantity, 1.0), sign):
        return Finding("layout", cell.address, f"'{sign.label}' is no unit of {term.meaning}", "Correct the layout.")
    value = value_of_pin(
        pin.quantity, pin.case, cell.address, cell.text, number.value, number.half, sign, None, pin.label, pin.form
    )
    return value, sign


def _numbers(cell: Cell, decimal: str) -> tuple[Number, ...]:
    if cell.number is not None:
        return (Number(cell.number * cell.factor, cell.half, unit_sign(cell.unit) if cell.unit else None),)
    for sign in (":", "="):
        if sign in cell.text:
            inside = numbers_of(cell.text.rpartition(sign)[2], decimal)
            if inside:
                return inside
    return numbers_of(cell.text, decimal)


# --- the file ------------------------------------------------------------------------------------------------------


def read_layout(path: str | os.PathLike[str]) -> Layout:
    """A layout file; LowpointError naming the entry, what is wrong with it and the remedy."""
    name = str(path)
    try:
        data = Path(path).read_bytes()[: LARGEST + 1]
        if len(data) > LARGEST:
            raise LowpointError(name, "must be a layout of at most 1 MB")
        table = tomllib.loads(data.decode("utf-8"))
    except FileNotFoundError:
        raise LowpointError(
            name, "must be an existing file", "nothing there", "Check the name and the folder."
        ) from None
    except OSError as problem:
        raise LowpointError(name, f"cannot be read ({problem.strerror or problem})") from None
    except (tomllib.TOMLDecodeError, UnicodeDecodeError) as problem:
        raise LowpointError(name, f"must be a layout in TOML ({problem})", remedy="--write-layout makes one.") from None
    return layout_of(table, name)


def layout_of(table: dict[str, Any], name: str) -> Layout:
    """A layout from its table."""
    unknown = set(table) - {"search", "decimal", "ignore", "value", "vendor", "note"}
    if unknown:
        raise LowpointError(name, f"must hold search, decimal, ignore and [[value]] only, got {sorted(unknown)[0]!r}")
    decimal = table.get("decimal")
    if decimal not in (None, ".", ","):
        raise LowpointError(name, "decimal must be '.' or ','", repr(decimal))
    search = table.get("search", True)
    if not isinstance(search, bool):
        raise LowpointError(name, "search must be true or false", repr(search))
    entries = table.get("value", [])
    ignore = table.get("ignore", [])
    if not isinstance(entries, list) or not isinstance(ignore, list) or not all(isinstance(i, str) for i in ignore):
        raise LowpointError(name, "value must be [[value]] tables, and ignore a list of cells")
    pins = tuple(_pin(entry, number, name) for number, entry in enumerate(entries, 1))
    return Layout(name, pins, search, decimal, frozenset(ignore))


def _pin(entry: Any, number: int, name: str) -> Pin:
    place = f"[[value]] number {number}"
    if not isinstance(entry, dict):
        raise LowpointError(name, f"{place} must be a table")
    unknown = set(entry) - {"quantity", "case", "cell", "sheet", "unit", "form", "label"}
    if unknown:
        raise LowpointError(
            name, f"{place} must hold quantity, cell, case, sheet, unit, form and label only", repr(sorted(unknown)[0])
        )
    texts = {key: entry.get(key, "") for key in ("quantity", "cell", "case", "unit", "form", "label")}
    for key, text in texts.items():
        if not isinstance(text, str) or (key in ("quantity", "cell") and not text):
            raise LowpointError(name, f"{place}: {key} must be a text", repr(text))
    if texts["quantity"] not in BY_KEY:
        import difflib

        near = difflib.get_close_matches(texts["quantity"], BY_KEY, n=3, cutoff=0.4)
        hint = f"Nearest: {', '.join(near)}." if near else ""
        raise LowpointError(name, f"{place}: quantity must be a key of the vocabulary", repr(texts["quantity"]), hint)
    sheet = entry.get("sheet")
    if sheet is not None and (isinstance(sheet, bool) or not isinstance(sheet, int | str)):
        raise LowpointError(name, f"{place}: sheet must be a number or a name", repr(sheet))
    if texts["unit"] and unit_sign(texts["unit"]) is None:
        raise LowpointError(
            name, f"{place}: unit must be one that is known", repr(texts["unit"]), "Examples: bar g, psia, m3/h, deg C."
        )
    if texts["form"] and texts["form"] not in FORMS:
        raise LowpointError(name, f"{place}: form must be one of {', '.join(FORMS)}", repr(texts["form"]))
    return Pin(
        texts["quantity"],
        texts["cell"].strip(),
        texts["case"] or None,
        sheet,
        texts["unit"],
        texts["form"] or None,
        texts["label"],
    )


def layout_text(document: Document) -> str:
    """A layout as TOML from what was found: every value of every sheet, for the next sheet of the same vendor."""
    parted = next((sheet.part_of for sheet in document.sheets if sheet.part_of), None)
    if parted is not None:
        raise LowpointError("--write-layout", "needs a sheet of one item", f"several on '{parted}'",
                            "Split it, and make the layout of one.")  # fmt: skip
    lines = [
        f"# Cells of {_comment(Path(document.path).name)}, as found; correct what is wrong, then use --layout with it.",
        "# search = true looks for further quantities and lets these cells go before what it finds.",
        "search = false",
    ]
    for number, sheet in enumerate(document.sheets, 1):
        lines += ["", f"# --- {_comment(sheet.name)}"]
        for value in sheet.values:
            lines += ["", *_entry(value, number, sheet, document)]
    return "\n".join(lines) + "\n"


def _comment(text: str) -> str:
    return "".join(c if c.isprintable() else " " for c in text)


def _entry(value: Value, number: int, sheet: SheetReading, document: Document) -> list[str]:
    lines = ["[[value]]", f"quantity = {_quoted(value.quantity)}"]
    if value.case is not None:
        lines.append(f"case = {_quoted(value.case)}")
    lines.append(f"cell = {_quoted(value.cell.rpartition('!')[2])}")
    covers = any(note.kind == "unread" and "!" not in note.cell for note in document.notes)
    if document.format == "xlsx" and (covers or len(document.sheets) > 1):
        lines.append(f"sheet = {_quoted(sheet.name)}")
    elif len(document.sheets) > 1:
        lines.append(f"sheet = {number}")
    if value.unit and value.unit_from != "cell":
        lines.append(f"unit = {_quoted(value.unit)}")
    if value.form:
        lines.append(f"form = {_quoted(value.form)}")
    lines.append(f"label = {_quoted(value.label)}")
    return lines


def _quoted(text: str) -> str:
    """A TOML basic string."""
    named = {'"': '\\"', "\\": "\\\\", "\n": "\\n", "\t": "\\t", "\r": "\\r"}
    return '"' + "".join(named.get(c, c if c.isprintable() else f"\\u{ord(c):04X}") for c in text) + '"'
