"""Where a command may write: never over its input, over a file only when asked, and under a name that fits."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from lowpoint.errors import LowpointError

__all__ = ["checked_target"]


def checked_target(out: Path, source: Path, overwrite: bool, endings: Sequence[str], option: str = "-o",
                   what: str = "list") -> Path:  # fmt: skip
    """``out``, named with ``option``, where it may be written; LowpointError with the remedy where it may not.

    ``what`` the source is, in a word.
    """
    another = f"Choose another name with {option}"
    if out.suffix.lower() not in endings:
        must = f"the output of {option} must be named {' or '.join(endings)}"
        raise LowpointError(str(out), must, out.suffix or "no ending")
    if not out.parent.is_dir():
        raise LowpointError(str(out.parent), "must be a folder", "none of that name", "Make it first.")
    if out.exists() and source.exists() and out.samefile(source):
        raise LowpointError(str(out), f"must not be the {what} itself", remedy=f"{another}.")
    if out.exists() and not overwrite:
        must = "is there already and was left as it is"
        raise LowpointError(str(out), must, remedy=f"{another}, or ask for --overwrite.")
    return out
