"""The explanations of a fold beside a fault, held against what was read: one call, one frozen answer.

Rotation in simple shear and partitioned transpression are compared: each predicts one curve in the plane of
fold-fault angle against transection (partitioned: no transection at any angle). Unpartitioned transpression
and late cleavage cover areas of that plane; they fit more easily, so they are reported but never weighed
against a curve.
"""

from __future__ import annotations

import dataclasses
import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.errors import SettingError
from analysis.stats.quantiles import f2_quantile, t_quantile
from analysis.strain import shear, wording
from analysis.strain.cautions import CAUTIONS
from analysis.strain.frame import Sense
from analysis.strain.misfit import (
    NO_TRANSECTION,
    Metric,
    nearest_late_cleavage,
    nearest_transpression,
    rotation_curve,
)
from analysis.strain.observed import Fault, FoldPair, fold_fault_angle_deg, pair_covariance
from analysis.strain.separation import (
    ReadingsToSeparate,
    Separation,
    needed_se,
    odds_needed,
    readings_to_separate,
    resolved_se,
    separation,
)

if TYPE_CHECKING:
    from analysis.orient.vectors import Floats

ROTATION: Final = "rotation in simple shear"
PARTITIONED: Final = "partitioned transpression"
UNPARTITIONED: Final = "unpartitioned transpression"
LATE_CLEAVAGE: Final = "late cleavage"
_LARGEST_EXPONENT = 600.0  # the ratio stays a finite number
_ENDLESS_DEG = 0.05  # a fit that puts the hinge this near to the fault asks for endless shear


@dataclass(frozen=True, slots=True, kw_only=True)
class ExplainSettings:
    """What the user may set.

    Attributes
    ----------
    confidence
        Of intervals, of the 95% in "points the right way", and of what counts as fitting; 0.5 to 0.9999, so that every
        confidence of a check is one here.
    forecast_limit
        Readings of hinge, and of cleavage, beyond which a comparison counts as out of reach.
    floor_deg
        Difference of predictions, in degrees, below which no number of readings is held to tell them apart:
        a compass is read to a degree, and a common error of that size does not average out (a choice of this
        project, after common practice; no source).

    """

    confidence: float = 0.95
    forecast_limit: int = 200
    floor_deg: float = 1.0

    def __post_init__(self) -> None:
        if not 0.5 <= self.confidence <= 0.9999:
            raise SettingError(
                f"confidence {self.confidence:g} is out of range",
                where="confidence",
                expected="0.5 to 0.9999",
            )
        if not self.forecast_limit >= 1:
            raise SettingError(
                f"a forecast limit of {self.forecast_limit} is none",
                where="forecast limit",
                expected="1 or more",
            )
        if not self.floor_deg >= 0.0:
            raise SettingError(
                f"a floor of {self.floor_deg:g} is none", where="floor", expected="0 or more degrees"
            )


