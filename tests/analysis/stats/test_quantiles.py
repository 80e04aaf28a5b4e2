"""Quantiles of t and F on the standard library, against scipy, which does not travel on a tablet."""

import math

import numpy as np
import pytest
from scipy import stats

from analysis.errors import SettingError
from analysis.stats.quantiles import f2_quantile, student_multiplier, t_quantile, t_tail

FREEDOMS = np.unique(np.concatenate([np.geomspace(0.5, 1e6, 60), np.arange(1.0, 41.0), [9.89]]))
PROBABILITIES = (0.5001, 0.6, 0.75, 0.8, 0.9, 0.95, 0.975, 0.99, 0.995, 0.9995, 0.99995, 1.0 - 1e-7)


@pytest.mark.parametrize("probability", PROBABILITIES)
def test_t_quantile_equals_scipy_over_its_whole_range(probability):
    """Within 1e-8, relative, for half a degree of freedom to a million."""
    ours = [t_quantile(probability, freedom) for freedom in FREEDOMS]
    np.testing.assert_allclose(ours, stats.t.ppf(probability, FREEDOMS), rtol=1e-8)


@pytest.mark.parametrize("probability", [0.0001, 0.025, 0.25, 0.4999])
def test_t_quantile_is_odd_about_one_half(probability):
    """The lower tail mirrors the upper one."""
    assert t_quantile(probability, 7.3) == pytest.approx(-t_quantile(1.0 - probability, 7.3), rel=1e-12)


def test_t_quantile_of_one_half_is_zero():
    """Student's t is even about 0."""
    assert t_quantile(0.5, 3.0) == 0.0


def test_t_quantile_without_end_of_freedom_is_normal():
    """Infinite degrees of freedom give the normal quantile."""
    assert t_quantile(0.975, math.inf) == pytest.approx(1.959963984540054, abs=1e-12)


@pytest.mark.parametrize(
    ("probability", "freedom"),
    [(0.0, 5.0), (1.0, 5.0), (-0.1, 5.0), (0.9, 0.0), (math.nan, 5.0), (0.9, -1.0)],
)
def test_t_quantile_refuses_what_has_none(probability, freedom):
    """A probability outside (0, 1), or no freedom, raises the project's own error and says what is expected."""
    with pytest.raises(SettingError, match="probability between 0 and 1"):
        t_quantile(probability, freedom)


def test_t_tail_equals_scipy():
    """Within 2e-9, relative, from the middle far into the tail."""
    for t in (0.0, 0.1, 1.0, 2.5, 8.0, 40.0):
        ours = [t_tail(t, freedom) for freedom in FREEDOMS]
        np.testing.assert_allclose(ours, stats.t.sf(t, FREEDOMS), rtol=2e-9, atol=1e-300)


def test_f2_quantile_equals_scipy_over_its_whole_range():
    """Within 1e-12, relative, for half a degree of freedom to ten million, scalar and array alike."""
    probability = np.array([0.01, 0.5, 0.9, 0.95, 0.99, 0.9999, 1.0 - 1e-9])
    freedom = np.geomspace(0.5, 1e7, 80)[:, np.newaxis]
    np.testing.assert_allclose(
        f2_quantile(probability, freedom), stats.f.ppf(probability, 2, freedom), rtol=1e-12
    )
    assert float(f2_quantile(0.95, 8.0)) == pytest.approx(stats.f.ppf(0.95, 2, 8.0), rel=1e-12)


def test_student_multiplier_has_the_tail_of_the_normal():
    """For z of 2.5 to 4 never narrower than t by a ten-thousandth, nor wider by 5% from 5 degrees of freedom on."""
    z = np.linspace(2.5, 4.0, 200)
    for freedom in (1.0, 2.0, 4.0, 5.0, 8.0, 10.0, 30.0, 1e3, 1e6):
        exact = stats.t.isf(stats.norm.sf(z), freedom)
        ratio = student_multiplier(z, freedom) / exact
        assert ratio.min() > 1.0 - 1e-4
        if freedom >= 5.0:
            assert ratio.max() < (1.05 if freedom < 8.0 else 1.012)
