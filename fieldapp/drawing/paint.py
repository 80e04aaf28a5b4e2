"""What the canvas widgets share: one mesh a colour, marker textures, words on the canvas."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from kivy.core.text import Label as CoreLabel
from kivy.graphics import Color, InstructionGroup, Mesh, Rectangle
from kivy.graphics.opengl import glIsTexture
from kivy.graphics.texture import Texture
from kivy.metrics import dp

from fieldapp.drawing import strokes
from fieldapp.look.fonts import font_for

if TYPE_CHECKING:
    from collections.abc import Iterable

    from fieldapp.look.theme import Rgba

MOST_CARDS = 60
MOST_WORDS = 400  # textures of words kept before the store is emptied


def _texture(pixels: np.ndarray) -> Texture:
    """A white texture with this alpha, (height, width) of 0 to 255, filled again after a lost GL context."""
    height, width = pixels.shape
    rgba = np.full((height, width, 4), 255, np.uint8)
    rgba[:, :, 3] = pixels
    return _texture_of(rgba)


def _texture_of(rgba: np.ndarray) -> Texture:
    """A texture with these colours, (height, width, 4) of 0 to 255, filled again after a lost GL context."""
    data = rgba.tobytes()
    texture = Texture.create(size=(rgba.shape[1], rgba.shape[0]), colorfmt="rgba")

    # Cards and markers are drawn texel on pixel, or stretched where all texels are alike.
    texture.mag_filter = texture.min_filter = "nearest"

    def fill(target: Texture) -> None:
        target.blit_buffer(data, colorfmt="rgba", bufferfmt="ubyte")

    fill(texture)
    texture.add_reload_observer(fill)
    return texture


def card(radius_dp: float, line_dp: float, outline: Rgba, ground: Rgba) -> Texture:
    """The texture of a card with round corners and an outline, for a BorderImage.

    One instruction of sixteen vertices draws a key however large; the colours are in the texture.
    """
    return PAINTS.card(max(round(dp(radius_dp)), 1), dp(line_dp), tuple(outline), tuple(ground))


def edge(radius_dp: float) -> list[int]:
    """The border of that BorderImage: the corner's size in texels on each side."""
    return [max(round(dp(radius_dp)), 1)] * 4


class Paints:
    """Textures made once: the soft edge of lines, the markers and the words."""

    def __init__(self) -> None:
        self._edge: Texture | None = None
        self._markers: dict[tuple[str, int], Texture] = {}
        # A label that lives fills its texture anew where the GL context was lost.
        self._words: dict[tuple[str, float, bool], CoreLabel] = {}
        self._cards: dict[tuple[object, ...], Texture] = {}

    def card(self, radius: int, line: float, outline: Rgba, ground: Rgba) -> Texture:
        """A card with corners of this radius and an outline of this width, pixels; two texels lie between corners."""
        key = (radius, line, outline, ground)
        if key not in self._cards:
            if len(self._cards) > MOST_CARDS:
                self._cards.clear()
            size = 2 * radius + 2
            y, x = np.mgrid[0:size, 0:size] + 0.5 - size / 2.0
            inside = radius - np.hypot(np.maximum(np.abs(x) - 1.0, 0.0), np.maximum(np.abs(y) - 1.0, 0.0))
            straight = np.minimum(radius + 1.0 - np.abs(x), radius + 1.0 - np.abs(y))
            inside = np.minimum(inside, straight)
            in_card = np.clip(inside + 0.5, 0.0, 1.0)[:, :, np.newaxis]
            in_ground = np.clip(inside - line + 0.5, 0.0, 1.0)[:, :, np.newaxis]
            colour = np.array(outline) * (1.0 - in_ground) + np.array(ground) * in_ground
            if outline[3] == 0.0:
                colour[:, :, :3] = ground[:3]
            colour[:, :, 3:] *= in_card
            self._cards[key] = _texture_of(np.asarray(colour * 255.0 + 0.5, np.uint8))
        return self._cards[key]

    def edge(self) -> Texture:
        """The two texels, clear and solid, that lines take their soft edge from."""
        if self._edge is None:
            self._edge = _texture(np.array([[0, 255]], np.uint8))
            self._edge.mag_filter = self._edge.min_filter = "linear"
            self._edge.wrap = "clamp_to_edge"
        return self._edge

    def marker(self, shape: str, size: int) -> Texture:
        """A marker of this shape, `size` pixels wide."""
        key = (shape, size)
        if key not in self._markers:
            self._markers[key] = _texture(marker_alpha(shape, size))
        return self._markers[key]

    def words(self, text: str, size_px: float, *, bold: bool = False) -> Texture:
        """The texture of a line of white words, to be tinted by the colour before it."""
        key = (text, size_px, bold)
        label = self._words.get(key)
        if label is None:
            if len(self._words) > MOST_WORDS:
                self._words.clear()
            label = CoreLabel(
                text=text, font_name=font_for(text), font_size=size_px, bold=bold, color=(1, 1, 1, 1)
            )
            label.refresh()
            label.texture.mag_filter = label.texture.min_filter = "nearest"
            self._words[key] = label
        return label.texture

    def were_lost(self) -> bool:
        """Whether the textures are gone with the GL context, as may happen while the app is in the background."""
        return not glIsTexture(self.edge().id)


