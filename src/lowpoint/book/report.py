"""What a recalculation did, for people and for machines."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from enum import Enum
from typing import Any, NamedTuple

from lowpoint.problems import PASSED_ON

__all__ = ["Change", "Failure", "Kept", "Report"]


class Change(NamedTuple):
    """A cell whose stored value was replaced; ``old`` is None where none was stored."""

    sheet: str
    cell: str
    old: Any
    new: Any


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

    def text(self, limit: int = 20) -> str:
        """A few lines for a terminal; of each list at most ``limit`` items."""
        return "\n".join(self._lines(limit))

    def _lines(self, limit: int) -> Iterator[str]:
        yield (
            f"{self.book}: {_many(self.recomputed, 'formula cell')} worked out, {_many(self.calls, 'LP_ call')} in "
            f"them; {len(self.changed) + len(self.unfed)} changed, {self.untouched} were right already "
            f"({self.seconds:.1f} s)."
        )
        if self.failed:
            first = [f for f in self.failed if not f.passed_on]
            rest = [f for f in self.failed if f.passed_on]
            only = f", {len(rest)} of them only because they read another cell's error" if rest else ""
            yield f"{_many(len(self.failed), 'LP_ call')} gave an error{only}:"
            yield from _cut([f"{_at(f.sheet, f.cell)} {f.error}  {f.reason}" for f in first + rest], limit)
        if self.kept:
            yield f"{_many(len(self.kept), 'cell')} could not be refreshed and kept the old value:"
            yield from _cut([f"{_at(k.sheet, k.cell)}  {k.reason}" for k in self.kept], limit)
        if self.unfed:
            one = len(self.unfed) == 1
            them, these = ("it", "this") if one else ("them", "these")
            yield f"{_many(len(self.unfed), 'cell')} changed although no LP_ call feeds {them} (look at {these}):"
            yield from _cut([f"{_at(c.sheet, c.cell)}  {_said(c.old)} -> {_said(c.new)}" for c in self.unfed], limit)
        for warning in self.warnings:
            yield f"Note: {warning}"
        if self.output:
            yield f"Written: {self.output}"


def _change(change: Change) -> dict[str, Any]:
    return {"sheet": change.sheet, "cell": change.cell, "old": _bare(change.old), "new": _bare(change.new)}


def _bare(value: Any) -> Any:
    return value.value if isinstance(value, Enum) else value


def _said(value: Any) -> str:
    if isinstance(value, Enum):
        return str(value.value)
    return "nothing" if value is None else f'"{value}"' if isinstance(value, str) else str(value)


def _at(sheet: str, cell: str) -> str:
    return f"  {sheet}!{cell}"


def _many(number: int, noun: str) -> str:
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"


def _cut(lines: Sequence[str], limit: int) -> Iterator[str]:
    yield from lines[:limit]
    if len(lines) > limit:
        yield f"  ... and {len(lines) - limit} more (--json lists all)"
