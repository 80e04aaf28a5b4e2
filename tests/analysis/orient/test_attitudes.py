"""One plane, one line: records that cannot be wrong, and the angles between them."""

from __future__ import annotations

import dataclasses
import math

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from analysis.errors import AttitudeError
from analysis.orient import vectors
from analysis.orient.attitudes import Line, Plane
from analysis.orient.features import Feature

PLANES = st.builds(Plane, st.floats(0.0, 360.0), st.floats(0.0, 90.0))
LINES = st.builds(Line, st.floats(0.0, 360.0), st.floats(0.0, 90.0))


def test_360_becomes_0_and_minus_zero_becomes_zero():
    assert Plane(360, 30) == Plane(0, 30)
    assert Line(360, 30).trend_deg == 0.0
    assert math.copysign(1.0, Plane(-0.0, -0.0).strike_deg) == 1.0
    assert math.copysign(1.0, Plane(-0.0, -0.0).dip_deg) == 1.0


@pytest.mark.parametrize("value", [-0.1, 360.1, math.nan, math.inf, -math.inf])
@pytest.mark.parametrize(
    ("make", "field"),
    [
        (lambda value: Plane(value, 30), "strike"),
        (lambda value: Plane.from_dip_direction(value, 30), "dip direction"),
        (lambda value: Line(value, 30), "trend"),
        (lambda value: Plane(45, 30).apparent_dip_deg(value), "section azimuth"),
        (lambda value: Plane(45, 30).line_at_pitch(40, value), "end of the strike"),
    ],
)
def test_an_azimuth_outside_0_to_360_is_refused_by_its_name(make, field, value):
    with pytest.raises(AttitudeError, match="0 to 360") as caught:
        make(value)
    assert caught.value.where == field


@pytest.mark.parametrize("value", [-0.1, 90.1, math.nan, math.inf])
@pytest.mark.parametrize(("kind", "field"), [(Plane, "dip"), (Line, "plunge")])
def test_an_inclination_outside_0_to_90_is_refused_by_its_name(kind, field, value):
    with pytest.raises(AttitudeError, match=r"0 \(horizontal\) to 90") as caught:
        kind(45, value)
    assert caught.value.where == field


def test_a_refusal_shows_the_digits_that_are_wrong():
    with pytest.raises(AttitudeError, match=r"360\.000001"):
        Plane(360.000001, 30)


def test_the_records_are_frozen():
    with pytest.raises(dataclasses.FrozenInstanceError):
        Plane(45, 30).strike_deg = 10


def test_the_dip_direction_is_strike_plus_90():
    assert Plane(45, 30).dip_direction_deg == 135
    assert Plane(300, 30).dip_direction_deg == 30
    assert Plane.from_dip_direction(30, 40) == Plane(300, 40)
    assert Plane.from_dip_direction(360, 40) == Plane(270, 40)


@given(PLANES)
def test_a_plane_reversed_twice_is_itself(plane):
    assert plane.reversed.dip_deg == plane.dip_deg
    assert plane.reversed.reversed.angle_deg(plane) < 1e-9


@given(PLANES)
def test_a_plane_comes_back_from_its_pole(plane):
    assert Plane.from_pole(plane.pole).angle_deg(plane) < 1e-9
    assert Plane.from_pole(-3.0 * plane.pole).angle_deg(plane) < 1e-9


@given(LINES)
def test_a_line_comes_back_from_its_vector(line):
    assert Line.from_vector(-2.0 * line.vector).angle_deg(line) < 1e-9


@given(PLANES, PLANES)
def test_the_intersection_lies_in_both_planes(one, two):
    assume(one.angle_deg(two) > 0.1)
    line = one.intersection(two)
    assert abs(line.vector @ one.pole) < 1e-9
    assert abs(line.vector @ two.pole) < 1e-9
    assert line.plunge_deg <= min(one.dip_deg, two.dip_deg) + 1e-9


@given(LINES, LINES)
def test_the_plane_through_two_lines_holds_both(one, two):
    assume(one.angle_deg(two) > 0.1)
    plane = one.plane_with(two)
    assert abs(one.vector @ plane.pole) < 1e-9
    assert abs(two.vector @ plane.pole) < 1e-9


@pytest.mark.parametrize("other", [Plane(45, 30), Plane(360 - 315, 30)])
def test_parallel_planes_meet_in_no_line(other):
    with pytest.raises(AttitudeError, match="parallel planes"):
        Plane(45, 30).intersection(other)


