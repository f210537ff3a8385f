"""``lowpoint compare``: what changed between two issues of a list, and which verdicts turned."""

from __future__ import annotations

import argparse
import json
from pathlib import Path

__all__ = ["fill", "run"]

KINDS = "a list (.xlsx .xlsm .csv .ods), a survey's workbook (.xlsx), or a survey's --json (.json)"


def fill(parser: argparse.ArgumentParser) -> None:
    add = parser.add_argument
    add("old", type=Path, metavar="OLD", help=f"the earlier issue: {KINDS}")
    add("new", type=Path, metavar="NEW", help="the later issue, of any of these kinds")
    add("--elevation", type=float, metavar="METRES", help="height of the site above sea level, for gauge pressures, "
        "where a list gives neither it nor the atmosphere")  # fmt: skip
    add("--us", action="store_true", help="numbers in US customary units")
    add("--json", action="store_true", help="one JSON value on standard output")
    parser.epilog = (
        "examples:\n  lowpoint compare valves-rev1.xlsx valves-rev2.xlsx     two issues of a list, both judged now\n"
        "  lowpoint compare issued.xlsx valves-rev2.xlsx          a survey as it was issued, and a new list\n\n"
        "Cases are matched by tag and case; a case under another name is gone and added. A survey keeps the\n"
        "verdicts it was issued with; where the tool gives others for the same inputs today, that is said.\n\n"
        "exit code 1: a verdict turned for the worse or has no answer now, a case that fails or has no answer was\n"
        "added, or something is wrong with a list"
    )


def run(options: argparse.Namespace) -> int:
    from lowpoint.faces.progress import progress_bar
    from lowpoint.faces.survey import check_elevation

    check_elevation(options.elevation)
    from lowpoint.survey.compared import comparison_json, comparison_lines
    from lowpoint.survey.comparing import compare
    from lowpoint.survey.sides import read_side

    with progress_bar() as bar:
        old, new = (read_side(path, options.elevation, bar) for path in (options.old, options.new))
        bar("comparing")
        found = compare(old, new)
    system = "us" if options.us else "metric"
    if options.json:
        print(json.dumps(comparison_json(found, system)))
    else:
        for line in comparison_lines(found, system):
            print(line)
    return found.exit_code
