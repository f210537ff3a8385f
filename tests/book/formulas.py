"""Ordinary formulas of the kind a valve list uses, and the small Kestrel Bay book that they read.

``ORDINARY`` (the file ``ordinary.txt``) is judged by LibreOffice, which is run on the same book; ``DOCUMENTED`` holds
newer functions, which LibreOffice 7.4 does not know, each with the value that its documentation gives and where that
stands.
"""

from __future__ import annotations

import datetime
import math
from collections.abc import Iterator
from pathlib import Path
from typing import NamedTuple

# tag, service, liquid, t degC, p1 bar, p2 bar, flow m3/h, Kv, size mm, commissioned (serial day), duty, note
LIST: list[list[object]] = [
    ["Tag", "Service", "Liquid", "t", "p1", "p2", "Flow", "Kv", "Size", "Since", "Duty", "Note"],
    ["FV-101", "Intake", "sea water", 14.5, 6.2, 3.1, 420, 265.0, 200, 43101, True, "north pump"],
    ["FV-102", "Intake", "sea water", 14.5, 6.4, 2.9, 388.5, 230.0, 200, 43466, True, None],
    ["PV-201", "Desalination", "sea water", 18, 68.0, 12.5, 96, 14.25, 80, 43831, True, "letdown"],
    ["PV-202", "Desalination", "demineralised water", 22, 5.5, 4.8, 61.2, 80.0, 80, 44197, False, "spare"],
    ["LV-301", "Boiler house", "boiler feed water", 142, 88, 62.5, 34, 7.2, 50, 44562, True, "drum level"],
    ["LV-302", "Boiler house", "condensate", 96, 3.4, 1.2, 18.75, 14.0, 50, 44927, True, ""],
    ["TV-401", "District heating", "water", 118, 14.2, 9.9, 240, 118.0, 150, 45292, True, "winter only"],
    ["TV-402", "District heating", "water", 71, 8.8, 8.8, 0, 100, 150, 45658, False, "by-pass"],
    ["FV-501", "Fuel jetty", "propane", 21, 16.5, 14.1, 55, 46.5, 100, 45000, True, "Jetty arm 2"],
    ["FV-502", "Fuel jetty", "naphtha", 24, 9.0, 5.25, 132, 88.25, 100, 44000, True, None],
    ["HV-503", "Fuel jetty", "methanol", 19, 4.4, 4.1, 12.5, None, 40, 43500, False, "manual"],
    ["FV-601", "Dosing", "ammonia", 26, 12.25, 11.75, 2.4, 3.4, 25, 42736, True, "12 mm trim"],
]
TABLE: list[list[object]] = [  # size mm, rated Kv, FL, price: ascending keys
    ["Size", "Rated", "FL", "Price"],
    [25, 12, 0.9, 410.5],
    [40, 28, 0.9, 560],
    [50, 46, 0.88, 700.25],
    [80, 110, 0.86, 1250],
    [100, 170, 0.85, 1710],
    [150, 360, 0.84, 3300],
    [200, 640, 0.82, 5900],
]
MIXED: list[list[object]] = [  # awkward cells: text numbers, logicals, blanks, spaces, long text
    ["12", 12, True, None],
    [" padded  text ", -7.25, False, ""],
    ["Case", "case", "CASE", "3,5"],
    ["10%", 0.1, "2024-03-15", "1E3"],
    ["a-b-c-d", "tail", "x", 0],
    [1e-3, 1234567.891, -0.5, 2.5],
]
FAULTS: list[list[object]] = [  # errors, text numbers and dates, logicals and empty text among numbers
    [1.5, "a", 7, 5, None, 45366, 0.1 + 0.2, "DN 50", 2.0],
    ["#N/A", "b", 3, "2", "", 45000, 0.3, "dn 50", 4.0],
    ["#DIV/0!", "A", 2.5, "3", "x", "2024-03-15", 4.35, "DN 80", "8"],
    [4, None, None, 2, None, None, 1.005, "3,5", True],
    [None, "", "text", 2, "", None, 0.285, "a*b", None],
    ["x", "a", 9, None, 0, None, None, "intake/pump/discharge", None],
    [-2, "c", 1, True, 5, None, None, None, None],
    [True, "bb", 4, "n/a", -1, None, None, "DN 65", None],
]
SHEETS = {"List": LIST, "Table": TABLE, "Sea water": MIXED, "Faults": FAULTS}
NAMES = {"Flows": "List!$G$2:$G$13", "Rated": "Table!$B$2:$B$8", "Sizes": "Table!$A$2:$A$8", "Atm": "1.01325"}

