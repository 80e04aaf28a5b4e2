"""Words find room: they keep inside the bounds, off each other and off the marks."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.report.placing import Box, Placer

BOUNDS = Box(0.0, 0.0, 600.0, 400.0)


def overlap(one, other):
    return min(one.right, other.right) > max(one.left, other.left) and min(one.top, other.top) > max(
        one.bottom, other.bottom
    )


@given(
    st.lists(st.tuples(st.floats(0.0, 600.0), st.floats(0.0, 400.0)), min_size=1, max_size=9),
    st.floats(20.0, 80.0),
)
def test_labels_overlap_neither_each_other_nor_the_bounds(anchors, wide):
    """While there is room, wherever the anchors lie, no label leaves the bounds or covers another."""
    placer = Placer(BOUNDS)
    boxes = [placer.place([anchor], (wide, 14.0), gap=6.0).box for anchor in anchors]
    for number, box in enumerate(boxes):
        assert box.left >= 0.0
        assert box.bottom >= 0.0
        assert box.right <= 600.0
        assert box.top <= 400.0
        assert not any(overlap(box, other) for other in boxes[:number])


def test_label_keeps_off_marks_where_it_can():
    """With a mark on its right the label goes elsewhere; the mark stays uncovered."""
    placer = Placer(BOUNDS)
    free = placer.place([(300.0, 200.0)], (60.0, 14.0), gap=6.0)
    assert free.box.centre[0] > 300.0
    placer = Placer(BOUNDS)
    placer.block([free.box.centre], 4.0, 10.0)
    x, y = free.box.centre
    box = placer.place([(300.0, 200.0)], (60.0, 14.0), gap=6.0).box
    assert not (box.left < x < box.right and box.bottom < y < box.top)


def test_label_keeps_its_gap_from_the_anchor():
    """The box stays clear of a disc of the gap's radius about the anchor."""
    place = Placer(BOUNDS).place([(300.0, 200.0)], (60.0, 14.0), gap=9.0)
    near = place.box.nearest(*place.anchor)
    assert np.hypot(near[0] - 300.0, near[1] - 200.0) >= 9.0 - 1e-9
    assert not place.leader


def test_label_that_must_go_far_gets_a_line():
    """In the middle of a crowd the label stands outside of it, with a line to its anchor."""
    placer = Placer(BOUNDS)
    x, y = np.meshgrid(np.arange(250.0, 351.0, 6.0), np.arange(150.0, 251.0, 6.0))
    crowd = np.stack([x.ravel(), y.ravel()], axis=-1)
    placer.block(crowd, 3.0, 10.0)
    place = placer.place([(300.0, 200.0)], (60.0, 14.0), gap=6.0)
    box = place.box
    inside = (
        (crowd[:, 0] > box.left)
        & (crowd[:, 0] < box.right)
        & (crowd[:, 1] > box.bottom)
        & (crowd[:, 1] < box.top)
    )
    assert not inside.any()
    assert place.leader


def test_label_on_its_own_anchor():
    """Where asked for and free the middle of the anchor is taken, and not where something stands there."""
    placer = Placer(BOUNDS)
    assert placer.place([(300.0, 200.0)], (60.0, 14.0), gap=6.0, on_anchor=True).box.centre == (300.0, 200.0)
    assert placer.place([(300.0, 200.0)], (60.0, 14.0), gap=6.0, on_anchor=True).box.centre != (300.0, 200.0)


def test_the_nearest_of_many_anchors_with_room_is_taken():
    """Of the places along a line the label takes one that is free."""
    placer = Placer(BOUNDS)
    placer.take(Box(0.0, 0.0, 400.0, 400.0))
    place = placer.place([(x, 200.0) for x in range(50, 600, 50)], (60.0, 14.0), gap=5.0)
    assert place.anchor[0] >= 400.0


def test_a_hundred_thousand_marks_are_thinned():
    """Marks that share a few pixels count once, so that many readings cost no more than a full net."""
    placer = Placer(BOUNDS)
    rng = np.random.default_rng(3)
    placer.block(rng.uniform(0.0, 100.0, (100_000, 2)), 2.0, 1.0)
    assert len(placer._points[0]) <= 27 * 27
    placer.place([(50.0, 50.0)], (60.0, 14.0), gap=5.0)


@pytest.mark.parametrize(
    ("x", "y", "near"), [(0.0, 0.0, (10.0, 20.0)), (15.0, 25.0, (15.0, 25.0)), (99.0, 21.0, (30.0, 21.0))]
)
def test_nearest_point_of_a_box(x, y, near):
    """The nearest point lies on the edge, or is the point itself inside."""
    assert Box(10.0, 20.0, 30.0, 40.0).nearest(x, y) == near
