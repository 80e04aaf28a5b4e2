"""How the columns of readings are held: an array each, or codes where there are few different values."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, NamedTuple, Protocol

import numpy as np
import numpy.typing as npt

from analysis.files.columns import BY_NAME, Column, Kind
from analysis.files.rows import NO_ID

if TYPE_CHECKING:
    from collections.abc import Hashable

    from analysis.files.reading import Reading

Array = npt.NDArray[Any]
Bools = npt.NDArray[np.bool_]

_CODED = (Kind.NAME, Kind.WORD, Kind.WORDS)
NO_TIME = np.datetime64("NaT", "ms")


class Texts(Protocol):
    """Texts as their parser holds them; the objects are made when somebody asks for them (`as_array`)."""

    def __len__(self) -> int:
        """Give the number of texts."""

    def __array__(self, dtype: Any = None) -> Array:  # noqa: ANN401 - as numpy has it
        """Make an array."""


class Distinct(NamedTuple):
    """Parsed cells of few different texts: for each row the place of its text; -1 where there is no cell."""

    codes: npt.NDArray[np.integer]
    texts: list[str]


# Cells as a parser gives them: numbers (NaN: an empty cell) or times (NaT) where all are plain, else texts.
Parsed = Array | Distinct | Texts


@dataclass(slots=True)
class Coded:
    """A column of few different values: a code for each row, and the value of each code."""

    codes: npt.NDArray[np.int32]
    code_by_value: dict[Any, int]

    def code_of(self, value: Hashable) -> int:
        """The code of a value, a new one if need be."""
        return self.code_by_value.setdefault(value, len(self.code_by_value))


# Columns as they are held.
Held = Array | Coded | Texts


@dataclass(slots=True)
class Block:
    """Rows as columns: floats (NaN: none), times (NaT: none), whole numbers (0: none), flags, codes, text."""

    columns: dict[str, Held]
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
            array = as_array(column)
            if not array.flags.writeable:  # it belongs to the parser
                array = array.copy()
            array[row] = stored(value, BY_NAME.get(name))
            self.columns[name] = array

    def keep(self, rows: Bools) -> None:
        """Drop all other rows."""
        for name, column in self.columns.items():
            if isinstance(column, Coded):
                column.codes = column.codes[rows]
            else:
                self.columns[name] = as_array(column)[rows]
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


def as_array(column: Array | Texts) -> Array:
    """Give an array as it is, and texts as an array of objects."""
    return column if isinstance(column, np.ndarray) else np.asarray(column, dtype=object)
