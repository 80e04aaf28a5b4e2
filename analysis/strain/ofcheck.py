"""From the running check of a fold to the pair that explanations are held against."""

from __future__ import annotations

import dataclasses
import math
from typing import TYPE_CHECKING

import numpy as np

from analysis.orient.vectors import pole_vector, trend_plunge_deg
from analysis.strain.observed import FoldPair, KnownAxis, pair_of_axes

if TYPE_CHECKING:
    from analysis.fold.records import FoldCheck, WatchNumbers
    from analysis.orient.vectors import Floats


def pair_of_check(check: FoldCheck) -> FoldPair | None:
    """Fold-fault evidence of a check; None while it has no hinge.

    The standard error is the one the check reports, or that between outcrops where these scatter more than
    their readings. A transection from intersection lines alone takes the cleavage to be vertical, as the
    check does; one without a sense on the map is left out.
    """
    if check.hinge is None:
        return None
    fit = check.hinge.fit
    hinge = KnownAxis(check.hinge.vector, fit.across, fit.covariance)
    pair = dataclasses.replace(
        _pair(check, hinge, check.numbers),
        hinge_readings=check.readings.bedding + check.readings.hinge,
        cleavage_readings=check.readings.cleavage + check.readings.intersection,
    )
    return pair if pair.transection_deg is None else dataclasses.replace(pair, df=_error(check)[1])


def _pair(check: FoldCheck, hinge: KnownAxis, numbers: WatchNumbers | None) -> FoldPair:
    if check.transection_deg is None or numbers is None or check.sense == "unsigned":
        return pair_of_axes(hinge)
    se_deg = _error(check)[0]
    if check.cleavage is not None and math.isfinite(se_deg):
        cleavage = check.cleavage.fit
        return pair_of_axes(
            hinge, KnownAxis(check.cleavage.vector, cleavage.across, cleavage.covariance), se_deg=se_deg
        )
    steep = KnownAxis(_steep_pole(hinge.vector, check.transection_deg), np.eye(3)[:, :2], np.zeros((2, 2)))
    pair = pair_of_axes(hinge, steep)
    share = numbers.hinge_variance / (numbers.hinge_variance + numbers.cleavage_variance)
    if not (math.isfinite(se_deg) and math.isfinite(share) and 0.0 < pair.hinge_part_deg2 < math.inf):
        return dataclasses.replace(
            pair, transection_deg=check.transection_deg, covariance_deg2=0.0, cleavage_part_deg2=math.inf
        )
    # The vertical plane gives the correlation of trend and transection; the check gives the size of the parts.
    scale = share * se_deg**2 / pair.hinge_part_deg2
    return dataclasses.replace(
        pair,
        transection_deg=check.transection_deg,
        hinge_part_deg2=share * se_deg**2,
        cleavage_part_deg2=(1.0 - share) * se_deg**2,
        covariance_deg2=pair.covariance_deg2 * math.sqrt(scale),
    )


def _error(check: FoldCheck) -> tuple[float, float]:
    """Standard error of the transection, degrees, and its degrees of freedom; infinite while unknown."""
    se_deg, df = check.se_deg, check.df
    if check.numbers is not None and check.numbers.by_outcrop:
        se_deg, df = math.sqrt(check.numbers.variance), check.numbers.freedom
    if se_deg is None or df is None or not df > 0.0:
        return math.inf, 1.0
    return se_deg, df


def _steep_pole(hinge: Floats, transection_deg: float) -> Floats:
    """Pole of the vertical plane that lies at this signed angle to the hinge."""
    trend, plunge = (math.radians(float(angle)) for angle in trend_plunge_deg(hinge))
    turned = math.sin(math.radians(transection_deg)) / max(math.cos(plunge), 1e-9)
    strike_deg = math.degrees(trend + math.asin(max(-1.0, min(1.0, turned))))
    return pole_vector(strike_deg, 90.0)
