"""The help over the page: the list of its pages, and one page at a time."""

from __future__ import annotations

from kivy.app import App
from kivy.properties import BooleanProperty, StringProperty
from kivy.uix.boxlayout import BoxLayout

from fieldapp.help import Block, BlockKind, read_pages
from fieldapp.leaves import load_kv
from fieldapp.leaves.parts import Key, Sheet


class HelpKey(Key):
    """Leads to a page of the help, or back to the list."""


class HelpBlock(BoxLayout):
    """A paragraph, a heading, or an item of a list with its mark."""

    mark = StringProperty("")
    text = StringProperty("")
    heading = BooleanProperty(False)


class HelpSheet(Sheet):
    """The help; `page` names the page to begin with, '' for the list."""

    def __init__(self, *, page: str = "", **kwargs: object) -> None:
        super().__init__(title="Help", wide_dp=640.0, **kwargs)
        self.pages = read_pages()
        self.keys: dict[str, HelpKey] = {}
        self.show(page)

    def show(self, name: str) -> None:
        """Show a page, or the list where the name is ''."""
        content = self.ids.content
        content.clear_widgets()
        self.keys = {}
        names = [page.name for page in self.pages]
        if name:
            number = names.index(name)
            self.title = self.pages[number].title
            for block in self.pages[number].blocks:
                content.add_widget(_widget_of(block))
            for page in self.pages[number + 1 : number + 2]:
                self._add_key(page.name, f"Next: {page.title}", look="accent")
            self._add_key("", "All pages of the help")
        else:
            self.title = "Help"
            for page in self.pages:
                self._add_key(page.name, page.title)
            safety = HelpKey(text="Safety")
            safety.bind(on_release=lambda _key: App.get_running_app().open_sheet("safety"))
            content.add_widget(safety)
        # A page begins at its beginning, however far down the last one was read.
        content.parent.scroll_y = 1.0

    def _add_key(self, name: str, text: str, look: str = "plain") -> None:
        key = HelpKey(text=text, look=look)
        key.bind(on_release=lambda _key: self.show(name))
        self.keys[name] = key
        self.ids.content.add_widget(key)


def _widget_of(block: Block) -> HelpBlock:
    """Make what shows a block."""
    marks = {BlockKind.ITEM: "·", BlockKind.STEP: f"{block.number}"}
    return HelpBlock(mark=marks.get(block.kind, ""), text=block.text, heading=block.kind is BlockKind.HEADING)


load_kv("help")
