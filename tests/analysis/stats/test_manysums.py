"""Running sums of many folds: the same as each fold's own, in any order, and taken back."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.fold.check import check_fold
from analysis.orient.features import Feature
from analysis.stats.manysums import ManySums
from analysis.stats.moments import COUNT
from analysis.stats.sums import FEATURES, RunningSums

NOWHERE = np.full(3, np.nan)


def unit_vectors(seed, count):
    axes = np.random.default_rng(seed).normal(size=(count, 3))
    return axes / np.linalg.norm(axes, axis=1, keepdims=True)


def summed(rows):
    """Sum (group, outcrop, feature code, seed) rows."""
    places = list(dict.fromkeys((group, outcrop) for group, outcrop, _, _ in rows))
    codes = np.array([places.index((group, outcrop)) for group, outcrop, _, _ in rows], dtype=np.int64)
    features = np.array([feature for _, _, feature, _ in rows], dtype=np.int64)
    vectors = np.concatenate([np.zeros((0, 3)), *(unit_vectors(seed, 1) for *_, seed in rows)])
    positions = np.array([NOWHERE if seed % 3 == 0 else [1.0, 0.0, 0.0] for *_, seed in rows]).reshape(-1, 3)
    return ManySums.of(places, codes, features, vectors, positions)


def one_by_one(rows, group):
    sums = RunningSums()
    for name, outcrop, feature, seed in rows:
        if name == group:
            sums.add(FEATURES[feature], outcrop, unit_vectors(seed, 1)[0])
    return sums


def assert_same(one, two):
    """Same rows by outcrop, same cells, whatever the order of the outcrops."""
    assert set(one.outcrops) >= {
        name
        for name, row in zip(two.outcrops, sum(two.by_outcrop(f)[:, COUNT] for f in Feature), strict=True)
        if row
    }
    for feature in Feature:
        by_name = [dict(zip(sums.outcrops, sums.by_outcrop(feature), strict=True)) for sums in (one, two)]
        for name in set(by_name[0]) | set(by_name[1]):
            rows = [each.get(name, np.zeros(24)) for each in by_name]
            np.testing.assert_allclose(rows[0], rows[1], rtol=0, atol=1e-12)
    cells = []
    for sums in (one, two):
        rows, owner = sums.bedding_cells()
        found = [
            (sums.outcrops[at], row.round(9).tolist()) for at, row in zip(owner.tolist(), rows, strict=True)
        ]
        cells.append(sorted(found))
    assert cells[0] == cells[1]


ROWS = st.lists(
    st.tuples(st.sampled_from("AB"), st.sampled_from("xyz"), st.integers(0, 3), st.integers(0, 50)),
    max_size=12,
)


@given(ROWS, ROWS, ROWS)
def test_each_group_has_the_sums_of_its_own_readings(one, two, three):
    """However readings are parted and in whatever order parts are added, each group's sums are its readings'."""
    parts = [summed(rows) for rows in (one, two, three)]
    every = one + two + three
    for whole in ((parts[0] + parts[1]) + parts[2], parts[2] + (parts[1] + parts[0])):
        assert whole.groups == tuple(sorted({group for group, *_ in every}))
        assert whole.count() == len(every)
        for group, (sums, position) in whole.split(whole.groups).items():
            assert_same(sums, one_by_one(every, group))
            placed = [seed for name, *_, seed in every if name == group and seed % 3]
            assert position[0] == pytest.approx(len(placed), abs=1e-12)
            assert position[1] == pytest.approx(len(placed), abs=1e-12)


@given(ROWS, ROWS)
def test_what_is_taken_back_leaves_nothing_behind(one, two):
    """Sums less some of their readings are the sums of the others; a group without readings is gone."""
    left = (summed(one) + summed(two)) - summed(two)
    assert left.groups == tuple(sorted({group for group, *_ in one}))
    assert left.count() == len(one)
    for group, (sums, _) in left.split(left.groups).items():
        assert_same(sums, one_by_one(one, group))


def test_the_empty_sums_are_the_zero():
    """Nothing added to sums, on either side, changes nothing; the empty sums have no group."""
    rows = [("A", "x", 0, 1), ("A", "y", 1, 2), ("B", "x", 2, 4)]
    for whole in (summed(rows) + ManySums(), ManySums() + summed(rows)):
        assert whole.groups == ("A", "B")
        for group, (sums, _) in whole.split(whole.groups).items():
            assert_same(sums, one_by_one(rows, group))
    assert ManySums().groups == ()
    assert ManySums().count() == 0
    assert (ManySums() + ManySums()).split([]) == {}


def test_sums_taken_over_can_go_on_growing():
    """Sums that were split off take further readings and check like any others."""
    rows = [("A", "x", k % 3, k) for k in range(40)]
    sums, _ = summed(rows).split(["A"])["A"]
    plain = one_by_one(rows, "A")
    for each in (sums, plain):
        each.add(Feature.BEDDING, "new", unit_vectors(99, 5))
    assert_same(sums, plain)
    assert check_fold(sums).to_json() == check_fold(plain).to_json()


def test_more_readings_than_are_in_memory_at_a_time():
    """Beyond one chunk of moments the sums are those of all readings."""
    count = 70_000
    vectors = unit_vectors(7, count)
    whole = ManySums.of(
        [("A", "x")],
        np.zeros(count, dtype=int),
        np.zeros(count, dtype=int),
        vectors,
        np.full((count, 3), np.nan),
    )
    plain = RunningSums()
    plain.add(Feature.BEDDING, "x", vectors)
    sums, position = whole.split(["A"])["A"]
    np.testing.assert_allclose(
        sums.total(Feature.BEDDING), plain.total(Feature.BEDDING), rtol=1e-11, atol=1e-9
    )
    assert position.tolist() == [0, 0, 0, 0]
