"""Planning before the field: what a plan says, and that it says it of the check that is run later."""

import json
from dataclasses import replace

import numpy as np
import pytest

from analysis.errors import SettingError
from analysis.fold.planning import ReadingsNeeded, plan, usual_transections
from analysis.fold.settings import CheckSettings
from analysis.stats.synthetic import FoldDesign

EASY = FoldDesign(bedding_scatter_deg=4.0, cleavage_scatter_deg=3.0, line_scatter_deg=3.0)


@pytest.fixture(scope="module")
def easy_plan():
    return plan(EASY, folds=60, most_readings=120)


def test_a_plan_repeats(easy_plan):
    """The same arguments give the same plan, to the digit."""
    again = plan(EASY, folds=60, most_readings=120)
    assert again.to_json() == easy_plan.to_json()


def test_rows_are_as_asked(easy_plan):
    """By default from none to three times the margin; else those asked for, in their order."""
    assert [row.transection_deg for row in easy_plan.rows] == [0.0, 2.5, 5.0, 7.5, 10.0, 15.0]
    assert usual_transections(8.0) == (0.0, 4.0, 8.0, 12.0, 16.0, 24.0)
    asked = plan(EASY, transections_deg=(12.0, -8.0), folds=20, most_readings=30)
    assert [row.transection_deg for row in asked.rows] == [12.0, -8.0]


def test_larger_transections_need_fewer_readings(easy_plan):
    """Beyond the margin the median falls with the transection, and four in five need no fewer than half."""
    beyond = [row for row in easy_plan.rows if row.transection_deg >= 5.0]
    medians = [row.median.total for row in beyond]
    assert medians == sorted(medians, reverse=True)
    assert all(row.for_80_percent.total >= row.median.total for row in beyond)


def test_power_grows_with_the_readings_and_ends_at_the_share_found(easy_plan):
    """Each curve rises from look to look; what is found and what is wrong are no more than all folds."""
    assert easy_plan.power.shape == (6, len(easy_plan.readings))
    assert (np.diff(easy_plan.power, axis=1) >= 0.0).all()
    assert easy_plan.power[:, -1] == pytest.approx([row.found for row in easy_plan.rows])
    assert all(row.found + row.wrong <= 1.0 for row in easy_plan.rows)


def test_readings_are_added_one_at_a_time_where_they_tell_most(easy_plan):
    """Looks start at six of each; bedding, which scatters more here, gets the larger part."""
    assert easy_plan.readings[0].tolist() == [6, 6, 0]
    assert (np.diff(easy_plan.total) == 1).all()
    assert easy_plan.total[-1] == 120
    assert easy_plan.readings[-1, 0] > easy_plan.readings[-1, 1]


@pytest.mark.parametrize(("mode", "first"), [("lines", [6, 0, 5]), ("planes and lines", [6, 5, 5])])
def test_lines_are_planned_for_as_lines(mode, first):
    """What is read of the cleavage is counted by feature."""
    planned = plan(EASY, mode=mode, transections_deg=(15.0,), folds=20, most_readings=40)
    assert planned.readings[0].tolist() == first
    assert planned.rows[0].median.intersection >= 5
    assert (planned.rows[0].median.cleavage > 0) == (mode != "lines")


def test_a_fold_that_cannot_be_read_well_enough_has_no_number():
    """Where fewer than half ever settle the row says so by holding none."""
    rough = replace(EASY, limb_dips_deg=(20.0, 20.0), bedding_scatter_deg=12.0)
    row = plan(rough, transections_deg=(0.0,), folds=20, most_readings=40).rows[0]
    assert row.median is None
    assert row.for_80_percent is None


def test_both_senses_need_as_many_readings():
    """Clockwise and anticlockwise of one size are settled alike, within the luck of the draw."""
    planned = plan(EASY, transections_deg=(8.0, -8.0), folds=100, most_readings=80)
    one, other = (row.median.total for row in planned.rows)
    assert abs(one - other) <= 6


def test_a_wider_margin_is_sooner_excluded(easy_plan):
    """Where ten degrees are what matters an axial-planar fold settles with fewer readings than where five are."""
    wide = plan(EASY, CheckSettings(margin_deg=10.0), transections_deg=(0.0,), folds=60, most_readings=120)
    assert wide.rows[0].median.total < easy_plan.rows[0].median.total


def test_progress_is_told_from_nothing_to_all():
    """The callback gets rising shares that end at 1."""
    shares = []
    plan(EASY, transections_deg=(10.0, 20.0), folds=150, most_readings=20, progress=shares.append)
    assert shares == sorted(shares)
    assert shares[-1] == 1.0
    assert len(shares) == 4


def test_json_holds_plain_values(easy_plan):
    """The plan goes through JSON unchanged."""
    plain = easy_plan.to_json()
    assert json.loads(json.dumps(plain)) == plain
    assert set(plain["rows"][0]) == {"transection_deg", "found", "wrong", "median", "for_80_percent"}


@pytest.mark.parametrize(
    "changes",
    [
        {"folds": 19},
        {"folds": 20_001},
        {"most_readings": 19},
        {"most_readings": 1_001},
        {"transections_deg": ()},
        {"transections_deg": (61.0,)},
        {"transections_deg": (float("nan"),)},
    ],
)
def test_a_plan_refuses_what_it_cannot_try(changes):
    """Numbers out of range raise the project's own error."""
    with pytest.raises(SettingError):
        plan(EASY, **changes)


def test_readings_needed_add_up():
    """The total is over all features."""
    assert ReadingsNeeded(7, 5, 3).total == 15
