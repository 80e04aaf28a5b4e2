"""What the explanations are held against: the fault, and the pair of fold-fault angle and transection."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from analysis.errors import SettingError
from analysis.orient import vectors
from analysis.strain.frame import Sense, signed_axis_angle_deg

if TYPE_CHECKING:
    from analysis.orient.vectors import Floats

FAULT_STRIKE_SE_DEG = 2.0
# Strikes strewn evenly over the half circle have a standard deviation of 52 degrees (180 over root 12).
_STRIKE_SE_AT_MOST_DEG = 45.0
"""How well a fault's strike is taken to be known unless said otherwise: our choice, no source."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Fault:
    """A steep fault beside the folds.

    Attributes
    ----------
    strike_deg
        Azimuth of either end of its trace, 0 to 360; only the axis counts, it is kept as 0 <= strike < 180.
    sense
        Sense of slip seen on the map, or unknown.
    zone_width_km
        Present width, across the fault, of the zone in which the folds lie; None where it is not known.
    strike_se_deg
        Standard error of the strike, degrees.

    """

    strike_deg: float
    sense: Sense = Sense.UNKNOWN
    zone_width_km: float | None = None
    strike_se_deg: float = FAULT_STRIKE_SE_DEG

    def __post_init__(self) -> None:
        strike = float(self.strike_deg)
        if not (math.isfinite(strike) and 0.0 <= strike <= 360.0):
            raise SettingError(f"{strike:g} is no azimuth", where="fault strike", expected="0 to 360 degrees")
        object.__setattr__(self, "strike_deg", math.fmod(strike, 180.0))
        try:
            object.__setattr__(self, "sense", Sense(self.sense))
        except ValueError:
            raise SettingError(
                f"no sense of slip is called {self.sense!r}",
                where="sense",
                expected="sinistral, dextral or unknown",
            ) from None
        if self.zone_width_km is not None and not (
            math.isfinite(self.zone_width_km) and self.zone_width_km > 0.0
        ):
            raise SettingError(
                f"{self.zone_width_km:g} km is no width",
                where="zone width",
                expected="more than 0 km",
                mend="Leave it out where it is not known.",
            )
        if not 0.0 <= self.strike_se_deg <= _STRIKE_SE_AT_MOST_DEG:
            raise SettingError(
                f"{self.strike_se_deg:g} is no standard error",
                where="fault strike error",
                expected=f"0 to {_STRIKE_SE_AT_MOST_DEG:g} degrees",
            )


@dataclass(frozen=True, slots=True, kw_only=True)
class FoldPair:
    """What the fold check knows of hinge trend and transection, with their joint error.

    Variances are degrees squared and infinite where something is undetermined. The error of the hinge moves
    trend and transection together (`covariance_deg2`, both clockwise positive); that of the cleavage moves
    the transection alone.

    Attributes
    ----------
    hinge_trend_deg, hinge_plunge_deg
        The hinge.
    transection_deg
        Clockwise positive; None where there is none yet, or none with a sense on the map.
    trend_variance_deg2
        Variance of the hinge's trend.
    hinge_part_deg2, cleavage_part_deg2
        The two parts of the transection's variance.
    covariance_deg2
        Covariance of trend and transection.
    df
        Degrees of freedom of the transection's variance; infinite for a known one.
    hinge_readings, cleavage_readings
        Readings that bear on the hinge (bedding, hinge lines) and on the cleavage.

    """

    hinge_trend_deg: float
    hinge_plunge_deg: float = 0.0
    transection_deg: float | None
    trend_variance_deg2: float
    hinge_part_deg2: float = 0.0
    cleavage_part_deg2: float = 0.0
    covariance_deg2: float = 0.0
    df: float = math.inf
    hinge_readings: int = 0
    cleavage_readings: int = 0

    def __post_init__(self) -> None:
        for name in ("trend_variance_deg2", "hinge_part_deg2", "cleavage_part_deg2"):
            if not getattr(self, name) >= 0.0:
                raise SettingError(
                    f"{name} {getattr(self, name)} is no variance", where=name, expected="0 or more"
                )
        if not self.df > 0.0:
            raise SettingError(f"{self.df} degrees of freedom are none", where="df", expected="more than 0")
        known = math.isfinite(self.trend_variance_deg2) and math.isfinite(self.hinge_part_deg2)
        limit = self.trend_variance_deg2 * self.hinge_part_deg2 if known else math.inf
        if not self.covariance_deg2**2 <= limit * (1.0 + 1e-9) + 1e-18:
            raise SettingError(
                f"a covariance of {self.covariance_deg2:g} is larger than the two variances allow",
                where="covariance_deg2",
                expected="at most the product of the standard errors of trend and hinge part",
            )

    @property
    def transection_se_deg(self) -> float:
        """Standard error of the transection, degrees."""
        return math.sqrt(self.hinge_part_deg2 + self.cleavage_part_deg2)


class KnownAxis(NamedTuple):
    """An axis with its error; the first three arguments of an `analysis.stats.axes.AxisFit`.

    Attributes
    ----------
    vector
        (3,), in north, east, down; its sign does not matter.
    across
        (3, 2), two directions at right angles to it, as columns.
    covariance
        (2, 2), of the axis' components along `across`, radians squared; infinite where undetermined.

    """

    vector: Floats
    across: Floats
    covariance: Floats


