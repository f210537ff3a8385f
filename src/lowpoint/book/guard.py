"""The door: what may come in as a workbook, and a plain sentence for what may not.

Nothing is unpacked beyond the limits, whatever a file declares about itself, and nothing is handed to an XML
reader that could make it expand entities or fetch anything.
"""

from __future__ import annotations

import os
import re
import stat
from collections.abc import Iterator
from typing import NoReturn

from lowpoint.book.archive import DEFLATED, STORED, Archive, DamageError, Entry, ExcessError
from lowpoint.book.guard_limits import DEFAULT_LIMITS, Limits, in_force, size_text, too_much
from lowpoint.book.parts import CONTENT_TYPES, PROLOG_LIMIT, Types, main_part, prolog_verdict
from lowpoint.errors import BookError

__all__ = ["DEFAULT_LIMITS", "Limits", "admit", "check", "load", "looks_like"]

MUST = "must be an .xlsx, .xlsm, .xltx or .xltm workbook"
SAVE_AS = "Save it as an .xlsx workbook first."
DAMAGED = "is damaged or cut short"
FETCH = "Fetch it again, or open it in a spreadsheet program and save it anew."


def check(path: str | os.PathLike[str], limits: Limits | None = None) -> None:
    """Raise BookError, one sentence and its remedy, unless the file is a sound workbook within the limits.

    >>> check("photograph.xlsx")  # doctest: +SKIP
    BookError: photograph.xlsx: must be an .xlsx, .xlsm, .xltx or .xltm workbook, got a JPEG picture. ...
    """
    limits = limits or in_force()
    admit(load(path, limits), str(path), limits)


def load(path: str | os.PathLike[str], limits: Limits | None = None) -> bytes:
    """The bytes of an existing, readable, regular file that is not too large."""
    name, limits = str(path), limits or in_force()
    try:
        state = os.stat(path)
        if stat.S_ISDIR(state.st_mode):
            raise BookError(name, MUST, "a folder", "Name a file.")
        if not stat.S_ISREG(state.st_mode):
            raise BookError(name, MUST, "something that is not a regular file", "Name a file.")
        with open(path, "rb") as source:
            # One byte more than there should be tells a file that grew; asking for the limit would set it all aside.
            data = source.read(min(state.st_size, limits.file_bytes) + 1)
    except FileNotFoundError:
        raise BookError(name, "must be an existing file", "nothing there", "Check the name and the folder.") from None
    except PermissionError:
        must = "cannot be read: this user has no permission, or another program keeps it to itself"
        raise BookError(name, must, remedy="Change its permissions or close it there.") from None
    except (OSError, ValueError) as problem:  # ValueError: a name the system cannot hold
        raise BookError(name, f"cannot be read ({problem})") from problem
    if len(data) > limits.file_bytes:
        got = size_text(max(state.st_size, len(data)))
        too_much(name, f"be a file of at most {size_text(limits.file_bytes)}", got, "file")
    return data


def admit(data: bytes, name: str, limits: Limits | None = None) -> Archive:
    """The opened container of a workbook's bytes, after every test; ``name`` is what messages call it."""
    limits = limits or in_force()
    if not data.startswith(b"PK"):
        _refuse_foreign(data, name)
    try:
        archive = Archive(data, limits.entries)
        _check_names(archive, name)
        for entry in archive.entries:
            _check_entry(entry, name, limits)
        _check_total(archive, name, limits)
        _check_workbook(archive, name)
        types = Types.read(archive)
        for entry in archive.entries:
            _check_content(archive, entry, types)
    except ExcessError as excess:
        too_much(name, f"hold at most {limits.entries} parts", f"{excess.args[0]}", "parts")
    except DamageError as damage:
        raise BookError(name, f"{DAMAGED}: {damage}", remedy=FETCH) from None
    return archive


