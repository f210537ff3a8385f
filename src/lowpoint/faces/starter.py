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
    "datasheet": "a vendor's data sheet (not made by this version yet)",
}
MADE = ("sheet", "list")
NAMES = {"sheet": ("valves.xlsx", "valves-us.xlsx"), "list": ("list.xlsx", "list-us.xlsx")}
"""The default names, without and with --us."""


def fill(parser: argparse.ArgumentParser) -> None:
    add = parser.add_argument
    add("kind", choices=KINDS, metavar="KIND", help="; ".join(f"{kind}: {KINDS[kind]}" for kind in MADE))
    add(
        "-o",
        "--out",
        type=Path,
        metavar="OUT",
        help="the file to write, or its folder (default: valves.xlsx or list.xlsx)",
    )
    add("--us", action="store_true", help="US customary units, LPU_ functions (default name: valves-us.xlsx)")
    add("--overwrite", action="store_true", help="replace a file of that name")
    add("--json", action="store_true", help="one JSON value on standard output")
    parser.epilog = (
        "examples:\n  lowpoint starter sheet -o valves.xlsx\n  lowpoint starter list -o items.xlsx\n\n"
        "The sheet is filled with the valves of an invented utility, some rows with planted mistakes; its sheet\n"
        "'Read me' says how to make it your own."
    )


def run(options: argparse.Namespace) -> int:
    if options.kind not in MADE:
        raise LowpointError(
            f"starter {options.kind}", f"is not made by this version yet; what there is: {', '.join(MADE)}",
            remedy="Nothing was written.",
        )  # fmt: skip
    out = _target(options.out, NAMES[options.kind][options.us], overwrite=options.overwrite)
    if options.kind == "list":
        return _list(out, us=options.us, as_json=options.json)
    items, cases = _write(out, us=options.us)
    if options.json:
        import json

        print(json.dumps({"out": str(out), "items": items, "cases": cases}))
    else:
        print(f"Written: {out}, {items} items with {cases} cases, computed. 'lowpoint recalc {out}' computes it anew.")
    return 0


def _list(out: Path, *, us: bool, as_json: bool) -> int:
    """Write the blank list."""
    from lowpoint.book.saving import replace_file
    from lowpoint.starter.list_form import list_bytes

    _check_unlocked(out)
    replace_file(out, lambda sink: sink.write(list_bytes(us=us)))
    if as_json:
        import json

        print(json.dumps({"out": str(out), "items": 0, "cases": 0}))
    else:
        print(f"Written: {out}. Fill its sheet List; 'lowpoint survey {out}' judges it.")
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
