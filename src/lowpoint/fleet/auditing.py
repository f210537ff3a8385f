"""``audit`` as work of a fleet."""

from __future__ import annotations

import tomllib
from collections import Counter
from collections.abc import Iterable
from typing import TYPE_CHECKING, Any

from lowpoint.fleet.recalculating import make_folder
from lowpoint.fleet.tasks import Outcome, Task

if TYPE_CHECKING:
    from lowpoint.audit.layout import Layout
    from lowpoint.audit.model import Audit

__all__ = ["audit", "entries_of", "printable"]


def audit(task: Task, full: bool) -> Outcome:
    """Audit a data sheet and write the target, a workbook (.xlsx), where there is one.

    Options, as the command has them: ``elevation`` (m), ``atmosphere`` (Pa), ``layout`` (the text of a layout file),
    ``every`` (tell the claims that agree, too).
    """
    from lowpoint.audit.as_json import audit_json
    from lowpoint.audit.auditing import audit_file
    from lowpoint.audit.telling import audit_lines

    asked = dict(task.options)
    found = audit_file(task.source, layout=_layout(asked.get("layout")), elevation=asked.get("elevation"),
                       atmosphere=asked.get("atmosphere"))  # fmt: skip
    lines = audit_lines(found, every=bool(asked.get("every")))
    lines += [line for target in task.targets for line in _written(found, task, target)]
    data: dict[str, Any] = {"book": str(task.source), "exit_code": found.exit_code}
    if full:
        data["entries"] = audit_json(found)
    counts = Counter(claim.verdict for sheet in found.claims for claim in sheet)
    text = "\n".join(map(printable, lines))
    return Outcome(found.exit_code, text, data, {"sheets": len(found.document.sheets), **counts}, [], _errors(found))


def _layout(text: str | None) -> Layout | None:
    if text is None:
        return None
    from lowpoint.audit.layout import layout_of

    return layout_of(tomllib.loads(text), "--layout")


def _written(found: Audit, task: Task, target: Any) -> Iterable[str]:
    from lowpoint.audit.output import write_audit

    make_folder(target.parent)
    return ["", f"Written: {target}", *write_audit(found, target)]


def _errors(found: Audit) -> list[str]:
    """What differs, contradicts itself, or must be looked at, each in a line."""
    from lowpoint.audit.telling import label_of, statement

    wrong = [claim for sheet in found.claims for claim in sheet if claim.verdict in ("differs", "contradicts")]
    findings = [*found.document.findings, *(one for sheet in found.document.sheets for one in sheet.findings)]
    said = [f"{label_of(claim)}: {statement(claim)}" for claim in wrong]
    return [printable(text) for text in (*said, *(one.sentence() for one in findings))]


def entries_of(outcome: Outcome, file: str, since: str | None = None) -> list[dict[str, Any]]:
    """The entries of a file for ``--json``, whatever came of it; ``since`` when it was done, if not now."""
    from lowpoint.audit.as_json import failure_json

    if outcome.failed:
        return [failure_json(file, outcome.errors[0])]
    if since is not None:
        return [{"file": file, "sheet": None, "claims": [], "error": None, "unchanged_since": since}]
    entries: list[dict[str, Any]] = outcome.data["entries"]
    return entries


def printable(line: str) -> str:
    """A line with texts of a stranger's file: what would steer a terminal is a blank."""
    return "".join(sign if sign.isprintable() else " " for sign in line)
