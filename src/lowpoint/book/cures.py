"""Formulas rewritten so that the engine gives what a spreadsheet program gives; what cannot be cured is blocked.

:func:`prepare` takes a formula as it would be loaded (names replaced, tables as A1, ``@`` set) and gives the text to
load. Its call-backs are in :mod:`lowpoint.book.helpers`; ``lifting.register`` them before evaluating. Each rule
carries the id of the known difference in :mod:`lowpoint.book.probes` that it meets.

Source of the comparison and of the zero of a difference: spreadsheet programs count two numbers as equal when they
agree in 15 significant digits (IEEE 754 doubles shown with 15: Microsoft support article 78113), and a formula whose
last step is a sum or difference gives 0 when its two sides agree so (common practice; from memory).
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from itertools import pairwise

from lowpoint.registry import functions

from .engine import knows, unreadable
from .expression import (
    Atom,
    BlockedError,
    Call,
    Expression,
    Group,
    Operator,
    Piece,
    bare_name,
    is_cell,
    is_range,
    parse,
)
from .formulas import LONGEST, lp_name
from .helpers import HELPERS, PREFIX
from .kinds import kind_of, makes_array, scalar_places
from .padding import ELEMENTWISE, FIRST_STAND_IN, answered, common, padded, sizes_matter
from .rules_text import ruled

__all__ = ["Prepared", "Writer", "prepare"]

_OURS = re.compile("lpu?[_.]|lowpoint", re.IGNORECASE)
_COMPARISONS = frozenset({"=", "<>", "<", ">", "<=", ">="})
_EQUAL_IS_TRUE = frozenset({"=", "<=", ">="})
_PLAIN = frozenset({"literal", "zero", "whole", "rounded"})


@dataclass(frozen=True, slots=True)
class Prepared:
    """What to load instead of a formula, the known differences it meets, and why it must keep its value, if so."""

    text: str
    met: tuple[str, ...] = ()
    blocked: str | None = None


class Writer:
    """Writes one formula anew, noting which differences it meets."""

    def __init__(self, hiding: int = 0) -> None:
        self.met: dict[str, None] = {}
        self.names: dict[str, Piece] = {}
        self.hiding = hiding  # how rows of the workbook are hidden: 1 by hand, 2 by a filter

    def note(self, probe: str) -> None:
        self.met[probe] = None

    def whole(self, items: Expression) -> Piece:
        """A whole formula: here, and only here, a last sum or difference comes out as 0 when its sides agree."""
        if any(isinstance(i, Operator) and i.place == "infix" and i.text in {"&", *_COMPARISONS} for i in items):
            return self.expression(items)
        at = [k for k, i in enumerate(items) if isinstance(i, Operator) and i.place == "infix" and i.text in "+-"]
        if not at:
            return self.expression(items)
        left, right = self._plain(items[: at[-1]]), self._plain(items[at[-1] + 1 :])
        operator = items[at[-1]]
        assert isinstance(operator, Operator)
        if {left.kind, right.kind} & {"zero", "text", "logical"} or left.kind == right.kind == "literal":
            return self._plain(items)
        self.note("difference-snap")
        text = self._made_fit([left, right], lambda two: _snapped(two[0], operator.text, two[1]))
        return Piece(text, left.array or right.array, "number", *common([left, right]))

    def expression(self, items: Expression) -> Piece:
        """Comparisons bind weakest and from the left, then ``&``."""
        parts, operators = _split(items, _COMPARISONS)
        result = self._joined(parts[0])
        for operator, part in zip(operators, parts[1:], strict=True):
            result = self._compared(result, operator, self._joined(part))
        return result

    def _compared(self, left: Piece, operator: str, right: Piece) -> Piece:
        array = left.array or right.array
        if {left.kind, right.kind} & {"text", "logical", "zero"} or (left.kind in _PLAIN and right.kind in _PLAIN):
            text = self._made_fit([left, right], lambda two: f"{two[0].text}{operator}{two[1].text}")
        else:
            self.note("equality-15-digits")
            text = self._made_fit([left, right], lambda two: _equal(two[0], operator, two[1]))
        return Piece(text, array, "logical", *common([left, right]))

    def _made_fit(self, pieces: Sequence[Piece], write: Callable[[Sequence[Piece]], str]) -> str:
        """What ``write`` makes of the pieces of one operation, arrays of unequal size filled up first."""
        fit = padded(pieces, write)
        if fit is None:
            return write(pieces)
        self.note("arrays-of-unequal-size")
        return fit

    def _joined(self, items: Expression) -> Piece:
        parts, _ = _split(items, frozenset({"&"}))
        if len(parts) == 1:
            return self._plain(items)
        pieces = [self._plain(part) for part in parts]
        text = self._made_fit(pieces, lambda fit: "&".join(self.as_text(piece).text for piece in fit))
        return Piece(text, any(piece.array for piece in pieces), "text", *common(pieces))

    def as_text(self, piece: Piece) -> Piece:
        """A piece that text is made of: numbers in at most 15 digits."""
        if piece.kind in {"text", "logical", "zero", "whole", "literal"}:
            return piece
        self.note("number-text-15-digits")
        if piece.array:
            return Piece(f"{PREFIX}TEXT15({piece.text})", True, "text")
        return Piece(
            _bound(piece, lambda x: f"IF(ISNUMBER({x}),IFERROR(ROUND({x},14-INT(LOG10(ABS({x})))),{x}+0),{x})")
        )

    def _plain(self, items: Expression) -> Piece:
        """Arithmetic and references, written as they stand."""
        self._refuse_sets(items)
        pieces = [self._item(item) for item in items]
        operators = [item for item in items if isinstance(item, Operator)]
        text = "".join(piece.text for piece in pieces)
        array = any(piece.array for piece in pieces)
        if any(operator.text == ":" for operator in operators):
            return Piece(text, True, "reference")
        if operators and operators[0].text == "@":
            return Piece(text, False, "any")
        if any(operator.text == "#" for operator in operators):
            return Piece(text, True, "any")
        if not operators:
            return replace(pieces[0], text=text) if pieces else Piece("")
        signs = all(operator.place == "prefix" for operator in operators) and len(pieces) == len(operators) + 1
        text = self._made_fit(pieces, lambda fit: "".join(piece.text for piece in fit))
        kind = pieces[-1].kind if signs and pieces[-1].kind in _PLAIN else "number"
        return Piece(text, array, kind, *common(pieces))

    def _refuse_sets(self, items: Expression) -> None:
        for before, item in pairwise(items):
            if isinstance(item, Operator) and item.place == "infix":
                if item.text.isspace():
                    raise BlockedError("intersection", "uses the intersection of two ranges")
                if item.text == ",":
                    raise BlockedError("union", "uses the union of ranges")
                known = {"INDEX", "OFFSET", "INDIRECT"}
                if item.text == ":" and isinstance(before, Call) and bare_name(before.name) not in known:
                    raise BlockedError("range-of-calls", f"builds a range from {bare_name(before.name)}")

    def _item(self, item: Atom | Operator | Group | Call) -> Piece:
        if isinstance(item, Operator):
            return Piece(item.text)
        if isinstance(item, Group):
            inside = self.expression(item.inside)
            return replace(inside, text=f"({inside.text})", size=common([inside])[0])
        if isinstance(item, Call):
            return self.call(item)
        return self._atom(item)

    def _atom(self, atom: Atom) -> Piece:
        if atom.kind == "range":
            return self._reference(atom.text)
        if atom.kind == "number":
            return Piece(atom.text, False, "zero" if float(atom.text) == 0.0 else "literal")
        return Piece(atom.text, atom.kind == "array", atom.kind if atom.kind in {"text", "logical"} else "any")

    def _reference(self, text: str) -> Piece:
        sheet = text.rpartition("!")[0]
        if "[" in sheet:
            raise BlockedError("external-reference", "reads another workbook, and no link is ever followed")
        if ":" in sheet:
            raise BlockedError("sheet-span", "reads the same cells of several sheets")
        if "[" in text:
            raise BlockedError("table-reference", "uses a table column that the recalculator could not place")
        if text.lower() in self.names:
            return self.names[text.lower()]
        return Piece(text, is_range(text), "reference" if is_cell(text) or is_range(text) else "any")

    def call(self, call: Call) -> Piece:
        """A call, its arguments first; a rule of its name may write it anew."""
        piece = self._call(call, bare_name(call.name))
        if len(piece.text) > LONGEST:  # what is written twice at every level grows beyond all bounds
            raise BlockedError("unreadable", "grows too long when it is made ready for the recalculator's engine")
        return piece

    def _call(self, call: Call, name: str) -> Piece:
        if name == "LET":
            return self._let(call)
        if name == "LAMBDA":
            raise BlockedError("lambda", "uses LAMBDA, which the recalculator's engine does not have")
        pieces = [self.expression(argument) if argument else None for argument in call.arguments]
        ours = lp_name(call.name) if _OURS.search(call.name) else None
        if ours is not None:
            return answered(pieces, _written(call.name, pieces), functions[ours].column)
        if name not in HELPERS and not knows(name):
            raise BlockedError("unknown-function", f"uses {name}, which the recalculator's engine does not have")
        done = ruled(self, name, pieces)
        if done is not None:
            return done
        return self.lifted(name, call.name, pieces)

    def plain(self, name: str, pieces: Sequence[Piece | None]) -> Piece:
        """A call of the engine's own function with other arguments than were written."""
        return self.lifted(name, name, pieces)

    def lifted(self, name: str, stored: str, pieces: Sequence[Piece | None]) -> Piece:
        """A call as it stands, or over ranges where the function takes single values."""
        places, possible = scalar_places(name, len(pieces))
        if not any(piece is not None and piece.array for place in places if (piece := pieces[place])):
            if name not in ELEMENTWISE or pieces[0] is None or not pieces[0].array or None in pieces:
                return Piece(_written(stored, pieces), makes_array(name, pieces), kind_of(name))
            given = [piece for piece in pieces if piece is not None]
            return Piece(self._made_fit(given, lambda fit: _written(stored, fit)), True, "any", *common(given))
        if not possible or any(piece is None for piece in pieces):
            raise BlockedError("range-for-single-value", f"gives {name} a range where it takes a single value")
        return self.over_cells(name, pieces, kind_of(name))

    def over_cells(self, name: str, pieces: Sequence[Piece | None], kind: str) -> Piece:
        """A call for every combination of the single values in its ranges."""
        self.note("single-value-over-range")
        size = common(pieces[place] for place in scalar_places(name, len(pieces))[0])
        return Piece(f'{PREFIX}LIFT("{name}",{_arguments(pieces)})', True, kind, *size)

    def bound(self, piece: Piece, write: Callable[[str], str]) -> str:
        """``write`` over the piece, computed once."""
        return _bound(piece, write)

    def helper(self, name: str, pieces: Iterable[Piece | None], array: bool = False, kind: str = "any") -> Piece:
        """A call of our own helper instead."""
        given = list(pieces)
        loose = array and any(piece is not None and piece.loose for piece in given)
        return Piece(f"{PREFIX}{name}({_arguments(given)})", array, kind, None, loose)

    def _let(self, call: Call) -> Piece:
        names = call.arguments[:-1:2]
        if len(call.arguments) % 2 == 0 or any(len(name) != 1 or not isinstance(name[0], Atom) for name in names):
            raise BlockedError("unreadable", "LET is not given pairs of a name and a value, and what to work out")
        outer = dict(self.names)
        written = []
        for place, argument in enumerate(call.arguments):
            last = place == len(call.arguments) - 1
            if place % 2 == 0 and not last and len(argument) == 1 and isinstance(argument[0], Atom):
                written.append(argument[0].text)
                continue
            piece = self.expression(argument)
            written.append(piece.text)
            if not last:
                self.names[written[-2].lower()] = replace(piece, text=written[-2])
        self.names = outer
        return replace(piece, text=f"{call.name}({','.join(written)})")


