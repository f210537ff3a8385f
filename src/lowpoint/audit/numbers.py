"""Numbers as sheets show them: decimal point or comma, thousands, a unit behind, and half of the last digit shown."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache

from lowpoint.audit.unitsigns import Sign, unit_sign

__all__ = ["Number", "decimal_sign", "half_of", "numbers_of", "shown_number"]

NAN = float("nan")
_SPACE = "[ \N{NO-BREAK SPACE}\N{THIN SPACE}\N{NARROW NO-BREAK SPACE}'’]"
_DIGITS = re.compile(
    rf"[+-]?(?:\d{{1,3}}(?:{_SPACE}\d{{3}})+(?:[.,]\d+)?|\d[\d.,]*|[.,]\d+)(?:[eE][+-]?\d{{1,3}}|\s?[x×*]\s?10\^?[+-]?\d{{1,2}})?"
)
_HEAD = re.compile(r"(?:<=|>=|[<>≤≥≈~=]|abt\.?|approx\.?|ca\.?|max\.?|min\.?)\s*", re.IGNORECASE)
_SIZE_HEAD = re.compile(r"(DN|NPS)\s*(?=\d)", re.IGNORECASE)
_FRACTION = re.compile(r"(?:(\d+)[ -])?(\d+)\s*/\s*(\d+)(?=\s*(?:\"|''|in|inch|$|[^\d]))")
_RATING = re.compile(r"(?:PN|class|cl|ansi|asme|sch|rating|rf|rtj)\b", re.IGNORECASE)
"""What stands behind a size and is none."""
_CERTAIN_COMMA = re.compile(
    rf"[+-]?(?:0,\d+|\d*,\d{{1,2}}|\d{{4,}},\d+|\d*,\d{{4,}}|\d{{1,3}}(?:(?:\.|{_SPACE})\d{{3}})+,\d+)"
)
_CERTAIN_POINT = re.compile(
    rf"[+-]?(?:0?\.\d+|\d*\.\d{{1,2}}|\d{{4,}}\.\d+|\d*\.\d{{4,}}|\d{{1,3}}(?:(?:,|{_SPACE})\d{{3}})+\.\d+)"
)
_FIRST = re.compile(r"[+-]?\d[\d.,]*")


@dataclass(frozen=True, slots=True)
class Number:
    """One number of a text: ``ambiguous`` where a comma may be decimal or part thousands (then ``value`` is NaN)."""

    value: float
    half: float
    sign: Sign | None = None
    ambiguous: bool = False
    rest: str = ""
    """What stands behind and is no unit."""
    bounded: bool = False
    """A sign such as < stands before it."""


def decimal_sign(texts: Iterable[str]) -> str:
    """The decimal sign of a sheet, from the numbers that leave no doubt: ``.`` or ``,``, ``?`` where both are seen, and
    nothing where none leaves no doubt."""
    comma = point = False
    for text in texts:
        for found in _FIRST.findall(text):
            token = found.rstrip(".,")
            comma = comma or bool(_CERTAIN_COMMA.fullmatch(token))
            point = point or bool(_CERTAIN_POINT.fullmatch(token))
    return {(True, True): "?", (True, False): ",", (False, True): ".", (False, False): ""}[comma, point]


def half_of(shown: str) -> float:
    """Half of the last digit of a number as plain digits with a decimal point."""
    mantissa, _, exponent = shown.lower().partition("e")
    decimals = len(mantissa.partition(".")[2])
    return 0.5 * 10.0 ** (int(exponent or 0) - decimals)


def _spelled(token: str, decimal: str) -> str | None:
    """A number's text with a decimal point and without thousands; None where it may be read two ways."""
    token = re.sub(_SPACE, "", token)
    mantissa, tail = re.fullmatch(r"([+-]?[\d.,]+)(.*)", token).groups()  # type: ignore[union-attr]
    power = re.sub(r"[x×*]10\^?", "e", tail)
    points, commas = mantissa.count("."), mantissa.count(",")
    if points and commas:
        last = max(mantissa.rfind("."), mantissa.rfind(","))
        mark = mantissa[last]
        other = "," if mark == "." else "."
        if mantissa.count(mark) > 1:
            return None
        return mantissa.replace(other, "").replace(mark, ".") + power
    mark = "," if commas else "."
    many = commas + points
    if many > 1:
        return mantissa.replace(mark, "") + power if re.fullmatch(r"[+-]?\d{1,3}([.,]\d{3})+", mantissa) else None
    if commas and not _CERTAIN_COMMA.fullmatch(mantissa):
        if decimal == ".":
            return mantissa.replace(",", "") + power
        if decimal != ",":
            return None
    if points and decimal == "," and not _CERTAIN_POINT.fullmatch(mantissa):
        return mantissa.replace(".", "") + power
    if points and decimal == "?" and not _CERTAIN_POINT.fullmatch(mantissa):
        return None
    return mantissa.replace(",", ".") + power


def _clean(text: str) -> str:
    text = "".join(
        f" {unicodedata.normalize('NFKC', c).replace(chr(0x2044), '/')}"
        if unicodedata.category(c) == "No" and "fraction" in unicodedata.name(c, "").lower()
        else c
        for c in text
    )
    return (
        text.replace("\N{MINUS SIGN}", "-")
        .replace("\N{DOUBLE PRIME}", '"')
        .replace("”", '"')
        .replace("''", '"')
        .strip()
    )


