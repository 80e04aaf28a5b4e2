"""The plan sketch: outcrops in metres around the current one, north up, with a scale bar and no base map.

Symbols after the FGDC Digital Cartographic Standard for Geologic Map Symbolization (FGDC-STD-013-2006), sections
6 (bedding), 7 (cleavage) and 9 (lineation), from memory: a bar along strike with a tick down dip and the dip
beside it; a vertical plane has the tick on both sides; a horizontal one is a ring with a cross; the tick of an
overturned bed is bent round like a hook; cleavage carries a small open box in place of the tick; a line is an
arrow along its trend with the plunge at its head.
"""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np
from kivy.clock import Clock
from kivy.graphics import InstructionGroup
from kivy.metrics import dp, sp
from kivy.properties import NumericProperty, ObjectProperty
from kivy.uix.widget import Widget

from analysis.orient.features import Feature
from analysis.orient.forms import azimuth_text, inclination_text
from fieldapp.drawing import placing, strokes
from fieldapp.drawing.paint import PAINTS, add_fill, add_mesh, add_words
from fieldapp.drawing.scene import PlanOutcrop, PlanPlane, PlanScene
from fieldapp.look.theme import LIGHT

if TYPE_CHECKING:
    from fieldapp.look.theme import Rgba

LEAST_SPAN_M = 20.0
FLAT_DEG, UPRIGHT_DEG = 0.5, 89.5  # drawn as horizontal, as vertical
HALF_DP = 18.0  # half a strike bar
HOOK = (
    0.26,
    0.55,
)  # where the tick of an overturned bed ends, along strike and down dip, in half strike bars
DIP_TURNS_DEG = (0.0, 30.0, -30.0, 60.0, -60.0, 90.0, -90.0, 140.0, -140.0, 180.0)  # where the dip may stand


def azimuth_ray(azimuth_deg: float) -> np.ndarray:
    """Unit vector on the page, x right and y up, of an azimuth with north up."""
    turn = np.radians(azimuth_deg)
    return np.array([np.sin(turn), np.cos(turn)])


def symbol_lines(plane: PlanPlane) -> list[np.ndarray]:
    """Lines (n, 2), x right and y up, of a plane's strike-and-dip symbol; half its strike bar has length 1."""
    along, down = azimuth_ray(plane.strike_deg), azimuth_ray(plane.strike_deg + 90.0)
    frame = np.stack([along, down])
    bar = np.array([[-1.0, 0.0], [1.0, 0.0]])
    if plane.dip_deg < FLAT_DEG:
        return [strokes.circle((0.0, 0.0), 0.6, 49), bar, bar[:, ::-1]]
    sides = (1.0, -1.0) if plane.dip_deg > UPRIGHT_DEG else (1.0,)
    if plane.feature is Feature.CLEAVAGE:
        marks = [np.array([[0.35, 0.0], [0.35, 0.5 * k], [-0.35, 0.5 * k], [-0.35, 0.0]]) for k in sides]
    elif plane.overturned and len(sides) == 1:
        # The tick comes from behind the bar, bent round: what was the top of the bed now faces down.
        turn = np.linspace(np.pi, 0.0, 25)
        bend = np.stack([HOOK[0] * np.cos(turn), -0.36 * np.sin(turn)], axis=-1)
        marks = [np.concatenate([bend, [HOOK]])]
    else:
        marks = [np.array([[0.0, -0.5 if len(sides) == 2 else 0.0], [0.0, 0.5]])]
    return [line @ frame for line in (bar, *marks)]


def plane_symbol(place: np.ndarray, plane: PlanPlane, half: float, width: float) -> list[strokes.Triangles]:
    """The strike-and-dip symbol at a place; `half` is half the strike bar, in pixels."""
    ring = plane.dip_deg < FLAT_DEG
    return [
        strokes.line(place + line * half, width, closed=ring and not number)
        for number, line in enumerate(symbol_lines(plane))
    ]


def _dotted(lines: list[np.ndarray], step: float) -> np.ndarray:
    """Points (n, 2) along lines, this far apart at most: what words keep off."""
    dots = []
    for line in lines:
        for start, end in pairwise(line):
            share = np.linspace(0.0, 1.0, max(int(np.hypot(*(end - start)) / step), 1) + 1)[:, np.newaxis]
            dots.append(start + (end - start) * share)
    return np.concatenate(dots) if dots else np.zeros((0, 2))


def arrow(start: np.ndarray, azimuth_deg: float, length: float, width: float) -> list[strokes.Triangles]:
    """An arrow from a place along an azimuth."""
    ray, side = azimuth_ray(azimuth_deg), azimuth_ray(azimuth_deg + 90.0)
    head = start + ray * length
    barb = min(length * 0.3, 6.0 * width)
    return [
        strokes.line([start, head - ray * barb * 0.5], width),
        strokes.polygon([head, head - ray * barb + side * barb * 0.5, head - ray * barb - side * barb * 0.5]),
    ]


