"""What a recalculation did, for people and for machines."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from enum import Enum
from typing import Any, NamedTuple

from lowpoint.problems import PASSED_ON, counted

__all__ = ["Change", "Failure", "Kept", "Report"]

MOST_CHANGES = 10
"""Changes told in words; the data have all of them."""
MOST_CELLS = 6
"""Cells named for one reason."""


class Change(NamedTuple):
    """A cell whose stored value was replaced; ``old`` is None where none was stored."""

    sheet: str
    cell: str
    old: Any
    new: Any

    @property
    def rounding(self) -> bool:
        """Are old and new the same number but for digits that some programs do not store?"""
        return _is_number(self.old) and _is_number(self.new) and f"{self.old:.14g}" == f"{self.new:.14g}"

    @property
    def size(self) -> float:
        """How large the change is: relative for numbers, infinite where a word or an error is in it."""
        if not (_is_number(self.old) and _is_number(self.new)):
            return math.inf
        return abs(self.new - self.old) / max(abs(self.new), abs(self.old))


@dataclass(frozen=True, slots=True)
class Failure:
    """An LP_ call that gave an error, the reason that LP_WHY gives, and the error."""

    sheet: str
    cell: str
    function: str
    error: str
    reason: str

    @property
    def passed_on(self) -> bool:
        """Did the call only pass on an error that came in? Then the cause stands in another cell."""
        return PASSED_ON in self.reason


@dataclass(frozen=True, slots=True)
class Kept:
    """A formula cell that could not be refreshed and keeps the value it had."""

    sheet: str
    cell: str
    reason: str


@dataclass(slots=True)
class Report:
    """The outcome for one workbook.

    ``recomputed`` counts formula cells evaluated, ``calls`` the LP_ calls among them; ``untouched`` the evaluated
    cells whose stored value was already right. ``changed`` are cells that an LP_ call is in or feeds, or that had no
    stored value; ``unfed`` other changed cells: a look at those is worth while. ``parts`` are the package parts
    written anew.
    """

    book: str
    output: str | None = None
    recomputed: int = 0
    calls: int = 0
    untouched: int = 0
    changed: list[Change] = field(default_factory=list)
    unfed: list[Change] = field(default_factory=list)
    failed: list[Failure] = field(default_factory=list)
    kept: list[Kept] = field(default_factory=list)
    warnings: list[str] = field(default_factory=list)
    differences: list[dict[str, Any]] = field(default_factory=list)
    parts: list[str] = field(default_factory=list)
    broken_signature: bool = False
    seconds: float = 0.0
    evaluation_seconds: float = 0.0

    @property
    def exit_code(self) -> int:
        """1 when an LP_ call gave an error, a cell could not be refreshed, or a signature was lost; else 0."""
        return 1 if self.failed or self.kept or self.broken_signature else 0

    def to_json(self) -> dict[str, Any]:
        """Plain values only, ready for ``json.dumps``."""
        return {
            "book": self.book,
            "output": self.output,
            "counts": {
                "recomputed": self.recomputed,
                "lp_calls": self.calls,
                "changed": len(self.changed),
                "changed_unfed": len(self.unfed),
                "untouched": self.untouched,
                "failed": len(self.failed),
                "failed_passed_on": sum(f.passed_on for f in self.failed),
                "not_refreshed": len(self.kept),
            },
            "changed": [_change(c) for c in self.changed],
            "changed_unfed": [_change(c) for c in self.unfed],
            "failed": [
                {
                    "sheet": f.sheet,
                    "cell": f.cell,
                    "function": f.function,
                    "error": f.error,
                    "reason": f.reason,
                    "passed_on": f.passed_on,
                }
                for f in self.failed
            ],
            "not_refreshed": [{"sheet": k.sheet, "cell": k.cell, "reason": k.reason} for k in self.kept],
            "warnings": list(self.warnings),
            "engine_differences": list(self.differences),
            "parts_written": list(self.parts),
            "seconds": round(self.seconds, 4),
            "evaluation_seconds": round(self.evaluation_seconds, 4),
            "exit_code": self.exit_code,
        }

    def _in_last_digits(self) -> str:
        """How many changes are of the digits only that a program does not store."""
        number = sum(c.rounding for c in (*self.changed, *self.unfed))
        return f" ({number} of them only behind the 14th digit)" if number else ""

    def text(self, limit: int = 20) -> str:
        """A few lines for a terminal; of each list at most ``limit`` items."""
        return "\n".join(self._lines(limit))

    def _lines(self, limit: int) -> Iterator[str]:
        yield (
            f"{self.book}: {counted(self.recomputed, 'formula cell')} worked out, {counted(self.calls, 'LP_ call')} in "
            f"them; {len(self.changed) + len(self.unfed)} changed{self._in_last_digits()}, {self.untouched} were "
            f"right already ({self.seconds:.1f} s)."
        )
        if self.changed:
            yield from _cut([_turn(c) for c in _telling(self.changed)], min(limit, MOST_CHANGES))
        if self.failed:
            first = [f for f in self.failed if not f.passed_on]
            rest = [f for f in self.failed if f.passed_on]
            only = f", {len(rest)} of them only because they read another cell's error" if rest else ""
            yield f"{counted(len(self.failed), 'LP_ call')} gave an error{only}:"
            yield from _cut([*_gathered(first), *_gathered(rest)], limit)
        if self.kept:
            yield f"{counted(len(self.kept), 'cell')} could not be refreshed and kept the old value:"
            yield from _cut([f"{_at(k.sheet, k.cell)}  {k.reason}" for k in self.kept], limit)
        if self.unfed:
            one = len(self.unfed) == 1
            them, these = ("it", "this") if one else ("them", "these")
            yield f"{counted(len(self.unfed), 'cell')} changed although no LP_ call feeds {them} (look at {these}):"
            yield from _cut([f"{_at(c.sheet, c.cell)}  {_said(c.old)} -> {_said(c.new)}" for c in self.unfed], limit)
        for warning in self.warnings:
            yield f"Note: {warning}"
        if self.output:
            yield f"Written: {self.output}"


def _telling(changes: Sequence[Change]) -> list[Change]:
    """The changes worth a line: of words and errors first, then of numbers, the largest first; no mere rounding."""
    return sorted((c for c in changes if c.old is not None and not c.rounding), key=lambda c: -c.size)


def _turn(change: Change) -> str:
    return f"{_at(change.sheet, change.cell)}  {_said(change.old)} -> {_said(change.new)}"


def _gathered(failures: Sequence[Failure]) -> Iterator[str]:
    """Failures of one reason in one line, with their cells."""
    by_reason: dict[tuple[str, str, str], list[str]] = {}
    for f in failures:
        by_reason.setdefault((f.sheet, f.error, f.reason), []).append(f.cell)
    for (sheet, error, reason), cells in by_reason.items():
        distinct = list(dict.fromkeys(cells))
        where = ", ".join(distinct[:MOST_CELLS]) + (
            f" and {len(distinct) - MOST_CELLS} more" if len(distinct) > MOST_CELLS else ""
        )
        yield f"{_at(sheet, where)} {error}  {reason}"


def _change(change: Change) -> dict[str, Any]:
    return {"sheet": change.sheet, "cell": change.cell, "old": _bare(change.old), "new": _bare(change.new)}


def _is_number(value: Any) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


def _bare(value: Any) -> Any:
    return value.value if isinstance(value, Enum) else value


def _said(value: Any) -> str:
    if isinstance(value, Enum):
        return str(value.value)
    return "nothing" if value is None else f'"{value}"' if isinstance(value, str) else str(value)


def _at(sheet: str, cell: str) -> str:
    return f"  {sheet}!{cell}"


def _cut(lines: Sequence[str], limit: int) -> Iterator[str]:
    yield from lines[:limit]
    if len(lines) > limit:
        yield f"  ... and {len(lines) - limit} more (--json lists all)"