_MS = "Microsoft function reference (from memory), "
_OF = "OASIS ODF 1.3 part 4 (from memory), "
_LOGICAL = _OF + "logicals in ranges are not numbers; LibreOffice keeps them as numbers"
_OPERATORS = "common practice: text joins a logical by its word, and number < text < logical in comparisons"
_MEMORY = "from memory: a difference counts as 0 only where it is the last step of the formula"
_ARTICLE = "Microsoft support article 78113: the result shows as 0.899999999999999, LibreOffice compares more widely"

_LEAP = "Microsoft support article 214326: the 1900 system begins with day 0 of January 1900 and has a 29 February"
_DAY_0 = datetime.date(1899, 12, 30)

# Where LibreOffice 7.4 is known to differ from the reference: the value that stands there, and where.
OFFICE_DIFFERS: dict[str, tuple[object, str]] = {
    "=(-8)^(1/3)": ("#NUM!", _MS + "POWER: a negative base with a fractional exponent; common practice"),
    '="a"&TRUE': ("aTRUE", _OPERATORS),
    '="a"<TRUE': (True, _OPERATORS),
    "=TRUE>100": (True, _OPERATORS),
    "=(0.1+0.2-0.3)": (0.1 + 0.2 - 0.3, _MEMORY),
    "=0.3-0.1-0.2=0": (False, _MEMORY),
    "=(43.1-43.2)+1=0.9": (False, _ARTICLE),
    "=22.26-21.29=0.97": (False, "0.970000000000002 in 15 digits (IEEE 754); LibreOffice compares more widely"),
    "=TYPE(TRUE)": (4.0, _MS + "TYPE"),
    '=SUM(1,"2",TRUE)': (4.0, _MS + 'SUM: typed logicals and text numbers count (example SUM("5",15,TRUE) = 21)'),
    '=AVERAGE(1,2,"3")': (2.0, _MS + "AVERAGE: text numbers typed as arguments count"),
    "=SUM(List!A2:L13)": (534891.5, _LOGICAL),
    "=SUM('Sea water'!A1:D6)": (12 - 7.25 + 0.1 + 0 + 1e-3 + 1234567.891 - 0.5 + 2.5, _LOGICAL),
    "=MAX(List!K2:K13)": (0.0, _LOGICAL),
    "=MINA(List!K2:K13)": (0.0, _MS + "MINA: FALSE counts as 0"),
    "=COUNT(List!A1:L13)": (83.0, _LOGICAL),
    '=CONVERT(1,"atm","Pa")': (101325.0, "NIST SP 811 appendix B: standard atmosphere"),
    '=CONVERT(1,"psi","Pa")': (0.45359237 * 9.80665 / 0.0254**2, "NIST SP 811: pound, standard gravity, inch"),
    '=CONVERT(1,"lbm","kg")': (0.45359237, "NIST SP 811 appendix B: avoirdupois pound, exact"),
    "=MODE(List!I2:I13)": (200.0, "common practice: of several commonest values the first; LibreOffice the least"),
    '=TEXT(TRUE,"0")': ("TRUE", "common practice: TEXT leaves a logical as it is; LibreOffice keeps it as a number"),
    '=1E20&""': ("100000000000000000000", "from memory; LibreOffice writes 1E+020"),
    "=MOD(10,0.1)": (math.fmod(10, 0.1), "reported: 0.1 since 2010 (social.technet.microsoft.com, Excel 2010 MOD bug)"),
    "=MROUND(5,-2)": ("#NUM!", _MS + "MROUND: number and multiple of two signs"),
    '=TEXT(5,"0.#")': ("5.", "common practice: the point stays"),
    "=DOLLAR(-1234.567)": ("($1,234.57)", _MS + "DOLLAR: $#,##0.00_);($#,##0.00)"),
    "=TRUE=1": (False, _OPERATORS),
    '=SUM("5")': (5.0, _MS + "SUM: a text number typed as an argument counts"),
    '=MAX("5",1)': (5.0, _MS + "MAX: a text number typed as an argument counts"),
    '=PRODUCT(2,"3",TRUE)': (6.0, _MS + "PRODUCT: text numbers and logicals typed as arguments count"),
    "=COUNTIF('Sea water'!A1:D6,\"*-*\")": (2.0, _MS + "COUNTIF: wildcards match text, not numbers; by hand"),
    "=MAXA(List!K2:K13)": (1.0, _MS + "MAXA: TRUE counts as 1"),
    "=AVERAGE(List!K2:K13,5)": (5.0, _LOGICAL),
    "=ATAN2(0,0)": ("#DIV/0!", _MS + "ATAN2: both 0"),
    '=VLOOKUP("80",Table!A2:D8,2,FALSE)': ("#N/A", _MS + "VLOOKUP: numbers kept as text are not found"),
    '=MATCH("80",Sizes,0)': ("#N/A", _MS + "MATCH: text and number are not equal"),
    '=MATCH("~?",{"?","a"},0)': (1.0, _MS + "MATCH: a tilde before a wildcard"),
    '=FIND("","abc")': (1.0, _MS + "FIND: empty text is found at once"),
    "=SUMPRODUCT(List!G2:G13,List!K2:K13)": (0.0, _MS + "SUMPRODUCT: what is no number counts as 0"),
    "=SUMPRODUCT(Faults!C1:C8,Faults!D1:D8)": (35.0, _MS + "SUMPRODUCT: what is no number counts as 0; by hand 7*5"),
    "=SUBTOTAL(2,Faults!A1:A8)": (3.0, _LOGICAL),
    "=LOOKUP(9E9,Faults!A1:A8)": (-2.0, "common practice: the last number, errors or not"),
    '=CODE("é")': (233.0, _MS + "CODE: the character set of Windows"),
    '=CODE("")': ("#VALUE!", "common practice"),
    "=CONCATENATE(1,2,TRUE)": ("12TRUE", _OPERATORS),
    "=DATE(1899,12,31)": (
        float((datetime.date(3799, 12, 31) - _DAY_0).days),
        _MS + "DATE: to years below 1900 it adds 1900",
    ),
    "=YEAR(0)": (1900.0, _LEAP),
    "=DAY(60)": (29.0, _LEAP),
    "=YEAR(-1)": ("#NUM!", _MS + "YEAR: dates begin with 1900"),
    "=WEEKNUM(DATE(2024,12,30))": (53.0, _MS + "WEEKNUM, system 1: the week of 1 January is the first"),
}

