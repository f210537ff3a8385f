"""The zip container of a workbook, byte by byte: strict reading with bounds.

The standard library's zip module would do for reading, but it neither keeps the compressed bytes, local extra
fields and gaps of members that nobody touched, nor compares the table of contents with the headers it stands
for. A workbook may come from anywhere: two readers that disagree about such a file are how a hostile one
slips through.

Source: PKWARE APPNOTE 6.3 (zip); ISO/IEC 29500-2 (the packaging rules: stored or deflated, nothing
encrypted).
"""

from __future__ import annotations

import struct
import zlib
from collections.abc import Iterator
from dataclasses import dataclass

__all__ = ["Archive", "DamageError", "Directory", "Entry", "ExcessError"]

LOCAL = struct.Struct("<4s5H3I2H")
CENTRAL = struct.Struct("<4s6H3I5H2I")
END = struct.Struct("<4s4H2IH")
END64 = struct.Struct("<4sQ2H2I4Q")
LOCATOR = struct.Struct("<4sIQI")

STORED, DEFLATED = 0, 8
DESCRIPTOR_FLAG, UTF8_FLAG = 0x0008, 0x0800
ENCRYPTED_FLAGS = 0x0001 | 0x0040 | 0x2000  # traditional, strong, masked headers
ZIP64_EXTRA, UNICODE_PATH_EXTRA = 0x0001, 0x7075
FULL16, FULL32 = 0xFFFF, 0xFFFFFFFF
FEED, CHUNK = 1 << 16, 1 << 20  # compressed bytes in, content out, at a time


class DamageError(Exception):
    """The container contradicts itself or ends early; the text completes the clause "is damaged:"."""


class ExcessError(Exception):
    """More members than allowed; ``args[0]`` is how many."""


@dataclass(frozen=True, slots=True)
class Entry:
    """One member as the table of contents and its local header describe it (both agree)."""

    name: str
    flags: int
    method: int
    crc: int
    packed: int
    size: int
    mode: int
    record: bytes  # the central record as found
    start: int  # of the local header
    data: int  # of the compressed bytes
    stop: int  # of this member's region: a data descriptor and any padding belong to it

    @property
    def encrypted(self) -> bool:
        """Whether the member needs a password."""
        return bool(self.flags & ENCRYPTED_FLAGS)


@dataclass(frozen=True, slots=True)
class Directory:
    """What the end of the file says about the table of contents."""

    offset: int
    size: int
    count: int
    zip64: bytes  # the zip64 end record as found, or nothing
    comment: bytes


class Archive:
    """A zip file in memory, at most ``most`` members: ``entries`` in the order of its table of contents."""

    def __init__(self, data: bytes, most: int = FULL16) -> None:
        self.data = data
        self.directory = _find_directory(data)
        if self.directory.count > most:
            raise ExcessError(self.directory.count)
        self.entries = tuple(_with_bounds(data, _records(data, self.directory), self.directory.offset))
        self._by_name = {entry.name: entry for entry in self.entries}

    def __contains__(self, name: object) -> bool:
        return name in self._by_name

    def entry(self, name: str) -> Entry:
        """The member of this exact name; KeyError when there is none."""
        return self._by_name[name]

    def chunks(self, entry: Entry) -> Iterator[bytes]:
        """The member's content piece by piece, never more than it declares; DamageError when it does not hold."""
        packed = memoryview(self.data)[entry.data : entry.data + entry.packed]
        pieces = iter((bytes(packed),)) if entry.method == STORED else _inflated(packed, entry)
        crc = total = 0
        for piece in pieces:
            total += len(piece)
            crc = zlib.crc32(piece, crc)
            if total > entry.size:
                raise DamageError(f"part {entry.name} unpacks to more than the {entry.size} bytes it declares")
            yield piece
        if total != entry.size or crc != entry.crc:
            raise DamageError(f"part {entry.name} does not unpack to what was packed")

    def read(self, entry: Entry) -> bytes:
        """The member's whole content, bounded by its declared size."""
        return b"".join(self.chunks(entry))


