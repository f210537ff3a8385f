"""What is fuzzed, and what must hold whatever comes in: a function of bytes each, silent or AssertionError.

Only LowpointError may come out of the code under test. The input file keeps its bytes. What a sheet's bytes become
is judged by another reader (xml.etree), which knows nothing of our scan.
"""

from __future__ import annotations

import contextlib
import io
import itertools
import re
import tempfile
import zipfile
from collections.abc import Callable, Iterator, Mapping, Sequence
from pathlib import Path
from typing import Any
from xml.etree import ElementTree
from xml.sax.saxutils import escape

from book.makers import MAIN, parts, sheet_xml
from fuzz.fragments import FORMULA, LIST, SHEET, expanded
from lowpoint.book.formulas import Call, Unreadable, calls_in, tokenise
from lowpoint.book.guard_limits import Limits, limiting
from lowpoint.book.package import Package
from lowpoint.book.parts import prolog_verdict
from lowpoint.book.patch import patch_sheet
from lowpoint.book.recalc import recalculate
from lowpoint.book.sheet import SheetPart
from lowpoint.cells import CellError
from lowpoint.errors import LowpointError

__all__ = ["TARGETS", "Target"]

Target = Callable[[bytes], None]
PAGE_LIMITS = Limits(cells=20_000, seconds=5.0)
RESULTS = (1.5, "a<b & 'c'\"\r\n ", True, CellError.NA, -0.25, "", 1e300, False, " _x000A_", 3.0)
SHEET_1 = "xl/worksheets/sheet1.xml"
_OUR = f"{{{MAIN}}}"


# --- the writer of sheets ---------------------------------------------------------------------------------------


def sheet(data: bytes) -> None:
    """A sheet part is scanned, every formula cell gets a result, and nothing else of its XML changes."""
    text = expanded(data, SHEET)
    if not text.startswith("<?xml") and "<worksheet" not in text[:200]:
        text = f'<worksheet xmlns="{MAIN}" xmlns:x="urn:x"><sheetData>{text}</sheetData></worksheet>'
    sheet_bytes(text.encode("utf-8", "replace"))


def sheet_bytes(raw: bytes) -> None:
    """The same of bytes as they are."""
    if prolog_verdict(raw, complete=True) != "":
        return  # the door does not let it in
    try:
        part = SheetPart("List", SHEET_1, raw, "book.xlsx", PAGE_LIMITS)
        assert len(list(part.every_cell())) >= len(set(part.starts))
        assert isinstance(part.row_spans, dict)
    except LowpointError:
        return
    pool = itertools.cycle(RESULTS)
    given = {group: [next(pool) for _ in group.rows] for group in part.distinct if not group.reason}
    patched = patch_sheet(part, given, lambda group: True, set(), (), ["a", "b"])
    if patched.data is not None and _has_known_names(raw):
        _only_values_differ(raw, patched.data)
        _values_arrived(part, given, patched.data)
        assert len(patched.changed) <= len(part.rows)


def _has_known_names(raw: bytes) -> bool:
    """Whether a reader that knows namespaces takes it: names of unknown ones are not ours to judge, and are kept."""
    try:
        ElementTree.fromstring(raw)
    except ElementTree.ParseError:
        return False
    return True


def _values_arrived(part: SheetPart, given: Mapping[Any, Sequence[Any]], after: bytes) -> None:
    """Every formula cell holds its result, as another reader sees it."""
    coming = {group: iter(values) for group, values in given.items()}
    wanted = [next(coming[group]) if group in coming else None for group in part.groups]
    data = next((item for item in ElementTree.fromstring(after) if item.tag.endswith("}sheetData")), None)
    cells = [c for row in data or () for c in row if any(child.tag.endswith("}f") for child in c)]
    formulas = [item for item in data.iter() if item.tag.endswith("}f")] if data is not None else []
    if not len(cells) == len(wanted) == len(formulas) or any(len(item) for item in formulas):
        return  # an element f that holds no formula, or stands elsewhere, is no formula cell for us
    for cell, value in zip(cells, wanted, strict=True):
        if value is not None:
            text = next((child.text or "" for child in cell if child.tag.endswith("}v")), "")
            assert _as_stored(value) in ((cell.get("t", "n"), text), (cell.get("t", "n"), text.strip()))


