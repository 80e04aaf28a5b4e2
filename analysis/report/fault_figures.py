"""Figures of the fault check: the plane of explanations, folds turning in shear, and the region that fits.

Each returns a matplotlib Figure, which its `savefig` writes as PNG or SVG. Colour only repeats what line style,
shape and words say.
"""

from __future__ import annotations

import textwrap
from typing import TYPE_CHECKING, Any, Final, NamedTuple

import numpy as np

from analysis.report.palette import palette_named
from analysis.report.placing import Box, Placer
from analysis.report.sheet import house_style
from analysis.strain import shear
from analysis.strain.cautions import CAUTIONS
from analysis.strain.curves import FaultCurves, fault_curves
from analysis.strain.frame import Sense
from analysis.strain.wording import headline, two_digits

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from analysis.orient.vectors import Floats
    from analysis.report.palette import Palette
    from analysis.strain.explanations import FaultCheck
    from analysis.strain.inverse import Region

_SHEAR_TICKS: Final = (0.0, 0.5, 1.0, 2.0, 5.0, 10.0)
_DOTS_PER_INCH: Final = 150.0
_HALF_LENGTH: Final = 2.6  # of the piece of a shear zone that is drawn, in halves of its width
_ZONE_TYPE: Final[dict[str, Any]] = {"fontsize": 10.5, "va": "center"}


class _Label(NamedTuple):
    """Words for a curve, (n, 2) in the data's coordinates."""

    words: str
    curve: Floats
    colour: str
    size: float


def plane_figure(check: FaultCheck, *, confidence: float = 0.95, theme: str = "light") -> Figure:
    """Fold-fault angle against transection: what each explanation predicts, and the pair with its ellipse.

    `theme` is "light" or "dark".
    """
    with house_style():
        return _plane(check, confidence, palette_named(theme))


def _plane(check: FaultCheck, confidence: float, palette: Palette) -> Figure:
    curves = fault_curves(check.pair, check.fault, confidence=confidence)
    figure = _figure(palette, 7.6, 7.0)
    axes = figure.add_axes((0.1, 0.29, 0.86, 0.49))
    _frame(palette, axes)
    axes.set_xlim(*curves.x_range_deg)
    axes.set_ylim(*curves.y_range_deg)
    side = {Sense.SINISTRAL: "clockwise", Sense.DEXTRAL: "anticlockwise", Sense.UNKNOWN: "acute"}[
        check.fault.sense
    ]
    axes.set_xlabel(f"fold-fault angle, degrees ({side})")
    axes.set_ylabel("transection, degrees (clockwise positive)")
    _shear_axis(palette, axes)
    labels = _draw_curves(palette, axes, curves)
    obstacles = _draw_pair(palette, axes, curves)
    _set_labels(axes, labels, obstacles)
    _words(palette, figure, headline(check), _figure_line(check), check.fold)
    return figure


def turning_figure(
    gamma: float,
    *,
    sense: Sense = Sense.SINISTRAL,
    fault_strike_deg: float | None = None,
    gamma_late: float | None = None,
    theme: str = "light",
) -> Figure:
    """Map view of folds and strain ellipse turning in a shear zone, at the start, halfway and at `gamma`.

    With `gamma_late` the ellipse records only that last part of the shear. The fault runs across the page; with
    its strike given an arrow shows where north lies.
    """
    with house_style():
        return _turning(
            gamma,
            gamma if gamma_late is None else min(gamma_late, gamma),
            -1 if sense is Sense.DEXTRAL else 1,
            fault_strike_deg,
            palette=palette_named(theme),
        )


