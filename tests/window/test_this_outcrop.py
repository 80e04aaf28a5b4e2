"""What the Check leaf says of the current outcrop, and of outcrops that the plan cannot show."""

from __future__ import annotations

import pytest
from mossgarth import fold, type_into

from analysis.orient.features import Feature


@pytest.fixture
def beside(open_app, clock):
    """A tablet on its side, Log and Check beside one another, with two outcrops read and the second one current."""
    driver = open_app((1280, 800))
    type_into(driver.app.page, fold(30, outcrops=2), clock)
    driver.frames(5)
    return driver


def keep_by_touch(driver, azimuth, inclination):
    """Keep an intersection line, touch by touch."""
    log = driver.app.outline.leaf("Log")
    driver.press(log.feature_keys[Feature.INTERSECTION])
    for digit in azimuth + inclination:
        driver.press(log.pad.keys[digit])
    driver.press(log.side.keys["keep"])


def test_the_outcrops_own_check_follows_each_reading(beside):
    """The block stands under the fold's words and counts the reading that was just kept."""
    leaf = beside.app.outline.leaf("Check")
    assert leaf.outcrop.text.startswith("MG-15, 15 read: hinge ")
    assert leaf.outcrop.opacity == 1
    assert leaf.outcrop.top <= leaf.because.y
    keep_by_touch(beside, "040", "18")
    assert leaf.outcrop.text.startswith("MG-15, 16 read: hinge ")
    assert beside.app.page.standing[0].outcrop == "MG-15"


def test_going_to_another_outcrop_shows_its_check(beside):
    """The words are those of the outcrop chosen, at once."""
    leaf = beside.app.outline.leaf("Check")
    before = leaf.outcrop.text
    leaf.show_picture("plan")
    beside.frames(5)
    beside.touch(*leaf.plan.to_window(*leaf.plan._places["MG-14"]))
    assert beside.app.page.place.outcrop == "MG-14"
    assert leaf.outcrop.text.startswith("MG-14, 15 read: hinge ")
    assert leaf.outcrop.text != before


def test_a_fold_of_one_outcrop_has_no_such_block(open_app, clock):
    """Nothing is shown twice: no title, no words, no room."""
    driver = open_app((1280, 800))
    type_into(driver.app.page, fold(12, outcrops=1), clock)
    driver.frames(5)
    block = driver.app.outline.leaf("Check").outcrop
    assert (block.text, block.opacity) == ("", 0)
    assert block.height < 2


@pytest.mark.parametrize("size", [(360, 640), (740, 360), (800, 1280), (1280, 800)])
def test_outcrops_without_a_position_are_named_below_the_plan(open_app, clock, size):
    """The plan says which outcrops it cannot show, within its width; with none missing it says nothing."""
    driver = open_app(size)
    page = driver.app.page
    type_into(page, fold(12, outcrops=2), clock)
    driver.app.outline.show("Check")
    leaf = driver.app.outline.leaf("Check")
    leaf.show_picture("plan")
    driver.frames(5)
    assert leaf.unplaced.parent is None
    page.position_changed(None)
    for number in range(3, 43):
        page.choose_outcrop(f"MG-{number:02d}" if number < 14 else f"MG-9{number}")
    page.choose_outcrop("MG-14")
    driver.frames(5)
    assert leaf.unplaced.get_root_window() is not None
    assert leaf.unplaced.text.startswith("No position: MG-03, MG-04, ")
    assert leaf.unplaced.text.endswith(" more")
    assert leaf.unplaced.top <= leaf.plan.y
    assert leaf.unplaced.texture_size[1] <= 2.5 * leaf.unplaced.font_size * 1.26
    assert leaf.plan.height > 120
    leaf.show_picture("net")
    driver.frames(5)
    assert leaf.unplaced.parent is None
