"""A block of records made into columns, all rows at once.

The fast reader takes only what it is sure of: every row that fails one of its array checks goes to the judge
of single rows, who either mends it (a decimal comma, a space) or says what is wrong with it. So the rules
stand in `Reading` and `cells`; the checks here may be stricter than those, never laxer.
"""

from __future__ import annotations

import io
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt
import pandas as pd

from analysis.errors import CsvError, ReadingError
from analysis.files.cells import cell_value, unguarded
from analysis.files.columns import BY_NAME, DIP_DIRECTION, MAX_NAME, MAX_TEXT, QUADRANTS, Column, Kind
from analysis.files.header import column_named
from analysis.files.reading import QUADRANT_FITS_DEG, Reading, with_plain_line_ends
from analysis.files.rows import NO_ID, SAME_STRIKE_DEG, judge_row

if TYPE_CHECKING:
    from collections.abc import Hashable
    from datetime import datetime

    from analysis.files.faults import RowFault
    from analysis.files.header import Header
    from analysis.files.records import Records

HOPELESS_ROWS = 10_000  # so many bad rows at the start, and not one good, are enough to know
MAX_BAD_ROWS = 20_000  # or so many, and fewer good ones
MAX_BAD_IN_BLOCK = 100_000

Array = npt.NDArray[Any]
Bools = npt.NDArray[np.bool_]

_CODED = (Kind.NAME, Kind.WORD, Kind.WORDS)
NO_TIME = np.datetime64("NaT", "ms")


@dataclass(slots=True)
class Coded:
    """A column of few different values: a code for each row, and the value of each code."""

    codes: npt.NDArray[np.int32]
    code_by_value: dict[Any, int]

    def code_of(self, value: Hashable) -> int:
        """The code of a value, a new one if need be."""
        return self.code_by_value.setdefault(value, len(self.code_by_value))


@dataclass(slots=True)
class Block:
    """Rows as columns: floats (NaN: none), times (NaT: none), whole numbers (0: none), flags, codes, text."""

    columns: dict[str, Array | Coded]
    lines: npt.NDArray[np.int32]

    def put(self, row: int, reading: Reading) -> None:
        """Write a reading into one row."""
        for name, column in self.columns.items():
            if name in BY_NAME:
                value = getattr(reading, name)
                if name == "reading_id" and value == NO_ID:
                    value = ""
            else:
                value = reading.other.get(name, "")
            if isinstance(column, Coded):
                column.codes[row] = column.code_of(value)
                continue
            if not column.flags.writeable:  # it belongs to the frame reader
                column = self.columns[name] = column.copy()  # noqa: PLW2901 - the copy takes its place
            column[row] = stored(value, BY_NAME.get(name))

    def keep(self, rows: Bools) -> None:
        """Drop all other rows."""
        for name, column in self.columns.items():
            if isinstance(column, Coded):
                column.codes = column.codes[rows]
            else:
                self.columns[name] = column[rows]
        self.lines = self.lines[rows]


def stored(value: Any, column: Column | None) -> Any:  # noqa: ANN401 - any value of a reading
    """What an array holds for a value of a reading: NaN, NaT or 0 for None, milliseconds for times."""
    kind = Kind.TEXT if column is None else column.kind
    if value is None:
        return {Kind.NUMBER: np.nan, Kind.TIME: NO_TIME}.get(kind, 0)
    return np.datetime64(value.replace(tzinfo=None), "ms") if kind is Kind.TIME else value


def dtype_of(column: Column | None) -> str:
    """The dtype of the array that holds a column; None is a column that is not ours."""
    if column is None or column.name == "reading_id":
        return "object"
    return {
        Kind.TEXT: "object",
        Kind.NUMBER: "float64",
        Kind.WHOLE: "int32",
        Kind.YES_NO: "bool",
        Kind.TIME: "M8[ms]",
    }.get(column.kind, "int32")


def is_coded(column: Column) -> bool:
    """Whether a column is held as codes."""
    return column.kind in _CODED and column.name != "reading_id"


@dataclass(frozen=True, slots=True)
class ReadBlock:
    """A block of good rows, and the faults of each bad one."""

    block: Block
    faults: list[list[RowFault]]


