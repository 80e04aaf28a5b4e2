"""Unit vectors of many readings at once, in a third of the time that `vectors.line_vector` takes.

Sines and cosines are what the time goes into. Those of whole degrees come from a table; what is left of an angle
is at most half a degree, for which a few terms of the series are exact; the sum formulas put the two together.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats

_DEGREES: Final = np.radians(np.arange(361.0))
_SINES: Final = np.sin(_DEGREES)
_COSINES: Final = np.cos(_DEGREES)
_RADIAN: Final = float(np.radians(1.0))
_AT_ONCE: Final = 2**14  # readings whose intermediate values are in memory at a time: few enough to stay near


def axis_vectors(plane: npt.NDArray[np.bool_], azimuth_deg: Floats, inclination_deg: Floats) -> Floats:
    """Downward unit vectors, shape (N, 3), north, east, down, of planes (their poles) and of lines.

    Parameters
    ----------
    plane
        Whether each is a plane, (N,).
    azimuth_deg, inclination_deg
        Right-hand-rule strike and dip of the planes, trend and plunge of the lines, (N,); 0 to 360 and 0 to 90.

    """
    made = np.empty((len(plane), 3))
    for start in range(0, len(plane), _AT_ONCE):
        part = slice(start, start + _AT_ONCE)
        is_plane = plane[part]
        sine, cosine = sin_cos_deg(azimuth_deg[part])
        steep, flat = sin_cos_deg(inclination_deg[part])
        # The pole of a plane trends strike - 90 and plunges 90 - dip.
        horizontal = np.where(is_plane, steep, flat)
        made[part, 0] = horizontal * np.where(is_plane, sine, cosine)
        made[part, 1] = horizontal * np.where(is_plane, -cosine, sine)
        made[part, 2] = np.where(is_plane, flat, steep)
    return made


def sin_cos_deg(angle_deg: Floats) -> tuple[Floats, Floats]:
    """Sines and cosines, shape (N,), of angles from 0 to 360 degrees, shape (N,).

    As near to the true values as `numpy` comes by way of radians, 1e-15; for whole degrees the very same.
    """
    whole = np.rint(angle_deg)
    place = whole.astype(np.intp)
    sine, cosine = _SINES[place], _COSINES[place]
    rest = angle_deg - whole
    if not rest.any():  # as a compass is read
        return sine, cosine
    rest *= _RADIAN
    square = rest * rest
    # The first terms left out are below 1e-21 of the sine and 1e-21 of the cosine.
    small = rest * (1.0 - square * (1.0 / 6.0 - square * (1.0 / 120.0 - square / 5040.0)))
    short = square * (0.5 - square * (1.0 / 24.0 - square / 720.0))
    return sine - (sine * short - cosine * small), cosine - (cosine * short + sine * small)
