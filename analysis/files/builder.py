"""Blocks of rows collected into a table."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from threading import Lock
from typing import TYPE_CHECKING, Any

import numpy as np

from analysis.files.columns import BY_NAME, Kind
from analysis.files.held import Array, Coded, as_array, dtype_of, is_coded, stored
from analysis.files.table import Columns, ReadingTable

if TYPE_CHECKING:
    from collections.abc import Sequence

    from analysis.files.faults import RowFault
    from analysis.files.held import Block, Texts
    from analysis.files.table import Ints


class _JoinedParts(Mapping[str, Array]):
    """Columns by name, each joined from its parts when first asked for: a check asks for few of them."""

    __slots__ = ("_joined", "_lock", "_parts")

    def __init__(self, parts: dict[str, list[Array | Texts]]) -> None:
        self._parts = parts
        self._joined: dict[str, Array] = {}
        self._lock = Lock()

    def __getitem__(self, name: str) -> Array:
        with self._lock:  # several folds are checked at once
            if name not in self._joined:
                joined = np.concatenate([as_array(part) for part in self._parts[name]])
                joined.flags.writeable = False
                self._joined[name] = joined
                self._parts[name] = [joined]
            return self._joined[name]

    def __iter__(self) -> Iterator[str]:
        return iter(self._parts)

    def __len__(self) -> int:
        return len(self._parts)


class TableBuilder:
    """Collects blocks of rows, of one or several files, into a table; `rows` counts them."""

    def __init__(self) -> None:
        self._parts: dict[str, list[Array | Texts]] = {}
        self._codes: dict[str, Coded] = {}
        self.rows = 0
        self._lines: list[Ints] = []
        self._files: list[str] = []
        self._file_rows: list[int] = []
        self._other: dict[str, bool] = {}  # name: whether it may be dropped when empty

    def start_file(self, file: str, other_names: Sequence[str], unnamed: frozenset[str]) -> None:
        """Begin the rows of the next file."""
        self._files.append(file)
        self._file_rows.append(0)
        for name in other_names:
            self._other[name] = name in unnamed and self._other.get(name, True)

    def add(self, block: Block) -> None:
        """Add the rows of a block; the block is used up."""
        rows = len(block.lines)
        for name in self._parts.keys() - block.columns.keys():
            self._parts[name].append(self._blank(name, rows))
        for name, column in block.columns.items():
            if name not in self._parts:
                self._parts[name] = [self._blank(name, self.rows)] if self.rows else []
            self._parts[name].append(self._recoded(name, column) if isinstance(column, Coded) else column)
        self._lines.append(block.lines)
        self.rows += rows
        self._file_rows[-1] += rows

    def _coded(self, name: str) -> Coded:
        return self._codes.setdefault(name, Coded(np.empty(0, dtype=np.int32), {}))

    def _recoded(self, name: str, column: Coded) -> Array:
        whole = self._coded(name)
        used = np.zeros(len(column.code_by_value), dtype=bool)
        used[column.codes] = True
        table = np.zeros(len(used) + 1, dtype=np.int32)
        for value, code in column.code_by_value.items():
            if used[code]:
                table[code] = whole.code_of(value)
        return table[column.codes]

    def _blank(self, name: str, rows: int) -> Array:
        column = BY_NAME.get(name)
        if column is not None and is_coded(column):
            blank: Any = self._coded(name).code_of(() if column.kind is Kind.WORDS else column.blank)
        elif name == "revision":
            blank = 1
        else:
            blank = "" if dtype_of(column) == "object" else stored(None, column)
        return np.full(rows, blank, dtype=dtype_of(column))

    def build(self, faults: Sequence[RowFault], faulty_rows: int) -> ReadingTable:
        """Make the table; the builder is used up."""
        arrays = _JoinedParts(self._parts)
        other = []
        for name, droppable in self._other.items():
            if droppable and not any(arrays.get(name, ())):
                self._parts.pop(name, None)
            else:
                self._parts.setdefault(name, [np.full(self.rows, "", dtype=object)])
                other.append(name)
        lines = np.concatenate(self._lines) if self._lines else np.empty(0, dtype=np.int32)
        file_codes = (
            np.broadcast_to(np.int32(0), self.rows)
            if len(self._files) == 1
            else np.repeat(np.arange(len(self._files), dtype=np.int32), self._file_rows)
        )
        values = {name: tuple(coded.code_by_value) for name, coded in self._codes.items()}
        columns = Columns(
            arrays, values, tuple(other), tuple(self._files), file_codes, lines, tuple(faults), faulty_rows
        )
        return ReadingTable(columns)
