"""The known differences between the engine and spreadsheet programs: a table that is tested row by row.

Each row holds an example, what it must give and why, and what the bare engine gives. ``cured`` rows come out right
once :func:`lowpoint.book.cures.prepare` has written the formula anew; ``blocks`` rows make a formula keep its value;
``stands`` rows depend on what cells hold, which a formula's text does not tell: they are neither cured nor reported.
A new version of the engine, or another engine, shows itself here: a row fails when the behaviour changes either way.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from lowpoint.problems import CellError

from .cures import prepare

__all__ = ["CELLS", "FORMULA", "KNOWN", "PROBES", "Probe", "blocking", "met"]


@dataclass(frozen=True, slots=True)
class Probe:
    """One example of a known difference; ``bare`` is the engine's own answer, or the kind of its refusal."""

    id: str
    formula: str
    truth: object
    source: str
    bare: object
    hiding: int = 0  # how rows of the example's workbook are hidden: 1 by hand, 2 by a filter


# The cells that the examples read: A1:E4; D1 holds this formula.
FORMULA = "=1+2*3"
CELLS: list[list[object]] = [
    [1.2, "pump", "2024-03-15", None, 3.0],
    [2.7, "valve", True, None, "2"],
    [1.9, "pipe", None, None, None],
    [None, "meter", None, None, CellError.NA],
]

# What each difference is, and whether it is cured or makes a formula keep its value.
KNOWN: dict[str, tuple[str, str]] = {
    "equality-15-digits": ("cured", "numbers are compared in all their digits, not in 15"),
    "difference-snap": ("cured", "a last sum or difference keeps a rest below the 15th digit"),
    "number-text-15-digits": ("cured", "a number becomes text with 17 digits"),
    "single-value-over-range": ("cured", "a function of single values takes the first cell of a range only"),
    "row-of-range": ("cured", "ROW and COLUMN of a range give the first only"),
    "text-scientific": ("cured", "TEXT does not know exponents"),
    "text-of-words": ("cured", "TEXT makes numbers of logicals, and an error of words that look like dates"),
    "case-of-accents": ("cured", "letters with accents keep their case"),
    "value-of-text": ("cured", "VALUE does not know thousands commas"),
    "link-of-number": ("cured", "HYPERLINK makes text of the number or logical that it shows"),
    "date-from-text": ("cured", "a date written as text is not a date"),
    "time-from-text": ("cured", "a time written as text is not a time"),
    "logical-from-text": ("cured", "IF and NOT do not take the words TRUE and FALSE"),
    "no-break-space": ("cured", "TRIM takes no-break spaces, tabs and line feeds away"),
    "replace-at-end": ("cured", "REPLACE beyond the end of a text adds nothing"),
    "text-cutting": ("cured", "TEXTBEFORE and TEXTAFTER lack their later arguments"),
    "whole-of-15-digits": ("cured", "INT takes all digits of a number, not 15"),
    "multiples": ("cured", "CEILING, FLOOR and their like err with negative steps, a mode, or a rest below 15 digits"),
    "divisor-of-many": ("cured", "GCD and LCM take two numbers only"),
    "single-holiday": ("cured", "NETWORKDAYS and WORKDAY pass a single holiday over that DATE gives"),
    "convert-units": ("cured", "CONVERT lacks pressure, power, energy and other units"),
    "array-functions": ("cured", "MMULT, MINVERSE, MDETERM, EXPAND, WRAPROWS and WRAPCOLS are missing"),
    "stack-unequal": ("cured", "VSTACK and HSTACK of unequal sizes are refused"),
    "arrays-of-unequal-size": ("cured", "arrays of unequal size give #VALUE! as a whole, not #N/A where one ends"),
    "unique-case": ("cured", "UNIQUE tells capitals from small letters"),
    "filter-columns": ("cured", "FILTER of columns keeps them all"),
    "sort-keys": ("cured", "SORT and SORTBY look at the first key only, and sort accents behind z"),
    "choose-of-several": ("cured", "CHOOSE does not put ranges side by side"),
    "index-of-row": ("cured", "INDEX with one number gives the first cell of a table's row"),
    "keys-out-of-order": ("cured", "MATCH, VLOOKUP and HLOOKUP of the nearest key refuse keys out of order"),
    "lookup-blanks": ("cured", "LOOKUP finds blanks behind the keys"),
    "xlookup-next": ("cured", "XLOOKUP of the next key wants sorted keys"),
    "lookup-computed": ("cured", "LOOKUP in a computed vector stops at errors"),
    "product-of-words": ("cured", "SUMPRODUCT takes logicals and text such as 2 for numbers"),
    "sum-of-errors": ("cured", "SUMIF, AVERAGEIF and their like pass errors over that meet the criteria"),
    "count-of-errors": ("cured", "COUNTIF does not count errors by name"),
    "subtotal-of-errors": ("cured", "SUBTOTAL gives an error where it counts cells with errors"),
    "error-criterion": ("blocks", "an error's name is no criterion for SUMIF, COUNTIFS and their like"),
    "aggregate-array": ("cured", "AGGREGATE 14 to 19 are missing"),
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
    "aggregate-form": ("blocks", "AGGREGATE 12 and 13, and options 0 to 3, are missing or wrong"),
    "hidden-rows": ("blocks", "SUBTOTAL and AGGREGATE count hidden rows"),
    "indirect-r1c1": ("blocks", "INDIRECT does not know rows and columns by number"),
    "datedif-unit": ("blocks", "DATEDIF counts YD differently"),
    "cell-info": ("blocks", "CELL knows no file, width or format"),
    "formula-text": ("blocks", "FORMULATEXT and ISFORMULA look at the engine's formulas"),
    "text-pattern": ("blocks", "TEXT does not know the pattern"),
    "text-argument": ("blocks", "text among the numbers of a statistic is passed over"),
    "range-for-single-value": ("blocks", "a function takes the first cell of a range only"),
    "number-in-text": ("stands", "text such as 1,000 in a sum or product is no number"),
    "order-of-accents": ("stands", "letters with accents are greater than z in comparisons"),
    "exact-lookup-slack": ("stands", "an exact lookup finds a number that differs below the 12th digit"),
    "array-of-open-size": ("stands", "an array of a size that shows only in the end is not filled up to another's"),
}

