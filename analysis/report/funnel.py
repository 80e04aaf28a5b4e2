"""The narrowing funnel, for print: the transection against the number of readings, its valid interval closing in."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import numpy as np

from analysis.errors import SettingError
from analysis.fold.ahead import interval_ahead
from analysis.fold.records import Verdict
from analysis.fold.words import degrees
from analysis.orient.features import Feature
from analysis.report.labels import put_words
from analysis.report.palette import palette_named
from analysis.report.placing import Box, Placer
from analysis.report.sheet import Sheet, house_style

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from matplotlib.figure import Figure

    from analysis.fold.records import FoldCheck
    from analysis.orient.vectors import Floats
    from analysis.report.palette import Palette

_WIDE_IN: Final = 8.6
_HIGH_IN: Final = 5.9
_LEFT_IN, _RIGHT_IN, _BOTTOM_IN = 0.85, 0.35, 0.72
_MOST_DOTS: Final = 40  # more readings than this and the line alone is clearer
_WORDS_PT: Final = 9.5
_FEWEST_AHEAD: Final = 4.0  # room, in readings, to the right of a history that is only just begun
_SETTLED: Final = (Verdict.TRANSECTED, Verdict.AXIAL_PLANAR)


@dataclass(frozen=True, slots=True)
class HistoryPoint:
    """The check as it stood after so many readings of the fold; degrees, clockwise positive, None if unknown."""

    after: int
    delta_deg: float | None
    low_deg: float | None
    high_deg: float | None
    verdict: Verdict

    @classmethod
    def of(cls, check: FoldCheck, after: int) -> HistoryPoint:
        """The point that the check after so many readings adds to its fold's history."""
        low, high = check.interval_deg or (None, None)
        return cls(after, check.transection_deg, low, high, check.verdict)


def history_of(checks: Iterable[tuple[int, FoldCheck]]) -> tuple[HistoryPoint, ...]:
    """Make the history of a fold from its checks, each with the number of readings it was made after."""
    return tuple(HistoryPoint.of(check, after) for after, check in checks)


def draw_funnel(history: Sequence[HistoryPoint], check: FoldCheck, *, theme: str = "light") -> Figure:
    """Draw the history of a fold's check, the interval expected ahead, and the band of M.

    Parameters
    ----------
    history
        The check after each reading, in ascending order of `after`; raises SettingError if it is not. Points
        without an estimate or an interval are left out of the line or the funnel.
    check
        The check now, with its forecast if there is one.
    theme
        "light" or "dark"; raises SettingError for any other.

    """
    counts = [point.after for point in history]
    if counts != sorted(counts):
        raise SettingError(
            "the history is not in the order of the readings", where="history", expected="ascending counts"
        )
    with house_style():
        drawing = _Funnel(history, check, palette_named(theme))
        drawing.draw()
        return drawing.sheet.figure


def settled_from(history: Sequence[HistoryPoint]) -> int | None:
    """Number of readings from which on the last verdict has stood, if that verdict settles the question."""
    if not history or history[-1].verdict not in _SETTLED:
        return None
    first = history[-1].after
    for point in reversed(history):
        if point.verdict is not history[-1].verdict:
            break
        first = point.after
    return first


