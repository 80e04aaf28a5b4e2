"""Moments: rows that add and hold tensor and fourth moments."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra import numpy as hnp

from analysis.orient.vectors import line_vector
from analysis.stats.moments import (
    COUNT,
    FOURTH,
    WEIGHT,
    WEIGHT_SQUARED,
    WIDTH,
    fourth_of,
    moments,
    product_pairs,
    scaled,
    summed_moments,
    tensor,
)

AZIMUTHS = st.sampled_from([0.0, 90.0, 180.0, 270.0, 359.999999]) | st.floats(0, 360)
INCLINATIONS = st.sampled_from([0.0, 90.0, 1e-9]) | st.floats(0, 90)
AXIS = st.builds(line_vector, AZIMUTHS, INCLINATIONS)
AXES = st.lists(AXIS, min_size=1, max_size=12).map(np.array)
EXACT = 1e-12


@given(AXES, st.floats(0.1, 10.0))
def test_tensor_is_the_sum_of_outer_products(axes, weight):
    """The tensor read from added rows is the weighted sum of x x^T, computed directly."""
    rows = moments(axes, weight).sum(axis=0)
    assert rows.shape == (WIDTH,)
    assert rows[COUNT] == len(axes)
    assert rows[WEIGHT] == pytest.approx(weight * len(axes))
    assert rows[WEIGHT_SQUARED] == pytest.approx(weight**2 * len(axes))
    assert np.allclose(tensor(rows), weight * axes.T @ axes, atol=EXACT * weight)


@given(st.lists(AXES, min_size=1, max_size=5))
def test_sums_of_runs_are_the_sums_of_their_rows(runs):
    """Runs of axes summed without making the rows give the sums of the rows of moments."""
    ends = np.cumsum([len(run) for run in runs])
    found = summed_moments(np.concatenate(runs).T, ends - [len(run) for run in runs])
    assert found == pytest.approx(np.array([moments(run).sum(axis=0) for run in runs]), abs=EXACT)


@given(AXES, hnp.arrays(float, (4, 3), elements=st.floats(-1, 1)), st.floats(0.1, 10.0))
def test_fourth_moments_give_sums_of_four_projections(axes, directions, weight):
    """Two coefficient rows around the fourth moments give sum w^2 (a.x)(b.x)(c.x)(d.x), computed directly."""
    rows = moments(axes, weight).sum(axis=0)
    a, b, c, d = directions
    ours = product_pairs(a, b) @ fourth_of(rows[..., FOURTH]) @ product_pairs(c, d)
    direct = np.sum(weight**2 * (axes @ a) * (axes @ b) * (axes @ c) * (axes @ d))
    assert ours == pytest.approx(direct, abs=1e-9)


@given(AXES)
def test_an_axis_and_its_opposite_have_the_same_row(axes):
    """Nothing in a row depends on the sign of an axis, to the last bit."""
    assert np.array_equal(moments(axes), moments(-axes))


@given(AXES, st.floats(0.01, 100.0))
def test_scaling_rows_is_weighting_readings(axes, weight):
    """Rows scaled afterwards equal rows made with the weight."""
    assert np.allclose(scaled(moments(axes), weight), moments(axes, weight), rtol=1e-12, atol=1e-30)


def test_scalar_and_arrays_of_any_shape_agree():
    """One axis, a list and a grid of axes give the same rows."""
    axes = line_vector(np.arange(0.0, 360.0, 30.0), 25.0)
    rows = moments(axes)
    assert rows.shape == (12, WIDTH)
    assert np.array_equal(moments(axes[3]), rows[3])
    assert np.array_equal(moments(axes.reshape(3, 4, 3)), rows.reshape(3, 4, WIDTH))
    assert tensor(rows.reshape(3, 4, WIDTH)).shape == (3, 4, 3, 3)
    assert moments(np.zeros((0, 3))).shape == (0, WIDTH)
