"""The presenter: the state of the page a geologist holds. It knows no window and no clock but the ones given.

Rules
-----
1. A reading is committed to the notebook before anything on the page says that it was kept. When the notebook
   refuses, the message says why in plain words and the draft stays.
2. The draft is saved at each key, and gives way to an empty one in the very transaction that keeps the
reading, so
   that a killed process neither loses a key nor keeps a reading twice.
3. Nothing is deleted: taking back is striking out, mending is a further revision. 4. Checks warn and offer a
mend; they never keep a geologist from keeping what was seen. Only digits that are no
   attitude, and a dip quadrant that the settings require, are asked for first.
5. The sums follow each reading. What is slow is computed elsewhere and taken only if it is still about the
   readings as they stand.
6. Each public method ends by telling the listeners, once, what has changed.

State records are in `fieldapp.states`, settings in `fieldapp.settings`. All methods belong to the user's
thread.
"""

from __future__ import annotations

from contextlib import suppress
from dataclasses import replace
from typing import TYPE_CHECKING, TypeVar, cast

from analysis.errors import HingewiseError
from analysis.files.reading import checked_name
from analysis.fold.records import Verdict
from analysis.orient.features import Feature
from analysis.orient.north import north_correction
from analysis.orient.position import Position
from fieldapp.checking import Around
from fieldapp.draft import Key
from fieldapp.entry import EntryDraft, North
from fieldapp.forecasting import Forecaster
from fieldapp.handing import HandOver
from fieldapp.making import NOT_CORRECTED, entry_of, mended_reading, new_reading
from fieldapp.naming import line_of, named_reading, nearest
from fieldapp.notebook.backups import back_up, is_due
from fieldapp.notebook.ids import ReadingIds
from fieldapp.notebook.opening import OpeningReport, open_notebook
from fieldapp.planning import plan_of, positions_of
from fieldapp.running import RunningFold, check_settings, history_of
from fieldapp.settings import NorthMode, PlaneNotation, Settings
from fieldapp.states import (
    EVERYTHING,
    Change,
    EntryState,
    FaultInput,
    FunnelState,
    HandOverState,
    Message,
    MessageKind,
    NamedReading,
    NetState,
    Offer,
    PlaceState,
    PlanState,
    PositionFix,
    ReadingLine,
    Signal,
    SignalKind,
    StripState,
    Tab,
    TakeInPreview,
)
from fieldapp.strip import strip_of
from fieldapp.undoing import Step, StepKind, UndoStack
from fieldapp.wording import (
    FEATURE_LABELS,
    FIRST_FOLD,
    FIRST_OUTCROP,
    age_text,
    counted,
    fold_title,
    next_name,
    outcrop_title,
    reading_text,
)

if TYPE_CHECKING:
    from collections.abc import Callable
    from datetime import date, datetime
    from pathlib import Path

    from analysis.files.reading import Reading
    from analysis.fold.records import FoldCheck
    from analysis.orient.north import NorthCorrection
    from fieldapp.dispatch import Dispatch
    from fieldapp.forecasting import Forecast
    from fieldapp.making import Entry
    from fieldapp.notebook.store import Notebook
    from fieldapp.running import History
    from fieldapp.states import Measured

    NorthFinder = Callable[[str, Position | None, date], NorthCorrection]

T = TypeVar("T")

RECENT = 12
BACKUP_EVERY = 25  # readings after which the backup of the day is written again
FIX_GOOD_FOR_S = 300.0  # an older position is no longer where a reading is taken
_AFTER_OUTCROP = (
    Change.PLACE | Change.ENTRY | Change.TABS | Change.CHECK | Change.PLAN | Change.MESSAGE
)
_AFTER_READING = (
    Change.ENTRY
    | Change.STRIP
    | Change.TABS
    | Change.RECENT
    | Change.CHECK
    | Change.FORECAST
    | Change.PLAN
    | Change.HAND_OVER
)


