"""The presenter: the state of the page a geologist holds. It knows no window and no clock but the ones given.

Rules
-----
1. A reading is committed to the notebook before anything on the page says that it was kept. When the notebook
   refuses, the message says why in plain words and the draft stays.
2. The draft is saved at each key, and gives way to an empty one in the very transaction that keeps the reading,
   so that a killed process neither loses a key nor keeps a reading twice.
3. Nothing is deleted: taking back is striking out, mending is a further revision.
4. Checks warn and offer a mend; they never keep a geologist from keeping what was seen. Only digits that are no
   attitude, and a dip quadrant that the settings require, are asked for first.
5. The sums follow each reading. What is slow is computed elsewhere and taken only if it is still about the
   readings as they stand.
6. Each public method ends by telling the listeners, once, what has changed.

State records are in `fieldapp.states`, settings in `fieldapp.settings`. All methods belong to the user's thread.
"""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from analysis.errors import HingewiseError
from analysis.files.checked import checked_name
from analysis.orient.features import Feature
from analysis.orient.north import north_correction
from fieldapp.draft import Key
from fieldapp.entry import EntryDraft, North
from fieldapp.handing import backup_at
from fieldapp.making import mended_reading, new_reading
from fieldapp.notebook.opening import open_notebook
from fieldapp.page.faulting import PageFaulting
from fieldapp.running import check_settings
from fieldapp.settings import PlaneNotation, Settings
from fieldapp.states import (
    EVERYTHING,
    Change,
    Message,
    MessageKind,
    Offer,
    SignalKind,
)
from fieldapp.undoing import Step, StepKind, content_of
from fieldapp.wording import FIRST_OUTCROP

if TYPE_CHECKING:
    from collections.abc import Callable
    from datetime import datetime
    from pathlib import Path

    from analysis.files.reading import Reading
    from fieldapp.dispatch import Dispatch
    from fieldapp.making import Entry
    from fieldapp.page.core import NorthFinder
    from fieldapp.states import Measured

_AFTER_OUTCROP = Change.PLACE | Change.ENTRY | Change.TABS | Change.CHECK | Change.PLAN | Change.MESSAGE


def open_page(
    path: Path,
    *,
    clock: Callable[[], datetime],
    dispatch: Dispatch,
    demo: bool = False,
    north: NorthFinder = north_correction,
) -> OutcropPage:
    """Open the notebook at `path`, or make it, and the page on it; raises NotebookError where neither works.

    `clock` gives aware UTC times. What opening found (a damaged file, read-only storage) is in `page.message`.
    """
    opening = open_notebook(path, clock)
    try:
        return OutcropPage(
            opening.notebook, clock=clock, dispatch=dispatch, demo=demo, report=opening.report, north=north
        )
    except BaseException:
        opening.notebook.close()
        raise


