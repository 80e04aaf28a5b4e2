"""The key beside the net: what its marks mean, how many there are, and the figures of the means."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from analysis.fold.words import counted
from analysis.orient.features import Feature
from analysis.orient.forms import Notation
from analysis.orient.notation import write
from analysis.report.marks import mean_mark, scatter_marks
from analysis.report.palette import LETTERS, NAMES

if TYPE_CHECKING:
    from analysis.fold.records import AxisEstimate, FoldCheck
    from analysis.report.palette import Palette
    from analysis.report.sheet import Sheet


class NetKey:
    """The column beside the net: what the marks mean, how many there are, and the figures."""

    def __init__(
        self, sheet: Sheet, check: FoldCheck, palette: Palette, *, left: float, right: float
    ) -> None:
        self.sheet, self.check, self.palette = sheet, check, palette
        self.left, self.right = left, right

    def draw(self, top: float) -> None:
        """Draw the key from the height `top` downwards; lengths are inches on the sheet."""
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
        planes = f"from {counted(counts.cleavage, 'plane')}"
        lines = f" and {counted(counts.intersection, 'line')}" if counts.intersection else ""
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
