"""The equal-area net, lower hemisphere, for print: readings, girdle, hinge, mean intersection, mean cleavage."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.orient.curves import ellipse, great_circle, lower_pieces, net_xy, rim_arc
from analysis.orient.features import Feature
from analysis.orient.vectors import equal_area_xy
from analysis.report.labels import put_words
from analysis.report.marks import DIAMOND_PT, DISC_PT, mean_mark, scatter_marks
from analysis.report.net_key import NetKey
from analysis.report.palette import LETTERS, palette_named
from analysis.report.placing import Box, Placer
from analysis.report.sheet import POINTS_PER_INCH, Sheet, house_style

if TYPE_CHECKING:
    from collections.abc import Mapping

    from matplotlib.figure import Figure

    from analysis.fold.records import AxisEstimate, FoldCheck
    from analysis.orient.vectors import Floats
    from analysis.report.palette import Palette

_WIDE_IN: Final = 8.6
_NET_IN: Final = 5.9
_REACH: Final = 1.22  # of the net's axes, in radii
_KEY_IN: Final = 6.15  # where the key begins
_LABEL_PT: Final = 9.5
_RASTER_FROM: Final = 3000  # readings; more than these are set as an image within an SVG
_SECOND_CLUSTER_DEG: Final = 40.0


def draw_net(check: FoldCheck, readings: Mapping[Feature, Floats], *, theme: str = "light") -> Figure:
    """Draw a fold on the net.

    Parameters
    ----------
    check
        The check of the fold.
    readings
        Its readings by feature, axes of shape (n, 3): poles of planes, lines. Features may be missing.
    theme
        "light" or "dark"; raises SettingError for any other.

    """
    with house_style():
        palette = palette_named(theme)
        drawing = _Net(check, {f: _axes(readings.get(f)) for f in Feature}, palette)
        drawing.draw()
        return drawing.sheet.figure


def _axes(vectors: Floats | None) -> Floats:
    return np.zeros((0, 3)) if vectors is None else np.asarray(vectors, dtype=float).reshape(-1, 3)


class _Net:
    """One drawing under way."""

    def __init__(self, check: FoldCheck, readings: Mapping[Feature, Floats], palette: Palette) -> None:
        self.check, self.readings, self.palette = check, readings, palette
        self.sheet = Sheet(_WIDE_IN, 7.15, palette)
        total = sum(len(vectors) for vectors in readings.values())
        # Fewer readings are drawn larger; a thousand must still leave the girdle to be seen.
        self.marker_pt = float(np.clip(7.5 * (60.0 / max(total, 60)) ** 0.3, 2.5, 7.5))
        self.raster = total > _RASTER_FROM

    def draw(self) -> None:
        end = self.sheet.draw_strip(self.check)
        bottom = (end - _NET_IN) / 2.0
        self.axes = self.sheet.axes_at(0.12, bottom, _NET_IN, _NET_IN)
        self.axes.set_axis_off()
        self.axes.set_xlim(-_REACH, _REACH)
        self.axes.set_ylim(-_REACH, _REACH)
        low, high = self._pixels(np.array([[-_REACH, -_REACH], [_REACH, _REACH]]))
        self.placer = Placer(Box(low[0] + 2.0, low[1] + 2.0, high[0] - 2.0, high[1] - 2.0))
        self._draw_frame()
        self._draw_circles()
        self._draw_readings()
        self._draw_means()
        self._draw_labels()
        key = NetKey(self.sheet, self.check, self.palette, left=_KEY_IN, right=_WIDE_IN - 0.3)
        key.draw(end - 0.34)

    def _pixels(self, xy: Floats) -> Floats:
        return np.asarray(self.axes.transData.transform(xy), dtype=float)

    def _points_as_pixels(self, points: float) -> float:
        return points * self.sheet.figure.dpi / POINTS_PER_INCH

    def _line(
        self,
        xy: Floats,
        gid: str,
        colour: str,
        width: float,
        *,
        dashes: bool = False,
        cost: float = 1.0,
        zorder: float = 2.0,
    ) -> None:
        self.axes.plot(
            xy[:, 0],
            xy[:, 1],
            color=colour,
            linewidth=width,
            linestyle=(0, (2.0, 2.6)) if dashes else "solid",
            gid=gid,
            zorder=zorder,
        )
        # Every few pixels along the line there is something that words should keep off.
        places = self._pixels(xy)
        steps = np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(places, axis=0), axis=1))])
        even = np.arange(0.0, steps[-1] + 1.0, 4.0)
        self.placer.block(
            np.stack([np.interp(even, steps, places[:, k]) for k in (0, 1)], axis=-1), 1.0, cost
        )

    # -- what is drawn -------------------------------------------------------------------------------------

    def _draw_frame(self) -> None:
        from matplotlib.patches import Circle  # noqa: PLC0415 - loaded when a figure is drawn

        ink = self.palette.ink
        self.axes.add_patch(
            Circle((0.0, 0.0), 1.0, facecolor=self.palette.card, edgecolor="none", zorder=0.5)
        )
        turn = np.radians(np.arange(0, 361))
        self._line(np.stack([np.sin(turn), np.cos(turn)], axis=-1), "rim", ink, 1.5, cost=3.0)
        for azimuth in range(0, 360, 10):
            ray = np.array([np.sin(np.radians(azimuth)), np.cos(np.radians(azimuth))])
            main = azimuth % 90 == 0
            inner = 0.945 if main else 0.972
            self._line(np.array([ray, ray * inner]), f"tick-{azimuth:03d}", ink, 1.4 if main else 0.8)
        centre = 0.018 * np.array([[[-1.0, 0.0], [1.0, 0.0]], [[0.0, -1.0], [0.0, 1.0]]])
        for line in centre:
            self._line(line, "centre", self.palette.muted, 0.8)
        north = self.axes.text(
            0.0,
            1.03,
            "N",
            fontsize=12.0,
            fontweight="bold",
            color=ink,
            horizontalalignment="center",
            gid="north",
        )
        self.placer.take(self.sheet.box_of(north))

    def _draw_circles(self) -> None:
        check, palette = self.check, self.palette
        if check.hinge is not None and check.readings.bedding:
            self._line(net_xy(great_circle(check.hinge.vector)), "girdle", palette.muted, 1.1, dashes=True)
        if check.cleavage is not None:
            self._line(net_xy(great_circle(check.cleavage.vector)), "cleavage-circle", palette.second, 1.8)

    def _draw_readings(self) -> None:
        for feature, vectors in self.readings.items():
            if not len(vectors):
                continue
            xy = equal_area_xy(vectors)
            scatter_marks(
                self.axes,
                xy,
                feature,
                self.palette,
                self.marker_pt,
                gid=f"readings-{feature}",
                raster=self.raster,
            )
            self.placer.block(self._pixels(xy), self._points_as_pixels(self.marker_pt) / 2.0, 12.0)

    def _draw_means(self) -> None:
        check = self.check
        if check.hinge is not None:
            self._draw_ellipse(check.hinge, "hinge", self.palette.ink)
        if check.intersection is not None:
            self._draw_ellipse(check.intersection.axis, "intersection", self.palette.accent)
        # In an axial planar fold the two lie on top of each other: the disc shows inside the diamond.
        if check.hinge is not None:
            self._draw_mean(check.hinge, "hinge")
        if check.intersection is not None:
            self._draw_mean(check.intersection.axis, "intersection")

    def _draw_ellipse(self, estimate: AxisEstimate, gid: str, colour: str) -> None:
        e = estimate.ellipse
        if e is None:
            return
        curve = ellipse(estimate.vector, e.major_axis, e.minor_axis, e.major_deg, e.minor_deg)
        pieces = [net_xy(piece) for piece in lower_pieces(curve)]
        for number, piece in enumerate(pieces):
            ground = piece if len(pieces) == 1 else np.concatenate([piece, rim_arc(piece[-1], piece[0])])
            self.axes.fill(ground[:, 0], ground[:, 1], color=colour, alpha=0.14, linewidth=0.0, zorder=1.5)
            # A line of the ground's colour under it keeps it clear of the readings, but not of the rim.
            x, y = (piece if len(pieces) == 1 else piece[2:-2]).T
            self.axes.plot(x, y, color=self.palette.card, linewidth=3.0, solid_capstyle="butt", zorder=3.2)
            self._line(piece, f"{gid}-ellipse-{number}", colour, 1.4, zorder=3.3)

    def _draw_mean(self, estimate: AxisEstimate, gid: str) -> None:
        place = equal_area_xy(estimate.vector)
        size = mean_mark(
            self.axes, place, gid, self.palette, disc=gid == "hinge", small=self._hides(estimate)
        )
        self.placer.block(self._pixels(place), self._points_as_pixels(size) / 2.0, 40.0)

    def _hides(self, estimate: AxisEstimate) -> bool:
        """Whether a marker of the usual size would hide the ellipse of a mean."""
        if estimate.ellipse is None:
            return False
        # On the net an angle is about sqrt(2) sin(angle/2) radii long.
        radius_pt = _NET_IN / (2.0 * _REACH) * POINTS_PER_INCH
        across = 2.0 * np.sqrt(2.0) * np.sin(np.radians(estimate.ellipse.minor_deg / 2.0)) * radius_pt
        return bool(across < 1.3 * DISC_PT)

    # -- words ---------------------------------------------------------------------------------------------

    def _draw_labels(self) -> None:
        check = self.check
        gap = self._points_as_pixels(DIAMOND_PT) / 2.0 + 4.0
        if check.hinge is not None:
            self._label("hinge", equal_area_xy(check.hinge.vector), "label-hinge", gap, bold=True)
        if check.intersection is not None:
            place = equal_area_xy(check.intersection.axis.vector)
            self._label("mean intersection", place, "label-intersection", gap, bold=True)
        if check.cleavage is not None:
            self._label("mean cleavage", _along(check.cleavage.vector), "label-cleavage", 4.0)
        if check.hinge is not None and check.readings.bedding:
            self._label("bedding girdle", _along(check.hinge.vector), "label-girdle", 4.0)
        near = self._points_as_pixels(self.marker_pt) / 2.0 + 3.0
        for feature, vectors in self.readings.items():
            for number, crowd in enumerate(crowds(vectors)):
                self._label(
                    LETTERS[feature], equal_area_xy(crowd), f"letter-{feature}-{number}", near, bold=True
                )

    def _label(self, text: str, anchors: Floats, gid: str, gap: float, *, bold: bool = False) -> None:
        put_words(
            self.sheet,
            self.axes,
            self.placer,
            text,
            self._pixels(np.atleast_2d(anchors)),
            size_pt=_LABEL_PT,
            gid=gid,
            gap=gap,
            bold=bold,
            clear=gap - 3.0,
        )


def _along(pole: Floats) -> Floats:
    """Places (n, 2) along a great circle at which its name may stand."""
    return net_xy(great_circle(pole, 41))


def crowds(vectors: Floats) -> list[Floats]:
    """Readings in the midst of up to two crowds, each (m, 3): where a feature's letter may stand.

    The first crowd is about the reading with the most others within 15 degrees; the second, if a fifth of the
    readings or more lie 40 degrees or more from that, about the one among those.
    """
    if not len(vectors):
        return []
    sample = vectors[:: max(len(vectors) // 400, 1)]
    cosines = np.abs(sample @ sample.T)
    close = cosines > np.cos(np.radians(15.0))
    found = []
    left = np.ones(len(sample), dtype=bool)
    for _ in range(2):
        if left.sum() < max(1, 0.2 * len(sample)):
            break
        middle = int(np.argmax(np.where(left, (close & left).sum(axis=1), -1)))
        found.append(sample[close[middle] & left])
        left &= cosines[middle] < np.cos(np.radians(_SECOND_CLUSTER_DEG))
    return found
