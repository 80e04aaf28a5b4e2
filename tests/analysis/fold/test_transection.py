"""Signed transection and its variance."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from analysis.fold.profile import profile_transection_deg
from analysis.fold.transection import FEWEST_CLUSTERS, outcrop_freedom, transection
from analysis.orient.vectors import axis_angle_deg, line_vector, pole_vector
from analysis.stats.moments import moments
from analysis.stats.synthetic import FoldDesign, draw
from tests.fitting import fitted_cleavage, fitted_hinge, fitted_steep


def rows(axes):
    return moments(np.asarray(axes, dtype=float).reshape(-1, 3)).sum(axis=0)[np.newaxis]


def limbs_about(hinge, surface_pole, dips=(30.0, 40.0, 50.0)):
    """Bedding poles turned about a hinge to either side, without scatter."""
    up = np.cross(surface_pole, hinge)
    return np.array(
        [Rotation.from_rotvec(np.radians(sign * dip) * hinge).apply(up) for dip in dips for sign in (-1, 1)]
    )


def angle(hinge_line, strike, dip):
    """Transection of a fold with this hinge and exact cleavage of this strike and dip."""
    hinge = line_vector(*hinge_line)
    side = np.cross(hinge, [0.0, 0.0, 1.0])
    side = side / np.linalg.norm(side) if np.linalg.norm(side) > 1e-9 else np.array([1.0, 0.0, 0.0])
    bedding, cleavage = rows(limbs_about(hinge, side)), rows([pole_vector(strike, dip)] * 6)
    return transection(fitted_hinge(bedding), fitted_cleavage(cleavage))


@pytest.mark.parametrize("trend", [0.0, 45.0, 90.0, 135.0, 180.0, 225.0, 270.0, 315.0, 359.999])
@pytest.mark.parametrize("turn", [-40.0, -10.0, -0.5, 0.5, 10.0, 40.0])
def test_vertical_cleavage_strikes_by_the_transection_off_a_horizontal_hinge(trend, turn):
    """For a horizontal hinge and vertical cleavage the transection is the difference in strike, clockwise positive."""
    found = angle((trend, 0.0), (trend + turn) % 360.0, 90.0)
    assert float(found.delta_deg) == pytest.approx(turn, abs=1e-6)
    assert bool(found.has_sense)


@given(st.floats(0, 360), st.floats(0, 60), st.floats(0, 360), st.floats(40, 90))
def test_the_size_is_the_angle_between_line_and_plane(trend, plunge, strike, dip):
    """sin|angle| = |h.s| for any hinge and any cleavage (Borradaile 1978)."""
    found = angle((trend, plunge), strike, dip)
    between = 90.0 - float(axis_angle_deg(line_vector(trend, plunge), pole_vector(strike, dip)))
    assert abs(float(found.delta_deg)) == pytest.approx(between, abs=1e-5)


@given(st.floats(0, 360), st.floats(0, 40), st.floats(-35, 35), st.floats(0, 360))
def test_turning_the_whole_fold_about_the_vertical_changes_nothing(trend, plunge, turn, by):
    """A common error of declination turns all readings alike and leaves the angle as it is."""
    first = angle((trend, plunge), (trend + turn) % 360.0, 85.0)
    second = angle(((trend + by) % 360.0, plunge), (trend + turn + by) % 360.0, 85.0)
    assert float(second.delta_deg) == pytest.approx(float(first.delta_deg), abs=1e-5)


@pytest.mark.parametrize(
    ("hinge", "strike", "dip"),
    [
        ((0.0, 90.0), 30.0, 90.0),
        ((120.0, 85.0), 40.0, 85.0),
        ((0.0, 10.0), 50.0, 0.0),
        ((0.0, 0.0), 90.0, 5.0),
    ],
)
def test_no_sense_on_the_map_for_steep_hinges_and_flat_cleavage(hinge, strike, dip):
    """Where hinge or cleavage give no sense on the map the angle is reported without a sign, not below zero."""
    found = angle(hinge, strike, dip)
    assert not bool(found.has_sense)
    assert float(found.delta_deg) >= 0.0


def test_cleavage_along_the_hinge_is_zero_not_minus_zero():
    """An exactly axial-planar fold has an angle of zero to rounding, with a sense that can be told."""
    found = angle((30.0, 20.0), 30.0, 90.0)
    assert float(found.delta_deg) == pytest.approx(0.0, abs=1e-6)
    assert bool(found.has_sense)


def test_the_variance_is_that_of_repeated_folds():
    """Over 3000 drawn folds the mean variance is the scatter of the angle, and its parts add."""
    design = FoldDesign(hinge_plunge_deg=15.0, transection_deg=10.0)
    drawn = draw(design, 40, 3000, np.random.default_rng(9))
    bedding = moments(drawn.bedding).sum(axis=1)[:, np.newaxis]
    cleavage = moments(drawn.cleavage).sum(axis=1)[:, np.newaxis]
    found = transection(fitted_hinge(bedding), fitted_cleavage(cleavage))
    # 3000 draws give the variance within 2.6%, the formula is of first order.
    assert found.fixed_variance.mean() == pytest.approx(found.delta_deg.var(), rel=0.08)
    assert np.allclose(found.fixed_variance, found.hinge_variance + found.cleavage_variance)
    assert np.all(found.reading_variance >= found.fixed_variance - 1e-12)
    assert found.delta_deg.mean() == pytest.approx(10.0, abs=0.15)


def test_degrees_of_freedom_lie_between_those_of_the_parts():
    """Satterthwaite's number lies between the smaller of the two and their sum: n - 2 and n - 1."""
    drawn = draw(FoldDesign(), 12, 50, np.random.default_rng(3))
    bedding = moments(drawn.bedding).sum(axis=1)[:, np.newaxis]
    cleavage = moments(drawn.cleavage).sum(axis=1)[:, np.newaxis]
    found = transection(fitted_hinge(bedding), fitted_cleavage(cleavage))
    assert np.all(found.fixed_freedom >= 10.0 - 1e-9)
    assert np.all(found.fixed_freedom <= 21.0 + 1e-9)


