"""The reasons of a fault check as sentences, in the trade's words."""

from __future__ import annotations

import dataclasses
from typing import TYPE_CHECKING

from analysis.strain import shear
from analysis.strain.frame import Sense

if TYPE_CHECKING:
    from collections.abc import Iterator

    from analysis.strain.explanations import ExplainSettings, FaultCheck

STEEP_HINGE_DEG = 30.0
"""Plunge beyond which the curves, drawn for level hinges, are only a guide: a choice of this project."""
_OUTSIDE_SE = 2.0


def with_reasons(check: FaultCheck, settings: ExplainSettings) -> FaultCheck:
    """Give the check with its sentences filled in."""
    return dataclasses.replace(check, because=tuple(_reasons(check, settings)))


def headline(check: FaultCheck) -> str:
    """The one sentence to put first: can the two be told apart, and if not, what can tell."""
    if check.fold_fault_angle_deg is None:
        return "The hinge has no trend yet that could be held against the fault."
    if check.likelihood_ratio is None:
        return "No transection yet: rotation and partitioning cannot be compared."
    if _neither_fits(check):
        return "Neither rotation nor partitioned transpression fits."
    if check.can_be_told_apart:
        favoured = "rotation" if check.likelihood_ratio > 1.0 else "partitioned transpression"
        return f"The readings favour {favoured}, {_odds(check.likelihood_ratio)}."
    if check.readings_to_separate is None:
        return "Rotation and partitioned transpression cannot be told apart here by their transection."
    return (
        f"Not yet told apart: about {check.readings_to_separate} more readings should separate rotation from"
        " partitioned transpression."
    )


def _reasons(check: FaultCheck, settings: ExplainSettings) -> Iterator[str]:
    if check.fold_fault_angle_deg is None or check.fold_fault_se_deg is None:
        yield "The hinge is too steep, or too loose, to have a trend that could be held against the fault."
        return
    yield from _angle(check, check.fold_fault_angle_deg, check.fold_fault_se_deg)
    yield from _rotation(check)
    if check.likelihood_ratio is None:
        yield (
            "There is no transection with a sense on the map yet: what rotation needs is shown, but"
            " nothing can be compared."
        )
        return
    yield from _comparison(check, settings)
    yield from _others(check)
    yield from _hint(check)


def _angle(check: FaultCheck, angle: float, se: float) -> Iterator[str]:
    side = "clockwise" if (check.sign > 0) == (angle >= 0.0) else "anticlockwise"
    acute = abs(angle) if abs(angle) <= 90.0 else 180.0 - abs(angle)
    if abs(angle) > 90.0:
        side = "anticlockwise" if side == "clockwise" else "clockwise"
    yield (
        f"The folds trend {acute:.0f}° {side} of the fault (standard error {se:.1f}°, with"
        f" {check.fault.strike_se_deg:g}° for the fault's strike)."
    )
    if check.fault.sense is Sense.UNKNOWN:
        sense = Sense.SINISTRAL if check.sign > 0 else Sense.DEXTRAL
        yield f"The sense of slip is not given; rotation is taken as {sense}: its folds lie on this side."
    elif angle < -_OUTSIDE_SE * se or angle > 90.0:
        yield f"They lie on the side where {check.fault.sense} slip does not put folds."
    if check.pair.hinge_plunge_deg > STEEP_HINGE_DEG:
        yield (
            f"The curves hold for level hinges; these plunge {check.pair.hinge_plunge_deg:.0f}°, so take"
            " them as a guide."
        )


def _rotation(check: FaultCheck) -> Iterator[str]:
    rotation = check.explanations[0]
    angle, se = check.fold_fault_angle_deg or 0.0, check.fold_fault_se_deg or 0.0
    if angle > shear.START_ANGLE_DEG:
        near = angle <= shear.START_ANGLE_DEG + _OUTSIDE_SE * se
        yield (
            "Folds that start at 45° can lie here only if shear hardly turned them."
            if near
            else "Folds that start at 45° cannot lie this far from the fault by rotation in simple shear."
        )
        return
    if rotation.gamma is None:
        least = (check.gamma_range or (None, None))[0]
        text = "Shear turns folds towards the fault but never brings them to it: rotation needs endless shear"
        if least:
            width = check.fault.zone_width_km
            along = f", {two_digits(least * width)} km along the fault" if width is not None else ""
            text += f" (a shear strain of at least {two_digits(least)} within the errors{along})"
        yield text + "."
        return
    low, high = check.gamma_range or (0.0, None)
    needs = f"Rotation in simple shear needs a shear strain of {two_digits(rotation.gamma)} ({_spread(low, high)})"
    width = check.fault.zone_width_km
    if rotation.displacement_km is not None and width is not None:
        most = _spread((low or 0.0) * width, None if high is None else high * width, " km")
        needs += f": {two_digits(rotation.displacement_km)} km along the fault over a zone {width:g} km wide ({most})"
    yield needs + "."


