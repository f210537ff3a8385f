"""Stand-ins for pywin32, so that the real Windows half of xlwings runs on any system.

Only what xlwings asks for at import and on a call from a cell; values cross as pywin32 lets them cross (its
documentation of VARIANT conversion, and oleargs.cpp): errors are integers, arrays are tuples, None becomes Null,
and what has no VARIANT is refused.
"""

from __future__ import annotations

import atexit
import ctypes
import datetime as dt
import importlib
import sys
import traceback
import types
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

__all__ = ["EMPTY", "MISSING", "ComServer", "Error", "generated_vba", "returned", "taken", "windows_half"]

_MISSING_CODE = -2147352572
"""DISP_E_PARAMNOTFOUND."""


class _Sign:
    def __init__(self, name: str) -> None:
        self.name = name

    def __repr__(self) -> str:
        return self.name


EMPTY, MISSING, NULL = _Sign("Empty"), _Sign("Missing"), _Sign("Null")


@dataclass(frozen=True)
class Error:
    """An error value as VBA holds it: CVErr(number)."""

    number: int


# --- values across COM ------------------------------------------------------------------------------------------


def taken(value: Any) -> Any:
    """A value of VBA as Python is handed it."""
    if value is EMPTY or value is NULL:
        return None
    if value is MISSING:
        return _MISSING_CODE
    if isinstance(value, Error):
        return value.number - 2146828288
    if isinstance(value, list):
        return tuple(taken(one) for one in value)
    assert value is None or isinstance(value, str | bool | int | float), type(value)
    return value


def returned(value: Any) -> Any:
    """A value of Python as VBA gets it; TypeError where pywin32 has one."""
    if value is None:
        return NULL
    if isinstance(value, bool | str | float):
        return value
    if isinstance(value, int):
        if not -(2**31) <= value < 2**31:
            raise TypeError(f"{value} does not fit into the integers of VBA")
        return value
    if isinstance(value, list | tuple):
        return [returned(one) for one in value]
    raise TypeError(f"Objects of type '{type(value).__name__}' can not be converted to a COM VARIANT")


class ComServer:
    """The object that Excel talks to: the real XLPython of xlwings behind the conversions."""

    def __init__(self) -> None:
        windows_half()
        self._object = importlib.import_module("xlwings.com_server").XLPython()

    def call(self, method: str, *values: Any) -> Any:
        """One call; an exception becomes the text that pywin32 makes of it."""
        try:
            answer = getattr(self._object, method)(*[taken(value) for value in values])
            if isinstance(answer, tuple):  # pywin32 reads a tuple as a result and values by reference
                answer = answer[0]
            return returned(answer)
        except Exception as bug:
            raise RuntimeError("Unexpected Python Error: " + "".join(traceback.format_exception(bug))) from bug


# --- the modules ------------------------------------------------------------------------------------------------


class _ComError(Exception):
    def __init__(self, hresult: int = 0, text: str = "", excepinfo: Any = None, argerror: Any = None) -> None:
        super().__init__(hresult, text, excepinfo, argerror)
        self.hresult = hresult


class _Guid(str):
    __slots__ = ()

    def __new__(cls, text: object) -> _Guid:
        return super().__new__(cls, str(text).upper())


class _Anything:
    """Takes any attribute and any call; only looked at while xlwings is imported."""

    def __getattr__(self, name: str) -> Any:
        if name.startswith("__"):
            raise AttributeError(name)
        return _Anything()

    def __call__(self, *args: object, **named: object) -> Any:
        return 0


class _Dispatch:
    """A late-bound object: here the attributes of a Python object."""

    def __init__(self, target: Any) -> None:
        self._target = target

    def __getattr__(self, name: str) -> Any:
        return getattr(self._target, name)


def _dispatch(target: Any, *_: object, **__: object) -> Any:
    return target if isinstance(target, _Dispatch) else _Dispatch(target)


def _unwrap(value: Any) -> Any:
    raise ValueError("not an object of Python")