# LibreOffice saves its own errors (Err:502, invalid argument, and so on) as #VALUE!; what they must be here.
_NUM, _REF, _NA = _MS + "{}: a number out of bounds", _MS + "{}: beyond the range", _MS + "{}: nothing to find"
OFFICE_ERRORS: dict[str, tuple[str, str]] = {
    "=SQRT(-1)": ("#NUM!", _NUM.format("SQRT")),
    "=LN(0)": ("#NUM!", _NUM.format("LN")),
    '=CONVERT(1,"h","sec")': ("#N/A", _MS + "CONVERT: units of two groups (h is the horsepower)"),
    '=CONVERT(1,"ft","kg")': ("#N/A", _MS + "CONVERT: units of two groups"),
    "=LARGE(List!G2:G13,50)": ("#NUM!", _NUM.format("LARGE")),
    "=VLOOKUP(80,Table!A2:D8,9,FALSE)": ("#REF!", _REF.format("VLOOKUP")),
    "=INDEX(Table!A2:D8,99,1)": ("#REF!", _REF.format("INDEX")),
    "=SUM(OFFSET(Table!A1,-5,0))": ("#REF!", _REF.format("OFFSET")),
    "=PERCENTILE(List!G2:G13,1.1)": ("#NUM!", _NUM.format("PERCENTILE")),
    "=RANK(7,List!I2:I13)": ("#N/A", _NA.format("RANK")),
    "=FACT(-1)": ("#NUM!", _NUM.format("FACT")),
    "=COMBIN(5,7)": ("#NUM!", _NUM.format("COMBIN")),
    "=LOG(0)": ("#NUM!", _NUM.format("LOG")),
    "=LOG(-1)": ("#NUM!", _NUM.format("LOG")),
    "=ACOSH(0.5)": ("#NUM!", _NUM.format("ACOSH")),
    "=ATANH(1)": ("#NUM!", _NUM.format("ATANH")),
    "=QUOTIENT(7,0)": ("#DIV/0!", _MS + "QUOTIENT: division by zero"),
    '=DATEDIF(DATE(2024,3,15),DATE(2023,3,14),"D")': ("#NUM!", _MS + "DATEDIF: the start after the end"),
}


