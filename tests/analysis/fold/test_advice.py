"""Which reading to take next, and where."""

from __future__ import annotations

import re

import numpy as np
import pytest

from analysis.fold.check import check_fold
from analysis.fold.records import Verdict
from analysis.fold.settings import CheckSettings
from analysis.orient.features import Feature
from analysis.orient.vectors import line_vector, pole_vector
from analysis.stats.sums import RunningSums
from analysis.stats.synthetic import FoldDesign, draw


def test_nothing_read_yet_asks_for_bedding_on_both_limbs():
    """An empty fold starts with bedding."""
    advice = check_fold(RunningSums()).next_reading
    assert (advice.feature, advice.where) == (Feature.BEDDING, "on both limbs")


def test_the_stream_that_lags_is_asked_for_first(draw_sums):
    """Before the first look the stream further from it comes next."""
    assert check_fold(draw_sums(bedding=5, cleavage=1)).next_reading.feature is Feature.CLEAVAGE
    assert check_fold(draw_sums(bedding=2, cleavage=5)).next_reading.feature is Feature.BEDDING


def test_no_bedding_is_not_called_bedding_of_one_side(make_sums):
    """With hinge lines only, bedding is asked for on both limbs."""
    check = check_fold(
        make_sums(hinge=line_vector([10.0, 12.0], [5.0, 6.0]), cleavage=[pole_vector(15, 85)] * 7)
    )
    assert (check.next_reading.feature, check.next_reading.where) == (Feature.BEDDING, "on both limbs")


def test_a_settled_fold_needs_no_next_reading(draw_sums):
    """With a verdict there is no advice and no forecast."""
    check = check_fold(draw_sums(FoldDesign(transection_deg=20.0), bedding=60, cleavage=60))
    assert check.verdict is Verdict.TRANSECTED
    assert check.next_reading is None
    assert check.more_readings is None


@pytest.mark.parametrize("seed", range(6))
def test_the_advised_feature_narrows_the_interval_more(seed, draw_sums):
    """Twenty more readings of the advised stream lower the variance more than twenty of the other, on average."""
    design = FoldDesign(transection_deg=1.0, cleavage_scatter_deg=2.0 if seed % 2 else 12.0)
    sums = draw_sums(design, bedding=60, cleavage=60, seed=seed)
    check = check_fold(sums, CheckSettings(margin_deg=0.5, forecast_limit=100_000))
    assert check.verdict is Verdict.KEEP_READING
    advised = check.next_reading.feature
    drawn = draw(design, 20, 40, np.random.default_rng(100 + seed))
    left = {Feature.BEDDING: [], Feature.CLEAVAGE: []}
    for k in range(40):
        for feature, axes in ((Feature.BEDDING, drawn.bedding), (Feature.CLEAVAGE, drawn.cleavage)):
            more = sums.copy()
            more.add(feature, "O1", axes[k])
            left[feature].append(check_fold(more, forecast=False).numbers.variance)
    assert advised is min(left, key=lambda feature: np.mean(left[feature]))


def test_an_attitude_is_named_where_one_limb_narrows_more():
    """Where one limb tells more of the hinge, the advice names it, and the attitude to look for."""
    sums = RunningSums()
    rng = np.random.default_rng(2)
    design = FoldDesign(
        hinge_trend_deg=0.0, limb_dips_deg=(10.0, 75.0), first_limb_share=0.8, transection_deg=4.0
    )
    drawn = draw(design, 20, 1, rng)
    sums.add("bedding", "A", drawn.bedding[0])
    sums.add("cleavage", "A", drawn.cleavage[0])
    advice = check_fold(sums).next_reading
    assert advice.feature is Feature.BEDDING
    assert re.fullmatch(
        r"on the (steep |gentle )?(flat )?limb( dipping \w+)?, near \d{3}/\d{2}", advice.where
    )


def test_cleavage_is_asked_for_where_there_is_none():
    """With several outcrops the one with bedding and no cleavage is named; unnamed ones are not."""
    sums = RunningSums()
    for name in ("", "A", "B"):
        sums.add("bedding", name, pole_vector([0.0, 180.0], [40.0, 45.0]))
    sums.add("cleavage", "A", pole_vector([8.0, 9.0], [88.0, 89.0]))
    advice = check_fold(sums).next_reading
    assert (advice.feature, advice.where) == (Feature.CLEAVAGE, "at outcrop B, where there is none yet")


def test_lines_are_asked_for_where_only_lines_were_read(draw_sums):
    """In a fold read by intersection lines alone the cleavage stream is continued with lines."""
    advice = check_fold(draw_sums(bedding=15, cleavage=0, lines=3)).next_reading
    assert advice.feature is Feature.INTERSECTION


def test_a_new_outcrop_is_asked_for_where_outcrops_give_the_variance():
    """Where outcrops differ by more than their readings, another outcrop helps, not another reading at one."""
    design = FoldDesign(
        outcrops=5,
        hinge_variation_deg=9.0,
        transection_deg=3.0,
        bedding_scatter_deg=3.0,
        cleavage_scatter_deg=3.0,
    )
    drawn = draw(design, 50, 1, np.random.default_rng(4))
    sums = RunningSums()
    for k in range(50):
        sums.add("bedding", f"O{k % 5}", drawn.bedding[0][k])
        sums.add("cleavage", f"O{k % 5}", drawn.cleavage[0][k])
    check = check_fold(sums)
    assert check.numbers.by_outcrop
    assert check.next_reading.where.startswith("at a new outcrop")
