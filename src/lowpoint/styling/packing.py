"""A workbook as bytes that are the same on every run: fixed dates, fixed order, nothing of the machine."""

from __future__ import annotations

import gc
import io
import re
import sys
import tempfile
import traceback
import zipfile
from collections.abc import Callable, Iterable, Iterator, Mapping
from contextlib import contextmanager
from datetime import datetime
from typing import Any, TypeAlias

from lowpoint.errors import LowpointError
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
    with _scratch_needed():
        book.save(raw)
    parts = {f"xl/worksheets/sheet{number}.xml": fill for number, sheet in enumerate(book.worksheets, 1)
             if (fill := (fillers or {}).get(sheet.title))}  # fmt: skip
    return _repacked(raw, day, parts, strings)


@contextmanager
def _scratch_needed() -> Iterator[None]:
    """The library writes its sheets to the folder for temporary files first; that one may be full, too."""
    try:
        yield
    except Exception as trouble:
        # Where lxml is installed it writes, and its error is of a kind of its own.
        if not isinstance(trouble, OSError) and type(trouble).__name__ != "SerialisationError":
            raise
        said = str(trouble) or type(trouble).__name__
        _let_go(trouble)
        must = "the folder for temporary files must take the book while it is made: the disk is full, or closed to us"
        remedy = "Nothing was written over. Free some space there, or name another with the variable TMPDIR."
        raise LowpointError(tempfile.gettempdir(), must, said, remedy) from None


def _let_go(trouble: Exception) -> None:
    """Close the half-written sheets quietly: each would complain once more of the same."""
    hook, sys.unraisablehook = sys.unraisablehook, lambda _: None
    try:
        if trouble.__traceback__ is not None:
            traceback.clear_frames(trouble.__traceback__)
        trouble.__traceback__ = trouble.__context__ = None
        gc.collect()
    finally:
        sys.unraisablehook = hook


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
