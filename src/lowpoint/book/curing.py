"""Formulas made fit for the engine once for all the rows that share them."""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from .formulas import Unreadable

__all__ = ["Blocked", "Cured", "cure", "instance"]

# Two rows to try a shared formula in: where both give the same open text, that text holds for every row.
_TRIALS = (500_000, 510_007)
_NUMBER = re.compile(r"(?<![\d.])\d{1,7}(?![\d.])")


class Blocked(Unreadable):
    """A formula that the engine would get wrong and that nothing here cures; ``met`` names the known differences."""

    def __init__(self, reason: str, met: tuple[str, ...]) -> None:
        super().__init__(reason)
        self.met = met


@dataclass(frozen=True, slots=True)
class Cured:
    """Open formula text for the engine, whether it differs from what came, and the known differences it meets."""

    parts: list[str | int]
    changed: bool
    met: tuple[str, ...] = ()


def instance(parts: Sequence[str | int], row: int) -> str:
    """Open formula text made definite for one row."""
    return "".join(p if isinstance(p, str) else str(row + p) for p in parts)


def cure(parts: Sequence[str | int], rows: Sequence[int], hiding: int = 0) -> Cured:
    """Rewrite what the engine would get wrong; ``hiding`` says how rows of the workbook are hidden (hiding.Hiding).

    Raises Unreadable, with the reason, where that cannot be done.
    """
    from .cures import prepare

    def rewritten(text: str) -> tuple[str, tuple[str, ...]]:
        done = prepare(f"={text}", hiding)
        if done.blocked is not None:
            raise Blocked(done.blocked, done.met)
        return done.text.removeprefix("="), done.met

    text = instance(parts, rows[0])
    new, met = rewritten(text)
    if new == text:
        return Cured(list(parts), False, met)
    if len(rows) == 1:
        return Cured([new], True, met)
    return Cured(_opened(parts, lambda t: rewritten(t)[0]), True, met)


def _opened(parts: Sequence[str | int], rewritten: Callable[[str], str]) -> list[str | int]:
    """The rewritten text with its relative rows open again."""
    offsets = {p for p in parts if isinstance(p, int)}
    results = []
    for base in _TRIALS:
        here = {str(base + offset): offset for offset in offsets}
        results.append(_split(rewritten(instance(parts, base)), here))
    if results[0] != results[1]:
        raise Blocked("is too unlike in its rows to be made ready for the engine", ())
    return results[0]


def _split(text: str, offsets: dict[str, int]) -> list[str | int]:
    pieces: list[str | int] = []
    begin = 0
    for number in _NUMBER.finditer(text):
        if number[0] in offsets:
            pieces += [text[begin : number.start()], offsets[number[0]]]
            begin = number.end()
    return [*pieces, text[begin:]]