def _check_names(archive: Archive, name: str) -> None:
    """No name twice (case does not count inside a package), none that leaves the folder it is unpacked to."""
    seen: set[str] = set()
    for entry in archive.entries:
        part = entry.name
        pieces = part.split("/")
        if part.startswith("/") or "\\" in part or re.match(r"[A-Za-z]:", part) or {"..", "."} & set(pieces):
            _distrust(name, f"a part is named {part!r}, which points outside the workbook")
        if part.lower() in seen:
            _distrust(name, f"part {part!r} is in it twice")
        seen.add(part.lower())


def _check_entry(entry: Entry, name: str, limits: Limits) -> None:
    if stat.S_IFMT(entry.mode) not in (0, stat.S_IFREG, stat.S_IFDIR):
        _distrust(name, f"part {entry.name!r} is a link or device, not data")
    if entry.encrypted:
        raise BookError(name, "is protected with a password", remedy="Save it without a password first.")
    if entry.method not in (STORED, DEFLATED):
        must = f"packs its parts in a way that workbooks may not use (method {entry.method})"
        raise BookError(name, must, remedy="Open it in a spreadsheet program and save it anew.")
    if entry.size > limits.part_bytes:
        got = f"{size_text(entry.size)} in {entry.name}"
        too_much(name, f"hold no part above {size_text(limits.part_bytes)}", got, "part")
    if entry.size > limits.ratio_from and entry.size > limits.ratio * entry.packed:
        times = f"{entry.size / max(entry.packed, 1):.0f} times in {entry.name}"
        too_much(name, f"hold no large part packed more than {limits.ratio:.0f} times", times, "ratio")


def _check_total(archive: Archive, name: str, limits: Limits) -> None:
    total = sum(entry.size for entry in archive.entries)
    if total > limits.unpacked_bytes:
        too_much(name, f"unpack to at most {size_text(limits.unpacked_bytes)}", size_text(total), "unpacked")


def _check_workbook(archive: Archive, name: str) -> None:
    """The container is a workbook of the open XML kind, or the sentence says what it is instead."""
    names = [entry.name for entry in archive.entries]
    main = main_part(archive) if CONTENT_TYPES in archive else None
    kind = Types.read(archive).of(main) if main else ""
    binary = "binary" in kind or any(re.fullmatch(r"xl/workbook\d*\.bin", part) for part in names)
    if binary:
        raise BookError(name, MUST, "an .xlsb workbook, whose parts are binary", SAVE_AS)
    if "addin" in kind:
        raise BookError(name, MUST, "an add-in", "Name the workbook that uses it.")
    if main and ("spreadsheetml" in kind or "ms-excel" in kind or main.startswith("xl/")):
        return
    raise BookError(name, MUST, _other_package(archive, names), SAVE_AS)


def _other_package(archive: Archive, names: list[str]) -> str:
    if "mimetype" in archive:
        kind = archive.read(archive.entry("mimetype"))[:200].decode("ascii", "replace").strip()
        if kind.startswith("application/vnd.oasis.opendocument.spreadsheet"):
            return "an OpenDocument spreadsheet (.ods)"
        return f"a package of type {kind!r}"
    folders = {part.split("/")[0] for part in names}
    for folder, kind in (("word", "a text document (.docx)"), ("ppt", "a presentation (.pptx)")):
        if folder in folders and CONTENT_TYPES in archive:
            return kind
    if CONTENT_TYPES in archive or "xl" in folders:
        lacking = CONTENT_TYPES if CONTENT_TYPES not in archive else "xl/workbook.xml"
        return f"a package that lacks the part {lacking}"
    return "a zip archive with no workbook parts in it"


_XML = (".xml", ".rels", ".vml")
_PICTURES = (".svg", ".htm", ".html", ".xhtml")
"""Attachments that may declare a document type, and that nobody here reads."""


def _check_content(archive: Archive, entry: Entry, types: Types) -> None:
    """Unpack the member once, keeping nothing: it is what it declares, and if XML, it begins harmlessly."""
    chunks = archive.chunks(entry)
    if entry.size and _is_xml(entry.name, types, next(iter(archive.chunks(entry)))):
        refusal = _scanned(chunks)
        if refusal:
            raise DamageError(f"part {entry.name} {refusal}")
    for _ in chunks:
        pass