def _turning(
    gamma: float, late: float, sign: int, fault_strike_deg: float | None, *, palette: Palette
) -> Figure:
    figure = _figure(palette, 7.6, 8.2)
    for row, passed in enumerate((0.0, 0.5 * gamma, gamma)):
        axes = figure.add_axes((0.04, 0.675 - 0.255 * row, 0.6, 0.235))
        recorded = max(passed - (gamma - late), 0.0)
        _draw_zone(palette, axes, passed, recorded, sign)
        _zone_words(palette, figure, 0.7925 - 0.255 * row, passed, recorded=recorded, sign=sign)
    name = "Dextral" if sign < 0 else "Sinistral"
    title = f"{name} shear of {two_digits(gamma)}: folds and strain ellipse from above"
    figure.text(0.04, 0.965, title, fontsize=13, color=palette.ink, weight="bold", va="top")
    if fault_strike_deg is not None:
        _north_arrow(palette, figure, fault_strike_deg)
    _caution(palette, figure, 0.125)
    return figure


def region_figure(region: Region, *, fold: str = "", theme: str = "light") -> Figure:
    """Which convergence, shear and onset of cleavage fit: the region the readings leave, with its outline."""
    with house_style():
        return _region(region, fold, palette_named(theme))


def _region(region: Region, fold: str, palette: Palette) -> Figure:
    figure = _figure(palette, 8.4, 5.6)
    panels = (
        (
            (0.08, 0.33, 0.4, 0.49), region.convergence_deg, region.gamma, region.map(), region.outline(),
            "convergence angle, degrees", "shear strain along the fault",
        ),
        (
            (0.57, 0.33, 0.4, 0.49), region.onset, region.gamma, region.onset_map().T,
            region.onset_outline()[..., ::-1], "share of the strain past when cleavage began", "",
        ),
    )  # fmt: skip
    for place, x, y, misfit, outline, x_words, y_words in panels:
        axes = figure.add_axes(place)
        _frame(palette, axes)
        axes.set_yscale("log")
        axes.contourf(x, y, misfit.T, levels=[-1.0, region.limit], colors=[palette.band])
        for piece in outline:
            axes.plot(piece[:, 0], piece[:, 1], color=palette.accent, lw=2.0, solid_capstyle="round")
        axes.set_xlim(x[0], x[-1])
        axes.set_ylim(y[0], y[-1])
        axes.set_xlabel(x_words)
        axes.set_ylabel(y_words)
        axes.yaxis.set_major_formatter(lambda value, _: f"{value:g}")
        if not len(outline):
            axes.text(0.5, 0.5, "nothing fits" if misfit.min() > region.limit else "all fits",
                      transform=axes.transAxes, ha="center", color=palette.ink)  # fmt: skip
    share = f"{100.0 * region.confidence:g}%"
    below = "Shaded: not ruled out, at the onset (left) or the convergence (right) that fits best."
    _words(palette, figure, f"Convergence, shear and onset that fit: {share} outline", below, fold)
    return figure


def _figure(palette: Palette, width: float, height: float) -> Figure:
    from matplotlib.backends.backend_agg import FigureCanvasAgg  # noqa: PLC0415 - loaded when a figure is drawn
    from matplotlib.figure import Figure  # noqa: PLC0415 - as above

    figure = Figure(figsize=(width, height), dpi=_DOTS_PER_INCH, facecolor=palette.paper)
    FigureCanvasAgg(figure)
    return figure


def _frame(palette: Palette, axes: Axes) -> None:
    axes.set_facecolor(palette.paper)
    axes.grid(color=palette.rule, lw=0.4)
    axes.set_axisbelow(True)
    for name, spine in axes.spines.items():
        spine.set_visible(name in ("left", "bottom"))
        spine.set_color(palette.ink)
    axes.tick_params(colors=palette.ink, labelsize=9)
    for label in (axes.xaxis.label, axes.yaxis.label):
        label.set_color(palette.ink)
        label.set_fontsize(10)


