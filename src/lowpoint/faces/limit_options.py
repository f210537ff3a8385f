"""The option ``--limit`` of every command that reads files: how much a file may hold and take."""

from __future__ import annotations

import argparse

__all__ = ["add_limits", "limits_of"]


class _ShowLimits(argparse.Action):
    """Prints every limit with its present value and ends, as --help does."""

    def __call__(self, parser: argparse.ArgumentParser, *_: object) -> None:
        print(limit_lines())
        parser.exit()


def add_limits(parser: argparse.ArgumentParser) -> None:
    """Give a command's parser the options ``--limit NAME=VALUE`` (as often as needed) and ``--show-limits``."""
    from lowpoint.book.guard_limits import NAMES

    parser.add_argument("--limit", action="append", default=[], metavar="NAME=VALUE",
                        help=f"how much a file may hold and take: {', '.join(NAMES)}; as often as needed")  # fmt: skip
    parser.add_argument("--show-limits", action=_ShowLimits, nargs=0, help="show the limits with their values and exit")


def limits_of(options: argparse.Namespace):  # type: ignore[no-untyped-def]  # Limits, whose module is loaded late
    """The limits that the words of the command ask for; LowpointError names a wrong one.

    Put them in force around the work: ``with limiting(limits_of(options)): ...``; a worker process has to be told.
    """
    from lowpoint.book.guard_limits import DEFAULT_LIMITS, with_limit

    limits = DEFAULT_LIMITS
    for text in getattr(options, "limit", ()):
        limits = with_limit(limits, text)
    return limits


def limit_lines() -> str:
    """Every limit: its name, its value now, what it bounds."""
    from lowpoint.book.guard_limits import NAMES, in_force, size_text

    lines = []
    for name, known in NAMES.items():
        value = getattr(in_force(), known.field)
        number = f"{value:g}" if isinstance(value, float) else str(value)
        shown = size_text(value) if known.unit == "bytes" else f"{number} {known.unit}".strip()
        lines.append(f"{name:<9} {'no limit' if value == 0 else shown:<12} {known.says}")
    return "\n".join(lines)