def shown_span_deg(delta: Floats, low: Floats, high: Floats, margin_deg: float) -> tuple[float, float]:
    """Lowest and highest angle that the funnel shows, degrees.

    The band of M and the estimates of the later two thirds always, the interval as it has been for the later
    half; the wide mouth of the funnel runs out of the frame. `delta`, `low`, `high` have shape (n,), NaN
    where unknown.
    """
    edges = [-1.5 * margin_deg, 1.5 * margin_deg]
    drawn = delta[np.isfinite(delta)]
    known = np.isfinite(low) & np.isfinite(high)
    late = drawn[len(drawn) // 3 :]
    if len(late):
        edges += [float(late.min()) - 2.0, float(late.max()) + 2.0]
    if known.any():
        lows, highs = low[known], high[known]
        start = len(lows) // 2
        edges += [1.08 * float(lows[start:].min()), 1.08 * float(highs[start:].max())]
    return max(min(edges), -90.0), min(max(edges), 90.0)


def without_sense(delta: Floats, low: Floats, high: Floats) -> tuple[Floats, Floats, Floats]:
    """The same estimates and intervals, each (n,), degrees, where only the size of the angle means anything."""
    back = delta < 0.0
    low, high = np.where(back, -high, low), np.where(back, -low, high)
    return np.abs(delta), np.maximum(low, 0.0), high


class _Funnel:
    """One drawing under way."""

    def __init__(self, history: Sequence[HistoryPoint], check: FoldCheck, palette: Palette) -> None:
        self.history, self.check, self.palette = history, check, palette
        self.sheet = Sheet(_WIDE_IN, _HIGH_IN, palette)
        self.margin = check.settings.margin_deg
        self.after = np.array([point.after for point in history], dtype=float)
        self.delta = _column([point.delta_deg for point in history])
        self.low = _column([point.low_deg for point in history])
        self.high = _column([point.high_deg for point in history])
        ahead = interval_ahead(check)
        self.ahead = np.array([point.after for point in ahead], dtype=float)
        self.ahead_low = np.array([point.low_deg for point in ahead])
        self.ahead_high = np.array([point.high_deg for point in ahead])
        self.signed = check.sense != "unsigned"
        if not self.signed:
            _, self.ahead_low, self.ahead_high = without_sense(
                np.full(len(ahead), check.transection_deg or 0.0), self.ahead_low, self.ahead_high
            )
            self.delta, self.low, self.high = without_sense(self.delta, self.low, self.high)

    def draw(self) -> None:
        top = self.sheet.draw_strip(self.check) - 0.5
        frame = (_LEFT_IN, _BOTTOM_IN, _WIDE_IN - _LEFT_IN - _RIGHT_IN, top - _BOTTOM_IN)
        self.axes = self.sheet.axes_at(*frame)
        self._set_span()
        low, high = self._pixels([self.first, self.last], [self.bottom, self.top])
        self.placer = Placer(Box(low[0] + 4.0, low[1] + 4.0, high[0] - 4.0, high[1] - 4.0))
        self._draw_frame()
        self._draw_history()
        self._draw_ahead()
        self._draw_words(top)

    def _set_span(self) -> None:
        self.bottom, self.top = shown_span_deg(self.delta, self.low, self.high, self.margin)
        if not self.signed:
            self.bottom = -0.1 * self.top
        self.first = float(self.after[0]) if len(self.after) else 0.0
        last = float(self.after[-1]) if len(self.after) else 20.0
        self.settles = self._settles()
        if self.settles is not None:
            _, likely, high = self.settles
            last = max(last, min(float(high), likely + 0.3 * (likely - self.first)))
        self.last = max(last + 0.05 * (last - self.first), self.first + _FEWEST_AHEAD)
        self.axes.set_xlim(self.first, self.last)
        self.axes.set_ylim(self.bottom, self.top)

    def _settles(self) -> tuple[int, int, int] | None:
        """Numbers of readings at which it should settle: early, likely, late."""
        more = self.check.more_readings
        if more is None:
            return None
        now = sum(self.check.readings.of(feature) for feature in Feature)
        return now + more.low, now + more.total, now + more.high

    def _pixels(self, x: Sequence[float] | Floats, y: Sequence[float] | Floats) -> Floats:
        xy = np.stack(np.broadcast_arrays(np.asarray(x, dtype=float), np.asarray(y, dtype=float)), axis=-1)
        return np.asarray(self.axes.transData.transform(xy), dtype=float)

    def _line(
        self,
        x: Floats,
        y: Floats,
        gid: str,
        colour: str,
        width: float,
        *,
        dots: str = "solid",
        cost: float = 2.0,
    ) -> None:
        self.axes.plot(x, y, color=colour, linewidth=width, linestyle=_DASHES[dots], gid=gid, zorder=3.0)
        places = self._pixels(x, np.clip(y, self.bottom, self.top))
        if len(places) > 1:
            steps = np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(places, axis=0), axis=1))])
            even = np.arange(0.0, steps[-1] + 1.0, 4.0)
            places = np.stack([np.interp(even, steps, places[:, k]) for k in (0, 1)], axis=-1)
        self.placer.block(places, 1.0, cost)

    # -- what is drawn -------------------------------------------------------------------------------------

    def _draw_frame(self) -> None:
        from matplotlib.ticker import MaxNLocator  # noqa: PLC0415 - loaded when a figure is drawn

        axes, palette = self.axes, self.palette
        axes.set_facecolor(palette.card)
        for side in ("top", "right"):
            axes.spines[side].set_visible(False)
        for side in ("left", "bottom"):
            axes.spines[side].set_color(palette.muted)
        axes.tick_params(colors=palette.muted, labelcolor=palette.ink, labelsize=_WORDS_PT)
        # Ticks are set one by one: a locator's own may lie outside the frame.
        angles = MaxNLocator(7, steps=[1, 2, 5, 10] if self.top - self.bottom < 90.0 else [1, 3, 10])
        shown = [v for v in angles.tick_values(self.bottom, self.top) if self.bottom <= v <= self.top]
        axes.set_yticks(shown, [_tick(value, signed=self.signed) for value in shown])
        counts = MaxNLocator(9, steps=[1, 2, 5, 10], integer=True)
        shown = [v for v in counts.tick_values(self.first, self.last) if self.first <= v <= self.last]
        axes.set_xticks(shown, [f"{value:.0f}" for value in shown])
        axes.axhspan(
            -self.margin if self.signed else 0.0,
            self.margin,
            color=palette.band,
            linewidth=0.0,
            zorder=1.0,
            gid="band",
        )
        ends = np.array([self.first, self.last])
        self._line(ends, np.zeros(2), "zero", palette.ink, 1.2)

    def _draw_history(self) -> None:
        palette = self.palette
        known = np.isfinite(self.low) & np.isfinite(self.high)
        if known.any():
            x, low, high = self.after[known], self.low[known], self.high[known]
            self.axes.fill_between(x, low, high, color=palette.accent, alpha=0.15, linewidth=0.0, zorder=2.0)
            self._line(x, low, "interval-low", palette.accent, 1.6)
            self._line(x, high, "interval-high", palette.accent, 1.6)
        drawn = np.isfinite(self.delta)
        if drawn.any():
            x, y = self.after[drawn], self.delta[drawn]
            self._line(x, y, "estimate", palette.ink, 1.6, cost=4.0)
            dots = (y > self.bottom) & (y < self.top) & ((len(x) <= _MOST_DOTS) | (x == x[-1]))
            self.axes.plot(
                x[dots],
                y[dots],
                "o",
                color=palette.ink,
                markersize=4.5,
                linestyle="none",
                gid="estimates",
                zorder=4.0,
            )

    def _draw_ahead(self) -> None:
        palette = self.palette
        if len(self.ahead):
            self._line(self.ahead, self.ahead_low, "ahead-low", palette.accent, 1.8, dots="dotted")
            self._line(self.ahead, self.ahead_high, "ahead-high", palette.accent, 1.8, dots="dotted")
        if self.settles is not None:
            low, likely, high = self.settles
            upright = np.array([self.bottom, self.top])
            self._line(np.full(2, float(likely)), upright, "settles", palette.accent, 1.4, dots="dashed")
            # How early and how late: a bar that lies on the lower edge.
            y = np.full(2, self.bottom + 0.025 * (self.top - self.bottom))
            reach = np.array([low, min(high, self.last)], dtype=float)
            self._line(reach, y, "settles-range", palette.accent, 4.0)
        since = settled_from(self.history)
        if since is not None:
            upright = np.array([self.bottom, self.top])
            self._line(np.full(2, float(since)), upright, "settled", palette.ink, 1.2, dots="dashed")

    # -- words ---------------------------------------------------------------------------------------------

    def _draw_words(self, top: float) -> None:
        sheet = self.sheet
        sense = "transection, clockwise +" if self.signed else "transection, without a sense on the map"
        sheet.words(0.3, top + 0.2, sense, _WORDS_PT, quiet=True, gid="up")
        sheet.words(
            _WIDE_IN - _RIGHT_IN,
            0.2,
            "readings of the fold →",
            _WORDS_PT,
            quiet=True,
            align="right",
            gid="across",
        )
        if not np.isfinite(self.delta).any():
            middle = self._pixels([(self.first + self.last) / 2.0], [0.5 * self.margin])
            self._put(
                "The funnel starts when the hinge and the cleavage have been read.",
                middle,
                "empty",
                inside=True,
            )
        since = settled_from(self.history)
        if since is not None:
            self._label(
                f"{self.history[-1].verdict} from {since} readings on", "label-settled", at=float(since)
            )
        if self.settles is not None:
            low, likely, high = self.settles
            self._label(
                f"should settle at about {likely} ({low} to {high})", "label-settles", at=float(likely)
            )
        known = np.isfinite(self.low) & np.isfinite(self.high)
        if known.any():
            share = f"{100.0 * self.check.settings.confidence:g}%"
            self._name_curve(
                f"{share} interval, valid at every look",
                np.concatenate([self.after[known], self.ahead]),
                np.concatenate([self.high[known], self.ahead_high]),
                "label-interval",
            )
        if np.isfinite(self.delta).any():
            self._name_curve("estimate", self.after, self.delta, "label-estimate")
        self._label_band()

    def _label_band(self) -> None:
        text = f"within ±{degrees(self.margin)}" if self.signed else f"within {degrees(self.margin)}"
        high = self.sheet.size_in(text, _WORDS_PT)[1] * self.sheet.figure.dpi
        lower, upper = (-self.margin if self.signed else 0.0), self.margin
        low_px, high_px = self._pixels([self.first] * 2, [lower, upper])[:, 1]
        # On the floor of the band where there is room in it, else on top of it.
        floor = low_px if high_px - low_px > 2.0 * high else high_px
        x = self._pixels(np.linspace(self.first, self.last, 33), [0.0])[:, 0]
        self._put(
            text, np.stack([x, np.full(33, floor + high / 2.0 + 4.0)], axis=-1), "label-band", inside=True
        )

    def _name_curve(self, text: str, x: Floats, y: Floats, gid: str) -> None:
        shown = np.isfinite(y) & (y > self.bottom) & (y < self.top)
        if shown.any():
            # The later half: there the funnel has narrowed, and the curve is calm.
            late = shown & (x >= np.median(x[shown]))
            self._put(text, self._pixels(x[late], y[late]), gid)

    def _label(self, text: str, gid: str, *, at: float) -> None:
        """Put words beside an upright line at so many readings, near its top if there is room."""
        y = self.top - np.linspace(0.05, 0.6, 12) * (self.top - self.bottom)
        self._put(text, self._pixels([at], y), gid)

    def _put(self, text: str, anchors: Floats, gid: str, *, inside: bool = False) -> None:
        put_words(
            self.sheet,
            self.axes,
            self.placer,
            text,
            anchors,
            size_pt=_WORDS_PT,
            gid=gid,
            gap=1.0 if inside else 5.0,
            inside=inside,
        )


_DASHES: Final = {"solid": "solid", "dotted": (0, (1.0, 1.8)), "dashed": (0, (5.0, 3.0))}


def _column(values: list[float | None]) -> Floats:
    return np.array([math.nan if value is None else value for value in values], dtype=float)


def _tick(value: float, *, signed: bool) -> str:
    if abs(value) < 1e-9:
        return "0°"
    if not signed:
        return f"{value:g}°" if value > 0.0 else ""
    return f"{'+' if value > 0 else chr(0x2212)}{abs(value):g}°"  # a true minus sign is as wide as the plus
