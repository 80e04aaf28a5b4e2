"""The arrangement: what each size of screen affords."""

from __future__ import annotations

import pytest

from fieldapp.look.form import GOOD_KEY_DP, Form

SIZES = [
    (360, 640),
    (412, 915),
    (600, 960),
    (800, 1280),
    (1280, 800),
    (960, 600),
    (640, 360),
    (915, 412),
    (1024, 768),
]
SCALES = [1.0, 1.15, 1.3]


def heights(form):
    """Give the heights of everything in the Log leaf's one column, in dp."""
    parts = [form.place_dp, form.feature_dp, form.readout_dp, form.check_dp, form.pad_dp]
    if form.shows_recent:
        parts.append(form.recent_dp)
    return sum(parts) + (len(parts) + 1) * form.gap_dp


@pytest.mark.parametrize("size", SIZES)
@pytest.mark.parametrize("scale", SCALES)
def test_the_log_leaf_fits_its_screen(size, scale):
    """Everything in the Log leaf's column is no higher than the leaf."""
    form = Form(*size, scale)
    if not form.low:
        assert heights(form) <= form.log_height_dp + 0.01


@pytest.mark.parametrize("size", SIZES)
def test_bars_across_the_page_are_given_room(size):
    """With the mark of the demo on the page the Log leaf still fits."""
    form = Form(*size, 1.3, bars=1)
    if not form.low:
        assert heights(form) <= form.log_height_dp + 0.01


@pytest.mark.parametrize("size", SIZES)
@pytest.mark.parametrize("scale", SCALES)
def test_no_key_is_too_low_to_hit(size, scale):
    """No key of the pad is lower than 40 dp (6.4 mm), on the smallest phone with the largest type."""
    assert Form(*size, scale).key_dp >= 40.0


@pytest.mark.parametrize("size", [(412, 915), (800, 1280)])
def test_keys_are_14_mm_where_the_screen_allows(size):
    """On a tall phone and on a tablet the keys are at least 14 mm (88 dp) high."""
    assert Form(*size).key_dp >= GOOD_KEY_DP


def test_a_tablet_on_its_side_shows_log_and_check_together():
    """Landscape on a tablet splits the page; portrait and phones do not."""
    assert Form(1280, 800).split
    assert Form(960, 600).split
    assert not Form(800, 1280).split
    assert not Form(640, 360).split
    assert not Form(915, 412).split


def test_a_phone_on_its_side_is_low():
    """A phone on its side sets the Log leaf in two columns."""
    assert Form(640, 360).low
    assert not Form(360, 640).low
    assert not Form(1280, 800).low


def test_where_room_is_short_the_direction_grid_takes_turns_with_the_keys():
    """On the smallest phone the direction grid takes turns with the keys; on a tall one both stand."""
    assert not Form(360, 640).grid_beside
    assert Form(412, 915).grid_beside
    assert Form(800, 1280).grid_beside
