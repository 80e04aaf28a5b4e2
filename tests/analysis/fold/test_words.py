"""The check in sentences."""

from __future__ import annotations

import re
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from analysis.fold.check import check_fold
from analysis.fold.records import MoreReadings, Verdict
from analysis.fold.settings import CheckSettings
from analysis.fold.words import (
    against_hinge,
    between,
    counted,
    degrees,
    ellipse_text,
    figure_line,
    headline,
    line_text,
    more,
    plane_text,
    turned,
)
from analysis.orient.attitudes import Line, Plane
from analysis.orient.features import Feature
from analysis.stats.sums import RunningSums
from analysis.stats.synthetic import FoldDesign, draw


@pytest.mark.parametrize(
    ("value", "text"),
    [(0.0, "0°"), (-0.0, "0°"), (0.04, "0°"), (0.06, "0.1°"), (-4.0, "4°"), (4.25, "4.2°"), (9.94, "9.9°"),
     (9.96, "10°"), (12.4, "12°"), (-89.7, "90°")],
)  # fmt: skip
def test_degrees(value, text):
    """Angles below ten have a tenth, others none; no sign, and no minus zero."""
    assert degrees(value) == text


def test_counts_have_their_plural():
    """Only one is singular; none is not."""
    assert [counted(number, "reading") for number in (0, 1, 2)] == ["0 readings", "1 reading", "2 readings"]


def test_an_ellipse_stands_behind_its_axis_once_there_is_one():
    """Half axes are given, the longer first; an axis without an ellipse has no words for one."""
    design = FoldDesign(hinge_trend_deg=40.0, hinge_plunge_deg=10.0)
    sums = RunningSums()
    for vector in draw(design, 12, 1, np.random.default_rng(1)).bedding[0]:
        sums.add(Feature.BEDDING, "A", vector)
    hinge = check_fold(sums, CheckSettings()).hinge
    major, minor = hinge.ellipse.major_deg, hinge.ellipse.minor_deg
    assert major >= minor > 0.0
    assert ellipse_text(hinge) == f" (±{degrees(major)} by ±{degrees(minor)})"
    assert ellipse_text(replace(hinge, ellipse=None)) == ""


@given(st.floats(-90, 90))
def test_an_angle_never_reads_as_minus(value):
    """Whatever the angle, its words hold one number, no minus sign and at most one sense."""
    for text in (turned(value), against_hinge(value)):
        assert "-" not in text
        assert len(re.findall(r"\d+(?:\.\d)?°", text)) == (0 if text == "cleavage along the hinge" else 1)
        assert text.count("clockwise") <= 1


@pytest.mark.parametrize(
    ("low", "high", "text"),
    [
        (2.0, 12.0, "between 2° and 12° clockwise"),
        (-12.0, -2.0, "between 2° and 12° anticlockwise"),
        (-3.0, 7.0, "between 3° anticlockwise and 7° clockwise"),
        (0.0, 5.0, "between 0° and 5° clockwise"),
        (0.01, 5.0, "between 0° and 5° clockwise"),
    ],
)
def test_intervals(low, high, text):
    """Both ends are named with their sense; a common one only once."""
    assert between(low, high) == text


def test_unsigned_intervals_have_no_sense_and_do_not_go_below_zero():
    """Where there is no sense on the map none is written."""
    assert between(-3.0, 7.0, signed=False) == "between 0° and 7°"
    assert turned(7.0, signed=False) == "7°"
    assert against_hinge(7.0, signed=False) == "cleavage 7° off the hinge"


def test_attitudes_have_three_and_two_digits_and_no_360():
    """Planes and lines are written to whole degrees, north as 000."""
    assert plane_text(Plane(5.0, 7.2)) == "005/07"
    assert plane_text(Plane(359.7, 90.0)) == "000/90"
    assert line_text(Line(359.5, 0.4)) == "000/00"
    assert line_text(Line(40.288, 20.095)) == "040/20"


@pytest.mark.parametrize(
    ("numbers", "text"),
    [
        ((0, 1, 0, 0), "1 more cleavage reading"),
        ((2, 6, 0, 0), "6 more cleavage and 2 more bedding readings"),
        ((3, 0, 4, 0), "4 more intersection and 3 more bedding readings"),
        ((0, 2, 0, 5), "5 more hinge and 2 more cleavage readings"),
    ],
)
def test_further_readings_are_named_by_feature_the_most_first(numbers, text):
    """Only features that are wanted are named."""
    assert more(MoreReadings(sum(numbers), 1, 90, *numbers)) == text


def test_headlines_of_the_four_states(draw_sums):
    """Each state has its sentence, and the figure never stands without its interval."""
    transected = check_fold(draw_sums(FoldDesign(transection_deg=-15.0), bedding=40, cleavage=40))
    assert re.fullmatch(r"Transected: cleavage \d+° anticlockwise of the hinge", headline(transected))
    assert re.fullmatch(
        r"between [\d.]+° and \d+° anticlockwise, at 95% confidence",
        figure_line(transected),
    )
    planar = check_fold(draw_sums(FoldDesign(), bedding=300, cleavage=300))
    assert headline(planar) == "Axial planar within 5°"
    assert " between " in figure_line(planar)
    waiting = check_fold(draw_sums(FoldDesign(transection_deg=3.0), bedding=12, cleavage=10))
    assert headline(waiting).startswith("Keep reading: about ")
    assert check_fold(RunningSums()).verdict is Verdict.KEEP_READING
    assert headline(check_fold(RunningSums())) == "Keep reading"
    blocked = check_fold(draw_sums(FoldDesign(bedding_scatter_deg=30.0), bedding=40))
    assert headline(blocked) == "Cannot be settled here"


def test_a_transection_too_small_to_write_is_not_called_along_the_hinge(make_sums):
    """A verdict 'transected' at 0.03 degrees says so, not that cleavage lies along the hinge."""
    check = check_fold(make_sums()).changed(
        verdict=Verdict.TRANSECTED, transection_deg=0.03, sense="clockwise", interval_deg=(0.01, 0.05)
    )
    assert headline(check) == "Transected, by less than 0.1°"


def test_the_margin_is_named_as_set(draw_sums):
    """The headline of an axial-planar fold names the user's margin."""
    sums = draw_sums(FoldDesign(), bedding=300, cleavage=300)
    assert headline(check_fold(sums, CheckSettings(margin_deg=7.5))) == "Axial planar within 7.5°"


def test_the_figure_line_says_what_is_missing_before_the_first_look(draw_sums):
    """Without an interval the second line is the first reason."""
    check = check_fold(draw_sums(bedding=3, cleavage=2))
    assert check.interval_deg is None
    assert figure_line(check) == check.because[0]
    assert np.isfinite(check.transection_deg)
