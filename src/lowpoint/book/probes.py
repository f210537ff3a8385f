"""The known differences between the engine and spreadsheet programs: a table that is tested row by row.

Each row holds an example, what it must give and why, and what the bare engine gives. ``cured`` rows come out right
once :func:`lowpoint.book.cures.prepare` has written the formula anew; ``blocks`` rows make a formula keep its value.
A new version of the engine, or another engine, shows itself here: a row fails when the behaviour changes either way.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from .cures import prepare

__all__ = ["CELLS", "KNOWN", "PROBES", "Probe", "blocking", "met"]


@dataclass(frozen=True, slots=True)
class Probe:
    """One example of a known difference; ``bare`` is the engine's own answer, or the kind of its refusal."""

    id: str
    formula: str
    truth: object
    source: str
    bare: object


# The cells that the examples read: A1:C3.
CELLS: list[list[object]] = [[1.2, "pump", "2024-03-15"], [2.7, "valve", True], [1.9, "pipe", None]]

# What each difference is, and whether it is cured or makes a formula keep its value.
KNOWN: dict[str, tuple[str, str]] = {
    "equality-15-digits": ("cured", "numbers are compared in all their digits, not in 15"),
    "difference-snap": ("cured", "a last sum or difference keeps a rest below the 15th digit"),
    "number-text-15-digits": ("cured", "a number becomes text with 17 digits"),
    "single-value-over-range": ("cured", "a function of single values takes the first cell of a range only"),
    "row-of-range": ("cured", "ROW and COLUMN of a range give the first only"),
    "text-scientific": ("cured", "TEXT does not know exponents"),
    "text-of-logical": ("cured", "TEXT makes numbers of logicals"),
    "case-of-accents": ("cured", "letters with accents keep their case"),
    "value-of-text": ("cured", "VALUE does not know thousands commas"),
    "date-from-text": ("cured", "a date written as text is not a date"),
    "ceiling-negative-step": ("cured", "CEILING and FLOOR with a negative step round the wrong way"),
    "convert-units": ("cured", "CONVERT lacks pressure, power, energy and other units"),
    "array-functions": ("cured", "MMULT, MINVERSE, MDETERM, EXPAND, WRAPROWS and WRAPCOLS are missing"),
    "stack-unequal": ("cured", "VSTACK and HSTACK of unequal sizes are refused"),
    "unique-case": ("cured", "UNIQUE tells capitals from small letters"),
    "xlookup-next": ("cured", "XLOOKUP of the next key wants sorted keys"),
    "lookup-computed": ("cured", "LOOKUP in a computed vector stops at errors"),
    "mode-tie": ("cured", "MODE takes the least of several commonest numbers"),
    "type-of-error": ("cured", "TYPE hands an error on"),
    "unreadable": ("blocks", "the formula cannot be read"),
    "external-reference": ("blocks", "another workbook is read"),
    "sheet-span": ("blocks", "the same cells of several sheets are read"),
    "table-reference": ("blocks", "a table column could not be placed"),
    "intersection": ("blocks", "the intersection operator is missing"),
    "union": ("blocks", "the union operator is missing"),
    "range-of-calls": ("blocks", "a range between the results of two lookups is missing"),
    "lambda": ("blocks", "LAMBDA is missing"),
    "unknown-function": ("blocks", "the function is missing"),
    "aggregate-array": ("blocks", "AGGREGATE 12 to 19 are missing"),
    "cell-info": ("blocks", "CELL knows no file, width or format"),
    "text-pattern": ("blocks", "TEXT does not know the pattern"),
    "text-argument": ("blocks", "text among the numbers of a statistic is passed over"),
    "range-for-single-value": ("blocks", "a function takes the first cell of a range only"),
}

_MS = "Microsoft function reference (from memory), "
_OF = "OASIS ODF 1.3 part 4 (from memory), "
_DIGITS = "Microsoft support article 78113 (15 significant digits); LibreOffice 7.4 agrees"
_ARRAY = "ISO/IEC 29500-1, 18.17: taken element by element in an array formula"
_SI = "NIST SP 811 appendix B"

