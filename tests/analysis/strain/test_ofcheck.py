import math

import numpy as np
import pytest

from analysis.fold.check import check_fold
from analysis.orient.features import Feature
from analysis.orient.vectors import line_vector, pole_vector
from analysis.stats.sums import RunningSums
from analysis.strain.explanations import explain
from analysis.strain.observed import Fault
from analysis.strain.ofcheck import pair_of_check

# METHOD section 4, the full check case, dip direction and dip.
S0 = np.array(
    [(118, 62), (125, 55), (112, 70), (121, 58), (330, 48), (322, 57), (338, 44), (326, 52)], dtype=float
)
S1 = np.array([(143, 82), (147, 85), (139, 80), (145, 84), (150, 81), (141, 86)], dtype=float)


def sums_of(*, bedding=S0, cleavage=S1, lines=None, turned_deg=0.0):
    sums = RunningSums()
    sums.add(Feature.BEDDING, "MG-1", pole_vector(bedding[:, 0] - 90.0 + turned_deg, bedding[:, 1]))
    if cleavage is not None:
        sums.add(Feature.CLEAVAGE, "MG-1", pole_vector(cleavage[:, 0] - 90.0 + turned_deg, cleavage[:, 1]))
    if lines is not None:
        sums.add(Feature.INTERSECTION, "MG-1", lines)
    return sums


def test_the_pair_has_the_figures_of_the_check():
    """Hinge 040.288/20.095, transection 15.399, SE 2.910, df 9.89 (METHOD section 4) reach the pair."""
    pair = pair_of_check(check_fold(sums_of(), forecast=False))
    assert pair.hinge_trend_deg == pytest.approx(40.288, abs=5e-4)
    assert pair.hinge_plunge_deg == pytest.approx(20.095, abs=5e-4)
    assert pair.transection_deg == pytest.approx(15.399, abs=5e-4)
    assert pair.transection_se_deg == pytest.approx(2.910, abs=5e-4)
    assert pair.df == pytest.approx(9.89, abs=5e-3)
    assert (pair.hinge_readings, pair.cleavage_readings) == (8, 6)
    check = explain(Fault(strike_deg=20.0, sense="sinistral"), pair, fold="check case")
    assert check.fold_fault_angle_deg == pytest.approx(20.288, abs=5e-4)
    assert check.explanations[0].predicted_transection_deg == pytest.approx(4.51, abs=0.05)


def test_turning_fault_and_readings_together_changes_nothing():
    """A common error of the compass turns all alike: angle, errors and likelihoods stay."""
    at_rest = explain(Fault(strike_deg=20.0), pair_of_check(check_fold(sums_of(), forecast=False)))
    turned = explain(
        Fault(strike_deg=20.0 + 137.0), pair_of_check(check_fold(sums_of(turned_deg=137.0), forecast=False))
    )
    for name in (
        "fold_fault_angle_deg",
        "fold_fault_se_deg",
        "transection_deg",
        "se_deg",
        "likelihood_ratio",
    ):
        assert getattr(turned, name) == pytest.approx(getattr(at_rest, name), rel=1e-9)


def test_intersection_lines_alone_give_a_pair_too():
    """Without cleavage planes the pair has the check's transection and standard error."""
    rng = np.random.default_rng(1)
    lines = line_vector(47.0 + 3.0 * rng.normal(size=12), 20.0 + 3.0 * rng.normal(size=12))
    check = check_fold(sums_of(cleavage=None, lines=lines), forecast=False)
    pair = pair_of_check(check)
    assert pair.transection_deg == pytest.approx(check.transection_deg)
    assert pair.transection_se_deg == pytest.approx(check.se_deg, rel=1e-6)
    assert explain(Fault(strike_deg=20.0), pair).likelihood_ratio is not None


def test_bedding_alone_has_a_trend_and_nothing_read_has_no_pair():
    """With bedding only there is a trend but no transection; with nothing there is no pair."""
    pair = pair_of_check(check_fold(sums_of(cleavage=None), forecast=False))
    assert pair.transection_deg is None
    assert math.isfinite(pair.trend_variance_deg2)
    assert pair_of_check(check_fold(RunningSums(), forecast=False)) is None


@pytest.mark.parametrize("count", range(1, 9))
def test_a_pair_can_be_explained_from_the_first_readings_on(count):
    """After each of the first readings of both features there is a pair that explain takes, or none."""
    pair = pair_of_check(
        check_fold(sums_of(bedding=S0[[0, 4, 1, 5, 2, 6, 3, 7]][:count], cleavage=S1[:count]), forecast=False)
    )
    if pair is not None:
        check = explain(Fault(strike_deg=20.0, zone_width_km=3.0), pair)
        assert check.because
        assert not check.can_be_told_apart or count > 2
