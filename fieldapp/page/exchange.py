"""What goes out of the notebook and comes into it: hand-over, take-in, backups."""

from __future__ import annotations

from typing import TYPE_CHECKING

from analysis.errors import HingewiseError
from fieldapp.entry import EntryDraft
from fieldapp.notebook.backups import count_in
from fieldapp.page.view import PageView
from fieldapp.settings import Settings
from fieldapp.states import (
    Change,
    Message,
    MessageKind,
    Offer,
    TakeInPreview,
)
from fieldapp.undoing import Step, StepKind, UndoStack
from fieldapp.wording import backup_text, counted

if TYPE_CHECKING:
    from pathlib import Path

    from fieldapp.notebook.store import TakeIn
    from fieldapp.states import Backup


class PageExchange(PageView):
    """Hand-over, take-in and backups."""

    def write_hand_over(self, path: Path, *, everything: bool = False) -> bool:
        """Write the CSV of what no hand-over has carried yet, or of everything."""
        try:
            count = self._hand_over.write(path, everything=everything)
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.TROUBLE))
        self._message = Message(f"{counted(count, 'revision')} written to {path.name}.")
        self._tell(Change.HAND_OVER | Change.MESSAGE)
        return True

    def preview_take_in(self, path: Path) -> TakeInPreview | None:
        """Tell what a colleague's file would do; None (and a message) for a file that cannot be read."""
        try:
            return self._hand_over.preview(path, self._settings.notation)
        except HingewiseError as error:
            self._refuse(Message(str(error), MessageKind.TROUBLE))
            return None

    def take_in(self, preview: TakeInPreview) -> bool:
        """Take in what was previewed, as one."""
        try:
            taken = self._hand_over.take_in(preview)
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.TROUBLE))
        if taken is None:
            return self._refuse(Message("Look at the file again before taking it in.", MessageKind.WARNING))
        self._brought(taken, "taken in")
        return True

    def _brought(self, taken: TakeIn, how: str) -> None:
        """Tell what came in, and let it be taken back as a whole."""
        words = f"{counted(taken.revisions, 'revision')} {how} from {taken.source}."
        if taken.revisions:
            self._undo.push(Step(kind=StepKind.TAKEN_IN, take_in=taken.take_in))
        self._message = Message(words, offer=Offer.UNDO if taken.revisions else Offer.NONE)
        self._reload()

    def undo_take_in(self) -> bool:
        """Take back the last take-in as a whole; revisions made here on top of it stay."""
        try:
            taken = self._notebook.last_take_in()
            if taken is None:
                return False
            self._notebook.undo_take_in(taken.take_in)
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.TROUBLE))
        self._undo.forget_take_in(taken.take_in)
        self._message = Message(f"Taken back: {counted(taken.revisions, 'revision')} from {taken.source}.")
        self._reload()
        return True

    # -- backups --------------------------------------------------------------------------------------------

    def readings_in_backup(self, backup: Backup) -> int | None:
        """Number of readings that a backup holds, struck-out ones included; None where it cannot be read."""
        return count_in(backup.path)

    def restore(self, backup: Backup) -> bool:
        """Put the notebook back to a backup; how it is now is kept as a backup of its own first."""
        try:
            self._notebook.restore(backup.path)
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.TROUBLE))
        self._undo = UndoStack()
        stored = self._notebook.settings()
        self._settings = Settings.from_values(stored)
        self._draft = EntryDraft.from_values(self._notebook.draft())
        self._fold, self._outcrop = self._first_place(stored)
        self._message = Message(f"The notebook is as in the backup of {backup_text(backup)}.")
        self._reload()
        return True

    def add_backup(self, backup: Backup) -> bool:
        """Add what a backup holds and the notebook does not."""
        try:
            added = self._notebook.add_backup(backup.path, f"the backup of {backup_text(backup)}")
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.TROUBLE))
        self._brought(added, "added")
        return True
