"""What every part of the page rests on: state, listeners, committing, and keeping up with the readings."""

from __future__ import annotations

from contextlib import suppress
from dataclasses import replace
from typing import TYPE_CHECKING, TypeVar, cast

from analysis.errors import HingewiseError
from analysis.fold.records import Verdict
from analysis.orient.north import north_correction
from fieldapp.entry import EntryDraft
from fieldapp.forecasting import Forecaster
from fieldapp.handing import HandOver
from fieldapp.notebook.backups import back_up, is_due
from fieldapp.notebook.ids import ReadingIds
from fieldapp.notebook.opening import OpeningReport
from fieldapp.running import RunningFold, check_settings, history_of
from fieldapp.settings import Settings
from fieldapp.states import (
    EVERYTHING,
    Change,
    Message,
    MessageKind,
    Offer,
    PositionFix,
    Signal,
    SignalKind,
)
from fieldapp.strip import strip_of
from fieldapp.undoing import UndoStack
from fieldapp.wording import (
    FIRST_FOLD,
    FIRST_OUTCROP,
    counted,
    reading_text,
)

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping
    from datetime import date, datetime

    from analysis.files.reading import Reading
    from analysis.orient.north import NorthCorrection
    from analysis.orient.position import Position
    from fieldapp.dispatch import Dispatch
    from fieldapp.forecasting import Forecast
    from fieldapp.notebook.store import Notebook
    from fieldapp.running import History

    NorthFinder = Callable[[str, Position | None, date], NorthCorrection]

T = TypeVar("T")

BACKUP_EVERY = 25  # readings after which the backup of the day is written again
_AFTER_READING = (
    Change.ENTRY
    | Change.STRIP
    | Change.TABS
    | Change.RECENT
    | Change.CHECK
    | Change.FORECAST
    | Change.PLAN
    | Change.HAND_OVER
    | Change.PLACE
    | Change.NAMED
    | Change.MESSAGE
)


