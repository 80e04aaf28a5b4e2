"""Means, eigenvalues and ellipses against published figures and reference libraries.

Directions are declination (trend) and inclination (plunge, down positive), in degrees.
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from analysis.orient.vectors import line_vector, pole_vector, trend_plunge_deg
from analysis.stats.axes import ACROSS, ALONG, confidence_ellipse, eigen, fit_axis
from analysis.stats.descriptors import fisher_mean
from analysis.stats.moments import moments, tensor
from analysis.stats.quantiles import t_quantile
from analysis.stats.sums import RunningSums

# Fisher (1953), nine directions, as scipy's own tests carry them (scipy.stats, TestDirectionalStats).
FISHER_DECLINATION = [343.2, 62, 36.9, 27, 359, 5.7, 50.4, 357.6, 44]
FISHER_INCLINATION = [66.1, 68.7, 70.1, 82.1, 79.5, 73, 69.3, 58.8, 51.4]
# pmagpy 4.5.2 (BSD-3), example of its command goprinc: declination, inclination.
GOPRINC = [
    (358.3, 58.6), (357.9, 42.7), (294.5, -11.4), (345.2, 53.3), (16.9, 61.2), (8.1, 37.3), (32.5, 51.5),
    (349.6, 70.2), (345.8, 64.0), (352.9, 66.3), (351.0, 63.0), (349.2, 65.6), (10.6, 55.7), (11.5, 26.6),
    (14.8, 60.9), (358.8, 66.4), (4.4, 27.7), (350.1, 74.7), (17.9, 75.9), (15.4, 35.2),
]  # fmt: skip
# Fisher (1993), Statistical Analysis of Circular Data, appendix B, as pycircstat2 0.1.15 (MIT) ships them: axial.
FELDSPAR_LATHS_B2 = (
    "176 162 49 174 174 49 54 63 59 61 66 104 97 58 121 5 178 3 168 0 18 39 140 63 55 170 169 37 152 73 53 176 72 "
    "170 113 56 87 161 164 21 50 6 59 140 54 64 56 38 61 143 51 144 148 44 60 98 86 145 38 168 39 134 68 57 129 68 "
    "132 82 54 119 131 50 93 160 127 124 65 108 52 61 86 37 132 83 163 58 144 29 80 172 144 138 10 45 137 11 145 103 "
    "69 124 54 121 1 39 111 153 13 5 5 107 104 39 133 36 63 4 21 51 30 52 90 143 13 50 109 12 170 5 14 91 132 12 1"
)
COAL_CLEAT_B22 = (
    "80 90 80 84 95 79 85 80 84 90 78 90 81 90 79 90 80 84 73 115 73 85 79 72 110 75 84 75 90 85 85 70 84 96 90 73 85 "
    "90 68 124 117 114 121 127 127 125 127 84 79 73 79 79 75 80 79 68 117 119 131 122 80 90 75"
)
# Coverage of a nominal 95% ellipse with the chi-square form, simulated 4,000 times (METHOD and CHECKS; computed
# once for this project, independently of this code): clusters of 5 degrees; limbs at 50 degrees, 4 degrees off.
CLUSTER_CHI2 = {5: 0.70, 10: 0.84, 25: 0.92, 50: 0.94}
GIRDLE_CHI2 = {5: 0.56, 10: 0.79, 25: 0.90, 50: 0.92}
# The same with the F form.
CLUSTER_F = {5: 0.95, 10: 0.95, 25: 0.95, 50: 0.95}
GIRDLE_F = {5: 0.88, 10: 0.92, 25: 0.94, 50: 0.94}


def test_fisher_mean_of_fishers_directions():
    """Mean 24.2692/70.8912, R 8.771981, k 35.08487, alpha95 8.81319 (Fisher 1953; scipy; computed)."""
    mean = fisher_mean(line_vector(FISHER_DECLINATION, FISHER_INCLINATION))
    trend, plunge = trend_plunge_deg(mean.mean)
    assert float(trend) == pytest.approx(24.2692, abs=5e-5)
    assert float(plunge) == pytest.approx(70.8912, abs=5e-5)
    assert mean.resultant == pytest.approx(8.771981, abs=5e-7)
    assert mean.precision == pytest.approx(35.08487, abs=5e-6)
    assert mean.alpha95_deg == pytest.approx(8.81319, abs=5e-6)


def test_eigenvalues_of_fishers_directions():
    """Eigenvalues of their tensor are 0.950359 0.030911 0.018730 (computed with numpy)."""
    axes = line_vector(FISHER_DECLINATION, FISHER_INCLINATION)
    values, _ = eigen(tensor(moments(axes).sum(axis=0)) / len(axes))
    assert values.tolist() == pytest.approx([0.950359, 0.030911, 0.018730], abs=5e-7)


def test_k_is_not_the_maximum_likelihood_kappa():
    """Fisher's k = (n - 1)/(n - R) is told apart from scipy's maximum-likelihood 39.47048 of the same data."""
    axes = line_vector(FISHER_DECLINATION, FISHER_INCLINATION)
    mean, kappa = stats.vonmises_fisher.fit(axes)
    ours = fisher_mean(axes)
    assert kappa == pytest.approx(39.47048, abs=5e-5)
    assert np.allclose(mean, ours.mean, atol=1e-7)
    # From the same resultant: coth(kappa) - 1/kappa = R/n.
    assert 1.0 / np.tanh(kappa) - 1.0 / kappa == pytest.approx(ours.resultant / 9.0, abs=1e-6)
    assert abs(ours.precision - kappa) > 4.0


def test_fisher_mean_of_pmagpys_example():
    """Mean 147.872478/-42.528727, R 3.9916089, k 357.521626, alpha95 4.865886 (pmagpy 4.5.2, fisher_mean)."""
    mean = fisher_mean(line_vector([150, 151, 145, 146], [-45, -46, -38, -41]))
    north, east, down = mean.mean
    assert np.degrees(np.arctan2(east, north)) == pytest.approx(147.872478, abs=5e-7)
    assert np.degrees(np.arcsin(down)) == pytest.approx(-42.528727, abs=5e-7)
    assert mean.resultant == pytest.approx(3.9916089, abs=5e-8)
    assert mean.precision == pytest.approx(357.521626, abs=5e-7)
    # pmagpy takes alpha95 with p = 0.05; 20 = 1/p.
    assert mean.alpha95_deg == pytest.approx(4.865886, abs=5e-7)


def test_principal_axes_of_pmagpys_example():
    """Eigenvalues .8778314 .0712454 .0509232; axes 3.8694/56.7402, 151.8526/29.0789, 250.2543/14.7211 (pmagpy)."""
    axes = line_vector(*np.array(GOPRINC).T)
    values, vectors = eigen(tensor(moments(axes).sum(axis=0)) / len(axes))
    assert values.tolist() == pytest.approx([0.8778314, 0.0712454, 0.0509232], abs=5e-8)
    trends, plunges = trend_plunge_deg(vectors.T)
    assert trends.tolist() == pytest.approx([3.8694, 151.8526, 250.2543], abs=5e-5)
    assert plunges.tolist() == pytest.approx([56.7402, 29.0789, 14.7211], abs=5e-5)


@pytest.mark.parametrize(
    ("text", "count", "mean_deg"), [(FELDSPAR_LATHS_B2, 133, 35.947), (COAL_CLEAT_B22, 63, 88.985)]
)
def test_mean_of_horizontal_axes_is_that_of_doubled_angles(text, count, mean_deg):
    """The principal axis of horizontal lines is the axial mean of Fisher (1993), by pycircstat2 and by scipy."""
    azimuths = np.array(text.split(), dtype=float)
    assert len(azimuths) == count
    lines = line_vector(azimuths, np.zeros(count))
    trend, plunge = trend_plunge_deg(fit_axis(moments(lines).sum(axis=0)[np.newaxis], ALONG).vector)
    assert float(plunge) == pytest.approx(0.0, abs=1e-6)
    assert float(trend) % 180.0 == pytest.approx(mean_deg, abs=5e-4)
    assert stats.circmean(azimuths, high=180.0) == pytest.approx(float(trend) % 180.0, abs=1e-6)


def coverages(axes, truth, *, along):
    """Shares of simulated samples (samples, n, 3) whose F and chi-square ellipses hold the true axis."""
    n = axes.shape[1]
    fit = fit_axis(moments(axes).sum(axis=1)[:, np.newaxis], ALONG if along else ACROSS)
    ellipse = confidence_ellipse(fit)
    forward = np.sum(fit.vector * truth, axis=-1)
    parts = [np.sum(axis * truth, axis=-1) / forward for axis in (ellipse.major_axis, ellipse.minor_axis)]
    halves = [np.tan(np.radians(half)) for half in (ellipse.major_deg, ellipse.minor_deg)]
    distance = sum((part / half) ** 2 for part, half in zip(parts, halves, strict=True))
    freedom = n - 2 if along else n - 3
    f_form = 2.0 * (n - 1) / freedom * stats.f.ppf(0.95, 2, freedom)
    # The chi-square form is n v' E^-1 v, the F form (n - 1) v' E^-1 v.
    return np.mean(distance <= 1.0), np.mean(distance * f_form * n / (n - 1.0) <= stats.chi2.ppf(0.95, 2))


@pytest.mark.parametrize("n", [5, 10, 25, 50])
def test_coverage_of_ellipses(n):
    """The F form covers what the table says or more; the chi-square form, by the same simulation, far less."""
    rng = np.random.default_rng(n)

    def scattered(axes, degrees):
        moved = axes + np.radians(degrees) * rng.standard_normal((4000, n, 3))
        return moved / np.linalg.norm(moved, axis=-1, keepdims=True)

    cluster = scattered(np.array([0.0, 0.0, 1.0]), 5.0)
    dip = np.radians(np.where(np.arange(n) % 2, 50.0, -50.0))
    girdle = scattered(np.stack([0.0 * dip, np.sin(dip), np.cos(dip)], axis=-1), 4.0)
    cluster_f, cluster_chi2 = coverages(cluster, np.array([0.0, 0.0, 1.0]), along=True)
    girdle_f, girdle_chi2 = coverages(girdle, np.array([1.0, 0.0, 0.0]), along=False)
    # Of 4,000 samples a share near .95 is known to +-.007 and one near .6 to +-.015 (two standard errors).
    assert cluster_f == pytest.approx(CLUSTER_F[n], abs=0.012)
    assert girdle_f >= GIRDLE_F[n] - 0.007
    # At five readings much hangs on how they fall on the limbs, which the table does not say: here three and two.
    assert girdle_chi2 == pytest.approx(GIRDLE_CHI2[n], abs=0.05 if n == 5 else 0.02)
    assert cluster_chi2 == pytest.approx(CLUSTER_CHI2[n], abs=0.02)


def test_t_quantile_is_scipys_where_the_check_uses_it():
    """The factor from SE 2.910 to the half-width 6.494 of METHOD's check case is scipy's t at df 9.89."""
    assert t_quantile(0.975, 9.8873) == pytest.approx(stats.t.ppf(0.975, 9.8873), rel=1e-9)


def test_sums_give_the_same_tensor_whatever_the_feature():
    """The nine directions added to running sums as cleavage poles give the eigenvalues of Fisher's directions."""
    sums = RunningSums()
    axes = line_vector(FISHER_DECLINATION, FISHER_INCLINATION)
    for feature in ("cleavage", "hinge"):
        sums.add(feature, "A", axes)
        values, _ = eigen(tensor(sums.total(feature)) / 9.0)
        assert values.tolist() == pytest.approx([0.950359, 0.030911, 0.018730], abs=5e-7)
    # A plane whose pole is a direction: strike = declination + 90, dip = 90 - inclination.
    poles = pole_vector(np.array(FISHER_DECLINATION) + 90.0, 90.0 - np.array(FISHER_INCLINATION))
    assert np.allclose(poles, axes, atol=1e-12)
