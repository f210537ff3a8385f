"""Only what a calculation may change is changed: cached values of formula cells; every other byte stays."""

from __future__ import annotations

import zipfile
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from book.lists import Done, bare, both, cells_xml, expected, formula, number
from book.makers import MAIN, REL, XLSX, pack, parts
from lowpoint.book.package import Package
from lowpoint.book.stored import number_elements, number_text
from lowpoint.problems import CellError

INPUTS = {"A1": number(10.0), "B1": number(4.0), "C1": number(0.03)}
SIGMA = "LP_SIGMA(A1,B1,C1)"
VALUE = expected("LP_SIGMA", 10.0, 4.0, 0.03)
SHOWN = repr(VALUE).encode()
SHEET = "xl/worksheets/sheet1.xml"


def _others(path: Path, *changed: str) -> dict[str, bytes]:
    with zipfile.ZipFile(path) as package:
        return {name: package.read(name) for name in package.namelist() if name not in changed}


def _cell(path: Path, cell: str, **more: Any) -> tuple[Done, bytes]:
    """Recalculate a sheet with this one cell of XML in row 2; the cell's bytes afterwards."""
    row = f'<row r="2">{cell}</row>'
    sheet = f'<worksheet xmlns="{MAIN}"><sheetData>{cells_xml(INPUTS)}{row}</sheetData></worksheet>'
    done = both(pack(path, {**parts(), SHEET: sheet.encode(), **more}))
    part = done.part(SHEET)
    assert part.startswith(f'<worksheet xmlns="{MAIN}"><sheetData>{cells_xml(INPUTS)}<row r="2">'.encode())
    assert part.endswith(b"</row></sheetData></worksheet>")
    return done, part.partition(b'<row r="2">')[2].partition(b"</row>")[0]


F = f"<f>{SIGMA}</f>"


@pytest.mark.parametrize(
    "before, after",
    [
        (f'<c r="A2">{F}<v>1</v></c>', f'<c r="A2">{F}<v>%s</v></c>'), (f'<c r="A2">{F}</c>',
         f'<c r="A2">{F}<v>%s</v></c>'),
        (f'<c r="A2">{F}<v/></c>', f'<c r="A2">{F}<v>%s</v></c>'), (f'<c r="A2">{F}<v></v></c>',
         f'<c r="A2">{F}<v>%s</v></c>'),
        (f'<c r="A2" s="0" t="str">{F}<v>old</v></c>', f'<c r="A2" s="0">{F}<v>%s</v></c>'),
        (f'<c t="e" r="A2"  s="0" >{F}<v>#N/A</v></c>', f'<c r="A2"  s="0" >{F}<v>%s</v></c>'),
        (f'<c r="A2" t="b">{F}<v>1</v></c>', f'<c r="A2">{F}<v>%s</v></c>'),
        (f"<c r='A2' t='n'>{F}<v>1</v></c>", f"<c r='A2'>{F}<v>%s</v></c>"),
        (f'<c r="A2" vm="1" t="e">{F}<v>#VALUE!</v></c>', f'<c r="A2">{F}<v>%s</v></c>'),
        (f'<c r="A2" cm="1"><f t="array" ref="A2">{SIGMA}</f><v>1</v></c>',
         f'<c r="A2" cm="1"><f t="array" ref="A2">{SIGMA}</f><v>%s</v></c>'),
        (f'<c r="A2">\n  {F}\n  <v>1</v>\n</c>', f'<c r="A2">\n  {F}\n  <v>%s</v>\n</c>'),
        (f'<c r="A2"><f ca="1">{SIGMA}</f><v>1</v></c >', f'<c r="A2"><f ca="1">{SIGMA}</f><v>%s</v></c >'),
        (f'<c r="A2">{F}<v>1</v><extLst><ext uri="x"/></extLst></c>',
         f'<c r="A2">{F}<v>%s</v><extLst><ext uri="x"/></extLst></c>'),
        (f'<c r="A2" t="inlineStr">{F}<is><t>old</t></is></c>', f'<c r="A2">{F}<v>%s</v></c>'),
        (f'<c r="A2"><!-- {F} -->{F}<!-- <v>5</v> --><v>1</v></c>',
         f'<c r="A2"><!-- {F} -->{F}<!-- <v>5</v> --><v>%s</v></c>'),
        (f'<c>{F}<v>1</v></c>', f'<c>{F}<v>%s</v></c>'),
        (f'<c r="A2" x:y="&gt;" xmlns:x="u">{F}<v xml:space="preserve">1</v></c>',
         f'<c r="A2" x:y="&gt;" xmlns:x="u">{F}<v>%s</v></c>'),
    ],
)  # fmt: skip
def test_value_and_type_of_a_cell_change_and_nothing_else(tmp_path: Path, before: str, after: str) -> None:
    done, cell = _cell(tmp_path / "list.xlsx", before)
    assert cell == after.encode() % SHOWN
    assert done["Intake!A2"] == VALUE


