"""The markers of readings and of means, the same on every net and in its key."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.orient.features import Feature
from analysis.report.palette import MARKERS

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from analysis.orient.vectors import Floats
    from analysis.report.palette import Palette

DISC_PT: Final = 8.0
"""Points across the hinge's marker."""
DIAMOND_PT: Final = 13.0
"""Points across the mean intersection's."""


def scatter_marks(
    axes: Axes,
    xy: Floats,
    feature: Feature,
    palette: Palette,
    size_pt: float,
    *,
    gid: str,
    raster: bool = False,
) -> None:
    """Draw a feature's markers at places (n, 2): bedding filled, the others open."""
    colour = palette.colour_of(feature)
    scale = {"o": 0.85, "D": 0.85, "s": 0.9}.get(MARKERS[feature], 1.05)
    axes.scatter(
        xy[:, 0],
        xy[:, 1],
        s=(size_pt * scale) ** 2,
        marker=MARKERS[feature],
        facecolors=colour if feature is Feature.BEDDING else palette.card,
        edgecolors=palette.card if feature is Feature.BEDDING else colour,
        linewidths=0.5 if feature is Feature.BEDDING else max(0.16 * size_pt, 0.5),
        gid=gid,
        zorder=3.0,
        clip_on=False,
        rasterized=raster,
    )


def mean_mark(
    axes: Axes, place: Floats, gid: str, palette: Palette, *, disc: bool, small: bool = False
) -> float:
    """Draw the marker of a mean, a disc for the hinge and an open diamond else, and return its size in points."""
    size = (DISC_PT if not small else 0.75 * DISC_PT) if disc else DIAMOND_PT
    # Edge colour, edge width and height above the paper of each layer: the disc lies between the diamond's ground
    # and its line, so that neither hides the other where they coincide.
    layers = [(palette.card, 1.2, 4.1)] if disc else [(palette.card, 4.0, 4.0), (palette.accent, 1.9, 4.2)]
    for edge, width, zorder in layers:
        axes.plot(
            *place,
            marker="o" if disc else "D",
            markersize=size if disc else size / np.sqrt(2.0),
            markerfacecolor=palette.ink if disc else "none",
            markeredgecolor=edge,
            markeredgewidth=width,
            linestyle="none",
            gid=f"{gid}-ground" if zorder == 4.0 else gid,
            zorder=zorder,
            clip_on=False,
        )
    return size