def _shear_axis(palette: Palette, axes: Axes) -> None:
    low, high = axes.get_xlim()
    top = axes.secondary_xaxis("top")
    angles = [float(shear.simple_shear(gamma).hinge_deg) for gamma in _SHEAR_TICKS]
    shown = [
        (angle, gamma) for angle, gamma in zip(angles, _SHEAR_TICKS, strict=True) if low <= angle <= high
    ]
    # In a wide picture the ticks near the fault would print over each other: keep those with room.
    kept: list[tuple[float, float]] = []
    for angle, gamma in shown:
        if not kept or abs(kept[-1][0] - angle) > 0.035 * (high - low):
            kept.append((angle, gamma))
    top.set_xticks([angle for angle, _ in kept], [f"{gamma:g}" for _, gamma in kept])
    top.tick_params(colors=palette.quiet, labelsize=9)
    top.spines["top"].set_color(palette.rule)
    top.set_xlabel("shear strain that rotation needs", color=palette.quiet, fontsize=9)


def _draw_curves(palette: Palette, axes: Axes, curves: FaultCurves) -> list[_Label]:
    labels = []
    for onset, curve in curves.late:
        axes.plot(*curve.T, color=palette.accent, lw=1.3, ls=(0, (1, 2)))
        words = f"late cleavage, after {100 * onset:g}%"
        labels.append(_Label(words, curve, palette.quiet, 8.5))
    for convergence_deg, curve in curves.transpression:
        axes.plot(*curve.T, color=palette.quiet, lw=1.2, ls=(0, (6, 2, 1, 2)))
        words = f"transpression {convergence_deg:g}°"
        labels.append(_Label(words, curve, palette.quiet, 8.5))
    axes.plot(*curves.partitioned.T, color=palette.second, lw=2.2, ls=(0, (5, 2)))
    axes.plot(*curves.rotation.T, color=palette.accent, lw=2.8)
    first = [
        _Label("rotation", curves.rotation, palette.ink, 9.5),
        _Label("partitioned", curves.partitioned, palette.ink, 9.5),
    ]
    return first + labels


def _draw_pair(palette: Palette, axes: Axes, curves: FaultCurves) -> list[Floats]:
    if curves.datum is None:
        bottom, top = curves.y_range_deg
        line = np.array([[curves.fold_fault_angle_deg, bottom], [curves.fold_fault_angle_deg, top]])
        axes.plot(*line.T, color=palette.ink, lw=1.2)
        return [line]
    taken = []
    if curves.ellipse is not None:
        axes.fill(*curves.ellipse.T, color=palette.ink, alpha=0.08, lw=0)
        axes.plot(*curves.ellipse.T, color=palette.ink, lw=1.2)
        taken.append(curves.ellipse)
        # The inside counts as taken too.
        taken += [curves.datum + share * (curves.ellipse - curves.datum) for share in (0.2, 0.4, 0.6, 0.8)]
    axes.plot(*curves.datum, marker="+", ms=15, mew=2.4, color=palette.ink)
    return [*taken, np.stack([curves.datum, curves.datum + 1e-6])]


def _set_labels(axes: Axes, labels: list[_Label], obstacles: list[Floats]) -> None:
    """Set each label where its own curve is far from the others, clear of words, of data and of curves."""
    gap = 4.0 * _DOTS_PER_INCH / 72.0
    x0, y0, x1, y1 = axes.bbox.extents
    placer = Placer(Box(x0 + gap, y0 + gap, x1 - gap, y1 - gap))
    pixels = [_pixels(axes, label.curve) for label in labels]
    for own in pixels:
        placer.block(own, 2.5, 2.0)
    for obstacle in obstacles:
        placer.block(_pixels(axes, obstacle), 3.0, 20.0)
    for index, label in enumerate(labels):
        anchors = _lonely(pixels[index], np.concatenate(pixels[:index] + pixels[index + 1 :]))
        text = axes.text(0, 0, label.words, color=label.colour, fontsize=label.size, ha="left", va="bottom")
        extent = text.get_window_extent()
        # A gap's width more than the words, so that two labels in one line keep apart.
        place = placer.place(anchors, (float(extent.width) + gap, float(extent.height)), gap=gap)
        x, y = axes.transData.inverted().transform((place.box.left + 0.5 * gap, place.box.bottom))
        text.set_position((float(x), float(y)))
        if place.leader:
            ends = np.array([place.anchor, place.box.nearest(*place.anchor)])
            axes.plot(*axes.transData.inverted().transform(ends).T, color=label.colour, lw=0.8)


