"""The axes of one fold, fitted at once from its running sums, and the transections between them."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final, NamedTuple

import numpy as np

from analysis.fold.transection import FoldAxis, Transection, fit_fold, transection

if TYPE_CHECKING:
    from analysis.fold.records import Counts
    from analysis.orient.vectors import Floats
    from analysis.stats.axes import AxisFit


_CLEAVAGES: Final = (FoldAxis.CLEAVAGE, FoldAxis.PLANES, FoldAxis.STEEP)


class FoldFits(NamedTuple):
    """Axes and transections of one fold, None where its readings give none.

    The axes are those of `FoldAxis`; `planes` is `cleavage` where no line was read. `transection` is from all that
    was read; `by_planes` from cleavage planes alone, `by_lines` from intersection lines alone.
    """

    hinge: AxisFit | None = None
    cleavage: AxisFit | None = None
    planes: AxisFit | None = None
    steep: AxisFit | None = None
    lines: AxisFit | None = None
    transection: Transection | None = None
    by_planes: Transection | None = None
    by_lines: Transection | None = None


def fit_one_fold(rows: Floats, counts: Counts) -> FoldFits:
    """Fit whatever the moments (outcrops, features, 24) of a fold give; `counts` are its readings."""
    axes = _given(counts)
    if not axes:
        return FoldFits()
    fits = fit_fold(rows, axes)
    axis = {name: fits.of(place) for place, name in enumerate(axes)}
    hinge = axis.get(FoldAxis.HINGE)
    if hinge is not None and not counts.hinge and not np.isfinite(hinge.even_covariance).all():
        hinge = None  # bedding all alike: every direction in the bed could be the hinge
    cleavages = [name for name in axes if name in _CLEAVAGES]
    angle: dict[FoldAxis, Transection] = {}
    if hinge is not None and cleavages:
        first = axes.index(cleavages[0])
        angles = transection(hinge, fits.of(slice(first, first + len(cleavages))))
        angle = {name: angles.of(place) for place, name in enumerate(cleavages)}
    cleavage, by_all = axis.get(FoldAxis.CLEAVAGE), angle.get(FoldAxis.CLEAVAGE)
    return FoldFits(
        hinge=hinge,
        cleavage=cleavage,
        planes=axis.get(FoldAxis.PLANES, cleavage),
        steep=axis.get(FoldAxis.STEEP),
        lines=axis.get(FoldAxis.LINES),
        transection=angle.get(FoldAxis.STEEP) if by_all is None else by_all,
        by_planes=angle.get(FoldAxis.PLANES, by_all),
        by_lines=angle.get(FoldAxis.STEEP),
    )


def _given(counts: Counts) -> list[FoldAxis]:
    """Axes that something was read for, the cleavages next to each other."""
    wanted = (
        (FoldAxis.HINGE, counts.bedding >= 2 or counts.hinge),
        (FoldAxis.CLEAVAGE, counts.cleavage),
        (FoldAxis.PLANES, counts.cleavage and counts.intersection),
        (FoldAxis.STEEP, counts.intersection),
        (FoldAxis.LINES, counts.intersection),
    )
    return [axis for axis, given in wanted if given]
