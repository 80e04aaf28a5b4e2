"""Which reading to take next, and where."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from analysis.fold.records import NextReading
from analysis.fold.words import plane_text
from analysis.orient.features import Feature
from analysis.stats.moments import COUNT, tensor

if TYPE_CHECKING:
    from analysis.fold.limbs import Limbs
    from analysis.orient.vectors import Floats
    from analysis.stats.axes import AxisFit
    from analysis.stats.sums import RunningSums

_NEARLY_EQUAL = 0.8


def bedding_where(hinge: AxisFit, bedding: Floats, limbs: Limbs | None, pole: Floats | None) -> str:
    """Say on which limb a bedding reading narrows the transection most.

    The hinge's error along a is lowered by (x.g)^2, x the new pole and g the direction U N^-1 a, where N is
    the bedding's moment (..., 24) across the hinge and a the cleavage pole's part across it.
    """
    if bedding[COUNT] < 0.5:
        return "on both limbs"
    if limbs is None:
        return "on the other limb: bedding so far lies on one side of the fold"
    first, second = limbs.both
    if pole is None:
        fewer = min(limbs.both, key=lambda limb: limb.count)
        return f"on the {fewer.name}"
    across = hinge.across
    gathered = across.T @ tensor(bedding) @ across
    pull = across @ np.linalg.lstsq(gathered, across.T @ pole, rcond=None)[0]
    gains = [float(limb.plane.pole @ pull) ** 2 for limb in limbs.both]
    if min(gains) >= _NEARLY_EQUAL * max(gains):
        steep = abs(first.plane.dip_deg - second.plane.dip_deg)
        return "on either limb" if steep < 15.0 else "on either limb, where bedding is steep"
    best = first if gains[0] >= gains[1] else second
    other = second if best is first else first
    slope = best.plane.dip_deg - other.plane.dip_deg
    word = "steep " if slope > 15.0 else "gentle " if slope < -15.0 else ""
    if not best.name.startswith("limb"):  # its name says already how it differs
        word = ""
    return f"on the {word}{best.name}, near {plane_text(best.plane)}"


def cleavage_where(sums: RunningSums, feature: Feature) -> str:
    """Say at which outcrop to read cleavage, or intersection lines, next: where there are fewest of them."""
    names = sums.outcrops
    if len(names) < 2:
        return "where it is clearest"
    held = sums.by_outcrop(feature)[:, COUNT]
    beds = sums.by_outcrop(Feature.BEDDING)[:, COUNT]
    bare = [name for name, n, b in zip(names, held, beds, strict=True) if n < 0.5 < b and name]
    if bare:
        return f"at outcrop {bare[0]}, where there is none yet"
    return "where it is clearest, at any outcrop"


def next_reading(
    sums: RunningSums,
    hinge: AxisFit | None,
    limbs: Limbs | None,
    pole: Floats | None,
    *,
    gain_hinge: float,
    gain_cleavage: float,
    other: Feature,
    new_outcrop: bool,
) -> NextReading:
    """Give the reading with the larger gain: of bedding for the hinge, or of `other` for the cleavage."""
    if gain_hinge >= gain_cleavage:
        if hinge is None:
            held = sums.count(Feature.BEDDING)
            return NextReading(
                Feature.BEDDING,
                "on both limbs" if held < 2 else "on the other limb: bedding so far is all alike",
            )
        where = bedding_where(hinge, sums.total(Feature.BEDDING), limbs, pole)
        feature = Feature.BEDDING
    else:
        where, feature = cleavage_where(sums, other), other
    if new_outcrop:
        where = f"at a new outcrop, {where}" if feature is Feature.BEDDING else "at a new outcrop"
    return NextReading(feature, where)
