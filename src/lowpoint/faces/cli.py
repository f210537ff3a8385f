"""The command ``lowpoint``: reads the words, hands over to one module a command, turns errors into exit codes.

Exit codes: 0 done, 1 findings or failed items, 2 misuse, 70 our bug, 130 interrupted.
"""

from __future__ import annotations

import argparse
import errno
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
    "audit": "recalculate the claims of a vendor's data sheet, and name the mistakes that would explain what differs",
    "compare": "tell what changed between two issues of a list, and which verdicts turned",
    "explain": "show the whole working of one item of a list, step by step, with equation, numbers, units and source",
    "starter": "write a book to begin with",
    "functions": "show the reference of the worksheet functions",
    "calc": "install the add-in that puts the LP_ functions into the cells of LibreOffice Calc",
    "excel": "install the add-in that puts the LP_ functions into the cells of Excel",
}
"""Each command with its one line of help; its module in this package has ``fill(parser)`` and ``run(options)``."""

READERS = ("recalc", "survey", "compare", "explain", "audit")
"""Commands that read files from anywhere, which may hold and take only so much."""

LONGEST_NAME = 200

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
    parser.add_argument("--version", action="version", version=f"lowpoint {__version__}",
                        help="show the version and exit")  # fmt: skip
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", title="commands")
    for name, line in COMMANDS.items():
        sub = commands.add_parser(
            name, help=line, description=line[:1].upper() + line[1:] + ".",
            formatter_class=argparse.RawDescriptionHelpFormatter,
        )  # fmt: skip
        if name == command:
            _module(name).fill(sub)
            if name in READERS:
                from lowpoint.faces.limit_options import add_limits

                add_limits(sub)
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
        code = _run(options)
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
    except MemoryError:
        print("lowpoint: the work needs more memory than there is, or than --limit memory allows.", file=sys.stderr)
        return 2
    except OSError as trouble:
        # A stream has no file name: the disk behind a redirected output is full, or gone.
        return _named(trouble) if trouble.filename else _unheard(trouble)
    except Exception as bug:
        return _our_bug(bug)


def _run(options: argparse.Namespace) -> int:
    """The command's work, within the limits that its words ask for."""
    run = _module(options.command).run
    if options.command not in READERS:
        return int(run(options))
    from lowpoint.book.guard_limits import limiting
    from lowpoint.book.guard_memory import bound_memory
    from lowpoint.faces.limit_options import limits_of

    limits = limits_of(options)
    bound_memory(limits.memory)
    with limiting(limits):
        return int(run(options))


def _named(trouble: OSError) -> int:
    """A file or folder that the system does not give us: no fault of ours unless it is one of our own that lacks."""
    words = {"ENAMETOOLONG", "ELOOP", "EACCES", "EPERM", "EROFS", "ENOSPC", "EDQUOT", "EIO", "ENOTDIR", "ESTALE"}
    if errno.errorcode.get(trouble.errno or 0) not in words:
        return _our_bug(trouble)
    name = os.fsdecode(trouble.filename)
    shown = name if len(name) <= LONGEST_NAME else f"{name[:LONGEST_NAME]}..."
    print(f"lowpoint: {shown}: cannot be used ({trouble.strerror}). Name another one.", file=sys.stderr)
    return 2


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
