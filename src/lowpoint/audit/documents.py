"""Text PDFs as pages of cells: characters with their places, put together to lines and parted where gaps are wide.

The library is pypdfium2 (BSD or Apache licence, no further dependency, wheels for Linux, macOS and Windows): it holds
the reader of a widely used browser, which is made to meet broken and hostile files. It is the optional part ``pdf``.
"""

from __future__ import annotations

import math
import re
from collections import Counter
from ctypes import byref, c_double
from dataclasses import dataclass
from typing import Any

from lowpoint.audit.cells import Cell, Page
from lowpoint.errors import LowpointError

__all__ = ["read_document"]

MOST_PAGES = 40
MOST_SIGNS = 40_000
"""Of one page; a full page of small type has some 8 000."""
MOST_LINES = 400
"""Of one page."""
SAME_LINE = 0.45
"""Baselines nearer than this share of the size of type are one line (subscripts, superscripts)."""
GAP = 0.75
"""A wider gap, in sizes of type, parts two cells; two spaces of usual type stay below."""
DIGITS = 0.45
"""Between two digits: more than the space that parts thousands."""
SPACE = 0.13
MUST = "must be a PDF with text"
LACKING = "needs an optional part for PDF documents, which is not installed"


@dataclass(slots=True)
class _Sign:
    text: str
    left: float
    right: float
    base: float
    size: float


def read_document(data: bytes, path: str) -> tuple[list[Page], list[tuple[str, str, str, str]]]:
    """The pages of a PDF's bytes that hold text; LowpointError where there is none, or it cannot be opened."""
    try:
        import pypdfium2
        import pypdfium2.raw as raw
    except ImportError:
        raise LowpointError(path, LACKING, remedy="Install it with: pip install 'lowpoint[pdf]'") from None
    try:
        document = pypdfium2.PdfDocument(data)
    except pypdfium2.PdfiumError as problem:
        if "password" in str(problem).lower():
            must = "is protected with a password"
            raise LowpointError(path, must, remedy="Ask for a copy without one, or save one.") from None
        raise LowpointError(
            path, "is damaged, or no PDF", remedy="Fetch it again, or print it to a PDF anew."
        ) from None
    pages, notes = [], []
    try:
        count = len(document)
        for number in range(min(count, MOST_PAGES)):
            page = _page(document, number, raw)
            if page is not None:
                pages.append(page)
        if count > MOST_PAGES:
            notes.append(
                (
                    "unread",
                    "",
                    f"the document has {count} pages; the first {MOST_PAGES} were read",
                    "Send the data sheets alone.",
                )
            )
    finally:
        document.close()
    if not pages:
        remedy = "It is a scan or a drawing: ask the vendor for the sheet as .xlsx, .csv or a PDF made from a program."
        raise LowpointError(path, "has no text that could be read", remedy=remedy)
    return pages, notes


def _page(document: Any, number: int, raw: Any) -> Page | None:
    try:
        page = document[number]
        text = page.get_textpage()
    except Exception:  # a single broken page does not stop the others
        return None
    try:
        signs = _upright(_signs(text, raw))
    finally:
        text.close()
        page.close()
    lines = _lines(signs)[:MOST_LINES]
    found = Page(f"page {number + 1}", [], exact=False)
    for row, line in enumerate(lines, 1):
        for part, (left, right, words) in enumerate(_parted(line), 1):
            place = f"page {number + 1}, line {row}, part {part}"
            if not found.add(Cell(row, left, right, place, words, bottom=row)):
                return found
    return found if found.cells else None


