"""The plan sketch, for print: outcrops in metres, north up, with a scale bar and no base map."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final, NamedTuple

import numpy as np

from analysis.errors import SettingError
from analysis.orient.features import Feature
from analysis.orient.forms import Notation
from analysis.orient.notation import write
from analysis.report.palette import palette_named
from analysis.report.placing import Box, Placer
from analysis.report.plan_symbols import FLAT_DEG, UPRIGHT_DEG, PlanPlane, azimuth_ray, plane_symbol
from analysis.report.sheet import POINTS_PER_INCH, Sheet, house_style

if TYPE_CHECKING:
    from collections.abc import Sequence

    from matplotlib.figure import Figure

    from analysis.orient.attitudes import Line
    from analysis.orient.vectors import Floats
    from analysis.report.palette import Palette

_SIDE_IN: Final = 7.0
_KEY_IN: Final = 1.75
_EDGE_IN: Final = 0.3
_HEAD_IN: Final = 0.5
_HALF_IN: Final = 0.17  # half a strike bar
_MARGIN_IN: Final = 0.7  # kept free round the outermost outcrops
_LEAST_SPAN_M: Final = 20.0
_WORDS_PT: Final = 9.5
_STROKE_PT: Final = 1.5
_DIP_PT: Final = 9.0
_CLEAR_IN: Final = 0.06  # between two symbols of one outcrop
_OFF_PLACE_IN: Final = 0.02
_DOT_COST: Final = 30.0  # of covering another outcrop's place
_BAR_STEPS: Final = (1.0, 2.0, 5.0)


@dataclass(frozen=True, slots=True)
class PlanOutcrop:
    """An outcrop on the plan: its name, metres east and north of any one point, and its planes."""

    name: str
    east_m: float
    north_m: float
    planes: tuple[PlanPlane, ...] = ()

    def __post_init__(self) -> None:
        if not (math.isfinite(self.east_m) and math.isfinite(self.north_m)):
            raise SettingError(
                f"outcrop {self.name} has no place",
                where="plan",
                expected="metres east and north of one point",
            )


def draw_plan(
    outcrops: Sequence[PlanOutcrop], *, hinge: Line | None = None, fold: str = "", theme: str = "light"
) -> Figure:
    """Draw outcrops on a plan, to one scale both ways.

    Parameters
    ----------
    outcrops
        In the order in which their symbols are placed; may be empty.
    hinge
        The fold's hinge, drawn as an arrow along its trend.
    fold
        Name of the fold, set at the head.
    theme
        "light" or "dark"; raises SettingError for any other.

    """
    with house_style():
        drawing = _Plan(outcrops, hinge, fold, palette_named(theme))
        drawing.draw()
        return drawing.sheet.figure


def bar_length_m(most_m: float) -> float:
    """The longest of 1, 2, 5, 10, 20, … metres that is no longer than this."""
    power = 10.0 ** math.floor(math.log10(most_m))
    return max((step * power for step in _BAR_STEPS if step * power <= most_m * (1.0 + 1e-9)), default=power)


class _Symbol(NamedTuple):
    """A plane's symbol, inches from its own middle: its lines, the dip beside it, and points (n, 2) of both."""

    item: PlanPlane
    lines: list[Floats]
    dip: str
    dip_offset: Floats
    hull: Floats


def _dense(line: Floats) -> Floats:
    """Points (n, 2) every few hundredths of an inch along a line."""
    steps = np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(line, axis=0), axis=1))])
    even = np.linspace(0.0, steps[-1], max(int(steps[-1] / 0.03), 2))
    return np.stack([np.interp(even, steps, line[:, k]) for k in (0, 1)], axis=-1)


def nearest_free(standing: Floats, new: Floats) -> Floats:
    """Shortest way, shape (2,), to move points (n, 2) so that they keep clear of those that stand (m, 2)."""
    if not len(standing):
        return np.zeros(2)
    turn = np.radians(np.arange(0.0, 360.0, 15.0))
    rays = np.stack([np.sin(turn), np.cos(turn)], axis=-1)
    away = 0.0
    while True:
        away += 0.02
        gaps = standing - (new + away * rays[:, np.newaxis, :])[:, :, np.newaxis, :]
        clear = np.linalg.norm(gaps, axis=-1).min(axis=(1, 2))
        if clear.max() >= _CLEAR_IN:
            return np.asarray(away * rays[int(np.argmax(clear))])


