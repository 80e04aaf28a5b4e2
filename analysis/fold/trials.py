"""Trials of the check on invented folds, many at a time: what planning and calibration are reckoned from.

The folds are watched as a geologist watches: a look after every single reading, from the first look on. The
numbers come from the functions that the page itself runs, broadcast over folds and looks.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal, NamedTuple

import numpy as np

from analysis.fold.transection import FoldAxis, fit_fold, transection
from analysis.fold.watch import (
    GIRDLE_SCATTER_AT_MOST_DEG,
    hinge_is_clear,
    hinge_part_is_small,
    information_since_first_look,
    lines_allow_steep,
    stream_progress,
    watch,
)
from analysis.stats.moments import COUNT, moments
from analysis.stats.quantiles import student_multiplier
from analysis.stats.synthetic import draw

if TYPE_CHECKING:
    import numpy.typing as npt

    from analysis.fold.settings import CheckSettings
    from analysis.fold.transection import Transection
    from analysis.orient.vectors import Floats
    from analysis.stats.axes import AxisFit
    from analysis.stats.synthetic import Drawn, FoldDesign

Mode = Literal["planes", "lines", "planes and lines"]
_NORMAL_975, _NORMAL_95 = 1.959963984540054, 1.6448536269514722


class Trials(NamedTuple):
    """What each look at each fold showed; shape (folds, looks) unless said otherwise.

    `readings` (looks,) are the readings taken by then, over all streams. `unclear` and `off_girdle` say why a
    look was kept back: the hinge not clear, bedding off its girdle. `naive_*` are what ordinary intervals, not
    made for watching, would have said at that look: transected where the 95% one leaves out 0, else axial
    planar where the 90% one (two one-sided tests at 5%) lies within the margin.
    """

    readings: npt.NDArray[np.int64]
    delta_deg: Floats
    low_deg: Floats
    high_deg: Floats
    looked: npt.NDArray[np.bool_]
    transected: npt.NDArray[np.bool_]
    axial_planar: npt.NDArray[np.bool_]
    unclear: npt.NDArray[np.bool_]
    off_girdle: npt.NDArray[np.bool_]
    naive_low_deg: Floats
    naive_high_deg: Floats
    naive_transected: npt.NDArray[np.bool_]
    naive_axial_planar: npt.NDArray[np.bool_]

    @property
    def settled_after(self) -> Floats:
        """Readings over all streams until the first verdict, (folds,); infinite where none came."""
        settled = self.transected | self.axial_planar
        return np.where(settled.any(axis=1), self.readings[settled.argmax(axis=1)], np.inf)


def looks(first: tuple[int, int], last: int) -> npt.NDArray[np.int64]:
    """Readings of both streams, (looks, 2), read in turn, from the first look to `last` of each."""
    held = list(first)
    path = [tuple(held)]
    while min(held) < last:
        held[0 if held[0] <= held[1] else 1] += 1
        path.append(tuple(held))
    return np.array(path, dtype=np.int64)


def run_trials(
    design: FoldDesign,
    folds: int,
    readings: int,
    rng: np.random.Generator,
    settings: CheckSettings,
    mode: Mode = "planes",
) -> Trials:
    """Watch so many folds of one design, up to so many readings of each stream, read in turn.

    Streams are bedding and, by mode, cleavage planes, intersection lines, or both of these read together.
    """
    at = looks((6, 6) if mode == "planes" else (6, 5), readings)
    return watch_drawn(draw(design, readings, folds, rng), at, settings, mode)


class Estimates(NamedTuple):
    """What the readings held at each look of each fold say; shape (folds, looks)."""

    hinge: AxisFit
    cleavage: AxisFit
    transection: Transection
    information: Floats


def estimate_drawn(drawn: Drawn, at: npt.NDArray[np.int64], mode: Mode = "planes") -> Estimates:
    """Estimate from the first readings of both streams, `at` (looks, 2) of them."""
    bedding = _by_look(drawn.bedding, drawn.outcrop, at[:, 0])
    none = np.zeros_like(bedding)
    planes = none if mode == "lines" else _by_look(drawn.cleavage, drawn.outcrop, at[:, 1])
    lines = none if mode == "planes" else _by_look(drawn.lines, drawn.outcrop, at[:, 1])
    rows = np.stack([bedding, planes, lines], axis=-2)
    fits = fit_fold(rows, (FoldAxis.HINGE, FoldAxis.STEEP if mode == "lines" else FoldAxis.CLEAVAGE))
    hinge, cleavage = fits.of(0), fits.of(1)
    found = transection(hinge, cleavage)
    n_planes, n_lines = (part[..., COUNT].sum(axis=-1) for part in (planes, lines))
    information = information_since_first_look(
        found, stream_progress(at[:, 0], 0), stream_progress(n_planes, n_lines)
    )
    return Estimates(hinge, cleavage, found, information)


def watch_drawn(
    drawn: Drawn, at: npt.NDArray[np.int64], settings: CheckSettings, mode: Mode = "planes"
) -> Trials:
    """Watch folds whose readings are drawn already, with looks at `at` (looks, 2) readings of both streams."""
    hinge, cleavage, found, information = estimate_drawn(drawn, at, mode)
    off_girdle = np.degrees(hinge.scatter_rad[..., 0]) > GIRDLE_SCATTER_AT_MOST_DEG
    clear = hinge_is_clear(hinge) & hinge_part_is_small(found)
    if mode == "lines":
        clear = clear & lines_allow_steep(cleavage)
    seen = watch(found, information, clear & ~off_girdle, settings)
    naive, naive_narrow = (
        student_multiplier(z, found.fixed_freedom) * np.sqrt(found.fixed_variance)
        for z in (_NORMAL_975, _NORMAL_95)
    )
    size = np.abs(found.delta_deg)
    return Trials(
        readings=at.sum(axis=1) + (at[:, 1] if mode == "planes and lines" else 0),
        delta_deg=found.delta_deg,
        low_deg=seen.low_deg,
        high_deg=seen.high_deg,
        looked=seen.looked,
        transected=seen.transected,
        axial_planar=seen.axial_planar,
        unclear=~clear,
        off_girdle=off_girdle,
        naive_low_deg=found.delta_deg - naive,
        naive_high_deg=found.delta_deg + naive,
        naive_transected=size > naive,
        naive_axial_planar=(size <= naive) & (size + naive_narrow < settings.margin_deg),
    )


def _by_look(axes: Floats, outcrop: npt.NDArray[np.int64], held: npt.NDArray[np.int64]) -> Floats:
    """Moments, (folds, looks, outcrops, 24), of the first `held` (looks,) axes (folds, readings, 3)."""
    outcrops = np.arange(outcrop.max() + 1)
    rows = moments(axes)[:, :, np.newaxis, :] * (outcrop[:, np.newaxis] == outcrops)[..., np.newaxis]
    return np.asarray(np.cumsum(rows, axis=1)[:, held - 1])
