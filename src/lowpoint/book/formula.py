"""One formula, read: names and tables unfolded, its calls, and where it needs a single value of a range."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cached_property

from . import classes
from .formulas import Call, Token, Unreadable, calls_in, function_name, lp_name, unknown_lp_name
from .names import Names, Place
from .refs import Ref
from .tables import Tables

__all__ = ["Formula", "read"]

_OPERANDS = {"ref", "call", "open", "name", "local", "braces"}


@dataclass(eq=False)
class Formula:
    """The tokens of a formula with every reference plain, and its calls by the token they begin at."""

    tokens: list[Token]
    calls: list[Call]
    changed: bool  # whether the text differs from the stored one

    @cached_property
    def at_token(self) -> dict[int, int]:
        """The number of the call that begins at a token."""
        return {call.start: number for number, call in enumerate(self.calls)}

    @cached_property
    def lp(self) -> dict[int, str]:
        """Lowpoint's calls: number to canonical name."""
        named = ((number, lp_name(call.name)) for number, call in enumerate(self.calls) if call.name)
        return {number: name for number, name in named if name}

    @cached_property
    def functions(self) -> set[str]:
        """Every other function it calls."""
        return {function_name(c.name) for n, c in enumerate(self.calls) if c.name and n not in self.lp}

    @property
    def refs(self) -> list[Ref]:
        """All that it reads, as far as the text tells."""
        return [t.ref for t in self.tokens if t.ref is not None]

    @property
    def dynamic(self) -> bool:
        """Whether it reads cells that the text does not tell."""
        return not self.functions.isdisjoint(classes.DYNAMIC)

    @cached_property
    def owners(self) -> list[int | None]:
        """For each token the innermost call it stands in; a call's own first and last tokens stand outside it."""
        owners: list[int | None] = [None] * len(self.tokens)
        for number, call in enumerate(self.calls):  # inner calls come later and overwrite
            for i in range(call.start + 1, call.stop - 1):
                owners[i] = number
            owners[call.start] = owners[call.stop - 1] = call.parent
        return owners

    def place_of(self, token: int) -> tuple[int | None, int]:
        """The innermost call around a token, and the argument place there."""
        number = self.owners[token]
        if number is None:
            return None, 0
        args = self.calls[number].args
        return number, next((n for n, (first, last) in enumerate(args) if first <= token < last), 0)

    def name(self, number: int) -> str:
        """A call's plain function name; Lowpoint's by its canonical one."""
        return self.lp.get(number) or function_name(self.calls[number].name)

    def solid(self, span: tuple[int, int]) -> tuple[int, int]:
        """A span of tokens without the blanks at its ends."""
        first, last = span
        while first < last and self.tokens[first].kind == "blank":
            first += 1
        while first < last and self.tokens[last - 1].kind == "blank":
            last -= 1
        return first, last

    def whole_call(self, span: tuple[int, int]) -> int | None:
        """The number of the call that fills a span, None when it holds anything else."""
        number = self.at_token.get(span[0])
        return number if number is not None and self.calls[number].stop == span[1] else None

    def scalar(self, span: tuple[int, int], results: frozenset[int] = frozenset()) -> bool:
        """Whether a part of the formula surely gives one value, in any cell; ``results`` are calls known to do so."""
        i = span[0]
        while i < span[1]:
            token = self.tokens[i]
            number = self.at_token.get(i)
            if number in results:
                i = self.calls[number].stop
                continue
            if number is not None and not self._scalar_call(number):
                return False
            if token.kind in ("braces", "local", "name", "away", "table") or (
                token.kind == "op" and token.text in "#@:"
            ):
                return False
            if token.kind == "blank" and self._intersects(i):
                return False
            if token.ref is not None and not token.ref.single and not self._taken_whole(i):
                return False
            i += 1
        return True

    def _scalar_call(self, number: int) -> bool:
        name, call = self.name(number), self.calls[number]
        if number in self.lp or not classes.known(name):
            return False
        if name in ("", "SINGLE"):
            return len(call.args) == 1
        if name == "INDEX":  # row or column 0, or a missing one of two, gives a whole row or column
            whole = len(call.args) < 2 or (len(call.args) == 2 and not self._one_wide(call.args[0]))
            return not whole and all(self._surely_not_zero(span) for span in call.args[1:])
        if name == "XLOOKUP":
            return len(call.args) > 2 and self._one_wide(call.args[2])
        return True

    def _surely_not_zero(self, span: tuple[int, int]) -> bool:
        first, last = self.solid(span)
        return last > first and self.tokens[first].text not in ("0", "FALSE")

    def _one_wide(self, span: tuple[int, int]) -> bool:
        first, last = self.solid(span)
        ref = self.tokens[first].ref if last == first + 1 else None
        return ref is not None and (ref.c1 == ref.c2 or ref.r1 == ref.r2)

    def _taken_whole(self, token: int) -> bool:
        """Whether a range stands where a function takes it whole and gives one value for it."""
        number, place = self.place_of(token)
        if number is None:
            return False
        if self.name(number) == "SINGLE":  # which cell it takes depends on where the formula stands
            return False
        if self.solid(self.calls[number].args[place]) == (token, token + 1):
            letter = classes.place_class(self.name(number), place)
            if letter == "R":
                return True
        return self.array_place(token)

    def array_place(self, token: int) -> bool:
        """Whether a token stands, at any depth, in a place that takes arrays."""
        number, place = self.place_of(token)
        while number is not None:
            if number in self.lp:
                return False
            if classes.place_class(self.name(number), place) == "A":
                return True
            call = self.calls[number]
            number, place = call.parent, call.place
        return False

    def _intersects(self, blank: int) -> bool:
        before, after = self.tokens[max(0, blank - 1) : blank], self.tokens[blank + 1 : blank + 2]
        left = bool(before) and before[0].kind in ("ref", "close", "name", "local")
        return left and bool(after) and after[0].kind in _OPERANDS

    def _is_cut(self, token: int) -> bool:
        """Whether a range stands in an intersection, which is written as a blank between two references."""
        blanks = [i for i in (token - 1, token + 1) if 0 <= i < len(self.tokens) and self.tokens[i].kind == "blank"]
        return any(self._intersects(i) for i in blanks)

    def single_ranges(self) -> Iterator[int]:
        """Ranges of a plain formula that stand where a single value is meant: the cell of the formula's own row."""
        for i, token in enumerate(self.tokens):
            follows = self.tokens[i + 1 : i + 2]
            if token.ref is None or token.ref.single or (follows and follows[0].text in ("#", ":")):
                continue
            if i and self.tokens[i - 1].text in ("@", ":"):
                continue
            if self._is_cut(i):
                continue
            if self._means_one(i):
                yield i

    def _means_one(self, token: int) -> bool:
        if self.array_place(token):
            return False
        number, place = self.place_of(token)
        span = (token, token + 1)
        while number is not None:
            if self.solid(self.calls[number].args[place]) != span:  # an operand
                return True
            letter = "R" if number in self.lp else classes.place_class(self.name(number), place)
            if letter != "T":
                return letter == "V"
            call = self.calls[number]
            span, (number, place) = (call.start, call.stop), (call.parent, call.place)
        return True


