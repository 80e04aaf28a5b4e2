"""Squares of the map: their size everywhere, seams, poles and windows."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.errors import SettingError
from analysis.survey.squares import (
    EARTH_RADIUS_KM,
    Grid,
    parts_of,
    position_of,
    square_name,
    upward_vectors,
)

LATITUDES = st.sampled_from([-90.0, 90.0, 0.0]) | st.floats(-90, 90)
LONGITUDES = st.sampled_from([-180.0, 180.0, 0.0]) | st.floats(-180, 180)


def name_of(grid, latitude, longitude):
    band, place = grid.square_of(np.array([latitude]), np.array([longitude]))
    return square_name(int(band[0]), int(place[0]))


def apart_km(one, two):
    a, b = (upward_vectors(np.array(place[0]), np.array(place[1])) for place in (one, two))
    return EARTH_RADIUS_KM * math.atan2(float(np.linalg.norm(np.cross(a, b))), float(a @ b))


@given(LATITUDES, LONGITUDES, st.sampled_from([0.5, 3.0, 40.0]))
def test_a_position_lies_in_its_square(latitude, longitude, km):
    """No position is farther from the middle of its square than half a diagonal, with the bands' few per cent."""
    grid = Grid(km)
    name = name_of(grid, latitude, longitude)
    # Beside a pole the last squares are slices of a cap, up to one width high.
    bound = 0.75 if abs(latitude) < 89.0 else 1.2
    assert apart_km((latitude, longitude), grid.centre_deg(name)) <= bound * km


@given(st.floats(-80, 80), st.sampled_from([1.0, 25.0]))
def test_squares_are_as_large_as_asked(latitude, km):
    """The area of a square is that asked for within 2 per cent, away from the poles."""
    grid = Grid(km)
    band, _ = parts_of(name_of(grid, latitude, 0.0))
    south, north = (math.radians(edge * 180.0 / grid.bands - 90.0) for edge in (band, band + 1))
    area = 2 * math.pi * EARTH_RADIUS_KM**2 * (math.sin(north) - math.sin(south)) / int(grid.squares_in(band))
    assert area == pytest.approx(km * km, rel=0.02)


def test_the_date_line_is_no_seam():
    """180 degrees east and west are one place; the windows beside it reach across."""
    grid = Grid(10.0)
    assert name_of(grid, 12.0, 180.0) == name_of(grid, 12.0, -180.0)
    west, east = name_of(grid, 12.0, 179.99), name_of(grid, 12.0, -179.99)
    assert west != east
    assert set(grid.window_of(west, {west, east})) == {west, east}
    assert set(grid.window_of(east, {west, east})) == {west, east}


@given(st.floats(-85, 85), LONGITUDES, st.sampled_from([2.0, 30.0]))
def test_a_window_is_three_by_three(latitude, longitude, km):
    """A window holds the square, both beside it, and three of the band on either side."""
    grid = Grid(km, moving=True)
    name = name_of(grid, latitude, longitude)
    band, place = parts_of(name)
    near = {
        square_name(other, (round((grid.centre_deg(name)[1] + 180.0) / 360.0 * n) + step) % n)
        for other in range(max(0, band - 2), min(grid.bands, band + 3))
        for n in [int(grid.squares_in(other))]
        for step in range(-4, 5)
    }
    window = grid.window_of(name, near)
    assert name in window
    assert len(window) == 9
    squares = int(grid.squares_in(band))
    assert {square_name(band, (place + step) % squares) for step in (-1, 0, 1)} <= set(window)


@pytest.mark.parametrize("km", [0.0, -1.0, math.nan, math.inf, 1e9])
def test_no_square_has_such_a_width(km):
    """A width that no square can have is refused."""
    with pytest.raises(SettingError, match="width"):
        Grid(km)


def test_mean_positions():
    """The mean of two places on either side of the date line lies on it; of nothing, nowhere."""
    vectors = upward_vectors(np.array([10.0, 10.0]), np.array([179.0, -179.0]))
    latitude, longitude = position_of(vectors.sum(axis=0))
    assert abs(longitude) == pytest.approx(180.0)
    assert latitude == pytest.approx(10.0, abs=0.01)
    assert position_of(np.zeros(3)) is None
    assert np.isnan(upward_vectors(np.array([np.nan]), np.array([np.nan]))).all()
