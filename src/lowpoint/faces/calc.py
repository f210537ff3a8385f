"""``lowpoint calc``: the LibreOffice Calc add-in, built, installed, asked about, taken out; plain names restored."""

from __future__ import annotations

import argparse
import json
from pathlib import Path
from typing import Any

__all__ = ["fill", "run"]


def fill(parser: argparse.ArgumentParser) -> None:
    actions = parser.add_subparsers(dest="action", metavar="ACTION", required=True, title="actions")

    def action(name: str, line: str) -> argparse.ArgumentParser:
        sub = actions.add_parser(name, help=line, description=line[:1].upper() + line[1:] + ".")
        sub.add_argument("--json", action="store_true", help="one JSON value on standard output")
        sub.epilog = f"example: lowpoint calc {name} {_EXAMPLES[name]}".rstrip()
        return sub

    build = action("build", "write the add-in as a file for Calc's own extension manager")
    build.add_argument("file", type=Path, metavar="FILE.oxt", help="the file to write")
    install = action("install", "install or renew the add-in for this user and this Python")
    install.add_argument("--helper", action="store_true", help="always compute in a process beside the office")
    for sub in (
        install,
        action("status", "tell whether the add-in is installed, and how it computes"),
        action("uninstall", "take the add-in and its settings out"),
    ):
        sub.add_argument("--profile", type=Path, metavar="DIR", help="the office's profile (default: this user's own)")
    repair = action("repair", "spell the LP_ names plainly in a book that Calc saved without the add-in's help")
    repair.add_argument("book", type=Path, metavar="BOOK", help="an .xlsx, .xlsm or .ods file; changed in its place")
    sources = action("sources", "write the generated texts of the add-in into a folder")
    sources.add_argument("folder", type=Path, metavar="DIR", help="the folder, in this repository addin/calc")
    parser.epilog = "example: lowpoint calc install; every action takes --json and has its own --help"


_EXAMPLES = {
    "build": "lowpoint.oxt", "install": "--profile ~/office-profile", "status": "", "uninstall": "",
    "repair": "valves.xlsx", "sources": "addin/calc",
}  # fmt: skip


def run(options: argparse.Namespace) -> int:
    code, data, text = _ACTIONS[options.action](options)
    print(json.dumps(data, ensure_ascii=False) if options.json else text)
    return code


Answer = tuple[int, dict[str, Any], str]


def _build(options: argparse.Namespace) -> Answer:
    from lowpoint.book.saving import replace_file
    from lowpoint.faces.calc_addin.bundle import bundle

    content = bundle()
    replace_file(options.file, lambda sink: sink.write(content))
    return 0, {"out": str(options.file), "bytes": len(content)}, f"wrote {options.file} ({len(content)} bytes)"


def _install(options: argparse.Namespace) -> Answer:
    from lowpoint.faces.calc_addin.installing import install

    data = install(_profile(options), helper=options.helper)
    return 0, data, f"installed the add-in of Lowpoint {data['addin']} in {data['profile']}; it runs {data['runs']}"


def _status(options: argparse.Namespace) -> Answer:
    from lowpoint.faces.calc_addin.installing import status

    data = status(_profile(options))
    if data["addin"] is None:
        return 1, data, f"the add-in is not installed in {data['profile']}"
    lines = [f"{name.replace('_', ' '):<14} {value}" for name, value in data.items() if value is not None]
    return (1 if data["problem"] else 0), data, "\n".join(lines)


def _uninstall(options: argparse.Namespace) -> Answer:
    from lowpoint.faces.calc_addin.installing import uninstall

    profile = _profile(options)
    removed = uninstall(profile)
    words = "removed the add-in from" if removed else "the add-in was not installed in"
    return 0, {"profile": str(profile), "removed": removed}, f"{words} {profile}"


def _repair(options: argparse.Namespace) -> Answer:
    from lowpoint.faces.calc_addin.plain import restore

    count = restore(options.book)
    return 0, {"book": str(options.book), "formulas": count}, f"{options.book}: {count} formulas spelled plainly"


def _sources(options: argparse.Namespace) -> Answer:
    from lowpoint.faces.calc_addin.bundle import write_sources

    written = [str(path) for path in write_sources(options.folder)]
    return 0, {"written": written}, "wrote " + ", ".join(written)


_ACTIONS = {
    "build": _build, "install": _install, "status": _status, "uninstall": _uninstall, "repair": _repair,
    "sources": _sources,
}  # fmt: skip


def _profile(options: argparse.Namespace) -> Path:
    from lowpoint.faces.calc_addin.office import default_profile

    given: Path = options.profile or default_profile()
    return given.expanduser().resolve()
