"""A workbook as bytes that are the same on every run: fixed dates, fixed order, nothing of the machine."""

from __future__ import annotations

import io
import re
import zipfile
from collections.abc import Callable, Iterable, Mapping
from datetime import datetime
from typing import Any, TypeAlias

from lowpoint.styling.strings import PART, Strings

__all__ = ["DAY", "Filler", "packed"]

DAY = datetime(2025, 1, 1)
"""The date of everything in a book of ours: none, in truth; a package must state one."""
CURRENT = 191029
"""Calculation engine that the book claims: spreadsheet programs recompute books of older ones when they open them
(from memory), and one without the LP_ functions would then throw good values away."""
_MODIFIED = re.compile(rb"(<dcterms:modified[^>]*>)[^<]*")

Filler: TypeAlias = Callable[[bytes], Iterable[bytes]]
"""From the part of a sheet as the library writes it to the part as it shall be, piece by piece."""


def packed(
    book: Any, day: datetime = DAY, fillers: Mapping[str, Filler] | None = None, strings: Strings | None = None
) -> bytes:
    """The bytes of a workbook; programs are told not to recompute it on opening.

    ``day`` is the date that its properties state. ``fillers`` by title of a sheet write what the library would take
    too long for, and ``strings`` is the table that their texts go to.
    """
    book.properties.creator = "Lowpoint"
    book.properties.created = book.properties.modified = day
    book.calculation.fullCalcOnLoad = False
    book.calculation.calcId = CURRENT
    raw = io.BytesIO()
    book.save(raw)
    parts = {f"xl/worksheets/sheet{number}.xml": fill for number, sheet in enumerate(book.worksheets, 1)
             if (fill := (fillers or {}).get(sheet.title))}  # fmt: skip
    return _repacked(raw, day, parts, strings)


def _repacked(raw: io.BytesIO, day: datetime, fillers: Mapping[str, Filler], strings: Strings | None) -> bytes:
    """The same parts under one date; the library stamps the moment of saving into the entries and the properties."""
    out = io.BytesIO()
    with zipfile.ZipFile(raw) as old, zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as new:
        for name in old.namelist():
            data = old.read(name)
            if name == "docProps/core.xml":
                data = _MODIFIED.sub(rb"\g<1>" + day.strftime("%Y-%m-%dT%H:%M:%SZ").encode(), data)
            if strings is not None:
                data = strings.declared(name, data)
            _put(new, name, fillers[name](data) if name in fillers else (data,))
        if strings is not None:  # whole only after the sheets
            _put(new, PART, (strings.part(),))
    return out.getvalue()


def _put(package: zipfile.ZipFile, name: str, pieces: Iterable[bytes]) -> None:
    entry = zipfile.ZipInfo(name, DAY.timetuple()[:6])
    entry.compress_type = zipfile.ZIP_DEFLATED
    with package.open(entry, "w") as sink:
        for piece in pieces:
            sink.write(piece)
