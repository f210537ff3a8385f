"""Excel as far as the add-in needs it: the VBA of a built add-in, run over the real call path of xlwings."""

from __future__ import annotations

import re
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import pyopenvba.interpreter as vba
from pyopenvba import ExcelFile
from pyopenvba.apps.excel import ExcelApplication, Range
from pyopenvba.apps.excel._bridge import ExcelBridge
from pyopenvba.apps.excel._model import Application, Workbook
from pyopenvba.interpreter._objects import MemberSpec
from pyopenvba.interpreter._values import error

from faces.excel.standins import EMPTY, MISSING, ComServer, Error
from lowpoint.faces.excel_addin.values import NUMBERS
from lowpoint.problems import CellError

__all__ = ["Excel", "Library", "modules_of"]

_CELLS = {number: cell for cell, number in NUMBERS.items()}

_STANDINS = """Option Explicit
Public Function LpLoad(ByVal path As String) As Long
    LpLoad = Library.Load(path)
End Function
Public Function LpActivate(ByRef result As Variant, ByVal command As String, ByVal mode As Long) As Long
    Set result = Library.Activate(command)
End Function
"""
"""In the place of the two functions of libraries that the link declares."""


def modules_of(path: Path) -> dict[str, str]:
    """The VBA of an add-in, by module."""
    with ExcelFile(path) as book:
        return {name: book.get_module(name).replace("\r\n", "\n") for name in book.module_names()}


class Library(vba.VBAObject):
    """The library of xlwings and the server behind it; a test sets ``folder`` and ``dead``."""

    vba_type_name = "Library"

    def __init__(self) -> None:
        self.folder = "C:\\env\\"
        self.commands: list[str] = []
        self.loaded: list[str] = []
        self.calls = 0
        self.dead = 0
        self._server = ComServer()

    @vba.method
    def Load(self, path: str) -> int:
        self.loaded.append(path)
        return 1 if path.rpartition("\\")[0] + "\\" == self.folder else 0

    @vba.method
    def Activate(self, command: str) -> vba.VBAObject:
        self.commands.append(command)
        return _Server(self)

    def call(self, *values: Any) -> Any:
        self.calls += 1
        if self.dead:
            self.dead -= 1
            raise error(462, "The remote server machine does not exist or is unavailable")
        try:
            return self._server.call("CallUDF", *values)
        except RuntimeError as bug:
            raise error(-2147467259, str(bug)) from None


class _Server(vba.VBAObject):
    vba_type_name = "XLPython"

    def __init__(self, library: Library) -> None:
        self._library = library

    @vba.method
    def CallUDF(self, module: str, name: str, arguments: Any, book: Any, caller: Any) -> Any:
        return _to_vba(self._library.call(*map(_from_vba, (module, name, arguments, book, caller))))


class _Bridge(ExcelBridge):
    library: Library

    def global_object(self, name: str) -> object:
        return self.library if name == "library" else super().global_object(name)


