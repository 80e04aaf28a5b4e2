"""What keeps a verdict back: readings still missing, and conditions under which none may be given.

Each function returns one sentence, or an empty string where its condition does not hold. Waiting is mended by
further readings; a block says that the fold, or the way it was read, does not bear a verdict.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.fold.transection import FEWEST_CLUSTERS, outcrop_freedom
from analysis.fold.watch import (
    GIRDLE_SCATTER_AT_MOST_DEG,
    HINGE_PART_AT_MOST_DEG,
    HINGE_SE_AT_MOST_DEG,
    LEAST_DIP_BY_LINES_DEG,
    LINES_AT_FIRST_LOOK,
    PLANES_AT_FIRST_LOOK,
    girdle_by_chance,
    hinge_part_is_small,
    lines_allow_steep,
    stream_progress,
)
from analysis.fold.words import degrees
from analysis.orient.features import Feature
from analysis.stats.moments import COUNT, tensor
from analysis.stats.watching import watched_multiplier

if TYPE_CHECKING:
    from analysis.fold.limbs import Limbs
    from analysis.fold.records import AxisEstimate, Counts
    from analysis.fold.transection import Transection
    from analysis.orient.vectors import Floats
    from analysis.stats.axes import AxisFit
    from analysis.stats.sums import RunningSums

# Looked at again and again, so one in a thousand at a look.
_OUTCROPS_DIFFER_Z: Final = 3.09
_STREAMS_DIFFER_CONFIDENCE: Final = 0.99
_FEWEST_TO_COMPARE: Final = 3
# Twice the readings of the first look: from here on it is the fold that is unclear, not the count.
_HINGE_SHOULD_BE_CLEAR_FROM: Final = 2.0
# At a look; where the poles fall into two limbs less is asked.
_GIRDLE_BY_CHANCE: Final = 0.003
_GIRDLE_BY_CHANCE_WITH_LIMBS: Final = 0.01
_STEEP_LINE_SINE: Final = float(np.sin(np.radians(70.0)))


def missing_for_hinge(counts: Counts) -> str:
    """Wait for the first look at the hinge."""
    if stream_progress(counts.bedding, counts.hinge) >= 1.0:
        return ""
    return (
        f"The hinge needs {PLANES_AT_FIRST_LOOK:.0f} bedding readings or {LINES_AT_FIRST_LOOK:.0f} hinge lines: "
        f"{counts.bedding} and {counts.hinge} so far."
    )


def missing_for_cleavage(counts: Counts) -> str:
    """Wait for the first look at the cleavage."""
    if stream_progress(counts.cleavage, counts.intersection) >= 1.0:
        return ""
    return (
        f"The cleavage needs {PLANES_AT_FIRST_LOOK:.0f} cleavage readings or {LINES_AT_FIRST_LOOK:.0f} intersection "
        f"lines: {counts.cleavage} and {counts.intersection} so far."
    )


def undetermined(hinge: AxisEstimate | None, cleavage: AxisEstimate | None, counts: Counts) -> str:
    """Say which axis the readings leave open though there are enough of them."""
    if hinge is None and counts.bedding:
        return (
            "Bedding so far is all of one attitude: any direction in the bed could be the hinge. "
            "Read the other limb, or hinge lines."
        )
    if hinge is None or not np.isfinite(hinge.fit.covariance).all():
        return "The hinge is not determined: its readings agree on no direction. Read bedding on both limbs."
    what = "intersection lines" if cleavage is None else "cleavage readings"
    return (
        f"The cleavage is not determined: the {what} agree on no plane. Read it again where it is clearest."
    )


def hinge_unclear(hinge: AxisFit, counts: Counts, limbs: Limbs | None) -> tuple[str, bool]:
    """Wait for, or from twelve readings on be blocked by, a hinge that the bedding does not show clearly."""
    se = float(np.degrees(hinge.less_certain_se_rad))
    if se <= HINGE_SE_AT_MOST_DEG:
        return "", False
    known = (
        f"The hinge is known to ±{degrees(2 * se)} only" if se < 45.0 else "The hinge is not determined yet"
    )
    why = (
        "bedding so far lies on one side of the fold. Read the other limb, or hinge lines."
        if limbs is None
        else "the girdle is lost in the scatter. Read both limbs where they dip more steeply, or hinge lines."
    )
    return f"{known}: {why}", should_be_clear(counts)


def should_be_clear(counts: Counts) -> bool:
    """Tell whether so much bedding was read that it is the fold that is unclear, not the count."""
    return bool(stream_progress(counts.bedding, counts.hinge) >= _HINGE_SHOULD_BE_CLEAR_FROM)


def one_cluster(hinge: AxisFit, limbs: Limbs | None) -> str:
    """Withhold a verdict where bedding could as well be one limb, whose hinge is any line in the bed.

    Measured: of folds read on one limb only, watched from 6 to 24 readings, 2 to 3% get a verdict, which can only be
    by luck; without this 5 to 9%. Folds read on both limbs need no more readings for it. The calibration runs
    without it, so it counts verdicts that the page withholds.
    """
    chance = float(girdle_by_chance(hinge))
    if chance <= (_GIRDLE_BY_CHANCE if limbs is None else _GIRDLE_BY_CHANCE_WITH_LIMBS):
        return ""
    return (
        "Bedding so far could all come from one limb, and be drawn out by chance: the hinge is not to be trusted. "
        "Read the other limb, steeper parts, or hinge lines."
    )


def hinge_part_large(transection: Transection) -> str:
    """Wait for a hinge whose error makes less of the transection's."""
    if hinge_part_is_small(transection):
        return ""
    part = float(np.sqrt(transection.steady_hinge_variance))
    known = f"to ±{degrees(2 * part)} only" if part < 45.0 else "hardly at all"
    return (
        f"Across the cleavage the hinge is known {known} (at most ±{degrees(2 * HINGE_PART_AT_MOST_DEG)}): "
        "read more bedding, where the limbs are steeper, or hinge lines."
    )


