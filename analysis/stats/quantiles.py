"""Quantiles of t and F on numpy and the standard library alone: scipy does not travel on a tablet."""

from __future__ import annotations

import math
from statistics import NormalDist
from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.errors import SettingError

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats

_NORMAL: Final = NormalDist()
_TINY: Final = 1e-300


def f2_quantile(probability: npt.ArrayLike, freedom: npt.ArrayLike) -> Floats:
    """Quantile of F with 2 and `freedom` degrees of freedom; exact: P(F > x) = (1 + 2x/m)^(-m/2)."""
    p, m = np.asarray(probability, dtype=float), np.asarray(freedom, dtype=float)
    return np.asarray(0.5 * m * np.expm1(-2.0 / m * np.log1p(-p)), dtype=float)


def t_tail(t: float, freedom: float) -> float:
    """P(T > t) of Student's t for t >= 0: half the incomplete beta function (Abramowitz & Stegun 26.7.1)."""
    return 0.5 * _incomplete_beta(freedom / (freedom + t * t), t * t / (freedom + t * t), 0.5 * freedom)


def t_quantile(probability: float, freedom: float) -> float:
    """Quantile of Student's t, for probability in (0, 1) and any positive degrees of freedom.

    Starts from Wallace's (1959) normal approximation and mends it by steps of second order on the logarithm of the
    tail, which is nearly straight in the logarithm of t. Raises SettingError outside that range.
    """
    if not (0.0 < probability < 1.0 and freedom > 0.0):
        raise SettingError(
            f"there is no t quantile at probability {probability:g} with {freedom:g} degrees of freedom",
            expected="a probability between 0 and 1 and more than 0 degrees of freedom",
        )
    if math.isinf(freedom):
        return _NORMAL.inv_cdf(probability)
    tail = min(probability, 1.0 - probability)
    if tail == 0.5:
        return 0.0
    t = float(student_multiplier(-_NORMAL.inv_cdf(tail), freedom))
    density = (
        math.lgamma(0.5 * (freedom + 1.0)) - math.lgamma(0.5 * freedom) - 0.5 * math.log(freedom * math.pi)
    )
    for _ in range(60):
        have = max(t_tail(t, freedom), _TINY)
        slope = math.exp(density - 0.5 * (freedom + 1.0) * math.log1p(t * t / freedom)) * t / have
        step = math.log(have / tail) / slope
        bend = 1.0 - (freedom + 1.0) * t * t / (freedom + t * t) + slope
        if abs(step) < 0.1:
            step *= 1.0 - 0.5 * step * bend
        t *= math.exp(max(-2.0, min(2.0, step)))
        if abs(step) < 1e-4:  # each step is off by about the cube of it
            break
    return math.copysign(t, probability - 0.5)


def student_multiplier(z: npt.ArrayLike, freedom: npt.ArrayLike) -> Floats:
    """The t with the tail that a standard normal has at z >= 0, nearly (Wallace 1959, in closed form).

    For z of 2.5 to 4 it is never narrower by more than 0.01%, and wider by at most 5% from 5 degrees of freedom
    on and 1.2% from 8 on.

    Wallace (1959) Ann. Math. Statist. 30: z = (8m+1)/(8m+3) sqrt(m ln(1 + t^2/m)), solved for t.
    """
    m = np.asarray(freedom, dtype=float)
    scaled = np.asarray(z, dtype=float) * (8.0 * m + 3.0) / (8.0 * m + 1.0)
    return np.asarray(np.sqrt(m * np.expm1(np.minimum(scaled * scaled / m, 600.0))))


def _incomplete_beta(x: float, complement: float, a: float) -> float:
    """I_x(a, 1/2) by its continued fraction (Abramowitz & Stegun 26.5.8); `complement` is 1 - x, unrounded."""
    if x <= 0.0:
        return 0.0
    if complement <= 0.0:
        return 1.0
    if x > (a + 1.0) / (a + 2.5):
        return 1.0 - _beta_fraction(complement, x, 0.5, a)
    return _beta_fraction(x, complement, a, 0.5)


def _beta_fraction(x: float, complement: float, a: float, b: float) -> float:
    front = math.exp(
        math.lgamma(a + b) - math.lgamma(a) - math.lgamma(b) + a * math.log(x) + b * math.log(complement)
    )
    c, d = 1.0, 1.0 - (a + b) * x / (a + 1.0)
    d = 1.0 / (d or _TINY)
    h = d
    for m in range(1, 500):
        for term in (
            m * (b - m) * x / ((a + 2 * m - 1) * (a + 2 * m)),
            -(a + m) * (a + b + m) * x / ((a + 2 * m) * (a + 2 * m + 1)),
        ):
            d = 1.0 / ((1.0 + term * d) or _TINY)
            c = (1.0 + term / c) or _TINY
            h *= c * d
        if abs(c * d - 1.0) < 1e-15:
            break
    return front * h / a
