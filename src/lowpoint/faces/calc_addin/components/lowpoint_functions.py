"""The component that the office calls for every LP_ and LPU_ function of a cell."""
# mypy: disable-error-code="import-not-found,misc"
# What is imported here is there in the office alone.

from __future__ import annotations

from functools import lru_cache
from typing import Any

import uno
import unohelper
from com.sun.star.lang import XServiceInfo
from com.sun.star.sheet import ResultEvent, XVolatileResult
from lowpoint_office.generated import METHODS
from lowpoint_office.link import shared_link
from org.lowpoint import XFunctions  # found through the extension's own type library

IMPLEMENTATION = "org.lowpoint.FunctionsImplementation"
SERVICE = "org.lowpoint.Functions"
KEPT = 256


class Functions(unohelper.Base, XServiceInfo, XFunctions):
    """One object serves every cell; its methods are added below, from the list made with the add-in."""

    def __init__(self, context: Any, *arguments: Any) -> None:
        self.link = shared_link(context)

    def getImplementationName(self) -> str:  # noqa: N802
        return IMPLEMENTATION

    def supportsService(self, name: str) -> bool:  # noqa: N802
        return name == SERVICE

    def getSupportedServiceNames(self) -> tuple[str, ...]:  # noqa: N802
        return (SERVICE,)


class Rows(unohelper.Base, XVolatileResult):
    """An answer of several cells. Left to itself the bridge makes a sequence of sequences of rows, which Calc does
    not take; the event of a volatile result may say the type that it does take. This result never changes."""

    def __init__(self, rows: tuple[tuple[Any, ...], ...]) -> None:
        self.event = ResultEvent()
        self.event.Source = self
        self.event.Value = uno.Any("[][]any", rows)

    def addResultListener(self, listener: Any) -> None:  # noqa: N802
        listener.modified(self.event)

    def removeResultListener(self, listener: Any) -> None:  # noqa: N802
        """Nothing is kept of a listener."""


@lru_cache(KEPT)
def _rows(rows: tuple[tuple[Any, ...], ...]) -> Rows:
    """Equal answers share one result: Calc keeps a listener for each that it ever saw."""
    return Rows(rows)


def _method(name: str) -> Any:
    def method(self: Functions, *arguments: Any) -> Any:
        answer = self.link.call(name, arguments)
        return _rows(answer) if type(answer) is tuple else answer

    return method


for _name, _function in METHODS.items():
    setattr(Functions, _name, _method(_function))

g_ImplementationHelper = unohelper.ImplementationHelper()  # noqa: N816 - the office looks for this name
g_ImplementationHelper.addImplementation(Functions, IMPLEMENTATION, (SERVICE,))
