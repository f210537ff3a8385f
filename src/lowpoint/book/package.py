"""A workbook as a package of parts: what its frame says, its parts, and a copy in which only some changed."""

from __future__ import annotations

import io
import os
import posixpath
import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from xml.etree.ElementTree import Element

from lowpoint.book import guard
from lowpoint.book.archive import Archive, DamageError
from lowpoint.book.guard_limits import Limits
from lowpoint.book.parts import Relation, Types, local_name, main_part, parse, relations
from lowpoint.book.repack import LEVEL, rewrite
from lowpoint.book.saving import replace_file
from lowpoint.errors import BookError

__all__ = ["DefinedName", "ExternalLink", "Package", "Sheet", "Table", "locked"]

_KINDS = {
    "worksheet": "worksheet",
    "chartsheet": "chartsheet",
    "dialogsheet": "dialogsheet",
    "xlMacrosheet": "macrosheet",
    "xlIntlMacrosheet": "macrosheet",
}


@dataclass(frozen=True, slots=True)
class Sheet:
    """One tab, in the order of the tabs; ``kind`` worksheet, chartsheet, dialogsheet or macrosheet."""

    title: str
    path: str
    kind: str
    state: str  # visible, hidden, veryHidden
    sheet_id: int


@dataclass(frozen=True, slots=True)
class DefinedName:
    """A defined name as stored; ``sheet`` is the tab it belongs to, from 0, None for the whole book."""

    name: str
    text: str
    sheet: int | None
    hidden: bool


@dataclass(frozen=True, slots=True)
class Table:
    """A table of a sheet: the name formulas use, its whole range, its head and foot rows, its columns."""

    name: str
    ref: str
    header_rows: int
    totals_rows: int
    columns: tuple[str, ...]
    path: str


@dataclass(frozen=True, slots=True)
class ExternalLink:
    """A link to another book: formulas write ``[index]``; ``target`` is only ever reported, never opened."""

    index: int
    path: str
    target: str


