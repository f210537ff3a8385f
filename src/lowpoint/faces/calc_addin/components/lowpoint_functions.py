"""The component that the office calls for every LP_ and LPU_ function of a cell."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import uno
import unohelper
from com.sun.star.lang import XServiceInfo
from lowpoint_office.generated import FINGERPRINT, METHODS, VERSION
from lowpoint_office.link import Link
from lowpoint_office.settings import FOLDER
from org.lowpoint import XFunctions  # found through the extension's own type library

IMPLEMENTATION = "org.lowpoint.FunctionsImplementation"
SERVICE = "org.lowpoint.Functions"


class Functions(unohelper.Base, XServiceInfo, XFunctions):
    """One object serves every cell; its methods are added below, from the list made with the add-in."""

    def __init__(self, context: Any, *arguments: Any) -> None:
        self.link = Link(_folder(context), VERSION, FINGERPRINT)

    def getImplementationName(self) -> str:  # noqa: N802
        return IMPLEMENTATION

    def supportsService(self, name: str) -> bool:  # noqa: N802
        return name == SERVICE

    def getSupportedServiceNames(self) -> tuple[str, ...]:  # noqa: N802
        return (SERVICE,)


def _folder(context: Any) -> Path:
    """Where this profile keeps the add-in's settings and log."""
    paths = context.ServiceManager.createInstanceWithContext("com.sun.star.util.PathSubstitution", context)
    return Path(uno.fileUrlToSystemPath(paths.substituteVariables("$(user)", True))) / FOLDER


def _method(name: str) -> Any:
    def method(self: Functions, *arguments: Any) -> Any:
        return self.link.call(name, arguments)

    return method


for _name, _function in METHODS.items():
    setattr(Functions, _name, _method(_function))

g_ImplementationHelper = unohelper.ImplementationHelper()  # noqa: N816 - the office looks for this name
g_ImplementationHelper.addImplementation(Functions, IMPLEMENTATION, (SERVICE,))
