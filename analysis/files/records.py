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

BLOCK_BYTES = 2 * 2**20
MAX_RECORD_BYTES = 4 * 2**20  # longer than any reading that can be written
_COUNT_BYTES = 2**18  # looked at together: few enough to stay near the processor

_QUOTE, _CR, _LF = b'"\r\n'
_Ints = npt.NDArray[np.int64]
_Bytes = npt.NDArray[np.uint8]
_Bools = npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Cut:
    """Where records stand in their text.

    `starts` and `ends` are offsets into the text, `lines` the line numbers where records start, `malformed`
    marks those whose quotes or line ends are out of place. `cells` counts the cells of each record; 0 where
    it is malformed.
    """

    starts: _Ints
    ends: _Ints
    lines: _Ints
    cells: _Ints
    malformed: _Bools


class Records:
    """Whole records of a file, each with its line end.

    Simple text, without quotes and with no line end but those of its records, is cut only when somebody asks
    where one of them stands, which nobody does while all is well.
    """

    __slots__ = ("_count", "_cut", "_cutter", "_line", "text")

    def __init__(self, text: bytes, line: int, cutter: _Cutter, cut: Cut | None = None) -> None:
        self.text = text
        self._line = line
        self._cutter = cutter
        self._cut = cut
        self._count = cutter.count_lines(text) if cut is None else len(cut.starts)

    def __len__(self) -> int:
        return self._count

    @property
    def starts(self) -> _Ints:
        """Offset of each record in the text."""
        return self._found().starts

    @property
    def ends(self) -> _Ints:
        """Offset of the end of each record, its line end included."""
        return self._found().ends

    @property
    def cells(self) -> _Ints:
        """Number of cells of each record; 0 where it is malformed."""
        return self._found().cells

    @property
    def malformed(self) -> _Bools:
        """Whether quotes or line ends of each record are out of place."""
        return self._found().malformed

    @property
    def lines(self) -> npt.NDArray[np.int32]:
        """Line number where each record starts."""
        if self._cut is None:
            return np.arange(self._line, self._line + self._count, dtype=np.int32)
        return self._cut.lines.astype(np.int32)

    def record(self, index: int) -> bytes:
        """The bytes of one record, without its line end."""
        return self.text[self.starts[index] : self.ends[index]].rstrip(b"\r\n")

    def _found(self) -> Cut:
        if self._cut is None:
            self._cut = self._cutter.cut_by_arrays(self.text, self._line, None)
        return self._cut

    def seem_even(self, cells: int, longest: int) -> bool:
        """Whether each record has so many cells and at most so many bytes, as far as can be seen at a glance.

        Of simple text the cells are counted together, so that a record with more may make up for one with fewer:
        a parser that gets the text finds the longer one.
        """
        if self._cut is not None:
            cut = self._cut
            short = bool(np.all(cut.ends - cut.starts <= longest))
            return short and bool(np.all((cut.cells == cells) & ~cut.malformed))
        return self._cutter.counts_agree(self.text, self._count, cells) and self._cutter.lines_are_short(
            self.text, longest
        )


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
        end_byte = bytes([self.line_end])
        if b'"' not in text:
            used = len(text) if final else text.rfind(end_byte) + 1
            kept = text if used == len(text) else text[:used]
            if used and not self._has_stray_ends(kept):
                records = Records(kept, line, self)
                self.next_line = line + len(records)
                return records, used
        array = np.frombuffer(text, dtype=np.uint8)
        outside = None if b'"' not in text else _outside_quotes(array)
        used = _last(array == self.line_end if outside is None else (array == self.line_end) & outside) + 1
        if final and used < len(text) and (outside is None or bool(outside[-1])):
            used = len(text)
        # An open quote at the end of the file, or one that stays open too long, is looked at line by line.
        unclosed = used == 0 if not final else used < len(text)
        if unclosed and (final or len(text) > MAX_RECORD_BYTES):
            return self._cut_by_line(text, line, final=final)
        if outside is not None and not self._quotes_in_place(array[:used]):
            return self._cut_by_line(text, line, final=final)
        kept = text if used == len(text) else text[:used]
        self.next_line = line + kept.count(end_byte)
        outside = None if outside is None else outside[:used]
        return Records(kept, line, self, self.cut_by_arrays(kept, line, outside)), used

    def cut_by_arrays(self, text: bytes, line: int, outside: _Bools | None) -> Cut:
        """Cut whole records whose quotes are in place; `outside` marks the bytes outside quotes, if there are any."""
        array = np.frombuffer(text, dtype=np.uint8)
        line_ends = np.flatnonzero(array == self.line_end)
        breaks = line_ends if outside is None else line_ends[outside[line_ends]]
        ends = breaks + 1
        if len(text) and (not len(ends) or ends[-1] < len(text)):
            ends = np.append(ends, len(text))
        starts = np.concatenate(([0], ends[:-1])) if len(ends) else ends
        if len(breaks) == len(line_ends):
            lines = line + np.arange(len(starts))
        else:
            lines = line + np.searchsorted(line_ends, starts)
        stray = self._stray_ends(text, array, outside, starts)
        return Cut(starts, ends, lines, self._count_cells(array, outside, starts, ends), stray)

    def count_lines(self, text: bytes) -> int:
        """Number of lines; the last may lack its end."""
        ended = not text or text[-1] == self.line_end
        return _count(text, self.line_end) + (0 if ended else 1)

    def counts_agree(self, text: bytes, rows: int, cells: int) -> bool:
        """Whether simple text has cells for so many rows, and its first row as many as it should."""
        first = text[: _line_end(text, 0, bytes([self.line_end]))]
        return _count(text, self.delimiter) == rows * (cells - 1) == rows * _count(first, self.delimiter)

    def lines_are_short(self, text: bytes, longest: int) -> bool:
        """Whether every line ends soon; False may be a false alarm, for a line of more than half that length."""
        step = longest // 2
        end_byte = bytes([self.line_end])
        return all(text.find(end_byte, at, at + step) >= 0 for at in range(0, len(text) - step, step))

    def _count_cells(self, array: _Bytes, outside: _Bools | None, starts: _Ints, ends: _Ints) -> _Ints:
        delimiters = array == self.delimiter
        if outside is not None:
            delimiters &= outside
        places = np.flatnonzero(delimiters)
        rows = len(starts)
        if rows and len(places) % rows == 0 and len(places):
            # The usual file: as many in each record, which two comparisons prove.
            table = places.reshape(rows, -1)
            if bool(np.all(table[:, 0] >= starts)) and bool(np.all(table[:, -1] < ends)):
                return np.full(rows, table.shape[1] + 1)
        return np.searchsorted(places, ends) - np.searchsorted(places, starts) + 1

    def _has_stray_ends(self, text: bytes) -> bool:
        """Whether a line end of the other kind stands somewhere, also if in quotes."""
        if self.line_end == _LF:
            return b"\r" in text and text.count(b"\r") != text.count(b"\r\n")
        return b"\n" in text

    def _stray_ends(self, text: bytes, array: _Bytes, outside: _Bools | None, starts: _Ints) -> _Bools:
        """Mark the records with a line end of the other kind in the middle of a cell outside quotes."""
        marked = np.zeros(len(starts), dtype=bool)
        if not self._has_stray_ends(text):
            return marked
        other = array == (_CR if self.line_end == _LF else _LF)
        if self.line_end == _LF:
            other[:-1] &= array[1:] != _LF
        if outside is not None:
            other &= outside
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
        places = [np.array(each, dtype=np.int64) for each in (starts, ends, lines)]
        cut = Cut(places[0], places[1], places[2], counted, counted == 0)
        return Records(text[:start], line, self, cut), start

    def _too_long(self, line: int) -> CsvError:
        return CsvError(
            f"the line is longer than {MAX_RECORD_BYTES} bytes",
            where=f"{self.file}, line {line}",
            expected="one reading a line",
            mend="Look there for a cell that holds a whole file, or for line ends that were lost.",
        )


def _count(text: bytes, byte: int) -> int:
    array = np.frombuffer(text, dtype=np.uint8)
    return sum(
        int(np.count_nonzero(array[at : at + _COUNT_BYTES] == byte))
        for at in range(0, len(text), _COUNT_BYTES)
    )


def _last(marks: _Bools) -> int:
    """Place of the last mark; -1 where there is none."""
    return len(marks) - 1 - int(np.argmax(marks[::-1])) if marks.any() else -1


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
    """Whether a line end stands in a line, or in a part of it, other than at the line's own end."""
    inner = part.removesuffix(end_byte)
    if end_byte == b"\n" and len(inner) < len(part):
        inner = inner.removesuffix(b"\r")
    return b"\r" in inner or b"\n" in inner


def _closing_quote(text: bytes, place: int) -> int:
    while True:
        close = text.find(b'"', place)
        if close < 0 or text[close + 1 : close + 2] != b'"':
            return close
        place = close + 2
