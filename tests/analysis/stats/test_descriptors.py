"""Numbers that describe clouds of axes."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.errors import TooFewReadingsError
from analysis.orient.vectors import line_vector, pole_vector
from analysis.stats.descriptors import fisher_mean, shape, share_near_girdle

VALUES = st.tuples(*[st.floats(1e-3, 1e3)] * 3)


@given(VALUES)
def test_point_girdle_and_random_sum_to_one(values):
    """P + G + R = 1 whatever the eigenvalues (Vollmer 1990), in any order and of any sum."""
    one = shape(values)
    assert one.point + one.girdle + one.random == pytest.approx(1.0)
    assert min(one.point, one.girdle, one.random) >= -1e-12
    again = shape([3.0 * value for value in sorted(values)])
    assert np.allclose(again, one, equal_nan=True)


def test_k_and_c_follow_woodcock():
    """K = ln(t1/t2)/ln(t2/t3) and C = ln(t1/t3) (Woodcock 1977), worked by hand for t = e^-1, e^-2, e^-4."""
    one = shape(np.exp([-1.0, -2.0, -4.0]))
    assert float(one.girdle_to_cluster) == pytest.approx(0.5)
    assert float(one.strength) == pytest.approx(3.0)


def test_extremes():
    """A point has P = 1, a girdle G = 1, an even spread R = 1; K is 1 where cluster and girdle balance."""
    assert [float(v) for v in shape([1.0, 0.0, 0.0])[2:]] == [1.0, 0.0, 0.0]
    assert [float(v) for v in shape([0.5, 0.5, 0.0])[2:]] == [0.0, 1.0, 0.0]
    even = shape([1.0, 1.0, 1.0])
    assert float(even.random) == pytest.approx(1.0)
    assert np.isnan(even.girdle_to_cluster)
    assert float(even.strength) == 0.0
    assert float(shape([4.0, 2.0, 1.0]).girdle_to_cluster) == pytest.approx(1.0)
    assert np.isinf(shape([1.0, 0.5, 0.0]).strength)


def test_shapes_of_many_clouds_at_once():
    """A leading shape gives each cloud by itself."""
    many = shape(np.arange(1.0, 13.0).reshape(2, 2, 3))
    assert many.point.shape == (2, 2)
    assert float(many.strength[1, 0]) == pytest.approx(float(shape([7.0, 8.0, 9.0]).strength))


def test_share_near_the_girdle():
    """Poles 0, 5, 15 and 25 degrees off the girdle about a vertical axis: half within 10, three quarters within 20."""
    poles = line_vector([0.0, 90.0, 200.0, 300.0], [0.0, 5.0, 15.0, 25.0])
    axis = np.array([0.0, 0.0, 1.0])
    assert share_near_girdle(poles, axis, 10.0) == 0.5
    assert share_near_girdle(poles, -axis, 20.0) == 0.75
    assert share_near_girdle(-poles, axis, 90.0) == 1.0
    with pytest.raises(TooFewReadingsError):
        share_near_girdle(np.zeros((0, 3)), axis, 10.0)


def test_fisher_mean_at_its_edges():
    """Equal directions have no scatter; opposite ones no mean but the widest cone; fewer than two are refused."""
    same = fisher_mean([pole_vector(0.0, 30.0)] * 3)
    assert same.resultant == pytest.approx(3.0)
    assert same.alpha95_deg == pytest.approx(0.0, abs=1e-5)
    opposite = fisher_mean(line_vector([0.0, 180.0], [0.0, 0.0]))
    assert opposite.alpha95_deg == pytest.approx(180.0)
    for few in (np.zeros((0, 3)), [pole_vector(0.0, 30.0)]):
        with pytest.raises(TooFewReadingsError, match="at least two"):
            fisher_mean(few)
