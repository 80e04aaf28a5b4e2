"""The page and its position: where a reading is taken, and which north its azimuth is read against."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from analysis.errors import HingewiseError
from analysis.orient.position import Position
from fieldapp.entry import North
from fieldapp.late_north import corrected_late, waits_for_north
from fieldapp.making import NOT_CORRECTED
from fieldapp.page.core import PageCore
from fieldapp.planning import positions_of
from fieldapp.settings import NorthMode
from fieldapp.states import (
    Change,
    Message,
    MessageKind,
    Offer,
    PositionFix,
)
from fieldapp.undoing import Step, StepKind, content_of
from fieldapp.wording import age_text, counted

if TYPE_CHECKING:
    from datetime import datetime

    from analysis.files.reading import Reading
    from analysis.orient.north import NorthCorrection

FIX_GOOD_FOR_S = 300.0  # an older position is no longer where a reading is taken


class PageNorth(PageCore):
    """Position and north."""

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

    # -- north ----------------------------------------------------------------------------------------------

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
        return [reading for reading in self._all.values() if waits_for_north(reading)]

    def correct_north(self) -> int:
        """Correct readings kept before a correction to north was known, all or none; give their number."""
        before = self._not_corrected()
        try:
            corrected = [late for late in map(self._corrected_late, before) if late is not None]
            self._notebook.keep_all(corrected)
        except HingewiseError as error:
            self._refuse(Message(str(error), MessageKind.TROUBLE))
            return 0
        if not corrected:
            words = "The correction to north is still not known: it comes with a position."
            self._refuse(Message(words, MessageKind.WARNING))
            return 0
        done = {reading.reading_id for reading in corrected}
        all_before = tuple(reading for reading in before if reading.reading_id in done)
        self._undo.push(Step(kind=StepKind.CORRECTED, all_before=all_before))
        self._message = Message(f"{counted(len(corrected))} corrected to true north.", offer=Offer.UNDO)
        self._revised(corrected)
        return len(corrected)

    def _corrected_late(self, reading: Reading) -> Reading | None:
        """The next revision of a reading, corrected; None where its correction is still not known."""
        on = (reading.recorded_at or self._clock()).date()
        found = self._find_north(reading.north_reference, self._place_of(reading), on)
        if not found.is_true:
            return None
        waited = tuple(w for w in reading.warnings_kept if w != NOT_CORRECTED)
        late = corrected_late(replace(reading, warnings_kept=waited), found, self._clock())
        return replace(late, revision=self._notebook.next_revision(reading.reading_id))

    def _undo_correction(self, step: Step) -> bool:
        try:
            again = [
                replace(
                    self._all[one.reading_id].revised(at=self._clock(), **content_of(one)),
                    revision=self._notebook.next_revision(one.reading_id),
                )
                for one in step.all_before
            ]
            self._notebook.keep_all(again)
        except HingewiseError as error:
            return self._refuse(Message(str(error), MessageKind.TROUBLE))
        self._undo.pop()
        words = f"Taken back: {counted(len(again))} without the correction to north again."
        self._message = Message(words, offer=Offer.CORRECT_NORTH)
        self._revised(again)
        return True

    def _revised(self, readings: list[Reading]) -> None:
        """Bring the page up to date with revisions of many readings."""
        self._all.update((reading.reading_id, reading) for reading in readings)
        self._not_backed_up_yet += len(readings)
        self._rebuild()
        self._back_up_if_due()

    def _place_of(self, reading: Reading) -> Position | None:
        """Where a reading was taken; else where we are."""
        if reading.latitude_deg is not None and reading.longitude_deg is not None:
            return Position(reading.latitude_deg, reading.longitude_deg)
        place = self._north_place()
        return None if place is None else Position(*place)
