"""``lowpoint audit``: vendors' data sheets in; what holds, what does not, and which mistake would explain it, out."""

from __future__ import annotations

import argparse
import json
import sys
from collections.abc import Iterable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from lowpoint.errors import LowpointError
from lowpoint.faces import fleet_audit, fleet_options
from lowpoint.faces.fleet_targets import means_many

if TYPE_CHECKING:
    from lowpoint.audit.layout import Layout
    from lowpoint.audit.model import Audit, Document
    from lowpoint.faces.progress import Bar
    from lowpoint.fleet.finding import Found

__all__ = ["fill", "run"]

BAR = 1e5
LOWEST, HIGHEST = 0.3, 1.2
"""bar; the atmosphere of any site."""


def fill(parser: argparse.ArgumentParser) -> None:
    add = parser.add_argument
    add("sheets", nargs="*", type=Path, metavar="SHEET",
        help="a data sheet (.xlsx .xlsm .csv .pdf), a folder of them, or a pattern; it is only read")  # fmt: skip
    add("-o", "--out", metavar="OUT", help="the workbook to write (.xlsx): the sheet with notes on cells, findings, "
        "questions to the vendor, the working; for several sheets a folder")  # fmt: skip
    add("--layout", type=Path, metavar="FILE", help="cells of the quantities (TOML), in place of the search")
    add("--write-layout", type=Path, metavar="FILE", help="write the cells that were found to FILE (.toml)")
    add("--show", action="store_true", help="show what was found, with cells and confidence, and stop")
    add("--all", action="store_true", help="list the claims that agree, too")
    add("--elevation", type=float, metavar="METRES", help="height of the site above sea level, for gauge pressures, "
        "where the sheet gives neither it nor the atmosphere")  # fmt: skip
    add("--atmosphere", type=float, metavar="BAR", help="pressure of the atmosphere, bar, instead of --elevation")
    add("--json", action="store_true", help="one JSON value on standard output")
    add("--overwrite", action="store_true", help="replace files of these names")
    fleet_options.add_options(parser, "data sheet")
    parser.epilog = (
        "examples:\n  lowpoint audit offer.xlsx --show                 what is read, from which cells, how surely\n"
        "  lowpoint audit offer.xlsx -o offer-audit.xlsx    the sheet with notes, findings, questions, working\n"
        "  lowpoint audit offer.pdf --write-layout v.toml   for the next sheet of this vendor: --layout v.toml\n"
        "  lowpoint audit offers/ --json                    every data sheet of a folder\n"
        "  lowpoint audit offers/ -o done/ --jobs 2         done/offer-audit.xlsx, and so on\n\n"
        "A suspect says what would follow, never what was done: only the vendor can tell.\n\n"
        "exit code 0: every claim that could be checked agrees; 1: a claim differs or contradicts, something about a\n"
        "sheet must be looked at, or some of several files could not be read; 2: nothing at all could be read, or\n"
        "misuse; 130: stopped by a signal\n"
        "--json: for one data sheet a list of its claims; findings about the sheet itself stand behind them with\n"
        "quantity null. For several data sheets a list of {file, sheet, claims, error}, each with such claims"
    )


def run(options: argparse.Namespace) -> int:
    from lowpoint.fleet.finding import find, several

    fleet_options.check_options(options)
    site = _site(options)
    many = means_many(options, options.sheets, "data sheet")
    if options.show:
        _check_show(options)
        found = find(options.sheets, fleet_audit.looking_of(options))
        return _show(found, several(options.sheets), _layout(options.layout), site, options)
    return fleet_audit.run(options, site) if many else _one(options, site)


def _site(options: argparse.Namespace) -> dict[str, float | None]:
    """Elevation (m) and atmosphere (Pa) of the site."""
    from lowpoint.faces.survey import check_elevation

    check_elevation(options.elevation)
    if options.atmosphere is None:
        return {"elevation": options.elevation, "atmosphere": None}
    if options.elevation is not None:
        raise LowpointError("--atmosphere", "must stand without --elevation", "both", "Give one of the two.")
    if not LOWEST <= options.atmosphere <= HIGHEST:
        raise LowpointError("--atmosphere", f"must be {LOWEST:g} to {HIGHEST:g} bar", f"{options.atmosphere:g}",
                            "It is absolute, as a barometer shows it.")  # fmt: skip
    return {"elevation": None, "atmosphere": options.atmosphere * BAR}