def _as_stored(value: Any) -> tuple[str, str]:
    if isinstance(value, CellError):
        return "e", value.value
    if isinstance(value, bool):
        return "b", str(int(value))
    if isinstance(value, float):
        return "n", repr(value).removesuffix(".0")
    return "str", _escaped(value)


def _escaped(text: str) -> str:
    """A text as the format holds it: a carriage return and what looks like an escape are escaped."""
    return text.replace("_x000A_", "_x005F_x000A_").replace("\r", "_x000D_")


def _only_values_differ(before: bytes, after: bytes) -> None:
    old, new = ElementTree.fromstring(before), ElementTree.fromstring(after)
    for one, two in itertools.zip_longest(_walk(old, False), _walk(new, False)):
        assert one == two, f"{one} became {two}"


def _walk(item: ElementTree.Element, inside: bool) -> Iterator[tuple[Any, ...]]:
    """Every element with what it holds, but for the type and the value of a formula cell in the sheet's data."""
    cell = inside and any(child.tag.rpartition("}")[2] == "f" for child in item) and item.tag.rpartition("}")[2] == "c"
    attributes = {k: v for k, v in item.attrib.items() if not (cell and k in ("t", "vm"))}
    children = [c for c in item if not (cell and c.tag.rpartition("}")[2] in ("v", "is"))]
    # What text there is between elements, which only a cell's value may shift; blanks may go with it.
    between = "".join((item.text or "", *(child.tail or "" for child in item)))
    yield item.tag, attributes, between.strip() if cell else between
    for child in children:
        yield from _walk(child, inside or child.tag.rpartition("}")[2] == "sheetData")


# --- formulas ---------------------------------------------------------------------------------------------------


def formula(data: bytes) -> None:
    """Formula text is cut into tokens that give it back, and into calls that nest; or it is refused as a whole."""
    text = expanded(data, FORMULA)
    for row in (None, 7):
        with contextlib.suppress(Unreadable):
            tokens = tokenise(text, row)
            if not re.search(r"[ \t\r\n]\(", text):  # a blank before the bracket of a call of ours is taken away
                assert "".join(token.text for token in tokens) == text
            _check_calls(calls_in(tokens), len(tokens))


def _check_calls(calls: Sequence[Call], most: int) -> None:
    """Every call ends behind its begin, within the tokens, and within the call around it."""
    for call in calls:
        assert 0 <= call.start < call.stop <= most
        assert call.parent is None or calls[call.parent].stop > call.stop


def book(data: bytes) -> None:
    """A book with this formula in a column is recomputed, or its cells are kept; no other part changes."""
    text = escape(_xml_text(expanded(data, FORMULA)))
    rows = "".join(
        f'<row r="{row}"><c r="A{row}"><v>{row}.5</v></c><c r="B{row}"><f>LP_MARGIN(A{row},1)</f><v>1</v></c>'
        f'<c r="C{row}"><f>{text}</f><v>7</v></c></row>' for row in (1, 2, 3)
    )  # fmt: skip
    _recalculated({**parts(), SHEET_1: sheet_xml(rows)})


def _xml_text(text: str) -> str:
    return "".join(char for char in text if char in "\t\n" or (char >= " " and not "\ud800" <= char <= "\udfff"))


def _recalculated(members: dict[str, bytes]) -> None:
    with tempfile.TemporaryDirectory(dir=_fast()) as folder:
        path, out = Path(folder, "list.xlsx"), Path(folder, "out.xlsx")
        with zipfile.ZipFile(path, "w") as package:
            for name, content in members.items():
                package.writestr(name, content)
        before = path.read_bytes()
        try:
            recalculate(path, out, limits=PAGE_LIMITS)
        except LowpointError:
            assert not out.exists()
        else:
            _same_but_sheet(members, out)
        assert path.read_bytes() == before
        assert {p.name for p in path.parent.iterdir()} <= {"list.xlsx", "out.xlsx"}


