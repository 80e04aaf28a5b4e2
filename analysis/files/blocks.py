"""A block of records made into columns, all rows at once.

The fast reader takes only what it is sure of: every row that fails one of its array checks goes to the judge
of single rows, who either mends it (a decimal comma, a space) or says what is wrong with it. So the rules
stand in `Reading` and `cells`; the checks here may be stricter than those, never laxer.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import pandas as pd

from analysis.errors import CsvError
from analysis.files.columns import MAX_TEXT
from analysis.files.filled import check_together, values_of
from analysis.files.frames import FrameReader
from analysis.files.header import column_named
from analysis.files.held import Block, Bools, Held
from analysis.files.reading import Reading
from analysis.files.rows import judge_row

if TYPE_CHECKING:
    from analysis.files.faults import RowFault
    from analysis.files.frames import CleanParser
    from analysis.files.header import Header
    from analysis.files.held import Parsed
    from analysis.files.records import Records

HOPELESS_ROWS = 10_000  # so many bad rows at the start, and not one good, are enough to know
MAX_BAD_ROWS = 20_000  # or so many, and fewer good ones
MAX_BAD_IN_BLOCK = 100_000


@dataclass(frozen=True, slots=True)
class ReadBlock:
    """A block of good rows, and the faults of each bad one."""

    block: Block
    faults: list[list[RowFault]]


class BlockReader:
    """Turns the records of one file into blocks of columns; blocks may be read in several threads at once."""

    def __init__(self, header: Header, clean_parser: CleanParser | None = None) -> None:
        self.header = header
        self._columns = [column_named(name) for name in header.names]
        self._frames = FrameReader(header, self._columns, clean_parser)

    def read(self, records: Records) -> ReadBlock:
        """Make columns of the good rows; raises CsvError where a file begins with nothing but bad rows."""
        parsed, doubtful = self._parsed(records)
        text = records.text
        plain = b"'" not in text and (b"\r" not in text or b'"' not in text)
        columns: dict[str, Held] = {}
        for name, column, cells in zip(self.header.names, self._columns, parsed, strict=True):
            columns[name] = values_of(cells, column, doubtful, self.header.delimiter, plain=plain)
        check_together(columns, doubtful)
        block = Block(columns, records.lines)
        faults = self._judge(records, block, doubtful) if doubtful.any() else []
        return ReadBlock(block, faults)

    def _parsed(self, records: Records) -> tuple[list[Parsed], Bools]:
        """Parse the records, and mark those that the parser must not see."""
        text, wanted = records.text, len(self.header.names)
        if records.seem_even(wanted, MAX_TEXT) and b"\0" not in text and _is_utf8(text):
            try:
                return self._frames.read(text, len(records)), np.zeros(len(records), dtype=bool)
            except pd.errors.ParserError:
                pass  # one record is longer, another shorter
        hidden = self._not_parsable(records)
        some_short = int(np.max(records.cells, initial=0, where=~hidden)) < wanted
        text = _blanked(records, hidden, self.header.line_end)
        return self._frames.read(text, len(records), some_short=some_short), hidden

    def _not_parsable(self, records: Records) -> Bools:
        text = records.text
        marked = records.malformed | (records.cells > len(self.header.names))
        marked |= records.ends - records.starts > MAX_TEXT
        if not _is_utf8(text):
            high = np.flatnonzero(np.frombuffer(text, dtype=np.uint8) >= 0x80)
            for row in np.unique(np.searchsorted(records.starts, high, side="right") - 1).tolist():
                marked[row] |= not _is_utf8(records.record(row))
        if b"\0" in text:
            zeros = np.flatnonzero(np.frombuffer(text, dtype=np.uint8) == 0)
            marked[np.searchsorted(records.starts, zeros, side="right") - 1] = True
        if len(records) and not text.endswith(self.header.line_end):
            marked[-1] |= records.cells[-1] < len(self.header.names)
        return marked

    def _judge(self, records: Records, block: Block, doubtful: Bools) -> list[list[RowFault]]:
        """Judge the doubtful rows one by one; the mended ones are written into the block, the bad ones drop."""
        good = ~doubtful
        ended = records.text.endswith(self.header.line_end)
        begins = len(records) > 0 and int(block.lines[0]) == self.header.first_line
        faults: list[list[RowFault]] = []
        some_good = bool(good.any())
        for row in np.flatnonzero(doubtful).tolist():
            verdict = judge_row(
                records.record(row),
                self.header,
                int(block.lines[row]),
                malformed=bool(records.malformed[row]),
                cut_off=not ended and row == len(records) - 1,
            )
            if isinstance(verdict, Reading):
                block.put(row, verdict)
                good[row] = some_good = True
            elif verdict is not None:
                faults.append(verdict)
                if len(faults) >= (MAX_BAD_IN_BLOCK if some_good or not begins else HOPELESS_ROWS):
                    raise hopeless(len(faults), faults[0][0])
        block.keep(good)
        return faults


def hopeless(rows: int, first: RowFault) -> CsvError:
    """Make the error that gives a file up."""
    return CsvError(
        f"{rows} rows are no readings; the first: {first}",
        where=first.file,
        expected="a file of readings",
        mend="Mend that, and what is like it.",
    )


def _is_utf8(text: bytes) -> bool:
    if not text.isascii():
        try:
            text.decode()
        except UnicodeDecodeError:
            return False
    return True


def _blanked(records: Records, rows: Bools, line_end: bytes) -> bytes:
    """The text with these records made empty, so that the others keep their places."""
    if not rows.any():
        return records.text
    parts: list[bytes] = []
    start = 0
    for row in np.flatnonzero(rows).tolist():
        parts += (records.text[start : records.starts[row]], line_end)
        start = int(records.ends[row])
    return b"".join([*parts, records.text[start:]])
