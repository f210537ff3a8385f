"""``lowpoint recalc``: workbooks in, the same workbooks with new cached values out."""

from __future__ import annotations

import argparse
import json
import sys
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from lowpoint.errors import BookError, LowpointError

__all__ = ["Job", "fill", "jobs_of", "run"]

SUFFIXES = (".xlsx", ".xlsm", ".xltx", ".xltm")
MARK = "-recalc"


@dataclass(frozen=True, slots=True)
class Job:
    """One workbook to recompute, and where the result goes."""

    book: Path
    out: Path
    in_place: bool = False
    values: bool = False


def fill(parser: argparse.ArgumentParser) -> None:
    add = parser.add_argument
    add("books", nargs="+", type=Path, metavar="BOOK", help="a workbook (.xlsx .xlsm .xltx .xltm) or a folder of them")
    add("-o", "--out", metavar="OUT", help="the file to write, for several books a folder (default: <stem>-recalc)")
    add("--in-place", action="store_true", help="write over the input, unless a lock file says that it is open")
    add("--values", action="store_true", help="write a copy with plain values in place of all formulas")
    add("--jobs", type=int, default=1, metavar="N", help="how many books are worked on at once (default 1)")
    add("--json", action="store_true", help="one JSON value on standard output")
    parser.epilog = (
        "examples:\n  lowpoint recalc valves.xlsx                  writes valves-recalc.xlsx\n"
        "  lowpoint recalc nightly/ -o done/ --jobs 2   every workbook of a folder\n\n"
        "exit code 1: an LP_ call gave an error, a cell could not be refreshed, or a book of several failed\n"
        "--json: an object for one book, a list for several books or a folder (sub-folders are not opened)"
    )


def run(options: argparse.Namespace) -> int:
    if options.jobs < 1:
        raise LowpointError("--jobs", "must be at least 1", str(options.jobs))
    jobs = jobs_of(options.books, options.out, in_place=options.in_place, values=options.values)
    if len(jobs) == 1 and not _several(options.books):
        return _one(jobs[0], options.json)
    return _batch(jobs, options.jobs, options.json)


# --- what to do -------------------------------------------------------------------------------------------------
def _several(books: Sequence[Path]) -> bool:
    return len(books) > 1 or books[0].is_dir()


def jobs_of(books: Sequence[Path], out: str | None, *, in_place: bool, values: bool) -> list[Job]:
    """The books asked for, folders opened, each with its output; LowpointError where the words contradict."""
    if in_place and out is not None:
        raise LowpointError("--in-place", "must stand without -o", f"-o {out}", "Ask for one of the two.")
    if in_place and values:
        must = "must stand without --values, which would lose the formulas"
        raise LowpointError("--in-place", must, "both", "Name the copy with -o.")
    found = [book for given in books for book in _opened(given)]
    found = list(dict.fromkeys(found))
    if not found:
        raise LowpointError(str(books[0]), "must hold workbooks", "none", f"Looked for {' '.join(SUFFIXES)}.")
    jobs = [Job(b, b if in_place else _target(b, out, values, _several(books)), in_place, values) for b in found]
    _check_targets(jobs)
    return jobs


def _opened(given: Path) -> Iterator[Path]:
    """A file as it is; the workbooks of a folder, without lock files and our own earlier outputs beside it."""
    if not given.is_dir():
        yield given
        return
    for path in sorted(given.iterdir()):
        book = path.suffix.lower() in SUFFIXES and path.is_file() and not path.name.startswith(("~$", "."))
        if book and not _own_output(path):
            yield path


def _own_output(path: Path) -> bool:
    """Was a workbook made by an earlier run, from another one beside it?"""
    source = path.stem.removesuffix(MARK)
    return source != path.stem and any(path.with_name(source + suffix).exists() for suffix in SUFFIXES)


