"""Running sums of a fold's readings, kept by outcrop: a monoid.

`a + b` is the same whether it adds one reading on a tablet, two tablets' days, or two partitions of an
archive; `RunningSums()` is its zero; `remove` takes a struck-out reading back. Bedding is also kept by cells
of attitude, so that limbs can be told apart later without the readings.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.errors import AttitudeError
from analysis.orient.features import Feature
from analysis.orient.vectors import ROUNDING
from analysis.stats.moments import COUNT, WIDTH, moments, summed_moments

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    import numpy.typing as npt

    from analysis.orient.vectors import Floats

FEATURES: Final = tuple(Feature)
_CODE: Final = {feature: code for code, feature in enumerate(FEATURES)}
_BEDDING: Final = _CODE[Feature.BEDDING]
_NOT_UNIT: Final = 1e-6  # how far the squared length of an axis may be off one
_TABLE_AT_MOST: Final = 2**21  # keys that a table is made for
_CHUNK: Final = 65_536  # axes whose moments are in memory at a time

# Cells of attitude: bands of pole plunge, each cut into sectors of azimuth, about 10 degrees wide.
_BANDS: Final = 9
_SECTORS: Final = np.array([36, 36, 34, 30, 26, 22, 16, 10, 4])
_FIRST_CELL: Final = np.concatenate([[0], np.cumsum(_SECTORS)[:-1]])
CELLS: Final = int(_SECTORS.sum())


def cell_of(vectors: npt.ArrayLike) -> npt.NDArray[np.int64]:
    """Number of the cell of attitude, shape (...), in which each axis, shape (..., 3), lies."""
    v = np.asarray(vectors, dtype=float)
    north, east, down = v[..., 0], v[..., 1], v[..., 2]
    # The sign of the end in the lower hemisphere, as `lower_hemisphere` has it, but without a copy of the axes.
    # An axis and its opposite come to the same three numbers, to the last bit; adding zero makes -0.0 one of them.
    level, along_north = np.abs(down) <= ROUNDING, np.abs(east) <= ROUNDING
    sign = 1.0 - 2.0 * np.where(level, np.where(along_north, north < 0.0, east < 0.0), down < 0.0)
    plunge = np.degrees(np.arcsin(np.minimum(np.abs(down), 1.0)))
    band = np.minimum((plunge / (90.0 / _BANDS)).astype(np.int64), _BANDS - 1)
    turn = np.arctan2(east * sign + 0.0, north * sign + 0.0) / (2.0 * np.pi)
    sectors = _SECTORS[band]
    sector = ((turn + (turn < 0.0)) * sectors).astype(np.int64)
    return np.asarray(_FIRST_CELL[band] + np.minimum(sector, sectors - 1))


class RunningSums:
    """Moments of all readings of one fold, by outcrop and feature.

    Not frozen: `add`, `remove` and `extend` change it in place, in time that does not depend on how many
    readings it holds; `+` and `-` make new ones.
    """

    __slots__ = ("_cell_at", "_cell_rows", "_outcrop_at", "_rows")

    def __init__(self) -> None:
        self._outcrop_at: dict[str, int] = {}
        self._rows: Floats = np.zeros((0, len(FEATURES), WIDTH))
        self._cell_at: dict[tuple[int, int], int] = {}
        self._cell_rows: Floats = np.zeros((0, WIDTH))

    @classmethod
    def from_rows(
        cls,
        outcrops: Sequence[str],
        rows: Floats,
        cell_owners: npt.NDArray[np.int64],
        cells: npt.NDArray[np.int64],
        cell_rows: Floats,
    ) -> RunningSums:
        """Take over rows summed elsewhere.

        Parameters
        ----------
        outcrops, rows
            Names, each once, and moments (outcrops, features, 24) in the order of `FEATURES`.
        cell_owners, cells, cell_rows
            (C,), the outcrop's index and the cell of attitude, and moments (C, 24) of bedding.

        """
        sums = cls()
        sums._outcrop_at = {name: slot for slot, name in enumerate(outcrops)}
        sums._rows = rows
        pairs = zip(cell_owners.tolist(), cells.tolist(), strict=True)
        sums._cell_at = {pair: place for place, pair in enumerate(pairs)}
        sums._cell_rows = cell_rows
        return sums

    # -- changing ------------------------------------------------------------------------------------------

    def add(self, feature: Feature, outcrop: str, vectors: npt.ArrayLike) -> None:
        """Add one axis, shape (3,), or many, shape (N, 3), read at one outcrop.

        Raises AttitudeError, and changes nothing, where one is not finite or not of unit length.
        """
        self._change(feature, outcrop, vectors, 1.0)

    def remove(self, feature: Feature, outcrop: str, vectors: npt.ArrayLike) -> None:
        """Take back axes that were added before, such as a reading that is struck out."""
        self._change(feature, outcrop, vectors, -1.0)

    def extend(
        self,
        feature_codes: npt.NDArray[np.integer],
        outcrop_codes: npt.NDArray[np.integer],
        outcrops: Sequence[str],
        vectors: Floats,
    ) -> None:
        """Add many axes, shape (N, 3), at once.

        `feature_codes` (N,) number the features in the order of `FEATURES`, `outcrop_codes` (N,) index
        `outcrops`. Raises AttitudeError, and changes nothing, where an axis is not finite or not of unit length.
        """
        for start in range(0, len(vectors), _CHUNK):
            _check_axes(vectors[start : start + _CHUNK])
        slot_of = np.array([self._slot(name) for name in outcrops], dtype=np.int64)
        kinds = len(FEATURES)
        for start in range(0, len(vectors), _CHUNK):
            part = slice(start, start + _CHUNK)
            axes = vectors[part].T.copy()
            codes = np.asarray(feature_codes[part], dtype=np.int64)
            slots = slot_of[np.asarray(outcrop_codes[part], dtype=np.int64)]
            beds = np.flatnonzero(codes == _BEDDING)
            keys = (slots * kinds + codes) * CELLS
            keys[beds] += cell_of(axes[:, beds].T)
            held, sums = _moments_by_key(axes, keys, len(self._rows) * kinds * CELLS)
            groups, starts = np.unique(held // CELLS, return_index=True)
            self._rows.reshape(-1, WIDTH)[groups] += np.add.reduceat(sums, starts)
            of_beds = held // CELLS % kinds == _BEDDING
            owners, cells = held[of_beds] // CELLS // kinds, held[of_beds] % CELLS
            at = [self._cell_slot(*pair) for pair in zip(owners.tolist(), cells.tolist(), strict=True)]
            self._cell_rows[at] += sums[of_beds]

    def _change(self, feature: Feature, outcrop: str, vectors: npt.ArrayLike, sign: float) -> None:
        axes = np.atleast_2d(np.asarray(vectors, dtype=float))
        _check_axes(axes)
        rows = moments(axes) * sign
        code, slot = _CODE[feature], self._slot(outcrop)
        self._rows[slot, code] += rows.sum(axis=0)
        _clear_if_empty(self._rows[slot, code])
        if code == _BEDDING:
            for cell, row in zip(cell_of(axes).tolist(), rows, strict=True):
                place = self._cell_slot(slot, cell)
                self._cell_rows[place] += row
                _clear_if_empty(self._cell_rows[place])

    def _slot(self, outcrop: str) -> int:
        slot = self._outcrop_at.setdefault(outcrop, len(self._outcrop_at))
        if slot == len(self._rows):
            self._rows = np.concatenate([self._rows, np.zeros((1, len(FEATURES), WIDTH))])
        return slot

    def _cell_slot(self, slot: int, cell: int) -> int:
        place = self._cell_at.setdefault((slot, cell), len(self._cell_at))
        if place == len(self._cell_rows):
            self._cell_rows = np.concatenate([self._cell_rows, np.zeros((max(8, place), WIDTH))])
        return place

    # -- adding --------------------------------------------------------------------------------------------

    def __add__(self, other: RunningSums) -> RunningSums:
        return self._merged(other, 1.0)

    def __sub__(self, other: RunningSums) -> RunningSums:
        return self._merged(other, -1.0)

    def copy(self) -> RunningSums:
        """Make sums of the same readings that no longer change with these."""
        return self + RunningSums()

    def _merged(self, other: RunningSums, sign: float) -> RunningSums:
        # Both are of this class, so their inner tables are this class's business.
        result = RunningSums()
        for source, factor in ((self, 1.0), (other, sign)):
            slots = [result._slot(name) for name in source._outcrop_at]  # noqa: SLF001
            result._rows[slots] += factor * source._rows  # noqa: SLF001
            places = [result._cell_slot(slots[slot], cell) for slot, cell in source._cell_at]  # noqa: SLF001
            result._cell_rows[places] += factor * source._cell_rows[: len(places)]  # noqa: SLF001
        empty = np.abs(result._rows[..., COUNT]) < 0.5
        result._rows[empty] = 0.0
        result._cell_rows[np.abs(result._cell_rows[:, COUNT]) < 0.5] = 0.0
        return result

    # -- reading -------------------------------------------------------------------------------------------

    @property
    def outcrops(self) -> tuple[str, ...]:
        """Names of the outcrops seen, in the order of `by_outcrop`; some may have lost all their readings."""
        return tuple(self._outcrop_at)

    @property
    def outcrops_read(self) -> int:
        """Number of outcrops that hold a reading now."""
        return int(np.count_nonzero(self._rows[..., COUNT].sum(axis=1) > 0.5))

    @property
    def rows(self) -> Floats:
        """Moments, shape (outcrops, features, 24), of all features in the order of `FEATURES`."""
        return self._rows

    def by_outcrop(self, feature: Feature) -> Floats:
        """Moments, shape (outcrops, 24), of one feature."""
        return self._rows[:, _CODE[feature]]

    def total(self, feature: Feature) -> Floats:
        """Moments, shape (24,), of one feature over all outcrops."""
        return np.asarray(self._rows[:, _CODE[feature]].sum(axis=0))

    def count(self, feature: Feature) -> int:
        """Number of readings of one feature."""
        return round(float(self._rows[:, _CODE[feature], COUNT].sum()))

    def bedding_cells(self) -> tuple[Floats, npt.NDArray[np.int64]]:
        """Moments (cells, 24) of bedding by outcrop and cell of attitude, and the outcrop's index (cells,)."""
        used = len(self._cell_at)
        owner = np.fromiter((slot for slot, _ in self._cell_at), dtype=np.int64, count=used)
        rows = self._cell_rows[:used]
        held = rows[:, COUNT] > 0.5
        return rows[held], owner[held]


