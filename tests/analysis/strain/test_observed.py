import math

import numpy as np
import pytest

from analysis.errors import SettingError
from analysis.orient.vectors import line_vector, pole_vector
from analysis.strain.frame import Sense, signed_axis_angle_deg
from analysis.strain.observed import (
    Fault,
    FoldPair,
    KnownAxis,
    fold_fault_angle_deg,
    pair_covariance,
    pair_of_axes,
)


def across(vector):
    first = np.cross(vector, [0.3, -0.5, 0.81])
    first /= np.linalg.norm(first)
    return np.stack([first, np.cross(vector, first)], axis=-1)


HINGE, POLE = line_vector(40.0, 20.0), pole_vector(54.0, 80.0)
COV_H = np.radians(1.0) ** 2 * np.array([[4.0, 1.0], [1.0, 2.0]])
COV_S = np.radians(1.0) ** 2 * np.array([[3.0, -0.5], [-0.5, 1.0]])


def by_definition(h, s):
    trend_deg = np.degrees(np.arctan2(h[..., 1], h[..., 0]))
    sine = np.sum(h * s, axis=-1)
    return trend_deg, np.degrees(np.arcsin(sine)) * np.sign(-np.cross(h, s)[..., 2])


def test_errors_of_hinge_and_cleavage_carry_over_to_trend_and_transection():
    """The covariance is that of 200,000 simulated hinges and poles, within 2% and the sampling error."""
    known_h, known_s = KnownAxis(HINGE, across(HINGE), COV_H), KnownAxis(POLE, across(POLE), COV_S)
    pair = pair_of_axes(known_h, known_s)
    rng = np.random.default_rng(3)
    h = HINGE + rng.multivariate_normal([0, 0], COV_H, 200_000) @ across(HINGE).T
    s = POLE + rng.multivariate_normal([0, 0], COV_S, 200_000) @ across(POLE).T
    trend, transection = by_definition(
        h / np.linalg.norm(h, axis=-1, keepdims=True), s / np.linalg.norm(s, axis=-1, keepdims=True)
    )
    simulated = np.cov(trend, transection)
    ours = pair_covariance(pair, Fault(strike_deg=10.0, strike_se_deg=0.0))
    assert ours == pytest.approx(simulated, rel=0.02, abs=0.03)
    assert pair.hinge_trend_deg == pytest.approx(40.0)
    assert pair.hinge_plunge_deg == pytest.approx(20.0)
    assert pair.transection_deg == pytest.approx(by_definition(HINGE, POLE)[1])


def test_the_signs_of_the_axes_do_not_matter():
    """Hinge and pole pointing up or down give the same pair, covariance and all."""
    pairs = [
        pair_of_axes(KnownAxis(a * HINGE, b * across(HINGE), COV_H), KnownAxis(c * POLE, across(POLE), COV_S))
        for a in (1, -1)
        for b in (1, -1)
        for c in (1, -1)
    ]
    for name in (
        "hinge_trend_deg",
        "transection_deg",
        "hinge_part_deg2",
        "cleavage_part_deg2",
        "covariance_deg2",
    ):
        values = [getattr(pair, name) for pair in pairs]
        assert values == pytest.approx([values[0]] * 8, rel=1e-12)


def test_the_check_case_of_the_method_has_its_transection():
    """Hinge 040.288/20.095, cleavage 144.168/82.988 (dip direction/dip): +15.399 (METHOD section 4)."""
    h, s = line_vector(40.288, 20.095), pole_vector(144.168 - 90.0, 82.988)
    pair = pair_of_axes(KnownAxis(h, across(h), COV_H), KnownAxis(s, across(s), COV_S))
    assert pair.transection_deg == pytest.approx(15.399, abs=1e-3)


def test_a_better_standard_error_scales_the_whole_covariance():
    """A standard error given from outside is met, and the correlation stays."""
    known_h, known_s = KnownAxis(HINGE, across(HINGE), COV_H), KnownAxis(POLE, across(POLE), COV_S)
    plain, scaled = pair_of_axes(known_h, known_s), pair_of_axes(known_h, known_s, se_deg=4.0)
    assert scaled.transection_se_deg == pytest.approx(4.0)
    factor = (4.0 / plain.transection_se_deg) ** 2
    assert scaled.covariance_deg2 == pytest.approx(factor * plain.covariance_deg2)
    assert scaled.trend_variance_deg2 == pytest.approx(factor * plain.trend_variance_deg2)


