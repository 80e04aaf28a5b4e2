"""Files of readings, in and out.

    table = read_table("mossgarth.csv")          # columns; table.readings() makes records
    write_readings("handed-over.csv", table)     # or any iterable of readings

Reading takes what spreadsheets make of such a file (see `analysis.files.cells` and `header`); a bad row is
left out and listed in `table.faults`. Writing is atomic: the file is there whole or not at all.
"""

from __future__ import annotations

import contextlib
import os
from collections import deque
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import Future, ThreadPoolExecutor
from itertools import chain
from pathlib import Path
from typing import TYPE_CHECKING, BinaryIO, cast

from analysis.errors import CsvError
from analysis.files.atomic import whole_file
from analysis.files.blocks import MAX_BAD_ROWS, BlockReader, ReadBlock, hopeless
from analysis.files.builder import TableBuilder
from analysis.files.cells import quoted
from analysis.files.columns import BY_NAME, NAMES, Kind
from analysis.files.faults import FaultLog, RowFault
from analysis.files.held import is_coded
from analysis.files.records import RecordFile
from analysis.files.table import ReadingTable

if TYPE_CHECKING:
    from analysis.files.frames import CleanParser
    from analysis.files.reading import Reading

Source = str | os.PathLike[str] | BinaryIO
Progress = Callable[[float], None]

_MAX_WORKERS = 4  # threads; parsing leaves Python's lock to others most of the time
_WRITE_ROWS = 20_000  # rows turned to text at once
# Cells that never need quotes or an apostrophe. It would make text of a negative number, which is a number to
# every spreadsheet, and stand before each true of north_reference, which is read whatever becomes of it.
_UNQUOTED = (Kind.NUMBER, Kind.WHOLE, Kind.YES_NO, Kind.TIME, Kind.WORD)


def read_table(
    *sources: Source,
    strict: bool = False,
    progress: Progress | None = None,
    clean_parser: CleanParser | None = None,
) -> ReadingTable:
    """Read files of readings into one table.

    Parameters
    ----------
    sources
        Paths, or binary streams (named in messages by their `name`).
    strict
        Refuse a file with a bad row instead of leaving the row out.
    progress
        Called with the share read so far, 0 to 1; not called for streams of unknown length.
    clean_parser
        What to parse clean blocks with in place of pandas, such as `analysis.files.arrowed.parse_clean`; nothing
        but the time depends on it.

    Raises
    ------
    CsvError
        For a file that cannot be opened, is no CSV of readings, or, if strict, has a bad row.

    """
    log = FaultLog()
    builder = TableBuilder()
    lengths = [_length(source) for source in sources]
    whole = sum(length for length in lengths if length is not None)
    done = 0
    for source, length in zip(sources, lengths, strict=True):
        file = _name(source)
        with _opened(source) as stream:
            try:
                records = RecordFile(file, stream)
                builder.start_file(file, records.header.other_names, records.header.unnamed)
                for read, bytes_read in _read_blocks(records, clean_parser):
                    builder.add(read.block)
                    log.add_rows(read.faults)
                    if strict and log.rows:
                        raise log.refuse()
                    if log.rows > max(MAX_BAD_ROWS, builder.rows):
                        raise hopeless(log.rows, log.kept[0])
                    if progress is not None and whole and length is not None:
                        progress(min(1.0, (done + bytes_read) / whole))
            except OSError as error:
                raise _unreadable(file, error) from error
        done += length or 0
    if progress is not None and whole:
        progress(1.0)
    return builder.build(log.kept, log.rows)


