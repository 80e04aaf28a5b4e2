"""Words set on a drawing where there is room for them, with a thin line to what they name where they stand off."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from analysis.orient.vectors import Floats
    from analysis.report.placing import Placer
    from analysis.report.sheet import Sheet


def put_words(
    sheet: Sheet,
    axes: Axes,
    placer: Placer,
    text: str,
    anchors: Floats,
    *,
    size_pt: float,
    gid: str,
    gap: float,
    bold: bool = False,
    inside: bool = False,
    clear: float = 0.0,
) -> None:
    """Write words beside one of the places that they may name.

    Parameters
    ----------
    sheet, axes, placer
        What is drawn on, the axes that the words belong to, and what knows where there is room.
    anchors
        Places, (n, 2) pixels, any of which the words may stand at.
    gap
        Pixels between words and place.
    inside
        Whether the words stand on the place instead of beside it; then no line leads there.
    clear
        Pixels before its place at which a line ends, so that it stops at the edge of a marker.

    """
    made = axes.text(
        *_origin(axes),
        text,
        fontsize=size_pt,
        fontweight="bold" if bold else "normal",
        color=sheet.palette.ink,
        horizontalalignment="center",
        verticalalignment="center_baseline",
        gid=gid,
        zorder=5.0,
    )
    drawn = sheet.box_of(made)
    size = (drawn.right - drawn.left, drawn.top - drawn.bottom)
    place = placer.place(anchors, size, gap=gap, on_anchor=inside)
    # The text's own middle is not quite the middle of its box.
    shift = np.array(place.box.centre) - np.array(drawn.centre)
    to_data = axes.transData.inverted()
    x, y = to_data.transform(axes.transData.transform(_origin(axes)) + shift)
    made.set_position((float(x), float(y)))
    if place.leader and not inside:
        start, stop = np.array(place.box.nearest(*place.anchor)), np.array(place.anchor)
        way = (stop - start) / max(float(np.linalg.norm(stop - start)), 1e-9)
        ends = np.asarray(to_data.transform(np.array([start, stop - clear * way])))
        axes.plot(
            ends[:, 0], ends[:, 1], color=sheet.palette.muted, linewidth=0.7, gid=f"{gid}-leader", zorder=3.5
        )


def _origin(axes: Axes) -> tuple[float, float]:
    """A place inside the axes, in their own measure, to measure words at."""
    (left, right), (low, high) = axes.get_xlim(), axes.get_ylim()
    return (left + right) / 2.0, (low + high) / 2.0