def not_cylindrical(hinge: AxisFit, counts: Counts) -> str:
    """Block on bedding that does not lie on one girdle."""
    scatter = float(np.degrees(hinge.scatter_rad[0]))
    if counts.bedding < PLANES_AT_FIRST_LOOK or scatter <= GIRDLE_SCATTER_AT_MOST_DEG:
        return ""
    return (
        f"Bedding lies {degrees(scatter)} off its girdle on average (at most {degrees(GIRDLE_SCATTER_AT_MOST_DEG)}): "
        "at this scale the fold is not cylindrical. Check outcrop by outcrop, or a shorter stretch of the hinge."
    )


def outcrops_differ(transection: Transection) -> bool:
    """Test whether outcrops differ by more than their readings' scatter: one in a thousand at a look.

    The variance between outcrops over that of the readings follows F; its quantile is taken from chi-square
    (Wilson & Hilferty 1931, from memory), widened for the readings' own degrees of freedom.
    """
    outcrops = float(transection.outcrops)
    between = float(transection.outcrop_variance * outcrop_freedom(transection.outcrops)) / max(
        outcrops - 1.0, 1.0
    )
    within = float(transection.steady_hinge_variance + transection.steady_cleavage_variance)
    if outcrops < 2.0 or not np.isfinite(between) or within <= 0.0:
        return False
    k, m = outcrops - 1.0, float(transection.steady_freedom)
    ninth = 2.0 / (9.0 * k)
    limit = (1.0 - ninth + _OUTCROPS_DIFFER_Z * ninth**0.5) ** 3 * max(m, 3.0) / (max(m, 3.0) - 2.0)
    return bool(between / within > limit)


def outcrops_disagree(transection: Transection) -> str:
    """Block on outcrops that differ while there are too few to say by how much they do."""
    if transection.outcrops >= FEWEST_CLUSTERS or not outcrops_differ(transection):
        return ""
    return (
        f"The {int(transection.outcrops)} outcrops disagree by more than their readings scatter. "
        f"Read at {FEWEST_CLUSTERS} outcrops or more, or check each by itself."
    )


def planes_against_lines(planes: AxisFit, lines: AxisFit) -> tuple[float, bool]:
    """Give the angle, degrees, between mean intersection line and mean cleavage plane, and whether it is too much.

    It is too much where it passes what the errors of both allow, at all looks together.
    An intersection line lies in the cleavage on either limb, so the limbs do not matter here.
    """
    few = planes.readings < _FEWEST_TO_COMPARE or lines.readings < _FEWEST_TO_COMPARE
    if few or not (np.isfinite(planes.covariance).all() and np.isfinite(lines.covariance).all()):
        return 0.0, False
    sine = float(planes.vector @ lines.vector)
    pulls = (planes.across.T @ lines.vector, lines.across.T @ planes.vector)
    variance = sum(
        max(float(pull @ fit.covariance @ pull), float(pull @ fit.even_covariance @ pull))
        for pull, fit in zip(pulls, (planes, lines), strict=True)
    )
    looks = float(stream_progress(planes.readings, lines.readings))
    limit = watched_multiplier(looks, planes.freedom + lines.freedom, _STREAMS_DIFFER_CONFIDENCE)
    return float(np.degrees(np.arcsin(abs(sine)))), bool(abs(sine) > limit * variance**0.5)


def lines_furthest_off(planes: AxisFit, sums: RunningSums) -> str:
    """Say at which outcrop the intersection lines leave the mean cleavage plane furthest, by their mean square."""
    rows = sums.by_outcrop(Feature.INTERSECTION)
    held = rows[:, COUNT] > 0.5
    squares = np.einsum("i,oij,j->o", planes.vector, tensor(rows), planes.vector)
    off = np.sqrt(np.maximum(squares, 0.0) / np.maximum(rows[:, COUNT], 1.0))
    worst = int(np.argmax(np.where(held, off, -1.0)))
    if np.count_nonzero(held) < 2 or not sums.outcrops[worst]:
        return "Read both again side by side."
    return (
        f"The lines at outcrop {sums.outcrops[worst]} are furthest off, by {degrees(float(np.degrees(off[worst])))}: "
        "read both again there."
    )


def too_steep_for_lines(hinge: Floats, line: Floats) -> str:
    """Block lines alone where hinge or mean line are too steep to give a direction in plan."""
    if max(abs(float(hinge[2])), abs(float(line[2]))) <= _STEEP_LINE_SINE:
        return ""
    return "Hinge or intersection plunge more than 70°: lines alone give no angle on the map. Read cleavage planes."


def flat_by_lines(cleavage: AxisFit) -> str:
    """Block lines alone that make the cleavage dip gently: they deny the steepness that was taken for granted."""
    if lines_allow_steep(cleavage):
        return ""
    return (
        f"The intersection lines spread as if the cleavage dipped less than {degrees(LEAST_DIP_BY_LINES_DEG)}; "
        "alone they give no angle then. Read cleavage planes."
    )
