"""Vectors of many readings at once are those of the readings one by one."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.orient.manyvectors import axis_vectors, sin_cos_deg
from analysis.orient.vectors import line_vector, pole_vector

AZIMUTHS = st.sampled_from([0.0, 0.5, 90.0, 180.0, 269.5, 270.5, 359.9999, 360.0]) | st.floats(0, 360)
INCLINATIONS = st.sampled_from([0.0, 0.5, 89.5, 90.0]) | st.floats(0, 90)


@given(st.lists(st.tuples(st.booleans(), AZIMUTHS, INCLINATIONS), max_size=30))
def test_many_vectors_agree_with_single_ones(readings):
    """Planes and lines, mixed in any order, get the vectors that each gets by itself."""
    plane = np.array([is_plane for is_plane, *_ in readings], dtype=bool)
    azimuths, inclinations = (np.array([reading[k] for reading in readings], dtype=float) for k in (1, 2))
    expected = [pole_vector(a, i) if is_plane else line_vector(a, i) for is_plane, a, i in readings]
    found = axis_vectors(plane, azimuths, inclinations)
    assert found.shape == (len(readings), 3)
    assert found == pytest.approx(np.array(expected).reshape(-1, 3), abs=1e-14)


def test_more_vectors_than_are_made_at_once():
    """Every reading of a long column gets its own vector, of unit length."""
    rng = np.random.default_rng(2)
    plane = rng.random(50_000) < 0.5
    azimuths, inclinations = rng.uniform(0, 360, 50_000), rng.uniform(0, 90, 50_000)
    found = axis_vectors(plane, azimuths, inclinations)
    assert np.abs(found[plane] - pole_vector(azimuths, inclinations)[plane]).max() < 1e-14
    assert np.abs(found[~plane] - line_vector(azimuths, inclinations)[~plane]).max() < 1e-14
    assert np.abs(np.linalg.norm(found, axis=1) - 1.0).max() < 1e-14


def test_whole_degrees_are_exact():
    """Whole degrees have the sine and cosine that numpy gives."""
    degrees = np.arange(361.0)
    sine, cosine = sin_cos_deg(degrees)
    assert np.array_equal(sine, np.sin(np.radians(degrees)))
    assert np.array_equal(cosine, np.cos(np.radians(degrees)))
