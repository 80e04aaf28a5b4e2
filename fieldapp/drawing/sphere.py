"""Curves on the lower hemisphere, as vectors (n, 3) in north, east, down. No Kivy import."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from analysis.orient import vectors

Floats = npt.NDArray[np.float64]


def great_circle(pole: npt.ArrayLike, count: int = 73) -> Floats:
    """The lower half of the plane with this pole, vectors (count, 3), from one end of its strike to the other."""
    strike, dip = vectors.strike_dip_deg(vectors.unit(pole))
    along = vectors.line_vector(strike, 0.0)
    down_dip = vectors.line_vector(strike + 90.0, dip)
    angle = np.linspace(0.0, np.pi, count)[:, np.newaxis]
    return np.asarray(along * np.cos(angle) + down_dip * np.sin(angle))


def ellipse(
    centre: npt.ArrayLike,
    major_axis: npt.ArrayLike,
    minor_axis: npt.ArrayLike,
    major_deg: float,
    minor_deg: float,
    count: int = 72,
) -> Floats:
    """A closed curve (count + 1, 3) round an axis, whose half axes are angles in degrees along two tangents."""
    turn = np.linspace(0.0, 2.0 * np.pi, count + 1)
    along = np.radians(min(major_deg, 89.0)) * np.cos(turn)
    across = np.radians(min(minor_deg, 89.0)) * np.sin(turn)
    angle = np.hypot(along, across)
    safe = np.where(angle > 0.0, angle, 1.0)
    tangent = (
        along[:, np.newaxis] * vectors.unit(major_axis) + across[:, np.newaxis] * vectors.unit(minor_axis)
    ) / safe[:, np.newaxis]
    return np.asarray(
        np.cos(angle)[:, np.newaxis] * vectors.unit(centre) + np.sin(angle)[:, np.newaxis] * tangent
    )


def lower_pieces(curve: npt.ArrayLike) -> list[Floats]:
    """Cut a curve (n, 3) where it leaves the lower hemisphere and turn the upper pieces down.

    Each cut end lies on the rim of the net, so that a curve that leaves on one side comes back on the other.
    """
    v = np.asarray(curve, dtype=float)
    if len(v) < 2:
        return []
    up = v[:, 2] < 0.0
    cuts = np.flatnonzero(up[1:] != up[:-1])
    pieces, start, lead = [], 0, np.zeros((0, 3))
    for cut in cuts:
        a, b = v[cut], v[cut + 1]
        share = a[2] / (a[2] - b[2])
        rim = vectors.unit(a + share * (b - a))[np.newaxis, :]
        rim[0, 2] = 0.0
        pieces.append(np.concatenate([lead, v[start : cut + 1], rim]) * (-1.0 if up[cut] else 1.0))
        start, lead = cut + 1, rim
    pieces.append(np.concatenate([lead, v[start:]]) * (-1.0 if up[-1] else 1.0))
    return [np.asarray(piece) for piece in pieces if len(piece) > 1]


def net_xy(v: npt.ArrayLike) -> Floats:
    """Places (n, 2) on a net of radius 1 of vectors (n, 3) that already point down or lie on the rim.

    Unlike `vectors.equal_area_xy` this does not turn horizontal vectors to one side, so that curves end where
    they were going.
    """
    down = np.asarray(v, dtype=float)
    factor = 1.0 / np.sqrt(1.0 + np.maximum(down[..., 2], 0.0))
    return np.stack([down[..., 1] * factor, down[..., 0] * factor], axis=-1)
