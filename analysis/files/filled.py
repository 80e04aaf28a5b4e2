"""Parsed cells made into the values of a column, all rows at once.

Every function marks in `refused` the rows it is not sure of; they go to the judge of single rows
(`analysis.files.rows`). The checks here may be stricter than the judge's, never laxer.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
import pandas as pd

from analysis.errors import ReadingError
from analysis.files.cells import cell_value, unguarded
from analysis.files.checked import with_plain_line_ends
from analysis.files.columns import DIP_DIRECTION, MAX_NAME, QUADRANTS, Column, Kind
from analysis.files.held import (
    NO_TIME,
    Array,
    Bools,
    Coded,
    Distinct,
    Held,
    as_array,
    dtype_of,
    is_coded,
    stored,
)
from analysis.files.reading import QUADRANT_FITS_DEG
from analysis.files.rows import SAME_STRIKE_DEG

if TYPE_CHECKING:
    from datetime import datetime

    from analysis.files.held import Parsed, Texts

_FIRST_YEAR = np.datetime64("0001-01-01", "ms")


def values_of(parsed: Parsed, column: Column | None, refused: Bools, delimiter: str, *, plain: bool) -> Held:
    """Make the values of one column; None is a column that is not ours. `plain`: all text is as it stands there."""
    if isinstance(parsed, Distinct):
        assert column is not None  # noqa: S101 - columns that are not ours are parsed as text
        return (
            _coded(parsed, column, refused)
            if is_coded(column)
            else _looked_up(parsed, column, refused, delimiter)
        )
    if column is None or column.kind is Kind.TEXT:
        return parsed if plain else _unguarded(parsed)
    if column.kind is Kind.TIME:
        return _times(parsed, column, refused)
    if column.kind is Kind.NAME:
        return _ids(parsed, column, refused)
    assert isinstance(parsed, np.ndarray)  # noqa: S101 - numbers, or they would be distinct texts
    return (
        _wholes(parsed, column, refused) if column.kind is Kind.WHOLE else _numbers(parsed, column, refused)
    )


def _unguarded(parsed: Array | Texts) -> Array:
    texts = [
        with_plain_line_ends(unguarded(text)) if text[:1] == "'" or "\r" in text else text
        for text in as_array(parsed).tolist()
    ]
    return np.array(texts, dtype=object)


def _ids(parsed: Array | Texts, column: Column, refused: Bools) -> Array:
    array = as_array(parsed)
    texts: list[str] = array.tolist()
    joined = "".join(texts)
    plain = joined.isascii() and joined.isprintable() and " " not in joined and "'" not in joined
    if plain and len(max(texts, key=len, default="")) <= MAX_NAME:
        return array
    for row, text in enumerate(texts):
        try:
            texts[row] = str(cell_value(text, column))
        except ReadingError:
            refused[row] = True
    return np.array(texts, dtype=object)


def _times(parsed: Array | Texts, column: Column, refused: Bools) -> Array:
    times = (
        parsed
        if isinstance(parsed, np.ndarray) and parsed.dtype.kind == "M"
        else _parsed_times(as_array(parsed))
    )
    if times is not None:
        refused |= times < _FIRST_YEAR
        return times
    values = np.full(len(parsed), NO_TIME)
    for row, text in enumerate(as_array(parsed).tolist()):
        try:
            time: datetime | Any = cell_value(text, column)
        except ReadingError:
            refused[row] = True
        else:
            values[row] = stored(time, column)
    return values


def _parsed_times(texts: Array) -> Array | None:
    """Times of texts that are all times with an offset, or empty; else None."""
    blank = texts == ""
    if blank.all():
        return np.full(len(texts), NO_TIME)
    # To pandas, now and today are times, and other ones every day.
    joined = "".join(texts.tolist())
    if "o" in joined or "O" in joined:
        return None
    try:
        parsed = pd.DatetimeIndex(pd.to_datetime(texts, format="ISO8601"))
    except (ValueError, OverflowError):
        return None
    # Words such as nan are read as no time, and times without offset are taken as they come: neither will do.
    if parsed.tz is None or not np.array_equal(parsed.isna(), blank):
        return None
    return parsed.tz_convert(None).to_numpy().astype("M8[us]").astype("M8[ms]")


def _numbers(values: Array, column: Column, refused: Bools) -> Array:
    outside = (values < column.low) | (values > column.high)
    if outside.any():
        refused |= outside
        values = np.where(outside, np.nan, values)  # what is infinite cannot be reckoned with
    if values.dtype == np.int64:
        values = values.astype(np.float64)
    else:
        scale = 10.0**column.decimals
        values = values * scale
        np.rint(values, out=values)
        values /= scale
        values += 0.0  # no -0.0
    if column.high == 360.0:
        values[values == 360.0] = 0.0
    return values


def _wholes(values: Array, column: Column, refused: Bools) -> Array:
    refused |= (values < column.low) | (values > column.high)
    return values.astype(dtype_of(column))


def _coded(parsed: Distinct, column: Column, refused: Bools) -> Coded:
    coded = Coded(np.zeros(0, dtype=np.int32), {})
    table = np.zeros(len(parsed.texts) + 1, dtype=np.int32)
    unknown = np.zeros(len(table), dtype=bool)
    unknown[-1] = True  # no cell at all
    for code, text in enumerate(parsed.texts):
        try:
            value: Any = cell_value(text, column)
        except ReadingError:
            unknown[code] = True
            value = () if column.kind is Kind.WORDS else column.blank
        table[code] = coded.code_of(value)
    coded.codes = table[parsed.codes]
    _refuse(unknown, parsed.codes, refused)
    return coded


def _looked_up(parsed: Distinct, column: Column, refused: Bools, delimiter: str) -> Array:
    """The values of a column of numbers or flags, each different cell read once."""
    table: Array = np.zeros(len(parsed.texts) + 1, dtype=dtype_of(column))
    unknown = np.zeros(len(table), dtype=bool)
    unknown[-1] = True  # no cell at all
    for code, text in enumerate(parsed.texts):
        try:
            table[code] = stored(cell_value(text, column, delimiter), column)
        except ReadingError:
            unknown[code] = True
    _refuse(unknown, parsed.codes, refused)
    values: Array = table[parsed.codes]
    return values


def _refuse(unknown: Bools, codes: Array, refused: Bools) -> None:
    if unknown[:-1].any() or bool((codes < 0).any()):
        refused |= unknown[codes]


def check_together(columns: dict[str, Held], refused: Bools) -> None:
    """Take the dip direction for the strike, and refuse the rows whose columns do not go together."""
    if DIP_DIRECTION.name in columns:
        _take_dip_direction(columns, refused)
    refused |= _unsure(columns)


def _take_dip_direction(columns: dict[str, Held], refused: Bools) -> None:
    direction = columns.pop(DIP_DIRECTION.name)
    assert isinstance(direction, np.ndarray)  # noqa: S101 - a column of numbers
    strike = np.rint(np.mod(direction - 90.0, 360.0) * 1e4) / 1e4
    strike[strike == 360.0] = 0.0
    given = columns.get("strike_deg")
    if not isinstance(given, np.ndarray):
        columns["strike_deg"] = strike
        return
    apart = np.abs(np.mod(given - strike + 180.0, 360.0) - 180.0)
    refused |= apart > SAME_STRIKE_DEG
    columns["strike_deg"] = np.where(np.isnan(given), strike, given)


def _unsure(columns: dict[str, Held]) -> Bools:
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


def _floats(columns: dict[str, Held], name: str, rows: int) -> Array:
    column = columns.get(name)
    return column if isinstance(column, np.ndarray) else np.broadcast_to(np.nan, rows)
