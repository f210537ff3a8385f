"""A bound on the memory of this process, where the system keeps one, and a sentence when it is reached."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager

from lowpoint.book.guard_limits import in_force
from lowpoint.errors import BookError

__all__ = ["bound_memory", "enough_memory"]


def bound_memory(most: int) -> bool:
    """Let this process hold no more than ``most`` bytes of its own data from now on; whether the system keeps that.

    On Linux only (RLIMIT_DATA, which since 4.7 counts private mappings too; source: setrlimit(2), from memory):
    macOS takes the number and does not keep it, Windows has no such call. It cannot be raised again and holds for the
    whole process, so it is for a worker that is there for books alone. Python code meets it as MemoryError, native
    code may end the process, which whoever started the worker tells. Threads count with the stack that they may use.
    """
    if sys.platform != "linux" or most <= 0:
        return False
    import resource

    _, hard = resource.getrlimit(resource.RLIMIT_DATA)
    new = most if hard == resource.RLIM_INFINITY else min(most, hard)
    resource.setrlimit(resource.RLIMIT_DATA, (new, new))
    return True


@contextmanager
def enough_memory(book: str | os.PathLike[str]) -> Iterator[None]:
    """Turn the want of memory within the block into a BookError; nothing has been written then."""
    try:
        yield
    except MemoryError:
        most = in_force().memory
        raise _short(str(book), most) from None


def _short(book: str, most: int) -> BookError:
    from lowpoint.book.guard_limits import size_text

    said = f"within {size_text(most)} of memory" if most else "within the memory of this machine"
    remedy = "Nothing was written. Split the workbook" + (", or allow more: --limit memory=..." if most else ".")
    return BookError(book, f"must be worked on {said}", "more", remedy)
