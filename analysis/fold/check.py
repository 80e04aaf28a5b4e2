"""The check of one fold: everything that the running sums say, in time that does not grow with the readings."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final, NamedTuple

import numpy as np

from analysis.fold.decision import decide
from analysis.fold.intersection import computed_lines, limb_lines, side_of_outcrops
from analysis.fold.limbs import Limbs, find_limbs, sides
from analysis.fold.records import (
    AxisEstimate,
    Counts,
    EllipseDeg,
    FoldCheck,
    LimbLine,
    MeanIntersection,
    SideEstimate,
)
from analysis.fold.settings import CheckSettings
from analysis.fold.transection import (
    Transection,
    fit_cleavage,
    fit_cleavage_to_lines,
    fit_hinge,
    fit_lines,
    transection,
)
from analysis.orient.features import Feature
from analysis.orient.vectors import lower_hemisphere
from analysis.stats.axes import USUAL_SCATTER_DEG, AxisFit, confidence_ellipse
from analysis.stats.moments import COUNT

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats
    from analysis.stats.sums import RunningSums

DEFAULT: Final = CheckSettings()


class _Rows(NamedTuple):
    """Moments (outcrops, 24) by feature."""

    bedding: Floats
    cleavage: Floats
    intersection: Floats
    hinge: Floats


class _Beds(NamedTuple):
    """Bedding by cells of attitude: moments (cells, 24), the outcrop of each, its side of the fold, the limbs.

    `outcrop_side` (outcrops,) is the side of an outcrop that lies on one limb, else -1.
    """

    cells: Floats
    owner: npt.NDArray[np.int64]
    side: npt.NDArray[np.int64]
    limbs: Limbs | None
    outcrop_side: npt.NDArray[np.int64]


def check_fold(
    sums: RunningSums, settings: CheckSettings = DEFAULT, *, fold: str = "", forecast: bool = True
) -> FoldCheck:
    """Check a fold from its running sums.

    With `forecast` the check also says how many more readings are needed, and is "cannot be settled" where
    that passes the limit. Without, it takes about a millisecond; `analysis.fold.decision.add_forecast` adds
    the rest later.
    """
    counts = Counts(
        bedding=sums.count(Feature.BEDDING),
        cleavage=sums.count(Feature.CLEAVAGE),
        intersection=sums.count(Feature.INTERSECTION),
        hinge=sums.count(Feature.HINGE),
        outcrops=sums.outcrops_read,
    )
    rows = _Rows(*(sums.by_outcrop(feature) for feature in Feature))
    hinge = _hinge(rows, counts, settings)
    pole = None
    if counts.cleavage:
        pole = _estimate(fit_cleavage(rows.cleavage, rows.intersection), "planes", settings)
    beds = None if hinge is None or not counts.bedding else _beds(sums, hinge.fit, pole)
    lines = fit_lines(rows.intersection) if counts.intersection else None
    planes = None
    if pole is not None:
        # Where lines were read too, the planes by themselves are held against the lines.
        planes = pole.fit if lines is None else fit_cleavage(rows.cleavage)
    found, by_planes, by_lines = _transections(rows, hinge, pole, planes)
    check = FoldCheck(
        fold=fold,
        settings=settings,
        readings=counts,
        hinge=hinge,
        cleavage=pole,
        intersection=_mean_intersection(rows, lines, hinge, pole, beds, settings),
        limbs=None if beds is None else beds.limbs,
        limb_lines=_limb_lines(rows, beds, pole),
        estimates=tuple(
            SideEstimate(source, float(t.delta_deg), float(t.fixed_variance) ** 0.5)
            for source, t in (("planes", by_planes), ("lines", by_lines))
            if t is not None and np.isfinite(t.fixed_variance)
        ),
    )
    return decide(
        check, sums, found, _warnings(rows, check, beds, lines), planes=planes, lines=lines, forecast=forecast
    )


def _estimate(fit: AxisFit, source: str, settings: CheckSettings) -> AxisEstimate:
    ellipse = None
    if fit.ellipse_freedom > 0.0 and np.isfinite(fit.covariance).all():
        e = confidence_ellipse(fit, settings.confidence)
        ellipse = EllipseDeg(float(e.major_deg), float(e.minor_deg), e.major_axis, e.minor_axis)
    return AxisEstimate(lower_hemisphere(fit.vector), source, ellipse, fit)


def _hinge(rows: _Rows, counts: Counts, settings: CheckSettings) -> AxisEstimate | None:
    if counts.bedding < 2 and not counts.hinge:
        return None
    fit = fit_hinge(rows.bedding, rows.hinge)
    if not np.isfinite(fit.even_covariance).all() and not counts.hinge:
        return None  # bedding all alike: every direction in the bed could be the hinge
    source = "both" if counts.bedding and counts.hinge else "bedding" if counts.bedding else "hinge lines"
    return _estimate(fit, source, settings)


def _beds(sums: RunningSums, hinge: AxisFit, pole: AxisEstimate | None) -> _Beds:
    cells, owner = sums.bedding_cells()
    side = sides(cells, hinge.across)
    limbs = find_limbs(cells, side, hinge.across, None if pole is None else pole.vector)
    side = side if limbs else np.zeros_like(side)
    outcrop_side = side_of_outcrops(cells, owner, side, len(sums.outcrops))
    return _Beds(cells, owner, side, limbs, outcrop_side)


def _mean_intersection(
    rows: _Rows,
    measured: AxisFit | None,
    hinge: AxisEstimate | None,
    pole: AxisEstimate | None,
    beds: _Beds | None,
    settings: CheckSettings,
) -> MeanIntersection | None:
    """Mean of measured lines, and of lines computed where S0 and S1 but no line were read.

    A line measured on the very beds whose S0 and S1 were read is no independent evidence, so an outcrop gives
    either its measured lines or its computed ones.
    """
    fit, computed = measured, 0
    if hinge is not None and pole is not None and beds is not None:
        bare = np.where(rows.intersection[:, COUNT, np.newaxis] > 0.5, 0.0, rows.cleavage)
        scatter = np.array([hinge.fit.scatter_rad[0], pole.fit.scatter_rad[0], np.radians(USUAL_SCATTER_DEG)])
        extra = computed_lines(beds.cells, beds.owner, beds.side, bare, scatter)
        computed = len(extra)
        if computed:
            fit = fit_lines(np.concatenate([rows.intersection, extra]))
    if fit is None:
        return None
    count = 0 if measured is None else round(float(measured.readings))
    return MeanIntersection(_estimate(fit, "lines", settings), count, computed)


def _limb_lines(rows: _Rows, beds: _Beds | None, pole: AxisEstimate | None) -> tuple[LimbLine, ...]:
    if beds is None or beds.limbs is None or pole is None:
        return ()
    return limb_lines(beds.limbs, pole.vector, rows.intersection, beds.outcrop_side)


def _transections(
    rows: _Rows, hinge: AxisEstimate | None, pole: AxisEstimate | None, planes: AxisFit | None
) -> tuple[Transection | None, Transection | None, Transection | None]:
    """Transection from all there is, from cleavage planes alone, and from measured lines alone."""
    if hinge is None:
        return None, None, None
    found = by_planes = by_lines = None
    if rows.intersection[:, COUNT].any():
        alone = fit_cleavage_to_lines(rows.intersection)
        found = by_lines = transection(hinge.fit, alone, (rows.bedding, rows.hinge, rows.intersection))
    if pole is not None and planes is not None:
        found = by_planes = transection(hinge.fit, pole.fit, rows)
        if planes is not pole.fit:
            by_planes = transection(hinge.fit, planes, (rows.bedding, rows.hinge, rows.cleavage))
    return found, by_planes, by_lines


def _warnings(rows: _Rows, check: FoldCheck, beds: _Beds | None, lines: AxisFit | None) -> list[str]:
    warnings = []
    if lines is not None and beds is not None and beds.limbs is not None:
        read = beds.outcrop_side[rows.intersection[:, COUNT] > 0.5]
        if len(set(read.tolist()) - {-1}) == 1 and (read >= 0).all():
            limb = beds.limbs.both[int(read[0])].name
            warnings.append(
                f"All intersection lines come from one limb (the {limb}). If the fold is transected, they plunge "
                "differently on the other limb, and their mean is off the hinge for that alone. Read some there."
            )
    if check.cleavage is None and check.readings.intersection:
        warnings.append(
            "No cleavage plane read: the angle comes from intersection lines, and takes the cleavage to be steep. "
            "Read some cleavage planes to be free of that."
        )
    if check.hinge is not None and check.readings.bedding >= 6:
        flat = sum(1 for limb in (check.limbs.both if check.limbs else ()) if limb.plane.dip_deg < 10.0)
        if flat:
            warnings.append(
                f"{'Both limbs dip' if flat == 2 else 'One limb dips'} less than 10°: strikes read there are loose. "
                "The check works with poles, which are not; but look at the dip, not at the strike, to judge a reading."
            )
    return warnings
