"""``lowpoint excel``: the add-in for Excel, built on any system; installed, asked about and taken out on Windows."""

from __future__ import annotations

import argparse
import json
import sys
from pathlib import Path
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from lowpoint.faces.excel_addin.machine import Machine

__all__ = ["fill", "run"]

_EXAMPLES = {
    "build": "lowpoint.xlam", "install": "", "status": "", "uninstall": "",
    "sources": "addin/excel",
}  # fmt: skip


def fill(parser: argparse.ArgumentParser) -> None:
    actions = parser.add_subparsers(dest="action", metavar="ACTION", required=True, title="actions")

    def action(name: str, line: str) -> argparse.ArgumentParser:
        sub = actions.add_parser(name, help=line, description=line[:1].upper() + line[1:] + ".")
        sub.add_argument("--json", action="store_true", help="one JSON value on standard output")
        sub.epilog = f"example: lowpoint excel {name} {_EXAMPLES[name]}".rstrip()
        return sub

    build = action("build", "write the add-in as a file, on any system")
    build.add_argument("file", type=Path, metavar="FILE.xlam", help="the file to write")
    build.add_argument("--python", metavar="PATH", help="the Python that Excel's machine runs (default: this one)")
    action("install", "build the add-in and put it where Excel starts it (Windows)")
    action("status", "tell whether the add-in is installed and would work (Windows)")
    action("uninstall", "take the add-in out (Windows)")
    sources = action("sources", "write the VBA of the add-in as texts into a folder")
    sources.add_argument("folder", type=Path, metavar="DIR", help="the folder, in this repository addin/excel")
    parser.epilog = "example: lowpoint excel install; every action takes --json and has its own --help"


def run(options: argparse.Namespace) -> int:
    code, data, text = _ACTIONS[options.action](options)
    print(json.dumps(data, ensure_ascii=False) if options.json else text)
    return code


Answer = tuple[int, dict[str, Any], str]


def _machine() -> Machine:
    from lowpoint.faces.excel_addin.machine import Machine

    return Machine()


def _build(options: argparse.Namespace) -> Answer:
    from lowpoint.book.saving import replace_file
    from lowpoint.errors import LowpointError
    from lowpoint.faces.excel_addin.building import build

    if options.file.suffix.lower() != ".xlam":
        raise LowpointError(str(options.file), "must be an add-in (.xlam)", options.file.suffix or "no ending")
    content = build(options.python or sys.executable)
    replace_file(options.file, lambda sink: sink.write(content))
    return 0, {"out": str(options.file), "bytes": len(content)}, f"wrote {options.file} ({len(content)} bytes)"


def _install(options: argparse.Namespace) -> Answer:
    from lowpoint.faces.excel_addin.installing import install

    data = install(_machine())
    told = f"installed the add-in of Lowpoint {data['addin']}: {data['file']}; start Excel again"
    return (1 if data["problem"] else 0), data, "\n".join(filter(None, (told, data["problem"])))


def _status(options: argparse.Namespace) -> Answer:
    from lowpoint.faces.excel_addin.installing import status

    data = status(_machine())
    if data["addin"] is None and data["problem"] is None:
        return 1, data, f"the add-in is not installed: there is no {data['file']}"
    lines = [f"{name.replace('_', ' '):<12} {value}" for name, value in data.items() if value is not None]
    return (1 if data["problem"] else 0), data, "\n".join(lines)


def _uninstall(options: argparse.Namespace) -> Answer:
    from lowpoint.faces.excel_addin.installing import uninstall

    removed = uninstall(_machine())
    return 0, {"removed": removed}, "removed the add-in" if removed else "the add-in was not installed"


def _sources(options: argparse.Namespace) -> Answer:
    from lowpoint.faces.excel_addin.vba import write_sources

    written = [str(path) for path in write_sources(options.folder)]
    return 0, {"written": written}, "wrote " + ", ".join(written)


_ACTIONS = {
    "build": _build, "install": _install, "status": _status, "uninstall": _uninstall, "sources": _sources,
}  # fmt: skip
