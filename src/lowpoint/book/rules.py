"""What :mod:`lowpoint.book.cures` knows about single worksheet functions: how to write a call anew, or that it cannot.

A rule gets the writer, the function's name and the written arguments, and gives the call anew, or None to leave it.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import TYPE_CHECKING

from .expression import BlockedError, Piece

if TYPE_CHECKING:
    from .cures import Writer

__all__ = ["kind_of", "makes_array", "ruled", "scalar_places"]

Pieces = list[Piece | None]
Rule = Callable[["Writer", str, Pieces], Piece | None]


def _names(text: str) -> frozenset[str]:
    return frozenset(text.split())


_KINDS = {
    "text": "TEXT LEFT RIGHT MID UPPER LOWER PROPER TRIM CLEAN SUBSTITUTE REPLACE REPT CONCATENATE CONCAT TEXTJOIN "
    "CHAR FIXED DOLLAR UNICHAR TEXTBEFORE TEXTAFTER ADDRESS DEC2HEX DEC2BIN BASE ROMAN T",
    "logical": "AND OR XOR NOT ISNUMBER ISTEXT ISBLANK ISERROR ISERR ISNA ISNONTEXT ISLOGICAL ISEVEN ISODD ISREF "
    "ISFORMULA EXACT TRUE FALSE",
    "whole": "ROW COLUMN ROWS COLUMNS COUNT COUNTA COUNTBLANK COUNTIF COUNTIFS LEN MATCH XMATCH FIND SEARCH YEAR MONTH "
    "DAY WEEKDAY WEEKNUM ISOWEEKNUM INT SIGN CODE UNICODE HOUR MINUTE SECOND QUOTIENT DATE EOMONTH EDATE TODAY DAYS",
    "rounded": "ROUND ROUNDUP ROUNDDOWN",
}
_KIND_OF = {name: kind for kind, names in _KINDS.items() for name in names.split()}
_ARRAYS = _names(
    "FILTER SORT SORTBY UNIQUE SEQUENCE RANDARRAY TRANSPOSE TAKE DROP CHOOSECOLS CHOOSEROWS TOCOL TOROW HSTACK VSTACK "
    "EXPAND WRAPROWS WRAPCOLS TEXTSPLIT MMULT MINVERSE MUNIT LINEST LOGEST FREQUENCY MODE.MULT GROWTH"
)
_PASSING = _names("IF IFERROR IFNA CHOOSE SIN COS TAN ATAN2 TREND OFFSET INDEX XLOOKUP")
_DATE_PARTS = ("YEAR", "MONTH", "DAY", "WEEKDAY", "WEEKNUM", "EDATE", "EOMONTH")
_TEXT_PLACES: dict[str, tuple[int, ...]] = {
    **dict.fromkeys(("LEN", "LEFT", "RIGHT", "MID", "TRIM", "REPT", "TEXTSPLIT"), (0,)),
    **dict.fromkeys(("FIND", "SEARCH", "EXACT", "TEXTBEFORE", "TEXTAFTER"), (0, 1)),
    "SUBSTITUTE": (0, 1, 2),
    "REPLACE": (0, 3),
    "CONCATENATE": tuple(range(255)),
}


_SINGLE = _names(
    "ABS INT ROUND ROUNDUP ROUNDDOWN TRUNC SQRT EXP LN LOG LOG10 ASIN ACOS ATAN SINH COSH TANH ASINH ACOSH ATANH POWER "
    "MOD SIGN CEILING FLOOR CEILING.MATH FLOOR.MATH MROUND EVEN ODD QUOTIENT FACT DEGREES RADIANS COMBIN ISNUMBER "
    "ISTEXT ISBLANK ISERROR ISNA ISERR ISNONTEXT ISLOGICAL ISEVEN ISODD NOT IFS SWITCH LEN LEFT RIGHT MID TRIM CLEAN "
    "FIND SEARCH SUBSTITUTE REPLACE REPT EXACT CHAR CODE UNICHAR UNICODE TEXT FIXED CONCATENATE TEXTBEFORE TEXTAFTER "
    "NUMBERVALUE VALUE DATE YEAR MONTH DAY WEEKDAY WEEKNUM ISOWEEKNUM EDATE EOMONTH HOUR MINUTE SECOND TIME DATEVALUE "
    "TIMEVALUE DAYS DAYS360 DATEDIF YEARFRAC ADDRESS DEC2HEX HEX2DEC DEC2BIN BIN2DEC BASE DECIMAL BITAND BITOR BITXOR "
    "ERF ERFC GAMMALN STANDARDIZE NORMSDIST NORMDIST NORMSINV NORMINV NORM.S.DIST NORM.DIST NORM.INV NORM.S.INV PMT PV "
    "FV NPER RATE ROMAN ERROR.TYPE"
)
_SOME: dict[str, tuple[int, ...]] = {
    "VLOOKUP": (0, 2),
    "HLOOKUP": (0, 2),
    "MATCH": (0,),
    "LOOKUP": (0,),
    "XLOOKUP": (0,),
    "XMATCH": (0,),
    "INDEX": (1, 2),
    "COUNTIF": (1,),
    "SUMIF": (1,),
    "AVERAGEIF": (1,),
    "COUNTIFS": tuple(range(1, 254, 2)),
    **dict.fromkeys(("SUMIFS", "AVERAGEIFS", "MAXIFS", "MINIFS"), tuple(range(2, 254, 2))),
    **dict.fromkeys(
        ("LARGE", "SMALL", "PERCENTILE", "PERCENTILE.INC", "PERCENTILE.EXC", "QUARTILE", "QUARTILE.INC"), (1,)
    ),
    **dict.fromkeys(("RANK", "RANK.EQ", "RANK.AVG", "FORECAST", "FORECAST.LINEAR"), (0,)),
}
_REFUSED: dict[str, tuple[int, ...]] = {"INDIRECT": (0, 1), "N": (0,), "T": (0,), "CHOOSE": (0,), "NETWORKDAYS": (0, 1)}
_REFUSED |= {"OFFSET": (1, 2, 3, 4), "WORKDAY": (0, 1), "GCD": (), "CELL": (0,), "HYPERLINK": (0, 1), "TYPE": ()}


def scalar_places(function: str, count: int) -> tuple[tuple[int, ...], bool]:
    """The arguments of ``function`` that stand for single values, and whether a range there can be lifted."""
    if function in _SINGLE:
        return tuple(range(count)), True
    if function in _SOME:
        return tuple(place for place in _SOME[function] if place < count), True
    return tuple(place for place in _REFUSED.get(function, ()) if place < count), False


def kind_of(name: str) -> str:
    """What kind of value a function is sure to give."""
    return _KIND_OF.get(name, "any")


def makes_array(name: str, pieces: Pieces) -> bool:
    """Whether a call gives an array (single values in single places)."""
    if name in _ARRAYS:
        return True
    if name == "OFFSET":
        return len(pieces) > 3 and any(piece is None or piece.text != "1" for piece in pieces[3:])
    if name == "INDEX":
        return len(pieces) > 1 and any(piece is None or piece.kind == "zero" for piece in pieces[1:3])
    if name == "XLOOKUP":
        return False
    if name == "INDIRECT":
        return ":" in (pieces[0].text if pieces and pieces[0] else "")
    return name in _PASSING and any(piece is not None and piece.array for piece in pieces)


def ruled(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """The call written anew by the rule of its name; None where none applies."""
    rule = _RULES.get(name)
    return rule(writer, name, pieces) if rule is not None else None


def _always(probe: str, *, array: bool = False) -> Rule:
    def rule(writer: Writer, name: str, pieces: Pieces) -> Piece:
        writer.note(probe)
        over = array or any(piece is not None and piece.array for piece in pieces)
        return writer.helper(name, pieces, over and name not in {"MODE", "MDETERM", "TYPE"}, kind_of(name))

    return rule


def _mode(writer: Writer, name: str, pieces: Pieces) -> Piece:
    writer.note("mode-tie")
    return writer.helper("MODE", pieces)


def _position(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """ROW or COLUMN of a range: every row or column, where the engine gives the first."""
    piece = pieces[0] if len(pieces) == 1 else None
    if piece is None or not (piece.array or piece.text.startswith(("INDIRECT(", "OFFSET("))):
        return None
    writer.note("row-of-range")
    x = piece.text
    text = f"SEQUENCE(ROWS({x}),1,ROW({x}))" if name == "ROW" else f"SEQUENCE(1,COLUMNS({x}),COLUMN({x}))"
    return Piece(text, True, "whole")


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
    pattern = pieces[1]
    if not re.fullmatch(r'"(?:[^"]|"")*"', pattern.text):
        raise BlockedError("text-pattern", "uses TEXT with a pattern that stands elsewhere")
    inside = pattern.text[1:-1].replace('""', '"')
    power = re.fullmatch(r"0(?:\.(0+))?[Ee]([+-])(0+)", inside)
    if power:
        writer.note("text-scientific")
        places = [Piece(str(len(power[1] or ""))), Piece(f'"{power[2]}"'), Piece(str(len(power[3])))]
        return writer.helper("SCIENTIFIC", [pieces[0], *places], pieces[0].array, "text")
    if not _plain_pattern(inside):
        raise BlockedError("text-pattern", f"uses TEXT with the pattern {inside}")
    if inside.lower() in {"general", "@"}:
        return Piece(f'({writer.as_text(pieces[0]).text}&"")', pieces[0].array, "text")
    x = pieces[0]
    if x.array or x.kind not in {"logical", "reference"}:
        return None
    writer.note("text-of-logical")
    plain = f"TEXT({x.text},{pattern.text})"
    return Piece(
        f'IF(ISLOGICAL({x.text}),{x.text}&"",{plain})' if x.kind == "reference" else f'({x.text}&"")', False, "text"
    )


def _plain_pattern(pattern: str) -> bool:
    """Whether the engine is right about a pattern: the forms that the ordinary-formula test has tried."""
    bare = re.sub(r'"[^"]*"|\\.', "", pattern)
    if bare.lower() in {"general", "@", ""}:
        return True
    if re.search(r"[ymdhs]", bare, re.IGNORECASE):
        return re.fullmatch(r"(?:[ymdhsYMDHS]+|AM/PM|\[[hms]+\]|[-/ .:,]|\.0+)+", bare) is not None
    one = r"(?:\[Red\])?[-+($€£ ]*(?:[#0,]*[#0](?:\.[0#]+)?,*)[ %)]*"
    return re.fullmatch(rf"{one}(?:;{one}(?:;(?:{one}|[ ]*))?)?", bare) is not None


def _text_places(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """Numbers that a text function reads become text of at most 15 digits first."""
    places = _TEXT_PLACES[name]
    if any(piece is not None and piece.array for piece in pieces):
        return None
    changed: Pieces = [writer.as_text(p) if p is not None and k in places else p for k, p in enumerate(pieces)]
    return writer.lifted(name, name, changed)


def _joining(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """CONCAT and TEXTJOIN: ranges need the helper, single values only 15 digits."""
    if any(piece is not None and piece.array for piece in pieces):
        writer.note("number-text-15-digits")
        return writer.helper(name, pieces, False, "text")
    first = 0 if name == "CONCAT" else 2
    changed: Pieces = [writer.as_text(p) if p is not None and k >= first else p for k, p in enumerate(pieces)]
    return writer.lifted(name, name, changed)


def _date_part(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """A date that is written as text."""
    if not pieces or pieces[0] is None or any(p is not None and p.array for p in pieces):
        return None
    if pieces[0].kind not in {"text", "reference", "any"}:
        return None
    writer.note("date-from-text")
    x = pieces[0].text
    date = Piece(
        f"IF(ISTEXT({x}),DATEVALUE({x}),{x})" if len(x) < 40 else f"LET(lp_d,{x},IF(ISTEXT(lp_d),DATEVALUE(lp_d),lp_d))"
    )
    return writer.lifted(name, name, [date, *pieces[1:]])


def _step(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    if len(pieces) != 2 or (pieces[1] is not None and pieces[1].kind == "literal" and "-" not in pieces[1].text):
        return None
    writer.note("ceiling-negative-step")
    return writer.helper(name, pieces, any(p is not None and p.array for p in pieces))


def _xlookup(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    if len(pieces) < 5 or pieces[4] is None or pieces[4].text in {"0", "2"}:
        return None
    if pieces[0] is None or pieces[0].array:
        raise BlockedError("range-for-single-value", "gives XLOOKUP a range where it takes a single value")
    writer.note("xlookup-next")
    missing = pieces[3] or Piece("#N/A")
    return writer.helper(name, [*pieces[:3], missing, *pieces[4:]])


def _lookup(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    keys = pieces[1] if len(pieces) > 1 else None
    if keys is None or keys.kind == "reference" or keys.text.startswith("{") or (pieces[0] and pieces[0].array):
        return None
    writer.note("lookup-computed")
    return writer.helper(name, pieces)


def _aggregate(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    known = {str(number) for number in range(1, 12)}
    if not pieces or pieces[0] is None or pieces[0].text not in known:
        raise BlockedError("aggregate-array", "uses a form of AGGREGATE that the recalculator's engine does not have")
    return None


def _cell(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    if not pieces or pieces[0] is None or pieces[0].text.strip('"').lower() not in {"row", "col", "contents"}:
        raise BlockedError("cell-info", "asks CELL for what only the program that shows the workbook knows")
    return None


def _numbers_only(writer: Writer, name: str, pieces: Pieces) -> Piece | None:
    """Text written as an argument is #VALUE! unless it is a number; the engine passes it over."""
    for piece in pieces:
        if piece is not None and piece.kind == "text" and not piece.array and not re.fullmatch(r'"[\d.]+"', piece.text):
            raise BlockedError("text-argument", f"gives {name} a text among its numbers")
    return None


