"""Cutting a file into records, block by block, so that memory does not grow with the file.

A record ends at a line end outside quotes. Blocks whose quotes all stand where they belong, round a whole
cell, are cut by array operations; in any other block each line is looked at by itself. A quote that opens
and is never closed spoils its own line only.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, BinaryIO

import numpy as np
import numpy.typing as npt

from analysis.errors import CsvError
from analysis.files.header import BOM, SEPARATOR_LINE, Header, parse_header, refuse_other_kinds

if TYPE_CHECKING:
    from collections.abc import Iterator

BLOCK_BYTES = 4 * 2**20
MAX_RECORD_BYTES = 4 * 2**20  # longer than any reading that can be written

_QUOTE, _CR, _LF = b'"\r\n'
_Ints = npt.NDArray[np.int64]
_Bytes = npt.NDArray[np.uint8]
_Bools = npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Records:
    """Whole records of a file, each with its line end.

    `starts` and `ends` are offsets into `text`, `lines` the line numbers where records start, `malformed`
    marks those whose quotes or line ends are out of place. `cells` counts the cells of each record; 0 where
    it is malformed.
    """

    text: bytes
    starts: _Ints
    ends: _Ints
    lines: _Ints
    cells: _Ints
    malformed: _Bools

    def __len__(self) -> int:
        return len(self.starts)

    def record(self, index: int) -> bytes:
        """The bytes of one record, without its line end."""
        return self.text[self.starts[index] : self.ends[index]].rstrip(b"\r\n")


class RecordFile:
    """The records of one open file, after its header; `bytes_read` tells how far it is."""

    def __init__(self, file: str, stream: BinaryIO) -> None:
        self._stream = stream
        self.bytes_read = 0
        start = self._read()
        refuse_other_kinds(file, start)
        self._rest = start.removeprefix(BOM)
        line_end = b"\r" if b"\r" in start and b"\n" not in start else b"\n"
        line, number = self._header_line(file, line_end, 1)
        if SEPARATOR_LINE.fullmatch(line.decode(errors="replace").strip()):
            line, number = self._header_line(file, line_end, number)
        self.header: Header = parse_header(file, line, first_line=number, line_end=line_end)

    def _read(self) -> bytes:
        block = self._stream.read(BLOCK_BYTES)
        self.bytes_read += len(block)
        return block

    def _header_line(self, file: str, line_end: bytes, number: int) -> tuple[bytes, int]:
        while line_end not in self._rest and (block := self._read()):
            self._rest += block
            if len(self._rest) > MAX_RECORD_BYTES:
                break
        line, _, self._rest = self._rest.partition(line_end)
        if len(line) > MAX_RECORD_BYTES:
            raise CsvError(
                f"the first line is longer than {MAX_RECORD_BYTES} bytes",
                where=file,
                expected="a header line with the names of the columns",
                mend="This is no file of readings, or its line ends were lost.",
            )
        return line, number + 1

    def __iter__(self) -> Iterator[Records]:
        """Yield the records in blocks; raises CsvError at a line too long to be one."""
        rest, line, final = self._rest, self.header.first_line, False
        self._rest = b""
        cutter = _Cutter(self.header)
        while not final:
            block = self._read()
            final = not block
            rest += block
            if not rest:
                return
            records, used = cutter.cut(rest, line, final=final)
            if len(records):
                yield records
                line = cutter.next_line
            rest = rest[used:]


class _Cutter:
    def __init__(self, header: Header) -> None:
        self.file = header.file
        self.delimiter = ord(header.delimiter)
        self.line_end = header.line_end[0]
        self.next_line = header.first_line

    def cut(self, text: bytes, line: int, *, final: bool) -> tuple[Records, int]:
        """Give the whole records at the start of a text and how many bytes they take."""
        array = np.frombuffer(text, dtype=np.uint8)
        outside = None if b'"' not in text else _outside_quotes(array)
        line_ends = array == self.line_end
        breaks = np.flatnonzero(line_ends if outside is None else line_ends & outside)
        ends = breaks + 1
        used = int(ends[-1]) if len(ends) else 0
        if final and used < len(text) and (outside is None or bool(outside[-1])):
            used = len(text)
            ends = np.append(ends, used)
        # An open quote at the end of the file, or one that stays open too long, is looked at line by line.
        unclosed = used == 0 if not final else used < len(text)
        if unclosed and (final or len(text) > MAX_RECORD_BYTES):
            return self._cut_by_line(text, line, final=final)
        if outside is not None and not self._quotes_in_place(array[:used]):
            return self._cut_by_line(text, line, final=final)
        starts = np.concatenate(([0], ends[:-1])) if len(ends) else ends
        if outside is None or len(breaks) == int(np.count_nonzero(line_ends[:used])):
            lines = line + np.arange(len(starts))
        else:
            lines = line + np.searchsorted(np.flatnonzero(line_ends[:used]), starts)
        self.next_line = line + int(np.count_nonzero(line_ends[:used]))
        stray = self._stray_ends(text, array[:used], outside, starts)
        cells = self._count_cells(array[:used], outside, starts, ends)
        kept = text if used == len(text) else text[:used]
        return Records(kept, starts, ends, lines, cells, stray), used

    def _count_cells(self, array: _Bytes, outside: _Bools | None, starts: _Ints, ends: _Ints) -> _Ints:
        delimiters = array == self.delimiter
        if outside is not None:
            delimiters &= outside[: len(array)]
        places = np.flatnonzero(delimiters)
        rows = len(starts)
        if rows and len(places) % rows == 0 and len(places):
            # The usual file: as many in each record, which two comparisons prove.
            table = places.reshape(rows, -1)
            if bool(np.all(table[:, 0] >= starts)) and bool(np.all(table[:, -1] < ends)):
                return np.full(rows, table.shape[1] + 1)
        return np.searchsorted(places, ends) - np.searchsorted(places, starts) + 1

    def _stray_ends(self, text: bytes, array: _Bytes, outside: _Bools | None, starts: _Ints) -> _Bools:
        """Mark the records with a line end of the other kind in the middle of a cell outside quotes."""
        marked = np.zeros(len(starts), dtype=bool)
        if self.line_end == _LF:
            if b"\r" not in text or text.count(b"\r") == text.count(b"\r\n"):
                return marked
            other = array == _CR
            other[:-1] &= array[1:] != _LF
        else:
            other = array == _LF
        if outside is not None:
            other &= outside[: len(array)]
        if len(starts):
            marked[np.searchsorted(starts, np.flatnonzero(other), side="right") - 1] = True
        return marked

    def _quotes_in_place(self, array: _Bytes) -> bool:
        """Whether every quote opens at the start of a cell, closes at its end, or is doubled."""
        places = np.flatnonzero(array == _QUOTE)
        if len(places) % 2:
            return False
        framed = np.concatenate(([_LF], array, [_LF])).astype(np.uint8)
        before, after = framed[places[::2]], framed[places[1::2] + 2]
        allowed = np.zeros(256, dtype=bool)
        allowed[[self.delimiter, self.line_end, _QUOTE]] = True
        allowed_after = allowed.copy()
        allowed_after[[_CR, _LF]] = True
        return bool(np.all(allowed[before] | (places[::2] == 0)) and np.all(allowed_after[after]))

    def _cut_by_line(self, text: bytes, line: int, *, final: bool) -> tuple[Records, int]:
        """Cut where quotes are out of place: line by line, as the csv module would read it."""
        end_byte = bytes([self.line_end])
        delimiter = bytes([self.delimiter])
        starts: list[int] = []
        ends: list[int] = []
        lines: list[int] = []
        cells: list[int] = []
        start = 0
        while start < len(text):
            end, count, taken = _record_end(text, start, delimiter, end_byte)
            if end < 0:  # the quote is never closed, as far as can be seen
                if not final and len(text) - start <= MAX_RECORD_BYTES:
                    break
                end, count, taken = _line_end(text, start, end_byte), 0, 1
            if text[end - 1 : end] != end_byte and not final:
                if len(text) - start > MAX_RECORD_BYTES:
                    raise self._too_long(line)
                break
            starts.append(start)
            ends.append(end)
            lines.append(line)
            cells.append(count)
            start, line = end, line + taken
        self.next_line = line
        if not starts and not final and len(text) > MAX_RECORD_BYTES:
            raise self._too_long(line)
        counted = np.array(cells, dtype=np.int64)
        return (
            Records(
                text[:start],
                np.array(starts, dtype=np.int64),
                np.array(ends, dtype=np.int64),
                np.array(lines, dtype=np.int64),
                counted,
                counted == 0,
            ),
            start,
        )

    def _too_long(self, line: int) -> CsvError:
        return CsvError(
            f"the line is longer than {MAX_RECORD_BYTES} bytes",
            where=f"{self.file}, line {line}",
            expected="one reading a line",
            mend="Look there for a cell that holds a whole file, or for line ends that were lost.",
        )


def _outside_quotes(array: _Bytes) -> _Bools:
    """Where an even number of quotes stands before or at each byte."""
    return np.logical_not(np.bitwise_xor.accumulate(array == _QUOTE))


def _line_end(text: bytes, start: int, end_byte: bytes) -> int:
    found = text.find(end_byte, start)
    return len(text) if found < 0 else found + 1


def _record_end(text: bytes, start: int, delimiter: bytes, end_byte: bytes) -> tuple[int, int, int]:
    """End of the record that starts here, its number of cells (0: malformed), its number of lines.

    A malformed record ends with its first line: most likely a quote was left open, and the quote of a later
    cell taken for its end; the lines between are readings of their own. (So, too, no line is looked at more
    than a few times.) The end is -1 where a quote opens that the text does not close.
    """
    first_end = end = _line_end(text, start, end_byte)
    if text.find(b'"', start, end) < 0:
        return (
            end,
            0 if _has_line_end(text[start:end], end_byte) else text.count(delimiter, start, end) + 1,
            1,
        )
    place, cells, lines = start, 1, 1
    while True:
        if text[place : place + 1] == b'"':
            close = _closing_quote(text, place + 1)
            if close < 0:
                return -1, 0, 0
            lines += text.count(end_byte, place, close)
            place = close + 1
            if text[place : place + 1] not in (delimiter, b"\r", b"\n", b""):
                return first_end, 0, 1
        end = _line_end(text, place, end_byte)
        part = text.find(delimiter, place, end)
        if _has_line_end(text[place : end if part < 0 else part], end_byte):
            return first_end, 0, 1
        if part < 0:
            return end, cells, lines
        place, cells = part + 1, cells + 1


def _has_line_end(part: bytes, end_byte: bytes) -> bool:
    """Whether a line end stands in a line, other than at its end."""
    inner = part.removesuffix(end_byte)
    if end_byte == b"\n":
        inner = inner.removesuffix(b"\r")
    return b"\r" in inner or b"\n" in inner


def _closing_quote(text: bytes, place: int) -> int:
    while True:
        close = text.find(b'"', place)
        if close < 0 or text[close + 1 : close + 2] != b'"':
            return close
        place = close + 2
