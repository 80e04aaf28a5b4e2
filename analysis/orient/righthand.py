"""The right-hand rule: does a plane dip to the right of its strike, and if not, which plane was meant.

A strike read from the wrong end of the compass turns the plane round: 225/30 for 045/30. Two things can tell.
The dip quadrant, tapped or typed, says which way the bed dips. Without one the neighbours say it: the
reversed plane falls among the other readings of the outcrop and the entry far outside.
"""

from __future__ import annotations

import math
from enum import StrEnum
from typing import TYPE_CHECKING

import numpy as np

from analysis.errors import AttitudeError, NotationError
from analysis.orient import vectors

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.attitudes import Plane
    from analysis.orient.vectors import Floats

OCTANTS = ("N", "NE", "E", "SE", "S", "SW", "W", "NW")

# A quadrant this close to the strike line fits neither side. "Within 45 degrees of strike + 90", a quarter of
# the compass, would be too narrow for eight quadrants: a tap on the neighbour of the right octant lies up to
# 67.5 degrees from the dip direction (22.5 for the octant, 45 for the neighbour), and noise adds more. Both
# sides must reach that far, or good entries are questioned and reversed ones pass with the wrong words.
# Simulated with 3 degrees of pole noise, dips 15 to 75 degrees and one neighbour tapped in ten:
# 45 degrees either side of strike + 90 questions 5% of good entries and calls 95 to 96% of reversed strikes
# reversed; 80 degrees questions 0.03% and calls 99.97%.
ALONG_STRIKE_DEG = 10.0

FEWEST_NEIGHBOURS = 5
MOST_NEIGHBOURS = 200  # the newest ones speak for the outcrop; the time stays bounded
PRIOR_READINGS = 4.0  # METHOD's weak prior on the scatter of readings: 4 pseudo-readings at 5 degrees
PRIOR_SCATTER_DEG = 5.0
RAYLEIGH_MEDIAN = math.sqrt(2.0 * math.log(2.0))  # median distance from the centre in units of the scatter
# The reversed plane lies so many scatters from the centre at most; the first few readings tell the scatter badly.
WELL_INSIDE = 4.0
# Log likelihood ratio asked of "reversed" against "as entered". One strike in fifty reversed would ask for
# ln 49 = 3.9 if a question and a miss cost alike; a question costs one glance, so less is asked. It also puts
# the entry at least two scatters from the centre.
REVERSED_LOG_RATIO = 2.0
# Of unconfirmed readings on the entry's own side this share, or a single one, excuses nothing.
LONE_SHARE = 0.15


class QuadrantFit(StrEnum):
    """How a dip quadrant agrees with a strike."""

    FITS = "fits"
    REVERSED = "reversed"
    MISFIT = "misfit"


