"""``lowpoint explain``: the whole working of one item, step by step, for whoever checks it by hand."""

from __future__ import annotations

import argparse
import json
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from lowpoint.survey.outcome import Working

__all__ = ["fill", "run"]

ENDINGS = (".txt", ".md")


def fill(parser: argparse.ArgumentParser) -> None:
    add = parser.add_argument
    add("list", type=Path, metavar="LIST", help="a list (.xlsx .xlsm .csv .ods); it is only read")
    add("tag", metavar="TAG", help="the item's tag, as in the list")
    add("--case", metavar="CASE", help="one case of it; without it all of them, in the order of the list")
    add("--elevation", type=float, metavar="METRES", help="height of the site above sea level, for gauge pressures, "
        "where the list gives neither it nor the atmosphere")  # fmt: skip
    add("--us", action="store_true", help="each number in US customary units too, beside those of the working")
    add("-o", "--out", type=Path, metavar="FILE", help="write it to FILE, a text (.txt) or Markdown (.md)")
    add("--overwrite", action="store_true", help="replace a file of that name")
    add("--json", action="store_true", help="one JSON value on standard output")
    parser.epilog = (
        "examples:\n  lowpoint explain valves.xlsx 21-FCV-110                 every case, every step\n"
        "  lowpoint explain valves.xlsx 21-FCV-110 --case maximum  one case\n\n"
        "Each step has its symbol, the equation, the same with its numbers, the value and the source. The numbers are\n"
        "plain arithmetic in the units of the standard: whoever keys them into a calculator comes to the value.\n\n"
        "exit code 1: a case of the item fails, or has no answer"
    )


def run(options: argparse.Namespace) -> int:
    from lowpoint.faces.progress import progress_bar
    from lowpoint.faces.survey import check_elevation
    from lowpoint.faces.targets import checked_target

    check_elevation(options.elevation)
    if options.out is not None:
        checked_target(options.out, options.list, options.overwrite, ENDINGS)
    from lowpoint.book.saving import replace_file
    from lowpoint.survey.explaining import exit_code, explained_json, item_survey, places_of_case
    from lowpoint.survey.working import working

    with progress_bar() as tell:
        tell("reading the list")
        survey = item_survey(options.list, options.tag, options.elevation)
    places = places_of_case(survey, options.case)
    system = "us" if options.us else "metric"
    workings = [working(survey, place, system) for place in places]
    if options.out is not None:
        text = "\n".join(_lines(workings, options.out.suffix.lower() == ".md")) + "\n"
        replace_file(options.out, lambda sink: sink.write(text.encode()))
    if options.json:
        print(json.dumps(explained_json(survey, places, system)))
    elif options.out is not None:
        print(f"Written: {options.out}")
    else:
        print("\n".join(_lines(workings, False)))
    return exit_code(survey, places)


def _lines(workings: list[Working], as_markdown: bool) -> list[str]:
    """The workings one after another, a blank line or two between."""
    from lowpoint.survey.workings.layout import markdown, text_lines

    lines: list[str] = []
    for number, each in enumerate(workings):
        if number:
            lines += [""] if as_markdown else ["", ""]
        lines += markdown(each) if as_markdown else text_lines(each)
    return lines