class Ordinary(NamedTuple):
    """One formula that LibreOffice judges."""

    group: str
    formula: str


class Documented(NamedTuple):
    """One formula with the value its documentation gives; a range result is a list of rows."""

    formula: str
    value: object
    source: str


def _ordinary() -> Iterator[Ordinary]:
    group = ""
    for line in Path(__file__).with_name("ordinary.txt").read_text(encoding="utf-8").splitlines():
        if line.startswith("["):
            group = line.strip("[]")
        elif line.startswith(("=", "{=")):
            yield Ordinary(group, line)


ORDINARY: tuple[Ordinary, ...] = tuple(_ordinary())
KEPT = frozenset(item.formula for item in ORDINARY if item.group == "kept")
_FUEL = [["FV-501"], ["FV-502"], ["HV-503"]]
_SERVICES = [["Intake"], ["Desalination"], ["Boiler house"], ["District heating"], ["Fuel jetty"], ["Dosing"]]
_XL, _XM = _MS + "XLOOKUP", _MS + "XMATCH"
_LIFT = "ISO/IEC 29500-1, 18.17: a single-value argument that gets an array is taken element by element"
_BIG = [["FV-101", "Intake"], ["FV-102", "Intake"], ["TV-401", "District heating"], ["FV-502", "Fuel jetty"]]

