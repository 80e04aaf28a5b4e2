"""Whether rotation and partitioned transpression can be told apart here, and how many readings it would take.

Rotation's curve leaves the line of no transection at 45 degrees, is at most 5.15 degrees away from it, and
comes back to it at the fault. Near both ends the two predict the same, and no reading tells them apart.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from analysis.stats.quantiles import t_quantile
from analysis.strain import shear
from analysis.strain.misfit import Metric, rotation_curve

if TYPE_CHECKING:
    from analysis.orient.vectors import Floats
    from analysis.strain.explanations import ExplainSettings
    from analysis.strain.observed import Fault, FoldPair

_SLOPE_STEP_DEG = 0.05


class Separation(NamedTuple):
    """How far apart the two predict the pair to lie at a fold-fault angle.

    Attributes
    ----------
    difference_deg
        Between the predicted transections; where the angle lies outside rotation's reach, how far outside.
    standard_errors
        The distance in standard errors: the smaller of that from rotation's point to the line of no
        transection and that from the point on this line to rotation's curve.
    directions
        (d, 2), the combinations of (angle, transection) errors that the difference is measured against.

    """

    difference_deg: float
    standard_errors: float
    directions: Floats


def needed_separation(confidence: float, df: float) -> float:
    """Separation, in standard errors, at which a likelihood points the right way with this confidence.

    The likelihood turns halfway between the two predictions, so it is twice the one-sided quantile of t.
    """
    return 2.0 * t_quantile(confidence, df)


class ReadingsToSeparate(NamedTuple):
    """Further readings that would separate the two: in all, and of each stream."""

    total: int
    hinge: int
    cleavage: int


def separation(metric: Metric, angle_deg: float, covariance: Floats) -> Separation:
    """Separation of the two explanations at a fold-fault angle, for the covariance that the metric is of."""
    level = np.array([angle_deg, 0.0])
    to_curve = math.sqrt(metric.nearest(rotation_curve(), level).misfit)
    outside = max(angle_deg - shear.START_ANGLE_DEG, -angle_deg)
    if outside > 0.0:
        return Separation(outside, to_curve, np.array([[1.0, 0.0]]))
    predicted, left, right = (
        float(value)
        for value in shear.rotation_transection_deg(
            angle_deg + np.array([0.0, -_SLOPE_STEP_DEG, _SLOPE_STEP_DEG])
        )
    )
    to_line = predicted / math.sqrt(max(float(covariance[1, 1]), 1e-12))
    slope = (right - left) / (2.0 * _SLOPE_STEP_DEG)
    return Separation(predicted, min(to_line, to_curve), np.array([[0.0, 1.0], [-slope, 1.0]]))


def readings_to_separate(
    apart: Separation,
    pair: FoldPair,
    fault: Fault,
    *,
    told: bool,
    settings: ExplainSettings,
) -> ReadingsToSeparate | None:
    """Fewest further readings of hinge and cleavage expected to bring the separation to what is needed.

    The variance that each stream brings shrinks with its number of readings; that of the fault's strike does
    not. The separation needed falls a little too, as degrees of freedom grow with the readings. None where no
    number up to the forecast limit in each stream does it, where the difference is below the floor, or where
    the numbers of readings are not known.
    """
    if told:
        return ReadingsToSeparate(0, 0, 0)
    if apart.difference_deg < settings.floor_deg or pair.hinge_readings < 1 or pair.cleavage_readings < 1:
        return None
    have = pair.hinge_readings + pair.cleavage_readings
    # Once with the degrees of freedom of the limit, then with those of the number found.
    guess = _fewest(apart, pair, fault, settings, 2.0 * settings.forecast_limit / have)
    if guess is None:
        return None
    return _fewest(apart, pair, fault, settings, 1.0 + guess.total / have) or guess


def _fewest(
    apart: Separation, pair: FoldPair, fault: Fault, settings: ExplainSettings, growth: float
) -> ReadingsToSeparate | None:
    needed_se = needed_separation(settings.confidence, pair.df * max(growth, 1.0))
    from_hinge = np.array(
        [[pair.trend_variance_deg2, pair.covariance_deg2], [pair.covariance_deg2, pair.hinge_part_deg2]]
    )
    hinge = np.arange(pair.hinge_readings, max(settings.forecast_limit, pair.hinge_readings) + 1)
    cleavage = np.full(hinge.shape, float(pair.cleavage_readings))
    # The exact separation now over its straight-line form now: carries the curve's bend over to the forecast.
    straight = min(
        apart.difference_deg / math.sqrt(_variance(way, from_hinge, pair, fault)) for way in apart.directions
    )
    wanted = (apart.difference_deg / needed_se * apart.standard_errors / max(straight, 1e-12)) ** 2
    for way in apart.directions:
        left = (
            wanted
            - float(way @ from_hinge @ way) * pair.hinge_readings / hinge
            - way[0] ** 2 * fault.strike_se_deg**2
        )
        from_cleavage = way[1] ** 2 * pair.cleavage_part_deg2 * pair.cleavage_readings
        needed = np.where(left > 0.0, from_cleavage / np.where(left > 0.0, left, 1.0), np.inf)
        cleavage = np.maximum(cleavage, np.ceil(needed))
    cleavage[cleavage > max(settings.forecast_limit, pair.cleavage_readings)] = np.inf
    total = hinge + cleavage
    best = int(np.argmin(total))
    if not math.isfinite(float(total[best])):
        return None
    more_hinge = int(hinge[best]) - pair.hinge_readings
    more_cleavage = int(cleavage[best]) - pair.cleavage_readings
    # Rounding may find nothing to add where the separation falls short by a hair.
    more_cleavage += int(more_hinge + more_cleavage == 0)
    return ReadingsToSeparate(more_hinge + more_cleavage, more_hinge, more_cleavage)


def _variance(way: Floats, from_hinge: Floats, pair: FoldPair, fault: Fault) -> float:
    return max(
        float(way @ from_hinge @ way)
        + float(way[1] ** 2) * pair.cleavage_part_deg2
        + float(way[0] ** 2) * fault.strike_se_deg**2,
        1e-12,
    )