def _signs(text: Any, raw: Any) -> list[tuple[_Sign, float, float]]:
    """Every printed character with its box, its origin and its angle."""
    count = min(raw.FPDFText_CountChars(text), MOST_SIGNS)
    box, x, y = raw.FS_RECTF(), c_double(), c_double()
    found = []
    for place in range(count):
        code = raw.FPDFText_GetUnicode(text, place)
        if code < 33 or raw.FPDFText_IsGenerated(text, place) == 1 or code in (0xA0, 0xFFFE, 0xFFFF):
            continue
        if not raw.FPDFText_GetLooseCharBox(text, place, byref(box)):
            continue
        raw.FPDFText_GetCharOrigin(text, place, byref(x), byref(y))
        angle = raw.FPDFText_GetCharAngle(text, place)
        size = abs(box.top - box.bottom) if abs(math.cos(angle)) > 0.7 else abs(box.right - box.left)
        sign = _Sign(chr(code), box.left, box.right, box.bottom, raw.FPDFText_GetFontSize(text, place) or size)
        if sign.size < 2.0:  # the matrix of the text scales it
            sign.size = max(size, 0.1)
        found.append((sign, angle, box.top, x.value, y.value))
    return [(_turned(sign, angle, top, x0, y0), round(angle / (math.pi / 2)) % 4) for sign, angle, top, x0, y0 in found]  # type: ignore[misc]


def _turned(sign: _Sign, angle: float, top: float, x: float, y: float) -> _Sign:
    """A character as if its text ran from left to right; pages turned by a quarter read like upright ones."""
    quarter = round(angle / (math.pi / 2)) % 4
    if quarter == 1:  # runs down the page
        return _Sign(sign.text, -top, -sign.base, x, sign.size)
    if quarter == 2:
        return _Sign(sign.text, -sign.right, -sign.left, -y, sign.size)
    if quarter == 3:  # runs up the page
        return _Sign(sign.text, sign.base, top, -x, sign.size)
    return _Sign(sign.text, sign.left, sign.right, y, sign.size)


def _upright(signs: Any) -> list[_Sign]:
    """Characters of the direction that most have; the others are bands at the side, which name no value."""
    if not signs:
        return []
    most = Counter(turn for _, turn in signs).most_common(1)[0][0]
    return [sign for sign, turn in signs if turn == most]


def _lines(signs: list[_Sign]) -> list[list[_Sign]]:
    """Characters by line, from the top; each line from left to right."""
    lines: list[list[_Sign]] = []
    top, size = math.inf, 1.0
    for sign in sorted(signs, key=lambda s: -s.base):
        if top - sign.base > SAME_LINE * max(size, sign.size):
            lines.append([])
            top, size = sign.base, sign.size
        elif sign.size > 1.2 * size:  # the line began with a superscript
            top, size = sign.base, sign.size
        lines[-1].append(sign)
    return [sorted(line, key=lambda s: s.left) for line in lines]


def _parted(line: list[_Sign]) -> list[tuple[float, float, str]]:
    """The cells of a line: left, right, text."""
    kept = _without_leaders(line)
    cells: list[tuple[float, float, str]] = []
    words, left, right, last = "", 0.0, -math.inf, 0.0
    for sign in kept:
        size = max(sign.size, last)
        gap = sign.left - right
        between = words[-1:].isdigit() and sign.text.isdigit()
        if words and gap > (DIGITS if between else GAP) * size:
            cells.append((left, right, words))
            words = ""
        if not words:
            left = sign.left
        elif gap > SPACE * size:
            words += " "
        if words and abs(sign.left - left) < 0.1 and words[-1:] == sign.text and gap < -0.5 * size:
            continue  # bold made by printing twice
        words += sign.text
        right, last = max(sign.right, left), sign.size
    if words:
        cells.append((left, right, words))
    return [(left, right, text.strip()) for left, right, text in cells if text.strip()]


def _without_leaders(line: list[_Sign]) -> list[_Sign]:
    """A line without rows of points and strokes that only lead the eye."""
    text = "".join(sign.text for sign in line)
    drop = {place for match in re.finditer(r"[._·…\-]{4,}|[|¦]", text) for place in range(*match.span())}
    return [sign for place, sign in enumerate(line) if place not in drop]
