"""The first line of a file of readings: how cells are parted, and which column holds what."""

from __future__ import annotations

import csv
import difflib
import re
from dataclasses import dataclass

from analysis.errors import CsvError, ReadingError
from analysis.files.cells import unguarded
from analysis.files.checked import checked_name
from analysis.files.columns import BY_NAME, DIP_DIRECTION, Column
from analysis.files.faults import shown

MAX_COLUMNS = 1000
DELIMITERS = (",", ";", "\t")
SEPARATOR_LINE = re.compile(r"sep=(.)", re.IGNORECASE)  # some spreadsheets put it before the header
BOM = b"\xef\xbb\xbf"

_PLANE = (("strike_deg", "dip_deg"), ("dip_direction_deg", "dip_deg"))
_LINE = (("trend_deg", "plunge_deg"),)
# What gives away that a file is something else: first bytes, what it is.
_OTHER_KINDS = (
    (b"PK\x03\x04", "a zip archive or a spreadsheet workbook"),
    (b"PK\x05\x06", "an empty zip archive"),
    (b"\x1f\x8b", "a compressed file (gzip)"),
    (b"BZh", "a compressed file (bzip2)"),
    (b"\xfd7zXZ", "a compressed file (xz)"),
    (b"(\xb5/\xfd", "a compressed file (zstd)"),
    (b"7z\xbc\xaf", "a compressed file (7z)"),
    (b"\xd0\xcf\x11\xe0", "an old spreadsheet workbook"),
    (b"%PDF", "a PDF document"),
    (b"SQLite format 3", "a database"),
    (b"PAR1", "a Parquet file"),
    (b"\xff\xfe", "text in UTF-16"),
    (b"\xfe\xff", "text in UTF-16"),
)
_SAVE_AS = "Open it in a spreadsheet and save it as CSV, UTF-8."


@dataclass(frozen=True, slots=True)
class Header:
    """How the rows of one file are to be read."""

    file: str
    delimiter: str
    line_end: bytes  # b"\n", or b"\r" in files of old
    names: tuple[str, ...]  # one a column, as in the file
    unnamed: frozenset[str]  # names given to columns that had none
    first_line: int  # the line of the first row

    @property
    def other_names(self) -> tuple[str, ...]:
        """Names of the columns that are not ours."""
        return tuple(name for name in self.names if column_named(name) is None)


def column_named(name: str) -> Column | None:
    """The column of ours with this name, or None."""
    return DIP_DIRECTION if name == DIP_DIRECTION.name else BY_NAME.get(name)


def refuse_other_kinds(file: str, start: bytes) -> None:
    """Raise CsvError where the first bytes of a file show that it is no CSV."""
    for magic, kind in _OTHER_KINDS:
        if start.startswith(magic):
            raise CsvError(f"this is {kind}", where=file, expected="CSV in UTF-8", mend=_SAVE_AS)
    if b"\0" in start.partition(b"\n")[0]:
        raise CsvError("this is no text", where=file, expected="CSV in UTF-8", mend=_SAVE_AS)
    if not start.removeprefix(BOM).strip():
        raise CsvError(
            "the file is empty",
            where=file,
            expected="a header line and a row for each reading",
            mend="Hand the readings over again.",
        )


def parse_header(file: str, line: bytes, *, first_line: int, line_end: bytes) -> Header:
    """Read the header line; raises CsvError where it is none of ours, saying what is missing."""
    try:
        text = line.decode()
    except UnicodeDecodeError as error:
        raise CsvError(
            f"byte {line[error.start]:#04x} at place {error.start + 1} is no UTF-8",
            where=f"{file}, line {first_line - 1}",
            expected="CSV in UTF-8",
            mend=_SAVE_AS,
        ) from None
    delimiter, cells = _best_cells(text)
    if delimiter == "," and text.rstrip().endswith(";"):
        raise CsvError(
            "all cells of a row stand in the first column",
            where=file,
            expected="a column for each name",
            mend="Hand the readings over again, and open that file with the comma as the mark that parts cells.",
        )
    if len(cells) > MAX_COLUMNS:
        raise CsvError(
            f"the header has {len(cells)} columns",
            where=file,
            expected=f"at most {MAX_COLUMNS}",
            mend="Delete the columns that do not belong to the readings.",
        )
    names, unnamed = _named(file, cells)
    _require(file, names)
    return Header(file, delimiter, line_end, names, unnamed, first_line)


def _best_cells(text: str) -> tuple[str, list[str]]:
    """The way of parting that finds most of our names, then most cells."""
    best: tuple[tuple[int, int], str, list[str]] | None = None
    for delimiter in DELIMITERS:
        try:
            row = next(csv.reader([text], delimiter=delimiter), [])
        except csv.Error:  # a cell longer than the csv module takes
            continue
        cells = [unguarded(cell.strip()).strip() for cell in row]
        rank = (sum(column_named(cell) is not None for cell in cells), len(cells))
        if best is None or rank > best[0]:
            best = (rank, delimiter, cells)
    return (best[1], best[2]) if best else (",", [])


def _named(file: str, cells: list[str]) -> tuple[tuple[str, ...], frozenset[str]]:
    names: list[str] = []
    unnamed = set()
    seen: set[str] = set()
    for place, cell in enumerate(cells, start=1):
        name = cell
        if name in seen and column_named(name) is not None:
            raise CsvError(
                f"the column {name} stands there twice",
                where=file,
                expected="each column once",
                mend="Delete or rename one of the two.",
            )
        if column_named(name) is None:
            try:
                name = checked_name(name, f"column {place}")
            except ReadingError as error:
                raise CsvError(error.what, where=f"{file}, {error.where}", expected=error.expected) from None
        if not name:
            name = f"column {place}"
            unnamed.add(name)
        number = 2
        first_name = name
        while name in seen:
            name, number = f"{first_name[:180]} ({number})", number + 1
        seen.add(name)
        names.append(name)
    return tuple(names), frozenset(unnamed)


def _require(file: str, names: tuple[str, ...]) -> None:
    if "feature" not in names:
        raise _missing(file, names, "feature", "a column named feature")
    if not any(set(pair) <= set(names) for pair in _PLANE + _LINE):
        raise _missing(
            file, names, "dip_deg", "the columns strike_deg and dip_deg, or trend_deg and plunge_deg"
        )


def _missing(file: str, names: tuple[str, ...], name: str, expected: str) -> CsvError:
    near = difflib.get_close_matches(name, [given.lower()[:60] for given in names[:MAX_COLUMNS]], n=1)
    found = ", ".join(shown(given) for given in names[:8]) + (" ..." if len(names) > 8 else "")
    mend = f"Is {shown(near[0])} meant? Rename it {name}." if near else "Put the names of the columns first."
    return CsvError(f"the first line names {found}", where=file, expected=expected, mend=mend)
