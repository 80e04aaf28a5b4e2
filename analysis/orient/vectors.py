"""Directions as unit vectors: azimuths and angles in, vectors out, and back.

Vectors are in north, east, down and have shape (..., 3). Every function takes scalars or arrays of any
shape and returns arrays of that shape. Angles are degrees. Source of the direction cosines: any textbook of
structural geology; Allmendinger, Cardozo & Fisher (2012), Structural Geology Algorithms, ch. 2 (from memory).
"""

from __future__ import annotations

from typing import Final

import numpy as np
import numpy.typing as npt

from analysis.errors import AttitudeError

Floats = npt.NDArray[np.float64]
DOWN: Floats = np.array([0.0, 0.0, 1.0])
ROUNDING: Final = 1e-14  # of a component of a unit vector that should be zero
_NEXT, _AFTER = np.array([1, 2, 0]), np.array([2, 0, 1])


def wrap_azimuth_deg(azimuth_deg: npt.ArrayLike) -> Floats:
    """Bring azimuths, in degrees, into 0 <= azimuth < 360; 360 and tiny negative values become 0."""
    wrapped = np.mod(np.asarray(azimuth_deg, dtype=float), 360.0)
    # A tiny negative azimuth is rounded up to 360.0 by mod; it is north all the same.
    return np.where(wrapped >= 360.0, 0.0, wrapped)


def line_vector(trend_deg: npt.ArrayLike, plunge_deg: npt.ArrayLike) -> Floats:
    """Unit vector, shape (..., 3), of lines given by trend and plunge (positive down), in degrees."""
    trend, plunge = np.broadcast_arrays(
        np.radians(np.asarray(trend_deg, dtype=float)), np.radians(np.asarray(plunge_deg, dtype=float))
    )
    horizontal = np.cos(plunge)
    return np.stack([horizontal * np.cos(trend), horizontal * np.sin(trend), np.sin(plunge)], axis=-1)


def pole_vector(strike_deg: npt.ArrayLike, dip_deg: npt.ArrayLike) -> Floats:
    """Downward pole, shape (..., 3), of planes given by right-hand-rule strike and dip, in degrees.

    The pole trends opposite to the dip direction and plunges 90 - dip.
    """
    strike = np.asarray(strike_deg, dtype=float)
    return line_vector(strike - 90.0, 90.0 - np.asarray(dip_deg, dtype=float))


def unit(vector: npt.ArrayLike) -> Floats:
    """Scale vectors, shape (..., 3), to unit length; raises AttitudeError where one has no direction."""
    values = np.asarray(vector, dtype=float)
    length = np.linalg.norm(values, axis=-1, keepdims=True)
    if not np.all(np.isfinite(length)) or not np.all(length > 0.0):
        raise AttitudeError(
            "a vector of length zero or of unknown length has no direction",
            expected="finite components, not all zero",
            mend="Two parallel planes have no line of intersection, and two parallel lines no common plane.",
        )
    return np.asarray(values / length, dtype=float)


def lower_hemisphere(vector: npt.ArrayLike) -> Floats:
    """Turn unit axes, shape (..., 3), so that they point down; horizontal ones point into 0 <= azimuth < 180.

    What is left by rounding of a sine that should be zero counts as zero, so that one axis has one direction however
    it was reckoned.
    """
    v = np.asarray(vector, dtype=float)
    north, east, down = v[..., 0], v[..., 1], v[..., 2]
    level, along_north = np.abs(down) <= ROUNDING, np.abs(east) <= ROUNDING
    up = np.where(level, np.where(along_north, north < 0.0, east < 0.0), down < 0.0)
    # Adding zero turns -0.0 into 0.0, which arctan2 would read as the opposite direction.
    return np.where(up[..., np.newaxis], -v, v) + 0.0


def trend_plunge_deg(vector: npt.ArrayLike) -> tuple[Floats, Floats]:
    """Trend and plunge, in degrees, of axes with shape (..., 3), taken in the lower hemisphere."""
    v = lower_hemisphere(vector)
    plunge = np.degrees(np.arctan2(np.maximum(v[..., 2], 0.0), np.hypot(v[..., 0], v[..., 1])))
    trend = wrap_azimuth_deg(np.degrees(np.arctan2(v[..., 1], v[..., 0])))
    return trend, plunge


def strike_dip_deg(pole: npt.ArrayLike) -> tuple[Floats, Floats]:
    """Right-hand-rule strike and dip, in degrees, of the planes with these poles, shape (..., 3)."""
    trend, plunge = trend_plunge_deg(pole)
    return wrap_azimuth_deg(trend + 90.0), 90.0 - plunge


def cross(first: Floats, second: Floats) -> Floats:
    """Cross product of vectors with shapes (..., 3) that broadcast; faster than numpy's for few vectors."""
    return first[..., _NEXT] * second[..., _AFTER] - first[..., _AFTER] * second[..., _NEXT]


def axis_angle_deg(first: npt.ArrayLike, second: npt.ArrayLike) -> Floats:
    """Acute angle, 0 to 90 degrees, between two axes with shape (..., 3); exact for small angles."""
    a, b = np.asarray(first, dtype=float), np.asarray(second, dtype=float)
    crossed = np.linalg.norm(np.cross(a, b), axis=-1)
    dotted = np.abs(np.sum(a * b, axis=-1))
    return np.asarray(np.degrees(np.arctan2(crossed, dotted)), dtype=float)


def equal_area_xy(vector: npt.ArrayLike) -> Floats:
    """Place of axes on an equal-area net of radius 1, lower hemisphere: (..., 2), x east and y north.

    Lambert's azimuthal projection, r = sqrt(2) sin((90 - plunge)/2) (Fisher, Lewis & Embleton 1987, sec. 3.3,
    from memory).
    """
    v = lower_hemisphere(vector)
    # 1/sqrt(1 + down) is sqrt(2) sin(half the angle from vertical) over the horizontal length, without the
    # division by zero at the centre of the net.
    factor = 1.0 / np.sqrt(1.0 + v[..., 2])
    return np.stack([v[..., 1] * factor, v[..., 0] * factor], axis=-1)


def vector_from_equal_area_xy(xy: npt.ArrayLike) -> Floats:
    """Axes, shape (..., 3), at places (..., 2) on the equal-area net; the inverse of equal_area_xy.

    A place outside the net stands for the horizontal axis at the nearest point of its rim.
    """
    place = np.asarray(xy, dtype=float)
    place = place / np.maximum(np.linalg.norm(place, axis=-1, keepdims=True), 1.0)
    squared = np.minimum(np.sum(place * place, axis=-1), 1.0)
    factor = np.sqrt(2.0 - squared)
    return np.stack([place[..., 1] * factor, place[..., 0] * factor, 1.0 - squared], axis=-1)
