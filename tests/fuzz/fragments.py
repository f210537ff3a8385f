"""Bytes as fragments: a coverage-guided fuzzer then mutates whole tags, references and headings, not letters only.

A byte below 128 stands for itself, one above for a fragment of the target's table; so a seed that is plain text means
what it says.
"""

from __future__ import annotations

from collections.abc import Sequence

__all__ = ["FORMULA", "LIST", "SHEET", "expanded"]

SHEET = (
    '<c r="A1">', '<c r="B2" t="str">', '<c r="C3" t="e">', '<c r="A2" t="s">', '<c r="A3" cm="1">', "<c>", "</c>",
    '<c r="D4" t="inlineStr">', "<c r='E5' s='1'>", '<c r = "F1" t = "str">', '<c r="A1048576" vm="1">', '<c r="A1"/>',
    "<f>", "</f>", "<f/>", '<f t="shared" si="0"/>', '<f t="shared" ref="A1:A9" si="0">', '<f t="array" ref="A1:B2">',
    '<f t="dataTable" ref="A1" dt2D="1" r1="A1"/>', "<f ca='1'>", '<f t="array" ref="A3">', "<v>", "</v>", "<v/>",
    "<v>5</v>", "<is><t>", "</t></is>", '<row r="1">', '<row r="2" spans="1:3">', "<row>", "</row>", '<row r="7"/>',
    "<!--", "-->", "<![CDATA[", "]]>", "<?x", "?>", "<extLst><ext>", "</ext></extLst>", "&lt;", "&amp;", "&#65;",
    "&quot;", '<x:c r="A1">', "</x:c>", "<x:f>", "</x:f>", "<x:v>", "</x:v>", ' xmlns:x="urn:x"', ' t="b"', ' t="n"',
    ' vm="3"', " cm='1'", ' xml:space="preserve"', "<a><b>", "</b></a>", "</sheetData>", "<sheetData>", "<sheetData/>",
    "</worksheet>", "A1+1", "LP_SIGMA(A1,B1,C1)", "_xll.LP_FF(0.03,220)", "SUM($A$1:A1)", "1048577", "\n", "\t",
    " r='B1'", ' r="C9"', "<c ", "<f ", "/>", '="', "='", "<v xml:space='preserve'> ", "<vv>", "</vv>", "<cc/>",
)  # fmt: skip

FORMULA = (
    "LP_SIGMA(", "lp.margin(", "_xll.LP_FF(", "[1]!LP_SIGMA(", "_xlfn.LET(", "_xlpm.x", "_xlfn.SINGLE(", "SUM(", "IF(",
    "IFERROR(", "INDEX(", "OFFSET(", "INDIRECT(", "CHOOSE(", "_xlfn.IFS(", "_xlfn.SWITCH(", "_xlfn._xlws.FILTER(",
    "_xlfn.LAMBDA(", "LP_AT_TRAVEL(", "LP_WHY(", "ORG.LOWPOINT.FUNCTIONS.SIGMA(", "A1", "$B$2", "C$3", "A1:C9", "A:A",
    "1:1", "$A1048576", "XFD1", "XFE1", "'Feed water'!A1", "'it''s'!B2", "List!A1", "[2]Other!A1", "List:Other!A1",
    "Table1[Flow]", "Table1[[#This Row],[p1]]", "[@Flow]", "{1,2;3,4}", '{"a",TRUE}', '"text"', '""', '"', "'", "(",
    ")", ",", ";", " ", "\n", "+", "-", "*", "/", "^", "&", "=", "<>", "<=", ">", "%", "@", "#", ":", "!", "#N/A",
    "#DIV/0!", "#REF!", "A1#", "TRUE", "FALSE", "1.5", "1E+300", "1e-400", "007", ".5", "Name", "_n.a?me", "\\x",
    "\x01", "é", "\U0001f600", "ROW()", "COLUMN()", "RAND()", "WEBSERVICE(", "HYPERLINK(", "cmd|' /c x'!A1", "MMULT(",
    "SEQUENCE(99999,99)", "REPT(\"a\",32767)", "ROW(A1:A1048576)",
)  # fmt: skip

LIST = (
    "Tag", "Case", "Liquid", "Temperature [deg C]", "Flow [m3/h]", "p1 [bar a]", "p2 [bar g]", "p1 [psi]", "p2", "pv",
    "pc", "Density", "DN", "Valve size [mm]", "FL", "Incipient", "Constant", "Damage", "Kvs", "Style", "Outlet into",
    "Bore [mm]", "Bores [mm]", "Inlet pipe bore", "Salinity [g/kg]", "Site elevation [m]", "Travel [%]", "Table",
    "Kind", "Limits basis", "Test size [mm]", "Test head [bar]", "Size exponent", "Characteristic", "Rangeability",
    "Limit to keep", "FL basis", "21-FCV-110", "water", "sea water", "normal", "5.8", "4.2", "80", "0.9", "2.1", "1,42",
    "1.234,5", "1 000", "-3", "0", "1e308", "1e-320", "nan", "inf", "=1+1", "@x", "+1", "estimate", "valve", "orifice",
    "plates", "tank", "50%", "n/a", "?", '"', "'", ",", ";", "\t", "|", "\n", "\r\n", "sep=;\n", "\ufeff", " ", "[",
    "]", "20 deg C", "Equal percentage", "globe", "100/80/60", "Tolerances", "p1 ± 1 %", "\ud800", "\x00", "é",
)  # fmt: skip


def expanded(data: bytes, table: Sequence[str]) -> str:
    """The text that bytes stand for."""
    return "".join(chr(byte) if byte < 128 else table[(byte - 128) % len(table)] for byte in data)
