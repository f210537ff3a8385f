"""What functions take in each argument place: a single value, a range, an array, or whatever the cell itself takes.

One letter a place, the last repeated: V a single value (a range there means the formula's own row or column), R a
range taken whole (an operator over ranges inside still means single values), A an array (operators run over it), T
passed through: what may stand there is decided outside the call. A function that is not here may take and give arrays.
Source: the token classes of the stored-formula format, ECMA-376 functions; common practice.
"""

from __future__ import annotations

__all__ = ["DYNAMIC", "POSITIONAL", "REFERENCE_GIVING", "known", "place_class"]

_SINGLE = """ABS ACOS ACOSH ASIN ASINH ATAN ATAN2 ATANH BASE BIN2DEC BIN2HEX BIN2OCT BITAND BITLSHIFT BITOR BITRSHIFT
BITXOR CEILING CEILING.MATH CEILING.PRECISE CHAR CLEAN CODE COMBIN COMBINA CONVERT COS COSH COT DATE DATEDIF DATEVALUE
DAY DAYS DAYS360 DB DDB DEC2BIN DEC2HEX DEC2OCT DECIMAL DEGREES DELTA DOLLAR EDATE EOMONTH ERF ERFC EVEN EXACT EXP
FACT FACTDOUBLE FALSE FIND FINDB FIXED FLOOR FLOOR.MATH FLOOR.PRECISE FV GAMMA GAMMALN GESTEP HEX2BIN HEX2DEC HEX2OCT
HOUR HYPERLINK INT IPMT ISERR ISERROR ISEVEN ISLOGICAL ISNA ISNONTEXT ISNUMBER ISODD ISOWEEKNUM ISTEXT ISBLANK LEFT
LEFTB LEN LENB LN LOG LOG10 LOWER MID MIDB MINUTE MOD MONTH MROUND N NA NORM.DIST NORM.INV NORM.S.DIST NORM.S.INV
NORMDIST NORMINV NORMSDIST NORMSINV NOT NOW NPER NUMBERVALUE OCT2BIN OCT2DEC OCT2HEX ODD PERMUT PI PMT POWER PPMT
PROPER PV QUOTIENT RADIANS RAND RANDBETWEEN RATE REPLACE REPLACEB REPT RIGHT RIGHTB ROMAN ROUND ROUNDDOWN ROUNDUP
SEARCH SEARCHB SECOND SIGN SIN SINH SLN SQRT SQRTPI SUBSTITUTE SYD T TAN TANH TEXT TIME TIMEVALUE TODAY TRIM TRUE
TRUNC TYPE UNICHAR UNICODE UPPER VALUE WEEKDAY WEEKNUM YEAR YEARFRAC"""
_WHOLE = """AND AVEDEV AVERAGE AVERAGEA CONCAT COUNT COUNTA COUNTBLANK DEVSQ GCD GEOMEAN HARMEAN KURT LCM MAX MAXA
MEDIAN MIN MINA MODE MODE.SNGL OR PRODUCT SKEW STDEV STDEV.P STDEV.S STDEVA STDEVP STDEVPA SUM SUMSQ VAR VAR.P VAR.S
VARA VARP VARPA XOR ROWS COLUMNS AREAS NPV IRR CONCATENATE"""
_PLACES = {
    "AVERAGEIF": "RVR",
    "AVERAGEIFS": "RRVRVRVRVRVRV",
    "CHOOSE": "VT",
    "CORREL": "A",
    "COUNTIF": "RV",
    "COUNTIFS": "RVRVRVRVRVRVRV",
    "FORECAST": "VA",
    "FORECAST.LINEAR": "VA",
    "HLOOKUP": "VRVV",
    "IF": "VTT",
    "IFERROR": "TT",
    "IFNA": "TT",
    "IFS": "VTVTVTVTVTVTVTVTVTVT",
    "INDEX": "AVVV",  # why MATCH(1,INDEX((a=b)*(c=d),0),0) needs no array entry
    "INTERCEPT": "A",
    "LARGE": "RV",
    "LOOKUP": "VAA",
    "MATCH": "VRV",
    "MAXIFS": "RRVRVRVRVRVRV",
    "MINIFS": "RRVRVRVRVRVRV",
    "PERCENTILE": "RV",
    "PERCENTILE.EXC": "RV",
    "PERCENTILE.INC": "RV",
    "PERCENTRANK": "RVV",
    "QUARTILE": "RV",
    "QUARTILE.INC": "RV",
    "RANK": "VRV",
    "RANK.EQ": "VRV",
    "RANK.AVG": "VRV",
    "SLOPE": "A",
    "SMALL": "RV",
    "SUBTOTAL": "VR",
    "SUMIF": "RVR",
    "SUMIFS": "RRVRVRVRVRVRV",
    "SUMPRODUCT": "A",
    "SUMX2MY2": "A",
    "SUMX2PY2": "A",
    "SUMXMY2": "A",
    "SWITCH": "VVTVTVTVTVTVTVTVT",
    "TEXTJOIN": "VVR",
    "TRIMMEAN": "RV",
    "VLOOKUP": "VRVV",
    "XLOOKUP": "VRRVVV",
    "XMATCH": "VRVV",
    "": "T",  # a pair of parentheses
    "SINGLE": "R",
}
_CLASSES = {**dict.fromkeys(_SINGLE.split(), "V"), **dict.fromkeys(_WHOLE.split(), "R"), **_PLACES}

DYNAMIC = frozenset({"INDIRECT", "OFFSET"})
"""Functions whose references cannot be read from the text."""
POSITIONAL = frozenset({"CELL", "COLUMN", "ROW", "SHEET", "INFO"})
"""Functions whose answer may depend on where the formula stands."""
REFERENCE_GIVING = frozenset(
    {"", "CHOOSE", "HLOOKUP", "IF", "IFERROR", "IFNA", "IFS", "INDEX", "LOOKUP", "SWITCH", "VLOOKUP", "XLOOKUP"}
)
"""Functions that may hand on a cell, and so a blank one, where a formula in a cell of its own would give 0."""


def place_class(name: str, place: int) -> str:
    """The letter of an argument place; A, which changes nothing, for a function that is not known.

    >>> place_class("VLOOKUP", 0), place_class("SUM", 7), place_class("FILTER", 0)
    ('V', 'R', 'A')
    """
    letters = _CLASSES.get(name, "A")
    return letters[min(place, len(letters) - 1)]


def known(name: str) -> bool:
    """Whether the function takes what it is listed with and gives a single value when its T places do."""
    return name in _CLASSES
