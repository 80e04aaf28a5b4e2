"""A file of readings piece by piece, for files that do not fit into memory."""

from __future__ import annotations

import os
from dataclasses import replace
from typing import TYPE_CHECKING, BinaryIO

from analysis.errors import CsvError
from analysis.files.arrowed import parse_clean
from analysis.files.blocks import BlockReader
from analysis.files.builder import TableBuilder
from analysis.files.records import RecordFile

if TYPE_CHECKING:
    from collections.abc import Iterator

    from analysis.files.header import Header
    from analysis.files.table import ReadingTable


def pieces_of(path: str | os.PathLike[str]) -> Iterator[ReadingTable]:
    """Read a file in pieces of a few megabytes, each a table of its good rows and the faults of its bad ones.

    `standing` and made ids of a piece know that piece only. Raises CsvError as `read_table` does.
    """
    file = os.fspath(path)
    try:
        with open(path, "rb") as stream:  # noqa: PTH123 - a path given as text is reported as given
            yield from pieces_of_stream(file, stream)
    except (OSError, ValueError) as error:
        if isinstance(error, CsvError):
            raise
        reason = (error.strerror if isinstance(error, OSError) else None) or str(error)
        raise CsvError(
            f"cannot be read: {reason}", where=file, expected="a file of readings", mend="Look at the path."
        ) from error


def pieces_of_stream(file: str, stream: BinaryIO, *, lines_before: int = 0) -> Iterator[ReadingTable]:
    """Read an open file in pieces, as `pieces_of`; `file` names it in messages, whose lines begin after others."""
    records = RecordFile(file, stream)
    reader = BlockReader(records.header, parse_clean)
    for block in records:
        read = reader.read(block)
        builder = TableBuilder()
        builder.start_file(file, records.header.other_names, records.header.unnamed)
        builder.add(read.block)
        faults = [
            replace(fault, line=fault.line + lines_before) for faults in read.faults for fault in faults
        ]
        yield builder.build(faults, len(read.faults))


def header_of(path: str | os.PathLike[str]) -> Header:
    """Read the first line of a file; raises CsvError."""
    file = os.fspath(path)
    try:
        with open(path, "rb") as stream:  # noqa: PTH123 - as above
            return RecordFile(file, stream).header
    except OSError as error:
        raise CsvError(
            f"cannot be read: {error.strerror or error}", where=file, expected="a file of readings"
        ) from error
