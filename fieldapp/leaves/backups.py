"""The sheet of the backups: which there are, what each holds, and the way back to one."""

from __future__ import annotations

from typing import TYPE_CHECKING

from kivy.app import App
from kivy.factory import Factory

from fieldapp.leaves import load_kv
from fieldapp.leaves.parts import Key, Sheet, SheetKey
from fieldapp.states import Change
from fieldapp.wording import backup_text, counted

if TYPE_CHECKING:
    from collections.abc import Callable

    from fieldapp.states import Backup

WHAT_A_BACKUP_IS = "The notebook as it was. Choose one to see what going back to it would do."
GOING_BACK = (
    "Going back puts all of it as it was then: readings, outcrops, faults, settings, and what was being typed. "
    "How the notebook is now is kept as a backup first."
)
ADDING = "Adding puts in what this backup holds and the notebook lacks. It can be taken back."
KEPT_BEFORE = "before going back"


class BackupKey(Key):
    """One backup in the list: when it was made, and what it holds."""


class BackupsSheet(Sheet):
    """The backups, newest first; one that was chosen says what it would do and asks."""

    def __init__(self, **kwargs: object) -> None:
        super().__init__(title="Go back to a backup", **kwargs)
        self._page = App.get_running_app().page
        self.keys: dict[str, BackupKey] = {}
        self.go_back: SheetKey | None = None
        self.add: SheetKey | None = None
        self._chosen: Backup | None = None
        self._finger: object = None
        self._show_list()

    def refresh(self, change: Change) -> None:
        """Show what has changed."""
        if change & Change.HAND_OVER and self._chosen is None and self.parent is not None:
            self._show_list()

    def _show_list(self) -> None:
        """List the backups."""
        self._chosen, self.title = None, "Go back to a backup"
        content = self.ids.content
        content.clear_widgets()
        self.keys = {}
        content.add_widget(Factory.BackupNote(text=WHAT_A_BACKUP_IS))
        for backup in self._page.hand_over.backups:
            count = self._page.readings_in_backup(backup)
            held = "cannot be read" if count is None else counted(count)
            when = f"{backup_text(backup)}\n{held}"
            key = BackupKey(text=f"{when}, {KEPT_BEFORE}" if backup.kept_before else when)
            key.disabled = count is None
            key.bind(on_release=lambda key, backup=backup, count=count: self._choose(key, backup, count))
            self.keys[backup.path.name] = key
            content.add_widget(key)
        content.parent.scroll_y = 1.0

    def _choose(self, key: BackupKey, backup: Backup, count: int) -> None:
        """Say what going back would do, and ask."""
        self._chosen, self._finger = backup, _finger_of(key)
        self.title = f"Backup of {backup_text(backup)}"
        content = self.ids.content
        content.clear_widgets()
        now = self._page.hand_over.readings
        held = f"It holds {counted(count)}. The notebook now holds {now}."
        content.add_widget(Factory.BackupWords(text=held, bold=True))
        content.add_widget(Factory.BackupWords(text=GOING_BACK))
        self.go_back = self._key("Go back to this backup", self._restore, look="accent")
        content.add_widget(Factory.BackupWords(text=ADDING))
        self.add = self._key("Add what it holds", self._add)
        self._key("All backups", self._show_list)
        content.parent.scroll_y = 1.0

    def _key(self, text: str, act: Callable[[], object], look: str = "plain") -> SheetKey:
        """A key that does not hear the very touch that chose the backup: what scrolls may pass one on twice."""
        key = SheetKey(text=text, look=look)
        key.bind(on_release=lambda key: None if self._is_same_finger(key) else act())
        self.ids.content.add_widget(key)
        return key

    def _is_same_finger(self, key: SheetKey) -> bool:
        finger = _finger_of(key)
        return finger is not None and finger == self._finger

    def _restore(self) -> None:
        """Go back to the backup that was chosen; the page says whether it went well."""
        self._carry_out(self._page.restore)

    def _add(self) -> None:
        """Add what the chosen backup holds; the page says how much that was."""
        self._carry_out(self._page.add_backup)

    def _carry_out(self, act: Callable[[Backup], bool]) -> None:
        chosen, self._chosen = self._chosen, None
        if chosen is not None:
            self.close()
            act(chosen)


def _finger_of(key: Key) -> object:
    """Which touch a key was pressed with; None where it was none."""
    return None if key.last_touch is None else key.last_touch.uid


load_kv("backups")