class Excel:
    """A workbook, and the functions of a built add-in callable as cells call them."""

    def __init__(self, addin: Path) -> None:
        self.modules = modules_of(addin)
        self.library = Library()
        self.app = ExcelApplication()
        self.app.add_workbook()
        bridge = _Bridge(self.app.application)
        bridge.library = self.library
        self.app.interpreter.host = bridge
        self.app.add_module(_STANDINS, name="StandIns")
        for name, text in self.modules.items():
            if name.startswith("Lowpoint"):
                self.app.add_module(_without_libraries(text), name=name)

    def put(self, corner: str, rows: Sequence[Sequence[Any]]) -> str:
        """Write cells; gives the address of their range."""
        column, row = re.fullmatch(r"([A-Z]+)(\d+)", corner).groups()  # type: ignore[union-attr]
        sheet = self.app.sheet(1).sheet
        first = sheet.vba_get("Range", [corner])
        last = f"{_column(_number(column) + len(rows[0]) - 1)}{int(row) + len(rows) - 1}"
        for down, cells in enumerate(rows):
            for right, cell in enumerate(cells):
                first.vba_get("Offset", [down, right]).vba_set("Value2", _cell_to_vba(cell))
        return f"{corner}:{last}"

    def range(self, address: str) -> Range:
        found = self.app.sheet(1).sheet.vba_get("Range", [address])
        assert isinstance(found, Range)
        return found

    def run(self, name: str, *arguments: Any) -> Any:
        """The answer of one function, as a cell or rows of cells; ranges are given as :meth:`range`."""
        given = [one if isinstance(one, Range) else _cell_to_vba(one) for one in arguments]
        return _cell_from_vba(self.app.run(name, *given))

    def run_macro(self, name: str) -> Any:
        """The answer of a procedure that takes nothing."""
        return self.app.run(name)

    def replace(self, module: str, text: str) -> None:
        """Another text for a module."""
        self.app.add_module(_without_libraries(text), name=module)

    def described(self) -> dict[str, tuple[str, str, list[str]]]:
        """What the add-in tells the function wizard when it opens: text, category and help by function."""
        told: dict[str, tuple[str, str, list[str]]] = {}
        hidden = [True]

        def macro_options(_: Any, macro: str, description: str, category: str, help_: Any) -> None:
            assert not hidden[0], "Excel takes texts for the macros of a book that can be seen only"
            assert macro.startswith("'")
            assert "'!" in macro
            told[macro.rpartition("!")[2]] = (str(description), str(category), _rows(help_, str))

        def hide(_: Any, value: Any) -> None:
            hidden[0] = bool(value)

        names = ("Macro", "Description", "Category", "ArgumentDescriptions")
        Application.vba_add_member(MemberSpec("MacroOptions", "method", macro_options, parameters=names))
        Workbook.vba_add_member(MemberSpec("IsAddin", "property", lambda _: hidden[0], hide))
        try:
            self.run_macro("LpDescribe")
        finally:
            del Application._vba_members["macrooptions"], Workbook._vba_members["isaddin"]
        assert hidden[0], "the add-in stays in sight"
        return told


def _without_libraries(text: str) -> str:
    """Declarations of library functions left out, for the stand-ins of their names to be called."""
    text = re.sub(r"(?m)^Private Declare (?:.*_\n)*.*\n", "", text)
    return text.replace("StrPtr(", "(")


# --- values -----------------------------------------------------------------------------------------------------


def _from_vba(value: Any) -> Any:
    """A value of the interpreter as the stand-ins of COM take it."""
    if value is vba.EMPTY or value is vba.NOTHING or value is vba.NULL:
        return EMPTY
    if value is vba.MISSING:
        return MISSING
    if isinstance(value, vba.VBAErrorValue):
        return Error(value.number)
    if isinstance(value, vba.VBAArray):
        return _rows(value, _from_vba)
    if isinstance(value, vba.VBAInt):
        return int(value)
    assert isinstance(value, str | bool | float), type(value)
    return value


def _rows(array: Any, each: Any) -> list[Any]:
    (low, high), *rest = array.bounds
    if not rest:
        return [each(array.get([place])) for place in range(low, high + 1)]
    ((left, right),) = rest
    return [[each(array.get([row, column])) for column in range(left, right + 1)] for row in range(low, high + 1)]


def _to_vba(value: Any) -> Any:
    if not isinstance(value, list):
        return value
    if value and isinstance(value[0], list):
        array = vba.VBAArray([(0, len(value) - 1), (0, len(value[0]) - 1)])
        for row, cells in enumerate(value):
            for column, cell in enumerate(cells):
                array.set([row, column], cell)
        return array
    array = vba.VBAArray([(0, len(value) - 1)])
    for place, cell in enumerate(value):
        array.set([place], cell)
    return array


def _cell_to_vba(cell: Any) -> Any:
    if cell is None:
        return vba.EMPTY
    if isinstance(cell, CellError):
        return vba.VBAErrorValue(NUMBERS[cell])
    if isinstance(cell, list):
        return _to_vba([[_cell_to_vba(one) for one in row] for row in cell])
    return cell


def _cell_from_vba(value: Any) -> Any:
    if isinstance(value, vba.VBAErrorValue):
        return _CELLS[value.number]
    if isinstance(value, vba.VBAArray):
        value = _rows(value, lambda one: one)
    if isinstance(value, list):
        rows = value if value and isinstance(value[0], list) else [value]
        return [[_cell_from_vba(cell) for cell in row] for row in rows]
    return value


def _number(letters: str) -> int:
    number = 0
    for letter in letters:
        number = number * 26 + ord(letter) - 64
    return number


def _column(number: int) -> str:
    letters = ""
    while number:
        number, rest = divmod(number - 1, 26)
        letters = chr(65 + rest) + letters
    return letters