class PlanSketch(Widget):
    """The plan; set `scene` and `theme`. Touching an outcrop dispatches `on_outcrop` with its name."""

    scene = ObjectProperty(PlanScene(), rebind=False)
    theme = ObjectProperty(LIGHT)
    words_sp = NumericProperty(14.0)

    def __init__(self, **kwargs: object) -> None:
        self.register_event_type("on_outcrop")
        self.words_boxes: dict[str, placing.Box] = {}
        self.scale_bar: tuple[float, float] = (0.0, 0.0)  # metres, pixels
        self._places: dict[str, np.ndarray] = {}
        self._dots = np.zeros((0, 2))
        super().__init__(**kwargs)
        self._layer = InstructionGroup()
        self.canvas.add(self._layer)
        self._redraw = Clock.create_trigger(self.redraw, -1)
        self.bind(
            pos=self._redraw, size=self._redraw, scene=self._redraw, theme=self._redraw, words_sp=self._redraw
        )
        self._redraw()

    def redraw(self, *_: object) -> None:
        """Draw everything anew; the trigger calls it once a frame at most."""
        if self.width < dp(80) or self.height < dp(80):
            return
        group, theme, scene = self._layer, self.theme, self.scene
        group.clear()
        self.words_boxes, self._places = {}, {}
        corners = [(self.x, self.y), (self.right, self.y), (self.right, self.top), (self.x, self.top)]
        add_fill(group, theme.card, [strokes.polygon(corners)])
        add_mesh(group, theme.rule, [strokes.line(corners, dp(1.2), closed=True)])
        self._draw_north(group)
        if not scene.outcrops:
            words = PAINTS.words(scene.why_empty, sp(self.words_sp))
            self._put(
                group, "empty", scene.why_empty, theme.muted, self.center_x - words.width / 2, self.center_y
            )
            return
        pixels_per_m = self._place_outcrops(scene.outcrops)
        self._draw_scale(group, pixels_per_m)
        if scene.hinge is not None:
            self._draw_hinge(group, *scene.hinge)
        half = dp(HALF_DP)
        lines = [
            self._places[outcrop.name] + line * half
            for outcrop in scene.outcrops
            for plane in outcrop.planes
            for line in symbol_lines(plane)
        ]
        self._dots = np.concatenate([_dotted(lines, dp(3)), *(p[np.newaxis] for p in self._places.values())])
        for draw in (self._draw_outcrop, self._write_dips, self._name_outcrop):
            for outcrop in scene.outcrops:
                draw(group, outcrop)

    def _place_outcrops(self, outcrops: tuple[PlanOutcrop, ...]) -> float:
        metres = np.array([(outcrop.east_m, outcrop.north_m) for outcrop in outcrops])
        low, high = metres.min(axis=0), metres.max(axis=0)
        span = np.maximum(high - low, LEAST_SPAN_M)
        edges = np.array([dp(44), dp(44) + sp(self.words_sp)])
        room = np.maximum(np.array([self.width, self.height]) - 2 * edges, dp(40))
        pixels_per_m = float(np.min(room / span))
        middle = np.array([self.center_x, self.center_y])
        for outcrop, place in zip(outcrops, middle + (metres - (low + high) / 2) * pixels_per_m, strict=True):
            self._places[outcrop.name] = place
        return pixels_per_m

    def _draw_outcrop(self, group: InstructionGroup, outcrop: PlanOutcrop) -> None:
        place, theme = self._places[outcrop.name], self.theme
        if outcrop.here:
            add_mesh(group, theme.pressed, [strokes.polygon(strokes.circle(place, dp(26), 48))])
        if not outcrop.planes:
            add_mesh(group, theme.ink, [strokes.polygon(strokes.circle(place, dp(3.5), 24))])
        for plane in outcrop.planes:
            add_mesh(group, self._colour_of(plane), plane_symbol(place, plane, dp(HALF_DP), dp(2)))

    def _colour_of(self, plane: PlanPlane) -> Rgba:
        return self.theme.second if plane.feature is Feature.CLEAVAGE else self.theme.ink

    def _write_dips(self, group: InstructionGroup, outcrop: PlanOutcrop) -> None:
        for plane in outcrop.planes:
            if not FLAT_DEG <= plane.dip_deg <= UPRIGHT_DEG:
                continue  # the symbol says it
            words = PAINTS.words(f"{plane.dip_deg:.0f}", sp(self.words_sp))
            left, low = self._dip_place(self._places[outcrop.name], plane, words.size)
            name = f"dip {outcrop.name} {plane.feature.value}"
            self._put(group, name, words, self._colour_of(plane), left, low)

    def _dip_place(
        self, place: np.ndarray, plane: PlanPlane, size: tuple[float, float]
    ) -> tuple[float, float]:
        """Lower left corner of the dip: beyond the tick, or as near to that as other words and symbols allow."""
        best, least = (0.0, 0.0), np.inf
        turned = np.degrees(np.arctan2(-HOOK[0], HOOK[1])) if plane.overturned else 0.0
        for order, turn in enumerate(DIP_TURNS_DEG):
            ray = azimuth_ray(plane.strike_deg + 90.0 + turned + turn)
            reach = dp(HALF_DP) * (0.6 if abs(turn) < 45.0 else 1.0) + dp(1) + abs(ray) @ np.array(size) / 2.0
            middle = place + ray * reach
            left, low = middle[0] - size[0] / 2.0, middle[1] - size[1] / 2.0
            # Letters stand a little within their texture's height.
            box = (left, low + size[1] * 0.12, left + size[0], low + size[1] * 0.88)
            cost = 0.4 * order + self._crowding(box)
            if cost < least:
                best, least = (float(left), float(low)), cost
        return best

    def _crowding(self, box: placing.Box) -> float:
        """How much of other words, of symbols and of what lies outside a box of words would cover."""
        area = (box[2] - box[0]) * (box[3] - box[1])
        apart = (box[0] - dp(4), box[1], box[2] + dp(4), box[3])  # so that two figures do not read as one
        words = sum(placing.overlap(apart, other) for other in self.words_boxes.values()) / area
        inside = np.all((self._dots > box[:2]) & (self._dots < box[2:]), axis=1).sum()
        outside = 1.0 - placing.overlap(box, (self.x, self.y, self.right, self.top)) / area
        return placing.WORDS_COST * words + float(inside) + placing.OUTSIDE_COST * outside

    def _name_outcrop(self, group: InstructionGroup, outcrop: PlanOutcrop) -> None:
        words = PAINTS.words(outcrop.name, sp(self.words_sp), bold=outcrop.here)
        apart = dp(4)  # so that two names in one line do not read as one
        box = placing.place_beside(
            self._places[outcrop.name],
            words.size,
            gap=dp(21),
            taken=[(b[0] - apart, b[1], b[2] + apart, b[3]) for b in self.words_boxes.values()],
            points=self._dots,
            bounds=(self.x + dp(4), self.y + dp(4), self.right - dp(4), self.top - dp(4)),
        )
        self._put(group, f"name {outcrop.name}", words, self.theme.ink, box[0], box[1])

    def _draw_hinge(self, group: InstructionGroup, trend_deg: float, plunge_deg: float) -> None:
        length = dp(46)
        start = np.array([self.right - dp(16) - length, self.top - dp(16) - length])
        start += length / 2 - azimuth_ray(trend_deg) * length / 2
        parts = arrow(start, trend_deg, length, dp(2.5))
        add_mesh(group, self.theme.ink, parts)
        text = f"hinge {azimuth_text(trend_deg)}/{inclination_text(plunge_deg)}"
        words = PAINTS.words(text, sp(self.words_sp), bold=True)
        low = self.top - dp(18) - length - words.height
        self._put(group, "hinge", words, self.theme.ink, self.right - dp(10) - words.width, low)

    def _draw_north(self, group: InstructionGroup) -> None:
        start = np.array([self.x + dp(18), self.top - dp(52)])
        add_mesh(group, self.theme.ink, arrow(start, 0.0, dp(42), dp(2)))
        words = PAINTS.words("N", sp(self.words_sp), bold=True)
        self._put(group, "N", words, self.theme.ink, start[0] + dp(8), self.top - dp(8) - words.height)

    def _draw_scale(self, group: InstructionGroup, pixels_per_m: float) -> None:
        most = min(self.width * 0.3, dp(140))
        metres = placing.nice_step(most / pixels_per_m / 2.0, 1)
        length = metres * pixels_per_m
        left, low = self.x + dp(14), self.y + dp(14)
        bar = [
            strokes.line([(left, low), (left + length, low)], dp(3)),
            strokes.line([(left, low - dp(4)), (left, low + dp(5))], dp(2)),
            strokes.line([(left + length, low - dp(4)), (left + length, low + dp(5))], dp(2)),
        ]
        add_mesh(group, self.theme.ink, bar)
        self.scale_bar = (metres, length)
        text = f"{metres:g} m" if metres < 1000 else f"{metres / 1000:g} km"
        self._put(group, "scale", text, self.theme.ink, left, low + dp(6))

    def _put(
        self, group: InstructionGroup, name: str, words: object, colour: Rgba, x: float, y: float
    ) -> None:
        texture = PAINTS.words(words, sp(self.words_sp)) if isinstance(words, str) else words
        self.words_boxes[name] = add_words(group, texture, colour, x, y)

    def on_touch_down(self, touch: object) -> bool:
        """Name the outcrop under the touch."""
        if not self.collide_point(*touch.pos):
            return super().on_touch_down(touch)
        here = np.array(touch.pos)
        near = [(float(np.linalg.norm(place - here)), name) for name, place in self._places.items()]
        if near and min(near)[0] < dp(30):
            self.dispatch("on_outcrop", min(near)[1])
        return True

    def on_outcrop(self, name: str) -> None:
        """An outcrop was touched."""
