"""A copy of a workbook with plain values where formulas stood, for readers without the functions."""

from __future__ import annotations

import io
import math
import os
import re
import warnings
from collections.abc import Iterator, Mapping
from importlib.util import find_spec
from pathlib import Path
from typing import Any
from zipfile import ZIP_DEFLATED, ZipFile

from lowpoint.book.guard_limits import Limits
from lowpoint.book.package import Package
from lowpoint.book.saving import replace_file
from lowpoint.book.stored import FILE_SPELLING
from lowpoint.errors import BookError
from lowpoint.problems import CellError

__all__ = ["write_values_copy"]

SUFFIXES = (".xlsx", ".xlsm", ".xltx", ".xltm")
TEXT_LIMIT = 32_767  # characters in a cell; source: ISO/IEC 29500-1 leaves it open, common practice

# What openpyxl 3.1 does not carry over, by part name. Found by trial over books from several programs.
_LOST_PARTS: tuple[tuple[str, str], ...] = (
    (r"xl/slicers/", "slicers"),
    (r"xl/timelines/", "timelines"),
    (r"xl/charts/chartEx", "charts of the newer kinds (waterfall, tree map, funnel and the like)"),
    (r"xl/diagrams/", "diagrams"),
    (r"xl/embeddings/", "embedded objects"),
    (r"xl/activeX/|xl/ctrlProps/", "form controls"),
    (r"xl/threadedComments/", "threads of comments (their text stays as notes)"),
    (r"xl/richData/", "pictures and data types inside cells"),
    (r"xl/featurePropertyBag/", "check boxes inside cells (their TRUE and FALSE stay)"),
    (r"xl/(connections\.xml|queryTables/|model/)", "data connections and queries"),
    (r"customXml/", "custom XML data"),
    (r"xl/printerSettings/", "printer settings"),
    (r"_xmlsignatures/", "the digital signature"),
)
_LOST_IN_SHEETS: tuple[tuple[bytes, str], ...] = (
    (rb":sparklineGroup\b", "sparklines"),
    (rb"<x14:conditionalFormatting\b", "conditional formats of the newer kinds"),
    (rb"<x14:dataValidation\b", "data validations that look at other sheets"),
    (rb"<protectedRange\b", "ranges with their own password"),
    (rb"<picture\b", "background pictures"),
    (rb"<legacyDrawingHF\b", "pictures in headers and footers"),
)
_SHAPES = re.compile(rb"<(?:\w+:)?(?:sp|grpSp|cxnSp)[\s>]")
_OURS = re.compile(r"(?<![A-Za-z0-9_])LPU?[_.][A-Za-z]", re.IGNORECASE)
_STARTS_LIKE_A_FORMULA = ("=", "+", "-", "@", "\t", "\r")
_UNWRITABLE = re.compile(r"[\x00-\x08\x0b-\x1f\ufffe\uffff]|_(?=x[0-9A-Fa-f]{4}_)")


def write_values_copy(
    source: Package | str | os.PathLike[str],
    out: str | os.PathLike[str],
    values: Mapping[tuple[str, int, int], Any],
    limits: Limits | None = None,
) -> list[str]:
    """Write a copy of a workbook with plain values for formulas; what the copy lacks comes back in words.

    ``values`` maps (sheet title, row, column), counted from 1, to the cell value of every formula cell and of
    every cell a result spills into; a formula cell not in it keeps the value stored beside its formula.
    Numbers keep all their digits, dates stay the serial numbers they are, errors stay errors (#SPILL! and
    #CALC! as #VALUE!, which is how the file format spells them), and text that begins like a formula is
    marked as text.

    openpyxl carries over: values, styles, widths, frozen panes, merged cells, conditional formats,
    validations, tables, notes, links, print settings, pivot tables, and charts without their finer points. It
    drops, and the returned list names where the book has them: sparklines, slicers, timelines, shapes and
    text boxes, diagrams, controls, embedded objects, newer chart kinds, newer conditional formats, pictures
    (all without the optional Pillow; those in cells, headers and backgrounds always), threads of comments,
    data connections, custom XML, printer settings, signatures, and macros unless
    ``out`` ends in .xlsm or .xltm. The copy of an .xlsm is so a macro-free .xlsx when named so; a name that
    promises macros where there are none is refused.

    The output appears whole or not at all; the source is never touched. BookError when either cannot be
    handled.
    """
    package = source if isinstance(source, Package) else Package.open(source, limits)
    target = Path(out)
    if package.source and os.path.realpath(package.source) == os.path.realpath(target):
        raise BookError(
            str(target), "a copy as values cannot take the workbook's own place", remedy="Name another output."
        )
    macros = _keeps_macros(package, target)
    workbook = _loaded(package, macros)
    lacking = list(_lacking(package, workbook, macros))
    _fill(package, workbook, values)
    _calm(package, workbook)
    workbook.template = target.suffix.lower() in (".xltx", ".xltm")
    data = _saved(package, workbook)
    replace_file(target, lambda sink: sink.write(data))
    return lacking


