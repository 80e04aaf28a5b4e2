"""Curves on the sphere: great circles and ellipses hold the angles that they stand for."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.orient.curves import ellipse, great_circle, lower_pieces, net_xy, rim_arc
from analysis.orient.vectors import axis_angle_deg, equal_area_xy, line_vector, trend_plunge_deg

TRENDS, PLUNGES = st.floats(0.0, 359.99), st.floats(0.0, 90.0)


def tangents(centre, turn_deg=0.0):
    """Two unit vectors at right angles to an axis and to each other, turned about it."""
    rough = np.eye(3)[np.argmin(np.abs(centre))]
    one = np.cross(centre, rough)
    one /= np.linalg.norm(one)
    other = np.cross(centre, one)
    turn = np.radians(turn_deg)
    return np.cos(turn) * one + np.sin(turn) * other, np.cos(turn) * other - np.sin(turn) * one


@given(TRENDS, PLUNGES)
def test_great_circle_lies_at_right_angles_to_its_pole(trend, plunge):
    """Every point of a great circle is 90 degrees from the pole, in the lower hemisphere, ends on the rim."""
    pole = line_vector(trend, plunge)
    circle = great_circle(pole)
    np.testing.assert_allclose(circle @ pole, 0.0, atol=1e-12)
    np.testing.assert_allclose(np.linalg.norm(circle, axis=1), 1.0, atol=1e-12)
    assert (circle[:, 2] >= -1e-12).all()
    np.testing.assert_allclose(np.linalg.norm(net_xy(circle[[0, -1]]), axis=1), 1.0, atol=1e-12)
    np.testing.assert_allclose(circle[0], -circle[-1], atol=1e-12)


def test_great_circle_of_a_plane_runs_through_its_dip():
    """The middle of the curve is the line down the dip: 045/30 dips to 135."""
    trend, plunge = trend_plunge_deg(great_circle(line_vector(315.0, 60.0), 3)[1])
    assert (float(trend), float(plunge)) == (pytest.approx(135.0), pytest.approx(30.0))


def test_great_circle_of_a_level_plane_runs_round_the_rim():
    """A plane with its pole straight down meets the lower hemisphere in the rim, half of it."""
    circle = great_circle([0.0, 0.0, 1.0], 73)
    np.testing.assert_allclose(circle[:, 2], 0.0, atol=1e-15)
    np.testing.assert_allclose(np.linalg.norm(net_xy(circle), axis=1), 1.0)


def test_great_circle_of_a_vertical_plane_is_a_straight_line_through_the_middle():
    """The plane that strikes north and stands upright is drawn from north to south, through the centre."""
    places = net_xy(great_circle([0.0, 1.0, 0.0], 3))
    np.testing.assert_allclose(np.abs(places), [[0.0, 1.0], [0.0, 0.0], [0.0, 1.0]], atol=1e-12)


@given(TRENDS, PLUNGES, st.floats(0.0, 180.0), st.floats(0.5, 80.0), st.floats(0.1, 1.0))
def test_ellipse_holds_its_half_angles(trend, plunge, turn, major_deg, ratio):
    """Along its axes the curve lies the half-angles away, and between them it fulfils the equation of the ellipse."""
    centre = line_vector(trend, plunge)
    major, minor = tangents(centre, turn)
    minor_deg = ratio * major_deg
    curve = ellipse(centre, major, minor, major_deg, minor_deg)
    np.testing.assert_allclose(np.linalg.norm(curve, axis=1), 1.0, atol=1e-12)
    # In the plane that touches the sphere at the centre.
    x, y = (curve @ major) / (curve @ centre), (curve @ minor) / (curve @ centre)
    a, b = np.tan(np.radians([major_deg, minor_deg]))
    np.testing.assert_allclose((x / a) ** 2 + (y / b) ** 2, 1.0, rtol=1e-9)
    away = axis_angle_deg(curve, centre)
    assert float(away[0]) == pytest.approx(major_deg, abs=1e-6)
    assert float(away.max()) <= major_deg + 1e-6
    assert float(away.min()) == pytest.approx(minor_deg, rel=2e-2)
    assert float(away.min()) >= minor_deg - 1e-6


def test_ellipse_is_evenly_spaced():
    """No stretch of a long and narrow ellipse is drawn with a few points only."""
    centre = line_vector(40.0, 20.0)
    steps = np.linalg.norm(np.diff(ellipse(centre, *tangents(centre), 85.0, 4.0), axis=0), axis=1)
    assert steps.max() < 1.3 * steps.mean()


def test_ellipse_of_no_size_is_a_point():
    """Half-angles of nought give the axis itself."""
    centre = line_vector(40.0, 20.0)
    curve = ellipse(centre, *tangents(centre), 0.0, 0.0, count=8)
    np.testing.assert_allclose(curve, np.tile(centre, (9, 1)), atol=1e-15)


def test_undetermined_ellipse_stays_finite():
    """Half-angles of 90 degrees, an axis that may point anywhere, are drawn as all but a half sphere."""
    centre = line_vector(40.0, 20.0)
    curve = ellipse(centre, *tangents(centre), 90.0, 90.0)
    assert np.isfinite(curve).all()
    assert float(axis_angle_deg(curve, centre).min()) > 89.0


@given(TRENDS, PLUNGES, st.floats(0.0, 180.0), st.floats(1.0, 70.0), st.floats(0.1, 1.0))
def test_ellipse_across_the_rim_comes_back_on_the_other_side(trend, plunge, turn, major_deg, ratio):
    """One closed piece inside the net, or two that end on the rim, each end opposite an end of the other."""
    centre = line_vector(trend, plunge)
    curve = ellipse(centre, *tangents(centre, turn), major_deg, ratio * major_deg)
    pieces = lower_pieces(curve)
    for piece in pieces:
        assert (piece[:, 2] >= 0.0).all()
        np.testing.assert_allclose(np.linalg.norm(piece, axis=1), 1.0, atol=1e-12)
    if len(pieces) == 1:
        np.testing.assert_allclose(pieces[0][0], pieces[0][-1], atol=1e-12)
        return
    assert len(pieces) == 2
    ends = np.array([[piece[0], piece[-1]] for piece in pieces])
    np.testing.assert_allclose(ends[..., 2], 0.0, atol=1e-15)
    np.testing.assert_allclose(ends[0], -ends[1][::-1], atol=1e-9)
    # Nothing is lost and nothing drawn twice: the points are those of the curve, and the four cuts.
    assert sum(map(len, pieces)) == len(curve) - 1 + 4


def test_horizontal_axis_has_half_its_ellipse_on_each_side():
    """A hinge due north and level has its ellipse half at the north end and half at the south end."""
    centre = line_vector(0.0, 0.0)
    pieces = lower_pieces(ellipse(centre, [0.0, 1.0, 0.0], [0.0, 0.0, 1.0], 10.0, 5.0))
    north, south = sorted((net_xy(piece) for piece in pieces), key=lambda xy: -xy[:, 1].mean())
    # On the rim 10 degrees either way; down the middle 5 degrees, r = sqrt(2) sin(85/2 degrees).
    np.testing.assert_allclose(
        sorted(north[[0, -1], 0]), [-np.sin(np.radians(10.0)), np.sin(np.radians(10.0))], atol=1e-3
    )
    assert north[:, 1].min() == pytest.approx(np.sqrt(2.0) * np.sin(np.radians(42.5)), abs=1e-3)
    assert south[:, 1].max() == pytest.approx(-north[:, 1].min(), abs=1e-3)
    np.testing.assert_allclose(sorted(south[[0, -1], 0]), sorted(north[[0, -1], 0]), atol=1e-9)


def test_open_curve_is_cut_and_kept_in_order():
    """A line of axes that passes the horizontal is cut in two, each part on its own side of the net."""
    pieces = lower_pieces(line_vector(np.zeros(4), [10.0, 4.0, -4.0, -10.0]))
    assert [len(piece) for piece in pieces] == [3, 3]
    np.testing.assert_allclose(pieces[0][-1], [1.0, 0.0, 0.0], atol=1e-12)
    np.testing.assert_allclose(pieces[1][0], [-1.0, 0.0, 0.0], atol=1e-12)


def test_curve_above_the_horizontal_is_turned_over_whole():
    """A curve of axes that all point up is drawn where their other ends point down."""
    up = line_vector([10.0, 20.0, 30.0], [-40.0, -40.0, -40.0])
    (piece,) = lower_pieces(up)
    np.testing.assert_allclose(piece, -up)


def test_no_curve_has_no_pieces():
    """An empty curve gives nothing to draw."""
    assert lower_pieces(np.zeros((0, 3))) == []


@given(TRENDS, st.floats(0.01, 90.0))
def test_places_agree_with_the_projection_of_readings(trend, plunge):
    """Curves and readings are projected alike."""
    v = line_vector(trend, plunge)
    np.testing.assert_allclose(net_xy(v), equal_area_xy(v), atol=1e-15)


def test_rim_arc_takes_the_shorter_way():
    """From 10 degrees west of north to 10 degrees east of it the arc passes north, not south."""
    ends = np.array([[np.sin(np.radians(a)), np.cos(np.radians(a))] for a in (-10.0, 10.0)])
    arc = rim_arc(*ends)
    np.testing.assert_allclose(arc[[0, -1]], ends, atol=1e-12)
    np.testing.assert_allclose(np.linalg.norm(arc, axis=1), 1.0)
    np.testing.assert_allclose(arc[15], [0.0, 1.0], atol=1e-12)