@pytest.mark.parametrize("counts", [(2, 6), (6, 1), (1, 1)])
def test_too_few_readings_leave_no_degrees_of_freedom(counts):
    """Readings that fit exactly because there are too few give 0 degrees of freedom or an infinite variance."""
    drawn = draw(FoldDesign(), 6, 1, np.random.default_rng(4))
    bedding, cleavage = rows(drawn.bedding[0][: counts[0]]), rows(drawn.cleavage[0][: counts[1]])
    found = transection(fitted_hinge(bedding), fitted_cleavage(cleavage))
    assert float(found.fixed_freedom) == 0.0
    assert not np.iscomplexobj(found.fixed_variance)
    assert float(found.fixed_variance) >= 0.0


def test_outcrops_that_differ_raise_the_variance():
    """With real variation of the hinge between outcrops, their scatter gives the larger variance and fewer degrees."""
    design = FoldDesign(
        outcrops=8, hinge_variation_deg=8.0, bedding_scatter_deg=2.0, cleavage_scatter_deg=2.0
    )
    drawn = draw(design, 80, 1, np.random.default_rng(6))
    bedding = moments(drawn.bedding[0].reshape(10, 8, 3)).sum(axis=0)
    cleavage = moments(drawn.cleavage[0].reshape(10, 8, 3)).sum(axis=0)
    found = transection(fitted_hinge(bedding), fitted_cleavage(cleavage))
    assert float(found.outcrops) == 8.0
    assert bool(found.by_outcrop)
    assert float(found.variance) == float(found.outcrop_variance) > float(found.reading_variance)
    assert float(found.freedom) < float(found.steady_freedom)


def test_one_outcrop_has_no_variance_between_outcrops():
    """With a single outcrop there is nothing to compare, and readings give the variance."""
    found = angle((30.0, 10.0), 38.0, 80.0)
    assert np.isnan(found.outcrop_variance)
    assert not bool(found.by_outcrop)
    assert float(outcrop_freedom(np.array(1.0))) > 0.0
    assert FEWEST_CLUSTERS == 4


@pytest.mark.parametrize("turn", [-15.0, 0.0, 15.0])
def test_lines_from_both_limbs_give_the_cleavage_by_themselves(turn):
    """Intersection lines of a transected fold spread along the cleavage, and give the same angle without its planes."""
    design = FoldDesign(
        transection_deg=turn, bedding_scatter_deg=0.0, cleavage_scatter_deg=0.0, line_scatter_deg=0.5
    )
    drawn = draw(design, 60, 1, np.random.default_rng(7))
    bedding, lines = rows(drawn.bedding[0]), rows(drawn.lines[0])
    found = transection(fitted_hinge(bedding), fitted_steep(lines))
    assert float(found.delta_deg) == pytest.approx(turn, abs=0.5)


def test_lines_along_a_horizontal_hinge_take_cleavage_to_be_steep():
    """Equal horizontal lines 6 degrees off a horizontal hinge give 6 degrees in plan, vertical cleavage assumed."""
    hinge = rows(limbs_about(line_vector(0.0, 0.0), np.array([0.0, 1.0, 0.0])))
    lines = rows([line_vector(6.0, 0.0)] * 5)
    fit = fitted_steep(lines)
    assert abs(float(fit.vector[2])) < 1e-9
    assert float(transection(fitted_hinge(hinge), fit).delta_deg) == pytest.approx(6.0, abs=1e-6)


def test_profile_transection_broadcasts_and_is_independent_of_the_axial_one():
    """Many at once give each; cleavage turned about the line across the hinge keeps a profile transection of zero."""
    hinge, surface = line_vector(20.0, 30.0), np.cross(line_vector(20.0, 30.0), [0.0, 0.0, 1.0])
    surface /= np.linalg.norm(surface)
    turns = np.radians([-30.0, -5.0, 0.0, 5.0, 30.0])
    across = np.cross(hinge, surface)
    axial = Rotation.from_rotvec(turns[:, np.newaxis] * across).apply(surface)
    assert np.allclose(profile_transection_deg(hinge, surface, axial), 0.0, atol=1e-9)
    profile = Rotation.from_rotvec(turns[:, np.newaxis] * hinge).apply(surface)
    assert np.allclose(profile_transection_deg(hinge, surface, profile), np.degrees(turns), atol=1e-9)