def _find_directory(data: bytes) -> Directory:
    place = _end_place(data)
    _, disk, first_disk, here, count, size, offset, _ = END.unpack_from(data, place)
    comment = data[place + END.size :]
    zip64 = b""
    end = place
    if data[max(0, place - LOCATOR.size) : place].startswith(b"PK\x06\x07"):
        plain = (here, count, size, offset)
        end, disk, first_disk, (here, count, size, offset) = _zip64_end(data, place)
        if any(a != b for a, b in zip(plain, (here, count, size, offset), strict=True) if a not in (FULL16, FULL32)):
            raise DamageError("its two tables of contents disagree")
        zip64 = data[end : place - LOCATOR.size]
    if disk or first_disk or here != count:
        raise DamageError("it is one piece of an archive split over several files")
    if offset + size != end or size < count * CENTRAL.size:
        raise DamageError("its table of contents is not where it should be")
    return Directory(offset, size, count, zip64, comment)


def _end_place(data: bytes) -> int:
    """Where the end record stands. The last mark counts: readers differ on a comment that holds another one."""
    place = data.rfind(b"PK\x05\x06", max(0, len(data) - END.size - FULL16))
    if place < 0 or place + END.size > len(data):
        raise DamageError("its end is missing")
    if place + END.size + int(END.unpack_from(data, place)[-1]) != len(data):
        raise DamageError("something stands after its end")
    return place


def _zip64_end(data: bytes, place: int) -> tuple[int, int, int, tuple[int, int, int, int]]:
    _, disk, offset, disks = LOCATOR.unpack_from(data, place - LOCATOR.size)
    if disk or disks > 1 or offset + END64.size > place - LOCATOR.size or data[offset : offset + 4] != b"PK\x06\x06":
        raise DamageError("its table of contents is not where it should be")
    _, length, _, _, this, first, here, count, size, start = END64.unpack_from(data, offset)
    if offset + 12 + length != place - LOCATOR.size:
        raise DamageError("its table of contents is not where it should be")
    return offset, this, first, (here, count, size, start)


def _records(data: bytes, directory: Directory) -> Iterator[tuple[bytes, int]]:
    """The central records, each with its end: exactly as many as promised, in exactly the room promised."""
    place, end = directory.offset, directory.offset + directory.size
    for _ in range(directory.count):
        if place + CENTRAL.size > end or data[place : place + 4] != b"PK\x01\x02":
            raise DamageError("its table of contents is broken")
        lengths = CENTRAL.unpack_from(data, place)[10:13]
        stop = place + CENTRAL.size + sum(lengths)
        if stop > end:
            raise DamageError("its table of contents is broken")
        yield data[place:stop], stop
        place = stop
    if place != end:
        raise DamageError("its table of contents is broken")


def _with_bounds(data: bytes, records: Iterator[tuple[bytes, int]], end: int) -> Iterator[Entry]:
    """Entries in table order, each member's region running up to the next one's; none may overlap another."""
    found = [_entry(data, record) for record, _ in records]
    order = sorted(range(len(found)), key=lambda index: found[index].start)
    stops = dict(zip(order, [found[index].start for index in order[1:]] + [end], strict=True)) if order else {}
    for index, entry in enumerate(found):
        if entry.data + entry.packed > stops[index]:
            raise DamageError(f"part {entry.name} overlaps another part or runs past the end")
        yield _replace_stop(entry, stops[index])


def _replace_stop(entry: Entry, stop: int) -> Entry:
    fields = {name: getattr(entry, name) for name in Entry.__slots__}
    return Entry(**{**fields, "stop": stop})


