"""What every leaf is made of: words that never clip, keys, and sheets that lie over the page."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from kivy.properties import (
    BooleanProperty,
    ColorProperty,
    NumericProperty,
    ObjectProperty,
    OptionProperty,
    StringProperty,
)
from kivy.uix.behaviors import ButtonBehavior
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.floatlayout import FloatLayout
from kivy.uix.label import Label
from kivy.uix.scrollview import ScrollView
from kivy.uix.textinput import TextInput

from fieldapp.drawing.signs import Marker, Sign  # noqa: F401 - the .kv files use them
from fieldapp.leaves import load_kv

if TYPE_CHECKING:
    from kivy.input.motionevent import MotionEvent
    from kivy.uix.widget import Widget

SHRINK = 0.93
TAG = re.compile(r"\[[^]]*]")  # of markup
LEAST_SHARE = 0.5


class Words(Label):
    """A label whose words always fit: type is made smaller where the widget is too small for it.

    `fit` is "box" (words wrap in the widget), "grow" (words wrap and `texture_size` says how high they are),
    "one" (one line, aligned) or "line" (one line, in the middle).
    """

    fit = OptionProperty("box", options=("box", "grow", "one", "line"))
    shown_share = NumericProperty(1.0)

    def on_size(self, *_: object) -> None:
        """Wrap to the new width."""
        if self.fit != "grow" and (self.shown_share < 1.0 or self.texture_size[1] > self.height):
            self._trigger_texture()  # a change of height alone would not render again
        # No height is set: Kivy would cut off, unseen, what does not fit in it.
        self.text_size = (None if self.fit == "line" else self.width, None)

    on_fit = on_size

    def texture_update(self, *_: object) -> None:
        """Render the words, smaller and smaller until they fit."""
        if self.width < 2 or self.height < 2:  # not laid out yet, or hidden; a change of size renders again
            if not self.text:
                super().texture_update()  # else the words from before stayed on the screen
            return
        full = self.font_size
        share = 1.0
        while True:
            self._label.options["font_size"] = full * share
            super().texture_update()
            if share <= LEAST_SHARE or self._fits():
                break
            share *= SHRINK
        self.shown_share = share
        if self.texture is not None:
            # Kivy lays it texel on pixel: the nearest texel is the right one, and cheaper than a mixture of four.
            self.texture.min_filter = self.texture.mag_filter = "nearest"

    def _fits(self) -> bool:
        wide, high = self.texture_size
        if wide > self.width + 1 or (high > self.height + 1 and self.fit != "grow"):
            return False
        if self.fit == "line" or self.text_size[0] is None:
            return True
        # A word wider than the line would be cut in two.
        text = TAG.sub("", self.text) if self.markup else self.text
        room = self.text_size[0] - self.padding[0] - self.padding[2]
        if self.fit == "one":
            lines = self._label._cached_lines  # noqa: SLF001 - Kivy tells nowhere else whether it wrapped
            return self._label.get_extents(text)[0] <= room - 1 and len(lines) <= 1
        return all(self._label.get_extents(word)[0] <= room + 1 for word in text.split())


class Key(ButtonBehavior, Words):
    """A key: `look` is "plain", "chosen", "accent", "expected" or "quiet"."""

    look = StringProperty("plain")
    ground = ColorProperty((1, 1, 1, 1))
    outline = ColorProperty((0, 0, 0, 0))
    outline_dp = NumericProperty(1.2)


class SignKey(ButtonBehavior, BoxLayout):
    """A key with a drawn sign and, where there is room, a word beside it."""

    sign = StringProperty("")
    text = StringProperty("")
    look = StringProperty("plain")
    sign_dp = NumericProperty(22.0)


class Scrolled(ScrollView):
    """A column that is moved up and down with the finger or by its bar, by whole pixels so that all stays crisp."""

    def update_from_scroll(self, *args: object) -> None:
        """Move the column to where it is scrolled to."""
        super().update_from_scroll(*args)
        x, y = self.g_translate.xy
        self.g_translate.xy = round(x), round(y)


class Sheet(FloatLayout):
    """Something that lies over the page until it is closed; a touch beside it closes it."""

    title = StringProperty("")
    body = ObjectProperty(None)
    closable = BooleanProperty(True)
    wide_dp = NumericProperty(560.0)

    def open(self, parent: Widget) -> Sheet:
        """Lay the sheet over the page."""
        parent.add_widget(self)
        return self

    def close(self, *_: object) -> None:
        """Take the sheet away, and with it the device's keyboard."""
        for widget in self.walk(restrict=True):
            if getattr(widget, "focus", False):
                widget.focus = False
        if self.parent is not None:
            self.parent.remove_widget(self)

    def on_touch_down(self, touch: MotionEvent) -> bool:
        """Keep touches from the page below."""
        if super().on_touch_down(touch):
            return True
        if self.closable and not self.ids.card.collide_point(*touch.pos):
            self.close()
        return True

    def on_touch_move(self, touch: MotionEvent) -> bool:
        """Keep touches from the page below."""
        super().on_touch_move(touch)
        return True

    def on_touch_up(self, touch: MotionEvent) -> bool:
        """Keep touches from the page below."""
        super().on_touch_up(touch)
        return True


class TextLine(TextInput):
    """One line of text, typed with the system's keyboard."""


class SheetKey(Key):
    """A key on a sheet."""


class Choice(BoxLayout):
    """A row of keys of which one is chosen; dispatches `on_choice` with its value."""

    choices = ObjectProperty(())  # pairs of value and label
    chosen = ObjectProperty(None, allownone=True)

    def __init__(self, **kwargs: object) -> None:
        self.register_event_type("on_choice")
        self._keys: dict[object, Key] = {}
        super().__init__(**kwargs)
        self.bind(choices=self._build, chosen=self._mark)
        self._build()

    def _build(self, *_: object) -> None:
        self.clear_widgets()
        self._keys = {}
        for value, label in self.choices:
            key = Key(text=label)
            key.bind(on_release=lambda _key, value=value: self.dispatch("on_choice", value))
            self._keys[value] = key
            self.add_widget(key)
        self._mark()

    def _mark(self, *_: object) -> None:
        for value, key in self._keys.items():
            key.look = "chosen" if value == self.chosen else "plain"

    def on_choice(self, value: object) -> None:
        """A key was touched."""


load_kv("parts")