def _keeps_macros(package: Package, target: Path) -> bool:
    suffix = target.suffix.lower()
    if suffix not in SUFFIXES:
        raise BookError(str(target), f"the name must end in one of {', '.join(SUFFIXES)}", suffix or "no ending")
    macros = suffix in (".xlsm", ".xltm")
    if macros and not package.has_macros:
        plain = suffix.replace("m", "x")
        must = f"the name must not end in {suffix}, because {package.name} holds no macros"
        raise BookError(str(target), must, remedy=f"Let it end in {plain}.")
    return macros


def _loaded(package: Package, macros: bool) -> Any:
    """The openpyxl workbook, with stored values in place of formulas and numbers left as numbers."""
    if package.strict:
        must = "is a strict open XML workbook, which cannot be copied as values"
        raise BookError(package.name, must, remedy="Save it as an ordinary .xlsx workbook first.")
    from openpyxl.reader.excel import ExcelReader

    class Reader(ExcelReader):  # type: ignore[misc, unused-ignore]
        def read_worksheets(self) -> None:
            # A date format would turn a number into a date and back, rounding it, a large one into an error.
            self.wb._date_formats, self.wb._timedelta_formats = set(), set()
            super().read_worksheets()

    packed = io.BytesIO(package.packed({}))
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # it warns of what it drops; our own list says it in full
            reader = Reader(packed, keep_vba=macros, data_only=True, keep_links=True, rich_text=True)
            reader.read()
    except Exception as problem:  # openpyxl raises whatever its parsers meet
        raise _unable(package, "read", problem) from problem
    return reader.wb


def _saved(package: Package, workbook: Any) -> bytes:
    from openpyxl.writer.excel import ExcelWriter

    sink = io.BytesIO()
    try:
        # Both containers are closed here: left to the garbage collector, they would complain of closed files.
        with warnings.catch_warnings(), ZipFile(sink, "w", ZIP_DEFLATED) as archive:
            warnings.simplefilter("ignore")
            ExcelWriter(workbook, archive).save()
    except Exception as problem:  # as above
        raise _unable(package, "written", problem) from problem
    finally:
        if workbook.vba_archive:
            workbook.vba_archive.close()
    return sink.getvalue()


def _unable(package: Package, verb: str, problem: Exception) -> BookError:
    reason = " ".join(str(problem).split()) or type(problem).__name__
    must = f"cannot be copied as values, because openpyxl stops when it is {verb} ({reason[:200]})"
    return BookError(package.name, must, remedy="Recalculate it without --values, or save it anew first.")


def _fill(package: Package, workbook: Any, values: Mapping[tuple[str, int, int], Any]) -> None:
    from openpyxl.cell.cell import MergedCell

    sheets = {sheet.title.casefold(): sheet for sheet in workbook.worksheets}
    for (title, row, column), value in values.items():
        sheet = sheets.get(title.casefold())
        if sheet is None:
            raise ValueError(f"{package.name} has no worksheet {title!r}")
        cell = sheet.cell(row, column)
        if not isinstance(cell, MergedCell):  # the covered cells of a merged range hold nothing
            _put(cell, value)
    for sheet in workbook.worksheets:
        _keep_digits(sheet)


def _put(cell: Any, value: Any) -> None:
    cell._value, cell.data_type = _stored(value)
    if cell.data_type == "s" and cell._value.startswith(_STARTS_LIKE_A_FORMULA):
        cell.quotePrefix = True


def _stored(value: Any) -> tuple[Any, str]:
    """A cell value as openpyxl keeps it, and its type letter."""
    if value is None or value == "":
        return None, "n"
    if isinstance(value, CellError):
        return FILE_SPELLING.get(value.value, value.value), "e"
    if isinstance(value, bool):
        return value, "b"
    if isinstance(value, (int, float)):
        return (value, "n") if math.isfinite(value) else ("#NUM!", "e")
    if isinstance(value, str):
        return _writable(value), "s"
    raise TypeError(f"a cell cannot hold {type(value).__name__}")


