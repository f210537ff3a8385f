"""``recalc`` as work of a fleet."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import Any

from lowpoint.errors import BookError
from lowpoint.fleet.tasks import Outcome, Task

__all__ = ["make_folder", "recalc", "report_of"]

MOST_LINES = 5
"""Of each list in the text of one book among many."""


def recalc(task: Task, full: bool) -> Outcome:
    """Recompute a workbook's LP_ functions; the option ``values`` asks for plain numbers instead of formulas."""
    report = report_of(task)
    data = report.to_json() if full else {"book": report.book, "output": report.output, "exit_code": report.exit_code}
    counts = {
        "recomputed": report.recomputed, "lp_calls": report.calls, "failed": len(report.failed),
        "changed": len(report.changed) + len(report.unfed), "not_refreshed": len(report.kept),
    }  # fmt: skip
    errors = [f"{f.sheet}!{f.cell} {f.error} {f.reason}" for f in report.failed if not f.passed_on]
    errors += [f"{k.sheet}!{k.cell} not refreshed: {k.reason}" for k in report.kept]
    if report.broken_signature:
        errors.append("the digital signature does not survive the new values")
    return Outcome(report.exit_code, report.text(limit=MOST_LINES), data, counts, list(_turned(report)), errors)


def report_of(task: Task) -> Any:
    """The report of one book. A folder that is missing is made only when there is something to put into it."""
    from lowpoint.book import recalc
    from lowpoint.book.guard import check

    target = task.targets[0]
    in_place = target == task.source
    if not target.parent.exists():
        check(task.source)
        make_folder(target.parent)
    values = bool(task.options.get("values"))
    return recalc.recalculate(task.source, None if in_place else target, in_place=in_place, values=values)


def make_folder(folder: Path) -> None:
    """Make a folder for outputs, or say why not (BookError)."""
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as problem:
        must = "must be a folder that can be made"
        raise BookError(str(folder), must, problem.strerror, "Name another one with -o.") from None


def _turned(report: Any) -> Iterator[dict[str, Any]]:
    """Cells whose verdict is another now, an error included; a cell without an earlier value has turned nowhere."""
    changes = [c for c in (*report.changed, *report.unfed) if c.old is not None and _words(c)]
    if not changes:
        return
    from lowpoint.survey.items import ORDER

    for change in changes:
        if any(word.split(" ")[0] in ORDER for word in _words(change)):
            yield {"sheet": change.sheet, "cell": change.cell, "old": str(change.old), "new": str(change.new)}


def _words(change: Any) -> list[str]:
    return [value for value in (change.old, change.new) if isinstance(value, str)]
