"""What one part of an archive comes to: its running sums, and what tells which of its rows count.

A part cannot know whether a row of another part revises one of its own. So all rows that are not struck out are
summed at once, and each row leaves behind a 64-bit hash of its id and its revision. The few rows that turn out not
to count (`analysis.survey.repeats`) are read again and taken back from the sums.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Final

import numpy as np
import pandas as pd

from analysis.stats.manysums import ManySums
from analysis.survey.archive import Part, rows_in, tables_of
from analysis.survey.squares import Grid, square_name, upward_vectors

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.files.faults import RowFault
    from analysis.files.table import ReadingTable

    Hashes = npt.NDArray[np.uint64]
    Ints = npt.NDArray[np.int32]

_FAULTS_KEPT: Final = 20


@dataclass(frozen=True, slots=True)
class Scan:
    """What a part holds beside its sums.

    `hashes` and `revisions` have one entry a good row, in order; they are empty where ids do not matter.
    `part` is the part as it was read: at once, where some of its rows had no id.
    """

    part: Part
    hashes: Hashes
    revisions: Ints
    rows: int
    faulty_rows: int
    faults: tuple[RowFault, ...]
    unplaced: int  # live rows without position, which belong to no square


def scan_part(part: Part, grid: Grid | None, *, ids_matter: bool) -> tuple[ManySums, Scan]:
    """Read a part once, and sum its rows that are not struck out. Raises CsvError."""
    sums = ManySums()
    hashes: list[Hashes] = []
    revisions: list[Ints] = []
    faults: list[RowFault] = []
    rows = faulty = unplaced = 0
    for table in tables_of(part):
        if ids_matter and not part.whole and bool((table.column("reading_id") == "").any()):
            # Ids made from content count the equal rows of the whole file.
            return scan_part(replace(part, whole=True), grid, ids_matter=True)
        rows += len(table)
        faulty += table.faulty_rows
        faults += table.faults[: _FAULTS_KEPT - len(faults)]
        if ids_matter and len(table):
            hashes.append(pd.util.hash_array(table.reading_id, categorize=False))
            revisions.append(table.revision.astype(np.int32))
        live = table.take(~table.struck_out)
        unplaced += int(np.isnan(live.column("latitude_deg")).sum())
        sums = sums + sums_of_table(live, grid)
    return sums, Scan(
        part=part,
        hashes=np.concatenate([np.zeros(0, dtype=np.uint64), *hashes]),
        revisions=np.concatenate([np.zeros(0, dtype=np.int32), *revisions]),
        rows=rows,
        faulty_rows=faulty,
        faults=tuple(faults),
        unplaced=unplaced,
    )


def sums_at(part: Part, rows: npt.NDArray[np.int64], grid: Grid | None) -> ManySums:
    """Sum the rows that `scan_part` summed too much, given by sorted numbers."""
    sums = ManySums()
    for table, places in rows_in(part, rows):
        chosen = table.take(places)
        sums = sums + sums_of_table(chosen.take(~chosen.struck_out), grid)
    return sums


def sums_of_table(table: ReadingTable, grid: Grid | None) -> ManySums:
    """Sum all rows of a table by fold, or by square; without position there is no square."""
    latitude, longitude = table.column("latitude_deg"), table.column("longitude_deg")
    if grid is not None:
        table = table.take(~np.isnan(latitude))
        latitude, longitude = table.column("latitude_deg"), table.column("longitude_deg")
    fold, outcrop = table.fold, table.outcrop
    pairs = fold.codes.astype(np.int64) * len(outcrop.names) + outcrop.codes
    if grid is None:
        used, codes = np.unique(pairs, return_inverse=True)
        places = [
            (fold.names[pair // len(outcrop.names)], outcrop.names[pair % len(outcrop.names)])
            for pair in used.tolist()
        ]
    else:
        band, square = grid.square_of(latitude, longitude)
        keys, codes = np.unique(np.stack([band, square, pairs], axis=-1), axis=0, return_inverse=True)
        # Outcrop 1 of one fold is not outcrop 1 of another.
        places = [
            (
                square_name(at_band, at_square),
                f"{fold.names[pair // len(outcrop.names)]}\x1f{outcrop.names[pair % len(outcrop.names)]}",
            )
            for at_band, at_square, pair in keys.tolist()
        ]
    return ManySums.of(places, codes, table.feature, table.vectors, upward_vectors(latitude, longitude))
