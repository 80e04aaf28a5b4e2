"""Principal axes and their covariance, from moments."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.linalg
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from analysis.orient.vectors import axis_angle_deg, line_vector, pole_vector
from analysis.stats.axes import (
    ACROSS,
    ALONG,
    ROUNDING_DEG,
    UNUSED,
    USUAL_SCATTER_DEG,
    KnownAxis,
    confidence_ellipse,
    eigen,
    fit_axes,
    fit_axis,
)
from analysis.stats.moments import moments, tensor

AZIMUTHS = st.sampled_from([0.0, 90.0, 180.0, 270.0]) | st.floats(0, 360)
INCLINATIONS = st.sampled_from([0.0, 90.0]) | st.floats(0, 90)
AXIS = st.builds(line_vector, AZIMUTHS, INCLINATIONS)
AXES = st.lists(AXIS, min_size=1, max_size=15).map(np.array)


def rows(axes):
    """Moments, (1, 24), of axes read at one outcrop."""
    return moments(np.asarray(axes, dtype=float).reshape(-1, 3)).sum(axis=0)[np.newaxis]


def both(bedding, lines):
    """Fit a hinge to bedding across it and lines along it, read at one outcrop."""
    return fit_axes(np.stack([rows(bedding), rows(lines)], axis=1), [[ACROSS, ALONG]]).of(0)


def role(along):
    return ALONG if along else ACROSS


def cluster(n=30, scatter=0.08, seed=1, about=(0.3, 0.5, 0.81)):
    rng = np.random.default_rng(seed)
    axes = np.array(about) / np.linalg.norm(about) + scatter * rng.standard_normal((n, 3))
    return axes / np.linalg.norm(axes, axis=1, keepdims=True)


def girdle(n=30, scatter=0.06, seed=2):
    rng = np.random.default_rng(seed)
    angle = rng.uniform(-1.0, 1.0, n)
    axes = np.stack([0 * angle, np.sin(angle), np.cos(angle)], axis=1) + scatter * rng.standard_normal((n, 3))
    return axes / np.linalg.norm(axes, axis=1, keepdims=True)


def direct_covariance(axes, vector, across, *, along):
    """Tyler's (1981) sandwich, summed reading by reading as METHOD sec. 3 writes it, over n - 1."""
    n = len(axes)
    values = {k: np.mean((axes @ k_vector) ** 2) for k, k_vector in enumerate([vector, *across.T])}
    result = np.empty((2, 2))
    for j in (0, 1):
        for k in (0, 1):
            total = sum(float((across[:, j] @ x) * (across[:, k] @ x) * (vector @ x) ** 2) for x in axes)
            result[j, k] = total / (n * (values[0] - values[1 + j]) * (values[0] - values[1 + k]))
    assert along == (values[0] > values[1])
    return result / (n - 1)


@given(AXES)
def test_eigen_analysis_agrees_with_scipy(axes):
    """Eigenvalues and axes of the tensor are those of scipy.linalg.eigh, in descending order."""
    t = tensor(rows(axes)[0])
    values, vectors = eigen(t)
    theirs = scipy.linalg.eigh(axes.T @ axes)
    assert np.allclose(values, theirs[0][::-1], atol=1e-12 * len(axes))
    assert np.allclose(t @ vectors, vectors * values, atol=1e-12 * len(axes))
    assert np.allclose(vectors.T @ vectors, np.eye(3), atol=1e-12)


@pytest.mark.parametrize(("axes", "along"), [(cluster(), True), (girdle(), False)])
def test_axis_and_covariance_agree_with_the_formula_over_the_readings(axes, along):
    """The fit from moments equals numpy's eigenvector and Tyler's sum over single readings."""
    fit = fit_axis(rows(axes), role(along))
    values, vectors = np.linalg.eigh(axes.T @ axes)
    assert axis_angle_deg(fit.vector, vectors[:, 2 if along else 0]) < 1e-6
    direct = direct_covariance(axes, fit.vector, fit.across, along=along)
    assert np.allclose(fit.covariance, direct, rtol=1e-9)
    assert fit.readings == len(axes)
    sign = 1.0 if along else -1.0
    assert np.allclose(np.sort(sign * fit.eigenvalues), values, atol=1e-9)


