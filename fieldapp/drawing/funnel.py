"""The narrowing funnel: the transection against the count of readings, its valid interval closing in."""

# ruff: noqa: RUF001 - the page is set with true minus signs and dashes.

from __future__ import annotations

import numpy as np
from kivy.clock import Clock
from kivy.graphics import Color, InstructionGroup, Point, Rectangle
from kivy.metrics import dp, sp
from kivy.properties import NumericProperty, ObjectProperty
from kivy.uix.widget import Widget

from fieldapp.drawing import placing, strokes
from fieldapp.drawing.paint import PAINTS, add_fill, add_mesh, add_words, on_pixels
from fieldapp.drawing.scene import FunnelScene
from fieldapp.look.theme import LIGHT

MOST_DOTS = 24  # more readings than this and the line alone is clearer
WORDS_SHARES = (1.0, 0.9, 0.8, 0.7)  # of the type's size, for words that fill a low frame


def limits_deg(scene: FunnelScene) -> tuple[float, float]:
    """The lowest and highest angle shown: the band and zero always, the interval as it is now, early ones cut."""
    known = scene.known
    low, high = -1.4 * scene.margin_deg, 1.4 * scene.margin_deg
    drawn = scene.delta_deg[known]
    if len(drawn):
        late = drawn[len(drawn) // 3 :]
        low, high = min(low, float(late.min()) - 2.0), max(high, float(late.max()) + 2.0)
    if known.any():
        lows, highs = scene.low_deg[known], scene.high_deg[known]
        start = len(lows) // 2
        low, high = min(low, float(lows[start:].min()) - 1.0), max(high, float(highs[start:].max()) + 1.0)
    return max(low, -90.0), min(high, 90.0)


class NarrowingFunnel(Widget):
    """The funnel; set `scene` and `theme`."""

    scene = ObjectProperty(FunnelScene(), rebind=False)
    theme = ObjectProperty(LIGHT)
    words_sp = NumericProperty(14.0)

    def __init__(self, **kwargs: object) -> None:
        self.words_boxes: dict[str, placing.Box] = {}
        self.redraws = 0
        self._box = (0.0, 0.0, 1.0, 1.0)
        self._span = (0.0, 1.0, -1.0, 1.0)
        super().__init__(**kwargs)
        self._layer = InstructionGroup()
        self.canvas.add(self._layer)
        self._redraw = Clock.create_trigger(self.redraw, -1)
        self.bind(
            pos=self._redraw, size=self._redraw, scene=self._redraw, theme=self._redraw, words_sp=self._redraw
        )
        self._redraw()

    def to_page(self, counts: np.ndarray, angles_deg: np.ndarray) -> np.ndarray:
        """Places (n, 2) in pixels; angles beyond the frame lie on its edge."""
        left, bottom, right, top = self._box
        first, last, low, high = self._span
        x = left + (np.asarray(counts, dtype=float) - first) / (last - first) * (right - left)
        y = bottom + (np.clip(angles_deg, low, high) - low) / (high - low) * (top - bottom)
        return np.stack(np.broadcast_arrays(x, y), axis=-1)

    def redraw(self, *_: object) -> None:
        """Draw everything anew; the trigger calls it once a frame at most."""
        if self.width < dp(80) or self.height < dp(60):
            return
        self.redraws += 1
        group, scene = self._layer, self.scene
        group.clear()
        self.words_boxes = {}
        self._measure(scene)
        self._draw_axes(group)
        if scene.known.any():
            self._draw_history(group)
            self._draw_forecast(group)
        self._draw_words(group)

    def _measure(self, scene: FunnelScene) -> None:
        low, high = limits_deg(scene)
        counts = scene.counts[scene.known]
        first = float(counts[0]) if len(counts) else 0.0
        last = float(counts[-1]) if len(counts) else 20.0
        # What was read keeps a third of the picture, however far ahead the forecast reaches.
        farthest = first + 3.0 * max(last - first, 6.0)
        if len(scene.forecast_counts):
            last = max(last, min(float(scene.forecast_counts[-1]), farthest))
        if scene.settles_at is not None:
            last = max(last, min(scene.settles_at, farthest))
        last = max(last + 0.04 * (last - first), first + 4.0)
        self._span = (first, last, low, high)
        line = sp(self.words_sp) * 1.35
        gutter = max(PAINTS.words(text, sp(self.words_sp)).width for text in ("−20°", "+20°")) + dp(8)
        self._box = (self.x + gutter, self.y + 2.1 * line, self.right - dp(6), self.top - 1.25 * line)

    def _draw_axes(self, group: InstructionGroup) -> None:
        theme = self.theme
        left, bottom, right, top = self._box
        first, last, low, high = self._span
        margin = self.scene.margin_deg
        band = self.to_page(
            np.array([first, first, last, last]), np.array([-margin, margin, margin, -margin])
        )
        ground = [(left, bottom), (right, bottom), (right, top), (left, top)]
        add_fill(group, theme.card, [strokes.polygon(ground)])
        add_fill(group, theme.band, [strokes.polygon(band)])
        zero = self.to_page(np.array([first, last]), np.zeros(2))
        edges = [strokes.line([(left, top), (left, bottom), (right, bottom)], dp(1.2))]
        line = sp(self.words_sp) * 1.35
        # Words on the angle axis stand at least a line and a half apart.
        step = placing.nice_step(high - low, max(int((top - bottom) / (1.6 * line)), 1))
        for angle in np.arange(np.ceil(low / step) * step, high + 1e-9, step):
            place = self.to_page(np.array([first]), np.array([angle]))[0]
            edges.append(strokes.line([place, place - (dp(5), 0)], dp(1.2)))
            text = f"{abs(angle):g}°" if abs(angle) < 1e-9 else f"{'+' if angle > 0 else '−'}{abs(angle):g}°"
            words = PAINTS.words(text, sp(self.words_sp))
            self.words_boxes[f"y {text}"] = add_words(
                group, words, theme.muted, left - dp(7) - words.width, place[1] - words.height / 2
            )
        widest = PAINTS.words("0000", sp(self.words_sp)).width
        step = max(placing.nice_step(last - first, max(int((right - left) / (1.4 * widest)), 1)), 1.0)
        for count in np.arange(np.ceil(first / step) * step, last + 1e-9, step):
            place = self.to_page(np.array([count]), np.array([low]))[0]
            words = PAINTS.words(f"{count:g}", sp(self.words_sp))
            edge = place[0] - words.width / 2
            if edge < self.x or edge + words.width > self.right:
                continue
            edges.append(strokes.line([place, place - (0, dp(5))], dp(1.2)))
            self.words_boxes[f"x {count:g}"] = add_words(
                group, words, theme.muted, edge, bottom - dp(6) - words.height
            )
        add_mesh(group, theme.muted, edges)
        add_mesh(group, theme.ink, [strokes.line(zero, dp(1.6))])

    def _draw_history(self, group: InstructionGroup) -> None:
        scene, theme = self.scene, self.theme
        known = scene.known
        if known.any():
            upper = self.to_page(scene.counts[known], scene.high_deg[known])
            lower = self.to_page(scene.counts[known], scene.low_deg[known])
            add_fill(group, theme.shade, [strokes.between(upper, lower)])
            add_mesh(group, theme.accent, [strokes.line(upper, dp(2)), strokes.line(lower, dp(2))])
            # The angle is never shown without its interval.
            middle = self.to_page(scene.counts[known], scene.delta_deg[known])
            add_mesh(group, theme.ink, [strokes.line(middle, dp(2))])
            dots = middle if len(middle) <= MOST_DOTS else middle[-1:]
            size = round(dp(8))
            group.add(Color(*theme.ink))
            points = on_pixels(dots, size).ravel().tolist()
            group.add(Point(points=points, pointsize=size / 2.0, texture=PAINTS.marker("disc", size)))

    def _draw_forecast(self, group: InstructionGroup) -> None:
        scene, theme = self.scene, self.theme
        _, last, low, high = self._span
        shown = scene.forecast_counts <= last
        parts = [
            strokes.dashed(self.to_page(scene.forecast_counts[shown], side[shown]), dp(2), dp(2.5), dp(5))
            for side in (scene.forecast_low_deg, scene.forecast_high_deg)
            if len(side)
        ]
        if scene.settles_at is not None and scene.settles_at <= last:
            upright = self.to_page(np.array([scene.settles_at] * 2), np.array([low, high]))
            parts.append(strokes.dashed(upright, dp(2), dp(7), dp(5)))
        add_mesh(group, theme.accent, parts)

    def _draw_words(self, group: InstructionGroup) -> None:
        scene, theme = self.scene, self.theme
        left, _, right, top = self._box
        size = sp(self.words_sp)
        taken = self.words_boxes

        def put(name: str, text: str, colour: tuple, x: float, y: float, *, bold: bool = False) -> None:
            words = PAINTS.words(text, size, bold=bold)
            x = min(max(x, self.x), self.right - words.width)
            taken[name] = add_words(group, words, colour, x, y)

        if scene.known.any():
            put("up", "clockwise +", theme.muted, left - dp(2), top + dp(2))
        names = PAINTS.words("readings in the fold →", size)
        put("across", "readings in the fold →", theme.muted, right - names.width, self.y)
        band = PAINTS.words(f"within ±{scene.margin_deg:g}°", size)
        first, last, _, _ = self._span
        low_edge = self.to_page(np.array([first]), np.array([-scene.margin_deg]))[0][1]
        if scene.known.any():
            put(
                "band",
                f"within ±{scene.margin_deg:g}°",
                theme.ink,
                right - band.width - dp(5),
                low_edge + dp(1),
            )
        if not scene.known.any():
            self._put_wrapped(group, scene.why_empty)
        elif scene.settles_at is not None:
            near = scene.settles_at <= last
            text = "settles about here" if near else f"settles near {scene.settles_at:.0f} →"
            words = PAINTS.words(text, size, bold=True)
            x = self.to_page(np.array([min(scene.settles_at, last)]), np.zeros(1))[0][0] - words.width - dp(6)
            x = min(max(x, left + dp(4)), self.right - words.width)
            red, green, blue, _ = theme.card
            y = top - words.height - dp(2)
            group.add(Color(red, green, blue, 0.8))
            group.add(Rectangle(pos=(x - dp(2), y), size=(words.width + dp(4), words.height)))
            taken["settles"] = add_words(group, words, theme.accent, x, y)

    def _put_wrapped(self, group: InstructionGroup, text: str) -> None:
        """Put words in the middle of the frame, smaller where it is too low for them."""
        left, bottom, right, top = self._box
        for share in WORDS_SHARES:
            size = sp(self.words_sp) * share
            lines = _wrapped(text, size, right - left - dp(24))
            high = size * 1.35
            if high * len(lines) <= top - bottom:
                break
        y = (bottom + top) / 2 + high * len(lines) / 2
        for number, words_line in enumerate(lines):
            words = PAINTS.words(words_line, size)
            y -= high
            self.words_boxes[f"empty {number}"] = add_words(group, words, self.theme.muted, left + dp(12), y)


def _wrapped(text: str, size: float, wide: float) -> list[str]:
    lines: list[str] = []
    for word in text.split():
        longer = f"{lines[-1]} {word}" if lines else word
        if lines and PAINTS.words(longer, size).width <= wide:
            lines[-1] = longer
        else:
            lines.append(word)
    return lines
