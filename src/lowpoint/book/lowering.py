"""From a formula to what the engine is given: its LP_ calls taken out for batches, or left in as callbacks.

A batched call is a value cell: where it is the whole formula, the formula's own; where it is nested, a scratch cell
beside the workbook's sheets, one scratch column a call, in the formula's own row. A call is batched only when every
argument is known before the engine runs: constants, cells, other batched calls, whole ranges for tables, and single
values that do not depend on where they are computed. Everything else is a callback, which gives the same answer.
"""

from __future__ import annotations

from collections.abc import Iterable
from functools import cached_property
from typing import Any

from . import classes
from .formula import Formula
from .formulas import Token, written
from .guards import guard_of
from .sites import Arg, Cells, Computed, Literal, Pieces, Result, Setting, Site, Supply, Work

__all__ = ["lower", "stored_text"]


def lower(formula: Formula, setting: Setting, supply: Supply, batch: bool) -> Work:
    """Plan one formula; without ``batch`` all its LP_ calls are callbacks."""
    done = _Lowering(formula, setting, supply, batch)
    return _Lowering(formula, setting, supply, False).work if done.misplaced else done.work


def gives_array(name: str) -> bool:
    """Whether a function answers one call with several cells."""
    return name == "LP_STAGE_PRESSURES"


