"""The whole check of one fold."""

from __future__ import annotations

import itertools
import json

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from analysis.cli.check import text_of
from analysis.errors import SettingError
from analysis.fold.check import check_fold
from analysis.fold.decision import add_forecast
from analysis.fold.outliers import find_outliers
from analysis.fold.records import Verdict
from analysis.fold.settings import CheckSettings
from analysis.orient.features import Feature
from analysis.orient.vectors import line_vector, pole_vector
from analysis.stats.sums import FEATURES, RunningSums
from analysis.stats.synthetic import FoldDesign, draw

KINDS = ("exact", "scattered", "one limb", "identical", "vertical", "horizontal", "antipodal", "anyhow")


def axes_of_kind(kind, feature, n, rng):
    """Readings of one family: n axes of a feature, shape (n, 3)."""
    numbers = np.arange(n)
    if kind == "identical":
        one = {"bedding": pole_vector(30.0, 40.0), "cleavage": pole_vector(20.0, 80.0)}
        return np.tile(one.get(feature, line_vector(25.0, 10.0)), (n, 1))
    if kind == "vertical":
        planes = pole_vector(37.0 * numbers, 90.0)
        return planes if feature.is_plane else line_vector(0.0 * numbers, 90.0)
    if kind == "horizontal":
        return pole_vector(37.0 * numbers, 0.0) if feature.is_plane else line_vector(37.0 * numbers, 0.0)
    if kind == "antipodal":
        return line_vector(180.0 * (numbers % 2), 0.0)
    if kind == "anyhow":
        axes = rng.standard_normal((n, 3))
    elif feature is Feature.BEDDING:
        axes = pole_vector(
            np.where((numbers % 2 == 1) | (kind == "one limb"), 0.0, 180.0), 30.0 + 3.0 * numbers
        )
    else:
        axes = np.tile(pole_vector(0.0, 90.0) if feature.is_plane else line_vector(0.0, 0.0), (n, 1))
    if kind in ("scattered", "one limb"):
        axes = axes + 0.08 * rng.standard_normal((n, 3))
    return axes / np.linalg.norm(axes, axis=1, keepdims=True)


@pytest.mark.parametrize("kind", KINDS)
def test_any_numbers_of_any_readings_give_a_check(kind):
    """Every combination of 0, 1, 2 and 8 readings of each feature gives valid JSON, a reason and no wild interval.

    Readings without any scatter once divided by zero, two bedding poles gave intervals of 1e79 degrees, and equal
    bedding said that there were no readings.
    """
    rng = np.random.default_rng(1)
    for numbers in itertools.product((0, 1, 2, 8), repeat=4):
        sums = RunningSums()
        given_axes = {f: axes_of_kind(kind, f, n, rng) for f, n in zip(FEATURES, numbers, strict=True)}
        for feature, axes in given_axes.items():
            for k, axis in enumerate(axes):
                sums.add(feature, f"O{k % 3}", axis)
        check = check_fold(sums)
        json.dumps(check.to_json(), allow_nan=False)
        text = text_of(check)
        find_outliers(given_axes)
        assert check.because
        assert all(check.because)
        for interval in (check.interval_deg, check.fixed_interval_deg):
            assert interval is None or -90.0 <= interval[0] <= interval[1] <= 90.0
        assert check.se_deg is None or check.se_deg >= 0.0
        assert "360/" not in text
        if sum(numbers):
            assert "No readings" not in text


def test_an_exact_axial_planar_fold_is_not_transected_by_rounding(make_sums):
    """Readings without scatter and an angle of 1e-15 degrees are axial planar, not transected."""
    bedding = pole_vector([0.0, 180.0] * 4, [30.0, 35.0, 40.0, 45.0, 50.0, 55.0, 60.0, 65.0])
    check = check_fold(make_sums(bedding=bedding, cleavage=[pole_vector(0.0, 90.0)] * 8))
    assert check.verdict is Verdict.AXIAL_PLANAR
    assert abs(check.transection_deg) < 1e-9
    low, high = check.interval_deg
    assert high - low > 0.1  # no compass reads finer


