"""An interval that stays valid while it is watched after every reading.

An estimate that wanders like Brownian motion B in information time t is watched from time 1 on. Robbins (1970)
gives the exact probability that it ever leaves a boundary that grows with the logarithm of t:

    P(|B(t)| >= sqrt(t) sqrt(a^2 + ln t) for some t >= 1) = 2 [1 - Phi(a) + a phi(a)]

which is the tail of chi-square with 3 degrees of freedom at a^2; a is set so that this is 1 - confidence. That is
for looks without a pause. Looks come after single readings, and between them nothing can be seen to leave: of the
5% at 95% confidence Robbins' boundary uses 3.7%. The rest buys a boundary that spends more of its error where folds
settle, within ten times the information of the first look, and less of it later:

    sqrt(a^2 + 0.3 (ln t)^2)

With a known error it is left by 3.5% of paths up to 60 readings a stream and by 4.2% however long they are
watched, and by less than 1 - confidence at any confidence (recursion over looks; tests/analysis/stats). It needs up to
a tenth fewer readings. t is the information held now over the information at the first look; the standard error is
an estimate, so the multiplier is widened to Student's t of the same tail (Wallace 1959). DEVELOPERS.md has the
measurements that led to this boundary and what else was tried.
"""

from __future__ import annotations

import math
from functools import lru_cache
from statistics import NormalDist
from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.errors import SettingError
from analysis.stats.quantiles import student_multiplier

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats

_NORMAL: Final = NormalDist()
# How the squared multiplier grows with the square of ln t. Less would spend the error sooner and use up more than
# there is; more would save error for looks that hardly any fold comes to.
_GROWTH: Final = 0.3


@lru_cache(maxsize=64)
def first_look_multiplier(confidence: float) -> float:
    """Give a, the multiplier at the first look: 2 [1 - Phi(a) + a phi(a)] = 1 - confidence (Robbins 1970)."""
    if not 0.0 < confidence < 1.0:
        raise SettingError(
            f"a confidence of {confidence:g} is none", where="confidence", expected="a share such as 0.95"
        )
    alpha = 1.0 - confidence
    low, high = 0.0, 40.0
    for _ in range(200):
        a = 0.5 * (low + high)
        if 2.0 * (_NORMAL.cdf(-a) + a * _NORMAL.pdf(a)) > alpha:
            low = a
        else:
            high = a
    return high


def watched_multiplier(information: npt.ArrayLike, freedom: npt.ArrayLike, confidence: float) -> Floats:
    """Multiplier (...) of the standard error, valid at all looks together.

    `information` (...) is what is held now over what was held at the first look, at least 1; `freedom` (...)
    the degrees of freedom of the standard error.
    """
    grown = np.log(np.maximum(np.asarray(information, dtype=float), 1.0))
    first = first_look_multiplier(confidence)
    return student_multiplier(np.sqrt(first**2 + _GROWTH * grown**2), freedom)


def equivalence_multiplier(
    variance: npt.ArrayLike, information: npt.ArrayLike, freedom: npt.ArrayLike, margin: float, alpha: float
) -> Floats:
    """Multiplier (...) for two one-sided tests at level `alpha` (Schuirmann 1987) that an effect is within a margin.

    The interval is the watched one at confidence 1 - 2 alpha, with its clock started late: while
    a sqrt(variance) exceeds the margin no interval fits inside it, so nothing can be concluded, and looking
    costs nothing. `variance` and `margin` are in the same unit (squared).
    """
    a = first_look_multiplier(1.0 - 2.0 * alpha)
    could_first = (margin / a) ** 2
    late = np.minimum(np.asarray(information, dtype=float), could_first / np.asarray(variance, dtype=float))
    return watched_multiplier(late, freedom, 1.0 - 2.0 * alpha)


def normal_mixture_half_width(variance: npt.ArrayLike, tau: float, alpha: float) -> Floats:
    """Half-width (...) of Robbins' normal-mixture sequence, for comparison: not used for verdicts.

    sqrt(V (1 + V/tau^2) (2 ln(1/alpha) + ln(1 + tau^2/V))) (Robbins 1970; Waudby-Smith et al. 2021-24,
    arXiv 2103.06476).
    """
    v = np.asarray(variance, dtype=float)
    return np.sqrt(v * (1.0 + v / tau**2) * (2.0 * math.log(1.0 / alpha) + np.log1p(tau**2 / v)))