@pytest.mark.parametrize("along", [True, False])
def test_the_less_certain_direction_comes_first(along):
    """`across` is ordered so that the axis is known less well along the first direction."""
    fit = fit_axis(rows(girdle()), role(along))
    assert fit.even_covariance[0, 0] >= fit.even_covariance[1, 1]


def test_the_covariance_is_that_of_repeated_samples():
    """The mean covariance over 4000 drawn girdles is the scatter of their fitted axes, within sampling error."""
    rng = np.random.default_rng(8)
    angle = np.radians(np.where(np.arange(40) % 2, 50.0, -50.0))
    clean = np.stack([0 * angle, np.sin(angle), np.cos(angle)], axis=1)
    drawn = clean + np.radians(4.0) * rng.standard_normal((4000, 40, 3))
    drawn /= np.linalg.norm(drawn, axis=-1, keepdims=True)
    fit = fit_axis(moments(drawn).sum(axis=1)[:, np.newaxis], ACROSS)
    plunge_away = fit.vector * np.sign(fit.vector[:, :1])
    for component in (1, 2):
        along = fit.across[:, component, :]
        expected = np.einsum("ni,nij,nj->n", along, fit.covariance, along).mean()
        # Variance of 4000 draws is known within sqrt(2/4000), 2.2%; the formula itself is of first order.
        assert np.var(plunge_away[:, component]) == pytest.approx(expected, rel=0.10)


@given(AXES, AXES, st.integers(0, 2**16 - 1))
def test_nothing_depends_on_signs(bedding, lines, flips):
    """Axes turned upside down give the same fit, to the last bit."""
    signs = np.array([-1.0 if flips >> k & 1 else 1.0 for k in range(15)])[:, np.newaxis]
    turned = both(bedding * signs[: len(bedding)], -lines)
    for ours, theirs in zip(both(bedding, lines), turned, strict=True):
        assert np.array_equal(ours, theirs, equal_nan=True)


@given(AXES, st.booleans())
def test_any_readings_give_a_unit_axis_and_no_nan(axes, along):
    """Whatever is read, the axis has unit length, and covariances are numbers or infinite, never NaN."""
    fit = fit_axis(rows(axes), role(along))
    assert np.linalg.norm(fit.vector) == pytest.approx(1.0)
    for value in (fit.covariance, fit.even_covariance, fit.scatter_rad, fit.influence):
        assert not np.isnan(value).any()
    ellipse = confidence_ellipse(fit)
    assert 0.0 <= float(ellipse.minor_deg) <= float(ellipse.major_deg) <= 90.0


@pytest.mark.parametrize(
    ("axes", "along"),
    [
        ([pole_vector(30.0, 40.0)], False),
        ([pole_vector(30.0, 40.0)] * 2, False),
        ([pole_vector(30.0, 40.0), -pole_vector(30.0, 40.0)], False),
        ([line_vector(0.0, 0.0)], True),
        (np.eye(3), True),
        (np.eye(3), False),
        (np.zeros((0, 3)), True),
    ],
)
def test_an_undetermined_axis_has_an_infinite_covariance(axes, along):
    """One reading, equal or opposite bedding, or axes all ways round leave the axis open, and say so."""
    fit = fit_axis(rows(axes), role(along))
    assert np.isinf(fit.covariance).any()
    ellipse = confidence_ellipse(fit)
    assert (float(ellipse.major_deg), float(ellipse.minor_deg)) == (90.0, 90.0)


def test_equal_lines_agree_no_better_than_they_are_read():
    """Lines alike to the digit scatter by rounding to whole degrees, 1/sqrt(12), once there are enough of them."""
    fit = fit_axis(rows([line_vector(0.0, 0.0)] * 9), ALONG)
    assert float(fit.scatter_rad[0]) == pytest.approx(np.radians(12**-0.5))
    assert pytest.approx(12**-0.5) == ROUNDING_DEG
    expected = np.radians(12**-0.5) / 3.0
    assert np.allclose(fit.even_covariance, expected**2 * np.eye(2))
    assert np.allclose(fit.covariance, 0.0, atol=1e-30)


