"""The words that the Check leaf puts together: the outcrop's own check, and the outcrops that the plan cannot show."""

from __future__ import annotations

from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.fold.words import between
from analysis.orient.features import Feature
from fieldapp.leaves.scenes import outcrop_words, unplaced_words
from fieldapp.settings import NorthMode
from fieldapp.states import PlanOutcrop, PlanState

BEDDING, CLEAVAGE, LINE, _ = Feature
# METHOD's full check case: bedding of both limbs and cleavage, as strike/dip; the transection is 15.399 degrees.
S0 = ("028/62", "035/55", "022/70", "031/58", "240/48", "232/57", "248/44", "236/52")
S1 = ("053/82", "057/85", "049/80", "055/84", "060/81", "051/86")
HERE = PlanOutcrop("MG-01", 0.0, 0.0, True, None, None, None)


@pytest.fixture
def true_page(page):
    """A page whose compass is set to true north."""
    page.change_settings(replace(page.settings, north=NorthMode.TRUE))
    return page


def words(page):
    return outcrop_words(page.check, page.outcrop_check, page.place.outcrop, page.settings.notation)


def read_at(page, kept, outcrop, bedding=S0, cleavage=S1):
    page.choose_outcrop(outcrop)
    for text in bedding:
        kept(page, BEDDING, text)
    for text in cleavage:
        kept(page, CLEAVAGE, text)


def test_one_outcrop_is_the_fold_and_has_no_words_of_its_own(true_page, kept):
    """Where only one outcrop has readings the fold's check is the outcrop's; nothing is said twice."""
    read_at(true_page, kept, "MG-01")
    assert words(true_page) == ""
    true_page.choose_outcrop("MG-02")
    assert words(true_page) == ""


def test_an_outcrop_tells_its_axes_and_its_transection_with_the_interval(true_page, kept):
    """The words are those of the outcrop's readings alone, whatever stands in the rest of the fold."""
    read_at(true_page, kept, "MG-01")
    alone = true_page.check
    read_at(true_page, kept, "MG-02", S0[:3], S1[:1])
    true_page.choose_outcrop("MG-01")
    assert true_page.check.readings.bedding == 11
    first, second = words(true_page).splitlines()
    mean = alone.intersection.axis.line
    axes = f"hinge 040/20, cleavage 054/83, intersection {mean.trend_deg:03.0f}/{mean.plunge_deg:02.0f}"
    assert first == f"MG-01, 14 read: {axes}"
    assert second == f"cleavage 15° clockwise of the hinge, {between(*alone.interval_deg)}"


def test_an_outcrop_says_what_it_lacks(true_page, kept):
    """No angle stands there without its interval: the readings still missing are named instead."""
    read_at(true_page, kept, "MG-01")
    read_at(true_page, kept, "MG-02", S0[:4], S1[:1])
    told = words(true_page)
    assert told.startswith("MG-02, 5 read: hinge ")
    assert "The hinge needs 6 bedding readings" in told
    assert "4 and 0 so far" in told
    assert "of the hinge, between" not in told
    true_page.choose_outcrop("MG-03")
    assert words(true_page) == "MG-03: nothing read yet."


def test_each_reading_brings_the_outcrops_words_up_to_date(true_page, kept):
    """Keeping, striking out and taking back are followed; another outcrop's readings are not counted."""
    read_at(true_page, kept, "MG-01")
    read_at(true_page, kept, "MG-02", S0[:2], ())
    assert words(true_page).startswith("MG-02, 2 read")
    reading = kept(true_page, CLEAVAGE, "054/83")
    assert words(true_page).startswith("MG-02, 3 read")
    true_page.strike_out(reading)
    assert words(true_page).startswith("MG-02, 2 read")
    true_page.undo()
    assert words(true_page).startswith("MG-02, 3 read")


def test_the_check_of_an_outcrop_is_reckoned_once(true_page, kept):
    """Asked again, as the position ages or a forecast comes, the very same check is given; a reading makes another."""
    read_at(true_page, kept, "MG-01", S0, S1)
    before = true_page.outcrop_check
    true_page.position_changed(None)
    assert true_page.outcrop_check is before
    kept(true_page, LINE, "060/20")
    assert true_page.outcrop_check is not before


def test_the_plan_names_the_outcrops_without_a_position():
    """All where there is room, else the first ones and how many more."""
    plan = PlanState((HERE,), ("MG-03", "", "MG-07"), None)
    assert unplaced_words(plan, 80) == "No position: MG-03, unnamed, MG-07"
    assert unplaced_words(plan, 30) == "No position: MG-03 and 2 more"
    assert unplaced_words(replace(plan, unplaced=("long name " * 20,)), 60) == "No position: 1 outcrop"
    assert unplaced_words(replace(plan, unplaced=()), 80) == ""
    assert unplaced_words(replace(plan, outcrops=()), 80) == ""  # the empty plan says so itself


@given(
    st.lists(st.text("MG-0123456789", min_size=1, max_size=12), min_size=1, max_size=60), st.integers(40, 200)
)
def test_the_words_below_the_plan_keep_to_their_room_and_count_all(names, room):
    """However many there are, the words fit, and those named and those counted are all of them."""
    told = unplaced_words(PlanState((HERE,), tuple(names), None), room)
    assert len(told) <= room
    listed, _, more = told.removeprefix("No position: ").partition(" and ")
    named = listed.split(", ")
    assert named == names[: len(named)]
    assert len(named) + int(more.removesuffix(" more") or 0) == len(names)