@pytest.mark.parametrize(
    "text, attributes, value",
    [
        ('"a"&amp;B1', b' t="str"', b"<v>a4</v>"), ("A1&gt;B1", b' t="b"', b"<v>1</v>"), ("1/0", b' t="e"',
         b"<v>#DIV/0!</v>"),
        ("LP_SIGMA(B1,A1,C1)", b' t="e"', b"<v>#NUM!</v>"), ("A1*1E15", b"", b"<v>1e+16</v>"), ("A1-10", b"",
         b"<v>0</v>"),
        ('"&lt;"&amp;A1&amp;"&amp;"', b' t="str"', b"<v>&lt;10&amp;</v>"),
        ('" x "', b' t="str"', b'<v xml:space="preserve"> x </v>'), ('""', b' t="str"', b"<v></v>"),
        ("CHAR(7)&amp;1", b' t="str"', b"<v>_x0007_1</v>"), ('"_x0041_"&amp;1', b' t="str"', b"<v>_x005F_x0041_1</v>"),
        ('"é"&amp;"\u4e2d"', b' t="str"', "<v>é\u4e2d</v>".encode()), ("Z99", b"", b"<v>0</v>"), ("A1*0.1/3", b"",
         b"<v>0.3333333333333333</v>"),
        ('LP_WHY("LP_SIGMA",A1,B1,C1)', b' t="str"', b"<v>ok</v>"),
    ],
)  # fmt: skip
def test_each_kind_of_value_is_written_as_the_format_wants_it(
    tmp_path: Path, text: str, attributes: bytes, value: bytes
) -> None:
    _, cell = _cell(tmp_path / "list.xlsx", f'<c r="A2"><f>{text}</f></c>')
    assert cell == b'<c r="A2"%b><f>%b</f>%b</c>' % (attributes, text.encode(), value)


@pytest.mark.parametrize("tag", ['<c r="A2">', '<c r="A2" s="0">', '<c r="A2" s="0" >', '<c r="A2"\ts="0">', "<c>"])
@pytest.mark.parametrize("old", ["<v>7</v>", "<v>-1E-3</v>", "<v></v>", "<v/>", "<v />", "<v> 7 </v>", "<v >7</v >"])
def test_any_kind_of_value_takes_the_place_of_a_number(tmp_path: Path, tag: str, old: str) -> None:
    kinds = (("A1*0.1/3", b"", b"0.3333333333333333"), ('"a"&amp;B1', b"str", b"a4"), ("A1&gt;B1", b"b", b"1"),
             ("LP_SIGMA(B1,A1,C1)", b"e", b"#NUM!"))  # fmt: skip
    tags = [tag.replace("A2", place) for place in ("A2", "B2", "C2", "D2")]
    cells = "".join(f"{tag}<f>{text}</f>{old}</c>" for tag, (text, _, _) in zip(tags, kinds, strict=True))
    _, row = _cell(tmp_path / "list.xlsx", cells)
    wanted = b""
    for tag, (text, kind, value) in zip(tags, kinds, strict=True):
        head = tag[:-1].rstrip().encode() + b' t="%b">' % kind if kind else tag.encode()
        wanted += b"%b<f>%b</f><v>%b</v></c>" % (head, text.encode(), value)
    assert row == wanted


