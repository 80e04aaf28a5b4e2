"""Where words go: beside their point, clear of other words, inside the picture."""

from __future__ import annotations

import numpy as np
import pytest

from fieldapp.drawing import placing

NO_POINTS = np.zeros((0, 2))
BOUNDS = (0.0, 0.0, 100.0, 100.0)


def place(anchor, taken=(), points=NO_POINTS):
    """Place words of 20 by 10."""
    return placing.place_beside(
        anchor, (20.0, 10.0), gap=5.0, taken=list(taken), points=points, bounds=BOUNDS
    )


def test_words_stand_to_the_right_where_nothing_is_in_the_way():
    """With free room the words are right of the point."""
    assert place((50.0, 50.0)) == (55.0, 45.0, 75.0, 55.0)


@pytest.mark.parametrize("anchor", [(0, 0), (100, 0), (0, 100), (100, 100), (98, 50), (50, 99)])
def test_words_never_leave_the_picture(anchor):
    """At the edges the words turn inwards."""
    box = place(anchor)
    assert box[0] >= 0
    assert box[1] >= 0
    assert box[2] <= 100
    assert box[3] <= 100


def test_words_keep_off_other_words():
    """Where the right is taken the words go elsewhere and overlap nothing."""
    taken = (52.0, 40.0, 90.0, 60.0)
    assert placing.overlap(place((50.0, 50.0), [taken]), taken) == 0.0


def test_words_keep_off_readings():
    """Where readings lie on the right the words go to a side without any."""
    points = np.array([[60.0, 50.0], [65.0, 52.0]])
    box = place((50.0, 50.0), points=points)
    inside = (
        (points[:, 0] > box[0]) & (points[:, 0] < box[2]) & (points[:, 1] > box[1]) & (points[:, 1] < box[3])
    )
    assert not inside.any()


def test_many_readings_never_push_words_over_other_words():
    """However many readings lie wherever no words are, words are laid over those and not over words."""
    taken = (52.0, 40.0, 100.0, 60.0)
    spread = np.random.default_rng(2).uniform(0.0, 100.0, (20_000, 2))
    points = spread[~np.all((spread > taken[:2]) & (spread < taken[2:]), axis=1)]
    assert placing.overlap(place((50.0, 50.0), [taken], points), taken) == 0.0


@pytest.mark.parametrize(
    ("span", "most", "step"), [(10, 5, 2), (10, 10, 1), (0.3, 3, 0.1), (100, 4, 50), (7, 1, 10)]
)
def test_a_nice_step_cuts_into_no_more_parts(span, most, step):
    """Steps are 1, 2 or 5 times a power of ten and give at most that many parts."""
    assert placing.nice_step(span, most) == pytest.approx(step)


def along(anchors, taken=(), points=NO_POINTS):
    """Place words of 20 by 10 along a line."""
    return placing.place_along(
        np.array(anchors, dtype=float),
        (20.0, 10.0),
        gap=4.0,
        taken=list(taken),
        points=points,
        bounds=BOUNDS,
    )


def test_words_of_a_line_go_where_the_line_is_free():
    """Of two places along a line the one is taken that other words do not cover."""
    box, anchor = along([(20, 50), (70, 50)], taken=[(0.0, 30.0, 60.0, 70.0)])
    assert anchor == (70.0, 50.0)
    assert placing.overlap(box, (0.0, 30.0, 60.0, 70.0)) == 0.0


def test_words_of_a_line_go_farther_out_before_they_cover_much():
    """With curves all round the anchor the words stand beyond them."""
    points = np.array([(x, y) for x in range(20, 81, 3) for y in range(35, 66, 3)], dtype=float)
    box, _ = along([(50, 50)], points=points)
    assert not np.any(np.all((points > box[:2]) & (points < box[2:]), axis=1))
    assert box[0] >= 0
    assert box[3] <= 100


def test_words_of_a_line_stay_in_the_picture():
    """Along the very edge the words turn inwards."""
    for anchor in [(0, 0), (100, 100), (0, 100), (100, 0)]:
        box, _ = along([anchor])
        assert min(box) >= 0
        assert max(box) <= 100