class Package:
    """A workbook's bytes as admitted by the guard; the file is read once and not looked at again.

    >>> package = Package.open("list.xlsx")  # doctest: +SKIP
    >>> package.sheets[0].title, package.tables(package.sheets[0])  # doctest: +SKIP
    """

    def __init__(self, data: bytes, name: str, limits: Limits | None = None) -> None:
        self.name = name
        self.source: Path | None = None
        self._seen: tuple[int, ...] | None = None
        self._archive: Archive = guard.admit(data, name, limits)
        self.names: tuple[str, ...] = tuple(entry.name for entry in self._archive.entries)
        try:
            self._read_frame()
        except DamageError as damage:
            raise self._damaged(damage) from None

    @classmethod
    def open(cls, path: str | os.PathLike[str], limits: Limits | None = None) -> Package:
        """Open a workbook file, or say in one sentence why not (BookError)."""
        seen = _mark(Path(path))
        package = cls(guard.load(path, limits), str(path), limits)
        package.source, package._seen = Path(path), seen
        return package

    def _read_frame(self) -> None:
        self.main: str = main_part(self._archive) or ""
        self.types = Types.read(self._archive)
        self._frame: Element = parse(self._archive.read(self._archive.entry(self.main)), self.main)
        self._links: dict[str, Relation] = {link.id: link for link in relations(self._archive, self.main)}
        self.sheets: tuple[Sheet, ...] = tuple(self._sheet(item) for item in _inside(self._frame, "sheets"))
        if not self.sheets:
            raise DamageError("it has no sheets")

    def _sheet(self, item: Element) -> Sheet:
        title = item.get("name", "")
        link = self._links.get(_relation_id(item))
        if link is None or link.external or link.target not in self._archive:
            raise DamageError(f"the part that holds sheet {title!r} is missing")
        if not link.target.lower().endswith(".xml"):
            raise DamageError(f"the part that holds sheet {title!r} is named {link.target!r}, not .xml")
        number = item.get("sheetId", "")
        kind = _KINDS.get(link.kind, link.kind)
        return Sheet(title, link.target, kind, item.get("state", "visible"), int(number) if number.isdecimal() else 0)

    # Parts

    def __contains__(self, name: object) -> bool:
        return name in self._archive

    def read(self, name: str) -> bytes:
        """The content of a part; KeyError when there is none of this name."""
        try:
            return self._archive.read(self._archive.entry(name))
        except DamageError as damage:
            raise self._damaged(damage) from None

    def content_type(self, name: str) -> str:
        """The content type the package gives a part, "" for none."""
        return self.types.of(name)

    def relations(self, name: str) -> tuple[Relation, ...]:
        """The relationships of a part, of the package itself with ""."""
        try:
            return tuple(relations(self._archive, name))
        except DamageError as damage:
            raise self._damaged(damage) from None

    def _damaged(self, damage: DamageError) -> BookError:
        return BookError(self.name, f"{guard.DAMAGED}: {damage}", remedy=guard.FETCH)

    # What the frame says

    def sheet(self, title: str) -> Sheet:
        """The sheet of this title, case not counted, as in formulas; KeyError when there is none."""
        for sheet in self.sheets:
            if sheet.title.casefold() == title.casefold():
                return sheet
        raise KeyError(title)

    @cached_property
    def defined_names(self) -> tuple[DefinedName, ...]:
        """All defined names, the hidden and built-in ones too, with their text untouched."""
        return tuple(_defined_name(item) for item in _inside(self._frame, "definedNames"))

    def tables(self, sheet: Sheet) -> tuple[Table, ...]:
        """The tables of one sheet."""
        found = [link.target for link in self.relations(sheet.path) if link.kind == "table" and not link.external]
        try:
            return tuple(_table(parse(self.read(path), path), path) for path in found if path in self)
        except DamageError as damage:
            raise self._damaged(damage) from None

    @property
    def date1904(self) -> bool:
        """Whether day 0 is 1904-01-01."""
        return _is_true(self._property("workbookPr", "date1904"))

    @property
    def full_calc_on_load(self) -> bool:
        """Whether a program that opens the book is told to throw the stored values away and calculate."""
        return _is_true(self._property("calcPr", "fullCalcOnLoad"))

    @property
    def iterates(self) -> bool:
        """Whether circular references are meant, solved by iteration."""
        return _is_true(self._property("calcPr", "iterate"))

    @property
    def rounds_as_shown(self) -> bool:
        """Whether calculation is to use numbers as their formats show them, rounded (precision as displayed)."""
        return self._property("calcPr", "fullPrecision") in ("0", "false")

    def _property(self, element: str, attribute: str) -> str:
        found = next((item for item in self._frame if local_name(item.tag) == element), None)
        return "" if found is None else found.get(attribute, "")

    @property
    def strict(self) -> bool:
        """Whether the book is of the strict variant, whose namespaces differ (openpyxl does not read it)."""
        return "purl.oclc.org" in self._frame.tag

    @property
    def signed(self) -> bool:
        """Whether the package carries a digital signature, which survives no change (that of macros does)."""
        return any(name.lower().startswith("_xmlsignatures/") for name in self.names)

    @property
    def has_macros(self) -> bool:
        """Whether the book holds a macro project."""
        return any(posixpath.basename(name).lower() == "vbaproject.bin" for name in self.names)

    @property
    def macro_enabled(self) -> bool:
        """Whether its type is .xlsm or .xltm, whatever the file is called."""
        return "macroEnabled" in self.content_type(self.main)

    @property
    def template(self) -> bool:
        """Whether its type is .xltx or .xltm, whatever the file is called."""
        return "template" in self.content_type(self.main)

    @cached_property
    def external_links(self) -> tuple[ExternalLink, ...]:
        """The links to other books, in the order in which formulas count them from 1."""
        items = enumerate(_inside(self._frame, "externalReferences"), start=1)
        return tuple(self._external_link(index, _relation_id(item)) for index, item in items)

    def _external_link(self, index: int, relation_id: str) -> ExternalLink:
        link = self._links.get(relation_id)
        if link is None or link.target not in self:
            return ExternalLink(index, "", "")
        return ExternalLink(index, link.target, next((out.target for out in self.relations(link.target)), ""))

    # Writing

    def packed(
        self, changed: Mapping[str, bytes], level: int = LEVEL, added: Mapping[str, bytes] | None = None
    ) -> bytes:
        """The package in memory with these parts replaced and ``added`` ones behind the last; the others keep bytes,
        order and marks."""
        self._check_changed(changed)
        twice = {name.casefold() for name in self.names} & {name.casefold() for name in added or ()}
        if twice:
            raise ValueError(f"{self.name} has a part {min(twice)} already")
        sink = io.BytesIO()
        rewrite(self._archive, sink, changed, level, added)
        return sink.getvalue()

    def write(self, path: str | os.PathLike[str], changed: Mapping[str, bytes]) -> None:
        """Write the package to a file with these parts replaced, in one step or not at all (BookError).

        Writing over the file it came from is refused when somebody saved that file in the meantime.
        """
        self._check_changed(changed)
        target = Path(path)
        if self.source and self._seen and _mark(target) != self._seen and _same_file(target, self.source):
            must = "was changed by someone else in the meantime and was left as it is"
            raise BookError(str(path), must, remedy="Run the command again.")
        replace_file(target, lambda sink: rewrite(self._archive, sink, changed))

    def _check_changed(self, changed: Mapping[str, bytes]) -> None:
        unknown = sorted(set(changed) - set(self.names))
        if unknown:
            raise ValueError(f"{self.name} has no part {unknown[0]}")