def test_vertical_planes_of_opposite_strike_are_one_plane():
    assert Plane(45, 90).angle_deg(Plane(225, 90)) < 1e-12
    with pytest.raises(AttitudeError, match="parallel planes"):
        Plane(45, 90).intersection(Plane(225, 90))


def test_parallel_lines_span_no_plane():
    with pytest.raises(AttitudeError, match="parallel lines"):
        Line(0, 0).plane_with(Line(180, 0))


@given(PLANES, st.floats(0.0, 180.0, exclude_max=True))
def test_a_pitch_comes_back_from_its_line(plane, pitch):
    assert (
        plane.line_at_pitch(plane.pitch_deg(plane.line_at_pitch(pitch))).angle_deg(plane.line_at_pitch(pitch))
        < 1e-6
    )
    assert abs(plane.line_at_pitch(pitch).vector @ plane.pole) < 1e-9


@given(PLANES, LINES)
def test_a_pitch_lies_in_0_to_180(plane, line):
    assume(plane.angle_deg(Plane.from_pole(line.vector)) > 0.1)
    assert 0.0 <= plane.pitch_deg(line) < 180.0


def test_a_pitch_from_the_other_end_is_the_supplement():
    plane = Plane(90, 60)
    assert plane.line_at_pitch(40, 270).angle_deg(plane.line_at_pitch(140, 90)) < 1e-9
    assert plane.line_at_pitch(90).angle_deg(Line(180, 60)) < 1e-9


@pytest.mark.parametrize("pitch", [-1, 180.1, math.nan])
def test_a_pitch_outside_0_to_180_is_refused(pitch):
    with pytest.raises(AttitudeError, match="0 to 180"):
        Plane(90, 60).line_at_pitch(pitch)


def test_an_end_at_right_angles_to_the_strike_names_no_end():
    with pytest.raises(AttitudeError, match="right angles"):
        Plane(90, 60).line_at_pitch(40, 0)


def test_the_pole_has_no_pitch():
    plane = Plane(90, 60)
    with pytest.raises(AttitudeError, match="no pitch"):
        plane.pitch_deg(Line.from_vector(plane.pole))


@pytest.mark.parametrize(
    ("plane", "section", "dip"),
    [
        (Plane(0, 40), 90, 40),
        (Plane(0, 40), 270, 40),
        (Plane(0, 40), 0, 0),
        (Plane(0, 40), 180, 0),
        (Plane(0, 0), 45, 0),
        (Plane(0, 90), 45, 90),
        (Plane(0, 90), 0, 0),
        (Plane(0, 90), 180, 0),
    ],
)
def test_the_apparent_dip_is_full_across_the_strike_and_none_along_it(plane, section, dip):
    assert plane.apparent_dip_deg(section) == pytest.approx(dip, abs=1e-9)


@given(PLANES, st.floats(0.0, 360.0))
def test_the_apparent_dip_is_the_plunge_of_the_line_in_a_vertical_section(plane, section):
    wall = Plane(section, 90)
    assume(plane.dip_deg < 89.0)
    assert plane.apparent_dip_deg(section) == pytest.approx(plane.intersection(wall).plunge_deg, abs=1e-6)


def test_features_say_whether_they_are_planes_and_their_sign():
    assert [feature for feature in Feature if feature.is_plane] == [Feature.BEDDING, Feature.CLEAVAGE]
    assert [feature.symbol for feature in Feature] == ["S0", "S1", "L01", "h"]
    assert Feature("hinge") is Feature.HINGE


# Squares of less than 1e-100 vanish, and with them the length of such a vector in an array.
PARTS = st.sampled_from([0.0, -0.0, 1.0, -1.0, 1e-100]) | st.floats(-10, 10).filter(
    lambda part: abs(part) > 1e-100
)


@given(st.lists(PARTS, min_size=3, max_size=3))
def test_records_agree_with_the_arrays(parts):
    """A record made from one axis holds what the array functions give for it, also on the rim and at the poles."""
    axis = np.array(parts)
    try:
        unit = vectors.unit(axis)
    except AttitudeError:
        with pytest.raises(AttitudeError):
            Line.from_vector(axis)
        return
    line, plane = Line.from_vector(axis), Plane.from_pole(axis)
    assert np.allclose(line.vector, vectors.lower_hemisphere(unit), atol=1e-12)
    assert np.allclose(plane.pole, line.vector, atol=1e-12)
    trend, plunge = vectors.trend_plunge_deg(unit)
    assert line.plunge_deg == pytest.approx(float(plunge), abs=1e-9)
    assert abs((line.trend_deg - float(trend) + 180.0) % 360.0 - 180.0) * np.cos(np.radians(plunge)) < 1e-9
