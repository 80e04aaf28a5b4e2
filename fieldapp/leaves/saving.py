"""The sheet on which a desktop chooses the folder and the name of a hand-over."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from kivy.app import App
from kivy.properties import StringProperty
from kivy.uix.boxlayout import BoxLayout

from fieldapp.leaves import load_kv
from fieldapp.leaves.files import free_name, list_folder
from fieldapp.leaves.parts import Sheet, TextLine  # noqa: F401 - the .kv file uses the last

if TYPE_CHECKING:
    from collections.abc import Callable

SUFFIX = ".csv"


class SavingSheet(Sheet):
    """Folders to walk through, a name, and the two keys that write; `written` is told the folder used."""

    def __init__(self, *, folder: Path, name: str, written: Callable[[Path], None], **kwargs: object) -> None:
        super().__init__(title="Write the CSV into a folder", **kwargs)
        self._page = App.get_running_app().page
        self._written = written
        self.fields = SavingFields(name=name)
        self.ids.content.add_widget(self.fields)
        self.go_to(folder)

    def go_to(self, folder: Path) -> None:
        """Show a folder, and those in it."""
        self._folder = folder
        self.fields.folder, self.fields.fault = str(folder), ""
        list_folder(self.fields.ids.folders, folder, self.go_to)

    def write(self, *, everything: bool = False) -> None:
        """Write into the folder shown; a file that is there is never written over."""
        name = self.fields.ids.name.text.strip()
        name = name if name.lower().endswith(SUFFIX) else f"{name}{SUFFIX}"
        path = self._folder / name
        if name == SUFFIX or Path(name).name != name:
            self.fields.fault = "Give the file a name without folders."
        elif free_name(path) != path:
            self.fields.fault = "There is a file of that name: give another."
        elif self._page.write_hand_over(path, everything=everything):
            self._written(self._folder)
            self.close()
        else:
            self.fields.fault = self._page.message.text


class SavingFields(BoxLayout):
    """What the sheet shows."""

    folder = StringProperty("")
    name = StringProperty("")
    fault = StringProperty("")


load_kv("saving")
