"""``lowpoint survey``: a plain list of items and cases in, verdicts out."""

from __future__ import annotations

import argparse
import importlib
import importlib.util
import json
import sys
from collections.abc import Callable
from pathlib import Path

from lowpoint.errors import LowpointError

__all__ = ["fill", "run"]

WRITER = "lowpoint.survey.book"
"""The module whose ``write_book(survey, path)`` writes the output workbook."""
LOWEST, HIGHEST = -5000.0, 11000.0


def fill(parser: argparse.ArgumentParser) -> None:
    add = parser.add_argument
    add("list", type=Path, metavar="LIST", help="the list: .xlsx, .xlsm, .csv or .ods; it is only read")
    if _writes():
        add("-o", "--out", type=Path, metavar="OUT", help="the workbook to write")
        add("--overwrite", action="store_true", help="replace a file of that name")
    add("--elevation", type=float, metavar="METRES", help="height of the site above sea level, for gauge pressures, "
        "where the list gives neither it nor the atmosphere")  # fmt: skip
    add("--show", action="store_true", help="show how the list is read, column by column, and stop")
    add("--us", action="store_true", help="numbers of --json in US customary units")
    add("--json", action="store_true", help="one JSON value on standard output: an object for each item and case")
    parser.epilog = (
        "examples:\n  lowpoint survey valves.xlsx --show           how each column is understood\n"
        "  lowpoint survey valves.csv --elevation 145   verdicts, the worst case of each item, what is missing\n\n"
        "The columns are found by their headings, in any order, with the unit in the heading: 'p1 [bar g]'.\n"
        "'lowpoint starter list' writes a blank form.\n\n"
        "exit code 1: something is wrong with the list, or an item fails or has a case without an answer"
    )


def run(options: argparse.Namespace) -> int:
    elevation = options.elevation
    if elevation is not None and not LOWEST <= elevation <= HIGHEST:
        raise LowpointError("--elevation", f"must be {LOWEST:g} to {HIGHEST:g} m", f"{elevation:g}")
    if options.show:
        return _show(options, elevation)
    out = _target(options)
    from lowpoint.survey.showing import problem_lines, survey_lines
    from lowpoint.survey.surveying import survey_list

    survey = survey_list(options.list, elevation, _progress())
    if out is not None:
        importlib.import_module(WRITER).write_book(survey, out)
    if options.json:
        from lowpoint.survey.as_json import as_json

        print(json.dumps(as_json(survey, "us" if options.us else "metric")))
        return survey.exit_code
    if survey.reading.missing:
        print("required columns that are not there: " + "; ".join(survey.reading.missing))
    for line in (*problem_lines(survey.reading), *survey_lines(survey)):
        print(line)
    if out is not None:
        print(f"Written: {out}")
    return survey.exit_code


def _progress() -> Callable[[str], None] | None:
    """What shows how far the work is: a line on a terminal, nothing in a pipe."""
    if not sys.stderr.isatty():
        return None
    return lambda text: print(f"lowpoint: {text} ...", file=sys.stderr)


def _show(options: argparse.Namespace, elevation: float | None) -> int:
    from lowpoint.survey.reading import read_list
    from lowpoint.survey.showing import reading_lines

    _, reading = read_list(options.list, elevation)
    if options.json:
        from dataclasses import asdict

        print(json.dumps(asdict(reading)))
    else:
        print("\n".join(reading_lines(reading)))
    return 1 if reading.problems or reading.missing else 0


def _writes() -> bool:
    return importlib.util.find_spec(WRITER) is not None


def _target(options: argparse.Namespace) -> Path | None:
    out: Path | None = getattr(options, "out", None)
    if out is None:
        return None
    if out.suffix.lower() != ".xlsx":
        raise LowpointError(str(out), "the output must be named .xlsx", out.suffix or "no ending")
    if not out.parent.is_dir():
        raise LowpointError(str(out.parent), "must be a folder", "none of that name", "Make it first.")
    if out.exists() and options.list.exists() and out.samefile(options.list):
        raise LowpointError(str(out), "must not be the list itself", remedy="Choose another name with -o.")
    if out.exists() and not options.overwrite:
        must = "is there already and was left as it is"
        raise LowpointError(str(out), must, remedy="Choose another name with -o, or ask for --overwrite.")
    return out
