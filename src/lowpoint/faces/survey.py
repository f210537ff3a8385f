"""``lowpoint survey``: a plain list of items and cases in, verdicts out."""

from __future__ import annotations

import argparse
import json
import shutil
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from lowpoint.errors import LowpointError
from lowpoint.faces import fleet_options, fleet_survey
from lowpoint.faces.fleet_targets import means_many
from lowpoint.faces.targets import checked_target

if TYPE_CHECKING:
    from lowpoint.faces.progress import Bar
    from lowpoint.survey.model import Survey
    from lowpoint.survey.surveying import Wishes

__all__ = ["check_elevation", "fill", "run"]

LOWEST, HIGHEST = -5000.0, 11000.0
PAGES = 50


def fill(parser: argparse.ArgumentParser) -> None:
    add = parser.add_argument
    add("lists", nargs="*", type=Path, metavar="LIST",
        help="a list (.xlsx .xlsm .csv .ods), a folder of them, or a pattern; it is only read")  # fmt: skip
    add("-o", "--out", type=Path, metavar="OUT", help="the workbook to write (.xlsx): the list with its results, a "
        "summary, a page for each failing item; for several lists a folder")  # fmt: skip
    add("--html", type=Path, metavar="PAGE", help="the page to write (.html): one file that needs no network; for "
        "several lists a folder")  # fmt: skip
    add("--overwrite", action="store_true", help="replace files of these names")
    add("--pages", type=int, default=PAGES, metavar="N", help="how many failing items get a page with charts and "
        f"working, the worst first (default {PAGES})")  # fmt: skip
    add("--elevation", type=float, metavar="METRES", help="height of the site above sea level, for gauge pressures, "
        "where the list gives neither it nor the atmosphere")  # fmt: skip
    add("--tolerance", action="append", default=[], metavar="NAME=SIZE", help="how far an input may be off: p1=1%%, "
        "t=2K, fl=3%%, limits=5%%; as often as needed")  # fmt: skip
    add("--draws", type=int, default=200, metavar="N", help="draws of the inputs for each case (default 200; 0: none)")
    add("--seed", type=int, metavar="N", help="seed of the draws (default: a fixed one)")
    add("--no-remedies", action="store_true", help="verdicts only, nothing tried against failures")
    add("--show", action="store_true", help="show how the list is read, column by column, and stop")
    add("--us", action="store_true", help="results in US customary units; messages about the list, and cautions, "
        "name metric ones")  # fmt: skip
    add("--json", action="store_true", help="one JSON value on standard output: an object for each item and case")
    fleet_options.add_options(parser, "list")
    parser.epilog = (
        "examples:\n  lowpoint survey valves.xlsx --show           how each column is understood\n"
        "  lowpoint survey valves.csv --elevation 145   verdicts, the worst case of each item, what is missing\n"
        "  lowpoint survey valves.xlsx -o verdicts.xlsx --html verdicts.html\n"
        "  lowpoint survey lists/ -o done/ --jobs 2     done/valves-survey.xlsx, and so on for every list\n\n"
        "The columns are found by their headings, in any order, with the unit in the heading: 'p1 [bar g]'.\n"
        "'lowpoint starter list' writes a blank form.\n\n"
        "exit code 1: something is wrong with the list, or an item fails or has a case without an answer,\n"
        "or one of several lists could not be read; 130: stopped by a signal (finished lists stand)\n"
        "--json: an object for one list, a list of such for several; with --watch a line a list"
    )


def run(options: argparse.Namespace) -> int:
    fleet_options.check_options(options)
    check_elevation(options.elevation)
    many = means_many(options, options.lists, "list")
    if options.show and many:
        raise LowpointError("--show", "must be asked for with one list, and nothing of many")
    if not many:
        (options.list,) = options.lists
    if options.show:
        return _show(options, options.elevation)
    if options.pages < 0:
        raise LowpointError("--pages", "must be 0 or more", str(options.pages))
    if many:
        _wishes(options)
        return fleet_survey.run(options)
    out, page = (
        path and checked_target(path, options.list, options.overwrite, [suffix], option)
        for path, suffix, option in ((options.out, ".xlsx", "-o"), (options.html, ".html", "--html"))
    )
    wishes = _wishes(options)
    from lowpoint.faces.progress import progress_bar

    system = "us" if options.us else "metric"
    with progress_bar() as bar:
        from lowpoint.survey.surveying import survey_list

        survey = survey_list(options.list, options.elevation, bar, wishes)
        _write(survey, out, page, system, options.pages, bar)
    if options.json:
        from lowpoint.survey.as_json import as_json

        print(json.dumps(as_json(survey, system)))
    else:
        _print(survey, system, [path for path in (out, page) if path is not None])
    return survey.exit_code


def _wishes(options: argparse.Namespace) -> Wishes:
    from lowpoint.survey.surveying import Wishes
    from lowpoint.survey.tolerances import parse_tolerance

    if options.draws < 0:
        raise LowpointError("--draws", "must be 0 or more", str(options.draws))
    return Wishes(tolerances=tuple(parse_tolerance(text) for text in options.tolerance), draws=options.draws,
                  seed=options.seed, remedies=not options.no_remedies)  # fmt: skip


def _write(survey: Survey, out: Path | None, page: Path | None, system: str, pages: int, bar: Bar) -> None:
    if out is not None:
        from lowpoint.survey.book import write_book

        bar("writing the workbook")
        write_book(survey, out, system=system, pages=pages)
    if page is not None:
        from lowpoint.survey.page import write_page

        bar("writing the page")
        write_page(survey, page, system=system, pages=pages)


def _print(survey: Survey, system: str, written: list[Path]) -> None:
    from lowpoint.survey.showing import WIDTH, problem_lines, survey_lines

    if survey.reading.missing:
        print("required columns that are not there: " + "; ".join(survey.reading.missing))
    columns = shutil.get_terminal_size((WIDTH, 24)).columns
    # In a pipe a problem stays on one line, where grep finds the whole of it.
    problems = problem_lines(survey.reading, width=columns if sys.stdout.isatty() else None)
    for line in (*problems, *survey_lines(survey, system=system, width=columns)):
        print(line)
    for path in written:
        print(f"Written: {path}")


def check_elevation(elevation: float | None) -> None:
    """LowpointError for an elevation that no site has."""
    if elevation is not None and not LOWEST <= elevation <= HIGHEST:
        raise LowpointError("--elevation", f"must be {LOWEST:g} to {HIGHEST:g} m", f"{elevation:g}")


def _show(options: argparse.Namespace, elevation: float | None) -> int:
    from lowpoint.survey.reading import read_list
    from lowpoint.survey.showing import reading_lines

    _, reading = read_list(options.list, elevation)
    if options.json:
        from dataclasses import asdict, replace

        said = asdict(replace(reading, lists=()))  # the rows themselves are no part of how they are understood
        del said["lists"]
        print(json.dumps(said))
    else:
        print("\n".join(reading_lines(reading)))
    return 1 if reading.problems or reading.missing else 0
