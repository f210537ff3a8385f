"""What is known of single worksheet functions: what they give, and where they take single values."""

from __future__ import annotations

from collections.abc import Sequence

from .expression import Piece, spans

__all__ = ["Pieces", "kind_of", "makes_array", "scalar_places"]

Pieces = Sequence[Piece | None]


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
        return len(pieces) > 2 and pieces[2] is not None and all(spans(pieces[2].text))
    if name == "INDIRECT":
        return ":" in (pieces[0].text if pieces and pieces[0] else "")
    return name in _PASSING and any(piece is not None and piece.array for piece in pieces)
