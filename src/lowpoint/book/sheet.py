"""One worksheet part: where its formula cells stand in the bytes, and which formulas are the same down a column.

The part is checked by one strict XML parse; after that a scan of the bytes finds every formula cell with its place,
so that a result can be put where the old one stood and nothing else moves.
"""

from __future__ import annotations

import re
from array import array
from collections.abc import Iterator
from dataclasses import dataclass, field
from functools import cached_property, lru_cache
from html import unescape
from xml.parsers import expat

from lowpoint.errors import BookError

from .attributes import attribute, place_of
from .formulas import OWN_ROW, Token, Unreadable, shape_key, shifted, tokenise
from .guard_cells import CellCount, area_size, formula_refusal
from .guard_limits import Limits, in_force
from .parts import blanked
from .refs import LAST_ROW, Area, address, area, column_number

__all__ = ["Found", "Group", "SheetPart", "cell_pattern"]

_QUOTED = rb"""(?:[^>"'/]|/(?!>)|"[^"]*"|'[^']*')*+"""
_DECLARED = re.compile(rb"""^<\?xml[^>]*?\sencoding\s*=\s*["']([^"']*)["']""")
_ROOT = re.compile(rb"<(?:([\w.-]+):)?worksheet[\s>/]")
_DIGITS = re.compile(rb"[0-9]{1,7}")
_OWN = OWN_ROW.encode()
SAVE_ANEW = "Save it anew in a spreadsheet program."


@dataclass(slots=True, eq=False)
class Group:
    """Formulas of one column that read the same from their own rows; ``rows`` in the order of the file.

    ``kind`` is plain, array (one legacy array), dynamic (one dynamic array), or table (a data table); ``area`` the
    stored range of an array. ``reason`` says why the cells cannot be refreshed, "" while they can.
    """

    sheet: str
    column: int
    tokens: list[Token]
    text: str
    kind: str = "plain"
    area: Area | None = None
    reason: str = ""
    shared: bool = False
    rows: list[int] = field(default_factory=list)

    @property
    def place(self) -> str:
        """The first cell, for messages."""
        return address(self.rows[0], self.column)


@dataclass(frozen=True, slots=True)
class Found:
    """The patterns of a sheet's elements, which may carry a namespace prefix."""

    formula_cell: re.Pattern[bytes]
    any_cell: re.Pattern[bytes]
    row: re.Pattern[bytes]
    prefix: bytes


@lru_cache(maxsize=8)
def cell_pattern(prefix: bytes) -> Found:
    """Patterns of cells and rows. Groups of a formula cell: column, row, attributes, formula's attributes and text,
    value element, its text, and what may follow it."""
    p, q = re.escape(prefix), _QUOTED
    value = rb"(<%bv\b%b(?:/>|>([^<]*)</%bv\s*>))?" % (p, q, p)
    formula = rb"<%bf\b(%b)(?:/>|>([^<]*)</%bf\s*>)" % (p, q, p)
    start = rb"""<%bc(?=[\s>])(?:\sr="([A-Z]{1,3})([0-9]{1,7})")?(%b)>\s*""" % (p, q)
    return Found(
        re.compile(start + formula + rb"\s*" + value + rb"(.*?)</%bc\s*>" % p, re.DOTALL),
        re.compile(rb"<%bc(?=[\s>/])(%b)(?:/>|>.*?</%bc\s*>)" % (p, q, p), re.DOTALL),
        re.compile(rb"<%brow(?=[\s>/])(%b)(/>|>)" % (p, q)),
        prefix,
    )


