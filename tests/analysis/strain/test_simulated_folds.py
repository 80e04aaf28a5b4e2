"""Folds simulated under each explanation, read, estimated and explained.

Hinge and cleavage are estimated here by eigenvectors of the orientation tensor with Tyler's (1981)
covariance, METHOD section 3, written out with the readings at hand: independent of the running sums. Bounds
asked for: right in at least 95% where told apart; never told apart where rotation predicts 0.43 degrees, at
5 degrees (METHOD section 6).
"""

import numpy as np
import pytest

from analysis.orient.vectors import line_vector
from analysis.strain import shear
from analysis.strain.explanations import explain
from analysis.strain.frame import Sense
from analysis.strain.observed import Fault, FoldPair, KnownAxis, pair_of_axes

ANGLES_DEG = (5.0, 15.0, 27.0, 40.0)
FOLDS = 100


def scattered(rng, axes, scatter_deg):
    """Axes (..., 3) with a normal error of this size, degrees, in each of two directions across them."""
    error = np.radians(scatter_deg) * rng.normal(size=axes.shape)
    error -= np.sum(error * axes, axis=-1, keepdims=True) * axes
    turned = axes + error
    return turned / np.linalg.norm(turned, axis=-1, keepdims=True)


def known_axes(readings, *, smallest):
    """Principal axis of readings (folds, n, 3), the smallest or the largest, with Tyler's covariance."""
    n = readings.shape[1]
    values, columns = np.linalg.eigh(np.einsum("fni,fnj->fij", readings, readings) / n)
    own, others = (0, [1, 2]) if smallest else (2, [0, 1])
    vector, across = columns[..., own], columns[..., others]
    along = np.einsum("fni,fi->fn", readings, vector)
    sideways = np.einsum("fni,fij->fnj", readings, across)
    gap = values[:, own, np.newaxis] - values[:, others]
    covariance = np.einsum("fnj,fnk,fn->fjk", sideways, sideways, along**2) / n
    covariance /= gap[:, :, np.newaxis] * gap[:, np.newaxis, :] * (n - 1)
    return [KnownAxis(*each) for each in zip(vector, across, covariance, strict=True)]


def simulated_pairs(
    rng, *, folds, hinge_trend_deg, transection_deg, readings, scatter_deg, limb_dip_deg=55.0, plunge_deg=0.0
) -> list[FoldPair]:
    """Pairs of fold-fault angle and transection from simulated readings of bedding and of cleavage."""
    hinge = line_vector(hinge_trend_deg, plunge_deg)
    side = line_vector(hinge_trend_deg + 90.0, 0.0)
    up = np.cross(hinge, side)
    dips = np.radians(limb_dip_deg) * np.where(np.arange(readings) % 2, 1.0, -1.0)[:, np.newaxis]
    bedding = np.broadcast_to(np.cos(dips) * up + np.sin(dips) * side, (folds, readings, 3))
    # The pole of a vertical cleavage plane that holds the line at the transection from the hinge in plan.
    pole = line_vector(hinge_trend_deg + transection_deg + 90.0, 0.0)
    cleavage = np.broadcast_to(pole, (folds, readings, 3))
    hinges = known_axes(scattered(rng, bedding, scatter_deg), smallest=True)
    poles = known_axes(scattered(rng, cleavage, scatter_deg), smallest=False)
    return [
        pair_of_axes(h, s, df=2.0 * readings - 3.0, hinge_readings=readings, cleavage_readings=readings)
        for h, s in zip(hinges, poles, strict=True)
    ]


@pytest.fixture(scope="module")
def outcomes():
    """For each angle and truth: told apart, pointing the right way (100,); strikes err by 2 degrees."""
    found = {}
    rng = np.random.default_rng(20)
    for angle_deg in ANGLES_DEG:
        for truth in ("rotation", "partitioned"):
            transection_deg = float(shear.rotation_transection_deg(angle_deg)) if truth == "rotation" else 0.0
            pairs = simulated_pairs(
                rng, folds=FOLDS, hinge_trend_deg=30.0 + angle_deg, transection_deg=transection_deg,
                readings=60, scatter_deg=4.0,
            )  # fmt: skip
            strikes_deg = 30.0 + 2.0 * rng.normal(size=FOLDS)
            checks = [
                explain(Fault(strike_deg=strike_deg, sense=Sense.SINISTRAL, strike_se_deg=2.0), pair)
                for strike_deg, pair in zip(strikes_deg, pairs, strict=True)
            ]
            found[angle_deg, truth] = (
                np.array([check.can_be_told_apart for check in checks]),
                np.array([(check.likelihood_ratio > 1.0) == (truth == "rotation") for check in checks]),
                checks,
            )
    return found


def test_where_the_two_are_told_apart_the_likelihood_points_the_right_way(outcomes):
    """Of all folds told apart, and of those at each angle, at least 95 in 100 are pointed the right way."""
    all_told = all_right = 0
    for angle_deg in ANGLES_DEG:
        told, right = (
            np.concatenate([outcomes[angle_deg, truth][i] for truth in ("rotation", "partitioned")])
            for i in (0, 1)
        )
        assert right[told].sum() >= 0.95 * told.sum()
        all_told, all_right = all_told + told.sum(), all_right + right[told].sum()
    assert all_right >= 0.95 * all_told
    assert all_told >= 300  # the rule is not kept by never telling: 27 degrees alone gives nearly 200


def test_near_the_fault_they_are_never_told_apart(outcomes):
    """At 5 degrees from the fault, where rotation predicts 0.43 degrees, none of 200 folds is told apart."""
    for truth in ("rotation", "partitioned"):
        told, _, checks = outcomes[5.0, truth]
        assert not told.any()
        small = [check for check in checks if check.difference_deg < 1.0]
        assert len(small) > 80
        assert all(check.readings_to_separate is None for check in small)


def test_where_rotation_predicts_most_nearly_all_are_told_apart(outcomes):
    """At 27 degrees, a predicted 5.15 degrees and a standard error of 0.8 degrees tell nearly every fold."""
    for truth in ("rotation", "partitioned"):
        told, _, checks = outcomes[27.0, truth]
        assert told.mean() >= 0.95
        assert np.median([check.se_deg for check in checks]) == pytest.approx(0.8, abs=0.1)


def test_the_stated_errors_are_those_of_the_simulated_folds(outcomes):
    """Transections and fold-fault angles of 100 folds spread as each fold's errors say, within 20%."""
    for angle_deg in ANGLES_DEG:
        checks = outcomes[angle_deg, "rotation"][2]
        for value, stated in (("transection_deg", "se_deg"), ("fold_fault_angle_deg", "fold_fault_se_deg")):
            spread = np.std([getattr(check, value) for check in checks], ddof=1)
            assert np.median([getattr(check, stated) for check in checks]) == pytest.approx(spread, rel=0.2)
