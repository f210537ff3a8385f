"""The job that the office runs when a book was loaded or saved: plain names bind, and plain names are stored."""

from __future__ import annotations

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
            given = {value.Name: value.Value for named in arguments if named.Name == "Environment" for value in named.Value}
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
    """Calc reads LP_SIGMA( of a file as an unknown name; any change of the defined names makes it look again."""
    modified, names, undo = book.isModified(), book.NamedRanges, book.getUndoManager()
    undo.lock()
    try:
        names.addNewByName(PASSING, "$A$1", CellAddress(), 0)
        names.removeByName(PASSING)
    finally:
        undo.unlock()
    book.setModified(modified)


g_ImplementationHelper = unohelper.ImplementationHelper()  # noqa: N816 - the office looks for this name
g_ImplementationHelper.addImplementation(PlainNamesJob, IMPLEMENTATION, (SERVICE,))
