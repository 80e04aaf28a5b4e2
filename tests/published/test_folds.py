"""Whole folds with a known answer: the project's own check case, formulas, and open data."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from analysis.fold.check import check_fold
from analysis.fold.profile import profile_transection_deg
from analysis.orient.attitudes import Line, Plane
from analysis.orient.features import Feature
from analysis.orient.notation import Notation, read_plane
from analysis.orient.vectors import line_vector, pole_vector, trend_plunge_deg
from analysis.stats.axes import eigen
from analysis.stats.moments import tensor
from analysis.stats.sums import RunningSums

DATA = Path(__file__).parent / "data"

# The full check case of METHOD sec. 4, dip direction/dip; its figures were computed twice, independently.
S0 = ["118/62", "125/55", "112/70", "121/58", "330/48", "322/57", "338/44", "326/52"]
S1 = ["143/82", "147/85", "139/80", "145/84", "150/81", "141/86"]
# `onefolddata.csv` of LoopStructural 1.9.0 (MIT), bedding s0 of a synthetic cylindrical fold with the documented axis
# 180.0/60.0: its 17 different attitudes, right-hand-rule strike (some above 360) and dip, and how often each stands.
ONE_FOLD = [
    (100.307098, 60.401195, 117), (102.419788, 60.583216, 117), (122.477887, 64.030744, 234),
    (134.097943, 67.479139, 117), (135.371238, 67.922044, 117), (140.833552, 69.965373, 117),
    (141.849901, 70.370847, 117), (143.781636, 71.162932, 117), (144.644505, 71.525701, 117),
    (396.218364, 71.162932, 117), (396.246797, 71.151072, 117), (398.150099, 70.370847, 117),
    (399.166448, 69.965373, 117), (405.902057, 67.479139, 117), (417.522113, 64.030744, 234),
    (437.580212, 60.583216, 117), (439.692305, 60.401242, 117),
]  # fmt: skip


def full_case():
    """Check the full case of METHOD sec. 4."""
    sums = RunningSums()
    for feature, texts in ((Feature.BEDDING, S0), (Feature.CLEAVAGE, S1)):
        for text in texts:
            sums.add(feature, "", read_plane(text, Notation.DIP_DIRECTION_DIP).plane.pole)
    return sums, check_fold(sums)


def test_hinge_of_the_full_case():
    """Hinge 040.288/20.095; eigenvalues .0060603 .3632295 .6307102 of the bedding poles (METHOD sec. 4)."""
    sums, check = full_case()
    assert check.hinge.line.trend_deg == pytest.approx(40.288, abs=5e-4)
    assert check.hinge.line.plunge_deg == pytest.approx(20.095, abs=5e-4)
    values, _ = eigen(tensor(sums.total(Feature.BEDDING)) / 8.0)
    assert values.tolist() == pytest.approx([0.6307102, 0.3632295, 0.0060603], abs=5e-8)


def test_cleavage_of_the_full_case():
    """Mean S1 144.168/82.988, dip direction/dip (METHOD sec. 4)."""
    plane = full_case()[1].cleavage.plane
    assert plane.dip_direction_deg == pytest.approx(144.168, abs=5e-4)
    assert plane.dip_deg == pytest.approx(82.988, abs=5e-4)


def test_transection_of_the_full_case():
    """Transection +15.399 clockwise, SE 2.910, df 9.89, fixed-n 95% half-width 6.494 (METHOD sec. 4)."""
    _, check = full_case()
    assert check.transection_deg == pytest.approx(15.399, abs=5e-4)
    assert check.sense == "clockwise"
    assert check.se_deg == pytest.approx(2.910, abs=5e-4)
    assert check.df == pytest.approx(9.89, abs=5e-3)
    low, high = check.fixed_interval_deg
    assert (high - low) / 2.0 == pytest.approx(6.494, abs=5e-4)
    assert (high + low) / 2.0 == pytest.approx(check.transection_deg, abs=1e-9)


def test_closest_line_in_the_cleavage_of_the_full_case():
    """The line in S1 that lies closest to the hinge is 056.571/18.829, and as far off it as the transection."""
    _, check = full_case()
    hinge, pole = check.hinge.vector, check.cleavage.vector
    line = Line.from_vector(hinge - (hinge @ pole) * pole)
    assert line.trend_deg == pytest.approx(56.571, abs=5e-4)
    assert line.plunge_deg == pytest.approx(18.829, abs=5e-4)
    assert line.angle_deg(check.hinge.line) == pytest.approx(abs(check.transection_deg), abs=1e-9)


def read(bedding, cleavage, intersections=()):
    """Check a fold of these poles (n, 3) and lines."""
    sums = RunningSums()
    sums.add(Feature.BEDDING, "", bedding)
    sums.add(Feature.CLEAVAGE, "", cleavage)
    if len(intersections):
        sums.add(Feature.INTERSECTION, "", intersections)
    return check_fold(sums)


def upright_fold(dip_deg, hinge_trend_deg=0.0):
    """Poles of two limbs of an upright fold with a horizontal hinge, three readings each."""
    east = pole_vector(hinge_trend_deg, np.array([dip_deg - 1.0, dip_deg, dip_deg + 1.0]))
    west = pole_vector(hinge_trend_deg + 180.0, np.array([dip_deg - 1.0, dip_deg, dip_deg + 1.0]))
    return np.concatenate([east, west])


def test_clockwise_is_positive():
    """Hinge 000/00 and vertical S1 striking 010 give +10 degrees, 350 gives -10 (METHOD sec. 4)."""
    for strike, wanted, sense in ((10.0, 10.0, "clockwise"), (350.0, -10.0, "anticlockwise")):
        check = read(upright_fold(45.0), np.tile(pole_vector(strike, 90.0), (6, 1)))
        assert check.hinge.line.plunge_deg == pytest.approx(0.0, abs=1e-6)
        assert check.transection_deg == pytest.approx(wanted, abs=1e-6)
        assert check.sense == sense


@pytest.mark.parametrize("trend", [0.0, 37.0, 90.0, 135.0, 179.999, 180.0, 270.0, 359.9])
def test_the_sense_does_not_depend_on_the_way_the_hinge_trends(trend):
    """Cleavage striking 10 degrees clockwise of the hinge is +10 for a hinge of any trend."""
    strike = (trend + 10.0) % 360.0
    check = read(upright_fold(50.0, trend), np.tile(pole_vector(strike, 90.0), (6, 1)))
    assert check.transection_deg == pytest.approx(10.0, abs=1e-5)
    turned = read(upright_fold(50.0, trend), np.tile(pole_vector((strike + 180.0) % 360.0, 90.0), (6, 1)))
    assert turned.transection_deg == pytest.approx(10.0, abs=1e-5)


@pytest.mark.parametrize(
    # tan(plunge) = tan(limb dip) sin(transection), at 10 degrees; after Johnson (1991), METHOD sec. 4.
    ("dip", "plunge"),
    [(30.0, 5.73), (45.0, 9.85), (60.0, 16.74), (80.0, 44.56)],
)
def test_intersections_plunge_opposite_ways_on_the_limbs(dip, plunge):
    """At 10 degrees clockwise the computed L01 of the two limbs plunge by the published angle, opposite ways."""
    bedding = np.concatenate(
        [np.tile(pole_vector(0.0, dip), (3, 1)), np.tile(pole_vector(180.0, dip), (3, 1))]
    )
    check = read(bedding, np.tile(pole_vector(10.0, 90.0), (6, 1)))
    first, second = (line.computed for line in check.limb_lines)
    assert first.plunge_deg == pytest.approx(plunge, abs=5e-3)
    assert second.plunge_deg == pytest.approx(plunge, abs=5e-3)
    assert abs(first.trend_deg - second.trend_deg) == pytest.approx(180.0, abs=1e-6)
    assert np.tan(np.radians(first.plunge_deg)) == pytest.approx(
        np.tan(np.radians(dip)) * np.sin(np.radians(10.0)), rel=1e-6
    )
    assert [limb.plane.dip_deg for limb in check.limbs.both] == pytest.approx([dip, dip], abs=1e-6)


def one_fold_bedding():
    """Poles (2223, 3) of LoopStructural's synthetic fold, strikes above 360 brought back."""
    poles = [np.tile(Plane(strike % 360.0, dip).pole, (count, 1)) for strike, dip, count in ONE_FOLD]
    return np.concatenate(poles)


