"""The workbook as the engine is given it: only sheets of cells, every formula in a form the engine reads aright.

Built from the original bytes, so that values need no reading here; styles are left out, so that a date is a number.
"""

from __future__ import annotations

import io
import re
import zipfile
from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from html import escape

from lowpoint.cells import CellError

from .curing import instance
from .foreign import LOADABLE, Foreign
from .package import Package
from .plan import Entry, Plan
from .refs import column_letters
from .sheet import Group, SheetPart
from .sites import formula_of, text_of
from .stored import with_value

__all__ = ["engine_bytes"]

_MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_LINKS = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
_PACKAGE = "http://schemas.openxmlformats.org/package/2006"
_STRINGS = "xl/sharedStrings.xml"
_OPENING = re.compile(rb"<(?:[\w.-]+:)?worksheet\b[^>]*>")


def engine_bytes(
    package: Package, sheets: Sequence[SheetPart], plan: Plan, foreign: Mapping[str, Sequence[Foreign]]
) -> bytes:
    """A package for the engine's load: the sheets' cells, the shared strings, the scratch sheets.

    ``foreign`` cells, by sheet, are given in a form that it can load; errors among them as #VALUE!.
    """
    entries = {entry.group: entry for entry in plan.entries}
    contents = {sheet.title: _sheet_xml(sheet, entries, plan.uncertain, foreign[sheet.title]) for sheet in sheets}
    for title, computed in plan.scratch.items():
        columns = [(entry.group.rows, slot.slot.column, text_of(slot.pieces)) for entry, slot in computed]
        contents[title] = _scratch_xml(columns)
    strings = next((r.target for r in package.relations(package.main) if r.kind == "sharedStrings"), "")
    return _packed(contents, package.read(strings) if strings in package else b"", package.date1904)


def _sheet_xml(sheet: SheetPart, entries: Mapping[Group, Entry], spilling: bool, foreign: Sequence[Foreign]) -> bytes:
    """The sheet's root and cells; formulas that the engine reads as they are keep their bytes.

    Where results may spill, a call that was taken out leaves a number in its cell: it is in the way of others.
    """
    texts = {g: _cell_text(entries.get(g)) for g in sheet.distinct}
    edits = []
    for i, group in enumerate(sheet.groups):
        text = texts[group]
        if text is None:
            continue
        start, end, row = sheet.starts[i], sheet.ends[i], sheet.rows[i]
        if group not in entries:
            edits.append((start, end, _poisoned(sheet, row, sheet.columns[i])))
        elif not text:
            edits.append((start, end, _held(sheet, row, sheet.columns[i]) if spilling else b""))
        else:
            edits.append((start, end, _cell(sheet.prefix, row, sheet.columns[i], instance(text, row))))
    edits += _cleared(sheet, entries)
    if foreign:
        done = {start for start, _, _ in edits}
        edits += [(cell.start, cell.end, _loadable(sheet, cell)) for cell in foreign if cell.start not in done]
    edits.sort()
    return _edited(sheet, edits)


def _cell_text(entry: Entry | None) -> list[str | int] | None:
    """Escaped text of the engine's formula; None to leave the stored bytes, empty for no formula."""
    if entry is None or entry.own is not None:
        return []
    pieces = formula_of(entry.work)
    if pieces is None:
        return None
    return [escape(p, quote=False) if isinstance(p, str) else p for p in text_of(pieces)]


def _cell(prefix: bytes, row: int, column: int, formula: str) -> bytes:
    p = prefix.decode()
    return f'<{p}c r="{column_letters(column)}{row}"><{p}f>{formula}</{p}f></{p}c>'.encode()


def _held(sheet: SheetPart, row: int, column: int) -> bytes:
    p = sheet.prefix.decode()
    return f'<{p}c r="{column_letters(column)}{row}"><{p}v>0</{p}v></{p}c>'.encode()


def _poisoned(sheet: SheetPart, row: int, column: int) -> bytes:
    """A cell that keeps its old value: an error here, so that whatever reads it, by any way, cannot pass for fresh."""
    p = sheet.prefix.decode()
    return f'<{p}c r="{column_letters(column)}{row}" t="e"><{p}v>#NAME?</{p}v></{p}c>'.encode()


