"""The books of a soak: of mixed size, some right already, some with findings, some broken in every usual way."""

from __future__ import annotations

import random
import zipfile
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from book.makers import compound
from fleet.helping import book

__all__ = ["BROKEN", "Made", "make"]

BOMB = 64 << 20
"""Bytes that the bomb unpacks to: far below the limit of a part, far beyond that of the ratio."""


@dataclass(frozen=True, slots=True)
class Made:
    """A book of a soak: its name, what it is, and its pressure before the valve (bar) where it can be read."""

    name: str
    kind: str
    p1: float = 0.0

    @property
    def broken(self) -> bool:
        return self.kind in BROKEN


def make(folder: Path, count: int, most_rows: int, chance: random.Random) -> list[Made]:
    """So many books in a folder: seven of ten good, one right already, one with findings, one broken."""
    folder.mkdir(parents=True)
    kinds = [kind for kind in ("good",) * 7 + ("right", "findings", "broken") for _ in range(-(-count // 10))][:count]
    chance.shuffle(kinds)
    broken = 0
    made = []
    for number, kind in enumerate(kinds):
        path = folder / f"{number:03}.xlsx"
        if kind == "broken":
            kind = list(BROKEN)[broken % len(BROKEN)]
            broken += 1
        rows = max(1, round(most_rows * chance.random() ** 3))  # most are small, a few are large
        p1 = 0.0 if kind == "findings" else 6.0 + number / 100
        book(path, p1, rows)
        if kind in BROKEN:
            BROKEN[kind](path)
        elif kind == "right":
            _recompute(path)
        made.append(Made(path.name, kind, p1))
    return made


def _recompute(path: Path) -> None:
    from lowpoint.book.recalc import recalculate

    recalculate(path, None, in_place=True)


# --- ways of being broken ---------------------------------------------------------------------------------------
def _torn(path: Path) -> None:
    data = path.read_bytes()
    path.write_bytes(data[: len(data) * 6 // 10])


def _repacked(path: Path, change: Callable[[str, bytes], bytes | None]) -> None:
    """The same package with a part changed, or left out for None."""
    with zipfile.ZipFile(path) as source:
        members = {name: source.read(name) for name in source.namelist()}
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as sink:
        for name, data in members.items():
            now = change(name, data)
            if now is not None:
                sink.writestr(name, now)


def _bomb(path: Path) -> None:
    with zipfile.ZipFile(path, "a", zipfile.ZIP_DEFLATED) as sink, sink.open("xl/media/image1.png", "w") as part:
        for _ in range(BOMB >> 20):
            part.write(bytes(1 << 20))


def _declaring(path: Path) -> None:
    entity = b'<!DOCTYPE worksheet [<!ENTITY a "aaaaaaaaaa"><!ENTITY b "&a;&a;&a;&a;">]>'

    def change(name: str, data: bytes) -> bytes:
        return data.replace(b"<worksheet", entity + b"<worksheet", 1) if name.endswith("sheet1.xml") else data

    _repacked(path, change)


def _lacking(path: Path) -> None:
    _repacked(path, lambda name, data: None if name == "xl/workbook.xml" else data)


def _foreign(path: Path) -> None:
    with zipfile.ZipFile(path, "w") as sink:
        sink.writestr("mimetype", "application/vnd.oasis.opendocument.spreadsheet")
        sink.writestr("content.xml", "<office:document-content/>")


BROKEN: dict[str, Callable[[Path], object]] = {
    "torn zip": _torn,
    "no zip": lambda path: path.write_bytes(b"tag,p1,p2\n"),
    "zero bytes": lambda path: path.write_bytes(b""),
    "password": lambda path: path.write_bytes(compound("EncryptionInfo", "EncryptedPackage")),
    "zip bomb": _bomb,
    "entities": _declaring,
    "missing part": _lacking,
    "wrong ending": _foreign,
}
"""Each way of being broken, done to a good book."""