def test_a_number_in_other_digits_stays_and_one_that_is_no_number_goes(tmp_path: Path) -> None:
    cells = "<c><f>A1*2</f><v>2.0E1</v></c><c><f>A1*2</f><v> 20 </v></c><c><f>A1*2</f><v>much</v></c>"
    done, row = _cell(tmp_path / "list.xlsx", cells)
    assert row == cells.replace("much", "20").encode()
    assert [change.old for change in done.report.unfed] == ["much"]


@given(st.lists(st.floats(allow_nan=False, allow_infinity=False)), st.sampled_from([b"", b"x:"]))
def test_numbers_written_at_once_are_those_written_one_by_one(numbers: list[float], prefix: bytes) -> None:
    elements = number_elements(prefix, numbers)
    assert elements[: len(numbers)] == [b"<%bv>%b</%bv>" % (prefix, number_text(x), prefix) for x in numbers]
    texts = [element.partition(b">")[2].partition(b"<")[0] for element in elements[: len(numbers)]]
    assert [float(text) for text in texts] == numbers


def test_a_right_value_stays_as_it_is_spelled(tmp_path: Path) -> None:
    strings = {
        "xl/sharedStrings.xml": (
            f'<sst xmlns="{MAIN}"><si><t>p1</t></si><si><r><t>a</t></r><r><t>4</t></r></si></sst>'.encode()
        )
    }
    links = parts()["xl/_rels/workbook.xml.rels"].replace(
        b"</Relationships>",
        f'<Relationship Id="s" Type="{REL}/sharedStrings" Target="sharedStrings.xml"/></Relationships>'.encode(),
    )
    types = parts()["[Content_Types].xml"].replace(
        b"</Types>",
        f'<Override PartName="/xl/sharedStrings.xml" ContentType="{XLSX}.sharedStrings+xml"/></Types>'.encode(),
    )
    strings |= {"xl/_rels/workbook.xml.rels": links, "[Content_Types].xml": types}
    cells = (
        '<c r="A2" t="s"><f>"a"&amp;B1</f><v>1</v></c><c r="B2"><f>A1*2</f><v>2.0E1</v></c>'
        '<c r="C2" t="b"><f>A1&gt;1</f><v>1</v></c><c r="D2" t="n"><f>A1+B1</f><v>14.0</v></c>'
    )
    done, row = _cell(tmp_path / "list.xlsx", cells, **strings)
    assert row == cells.encode()
    assert done.report.untouched == 4
    assert done.path.read_bytes() == (tmp_path / "list.xlsx").read_bytes()
    wrong, row = _cell(tmp_path / "wrong.xlsx", '<c r="A2" t="s"><f>"a"&amp;B1</f><v>0</v></c>', **strings)
    assert row == b'<c r="A2" t="str"><f>"a"&amp;B1</f><v>a4</v></c>'
    assert wrong.report.unfed[0].old == "p1"
    assert wrong.part("xl/sharedStrings.xml") == strings["xl/sharedStrings.xml"]


def test_namespace_prefixes_comments_and_instructions(tmp_path: Path) -> None:
    cells = "".join(f'<x:c r="{place}">{inside.replace("v>", "x:v>")}</x:c>' for place, inside in INPUTS.items())
    text = (
        f'<?xml version="1.0" standalone="yes"?>\n<?note <c r="A9"><f>1</f></c> ?>'
        f'<x:worksheet xmlns:x="{MAIN}" a="&gt;">'
        f'<!-- <sheetData><c r="A1"><f>{SIGMA}</f></c> --><x:sheetData><x:row r="1">{cells}</x:row><x:row r="2">'
        f'<x:c r="A2"><x:f>{SIGMA}</x:f><x:v>1</x:v></x:c>'
        f'<x:c r="B2" t="e"><x:f t="array" ref="B2:B3">LP_MARGIN({{2;3}},A2)</x:f>'
        f"<x:v>#N/A</x:v></x:c></x:row></x:sheetData><!-- end --></x:worksheet>\n<!-- after -->"
    )
    done = both(pack(tmp_path / "list.xlsx", {**parts(), SHEET: text.encode()}))
    margins = [expected("LP_MARGIN", sigma, VALUE) for sigma in (2.0, 3.0)]
    wanted = text.replace("<x:v>1</x:v>", f"<x:v>{VALUE!r}</x:v>").replace('<x:c r="B2" t="e">', '<x:c r="B2">')
    wanted = wanted.replace(
        "<x:v>#N/A</x:v></x:c></x:row>",
        f'<x:v>{margins[0]!r}</x:v></x:c></x:row><x:row r="3"><x:c r="B3"><x:v>{margins[1]!r}</x:v></x:c></x:row>',
    )
    assert done.part(SHEET).decode() == wanted


