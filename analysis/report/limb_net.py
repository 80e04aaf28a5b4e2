"""Limb against limb on a net: where each limb meets the cleavage, and where the hinge lies.

In a transected fold the intersections of the two limbs plunge apart, to either side of the hinge; in one with
axial-planar cleavage all three fall together.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.orient.curves import great_circle, net_xy
from analysis.orient.vectors import equal_area_xy
from analysis.report.labels import put_words
from analysis.report.marks import mean_mark
from analysis.report.palette import palette_named
from analysis.report.placing import Box, Placer
from analysis.report.sheet import Sheet, house_style

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from analysis.fold.records import FoldCheck
    from analysis.orient.vectors import Floats
    from analysis.report.palette import Palette

_SIDE_IN: Final = 5.6
_REACH: Final = 1.2
_WORDS_PT: Final = 10.5
_DASHES: Final = ((0, (7.0, 2.5)), (0, (1.2, 2.0)))


def draw_limbs(check: FoldCheck, *, theme: str = "light") -> Figure | None:
    """Draw mean bedding of both limbs, the mean cleavage, their intersections and the hinge.

    None where the check does not know both limbs and the cleavage. `theme` is "light" or "dark".
    """
    if check.limbs is None or check.cleavage is None or check.hinge is None or not check.limb_lines:
        return None
    with house_style():
        drawing = _Limbs(check, palette_named(theme))
        drawing.draw()
        return drawing.sheet.figure


class _Limbs:
    """One drawing under way."""

    def __init__(self, check: FoldCheck, palette: Palette) -> None:
        self.check, self.palette = check, palette
        self.sheet = Sheet(_SIDE_IN, _SIDE_IN, palette)
        self.axes = self.sheet.axes_at(0.0, 0.0, _SIDE_IN, _SIDE_IN)
        self.axes.set_axis_off()
        self.axes.set_xlim(-_REACH, _REACH)
        self.axes.set_ylim(-_REACH, _REACH)
        side = _SIDE_IN * self.sheet.figure.dpi
        self.placer = Placer(Box(2.0, 2.0, side - 2.0, side - 2.0))

    def draw(self) -> None:
        from matplotlib.patches import Circle  # noqa: PLC0415 - loaded when a figure is drawn

        check, palette = self.check, self.palette
        assert check.limbs is not None and check.cleavage is not None  # noqa: S101, PT018 - for the type checker
        assert check.hinge is not None  # noqa: S101 - as above
        self.axes.add_patch(Circle((0.0, 0.0), 1.0, facecolor=palette.card, edgecolor="none", zorder=0.5))
        turn = np.radians(np.arange(361))
        self._curve(np.stack([np.sin(turn), np.cos(turn)], axis=-1), palette.ink, 1.5, "rim")
        for azimuth in range(0, 360, 10):
            ray = np.array([np.sin(np.radians(azimuth)), np.cos(np.radians(azimuth))])
            self._curve(np.array([ray, 0.97 * ray]), palette.ink, 0.8, f"tick-{azimuth:03d}")
        north = self.axes.text(
            0.0, 1.03, "N", fontsize=12.0, fontweight="bold", color=palette.ink, ha="center"
        )
        self.placer.take(self.sheet.box_of(north))
        beds = [great_circle(limb.plane.pole) for limb in check.limbs.both]
        for number, bed in enumerate(beds):
            self._curve(net_xy(bed), palette.ink, 1.5, f"limb-{number}", dashes=_DASHES[number])
        cleavage = great_circle(check.cleavage.vector)
        self._curve(net_xy(cleavage), palette.second, 1.9, "cleavage-circle")
        marks: list[tuple[Floats, str]] = []
        for number, line in enumerate(check.limb_lines):
            place = equal_area_xy(line.computed.vector)
            mean_mark(self.axes, place, f"computed-{number}", palette, disc=False)
            marks.append((place, f"on the {line.limb}"))
            if line.measured is not None:
                self.axes.plot(
                    *equal_area_xy(line.measured.vector),
                    marker="x",
                    markersize=8.0,
                    markeredgewidth=2.0,
                    color=palette.accent,
                    linestyle="none",
                    gid=f"measured-{number}",
                    zorder=4.3,
                )
                self._block(equal_area_xy(line.measured.vector), 6.0)
        hinge = equal_area_xy(check.hinge.vector)
        mean_mark(self.axes, hinge, "hinge", palette, disc=True)
        for place, _ in [*marks, (hinge, "")]:
            self._block(place, 8.0)
        self._label("hinge", np.atleast_2d(hinge), 9.0, bold=True)
        for place, words in marks:
            self._label(words, np.atleast_2d(place), 11.0, bold=True)
        for limb, bed in zip(check.limbs.both, beds, strict=True):
            self._label(f"bedding, {limb.name}", net_xy(bed)[::4], 4.0)
        self._label("mean cleavage", net_xy(cleavage)[::4], 4.0)

    def _pixels(self, xy: Floats) -> Floats:
        return np.asarray(self.axes.transData.transform(xy), dtype=float)

    def _block(self, place: Floats, radius: float) -> None:
        self.placer.block(self._pixels(np.atleast_2d(place)), radius * 100.0 / 72.0, 40.0)

    def _curve(
        self,
        xy: Floats,
        colour: str,
        width: float,
        gid: str,
        *,
        dashes: tuple[int, tuple[float, float]] | None = None,
    ) -> None:
        self.axes.plot(
            xy[:, 0],
            xy[:, 1],
            color=colour,
            linewidth=width,
            linestyle=dashes or "solid",
            gid=gid,
            zorder=2.0,
        )
        self.placer.block(self._pixels(xy), 1.0, 2.0)

    def _label(self, text: str, anchors: Floats, gap: float, *, bold: bool = False) -> None:
        put_words(
            self.sheet,
            self.axes,
            self.placer,
            text,
            self._pixels(anchors),
            size_pt=_WORDS_PT,
            gid=f"label-{text}",
            gap=gap,
            bold=bold,
            clear=gap - 3.0,
        )