def _check_show(options: argparse.Namespace) -> None:
    if options.out is not None:
        raise LowpointError(
            "--show", "must stand without -o", f"-o {options.out}", "It stops before anything is judged."
        )
    if options.watch is not None:
        raise LowpointError("--show", "must stand without --watch", remedy="Name the data sheets.")
    _check_layout(options)


def _check_layout(options: argparse.Namespace) -> None:
    """LowpointError where the layout that is asked for is not to be written."""
    from lowpoint.faces.targets import checked_target
    from lowpoint.fleet.finding import several

    if options.write_layout is None:
        return
    if several(options.sheets):
        raise LowpointError("--write-layout", "must be asked for with one sheet", f"{len(options.sheets)} names",
                            "A layout is that of one vendor's form.")  # fmt: skip
    checked_target(options.write_layout, options.sheets[0], options.overwrite, [".toml"], "--write-layout", "sheet")


def _layout(path: Path | None) -> Layout | None:
    if path is None:
        return None
    from lowpoint.audit.layout import read_layout

    return read_layout(path)


def _show(found: Sequence[Found], many: bool, layout: Layout | None, site: dict[str, float | None],
          options: argparse.Namespace) -> int:  # fmt: skip
    """What was found in each file, and nothing else."""
    from lowpoint.audit.reading import read_sheet

    read: list[Document] = []
    said: list[Any] = []
    for one in found:
        try:
            read.append(read_sheet(one.path, layout=layout, elevation=site["elevation"], atmosphere=site["atmosphere"]))
        except LowpointError as error:
            if not many:
                raise
            _failed(error, options)
            said.append({"path": str(one.path), "error": str(error)})
            continue
        _write_layout(read[-1], options)
        if options.json:
            from lowpoint.audit.as_json import reading_json

            said.append(reading_json(read[-1]))
        else:
            from lowpoint.audit.showing import reading_lines

            _print([*([""] if len(read) > 1 else []), *reading_lines(read[-1])])
    if options.json:
        _print_json(said if many else said[0])
    if not any(sheet.values for document in read for sheet in document.sheets):
        return 2
    doubtful = any(document.findings or any(s.findings for s in document.sheets) for document in read)
    return 1 if doubtful or len(read) < len(found) else 0


def _one(options: argparse.Namespace, site: dict[str, float | None]) -> int:
    """One file: told in full, and with nothing but its claims as JSON."""
    from lowpoint.audit.auditing import audit_file
    from lowpoint.faces.progress import progress_bar

    _check_layout(options)
    path = options.sheets[0]
    layout = _layout(options.layout)
    target = fleet_audit.one_target(options, path, options.overwrite)
    with progress_bar() as bar:
        audit = audit_file(path, layout=layout, elevation=site["elevation"], atmosphere=site["atmosphere"])
        _write_layout(audit.document, options)
        told = _written(audit, target, bar)
    if options.json:
        from lowpoint.audit.as_json import audit_json

        entries = audit_json(audit)
        _print_json(entries[0]["claims"] if len(entries) == 1 else entries)
    else:
        from lowpoint.audit.telling import audit_lines

        _print([*audit_lines(audit, every=options.all), *told])
    return audit.exit_code


def _written(audit: Audit, target: Path | None, bar: Bar) -> list[str]:
    """Write the workbook where one is asked for; what to say of it."""
    if target is None:
        return []
    from lowpoint.audit.output import write_audit

    bar("writing the workbook")
    said = write_audit(audit, target)
    return ["", f"Written: {target}", *said]


def _write_layout(document: Document, options: argparse.Namespace) -> None:
    if options.write_layout is None:
        return
    from lowpoint.audit.layout import layout_text
    from lowpoint.book.saving import replace_file

    text = layout_text(document)
    replace_file(options.write_layout, lambda sink: sink.write(text.encode("utf-8")))


def _failed(error: LowpointError, options: argparse.Namespace) -> None:
    if not options.json:
        print(f"lowpoint: {error}", file=sys.stderr)


def _print(lines: Iterable[str]) -> None:
    from lowpoint.fleet.auditing import printable

    for line in lines:
        print(printable(line))


def _print_json(value: Any) -> None:
    print(json.dumps(value, indent=2, ensure_ascii=False, allow_nan=False))
