"""The text of a block parsed: numbers as arrays, names and words as codes, and all else as text.

What is parsed here is not judged yet. pandas parses any block; a desk may lend a faster parser for clean ones.
"""

from __future__ import annotations

import io
from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING, Any, cast

import numpy as np
import pandas as pd

from analysis.files.columns import Kind
from analysis.files.held import Distinct, is_coded

if TYPE_CHECKING:
    from analysis.files.columns import Column
    from analysis.files.header import Header
    from analysis.files.held import Array, Parsed, Texts

# Parses a text of so many rows, each with as many cells as the header has, with this decimal mark; None where a cell
# is not what its column holds.
CleanParser = Callable[[bytes, int, "Header", Sequence["Column | None"], str], "list[Parsed] | None"]

_ODD_BLOCKS = 5  # so many blocks that were not clean, and no more of the file are tried


class FrameReader:
    """Parses the blocks of one file; several threads may do so at once."""

    def __init__(
        self, header: Header, columns: Sequence[Column | None], clean_parser: CleanParser | None = None
    ) -> None:
        self._header = header
        self._clean_parser = clean_parser
        self._columns = columns
        # Which decimal mark the last block had: only where to begin trying.
        self._decimal = "."
        self._odd_blocks = 0
        self._numbers = [
            place for place, column in enumerate(columns) if column is not None and column.kind is Kind.NUMBER
        ]

    def read(self, text: bytes, rows: int, *, some_short: bool = False) -> list[Parsed]:
        """Parse so many rows of valid UTF-8, none with more cells than the header has.

        `some_short` tells that there may be no row with as many. Raises pandas' ParserError where a row has more
        cells after all.
        """
        if self._clean_parser is not None and not some_short and self._odd_blocks < _ODD_BLOCKS:
            clean = self._clean_parser(text, rows, self._header, self._columns, self._decimal)
            if clean is not None:
                return clean
            self._odd_blocks += 1
        # pandas wants one row at least with all its cells; where none has, it gets one.
        if some_short:
            text = self._header.delimiter.encode() * (len(self._columns) - 1) + self._header.line_end + text
        series = self._series(text)
        if some_short:
            series = [each.iloc[1:] for each in series]
        if len(series[0]) != rows:
            raise pd.errors.ParserError(f"{len(series[0])} rows parsed where {rows} were cut")
        return [self._parsed(place, each) for place, each in enumerate(series)]

    def _series(self, text: bytes) -> list[pd.Series[Any]]:
        frame = self._frame(text, self._decimal)
        if self._header.delimiter == ";" and any(_is_text(frame[place]) for place in self._numbers):
            # Some column of numbers is none with this decimal mark; the other may do for it.
            other = "," if self._decimal == "." else "."
            again = self._frame(text, other)
            if sum(_is_text(again[place]) for place in self._numbers) < sum(
                _is_text(frame[place]) for place in self._numbers
            ):
                frame, self._decimal = again, other
        # Text is taken as pandas infers it, which is fastest; where it took text for numbers (an outcrop named
        # 007), or TRUE for a number, the column is read again.
        guessed = [
            place
            for place, column in enumerate(self._columns)
            if not _is_text(frame[place]) and not _may_be(frame[place], column)
        ]
        series = [frame[place] for place in range(len(self._columns))]
        if guessed:
            again = self._frame(text, ".", text_only=guessed)
            for place in guessed:
                series[place] = again[place]
        return series

    def _frame(self, text: bytes, decimal: str, text_only: list[int] | None = None) -> pd.DataFrame:
        return pd.read_csv(  # type: ignore[call-overload, no-any-return]  # columns by place are not typed
            io.BytesIO(text),
            sep=self._header.delimiter,
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

    def _parsed(self, place: int, series: pd.Series[Any]) -> Parsed:
        column = self._columns[place]
        if not _is_text(series):
            numbers: Array = series.to_numpy()
            return numbers
        if column is not None and (is_coded(column) or column.kind in (Kind.NUMBER, Kind.WHOLE, Kind.YES_NO)):
            # Not the category dtype of pandas, which makes more of it than is wanted here.
            codes, texts = pd.factorize(series)
            return Distinct(codes, list(map(str, texts)))  # numbers beyond 64 bits come as Python's own
        return cast("Texts", series.array)


def _may_be(series: pd.Series[Any], column: Column | None) -> bool:
    """Whether what pandas took for numbers may be the numbers of this column."""
    if column is None:
        return False
    return (
        series.dtype == np.int64
        if column.kind is Kind.WHOLE
        else (column.kind is Kind.NUMBER and series.dtype in (np.float64, np.int64))
    )


def _is_text(series: pd.Series[Any]) -> bool:
    return series.dtype == object or isinstance(series.dtype, pd.StringDtype)