@dataclass(frozen=True, slots=True, kw_only=True)
class Explanation:
    """One explanation, fitted.

    Attributes
    ----------
    name
        In the trade's words.
    gamma
        Shear strain along the fault that it needs; None where it needs none or an endless one.
    displacement_km
        Displacement along the fault across the zone's present width; None without gamma or width.
    predicted_transection_deg
        Clockwise positive; for rotation at the fold-fault angle seen, for the others at the nearest fit.
    loglik
        Log likelihood of the pair (per degree squared) at the nearest fit; None without a transection.
    fits
        Whether the pair lies within the confidence region of what it predicts; None without a transection.
    convergence_deg
        Convergence angle of the fit (unpartitioned transpression).
    gamma_late
        Shear strain that cleavage recorded (late cleavage).

    """

    name: str
    gamma: float | None
    displacement_km: float | None
    predicted_transection_deg: float
    loglik: float | None
    fits: bool | None
    convergence_deg: float | None = None
    gamma_late: float | None = None

    def to_json(self) -> dict[str, object]:
        """Give the five keys of the command's output."""
        return {
            "name": self.name,
            "gamma": _rounded(self.gamma),
            "displacement_km": _rounded(self.displacement_km),
            "predicted_transection_deg": _rounded(self.predicted_transection_deg),
            "loglik": _rounded(self.loglik),
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class FaultCheck:
    """What the folds can and cannot say about the fault.

    Attributes
    ----------
    fold
        Name of the fold.
    fault, pair
        What was compared.
    sign
        +1 where angles run clockwise from the fault (sinistral), -1 where anticlockwise (dextral).
    fold_fault_angle_deg, fold_fault_se_deg
        Fold-fault angle, positive on the side where the fault's sense makes folds (acute where the sense is
        unknown), and its standard error with that of the fault's strike; None where the hinge has no trend.
    transection_deg, se_deg
        Clockwise positive; None while there is none.
    explanations
        Rotation, partitioned, unpartitioned, late cleavage, in this order; empty without a fold-fault angle.
    gamma_range
        Lowest and highest shear strain of rotation at the confidence set; None where endless.
    likelihood_ratio
        Rotation over partitioned transpression: above 1 the pair favours rotation.
    difference_deg
        By how much the two predictions differ here (degrees of transection, or of fold-fault angle where that
        lies beyond rotation's reach).
    separation_se, needed_se
        That difference in standard errors, and the separation at which a decisive likelihood ratio for the
        right explanation can be counted on (see `analysis.strain.separation`).
    readings_to_separate
        Further readings that would bring it there: 0 where they can be told apart already, None where no
        number would, or none within the forecast limit.
    more
        The same by stream.
    can_be_told_apart
        Whether the readings at hand tell the two apart, by the three rules of `analysis.strain.separation`.
    strike_in_the_way
        Whether readings would tell them apart if only the fault's strike were known better.
    sense_hint
        Sense of shear that the transection hints at, under the assumptions in `cautions`.
    because, cautions
        Sentences for the reader. The cautions belong wherever an explanation is named.

    """

    fold: str
    fault: Fault
    pair: FoldPair
    sign: int
    fold_fault_angle_deg: float | None
    fold_fault_se_deg: float | None
    transection_deg: float | None
    se_deg: float | None
    explanations: tuple[Explanation, ...]
    gamma_range: tuple[float | None, float | None] | None
    likelihood_ratio: float | None
    difference_deg: float | None
    separation_se: float | None
    needed_se: float | None
    readings_to_separate: int | None
    more: ReadingsToSeparate | None
    can_be_told_apart: bool
    strike_in_the_way: bool
    sense_hint: Sense
    because: tuple[str, ...]
    cautions: tuple[str, ...] = CAUTIONS

    def explanation(self, name: str) -> Explanation | None:
        """Find an explanation by its name."""
        return next((each for each in self.explanations if each.name == name), None)

    def to_json(self) -> dict[str, object]:
        """Give the keys of `hingewise explain --json`; every number is finite or null."""
        return {
            "fold": self.fold,
            "fold_fault_angle_deg": _rounded(self.fold_fault_angle_deg),
            "fold_fault_se_deg": _rounded(self.fold_fault_se_deg),
            "transection_deg": _rounded(self.transection_deg),
            "se_deg": _rounded(self.se_deg),
            "explanations": [each.to_json() for each in self.explanations],
            "likelihood_ratio": None
            if self.likelihood_ratio is None
            else float(f"{self.likelihood_ratio:.6g}"),
            "separation_se": _rounded(self.separation_se),
            "readings_to_separate": self.readings_to_separate,
            "can_be_told_apart": self.can_be_told_apart,
            "because": list(self.because),
            "cautions": list(self.cautions),
        }


_DEFAULTS: Final = ExplainSettings()


def explain(
    fault: Fault, pair: FoldPair, settings: ExplainSettings = _DEFAULTS, *, fold: str = ""
) -> FaultCheck:
    """Hold the explanations against the pair of fold-fault angle and transection.

    About a millisecond, whatever the number of readings. A pair without a transection still gives the
    fold-fault angle and what rotation would need; one without a trend (vertical hinge) gives the reason.
    """
    angle, sign = fold_fault_angle_deg(pair, fault)
    covariance = pair_covariance(pair, fault)
    angle_se = math.sqrt(float(covariance[0, 0]))
    has_angle = math.isfinite(angle_se)
    compared = has_angle and pair.transection_deg is not None and math.isfinite(pair.transection_se_deg)
    datum = np.array([angle, sign * (pair.transection_deg or 0.0)])
    metric = Metric.of(covariance) if compared else None
    explanations = (
        _fitted(metric, datum, sign, pair=pair, fault=fault, settings=settings) if has_angle else ()
    )
    ratio: float | None = None
    apart: Separation | None = None
    more: ReadingsToSeparate | None = None
    needed: float | None = None
    told = strike_in_the_way = False
    if metric is not None:
        ratio = _ratio(explanations[0], explanations[1])
        needed = needed_se(settings.confidence, pair.df)
        apart = separation(angle, covariance)
        told = (
            apart.difference_deg >= settings.floor_deg
            and apart.standard_errors >= resolved_se(settings.confidence, pair.df)
            and max(ratio or 1.0, 1.0 / (ratio or 1.0)) >= odds_needed(settings.confidence)
        )
        more = ReadingsToSeparate(0, 0, 0) if told else readings_to_separate(angle, pair, fault, settings)
        if more is None and fault.strike_se_deg > 0.0:
            exact = dataclasses.replace(fault, strike_se_deg=0.0)
            strike_in_the_way = readings_to_separate(angle, pair, exact, settings) is not None
    check = FaultCheck(
        fold=fold,
        fault=fault,
        pair=pair,
        sign=sign,
        fold_fault_angle_deg=angle if has_angle else None,
        fold_fault_se_deg=angle_se if has_angle else None,
        transection_deg=pair.transection_deg,
        se_deg=pair.transection_se_deg if compared else None,
        explanations=explanations,
        gamma_range=_gamma_range(angle, angle_se, settings, pair.df) if has_angle else None,
        likelihood_ratio=ratio,
        difference_deg=None if apart is None else apart.difference_deg,
        separation_se=None if apart is None else apart.standard_errors,
        needed_se=needed,
        readings_to_separate=None if more is None else more.total,
        more=more,
        can_be_told_apart=told,
        strike_in_the_way=strike_in_the_way,
        sense_hint=_sense_hint(pair, settings) if compared else Sense.UNKNOWN,
        because=(),
    )
    return wording.with_reasons(check, settings)


def _fitted(
    metric: Metric | None,
    datum: Floats,
    sign: int,
    *,
    pair: FoldPair,
    fault: Fault,
    settings: ExplainSettings,
) -> tuple[Explanation, ...]:
    angle = float(datum[0])
    gamma = _finite(max(float(shear.gamma_of_angle(angle)), 0.0))
    limit = -2.0 * math.log1p(-settings.confidence)
    if math.isfinite(pair.df):
        limit = 2.0 * float(f2_quantile(settings.confidence, pair.df))

    def build(
        name: str,
        needs: tuple[float | None, float | None],
        predicted: float,
        misfit: float,
        *,
        convergence_deg: float | None = None,
        gamma_late: float | None = None,
    ) -> Explanation:
        gamma, offset = needs
        known = offset is not None and fault.zone_width_km is not None
        return Explanation(
            name=name,
            gamma=gamma,
            displacement_km=_finite((offset or 0.0) * (fault.zone_width_km or 0.0)) if known else None,
            predicted_transection_deg=sign * predicted + 0.0,
            loglik=None if metric is None else metric.loglik(misfit, pair.df),
            fits=None if metric is None else misfit <= limit,
            convergence_deg=convergence_deg,
            gamma_late=gamma_late,
        )

    rotation = float(shear.rotation_transection_deg(angle))
    if metric is None:
        return (
            build(ROTATION, (gamma, gamma), rotation, 0.0),
            build(PARTITIONED, (None, None), 0.0, 0.0),
        )
    by_rotation = metric.nearest(rotation_curve(), datum)
    by_both, convergence, strain = nearest_transpression(metric, datum)
    by_late = nearest_late_cleavage(metric, datum)
    by_partitioned = metric.nearest(NO_TRANSECTION, datum)
    endless = (None, None)
    late_angle, late_transection = float(by_late.place[0]), float(by_late.place[1])
    late_total, late_part = math.inf, None
    if late_angle >= _ENDLESS_DEG:
        late_total = max(float(shear.gamma_of_angle(late_angle)), 0.0)
        late_part = max(float(shear.late_shear_of_pair(late_angle, late_transection)), 0.0)
    along = strain * math.cos(math.radians(convergence))
    offset = float(shear.offset_per_width(convergence, strain))
    return (
        build(ROTATION, (gamma, gamma), rotation, by_rotation.misfit),
        build(PARTITIONED, (None, None), 0.0, by_partitioned.misfit),
        build(
            UNPARTITIONED,
            (along, offset) if float(by_both.place[0]) >= _ENDLESS_DEG else endless,
            float(by_both.place[1]),
            by_both.misfit,
            convergence_deg=convergence,
        ),
        build(
            LATE_CLEAVAGE,
            (late_total, late_total) if math.isfinite(late_total) else endless,
            late_transection,
            by_late.misfit,
            gamma_late=late_part,
        ),
    )


def _ratio(rotation: Explanation, partitioned: Explanation) -> float | None:
    if rotation.loglik is None or partitioned.loglik is None:
        return None
    exponent = rotation.loglik - partitioned.loglik
    return math.exp(max(-_LARGEST_EXPONENT, min(_LARGEST_EXPONENT, exponent)))


def _gamma_range(
    angle: float, se: float, settings: ExplainSettings, df: float
) -> tuple[float | None, float | None]:
    reach = t_quantile(0.5 + 0.5 * settings.confidence, df) * se
    low, high = (max(float(shear.gamma_of_angle(angle + side * reach)), 0.0) for side in (1.0, -1.0))
    return _finite(low), _finite(high)


def _sense_hint(pair: FoldPair, settings: ExplainSettings) -> Sense:
    reach = t_quantile(0.5 + 0.5 * settings.confidence, pair.df) * pair.transection_se_deg
    if pair.transection_deg is None or abs(pair.transection_deg) <= reach:
        return Sense.UNKNOWN
    return Sense.SINISTRAL if pair.transection_deg > 0.0 else Sense.DEXTRAL


def _rounded(value: float | None) -> float | None:
    # A millionth is below what any reading tells and above what two machines differ by.
    return None if value is None else round(value, 6) + 0.0


def _finite(value: float) -> float | None:
    return value if math.isfinite(value) else None