class _Plan:
    """One drawing under way; all lengths are inches, the placer's pixels."""

    def __init__(
        self, outcrops: Sequence[PlanOutcrop], hinge: Line | None, fold: str, palette: Palette
    ) -> None:
        self.outcrops, self.hinge, self.fold, self.palette = outcrops, hinge, fold, palette
        self.sheet = Sheet(_SIDE_IN + _KEY_IN, _SIDE_IN, palette)
        self.dpi = float(self.sheet.figure.dpi)
        self.right, self.top = _SIDE_IN, _SIDE_IN - _HEAD_IN
        self.hulls: list[Floats] = []  # of what stands for each outcrop: points (n, 2)

    def draw(self) -> None:
        from matplotlib.patches import Rectangle  # noqa: PLC0415 - loaded when a figure is drawn

        if self.fold:
            self.sheet.words(_EDGE_IN, self.top + 0.17, self.fold, 13.0, bold=True, gid="fold")
        wide, high = self.right - _EDGE_IN, self.top - _EDGE_IN
        self.sheet.axes.add_patch(
            Rectangle(
                (_EDGE_IN, _EDGE_IN),
                wide,
                high,
                facecolor=self.palette.card,
                edgecolor=self.palette.rule,
                zorder=0.5,
            )
        )
        edges = (_EDGE_IN + 0.06, _EDGE_IN + 0.06, self.right - 0.06, self.top - 0.06)
        self.placer = Placer(Box(*(edge * self.dpi for edge in edges)))
        self._draw_north()
        self._draw_key()
        if not self.outcrops:
            middle = (_EDGE_IN + self.right) / 2.0
            self.sheet.words(
                middle, _SIDE_IN / 2.0, "No outcrop has a position yet.", 11.0, align="center", gid="empty"
            )
            return
        self._set_scale()
        self._draw_scale()
        self.placer.block(self.places * self.dpi, 4.0, _DOT_COST)
        for number, outcrop in enumerate(self.outcrops):
            if outcrop.planes:
                self._draw_group(number, outcrop)
            else:
                self._draw_dot(self.places[number])
                self.hulls.append(self.places[number][np.newaxis])
        for number, outcrop in enumerate(self.outcrops):
            self._name(number, outcrop)

    def _set_scale(self) -> None:
        metres = np.array([(outcrop.east_m, outcrop.north_m) for outcrop in self.outcrops])
        low, high = metres.min(axis=0), metres.max(axis=0)
        frame = np.array([self.right - _EDGE_IN, self.top - _EDGE_IN])
        # The foot of the frame holds the scale bar.
        room = frame - 2.0 * _MARGIN_IN - [0.0, 0.35]
        self.inches_per_m = float(np.min(room / np.maximum(high - low, _LEAST_SPAN_M)))
        middle = np.array([_EDGE_IN, _EDGE_IN + 0.35]) + (frame - [0.0, 0.35]) / 2.0
        self.places = middle + (metres - (low + high) / 2.0) * self.inches_per_m

    def _take(self, left: float, bottom: float, right: float, top: float) -> None:
        self.placer.take(Box(left * self.dpi, bottom * self.dpi, right * self.dpi, top * self.dpi))

    # -- symbols -------------------------------------------------------------------------------------------

    def _draw_group(self, number: int, outcrop: PlanOutcrop) -> None:
        """Draw an outcrop's symbols on its place, or beside it with a line to it where that is taken."""
        place = self.places[number]
        parts: list[tuple[_Symbol, Floats]] = []
        hull = np.zeros((0, 2))
        for item in sorted(outcrop.planes, key=lambda item: item.feature is Feature.CLEAVAGE):
            symbol = self._symbol(item)
            offset = nearest_free(hull, symbol.hull)
            parts.append((symbol, offset))
            hull = np.concatenate([hull, symbol.hull + offset])
        low, high = hull.min(axis=0) - 0.03, hull.max(axis=0) + 0.03
        # The first symbol's middle, not that of the group's box, belongs on the outcrop.
        shift = (low + high) / 2.0
        wide, tall = (high - low) * self.dpi
        found = self.placer.place(
            (place + shift) * self.dpi, (wide, tall), gap=5.0, on_anchor=True, own_mark=_DOT_COST, take=False
        )
        middle = np.array(found.box.centre) / self.dpi - shift
        self.hulls.append(middle + hull)
        self.placer.block((middle + hull) * self.dpi, 2.0, _DOT_COST)
        if float(np.linalg.norm(middle - place)) > _OFF_PLACE_IN:
            end = middle + hull[np.argmin(np.linalg.norm(middle + hull - place, axis=1))]
            self.sheet.strokes([np.array([place, end])], 0.7, self.palette.muted, f"leader-{outcrop.name}")
            self._draw_dot(place)
        for symbol, offset in parts:
            gid = f"{outcrop.name}-{symbol.item.feature}"
            self._draw_lines(symbol.item, middle + offset, symbol.lines, f"symbol-{gid}")
            if symbol.dip:
                self._draw_number(symbol.dip, middle + offset + symbol.dip_offset, f"dip-{gid}")

    def _symbol(self, item: PlanPlane) -> _Symbol:
        lines = [line * _HALF_IN for line in plane_symbol(item)]
        dip, offset = self._dip_words(item)
        hull = np.concatenate([_dense(line) for line in lines])
        if dip:
            half = np.array(self.sheet.size_in(dip, _DIP_PT)) / 2.0
            grid = np.stack(np.meshgrid(*np.linspace(-half, half, 5).T), axis=-1).reshape(-1, 2)
            hull = np.concatenate([hull, offset + grid])
        return _Symbol(item, lines, dip, offset, hull)

    def _draw_lines(self, item: PlanPlane, middle: Floats, lines: list[Floats], gid: str) -> None:
        colour = self.palette.colour_of(item.feature)
        self.sheet.strokes([middle + line for line in lines], _STROKE_PT, colour, gid)

    def _draw_number(self, text: str, middle: Floats, gid: str) -> None:
        made = self.sheet.words(0.0, 0.0, text, _DIP_PT, align="center", gid=gid)
        made.set_verticalalignment("center_baseline")
        made.set_position((float(middle[0]), float(middle[1])))

    def _dip_words(self, item: PlanPlane) -> tuple[str, Floats]:
        """The dip as written, and where its middle stands from the symbol's."""
        if not FLAT_DEG <= item.plane.dip_deg <= UPRIGHT_DEG:
            return "", np.zeros(2)
        text = f"{item.plane.dip_deg:.0f}"
        size = np.array(self.sheet.size_in(text, _DIP_PT))
        down = azimuth_ray(item.plane.dip_direction_deg)
        along = azimuth_ray(item.plane.strike_deg)
        if item.kind == "bedding, overturned":
            down = (down * 0.55 + along * 0.26) / math.hypot(0.55, 0.26)
        reach = 0.6 * _HALF_IN + 0.04 + float(np.abs(down) @ size) / 2.0
        return text, down * reach

    def _draw_dot(self, place: Floats) -> None:
        self.sheet.axes.plot(
            *place,
            "o",
            color=self.palette.ink,
            markersize=4.0,
            markeredgecolor=self.palette.card,
            gid="place",
            zorder=3.0,
        )

    def _name(self, number: int, outcrop: PlanOutcrop) -> None:
        made = self.sheet.words(
            0.0, 0.0, outcrop.name, _WORDS_PT, bold=True, align="center", gid=f"name-{outcrop.name}"
        )
        made.set_verticalalignment("center_baseline")
        drawn = self.sheet.box_of(made)
        size = (drawn.right - drawn.left, drawn.top - drawn.bottom)
        # The name may lean on any side of what it names.
        found = self.placer.place(self.hulls[number] * self.dpi, size, gap=6.0)
        x, y = (np.array(found.box.centre) - np.array(drawn.centre)) / self.dpi
        made.set_position((float(x), float(y)))
        if found.leader:
            ends = np.array([found.box.nearest(*found.anchor), found.anchor]) / self.dpi
            self.sheet.strokes([ends], 0.7, self.palette.muted, f"name-{outcrop.name}-leader")

    # -- furniture -----------------------------------------------------------------------------------------

    def _arrow(self, start: Floats, stop: Floats, gid: str, *, both: bool = False) -> None:
        ray = (stop - start) / np.linalg.norm(stop - start)
        side = np.array([ray[1], -ray[0]])
        for tip, way in ((stop, ray), *(((start, -ray),) if both else ())):
            head = np.array([tip, tip - 0.13 * way + 0.05 * side, tip - 0.13 * way - 0.05 * side])
            self.sheet.axes.fill(
                head[:, 0], head[:, 1], color=self.palette.ink, linewidth=0.0, gid=f"{gid}-head", zorder=3.0
            )
        shaft = np.array([start + 0.1 * ray if both else start, stop - 0.1 * ray])
        self.sheet.strokes([shaft], 1.8, self.palette.ink, gid)

    def _draw_north(self) -> None:
        x = _EDGE_IN + 0.28
        self._arrow(np.array([x, self.top - 0.72]), np.array([x, self.top - 0.15]), "north-arrow")
        self.sheet.words(x + 0.11, self.top - 0.3, "N", 12.0, bold=True, gid="north")
        self._take(_EDGE_IN, self.top - 0.8, x + 0.3, self.top)

    def _draw_scale(self) -> None:
        metres = bar_length_m(1.9 / self.inches_per_m)
        length = metres * self.inches_per_m
        left, low = _EDGE_IN + 0.2, _EDGE_IN + 0.2
        for k, colour in enumerate((self.palette.ink, self.palette.card)):
            part = np.array([[left + 0.5 * k * length, low], [left + 0.5 * (k + 1) * length, low]])
            self.sheet.strokes([part], 5.0, self.palette.ink, "scale-half")
            inner = part + np.array([[0.015, 0.0], [-0.015, 0.0]])
            self.sheet.strokes([inner], 5.0 - 0.03 * POINTS_PER_INCH, colour, "scale-fill")
        self.scale_m, self.scale_in = metres, length
        text = f"{metres:g} m" if metres < 1000.0 else f"{metres / 1000.0:g} km"
        words = self.sheet.words(left, low + 0.1, text, _WORDS_PT, gid="scale")
        box = self.sheet.box_of(words)
        self._take(left, low - 0.06, max(left + length, box.right / self.dpi), low + 0.3)

    def _draw_key(self) -> None:
        """Explain every symbol used, and give the hinge, in the column beside the frame."""
        left, y = self.right + 0.25, self.top - 0.1
        if self.hinge is not None:
            self.sheet.words(left, y, "Hinge, trend/plunge", 9.0, quiet=True)
            self.sheet.words(
                left, y - 0.3, write(self.hinge, Notation.TREND_PLUNGE), 16.0, bold=True, gid="hinge-words"
            )
            self._draw_hinge(np.array([left + 0.45, y - 0.95]))
            y -= 1.85
        kinds = {item.kind: item for outcrop in self.outcrops for item in outcrop.planes}
        if not kinds:
            return
        self.sheet.words(left, y, "Planes", 9.0, quiet=True)
        for kind in sorted(kinds):
            y -= 0.5
            sample = _upright_sample(kinds[kind])
            self._draw_lines(
                sample,
                np.array([left + 0.2, y + 0.05]),
                [line * _HALF_IN for line in plane_symbol(sample)],
                f"key {kind}",
            )
            feature, _, manner = kind.partition(", ")
            self.sheet.words(left + 0.5, y + 0.06, feature, _WORDS_PT)
            self.sheet.words(left + 0.5, y - 0.1, manner, 8.5, quiet=True)

    def _draw_hinge(self, middle: Floats) -> None:
        """An arrow along the trend; a level hinge has two heads, an upright one is a dot in a ring."""
        assert self.hinge is not None  # noqa: S101 - tells the type checker what the caller has made sure of
        if self.hinge.plunge_deg > UPRIGHT_DEG:
            turn = np.linspace(0.0, 2.0 * np.pi, 49)
            ring = middle + 0.14 * np.stack([np.cos(turn), np.sin(turn)], axis=-1)
            self.sheet.strokes([ring], 1.8, self.palette.ink, "hinge-arrow")
            self.sheet.axes.plot(*middle, "o", color=self.palette.ink, markersize=4.5, gid="hinge-arrow-head")
            return
        ray = 0.4 * azimuth_ray(self.hinge.trend_deg)
        self._arrow(middle - ray, middle + ray, "hinge-arrow", both=self.hinge.plunge_deg < FLAT_DEG)


def _upright_sample(item: PlanPlane) -> PlanPlane:
    """The same kind of plane, turned so that its bar lies across the page in the key."""
    return PlanPlane(item.feature, type(item.plane)(90.0, item.plane.dip_deg), item.overturned)