def test_few_readings_are_helped_out_by_the_usual_scatter():
    """With no residual of their own, readings are taken to scatter as is usual: 5.5 degrees."""
    fit = fit_axis(rows([pole_vector(0.0, 40.0), pole_vector(180.0, 40.0)]), ACROSS)
    assert float(fit.freedom) == 0.0
    assert np.degrees(float(fit.scatter_rad[0])) == pytest.approx(USUAL_SCATTER_DEG)


def test_two_streams_are_weighted_by_their_scatter():
    """A hinge from scattered bedding and tight lines lies near the lines; numpy gives the same axis."""
    bedding, lines = girdle(20, 0.12), cluster(12, 0.02, about=(0.99, 0.1, 0.05))
    fit = both(bedding, lines)
    b, m = bedding.T @ bedding, lines.T @ lines
    vb = np.linalg.eigvalsh(b)[0] / (len(bedding) - 2)
    vm = np.linalg.eigvalsh(m)[:2].sum() / (2 * len(lines) - 2)
    axis = np.linalg.eigh(b / vb - m / vm)[1][:, 0]
    assert axis_angle_deg(fit.vector, axis) < 1e-6
    alone = fit_axis(rows(lines), ALONG)
    assert axis_angle_deg(fit.vector, alone.vector) < 1.5
    assert fit.readings == 32
    assert float(fit.freedom) == 20 + 24 - 2


def test_readings_without_scatter_in_both_streams_still_fit():
    """Exact bedding and equal hinge lines, which once divided by zero, give the common axis."""
    bedding = [pole_vector(0.0, dip) for dip in (30, 50, 70)] + [pole_vector(180.0, dip) for dip in (20, 60)]
    fit = both(bedding, [line_vector(0, 0)] * 5)
    assert axis_angle_deg(fit.vector, line_vector(0.0, 0.0)) < 1e-6
    assert np.isfinite(fit.even_covariance).all()


def test_scatter_known_beforehand_is_taken_as_given():
    """A stream whose scatter is stated weighs by it, and pulls for no outcrop."""
    known = KnownAxis(moments(line_vector(0.0, 90.0)), np.array([ACROSS, ALONG]), 0.2)
    lines = np.repeat(rows(cluster(5, 0.05, about=(1.0, 0.1, 0.1))), 3, axis=0)
    fit = fit_axes(lines[:, np.newaxis], [[ACROSS], [UNUSED]], known).of(0)
    assert float(fit.scatter_rad[1]) == 0.2
    assert fit.influence.shape == (3, 2)
    assert np.isfinite(fit.covariance).all()


def test_pulls_of_outcrops_sum_to_zero_and_move_the_axis():
    """Influences sum to zero, and leaving one outcrop out moves the axis by about its influence."""
    axes = girdle(60, 0.05)
    parts = axes.reshape(6, 10, 3)
    by_outcrop = moments(parts).sum(axis=1)
    fit = fit_axis(by_outcrop, ACROSS)
    assert np.allclose(fit.influence.sum(axis=0), 0.0, atol=1e-12)
    for k in range(6):
        left = fit_axis(np.delete(by_outcrop, k, axis=0), ACROSS)
        moved = left.vector * np.sign(left.vector @ fit.vector)
        expected = -fit.influence[k]
        assert np.allclose(fit.across.T @ moved, expected, atol=0.35 * np.abs(fit.influence).max())