def test_the_axis_of_a_documented_fold():
    """LoopStructural 1.9.0, onefolddata.csv: documented axis 180/60; eigenvalues 1.7e-12 .356453 .643547."""
    bedding = one_fold_bedding()
    assert len(bedding) == 2223
    check = read(bedding, np.tile(pole_vector(0.0, 90.0), (2, 1)))
    assert check.hinge.line.trend_deg == pytest.approx(180.0, abs=5e-4)
    assert check.hinge.line.plunge_deg == pytest.approx(60.0, abs=1.5e-3)  # computed 59.999
    values, _ = eigen(tensor(np.atleast_2d(bedding_moments(bedding)))[0] / len(bedding))
    assert values[:2].tolist() == pytest.approx([0.643547, 0.356453], abs=5e-7)
    assert 0.0 <= values[2] < 1e-11


def bedding_moments(bedding):
    sums = RunningSums()
    sums.add(Feature.BEDDING, "", bedding)
    return sums.total(Feature.BEDDING)


@pytest.mark.parametrize("turn", [0.0, 3.0, 8.0, 15.0, -3.0, -8.0, -15.0])
def test_cleavage_turned_off_the_documented_axis_comes_back(turn):
    """S1 of that fold (strike 000, dip 90) holds the axis; turned off it with scipy the turn comes back, signed.

    Turned about the line in it at right angles to the axis, as cleavage that transects the fold; clockwise seen
    from above is positive. The axis is the documented one, so the tolerance is the thousandth of a degree by
    which the data are off it.
    """
    axis = line_vector(180.0, 60.0)
    pole = pole_vector(0.0, 90.0)
    about = np.cross(axis, pole)
    about *= np.sign(about[2])  # downward, so that a positive turn is clockwise on the map
    turned = Rotation.from_rotvec(np.radians(turn) * about).apply(pole)
    check = read(one_fold_bedding(), np.tile(turned, (6, 1)))
    assert check.transection_deg == pytest.approx(turn, abs=2e-3)
    if turn:
        assert check.sense == ("clockwise" if turn > 0 else "anticlockwise")
        assert check.verdict == "transected"
    else:
        assert check.verdict == "axial planar"


