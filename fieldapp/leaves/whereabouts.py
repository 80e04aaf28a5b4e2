"""The sheet on where we are: outcrop, fold, and the position of the outcrop."""

from __future__ import annotations

from typing import TYPE_CHECKING

from kivy.app import App
from kivy.properties import StringProperty
from kivy.uix.boxlayout import BoxLayout

from analysis.errors import HingewiseError
from fieldapp.leaves import load_kv
from fieldapp.leaves.parts import Key, Sheet, SheetKey, TextLine  # noqa: F401 - the .kv file uses the last

if TYPE_CHECKING:
    from collections.abc import Callable


class PlaceSheet(Sheet):
    """Choose outcrop and fold, or begin another."""

    def __init__(self, **kwargs: object) -> None:
        super().__init__(title="Where are we?", **kwargs)
        self._page = App.get_running_app().page
        self.chooser = PlaceChooser()
        self.ids.content.add_widget(self.chooser)
        if App.get_running_app().wants_leave:
            key = SheetKey(text="Use the device's position")
            key.bind(on_release=lambda _key: App.get_running_app().answer_position(use=True))
            self.ids.content.add_widget(key)
        self._fill()

    def _fill(self) -> None:
        place = self._page.place
        chooser = self.chooser
        chooser.next_name = place.suggested_outcrop
        chooser.by_hand = place.by_hand
        known = (place.position_text or "no position", place.position_detail, place.north_text)
        chooser.position = " · ".join(words for words in known if words)
        self._list(chooser.ids.outcrops, place.outcrops, place.outcrop, self._page.choose_outcrop)
        self._list(chooser.ids.folds, place.folds, place.fold, self._page.choose_fold)

    def _list(
        self, box: BoxLayout, names: tuple[str, ...], chosen: str, choose: Callable[[str], None]
    ) -> None:
        box.clear_widgets()
        for name in names:
            key = PlaceKey(text=name or "unnamed", look="chosen" if name == chosen else "plain")
            key.bind(on_release=lambda _key, name=name: self._choose(choose, name))
            box.add_widget(key)

    def _choose(self, choose: Callable[[str], None], name: str) -> None:
        choose(name)
        self.close()

    def begin(self, kind: str, name: str) -> None:
        """Begin an outcrop or a fold of this name."""
        if name.strip():
            self._choose(
                self._page.choose_outcrop if kind == "outcrop" else self._page.choose_fold, name.strip()
            )

    def place_by_hand(self, text: str) -> None:
        """Take a position as typed, or say beside it what is wrong with it."""
        self._try(lambda: self._page.place_by_hand(text))

    def forget_position(self) -> None:
        """Go by the device again at this outcrop."""
        self._try(self._page.forget_position)

    def _try(self, act: Callable[[], None]) -> None:
        try:
            act()
        except HingewiseError as error:
            self.chooser.fault = str(error)
        else:
            self.close()

    def next_outcrop(self) -> None:
        """Go on to the next outcrop under the suggested name."""
        self._page.next_outcrop()
        self.close()


class PlaceChooser(BoxLayout):
    """The lists and fields of the place sheet."""

    next_name = StringProperty("")
    position = StringProperty("")
    by_hand = StringProperty("")
    fault = StringProperty("")


class PlaceKey(Key):
    """An outcrop or a fold in the list."""


load_kv("whereabouts")
