"""Which rows of an archive do not count: superseded revisions, and copies of the same one.

The rules are those of `analysis.files.standing`: the highest revision of a reading counts, unless it is struck
out; of equal rows the first; of different contents under one revision the one edited last, and they are a conflict.
Here they are applied to hashes of ids, so that 12 bytes a row are all that has to be in memory. Two of 10 million
ids share a 64-bit hash with a chance of 3 in a million.
"""

from __future__ import annotations

import hashlib
from collections import defaultdict
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from analysis.files.standing import Conflict
from analysis.survey.archive import readings_at

if TYPE_CHECKING:
    from collections.abc import Sequence

    import numpy.typing as npt

    from analysis.files.reading import Reading
    from analysis.survey.archive import Part
    from analysis.survey.scan import Scan

    Rows = npt.NDArray[np.int64]


class Repeats(NamedTuple):
    """Rows of the whole archive, numbered through all parts in order.

    `superseded` have a higher revision elsewhere. `tied` share id and revision with other rows, and `tied_ids` (as
    many) say with which; superseded ones may be among them.
    """

    superseded: Rows
    tied: Rows
    tied_ids: Rows


def find_repeats(scans: Sequence[Scan]) -> Repeats:
    """Find the rows whose reading stands there more than once."""
    hashes = np.concatenate([scan.hashes for scan in scans])
    nothing = np.zeros(0, dtype=np.int64)
    ordered = np.sort(hashes)
    repeated = np.unique(ordered[1:][ordered[1:] == ordered[:-1]])
    del ordered
    if not len(repeated):
        return Repeats(nothing, nothing, nothing)
    at = np.searchsorted(repeated, hashes)
    at[at == len(repeated)] = 0
    rows = np.flatnonzero(repeated[at] == hashes)
    ids = at[rows]
    revisions = np.concatenate([scan.revisions for scan in scans])[rows]
    highest = np.zeros(len(repeated), dtype=np.int32)
    np.maximum.at(highest, ids, revisions)
    keys, groups = np.unique(np.stack([ids, revisions], axis=-1), axis=0, return_inverse=True)
    tied = (np.bincount(groups, minlength=len(keys)) > 1)[groups]
    return Repeats(rows[revisions < highest[ids]], rows[tied], groups[tied])


def by_part(rows: Rows, scans: Sequence[Scan]) -> dict[int, Rows]:
    """Give the sorted row numbers within each part, of rows numbered through all parts."""
    ends = np.cumsum([len(scan.hashes) for scan in scans])
    rows = np.sort(rows)
    cuts = np.searchsorted(rows, ends)
    starts = np.concatenate([[0], cuts[:-1]])
    first_row = np.concatenate([[0], ends[:-1]])
    return {
        part: rows[start:cut] - first_row[part]
        for part, (start, cut) in enumerate(zip(starts.tolist(), cuts.tolist(), strict=True))
        if cut > start
    }


def digests_at(part: Part, rows: Rows) -> list[bytes]:
    """Digest the content of some rows of a part, given by sorted numbers."""
    return [_digest(reading) for reading in readings_at(part, rows)]


def _digest(reading: Reading) -> bytes:
    text = "\x1e".join(f"{name}\x1f{cell}" for name, cell in reading.cells().items())
    return hashlib.blake2b(text.encode(), digest_size=16).digest()


class Ties(NamedTuple):
    """Tied rows looked at: `copies` equal another row and do not count, `clashing` (row: id) differ."""

    copies: Rows
    clashing: dict[int, int]


def settle_copies(repeats: Repeats, digests: dict[int, bytes]) -> Ties:
    """Tell copies from clashes; `digests` are those of the tied rows, by row."""
    groups: defaultdict[int, dict[bytes, int]] = defaultdict(dict)
    copies = []
    order = np.argsort(repeats.tied, kind="stable")
    for row, key in zip(repeats.tied[order].tolist(), repeats.tied_ids[order].tolist(), strict=True):
        first = groups[key].setdefault(digests[row], row)
        if first != row:
            copies.append(row)
    clashing = {row: key for key, group in groups.items() if len(group) > 1 for row in group.values()}
    return Ties(np.array(copies, dtype=np.int64), clashing)


def settle_clashes(clashing: dict[int, int], readings: dict[int, Reading]) -> tuple[Rows, list[Conflict]]:
    """Give the clashing rows that do not count, and the conflicts; `readings` are those of the rows, by row."""
    groups: defaultdict[tuple[int, str], list[int]] = defaultdict(list)
    for row, key in clashing.items():
        groups[key, readings[row].reading_id].append(row)
    lost: list[int] = []
    conflicts = []
    for rows in groups.values():
        ranked = sorted(rows, key=lambda row: readings[row].content_order())
        lost += ranked[:-1]
        if len(ranked) > 1:
            first = readings[ranked[0]]
            conflicts.append(
                Conflict(first.reading_id, first.revision, tuple(readings[row] for row in ranked))
            )
    conflicts.sort(key=lambda conflict: (conflict.reading_id, conflict.revision))
    return np.array(lost, dtype=np.int64), conflicts
