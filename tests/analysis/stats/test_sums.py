"""Running sums: a monoid that agrees with the direct computation whatever the way there."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from analysis.errors import AttitudeError
from analysis.fold.check import check_fold
from analysis.orient.features import Feature
from analysis.orient.vectors import line_vector, pole_vector
from analysis.stats.moments import COUNT, moments, tensor
from analysis.stats.sums import CELLS, FEATURES, RunningSums, cell_of, sums_of
from analysis.stats.synthetic import FoldDesign, draw

DRIFT = 1e-9  # the bound that METHOD sec. 2 sets
AZIMUTHS = st.sampled_from([0.0, 90.0, 180.0, 270.0]) | st.floats(0, 360, exclude_max=True)
INCLINATIONS = st.sampled_from([0.0, 90.0]) | st.floats(0, 90)
READING = st.tuples(
    st.sampled_from(FEATURES),
    st.sampled_from(["", "A", "B", "C 3", "Ø"]),
    st.builds(line_vector, AZIMUTHS, INCLINATIONS),
)
READINGS = st.lists(READING, max_size=25)


def direct(readings, feature, outcrop=None):
    """Sum the moments of one feature reading by reading, without RunningSums."""
    axes = [v for f, o, v in readings if f is feature and outcrop in (None, o)]
    return moments(np.array(axes).reshape(-1, 3)).sum(axis=0)


def assert_same(sums, readings, tolerance=1e-12):
    """Compare totals, outcrops and cells with the direct computation."""
    for feature in FEATURES:
        assert np.allclose(sums.total(feature), direct(readings, feature), atol=tolerance, rtol=0.0)
        assert sums.count(feature) == sum(1 for f, _, _ in readings if f is feature)
        for name, row in zip(sums.outcrops, sums.by_outcrop(feature), strict=True):
            assert np.allclose(row, direct(readings, feature, name), atol=tolerance, rtol=0.0)
    assert sums.outcrops_read == len({o for _, o, _ in readings})
    cells, owner = sums.bedding_cells()
    assert cells[:, COUNT].sum() == pytest.approx(sums.count(Feature.BEDDING))
    for place, name in enumerate(sums.outcrops):
        by_cell = cells[owner == place].sum(axis=0)
        assert np.allclose(by_cell, direct(readings, Feature.BEDDING, name), atol=tolerance, rtol=0.0)


@given(READINGS)
def test_adding_one_by_one_agrees_with_the_direct_sums(readings):
    """Sums updated reading by reading equal the sums over all readings."""
    assert_same(sums_of(readings), readings)


@given(READINGS, st.randoms(use_true_random=False), st.integers(1, 5))
def test_parts_added_in_any_order_agree(readings, random, parts):
    """However readings are dealt to parts and the parts added, the sums are those of all readings."""
    dealt = [[] for _ in range(parts)]
    for reading in readings:
        dealt[random.randrange(parts)].append(reading)
    sums = [sums_of(part) for part in dealt]
    random.shuffle(sums)
    while len(sums) > 1:
        first = sums.pop(random.randrange(len(sums)))
        second = sums.pop(random.randrange(len(sums)))
        sums.append(first + second)
    assert_same(sums[0], readings)


@given(READINGS)
def test_the_empty_sums_are_the_zero(readings):
    """Adding nothing on either side changes nothing, to the last bit."""
    sums = sums_of(readings)
    for same in (sums + RunningSums(), RunningSums() + sums, sums.copy()):
        assert same.outcrops == sums.outcrops
        for feature in FEATURES:
            assert np.array_equal(same.by_outcrop(feature), sums.by_outcrop(feature))
        assert np.array_equal(same.bedding_cells()[0], sums.bedding_cells()[0])


@given(READINGS, READINGS)
def test_taking_back_agrees_with_never_having_added(kept, struck):
    """Readings added and removed again, one by one or as sums, leave the sums of the others."""
    sums = sums_of([*kept, *struck])
    for feature, outcrop, vector in struck:
        sums.remove(feature, outcrop, -vector)  # an axis has no sign, so its opposite takes it back too
    assert_same(sums, kept)
    assert_same((sums_of(kept) + sums_of(struck)) - sums_of(struck), kept)


@given(READINGS)
def test_extending_by_arrays_agrees_with_adding(readings):
    """Many readings added at once equal the same readings added singly."""
    outcrops = sorted({o for _, o, _ in readings})
    sums = RunningSums()
    sums.extend(
        np.array([FEATURES.index(f) for f, _, _ in readings], dtype=np.int64),
        np.array([outcrops.index(o) for _, o, _ in readings], dtype=np.int64),
        outcrops,
        np.array([v for _, _, v in readings]).reshape(-1, 3),
    )
    assert_same(sums, readings)


def test_a_hundred_thousand_readings_at_once_agree_with_numpy():
    """1e5 readings, more than one chunk, give the tensor that numpy gives directly."""
    rng = np.random.default_rng(3)
    axes = rng.standard_normal((100_000, 3))
    axes /= np.linalg.norm(axes, axis=1, keepdims=True)
    codes, outcrop = rng.integers(0, 4, len(axes)), rng.integers(0, 7, len(axes))
    sums = RunningSums()
    sums.extend(codes, outcrop, [f"O{k}" for k in range(7)], axes)
    for code, feature in enumerate(FEATURES):
        some = axes[codes == code]
        assert sums.count(feature) == len(some)
        assert np.allclose(tensor(sums.total(feature)), some.T @ some, rtol=1e-11)
    assert sums.outcrops_read == 7


def test_drift_after_many_adds_and_removals_stays_small():
    """After 1e5 adds and 1e5 removals in mixed order the sums are off the direct ones by less than 1e-9."""
    rng = np.random.default_rng(11)
    kept = [
        (FEATURES[k % 4], f"O{k % 3}", line_vector(rng.uniform(0, 360), rng.uniform(0, 90)))
        for k in range(40)
    ]
    sums = sums_of(kept)
    passing = rng.standard_normal((100_000, 3))
    passing /= np.linalg.norm(passing, axis=1, keepdims=True)
    held = 500
    for start in range(0, len(passing), held):
        part = passing[start : start + held]
        feature = FEATURES[(start // held) % 4]
        for axis in part[:20]:
            sums.add(feature, "O1", axis)
        sums.add(feature, "O1", part[20:])
        sums.remove(feature, "O1", part[::-1][:-20])
        for axis in part[:20]:
            sums.remove(feature, "O1", axis)
    for feature in FEATURES:
        assert np.abs(sums.total(feature) - direct(kept, feature)).max() < DRIFT
        for name, row in zip(sums.outcrops, sums.by_outcrop(feature), strict=True):
            assert np.abs(row - direct(kept, feature, name)).max() < DRIFT


def test_an_outcrop_that_lost_its_readings_is_not_counted():
    """Taking back the only reading of an outcrop leaves exact zeros and one outcrop fewer."""
    sums = RunningSums()
    sums.add(Feature.BEDDING, "A", pole_vector(10, 20))
    sums.add(Feature.BEDDING, "B", pole_vector(33.3, 44.4))
    sums.remove(Feature.BEDDING, "B", pole_vector(33.3, 44.4))
    assert sums.outcrops_read == 1
    assert not sums.by_outcrop(Feature.BEDDING)[1].any()
    assert len(sums.bedding_cells()[0]) == 1


@pytest.mark.parametrize(
    "bad",
    [
        [np.nan, 0.0, 1.0],
        [np.inf, 0.0, 0.0],
        [0.0, -np.inf, 0.0],
        [0.0, 0.0, 0.0],
        [1.0, 1.0, 0.0],
        [0.0, 0.0, 1.001],
        [1.0, 0.0],
        [[[1.0, 0.0, 0.0]]],
    ],
)
def test_what_is_no_axis_is_refused_and_changes_nothing(bad):
    """NaN, infinities, vectors of other lengths and other shapes raise AttitudeError and leave the sums alone."""
    sums = RunningSums()
    sums.add(Feature.CLEAVAGE, "A", pole_vector(10, 80))
    before = sums.total(Feature.CLEAVAGE).copy()
    with pytest.raises(AttitudeError, match="expected"):
        sums.add(Feature.CLEAVAGE, "A", bad)
    with pytest.raises(AttitudeError, match="expected"):
        sums.remove(Feature.CLEAVAGE, "A", bad)
    rows = np.atleast_2d(np.array(bad, dtype=float))
    with pytest.raises(AttitudeError, match="expected"):
        sums.extend(np.full(len(rows), 1), np.zeros(len(rows), dtype=int), ["A"], rows)
    assert np.array_equal(sums.total(Feature.CLEAVAGE), before)
    assert sums.outcrops == ("A",)


def test_one_bad_axis_among_many_is_named():
    """The error of a bad axis among good ones says which it is."""
    axes = line_vector(np.arange(5.0), 10.0)
    axes[3, 1] = np.nan
    with pytest.raises(AttitudeError, match="reading 4 of those added"):
        RunningSums().add(Feature.HINGE, "", axes)


@given(st.builds(line_vector, AZIMUTHS, INCLINATIONS))
def test_an_axis_and_its_opposite_share_a_cell(axis):
    """The cell of attitude does not depend on the sign, also for poles on the primitive circle."""
    assert 0 <= int(cell_of(axis)) < CELLS
    assert cell_of(axis) == cell_of(-axis)


def test_cells_are_small():
    """No cell of attitude is wider than about 16 degrees, so limbs never share one unless they nearly coincide."""
    rng = np.random.default_rng(5)
    axes = rng.standard_normal((60_000, 3))
    axes /= np.linalg.norm(axes, axis=1, keepdims=True)
    cells = cell_of(axes)
    assert len(np.unique(cells)) == CELLS
    for cell in range(0, CELLS, 9):
        some = axes[cells == cell]
        cosines = np.abs(some @ some.T)
        assert np.degrees(np.arccos(np.clip(cosines.min(), 0, 1))) < 16.0


def fold_readings(seed=4, outcrops=3):
    """Readings of one invented fold, as (feature, outcrop, axis)."""
    design = FoldDesign(hinge_plunge_deg=18.0, transection_deg=4.0, outcrops=outcrops)
    drawn = draw(design, 12, 1, np.random.default_rng(seed))
    return [
        (feature, f"O{drawn.outcrop[k]}", axes[0][k])
        for k in range(12)
        for feature, axes in (
            (Feature.BEDDING, drawn.bedding),
            (Feature.CLEAVAGE, drawn.cleavage),
            (Feature.INTERSECTION, drawn.lines),
        )
    ]


def figures(check):
    """All numbers of a check that a reader sees, unrounded."""
    return np.array(
        [
            check.transection_deg,
            check.se_deg,
            check.df,
            *check.fixed_interval_deg,
            *check.interval_deg,
            *np.abs(check.hinge.vector),
            *np.abs(check.cleavage.vector),
            check.hinge.ellipse.major_deg,
            check.limbs.interlimb_deg,
        ]
    )


@settings(max_examples=25)
@given(st.randoms(use_true_random=False))
def test_the_final_verdict_does_not_depend_on_the_order(random):
    """Readings added in any order give the same verdict, and the same figures to 1e-9."""
    readings = fold_readings()
    first = check_fold(sums_of(readings))
    random.shuffle(readings)
    second = check_fold(sums_of(readings))
    assert second.verdict == first.verdict
    assert second.because == first.because
    assert second.more_readings == first.more_readings
    assert np.abs(figures(second) - figures(first)).max() < 1e-9


@settings(max_examples=25)
@given(READING)
def test_striking_out_returns_the_verdict(reading):
    """A reading added and struck out again returns every figure to what it was, to 1e-9."""
    sums = sums_of(fold_readings())
    before = check_fold(sums)
    sums.add(*reading)
    check_fold(sums)
    sums.remove(*reading)
    after = check_fold(sums)
    assert after.verdict == before.verdict
    assert after.readings == before.readings
    assert np.abs(figures(after) - figures(before)).max() < 1e-9
