"""``lowpoint starter``: a book to begin with."""

from __future__ import annotations

import argparse
import tempfile
from pathlib import Path

from lowpoint.errors import LowpointError

__all__ = ["fill", "run"]

KINDS = {
    "sheet": "a valve list with LP_ formulas: items, operating cases, limits, verdicts, summary, chart",
    "list": "a blank list for lowpoint survey, with help, choices and an example",
    "datasheet": "a valve's data sheet to fill in, which lowpoint audit reads, with an example",
}
NAMES = {"sheet": ("valves.xlsx", "valves-us.xlsx"), "list": ("list.xlsx", "list-us.xlsx"),
         "datasheet": ("datasheet.xlsx", "datasheet-us.xlsx")}  # fmt: skip
"""The default names, without and with --us."""


def fill(parser: argparse.ArgumentParser) -> None:
    add = parser.add_argument
    add("kind", choices=KINDS, metavar="KIND", help="; ".join(f"{kind}: {what}" for kind, what in KINDS.items()))
    add(
        "-o",
        "--out",
        type=Path,
        metavar="OUT",
        help="the file to write, or its folder (default: valves.xlsx, list.xlsx, datasheet.xlsx)",
    )
    add("--us", action="store_true", help="US customary units, LPU_ functions (default name: ...-us.xlsx)")
    add("--overwrite", action="store_true", help="replace a file of that name")
    add("--json", action="store_true", help="one JSON value on standard output")
    parser.epilog = (
        "examples:\n  lowpoint starter sheet -o valves.xlsx\n  lowpoint starter list -o items.xlsx\n"
        "  lowpoint starter datasheet --us\n\n"
        "The sheet is filled with the valves of an invented utility, some rows with planted mistakes; its sheet\n"
        "'Read me' says how to make it your own."
    )


def run(options: argparse.Namespace) -> int:
    out = _target(options.out, NAMES[options.kind][options.us], overwrite=options.overwrite)
    if options.kind != "sheet":
        return _form(options.kind, out, us=options.us, as_json=options.json)
    items, cases = _write(out, us=options.us)
    if options.json:
        import json

        print(json.dumps({"out": str(out), "items": items, "cases": cases}))
    else:
        print(f"Written: {out}, {items} items with {cases} cases, computed. 'lowpoint recalc {out}' computes it anew.")
    return 0


def _form(kind: str, out: Path, *, us: bool, as_json: bool) -> int:
    """Write a form to fill in: the blank list, or the data sheet with its example."""
    from lowpoint.book.saving import replace_file

    _check_unlocked(out)
    if kind == "list":
        from lowpoint.starter.list_form import list_bytes as form_bytes

        items, cases, told = 0, 0, f"Fill its sheet List; 'lowpoint survey {out}' judges it."
    else:
        from lowpoint.starter.datasheet_form import datasheet_bytes as form_bytes
        from lowpoint.starter.datasheet_lines import CASES

        items, cases = 1, len(CASES)
        told = f"Type over its sheet Data sheet; 'lowpoint audit {out}' checks it."
    replace_file(out, lambda sink: sink.write(form_bytes(us=us)))
    if as_json:
        import json

        print(json.dumps({"out": str(out), "items": items, "cases": cases}))
    else:
        print(f"Written: {out}. {told}")
    return 0


def _check_unlocked(out: Path) -> None:
    from lowpoint.book.package import locked

    owner = locked(out)
    if owner is not None:
        raise LowpointError(str(out), f"is open: {owner} has it", remedy="Close it there, or choose another name.")


def _target(given: Path | None, name: str, *, overwrite: bool) -> Path:
    """Where the book goes; LowpointError where that is no place for it."""
    out = given or Path(name)
    if out.is_dir():
        out = out / name
    if out.suffix.lower() != ".xlsx":
        raise LowpointError(str(out), "the book must be named .xlsx", out.suffix or "no ending")
    if not out.parent.is_dir():
        raise LowpointError(str(out.parent), "must be a folder", "none of that name", "Make it first.")
    if out.exists() and not overwrite:
        must = "is there already and was left as it is"
        raise LowpointError(str(out), must, remedy="Choose another name with -o, or ask for --overwrite.")
    return out


def _write(out: Path, *, us: bool) -> tuple[int, int]:
    """Write the book with its values; how many items and cases it has. Nothing is left behind where that fails."""
    from lowpoint.book.recalc import recalculate
    from lowpoint.starter import sample, write_sheet

    _check_unlocked(out)
    with tempfile.TemporaryDirectory(prefix="lowpoint-") as folder:
        plain = Path(folder, "plain.xlsx")  # the name asked for may be too long for this place
        write_sheet(plain, us=us)
        recalculate(plain, out)
    items = sample(us=us).items
    return len(items), sum(len(item.cases) for item in items)
