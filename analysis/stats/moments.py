"""Moments of axes: 24 numbers that hold all a verdict needs to know of any number of readings.

For axes x with weights w the row is

    count, sum w, sum w^2, sum w x x (6 numbers: the orientation tensor), sum w^2 x x x x (15 numbers)

Rows add. The second-order part gives principal axes (Scheidegger 1965; Watson 1966), the fourth-order part
their covariance (Tyler 1981; Prentice 1984), so neither needs the readings again. Every term is even in x:
x and -x give the same row.
"""

from __future__ import annotations

from itertools import combinations_with_replacement
from typing import TYPE_CHECKING, Final

import numpy as np

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats

COUNT: Final = 0
WEIGHT: Final = 1
WEIGHT_SQUARED: Final = 2
TENSOR: Final = slice(3, 9)
FOURTH: Final = slice(9, 24)
WIDTH: Final = 24

_ONE: Final = 1.0
# The six products x_i x_j and the fifteen products of four components, each in one fixed order.
_PAIRS: Final = ((0, 0), (1, 1), (2, 2), (0, 1), (0, 2), (1, 2))
_QUADS: Final = tuple(combinations_with_replacement(range(3), 4))
_PAIR_AT: Final = np.array([[_PAIRS.index((min(i, j), max(i, j))) for j in range(3)] for i in range(3)])
_QUAD_AT: Final = np.array([[_QUADS.index(tuple(sorted(p + q))) for q in _PAIRS] for p in _PAIRS])
_PAIR_I, _PAIR_J = (np.array([pair[k] for pair in _PAIRS]) for k in (0, 1))
# For each quadruple one pair of pairs that makes it.
_QUAD_FROM: Final = np.array([np.argwhere(k == _QUAD_AT)[0] for k in range(15)])
# The same from the first column of a row on.
_TENSOR_AT: Final = _PAIR_AT + 3
# A symmetric product u v, written in the order of _PAIRS, counts its off-diagonal terms twice.
_TWICE: Final = np.array([1.0, 1.0, 1.0, 2.0, 2.0, 2.0])


def moments(vectors: npt.ArrayLike, weights: npt.ArrayLike = _ONE) -> Floats:
    """One row of moments, shape (..., 24), for each axis, shape (..., 3); weights broadcast to (...)."""
    x = np.asarray(vectors, dtype=float)
    w = np.broadcast_to(np.asarray(weights, dtype=float), x.shape[:-1])
    pairs = x[..., _PAIR_I] * x[..., _PAIR_J]
    rows = np.empty((*x.shape[:-1], WIDTH))
    rows[..., COUNT] = 1.0
    rows[..., WEIGHT] = w
    rows[..., WEIGHT_SQUARED] = w * w
    rows[..., TENSOR] = pairs
    np.multiply(pairs[..., _QUAD_FROM[:, 0]], pairs[..., _QUAD_FROM[:, 1]], out=rows[..., FOURTH])
    if weights is not _ONE:
        rows[..., TENSOR] *= w[..., np.newaxis]
        rows[..., FOURTH] *= (w * w)[..., np.newaxis]
    return rows


def summed_moments(axes: Floats, starts: npt.NDArray[np.integer]) -> Floats:
    """Sums of rows of moments, shape (K, 24), of runs of axes of weight 1, without making the rows.

    `axes` is (3, N), components first; run k goes from `starts[k]` to the next start, and none is empty.
    """
    rows = np.empty((WIDTH, len(starts)))
    rows[: TENSOR.start] = np.diff(starts, append=axes.shape[1])
    pairs = np.empty((len(_PAIRS), axes.shape[1]))
    for pair, (i, j), row in zip(pairs, _PAIRS, rows[TENSOR], strict=True):
        np.multiply(axes[i], axes[j], out=pair)
        np.add.reduceat(pair, starts, out=row)
    quad = np.empty(axes.shape[1])
    for (p, q), row in zip(_QUAD_FROM.tolist(), rows[FOURTH], strict=True):
        np.multiply(pairs[p], pairs[q], out=quad)
        np.add.reduceat(quad, starts, out=row)
    return np.ascontiguousarray(rows.T)


def row_of_tensor(count: float, tensor_sum: Floats) -> Floats:
    """One row, shape (24,), of so many axes of weight 1 with this sum of x x^T, (3, 3); its fourth moments are 0."""
    row = np.zeros(WIDTH)
    row[[COUNT, WEIGHT, WEIGHT_SQUARED]] = count
    row[TENSOR] = tensor_sum[_PAIR_I, _PAIR_J]
    return row


def tensor(rows: Floats) -> Floats:
    """Orientation tensor, shape (..., 3, 3), of rows of moments: sum of w x x^T, not divided by anything."""
    return rows[..., _TENSOR_AT]


def tensor_of(six: Floats) -> Floats:
    """Symmetric matrix, shape (..., 3, 3), of the six numbers, (..., 6), that a row keeps of it."""
    return six[..., _PAIR_AT]


def fourth_of(fifteen: Floats) -> Floats:
    """Fourth moments, shape (..., 6, 6), between the six products of two components, of the fifteen kept in a row."""
    return fifteen[..., _QUAD_AT]


def product_pairs(u: Floats, v: Floats) -> Floats:
    """Coefficients, shape (..., 6), that read sum w (u.x)(v.x) ... out of TENSOR columns and `fourth_of`."""
    mixed = 0.5 * (u[..., _PAIR_I] * v[..., _PAIR_J] + u[..., _PAIR_J] * v[..., _PAIR_I])
    return np.asarray(mixed * _TWICE)


def scaled(rows: Floats, weight: npt.ArrayLike) -> Floats:
    """Rows whose readings all get their weight multiplied by `weight`, broadcast to the rows' shape (...)."""
    w = np.asarray(weight, dtype=float)[..., np.newaxis]
    return np.concatenate(
        [
            rows[..., :1],
            rows[..., 1:2] * w,
            rows[..., 2:3] * w * w,
            rows[..., TENSOR] * w,
            rows[..., FOURTH] * w * w,
        ],
        axis=-1,
    )
