"""What a run came to, in a table."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator

from lowpoint.fleet.running import Result
from lowpoint.problems import counted

__all__ = ["Summary"]

ALL = 25
"""So many books are all in the table; of more only those that need a look,"""
MOST = 60
"""and of these so many."""
LONGEST = 60


class Summary:
    """Counts, and one row a book that is worth one; ``total`` is how many books there are, None where more may come.

    ``noun`` is what one of them is called.
    """

    def __init__(self, total: int | None, noun: str = "book") -> None:
        self.books = 0
        self.noun = noun
        self.counts: Counter[str] = Counter()
        self._total = total
        self._codes: set[int] = set()
        self._rows: list[tuple[bool, tuple[str, ...]]] = []
        self._left_out = 0

    @property
    def exit_code(self) -> int:
        """The worst of all books; a book of several that could not be done is a failed item, not misuse."""
        return max((1 if code == 2 else code for code in self._codes), default=0)

    @property
    def none_read(self) -> bool:
        """Was there something to do, and could none of it be read?"""
        return self._codes == {2}

    def add(self, result: Result) -> None:
        """Count a result."""
        outcome = result.outcome
        self.books += 1
        self._codes.add(outcome.code)
        word = _word(result)
        self.counts[word] += 1
        self.counts["clean"] += not outcome.code
        self.counts["written"] += bool(result.task.targets) and not outcome.failed and not result.skipped
        self.counts["turned"] += len(outcome.turned)
        telling = bool(outcome.code or outcome.turned or result.attempts > 1)
        if sum(kept for kept, _ in self._rows) >= MOST or (not telling and len(self._rows) > ALL):
            self._left_out += 1
            return
        again = f", {result.attempts} tries" if result.attempts > 1 else ""
        seconds = f"{outcome.seconds:.1f}" if not result.skipped else ""
        cells = (str(len(outcome.turned) or ""), str(len(outcome.errors) or ""), seconds, word + again)
        self._rows.append((telling, (*cells, _short(str(result.task.source)))))

    def lines(self) -> Iterator[str]:
        """The table and the counts."""
        everything = self.books <= ALL
        rows = [row for telling, row in self._rows if telling or everything]
        if self.books > 1 and rows:
            yield ""
            yield from _table([("turned", "errors", "s", "result", self.noun), *rows])
            if self._left_out and sum(telling for telling, _ in self._rows) >= MOST:
                yield f"... and others; the trail (--trail) has all of {counted(self.books, self.noun)}"
            yield ""
        yield self._counted()

    def _counted(self) -> str:
        counts = self.counts
        said = f"{counts['clean']} without findings, {counts['written']} written, {counts['failed']} failed"
        if counts["unchanged"]:
            said += f", {counts['unchanged']} unchanged and skipped"
        if counts["turned"]:
            said += f"; {counted(counts['turned'], 'verdict')} turned"
        if self._total in (None, self.books):
            return f"{counted(self.books, self.noun)}: {said}."
        return f"{self.books} of {counted(self._total or 0, self.noun)}: {said}."


def _word(result: Result) -> str:
    if result.skipped:
        return "unchanged"
    if result.outcome.failed:
        return "failed"
    return "findings" if result.outcome.code else "done"


def _short(text: str) -> str:
    return text if len(text) <= LONGEST else "..." + text[3 - LONGEST :]


def _table(rows: list[tuple[str, ...]]) -> Iterator[str]:
    """Columns of one width: numbers to the right, words to the left."""
    widths = [max(len(row[column]) for row in rows) for column in range(len(rows[0]))]
    for row in rows:
        numbers = [cell.rjust(width) for cell, width in zip(row[:3], widths[:3], strict=True)]
        words = [cell.ljust(width) for cell, width in zip(row[3:], widths[3:], strict=True)]
        yield ("  ".join(["", *numbers, *words])).rstrip()
