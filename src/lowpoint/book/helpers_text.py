"""Helper functions of text."""

from __future__ import annotations

import itertools
import re
from collections.abc import Callable
from typing import Any

from lowpoint.problems import CellError

from .helping import WRONG, cells_of, each, helper, number_of, text_of

_CLOCK = re.compile(r"(?:.*\s)?(\d{1,2})(?::(\d{1,2})(?::(\d{1,2}(?:\.\d*)?))?)?\s*([AaPp][Mm])?")
_FIGURE = re.compile(r"([-+]?)\$?([-+]?)(\d{1,3}(?:,\d{3})+|\d+)?(\.\d*)?([Ee][-+]?\d+)?\s*(%?)")


@each
def _text15(value: Any) -> Any:
    return text_of(value)


@each
def _upper(value: Any) -> Any:
    return _cased(text_of(value), str.upper)


@each
def _lower(value: Any) -> Any:
    return _cased(text_of(value), str.lower)


def _cased(text: str, change: Callable[[str], str]) -> str:
    """Letter by letter; one that would become two (the German sharp s) stays."""
    return "".join(new if len(new := change(letter)) == 1 else letter for letter in text)


@each
def _proper(value: Any) -> Any:
    return re.sub(r"[^\W\d_]+", lambda word: word[0][0].upper() + word[0][1:].lower(), text_of(value))


@each
def _trim(value: Any) -> Any:
    """Plain spaces only: a no-break space, a tab or a line feed stays."""
    return re.sub(" {2,}", " ", text_of(value)).strip(" ")


@each
def _replace(value: Any, start: Any, count: Any, new: Any) -> Any:
    first, length = number_of(start), number_of(count)
    if first is None or length is None or first < 1 or length < 0:
        return CellError.VALUE
    text, at = text_of(value), int(first) - 1
    return text[:at] + text_of(new) + text[at + int(length) :]


@each
def _value(value: Any) -> Any:
    """Text with thousands commas, a currency sign, a percent sign or parentheses as a number."""
    text = text_of(value).strip()
    sign = -1.0 if re.fullmatch(r"\([^-+()]*\)", text) else 1.0
    found = _FIGURE.fullmatch(text.strip("()") if sign < 0 else text)
    if found is None or not (found[3] or (found[4] or ".") != ".") or (found[1] and found[2]):
        return CellError.VALUE
    number = float(found[1] + found[2] + (found[3] or "").replace(",", "") + (found[4] or "") + (found[5] or ""))
    return sign * (number / 100 if found[6] else number)


@each
def _clock(value: Any) -> Any:
    """The time of day in a text (a date may stand before it), as a fraction of a day; other cells as they are."""
    if not isinstance(value, str):
        return value
    found = _CLOCK.fullmatch(value.strip())
    if found is None or (found[2] is None and found[4] is None):
        return CellError.VALUE
    hour, minute, second = int(found[1]), int(found[2] or 0), float(found[3] or 0.0)
    if minute >= 60 or second >= 60 or (found[4] and not 1 <= hour <= 12):
        return CellError.VALUE
    if found[4]:
        hour = hour % 12 + (12 if found[4].upper() == "PM" else 0)
    return (hour * 3600 + minute * 60 + second) / 86400.0 % 1.0


@each
def _hyperlink(target: Any, shown: Any) -> Any:
    """What the cell shows, in the kind it has: a link's number is a number. An error in the target goes through."""
    return 0.0 if shown is None else shown


@each
def _logical(value: Any) -> Any:
    """The words TRUE and FALSE as logicals; other text is #VALUE!."""
    if not isinstance(value, str):
        return value
    return {"TRUE": True, "FALSE": False}.get(value.upper(), CellError.VALUE)


@each
def _scientific(value: Any, decimals: Any, sign: Any, width: Any) -> Any:
    """TEXT with a pattern such as 0.00E+00."""
    number = number_of(value)
    if number is None:
        return value
    digits, _, power = f"{number:.{int(decimals)}e}".partition("e")
    mark = "-" if power[0] == "-" else "+" if sign == "+" else ""
    return f"{digits}E{mark}{abs(int(power)):0{int(width)}d}"


@helper
def _concat(*arguments: Any) -> Any:
    return _textjoin("", False, *arguments)


@helper
def _textjoin(between: Any, skip_blank: Any, *arguments: Any) -> Any:
    cells = list(itertools.chain.from_iterable(map(cells_of, arguments)))
    wrong = next((cell for cell in [*cells_of(between), skip_blank, *cells] if isinstance(cell, WRONG)), None)
    if wrong is not None:
        return wrong
    parts = [part for part in map(text_of, cells) if part or not skip_blank]
    marks = [text_of(mark) for mark in cells_of(between)]
    joined = "".join(part + marks[i % len(marks)] for i, part in enumerate(parts[:-1])) + "".join(parts[-1:])
    return joined if len(joined) <= 32767 else CellError.VALUE


def _cuts(text: str, marks: Any, folded: Any) -> list[tuple[int, int]]:
    """Where any of the delimiters stands in a text, from left to right."""
    words = sorted((re.escape(text_of(mark)) for mark in cells_of(marks) if mark not in (None, "")), key=len)
    if not words:
        return []
    found = re.finditer("|".join(reversed(words)), text, re.IGNORECASE if folded else 0)
    return [(cut.start(), cut.end()) for cut in found]


def _cut(
    text: Any, marks: Any, which: Any = 1.0, folded: Any = 0.0, ends: Any = 0.0, missing: Any = CellError.NA
) -> Any:
    """The text and where the delimiter that TEXTBEFORE and TEXTAFTER mean stands in it, or their other answer."""
    wrong = next((cell for cell in (text, *cells_of(marks), which, folded, ends) if isinstance(cell, WRONG)), None)
    number = None if wrong is not None or isinstance(which, list) else number_of(which)
    if number is None or abs(number) < 1 or isinstance(text, list):
        return wrong or CellError.VALUE
    whole, place = text_of(text), int(number)
    cuts = _cuts(whole, marks, folded)
    if place < 0:
        cuts.reverse()
    if abs(place) <= len(cuts):
        return whole, cuts[abs(place) - 1]
    if ends and abs(place) == len(cuts) + 1:
        edge = len(whole) if place > 0 else 0
        return whole, (edge, edge)
    return missing


@helper
def _textbefore(*arguments: Any) -> Any:
    found = _cut(*arguments)
    return found[0][: found[1][0]] if isinstance(found, tuple) else found


@helper
def _textafter(*arguments: Any) -> Any:
    found = _cut(*arguments)
    return found[0][found[1][1] :] if isinstance(found, tuple) else found
