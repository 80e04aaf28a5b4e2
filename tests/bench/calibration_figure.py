"""The picture of the calibration: errors of every cell beside those of ordinary intervals, and readings needed."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from analysis.report.palette import LIGHT
from analysis.report.sheet import Sheet, house_style, save

if TYPE_CHECKING:
    from pathlib import Path

    import pandas as pd
    from matplotlib.axes import Axes

PANELS = (
    ("false_transected", "Called transected, truly 0°", 0, 0),
    ("false_axial_planar", "Called axial planar, truly 5° or more", 5, 20),
    ("missed", "Interval ever misses, all cells", 0, 20),
)
LOWEST = 0.1  # per cent: where a cell without an error is drawn
WIDE_IN, HIGH_IN = 9.6, 7.6


def frame(axes: Axes, title: str) -> None:
    """Give axes the project's plain look."""
    axes.set_facecolor(LIGHT.card)
    axes.grid(color=LIGHT.rule, linewidth=0.4)
    axes.set_axisbelow(True)
    for name, spine in axes.spines.items():
        spine.set_visible(name in ("left", "bottom"))
        spine.set_color(LIGHT.ink)
    axes.tick_params(colors=LIGHT.ink, labelsize=8.5)
    axes.set_title(title, loc="left", fontsize=10.0, color=LIGHT.ink)


def draw_errors(axes: Axes, table: pd.DataFrame, error: str, title: str) -> None:
    """Shares of folds by cell, each set sorted, on a logarithmic scale."""
    frame(axes, title)
    axes.set_yscale("log")
    axes.set_ylim(LOWEST, 100.0)
    axes.set_yticks([0.1, 1.0, 5.0, 7.0, 20.0, 100.0], ["0.1", "1", "5", "7", "20", "100"])
    axes.minorticks_off()
    rank = np.linspace(0.0, 100.0, len(table))
    for column, words, style, colour in (
        (f"naive_{error}", "ordinary interval", (0, (5, 2)), LIGHT.second),
        (error, "watched interval", "-", LIGHT.ink),
    ):
        share = 100.0 * np.sort((table[column] / table["folds"]).to_numpy())
        axes.plot(rank, np.maximum(share, LOWEST), color=colour, linestyle=style, linewidth=1.6, label=words)
    for limit in (5.0, 7.0):
        axes.axhline(limit, color=LIGHT.muted, linewidth=0.9)
    axes.set_xlabel("cells in order of their error, %", fontsize=9.0, color=LIGHT.ink)
    place = "upper left" if error == "false_axial_planar" else "lower right"
    axes.legend(loc=place, fontsize=8.5, frameon=True, facecolor=LIGHT.card, edgecolor="none")


def draw_readings(axes: Axes, table: pd.DataFrame) -> None:
    """Median readings a stream against the transection, one outcrop, upright hinge, limbs of 55 degrees."""
    frame(axes, "Median readings a stream, limbs 55°")
    part = table[
        (table["mode"] == "planes") & (table["limb_dip_deg"] == 55) & ~table["unequal"].astype(bool)
        & (table["plunge_deg"] == 0) & (table["outcrops"] == 1)
    ]  # fmt: skip
    marks = {3: ("o", "-"), 6: ("s", "--"), 10: ("^", ":")}
    for scatter, rows in part.groupby("scatter_deg"):
        ordered = rows.sort_values("transection_deg")
        medians = (ordered["median_readings"] / 2.0).replace(np.inf, np.nan)
        marker, style = marks[int(scatter)]
        axes.plot(
            ordered["transection_deg"], medians, color=LIGHT.ink, marker=marker, markersize=4.5,
            linestyle=style, linewidth=1.4, label=f"scatter {scatter:g}°",
        )  # fmt: skip
    axes.set_ylim(0.0, 62.0)
    axes.set_xlabel("true transection, degrees", fontsize=9.0, color=LIGHT.ink)
    axes.legend(loc="upper right", fontsize=8.5, frameon=True, facecolor=LIGHT.card, edgecolor="none")


def draw_calibration(table: pd.DataFrame, path: Path) -> None:
    """Write the picture as PNG and SVG beside each other; `path` has no ending."""
    with house_style():
        sheet = Sheet(WIDE_IN, HIGH_IN, LIGHT)
        sheet.words(0.4, HIGH_IN - 0.42, "A verdict that may be watched", 14.0, bold=True)
        folds = int(table["folds"].sum())
        about = (
            f"{len(table):,} cells, {folds:,} invented folds, a look after every reading to 60 a stream. "
            "Lines at 5 and 7% of folds."
        )
        sheet.words(0.4, HIGH_IN - 0.68, about, 9.5, quiet=True)
        places = ((0.75, 4.15), (5.45, 4.15), (0.75, 0.65), (5.45, 0.65))
        for (error, title, low, high), (left, bottom) in zip(PANELS, places, strict=False):
            part = table[(table["transection_deg"] >= low) & (table["transection_deg"] <= high)]
            draw_errors(sheet.axes_at(left, bottom, 3.8, 2.4), part, error, title)
        draw_readings(sheet.axes_at(*places[3], 3.8, 2.4), table)
        for ending in (".png", ".svg"):
            save(sheet.figure, path.with_suffix(ending))
