"""Watching, against published constants."""

import math

import numpy as np
import pytest

from analysis.stats.watching import first_look_multiplier, normal_mixture_half_width, watched_multiplier
from tests.crossing import chance_of_leaving

# Normal-mixture bound at 5%, tightest at n = 100, unit variance: three independent implementations agree
# (compared once for this project; formula of Robbins 1970, Waudby-Smith et al. arXiv 2103.06476).
MIXTURE = {10: 1.21907531, 50: 0.43608247, 100: 0.30352090, 500: 0.14100781, 5000: 0.04900534}
# Jennison & Turnbull 2000, Group Sequential Methods, ch. 2: two-sided 5%, equally spaced looks.
POCOCK = {3: 2.289, 5: 2.413}
OBRIEN_FLEMING = {3: 2.004, 5: 2.040}
NAIVE_FIVE_LOOKS = 0.142
KNOWN = 1e9  # degrees of freedom of a standard error that is as good as known


@pytest.mark.parametrize(("n", "half_width"), MIXTURE.items())
def test_normal_mixture_equals_published_half_widths(n, half_width):
    """The half-width of a mean of n readings agrees to all digits given."""
    c = -2.0 * math.log(0.05)
    rho_squared = (c + math.log(1.0 + c)) / 100.0
    assert rho_squared == pytest.approx(0.0793615, abs=5e-8)
    ours = float(normal_mixture_half_width(1.0 / n, math.sqrt(rho_squared), 0.05))
    assert ours == pytest.approx(half_width, abs=5e-9)


def test_normal_mixture_at_the_exact_optimum():
    """With the Lambert-W optimum 0.082120 the bound at n = 100 is 0.30351224."""
    assert float(normal_mixture_half_width(0.01, math.sqrt(0.082120), 0.05)) == pytest.approx(
        0.30351224, abs=1e-8
    )


def test_five_looks_at_the_ordinary_interval():
    """Five equally spaced looks at 1.96 standard errors are wrong in 14.2%, as published."""
    looks = np.arange(1.0, 6.0)
    assert chance_of_leaving(looks, np.full(5, 1.96)) == pytest.approx(NAIVE_FIVE_LOOKS, abs=5e-4)


@pytest.mark.parametrize(("looks", "constant"), POCOCK.items())
def test_constant_boundary_of_group_sequential_tests(looks, constant):
    """Pocock's constants give 5% by the recursion that the watched interval is held to."""
    t = np.arange(1.0, looks + 1.0)
    assert chance_of_leaving(t, np.full(looks, constant)) == pytest.approx(0.05, abs=1e-4)


@pytest.mark.parametrize(("looks", "constant"), OBRIEN_FLEMING.items())
def test_falling_boundary_of_group_sequential_tests(looks, constant):
    """O'Brien and Fleming's constants give 5% by the same recursion."""
    t = np.arange(1.0, looks + 1.0)
    assert chance_of_leaving(t, constant * np.sqrt(looks / t)) == pytest.approx(0.05, abs=1e-4)


def test_watched_interval_costs_more_than_five_looks_and_is_wrong_less_often():
    """At those five looks the watched multiplier is above Pocock's 2.413 and wrong in less than 5%."""
    looks = np.arange(1.0, 6.0)
    ours = watched_multiplier(looks, KNOWN, 0.95)
    assert (ours > POCOCK[5]).all()
    assert chance_of_leaving(looks, ours) < 0.05


def test_first_multiplier_is_that_of_a_printed_table():
    """Upper 5% point of chi-square with 3 degrees of freedom: 7.815 in any printed table of it."""
    assert first_look_multiplier(0.95) ** 2 == pytest.approx(7.815, abs=5e-4)
