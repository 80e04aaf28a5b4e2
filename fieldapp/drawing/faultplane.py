"""The plane of fold-fault angle against transection: what each explanation predicts, and what was read."""

# ruff: noqa: RUF001 - the page is set with true minus signs and dashes.

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from kivy.clock import Clock
from kivy.graphics import InstructionGroup, PopMatrix, PushMatrix, Translate
from kivy.metrics import dp, sp
from kivy.properties import NumericProperty, ObjectProperty, StringProperty
from kivy.uix.widget import Widget

from fieldapp.drawing import placing, strokes
from fieldapp.drawing.faultscene import DASHES, WIDTHS_DP, cut_area, cut_line, lonely, spaced
from fieldapp.drawing.paint import PAINTS, add_fill, add_mesh, add_words
from fieldapp.look.theme import LIGHT

if TYPE_CHECKING:
    from fieldapp.drawing.faultscene import Floats
    from fieldapp.look.theme import Rgba, Theme

SHEAR_STRAINS = (0.0, 0.25, 0.5, 1.0, 2.0, 4.0, 10.0)  # marked along the upper edge where no width is known
KILOMETRES = tuple(float(f"{part}e{power}") for power in range(-3, 4) for part in (1, 2, 5))
LONG_WORDS = 30.0  # the long labels are used where so many ems lie across the picture


def colour_of(kind: str, theme: Theme) -> Rgba:
    """The colour of a kind of curve."""
    return {"rotation": theme.accent, "partitioned": theme.second, "late": theme.ink}.get(kind, theme.muted)


def pattern_of(kind: str) -> tuple[float, ...]:
    """The dash of a kind of curve, in pixels."""
    return tuple(dp(length) for length in DASHES[kind])


class CurveSample(Widget):
    """A short piece of a kind of curve, for the key beside its words."""

    kind = StringProperty("rotation")
    theme = ObjectProperty(LIGHT)
    top_px = NumericProperty(0.0)  # how far below the upper edge it lies; 0 for the middle

    def __init__(self, **kwargs: object) -> None:
        super().__init__(**kwargs)
        redraw = Clock.create_trigger(self.redraw, -1)
        self.bind(pos=redraw, size=redraw, kind=redraw, theme=redraw, top_px=redraw)
        redraw()

    def redraw(self, *_: object) -> None:
        """Draw the piece anew."""
        self.canvas.clear()
        group = InstructionGroup()
        y = self.top - self.top_px if self.top_px else self.center_y
        piece = strokes.patterned(
            [(self.x, y), (self.right, y)], dp(WIDTHS_DP[self.kind]), pattern_of(self.kind)
        )
        add_mesh(group, colour_of(self.kind, self.theme), [piece])
        self.canvas.add(group)


