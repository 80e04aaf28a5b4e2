"""From a transection and its variance to a decision that may be looked at after every reading.

Broadcasts over a leading shape (...), so that the calibration runs the very code that the page runs.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final, NamedTuple

import numpy as np

from analysis.stats.watching import equivalence_multiplier, watched_multiplier

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.fold.settings import CheckSettings
    from analysis.fold.transection import Transection
    from analysis.orient.vectors import Floats
    from analysis.stats.axes import AxisFit

# No verdict before so many readings of a stream; the clock of the interval starts there.
PLANES_AT_FIRST_LOOK: Final = 6.0
LINES_AT_FIRST_LOOK: Final = 5.0
# The error of the angle is taken as linear in the error of the hinge; beyond this the girdle may even be lost
# in the scatter and the hinge swing to another axis. Measured: see the calibration.
HINGE_SE_AT_MOST_DEG: Final = 8.0
# What the hinge's error may make of the standard error of the transection. Measured: limbs of 15 degrees read
# with a scatter of 10 degrees, intervals miss in 7.0% of folds without this and in 4.9% with it.
HINGE_PART_AT_MOST_DEG: Final = 6.0
# Lines alone that make the cleavage dip less than this deny what was taken for granted of it: two standard
# deviations of STEEP_WITHIN_DEG. Measured, limbs 15, plunge 45: intervals miss in 6.2 and 6.5% of folds without
# this (transection 5, scatter 3; transection 10, scatter 6), and in 3.7 and 4.2% with it.
LEAST_DIP_BY_LINES_DEG: Final = 60.0
# Bedding further off its girdle than this is not one cylindrical fold. Common practice, no source: a fold is
# called cylindrical to within 10 and subcylindrical to within 20 degrees (Ramsay & Huber 1987, from memory).
GIRDLE_SCATTER_AT_MOST_DEG: Final = 15.0


class Watched(NamedTuple):
    """A watched interval and what follows from it, each of shape (...); variance in degrees squared."""

    low_deg: Floats
    high_deg: Floats
    looked: npt.NDArray[np.bool_]  # both streams have reached their first look, and the hinge is clear
    transected: npt.NDArray[np.bool_]
    axial_planar: npt.NDArray[np.bool_]
    variance: Floats  # what it was reckoned from, with its degrees of freedom
    freedom: Floats


def stream_progress(planes: npt.ArrayLike, lines: npt.ArrayLike) -> Floats:
    """Readings of a stream, (...), in units of those needed for the first look."""
    of_planes = np.asarray(planes, dtype=float) / PLANES_AT_FIRST_LOOK
    return np.asarray(of_planes + np.asarray(lines, dtype=float) / LINES_AT_FIRST_LOOK)


def hinge_is_clear(hinge: AxisFit) -> npt.NDArray[np.bool_]:
    """Tell, (...), whether the hinge is known well enough for its error to be reckoned with."""
    return np.asarray(np.degrees(hinge.less_certain_se_rad) <= HINGE_SE_AT_MOST_DEG)


def girdle_by_chance(hinge: AxisFit) -> Floats:
    """Chance, (...), that a single cluster of bedding poles is drawn out into a girdle as much as this one.

    Poles of one limb scatter evenly about their mean; few of them may look drawn out, and their hinge is any line in
    the bed. With l2, l3 the two smaller eigenvalues, V = 4 l2 l3/(l2 + l3)^2 has P(V <= v) = v^((n - 2)/2) for an even
    cluster (Mauchly 1940, two dimensions, from memory). Zero with hinge lines, which show the hinge without a girdle.
    """
    least, middle = -hinge.eigenvalues[..., 0], -hinge.eigenvalues[..., 1]
    from_lines = hinge.freedom > hinge.readings - 1.5  # a line gives two residuals, a bedding pole one
    with np.errstate(invalid="ignore", divide="ignore"):
        evenness = 4.0 * np.maximum(least, 0.0) * middle / (least + middle) ** 2
        chance = np.minimum(np.maximum(evenness, 0.0), 1.0) ** (0.5 * np.maximum(hinge.freedom, 0.0))
    return np.where(from_lines, 0.0, np.where(np.isfinite(chance), chance, 1.0))


def hinge_part_is_small(transection: Transection) -> npt.NDArray[np.bool_]:
    """Tell, (...), whether the hinge is known well enough in the direction that makes the transection."""
    return np.asarray(np.sqrt(transection.steady_hinge_variance) <= HINGE_PART_AT_MOST_DEG)


def lines_allow_steep(cleavage: AxisFit) -> npt.NDArray[np.bool_]:
    """Tell, (...), whether a cleavage fitted to lines alone bears out the steepness that was taken for granted."""
    return np.asarray(np.abs(cleavage.vector[..., 2]) <= np.cos(np.radians(LEAST_DIP_BY_LINES_DEG)))


def information_since_first_look(
    transection: Transection, hinge_progress: Floats, cleavage_progress: Floats
) -> Floats:
    """Information, (...), held now over that at the first look, from the counts and the variance now."""
    of_hinge, of_cleavage = transection.steady_hinge_variance, transection.steady_cleavage_variance
    with np.errstate(invalid="ignore", divide="ignore"):
        grown = (of_hinge * hinge_progress + of_cleavage * cleavage_progress) / (of_hinge + of_cleavage)
    return np.where(np.isfinite(grown), grown, 1.0)


def watch(
    transection: Transection, information: Floats, ready: npt.ArrayLike, settings: CheckSettings
) -> Watched:
    """Interval and decision; `ready` (...) says where both streams have reached their first look."""
    variance, freedom = transection.variance, transection.freedom
    with np.errstate(invalid="ignore"):
        se = np.sqrt(variance)
        half = watched_multiplier(information, freedom, settings.confidence) * se
        # Readings without any scatter leave a variance of zero, at which there is nothing to start late.
        floor = np.maximum(variance, 1e-12)
        narrow = se * equivalence_multiplier(
            floor, information, freedom, settings.margin_deg, 1.0 - settings.confidence
        )
    looked = np.asarray(ready, dtype=bool) & np.isfinite(half) & hinge_part_is_small(transection)
    size = np.abs(transection.delta_deg)
    transected = looked & (size > half)
    return Watched(
        low_deg=transection.delta_deg - half,
        high_deg=transection.delta_deg + half,
        looked=looked,
        transected=transected,
        axial_planar=looked & ~transected & (size + narrow < settings.margin_deg),
        variance=variance,
        freedom=freedom,
    )