def test_without_cleavage_or_sense_there_is_a_trend_but_no_transection():
    """No pole, or a transection without a sense on the map: the pair has a trend and no transection."""
    known_h, known_s = KnownAxis(HINGE, across(HINGE), COV_H), KnownAxis(POLE, across(POLE), COV_S)
    for pair in (pair_of_axes(known_h), pair_of_axes(known_h, known_s, signed=False)):
        assert pair.transection_deg is None
        assert 0.0 < pair.trend_variance_deg2 < math.inf


def test_a_vertical_or_undetermined_hinge_has_an_endless_error_of_trend():
    """A vertical hinge and an undetermined one give an infinite variance of the trend, and no crash."""
    vertical = np.array([0.0, 0.0, 1.0])
    pole = KnownAxis(POLE, across(POLE), COV_S)
    assert math.isinf(pair_of_axes(KnownAxis(vertical, across(vertical), COV_H), pole).trend_variance_deg2)
    loose = pair_of_axes(KnownAxis(HINGE, across(HINGE), np.full((2, 2), np.inf)), pole)
    assert math.isinf(loose.trend_variance_deg2)
    assert math.isinf(loose.transection_se_deg)


@pytest.mark.parametrize(
    ("sense", "trend_deg", "angle_deg", "sign"),
    [
        (Sense.SINISTRAL, 50.0, 20.0, 1),
        (Sense.SINISTRAL, 230.0, 20.0, 1),
        (Sense.SINISTRAL, 10.0, -20.0, 1),
        (Sense.DEXTRAL, 10.0, 20.0, -1),
        (Sense.DEXTRAL, 50.0, -20.0, -1),
        (Sense.UNKNOWN, 50.0, 20.0, 1),
        (Sense.UNKNOWN, 10.0, 20.0, -1),
        (Sense.UNKNOWN, 120.0, 90.0, 1),
        (Sense.SINISTRAL, 125.0, 95.0, 1),  # as near to 45 as to an axis can be: beyond 90, not -85
        (Sense.DEXTRAL, 115.0, 95.0, -1),
        (Sense.SINISTRAL, 320.0, -70.0 + 180.0, 1),
    ],
)
def test_the_fold_fault_angle_is_measured_on_the_side_where_the_sense_makes_folds(
    sense, trend_deg, angle_deg, sign
):
    """Positive on the side of this sense's folds, for either end of either axis; acute if unknown."""
    pair = FoldPair(hinge_trend_deg=trend_deg, transection_deg=None, trend_variance_deg2=1.0)
    for strike_deg in (30.0, 210.0):
        found = fold_fault_angle_deg(pair, Fault(strike_deg=strike_deg, sense=sense))
        assert found == (pytest.approx(angle_deg), sign)
        assert abs(signed_axis_angle_deg(30.0 + sign * angle_deg, trend_deg)) == pytest.approx(0.0, abs=1e-9)


def test_a_fault_is_an_axis_and_its_fields_are_checked():
    """Strikes come out below 180, words become senses, and what cannot be is refused by name."""
    assert Fault(strike_deg=360.0).strike_deg == 0.0
    assert Fault(strike_deg=190.0).strike_deg == pytest.approx(10.0)
    assert Fault(strike_deg=0.0, sense="dextral").sense is Sense.DEXTRAL
    for wrong, named in (
        ({"strike_deg": 361.0}, "fault strike"),
        ({"strike_deg": math.nan}, "fault strike"),
        ({"strike_deg": 0.0, "sense": "left"}, "sense"),
        ({"strike_deg": 0.0, "zone_width_km": 0.0}, "zone width"),
        ({"strike_deg": 0.0, "zone_width_km": math.inf}, "zone width"),
        ({"strike_deg": 0.0, "strike_se_deg": -1.0}, "fault strike error"),
        ({"strike_deg": 0.0, "strike_se_deg": 45.1}, "fault strike error"),
        ({"strike_deg": 0.0, "strike_se_deg": float("nan")}, "fault strike error"),
    ):
        with pytest.raises(SettingError) as caught:
            Fault(**wrong)
        assert caught.value.where == named


@pytest.mark.parametrize(
    "wrong",
    [
        {"trend_variance_deg2": -1.0},
        {"trend_variance_deg2": math.nan},
        {"df": 0.0},
        {"hinge_part_deg2": 1.0, "covariance_deg2": 1.5},
    ],
)
def test_a_pair_with_an_impossible_error_is_refused(wrong):
    """Negative variances, no degrees of freedom, and a correlation above one raise SettingError."""
    fields = {"hinge_trend_deg": 10.0, "transection_deg": 2.0, "trend_variance_deg2": 1.0} | wrong
    with pytest.raises(SettingError):
        FoldPair(**fields)
