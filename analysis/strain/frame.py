"""The frame in which strain is computed, and the sense of a fault.

x runs along the fault, y horizontally away from it, z down; angles in plan are measured from the fault
towards y. For a sinistral fault y points to the right of somebody who looks along x (x, y, z right-handed,
angles clockwise on the map); a dextral fault is its mirror image (angles anticlockwise). So shear of either
sense is positive in its own frame, the folds that it rotates lie at positive angles, and one set of
formulas serves both.
"""

from __future__ import annotations

from enum import StrEnum
from typing import TYPE_CHECKING

import numpy as np

from analysis.orient import vectors

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats


class Sense(StrEnum):
    """Sense of slip on a steep fault as seen on the map; the value is the word used in files and commands."""

    SINISTRAL = "sinistral"
    DEXTRAL = "dextral"
    UNKNOWN = "unknown"

    @property
    def sign(self) -> int:
        """+1 sinistral, -1 dextral, 0 unknown: the side of the fault, clockwise +, on which its folds lie."""
        return {"sinistral": 1, "dextral": -1, "unknown": 0}[self.value]


def signed_axis_angle_deg(from_deg: npt.ArrayLike, to_deg: npt.ArrayLike) -> Floats:
    """Angle in plan from one axis to another, clockwise positive: -90 < angle <= 90.

    Both are azimuths of axes: adding 180 to either changes nothing. Scalars or arrays of any shape.
    """
    turned = np.asarray(to_deg, dtype=float) - np.asarray(from_deg, dtype=float)
    return np.asarray(90.0 - np.mod(90.0 - turned, 180.0))


def map_to_frame(vector: npt.ArrayLike, fault_strike_deg: float, sign: int = 1) -> Floats:
    """Turn vectors, shape (..., 3), from north-east-down into the frame of a fault of sign +1 or -1."""
    return np.asarray(vector, dtype=float) @ _frame_axes(fault_strike_deg, sign)


def frame_to_map(vector: npt.ArrayLike, fault_strike_deg: float, sign: int = 1) -> Floats:
    """Turn vectors, shape (..., 3), from the frame of a fault into north-east-down; undoes `map_to_frame`."""
    return np.asarray(vector, dtype=float) @ _frame_axes(fault_strike_deg, sign).T


def _frame_axes(fault_strike_deg: float, sign: int) -> Floats:
    along = vectors.line_vector(fault_strike_deg, 0.0)
    across = sign * vectors.line_vector(fault_strike_deg + 90.0, 0.0)
    return np.stack([along, across, vectors.DOWN], axis=-1)