def _lonely(own: Floats, others: Floats) -> Floats:
    """The half of a curve's places that lies farthest from the other curves: a label there is not misread."""
    thin = own[:: max(len(own) // 30, 1)]
    apart = np.min(np.hypot(*(thin[:, np.newaxis] - others[::3]).T), axis=0)
    return np.asarray(thin[apart >= np.quantile(apart, 0.5)])


def _pixels(axes: Axes, curve: Floats) -> Floats:
    """Places, (m, 2) pixels, about eight apart along the part of a curve that lies inside the axes."""
    corners = axes.transData.transform(curve)
    along = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(corners, axis=0).T))])
    at = np.arange(0.0, min(float(along[-1]), 8000.0), 8.0) if along[-1] > 0.0 else np.zeros(1)
    places = np.stack([np.interp(at, along, corners[:, i]) for i in (0, 1)], axis=-1)
    x0, y0, x1, y1 = axes.bbox.extents
    inside = (places >= [x0, y0]).all(axis=1) & (places <= [x1, y1]).all(axis=1)
    return np.asarray(places[inside] if inside.any() else places[:1])


def _words(palette: Palette, figure: Figure, title: str, below: str, fold: str) -> None:
    lines = textwrap.wrap(title, int(figure.get_figwidth() * 8.2))
    figure.text(0.04, 0.975, "\n".join(lines), fontsize=12.5, color=palette.ink, weight="bold", va="top")
    under = 0.975 - (0.26 * len(lines) + 0.04) / figure.get_figheight()
    figure.text(0.04, under, below, fontsize=10, color=palette.ink, va="top")
    if fold:
        figure.text(
            0.96, 0.02, fold, parse_math=False, fontsize=9, color=palette.quiet, ha="right", va="bottom"
        )
    _caution(palette, figure, 0.2)


def _caution(palette: Palette, figure: Figure, top: float) -> None:
    text = textwrap.fill(" ".join(CAUTIONS), int(figure.get_figwidth() * 14.6))
    figure.text(0.04, top, text, fontsize=8.5, color=palette.ink, va="top", linespacing=1.35)


def _figure_line(check: FaultCheck) -> str:
    if check.fold_fault_angle_deg is None:
        return ""
    line = (
        f"fold-fault angle {check.fold_fault_angle_deg:.0f}° (standard error {check.fold_fault_se_deg:.1f}°)"
    )
    if check.transection_deg is None or check.se_deg is None:
        return line
    turn = " clockwise" if check.transection_deg > 0.0 else " anticlockwise"
    return f"{line}, transection {abs(check.transection_deg):.1f}°{turn} ({check.se_deg:.1f}°)"