class PageCore:
    """State of the page; see `fieldapp.outcrop` for its rules."""

    def __init__(
        self,
        notebook: Notebook,
        *,
        clock: Callable[[], datetime],
        dispatch: Dispatch,
        demo: bool = False,
        report: OpeningReport | None = None,
        north: NorthFinder = north_correction,
    ) -> None:
        self._notebook = notebook
        self._clock = clock
        self._dispatch = dispatch
        self._demo = demo
        self._find_north = north
        self._new_id = ReadingIds(clock)
        self._listeners: list[Callable[[Change], None]] = []
        self._signalled: list[Callable[[Signal], None]] = []
        self._cache: dict[str, tuple[Change, object]] = {}
        self._undo = UndoStack()
        self._hand_over = HandOver(notebook, clock)
        self._message: Message | None = None
        self._named = ""
        self._just_struck = ""
        self._fix: PositionFix | None = None
        self._best_fix: PositionFix | None = None  # of this outcrop
        self._by_hand: Position | None = None  # where the current outcrop lies, as typed
        self._position_shown = ""
        self._draft_saved = True
        self._backup_day: date | None = None
        self._not_backed_up_yet = 0  # revisions since the last backup that is there
        self._back_up_at = (
            BACKUP_EVERY  # of them; later after a backup that failed, which is not said each time
        )
        self._backing_up = False
        self._said: str | None = None  # the verdict last signalled; None until there is one to compare with
        self._closed = False
        self._report = report or OpeningReport()

        stored = notebook.settings()
        self._settings = Settings.from_values(stored)
        self._draft = EntryDraft.from_values(notebook.draft())
        self._all = notebook.standing()
        self._give_up_lost_mend()
        self._fold, self._outcrop = self._first_place(stored)
        if "page.fold" not in stored and not notebook.read_only:
            # Else readings taken in from elsewhere would say, at the next start, where this tablet stands.
            with suppress(HingewiseError):
                notebook.save_settings({"page.fold": self._fold, "page.outcrop": self._outcrop})
        self._look_up_position()
        self._running = self._run()
        self._forecaster = Forecaster(dispatch, self._forecast_came)
        self._message = _opening_message(self._report)
        self._refresh_history()
        self._seek_forecast()
        self._back_up_if_due()

    # -- listening ------------------------------------------------------------------------------------------

    def listen(self, listener: Callable[[Change], None]) -> Callable[[], None]:
        """Call `listener` with what has changed after each action; gives a function that ends it."""
        self._listeners.append(listener)
        return lambda: self._listeners.remove(listener) if listener in self._listeners else None

    def on_signal(self, listener: Callable[[Signal], None]) -> Callable[[], None]:
        """Call `listener` for what the device may do beside the screen; gives a function that ends it."""
        self._signalled.append(listener)
        return lambda: self._signalled.remove(listener) if listener in self._signalled else None

    def _tell(self, change: Change) -> None:
        for name in [name for name, (made_of, _) in self._cache.items() if made_of & change]:
            del self._cache[name]
        for listener in tuple(self._listeners):
            listener(change)

    def _signal(self, kind: SignalKind, spoken: str = "") -> None:
        for listener in tuple(self._signalled):
            listener(Signal(kind, spoken))

    def _cached(self, name: str, made_of: Change, make: Callable[[], T]) -> T:
        if name not in self._cache:
            self._cache[name] = (made_of, make())
        return cast("T", self._cache[name][1])

    @property
    def message(self) -> Message | None:
        """What there is to say, or None."""
        return self._message

    def dismiss_message(self) -> None:
        """Show no message any more."""
        self._message = None
        self._tell(Change.MESSAGE)

    def _refuse(self, message: Message) -> bool:
        self._message = message
        self._signal(SignalKind.REFUSED)
        self._tell(Change.MESSAGE)
        return False

    # -- committing -----------------------------------------------------------------------------------------

    def _save_draft(self) -> None:
        try:
            self._notebook.save_draft(self._draft.to_values())
        except HingewiseError as error:
            if self._draft_saved:  # said once, not at each key
                self._message = Message(str(error), MessageKind.TROUBLE)
            self._draft_saved = False
        else:
            self._draft_saved = True

    def flush(self) -> None:
        """Save the draft; it is already, unless the storage refused before."""
        if not self._draft_saved:
            self._save_draft()
            self._tell(Change.ENTRY | Change.MESSAGE)

    def _revise(
        self, reading: Reading, changes: Mapping[str, object], draft: EntryDraft | None = None
    ) -> Reading | None:
        """Commit a further revision of a reading; the page is not told yet. None where it was refused."""
        try:
            revision = self._notebook.next_revision(reading.reading_id)
            revised = replace(reading.revised(at=self._clock(), **changes), revision=revision)
            self._notebook.keep(revised, draft=None if draft is None else draft.to_values())
        except HingewiseError as error:
            self._refuse(Message(str(error), MessageKind.TROUBLE))
            return None
        return revised

    def _settle(self, reading: Reading, message: Message | None) -> None:
        """Bring the page up to date with a revision that is committed."""
        self._not_backed_up_yet += 1
        self._all[reading.reading_id] = reading
        epoch = self._running.epoch
        if reading.fold == self._fold or reading.reading_id in self._running.readings:
            self._running.put(reading)
        self._message = message
        self._tell(_AFTER_READING)
        if self._running.epoch != epoch:
            self._refresh_history()
        if self._running.check.blocked or self._running.check.verdict in (
            Verdict.TRANSECTED,
            Verdict.AXIAL_PLANAR,
        ):
            self._say_verdict()
        self._seek_forecast()
        self._back_up_if_due()

    def _say_verdict(self) -> None:
        """Signal a change of verdict; one that hangs on the forecast is told when the forecast is there."""
        check = self._running.check
        verdict = str(check.verdict)
        if check.verdict is Verdict.TRANSECTED:
            verdict += f" {check.sense}"
        if self._said not in (None, verdict):
            spoken = strip_of(check).headline if self._settings.spoken_verdict else ""
            self._signal(SignalKind.VERDICT, spoken)
        self._said = verdict

    def _text(self, reading: Reading) -> str:
        return reading_text(reading, self._settings.notation)

    # -- keeping up -----------------------------------------------------------------------------------------

    def _first_place(self, stored: dict[str, object]) -> tuple[str, str]:
        fold, outcrop = stored.get("page.fold"), stored.get("page.outcrop")
        if isinstance(fold, str) and isinstance(outcrop, str):
            return fold, outcrop
        if self._all:
            last = next(reversed(self._all.values()))
            return last.fold, last.outcrop
        return FIRST_FOLD, FIRST_OUTCROP

    def _run(self) -> RunningFold:
        of_fold = (r for r in self._all.values() if r.fold == self._fold)
        return RunningFold(self._fold, check_settings(self._settings), of_fold)

    def _reload(self) -> None:
        """Read everything from the notebook again."""
        self._all = self._notebook.standing()
        if self._give_up_lost_mend():
            self._save_draft()
        self._rebuild()

    def _give_up_lost_mend(self) -> bool:
        """Make a new reading of a mend whose reading is gone (its take-in was undone); tell whether it was so."""
        if not self._draft.mending or self._draft.mending in self._all:
            return False
        self._draft = replace(self._draft, mending="")
        return True

    def _look_up_position(self) -> None:
        """Find where the current outcrop was said to lie."""
        self._by_hand = self._notebook.position_by_hand(self._fold, self._outcrop)

    def _rebuild(self) -> None:
        self._look_up_position()
        self._running = self._run()
        self._named = self._just_struck = ""
        self._tell(EVERYTHING)
        self._refresh_history()
        self._seek_forecast()

    def _refresh_history(self) -> None:
        running = self._running
        entries, settings, epoch = running.entries(), running.settings, running.epoch
        self._dispatch(lambda: history_of(entries, settings, epoch), self._history_came, _raise)

    def _history_came(self, history: History) -> None:
        if not self._closed and self._running.take_history(history):
            self._tell(Change.CHECK)

    def _seek_forecast(self) -> None:
        running = self._running
        self._forecaster.seek(running.check, running.version)

    def _forecast_came(self, forecast: Forecast) -> None:
        if self._closed or not self._running.take_forecast(forecast.check, forecast.version):
            return
        self._tell(Change.STRIP | Change.FORECAST)
        self._say_verdict()

    # -- backups --------------------------------------------------------------------------------------------

    def back_up(self) -> None:
        """Write today's backup now, over an earlier one of today."""
        path, day, count = self._notebook.path, self._clock().date(), self._not_backed_up_yet
        self._backing_up = True
        self._dispatch(lambda: back_up(path, day), lambda _path: self._backed_up(count), self._not_backed_up)

    def _back_up_if_due(self) -> None:
        day = self._clock().date()
        if self._notebook.read_only or not self._all:
            return
        if day != self._backup_day:
            self._backup_day = day
            if not is_due(self._notebook.path, day):
                return
        elif self._backing_up or self._not_backed_up_yet < self._back_up_at:
            return
        self.back_up()

    def _backed_up(self, count: int) -> None:
        """Hear that there is a backup with the first `count` revisions that had none; later ones may be in it."""
        self._backing_up = False
        self._not_backed_up_yet = max(self._not_backed_up_yet - count, 0)
        self._back_up_at = BACKUP_EVERY
        if not self._closed:
            self._tell(Change.HAND_OVER)

    def _not_backed_up(self, error: Exception) -> None:
        self._backing_up = False
        self._back_up_at = self._not_backed_up_yet + BACKUP_EVERY
        if not isinstance(error, HingewiseError):
            raise error
        if self._closed:
            return
        self._message = Message(f"No backup today: {error}", MessageKind.WARNING)
        self._tell(Change.HAND_OVER | Change.MESSAGE)

    def close(self) -> None:
        """Save the draft if it is not, and close the notebook; does nothing for a page that is closed."""
        if self._closed:
            return
        self._closed = True
        self._forecaster.stop()
        try:
            self.flush()
            if self._not_backed_up_yet and not self._notebook.read_only:
                with suppress(HingewiseError):  # the readings themselves are on the disk
                    back_up(self._notebook.path, self._clock().date())
        finally:
            self._notebook.close()


def _raise(error: Exception) -> None:
    raise error  # to the log of mishaps


def _opening_message(report: OpeningReport) -> Message | None:
    if report.set_aside is not None:
        words = f"The notebook was damaged. {counted(report.recovered, 'revision')} saved from it"
        if report.doubtful:
            words += f", {report.doubtful} could not be"
        words += f"; the damaged file lies beside it as {report.set_aside.name}."
        offer = Offer.NONE if report.newest_backup is None else Offer.ADD_BACKUP
        return Message(words, MessageKind.TROUBLE, offer)
    if report.read_only:
        return Message(
            "This notebook may only be read here: nothing can be kept. Unlock the storage or open another.",
            MessageKind.TROUBLE,
        )
    return None
