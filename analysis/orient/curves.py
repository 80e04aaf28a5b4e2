"""Curves on the sphere and their places on the equal-area net: great circles, confidence ellipses.

Curves are unit vectors, shape (n, 3), in north, east, down. An axis near the rim of the net has an ellipse that
leaves the lower hemisphere; since an axis has two ends, what leaves on one side comes back on the other, and
`lower_pieces` cuts the curve there.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.orient.vectors import line_vector, strike_dip_deg, unit

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats

# A half-angle of 90 degrees is no cone any more; nearer to it than this nothing can be seen on a net.
_WIDEST_DEG: Final = 89.5
_DENSE: Final = 1440


def great_circle(pole: npt.ArrayLike, count: int = 181) -> Floats:
    """Lower half, shape (count, 3), of the plane with this pole, from one end of its strike to the other."""
    strike, dip = strike_dip_deg(unit(pole))
    turn = np.linspace(0.0, np.pi, count)[:, np.newaxis]
    curve = line_vector(strike, 0.0) * np.cos(turn) + line_vector(strike + 90.0, dip) * np.sin(turn)
    curve[[0, -1], 2] = 0.0
    return np.asarray(curve)


def ellipse(
    centre: npt.ArrayLike,
    major_axis: npt.ArrayLike,
    minor_axis: npt.ArrayLike,
    major_deg: float,
    minor_deg: float,
    count: int = 180,
) -> Floats:
    """Closed curve, shape (count + 1, 3), of a confidence ellipse about an axis, evenly spaced.

    `major_axis` and `minor_axis` are unit vectors at right angles to `centre` and to each other; the
    half-angles, degrees, open along them. The curve is an ellipse in the plane that touches the sphere at the
    centre, seen from the middle of the sphere: the form in which `analysis.stats.axes.confidence_ellipse`
    states it.
    """
    turn = np.linspace(0.0, 2.0 * np.pi, _DENSE + 1)
    rough = _cone(turn, centre, major_axis, minor_axis, major_deg, minor_deg)
    steps = np.linalg.norm(np.diff(rough, axis=0), axis=1)
    along = np.concatenate([[0.0], np.cumsum(steps)])
    if not along[-1] > 0.0:
        return np.repeat(unit(centre)[np.newaxis], count + 1, axis=0)
    even = np.interp(np.linspace(0.0, along[-1], count + 1), along, turn)
    return _cone(even, centre, major_axis, minor_axis, major_deg, minor_deg)


def _cone(
    turn: Floats,
    centre: npt.ArrayLike,
    major_axis: npt.ArrayLike,
    minor_axis: npt.ArrayLike,
    major_deg: float,
    minor_deg: float,
) -> Floats:
    half = np.tan(np.radians(np.minimum([major_deg, minor_deg], _WIDEST_DEG)))
    away = np.cos(turn)[:, np.newaxis] * half[0] * unit(major_axis) + np.sin(turn)[:, np.newaxis] * half[
        1
    ] * unit(minor_axis)
    return unit(unit(centre) + away)


def lower_pieces(curve: npt.ArrayLike) -> list[Floats]:
    """Cut a curve, shape (n, 3), where it crosses the horizontal, and turn what lies above it over.

    Each piece lies in the lower hemisphere and ends on the rim of the net where it was cut. A closed curve,
    whose last point is its first, that is never cut stays closed.
    """
    v = np.array(curve, dtype=float)
    closed = len(v) > 2 and bool(np.allclose(v[0], v[-1], atol=1e-12))
    if closed:
        v[-1] = v[0]  # or rounding could put the two ends on two sides of the horizontal
    up = v[:, 2] < 0.0
    cuts = np.flatnonzero(up[1:] != up[:-1])
    if not len(cuts):
        return [np.where(up[:1, np.newaxis], -v, v) + 0.0] if len(v) else []
    pieces = []
    for start, stop in zip([-1, *cuts], [*cuts, len(v) - 1], strict=True):
        inner = v[start + 1 : stop + 1]
        ends = [_crossing(v[k], v[k + 1]) if k in cuts else np.zeros((0, 3)) for k in (start, stop)]
        piece = np.concatenate([ends[0], inner, ends[1]])
        pieces.append(-piece if up[start + 1] else piece)
    if closed:
        # The curve may start in the middle of a piece: its last stretch leads into its first.
        last = pieces.pop()
        pieces[0] = np.concatenate([last, pieces[0][1:]])
    return [piece + 0.0 for piece in pieces]


def _crossing(first: Floats, second: Floats) -> Floats:
    """Point, shape (1, 3), where the way from one vector to the next crosses the horizontal."""
    share = first[2] / (first[2] - second[2])
    rim = unit(first + share * (second - first))
    rim[2] = 0.0
    return np.asarray(unit(rim)[np.newaxis])


def net_xy(curve: npt.ArrayLike) -> Floats:
    """Places (..., 2) on a net of radius 1, x east and y north, of vectors (..., 3) that do not point up.

    Unlike `analysis.orient.vectors.equal_area_xy` this leaves horizontal vectors on the side they are on, so
    that a curve ends where it was going.
    """
    v = np.asarray(curve, dtype=float)
    factor = 1.0 / np.sqrt(1.0 + np.maximum(v[..., 2], 0.0))
    return np.stack([v[..., 1] * factor, v[..., 0] * factor], axis=-1)


def rim_arc(from_xy: npt.ArrayLike, to_xy: npt.ArrayLike, count: int = 31) -> Floats:
    """Shorter way along the rim of the net, shape (count, 2), between two places on it, shape (2,)."""
    start, stop = (np.arctan2(xy[1], xy[0]) for xy in (np.asarray(from_xy), np.asarray(to_xy)))
    way = (stop - start + np.pi) % (2.0 * np.pi) - np.pi
    turn = start + way * np.linspace(0.0, 1.0, count)
    return np.stack([np.cos(turn), np.sin(turn)], axis=-1)
