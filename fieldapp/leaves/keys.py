"""The key pad, the direction grid and the keys beside them."""

from __future__ import annotations

from kivy.properties import BooleanProperty, NumericProperty, StringProperty
from kivy.uix.gridlayout import GridLayout
from kivy.uix.widget import Widget

from fieldapp.leaves import load_kv
from fieldapp.leaves.parts import Key, SignKey, Words

DIGIT_ROWS = ("123", "456", "789")
GRID = (("NW", "N", "NE"), ("W", "", "E"), ("SW", "S", "SE"))


class KeyPad(GridLayout):
    """Digits, point and back; dispatches `on_sign` with "0" to "9", "." or "back" as a key goes down."""

    def __init__(self, **kwargs: object) -> None:
        self.register_event_type("on_sign")
        self.keys: dict[str, Widget] = {}
        super().__init__(cols=3, **kwargs)
        for digit in "".join(DIGIT_ROWS):
            self._add(digit, PadKey(text=digit))
        self._add("back", SignKey(sign="backspace", sign_dp=28))
        self._add("0", PadKey(text="0"))
        self._add(".", PadKey(text="."))

    def _add(self, name: str, key: Widget) -> None:
        # On touch down, not on release: a glove slides.
        key.bind(on_press=lambda _key: self.dispatch("on_sign", name))
        self.keys[name] = key
        self.add_widget(key)

    def on_sign(self, sign: str) -> None:
        """A key went down."""


class PadKey(Key):
    """A digit."""


class DirectionKey(Key):
    """A direction of dip."""


class DirectionGrid(GridLayout):
    """Eight directions of dip as on a map, north up.

    Dispatches `on_direction` with "N" to "NW". With `last_row` it fills the place of the key pad and has back and
    a way back to the digits below, dispatched as `on_sign` with "back" and "digits".
    """

    chosen = StringProperty("")
    expected = StringProperty("")
    last_row = BooleanProperty(False)
    direction_sp = NumericProperty(18.0)

    def __init__(self, **kwargs: object) -> None:
        self.register_event_type("on_direction")
        self.register_event_type("on_sign")
        self.keys: dict[str, Widget] = {}
        super().__init__(cols=3, **kwargs)
        for row in GRID:
            for name in row:
                if name:
                    key = DirectionKey(text=name)
                    key.bind(on_press=lambda _key, name=name: self.dispatch("on_direction", name))
                    self.keys[name] = key
                else:
                    key = GridWords(text="dips")
                self.add_widget(key)
        if self.last_row:
            for name, key in (
                ("back", SignKey(sign="backspace", sign_dp=28)),
                ("digits", Key(text="1 2 3")),
            ):
                key.bind(on_press=lambda _key, name=name: self.dispatch("on_sign", name))
                self.keys[name] = key
                self.add_widget(key)
            self.add_widget(Widget())
        self.bind(chosen=self._mark, expected=self._mark)

    def _mark(self, *_: object) -> None:
        for row in GRID:
            for name in row:
                if name:
                    chosen, expected = name == self.chosen, name == self.expected and not self.chosen
                    self.keys[name].look = "chosen" if chosen else "expected" if expected else "plain"

    def on_direction(self, name: str) -> None:
        """A direction was touched."""

    def on_sign(self, name: str) -> None:
        """A key of the last row was touched."""


class GridWords(Words):
    """The word in the middle of the direction grid."""


load_kv("keys")
