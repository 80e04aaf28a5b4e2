"""The widget that draws one of our signs, and the one that draws a feature's marker."""

from __future__ import annotations

import numpy as np
from kivy.clock import Clock
from kivy.graphics import Color, Rectangle
from kivy.properties import ColorProperty, NumericProperty, StringProperty
from kivy.uix.widget import Widget

from fieldapp.drawing import strokes
from fieldapp.drawing.paint import PAINTS, add_mesh
from fieldapp.look.icons import ICONS


class Sign(Widget):
    """A sign of `look.icons`, as large as fits in the widget."""

    sign = StringProperty("")
    colour = ColorProperty((0, 0, 0, 1))
    most_px = NumericProperty(10_000.0)

    def __init__(self, **kwargs: object) -> None:
        super().__init__(**kwargs)
        self._redraw = Clock.create_trigger(self.redraw, -1)
        self.bind(
            pos=self._redraw, size=self._redraw, sign=self._redraw, colour=self._redraw, most_px=self._redraw
        )
        self._redraw()

    def redraw(self, *_: object) -> None:
        """Draw the sign anew."""
        self.canvas.clear()
        half = min(self.width, self.height, self.most_px) / 2.0
        if self.sign not in ICONS or half < 2.0:
            return
        middle = np.array([self.center_x, self.center_y])
        parts = []
        for stroke in ICONS[self.sign]:
            # Room for half the line's width, so that nothing is drawn outside the widget.
            reach = half * (1.0 - stroke.width / 2.0) / 1.02
            points = middle + np.asarray(stroke.points) * reach
            parts.append(strokes.line(points, max(stroke.width * half, 1.5), closed=stroke.closed))
        add_mesh(self.canvas, tuple(self.colour), parts)


class Marker(Widget):
    """The marker that stands for a feature on the net."""

    shape = StringProperty("dot")
    colour = ColorProperty((0, 0, 0, 1))
    size_px = NumericProperty(0)

    def __init__(self, **kwargs: object) -> None:
        super().__init__(**kwargs)
        self._redraw = Clock.create_trigger(self.redraw, -1)
        self.bind(pos=self._redraw, size=self._redraw, shape=self._redraw, colour=self._redraw)
        self._redraw()

    def redraw(self, *_: object) -> None:
        """Draw the marker anew."""
        self.canvas.clear()
        size = int(min(self.width, self.height))
        if size < 4:
            return
        with self.canvas:
            Color(*self.colour)
            Rectangle(
                texture=PAINTS.marker(self.shape, size),
                pos=(round(self.center_x - size / 2), round(self.center_y - size / 2)),
                size=(size, size),
            )
