"""Which row counts for each reading: the highest revision, unless it is struck out."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import pandas as pd

from analysis.files.columns import NAMES

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.files.held import Array, Bools
    from analysis.files.reading import Reading
    from analysis.files.table import ReadingTable


@dataclass(frozen=True, slots=True)
class Conflict:
    """Different contents under one reading_id and revision, in `content_order`: the last of them stands."""

    reading_id: str
    revision: int
    contents: tuple[Reading, ...]

    @property
    def differing(self) -> tuple[str, ...]:
        """Names of the columns in which the contents differ."""
        cells = [reading.cells() for reading in self.contents]
        names = dict.fromkeys(name for each in cells for name in each)
        return tuple(name for name in names if len({each.get(name, "") for each in cells}) > 1)

    def __str__(self) -> str:
        names = ", ".join(self.differing)
        return f"{self.reading_id}, revision {self.revision}: {len(self.contents)} contents differ in {names}"


def find(table: ReadingTable) -> tuple[Bools, tuple[Conflict, ...]]:
    """Mark the rows that count, shape (N,), and find the conflicts; for a whole table."""
    live: Bools = ~table.struck_out
    revision = table.revision
    # Equal rows of one file without ids are different readings: each row stands for itself.
    if len(table.files) == 1 and not (table.has("reading_id") or table.has("revision")):
        return live, ()
    ids = table.column("reading_id")
    missing = ids == ""
    if len(table.files) == 1 and bool(missing.all()) and bool((revision == 1).all()):
        return live, ()
    ids = table.reading_id if bool(missing.any()) else ids
    if pd.Index(ids, dtype=object).is_unique:
        return live, ()
    return _highest(table, ids, revision, live)


def _highest(
    table: ReadingTable, ids: Array, revision: npt.NDArray[np.int32], live: Bools
) -> tuple[Bools, tuple[Conflict, ...]]:
    codes, unique = pd.factorize(ids)
    highest = np.zeros(len(unique), dtype=np.int32)
    np.maximum.at(highest, codes, revision)
    chosen = revision == highest[codes]
    # Rows that share id and revision lie side by side in this order, in file order.
    order = np.lexsort((revision, codes))
    starts_group = np.ones(len(order), dtype=bool)
    starts_group[1:] = (np.diff(codes[order]) != 0) | (np.diff(revision[order]) != 0)
    first_place = np.maximum.accumulate(np.where(starts_group, np.arange(len(order)), 0))
    first = order[first_place]
    later = ~starts_group
    differs = np.zeros(len(order), dtype=bool)
    differs[later] = _different(table, order[later], first[later])
    chosen[order[later]] = False
    conflicts = []
    for place in np.unique(first_place[differs]).tolist():
        end = place + 1
        while end < len(order) and not starts_group[end]:
            end += 1
        rows = order[place:end].tolist()
        by_content: dict[Reading, int] = {}
        for row in rows:
            by_content.setdefault(table.reading(row), row)
        ranked = sorted(by_content, key=lambda reading: reading.content_order())
        conflicts.append(Conflict(ranked[0].reading_id, ranked[0].revision, tuple(ranked)))
        if chosen[rows[0]]:
            chosen[rows[0]] = False
            chosen[by_content[ranked[-1]]] = True
    conflicts.sort(key=lambda conflict: (conflict.reading_id, conflict.revision))
    return chosen & live, tuple(conflicts)


def _different(table: ReadingTable, rows: npt.NDArray[np.intp], others: npt.NDArray[np.intp]) -> Bools:
    """Whether the content of each row differs from that of the other row."""
    differs = np.zeros(len(rows), dtype=bool)
    for name in (*NAMES, *table.other_names):
        if name in ("reading_id", "revision"):
            continue
        column = table.column_or_codes(name)
        one, two = column[rows], column[others]
        differs |= (one != two) & ~((one != one) & (two != two))  # noqa: PLR0124 - NaN and NaT are not themselves
    return differs
