"""The add-in's functions as VBA and xlwings see them: names that VBA accepts, wizard texts, what both sides compare."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from keyword import iskeyword

from lowpoint import __version__
from lowpoint.faces.calc_addin.signatures import fingerprint, signatures
from lowpoint.registry import functions

__all__ = ["MODULE", "NAME", "Argument", "Outline", "maker", "outlines"]

NAME = "lowpoint"
"""The add-in is this name with `.xlam`."""
MODULE = "lowpoint.faces.excel_addin.udfs"
"""The Python module that the add-in asks xlwings for."""

_LONGEST = 255
"""Characters that Excel takes for a description."""
_MOST = 60
"""Arguments that a function of a worksheet can have."""

_WORDS = """
    abs addressof alias and any append array as attribute base begin binary boolean byref byte byval call case
    cbool cbyte ccur cdate cdbl cdec cint circle clng clnglng clngptr close compare const csng cstr currency cvar cverr
    database date debug decimal declare defbool defbyte defcur defdate defdbl defint deflng deflnglng deflngptr defobj
    defsng defstr defvar dim do doevents double each else elseif empty end endif enum eqv erase error event exit
    explicit false fix for friend function get global gosub goto if imp implements in input inputb instr int integer is
    lbound len lenb let lib like line local lock long longlong longptr loop lset me mid midb mod module new next not
    nothing null object on open option optional or output paramarray preserve print private property pset ptrsafe public
    put raiseevent random randomize read redim rem resume return rset scale seek select set sgn shared single spc
    static step stop string sub tab text then to true type typeof ubound unlock until variant wend while width with
    withevents write xor
"""
"""Words that VBA does not take for an argument (its language specification, section 3.3.5.2)."""
_RESERVED = frozenset(_WORDS.split())


@dataclass(frozen=True, slots=True)
class Argument:
    """One argument: its name in VBA and the help that the wizard shows; ``rest`` takes any number of values."""

    name: str
    text: str
    rest: bool = False


@dataclass(frozen=True, slots=True)
class Outline:
    """One function: its group, and what the wizard says of it."""

    name: str
    group: str
    text: str
    arguments: tuple[Argument, ...]


def maker() -> str:
    """What made an add-in, in one word: version and the fingerprint of names and argument orders."""
    return f"{__version__} {fingerprint()}"


@cache
def outlines() -> tuple[Outline, ...]:
    """Every function of the registry, by name."""
    return tuple(_outline(one.name, one.text, [(a.name, a.text) for a in one.arguments]) for one in signatures())


def _outline(name: str, text: str, arguments: list[tuple[str, str]]) -> Outline:
    function = functions[name]
    if len(arguments) > _MOST:
        raise ValueError(f"{name} has {len(arguments)} arguments, more than the {_MOST} of a worksheet function")
    last = len(arguments) - 1
    told = tuple(
        Argument(_spelled(argument), _cut(help_), rest=function.variadic and place == last)
        for place, (argument, help_) in enumerate(arguments)
    )
    return Outline(name, function.group, _cut(text), told)


def _spelled(argument: str) -> str:
    """With a stroke where VBA or Python has the word for itself."""
    return argument + "_" if argument in _RESERVED or iskeyword(argument) else argument


def _cut(text: str) -> str:
    return text if len(text) <= _LONGEST else text[: _LONGEST - 3] + "..."
