"""The workbook of an audit: the vendor's sheet with notes on the cells concerned, findings, questions, the working."""

from __future__ import annotations

import hashlib
import os
from collections.abc import Mapping, Sequence
from datetime import date, datetime, time
from pathlib import Path
from typing import Any

from lowpoint.audit.model import Audit
from lowpoint.book import guard
from lowpoint.book.saving import replace_file
from lowpoint.errors import LowpointError

__all__ = ["audit_bytes", "write_audit"]


def write_audit(audit: Audit, out: str | os.PathLike[str], *, today: date | None = None) -> list[str]:
    """Write the workbook of an audit (.xlsx) in one step or not at all; gives what is to be said of it.

    A copy of the vendor's workbook has his parts unchanged, with notes and four sheets added. Of a csv or a PDF, and
    of a workbook that nothing can be added to with certainty (signed, with macros, a template), it is a workbook of
    its own with the texts as they were read. ``today`` is the date that a workbook of its own states.
    """
    data, said = audit_bytes(audit, today=today)
    replace_file(Path(out), lambda sink: sink.write(data))
    return said


def audit_bytes(audit: Audit, *, today: date | None = None) -> tuple[bytes, list[str]]:
    """The same as bytes; LowpointError where the file is no longer the one that was audited."""
    source = audit.document.path
    data = guard.load(source)
    if hashlib.sha256(data).hexdigest() != audit.document.fingerprint:
        raise LowpointError(source, "was changed while it was audited", remedy="Run the command again.")
    if audit.document.format != "xlsx":
        return _apart(audit, today, []), []
    from lowpoint.audit.output.marks import UnfitError

    try:
        return _copied(audit, data), []
    except UnfitError as reason:
        said = [f"The vendor's workbook was not copied, because {reason}: this is a workbook of its own with the cells "
                "as they were read, the findings and the notes."]  # fmt: skip
        return _apart(audit, today, said), said


def _copied(audit: Audit, data: bytes) -> bytes:
    from lowpoint.audit.output.copying import copied
    from lowpoint.audit.output.noting import CELL, notes_of
    from lowpoint.audit.output.sheets import Place, add_sheets
    from lowpoint.audit.own_sheets import ADDED
    from lowpoint.book.package import Package
    from lowpoint.survey.output.naming import sheet_names

    package = Package(data, audit.document.path)
    titles = [sheet.title for sheet in package.sheets]
    notes: dict[str, dict[str, str]] = {}
    for address, text in notes_of(audit).items():
        found = CELL.fullmatch(address)
        if found and found["sheet"] in titles:
            notes.setdefault(found["sheet"], {})[found["cell"]] = text

    def place(address: str) -> Place | None:
        found = CELL.fullmatch(address)
        return Place(found["sheet"], found["cell"]) if found and found["sheet"] in titles else None

    book = _blank()
    add_sheets(book, audit, dict(zip(ADDED, sheet_names(ADDED, titles), strict=True)), place)
    _unselect(book)
    return copied(package, book, notes)


def _apart(audit: Audit, today: date | None, said: Sequence[str]) -> bytes:
    from lowpoint.audit.output.apart import add_note, as_read
    from lowpoint.audit.output.noting import notes_of
    from lowpoint.audit.output.sheets import Place, add_sheets
    from lowpoint.audit.own_sheets import ADDED
    from lowpoint.audit.reading import pages_of
    from lowpoint.styling.packing import packed
    from lowpoint.survey.output.naming import sheet_names

    book = _blank()
    _, _, pages, _ = pages_of(audit.document.path)
    places: Mapping[str, Place] = as_read(book, pages, audit.document.format)
    for address, text in notes_of(audit).items():
        if address in places:
            add_note(book, places[address], text)
    names = dict(zip(ADDED, sheet_names(ADDED, book.sheetnames), strict=True))
    add_sheets(book, audit, names, places.get, said)
    return packed(book, datetime.combine(today or date.today(), time()))


def _blank() -> Any:
    from openpyxl import Workbook

    book = Workbook()
    book.remove(book.active)
    return book


def _unselect(book: Any) -> None:
    """Programs take several selected sheets for a group, in which what is typed into one goes into all."""
    for sheet in book.worksheets:
        sheet.sheet_view.tabSelected = False
