"""The command ``lowpoint``: reads the words, hands over to one module a command, turns errors into exit codes.

Exit codes: 0 done, 1 findings or failed items, 2 misuse, 70 our bug, 130 interrupted.
"""

from __future__ import annotations

import argparse
import importlib
import os
import sys
from collections.abc import Sequence

from lowpoint import __version__
from lowpoint.errors import LowpointError

__all__ = ["main"]

COMMANDS = {
    "recalc": "recompute the LP_ functions of workbooks, and all that depends on them, without a spreadsheet program",
    "survey": "judge a plain list of items and operating cases: verdicts, margins, the worst case of each item",
    "starter": "write a book to begin with",
    "functions": "the reference of the worksheet functions",
    "calc": "the add-in that puts the LP_ functions into the cells of LibreOffice Calc",
    "excel": "the add-in that puts the LP_ functions into the cells of Excel",
}
"""Each command with its one line of help; its module in this package has ``fill(parser)`` and ``run(options)``."""

CAUTION = (
    "Lowpoint supports a qualified engineer: vendor test data, site rules, local codes and licensed practice "
    "come first."
)


def _parser(command: str | None) -> argparse.ArgumentParser:
    """The parser; only the module of the command that was asked for is imported."""
    parser = argparse.ArgumentParser(
        prog="lowpoint",
        description="Cavitation index, sizing and limits of control valves and orifices in liquid service.",
        epilog=CAUTION,
    )
    parser.add_argument("--version", action="version", version=f"lowpoint {__version__}")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", title="commands")
    for name, line in COMMANDS.items():
        sub = commands.add_parser(
            name, help=line, description=line[:1].upper() + line[1:] + ".",
            formatter_class=argparse.RawDescriptionHelpFormatter,
        )  # fmt: skip
        if name == command:
            _module(name).fill(sub)
    return parser


def _module(name: str):  # type: ignore[no-untyped-def]  # a module with fill and run
    return importlib.import_module(f"lowpoint.faces.{name}")


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command and return its exit code; no exception leaves this function."""
    words = list(sys.argv[1:] if arguments is None else arguments)
    command = next((word for word in words if word in COMMANDS), None)
    try:
        parser = _parser(command)
        options = parser.parse_args(words)
        if options.command is None:
            parser.print_help()
            return 2
        code: int = _module(options.command).run(options)
        sys.stdout.flush()
        return code
    except LowpointError as error:
        print(f"lowpoint: {error}", file=sys.stderr)
        return error.exit_code
    except SystemExit as left:
        return left.code if isinstance(left.code, int) else 2
    except KeyboardInterrupt:
        print("lowpoint: interrupted", file=sys.stderr)
        return 130
    except BrokenPipeError:
        # The reader (head, less) went away; that is no fault. Keep the interpreter from complaining at its exit.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except OSError as trouble:
        # A stream has no file name: the disk behind a redirected output is full, or gone.
        return _our_bug(trouble) if trouble.filename else _unheard(trouble)
    except Exception as bug:
        return _our_bug(bug)


def _unheard(trouble: OSError) -> int:
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    print(
        f"lowpoint: the output could not be printed ({trouble.strerror}); files named on the command line may have "
        "been written all the same.",
        file=sys.stderr,
    )
    return 1


def _our_bug(bug: Exception) -> int:
    import traceback

    traceback.print_exception(bug, file=sys.stderr)
    print(
        f"lowpoint: this is our bug ({type(bug).__name__}); a file is written whole or not at all. "
        f"Please report the lines above with 'lowpoint --version' ({__version__}).",
        file=sys.stderr,
    )
    return 70
