"""The pieces of the Log leaf: readout, feature keys, the slot for the check's words, side keys, past readings."""

# ruff: noqa: RUF001 - the page is set with true minus signs and dashes.

from __future__ import annotations

from kivy.app import App
from kivy.properties import BooleanProperty, NumericProperty, StringProperty
from kivy.uix.behaviors import ButtonBehavior
from kivy.uix.boxlayout import BoxLayout
from kivy.utils import get_hex_from_color

from fieldapp.leaves.parts import Key, Words


class FeatureKey(ButtonBehavior, BoxLayout):
    """A feature to read: its marker, its name and how many stand in the fold and here."""

    text = StringProperty("")
    counts = StringProperty("")
    letter = StringProperty("")
    shape = StringProperty("dot")
    chosen = BooleanProperty(False)


class Figure(Words):
    """The digits as typed."""


class Readout(BoxLayout):
    """The digits as typed, those to come, and the labels that the notation gives them."""

    azimuth = StringProperty("")
    inclination = StringProperty("")
    azimuth_label = StringProperty("strike")
    inclination_label = StringProperty("dip")
    active = StringProperty("azimuth")
    direction = StringProperty("")
    remark = StringProperty("")

    def padded(self, text: str, digits: int, colour: object) -> str:
        """The digits typed, and a quiet dash for each one to come."""
        waiting = "–" * max(digits - len(text.partition(".")[0]), 0)
        return f"{text}[color={get_hex_from_color(colour)}]{waiting}[/color]" if waiting else text


class RecentChip(BoxLayout):
    """One past reading with its two keys: mend, and strike out or put back."""

    reading_id = StringProperty("")
    text = StringProperty("")
    shape = StringProperty("dot")
    key_width = NumericProperty(48)
    struck_out = BooleanProperty(False)
    being_mended = BooleanProperty(False)


class CheckSlot(BoxLayout):
    """The words of the entry check or of a message, with one key for its mend or its offer."""

    sign = StringProperty("")
    text = StringProperty("")
    offer = StringProperty("")
    asks = BooleanProperty(False)
    can_close = BooleanProperty(False)

    def __init__(self, **kwargs: object) -> None:
        self.register_event_type("on_take")
        self.register_event_type("on_put_away")
        super().__init__(**kwargs)

    def on_take(self) -> None:
        """The key was touched."""

    def on_put_away(self) -> None:
        """The words are to go."""


class SideKeys(BoxLayout):
    """Measure where there are sensors, Note, Clear, and Keep: four rows of keys beside the pad."""

    has_sensors = BooleanProperty(False)

    def __init__(self, **kwargs: object) -> None:
        self.keys = {name: Key(text=name.capitalize()) for name in ("measure", "note", "clear")}
        self.keys["keep"] = KeepKey(text="Keep")
        self._pair = BoxLayout()
        super().__init__(orientation="vertical", **kwargs)
        self._build()

    def on_has_sensors(self, *_: object) -> None:
        """Make room for Measure."""
        self._build()

    def on_spacing(self, *_: object) -> None:
        """Keep the same gaps inside."""
        self._pair.spacing = self.spacing
        # Keep is as high as two keys and the gap between them.
        self.keys["keep"].size_hint_y = 2.0 + 4.0 * self.spacing / max(self.height, 1.0)

    on_height = on_spacing

    def _build(self) -> None:
        self.clear_widgets()
        self._pair.clear_widgets()
        keys = self.keys
        if self.has_sensors:
            self._pair.add_widget(keys["note"])
            self._pair.add_widget(keys["clear"])
            rows = (keys["measure"], self._pair, keys["keep"])
        else:
            rows = (keys["note"], keys["clear"], keys["keep"])
        for row in rows:
            self.add_widget(row)


class KeepKey(Key):
    """The largest key."""


class PlaceRow(ButtonBehavior, BoxLayout):
    """Where we stand: outcrop, fold, position and its age; a touch opens the choice of another."""

    outcrop = StringProperty("")
    fold = StringProperty("")
    position = StringProperty("")

    def show(self, place: object) -> None:
        """Show the presenter's place."""
        self.outcrop = place.outcrop_title
        # A phone on its side shows no bar that marks the demo.
        marked = place.demo and App.get_running_app().form.low
        self.fold = f"Demo: {place.fold_title}" if marked else place.fold_title
        self.position = place.position_text or "no position"
