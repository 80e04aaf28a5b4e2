"""Many readings as columns: what the check of a large file works on.

A `ReadingTable` holds the good rows of one or more files in the order in which they stand there. `Reading`
records are made of its rows on demand. Tables do not change; their arrays are read-only or copies.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, datetime
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

from analysis.files import standing
from analysis.files.columns import BY_NAME, COLUMNS, CONTENT_NAMES, FEATURES, Column, Kind
from analysis.files.held import Array, Bools, Coded, dtype_of, is_coded, stored
from analysis.files.reading import Reading, cell_text, content_part, id_of_content
from analysis.orient.features import Feature
from analysis.orient.manyvectors import axis_vectors

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator, Mapping

    from analysis.files.faults import RowFault
    from analysis.files.standing import Conflict
    from analysis.orient.vectors import Floats

FEATURE_ORDER: tuple[Feature, ...] = tuple(Feature(name) for name in FEATURES)
_ID_ROWS = 20_000  # rows whose ids are made at once, likewise

Ints = npt.NDArray[np.int32]


@dataclass(frozen=True, slots=True)
class Codes:
    """A column of names: `names[codes[row]]` is the name of a row. `codes` has shape (N,)."""

    codes: Ints
    names: tuple[str, ...]

    def __getitem__(self, row: int) -> str:
        return self.names[int(self.codes[row])]


@dataclass(slots=True)
class Columns:
    """The columns of a table as they were read; a missing key is a column that no file has."""

    arrays: Mapping[str, Array]
    values: dict[str, tuple[Any, ...]]  # of the coded columns
    other_names: tuple[str, ...]
    files: tuple[str, ...]
    file_codes: Ints
    lines: Ints
    faults: tuple[RowFault, ...]
    faulty_rows: int
    # Made when first asked for.
    ids: Array | None = None
    standing: Bools | None = None
    conflicts: tuple[Conflict, ...] = ()


class ReadingTable:
    """Readings as columns, N rows in file order; see the properties for shapes and units."""

    __slots__ = ("_columns", "_feature", "_rows", "_rows_by_fold", "_vectors")

    def __init__(self, columns: Columns, rows: npt.NDArray[np.intp] | None = None) -> None:
        self._columns = columns
        self._rows = rows
        self._feature: Ints | None = None
        self._vectors: Floats | None = None
        self._rows_by_fold: dict[str, npt.NDArray[np.intp]] | None = None

    @classmethod
    def from_readings(cls, readings: Iterable[Reading]) -> ReadingTable:
        """Make a table of records, in the order given."""
        given = list(readings)
        arrays: dict[str, Array] = {}
        values: dict[str, tuple[Any, ...]] = {}
        for column in COLUMNS:
            cells = [getattr(reading, column.name) for reading in given]
            if is_coded(column):
                coded = Coded(np.empty(0, dtype=np.int32), {})
                arrays[column.name] = np.array([coded.code_of(cell) for cell in cells], dtype=np.int32)
                values[column.name] = tuple(coded.code_by_value)
            else:
                arrays[column.name] = _array([stored(cell, column) for cell in cells], column)
        other_names = tuple(sorted({name for reading in given for name in reading.other}))
        for name in other_names:
            arrays[name] = _array([reading.other.get(name, "") for reading in given], None)
        rows = np.zeros(len(given), dtype=np.int32)
        columns = Columns(arrays, values, other_names, ("",), rows, np.zeros_like(rows), (), 0)
        return cls(columns)

    def __len__(self) -> int:
        return len(self._columns.lines) if self._rows is None else len(self._rows)

    def __iter__(self) -> Iterator[Reading]:
        return (self.reading(row) for row in range(len(self)))

    # Columns ------------------------------------------------------------------------------------------

    def column(self, name: str) -> Array:
        """Give one column as it is held, shape (N,).

        Floats (NaN: none), times as datetime64[ms] in UTC (NaT: none), whole numbers (samples 0: none),
        flags, texts as objects; for names and words see `codes`. Raises KeyError for a name of no column.
        """
        array = self._columns.arrays.get(name)
        if array is None:
            column = BY_NAME[name]
            blank: Any = {"revision": 1, "reading_id": ""}.get(name, stored(None, column))
            blank = "" if column.kind is Kind.TEXT else blank
            return np.broadcast_to(np.array(blank, dtype=dtype_of(column)), len(self))
        return array if self._rows is None else array[self._rows]

    def has(self, name: str) -> bool:
        """Whether some file has a column of this name."""
        return name in self._columns.arrays

    def codes(self, name: str) -> Codes:
        """Give one column of names or words (warnings_kept: of tuples of words) as codes and names."""
        values = self._columns.values.get(name)
        if values is None:
            blank: Any = () if BY_NAME[name].kind is Kind.WORDS else BY_NAME[name].blank
            return Codes(np.broadcast_to(np.int32(0), len(self)), (blank,))
        return Codes(self.column(name), values)

    def column_or_codes(self, name: str) -> Array:
        """Give one column, or its codes, for comparing rows with each other."""
        column = BY_NAME.get(name)
        return self.codes(name).codes if column is not None and is_coded(column) else self.column(name)

    @property
    def feature(self) -> Ints:
        """Place of each row's feature in FEATURE_ORDER (bedding, cleavage, intersection, hinge), (N,)."""
        if self._feature is None:
            codes = self.codes("feature")
            places = [FEATURES.index(name) if name in FEATURES else -1 for name in codes.names]
            made: Ints = np.array([*places, -1], dtype=np.int32)[codes.codes]
            made.flags.writeable = False
            self._feature = made
        return self._feature

    @property
    def fold(self) -> Codes:
        """The fold of each row; the empty name is the unnamed fold."""
        return self.codes("fold")

    @property
    def outcrop(self) -> Codes:
        """The outcrop of each row; the empty name is the unnamed outcrop."""
        return self.codes("outcrop")

    @property
    def recorded_at(self) -> Array:
        """Time of each row, datetime64[ms] in UTC, NaT where none is given, shape (N,)."""
        return self.column("recorded_at")

    @property
    def revision(self) -> Ints:
        """Revision of each row, shape (N,)."""
        return self.column("revision")

    @property
    def struck_out(self) -> Bools:
        """Whether each row is struck out, shape (N,)."""
        return self.column("struck_out")

    @property
    def vectors(self) -> Floats:
        """Downward unit vectors, shape (N, 3): poles of planes, and lines; north, east, down."""
        if self._vectors is None:
            plane = self.feature < 2
            made = axis_vectors(
                plane,
                self._of_either(plane, "strike_deg", "trend_deg"),
                self._of_either(plane, "dip_deg", "plunge_deg"),
            )
            made.flags.writeable = False
            self._vectors = made
        return self._vectors

    def _of_either(self, plane: Bools, of_planes: str, of_lines: str) -> Floats:
        """Give one column for planes and another for lines, (N,); columns are taken only where there are some."""
        if plane.all():
            return self.column(of_planes)
        if not plane.any():
            return self.column(of_lines)
        return np.where(plane, self.column(of_planes), self.column(of_lines))

    @property
    def reading_id(self) -> Array:
        """Identity of each row, shape (N,), as objects; made from the content where the file gave none."""
        ids = self._ids()
        return ids if self._rows is None else ids[self._rows]

    @property
    def other_names(self) -> tuple[str, ...]:
        """Names of the columns that are not ours."""
        return self._columns.other_names

    # Which readings count -----------------------------------------------------------------------------

    @property
    def standing(self) -> Bools:
        """Whether each row is the one that counts, shape (N,).

        That is the highest revision of its reading in all the files of the table, and not struck out. Of
        equal rows the first counts; of different ones under one revision the one edited last.
        """
        columns = self._columns
        if columns.standing is None:
            columns.standing, columns.conflicts = standing.find(self._whole())
        return columns.standing if self._rows is None else columns.standing[self._rows]

    @property
    def conflicts(self) -> tuple[Conflict, ...]:
        """Different contents under one id and revision, in all the files of the table."""
        self.standing  # noqa: B018 - finds them
        return self._columns.conflicts

    def take(self, rows: npt.ArrayLike) -> ReadingTable:
        """Give the table of some rows: a mask, shape (N,), or row numbers in any order."""
        chosen = np.asarray(rows)
        places = np.flatnonzero(chosen) if chosen.dtype == np.bool_ else chosen.astype(np.intp)
        return ReadingTable(self._columns, places if self._rows is None else self._rows[places])

    def folds(self) -> tuple[str, ...]:
        """Names of the folds that have a standing reading, in the order of their first row."""
        return tuple(self._fold_rows())

    def of_fold(self, name: str) -> ReadingTable:
        """Give the standing readings of one fold, in file order; none for a name that is not there."""
        return self.take(self._fold_rows().get(name, np.empty(0, dtype=np.intp)))

    def by_feature(self) -> ReadingTable:
        """Give the rows of bedding, then those of cleavage, intersection and hinge, each in their order."""
        return self.take(np.argsort(self.feature.astype(np.int8), kind="stable"))

    def in_recorded_order(self) -> ReadingTable:
        """Give the rows in the order of recorded_at; a row without time stays behind the row before it."""
        times = self.recorded_at.astype(np.int64)
        known = np.maximum.accumulate(np.where(np.isnat(self.recorded_at), -1, np.arange(len(self))))
        filled = np.where(known < 0, np.iinfo(np.int64).min, times[np.maximum(known, 0)])
        return self.take(np.argsort(filled, kind="stable"))

    def _fold_rows(self) -> dict[str, npt.NDArray[np.intp]]:
        if self._rows_by_fold is None:
            standing, fold = self.standing, self.fold
            rows = None if standing.all() else np.flatnonzero(standing)
            codes = fold.codes if rows is None else fold.codes[rows]
            if len(fold.names) <= 2**16:  # sorted by radix, in a fraction of the time
                codes = codes.astype(np.uint8 if len(fold.names) <= 2**8 else np.uint16)
            ordered = np.argsort(codes, kind="stable")
            counts = np.bincount(codes, minlength=1)
            present = np.flatnonzero(counts)
            groups = np.split(ordered if rows is None else rows[ordered], np.cumsum(counts[present])[:-1])
            found = sorted(zip(present.tolist(), groups, strict=False), key=lambda group: int(group[1][0]))
            self._rows_by_fold = {fold.names[code]: group for code, group in found}
        return self._rows_by_fold

    # Rows ---------------------------------------------------------------------------------------------

    def reading(self, row: int) -> Reading:
        """Make the record of one row."""
        at = row if self._rows is None else int(self._rows[row])
        fields: dict[str, Any] = {}
        for name, array in self._columns.arrays.items():
            column = BY_NAME.get(name)
            if column is not None and name != "reading_id":
                values = self._columns.values.get(name)
                fields[name] = _value(array[at], column) if values is None else values[array[at]]
        other = {name: self._columns.arrays[name][at] for name in self.other_names}
        reading_id = str(self._ids()[at])
        return Reading(reading_id=reading_id, **fields, other=other)

    def readings(self, rows: Iterable[int] | None = None) -> list[Reading]:
        """Make the records of some rows, or of all."""
        return [self.reading(row) for row in (range(len(self)) if rows is None else rows)]

    def place(self, row: int) -> tuple[str, int]:
        """File and line of a row."""
        at = row if self._rows is None else int(self._rows[row])
        return self.files[int(self._columns.file_codes[at])], int(self._columns.lines[at])

    @property
    def files(self) -> tuple[str, ...]:
        """Names of the files read."""
        return self._columns.files

    @property
    def faults(self) -> tuple[RowFault, ...]:
        """What was wrong with the rows left out; the first thousand faults."""
        return self._columns.faults

    @property
    def faulty_rows(self) -> int:
        """How many rows were left out."""
        return self._columns.faulty_rows

    def cell_texts(self, name: str, rows: slice) -> list[str]:
        """The text of one column as written to a file, not yet quoted, for some rows."""
        column = BY_NAME.get(name)
        if column is not None and is_coded(column):
            codes = self.codes(name)
            texts = [cell_text(value, column) for value in codes.names]
            return [texts[code] for code in codes.codes[rows].tolist()]
        cells: list[Any] = (self.reading_id if name == "reading_id" else self.column(name))[rows].tolist()
        if column is None or column.kind is Kind.TEXT or name == "reading_id":
            return cells
        if column.kind is Kind.NUMBER:
            form = f"%.{column.decimals}f"
            return [form % cell if cell == cell else "" for cell in cells]  # noqa: PLR0124 - NaN is not itself
        if column.kind is Kind.WHOLE:
            return [str(cell) if cell else "" for cell in cells]
        return [cell_text(cell, column) for cell in cells]

    def _whole(self) -> ReadingTable:
        return self if self._rows is None else ReadingTable(self._columns)

    def _ids(self) -> Array:
        """Give the ids of the whole table."""
        columns = self._columns
        if columns.ids is None:
            columns.ids = self._whole()._made_ids()  # noqa: SLF001 - the same class
            columns.ids.flags.writeable = False
        return columns.ids

    def _made_ids(self) -> Array:
        given = self.column("reading_id")
        missing = np.flatnonzero(given == "")
        if not len(missing):
            return given
        ids = given.copy()
        seen: dict[tuple[int, int, str], int] = {}
        names = (*CONTENT_NAMES, *sorted(self.other_names))
        for start in range(0, len(missing), _ID_ROWS):
            part = missing[start : start + _ID_ROWS]
            rows = self.take(part)
            texts = [
                [content_part(name, text) for text in rows.cell_texts(name, slice(None))] for name in names
            ]
            keys = zip(self._columns.file_codes[part].tolist(), rows.revision.tolist(), strict=True)
            for row, (file, revision), parts in zip(
                part.tolist(), keys, zip(*texts, strict=True), strict=True
            ):
                made = id_of_content(parts)
                count = seen[file, revision, made] = seen.get((file, revision, made), 0) + 1
                ids[row] = made if count == 1 else id_of_content(parts, count)
        return ids


def _array(cells: list[Any], column: Column | None) -> Array:
    array = np.empty(len(cells), dtype=dtype_of(column))
    array[:] = cells
    array.flags.writeable = False
    return array


def _value(cell: Any, column: Column) -> Any:  # noqa: ANN401 - any value of a reading
    """Give the value of a reading for what an array holds."""
    match column.kind:
        case Kind.NUMBER:
            return None if np.isnan(cell) else float(cell)
        case Kind.WHOLE:
            return int(cell) or None
        case Kind.YES_NO:
            return bool(cell)
        case Kind.TIME:
            time: datetime | None = cell.item()
            return None if time is None else time.replace(tzinfo=UTC)
        case _:
            return cell
