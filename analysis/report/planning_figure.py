"""A figure of a plan: how surely a fold is settled by so many readings, and how many readings it takes.

Curves are told apart by the words at their ends and by their dashes, not by colour.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.fold.words import degrees
from analysis.report.palette import palette_named
from analysis.report.sheet import Sheet, house_style

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from analysis.fold.planning import Plan, PlanRow, ReadingsNeeded
    from analysis.orient.vectors import Floats
    from analysis.report.palette import Palette

_WIDE_IN, _HIGH_IN = 9.0, 4.9
_DASHES: Final = ("-", "--", "-.", ":", (0, (6, 1.5, 1, 1.5, 1, 1.5)), (0, (2, 2)))
# Heights at which a curve may carry its label, best first: where curves are steep they lie furthest apart.
_LEVELS: Final = (0.6, 0.45, 0.75, 0.3, 0.87, 0.15)
_LABEL_WIDE, _LABEL_HIGH = 0.12, 0.07  # room of a label, shares of the axes


def draw_plan_of_readings(plan: Plan, *, theme: str = "light") -> Figure:
    """Draw a plan: power against readings on the left, readings against transection on the right.

    Raises SettingError for a theme other than "light" or "dark".
    """
    palette = palette_named(theme)
    with house_style():
        sheet = Sheet(_WIDE_IN, _HIGH_IN, palette)
        title = f"Readings to settle a fold, where {degrees(plan.settings.margin_deg)} matter"
        sheet.words(0.35, _HIGH_IN - 0.42, title, 14.0, bold=True, gid="title")
        for number, line in enumerate(sheet.broken(_about(plan), 9.5, _WIDE_IN - 0.7)):
            sheet.words(0.35, _HIGH_IN - 0.68 - 0.18 * number, line, 9.5, quiet=True, gid=f"about-{number}")
        _power(sheet.axes_at(0.75, 0.65, 3.55, 3.05), plan, palette)
        _needed(sheet.axes_at(5.35, 0.65, 3.35, 3.05), plan, palette)
        return sheet.figure


def _about(plan: Plan) -> str:
    design = plan.design
    first, second = design.limb_dips_deg
    limbs = f"limbs {first:g}°" if first == second else f"limbs {first:g}° and {second:g}°"
    where = "one outcrop" if design.outcrops == 1 else f"{design.outcrops} outcrops"
    other = design.line_scatter_deg if plan.mode == "lines" else design.cleavage_scatter_deg
    read = {"planes": "cleavage planes", "lines": "intersection lines"}.get(
        plan.mode, "cleavage planes and lines"
    )
    return (
        f"Bedding and {read} at {where}; {limbs}, hinge plunging {design.hinge_plunge_deg:g}°, scatter "
        f"{design.bedding_scatter_deg:g}° and {other:g}°. {plan.folds} invented folds for each transection, "
        f"watched reading by reading at {100.0 * plan.settings.confidence:g}% confidence."
    )


def _frame(axes: Axes, palette: Palette, title: str) -> None:
    axes.set_facecolor(palette.card)
    axes.grid(color=palette.rule, linewidth=0.4)
    axes.set_axisbelow(True)
    for name, spine in axes.spines.items():
        spine.set_visible(name in ("left", "bottom"))
        spine.set_color(palette.ink)
    axes.tick_params(colors=palette.ink, labelsize=9)
    axes.set_title(title, loc="left", fontsize=10.5, color=palette.ink)


def _power(axes: Axes, plan: Plan, palette: Palette) -> None:
    _frame(axes, palette, "Settled rightly, % of folds")
    axes.set_xlabel("readings, all features", fontsize=9.5, color=palette.ink)
    total = plan.total
    axes.set_xlim(0.0, float(total[-1]))
    axes.set_ylim(0.0, 103.0)
    for number, (row, curve) in enumerate(zip(plan.rows, plan.power, strict=True)):
        axes.plot(
            total,
            100.0 * curve,
            color=palette.accent if row.transection_deg else palette.ink,
            linewidth=1.6,
            linestyle=_DASHES[number % len(_DASHES)],
            gid=f"power-{number}",
        )
    for row, (x, y) in zip(plan.rows, _label_places(total / total[-1], plan.power), strict=True):
        axes.text(
            x * float(total[-1]),
            100.0 * y,
            degrees(row.transection_deg),
            fontsize=9.0,
            color=palette.ink,
            horizontalalignment="center",
            verticalalignment="center",
            bbox={"facecolor": palette.card, "edgecolor": "none", "pad": 1.2},
            gid=f"power-label-{row.transection_deg:g}",
        )


def _label_places(x: Floats, curves: Floats) -> list[tuple[float, float]]:
    """A place on each curve, shares of both axes, where its label keeps clear of the labels placed before."""
    places: list[tuple[float, float]] = []
    for curve in curves:
        on_curve = [
            (float(x[at]), float(curve[at]))
            for at in (int(np.argmax(curve >= level)) for level in _LEVELS if curve[-1] >= level)
        ]
        on_curve.append((float(x[-1]), float(curve[-1])))
        clearances = [
            min((max(abs(a - c) / _LABEL_WIDE, abs(b - d) / _LABEL_HIGH) for c, d in places), default=9.0)
            for a, b in on_curve
        ]
        clear = [place for place, room in zip(on_curve, clearances, strict=True) if room >= 1.0]
        places.append(clear[0] if clear else on_curve[int(np.argmax(clearances))])
    return places


def _needed(axes: Axes, plan: Plan, palette: Palette) -> None:
    _frame(axes, palette, "Readings to the verdict")
    axes.set_xlabel("true transection, degrees", fontsize=9.5, color=palette.ink)
    rows = sorted(plan.rows, key=lambda row: row.transection_deg)
    angles = np.array([row.transection_deg for row in rows])
    axes.set_ylim(0.0, float(plan.total[-1]) * 1.03)
    margin = plan.settings.margin_deg
    axes.axvspan(-margin, margin, color=palette.band, linewidth=0.0, zorder=0, gid="band")
    for words, style, marker, pick in (
        ("half of folds", "-", "o", _median),
        ("four in five", "--", "s", _for_80),
    ):
        found = [pick(row) for row in rows]
        counts = np.array([np.nan if needed is None else float(needed.total) for needed in found])
        axes.plot(
            angles, counts, color=palette.ink, linewidth=1.4, linestyle=style, marker=marker, markersize=4.5,
            label=words, gid=words.replace(" ", "-"),
        )  # fmt: skip
    never = [row.transection_deg for row in rows if row.median is None]
    if never:
        axes.plot(
            never,
            np.full(len(never), float(plan.total[-1])),
            linestyle="none",
            marker="^",
            markersize=6.0,
            markerfacecolor="none",
            markeredgecolor=palette.ink,
            label=f"half not by {int(plan.total[-1])}",
            gid="never",
        )
    pad = max(1.0, 0.05 * float(np.ptp(angles)))
    axes.set_xlim(float(angles[0]) - pad, float(angles[-1]) + pad)
    legend = axes.legend(
        loc="upper right", fontsize=9.0, frameon=True, facecolor=palette.card, edgecolor="none"
    )
    for text in legend.get_texts():
        text.set_color(palette.ink)


def _median(row: PlanRow) -> ReadingsNeeded | None:
    return row.median


def _for_80(row: PlanRow) -> ReadingsNeeded | None:
    return row.for_80_percent