def _entry(data: bytes, record: bytes) -> Entry:
    (
        _,
        _,
        _,
        flags,
        method,
        _,
        _,
        crc,
        packed,
        size,
        name_length,
        extra_length,
        _,
        disk,
        _,
        attributes,
        start,
    ) = CENTRAL.unpack_from(record)
    raw_name = record[CENTRAL.size : CENTRAL.size + name_length]
    extra = _extra_fields(record[CENTRAL.size + name_length :][:extra_length])
    name = _decoded(raw_name, flags)
    size, packed, start = _widened((size, packed, start), extra.get(ZIP64_EXTRA, b""), name)
    if disk not in (0, FULL16):
        raise DamageError("it is one piece of an archive split over several files")
    if UNICODE_PATH_EXTRA in extra and extra[UNICODE_PATH_EXTRA][5:] not in (raw_name, name.encode()):
        raise DamageError(f"part {name} carries two different names")
    place = _check_local(data, start, (flags, method, crc, size, packed), raw_name, name)
    return Entry(name, flags, method, crc, packed, size, attributes >> 16, record, start, place, place + packed)


def _decoded(raw_name: bytes, flags: int) -> str:
    try:
        name = raw_name.decode("utf-8" if flags & UTF8_FLAG else "cp437")
    except UnicodeDecodeError:
        raise DamageError("the name of one of its parts is not text") from None
    if not name or any(ord(char) < 32 for char in name):
        raise DamageError(f"one of its parts has no proper name ({name!r})")
    return name


def _extra_fields(extra: bytes) -> dict[int, bytes]:
    """Extra fields by id. A last one that does not fit is left alone: some writers pad so."""
    fields: dict[int, bytes] = {}
    place = 0
    while place + 4 <= len(extra):
        kind, length = struct.unpack_from("<2H", extra, place)
        fields.setdefault(kind, extra[place + 4 : place + 4 + length])
        place += 4 + length
    return fields


def _widened(values: tuple[int, int, int], extra: bytes, name: str) -> tuple[int, int, int]:
    """Size, packed size and start, with those marked full taken from the zip64 field in that order."""
    wide, place = list(values), 0
    for index, value in enumerate(values):
        if value == FULL32:
            if place + 8 > len(extra):
                raise DamageError(f"the sizes of part {name} are missing")
            (wide[index],) = struct.unpack_from("<Q", extra, place)
            place += 8
    return wide[0], wide[1], wide[2]


def _check_local(data: bytes, start: int, said: tuple[int, int, int, int, int], raw_name: bytes, name: str) -> int:
    """Compare the local header with the table of contents; the place where the compressed bytes begin."""
    flags, method, crc, size, packed = said
    if start + LOCAL.size > len(data) or data[start : start + 4] != b"PK\x03\x04":
        raise DamageError(f"part {name} is not where the table of contents says")
    _, _, local_flags, local_method, _, _, *sums, name_length, extra_length = LOCAL.unpack_from(data, start)
    place = start + LOCAL.size
    extra = data[place + name_length : place + name_length + extra_length]
    local_crc, local_packed, local_size = sums
    # The local field lists the size first, then the packed size, as the central one does.
    local_size, local_packed, _ = _widened((local_size, local_packed, 0), _extra_fields(extra).get(1, b""), name)
    streamed = bool(local_flags & DESCRIPTOR_FLAG)  # sizes follow the data, the header may leave them 0
    agrees = all(
        here == there or (streamed and here == 0)
        for here, there in ((local_crc, crc), (local_packed, packed), (local_size, size))
    )
    same = data[place : place + name_length] == raw_name and local_method == method
    if not (agrees and same and not (local_flags ^ flags) & (ENCRYPTED_FLAGS | DESCRIPTOR_FLAG)):
        raise DamageError(f"part {name} is described in two different ways")
    return int(place + name_length + extra_length)


def _inflated(packed: memoryview, entry: Entry) -> Iterator[bytes]:
    engine = zlib.decompressobj(-zlib.MAX_WBITS)
    begin = 0
    try:
        for begin in range(0, len(packed), FEED):
            piece = engine.decompress(packed[begin : begin + FEED], CHUNK)
            yield piece
            while engine.unconsumed_tail or len(piece) == CHUNK:
                piece = engine.decompress(engine.unconsumed_tail, CHUNK)
                yield piece
            if engine.eof:
                break
    except zlib.error:
        raise DamageError(f"part {entry.name} does not unpack") from None
    if not engine.eof or engine.unused_data or begin + FEED < len(packed):
        raise DamageError(f"part {entry.name} does not unpack to what was packed")
