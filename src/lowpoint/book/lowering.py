"""From a formula to what the engine is given: its LP_ calls taken out for batches, or left in as callbacks.

A batched call is a value cell: where it is the whole formula, the formula's own; where it is nested, a scratch cell
beside the workbook's sheets, one scratch column a call, in the formula's own row. A call is batched only when every
argument is known before the engine runs: constants, cells, other batched calls, whole ranges for tables, and single
values that do not depend on where they are computed. Everything else is a callback, which gives the same answer.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from functools import cached_property
from itertools import count
from typing import Any

from . import classes
from .formula import Formula
from .formulas import Token, written
from .refs import Ref, column_letters

__all__ = [
    "FIT",
    "Arg",
    "Cells",
    "Literal",
    "Pieces",
    "Result",
    "Setting",
    "Site",
    "Slot",
    "Supply",
    "Work",
    "formula_of",
    "lower",
    "stored_text",
    "text_of",
]

FIT = "LPFIT_"
WIDEST = 16_000  # columns of a scratch sheet


@dataclass(frozen=True, slots=True)
class Slot:
    """A scratch column: the formula's row of it belongs to the formula."""

    sheet: str
    column: int


Pieces = list[str | int | Slot]
"""Formula text: text, row numbers as offsets from the formula's row, and scratch cells."""


@dataclass(frozen=True, slots=True)
class Literal:
    """An argument that is the same in every row, or omitted."""

    value: Any


@dataclass(frozen=True, slots=True)
class Cells:
    """An argument read from one cell a row, or from a whole range where the parameter is a table."""

    ref: Ref
    whole: bool = False


@dataclass(slots=True, eq=False)
class Computed:
    """An argument, or a guard, that the engine works out in a scratch column."""

    slot: Slot
    pieces: Pieces


@dataclass(frozen=True, slots=True)
class Result:
    """An argument that is another batched call of the same formula."""

    site: Site


Arg = Literal | Cells | Computed | Result


@dataclass(slots=True, eq=False)
class Site:
    """One LP_ call of a group of formulas. ``args`` is None for a callback; ``given`` marks arguments not omitted."""

    name: str
    number: int
    args: list[Arg] | None
    given: tuple[bool, ...]
    own: bool = False  # its result is the cell's own value
    slot: Slot | None = None  # scratch column of a nested batched call
    guard: Computed | None = None  # of a batched call: 1 where it is really made; None when it always is
    inner: list[Site] = field(default_factory=list)  # the calls inside this one
    level: int = 0


@dataclass(slots=True, eq=False)
class Work:
    """What becomes of a group: its sites and the engine's formula (None: a value cell, or the stored text as it is)."""

    sites: list[Site] = field(default_factory=list)
    pieces: Pieces | None = None
    fit: tuple[int, int] | None = None  # lay the result out over so many rows and columns
    single: bool = True  # the formula surely gives one value

    @property
    def own(self) -> Site | None:
        """The site whose results are the cells' values."""
        return next((s for s in self.sites if s.own), None)

    @property
    def slots(self) -> list[Slot]:
        """All scratch columns."""
        return [s.slot for s in self.sites if s.slot is not None] + [c.slot for c in self.computed]

    @property
    def computed(self) -> list[Computed]:
        """Scratch columns with formulas."""
        found = [a for s in self.sites for a in s.args or () if isinstance(a, Computed)]
        return found + [s.guard for s in self.sites if s.guard]


@dataclass(frozen=True, slots=True)
class Setting:
    """How a formula is stored: its sheet, its kind (see sheet.Group), the rows and columns a legacy array fills."""

    sheet: str
    kind: str = "plain"
    size: tuple[int, int] = (1, 1)


class Supply:
    """Site numbers and scratch columns, each given out once."""

    def __init__(self, titles: Iterable[str]) -> None:
        self._taken = {title.casefold() for title in titles}
        self._site, self._sheet, self._column = 0, "", WIDEST

    def number(self) -> int:
        """A new site's number."""
        self._site += 1
        return self._site

    def slot(self) -> Slot:
        """A free scratch column."""
        if self._column == WIDEST:
            names = (f"LP_SCRATCH_{n}" for n in count(1))
            self._sheet = next(name for name in names if name.casefold() not in self._taken)
            self._taken.add(self._sheet.casefold())
            self._column = 0
        self._column += 1
        return Slot(self._sheet, self._column)


