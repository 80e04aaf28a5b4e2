"""The watched interval's multipliers, by the exact chance that a wandering estimate ever leaves them."""

import math

import numpy as np
import pytest
from scipy import stats

from analysis.errors import SettingError
from analysis.stats.watching import (
    equivalence_multiplier,
    first_look_multiplier,
    normal_mixture_half_width,
    watched_multiplier,
)
from tests.crossing import chance_of_leaving

KNOWN = 1e9  # degrees of freedom of a standard error that is as good as known


@pytest.mark.parametrize("confidence", [0.5, 0.8, 0.9, 0.95, 0.99, 0.9999])
def test_first_multiplier_is_the_root_of_a_chi_square_quantile(confidence):
    """Its square is the quantile of chi-square with 3 degrees of freedom."""
    assert first_look_multiplier(confidence) ** 2 == pytest.approx(stats.chi2.ppf(confidence, 3), rel=1e-10)


@pytest.mark.parametrize("confidence", [0.0, 1.0, -1.0, 1.5, math.nan])
def test_no_multiplier_for_what_is_no_confidence(confidence):
    """A confidence outside (0, 1) raises the project's own error."""
    with pytest.raises(SettingError, match="confidence"):
        first_look_multiplier(confidence)


def test_multiplier_starts_at_the_first_look():
    """Less information than at the first look counts as the first look."""
    first = first_look_multiplier(0.95)
    np.testing.assert_allclose(watched_multiplier([0.0, 0.5, 1.0], KNOWN, 0.95), first)


def test_multiplier_grows_with_looks_and_shrinks_with_freedom():
    """It rises with the information gathered and falls with the degrees of freedom."""
    by_information = watched_multiplier(np.geomspace(1.0, 100.0, 20), 20.0, 0.95)
    by_freedom = watched_multiplier(3.0, np.geomspace(2.0, 1e6, 20), 0.95)
    assert (np.diff(by_information) > 0.0).all()
    assert (np.diff(by_freedom) < 0.0).all()


def test_watched_interval_is_left_by_no_more_than_its_share():
    """With a known error, looks after each of 6 to 60 readings leave it in 3.1%, to 6,000 in 4.3%, always below 5%.

    The chance is exact, by recursion over the looks (tests/crossing.py).
    """
    short = np.arange(6.0, 61.0) / 6.0
    long = np.geomspace(1.0, 1000.0, 300)
    leaves = [chance_of_leaving(t, watched_multiplier(t, KNOWN, 0.95)) for t in (short, long)]
    assert leaves[0] == pytest.approx(0.0313, abs=5e-4)
    assert leaves[1] == pytest.approx(0.0433, abs=5e-4)


@pytest.mark.parametrize("confidence", [0.5, 0.8, 0.9, 0.99, 0.999])
def test_watched_interval_holds_at_any_confidence(confidence):
    """Watched up to a thousand times the first look's information, the share of misses stays below what is allowed."""
    t = np.geomspace(1.0, 1000.0, 300)
    assert chance_of_leaving(t, watched_multiplier(t, KNOWN, confidence)) < 1.0 - confidence


def test_looks_without_a_pause_would_leave_robbins_own_boundary_in_five_percent():
    """The multiplier's first value is Robbins' (1970): with dense looks sqrt(a^2 + ln t) is left in nearly 5%."""
    t = np.geomspace(1.0, 1e4, 3000)
    robbins = np.sqrt(first_look_multiplier(0.95) ** 2 + np.log(t))
    assert 0.043 < chance_of_leaving(t, robbins) < 0.05


def test_late_equivalence_tests_are_wrong_by_no_more_than_their_share():
    """At a transection of just the margin, "axial planar" is ever said in less than 5%, however small the error is."""
    for first_se in (0.5, 2.0, 5.0, 12.0):
        t = np.geomspace(1.0, 300.0, 120)
        se = first_se / np.sqrt(t)
        multiplier = equivalence_multiplier(se**2, t, KNOWN, 5.0, 0.05)
        # Said where the estimate's size plus its half-width is within the margin: never where that cannot be,
        # else where the estimate lies that far below the margin.
        possible = multiplier * se < 5.0
        boundary = np.where(possible, multiplier, 40.0)
        assert 0.01 < chance_of_leaving(t, boundary, one_sided=True) < 0.05


def test_late_clock_costs_nothing_while_nothing_can_be_concluded():
    """Until an interval could fit inside the margin the multiplier stays the first one, and no interval fits."""
    t = np.geomspace(1.0, 50.0, 100)
    se = 12.0 / np.sqrt(t)
    multiplier = equivalence_multiplier(se**2, t, KNOWN, 5.0, 0.05)
    first = first_look_multiplier(0.90)
    waiting = first * se >= 5.0
    assert waiting.any()
    assert not waiting.all()
    np.testing.assert_allclose(multiplier[waiting], first)
    assert (multiplier[waiting] * se[waiting] >= 5.0 - 1e-9).all()


def test_normal_mixture_is_wider_than_nothing_and_narrows():
    """The compared sequence narrows as the variance falls, and holds one value and many alike."""
    many = normal_mixture_half_width([4.0, 1.0, 0.25], 6.0, 0.05)
    assert (np.diff(many) < 0.0).all()
    assert float(normal_mixture_half_width(1.0, 6.0, 0.05)) == many[1]
