"""Plain names in saved books: Calc stores a call as service and method; every other reader knows LP_SIGMA.

Only the formulas that hold such a call change; all else of the file goes out byte for byte.
"""

from __future__ import annotations

import os
import re
from collections.abc import Callable
from pathlib import Path

from lowpoint.book.archive import Archive, DamageError, ExcessError
from lowpoint.book.repack import rewrite
from lowpoint.book.saving import replace_file
from lowpoint.errors import BookError
from lowpoint.faces.calc_addin.signatures import SERVICE
from lowpoint.registry import canonical

__all__ = ["SUFFIXES", "plain_formula", "restore"]

SUFFIXES = (".xlsx", ".xlsm", ".xltx", ".xltm", ".ods", ".ots")
LARGEST = 1 << 30
"""Bytes of one part; more is no workbook that a person works with."""

_SERVICE = SERVICE.upper().encode()
# Text in quotation marks and quoted sheet names may hold anything; they are stepped over.
_CALL = re.compile(
    rb"""&quot;.*?&quot;|"[^"]*"|&apos;.*?&apos;|'[^']*'|(?<![\w.])""" + re.escape(_SERVICE) + rb"""\.(\w+)(?=\s*\()""",
    re.IGNORECASE | re.DOTALL,
)
_ELEMENT = re.compile(
    rb"(<(?:\w+:)?(?:f|definedName|formula|formula1|formula2|calculatedColumnFormula|totalsRowFormula)(?:\s[^<>]*)?>)([^<]+)"
)
_ATTRIBUTE = re.compile(rb"((?:table:(?:formula|expression|condition)|style:condition|calcext:value)=\")([^\"]*)")


def plain_formula(formula: bytes) -> bytes:
    """A formula as stored in XML, its calls spelled plainly.

    >>> plain_formula(b'ORG.LOWPOINT.FUNCTIONS.SIGMA(A1,B1,C1)*2')
    b'LP_SIGMA(A1,B1,C1)*2'
    """
    return _CALL.sub(lambda found: _plain_name(found[0], found[1]), formula)


def _plain_name(whole: bytes, method: bytes | None) -> bytes:
    if method is None:
        return whole
    name = canonical(method.decode("utf-8", "replace")) or canonical("LP_" + method.decode("utf-8", "replace"))
    return whole if name is None else name.encode()


def restore(path: Path) -> int:
    """Spell the calls of a saved book plainly, in its place; gives how many formulas changed.

    The time of the file stays: the office that just wrote it would think that somebody else had changed it.
    """
    if path.suffix.lower() not in SUFFIXES:
        must = f"must be a workbook ({' '.join(SUFFIXES)})"
        raise BookError(str(path), must, path.suffix or "no ending", "Save it as one of these in Calc.")
    data, before = _read(path)
    try:
        changed, count = _changed(Archive(data))
    except (DamageError, ExcessError) as damage:
        must = f"is damaged or protected by a password: {damage}"
        raise BookError(str(path), must, remedy="Save it again in Calc, without a password.") from None
    if count:
        replace_file(path, lambda sink: rewrite(Archive(data), sink, changed))
        os.utime(path, ns=(before.st_atime_ns, before.st_mtime_ns))
    return count


def _read(path: Path) -> tuple[bytes, os.stat_result]:
    try:
        with path.open("rb") as source:
            before = os.fstat(source.fileno())
            if before.st_size > LARGEST:
                raise BookError(str(path), f"must be at most {LARGEST} bytes long", str(before.st_size))
            return source.read(), before
    except OSError as problem:
        raise BookError(str(path), f"cannot be read ({problem.strerror or problem})") from None


def _changed(archive: Archive) -> tuple[dict[str, bytes], int]:
    """The parts that hold a stored call, spelled plainly, and how many formulas that were."""
    changed: dict[str, bytes] = {}
    total = 0
    for entry in archive.entries:
        pattern = _pattern_of(entry.name)
        if pattern is None or entry.encrypted or entry.size > LARGEST:
            continue
        content = archive.read(entry)
        if _SERVICE not in content.upper():
            continue
        content, count = _respelled(content, pattern)
        if count:
            changed[entry.name], total = content, total + count
    return changed, total


def _pattern_of(part: str) -> re.Pattern[bytes] | None:
    if part.startswith("xl/") and part.endswith(".xml"):
        return _ELEMENT
    return _ATTRIBUTE if part == "content.xml" else None


def _respelled(content: bytes, pattern: re.Pattern[bytes]) -> tuple[bytes, int]:
    count = 0

    def formula(found: re.Match[bytes]) -> bytes:
        nonlocal count
        plain = plain_formula(found[2])
        count += plain != found[2]
        return found[1] + plain

    change: Callable[[re.Match[bytes]], bytes] = formula
    return pattern.sub(change, content), count
