"""Writing a file so that a reader meets the old one or the new one, never half of either."""

from __future__ import annotations

import errno
import os
import secrets
import stat
from collections.abc import Callable
from contextlib import suppress
from pathlib import Path
from typing import BinaryIO

from lowpoint.book.saving_claims import claim, remove_abandoned
from lowpoint.errors import BookError

__all__ = ["OWNER", "remove_leftovers", "replace_file"]

OWNER = secrets.token_hex(6)
"""Stands in the names of this process's temporary files, so that whoever outlives it can tell and remove them."""

_ELSEWHERE = "Name another output with -o."
_FULL = {errno.ENOSPC, errno.EFBIG, getattr(errno, "EDQUOT", errno.ENOSPC)}
_FORBIDDEN = {errno.EACCES, errno.EPERM, errno.EROFS}


def replace_file(target: Path, fill: Callable[[BinaryIO], object]) -> None:
    """Let ``fill`` write a new file and put it in the target's place in one step.

    The new file grows under a temporary name in the same folder, reaches the disk, and takes over the name;
    the permissions of a file it replaces stay, and a link keeps pointing at the file that is replaced. When
    anything goes wrong the temporary file is removed, the target is as it was, and a BookError says what to
    do.

    >>> replace_file(Path("list.xlsx"), lambda sink: sink.write(data))  # doctest: +SKIP
    """
    real = Path(os.path.realpath(target))
    before = _existing(target, real)
    temporary = real.with_name(f".lowpoint-{OWNER}-{secrets.token_hex(8)}.tmp")
    try:
        remove_abandoned(real.parent)
        _fill(temporary, before, fill, real)
    except OSError as problem:
        raise _explained(target, problem) from problem
    finally:
        with suppress(OSError):  # gone already when all went well
            temporary.unlink()
    _settle_folder(real.parent)


def remove_leftovers(target: Path, owner: str) -> None:
    """Remove what a process that was killed left beside a target; ``owner`` is the OWNER of that process."""
    for left in Path(os.path.realpath(target)).parent.glob(f".lowpoint-{owner}-*.tmp"):
        with suppress(OSError):
            left.unlink()


def _existing(target: Path, real: Path) -> os.stat_result | None:
    """The state of the file to be replaced; None where there is none yet."""
    try:
        before = os.stat(real)
    except FileNotFoundError:
        return None
    except OSError as problem:
        raise _explained(target, problem) from problem
    if not stat.S_ISREG(before.st_mode):
        kind = "a folder" if stat.S_ISDIR(before.st_mode) else "not a regular file"
        raise BookError(str(target), "the output must be a file", kind, _ELSEWHERE)
    # Replacing needs no permission on the file itself, but a read-only mark is somebody's wish.
    if not before.st_mode & (stat.S_IWUSR | stat.S_IWGRP | stat.S_IWOTH) or not os.access(real, os.W_OK):
        raise BookError(str(target), "is read-only and was left as it is", remedy=_ELSEWHERE)
    return before


def _fill(
    temporary: Path, before: os.stat_result | None, fill: Callable[[BinaryIO], object], real: Path
) -> None:  # fmt: skip
    flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | getattr(os, "O_BINARY", 0) | getattr(os, "O_NOFOLLOW", 0)
    # A new file gets what the umask allows; one that replaces another is private until it has that one's
    # mode.
    with os.fdopen(os.open(temporary, flags, 0o600 if before else 0o666), "wb") as sink:
        claim(sink.fileno())
        fill(sink)
        sink.flush()
        os.fsync(sink.fileno())
        if before is not None:
            _keep_marks(temporary, before)
        if os.name != "nt":
            os.replace(temporary, real)  # still claimed
    if os.name == "nt":
        os.replace(temporary, real)  # which takes no open file there


def _keep_marks(temporary: Path, before: os.stat_result) -> None:
    """Owner, where the system lets us give it, then the mode (giving a file away may clear mode bits)."""
    if hasattr(os, "chown"):
        with suppress(OSError):
            os.chown(temporary, before.st_uid, before.st_gid)
    os.chmod(temporary, stat.S_IMODE(before.st_mode))


def _settle_folder(folder: Path) -> None:
    """Ask the system to put the rename on the disk; where it cannot, the file is whole all the same."""
    with suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def _explained(target: Path, problem: OSError) -> BookError:
    name, kept = str(target), "Nothing was written over."
    if problem.errno in _FULL:
        return BookError(
            name, "cannot be written because the disk is full", remedy=f"{kept} Free some space and retry."
        )
    if problem.errno in _FORBIDDEN:
        must = "cannot be written: this file or its folder is read-only, closed to this user, or open elsewhere"
        return BookError(name, must, remedy=f"{kept} {_ELSEWHERE}")
    if problem.errno in (errno.ENOENT, errno.ENOTDIR):
        return BookError(name, "cannot be written because its folder does not exist", remedy="Make the folder first.")
    if problem.errno == errno.ENAMETOOLONG:
        return BookError(name, "cannot be written because its name is too long", remedy=_ELSEWHERE)
    return BookError(name, f"cannot be written ({problem.strerror or problem})", remedy=f"{kept} {_ELSEWHERE}")