_MS = "Microsoft function reference (from memory), "
_OF = "OASIS ODF 1.3 part 4 (from memory), "
_DIGITS = "Microsoft support article 78113 (15 significant digits); LibreOffice 7.4 agrees"
_ARRAY = "ISO/IEC 29500-1, 18.17: taken element by element in an array formula"
_INT = "reported: INT rounds to 15 digits first (office-forums.com thread 1184458)"
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
        ("text-of-words", '=TEXT("FV-101","0.0")', "FV-101", "LibreOffice 7.4; common practice: words stay", "#VALUE!"),
        ("text-of-words", '=TEXT(C2,"0")', "TRUE", "common practice: TEXT leaves a logical as it is", "1"),
        ("case-of-accents", '=UPPER("équilibré")', "ÉQUILIBRÉ", "LibreOffice 7.4", "éQUILIBRé"),
        ("value-of-text", '=VALUE("1,234.5")', 1234.5, _MS + 'VALUE (example "$1,000")', "#VALUE!"),
        ("link-of-number", '=HYPERLINK("#FV-101",5)', 5.0, _OF + "HYPERLINK: Text or Number", "5"),
        ("link-of-number", '=IF(HYPERLINK("#FV-101",A1)>9,"high","low")', "low", _OF + "HYPERLINK", "high"),
        ("link-of-number", '=HYPERLINK("#FV-101",C2)', True, "common practice: a logical stays one", "TRUE"),
        ("date-from-text", "=YEAR(C1)", 2024.0, _OF + "YEAR: a date parameter takes text", "#VALUE!"),
        ("time-from-text", '=HOUR("13:45")', 13.0, _OF + "HOUR: a time parameter takes text", "#VALUE!"),
        ("time-from-text", '=MINUTE("2024-03-15 6:30 PM")', 30.0, _OF + "MINUTE", "#VALUE!"),
        ("logical-from-text", '=IF("TRUE",1,2)', 1.0, "LibreOffice 7.4; common practice", "#VALUE!"),
        ("no-break-space", '=LEN(TRIM(UNICHAR(160)&"a "))', 2.0, _MS + "TRIM: not the no-break space", 1.0),
        ("replace-at-end", '=REPLACE("abc",5,1,"X")', "abcX", "LibreOffice 7.4", "abc"),
        ("text-cutting", '=TEXTAFTER("FV-101","v",1,1)', "-101", _MS + "TEXTAFTER: match_mode 1", "#VALUE!"),
        ("text-cutting", '=TEXTBEFORE("ab","-",1,0,1)', "ab", _MS + "TEXTBEFORE: match_end 1", "#VALUE!"),
        ("whole-of-15-digits", "=INT(4.35*100)", 435.0, "LibreOffice 7.4; " + _INT, 434.0),
        ("whole-of-15-digits", "=INT(123456789-0.0000004)", 123456789.0, _INT, 123456788.0),
        ("multiples", "=CEILING(-2.5,-2)", -4.0, "ECMA-376 part 1, CEILING: its example", -2.0),
        ("multiples", "=FLOOR(-2.5,-2)", -2.0, "ECMA-376 part 1, FLOOR: its example", -4.0),
        ("multiples", "=FLOOR(0.3,0.1)", 3 * 0.1, "LibreOffice 7.4", 0.2),
        ("multiples", "=CEILING.MATH(-5.5,2,-1)", -6.0, _MS + "CEILING.MATH: its example", "#VALUE!"),
        ("divisor-of-many", "=LCM(4,6,10)", 60.0, _OF + "LCM; by hand 2*2*3*5", "#VALUE!"),
        ("single-holiday", "=NETWORKDAYS(45352,45366,DATE(2024,3,15))", 10.0, "LibreOffice 7.4; by hand", 11.0),
        ("convert-units", '=CONVERT(1,"atm","Pa")', 101325.0, _SI, "#N/A"),
        ("convert-units", '=CONVERT(1,"gal","l")', 3.785411784, _SI, "#N/A"),
        ("array-functions", "=SUM(MMULT({1,2;3,4},{5;6}))", 56.0, _OF + "MMULT; by hand 17+39", "name"),
        ("array-functions", "=MDETERM({1,2;3,4})", -2.0, _OF + "MDETERM; by hand 4-6", "name"),
        ("array-functions", "=SUM(MINVERSE({2,0;0,4}))", 0.75, _OF + "MINVERSE; by hand 1/2+1/4", "name"),
        ("array-functions", "=COUNT(EXPAND({1,2},2,3,0))", 6.0, _MS + "EXPAND", "name"),
        ("array-functions", "=SUM(INDEX(WRAPROWS({1,2,3,4},2),2,0))", 7.0, _MS + "WRAPROWS", "name"),
        ("array-functions", "=SUM(INDEX(WRAPCOLS({1,2,3,4},2),2,0))", 6.0, _MS + "WRAPCOLS", "name"),
        ("stack-unequal", "=COUNT(VSTACK({1,2},{3}))", 3.0, _MS + "VSTACK: padded with #N/A", "#VALUE!"),
        ("arrays-of-unequal-size", "=IFERROR(INDEX({1,2,3}+{10,20},1),0)", 11.0, _OF + "array calculation", 0.0),
        ("arrays-of-unequal-size", "=COUNT(IF(A1:A3>1.5,{7;8},9))", 2.0, _OF + "array calculation", "#VALUE!"),
        ("arrays-of-unequal-size", '=INDEX(A1:A3&{"x";"y"},2)', "2.7y", _OF + "array calculation", "#REF!"),
        ("arrays-of-unequal-size", "=ISNA(INDEX({1;2;3}={1;2},3))", True, _OF + "array calculation", False),
        ("unique-case", '=ROWS(UNIQUE({"a";"A";"b"}))', 2.0, "common practice: UNIQUE is not case-sensitive", 3.0),
        ("filter-columns", "=SUM(FILTER({1,2,3},{1,0,1}))", 4.0, _MS + "FILTER: by columns", 6.0),
        ("sort-keys", "=INDEX(SORT({1,2;1,1;0,5},{1,2}),2,2)", 1.0, _MS + "SORT: sort_index of several", 2.0),
        ("sort-keys", '=INDEX(SORTBY({"a";"b";"c"},{1;1;2},1,{3;1;2},1),1)', "b", _MS + "SORTBY: two keys", "#VALUE!"),
        ("sort-keys", '=INDEX(SORT({"é";"f"}),1)', "é", "common practice: accents beside their letter", "f"),
        ("choose-of-several", "=SUM(CHOOSE({1,2},A1:A3,ROW(A1:A3)))", 11.8, _ARRAY, "#VALUE!"),
        ("index-of-row", "=SUM(INDEX({1,2;3,4},2))", 7.0, _MS + "INDEX: without a column, the row", 3.0),
        ("keys-out-of-order", "=MATCH(1E9,{3,1,2})", 3.0, "LibreOffice 7.4; common practice: the last number", "#N/A"),
        ("keys-out-of-order", "=VLOOKUP(99,A1:B3,2)", "pipe", "LibreOffice 7.4", "#N/A"),
        ("lookup-blanks", "=LOOKUP(9E9,A1:A9)", 1.9, "LibreOffice 7.4; common practice: the last number", 0.0),
        (
            "product-of-words",
            "=SUMPRODUCT(A1:A3,E1:E3)",
            1.2 * 3 + 2.7 * 0,
            _MS + "SUMPRODUCT: what is no number is 0",
            9.0,
        ),
        ("product-of-words", '=SUMPRODUCT(B1:B3="pump",A1:A3)', 0.0, _MS + "SUMPRODUCT: logicals are 0", 1.2),
        ("sum-of-errors", '=SUMIFS(E1:E4,B1:B4,"meter")', "#N/A", "LibreOffice 7.4; common practice", 0.0),
        ("sum-of-errors", '=AVERAGEIF(B1:B4,"m*",E1:E4)', "#N/A", "LibreOffice 7.4; common practice", "#DIV/0!"),
        ("count-of-errors", '=COUNTIF(E1:E4,"#N/A")', 1.0, "LibreOffice 7.4; common practice", 0.0),
        ("subtotal-of-errors", "=SUBTOTAL(2,E1:E4)", 1.0, _OF + "SUBTOTAL 2 is COUNT; by hand", "#N/A"),
        ("error-criterion", '=COUNTIFS(E1:E4,"#N/A",B1:B4,"m*")', 1.0, "LibreOffice 7.4; common practice", 0.0),
        ("aggregate-array", "=AGGREGATE(14,6,A1:A3,1)", 2.7, _MS + "AGGREGATE: 14 is LARGE", "missing"),
        ("aggregate-array", "=AGGREGATE(15,6,A1:A3/(A1:A3>1.5),1)", 1.9, _MS + "AGGREGATE: 15 is SMALL", "missing"),
        ("aggregate-array", "=AGGREGATE(16,4,A1:A3,0.25)", 1.55, _OF + "PERCENTILE: by hand (1.2+1.9)/2", "missing"),
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
        ("aggregate-form", "=AGGREGATE(12,6,A1:A3)", 1.9, _MS + "AGGREGATE: 12 is MEDIAN", "missing"),
        ("hidden-rows", "=SUBTOTAL(109,A1:A3)", 3.1, _MS + "SUBTOTAL; row 2 hidden: 1.2+1.9", 5.8, 1),
        ("hidden-rows", "=SUBTOTAL(9,A1:A3)", 3.1, _MS + "SUBTOTAL; row 2 filtered out: 1.2+1.9", 5.8, 2),
        ("hidden-rows", "=AGGREGATE(9,5,A1:A3)", 3.1, _MS + "AGGREGATE; row 2 hidden: 1.2+1.9", 5.8, 1),
        ("indirect-r1c1", '=INDIRECT("R1C2",FALSE)', "pump", _MS + "INDIRECT: a1 FALSE", "#REF!"),
        ("datedif-unit", '=DATEDIF(45000,45365,"YD")', 365.0, "LibreOffice 7.4", 364.0),
        ("cell-info", '=CELL("filename",A1)', None, _MS + "CELL", "#VALUE!"),
        ("formula-text", "=FORMULATEXT(D1)", "=1+2*3", _MS + "FORMULATEXT", "=1 + 2 * 3"),
        ("text-pattern", '=TEXT(3.75,"# ?/?")', "3 3/4", "LibreOffice 7.4", "3.75"),
        ("text-pattern", '=TEXT(1234,"0-00")', "12-34", "LibreOffice 7.4", "1234"),
        ("text-argument", '=AVERAGE("x",1)', "#VALUE!", _MS + "AVERAGE: text that is no number", 1.0),
        ("range-for-single-value", '=SUM(INDIRECT({"A1","A2"}))', None, "depends on the program", "#VALUE!"),
        ("number-in-text", '="1,000"+0', 1000.0, "LibreOffice 7.4; common practice", "#VALUE!"),
        ("order-of-accents", '="é">"f"', False, "LibreOffice 7.4", True),
        ("exact-lookup-slack", "=MATCH(0.1+0.2,{0.1,0.2,0.3},0)", "#N/A", "LibreOffice 7.4; common practice", 3.0),
        ("array-of-open-size", "=IFERROR(INDEX(UNIQUE({1;1;2})+{10;20;30},1),0)", 11.0, _OF + "array calculation", 0.0),
    )
)


def blocking(formula: str, hiding: int = 0) -> str | None:
    """Why a cell with this formula must keep its value; ``None`` where it can be recalculated.

    >>> blocking("=SUM(A1:A3 B1:B3)")
    'uses the intersection of two ranges'
    """
    return prepare(formula, hiding).blocked


def met(formulas: Iterable[str], hiding: int = 0) -> list[str]:
    """The ids of the known differences that these formulas meet, in the order of :data:`KNOWN`."""
    found = {probe for formula in formulas for probe in prepare(formula, hiding).met}
    return [probe for probe in KNOWN if probe in found]
