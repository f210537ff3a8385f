"""How calls of text and date functions are written anew, TEXT with its patterns among them."""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import TYPE_CHECKING

from .expression import BlockedError, Piece
from .kinds import Pieces
from .rules import RULES, Rule, always, any_array, filled

if TYPE_CHECKING:
    from .cures import Writer

__all__ = ["ruled"]

_DATE_PARTS = ("YEAR", "MONTH", "DAY", "WEEKDAY", "WEEKNUM", "EDATE", "EOMONTH")
_TEXT_PLACES: dict[str, tuple[int, ...]] = {
    **dict.fromkeys(("LEN", "LEFT", "RIGHT", "MID", "REPT", "TEXTSPLIT"), (0,)),
    **dict.fromkeys(("FIND", "SEARCH", "EXACT"), (0, 1)),
    "SUBSTITUTE": (0, 1, 2),
    "CONCATENATE": tuple(range(255)),
}
_NUMBERS = frozenset({"number", "whole", "rounded", "literal", "zero"})


def ruled(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """The call written anew by the rule of its name; None where none applies."""
    rule = _ALL.get(name)
    return rule(writer, name, pieces) if rule is not None else None


def _value(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    piece = pieces[0] if len(pieces) == 1 else None
    if piece is None or piece.array:
        return None
    writer.note("value-of-text")
    return Piece(f"IFERROR(VALUE({piece.text}),{writer.helper('VALUE', [piece]).text})")


def _text(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """TEXT by its pattern: the engine's own, ours with an exponent, or blocked."""
    if len(pieces) != 2 or pieces[1] is None or pieces[0] is None:
        return None
    pattern, x = pieces[1], pieces[0]
    if not re.fullmatch(r'"(?:[^"]|"")*"', pattern.text):
        raise BlockedError("text-pattern", "uses TEXT with a pattern that stands elsewhere")
    inside = pattern.text[1:-1].replace('""', '"')
    power = re.fullmatch(r"0(?:\.(0+))?[Ee]([+-])(0+)", inside)
    if power:
        writer.note("text-scientific")
        places = [Piece(str(len(power[1] or ""))), Piece(f'"{power[2]}"'), Piece(str(len(power[3])))]
        return writer.helper("SCIENTIFIC", [x, *places], x.array, "text")
    if not _plain_pattern(inside):
        raise BlockedError("text-pattern", f"uses TEXT with the pattern {inside}")
    if inside.lower() in {"general", "@"}:
        return Piece(f'({writer.as_text(x).text}&"")', x.array, "text")
    if x.array or x.kind in _NUMBERS:
        return None
    return _text_of_any(writer, x, pattern)


def _text_of_any(writer: Writer, x: Piece, pattern: Piece) -> Piece:
    """A logical stays a word, and so does text that is no number, be it as like a date as ``FV-101``."""
    writer.note("text-of-words")

    def write(y: str) -> str:
        plain = f"TEXT({y},{pattern.text})"
        return f'IF(ISLOGICAL({y}),{y}&"",IF(ISTEXT({y}),IFERROR({plain},{y}),{plain}))'

    return Piece(writer.bound(x, write), False, "text")


def _plain_pattern(pattern: str) -> bool:
    """Whether the engine is right about a pattern: the forms that the ordinary-formula test has tried."""
    bare = re.sub(r'"[^"]*"|\\.', "", pattern)
    if bare.lower() in {"general", "@", ""}:
        return True
    if re.search(r"[ymdhs]", bare.replace("[Red]", ""), re.IGNORECASE):
        return re.fullmatch(r"(?:[ymdhsYMDHS]+|AM/PM|\[[hms]+\]|[-/ .:,]|\.0+)+", bare) is not None
    one = r"(?:\[Red\])?[-+($€£ ]*(?:[#0,]*[#0](?:\.[0#]+)?,*)[ %)]*"
    return re.fullmatch(rf"{one}(?:;{one}(?:;(?:{one}|[ ]*))?)?", bare) is not None


def _link(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """A link with words of its own, or a number, to show."""
    if len(pieces) != 2 or any_array(pieces):
        return None
    writer.note("link-of-number")
    shown = filled(pieces, '""', "0")
    kind = shown[1].kind if shown[1] is not None else "any"
    return writer.helper(name, shown, False, kind if kind in {"text", "logical"} else "any")


def _text_places(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """Numbers that a text function reads become text of at most 15 digits first."""
    places = _TEXT_PLACES[name]
    if any_array(pieces):
        return None
    changed = [writer.as_text(p) if p is not None and k in places else p for k, p in enumerate(pieces)]
    return writer.plain(name, changed)


def _joining(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """CONCAT and TEXTJOIN: ranges need the helper, single values only 15 digits."""
    if any_array(pieces):
        writer.note("number-text-15-digits")
        return writer.helper(name, pieces, False, "text")
    first = 0 if name == "CONCAT" else 2
    return writer.plain(name, [writer.as_text(p) if p is not None and k >= first else p for k, p in enumerate(pieces)])


def _cutting(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """TEXTBEFORE and TEXTAFTER, whose later arguments the engine does not take."""
    if len(pieces) < 2 or pieces[0] is None or pieces[0].array:
        return None
    writer.note("text-cutting")
    return writer.helper(name, filled(pieces, "", "", "1", "0", "0", "#N/A"), False, "text")


def _date_part(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """A date that is written as text."""
    return _from_text(writer, name, pieces, "date-from-text", lambda x: f"DATEVALUE({x})")


def _time_part(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """A time that is written as text."""
    return _from_text(writer, name, pieces, "time-from-text", lambda x: writer.helper("CLOCK", [Piece(x)]).text)


def _from_text(writer: Writer, name: str, pieces: Pieces, probe: str, read: Callable[[str], str]) -> Piece | None:
    if not pieces or pieces[0] is None or any_array(pieces) or pieces[0].kind not in {"text", "reference", "any"}:
        return None
    writer.note(probe)
    return writer.plain(name, [Piece(writer.bound(pieces[0], lambda x: f"IF(ISTEXT({x}),{read(x)},{x})")), *pieces[1:]])


def _span_of_dates(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    unit = pieces[2].text.strip('"').upper() if len(pieces) == 3 and pieces[2] is not None else ""
    if unit not in {"Y", "M", "D", "YM", "MD"}:
        raise BlockedError("datedif-unit", "uses DATEDIF with a unit that the recalculator's engine counts differently")
    return None


def _holidays(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """A single holiday that is no cell: the engine passes over what DATE gives, but not in an array."""
    place = 3 if name.endswith("INTL") else 2
    day = pieces[place] if len(pieces) > place else None
    if day is None or day.array or day.kind == "reference":
        return None
    writer.note("single-holiday")
    return writer.plain(name, [*pieces[:place], Piece(f"HSTACK({day.text},{day.text})", True)])


_ALL: dict[str, Rule] = {
    **RULES,
    **dict.fromkeys(("UPPER", "LOWER", "PROPER"), always("case-of-accents")),
    "TRIM": always("no-break-space"),
    "REPLACE": always("replace-at-end"),
    "VALUE": _value,
    "HYPERLINK": _link,
    "TEXT": _text,
    **dict.fromkeys(_TEXT_PLACES, _text_places),
    **dict.fromkeys(("CONCAT", "TEXTJOIN"), _joining),
    **dict.fromkeys(("TEXTBEFORE", "TEXTAFTER"), _cutting),
    **dict.fromkeys(_DATE_PARTS, _date_part),
    **dict.fromkeys(("HOUR", "MINUTE", "SECOND"), _time_part),
    "DATEDIF": _span_of_dates,
    **dict.fromkeys(("NETWORKDAYS", "NETWORKDAYS.INTL", "WORKDAY", "WORKDAY.INTL"), _holidays),
}
