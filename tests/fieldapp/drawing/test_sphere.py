"""Curves on the lower hemisphere."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.orient import vectors
from fieldapp.drawing import sphere

azimuths = st.floats(0.0, 359.9)
dips = st.floats(0.0, 90.0)


@given(azimuths, dips)
def test_a_great_circle_lies_in_its_plane_and_below(strike, dip):
    """Every point of a great circle is at right angles to the pole and in the lower hemisphere."""
    pole = vectors.pole_vector(strike, dip)
    circle = sphere.great_circle(pole)
    assert np.abs(circle @ pole).max() < 1e-9
    assert circle[:, 2].min() > -1e-9


def test_a_great_circle_passes_through_its_dip():
    """The plane 045/30 holds the line 135/30 half way along."""
    circle = sphere.great_circle(vectors.pole_vector(45.0, 30.0), 3)
    assert np.allclose(circle[1], vectors.line_vector(135.0, 30.0))


def test_a_horizontal_plane_runs_round_the_rim():
    """The great circle of a flat plane lies on the rim."""
    assert np.abs(sphere.great_circle(vectors.pole_vector(10.0, 0.0))[:, 2]).max() < 1e-12


def test_an_ellipse_has_its_half_axes():
    """The farthest point of an ellipse is the major half axis away, the nearest the minor."""
    centre = vectors.line_vector(40.0, 20.0)
    circle = sphere.great_circle(centre, 2)
    major = circle[0]
    curve = sphere.ellipse(centre, major, np.cross(centre, major), 12.0, 5.0)
    away = vectors.axis_angle_deg(curve, centre)
    assert away.max() == pytest.approx(12.0, abs=1e-6)
    assert away.min() == pytest.approx(5.0, abs=1e-6)
    assert np.allclose(np.linalg.norm(curve, axis=1), 1.0)


def test_a_curve_across_the_rim_comes_back_on_the_other_side():
    """An ellipse round a horizontal line is cut into pieces that all lie below, with their ends on the rim."""
    centre = vectors.line_vector(30.0, 0.0)
    curve = sphere.ellipse(centre, vectors.DOWN, np.cross(centre, vectors.DOWN), 10.0, 10.0)
    pieces = sphere.lower_pieces(curve)
    assert len(pieces) >= 2
    for piece in pieces:
        assert piece[:, 2].min() > -1e-9
    cut_ends = [end for piece in pieces for end in (piece[0], piece[-1])]
    assert sum(abs(end[2]) < 1e-9 for end in cut_ends) >= 4


def test_a_curve_below_is_one_piece():
    """A curve that never leaves the lower hemisphere is not cut."""
    centre = vectors.line_vector(30.0, 60.0)
    curve = sphere.ellipse(centre, *_tangents(centre), 10.0, 5.0)
    assert len(sphere.lower_pieces(curve)) == 1
    assert sphere.lower_pieces(np.zeros((0, 3))) == []


@given(azimuths, st.floats(0.1, 90.0))
def test_the_net_places_lines_as_the_projection_does(trend, plunge):
    """Lines that point down land where the equal-area projection puts them."""
    line = vectors.line_vector(trend, plunge)
    assert np.allclose(sphere.net_xy(line), vectors.equal_area_xy(line), atol=1e-12)


def _tangents(centre):
    first = vectors.unit(np.cross(centre, vectors.DOWN))
    return first, np.cross(centre, first)