_RULES: dict[str, Rule] = {
    **dict.fromkeys(("MMULT", "MINVERSE", "EXPAND", "WRAPROWS", "WRAPCOLS"), _always("array-functions", array=True)),
    "MDETERM": _always("array-functions"),
    **dict.fromkeys(("VSTACK", "HSTACK"), _always("stack-unequal", array=True)),
    "UNIQUE": _always("unique-case", array=True),
    **dict.fromkeys(("UPPER", "LOWER", "PROPER"), _always("case-of-accents")),
    "CONVERT": _always("convert-units"),
    "TYPE": _always("type-of-error"),
    **dict.fromkeys(("MODE", "MODE.SNGL"), _mode),
    **dict.fromkeys(("ROW", "COLUMN"), _position),
    "VALUE": _value,
    "TEXT": _text,
    **dict.fromkeys(_TEXT_PLACES, _text_places),
    **dict.fromkeys(("CONCAT", "TEXTJOIN"), _joining),
    **dict.fromkeys(_DATE_PARTS, _date_part),
    **dict.fromkeys(("CEILING", "FLOOR"), _step),
    "XLOOKUP": _xlookup,
    "LOOKUP": _lookup,
    "AGGREGATE": _aggregate,
    "CELL": _cell,
    **dict.fromkeys(
        ("AVERAGE", "MAX", "MIN", "PRODUCT", "STDEV", "STDEV.S", "STDEVP", "STDEV.P", "VAR", "VAR.S", "MEDIAN"),
        _numbers_only,
    ),
}