def _arguments(pieces: Iterable[Piece | None]) -> str:
    return ",".join("" if piece is None else piece.text for piece in pieces)


def _written(name: str, pieces: Sequence[Piece | None]) -> str:
    return f"{name}({_arguments(pieces)})"


def _split(items: Expression, marks: frozenset[str]) -> tuple[list[Expression], list[str]]:
    parts: list[Expression] = [()]
    found = []
    for item in items:
        if isinstance(item, Operator) and item.place == "infix" and item.text in marks:
            found.append(item.text)
            parts.append(())
        else:
            parts[-1] += (item,)
    return parts, found


def _bound(piece: Piece, write: Callable[[str], str], name: str = "lp_a") -> str:
    """``write`` over the piece itself where it is one short word, else over a LET name for it."""
    if piece.kind in {"reference", "literal"} and not piece.array:
        return write(piece.text if piece.text[:1] not in "+-" else f"({piece.text})")
    return f"LET({name},{piece.text},{write(name)})"


def _both(left: Piece, right: Piece, write: Callable[[str, str], str]) -> str:
    return _bound(left, lambda x: _bound(right, lambda y: write(x, y), "lp_b"))


def _agree(x: str, y: str, array: bool) -> str:
    """Whether two numbers agree in 15 digits; in arrays, where only operators go cell by cell, to 1E-15 of x."""
    if array:
        return f"({x}-{y})^2<=(1E-15*{x})^2"
    return f"IFERROR(ABS({x}-{y})<5E-15*10^INT(LOG10(ABS({x}))),FALSE)"