class _Lowering:
    def __init__(self, formula: Formula, setting: Setting, supply: Supply, batch: bool) -> None:
        self.f, self.supply, self.batch = formula, supply, batch
        self.sheet, self.kind, self.size = setting.sheet, setting.kind, setting.size
        self.work = Work()
        self.done: dict[int, Site] = {}
        self.misplaced = False  # a guard would mean something else where it stands
        for number in sorted(formula.lp, reverse=True):  # inner calls begin later than the ones around them
            self.done[number] = self._site(number)
        self.work.sites = [self.done[n] for n in sorted(self.done)]
        own = self._own_call()
        if own is not None and self.done[own].args is not None:
            self.done[own].own, self.done[own].slot = True, None
        else:
            self._finish()
        if formula.lp:
            self._guards()

    @cached_property
    def batched(self) -> frozenset[int]:
        """The calls whose results are value cells, once all are lowered."""
        return frozenset(n for n, site in self.done.items() if site.args is not None)

    # Calls

    def _site(self, number: int) -> Site:
        call, name = self.f.calls[number], self.f.lp[number]
        given = tuple(first < last for first, last in map(self.f.solid, call.args))
        args = self._args(number) if self.batch and not gives_array(name) else None
        inner = [site for n, site in self.done.items() if self.f.calls[n].stop <= call.stop]
        slot = self.supply.slot() if args is not None else None
        first = self.kind == "plain" and self._shows_first(number)
        columns = self._whole_columns(number)
        return Site(name, self.supply.number(), args, given, slot=slot, inner=inner, first=first, columns=columns)

    def _args(self, number: int) -> list[Arg] | None:
        args: list[Arg] = []
        for place, span in enumerate(self.f.calls[number].args):
            arg = self._arg(number, place, self.f.solid(span))
            if arg is None:
                return None
            args.append(arg)
        return args

    def _arg(self, number: int, place: int, span: tuple[int, int]) -> Arg | None:
        from lowpoint.cells import OMITTED

        if span[0] == span[1]:
            return Literal(OMITTED)
        tokens = self.f.tokens[span[0] : span[1]]
        constant = _constant(tokens)
        if constant is not None:
            return constant
        if len(tokens) == 1 and tokens[0].ref is not None:
            ref = tokens[0].ref
            if ref.single or self._is_table(number, place):
                cut = ref.whole and place in self._whole_columns(number)
                return Cells(ref._replace(sheet=ref.sheet or self.sheet), whole=not ref.single, cut=cut)
            return None
        inner = self.f.whole_call(span)
        if inner in self.done:
            return Result(self.done[inner]) if self.done[inner].args is not None else None
        results = frozenset(n for n, site in self.done.items() if site.args is not None)
        if not self.f.scalar(span, results) or not self._anywhere(span):
            return None
        return Computed(self.supply.slot(), self._with_blanks(span))

    def _shows_first(self, number: int) -> bool:
        """Whether nothing around a call takes an array whole, so that the cell shows the first value of one."""
        call = self.f.calls[number]
        while call.parent is not None:
            name = self.f.name(call.parent)
            if call.parent in self.f.lp:
                whole = self._is_table(call.parent, call.place)
            else:
                whole = name != "SINGLE" and classes.place_class(name, call.place) not in "VT"
            if whole:
                return False
            call = self.f.calls[call.parent]
        return True

    def _whole_columns(self, number: int) -> tuple[int, ...]:
        """The places of a call's tables, where all of them are whole columns: none is longer than another then."""
        args = [(place, *self.f.solid(span)) for place, span in enumerate(self.f.calls[number].args)]
        tables = [(place, self.f.tokens[i:j]) for place, i, j in args if i < j and self._is_table(number, place)]
        whole = all(len(found) == 1 and found[0].ref is not None and found[0].ref.whole for _, found in tables)
        return tuple(place for place, _ in tables) if whole else ()

    def _is_table(self, number: int, place: int) -> bool:
        from lowpoint.registry import functions

        function = functions[self.f.lp[number]]
        if function.name == "LP_WHY":
            function, place = self._asked(number) or function, place - 1
        return 0 <= place < len(function.parameters) and function.parameters[place].is_table

    def _asked(self, number: int) -> Any:
        from lowpoint.registry import canonical, functions

        first, last = self.f.solid(self.f.calls[number].args[0])
        token = self.f.tokens[first]
        name = canonical(token.text.strip('"')) if last == first + 1 and token.kind == "text" else None
        return functions[name] if name else None

    def _anywhere(self, span: tuple[int, int]) -> bool:
        """Whether a part means the same in a scratch cell: nothing in it depends on the place it stands in."""
        names = {self.f.name(n) for n, c in enumerate(self.f.calls) if span[0] <= c.start < span[1]}
        return names.isdisjoint(classes.POSITIONAL | classes.DYNAMIC)

    def _with_blanks(self, span: tuple[int, int]) -> Pieces:
        """The part as a formula of its own; a blank cell that it hands on stays blank (text of no length)."""
        pieces = self._render(span, qualify=True)
        first, last = span
        while first < last and self.f.tokens[first].text == "+":
            first += 1
        call = self.f.whole_call((first, last))
        bare = first > span[0] and last == first + 1
        if bare or (call is not None and self.f.name(call) in classes.REFERENCE_GIVING):
            return ["IF(ISBLANK(", *pieces, '),"",', *pieces, ")"]
        return ["(", *pieces, ")"]  # an argument, not a formula: a last difference is not rounded off to zero

    # The formula itself

    def _own_call(self) -> int | None:
        """The LP_ call that is the whole formula, in or without the brackets of implicit intersection."""
        if self.kind == "array" and self.size != (1, 1):
            return None
        span = (0, len(self.f.tokens))
        number = self.f.whole_call(span)
        while number is not None and self.f.name(number) in ("", "SINGLE") and len(self.f.calls[number].args) == 1:
            number = self.f.whole_call(self.f.solid(self.f.calls[number].args[0]))
        if number is None and self.f.tokens and self.f.tokens[0].text == "@":
            number = self.f.whole_call(self.f.solid((1, len(self.f.tokens))))
        return number if number in self.f.lp else None

    def _finish(self) -> None:
        span = (0, len(self.f.tokens))
        one = self.work.single = self.f.scalar(span, self.singles)
        marked = set(self.f.single_ranges()) if self.kind == "plain" and not one else set()
        filled = self.kind == "array" and (self.size != (1, 1) or not one)
        alone = one or self.kind != "plain"
        if alone and not (filled or self.f.lp or self.f.changed or "SINGLE" in self.f.functions):
            return
        pieces = self._render(span, marked=marked)
        self.work.fit = self.size if filled else None
        self.work.pieces = pieces if alone else ["@(", *pieces, ")"]

    @cached_property
    def singles(self) -> frozenset[int]:
        """The calls, callbacks among them, that surely give one value."""
        found = set(self.batched)
        for number in sorted(self.done, reverse=True):
            if not gives_array(self.f.lp[number]) and all(
                self._one_value(number, place, self.f.solid(span), frozenset(found))
                for place, span in enumerate(self.f.calls[number].args)
            ):
                found.add(number)
        return frozenset(found)

    def _one_value(self, number: int, place: int, span: tuple[int, int], known: frozenset[int]) -> bool:
        whole = span[1] == span[0] + 1 and self._is_table(number, place)
        return whole or self.f.scalar(span, known)

    def _guards(self) -> None:
        """Guards for the batched calls: callbacks are made by the engine, which takes one branch only."""
        for number, site in self.done.items():
            pieces = guard_of(self.f, number, self._elsewhere) if site.args is not None else None
            if pieces is not None:
                site.guard = Computed(self.supply.slot(), ["IFERROR(SUM(", *pieces, "),0)"])
                self.misplaced = not self._anywhere((0, len(self.f.tokens)))

    def _elsewhere(self, span: tuple[int, int]) -> Pieces:
        """The text of a part for a cell on another sheet."""
        return self._render(span, qualify=True)

    def _render(self, span: tuple[int, int], qualify: bool = False, marked: Iterable[int] = ()) -> Pieces:
        pieces: Pieces = []
        i = span[0]
        while i < span[1]:
            number = self.f.at_token.get(i)
            if number in self.done:
                pieces += self._call_text(number, qualify)
                i = self.f.calls[number].stop
                continue
            if i in marked:
                pieces.append("@")
            pieces += self._token_text(self.f.tokens[i], qualify)
            i += 1
        return pieces

    def _call_text(self, number: int, qualify: bool) -> Pieces:
        site, call = self.done[number], self.f.calls[number]
        if site.args is not None:
            # The plus keeps it a value: a function that takes ranges treats text and logicals in cells otherwise.
            return ["(+", site.slot, ")"] if site.slot else []
        pieces: Pieces = [f"{site.name}({site.number},", 0]
        for span, given in zip(call.args, site.given, strict=True):
            pieces += [",", *(self._render(span, qualify) if given else ["0"])]
        if number in self.singles and any(t.ref and not t.ref.single for t in self.f.tokens[call.start : call.stop]):
            return ["(@", *pieces, "))"]  # one value in spite of the range in it: what stands around it may know
        return [*pieces, ")"]

    def _token_text(self, token: Token, qualify: bool) -> Pieces:
        if token.ref is not None:
            sheet = token.ref.sheet or (self.sheet if qualify else None)
            return list(written(token.ref, sheet))
        if token.kind == "call" and token.text.upper().endswith("SINGLE("):
            return ["@("]
        return [token.text]


