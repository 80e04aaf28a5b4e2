"""Whether rotation and partitioned transpression can be told apart here, and how many readings it would take.

Rotation's curve leaves the line of no transection at 45 degrees, is at most 5.15 degrees away from it, and
comes back to it at the fault. Near both ends the two predict the same, and no reading tells them apart.

The two are told apart where three things hold: their predictions differ by more than any compass can be wrong
in common, by more standard errors than chance makes of nothing, and the likelihood ratio is decisive. The
last is needed because the predictions are taken at a fold-fault angle that has an error itself: folds whose
angle came out where the two differ more would else be called too easily. A ratio of 19 to 1 is wrong in at
most 1 of 20 cases where both explanations are as likely beforehand.
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
_HALVINGS = 8  # to within one reading in a hundred


class Separation(NamedTuple):
    """How far apart the two predict the pair to lie at a fold-fault angle.

    Attributes
    ----------
    difference_deg
        Between the predicted transections; where the angle lies outside rotation's reach, how far outside.
    standard_errors
        The distance in standard errors: the smaller of that from rotation's point to the line of no
        transection and that from the point on this line to rotation's curve.

    """

    difference_deg: float
    standard_errors: float


class ReadingsToSeparate(NamedTuple):
    """Further readings that would separate the two: in all, and of each stream."""

    total: int
    hinge: int
    cleavage: int


def odds_needed(confidence: float) -> float:
    """Likelihood ratio, either way, that counts as decisive: 19 at a confidence of 0.95."""
    return confidence / (1.0 - confidence)


def resolved_se(confidence: float, df: float) -> float:
    """Separation, in standard errors, that chance alone does not make at this confidence."""
    return t_quantile(0.5 + 0.5 * confidence, df)


def needed_se(confidence: float, df: float) -> float:
    """Separation, in standard errors, at which a decisive ratio for the right explanation can be counted on.

    At a separation d the logarithm of the ratio has mean d^2/2 and standard deviation d, so that it passes
    ln(odds) with this confidence where d^2/2 - t d = ln(odds).
    """
    t = t_quantile(confidence, df)
    return t + math.sqrt(t * t + 2.0 * math.log(odds_needed(confidence)))


def separation(angle_deg: float, covariance: Floats) -> Separation:
    """Separation of the two explanations at a fold-fault angle, for the covariance (2, 2) of a pair there."""
    level = np.array([angle_deg, 0.0])
    to_curve = math.sqrt(Metric.of(covariance).nearest(rotation_curve(), level).misfit)
    outside = max(angle_deg - shear.START_ANGLE_DEG, -angle_deg)
    if outside > 0.0:
        return Separation(outside, to_curve)
    predicted = float(shear.rotation_transection_deg(angle_deg))
    to_line = predicted / math.sqrt(max(float(covariance[1, 1]), 1e-12))
    return Separation(predicted, min(to_line, to_curve))


def readings_to_separate(
    angle_deg: float, pair: FoldPair, fault: Fault, settings: ExplainSettings
) -> ReadingsToSeparate | None:
    """Fewest further readings of hinge and cleavage after which a decisive ratio can be counted on.

    The variance that each stream brings shrinks with its number of readings; that of the fault's strike does
    not. None where the predictions differ by less than the floor, where no number up to the forecast limit in
    each stream is enough or the numbers of readings are not known, and where those at hand should be enough
    already: then the pair lies between the two, and more readings need not settle it.
    """
    have = pair.hinge_readings + pair.cleavage_readings
    now = separation(angle_deg, _covariance_after(pair, fault, pair.hinge_readings, pair.cleavage_readings))
    known = pair.hinge_readings >= 1 and pair.cleavage_readings >= 1
    if now.difference_deg < settings.floor_deg or not known:
        return None
    if now.standard_errors >= needed_se(settings.confidence, pair.df):
        return None
    directions = _directions(angle_deg)
    # The variance to come down to, were the curve straight and the degrees of freedom those of the limit; what
    # it is in truth lies near, and is found by halving.
    grown = max(2.0 * settings.forecast_limit / have, 1.0)
    straight = (now.difference_deg / needed_se(settings.confidence, pair.df * grown)) ** 2
    low, high = 0.25 * straight, 1.5 * straight
    best = None
    for _ in range(_HALVINGS):
        variance = math.sqrt(low * high)
        found = _fewest(variance, directions, pair, fault, settings)
        if found is None:
            low = variance
        elif _separates(found, angle_deg, pair, fault, settings):
            best, low = found, variance
        else:
            high = variance
    return best


def _separates(
    more: ReadingsToSeparate, angle_deg: float, pair: FoldPair, fault: Fault, settings: ExplainSettings
) -> bool:
    """Whether so many more readings, at the scatter seen so far, bring the separation to what is needed."""
    hinge, cleavage = pair.hinge_readings + more.hinge, pair.cleavage_readings + more.cleavage
    grown = (hinge + cleavage) / (pair.hinge_readings + pair.cleavage_readings)
    after = separation(angle_deg, _covariance_after(pair, fault, hinge, cleavage))
    return after.standard_errors >= needed_se(settings.confidence, pair.df * grown)


def _directions(angle_deg: float) -> Floats:
    """Combinations (d, 2) of errors in angle and transection that the difference is measured against."""
    if not 0.0 <= angle_deg <= shear.START_ANGLE_DEG:
        return np.array([[1.0, 0.0]])
    left, right = shear.rotation_transection_deg(angle_deg + np.array([-_SLOPE_STEP_DEG, _SLOPE_STEP_DEG]))
    slope = float(right - left) / (2.0 * _SLOPE_STEP_DEG)
    return np.array([[0.0, 1.0], [-slope, 1.0]])


def _fewest(
    variance: float, directions: Floats, pair: FoldPair, fault: Fault, settings: ExplainSettings
) -> ReadingsToSeparate | None:
    """Fewest further readings that bring the variance in every direction down to this one."""
    hinge = np.arange(pair.hinge_readings, max(settings.forecast_limit, pair.hinge_readings) + 1)
    cleavage = np.full(hinge.shape, float(pair.cleavage_readings))
    from_hinge = _hinge_covariance(pair)
    for way in directions:
        fixed = float(way[0] ** 2) * fault.strike_se_deg**2
        left = variance - fixed - float(way @ from_hinge @ way) * pair.hinge_readings / hinge
        from_cleavage = float(way[1] ** 2) * pair.cleavage_part_deg2 * pair.cleavage_readings
        needed = np.where(left > 0.0, from_cleavage / np.where(left > 0.0, left, 1.0), np.inf)
        cleavage = np.maximum(cleavage, np.ceil(needed))
    cleavage[cleavage > max(settings.forecast_limit, pair.cleavage_readings)] = np.inf
    total = hinge + cleavage
    best = int(np.argmin(total))
    if not math.isfinite(float(total[best])):
        return None
    more_hinge = int(hinge[best]) - pair.hinge_readings
    more_cleavage = int(cleavage[best]) - pair.cleavage_readings
    return ReadingsToSeparate(more_hinge + more_cleavage, more_hinge, more_cleavage)


def _hinge_covariance(pair: FoldPair) -> Floats:
    shared = pair.covariance_deg2
    return np.array([[pair.trend_variance_deg2, shared], [shared, pair.hinge_part_deg2]])


def _covariance_after(pair: FoldPair, fault: Fault, hinge: int, cleavage: int) -> Floats:
    """Covariance of the pair once each stream has this many readings, at the scatter seen so far."""
    by_hinge = _hinge_covariance(pair) * (pair.hinge_readings / max(hinge, 1))
    by_cleavage = pair.cleavage_part_deg2 * pair.cleavage_readings / max(cleavage, 1)
    return np.asarray(by_hinge + np.diag([fault.strike_se_deg**2, by_cleavage]))
