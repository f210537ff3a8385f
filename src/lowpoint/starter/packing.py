"""A workbook as bytes that are the same on every run: fixed dates, fixed order, nothing of the machine."""

from __future__ import annotations

import io
import re
import zipfile
from datetime import datetime
from typing import Any

__all__ = ["packed"]

DAY = datetime(2025, 1, 1)
"""The date of everything in a book of ours: none, in truth; a package must state one."""
CURRENT = 191029
"""Calculation engine that the book claims: spreadsheet programs recompute books of older ones when they open them
(from memory), and one without the LP_ functions would then throw good values away."""
_MODIFIED = re.compile(rb"(<dcterms:modified[^>]*>)[^<]*")


def packed(book: Any) -> bytes:
    """The bytes of a workbook; programs are told not to recompute it on opening."""
    book.properties.creator = "Lowpoint"
    book.properties.created = book.properties.modified = DAY
    book.calculation.fullCalcOnLoad = False
    book.calculation.calcId = CURRENT
    raw = io.BytesIO()
    book.save(raw)
    return _repacked(raw)


def _repacked(raw: io.BytesIO) -> bytes:
    """The same parts under one date; the library stamps the moment of saving into the entries and the properties."""
    out = io.BytesIO()
    with zipfile.ZipFile(raw) as old, zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as new:
        for name in old.namelist():
            data = old.read(name)
            if name == "docProps/core.xml":
                data = _MODIFIED.sub(rb"\g<1>" + DAY.strftime("%Y-%m-%dT%H:%M:%SZ").encode(), data)
            entry = zipfile.ZipInfo(name, DAY.timetuple()[:6])
            entry.compress_type = zipfile.ZIP_DEFLATED
            new.writestr(entry, data)
    return out.getvalue()