def _is_xml(name: str, types: Types, head: bytes) -> bool:
    """Whether a part may come before an XML reader: by its name, by its type, or because it looks so."""
    if name.lower().endswith(_XML):
        return True
    if "officedocument" in types.of(name) or "ms-excel" in types.of(name):
        return not name.lower().endswith(".bin")
    return not name.lower().endswith(_PICTURES) and head.lstrip(b"\xef\xbb\xbf\xfe\xff\0 \t\r\n").startswith(b"<")


def _scanned(chunks: Iterator[bytes]) -> str:
    head, verdict = b"", None
    for chunk in chunks:
        head = (head + chunk)[: PROLOG_LIMIT + 1]
        verdict = prolog_verdict(head, complete=False)
        if verdict is not None:
            return verdict
    return prolog_verdict(head, complete=True) or ""


def _refuse_foreign(data: bytes, name: str) -> NoReturn:
    """Raise for a file that is no zip at all, by what it looks like."""
    if data.startswith(_OLE) and "EncryptedPackage".encode("utf-16-le") in data:
        raise BookError(name, "is protected with a password", remedy="Save it without a password first.")
    kind = looks_like(data)
    remedy = "Export or save the list as .xlsx." if data else "Fetch it again."
    raise BookError(name, MUST, kind, remedy)


_OLE = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"
_MAGIC: tuple[tuple[bytes, str], ...] = (
    (b"%PDF", "a PDF document"),
    (b"\x09\x08\x10\x00", "an old .xls workbook"),
    (b"\x09\x08\x08\x00", "an old .xls workbook"),
    (b"\x09\x04\x06\x00", "an old .xls workbook"),
    (b"\x09\x00\x04\x00", "an old .xls workbook"),
    (b"\x89PNG", "a PNG picture"),
    (b"\xff\xd8\xff", "a JPEG picture"),
    (b"{\\rtf", "an RTF document"),
    (b"\x1f\x8b", "a gzip archive"),
    (b"7z\xbc\xaf\x27\x1c", "a 7z archive"),
    (b"Rar!", "a RAR archive"),
    (b"ID;P", "a SYLK text sheet"),
    (b"version https://git-lfs", "a placeholder for a file that was not downloaded"),
)


def looks_like(data: bytes) -> str:
    """What a file that is no workbook seems to be, in a few words.

    >>> looks_like(b"%PDF-1.7")
    'a PDF document'
    """
    if not data:
        return "an empty file"
    if data.startswith(_OLE):
        old = any(stream.encode("utf-16-le") in data for stream in ("Workbook", "Book"))
        return "an old .xls workbook" if old else "an old binary document"
    for magic, kind in _MAGIC:
        if data.startswith(magic):
            return kind
    return _text_kind(data[:4096])


def _text_kind(head: bytes) -> str:
    text = _decoded(head)
    if text is None:
        return "a file of an unknown kind"
    low = text.lstrip("\ufeff \t\r\n").lower()
    if "urn:schemas-microsoft-com:office:spreadsheet" in low or "excel.sheet" in low:
        return "an XML sheet of 2003, or a web page saved from a spreadsheet"
    if low.startswith(("<!doctype html", "<html", "<table", "<head", "<body")) or "<html" in low[:1000]:
        return "an HTML page"
    if "opendocument" in low or "office:document" in low:
        return "a flat OpenDocument file"
    if low.startswith("<"):
        return "an XML file"
    return "plain text, such as a CSV list"


def _decoded(head: bytes) -> str | None:
    """The head as text, None when it holds bytes that no text has."""
    for mark, codec in ((b"\xff\xfe", "utf-16-le"), (b"\xfe\xff", "utf-16-be")):
        if head.startswith(mark):
            return head.decode(codec, "ignore")
    control = sum(byte < 32 and byte not in b"\t\n\r\f\x1a\x1b" for byte in head)
    return None if control else head.decode("utf-8", "replace")


def _distrust(name: str, what: str) -> NoReturn:
    raise BookError(name, f"is not opened because {what}", remedy="Ask whoever made it, or save it anew.")