PROBES: tuple[Probe, ...] = tuple(
    Probe(*row)
    for row in (
        ("equality-15-digits", "=0.1+0.2=0.3", True, _DIGITS, False),
        ("equality-15-digits", "=0.1+0.2>0.3", False, _DIGITS, True),
        ("equality-15-digits", "=1.1-1=0.1", True, _DIGITS, False),
        ("equality-15-digits", "=SUM(--({0.1,0.2}+0.2=0.3))", 1.0, _DIGITS, 0.0),
        ("difference-snap", "=0.5-0.4-0.1", 0.0, "LibreOffice 7.4; common practice", -2.7755575615628914e-17),
        ("number-text-15-digits", '=1/3&""', "0.333333333333333", _DIGITS, "0.3333333333333333"),
        ("number-text-15-digits", "=LEN(2/3)", 17.0, _DIGITS, 18.0),
        ("number-text-15-digits", '=TEXTJOIN("/",TRUE,A1:A2/3)', "0.4/0.9", _DIGITS, "0.39999999999999997/0.9"),
        ("single-value-over-range", "=SUMPRODUCT(LEN(B1:B3))", 13.0, _ARRAY, 4.0),
        ("single-value-over-range", "=SUM(ROUND(A1:A3,0))", 6.0, _ARRAY, "#VALUE!"),
        ("single-value-over-range", '=SUM(COUNTIF(B1:B3,{"pump","pipe"}))', 2.0, _ARRAY, 0.0),
        ("single-value-over-range", "=SUM(LARGE(A1:A3,{1,2}))", 2.7 + 1.9, _ARRAY, "#NUM!"),
        ("single-value-over-range", '=SUMPRODUCT(--ISNUMBER(SEARCH("p",B1:B3)))', 2.0, _ARRAY, 1.0),
        ("row-of-range", "=SUM(ROW(A1:A3))", 6.0, _OF + "ROW", 1.0),
        ("row-of-range", "=SUM(COLUMN(A1:C1))", 6.0, _OF + "COLUMN", 1.0),
        ("text-scientific", '=TEXT(1234567,"0.00E+00")', "1.23E+06", "LibreOffice 7.4", "1234567.00"),
        ("text-of-logical", '=TEXT(C2,"0")', "TRUE", "common practice: TEXT leaves a logical as it is", "1"),
        ("case-of-accents", '=UPPER("équilibré")', "ÉQUILIBRÉ", "LibreOffice 7.4", "éQUILIBRé"),
        ("value-of-text", '=VALUE("1,234.5")', 1234.5, _MS + 'VALUE (example "$1,000")', "#VALUE!"),
        ("date-from-text", "=YEAR(C1)", 2024.0, _OF + "YEAR: a date parameter takes text", "#VALUE!"),
        ("ceiling-negative-step", "=CEILING(-2.5,-2)", -4.0, "ECMA-376 part 1, CEILING: its example", -2.0),
        ("ceiling-negative-step", "=FLOOR(-2.5,-2)", -2.0, "ECMA-376 part 1, FLOOR: its example", -4.0),
        ("convert-units", '=CONVERT(1,"atm","Pa")', 101325.0, _SI, "#N/A"),
        ("convert-units", '=CONVERT(1,"gal","l")', 3.785411784, _SI, "#N/A"),
        ("array-functions", "=SUM(MMULT({1,2;3,4},{5;6}))", 56.0, _OF + "MMULT; by hand 17+39", "name"),
        ("array-functions", "=MDETERM({1,2;3,4})", -2.0, _OF + "MDETERM; by hand 4-6", "name"),
        ("array-functions", "=SUM(MINVERSE({2,0;0,4}))", 0.75, _OF + "MINVERSE; by hand 1/2+1/4", "name"),
        ("array-functions", "=COUNT(EXPAND({1,2},2,3,0))", 6.0, _MS + "EXPAND", "name"),
        ("array-functions", "=SUM(INDEX(WRAPROWS({1,2,3,4},2),2,0))", 7.0, _MS + "WRAPROWS", "name"),
        ("array-functions", "=SUM(INDEX(WRAPCOLS({1,2,3,4},2),2,0))", 6.0, _MS + "WRAPCOLS", "name"),
        ("stack-unequal", "=COUNT(VSTACK({1,2},{3}))", 3.0, _MS + "VSTACK: padded with #N/A", "#VALUE!"),
        ("unique-case", '=ROWS(UNIQUE({"a";"A";"b"}))', 2.0, "common practice: UNIQUE is not case-sensitive", 3.0),
        ("xlookup-next", "=XLOOKUP(90,{200;50;100;80},{1;2;3;4},,-1)", 4.0, _MS + "XLOOKUP match_mode", "#N/A"),
        ("xlookup-next", "=XLOOKUP(90,{200;50;100;80},{1;2;3;4},,1)", 3.0, _MS + "XLOOKUP match_mode", "#N/A"),
        (
            "lookup-computed",
            "=LOOKUP(2,1/({0,0,1,0,0,0}>0),{1,2,3,4,5,6})",
            3.0,
            "common practice: the last that fits",
            "#N/A",
        ),
        ("mode-tie", "=MODE({3,1,1,3})", 3.0, "common practice: the one met first", 1.0),
        ("type-of-error", "=TYPE(NA())", 16.0, _MS + "TYPE", "#N/A"),
        ("unreadable", "=1+", None, "not a formula", "unloadable"),
        ("external-reference", "=[1]Sheet1!A1", None, "no link is ever followed", "unloadable"),
        ("sheet-span", "=SUM(S:S!A1)", 1.2, "ISO/IEC 29500-1, 18.17", "missing"),
        ("table-reference", "=SUM(Valves[Kv])", None, "ISO/IEC 29500-1, 18.17", "name"),
        ("intersection", "=SUM(A1:A3 A2:C2)", 2.7, _OF + "intersection", "missing"),
        ("union", "=SUM((A1,A3))", 3.1, _OF + "union", "missing"),
        ("range-of-calls", "=SUM(XLOOKUP(1.2,A1:A3,A1:A3):XLOOKUP(2.7,A1:A3,A1:A3))", 3.9, _MS + "XLOOKUP", "#REF!"),
        ("lambda", "=LAMBDA(x,x+1)(2)", 3.0, _MS + "LAMBDA", "missing"),
        ("unknown-function", "=AREAS(A1:A3)", 1.0, _OF + "AREAS", "name"),
        ("unknown-function", "=IFERROR(MAP(A1:A3,1),5)", None, _MS + "MAP", 5.0),
        ("unknown-function", '=GETPIVOTDATA("Flow",A1)', None, _MS + "GETPIVOTDATA", "name"),
        ("aggregate-array", "=AGGREGATE(14,6,A1:A3,1)", 2.7, _MS + "AGGREGATE: 14 is LARGE", "missing"),
        ("cell-info", '=CELL("filename",A1)', None, _MS + "CELL", "#VALUE!"),
        ("text-pattern", '=TEXT(3.75,"# ?/?")', "3 3/4", "LibreOffice 7.4", "3.75"),
        ("text-pattern", '=TEXT(1234,"0-00")', "12-34", "LibreOffice 7.4", "1234"),
        ("text-argument", '=AVERAGE("x",1)', "#VALUE!", _MS + "AVERAGE: text that is no number", 1.0),
        ("range-for-single-value", '=SUM(INDIRECT({"A1","A2"}))', None, "depends on the program", "#VALUE!"),
    )
)


def blocking(formula: str) -> str | None:
    """Why a cell with this formula must keep its value; ``None`` where it can be recalculated.

    >>> blocking("=SUM(A1:A3 B1:B3)")
    'uses the intersection of two ranges'
    """
    return prepare(formula).blocked


def met(formulas: Iterable[str]) -> list[str]:
    """The ids of the known differences that these formulas meet, in the order of :data:`KNOWN`."""
    found = {probe for formula in formulas for probe in prepare(formula).met}
    return [probe for probe in KNOWN if probe in found]