class SheetPart:
    """A worksheet's bytes, its formula cells in file order, and their groups.

    ``plain`` says of each cell that holds a number, and ends with its value element, where that element begins: another
    one takes its place. It is 0 for the others.
    """

    def __init__(self, title: str, path: str, raw: bytes, book: str, limits: Limits | None = None) -> None:
        self.title, self.path, self.raw, self.book = title, path, raw, book
        self.data, self.codec = _as_utf8(raw)
        self._check(book)
        self.scanned = blanked(self.data)
        root = _ROOT.search(self.scanned)
        self.prefix = root[1] + b":" if root and root[1] else b""
        self.found = cell_pattern(self.prefix)
        self.body = self._body()
        self.starts, self.ends = array("Q"), array("Q")
        self.rows, self.columns = array("L"), array("L")
        self.plain = array("Q")
        self.groups: list[Group] = []
        self._shapes = _Shapes(title)
        self._scan()
        self._bound(limits or in_force())

    @property
    def distinct(self) -> list[Group]:
        """Every group once."""
        return list(dict.fromkeys(self.groups))

    def _bound(self, limits: Limits) -> None:
        """Formulas beyond the limits keep their values; the reason goes into the report."""
        filled = CellCount(self.book, limits)
        for group in self.distinct:
            filled.add(0 if group.area is None else area_size(group.area))
            refusal = "" if group.reason else formula_refusal(len(group.text), (t.kind for t in group.tokens), limits)
            group.reason = group.reason or refusal

    def _check(self, book: str) -> None:
        parser = expat.ParserCreate("utf-8")  # what was in another encoding has been put into this one
        try:
            parser.Parse(self.data, True)
        except expat.ExpatError as problem:
            must = f"sheet {self.title!r} must be well-formed XML"
            raise BookError(book, must, str(problem), "Fetch it again, or save it anew.") from None
        if b"<![CDATA[" in self.data:
            must = f"sheet {self.title!r} must hold plain text"
            raise BookError(book, must, "CDATA sections", SAVE_ANEW)

    def _body(self) -> tuple[int, int]:
        """Where the cells begin and end; an empty span where the sheet has none."""
        p = re.escape(self.prefix)
        opened = re.search(rb"<%bsheetData\b%b(/?)>" % (p, _QUOTED), self.scanned)
        if not opened or opened[1]:
            place = opened.end() if opened else 0
            return place, place
        closed = re.compile(rb"</%bsheetData\s*>" % p).search(self.scanned, opened.end())
        return opened.end(), closed.start() if closed else opened.end()

    def _scan(self) -> None:
        starts, ends, rows, columns, groups = self.starts, self.ends, self.rows, self.columns, self.groups
        plain, common, other = self.plain, self._shapes.common, self._shapes.group
        numbers: dict[bytes, int] = {}
        ending = len(b"</%bc>" % self.prefix)
        unnamed: dict[int, tuple[int, int]] | None = None
        nested = re.compile(rb"<%b[cfv](?=[\s>/])" % re.escape(self.prefix))
        for cell in self.found.formula_cell.finditer(self.scanned, *self.body):
            letters, digits, attributes, formula, text, element, _, rest = cell.groups()
            if letters is None:
                named = place_of(attributes)
                if named:
                    letters, digits = named
                else:
                    unnamed = self._counted() if unnamed is None else unnamed
                    if cell.start() not in unnamed:
                        raise self._odd_cell(cell.start())
                    row, column = unnamed[cell.start()]
                    letters, digits = b"", str(row).encode()
            if letters:
                column = numbers.get(letters) or numbers.setdefault(letters, column_number(letters.decode()))
                row = int(digits)
            if rest and nested.search(rest):
                raise self._odd_cell(cell.start())
            group = None if formula or not text else common.get((column, text.replace(digits, _OWN)))
            group = group or other(row, column, digits, attributes, formula, text)
            if group is None or not 1 <= row <= LAST_ROW:
                continue
            group.rows.append(row)
            start, end = cell.span()
            starts.append(start)
            ends.append(end)
            typed = b"t" in attributes or b"vm" in attributes
            plain.append(0 if rest or typed or not element or cell.end(6) + ending != end else cell.start(6))
            rows.append(row)
            columns.append(column)
            groups.append(group)

    def _odd_cell(self, place: int) -> BookError:
        """A cell that is no cell of the format: nobody can say which of its values is the formula's."""
        found = self.scanned[place : place + 60].decode("utf-8", "replace")
        must = f"sheet {self.title!r} must hold one formula and one value a cell"
        return BookError(self.book, must, repr(found), SAVE_ANEW)

    def _counted(self) -> dict[int, tuple[int, int]]:
        """Where cells stand that do not say it: each follows the one before it."""
        places: dict[int, tuple[int, int]] = {}
        row = column = 0
        either = re.compile(b"|".join((self.found.row.pattern, self.found.any_cell.pattern)), re.DOTALL)
        for item in either.finditer(self.scanned, *self.body):
            if item[0].startswith(b"<" + self.prefix + b"row"):
                row, column = self._row_number(item[1], row), 0
                continue
            named = place_of(item[3])
            row, column = (int(named[1]), column_number(named[0].decode())) if named else (row, column + 1)
            places[item.start()] = (row, column)
        return places

    def _row_number(self, attributes: bytes, before: int) -> int:
        """The number that a row states, or the one after the row before it."""
        text = attribute(attributes, b"r")
        number = int(text) if _DIGITS.fullmatch(text) else 0 if text else before + 1
        if not 1 <= number <= LAST_ROW:
            must = f"sheet {self.title!r} must number its rows from 1 to {LAST_ROW}"
            raise BookError(self.book, must, repr(text[:20].decode("utf-8", "replace")), SAVE_ANEW)
        return number

    @cached_property
    def index(self) -> dict[tuple[int, int], tuple[int, int]]:
        """Every cell of the sheet, by row and column, with its span in the bytes."""
        return {place: (start, end) for place, start, end in self.every_cell()}

    @cached_property
    def formula_places(self) -> set[tuple[int, int]]:
        """Rows and columns of the formula cells."""
        return set(zip(self.rows, self.columns, strict=True))

    @cached_property
    def row_spans(self) -> dict[int, tuple[int, int, int | None]]:
        """Every row: where it starts, where its opening tag ends, where its closing tag starts (None without one)."""
        spans: dict[int, tuple[int, int, int | None]] = {}
        closing, number = b"</%brow" % self.prefix, 0
        for row in self.found.row.finditer(self.scanned, *self.body):
            number = self._row_number(row[1], number)
            closed = None if row[2] == b"/>" else self.scanned.index(closing, row.end())
            spans[number] = (row.start(), row.end(), closed)
        return spans

    def every_cell(self) -> Iterator[tuple[tuple[int, int], int, int]]:
        """All cells in file order: (row, column), start, end."""
        counted: dict[int, tuple[int, int]] | None = None
        for cell in self.found.any_cell.finditer(self.scanned, *self.body):
            named = place_of(cell[1])
            if named:
                yield (int(named[1]), column_number(named[0].decode())), cell.start(), cell.end()
            else:
                counted = self._counted() if counted is None else counted
                if cell.start() not in counted:
                    raise self._odd_cell(cell.start())
                yield counted[cell.start()], cell.start(), cell.end()

    def encoded(self, data: bytes) -> bytes:
        """Changed bytes back in the encoding of the part."""
        return data if self.codec is None else data.decode("utf-8").encode(self.codec)