def read(tokens: Sequence[Token], place: Place, names: Names, tables: Tables) -> Formula:
    """Read a formula at one of its places. Raises Unreadable with the reason why it cannot be evaluated."""
    plain = tables.expand(tokens, place)
    plain = tables.expand(names.expand(plain, place), place)
    plain = list(_joined(plain, place.sheet.casefold()))
    while plain and plain[-1].kind == "blank":
        plain.pop()
    while plain and plain[0].kind == "blank":
        plain.pop(0)
    formula = Formula(plain, calls_in(plain), changed=[t.text for t in plain] != [t.text for t in tokens])
    for number, call in enumerate(formula.calls):
        if call.name and number not in formula.lp:
            _refuse(call.name)
    return formula


def _joined(tokens: Sequence[Token], own: str) -> Iterator[Token]:
    """The tokens with ``List!G2:List!G5``, two cells of one sheet and what lies between them, as one reference."""
    i = 0
    while i < len(tokens):
        one = tokens[i].ref
        two = tokens[i + 2].ref if len(tokens) > i + 2 and tokens[i + 1].text == ":" else None
        if one is None or two is None:
            yield tokens[i]
            i += 1
            continue
        if (one.sheet or own).casefold() != (two.sheet or own).casefold():
            raise Unreadable("it builds a range from cells of two sheets")
        if one.single and two.single:
            yield Token("ref", "", one._replace(c2=two.c1, r2=two.r1))
        elif one.sheet is None and two.sheet is None:
            yield from tokens[i : i + 3]
        else:
            raise Unreadable("it builds a range from ranges of another sheet")
        i += 3


def _refuse(name: str) -> None:
    """Raise Unreadable for a function that is surely not the engine's."""
    unknown = unknown_lp_name(name)
    if unknown is not None:
        raise Unreadable(unknown)
    if "!" in name:
        raise Unreadable(f"the function {name} belongs to another workbook or add-in")
