"""The explanations in the words and figures of the Fault leaf. Plain functions."""

# ruff: noqa: RUF001 - the page is set with true dashes and multiplication signs.

from __future__ import annotations

from typing import TYPE_CHECKING

from analysis.strain.curves import fault_curves
from analysis.strain.explanations import (
    LATE_CLEAVAGE,
    PARTITIONED,
    ROTATION,
    UNPARTITIONED,
    ExplainSettings,
    explain,
)
from analysis.strain.frame import Sense, signed_axis_angle_deg
from analysis.strain.observed import Fault
from analysis.strain.ofcheck import pair_of_check
from analysis.strain.wording import headline, two_digits
from fieldapp.states import ExplanationLine, FaultState, Told

if TYPE_CHECKING:
    from analysis.fold.records import FoldCheck
    from analysis.strain.curves import FaultCurves
    from analysis.strain.explanations import Explanation, FaultCheck
    from analysis.strain.observed import FoldPair
    from fieldapp.states import FaultInput

__all__ = ["pair_of_check", "state_of"]

AREAS = "Both cover an area each and fit more easily, so the likelihood ratio leaves them out."
_KINDS = ("rotation", "partitioned", "transpression", "late")


def state_of(entered: FaultInput, pair: FoldPair, check: FoldCheck) -> FaultState:
    """Hold the explanations against the pair and put what comes of it into words; about 3 ms."""
    fault = Fault(
        strike_deg=entered.strike_deg or 0.0,
        sense=Sense(entered.sense),
        zone_width_km=None if entered.zone_width_m is None else entered.zone_width_m / 1000.0,
    )
    limits = ExplainSettings(
        confidence=check.settings.confidence, forecast_limit=check.settings.forecast_limit
    )
    told = explain(fault, pair, limits, fold=check.fold)
    if told.fold_fault_angle_deg is None:  # no trend: nothing to draw, and no explanation is named
        return FaultState(ask=" ".join(told.because))
    curves = fault_curves(pair, fault, confidence=limits.confidence)
    return FaultState(
        headline=headline(told),
        angle=_angle(told),
        figures=(_ratio(told), _displacement(told)),
        curves=curves,
        confidence=limits.confidence,
        zone_width_km=fault.zone_width_km,
        lines=_lines(told),
        note=f"{_drawn(curves)} {AREAS}",
        because=told.because,
        cautions=told.cautions,
    )


def _angle(told: FaultCheck) -> str:
    trend_deg = told.pair.hinge_trend_deg
    turned = float(signed_axis_angle_deg(told.fault.strike_deg, trend_deg))
    way = "" if round(abs(turned)) in (0, 90) else " clockwise" if turned > 0.0 else " anticlockwise"
    return f"Hinge {round(trend_deg) % 360:03d}°, {abs(turned):.0f}°{way} from the fault in plan"


def _ratio(told: FaultCheck) -> Told:
    name, ratio = "likelihood ratio", told.likelihood_ratio
    if ratio is None:
        return Told(name, "–", "comes with the first transection")
    favoured = "rotation" if ratio > 1.0 else "partitioned transpression"
    odds = max(ratio, 1.0 / max(ratio, 1e-300))
    figure = "over 1000" if odds > 1000.0 else two_digits(odds)
    if all(one.fits is False for one in told.explanations[:2]):
        but = ", but neither fits"
    elif told.can_be_told_apart:
        but = ""
    elif figure == "1":
        return Told(name, figure, "to 1: neither is favoured")
    else:
        but = ", not decisive"
    return Told(name, figure, f"to 1 for {favoured}{but}")


def _displacement(told: FaultCheck) -> Told:
    name, gamma, width = "rotation would need", told.explanations[0].gamma, told.fault.zone_width_km
    low, high = told.gamma_range or (None, None)
    unit = "times the zone width" if width is None else "km along the fault"
    times = 1.0 if width is None else width
    if gamma is None:
        least = f"at least {two_digits(low * times)} {unit}" if low else ""
        return Told(name, "endless shear", least)
    if gamma == 0.0:
        return Told(name, "no shear", "its folds start at 45° from the fault")
    most = "or more" if high is None else f"to {two_digits(high * times)}"
    spread = f"{two_digits((low or 0.0) * times)} {most}"
    figure = f"{two_digits(gamma)} × width" if width is None else f"{two_digits(gamma * width)} km"
    return Told(name, figure, f"{spread} {unit}")


def _lines(told: FaultCheck) -> tuple[ExplanationLine, ...]:
    names = (ROTATION, PARTITIONED, UNPARTITIONED, LATE_CLEAVAGE)
    return tuple(
        ExplanationLine(kind, name[:1].upper() + name[1:], _words(kind, told.explanation(name)))
        for kind, name in zip(_KINDS, names, strict=True)
    )


def _drawn(curves: FaultCurves) -> str:
    """Say which curves of the two areas are drawn."""
    angles = " and ".join(f"{angle:g}°" for angle, _ in curves.transpression)
    shares = " and ".join(f"{100.0 * share:g}%" for share, _ in curves.late)
    return (
        f"Transpression (T) is drawn for convergence angles of {angles}, late cleavage for {shares} of the shear"
        " past when it began."
    )


def _words(kind: str, one: Explanation | None) -> str:
    if one is None:
        return "nothing to hold against it yet"
    turned = one.predicted_transection_deg
    way = "" if round(abs(turned), 1) == 0.0 else " clockwise" if turned > 0.0 else " anticlockwise"
    predicted = f"{abs(turned):.1f}°{way}" if way else "no transection"
    if kind == "rotation":
        parts = [f"predicts {predicted} at this angle"]
    elif kind == "partitioned":
        parts = ["predicts no transection at any angle"]
    else:
        parts = [f"comes nearest with {predicted}"]
    if one.convergence_deg is not None:
        parts.append(f"convergence angle {one.convergence_deg:.0f}°")
    if one.gamma is not None:
        parts.append(f"shear strain {two_digits(one.gamma)}")
        if one.gamma_late is not None:
            parts.append(f"cleavage from the last {two_digits(one.gamma_late)} of it")
        if one.displacement_km is not None:
            parts.append(f"{two_digits(one.displacement_km)} km along the fault")
    elif kind != "partitioned":
        parts.append("shear without end")
    if one.fits is not None:
        parts.append("fits" if one.fits else "does not fit")
    return ", ".join(parts)
