"""A check as one row of a map: plain values, at full precision, with a position."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from analysis.files.symbols import inclination_label, symbol_of
from analysis.fold.words import against_hinge, between, headline
from analysis.orient.features import Feature

if TYPE_CHECKING:
    from collections.abc import Iterable

    from analysis.fold.records import AxisEstimate, FoldCheck

Row = dict[str, Any]
Means = dict[str, list[Row]]


def verdict_row(check: FoldCheck, position: tuple[float, float] | None, with_position: int) -> Row:
    """Make the row of a fold's verdict.

    `position` is the mean latitude and longitude of its readings, in degrees, `with_position` how many have one.
    Empty texts and numbers that there are none of are None.
    """
    counts = check.readings
    low, high = check.interval_deg or (None, None)
    fixed_low, fixed_high = check.fixed_interval_deg or (None, None)
    hinge = None if check.hinge is None else check.hinge.line
    cleavage = None if check.cleavage is None else check.cleavage.plane
    mean = None if check.intersection is None else check.intersection.axis.line
    return {
        "fold": check.fold or None,
        "verdict": check.verdict.value,
        "headline": headline(check),
        "label": _label(check),
        "transection_deg": check.transection_deg,
        "sense": check.sense,
        "se_deg": check.se_deg,
        "df": check.df,
        "low_deg": low,
        "high_deg": high,
        "fixed_low_deg": fixed_low,
        "fixed_high_deg": fixed_high,
        "readings": sum(counts.of(feature) for feature in Feature),
        **{feature.value: counts.of(feature) for feature in Feature},
        "outcrops": counts.outcrops,
        "hinge_trend_deg": None if hinge is None else hinge.trend_deg,
        "hinge_plunge_deg": None if hinge is None else hinge.plunge_deg,
        "hinge_from": None if check.hinge is None else check.hinge.source,
        "cleavage_strike_deg": None if cleavage is None else cleavage.strike_deg,
        "cleavage_dip_deg": None if cleavage is None else cleavage.dip_deg,
        "intersection_trend_deg": None if mean is None else mean.trend_deg,
        "intersection_plunge_deg": None if mean is None else mean.plunge_deg,
        "because": " ".join(check.because) or None,
        "warnings": " ".join(check.warnings) or None,
        "margin_deg": check.settings.margin_deg,
        "confidence": check.settings.confidence,
        "with_position": with_position,
        "latitude_deg": None if position is None else position[0],
        "longitude_deg": None if position is None else position[1],
    }


def _label(check: FoldCheck) -> str:
    """Words beside the mark: the verdict, and the figure never without its interval."""
    if check.transection_deg is None or check.interval_deg is None:
        return check.verdict.value
    signed = check.sense != "unsigned"
    figure = against_hinge(check.transection_deg, signed=signed)
    return f"{check.verdict.value}: {figure}, {between(*check.interval_deg, signed=signed)}"


def mean_rows(check: FoldCheck, verdict: Row) -> Means:
    """Make the rows of a fold's mean hinge, cleavage and intersection, by layer, placed as its verdict row is."""
    found: Means = {}
    place = {name: verdict[name] for name in ("fold", "verdict", "latitude_deg", "longitude_deg")}
    if check.hinge is not None:
        line = check.hinge.line
        row = _attitude(Feature.HINGE, line.trend_deg, line.plunge_deg, check.hinge, check.hinge.source)
        found["mean hinge"] = [place | row]
    if check.cleavage is not None:
        plane = check.cleavage.plane
        row = _attitude(Feature.CLEAVAGE, plane.strike_deg, plane.dip_deg, check.cleavage, "planes")
        found["mean cleavage"] = [place | row]
    if check.intersection is not None:
        axis = check.intersection.axis
        source = f"{check.intersection.measured} measured, {check.intersection.computed} computed"
        row = _attitude(Feature.INTERSECTION, axis.line.trend_deg, axis.line.plunge_deg, axis, source)
        found["mean intersection"] = [place | row]
    return found


def together(many: Iterable[Means]) -> Means:
    """Join the rows of many folds, layer by layer."""
    whole: Means = {}
    for means in many:
        for layer, rows in means.items():
            whole.setdefault(layer, []).extend(rows)
    return whole


def _attitude(
    feature: Feature, azimuth_deg: float, inclination_deg: float, axis: AxisEstimate, source: str
) -> Row:
    return {
        "feature": feature.value,
        "symbol": symbol_of(feature, inclination_deg),
        "azimuth_deg": azimuth_deg,
        "inclination_deg": inclination_deg,
        "label": inclination_label(inclination_deg),
        "ellipse_major_deg": None if axis.ellipse is None else axis.ellipse.major_deg,
        "ellipse_minor_deg": None if axis.ellipse is None else axis.ellipse.minor_deg,
        "from": source,
    }
