"""The page and its north: what an azimuth is read against, and readings corrected once where that comes late."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from analysis.errors import HingewiseError
from analysis.orient.position import Position
from fieldapp.entry import North
from fieldapp.late_north import corrected_late, waits_for_north
from fieldapp.making import NOT_CORRECTED
from fieldapp.page.core import PageCore
from fieldapp.settings import NorthMode
from fieldapp.states import Change, Message, MessageKind, Offer
from fieldapp.undoing import Step, StepKind, content_of
from fieldapp.wording import counted

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable

    from analysis.files.reading import Reading
    from analysis.orient.north import NorthCorrection


class PageNorth(PageCore):
    """North."""

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
        """Where the declination is asked for: where we are, else at the newest reading with a position."""
        here = self._by_hand or self._fix
        if here is not None:
            return here.latitude_deg, here.longitude_deg
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

    def _correction_offered(self) -> Message | None:
        """Offer to correct what was kept without a correction that is known by now; None where there is nothing."""
        if self._magnetic_north().correction_deg is None or not self._not_corrected():
            return None
        count = counted(len(self._not_corrected()))
        return Message(f"{count} kept without a correction to north.", offer=Offer.CORRECT_NORTH)

    def correct_north(self) -> int:
        """Correct readings kept before a correction to north was known, all or none; give their number."""
        before = self._not_corrected()
        corrected = self._revise_many(before, self._corrected_late)
        if corrected is None:
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
        return corrected_late(replace(reading, warnings_kept=waited), found, self._clock())

    def _undo_many(self, step: Step, words: str, offer: Offer) -> bool:
        """Take back what was done to many readings at once."""
        again = self._revise_many(
            step.all_before,
            lambda one: self._all[one.reading_id].revised(at=self._clock(), **content_of(one)),
        )
        if again is None:
            return False
        self._undo.pop()
        self._message = Message(f"Taken back: {counted(len(again))} {words}.", offer=offer)
        self._revised(again)
        return True

    def _revise_many(
        self, readings: Iterable[Reading], change: Callable[[Reading], Reading | None]
    ) -> list[Reading] | None:
        """Commit a further revision of many readings, all of them or none; the page is not told yet.

        `change` gives the revision, or None for a reading that stays as it is. None where it was refused.
        """
        try:
            revised = [
                replace(one, revision=self._notebook.next_revision(one.reading_id))
                for one in map(change, readings)
                if one is not None
            ]
            self._notebook.keep_all(revised)
        except HingewiseError as error:
            self._refuse(Message(str(error), MessageKind.TROUBLE))
            return None
        return revised

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
