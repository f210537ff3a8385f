"""Whether a call is really made: a formula that gives 1 where it is, 0 where it stands in a branch not taken."""

from __future__ import annotations

from collections.abc import Callable

from .formula import Formula
from .sites import Pieces

__all__ = ["guard_of"]

Render = Callable[[tuple[int, int]], Pieces]
"""The text of a span of a formula's tokens, for a cell on another sheet."""


def guard_of(formula: Formula, number: int, render: Render) -> Pieces | None:
    """The guard of a call; None where the call is always made."""
    taken: Pieces = ["1"]
    plain = True
    call = formula.calls[number]
    while call.parent is not None:
        outer = formula.calls[call.parent]
        around = _taken(formula.name(call.parent), outer.args, call.place, taken, render)
        plain = plain and around is None
        taken, call = around or taken, outer
    return None if plain else taken


def _taken(name: str, args: list[tuple[int, int]], place: int, inner: Pieces, render: Render) -> Pieces | None:
    """``inner`` where the function around evaluates its argument ``place``, else 0; None where it always does."""

    def part(n: int) -> Pieces:
        return render(args[n])

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
        return _switch_taken(args, place, inner, part)
    if name == "LET" and place > 0:
        bound = [piece for n in range(place - place % 2) for piece in (*part(n), ",")]
        return ["LET(", *bound, *inner, ")"] if bound else None
    return None


def _switch_taken(args: list[tuple[int, int]], place: int, inner: Pieces, part: Callable[[int], Pieces]) -> Pieces:
    default = len(args) % 2 == 0 and place == len(args) - 1
    pairs = range(1, place if default else place - 1, 2)
    head: Pieces = ["SWITCH(", *part(0)]
    for n in pairs:
        head += [",", *part(n), ",0"]
    if default or place % 2:  # a value to compare with is worked out when none before it matched
        return [*head, ",", *inner, ")"]
    return [*head, ",", *part(place - 1), ",", *inner, ",0)"]