def _draw_zone(palette: Palette, axes: Axes, gamma: float, recorded: float, sign: int) -> None:
    """Draw a shear zone of width 2 on the page: x along the fault, the side with the folds' angles to `sign`."""
    from matplotlib.patches import FancyArrowPatch  # noqa: PLC0415 - loaded when a figure is drawn

    axes.set_facecolor(palette.paper)
    axes.set_xlim(-_HALF_LENGTH, _HALF_LENGTH)
    axes.set_ylim(-1.35, 1.35)
    axes.set_aspect("equal")
    axes.axis("off")
    page = np.array([1.0, -float(sign)])  # frame to page: angles clockwise from x run down the page
    hinge, axis = _directions(gamma, recorded)
    # Hinges that began 0.7 apart along the fault at 45 degrees, carried along: they cross the zone at y = 0.
    across = np.array([-1.0, 1.0]) * 1.0
    furthest = np.ceil((_HALF_LENGTH + 1.0 / np.tan(hinge)) / 0.7)
    for start in 0.7 * np.arange(-furthest, furthest + 1.0):
        trace = np.stack([start + across / np.tan(hinge), across], axis=-1) * page
        axes.plot(*trace.T, color=palette.rule, lw=2.2, zorder=1, clip_on=True)
    turn = np.linspace(0.0, 2.0 * np.pi, 181)
    circle = np.stack([np.cos(turn), np.sin(turn)]) * 0.52
    ellipse = (np.array([[1.0, recorded], [0.0, 1.0]]) @ circle).T * page
    axes.fill(*ellipse.T, color=palette.band, alpha=0.9, lw=0, zorder=2)
    axes.plot(*ellipse.T, color=palette.ink, lw=1.3, zorder=3)
    for angle, colour, style, width in (
        (hinge, palette.accent, "solid", 3.0),
        (axis, palette.second, "dashed", 2.2),
    ):
        if colour == palette.second and recorded <= 0.0:
            continue
        reach = min(0.97 / np.sin(angle), 2.35)
        line = np.array([[-1.0], [1.0]]) * reach * np.array([np.cos(angle), np.sin(angle)]) * page
        axes.plot(*line.T, color=colour, ls=style, lw=width, zorder=4)
    for y in (-1.0, 1.0):
        axes.plot([-_HALF_LENGTH, _HALF_LENGTH], [y, y], color=palette.ink, lw=1.8, zorder=5)
        # The wall on the side of positive frame y moves to positive x.
        way = 1.0 if y * page[1] > 0.0 else -1.0
        axes.add_patch(
            FancyArrowPatch((-0.55 * way, 1.2 * y), (0.55 * way, 1.2 * y), arrowstyle="-|>", mutation_scale=13,
                            color=palette.ink, lw=1.6)
        )  # fmt: skip


def _directions(gamma: float, recorded: float) -> tuple[float, float]:
    """Angles of hinge and long axis from the fault, radians."""
    predicted = shear.simple_shear(gamma, recorded)
    return float(np.radians(predicted.hinge_deg)), float(np.radians(predicted.cleavage_deg))


def _zone_words(
    palette: Palette, figure: Figure, middle: float, gamma: float, *, recorded: float, sign: int
) -> None:
    predicted = shear.simple_shear(gamma, recorded)
    turned = float(predicted.transection_deg)
    sense = "" if round(turned, 1) == 0.0 else " clockwise" if sign > 0 else " anticlockwise"
    x = 0.665
    figure.text(
        x, middle + 0.055, f"shear strain {two_digits(gamma)}", color=palette.ink, weight="bold", **_ZONE_TYPE
    )
    rows = [("━━", palette.accent, f"folds {float(predicted.hinge_deg):.1f}° from the fault")]
    if recorded > 0.0:
        rows.append(("╌╌", palette.second, f"cleavage {float(predicted.cleavage_deg):.1f}°"))
        rows.append(("", palette.ink, f"transection {turned:.1f}°{sense}"))
    else:
        rows.append(("", palette.ink, "no cleavage yet"))
    for row, (line, colour, words) in enumerate(rows):
        y = middle + 0.02 - 0.032 * row
        figure.text(x, y, line, color=colour, weight="bold", **_ZONE_TYPE)
        figure.text(x + 0.035 * bool(line), y, words, color=palette.ink, **_ZONE_TYPE)


def _north_arrow(palette: Palette, figure: Figure, fault_strike_deg: float) -> None:
    """Arrow to north on a page across which the fault runs, its strike to the right."""
    axes = figure.add_axes((0.86, 0.888, 0.1, 0.1 * figure.get_figwidth() / figure.get_figheight()))
    axes.axis("off")
    axes.set_xlim(-1.0, 1.0)
    axes.set_ylim(-1.0, 1.0)
    strike = np.radians(fault_strike_deg)
    tip = 0.55 * np.array([np.cos(strike), np.sin(strike)])
    x, y = float(tip[0]), float(tip[1])
    axes.annotate("", (x, y), (-x, -y), arrowprops={"arrowstyle": "-|>", "color": palette.ink, "lw": 1.6})
    axes.text(1.45 * x, 1.45 * y, "N", color=palette.ink, fontsize=9.5, ha="center", va="center")