def _check_axes(axes: Floats) -> None:
    # One number that is none would spoil the sums for good, with every reading before it.
    if axes.ndim != 2 or axes.shape[1] != 3:
        raise AttitudeError(f"an array of shape {axes.shape} holds no axes", expected="shape (3,) or (N, 3)")
    off = np.abs(np.einsum("ij,ij->i", axes, axes) - 1.0)
    good = off <= _NOT_UNIT
    if not good.all():
        row = int(np.argmin(good))
        raise AttitudeError(
            f"({', '.join(f'{part:g}' for part in axes[row])}) is no axis",
            where=f"reading {row + 1} of those added",
            expected="a unit vector: north, east, down",
        )


def _clear_if_empty(row: Floats) -> None:
    # What is left of a row whose last reading was taken back is rounding, not data.
    if abs(row[COUNT]) < 0.5:
        row[:] = 0.0


def _compact(keys: npt.NDArray[np.int64], size: int) -> tuple[npt.NDArray[np.int64], npt.NDArray[np.int64]]:
    """Keys that occur, ascending, and for each of `keys` (N,), 0 <= key < size, its place among them."""
    if size > _TABLE_AT_MOST:
        held, places = np.unique(keys, return_inverse=True)
        return held, places
    # A table of all keys finds the places without sorting.
    held = np.flatnonzero(np.bincount(keys))
    table = np.zeros(size, dtype=np.int64)
    table[held] = np.arange(len(held))
    return held, table[keys]


