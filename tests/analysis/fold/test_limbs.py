"""Limbs: told apart, named, and bisected."""

from __future__ import annotations

import numpy as np
import pytest

from analysis.fold.limbs import find_limbs, sides
from analysis.orient.features import Feature
from analysis.orient.vectors import pole_vector
from analysis.stats.sums import RunningSums
from tests.fitting import fitted_hinge


def limbs_of(planes, cleavage=None):
    """Limbs of bedding given as (strike, dip)."""
    sums = RunningSums()
    for strike, dip in planes:
        sums.add(Feature.BEDDING, "A", pole_vector(strike, dip))
    rows = sums.by_outcrop(Feature.BEDDING)
    cells, _ = sums.bedding_cells()
    across = fitted_hinge(rows).across
    pole = None if cleavage is None else pole_vector(*cleavage)
    return find_limbs(cells, sides(cells, across), across, pole)


def around(strike, dip, spread=1.0):
    return [(strike % 360.0, dip + k * spread) for k in (-1, 0, 1)]


def test_two_limbs_are_found_with_their_planes_and_counts():
    """Limbs 000/40 and 180/60 are told apart, with their dips, counts and names by dip direction."""
    limbs = limbs_of(around(0.0, 40.0) + around(180.0, 60.0) + [(180.0, 60.0)])
    by_name = {limb.name: limb for limb in limbs.both}
    assert set(by_name) == {"limb dipping E", "limb dipping W"}
    assert by_name["limb dipping E"].plane.dip_deg == pytest.approx(40.0, abs=1e-6)
    assert by_name["limb dipping W"].plane.dip_deg == pytest.approx(60.0, abs=1e-6)
    assert (by_name["limb dipping E"].count, by_name["limb dipping W"].count) == (3, 4)
    assert by_name["limb dipping E"].spread_deg == pytest.approx(np.sqrt(2.0 / 3.0), abs=0.02)


@pytest.mark.parametrize("strike", [0.0, 33.0, 90.0, 180.0, 271.0, 359.0])
@pytest.mark.parametrize(("first", "second"), [(30.0, 30.0), (50.0, 70.0), (80.0, 85.0)])
def test_the_interlimb_angle_is_that_between_the_limbs(strike, first, second):
    """Limbs that dip away from each other enclose 180 less both dips, whatever way the hinge trends."""
    limbs = limbs_of(around(strike, first, 0.5) + around(strike + 180.0, second, 0.5))
    assert limbs.interlimb_deg == pytest.approx(180.0 - first - second, abs=0.01)
    # The axial surface bisects them: it dips to the side of the gentler limb by half the difference off the vertical.
    assert limbs.axial_surface.dip_deg == pytest.approx(90.0 - abs(first - second) / 2.0, abs=0.01)


def test_cleavage_says_which_bisector_is_the_axial_surface():
    """In an overturned tight fold with both limbs dipping one way, cleavage between them gives the acute angle."""
    planes = around(0.0, 50.0, 0.5) + around(0.0, 80.0, 0.5)
    limbs = limbs_of(planes, (0.0, 65.0))
    assert limbs.interlimb_deg == pytest.approx(30.0, abs=0.01)
    assert limbs.axial_surface.dip_deg == pytest.approx(65.0, abs=0.01)
    assert limbs_of(planes).interlimb_deg == pytest.approx(150.0, abs=0.01)


def test_limbs_that_dip_the_same_way_have_names_of_their_own():
    """Two limbs dipping east are the steeper and the gentler one."""
    limbs = limbs_of(around(0.0, 50.0, 0.5) + around(0.0, 80.0, 0.5))
    names = {limb.name: limb.plane.dip_deg for limb in limbs.both}
    assert names["steeper limb dipping E"] == pytest.approx(80.0, abs=0.01)
    assert names["gentler limb dipping E"] == pytest.approx(50.0, abs=0.01)


def test_a_flat_limb_is_named_flat():
    """The direction in which a flat limb dips means nothing, so it is not named by it."""
    limbs = limbs_of([(0.0, 1.0), (180.0, 1.0), (0.0, 2.0), *around(0.0, 60.0)])
    assert {limb.name for limb in limbs.both} == {"flat limb", "limb dipping E"}


@pytest.mark.parametrize(
    "planes",
    [
        [(0.0, 40.0)] * 5,
        [(0.0, 40.0), (0.0, 44.0), (2.0, 41.0), (358.0, 39.0), (1.0, 36.0), (359.0, 45.0)],
        [(0.0, 90.0), (180.0, 90.0)] * 3,
        [(10.0, 0.0), (100.0, 0.0), (250.0, 0.0)],
    ],
)
def test_one_side_of_a_fold_is_no_two_limbs(planes):
    """Equal beds, one cluster, vertical beds read from either side and flat beds are one side only."""
    assert limbs_of(planes) is None


def test_vertical_limbs_of_an_isoclinal_fold_are_not_told_apart_by_the_sign_of_their_poles():
    """Beds dipping 89 to either side are 2 degrees apart, not 178."""
    limbs = limbs_of(around(0.0, 89.0, 0.1) + around(180.0, 89.0, 0.1), (0.0, 90.0))
    assert limbs.interlimb_deg == pytest.approx(2.0, abs=0.01)
    assert limbs.axial_surface.dip_deg == pytest.approx(90.0, abs=0.01)


def test_a_limb_may_cross_the_vertical():
    """A limb with dips 85 east to 85 west is one limb, against a gentle one."""
    steep = [(0.0, 85.0), (0.0, 88.0), (180.0, 88.0), (180.0, 85.0)]
    limbs = limbs_of([*steep, *around(180.0, 30.0)])
    assert sorted(limb.count for limb in limbs.both) == [3, 4]
    assert max(limb.plane.dip_deg for limb in limbs.both) == pytest.approx(90.0, abs=0.01)
