"""The equal-area net, lower hemisphere: readings, girdle, hinge, mean intersection and its trail, mean cleavage.

Driven by a `NetScene`; drawn with a handful of batched instructions and only when something changed.
Touching a reading dispatches `on_reading` with its key, touching a mean dispatches `on_mean` with its name.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from kivy.clock import Clock
from kivy.graphics import Color, InstructionGroup, Point, Rectangle
from kivy.metrics import dp, sp
from kivy.properties import NumericProperty, ObjectProperty
from kivy.uix.widget import Widget

from analysis.orient import curves, vectors
from fieldapp.drawing import placing, strokes
from fieldapp.drawing.paint import PAINTS, add_fill, add_mesh, add_words, on_pixels
from fieldapp.drawing.scene import LETTERS, MARKERS, Mean, NetScene
from fieldapp.look.theme import LIGHT

if TYPE_CHECKING:
    from kivy.graphics.texture import Texture

    from analysis.orient.features import Feature
    from fieldapp.look.theme import Rgba

REACH_DP = 26.0  # a thumb in a glove need not hit a dot exactly
WIDE_DEG = 45.0
ARC_POINTS = 73  # of a great circle or an ellipse; more are not seen
MOST_POINTS = 16_000  # one Point instruction holds 2**14
HINGE, INTERSECTION, CLEAVAGE = "hinge", "mean intersection", "mean cleavage"


class EqualAreaNet(Widget):
    """The net; set `scene` and `theme`."""

    scene = ObjectProperty(NetScene(), rebind=False)
    theme = ObjectProperty(LIGHT)
    words_sp = NumericProperty(15.0)
    marker_dp = NumericProperty(11.0)

    def __init__(self, **kwargs: object) -> None:
        self.register_event_type("on_reading")
        self.register_event_type("on_mean")
        self.register_event_type("on_miss")
        self.words_boxes: dict[str, placing.Box] = {}
        self.redraws = 0
        self._drawn_frame = False
        self._keys: list[str] = []
        self._places = np.zeros((0, 2))
        self._means: dict[str, np.ndarray] = {}
        self._outlines: list[np.ndarray] = []
        super().__init__(**kwargs)
        self._frame = InstructionGroup()
        self._layer = InstructionGroup()
        self.canvas.add(self._frame)
        self.canvas.add(self._layer)
        self._redraw = Clock.create_trigger(self.redraw, -1)
        self._redraw_scene = Clock.create_trigger(self._draw_scene_alone, -1)
        self.bind(pos=self._redraw, size=self._redraw, theme=self._redraw, words_sp=self._redraw)
        self.bind(scene=self._redraw_scene, marker_dp=self._redraw_scene)
        self._redraw()

    # Geometry

    @property
    def head_px(self) -> float:
        """Room for the N above the net and the readings that lie on the rim below it, in pixels."""
        return sp(self.words_sp) * 1.35 + dp(6)

    @property
    def radius(self) -> float:
        """Radius of the net in pixels; room is left for the N above it."""
        return max(min(self.width, self.height - self.head_px) / 2.0 - dp(7), 1.0)

    @property
    def middle(self) -> tuple[float, float]:
        """The net's centre in pixels."""
        return (self.center_x, self.y + dp(7) + self.radius + max(0.0, (self.height - self._tall) / 2.0))

    @property
    def _tall(self) -> float:
        return 2.0 * self.radius + dp(14) + self.head_px

    def to_page(self, v: np.ndarray) -> np.ndarray:
        """Places (n, 2) in pixels of vectors (n, 3) of any sign."""
        return np.asarray(vectors.equal_area_xy(v) * self.radius + np.array(self.middle))

    def _curve(self, v: np.ndarray) -> np.ndarray:
        return np.asarray(curves.net_xy(v) * self.radius + np.array(self.middle))

    # Drawing

    def redraw(self, *_: object) -> None:
        """Draw everything anew; the trigger calls it once a frame at most."""
        if self.width < dp(40) or self.height < dp(40):
            return
        self._draw_frame()
        self._draw_scene()

    def _draw_scene_alone(self, *_: object) -> None:
        # The frame stands as it is; where it has to be drawn as well, the other trigger does both.
        if self._drawn_frame and not self._redraw.is_triggered:
            self._draw_scene()

    def _draw_frame(self) -> None:
        group, theme, radius = self._frame, self.theme, self.radius
        group.clear()
        rim = strokes.circle(self.middle, radius)
        add_fill(group, theme.card, [strokes.polygon(rim)])
        centre = np.array(self.middle)
        turns = np.radians(np.arange(0, 360, 10))
        rays = np.stack([np.sin(turns), np.cos(turns)], axis=1)
        on_rim = centre + rays * radius
        main = np.arange(36) % 9 == 0  # north, east, south, west
        ticks = [
            strokes.segments(on_rim[main], on_rim[main] - rays[main] * dp(13), dp(2)),
            strokes.segments(on_rim[~main], on_rim[~main] - rays[~main] * dp(6), dp(1.2)),
        ]
        cross = [strokes.line([centre - arm, centre + arm], dp(1.2)) for arm in np.eye(2) * dp(5)]
        add_mesh(group, theme.ink, [strokes.line(rim, dp(2), closed=True), *ticks])
        add_mesh(group, theme.rule, cross)
        words = PAINTS.words("N", sp(self.words_sp), bold=True)
        self.words_boxes["N"] = add_words(
            group,
            words,
            theme.ink,
            self.middle[0] - words.width / 2,
            self.middle[1] + radius + dp(self.marker_dp * 0.5 + 1.0),
        )
        self._drawn_frame = True

    def _draw_scene(self) -> None:
        group, theme, scene = self._layer, self.theme, self.scene
        self.redraws += 1
        self.words_boxes = {"N": self.words_boxes["N"]}
        group.clear()
        if scene.girdle_pole is not None:
            girdle = self._curve(curves.great_circle(scene.girdle_pole, ARC_POINTS))
            add_mesh(group, theme.muted, [strokes.dashed(girdle, dp(1.4), dp(3), dp(5))])
        if scene.cleavage is not None:
            circle = self._curve(curves.great_circle(scene.cleavage.vector, ARC_POINTS))
            add_mesh(group, theme.second, [strokes.line(circle, dp(2.4))])
        self._draw_readings(group)
        self._draw_trail(group)
        self._means, self._outlines = {}, []
        if scene.hinge is not None:
            self._draw_mean(group, HINGE, scene.hinge, theme.ink, "disc")
        if scene.intersection is not None:
            self._draw_mean(group, INTERSECTION, scene.intersection, theme.accent, "diamond")
        self._draw_chosen(group)
        self._draw_labels(group)

    def _colour_of(self, feature: Feature) -> Rgba:
        return {"cleavage": self.theme.second, "intersection": self.theme.accent}.get(
            feature.value, self.theme.ink
        )

    def _draw_readings(self, group: InstructionGroup) -> None:
        keys: list[str] = []
        all_places = [np.zeros((0, 2))]
        size = round(dp(self.marker_dp))
        for feature, points in self.scene.points.items():
            if not len(points.vectors):
                continue
            places = self.to_page(points.vectors)
            keys.extend(points.keys)
            all_places.append(places)
            red, green, blue, _ = self._colour_of(feature)
            texture = PAINTS.marker(MARKERS[feature], size)
            # Readings of other outcrops stay in the picture, softer.
            for part, alpha in ((~points.here, 0.5), (points.here, 1.0)):
                if not part.any():
                    continue
                # What would lie on the same pixels is drawn once; each can be touched.
                chosen = np.unique(on_pixels(places[part], size), axis=0)
                group.add(Color(red, green, blue, alpha))
                for start in range(0, len(chosen), MOST_POINTS):
                    batch = chosen[start : start + MOST_POINTS]
                    group.add(Point(points=batch.ravel().tolist(), pointsize=size / 2.0, texture=texture))
        self._keys, self._places = keys, np.concatenate(all_places)

    def _draw_trail(self, group: InstructionGroup) -> None:
        trail = np.asarray(self.scene.trail)
        if len(trail) < 2:
            return
        # An axis near the rim may hop to the other side of the net; the line is not drawn across.
        places = self.to_page(trail)
        near = np.linalg.norm(np.diff(places, axis=0), axis=1) < self.radius
        pieces = np.split(places, np.flatnonzero(~near) + 1)
        add_mesh(group, self.theme.accent, [strokes.line(piece, dp(1.4)) for piece in pieces])
        red, green, blue, _ = self.theme.accent
        group.add(Color(red, green, blue, 0.8))
        size = round(dp(5))
        dots = on_pixels(places[:-1], size).ravel().tolist()
        group.add(Point(points=dots, pointsize=size / 2.0, texture=PAINTS.marker("disc", size)))

    def _draw_mean(self, group: InstructionGroup, name: str, mean: Mean, colour: Rgba, shape: str) -> None:
        place = self.to_page(mean.vector[np.newaxis, :])[0]
        self._means[name] = place
        middle = np.round(place)
        size = 2 * round(dp(self.marker_dp * (1.0 if shape == "disc" else 1.6)) / 2.0)

        def stamp(tint: Rgba, *textures: Texture) -> None:
            group.add(Color(*tint))
            for texture in textures:
                corner = middle - texture.width / 2.0
                group.add(Rectangle(texture=texture, pos=tuple(corner), size=texture.size))

        stamp(self.theme.card, PAINTS.marker("disc", size + 2 * round(dp(2))))
        if mean.ellipse is not None:
            self._draw_ellipse(group, mean, colour)
        inner = [PAINTS.marker("disc", 2 * round(size * 0.17))] if shape == "diamond" else []
        stamp(colour, PAINTS.marker(shape, size), *inner)

    def _draw_ellipse(self, group: InstructionGroup, mean: Mean, colour: Rgba) -> None:
        e = mean.ellipse
        curve = curves.ellipse(mean.vector, e.major_axis, e.minor_axis, e.major_deg, e.minor_deg, ARC_POINTS)
        pieces = [self._curve(piece) for piece in curves.lower_pieces(curve)]
        self._outlines.extend(pieces)
        red, green, blue, _ = colour
        if len(pieces) == 1 and max(e.major_deg, e.minor_deg) < 60.0:
            add_fill(group, (red, green, blue, 0.13), [strokes.polygon(pieces[0])])
        # An ellipse that says little more than "somewhere here" stays in the background.
        strength = 1.0 if e.major_deg < WIDE_DEG else 0.4
        add_mesh(group, (red, green, blue, strength), [strokes.line(piece, dp(2)) for piece in pieces])

    def _draw_chosen(self, group: InstructionGroup) -> None:
        if self.scene.chosen_key in self._keys:
            place = self._places[self._keys.index(self.scene.chosen_key)]
            add_mesh(
                group, self.theme.ink, [strokes.line(strokes.circle(place, dp(13), 48), dp(2.5), closed=True)]
            )

    def _draw_labels(self, group: InstructionGroup) -> None:
        scene, theme = self.scene, self.theme
        named = [(HINGE, scene.hinge, theme.ink), (INTERSECTION, scene.intersection, theme.accent)]
        bounds = (self.x, self.y, self.right, self.middle[1] + self.radius)
        marks = np.concatenate([self._places, *(place[np.newaxis, :] for place in self._means.values())])
        # Words keep off the rim, the ellipses and the great circle too.
        marks = np.concatenate([marks, strokes.circle(self.middle, self.radius, 180), *self._outlines])
        if scene.cleavage is not None:
            marks = np.concatenate(
                [marks, self._curve(curves.great_circle(scene.cleavage.vector, ARC_POINTS))]
            )
        for name, mean, colour in named:
            if mean is None or not mean.label:
                continue
            words = PAINTS.words(mean.label, sp(self.words_sp), bold=True)
            box = placing.place_beside(
                self._means[name],
                words.size,
                gap=dp(self.marker_dp) * 1.3,
                taken=list(self.words_boxes.values()),
                points=marks,
                bounds=bounds,
            )
            red, green, blue, _ = theme.card
            group.add(Color(red, green, blue, 0.8))
            group.add(Rectangle(pos=(box[0] - dp(2), box[1]), size=(words.width + dp(4), words.height)))
            self.words_boxes[name] = add_words(group, words, colour, box[0], box[1])

    # Touch

    def on_touch_down(self, touch: object) -> bool:
        """Name the reading or mean nearest to the touch, within a thumb's reach."""
        if not self.collide_point(*touch.pos):
            return super().on_touch_down(touch)
        found = self.at(touch.x, touch.y)
        if found is None:
            self.dispatch("on_miss")
        else:
            kind, name = found
            self.dispatch("on_mean" if kind == "mean" else "on_reading", name)
        return True

    def at(self, x: float, y: float) -> tuple[str, str] | None:
        """What lies nearest to a place in pixels: ("mean", name), ("reading", key) or None beyond reach."""
        reach = dp(REACH_DP)
        here = np.array([x, y])
        # A mean is drawn larger and is meant when the touch is on it.
        best, nearest = None, reach
        if len(self._places):
            away = np.linalg.norm(self._places - here, axis=1)
            index = int(np.argmin(away))
            if away[index] < nearest:
                best, nearest = ("reading", self._keys[index]), float(away[index])
        for name, place in self._means.items():
            away_mean = float(np.linalg.norm(place - here)) - dp(self.marker_dp * 0.8)
            if away_mean < nearest:
                best, nearest = ("mean", name), away_mean
        return best

    def on_reading(self, key: str) -> None:
        """A reading was touched."""

    def on_mean(self, name: str) -> None:
        """A mean was touched."""

    def on_miss(self) -> None:
        """Nothing lay within reach of the touch."""


def legend_of(feature: Feature) -> str:
    """The letter of a feature, for words beside its marker."""
    return LETTERS[feature]