def _loadable(sheet: SheetPart, cell: Foreign) -> bytes:
    """A formula's old value is not asked for: any will do, for it is worked out anew."""
    value = cell.value if isinstance(cell.value, float) or cell.value in LOADABLE else CellError.VALUE
    return with_value(sheet.scanned[cell.start : cell.end], sheet.prefix, value)


def _cleared(sheet: SheetPart, entries: Mapping[Group, Entry]) -> list[tuple[int, int, bytes]]:
    """The stored results inside arrays, taken out: the engine would take them for data in the way."""
    areas = [g.area for g in sheet.distinct if g.area is not None and g in entries]
    if not areas:
        return []
    formulas = set(sheet.starts)
    edits = []
    for (row, column), start, end in sheet.every_cell():
        if start not in formulas and any(a.r1 <= row <= a.r2 and a.c1 <= column <= a.c2 for a in areas):
            edits.append((start, end, b""))
    return edits


def _edited(sheet: SheetPart, edits: Iterable[tuple[int, int, bytes]]) -> bytes:
    root = _OPENING.search(sheet.scanned)
    opening = root[0].removesuffix(b"/>") if root else b"<worksheet>"
    begin, stop = sheet.body
    tag = sheet.prefix + b"sheetData"
    out = [opening if opening.endswith(b">") else opening + b">", b"<%b>" % tag]
    for start, end, new in edits:
        out += (sheet.scanned[begin:start], new)
        begin = end
    out += (sheet.scanned[begin:stop], b"</%b></%bworksheet>" % (tag, sheet.prefix))
    return b"".join(out)


def _scratch_xml(columns: Iterable[tuple[Sequence[int], int, list[str | int]]]) -> bytes:
    cells: dict[int, list[tuple[int, str]]] = defaultdict(list)
    for rows, column, text in columns:
        parts = [escape(p, quote=False) if isinstance(p, str) else p for p in text]
        for row in rows:
            cells[row].append((column, instance(parts, row)))
    lines = [f'<worksheet xmlns="{_MAIN}"><sheetData>']
    for row in sorted(cells):
        here = "".join(f'<c r="{column_letters(c)}{row}"><f>{f}</f></c>' for c, f in sorted(cells[row]))
        lines.append(f'<row r="{row}">{here}</row>')
    return "".join([*lines, "</sheetData></worksheet>"]).encode()


def _packed(contents: Mapping[str, bytes], strings: bytes, date1904: bool) -> bytes:
    sheets, links = [], []
    for number, title in enumerate(contents, start=1):
        sheets.append(f'<sheet name="{escape(title)}" sheetId="{number}" r:id="r{number}"/>')
        links.append(_link(f"r{number}", "worksheet", f"worksheets/sheet{number}.xml"))
    if strings:
        links.append(_link("rs", "sharedStrings", "sharedStrings.xml"))
    system = '<workbookPr date1904="1"/>' if date1904 else ""
    book = f'<workbook xmlns="{_MAIN}" xmlns:r="{_LINKS}">{system}<sheets>{"".join(sheets)}</sheets></workbook>'
    sink = io.BytesIO()
    with zipfile.ZipFile(sink, "w") as package:
        package.writestr("[Content_Types].xml", _types())
        package.writestr("_rels/.rels", _relations([_link("r1", "officeDocument", "xl/workbook.xml")]))
        package.writestr("xl/workbook.xml", book)
        package.writestr("xl/_rels/workbook.xml.rels", _relations(links))
        for number, data in enumerate(contents.values(), start=1):
            package.writestr(f"xl/worksheets/sheet{number}.xml", data)
        if strings:
            package.writestr(_STRINGS, strings)
    return sink.getvalue()


def _types() -> str:
    kind = "application/vnd.openxmlformats"
    return (
        f'<Types xmlns="{_PACKAGE}/content-types">'
        f'<Default Extension="rels" ContentType="{kind}-package.relationships+xml"/>'
        '<Default Extension="xml" ContentType="application/xml"/>'
        f'<Override PartName="/xl/workbook.xml" ContentType="{kind}-officedocument.spreadsheetml.sheet.main+xml"/>'
        "</Types>"
    )


def _relations(links: Iterable[str]) -> str:
    return f'<Relationships xmlns="{_PACKAGE}/relationships">{"".join(links)}</Relationships>'


def _link(name: str, kind: str, target: str) -> str:
    return f'<Relationship Id="{name}" Type="{_LINKS}/{kind}" Target="{target}"/>'