def pair_of_axes(
    hinge: KnownAxis,
    pole: KnownAxis | None = None,
    *,
    se_deg: float | None = None,
    df: float = math.inf,
    hinge_readings: int = 0,
    cleavage_readings: int = 0,
    signed: bool = True,
) -> FoldPair:
    """Carry the errors of hinge and cleavage pole over to hinge trend and transection.

    Parameters
    ----------
    hinge, pole
        The hinge, and the pole of the cleavage. Without a pole there is no transection.
    se_deg
        Standard error of the transection where it is known better than from these covariances alone (readings
        clustered by outcrop); all variances are scaled alike to meet it.
    df, hinge_readings, cleavage_readings
        As in `FoldPair`.
    signed
        False where the transection has no sense on the map (steep hinge, flat cleavage): the pair then has
        none.

    Notes
    -----
    First order in the errors: d(trend) = (h_n dh_e - h_e dh_n)/(h_n^2 + h_e^2) and
    d(transection) = +-(s.dh + h.ds)/cos(transection), the sign being that of up.(h x s). The variance of a
    transection is the sum of METHOD section 4, here with the covariance to the trend beside it.

    """
    h, across_h, cov_h = (np.asarray(part, dtype=float) for part in hinge)
    trend, plunge = vectors.trend_plunge_deg(h)
    level = float(h[0] ** 2 + h[1] ** 2)
    per_radian = math.degrees(1.0) ** 2
    to_trend = (h[0] * across_h[1] - h[1] * across_h[0]) / max(level, 1e-300)
    trend_variance = _form(to_trend, cov_h, to_trend) * per_radian if level > 1e-12 else math.inf
    if pole is None or not signed:
        return FoldPair(
            hinge_trend_deg=float(trend),
            hinge_plunge_deg=float(plunge),
            transection_deg=None,
            trend_variance_deg2=trend_variance,
            hinge_readings=hinge_readings,
            cleavage_readings=cleavage_readings,
        )
    s, across_s, cov_s = (np.asarray(part, dtype=float) for part in pole)
    sine = float(np.clip(h @ s, -1.0, 1.0))
    up = -float(np.cross(h, s)[2])
    sign = math.copysign(1.0, up) / max(math.sqrt(1.0 - sine * sine), 1e-9)
    to_hinge, to_pole = sign * (s @ across_h), sign * (h @ across_s)
    hinge_part = _form(to_hinge, cov_h, to_hinge) * per_radian
    cleavage_part = _form(to_pole, cov_s, to_pole) * per_radian
    covariance = _form(to_trend, cov_h, to_hinge) * per_radian
    scale = 1.0
    if se_deg is not None and math.isfinite(se_deg) and 0.0 < hinge_part + cleavage_part < math.inf:
        scale = se_deg**2 / (hinge_part + cleavage_part)
    return FoldPair(
        hinge_trend_deg=float(trend),
        hinge_plunge_deg=float(plunge),
        transection_deg=math.degrees(math.asin(sine)) * math.copysign(1.0, up),
        trend_variance_deg2=trend_variance * scale,
        hinge_part_deg2=hinge_part * scale,
        cleavage_part_deg2=cleavage_part * scale,
        covariance_deg2=covariance * scale if math.isfinite(covariance) else 0.0,
        df=df,
        hinge_readings=hinge_readings,
        cleavage_readings=cleavage_readings,
    )


def fold_fault_angle_deg(pair: FoldPair, fault: Fault) -> tuple[float, int]:
    """Fold-fault angle, and the sign (+1 sinistral, -1 dextral) of the frame it is measured in.

    With the sense known the angle runs from the fault towards the side where slip of this sense makes
    folds; it is negative for folds on the other side. With the sense unknown it is the acute angle, and the
    sign is that of the side on which the folds lie. Between -67.5 and 112.5 degrees: the two ends of that
    range are as far as an axis can be from what rotation reaches, 0 to 45.
    """
    clockwise = float(signed_axis_angle_deg(fault.strike_deg, pair.hinge_trend_deg))
    if fault.sense is Sense.UNKNOWN:
        return abs(clockwise), 1 if clockwise >= 0.0 else -1
    sign = fault.sense.sign
    angle = sign * clockwise
    return (angle + 180.0 if angle < -67.5 else angle), sign


def pair_covariance(pair: FoldPair, fault: Fault) -> Floats:
    """Covariance, (2, 2) degrees squared, of fold-fault angle and transection in the frame of the fault.

    Both change sign together where the frame is mirrored, so it holds in either; the error of the fault's
    strike moves the angle alone.
    """
    angle = pair.trend_variance_deg2 + fault.strike_se_deg**2
    shared = pair.covariance_deg2
    return np.array([[angle, shared], [shared, pair.hinge_part_deg2 + pair.cleavage_part_deg2]])


def _form(left: Floats, matrix: Floats, right: Floats) -> float:
    """Give left' M right, infinite (or zero across unlike terms) where M is infinite.

    A variance, where both are the same, is never below zero: readings without scatter leave a covariance that
    rounding makes slightly negative.
    """
    if not np.all(np.isfinite(matrix)):
        return math.inf if left is right else 0.0
    value = float(left @ matrix @ right)
    return max(value, 0.0) if left is right else value