DOCUMENTED: tuple[Documented, ...] = tuple(
    Documented(*row)
    for row in (
        ("=_xlfn.XLOOKUP(80,Table!A2:A8,Table!B2:B8)", 110.0, _XL + ": exact match"),
        ("=_xlfn.XLOOKUP(90,Table!A2:A8,Table!B2:B8)", "#N/A", _XL + ": nothing found"),
        ('=_xlfn.XLOOKUP(90,Table!A2:A8,Table!B2:B8,"none")', "none", _XL + ": if_not_found"),
        ('=_xlfn.XLOOKUP(90,Table!A2:A8,Table!B2:B8,"none",1)', 170.0, _XL + ": match mode 1, next larger"),
        ('=_xlfn.XLOOKUP(90,Table!A2:A8,Table!B2:B8,"none",-1)', 110.0, _XL + ": match mode -1, next smaller"),
        ("=_xlfn.XLOOKUP(90,{200;50;100;80;25},{1;2;3;4;5},,-1)", 4.0, _XL + ": the keys need no order"),
        ("=_xlfn.XLOOKUP(90,{200;50;100;80;25},{1;2;3;4;5},,1)", 3.0, _XL + ": the keys need no order"),
        ("=_xlfn.XLOOKUP(900,{200;50;100},{1;2;3},,1)", "#N/A", _XL + ": no larger key"),
        ('=_xlfn.XLOOKUP("FV-5*",List!A2:A13,List!C2:C13,,2)', "propane", _XL + ": match mode 2, wildcards"),
        ('=_xlfn.XLOOKUP("Intake",List!B2:B13,List!A2:A13,,0,-1)', "FV-102", _XL + ": search mode -1, from the last"),
        ('=_xlfn.XLOOKUP("LV-301",List!A2:A13,List!E2:G13)', [[88.0, 62.5, 34.0]], _XL + ": several columns"),
        ("=_xlfn.XLOOKUP(80,Table!A2:A8,Table!B2:B8,,0,2)", 110.0, _XL + ": search mode 2, by halving"),
        ('=_xlfn.XLOOKUP("Kv",List!A1:L1,List!A3:L3)', 230.0, _XL + ": along a row"),
        (
            '=_xlfn.XLOOKUP("FV-101",List!A2:A13,_xlfn.XLOOKUP("Flow",List!A1:L1,List!A2:L13))',
            420.0,
            _XL + ": one in the other, both ways through a table",
        ),
        (
            '=_xlfn.XLOOKUP(1,(List!B2:B13="Fuel jetty")*(List!G2:G13>100),List!A2:A13)',
            "FV-502",
            _XL + ": two conditions",
        ),
        ('=_xlfn.XLOOKUP({"FV-101";"FV-502"},List!A2:A13,List!G2:G13)', [[420.0], [132.0]], _XL + ": several wanted"),
        ('=_xlfn.XLOOKUP("HV-503",List!A2:A13,List!H2:H13)', 0.0, _XL + "; a blank that a formula gives shows as 0"),
        ("=_xlfn.XMATCH(80,Table!A2:A8)", 4.0, _XM),
        ('=_xlfn.XMATCH("Intake",List!B2:B13,0,-1)', 2.0, _XM + ": from the last"),
        ('=INDEX(List!A2:L13,_xlfn.XMATCH("tv-401",List!A2:A13),_xlfn.XMATCH("Kv",List!A1:L1))', 118.0, _XM),
        ("=_xlfn.XMATCH(90,{200;50;100;80;25},-1)", 4.0, _XM + ": next smaller"),
        ("=_xlfn.XMATCH(90,{200;50;100;80;25},1)", 3.0, _XM + ": next larger"),
        ('=_xlfn.XMATCH("b*",{"a","bc","bd"},2)', 2.0, _XM + ": wildcards"),
        ("=_xlfn.LET(_xlpm.dp,List!E2-List!F2,_xlpm.dp*2)", 6.2, _MS + "LET"),
        ("=_xlfn.LET(_xlpm.a,1,_xlpm.b,_xlpm.a+1,_xlpm.b*10)", 20.0, _MS + "LET: later names see earlier ones"),
        ('=_xlfn._xlws.FILTER(List!A2:A13,List!B2:B13="Fuel jetty")', _FUEL, _MS + "FILTER"),
        ('=_xlfn._xlws.FILTER(List!A2:A13,List!B2:B13="x","none")', "none", _MS + "FILTER: if_empty"),
        ('=_xlfn._xlws.FILTER(List!A2:A13,List!B2:B13="x")', "#CALC!", _MS + "FILTER: empty result"),
        ("=_xlfn._xlws.FILTER(List!A2:B13,(List!G2:G13>100)*List!K2:K13)", _BIG, _MS + "FILTER: product as AND"),
        ("=_xlfn._xlws.FILTER({1,2,3;4,5,6},{1,0,1})", [[1.0, 3.0], [4.0, 6.0]], _MS + "FILTER: by columns"),
        (
            '=_xlfn._xlws.FILTER(List!A2:A13,(List!B2:B13="Dosing")+(List!I2:I13=40))',
            [["HV-503"], ["FV-601"]],
            _MS + "FILTER: sum as OR",
        ),
        ('=SUM(_xlfn._xlws.FILTER(List!G2:G13,List!B2:B13="Intake",0))', 808.5, _MS + "FILTER; by hand 420+388.5"),
        ("=_xlfn._xlws.SORT({1,2;1,1;0,5},{1,2})", [[0.0, 5.0], [1.0, 1.0], [1.0, 2.0]], _MS + "SORT: two keys"),
        (
            "=_xlfn._xlws.SORT({1,2;1,1;0,5},{1,2},{-1,1})",
            [[1.0, 1.0], [1.0, 2.0], [0.0, 5.0]],
            _MS + "SORT: two orders",
        ),
        ("=_xlfn._xlws.SORT({3,1,2},1,1,TRUE)", [[1.0, 2.0, 3.0]], _MS + "SORT: by_col"),
        (
            '=_xlfn._xlws.SORT({"b";TRUE;"A";1})',
            [[1.0], ["A"], ["b"], [True]],
            "common practice: number, text, logical",
        ),
        (
            "=_xlfn.SORTBY(List!A2:A7,List!B2:B7,1,List!G2:G7,-1)",
            [["LV-301"], ["LV-302"], ["PV-201"], ["PV-202"], ["FV-101"], ["FV-102"]],
            _MS + "SORTBY: two keys; by hand from the list",
        ),
        ("=_xlfn._xlws.SORT(_xlfn.UNIQUE(List!C2:C5))", [["demineralised water"], ["sea water"]], _MS + "SORT, UNIQUE"),
        ("=_xlfn._xlws.SORT({3;1;2})", [[1.0], [2.0], [3.0]], _MS + "SORT"),
        ("=_xlfn._xlws.SORT({3;1;2},1,-1)", [[3.0], [2.0], [1.0]], _MS + "SORT: descending"),
        ('=_xlfn.SORTBY({"a";"b";"c"},{2;3;1})', [["c"], ["a"], ["b"]], _MS + "SORTBY"),
        ("=_xlfn.UNIQUE(List!B2:B13)", _SERVICES, _MS + "UNIQUE"),
        ("=_xlfn.UNIQUE({1;2;2;3},FALSE,TRUE)", [[1.0], [3.0]], _MS + "UNIQUE: exactly_once"),
        ('=_xlfn.UNIQUE({"a";"A";"b"})', [["a"], ["b"]], "common practice: text is compared without case"),
        (
            '=_xlfn.LET(_xlpm.f,_xlfn._xlws.FILTER(List!G2:G13,List!B2:B13="Intake"),SUM(_xlpm.f)/COUNT(_xlpm.f))',
            404.25,
            _MS + "LET of an array; by hand (420+388.5)/2",
        ),
        ("=_xlfn.LET(_xlpm.a,List!A2:A3,LEFT(_xlpm.a,2))", [["FV"], ["FV"]], _MS + "LET; " + _LIFT),
        ('="DN"&_xlfn.SEQUENCE(2)', [["DN1"], ["DN2"]], _MS + "SEQUENCE; " + _LIFT),
        ("=DATE(2024,_xlfn.SEQUENCE(3),1)", [[45292.0], [45323.0], [45352.0]], _LIFT + "; January 2024 is 45292"),
        (
            '=_xlfn.IFS(List!G2:G4>400,"big",List!G2:G4>0,"small")',
            [["big"], ["small"], ["small"]],
            _MS + "IFS; " + _LIFT,
        ),
        (
            '=_xlfn.SWITCH(List!I2:I4,200,"large",80,"mid","-")',
            [["large"], ["large"], ["mid"]],
            _MS + "SWITCH; " + _LIFT,
        ),
        ('=_xlfn.TEXTJOIN(", ",TRUE,IF(List!G2:G13>200,List!A2:A13,""))', "FV-101, FV-102, TV-401", _MS + "TEXTJOIN"),
        ("=SUM(CHOOSE({1,2},List!G2:G3,List!H2:H3))", 420 + 388.5 + 265 + 230, _LIFT),
        ("=VLOOKUP(110,CHOOSE({1,2},Table!B2:B8,Table!A2:A8),2,FALSE)", 80.0, "common practice: a lookup to the left"),
        ("=INDEX(List!A2:B3,2)", [["FV-102", "Intake"]], _MS + "INDEX: without a column, the row"),
        ("=_xlfn.SEQUENCE(2,3)", [[1.0, 2.0, 3.0], [4.0, 5.0, 6.0]], _MS + "SEQUENCE"),
        ("=_xlfn.SEQUENCE(3,1,10,-5)", [[10.0], [5.0], [0.0]], _MS + "SEQUENCE: start and step"),
        ('=_xlfn.TEXTBEFORE("FV-101-A","-",2)', "FV-101", _MS + "TEXTBEFORE"),
        ('=_xlfn.TEXTAFTER("FV-101-A","-",-1)', "A", _MS + "TEXTAFTER: from the end"),
        ('=_xlfn.TEXTBEFORE("abc","-",1,0,0,"none")', "none", _MS + "TEXTBEFORE: if_not_found"),
        ('=_xlfn.TEXTBEFORE("a-b/c",{"-","/"},2)', "a-b", _MS + "TEXTBEFORE: several delimiters"),
        ('=_xlfn.TEXTAFTER("FV-101","v",1,1)', "-101", _MS + "TEXTAFTER: match_mode 1, any case"),
        ('=_xlfn.TEXTSPLIT("a--b","-",,TRUE)', [["a", "b"]], _MS + "TEXTSPLIT: ignore_empty"),
        ('=_xlfn.TEXTSPLIT("a,b;c",",",";")', [["a", "b"], ["c", "#N/A"]], _MS + "TEXTSPLIT: padded with #N/A"),
        ('=_xlfn.TEXTAFTER("abc","-")', "#N/A", _MS + "TEXTAFTER: no delimiter"),
        ('=_xlfn.TEXTSPLIT("a,b;c,d",",",";")', [["a", "b"], ["c", "d"]], _MS + "TEXTSPLIT"),
        ("=_xlfn.VSTACK({1,2},{3,4})", [[1.0, 2.0], [3.0, 4.0]], _MS + "VSTACK"),
        ("=_xlfn.VSTACK({1,2},{3})", [[1.0, 2.0], [3.0, "#N/A"]], _MS + "VSTACK: padded with #N/A"),
        ("=_xlfn.HSTACK({1;2},{3;4})", [[1.0, 3.0], [2.0, 4.0]], _MS + "HSTACK"),
        ("=_xlfn.TAKE({1;2;3},-2)", [[2.0], [3.0]], _MS + "TAKE"),
        ("=_xlfn.TAKE(List!A2:C13,-1,2)", [["FV-601", "Dosing"]], _MS + "TAKE: rows and columns"),
        ("=_xlfn.DROP({1,2,3},,-1)", [[1.0, 2.0]], _MS + "DROP: the last column"),
        ("=_xlfn.CHOOSEROWS({1,2;3,4;5,6},-1)", [[5.0, 6.0]], _MS + "CHOOSEROWS: from the end"),
        ("=_xlfn.TOROW({1,2;3,4})", [[1.0, 2.0, 3.0, 4.0]], _MS + "TOROW"),
        ("=_xlfn.TOCOL({1,2;3,4},0,TRUE)", [[1.0], [3.0], [2.0], [4.0]], _MS + "TOCOL: by columns"),
        ("=_xlfn.DROP({1;2;3},1)", [[2.0], [3.0]], _MS + "DROP"),
        ("=_xlfn.CHOOSECOLS({1,2,3;4,5,6},3,1)", [[3.0, 1.0], [6.0, 4.0]], _MS + "CHOOSECOLS"),
        ("=_xlfn.TOCOL({1,2;3,4})", [[1.0], [2.0], [3.0], [4.0]], _MS + "TOCOL"),
        ("=_xlfn.EXPAND({1,2},2,3,0)", [[1.0, 2.0, 0.0], [0.0, 0.0, 0.0]], _MS + "EXPAND"),
        ("=_xlfn.WRAPROWS({1,2,3},2)", [[1.0, 2.0], [3.0, "#N/A"]], _MS + "WRAPROWS"),
        ("=_xlfn.WRAPCOLS({1,2,3},2,0)", [[1.0, 3.0], [2.0, 0.0]], _MS + "WRAPCOLS"),
        ('=_xlfn.TEXTJOIN(",",TRUE,List!H12:H13,0.1+0.2)', "3.4,0.3", _MS + "TEXTJOIN; 15 digits: common practice"),
        ('=_xlfn.CONCAT("a",1/3)', "a0.333333333333333", _MS + "CONCAT; 15 digits: common practice"),
        ("=MMULT({1,2;3,4},{5;6})", [[17.0], [39.0]], _OF + "MMULT; by hand 5+12, 15+24"),
        ("=TRANSPOSE({1,2;3,4})", [[1.0, 3.0], [2.0, 4.0]], _OF + "TRANSPOSE"),
        ("=List!G2:G4*2", [[840.0], [777.0], [192.0]], "dynamic arrays: by hand from the list"),
        ("=VLOOKUP({25;80},Table!A2:D8,2,FALSE)", [[12.0], [110.0]], _LIFT),
        ('=SUM(COUNTIFS(List!B2:B13,{"Intake","Dosing"}))', 3.0, _LIFT),
        ('=SUMIFS(List!G2:G13,List!B2:B13,{"Intake";"Dosing"})', [[808.5], [2.4]], _LIFT),
        ("=SUM(LARGE(List!G2:G13,{1,2,3}))", 420 + 388.5 + 240, _LIFT),
        ("=SUMPRODUCT(LEN(List!A2:A13))", 72.0, _LIFT + "; twelve tags of six characters"),
        ('=SUMPRODUCT(--ISNUMBER(SEARCH("jetty",List!B2:B13)))', 3.0, _LIFT),
        ('=INDEX(List!A2:A13,MATCH(1,(List!B2:B13="Fuel jetty")*(List!G2:G13>100),0))', "FV-502", _LIFT),
        ('=MAX(IF(List!B2:B13="Fuel jetty",List!G2:G13))', 132.0, _LIFT),
        ('=LOOKUP(2,1/(List!B2:B13="Fuel jetty"),List!A2:A13)', "HV-503", "common practice: the last that fits"),
        ("=ROUND(List!E2:E4,0)", [[6.0], [6.0], [68.0]], _LIFT),
        ('=LEFT(List!A2:A4,2)&"!"', [["FV!"], ["FV!"], ["PV!"]], _LIFT),
        ('=ROW(INDIRECT("1:3"))', [[1.0], [2.0], [3.0]], _OF + "ROW: of a range, each row"),
        ("=SUMPRODUCT(ROUND(List!E2:E4*1.005,1))", 6.2 + 6.4 + 68.3, _LIFT + "; by hand 6.231, 6.432, 68.34"),
        (
            "=_xlfn.AGGREGATE(14,6,List!G2:G13/List!H2:H13,1)",
            96 / 14.25,
            _MS + "AGGREGATE: 6 leaves errors out; by hand",
        ),
        ('=_xlfn.AGGREGATE(15,6,List!G2:G13/(List!B2:B13="Intake"),1)', 388.5, _MS + "AGGREGATE; by hand"),
        ("=FREQUENCY({1,2,3,4,5},{2,4})", [[2.0], [2.0], [1.0]], _OF + "FREQUENCY"),
        ('=TEXT(TRUE,"0")', "TRUE", _MS + "TEXT: a logical is left as it is; common practice"),
    )
)
