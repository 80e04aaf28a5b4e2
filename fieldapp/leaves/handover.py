"""The Hand over leaf: write the CSV, take in a colleague's, the backups, the space left."""

from __future__ import annotations

from contextlib import suppress
from pathlib import Path
from typing import TYPE_CHECKING

from kivy.app import App
from kivy.properties import BooleanProperty, ObjectProperty, StringProperty
from kivy.uix.boxlayout import BoxLayout

from fieldapp.devices.passing import at_a_desk
from fieldapp.leaves import load_kv
from fieldapp.leaves.files import free_name, list_folder
from fieldapp.states import Change
from fieldapp.wording import backup_text, counted, when_text

if TYPE_CHECKING:
    from fieldapp.states import TakeInPreview

FOLDER_NAME = "hand-over"
TAKEN_IN = (".csv", ".txt", ".tsv")
MEGABYTE = 1_000_000


def space_text(count: int | None) -> str:
    """Space left in words."""
    if count is None:
        return "not known"
    return (
        f"{count / MEGABYTE:,.0f} MB" if count < 10_000 * MEGABYTE else f"{count / MEGABYTE / 1000:,.0f} GB"
    )


class Row(BoxLayout):
    """A name and what it is now."""

    name = StringProperty("")
    value = StringProperty("")


class HandOverLeaf(BoxLayout):
    """The leaf."""

    form = ObjectProperty(None)
    since = StringProperty("")
    kept = StringProperty("")
    last = StringProperty("")
    backup = StringProperty("")
    space = StringProperty("")
    where = StringProperty("")
    preview_text = StringProperty("")
    undo_text = StringProperty("")
    has_log = BooleanProperty(False)
    at_a_desk = BooleanProperty(False)
    has_backups = BooleanProperty(False)
    read_only = BooleanProperty(False)
    folder = ObjectProperty(None, allownone=True)

    def __init__(self, **kwargs: object) -> None:
        super().__init__(**kwargs)
        self._preview: TakeInPreview | None = None
        self._other_folder: Path | None = None  # the one last written into
        self.at_a_desk = at_a_desk()

    @property
    def page(self) -> object:
        """The presenter."""
        return App.get_running_app().page

    def refresh(self, change: Change) -> None:
        """Show what has changed."""
        if not change & (Change.HAND_OVER | Change.RECENT):
            return
        state = self.page.hand_over
        self.since = f"{state.since_last} new since the last hand-over"
        self.kept = f"{state.readings}"
        self.last = when_text(state.last_hand_over)
        self.backup = backup_text(state.backups[0]) if state.backups else when_text(None)
        self.has_backups, self.read_only = bool(state.backups), state.read_only
        self.space = space_text(state.space_left_bytes)
        self.undo_text = f"Take back: {state.last_take_in}" if state.last_take_in else ""
        self.where = f"Files are written to the folder {FOLDER_NAME} beside the notebook."
        self.has_log = bool(App.get_running_app().mishaps.text())

    # Write

    @property
    def target_folder(self) -> Path:
        """Where hand-overs are written."""
        return self.page.hand_over.notebook_path.parent / FOLDER_NAME

    def write(self, *, everything: bool = False) -> Path | None:
        """Write the CSV; the presenter says whether it went well."""
        with suppress(OSError):  # writing then says why it cannot be done
            self.target_folder.mkdir(parents=True, exist_ok=True)
        path = free_name(self.target_folder / self._file_name())
        if not self.page.write_hand_over(path, everything=everything):
            return None
        App.get_running_app().share(path)
        return path

    def _file_name(self) -> str:
        return f"readings-{App.get_running_app().clock_utc():%Y%m%d-%H%M%S}.csv"

    def write_elsewhere(self) -> None:
        """At a desk: choose the folder and the name."""
        from fieldapp.leaves.saving import SavingSheet  # noqa: PLC0415 - loaded when it is used

        outline = App.get_running_app().outline
        if outline.sheet is None:  # a touch on what scrolls may arrive twice
            folder = self._other_folder or Path.home()
            SavingSheet(folder=folder, name=self._file_name(), written=self._wrote_into).open(outline)

    def _wrote_into(self, folder: Path) -> None:
        self._other_folder = folder

    def attach_log(self) -> None:
        """Put the log of mishaps beside the hand-overs."""
        text = App.get_running_app().mishaps.text()
        path = self.target_folder / "mishaps.log"
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text, encoding="utf-8")
        App.get_running_app().share(path)

    # Take in

    def choose_file(self) -> None:
        """Show the folder of hand-overs, to take in a file from there or from elsewhere.

        A tablet shows its own chooser, since the app may not look round in its files.
        """
        if App.get_running_app().choose_file(self.target_folder, self.look_at):
            return
        if self.folder is not None:
            self.folder = None
        else:
            self.folder = self.target_folder if self.target_folder.is_dir() else self.target_folder.parent

    def on_folder(self, *_: object) -> None:
        """List a folder: the folders in it, and the CSV files."""
        if self.folder is None:
            self.ids.files.clear_widgets()
        else:
            list_folder(self.ids.files, Path(self.folder), self.look_at, TAKEN_IN)

    def look_at(self, path: Path) -> None:
        """Open a folder, or say what a file would add before anything is taken in."""
        if path.is_dir():
            self.folder = path
            return
        self._preview = self.page.preview_take_in(path)
        if self._preview is None:
            self.preview_text = ""
            return
        p = self._preview
        lines = [
            p.source.name,
            f"adds {counted(len(p.adds))}, changes {len(p.changes)}, {p.known} known already",
        ]
        if p.clashes:
            lines.append(f"{len(p.clashes)} clash with what is here; both are kept")
            lines.extend(f"   {line.text} {line.outcrop}" for line in p.clashes[:5])
        if p.unread:
            lines.append(f"{counted(p.unread, 'row')} cannot be read")
            lines.extend(f"   {text}" for text in p.problems[:5])
        self.preview_text = "\n".join(lines)

    def take_in(self) -> None:
        """Take in the file that was looked at."""
        if self._preview is not None and self.page.take_in(self._preview):
            self._preview, self.preview_text, self.folder = None, "", None

    def leave_it(self) -> None:
        """Take nothing in."""
        self._preview, self.preview_text = None, ""

    # Backups

    def show_backups(self) -> None:
        """List the backups, to go back to one or to add what it holds."""
        from fieldapp.leaves.backups import BackupsSheet  # noqa: PLC0415 - loaded when it is used

        outline = App.get_running_app().outline
        if outline.sheet is None:  # a touch on what scrolls may arrive twice
            BackupsSheet().open(outline)


load_kv("handover")