def _moments_by_key(
    axes: Floats, keys: npt.NDArray[np.int64], size: int
) -> tuple[npt.NDArray[np.int64], Floats]:
    """Keys that occur, ascending, and the sums of the moments, (K, 24), of the axes, (3, N), under each.

    N is at most `_CHUNK`.
    """
    held, places = _compact(keys, size)
    # Axes of one key come to lie side by side and are summed as a run. Places of so few fit 16 bits, which are
    # sorted the fastest.
    order = np.argsort(places.astype(np.uint16), kind="stable")
    counts = np.bincount(places, minlength=len(held))
    return held, summed_moments(np.take(axes, order, axis=1), np.cumsum(counts) - counts)


def grouped(rows: Floats, keys: npt.NDArray[np.integer], size: int) -> Floats:
    """Sums, shape (size, W), of rows, shape (N, W), by key, 0 <= key < size."""
    result = np.empty((size, rows.shape[1]))
    for column in range(rows.shape[1]):
        result[:, column] = np.bincount(keys, weights=rows[:, column], minlength=size)
    return result


def sums_of(readings: Iterable[tuple[Feature, str, Floats]]) -> RunningSums:
    """Running sums of (feature, outcrop, axis) readings, added one by one."""
    sums = RunningSums()
    for feature, outcrop, vector in readings:
        sums.add(feature, outcrop, vector)
    return sums