class FaultPlane(Widget):
    """The picture; set `scene` and `theme`. Without a scene nothing is drawn.

    Everything is drawn from the widget's lower left corner, and moved with it: words above it that grow or shrink
    do not make it draw again.
    """

    scene = ObjectProperty(None, allownone=True, rebind=False)
    theme = ObjectProperty(LIGHT)
    words_sp = NumericProperty(14.0)

    def __init__(self, **kwargs: object) -> None:
        self._taken: dict[str, placing.Box] = {}
        self.curves_drawn: dict[str, list[Floats]] = {}  # by label, in pixels from the lower left corner
        self.cross: tuple[float, float] | None = None  # the same
        self.redraws = 0
        self._box: placing.Box = (0.0, 0.0, 1.0, 1.0)
        self._layer, self._place = InstructionGroup(), Translate()
        super().__init__(**kwargs)
        for instruction in (PushMatrix(), self._place, self._layer, PopMatrix()):
            self.canvas.add(instruction)
        self._redraw = Clock.create_trigger(self.redraw, -1)
        self.bind(size=self._redraw, scene=self._redraw, theme=self._redraw, words_sp=self._redraw)
        self._redraw()

    def on_pos(self, *_: object) -> None:
        """Move what is drawn, by whole pixels."""
        self._place.x, self._place.y = round(self.x), round(self.y)

    @property
    def words_boxes(self) -> dict[str, placing.Box]:
        """Where words stand on the page, by name."""
        x, y = self._place.x, self._place.y
        return {name: (box[0] + x, box[1] + y, box[2] + x, box[3] + y) for name, box in self._taken.items()}

    def to_page(self, places_deg: Floats) -> Floats:
        """Places (..., 2), pixels from the corner, of fold-fault angles and transections in degrees."""
        left, bottom, right, top = self._box
        low = np.array([self.scene.x_range_deg[0], self.scene.y_range_deg[0]])
        high = np.array([self.scene.x_range_deg[1], self.scene.y_range_deg[1]])
        return (left, bottom) + (np.asarray(places_deg) - low) / (high - low) * (right - left, top - bottom)

    def redraw(self, *_: object) -> None:
        """Draw everything anew; the trigger calls it once a frame at most."""
        self._layer.clear()
        self._taken, self.curves_drawn, self.cross = {}, {}, None
        if self.scene is None or self.width < dp(120) or self.height < dp(100):
            return
        self.redraws += 1
        self._measure()
        self._draw_frame(self._layer)
        self._draw_curves(self._layer)
        shown = self._draw_pair(self._layer)
        self._draw_labels(self._layer, shown)

    # Frame

    def _line(self) -> float:
        return sp(self.words_sp) * 1.35

    def _measure(self) -> None:
        line = self._line()
        gutter = max(PAINTS.words(text, sp(self.words_sp)).width for text in ("−20°", "+20°")) + dp(8)
        upper = 2.2 * line if self._needs_title() is not None else 1.5 * line
        self._box = (gutter, 2.2 * line, self.width - dp(8), self.height - upper)

    def _needs_title(self) -> str | None:
        """What stands over the displacements along the upper edge; None where there is no room for them."""
        km = self.scene.zone_width_km is not None
        title = "rotation needs, km →" if km else "rotation needs, shear strain →"
        size = sp(self.words_sp)
        both = PAINTS.words(title, size).width + PAINTS.words("transection, clockwise +", size).width + dp(16)
        return title if self.width >= both and self.height >= 15.0 * size else None

    def _draw_frame(self, group: InstructionGroup) -> None:
        theme, scene = self.theme, self.scene
        left, bottom, right, top = self._box
        add_fill(
            group, theme.card, [strokes.polygon([(left, bottom), (right, bottom), (right, top), (left, top)])]
        )
        low, high = scene.y_range_deg
        step = placing.nice_step(high - low, max(int((top - bottom) / (1.7 * self._line())), 1))
        marks, grid = [strokes.line([(left, top), (left, bottom), (right, bottom)], dp(1.2))], []
        for angle in _steps(low, high, step):
            y = self.to_page((0.0, angle))[1]
            marks.append(strokes.line([(left, y), (left - dp(5), y)], dp(1.2)))
            grid.append(strokes.line([(left, y), (right, y)], dp(1)))
            sign = "" if angle == 0.0 else "+" if angle > 0.0 else "−"
            words = PAINTS.words(f"{sign}{abs(angle):g}°", sp(self.words_sp))
            y = min(max(y - words.height / 2, bottom - words.height / 2), top - words.height * 0.6)
            self._put(group, f"y {angle:g}", words, theme.muted, left - dp(7) - words.width, y)
        low, high = scene.x_range_deg
        widest = PAINTS.words("−00°", sp(self.words_sp)).width
        step = placing.nice_step(high - low, max(int((right - left) / (1.5 * widest)), 1))
        for angle in _steps(low, high, step):
            x = self.to_page((angle, 0.0))[0]
            marks.append(strokes.line([(x, bottom), (x, bottom - dp(5))], dp(1.2)))
            grid.append(strokes.line([(x, bottom), (x, top)], dp(1)))
            words = PAINTS.words(f"{'−' if angle < 0.0 else ''}{abs(angle):g}°", sp(self.words_sp))
            x = min(x - words.width / 2, self.width - words.width)
            self._put(group, f"x {angle:g}", words, theme.muted, x, bottom - dp(6) - words.height)
        marks += self._draw_needs(group)
        add_mesh(group, theme.grid, grid)
        add_mesh(group, theme.muted, marks)
        self._draw_titles(group)

    def _draw_titles(self, group: InstructionGroup) -> None:
        size, theme = sp(self.words_sp), self.theme
        up = PAINTS.words("transection, clockwise +", size)
        self._put(group, "up", up, theme.muted, 0.0, self.height - up.height)
        across = PAINTS.words(f"fold-fault angle, {self.scene.way} →", size)
        self._put(group, "across", across, theme.muted, self.width - across.width, 0.0)
        title = self._needs_title()
        if title is not None:
            words = PAINTS.words(title, size)
            self._put(
                group, "needs", words, theme.muted, self.width - words.width, self.height - words.height
            )

    def _draw_needs(self, group: InstructionGroup) -> list[strokes.Triangles]:
        """Mark what rotation needs to bring folds to each angle: cot(angle) - 1, times the width of the zone."""
        if self._needs_title() is None:
            return []
        width = self.scene.zone_width_km or 1.0
        figures = SHEAR_STRAINS if self.scene.zone_width_km is None else (0.0, *KILOMETRES)
        left, _, right, top = self._box
        marks, taken = [], -np.inf
        # From 45 degrees leftwards to the fault: the figures rise, and the least wait for room.
        places = [(f, float(np.degrees(np.arctan2(1.0, 1.0 + f / width)))) for f in figures]
        before = right + dp(40)
        for figure, angle in places:
            x = float(self.to_page((angle, 0.0))[0])
            words = PAINTS.words(f"{figure:g}", sp(self.words_sp))
            if not left <= x <= right or x + words.width / 2 + dp(8) > before or angle < 1.0:
                continue
            before = x - words.width / 2
            marks.append(strokes.line([(x, top), (x, top + dp(5))], dp(1.2)))
            self._put(group, f"needs {figure:g}", words, self.theme.muted, before, top + dp(5))
            taken = x
        return [*marks, strokes.line([(left, top), (right, top)], dp(1))] if np.isfinite(taken) else []

    def _put(
        self, group: InstructionGroup, name: str, words: object, colour: Rgba, x: float, y: float
    ) -> None:
        self._taken[name] = add_words(group, words, colour, x, y)

    # Curves and data

    def _draw_curves(self, group: InstructionGroup) -> None:
        # The rarest first: rotation and no transection lie on top.
        for curve in reversed(self.scene.curves):
            parts = cut_line(self.to_page(curve.points), self._box)
            self.curves_drawn[curve.label] = parts
            width, pattern = dp(WIDTHS_DP[curve.kind]), pattern_of(curve.kind)
            add_mesh(
                group,
                colour_of(curve.kind, self.theme),
                [strokes.patterned(part, width, pattern) for part in parts],
            )

    def _draw_pair(self, group: InstructionGroup) -> Floats:
        """Draw the pair with its ellipse, or the fold-fault angle alone; gives places (n, 2) that words keep off."""
        scene, theme = self.scene, self.theme
        _, bottom, _, top = self._box
        if scene.datum is None:
            x = self.to_page((scene.angle_deg, 0.0))[0]
            parts = cut_line(np.array([(x, bottom), (x, top)]), self._box)
            add_mesh(group, theme.ink, [strokes.patterned(part, dp(2), (dp(3), dp(3))) for part in parts])
            return spaced(np.array([(x, bottom), (x, top)]), dp(6))
        centre = self.to_page(scene.datum)
        keep_off = [centre[np.newaxis] + dp(4) * np.array([(0, 0), (-1, 0), (1, 0), (0, -1), (0, 1)])]
        if scene.ellipse is not None:
            outline = self.to_page(scene.ellipse)
            red, green, blue, _ = theme.ink
            inside = cut_area(outline[:-1], self._box)
            add_fill(group, (red, green, blue, 0.09), [strokes.polygon(inside)])
            add_mesh(group, theme.ink, [strokes.line(part, dp(1.4)) for part in cut_line(outline, self._box)])
            # Words keep off the outline and off the middle; the far parts of a wide ellipse they may cover.
            keep_off += [spaced(outline, dp(6)), centre + 0.4 * (outline - centre)]
        box, arm = self._box, dp(9)
        if box[0] <= centre[0] <= box[2] and box[1] <= centre[1] <= box[3]:
            self.cross = (float(centre[0]), float(centre[1]))
            arms = [
                part
                for way in ((arm, 0.0), (0.0, arm))
                for part in cut_line(np.stack([centre - way, centre + way]), box)
            ]
            add_mesh(group, theme.ink, [strokes.line(part, dp(2.8)) for part in arms])
        return np.concatenate(keep_off)

    # Labels

    def _draw_labels(self, group: InstructionGroup, keep_off: Floats) -> None:
        scene, theme, size = self.scene, self.theme, sp(self.words_sp)
        left, bottom, right, top = self._box
        room = (left + dp(3), bottom + dp(1), right - dp(2), top - dp(1))
        long = right - left >= LONG_WORDS * size
        drawn = {
            curve.label: np.concatenate([spaced(part, dp(5)) for part in self.curves_drawn[curve.label]])
            for curve in scene.curves
            if self.curves_drawn[curve.label]
        }
        points = np.concatenate([keep_off, keep_off, *drawn.values()])
        leaders: list[tuple[Rgba, strokes.Triangles]] = []

        def place(name: str, text: str, anchors: Floats, colour: Rgba, *, bold: bool) -> None:
            words = PAINTS.words(text, size, bold=bold)
            box, anchor = placing.place_along(
                anchors,
                words.size,
                gap=dp(4),
                taken=tuple(self._taken.values()),
                points=points,
                bounds=room,
            )
            end = np.clip(anchor, box[:2], box[2:])
            if float(np.hypot(*(end - anchor))) > dp(7):
                leaders.append((colour, strokes.line([anchor, end], dp(1))))
            self._put(group, name, words, colour, box[0], box[1])

        if scene.datum is None:
            upright = keep_off[len(keep_off) // 2 :]
            place("pair", f"folds {abs(scene.angle_deg):.0f}°", upright, theme.ink, bold=True)
        elif self.cross is not None:
            text = "this fold" if scene.ellipse is None else f"this fold, {100.0 * scene.confidence:g}%"
            place("pair", text, self._beside_pair(), theme.ink, bold=True)
        for curve in scene.curves:
            if curve.label not in drawn:
                continue
            others = [each for label, each in drawn.items() if label != curve.label]
            anchors = lonely(drawn[curve.label], np.concatenate([*others, keep_off]))
            text = curve.label if long else curve.short
            place(
                f"curve {curve.label}",
                text,
                anchors,
                colour_of(curve.kind, theme),
                bold=curve.kind in ("rotation", "partitioned"),
            )
        for colour, leader in leaders:
            add_mesh(group, colour, [leader])

    def _beside_pair(self) -> Floats:
        """Where the words for the pair may start: the outline of its ellipse, or the cross."""
        if self.scene.ellipse is not None:
            parts = cut_line(self.to_page(self.scene.ellipse), self._box)
            if parts:
                outline = np.concatenate([spaced(part, dp(8)) for part in parts])
                return outline[:: max(len(outline) // 16, 1)]
        return np.array([self.cross]) + np.array([0.0, dp(6)])


def _steps(low: float, high: float, step: float) -> list[float]:
    """Multiples of the step from low to high."""
    return [
        float(each) * step for each in range(int(np.ceil(low / step - 1e-9)), int(high / step + 1e-9) + 1)
    ]


__all__ = ["CurveSample", "FaultPlane", "colour_of"]
