"""The sheets that lie over the page: settings, past readings, note, a number, and safety."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from kivy.app import App
from kivy.properties import BooleanProperty, ObjectProperty, StringProperty
from kivy.uix.boxlayout import BoxLayout

from analysis.errors import HingewiseError
from fieldapp.drawing.scene import MARKERS
from fieldapp.leaves import load_kv
from fieldapp.leaves.help import HelpSheet
from fieldapp.leaves.keys import KeyPad  # noqa: F401 - the .kv file uses it
from fieldapp.leaves.measure import MeasureSheet
from fieldapp.leaves.parts import Choice, Sheet, SheetKey, TextLine
from fieldapp.leaves.whereabouts import PlaceSheet
from fieldapp.settings import Appearance, NorthMode, PlaneNotation
from fieldapp.states import Change

if TYPE_CHECKING:
    from collections.abc import Callable

    from fieldapp.states import ReadingLine

MOST_LISTED = 60  # past readings shown at first; "Show more" adds as many again

SAFETY = (
    "Mind traffic, edges, loose rock and tides. Do not work under overhangs alone, and look up before you read.",
    "Orientation data are no slope or excavation design: that is for licensed practice under local codes.",
    "A verdict is about geometry. It names no cause by itself.",
)

POSITION = (
    "It is kept with each reading, and it gives the declination by which a magnetic reading is turned to true north.",
    "It stays in your notebook and in the files you hand over. The app has no access to the network.",
    "Without it you log all the same, with north set to true on your compass. The device asks you next.",
)


class Setting(BoxLayout):
    """One setting: its name, what it means, and its keys."""

    name = StringProperty("")
    meaning = StringProperty("")
    choice = ObjectProperty(None)


# Name, meaning, attribute of Settings, values with labels.
CHOICES: tuple[tuple[str, str, str, tuple[tuple[object, str], ...]], ...] = (
    (
        "Planes are typed as",
        "Lines are always trend/plunge.",
        "notation",
        ((PlaneNotation.STRIKE_DIP, "strike/dip"), (PlaneNotation.DIP_DIRECTION_DIP, "dip direction/dip")),
    ),
    (
        "Ask for the direction of dip",
        "A reversed strike is caught only with it where both limbs stand in one outcrop.",
        "require_quadrant",
        ((True, "Always"), (False, "If I tap it")),
    ),
    (
        "North",
        "Magnetic readings are corrected to true north where the position is known.",
        "north",
        ((NorthMode.MAGNETIC, "Magnetic"), (NorthMode.TRUE, "True")),
    ),
    (
        "Position averaged over",
        "Longer is steadier, while you stand still.",
        "average_s",
        tuple((float(s), f"{s} s") for s in (10, 30, 60, 120)),
    ),
    (
        "M: still axial planar within",
        "The transection that does not matter to you.",
        "margin_deg",
        tuple((float(m), f"{m}°") for m in (2, 3, 5, 8, 10)),
    ),
    (
        "Confidence of the interval",
        "It stays valid however often you look.",
        "confidence",
        ((0.9, "90%"), (0.95, "95%"), (0.99, "99%")),
    ),
    (
        "Not worth more readings than",
        "Beyond this forecast the verdict is that it cannot be settled here.",
        "forecast_limit",
        ((50, "50"), (100, "100"), (200, "200"), (500, "500")),
    ),
    ("Speak the verdict", "Where the device has a voice.", "spoken_verdict", ((False, "No"), (True, "Yes"))),
    ("Keys for", "", "left_handed", ((False, "Right hand"), (True, "Left hand"))),
    (
        "Look",
        "As the device: dark where Android is, as the page opens or comes back. Other systems: light.",
        "appearance",
        ((Appearance.SYSTEM, "As the device"), (Appearance.LIGHT, "Light"), (Appearance.DARK, "Dark")),
    ),
)


# Name, meaning, attribute of Settings: what is typed.
NAMES: tuple[tuple[str, str, str], ...] = (
    ("Observer", "Written with each reading: a map says who read it.", "observer"),
    ("This device", "Written with each reading: a name by which tablets are told apart.", "device"),
)


class SettingsSheet(Sheet):
    """All settings; each takes effect as it is touched, or left."""

    def __init__(self, **kwargs: object) -> None:
        super().__init__(title="Settings", **kwargs)
        self._page = App.get_running_app().page
        self.choices: dict[str, Choice] = {}
        for name, meaning, attribute, values in CHOICES:
            setting = Setting(name=name, meaning=meaning)
            now = getattr(self._page.settings, attribute)
            # A value without a key, as set on the desk, gets one.
            missing = () if any(value == now for value, _ in values) else ((now, f"{now:g}"),)
            choice = Choice(choices=(*values, *missing), chosen=now)
            choice.bind(
                on_choice=lambda choice, value, attribute=attribute: self._change(choice, attribute, value)
            )
            setting.ids.key_row.add_widget(choice)
            self.choices[attribute] = choice
            self.ids.content.add_widget(setting)
        self.names: dict[str, TextLine] = {}
        for name, meaning, attribute in NAMES:
            setting = Setting(name=name, meaning=meaning)
            line = TextLine(text=getattr(self._page.settings, attribute), hint_text="not given")
            line.bind(
                focus=lambda line, focus, setting=setting, meaning=meaning, attribute=attribute: (
                    None if focus else self._name(setting, meaning, attribute, line.text)
                )
            )
            setting.ids.key_row.add_widget(line)
            self.names[attribute] = line
            self.ids.content.add_widget(setting)
        self.ids.content.add_widget(SheetKeys())

    def _change(self, choice: Choice, attribute: str, value: object) -> None:
        self._page.change_settings(replace(self._page.settings, **{attribute: value}))
        choice.chosen = getattr(self._page.settings, attribute)

    def _name(self, setting: Setting, meaning: str, attribute: str, text: str) -> None:
        """Take a name as it is left; what is none is said where its meaning stood."""
        try:
            settings = replace(self._page.settings, **{attribute: text})
        except HingewiseError as error:
            setting.meaning = str(error)
            return
        setting.meaning = meaning
        if settings != self._page.settings:
            self._page.change_settings(settings)


class SheetKeys(BoxLayout):
    """Help, safety, the demo, and the way back from it."""


class ReadingRow(BoxLayout):
    """One past reading in the list."""

    reading_id = StringProperty("")
    text = StringProperty("")
    outcrop = StringProperty("")
    shape = StringProperty("dot")
    struck_out = BooleanProperty(False)


class ReadingsSheet(Sheet):
    """All readings of the fold, newest first: mend, strike out, put back."""

    def __init__(self, **kwargs: object) -> None:
        super().__init__(title="Readings of this fold", **kwargs)
        self._page = App.get_running_app().page
        self._most = MOST_LISTED
        self._fill()

    def refresh(self, change: Change) -> None:
        """Show what has changed."""
        if change & Change.RECENT:
            self._fill()

    def _fill(self) -> None:
        content = self.ids.content
        lines: tuple[ReadingLine, ...] = self._page.standing
        shown = lines[: self._most]
        rows = [row for row in content.children[::-1] if isinstance(row, ReadingRow)]
        if len(rows) != len(shown):
            content.clear_widgets()
            rows = [ReadingRow() for _ in shown]
            for row in rows:
                content.add_widget(row)
            if not rows:
                content.add_widget(SheetWords(text="Nothing has been read in this fold yet."))
            if len(lines) > len(shown):
                more = SheetKey(text=f"Show more ({len(lines) - len(shown)})")
                more.bind(on_release=lambda _key: self._show_more())
                content.add_widget(more)
        for row, line in zip(rows, shown, strict=True):
            row.reading_id, row.text, row.struck_out = line.reading_id, line.text, line.struck_out
            row.shape = MARKERS[line.feature]
            at = line.recorded_at.astimezone().strftime(" · %d %b %H:%M") if line.recorded_at else ""
            kept = " · kept against a check" if line.warnings_kept else ""
            note = f" · {line.note}" if line.note else ""
            row.outcrop = f"{line.outcrop}{at}{kept}{note}"

    def _show_more(self) -> None:
        self._most += MOST_LISTED
        self._fill()

    def mend(self, reading_id: str) -> None:
        """Load a reading into the entry of the Log leaf."""
        self.close()
        App.get_running_app().mend(reading_id)


class SheetWords(BoxLayout):
    """A sentence on a sheet."""

    text = StringProperty("")


class NoteSheet(Sheet):
    """A note to the reading in hand, and whether its bed is overturned."""

    def __init__(self, **kwargs: object) -> None:
        super().__init__(title="Note to this reading", **kwargs)
        self._page = App.get_running_app().page
        self.fields = NoteFields(note=self._page.entry.note, overturned=self._page.entry.overturned)
        self.ids.content.add_widget(self.fields)

    def done(self) -> None:
        """Put the note to the draft."""
        self._page.set_note(self.fields.ids.note.text.strip())
        if self._page.entry.overturned != self.fields.overturned:
            self._page.set_overturned(self.fields.overturned)
        self.close()


class NoteFields(BoxLayout):
    """The fields of the note sheet."""

    note = StringProperty("")
    overturned = BooleanProperty(False)


class NumberSheet(Sheet):
    """A number typed on our own keys; `take_number` gets it, or None where it was cleared."""

    def __init__(
        self,
        *,
        title: str,
        unit: str = "°",
        low: float = 0.0,
        high: float = 360.0,
        take_number: Callable[[float | None], None],
        **kwargs: object,
    ) -> None:
        super().__init__(title=title, wide_dp=420.0, **kwargs)
        self.low, self.high, self.unit = low, high, unit
        self._take = take_number
        self.fields = NumberFields(unit=unit)
        self.ids.content.add_widget(self.fields)
        self.fields.ids.pad.bind(on_sign=lambda _pad, sign: self.key(sign))

    def key(self, sign: str) -> None:
        """Take a digit, the point, back or enter."""
        fields = self.fields
        fields.fault = ""
        if sign == "enter":
            self.done()
        elif sign == "back":
            fields.text = fields.text[:-1]
        elif sign == ".":
            fields.text += "." if "." not in fields.text else ""
        elif len(fields.text) < 7:
            fields.text += sign

    def done(self) -> None:
        """Give the number, or say what is wrong with it."""
        text = self.fields.text
        value = float(text) if text.strip(".") else None
        if value is not None and not self.low <= value <= self.high:
            self.fields.fault = f"{self.low:g} to {self.high:g}{self.unit}, please"
            return
        self._take(value)
        self.close()


class NumberFields(BoxLayout):
    """The fields of the number sheet."""

    text = StringProperty("")
    unit = StringProperty("")
    fault = StringProperty("")


class SafetySheet(Sheet):
    """Safety, on first start and from the settings; the demo is one touch away."""

    def __init__(self, **kwargs: object) -> None:
        super().__init__(title="Before you read", **kwargs)
        for text in SAFETY:
            self.ids.content.add_widget(SheetWords(text=text))
        self.ids.content.add_widget(SafetyKeys())


class SafetyKeys(BoxLayout):
    """The keys of the safety sheet."""


class PositionSheet(Sheet):
    """What the device's position is wanted for, before the device asks."""

    def __init__(self, **kwargs: object) -> None:
        super().__init__(title="May the page use your position?", **kwargs)
        for text in POSITION:
            self.ids.content.add_widget(SheetWords(text=text))
        self.ids.content.add_widget(PositionKeys())


class PositionKeys(BoxLayout):
    """The two answers."""


SHEETS = {
    "measure": MeasureSheet,
    "settings": SettingsSheet,
    "place": PlaceSheet,
    "readings": ReadingsSheet,
    "note": NoteSheet,
    "number": NumberSheet,
    "safety": SafetySheet,
    "position": PositionSheet,
    "help": HelpSheet,
}


def make_sheet(name: str, **values: object) -> Sheet:
    """Make the sheet of this name."""
    return SHEETS[name](**values)


load_kv("sheets")
