"""``survey`` as work of a fleet."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

from lowpoint.fleet.recalculating import make_folder
from lowpoint.fleet.tasks import Outcome, Task

if TYPE_CHECKING:
    from lowpoint.survey.model import Survey

__all__ = ["survey"]

MOST_ITEMS = 5
"""In the text of one list among many."""


def survey(task: Task, full: bool) -> Outcome:
    """Judge a list and write the targets, a workbook (.xlsx) and a page (.html).

    Options, as the command has them: ``elevation`` (m), ``tolerances`` (texts), ``draws``, ``seed``, ``remedies``,
    ``system``, ``pages``.
    """
    from lowpoint.survey.as_json import as_json
    from lowpoint.survey.items import verdict
    from lowpoint.survey.surveying import Wishes, survey_list
    from lowpoint.survey.tolerances import parse_tolerance

    asked = dict(task.options)
    tolerances = tuple(parse_tolerance(text) for text in asked.get("tolerances", ()))
    wishes = Wishes(tolerances, asked.get("draws", 200), asked.get("seed"), asked.get("remedies", True))
    system = asked.get("system", "metric")
    found = survey_list(task.source, asked.get("elevation"), None, wishes)
    for target in task.targets:
        make_folder(target.parent)
        _write(found, target, {"system": system} | {key: asked[key] for key in ("pages",) if key in asked})
    written = [str(target) for target in task.targets]
    data = {"book": str(task.source), "outputs": written, "exit_code": found.exit_code}
    counts: Counter[str] = Counter(verdict(item.regime, None) for item in found.items)
    counts |= Counter(cases=found.cases.count, items=len(found.items))
    errors = [f"required column not there: {name}" for name in found.reading.missing]
    errors += [problem.sentence() for problem in found.reading.problems]
    text = "\n".join(_lines(found, system, task.source, written))
    return Outcome(found.exit_code, text, data | (as_json(found, system) if full else {}), dict(counts), [], errors)


def _write(found: Survey, target: Path, options: dict[str, Any]) -> None:
    if target.suffix.lower() == ".html":
        from lowpoint.survey.page import write_page

        write_page(found, target, **options)
        return
    from lowpoint.survey.book import write_book

    write_book(found, target, **options)


def _lines(found: Survey, system: str, source: Path, written: list[str]) -> Iterator[str]:
    from lowpoint.survey.showing import problem_lines, survey_lines

    yield f"{source}:"
    if found.reading.missing:
        yield "required columns that are not there: " + "; ".join(found.reading.missing)
    yield from problem_lines(found.reading, MOST_ITEMS)
    yield from survey_lines(found, MOST_ITEMS, system)
    yield from (f"Written: {path}" for path in written)
