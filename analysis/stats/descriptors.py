"""Numbers that describe the shape of a cloud of axes or directions: no verdict hangs on them."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from analysis.errors import TooFewReadingsError
from analysis.orient.vectors import axis_angle_deg

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats


class Shape(NamedTuple):
    """Shape of a cloud of axes from its eigenvalues t1 >= t2 >= t3; each field has shape (...).

    `girdle_to_cluster` and `strength` are K = ln(t1/t2)/ln(t2/t3) and C = ln(t1/t3) of Woodcock (1977): K above
    1 is a cluster, below 1 a girdle. `point`, `girdle` and `random` are P = t1 - t2, G = 2(t2 - t3) and R = 3 t3,
    of eigenvalues that sum to one (Vollmer 1990); they sum to one.
    """

    girdle_to_cluster: Floats
    strength: Floats
    point: Floats
    girdle: Floats
    random: Floats


def shape(eigenvalues: npt.ArrayLike) -> Shape:
    """Describe clouds of axes by their eigenvalues, shape (..., 3), in any order and of any positive sum.

    K and C are infinite for a perfect cluster or girdle, and K is nan for three equal eigenvalues.
    """
    values = np.sort(np.asarray(eigenvalues, dtype=float), axis=-1)[..., ::-1]
    values = np.maximum(values, 0.0)
    t1, t2, t3 = np.moveaxis(values / values.sum(axis=-1, keepdims=True), -1, 0)
    with np.errstate(divide="ignore", invalid="ignore"):
        k = np.log(t1 / t2) / np.log(t2 / t3)
        c = np.log(t1 / t3)
    return Shape(k, c, t1 - t2, 2.0 * (t2 - t3), 3.0 * t3)


def share_near_girdle(poles: npt.ArrayLike, axis: npt.ArrayLike, within_deg: float) -> float:
    """Share, 0 to 1, of poles (n, 3) within an angle, degrees, of the girdle about an axis (3,).

    A fold is called cylindrical where bedding poles lie within 10 degrees of the girdle and subcylindrical
    within 20 (Ramsay & Huber 1987, from memory). Raises TooFewReadingsError without poles.
    """
    p = np.asarray(poles, dtype=float)
    if not len(p):
        raise TooFewReadingsError(
            "no poles have no share near a girdle", expected="at least one bedding reading"
        )
    off = 90.0 - axis_angle_deg(p, np.asarray(axis, dtype=float))
    return float(np.mean(off <= within_deg))


class FisherMean(NamedTuple):
    """Mean of directions (not axes), Fisher (1953).

    `mean` (3,) is a unit vector, `resultant` its length R before scaling, `precision` k = (n - 1)/(n - R), which
    is not the maximum-likelihood concentration, and `alpha95_deg` the half-angle of the 95% cone.
    """

    mean: Floats
    resultant: float
    precision: float
    alpha95_deg: float


def fisher_mean(directions: npt.ArrayLike) -> FisherMean:
    """Mean of n >= 2 directions, shape (n, 3), with Fisher's (1953) precision and cone of confidence.

    cos(alpha95) = 1 - (n - R)/R [20^(1/(n-1)) - 1]. Raises TooFewReadingsError for fewer than two.
    """
    d = np.asarray(directions, dtype=float)
    n = len(d)
    if n < 2:
        raise TooFewReadingsError(
            f"{n} direction{'' if n == 1 else 's'} show no scatter", expected="at least two"
        )
    total = d.sum(axis=0)
    length = float(np.linalg.norm(total))
    with np.errstate(divide="ignore"):
        precision = float(np.divide(n - 1.0, n - length))
    cosine = 1.0 - (n - length) / length * (20.0 ** (1.0 / (n - 1.0)) - 1.0) if length > 0.0 else -1.0
    return FisherMean(
        total / (length or 1.0), length, precision, float(np.degrees(np.arccos(np.clip(cosine, -1, 1))))
    )
