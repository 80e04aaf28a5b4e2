"""The files of an archive, cut into parts that are read one after another, and each part piece by piece.

A part is a CSV file, or a few row groups of a Parquet file; what is in memory at a time is a piece of a few
megabytes. Parquet has the columns of a file of readings under the same names. Its rows are turned to text and
judged by the reader of CSV, so that one set of rules holds for both; a bad row is named by the line on which it
would stand in a CSV file.
"""

from __future__ import annotations

import io
import os
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any, Final

import numpy as np

from analysis.errors import SettingError
from analysis.files.arrowed import parse_clean
from analysis.files.csvfile import read_table
from analysis.files.pieces import header_of, pieces_of, pieces_of_stream
from analysis.survey.parquet import columns_of, is_parquet, parquet_parts, parquet_texts

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator

    import numpy.typing as npt

    from analysis.files.reading import Reading
    from analysis.files.table import ReadingTable

_SUFFIXES: Final = (".csv", ".tsv", ".parquet", ".pq")


@dataclass(frozen=True, slots=True)
class Part:
    """What one task reads: a CSV file, or the row groups of a Parquet file whose first row is `first_row`.

    `whole`: read it at once and not in pieces, because ids made from content count equal rows of a whole file.
    """

    path: str
    row_groups: tuple[int, ...] | None = None
    first_row: int = 0
    whole: bool = False


@dataclass(frozen=True, slots=True)
class Archive:
    """The parts, and whether ids matter: not where one file without ids is all there is, each row for itself."""

    parts: tuple[Part, ...]
    ids_matter: bool


def find_archive(paths: Iterable[str | os.PathLike[str]]) -> Archive:
    """Find the files of an archive, folders and what is in them, in the order of their names.

    Raises SettingError where there is none, CsvError where one is no file of readings.
    """
    files: list[Path] = []
    given_paths = [Path(path) for path in paths]
    for given in given_paths:
        if given.is_dir():
            files += sorted(
                path
                for path in given.rglob("[!.]*")  # hidden ones are drafts of files being written
                if path.suffix.lower() in _SUFFIXES and path.is_file()
            )
        else:
            files.append(given)
    files = list(dict.fromkeys(files))
    if not files:
        raise SettingError(
            "there is no file of readings",
            where=", ".join(map(os.fspath, dict.fromkeys(given_paths))),
            expected=f"files ending in {', '.join(_SUFFIXES)}",
        )
    names = [_columns_of(path) for path in files]
    sole = len(files) == 1 and not {"reading_id", "revision"} & set(names[0])
    parts: list[Part] = []
    for path, columns in zip(files, names, strict=True):
        whole = not sole and "reading_id" not in columns
        if not is_parquet(path):
            parts.append(Part(os.fspath(path), whole=whole))
            continue
        groups, some_without_id = parquet_parts(path)
        if whole or (some_without_id and not sole):
            every = tuple(group for part, _ in groups for group in part)
            parts.append(Part(os.fspath(path), every, whole=True))
        else:
            parts += [Part(os.fspath(path), part, first) for part, first in groups]
    return Archive(tuple(parts), ids_matter=not sole)


def _columns_of(path: Path) -> tuple[str, ...]:
    return columns_of(path) if is_parquet(path) else header_of(path).names


def tables_of(part: Part) -> Iterator[ReadingTable]:
    """Read a part in pieces. Raises CsvError."""
    if part.row_groups is None:
        if part.whole:
            yield read_table(part.path, clean_parser=parse_clean)
        else:
            yield from pieces_of(part.path)
        return
    texts = parquet_texts(Path(part.path), part.row_groups)
    if part.whole:
        named = _named(part.path, b"".join(_one_header(texts)))
        yield read_table(named, clean_parser=parse_clean)
        return
    line = part.first_row
    for text in texts:
        yield from pieces_of_stream(part.path, io.BytesIO(text), lines_before=line)
        line += text.count(b"\n") - 1


def _one_header(texts: Iterable[bytes]) -> Iterator[bytes]:
    """Give pieces of CSV as one: the header line of the first only."""
    for number, text in enumerate(texts):
        yield text if number == 0 else text[text.index(b"\n") + 1 :]


class _NamedBytes(io.BytesIO):
    name = ""


def _named(name: str, text: bytes) -> io.BytesIO:
    stream = _NamedBytes(text)
    stream.name = name
    return stream


def readings_at(part: Part, rows: npt.NDArray[np.int64]) -> list[Reading]:
    """Make the records of some rows of a part, given by sorted numbers."""
    return [reading for table, places in rows_in(part, rows) for reading in table.readings(places.tolist())]


def rows_in(part: Part, rows: npt.NDArray[np.int64]) -> Iterator[tuple[ReadingTable, npt.NDArray[Any]]]:
    """Give the pieces that hold some rows of a part, given by sorted numbers, and the rows' places in each."""
    start = 0
    for table in tables_of(part):
        low, high = np.searchsorted(rows, [start, start + len(table)])
        if high > low:
            yield table, rows[low:high] - start
        start += len(table)
        if high == len(rows):
            return
