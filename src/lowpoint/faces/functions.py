"""``lowpoint functions``: the reference, from the registry."""

from __future__ import annotations

import argparse
import json

__all__ = ["fill", "run"]


def fill(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("name", nargs="?", metavar="NAME", help="one function, with or without LP_ or LPU_")
    parser.add_argument("--json", action="store_true", help="one JSON value on standard output")
    parser.add_argument("--page", action="store_true", help="the whole reference as a Markdown page")
    parser.epilog = "example: lowpoint functions LP_COEFFICIENT"


def run(options: argparse.Namespace) -> int:
    from lowpoint import reference
    from lowpoint.registry import functions

    if options.json:
        one = reference.as_data(reference.find(options.name)) if options.name else None
        data = one or [reference.as_data(function) for function in functions.values()]
        print(json.dumps(data, indent=2, ensure_ascii=False))
    elif options.page:
        print(reference.as_page(), end="")
    else:
        print(reference.as_text(reference.find(options.name)) if options.name else reference.overview())
    return 0
