"""Running sums of many folds at once, as sorted arrays: what a survey's archive is reduced to.

The same moments, cells and addition as `RunningSums`, laid out so that tens of thousands of folds add in array
operations: `a + b` joins the keys and adds the rows, the empty sums are its zero, and `split` gives the
`RunningSums` of single folds. A group is a fold, or a square of the map.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.orient.features import Feature
from analysis.stats.moments import COUNT, WIDTH, moments
from analysis.stats.sums import CELLS, FEATURES, RunningSums, cell_of, grouped

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    import numpy.typing as npt

    from analysis.orient.vectors import Floats

Place = tuple[str, str]  # the group, and the outcrop within it

_KINDS: Final = len(FEATURES)
_BEDDING: Final = FEATURES.index(Feature.BEDDING)
_CHUNK: Final = 65_536  # axes whose moments are in memory at a time


@dataclass(frozen=True, slots=True)
class _Keyed:
    """Rows (K, W) by sorted keys (K,) without repetition."""

    keys: npt.NDArray[np.int64]
    rows: Floats

    @classmethod
    def none(cls, width: int) -> _Keyed:
        return cls(np.zeros(0, dtype=np.int64), np.zeros((0, width)))

    @classmethod
    def of(cls, keys: npt.NDArray[np.int64], rows: Floats) -> _Keyed:
        """Sum rows, shape (N, W), by key."""
        unique, places = np.unique(keys, return_inverse=True)
        return cls(unique, grouped(rows, places, len(unique)))

    def moved(self, keys: npt.NDArray[np.int64]) -> _Keyed:
        """Give the same rows under other keys, each different."""
        order = np.argsort(keys)
        return self if np.array_equal(keys, self.keys) else _Keyed(keys[order], self.rows[order])

    def merged(self, other: _Keyed, sign: float) -> _Keyed:
        if not len(other.keys):
            return self
        keys = np.union1d(self.keys, other.keys)
        rows = np.zeros((len(keys), self.rows.shape[1]))
        rows[np.searchsorted(keys, self.keys)] = self.rows
        rows[np.searchsorted(keys, other.keys)] += sign * other.rows
        return _Keyed(keys, rows)

    def held(self, count_column: int) -> _Keyed:
        """Drop rows that hold no reading any more: what is left of them is rounding."""
        held = self.rows[:, count_column] > 0.5
        return self if held.all() else _Keyed(self.keys[held], self.rows[held])


class ManySums:
    """Moments of all readings of many groups, by group, outcrop and feature, and the groups' mean positions.

    Does not change; `+` and `-` make new ones. `split` gives the running sums of single groups.
    """

    __slots__ = ("_cells", "_places", "_positions", "_rows")

    def __init__(self) -> None:
        self._places: dict[Place, int] = {}
        self._rows = _Keyed.none(WIDTH)  # by place and feature
        self._cells = _Keyed.none(WIDTH)  # bedding by place and cell of attitude
        self._positions = _Keyed.none(4)  # count, and sum of the upward unit vectors, by place

    @classmethod
    def of(
        cls,
        places: Sequence[Place],
        place_codes: npt.NDArray[np.integer],
        feature_codes: npt.NDArray[np.integer],
        vectors: Floats,
        positions: Floats,
    ) -> ManySums:
        """Sum readings.

        Parameters
        ----------
        places
            (group, outcrop) names, each once.
        place_codes, feature_codes
            (N,), places in `places` and in `FEATURES`.
        vectors
            (N, 3), unit vectors: poles of planes, and lines.
        positions
            (N, 3), unit vectors from the middle of the Earth to where each reading was taken; NaN where unknown.

        """
        made = cls()
        made._places = {place: code for code, place in enumerate(places)}
        for start in range(0, len(vectors), _CHUNK):
            part = slice(start, start + _CHUNK)
            at = np.asarray(place_codes[part], dtype=np.int64)
            codes = np.asarray(feature_codes[part], dtype=np.int64)
            rows = moments(vectors[part])
            beds = codes == _BEDDING
            cells = at[beds] * CELLS + cell_of(vectors[part][beds])
            known = ~np.isnan(positions[part, 0])
            counted = np.concatenate([np.ones((len(at), 1)), positions[part]], axis=1)[known]
            made._rows = made._rows.merged(_Keyed.of(at * _KINDS + codes, rows), 1.0)
            made._cells = made._cells.merged(_Keyed.of(cells, rows[beds]), 1.0)
            made._positions = made._positions.merged(_Keyed.of(at[known], counted), 1.0)
        return made

    def __add__(self, other: ManySums) -> ManySums:
        return self._merged(other, 1.0)

    def __sub__(self, other: ManySums) -> ManySums:
        result = self._merged(other, -1.0)
        result._rows = result._rows.held(COUNT)
        result._cells = result._cells.held(COUNT)
        result._positions = result._positions.held(0)
        return result

    def _merged(self, other: ManySums, sign: float) -> ManySums:
        result = ManySums()
        result._places = dict(self._places)
        moved = np.array(
            [result._places.setdefault(place, len(result._places)) for place in other._places], dtype=np.int64
        )
        result._rows = self._rows.merged(_recoded(other._rows, moved, _KINDS), sign)
        result._cells = self._cells.merged(_recoded(other._cells, moved, CELLS), sign)
        result._positions = self._positions.merged(_recoded(other._positions, moved, 1), sign)
        return result

    # -- reading -------------------------------------------------------------------------------------------

    @property
    def groups(self) -> tuple[str, ...]:
        """Names of the groups that hold a reading, sorted."""
        names = list(self._places)
        held = np.unique(self._rows.keys[self._rows.rows[:, COUNT] > 0.5] // _KINDS)
        return tuple(sorted({names[place][0] for place in held.tolist()}))

    def count(self) -> int:
        """Number of readings of all groups."""
        return round(float(self._rows.rows[:, COUNT].sum()))

    def split(self, groups: Iterable[str]) -> dict[str, tuple[RunningSums, Floats]]:
        """Give the running sums of each of these groups, and its positions' count and vector sum, shape (4,)."""
        wanted = {group: _Group([], []) for group in groups}
        for (group, outcrop), code in self._places.items():
            if group in wanted:
                wanted[group].outcrops.append(outcrop)
                wanted[group].codes.append(code)
        return {name: self._of_group(group) for name, group in wanted.items()}

    def _of_group(self, group: _Group) -> tuple[RunningSums, Floats]:
        rows = np.zeros((len(group.codes), _KINDS, WIDTH))
        owners, cells, cell_rows = [], [], []
        position = np.zeros(4)
        for slot, code in enumerate(group.codes):
            keys, found = _range(self._rows, code, _KINDS)
            rows[slot, keys] = found
            keys, found = _range(self._cells, code, CELLS)
            owners.append(np.full(len(keys), slot))
            cells.append(keys)
            cell_rows.append(found)
            position += _range(self._positions, code, 1)[1].sum(axis=0)
        sums = RunningSums.from_rows(
            group.outcrops, rows, np.concatenate(owners), np.concatenate(cells), np.concatenate(cell_rows)
        )
        return sums, position


@dataclass(frozen=True, slots=True)
class _Group:
    outcrops: list[str]
    codes: list[int]


def _recoded(keyed: _Keyed, moved: npt.NDArray[np.int64], factor: int) -> _Keyed:
    if not len(keyed.keys):
        return keyed
    return keyed.moved(moved[keyed.keys // factor] * factor + keyed.keys % factor)


def _range(keyed: _Keyed, place: int, factor: int) -> tuple[npt.NDArray[np.int64], Floats]:
    """Give the keys within one place and their rows."""
    start, end = np.searchsorted(keyed.keys, [place * factor, (place + 1) * factor])
    return keyed.keys[start:end] - place * factor, keyed.rows[start:end]
