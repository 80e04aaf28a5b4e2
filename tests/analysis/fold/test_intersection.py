"""Intersection lines computed from planes, and limb against limb."""

from __future__ import annotations

import numpy as np
import pytest

from analysis.fold.check import check_fold
from analysis.fold.intersection import computed_lines, side_of_outcrops
from analysis.orient.features import Feature
from analysis.orient.vectors import axis_angle_deg, line_vector, pole_vector
from analysis.stats.axes import eigen
from analysis.stats.moments import COUNT, WEIGHT, moments, tensor
from analysis.stats.sums import RunningSums

ONE_DEGREE = np.radians([1.0, 1.0, 1.0])


def one_each(bed, cleavage, scatter=ONE_DEGREE):
    """The line computed at one outcrop from one bed and one cleavage pole."""
    return computed_lines(
        moments(bed)[np.newaxis], np.array([0]), np.array([0]), moments(cleavage)[np.newaxis], scatter
    )


def test_a_computed_line_lies_in_both_planes():
    """Bed 110/50 and cleavage 340/35 (dip direction/dip) meet in 038.092/20.309 (computed; see published checks)."""
    rows = one_each(pole_vector(20.0, 50.0), pole_vector(250.0, 35.0))
    line = eigen(tensor(rows[0]))[1][:, 0]
    assert float(axis_angle_deg(line, line_vector(38.092, 20.309))) < 1e-3


@pytest.mark.parametrize("dihedral", [10.0, 40.0, 90.0])
def test_the_weight_is_that_of_error_propagation(dihedral):
    """With equal scatter the sds are METHOD sec. 3's: 1/(sqrt 2 sin(w/2)) one way and 1/(sqrt 2 cos(w/2)) the other."""
    rows = one_each(pole_vector(0.0, 90.0), pole_vector(dihedral, 90.0))
    half = np.radians(dihedral) / 2.0
    variances = np.array([1.0 / (np.sqrt(2.0) * np.sin(half)), 1.0 / (np.sqrt(2.0) * np.cos(half))]) ** 2
    # A measured line has variance 1 + 1 in the same unit.
    assert rows[0, WEIGHT] == pytest.approx(2.0 / variances.sum())


def test_planes_nearly_parallel_give_no_line():
    """Below about 6 degrees between bed and cleavage no line is computed."""
    assert len(one_each(pole_vector(0.0, 90.0), pole_vector(5.0, 90.0))) == 0
    assert len(one_each(pole_vector(0.0, 90.0), pole_vector(0.0, 90.0))) == 0
    assert len(one_each(pole_vector(0.0, 90.0), pole_vector(7.0, 90.0))) == 1


def test_lines_are_computed_only_where_both_were_read():
    """An outcrop with bedding alone, and one with cleavage alone, give no line; each limb of the others gives one."""
    beds = moments(pole_vector([0.0, 0.0, 180.0], [40.0, 50.0, 60.0]))
    owner, side = np.array([0, 1, 1]), np.array([0, 0, 1])
    cleavage = np.stack([np.zeros(24), moments(pole_vector(5.0, 90.0)), moments(pole_vector(5.0, 90.0))])
    rows = computed_lines(beds, owner, side, cleavage, ONE_DEGREE)
    assert len(rows) == 2
    assert rows[:, COUNT].tolist() == [1.0, 1.0]
    assert len(computed_lines(beds, owner, side, np.zeros((3, 24)), ONE_DEGREE)) == 0


def test_a_measured_line_is_not_counted_twice():
    """An outcrop with measured lines gives those; one without gives the computed ones (METHOD sec. 3)."""
    sums = RunningSums()
    for name in ("A", "B"):
        sums.add(Feature.BEDDING, name, pole_vector([0.0, 180.0], [40.0, 50.0]))
        sums.add(Feature.CLEAVAGE, name, pole_vector([8.0, 8.0, 9.0], [88.0, 89.0, 90.0]))
    sums.add(Feature.INTERSECTION, "A", line_vector([8.0, 9.0, 8.0], [2.0, 3.0, 5.0]))
    check = check_fold(sums)
    assert (check.intersection.measured, check.intersection.computed) == (3, 2)
    sums.add(Feature.INTERSECTION, "B", line_vector(8.0, 4.0))
    check = check_fold(sums)
    assert (check.intersection.measured, check.intersection.computed) == (4, 0)


def test_limb_lines_measured_on_each_limb_are_kept_apart():
    """Lines read at outcrops of one limb are that limb's; those of mixed outcrops belong to neither."""
    sums = RunningSums()
    sums.add(Feature.BEDDING, "east", pole_vector([0.0, 1.0, 359.0, 0.0], [45.0, 46.0, 44.0, 45.0]))
    sums.add(Feature.BEDDING, "west", pole_vector([180.0, 181.0, 179.0, 180.0], [45.0, 46.0, 44.0, 45.0]))
    sums.add(Feature.CLEAVAGE, "east", pole_vector([10.0] * 6, [90.0] * 6))
    sums.add(Feature.INTERSECTION, "east", line_vector(10.0, [9.0, 10.0]))
    sums.add(Feature.INTERSECTION, "west", line_vector(190.0, [10.0, 11.0, 9.0]))
    lines = {line.limb: line for line in check_fold(sums).limb_lines}
    east, west = lines["limb dipping E"], lines["limb dipping W"]
    assert (east.measured_count, west.measured_count) == (2, 3)
    assert east.measured.trend_deg == pytest.approx(10.0, abs=0.1)
    assert west.measured.trend_deg == pytest.approx(190.0, abs=0.1)
    assert east.measured.plunge_deg == pytest.approx(east.computed.plunge_deg, abs=1.0)


def test_sides_of_outcrops():
    """Four fifths of an outcrop's bedding on one side make it that limb's; less, or no bedding, leave it open."""
    cells = np.zeros((6, 24))
    cells[:, COUNT] = [4, 1, 3, 1, 2, 2]
    owner, side = np.array([0, 0, 1, 1, 2, 2]), np.array([0, 1, 1, 0, 0, 1])
    assert side_of_outcrops(cells, owner, side, 4).tolist() == [0, -1, -1, -1]
    assert side_of_outcrops(cells[:2], owner[:2], side[:2], 2).tolist() == [0, -1]
