"""Readings carved out of a damaged SQLite file page by page, whatever state its header and indexes are in.

Every leaf page of a table is read for itself (https://www.sqlite.org/fileformat2.html, sections 1.6, 2.1 and
4.1), in the file and in its write-ahead log. What looks like a row of readings is believed only if its
digest agrees with its content, so rubbish, half-written pages and flipped bits bring nothing in.
"""

from __future__ import annotations

import struct
from dataclasses import dataclass
from typing import TYPE_CHECKING

from analysis.errors import HingewiseError
from fieldapp.notebook.rows import READING_COLUMNS, digest_of, reading_from_values

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from analysis.files.reading import Reading

_HEADER_BYTES = 100
_LEAF = 0x0D
_WAL_HEADER_BYTES = 32
_FRAME_HEADER_BYTES = 24
_BEFORE_READING = 4  # seq, digest, origin, stored_at
_COLUMNS = _BEFORE_READING + len(READING_COLUMNS)
_REALS = frozenset(place for place, name in enumerate(READING_COLUMNS) if name.endswith(("_deg", "_m")))
_INTEGER_BYTES = {1: 1, 2: 2, 3: 3, 4: 4, 5: 6, 6: 8}
_LONGEST_PAYLOAD = 16_000_000
_PAGE_SIZES = (4096, 1024, 2048, 8192, 16384, 32768, 65536, 512)


@dataclass(frozen=True, slots=True)
class Carved:
    """What was carved: rows by number, and how many looked like readings but were not whole."""

    rows: Mapping[int, CarvedRow]
    doubtful: int


@dataclass(frozen=True, slots=True)
class CarvedRow:
    """One revision, with what the notebook noted beside it."""

    reading: Reading
    origin: str
    stored_at: str


def carve(main: bytes, wal: bytes = b"") -> Carved:
    """Carve all whole revisions out of a file and its write-ahead log."""
    best = Carved({}, 0)
    sizes = (_page_size(main, wal), *_PAGE_SIZES)
    for size in dict.fromkeys(size for size in sizes if size):
        found = _carve(main, wal, size)
        if len(found.rows) > len(best.rows):
            best = found
        if best.rows:
            break
    return best


def _page_size(main: bytes, wal: bytes) -> int:
    if main.startswith(b"SQLite format 3\0"):
        size = int.from_bytes(main[16:18])
        return 65536 if size == 1 else size if size in _PAGE_SIZES else 0
    if len(wal) >= _WAL_HEADER_BYTES:
        size = int.from_bytes(wal[8:12])
        return size if size in _PAGE_SIZES else 0
    return 0


def _carve(main: bytes, wal: bytes, size: int) -> Carved:
    in_main = {1 + at // size: main[at : at + size] for at in range(0, len(main), size)}
    in_wal = list(_frames(wal, size))
    newest = in_main | dict(in_wal)
    rows: dict[int, CarvedRow] = {}
    broken: set[tuple[int, str]] = set()
    for number, page in (*in_main.items(), *in_wal):
        start = _HEADER_BYTES if number == 1 else 0
        for seq, values in _cells(page, start, newest, size):
            if not _looks_like_revision(values):
                continue
            row = _whole_row(values)
            if row is None:
                broken.add((seq, str(values[4])))
            else:
                rows[seq] = row
    kept = {row.reading.reading_id for row in rows.values()}
    return Carved(rows, sum(1 for seq, key in broken if seq not in rows and key not in kept))


def _frames(wal: bytes, size: int) -> Iterator[tuple[int, bytes]]:
    at = _WAL_HEADER_BYTES
    while at + _FRAME_HEADER_BYTES + size <= len(wal):
        page = at + _FRAME_HEADER_BYTES
        yield int.from_bytes(wal[at : at + 4]), wal[page : page + size]
        at += _FRAME_HEADER_BYTES + size


def _cells(
    page: bytes, start: int, pages: Mapping[int, bytes], size: int
) -> Iterator[tuple[int, list[object]]]:
    """Rows of a leaf page of a table: (rowid, values); a cell that makes no sense is passed over."""
    if len(page) < size or page[start] != _LEAF:
        return
    count = int.from_bytes(page[start + 3 : start + 5])
    for place in range(min(count, size // 4)):
        pointer = start + 8 + 2 * place
        try:
            cell = int.from_bytes(page[pointer : pointer + 2])
            length, at = _varint(page, cell)
            rowid, at = _varint(page, at)
            if length <= _LONGEST_PAYLOAD:
                yield rowid, _record(_payload(page, at, length, pages, size))
        except (IndexError, ValueError, struct.error):
            continue


def _payload(page: bytes, at: int, length: int, pages: Mapping[int, bytes], size: int) -> bytes:
    """Payload of a cell, followed through its overflow pages (section 1.6; no reserved bytes)."""
    most = size - 35
    if length <= most:
        return page[at : at + length]
    least = (size - 12) * 32 // 255 - 23
    local = least + (length - least) % (size - 4)
    if local > most:
        local = least
    parts, have = [page[at : at + local]], local
    following = int.from_bytes(page[at + local : at + local + 4])
    while have < length:
        overflow = pages.get(following)
        if overflow is None:
            raise ValueError("an overflow page is missing")
        parts.append(overflow[4:])
        have += size - 4
        following = int.from_bytes(overflow[:4])
    return b"".join(parts)[:length]


def _record(payload: bytes) -> list[object]:
    header, at = _varint(payload, 0)
    kinds = []
    while at < header:
        kind, at = _varint(payload, at)
        kinds.append(kind)
        if len(kinds) > _COLUMNS:
            raise ValueError("no row of readings")
    values: list[object] = []
    for kind in kinds:
        value, at = _value(payload, at, kind)
        values.append(value)
    return values


def _value(payload: bytes, at: int, kind: int) -> tuple[object, int]:
    if kind in (0, 8, 9):
        return (None if kind == 0 else kind - 8), at
    if kind in _INTEGER_BYTES:
        size = _INTEGER_BYTES[kind]
        return int.from_bytes(payload[at : at + size], signed=True), at + size
    if kind == 7:
        return struct.unpack_from(">d", payload, at)[0], at + 8
    size = (kind - 12) // 2
    if kind < 12 or at + size > len(payload):
        raise ValueError("no value")
    raw = payload[at : at + size]
    return (raw.decode() if kind % 2 else raw), at + size


def _varint(data: bytes, at: int) -> tuple[int, int]:
    value = 0
    for place in range(8):
        byte = data[at + place]
        value = value << 7 | byte & 0x7F
        if byte < 0x80:
            return value, at + place + 1
    return value << 8 | data[at + 8], at + 9


def _looks_like_revision(values: list[object]) -> bool:
    return len(values) == _COLUMNS and values[2] in ("kept", "taken in") and isinstance(values[1], str)


def _whole_row(values: list[object]) -> CarvedRow | None:
    fields = dict(zip(READING_COLUMNS, values[_BEFORE_READING:], strict=True))
    for place in _REALS:  # SQLite stores 45.0 as the integer 45
        name = READING_COLUMNS[place]
        if isinstance(fields[name], int):
            fields[name] = float(str(fields[name]))
    try:
        reading = reading_from_values(fields)
        if digest_of(reading) != values[1]:
            return None
    except (HingewiseError, ValueError, TypeError):
        return None
    return CarvedRow(reading, str(values[2]), str(values[3]))
