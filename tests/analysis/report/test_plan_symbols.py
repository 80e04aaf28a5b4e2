"""The symbols of planes: the bar lies along strike, the tick points down dip, and each kind looks its own way."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.orient.attitudes import Plane
from analysis.orient.features import Feature
from analysis.report.plan_symbols import PlanPlane, azimuth_ray, plane_symbol

STRIKES = st.floats(0.0, 359.99)


def bed(strike, dip, *, overturned=False):
    return PlanPlane(Feature.BEDDING, Plane(strike, dip), overturned)


def cleavage(strike, dip):
    return PlanPlane(Feature.CLEAVAGE, Plane(strike, dip))


@given(STRIKES, st.floats(1.0, 89.0), st.sampled_from([Feature.BEDDING, Feature.CLEAVAGE]), st.booleans())
def test_bar_lies_along_strike_and_tick_points_down_dip(strike, dip, feature, overturned):
    """The bar runs along the strike both ways; what else is drawn reaches further down dip than up dip."""
    bar, *marks = plane_symbol(PlanPlane(feature, Plane(strike, dip), overturned))
    along, down = azimuth_ray(strike), azimuth_ray(strike + 90.0)
    np.testing.assert_allclose(bar, [-along, along], atol=1e-9)
    points = np.concatenate(marks)
    reach = points @ down
    assert reach.max() == pytest.approx(0.55 if overturned and feature is Feature.BEDDING else 0.5, abs=1e-9)
    assert reach.max() > -reach.min()


@given(STRIKES, st.sampled_from([Feature.BEDDING, Feature.CLEAVAGE]))
def test_vertical_plane_has_its_mark_on_both_sides(strike, feature):
    """The mark of a vertical plane reaches as far on one side of the bar as on the other."""
    _, *marks = plane_symbol(PlanPlane(feature, Plane(strike, 90.0)))
    reach = np.concatenate(marks) @ azimuth_ray(strike + 90.0)
    assert reach.max() == pytest.approx(-reach.min())


@given(STRIKES)
def test_horizontal_bed_is_a_ring_with_a_cross_whatever_its_strike(strike):
    """A horizontal bed has no strike: its symbol is a ring and a cross along north and east."""
    ring, *cross = plane_symbol(bed(strike, 0.0))
    np.testing.assert_allclose(np.linalg.norm(ring, axis=1), 0.6, atol=1e-12)
    assert len(cross) == 2
    for line in cross:
        assert np.count_nonzero(np.abs(line[0]) > 1e-12) == 1


def test_strike_045_dips_south_east():
    """045/30 has its bar to the north-east and its tick to the south-east."""
    bar, tick = plane_symbol(bed(45.0, 30.0))
    np.testing.assert_allclose(bar[1], np.sqrt(0.5) * np.array([1.0, 1.0]))
    np.testing.assert_allclose(tick[1], 0.5 * np.sqrt(0.5) * np.array([1.0, -1.0]))


def test_each_kind_of_plane_looks_different():
    """Six symbols for six kinds of plane, told apart by shape."""
    kinds = [
        bed(90, 30),
        bed(90, 90),
        bed(90, 0),
        bed(90, 30, overturned=True),
        cleavage(90, 30),
        cleavage(90, 90),
        cleavage(90, 0),
    ]
    assert len({item.kind for item in kinds}) == 7
    assert len({np.concatenate(plane_symbol(item)).round(6).tobytes() for item in kinds}) == 7


def test_overturned_tick_comes_from_behind_the_bar():
    """The hook of an overturned bed starts on the bar, bends round the up-dip side and points down dip."""
    _, hook = plane_symbol(bed(90.0, 70.0, overturned=True))  # dips south, so down dip is -y
    assert hook[0, 1] == pytest.approx(0.0, abs=1e-12)
    assert hook[:, 1].max() == pytest.approx(0.36, abs=1e-3)
    assert hook[-1, 1] == hook[:, 1].min() == pytest.approx(-0.55)
