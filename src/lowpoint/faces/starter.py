"""``lowpoint starter``: a book to begin with."""

from __future__ import annotations

import argparse
from pathlib import Path

from lowpoint.errors import LowpointError

__all__ = ["fill", "run"]

KINDS = {"sheet": "a valve list with LP_ formulas, a few example rows and room for your own"}


def fill(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("kind", choices=KINDS, metavar="KIND", help="; ".join(f"{k}: {v}" for k, v in KINDS.items()))
    parser.add_argument("-o", "--out", type=Path, metavar="OUT", help="the file to write (default: <KIND>.xlsx here)")
    parser.add_argument("--us", action="store_true", help="US customary units (LPU_ functions)")
    parser.add_argument("--json", action="store_true", help="one JSON value on standard output")
    parser.epilog = "example: lowpoint starter sheet -o valves.xlsx"


def run(options: argparse.Namespace) -> int:
    from lowpoint.starter import write_sheet

    out: Path = options.out or Path(f"{options.kind}.xlsx")
    if out.exists():
        raise LowpointError(str(out), "must not be there yet", "a file of that name", "Choose another name with -o.")
    if not out.parent.is_dir():
        raise LowpointError(str(out.parent), "must be a folder", "none", "Make it first.")
    write_sheet(out, us=options.us)
    if options.json:
        import json

        print(json.dumps({"out": str(out)}))
    else:
        print(f"wrote {out}; 'lowpoint recalc {out}' computes it without a spreadsheet program")
    return 0
