"""The helper process of the add-in: a line of JSON in, a line of JSON out, until the office closes its end."""

from __future__ import annotations

import json
import sys
from typing import Any, BinaryIO

from lowpoint.faces.calc_addin.answers import cell_of, greeting
from lowpoint.faces.calc_addin.inside.values import to_line

__all__ = ["main", "serve"]


def serve(requests: BinaryIO, replies: BinaryIO) -> None:
    """Greet, then answer each line ``[name, arguments]``; a bug of ours is told and does not end the process."""
    _send(replies, greeting())
    for line in requests:
        try:
            name, arguments = json.loads(line)
            reply: dict[str, Any] = {"value": to_line(cell_of(name, arguments))}
        except Exception as bug:
            reply = {"bug": f"{type(bug).__name__}: {bug}"}
        _send(replies, reply)


def _send(replies: BinaryIO, reply: dict[str, Any]) -> None:
    replies.write(json.dumps(reply).encode() + b"\n")
    replies.flush()


def main() -> None:
    """Serve the process that started this one; whatever else prints goes to its log."""
    replies, sys.stdout = sys.stdout.buffer, sys.stderr
    serve(sys.stdin.buffer, replies)


if __name__ == "__main__":
    main()