def open_page(
    path: Path,
    *,
    clock: Callable[[], datetime],
    dispatch: Dispatch,
    demo: bool = False,
    north: NorthFinder = north_correction,
) -> OutcropPage:
    """Open the notebook at `path`, or make it, and the page on it; raises NotebookError where neither works.

    `clock` gives aware UTC times. What opening found (a damaged file, read-only storage) is in
    `page.message`.
    """
    opening = open_notebook(path, clock)
    return OutcropPage(
        opening.notebook, clock=clock, dispatch=dispatch, demo=demo, report=opening.report, north=north
    )


class OutcropPage:
    """The page: what it shows as properties, what the geologist does as methods."""

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
        self._position_shown = ""
        self._draft_saved = True
        self._backup_day: date | None = None
        self._not_backed_up_yet = 0
        self._said: str | None = None  # the verdict last signalled; None until there is one to compare with
        self._closed = False
        self._report = report or OpeningReport()

        stored = notebook.settings()
        self._settings = Settings.from_values(stored)
        self._draft = EntryDraft.from_values(notebook.draft())
        self._all = notebook.standing()
        if self._draft.mending and self._draft.mending not in self._all:
            self._draft = self._draft.cleared()
        self._fold, self._outcrop = self._first_place(stored)
        self._running = self._run()
        self._forecaster = Forecaster(dispatch, self._forecast_came)
        self._message = _opening_message(self._report)
        self._refresh_history()
        self._seek_forecast()
        self._back_up_if_due()

    # -- listening -----------------------------------------------------------------------------------------

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

    # -- what the page shows -------------------------------------------------------------------------------

    @property
    def entry(self) -> EntryState:
        """The entry as it stands."""
        return self._entry.state

    @property
    def _entry(self) -> Entry:
        return self._cached("entry", Change.ENTRY, self._make_entry)

    def _make_entry(self) -> Entry:
        base = self._all.get(self._draft.mending)
        north = self._draft.north or self._north()
        around = Around(self._running.neighbours, base.outcrop if base else self._outcrop, north.added_deg)
        text = reading_text(base, self._settings.notation) if base else ""
        return entry_of(self._draft, self._settings, around, mending_text=text, saved=self._draft_saved)

    @property
    def strip(self) -> StripState:
        """The verdict strip."""
        return self._cached("strip", Change.STRIP, lambda: strip_of(self.check))

    @property
    def check(self) -> FoldCheck:
        """The check of the current fold."""
        return self._running.check

    @property
    def outcrop_check(self) -> FoldCheck:
        """The check of the current outcrop's readings alone."""
        return self._cached(
            "outcrop", Change.CHECK | Change.PLACE, lambda: self._running.check_of_outcrop(self._outcrop)
        )

    @property
    def net(self) -> NetState:
        """Readings and trail for the net."""
        return self._cached(
            "net", Change.CHECK, lambda: NetState(self._running.net_points(), self._running.trail)
        )

    @property
    def funnel(self) -> FunnelState:
        """The narrowing funnel."""
        return self._cached("funnel", Change.CHECK | Change.FORECAST | Change.SETTINGS, self._make_funnel)

    def _make_funnel(self) -> FunnelState:
        points = self._running.funnel
        return self._forecaster.funnel(points, self._settings.margin_deg, self._running.version)

    @property
    def tabs(self) -> tuple[Tab, ...]:
        """The four features with their counts."""
        return self._cached("tabs", Change.TABS | Change.PLACE | Change.ENTRY, self._make_tabs)

    def _make_tabs(self) -> tuple[Tab, ...]:
        here = self._running.sums_of_outcrop(self._outcrop)
        return tuple(
            Tab(
                feature,
                FEATURE_LABELS[feature],
                self._running.sums.count(feature),
                here.count(feature),
                feature is self._draft.feature,
            )
            for feature in Feature
        )

    @property
    def place(self) -> PlaceState:
        """Where we stand."""
        return self._cached("place", Change.PLACE | Change.SETTINGS, self._make_place)

    def _make_place(self) -> PlaceState:
        folds = tuple(dict.fromkeys((*self._notebook.folds(), self._fold)))
        outcrops = tuple(dict.fromkeys((*self._notebook.outcrops(self._fold), self._outcrop)))
        return PlaceState(
            fold=self._fold,
            outcrop=self._outcrop,
            fold_title=fold_title(self._fold),
            outcrop_title=outcrop_title(self._outcrop),
            position_text=self._position_text(),
            north_text=self._north_text(),
            folds=folds,
            outcrops=outcrops,
            suggested_outcrop=next_name(self._outcrop, outcrops),
            demo=self._demo,
        )

    @property
    def recent(self) -> tuple[ReadingLine, ...]:
        """The newest readings of the fold, newest first; struck-out ones only when just struck."""
        return self._cached(
            "recent",
            Change.RECENT | Change.SETTINGS | Change.PLACE,
            lambda: tuple(
                line
                for line in self.standing
                if not line.struck_out or line.reading_id == self._just_struck
            )[:RECENT],
        )

    @property
    def standing(self) -> tuple[ReadingLine, ...]:
        """All readings of the fold, newest first, struck-out ones included."""
        return self._cached(
            "standing",
            Change.RECENT | Change.SETTINGS | Change.PLACE,
            lambda: tuple(
                line_of(r, self._settings.notation) for r in reversed(self._running.readings.values())
            ),
        )

    @property
    def named(self) -> NamedReading | None:
        """The reading touched on the net."""
        reading = self._all.get(self._named)
        return None if reading is None else named_reading(reading, self._settings.notation)

    @property
    def plan(self) -> PlanState:
        """The plan sketch."""
        return self._cached("plan", Change.PLAN | Change.PLACE, self._make_plan)

    def _make_plan(self) -> PlanState:
        hinge = self.check.hinge
        fix = self._fix
        return plan_of(
            self._running.neighbours,
            self._notebook.outcrops(self._fold),
            self._outcrop,
            None if fix is None else (fix.latitude_deg, fix.longitude_deg),
            None if hinge is None else (hinge.line.trend_deg, hinge.line.plunge_deg),
        )

    @property
    def settings(self) -> Settings:
        """The settings."""
        return self._settings

    @property
    def message(self) -> Message | None:
        """What there is to say, or None."""
        return self._message

    @property
    def hand_over(self) -> HandOverState:
        """What the Hand over leaf tells."""
        return self._cached("hand over", Change.HAND_OVER, lambda: self._hand_over.state(len(self._all)))

    @property
    def fault(self) -> FaultInput:
        """The fault beside the current fold."""
        return self._cached("fault", Change.FAULT | Change.PLACE, lambda: self._notebook.fault(self._fold))

    @property
    def can_undo(self) -> bool:
        """Whether there is something to take back."""
        return bool(self._undo)

    # -- entry ---------------------------------------------------------------------------------------------

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
        self._change_draft(self._draft.pressed(key, digit))

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
        self._change_draft(self._draft.of_sensors(measured, north, self._settings.notation))

    def _change_draft(self, draft: EntryDraft) -> None:
        if draft == self._draft:
            return
        self._draft = draft
        self._save_draft()
        self._tell(Change.ENTRY | Change.TABS | Change.MESSAGE)

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

    # -- keeping -------------------------------------------------------------------------------------------

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
        self._undo.push(Step(kind, reading.reading_id, before, self._draft))
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
            fix=self._fix_for_reading(now),
        )

    def _refuse(self, message: Message) -> bool:
        self._message = message
        self._signal(SignalKind.REFUSED)
        self._tell(Change.MESSAGE)
        return False

    def _settle(self, reading: Reading, message: Message | None) -> None:
        """Bring the page up to date with a revision that is committed."""
        self._not_backed_up_yet += 1
        self._all[reading.reading_id] = reading
        epoch = self._running.epoch
        if reading.fold == self._fold or reading.reading_id in self._running.readings:
            self._running.put(reading)
        self._message = message
        change = _AFTER_READING | Change.MESSAGE | Change.NAMED
        if reading.outcrop not in self.place.outcrops or reading.fold not in self.place.folds:
            change |= Change.PLACE
        self._tell(change)
        if self._running.epoch != epoch:
            self._refresh_history()
        if self.check.blocked or self.check.verdict in (Verdict.TRANSECTED, Verdict.AXIAL_PLANAR):
            self._say_verdict()
        self._seek_forecast()
        self._back_up_if_due()

    def _say_verdict(self) -> None:
        """Signal a change of verdict; one that hangs on the forecast is told when the forecast is there."""
        check = self.check
        verdict = str(check.verdict)
        if check.verdict is Verdict.TRANSECTED:
            verdict += f" {check.sense}"
        if self._said not in (None, verdict):
            spoken = strip_of(check).headline if self._settings.spoken_verdict else ""
            self._signal(SignalKind.VERDICT, spoken)
        self._said = verdict

    # -- past readings -------------------------------------------------------------------------------------

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
        if not self._revise(reading, {"struck_out": struck}):
            return False
        self._undo.push(Step(StepKind.REVISED, reading_id, reading, None))
        self._just_struck = reading_id if struck else ""
        words = "Struck out" if struck else "Counts again:"
        self._settle(self._all[reading_id], Message(f"{words} {self._text(reading)}.", offer=Offer.UNDO))
        return True

    def _revise(
        self, reading: Reading, changes: dict[str, object], draft: EntryDraft | None = None
    ) -> bool:
        """Commit a further revision of a reading; the page is not told yet."""
        try:
            revision = self._notebook.next_revision(reading.reading_id)
            revised = replace(reading.revised(at=self._clock(), **changes), revision=revision)
            self._notebook.keep(revised, draft=None if draft is None else draft.to_values())
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.TROUBLE))
        self._revised = revised
        return True

    def undo(self) -> bool:
        """Take back what was done last: a keep, a mend, a striking out, a take-in."""
        step = self._undo.newest()
        if step is None:
            return False
        if step.kind is StepKind.TAKEN_IN:
            return self.undo_take_in()
        reading = self._all.get(step.reading_id)
        if reading is None:
            self._undo.pop()
            return False
        # What was typed comes back into the entry, unless something else has been begun since.
        draft = step.draft if self._draft.empty else None
        if step.before is None:
            done = self._revise(reading, {"struck_out": True}, draft)
        else:
            done = self._write_back(reading, step.before, draft)
        if not done:
            return False
        self._undo.pop()
        if draft is not None:
            self._draft = draft
        self._just_struck = ""
        self._settle(self._revised, Message(f"Taken back: {self._text(reading)}."))
        return True

    def _write_back(self, reading: Reading, before: Reading, draft: EntryDraft | None) -> bool:
        names = (n for n in before.__dataclass_fields__ if n not in ("reading_id", "revision", "revised_at"))
        return self._revise(reading, {name: getattr(before, name) for name in names}, draft)

    def name_at(self, x: float, y: float, reach: float = 0.06) -> NamedReading | None:
        """Name the reading nearest to a place on the net (x east, y north, radius 1), within reach."""
        self.name_reading(nearest(self._running.neighbours, x, y, reach) or "")
        return self.named

    def name_reading(self, reading_id: str) -> None:
        """Name a reading."""
        self._named = reading_id
        self._tell(Change.NAMED)

    def name_nothing(self) -> None:
        """Name no reading any more."""
        self.name_reading("")

    # -- place ---------------------------------------------------------------------------------------------

    def choose_fold(self, name: str) -> bool:
        """Go to a fold, made if new, at the outcrop last read on it."""
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
            if outcrop is None:
                outcrop = self._last_outcrop(fold)
            outcrop = checked_name(outcrop, "outcrop")
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.WARNING))
        other_fold = fold != self._fold
        self._fold, self._outcrop = fold, outcrop
        self._message = None
        try:
            self._notebook.make_place(fold, outcrop)
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

    # -- position and north --------------------------------------------------------------------------------

    def position_changed(self, fix: PositionFix | None) -> None:
        """Take the newest position, or None where there is none any more."""
        north = self._north()
        self._fix = fix
        change = Change.PLACE | Change.PLAN
        if self._north() != north:
            change |= Change.ENTRY
        if north.correction_deg is None and self._not_corrected() and self._magnetic_north().correction_deg:
            count = counted(len(self._not_corrected()))
            self._message = Message(f"{count} kept without a correction to north.", offer=Offer.CORRECT_NORTH)
            change |= Change.MESSAGE
        self._position_shown = self._position_text()
        self._tell(change)

    def tick(self) -> None:
        """Let the age of the position be told again, if its words have changed."""
        text = self._position_text()
        if text != self._position_shown:
            self._position_shown = text
            self._tell(Change.PLACE)

    def _position_text(self) -> str:
        fix = self._fix
        if fix is None:
            return ""
        age = age_text((self._clock() - fix.at).total_seconds())
        return age if fix.accuracy_m is None else f"±{fix.accuracy_m:.0f} m, {age}"

    def _fix_for_reading(self, now: datetime) -> PositionFix | None:
        """The position a reading is taken at: a fix that is fresh, else where the outcrop is known to lie."""
        fix = self._fix
        if fix is not None and (now - fix.at).total_seconds() <= FIX_GOOD_FOR_S:
            return fix
        place = positions_of(self._running.neighbours).get(self._outcrop)
        if place is None:
            return None
        return PositionFix(latitude_deg=place[0], longitude_deg=place[1], source="outcrop", at=now)

    def _north(self) -> North:
        """What a compass reading is read against now, and what is added to it."""
        return self._magnetic_north() if self._settings.north is NorthMode.MAGNETIC else North()

    def _magnetic_north(self) -> North:
        found = self._north_found()
        return North(reference="magnetic", correction_deg=found.correction_deg, model=found.model)

    def _north_found(self) -> NorthCorrection:
        today = self._clock().date()
        place = self._north_place()
        # The field changes by hundredths of a degree over a kilometre or a day: no need to ask at each key.
        key = f"north {today} {None if place is None else tuple(round(x, 2) for x in place)}"
        return self._cached(
            key,
            Change.SETTINGS,
            lambda: self._find_north("magnetic", None if place is None else Position(*place), today),
        )

    def _north_place(self) -> tuple[float, float] | None:
        """Where the declination is asked for: at the fix, else at the newest reading with a position."""
        if self._fix is not None:
            return self._fix.latitude_deg, self._fix.longitude_deg
        for reading in reversed(self._all.values()):
            if reading.latitude_deg is not None and reading.longitude_deg is not None:
                return reading.latitude_deg, reading.longitude_deg
        return None

    def _north_text(self) -> str:
        if self._settings.north is NorthMode.TRUE:
            return "true north"
        found = self._north_found()
        if found.correction_deg is None:
            return found.message
        return f"magnetic {found.correction_deg:+.1f}°"

    def _not_corrected(self) -> list[Reading]:
        return [r for r in self._all.values() if NOT_CORRECTED in r.warnings_kept]

    def correct_north(self) -> int:
        """Correct readings kept from magnetic north before a correction was known; give their number."""
        corrected = 0
        for reading in self._not_corrected():
            where = None
            if reading.latitude_deg is not None and reading.longitude_deg is not None:
                where = Position(reading.latitude_deg, reading.longitude_deg)
            elif (place := self._north_place()) is not None:
                where = Position(*place)
            found = self._find_north("magnetic", where, (reading.recorded_at or self._clock()).date())
            if found.correction_deg is None or reading.correction_deg is not None:
                continue
            name = "strike_deg" if reading.feature.is_plane else "trend_deg"
            changes: dict[str, object] = {
                name: found.azimuth_deg(getattr(reading, name)),
                "correction_deg": found.correction_deg,
                "correction_model": found.model,
                "warnings_kept": tuple(w for w in reading.warnings_kept if w != NOT_CORRECTED),
            }
            if not self._revise(reading, changes):
                break
            self._all[reading.reading_id] = self._revised
            corrected += 1
        if corrected:
            self._message = Message(f"{counted(corrected)} corrected to true north.")
            self._rebuild()
        return corrected

    # -- settings and fault --------------------------------------------------------------------------------

    def change_settings(self, settings: Settings) -> bool:
        """Use other settings from now on; False where they could not be stored (used all the same)."""
        old, self._settings = self._settings, settings
        draft = self._draft.in_notation(old.notation, settings.notation)
        if settings.notation is not PlaneNotation.STRIKE_DIP and old.notation is not settings.notation:
            draft = replace(draft, quadrant="")
        self._running.use(check_settings(settings))
        stored = True
        try:
            self._notebook.save_settings(settings.to_values())
        except HingewiseError as error:
            self._message = Message(str(error), MessageKind.TROUBLE)
            stored = False
        if draft != self._draft:
            self._draft = draft
            self._save_draft()
        self._tell(EVERYTHING)
        if check_settings(old) != check_settings(settings):
            self._refresh_history()
            self._seek_forecast()
        return stored

    def set_fault(self, fault: FaultInput) -> bool:
        """Note the fault beside the current fold."""
        try:
            self._notebook.set_fault(self._fold, fault)
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.TROUBLE))
        self._tell(Change.FAULT)
        return True

    # -- hand over -----------------------------------------------------------------------------------------

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
        self._undo.push(Step(StepKind.TAKEN_IN, "", take_in=taken.take_in))
        words = f"{counted(taken.revisions, 'revision')} taken in from {taken.source}."
        self._message = Message(words, offer=Offer.UNDO)
        self._reload()
        return True

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

    def back_up(self) -> None:
        """Write today's backup now, over an earlier one of today."""
        path, day = self._notebook.path, self._clock().date()
        self._not_backed_up_yet = 0
        self._dispatch(lambda: back_up(path, day), self._backed_up, self._not_backed_up)

    def _back_up_if_due(self) -> None:
        day = self._clock().date()
        if self._notebook.read_only or not self._all:
            return
        if day != self._backup_day:
            self._backup_day = day
            if not is_due(self._notebook.path, day):
                return
        elif self._not_backed_up_yet < BACKUP_EVERY:
            return
        self.back_up()

    def _backed_up(self, _path: Path) -> None:
        self._tell(Change.HAND_OVER)

    def _not_backed_up(self, error: Exception) -> None:
        if not isinstance(error, HingewiseError):
            raise error
        self._message = Message(f"No backup today: {error}", MessageKind.WARNING)
        self._tell(Change.HAND_OVER | Change.MESSAGE)

    def restore(self, backup: Path) -> bool:
        """Put the notebook back to a backup; how it is now is kept as a backup of its own first."""
        try:
            self._notebook.restore(backup)
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.TROUBLE))
        self._undo = UndoStack()
        self._settings = Settings.from_values(self._notebook.settings())
        self._draft = EntryDraft.from_values(self._notebook.draft())
        self._message = Message(f"The notebook is as in the backup {backup.stem}.")
        self._reload()
        return True

    def add_backup(self, backup: Path) -> bool:
        """Add what a backup holds and the notebook does not."""
        try:
            added = self._notebook.add_backup(backup)
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.TROUBLE))
        self._message = Message(f"{counted(added, 'revision')} added from the backup {backup.stem}.")
        self._reload()
        return True

    # -- message -------------------------------------------------------------------------------------------

    def accept_offer(self) -> bool:
        """Do what the message offers."""
        message, self._message = self._message, None
        match message.offer if message else Offer.NONE:
            case Offer.UNDO:
                return self.undo()
            case Offer.ADD_BACKUP if self._report.newest_backup is not None:
                return self.add_backup(self._report.newest_backup)
            case Offer.CORRECT_NORTH:
                return self.correct_north() > 0
            case _:
                self._tell(Change.MESSAGE)
                return False

    def dismiss_message(self) -> None:
        """Show no message any more."""
        self._message = None
        self._tell(Change.MESSAGE)

    def close(self) -> None:
        """Save the draft if it is not, and close the notebook."""
        self.flush()
        if self._not_backed_up_yet and not self._notebook.read_only:
            with suppress(HingewiseError):  # the readings themselves are on the disk
                back_up(self._notebook.path, self._clock().date())
        self._closed = True
        self._notebook.close()

    # -- keeping up ----------------------------------------------------------------------------------------

    def _text(self, reading: Reading) -> str:
        return reading_text(reading, self._settings.notation)

    def _reload(self) -> None:
        """Read everything from the notebook again."""
        self._all = self._notebook.standing()
        if self._draft.mending and self._draft.mending not in self._all:
            self._draft = replace(self._draft, mending="")
        self._rebuild()

    def _rebuild(self) -> None:
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
        self._tell(Change.STRIP | Change.FORECAST | Change.CHECK)
        self._say_verdict()


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
