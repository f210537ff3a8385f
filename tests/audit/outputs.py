"""Sheets for the tests of an audit's output: right ones, wrong ones, and workbooks with notes of their own.

Items are of the made-up island utility of Kestrel Bay. The numbers of the small sheet are plain arithmetic: sigma of
6.0 bar a to 4.0 bar a with pv 0.5 bar a is (6.0 - 0.5)/(6.0 - 4.0) = 2.75, dp is 2.0.
"""

from __future__ import annotations

import io
import random
import zipfile
from pathlib import Path
from typing import Any

from openpyxl import Workbook
from openpyxl.comments import Comment

from lowpoint.audit.auditing import audit_file
from lowpoint.audit.model import Audit
from vendor_sheets import made

__all__ = ["ROWS", "SIGMA", "content", "members", "planted", "sheet", "small", "small_csv"]

SIGMA = "B8"
"""The cell of the claim in :func:`small`."""
ROWS: tuple[tuple[Any, ...], ...] = (
    ("Tag", "21-FCV-110", None),
    ("Service", "let-down", None),
    ("Inlet pressure p1", 6.0, "bar a"),
    ("Outlet pressure p2", 4.0, "bar a"),
    ("Vapour pressure pv", 0.5, "bar a"),
    ("Volume flow", 100.0, "m3/h"),
    ("Pressure drop", 2.0, "bar"),
    ("Cavitation index (p1-pv)/(p1-p2)", 2.75, None),
)


def small(folder: Path, name: str = "sheet.xlsx", *, sigma: Any = 2.75, note: str = "", title: str = "Data",
          more: Any = None) -> Path:  # fmt: skip
    """A small sheet, right unless its index is another; ``note``: the vendor's own note on that cell."""
    book = Workbook()
    data = book.active
    data.title = title
    for row in ROWS:
        data.append(row)
    data[SIGMA] = sigma
    if note:
        data[SIGMA].comment = Comment(note, "The vendor")
        data["A1"].comment = Comment("kept as it is", "The vendor")
    if more is not None:
        more(book)
    path = folder / name
    book.save(path)
    return path


def small_csv(folder: Path, name: str = "sheet.csv", *, sigma: str = "2.75", extra: str = "") -> Path:
    """The same as a text."""
    lines = [";".join("" if cell is None else str(cell) for cell in row) for row in ROWS]
    lines[7] = f"{ROWS[7][0]};{sigma};"
    path = folder / name
    path.write_text("\n".join(lines) + "\n" + extra, encoding="utf-8")
    return path


def planted(folder: Path, layout: str, *slips: str, seed: int = 7) -> Path:
    """A whole vendor's sheet in a layout with these mistakes."""
    rng = random.Random(seed)
    drawn = next(one for one in iter(lambda: made(rng, layout, slips), object()) if one is not None)
    path = folder / f"{layout}.{drawn.kind}"
    path.write_bytes(drawn.data)
    return path


def sheet(path: Path) -> Audit:
    return audit_file(path)


def members(source: Path | bytes) -> dict[str, bytes]:
    """The parts of a package."""
    with zipfile.ZipFile(io.BytesIO(source) if isinstance(source, bytes) else source) as package:
        return {name: package.read(name) for name in package.namelist()}


def content(book: Any, title: str) -> dict[str, Any]:
    """The values of a sheet by cell."""
    return {cell.coordinate: cell.value for row in book[title].iter_rows() for cell in row if cell.value is not None}