def octant_of(azimuth_deg: float) -> str:
    """Name the eighth of the compass (N NE E SE S SW W NW) an azimuth, in degrees, lies in.

    Each is 45 degrees wide about its own direction and holds its anticlockwise edge: 22.5 is NE.
    """
    if not math.isfinite(azimuth_deg):
        raise AttitudeError(f"azimuth {azimuth_deg} has no direction", expected="a finite number of degrees")
    return OCTANTS[int(((azimuth_deg + 22.5) % 360.0) // 45.0) % 8]


def octant_azimuth_deg(octant: str) -> float:
    """Give the azimuth in degrees in the middle of an octant; raises NotationError for any other word."""
    return OCTANTS.index(checked_octant(octant)) * 45.0


def checked_octant(text: str) -> str:
    """Give a dip quadrant in capitals, or raise NotationError."""
    octant = text.strip().upper()
    if octant not in OCTANTS:
        raise NotationError(
            f"{text!r} is no dip quadrant",
            where="dip quadrant",
            expected="one of " + " ".join(OCTANTS),
            mend="Give the side the plane dips towards.",
        )
    return octant


def off_deg(first_azimuth_deg: float, second_azimuth_deg: float) -> float:
    """Angle between two azimuths, 0 to 180 degrees."""
    return abs((first_azimuth_deg - second_azimuth_deg + 180.0) % 360.0 - 180.0)


def quadrant_fit(plane: Plane, octant: str) -> QuadrantFit:
    """Compare a tapped or typed dip quadrant with the side the right-hand rule gives.

    Less than 90 - ALONG_STRIKE_DEG degrees from strike + 90 fits; as near to strike - 90 the strike is
    reversed; what is left, within ALONG_STRIKE_DEG of the strike line (inclusive), fits neither. A horizontal
    or vertical plane dips to neither side: any quadrant fits it. Raises NotationError for a word that is no
    quadrant.
    """
    azimuth = octant_azimuth_deg(octant)
    if plane.dip_deg in (0.0, 90.0):
        return QuadrantFit.FITS
    off = off_deg(azimuth, plane.dip_direction_deg)
    if off < 90.0 - ALONG_STRIKE_DEG:
        return QuadrantFit.FITS
    if off > 90.0 + ALONG_STRIKE_DEG:
        return QuadrantFit.REVERSED
    return QuadrantFit.MISFIT


def reversed_among_neighbours(
    plane: Plane, neighbours: npt.ArrayLike, *, confirmed: npt.ArrayLike | None = None
) -> Plane | None:
    """Find the reversed plane, if the neighbours say that it was meant.

    Parameters
    ----------
    plane
        The entry, given without a dip quadrant.
    neighbours
        Poles (n, 3), unit vectors of either sign, of the earlier readings of the same feature at the same
        outcrop, oldest first. Fewer than FEWEST_NEIGHBOURS say nothing.
    confirmed
        Booleans (n,): those whose side is known, because their quadrant fitted or because they were kept
        against this very question. One of them beside the entry is enough to leave it in peace, so that a
        second limb in the outcrop is asked about once. Without it none is taken as confirmed.

    Returns
    -------
    Plane or None
        `plane.reversed` if its pole falls into the cluster, the entry's pole lies far outside, and the first
        is clearly the likelier under a normal scatter about the centre (a flat approximation on the sphere).
        None otherwise. Where both limbs stand in an outcrop the neighbours cannot tell a reversed strike
        from the other limb, and nothing is returned.

    """
    poles, sure = _checked_neighbours(neighbours, confirmed)
    if len(poles) < FEWEST_NEIGHBOURS:
        return None
    mend = plane.reversed
    centre, scatter = robust_centre(poles)
    entry_off = float(vectors.axis_angle_deg(plane.pole, centre))
    mend_off = float(vectors.axis_angle_deg(mend.pole, centre))
    if mend_off > WELL_INSIDE * scatter:
        return None
    if entry_off**2 - mend_off**2 < 2.0 * scatter**2 * REVERSED_LOG_RATIO:
        return None
    to_entry = vectors.axis_angle_deg(poles, plane.pole)
    beside = (to_entry < vectors.axis_angle_deg(poles, mend.pole)) & (to_entry < 3.0 * scatter)
    if bool(np.any(beside & sure)) or int(np.sum(beside)) > max(1.0, LONE_SHARE * len(poles)):
        return None
    return mend


def robust_centre(axes: Floats) -> tuple[Floats, float]:
    """Centre (3,) and scatter in degrees per direction of the main cluster of axes (n, 3), n > 0.

    Less than half of the axes may lie elsewhere. The centre is the principal axis of those within three
    scatters of the axis that has the smallest median angle to all others; the scatter comes from the median
    angle, blended with a weak prior (PRIOR_READINGS at PRIOR_SCATTER_DEG).
    """
    cosines = np.clip(np.abs(axes @ axes.T), 0.0, 1.0)
    medoid = axes[int(np.argmax(np.median(cosines, axis=1)))]
    centre, scatter = medoid, _blended_scatter_deg(vectors.axis_angle_deg(axes, medoid))
    for _ in range(2):
        near = axes[vectors.axis_angle_deg(axes, centre) <= 3.0 * scatter]
        if len(near):
            centre = np.linalg.eigh(near.T @ near)[1][:, -1]
        scatter = _blended_scatter_deg(vectors.axis_angle_deg(axes, centre))
    return np.asarray(centre, dtype=float), scatter


def _blended_scatter_deg(angles_deg: Floats) -> float:
    n = len(angles_deg)
    seen = float(np.median(angles_deg)) / RAYLEIGH_MEDIAN
    return math.sqrt((PRIOR_READINGS * PRIOR_SCATTER_DEG**2 + n * seen**2) / (PRIOR_READINGS + n))


def _checked_neighbours(
    neighbours: npt.ArrayLike, confirmed: npt.ArrayLike | None
) -> tuple[Floats, npt.NDArray[np.bool_]]:
    poles = np.asarray(neighbours, dtype=float).reshape(-1, 3)
    sure = np.zeros(len(poles), dtype=bool) if confirmed is None else np.asarray(confirmed, dtype=bool)
    if sure.shape != (len(poles),):
        raise AttitudeError(
            f"{sure.size} confirmations for {len(poles)} neighbours", expected="one for each neighbour"
        )
    return poles[-MOST_NEIGHBOURS:], sure[-MOST_NEIGHBOURS:]