@lru_cache(8192)
def numbers_of(text: str, decimal: str) -> tuple[Number, ...]:
    """The numbers that a cell's text is, each with its unit; empty where the text is something else.

    Two stand with a stroke or brackets between (``6.8 bar g / 98.6 psig``): one quantity in two units.
    """
    text = _clean(text)
    if not text or len(text) > 60 or not any(c.isdigit() for c in text):
        return ()
    found: list[Number] = []
    for part in _parts(text):
        one = _one(part, decimal)
        if one is None and found and _RATING.match(part.strip()):
            return tuple(found)
        if one is None:
            return tuple(found) if found and not any(c.isdigit() for c in part) else ()
        found.append(one)
    return tuple(found)


def _parts(text: str) -> list[str]:
    """A text parted where a second number in another unit begins."""
    inside = re.fullmatch(r"(.+?)\s*[(\[]\s*([+-]?\d.*?)\s*[)\]]", text)
    if inside and any(c.isalpha() or c in '"%°' for c in inside[2]):
        return [inside[1], inside[2]]
    parts = re.split(r"\s+[/|=]\s+|\s*/\s*(?=[+-]?\d+(?:[.,]\d+)?\s+[a-zA-Z°])", text)
    return parts if len(parts) > 1 and all(_DIGITS.search(p) for p in parts) else [text]


def _one(text: str, decimal: str) -> Number | None:
    text = text.strip()
    head = _HEAD.match(text)
    rest = text[head.end() :] if head else text
    size = _SIZE_HEAD.match(rest)
    if size:
        rest = rest[size.end() :]
    fraction = _FRACTION.match(rest)
    if fraction and int(fraction[3]) in (2, 4, 8, 16, 32, 64):
        value = int(fraction[1] or 0) + int(fraction[2]) / int(fraction[3])
        tail = rest[fraction.end() :]
        return _with_tail(value, 0.5 / int(fraction[3]), tail, size and size[1], bool(head))
    token = _DIGITS.match(rest)
    if token is None:
        return None
    digits = token[0].rstrip(".,")
    tail = rest[len(digits) :]
    if tail[:1] in ("-", "/", ":") and tail[1:2].isalnum() and not size:
        return None  # a range, a ratio, a date, a tag
    spelled = _spelled(digits, decimal)
    if spelled is None:
        return _with_tail(NAN, NAN, tail, size and size[1], bool(head), True)
    try:
        value = float(spelled)
    except ValueError:
        return None
    return _with_tail(value, half_of(spelled.lstrip("+-")), tail, size and size[1], bool(head))


def _with_tail(
    value: float, half: float, tail: str, size: str | None, bounded: bool, ambiguous: bool = False
) -> Number | None:
    tail = tail.strip().rstrip(";,")
    if size:
        return Number(value, half, unit_sign(size), ambiguous, tail, bounded)
    if not tail:
        return Number(value, half, None, ambiguous, bounded=bounded)
    sign, rest = _unit_at(tail)
    if sign is None and re.match(r"[\w°]", tail) and not re.match(r"[x×]\s", tail):
        words = tail.split()
        if len(words) > 4 or re.search(r"\d", tail):
            return None
        return Number(value, half, None, ambiguous, tail, bounded)
    return Number(value, half, sign, ambiguous, rest if sign else tail, bounded)


def _unit_at(tail: str) -> tuple[Sign | None, str]:
    """The longest unit that a text begins with, and what follows it."""
    whole = unit_sign(tail)
    if whole:
        return whole, ""
    for cut in sorted({m.start() for m in re.finditer(r"[\s/,;(\[x]", tail) if m.start()}, reverse=True):
        sign = unit_sign(tail[:cut].strip())
        if sign:
            return sign, tail[cut:].strip(" ,;/")
    return None, tail


def shown_number(value: float, number_format: str) -> tuple[str, float, str, float]:
    """A stored number as its format shows it: the text, half of its last digit, the format's own unit or sign, and
    the factor of a per cent format.

    >>> shown_number(143.0876, '0.0 "bar g"')
    ('143.1', 0.05, 'bar g', 1.0)
    """
    section = _section(number_format, value)
    literal = "".join(re.findall(r'"([^"]*)"', section)) + "".join(re.findall(r"\\(.)", section))
    bare = re.sub(r'"[^"]*"|\\.|_.|\*.|\[[^\]]*\]', "", section)
    factor = 100.0 if "%" in bare else 1.0
    places = re.search(r"[0#?](?:[0#?,]*[0#?])?(?:\.([0#?]*))?(E[+-]0+)?", bare)
    unit = "%" if factor == 100.0 else literal.strip()
    if places is None or "general" in bare.lower() or "/" in bare:
        shown = f"{value:.15g}"
        return shown, half_of(shown.lstrip("-")), unit, 1.0
    decimals = len(places[1] or "")
    if places[2]:
        shown = f"{value:.{decimals}e}"
        return shown, half_of(shown.lstrip("-")), unit, factor
    if decimals and set(places[1]) <= {"#", "?"}:
        decimals = min(decimals, len(f"{value * factor:.15g}".partition(".")[2]))
    return f"{value * factor:.{decimals}f}", 0.5 * 10.0**-decimals, unit, factor


def _section(number_format: str, value: float) -> str:
    """The part of a number format that holds for this value."""
    sections = re.findall(r'(?:"[^"]*"|\\.|[^;"\\])+', number_format) or ["General"]
    if value < 0 and len(sections) > 1:
        return sections[1]
    return sections[2] if value == 0 and len(sections) > 2 else sections[0]
