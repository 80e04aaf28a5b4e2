"""How far a pair of fold-fault angle and transection lies from what an explanation predicts.

A misfit is the squared Mahalanobis distance, in the metric of the pair's covariance, from the pair to the
nearest point of a curve or region in the plane of fold-fault angle (first) against transection (second), both
degrees. The likelihood of an explanation is that at its nearest point: a profile likelihood, so explanations
with the same number of free values (points on a curve: one) may be compared by it.
"""

from __future__ import annotations

import math
from functools import lru_cache
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from analysis.errors import SettingError
from analysis.strain import shear

if TYPE_CHECKING:
    from analysis.orient.vectors import Floats

SMALLEST_SE_DEG = 1e-3  # errors below this are rounding; it keeps a covariance from being singular
_NEAREST_ZERO_DEG = 1e-3  # curves stop this short of the fault, where shear would be endless


class Nearest(NamedTuple):
    """The nearest point of a curve: its misfit, and its place (2,) in degrees."""

    misfit: float
    place: Floats


class Metric(NamedTuple):
    """The metric of a covariance: `whitener` (2, 2) turns differences in degrees into standard errors."""

    whitener: Floats
    log_determinant: float

    @classmethod
    def of(cls, covariance: Floats) -> Metric:
        """Make the metric of a covariance, (2, 2) degrees squared; raises SettingError if it is none."""
        first, shared = float(covariance[0, 0]) + SMALLEST_SE_DEG**2, float(covariance[0, 1])
        # What is left of the second variance once the first is known: Cholesky's root of two by two, by hand.
        left = float(covariance[1, 1]) + SMALLEST_SE_DEG**2 - shared * shared / first if first > 0.0 else -1.0
        if not left > 0.0:
            raise SettingError(
                "the covariance of fold-fault angle and transection is none",
                where="covariance",
                expected="a symmetric matrix with no negative variance in any direction",
            )
        one, two = math.sqrt(first), math.sqrt(left)
        whitener = np.array([[1.0 / one, 0.0], [-shared / (first * two), 1.0 / two]])
        return cls(whitener, math.log(first) + math.log(left))

    def misfit(self, places: Floats, datum: Floats) -> Floats:
        """Misfit, shape (...), of places (..., 2) against the datum (2,)."""
        away = (places - datum) @ self.whitener.T
        return np.asarray(np.sum(away * away, axis=-1))

    def nearest(self, curve: Floats, datum: Floats) -> Nearest:
        """Nearest point of a polyline (n, 2), n >= 2, to the datum (2,)."""
        start, end = curve[:-1], curve[1:]
        misfit, share = misfit_to_segments((start - datum) @ self.whitener.T, (end - start) @ self.whitener.T)
        best = int(np.argmin(misfit))
        return Nearest(float(misfit[best]), start[best] + share[best] * (end[best] - start[best]))

    def loglik(self, misfit: float, df: float) -> float:
        """Log density, per degree squared, of the pair under an explanation with this misfit.

        Student's t in two dimensions with `df` degrees of freedom, normal where that is infinite.
        """
        density = -math.log(2.0 * math.pi) - 0.5 * self.log_determinant
        if math.isinf(df):
            return density - 0.5 * misfit
        return density - 0.5 * (df + 2.0) * math.log1p(misfit / df)


def misfit_to_segments(start: Floats, along: Floats) -> tuple[Floats, Floats]:
    """Misfit, (...), of the nearest point of straight pieces, and the share of each, 0 to 1, at which it lies.

    `start` and `along` (..., 2), in standard errors, run from the datum to where a piece starts, and along it.
    """
    length = np.maximum(np.sum(along * along, axis=-1), 1e-300)
    share = np.clip(-np.sum(start * along, axis=-1) / length, 0.0, 1.0)
    away = start + share[..., np.newaxis] * along
    return np.asarray(np.sum(away * away, axis=-1)), share


@lru_cache(maxsize=1)
def rotation_curve() -> Floats:
    """Pairs, (n, 2), that rotation in simple shear predicts, from 45 degrees towards the fault."""
    angle = np.linspace(shear.START_ANGLE_DEG, _NEAREST_ZERO_DEG, 451)
    curve = np.stack([angle, shear.rotation_transection_deg(angle)], axis=-1)
    curve.flags.writeable = False  # it is shared
    return curve


NO_TRANSECTION: Floats = np.array([[-180.0, 0.0], [180.0, 0.0]])
"""Pairs that partitioned transpression predicts: no transection at any fold-fault angle."""
NO_TRANSECTION.flags.writeable = False


@lru_cache(maxsize=1)
def _transpression_grid() -> tuple[Floats, Floats, Floats]:
    convergence, log_strain = np.meshgrid(
        np.linspace(0.0, 90.0, 46), np.linspace(math.log(1e-3), math.log(200.0), 90), indexing="ij"
    )
    return convergence, log_strain, _transpression_places(convergence, log_strain)


def _transpression_places(convergence_deg: Floats, log_strain: Floats) -> Floats:
    predicted = shear.transpression(convergence_deg, np.exp(log_strain))
    return np.stack([predicted.hinge_deg, predicted.transection_deg], axis=-1)


def nearest_transpression(metric: Metric, datum: Floats) -> tuple[Nearest, float, float]:
    """Nearest point that unpartitioned transpression reaches, with its convergence angle and strain t.

    A coarse grid over both finds the basin, four finer ones the place, to well below a hundredth of a
    standard error. Where many pairs of convergence and strain fit alike, one of them is given: see
    `analysis.strain.inverse` for all of them.
    """
    convergence, log_strain, places = _transpression_grid()
    misfit = metric.misfit(places, datum)
    best = np.unravel_index(int(np.argmin(misfit)), misfit.shape)
    angle, logarithm = float(convergence[best]), float(log_strain[best])
    reach_angle, reach_log = 2.0, 0.14
    steps = np.linspace(-1.0, 1.0, 13)
    for _ in range(4):
        near_angle, near_log = np.meshgrid(
            np.clip(angle + reach_angle * steps, 0.0, 90.0), logarithm + reach_log * steps, indexing="ij"
        )
        places = _transpression_places(near_angle, near_log)
        misfit = metric.misfit(places, datum)
        best = np.unravel_index(int(np.argmin(misfit)), misfit.shape)
        angle, logarithm = float(near_angle[best]), float(near_log[best])
        reach_angle, reach_log = reach_angle / 4.0, reach_log / 4.0
    return Nearest(float(misfit[best]), places[best]), angle, math.exp(logarithm)


def nearest_late_cleavage(metric: Metric, datum: Floats) -> Nearest:
    """Nearest point that rotation with cleavage from any later moment on reaches.

    It reaches every pair between the curve of rotation (cleavage from the start) and the line angle +
    transection = 45 degrees (cleavage only at the very end).
    """
    angle, transection = float(datum[0]), float(datum[1])
    if 0.0 < angle <= shear.START_ANGLE_DEG:
        lowest = float(shear.rotation_transection_deg(angle))
        if lowest <= transection <= shear.START_ANGLE_DEG - angle:
            return Nearest(0.0, datum)
    whole = shear.START_ANGLE_DEG
    upper = np.array([[whole, 0.0], [0.0, whole]])
    shore = np.array([[0.0, whole], [0.0, 0.0]])
    edges = [metric.nearest(edge, datum) for edge in (rotation_curve(), upper, shore)]
    return min(edges, key=lambda edge: edge.misfit)
