"""What a worker of a cluster does: a book's bytes in, the outcome and the bytes of the results out."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any, NamedTuple

from lowpoint import __version__
from lowpoint.fleet.tasks import Outcome, Task, attempt, failure

__all__ = ["Errand", "Sent", "run_errand"]


class Errand(NamedTuple):
    """A task with its book's bytes, and the version of Lowpoint that asks for it."""

    task: Task
    data: bytes
    full: bool
    version: str


class Sent(NamedTuple):
    """An outcome, and the bytes of the files by their places among the task's targets."""

    outcome: Outcome
    files: dict[int, bytes]


def run_errand(errand: Errand) -> Sent:
    """Do a task in a folder of its own, which goes away; the outcome tells the paths of whoever asked."""
    task = errand.task
    if errand.version != __version__:
        said = f"{task.source}: the cluster's worker has lowpoint {__version__}, and {errand.version} asks it. "
        return Sent(failure(task, said + "Install one version everywhere."), {})
    with TemporaryDirectory(prefix="lowpoint-") as folder:
        here = _moved(task, Path(folder))
        for path in _paths(here):
            path.parent.mkdir(exist_ok=True)
        here.source.write_bytes(errand.data)
        outcome = attempt(here, errand.full)
        files = {} if outcome.failed else _read(here)
        names = {str(there): str(at) for there, at in zip(_paths(here), _paths(task), strict=True)}
        return Sent(_renamed(outcome, names), files)


def _moved(task: Task, folder: Path) -> Task:
    """The same task below a folder; what is worked on in place stays so."""
    source = folder / "in" / task.source.name
    targets = tuple(
        source if target == task.source else folder / f"out{place}" / target.name
        for place, target in enumerate(task.targets)
    )
    return replace(task, source=source, targets=targets, home=None)


def _paths(task: Task) -> list[Path]:
    return [task.source, *task.targets]


def _read(task: Task) -> dict[int, bytes]:
    return {place: path.read_bytes() for place, path in enumerate(task.targets) if path.exists()}


def _renamed(outcome: Outcome, names: dict[str, str]) -> Outcome:
    """The outcome with the paths of whoever asked. The folder's name is random: nothing else looks like it."""

    def renamed(value: Any) -> Any:
        if isinstance(value, str):
            for here, there in names.items():
                value = value.replace(here, there)
            return value
        if isinstance(value, dict):
            return {renamed(key): renamed(item) for key, item in value.items()}
        return [renamed(item) for item in value] if isinstance(value, list) else value

    fields = ("text", "data", "turned", "errors", "written")
    return replace(outcome, **{name: renamed(getattr(outcome, name)) for name in fields})