def test_no_readings_are_a_check_too():
    """An empty fold waits for its first readings."""
    check = check_fold(RunningSums(), fold="F")
    assert check.verdict is Verdict.KEEP_READING
    assert check.fold == "F"
    assert check.readings.to_json() == dict.fromkeys(
        ("bedding", "cleavage", "intersection", "hinge", "outcrops"), 0
    )
    assert (check.hinge, check.cleavage, check.intersection, check.transection_deg) == (
        None,
        None,
        None,
        None,
    )


def test_the_hinge_says_what_it_comes_from(draw_sums, make_sums):
    """From bedding, from hinge lines, or from both, which lies between."""
    lines = line_vector([50.0, 52.0, 48.0, 50.0, 51.0], [10.0, 12.0, 8.0, 10.0, 9.0])
    bedding = draw_sums(bedding=20, cleavage=10)
    both = bedding.copy()
    both.add("hinge", "A", lines)
    sources = [check_fold(s).hinge for s in (bedding, make_sums(hinge=lines), both)]
    assert [axis.source for axis in sources] == ["bedding", "hinge lines", "both"]
    trends = [axis.line.trend_deg for axis in sources]
    assert trends[0] < trends[2] < trends[1]


def test_the_forecast_can_be_added_later(draw_sums):
    """The check without forecast and the forecast added afterwards equal the check at once."""
    sums = draw_sums(FoldDesign(transection_deg=3.0), bedding=14, cleavage=12)
    whole = check_fold(sums)
    later = add_forecast(check_fold(sums, forecast=False))
    assert later.to_json() == whole.to_json()
    assert whole.more_readings is not None
    assert check_fold(sums, forecast=False).more_readings is None


def test_a_hopeless_fold_cannot_be_settled_here(draw_sums):
    """With a forecast beyond the limit the check says so, with estimate and error; a higher limit keeps reading."""
    sums = draw_sums(FoldDesign(transection_deg=2.5, cleavage_scatter_deg=20.0), bedding=30, cleavage=30)
    strict = check_fold(sums, CheckSettings(forecast_limit=20))
    assert strict.verdict is Verdict.CANNOT_BE_SETTLED
    assert "More than 20 further readings" in strict.because[0]
    assert not strict.blocked
    assert check_fold(sums, CheckSettings(forecast_limit=5000)).verdict is Verdict.KEEP_READING


def test_both_estimates_stand_side_by_side(draw_sums):
    """With cleavage planes and lines there are two estimates, near each other where the readings agree."""
    check = check_fold(draw_sums(FoldDesign(transection_deg=12.0), bedding=40, cleavage=30, lines=30))
    assert [estimate.source for estimate in check.estimates] == ["planes", "lines"]
    planes, lines = (estimate.delta_deg for estimate in check.estimates)
    assert planes == pytest.approx(lines, abs=4.0)
    low, high = sorted((planes, lines))
    assert low - 0.5 < check.transection_deg < high + 0.5


@pytest.mark.parametrize("names", [["", "", "", ""], ["", " ", "A", "Ä"]])
def test_outcrops_may_have_any_name(names, draw_sums):
    """Unnamed readings count as one outcrop; names change no figure."""
    design = FoldDesign(transection_deg=10.0, outcrops=4)
    plain = check_fold(draw_sums(design, bedding=32, cleavage=32))
    named = check_fold(draw_sums(design, bedding=32, cleavage=32, outcrop_names=names))
    assert named.readings.outcrops == len(set(names))
    assert named.transection_deg == pytest.approx(plain.transection_deg, abs=1e-9)
    assert named.se_deg == pytest.approx(plain.se_deg, abs=1e-9)