def lower(formula: Formula, setting: Setting, supply: Supply, batch: bool) -> Work:
    """Plan one formula; without ``batch`` all its LP_ calls are callbacks."""
    done = _Lowering(formula, setting, supply, batch)
    return _Lowering(formula, setting, supply, False).work if done.misplaced else done.work


def formula_of(work: Work) -> Pieces | None:
    """The engine's formula with its array laid into the stored range; None where there is none, or the stored one."""
    if work.pieces is None or work.fit is None:
        return work.pieces
    return [f"{FIT}({work.fit[0]},{work.fit[1]},", *work.pieces, ")"]


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
        return Site(name, self.supply.number(), args, given, slot=slot, inner=inner)

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
                return Cells(ref._replace(sheet=ref.sheet or self.sheet), whole=not ref.single)
            return None
        inner = self.f.whole_call(span)
        if inner in self.done:
            return Result(self.done[inner]) if self.done[inner].args is not None else None
        results = frozenset(n for n, site in self.done.items() if site.args is not None)
        if not self.f.scalar(span, results) or not self._anywhere(span):
            return None
        return Computed(self.supply.slot(), self._with_blanks(span))

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
            pieces = self._guard(number) if site.args is not None else None
            if pieces is not None:
                site.guard = Computed(self.supply.slot(), ["IFERROR(SUM(", *pieces, "),0)"])
                self.misplaced = not self._anywhere((0, len(self.f.tokens)))

    def _guard(self, number: int) -> Pieces | None:
        """A formula that gives 1 where the call is made and 0 where it stands in a branch not taken."""
        taken: Pieces = ["1"]
        plain = True
        call = self.f.calls[number]
        while call.parent is not None:
            outer = self.f.calls[call.parent]
            around = self._taken(self.f.name(call.parent), outer.args, call.place, taken)
            plain = plain and around is None
            taken, call = around or taken, outer
        return None if plain else taken

    def _taken(self, name: str, args: list[tuple[int, int]], place: int, inner: Pieces) -> Pieces | None:
        def part(n: int) -> Pieces:
            return self._render(args[n], qualify=True)

        if name == "IF" and place > 0:
            return [
                "IF(",
                *part(0),
                ",",
                *(inner if place == 1 else ["0"]),
                ",",
                *(inner if place == 2 else ["0"]),
                ")",
            ]
        if name in ("IFERROR", "IFNA") and place == 1:
            return ["IF(", "ISERROR(" if name == "IFERROR" else "ISNA(", *part(0), "),", *inner, ",0)"]
        if name == "CHOOSE" and place > 0:
            return ["IF(INT(", *part(0), f")={place},", *inner, ",0)"]
        if name == "IFS" and place > 0:
            earlier = [piece for n in range(0, place - 1 if place % 2 else place, 2) for piece in (*part(n), ",0,")]
            last: Pieces = part(place - 1) if place % 2 else ["TRUE"]
            return ["IFS(", *earlier, *last, ",", *inner, ",TRUE,0)"]
        if name == "SWITCH" and place > 1:
            return self._switch_taken(args, place, inner, part)
        if name == "LET" and place > 0:
            bound = [piece for n in range(place - place % 2) for piece in (*part(n), ",")]
            return ["LET(", *bound, *inner, ")"] if bound else None
        return None

    def _switch_taken(self, args: list[tuple[int, int]], place: int, inner: Pieces, part: Any) -> Pieces:
        default = len(args) % 2 == 0 and place == len(args) - 1
        pairs = range(1, place if default else place - 1, 2)
        head: Pieces = ["SWITCH(", *part(0)]
        for n in pairs:
            head += [",", *part(n), ",0"]
        if default or place % 2:  # a value to compare with is worked out when none before it matched
            return [*head, ",", *inner, ")"]
        return [*head, ",", *part(place - 1), ",", *inner, ",0)"]

    # Text

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


def text_of(pieces: Pieces) -> list[str | int]:
    """Pieces with the scratch columns written out and neighbouring text joined."""
    flat: list[str | int] = []
    for piece in pieces:
        parts: list[str | int] = (
            [f"{piece.sheet}!{column_letters(piece.column)}", 0] if isinstance(piece, Slot) else [piece]
        )
        for part in parts:
            if isinstance(part, str) and flat and isinstance(flat[-1], str):
                flat[-1] += part
            else:
                flat.append(part)
    return flat