@pytest.mark.parametrize("codec", ["utf-8-sig", "utf-16", "iso-8859-1"])
def test_other_encodings_come_back_in_their_own(tmp_path: Path, codec: str) -> None:
    name = codec.removesuffix("-sig")
    text = (
        f'<?xml version="1.0" encoding="{name.upper()}"?><worksheet xmlns="{MAIN}"><sheetData>{cells_xml(INPUTS)}'
        f'<row r="2"><c r="A2" t="str"><f>"é"&amp;LP_REGIME(3,2)</f><v>é</v></c></row></sheetData></worksheet>'
    )
    done = both(pack(tmp_path / "list.xlsx", {**parts(), SHEET: text.encode(codec)}))
    assert done.part(SHEET) == text.replace("<v>é</v>", "<v>éclear</v>").encode(codec)


def test_strict_workbooks_are_recalculated_in_their_own_namespaces(tmp_path: Path) -> None:
    strict = {
        "http://schemas.openxmlformats.org/spreadsheetml/2006/main": "http://purl.oclc.org/ooxml/spreadsheetml/main",
        "http://schemas.openxmlformats.org/officeDocument/2006/relationships": "http://purl.oclc.org/ooxml/officeDocument/relationships",
    }
    members = {**parts(), SHEET: bare_sheet()}
    for name, content in members.items():
        if name != "[Content_Types].xml":
            for loose, tight in strict.items():
                content = content.replace(loose.encode(), tight.encode())
            members[name] = content
    report = recalculated_report(pack(tmp_path / "strict.xlsx", members), tmp_path / "out.xlsx")
    assert report.kept == []
    part = Package.open(tmp_path / "out.xlsx").read(SHEET)
    assert SHOWN in part
    assert part == members[SHEET].replace(b"<v>1</v>", b"<v>%b</v>" % SHOWN)
    assert _others(tmp_path / "out.xlsx", SHEET) == _others(tmp_path / "strict.xlsx", SHEET)


def bare_sheet() -> bytes:
    """A sheet with one call."""
    inside = cells_xml(INPUTS | {"E1": formula(SIGMA, "1")})
    return f'<worksheet xmlns="{MAIN}"><sheetData>{inside}</sheetData></worksheet>'.encode()


def recalculated_report(path: Path, out: Path) -> Any:
    """The report alone: openpyxl does not read every book that we do."""
    from lowpoint.book.recalc import recalculate

    return recalculate(path, out)


@pytest.mark.parametrize(
    "suffix, kind", [("xlsm", "sheet.macroEnabled"), ("xltm", "template.macroEnabled"), ("xltx", "template")]
)
def test_macros_templates_and_unknown_parts_stay(tmp_path: Path, suffix: str, kind: str) -> None:
    main = f"application/vnd.ms-excel.{kind}.main+xml" if "macro" in kind else f"{XLSX}.{kind}.main+xml"
    extra = {
        "xl/vbaProject.bin": bytes(range(256)) * 9,
        "xl/calcChain.xml": b"<calcChain/>",
        "custom/odd.bin": b"\0\1\2",
        "docProps/app.xml": b"<a/>",
    }
    source = bare(tmp_path / f"list.{suffix}", INPUTS | {"E1": formula(SIGMA, "1")}, parts=extra, main_type=main)
    before = source.read_bytes()
    report = recalculated_report(source, tmp_path / f"out.{suffix}")
    assert report.parts == [SHEET]
    assert _others(tmp_path / f"out.{suffix}", SHEET) == _others(source, SHEET)
    assert source.read_bytes() == before


def test_errors_of_the_format_are_read_back(tmp_path: Path) -> None:
    done, _ = _cell(tmp_path / "list.xlsx", '<c r="A2" t="e"><v>#N/A</v></c><c r="B2"><f>LP_SIGMA(A2,B1,C1)</f></c>')
    assert done["Intake!B2"] is CellError.NA