def _as_utf8(raw: bytes) -> tuple[bytes, str | None]:
    """The part as UTF-8 (its declaration left as it is), and the codec to put it back, None where it was UTF-8."""
    codec = None
    if raw.startswith((b"\xff\xfe", b"<\0")):
        codec = "utf-16-le"
    elif raw.startswith((b"\xfe\xff", b"\0<")):
        codec = "utf-16-be"
    else:
        declared = _DECLARED.search(raw[:200])
        name = declared[1].decode("ascii", "replace").lower() if declared else "utf-8"
        codec = None if name in ("utf-8", "utf8", "us-ascii", "ascii") else name
    return (raw, None) if codec is None else (raw.decode(codec).encode(), codec)


class _Shapes:
    """Finds the group of each formula; equal text down a column is read once."""

    def __init__(self, sheet: str) -> None:
        self.sheet = sheet
        self.common: dict[tuple[int, bytes], Group] = {}  # by column and text, the row's number taken out
        self._met: dict[tuple[int, bytes], str] = {}  # texts of which it is open, or settled, that they are not common
        self._by_shape: dict[tuple[int, str], Group] = {}
        self._masters: dict[bytes, tuple[list[Token], int, str]] = {}
        self._copies: dict[tuple[bytes, int], Group] = {}

    def group(
        self, row: int, column: int, digits: bytes, attributes: bytes, formula: bytes, text: bytes | None
    ) -> Group | None:
        """The group a formula cell belongs to; None where the element holds no formula at all."""
        if formula:
            kind = attribute(formula, b"t")
            if kind in (b"array", b"dataTable"):
                return self._single(row, column, attributes, formula, text or b"")
            if kind == b"shared":
                return self._shared(row, column, attribute(formula, b"si"), text)
        if not text:
            return None
        key = (column, text.replace(digits, _OWN))
        return self.common.get(key) or self._by_reading(row, key, text)

    def _by_reading(self, row: int, key: tuple[int, bytes], text: bytes) -> Group:
        known = self._met.get(key)
        if known != "apart":
            try:
                tokens = _common_tokens(_plain(key[1]), met_before=known == "once")
            except Unreadable:  # the row's number also means something else here: read each formula by itself
                self._met[key] = "apart"
            else:
                if tokens is not None:
                    group = Group(self.sheet, key[0], tokens, _plain(text))
                    self.common[key] = group
                    return group
                self._met[key] = "once"
        return self._by_itself(row, key[0], _plain(text))

    def _by_itself(self, row: int, column: int, text: str, kind: str = "plain") -> Group:
        try:
            tokens = tokenise(text, row)
        except Unreadable as problem:
            fresh = Group(self.sheet, column, [], text, kind, reason=str(problem))
            return self._by_shape.setdefault((column, kind + text), fresh)
        fresh = Group(self.sheet, column, tokens, text, kind)
        return self._by_shape.setdefault((column, kind + shape_key(tokens)), fresh)

    def _shared(self, row: int, column: int, number: bytes, text: bytes | None) -> Group:
        if text:
            group = self._by_itself(row, column, _plain(text))
            self._masters[number] = (group.tokens, column, group.text)
            self._copies[number, column] = group
        elif (number, column) in self._copies:
            group = self._copies[number, column]
        elif number in self._masters:
            tokens, home, stored = self._masters[number]
            moved = list(shifted(tokens, column - home))
            fresh = Group(self.sheet, column, moved, stored)
            group = self._by_shape.setdefault((column, fresh.kind + shape_key(moved)), fresh)
            self._copies[number, column] = group
        else:
            group = self._by_shape.setdefault(
                (column, ""), Group(self.sheet, column, [], "", reason="it shares a formula that is not there")
            )
        group.shared = True
        return group

    def _single(self, row: int, column: int, attributes: bytes, formula: bytes, text: bytes) -> Group:
        place = area(attribute(formula, b"ref").decode("ascii", "replace")) or Area(row, column, row, column)
        if attribute(formula, b"t") == b"dataTable":
            reason = "it belongs to a data table, which is not calculated here"
            return Group(self.sheet, column, [], "", "table", place, reason)
        dynamic = attribute(attributes, b"cm") not in (b"", b"0")
        kind = "dynamic" if dynamic else "array"
        if place == (row, column, row, column):
            # One cell: the usual way in which a newer program stores a call of an add-in's function.
            return self._by_itself(row, column, _plain(text), kind)
        group = Group(self.sheet, column, [], _plain(text), kind, place)
        try:
            group.tokens = tokenise(group.text, row)
        except Unreadable as problem:
            group.reason = str(problem)
        return group


def _common_tokens(text: str, met_before: bool) -> list[Token] | None:
    """Tokens of text in which OWN_ROW stands for the row; None while it is open whether other rows are meant fixed."""
    tokens = tokenise(text)
    for token in tokens:
        if (token.ref is None and OWN_ROW in token.text) or OWN_ROW in token.text.rpartition("!")[0]:
            raise Unreadable("the row's number stands outside a reference")
        if token.ref is not None and not met_before and _has_loose_row(token):
            return None
    return tokens


def _has_loose_row(token: Token) -> bool:
    """A row number without a dollar sign that is not the formula's own: relative in a copied formula."""
    return re.search(r"(?<![$\d])\d", token.text.rpartition("!")[2]) is not None


def _plain(text: bytes) -> str:
    decoded = text.decode("utf-8")
    return unescape(decoded) if "&" in decoded else decoded