def _module(name: str, **members: Any) -> None:
    module = types.ModuleType(name)
    module.__dict__.update(members)
    module.__file__ = f"<stand-in for {name}>"
    sys.modules[name] = module
    parent, _, leaf = name.rpartition(".")
    if parent:
        setattr(sys.modules[parent], leaf, module)


def _pywin32() -> None:
    base = {"CDispatch": _Dispatch, "Dispatch": _dispatch, "DispatchEx": _dispatch}
    classes = {name: type(name, (), {}) for name in ("DispatchBaseClass", "CoClassBaseClass")}
    _module(
        "pywintypes", com_error=_ComError, error=_ComError, IID=_Guid, TimeType=type("TimeType", (dt.datetime,), {})
    )
    _module(
        "pythoncom", com_error=_ComError, ole_error=_ComError, IID_IDispatch="IDispatch", CoInitialize=lambda: None,
        IID_IEnumVARIANT="IEnumVARIANT", TypeIIDs={"IDispatch": type("PyIDispatch", (), {})}, VT_ERROR=10,
    )  # fmt: skip
    for name in ("win32api", "win32con", "win32gui", "win32event", "win32process"):
        _module(name, __getattr__=lambda member: getattr(_Anything(), member))
    _module("win32timezone", TimeZoneInfo=types.SimpleNamespace(utc=lambda: dt.UTC))
    _module("win32com")
    _module("win32com.client", **base, **classes)
    _module("win32com.server")
    _module("win32com.server.dispatcher")
    _module("win32com.server.policy", DefaultPolicy=type("DefaultPolicy", (), {}))
    _module("win32com.server.exception", COMException=_ComError)
    _module("win32com.server.util", wrap=lambda target, iid=None: target, unwrap=_unwrap)


@cache
def windows_half() -> types.ModuleType:
    """The real `xlwings.udfs`, with the real decorators in place on `xlwings`, as on Windows."""
    _pywin32()
    libraries = {"windll": _Anything(), "oledll": _Anything(), "PyDLL": lambda path: _Anything()}
    before = {name: getattr(ctypes, name, None) for name in libraries}
    for name, library in libraries.items():
        setattr(ctypes, name, library)
    try:
        import xlwings

        windows = importlib.import_module("xlwings._xlwindows")
    finally:
        for name, value in before.items():
            if value is None:
                delattr(ctypes, name)
            else:
                setattr(ctypes, name, value)
    atexit.unregister(windows.cleanup)  # it would look for processes of Excel
    engine = xlwings.Engine(impl=windows.engine)
    xlwings.engines.add(engine)
    xlwings.engines.active = engine
    udfs = importlib.import_module("xlwings.udfs")
    xlwings.func, xlwings.arg, xlwings.ret = udfs.xlfunc, udfs.xlarg, udfs.xlret
    sys.modules.pop("lowpoint.faces.excel_addin.udfs", None)  # it may have been made without the decorators
    return udfs


# --- the generator of VBA ---------------------------------------------------------------------------------------


class _Components:
    def __init__(self) -> None:
        self.text = ""

    def __call__(self, name: str) -> str:
        raise _ComError(-2147352567, f"no module {name}")

    def Remove(self, component: object) -> None:
        raise AssertionError("there is nothing to remove")

    def Import(self, path: str) -> None:
        self.text = Path(path).read_text(encoding="utf-8")


def generated_vba(module: str) -> tuple[str, list[tuple[str, dict[str, Any]]]]:
    """What the real generator of xlwings writes for a module of functions, and the wizard texts that it sets."""
    told: list[tuple[str, dict[str, Any]]] = []
    components = _Components()
    application = types.SimpleNamespace(
        Version="16.0", MacroOptions=lambda macro, **options: told.append((macro, options))
    )
    book = types.SimpleNamespace(
        Name="lowpoint.xlam", VBProject=types.SimpleNamespace(VBComponents=components), Application=application
    )
    udfs = windows_half()
    udfs.get_udf_module(module, None)
    udfs.import_udfs(module, _Book(book))
    return components.text, told


class _Book(_Dispatch):
    """A book without worksheets: the generator looks through them for embedded code."""

    def __bool__(self) -> bool:
        return False