def _same_but_sheet(members: dict[str, bytes], out: Path) -> None:
    with zipfile.ZipFile(out) as package:
        assert package.namelist() == list(members)
        for name, content in members.items():
            if name != SHEET_1:
                assert package.read(name) == content


def _fast() -> str | None:
    """A folder in memory, where there is one."""
    return "/dev/shm" if Path("/dev/shm").is_dir() else None


# --- packages ---------------------------------------------------------------------------------------------------


def package(data: bytes) -> None:
    """Any bytes as a workbook: opened and written anew, or refused."""
    try:
        opened = Package(data, "list.xlsx", PAGE_LIMITS)
        for one in opened.sheets:
            opened.tables(one)
        assert opened.defined_names is not None
        assert opened.external_links is not None
        assert opened.packed({}) == data
    except LowpointError:
        return


def mended(data: bytes) -> None:
    """A workbook's parts with bytes changed, in a sound container: the first byte says which part is replaced."""
    if not data:
        return
    members = parts()
    name = sorted(members)[data[0] % len(members)]
    content = expanded(data[1:], SHEET).encode("utf-8", "replace") if data[0] >= 128 else data[1:]
    members[name] = content
    sink = io.BytesIO()
    with zipfile.ZipFile(sink, "w") as archive:
        for part, inside in members.items():
            archive.writestr(part, inside)
    package(sink.getvalue())


# --- lists ------------------------------------------------------------------------------------------------------


def text_list(data: bytes) -> None:
    """Bytes as a text file: read and judged as a list, or refused; the file keeps its bytes."""
    _listed(".csv", expanded(data, LIST).encode("utf-8", "surrogatepass"))


def raw_list(data: bytes) -> None:
    """The same of bytes as they are, in whatever encoding."""
    _listed(".csv", data)


def open_list(data: bytes) -> None:
    """The content of an OpenDocument spreadsheet."""
    sink = io.BytesIO()
    with zipfile.ZipFile(sink, "w") as archive:
        archive.writestr("mimetype", "application/vnd.oasis.opendocument.spreadsheet")
        archive.writestr("content.xml", data)
    _listed(".ods", sink.getvalue())


def saved(data: bytes) -> None:
    """JSON, as ``compare`` reads it."""
    from lowpoint.survey.sides import read_side

    _with_file(".json", data, read_side)


def grid(data: bytes) -> None:
    """A sheet of typed cells as a list: no cell may break the reading or the judging of the others."""
    import numpy as np

    from lowpoint.survey.grids import Grid, Sheets
    from lowpoint.survey.reading import read_sheets
    from lowpoint.survey.surveying import surveyed

    rows = [[_typed(cell) for cell in line.split("\t")] for line in expanded(data, LIST).split("\n")]
    sheets = Sheets("xlsx", (Grid("List", list(enumerate(rows, 1))),))

    def judge(path: Path) -> None:
        cases, reading = read_sheets(sheets, path)
        with np.errstate(all="ignore"):
            surveyed(cases, reading)

    _with_file(".xlsx", b"", judge)


def _typed(cell: str) -> Any:
    if cell.startswith("#"):
        return {"#t": True, "#f": False}.get(cell, cell)
    try:
        return float(cell)
    except ValueError:
        return cell or None


def _listed(ending: str, content: bytes) -> None:
    from lowpoint.survey.surveying import survey_list

    _with_file(ending, content, survey_list)


def _with_file(ending: str, content: bytes, use: Callable[[Path], object]) -> None:
    with tempfile.TemporaryDirectory(dir=_fast()) as folder, limiting(PAGE_LIMITS):
        path = Path(folder, "list" + ending)
        path.write_bytes(content)
        said = "."
        try:
            use(path)
        except LowpointError as refused:
            said = str(refused).rstrip()
        assert said.endswith((".", "!", "?"))
        assert path.read_bytes() == content


TARGETS: dict[str, Target] = {
    "sheet": sheet, "formula": formula, "book": book, "package": package, "mended": mended, "text_list": text_list,
    "raw_list": raw_list, "open_list": open_list, "saved": saved, "grid": grid,
}  # fmt: skip