PAINTS = Paints()


def marker_alpha(shape: str, size: int) -> np.ndarray:
    """Alpha (size, size), 0 to 255, of a marker: "dot", "triangle", "diamond", "square", "ring" or "disc".

    Worked out as the distance to the outline, so that the edge is one pixel soft at every size.
    """
    half = size / 2.0
    y, x = np.mgrid[0:size, 0:size] + 0.5 - half
    reach = half - 1.0
    line = max(1.5, size * 0.13)
    if shape in ("dot", "disc", "ring"):
        inside = reach * (0.80 if shape == "dot" else 1.0) - np.hypot(x, y)
    elif shape == "triangle":
        # Three half planes; the base lies low (texture rows run upwards).
        inside = np.minimum(
            y + reach * 0.72, (reach * 1.0 - y - np.sqrt(3.0) * np.abs(x)) / 2.0 + reach * 0.0
        )
    elif shape == "diamond":
        inside = (reach - np.abs(x) - np.abs(y)) / np.sqrt(2.0)
    else:
        inside = reach * 0.78 - np.maximum(np.abs(x), np.abs(y))
    alpha = np.clip(inside + 0.5, 0.0, 1.0)
    if shape in ("triangle", "diamond", "square", "ring"):
        alpha = np.minimum(alpha, np.clip(line - inside + 0.5, 0.0, 1.0))
    return np.asarray(alpha * 255.0, dtype=np.uint8)


def on_pixels(places: np.ndarray, size: int) -> np.ndarray:
    """Move middles (n, 2) so that a texture of this size lies texel on pixel there."""
    return np.asarray(np.floor(places - size / 2.0 + 0.5) + size / 2.0)


def add_mesh(group: InstructionGroup, colour: Rgba, parts: Iterable[strokes.Triangles]) -> None:
    """Add lines and fills of one colour as few meshes as 16-bit indices allow."""
    _add(group, colour, parts, PAINTS.edge())


def add_fill(group: InstructionGroup, colour: Rgba, parts: Iterable[strokes.Triangles]) -> None:
    """Add fills alone of one colour: they need no soft edge, and cost less without."""
    _add(group, colour, parts, None)


def _add(
    group: InstructionGroup, colour: Rgba, parts: Iterable[strokes.Triangles], texture: Texture | None
) -> None:
    waiting: list[strokes.Triangles] = []
    size = 0

    def flush() -> None:
        mesh = strokes.joined(waiting)
        if mesh:
            group.add(Color(*colour))
            group.add(
                Mesh(
                    vertices=mesh.vertices.ravel(),
                    indices=mesh.indices,
                    mode="triangles",
                    texture=texture,
                )
            )

    for part in parts:
        taken = max(len(part.vertices), len(part.indices))
        if size + taken > strokes.MOST_VERTICES:
            flush()
            waiting, size = [], 0
        waiting.append(part)
        size += taken
    flush()


def add_words(
    group: InstructionGroup, texture: Texture, colour: Rgba, left: float, bottom: float
) -> tuple[float, float, float, float]:
    """Add words with their lower left corner here, on whole pixels; gives left, bottom, right, top."""
    left, bottom = round(left), round(bottom)
    group.add(Color(*colour))
    group.add(Rectangle(texture=texture, pos=(left, bottom), size=texture.size))
    return (left, bottom, left + texture.width, bottom + texture.height)