def _comparison(check: FaultCheck, settings: ExplainSettings) -> Iterator[str]:
    rotation = check.explanations[0]
    ratio, apart, needed = check.likelihood_ratio or 0.0, check.separation_se or 0.0, check.needed_se or 0.0
    if _within_reach(check):
        yield (
            f"Here rotation predicts a transection of {abs(rotation.predicted_transection_deg):.1f}°"
            f"{_turn(rotation.predicted_transection_deg)}, partitioned transpression none: the two are"
            f" {apart:.1f} standard errors apart, and {needed:.1f} can be counted on to decide."
        )
    else:
        yield (
            f"The angle lies {check.difference_deg or 0.0:.1f}° outside what rotation reaches, 0 to 45°:"
            f" {apart:.1f} standard errors, and {needed:.1f} can be counted on to decide."
        )
    favoured = "rotation" if ratio > 1.0 else "partitioned transpression"
    if _neither_fits(check):
        yield "Neither of the two fits the readings."
    elif check.can_be_told_apart:
        yield f"Of the two the readings favour {favoured}, {_odds(ratio)}."
    else:
        yield from _undecided(check, settings, f"{_odds(ratio)} for {favoured}")


def _undecided(check: FaultCheck, settings: ExplainSettings, odds: str) -> Iterator[str]:
    if (check.difference_deg or 0.0) < settings.floor_deg:
        yield (
            f"They differ by less than the {settings.floor_deg:g}° to which a compass can be trusted: no"
            " number of readings tells them apart."
        )
        yield _displacement(check)
        return
    yield f"The likelihood ratio, {odds}, does not decide between them."
    if check.more is not None:
        yield (
            f"About {check.more.total} more readings should: {check.more.hinge} on the hinge (bedding or"
            f" hinge lines) and {check.more.cleavage} on the cleavage."
        )
    elif check.pair.hinge_readings < 1 or check.pair.cleavage_readings < 1:
        yield "How many readings would cannot be said without the numbers of readings."
    elif (check.separation_se or 0.0) >= (check.needed_se or 0.0):
        yield "The pair lies between the two: more readings need not settle it, another explanation may."
    else:
        yield (
            f"Not even {settings.forecast_limit} readings of hinge and of cleavage would tell them apart"
            " at this scatter."
        )
        if check.strike_in_the_way:
            yield "The error of the fault's strike stands in the way: a better strike would help."
        yield _displacement(check)


def _displacement(check: FaultCheck) -> str:
    rotation = check.explanations[0]
    angle = check.fold_fault_angle_deg or 0.0
    if not 0.0 < angle < shear.START_ANGLE_DEG or rotation.gamma is None:
        return "Look to other evidence: the displacement of markers, lineations, the strain in the beds."
    if rotation.displacement_km is None:
        return (
            f"What can tell is the displacement: rotation needs {two_digits(rotation.gamma)} times the width of"
            " the folded zone. Does the fault have it?"
        )
    return (
        f"What can tell is the displacement: rotation needs {two_digits(rotation.displacement_km)} km along the"
        " fault. Does it have that?"
    )


def _others(check: FaultCheck) -> Iterator[str]:
    unpartitioned, late = check.explanations[2:]
    if _neither_fits(check):
        if late.fits and late.gamma is not None and late.gamma_late is not None:
            yield (
                f"Cleavage that began late fits: it would have recorded the last {two_digits(late.gamma_late)}"
                f" of a shear strain of {two_digits(late.gamma)}."
            )
        if unpartitioned.fits and unpartitioned.convergence_deg is not None:
            yield f"Transpression with a convergence angle near {unpartitioned.convergence_deg:.0f}° fits."
        if not late.fits and not unpartitioned.fits:
            yield "No explanation considered here fits the readings."


def _hint(check: FaultCheck) -> Iterator[str]:
    if check.sense_hint is Sense.UNKNOWN:
        return
    turn = _turn(check.transection_deg or 0.0).strip()
    if not turn:  # a sense that rounding takes away is none to build on
        return
    text = f"Cleavage {turn} of the hinge hints at {check.sense_hint} shear, under the assumptions stated here only"
    drawn = Sense.SINISTRAL if check.sign > 0 else Sense.DEXTRAL
    if check.fault.sense not in (Sense.UNKNOWN, check.sense_hint):
        text += f"; the fault is given as {check.fault.sense}"
    elif drawn is not check.sense_hint:
        text += f"; the side on which the folds lie hints at {drawn}"
    yield text + "."


def _turn(transection_deg: float) -> str:
    if round(abs(transection_deg), 1) == 0.0:
        return ""
    return " clockwise" if transection_deg > 0.0 else " anticlockwise"


def _odds(ratio: float) -> str:
    odds = max(ratio, 1.0 / max(ratio, 1e-300))
    return "more than 1000 to 1" if odds > 1000.0 else f"{two_digits(odds)} to 1"


def _within_reach(check: FaultCheck) -> bool:
    return 0.0 <= (check.fold_fault_angle_deg or 0.0) <= shear.START_ANGLE_DEG


def _neither_fits(check: FaultCheck) -> bool:
    return len(check.explanations) > 1 and all(each.fits is False for each in check.explanations[:2])


def _spread(low: float | None, high: float | None, measure: str = "") -> str:
    least = two_digits(low or 0.0)
    return f"{least}{measure} or more" if high is None else f"{least} to {two_digits(high)}{measure}"


def two_digits(value: float) -> str:
    """Two significant digits, never as a power of ten."""
    rounded = float(f"{value:.2g}")
    return f"{rounded:,.0f}" if abs(rounded) >= 10.0 else f"{rounded:.6f}".rstrip("0").rstrip(".")
