"""Formula text: its tokens, its calls, and every spelling under which a file stores a Lowpoint function.

Source: ISO/IEC 29500-1, 18.17 (formula grammar); stored spellings: found by trial, see the developers' notes.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from difflib import get_close_matches
from typing import NamedTuple

from .refs import LAST_COLUMN, LAST_ROW, Ref, Row, column_letters, column_number, quoted

__all__ = [
    "DEEPEST",
    "LONGEST",
    "OWN_ROW",
    "Call",
    "Token",
    "Unreadable",
    "calls_in",
    "column_ends",
    "function_name",
    "lp_name",
    "moved_column",
    "shape_key",
    "shifted",
    "tokenise",
    "unknown_lp_name",
    "unprefixed",
    "written",
]

# Source of both limits: a spreadsheet program takes 8 192 characters and 64 levels; prefixes make stored text longer.
LONGEST = 32_768
DEEPEST = 100
OWN_ROW = "\x01"  # stands for the formula's own row number in the text that equal formulas of a column share

_WORD = r"[^\W\d]|[_\\]"
_SHEET = r"(?:'(?:[^']|'')*+'|(?!:)(?:\[[^\[\]]*+\])?+[\w.\\?]*+(?::[\w.\\?]++)?+)!"
_ROW = rf"(?:\d{{1,7}}|{OWN_ROW})"
_CELL = rf"\$?[A-Za-z]{{1,3}}\$?{_ROW}"
_BODY = rf"{_CELL}:{_CELL}|{_CELL}|\$?[A-Za-z]{{1,3}}:\$?[A-Za-z]{{1,3}}|\$?{_ROW}:\$?{_ROW}"
_END = rf"(?![\w.!\[({OWN_ROW}\\?])"
_SCANNER = re.compile(
    rf"""
      (?P<text>"(?:[^"]|"")*+")
    | (?P<call>(?P<call_at>{_SHEET})?(?P<call_name>(?:{_WORD})[\w.\\]*+)\()
    | (?P<ref>(?P<ref_at>{_SHEET})?(?P<ref_body>{_BODY}){_END})
    | (?P<error>(?:{_SHEET})?\#(?:NULL!|DIV/0!|VALUE!|REF!|NAME\?|NUM!|N/A|SPILL!|CALC!|FIELD!|BLOCKED!|CONNECT!
        |GETTING_DATA))
    | (?P<away>{_SHEET}(?:{_WORD})[\w.\\?]*+)
    | (?P<table>(?:(?:{_WORD})[\w.\\?]*+)?\[(?:[^\[\]']|'.|\[(?:[^\[\]']|'.)*+\])*+\])
    | (?P<number>(?:\d++\.?\d*+|\.\d++)(?:[Ee][+-]?\d++)?)
    | (?P<name>(?:{_WORD})[\w.\\?]*+)
    | (?P<braces>\{{(?:[^{{}}"]|"(?:[^"]|"")*+")*+\}})
    | (?P<blank>[\ \t\r\n]+)
    | (?P<op><=|>=|<>|[-+*/^&=<>%@\#:])
    | (?P<comma>[,;])
    | (?P<open>\()
    | (?P<close>\))
    """,
    re.VERBOSE | re.DOTALL,
)
_AFTER = re.compile(r"[ \t\r\n]+\(")
_CELL_PARTS = re.compile(rf"(\$?)([A-Za-z]{{1,3}})(\$?)({_ROW})")
_PREFIX = re.compile(r"(?:_xlfn|_xlws|_xll|_xludf)\.", re.IGNORECASE)
_SERVICE = "ORG.LOWPOINT.FUNCTIONS."
_LIKE_OURS = re.compile(r"LPU?[._][A-Z]")


class Unreadable(Exception):  # noqa: N818 - it is caught by its name, as a verdict on a formula
    """Formula text that cannot be read, or should not be; the message is the reason the report gives."""


class Token(NamedTuple):
    """A piece of a formula: its kind (a group of the scanner), its text, and what a reference means."""

    kind: str
    text: str
    ref: Ref | None = None


@dataclass(slots=True)
class Call:
    """A function call or a pair of parentheses (no ``name``): where it stands among the tokens and in what."""

    name: str
    start: int
    stop: int = 0
    args: list[tuple[int, int]] = field(default_factory=list)
    parent: int | None = None
    place: int = 0


def tokenise(text: str, row: int | None = None) -> list[Token]:
    """The tokens of a formula (without its equals sign).

    With ``row``, the row of the cell it stands in, plain row numbers are taken relative to it; without, every row
    number is fixed and OWN_ROW alone is relative. Raises Unreadable beyond the limits or at an unknown character.

    >>> [t.text for t in tokenise("LP_SIGMA(A5,'Feed water'!B5,1)", 5)]
    ['LP_SIGMA(', 'A5', ',', "'Feed water'!B5", ',', '1', ')']
    """
    if len(text) > LONGEST:
        raise Unreadable(f"the formula has {len(text)} characters; at most {LONGEST} are read")
    tokens: list[Token] = []
    place = 0
    while place < len(text):
        found = _SCANNER.match(text, place)
        if not found:
            raise Unreadable(f"the formula cannot be read at {text[place : place + 12]!r}")
        kind = found.lastgroup or ""
        kind = "call" if found["call"] else "ref" if found["ref"] else kind
        bracket = _AFTER.match(text, found.end()) if kind in ("name", "away") and lp_name(found[0]) else None
        if bracket:  # a blank before the bracket, which spreadsheet programs take away when the formula is typed
            tokens.append(Token("call", f"{found[0]}("))
        else:
            tokens.append(_reference(found, row) if kind == "ref" else Token(kind, found[0]))
        place = bracket.end() if bracket else found.end()
    return tokens


def _reference(found: re.Match[str], row: int | None) -> Token:
    sheet = _sheet_name(found["ref_at"])
    if sheet is not None and ("[" in sheet or ":" in sheet):
        return Token("away", found[0])
    first, _, second = found["ref_body"].partition(":")
    ref = _span(sheet, first, second or first, row)
    if ref is None:
        return Token("name", found[0])
    return Token("ref", found[0], ref)


def _span(sheet: str | None, first: str, second: str, row: int | None) -> Ref | None:
    one, two = _CELL_PARTS.fullmatch(first), _CELL_PARTS.fullmatch(second)
    if one and two:
        c1, c2 = column_number(one[2]), column_number(two[2])
        r1, r2 = _row(one[3], one[4], row), _row(two[3], two[4], row)
    elif first.strip("$").isalpha():
        c1, c2 = column_number(first.strip("$")), column_number(second.strip("$"))
        r1, r2 = Row(False, 1), Row(False, LAST_ROW)
    else:
        c1, c2 = 1, LAST_COLUMN
        r1, r2 = (_row("$" if end.startswith("$") else "", end.strip("$"), row) for end in (first, second))
    inside = max(c1, c2) <= LAST_COLUMN and all(r.relative or 1 <= r.n <= LAST_ROW for r in (r1, r2))
    return Ref(sheet, c1, r1, c2, r2) if inside else None


def _row(dollar: str, text: str, row: int | None) -> Row:
    if text == OWN_ROW:
        if dollar:
            raise Unreadable("a fixed row was taken for the formula's own")
        return Row(True, 0)
    number = int(text)
    return Row(False, number) if dollar or row is None else Row(True, number - row)


def _sheet_name(prefix: str | None) -> str | None:
    if not prefix:
        return None
    name = prefix[:-1]
    return name[1:-1].replace("''", "'") if name.startswith("'") else name


def calls_in(tokens: Sequence[Token]) -> list[Call]:
    """Every call and pair of parentheses, outer before inner.

    Raises Unreadable when they do not match or nest too deep.

    >>> [(c.name, c.args) for c in calls_in(tokenise("MAX(A1,(2))"))]
    [('MAX', [(1, 2), (3, 6)]), ('', [(4, 5)])]
    """
    calls: list[Call] = []
    stack: list[tuple[int, int]] = []  # the call's number, where its running argument began
    for i, token in enumerate(tokens):
        if token.kind in ("call", "open"):
            parent = stack[-1][0] if stack else None
            place = len(calls[parent].args) if parent is not None else 0
            name = token.text[:-1] if token.kind == "call" else ""
            calls.append(Call(name, i, parent=parent, place=place))
            stack.append((len(calls) - 1, i + 1))
            if len(stack) > DEEPEST:
                raise Unreadable(f"the formula is nested more than {DEEPEST} levels deep")
        elif token.kind == "comma" and stack:
            number, began = stack[-1]
            calls[number].args.append((began, i))
            stack[-1] = (number, i + 1)
        elif token.kind == "close":
            if not stack:
                raise Unreadable("the formula has a closing parenthesis too many")
            number, began = stack.pop()
            call = calls[number]
            call.stop = i + 1
            if call.args or any(t.kind != "blank" for t in tokens[began:i]):
                call.args.append((began, i))
    if stack:
        raise Unreadable("the formula has an open parenthesis too many")
    return calls


def function_name(stored: str) -> str:
    """The plain upper-case name of a stored function name: prefixes of newer functions gone.

    >>> function_name("_xlfn._xlws.Filter")
    'FILTER'
    """
    return unprefixed(stored).upper()


def unprefixed(stored: str) -> str:
    """A stored name without the prefixes that mark newer or add-in functions."""
    while (found := _PREFIX.match(stored)) is not None:
        stored = stored[found.end() :]
    return stored


def unknown_lp_name(stored: str) -> str | None:
    """Why a name that looks like one of Lowpoint's functions is none; None where it does not look so, or is one."""
    from lowpoint.registry import functions

    bare = unprefixed(stored.rpartition("!")[2]).upper()
    name = bare.removeprefix(_SERVICE)
    if lp_name(stored) is not None or not (name != bare or _LIKE_OURS.match(name)):
        return None
    spelled = name.replace(".", "_", 1)
    near = get_close_matches(spelled, functions, 3, 0.7)
    hint = f"; near are {', '.join(near)}" if near else ""
    return f"there is no function {spelled} in this version of Lowpoint{hint}"


def lp_name(stored: str) -> str | None:
    """The canonical name of a Lowpoint function in any stored spelling; None for every other function.

    Calc stores the service and the method: ``ORG.LOWPOINT.FUNCTIONS.SIGMA`` is LP_SIGMA, and the method of a US twin
    keeps its prefix, ``ORG.LOWPOINT.FUNCTIONS.LPU_COEFFICIENT``.

    >>> lp_name("[1]!lp.sigma"), lp_name("_xll.LP_SIGMA"), lp_name("ORG.LOWPOINT.FUNCTIONS.SIGMA"), lp_name("SUM")
    ('LP_SIGMA', 'LP_SIGMA', 'LP_SIGMA', None)
    """
    from lowpoint.registry import canonical

    bare = unprefixed(stored.rpartition("!")[2])
    if bare.upper().startswith(_SERVICE):
        method = bare[len(_SERVICE) :]
        return canonical(method) or canonical(f"LP_{method}")
    return canonical(bare)


def shape_key(tokens: Sequence[Token]) -> str:
    """Text that formulas of one column share when they differ only by how far down they stand."""
    return "\x02".join(t.text if t.ref is None else repr(tuple(t.ref)) for t in tokens)


def shifted(tokens: Sequence[Token], columns: int) -> Iterator[Token]:
    """The tokens of a shared formula, read at its master's cell, for a cell ``columns`` to the right.

    Rows need no shift: relative ones count from whatever cell the formula stands in.
    """
    for token in tokens:
        if token.ref is None or columns == 0 or _is_rows(token.ref):
            yield token
            continue
        c1, c2 = (moved_column(part, columns) for part in column_ends(token))
        inside = min(c1, c2) >= 1 and max(c1, c2) <= LAST_COLUMN
        yield Token("ref", "", token.ref._replace(c1=c1, c2=c2)) if inside else Token("error", "#REF!")


def _is_rows(ref: Ref) -> bool:
    return ref.c1 == 1 and ref.c2 == LAST_COLUMN


def column_ends(token: Token) -> tuple[str, str]:
    """Both ends of a reference as they were written, dollar signs and all."""
    first, _, second = token.text.rpartition("!")[2].partition(":")
    return first, second or first


def moved_column(cell: str, columns: int) -> int:
    """The column number of a reference's end after copying: a dollar sign holds it in place."""
    found = re.match(r"(\$?)([A-Za-z]+)", cell)
    if found is None:  # never for a cell or a column; kept so that a new kind of reference is noticed
        raise Unreadable(f"the reference {cell!r} cannot be copied")
    return column_number(found[2]) + (0 if found[1] else columns)


def written(ref: Ref, sheet: str | None) -> list[str | int]:
    """A reference as text with the relative rows left open: the numbers are offsets from the formula's row."""
    head = f"{quoted(sheet)}!" if sheet is not None else ""
    if (ref.r1, ref.r2) == (Row(False, 1), Row(False, LAST_ROW)):
        return [f"{head}{column_letters(ref.c1)}:{column_letters(ref.c2)}"]
    pieces: list[str | int] = [head + column_letters(ref.c1), _open(ref.r1)]
    if not ref.single:
        pieces += [":" + column_letters(ref.c2), _open(ref.r2)]
    return pieces


def _open(row: Row) -> str | int:
    return row.n if row.relative else str(row.n)
