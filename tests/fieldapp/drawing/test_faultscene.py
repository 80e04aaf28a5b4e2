"""Curves and ellipses are cut to the frame of the picture: nothing is drawn outside it, nothing inside is lost."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldapp.drawing import faultscene

BOX = (0.0, 0.0, 100.0, 50.0)
# Tenths of a pixel, none on the frame's edge, where a place counts as in or out by its last digit.
NUMBERS = st.integers(-1500, 2500).map(lambda tenths: tenths / 10.0 + 0.03)
LINES = st.lists(st.tuples(NUMBERS, NUMBERS), min_size=2, max_size=12).map(np.array)


def length(points):
    """Give the length of a line."""
    return float(np.hypot(*np.diff(points, axis=0).T).sum())


def test_a_line_inside_stays_as_it_is():
    """What lies wholly in the frame is one part, the same places."""
    line = np.array([(10.0, 10.0), (50.0, 40.0), (90.0, 20.0)])
    (part,) = faultscene.cut_line(line, BOX)
    np.testing.assert_allclose(part, line)


def test_a_line_that_leaves_and_comes_back_is_two_parts():
    """The parts end where the line crosses the frame."""
    first, second = faultscene.cut_line(np.array([(20.0, 25.0), (50.0, 100.0), (80.0, 25.0)]), BOX)
    np.testing.assert_allclose(first, [(20.0, 25.0), (30.0, 50.0)])
    np.testing.assert_allclose(second, [(70.0, 50.0), (80.0, 25.0)])


@pytest.mark.parametrize(
    "line",
    [
        np.zeros((0, 2)),
        np.array([(10.0, 10.0)]),
        np.array([(-10.0, 60.0), (110.0, 60.0)]),
        np.array([(-20.0, 40.0), (30.0, 90.0)]),
        np.array([(np.nan, 10.0), (50.0, np.nan)]),
    ],
)
def test_a_line_outside_gives_nothing(line):
    """No place, one place, a line beside the frame or past its corner, and no numbers draw nothing."""
    with np.errstate(invalid="ignore"):
        assert faultscene.cut_line(line, BOX) == []


@given(LINES)
def test_what_is_kept_lies_in_the_frame_and_is_all_that_does(line):
    """The parts lie in the frame, and are as long as the thickly sampled line is inside it."""
    parts = faultscene.cut_line(line, BOX)
    for part in parts:
        assert (part >= np.array(BOX[:2]) - 1e-6).all()
        assert (part <= np.array(BOX[2:]) + 1e-6).all()
    share = (np.arange(4000) + 0.5)[:, np.newaxis] / 4000.0
    inside = 0.0
    for start, end in pairwise(line):
        places = start + share * (end - start)
        within = ((places >= BOX[:2]) & (places <= BOX[2:])).all(axis=1)
        inside += float(within.mean()) * float(np.hypot(*(end - start)))
    assert sum(length(part) for part in parts) == pytest.approx(inside, abs=0.3 * len(line))


def test_an_area_is_cut_at_the_edges_of_the_frame():
    """A square over the lower left corner keeps its quarter; one outside keeps nothing."""
    square = np.array([(-10.0, -10.0), (10.0, -10.0), (10.0, 10.0), (-10.0, 10.0)])
    kept = faultscene.cut_area(square, BOX)
    assert {tuple(place) for place in kept.round(9).tolist()} == {(0, 0), (10, 0), (10, 10), (0, 10)}
    assert len(faultscene.cut_area(square - 200.0, BOX)) == 0
    np.testing.assert_allclose(faultscene.cut_area(square + 20.0, BOX), square + 20.0)


def test_places_stand_evenly_along_a_line_and_end_with_it():
    """Places 10 apart on a line of 25, and its end."""
    spaced = faultscene.spaced(np.array([(0.0, 0.0), (25.0, 0.0)]), 10.0)
    np.testing.assert_allclose(spaced[:, 0], [0.0, 10.0, 20.0, 25.0])


def test_words_are_offered_the_lonely_half_of_a_curve():
    """Of two lines that part, the places far from the other are given."""
    x = np.linspace(0.0, 100.0, 101)
    own, other = np.stack([x, 0.0 * x], axis=1), np.stack([x, 0.5 * x], axis=1)
    places = faultscene.lonely(own, other)
    assert 1 <= len(places) <= 16
    assert places[:, 0].min() >= 49.0


def test_each_kind_of_curve_has_a_dash_of_its_own():
    """No two kinds are told apart by colour alone."""
    assert len(set(faultscene.DASHES.values())) == len(faultscene.DASHES) == len(faultscene.WIDTHS_DP)
