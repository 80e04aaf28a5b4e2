"""How many more readings: the forecast against what folds then take, and its edges."""

import numpy as np
import pytest

from analysis.fold.forecast import settle, split
from analysis.fold.records import WatchNumbers
from analysis.fold.settings import CheckSettings
from tests.told import tell_many

SETTINGS = CheckSettings()


def numbers(**changes):
    """A fold of 12 readings each, as the check hands it to the forecast."""
    usual = {
        "delta_deg": 3.0,
        "hinge_variance": 6.0,
        "cleavage_variance": 3.0,
        "variance": 9.0,
        "freedom": 20.0,
        "information": 2.0,
        "by_outcrop": False,
    }
    return WatchNumbers(**{**usual, **changes})


def test_half_of_the_folds_that_are_told_a_number_settle_within_it():
    """Of folds told "about k more", half settle within k, to 30% of that half; three in five within the range given.

    The bounds are the project's own; the counts beside them are exact for this seed.
    """
    told, low, high, took = tell_many(60, np.random.default_rng(1970)).T
    within = np.count_nonzero(took <= told)
    in_range = np.count_nonzero((took >= low) & (took <= high))
    assert (len(told), within, in_range) == (234, 130, 127)
    assert 0.35 < within / len(told) < 0.65
    assert 0.7 < np.median(took / told) < 1.3
    assert 0.5 < in_range / len(told) < 0.7


def test_the_same_numbers_give_the_same_forecast():
    """The futures come from one fixed table."""
    first, again = (settle(numbers(), (12, 12), (0, 0), SETTINGS) for _ in range(2))
    assert first == again


def test_forecast_is_a_range_about_a_median():
    """Low, median and high stand in this order, and no fewer than one reading is told."""
    forecast = settle(numbers(), (12, 12), (0, 0), SETTINGS)
    assert 1.0 <= forecast.low <= forecast.median <= forecast.high


def test_forecast_is_the_same_either_way_round():
    """Clockwise and anticlockwise need as many readings."""
    one, other = (settle(numbers(delta_deg=d), (12, 12), (0, 0), SETTINGS) for d in (6.0, -6.0))
    # The futures come in mirrored pairs, so the two sides see the same ones.
    assert one == other


def test_more_scatter_needs_more_readings():
    """A larger variance now puts the verdict further off."""
    medians = [
        settle(
            numbers(hinge_variance=2.0 * v, cleavage_variance=v, variance=3.0 * v), (12, 12), (0, 0), SETTINGS
        ).median
        for v in (0.7, 1.5, 3.0, 6.0)
    ]
    assert medians == sorted(medians)
    assert medians[0] < medians[-1]


def test_readings_missing_for_the_first_look_are_counted():
    """A clear transection still needs what the first look needs."""
    forecast = settle(numbers(delta_deg=40.0), (3, 2), (3, 4), SETTINGS)
    assert forecast.low >= 7.0


def test_no_verdict_is_forecast_before_the_hinge_is_known():
    """While the hinge's part of the standard error is above 6 degrees no future settles, whatever the estimate."""
    wide = numbers(delta_deg=60.0, hinge_variance=144.0, cleavage_variance=1.0, variance=145.0)
    # 12 degrees falls to 6 with four times the readings: at least 36 more.
    assert settle(wide, (12, 12), (0, 0), SETTINGS).low >= 36.0


def test_a_transection_at_the_margin_with_large_scatter_is_not_forecast_soon():
    """Where futures do not settle within reach the median says so by passing the limit."""
    stuck = numbers(
        delta_deg=4.0,
        hinge_variance=20.0,
        cleavage_variance=16.0,
        variance=400.0,
        by_outcrop=True,
        freedom=3.0,
    )
    assert settle(stuck, (60, 60), (0, 0), SETTINGS).median > SETTINGS.forecast_limit


def test_no_readings_at_all_can_be_forecast_for():
    """Streams without a reading are taken to hold one."""
    assert settle(numbers(), (0, 0), (6, 6), SETTINGS).low >= 12.0


@pytest.mark.parametrize("more", [0, 1, 7, 50])
def test_split_gives_out_all_readings_and_takes_none_back(more):
    """Both parts are at least nothing and add up."""
    for counts, variances in (((6, 30), (9.0, 1.0)), ((1, 1), (0.0, 0.0)), ((40, 6), (1.0, 25.0))):
        first, second = split(more, counts, variances)
        assert first >= 0.0
        assert second >= 0.0
        assert first + second == pytest.approx(more, abs=1e-12)


def test_split_lowers_the_variance_most():
    """No other split of ten readings leaves a smaller sum of variances."""
    counts, variances = (12.0, 12.0), (6.0, 2.0)
    first, second = (float(v) for v in split(10, counts, variances))

    def left(a, b):
        return variances[0] * counts[0] / (counts[0] + a) + variances[1] * counts[1] / (counts[1] + b)

    best = min(left(a, 10.0 - a) for a in np.linspace(0.0, 10.0, 1001))
    assert left(first, second) == pytest.approx(best, rel=1e-6)
