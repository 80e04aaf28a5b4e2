"""The verdict: what the transection and its interval allow to be said, what keeps it back, what to read next."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from analysis.fold import blocks
from analysis.fold.advice import next_reading
from analysis.fold.forecast import settle, split
from analysis.fold.records import FoldCheck, MoreReadings, Verdict, WatchNumbers, rounded
from analysis.fold.transection import FEWEST_CLUSTERS
from analysis.fold.watch import (
    LINES_AT_FIRST_LOOK,
    PLANES_AT_FIRST_LOOK,
    hinge_is_clear,
    information_since_first_look,
    stream_progress,
    watch,
)
from analysis.fold.words import degrees
from analysis.orient.features import Feature
from analysis.stats.quantiles import t_quantile

if TYPE_CHECKING:
    from analysis.fold.fits import FoldFits
    from analysis.fold.settings import CheckSettings
    from analysis.fold.transection import Transection
    from analysis.stats.sums import RunningSums


def decide(
    check: FoldCheck,
    sums: RunningSums,
    fits: FoldFits,
    warnings: list[str],
    *,
    forecast: bool,
) -> FoldCheck:
    """Complete a check with its figures, its verdict and, if asked, its forecast."""
    counts, settings, transection = check.readings, check.settings, fits.transection
    hinge = None if check.hinge is None else check.hinge.fit
    clear = hinge is not None and bool(hinge_is_clear(hinge))
    cluster = "" if hinge is None else blocks.one_cluster(hinge, check.limbs)
    usable = clear and not cluster
    waiting = [s for s in (blocks.missing_for_hinge(counts), blocks.missing_for_cleavage(counts)) if s]
    if transection is None or check.hinge is None or not np.isfinite(transection.fixed_variance):
        angle = {} if transection is None or check.hinge is None else _angle(transection)
        because = tuple(waiting) or (blocks.undetermined(check.hinge, check.cleavage, counts),)
        return _advised(check, sums, hinge_usable=usable, **angle, because=because, warnings=tuple(warnings))

    waits, blocked, notes = _kept_back(check, sums, transection, fits)
    waiting += waits
    progress = (
        stream_progress(counts.bedding, counts.hinge),
        stream_progress(counts.cleavage, counts.intersection),
    )
    information = information_since_first_look(transection, *progress)
    seen = watch(transection, information, min(progress) >= 1.0 and clear, settings)
    variance = float(seen.variance)
    check = check.changed(
        **_angle(transection),
        **_fixed_interval(transection, settings),
        interval_deg=_within_90(float(seen.low_deg), float(seen.high_deg)) if seen.looked else None,
        numbers=WatchNumbers(
            delta_deg=float(transection.delta_deg),
            hinge_variance=float(transection.steady_hinge_variance),
            cleavage_variance=float(transection.steady_cleavage_variance),
            variance=variance,
            freedom=float(seen.freedom),
            information=float(information),
            by_outcrop=bool(transection.by_outcrop),
        )
        if np.isfinite(variance) and variance > 0.0
        else None,
        warnings=(*warnings, *notes),
    )
    if blocked:
        return _advised(
            check,
            sums,
            hinge_usable=usable,
            verdict=Verdict.CANNOT_BE_SETTLED,
            because=tuple(blocked),
            blocked=True,
        )
    if cluster and (seen.transected or seen.axial_planar):
        verdict = Verdict.CANNOT_BE_SETTLED if blocks.should_be_clear(counts) else Verdict.KEEP_READING
        return _advised(check, sums, hinge_usable=usable, verdict=verdict, because=(cluster,), blocked=True)
    if seen.transected:
        return check.changed(verdict=Verdict.TRANSECTED, because=_why_transected(check, transection))
    if seen.axial_planar:
        return check.changed(verdict=Verdict.AXIAL_PLANAR, because=_why_axial_planar(check, transection))
    if not waiting:
        waiting.append(
            f"The interval neither leaves out 0 nor lies within ±{degrees(settings.margin_deg)} closely enough yet."
        )
    check = _advised(check, sums, hinge_usable=usable, because=tuple(waiting))
    return add_forecast(check) if forecast else check


def add_forecast(check: FoldCheck) -> FoldCheck:
    """Add how many more readings should settle it; past the limit the fold cannot be settled here.

    Does nothing where the verdict stands, where it is blocked, or where the readings give no error yet.
    Takes a few milliseconds; run it away from the screen, for the check at hand only.
    """
    numbers, counts = check.numbers, check.readings
    if check.verdict is not Verdict.KEEP_READING or numbers is None:
        return check
    by_lines = check.cleavage is None
    held = (float(counts.bedding + counts.hinge), float(counts.cleavage + counts.intersection))
    missing = (
        _missing(counts.bedding, counts.hinge, PLANES_AT_FIRST_LOOK),
        _missing(
            counts.cleavage, counts.intersection, LINES_AT_FIRST_LOOK if by_lines else PLANES_AT_FIRST_LOOK
        ),
    )
    settling = settle(numbers, held, missing, check.settings)
    limit = check.settings.forecast_limit
    if not settling.median <= limit:
        if any(missing):
            return check  # too early to despair: the scatter itself is hardly known
        why = (
            f"More than {limit} further readings would be needed at the present scatter "
            f"(the estimate is {degrees(numbers.delta_deg)}, its standard error {degrees(numbers.variance**0.5)})."
        )
        return check.changed(verdict=Verdict.CANNOT_BE_SETTLED, because=(why,))
    total = round(settling.median)
    first = round(float(split(total, held, (numbers.hinge_variance, numbers.cleavage_variance))[0]))
    first = max(min(first, total - round(missing[1])), round(missing[0]))
    bedding = first if counts.bedding or not counts.hinge else 0
    return check.changed(
        more_readings=MoreReadings(
            total=total,
            low=round(settling.low),
            high=round(min(settling.high, 8.0 * limit)),
            bedding=bedding,
            cleavage=0 if by_lines else total - first,
            intersection=total - first if by_lines else 0,
            hinge=first - bedding,
        )
    )


def _missing(planes: int, lines: int, wanted: float) -> float:
    left = 1.0 - float(stream_progress(planes, lines))
    return float(np.ceil(max(left, 0.0) * wanted - 1e-9))


def _angle(transection: Transection) -> dict[str, Any]:
    """Fields of the check for the angle and its sense."""
    delta = float(transection.delta_deg)
    # What is written as zero has no sense: the sign that is left hangs on the order in which the sums were added.
    turn = rounded(delta)
    sense = (
        "unsigned"
        if not transection.has_sense
        else "clockwise"
        if turn > 0.0
        else "anticlockwise"
        if turn < 0.0
        else "none"
    )
    return {"transection_deg": delta, "sense": sense}


def _fixed_interval(transection: Transection, settings: CheckSettings) -> dict[str, Any]:
    """Fields of the check for the ordinary interval of one look."""
    se, df = float(transection.fixed_variance) ** 0.5, float(transection.fixed_freedom)
    if df <= 0.0:
        return {"se_deg": se}
    half = t_quantile(0.5 + 0.5 * settings.confidence, df) * se
    delta = float(transection.delta_deg)
    return {"se_deg": se, "df": df, "fixed_interval_deg": _within_90(delta - half, delta + half)}


def _within_90(low: float, high: float) -> tuple[float, float]:
    # A line and a plane are never more than 90 degrees apart, whatever an early, wide interval says.
    return max(low, -90.0), min(high, 90.0)


def _kept_back(
    check: FoldCheck,
    sums: RunningSums,
    transection: Transection,
    fits: FoldFits,
) -> tuple[list[str], list[str], list[str]]:
    """Sentences on what to wait for, what blocks, and what else to mind."""
    assert check.hinge is not None  # noqa: S101 - tells the type checker what the caller has made sure of
    counts = check.readings
    waits: list[str] = []
    blocked: list[str] = []
    notes: list[str] = []
    if not blocks.missing_for_hinge(counts):
        unclear, for_good = blocks.hinge_unclear(check.hinge.fit, counts, check.limbs)
        if unclear:
            (blocked if for_good else waits).append(unclear)
        elif large := blocks.hinge_part_large(transection):
            waits.append(large)
        blocked.append(blocks.not_cylindrical(check.hinge.fit, counts))
    blocked.append(blocks.outcrops_disagree(transection))
    if fits.cleavage is None and fits.lines is not None and fits.steep is not None:
        steep = blocks.too_steep_for_lines(check.hinge.vector, fits.lines.vector)
        blocked.append(steep or blocks.flat_by_lines(fits.steep))
    if fits.planes is not None and fits.lines is not None:
        angle, differ = blocks.planes_against_lines(fits.planes, fits.lines)
        if differ:
            blocked.append(
                "Cleavage planes and intersection lines disagree: the mean line leaves the mean plane by "
                f"{degrees(angle)}, more than their errors allow. {blocks.lines_furthest_off(fits.planes, sums)}"
            )
    if not transection.has_sense:
        notes.append(
            "The hinge is too steep, or the cleavage too flat, for a sense on the map: the angle has no sign."
        )
    if transection.outcrops >= FEWEST_CLUSTERS and blocks.outcrops_differ(transection):
        notes.append(
            "Outcrops differ by more than their readings scatter: the verdict is for the fold as a whole, and single "
            "outcrops may differ from it."
        )
    return waits, [s for s in blocked if s], notes


def _scale(transection: Transection) -> str:
    n = int(transection.outcrops)
    if n >= FEWEST_CLUSTERS:
        return f"Holds for the stretch of the fold that the {n} outcrops span."
    where = "one outcrop" if n == 1 else f"{n} outcrops"
    return f"Holds for the {where} read; for the fold as a whole read at {FEWEST_CLUSTERS} or more."


def _why_transected(check: FoldCheck, transection: Transection) -> tuple[str, ...]:
    share = f"{100.0 * check.settings.confidence:g}%"
    why = [f"The {share} interval, valid at all looks together, leaves out 0."]
    margin = check.settings.margin_deg
    if check.interval_deg is not None and max(abs(v) for v in check.interval_deg) < margin:
        why.append(f"Measurable, but smaller than {degrees(margin)}.")
    return (*why, _scale(transection))


def _why_axial_planar(check: FoldCheck, transection: Transection) -> tuple[str, ...]:
    alpha = 1.0 - check.settings.confidence
    why = (
        f"Two one-sided tests at {100.0 * alpha:.3g}%, valid at all looks together, put the transection within "
        f"±{degrees(check.settings.margin_deg)}: their {100.0 * (1.0 - 2.0 * alpha):.3g}% interval lies inside."
    )
    return why, _scale(transection)


def _advised(check: FoldCheck, sums: RunningSums, *, hinge_usable: bool, **fields: Any) -> FoldCheck:  # noqa: ANN401 - whatever a check holds
    """Add some fields and the next best reading."""
    counts, numbers = check.readings, check.numbers
    other = Feature.INTERSECTION if check.cleavage is None and counts.intersection else Feature.CLEAVAGE
    if blocks.missing_for_hinge(counts) or blocks.missing_for_cleavage(counts):
        gains = (
            1.0 - float(stream_progress(counts.bedding, counts.hinge)),
            1.0 - float(stream_progress(counts.cleavage, counts.intersection)),
        )
    elif not hinge_usable:
        gains = (1.0, 0.0)  # nothing can be said before the hinge is clear
    elif numbers is None:
        gains = (0.0, 1.0)
    else:
        gains = (
            numbers.hinge_variance / max(counts.bedding + counts.hinge, 1),
            numbers.cleavage_variance / max(counts.cleavage + counts.intersection, 1),
        )
    pole = None if check.cleavage is None else check.cleavage.vector
    return check.changed(
        **fields,
        next_reading=next_reading(
            sums,
            None if check.hinge is None else check.hinge.fit,
            check.limbs,
            pole,
            gain_hinge=gains[0],
            gain_cleavage=gains[1],
            other=other,
            new_outcrop=numbers is not None and numbers.by_outcrop,
        ),
    )
