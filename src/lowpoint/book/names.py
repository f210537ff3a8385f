"""Defined names, put in place of themselves: a formula then says all that it reads.

The engine drops names over OFFSET and some others; with every name replaced by its definition none is needed.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from .formulas import LONGEST, Call, Token, Unreadable, calls_in, column_ends, function_name, moved_column, tokenise
from .package import Package
from .refs import LAST_COLUMN, LAST_ROW, Row

__all__ = ["Names", "Place", "let_names", "names_of"]

DEEPEST_CHAIN = 20  # names that use names; deeper is a circle or an attack
_WORDS = {"TRUE", "FALSE"}


@dataclass(frozen=True, slots=True)
class Place:
    """Where a formula stands."""

    sheet: str
    row: int
    column: int


@dataclass(slots=True)
class Names:
    """The defined names of a workbook: definitions by sheet (folded, "" for the whole book) and folded name."""

    definitions: Mapping[tuple[str, str], str] = field(default_factory=dict)
    sheets: Mapping[str, str] = field(default_factory=dict)  # folded to true spelling

    def expand(self, tokens: Sequence[Token], place: Place) -> list[Token]:
        """The tokens with every defined name replaced by its definition, at this place.

        Raises Unreadable for a name that is not defined, belongs to another workbook, or defines itself.
        """
        if not any(t.kind in ("name", "away", "call") for t in tokens):
            return list(tokens)
        return self._expanded(tokens, place, place.sheet, 0)

    def _expanded(self, tokens: Sequence[Token], place: Place, scope: str, depth: int) -> list[Token]:
        if depth > DEEPEST_CHAIN:
            raise Unreadable("a defined name leads back to itself, or through too many others")
        bound = let_names(tokens)
        out: list[Token] = []
        for i, token in enumerate(tokens):
            if token.kind == "name" and token.text.upper() in _WORDS:
                out.append(Token("bool", token.text.upper()))
            elif token.kind == "name" and _within(bound.get(token.text.casefold()), i):
                out.append(Token("local", token.text))
            elif token.kind in ("name", "away"):
                out.extend(self._definition(token, place, scope, depth))
            else:
                out.append(token)
            if len(out) > LONGEST:
                raise Unreadable("its defined names unfold to too long a formula")
        return out

    def _definition(self, token: Token, place: Place, scope: str, depth: int) -> list[Token]:
        sheet, name = self._scoped(token, scope)
        text = self.definitions.get((sheet, name), self.definitions.get(("", name)))
        if text is None:
            raise Unreadable(f"the name {token.text!r} is not defined")
        read = [_placed(t, place) for t in tokenise(text.strip().removeprefix("="), 1)]
        inner = self._expanded(read, place, sheet or scope, depth + 1)
        return inner if _stands_alone(inner) else [Token("open", "("), *inner, Token("close", ")")]

    def _scoped(self, token: Token, scope: str) -> tuple[str, str]:
        if token.kind == "name":
            return scope.casefold(), token.text.casefold()
        prefix, _, name = token.text.rpartition("!")
        sheet = prefix[1:-1].replace("''", "'") if prefix.startswith("'") else prefix
        if sheet == "[0]":  # this workbook itself
            return "", name.casefold()
        if sheet.casefold() not in self.sheets:
            raise Unreadable(f"it reads {token.text}, which lies in another workbook or on several sheets at once")
        return sheet.casefold(), name.casefold()


def names_of(package: Package) -> Names:
    """The names of a workbook that formulas may use; the built-in ones (print areas, filters) are not for them."""
    titles = [sheet.title.casefold() for sheet in package.sheets]
    definitions = {}
    for name in package.defined_names:
        if not name.name.startswith("_xlnm.") and (name.sheet is None or name.sheet < len(titles)):
            scope = "" if name.sheet is None else titles[name.sheet]
            definitions[scope, name.name.casefold()] = name.text
    return Names(definitions, {sheet.title.casefold(): sheet.title for sheet in package.sheets})


def let_names(tokens: Sequence[Token]) -> dict[str, tuple[int, int]]:
    """The names that LET and LAMBDA bind, folded, and the token span within which each may stand."""
    if not any(t.kind == "call" and function_name(t.text[:-1]) in ("LET", "LAMBDA") for t in tokens):
        return {}
    bound: dict[str, tuple[int, int]] = {}
    for call in calls_in(tokens):
        for first, last in _binders(call):
            words = [t for t in tokens[first:last] if t.kind != "blank"]
            if len(words) == 1 and words[0].kind == "name":
                name = words[0].text.casefold()
                old = bound.get(name, (call.start, call.stop))
                bound[name] = (min(old[0], call.start), max(old[1], call.stop))
    return bound


def _within(span: tuple[int, int] | None, place: int) -> bool:
    return span is not None and span[0] <= place < span[1]


def _binders(call: Call) -> list[tuple[int, int]]:
    kind = function_name(call.name)
    if kind == "LET":
        return call.args[:-1:2]
    return call.args[:-1] if kind == "LAMBDA" else []


def _placed(token: Token, place: Place) -> Token:
    """A reference of a definition, which is stored as seen from A1, as seen from the cell that uses the name."""
    if token.ref is None:
        return token
    ref = token.ref
    if (ref.r1, ref.r2) != (Row(False, 1), Row(False, LAST_ROW)):
        ref = ref._replace(r1=_wrapped(ref.r1), r2=_wrapped(ref.r2))
    if (ref.c1, ref.c2) != (1, LAST_COLUMN):
        c1, c2 = ((moved_column(end, place.column - 1) - 1) % LAST_COLUMN + 1 for end in column_ends(token))
        ref = ref._replace(c1=c1, c2=c2)
    return Token("ref", "", ref)


def _wrapped(row: Row) -> Row:
    """ "The row above" is stored as the sheet's last row, counted from A1."""
    return Row(True, row.n - LAST_ROW) if row.relative and row.n > LAST_ROW // 2 else row


def _stands_alone(tokens: Sequence[Token]) -> bool:
    """True where parentheses would add nothing (one reference, one constant) or do harm (one call)."""
    solid = [t for t in tokens if t.kind != "blank"]
    if len(solid) <= 1:
        return True
    if solid[0].kind != "call":
        return False
    return calls_in(solid)[0].stop == len(solid)