def _numbers(x: str, y: str, array: bool) -> str:
    return f'({x}<"")*({y}<"")' if array else f"ISNUMBER({x})*ISNUMBER({y})"


def _equal(left: Piece, operator: str, right: Piece) -> str:
    verdict, array = "TRUE" if operator in _EQUAL_IS_TRUE else "FALSE", left.array or right.array

    def write(x: str, y: str) -> str:
        plain = f"{x}{operator}{y}"
        return f"IF({_numbers(x, y, array)},IF({_agree(x, y, array)},{verdict},{plain}),{plain})"

    return _both(left, right, write)


def _snapped(left: Piece, operator: str, right: Piece) -> str:
    array = left.array or right.array

    def write(x: str, y: str) -> str:
        plain, other = f"{x}{operator}{y}", y if operator == "-" else f"(-{y})"
        return f"IF({_numbers(x, y, array)},IF({_agree(x, other, array)},0,{plain}),{plain})"

    return _both(left, right, write)


_CELL_ROW = re.compile(r"(?<![\w.$])(\$?[A-Za-z]{1,3}\$?)(\d{1,7})(?![\w.(!])")
_STAND_IN = re.compile(r"104\d{4}")


def prepare(formula: str, hiding: int = 0) -> Prepared:
    """The text to load instead of ``formula``; formulas that differ only in their rows are worked out once.

    ``hiding`` says how rows of the workbook are hidden (hiding.Hiding), which some functions leave out.

    >>> prepare("=B2&$C$3").met
    ('number-text-15-digits',)
    """
    if _STAND_IN.search(formula) or sizes_matter(formula):
        return _prepared(formula, hiding)
    stand_ins: dict[str, str] = {}

    def stand_in(cell: re.Match[str]) -> str:
        return cell[1] + stand_ins.setdefault(cell[2], str(FIRST_STAND_IN + len(stand_ins)))

    done = _prepared(_CELL_ROW.sub(stand_in, formula), hiding)
    if done.blocked is not None:
        return replace(done, text=formula)
    rows = {number: row for row, number in stand_ins.items()}
    return replace(done, text=_STAND_IN.sub(lambda found: rows[found[0]], done.text))


@lru_cache(maxsize=65536)
def _prepared(formula: str, hiding: int) -> Prepared:
    trouble = unreadable(formula)
    if trouble is not None:
        return Prepared(formula, ("unreadable",), trouble)
    writer = Writer(hiding)
    try:
        return Prepared("=" + writer.whole(parse(formula)).text, tuple(writer.met))
    except BlockedError as stop:
        probe, reason = stop.args
        return Prepared(formula, (*writer.met, probe), reason)
    except RecursionError:
        return Prepared(formula, ("unreadable",), "is nested too deeply")