class OutcropPage(PageFaulting):
    """The page: what it shows as properties, what the geologist does as methods."""

    # -- entry ----------------------------------------------------------------------------------------------

    def digit(self, digit: int) -> None:
        """Press a digit, 0 to 9."""
        self._press(Key.DIGIT, str(digit))

    def point(self) -> None:
        """Press the point."""
        self._press(Key.POINT)

    def back(self) -> None:
        """Take the last sign back."""
        self._press(Key.BACK)

    def clear(self) -> None:
        """Empty the entry; a mend under way is given up."""
        self._change_draft(self._draft.cleared())

    def _press(self, key: Key, digit: str = "") -> None:
        self._change_draft(self._with_own_side(self._draft.pressed(key, digit)))

    def _with_own_side(self, draft: EntryDraft) -> EntryDraft:
        """A dip direction says the side itself: one that a mended reading has belongs to the digits before."""
        if self._settings.notation is PlaneNotation.STRIKE_DIP or draft.digits == self._draft.digits:
            return draft
        return replace(draft, quadrant="")

    def choose_feature(self, feature: Feature) -> None:
        """Choose what is being read; digits typed stay."""
        self._change_draft(self._draft.with_feature(feature))

    def step_feature(self, step: int) -> None:
        """Choose the next feature (+1) or the one before (-1), round and round."""
        features = tuple(Feature)
        self.choose_feature(features[(features.index(self._draft.feature) + step) % len(features)])

    def choose_quadrant(self, quadrant: str) -> None:
        """Tap the side the plane dips to; again takes it away."""
        self._change_draft(self._draft.with_quadrant(quadrant))

    def apply_mend(self, name: str) -> None:
        """Put in the attitude that the check of this name offers."""
        for check, attitude in self._entry.checked.mends:
            if check == name:
                self._change_draft(self._draft.with_attitude(attitude, self._settings.notation))
                return

    def set_note(self, text: str) -> None:
        """Write the note of the reading being entered."""
        self._change_draft(replace(self._draft, note=text))

    def set_overturned(self, overturned: bool) -> None:
        """Mark the bed being entered as overturned."""
        if self._draft.feature.is_plane:
            self._change_draft(replace(self._draft, overturned=overturned))

    def measured(self, measured: Measured) -> None:
        """Fill the entry from the sensors; a digit typed over it makes it a compass reading."""
        north = North() if measured.north == "true" else self._magnetic_north()
        draft = self._draft.of_sensors(measured, north, self._settings.notation)
        self._change_draft(self._with_own_side(draft))

    def _change_draft(self, draft: EntryDraft) -> None:
        if draft == self._draft:
            return
        self._draft = draft
        self._save_draft()
        self._tell(Change.ENTRY | Change.TABS | Change.MESSAGE)

    # -- keeping --------------------------------------------------------------------------------------------

    def keep(self) -> bool:
        """Keep the entry: commit it, then clear for the next. False where nothing was kept."""
        entry = self._entry
        if not entry.state.ready:
            return self._refuse(Message(entry.state.missing, MessageKind.WARNING))
        try:
            reading = self._reading_of(entry)
            self._notebook.keep(reading, draft=self._draft.cleared().to_values())
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.TROUBLE))
        before = self._all.get(reading.reading_id)
        kind = StepKind.KEPT if before is None else StepKind.REVISED
        self._undo.push(Step(kind=kind, reading_id=reading.reading_id, before=before, draft=self._draft))
        self._draft, self._draft_saved = self._draft.cleared(), True
        self._just_struck = ""
        self._signal(SignalKind.KEPT)
        self._settle(reading, Message(f"Kept {self._text(reading)}.", offer=Offer.UNDO))
        return True

    def _reading_of(self, entry: Entry) -> Reading:
        now = self._clock()
        base = self._all.get(entry.draft.mending)
        if base is not None:
            revision = self._notebook.next_revision(base.reading_id)
            return mended_reading(entry, base, self._settings, revision=revision, now=now)
        return new_reading(
            entry,
            entry.draft.north or self._north(),
            reading_id=self._new_id(),
            now=now,
            fold=self._fold,
            outcrop=self._outcrop,
            settings=self._settings,
            place=self._place_for_reading(now),
        )

    # -- past readings --------------------------------------------------------------------------------------

    def mend(self, reading_id: str) -> None:
        """Load a past reading into the entry; Keep writes its next revision, clear gives up."""
        reading = self._all.get(reading_id)
        if reading is not None:
            self._change_draft(EntryDraft.of_reading(reading, self._settings.notation))

    def strike_out(self, reading_id: str) -> bool:
        """Strike a reading out; it stays in the notebook and no longer counts."""
        return self._set_struck(reading_id, struck=True)

    def restore_reading(self, reading_id: str) -> bool:
        """Let a reading that was struck out count again."""
        return self._set_struck(reading_id, struck=False)

    def _set_struck(self, reading_id: str, *, struck: bool) -> bool:
        reading = self._all.get(reading_id)
        if reading is None or reading.struck_out is struck:
            return False
        revised = self._revise(reading, {"struck_out": struck})
        if revised is None:
            return False
        self._undo.push(Step(kind=StepKind.REVISED, reading_id=reading_id, before=reading))
        self._just_struck = reading_id if struck else ""
        words = "Struck out" if struck else "Counts again:"
        self._settle(revised, Message(f"{words} {self._text(reading)}.", offer=Offer.UNDO))
        return True

    def undo(self) -> bool:
        """Take back what was done last: a keep, a mend, a striking out, a take-in, and what was done to many."""
        step = self._undo.newest()
        if step is None:
            return False
        if step.kind is StepKind.TAKEN_IN:
            return self.undo_take_in()
        if step.kind is StepKind.CORRECTED:
            return self._undo_many(step, "without the correction to north again", Offer.CORRECT_NORTH)
        if step.kind is StepKind.PLACED:
            return self._undo_many(step, "without a position again", Offer.PLACE_READINGS)
        reading = self._all[
            step.reading_id
        ]  # what was kept here goes only with the whole stack, on restoring
        # What was typed comes back into the entry, unless something else has been begun since.
        draft = step.draft if self._draft.empty else None
        if step.before is None:
            revised = self._revise(reading, {"struck_out": True}, draft)
        else:
            revised = self._revise(reading, content_of(step.before), draft)
        if revised is None:
            return False
        self._undo.pop()
        if draft is not None:
            self._draft = draft
        self._just_struck = ""
        self._settle(revised, Message(f"Taken back: {self._text(reading)}."))
        return True

    def name_reading(self, reading_id: str) -> None:
        """Name a reading."""
        self._named = reading_id
        self._tell(Change.NAMED)

    def name_nothing(self) -> None:
        """Name no reading any more."""
        self.name_reading("")

    # -- place ----------------------------------------------------------------------------------------------

    def choose_fold(self, name: str) -> bool:
        """Go to a fold, made if new, at the outcrop last read on it (the first reading makes a first one)."""
        return self._go(name, None)

    def choose_outcrop(self, name: str) -> bool:
        """Go to an outcrop of the fold, made if new."""
        return self._go(self._fold, name)

    def next_outcrop(self) -> bool:
        """Go to a new outcrop with the next name in the row."""
        return self.choose_outcrop(self.place.suggested_outcrop)

    def _go(self, fold: str, outcrop: str | None) -> bool:
        try:
            fold = checked_name(fold, "fold")
            made = None if outcrop is None else checked_name(outcrop, "outcrop")
            outcrop = self._last_outcrop(fold) if made is None else made
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.WARNING))
        other_fold = fold != self._fold
        self._fold, self._outcrop = fold, outcrop
        self._message = None
        self._by_hand, self._best_fix = None, self._fix
        try:
            self._look_up_position()
            self._notebook.make_place(fold, made)
            self._notebook.save_settings({"page.fold": fold, "page.outcrop": outcrop})
        except HingewiseError as error:  # the place is chosen all the same; the next reading makes it
            self._message = Message(str(error), MessageKind.TROUBLE)
        if other_fold:
            self._running = self._run()
            self._said = None
            self._named = self._just_struck = ""
            if self._draft.mending:
                self._draft = self._draft.cleared()
                self._save_draft()
            self._tell(EVERYTHING)
            self._refresh_history()
            self._seek_forecast()
        else:
            self._tell(_AFTER_OUTCROP)
        return True

    def _last_outcrop(self, fold: str) -> str:
        of_fold = [r.outcrop for r in self._all.values() if r.fold == fold]
        made = self._notebook.outcrops(fold)
        return of_fold[-1] if of_fold else made[-1] if made else FIRST_OUTCROP

    # -- settings -------------------------------------------------------------------------------------------

    def change_settings(self, settings: Settings) -> bool:
        """Use other settings from now on; False where they could not be stored (used all the same)."""
        old, self._settings = self._settings, settings
        draft = self._draft.in_notation(old.notation, settings.notation)
        self._undo.turn_drafts(lambda one: one.in_notation(old.notation, settings.notation))
        self._running.use(check_settings(settings))
        stored = True
        try:
            self._notebook.save_settings(
                settings.to_values(), draft=None if draft == self._draft else draft.to_values()
            )
        except HingewiseError as error:
            self._message = Message(str(error), MessageKind.TROUBLE)
            stored = False
        if draft != self._draft:
            self._draft, self._draft_saved = draft, stored
        self._tell(EVERYTHING)
        if check_settings(old) != check_settings(settings):
            self._refresh_history()
            self._seek_forecast()
        return stored

    # -- message --------------------------------------------------------------------------------------------

    def accept_offer(self) -> bool:
        """Do what the message offers."""
        message, self._message = self._message, None
        match message.offer if message else Offer.NONE:
            case Offer.UNDO:
                done = self.undo()
            case Offer.ADD_BACKUP if self._report.newest_backup is not None:
                done = self.add_backup(backup_at(self._report.newest_backup))
            case Offer.CORRECT_NORTH:
                done = self.correct_north() > 0
            case Offer.PLACE_READINGS:
                done = self.place_readings() > 0
            case _:
                done = False
        if not done and self._message is None:
            self._tell(Change.MESSAGE)
        return done