def _target(book: Path, out: str | None, values: bool, several: bool) -> Path:
    suffix = ".xlsx" if values else book.suffix
    if out is None:
        return book.with_name(f"{book.stem}{MARK}{suffix}")
    target = Path(out)
    if several:
        if target.suffix.lower() in SUFFIXES or (target.exists() and not target.is_dir()):
            raise LowpointError(out, "must be a folder, for several books", "a file", "Name a folder with -o.")
        return target / f"{book.stem}{suffix}"
    if target.is_dir() or out.endswith(("/", "\\")):
        return target / f"{book.stem}{suffix}"
    allowed = (".xlsx", ".xlsm") if values else (book.suffix.lower(),)
    if target.suffix.lower() not in allowed:
        must = f"the output must end with {' or '.join(allowed)}, as its content does"
        raise LowpointError(out, must, target.suffix or "no ending", "Programs refuse a file with another ending.")
    return target


def _check_targets(jobs: Sequence[Job]) -> None:
    seen: dict[str, Job] = {}
    for job in jobs:
        other = seen.setdefault(str(job.out).casefold(), job)
        if other is not job:
            got = f"{other.book} and {job.book} would both be {job.out}"
            raise LowpointError("-o", "must give every book its own output", got, "Recompute them into two folders.")


# --- doing it ---------------------------------------------------------------------------------------------------
def _done(job: Job) -> Any:
    """The report of one book. A folder that is missing is made only when there is something to put into it."""
    from lowpoint.book import recalc
    from lowpoint.book.guard import check

    if not job.out.parent.exists():
        check(job.book)
        _make_folder(job.out.parent)
    return recalc.recalculate(job.book, None if job.in_place else job.out, in_place=job.in_place, values=job.values)


def _make_folder(folder: Path) -> None:
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as problem:
        must = "must be a folder that can be made"
        raise BookError(str(folder), must, problem.strerror, "Name another one with -o.") from None


def _one(job: Job, as_json: bool) -> int:
    try:
        report = _done(job)
    except LowpointError as error:
        if as_json:
            _print_json(_refused(job, error))
        raise
    if as_json:
        _print_json(report.to_json())
    else:
        print(report.text())
    return int(report.exit_code)


def _refused(job: Job, error: LowpointError) -> dict[str, Any]:
    return {"book": str(job.book), "output": None, "error": str(error), "exit_code": error.exit_code}


def _attempt(job: Job) -> tuple[dict[str, Any], str, int]:
    """One book of a batch: what to print as JSON, as text, and its exit code. Nothing stops the others."""
    try:
        report = _done(job)
    except LowpointError as error:
        return _refused(job, error), f"{error}\n  nothing was written", 1
    except Exception as bug:
        text = f"{job.book}: this is our bug ({type(bug).__name__}: {bug}); nothing was written"
        return {"book": str(job.book), "output": None, "error": text, "exit_code": 70}, text, 70
    return report.to_json(), report.text(limit=5), report.exit_code


def _batch(jobs: Sequence[Job], workers: int, as_json: bool) -> int:
    found, codes = [], []
    for number, (data, text, code) in enumerate(_attempts(jobs, workers), 1):
        found.append(data)
        codes.append(code)
        if not as_json:
            print(text)
        if sys.stderr.isatty():
            print(f"\r{number} of {len(jobs)} books", end="" if number < len(jobs) else "\n", file=sys.stderr)
    if as_json:
        _print_json(found)
    else:
        failed = sum("error" in data for data in found)
        from lowpoint.problems import counted

        counts = f"{codes.count(0)} without findings, {len(jobs) - failed} written, {failed} failed"
        print(f"{counted(len(jobs), 'book')}: {counts}.")
    return max(codes)


def _attempts(jobs: Sequence[Job], workers: int) -> Iterator[tuple[dict[str, Any], str, int]]:
    """In the order of the jobs, whoever finishes first."""
    if workers == 1 or len(jobs) == 1:
        yield from map(_attempt, jobs)
        return
    from concurrent.futures import ProcessPoolExecutor
    from multiprocessing import get_context

    # A fresh interpreter for each worker: forking one that holds threads and libraries is not safe everywhere.
    with ProcessPoolExecutor(min(workers, len(jobs)), mp_context=get_context("spawn")) as pool:
        yield from pool.map(_attempt, jobs)


def _print_json(value: Any) -> None:
    print(json.dumps(value, indent=2, ensure_ascii=False))