def _inside(frame: Element, element: str) -> list[Element]:
    return [item for group in frame if local_name(group.tag) == element for item in group if local_name(item.tag)]


def _relation_id(item: Element) -> str:
    wanted = (value for key, value in item.attrib.items() if key.startswith("{") and local_name(key) == "id")
    return next(wanted, "")


def _is_true(text: str) -> bool:
    return text.strip().lower() in ("1", "true", "on")


def _defined_name(item: Element) -> DefinedName:
    place = item.get("localSheetId", "")
    sheet = int(place) if place.isdecimal() else None
    return DefinedName(item.get("name", ""), item.text or "", sheet, _is_true(item.get("hidden", "")))


def _table(root: Element, path: str) -> Table:
    columns = tuple(_unescaped(item.get("name", "")) for item in _inside(root, "tableColumns"))
    counts = [root.get(name, default) for name, default in (("headerRowCount", "1"), ("totalsRowCount", "0"))]
    header, totals = (int(count) if count.isdecimal() else 0 for count in counts)
    return Table(root.get("displayName") or root.get("name") or "", root.get("ref", ""), header, totals, columns, path)


def _unescaped(text: str) -> str:
    """A column name with its ``_x000a_`` escapes (line breaks, mostly) turned back."""
    return re.sub(r"_x([0-9A-Fa-f]{4})_", lambda match: chr(int(match[1], 16)), text)


def _mark(path: Path) -> tuple[int, ...] | None:
    """What tells one state of a file from another; None when there is no file."""
    try:
        state = os.stat(path)
    except OSError:
        return None
    return (state.st_dev, state.st_ino, state.st_size, state.st_mtime_ns)


def _same_file(one: Path, other: Path) -> bool:
    return os.path.realpath(one) == os.path.realpath(other)


# Lock files

_SOMEONE = "someone whose name is not in the lock file"
LONGEST_NAME = 60


def locked(path: str | os.PathLike[str]) -> str | None:
    """Who has the workbook open, as a lock file beside it (or beside a link's goal) tells, else None.

    Known are ``~$name`` (the owner's name, one byte of length before it) and ``.~lock.name#``
    (comma-separated: full name, account, computer, time). The lock may be left over from a crash: only the
    user can know.
    """
    given = Path(path)
    for book in dict.fromkeys((given, Path(os.path.realpath(given)))):
        for lock, owner in ((f"~${book.name}", _owner), (f".~lock.{book.name}#", _lock_owner)):
            beside = book.parent / lock
            if os.path.isfile(beside):
                return owner(_lock_content(beside)) or _SOMEONE
    return None


def _lock_content(lock: Path) -> bytes:
    try:
        with open(lock, "rb") as source:
            return source.read(4096)
    except OSError:  # the program that made it keeps it to itself: locked all the same
        return b""


def _owner(data: bytes) -> str:
    """The wide name behind its count at byte 55, else the narrow one behind its count at the start."""
    wide = data[57 : 57 + 2 * int.from_bytes(data[55:57], "little")].decode("utf-16-le", "ignore")
    narrow = data[1 : 1 + data[0]].decode("cp1252", "replace") if data else ""
    return _printable(wide) or _printable(narrow)


def _lock_owner(data: bytes) -> str:
    fields = [
        re.sub(r"\\(.)", r"\1", field)
        for field in re.findall(r"((?:\\.|[^,\\])*)(?:,|$)", data.decode("utf-8", "replace"))
    ]
    name, account, computer = ([_printable(field) for field in fields] + ["", "", ""])[:3]
    who = name or account
    return f"{who} on {computer}" if who and computer else who or computer


def _printable(text: str) -> str:
    """A name as a lock file holds it, empty where it looks like no name: a broken file may hold anything."""
    name = "".join(char for char in text if char.isprintable()).strip()
    return name if len(name) <= LONGEST_NAME else ""
