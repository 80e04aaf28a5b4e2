"""The page around the leaves: verdict strip, the leaf or two, the four names at the bottom, sheets on top."""

from __future__ import annotations

from typing import TYPE_CHECKING

from kivy.app import App
from kivy.properties import BooleanProperty, NumericProperty, ObjectProperty, StringProperty
from kivy.uix.behaviors import ButtonBehavior
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.floatlayout import FloatLayout
from kivy.uix.widget import Widget

from fieldapp.leaves import load_kv
from fieldapp.leaves.parts import Sheet
from fieldapp.states import Change, MessageKind

if TYPE_CHECKING:
    from collections.abc import Callable

    from fieldapp.look.form import Form
    from fieldapp.states import Message

LEAVES = ("Log", "Check", "Fault", "Hand over")


class VerdictStrip(BoxLayout):
    """The verdict: its sign, the sentence, and the figure with its interval. Stands on every leaf."""

    sign = StringProperty("open ring")
    headline = StringProperty("")
    figures = StringProperty("")
    figure_lines = NumericProperty(1)


class LeafKey(ButtonBehavior, BoxLayout):
    """The name of a leaf at the bottom; a bar above it marks the one shown."""

    text = StringProperty("")
    chosen = BooleanProperty(False)


class Notice(BoxLayout):
    """A message on leaves that have no place of their own for it."""

    text = StringProperty("")
    offer = StringProperty("")
    loud = BooleanProperty(False)


class Divider(Widget):
    """A hairline between two leaves."""


class DemoMark(BoxLayout):
    """Says that these readings are invented, as long as they are on the screen."""


class Outline(FloatLayout):
    """The whole page. `make` gives the leaf of a name; leaves are made when first shown."""

    form = ObjectProperty(None)
    shown = StringProperty("Log")

    def __init__(self, make: Callable[[str], Widget], **kwargs: object) -> None:
        super().__init__(**kwargs)
        self._make = make
        self.leaves: dict[str, Widget] = {}
        self._behind: dict[str, Change] = {}
        self._first_frame = True
        self.leaf_keys: dict[str, LeafKey] = {}
        self.demo_mark = DemoMark()
        self.notice = Notice()
        self.trouble = ""
        self._said: object = None
        for name in LEAVES:
            key = self.leaf_keys[name] = LeafKey(text=name)
            key.bind(on_release=lambda _key, name=name: self.show(name))
            self.ids.leaf_keys.add_widget(key)

    @property
    def page(self) -> object:
        """The presenter."""
        return App.get_running_app().page

    def leaf(self, name: str) -> Widget:
        """Give the leaf of this name, made when it is first asked for."""
        if name not in self.leaves:
            self.leaves[name] = self._make(name)
            self._behind[name] = ~Change(0)
            self.leaves[name].form = self.form
        return self.leaves[name]

    @property
    def names_shown(self) -> tuple[str, ...]:
        """The leaves on the screen, from the left."""
        if self.form is not None and self.form.split and self.shown in ("Log", "Check"):
            return ("Log", "Check")
        return (self.shown,)

    def show(self, name: str) -> None:
        """Show a leaf."""
        self.shown = name
        # What was said before this leaf was shown was said on another one.
        self._said = self.page.message
        self._lay_out()

    def on_form(self, _outline: Outline, form: Form) -> None:
        """Arrange for another screen."""
        for leaf in self.leaves.values():
            leaf.form = form
        self._lay_out()
        self.refresh(Change.STRIP)

    def _lay_out(self) -> None:
        body, form = self.ids.body, self.form
        if form is None:
            return
        body.clear_widgets()
        names = self.names_shown
        for number, name in enumerate(names):
            if number:
                body.add_widget(Divider())
                if self._first_frame:
                    # The page is usable with its first leaf; the second comes with the next frame.
                    body.add_widget(Widget())
                    continue
            leaf = self.leaf(name)
            leaf.size_hint_x = 1
            body.add_widget(leaf)
        if len(names) > 1:
            share = form.log_width_dp / form.width_dp
            body.children[-1].size_hint_x = share / (1.0 - share)
        for name, key in self.leaf_keys.items():
            key.chosen = name in names
        self._bring_up_to_date()
        self._mark_demo()
        self._show_notice()

    def complete(self) -> None:
        """Bring what could wait for the first frame."""
        self._first_frame = False
        self._lay_out()

    # Telling

    def refresh(self, change: Change) -> None:
        """Pass a change on: at once to what is on the screen, later to the rest."""
        if change & Change.STRIP:
            strip = self.page.strip
            self.ids.strip.sign = strip.sign.value
            self.ids.strip.headline = strip.headline
            self.ids.strip.figures = strip.short_figures if self._narrow else strip.figures
        if change & Change.PLACE:
            self._mark_demo()
        for name in self._behind:
            self._behind[name] |= change
        self._bring_up_to_date()
        if change & Change.MESSAGE:
            self._show_notice()
        for child in self.children:
            if isinstance(child, Sheet) and hasattr(child, "refresh"):
                child.refresh(change)

    @property
    def _narrow(self) -> bool:
        return self.form is not None and self.form.width_dp < 560.0

    def _bring_up_to_date(self) -> None:
        for name in self.names_shown:
            behind = self._behind.get(name, Change(0))
            if behind and name in self.leaves:
                self._behind[name] = Change(0)
                self.leaves[name].refresh(behind)

    def _mark_demo(self) -> None:
        column = self.ids.column
        # A phone on its side has no height for a bar over the keys; there the row of the place says it.
        in_row = self.form is not None and self.form.low and "Log" in self.names_shown
        demo = self.page.place.demo and not in_row
        if demo and self.demo_mark.parent is None:
            column.add_widget(self.demo_mark, index=len(column.children) - 1)
        elif not demo and self.demo_mark.parent is not None:
            column.remove_widget(self.demo_mark)
        App.get_running_app().fit()

    def tell_trouble(self, text: str) -> None:
        """Say that something went wrong inside the app; stands until it is closed."""
        self.trouble = text
        self._show_notice()
        self.refresh(Change.MESSAGE)

    def close_notice(self) -> None:
        """Take the message away."""
        if self.trouble:
            self.trouble = ""
            self._show_notice()
            self.refresh(Change.MESSAGE)
        else:
            self.page.dismiss_message()

    def take_offer(self) -> None:
        """Do what the message offers."""
        self.page.accept_offer()

    def _show_notice(self) -> None:
        message = self.page.message
        notice = self.notice
        if "Log" in self.names_shown:
            notice.text = notice.offer = ""  # the Log leaf has a place of its own for messages
        elif self.trouble:
            notice.text, notice.offer, notice.loud = self.trouble, "", True
        elif message is not None and self._is_news(message):
            notice.text, notice.offer = message.text, str(message.offer)
            notice.loud = message.kind is not MessageKind.NOTE
        else:
            notice.text = notice.offer = ""
        column = self.ids.column
        if notice.text and notice.parent is None:
            column.add_widget(notice, index=1)
        elif not notice.text and notice.parent is not None:
            column.remove_widget(notice)
        App.get_running_app().fit()

    @property
    def bars(self) -> int:
        """Bars that take height from the leaves."""
        return 1 if self.demo_mark.parent is not None else 0

    def _is_news(self, message: Message) -> bool:
        return message.kind is not MessageKind.NOTE or message is not self._said

    # Sheets

    @property
    def sheet(self) -> Sheet | None:
        """The sheet that lies on top, if any."""
        return next((child for child in self.children if isinstance(child, Sheet)), None)


load_kv("outline")