def test_a_leading_shape_gives_each_fit_by_itself():
    """Many folds at once give what each gives alone."""
    several = np.stack([rows(girdle(seed=k)) for k in range(6)]).reshape(2, 3, 1, 24)
    fits = fit_axis(several, ACROSS)
    ellipses = confidence_ellipse(fits, 0.9)
    assert fits.vector.shape == (2, 3, 3)
    for place in np.ndindex(2, 3):
        one = fit_axis(several[place], ACROSS)
        assert axis_angle_deg(one.vector, fits.vector[place]) < 1e-6
        assert np.allclose(one.covariance, fits.covariance[place], rtol=1e-9)
        assert float(confidence_ellipse(one, 0.9).major_deg) == pytest.approx(
            float(ellipses.major_deg[place])
        )


@given(st.lists(AXES, min_size=6, max_size=6), st.booleans())
def test_several_axes_at_once_are_what_each_gives_alone(parts, steep):
    """Axes fitted together to three streams at two outcrops equal each fitted by itself to the streams it uses."""
    by_outcrop = np.stack([rows(axes)[0] for axes in parts]).reshape(2, 3, 24)
    roles = np.array([[ACROSS, ALONG, UNUSED], [UNUSED, ALONG, ACROSS], [UNUSED, UNUSED, ALONG]])
    vertical = KnownAxis(moments(line_vector(0.0, 90.0)), np.array([UNUSED, ACROSS, UNUSED]), 0.3)
    together = fit_axes(by_outcrop, roles, vertical if steep else None)
    for place, own in enumerate(roles):
        uses = own != UNUSED
        known = vertical._replace(roles=vertical.roles[place : place + 1]) if steep and place == 1 else None
        alone = fit_axes(by_outcrop[:, uses], [own[uses]], known).of(0)
        one = together.of(place)
        assert np.array_equal(one.readings, alone.readings)
        assert np.array_equal(one.freedom, alone.freedom)
        assert np.array_equal(one.outcrop_readings, alone.outcrop_readings)
        assert np.allclose(one.eigenvalues, alone.eigenvalues, rtol=1e-9, atol=1e-9)
        assert np.array_equal(np.isfinite(one.covariance), np.isfinite(alone.covariance))
        given = np.append(uses, known is not None) if steep else uses
        assert np.isnan(one.scatter_rad[~given]).all()
        gaps = -np.diff(one.eigenvalues)
        if gaps.min() > 1e-3 * np.abs(one.eigenvalues).max():  # else the directions are anybody's
            assert np.allclose(one.scatter_rad[given], alone.scatter_rad, rtol=1e-6, atol=1e-9)
            assert axis_angle_deg(one.vector, alone.vector) < 1e-5
            spread = [np.linalg.eigvalsh(fit.covariance) for fit in (one, alone)]
            assert np.allclose(*spread, rtol=1e-5, atol=1e-9)


def test_readings_across_and_along_are_told_apart():
    """Twelve poles across an axis and three lines along it count as twelve and fifteen in all."""
    fit = both(girdle(12), cluster(3, about=(1.0, 0.0, 0.0)))
    assert float(fit.readings_across) == 12.0
    assert float(fit.readings) == 15.0
    assert fit.outcrop_readings.tolist() == [15.0]


@pytest.mark.parametrize(("n", "confidence"), [(5, 0.95), (12, 0.9), (40, 0.99)])
def test_the_ellipse_is_the_f_form(n, confidence):
    """Half-angles follow from the covariance and scipy's F quantile; the ellipse opens along orthogonal axes."""
    for axes, along, freedom in ((cluster(n), True, n - 2), (girdle(n), False, n - 3)):
        fit = fit_axis(rows(axes), role(along))
        ellipse = confidence_ellipse(fit, confidence)
        scale = 2.0 * (n - 1) / freedom * stats.f.ppf(confidence, 2, freedom)
        halves = np.degrees(np.arctan(np.sqrt(np.linalg.eigvalsh(fit.covariance) * scale)))
        assert [float(ellipse.minor_deg), float(ellipse.major_deg)] == pytest.approx(
            halves.tolist(), rel=1e-9
        )
        frame = np.stack([fit.vector, ellipse.major_axis, ellipse.minor_axis])
        assert np.allclose(frame @ frame.T, np.eye(3), atol=1e-9)