class BlockReader:
    """Turns the records of one file into blocks of columns; blocks may be read in several threads at once."""

    def __init__(self, header: Header) -> None:
        self.header = header
        # Which decimal mark the last block had: only where to begin trying.
        self._decimal = "."
        self._columns = [column_named(name) for name in header.names]
        self._numbers = self._places(Kind.NUMBER)
        self._wholes = self._places(Kind.WHOLE)

    def _places(self, kind: Kind) -> list[int]:
        return [
            place for place, column in enumerate(self._columns) if column is not None and column.kind is kind
        ]

    def read(self, records: Records) -> ReadBlock:
        """Make columns of the good rows; raises CsvError where a file begins with nothing but bad rows."""
        doubtful = self._not_plain(records)
        frame = self._frame(_blanked(records, doubtful, self.header.line_end), records, doubtful)
        plain = b"'" not in records.text and (b"\r" not in records.text or b'"' not in records.text)
        block, refused = self._columns_of(frame, plain=plain)
        block.lines = records.lines.astype(np.int32)
        doubtful |= refused | _unsure(block.columns)
        faults = self._judge(records, block, doubtful) if doubtful.any() else []
        return ReadBlock(block, faults)

    def _not_plain(self, records: Records) -> Bools:
        """Mark the records that the frame reader must not see."""
        text = records.text
        marked = records.malformed | (records.cells > len(self.header.names))
        marked |= records.ends - records.starts > MAX_TEXT
        if not text.isascii():
            try:
                text.decode()
            except UnicodeDecodeError:
                high = np.flatnonzero(np.frombuffer(text, dtype=np.uint8) >= 0x80)
                for row in np.unique(np.searchsorted(records.starts, high, side="right") - 1).tolist():
                    try:
                        records.record(row).decode()
                    except UnicodeDecodeError:
                        marked[row] = True
        if b"\0" in text:
            zeros = np.flatnonzero(np.frombuffer(text, dtype=np.uint8) == 0)
            marked[np.searchsorted(records.starts, zeros, side="right") - 1] = True
        if len(records) and not text.endswith(self.header.line_end):
            marked[-1] |= records.cells[-1] < len(self.header.names)
        return marked

    def _frame(self, text: bytes, records: Records, blanked: Bools) -> dict[int, pd.Series[Any]]:
        """Parse the text: numbers as floats where all are plain, all else as text, by place."""
        wanted = len(self.header.names)
        # The frame reader wants one row at least with all its cells; where none has, it gets one.
        padded = int(np.max(records.cells, initial=0, where=~blanked)) < wanted
        if padded:
            text = self.header.delimiter.encode() * (wanted - 1) + self.header.line_end + text
        frame = self._parsed(text, self._decimal)
        if self.header.delimiter == ";" and any(_is_text(frame[place]) for place in self._numbers):
            # Some column of numbers is none with this decimal mark; the other may do for it.
            other = "," if self._decimal == "." else "."
            again = self._parsed(text, other)
            if sum(_is_text(again[place]) for place in self._numbers) < sum(
                _is_text(frame[place]) for place in self._numbers
            ):
                frame, self._decimal = again, other
        series = {place: frame[place] for place in range(wanted)}
        # Text is taken as the frame reader infers it, which is fastest; where it took text for numbers (an
        # outcrop named 007), or TRUE for a number, the column is read again.
        guessed = [
            place
            for place, each in series.items()
            if not _is_text(each)
            and not (place in self._numbers and each.dtype in (np.float64, np.int64))
            and not (place in self._wholes and each.dtype == np.int64)
        ]
        if guessed:
            again = self._parsed(text, ".", text_only=guessed)
            series |= {place: again[place] for place in guessed}
        if padded:
            series = {place: each.iloc[1:] for place, each in series.items()}
        if len(series[0]) != len(records):  # pragma: no cover - would be a fault of this package
            raise CsvError(
                f"{len(series[0])} rows parsed where {len(records)} were cut",
                where=f"{self.header.file}, line {int(records.lines[0])}",
                expected="one row a record",
            )
        return series

    def _parsed(self, text: bytes, decimal: str, text_only: list[int] | None = None) -> pd.DataFrame:
        return pd.read_csv(  # type: ignore[call-overload, no-any-return]  # columns by place are not typed
            io.BytesIO(text),
            sep=self.header.delimiter,
            decimal=decimal,
            header=None,
            names=range(len(self._columns)),
            usecols=text_only,
            index_col=False,
            dtype=None if text_only is None else dict.fromkeys(text_only, object),
            na_values={} if text_only is not None else {place: [""] for place in self._numbers},
            keep_default_na=False,
            skip_blank_lines=False,
            engine="c",
            low_memory=False,
            encoding="utf-8",
        )

    def _columns_of(self, frame: dict[int, pd.Series[Any]], *, plain: bool) -> tuple[Block, Bools]:
        columns: dict[str, Array | Coded] = {}
        refused = np.zeros(len(frame[0]), dtype=bool)
        for place, (name, column) in enumerate(zip(self.header.names, self._columns, strict=True)):
            series = frame.pop(place)
            if column is None:
                columns[name] = _texts(series, plain=plain)
            elif column.name == "reading_id":
                columns[name] = _ids(series, column, refused)
            elif column.kind is Kind.TEXT:
                columns[name] = _texts(series, plain=plain)
            elif column.kind is Kind.TIME:
                columns[name] = _times(series, column, refused)
            elif column.kind is Kind.NUMBER:
                columns[name] = _numbers(series, column, refused, self.header.delimiter)
            elif is_coded(column):
                columns[name] = _coded(series, column, refused)
            else:
                columns[name] = _looked_up(series, column, refused, self.header.delimiter)
        if DIP_DIRECTION.name in columns:
            _take_dip_direction(columns, refused)
        return Block(columns, np.empty(0, dtype=np.int32)), refused

    def _judge(self, records: Records, block: Block, doubtful: Bools) -> list[list[RowFault]]:
        """Judge the doubtful rows one by one; the mended ones are written into the block, the bad ones drop."""
        good = ~doubtful
        ended = records.text.endswith(self.header.line_end)
        begins = len(records) > 0 and int(records.lines[0]) == self.header.first_line
        faults: list[list[RowFault]] = []
        some_good = bool(good.any())
        for row in np.flatnonzero(doubtful).tolist():
            verdict = judge_row(
                records.record(row),
                self.header,
                int(records.lines[row]),
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


def _texts(series: pd.Series[Any], *, plain: bool) -> Array:
    values: Array = series.to_numpy(dtype=object)
    if not plain:
        texts = [
            with_plain_line_ends(unguarded(text)) if text[:1] == "'" or "\r" in text else text
            for text in values.tolist()
        ]
        values = np.array(texts, dtype=object)
    return values


def _ids(series: pd.Series[Any], column: Column, refused: Bools) -> Array:
    texts: list[str] = series.tolist()
    joined = "".join(texts)
    if joined.isascii() and joined.isprintable() and " " not in joined and "'" not in joined:
        too_long = len(max(texts, key=len, default="")) > MAX_NAME
        if not too_long:
            return series.to_numpy(dtype=object)
    for row, text in enumerate(texts):
        try:
            texts[row] = str(cell_value(text, column))
        except ReadingError:
            refused[row] = True
    return np.array(texts, dtype=object)


def _times(series: pd.Series[Any], column: Column, refused: Bools) -> Array:
    blank = (series == "").to_numpy()
    if blank.all():
        return np.full(len(series), NO_TIME)
    try:
        parsed = pd.DatetimeIndex(pd.to_datetime(series, format="ISO8601"))
    except (ValueError, OverflowError):
        parsed = None
    # Words such as nan are read as no time, and times without offset are taken as they come: neither will do.
    if parsed is not None and parsed.tz is not None and np.array_equal(parsed.isna(), blank):
        return parsed.tz_convert(None).to_numpy().astype("M8[us]").astype("M8[ms]")
    values = np.full(len(series), NO_TIME)
    for row, text in enumerate(series.tolist()):
        try:
            time: datetime | Any = cell_value(text, column)
        except ReadingError:
            refused[row] = True
        else:
            values[row] = stored(time, column)
    return values


def _is_text(series: pd.Series[Any]) -> bool:
    return series.dtype == object or isinstance(series.dtype, pd.StringDtype)


def _numbers(series: pd.Series[Any], column: Column, refused: Bools, delimiter: str) -> Array:
    if _is_text(series):
        return _looked_up(series, column, refused, delimiter)
    values: Array = series.to_numpy()
    refused |= (values < column.low) | (values > column.high)
    if values.dtype == np.int64:
        values = values.astype(np.float64)
    else:
        with np.errstate(invalid="ignore", over="ignore"):
            scale = 10.0**column.decimals
            values = np.rint(values * scale) / scale + 0.0
    if column.high == 360.0:
        values[values == 360.0] = 0.0
    return values


def _categories(series: pd.Series[Any]) -> tuple[Array, list[str]]:
    # Not the category dtype of the frame reader, which would take 007 and 7 for one.
    codes, texts = pd.factorize(series)
    return codes, list(texts)


def _coded(series: pd.Series[Any], column: Column, refused: Bools) -> Coded:
    codes, texts = _categories(series)
    coded = Coded(np.zeros(0, dtype=np.int32), {})
    table = np.zeros(len(texts) + 1, dtype=np.int32)
    unknown = np.zeros(len(texts) + 1, dtype=bool)
    unknown[-1] = True  # no cell at all
    for code, text in enumerate(texts):
        try:
            value: Any = cell_value(text, column)
        except ReadingError:
            unknown[code] = True
            value = () if column.kind is Kind.WORDS else column.blank
        table[code] = coded.code_of(value)
    coded.codes = table[codes]
    refused |= unknown[codes]
    return coded


def _looked_up(series: pd.Series[Any], column: Column, refused: Bools, delimiter: str) -> Array:
    """The values of a column of numbers or flags, each different cell read once."""
    if series.dtype == np.int64:
        refused |= ((series < column.low) | (series > column.high)).to_numpy()
        return series.to_numpy().astype(dtype_of(column))
    codes, texts = _categories(series)
    table = np.zeros(len(texts) + 1, dtype=dtype_of(column))
    unknown = np.zeros(len(texts) + 1, dtype=bool)
    unknown[-1] = True  # no cell at all
    for code, text in enumerate(texts):
        try:
            # The frame reader gives numbers beyond 64 bits as Python's own.
            table[code] = stored(cell_value(str(text), column, delimiter), column)
        except ReadingError:
            unknown[code] = True
    refused |= unknown[codes]
    return table[codes]


def _take_dip_direction(columns: dict[str, Array | Coded], refused: Bools) -> None:
    direction = columns.pop(DIP_DIRECTION.name)
    assert not isinstance(direction, Coded)  # noqa: S101 - a column of numbers
    strike = np.rint(np.mod(direction - 90.0, 360.0) * 1e4) / 1e4
    strike[strike == 360.0] = 0.0
    given = columns.get("strike_deg")
    if given is None or isinstance(given, Coded):
        columns["strike_deg"] = strike
        return
    apart = np.abs(np.mod(given - strike + 180.0, 360.0) - 180.0)
    refused |= apart > SAME_STRIKE_DEG
    columns["strike_deg"] = np.where(np.isnan(given), strike, given)


def _unsure(columns: dict[str, Array | Coded]) -> Bools:
    """Mark the rows whose columns do not go together, as `Reading` would have them."""
    feature = columns["feature"]
    assert isinstance(feature, Coded)  # noqa: S101 - a column of words
    rows = len(feature.codes)
    plane = np.zeros(len(feature.code_by_value) + 1, dtype=bool)
    for value, code in feature.code_by_value.items():
        plane[code] = value in ("bedding", "cleavage")
    is_plane = plane[feature.codes]
    present = {
        name: ~np.isnan(_floats(columns, name, rows))
        for name in ("strike_deg", "dip_deg", "trend_deg", "plunge_deg", "latitude_deg", "longitude_deg")
    }
    marked: Bools = present["strike_deg"] != is_plane
    marked |= present["dip_deg"] != is_plane
    marked |= present["trend_deg"] == is_plane
    marked |= present["plunge_deg"] == is_plane
    marked |= present["latitude_deg"] != present["longitude_deg"]
    overturned = columns.get("overturned")
    if isinstance(overturned, np.ndarray):
        marked |= overturned & ~is_plane
    quadrant = columns.get("dip_quadrant")
    if isinstance(quadrant, Coded) and set(quadrant.code_by_value) != {""}:
        azimuths = np.full(len(quadrant.code_by_value) + 1, np.nan)
        for value, code in quadrant.code_by_value.items():
            azimuths[code] = QUADRANTS.get(value, np.nan)
        azimuth = azimuths[quadrant.codes]
        given = ~np.isnan(azimuth)
        apart = np.abs(np.mod(_floats(columns, "strike_deg", rows) - azimuth - 90.0, 360.0) - 180.0)
        # The judge knows about flat beds and warnings kept.
        marked |= given & ~(apart <= QUADRANT_FITS_DEG)
    return marked


def _floats(columns: dict[str, Array | Coded], name: str, rows: int) -> Array:
    column = columns.get(name)
    return column if isinstance(column, np.ndarray) else np.broadcast_to(np.nan, rows)