def test_many_outcrops_and_many_readings():
    """500 outcrops and 1e5 readings give the known angle, with as many outcrops counted."""
    drawn = draw(FoldDesign(transection_deg=6.0, outcrops=500), 50_000, 1, np.random.default_rng(2))
    names = [f"O{k}" for k in range(500)]
    sums = RunningSums()
    for code, axes in ((0, drawn.bedding[0]), (1, drawn.cleavage[0])):
        sums.extend(np.full(len(axes), code), drawn.outcrop, names, axes)
    check = check_fold(sums)
    assert check.readings.outcrops == 500
    assert check.transection_deg == pytest.approx(6.0, abs=0.3)
    assert check.verdict is Verdict.TRANSECTED
    assert check.intersection.computed == 1000


@settings(max_examples=30)
@given(st.floats(0, 360), st.floats(-180, 180), st.integers(0, 2**16))
def test_turning_everything_about_the_vertical_turns_the_axes_and_nothing_else(trend, by, seed):
    """A common error of declination leaves angle, errors and verdict as they are and turns hinge and cleavage alike."""
    design = FoldDesign(hinge_trend_deg=trend, hinge_plunge_deg=20.0, transection_deg=7.0)
    drawn = draw(design, 14, 1, np.random.default_rng(seed))
    turn = np.radians(by)
    about = np.array([[np.cos(turn), -np.sin(turn), 0.0], [np.sin(turn), np.cos(turn), 0.0], [0.0, 0.0, 1.0]])
    checks = []
    for matrix in (np.eye(3), about):
        sums = RunningSums()
        sums.add("bedding", "A", drawn.bedding[0] @ matrix.T)
        sums.add("cleavage", "A", drawn.cleavage[0] @ matrix.T)
        checks.append(check_fold(sums, forecast=False))
    first, second = checks
    assert second.transection_deg == pytest.approx(first.transection_deg, abs=1e-8)
    assert second.se_deg == pytest.approx(first.se_deg, abs=1e-8)
    assert abs((about @ first.hinge.vector) @ second.hinge.vector) == pytest.approx(1.0, abs=1e-9)


@pytest.mark.parametrize(
    "fields",
    [
        {"margin_deg": 0.0},
        {"margin_deg": float("nan")},
        {"margin_deg": 46.0},
        {"confidence": 1.0},
        {"confidence": 0.4},
        {"confidence": float("inf")},
        {"forecast_limit": 0},
    ],
)
def test_impossible_settings_are_refused(fields):
    """Settings outside their range raise SettingError that says what is allowed."""
    with pytest.raises(SettingError, match="expected"):
        CheckSettings(**fields)


def test_planes_and_lines_are_estimated_apart(draw_sums):
    """The estimate from planes is that of the fold read without lines, and the one from lines that without planes."""
    design = FoldDesign(transection_deg=12.0)
    check = check_fold(draw_sums(design, bedding=40, cleavage=30, lines=30))
    without_lines = check_fold(draw_sums(design, bedding=40, cleavage=30, lines=0))
    without_planes = check_fold(draw_sums(design, bedding=40, cleavage=0, lines=30))
    planes, lines = (estimate.delta_deg for estimate in check.estimates)
    assert planes == pytest.approx(without_lines.transection_deg, abs=1e-9)
    assert lines == pytest.approx(without_planes.transection_deg, abs=1e-9)


@pytest.mark.parametrize("azimuth_deg", [0.0, 45.0, 200.0, 359.0])
@pytest.mark.parametrize("one_by_one", [True, False])
def test_an_angle_of_zero_has_no_sense(azimuth_deg, one_by_one):
    """Cleavage lines that all lie along the hinge lines give 0 with the sense "none", however they were added."""
    sums = RunningSums()
    lines = np.tile(line_vector(azimuth_deg, 30.0), (20, 1))
    features = [Feature.HINGE] * 10 + [Feature.INTERSECTION] * 10
    if one_by_one:
        for feature, line in zip(features, lines, strict=True):
            sums.add(feature, "", line)
    else:
        codes = np.array([FEATURES.index(feature) for feature in features])
        sums.extend(codes, np.zeros(20, dtype=np.intp), [""], lines)
    written = check_fold(sums, CheckSettings()).to_json()
    assert (written["transection_deg"], written["sense"]) == (0.0, "none")
