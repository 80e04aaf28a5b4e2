"""Directions as unit vectors: senses, edges, shapes and the way back."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.errors import AttitudeError
from analysis.orient import vectors
from analysis.orient.attitudes import Line

AZIMUTHS = st.floats(0.0, 360.0)
INCLINATIONS = st.floats(0.0, 90.0)
COMPONENTS = st.floats(-1.0, 1.0)
AXES = (
    st.tuples(COMPONENTS, COMPONENTS, COMPONENTS).filter(lambda v: np.linalg.norm(v) > 1e-3).map(vectors.unit)
)


@pytest.mark.parametrize(
    ("azimuth", "wrapped"), [(0, 0), (360, 0), (-90, 270), (720, 0), (-1e-20, 0), (359.5, 359.5), (450, 90)]
)
def test_azimuths_are_brought_below_360(azimuth, wrapped):
    assert vectors.wrap_azimuth_deg(azimuth) == wrapped


@given(st.floats(-1e6, 1e6))
def test_a_wrapped_azimuth_is_an_azimuth(azimuth):
    assert 0.0 <= vectors.wrap_azimuth_deg(azimuth) < 360.0


@pytest.mark.parametrize(
    ("trend", "plunge", "vector"),
    [(0, 0, (1, 0, 0)), (90, 0, (0, 1, 0)), (180, 0, (-1, 0, 0)), (360, 0, (1, 0, 0)), (123, 90, (0, 0, 1))],
)
def test_lines_point_north_east_down(trend, plunge, vector):
    np.testing.assert_allclose(vectors.line_vector(trend, plunge), vector, atol=1e-15)


@pytest.mark.parametrize(
    ("strike", "dip", "trend", "plunge"),
    [(0, 30, 270, 60), (90, 90, 0, 0), (270, 45, 180, 45), (360, 30, 270, 60), (45, 0, 0, 90)],
)
def test_the_pole_trends_against_the_dip_and_plunges_90_minus_dip(strike, dip, trend, plunge):
    np.testing.assert_allclose(
        vectors.pole_vector(strike, dip), vectors.line_vector(trend, plunge), atol=1e-15
    )


def test_scalars_and_arrays_give_the_same_vectors_in_their_shape():
    trend, plunge = np.array([[10.0, 350.0], [180.0, 0.0]]), np.array([[0.0, 45.0], [90.0, 20.0]])
    many = vectors.line_vector(trend, plunge)
    assert many.shape == (2, 2, 3)
    for index in np.ndindex(2, 2):
        np.testing.assert_array_equal(many[index], vectors.line_vector(trend[index], plunge[index]))
    assert vectors.line_vector(10.0, 0.0).shape == (3,)
    assert vectors.line_vector([10.0, 20.0], 0.0).shape == (2, 3)


def test_no_directions_give_no_vectors():
    assert vectors.line_vector([], []).shape == (0, 3)
    assert vectors.pole_vector([], []).shape == (0, 3)
    assert vectors.lower_hemisphere(np.zeros((0, 3))).shape == (0, 3)
    assert vectors.equal_area_xy(np.zeros((0, 3))).shape == (0, 2)
    assert vectors.trend_plunge_deg(np.zeros((0, 3)))[0].shape == (0,)


@given(AZIMUTHS, INCLINATIONS)
def test_a_line_comes_back_from_its_vector(trend, plunge):
    vector = vectors.line_vector(trend, plunge)
    back = vectors.line_vector(*vectors.trend_plunge_deg(vector))
    assert vectors.axis_angle_deg(back, vector) < 1e-10


@given(AZIMUTHS, INCLINATIONS)
def test_a_plane_comes_back_from_its_pole(strike, dip):
    pole = vectors.pole_vector(strike, dip)
    assert vectors.axis_angle_deg(vectors.pole_vector(*vectors.strike_dip_deg(pole)), pole) < 1e-10


@given(AXES)
def test_an_axis_and_its_opposite_are_one_line_and_one_place(axis):
    np.testing.assert_array_equal(vectors.lower_hemisphere(axis), vectors.lower_hemisphere(-axis))
    assert vectors.trend_plunge_deg(axis) == vectors.trend_plunge_deg(-axis)
    assert vectors.strike_dip_deg(axis) == vectors.strike_dip_deg(-axis)
    np.testing.assert_array_equal(vectors.equal_area_xy(axis), vectors.equal_area_xy(-axis))


@pytest.mark.parametrize(
    ("vector", "trend"), [((-1, 0, 0), 0), ((0, -1, 0), 90), ((1, 0, -0.0), 0), ((0, 1, 0), 90)]
)
def test_horizontal_axes_trend_below_180(vector, trend):
    assert vectors.trend_plunge_deg(vector) == (trend, 0)


@pytest.mark.parametrize("trend", [0.0, 30.0, 90.0, 150.0, 180.0, 210.0, 270.0, 330.0])
@pytest.mark.parametrize("rounding", [-2e-16, 0.0, 2e-16])
def test_rounding_does_not_turn_a_horizontal_axis_round(trend, rounding):
    """What rounding leaves of a zero plunge, or of a zero in the east, decides no direction."""
    axis = np.add(vectors.line_vector(trend, 0.0), [0.0, 0.0, rounding])
    found = vectors.trend_plunge_deg(axis)
    assert found[0] == pytest.approx(trend % 180.0, abs=1e-9)
    assert 0.0 <= found[1] < 1e-12
    assert Line.from_vector(axis).trend_deg == pytest.approx(trend % 180.0, abs=1e-9)
    place = vectors.equal_area_xy(axis)
    assert np.allclose(place, vectors.equal_area_xy(vectors.line_vector(trend % 180.0, 0.0)), atol=1e-12)


def test_a_vertical_axis_plunges_90_whichever_way_it_points():
    assert vectors.trend_plunge_deg([0, 0, -1])[1] == 90
    assert vectors.strike_dip_deg([0, 0, 1])[1] == 0


@given(AXES, AXES)
def test_the_angle_between_axes_is_acute_and_the_same_both_ways(first, second):
    angle = vectors.axis_angle_deg(first, second)
    assert 0.0 <= angle <= 90.0 + 1e-12
    assert angle == pytest.approx(vectors.axis_angle_deg(second, -first), abs=1e-9)


def test_small_angles_between_axes_keep_their_digits():
    # An arc cosine would lose this angle in rounding.
    assert vectors.axis_angle_deg([1, 0, 0], [1, 1e-9, 0]) == pytest.approx(np.degrees(1e-9), rel=1e-12)


@pytest.mark.parametrize("bad", [[0, 0, 0], [np.nan, 0, 1], [np.inf, 0, 0], [[1, 0, 0], [0, 0, 0]]])
def test_a_vector_without_direction_is_refused(bad):
    with pytest.raises(AttitudeError, match="no direction"):
        vectors.unit(bad)


@given(AXES)
def test_a_place_on_the_net_gives_its_axis_back(axis):
    xy = vectors.equal_area_xy(axis)
    assert np.hypot(*xy) <= 1.0 + 1e-12
    back = vectors.vector_from_equal_area_xy(xy)
    assert vectors.axis_angle_deg(back, axis) < 1e-6
    assert np.linalg.norm(back) == pytest.approx(1.0, abs=1e-12)


def test_north_is_up_on_the_net_and_its_centre_is_vertical():
    np.testing.assert_allclose(vectors.equal_area_xy([1, 0, 0]), [0, 1])
    np.testing.assert_allclose(vectors.equal_area_xy([0, 1, 0]), [1, 0])
    np.testing.assert_allclose(vectors.equal_area_xy([0, 0, 1]), [0, 0])


def test_equal_areas_of_the_sphere_are_equal_areas_of_the_net():
    # The cap within 60 degrees of the vertical is half of the hemisphere: 1 - cos 60 = 1/2. So r^2 = 1/2.
    np.testing.assert_allclose(np.sum(vectors.equal_area_xy(vectors.line_vector(33.0, 30.0)) ** 2), 0.5)


@pytest.mark.parametrize("xy", [(2.0, 0.0), (0.0, -7.0), (1.0, 1.0), (1.0, 0.0)])
def test_a_place_outside_the_net_stands_for_its_rim(xy):
    back = vectors.vector_from_equal_area_xy(xy)
    assert np.linalg.norm(back) == pytest.approx(1.0)
    assert back[2] == pytest.approx(0.0, abs=1e-15)
    np.testing.assert_allclose(back[:2], np.array(xy)[::-1] / np.hypot(*xy))


@given(AXES, AXES)
def test_the_cross_product_is_numpys(first, second):
    np.testing.assert_allclose(vectors.cross(first, second), np.cross(first, second), atol=1e-15)
    many = np.array([second, -first, first + second])
    np.testing.assert_allclose(vectors.cross(first, many), np.cross(first, many), atol=1e-15)
