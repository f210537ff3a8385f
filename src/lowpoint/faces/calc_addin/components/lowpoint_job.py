"""The job that the office runs when a book was loaded or saved: plain names bind, and plain names are stored."""
# mypy: disable-error-code="import-not-found,misc"
# What is imported here is there in the office alone.

from __future__ import annotations

import re
from typing import Any

import uno
import unohelper
from com.sun.star.lang import XServiceInfo
from com.sun.star.table import CellAddress
from com.sun.star.task import XJob
from lowpoint_office.link import PLAIN_NAMES, shared_link

IMPLEMENTATION = "org.lowpoint.PlainNamesJobImplementation"
SERVICE = "org.lowpoint.PlainNamesJob"
BOOK = "com.sun.star.sheet.SpreadsheetDocument"
STORED_BY_SERVICE = (".xlsx", ".xlsm", ".xltx", ".xltm", ".ods", ".ots")
PASSING = "lowpoint_passing_name"
FORMULAS = 0
OURS = re.compile(r"\blpu?_", re.IGNORECASE)
OTHER_SPELLINGS = r"(?<![\w.])(?:(?:\[\d+\]!|_xl(?:l|udf|fn)\.)(lpu?)[._]|(lpu?)\.)([a-z_]+)\("


class PlainNamesJob(unohelper.Base, XJob, XServiceInfo):
    """Never raises: whatever goes wrong is a sentence in the log."""

    def __init__(self, context: Any, *arguments: Any) -> None:
        self.link = shared_link(context)

    def getImplementationName(self) -> str:  # noqa: N802
        return IMPLEMENTATION

    def supportsService(self, name: str) -> bool:  # noqa: N802
        return name == SERVICE

    def getSupportedServiceNames(self) -> tuple[str, ...]:  # noqa: N802
        return (SERVICE,)

    def execute(self, arguments: Any) -> None:
        try:
            given = {
                value.Name: value.Value for named in arguments if named.Name == "Environment" for value in named.Value
            }
            book = given.get("Model")
            if book is None or not book.supportsService(BOOK):
                return
            if given.get("EventName") == "OnLoadFinished":
                rebind(book)
            else:
                self._respell(book)
        except Exception as problem:
            self.link.journal.write(f"The names of a book were left as they are: {problem}")

    def _respell(self, book: Any) -> None:
        if not book.URL.startswith("file:") or not book.URL.lower().endswith(STORED_BY_SERVICE):
            return
        path = uno.fileUrlToSystemPath(book.URL)
        said = self.link.call(PLAIN_NAMES, (path,))
        if isinstance(said, str):
            self.link.journal.write(said)


def rebind(book: Any) -> None:
    """Make Calc understand the LP_ names of a book that it has just read; the book counts as unchanged."""
    modified, undo = book.isModified(), book.getUndoManager()
    undo.lock()
    try:
        sheets = [book.Sheets.getByIndex(index) for index in range(book.Sheets.Count)]
        for sheet in sheets:
            _respell_cells(sheet)
            _renew_names(sheet.NamedRanges)
            _renew_conditions(sheet.ConditionalFormats)
        _renew_names(book.NamedRanges)
        # Calc took LP_SIGMA( for an unknown name; any change of the defined names makes it look again.
        book.NamedRanges.addNewByName(PASSING, "$A$1", CellAddress(), 0)
        book.NamedRanges.removeByName(PASSING)
    finally:
        undo.unlock()
    if not modified:
        _unmark(book, sheets)


def _unmark(book: Any, sheets: list[Any]) -> None:
    """Nobody changed the book: closing it must not ask. Charts that were drawn anew count as changes of their own."""
    book.setModified(False)
    if book.isModified():
        for sheet in sheets:
            for index in range(sheet.Charts.Count):
                sheet.Charts.getByIndex(index).EmbeddedObject.setModified(False)


def _respell_cells(sheet: Any) -> None:
    """Calls as another program stores those of its own add-in; the cells that hold none are not touched."""
    change = sheet.createReplaceDescriptor()
    change.SearchRegularExpression, change.SearchType = True, FORMULAS
    change.SearchString, change.ReplaceString = OTHER_SPELLINGS, "$1$2_$3("
    sheet.replaceAll(change)


def _renew_names(names: Any) -> None:
    """A defined name is not looked at again by itself; setting what it means is enough."""
    for name in names.ElementNames:
        meaning = names.getByName(name)
        if OURS.search(meaning.Content):
            meaning.setContent(meaning.Content)


def _renew_conditions(formats: Any) -> None:
    for one in formats.getConditionalFormats() or ():
        for index in range(one.getCount()):
            entry = one.getByIndex(index)
            for part in ("Formula1", "Formula2"):
                formula = getattr(entry, part, None)
                if isinstance(formula, str) and OURS.search(formula):
                    setattr(entry, part, formula)


g_ImplementationHelper = unohelper.ImplementationHelper()  # noqa: N816 - the office looks for this name
g_ImplementationHelper.addImplementation(PlainNamesJob, IMPLEMENTATION, (SERVICE,))
