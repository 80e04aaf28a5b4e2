"""The check of one fold: everything that the running sums say, in time that does not grow with the readings."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Final, NamedTuple

import numpy as np

from analysis.fold.decision import decide
from analysis.fold.fits import FoldFits, fit_one_fold
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
from analysis.orient.features import Feature
from analysis.orient.vectors import lower_hemisphere
from analysis.stats.axes import ALONG, USUAL_SCATTER_DEG, AxisFit, confidence_ellipse, fit_axis
from analysis.stats.moments import COUNT
from analysis.stats.sums import FEATURES

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.orient.vectors import Floats
    from analysis.stats.sums import RunningSums

DEFAULT: Final = CheckSettings()
_BEDDING, _CLEAVAGE, _LINES = (
    FEATURES.index(f) for f in (Feature.BEDDING, Feature.CLEAVAGE, Feature.INTERSECTION)
)


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
    counts = _counts(sums.rows)
    fits = fit_one_fold(sums.rows, counts)
    hinge, pole = _estimates(fits, counts, settings)
    beds = None if hinge is None or not counts.bedding else _beds(sums, hinge.fit, pole)
    check = FoldCheck(
        fold=fold,
        settings=settings,
        readings=counts,
        hinge=hinge,
        cleavage=pole,
        intersection=_mean_intersection(sums.rows, fits.lines, hinge, pole, beds, settings),
        limbs=None if beds is None else beds.limbs,
        limb_lines=_limb_lines(sums.rows, beds, pole),
        estimates=tuple(
            SideEstimate(source, float(t.delta_deg), float(t.fixed_variance) ** 0.5)
            for source, t in (("planes", fits.by_planes), ("lines", fits.by_lines))
            if t is not None and np.isfinite(t.fixed_variance)
        ),
    )
    warnings = _warnings(sums.rows, check, beds, fits.lines)
    return decide(check, sums, fits, warnings, forecast=forecast)


def _counts(rows: Floats) -> Counts:
    held = rows[..., COUNT]
    outcrops = np.count_nonzero(held.sum(axis=1) > 0.5)
    bedding, cleavage, intersection, hinge = (round(count) for count in held.sum(axis=0).tolist())
    return Counts(bedding, cleavage, intersection, hinge, int(outcrops))


def _estimates(
    fits: FoldFits, counts: Counts, settings: CheckSettings
) -> tuple[AxisEstimate | None, AxisEstimate | None]:
    """Hinge and cleavage pole with their ellipses."""
    source = "both" if counts.bedding and counts.hinge else "bedding" if counts.bedding else "hinge lines"
    return (
        None if fits.hinge is None else _estimate(fits.hinge, source, settings),
        None if fits.cleavage is None else _estimate(fits.cleavage, "planes", settings),
    )


def _estimate(fit: AxisFit, source: str, settings: CheckSettings) -> AxisEstimate:
    ellipse = None
    if fit.ellipse_freedom > 0.0 and np.isfinite(fit.covariance).all():
        e = confidence_ellipse(fit, settings.confidence)
        ellipse = EllipseDeg(float(e.major_deg), float(e.minor_deg), e.major_axis, e.minor_axis)
    return AxisEstimate(lower_hemisphere(fit.vector), source, ellipse, fit)


def _beds(sums: RunningSums, hinge: AxisFit, pole: AxisEstimate | None) -> _Beds:
    cells, owner = sums.bedding_cells()
    side = sides(cells, hinge.across)
    limbs = find_limbs(cells, side, hinge.across, None if pole is None else pole.vector)
    side = side if limbs else np.zeros_like(side)
    outcrop_side = side_of_outcrops(cells, owner, side, len(sums.outcrops))
    return _Beds(cells, owner, side, limbs, outcrop_side)


def _mean_intersection(
    rows: Floats,
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
        lines = rows[:, _LINES]
        bare = np.where(lines[:, COUNT, np.newaxis] > 0.5, 0.0, rows[:, _CLEAVAGE])
        scatter = (
            hinge.fit.scatter_rad[_BEDDING],
            pole.fit.scatter_rad[_CLEAVAGE],
            math.radians(USUAL_SCATTER_DEG),
        )
        extra = computed_lines(beds.cells, beds.owner, beds.side, bare, scatter)
        computed = len(extra)
        if computed:
            fit = fit_axis(np.concatenate([lines, extra]), ALONG)
    if fit is None:
        return None
    count = 0 if measured is None else round(float(measured.readings))
    return MeanIntersection(_estimate(fit, "lines", settings), count, computed)


def _limb_lines(rows: Floats, beds: _Beds | None, pole: AxisEstimate | None) -> tuple[LimbLine, ...]:
    if beds is None or beds.limbs is None or pole is None:
        return ()
    return limb_lines(beds.limbs, pole.vector, rows[:, _LINES], beds.outcrop_side)


def _warnings(rows: Floats, check: FoldCheck, beds: _Beds | None, lines: AxisFit | None) -> list[str]:
    warnings = []
    if lines is not None and beds is not None and beds.limbs is not None:
        read = beds.outcrop_side[rows[:, _LINES, COUNT] > 0.5]
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
