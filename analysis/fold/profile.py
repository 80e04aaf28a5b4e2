"""Profile transection: how far cleavage is turned about the hinge, off an axial surface, in the fold's profile."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from analysis.orient.vectors import cross, lower_hemisphere

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats


def profile_transection_deg(
    hinge: npt.ArrayLike, axial_surface_pole: npt.ArrayLike, cleavage_pole: npt.ArrayLike
) -> Floats:
    """Angle, -90 to 90 degrees, between the traces of axial surface and cleavage on the profile plane.

    tan(angle) = [(h x a).s]/(a.s), with the hinge h pointing down its plunge, axial-surface pole a and cleavage pole
    s (profile transection of Borradaile 1978, from memory). Looking down the plunge, clockwise is positive: the
    cleavage is turned clockwise off the axial surface. A horizontal hinge is looked along towards 0 to 180. The
    axial transection, the angle between hinge and cleavage plane, needs no axial surface and is independent of this.

    All three are unit vectors of shape (..., 3) that broadcast; their signs do not matter.
    """
    h = lower_hemisphere(hinge)
    a, s = (np.asarray(pole, dtype=float) for pole in (axial_surface_pole, cleavage_pole))
    across = np.sum(cross(h, a) * s, axis=-1)
    along = np.sum(a * s, axis=-1)
    # Turning a pole over turns the sign of both parts alike.
    flip = np.where(along < 0.0, -1.0, 1.0)
    return np.asarray(np.degrees(np.arctan2(across * flip, along * flip)))