def _writable(text: str) -> str:
    """The text with what XML cannot hold spelled as the file format does, ``_x0007_`` for a bell."""
    whole = text[:TEXT_LIMIT].encode("utf-8", "replace").decode("utf-8")
    return _UNWRITABLE.sub(lambda match: f"_x{ord(match[0]):04X}_", whole)


def _keep_digits(sheet: Any) -> None:
    """Spell floats in the shortest way that reads back the same; openpyxl would cut them to 16 digits."""
    for cell in sheet._cells.values():
        if cell.data_type == "n" and isinstance(getattr(cell, "_value", None), float):
            cell._value = repr(float(cell._value))


def _calm(package: Package, workbook: Any) -> None:
    """Nothing in the copy asks for a calculation or fills formulas into new table rows; what was hidden stays so."""
    if workbook.calculation is not None:
        workbook.calculation.fullCalcOnLoad = False
    states = {sheet.title: sheet.state for sheet in package.sheets}
    for sheet in workbook._sheets:  # openpyxl shows hidden chart sheets
        sheet.sheet_state = states.get(sheet.title, sheet.sheet_state)
    for column in (
        column for sheet in workbook.worksheets for table in sheet.tables.values() for column in table.tableColumns
    ):
        column.calculatedColumnFormula = column.totalsRowFormula = column.totalsRowFunction = None
    for axis in (axis for sheet in workbook._sheets for chart in sheet._charts for axis in _axes(chart)):
        if axis.delete is None:  # say it outright: programs differ on what leaving it out means (from memory)
            axis.delete = False


def _axes(chart: Any) -> list[Any]:
    found = (getattr(plot, name, None) for plot in chart._charts for name in ("x_axis", "y_axis"))
    return [axis for axis in found if axis is not None]


def _lacking(package: Package, workbook: Any, macros: bool) -> Iterator[str]:
    """What the book has and the copy will not, one phrase each."""
    if package.has_macros and not macros:
        yield "macros are not in the copy"
    for pattern, what in _LOST_PARTS:
        if any(re.match(pattern, name, re.IGNORECASE) for name in package.names):
            yield (f"{what} are not in the copy" if not what.startswith("the ") else f"{what} is not in the copy")
    sheets = [package.read(sheet.path) for sheet in package.sheets if sheet.kind == "worksheet"]
    for marker, what in _LOST_IN_SHEETS:
        if any(re.search(marker, sheet) for sheet in sheets):
            yield f"{what} are not in the copy"
    for sheet in package.sheets:
        if sheet.kind not in ("worksheet", "chartsheet"):
            yield f"sheet {sheet.title!r}, a {sheet.kind}, is a plain worksheet in the copy"
    yield from _lacking_drawings(package, workbook)
    yield from _still_calling(workbook)


def _lacking_drawings(package: Package, workbook: Any) -> Iterator[str]:
    drawings = [name for name in package.names if package.content_type(name).endswith("drawing+xml")]
    if any(_SHAPES.search(package.read(name)) for name in drawings):
        yield "shapes and text boxes are not in the copy"
    links = [link for name in drawings for link in package.relations(name)]
    for kind, kept, what in (("chart", "_charts", "charts"), ("image", "_images", "pictures")):
        there = sum(link.kind == kind for link in links)
        carried = sum(len(getattr(sheet, kept, ())) for sheet in workbook._sheets)
        if carried < there:
            hint = " (with Pillow installed they would be)" if kind == "image" and not find_spec("PIL") else ""
            yield f"{there - carried} of {there} {what} are not in the copy{hint}"
        elif kind == "chart" and there:
            yield "finer points of the charts, which are drawn anew (data tables, secondary axes, looks)"


def _still_calling(workbook: Any) -> Iterator[str]:
    """Places other than cells where a formula of ours stays, because a value cannot take its place."""
    scopes = [workbook, *workbook.worksheets]
    names = (name for scope in scopes for name in scope.defined_names.values())
    if any(_OURS.search(name.attr_text or "") for name in names):
        yield "defined names still call LP_ functions"
    for sheet in workbook.worksheets:
        rules = (rule for block in sheet.conditional_formatting for rule in block.rules)
        checks = sheet.data_validations.dataValidation
        texts = [text for rule in rules for text in rule.formula]
        texts += [text for check in checks for text in (check.formula1, check.formula2) if text]
        if any(_OURS.search(str(text)) for text in texts):
            yield f"conditional formats or validations of sheet {sheet.title!r} still call LP_ functions"
