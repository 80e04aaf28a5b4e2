"""One row of a file made into a reading, cell by cell: the judge of every row that the fast reader doubts."""

from __future__ import annotations

import csv
from typing import TYPE_CHECKING

from analysis.errors import CsvError, ReadingError
from analysis.files.cells import CellValue, cell_value, unguarded
from analysis.files.columns import DIP_DIRECTION
from analysis.files.faults import RowFault, shown
from analysis.files.header import column_named
from analysis.files.reading import CONTENT_SPACE, Reading

if TYPE_CHECKING:
    from analysis.files.header import Header

# Stands for an id that is yet to be made from the content; an id no content has, that leaves this package never.
NO_ID = str(CONTENT_SPACE)
# Strike and dip direction of one row may differ by this much, in degrees, and still be one measurement.
SAME_STRIKE_DEG = 0.5


def judge_row(
    record: bytes, header: Header, line: int, *, malformed: bool = False, cut_off: bool = False
) -> Reading | list[RowFault] | None:
    """Make a reading of one record, or the list of its faults; None where all cells are empty.

    A reading without id gets the id NO_ID. `malformed`: quotes or line ends are out of place. `cut_off`: the
    file ends without a line end, so that a record with too few cells may have lost some.
    """
    if not record.strip(b' "\r\n' + header.delimiter.encode()):
        return None
    try:
        cells = _split(record, header, malformed=malformed, cut_off=cut_off)
    except CsvError as error:
        return [RowFault(header.file, line, "", error.what, error.expected, error.mend)]
    return _judge_cells(dict(zip(header.names, cells, strict=True)), header, line)


def _split(record: bytes, header: Header, *, malformed: bool, cut_off: bool) -> list[str]:
    """Cut a record into as many cells as the header has; raises CsvError."""
    try:
        text = record.decode()
    except UnicodeDecodeError as error:
        around = record[max(0, error.start - 20) : error.start + 20].decode(errors="replace")
        found = f"byte {record[error.start]:#04x} in {shown(around)}"
        raise CsvError(found, expected="text in UTF-8", mend="Save the file as CSV, UTF-8.") from None
    if malformed:
        raise CsvError(
            f"a quote or a line end out of place in {shown(text)}",
            expected="quotes round a whole cell, and quotes inside it doubled",
            mend='Write "a ""b"" c" for a "b" c, or take the quotes away.',
        )
    try:
        cells = next(csv.reader([text], delimiter=header.delimiter), [])
    except csv.Error as error:
        raise CsvError(f"{error} in {shown(text)}", expected="one reading a line") from None
    wanted = len(header.names)
    if len(cells) == 1:
        cells = _out_of_one_cell(cells[0], header.delimiter)
    if len(cells) > wanted and any(cells[wanted:]):
        raise CsvError(
            f"{len(cells)} cells",
            expected=f"{wanted} cells, as in the header",
            mend="Quote cells that hold a comma, or write decimals with a point.",
        )
    if len(cells) < wanted and cut_off:
        raise CsvError(
            f"{len(cells)} cells, and the file ends there",
            expected=f"{wanted} cells, as in the header",
            mend="The file was cut off: hand it over again.",
        )
    return cells[:wanted] + [""] * (wanted - len(cells))


def _out_of_one_cell(cell: str, delimiter: str) -> list[str]:
    """Cut a row that a spreadsheet took for one cell: it puts quotes round those rows that hold quotes."""
    try:
        return next(csv.reader([cell], delimiter=delimiter, strict=True), [])
    except csv.Error:  # a text of several lines, cut after the first
        raise CsvError(
            f"a row in one cell, and a quote left open in it, in {shown(cell)}",
            expected="one reading a line",
            mend="Hand the readings over again, and open that file with the comma as what parts its cells.",
        ) from None


def _judge_cells(cells: dict[str, str], header: Header, line: int) -> Reading | list[RowFault]:
    values: dict[str, object] = {}
    other: dict[str, str] = {}
    faults: list[RowFault] = []
    for name, cell in cells.items():
        column = column_named(name)
        try:
            if column is None:
                other[name] = unguarded(cell)
            else:
                values[name] = cell_value(cell, column, header.delimiter)
        except ReadingError as error:
            faults.append(RowFault(header.file, line, name, shown(cell), error.expected, error.mend))
    if faults:
        return faults
    try:
        _take_dip_direction(values)
        values["reading_id"] = values.get("reading_id") or NO_ID
        return Reading(**values, other=other)  # type: ignore[arg-type]  # each value comes from its column
    except ReadingError as error:
        found = shown(cells[error.where]) if error.where in cells else "no such column"
        return [
            RowFault(header.file, line, error.where, f"{found}: {error.what}", error.expected, error.mend)
        ]


def _take_dip_direction(values: dict[str, CellValue | object]) -> None:
    """Turn a dip direction into the strike; raises ReadingError where both stand there and differ."""
    direction = values.pop(DIP_DIRECTION.name, None)
    if not isinstance(direction, float):
        return
    strike = (direction - 90.0) % 360.0
    given = values.get("strike_deg")
    if given is None:
        values["strike_deg"] = strike
    elif isinstance(given, float) and abs((given - strike + 180.0) % 360.0 - 180.0) > SAME_STRIKE_DEG:
        raise ReadingError(
            f"dip direction {direction:g} does not belong to strike {given:g}",
            where=DIP_DIRECTION.name,
            expected=f"{(given + 90.0) % 360.0:g}, by the right-hand rule",
            mend="Delete one of the two, or mend the one that is wrong.",
        )