def _constant(tokens: list[Token]) -> Literal | None:
    """The value of a constant, signed or not, or a percentage; None for anything else."""
    from lowpoint.cells import CellError

    sign, percent = 1.0, 1.0
    while len(tokens) > 1 and tokens[0].text in ("+", "-"):
        sign, tokens = (-sign if tokens[0].text == "-" else sign), tokens[1:]
        if tokens[0].kind != "number":
            return None
    while len(tokens) > 1 and tokens[-1].text == "%" and tokens[0].kind == "number":
        percent, tokens = percent * 100.0, tokens[:-1]
    if len(tokens) != 1:
        return None
    kind, text = tokens[0].kind, tokens[0].text
    if kind == "number":
        return Literal(sign * float(text) / percent)
    if kind == "text":
        return Literal(text[1:-1].replace('""', '"'))
    if kind == "bool":
        return Literal(text == "TRUE")
    if kind == "error" and text in {e.value for e in CellError}:
        return Literal(CellError(text))
    return None


def stored_text(formula: Formula) -> Pieces:
    """The formula as it stands, row by row, Lowpoint's functions under their canonical names."""
    lp = {formula.calls[number].start: name for number, name in formula.lp.items()}
    pieces: Pieces = []
    for i, token in enumerate(formula.tokens):
        if token.ref is not None:
            pieces += written(token.ref, token.ref.sheet)
        else:
            pieces.append(f"{lp[i]}(" if i in lp else token.text)
    return pieces