def _read_blocks(records: RecordFile, clean_parser: CleanParser | None) -> Iterator[tuple[ReadBlock, int]]:
    """Read the blocks of a file in their order, several at once; with the bytes read so far."""
    reader = BlockReader(records.header, clean_parser)
    blocks = iter(records)
    first = next(blocks, None)
    if first is None:
        return
    second = next(blocks, None)
    if second is None:  # most files are one block: no thread for those
        yield reader.read(first), records.bytes_read
        return
    workers = min(_MAX_WORKERS, os.cpu_count() or 1)
    with ThreadPoolExecutor(workers) as pool:
        waiting: deque[tuple[Future[ReadBlock], int]] = deque()
        try:
            for block in chain((first, second), blocks):
                waiting.append((pool.submit(reader.read, block), records.bytes_read))
                if len(waiting) > workers:
                    future, bytes_read = waiting.popleft()
                    yield future.result(), bytes_read
            while waiting:
                future, bytes_read = waiting.popleft()
                yield future.result(), bytes_read
        finally:
            for future, _ in waiting:
                future.cancel()


def read_readings(
    *sources: Source, strict: bool = False, progress: Progress | None = None
) -> tuple[list[Reading], tuple[RowFault, ...]]:
    """Read files of readings into records, every revision, in file order; and the faults of the bad rows."""
    table = read_table(*sources, strict=strict, progress=progress)
    return table.readings(), table.faults


def write_readings(
    path: str | os.PathLike[str],
    readings: ReadingTable | Iterable[Reading],
    *,
    progress: Progress | None = None,
) -> None:
    """Write readings to a file, in the order given, every column, UTF-8.

    The file is written beside its place under another name, flushed to disk and renamed, so that it is never
    there in part. Raises CsvError where the folder cannot be written to; nothing is left behind then.
    """
    table = readings if isinstance(readings, ReadingTable) else ReadingTable.from_readings(readings)
    # "x": never over a file that is there already, and with the permissions any new file gets.
    with whole_file(path) as draft, draft.open("x", encoding="utf-8", newline="") as stream:
        for row, text in _texts(table):
            stream.write(text)
            if progress is not None and len(table):
                progress(row / len(table))


def csv_text(readings: ReadingTable | Iterable[Reading]) -> Iterator[str]:
    """Yield the text of a file of readings in pieces of whole lines, the header first."""
    table = readings if isinstance(readings, ReadingTable) else ReadingTable.from_readings(readings)
    return (text for _, text in _texts(table))


def _texts(table: ReadingTable) -> Iterator[tuple[int, str]]:
    yield 0, ",".join(map(quoted, (*NAMES, *table.other_names))) + "\n"
    for start in range(0, len(table), _WRITE_ROWS):
        rows = slice(start, min(start + _WRITE_ROWS, len(table)))
        cells = [_cells(table, name, rows) for name in (*NAMES, *table.other_names)]
        yield rows.stop, "".join(",".join(row) + "\n" for row in zip(*cells, strict=True))


def _cells(table: ReadingTable, name: str, rows: slice) -> Iterable[str]:
    texts = table.cell_texts(name, rows)
    column = BY_NAME.get(name)
    if column is not None and column.kind in _UNQUOTED:
        return texts
    if column is not None and is_coded(column):  # few different texts: each is looked at once
        cells = {text: quoted(text) for text in set(texts)}
        return map(cells.__getitem__, texts)
    return map(quoted, texts)


def _name(source: Source) -> str:
    if isinstance(source, str | os.PathLike):
        return os.fspath(source)
    return str(getattr(source, "name", "stream"))


def _length(source: Source) -> int | None:
    if not isinstance(source, str | os.PathLike):
        return None
    with contextlib.suppress(OSError, ValueError):
        return Path(source).stat().st_size
    return None


@contextlib.contextmanager
def _opened(source: Source) -> Iterator[BinaryIO]:
    if not isinstance(source, str | os.PathLike):
        yield source
        return
    try:
        stream = Path(source).open("rb")  # noqa: SIM115 - closed below
    except (OSError, ValueError) as error:
        raise _unreadable(os.fspath(source), error) from error
    with stream:
        yield cast("BinaryIO", stream)


def _unreadable(file: str, error: OSError | ValueError) -> CsvError:
    reason = (error.strerror if isinstance(error, OSError) else None) or str(error)
    return CsvError(
        f"cannot be read: {reason}", where=file, expected="a file of readings", mend="Look at the path."
    )
