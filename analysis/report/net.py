"""The equal-area net, lower hemisphere, for print: readings, girdle, hinge, mean intersection, mean cleavage."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.orient.curves import ellipse, great_circle, lower_pieces, net_xy, rim_arc
from analysis.orient.features import Feature
from analysis.orient.forms import Notation
from analysis.orient.notation import write
from analysis.orient.vectors import equal_area_xy
from analysis.report.palette import LETTERS, MARKERS, NAMES, palette_named
from analysis.report.placing import Box, Placer
from analysis.report.sheet import POINTS_PER_INCH, Sheet, house_style

if TYPE_CHECKING:
    from collections.abc import Mapping

    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from analysis.fold.records import AxisEstimate, FoldCheck
    from analysis.orient.vectors import Floats
    from analysis.report.palette import Palette

_WIDE_IN: Final = 8.6
_NET_IN: Final = 5.9
_REACH: Final = 1.22  # of the net's axes, in radii
_KEY_IN: Final = 6.15  # where the key begins
_LABEL_PT: Final = 9.5
_DISC_PT: Final = 8.0  # the hinge's marker, points across
_DIAMOND_PT: Final = 13.0  # the mean intersection's
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
        _Key(self.sheet, self.check, self.palette).draw(end - 0.34)

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
        return bool(across < 1.3 * _DISC_PT)

    # -- words ---------------------------------------------------------------------------------------------

    def _draw_labels(self) -> None:
        check = self.check
        gap = self._points_as_pixels(_DIAMOND_PT) / 2.0 + 4.0
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
        made = self.axes.text(
            0.0,
            0.0,
            text,
            fontsize=_LABEL_PT,
            fontweight="bold" if bold else "normal",
            color=self.palette.ink,
            horizontalalignment="center",
            verticalalignment="center_baseline",
            gid=gid,
            zorder=5.0,
        )
        drawn = self.sheet.box_of(made)
        size = (drawn.right - drawn.left, drawn.top - drawn.bottom)
        place = self.placer.place(self._pixels(np.atleast_2d(anchors)), size, gap=gap)
        # The text's own middle is not quite the middle of its box.
        shift = np.array(place.box.centre) - np.array(drawn.centre)
        origin = self._pixels(np.zeros((1, 2)))[0] + shift
        made.set_position(tuple(self.axes.transData.inverted().transform(origin)))
        if place.leader:
            start, stop = np.array(place.box.nearest(*place.anchor)), np.array(place.anchor)
            # The line ends at the edge of the marker, not in its middle.
            way = (stop - start) / np.linalg.norm(stop - start)
            ends = np.array([start, stop - way * (gap - 3.0)])
            xy = np.asarray(self.axes.transData.inverted().transform(ends))
            self.axes.plot(
                xy[:, 0], xy[:, 1], color=self.palette.muted, linewidth=0.7, gid=f"{gid}-leader", zorder=3.5
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
    size = (_DISC_PT if not small else 0.75 * _DISC_PT) if disc else _DIAMOND_PT
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


class _Key:
    """The column beside the net: what the marks mean, how many there are, and the figures."""

    def __init__(self, sheet: Sheet, check: FoldCheck, palette: Palette) -> None:
        self.sheet, self.check, self.palette = sheet, check, palette
        self.left, self.right = _KEY_IN, _WIDE_IN - 0.3

    def draw(self, top: float) -> None:
        check, counts = self.check, self.check.readings
        y = self._readings(top)
        hinge, pole, mean = check.hinge, check.cleavage, check.intersection
        sources = {"both": "from bedding and hinge lines"}
        self._figure(
            y,
            "Hinge, trend/plunge",
            None if hinge is None else write(hinge.line, Notation.TREND_PLUNGE),
            "" if hinge is None else sources.get(hinge.source, f"from {hinge.source}"),
            hinge,
        )
        planes = f"from {counts.cleavage} plane{'' if counts.cleavage == 1 else 's'}"
        lines = (
            f" and {counts.intersection} line{'' if counts.intersection == 1 else 's'}"
            if counts.intersection
            else ""
        )
        self._figure(
            y - 1.1,
            "Mean cleavage, strike/dip",
            None if pole is None else write(pole.plane, Notation.STRIKE_DIP),
            f"{planes}{lines}",
            pole,
        )
        self._figure(
            y - 2.2,
            "Mean intersection, trend/plunge",
            None if mean is None else write(mean.axis.line, Notation.TREND_PLUNGE),
            "" if mean is None else f"{mean.measured} read, {mean.computed} computed",
            None if mean is None else mean.axis,
        )
        self.sheet.words(self.left, 0.42, "Equal area, lower hemisphere.", 8.0, quiet=True)
        self.sheet.words(self.left, 0.25, "Poles of planes; lines as read.", 8.0, quiet=True)

    def _readings(self, y: float) -> float:
        counts = self.check.readings
        self.sheet.words(self.left, y, "Readings", 9.0, quiet=True)
        for feature in Feature:
            y -= 0.245
            number = counts.of(feature)
            place = np.array([[self.left + 0.09, y + 0.045]])
            scatter_marks(self.sheet.axes, place, feature, self.palette, 7.5, gid=f"key-{feature}")
            self.sheet.words(self.left + 0.27, y, LETTERS[feature], 10.0, bold=True)
            self.sheet.words(self.left + 0.5, y, NAMES[feature], 10.0)
            self.sheet.words(self.right, y, f"{number}", 10.0, align="right", gid=f"count-{feature}")
        y -= 0.245
        where = "outcrop" if counts.outcrops == 1 else "outcrops"
        self.sheet.words(self.left + 0.5, y, where, 10.0, quiet=True)
        self.sheet.words(self.right, y, f"{counts.outcrops}", 10.0, quiet=True, align="right")
        return y - 0.42

    def _figure(
        self, y: float, name: str, figure: str | None, source: str, estimate: AxisEstimate | None
    ) -> None:
        self.sheet.strokes(
            [np.array([[self.left, y + 0.2], [self.right, y + 0.2]])], 0.7, self.palette.rule, "rule"
        )
        self.sheet.words(self.left, y, name, 9.0, quiet=True)
        middle = np.array([self.right - 0.12, y - 0.24])
        if estimate is self.check.cleavage:
            ends = middle + np.array([[-0.16, -0.07], [0.12, 0.07]])
            self.sheet.strokes([ends], 1.8, self.palette.second, "key-mean")
        elif estimate is not None:
            mean_mark(self.sheet.axes, middle, "key", self.palette, disc=estimate is self.check.hinge)
        if figure is None or estimate is None:
            self.sheet.words(self.left, y - 0.26, "not known yet", 10.0, gid=f"figure {name}")
            return
        self.sheet.words(self.left, y - 0.31, figure, 16.0, bold=True, gid=f"figure {name}")
        self.sheet.words(self.left, y - 0.51, source, 8.5, quiet=True)
        share = f"{100.0 * self.check.settings.confidence:g}%"
        size = estimate.ellipse
        text = (
            "no ellipse yet"
            if size is None
            else f"{share} ellipse ±{_angle(size.major_deg)} by ±{_angle(size.minor_deg)}"
        )
        self.sheet.words(self.left, y - 0.68, text, 8.5, quiet=True)


def _angle(value_deg: float) -> str:
    return f"{value_deg:.1f}°" if value_deg < 9.95 else f"{value_deg:.0f}°"