def refolded():
    """Normals (n, 3), north, east, down, and places (n, 3) by feature of LoopStructural's refolded fold."""
    found = {}
    with (DATA / "refolded_fold.csv").open(encoding="utf-8", newline="") as stream:
        for row in csv.DictReader(stream):
            if row["gx"]:  # two rows give a value instead of a normal
                east, north, up = (float(row[name]) for name in ("gx", "gy", "gz"))
                normal = np.array([north, east, -up])
                place = [float(row[name]) for name in "XYZ"]
                found.setdefault(row["feature_name"], []).append((normal / np.linalg.norm(normal), place))
    return {name: [np.array(part) for part in zip(*rows, strict=True)] for name, rows in found.items()}


def test_a_refolded_fold_is_not_transected():
    """LoopStructural 1.9.0, refolded_fold.csv (after Laurent et al. 2016): the late foliation holds the axis.

    89 readings of s0 and 9 of s2: axis 0.03/45.12, eigenvalues 7.1e-5 .15236 .84757, mean s2 pole 89.68/0.14,
    transection 0.351 (computed once for this project).
    """
    data = refolded()
    assert {name: len(poles) for name, (poles, _) in data.items()} == {"s0": 89, "s1": 104, "s2": 9}
    check = read(data["s0"][0], data["s2"][0])
    assert check.hinge.line.trend_deg == pytest.approx(0.03, abs=5e-3)
    assert check.hinge.line.plunge_deg == pytest.approx(45.12, abs=5e-3)
    values, _ = eigen(tensor(bedding_moments(data["s0"][0])) / 89.0)
    assert values.tolist() == pytest.approx([0.84757, 0.15236, 7.1e-5], abs=5e-6)
    trend, plunge = trend_plunge_deg(check.cleavage.vector)
    assert float(trend) == pytest.approx(89.68, abs=5e-3)
    assert float(plunge) == pytest.approx(0.14, abs=5e-3)
    assert abs(check.transection_deg) == pytest.approx(0.351, abs=5e-4)
    assert check.verdict == "axial planar"


def test_a_refolded_fold_against_its_first_foliation():
    """With the mean of the 104 readings of s1 the same fold gives 0.714 degrees (computed once)."""
    data = refolded()
    check = read(data["s0"][0], data["s1"][0])
    assert abs(check.transection_deg) == pytest.approx(0.714, abs=5e-4)


def test_intersections_of_neighbours_in_a_refolded_fold():
    """Each s0 with its nearest s2 gives lines whose mean is 0.76/44.84 (computed once); as lines they agree too."""
    data = refolded()
    (beds, at), (cleavage, where) = data["s0"], data["s2"]
    nearest = np.linalg.norm(at[:, np.newaxis] - where[np.newaxis], axis=-1).argmin(axis=1)
    lines = np.cross(beds, cleavage[nearest])
    lines /= np.linalg.norm(lines, axis=1, keepdims=True)
    check = read(beds, cleavage, lines)
    assert check.intersection.axis.line.trend_deg == pytest.approx(0.76, abs=5e-3)
    assert check.intersection.axis.line.plunge_deg == pytest.approx(44.84, abs=5e-3)
    assert check.intersection.measured == 89
    assert check.verdict == "axial planar"
    assert abs(check.transection_deg) < 1.0


@pytest.mark.parametrize("turn", [-25.0, -10.0, -1.0, 0.0, 1.0, 10.0, 25.0])
def test_profile_transection(turn):
    """Cleavage turned about the hinge itself has that profile transection and no axial one (Borradaile 1978).

    tan(profile transection) = ((h x a).s)/(a.s), with the axial-surface pole a (from memory); turned with scipy
    about the hinge pointing down its plunge, which is clockwise to somebody who looks that way.
    """
    hinge, surface = line_vector(30.0, 15.0), pole_vector(35.0, 80.0)
    surface = np.cross(hinge, np.cross(surface, hinge))  # a surface that holds the hinge
    surface /= np.linalg.norm(surface)
    pole = Rotation.from_rotvec(np.radians(turn) * hinge).apply(surface)
    for h, a, s in (
        (hinge, surface, pole),
        (-hinge, surface, pole),
        (hinge, -surface, pole),
        (hinge, surface, -pole),
    ):
        assert float(profile_transection_deg(h, a, s)) == pytest.approx(turn, abs=1e-9)
    assert float(hinge @ pole) == pytest.approx(0.0, abs=1e-12)
